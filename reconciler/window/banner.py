"""What is wrong with files or folder is said at the top of the window in plain words, and stays until it is read."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QProgressBar, QToolButton, QVBoxLayout

from reconciler.window import figures
from reconciler.window.theme import icon, theme
from reconciler.window.widgets import button, label, restyle, row


class Banner(QFrame):
    """One sentence with a button that shows the rest.

    `asked` is sent when the rest is wanted, `assign_asked` when the columns of a file that was not recognised are to be assigned.
    """

    asked = Signal()
    assign_asked = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("banner")
        self.text = label("", "", wrap=True, selectable=True)
        self.more = button("Show all", "plain", "Show every problem with its place")
        self.more.clicked.connect(self.asked)
        self.assign = button("Assign columns …", "", "Say what the columns of the file mean, so that it can be read")
        self.assign.clicked.connect(self.assign_asked)
        self._icon = QLabel()
        close = QToolButton()
        close.setProperty("look", "bare")
        close.setToolTip("Hide this")
        close.setAccessibleName("Hide this message")
        close.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        close.setIconSize(QSize(14, 14))
        close.clicked.connect(self.hide)
        line = QHBoxLayout(self)
        line.setContentsMargins(14, 7, 8, 7)
        line.setSpacing(10)
        line.addWidget(self._icon)
        line.addWidget(self.text, 1)
        line.addWidget(self.more)
        line.addWidget(self.assign)
        line.addWidget(close)
        self._close, self._look = close, "day"
        theme().changed.connect(self._paint_icons)
        self.hide()

    def say(self, text: str, more: bool = False, bad: bool = False, assign: bool = False) -> None:
        """Shows a sentence; `bad` when nothing could be done, `more` when there is a list behind it."""
        self.assign.setVisible(assign)
        self._show(text, more, "differ" if bad else "day")

    def tell(self, text: str) -> None:
        """Shows that something was done."""
        self.assign.hide()
        self._show(text, False, "proved")

    def _show(self, text: str, more: bool, look: str) -> None:
        self._look = look
        self.text.setText(text)
        self.setAccessibleName(text)
        self.more.setVisible(more)
        restyle(self, look=look)
        self._paint_icons()
        self.setVisible(bool(text))

    def _paint_icons(self) -> None:
        drawing = "done" if self._look == "proved" else "warning"
        self._icon.setPixmap(icon(drawing, self._look, 18).pixmap(18, 18))
        self._close.setIcon(icon("close", "soft", 14))


class Progress(QFrame):
    """How far long work is, and the button that stops it."""

    stopped = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("card")
        self.step, self.rows = label("", "strong"), label("", "soft")
        self.bar = QProgressBar()
        self.bar.setTextVisible(False)
        self.bar.setAccessibleName("Progress")
        self.cancel = button("Cancel", "", "Stop, and leave everything as it was (Esc)")
        self.cancel.clicked.connect(self.stopped)
        column = QVBoxLayout(self)
        column.setContentsMargins(18, 12, 18, 14)
        column.setSpacing(8)
        column.addLayout(row(self.step, self.rows, 1, self.cancel, spacing=12))
        column.addWidget(self.bar)
        self.hide()

    def begin(self, words: str) -> None:
        """Shows that work has begun."""
        self.tell(words, 0, 0)
        self.show()

    def tell(self, step: str, done: int, total: int) -> None:
        """How far it is."""
        self.step.setText(step)
        self.rows.setText(f"{done:,} of {figures.count(total, 'row')}" if total else figures.count(done, "row") if done else "")
        # Qt's bars count in 32 bits; per mille is all the eye can see
        self.bar.setRange(0, 1000 if total else 0)
        if total:
            self.bar.setValue(int(1000 * done / total))
