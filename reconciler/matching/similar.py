"""A bond's number mistyped is still almost the same text: one or two characters changed, or two neighbours exchanged.

Compared are fixed-width byte arrays, all pairs at once. Texts of different length are not called similar: a lost character moves
all that follow, and guessing further is not worth a wrong pair.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.matching.keys import Pairs
from reconciler.records import Words

Array = np.ndarray[Any, Any]

_SHORTEST = 6


def similar_words(one: Words, other: Words, pairs: Pairs) -> Array:
    """True where both texts have the same length, at least six, and differ in at most two characters."""
    if not len(pairs[0]):
        return np.zeros(0, np.bool_)
    left, right = _bytes(one, pairs[0]), _bytes(other, pairs[1])
    width = max(left.shape[1], right.shape[1])
    left, right = (np.pad(side, ((0, 0), (0, width - side.shape[1]))) for side in (left, right))
    length = (left != 0).sum(axis=1)
    alike = length == (right != 0).sum(axis=1)
    return np.asarray(alike & (length >= _SHORTEST) & ((left != right).sum(axis=1) <= 2))


def _bytes(words: Words, rows: Array) -> Array:
    codes = words.codes[rows]
    used, place = np.unique(codes, return_inverse=True)
    texts = [b"" if code < 0 else str(words.values[code].as_py()).encode() for code in used.tolist()]
    fixed = np.array(texts, np.bytes_)
    width = max(fixed.dtype.itemsize, 1)
    return fixed.view(np.uint8).reshape(len(used), width)[place.reshape(-1)]


