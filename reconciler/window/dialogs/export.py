"""What a list shows, as shown and in its order, is saved as CSV or XLSX beside the window's own work."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtWidgets import QFileDialog

from reconciler.window import figures, jobs
from reconciler.window.jobs import Progress
from reconciler.window.sheet import Sheet

if TYPE_CHECKING:
    from reconciler.window.main import MainWindow

_KINDS = {".csv": "CSV, for any program (*.csv)", ".xlsx": "XLSX, a spreadsheet (*.xlsx)"}


def ask_export(window: MainWindow) -> None:
    """Asks where to save the list of the shown page, and saves it."""
    page = window.page
    if page is None or page.sheet is None or window.loaded is None:
        return
    name = f"{page.key}-{figures.iso(window.loaded.day.date)}.xlsx"
    chosen, kind = QFileDialog.getSaveFileName(window, "Export what this list shows", name, ";;".join(reversed(_KINDS.values())))
    if chosen:
        path = Path(chosen)
        if path.suffix.lower() not in _KINDS:
            path = path.with_suffix(next(suffix for suffix, words in _KINDS.items() if words == kind) if kind else ".xlsx")
        export_to(window, path)


def export_to(window: MainWindow, path: Path) -> jobs.Job | None:
    """Saves the list of the shown page as a job; says so when it is done."""
    page = window.page
    if page is None or page.sheet is None or window.loaded is None:
        return None
    sheet, rows = page.sheet, page.sheet.shown.copy()
    title = f"{page.header.title.text()}, {figures.long_date(window.loaded.day.date)}"
    job = jobs.Job(lambda progress: save(sheet, rows, path, title, progress), "export", window)
    job.succeeded.connect(lambda _nothing: window.banner.tell(f"{figures.count(len(rows), page.noun)} saved as {path.name}."))
    job.failed.connect(lambda fault: window.say_failed(f"{path.name} could not be saved.", fault))
    return window.run(job, f"Saving {path.name}")


def save(sheet: Sheet, rows: np.ndarray, path: Path, title: str, progress: Progress) -> None:
    """Hands a list's columns to the export; runs in a job."""
    from reconciler.procedures import export

    columns = []
    for fact in sheet.facts:
        digits = fact.digits(sheet.data, rows) if fact.digits is not None else None
        columns.append(export.Column(fact.title, fact.kind, fact.take(sheet.data, rows), digits))
    progress(f"Saving {path.name}", 0, len(rows))
    export.save(path, columns, title, lambda done: progress(f"Saving {path.name}", done, len(rows)))
