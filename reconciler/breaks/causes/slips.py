"""A number typed by hand goes wrong in a handful of ways: a digit lost, doubled or exchanged, the point moved, the sign lost.

Each way is one function that makes, from the right number, the numbers a slip would give; nothing is guessed from the
difference alone (a difference divisible by nine is a hint, not a proof). Slips work on whole minor units, sign kept.
What is not tried: two slips in one number, which would fit almost anything.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from reconciler.money import MISSING

PLACES = 15
"""Digits looked at, from the last: enough for amounts up to 10^13 major units with two decimals."""

_TENS = 10 ** np.arange(19, dtype=np.int64)


def _signed(number: np.ndarray, magnitude: np.ndarray) -> np.ndarray:
    return np.where(number < 0, -magnitude, magnitude)


def _changed(number: np.ndarray, result: np.ndarray, possible: np.ndarray) -> np.ndarray:
    """`result` where the slip was possible and changed something, else MISSING."""
    return np.where(possible & (result != number) & (number != MISSING), result, MISSING)


def exchanged(number: np.ndarray, place: int) -> np.ndarray:
    """The number with the digits at `place` and the one left of it exchanged (0 is the last digit); MISSING if impossible."""
    size = np.abs(number)
    low, high = size // _TENS[place] % 10, size // _TENS[place + 1] % 10
    result = _signed(number, size + (low - high) * (_TENS[place + 1] - _TENS[place]))
    return _changed(number, result, size >= _TENS[place + 1])


def dropped(number: np.ndarray, place: int) -> np.ndarray:
    """The number with the digit at `place` left out; MISSING if it has no such digit."""
    size = np.abs(number)
    result = _signed(number, size // _TENS[place + 1] * _TENS[place] + size % _TENS[place])
    return _changed(number, result, size >= _TENS[max(place, 1)])


def doubled(number: np.ndarray, place: int) -> np.ndarray:
    """The number with the digit at `place` typed twice; MISSING if it has no such digit."""
    size = np.abs(number)
    head = size // _TENS[place]
    result = _signed(number, (head * 10 + head % 10) * _TENS[place] + size % _TENS[place])
    return _changed(number, result, (size >= _TENS[place]) & (size < _TENS[17]))


def point_moved(number: np.ndarray, places: int) -> np.ndarray:
    """The number with its decimal point moved right (`places` > 0) or left; left only where nothing is cut off."""
    if places > 0:
        return _changed(number, number * _TENS[places], np.abs(number) < _TENS[18 - places])
    shift = _TENS[-places]
    return _changed(number, number // shift, number % shift == 0)


def sign_lost(number: np.ndarray, _place: int) -> np.ndarray:
    """The number with the other sign."""
    return _changed(number, -number, number != 0)


@dataclass(frozen=True)
class Slip:
    """One way of mistyping: `name` as shown, `wording` for a sentence, `weight` how common it is (common practice, no source)."""

    name: str
    wording: str
    make: Callable[[np.ndarray, int], np.ndarray]
    places: tuple[int, ...]
    weight: float


SLIPS: tuple[Slip, ...] = (
    Slip("two digits exchanged", "two neighbouring digits are exchanged", exchanged, tuple(range(PLACES - 1)), 0.30),
    Slip("digit left out", "one digit is left out", dropped, tuple(range(PLACES)), 0.20),
    Slip("digit typed twice", "one digit is typed twice", doubled, tuple(range(PLACES)), 0.15),
    Slip("decimal point moved", "the decimal point has moved", point_moved, (1, 2, 3, 4, 5, 6, -1, -2, -3, -4, -5, -6), 0.20),
    Slip("sign lost", "the sign is lost", sign_lost, (0,), 0.15),
)


def candidates(number: np.ndarray, lowest: int = 0) -> Iterator[tuple[Slip, int, np.ndarray]]:
    """Every slip of every number: (slip, place, what would have been typed or MISSING), places below `lowest` left out."""
    for slip in SLIPS:
        for place in slip.places:
            if slip.make in (point_moved, sign_lost) or place >= lowest:
                yield slip, place, slip.make(number, place)


def which(right: np.ndarray, told: np.ndarray, lowest: int = 0) -> np.ndarray:
    """The number of the first slip in SLIPS that turns `right` into `told` (int8, -1 where none does)."""
    found = np.full(len(right), -1, np.int8)
    for slip, _place, typed in candidates(right, lowest):
        found[(found < 0) & (typed == told) & (typed != MISSING)] = SLIPS.index(slip)
    return found
