"""What a bond promises, as columns: one row a bond, every blank filled, every date grid worked out once.

`Terms` is what all other bond arithmetic reads; resolving makes it from what bonds.csv tells. A bond whose terms are not sound keeps its
row and is marked, so that row numbers stay those of the bonds table. Rates and factors that change over time (fixings, steps,
remaining factors, index ratios) lie beside the columns as offsets per bond and (from, value) pairs in order of date.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds.calendars import Calendars

Array = np.ndarray[Any, Any]

KINDS = ("zero", "fixed", "stepped", "floating", "linked", "amortising")
ZERO, FIXED, STEPPED, FLOATING, LINKED, AMORTISING = range(len(KINDS))
QUOTES = ("price", "32nds", "discount", "yield")
FREQUENCIES = (0, 1, 2, 4, 12)
BUSINESS, CALENDAR = 0, 1
NAT = np.datetime64("NaT", "D")
ONE = 10**12


@dataclass(frozen=True)
class Terms:
    """One numpy column a fact, one row a bond. Rates are percent x 10^9, prices and factors x 10^12."""

    currency: tuple[str, ...]
    currency_digits: Array
    kind: Array
    market: Array
    rate_e9: Array
    frequency: Array
    day_count: Array
    accrual_start: Array
    """Where interest begins; where only a first coupon is told, the grid date before it."""
    first_coupon: Array
    """The first coupon date, worked out where not told; NaT for zeros and where neither date is told."""
    told_first_coupon: Array
    last_regular_coupon: Array
    maturity: Array
    end_of_month: Array
    payment_adjustment: Array
    accrual_adjusted: Array
    calendar: Array
    payment_calendar: Array
    settlement_days: Array
    """Told business days to settlement; MISSING: the market's cycle by trade date."""
    ex_days: Array
    ex_unit: Array
    record_days: Array
    record_unit: Array
    quote: Array
    redemption_price_e12: Array
    rounding_per: Array
    rounding_places: Array
    rounding_down: Array
    accrued_cap: Array
    floor_at_par: Array
    compounding: Array
    sound: Array
    anchor: Array
    """Where the coupon grid is rolled back from."""
    grid: Array
    """The coupon grid, packed (see grid.packed)."""
    calendars: Calendars
    rate_offsets: Array
    rate_from: Array
    rate_e9s: Array
    factor_offsets: Array
    factor_from: Array
    factor_e12s: Array

    def __len__(self) -> int:
        return len(self.maturity)


def last_of_month(dates: Array) -> Array:
    """Whether each date is the last of its month."""
    return np.asarray((dates + 1).astype("datetime64[M]") != dates.astype("datetime64[M]"))


def in_force(offsets: Array, starts: Array, values: Array, rows: Array, dates: Array, before: Array) -> Array:
    """The value whose `from` is the last on or before each date, `before` where none is (rates and factors)."""
    out = np.array(before, np.int64, copy=True)
    if not len(starts):
        return out
    some = np.flatnonzero(offsets[rows + 1] > offsets[rows])
    if not len(some):
        return out
    # One sorted key of (bond, from) makes a single search over all bonds; the bond's own first entry bounds it below.
    owner = np.repeat(np.arange(len(offsets) - 1), np.diff(offsets))
    day = 1 << 20
    keys = owner * day + (starts.astype(np.int64) + day // 2)
    place = np.searchsorted(keys, rows[some] * day + (dates[some].astype(np.int64) + day // 2), side="right") - 1
    held = place >= offsets[rows[some]]
    out[some[held]] = values[place[held]]
    return out
