"""Which amounts add up to a target: against trying every subset with itertools."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.matching.combinations import AMBIGUOUS, MOST, NONE, members, solve


def _plainly(amounts: list[int], target: int, least: int, per_part: int) -> set[tuple[int, ...]]:
    """The different multisets of amounts that sum to the target."""
    return {
        tuple(sorted(amounts[n] for n in chosen))
        for size in range(least, len(amounts) + 1)
        for chosen in combinations(range(len(amounts)), size)
        if abs(sum(amounts[n] for n in chosen) - target) <= per_part * size
    }


@given(st.lists(st.integers(-6, 6), min_size=1, max_size=7), st.integers(-15, 15), st.integers(1, 3), st.integers(0, 1))
def test_the_only_sum_is_found(amounts: list[int], target: int, least: int, per_part: int) -> None:
    found = int(solve(np.array([amounts]), np.array([target]), least, per_part)[0])
    ways = _plainly(amounts, target, least, per_part)
    if len(ways) == 1:
        assert tuple(sorted(amounts[n] for n in members(found))) in ways
    else:
        assert found == (AMBIGUOUS if ways else NONE)


def test_of_equal_amounts_the_first_ones_are_taken() -> None:
    assert members(int(solve(np.array([[5, 7, 5, 5]]), np.array([10]), per_part=0)[0])) == [0, 2]


def test_many_groups_at_once_are_as_each_alone() -> None:
    chance = np.random.default_rng(3)
    amounts, targets = chance.integers(-10**12, 10**12, (300, 9)), np.zeros(300, np.int64)
    for row in range(300):
        targets[row] = amounts[row, chance.permutation(9)[: chance.integers(2, 8)]].sum()
    together = solve(amounts, targets)
    assert together.tolist() == [int(solve(amounts[n : n + 1], targets[n : n + 1])[0]) for n in range(300)]
    assert all(amounts[n, members(int(bits))].sum() == targets[n] for n, bits in enumerate(together))


def test_too_many_amounts_are_refused() -> None:
    with pytest.raises(ValueError, match="too many"):
        solve(np.zeros((1, MOST + 1), np.int64), np.zeros(1, np.int64))


def test_fewer_amounts_than_asked_for_never_add_up() -> None:
    assert solve(np.array([[5]]), np.array([5])).tolist() == [NONE]
    assert solve(np.zeros((0, 3), np.int64), np.zeros(0, np.int64)).tolist() == []
