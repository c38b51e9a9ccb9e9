"""A price is written in ways that can be misread: 99-16 is 99 and a half, not 99.16.

Each reading takes the right price (per 100, times 10^12) and gives what somebody would have used who read it that way, or
MISSING where the price could not have been misread so. Sources: CME education page on price quoting for the 32nds (cash
market, third digit in eighths); the rest is common practice, no source.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from reconciler.money import MISSING, half_up

ONE = 10**12
_32ND = ONE // 32
_256TH = ONE // 256


def _keep(price: np.ndarray, read: np.ndarray, possible: np.ndarray) -> np.ndarray:
    return np.where(possible & (read != price) & (price != MISSING) & (price > 0), read, MISSING)


def _in_32nds(price: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Whole points, 32nds, eighths of a 32nd, and whether the price is a whole number of those."""
    whole, rest = price // ONE, price % ONE
    return whole, rest // _32ND, rest % _32ND // _256TH, rest % _256TH == 0


def decimal_for_32nds(price: np.ndarray) -> np.ndarray:
    """99-16+ taken for 99.165: the digits behind the dash read as decimals."""
    whole, ticks, eighths, exact = _in_32nds(price)
    tail = np.where(eighths == 4, 5, eighths)
    return _keep(price, whole * ONE + ticks * (ONE // 100) + tail * (ONE // 1000), exact)


def decimal_for_32nds_bare(price: np.ndarray) -> np.ndarray:
    """99-16+ taken for 99.16: read as decimals and the third digit lost as well."""
    whole, ticks, eighths, exact = _in_32nds(price)
    return _keep(price, whole * ONE + ticks * (ONE // 100), exact & (eighths > 0))


def third_digit_lost(price: np.ndarray) -> np.ndarray:
    """99-16+ taken for 99-16: the plus (or the eighths) fell off."""
    whole, ticks, eighths, exact = _in_32nds(price)
    return _keep(price, whole * ONE + ticks * _32ND, exact & (eighths > 0))


def third_digit_decimal(price: np.ndarray) -> np.ndarray:
    """99-162 taken for 99 and 16.2/32: the third digit read as tenths instead of eighths."""
    whole, ticks, eighths, exact = _in_32nds(price)
    return _keep(price, whole * ONE + ticks * _32ND + eighths * (_32ND // 10), exact & (eighths > 0))


def futures_third_digit(price: np.ndarray) -> np.ndarray:
    """99-162 with its 2 taken for a quarter is right; a 5 or 7 taken for eighths is not (futures style, truncated quarters)."""
    whole, ticks, eighths, exact = _in_32nds(price)
    digit = np.select([eighths == 4, eighths == 6], [5, 7], 0)
    return _keep(price, whole * ONE + ticks * _32ND + digit * _256TH, exact & (digit > 0))


def ticks_for_decimal(price: np.ndarray) -> np.ndarray:
    """99.16 taken for 99-16: two decimals up to 31 read as 32nds."""
    whole, rest = price // ONE, price % ONE
    hundredths = rest // (ONE // 100)
    return _keep(price, whole * ONE + hundredths * _32ND, (rest % (ONE // 100) == 0) & (hundredths <= 31))


def per_one(price: np.ndarray) -> np.ndarray:
    """99.50 taken for a price per 1,000 of face: a tenth of the money."""
    return _keep(price, price // 10, price % 10 == 0)


def per_hundredth(price: np.ndarray) -> np.ndarray:
    """99.50 taken for a price per 1 of face divided again: a hundredth of the money."""
    return _keep(price, price // 100, price % 100 == 0)


def per_thousand(price: np.ndarray) -> np.ndarray:
    """A price per 100 multiplied as if it were per 10: ten times the money."""
    return _keep(price, price * 10, price < 10**17)


def rounded(places: int) -> Callable[[np.ndarray], np.ndarray]:
    """The price rounded half up to `places` decimals before it was multiplied."""
    step = 10 ** (12 - places)

    def read(price: np.ndarray) -> np.ndarray:
        return _keep(price, half_up([price], [step]) * step, price != MISSING)

    return read


def cut(places: int) -> Callable[[np.ndarray], np.ndarray]:
    """The price cut to `places` decimals before it was multiplied."""
    step = 10 ** (12 - places)

    def read(price: np.ndarray) -> np.ndarray:
        return _keep(price, price // step * step, price != MISSING)

    return read


@dataclass(frozen=True)
class Reading:
    """One misreading of a price: cause `name` as shown, `wording` for the sentence, how common, and the reading itself."""

    name: str
    wording: str
    weight: float
    read: Callable[[np.ndarray], np.ndarray]


READINGS: tuple[Reading, ...] = (
    Reading("32nds read as decimals", "the 32nds were read as decimals", 1.0, decimal_for_32nds),
    Reading("32nds read as decimals", "the 32nds were read as decimals and the last digit lost", 0.3, decimal_for_32nds_bare),
    Reading("eighths of a 32nd lost", "the plus or third digit behind the 32nds was lost", 0.9, third_digit_lost),
    Reading("third digit misread", "the third digit was read as tenths of a 32nd, not eighths", 0.4, third_digit_decimal),
    Reading("third digit misread", "the third digit was read as eighths where quarters were meant", 0.2, futures_third_digit),
    Reading("decimals read as 32nds", "the decimals were read as 32nds", 0.6, ticks_for_decimal),
    Reading("price per another unit", "the price was taken per 1,000 of face", 0.2, per_one),
    Reading("price per another unit", "the price was taken as per 1 of face and divided by 100 again", 0.2, per_hundredth),
    Reading("price per another unit", "the price was taken per 10 of face", 0.1, per_thousand),
    *(Reading("price rounded first", f"the price was rounded to {k} decimals first", 0.5, rounded(k)) for k in (2, 3, 4, 5, 6)),
    *(Reading("price cut first", f"the price was cut to {k} decimals first", 0.3, cut(k)) for k in (2, 3, 4, 5, 6)),
)
