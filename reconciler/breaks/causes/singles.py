"""Every single way of going wrong, with the payment it gives, and the tries that are not variants of a part.

The lists of variants lie with their families; here they are put to work on a stretch of cases: prices read wrongly, bills on another
basis, factors ignored, slips of the pen in the amount or its parts, and the bank that simply followed somebody else's figure.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from reconciler.bonds.daycounts import NUMBERS
from reconciler.breaks.causes import reckoning, slips
from reconciler.breaks.causes.accruals import ACCRUALS
from reconciler.breaks.causes.cases import BANK, TRADE
from reconciler.breaks.causes.readings import READINGS
from reconciler.breaks.causes.reckoning import Facts
from reconciler.breaks.causes.trying import Hypothesis, Search
from reconciler.breaks.causes.variants import FACE, FEES, WHOLE, Cause, Payment, Variant, sums
from reconciler.money import MISSING, half_up

Array = np.ndarray[Any, Any]

PRICE_FAMILY = "price"
PRICES: tuple[Variant, ...] = tuple(
    Variant(
        Cause(r.name, PRICE_FAMILY if "first" not in r.name else "rounding", "Ask for the price as dealt, written in decimals.", 0.8),
        "price", r.wording, r.read, (TRADE,), r.weight,
    )
    for r in READINGS
)  # fmt: skip

UNSCALED = Cause("factor ignored", "face", "Quote the factor and its date.", 0.8)
OLD_FACTOR = Cause("factor of another date", "face", "Load the factor in force.", 0.6)
BY_BROKER = Cause("paid as the broker confirmed", "as told by another", "Settle it with the broker first; the bank followed the confirmation.", 2.0)
BY_DESK = Cause("paid as our ticket says", "as told by another", "Put the ticket right; the bank followed it.", 2.0)
DISCOUNT = Cause("discount taken for a yield", "price", "Say whether the rate is a discount or a yield.", 0.8)
BASIS = Cause("another basis of days", "day count", "Quote the basis of the market, 360 or 365.", 0.7)
FOLLOWS = Cause("follows from the facts told", "told facts", "Settle the fact that differs; the amount follows from it.", 1.0)


def slip_cause(slip: slips.Slip) -> Cause:
    """The cause behind a slip of the pen."""
    return Cause(slip.name, "slip", "Ask for the figure to be corrected.", slip.weight)


SLIP_CAUSES = {slip.name: slip_cause(slip) for slip in slips.SLIPS}


def singles(search: Search) -> Iterator[tuple[Variant, Payment]]:
    """Every single cause with the payment it gives, MISSING figures where it cannot be."""
    facts, base = search.facts, search.base
    interest = (base.accrued, base.accrued_days)
    for variant in ACCRUALS:
        yield variant, reckoning.pay(facts, base.principal, variant.make(facts))  # type: ignore[arg-type]
    plain_price = facts.terms.quote[facts.bond_row] < 2
    for variant in PRICES:
        price = np.where(plain_price & (facts.kind == TRADE), np.asarray(variant.make(facts.price)), MISSING)
        yield variant, reckoning.pay(facts.changed(price=price), None, interest)
    for variant, main in _discounts(facts):
        yield variant, reckoning.pay(facts, main, interest)
    for variant in FACE:
        face = np.asarray(variant.make(facts.face))
        safe = np.where(face == MISSING, 0, face)
        yield variant, _void(reckoning.pay(facts.changed(face=safe)), face == MISSING)
    for variant, changed in factors(facts):
        yield variant, reckoning.pay(changed)
    for variant in FEES:
        yield variant, _with_fees(base, np.asarray(variant.make(base)))
    for variant in WHOLE:
        yield variant, base.changed(amount=np.asarray(variant.make(base, search.cases.digits)))


def _discounts(facts: Facts) -> Iterator[tuple[Variant, Array]]:
    """Principal of bills whose discount was read as a yield, or reckoned on the other basis."""
    bills = (facts.terms.quote[facts.bond_row] == 2) & (facts.kind == TRADE) & (facts.price != MISSING)
    if not bills.any():
        return
    at = np.flatnonzero(bills)
    days = (facts.terms.maturity[facts.bond_row[at]] - facts.date[at]).astype(np.int64)
    own = np.where(facts.terms.day_count[facts.bond_row[at]] == NUMBERS["Act/365F"], 365, 360)
    right = reckoning.principal(facts)

    def with_principal(found: Array) -> Array:
        out = right.copy()
        out[at] = found
        return out

    hundred = 100 * 10**9
    rate = half_up([facts.price[at]], [1000])
    for basis, words in ((own, ""), (725 - own, " on the other basis of days")):
        whole = hundred * basis
        found = half_up([facts.face[at], whole], [whole + rate * days])
        yield Variant(DISCOUNT, "price", "the rate is taken for a yield" + words, lambda p: p), with_principal(found)
    other = hundred * (725 - own)
    yield Variant(BASIS, "price", "the discount is reckoned on the other basis of days", lambda p: p), with_principal(
        half_up([facts.face[at], other - rate * days], [other])
    )


def as_told_by_another(search: Search) -> None:
    """The bank paid what the broker or the desk told, not what the terms say."""
    cases, base = search.cases, search.base
    for cause, told, words in (
        (BY_BROKER, cases.broker_amount, "the broker's figure is paid"), (BY_DESK, cases.desk_amount, "our ticket's figure is paid"),
    ):  # fmt: skip
        variant = Variant(cause, "whole", words, lambda p: p)
        search.try_out((variant,), base.changed(amount=told), (cases.party == BANK) & (told != MISSING) & (told != base.amount))


def _void(payment: Payment, where: Array) -> Payment:
    return payment.changed(amount=np.where(where, MISSING, payment.amount))


def _with_fees(base: Payment, fees: Array) -> Payment:
    return base.changed(fees=fees, amount=sums(base.kind, base.side, base.principal, base.accrued, fees))


def factors(facts: Facts) -> Iterator[tuple[Variant, Facts]]:
    """The facts with factors and index ratios ignored, and with those before the last."""
    terms = facts.terms
    if not len(terms.factor_e12s):
        return
    yield Variant(UNSCALED, "face", "the factor (or index ratio) is ignored", lambda f: f, (0, 1, 2)), facts.with_terms(
        factor_e12s=np.full(len(terms.factor_e12s), 10**12)
    )
    moved = np.roll(terms.factor_e12s, 1)
    moved[terms.factor_offsets[:-1][np.diff(terms.factor_offsets) > 0]] = 10**12
    yield Variant(OLD_FACTOR, "face", "the factor (or index ratio) before the last is used", lambda f: f, (0, 1, 2)), facts.with_terms(
        factor_e12s=moved
    )


def slipped(search: Search, hypothesis: Hypothesis, payment: Payment, lowest: int = 0) -> None:
    """Slips of the pen in the amount, on top of a payment reckoned some way."""
    for slip, _place, typed in slips.candidates(payment.amount, lowest):
        variant = Variant(SLIP_CAUSES[slip.name], "whole", f"{slip.wording} in the amount", lambda p: p, (0, 1, 2))
        search.try_out((*hypothesis, variant), payment, typed != MISSING, typed)


def slipped_parts(search: Search) -> None:
    """Slips in the told accrued or its days, with the amount following or not."""
    base = search.base
    for name, words in (("accrued", "accrued"), ("principal", "principal")):
        asked = ~search.silent[name] & (search.told[name] != getattr(base, name))
        if not asked.any():
            continue
        for slip, _place, typed in slips.candidates(getattr(base, name)):
            variant = Variant(SLIP_CAUSES[slip.name], "accrual", f"{slip.wording} in the {words}", lambda p: p)
            alone = base.changed(**{name: typed})
            following = alone.changed(amount=sums(base.kind, base.side, alone.principal, alone.accrued, base.fees))
            search.try_out((variant,), alone, asked & (typed != MISSING))
            search.try_out((variant,), following, asked & (typed != MISSING))


def told_differs(search: Search) -> Array:
    """Where the party's own facts give another amount than the terms'."""
    return (search.base.amount != search.cases.terms.amount) | (search.base.accrued != search.cases.terms.accrued)
