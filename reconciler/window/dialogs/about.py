"""What the program does, and what it does not."""

from __future__ import annotations

from PySide6.QtWidgets import QWidget

from reconciler import __version__
from reconciler.window.dialogs.dialog import Dialog
from reconciler.window.widgets import label

_TEXT = (
    "Each morning Reconciler holds what each broker confirmed, what the desk booked and what the bank paid against what the "
    "bond's own terms say must be paid, and lists the differences with their reasons."
)
_CAUTION = (
    "It flags differences. It moves no money and gives no advice: the offering documents, the market's rules and the firm's own "
    "controls decide."
)


class About(Dialog):
    """Name, version, purpose, caution."""

    def __init__(self, parent: QWidget | None) -> None:
        super().__init__(parent, f"Reconciler {__version__}", leave="Close")
        self.setMinimumWidth(480)
        self.inside.addWidget(label(_TEXT, "", wrap=True))
        self.inside.addWidget(label(_CAUTION, "soft", wrap=True))
