"""Bonds that only holdings, rates or factors name are told, once a file."""

from __future__ import annotations

from types import SimpleNamespace

from reconciler import records
from reconciler.procedures.strangers import strangers


def test_each_unknown_bond_is_told_once_a_file_with_its_first_line() -> None:
    source = SimpleNamespace(
        bonds=records.table(records.BONDS, bond=["A", "B"]),
        holdings=records.table(records.HOLDINGS, bond=["X", "A", "X", "", "Y"], file=["holdings.csv"] * 5, line=[9, 2, 3, 4, 5]),
        rates=records.table(records.RATES, bond=["B", "X"], file=["rates.csv"] * 2, line=[2, 3]),
        factors=records.table(records.FACTORS),
    )
    told = strangers(source)
    assert [(p.file, p.line, p.column, p.value) for p in told] == [
        ("holdings.csv", 3, "bond", "X"), ("holdings.csv", 5, "bond", "Y"), ("rates.csv", 3, "bond", "X")]  # fmt: skip
    assert "coupons" in told[0].reason
    assert "rates" in told[2].reason
