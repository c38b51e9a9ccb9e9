"""Qt asks for every cell six or seven times; a page of cells is formatted once and kept.

`SheetModel` puts a `Sheet` behind Qt's table interface. Delegates read whole cells with `cell`, past Qt's conversions; assistive
technology and tests read the same through the usual roles. Traps known and avoided: roles are compared as plain numbers (enum
comparison costs microseconds per call), `multiData` is not overridden (it brings the interpreter down), and no proxy model
sorts or filters (a thousand times slower than sorting the columns).
"""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt

from reconciler.window.sheet import Cell, Sheet

Index = QModelIndex | QPersistentModelIndex

_DISPLAY = int(Qt.ItemDataRole.DisplayRole)
_TIP = int(Qt.ItemDataRole.ToolTipRole)
_ALIGN = int(Qt.ItemDataRole.TextAlignmentRole)
_SPOKEN = int(Qt.ItemDataRole.AccessibleTextRole)
_RIGHT = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
_LEFT = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
_ACROSS = Qt.Orientation.Horizontal
_PAGE = 64
_PAGES_KEPT = 64
_NOTHING = QModelIndex()


class SheetModel(QAbstractTableModel):
    """The rows a sheet shows, in its order."""

    def __init__(self, sheet: Sheet, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.sheet = sheet
        self._columns = len(sheet.columns)
        self._rows = len(sheet.shown)
        self._pages: dict[int, list[list[Cell]]] = {}

    def rowCount(self, parent: Index = _NOTHING) -> int:
        return 0 if parent.isValid() else self._rows

    def columnCount(self, parent: Index = _NOTHING) -> int:
        return 0 if parent.isValid() else self._columns

    def cell(self, row: int, column: int) -> Cell:
        """What the cell at a shown row shows."""
        page = self._pages.get(row // _PAGE)
        if page is None:
            page = self._format(row // _PAGE)
        return page[column][row % _PAGE]

    def data(self, index: Index, role: int = _DISPLAY) -> Any:
        role = int(role)
        if role == _DISPLAY:
            return self.cell(index.row(), index.column()).text
        if role == _ALIGN:
            return _RIGHT if self.sheet.columns[index.column()].right else _LEFT
        if role in (_SPOKEN, _TIP):
            cell = self.cell(index.row(), index.column())
            said = ", ".join(part for part in (cell.text, cell.small) if part)
            return f"{self.sheet.columns[index.column()].title}: {said}" if role == _SPOKEN else said
        return None

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = _DISPLAY) -> Any:
        if orientation != _ACROSS:
            return None
        role = int(role)
        if role == _DISPLAY:
            return self.sheet.columns[section].title
        if role == _TIP:
            return self.sheet.columns[section].help
        if role == _ALIGN:
            return _RIGHT if self.sheet.columns[section].right else _LEFT
        return None

    def row_at(self, place: int) -> int:
        """The sheet's row number at a shown place, -1 outside."""
        return int(self.sheet.shown[place]) if 0 <= place < self._rows else -1

    def sort_by(self, key: str, descending: bool) -> None:
        """Sorts the sheet; the number of rows stays."""
        self.layoutAboutToBeChanged.emit()
        self.sheet.sort(key, descending)
        self._pages.clear()
        self.layoutChanged.emit()

    def forget(self) -> None:
        """Drops every page of cells, so that they are formatted anew."""
        self._pages.clear()

    def search(self, typed: str) -> None:
        """Narrows the sheet to what was typed."""
        self._renew(lambda: self.sheet.search(typed))

    def choose(self, key: str, words: tuple[str, ...]) -> None:
        """Narrows the sheet to the words of a facet."""
        self._renew(lambda: self.sheet.choose(key, words))

    def clear(self) -> None:
        """Shows every row again."""
        self._renew(self.sheet.clear)

    def _renew(self, change: Any) -> None:
        change()
        if len(self.sheet.shown) == self._rows:
            # a reset makes the view lay out a million rows again; the same number of rows needs only a new paint
            self.layoutAboutToBeChanged.emit()
            self._pages.clear()
            self.layoutChanged.emit()
            return
        self.beginResetModel()
        self._rows = len(self.sheet.shown)
        self._pages.clear()
        self.endResetModel()

    def _format(self, page: int) -> list[list[Cell]]:
        if len(self._pages) >= _PAGES_KEPT:
            self._pages.clear()
        rows = self.sheet.shown[page * _PAGE : (page + 1) * _PAGE]
        data = self.sheet.data
        formatted = [column.show(data, rows) for column in self.sheet.columns]
        self._pages[page] = formatted
        return formatted
