"""Pairing a million rows with a million others means comparing keys, not rows: equal facts become equal 64-bit numbers, sorted once.

Facts are int64 columns; a key mixes several of them into one number. Rows of both sides with one key form a run. A run of one and
one is a pair; in a longer run the rows are interchangeable as far as the key goes, and are paired in the order of their whole content,
so that the order of rows and files never matters. A mix may collide (about once in ten million mornings); callers that
must be certain compare the facts of the pairs again with `same`.

Nothing here builds all pairs of a crowded run: candidates are capped and the cap is an honest "cannot tell".
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.records import MISSING, Table, Words

Array = np.ndarray[Any, Any]
Pairs = tuple[Array, Array]
Order = Callable[[Array], Array]
"""Row numbers in, a rank for each out: rows of lower rank stand first, equal content may share a rank."""

_NONE = np.zeros(0, np.int64)
NO_PAIRS: Pairs = (_NONE, _NONE)
# Odd constants of the splitmix64 generator (Steele, Lea, Flood 2014): each step is a one-to-one scrambling of 64 bits.
_STEP, _SCRAMBLE = np.uint64(0x9E3779B97F4A7C15), np.uint64(0xBF58476D1CE4E5B9)


def whole(column: Any) -> Array:
    """A column as int64: codes of words (blank is MISSING), days of dates (NaT is MISSING), numbers as they are."""
    if isinstance(column, Words):
        return np.where(column.codes < 0, MISSING, column.codes.astype(np.int64))
    if column.dtype.kind == "M":
        return np.asarray(column.astype("datetime64[D]").view(np.int64))
    return np.asarray(column, np.int64)


def mixed(columns: Iterable[Array]) -> Array:
    """One uint64 key per row out of int64 columns."""
    key: Any = None
    for column in columns:
        part = np.ascontiguousarray(column, np.int64).view(np.uint64)
        key = part * _STEP if key is None else (key ^ part) * _STEP
        key ^= key >> np.uint64(31)
        key *= _SCRAMBLE
        key ^= key >> np.uint64(29)
    return np.zeros(0, np.uint64) if key is None else key


def same(left: Sequence[Array], right: Sequence[Array], pairs: Pairs) -> Pairs:
    """Those pairs whose facts are equal in every column."""
    keep = np.ones(len(pairs[0]), np.bool_)
    for a, b in zip(left, right, strict=True):
        keep &= a[pairs[0]] == b[pairs[1]]
    return pairs if keep.all() else (pairs[0][keep], pairs[1][keep])


def occurs(asked: Array, among: Array) -> Array:
    """True for the numbers of `asked` that are among the others; the shorter side is sorted, the longer one looked up in it."""
    if not len(asked) or not len(among):
        return np.zeros(len(asked), np.bool_)
    if len(among) <= len(asked) // 8:
        ordered = np.sort(among)
        place = np.minimum(np.searchsorted(ordered, asked), len(ordered) - 1)
        return np.asarray(ordered[place] == asked)
    order = np.argsort(asked)
    ordered = asked[order]
    # looking up sorted numbers one after the other keeps to one place in memory
    among = among if len(asked) <= len(among) // 8 else np.sort(among)
    first = np.searchsorted(ordered, among)
    hit = ordered[np.minimum(first, len(ordered) - 1)] == among
    found = np.zeros(len(asked), np.bool_)
    found[first[hit]] = True
    # the first of several equal numbers was marked: the others follow it
    start = np.concatenate(([True], ordered[1:] != ordered[:-1]))
    out = np.empty(len(asked), np.bool_)
    out[order] = found[np.flatnonzero(start)[np.cumsum(start) - 1]]
    return out


def distinct(numbers: Array) -> Array:
    """The different numbers in order."""
    ordered = np.sort(numbers)
    return ordered[np.concatenate(([True], ordered[1:] != ordered[:-1]))] if len(ordered) else ordered


class Runs:
    """The rows of two sides in order of their keys; `starts` and `lengths` of the runs of equal keys, `left` how many of the left side."""

    def __init__(self, left: Array, right: Array) -> None:
        self.split = len(left)
        keys = np.concatenate((left, right))
        self.order = np.argsort(keys)
        ordered = keys[self.order]
        self.starts = np.flatnonzero(np.concatenate(([True], ordered[1:] != ordered[:-1]))) if len(keys) else _NONE
        self.lengths = np.diff(np.append(self.starts, len(keys)))

    def single(self) -> Pairs:
        """Pairs of runs that hold one row of each side."""
        two = self.starts[self.lengths == 2]
        x, y = self.order[two], self.order[two + 1]
        low, high = np.minimum(x, y), np.maximum(x, y)
        good = (low < self.split) & (high >= self.split)
        return low[good], high[good] - self.split

    def crowded(self) -> tuple[Array, Array, Array, Array]:
        """Runs of more than two rows with both sides: run and row of the left rows, run and row of the right rows."""
        many = np.flatnonzero(self.lengths > 2)
        if not len(many):
            return _NONE, _NONE, _NONE, _NONE
        lengths = self.lengths[many]
        run = np.repeat(np.arange(len(many)), lengths)
        within = np.arange(len(run)) - np.repeat(np.cumsum(lengths) - lengths, lengths)
        row = self.order[np.repeat(self.starts[many], lengths) + within]
        right = row >= self.split
        count = np.bincount(run[right], minlength=len(many))
        both = ((count > 0) & (count < lengths))[run]
        mine, theirs = both & ~right, both & right
        return run[mine], row[mine], run[theirs], row[theirs] - self.split


def only_pairs(left: Array, right: Array) -> Pairs:
    """Pairs of rows whose key nobody else on either side has."""
    return Runs(left, right).single()


def ranked_pairs(left: Array, right: Array, left_order: Order, right_order: Order, even: bool = False) -> Pairs:
    """Pairs of rows with equal keys; in longer runs by rank on each side (with `even`, only where both sides have as many)."""
    runs = Runs(left, right)
    single = runs.single()
    run_l, row_l, run_r, row_r = runs.crowded()
    if not len(row_l):
        return single
    if even:
        size = max(int(run_l.max()), int(run_r.max())) + 1
        level = np.bincount(run_l, minlength=size) == np.bincount(run_r, minlength=size)
        keep_l, keep_r = level[run_l], level[run_r]
        run_l, row_l, run_r, row_r = run_l[keep_l], row_l[keep_l], run_r[keep_r], row_r[keep_r]
    slot_l, row_l = _slots(run_l, row_l, left_order)
    slot_r, row_r = _slots(run_r, row_r, right_order)
    _, at_l, at_r = np.intersect1d(slot_l, slot_r, assume_unique=True, return_indices=True)
    return np.concatenate((single[0], row_l[at_l])), np.concatenate((single[1], row_r[at_r]))


def _slots(run: Array, row: Array, order: Order) -> Pairs:
    """Each row's place: its run above bit 32, its rank within the run below; and the rows in that order."""
    place = np.lexsort((order(row), run)) if len(row) else _NONE
    run, row = run[place], row[place]
    first = np.searchsorted(run, run, side="left") if len(run) else _NONE
    return (run << 32) + (np.arange(len(run)) - first), row


def candidates(left: Array, right: Array, most: int = 64) -> Pairs:
    """Every pair of rows with equal keys, of runs with at most `most` pairs; bigger runs give none."""
    runs = Runs(left, right)
    single = runs.single()
    run_l, row_l, run_r, row_r = runs.crowded()
    if not len(row_l):
        return single
    size = max(int(run_l.max()), int(run_r.max())) + 1
    count_l, count_r = np.bincount(run_l, minlength=size), np.bincount(run_r, minlength=size)
    small = count_l * count_r <= most
    keep_l, keep_r = small[run_l], small[run_r]
    run_l, row_l, run_r, row_r = run_l[keep_l], row_l[keep_l], run_r[keep_r], row_r[keep_r]
    by_run = np.argsort(run_r, kind="stable")
    run_r, row_r = run_r[by_run], row_r[by_run]
    first, last = np.searchsorted(run_r, run_l, side="left"), np.searchsorted(run_r, run_l, side="right")
    a, b = spread(row_l, first, last)
    return np.concatenate((single[0], a)), np.concatenate((single[1], row_r[b]))


def spread(rows: Array, first: Array, last: Array) -> Pairs:
    """Each row beside every whole number in [first, last)."""
    count = np.maximum(last - first, 0)
    total = int(count.sum())
    within = np.arange(total) - np.repeat(np.cumsum(count) - count, count)
    return np.repeat(rows, count), np.repeat(first, count) + within


def greedy(pairs: Pairs, cost: Array, left_order: Order, right_order: Order) -> Array:
    """Places of the pairs that a clerk would take one by one, cheapest first, never a row twice; ties go by content.

    Works in rounds: a pair that stands first for both its rows cannot be displaced by any other.
    """
    left, right = pairs
    if not len(left):
        return _NONE
    rank_l, rank_r = left_order(left), right_order(right)
    rest = np.lexsort((rank_r, rank_l, cost))
    taken: list[Array] = []
    while len(rest):
        first_l = np.unique(left[rest], return_index=True)[1]
        first_r = np.unique(right[rest], return_index=True)[1]
        both = np.intersect1d(first_l, first_r, assume_unique=True)
        chosen = rest[both]
        taken.append(chosen)
        rest = rest[~occurs(left[rest], left[chosen]) & ~occurs(right[rest], right[chosen])]
    return np.concatenate(taken)


def clear(pairs: Pairs, cost: Array, margin: float) -> Array:
    """Places of the pairs that are the cheapest for both their rows, each by more than `margin` against every other."""
    if not len(cost):
        return _NONE
    good = np.ones(len(cost), np.bool_)
    for side in pairs:
        order = np.lexsort((cost, side))
        ordered, price = side[order], cost[order]
        starts = np.flatnonzero(np.concatenate(([True], ordered[1:] != ordered[:-1])))
        best = np.zeros(len(side), np.bool_)
        follows = np.append(starts[1:], len(ordered))
        lonely = follows - starts == 1
        second = np.where(lonely, np.inf, price[np.minimum(starts + 1, len(price) - 1)])
        best[order[starts[second - price[starts] > margin]]] = True
        good &= best
    return np.flatnonzero(good)


def text_rank(words: Words, rows: Array) -> Array:
    """Alphabetical rank of the texts at `rows`, -1 where blank; only the texts that occur there are sorted."""
    codes = words.codes[rows]
    used, place = np.unique(codes, return_inverse=True)
    rank = np.empty(len(used), np.int64)
    known = used >= 0
    rank[~known] = -1
    if known.any():
        order = pc.sort_indices(words.values.take(pa.array(used[known]))).to_numpy()
        places = np.empty(len(order), np.int64)
        places[order] = np.arange(len(order))
        rank[known] = places
    return rank[place.reshape(-1)]


def content_order(table: Table, first: Sequence[str] = (), without: Sequence[str] = ("file", "line")) -> Order:
    """Ranks of rows by their whole content: the columns of `first` weigh most, then the others in the order of the table.

    Where a row was read from is no content.
    """
    names = [*first, *(name for name in table if name not in first and name not in without)]

    def order(rows: Array) -> Array:
        asked, place = np.unique(rows, return_inverse=True)
        if len(asked) < 2:
            return np.zeros(len(rows), np.int64)
        keys = [text_rank(c, asked) if isinstance(c := table[n], Words) else whole(c[asked]) for n in names]
        by = np.lexsort(keys[::-1])
        changed = np.zeros(len(by), np.bool_)
        for key in keys:
            changed[1:] |= key[by][1:] != key[by][:-1]
        rank = np.empty(len(by), np.int64)
        rank[by] = np.cumsum(changed)
        return rank[place.reshape(-1)]

    return order
