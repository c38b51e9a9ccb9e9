"""Where the clerk is: the morning's date, the pages with how many rows they hold, and where the files came from."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QRect, QSize, Qt, Signal
from PySide6.QtGui import QAction, QFontMetrics, QPainter, QPaintEvent
from PySide6.QtWidgets import (
    QAbstractButton,
    QButtonGroup,
    QHBoxLayout,
    QMenu,
    QSizePolicy,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from reconciler.window import figures
from reconciler.window.theme import MEDIUM, SEMIBOLD, icon, theme
from reconciler.window.widgets import label, tip_of

WIDTH = 188


class PageButton(QAbstractButton):
    """One page in the navigation: its name, and a count at the right."""

    def __init__(self, key: str, text: str, action: QAction) -> None:
        super().__init__()
        self.key = key
        self.count = ""
        self.setText(text)
        self.setCheckable(True)
        self.setToolTip(tip_of(action))
        self.setAccessibleName(text)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        theme().changed.connect(self.update)

    def set_count(self, count: int | None) -> None:
        """How many rows the page holds; None tells nothing."""
        self.count = "" if count is None else f"{count:,}"
        self.setAccessibleName(f"{self.text()}, {self.count}" if self.count else self.text())
        self.update()

    def sizeHint(self) -> QSize:
        return QSize(WIDTH - 20, 33)

    def paintEvent(self, _event: QPaintEvent) -> None:
        look = theme()
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        on = self.isChecked()
        if on or self.underMouse():
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(look.colour("wash" if on else "hairline"))
            painter.drawRoundedRect(self.rect(), 6, 6)
        if self.hasFocus():
            painter.setPen(look.colour("accent"))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRoundedRect(self.rect().adjusted(1, 1, -2, -2), 5, 5)
        room = self.rect().adjusted(11, 0, -11, 0)
        painter.setFont(look.font("body", SEMIBOLD if on else MEDIUM))
        painter.setPen(look.colour("accent" if on else "ink" if self.isEnabled() else "faint"))
        painter.drawText(room, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft, self.text())
        painter.setFont(look.font("body"))
        painter.setPen(look.colour("accent" if on else "soft"))
        painter.drawText(QRect(room), Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignRight, self.count)


class Sidebar(QWidget):
    """The navigation. `page_chosen` is sent with a page's key."""

    page_chosen = Signal(str)

    def __init__(self, pages: Sequence[tuple[str, str, str, QAction]], menu: QMenu) -> None:
        super().__init__()
        self.setObjectName("rail")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setFixedWidth(WIDTH)
        self.weekday, self.date = label("", "small"), label("Reconciler", "heading")
        self.weekday.hide()
        self.menu_button = QToolButton()
        self.menu_button.setProperty("look", "bare")
        self.menu_button.setIcon(icon("menu"))
        self.menu_button.setIconSize(QSize(18, 18))
        self.menu_button.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.menu_button.setMenu(menu)
        self.menu_button.setToolTip("Everything the window can do (F10)")
        self.menu_button.setAccessibleName("Menu")
        self.menu_button.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        theme().changed.connect(self._renew_icon)
        self.buttons: dict[str, PageButton] = {}
        self._group = QButtonGroup(self)
        column = QVBoxLayout(self)
        column.setContentsMargins(10, 18, 10, 16)
        column.setSpacing(2)
        head = QHBoxLayout()
        head.setContentsMargins(11, 0, 0, 14)
        told = QVBoxLayout()
        told.setSpacing(1)
        told.addWidget(self.weekday)
        told.addWidget(self.date)
        head.addLayout(told, 1)
        head.addWidget(self.menu_button, 0, Qt.AlignmentFlag.AlignTop)
        column.addLayout(head)
        section = ""
        for key, text, group, action in pages:
            if group != section and group:
                caption = label(group.upper(), "caption")
                caption.setContentsMargins(11, 20, 0, 6)
                column.addWidget(caption)
            section = group
            made = PageButton(key, text, action)
            made.clicked.connect(lambda _on, key=key: self.page_chosen.emit(key))
            self._group.addButton(made)
            self.buttons[key] = made
            column.addWidget(made)
        column.addStretch(1)
        self.foot = label("", "small", wrap=True)
        self.foot.setContentsMargins(11, 0, 4, 0)
        column.addWidget(self.foot)

    def _renew_icon(self) -> None:
        self.menu_button.setIcon(icon("menu"))

    def show_page(self, key: str) -> None:
        """Marks the page that is shown."""
        self.buttons[key].setChecked(True)

    def show_day(self, date: object, foot: str) -> None:
        """The morning's date, and a few words about its files."""
        self.weekday.setText(figures.weekday(date))
        self.weekday.show()
        long = figures.long_date(date)
        wide = QFontMetrics(theme().font("heading", SEMIBOLD)).horizontalAdvance(long)
        self.date.setText(long if wide <= WIDTH - 62 else figures.date(date))
        self.foot.setText(foot)
