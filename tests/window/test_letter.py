"""The letter as a person uses it: open it on a break, change it, copy it, save it."""

from __future__ import annotations

import datetime
from pathlib import Path

from PySide6.QtGui import QGuiApplication
from pytestqt.qtbot import QtBot

from reconciler.procedures import morning
from reconciler.window.dialogs.letter import LetterDialog

SAMPLE = Path(__file__).resolve().parents[2] / "sample_tickets" / "2026-03-31"


def test_a_letter_is_changed_copied_and_saved(qtbot: QtBot, tmp_path: Path) -> None:
    day = morning.run(SAMPLE, datetime.date(2026, 3, 31))
    dialog = LetterDialog(None, day, int(day.breaks["item_row"][0]))
    qtbot.addWidget(dialog)
    dialog.show()
    assert dialog.whom.count() >= 1
    assert "References:" in dialog.body.toPlainText()
    dialog.body.appendPlainText("Many thanks.")
    qtbot.mouseClick(dialog.copy_button, qtbot_left())
    assert QGuiApplication.clipboard().text().endswith("Many thanks.")
    dialog.save_to(tmp_path / "letter.txt")
    assert dialog.saved == tmp_path / "letter.txt"
    assert "Many thanks." in (tmp_path / "letter.txt").read_text(encoding="utf-8")
    dialog.save_to(tmp_path / "nowhere" / "letter.txt")
    assert "cannot be written" in dialog.said.text()


def qtbot_left() -> object:
    from PySide6.QtCore import Qt

    return Qt.MouseButton.LeftButton
