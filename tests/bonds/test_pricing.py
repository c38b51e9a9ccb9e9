"""Price and yield: there and back, against QuantLib and against sums written out payment by payment."""

from __future__ import annotations

from datetime import date, timedelta

import numpy as np
import pytest
import QuantLib as ql
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds import accrual, pricing, schedules
from reconciler.bonds.daycounts import DAY_COUNTS
from reconciler.bonds.pricing import ANNUAL, DISCOUNT, INVESTMENT, SIMPLE, STREET, TREASURY, YIELD_CONVENTIONS
from tests.bonds.drawn import drawn, plain, quant
from tests.bonds.made import days, made, row, zero

ONE = np.zeros(1, np.int64)
COUPON_CONVENTIONS = (STREET, TREASURY, SIMPLE, ANNUAL)

BONDS = {
    "regular": row(),
    "month end": row(accrual_start="2020-08-31", maturity="2030-02-28", end_of_month="yes"),
    "short first": row(accrual_start="2020-09-20", first_coupon="2020-12-15"),
    "long first": row(accrual_start="2020-01-20", first_coupon="2020-12-15"),
    "first off the grid": row(accrual_start="2020-01-20", first_coupon="2020-11-02"),
    "short last": row(last_regular_coupon="2029-12-15", maturity="2030-03-01"),
    "long last": row(last_regular_coupon="2029-12-15", maturity="2030-09-01"),
    "annual 30E": row(frequency="1", day_count="30E/360", accrual_start="2019-02-28", maturity="2031-02-28"),
    "quarterly Act/360": row(frequency="4", day_count="Act/360"),
    "yearly Act/365F": row(frequency="1", day_count="Act/365F"),
    "monthly adjusted": row(frequency="12", day_count="Act/365F", accrual_adjustment="adjusted", calendar="XECB"),
    "ex-dividend": row(ex_dividend="20c"),
    "nothing but redemption": row(coupon_rate="0"),
    "redeemed at 103": row(redemption_price="103"),
}
ZEROS = {
    "bill": zero(market="US_TBILL"),
    "strip": zero(market="US_STRIPS"),
    "yearly": zero(day_count="Act/Act ICMA"),
    "half-yearly by its own word": zero(frequency="2"),
}


def price(terms, settle, percent, convention=STREET):
    return pricing.price_from_yield(terms, np.zeros(len(settle), np.int64), settle, np.asarray(percent, float), convention)


def back(terms, settle, clean, convention=STREET):
    return pricing.yield_from_price(terms, np.zeros(len(settle), np.int64), settle, np.asarray(clean, float), convention)


# --- laws --------------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("convention", COUPON_CONVENTIONS, ids=lambda n: YIELD_CONVENTIONS[n])
@pytest.mark.parametrize("name", BONDS)
def test_price_yield_price(name, convention):
    """Every convention returns to its price within 1e-9, on every kind of bond, from deep negative to very high yields."""
    terms = made(BONDS[name])
    settle = days("2021-01-05", "2024-06-07", "2029-11-30", "2027-12-15", "2028-02-29")
    for percent in (-5.0, -0.25, 0.0, 1e-9, 0.5, 4.9, 12.0, 40.0):
        clean = price(terms, settle, np.full(5, percent), convention)
        found = back(terms, settle, clean, convention)
        assert found == pytest.approx(np.full(5, percent), abs=1e-9)
        assert price(terms, settle, found, convention) == pytest.approx(clean, abs=1e-9)


@pytest.mark.parametrize("convention", range(len(YIELD_CONVENTIONS)), ids=YIELD_CONVENTIONS)
@pytest.mark.parametrize("name", ZEROS)
def test_zeros_there_and_back(name, convention):
    terms = made(ZEROS[name])
    settle = days("2029-07-02", "2030-01-31", "2030-06-13")
    for percent in (-0.7, 0.0, 1e-9, 5.0):
        clean = price(terms, settle, np.full(3, percent), convention)
        assert back(terms, settle, clean, convention) == pytest.approx(np.full(3, percent), abs=1e-9)


@given(
    coupon=st.integers(0, 120), percent=st.floats(-4, 30), months=st.integers(2, 400), day=st.integers(0, 900),
    frequency=st.sampled_from(["1", "2", "4", "12"]), convention=st.sampled_from(COUPON_CONVENTIONS),
    count=st.sampled_from([entry.name for entry in DAY_COUNTS]),
)  # fmt: skip
def test_any_bond_there_and_back(coupon, percent, months, day, frequency, convention, count):
    maturity = date(2020 + months // 12, months % 12 + 1, 28) + timedelta(days=day % 9)
    told = row(coupon_rate=str(coupon / 8), frequency=frequency, day_count=count, accrual_start="2019-03-31", maturity=maturity.isoformat(),
               calendar="XECB")  # fmt: skip
    settle = min(date(2019, 3, 31) + timedelta(days=day), maturity - timedelta(days=1))
    terms, at = made(told), days(settle.isoformat())
    clean = price(terms, at, [percent], convention)
    if np.isfinite(clean[0]):
        found = back(terms, at, clean, convention)
        assert price(terms, at, found, convention) == pytest.approx(clean, abs=1e-9)


def test_a_bond_bought_at_its_coupon_is_worth_par():
    """On a coupon date, at a yield equal to the coupon: exactly 100 (geometric sum), also at a yield of nothing."""
    for rate in ("0", "0.125", "5", "17"):
        terms = made(row(coupon_rate=rate))
        clean = price(terms, days("2022-06-15", "2029-12-15"), [float(rate)] * 2)
        assert clean == pytest.approx([100, 100], abs=1e-12)


def test_nothing_yielded_pays_the_sum_of_the_payments():
    """At a yield of zero the price with accrued is the plain sum of what is still paid."""
    terms = made(row(last_regular_coupon="2029-12-15", maturity="2030-03-01"))
    settle = days("2021-09-09")
    face = np.array([100 * 10**8])
    coupons = schedules.all_coupons(terms, ONE)
    dates = coupons.unadjusted[coupons.unadjusted > settle[0]]
    paid = accrual.coupon_amounts(terms, np.zeros(len(dates), np.int64), dates, np.repeat(face, len(dates))).sum() / 1e8
    assert pricing.dirty_at(terms, ONE, settle, np.zeros(1))[0] == pytest.approx(paid + 100, abs=1e-7)


@pytest.mark.parametrize("convention", COUPON_CONVENTIONS, ids=lambda n: YIELD_CONVENTIONS[n])
def test_one_by_one_as_all_together(convention):
    """Scalars are arrays of length one, and nothing comes of nothing."""
    terms = made(*BONDS.values(), *ZEROS.values())
    rows = np.repeat(np.arange(len(terms)), 3)
    settle = np.tile(days("2021-01-05", "2025-06-30", "2030-02-27"), len(terms))
    clean = np.linspace(70, 130, len(rows))
    whole = pricing.yield_from_price(terms, rows, settle, clean, convention)
    risks = pricing.risk(terms, rows, settle, np.nan_to_num(whole), convention)
    prices = pricing.price_from_yield(terms, rows, settle, whole, convention)
    for n in range(len(rows)):
        part = slice(n, n + 1)
        alone = pricing.yield_from_price(terms, rows[part], settle[part], clean[part], convention)
        np.testing.assert_array_equal(alone, whole[part])
        np.testing.assert_array_equal(pricing.price_from_yield(terms, rows[part], settle[part], alone, convention), prices[part])
        alone_risk = pricing.risk(terms, rows[part], settle[part], np.nan_to_num(alone), convention)
        np.testing.assert_array_equal(alone_risk, [column[part] for column in risks])
    none, no_days, nothing = rows[:0], settle[:0], clean[:0]
    assert len(pricing.yield_from_price(terms, none, no_days, nothing, convention)) == 0
    assert len(pricing.price_from_yield(terms, none, no_days, nothing, convention)) == 0
    assert [len(column) for column in pricing.risk(terms, none, no_days, nothing, convention)] == [0, 0]


@pytest.mark.parametrize("convention", range(len(YIELD_CONVENTIONS)), ids=YIELD_CONVENTIONS)
def test_risk_is_the_slope_of_the_price(convention):
    terms = made(*BONDS.values()) if convention in COUPON_CONVENTIONS else made(*ZEROS.values())
    rows = np.arange(len(terms))
    settle = np.repeat(days("2029-09-03" if convention not in COUPON_CONVENTIONS else "2023-03-03"), len(terms))
    at, step = np.full(len(terms), 3.7), 1e-4
    duration, point = pricing.risk(terms, rows, settle, at, convention)
    low, here, high = (pricing.dirty_at(terms, rows, settle, at + shift, convention) for shift in (-step, 0, step))
    slope = (high - low) / (2 * step / 100)
    assert duration == pytest.approx(-slope / here, rel=1e-7)
    assert point == pytest.approx(-slope / 10_000, rel=1e-7)


def test_what_does_not_exist_is_nan():
    terms = made(row(), zero())
    rows, settle = np.array([0, 0, 0, 1]), days("2030-06-15", "2031-01-01", "2024-01-01", "2030-06-15")
    assert np.isnan(pricing.yield_from_price(terms, rows, settle, np.array([99.0, 99, -3, 99]))).all()
    assert np.isnan(pricing.price_from_yield(terms, ONE, days("2024-01-01"), np.array([5.0]), DISCOUNT)).all()
    assert np.isnan(pricing.price_from_yield(terms, ONE, days("2024-01-01"), np.array([5.0]), INVESTMENT)).all()
    assert np.isnan(pricing.price_from_yield(terms, ONE, days("2024-01-01"), np.array([np.nan]))).all()
    # a price of a million per 100 would need a yield that no bond has
    assert np.isnan(pricing.yield_from_price(terms, ONE, days("2024-01-01"), np.array([1e6]))).all()


# --- payment by payment ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["regular", "long first", "short last", "long last", "first off the grid", "quarterly Act/360"])
@pytest.mark.parametrize("convention", [STREET, TREASURY, ANNUAL], ids=["street", "treasury", "annual"])
def test_the_sum_written_out(name, convention):
    """Payments one by one, each discounted by its place on the grid of half-years (or quarters), found by walking day by day."""
    terms, settle = made(BONDS[name]), date(2020, 10, 6)
    frequency = int(BONDS[name]["frequency"])
    coupons = schedules.all_coupons(terms, ONE).unadjusted.tolist()
    anchor = date.fromisoformat(BONDS[name].get("last_regular_coupon") or BONDS[name]["maturity"])
    step, maturity = 12 // frequency, coupons[-1]

    def grid(number: int) -> date:
        month = anchor.year * 12 + anchor.month - 1 + number * step
        return date(month // 12, month % 12 + 1, anchor.day)

    def place(day: date) -> float:
        number = next(n for n in range(50, -300, -1) if grid(n) <= day)
        return number + (day - grid(number)).days / (grid(number + 1) - grid(number)).days

    rate, percent = float(BONDS[name]["coupon_rate"]), 6.3
    growth = 1 + percent / 100 / frequency if convention != ANNUAL else (1 + percent / 100) ** (1 / frequency)
    broken = 1 - place(settle) % 1
    total = 0.0
    for end in [day for day in coupons if day > settle]:
        period = schedules.period_ending(terms, ONE, days(end.isoformat()))
        above, below = accrual.coupon_fraction(terms, ONE, period)
        amount = rate * above[0] / below[0] + (100 if end == maturity else 0)
        time = place(end) - place(settle)
        total += amount * growth ** -(time - broken if convention == TREASURY else time)
    total /= 1 + broken * percent / 100 / frequency if convention == TREASURY else 1
    assert pricing.dirty_at(terms, ONE, days(settle.isoformat()), np.array([percent]), convention)[0] == pytest.approx(total, abs=1e-10)


# --- QuantLib ----------------------------------------------------------------------------------------------------------------


def test_street_prices_equal_quantlib():
    """Regular bonds under Act/Act ICMA, more than one coupon left: QuantLib counts the same times (coupon grid).

    Payment dates are left unadjusted on both sides, since QuantLib discounts to those.
    """
    compared = 0
    for seed in range(1_500):
        one = drawn(seed)
        if one.row["day_count"] != "Act/Act ICMA" or one.first or one.before_last:
            continue
        rate, percent = float(one.row["coupon_rate"]) / 100, (seed % 17) - 1.5
        counter = ql.ActualActual(ql.ActualActual.ISMA, one.schedule)
        bond = ql.FixedRateBond(0, 100.0, one.schedule, [rate], counter, ql.Unadjusted, 100.0)
        if len([flow for flow in bond.cashflows() if plain(flow.date()) > one.settle]) < 3:
            continue
        frequency = {1: ql.Annual, 2: ql.Semiannual, 4: ql.Quarterly, 12: ql.Monthly}[one.frequency]
        curve = ql.InterestRate(percent / 100, counter, ql.Compounded, frequency)
        expected = ql.BondFunctions.cleanPrice(bond, curve, quant(one.settle))
        terms = made({name: text for name, text in one.row.items() if text})
        clean = price(terms, days(one.settle.isoformat()), [percent])
        assert clean[0] == pytest.approx(expected, abs=1e-9), one.row
        duration, _ = pricing.risk(terms, ONE, days(one.settle.isoformat()), np.array([percent]))
        other = ql.BondFunctions.duration(bond, curve, ql.Duration.Modified, quant(one.settle))
        assert duration[0] == pytest.approx(other, abs=1e-9), one.row
        compared += 1
    assert compared > 50


def test_simple_interest_in_the_last_period():
    """QuantLib's SimpleThenCompounded counts simple interest up to one period, as the street does with one coupon left."""
    counter = ql.Thirty360(ql.Thirty360.BondBasis)
    schedule = ql.Schedule(
        ql.Date(15, 6, 2020), ql.Date(15, 6, 2030), ql.Period(ql.Semiannual), ql.NullCalendar(), ql.Unadjusted, ql.Unadjusted,
        ql.DateGeneration.Backward, False,
    )  # fmt: skip
    terms = made(row(day_count="30/360"))
    bond = ql.FixedRateBond(0, 100.0, schedule, [0.05], counter)
    curve = ql.InterestRate(0.041, counter, ql.SimpleThenCompounded, ql.Semiannual)
    for day in (date(2029, 12, 15), date(2030, 2, 1), date(2030, 6, 14)):
        expected = ql.BondFunctions.cleanPrice(bond, curve, quant(day))
        assert price(terms, days(day.isoformat()), [4.1])[0] == pytest.approx(expected, abs=1e-10)


# --- formulas ----------------------------------------------------------------------------------------------------------------


def test_japanese_simple_yield():
    """(coupon + (100 - price) / years) / price, years in days over 365 (practice of the Japanese market, from memory)."""
    terms = made({"market": "JP_JGB", "coupon_rate": "0.8", "accrual_start": "2020-03-20", "maturity": "2030-03-20"})
    years = (date(2030, 3, 20) - date(2024, 5, 7)).days / 365
    expected = (0.8 + (100 - 98.4) / years) / 98.4 * 100
    assert back(terms, days("2024-05-07"), [98.4], SIMPLE)[0] == pytest.approx(expected, abs=1e-12)


def test_investment_rate_turns_quadratic_beyond_half_a_year():
    """Both formulas of 31 CFR 356 Appendix B VI.D around half a year of 365 days: 182 days simple, 183 quadratic."""
    for length, year in ((182, 365), (183, 365), (183, 366), (364, 366)):
        settle = date(2022, 1, 6) if year == 365 else date(2023, 6, 1)
        terms = made(zero(maturity=(settle + timedelta(days=length)).isoformat()))
        found = back(terms, days(settle.isoformat()), [97.5], INVESTMENT)[0] / 100
        if length <= year / 2:
            assert found == pytest.approx(2.5 / 97.5 * year / length, abs=1e-14)
        else:
            assert 97.5 * (1 + (length - year / 2) * found / year) * (1 + found / 2) == pytest.approx(100, abs=1e-11)


def test_the_treasury_takes_off_accrued_as_printed():
    """23 of 184 days of 1/8 % are 0.0078125: printed 0.007813, half up (31 CFR 356 Appendix B I.D.4, "normal rounding")."""
    terms, settle = made(row(coupon_rate="0.125", accrual_start="2020-05-15", maturity="2030-05-15")), days("2024-06-07")
    full = pricing.dirty_at(terms, ONE, settle, np.array([2.0]), TREASURY)
    assert full - price(terms, settle, [2.0], TREASURY) == pytest.approx([0.007813], abs=1e-12)


def test_a_bills_street_yield_is_simple_interest():
    """Money-market practice: 100 / (1 + y days / 360)."""
    terms = made(zero(market="US_TBILL", maturity="2030-06-13"))
    assert price(terms, days("2030-03-14"), [5.0])[0] == pytest.approx(100 / (1 + 0.05 * 91 / 360), abs=1e-12)


def test_strips_compound_half_yearly():
    terms = made(zero(market="US_STRIPS", maturity="2030-05-15"))
    assert price(terms, days("2020-05-15"), [4.0])[0] == pytest.approx(100 * 1.02**-20, abs=1e-11)
