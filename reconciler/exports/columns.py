"""What leaves the house is a list of columns, each with a title, a kind and its values; every format writes the same columns.

Kinds: "text" (`Words` or arrow strings), "date" (datetime64[D]), "amount" (int64 minor units with the digits of each row's currency),
"decimal" (int64, times 10**12), "count" and "days" (int64). MISSING, NaT and blank leave the cell empty.
"""

from __future__ import annotations

import os
import tempfile
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler import texts
from reconciler.problems import KnownError
from reconciler.records import Words

KINDS = ("text", "date", "amount", "decimal", "count", "days")
DECIMAL_PLACES = 12

Progress = Callable[[int], None]
"""Told how many rows are written; may raise to cancel, and then no file is left behind."""


@dataclass(frozen=True)
class Column:
    """One column to write. `digits` (int64 a row, or one number) is needed for amounts only."""

    title: str
    kind: str
    values: Any
    digits: Any = None

    def __len__(self) -> int:
        return len(self.values)

    def part(self, first: int, last: int) -> Column:
        """The rows from `first` up to `last`."""
        digits = self.digits if self.digits is None or np.ndim(self.digits) == 0 else self.digits[first:last]
        values = self.values
        values = Words(values.codes[first:last], values.values) if isinstance(values, Words) else values[first:last]
        return Column(self.title, self.kind, values, digits)

    def texts(self) -> pa.Array:
        """Every row as plain text, null where there is nothing."""
        if self.kind == "text":
            return self.values.to_arrow() if isinstance(self.values, Words) else self.values
        if self.kind == "date":
            return texts.dates(self.values)
        if self.kind == "amount":
            return texts.amounts(self.values, 2 if self.digits is None else self.digits)
        if self.kind == "decimal":
            return texts.decimals(self.values, DECIMAL_PLACES)
        return texts.whole(self.values)


def rows_of(columns: Sequence[Column]) -> int:
    """How many rows the columns have."""
    return len(columns[0]) if columns else 0


@contextmanager
def put_in_place(path: Path) -> Iterator[Path]:
    """A file beside `path` to write to, which takes its place when all went well and is removed otherwise.

    Raises KnownError when the place cannot be written.
    """
    try:
        handle, name = tempfile.mkstemp(prefix=f".{path.name}.", suffix=".part", dir=path.parent)
    except OSError as fault:
        raise _cannot_write(path, fault) from fault
    os.close(handle)
    beside = Path(name)
    try:
        yield beside
        # mkstemp makes files only the owner may read; a list is handed on to others
        beside.chmod(0o666 & ~_umask())
        beside.replace(path)
    except OSError as fault:
        raise _cannot_write(path, fault) from fault
    finally:
        beside.unlink(missing_ok=True)


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


def _cannot_write(path: Path, fault: OSError) -> KnownError:
    return KnownError(f"{path.name} cannot be written to {path.parent}: {fault.strerror or fault}. Close it where it is open, or "
                      "choose another folder.")  # fmt: skip
