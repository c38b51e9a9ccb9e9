"""Files of the day: what was read of every file, what became of it, and each row that could not be used, with its reason."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QFrame, QSplitter, QVBoxLayout, QWidget

from reconciler.window import figures
from reconciler.window.pages.page import Page
from reconciler.window.table import SheetView
from reconciler.window.widgets import label


class FilesPage(Page):
    """The files above, the rejected rows below."""

    def __init__(self, actions: Mapping[str, QAction]) -> None:
        super().__init__("files", "Files of the day", "line", "Find file, currency, amount …", actions)
        self.rejects = SheetView("Rejected rows", two_lines=False)
        self.rejects_title = label("Rejected rows", "heading")
        self.below = below = QFrame()
        below.setObjectName("card")
        column = QVBoxLayout(below)
        column.setContentsMargins(1, 12, 1, 1)
        self.rejects_title.setContentsMargins(14, 0, 14, 0)
        column.addWidget(self.rejects_title)
        column.addWidget(self.rejects, 1)
        self.splitter = QSplitter(Qt.Orientation.Vertical)
        self.splitter.setChildrenCollapsible(False)
        self.splitter.setHandleWidth(14)
        self.splitter.addWidget(self.list_card)
        self.splitter.addWidget(below)
        self.splitter.setSizes([440, 300])
        self.column.addWidget(self.splitter, 1)

    def show_day(self, loaded: Any, keep: bool = False) -> None:
        sheet, rejects = loaded.sheets["files"], loaded.sheets["rejects"]
        totals = loaded.day.source.totals
        read, used = int(totals["rows_read"].sum()), int(totals["rows_used"].sum())
        rejected, aside = int(totals["rows_rejected"].sum()), int(totals["rows_set_aside"].sum())
        tie = "every row accounted for" if read == used + rejected + aside else "rows do not add up"
        files = len({name for name in totals["file"].to_list()})
        self.header.say("Files of the day", f"{figures.count(files, 'file')}, {figures.count(read, 'row')}  ·  {used:,} used, "
                        f"{rejected:,} rejected, {aside:,} set aside  ·  {tie}")  # fmt: skip
        self.show_sheet(sheet, keep)
        self.rejects.set_sheet(rejects)
        self.rejects_title.setText(figures.count(rejects.length, "rejected row"))
        self.below.setVisible(rejects.length > 0)

    def count(self) -> int | None:
        return None

    def panes(self) -> list[QWidget]:
        return [*super().panes(), *((self.rejects,) if self.below.isVisible() else ())]

    def back(self) -> bool:
        if self.rejects.hasFocus():
            self.focus_list()
            return True
        return super().back()
