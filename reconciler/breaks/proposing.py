"""Two entries add up to a payment that has no cash: worth a look, but a sum alone proves nothing.

Matching leaves such sums unmade and proposes them. Here they are put before the clerk where she needs them, as the first thing to do
about the missing cash and about each of the entries. Nothing is paired by it.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.breaks.given import Given
from reconciler.records import Table, Words

Array = np.ndarray[Any, Any]

_MOST = 4
"""Names told in a sentence; the rest is counted."""


def mention(given: Given, breaks: Table, proposals: Table) -> Table:
    """The breaks with proposed sums named in the next step of missing and of unexplained cash."""
    if not len(proposals) or not len(breaks):
        return breaks
    said = _sentences(given, proposals)
    asks = breaks["break"].holds("no cash") | breaks["break"].holds("unexplained cash")
    rows = [row for row in np.flatnonzero(asks).tolist() if int(breaks["item_row"][row]) in said]
    if not rows:
        return breaks
    steps = np.array(breaks["next_step"].to_list(), object)
    for row in rows:
        steps[row] = f"{said[int(breaks['item_row'][row])]} {steps[row]}"
    return breaks.with_columns(next_step=Words.from_arrow(pa.array(steps, pa.string())))


def _sentences(given: Given, proposals: Table) -> dict[int, str]:
    """What is proposed, per item: payments by their own row, entries by the row of their bank item."""
    items, entries = given.items["item"], given.cash["entry"]
    order = np.lexsort((proposals["cash_row"], proposals["item_row"], proposals["group"]))
    group = proposals["group"][order]
    starts = np.flatnonzero(np.append(True, group[1:] != group[:-1]))
    out: dict[int, list[str]] = {}
    for part in np.split(order, starts[1:]):
        payments = sorted({int(row) for row in proposals["item_row"][part]}, key=items.text)
        paid_by = sorted({int(row) for row in proposals["cash_row"][part]}, key=entries.text)
        of_entries = _named("entry", "entries", [entries.text(row) for row in paid_by])
        of_payments = _named("", "", [items.text(row) for row in payments])
        for row in payments:
            out.setdefault(row, []).append(_proposed(f"{of_entries} {_come(paid_by)} to", "this payment", of_payments, payments))
        for row in paid_by:
            own = int(given.entry_items[row])
            if own >= 0:
                whole = "this entry comes" if len(paid_by) == 1 else f"{of_entries} together come"
                out.setdefault(own, []).append(f"See whether {whole} from {of_payments}: the amounts add up.")
    return {row: min(sentences) for row, sentences in out.items()}


def _proposed(sum_of: str, this: str, of_payments: str, payments: list[int]) -> str:
    what = this if len(payments) == 1 else f"{of_payments} together"
    return f"See whether {sum_of} {what}: the amounts add up."


def _come(rows: list[int]) -> str:
    return "comes" if len(rows) == 1 else "together come"


def _named(one: str, several: str, names: list[str]) -> str:
    shown = names[:_MOST]
    more = f" and {len(names) - _MOST} more" if len(names) > _MOST else ""
    joined = ", ".join(shown) if more or len(shown) < 2 else f"{', '.join(shown[:-1])} and {shown[-1]}"
    return f"{one if len(names) == 1 else several} {joined}{more}".strip()
