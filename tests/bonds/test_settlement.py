"""What a trade settles for and when, against rational arithmetic and the market's cycles."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds import accrual, pricing, schedules, settlement
from reconciler.money import MISSING
from tests.bonds.made import days, made, row, zero

ONE = np.zeros(1, np.int64)
E12 = 10**12


def half_up(value: Fraction) -> int:
    whole = (abs(value) * 2 + 1) // 2
    return int(whole) if value >= 0 else -int(whole)


def price(text: str) -> np.ndarray:
    return np.array([int(Fraction(text) * E12)])


def settled(told, day, face, quoted, **steps):
    return settlement.settle(made(told, **steps), ONE, days(day), np.array([face]), price(quoted))


@given(st.integers(0, 10**13), st.integers(0, 200 * 10**12))
def test_principal_is_rounded_once(face, price_e12):
    found = settlement.settle(made(row()), ONE, days("2024-06-15"), np.array([face]), np.array([price_e12]))
    assert found.principal_minor.tolist() == [half_up(Fraction(face) * Fraction(price_e12, 100 * E12))]


def test_principal_and_accrued_are_rounded_apart():
    """99 16.5/32 of 1,234,567.89 and 17 days of interest."""
    found = settled(row(), "2024-07-02", 123_456_789, "99.515625")
    assert found.principal_minor.tolist() == [half_up(Fraction("99.515625") * 123_456_789 / 100)]
    assert found.accrued_minor.tolist() == [half_up(Fraction(123_456_789) * Fraction(5, 100) * Fraction(17, 366))]
    assert found.accrued_days.tolist() == [17] and not found.ex[0] and found.price_per100.tolist() == [99.515625]


@pytest.mark.parametrize("count,basis", [("Act/360", 360), ("Act/365F", 365)])
def test_a_discount_is_not_rounded_before_it_multiplies(count, basis):
    """31 CFR 356 Appendix B VI: 100 - rate x days / basis, here on 33 million for 77 days at 3.333 %."""
    found = settled(zero(quote="discount", day_count=count), "2030-03-30", 3_300_000_000, "3.333")
    exact = Fraction(100) - Fraction("3.333") * 77 / basis
    assert found.principal_minor.tolist() == [half_up(Fraction(3_300_000_000) * exact / 100)]
    assert found.price_per100[0] == pytest.approx(float(exact), abs=1e-13)
    assert found.accrued_minor.tolist() == [0]


def test_a_discount_may_be_negative():
    found = settled(zero(quote="discount"), "2030-03-30", 10**8, "-0.25")
    assert found.principal_minor.tolist() == [half_up(Fraction(10**8) * (100 + Fraction("0.25") * 77 / 360) / 100)]


def test_a_bond_dealt_on_its_yield():
    """The street formula gives the price; the principal is that price times the face."""
    terms = made(row(quote="yield", coupon_rate="4"))
    found = settlement.settle(terms, ONE, days("2024-03-01"), np.array([10**9]), price("3.75"))
    clean = pricing.price_from_yield(terms, ONE, days("2024-03-01"), np.array([3.75]))
    assert found.price_per100[0] == pytest.approx(clean[0], abs=1e-11)
    assert abs(found.principal_minor[0] - clean[0] * 10**7) <= 0.6


def test_factors_and_ratios():
    for kind in ("amortising", "linked"):
        found = settled(row(kind=kind), "2024-06-15", 10**8, "101.25", factors=[(0, "2024-01-01", "0.875")])
        assert found.principal_minor.tolist() == [half_up(Fraction("101.25") * Fraction("0.875") * 10**6)]


def test_what_cannot_be_settled():
    """Unknown price, no day, after maturity: no figure, and never a wrong one."""
    terms = made(row(), row(kind="floating", coupon_rate=""))
    rows = np.array([0, 0, 0, 1])
    quoted = np.array([MISSING, 100 * E12, 100 * E12, 100 * E12])
    found = settlement.settle(terms, rows, days("2024-01-02", "", "2030-06-15", "2024-01-02"), np.full(4, 10**8), quoted)
    assert not found.sound.any() and (found.principal_minor == MISSING).all() and (found.accrued_minor == MISSING).all()
    assert np.isnan(found.price_per100).all()


CYCLES = (
    # market, trade date, settlement date; settlement_cycles.csv
    ("US_CORP", "2024-05-23", "2024-05-28"),  # T+2 over Memorial Day
    ("US_CORP", "2024-05-24", "2024-05-29"),  # Friday: T+2
    ("US_CORP", "2024-05-28", "2024-05-29"),  # first day of T+1
    ("US_TNOTE", "2024-05-24", "2024-05-28"),  # T+1 over Memorial Day
    ("UK_GILT", "2026-04-02", "2026-04-07"),  # T+1 over Easter
    ("DE_BUND", "2026-04-30", "2026-05-05"),  # T+2 over the first of May
)  # fmt: skip


@pytest.mark.parametrize("market,trade,expected", CYCLES)
def test_settlement_goes_by_the_cycle_of_the_trade_date(market, trade, expected):
    terms = made({"market": market, "coupon_rate": "4", "maturity": "2036-05-15"})
    assert settlement.settlement_dates(terms, ONE, days(trade)).tolist() == days(expected).tolist()


def test_told_days_go_before_the_market():
    terms = made({"market": "US_TNOTE", "coupon_rate": "4", "maturity": "2036-05-15", "settlement_days": "3"}, row())
    found = settlement.settlement_dates(terms, np.array([0, 1, 0]), days("2024-05-24", "2024-05-24", ""))
    assert found[0] == days("2024-05-30")[0] and np.isnat(found[1:]).all()


def _crowd(size: int):
    rng = np.random.default_rng(5)
    counts = ["Act/Act ICMA", "30/360", "30E/360", "Act/360", "Act/365F"]
    told = [
        row(day_count=str(rng.choice(counts)), frequency=str(rng.choice([1, 2, 4])), coupon_rate=str(rng.integers(1, 60) / 8),
            ex_dividend=str(rng.choice(["", "6b"])), calendar=str(rng.choice(["XECB", "XSIF"])),
            accrual_adjustment=str(rng.choice(["unadjusted", "adjusted"])), first_coupon=str(rng.choice(["", "2021-06-15"])))
        for _ in range(40)
    ]  # fmt: skip
    terms = made(*told, zero(quote="discount"))
    rows = rng.integers(0, 41, size)
    settle = np.datetime64("2020-07-01") + rng.integers(0, 3600, size)
    return terms, rows, settle, rng.integers(1, 10**10, size), rng.integers(1, 6, size) * E12


def test_one_by_one_as_all_together():
    terms, rows, settle, face, quoted = _crowd(150)
    whole = settlement.settle(terms, rows, settle, face, quoted)
    for n in range(len(rows)):
        part = slice(n, n + 1)
        alone = settlement.settle(terms, rows[part], settle[part], face[part], quoted[part])
        for name, column in vars(whole).items():
            np.testing.assert_array_equal(getattr(alone, name), column[part], err_msg=name)


@pytest.mark.parametrize("size", [0, 1, 150, 300_000])
def test_the_whole_of_a_trade(size):
    """In stretches or in one piece: what a trade settles for, its period and when the coming coupon is paid."""
    terms, rows, settle, face, quoted = _crowd(size)
    found = settlement.reckon(terms, rows, settle, face, quoted)
    plain = settlement.settle(terms, rows, settle, face, quoted)
    for name, column in vars(plain).items():
        np.testing.assert_array_equal(getattr(found.settled, name), column, err_msg=name)
    part = accrual.accrued(terms, rows, settle, face)
    np.testing.assert_array_equal(found.previous, part.previous)
    np.testing.assert_array_equal(found.next, part.next)
    np.testing.assert_array_equal(found.payment_date, schedules.payment_dates(terms, rows, part.next))
