"""The list is narrowed by party, kind of break, currency, broker and account: one small menu each, with counts."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QHBoxLayout, QMenu, QToolButton, QWidget

from reconciler.window import figures
from reconciler.window.sheet import Facet, Sheet
from reconciler.window.widgets import button, choice_button, discard, label, restyle

_MOST = 40  # words listed in one menu; what is rarer is found by searching


class StayMenu(QMenu):
    """A menu that stays open while its words are ticked."""

    def mouseReleaseEvent(self, event) -> None:  # type: ignore[no-untyped-def]
        action = self.activeAction()
        if action is not None and action.isCheckable():
            action.trigger()
            return
        super().mouseReleaseEvent(event)


class FilterBar(QWidget):
    """The filters of one list. `chosen` is sent with a facet's key and the words ticked."""

    chosen = Signal(str, tuple)
    cleared = Signal()

    def __init__(self, noun: str = "row") -> None:
        super().__init__()
        self._noun = noun
        self._sheet: Sheet | None = None
        self._buttons: dict[str, QToolButton] = {}
        self._line = QHBoxLayout(self)
        self._line.setContentsMargins(0, 0, 0, 0)
        self._line.setSpacing(6)
        self._count = label("", "small")
        self._count.setAccessibleName("Rows shown")
        self._clear = button("Show all", "plain", "Clear the search and every filter (Esc in the list)")
        self._clear.clicked.connect(self.cleared)
        self._line.addWidget(self._count)
        self._line.addWidget(self._clear)

    def set_sheet(self, sheet: Sheet) -> None:
        """Offers the filters of a list."""
        self._sheet = sheet
        for old in self._buttons.values():
            self._line.removeWidget(old)
            discard(old)
        self._buttons = {}
        for place, facet in enumerate(f for f in sheet.facets.values() if len(f.words) > 1 and sheet.length):
            made = choice_button(f"{facet.title}  ▾")
            made.setAccessibleName(f"Filter by {facet.title.lower()}")
            made.setToolTip(f"Show only some: {facet.title.lower()}")
            menu = StayMenu(made)
            menu.aboutToShow.connect(lambda menu=menu, facet=facet: self._fill(menu, facet))
            made.setMenu(menu)
            self._line.insertWidget(place + 2, made)
            self._buttons[facet.key] = made
        self.refresh()

    def refresh(self) -> None:
        """Tells what is chosen and how many rows are shown."""
        sheet = self._sheet
        if sheet is None:
            return
        for key, made in self._buttons.items():
            words, facet = sheet.chosen.get(key, ()), sheet.facets[key]
            told = f"{facet.title}: {words[0]}" if len(words) == 1 else f"{facet.title}: {len(words)}" if words else facet.title
            made.setText(f"{told}  ▾")
            restyle(made, on="true" if words else "false")
        narrowed = sheet.narrowed()
        self._clear.setVisible(narrowed)
        self._count.setVisible(narrowed)
        self._count.setText(f"{len(sheet.shown):,} of {figures.count(sheet.length, self._noun)}")

    def open_menu(self, key: str) -> None:
        """Opens a filter's menu (by keyboard)."""
        if key in self._buttons:
            self._buttons[key].showMenu()

    def _fill(self, menu: QMenu, facet: Facet) -> None:
        sheet = self._sheet
        assert sheet is not None
        menu.clear()
        counts = facet.counts(sheet.mask_without(facet.key))
        order = sorted(range(len(facet.words)), key=lambda i: (-counts[i], facet.words[i]))[:_MOST]
        chosen = sheet.chosen.get(facet.key, ())
        for number in order:
            word = facet.words[number]
            if not counts[number] and word not in chosen:
                continue
            action = QAction(f"{word}\t{counts[number]:,}".replace("&", "&&"), menu)
            action.setCheckable(True)
            action.setChecked(word in chosen)
            action.triggered.connect(lambda on, word=word: self._tick(facet.key, word, on))
            menu.addAction(action)
        menu.addSeparator()
        every = QAction("All", menu)
        every.triggered.connect(lambda: self.chosen.emit(facet.key, ()))
        menu.addAction(every)

    def _tick(self, key: str, word: str, on: bool) -> None:
        assert self._sheet is not None
        words = [w for w in self._sheet.chosen.get(key, ()) if w != word] + ([word] if on else [])
        self.chosen.emit(key, tuple(words))
