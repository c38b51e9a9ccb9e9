"""Workbooks read back by another program's reader (openpyxl)."""

from __future__ import annotations

import datetime
from pathlib import Path

import numpy as np
import openpyxl
import pytest

from reconciler.exports import xlsx
from reconciler.exports.columns import Column
from reconciler.problems import KnownError
from reconciler.records import MISSING, Words

COLUMNS = [
    Column("name", "text", Words.of(["=1+1", "", "http://x.example", "Northquay"])),
    Column("day", "date", np.array(["2026-03-31", "NaT", "1850-01-01", "2026-04-01"], "datetime64[D]")),
    Column("money", "amount", np.array([-123450, MISSING, 12345, 10**16 + 1]), np.array([2, 2, 0, 2])),
    Column("price", "decimal", np.array([98_875 * 10**9, MISSING, 10**14, -5 * 10**11])),
    Column("rows", "count", np.array([7, MISSING, 0, -3])),
]  # fmt: skip


def test_cells_are_typed(tmp_path: Path) -> None:
    path = tmp_path / "list.xlsx"
    xlsx.write(path, COLUMNS, "Breaks")
    sheet = openpyxl.load_workbook(path).active
    assert [cell.value for cell in sheet[1]] == ["name", "day", "money", "price", "rows"]
    assert [cell.value for cell in sheet[2]] == ["=1+1", datetime.datetime(2026, 3, 31), -1234.5, 98.875, 7]
    assert sheet["A2"].data_type == "s"
    assert sheet["A4"].hyperlink is None
    assert [cell.value for cell in sheet[3]] == [None] * 5
    assert [cell.value for cell in sheet[4]] == ["http://x.example", "1850-01-01", 12345, 100, 0]
    assert sheet["C5"].value == "100000000000000.01"
    assert sheet["D5"].value == -0.5
    assert sheet["C2"].number_format == "#,##0.00"
    assert sheet["C4"].number_format == "#,##0"
    assert sheet["B2"].number_format == "yyyy-mm-dd"
    assert sheet.freeze_panes == "A2"
    assert sheet.auto_filter.ref == "A1:E5"
    assert sheet.column_dimensions["A"].width >= len("http://x.example")


def test_long_lists_go_on_in_further_sheets(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(xlsx, "ROWS_PER_SHEET", 5)
    monkeypatch.setattr(xlsx, "_CHUNK", 2)
    told = []
    path = tmp_path / "list.xlsx"
    xlsx.write(path, [Column("n", "count", np.arange(12))], progress=told.append)
    book = openpyxl.load_workbook(path)
    values = [cell.value for sheet in book for row in sheet.iter_rows(min_row=2) for cell in row]
    assert values == list(range(12))
    assert len(book.worksheets) == 3
    assert told == [0, 2, 4, 5, 7, 9, 10]


def test_the_same_list_gives_the_same_bytes(tmp_path: Path) -> None:
    for name in ("one.xlsx", "two.xlsx"):
        xlsx.write(tmp_path / name, COLUMNS)
    assert (tmp_path / "one.xlsx").read_bytes() == (tmp_path / "two.xlsx").read_bytes()


def test_an_empty_list_is_a_head(tmp_path: Path) -> None:
    xlsx.write(tmp_path / "list.xlsx", [Column("n", "count", np.zeros(0, np.int64))])
    assert [cell.value for cell in openpyxl.load_workbook(tmp_path / "list.xlsx").active[1]] == ["n"]


def test_cancelled_leaves_nothing(tmp_path: Path) -> None:
    def stop(_done: int) -> None:
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        xlsx.write(tmp_path / "list.xlsx", COLUMNS, progress=stop)
    assert not list(tmp_path.iterdir())


def test_a_place_that_cannot_be_written_is_a_clear_sentence(tmp_path: Path) -> None:
    with pytest.raises(KnownError, match="cannot be written"):
        xlsx.write(tmp_path / "none" / "list.xlsx", COLUMNS)
