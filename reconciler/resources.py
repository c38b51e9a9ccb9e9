"""Shipped tables, layouts and icons are found here and nowhere else.

In a checkout they lie in `resources/` beside the package; in an installed wheel the same folder lies inside it.
"""

from __future__ import annotations

import csv
import functools
from pathlib import Path
from typing import Any

_BESIDE = Path(__file__).resolve().parent.parent / "resources"
_INSIDE = Path(__file__).resolve().parent / "_resources"


def folder() -> Path:
    """The folder of shipped data."""
    return _BESIDE if (_BESIDE / "tables").is_dir() else _INSIDE


@functools.cache
def table(name: str) -> tuple[dict[str, str], ...]:
    """The rows of `resources/tables/NAME.csv` as dictionaries of text, in file order; lines after a # are notes."""
    with (folder() / "tables" / f"{name}.csv").open(encoding="utf-8", newline="") as lines:
        return tuple(csv.DictReader(line for line in lines if not line.startswith("#")))


@functools.cache
def arrays(name: str) -> dict[str, Any]:
    """The numpy arrays of `resources/tables/NAME.npz` by name; empty while that file is not there (being made)."""
    # numpy is not imported at the top: listing and starting need no arrays.
    import numpy as np

    file = folder() / "tables" / f"{name}.npz"
    if not file.exists():
        return {}
    with np.load(file, allow_pickle=False) as packed:
        return {key: packed[key] for key in packed.files}
