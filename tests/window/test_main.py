"""The window as a person uses it: look, search, filter, sort, open, copy, move by keyboard, change colours."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import QSettings, Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QAbstractButton, QAbstractSpinBox, QComboBox, QLineEdit, QWidget
from pytestqt.qtbot import QtBot

from reconciler.problems import KnownError, Problem
from reconciler.window import jobs
from reconciler.window.loading import Loaded, arrange
from reconciler.window.main import MainWindow
from reconciler.window.pages.payments import PaymentsPage
from reconciler.window.recent import settings
from reconciler.window.table import SheetView, page_of, select_places
from reconciler.window.theme import theme
from tests.window import fabricated


@pytest.fixture()
def page(window: MainWindow) -> PaymentsPage:
    """The page of breaks."""
    made = window.pages["breaks"]
    assert isinstance(made, PaymentsPage)
    return made


def _titles(view: SheetView) -> list[str]:
    model = view.model()
    return [model.cell(row, 0).text for row in range(model.rowCount())]


def _type(qtbot: QtBot, window: MainWindow, text: str) -> None:
    qtbot.keyClick(window, Qt.Key.Key_F, Qt.KeyboardModifier.ControlModifier)
    box = window.page.header.search
    box.setFocus()
    qtbot.keyClicks(box, text)
    qtbot.waitUntil(lambda: window.page.sheet.typed == text)


def test_the_morning_is_shown(window: MainWindow, page: PaymentsPage) -> None:
    assert window.page is page
    assert page.header.title.text() == "15 breaks"
    assert "on 13 payments of 53" in page.header.subtitle.accessibleName()
    assert window.sidebar.date.text() == "31 March 2026"
    assert window.sidebar.weekday.text() == "Tuesday"
    assert window.sidebar.buttons["agreed"].count == "32"
    assert page.table.model().rowCount() == 13


def test_searching_narrows_while_typing_and_escape_brings_all_back(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    _type(qtbot, window, "tamarisk")
    assert page.table.model().rowCount() == 2
    qtbot.keyClicks(page.header.search, " bill")
    qtbot.waitUntil(lambda: page.table.model().rowCount() == 1)
    assert _titles(page.table) == ["Buy 1,000,000 Tennick Bill Jun 2026"]
    assert page.filters._count.text() == "1 of 13 payments"
    qtbot.keyClick(page.header.search, Qt.Key.Key_Escape)
    qtbot.waitUntil(lambda: page.table.model().rowCount() == 13)


@pytest.mark.parametrize(
    ("typed", "count"),
    [("T-20931", 1), ("5,069,010.42", 1), ("northquay custody", 4), ("tax withheld", 1), ("no cash", 2), ("ZZ0001000053", 1),
     ("2026-03-27", 3), ("zzz", 0)],
)  # fmt: skip
def test_search_knows_tickets_amounts_accounts_causes_kinds_bonds_and_days(
    qtbot: QtBot, window: MainWindow, page: PaymentsPage, typed: str, count: int
) -> None:
    _type(qtbot, window, typed)
    assert page.table.model().rowCount() == count


def test_nothing_found_is_said(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    _type(qtbot, window, "zzz")
    assert page.empty.isVisible()
    assert page.empty.title.text() == "Nothing found"


def test_filters(window: MainWindow, page: PaymentsPage) -> None:
    page.choose("party", ("Broker",))
    assert page.table.model().rowCount() == 4
    page.choose("kind", ("no confirmation",))
    assert _titles(page.table) == ["Buy 750,000 Ferrant Zero 2056"]
    page.show_all()
    page.choose("currency", ("JPY",))
    assert page.table.model().rowCount() == 1
    page.show_all()
    assert page.table.model().rowCount() == 13


def test_a_filter_menu_lists_words_with_counts_and_ticks(qtbot: QtBot, page: PaymentsPage) -> None:
    menu = page.filters._buttons["party"].menu()
    menu.aboutToShow.emit()
    told = [action.text() for action in menu.actions() if action.isCheckable()]
    assert told[0] == "Bank\t6"
    menu.actions()[0].trigger()
    assert page.sheet.chosen == {"party": ("Bank",)}
    assert page.filters._buttons["party"].text() == "Party: Bank  ▾"


def test_a_net_difference_narrows_to_its_currency(qtbot: QtBot, page: PaymentsPage) -> None:
    card = next(card for card in page.header._cards if card.currency == "GBP")
    assert card.figure == "−3,375.00"
    qtbot.mouseClick(card, Qt.MouseButton.LeftButton)
    assert page.table.model().rowCount() == 2
    qtbot.mouseClick(card, Qt.MouseButton.LeftButton)
    assert page.table.model().rowCount() == 13


def test_every_column_sorts_both_ways_and_gives_the_list_back(qtbot: QtBot, page: PaymentsPage) -> None:
    own = _titles(page.table)
    head = page.table.horizontalHeader()
    for number in range(page.table.model().columnCount()):
        orders = []
        for _click in range(3):
            at = head.sectionViewportPosition(number) + head.sectionSize(number) // 2
            qtbot.mouseClick(head.viewport(), Qt.MouseButton.LeftButton, pos=head.viewport().rect().center().__class__(at, 10))
            orders.append(_titles(page.table))
            assert sorted(orders[-1]) == sorted(own)
        assert orders[0] == orders[1][::-1]
        assert orders[2] == own


def test_sorting_by_stake_is_the_order_of_the_ranking(page: PaymentsPage) -> None:
    own = _titles(page.table)
    page.table.sort_by("stake", False)
    assert _titles(page.table) == own[::-1]
    page.table.sort_by("stake", True)
    assert _titles(page.table) == own


def test_the_current_row_stays_when_the_list_is_sorted_or_narrowed(page: PaymentsPage) -> None:
    page.table.go_to(3)
    row = page.table.current_row()
    page.table.sort_by("stake", True)
    assert page.table.current_row() == row
    page.search("ferrant")
    assert page.table.current_row() == row


def test_opening_a_break_shows_the_four_accounts(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    page.focus_list()
    qtbot.keyClick(page.table, Qt.Key.Key_Home)
    qtbot.keyClick(page.table, Qt.Key.Key_Return)
    assert page.detail.title.text() == "Buy 5,000,000 Marlow Gas 4.625 2031"
    facts = page.detail.facts.model()
    lines = {facts.cell(row, 0).text: [facts.cell(row, c).text for c in range(1, 5)] for row in range(facts.rowCount())}
    assert lines["Settlement amount"] == ["5,067,928.08", "5,067,928.08", "5,067,928.08", "5,069,010.42"]
    assert lines["Settlement date"] == ["30 Mar"] * 4
    marked = [(r, c) for r in range(facts.rowCount()) for c in range(5) if facts.cell(r, c).tone == "differ"]
    assert len(marked) == 1
    assert lines["Account"][3] == "Northquay main"


def test_keys_move_between_rows_pages_and_panes(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    page.focus_list()
    qtbot.keyClick(page.table, Qt.Key.Key_N)
    assert page.table.currentIndex().row() == 1
    qtbot.keyClick(page.table, Qt.Key.Key_Down)
    assert page.table.currentIndex().row() == 2
    qtbot.keyClick(page.table, Qt.Key.Key_P)
    assert page.table.currentIndex().row() == 1
    for number, key in enumerate(("breaks", "due", "agreed", "ahead", "bonds", "files"), 1):
        qtbot.keyClick(window, getattr(Qt.Key, f"Key_{number}"), Qt.KeyboardModifier.ControlModifier)
        assert window.page.key == key
    qtbot.keyClick(window.page.table, Qt.Key.Key_1)
    assert window.page is page
    seen = []
    for _press in range(5):
        qtbot.keyClick(window, Qt.Key.Key_F6)
        seen.append(window.focusWidget())
    assert page.header.search in seen
    assert page.table in seen
    assert page.detail.facts in seen
    assert window.sidebar.buttons["breaks"] in seen


def test_letters_go_to_the_search_box_while_it_has_the_keyboard(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    page.find()
    before = page.table.currentIndex().row()
    qtbot.keyClicks(page.header.search, "n1")
    assert page.header.search.text() == "n1"
    assert window.page is page
    assert page.table.currentIndex().row() in (before, -1, 0)


def test_escape_goes_back_from_the_detail(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    page.open_detail()
    assert window.focusWidget() is page.detail.facts
    qtbot.keyClick(page.detail.facts, Qt.Key.Key_Escape)
    assert window.focusWidget() is page.table


def test_copied_rows_are_a_table_with_heads(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    page.focus_list()
    select_places(page.table, 0, 1)
    qtbot.keyClick(page.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    lines = QGuiApplication.clipboard().text().splitlines()
    assert len(lines) == 3
    heads = lines[0].split("\t")
    first = dict(zip(heads, lines[1].split("\t"), strict=True))
    assert first["ticket"] == "T-20931"
    assert first["terms amount"] == "-5067928.08"
    assert first["bank date"] == "2026-03-30"
    assert first["party"] == "Bank"
    assert first["money at stake"] == "1082.34"


def test_light_and_dark(qtbot: QtBot, window: MainWindow) -> None:
    before = window.grab().toImage().pixelColor(5, 400)
    qtbot.keyClick(window, Qt.Key.Key_L, Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier)
    assert theme().palette.name == "dark"
    assert window.grab().toImage().pixelColor(5, 400).lightness() < before.lightness()
    window.act("light")
    assert theme().palette.name == "light"
    assert settings().value("window/colours") == "light"
    window.act("system")
    assert theme().choice == "system"


def test_geometry_is_remembered(qtbot: QtBot, window: MainWindow, loaded: Loaded, tmp_path: Path) -> None:
    window.resize(970, 640)
    window.close()
    assert Path(settings().fileName()).is_relative_to(tmp_path)
    assert isinstance(settings(), QSettings)
    again = MainWindow()
    qtbot.addWidget(again)
    assert again.height() == 640  # the offscreen screen is too narrow for the width


def test_a_failed_load_says_why_and_leaves_all_as_it_was(window: MainWindow, page: PaymentsPage) -> None:
    rows = page.table.model().rowCount()
    problem = Problem("tickets.csv", 0, "", "", "is missing; put the desk's tickets into the folder.")
    window.say_failed("The morning in 2026-04-01 could not be loaded.", KnownError(problem, "And more."))
    assert window.banner.isVisible()
    assert "tickets.csv: is missing" in window.banner.text.text()
    assert "1 other problem" in window.banner.text.text()
    assert page.table.model().rowCount() == rows


@pytest.mark.parametrize("fault", [MemoryError(), PermissionError(13, "Permission denied", "x/out.csv"), ZeroDivisionError("x")])
def test_no_fault_is_shown_as_a_traceback(window: MainWindow, fault: Exception) -> None:
    window.say_failed("It did not work.", fault)
    assert window.banner.isVisible()
    assert "Traceback" not in window.banner.text.text()
    assert window.banner.text.text().startswith("It did not work. ")


def test_a_cancelled_job_leaves_all_as_it_was(qtbot: QtBot, window: MainWindow, page: PaymentsPage) -> None:
    import threading

    release = threading.Event()
    job = jobs.Job(lambda progress: release.wait(5))
    job.succeeded.connect(lambda _: page.show_all())
    window.run(job, "Reading")
    qtbot.waitUntil(window.progress.isVisible)
    qtbot.mouseClick(window.progress.cancel, Qt.MouseButton.LeftButton)
    assert not window.progress.isVisible()
    assert window.job is None
    assert page.table.model().rowCount() == 13
    release.set()
    assert jobs.wait_idle()


def test_a_morning_without_breaks_says_so(qtbot: QtBot, window: MainWindow) -> None:
    window.show_loaded(arrange(None, fabricated.day(broken=False), fabricated.ahead()))
    page = window.pages["breaks"]
    assert page.header.title.text() == "No breaks"
    assert page.empty.title.text() == "Nothing differs"


def test_problems_of_the_files_stand_in_the_banner(window: MainWindow) -> None:
    problems = (Problem("a.csv", 3, "price", "x", "is not a price."), Problem("b.csv", 0, "", "", "is empty."))
    window.show_loaded(arrange(None, fabricated.day(problems=problems), fabricated.ahead()))
    assert "a.csv, line 3, column price: 'x' is not a price." in window.banner.text.text()
    assert window.banner.more.isVisibleTo(window.banner)


def test_every_control_has_a_name_and_can_be_reached(window: MainWindow) -> None:
    for kind in (QAbstractButton, QLineEdit, QComboBox, QAbstractSpinBox, SheetView):
        for widget in window.findChildren(kind):
            inside_other = isinstance(widget.parent(), QLineEdit | QAbstractSpinBox | QComboBox | SheetView)
            if inside_other or widget.objectName().startswith("qt_"):
                continue
            assert widget.accessibleName() or getattr(widget, "text", str)(), widget
            if isinstance(widget, QWidget) and not isinstance(widget, QAbstractButton):
                assert widget.focusPolicy() & Qt.FocusPolicy.TabFocus, widget


def test_a_page_of_rows_is_in_view(page: PaymentsPage) -> None:
    first, last = page_of(page.table)
    assert first == 0
    assert last >= 4
