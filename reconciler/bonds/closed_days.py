"""On which days is a place closed? The week's end, the `holidays` package and our corrections to it answer.

The package knows some 250 countries and 40 markets but takes 100 to 200 ms a calendar, so the calendars in common use
are shipped ready in resources/tables/calendars.npz (written by resources/pack_calendars.py, checked against the package
in the tests) and the package is only asked for the others. A country's closed days are its public and bank holidays; a
market's those of the market. Where the package is known to disagree with the official calendar,
resources/tables/calendar_corrections.csv says so, row by row with its source; those rules are applied to shipped and
fresh calendars alike.

Half days count as open, and a weekend stays closed even in countries that make up working days on Saturdays: bonds do
not settle then. A morning's closings.csv can say otherwise.
"""

from __future__ import annotations

import functools
import re
import warnings
from dataclasses import dataclass
from datetime import date, timedelta
from typing import Any

import numpy as np

from reconciler import resources

Array = np.ndarray[Any, Any]

FIRST = np.datetime64("1970-01-01", "D")
LAST = np.datetime64("2100-12-31", "D")
DAYS = int((LAST - FIRST).astype(np.int64)) + 1
"""Days in every table; day 0 is FIRST."""

WEEKDAYS = ("Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday")
_WEEKDAY_OF_FIRST = 3  # 1 January 1970 was a Thursday
WEEKDAY: Array = ((np.arange(DAYS) + _WEEKDAY_OF_FIRST) % 7).astype(np.int8)
"""Weekday of each day, Monday is 0."""

# The package's bare GB lists only what England, Wales, Scotland and Northern Ireland share; sterling settles by England
# and Wales.
_MEANT = {"GB": "GB-ENG"}
_CATEGORIES = ("public", "bank")
# Banks in Hong Kong close on the general holidays, which the package lists complete as "optional"; its "public" are the
# statutory ones.
_CATEGORIES_OF = {"HK": ("optional",)}
# Market calendars that the package begins late, what stands in for them before, and the first year they speak for
# themselves. Offices keep a holiday on a Saturday the Friday before; the Fed does not, the bond market only twice (see
# the corrections).
_BEFORE = {"XFED": ("US", 1999), "XSIF": ("US", 1996), "XLON": ("GB-ENG", 2000)}
_HALF_DAY = re.compile(r"\((from|until) \d|afternoon|half.day", re.IGNORECASE)


@dataclass(frozen=True)
class ClosedDays:
    """One calendar: `closed` per day (bool, weekends included) and the name of each closed weekday."""

    closed: Array
    names: dict[int, str]


class UnknownCalendar(Exception):
    """A code that neither the shipped calendars nor the package know; the text says what to do."""


def canonical(code: str) -> str:
    """The code under which a single calendar is kept: markets and countries by their own code, plain GB as GB-ENG."""
    entity, dash, subdivision = code.strip().partition("-")
    entity = _shipped().aliases.get(entity, entity)
    code = entity + dash + subdivision
    return _MEANT.get(code, code)


@functools.cache
def closed_days(code: str) -> ClosedDays:
    """Closed days of one calendar (`code` canonical, not joined), corrections applied. Raises UnknownCalendar."""
    shipped = _shipped()
    if code in shipped.places:
        days, names, weekend = shipped.of(code)
    else:
        days, names, weekend = from_package(code)
    named = dict(zip(days.tolist(), names, strict=True))
    if code in _BEFORE:
        other, year = _BEFORE[code]
        until, friday = _day(year, "01-01"), WEEKDAYS.index("Friday")
        earlier = {day: name for day, name in closed_days(other).names.items() if day < until}
        named |= {d: name for d, name in earlier.items() if not ("(observed)" in name and WEEKDAY[d] == friday)}
    for day, opened, name in corrections(code):
        if opened:
            named.pop(day, None)
        else:
            named.setdefault(day, name)
    closed = weekend.copy()
    closed[np.fromiter(named, np.int64, len(named))] = True
    closed.setflags(write=False)
    return ClosedDays(closed, named)


def weekends(days_of_week: tuple[int, ...] = (5, 6)) -> Array:
    """True on Saturdays and Sundays, or on the weekdays given."""
    return np.isin(WEEKDAY, days_of_week)


# --- shipped calendars ---------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class _Shipped:
    places: dict[str, int]
    offsets: Array
    days: Array
    name_of: Array
    names: list[str]
    aliases: dict[str, str]

    def of(self, code: str) -> tuple[Array, list[str], Array]:
        place = self.places[code]
        part = slice(int(self.offsets[place]), int(self.offsets[place + 1]))
        return self.days[part], [self.names[n] for n in self.name_of[part].tolist()], weekends()


@functools.cache
def _shipped() -> _Shipped:
    """The shipped calendars; none when the file is absent, as it is while it is being made."""
    pack = resources.arrays("calendars")
    if not pack:
        nothing = np.empty(0, np.int64)
        return _Shipped({}, nothing, nothing, nothing, [], {})
    return _Shipped(
        places={code: number for number, code in enumerate(pack["codes"].tolist())},
        offsets=pack["offsets"],
        days=pack["days"],
        name_of=pack["name_of"],
        names=pack["names"].tolist(),
        aliases=dict(zip(pack["aliases"].tolist(), pack["alias_of"].tolist(), strict=True)),
    )


# --- the package ---------------------------------------------------------------------------------------------------


def from_package(code: str) -> tuple[Array, list[str], Array]:
    """Closed weekdays, their names, and the weekend mask, fresh from the `holidays` package. Raises UnknownCalendar."""
    # Imported here because the package takes 60 ms and most mornings need only shipped calendars.
    import holidays

    entity, dash, subdivision = code.partition("-")
    unknown = UnknownCalendar(
        f"'{code}' is no calendar: use a market code of the holidays package such as XSIF, XECB or XLON, "
        "or a country code such as JP or GB-ENG, joined by + if several must be open"
    )
    financial = holidays.list_supported_financial(include_aliases=True)
    countries = holidays.list_supported_countries(include_aliases=True)
    if not re.fullmatch(r"[A-Z][A-Z0-9]{1,4}", entity) or (entity not in financial and entity not in countries):
        raise unknown
    kind: Any = getattr(holidays, entity)
    if dash and subdivision not in kind.subdivisions:
        raise UnknownCalendar(
            f"'{code}' is no calendar: {entity} has no subdivision '{subdivision}' in the holidays package"
        )
    wanted = _CATEGORIES_OF.get(entity, _CATEGORIES)
    categories = tuple(c for c in wanted if c in kind.supported_categories) or kind.supported_categories
    years = range(max(1969, kind.start_year), min(2101, kind.end_year) + 1)
    language = "en_US" if "en_US" in kind.supported_languages else None
    with warnings.catch_warnings():
        # The package warns where moon-based dates reach only so far; beyond that such a calendar has its fixed days.
        warnings.simplefilter("ignore")
        found: Any = kind(
            years=years, subdiv=subdivision or None, categories=categories, language=language, expand=False
        )
    weekend = _weekend(found)
    days, names = [], []
    for day, name in sorted(found.items()):
        number = (day - date(1970, 1, 1)).days
        full = "; ".join(part for part in str(name).split("; ") if not _HALF_DAY.search(part))
        if full and 0 <= number < DAYS and not weekend[number]:
            days.append(number)
            names.append(full)
    return np.array(days, np.int64), names, weekend


def _weekend(found: Any) -> Array:
    """The weekend of a country, day by day for the few that have moved theirs in the course of the years."""
    # Where the package has Sunday alone, Saturday is closed too: shops open then, settlement systems do not.
    mask = weekends() if found.weekend <= {5, 6} else weekends(tuple(found.weekend))
    if type(found)._get_weekend.__qualname__.startswith("HolidayBase."):
        return mask
    start = date(1970, 1, 1)
    return np.array([found._is_weekend(start + timedelta(n)) for n in range(DAYS)])


# --- corrections ---------------------------------------------------------------------------------------------------


def corrections(code: str) -> list[tuple[int, bool, str]]:
    """What resources/tables/calendar_corrections.csv adds or takes away: (day, opened, name) in file order."""
    out: list[tuple[int, bool, str]] = []
    for row in resources.table("calendar_corrections"):
        if row["calendar"] == code:
            first, last = int(row["first_year"] or 1970), int(row["last_year"] or 2100)
            out += [(day, row["open"] == "yes", row["name"]) for day in days_of(row["rule"], first, last)]
    return out


def days_of(rule: str, first_year: int, last_year: int) -> list[int]:
    """The days a rule of the corrections table means, one a year at most.

    `2001-09-12` one date; `01-02` every year; `12-28 if Monday Tuesday` only when it falls so; `Friday from 06-19` the
    first such weekday on or after that date; `Easter+40` or `Easter-48` so many days from Easter Sunday.
    """
    if re.fullmatch(r"\d{4}-\d\d-\d\d", rule):
        return [(date.fromisoformat(rule) - date(1970, 1, 1)).days]
    words = rule.split()
    out = []
    for year in range(first_year, last_year + 1):
        if rule.startswith("Easter"):
            day = easter(year) + int(rule.removeprefix("Easter"))
        elif len(words) == 3 and words[1] == "from":
            start = _day(year, words[2])
            day = start + (WEEKDAYS.index(words[0]) - int(WEEKDAY[start])) % 7
        else:
            day = _day(year, words[0])
            if len(words) > 1 and WEEKDAYS[WEEKDAY[day]] not in words[2:]:
                continue
        out.append(day)
    return out


def easter(year: int) -> int:
    """Easter Sunday of the Gregorian calendar as a day number; the method of Meeus, Jones and Butcher."""
    century, of_century = divmod(year, 100)
    golden = year % 19
    moon = (19 * golden + century - century // 4 - (century - (century + 8) // 25 + 1) // 3 + 15) % 30
    week = (32 + 2 * (century % 4) + 2 * (of_century // 4) - moon - of_century % 4) % 7
    shift = (golden + 11 * moon + 22 * week) // 451
    month, day = divmod(moon + week - 7 * shift + 114, 31)
    return (date(year, month, day + 1) - date(1970, 1, 1)).days


def _day(year: int, month_and_day: str) -> int:
    return (date.fromisoformat(f"{year}-{month_and_day}") - date(1970, 1, 1)).days
