"""Which days count as business days, and where does a date go when it falls on a closed one?

Every calendar is a set of ready tables over the days from 1970-01-01 to 2100-12-31: for each adjustment the step from a
day to the day it goes to, the number of business days before each day, and the list of business days. Adjusting, adding
and counting a million dates of mixed calendars are then look-ups. Adjustments are those of ISDA 2006 4.12; "nearest"
moves Saturdays back and Sundays forward, and forward on a tie.

A joint calendar ("XSIF+XECB") is closed if any of its parts is. Dates outside the tables give NaT (or MISSING), never a
guess and never an exception. Business days are counted strictly after or before the start day: one business day after a
Saturday is Monday, one business day before a Sunday is Friday. A trade date on a closed day thus settles like one on
the day before; US market notices (from memory) and QuantLib's Calendar.advance say the same. No intraday cut-offs.
"""

from __future__ import annotations

import functools
from collections.abc import Iterable
from dataclasses import dataclass
from datetime import date
from typing import Any

import numpy as np

from reconciler.bonds.closed_days import (
    DAYS,
    FIRST,
    LAST,
    WEEKDAY,
    WEEKDAYS,
    ClosedDays,
    UnknownCalendar,
    canonical,
    closed_days,
    weekends,
)
from reconciler.problems import KnownError

__all__ = ["ADJUSTMENTS", "FIRST", "LAST", "Calendars", "load"]

Array = np.ndarray[Any, Any]

ADJUSTMENTS = ("unadjusted", "following", "modified following", "preceding", "modified preceding", "nearest")
"""Payment adjustments; an int8 column holds the index."""

MISSING = np.iinfo(np.int64).min
_NAT = np.datetime64("NaT", "D")
_NOWHERE = np.iinfo(np.int16).max
_MONTH: Array = (FIRST + np.arange(DAYS)).astype("datetime64[M]").astype(np.int64)


@dataclass(frozen=True)
class _Tables:
    """One calendar: `steps` int16 (adjustment, day), business days `before` each day (one row more), `open_days`."""

    steps: Array
    before: Array
    open_days: Array


class Calendars:
    """Several calendars side by side; a row's calendar is its number, the index into `codes`.

    Every method takes arrays of one shape (or single values, taken for all rows) and returns arrays of that shape.
    """

    def __init__(
        self, codes: tuple[str, ...], parts: tuple[tuple[ClosedDays, ...], ...], changes: tuple[dict[int, bool], ...]
    ) -> None:
        self.codes = codes
        self._numbers = {code: number for number, code in enumerate(codes)}
        self._parts = parts
        self._changes = changes
        tables = [_tables(closed) for closed in map(_joined, parts, changes)]
        self._steps = np.concatenate([t.steps.reshape(-1) for t in tables])
        sizes = [len(t.open_days) for t in tables]
        self._first = np.concatenate([[0], np.cumsum(sizes)]).astype(np.int64)
        self._before = np.concatenate(
            [t.before + np.int32(start) for t, start in zip(tables, self._first, strict=False)]
        )
        self._open_days = np.concatenate([t.open_days for t in tables])

    def number(self, code: str) -> int:
        """The number of a calendar; KnownError for a code that was not loaded."""
        number = self._numbers.get(code)
        if number is None:
            raise KnownError(f"The calendar '{code}' is not among those loaded.")
        return number

    def roll(self, calendar: Array | int, dates: Array, adjustment: Array | int) -> Array:
        """Each date moved off a closed day as its adjustment (index into ADJUSTMENTS) says; NaT outside the tables."""
        day, inside = _days(dates)
        place = (np.asarray(calendar, np.int64) * len(ADJUSTMENTS) + adjustment) * DAYS + day
        step = self._steps[place]
        out = day + step
        result = np.atleast_1d(out).view("datetime64[D]")
        nowhere = step == _NOWHERE
        if inside is not None:
            nowhere = nowhere | ~inside
        if np.any(nowhere):
            result = np.where(nowhere, _NAT, result)
        return result

    def add(self, calendar: Array | int, dates: Array, days: Array | int) -> Array:
        """The day so many business days after (before, if negative) each date; 0 moves a closed day forward.

        Counted strictly after or before the date, whether that is open or closed. NaT outside the tables.
        """
        calendar, days = np.asarray(calendar, np.int64), np.asarray(days, np.int64)
        day, inside = _days(dates)
        later = days > 0
        # Business days up to and including the date for steps forward, before the date for steps back: that index is
        # the first candidate's place in the list of business days.
        place = self._before[calendar * (DAYS + 1) + day + later] + days - later
        sound = (place >= self._first[calendar]) & (place < self._first[calendar + 1])
        if inside is not None:
            sound &= inside
        if np.all(sound):
            return np.atleast_1d(self._open_days[place]).view("datetime64[D]")
        found = self._open_days[np.where(sound, place, 0)].view("datetime64[D]")
        return np.atleast_1d(np.where(sound, found, _NAT))

    def count(self, calendar: Array | int, start: Array, end: Array) -> Array:
        """Business days in each [start, end), int64; negative when end is before start; MISSING outside the tables."""
        base = np.asarray(calendar, np.int64) * (DAYS + 1)
        first, first_inside = _days(start, DAYS + 1)
        last, last_inside = _days(end, DAYS + 1)
        out = np.atleast_1d(self._before[base + last].astype(np.int64) - self._before[base + first])
        for inside in (first_inside, last_inside):
            if inside is not None:
                out = np.where(inside, out, MISSING)
        return out

    def is_open(self, calendar: Array | int, dates: Array) -> Array:
        """Whether each date is a business day; False outside the tables."""
        day, inside = _days(dates)
        place = np.asarray(calendar, np.int64) * (DAYS + 1) + day
        out = np.atleast_1d(self._before[place + 1] > self._before[place])
        return out if inside is None else out & inside

    def why_closed(self, calendar: int, day: date | np.datetime64) -> str:
        """Why a calendar is closed on a day ("Saturday", a holiday, "closed by closings.csv"); "" when it is open."""
        number = _number(day)
        if not 0 <= number < DAYS or bool(self.is_open(calendar, np.array([day], "datetime64[D]"))[0]):
            return ""
        for part in self._parts[calendar]:
            if number in part.names:
                return part.names[number]
        if self._changes[calendar].get(number) is False:
            return "closed by closings.csv"
        return WEEKDAYS[WEEKDAY[number]]


# What closings.csv told of a calendar, and a joint calendar as its parts with what was told of them: hashable, for
# caching.
_Told = tuple[tuple[int, bool], ...]
_Recipe = tuple[tuple[str, ...], tuple[tuple[str, _Told], ...]]


def load(
    codes: Iterable[str], closings: Iterable[tuple[str, date | np.datetime64, bool]] = ()
) -> tuple[Calendars, dict[str, str]]:
    """The calendars of the given codes, number 0 being weekends only (code ""), the others in alphabetical order.

    `closings` are (calendar, date, open) rows: they hold for the calendar named and for every joint calendar it is part
    of; a day told both open and closed is closed. Returned beside the calendars: for each code that is not known the
    reason, in words for the clerk. Such a code gets a calendar of weekends and of those of its parts that are known.
    """
    wanted = ("", *sorted({str(code) for code in codes} - {""}))
    told: dict[str, dict[int, bool]] = {}
    for code, day, opened in closings:
        number = _number(day)
        if 0 <= number < DAYS:
            days = told.setdefault(_joint(code), {})
            days[number] = days.get(number, True) and bool(opened)
    reasons: dict[str, str] = {}
    recipes: list[_Recipe] = []
    for code in wanted:
        known: list[str] = []
        for part in _joint(code).split("+") if code else []:
            try:
                closed_days(part)
                known.append(part)
            except UnknownCalendar as fault:
                reasons.setdefault(code, str(fault))
        concerned = sorted({*_joint(code).split("+"), _joint(code)} & told.keys())
        recipes.append((tuple(known), tuple((name, tuple(sorted(told[name].items()))) for name in concerned)))
    return _assembled(wanted, tuple(recipes)), reasons


def _joint(code: str) -> str:
    """A joint code with its parts in canonical form and alphabetical order."""
    return "+".join(sorted({canonical(part) for part in code.split("+") if part.strip()}))


@functools.lru_cache(maxsize=8)
def _assembled(codes: tuple[str, ...], recipes: tuple[_Recipe, ...]) -> Calendars:
    sets: list[tuple[ClosedDays, ...]] = []
    joint_changes: list[dict[int, bool]] = []
    for known, changes in recipes:
        own = dict(changes)
        sets.append(tuple(_changed(closed_days(name), dict(own.pop(name, ()))) for name in known))
        merged: dict[int, bool] = {}
        # What is left was told of the joint calendar itself, or of a part that only closings.csv knows.
        for _, days in sorted(own.items()):
            for day, opened in days:
                merged[day] = merged.get(day, True) and opened
        joint_changes.append(merged)
    return Calendars(codes, tuple(sets), tuple(joint_changes))


def _changed(base: ClosedDays, changes: dict[int, bool]) -> ClosedDays:
    """A calendar with days closed or opened by closings.csv."""
    if not changes:
        return base
    closed, names = base.closed.copy(), dict(base.names)
    for day, opened in changes.items():
        closed[day] = not opened
        if opened:
            names.pop(day, None)
        else:
            names.setdefault(day, "closed by closings.csv")
    return ClosedDays(closed, names)


def _joined(parts: tuple[ClosedDays, ...], changes: dict[int, bool]) -> bytes:
    """Closed if any part is, with the changes told of the whole; as bytes, so that equal ones share their tables."""
    closed = np.logical_or.reduce([part.closed for part in parts]) if parts else weekends()
    if changes:
        closed = closed.copy()
        closed[list(changes)] = [not opened for opened in changes.values()]
    return closed.tobytes()


@functools.lru_cache(maxsize=256)
def _tables(closed_bytes: bytes) -> _Tables:
    closed = np.frombuffer(closed_bytes, np.bool_)
    day = np.arange(DAYS)
    following = np.minimum.accumulate(np.where(closed, DAYS, day)[::-1])[::-1]
    preceding = np.maximum.accumulate(np.where(closed, -1, day))
    has_following, has_preceding = following < DAYS, preceding >= 0
    month_after = np.where(has_following, _MONTH[np.minimum(following, DAYS - 1)], _MONTH[-1] + 1)
    month_before = np.where(has_preceding, _MONTH[preceding], _MONTH[0] - 1)
    targets = np.empty((len(ADJUSTMENTS), DAYS), np.int64)
    targets[0] = day
    targets[1] = np.where(has_following, following, -1)
    targets[2] = np.where((month_after == _MONTH) | ~has_preceding, targets[1], preceding)
    targets[3] = preceding
    targets[4] = np.where((month_before == _MONTH) | ~has_following, preceding, following)
    closer_before = has_preceding & (~has_following | (day - preceding < following - day))
    targets[5] = np.where(closer_before, preceding, targets[1])
    step = targets - day
    steps = np.where((targets < 0) | (np.abs(step) >= _NOWHERE), _NOWHERE, step).astype(np.int16)
    before = np.concatenate([[0], np.cumsum(~closed)]).astype(np.int32)
    return _Tables(steps, before, np.flatnonzero(~closed).astype(np.int64))


def _number(day: date | np.datetime64) -> int:
    return int(np.asarray(day, "datetime64[D]").astype(np.int64))


def _days(dates: Array, limit: int = DAYS) -> tuple[Array, Array | None]:
    """Dates as day numbers (0 where outside the tables) and where they are inside (None: everywhere)."""
    day = np.atleast_1d(np.asarray(dates, "datetime64[D]")).view(np.int64)
    # One comparison: negative numbers, NaT among them, are huge when read as unsigned.
    inside = day.view(np.uint64) < limit
    if inside.all():
        return day, None
    return np.where(inside, day, 0), inside
