"""A bond's coupons, as a list with the reason for every day that was moved and as a strip around the payment looked at."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from reconciler.bonds import accrual, schedules
from reconciler.bonds.daycounts import accrued_days
from reconciler.bonds.terms import Terms
from reconciler.procedures.reasons import why_moved
from reconciler.records import MISSING, Table, Words, table
from reconciler.texts import long_date

if TYPE_CHECKING:
    from reconciler.procedures.morning import Day


@dataclass(frozen=True)
class Strip:
    """A bond's coupon periods around a payment, as the drawing wants them.

    `boundaries` are unadjusted coupon dates, oldest first; `accrued` the span accrued, `marked` the settlement or payment day;
    `next_period` is the number of the period after the one the payment lies in (-1 none).
    """

    boundaries: tuple[np.datetime64, ...] = ()
    accrued: tuple[np.datetime64, np.datetime64] | None = None
    marked: np.datetime64 | None = None
    marked_words: str = ""
    accrued_words: str = ""
    next_period: int = -1


COUPONS: dict[str, str] = {
    # one coupon of one bond a row; days that were moved say why ("" when not moved); amount_minor on `face_minor`
    "start": "date", "end": "date", "payment_date": "date", "why": "text", "days": "int64", "ex_date": "date",
    "record_date": "date", "face_minor": "int64", "amount_minor": "int64",
}  # fmt: skip


@dataclass(frozen=True)
class Coupons:
    """A bond's coupons as a table (schema COUPONS) and as a strip around the payment looked at."""

    table: Table
    strip: Strip
    digits: int
    shown: int = -1
    """The row of `table` the payment belongs to, -1 none."""


def coupon_days(terms: Terms, rows: np.ndarray, periods: schedules.Periods) -> np.ndarray:
    """Days of whole coupon periods by the bonds' day counts; MISSING where there is no period."""
    part = schedules.parts(terms, rows, periods.accrual_start, periods.accrual_end, periods)
    days = accrued_days(terms.day_count[rows], periods.accrual_start, periods.accrual_end, part, terms.calendars, terms.calendar[rows])
    return np.where(np.isnat(periods.start), MISSING, days)


def strip_around(terms: Terms, bond: int, item: dict[str, Any]) -> Strip:
    """Up to two periods on either side of the payment."""
    day = item["terms_date"] if item["kind"] == "trade" else item["coupon_date"]
    if np.isnat(day) or not bool(terms.sound[bond]):
        return Strip()
    coupons = schedules.all_coupons(terms, np.array([bond]))
    if not len(coupons):
        return Strip(marked=day)
    start = terms.accrual_start[bond]
    bounds = np.concatenate([[start] if not np.isnat(start) else [], coupons.unadjusted]).astype("datetime64[D]")
    # a settlement on a coupon date opens the period after it, the coupon itself closes the one before
    side = "right" if item["kind"] == "trade" else "left"
    here = int(np.searchsorted(bounds, day, side=side)) - 1
    first = max(here - 2, 0)
    shown = bounds[first : here + 4]
    accrued = None
    words = ""
    if item["kind"] == "trade" and 0 <= here < len(bounds) - 1:
        days = item["terms_accrued_days"]
        negative = days != MISSING and days < 0
        accrued = (day, bounds[here + 1]) if negative else (bounds[here], day)
        words = "" if days == MISSING else f"{days} days accrued"
    elif 0 <= here < len(bounds) - 1:
        accrued = (bounds[here], bounds[here + 1])
    following = here + 1 - first
    verb = "settles" if item["kind"] == "trade" else "coupon" if item["kind"] == "coupon" else "redeemed"
    return Strip(tuple(shown), accrued, day, f"{verb} {long_date(day)}", words, following if following < len(shown) - 1 else -1)


def coupon_table(terms: Terms, bond_row: int, face_minor: int) -> Table:
    """All coupons of one bond on a face (schema COUPONS), oldest first."""
    coupons = schedules.all_coupons(terms, np.array([bond_row]))
    rows, dates = coupons.bond_row, coupons.unadjusted
    periods = schedules.period_ending(terms, rows, dates)
    whys = [why_moved(terms, bond_row, one, paid) for one, paid in zip(dates, coupons.payment_date, strict=True)]
    face = np.full(len(rows), face_minor, np.int64)
    return table(
        COUPONS, start=periods.start, end=dates, payment_date=coupons.payment_date, why=Words.of(whys),
        days=coupon_days(terms, rows, periods), ex_date=schedules.ex_dates(terms, rows, dates),
        record_date=schedules.record_dates(terms, rows, dates), face_minor=face,
        amount_minor=accrual.coupon_amounts(terms, rows, dates, face),
    )  # fmt: skip


def bond_coupons(day: Day, bond_row: int, item_row: int = -1, face: int = 100) -> Coupons:
    """All coupons of the bond in row `bond_row` of the day's bonds, on the item's face (`face` when no item is looked at)."""
    terms = day.terms
    digits = int(terms.currency_digits[bond_row])
    item = day.items.row(item_row) if item_row >= 0 else None
    minor = face * 10**digits if item is None or item["face_minor"] == MISSING else abs(int(item["face_minor"]))
    listed = coupon_table(terms, bond_row, minor)
    if not len(listed):
        return Coupons(listed, strip_around(terms, bond_row, item) if item else Strip(), digits)
    dates = listed["end"]
    return Coupons(listed, strip_around(terms, bond_row, item) if item else _strip_today(day, terms, bond_row), digits,
                   _shown(item, dates))  # fmt: skip


def _strip_today(day: Day, terms: Terms, bond_row: int) -> Strip:
    today = np.datetime64(day.date, "D")
    strip = strip_around(terms, bond_row, {"kind": "trade", "terms_date": today, "terms_accrued_days": MISSING})
    return Strip(strip.boundaries, None, today, "today", "", strip.next_period)


def _shown(item: dict[str, Any] | None, dates: np.ndarray) -> int:
    if item is None:
        return -1
    if item["kind"] == "coupon":
        place = int(np.searchsorted(dates, item["coupon_date"]))
        return place if place < len(dates) and dates[place] == item["coupon_date"] else -1
    place = int(np.searchsorted(dates, item["terms_date"], side="right")) if not np.isnat(item["terms_date"]) else len(dates)
    return place if place < len(dates) else -1
