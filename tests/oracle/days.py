"""Dates as bonds count them: open days of a calendar, months on, leap days, days of thirty-day months.

Closed days come straight from the `holidays` package, by code; days are counted one at a time.
"""

from __future__ import annotations

import calendar as month_lengths
import functools
from dataclasses import dataclass
from datetime import date, timedelta

import holidays

ONE_DAY = timedelta(days=1)


@functools.cache
def _closed_days(code: str) -> holidays.HolidayBase:
    if code in holidays.list_supported_financial():
        return holidays.financial_holidays(code, years=range(1990, 2075))
    country, _, subdivision = code.partition("-")
    if country == "GB":
        subdivision = subdivision or "ENG"
    categories = ("public", "bank") if country == "JP" else ("public",)
    return holidays.country_holidays(
        country, subdiv=subdivision or None, categories=categories, years=range(1990, 2075)
    )


@dataclass(frozen=True)
class Calendar:
    """Open days of one calendar or of several joined by +; `closings` are (calendar, day, open) exceptions."""

    code: str
    closings: tuple[tuple[str, date, bool], ...] = ()

    def is_open(self, day: date) -> bool:
        return all(self._part_open(part, day) for part in self.code.split("+")) if self.code else day.weekday() < 5

    def _part_open(self, part: str, day: date) -> bool:
        for code, when, opened in self.closings:
            if code == part and when == day:
                return opened
        return day.weekday() < 5 and day not in _closed_days(part)

    def walk(self, day: date, count: int) -> date:
        """The day `count` open days later (earlier when negative), counted one by one."""
        step = ONE_DAY if count >= 0 else -ONE_DAY
        for _ in range(abs(count)):
            day += step
            while not self.is_open(day):
                day += step
        return day

    def roll(self, day: date, adjustment: str) -> date:
        if adjustment == "unadjusted" or self.is_open(day):
            return day
        later, earlier = self.walk(day, 1), self.walk(day, -1)
        if adjustment == "following":
            return later
        if adjustment == "preceding":
            return earlier
        if adjustment == "modified following":
            return later if later.month == day.month else earlier
        if adjustment == "modified preceding":
            return earlier if earlier.month == day.month else later
        assert adjustment == "nearest"
        return later if later - day <= day - earlier else earlier

    def count(self, start: date, end: date) -> int:
        """Open days in [start, end)."""
        return sum(self.is_open(start + timedelta(days=n)) for n in range((end - start).days))


def last_day(day: date) -> bool:
    return day.day == month_lengths.monthrange(day.year, day.month)[1]


def months_on(day: date, months: int, to_end: bool) -> date:
    """The same day `months` later; the last of the month when `to_end`, or where the month is too short."""
    year, month = divmod(day.year * 12 + day.month - 1 + months, 12)
    length = month_lengths.monthrange(year, month + 1)[1]
    return date(year, month + 1, length if to_end else min(day.day, length))


def thirty(day_count: str, start: date, end: date, maturity: date) -> int:
    """Days of 30-day months (ISDA 2006 4.16(f) to (h); 30/360 US with the end-of-February rule of the US market)."""
    one, two = start.day, end.day
    feb_start, feb_end = start.month == 2 and last_day(start), end.month == 2 and last_day(end)
    if day_count == "30/360 US":
        if feb_start and feb_end:
            two = 30
        if feb_start:
            one = 30
    if day_count in ("30/360", "30/360 US"):
        if two == 31 and one >= 30:
            two = 30
        one = min(one, 30)
    else:
        if day_count == "30E/360 ISDA":
            one = 30 if feb_start else one
            two = 30 if feb_end and end != maturity else two
        one, two = min(one, 30), min(two, 30)
    return (end.year - start.year) * 360 + (end.month - start.month) * 30 + two - one


def leap_days(start: date, end: date) -> int:
    """29ths of February after `start`, up to and including `end`."""
    years = range(start.year, end.year + 1)
    return sum(start < date(y, 2, 29) <= end for y in years if month_lengths.isleap(y))
