"""The window on the real sample: loaded from its folder, opened, looked into, reloaded, refused."""

from __future__ import annotations

import datetime
import shutil
import threading
from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPointF, Qt, QUrl
from PySide6.QtGui import QDropEvent
from pytestqt.qtbot import QtBot

from reconciler.window import jobs, recent
from reconciler.window.loading import Loaded, date_of_folder, load, sample_mornings
from reconciler.window.main import MainWindow
from reconciler.window.theme import theme

MORNING = sample_mornings()[1]


@pytest.fixture()
def window(qtbot: QtBot) -> Iterator[MainWindow]:
    """A window with nothing loaded yet."""
    theme().start("light")
    made = MainWindow()
    qtbot.addWidget(made)
    made.resize(1440, 900)
    made.show()
    yield made
    jobs.stop_all()


@pytest.fixture(scope="module")
def sample() -> Loaded:
    """The sample morning, read once for the tests that only look at it."""
    day = date_of_folder(MORNING)
    assert day is not None
    return load(MORNING, day, lambda *_told: None)


def _load(window: MainWindow, folder: Path) -> None:
    day = date_of_folder(folder)
    assert day is not None
    window.load(folder, day)
    assert jobs.wait_idle(60_000)


def test_the_start_shows_the_sample_and_remembers_it(qtbot: QtBot, window: MainWindow) -> None:
    window.open_at_start()
    assert window.welcome.isVisible()
    assert jobs.wait_idle(60_000)
    assert window.page is window.pages["breaks"]
    assert window.loaded is not None
    assert recent.mornings(recent.settings())[0] == (sample_mornings()[-1], date_of_folder(sample_mornings()[-1]))


def test_the_counts_are_those_of_the_morning(window: MainWindow, sample: Loaded) -> None:
    window.show_loaded(sample)
    day = window.loaded.day
    assert window.sidebar.buttons["breaks"].count == f"{len(day.breaks):,}"
    shown = sum(window.pages[key].sheet.length for key in ("breaks", "due", "agreed"))
    assert shown == len(day.items)
    assert window.pages["files"].header.subtitle.accessibleName().endswith("every row accounted for")


def test_every_payment_can_be_looked_into(window: MainWindow, sample: Loaded) -> None:
    window.show_loaded(sample)
    for key in ("breaks", "due"):
        window.show_page(key)
        page = window.page
        for tab in ("accounts", "working", "coupons"):
            page.show_tab(tab)
            for place in range(page.table.model().rowCount()):
                page.table.go_to(place)
                assert page.detail.title.text()
                if tab == "accounts":
                    assert page.detail.facts.model().rowCount() > 0
                if tab == "working":
                    assert page.detail.working.model().rowCount() > 0


def test_the_working_adds_up_and_marks_who_differs(window: MainWindow, sample: Loaded) -> None:
    window.show_loaded(sample)
    page = window.pages["breaks"]
    page.show_tab("working")
    seen = 0
    for place in range(page.table.model().rowCount()):
        page.table.go_to(place)
        model = page.detail.working.model()
        lines = {model.cell(row, 0).text: model.cell(row, 2).text for row in range(model.rowCount())}
        if {"Principal", "Accrued interest", "Settlement amount"} <= set(lines) and lines["Settlement amount"]:
            principal, accrued, fees, amount = (
                round(float(lines.get(name, "0").replace(",", "").replace("−", "-") or 0) * 100)
                for name in ("Principal", "Accrued interest", "Fees", "Settlement amount")
            )
            assert abs(abs(amount) - principal - accrued) == abs(fees), page.detail.title.text()
            seen += 1
    assert seen > 5


def test_bonds_show_their_coupons(window: MainWindow, sample: Loaded) -> None:
    window.show_loaded(sample)
    window.show_page("bonds")
    page = window.page
    coupons = 0
    for place in range(page.table.model().rowCount()):
        page.table.go_to(place)
        coupons += page.coupons.model().rowCount()
    assert coupons > 100


def test_reading_again_and_another_morning(window: MainWindow) -> None:
    _load(window, MORNING)
    breaks = len(window.loaded.day.breaks)
    window.act("reload")
    assert jobs.wait_idle(60_000)
    assert len(window.loaded.day.breaks) == breaks
    _load(window, sample_mornings()[2])
    assert window.sidebar.date.text() == "1 April 2026"


def test_a_folder_dropped_on_the_window_is_loaded(window: MainWindow) -> None:
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(MORNING / "tickets.csv"))])
    window.dropEvent(QDropEvent(QPointF(5, 5), Qt.DropAction.CopyAction, data, Qt.MouseButton.LeftButton,
                                Qt.KeyboardModifier.NoModifier))  # fmt: skip
    assert jobs.wait_idle(60_000)
    assert window.loaded is not None
    assert window.loaded.day.date == datetime.date(2026, 3, 31)


def test_a_folder_without_tickets_is_refused_in_plain_words(window: MainWindow, tmp_path: Path) -> None:
    folder = tmp_path / "2026-03-31"
    shutil.copytree(MORNING, folder)
    _load(window, folder)
    before = window.loaded
    (folder / "tickets.csv").unlink()
    window.act("reload")
    assert jobs.wait_idle(60_000)
    assert "tickets.csv" in window.banner.text.text()
    assert window.banner.isVisible()
    assert window.loaded is before
    assert window.page is window.pages["breaks"]


def test_an_unreadable_confirmations_file_is_said_and_the_rest_goes_on(window: MainWindow, tmp_path: Path) -> None:
    folder = tmp_path / "2026-03-31"
    shutil.copytree(MORNING, folder)
    (folder / "confirmations" / "orrin_teale_20260331.csv").write_text("a;b;c\n1;2;3\n", encoding="utf-8")
    _load(window, folder)
    assert "orrin_teale_20260331.csv" in window.banner.text.text()
    assert window.banner.assign.isVisible()
    assert window.loaded.day.breaks["break"].to_list().count("no confirmation") > 10


def test_breaks_are_shown_before_their_causes_and_the_view_stays(
    qtbot: QtBot, window: MainWindow, monkeypatch: pytest.MonkeyPatch
) -> None:
    from reconciler.procedures import morning

    hold, steps = threading.Event(), list(morning.STEPS)
    search = steps[-1]

    def held(state: object) -> object:
        hold.wait(20)
        return search(state)  # type: ignore[arg-type]

    held.__doc__ = search.__doc__
    monkeypatch.setattr(morning, "name_causes", held)
    monkeypatch.setattr(morning, "STEPS", (*steps[:-1], held))
    window.load(MORNING, datetime.date(2026, 3, 31))
    qtbot.waitUntil(lambda: window.loaded is not None, timeout=20_000)
    page = window.page
    assert window.loaded.searching
    assert "searching for causes" in window.sidebar.foot.text()
    assert any(page.table.model().cell(row, 5).small == "searching for the cause …" for row in range(10))
    page.choose("party", ("Broker",))
    page.table.sort_by("payment", False)
    page.table.go_to(3)
    title, shown = page.detail.title.text(), page.table.model().rowCount()
    hold.set()
    assert jobs.wait_idle(60_000)
    assert not window.loaded.searching
    assert (page.detail.title.text(), page.table.model().rowCount()) == (title, shown)
    assert page.table.currentIndex().row() == 3
    assert page.sheet.sorted_by == "payment"
    assert "searching" not in window.sidebar.foot.text()
    assert any("proved" in page.table.model().cell(row, 5).small for row in range(shown))


def test_a_search_for_causes_can_be_given_up(qtbot: QtBot, window: MainWindow, monkeypatch: pytest.MonkeyPatch) -> None:
    from reconciler.procedures import morning

    hold, steps = threading.Event(), list(morning.STEPS)

    def held(state: object) -> object:
        hold.wait(20)
        return state

    held.__doc__ = "Searching for causes"
    monkeypatch.setattr(morning, "name_causes", held)
    monkeypatch.setattr(morning, "STEPS", (*steps[:-1], held))
    window.load(MORNING, datetime.date(2026, 3, 31))
    qtbot.waitUntil(lambda: window.loaded is not None, timeout=20_000)
    window.cancel()
    assert "causes not searched for" in window.sidebar.foot.text()
    assert window.page.table.model().cell(0, 5).small.startswith("open")
    hold.set()
    assert jobs.wait_idle(60_000)
    assert window.loaded.searching
