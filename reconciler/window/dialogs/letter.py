"""The drafted letter about a payment, to be read, changed, copied or saved. It is never sent from here."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QComboBox, QFileDialog, QLineEdit, QPlainTextEdit, QWidget

from reconciler.problems import KnownError
from reconciler.window.dialogs.dialog import Dialog
from reconciler.window.widgets import button, label, row

if TYPE_CHECKING:
    from reconciler.window.main import MainWindow

_KINDS = "Mail message (*.eml);;Text (*.txt)"


class LetterDialog(Dialog):
    """One letter, editable; `saved` is where it was last saved."""

    def __init__(self, parent: QWidget | None, day: Any, item_row: int) -> None:
        super().__init__(parent, "Letter about this payment", "A draft to change as you like. Nothing is sent from here.", "Save…", "Close")
        from reconciler.procedures import letter

        self.resize(760, 620)
        self._letter, self._day, self._item_row = letter, day, item_row
        self.saved: Path | None = None
        self.whom = QComboBox()
        self.whom.setAccessibleName("To whom")
        self.subject = QLineEdit()
        self.subject.setAccessibleName("Subject")
        self.body = QPlainTextEdit()
        self.body.setAccessibleName("Letter")
        self.copy_button = button("Copy")
        self.copy_button.setToolTip("Copy the letter to the clipboard")
        self.copy_button.clicked.connect(self.copy)
        for party in letter.parties(day, item_row):
            drafted = letter.draft(day, item_row, party)
            if drafted is not None:
                self.whom.addItem(f"{party}: {drafted.to}", party)
        self.inside.addLayout(row(label("To", "soft"), self.whom, 1, self.copy_button))
        self.inside.addWidget(self.subject)
        self.inside.addWidget(self.body, 1)
        self.said = label("", "soft", wrap=True)
        self.inside.addWidget(self.said)
        self.whom.currentIndexChanged.connect(lambda _index: self._draft())
        self._draft()
        self.body.setFocus()

    def _draft(self) -> None:
        drafted = self._letter.draft(self._day, self._item_row, self.whom.currentData() or "")
        self._drafted = drafted
        self.subject.setText(drafted.subject if drafted else "")
        self.body.setPlainText(drafted.body if drafted else "Everybody who speaks agrees; there is nothing to write about.")
        if self.main_button is not None:
            self.main_button.setEnabled(drafted is not None)

    def written(self) -> str:
        """Subject and letter as they stand."""
        return f"{self.subject.text()}\n\n{self.body.toPlainText()}"

    def copy(self) -> None:
        """Puts the letter on the clipboard."""
        QGuiApplication.clipboard().setText(self.written())
        self.said.setText("Copied.")

    def accept(self) -> None:
        """Asks where to save; the dialog stays open."""
        chosen, _kind = QFileDialog.getSaveFileName(self, "Save the letter", "letter.eml", _KINDS)
        if chosen:
            self.save_to(Path(chosen))

    def save_to(self, path: Path) -> None:
        """Saves the letter as it stands."""
        if self._drafted is None:
            return
        try:
            self._letter.save(replace(self._drafted, subject=self.subject.text(), body=self.body.toPlainText()), path)
        except KnownError as fault:
            self.said.setText(str(fault))
            return
        self.saved = path
        self.said.setText(f"Saved as {path.name}.")


def ask_letter(window: MainWindow) -> None:
    """Opens the letter about the payment the list stands on."""
    page = window.page
    item_row = page.current_item() if page is not None and hasattr(page, "current_item") else -1
    if window.loaded is None or item_row < 0:
        window.banner.tell("Choose a payment first; the letter is about it.")
        return
    LetterDialog(window, window.loaded.day, item_row).exec()
