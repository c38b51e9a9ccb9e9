"""How much of a year lies between two dates is a matter of agreement; each agreement is one entry here, exact.

A day count says how many days an accrual shows (`days`) and which fraction of the annual rate it earns (`fraction`, a
numerator and a denominator: exact, so that money is rounded once, at the end). Sources stand beside each entry of
`DAY_COUNTS`; figures of ISDA's worked examples are in tests/published/.

Most conventions look at the two dates alone. Some need the coupon period the dates lie in, which the schedule supplies
as `Period`: Act/Act ICMA measures against the lengths of (notional) regular periods, the Canadian rule counts the days
left in one, Act/365L asks for a leap day in it, two of the 30/360 family ask about month ends and maturity.

Not here: names that other people use for these conventions (a broker's layout says what its words mean), and the rule
that a regular coupon is rate / frequency (`EVEN` marks the day counts it holds for; the coupon itself is paid in
accrual).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds.calendars import Calendars
from reconciler.bonds.dates import civil, last_of_february, leap, leap_days_through, year_of

Array = np.ndarray[Any, Any]
Ratio = tuple[Array, Array]


@dataclass(frozen=True)
class Period:
    """The coupon period each accrual lies in: columns of one row per accrual, or of a single row that holds for all.

    For a span [start, end) inside one coupon period: `first_days` over `first_length`, `whole` regular periods and
    `last_days` over `last_length` are its parts, cut at the dates of the regular schedule. A span in a regular period
    has one part: `first_days` = end - start over `first_length` = days in the period, `whole` 0, `last_days` 0,
    `last_length` 1. Lengths must be above zero even where their days are 0.
    """

    frequency: Array
    """Payments a year, int64; 0 counts as 1."""
    start: Array
    """Start of the coupon period as interest counts it, datetime64[D]."""
    end: Array
    """End of the coupon period as interest counts it, datetime64[D]."""
    whole: Array
    first_days: Array
    first_length: Array
    last_days: Array
    last_length: Array
    maturity: Array
    """The bond's maturity (NaT where it is not known), for 30E/360 ISDA."""
    month_end: Array
    """True where the bond pays on month ends, for 30/360 US."""


class Span:
    """Start and end dates with what the conventions may ask for, narrowed to the rows of one convention."""

    def __init__(
        self,
        start: Array,
        end: Array,
        period: Period | None,
        calendars: Calendars | None,
        calendar: Array | None,
        rows: Array | None = None,
    ) -> None:
        self._start, self._end = start, end
        self._period, self.calendars, self._calendar = period, calendars, calendar
        self._rows = rows

    def of(self, rows: Array) -> Span:
        """The same span at some rows only; columns are gathered when asked for."""
        return Span(self._start, self._end, self._period, self.calendars, self._calendar, rows)

    def _pick(self, column: Array) -> Array:
        return column if self._rows is None or len(column) == 1 else column[self._rows]

    @property
    def start(self) -> Array:
        """First day of the accrual."""
        return self._pick(self._start)

    @property
    def end(self) -> Array:
        """Day the accrual ends, itself not counted."""
        return self._pick(self._end)

    @property
    def calendar(self) -> Array:
        """Calendar numbers; calendar 0 where none were given."""
        return np.zeros(1, np.int64) if self._calendar is None else self._pick(self._calendar)

    def period(self, name: str) -> Array:
        """A column of the coupon period."""
        if self._period is None:
            raise ValueError(f"this day count needs the coupon period ({name})")
        column: Array = getattr(self._period, name)
        return self._pick(column)

    @property
    def frequency(self) -> Array:
        """Payments a year, at least 1."""
        return np.maximum(self.period("frequency"), 1)


@dataclass(frozen=True)
class DayCount:
    """One convention: `days` an accrual shows, exact `fraction` of a year, where it is defined."""

    name: str
    source: str
    days: Callable[[Span], Array]
    fraction: Callable[[Span], Ratio]
    even: bool = False
    """Whether a regular coupon is rate / frequency instead of being counted in days."""


def _actual(span: Span) -> Array:
    return (span.end - span.start).astype(np.int64)


def _over(basis: int, days: Callable[[Span], Array]) -> Callable[[Span], Ratio]:
    """Days of the convention over a fixed number of days in the year."""

    def fraction(span: Span) -> Ratio:
        return days(span), np.array([basis], np.int64)

    return fraction


def _icma(span: Span) -> Ratio:
    first_length, last_length = span.period("first_length"), span.period("last_length")
    whole, last_days = span.period("whole"), span.period("last_days")
    if not (whole.any() or last_days.any()):
        # Regular and short periods, nearly all there are: one part, and a smaller denominator.
        return span.period("first_days"), span.frequency * first_length
    above = span.period("first_days") * last_length + last_days * first_length + whole * (first_length * last_length)
    return above, span.frequency * first_length * last_length


def _position_isda(dates: Array) -> Array:
    """Where a date stands on a line of years, in units of 1/(365 x 366) of a year."""
    years = year_of(dates).astype(np.int64)
    leap_years = leap(years)
    # Days from the year 0 to 1 January, so that the day of the year is one subtraction; 719,528 of them lie before
    # 1970.
    start = 365 * years + (years + 3) // 4 - (years + 99) // 100 + (years + 399) // 400 - 719_528
    day_of_year = dates.view(np.int64) - start
    result: Array = years * (365 * 366) + day_of_year * np.where(leap_years, 365, 366)
    return result


def _isda(span: Span) -> Ratio:
    return _position_isda(span.end) - _position_isda(span.start), np.array([365 * 366], np.int64)


def _leap_basis(span: Span) -> Ratio:
    starts, ends = span.period("start"), span.period("end")
    leap_day_inside = leap_days_through(ends) > leap_days_through(starts)
    leap_year_end = leap(year_of(ends))
    basis = np.where(np.where(span.frequency == 1, leap_day_inside, leap_year_end), 366, 365)
    return _actual(span), basis


def _without_leap_days(span: Span) -> Array:
    start, end = span.start, span.end
    result: Array = (end - start).astype(np.int64) - (leap_days_through(end) - leap_days_through(start))
    return result


# Under half a coupon (365 / frequency days) the days count over 365, beyond it the days left are taken off the whole
# coupon; a full period is the whole coupon even where it has 181 days. QuantLib divides 365 / 2 in whole numbers and so
# changes over at 182 days, half a day sooner. With one payment a year the second form only meets the last day of 366.
def _canadian_part(days: Array, length: Array, frequency: Array) -> Array:
    """Days within one regular period, as a numerator over 365 x frequency."""
    late = 365 - frequency * (length - days)
    result: Array = np.where(days >= length, 365, np.where(days * frequency > 365, late, days * frequency))
    return np.where(days == 0, 0, result)


def _canadian(span: Span) -> Ratio:
    frequency = span.frequency
    first = _canadian_part(span.period("first_days"), span.period("first_length"), frequency)
    last = _canadian_part(span.period("last_days"), span.period("last_length"), frequency)
    return span.period("whole") * 365 + first + last, 365 * frequency


def _business_days(span: Span) -> Array:
    if span.calendars is None:
        raise ValueError("Bus/252 needs calendars")
    return span.calendars.count(span.calendar, span.start, span.end)


def _thirty(first: tuple[Array, Array, Array], last: tuple[Array, Array, Array], day_1: Array, day_2: Array) -> Array:
    result: Array = (last[0] - first[0]) * 360 + (last[1] - first[1]) * 30 + (day_2 - day_1)
    return result


def _bond_basis(span: Span) -> Array:
    first, last = civil(span.start), civil(span.end)
    day_1 = np.minimum(first[2], 30)
    day_2 = np.where((last[2] == 31) & (day_1 == 30), 30, last[2])
    return _thirty(first, last, day_1, day_2)


def _thirty_us(span: Span) -> Array:
    first, last = civil(span.start), civil(span.end)
    february = last_of_february(*first) & span.period("month_end")
    day_1 = np.where(february, 30, np.minimum(first[2], 30))
    day_2 = np.where((february & last_of_february(*last)) | ((last[2] == 31) & (day_1 == 30)), 30, last[2])
    return _thirty(first, last, day_1, day_2)


def _thirty_european(span: Span) -> Array:
    first, last = civil(span.start), civil(span.end)
    return _thirty(first, last, np.minimum(first[2], 30), np.minimum(last[2], 30))


def _thirty_european_isda(span: Span) -> Array:
    first, last = civil(span.start), civil(span.end)
    day_1 = np.where(last_of_february(*first), 30, np.minimum(first[2], 30))
    february = last_of_february(*last) & (span.end != span.period("maturity"))
    days = _thirty(first, last, day_1, np.where(february, 30, np.minimum(last[2], 30)))
    # Of a span that starts and ends on a maturity in February only the start is stretched to the 30th: still no days.
    return np.where(span.start == span.end, 0, days)


DAY_COUNTS: tuple[DayCount, ...] = (
    DayCount("Act/Act ICMA", "ICMA rule 251; ISDA 2006 4.16(c), EMU memorandum 1999", _actual, _icma, even=True),
    DayCount("Act/Act ISDA", "ISDA 2006 4.16(b)", _actual, _isda),
    DayCount("Act/360", "ISDA 2006 4.16(e)", _actual, _over(360, _actual)),
    DayCount("Act/365F", "ISDA 2006 4.16(d)", _actual, _over(365, _actual)),
    DayCount("Act/365L", "ICMA rule 251.1(i); ISDA 2006 supplement (from memory)", _actual, _leap_basis),
    DayCount("30/360", "ISDA 2006 4.16(f)", _bond_basis, _over(360, _bond_basis), even=True),
    DayCount(
        "30/360 US",
        "SIA Standard Securities Calculation Methods (from memory)",
        _thirty_us,
        _over(360, _thirty_us),
        even=True,
    ),
    DayCount("30E/360", "ISDA 2006 4.16(g)", _thirty_european, _over(360, _thirty_european), even=True),
    DayCount("30E/360 ISDA", "ISDA 2006 4.16(h)", _thirty_european_isda, _over(360, _thirty_european_isda), even=True),
    DayCount(
        "Act/365 Canada",
        "Canadian dealers' rule 4803 as QuantLib and market pages state it",
        _actual,
        _canadian,
        even=True,
    ),
    DayCount("NL/365", "common practice, from memory", _without_leap_days, _over(365, _without_leap_days)),
    DayCount("Bus/252", "Brazilian government bond practice, from memory", _business_days, _over(252, _business_days)),
)

NUMBERS: dict[str, int] = {entry.name: number for number, entry in enumerate(DAY_COUNTS)}
"""Day-count number of each name, as the int8 columns hold it."""

EVEN: Array = np.array([entry.even for entry in DAY_COUNTS])
"""Per day-count number: whether a regular coupon is rate / frequency (indexable by an int column)."""


def accrued_days(
    day_count: Array,
    start: Array,
    end: Array,
    period: Period | None = None,
    calendars: Calendars | None = None,
    calendar: Array | None = None,
) -> Array:
    """Days each accrual shows, int64, for `day_count` numbers and dates [start, end).

    The rest is read only where a convention asks for it. NaT in either date gives MISSING.
    """
    start, end = _dates(start), _dates(end)
    span = Span(start, end, period, calendars, calendar)
    out = np.empty(len(start), np.int64)
    for number, rows in _groups(day_count, len(start)):
        if rows is None:
            out[:] = DAY_COUNTS[number].days(span)
        else:
            out[rows] = DAY_COUNTS[number].days(span.of(rows))
    void = np.isnat(start) | np.isnat(end)
    if void.any():
        out[void] = np.iinfo(np.int64).min
    return out


def fraction(
    day_count: Array,
    start: Array,
    end: Array,
    period: Period | None = None,
    calendars: Calendars | None = None,
    calendar: Array | None = None,
) -> Ratio:
    """The exact fraction of a year in each [start, end), as int64 numerators and positive denominators.

    Arguments as for `accrued_days`; not reduced to lowest terms. NaT in either date gives MISSING over 1.
    """
    start, end = _dates(start), _dates(end)
    span = Span(start, end, period, calendars, calendar)
    above, below = np.empty(len(start), np.int64), np.empty(len(start), np.int64)
    for number, rows in _groups(day_count, len(start)):
        if rows is None:
            above[:], below[:] = DAY_COUNTS[number].fraction(span)
        else:
            above[rows], below[rows] = DAY_COUNTS[number].fraction(span.of(rows))
    void = np.isnat(start) | np.isnat(end)
    if void.any():
        above[void], below[void] = np.iinfo(np.int64).min, 1
    return above, below


def _dates(column: Array) -> Array:
    return np.atleast_1d(np.asarray(column, "datetime64[D]"))


def _groups(day_count: Array, length: int) -> list[tuple[int, Array | None]]:
    """The day counts that occur, each with its rows (None: all of them)."""
    numbers = np.atleast_1d(np.asarray(day_count))
    if not length:
        return []
    present = np.flatnonzero(np.bincount(numbers, minlength=len(DAY_COUNTS)))
    if len(present) == 1:
        return [(int(present[0]), None)]
    return [(int(number), np.flatnonzero(numbers == number)) for number in present]
