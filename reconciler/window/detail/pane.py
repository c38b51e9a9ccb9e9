"""Below the list stands what lies behind its current row: the four accounts, the working, the bond's coupons.

The pane asks `behind` (detail/behind.py) for ready texts and sets them; a row's detail is made when the row becomes current and
its tab is looked at, never for the whole list.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QScrollArea, QStackedWidget, QTabBar, QVBoxLayout, QWidget

from reconciler.window.detail import behind
from reconciler.window.drawings import CouponStrip
from reconciler.window.table import SheetView
from reconciler.window.widgets import Empty, Notice, discard, label

if TYPE_CHECKING:
    from reconciler.window.loading import Loaded

TABS = ("accounts", "working", "coupons")


class DetailPane(QFrame):
    """The detail of one payment."""

    back = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("card")
        self.setAccessibleName("Detail of the payment")
        self.title, self.subtitle = label("", "heading", selectable=True), label("", "soft", selectable=True)
        self.tabs = QTabBar()
        self.tabs.setAccessibleName("Parts of the detail")
        self.tabs.setDrawBase(False)
        self.tabs.setExpanding(False)
        for text in ("The four accounts", "Working", "Coupons"):
            self.tabs.addTab(text)
        self.facts = _list("The four accounts")
        self.working = _list("Working")
        self.coupons = _list("Coupons of this bond")
        self.strip, self.wide_strip = CouponStrip(), CouponStrip()
        self.strip_head = label("Coupons of this bond", "caption")
        self.proof, self.next_step = Notice(), label("", "", wrap=True, selectable=True)
        self.next_head, self.next_here = label("What next", "caption"), label("", "", wrap=True, selectable=True)
        self.differs = QVBoxLayout()
        self.pages = QStackedWidget()
        self.pages.addWidget(self._accounts_page())
        self.pages.addWidget(self._working_page())
        self.pages.addWidget(self._coupons_page())
        self.nothing = Empty("Nothing chosen", "Choose a payment in the list to see what lies behind it.")
        self._loaded: Loaded | None = None
        self._row = -1
        self._made: set[int] = set()
        self.body = QWidget()
        inside = QVBoxLayout(self.body)
        inside.setContentsMargins(20, 14, 20, 0)
        inside.setSpacing(3)
        inside.addWidget(self.title)
        inside.addWidget(self.subtitle)
        inside.addSpacing(4)
        inside.addWidget(self.tabs)
        column = QVBoxLayout(self)
        column.setContentsMargins(1, 1, 1, 8)
        column.setSpacing(0)
        column.addWidget(self.body)
        line = QFrame()
        line.setObjectName("rule")
        column.addWidget(line)
        column.addWidget(self.pages, 1)
        column.addWidget(self.nothing, 1)
        self.tabs.currentChanged.connect(self._tab_changed)
        self.show_row(None, -1)

    def show_row(self, loaded: Loaded | None, item_row: int) -> None:
        """Shows the detail of an item of a morning (-1: none)."""
        self._loaded, self._row = loaded, item_row
        self._made = set()
        there = loaded is not None and item_row >= 0
        self.body.setVisible(there)
        self.pages.setVisible(there)
        self.nothing.setVisible(not there)
        if loaded is not None and there:
            title, subtitle = behind.heading(loaded, item_row)
            self.title.setText(title)
            self.subtitle.setText(subtitle)
            has_coupons = behind.has_coupons(loaded, item_row)
            self.tabs.setTabEnabled(2, has_coupons)
            if not has_coupons and self.tabs.currentIndex() == 2:
                self.tabs.setCurrentIndex(0)
            self._tab_changed(self.tabs.currentIndex())

    def show_tab(self, key: str) -> None:
        """Shows one of TABS."""
        self.tabs.setCurrentIndex(TABS.index(key))

    def current_list(self) -> SheetView:
        """The list on the shown tab."""
        return (self.facts, self.working, self.coupons)[self.tabs.currentIndex()]

    def focus(self) -> None:
        """Takes the keyboard: to the list on the shown tab."""
        self.current_list().setFocus(Qt.FocusReason.ShortcutFocusReason)

    def _tab_changed(self, tab: int) -> None:
        self.pages.setCurrentIndex(tab)
        # what nobody looks at is not made: pages that are not shown have details too
        if self._loaded is None or self._row < 0 or tab in self._made or not self.isVisible():
            return
        self._made.add(tab)
        (self._fill_accounts, self._fill_working, self._fill_coupons)[tab](self._loaded)

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        self._tab_changed(self.tabs.currentIndex())

    def _fill_accounts(self, loaded: Loaded) -> None:
        self.facts.set_sheet(behind.accounts(loaded, self._row))
        while self.differs.count():
            old = self.differs.takeAt(0).widget()
            if old is not None:
                discard(old)
        for told in behind.differences(loaded, self._row):
            notice = Notice()
            notice.say(told.title, told.text, told.look)
            self.differs.addWidget(notice)
        step = behind.next_step(loaded, self._row)
        self.next_here.setText(step)
        self.next_here.setVisible(bool(step))
        self.next_head.setVisible(bool(step))

    def _fill_working(self, loaded: Loaded) -> None:
        shown = behind.working(loaded, self._row)
        self.working.set_sheet(shown.sheet)
        self.strip.show_strip(shown.strip)
        for piece in (self.strip_head, self.strip):
            piece.setVisible(len(shown.strip.boundaries) > 1)
        self.proof.say(shown.found, shown.found_more, shown.look)
        self.next_step.setText(shown.next_step or "Nothing needs to be done.")

    def _fill_coupons(self, loaded: Loaded) -> None:
        sheet, strip = behind.coupons(loaded, self._row)
        self.coupons.set_sheet(sheet)
        self.wide_strip.show_strip(strip)
        self.wide_strip.setVisible(len(strip.boundaries) > 1)

    def _accounts_page(self) -> QWidget:
        page = QWidget()
        line = QHBoxLayout(page)
        line.setContentsMargins(8, 6, 20, 4)
        line.setSpacing(20)
        line.addWidget(self.facts, 9)
        inner = QWidget()
        inner.setObjectName("scrolled")
        column = QVBoxLayout(inner)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(8)
        column.addWidget(label("What differs", "caption"))
        self.differs.setSpacing(8)
        column.addLayout(self.differs)
        column.addSpacing(4)
        column.addWidget(self.next_head)
        column.addWidget(self.next_here)
        column.addStretch(1)
        line.addWidget(scrolled(inner, "What differs"), 5)
        return page

    def _working_page(self) -> QWidget:
        page = QWidget()
        line = QHBoxLayout(page)
        line.setContentsMargins(8, 6, 20, 4)
        line.setSpacing(24)
        line.addWidget(self.working, 8)
        inner = QWidget()
        inner.setObjectName("scrolled")
        column = QVBoxLayout(inner)
        column.setContentsMargins(0, 4, 0, 0)
        column.setSpacing(8)
        column.addWidget(self.proof)
        column.addWidget(label("What next", "caption"))
        column.addWidget(self.next_step)
        column.addSpacing(4)
        column.addWidget(self.strip_head)
        column.addWidget(self.strip)
        column.addStretch(1)
        line.addWidget(scrolled(inner, "What was found and what next"), 5)
        return page

    def _coupons_page(self) -> QWidget:
        page = QWidget()
        column = QVBoxLayout(page)
        column.setContentsMargins(8, 6, 8, 4)
        column.addWidget(self.wide_strip)
        column.addWidget(self.coupons, 1)
        return page


def _list(name: str, two_lines: bool = False) -> SheetView:
    view = SheetView(name, two_lines=two_lines)
    view.sortable = False
    return view


def scrolled(inner: QWidget, name: str) -> QScrollArea:
    """A widget that scrolls up and down when it is higher than its place."""
    area = QScrollArea()
    area.setAccessibleName(name)
    area.setWidgetResizable(True)
    area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    area.setWidget(inner)
    for part in (area.viewport(), inner):
        part.setAutoFillBackground(False)
    return area
