"""Which folder, and which day it is for. A folder whose name tells a day fills the day in; mornings opened before are listed."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from pathlib import Path

from PySide6.QtCore import QDate
from PySide6.QtWidgets import QDateEdit, QFileDialog, QGridLayout, QLineEdit, QWidget

from reconciler.window import figures
from reconciler.window.dialogs.dialog import Dialog
from reconciler.window.loading import date_of_folder
from reconciler.window.sheet import Cell
from reconciler.window.static import static_sheet
from reconciler.window.table import SheetView
from reconciler.window.widgets import button, card, label


class OpenMorning(Dialog):
    """Asks for folder and day; afterwards `folder` and `date` say what was chosen."""

    def __init__(self, parent: QWidget | None, folder: Path | None, recent: Sequence[tuple[Path, datetime.date]] = ()) -> None:
        super().__init__(parent, "Open a morning", "The folder holds bonds.csv, tickets.csv, holdings.csv, cash.csv and a folder "
                         "confirmations with the brokers' files.", "Open")  # fmt: skip
        self.setMinimumWidth(620)
        self.folder: Path | None = folder
        self.path = QLineEdit(str(folder) if folder else "")
        self.path.setPlaceholderText("Folder with the morning's files")
        self.path.setAccessibleName("Folder")
        self.browse = button("Browse …", "", "Choose the folder")
        self.day = QDateEdit()
        self.day.setDisplayFormat("d MMMM yyyy")
        self.day.setAccessibleName("Day of the morning")
        self.day.setToolTip("Payments before this day that have no cash are breaks; those on it are due")
        self.day.setDate(QDate.currentDate())
        self.said = label("", "differ", wrap=True)
        grid = QGridLayout()
        grid.setHorizontalSpacing(12)
        grid.setVerticalSpacing(10)
        for line, (words, widget) in enumerate((("Folder", self.path), ("Day", self.day))):
            name = label(words, "soft")
            name.setBuddy(widget)
            grid.addWidget(name, line, 0)
            grid.addWidget(widget, line, 1)
        grid.addWidget(self.browse, 0, 2)
        self.inside.addLayout(grid)
        self.inside.addWidget(self.said)
        self.recent = list(recent)
        self.earlier = SheetView("Mornings opened before", two_lines=False)
        self.earlier.sortable = False
        if self.recent:
            self.inside.addWidget(label("Opened before", "caption"))
            rows = [(Cell(figures.long_date(day), strong=True), Cell(str(path), tone="soft")) for path, day in self.recent]
            self.earlier.set_sheet(static_sheet([("Day", 150, False, 0), ("Folder", 300, False, 1)], rows))
            self.earlier.setMinimumHeight(170)
            self.earlier.opened.connect(self._take_recent)
            self.inside.addWidget(card(self.earlier, margin=1), 1)
        self.browse.clicked.connect(self._browse)
        self.path.textChanged.connect(self._path_changed)
        if folder is not None:
            self._path_changed(str(folder))

    @property
    def date(self) -> datetime.date:
        """The day chosen."""
        chosen = self.day.date()
        return datetime.date(chosen.year(), chosen.month(), chosen.day())

    def accept(self) -> None:
        text = self.path.text().strip()
        folder = Path(text).expanduser()
        if not text:
            self.said.setText("Choose a folder first.")
        elif not folder.is_dir():
            self.said.setText(f"There is no folder {text}; check its name or browse for it.")
        else:
            self.folder = folder
            super().accept()

    def _browse(self) -> None:
        chosen = QFileDialog.getExistingDirectory(self, "Choose the folder of a morning", self.path.text())
        if chosen:
            self.path.setText(chosen)

    def _path_changed(self, text: str) -> None:
        self.said.clear()
        day = date_of_folder(Path(text.strip() or "."))
        if day is not None:
            self.day.setDate(QDate(day.year, day.month, day.day))

    def _take_recent(self, row: int) -> None:
        path, day = self.recent[row]
        self.path.setText(str(path))
        self.day.setDate(QDate(day.year, day.month, day.day))
        self.accept()
