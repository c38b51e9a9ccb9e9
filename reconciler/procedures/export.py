"""A list is handed to somebody who does not have this program: saved as CSV or as a workbook, by the ending of the file's name."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from reconciler.exports import csv, xlsx
from reconciler.exports.columns import KINDS, Column, Progress
from reconciler.problems import KnownError

__all__ = ["KINDS", "Column", "Progress", "save"]


def save(path: Path, columns: Sequence[Column], title: str = "", progress: Progress | None = None) -> None:
    """Saves the columns as `.csv` (safe to open in a spreadsheet) or `.xlsx`; raises KnownError when that cannot be done."""
    ending = path.suffix.lower()
    if ending == ".csv":
        csv.write(path, columns, safe=True, progress=progress)
    elif ending == ".xlsx":
        xlsx.write(path, columns, title, progress)
    else:
        raise KnownError(f"{path.name} cannot be saved: its name must end in .csv or .xlsx.")
