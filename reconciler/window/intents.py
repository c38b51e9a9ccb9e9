"""What each declared action does: one small function per action, in one table.

The functions take the window and either move the view or send an intent; none of them works anything out.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QWidget

from reconciler.window import loading, recent
from reconciler.window.pages.payments import PaymentsPage
from reconciler.window.theme import theme

if TYPE_CHECKING:
    from reconciler.window.main import MainWindow


def _open(window: MainWindow) -> None:
    from reconciler.window.dialogs.open_morning import OpenMorning

    before = [(path, day) for path, day in recent.mornings(recent.settings()) if path.is_dir()]
    dialog = OpenMorning(window, window.loaded.folder if window.loaded else None, before)
    if dialog.exec() and dialog.folder is not None:
        window.load(dialog.folder, dialog.date)


def _sample(window: MainWindow) -> None:
    mornings = loading.sample_mornings()
    if not mornings:
        window.banner.say("The sample mornings are not installed here; open a folder of your own files instead.", bad=True)
        return
    day = loading.date_of_folder(mornings[-1])
    assert day is not None
    window.load(mornings[-1], day)


def _reload(window: MainWindow) -> None:
    window.load_again()


def _problems(window: MainWindow) -> None:
    from reconciler.window.dialogs.problems import Problems

    Problems(window, window.problems).exec()


def _layout(window: MainWindow) -> None:
    from reconciler.window.dialogs.layout import ask_layout

    ask_layout(window)


def _letter(window: MainWindow) -> None:
    from reconciler.window.dialogs.letter import ask_letter

    ask_letter(window)


def _export(window: MainWindow) -> None:
    from reconciler.window.dialogs.export import ask_export

    ask_export(window)


def _find(window: MainWindow) -> None:
    if window.page is not None:
        window.page.find()


def _copy(window: MainWindow) -> None:
    from reconciler.window.table import SheetView

    focused = window.focusWidget()
    view = focused if isinstance(focused, SheetView) else window.page.table if window.page is not None else None
    if view is not None:
        view.copy()


def _all(window: MainWindow) -> None:
    if window.page is not None:
        window.page.show_all()


def _step(by: int) -> Callable[[MainWindow], None]:
    def go(window: MainWindow) -> None:
        if window.page is not None:
            window.page.table.step(by)

    return go


def _detail(window: MainWindow) -> None:
    page = window.page
    if page is not None and page.table.current_row() >= 0:
        page.row_opened.emit(page.table.current_row())


def _tab(key: str) -> Callable[[MainWindow], None]:
    def show(window: MainWindow) -> None:
        if isinstance(window.page, PaymentsPage):
            window.page.show_tab(key)

    return show


def _panes(window: MainWindow) -> list[QWidget]:
    checked = next((b for b in window.sidebar.buttons.values() if b.isChecked()), window.sidebar.menu_button)
    return [checked, *(window.page.panes() if window.page is not None else [])]


def _pane(by: int) -> Callable[[MainWindow], None]:
    def go(window: MainWindow) -> None:
        panes = _panes(window)
        focused = window.focusWidget()
        now = next((i for i, pane in enumerate(panes) if focused is not None and
                    (pane is focused or pane.isAncestorOf(focused))), 0 if by > 0 else len(panes))  # fmt: skip
        panes[(now + by) % len(panes)].setFocus(Qt.FocusReason.TabFocusReason)

    return go


def _back(window: MainWindow) -> None:
    if window.progress.isVisible():
        window.cancel()
    elif window.page is not None and not window.page.back():
        window.page.focus_list()


def _split(window: MainWindow) -> None:
    if isinstance(window.page, PaymentsPage):
        window.page.toggle_detail()


def _colours(choice: str) -> Callable[[MainWindow], None]:
    def choose(window: MainWindow) -> None:
        theme().choose(choice)
        recent.settings().setValue("window/colours", theme().choice)
        window.actions_by_key[theme().choice].setChecked(True)

    return choose


def _theme(window: MainWindow) -> None:
    _colours("light" if theme().palette.name == "dark" else "dark")(window)


def _keys(window: MainWindow) -> None:
    from reconciler.window.dialogs.keys import Keys

    Keys(window).exec()


def _about(window: MainWindow) -> None:
    from reconciler.window.dialogs.about import About

    About(window).exec()


DO: dict[str, Callable[[MainWindow], None]] = {
    "open": _open, "sample": _sample, "reload": _reload, "layout": _layout, "problems": _problems, "export": _export, "letter": _letter,
    "quit": lambda window: (window.close(), None)[1], "find": _find, "copy": _copy, "all": _all, "next": _step(1),
    "previous": _step(-1), "detail": _detail, "accounts": _tab("accounts"), "working": _tab("working"),
    "coupons": _tab("coupons"), "pane": _pane(1), "pane_back": _pane(-1), "back": _back, "split": _split,
    "system": _colours("system"), "light": _colours("light"), "dark": _colours("dark"), "theme": _theme, "keys": _keys,
    "about": _about,
}  # fmt: skip
