"""Year, month and day of a million dates, without asking numpy to divide each of them.

Dates of 1900 to 2199 are looked up in one table of packed numbers; others are reckoned. No time zones, no times of day.
"""

from __future__ import annotations

from typing import Any

import numpy as np

Array = np.ndarray[Any, Any]


def _reckoned(dates: Array) -> tuple[Array, Array, Array]:
    months = dates.astype("datetime64[M]")
    years, month = np.divmod(months.astype(np.int64), 12)
    return years + 1970, month + 1, (dates - months.astype("datetime64[D]")).astype(np.int64) + 1


_BASE = int(np.datetime64("1900-01-01", "D").astype(np.int64))


def _table() -> Array:
    """Year, month and day of each day packed into one int32: the year above bit 9, the month above bit 5."""
    years, months, days = _reckoned(np.arange("1900-01-01", "2200-01-01", dtype="datetime64[D]"))
    packed: Array = (years << 9 | months << 5 | days).astype(np.int32)
    return packed


_PACKED = _table()


def civil(dates: Array) -> tuple[Array, Array, Array]:
    """Year, month (1-12) and day of the month of each date, whole numbers; NaT gives numbers without meaning."""
    place = dates.astype("datetime64[D]", copy=False).view(np.int64) - _BASE
    if not (place.view(np.uint64) < len(_PACKED)).all():
        return _reckoned(dates)
    packed = _PACKED[place]
    return packed >> 9, packed >> 5 & 15, packed & 31


def year_of(dates: Array) -> Array:
    """Year of each date."""
    years: Array = civil(dates)[0]
    return years


def leap(years: Array) -> Array:
    """Whether each year has a 29 February."""
    result: Array = (years % 4 == 0) & ((years % 100 != 0) | (years % 400 == 0))
    return result


def leap_days_through(dates: Array) -> Array:
    """How many 29ths of February lie on or before each date, counted from the year 0."""
    years, months, days = civil(dates)
    past = years - ((months < 2) | ((months == 2) & (days < 29)))
    result: Array = past // 4 - past // 100 + past // 400
    return result


def last_of_february(years: Array, months: Array, days: Array) -> Array:
    """Whether a date is the last day of February."""
    result: Array = (months == 2) & (days == 28 + leap(years))
    return result
