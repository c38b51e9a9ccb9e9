"""Small pieces that every page is made of: labels in the type scale, cards, rules, notices, buttons that carry an action's key."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QAction, QKeySequence, QResizeEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QToolButton, QVBoxLayout, QWidget

from reconciler.window import tokens

Spacing = tokens.SPACE


def label(text: str = "", look: str = "", wrap: bool = False, selectable: bool = False) -> QLabel:
    """A text in one of the style sheet's looks: title, heading, soft, small, caption, strong, differ."""
    made = QLabel(text)
    made.setTextFormat(Qt.TextFormat.PlainText)
    made.setProperty("look", look)
    made.setWordWrap(wrap)
    if selectable:
        made.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
    return made


class ShortLabel(QLabel):
    """A text on one line that ends in an ellipsis when there is no room; the whole is in its tip."""

    def __init__(self, look: str = "") -> None:
        super().__init__()
        self.setProperty("look", look)
        self.setTextFormat(Qt.TextFormat.PlainText)
        self._whole = ""

    def setText(self, text: str) -> None:
        self._whole = text
        self.setAccessibleName(text)
        self._shorten()

    def minimumSizeHint(self) -> QSize:
        return QSize(40, super().minimumSizeHint().height())

    def sizeHint(self) -> QSize:
        return QSize(self.fontMetrics().horizontalAdvance(self._whole) + 4, super().sizeHint().height())

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._shorten()

    def _shorten(self) -> None:
        short = self.fontMetrics().elidedText(self._whole, Qt.TextElideMode.ElideRight, max(self.width(), 40))
        if short != self.text():
            super().setText(short)
        self.setToolTip(self._whole if short != self._whole else "")


def card(*contents: QWidget, margin: int = 0) -> QFrame:
    """A white frame around its contents, one below the other."""
    frame = QFrame()
    frame.setObjectName("card")
    column = QVBoxLayout(frame)
    column.setContentsMargins(margin, margin, margin, margin)
    column.setSpacing(0)
    for widget in contents:
        column.addWidget(widget)
    return frame


def discard(widget: QWidget) -> None:
    """Takes a widget off the screen at once and deletes it when Qt comes to it."""
    widget.hide()
    widget.setParent(None)
    widget.deleteLater()


def rule() -> QFrame:
    """A hairline."""
    line = QFrame()
    line.setObjectName("rule")
    return line


def button(text: str, look: str = "", tip: str = "") -> QPushButton:
    """A button; `look` is "main" for the one action a place is for, "plain" for a link-like one."""
    made = QPushButton(text)
    made.setProperty("look", look)
    made.setAccessibleName(text)
    if tip:
        made.setToolTip(tip)
        made.setAccessibleDescription(tip)
    return made


def action_button(action: QAction, look: str = "") -> QPushButton:
    """A button that does what an action does and tells its key."""
    made = button(action.text().replace("&", "").rstrip("…").strip(), look, tip_of(action))
    made.clicked.connect(action.trigger)
    action.changed.connect(lambda: made.setEnabled(action.isEnabled()))
    made.setEnabled(action.isEnabled())
    return made


def tip_of(action: QAction) -> str:
    """An action's help with its key: "Find in this list (Ctrl+F)"."""
    keys = action.shortcut().toString(QKeySequence.SequenceFormat.NativeText)
    told = action.statusTip() or action.text().replace("&", "")
    return f"{told} ({keys})" if keys else told


def choice_button(text: str) -> QToolButton:
    """A small button that opens a menu."""
    made = QToolButton()
    made.setText(text)
    made.setProperty("look", "choice")
    made.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
    made.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
    made.setAccessibleName(text)
    return made


def row(*contents: QWidget | int, spacing: int = Spacing["small"]) -> QHBoxLayout:
    """Widgets side by side; a number is a stretch."""
    line = QHBoxLayout()
    line.setContentsMargins(0, 0, 0, 0)
    line.setSpacing(spacing)
    for content in contents:
        if isinstance(content, int):
            line.addStretch(content)
        else:
            line.addWidget(content)
    return line


def restyle(widget: QWidget, **properties: object) -> None:
    """Sets dynamic properties and lets the style sheet look at the widget again."""
    for name, value in properties.items():
        widget.setProperty(name, value)
    widget.style().unpolish(widget)
    widget.style().polish(widget)


class Notice(QFrame):
    """One sentence on a coloured ground, with a glyph: what was found, or that nothing was."""

    def __init__(self, text: str = "", look: str = "") -> None:
        super().__init__()
        self.setObjectName("notice")
        self._first, self._second = label("", "", wrap=True, selectable=True), label("", "", wrap=True, selectable=True)
        self._first.setObjectName("told")
        column = QVBoxLayout(self)
        column.setContentsMargins(14, 10, 14, 10)
        column.setSpacing(2)
        column.addWidget(self._first)
        column.addWidget(self._second)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Maximum)
        self.say(text, look=look)

    def say(self, text: str, more: str = "", look: str = "") -> None:
        """Shows a sentence, and a smaller one below it."""
        self._first.setText(text)
        self._second.setText(more)
        self._second.setVisible(bool(more))
        self.setVisible(bool(text))
        self.setAccessibleName(text)
        restyle(self, look=look)
        restyle(self._first)


class Empty(QWidget):
    """What a place says when it has nothing to show."""

    def __init__(self, title: str, text: str = "", *buttons: QWidget) -> None:
        super().__init__()
        self.title, self.text = label(title, "heading"), label(text, "soft", wrap=True)
        for piece in (self.title, self.text):
            piece.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.text.setFixedWidth(460)
        column = QVBoxLayout(self)
        column.setSpacing(Spacing["small"])
        column.addStretch(2)
        column.addWidget(self.title)
        column.addLayout(row(1, self.text, 1))
        if buttons:
            column.addSpacing(Spacing["medium"])
            column.addLayout(row(1, *buttons, 1))
        column.addStretch(3)

    def say(self, title: str, text: str = "") -> None:
        """Changes what is said."""
        self.title.setText(title)
        self.text.setText(text)
        self.text.setVisible(bool(text))
