"""Amounts, dates and other figures as the clerk reads them on the screen.

Money arrives as whole minor units and leaves as text with grouped thousands, a true minus sign and, where asked, a plus sign;
no float is involved. Dates are told short when their year is the morning's. What is copied or exported is written plainly
(`plain_amount`, ISO dates), so that a spreadsheet reads it.
"""

from __future__ import annotations

import datetime

import numpy as np

from reconciler.records import MISSING

MINUS = "\u2212"
_MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")
_LONG_MONTHS = (
    "January", "February", "March", "April", "May", "June", "July", "August", "September", "October", "November",
    "December",
)  # fmt: skip
_WEEKDAYS = ("Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday")


def amount(minor: int, digits: int, signed: bool = False) -> str:
    """`-506792808, 2` as "−5,067,928.08"; blank when nobody told it; `signed` adds the plus sign."""
    if minor == MISSING:
        return ""
    whole, part = divmod(abs(minor), 10**digits)
    text = f"{whole:,}.{part:0{digits}}" if digits else f"{whole:,}"
    return (MINUS if minor < 0 else "+" if signed and minor > 0 else "") + text


def plain_amount(minor: int, digits: int) -> str:
    """The same for spreadsheets: no grouping, ASCII minus."""
    if minor == MISSING:
        return ""
    whole, part = divmod(abs(minor), 10**digits)
    return ("-" if minor < 0 else "") + (f"{whole}.{part:0{digits}}" if digits else str(whole))


def face(minor: int, digits: int) -> str:
    """A face amount; the decimals are left out when they are zero."""
    if minor == MISSING:
        return ""
    text = amount(minor, digits)
    return text[: -digits - 1] if digits and minor % 10**digits == 0 else text


def decimal(value: int, places: int, least: int = 0) -> str:
    """A decimal number held as value times 10**places, with trailing zeros cut to `least` decimals."""
    if value == MISSING:
        return ""
    whole, part = divmod(abs(value), 10**places)
    tail = f"{part:0{places}}".rstrip("0").ljust(least, "0")
    return (MINUS if value < 0 else "") + f"{whole:,}" + (f".{tail}" if tail else "")


def _as_date(day: object) -> datetime.date | None:
    value = day.astype("datetime64[D]").item() if isinstance(day, np.datetime64) else day
    return value if isinstance(value, datetime.date) else None


def date(day: object, year: int = 0) -> str:
    """ "30 Mar" within the year given, else "30 Mar 2026"; blank when not known."""
    value = _as_date(day)
    if value is None:
        return ""
    short = f"{value.day} {_MONTHS[value.month - 1]}"
    return short if value.year == year else f"{short} {value.year}"


def long_date(day: object) -> str:
    """ "31 March 2026"."""
    value = _as_date(day)
    return f"{value.day} {_LONG_MONTHS[value.month - 1]} {value.year}" if value else ""


def weekday(day: object) -> str:
    """ "Tuesday"."""
    value = _as_date(day)
    return _WEEKDAYS[value.weekday()] if value else ""


def iso(day: object) -> str:
    """ "2026-03-31", for copies and exports."""
    value = _as_date(day)
    return value.isoformat() if value else ""


def count(number: int, one: str, many: str = "") -> str:
    """ "1 break", "41 breaks"."""
    return f"{number:,} {one if number == 1 else many or one + 's'}"


def minus_sign(text: str) -> str:
    """A number told as text, with a true minus sign for the screen."""
    return MINUS + text[1:] if text.startswith("-") else text


def grouped(text: str, signed: bool = False) -> str:
    """A plain decimal text ("-1082.34") as the screen shows it; any other text unchanged."""
    bare = text[1:] if text[:1] in "+-" else text
    whole, dot, part = bare.partition(".")
    if not (whole.isdigit() and (not dot or part.isdigit())):
        return text
    sign = MINUS if text.startswith("-") else "+" if signed and bare.strip("0.") else ""
    return f"{sign}{int(whole):,}{dot}{part}"
