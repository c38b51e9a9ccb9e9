"""Several entries may pay one payment, one entry several: which of them add up?

For up to twelve amounts all sums are made at once (2^12 of them, many groups side by side) and held against the target. Equal amounts
are interchangeable, so only the first few of them are tried; beyond that, two different ways to the same sum mean that nobody can
tell, and nothing is picked. A sum that fits is no proof on its own: among round amounts one in twelve unique sums is wrong
(measured), so callers bring a second reason: a reference, or the bond and the day.
"""

from __future__ import annotations

from typing import Any

import numpy as np

Array = np.ndarray[Any, Any]

MOST = 12
NONE, AMBIGUOUS = 0, -1
_BATCH = 1 << 22


def solve(amounts: Array, targets: Array, least: int = 2, per_part: int = 1) -> Array:
    """For every row of `amounts` (int64, n columns, n up to MOST) the one set of at least `least` columns that sums to its target.

    Give or take `per_part` per amount in the set. The set as bits (bit j is column j); NONE where there is none, AMBIGUOUS where
    there are several. Of equal amounts the leftmost are taken.
    """
    rows, n = amounts.shape
    if n > MOST:
        raise ValueError(f"{n} amounts are too many: at most {MOST}")
    out = np.full(rows, NONE, np.int64)
    if n < least or not rows:
        return out
    sets = np.arange(1 << n)
    size = np.array([int(s).bit_count() for s in sets.tolist()])
    step = max(_BATCH >> n, 1)
    for first in range(0, rows, step):
        part = slice(first, min(first + step, rows))
        out[part] = _solve(amounts[part], targets[part], sets, size, least, per_part)
    return out


def _solve(amounts: Array, targets: Array, sets: Array, size: Array, least: int, per_part: int) -> Array:
    rows, n = amounts.shape
    # Sorting puts equal amounts side by side: of those only the first ones may be in a set.
    order = np.argsort(amounts, axis=1, kind="stable")
    ordered = np.take_along_axis(amounts, order, axis=1)
    sums = np.zeros((rows, 1), np.int64)
    for j in range(n):
        sums = np.concatenate((sums, sums + ordered[:, j : j + 1]), axis=1)
    good = (np.abs(sums - targets[:, None]) <= per_part * size) & (size >= least)
    for j in range(1, n):
        twin = ordered[:, j] == ordered[:, j - 1]
        if twin.any():
            skipped = ((sets >> j) & 1 == 1) & ((sets >> (j - 1)) & 1 == 0)
            good &= ~(twin[:, None] & skipped)
    count = good.sum(axis=1)
    found = good.argmax(axis=1)
    bits = np.zeros(rows, np.int64)
    for j in range(n):
        bits |= ((found >> j) & 1) << order[:, j]
    return np.where(count == 1, bits, np.where(count > 1, AMBIGUOUS, NONE))


def members(bits: int) -> list[int]:
    """The columns that are in a set."""
    return [j for j in range(MOST) if bits >> j & 1]
