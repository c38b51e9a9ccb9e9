"""From the tables of a morning to the terms of its bonds: row i of the terms is row i of bonds.csv."""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.bonds import calendars
from reconciler.bonds.resolving import calendar_codes, resolve
from reconciler.bonds.terms import Terms
from reconciler.problems import Problem
from reconciler.records import Table, Words

_TEXT = (
    "market", "currency", "kind", "day_count", "end_of_month", "payment_adjustment", "accrual_adjustment", "calendar",
    "ex_dividend", "record", "quote", "accrued_rounding",
)  # fmt: skip
_PLAIN = (
    "coupon_rate_e9", "frequency", "accrual_start", "first_coupon", "last_regular_coupon", "maturity", "settlement_days",
    "redemption_price_e12",
)  # fmt: skip


def resolve_terms(bonds: Table, rates: Table, factors: Table, closings: Table) -> tuple[Terms, list[Problem]]:
    """The terms of every bond, blanks filled from its market, and what is wrong with them (file, line and column as read).

    Rates and factors of bonds that bonds.csv does not have are left out here; intake reports them.
    """
    told: dict[str, Any] = {name: _coded(bonds[name]) for name in _TEXT}
    told |= {name: bonds[name] for name in _PLAIN}
    days = zip(closings["calendar"].to_list(), closings["date"].tolist(), closings["open"].tolist(), strict=True)
    loaded, unknown = calendars.load(calendar_codes(told), [(c, d, bool(o)) for c, d, o in days])
    terms, faults = resolve(
        told, len(bonds), loaded, unknown, _steps(bonds, rates, "rate_e9"), _steps(bonds, factors, "factor_e12")
    )
    problems = [
        Problem(
            bonds["file"].text(row) or "bonds.csv",
            int(bonds["line"][row]),
            column,
            value,
            f"in the terms of {bonds['bond'].text(row)} {reason}",
            "unsound-terms",
        )
        for row, column, value, reason in faults
        # a bond without a line stands for rows that intake rejected, and said so
        if bonds["line"][row] > 0
    ]
    return terms, problems


def _coded(words: Words) -> tuple[np.ndarray, list[str]]:
    return words.codes, words.values.to_pylist()


def bond_rows(told: Words, bonds: Table) -> np.ndarray:
    """The row of bonds.csv that each text names, int64; -1 where blank or not known."""
    row_of = np.full(len(bonds["bond"].values) + 1, -1, np.int64)
    # of two rows for one bond the first is meant; intake has reported the second
    own = bonds["bond"].codes
    row_of[own[::-1]] = np.arange(len(bonds))[::-1]
    row_of[-1] = -1
    found: np.ndarray = row_of[told.codes_in(bonds["bond"].values)]
    return found


def _steps(bonds: Table, table: Table, value: str) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    return bond_rows(table["bond"], bonds), table["from"], table[value]
