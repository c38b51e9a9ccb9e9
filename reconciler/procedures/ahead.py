"""Whoever moves cash wants to know today what will be paid tomorrow: the payments that the terms say will come.

Trades of the morning that settle after its date, and the coupons and redemptions of the coming days on what is held and traded,
as one list and summed by day and currency. Nothing is new here: the expected payments are asked for with a later window of days.
Not done: forecasts. Floating coupons whose rate is not fixed yet are left out, because their terms do not say the amount.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.procedures.overview import digits_of
from reconciler.records import ITEM_KINDS, MISSING, Table, Words, concat

AHEAD: dict[str, str] = {
    # one expected payment a row; amount_minor signed from our cash account's side
    "date": "date", "kind": "text", "account": "text", "bond": "text", "bond_row": "int32", "currency": "text", "side": "int8",
    "face_minor": "int64", "amount_minor": "int64", "ticket": "text",
}  # fmt: skip


@dataclass(frozen=True)
class Bar:
    """What one currency receives and pays on one day (minor units, both positive), from how many payments."""

    day: np.datetime64
    currency: str
    received: int
    paid: int
    digits: int
    payments: int


@dataclass(frozen=True)
class Ahead:
    """The payments after the morning's date until `until` (table AHEAD, in the order of day, currency, item) and their sums."""

    payments: Table
    digits: np.ndarray
    bars: tuple[Bar, ...]
    until: np.datetime64


def ahead(day: Any, days: int | None = None) -> Ahead:
    """The payments of the `days` (default: what the settings say) after a morning (procedures.morning.Day)."""
    from reconciler.expected.coupons import expect_coupons

    date = np.datetime64(day.date, "D")
    until = date + np.timedelta64(day.settings["ahead_days"] if days is None else days, "D")
    source = day.source
    trades = day.items.take(_kind(day.items) == ITEM_KINDS.index("trade"))
    coming = expect_coupons(day.terms, source.bonds, source.holdings, trades, date + np.timedelta64(1, "D"), until)
    settling = trades.take((trades["terms_date"] > date) & (trades["terms_date"] <= until))
    items = concat([_part(settling), _part(coming)])
    known = np.flatnonzero((items["amount_minor"] != MISSING) & (items["amount_minor"] != 0))
    items = items.take(known)
    keys = [items[name].rank() for name in ("ticket", "bond", "account", "kind", "currency")]
    items = items.take(np.lexsort((*keys, items["date"])))
    digits = digits_of(items["currency"])
    return Ahead(items, digits, _bars(items, digits), until)


def _kind(items: Table) -> np.ndarray:
    place = {word: number for number, word in enumerate(ITEM_KINDS)}
    per_value = np.array([place.get(value, -1) for value in items["kind"].values.to_pylist()] + [-1], np.int8)
    return per_value[items["kind"].codes]


def _part(items: Table) -> Table:
    renamed = {"date": "terms_date", "amount_minor": "terms_minor"}
    return Table({name: items[renamed.get(name, name)] for name in AHEAD})


def _bars(payments: Table, digits: np.ndarray) -> tuple[Bar, ...]:
    currency: Words = payments["currency"]
    if not len(payments):
        return ()
    days = payments["date"].astype("datetime64[D]").astype(np.int64)
    keys, group = np.unique(np.stack([days, currency.codes.astype(np.int64)]), axis=1, return_inverse=True)
    group = np.ravel(group)
    amounts = payments["amount_minor"]
    received, paid = np.zeros(keys.shape[1], np.int64), np.zeros(keys.shape[1], np.int64)
    np.add.at(received, group, np.maximum(amounts, 0))
    np.add.at(paid, group, np.maximum(-amounts, 0))
    counts = np.bincount(group, minlength=keys.shape[1])
    first = np.unique(group, return_index=True)[1]
    return tuple(
        Bar(np.datetime64(int(keys[0, i]), "D"), str(currency.values[int(keys[1, i])].as_py()) if keys[1, i] >= 0 else "",
            int(received[i]), int(paid[i]), int(digits[first[i]]), int(counts[i]))
        for i in range(keys.shape[1])
    )  # fmt: skip
