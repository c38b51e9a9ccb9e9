"""The dialogs that only show: problems, keys, about."""

from __future__ import annotations

from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QPushButton
from pytestqt.qtbot import QtBot

from reconciler.problems import Problem
from reconciler.window.actions import ACTIONS
from reconciler.window.dialogs.about import About
from reconciler.window.dialogs.keys import Keys
from reconciler.window.dialogs.problems import Problems


def test_every_problem_is_listed_and_can_be_copied(qtbot: QtBot) -> None:
    dialog = Problems(None, [Problem("a.csv", 3, "face", "x", "is no face."), "Something else."])
    qtbot.addWidget(dialog)
    assert dialog.heading.text() == "2 problems"
    next(b for b in dialog.findChildren(QPushButton) if b.text() == "Copy all").click()
    lines = QGuiApplication.clipboard().text().splitlines()
    assert lines[1].split("\t") == ["a.csv", "3", "face", "x", "is no face."]
    assert lines[2].split("\t")[-1] == "Something else."


def test_no_problems(qtbot: QtBot) -> None:
    dialog = Problems(None, [])
    qtbot.addWidget(dialog)
    assert dialog.heading.text() == "0 problems"


def test_every_key_is_listed(qtbot: QtBot) -> None:
    dialog = Keys(None)
    qtbot.addWidget(dialog)
    model = dialog.list.model()
    told = {model.cell(row, 0).text: model.cell(row, 1).text for row in range(model.rowCount())}
    for one in ACTIONS:
        if one.keys:
            assert told[one.text.replace("&", "").rstrip("…")]
    assert told["Find"] == "Ctrl+F or /"


def test_the_caution_is_there(qtbot: QtBot) -> None:
    dialog = About(None)
    qtbot.addWidget(dialog)
    assert any("moves no money and gives no advice" in child.text() for child in dialog.findChildren(type(dialog.heading)))
