"""A list on the screen: rows as in a ledger, hairlines instead of grids, the whole row painted from one page of cells.

`SheetView` shows a `SheetModel`; columns share the width by their declared stretch; a click on a head sorts, Ctrl C copies the
selected rows as tab-separated text with their heads, Enter opens a row. Painting is done here and not by Qt's style, because
two-line cells with marks are not a style's business and because it is several times faster.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from PySide6.QtCore import QItemSelection, QItemSelectionModel, QModelIndex, QPoint, QRect, QSize, Qt, Signal
from PySide6.QtGui import QFontMetrics, QGuiApplication, QKeyEvent, QMouseEvent, QPainter, QResizeEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHeaderView,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from reconciler.window import tokens
from reconciler.window.copying import as_text
from reconciler.window.model import SheetModel
from reconciler.window.painting import PADDING, paint_cell
from reconciler.window.sheet import Cell, Sheet
from reconciler.window.theme import SEMIBOLD, theme


class CellDelegate(QStyledItemDelegate):
    """Paints cells of a `SheetModel` and gives every row one height."""

    def __init__(self, view: SheetView) -> None:
        super().__init__(view)
        self.view = view

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Any) -> None:
        view, model = self.view, self.view.model()
        row, number = index.row(), index.column()
        # a small list of facts marks its row only while the keyboard is in it
        selected = (view.sortable or view.hasFocus()) and view.selectionModel().isRowSelected(row, QModelIndex())
        paint_cell(painter, option.rect, model.cell(row, number), model.sheet.columns[number], first=number == 0,
                   selected=selected, hovered=row == view.hovered, focused=view.hasFocus())  # fmt: skip

    def sizeHint(self, _option: QStyleOptionViewItem, index: Any) -> QSize:
        cell = self.view.model().cell(index.row(), index.column())
        return QSize(cell_width(cell), self.view.row_height)


def cell_width(cell: Cell) -> int:
    """The width a cell needs to show all of its text."""
    upper = QFontMetrics(theme().font("body", SEMIBOLD)).horizontalAdvance(cell.text)
    lower = QFontMetrics(theme().font("small")).horizontalAdvance(cell.small)
    glyph = 20 if cell.glyph else 0
    wide = max(upper, lower + glyph) if cell.small else upper + glyph
    return wide + 2 * PADDING + 8 + cell.shift * 10


class Head(QHeaderView):
    """The head of a list: small quiet titles, an arrow on the column that sorts."""

    def __init__(self, view: SheetView) -> None:
        super().__init__(Qt.Orientation.Horizontal, view)
        self.view = view
        self.setSectionsClickable(True)
        self.setHighlightSections(False)
        self.setMinimumSectionSize(40)
        self.setFixedHeight(tokens.HEAD)
        self.setAccessibleName("Column heads")

    def paintSection(self, painter: QPainter, rect: QRect, number: int) -> None:
        look, sheet = theme(), self.view.model().sheet
        column = sheet.columns[number]
        painter.fillRect(rect, look.colour("surface"))
        painter.setPen(look.colour("hairline"))
        painter.drawLine(rect.bottomLeft(), rect.bottomRight())
        sorting = sheet.sorted_by == column.key
        painter.setFont(look.font("small", SEMIBOLD))
        painter.setPen(look.colour("accent" if sorting else "soft"))
        text = column.title + ((" ↓" if sheet.descending else " ↑") if sorting else "")
        room = rect.adjusted(PADDING + (4 if number == 0 else 0), 0, -PADDING, -1)
        side = Qt.AlignmentFlag.AlignRight if column.right else Qt.AlignmentFlag.AlignLeft
        metrics = painter.fontMetrics()
        painter.drawText(room, side | Qt.AlignmentFlag.AlignVCenter,
                         metrics.elidedText(text, Qt.TextElideMode.ElideRight, room.width()))  # fmt: skip


class SheetView(QTableView):
    """A list of a sheet's rows. `opened` is sent when a row is opened, `current_changed` when another row is current."""

    opened = Signal(int)
    current_changed = Signal(int)
    shown_changed = Signal()

    def __init__(self, name: str, two_lines: bool = True, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.row_height = tokens.ROW_TWO if two_lines else tokens.ROW_ONE
        self.hovered = -1
        self.sortable = True
        self._needed: list[int] = []
        self._base_row = -1
        self.setAccessibleName(name)
        self.setItemDelegate(CellDelegate(self))
        self.setHorizontalHeader(Head(self))
        self.setShowGrid(False)
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ExtendedSelection)
        self.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setTabKeyNavigation(False)
        self.setMouseTracking(True)
        self.setWordWrap(False)
        self.setCornerButtonEnabled(False)
        rows = self.verticalHeader()
        rows.setVisible(False)
        rows.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        rows.setMinimumSectionSize(self.row_height)
        rows.setDefaultSectionSize(self.row_height)
        self.horizontalHeader().sectionClicked.connect(self._head_clicked)
        self.doubleClicked.connect(lambda index: self.opened.emit(self.model().row_at(index.row())))
        self.entered.connect(self._hover)
        theme().changed.connect(self.viewport().update)

    def set_sheet(self, sheet: Sheet, row: int = -1) -> None:
        """Shows another sheet, with its first row current, or the sheet's row given."""
        old = super().model()
        top = self.verticalScrollBar().value() if row >= 0 else 0
        self.setModel(SheetModel(sheet, self))
        if old is not None:
            old.deleteLater()
        self._base_row = -1
        self._needed = self._needed_widths()
        self.share_width()
        place = sheet.place_of(row) if row >= 0 else 0
        if self.model().rowCount():
            self.go_to(max(place, 0))
            self.verticalScrollBar().setValue(top)
        self.shown_changed.emit()

    def model(self) -> SheetModel:
        """The model, with its own type."""
        return super().model()  # type: ignore[return-value]

    def currentChanged(self, current: Any, previous: Any) -> None:
        super().currentChanged(current, previous)
        row = self.model().row_at(current.row()) if current.isValid() else -1
        if row != self._base_row and row >= 0:
            self._base_row = row
            self.current_changed.emit(row)

    def current_row(self) -> int:
        """The sheet's row number of the current row, -1 when there is none."""
        index = self.currentIndex()
        return self.model().row_at(index.row()) if self.model() is not None and index.isValid() else -1

    def go_to(self, place: int) -> None:
        """Makes the row at a shown place current and brings it into view."""
        index = self.model().index(place, 0)
        flags = QItemSelectionModel.SelectionFlag
        self.selectionModel().setCurrentIndex(index, flags.ClearAndSelect | flags.Rows)
        self.scrollTo(index)

    def step(self, by: int) -> None:
        """Goes to the next or the previous row."""
        rows = self.model().rowCount()
        if rows:
            self.go_to(min(max(self.currentIndex().row() + by, 0), rows - 1))

    def search(self, typed: str) -> None:
        """Shows only rows in which everything typed is found, and keeps to the current row if it stays."""
        self._keep_row(lambda: self.model().search(typed))

    def choose(self, key: str, words: tuple[str, ...]) -> None:
        """Shows only rows that carry one of a facet's words."""
        self._keep_row(lambda: self.model().choose(key, words))

    def clear_narrowing(self) -> None:
        """Shows all rows again."""
        self._keep_row(self.model().clear)

    def sort_by(self, key: str, descending: bool) -> None:
        """Sorts by a column, keeping the current row."""
        self._keep_row(lambda: self.model().sort_by(key, descending))
        self.horizontalHeader().viewport().update()

    def renew(self) -> None:
        """Asks for every cell in view again."""
        if self.model() is not None:
            self.model().forget()
            self.viewport().update()

    def copy(self) -> str:
        """Puts the selected rows on the clipboard as tab-separated text with heads; returns it."""
        places = np.array(sorted({index.row() for index in self.selectionModel().selectedRows()}), np.int64)
        text = as_text(self.model().sheet, self.model().sheet.shown[places]) if len(places) else ""
        if text:
            QGuiApplication.clipboard().setText(text)
        return text

    def share_width(self) -> None:
        """Gives each column its width and the stretching ones what is left."""
        if self.model() is None:
            return
        columns = self.model().sheet.columns
        widths = list(self._needed)
        spare = self.viewport().width() - sum(widths)
        # what is left goes to the stretching columns; what is missing is taken from those of words, down to half
        shares = [column.stretch * (1 if spare > 0 else 0 if column.right or column.fit else width)
                  for column, width in zip(columns, widths, strict=True)]  # fmt: skip
        if sum(shares):
            widths = [max(width + spare * share // sum(shares), width // 2) for width, share in zip(widths, shares, strict=True)]
        for number, width in enumerate(widths):
            self.setColumnWidth(number, width)

    def _needed_widths(self) -> list[int]:
        """Figures are never cut: a column of figures is as wide as the widest of some rows all over the list."""
        sheet = self.model().sheet
        places = np.unique(np.linspace(0, max(len(sheet.shown) - 1, 0), 200).astype(np.int64))
        rows = sheet.shown[places] if len(sheet.shown) else sheet.shown
        head = QFontMetrics(theme().font("small", SEMIBOLD))
        widths = []
        for column in sheet.columns:
            wide = max(column.width, head.horizontalAdvance(column.title) + 2 * PADDING + 4)
            if column.right or column.fit:
                wide = max([wide, *(cell_width(cell) for cell in column.show(sheet.data, rows))])
            widths.append(wide)
        return widths

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.share_width()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self.current_row() >= 0:
            self.opened.emit(self.current_row())
        elif event.key() == Qt.Key.Key_Home and self.model().rowCount():
            self.go_to(0)
        elif event.key() == Qt.Key.Key_End and self.model().rowCount():
            self.go_to(self.model().rowCount() - 1)
        elif event.text() and event.text().isprintable() and not event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            event.ignore()  # single letters are the window's own keys, not Qt's search in the first column
        else:
            super().keyPressEvent(event)

    def leaveEvent(self, event: Any) -> None:
        self.hovered = -1
        self.viewport().update()
        super().leaveEvent(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if not self.indexAt(event.position().toPoint()).isValid() and self.hovered >= 0:
            self.hovered = -1
            self.viewport().update()
        super().mouseMoveEvent(event)

    def _hover(self, index: QModelIndex) -> None:
        if index.row() != self.hovered:
            self.hovered = index.row()
            self.viewport().update()

    def _head_clicked(self, number: int) -> None:
        if not self.sortable:
            return
        sheet = self.model().sheet
        column = sheet.columns[number]
        first = column.descending_first
        if sheet.sorted_by != column.key:
            self.sort_by(column.key, first)
        elif sheet.descending == first:
            self.sort_by(column.key, not first)
        else:
            self.sort_by("", False)  # the third click gives the list its own order back

    def _keep_row(self, change: Any) -> None:
        row = self._base_row
        change()
        place = self.model().sheet.place_of(row) if row >= 0 else -1
        self._base_row = row if place >= 0 else -1
        if self.model().rowCount():
            self.go_to(max(place, 0))
        else:
            self.current_changed.emit(-1)
        self.viewport().update()
        self.shown_changed.emit()


def page_of(view: SheetView) -> tuple[int, int]:
    """The first and last shown places in view (for tests and the benchmark)."""
    top = view.rowAt(0)
    bottom = view.indexAt(QPoint(5, view.viewport().height() - 2)).row()
    return top, bottom if bottom >= 0 else view.model().rowCount() - 1


def select_places(view: SheetView, first: int, last: int) -> None:
    """Selects a run of shown rows."""
    model = view.model()
    run = QItemSelection(model.index(first, 0), model.index(last, model.columnCount() - 1))
    view.selectionModel().select(run, QItemSelectionModel.SelectionFlag.ClearAndSelect)
