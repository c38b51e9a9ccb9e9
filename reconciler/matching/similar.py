"""A bond's number mistyped is still almost the same text: one character changed, or two neighbours exchanged.

Two bonds of one issuer often differ in two characters, a number of the series and the check digit; no two valid ISINs differ in one
(ISO 6166 check digit), so nothing wider is called similar. Compared are fixed-width byte arrays, all pairs at once; texts of
different length are not similar.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.matching.keys import Pairs
from reconciler.records import Words

Array = np.ndarray[Any, Any]

_SHORTEST = 6


def similar_words(one: Words, other: Words, pairs: Pairs) -> Array:
    """True where both texts have the same length, at least six, and one typing slip makes one the other."""
    if not len(pairs[0]):
        return np.zeros(0, np.bool_)
    left, right = _bytes(one, pairs[0]), _bytes(other, pairs[1])
    width = max(left.shape[1], right.shape[1])
    left, right = (np.pad(side, ((0, 0), (0, width - side.shape[1]))) for side in (left, right))
    length = (left != 0).sum(axis=1)
    alike = (length == (right != 0).sum(axis=1)) & (length >= _SHORTEST)
    off = left != right
    count = off.sum(axis=1)
    first = off.argmax(axis=1)
    second = np.minimum(first + 1, width - 1)
    row = np.arange(len(left))
    exchanged = (count == 2) & off[row, second] & (left[row, first] == right[row, second]) & (left[row, second] == right[row, first])
    return np.asarray(alike & ((count == 1) | exchanged))


def _bytes(words: Words, rows: Array) -> Array:
    codes = words.codes[rows]
    used, place = np.unique(codes, return_inverse=True)
    texts = [b"" if code < 0 else str(words.values[code].as_py()).encode() for code in used.tolist()]
    fixed = np.array(texts, np.bytes_)
    width = max(fixed.dtype.itemsize, 1)
    return fixed.view(np.uint8).reshape(len(used), width)[place.reshape(-1)]
