"""Payments ahead: what the terms say will be paid in the coming days, as a cash ladder and as a list."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QSplitter

from reconciler.window import figures
from reconciler.window.detail.pane import scrolled
from reconciler.window.drawings import CashLadder
from reconciler.window.pages.page import Page
from reconciler.window.widgets import card


class AheadPage(Page):
    """The ladder above, the payments below."""

    def __init__(self, actions: Mapping[str, QAction]) -> None:
        super().__init__("ahead", "Payments ahead", "payment", "Find payment, account, amount …", actions, two_lines=False)
        self.ladder = CashLadder()
        self.splitter = QSplitter(Qt.Orientation.Vertical)
        self.splitter.setChildrenCollapsible(False)
        self.splitter.setHandleWidth(14)
        self.ladder_card = card(scrolled(self.ladder, "Cash ladder"), margin=14)
        self.splitter.addWidget(self.ladder_card)
        self.splitter.addWidget(self.list_card)
        self.splitter.setSizes([330, 380])
        self.column.addWidget(self.splitter, 1)

    def show_day(self, loaded: Any, keep: bool = False) -> None:
        sheet, ahead = loaded.sheets["ahead"], loaded.ahead
        self.ladder.show_bars(ahead.bars)
        self.ladder_card.setVisible(bool(ahead.bars))
        told = f"{figures.count(sheet.length, 'payment')} until {figures.long_date(ahead.until)}, as the terms say"
        self.header.say("Payments ahead", told)
        self.show_sheet(sheet, keep)

    def count(self) -> int | None:
        return None

    def none_left(self) -> tuple[str, str]:
        return "Nothing ahead", "The terms say that no payment falls into the coming weeks on what is held and traded."
