"""How a payment is reckoned, line by line: the terms' figures, and beside them what the party that differs told.

The lines come ready from procedures.working; here they are only set in a list, the lines that differ marked.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reconciler.window.sheet import Cell, Sheet
from reconciler.window.static import static_sheet


def working_sheet(lines: Sequence[Any], other: str) -> Sheet:
    """The working as a list. A line has `fact`, `terms`, `told`, `differs` and `note` (a reason or a formula)."""
    rows = []
    for line in lines:
        strong = line.fact in ("Settlement amount", "Amount")
        told = Cell(line.told, glyph="≠", tone="differ", strong=True) if line.differs else Cell(line.told, tone="soft")
        rows.append((Cell(line.fact, line.note, strong=strong), Cell(line.terms, strong=strong), told))
    heads = [("", 230, False, 3), ("Terms", 140, True, 1), (other, 140, True, 1)]
    return static_sheet(heads, rows if other else [row[:2] + (Cell(),) for row in rows], "How this payment is reckoned")
