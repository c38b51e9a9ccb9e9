"""Text of whole columns, held against decimal.Decimal's own writing of the same numbers."""

from __future__ import annotations

from decimal import Decimal

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler import texts

INT64 = st.integers(-(2**63) + 1, 2**63 - 1)


@given(st.lists(INT64, max_size=20), st.integers(0, 4))
def test_amounts_are_written_as_decimal_writes_them(numbers: list[int], digits: int) -> None:
    written = texts.amounts(np.array(numbers, np.int64), digits).to_pylist()
    assert written == [f"{Decimal(n).scaleb(-digits):.{digits}f}" for n in numbers]


@given(st.lists(INT64, max_size=20), st.integers(0, 3))
def test_grouped_amounts_are_written_as_decimal_writes_them(numbers: list[int], digits: int) -> None:
    written = texts.amounts(np.array(numbers, np.int64), digits, grouped=True).to_pylist()
    assert written == [f"{Decimal(n).scaleb(-digits):,.{digits}f}" for n in numbers]


@given(st.lists(st.tuples(INT64, st.integers(0, 3)), max_size=20))
def test_every_row_has_its_own_digits(rows: list[tuple[int, int]]) -> None:
    minor, digits = np.array([r[0] for r in rows], np.int64), np.array([r[1] for r in rows], np.int64)
    assert texts.amounts(minor, digits).to_pylist() == [f"{Decimal(n).scaleb(-d):.{d}f}" for n, d in rows]


@given(st.lists(INT64, max_size=20), st.sampled_from((9, 12)))
def test_decimals_are_the_shortest_text_of_the_same_number(numbers: list[int], places: int) -> None:
    for number, text in zip(numbers, texts.decimals(np.array(numbers, np.int64), places).to_pylist(), strict=True):
        assert Decimal(text).scaleb(places) == number
        assert text == "0" or not (text.endswith(".") or ("." in text and text.endswith("0")))


@pytest.mark.parametrize(
    ("value", "at_least", "text"),
    [(0, 0, "0"), (0, 2, "0.00"), (98875 * 10**9, 0, "98.875"), (98 * 10**12, 2, "98.00"), (100 * 10**12, 0, "100"), (1, 0, "0.000000000001"),
     (-5 * 10**11, 1, "-0.5")],
)  # fmt: skip
def test_decimals(value: int, at_least: int, text: str) -> None:
    assert texts.decimals(np.array([value]), 12, at_least).to_pylist() == [text]


def test_nothing_known_is_null() -> None:
    missing = np.array([texts.MISSING, 5], np.int64)
    assert texts.amounts(missing, 2).to_pylist() == [None, "0.05"]
    assert texts.amounts(missing, np.array([2, 0])).to_pylist() == [None, "5"]
    assert texts.decimals(missing, 1).to_pylist() == [None, "0.5"]
    assert texts.dates(np.array(["NaT", "2026-02-28"], "datetime64[D]")).to_pylist() == [None, "2026-02-28"]
    assert texts.long_dates(np.array(["NaT", "2026-02-08"], "datetime64[D]")).to_pylist() == [None, "8 Feb 2026"]


def test_a_plus_is_put_before_what_is_above_zero() -> None:
    assert texts.amounts(np.array([-1, 0, 123456]), 2, grouped=True, signed=True).to_pylist() == ["-0.01", "0.00", "+1,234.56"]


def test_nothing_gives_nothing() -> None:
    empty = np.zeros(0, np.int64)
    assert texts.amounts(empty, 2).to_pylist() == texts.decimals(empty, 12).to_pylist() == texts.whole(empty).to_pylist() == []
    assert texts.amounts(empty, empty).to_pylist() == []


def test_joined_row_by_row() -> None:
    joined = texts.join(["a", texts.whole(np.array([1, texts.MISSING])), "b"], 2)
    assert joined.to_pylist() == ["a1b", "ab"]

