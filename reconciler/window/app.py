"""The way in from the door: starts Qt, shows the window at once, and loads the morning beside it."""

from __future__ import annotations

import contextlib
import datetime
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QApplication

from reconciler import __version__

if TYPE_CHECKING:
    from reconciler.window.main import MainWindow


def run(folder: Path | None = None, date: datetime.date | None = None) -> int:
    """Opens the window, on a folder if one is given; returns the exit code."""
    application = QApplication.instance() or QApplication(sys.argv[:1])
    assert isinstance(application, QApplication)
    application.setApplicationName("Reconciler")
    application.setApplicationVersion(__version__)
    from reconciler.window.main import MainWindow
    from reconciler.window.recent import settings
    from reconciler.window.theme import theme

    theme().start(str(settings().value("window/colours", "system")))
    window = MainWindow()
    sys.excepthook = lambda kind, fault, trace: _unexpected(window, fault)
    window.show()
    window.open_at_start(folder, date)
    return int(application.exec())


def _unexpected(window: MainWindow, fault: BaseException) -> None:
    """A fault of ours in the interface: said in the window, kept in a file for the maker."""
    import traceback

    import platformdirs

    if isinstance(fault, KeyboardInterrupt):
        window.close()
        return
    place = Path(platformdirs.user_log_dir("Reconciler", appauthor=False, ensure_exists=True)) / "faults.txt"
    with contextlib.suppress(OSError), place.open("a", encoding="utf-8") as log:
        log.write("".join(traceback.format_exception(fault)) + "\n")
    window.say_failed("Something did not work.", fault)
