"""When two bond numbers are one typing slip apart."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.matching.similar import similar_words
from reconciler.records import Words


@pytest.mark.parametrize(
    "one, other, similar",
    [
        ("ZZ0000000017", "ZZ0000000018", True),
        ("ZZ0000000017", "ZZ0000000071", True),
        ("ZZ0000000017", "ZZ0000000025", False),
        ("ZZ0000100017", "ZZ0000000018", False),
        ("ZZ0000000017", "ZZ000000017", False),
        ("ZZ0000000017", "ZZ0000000017", False),
        ("ABC12", "ABC13", False),
        ("BOND-7", "BOND-8", True),
        ("", "ZZ0000000017", False),
        ("", "", False),
        ("ZÉ0000000017", "ZÉ0000000018", True),
    ],
)
def test_one_slip(one: str, other: str, similar: bool) -> None:
    words = Words.of([one, other])
    at = np.array([0]), np.array([1])
    assert similar_words(words, words, at).tolist() == [similar]
    assert similar_words(words, words, (at[1], at[0])).tolist() == [similar]


def test_no_pairs_give_nothing() -> None:
    none = np.zeros(0, np.int64)
    assert len(similar_words(Words.blank(1), Words.blank(1), (none, none))) == 0


def test_many_pairs_at_once() -> None:
    words = Words.of(["ZZ0000000017", "ZZ0000000018", "LONGER0000000001"])
    left, right = np.array([0, 1, 2, 0]), np.array([1, 0, 0, 2])
    assert similar_words(words, words, (left, right)).tolist() == [True, True, False, False]
