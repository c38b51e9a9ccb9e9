"""Everything declared is complete, distinct and does something."""

from __future__ import annotations

from PySide6.QtGui import QKeySequence

from reconciler.window import intents
from reconciler.window.actions import ACTIONS, MENUS, PAGES, page_keys
from reconciler.window.main import MainWindow


def test_every_action_is_complete() -> None:
    assert len({one.key for one in ACTIONS}) == len(ACTIONS)
    for one in ACTIONS:
        assert one.menu in MENUS
        assert one.text.strip("&…")
        assert len(one.help) > 10
        assert one.key in intents.DO
    assert set(intents.DO) == {one.key for one in ACTIONS}


def test_every_page_is_complete() -> None:
    assert len({page.key for page in PAGES}) == len(PAGES)
    assert all(page.text and len(page.help) > 10 for page in PAGES)


def test_no_key_means_two_things() -> None:
    keys = [QKeySequence(key).toString() for one in ACTIONS for key in one.keys]
    keys += [QKeySequence(key).toString() for i in range(1, len(PAGES) + 1) for key in page_keys(i)]
    assert all(keys)
    assert len(set(keys)) == len(keys)


def test_keys_are_told_in_tips_and_every_action_is_in_the_menu(window: MainWindow) -> None:
    in_menu = set()
    for part in window.sidebar.menu_button.menu().actions():
        in_menu |= {action.text() for action in part.menu().actions() if action.text()}
    for one in ACTIONS:
        action = window.actions_by_key[one.key]
        assert one.text in in_menu
        if one.keys:
            assert action.shortcut().toString(QKeySequence.SequenceFormat.NativeText) in action.toolTip()
