"""Payments made by hand: one call is one item with what each of the four parties tells of it; a list of them is a morning."""

from __future__ import annotations

import datetime
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler import records, settings
from reconciler.breaks import finding, ranking, stake
from reconciler.breaks.given import Given
from reconciler.expected.terms import resolve_terms
from reconciler.records import MISSING, Words

DATE = "2026-03-31"
NOTE, ZERO, BILL, YEN, UNSOUND, FLOATER, EURO = range(7)

BONDS: dict[str, list[Any]] = {
    "bond": ["ZZ0001000012", "ZZ0001000046", "ZZ0001000061", "ZZ0001000087", "ZZ0001000095", "ZZ0001000103", "ZZ0001000111"],
    "currency": ["USD", "USD", "USD", "JPY", "USD", "USD", "EUR"],
    "kind": ["fixed", "zero", "zero", "fixed", "fixed", "floating", "fixed"],
    "coupon_rate_e9": [4 * 10**9, MISSING, MISSING, 6 * 10**8, 10**9, MISSING, 3 * 10**9],
    "frequency": [2, 0, 0, 2, 2, 4, 1],
    "day_count": ["30/360", "Act/365F", "Act/360", "Act/365F", "30/360", "Act/360", "Act/Act ICMA"],
    "accrual_start": ["2021-06-15", "2026-02-15", "2025-12-18", "2020-09-20", "2031-01-01", "2024-06-15", "2020-05-15"],
    "maturity": ["2031-06-15", "2056-02-15", "2026-06-18", "2030-09-20", "2030-01-01", "2029-06-15", "2030-05-15"],
    "calendar": ["XSIF", "XSIF", "XSIF", "JP", "XSIF", "XSIF", "XECB"],
    "quote": ["price", "price", "discount", "price", "price", "price", "price"],
    "settlement_days": [1, 1, 1, 1, 1, 1, 2],
    "market": ["", "", "US_TBILL", "", "", "", ""],
    "line": [2, 3, 4, 5, 6, 7, 8],
}

TRUE: dict[str, Any] = {
    "side": 1, "face_minor": 100_000_000, "price_e12": 99_500_000_000_000, "accrued_minor": 1_166_667, "fees_minor": MISSING,
    "settlement_minor": 100_666_667, "settlement_date": "2026-03-30", "trade_date": "2026-03-27", "currency": "USD",
    "account": "Northquay main", "yield_e12": MISSING, "yield_text": "",
}  # fmt: skip


@dataclass
class One:
    """One item. `broker` and `desk` hold what differs from the true facts, None a silent party; `bank` its entries."""

    broker: dict[str, Any] | None = field(default_factory=dict)
    desk: dict[str, Any] | None = field(default_factory=dict)
    bank: list[dict[str, Any]] = field(default_factory=lambda: [{}])
    terms: dict[str, Any] = field(default_factory=dict)
    bond: int = NOTE
    kind: str = "trade"
    name: str = ""
    repeats: list[tuple[str, int]] = field(default_factory=list)
    """("ticket" | "confirmation" | "entry", number of the One it repeats): told of this item's row."""


def coupon(**changes: Any) -> One:
    """A coupon of 20,000.00 USD due on 30 March."""
    terms = {"terms_minor": 2_000_000, "price_e12": MISSING, "terms_accrued_minor": MISSING, "terms_trade_date": "NaT", "side": 0}
    changes["terms"] = {**terms, **changes.get("terms", {})}
    return One(**{"broker": None, "desk": None, "kind": "coupon", "bank": [{"amount_minor": 2_000_000}], **changes})


def entry(**facts: Any) -> One:
    """A bank entry that nothing explains."""
    changes = {key: facts.pop(key) for key in ("repeats", "name") if key in facts}
    return One(broker=None, desk=None, kind="bank", bank=[facts], bond=-1, **changes)


def _signed(side: int, amount: int) -> int:
    return amount if amount == MISSING else -side * amount


def given(ones: list[One], told: settings.Settings | None = None, date: str = DATE) -> Given:
    """The tables of a morning with these items, as they are when the search for breaks begins."""
    bonds = records.table(records.BONDS, file=["bonds.csv"] * 7, **BONDS)
    nothing = [records.table(schema) for schema in (records.RATES, records.FACTORS, records.CLOSINGS)]
    terms, problems = resolve_terms(bonds, *nothing)
    faults = [next((p.reason for p in problems if p.line == line), "") for line in BONDS["line"]]
    rows: list[dict[str, Any]] = []
    tickets: list[dict[str, Any]] = []
    confirmations: list[dict[str, Any]] = []
    cash: list[dict[str, Any]] = []
    allocations: list[tuple[int, int, int]] = []
    repeats: list[tuple[str, int, int]] = []
    for number, one in enumerate(ones):
        row = {"item": one.name or f"{one.kind} {number:03d}", "kind": one.kind, "account": TRUE["account"],
               "bond": BONDS["bond"][one.bond] if one.bond >= 0 else "", "bond_row": one.bond,
               "currency": BONDS["currency"][one.bond] if one.bond >= 0 else "USD", "ticket_row": -1, "confirmation_row": -1,
               "broker": "", "ticket": "", "broker_reference": ""}  # fmt: skip
        if one.kind == "trade" and (one.desk is not None or one.broker is not None):
            row |= {"side": TRUE["side"], "face_minor": TRUE["face_minor"], "price_e12": TRUE["price_e12"],
                    "terms_minor": -TRUE["settlement_minor"], "terms_accrued_minor": -TRUE["accrued_minor"],
                    "terms_date": TRUE["settlement_date"], "terms_trade_date": TRUE["trade_date"]}  # fmt: skip
        elif one.kind != "bank":
            row |= {"face_minor": TRUE["face_minor"], "terms_date": TRUE["settlement_date"], "coupon_date": "2026-03-29"}
        row |= one.terms
        if one.desk is not None:
            facts = {**TRUE, **one.desk}
            row |= {"ticket_row": len(tickets), "ticket": f"T-{number}", "broker": "Tamarisk & Vane",
                    "desk_minor": _signed(facts["side"], facts["settlement_minor"]), "desk_date": facts["settlement_date"]}  # fmt: skip
            tickets.append({**facts, "ticket": row["ticket"], "broker": row["broker"]})
        if one.broker is not None:
            facts = {**TRUE, **one.broker}
            row |= {"confirmation_row": len(confirmations), "broker": "Tamarisk & Vane", "broker_reference": f"TV{number}",
                    "broker_minor": _signed(facts["side"], facts["settlement_minor"]), "broker_date": facts["settlement_date"]}  # fmt: skip
            confirmations.append({**facts, "broker": row["broker"], "broker_reference": row["broker_reference"]})
        paid = 0
        for facts in one.bank:
            amount = -TRUE["settlement_minor"] if one.kind == "trade" else 2_000_000
            entry = {"entry": f"E{len(cash)}", "account": TRUE["account"], "currency": row["currency"], "amount_minor": amount,
                     "value_date": TRUE["settlement_date"], **facts}  # fmt: skip
            allocations.append((number, len(cash), entry["amount_minor"]))
            row |= {"bank_date": entry["value_date"]}
            if one.kind == "bank":
                row |= {"account": entry["account"], "currency": entry["currency"]}
            row["bank_entries"] = ";".join(filter(None, [row.get("bank_entries", ""), entry["entry"]]))
            paid += entry["amount_minor"]
            cash.append(entry)
        if one.bank:
            row["bank_minor"] = paid
        for kind, of in one.repeats:
            own = {"ticket": len(tickets) - 1, "confirmation": len(confirmations) - 1, "entry": len(cash) - 1}[kind]
            of_row = {"ticket": rows[of]["ticket_row"], "confirmation": rows[of]["confirmation_row"],
                      "entry": next((c for i, c, _ in allocations if i == of), -1)}[kind]  # fmt: skip
            repeats.append((kind, own, of_row))
        rows.append(row)
    return Given(
        items=_table(records.ITEMS, rows), tickets=_table(records.TICKETS, tickets),
        confirmations=_table(records.CONFIRMATIONS, confirmations), cash=_table(records.CASH, cash),
        allocations=records.table(records.ALLOCATIONS, item_row=[a[0] for a in allocations], cash_row=[a[1] for a in allocations],
                                  share_minor=[a[2] for a in allocations]),
        repeats=records.table({"kind": "text", "row": "int64", "of_row": "int64"}, kind=[r[0] for r in repeats],
                              row=[r[1] for r in repeats], of_row=[r[2] for r in repeats]),
        terms=terms, faults=Words.of(faults), date=np.datetime64(date, "D"), settings=told or settings.Settings(),
        accounts=pa.array([TRUE["account"], "Northquay custody"]),
    )  # fmt: skip


def _table(schema: dict[str, str], rows: list[dict[str, Any]]) -> records.Table:
    blanks = {"text": "", "date": "NaT", "int64": MISSING, "int32": -1, "int8": 0, "bool": False}
    columns = {name: [row.get(name, blanks[kind]) for row in rows] for name, kind in schema.items()}
    return records.table(schema, len(rows), **columns)


def found(ones: list[One], told: settings.Settings | None = None, date: str = DATE) -> tuple[records.Table, records.Table]:
    """Items with states and ranked breaks of a morning made by hand."""
    morning = given(ones, told, date)
    items, breaks = finding.find_breaks(morning)
    return items, ranking.rank(morning, stake.weigh(morning, breaks))


def pairs(breaks: records.Table) -> list[tuple[str, str]]:
    """(break, party) of every break, sorted."""
    return sorted(zip(breaks["break"].to_list(), breaks["party"].to_list(), strict=True))


def only(breaks: records.Table) -> dict[str, Any]:
    """The single break of a morning."""
    assert len(breaks) == 1, pairs(breaks)
    return breaks.row(0)


def day(text: str) -> datetime.date:
    """A date from ISO text."""
    return datetime.date.fromisoformat(text)
