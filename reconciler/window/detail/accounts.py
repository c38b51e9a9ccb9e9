"""Who told what about one payment: a line per fact, a column per party, marks where the parties differ.

Everything is looked up: the terms' figures in the items, the broker's in the confirmations, the desk's in the tickets, the
bank's in the entries allocated to the item. Which facts differ is what the morning's breaks say, not compared again here.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.records import MISSING, PARTIES, Table, Words
from reconciler.window import figures
from reconciler.window.sheet import Cell, Sheet
from reconciler.window.static import static_sheet

_FACT_OF_BREAK = {
    "settlement amount": "amount", "payment amount": "amount", "unexplained cash": "amount", "settlement date": "date",
    "payment date": "date", "face": "face", "price": "price", "accrued": "accrued", "side": "side", "fees": "fees",
    "currency": "currency", "account": "account", "trade date": "trade date", "yield": "yield",
}  # fmt: skip
_SILENT = {"no confirmation": "silent", "no ticket": "no ticket", "no cash": "no cash", "told twice": "told twice",
           "unknown bond": "unknown bond", "unsound terms": "unsound terms"}  # fmt: skip
_LABELS = {
    # in this order: what is paid and when stands first, then what it is made of
    "amount": "Amount", "date": "Payment date", "side": "Side", "face": "Face", "price": "Price", "principal": "Principal",
    "accrued": "Accrued", "fees": "Fees", "trade date": "Trade date", "currency": "Currency", "account": "Account",
    "yield": "Yield", "reference": "Reference",
}  # fmt: skip


def breaks_of(day: Any, item_row: int) -> list[dict[str, Any]]:
    """The breaks of one item, the most urgent first."""
    rows = np.flatnonzero(np.asarray(day.breaks["item_row"]) == item_row)
    rows = rows[np.argsort(np.asarray(day.breaks["rank"])[rows], kind="stable")]
    return [{**day.breaks.row(int(row)), "row": int(row)} for row in rows]


def telling_first(loaded: Any, item_row: int) -> list[dict[str, Any]]:
    """The breaks of one item, the one that says most about it first."""
    found = breaks_of(loaded.day, item_row)
    telling = int(loaded.overview.telling_break[item_row])
    rank = int(loaded.day.breaks["rank"][telling]) if telling >= 0 else -1
    return sorted(found, key=lambda one: int(one["rank"]) != rank)


def entries_of(day: Any, item_row: int) -> np.ndarray:
    """The bank entries (row numbers into cash) that pay an item."""
    return np.asarray(day.allocations["cash_row"])[np.asarray(day.allocations["item_row"]) == item_row]


def _text(table: Table, name: str, row: int) -> str:
    return table[name].text(row) if row >= 0 and name in table and isinstance(table[name], Words) else ""


def _number(table: Table, name: str, row: int) -> int:
    return int(table[name][row]) if row >= 0 and name in table else MISSING


def _day(table: Table, name: str, row: int, year: int) -> str:
    return figures.date(table[name][row], year) if row >= 0 and name in table else ""


def _party_facts(table: Table, row: int, digits: int, year: int, reference: str) -> dict[str, str]:
    """What a ticket or a confirmation tells, by fact."""
    if row < 0:
        return {}
    return {
        "side": {1: "buy", -1: "sell"}.get(int(table["side"][row]), ""),
        "face": figures.face(_number(table, "face_minor", row), digits),
        "price": _text(table, "price_text", row),
        "trade date": _day(table, "trade_date", row, year),
        "date": _day(table, "settlement_date", row, year),
        "principal": figures.amount(_number(table, "principal_minor", row), digits),
        "accrued": figures.amount(_number(table, "accrued_minor", row), digits),
        "fees": figures.amount(_number(table, "fees_minor", row), digits),
        "amount": figures.amount(_number(table, "settlement_minor", row), digits),
        "currency": _text(table, "currency", row),
        "account": _text(table, "account", row),
        "yield": _text(table, "yield_text", row),
        "reference": _text(table, reference, row),
    }


def _terms_facts(day: Any, item: dict[str, Any], digits: int, year: int) -> dict[str, str]:
    trade = item["kind"] == "trade"
    own = {name: int(item[name]) for name in item if name.endswith("_minor")}
    plain = {name: abs(value) if value != MISSING else MISSING for name, value in own.items()}
    facts = {
        "face": figures.face(own["face_minor"], digits),
        "date": figures.date(item["terms_date"], year),
        "amount": figures.amount(plain["terms_minor"] if trade else own["terms_minor"], digits, signed=not trade),
        "currency": item["currency"],
        "account": "" if trade else item["account"],
    }
    if trade and own["terms_minor"] != MISSING:
        accrued = own["terms_accrued_minor"]
        if accrued != MISSING and own["terms_principal_minor"] < 0:
            accrued = -accrued
        facts |= {
            "side": {1: "buy", -1: "sell"}.get(int(item["side"]), ""),
            "price": item["price_text"],
            "trade date": figures.date(item["terms_trade_date"], year),
            "principal": figures.amount(plain["terms_principal_minor"], digits),
            "accrued": figures.amount(accrued, digits),
            "fees": figures.amount(plain["terms_fees_minor"], digits),
        }
    if item["kind"] == "bank":
        return {}
    return facts


def _bank_facts(day: Any, item_row: int, item: dict[str, Any], digits: int, year: int) -> dict[str, str]:
    if int(item["bank_minor"]) == MISSING:
        return {}
    rows = entries_of(day, item_row).tolist()
    first = rows[0] if rows else -1
    trade = item["kind"] == "trade"
    minor = int(item["bank_minor"])
    return {
        "date": figures.date(item["bank_date"], year),
        "amount": figures.amount(abs(minor) if trade else minor, digits, signed=not trade),
        "currency": _text(day.source.cash, "currency", first) or item["currency"],
        "account": _text(day.source.cash, "account", first),
        "reference": ", ".join(part for part in item["bank_entries"].split(";") if part),
    }


def account_facts(day: Any, overview: Any, item_row: int) -> tuple[list[str], list[dict[str, str]]]:
    """The facts told about an item, and what each of the four parties tells (in the order of records.PARTIES)."""
    item = day.items.row(item_row)
    digits = int(overview.digits[item_row])
    year = int(str(np.datetime64(day.date, "Y")))
    source = day.source
    told = [
        _terms_facts(day, item, digits, year),
        _party_facts(source.confirmations, int(item["confirmation_row"]), digits, year, "broker_reference"),
        _party_facts(source.tickets, int(item["ticket_row"]), digits, year, "ticket"),
        _bank_facts(day, item_row, item, digits, year),
    ]
    names = [name for name in _LABELS if any(facts.get(name) for facts in told)]
    return names, told


def accounts_sheet(day: Any, overview: Any, item_row: int) -> Sheet:
    """The four accounts side by side."""
    names, told = account_facts(day, overview, item_row)
    trade = day.items["kind"].text(item_row) == "trade"
    marks: dict[tuple[str, str], str] = {}
    silent: dict[str, str] = {}
    for one in breaks_of(day, item_row):
        fact = _FACT_OF_BREAK.get(one["break"])
        if fact:
            marks[fact, one["party"]] = "day" if fact in ("date", "trade date") else "differ"
        elif one["break"] in _SILENT:
            silent[one["party"]] = _SILENT[one["break"]]
    rows = []
    for place, name in enumerate(names):
        heading = _LABELS[name] if not (trade and name in ("date", "amount")) else f"Settlement {name}"
        cells = [Cell(heading, tone="soft")]
        for number, party in enumerate(PARTIES):
            text = told[number].get(name, "")
            tone = marks.get((name, party), "")
            if tone:
                cells.append(Cell(text or "not told", glyph="≠", tone=tone, strong=True))
            elif not told[number] and party in silent:
                cells.append(Cell(silent[party], glyph="∅", tone="silent") if place == 0 else Cell())
            else:
                cells.append(Cell(text, strong=name == "amount"))
        rows.append(cells)
    heads = [("", 0, False, 1), *((party, 92, True, 2) for party in PARTIES)]
    return static_sheet(heads, rows, "What each of the four parties tells about this payment")
