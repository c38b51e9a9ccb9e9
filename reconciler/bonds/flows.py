"""What a bond still pays after a day, per 100 of face, and how far off in coupon periods each payment is.

Yields discount payments by periods, not by days: the distance of a date is its place on the coupon grid, whole at grid dates and in
between the share of the period's days that has gone by: actual days, or thirty-day months for the 30/360 family (SIA Standard
Securities Calculation Methods, from memory; 31 CFR 356 Appendix B for the Treasury's). Figures are float64: yields are measurements,
money is not reckoned here. Floating and linked bonds are priced on the rate and ratio in force: a common simplification.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds import accrual, daycounts, markets, schedules
from reconciler.bonds.daycounts import NUMBERS
from reconciler.bonds.grid import Grid
from reconciler.bonds.terms import Terms, in_force
from reconciler.money import MISSING

Array = np.ndarray[Any, Any]

_ACT_365F = NUMBERS["Act/365F"]
_THIRTY = np.array([name.startswith("30") for name in NUMBERS])


@dataclass(frozen=True)
class Flows:
    """Payments after settlement, flat and in order: `owner` is the place among the rows asked for, `time` in coupon periods.

    Per row: `broken` is the part of a period from settlement to the next grid date, `frequency` the yield's periods a year,
    `count` the number of payments, `accrued` per 100, `ex` whether the next coupon stays with the seller.
    """

    owner: Array
    time: Array
    amount: Array
    broken: Array
    frequency: Array
    coupons: Array
    accrued: Array
    years: Array
    sound: Array


def compounding(terms: Terms, rows: Array) -> Array:
    """Periods a year of the yield: the coupon's; for zeros the market's (0: simple interest), else 1."""
    frequency = terms.frequency[rows]
    told = np.where(terms.compounding[rows] == MISSING, 1, terms.compounding[rows])
    return np.where(frequency > 0, frequency, told)


def _places(terms: Terms, rows: Array, grid: Grid, dates: Array) -> Array:
    """Each date's place on the grid, in periods, growing with time."""
    k = grid.number_at_or_before(dates)
    low, high = grid.at(k), grid.at(k - 1)
    share = (dates - low).astype(np.float64) / np.maximum((high - low).astype(np.float64), 1)
    day_count = terms.day_count[rows]
    thirty = np.flatnonzero(_THIRTY[day_count] & (terms.frequency[rows] > 0) & (dates > low))
    if len(thirty):
        t = thirty
        one = np.ones(1, np.int64)
        part = daycounts.Period(
            terms.frequency[rows[t]], low[t], high[t], 0 * one, one, one, 0 * one, one, terms.maturity[rows[t]],
            terms.end_of_month[rows[t]],
        )  # fmt: skip
        gone = daycounts.accrued_days(day_count[t], low[t], dates[t], part)
        share[t] = gone * terms.frequency[rows[t]] / 360.0
    return -k + share


def of(terms: Terms, rows: Array, settle: Array) -> Flows:
    """The payments of each bond after each settlement day."""
    rows, settle = np.asarray(rows), np.asarray(settle, "datetime64[D]")
    maturity = terms.maturity[rows]
    interest = accrual.accrued(terms, rows, settle, np.zeros(len(rows), np.int64))
    sound = interest.sound & (settle < maturity)
    usable = np.flatnonzero(sound)
    yearly = np.where(terms.frequency[rows] > 0, terms.frequency[rows], np.maximum(compounding(terms, rows), 1))
    grid = _YieldGrid(terms, rows, yearly)
    here = _places(terms, rows, grid, settle)
    owner, dates, amount = _coupons(terms, rows, settle, usable, interest.ex)
    owner = np.concatenate([owner, usable])
    dates = np.concatenate([dates, maturity[usable]])
    amount = np.concatenate([amount, _redemption(terms, rows[usable], settle[usable])])
    order = np.lexsort((np.arange(len(owner)), dates, owner))
    owner, dates, amount = owner[order], dates[order], amount[order]
    time = _places(terms, rows[owner], grid.take(owner), dates) - here[owner]
    with np.errstate(divide="ignore", invalid="ignore"):
        accrued = interest.rate_e9 / 1e9 * interest.numerator / interest.denominator
    return Flows(
        owner=owner,
        time=time,
        amount=amount,
        broken=np.where(here == np.floor(here), 1.0, np.ceil(here) - here),
        frequency=yearly,
        coupons=np.bincount(owner, minlength=len(rows)) - 1,
        accrued=np.where(sound, accrued, np.nan),
        years=(maturity - settle).astype(np.float64) / 365.0,
        sound=sound,
    )


class _YieldGrid(Grid):
    """The grid on which yields count periods: the coupon grid, or for zeros one of the yield's own frequency."""

    def __init__(self, terms: Terms, rows: Array, yearly: Array) -> None:
        super().__init__(terms, rows)
        self.step = (12 // np.maximum(yearly, 1)).astype(np.int64)

    def take(self, places: Array) -> _YieldGrid:
        """The grids of some of the rows."""
        part = object.__new__(_YieldGrid)
        part.month, part.day = self.month[places], self.day[places]
        part.step, part.month_end = self.step[places], self.month_end[places]
        return part


def _coupons(terms: Terms, rows: Array, settle: Array, usable: Array, ex: Array) -> tuple[Array, Array, Array]:
    """Coupons after settlement: place among the rows, unadjusted date, amount per 100."""
    paying = usable[terms.frequency[rows[usable]] > 0]
    if not len(paying):
        return paying, settle[paying], np.zeros(0)
    owner, dates = schedules.coupon_dates(terms, rows[paying], settle[paying] + 1, terms.maturity[rows[paying]])
    owner = paying[owner]
    bond = rows[owner]
    periods = schedules.period_ending(terms, bond, dates)
    above, below = accrual.coupon_fraction(terms, bond, periods)
    rate = in_force(terms.rate_offsets, terms.rate_from, terms.rate_e9s, bond, periods.start, terms.rate_e9[bond])
    # The yield of an Act/365F bond takes its regular coupons as equal, though interest is counted in days (South African
    # and Japanese practice: the exchange's worked price of a South African bond comes out only so).
    equal = periods.regular & (terms.day_count[bond] == _ACT_365F) & ~terms.accrual_adjusted[bond]
    share = np.where(equal, 1 / np.maximum(terms.frequency[bond], 1), above / below)
    amount = rate / 1e9 * share
    first = np.ones(len(owner), np.bool_)
    first[1:] = owner[1:] != owner[:-1]
    amount = np.where(first & ex[owner], 0.0, amount)
    return owner, dates, np.where(rate == MISSING, np.nan, amount)


def _redemption(terms: Terms, rows: Array, settle: Array) -> Array:
    del settle  # amortising bonds are priced as if the remaining face came back at maturity
    return terms.redemption_price_e12[rows] / 1e12


def market_compounds(terms: Terms, rows: Array) -> Array:
    """Whether the yield of each bond compounds at all (bills and the like use simple interest)."""
    return compounding(terms, rows) > 0


def known_market(terms: Terms, rows: Array) -> Array:
    """Whether each bond names a market."""
    return (terms.market[rows] >= 0) & (terms.market[rows] < len(markets.MARKETS))
