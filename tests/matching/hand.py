"""Small tables made by hand: a ticket, a confirmation, a payment or an entry is a dictionary of what differs from the usual one."""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.matching.cash import pair_cash, with_bank
from reconciler.matching.trades import TradePairs, pair_trades
from reconciler.records import CASH, CONFIRMATIONS, ITEMS, TICKETS, Table, table

Change = dict[str, Any]
BOND, OTHER = "ZZ0000000017", "ZZ0000000025"
E = -99_912_345
"""What the usual trade settles for on our account."""

DEAL: dict[str, Any] = {
    "trade_date": "2026-03-24", "settlement_date": "2026-03-26", "bond": "ZZ0000000017", "side": 1, "face_minor": 100_000_000,
    "price_e12": 99_500 * 10**9, "settlement_minor": 99_912_345, "accrued_minor": 412_345, "fees_minor": 0, "currency": "EUR",
    "broker": "Tamarisk & Vane", "account": "ALDER-1",
}  # fmt: skip
TICKET = {**DEAL, "ticket": "T1"}
CONFIRMATION = {**DEAL, "broker_reference": "B1"}
TRADE: dict[str, Any] = {
    "item": "trade T1", "kind": "trade", "account": "ALDER-1", "bond": "ZZ0000000017", "currency": "EUR", "ticket": "T1",
    "terms_minor": -99_912_345, "terms_date": "2026-03-26",
}  # fmt: skip
COUPON: dict[str, Any] = {
    "item": "coupon 1", "kind": "coupon", "account": "ALDER-1", "bond": "ZZ0000000017", "currency": "EUR", "terms_minor": 2_000_000,
    "terms_date": "2026-03-26",
}  # fmt: skip
ENTRY: dict[str, Any] = {
    "entry": "E1", "account": "ALDER-1", "currency": "EUR", "value_date": "2026-03-26", "amount_minor": -99_912_345, "narrative": "SETTLEMENT",
}  # fmt: skip


def rows(schema: dict[str, str], made: list[dict[str, Any]]) -> Table:
    """A table of dictionaries; what a dictionary does not have is untold."""
    blank = table(schema, 1).row(0)
    return table(schema, len(made), **{name: [one.get(name, blank[name]) for one in made] for name in schema}) if made else table(schema)


def tickets(*changes: dict[str, Any]) -> Table:
    return rows(TICKETS, [{**TICKET, "ticket": f"T{n}", **change} for n, change in enumerate(changes, 1)])


def confirmations(*changes: dict[str, Any]) -> Table:
    return rows(CONFIRMATIONS, [{**CONFIRMATION, "broker_reference": f"B{n}", **change} for n, change in enumerate(changes, 1)])


def trades(*changes: dict[str, Any]) -> Table:
    return rows(ITEMS, [{**TRADE, "item": f"trade T{n}", "ticket": f"T{n}", **change} for n, change in enumerate(changes, 1)])


def coupons(*changes: dict[str, Any]) -> Table:
    return rows(ITEMS, [{**COUPON, "item": f"coupon {n}", **change} for n, change in enumerate(changes, 1)])


def entries(*changes: dict[str, Any]) -> Table:
    return rows(CASH, [{**ENTRY, "entry": f"E{n}", **change} for n, change in enumerate(changes, 1)])


def shuffled(made: Table, order: list[int]) -> Table:
    return made.take(np.array(order, np.int64))


def names(pairs: TradePairs, told: Table, confirmed: Table) -> set[tuple[str, str]]:
    """Every trade as (ticket, broker's reference); a cancelled ticket in brackets."""
    out = set()
    for ticket, confirmation, void in zip(pairs.ticket_row, pairs.confirmation_row, pairs.cancelled_row, strict=True):
        mine = told["ticket"].text(ticket) if ticket >= 0 else f"[{told['ticket'].text(void)}]" if void >= 0 else ""
        out.add((mine, confirmed["broker_reference"].text(confirmation) if confirmation >= 0 else ""))
    return out


def paired(told: Table, confirmed: Table) -> set[tuple[str, str]]:
    return names(pair_trades(told, confirmed), told, confirmed)


def repeats(pairs: TradePairs, told: Table, confirmed: Table) -> set[tuple[str, str, str]]:
    """(kind, what repeats, what it repeats), by ticket number or broker's reference."""
    out = set()
    for n in range(len(pairs.repeats)):
        row = pairs.repeats.row(n)
        words = told["ticket"] if row["kind"] == "ticket" else confirmed["broker_reference"]
        out.add((row["kind"], words.text(row["row"]), words.text(row["of_row"])))
    return out


def paid(items: Table, cash: Table, **more: Any) -> dict[str, dict[str, int]]:
    """Per entry that pays: item -> share."""
    out: dict[str, dict[str, int]] = {}
    found = pair_cash(items, cash, **more).allocations
    for n in range(len(found)):
        row = found.row(n)
        out.setdefault(cash["entry"].text(row["cash_row"]), {})[items["item"].text(row["item_row"])] = int(row["share_minor"])
    return out


def who(items: Table, cash: Table, **more: Any) -> dict[str, list[str]]:
    """Per entry that pays: the items, in order."""
    return {entry: sorted(shares) for entry, shares in paid(items, cash, **more).items()}


def booked(items: Table, cash: Table, **more: Any) -> Table:
    """The items with what the bank told."""
    return with_bank(items, cash, pair_cash(items, cash, **more))[0]


def told_twice(items: Table, cash: Table) -> set[tuple[str, str]]:
    """(what repeats, what it repeats), by the names of the entries."""
    found = pair_cash(items, cash).repeats
    return {(cash["entry"].text(a), cash["entry"].text(b)) for a, b in zip(found["row"], found["of_row"], strict=True)}
