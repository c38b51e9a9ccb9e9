"""Accrued interest and coupons in minor units, against rational arithmetic reckoned by hand beside each case."""

from __future__ import annotations

from datetime import date, timedelta
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds import accrual, schedules
from reconciler.bonds.daycounts import DAY_COUNTS
from reconciler.money import MISSING
from tests.bonds.made import days, made, row, zero

ONE = np.zeros(1, np.int64)
MILLION = np.array([100_000_000])


def half_up(value: Fraction) -> int:
    whole = (abs(value) * 2 + 1) // 2
    return int(whole) if value >= 0 else -int(whole)


def one(told, settle, face=10**8, **steps):
    """Days, minor units and whether without coupon, of one bond on one day."""
    part = accrual.accrued(made(told, **steps), ONE, days(settle), np.array([face]))
    return int(part.days[0]), int(part.minor[0]), bool(part.ex[0])


# --- accrued -----------------------------------------------------------------------------------------------------------------

ACCRUED = (
    # a million of 5 % half-yearly from 2020-06-15 unless told otherwise; days and interest by hand
    (row(), "2021-06-15", 0, Fraction(0)),
    (row(), "2021-06-16", 1, Fraction(1, 183 * 2)),
    (row(), "2021-12-14", 182, Fraction(182, 183 * 2)),
    (row(day_count="30/360"), "2021-07-31", 46, Fraction(46, 360)),
    (row(day_count="30E/360"), "2021-07-31", 45, Fraction(45, 360)),
    (row(day_count="Act/360"), "2021-12-14", 182, Fraction(182, 360)),
    (row(day_count="Act/365F"), "2021-12-14", 182, Fraction(182, 365)),
    (row(day_count="Act/Act ISDA"), "2024-03-15", 91, Fraction(16 + 1, 365) + Fraction(74, 366)),
    (row(day_count="NL/365"), "2024-03-15", 90, Fraction(90, 365)),
    (row(frequency="1", day_count="Act/365L"), "2024-03-15", 274, Fraction(274, 366)),
    (row(day_count="Bus/252", calendar="XECB"), "2021-06-22", 5, Fraction(5, 252)),
    # the long first period from 2020-01-20: 147 days to 2020-06-15 of 183, then a whole half-year of 183
    (row(accrual_start="2020-01-20", first_coupon="2020-12-15"), "2020-03-20", 60, Fraction(60, 183 * 2)),
    (row(accrual_start="2020-01-20", first_coupon="2020-12-15"), "2020-08-15", 208, Fraction(147, 183 * 2) + Fraction(61, 183 * 2)),
    # longer still: 26 days of 182 to 2019-06-15, a whole half-year, then 10 of 183 days
    (row(accrual_start="2019-05-20", first_coupon="2020-12-15"), "2020-06-25", 402, Fraction(26, 182 * 2) + 1 + Fraction(10, 183 * 2)),
    # short first, short last, long last
    (row(accrual_start="2020-09-20"), "2020-10-20", 30, Fraction(30, 183 * 2)),
    (row(last_regular_coupon="2029-12-15", maturity="2030-03-01"), "2030-01-15", 31, Fraction(31, 182 * 2)),
    (row(last_regular_coupon="2029-12-15", maturity="2030-09-01"), "2030-08-15", 243, Fraction(1, 2) + Fraction(61, 183 * 2)),
    # before interest begins
    (row(), "2020-05-01", 0, Fraction(0)),
    (row(accrual_start="2020-09-20"), "2020-09-01", 0, Fraction(0)),
    # without an accrual start the grid runs back
    (row(accrual_start=""), "2001-06-20", 5, Fraction(5, 183 * 2)),
    # bonds without coupons
    (zero(), "2024-01-01", 0, Fraction(0)),
)  # fmt: skip


@pytest.mark.parametrize("told,settle,counted,share", ACCRUED, ids=lambda part: str(part)[-40:] if isinstance(part, dict) else str(part))
def test_accrued(told, settle, counted, share):
    """A half cent goes up; interest is 5 % x share x 1,000,000.00."""
    assert one(told, settle) == (counted, half_up(10**8 * Fraction(5, 100) * share), False)


def test_yen_have_no_decimals_and_dinars_three():
    assert one(row(currency="JPY"), "2021-06-16", 10**8)[1] == half_up(10**8 * Fraction(5, 100) * Fraction(1, 366))
    assert one(row(currency="KWD"), "2021-06-16", 10**9)[1] == half_up(10**9 * Fraction(5, 100) * Fraction(1, 366))


def test_exact_where_floats_are_not():
    """A face of a hundred billion dollars (10^13 cents), one day of 1/8 %."""
    expected = half_up(Fraction(10**13) * Fraction(125, 100_000) * Fraction(1, 183 * 2))
    assert one(row(coupon_rate="0.125"), "2021-06-16", 10**13)[1] == expected


@pytest.mark.parametrize(
    "rounding,per100",
    [
        ("", None), ("100:3", Fraction(1366, 1000)), ("100:5", Fraction(136_612, 100_000)), ("1000:2", Fraction(1366, 1000)),
        ("down", None), ("100:7 down", Fraction(13_661_202, 10_000_000)), ("1:4", Fraction(137, 100)),
    ],
)  # fmt: skip
def test_rounding_rules(rounding, per100):
    """100 days of 183 of 2.5 per 100 are 1.36612021857...; per so much of face first, then on 12,345,678.90, half up or down."""
    exact = Fraction(5) * Fraction(100, 366) if per100 is None else per100
    amount = Fraction(1_234_567_890) * exact / 100
    expected = int(amount) if "down" in rounding else half_up(amount)
    assert one(row(accrued_rounding=rounding), "2021-09-23", 1_234_567_890)[:2] == (100, expected)


def test_down_cuts_negative_interest_towards_zero():
    part = one(row(accrued_rounding="down", ex_dividend="10c"), "2021-12-08", 10**8)
    assert part == (-7, -int(10**8 * Fraction(5, 100) * Fraction(7, 366)), True)


EX = (
    (row(ex_dividend="10c"), "2021-12-04", 172, Fraction(172, 366), False),
    (row(ex_dividend="10c"), "2021-12-05", -10, Fraction(-10, 366), True),
    (row(ex_dividend="10c"), "2021-12-14", -1, Fraction(-1, 366), True),
    (row(ex_dividend="10c"), "2021-12-15", 0, Fraction(0), False),
    # counted in days the coupon is counted in days too: what is left of it is what is given back (South African practice)
    (row(ex_dividend="10c", day_count="Act/365F"), "2021-12-05", -10, Fraction(-10, 365), True),
    (row(ex_dividend="10c", day_count="30/360"), "2021-12-05", -10, Fraction(-10, 360), True),
    # an odd first coupon is given back whole: 86 days of 183 less 76 gone
    (row(ex_dividend="10c", accrual_start="2020-09-20"), "2020-12-05", -10, Fraction(-10, 366), True),
    # the last period, before maturity
    (row(ex_dividend="6b"), "2030-06-10", -5, Fraction(-5, 364), True),
)  # fmt: skip


@pytest.mark.parametrize("told,settle,counted,share,ex", EX)
def test_ex_dividend(told, settle, counted, share, ex):
    assert one(told, settle) == (counted, half_up(10**8 * Fraction(5, 100) * share), ex)


def test_on_or_after_maturity_there_is_no_answer():
    part = accrual.accrued(made(row()), np.zeros(3, np.int64), days("2030-06-14", "2030-06-15", ""), np.full(3, 10**8))
    assert part.sound.tolist() == [True, False, False]
    assert part.minor[1:].tolist() == [MISSING, MISSING]


def test_rates_in_force():
    """Steps take effect with the period that begins on or after them; before the first, the bond's own rate."""
    stepped = row(kind="stepped", coupon_rate="1", day_count="30/360")
    rates = [(0, "2022-06-15", "2"), (0, "2023-01-01", "3")]
    for settle, rate in (("2022-05-15", 1), ("2022-07-15", 2), ("2023-05-15", 2), ("2023-07-15", 3)):
        terms = made(stepped, rates=rates)
        part = accrual.accrued(terms, ONE, days(settle), MILLION)
        assert part.rate_e9.tolist() == [rate * 10**9]
    assert accrual.coupon_amounts(made(stepped, rates=rates), ONE, days("2023-06-15"), MILLION).tolist() == [10**6]


def test_a_floater_without_a_fixing_has_no_interest_to_tell():
    floating = row(kind="floating", coupon_rate="", day_count="Act/360")
    terms = made(floating, rates=[(0, "2023-06-15", "4")])
    part = accrual.accrued(terms, np.zeros(2, np.int64), days("2023-06-20", "2023-06-14"), np.full(2, 10**8))
    assert part.sound.tolist() == [True, False] and part.minor.tolist() == [half_up(Fraction(4 * 5 * 10**8, 36_000)), MISSING]
    assert accrual.coupon_amounts(terms, np.zeros(2, np.int64), days("2023-12-15", "2023-06-15"), np.full(2, 10**8))[1] == MISSING


def test_factors():
    """Trades go by the factor on the day; a coupon by the one at its period's start (amortising) or on its own day (linked)."""
    factors = [(0, "2021-06-15", "0.9"), (0, "2021-10-01", "0.75")]
    amortising = made(row(kind="amortising", day_count="30/360"), factors=factors)
    linked = made(row(kind="linked", day_count="30/360"), factors=factors)
    for terms, coupon in ((amortising, "0.9"), (linked, "0.75")):
        part = accrual.accrued(terms, np.zeros(2, np.int64), days("2021-09-15", "2021-11-15"), np.full(2, 10**8))
        assert part.minor.tolist() == [half_up(10**8 * Fraction(5, 100) * Fraction(90, 360) * Fraction("0.9")),
                                       half_up(10**8 * Fraction(5, 100) * Fraction(150, 360) * Fraction("0.75"))]  # fmt: skip
        paid = accrual.coupon_amounts(terms, ONE, days("2021-12-15"), MILLION)
        assert paid.tolist() == [half_up(10**8 * Fraction(25, 1000) * Fraction(coupon))]


def test_japanese_interest_stops_at_half_the_coupon():
    """184 days of Act/365F are more than half a year; accrued stays at half the coupon, also unrounded (markets.csv, JP_JGB)."""
    terms = made({"market": "JP_JGB", "coupon_rate": "2.9", "accrual_start": "2003-03-20", "maturity": "2030-03-20"})
    part = accrual.accrued(terms, np.zeros(2, np.int64), days("2004-09-19", "2004-09-18"), np.full(2, 10**9))
    assert part.minor.tolist() == [14_500_000, int(10**9 * Fraction(29, 1000) * Fraction(182, 365))]
    assert Fraction(int(part.numerator[0]), int(part.denominator[0])) == Fraction(1, 2)


# --- laws --------------------------------------------------------------------------------------------------------------------

COUNTS = st.sampled_from([entry.name for entry in DAY_COUNTS])


@given(COUNTS, st.sampled_from(["1", "2", "4", "12"]), st.integers(1, 80), st.integers(0, 3600), st.integers(1, 10**13))
def test_interest_grows_from_nothing_to_the_coupon(count, frequency, eighths, day, face):
    """On the coupon date nothing; day by day no less; the day before the next coupon less than or as much as that coupon."""
    told = row(day_count=count, frequency=frequency, coupon_rate=str(eighths / 8), calendar="XECB", accrual_start="2019-11-20")
    terms = made(told)
    settle = date(2019, 11, 20) + timedelta(days=day)
    some = days(settle.isoformat(), (settle + timedelta(days=1)).isoformat())
    rows, faces = np.zeros(2, np.int64), np.full(2, face)
    part = accrual.accrued(terms, rows, some, faces)
    exact = [Fraction(int(n), int(d)) for n, d in zip(part.numerator, part.denominator, strict=True)]
    assert min(exact) >= 0 and part.minor[0] == half_up(Fraction(face) * int(part.rate_e9[0]) * exact[0] / (100 * 10**9))
    if part.previous[0] == part.previous[1]:
        assert exact[0] <= exact[1]
    else:
        assert exact[1] == 0 and part.days[1] == 0
        paid = accrual.coupon_amounts(terms, ONE, part.next[:1], faces[:1])
        assert part.minor[0] <= paid[0] + 1


@given(COUNTS, st.integers(0, 300), st.sampled_from(["5c", "6b", "10c"]))
def test_cum_less_ex_is_the_coupon(count, day, rule):
    """Whatever the day count: interest with the coupon less interest without it is the whole coupon."""
    told = row(day_count=count, calendar="XECB", accrual_start="2020-01-20", first_coupon="2020-12-15")
    plain, without = made(told), made(told | {"ex_dividend": rule})
    settle = days((date(2020, 12, 14) - timedelta(days=day)).isoformat())
    cum, ex = (accrual.accrued(terms, ONE, settle, MILLION) for terms in (plain, without))
    assert ex.ex[0] == (settle[0] >= schedules.ex_dates(without, ONE, cum.next)[0])
    difference = Fraction(int(cum.numerator[0]), int(cum.denominator[0])) - Fraction(int(ex.numerator[0]), int(ex.denominator[0]))
    whole = accrual.coupon_fraction(plain, ONE, schedules.period_ending(plain, ONE, cum.next))
    assert difference == (Fraction(int(whole[0][0]), int(whole[1][0])) if ex.ex[0] else 0)


def test_one_by_one_as_all_together():
    terms = made(*(told for told, *_ in (*ACCRUED, *EX)))
    rows = np.arange(len(terms))
    settle = days(*(case[1] for case in (*ACCRUED, *EX)))
    face = np.arange(1, len(terms) + 1) * 1_234_567
    whole = accrual.accrued(terms, rows, settle, face)
    coupon = np.where(np.isnat(whole.next), settle, whole.next)
    amounts = accrual.coupon_amounts(terms, rows, coupon, face)
    for n in rows:
        part = slice(n, n + 1)
        alone = accrual.accrued(terms, rows[part], settle[part], face[part])
        for name, column in vars(whole).items():
            np.testing.assert_array_equal(getattr(alone, name), column[part], err_msg=name)
        assert accrual.coupon_amounts(terms, rows[part], coupon[part], face[part])[0] == amounts[n]
    none = accrual.accrued(terms, rows[:0], settle[:0], face[:0])
    assert all(len(column) == 0 for column in vars(none).values())
    assert len(accrual.coupon_amounts(terms, rows[:0], settle[:0], face[:0])) == 0


# --- coupons and redemption --------------------------------------------------------------------------------------------------

COUPONS = (
    (row(), "2024-06-15", Fraction(1, 2)),
    (row(day_count="30/360"), "2024-06-15", Fraction(1, 2)),
    (row(day_count="30/360", maturity="2030-02-28", accrual_start="2020-08-31", end_of_month="yes"), "2025-02-28", Fraction(1, 2)),
    (row(day_count="Act/360"), "2024-06-15", Fraction(183, 360)),
    (row(day_count="Act/365F"), "2024-06-15", Fraction(183, 365)),
    (row(day_count="Act/365 Canada"), "2024-06-15", Fraction(1, 2)),
    (row(accrual_start="2020-09-20"), "2020-12-15", Fraction(86, 183 * 2)),
    (row(accrual_start="2020-01-20", first_coupon="2020-12-15"), "2020-12-15", Fraction(147, 183 * 2) + Fraction(1, 2)),
    (row(accrual_start="2020-01-20", first_coupon="2020-12-15", day_count="30E/360"), "2020-12-15", Fraction(325, 360)),
    (row(last_regular_coupon="2029-12-15", maturity="2030-09-01"), "2030-09-01", Fraction(1, 2) + Fraction(78, 183 * 2)),
    # a first coupon off the grid leaves a broken second period: 2021-02-01 to 2021-06-15
    (row(accrual_start="2020-11-01", first_coupon="2021-02-01"), "2021-02-01", Fraction(44, 183 * 2) + Fraction(48, 182 * 2)),
    (row(accrual_start="2020-11-01", first_coupon="2021-02-01"), "2021-06-15", Fraction(134, 182 * 2)),
    (row(accrual_start="2020-11-01", first_coupon="2021-02-01"), "2021-12-15", Fraction(1, 2)),
    # Sunday 2027-08-15 is paid and counted to the Monday
    (row(accrual_start="2027-02-15", maturity="2030-02-15", accrual_adjustment="adjusted", day_count="Act/360"), "2027-08-15", Fraction(182, 360)),
)  # fmt: skip


@pytest.mark.parametrize("told,coupon,share", COUPONS, ids=lambda part: str(part)[-40:] if isinstance(part, dict) else str(part))
def test_coupon_amounts(told, coupon, share):
    found = accrual.coupon_amounts(made(told), ONE, days(coupon), np.array([123_456_789]))
    assert found.tolist() == [half_up(Fraction(123_456_789) * Fraction(5, 100) * share)]


def test_the_short_way_to_a_coupon_is_the_long_way():
    """Regular coupons are paid at sight; period by period they must come out the same, bond by bond and date by date."""
    terms = made(*(told for told, *_ in COUPONS), *(row(frequency=f, day_count=c.name, calendar="XECB") for f in ("1", "4") for c in DAY_COUNTS))
    coupons = schedules.all_coupons(terms, np.arange(len(terms)))
    face = np.full(len(coupons), 987_654_321)
    found = accrual.coupon_amounts(terms, coupons.bond_row, coupons.unadjusted, face)
    periods = schedules.period_ending(terms, coupons.bond_row, coupons.unadjusted)
    above, below = accrual.coupon_fraction(terms, coupons.bond_row, periods)
    expected = [half_up(Fraction(987_654_321) * Fraction(5, 100) * Fraction(int(a), int(b))) for a, b in zip(above, below, strict=True)]
    assert found.tolist() == expected


def test_redemptions():
    """At the redemption price; on what is left of an amortising bond; on the index ratio, at least par where the market says so."""
    factors = [(2, "2024-01-01", "0.25"), (2, "2030-06-15", "0"), (3, "2030-06-15", "0.98"), (4, "2030-06-15", "0.98"), (5, "2030-01-01", "1.5")]
    tips = {"market": "US_TIPS", "coupon_rate": "1", "maturity": "2030-06-15"}
    told = (row(), row(redemption_price="102.5"), row(kind="amortising"), row(kind="linked"), tips, tips)
    terms = made(*told, factors=factors)
    found = accrual.redemption_amounts(terms, np.arange(6), np.full(6, 10**8))
    assert found.tolist() == [10**8, 102_500_000, 25_000_000, 98_000_000, 10**8, 15 * 10**7]


def test_partial_redemptions():
    """Each drop of the factor pays back its part, on the day it takes effect or the next open one."""
    factors = [(0, "2022-01-01", "0.75"), (0, "2023-01-02", "0.5"), (0, "2030-06-15", "0"), (1, "2022-01-01", "0.9")]
    terms = made(row(kind="amortising", redemption_price="101", calendar="XECB"), row(kind="linked"), factors=factors)
    whole = accrual.partial_redemptions(terms, np.arange(2), np.datetime64("2000-01-01"), np.datetime64("2040-01-01"))
    assert whole.bond_row.tolist() == [0, 0]
    assert whole.unadjusted.tolist() == days("2022-01-01", "2023-01-02").tolist()
    assert whole.payment_date.tolist() == days("2022-01-03", "2023-01-02").tolist()
    paid = accrual.partial_amounts(terms, whole.bond_row, whole.drop_e12, np.full(2, 10**8))
    assert paid.tolist() == [25_250_000, 25_250_000]
    inside = accrual.partial_redemptions(terms, np.arange(2), np.datetime64("2022-01-02"), np.datetime64("2022-01-03"))
    assert len(inside) == 1
