"""Before a morning is loaded the window says what it is for and how to begin; while one loads, that it does."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QVBoxLayout, QWidget

from reconciler.window.theme import icon
from reconciler.window.widgets import label, row


class Welcome(QWidget):
    """The empty start."""

    def __init__(self, *buttons: QWidget) -> None:
        super().__init__()
        self._picture = label()
        self._picture.setPixmap(icon("reconciler", size=64).pixmap(64, 64))
        self._title = label("", "title")
        self._text = label("", "soft", wrap=True)
        self._text.setFixedWidth(520)
        self._buttons = QWidget()
        self._buttons.setLayout(row(1, *buttons, 1, spacing=12))
        column = QVBoxLayout(self)
        column.setSpacing(12)
        column.addStretch(3)
        for piece in (self._picture, self._title, self._text):
            piece.setAlignment(Qt.AlignmentFlag.AlignCenter)
            column.addLayout(row(1, piece, 1))
        column.addSpacing(8)
        column.addWidget(self._buttons)
        column.addStretch(4)
        self.invite()

    def invite(self) -> None:
        """How to begin."""
        self._title.setText("Open a morning")
        self._text.setText(
            "Choose the folder with this morning's files: bonds, tickets, holdings, cash, and the brokers' confirmations. "
            "You will see which payments do not agree between the bond's terms, broker, desk and bank, and why."
        )
        self._buttons.show()

    def loading(self, name: str) -> None:
        """A morning is on its way."""
        self._title.setText("Reading the morning")
        self._text.setText(f"The files in {name} are read and held against the bonds' terms.")
        self._buttons.hide()
