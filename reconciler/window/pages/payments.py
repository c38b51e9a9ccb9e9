"""Breaks, due today and agreed: the same list of payments, the same detail below it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QSplitter, QWidget

from reconciler.window import figures
from reconciler.window.detail.pane import DetailPane
from reconciler.window.pages.page import Page

_HINT = "Find ticket, bond, amount, broker …"


class PaymentsPage(Page):
    """A list of payments and the detail of the current one."""

    def __init__(self, key: str, title: str, actions: Mapping[str, QAction]) -> None:
        super().__init__(key, title, "payment", _HINT, actions)
        self.detail = DetailPane()
        self.splitter = QSplitter(Qt.Orientation.Vertical)
        self.splitter.setChildrenCollapsible(False)
        self.splitter.setHandleWidth(14)
        self.splitter.addWidget(self.list_card)
        self.splitter.addWidget(self.detail)
        self.splitter.setStretchFactor(0, 3)
        self.splitter.setStretchFactor(1, 3)
        self.splitter.setSizes([372, 412])
        self.column.addWidget(self.splitter, 1)
        self._loaded: Any = None
        self._item = -1
        self.table.current_changed.connect(self._show_detail)
        self.row_opened.connect(lambda _row: self.open_detail())

    def show_day(self, loaded: Any, keep: bool = False) -> None:
        self._loaded = loaded
        sheet = loaded.sheets[self.key]
        counts, breaks = loaded.overview.counts, loaded.overview.breaks
        agree = counts["agrees"] + counts["within tolerance"]
        every = sum(counts.values())
        if self.key == "breaks":
            on = f"on {figures.count(sheet.length, 'payment')} of {every:,}" if breaks else figures.count(every, "payment")
            self.header.say(figures.count(breaks, "break") if breaks else "No breaks",
                            f"{on}  ·  {agree:,} agree  ·  {counts['due']:,} due today")  # fmt: skip
            self.header.show_net(loaded.overview.net)
        elif self.key == "due":
            self.header.say(f"{counts['due']:,} due today", "nobody disputes them; their cash is not booked yet")
        else:
            tolerance = counts["within tolerance"]
            told = f"{tolerance:,} of them within tolerance" if tolerance else "everybody who speaks tells the same"
            self.header.say(f"{agree:,} agreed", told)
        self.show_sheet(sheet, keep)
        if not sheet.length:
            self.detail.show_row(None, -1)
        if not keep:
            self.detail.setVisible(bool(sheet.length))

    def count(self) -> int | None:
        if self.key == "breaks" and self._loaded is not None:
            return int(self._loaded.overview.breaks)
        return super().count()

    def none_left(self) -> tuple[str, str]:
        if self.key == "breaks":
            return "Nothing differs", "Terms, broker, desk and bank tell the same on every payment of this morning."
        if self.key == "due":
            return "Nothing is due today", "No payment falls on this day without its cash being booked."
        return "Nothing agreed yet", "Every payment of this morning has a break or is due."

    def open_detail(self) -> None:
        """Shows the detail if it is hidden and gives it the keyboard."""
        self.detail.setVisible(True)
        self.detail.focus()

    def toggle_detail(self) -> None:
        """Gives the whole height to the list, or takes it back."""
        self.detail.setVisible(not self.detail.isVisible())

    def show_tab(self, key: str) -> None:
        """Shows one part of the detail."""
        self.detail.setVisible(True)
        self.detail.show_tab(key)

    def panes(self) -> list[QWidget]:
        shown = self.detail.isVisible()
        return [*super().panes(), *((self.detail.tabs, self.detail.current_list()) if shown else ())]

    def back(self) -> bool:
        focused = self.focusWidget()
        if focused is not None and self.detail.isAncestorOf(focused):
            self.focus_list()
            return True
        return super().back()

    def current_item(self) -> int:
        """The row in the items of the payment the list stands on, -1 none."""
        return self._item

    def _show_detail(self, row: int) -> None:
        if self._loaded is None:
            return
        item_row = int(self.sheet.data.rows[row]) if row >= 0 and self.sheet is not None else -1
        self._item = item_row
        self.detail.show_row(self._loaded, item_row)
