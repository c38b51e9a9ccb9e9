"""A cent must be the same cent however it was reckoned, so money is exact integers, rounded once by a named rule.

An amount is a quotient of integers (face x rate x days over basis): `half_up` and `down` return that quotient rounded
to a whole minor unit, equal to rational arithmetic for every input. How: a float64 estimate lies within one unit of the
truth, and the remainder numerator - estimate x denominator is small, so it comes out exact even where both products
wrap around in int64; the remainder then moves the estimate by at most one unit. Rows outside the range where that
argument holds are first divided by their common factors and otherwise reckoned one by one with Python integers.

Rounding is half away from zero (half up on the amount, the sign put back after), as markets state it; half-even is not
offered because no market table of ours asks for it. Digits after the point are those of ISO 4217
(resources/tables/currencies.csv).
"""

from __future__ import annotations

import functools
import math
from collections.abc import Callable, Sequence
from typing import Any

import numpy as np

from reconciler import resources
from reconciler.problems import BugError

MISSING = np.iinfo(np.int64).min
"""The int64 that stands for an amount nobody told; any MISSING going in gives MISSING."""

Ints = np.ndarray[Any, np.dtype[np.int64]]
Factor = "np.ndarray[Any, Any] | int"

_CHUNK = 65_536
# A quotient below this is estimated within one unit by up to 24 float operations of relative error 2**-53 each.
_ESTIMATE_LIMIT = 2.0**47
# Twice a remainder of at most 1.25 denominators must fit int64.
_DENOMINATOR_LIMIT = 2.0**61 * (1 - 2.0**-40)


def half_up(
    numerators: Sequence[np.ndarray[Any, Any] | int], denominators: Sequence[np.ndarray[Any, Any] | int]
) -> Ints:
    """The product of `numerators` over the product of `denominators`, rounded half away from zero.

    Whole numbers of any sign above, positive whole numbers below: int64 arrays of one shape, or numbers that hold for
    every row. Returns int64 of that shape (one row when all are single numbers); MISSING where a numerator is MISSING
    or a denominator is not above zero. A result that does not fit int64 is MISSING too: it is no amount.
    """
    return _rounded(numerators, denominators, _settle_half_up, _exact_half_up)


def down(numerators: Sequence[np.ndarray[Any, Any] | int], denominators: Sequence[np.ndarray[Any, Any] | int]) -> Ints:
    """The same quotient cut off toward zero, otherwise as `half_up`."""
    return _rounded(numerators, denominators, _settle_down, _exact_down)


def _rounded(
    numerators: Sequence[np.ndarray[Any, Any] | int],
    denominators: Sequence[np.ndarray[Any, Any] | int],
    settle: Callable[[Ints, Ints, Any, Any], None],
    exact: Callable[[int, int], int],
) -> Ints:
    above, above_constant = _split(numerators)
    below, below_constant = _split(denominators)
    length = max([len(a) for a in above + below], default=1)
    if above_constant == MISSING or below_constant <= 0 or length == 0:
        return np.full(length, MISSING, np.int64)
    common = math.gcd(above_constant, below_constant)
    above_constant //= common
    below_constant //= common
    out = np.empty(length, np.int64)
    for first in range(0, length, _CHUNK):
        part = slice(first, min(first + _CHUNK, length))
        tops = [a[part] if len(a) == length else a for a in above]
        bottoms = [b[part] if len(b) == length else b for b in below]
        out[part] = _chunk(tops, above_constant, bottoms, below_constant, part.stop - first, settle, exact)
    return out


def _split(factors: Sequence[np.ndarray[Any, Any] | int]) -> tuple[list[Ints], int]:
    """Columns apart from plain numbers; the numbers multiplied into one Python int (MISSING if any is)."""
    columns: list[Ints] = []
    constant = 1
    for factor in factors:
        column = np.asarray(factor)
        if column.ndim == 0:
            value = int(column)
            constant = MISSING if MISSING in (value, constant) else constant * value
        else:
            columns.append(column.astype(np.int64, copy=False))
    return columns, constant


def _chunk(
    above: list[Ints],
    above_constant: int,
    below: list[Ints],
    below_constant: int,
    length: int,
    settle: Callable[[Ints, Ints, Any, Any], None],
    exact: Callable[[int, int], int],
) -> Ints:
    """One stretch of rows: the fast way where it holds for all of them, else row by row as far as needed."""
    void = _void(above, below, length)
    if abs(above_constant) < 2**62 and below_constant < 2**61:
        quotient, sound = _fast(above, above_constant, below, below_constant, length, settle)
    else:
        quotient, sound = np.zeros(length, np.int64), np.zeros(length, np.bool_)
    if sound is not None:
        # Void rows are left out: their figures mean nothing and need no exact work.
        rest = np.flatnonzero(~sound if void is None else ~(sound | void))
        if len(rest):
            quotient[rest] = _reduced(above, above_constant, below, below_constant, rest, settle, exact)
    if void is not None:
        quotient[void] = MISSING
    return quotient


def _void(above: list[Ints], below: list[Ints], length: int) -> np.ndarray[Any, np.dtype[np.bool_]] | None:
    """True where there is nothing to reckon; None when that is nowhere."""
    masks = [a == MISSING for a in above if a.min() == MISSING] + [b <= 0 for b in below if b.min() <= 0]
    if not masks:
        return None
    out = np.zeros(length, np.bool_)
    for mask in masks:
        out |= mask
    return out


def _fast(
    above: list[Ints],
    above_constant: int,
    below: list[Ints],
    below_constant: int,
    length: int,
    settle: Callable[[Ints, Ints, Any, Any], None],
) -> tuple[Ints, np.ndarray[Any, np.dtype[np.bool_]] | None]:
    """Quotients by estimate and wrapped remainder, and where they may be trusted (None: everywhere)."""
    estimate: Any = float(above_constant)
    numerator: Any = np.int64(above_constant)
    for factor in above:
        estimate = factor * estimate
        numerator = factor if above_constant == 1 and factor is above[0] else np.multiply(numerator, factor)
    scale: Any = float(below_constant)
    denominator: Any = np.int64(below_constant)
    for factor in below:
        scale = factor * scale
        denominator = np.multiply(denominator, factor)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        estimate = np.atleast_1d(np.asarray(estimate / scale))
    if len(estimate) != length:
        estimate = np.broadcast_to(estimate, (length,)).copy()
    sound = None
    largest, smallest = float(np.max(estimate)), float(np.min(estimate))
    if not (largest < _ESTIMATE_LIMIT and smallest > -_ESTIMATE_LIMIT and float(np.max(scale)) < _DENOMINATOR_LIMIT):
        sound = (np.abs(estimate) < _ESTIMATE_LIMIT) & (scale < _DENOMINATOR_LIMIT)
        estimate = np.where(sound, estimate, 0.0)
    negative = estimate < 0
    quotient: Ints = np.rint(estimate).astype(np.int64)
    remainder: Ints = np.subtract(numerator, np.multiply(quotient, denominator))
    settle(quotient, remainder, denominator, negative)
    return quotient, sound


def _settle_half_up(quotient: Ints, remainder: Ints, denominator: Any, negative: Any) -> None:
    # On a tie the amount moves away from zero; taking one off the doubled remainder of negative rows turns the tie
    # round.
    remainder += remainder
    remainder -= negative
    quotient += remainder >= denominator
    quotient -= remainder < -denominator


def _settle_down(quotient: Ints, remainder: Ints, denominator: Any, negative: Any) -> None:
    sign = np.where(negative, np.int64(-1), np.int64(1))
    remainder *= sign
    step = (remainder >= denominator).astype(np.int64)
    step -= remainder < 0
    step -= remainder < -denominator
    quotient += step * sign


def _reduced(
    above: list[Ints],
    above_constant: int,
    below: list[Ints],
    below_constant: int,
    rows: np.ndarray[Any, Any],
    settle: Callable[[Ints, Ints, Any, Any], None],
    exact: Callable[[int, int], int],
) -> Ints:
    """Rows outside the fast range, divided by their common factors; what is still outside, in Python integers."""
    tops = [np.broadcast_to(a, (max(len(a), int(rows[-1]) + 1),))[rows].copy() for a in above]
    bottoms = [np.broadcast_to(b, (max(len(b), int(rows[-1]) + 1),))[rows].copy() for b in below]
    tops += [np.full(len(rows), factor, np.int64) for factor in _pieces(above_constant)]
    bottoms += [np.full(len(rows), factor, np.int64) for factor in _pieces(below_constant)]
    for top in tops:
        for bottom in bottoms:
            common = np.maximum(np.gcd(top, bottom), 1)
            top //= common
            bottom //= common
    quotient, sound = _fast(tops, 1, bottoms, 1, len(rows), settle)
    if sound is not None:
        for row in np.flatnonzero(~sound):
            value = exact(math.prod(int(top[row]) for top in tops), math.prod(int(bottom[row]) for bottom in bottoms))
            quotient[row] = value if -(2**63) < value < 2**63 else MISSING
    return quotient


def _pieces(constant: int) -> list[int]:
    """A Python integer as factors that fit int64; ours are powers of ten times small numbers."""
    pieces: list[int] = []
    while abs(constant) >= 2**62:
        for piece in (10**12, 10**6, 10, 2, 3, 5, 7):
            if constant % piece == 0:
                break
        else:
            raise BugError(f"a constant factor beyond int64 without a small divisor: {constant}")
        pieces.append(piece)
        constant //= piece
    return [*pieces, constant]


def _exact_half_up(numerator: int, denominator: int) -> int:
    whole = (2 * abs(numerator) + denominator) // (2 * denominator)
    return -whole if numerator < 0 else whole


def _exact_down(numerator: int, denominator: int) -> int:
    whole = abs(numerator) // denominator
    return -whole if numerator < 0 else whole


@functools.cache
def _digits() -> dict[str, int]:
    return {row["currency"]: int(row["digits"]) for row in resources.table("currencies")}


def known_currency(code: str) -> bool:
    """Whether ISO 4217 lists the code (three capital letters)."""
    return code in _digits()


def minor_digits(currencies: Sequence[str]) -> Ints:
    """Digits after the point of each currency (ISO 4217: JPY 0, USD 2, KWD 3), int64; 2 for an unknown code."""
    digits = _digits()
    return np.array([digits.get(code, 2) for code in currencies], np.int64)


def to_text(
    minor: Sequence[int] | np.ndarray[Any, Any], digits: int | Sequence[int] | np.ndarray[Any, Any]
) -> list[str]:
    """Amounts in minor units as plain decimal text ("-1234.50"), "" for MISSING; for the few figures a sentence quotes.

    Whole columns go through exports, which has a faster way.
    """
    amounts = np.atleast_1d(np.asarray(minor, np.int64))
    places = np.broadcast_to(np.asarray(digits, np.int64), amounts.shape)
    return [_one_text(int(a), int(d)) for a, d in zip(amounts.tolist(), places.tolist(), strict=True)]


def _one_text(minor: int, digits: int) -> str:
    if minor == MISSING:
        return ""
    sign, figures = ("-" if minor < 0 else ""), str(abs(minor)).rjust(digits + 1, "0")
    return sign + (f"{figures[:-digits]}.{figures[-digits:]}" if digits else figures)
