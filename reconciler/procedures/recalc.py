"""An auditor has a list of trades and wants every figure reckoned anew from the bond's terms, row by row, none left out.

Each row of the list is a bond's terms (columns as in bonds.csv) with `settlement_date`, `face` and one of `price`, `yield` or
`discount`; the list comes back with what they give. Rows that cannot be reckoned keep their place and say why in `problem`. Beyond
the contract a row may tell the index ratio or remaining `factor` in force, and the currency may be blank (two decimals then).

Here `price` is always a price per 100, whatever the bond's quote: rates have columns of their own. A column of the list that has the name
of a result (an auditor's own `accrued`) stays under the name `accrued_told`. Not done: looking anything up for a row that does not tell it.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pyarrow as pa

from reconciler.exports import csv as exports
from reconciler.exports.columns import Column
from reconciler.intake import reading
from reconciler.problems import KnownError
from reconciler.procedures.recalc_figures import RESULTS, figures

INPUTS = ("price", "yield")
"""Results that a row may tell itself: told figures stay as they are, blank ones are filled in place."""


@dataclass(frozen=True)
class Listed:
    """A list as read: its headings, one arrow string column each, and what is wrong with a row's shape (row, sentence)."""

    headings: tuple[str, ...]
    columns: tuple[pa.Array, ...]
    torn: tuple[tuple[int, str], ...]

    def __len__(self) -> int:
        return len(self.columns[0]) if self.columns else 0


@dataclass(frozen=True)
class Outcome:
    """How many rows the list has and how many of them say a problem."""

    rows: int
    problems: int


def read(path: Path) -> Listed:
    """Every row of the list, torn ones too; KnownError when the file cannot be read or lacks a column nothing works without."""
    try:
        data = reading.content(path, path.name)
        reading.check_lines(data, path.name)
        text, _encoding = reading.decode(data, path.name)
    except reading.Unreadable as failure:
        raise KnownError(failure.problem) from None
    rows = _rows(text, path.name)
    headings = tuple(cell.strip() for cell in rows[0]) if rows else ()
    names = [heading.lower() for heading in headings]
    for needed in ("maturity", "settlement_date"):
        if needed not in names:
            raise KnownError(f"{path.name}: has no column {needed}; add it.")
    for name in sorted(set(names) - {""}):
        if names.count(name) > 1:
            raise KnownError(f"{path.name}: has the column {name} twice; remove one.")
    width, torn = len(headings), []
    for number, row in enumerate(rows[1:]):
        if len(row) < width or any(cell.strip() for cell in row[width:]):
            torn.append((number, f"the row has {len(row)} cells where the headings are {width}; correct its commas."))
    squared = [(row + [""] * (width - len(row)))[:width] for row in rows[1:]]
    columns = tuple(pa.array([row[i] for row in squared], pa.string()) for i in range(width))
    return Listed(headings, columns, tuple(torn))


def _rows(text: str, name: str) -> list[list[str]]:
    """The rows from the headings on; a line without any cell is none, a line of blank cells is one."""
    mark = reading.delimiter_of(text[:200_000].splitlines()[:60])
    csv.field_size_limit(reading.LONGEST_LINE)
    try:
        rows = [row for row in csv.reader(io.StringIO(text, newline=""), delimiter=mark) if len(row) > 1 or "".join(row).strip()]
    except csv.Error as error:
        raise KnownError(f"{name}: cannot be split into columns ({error}).") from None
    for number, row in enumerate(rows):
        if "settlement_date" in (cell.strip().lower() for cell in row):
            return rows[number:]
    return rows


def reckoned(listed: Listed) -> tuple[list[Column], int]:
    """The list's own columns and the results, ready to be written, and the number of rows with a problem."""
    told = {heading.lower(): column for heading, column in zip(listed.headings, listed.columns, strict=True)}
    found = figures(told, len(listed), listed.torn)
    columns = [_own(heading, column, found, told) for heading, column in zip(listed.headings, listed.columns, strict=True)]
    present = {column.title.lower() for column in columns}
    columns += [found[name] for name in RESULTS if name not in present]
    return columns, int(np.count_nonzero(found["problem"].values.known()))


def _own(heading: str, column: pa.Array, found: Mapping[str, Column], told: Mapping[str, pa.Array]) -> Column:
    name = heading.lower()
    if name in INPUTS:
        return Column(heading, found[name].kind, found[name].values)
    if name not in RESULTS:
        return Column(heading, "text", column)
    title = f"{heading}_told"
    while title.lower() in told:
        title += "_told"
    return Column(title, "text", column)


def run(source: Path, target: Path) -> Outcome:
    """Reckons a list anew and writes it; KnownError when it cannot be read or written."""
    listed = read(source)
    columns, problems = reckoned(listed)
    _write(target, columns)
    return Outcome(len(listed), problems)


def _write(target: Path, columns: Sequence[Column]) -> None:
    exports.write(target, columns)
