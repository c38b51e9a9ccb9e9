"""One file on its way in: which of its rows are used, set aside or rejected, and why; so that rows and money tie out.

Every row of a file ends in exactly one of three places. A rejected row is named with the first column that is wrong (and any others);
a row set aside is a total, or one that a later row of the same ticket replaced.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import pyarrow as pa

from reconciler.intake.cells import Cells, trimmed
from reconciler.intake.reading import Raw
from reconciler.money import MISSING
from reconciler.problems import Problem
from reconciler.records import TOTALS, Table, Words, table

USED, REJECTED, SET_ASIDE = 0, 1, 2


@dataclass
class Sheet:
    """A file being read: `fate` per row, faults found so far, and the row's money once known."""

    raw: Raw
    fate: np.ndarray = field(init=False)
    faults: list[Problem] = field(default_factory=list)
    amount: np.ndarray = field(init=False)
    currency: Words = field(init=False)

    def __post_init__(self) -> None:
        self.fate = np.zeros(len(self.raw), np.int8)
        self.amount = np.zeros(len(self.raw), np.int64)
        self.currency = Words.blank(len(self.raw))
        width = len(self.raw.headings)
        for line, count in self.raw.torn:
            reason = f"has {count} fields where the headings have {width}; correct the row."
            self.faults.append(Problem(self.raw.file, line, "", "", reason, "torn-row"))

    def column(self, place: int | None) -> pa.Array:
        """A column's texts, blank where the file has no such column."""
        if place is None:
            return pa.array([""] * len(self.raw)) if len(self.raw) < 1000 else pa.repeat("", len(self.raw))
        return self.raw.columns[place]

    def heading(self, place: int | None, otherwise: str) -> str:
        """The heading as the file has it."""
        return otherwise if place is None else self.raw.headings[place]

    def take(self, cells: Cells, place: int | None, name: str, code: str) -> np.ndarray:
        """A typed column; its bad rows are rejected."""
        self.reject(cells.bad, place, name, cells.reason, code)
        return cells.values

    def reject(self, bad: np.ndarray, place: int | None, name: str, reason: str, code: str) -> None:
        """Rejects the rows where `bad` holds, quoting the column's text."""
        rows = np.flatnonzero(bad & (self.fate != SET_ASIDE))
        if not len(rows):
            return
        texts = trimmed(self.column(place).take(pa.array(rows))).to_pylist()
        heading = self.heading(place, name)
        for row, text in zip(rows.tolist(), texts, strict=True):
            self.faults.append(Problem(self.raw.file, int(self.raw.lines[row]), heading, text, reason, code))
        self.fate[rows] = REJECTED

    def set_aside(self, rows: np.ndarray) -> None:
        """Sets rows aside that are not rejected."""
        mask = np.zeros(len(self.fate), np.bool_)
        mask[rows] = True
        self.fate[mask & (self.fate == USED)] = SET_ASIDE

    def text(self, place: int | None) -> Words:
        """A text column without spaces around."""
        return Words.from_arrow(trimmed(self.column(place)))

    def used(self) -> np.ndarray:
        """Row numbers of the rows in use."""
        return np.flatnonzero(self.fate == USED)

    def places(self) -> dict[str, object]:
        """The columns `file` and `line` of every row."""
        return {"file": Words.constant(self.raw.file, len(self.raw)), "line": self.raw.lines}

    def totals(self) -> Table:
        """One row per currency: rows and money read, used, rejected and set aside."""
        codes = self.currency.codes + 1
        kinds = len(self.currency.values) + 1
        torn, footer = len(self.raw.torn), len(self.raw.footer)
        money = np.where(self.amount == MISSING, 0, self.amount)
        rows = np.zeros((3, kinds), np.int64)
        amounts = np.zeros((3, kinds), np.int64)
        np.add.at(rows, (self.fate, codes), 1)
        np.add.at(amounts, (self.fate, codes), money)
        rows[REJECTED, 0] += torn
        rows[SET_ASIDE, 0] += footer
        present = np.flatnonzero(rows.sum(axis=0))
        names = ["", *self.currency.values.to_pylist()]
        return table(
            TOTALS,
            file=[self.raw.file] * len(present),
            currency=[names[i] for i in present],
            rows_read=rows.sum(axis=0)[present], rows_used=rows[USED][present], rows_rejected=rows[REJECTED][present],
            rows_set_aside=rows[SET_ASIDE][present],
            amount_read=amounts.sum(axis=0)[present], amount_used=amounts[USED][present],
            amount_rejected=amounts[REJECTED][present], amount_set_aside=amounts[SET_ASIDE][present],
        )  # fmt: skip
