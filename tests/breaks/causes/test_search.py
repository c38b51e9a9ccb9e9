"""Causes are held against faults that an independent reckoning planted, and against noise, in which there is nothing to find."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from reconciler.bonds import settlement
from reconciler.breaks.causes import search
from reconciler.breaks.causes.cases import BANK, Cases, Told
from reconciler.breaks.causes.judging import CHANCE
from reconciler.expected.terms import resolve_terms
from reconciler.money import MISSING
from reconciler.records import BONDS, CLOSINGS, FACTORS, RATES, table
from tests.breaks.causes import scoring


def _scored(folder: Path, payments: int, seed: int, pairs: bool, report: object) -> scoring.Score:
    import make_faults

    make_faults.make(folder, payments, seed, pairs)
    found, wrongs = scoring.scores(folder)
    print(scoring.printed(found), *wrongs[:40], sep="\n")
    return scoring.Score(*(sum(getattr(s, name) for s in found.values()) for name in vars(scoring.Score())))


@pytest.mark.parametrize(("payments", "seed"), [(500, 21), pytest.param(10_000, 22, marks=pytest.mark.long)])
def test_single_faults(tmp_path: Path, payments: int, seed: int) -> None:
    total = _scored(tmp_path, payments, seed, False, None)
    assert total.planted > payments * 0.7
    assert total.wrong == 0
    assert total.first >= 0.98 * total.planted
    assert total.proved > 0.1 * total.planted


@pytest.mark.parametrize(("payments", "seed"), [(400, 23), pytest.param(4_000, 24, marks=pytest.mark.long)])
def test_two_faults_at_once(tmp_path: Path, payments: int, seed: int) -> None:
    total = _scored(tmp_path, payments, seed, True, None)
    assert total.wrong == 0
    # what is missed is mostly a fault that changed nothing (Act/360 for a bond that is 30/360 over 30 days)
    assert total.first >= 0.85 * total.planted


def _noise(count: int, scale: int, seed: int) -> tuple[Cases, object]:
    """Bank totals of trades in common bonds, off by random amounts up to `scale` minor units."""
    draw = np.random.default_rng(seed)
    markets = ["US_TNOTE", "US_CORP", "UK_GILT", "DE_BUND"]
    bonds = 400
    told = table(BONDS, bond=[f"B{n}" for n in range(bonds)], market=[markets[n % 4] for n in range(bonds)],
                 currency=[("USD", "USD", "GBP", "EUR")[n % 4] for n in range(bonds)],
                 coupon_rate_e9=draw.integers(8, 64, bonds) * 125 * 10**6, accrual_start=np.full(bonds, np.datetime64("2015-03-01")),
                 maturity=np.datetime64("2027-01-01") + draw.integers(0, 9000, bonds))  # fmt: skip
    terms, problems = resolve_terms(told, table(RATES), table(FACTORS), table(CLOSINGS))
    assert not problems
    row, side = draw.integers(0, bonds, count), draw.choice(np.array([1, -1], np.int8), count)
    face, price = draw.integers(1, 5000, count) * 100_000, draw.integers(20_000, 30_000, count) * (10**12 // 256)
    traded = np.datetime64("2026-03-02") + draw.integers(0, 20, count)
    settles = settlement.settlement_dates(terms, row, traded)
    done = settlement.settle(terms, row, settles, face, price)
    amount = -side * (done.principal_minor + done.accrued_minor)
    none, zero = np.full(count, MISSING), np.zeros(count, np.int64)
    nat = np.full(count, np.datetime64("NaT", "D"))
    right = Told(side, face, price, zero, done.accrued_days, done.accrued_minor, done.principal_minor, amount, settles, traded)
    wrong = Told(np.zeros(count, np.int8), none, none, none, none, none, none, amount + draw.integers(-scale, scale, count), settles, nat)
    cases = Cases(np.arange(count), np.full(count, BANK, np.int8), np.zeros(count, np.int8), row, nat, np.full(count, 2), none, none, right, wrong)
    return cases, terms


@pytest.mark.parametrize(
    ("count", "scale"),
    [(4_000, 1_000_000), (4_000, 20_000_000), *(pytest.param(100_000, s, marks=pytest.mark.long) for s in (10_000, 1_000_000, 100_000_000))],
)
def test_noise_proves_nothing(count: int, scale: int) -> None:
    cases, terms = _noise(count, scale, 31)
    proved = sum(int((chance < CHANCE).sum()) for _rows, _part, chance in search.run(cases, terms))
    assert proved <= 1
