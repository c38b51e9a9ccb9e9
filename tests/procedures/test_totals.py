"""Superseded confirmations leave the used rows for those set aside, and nothing else changes."""

from __future__ import annotations

import numpy as np

from reconciler import records
from reconciler.procedures.totals import with_set_aside
from reconciler.records import MISSING


def _totals() -> records.Table:
    return records.table(
        records.TOTALS, file=["cash.csv", "confirmations/a.csv", "confirmations/a.csv"], currency=["USD", "USD", ""],
        rows_read=[9, 3, 2], rows_used=[9, 3, 1], rows_rejected=[0, 0, 1], rows_set_aside=[0, 0, 0], amount_read=[900, 300, 0],
        amount_used=[900, 300, 0], amount_rejected=[0, 0, 0], amount_set_aside=[0, 0, 0],
    )  # fmt: skip


def test_rows_and_money_move_together() -> None:
    told = records.table(
        records.CONFIRMATIONS, file=["confirmations/a.csv"] * 4, currency=["USD", "", "USD", "USD"],
        settlement_minor=[50, MISSING, 70, 180],
    )  # fmt: skip
    totals = with_set_aside(_totals(), told, np.array([2, 1, 0]))
    assert totals["rows_used"].tolist() == [9, 1, 0]
    assert totals["rows_set_aside"].tolist() == [0, 2, 1]
    assert totals["amount_used"].tolist() == [900, 180, 0]
    assert totals["amount_set_aside"].tolist() == [0, 120, 0]
    for name in ("rows", "amount"):
        parts = totals[f"{name}_used"] + totals[f"{name}_rejected"] + totals[f"{name}_set_aside"]
        assert np.array_equal(parts, totals[f"{name}_read"])


def test_nothing_superseded_changes_nothing() -> None:
    before = _totals()
    assert with_set_aside(before, records.table(records.CONFIRMATIONS), np.zeros(0, np.int64)) is before
