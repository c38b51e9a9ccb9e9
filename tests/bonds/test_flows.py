"""A bond's remaining payments: six numbers where coupons are equal, a list where they are not, and both pay the same."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.bonds import accrual, compound, flows, schedules
from tests.bonds.made import days, made, row, zero

ONE = np.zeros(1, np.int64)

BONDS = {
    "equal": (row(), 0),
    "short last": (row(last_regular_coupon="2029-12-15", maturity="2030-03-01"), 0),
    "ex-dividend": (row(ex_dividend="180c"), 0),
    "counted in days": (row(day_count="Act/360"), 12),
    "stepped later": (row(kind="stepped", coupon_rate="3"), 12),
    "first off the grid": (row(accrual_start="2023-11-01", first_coupon="2024-02-01"), 13),
}
STEPS = [(4, "2027-06-15", "4")]


@pytest.mark.parametrize("name", BONDS)
def test_payments(name):
    """Their number, their sum and their last time; what is listed is what is not equal."""
    told = [bond for bond, _ in BONDS.values()]
    terms = made(*told, rates=STEPS)
    number = list(BONDS).index(name)
    rows, settle = np.array([number]), days("2023-12-20")
    paid = flows.of(terms, rows, settle)
    assert len(paid.owner) == BONDS[name][1]
    coupons = schedules.all_coupons(terms, rows)
    dates = coupons.unadjusted[coupons.unadjusted > settle[0]]
    if name == "ex-dividend":
        dates = dates[1:]
    amounts = accrual.coupon_amounts(terms, np.full(len(dates), number), dates, np.full(len(dates), 10**12))
    total = paid.first[0] + paid.equal[0] * paid.equal_count[0] + paid.amount.sum() + paid.last[0]
    assert total == pytest.approx(amounts.sum() / 1e10 + 100, abs=1e-9)
    assert (paid.time > paid.first_time[0]).all() and paid.last_time[0] >= paid.first_time[0]


def test_times_count_periods():
    """A quarter of a half-year gone by: three quarters to the coupon, whole periods from there (184 days, settled after 46)."""
    terms = made(row(accrual_start="2020-05-15", maturity="2030-05-15"))
    paid = flows.of(terms, ONE, days("2024-06-30"))
    assert paid.first_time[0] == paid.broken[0] == 138 / 184
    assert paid.last_time[0] == 138 / 184 + 11 and paid.equal_count[0] == 11
    on_date = flows.of(terms, ONE, days("2024-05-15"))
    assert on_date.first_time[0] == on_date.broken[0] == 1


def test_thirty_day_months_count_in_times_too():
    terms = made(row(day_count="30E/360", frequency="1", accrual_start="2020-12-31", maturity="2030-12-31"))
    assert flows.of(terms, ONE, days("2024-07-31")).first_time[0] == pytest.approx(150 / 360)


def test_zeros_count_as_their_yield_compounds():
    terms = made(zero(market="US_STRIPS", maturity="2030-05-15"), zero(day_count="Act/Act ICMA"), zero(market="US_TBILL"))
    paid = flows.of(terms, np.arange(3), days("2025-05-15", "2025-06-15", "2030-06-01"))
    assert paid.last_time[:2].tolist() == [10, 5] and paid.simple.tolist() == [False, False, True]
    assert paid.frequency.tolist() == [2, 1, 1] and (paid.equal_count == 0).all() and (paid.first == 0).all()


def test_some_rows_of_many():
    """Taking rows keeps each row's listed payments."""
    terms = made(*(bond for bond, _ in BONDS.values()), rates=STEPS)
    rows = np.array([3, 0, 5, 4])
    paid = flows.of(terms, rows, np.repeat(days("2023-12-20"), 4))
    whole = compound.of(paid, np.arange(4), np.zeros(4, np.bool_), np.zeros(4, np.bool_))
    price = compound.value(whole, paid.frequency, np.full(4, 0.04))[0]
    for kept in ([0, 2, 3], [1], [2], []):
        at = np.array(kept, np.int64)
        found = compound.value(whole.take(at), paid.frequency[at], np.full(len(at), 0.04))[0]
        np.testing.assert_array_equal(found, price[at])
