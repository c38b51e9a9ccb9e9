"""The four files of a morning: items, breaks, rejected rows and totals, with the columns and the order that other programs rely on.

Rows stand in an order that only their content decides: items by name, breaks by rank, rejects by file, line and column, totals by
file and currency. Amounts are in major units with the digits of their currency; an amount told in another currency than the item's is
written with the digits of its own. Texts are written as they were told (see exports.csv on formulas).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.exports import csv
from reconciler.exports.columns import Column
from reconciler.money import minor_digits
from reconciler.records import Table, Words

Array = np.ndarray[Any, Any]

# title, kind, column of the table
ITEMS = (
    ("item", "text", "item"), ("kind", "text", "kind"), ("account", "text", "account"), ("bond", "text", "bond"),
    ("currency", "text", "currency"), ("ticket", "text", "ticket"), ("broker", "text", "broker"),
    ("broker_reference", "text", "broker_reference"), ("coupon_date", "date", "coupon_date"), ("side", "side", "side"),
    ("face", "amount", "face_minor"), ("price", "decimal", "price_e12"), ("terms_amount", "amount", "terms_minor"),
    ("broker_amount", "amount", "broker_minor"), ("desk_amount", "amount", "desk_minor"),
    ("bank_amount", "amount", "bank_minor"), ("terms_date", "date", "terms_date"), ("broker_date", "date", "broker_date"),
    ("desk_date", "date", "desk_date"), ("bank_date", "date", "bank_date"), ("bank_entries", "text", "bank_entries"),
    ("state", "text", "state"),
)  # fmt: skip

BREAKS = (
    ("item", "text", "item"), ("break", "text", "break"), ("party", "text", "party"), ("expected", "text", "expected"),
    ("found", "text", "found"), ("difference", "text", "difference"), ("cause", "text", "cause"),
    ("certainty", "text", "certainty"), ("explanation", "text", "explanation"), ("next_step", "text", "next_step"),
    ("overdue_days", "count", "overdue_days"), ("money_at_stake", "amount", "stake_minor"),
    ("daily_interest", "amount", "daily_interest_minor"), ("rate_exposure", "amount", "rate_exposure_minor"),
    ("rank", "count", "rank"),
)  # fmt: skip

REJECTS = (
    ("file", "text", "file"), ("row", "count", "row"), ("column", "text", "column"), ("value", "text", "value"),
    ("reason", "text", "reason"),
)  # fmt: skip

TOTALS = (
    ("file", "text", "file"), ("currency", "text", "currency"), ("rows_read", "count", "rows_read"),
    ("rows_used", "count", "rows_used"), ("rows_rejected", "count", "rows_rejected"),
    ("rows_set_aside", "count", "rows_set_aside"), ("amount_read", "amount", "amount_read"),
    ("amount_used", "amount", "amount_used"), ("amount_rejected", "amount", "amount_rejected"),
    ("amount_set_aside", "amount", "amount_set_aside"),
)  # fmt: skip

Told = tuple[Words, Array]
"""A party's currencies and, per item, the row in them (-1 none)."""


def write_items(path: Path, items: Table, told: Mapping[str, Told]) -> None:
    """Writes items.csv. `told` gives the currencies that broker, desk and bank told, for the digits of their amounts."""
    order = np.argsort(items["item"].rank(), kind="stable")
    if not np.array_equal(order, np.arange(len(order))):
        items, told = items.take(order), {name: (words, rows[order]) for name, (words, rows) in told.items()}
    own = _digits(items["currency"])
    digits = {column: _digits_told(told[party], own) for party, column in
              (("Broker", "broker_minor"), ("Desk", "desk_minor"), ("Bank", "bank_minor")) if party in told}  # fmt: skip
    csv.write(path, _columns(items, ITEMS, own, digits))


def write_breaks(path: Path, breaks: Table) -> None:
    """Writes breaks.csv."""
    order = np.argsort(breaks["rank"], kind="stable")
    breaks = breaks.take(order)
    csv.write(path, _columns(breaks, BREAKS, _digits(breaks["currency"])))


def write_rejects(path: Path, rejects: Table) -> None:
    """Writes rejects.csv."""
    keys = [rejects[name].rank() for name in ("reason", "value", "column")]
    order = np.lexsort((*keys, rejects["row"], rejects["file"].rank()))
    csv.write(path, _columns(rejects.take(order), REJECTS, 0))


def write_totals(path: Path, totals: Table) -> None:
    """Writes totals.csv."""
    order = np.lexsort((totals["currency"].rank(), totals["file"].rank()))
    totals = totals.take(order)
    csv.write(path, _columns(totals, TOTALS, _digits(totals["currency"])))


def _columns(
    table: Table, declared: Sequence[tuple[str, str, str]], digits: Array | int, own: Mapping[str, Array] | None = None
) -> list[Column]:
    out = []
    for title, kind, name in declared:
        values = table[name]
        if kind == "side":
            words = pa.array(["sell", None, "buy"], pa.string())
            out.append(Column(title, "text", words.take(pa.array(values.astype(np.int64) + 1))))
        elif kind == "count":
            # line numbers and ranks are int32 or int64; -1 stands for none in the former
            out.append(Column(title, "count", values.astype(np.int64)))
        else:
            out.append(Column(title, kind, values, (own or {}).get(name, digits)))
    return out


def _digits(currency: Words) -> Array:
    return np.append(minor_digits(currency.values.to_pylist()), 2)[currency.codes]


def _digits_told(told: Told, own: Array) -> Array:
    words, rows = told
    theirs = words.take(rows)
    return np.where(theirs.known(), _digits(theirs), own)


