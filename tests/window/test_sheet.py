"""Sorting, narrowing and counting of lists, without Qt."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from reconciler.records import MISSING, Words
from reconciler.window.search import Index
from reconciler.window.sheet import Cell, Column, Facet, Sheet, facet_of, stable_order, texts


def _sheet(numbers: list[int], words: list[str]) -> Sheet:
    keys = np.array(numbers, np.int64)
    column = Column("n", "N", "A number", lambda d, at: [Cell(str(d[i])) for i in at.tolist()], lambda d: d)
    coded = Words.of(words)
    return Sheet(keys, len(keys), [column], (), Index(len(keys), {"word": coded}), [facet_of("word", "Word", coded)])


@given(st.lists(st.one_of(st.integers(-(2**60), 2**60), st.integers(0, 3), st.just(MISSING)), max_size=60))
def test_order_is_that_of_a_stable_sort(numbers: list[int]) -> None:
    rows = stable_order(np.array(numbers, np.int64))
    assert rows.tolist() == sorted(range(len(numbers)), key=lambda i: (numbers[i], i))


def test_sorting_and_narrowing_go_together() -> None:
    sheet = _sheet([3, 1, 2, 1], ["a", "b", "a", "a"])
    sheet.sort("n")
    assert sheet.shown.tolist() == [1, 3, 2, 0]
    sheet.choose("word", ("a",))
    assert sheet.shown.tolist() == [3, 2, 0]
    sheet.sort("n", descending=True)
    assert sheet.shown.tolist() == [0, 2, 3]
    sheet.search("b")
    assert sheet.shown.tolist() == []
    sheet.clear()
    sheet.sort("")
    assert sheet.shown.tolist() == [0, 1, 2, 3]
    assert not sheet.narrowed()


def test_place_of_a_row() -> None:
    sheet = _sheet([3, 1, 2], ["a", "b", "a"])
    sheet.sort("n")
    assert [sheet.place_of(row) for row in range(3)] == [2, 0, 1]
    sheet.choose("word", ("a",))
    assert sheet.place_of(1) == -1


def test_counts_of_a_filter_leave_its_own_choice_out() -> None:
    sheet = _sheet([1, 2, 3], ["a", "b", "a"])
    sheet.choose("word", ("a",))
    assert sheet.mask_without("word") is None
    assert sheet.facets["word"].counts().tolist() == [2, 1]


def test_rows_may_carry_several_words() -> None:
    facet = Facet("party", "Party", ("Terms", "Broker"), bits=np.array([0b01, 0b11, 0b10, 0], np.int8))
    assert facet.counts().tolist() == [2, 2]
    assert facet.mask(["Broker"]).tolist() == [False, True, True, False]
    assert facet.mask(["Terms", "Broker"]).tolist() == [True, True, True, False]


def test_words_are_listed_in_order_and_blank_is_none_of_them() -> None:
    facet = facet_of("word", "Word", Words.of(["b", "", "a", "b"]))
    assert facet.words == ("a", "b")
    assert facet.counts().tolist() == [1, 2]
    assert facet.mask(["b"]).tolist() == [True, False, False, True]


def test_texts_of_a_few_rows() -> None:
    assert texts(Words.of(["b", None, "a"])) == ["b", "", "a"]
    assert texts(Words.blank(2)) == ["", ""]


def test_empty_list() -> None:
    sheet = _sheet([], [])
    sheet.sort("n", descending=True)
    sheet.search("x")
    assert sheet.shown.tolist() == []
