"""Actions, keys and menus are made from the declared list (actions.py), so that none can be forgotten in one of them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMenu

from reconciler.window.actions import ACTIONS, MENUS, PAGES, page_keys
from reconciler.window.widgets import tip_of

if TYPE_CHECKING:
    from reconciler.window.main import MainWindow


def make_actions(window: MainWindow) -> dict[str, QAction]:
    """The window's actions by key; those of the pages are called "page KEY"."""
    made = {}
    for declared in ACTIONS:
        action = _action(window, declared.text, declared.help, declared.keys)
        action.triggered.connect(lambda _on=False, key=declared.key: window.act(key))
        made[declared.key] = action
    for number, page in enumerate(PAGES, 1):
        action = _action(window, page.text, page.help, page_keys(number))
        action.triggered.connect(lambda _on=False, key=page.key: window.show_page(key))
        made[f"page {page.key}"] = action
    group = QActionGroup(window)
    for key in ("system", "light", "dark"):
        made[key].setCheckable(True)
        group.addAction(made[key])
    return made


def make_menu(window: MainWindow, actions: dict[str, QAction]) -> QMenu:
    """The menu of everything, opened by its button or F10."""
    whole = QMenu(window)
    for name in MENUS:
        part = whole.addMenu(name)
        part.setToolTipsVisible(True)
        if name == "Go":
            part.addActions([actions[f"page {page.key}"] for page in PAGES])
        for declared in (one for one in ACTIONS if one.menu == name):
            if declared.divided:
                part.addSeparator()
            part.addAction(actions[declared.key])
    opening = _action(window, "Menu", "Everything the window can do", ("F10",))
    opening.triggered.connect(lambda: window.sidebar.menu_button.showMenu())
    return whole


def _action(window: MainWindow, text: str, help_text: str, keys: tuple[str, ...]) -> QAction:
    action = QAction(text, window)
    action.setShortcuts([QKeySequence(key) for key in keys])
    action.setStatusTip(help_text)
    action.setToolTip(tip_of(action))
    window.addAction(action)
    return action
