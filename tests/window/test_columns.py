"""Every declared column: complete, shows a page, ranks every row, and is exported with the type it says."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.records import Words
from reconciler.window.loading import Loaded
from reconciler.window.sheet import Cell
from reconciler.window.tokens import TONES

SHEETS = ("breaks", "due", "agreed", "bonds", "files", "rejects", "ahead")


@pytest.mark.parametrize("name", SHEETS)
def test_columns(loaded: Loaded, name: str) -> None:
    sheet = loaded.sheets[name]
    assert sheet.length > 0
    rows = np.arange(sheet.length)
    assert len({column.key for column in sheet.columns}) == len(sheet.columns)
    for column in sheet.columns:
        assert column.title and len(column.help) > 5, column.key
        cells = column.show(sheet.data, rows)
        assert len(cells) == sheet.length
        assert all(isinstance(cell, Cell) and cell.tone in TONES for cell in cells)
        rank = column.rank(sheet.data)
        assert len(rank) == sheet.length
        assert rank.dtype.kind == "i"
        assert column.show(sheet.data, rows[:0]) == []


@pytest.mark.parametrize("name", SHEETS)
def test_facts(loaded: Loaded, name: str) -> None:
    sheet = loaded.sheets[name]
    rows = np.arange(sheet.length)
    assert len({fact.title for fact in sheet.facts}) == len(sheet.facts)
    for fact in sheet.facts:
        values = fact.take(sheet.data, rows)
        assert len(values) == sheet.length
        if fact.kind == "text":
            assert isinstance(values, Words)
        elif fact.kind == "date":
            assert values.dtype.kind == "M"
        else:
            assert values.dtype.kind == "i"
        if fact.kind == "amount":
            assert fact.digits is not None
            assert len(fact.digits(sheet.data, rows)) == sheet.length


@pytest.mark.parametrize("name", SHEETS)
def test_every_marked_cell_tells_its_state_by_glyph_and_word(loaded: Loaded, name: str) -> None:
    sheet = loaded.sheets[name]
    for column in sheet.columns:
        for cell in column.show(sheet.data, np.arange(sheet.length)):
            if cell.glyph and TONES[cell.tone][1]:
                assert cell.text or cell.small
