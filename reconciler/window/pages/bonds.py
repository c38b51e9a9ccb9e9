"""Bonds: the morning's terms, and each bond's coupons with the reason for every day that was moved."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtGui import QAction, QShowEvent
from PySide6.QtWidgets import QFrame, QSplitter, QVBoxLayout, QWidget

from reconciler.window import figures
from reconciler.window.detail import behind
from reconciler.window.drawings import CouponStrip
from reconciler.window.pages.page import Page
from reconciler.window.table import SheetView
from reconciler.window.widgets import label


class BondsPage(Page):
    """The bonds above, the current bond's coupons below."""

    def __init__(self, actions: Mapping[str, QAction]) -> None:
        super().__init__("bonds", "Bonds", "bond", "Find bond, identifier, day count …", actions, two_lines=False)
        self.coupons = SheetView("Coupons of this bond", two_lines=False)
        self.coupons.sortable = False
        self.strip = CouponStrip()
        self.title, self.subtitle = label("", "heading"), label("", "soft")
        below = QFrame()
        below.setObjectName("card")
        column = QVBoxLayout(below)
        column.setContentsMargins(1, 12, 1, 1)
        column.setSpacing(4)
        for piece in (self.title, self.subtitle):
            piece.setContentsMargins(14, 0, 14, 0)
            column.addWidget(piece)
        column.addWidget(self.strip)
        column.addWidget(self.coupons, 1)
        self.splitter = QSplitter(Qt.Orientation.Vertical)
        self.splitter.setChildrenCollapsible(False)
        self.splitter.setHandleWidth(14)
        self.splitter.addWidget(self.list_card)
        self.splitter.addWidget(below)
        self.splitter.setSizes([400, 360])
        self.column.addWidget(self.splitter, 1)
        self._loaded: Any = None
        self._row = -1
        self.table.current_changed.connect(self._show_bond)
        self.row_opened.connect(lambda _row: self.coupons.setFocus(Qt.FocusReason.ShortcutFocusReason))

    def show_day(self, loaded: Any, keep: bool = False) -> None:
        self._loaded = loaded
        bonds = loaded.sheets["bonds"]
        currencies = len(bonds.facets["currency"].words)
        self.header.say("Bonds", f"{figures.count(bonds.length, 'bond')} in "
                        f"{figures.count(currencies, 'currency', 'currencies')}")  # fmt: skip
        self.show_sheet(bonds, keep)

    def count(self) -> int | None:
        return None

    def none_left(self) -> tuple[str, str]:
        return "No bonds", "The morning's bonds.csv holds no bond that could be read."

    def panes(self) -> list[QWidget]:
        return [*super().panes(), self.coupons]

    def back(self) -> bool:
        if self.coupons.hasFocus():
            self.focus_list()
            return True
        return super().back()

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        self._show_bond(self._row)

    def _show_bond(self, row: int) -> None:
        self._row = row
        # a page nobody looks at reckons no coupons
        if self._loaded is None or row < 0 or not self.isVisible():
            return
        title, subtitle = behind.bond_heading(self._loaded, row)
        self.title.setText(title)
        self.subtitle.setText(subtitle)
        sheet, strip = behind.bond_coupons(self._loaded, row)
        self.coupons.set_sheet(sheet)
        self.strip.show_strip(strip)
        self.strip.setVisible(len(strip.boundaries) > 1)
