"""A broker's file that cannot be read with certainty is settled here: what each column means, and what each value becomes.

Every column of the file stands in a line of its own: its heading, its first values, the fact it is, and the same values as they
will be read. Nothing is guessed: what is filled in beforehand is what the headings say beyond doubt. Saving writes a layout into
the user's own folder of layouts and reads the morning again, so that the question is asked once.
"""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QGridLayout, QHBoxLayout, QLabel, QLineEdit, QWidget

from reconciler.problems import KnownError, Problem
from reconciler.window.detail.pane import scrolled
from reconciler.window.dialogs.dialog import Dialog
from reconciler.window.widgets import Notice, ShortLabel, card, label, restyle

if TYPE_CHECKING:
    from reconciler.window.main import MainWindow

_SHOWN_VALUES = 3
_IGNORED = "not used"


class AssignColumns(Dialog):
    """Asks what the columns of a confirmations file mean; `saved` is the layout's path afterwards."""

    def __init__(
        self, parent: QWidget | None, folder: Path, problems: Sequence[Problem | str] = (), brokers: Sequence[str] = ()
    ) -> None:
        super().__init__(parent, "Assign a file's columns", "Say once what this broker's columns mean; the next file like it is read "
                         "without asking.", "Save layout")  # fmt: skip
        from reconciler.procedures import layouts

        self.resize(1120, 720)
        self._layouts, self.folder = layouts, folder
        self._problems, self._brokers = tuple(problems), tuple(brokers)
        self.saved: Path | None = None
        self.look: Any = None
        self.files = QComboBox()
        self.files.setAccessibleName("File")
        self.broker = QLineEdit()
        self.broker.setAccessibleName("Broker")
        self.broker.setPlaceholderText("Broker as the tickets name it")
        self.question = Notice()
        self.facts: dict[str, QComboBox] = {}
        self.becomes: dict[str, ShortLabel] = {}
        self.choices: dict[str, QComboBox] = {}
        self.words: dict[str, QComboBox] = {}
        self._make_head()
        self._grid_holder = QWidget()
        self._grid_holder.setObjectName("scrolled")
        self._grid = QGridLayout(self._grid_holder)
        self._grid.setContentsMargins(16, 10, 16, 10)
        self._grid.setHorizontalSpacing(18)
        self._grid.setVerticalSpacing(6)
        self.inside.addWidget(card(scrolled(self._grid_holder, "Columns"), margin=1), 1)
        self._options = QHBoxLayout()
        self._options.setSpacing(14)
        self.inside.addLayout(self._options)
        self._word_line = QHBoxLayout()
        self._word_line.setSpacing(10)
        self._word_line.addStretch(1)
        self.inside.addLayout(self._word_line)
        self.said = label("", "differ", wrap=True)
        self.inside.addWidget(self.said)
        for name, told in layouts.files(folder, self._problems):
            self.files.addItem(f"{name}  –  {told}", name)
        self.files.currentIndexChanged.connect(lambda _index: self.show_file(self.files.currentData()))
        if self.files.count():
            self.show_file(self.files.currentData())
        else:
            self.question.say("This morning has no confirmations files.", look="differ")
            self.main_button.setEnabled(False)  # type: ignore[union-attr]

    def _make_head(self) -> None:
        line = QHBoxLayout()
        line.setSpacing(12)
        for words, widget, stretch in (("File", self.files, 3), ("Broker", self.broker, 2)):
            name = label(words, "soft")
            name.setBuddy(widget)
            line.addWidget(name)
            line.addWidget(widget, stretch)
        self.inside.addLayout(line)
        self.inside.addWidget(self.question)

    def show_file(self, name: str) -> None:
        """Shows the columns of another file."""
        try:
            self.look = self._layouts.look(self.folder, name, self._problems, self._brokers)
        except KnownError as fault:
            self.question.say(str(fault), look="differ")
            self.main_button.setEnabled(False)  # type: ignore[union-attr]
            return
        self.main_button.setEnabled(True)  # type: ignore[union-attr]
        self.broker.setText(self.look.broker)
        first, *rest = self.look.questions or ("Everything in this file is understood; change what is wrong.",)
        self.question.say(first, " ".join(rest), "day" if self.look.questions else "")
        self._fill_grid()
        self._fill_options()
        self.renew()

    def _fill_grid(self) -> None:
        _clear(self._grid)
        _clear(self._word_line)
        self._word_line.addStretch(1)
        self.words = {}
        self.facts, self.becomes = {}, {}
        for place, words in enumerate(("Column in the file", "First values", "What it is", "Is read as")):
            self._grid.addWidget(label(words, "caption"), 0, place)
        known = self._layouts.FACTS
        for line, heading in enumerate(self.look.headings, 1):
            chooser = QComboBox()
            chooser.setAccessibleName(f"What the column {heading.name} is")
            chooser.addItem(_IGNORED, "")
            for key, title, help_text in known:
                chooser.addItem(title, key)
                chooser.setItemData(chooser.count() - 1, help_text, Qt.ItemDataRole.ToolTipRole)
            chooser.setCurrentIndex(max(chooser.findData(heading.suggested), 0))
            chooser.currentIndexChanged.connect(lambda _index: self.renew())
            told, becomes = ShortLabel("soft"), ShortLabel("")
            told.setText("   ·   ".join(heading.values[:_SHOWN_VALUES]))
            self._grid.addWidget(label(heading.name, "strong"), line, 0)
            self._grid.addWidget(told, line, 1)
            self._grid.addWidget(chooser, line, 2)
            self._grid.addWidget(becomes, line, 3)
            self.facts[heading.name], self.becomes[heading.name] = chooser, becomes
        for column, stretch in enumerate((0, 3, 0, 3)):
            self._grid.setColumnStretch(column, stretch)
        self._grid.setRowStretch(len(self.look.headings) + 1, 1)

    def _fill_options(self) -> None:
        _clear(self._options)
        self.choices = {}
        for choice in self._layouts.CHOICES:
            chooser = QComboBox()
            chooser.setAccessibleName(choice.title)
            chooser.setToolTip(choice.help)
            for value, words in choice.values:
                chooser.addItem(words, value)
            chooser.setCurrentIndex(max(chooser.findData(self.look.options.get(choice.key, "")), 0))
            chooser.currentIndexChanged.connect(lambda _index: self.renew())
            self._options.addWidget(label(choice.title, "soft"))
            self._options.addWidget(chooser)
            self.choices[choice.key] = chooser
        self._options.addStretch(1)

    def _fill_words(self, words: Sequence[str]) -> None:
        """A line for words of sides that are not known; what was said before stays."""
        for word in words:
            if word not in self.words:
                chooser = QComboBox()
                chooser.setAccessibleName(f"What the side {word} means")
                for value, told in (("", "not said"), ("buy", "buy"), ("sell", "sell")):
                    chooser.addItem(told, value)
                chooser.currentIndexChanged.connect(lambda _index: self.renew())
                self._word_line.insertWidget(self._word_line.count() - 1, label(f"{word}  means", "soft"))
                self._word_line.insertWidget(self._word_line.count() - 1, chooser)
                self.words[word] = chooser

    def assignment(self) -> dict[str, str]:
        """Which fact each heading is."""
        return {heading: chooser.currentData() for heading, chooser in self.facts.items() if chooser.currentData()}

    def options(self) -> dict[str, str]:
        """How numbers, days, sides and faces are told."""
        return {key: chooser.currentData() for key, chooser in self.choices.items() if chooser.currentData()}

    def sides(self) -> dict[str, str]:
        """What words of sides were said to mean."""
        return {word: chooser.currentData() for word, chooser in self.words.items() if chooser.currentData()}

    def assign(self, heading: str, fact: str) -> None:
        """Assigns a column (as a person would in the list)."""
        self.facts[heading].setCurrentIndex(max(self.facts[heading].findData(fact), 0))

    def renew(self) -> None:
        """Shows what the values become under what is assigned now."""
        if self.look is None or not self.facts:
            return
        seen = self._layouts.becomes(self.look, self.assignment(), self.options(), self.sides())
        for heading, target in self.becomes.items():
            read = seen.columns.get(heading)
            texts = [value.text for value in read[:_SHOWN_VALUES]] if read else []
            wrong = next((value.problem for value in read if value.problem), "") if read else ""
            target.setText(wrong or "   ·   ".join(texts))
            restyle(target, look="differ" if wrong else "soft" if not texts else "")
        self._fill_words(seen.words)
        self.said.setText(" ".join(seen.problems))

    def accept(self) -> None:
        if self.look is None:
            return
        try:
            self.saved = self._layouts.save(
                self.look, self.broker.text().strip(), self.assignment(), self.options(), self.sides()
            )
        except KnownError as fault:
            self.said.setText(str(fault))
            return
        super().accept()


def _clear(layout: Any) -> None:
    while layout.count():
        item = layout.takeAt(0)
        widget: QLabel | None = item.widget()
        if widget is not None:
            widget.deleteLater()


def ask_layout(window: MainWindow) -> None:
    """Opens the dialog on the morning's folder; reads the morning again when a layout was saved."""
    folder = window.folder_wanted()
    if folder is None:
        window.banner.say("Open a morning first; its confirmations' columns can then be assigned.", bad=True)
        return
    brokers = window.loaded.day.source.tickets["broker"].values.to_pylist() if window.loaded is not None else []
    dialog = AssignColumns(window, folder, window.problems, brokers)
    if dialog.exec() and dialog.saved is not None:
        window.load_again()
