"""What every page has: a key, a head with search and export, one list that is the page's main thing."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QStackedLayout, QVBoxLayout, QWidget

from reconciler.problems import BugError
from reconciler.window.filterbar import FilterBar
from reconciler.window.header import Header
from reconciler.window.sheet import Sheet
from reconciler.window.table import SheetView
from reconciler.window.widgets import Empty, card


class Page(QWidget):
    """A page with one list. Pages put more below the list by adding to `self.column`."""

    row_current = Signal(int)
    row_opened = Signal(int)

    def __init__(self, key: str, title: str, noun: str, hint: str, actions: Mapping[str, QAction], two_lines: bool = True) -> None:
        super().__init__()
        self.setObjectName("ground")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.key, self.noun = key, noun
        self.header = Header(title, hint, actions["export"])
        self.filters = FilterBar(noun)
        self.table = SheetView(title, two_lines=two_lines)
        self.empty = Empty("", "")
        holder = QWidget()
        self._stack = QStackedLayout(holder)
        self._stack.addWidget(self.table)
        self._stack.addWidget(self.empty)
        self.list_card = card(holder, margin=1)
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(24, 18, 24, 20)
        self.column.setSpacing(12)
        self.column.addWidget(self.header)
        self.header.add_filters(self.filters)
        self.header.search.typed.connect(self.search)
        self.header.search.left.connect(self.focus_list)
        self.filters.chosen.connect(self.choose)
        self.filters.cleared.connect(self.show_all)
        self.header.currency_chosen.connect(lambda c: self.choose("currency", (c,) if c else ()))
        self.table.current_changed.connect(self.row_current)
        self.table.opened.connect(self.row_opened)
        self.table.shown_changed.connect(self._shown)

    # --- what a page tells the window

    @property
    def sheet(self) -> Sheet | None:
        """The sheet of the page's list."""
        model = self.table.model()
        return model.sheet if model is not None else None

    def count(self) -> int | None:
        """What the navigation shows beside the page's name."""
        return self.sheet.length if self.sheet is not None else None

    def none_left(self) -> tuple[str, str]:
        """What the page says when its list is empty."""
        return f"No {self.noun}s", ""

    def show_sheet(self, sheet: Sheet, keep: bool = False) -> None:
        """Shows a list; `keep` when it is the same list with more known, so that search, order and current row stay."""
        before = self.sheet if keep else None
        row = self.table.current_row() if before is not None else -1
        if before is None:
            self.header.search.blockSignals(True)
            self.header.search.clear()
            self.header.search.blockSignals(False)
        else:
            sheet.take_view(before)
        self.header.search.be_patient(sheet.length)
        self.filters.set_sheet(sheet)
        self.table.set_sheet(sheet, row)

    def show_day(self, loaded: Any, keep: bool = False) -> None:
        """Shows another morning (window/loading.py: Loaded), or with `keep` the same one with its causes."""
        raise BugError(f"the page {self.key} does not say how it shows a morning")

    # --- what a person does

    def search(self, typed: str) -> None:
        """Narrows the list to what was typed."""
        if self.sheet is not None:
            self.table.search(typed)

    def choose(self, key: str, words: tuple[str, ...]) -> None:
        """Narrows the list by a filter."""
        if self.sheet is not None and key in self.sheet.facets:
            self.table.choose(key, words)

    def show_all(self) -> None:
        """Clears the search and every filter."""
        if self.sheet is None:
            return
        self.header.search.blockSignals(True)
        self.header.search.clear()
        self.header.search.blockSignals(False)
        self.table.clear_narrowing()

    def find(self) -> None:
        """Puts the keyboard into the search box."""
        self.header.search.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self.header.search.selectAll()

    def focus_list(self) -> None:
        """Puts the keyboard into the list."""
        self.table.setFocus(Qt.FocusReason.ShortcutFocusReason)

    def panes(self) -> list[QWidget]:
        """The widgets F6 goes through."""
        return [self.header.search, self.table]

    def back(self) -> bool:
        """One step back; True when there was something to leave."""
        if self.header.search.hasFocus():
            if self.header.search.text():
                self.show_all()
            else:
                self.focus_list()
            return True
        if self.sheet is not None and self.sheet.narrowed():
            self.show_all()
            return True
        return False

    def _shown(self) -> None:
        sheet = self.sheet
        if sheet is None:
            return
        self.filters.refresh()
        self.header.fit_cards()
        self.header.mark_currency(sheet.chosen.get("currency", ()))
        some = len(sheet.shown) > 0
        self._stack.setCurrentIndex(0 if some else 1)
        if not some:
            if sheet.length:
                self.empty.say("Nothing found", "No row carries everything you typed and chose. Press Esc to show all rows again.")
            else:
                self.empty.say(*self.none_left())
