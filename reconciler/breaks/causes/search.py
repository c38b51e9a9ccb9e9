"""Every payment that differs is reckoned again under every known way of going wrong; what reproduces all that was told, fits.

Single causes first, then pairs of causes that change different parts of the payment, then slips of the pen on top of a cause. All
cases at once, one cause after the other: no loop over payments. What fits is kept in order; how many figures were tried is kept
too, because a fit means little without it (judging).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from reconciler.bonds.daycounts import NUMBERS
from reconciler.bonds.terms import Terms
from reconciler.breaks.causes import reckoning, slips
from reconciler.breaks.causes.accruals import ACCRUALS, DAY_COUNT, FROM_START, ONE_DAY, TO_TRADE, WHOLE_COUPONS
from reconciler.breaks.causes.cases import BANK, TRADE, Cases
from reconciler.breaks.causes.judging import LOOSE, accidental
from reconciler.breaks.causes.readings import READINGS
from reconciler.breaks.causes.reckoning import Facts
from reconciler.breaks.causes.variants import FACE, FEES, WHOLE, Cause, Payment, Variant, sums
from reconciler.money import MISSING, half_up

Array = np.ndarray[Any, Any]
Hypothesis = tuple[Variant, ...]

CHUNK = 16_384

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


@dataclass
class Fits:
    """What fits: flat pairs (case, hypothesis number), hypotheses in the order tried, and the chance of an accident per case."""

    case: list[Array] = field(default_factory=list)
    number: list[Array] = field(default_factory=list)
    hypotheses: list[Hypothesis] = field(default_factory=list)
    tried: int = 0
    figures: dict[Hypothesis, Payment] = field(default_factory=dict)

    def flat(self) -> tuple[Array, Array]:
        """Case numbers and hypothesis numbers."""
        if not self.case:
            return np.zeros(0, np.int64), np.zeros(0, np.int64)
        return np.concatenate(self.case), np.concatenate(self.number)


_FACTS = ("accrued_days", "accrued", "principal", "amount")


class Search:
    """The search over one stretch of cases."""

    def __init__(self, cases: Cases, terms: Terms) -> None:
        self.cases = cases
        self.facts = reckoning.of_cases(cases, terms)
        self.base = reckoning.pay(self.facts)
        self.told = {name: getattr(cases.told, name) for name in _FACTS}
        self.silent = {name: column == MISSING for name, column in self.told.items()}
        self._silent_amounts = bool(self.silent["amount"].any())
        self.right = self._right()
        self.fits = Fits()
        self.numbers: dict[str, int] = {}
        self.open = np.ones(len(cases), np.bool_)
        self.tried: list[tuple[Payment, Array, Array]] = []
        self._kinds: dict[tuple[tuple[int, ...], ...], Array] = {}

    def _right(self) -> Array:
        """The figure that the told one is measured against: the amount as the terms have it."""
        return self.cases.terms.amount

    def consistent(self, payment: Payment, rows: Array) -> Array:
        """Where every told figure but the amount comes out, for some of the cases."""
        ok = np.ones(len(rows), np.bool_)
        for name in _FACTS[:3]:
            ok &= self.silent[name][rows] | (self.told[name][rows] == getattr(payment, name)[rows])
        return ok

    def try_out(self, hypothesis: Hypothesis, payment: Payment, applies: Array, amount: Array | None = None) -> None:
        """Holds one recomputed payment against what was told, for the cases still open; `amount` stands for the payment's own."""
        amount = payment.amount if amount is None else amount
        self.fits.tried += 1
        self.tried.append((payment, amount, applies))
        near = np.flatnonzero((self.told["amount"] == amount) & applies & self.open)
        if self._silent_amounts:
            near = np.union1d(near, np.flatnonzero(self.silent["amount"] & applies & self.open))
        found = near[self.consistent(payment, near)] if len(near) else near
        if len(found):
            self.fits.case.append(found)
            self.fits.number.append(np.full(len(found), len(self.fits.hypotheses)))
            self.fits.hypotheses.append(hypothesis)

    def kinds(self, *variants: Variant) -> Array:
        """Where all the variants apply to the kind of payment."""
        key = tuple(variant.kinds for variant in variants)
        if key not in self._kinds:
            ok = np.ones(len(self.cases), np.bool_)
            for kinds in key:
                ok &= np.isin(self.cases.kind, kinds)
            self._kinds[key] = ok
        return self._kinds[key]

    def chances(self, rows: Array) -> Array:
        """Expected accidental fits for some of the cases, given all figures tried so far.

        Only figures that the other told facts allow can fit by accident. Where the told accrued may be the noise itself and the amount
        merely follows it, the accrued of every try counts.
        """
        right, told = self.right[rows], self.told["amount"][rows]
        accrued = self.cases.terms.accrued[rows]
        strict, loose = np.empty((len(rows), len(self.tried)), np.int64), np.empty((len(rows), len(self.tried)), np.int64)
        for place, (payment, amount, applies) in enumerate(self.tried):
            known = applies[rows] & (amount[rows] != MISSING)
            strict[:, place] = np.where(known & self.consistent(payment, rows), amount[rows], right)
            mine = payment.accrued[rows]
            loose[:, place] = np.where(known & (mine != MISSING), mine, accrued)
        by_amount = accidental(right, told, strict)
        asked = ~self.silent["accrued"][rows] & (self.told["accrued"][rows] != accrued)
        by_accrued = accidental(accrued, np.where(asked, self.told["accrued"][rows], accrued), loose)
        return np.where(asked & (by_accrued >= LOOSE), np.maximum(by_amount, by_accrued), by_amount)


def _differs(payment: Payment, base: Payment) -> Array:
    return (payment.amount != base.amount) | (payment.accrued != base.accrued) | (payment.principal != base.principal)


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
    for variant, changed in _factors(facts):
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


def _as_told_by_another(search: Search) -> None:
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


def _factors(facts: Facts) -> Iterator[tuple[Variant, Facts]]:
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


def _slipped(search: Search, hypothesis: Hypothesis, payment: Payment, lowest: int = 0) -> None:
    """Slips of the pen in the amount, on top of a payment reckoned some way."""
    for slip, _place, typed in slips.candidates(payment.amount, lowest):
        variant = Variant(SLIP_CAUSES[slip.name], "whole", f"{slip.wording} in the amount", lambda p: p, (0, 1, 2))
        search.try_out((*hypothesis, variant), payment, typed != MISSING, typed)


def _slipped_parts(search: Search) -> None:
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


def run(cases: Cases, terms: Terms) -> list[tuple[Array, Search, Array]]:
    """Searches all cases, a stretch at a time: (case numbers, search, chance of an accident per case)."""
    out = []
    for first in range(0, len(cases), CHUNK):
        rows = np.arange(first, min(first + CHUNK, len(cases)))
        search = Search(cases.take(rows), terms)
        out.append((rows, search, _search(search)))
    return out


def _search(search: Search) -> Array:
    search.try_out((Variant(FOLLOWS, "told", "the facts are as told", lambda p: p),), search.base, _told_differs(search))
    _as_told_by_another(search)
    done = []
    for variant, payment in singles(search):
        search.try_out((variant,), payment, search.kinds(variant) & _differs(payment, search.base))
        done.append((variant, payment))
    _slipped(search, (), search.base)
    _slipped_parts(search)
    chance = np.ones(len(search.cases))
    explained = _explained(search)
    chance[explained] = search.chances(explained)
    search.open[explained] = False
    if search.open.any():
        _pairs(search, done, chance)
    return chance


def _told_differs(search: Search) -> Array:
    """Where the party's own facts give another amount than the terms'."""
    return (search.base.amount != search.cases.terms.amount) | (search.base.accrued != search.cases.terms.accrued)


def _explained(search: Search) -> Array:
    case, _number = search.fits.flat()
    return np.unique(case)


def _pairs(search: Search, done: list[tuple[Variant, Payment]], chance: Array) -> None:
    """Two causes at once, for the cases that no single one explains."""
    rest = np.flatnonzero(search.open)
    part = Search(search.cases.take(rest), search.facts.terms)
    # a variant that changes nothing here can be no half of a pair
    few = [
        (variant, _rows(payment, rest))
        for variant, payment in done
        if (_differs(payment, search.base) & search.kinds(variant))[rest].any()
    ]
    by_part: dict[str, list[tuple[Variant, Payment]]] = {}
    for variant, payment in few:
        by_part.setdefault(variant.part, []).append((variant, payment))
    _two_accruals(part)
    _two_parts(part, by_part)
    _with_wholes(part, few)
    _faces(part, by_part.get("face", []))
    before = len(part.fits.case)
    _slips_on_top(part, few)
    unproven = np.unique(np.concatenate(part.fits.case[before:])) if len(part.fits.case) > before else np.zeros(0, np.int64)
    _join(search, part, rest, chance)
    chance[rest[unproven]] = 1.0


def _two_parts(part: Search, by_part: dict[str, list[tuple[Variant, Payment]]]) -> None:
    """Two of accrual, price and fees: their differences add up, so the amount is the sum of both changes."""
    base = part.base
    for a, b in (("accrual", "price"), ("accrual", "fees"), ("price", "fees")):
        changes = [(v, p, (p.amount != MISSING) & (p.amount != base.amount)) for v, p in by_part.get(b, [])]
        for one, first in by_part.get(a, []):
            usable = (first.amount != MISSING) & _differs(first, base)
            for two, second, changed in changes:
                both = part.kinds(one, two) & usable & changed
                if not both.any():
                    continue
                principal = second.principal if b == "price" else first.principal
                joined = first.changed(principal=principal)
                part.try_out((one, two), joined, both, first.amount + second.amount - base.amount)


def _with_wholes(part: Search, few: list[tuple[Variant, Payment]]) -> None:
    """A changed part, put together in a wrong way as well."""
    base = part.base
    for one, first in few:
        if one.part == "whole":
            continue
        changed = _differs(first, base) & (first.amount != MISSING)
        for two in WHOLE:
            applies = part.kinds(one, two) & changed
            if not applies.any():
                continue
            amount = np.asarray(two.make(first, part.cases.digits))
            part.try_out((one, two), first, applies & (amount != first.amount), amount)


def _faces(part: Search, faces: list[tuple[Variant, Payment]]) -> None:
    """A wrong face together with a wrong accrual or price."""
    factors = {variant.wording: changed for variant, changed in _factors(part.facts)}
    for one, payment in faces:
        usable = payment.amount != MISSING
        facts = factors.get(one.wording) or part.facts.changed(face=np.where(usable, payment.face, 0))
        for two in ACCRUALS:
            made = reckoning.pay(facts, payment.principal, two.make(facts))  # type: ignore[arg-type]
            part.try_out((one, two), made, usable & part.kinds(one, two) & (made.accrued != payment.accrued))


def _two_accruals(part: Search) -> None:
    """Two faults in the accrual, where the party told its accrued: the days, and what was made of them."""
    base = part.base
    asked = np.flatnonzero(~part.silent["accrued"] & (part.told["accrued"] != base.accrued) & part.open)
    if not len(asked):
        return
    small = Search(part.cases.take(asked), part.facts.terms)
    alone = {variant: reckoning.pay(small.facts, small.base.principal, variant.make(small.facts)) for variant in ACCRUALS}  # type: ignore[arg-type]
    for first in ACCRUALS:
        if first.cause in (DAY_COUNT, ONE_DAY, TO_TRADE, FROM_START) and _differs(alone[first], small.base).any():
            _on_top(small, first, alone)
    _join(part, small, asked, None)


def _on_top(small: Search, first: Variant, alone: dict[Variant, Payment]) -> None:
    change = first.make.change  # type: ignore[attr-defined]
    base, facts = small.base, change(small.facts)
    one = alone[first]
    for second in ACCRUALS:
        if second.cause is first.cause or second.cause in (TO_TRADE, ONE_DAY):
            continue
        if second.cause in WHOLE_COUPONS:
            two = alone[second]
            accrued = one.accrued + two.accrued - base.accrued
            days = one.accrued_days + two.accrued_days - base.accrued_days
            made = one.changed(accrued=accrued, accrued_days=days, amount=one.amount + two.amount - base.amount)
            applies = (one.amount != MISSING) & (two.amount != MISSING) & _differs(two, base)
        else:
            minor, days = second.make(facts)  # type: ignore[misc]
            made = reckoning.pay(small.facts, base.principal, (minor, days))
            applies = _differs(made, one)
        small.try_out((first, second), made, small.kinds(first, second) & applies & _differs(one, base))


def _slips_on_top(part: Search, few: list[tuple[Variant, Payment]]) -> None:
    """A slip of the pen in the amount on top of a cause; so many figures fit that this is never proof."""
    told = part.told["amount"]
    for one, payment in few:
        fits = _differs(payment, part.base) & part.kinds(one) & part.open & (payment.amount != MISSING)
        rows = np.flatnonzero(fits)
        rows = rows[part.consistent(payment, rows)]
        if not len(rows):
            continue
        which = slips.which(payment.amount[rows], told[rows])
        for number, slip in enumerate(slips.SLIPS):
            hit = rows[which == number]
            if len(hit):
                variant = Variant(SLIP_CAUSES[slip.name], "whole", f"{slip.wording} in the amount", lambda p: p, (0, 1, 2))
                part.fits.case.append(hit)
                part.fits.number.append(np.full(len(hit), len(part.fits.hypotheses)))
                part.fits.hypotheses.append((one, variant))
        part.fits.tried += 1


def _rows(payment: Payment, rows: Array) -> Payment:
    return Payment(**{name: column[rows] for name, column in vars(payment).items()})


def _join(search: Search, part: Search, rest: Array, chance: Array | None) -> None:
    """What the pairs explained, put among the rest."""
    offset = len(search.fits.hypotheses)
    search.fits.hypotheses += part.fits.hypotheses
    search.fits.case += [rest[case] for case in part.fits.case]
    search.fits.number += [number + offset for number in part.fits.number]
    search.fits.tried += part.fits.tried
    explained = _explained(part)
    if chance is None:
        # tries on some of the cases only: elsewhere they gave nothing
        search.tried += [(_spread(p, rest, len(search.cases)), *_spread_two(amount, applies, rest, len(search.cases))) for p, amount, applies in part.tried]
    elif len(explained):
        before = [(_rows(payment, rest), amount[rest], applies[rest]) for payment, amount, applies in search.tried]
        part.tried = before + part.tried
        chance[rest[explained]] = part.chances(explained)


def _spread(payment: Payment, rows: Array, length: int) -> Payment:
    out = {}
    for name, column in vars(payment).items():
        whole = np.zeros(length, column.dtype)
        whole[rows] = column
        out[name] = whole
    return Payment(**out)


def _spread_two(amount: Array, applies: Array, rows: Array, length: int) -> tuple[Array, Array]:
    whole, where = np.full(length, MISSING), np.zeros(length, np.bool_)
    whole[rows], where[rows] = amount, applies
    return whole, where
