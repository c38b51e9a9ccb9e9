"""The way in from the door: starts Qt, shows the window at once, and loads the morning beside it."""

from __future__ import annotations

import datetime
import sys
from pathlib import Path

from PySide6.QtWidgets import QApplication

from reconciler import __version__


def run(folder: Path | None = None, date: datetime.date | None = None) -> int:
    """Opens the window, on a folder if one is given; returns the exit code."""
    application = QApplication.instance() or QApplication(sys.argv[:1])
    assert isinstance(application, QApplication)
    application.setApplicationName("Reconciler")
    application.setApplicationVersion(__version__)
    from reconciler.window.main import MainWindow, settings
    from reconciler.window.theme import theme

    theme().start(str(settings().value("window/colours", "system")))
    window = MainWindow()
    window.show()
    window.open_at_start(folder, date)
    return int(application.exec())
