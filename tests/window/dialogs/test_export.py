"""What a list shows is saved as shown: the rows narrowed to, in the order sorted by, with typed cells."""

from __future__ import annotations

import csv
import datetime
import threading
from pathlib import Path

import openpyxl
import pytest
from PySide6.QtWidgets import QFileDialog
from pytestqt.qtbot import QtBot

from reconciler.window import jobs
from reconciler.window.dialogs import export
from reconciler.window.main import MainWindow


def _saved(window: MainWindow, path: Path) -> None:
    assert export.export_to(window, path) is not None
    assert jobs.wait_idle()


def test_csv_holds_what_is_shown_in_its_order(window: MainWindow, tmp_path: Path) -> None:
    window.page.choose("party", ("Bank",))
    window.page.table.sort_by("overdue", True)
    _saved(window, tmp_path / "breaks.csv")
    with (tmp_path / "breaks.csv").open(encoding="utf-8-sig", newline="") as lines:
        rows = list(csv.DictReader(lines))
    assert len(rows) == 6
    assert [row["overdue days"] for row in rows] == ["7", "2", "1", "1", "1", ""]
    assert (rows[0]["currency"], rows[0]["money at stake"]) == ("JPY", "221796")
    first = next(row for row in rows if row["ticket"] == "T-20931")
    assert (first["terms amount"], first["bank amount"], first["bank date"]) == ("-5067928.08", "-5069010.42", "2026-03-30")
    assert window.banner.text.text() == "6 payments saved as breaks.csv."


def test_xlsx_has_typed_cells_and_a_frozen_head(window: MainWindow, tmp_path: Path) -> None:
    _saved(window, tmp_path / "breaks.xlsx")
    sheet = openpyxl.load_workbook(tmp_path / "breaks.xlsx").active
    heads = [cell.value for cell in sheet[1]]
    row = dict(zip(heads, [cell.value for cell in sheet[2]], strict=True))
    assert sheet.max_row == 14
    assert row["terms amount"] == pytest.approx(-5067928.08)
    assert row["bank date"] == datetime.datetime(2026, 3, 30)
    assert row["price"] == "98.875"
    assert sheet.freeze_panes == "A2"


def test_every_list_can_be_exported(window: MainWindow, tmp_path: Path) -> None:
    for key, page in window.pages.items():
        window.show_page(key)
        _saved(window, tmp_path / f"{key}.csv")
        with (tmp_path / f"{key}.csv").open(encoding="utf-8-sig", newline="") as lines:
            assert len(list(csv.DictReader(lines))) == page.sheet.length


def test_the_key_asks_where_to_save(qtbot: QtBot, window: MainWindow, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    asked = tmp_path / "list"
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: (str(asked), export._KINDS[".csv"]))
    window.act("export")
    assert jobs.wait_idle()
    assert (tmp_path / "list.csv").is_file()


def test_a_place_that_cannot_be_written_is_said(window: MainWindow, tmp_path: Path) -> None:
    _saved(window, tmp_path / "nowhere" / "breaks.csv")
    assert "breaks.csv could not be saved." in window.banner.text.text()
    assert "Traceback" not in window.banner.text.text()


def test_a_cancelled_export_leaves_no_file(qtbot: QtBot, window: MainWindow, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    began, go_on = threading.Event(), threading.Event()
    whole = export.save

    def slow(*told: object) -> None:
        began.set()
        go_on.wait(5)
        whole(*told)  # type: ignore[arg-type]

    monkeypatch.setattr(export, "save", slow)
    job = export.export_to(window, tmp_path / "breaks.xlsx")
    assert job is not None
    assert began.wait(5)
    window.cancel()
    go_on.set()
    assert jobs.wait_idle()
    assert list(tmp_path.glob("*breaks*")) == []
