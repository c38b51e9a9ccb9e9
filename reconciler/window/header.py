"""The head of a page: what it is and how much of it, net differences, the search and the export."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QSize, Qt, QTimer, Signal
from PySide6.QtGui import QAction, QFontMetrics, QKeySequence, QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import QAbstractButton, QHBoxLayout, QLineEdit, QSizePolicy, QVBoxLayout, QWidget

from reconciler.window import figures
from reconciler.window.theme import SEMIBOLD, icon, theme
from reconciler.window.widgets import ShortLabel, action_button, discard, label

_FIND_KEY = QKeySequence("Ctrl+F").toString(QKeySequence.SequenceFormat.NativeText).replace("+", " ")
_PAUSE = 40  # milliseconds after the last letter before a long list is narrowed


class SearchBox(QLineEdit):
    """Narrows the list while typing. `typed` is sent with the text; Escape clears it, Down and Enter go to the list."""

    typed = Signal(str)
    left = Signal()

    def __init__(self, hint: str) -> None:
        super().__init__()
        self.setObjectName("search")
        self.setPlaceholderText(hint)
        self.setAccessibleName("Find in this list")
        self.setClearButtonEnabled(False)
        self.setFixedWidth(330)
        self._glass = self.addAction(icon("find", "faint"), QLineEdit.ActionPosition.LeadingPosition)
        theme().changed.connect(self._renew_icon)
        self.pause = 0
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.timeout.connect(lambda: self.typed.emit(self.text()))
        self.textChanged.connect(lambda: self._timer.start(self.pause))

    def _renew_icon(self) -> None:
        self._glass.setIcon(icon("find", "faint"))

    def be_patient(self, rows: int) -> None:
        """With many rows a short pause lets fast typing narrow once and not per letter."""
        self.pause = _PAUSE if rows > 100_000 else 0

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        if not self.text() and not self.hasFocus():
            painter = QPainter(self)
            painter.setFont(theme().font("small"))
            painter.setPen(theme().colour("faint"))
            right = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
            painter.drawText(self.rect().adjusted(0, 0, -16, 0), right, _FIND_KEY)

    def keyPressEvent(self, event) -> None:  # type: ignore[no-untyped-def]
        if event.key() == Qt.Key.Key_Escape:
            if self.text():
                self.clear()
            else:
                self.left.emit()
        elif event.key() in (Qt.Key.Key_Down, Qt.Key.Key_Return, Qt.Key.Key_Enter):
            if self._timer.isActive():
                self._timer.stop()
                self.typed.emit(self.text())
            self.left.emit()
        else:
            super().keyPressEvent(event)


class NetCard(QAbstractButton):
    """The net difference of one currency; pressed, it shows only that currency."""

    def __init__(self, currency: str, figure: str, tip: str) -> None:
        super().__init__()
        self.currency, self.figure = currency, figure
        self.setCheckable(True)
        self.setToolTip(tip)
        self.setAccessibleName(f"{currency} net difference {figure}")
        self.setAccessibleDescription("Shows only this currency")
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        theme().changed.connect(self.update)

    def sizeHint(self) -> QSize:
        look = theme()
        wide = QFontMetrics(look.font("body", SEMIBOLD)).horizontalAdvance(self.figure)
        narrow = QFontMetrics(look.font("small")).horizontalAdvance(f"{self.currency} net difference")
        return QSize(max(wide, narrow) + 26, 48)

    def paintEvent(self, _event: QPaintEvent) -> None:
        look = theme()
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        on = self.isChecked()
        edge = "accent" if on or self.hasFocus() else "outline" if self.underMouse() else "hairline"
        painter.setPen(look.colour(edge))
        painter.setBrush(look.colour("wash" if on else "surface"))
        painter.drawRoundedRect(self.rect().adjusted(0, 0, -1, -1), 6, 6)
        if self.hasFocus():
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRoundedRect(self.rect().adjusted(1, 1, -2, -2), 5, 5)
        room = self.rect().adjusted(12, 6, -12, -6)
        painter.setFont(look.font("small"))
        painter.setPen(look.colour("soft"))
        painter.drawText(room, Qt.AlignmentFlag.AlignTop | Qt.AlignmentFlag.AlignLeft, f"{self.currency} net difference")
        painter.setFont(look.font("body", SEMIBOLD))
        painter.setPen(look.colour("ink"))
        painter.drawText(room, Qt.AlignmentFlag.AlignBottom | Qt.AlignmentFlag.AlignLeft, self.figure)


class Header(QWidget):
    """Title, subtitle, net differences, search box and export button of a page."""

    currency_chosen = Signal(str)

    def __init__(self, title: str, hint: str, export: QAction | None) -> None:
        super().__init__()
        self.title, self.subtitle = label(title, "title"), ShortLabel("soft")
        self.search = SearchBox(hint)
        self._cards: list[NetCard] = []
        self._bar = QWidget()
        upper = QHBoxLayout()
        upper.setSpacing(18)
        upper.addWidget(self.title, 0, Qt.AlignmentFlag.AlignBaseline)
        upper.addWidget(self.subtitle, 1, Qt.AlignmentFlag.AlignBaseline)
        self._lower = QHBoxLayout()
        self._lower.setSpacing(10)
        self._right = QHBoxLayout()
        self._right.setSpacing(12)
        self._right.addWidget(self.search)
        if export is not None:
            self.export = action_button(export, "main")
            self._right.addWidget(self.export)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(12)
        column.addLayout(upper)
        column.addLayout(self._lower)
        self._upper, self._column = upper, column
        self._lower.addStretch(1)
        self._upper.addLayout(self._right)

    def add_filters(self, bar: QWidget) -> None:
        """Puts the filters at the right of the net differences."""
        self._bar = bar
        self._lower.addWidget(bar, 0, Qt.AlignmentFlag.AlignBottom)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.fit_cards()

    def fit_cards(self) -> None:
        """Shows as many net differences as there is room for beside the filters."""
        room = self.width() - self._bar.sizeHint().width() - 16
        for made in self._cards:
            room -= made.sizeHint().width() + 10
            made.setVisible(room >= 0)

    def say(self, title: str, subtitle: str) -> None:
        """What the page shows and how much."""
        self.title.setText(title)
        self.subtitle.setText(subtitle)
        self.setAccessibleName(f"{title}. {subtitle}")

    def show_net(self, net: Sequence[object]) -> None:
        """One card per currency with a net difference, in the order of their most urgent breaks."""
        for old in self._cards:
            self._lower.removeWidget(old)
            discard(old)
        self._cards = []
        tip = ("What the bank booked less what the terms say, over all payments with a break; missing cash counts in full. "
               "Click to show only this currency.")  # fmt: skip
        for place, one in enumerate(net):
            made = NetCard(one.currency, figures.amount(one.minor, one.digits, signed=True), tip)  # type: ignore[attr-defined]
            made.clicked.connect(lambda on, c=made.currency: self._card_clicked(c, on))
            self._lower.insertWidget(place, made)
            self._cards.append(made)
        self.fit_cards()

    def mark_currency(self, words: Sequence[str]) -> None:
        """Shows which currency the list is narrowed to."""
        for made in self._cards:
            made.setChecked(list(words) == [made.currency])

    def _card_clicked(self, currency: str, on: bool) -> None:
        self.currency_chosen.emit(currency if on else "")
