"""From a folder and a day to lists ready to show: everything that takes time, done in a job.

`load` runs the morning and prepares the lists; the window only puts them up. Nothing the window shows already is touched until
the job has succeeded, so that a cancelled or failed load leaves all as before.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from reconciler.problems import Problem
from reconciler.records import Table
from reconciler.window.jobs import Progress
from reconciler.window.lists import ahead_sheet, bonds_sheet, files_sheet, rejects_sheet
from reconciler.window.payments import payments_sheet
from reconciler.window.sheet import Sheet


@dataclass(frozen=True)
class Loaded:
    """A morning as the window shows it."""

    folder: Path | None
    day: Any
    overview: Any
    ahead: Any
    bonds: Table
    sheets: dict[str, Sheet] = field(default_factory=dict)

    @property
    def searching(self) -> bool:
        """True while the causes of the breaks are still searched for."""
        return getattr(self.day, "explanations", None) is None

    def give_up_searching(self) -> None:
        """Says of breaks without a cause that they are open, since nobody searches any more."""
        for key in ("breaks", "due", "agreed"):
            self.sheets[key].data.searching = False

    @property
    def problems(self) -> tuple[Problem, ...]:
        """What was wrong with files and folder as a whole."""
        return tuple(self.day.source.problems)


def load(folder: Path, date: datetime.date, progress: Progress, early: Callable[[Loaded], None] | None = None) -> Loaded:
    """Runs the morning of a folder and prepares its lists; raises KnownError when nothing can be reconciled.

    `early` is given the lists before the causes are known: looking at the breaks need not wait for the search.
    """
    from reconciler import settings
    from reconciler.procedures import ahead, morning

    # asked for by the way, so that a cancelled load stops at the next step
    told = settings.of_user()
    rows = 0

    def tell(step: str, done: int, every: int) -> None:
        nonlocal rows
        if every:
            progress(f"{step}  ·  step {done + 1} of {every}", rows, 0)
        else:
            rows += done
            progress(step, rows, 0)

    layouts = (settings.user_folder() / "layouts",)
    coming: list[Any] = []

    def meanwhile(day: Any) -> None:
        coming.append(ahead.ahead(day))
        if early is not None:
            early(arrange(folder, day, coming[0]))

    day = morning.run(folder, date, settings=told, progress=tell, layouts=layouts, meanwhile=meanwhile)
    return arrange(folder, day, coming[0])


def arrange(folder: Path | None, day: Any, coming: Any) -> Loaded:
    """The lists of a day (procedures.morning.Day) and of what lies ahead (procedures.ahead.Ahead)."""
    from reconciler.procedures.bondlist import bondlist
    from reconciler.procedures.overview import digits_of, overview

    seen = overview(day)
    year = int(str(np.datetime64(day.date, "Y")))
    bonds = bondlist(day)
    sheets = {
        "breaks": payments_sheet(day, seen, ("break",)),
        "due": payments_sheet(day, seen, ("due",)),
        "agreed": payments_sheet(day, seen, ("agrees", "within tolerance")),
        "bonds": bonds_sheet(bonds),
        "files": files_sheet(day.source.totals, digits_of(day.source.totals["currency"]), day.source.files),
        "rejects": rejects_sheet(day.source.rejects),
        "ahead": ahead_sheet(coming.payments, coming.digits, year, day.source.bonds),
    }
    return Loaded(folder, day, seen, coming, bonds, sheets)


def prepare(loaded: Loaded, progress: Progress) -> None:
    """Ranks and indexes every list, so that later clicks do not wait; runs in a job of its own after the first paint."""
    for sheet in loaded.sheets.values():
        progress("Preparing the lists", 0, 0)
        sheet.prepare()


def date_of_folder(folder: Path) -> datetime.date | None:
    """The day a folder's name tells, as 2026-03-31 or 20260331."""
    found = re.search(r"(\d{4})-?(\d{2})-?(\d{2})", folder.name)
    try:
        return datetime.date(*(int(part) for part in found.groups())) if found else None
    except ValueError:
        return None


def sample_mornings() -> list[Path]:
    """The invented mornings that come with the program, the earliest first; empty when they were not installed."""
    from reconciler import resources

    for place in (resources.folder().parent / "sample_tickets", resources.folder() / "sample_tickets"):
        if place.is_dir():
            return sorted(inside for inside in place.iterdir() if inside.is_dir() and date_of_folder(inside))
    return []
