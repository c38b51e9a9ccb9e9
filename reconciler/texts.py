"""A million amounts must become text in a tenth of a second, and always the same text for the same amount.

Whole columns of amounts, decimal numbers, whole numbers and dates become arrow string arrays: digits are split off column by column
of a byte matrix, and what is used of each row is copied out in one go. Plain text is for files ("-1234.50", "2026-03-31", blank for
not known), grouped text for sentences ("1,234.50"). Texts that a column of a file gives back to a reader are never
rounded: an amount shows all digits of its currency's minor unit, a decimal number as many digits as it has.

Not done: locales. Files are for programs, and sentences follow the one style of the house.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

Array = np.ndarray[Any, Any]

MISSING = np.iinfo(np.int64).min

_CHUNK = 65_536
_POINT, _COMMA, _MINUS, _PLUS = 46, 44, 45, 43


def amounts(minor: Array, digits: Array | int, grouped: bool = False, signed: bool = False) -> pa.Array:
    """Amounts in minor units as decimal text with `digits` places; null where MISSING.

    `minor` int64, `digits` one number or one per row. `grouped` puts a comma after every third digit, `signed` a plus before
    amounts above zero.
    """
    minor = np.asarray(minor, np.int64)
    places = np.asarray(digits, np.int64)
    if places.ndim == 0:
        return _fixed(minor, int(places), grouped, signed)
    distinct = np.unique(places)
    if len(distinct) <= 1:
        return _fixed(minor, int(distinct[0]) if len(distinct) else 0, grouped, signed)
    parts, order = [], []
    for value in distinct.tolist():
        rows = np.flatnonzero(places == value)
        parts.append(_fixed(minor[rows], value, grouped, signed))
        order.append(rows)
    back = np.empty(len(minor), np.int64)
    back[np.concatenate(order)] = np.arange(len(minor))
    return pa.concat_arrays(parts).take(pa.array(back))


def whole(numbers: Array, grouped: bool = False) -> pa.Array:
    """Whole numbers as text; null where MISSING."""
    return _fixed(np.asarray(numbers, np.int64), 0, grouped, False)


def decimals(values: Array, places: int, at_least: int = 0, grouped: bool = False) -> pa.Array:
    """Numbers times 10**`places` as decimal text without trailing zeros, but with `at_least` places; null where MISSING."""
    values = np.asarray(values, np.int64)
    distinct, code = np.unique(values, return_inverse=True)
    text = _fixed(distinct, places, grouped, False)
    if places > at_least:
        # What follows the last place that must stay is cut back to its last digit that is not zero.
        keep = pc.utf8_slice_codeunits(text, 0, at_least - places)
        tail = pc.utf8_rtrim(pc.utf8_slice_codeunits(text, at_least - places), "0")
        text = pc.binary_join_element_wise(keep, tail, "")
        if not at_least:
            text = pc.utf8_rtrim(text, ".")
    return text.take(pa.array(code.reshape(-1)))


def dates(days: Array) -> pa.Array:
    """Dates as ISO text; null for NaT."""
    return pa.array(np.asarray(days, "datetime64[D]")).cast(pa.string())


def long_dates(days: Array) -> pa.Array:
    """Dates as sentences tell them ("29 Mar 2026"); null for NaT."""
    distinct, code = np.unique(np.asarray(days, "datetime64[D]"), return_inverse=True)
    return pa.array([long_date(day) for day in distinct], pa.string()).take(pa.array(code.reshape(-1)))


_MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")


def long_date(day: np.datetime64 | None) -> str | None:
    """One date as sentences tell it; None for NaT."""
    if day is None or np.isnat(day):
        return None
    plain = day.astype("datetime64[D]").astype(object)
    return f"{plain.day} {_MONTHS[plain.month - 1]} {plain.year}"


def join(parts: Sequence[pa.Array | str], length: int) -> pa.Array:
    """Texts put one after the other, row by row; a plain str stands in every row and a null counts as ""."""
    columns = [pa.repeat(pa.scalar(part, pa.string()), length) if isinstance(part, str) else part for part in parts]
    return pc.binary_join_element_wise(*columns, "", null_handling="replace", null_replacement="")


def _fixed(minor: Array, digits: int, grouped: bool, signed: bool) -> pa.Array:
    """Amounts that all have the same number of places."""
    missing = minor == MISSING
    some_missing = bool(missing.any())
    if some_missing:
        minor = np.where(missing, 0, minor)
    texts, lengths = [], []
    for first in range(0, len(minor), _CHUNK):
        text, length = _chunk(minor[first : first + _CHUNK], digits, grouped, signed)
        texts.append(text)
        lengths.append(length)
    ends = np.zeros(len(minor) + 1, np.int32)
    if lengths:
        np.cumsum(np.concatenate(lengths), out=ends[1:])
    body = np.concatenate(texts) if texts else np.zeros(0, np.uint8)
    out = pa.StringArray.from_buffers(len(minor), pa.py_buffer(ends), pa.py_buffer(body))
    return pc.if_else(pa.array(missing), pa.scalar(None, pa.string()), out) if some_missing else out


def _chunk(minor: Array, digits: int, grouped: bool, signed: bool) -> tuple[Array, Array]:
    """The bytes of some amounts one after the other, and the length of each."""
    size = np.abs(minor).view(np.uint64)
    figures = max(len(str(int(size.max()))), digits + 1)
    commas = (figures - digits - 1) // 3 if grouped else 0
    width = figures + (1 if digits else 0) + commas + 1
    matrix = np.empty((len(minor), width), np.uint8)
    length = np.full(len(minor), digits + (2 if digits else 1), np.int64)
    ten = np.uint64(10)
    at = width - 1
    for place in range(figures):
        before = place - digits
        if digits and before == 0:
            matrix[:, at] = _POINT
            at -= 1
        if commas and before > 0 and before % 3 == 0:
            matrix[:, at] = _COMMA
            at -= 1
            length += size > 0
        rest = size // ten
        matrix[:, at] = (size - rest * ten).astype(np.uint8) + 48
        if before > 0:
            length += size > 0
        size = rest
        at -= 1
    negative = minor < 0
    marked = negative | (minor > 0) if signed else negative
    if marked.any():
        rows = np.flatnonzero(marked)
        matrix[rows, width - 1 - length[rows]] = np.where(negative[rows], _MINUS, _PLUS)
        length += marked
    kept = np.arange(width) >= (width - length)[:, None]
    return matrix[kept], length.astype(np.int32)
