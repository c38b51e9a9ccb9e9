"""The search box finds what a person remembers: parts of texts, beginnings of amounts, days."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.records import MISSING, Words
from reconciler.window import figures
from reconciler.window.search import Index, day_typed


def _index() -> Index:
    return Index(
        4,
        {"ticket": Words.of(["T-1", "T-20931", "", "x"]), "bond": Words.of(["Marlow Gas", "marlow gas", "Osk", None])},
        {"amount": (np.array([-506792808, 108234, MISSING, 1204]), np.array([2, 2, 2, 0]))},
        {"day": np.array(["2026-03-30", "2026-03-31", "NaT", "2026-03-31"], "datetime64[D]")},
    )


@pytest.mark.parametrize(
    ("typed", "rows"),
    [
        ("marlow", [0, 1]),
        ("MARLOW gas", [0, 1]),
        ("gas 20931", [1]),
        ("5067", [0]),
        ("5,067,928.08", [0]),
        ("-5,067,928", [0]),
        ("1082.3", [1]),
        ("1082.34", [1]),
        ("1082.35", []),
        ("1204", [3]),
        ("12", [3]),
        ("2026-03-31", [1, 3]),
        ("31 mar 2026", [1, 3]),
        ("nothing", []),
        ("osk", [2]),
    ],
)
def test_find(typed: str, rows: list[int]) -> None:
    mask = _index().find(typed)
    assert mask is not None
    assert np.flatnonzero(mask).tolist() == rows


def test_nothing_typed_finds_everything() -> None:
    assert _index().find("   ") is None


@given(st.lists(st.tuples(st.integers(-(10**13), 10**13), st.sampled_from([0, 2, 3])), min_size=1, max_size=30), st.data())
def test_an_amount_is_found_by_any_beginning_of_its_text(amounts: list[tuple[int, int]], data: st.DataObject) -> None:
    minor = np.array([a for a, _ in amounts], np.int64)
    digits = np.array([d for _, d in amounts], np.int64)
    index = Index(len(amounts), {}, {"amount": (minor, digits)}, {})
    row = data.draw(st.integers(0, len(amounts) - 1))
    text = figures.plain_amount(abs(int(minor[row])), int(digits[row]))
    typed = text[: data.draw(st.integers(1, len(text)))]
    mask = index.find(typed)
    assert mask is not None
    told = [figures.plain_amount(abs(int(m)), int(d)) for m, d in zip(minor, digits, strict=True)]
    assert mask[row]
    # nothing else is found than amounts that begin so, decimals of a shorter minor unit counted as zeros
    for other in np.flatnonzero(mask).tolist():
        whole, _, part = told[other].partition(".")
        assert f"{whole}.{part:0<3}".startswith(typed) or (whole == "0" and typed == "0") or typed.rstrip(".") == whole


def test_words_that_are_no_days() -> None:
    assert day_typed("2026-02-30") is None
    assert day_typed("31 foo 2026") is None
    assert day_typed("2026-03-31") == np.datetime64("2026-03-31")
