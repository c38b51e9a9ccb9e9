"""Broker and desk tell different facts of a trade: once the cash has come, it says which of them was dealt.

Only trades in dispute that the bank has paid are reckoned again, and only what changes is put in its place. What is held may change
with the side or face of a trade, and with it the coupons expected; only then is the cash paired anew.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reconciler.records import MISSING, Table, Words, gather, unify

RECKONED = (
    "side", "face_minor", "price_e12", "price_text", "terms_minor", "terms_date", "terms_principal_minor", "terms_accrued_minor",
    "terms_accrued_days", "terms_fees_minor", "terms_trade_date",
)  # fmt: skip
"""Columns of a trade that follow from the facts it was dealt on."""

_FACTS = ("side", "face_minor", "price_e12", "trade_date", "settlement_date")


@dataclass(frozen=True)
class Pairs:
    """Some of the trades, as rows of tickets and confirmations; those in dispute have both, so that none repeats another."""

    ticket_row: np.ndarray
    confirmation_row: np.ndarray
    cancelled_row: np.ndarray
    repeats: Table


def disputed(trades: Table, items: Table, tickets: Table, confirmations: Table) -> np.ndarray:
    """Rows of the trades on which broker and desk tell different facts and for which the bank has booked something."""
    paid = items["bank_minor"][: len(trades)] != MISSING
    rows = np.flatnonzero(paid & (trades["ticket_row"] >= 0) & (trades["confirmation_row"] >= 0))
    desk, broker = trades["ticket_row"][rows], trades["confirmation_row"][rows]
    apart = np.zeros(len(rows), np.bool_)
    for name in _FACTS:
        apart |= _bits(gather(tickets[name], desk, 0)) != _bits(gather(confirmations[name], broker, 0))
    return rows[apart]


def part_of(pairs: Pairs, rows: np.ndarray) -> Pairs:
    """The pairs at `rows`."""
    none = pairs.repeats.take(np.zeros(0, np.int64))
    return Pairs(pairs.ticket_row[rows], pairs.confirmation_row[rows], pairs.cancelled_row[rows], none)


def put_in(whole: Table, rows: np.ndarray, part: Table) -> Table:
    """The table with what was reckoned anew at `rows`."""
    changed = {}
    for name in RECKONED:
        old, new = whole[name], part[name]
        if isinstance(old, Words):
            old, new = unify(old, new)
            codes = old.codes.copy()
            codes[rows] = new.codes
            changed[name] = Words(codes, old.values)
        else:
            column = old.copy()
            column[rows] = new
            changed[name] = column
    return whole.with_columns(**changed)


def same(one: Table, other: Table, names: tuple[str, ...] = ()) -> bool:
    """Whether two tables hold the same in these (or all) columns."""
    if len(one) != len(other):
        return False
    for name in names or tuple(one):
        a, b = one[name], other[name]
        a, b = (column.codes for column in unify(a, b)) if isinstance(a, Words) else (_bits(a), _bits(b))
        if not np.array_equal(a, b):
            return False
    return True


def _bits(column: np.ndarray) -> np.ndarray:
    """Dates as whole numbers, so that two days nobody told are equal."""
    return column.view(np.int64) if column.dtype.kind == "M" else column
