"""Small lists made of ready cells (the four accounts, the working, rejects) use the same view as the large ones."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from reconciler.records import Words
from reconciler.window.sheet import Cell, Column, Fact, Sheet


def static_sheet(heads: Sequence[tuple[str, int, bool, int]], rows: Sequence[Sequence[Cell]], help_text: str = "") -> Sheet:
    """A sheet of ready cells; heads are (title, width, right-aligned, stretch); width 0 is as wide as what it holds."""
    lines = [tuple(line) for line in rows]

    def show(number: int):  # type: ignore[no-untyped-def]
        return lambda _data, at: [lines[i][number] for i in at.tolist()]

    def rank(number: int):  # type: ignore[no-untyped-def]
        return lambda _data: Words.of([line[number].text for line in lines]).rank().astype(np.int64)

    def told(number: int):  # type: ignore[no-untyped-def]
        return lambda _data, at: Words.of([_copied(lines[i][number]) for i in at.tolist()])

    columns = [
        Column(f"column{i}", title, help_text or title, show(i), rank(i), width or 40, right=right, stretch=stretch,
               fit=not width)
        for i, (title, width, right, stretch) in enumerate(heads)
    ]
    facts = [Fact(title or "fact", "text", told(i)) for i, (title, *_rest) in enumerate(heads)]
    return Sheet(None, len(lines), columns, facts)


def _copied(cell: Cell) -> str:
    return cell.text.replace("\u2212", "-")
