"""Every key on one page, made from the same list as menus and tool tips."""

from __future__ import annotations

from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QWidget

from reconciler.window.actions import ACTIONS, PAGES, page_keys
from reconciler.window.dialogs.dialog import Dialog
from reconciler.window.sheet import Cell
from reconciler.window.static import static_sheet
from reconciler.window.table import SheetView
from reconciler.window.widgets import card

_ALSO = (
    ("Move between rows", "Up, Down, Page Up, Page Down, Home, End"),
    ("Open the row's detail", "Enter"),
    ("Select several rows", "Shift+Up, Shift+Down, Ctrl+A"),
    ("Open the menu", "F10"),
)


class Keys(Dialog):
    """The list of keys."""

    def __init__(self, parent: QWidget | None) -> None:
        super().__init__(parent, "Keys", "Single letters and numbers work wherever no text is being typed.", leave="Close")
        self.resize(900, 600)
        rows = [(Cell(page.text, strong=True), Cell(_told(page_keys(i)), strong=True), Cell(page.help, tone="soft"))
                for i, page in enumerate(PAGES, 1)]  # fmt: skip
        rows += [(Cell(text, strong=True), Cell(keys, strong=True), Cell("")) for text, keys in _ALSO]
        rows += [(Cell(one.text.replace("&", "").rstrip("…"), strong=True), Cell(_told(one.keys), strong=True),
                  Cell(one.help, tone="soft")) for one in ACTIONS if one.keys]  # fmt: skip
        self.list = SheetView("Keys", two_lines=False)
        self.list.sortable = False
        self.list.set_sheet(static_sheet([("What", 200, False, 0), ("Key", 300, False, 0), ("", 300, False, 1)], rows))
        self.inside.addWidget(card(self.list, margin=1), 1)


def _told(keys: tuple[str, ...]) -> str:
    return " or ".join(QKeySequence(key).toString(QKeySequence.SequenceFormat.NativeText) for key in keys)
