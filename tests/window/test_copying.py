"""Copied rows: plain figures, ISO dates, no tab or line break inside a cell, no columns that are blank throughout."""

from __future__ import annotations

import numpy as np

from reconciler.records import MISSING, Words
from reconciler.window.copying import as_text
from reconciler.window.sheet import Fact, Sheet


def test_as_text() -> None:
    facts = [
        Fact("name", "text", lambda _d, at: Words.of(["a\tb", "c\nd"]).take(at)),
        Fact("amount", "amount", lambda _d, at: np.array([-123456, MISSING])[at], lambda _d, at: np.array([2, 0])[at]),
        Fact("day", "date", lambda _d, at: np.array(["2026-03-30", "NaT"], "datetime64[D]")[at]),
        Fact("count", "count", lambda _d, at: np.array([7, MISSING])[at]),
        Fact("price", "decimal", lambda _d, at: np.array([98_875_000_000_000, MISSING])[at]),
        Fact("blank", "text", lambda _d, at: Words.blank(2).take(at)),
    ]
    sheet = Sheet(None, 2, [], facts)
    assert as_text(sheet, np.array([0, 1])).splitlines() == [
        "name\tamount\tday\tcount\tprice", "a b\t-1234.56\t2026-03-30\t7\t98.875", "c d\t\t\t\t",
    ]  # fmt: skip
