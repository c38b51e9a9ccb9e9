"""A break as it is found: which item, which party, what was expected, what was told; many of one kind at once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler import texts
from reconciler.records import MISSING

Array = np.ndarray[Any, Any]

AMOUNT, DECIMAL, DATE, WORD = "amount", "decimal", "date", "word"


@dataclass(frozen=True)
class Found:
    """Breaks of one kind and one party, a row each.

    `form` says what `expected` and `found` hold: int64 minor units of the item's currency (amounts and faces), decimals times
    10**12, dates, or words (arrow text). `difference` is found less expected in the same unit, in days for dates; MISSING (or null)
    stands for nothing. `reference` is the party whose account is held against (TERMS; DESK or BROKER where the terms are
    silent). `other` is the row, in the party's own table, of what is repeated; -1 for other kinds.
    """

    kind: str
    party: int
    item_row: Array
    form: str
    expected: Any
    found: Any
    difference: Array
    reference: Array
    other: Array

    def __len__(self) -> int:
        return len(self.item_row)

    def text(self, which: str, digits: Array) -> pa.Array:
        """`expected`, `found` or `difference` as plain text for files; `digits` of the items' currencies."""
        values = getattr(self, which)
        if which == "difference" and self.form in (DATE, WORD):
            return texts.whole(values)
        if self.form == AMOUNT:
            return texts.amounts(values, digits)
        if self.form == DECIMAL:
            return texts.decimals(values, 12)
        return texts.dates(values) if self.form == DATE else values


def found(
    kind: str,
    party: int,
    item_row: Array,
    form: str,
    expected: Any,
    told: Any,
    difference: Array | None = None,
    reference: Array | int = 0,
    other: Array | None = None,
) -> Found:
    """A `Found`; the difference is worked out unless it is given."""
    rows = len(item_row)
    if difference is None:
        difference = np.full(rows, MISSING)
        if form == DATE:
            difference = (told - expected).astype(np.int64)
        elif form != WORD:
            difference = np.where((told == MISSING) | (expected == MISSING), MISSING, told - expected)
    return Found(
        kind, party, np.asarray(item_row, np.int64), form, expected, told, difference,
        np.broadcast_to(np.asarray(reference, np.int64), rows), np.full(rows, -1) if other is None else other,
    )  # fmt: skip


def nothing(rows: Array) -> Array:
    """A column of amounts nobody told."""
    return np.full(len(rows), MISSING)
