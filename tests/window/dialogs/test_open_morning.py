"""Choosing a folder and its day."""

from __future__ import annotations

import datetime
from pathlib import Path

from PySide6.QtCore import QDate
from pytestqt.qtbot import QtBot

from reconciler.window.dialogs.open_morning import OpenMorning


def test_the_day_is_taken_from_the_folders_name(qtbot: QtBot, tmp_path: Path) -> None:
    folder = tmp_path / "2026-03-31"
    folder.mkdir()
    dialog = OpenMorning(None, None)
    qtbot.addWidget(dialog)
    dialog.path.setText(str(folder))
    assert dialog.date == datetime.date(2026, 3, 31)
    dialog.day.setDate(QDate(2026, 4, 1))
    dialog.accept()
    assert dialog.result() == OpenMorning.DialogCode.Accepted
    assert dialog.folder == folder
    assert dialog.date == datetime.date(2026, 4, 1)


def test_a_missing_folder_is_said_and_the_dialog_stays(qtbot: QtBot, tmp_path: Path) -> None:
    dialog = OpenMorning(None, None)
    qtbot.addWidget(dialog)
    dialog.accept()
    assert dialog.said.text() == "Choose a folder first."
    dialog.path.setText(str(tmp_path / "nowhere"))
    dialog.accept()
    assert "There is no folder" in dialog.said.text()
    assert dialog.result() != OpenMorning.DialogCode.Accepted


def test_an_earlier_morning_is_opened_from_the_list(qtbot: QtBot, tmp_path: Path) -> None:
    dialog = OpenMorning(None, None, [(tmp_path, datetime.date(2026, 3, 30))])
    qtbot.addWidget(dialog)
    dialog.earlier.opened.emit(0)
    assert dialog.result() == OpenMorning.DialogCode.Accepted
    assert (dialog.folder, dialog.date) == (tmp_path, datetime.date(2026, 3, 30))
