"""Figures and dates in everybody's style: read exactly, or refused; never half understood."""

from __future__ import annotations

from collections import Counter

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.intake import cells
from reconciler.money import MISSING


def _amount(text: str, mark: str = ".", digits: int = 2) -> int:
    return int(cells.amounts(pa.array([text]), np.array([digits]), mark).values[0])


@pytest.mark.parametrize(
    ("text", "mark", "minor"),
    [
        ("1,234,567.89", ".", 123456789), ("1.234.567,89", ",", 123456789), ("1'234'567.89", ".", 123456789),
        ("1 234 567,89", ",", 123456789), ("1\u00a0234\u00a0567,89", ",", 123456789), ("1\u202f234,5", ",", 123450),
        ("1\u2019234.5", ".", 123450), ("(1,234.50)", ".", -123450), ("1234-", ".", -123400), ("1,234.50-", ".", -123450),
        ("\u22121234.5", ".", -123450), ("+12", ".", 1200), ("-0.5", ".", -50), ("１２３.４", ".", 12340), ("12,34,567.89", ".", 123456789),
        ("1234567890123.45", ".", 123456789012345), ("100.10000000", ".", 10010),
    ],
)  # fmt: skip
def test_styles_of_amounts(text: str, mark: str, minor: int) -> None:
    assert _amount(text, mark) == minor


@pytest.mark.parametrize(
    ("text", "mark"),
    [("12 34", "."), ("1 2", "."), ("1_000", "."), ("0.123", ","), ("1,23,4", "."), ("1.234,56", "."), ("12,5", "."), ("1O2.50", "."),
     ("1.005", "."), ("--1", "."), ("1-2", "."), ("", ".")],
)  # fmt: skip
def test_what_is_no_amount_is_refused(text: str, mark: str) -> None:
    assert _amount(text, mark) == MISSING


@given(st.integers(-(10**13), 10**13), st.sampled_from([0, 2, 3]))
def test_plain_and_grouped_figures_come_back(minor: int, digits: int) -> None:
    """However it is grouped, the figure is the same to the last unit."""
    size, sign = abs(minor), "-" if minor < 0 else ""
    whole, part = divmod(size, 10**digits)
    tail = f"{part:0{digits}d}" if digits else ""
    for group, mark in ((",", "."), (".", ","), ("'", "."), (" ", ","), ("", ".")):
        figures = f"{whole:,}".replace(",", group) + (mark + tail if tail else "")
        assert _amount(sign + figures, mark, digits) == minor


@pytest.mark.parametrize(
    ("texts", "counts", "left_open"),
    [
        (["1,234.50", "2.5"], {".": 2}, False), (["1.234,50"], {",": 1}, False), (["1.234"], {}, True), (["12", "7"], {}, False),
        (["1.234", "1.234,5", "3,4"], {",": 2}, False), (["1,234.5", "1.234,5"], {".": 1, ",": 1}, False), (["1'234.50"], {".": 1}, False),
    ],
)  # fmt: skip
def test_what_proves_a_decimal_mark(texts: list[str], counts: dict[str, int], left_open: bool) -> None:
    found, undecided = cells.mark_evidence(pa.array(texts))
    assert dict(found) == counts and undecided is left_open


def test_one_figure_in_another_style_does_not_turn_the_file() -> None:
    assert cells.settled(Counter({".": 19, ",": 1})) == "."
    assert cells.settled(Counter({".": 2, ",": 1})) == ""
    assert cells.settled(Counter()) == ""


@pytest.mark.parametrize(
    ("text", "price"),
    [("99-16", 99.5), ("99-16+", 99.515625), ("99-162", 99.5078125), ("99-166", 99.5234375), ("99 16/32", 99.5), ("99-16/32", 99.5),
     ("99'16", 99.5), ("99 1/2", 99.5), ("99½", 99.5), ("99.16", 99.16), ("99.5%", 99.5), ("100-127", 100.40234375), ("99-032", 99.1015625)],
)  # fmt: skip
def test_prices(text: str, price: float) -> None:
    """Check pairs: formats met in practice; 99-162 and the like from CME's page on quoting, 99-032 and 100-127 as published."""
    assert int(cells.prices(pa.array([text])).values[0]) == round(price * 10**12)


@pytest.mark.parametrize("text", ["99-32", "99-1", "99-168", "abc", "99/2", "1/2"])
def test_what_is_no_price(text: str) -> None:
    assert bool(cells.prices(pa.array([text])).bad[0])


@pytest.mark.parametrize(
    ("text", "order", "day"),
    [("2026-12-01", "", "2026-12-01"), ("20261201", "", "2026-12-01"), ("01.12.2026", "", "2026-12-01"), ("1-Dec-26", "", "2026-12-01"),
     ("01DEC2026", "", "2026-12-01"), ("01/12/2026", "dmy", "2026-12-01"), ("01/12/2026", "mdy", "2026-01-12"), ("31/02/2026", "dmy", "NaT"),
     ("01/12/2026", "", "NaT"), ("soon", "", "NaT"), ("2026/12/01", "", "2026-12-01")],
)  # fmt: skip
def test_dates(text: str, order: str, day: str) -> None:
    assert str(cells.date_of(text, order)) == day


def test_a_date_that_is_none_proves_no_order() -> None:
    assert cells.slashed(["31/31/2026", "13/02/2026", "02/03/2026"]) == Counter({"dmy": 1})
