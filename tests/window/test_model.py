"""The model says the same to Qt, to delegates and to assistive technology, and formats each page once."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QModelIndex, Qt
from PySide6.QtTest import QAbstractItemModelTester

from reconciler.window.loading import Loaded
from reconciler.window.model import SheetModel
from reconciler.window.sheet import Cell, Column, Sheet


def test_the_model_keeps_to_the_rules_of_qt(loaded: Loaded) -> None:
    model = SheetModel(loaded.sheets["breaks"])
    QAbstractItemModelTester(model, QAbstractItemModelTester.FailureReportingMode.Fatal)
    model.search("usd")
    model.sort_by("stake", True)
    model.choose("party", ("Bank",))
    model.clear()


def test_what_is_said_of_a_cell(loaded: Loaded) -> None:
    model = SheetModel(loaded.sheets["breaks"])
    bank = next(i for i, column in enumerate(model.sheet.columns) if column.key == "bank")
    index = model.index(0, bank)
    assert index.data() == "−5,069,010.42"
    assert index.data(Qt.ItemDataRole.ToolTipRole) == "−5,069,010.42, −1,082.34"
    assert index.data(Qt.ItemDataRole.AccessibleTextRole) == "Bank: −5,069,010.42, −1,082.34"
    assert Qt.AlignmentFlag(index.data(Qt.ItemDataRole.TextAlignmentRole)) & Qt.AlignmentFlag.AlignRight
    assert index.data(Qt.ItemDataRole.DecorationRole) is None
    assert model.headerData(bank, Qt.Orientation.Horizontal) == "Bank"
    assert "cash account" in model.headerData(bank, Qt.Orientation.Horizontal, Qt.ItemDataRole.ToolTipRole)
    assert model.headerData(0, Qt.Orientation.Vertical) is None
    assert model.rowCount(index) == 0
    assert model.rowCount(QModelIndex()) == 13


def test_a_page_is_formatted_once() -> None:
    asked: list[int] = []

    def show(_data: object, at: np.ndarray) -> list[Cell]:
        asked.append(len(at))
        return [Cell(str(row)) for row in at.tolist()]

    model = SheetModel(Sheet(None, 200, [Column("n", "N", "Number", show, lambda _: np.arange(200))]))
    assert [model.cell(row, 0).text for row in range(64)] == [str(row) for row in range(64)]
    assert asked == [64]
    assert model.cell(199, 0).text == "199"
    assert asked == [64, 8]
    model.sort_by("n", True)
    assert model.cell(0, 0).text == "199"
    assert model.row_at(0) == 199
    assert model.row_at(-1) == model.row_at(200) == -1
