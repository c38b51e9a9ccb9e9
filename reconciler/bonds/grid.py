"""Coupon dates are a grid of whole months rolled back from an anchor: the last regular coupon, or maturity.

Every date is counted from the anchor itself, so that a day clamped in February does not spread; where a bond pays on month ends the
last day of the month is kept. No stubs, no calendars: schedules cuts and moves what the grid gives.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from reconciler.bonds.dates import civil

if TYPE_CHECKING:
    from reconciler.bonds.terms import Terms

Array = np.ndarray[Any, Any]

_FIRST_MONTH = -12 * 170
_STARTS = np.arange("1800-01-01", "2302-01-01", dtype="datetime64[M]").astype("datetime64[D]").view(np.int64)
"""Day number of the first of each month from 1800 on: a look-up is many times faster than numpy's own conversion."""


def month_number(dates: Array) -> tuple[Array, Array]:
    """Months since January 1970 and day of the month, int64; numbers without meaning for NaT."""
    year, month, day = civil(dates)
    return (year.astype(np.int64) - 1970) * 12 + (month - 1), day.astype(np.int64)


def day_of_month(month: Array, day: Array) -> Array:
    """The day of a month, the last one where the month has no such day."""
    place = np.clip(month - _FIRST_MONTH, 0, len(_STARTS) - 2)
    first = _STARTS[place]
    result: Array = (np.minimum(first + day, _STARTS[place + 1]) - 1).view("datetime64[D]")
    return result


def packed(anchor: Array, month_end: Array, frequency: Array) -> Array:
    """Each bond's grid in one number, so that a trade looks up one column: month of the anchor, day of the month, months of a period."""
    month, day = month_number(anchor)
    # the 31st of every month is its last day; bonds without coupons have a yearly grid, on which yields count
    day, step = np.where(month_end, 31, day), 12 // np.maximum(frequency, 1)
    result: Array = np.clip(month - _FIRST_MONTH, 0, len(_STARTS)) << 16 | day << 8 | step
    return result


class Grid:
    """The coupon grid of some rows: `at(k)` is the date k periods before the anchor (negative k: after it)."""

    def __init__(self, terms: Terms, rows: Array) -> None:
        whole = terms.grid[rows]
        self.month, self.day, self.step = (whole >> 16) + _FIRST_MONTH, whole >> 8 & 255, whole & 255

    def at(self, k: Array) -> Array:
        """Grid date number k of each row."""
        return day_of_month(self.month - k * self.step, self.day)

    def number_at_or_before(self, dates: Array) -> Array:
        """The smallest k whose date is on or before each day."""
        month, _day = month_number(dates)
        k = -((month - self.month) // self.step)
        result: Array = k + (self.at(k) > dates)
        return result

    def around(self, dates: Array) -> tuple[Array, Array, Array]:
        """For each day the smallest k whose date is on or before it, that date, and the next grid date (k - 1)."""
        month, _day = month_number(dates)
        k = -((month - self.month) // self.step)
        near = self.at(k)
        over = near > dates
        other = self.at(np.where(over, k + 1, k - 1))
        return k + over, np.where(over, other, near), np.where(over, near, other)


def grid_after(terms: Terms, rows: Array, dates: Array) -> Array:
    """The first grid date after each day."""
    grid = Grid(terms, rows)
    return grid.at(grid.number_at_or_before(dates) - 1)


def grid_before(terms: Terms, rows: Array, dates: Array) -> Array:
    """The last grid date before each day."""
    grid = Grid(terms, rows)
    return grid.at(grid.number_at_or_before(dates - 1))
