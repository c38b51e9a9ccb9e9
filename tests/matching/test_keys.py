"""Keys, runs and choices over whole columns, against the plain way of doing the same with dictionaries and loops."""

from __future__ import annotations

from collections import Counter
from typing import Any

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from reconciler.matching import keys
from reconciler.records import MISSING, Table, Words

NUMBERS = st.lists(st.integers(0, 5), max_size=12)


def column(numbers: list[int]) -> np.ndarray[Any, Any]:
    return np.array(numbers, np.int64)


def own_order(rows: np.ndarray[Any, Any]) -> np.ndarray[Any, Any]:
    return rows


@given(NUMBERS, st.data())
def test_keys_are_equal_where_all_facts_are(one: list[int], data: st.DataObject) -> None:
    other = data.draw(st.lists(st.integers(-2, 2), min_size=len(one), max_size=len(one)))
    mixed = keys.mixed([column(one), column(other)]).tolist()
    assert len(set(zip(one, other, strict=True))) == len(set(mixed))
    assert [mixed.index(key) for key in mixed] == [list(zip(one, other, strict=True)).index(pair) for pair in zip(one, other, strict=True)]


def test_a_million_neighbouring_numbers_do_not_collide() -> None:
    grid = np.arange(1_000_000)
    assert len(np.unique(keys.mixed([grid // 1000, grid % 1000]))) == 1_000_000


def test_columns_as_whole_numbers() -> None:
    words = Words.of(["a", "", "b"])
    assert keys.whole(words).tolist() == [words.codes[0], MISSING, words.codes[2]]
    assert keys.whole(np.array(["1970-01-02", "NaT"], "datetime64[D]")).tolist() == [1, MISSING]
    assert keys.whole(np.array([1, -1], np.int8)).tolist() == [1, -1]


@given(NUMBERS, NUMBERS)
def test_what_occurs_and_what_is_distinct(asked: list[int], among: list[int]) -> None:
    assert keys.occurs(column(asked), column(among)).tolist() == [number in among for number in asked]
    assert keys.distinct(column(asked)).tolist() == sorted(set(asked))


@given(NUMBERS, NUMBERS)
def test_only_pairs_are_those_that_nobody_else_could_be(left: list[int], right: list[int]) -> None:
    a, b = keys.only_pairs(column(left).view(np.uint64), column(right).view(np.uint64))
    expected = {(left.index(k), right.index(k)) for k in set(left) & set(right) if left.count(k) == right.count(k) == 1}
    assert set(zip(a.tolist(), b.tolist(), strict=True)) == expected


@given(NUMBERS, NUMBERS, st.booleans())
def test_ranked_pairs_match_row_by_row_within_a_key(left: list[int], right: list[int], even: bool) -> None:
    a, b = keys.ranked_pairs(column(left).view(np.uint64), column(right).view(np.uint64), own_order, own_order, even)
    expected = set()
    for key in set(left) & set(right):
        mine, theirs = ([n for n, k in enumerate(side) if k == key] for side in (left, right))
        if len(mine) == len(theirs) or not even:
            expected |= set(zip(mine, theirs, strict=False))
    assert set(zip(a.tolist(), b.tolist(), strict=True)) == expected
    assert len(a) == len(expected)


@given(NUMBERS, NUMBERS, st.integers(1, 9))
def test_candidates_are_all_pairs_of_runs_that_are_not_crowded(left: list[int], right: list[int], most: int) -> None:
    a, b = keys.candidates(column(left).view(np.uint64), column(right).view(np.uint64), most)
    counts = Counter(left), Counter(right)
    expected = [
        (m, n) for m, k in enumerate(left) for n, j in enumerate(right)
        if k == j and (counts[0][k] * counts[1][k] <= most or counts[0][k] == counts[1][k] == 1)
    ]  # fmt: skip
    assert sorted(zip(a.tolist(), b.tolist(), strict=True)) == expected


COSTED = st.dictionaries(st.tuples(st.integers(0, 4), st.integers(0, 4)), st.integers(0, 4), max_size=14)


@given(COSTED)
def test_greedy_takes_the_cheapest_first_as_a_clerk_would(costed: dict[tuple[int, int], int]) -> None:
    pairs = column([a for a, _ in costed]), column([b for _, b in costed])
    cost = np.array(list(costed.values()), float)
    chosen = keys.greedy(pairs, cost, own_order, own_order)
    used_left, used_right, expected = set(), set(), set()
    for (a, b), _ in sorted(costed.items(), key=lambda one: (one[1], one[0])):
        if a not in used_left and b not in used_right:
            used_left.add(a)
            used_right.add(b)
            expected.add((a, b))
    assert {(int(pairs[0][n]), int(pairs[1][n])) for n in chosen} == expected


@given(COSTED, st.integers(0, 2))
def test_clear_pairs_beat_every_other_by_the_margin(costed: dict[tuple[int, int], int], margin: int) -> None:
    pairs = column([a for a, _ in costed]), column([b for _, b in costed])
    chosen = keys.clear(pairs, np.array(list(costed.values()), float), float(margin))
    expected = {
        (a, b) for (a, b), cost in costed.items()
        if all(other - cost > margin for (c, d), other in costed.items() if (c == a) != (d == b))
    }  # fmt: skip
    assert {(int(pairs[0][n]), int(pairs[1][n])) for n in chosen} == expected


@given(st.lists(st.tuples(st.sampled_from(["b", "a", "", "C"]), st.integers(0, 2)), max_size=10))
def test_content_ranks_rows_by_what_they_say(told: list[tuple[str, int]]) -> None:
    made = Table({"name": Words.of([name for name, _ in told]), "number": column([n for _, n in told]), "line": np.arange(len(told))})
    rank = keys.content_order(made)(np.arange(len(told))).tolist()
    by_number = keys.content_order(made, ("number",))(np.arange(len(told))).tolist()
    for a, (name, number) in enumerate(told):
        for b, (other, amount) in enumerate(told):
            assert (rank[a] < rank[b]) == ((name, number) < (other, amount))
            assert (by_number[a] < by_number[b]) == ((number, name) < (amount, other))
