"""The facts of many payments side by side, to be reckoned again with one of them changed.

`Facts` holds what a payment is made of; `pay` turns it into a `Payment` with the same bond arithmetic that made the terms' own
figures, so that no rule exists twice. A cause changes one field (another day count in the terms, another date, another face) and
reckons again. For a trade told by broker or desk the face, price, fees, side and date are the party's own: a wrong price explains
itself, and what is searched for is why the rest does not follow from it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from reconciler.bonds import accrual, settlement
from reconciler.bonds.terms import Terms
from reconciler.breaks.causes.cases import COUPON, REDEMPTION, TRADE, Cases
from reconciler.breaks.causes.variants import Payment, sums
from reconciler.money import MISSING, half_up

Array = np.ndarray[Any, Any]


@dataclass(frozen=True)
class Facts:
    """What each case's payment is reckoned from; `accrued` and `days` are given where a cause sets them itself, else MISSING."""

    terms: Terms
    bond_row: Array
    kind: Array
    side: Array
    face: Array
    price: Array
    fees: Array
    date: Array
    """The day interest runs to; `settled` is the day of settlement, on which factors and ratios are those in force."""
    settled: Array
    coupon_date: Array
    trade_date: Array
    digits: Array

    def changed(self, **fields: Any) -> Facts:
        """The same facts with some of them changed."""
        return replace(self, **fields)

    def with_terms(self, **columns: Any) -> Facts:
        """The same facts under changed terms of the bonds."""
        return replace(self, terms=replace(self.terms, **columns))


def of_cases(cases: Cases, terms: Terms) -> Facts:
    """Each case's facts: the party's own where it told them, else the terms'."""
    told, ours = cases.told, cases.terms
    trade = cases.kind == TRADE

    def own(name: str, missing: Any = MISSING) -> Array:
        theirs, mine = getattr(told, name), getattr(ours, name)
        silent = np.isnat(theirs) if theirs.dtype.kind == "M" else theirs == missing
        return np.where(silent | ~trade, mine, theirs)

    bank = cases.party == 3
    return Facts(
        terms=terms,
        bond_row=cases.bond_row,
        kind=cases.kind,
        side=own("side", 0).astype(np.int8),
        face=own("face"),
        price=own("price"),
        fees=own("fees"),
        date=np.where(bank, ours.date, own("date")),
        settled=np.where(bank, ours.date, own("date")),
        coupon_date=cases.coupon_date,
        trade_date=np.where(np.isnat(told.trade_date), ours.trade_date, told.trade_date),
        digits=cases.digits,
    )


def accrue(facts: Facts) -> tuple[Array, Array]:
    """Accrued interest (trades) or the coupon (coupons), minor units, and the days of a trade's accrual."""
    length = len(facts.kind)
    minor, days = np.zeros(length, np.int64), np.full(length, MISSING)
    t = np.flatnonzero(facts.kind == TRADE)
    if len(t):
        found = accrual.accrued(facts.terms, facts.bond_row[t], facts.date[t], facts.face[t])
        minor[t], days[t] = _on_settled_factor(facts, t, found), np.where(found.sound, found.days, MISSING)
    c = np.flatnonzero(facts.kind == COUPON)
    if len(c):
        minor[c] = accrual.coupon_amounts(facts.terms, facts.bond_row[c], facts.coupon_date[c], facts.face[c])
    return minor, days


def _on_settled_factor(facts: Facts, t: Array, found: accrual.Accrued) -> Array:
    """Accrued on the factor (index ratio) of the settlement date, also where interest is counted to another day."""
    if not len(facts.terms.factor_e12s):
        return found.minor
    factor = accrual.factors(facts.terms, facts.bond_row[t], facts.settled[t])
    again = np.flatnonzero((factor != found.factor_e12) & found.sound)
    out = found.minor.copy()
    a = again
    out[a] = half_up([facts.face[t[a]], found.rate_e9[a], found.numerator[a], factor[a]], [accrual.RATE, found.denominator[a], 10**12])
    return out


def principal(facts: Facts) -> Array:
    """Principal of a trade or redemption, minor units; 0 for coupons."""
    length = len(facts.kind)
    out = np.zeros(length, np.int64)
    t = np.flatnonzero(facts.kind == TRADE)
    if len(t):
        rows, dates = facts.bond_row[t], facts.date[t]
        above, below = settlement.price_ratio(facts.terms, rows, dates, facts.price[t])
        factor = accrual.factors(facts.terms, rows, dates)
        out[t] = half_up([facts.face[t], above, factor], [100, below, 10**12])
    r = np.flatnonzero(facts.kind == REDEMPTION)
    if len(r):
        out[r] = accrual.redemption_amounts(facts.terms, facts.bond_row[r], facts.face[r])
    return out


def pay(facts: Facts, main: Array | None = None, interest: tuple[Array, Array] | None = None) -> Payment:
    """The payment that follows from the facts; principal and interest may be given where they are known already."""
    main = principal(facts) if main is None else main
    minor, days = accrue(facts) if interest is None else interest
    fees = np.where(facts.kind == TRADE, facts.fees, 0)
    return Payment(
        kind=facts.kind,
        side=facts.side,
        face=facts.face,
        price=facts.price,
        principal=main,
        accrued=minor,
        accrued_days=days,
        fees=fees,
        amount=sums(facts.kind, facts.side, main, minor, fees),
        date=facts.date,
    )
