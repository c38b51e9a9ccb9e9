"""What a bond still pays after a day, per 100 of face, and how far off in coupon periods each payment is.

Yields discount payments by periods, not by days: the distance of a date is its place on the coupon grid, whole at grid dates and in
between the share of the period's days that has gone by: actual days, or thirty-day months for the 30/360 family (SIA Standard
Securities Calculation Methods, from memory; 31 CFR 356 Appendix B for the Treasury's).

Nearly every bond pays one coming coupon, then equal coupons a period apart, then a last payment: six numbers, whatever its
life, which a geometric sum values at once. Bonds whose coupons differ (counted in days, stepped, a first coupon off the grid)
carry the coupons after the coming one as a flat list besides.

Figures are float64: yields are measurements, money is not reckoned here. Floating and linked bonds are priced on the rate and
ratio in force, amortising ones as if what is left came back at maturity: common simplifications.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds import accrual, daycounts, schedules
from reconciler.bonds.daycounts import EVEN, NUMBERS
from reconciler.bonds.grid import Grid
from reconciler.bonds.terms import Terms, in_force
from reconciler.money import MISSING, half_up

Array = np.ndarray[Any, Any]

_ACT_365F = NUMBERS["Act/365F"]
_THIRTY = np.array([name.startswith("30") for name in NUMBERS])


@dataclass(frozen=True)
class Flows:
    """Payments after settlement, one row each: times in coupon periods from settlement, amounts per 100 of face.

    The coming coupon `first` at `first_time`, then `equal_count` coupons of `equal` one period apart, then `last` at `last_time`. `owner`
    (row), `time` and `amount` list what does not fit (see above), in order of row.
    """

    first: Array
    first_time: Array
    equal: Array
    equal_count: Array
    last: Array
    last_time: Array
    owner: Array
    time: Array
    amount: Array
    broken: Array
    """Part of a period from settlement to the next grid date, 1 on a grid date."""
    frequency: Array
    """The yield's periods a year."""
    zero: Array
    """Whether the bond pays no coupons."""
    simple: Array
    """Whether it is a zero whose market quotes simple interest."""
    last_period: Array
    """Whether only one payment day is left, at most one period away."""
    redemption: Array
    coupon_rate: Array
    accrued: Array
    accrued_printed: Array
    """Accrued rounded half up to six decimals, as the Treasury prints it."""
    days: Array
    """Days to maturity."""
    sound: Array


def of(terms: Terms, rows: Array, settle: Array) -> Flows:
    """The payments of each bond after each settlement day; nothing sound on or after maturity or where no rate is known."""
    rows, settle = np.asarray(rows), np.asarray(settle, "datetime64[D]")
    interest = accrual.accrued(terms, rows, settle, np.zeros(len(rows), np.int64))
    frequency, maturity = terms.frequency[rows], terms.maturity[rows]
    zero = frequency == 0
    grid = _YieldGrid(terms, rows, _compounding(terms, rows))
    here = _places(terms, rows, grid, settle)
    rate = interest.rate_e9 / 1e9
    redemption = terms.redemption_price_e12[rows] / 1e12
    last_time = _places(terms, rows, grid, maturity) - here

    coming = np.where(zero, maturity, interest.next)
    first = np.where(interest.ex | zero, 0.0, rate * _shares(terms, rows, coming))
    first_time = _places(terms, rows, grid, coming) - here
    number = grid.number_at_or_before(coming)
    equal_count = np.where(zero, 0, np.maximum(number, 0))
    # an odd last period after the anchor pays its own coupon, unless it is the coming one
    stub = np.flatnonzero((maturity > terms.anchor[rows]) & (coming < maturity) & ~zero & interest.sound)
    last = redemption.copy()
    if len(stub):
        last[stub] += rate[stub] * _shares(terms, rows[stub], maturity[stub])
    unequal = np.flatnonzero(~zero & interest.sound & ~_equal(terms, rows, interest.previous) | (grid.at(number) != coming) & ~zero)
    owner, dates, amount = _listed(terms, rows, settle, unequal, coming)
    last[unequal] = redemption[unequal]
    equal_count[unequal] = 0
    with np.errstate(divide="ignore", invalid="ignore"):
        accrued = rate * interest.numerator / interest.denominator
    return Flows(
        first=first,
        first_time=first_time,
        equal=np.where(zero, 0.0, rate / np.maximum(frequency, 1)),
        equal_count=equal_count.astype(np.float64),
        last=last,
        last_time=last_time,
        owner=owner,
        time=_places(terms, rows[owner], grid.take(owner), dates) - here[owner],
        amount=amount,
        broken=np.where(here == np.floor(here), 1.0, np.ceil(here) - here),
        frequency=grid.yearly,
        zero=zero,
        simple=zero & (_compounding(terms, rows) == 0),
        last_period=~zero & (coming == maturity) & (last_time <= 1),
        redemption=redemption,
        coupon_rate=rate,
        accrued=np.where(interest.sound, accrued, np.nan),
        # exact, since 23 of 184 days of 1/8 % end on a five in the seventh place
        accrued_printed=half_up([interest.rate_e9, interest.numerator], [interest.denominator, 1000]) / 1e6,
        days=(maturity - settle).astype(np.float64),
        sound=interest.sound,
    )


def _compounding(terms: Terms, rows: Array) -> Array:
    """Periods a year of the yield: the coupon's; for zeros the market's (0: simple interest), else 1."""
    frequency = terms.frequency[rows]
    told = np.where(terms.compounding[rows] == MISSING, 1, terms.compounding[rows])
    return np.where(frequency > 0, frequency, told)


class _YieldGrid(Grid):
    """The grid on which yields count periods: the coupon grid, or for zeros one of the yield's own frequency."""

    def __init__(self, terms: Terms, rows: Array, compounding: Array) -> None:
        super().__init__(terms, rows)
        self.yearly = np.maximum(compounding, 1)
        self.step = (12 // self.yearly).astype(np.int64)

    def take(self, places: Array) -> _YieldGrid:
        """The grids of some of the rows."""
        part = object.__new__(_YieldGrid)
        for name, column in vars(self).items():
            setattr(part, name, column[places])
        return part


def _places(terms: Terms, rows: Array, grid: Grid, dates: Array) -> Array:
    """Each date's place on the grid, in periods, growing with time."""
    k, low, high = grid.around(dates)
    share = (dates - low).astype(np.float64) / np.maximum((high - low).astype(np.float64), 1)
    day_count = terms.day_count[rows]
    t = np.flatnonzero(_THIRTY[day_count] & (terms.frequency[rows] > 0) & (dates > low))
    if len(t):
        one = np.ones(1, np.int64)
        frequency = terms.frequency[rows[t]]
        part = daycounts.Period(
            frequency, low[t], high[t], 0 * one, one, one, 0 * one, one, terms.maturity[rows[t]], terms.end_of_month[rows[t]]
        )
        share[t] = daycounts.accrued_days(day_count[t], low[t], dates[t], part) * frequency / 360.0
    return -k + share


def _shares(terms: Terms, rows: Array, coupon_dates: Array) -> Array:
    """The part of the annual rate that each coupon pays, as yields take it."""
    periods = schedules.period_ending(terms, rows, coupon_dates)
    above, below = accrual.coupon_fraction(terms, rows, periods)
    # The yield of an Act/365F bond takes its regular coupons as equal, though interest is counted in days (South African
    # and Japanese practice: the exchange's worked price of a South African bond comes out only so).
    equal = periods.regular & (terms.day_count[rows] == _ACT_365F) & ~terms.accrual_adjusted[rows]
    return np.where(equal, 1 / np.maximum(terms.frequency[rows], 1), above / np.maximum(below, 1))


def _equal(terms: Terms, rows: Array, period_start: Array) -> Array:
    """Whether all regular coupons after a period are rate / frequency on one rate."""
    count = terms.day_count[rows]
    even = EVEN[count] | ((count == _ACT_365F) & ~terms.accrual_adjusted[rows])
    steps = np.diff(terms.rate_offsets)[rows] > 0
    if steps.any():
        some = np.flatnonzero(steps)
        latest = terms.rate_from[terms.rate_offsets[rows[some] + 1] - 1]
        steps[some] = latest > period_start[some]
    return np.asarray(even & ~steps)


def _listed(terms: Terms, rows: Array, settle: Array, unequal: Array, coming: Array) -> tuple[Array, Array, Array]:
    """Every coupon after the coming one of the rows at `unequal`: row, unadjusted date, amount per 100."""
    if not len(unequal):
        return unequal, settle[:0], np.zeros(0)
    place, dates = schedules.coupon_dates(terms, rows[unequal], coming[unequal] + 1, terms.maturity[rows[unequal]])
    owner = unequal[place]
    bond = rows[owner]
    start = schedules.period_ending(terms, bond, dates).start
    rate = in_force(terms.rate_offsets, terms.rate_from, terms.rate_e9s, bond, start, terms.rate_e9[bond])
    return owner, dates, np.where(rate == MISSING, np.nan, rate / 1e9 * _shares(terms, bond, dates))
