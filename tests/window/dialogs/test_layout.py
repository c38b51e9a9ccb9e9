"""Assigning a file's columns as a person would: look, choose, see what values become, save, and the morning is read again."""

from __future__ import annotations

import datetime
import shutil
from collections.abc import Iterator

import pytest
from PySide6.QtWidgets import QComboBox
from pytestqt.qtbot import QtBot

from reconciler.window import jobs
from reconciler.window.dialogs.layout import AssignColumns
from reconciler.window.loading import Loaded, load, sample_mornings
from reconciler.window.main import MainWindow
from reconciler.window.theme import theme

FILE = "orrin_teale_20260331.csv"
HEADS = {"Broker Ref": "R1", "Client Ref": "R2", "ISIN": "R3", "B/S": "R4", "Trade Date": "R5", "Settlement Date": "R6",
         "Face Amount": "R7", "Price": "R8", "Days Accrued": "R9", "Accrued Interest": "R10", "Commission": "R11",
         "Net Amount": "R12", "Ccy": "R13", "Account": "R14", "Yield": "R15", "Status": "R16"}  # fmt: skip
FACTS = {"R1": "broker_reference", "R2": "desk_reference", "R3": "bond", "R4": "side", "R5": "trade_date", "R6": "settlement_date",
         "R7": "face", "R8": "price", "R9": "accrued_days", "R10": "accrued", "R11": "fees", "R12": "settlement_amount",
         "R13": "currency", "R14": "account", "R15": "yield", "R16": "status"}  # fmt: skip


@pytest.fixture(scope="module")
def loaded(tmp_path_factory: pytest.TempPathFactory) -> Loaded:
    """A morning in which one broker's headings are not known."""
    folder = tmp_path_factory.mktemp("house") / "2026-03-31"
    shutil.copytree(sample_mornings()[1], folder)
    path = folder / "confirmations" / FILE
    head, *rows = path.read_text(encoding="utf-8").splitlines()
    told = ",".join(HEADS[name] for name in head.split(","))
    path.write_text("\n".join([told, *(row.replace(",Buy,", ",HERE,") for row in rows)]) + "\n", encoding="utf-8")
    return load(folder, datetime.date(2026, 3, 31), lambda *_told: None)


@pytest.fixture()
def window(qtbot: QtBot, loaded: Loaded) -> Iterator[MainWindow]:
    """A window that shows that morning."""
    theme().start("light")
    made = MainWindow()
    qtbot.addWidget(made)
    made.show()
    made.show_loaded(loaded)
    yield made
    jobs.stop_all()


def _dialog(qtbot: QtBot, window: MainWindow) -> AssignColumns:
    brokers = window.loaded.day.source.tickets["broker"].values.to_pylist()
    dialog = AssignColumns(window, window.folder_wanted(), window.problems, brokers)
    qtbot.addWidget(dialog)
    dialog.show()
    return dialog


def test_the_file_that_is_not_read_stands_first_with_its_question(qtbot: QtBot, window: MainWindow) -> None:
    assert window.banner.assign.isVisible()
    dialog = _dialog(qtbot, window)
    assert dialog.files.currentData() == FILE
    assert dialog.broker.text() == "Orrin & Teale"
    assert list(dialog.facts) == list(FACTS)
    assert dialog.question.accessibleName()
    assert "Still to be found: bond, side, face, settlement amount" in dialog.said.text()


def test_values_are_shown_as_they_will_be_read(qtbot: QtBot, window: MainWindow) -> None:
    dialog = _dialog(qtbot, window)
    dialog.assign("R7", "face")
    dialog.assign("R6", "settlement_date")
    assert dialog.becomes["R7"].accessibleName().startswith("150,000,000.00")
    assert dialog.becomes["R6"].accessibleName().startswith("16 Mar 2026")
    dialog.choices["face_scale"].setCurrentIndex(1)
    assert dialog.becomes["R7"].accessibleName().startswith("150,000,000,000.00")
    dialog.assign("R1", "price")
    assert "is not a price" in dialog.becomes["R1"].accessibleName()


def test_saving_reads_the_morning_again_with_the_layout(
    qtbot: QtBot, window: MainWindow, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = len(window.loaded.day.source.confirmations)

    def work_through(dialog: AssignColumns) -> int:
        for heading, fact in FACTS.items():
            dialog.assign(heading, fact)
        assert list(dialog.words) == ["HERE"]
        dialog.accept()
        assert "HERE" in dialog.said.text()  # still asked
        dialog.words["HERE"].setCurrentIndex(1)
        assert not dialog.said.text()
        dialog.accept()
        return dialog.result()

    monkeypatch.setattr(AssignColumns, "exec", work_through)
    window.act("layout")
    assert jobs.wait_idle(60_000)
    assert len(window.loaded.day.source.confirmations) > before
    assert not window.banner.assign.isVisible()
    read = next(one for one in window.loaded.day.source.files if one.name.endswith(FILE))
    assert read.layout == "layouts/orrin_teale.toml"


def test_another_file_is_looked_at_by_choosing_it(qtbot: QtBot, window: MainWindow) -> None:
    dialog = _dialog(qtbot, window)
    place = dialog.files.findData("tamarisk_vane_20260331.csv")
    dialog.files.setCurrentIndex(place)
    assert dialog.facts["Endbetrag"].currentData() == "settlement_amount"
    assert dialog.choices["decimal"].currentData() == ","
    assert dialog.broker.text() == "Tamarisk & Vane"


def test_every_control_has_a_name(qtbot: QtBot, window: MainWindow) -> None:
    dialog = _dialog(qtbot, window)
    assert all(box.accessibleName() for box in dialog.findChildren(QComboBox))


def test_without_a_morning_the_window_says_what_to_do_first(qtbot: QtBot) -> None:
    made = MainWindow()
    qtbot.addWidget(made)
    made.show()
    made.act("layout")
    assert "Open a morning first" in made.banner.text.text()
