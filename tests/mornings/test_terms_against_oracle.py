"""Forty-nine kinds of bond around five mornings, the program's columns against the scalar reckoning: dates, accrued,
coupons, cash.

The mornings lie around a month end on a weekend, a leap day, the year's turn of fixings and the US change of cycle in
May 2024.
"""

from __future__ import annotations

import random
from datetime import date, timedelta
from fractions import Fraction
from typing import Any

import numpy as np
import pytest

from reconciler.bonds import accrual, schedules, settlement
from reconciler.bonds.terms import Terms
from reconciler.expected.terms import resolve_terms
from reconciler.records import BONDS, CLOSINGS, FACTORS, MISSING, RATES, Table, table
from tests.oracle import arithmetic, deals
from tests.oracle.arithmetic import Bond
from tests.oracle.issues import KINDS, Scene, row
from tests.oracle.world import CLOSINGS as DAYS

WINDOWS = (
    ("2026-03-17", "2026-03-31"),
    ("2026-05-20", "2026-06-02"),
    ("2026-01-20", "2026-02-03"),
    ("2028-02-20", "2028-03-01"),
    ("2024-05-20", "2024-06-03"),
)


def _days(texts: list[Any]) -> np.ndarray:
    return np.array([text or "NaT" for text in texts], "datetime64[D]")


def _steps(bonds: list[Bond], kinds: tuple[str, ...], schema: dict[str, str], column: str, scale: int) -> Table:
    told = [(bond.bond, day, value) for bond in bonds if bond.kind in kinds for day, value in bond.steps]
    columns: dict[str, Any] = {
        "bond": [t[0] for t in told],
        "from": _days([t[1] for t in told]),
        column: [int(t[2] * scale) for t in told],
    }
    return table(schema, len(told), **columns)


def _terms(bonds: list[Bond]) -> Terms:
    rows = [row(bond) for bond in bonds]
    columns: dict[str, Any] = {}
    for name, kind in BONDS.items():
        plain, _, unit = name.rpartition("_e")
        told = [line.get(plain if unit.isdigit() else name, "") for line in rows]
        if kind == "date":
            columns[name] = _days(told)
        elif kind == "int64":
            scale = 10 ** int(unit) if unit.isdigit() else 1
            columns[name] = [int(Fraction(text) * scale) if text else MISSING for text in told]
        elif name not in ("file", "line"):
            columns[name] = told
    closings = table(
        CLOSINGS, len(DAYS), calendar=[d[0] for d in DAYS], date=_days([d[1] for d in DAYS]), open=[d[2] for d in DAYS]
    )
    terms, problems = resolve_terms(
        table(BONDS, len(rows), **columns),
        _steps(bonds, ("stepped", "floating"), RATES, "rate_e9", 10**9),
        _steps(bonds, ("linked", "amortising"), FACTORS, "factor_e12", 10**12),
        closings,
    )
    assert not problems
    return terms


def _coupons(terms: Terms, number: int, bond: Bond, today: date, face: int) -> None:
    found = schedules.all_coupons(terms, np.array([number]))
    expected = arithmetic.periods(bond)
    assert found.unadjusted.tolist() == [p.end for p in expected]
    assert found.payment_date.tolist() == [arithmetic.payment_date(bond, p.end) for p in expected]
    near = [p for p in expected if abs((p.end - today).days) < 500]
    rows, ends = np.full(len(near), number), _days([p.end for p in near])
    amounts = accrual.coupon_amounts(terms, rows, ends, np.full(len(near), face))
    assert amounts.tolist() == [arithmetic.coupon_amount(bond, p, face) for p in near]
    assert schedules.record_dates(terms, rows, ends).tolist() == [arithmetic.record_date(bond, p.end) for p in near]


def _trades(terms: Terms, number: int, bond: Bond, since: date, face: int, rng: random.Random) -> None:
    days = [day for n in range(60) if deals.tradeable(bond, day := since + timedelta(days=n - 15))]
    prices = [deals.price_for(bond, rng)[0] for _ in days]
    rows = np.full(len(days), number)
    found = settlement.settle(
        terms, rows, _days(days), np.full(len(days), face), np.array([int(p * 10**12) for p in prices], np.int64)
    )
    expected = [arithmetic.accrued(bond, day, face) for day in days]
    assert found.accrued_minor.tolist() == [e[1] for e in expected]
    assert found.accrued_days.tolist() == [e[0] for e in expected]
    assert found.ex.tolist() == [e[2] for e in expected]
    assert found.principal_minor.tolist() == [
        arithmetic.principal(bond, p, day, face) for p, day in zip(prices, days, strict=True)
    ]
    if bond.settlement_days is not None:
        assert settlement.settlement_dates(terms, rows, _days(days)).tolist() == [bond.settles(day) for day in days]


@pytest.mark.parametrize("window", WINDOWS)
@pytest.mark.parametrize("seed", [1, 2])
def test_every_kind_of_bond(window: tuple[str, str], seed: int) -> None:
    since, today = (date.fromisoformat(text) for text in window)
    scene = Scene(random.Random(seed), since, today, DAYS)
    bonds = [make(scene) for make in KINDS.values()]
    terms = _terms(bonds)
    for number, bond in enumerate(bonds):
        face = 1234567 * 10 ** arithmetic.DIGITS[bond.currency]
        if bond.kind != "zero":
            _coupons(terms, number, bond, today, face)
        redeemed = accrual.redemption_amounts(terms, np.array([number]), np.array([face]))
        assert redeemed.tolist() == [arithmetic.redemption_amount(bond, face)]
        _trades(terms, number, bond, since, face, scene.rng)
