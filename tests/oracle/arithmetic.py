"""What a bond's terms say must be paid, reckoned one payment at a time in whole numbers and fractions.

Written from the contract of the files and the definitions of the day counts (ISDA 2006 section 4.16, ICMA rule 251),
not from the program; slow and obvious on purpose. Not handled: anything the generator does not invent (call dates,
compounded coupons).
"""

from __future__ import annotations

import calendar as month_lengths
from collections.abc import Iterable
from dataclasses import dataclass, field
from datetime import date, timedelta
from fractions import Fraction
from itertools import pairwise

from tests.oracle.days import Calendar, last_day, leap_days, months_on, thirty

DIGITS = {"USD": 2, "EUR": 2, "GBP": 2, "JPY": 0, "KWD": 3, "CHF": 2, "AUD": 2}

"""Decimals of the smallest unit (ISO 4217)."""


def half_up(value: Fraction) -> int:
    """The nearest whole number, halves away from zero."""
    whole = (abs(value) * 2 + 1) // 2
    return int(whole) if value >= 0 else -int(whole)


def down(value: Fraction) -> int:
    """The whole number towards zero."""
    return int(value) if value >= 0 else -int(-value)


@dataclass
class Bond:
    """A bond's terms, all resolved; `written` is what bonds.csv says of it where that differs (blanks the market
    fills).
    """

    bond: str
    description: str
    currency: str
    kind: str
    maturity: date
    accrual_start: date
    calendar: Calendar
    rate: Fraction = Fraction(0)
    frequency: int = 0
    day_count: str = "Act/Act ICMA"
    first_coupon: date | None = None
    last_regular: date | None = None
    end_of_month: bool = False
    payment_adjustment: str = "following"
    adjusted: bool = False
    settlement_days: int | None = 2
    ex_dividend: str = ""
    record: str = ""
    quote: str = "price"
    redemption_price: Fraction = Fraction(100)
    accrued_rounding: str = ""
    steps: list[tuple[date, Fraction]] = field(default_factory=list)
    """Rates of stepped and floating bonds; factors of amortising, index ratios of linked ones."""
    market: str = ""
    written: dict[str, str] = field(default_factory=dict)
    old_cycle: tuple[date, int] | None = None
    """Trades dealt before this day settled in so many open days."""

    def settles(self, traded: date) -> date:
        """The settlement date of a trade, where the market has a cycle (two days where none is told)."""
        days = 2 if self.settlement_days is None else self.settlement_days
        if self.old_cycle and traded < self.old_cycle[0]:
            days = self.old_cycle[1]
        return self.calendar.walk(traded, days)


@dataclass(frozen=True)
class Period:
    """One coupon period, unadjusted, and the same as interest counts it."""

    start: date
    end: date
    counted_from: date
    counted_to: date
    regular: bool


def grid(bond: Bond, earliest: date) -> list[date]:
    """Regular coupon dates back to the last one at or before `earliest`, rolled back from maturity (or the last
    regular coupon).
    """
    anchor, step = bond.last_regular or bond.maturity, 12 // bond.frequency
    to_end = bond.end_of_month and last_day(anchor)
    dates, number = [anchor], 0
    while dates[0] > earliest:
        number += 1
        dates.insert(0, months_on(anchor, -number * step, to_end))
    return dates


def periods(bond: Bond) -> list[Period]:
    """Every coupon period from the start of interest to maturity."""
    if bond.frequency == 0:
        return []
    regular = grid(bond, bond.accrual_start)
    ends = [day for day in regular if day > bond.accrual_start]
    if bond.first_coupon:
        ends = [day for day in ends if day >= bond.first_coupon]
    if bond.last_regular and bond.maturity > bond.last_regular:
        ends.append(bond.maturity)
    pairs = set(pairwise(regular))
    found = []
    for start, end in zip([bond.accrual_start, *ends[:-1]], ends, strict=True):
        counted = [bond.calendar.roll(day, bond.payment_adjustment) if bond.adjusted else day for day in (start, end)]
        # interest starts on the day the terms name, also where that is a closed day
        if start == bond.accrual_start:
            counted[0] = start
        found.append(Period(start, end, counted[0], counted[1], (start, end) in pairs))
    return found


def _icma(bond: Bond, period: Period, start: date, end: date) -> Fraction:
    """Days over the length of the regular period they fall in, times the frequency (ICMA rule 251)."""
    step = 12 // bond.frequency
    if bond.last_regular and period.start == bond.last_regular:
        to_end = bond.end_of_month and last_day(bond.last_regular)
        edges = [bond.last_regular]
        while edges[-1] < period.end:
            edges.append(months_on(bond.last_regular, step * len(edges), to_end))
    else:
        edges = [day for day in grid(bond, period.start) if day <= period.end]
    total = Fraction(0)
    for left, right in pairwise(edges):
        inside = (min(right, end) - max(left, start)).days
        if inside > 0:
            total += Fraction(inside, (right - left).days * bond.frequency)
    return total


def fraction(bond: Bond, period: Period, start: date, end: date, day_count: str = "") -> Fraction:
    """The part of a year between two days of one coupon period, under the bond's day count or another."""
    rule, days = day_count or bond.day_count, (end - start).days
    if rule == "Act/Act ICMA":
        return _icma(bond, period, start, end)
    if rule == "Act/Act ISDA":
        total = Fraction(0)
        for year in range(start.year, end.year + 1):
            inside = (min(end, date(year + 1, 1, 1)) - max(start, date(year, 1, 1))).days
            total += Fraction(inside, 366 if month_lengths.isleap(year) else 365)
        return total
    if rule == "Act/365L":
        if bond.frequency == 1:
            return Fraction(days, 366 if leap_days(period.counted_from, period.counted_to) else 365)
        return Fraction(days, 366 if month_lengths.isleap(period.counted_to.year) else 365)
    if rule == "Act/365 Canada":
        # a whole half-year is half the coupon, also one of 181 days (market pages: always exactly c/2)
        if days == (period.counted_to - period.counted_from).days and period.regular:
            return Fraction(1, bond.frequency)
        if days < Fraction(365, bond.frequency):
            return Fraction(days, 365)
        return Fraction(1, bond.frequency) - Fraction((period.counted_to - end).days, 365)
    if rule == "NL/365":
        return Fraction(days - leap_days(start, end), 365)
    if rule == "Bus/252":
        return Fraction(bond.calendar.count(start, end), 252)
    if rule.startswith("30"):
        return Fraction(thirty(rule, start, end, bond.maturity), 360)
    return Fraction(days, {"Act/360": 360, "Act/365F": 365}[rule])


def days_counted(bond: Bond, start: date, end: date, day_count: str = "") -> int:
    rule = day_count or bond.day_count
    if rule.startswith("30"):
        return thirty(rule, start, end, bond.maturity)
    if rule == "NL/365":
        return (end - start).days - leap_days(start, end)
    return bond.calendar.count(start, end) if rule == "Bus/252" else (end - start).days


def period_at(bond: Bond, day: date) -> Period | None:
    """The coupon period in which interest accrues on a day."""
    return next((p for p in periods(bond) if p.counted_from <= day < p.counted_to), None)


def in_force(steps: Iterable[tuple[date, Fraction]], day: date, before: Fraction) -> Fraction:
    """The last value that begins on or before a day, `before` if none does."""
    reached = [(begins, value) for begins, value in steps if begins <= day]
    return max(reached)[1] if reached else before


def rate_of(bond: Bond, period: Period) -> Fraction:
    if bond.kind not in ("stepped", "floating"):
        return bond.rate
    return in_force(bond.steps, max(period.start, period.counted_from), bond.rate)


def factor_at(bond: Bond, day: date) -> Fraction:
    return in_force(bond.steps, day, Fraction(1)) if bond.kind in ("amortising", "linked") else Fraction(1)


def days_before(bond: Bond, rule: str, day: date) -> date:
    """`6b` open days or `10c` calendar days before a day."""
    count = int(rule[:-1])
    return bond.calendar.walk(day, -count) if rule[-1] == "b" else day - timedelta(days=count)


def ex_date(bond: Bond, coupon_date: date) -> date | None:
    return days_before(bond, bond.ex_dividend, coupon_date) if bond.ex_dividend else None


def record_date(bond: Bond, coupon_date: date) -> date:
    return days_before(bond, bond.record or "1b", coupon_date)


def payment_date(bond: Bond, coupon_date: date) -> date:
    return bond.calendar.roll(coupon_date, bond.payment_adjustment)


def rounded_accrued(bond: Bond, face: int, per100: Fraction) -> int:
    """Accrued in smallest units from the unrounded figure per 100, as the bond's own rounding rule says."""
    cut = down if "down" in bond.accrued_rounding else half_up
    if ":" in bond.accrued_rounding:
        per, places = (int(n) for n in bond.accrued_rounding.split()[0].split(":"))
        per100 = Fraction(cut(per100 * per / 100 * 10**places), 10**places) * 100 / per
    return cut(face * per100 / 100)


def accrued(bond: Bond, settle: date, face: int, day_count: str = "", to: date | None = None) -> tuple[int, int, bool]:
    """Days, amount in smallest units, and whether without the coupon. `to` counts to another day than settlement."""
    period = period_at(bond, settle)
    if period is None:
        return 0, 0, False
    end = to or settle
    part = fraction(bond, period, period.counted_from, end, day_count)
    days = days_counted(bond, period.counted_from, end, day_count)
    ex = ex_date(bond, period.end)
    without = ex is not None and settle >= ex
    if without:
        part -= full_fraction(bond, period)
        days = -days_counted(bond, end, period.counted_to, day_count)
    return days, rounded_accrued(bond, face, rate_of(bond, period) * part * factor_at(bond, settle)), without


def full_fraction(bond: Bond, period: Period) -> Fraction:
    """The part of a year a whole coupon pays: one over the frequency, or counted in days."""
    if period.regular and (bond.day_count == "Act/Act ICMA" or bond.day_count.startswith("30")):
        return Fraction(1, bond.frequency)
    return fraction(bond, period, period.counted_from, period.counted_to)


def clean_price(bond: Bond, price: Fraction, settle: date) -> Fraction:
    """Price per 100 from the price as quoted; a discount rate is not rounded before it is used."""
    if bond.quote == "discount":
        basis = 360 if "360" in bond.day_count else 365
        return 100 - price * Fraction((bond.maturity - settle).days, basis)
    return price


def principal(bond: Bond, price: Fraction, settle: date, face: int) -> int:
    return half_up(face * clean_price(bond, price, settle) / 100 * factor_at(bond, settle))


def street_yield(bond: Bond, clean: Fraction, settle: date) -> float:
    """Yield in percent, compounding as often as the bond pays, of a bond on regular periods (by halving; ICMA rule
    803).
    """
    ahead = [p for p in periods(bond) if p.end > settle]
    first = ahead[0]
    wait = 1 - (settle - first.start).days / (first.end - first.start).days
    coupon = float(bond.rate) / bond.frequency
    dirty = float(clean) + coupon * (1 - wait)
    low, high = -50.0, 200.0
    for _ in range(200):
        middle = (low + high) / 2
        grow = 1 + middle / 100 / bond.frequency
        value = sum(coupon / grow ** (wait + n) for n in range(len(ahead))) + float(bond.redemption_price) / grow ** (
            wait + len(ahead) - 1
        )
        low, high = (middle, high) if value > dirty else (low, middle)
    return middle


def coupon_amount(bond: Bond, period: Period, face: int) -> int:
    """A coupon in smallest units on a face; the factor at the period's start, the index ratio on the coupon date."""
    factor = factor_at(bond, period.end if bond.kind == "linked" else period.start)
    return half_up(Fraction(face) * rate_of(bond, period) / 100 * full_fraction(bond, period) * factor)


def redemption_amount(bond: Bond, face: int) -> int:
    return half_up(Fraction(face) * bond.redemption_price / 100 * factor_at(bond, bond.maturity))


def isin(country: str, body: str) -> str:
    """An ISIN with its check digit (ISO 6166)."""
    text = country + body
    digits = "".join(str(int(c, 36)) for c in text)
    total = 0
    for place, digit in enumerate(reversed(digits)):
        number = int(digit) * (2 if place % 2 == 0 else 1)
        total += number // 10 + number % 10
    return text + str(-total % 10)
