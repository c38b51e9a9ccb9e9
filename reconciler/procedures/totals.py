"""Nothing is lost: a confirmation that another one supersedes is no longer used but set aside, in number and in money."""

from __future__ import annotations

import numpy as np

from reconciler.records import MISSING, Table, unify


def with_set_aside(totals: Table, confirmations: Table, rows: np.ndarray) -> Table:
    """The totals with these rows of the confirmations moved from used to set aside."""
    if not len(rows):
        return totals
    gone = confirmations.take(rows)
    file, own_file = unify(totals["file"], gone["file"])
    currency, own_currency = unify(totals["currency"], gone["currency"])
    size = len(currency.values) + 1
    key = file.codes.astype(np.int64) * size + currency.codes + 1
    order = np.argsort(key)
    place = order[np.searchsorted(key[order], own_file.codes.astype(np.int64) * size + own_currency.codes + 1)]
    amount = np.where(gone["settlement_minor"] == MISSING, 0, gone["settlement_minor"])
    moved = {name: np.zeros(len(totals), np.int64) for name in ("rows", "amount")}
    np.add.at(moved["rows"], place, 1)
    np.add.at(moved["amount"], place, amount)
    changed = {}
    for name, change in moved.items():
        changed[f"{name}_used"] = totals[f"{name}_used"] - change
        changed[f"{name}_set_aside"] = totals[f"{name}_set_aside"] + change
    return totals.with_columns(**changed)
