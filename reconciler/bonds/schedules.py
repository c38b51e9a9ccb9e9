"""When does a bond pay, and which coupon period holds a given day?

Coupon dates are a grid of whole months rolled back from the last regular coupon (or maturity), always counted from that anchor so that
a clamped February does not spread; the end-of-month rule keeps month ends. Explicit first and last regular coupons cut
the grid into stubs, short or long. A day's period is found in closed form from the months between it and the anchor: no
walking back. Payments move off closed days by the payment adjustment; ex-dividend and record dates count back from the
unadjusted coupon date.

Irregular periods are also cut at the dates of the grid, as Act/Act ICMA asks (ICMA rule 251; 31 CFR 356 Appendix B).
Not here: amounts (accrual), and what a holder is entitled to (expected).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds.daycounts import Period
from reconciler.bonds.grid import Grid, day_of_month
from reconciler.bonds.terms import BUSINESS, NAT, Terms
from reconciler.money import MISSING

Array = np.ndarray[Any, Any]

_BONDS = 4_096
"""Bonds whose schedules are made at once."""


@dataclass(frozen=True)
class Periods:
    """The coupon period of each day asked for: unadjusted and accrual boundaries; NaT where there is none."""

    start: Array
    end: Array
    accrual_start: Array
    accrual_end: Array
    regular: Array


@dataclass(frozen=True)
class Coupons:
    """Coupons one after the other: the bond's row, the unadjusted coupon date and its payment date."""

    bond_row: Array
    unadjusted: Array
    payment_date: Array

    def __len__(self) -> int:
        return len(self.bond_row)


def periods_at(terms: Terms, rows: Array, dates: Array) -> Periods:
    """The coupon period with start <= day < end for each (bond row, day).

    NaT boundaries for bonds without coupons and for days on or after maturity; a day before the accrual start gets the first
    period. Without an accrual start the grid runs back without end.
    """
    rows, dates = np.asarray(rows), np.asarray(dates, "datetime64[D]")
    _k, start, end = Grid(terms, rows).around(dates)
    regular = np.ones(len(rows), np.bool_)
    maturity = terms.maturity[rows]
    # stubs and what comes before the first coupon are few: each is put right by itself
    last = np.flatnonzero(dates >= terms.anchor[rows])
    if len(last):
        start[last], end[last] = terms.anchor[rows[last]], maturity[last]
        regular[last] = Grid(terms, rows[last]).at(np.full(len(last), -1)) == maturity[last]
    first_coupon = terms.first_coupon[rows]
    early = np.flatnonzero(start < first_coupon)
    if len(early):
        _first_periods(terms, rows[early], dates[early], early, start, end, regular)
    none = (terms.frequency[rows] == 0) | (dates >= maturity) | np.isnat(dates) | ~terms.sound[rows]
    if none.any():
        start, end = np.where(none, NAT, start), np.where(none, NAT, end)
    return _accrual(terms, rows, start, end, regular)


def _first_periods(
    terms: Terms, rows: Array, dates: Array, places: Array, start: Array, end: Array, regular: Array
) -> None:
    """Puts right, at `places`, the periods that begin before the first coupon."""
    first, begin = terms.first_coupon[rows], terms.accrual_start[rows]
    grid = Grid(terms, rows)
    _k, natural, _next = grid.around(first - 1)
    exact = (natural == begin) & (grid.at(grid.number_at_or_before(first)) == first)
    before = dates < first
    # a first coupon off the grid opens a broken second period
    start[places] = np.where(before, begin, first)
    end[places] = np.where(before, first, end[places])
    regular[places] = before & exact


def _accrual(terms: Terms, rows: Array, start: Array, end: Array, regular: Array) -> Periods:
    adjusted = terms.accrual_adjusted[rows]
    if not adjusted.any():
        return Periods(start, end, start, end, regular)
    begin = terms.accrual_start[rows]
    moved_start = np.where(adjusted & (start != begin), payment_dates(terms, rows, start), start)
    moved_end = np.where(adjusted, payment_dates(terms, rows, end), end)
    return Periods(start, end, moved_start, moved_end, regular)


def period_ending(terms: Terms, rows: Array, coupon_dates: Array) -> Periods:
    """The period that a coupon date (unadjusted) closes."""
    return periods_at(terms, rows, np.asarray(coupon_dates, "datetime64[D]") - 1)


def periods_accruing(terms: Terms, rows: Array, dates: Array) -> Periods:
    """The period in which interest accrues on each day: as `periods_at`, but by adjusted boundaries where the accrual is adjusted.

    A coupon date moved back from Saturday to Friday opens the new period on that Friday; one moved on to Monday keeps the old
    period open until then.
    """
    rows, dates = np.asarray(rows), np.asarray(dates, "datetime64[D]")
    found = periods_at(terms, rows, dates)
    if not terms.accrual_adjusted[rows].any():
        return found
    # On or after maturity nothing accrues, so a last period that was moved is left as it is.
    late = (dates >= found.accrual_end) & (found.end < terms.maturity[rows])
    early = (dates < found.accrual_start) & ~(found.start <= terms.accrual_start[rows])
    moved = np.flatnonzero(terms.accrual_adjusted[rows] & (late | early))
    if len(moved):
        inside = np.where(late[moved], found.end[moved], found.start[moved] - 1)
        other = periods_at(terms, rows[moved], inside)
        columns = {name: column.copy() for name, column in vars(found).items()}
        for name, column in columns.items():
            column[moved] = getattr(other, name)
        found = Periods(**columns)
    return found


def parts(terms: Terms, rows: Array, start: Array, end: Array, periods: Periods) -> Period:
    """What the day counts ask of the period that [start, end) lies in (see daycounts.Period)."""
    first_days = (end - start).astype(np.int64)
    first_length = np.maximum((periods.accrual_end - periods.accrual_start).astype(np.int64), 1)
    # one row holds for all where no period is odd
    whole, last_days, last_length = np.zeros(1, np.int64), np.zeros(1, np.int64), np.ones(1, np.int64)
    odd = np.flatnonzero(~periods.regular & ~np.isnat(periods.start))
    if len(odd):
        whole, last_days, last_length = (np.repeat(column, len(rows)) for column in (whole, last_days, last_length))
        grid = Grid(terms, rows[odd])
        x, y = start[odd], end[odd]
        (kx, g0, g1), (ky, h0, h1) = grid.around(x), grid.around(y)
        single = kx == ky
        whole[odd] = np.where(single, 0, kx - ky - 1)
        first_days[odd] = np.where(single, y - x, g1 - x).astype(np.int64)
        first_length[odd] = (g1 - g0).astype(np.int64)
        last_days[odd] = np.where(single, 0, (y - h0).astype(np.int64))
        last_length[odd] = np.where(single, 1, (h1 - h0).astype(np.int64))
    return Period(
        frequency=terms.frequency[rows],
        start=periods.accrual_start,
        end=periods.accrual_end,
        whole=whole,
        first_days=first_days,
        first_length=first_length,
        last_days=last_days,
        last_length=last_length,
        maturity=terms.maturity[rows],
        month_end=terms.end_of_month[rows],
    )


def payment_dates(terms: Terms, rows: Array, unadjusted: Array) -> Array:
    """When a date (coupon, maturity) is paid: moved off closed days of the payment calendar by the bond's adjustment."""
    return terms.calendars.roll(terms.payment_calendar[rows], unadjusted, terms.payment_adjustment[rows])


def _back(terms: Terms, rows: Array, dates: Array, days: Array, unit: Array) -> Array:
    known = days != MISSING
    count = np.where(known, days, 0)
    business = terms.calendars.add(terms.calendar[rows], dates, -np.maximum(count, 1))
    business = np.where(count == 0, dates, business)
    return np.where(known, np.where(unit == BUSINESS, business, dates - count), NAT)


def ex_dates(terms: Terms, rows: Array, unadjusted: Array) -> Array:
    """First settlement date without the coupon of each date; NaT where the bond has no ex-dividend rule."""
    return _back(terms, rows, unadjusted, terms.ex_days[rows], terms.ex_unit[rows])


def record_dates(terms: Terms, rows: Array, unadjusted: Array) -> Array:
    """The day at whose close the coupon belongs to the holder."""
    return _back(terms, rows, unadjusted, terms.record_days[rows], terms.record_unit[rows])


def coupons_between(terms: Terms, rows: Array, first: Any, last: Any) -> Coupons:
    """Coupons of the bonds at `rows` that are paid in [first, last] (payment dates), by row and date."""
    rows = np.asarray(rows)
    rows = rows[(terms.frequency[rows] > 0) & terms.sound[rows]]
    # Adjustments move a payment by days, never by weeks: look a little wider, then hold the payment date against the window.
    margin = np.timedelta64(20, "D")
    low, high = np.datetime64(first, "D") - margin, np.datetime64(last, "D") + margin
    places, found_dates = coupon_dates(terms, rows, np.full(len(rows), low), np.full(len(rows), high))
    found_rows = rows[places]
    paid = payment_dates(terms, found_rows, found_dates)
    keep = (paid >= first) & (paid <= last)
    return Coupons(found_rows[keep], found_dates[keep], paid[keep])


def all_coupons(terms: Terms, rows: Array) -> Coupons:
    """The full schedules of the bonds at `rows`; without an accrual start or first coupon from 1970 on, where the calendars begin."""
    rows = np.asarray(rows)
    rows = rows[(terms.frequency[rows] > 0) & terms.sound[rows]]
    begin = terms.accrual_start[rows]
    begin = np.where(np.isnat(begin), np.datetime64("1970-01-01"), begin)
    parts = []
    # so many bonds at a time that their coupons stay in the processor's cache
    for first in range(0, max(len(rows), 1), _BONDS):
        some = rows[first : first + _BONDS]
        places, dates = coupon_dates(terms, some, begin[first : first + _BONDS] + 1, terms.maturity[some])
        parts.append((some[places], dates, payment_dates(terms, some[places], dates)))
    return Coupons(*(np.concatenate(columns) for columns in zip(*parts, strict=True)))


def coupon_dates(terms: Terms, rows: Array, low: Array, high: Array) -> tuple[Array, Array]:
    """Unadjusted coupon dates in [low, high] of each row: place among `rows` and date, flat, in that order."""
    grid = Grid(terms, rows)
    first = terms.first_coupon[rows]
    low = np.maximum(low, np.where(np.isnat(first), low, first))
    maturity, anchor = terms.maturity[rows], terms.anchor[rows]
    k_low = np.maximum(grid.number_at_or_before(np.minimum(high, anchor)), 0)
    k_high = grid.number_at_or_before(low - 1) - 1
    count = np.maximum(k_high - k_low + 1, 0)
    owner = np.repeat(np.arange(len(rows)), count)
    within = np.arange(len(owner)) - np.repeat(np.cumsum(count) - count, count)
    month = np.repeat(grid.month - k_high * grid.step, count) + within * np.repeat(grid.step, count)
    dates = day_of_month(month, np.repeat(grid.day, count))
    # maturity after a last regular coupon, and a first coupon that the grid does not know
    stub = np.flatnonzero((maturity > anchor) & (maturity >= low) & (maturity <= high))
    on_grid = grid.at(grid.number_at_or_before(first)) == first
    off = np.flatnonzero(~np.isnat(first) & ~on_grid & (first >= low) & (first <= high) & (first < maturity))
    if len(stub) or len(off):
        owner = np.concatenate([owner, stub, off])
        dates = np.concatenate([dates, maturity[stub], first[off]])
        order = np.lexsort((dates, owner))
        owner, dates = owner[order], dates[order]
    return owner, dates
