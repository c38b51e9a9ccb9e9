"""What the window remembers from one start to the next, among it the mornings opened before, the last one first."""

from __future__ import annotations

import datetime
from pathlib import Path

from PySide6.QtCore import QSettings

NAME = "Reconciler"
_KEPT = 8


def settings() -> QSettings:
    """Where the window remembers things, in our own name."""
    return QSettings(QSettings.Format.IniFormat, QSettings.Scope.UserScope, NAME, NAME)


def mornings(kept: QSettings) -> list[tuple[Path, datetime.date]]:
    """Folder and day of each morning opened before."""
    found = []
    for number in range(kept.beginReadArray("recent")):
        kept.setArrayIndex(number)
        try:
            day = datetime.date.fromisoformat(str(kept.value("date", "")))
        except ValueError:
            continue
        found.append((Path(str(kept.value("folder", ""))), day))
    kept.endArray()
    return found


def remember(kept: QSettings, folder: Path, date: str) -> None:
    """Puts a morning in front of those opened before."""
    day = datetime.date.fromisoformat(date)
    list_ = [(folder, day), *(one for one in mornings(kept) if one != (folder, day))][:_KEPT]
    kept.beginWriteArray("recent", len(list_))
    for number, (path, when) in enumerate(list_):
        kept.setArrayIndex(number)
        kept.setValue("folder", str(path))
        kept.setValue("date", when.isoformat())
    kept.endArray()
