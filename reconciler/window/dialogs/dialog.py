"""What every dialog has: a heading, a sentence, its contents, and buttons that end it. Escape always leaves it."""

from __future__ import annotations

from PySide6.QtWidgets import QDialog, QPushButton, QVBoxLayout, QWidget

from reconciler.window.widgets import Spacing, button, label, row


class Dialog(QDialog):
    """A dialog with a heading and one main button."""

    def __init__(self, parent: QWidget | None, heading: str, text: str = "", main: str = "", leave: str = "Cancel") -> None:
        super().__init__(parent)
        self.setWindowTitle(heading)
        self.setModal(True)
        self.heading, self.text = label(heading, "heading"), label(text, "soft", wrap=True)
        self.text.setVisible(bool(text))
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(24, 20, 24, 20)
        self.column.setSpacing(Spacing["medium"])
        self.column.addWidget(self.heading)
        self.column.addWidget(self.text)
        self.inside = QVBoxLayout()
        self.inside.setSpacing(Spacing["medium"])
        self.column.addLayout(self.inside, 1)
        self.main_button: QPushButton | None = None
        self.leave_button = button(leave)
        self.leave_button.clicked.connect(self.reject)
        buttons: list[QWidget | int] = [1, self.leave_button]
        if main:
            self.main_button = button(main, "main")
            self.main_button.setDefault(True)
            self.main_button.clicked.connect(self.accept)
            buttons.append(self.main_button)
        else:
            self.leave_button.setDefault(True)
        self.column.addLayout(row(*buttons))
