"""A morning is a folder of files; read whole, with every row accounted for.

Our own files first (bonds, then what refers to them), then each broker's confirmations by its layout or by its headings. A file whose
meaning is not certain is reported and left unread, with its rows counted as rejected; the rest of the morning goes on. Only when
nothing could be reconciled at all (no folder, no bonds, no tickets) does reading stop.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np

from reconciler import resources
from reconciler.intake import confirmations, identifiers, layouts, own
from reconciler.intake.layouts import Layout
from reconciler.intake.reading import Unreadable
from reconciler.problems import KnownError, Problem
from reconciler.records import (
    CASH,
    CLOSINGS,
    CONFIRMATIONS,
    FACTORS,
    HOLDINGS,
    RATES,
    REJECTS,
    TOTALS,
    Table,
    Words,
    concat,
    table,
)

Progress = Callable[[str, int], None]


@dataclass(frozen=True)
class File:
    """One file of the morning, for the page of files."""

    name: str
    sha256: str
    size: int
    rows: int
    encoding: str = ""
    delimiter: str = ""
    layout: str = ""
    broker: str = ""
    columns: tuple[tuple[str, str], ...] = ()
    """Our fact and the file's heading for it, as recognised."""


@dataclass(frozen=True)
class Morning:
    """Everything that was read: the tables of records, every reject, and the totals that tie them to the files."""

    folder: Path
    bonds: Table
    tickets: Table
    confirmations: Table
    holdings: Table
    cash: Table
    rates: Table
    factors: Table
    closings: Table
    rejects: Table
    totals: Table
    problems: tuple[Problem, ...]
    files: tuple[File, ...]
    extras: dict[str, dict[str, Any]]


class _Desk:
    """What has been read so far."""

    def __init__(self, progress: Progress | None) -> None:
        self.rejects: list[Problem] = []
        self.problems: list[Problem] = []
        self.totals: list[Table] = []
        self.files: list[File] = []
        self.extras: dict[str, dict[str, Any]] = {}
        self.progress = progress or (lambda text, rows: None)

    def keep(self, sheet: Any, extras: dict[str, Any], notes: Sequence[Problem] = (), style: Any = None) -> None:
        raw = sheet.raw
        self.rejects += sheet.faults
        self.problems += notes
        self.totals.append(sheet.totals())
        if extras:
            self.extras[raw.file] = extras
        read = File(raw.file, "", 0, len(raw) + len(raw.torn) + len(raw.footer), raw.encoding, raw.delimiter)
        if style is not None:
            columns = tuple(sorted((fact, raw.headings[place]) for fact, place in style.columns.items()))
            read = replace(read, layout=style.layout.name or "by its headings", broker=style.broker, columns=columns)
        self.files.append(read)
        self.progress(raw.file, len(raw))

    def unread(self, failure: Unreadable, path: Path) -> None:
        """A file left unread: its lines count as read and rejected, so that they are not lost."""
        problem = failure.problem
        self.problems.append(problem)
        self.rejects.append(problem)
        rows = _rough_rows(path, problem)
        self.files.append(File(problem.file, "", 0, rows, layout="not read"))
        zero, count = np.zeros(1, np.int64), np.array([rows])
        self.totals.append(table(TOTALS, file=[problem.file], currency=[""], rows_read=count, rows_used=zero, rows_rejected=count,
                                 rows_set_aside=zero, amount_read=zero, amount_used=zero, amount_rejected=zero, amount_set_aside=zero))  # fmt: skip


def _rough_rows(path: Path, problem: Problem) -> int:
    """Lines below the headings that are not blank; all but one where the headings are not known."""
    if problem.code in ("binary-file", "empty-file", "file-vanished", "file-locked", "long-line", "header-only"):
        return 0
    try:
        lines = path.read_bytes().split(b"\n")
    except OSError:
        return 0
    known = problem.code in ("missing-column", "ambiguous-column", "ambiguous-decimal", "ambiguous-dates", "column-twice")
    below = lines[problem.line :] if known and problem.line else lines[1:]
    return sum(1 for line in below if line.strip(b" \r\t;,|"))


def read(folder: Path, progress: Progress | None = None, layouts_from: Sequence[Path] = ()) -> Morning:
    """Reads a morning folder. Raises KnownError when nothing could be reconciled from it."""
    folder = Path(folder)
    if not folder.is_dir():
        raise KnownError(f"There is no folder {folder.name or folder}: check the name.")
    desk = _Desk(progress)
    bonds = _own(desk, folder / "bonds.csv", own.bonds, None)
    if bonds is None:
        raise KnownError(*(desk.problems or [Problem("bonds.csv", 0, "", "", "is missing from the folder; without it nothing can be checked.", "missing-file")]))  # fmt: skip
    tickets = _own(desk, folder / "tickets.csv", lambda path: own.tickets(path, bonds), None)
    if tickets is None:
        raise KnownError(*(desk.problems or [Problem("tickets.csv", 0, "", "", "is missing from the folder; without it nothing can be checked.", "missing-file")]))  # fmt: skip
    holdings = _own(desk, folder / "holdings.csv", lambda path: own.holdings(path, bonds), table(HOLDINGS))
    cash = _own(desk, folder / "cash.csv", lambda path: own.cash(path, bonds), table(CASH))
    rates = _own(desk, folder / "rates.csv", own.rates, table(RATES))
    factors = _own(desk, folder / "factors.csv", own.factors, table(FACTORS))
    closings = _own(desk, folder / "closings.csv", own.closings, table(CLOSINGS))
    same = identifiers.equivalents(bonds["bond"].values.to_pylist())
    tickets, holdings, cash, rates, factors = (_known_bonds(t, bonds, same) for t in (tickets, holdings, cash, rates, factors))
    confirmed = _confirmations(desk, folder, bonds, tickets, same, layouts_from)
    return Morning(
        folder, bonds, tickets, confirmed, holdings, cash, rates, factors, closings,
        _rejects(desk.rejects), _totals(desk.totals), tuple(sorted(set(desk.problems))), _hashed(desk.files, folder), desk.extras,
    )  # fmt: skip


def read_bonds(path: Path) -> tuple[Table, list[Problem]]:
    """A bonds file alone; raises KnownError when it cannot be read."""
    try:
        found, sheet = own.bonds(Path(path))
    except Unreadable as failure:
        raise KnownError(failure.problem) from None
    return found, sheet.sheet.faults


def _own(desk: _Desk, path: Path, reader: Callable[[Path], tuple[Table, own.Own]], otherwise: Table | None) -> Any:
    if not path.exists():
        return otherwise
    try:
        found, read_in = reader(path)
    except Unreadable as failure:
        if failure.problem.code == "header-only" and otherwise is None and path.name == "tickets.csv":
            desk.problems.append(failure.problem)
            return None
        desk.unread(failure, path)
        return otherwise
    desk.keep(read_in.sheet, read_in.extras, read_in.notes)
    return found


def _known_bonds(told: Table, bonds: Table, same: dict[str, str]) -> Table:
    """The table with other people's identifiers turned into those of bonds.csv, where exactly one bond answers."""
    texts = told["bond"].values.to_pylist()
    known = set(bonds["bond"].values.to_pylist())
    better = [text if text in known else same.get(text, text) for text in texts]
    if better == texts:
        return told
    words = told["bond"]
    return told.with_columns(bond=Words.of([better[code] if code >= 0 else "" for code in words.codes.tolist()]))


def shelf(folder: Path, layouts_from: Sequence[Path], problems: list[Problem]) -> list[Layout]:
    """Every layout within reach: the morning's own first, then the user's, then the shipped ones."""
    found: list[Layout] = []
    for place in (folder / "layouts", *layouts_from, resources.folder() / "layouts"):
        for path in sorted(place.glob("*.toml")) if place.is_dir() else []:
            layout, faults = layouts.from_toml(path, f"layouts/{path.name}")
            problems += faults
            if layout is not None:
                found.append(layout)
    return found


def _confirmations(
    desk: _Desk, folder: Path, bonds: Table, tickets: Table, same: dict[str, str], layouts_from: Sequence[Path]
) -> Table:
    known = confirmations.Known(tuple(sorted(set(tickets["broker"].values.to_pylist()))), tickets, bonds, same)
    stock = shelf(folder, layouts_from, desk.problems)
    read_in: list[tuple[Table, Any, Any, dict[str, Any]]] = []
    place = folder / "confirmations"
    for path in sorted(place.iterdir()) if place.is_dir() else []:
        if path.name.startswith(".") or path.is_dir():
            continue
        if path.suffix.lower() not in (".csv", ".txt", ".tsv"):
            reason = "is not a CSV file and was not read; export it as CSV."
            desk.problems.append(Problem(f"confirmations/{path.name}", 0, "", "", reason, "not-csv"))
            continue
        try:
            found, sheet, style, extras = confirmations.read(path, f"confirmations/{path.name}", known, stock)
        except Unreadable as failure:
            desk.unread(failure, path)
            continue
        read_in.append((found, sheet, style, extras))
    if not read_in:
        return table(CONFIRMATIONS)
    standing = confirmations.in_force([found for found, *_rest in read_in], [sheet for _found, sheet, *_rest in read_in])
    for _found, sheet, style, extras in read_in:
        desk.keep(sheet, extras, (), style)
    return standing


def _rejects(problems: Sequence[Problem]) -> Table:
    rows = sorted(set(problems))
    return table(
        REJECTS, file=[p.file for p in rows], row=[p.line for p in rows], column=[p.column for p in rows],
        value=[p.value for p in rows], reason=[p.reason for p in rows], code=[p.code for p in rows],
    )  # fmt: skip


def _totals(tables: Sequence[Table]) -> Table:
    whole = concat([table(TOTALS), *tables])
    return whole.take(np.lexsort((whole["currency"].rank(), whole["file"].rank())))


def _hashed(files: Sequence[File], folder: Path) -> tuple[File, ...]:
    out = []
    for file in files:
        path = folder / file.name
        try:
            with path.open("rb") as data:
                out.append(replace(file, sha256=hashlib.file_digest(data, "sha256").hexdigest(), size=path.stat().st_size))
        except OSError:
            out.append(file)
    return tuple(out)
