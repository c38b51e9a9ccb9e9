"""A bond and what was told of it, so plain that every figure can be reckoned in the head.

The bond pays 6 % once a year on 15 September under 30/360 with weekends as its only closed days, and settles in two business days: a face
of 1,000,000.00 earns 166.67 a day. Trades of Tuesday 24 March 2026 settle on Thursday the 26th, 191 days after the coupon.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.bonds.terms import Terms
from reconciler.expected.settlements import expect_trades
from reconciler.expected.terms import resolve_terms
from reconciler.records import (
    BONDS,
    CLOSINGS,
    CONFIRMATIONS,
    FACTORS,
    HOLDINGS,
    RATES,
    TICKETS,
    Table,
    Words,
    table,
)

Change = dict[str, Any]
BOND, OTHER = "ZZ0000000017", "ZZ0000000025"
PLAIN: Change = {
    "bond": BOND, "currency": "EUR", "kind": "fixed", "coupon_rate_e9": 6 * 10**9, "frequency": 1, "day_count": "30/360",
    "accrual_start": "2020-09-15", "maturity": "2030-09-15", "settlement_days": 2,
}  # fmt: skip
ACCRUED = 3_183_333
"""6 % of a million for 191 days of 360, in cents: 31,833.33."""
PRINCIPAL = 99_500_000
DEAL: Change = {
    "trade_date": "2026-03-24", "settlement_date": "2026-03-26", "bond": BOND, "side": 1, "face_minor": 100_000_000,
    "price_e12": 99_500 * 10**9, "price_text": "99.5", "settlement_minor": PRINCIPAL + ACCRUED, "currency": "EUR",
    "broker": "Tamarisk & Vane", "account": "ALDER-1",
}  # fmt: skip


def rows(schema: dict[str, str], made: list[Change]) -> Table:
    """A table of dictionaries; what a dictionary does not have is untold."""
    blank = table(schema, 1).row(0)
    return table(schema, len(made), **{name: [one.get(name, blank[name]) for one in made] for name in schema}) if made else table(schema)


def bonds(*changes: Change) -> Table:
    return rows(BONDS, [{**PLAIN, **change} for change in changes])


def terms_of(told: Table, rates: list[Change] | None = None, factors: list[Change] | None = None) -> Terms:
    return resolve_terms(told, rows(RATES, rates or []), rows(FACTORS, factors or []), table(CLOSINGS))[0]


def tickets(*changes: Change) -> Table:
    return rows(TICKETS, [{**DEAL, "ticket": f"T{n}", **change} for n, change in enumerate(changes, 1)])


def confirmations(*changes: Change) -> Table:
    return rows(CONFIRMATIONS, [{**DEAL, "broker_reference": f"B{n}", **change} for n, change in enumerate(changes, 1)])


def holdings(*changes: Change) -> Table:
    usual = {"account": "ALDER-1", "bond": BOND, "face_minor": 100_000_000, "as_of": "2026-03-01"}
    return rows(HOLDINGS, [{**usual, **change} for change in changes])


@dataclass(frozen=True)
class Paired:
    """Which rows are one trade."""

    ticket_row: np.ndarray
    confirmation_row: np.ndarray
    cancelled_row: np.ndarray
    repeats: Table


def pairs(*rows_of: tuple[int, int], cancelled: tuple[int, ...] = (), repeats: tuple[tuple[int, int], ...] = ()) -> Paired:
    """(ticket row, confirmation row) pairs; `cancelled` are the void tickets of the last ones; `repeats` (ticket row, row it repeats)."""
    ticket, confirmation = (np.array([pair[n] for pair in rows_of], np.int64) for n in (0, 1))
    void = np.full(len(rows_of), -1, np.int64)
    if cancelled:
        void[-len(cancelled) :] = cancelled
    again = np.array(repeats, np.int64).reshape(-1, 2)
    told = Table({"kind": Words.constant("ticket", len(again)), "row": again[:, 0], "of_row": again[:, 1]})
    return Paired(ticket, confirmation, void, told)


def expected(ticket: Change | None, confirmation: Change | None, bank: tuple[int, str] | None = None, bond: Change | None = None) -> Change:
    """One trade as expected, told by desk and broker (None: not told) and, if given, paid by the bank (amount and day)."""
    told, mine = bonds(bond or {}), tickets(ticket) if ticket is not None else tickets()
    theirs = confirmations(confirmation) if confirmation is not None else confirmations()
    paired = pairs((0 if ticket is not None else -1, 0 if confirmation is not None else -1))
    by_bank = (np.array([bank[0]]), np.array([bank[1]], "datetime64[D]")) if bank else ()
    return expect_trades(terms_of(told), told, mine, theirs, paired, *by_bank).row(0)
