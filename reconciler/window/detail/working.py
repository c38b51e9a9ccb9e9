"""How a payment is reckoned, line by line: the terms' figures, and beside them what the parties that differ told.

The lines come ready from procedures.working; here they are only set in a list, the lines that differ marked. Parties that agree
in everything are left out: their figures are those of the terms.
"""

from __future__ import annotations

from collections.abc import Collection
from typing import Any

from reconciler.records import PARTIES
from reconciler.window import figures
from reconciler.window.sheet import Cell, Sheet
from reconciler.window.static import static_sheet

_SUMS = ("Settlement amount", "Payment amount", "Amount", "Coupon", "Redemption")
_IN_NOTES = ("Side", "Face", "Price")
"""Facts the principal's note tells too; they have a line of their own only when somebody differs."""
_HEADS = {"Broker": "Broker as confirmed", "Desk": "Desk as booked", "Bank": "Bank as paid"}


def working_sheet(told: Any, broken: Collection[str]) -> Sheet:
    """The working (procedures.working.Working) as a list; `broken` are the parties that have a break."""
    differing = {party for line in told.lines for party in line.differs} | set(broken)
    parties = [party for party in PARTIES[1:] if party in differing and party in told.parties]
    if not parties:
        parties = [party for party in PARTIES[1:] if party in told.parties][-1:]
    rows = []
    for line in told.lines:
        if line.fact in _IN_NOTES and not line.differs:
            continue
        strong = line.fact in _SUMS
        cells = [Cell(line.fact, strong=strong), Cell(line.note, tone="soft"), Cell(figures.minus_sign(line.terms), strong=strong)]
        for party in parties:
            text = figures.minus_sign(line.told(party))
            if party in line.differs:
                cells.append(Cell(text or "not told", glyph="≠", tone="differ", strong=True))
            else:
                cells.append(Cell(text, tone="soft"))
        rows.append(cells)
    heads = [("", 0, False, 0), ("", 150, False, 4), ("Terms", 80, True, 0), *((_HEADS[party], 80, True, 0) for party in parties)]
    return static_sheet(heads, rows, "How this payment is reckoned")
