"""A payment on another day: another cycle, a holiday that somebody's calendar lacks, another adjustment, day and month exchanged, or late.

Days are few and near each other, so a day that fits is never called proved on its own; where the amount also follows from it, the
amount speaks. Weights are common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from reconciler.bonds.calendars import ADJUSTMENTS
from reconciler.bonds.dates import civil
from reconciler.bonds.terms import Terms
from reconciler.breaks.causes.cases import NAT, TRADE, Cases
from reconciler.breaks.causes.variants import Cause

Array = np.ndarray[Any, Any]

CYCLE = Cause("another settlement cycle", "cycle", "Agree the settlement date; the market's cycle goes by the trade date.", 0.8)
HOLIDAY = Cause("holiday not known", "calendar", "Have the closing day entered in the calendar that lacks it.", 0.9)
UNADJUSTED = Cause("paid on the unadjusted date", "adjustment", "Quote the payment adjustment of the terms.", 0.8)
ADJUSTMENT = Cause("another payment adjustment", "adjustment", "Quote the payment adjustment of the terms.", 0.7)
LATE = Cause("late", "days", "Claim interest for the days, if the market allows it.", 0.3)
EARLY = Cause("early", "days", "Ask why it came early; value it on the day due.", 0.2)
SWAPPED = Cause("day and month exchanged", "writing", "Ask for dates written year-month-day.", 0.7)
YEAR = Cause("another year", "writing", "Ask for the date to be corrected.", 0.4)


def explanations(cases: Cases, terms: Terms, right: Array, told: Array) -> Iterator[tuple[Cause, str, Array]]:
    """Causes with their wording and the day each gives per case (NaT where it gives none)."""
    rows, trade = cases.bond_row, cases.kind == TRADE
    weekends = terms.calendars.number("") if "" in terms.calendars.codes else 0
    traded = np.where(np.isnat(cases.told.trade_date), cases.terms.trade_date, cases.told.trade_date)
    for days in range(0, 6):
        moved = terms.calendars.add(terms.calendar[rows], traded, np.full(len(rows), days))
        yield CYCLE, f"it settles {days} business days after the trade date", np.where(trade, moved, NAT)
    cycle = terms.calendars.count(terms.calendar[rows], traded + 1, right + 1)
    plain = terms.calendars.add(np.full(len(rows), weekends), traded, np.where(np.isnat(traded), 1, np.maximum(cycle, 0)))
    yield HOLIDAY, "only weekends are taken as closed", np.where(trade, plain, NAT)
    coupon = np.where(trade, NAT, cases.coupon_date)
    yield UNADJUSTED, "it is paid on the unadjusted date", coupon
    yield HOLIDAY, "only weekends are taken as closed", terms.calendars.roll(np.full(len(rows), weekends), coupon, terms.payment_adjustment[rows])
    for number, name in enumerate(ADJUSTMENTS):
        if number:
            yield ADJUSTMENT, f"the payment adjustment is {name}", terms.calendars.roll(terms.payment_calendar[rows], coupon, np.full(len(rows), number))
    yield SWAPPED, "day and month are exchanged", _swapped(right)
    for years in (-1, 1):
        yield YEAR, "the year is another", _year(right, years)
    for days in range(1, 11):
        yield LATE, f"it is {days} business day{'s' * (days > 1)} late", terms.calendars.add(terms.payment_calendar[rows], right, np.full(len(rows), days))
        yield LATE, f"it is valued {days} day{'s' * (days > 1)} later, on a closed day", _closed(terms, cases, right + days)
        yield EARLY, f"it is {days} business day{'s' * (days > 1)} early", terms.calendars.add(terms.payment_calendar[rows], right, np.full(len(rows), -days))


def _closed(terms: Terms, cases: Cases, days: Array) -> Array:
    return np.where(terms.calendars.is_open(terms.payment_calendar[cases.bond_row], days), NAT, days)


def _swapped(dates: Array) -> Array:
    year, month, day = civil(np.where(np.isnat(dates), np.datetime64("2000-01-13"), dates))
    possible = (day <= 12) & (day != month) & ~np.isnat(dates)
    months = (np.where(possible, day, 1) - 1) + (year - 1970) * 12
    swapped = months.astype("datetime64[M]").astype("datetime64[D]") + (np.where(possible, month, 1) - 1)
    return np.where(possible, swapped, NAT)


def _year(dates: Array, years: int) -> Array:
    months = dates.astype("datetime64[M]")
    moved = (months + 12 * years).astype("datetime64[D]") + (dates - months.astype("datetime64[D]"))
    return np.where(np.isnat(dates), NAT, moved)


def closed_because(terms: Terms, row: int, day: np.datetime64) -> str:
    """Why a day is closed in the payment calendar of a bond, "" where it is open."""
    calendar = int(terms.payment_calendar[row])
    if bool(terms.calendars.is_open(calendar, np.array([day]))[0]):
        return ""
    return terms.calendars.why_closed(calendar, day)


