"""Periods, stubs, payment dates, ex-dividend and record dates, case by case and as laws."""

from __future__ import annotations

from datetime import date, timedelta

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds import schedules
from tests.bonds.made import days, made, row, zero

ONE = np.zeros(1, np.int64)

# --- coupon dates ------------------------------------------------------------------------------------------------------------

SCHEDULES = {
    "regular": (row(accrual_start="2028-06-15"), "2028-12-15 2029-06-15 2029-12-15 2030-06-15"),
    "short first": (row(accrual_start="2028-11-01"), "2028-12-15 2029-06-15 2029-12-15 2030-06-15"),
    "long first": (row(accrual_start="2028-11-01", first_coupon="2029-06-15"), "2029-06-15 2029-12-15 2030-06-15"),
    "first off the grid": (row(accrual_start="2028-11-01", first_coupon="2029-02-01"), "2029-02-01 2029-06-15 2029-12-15 2030-06-15"),
    "short last": (row(accrual_start="2028-12-15", last_regular_coupon="2029-12-15", maturity="2030-03-01"), "2029-06-15 2029-12-15 2030-03-01"),
    "long last": (row(accrual_start="2028-12-15", last_regular_coupon="2029-12-15", maturity="2030-09-01"), "2029-06-15 2029-12-15 2030-09-01"),
    "both": (row(accrual_start="2028-11-01", first_coupon="2029-06-15", last_regular_coupon="2029-12-15", maturity="2030-09-01"),
             "2029-06-15 2029-12-15 2030-09-01"),
    "one period": (row(accrual_start="2030-01-15"), "2030-06-15"),
    "first coupon is maturity": (row(accrual_start="2029-10-01", first_coupon="2030-06-15"), "2030-06-15"),
    "month ends": (row(accrual_start="2028-08-31", maturity="2030-02-28", end_of_month="yes"), "2029-02-28 2029-08-31 2030-02-28"),
    "clamped": (row(accrual_start="2028-02-29", maturity="2029-08-30", end_of_month="no"), "2028-08-30 2029-02-28 2029-08-30"),
    "thirtieth without the rule": (row(accrual_start="2029-06-30", maturity="2030-06-30", end_of_month="no"), "2029-12-30 2030-06-30"),
    "quarterly": (row(accrual_start="2029-09-15", frequency="4"), "2029-12-15 2030-03-15 2030-06-15"),
    "monthly over a leap day": (row(accrual_start="2028-01-31", frequency="12", maturity="2028-04-30", end_of_month="yes"), "2028-02-29 2028-03-31 2028-04-30"),
}  # fmt: skip


@pytest.mark.parametrize("name", SCHEDULES)
def test_coupon_dates(name):
    told, expected = SCHEDULES[name]
    terms = made(told)
    assert schedules.all_coupons(terms, ONE).unadjusted.tolist() == days(*expected.split()).tolist()


def test_without_a_start_coupons_reach_back_to_where_calendars_begin():
    coupons = schedules.all_coupons(made(row(accrual_start="")), ONE)
    assert coupons.unadjusted[0] == days("1970-06-15")[0] and len(coupons) == 121


def test_zeros_and_unsound_bonds_have_no_coupons():
    terms = made(zero(), row())
    assert len(schedules.all_coupons(terms, np.array([0]))) == 0
    periods = schedules.periods_at(terms, np.array([0, 1, 1]), days("2024-01-01", "2030-06-15", ""))
    assert np.isnat(periods.start).all() and np.isnat(periods.end).all()


def test_many_bonds_side_by_side():
    """Flat, by bond and date, and the same as each alone; rows may repeat and come in any order."""
    terms = made(*(told for told, _ in SCHEDULES.values()))
    rows = np.array([5, 2, 2, 9, 0])
    whole = schedules.all_coupons(terms, rows)
    alone = [schedules.all_coupons(terms, rows[n : n + 1]) for n in range(len(rows))]
    assert whole.unadjusted.tolist() == np.concatenate([one.unadjusted for one in alone]).tolist()
    assert whole.bond_row.tolist() == np.concatenate([one.bond_row for one in alone]).tolist()
    assert whole.payment_date.tolist() == np.concatenate([one.payment_date for one in alone]).tolist()
    assert len(schedules.all_coupons(terms, rows[:0])) == 0


@given(day=st.dates(date(2026, 1, 1), date(2031, 12, 31)), name=st.sampled_from(list(SCHEDULES)))
def test_periods_follow_one_another(day, name):
    """A day lies in exactly one period, and periods meet end to start from the accrual start to maturity."""
    terms = made(SCHEDULES[name][0])
    start, maturity = terms.accrual_start[0].item(), terms.maturity[0].item()
    bounds = [start, *schedules.all_coupons(terms, ONE).unadjusted.tolist()]
    found = schedules.periods_at(terms, ONE, days(day.isoformat()))
    if day >= maturity:
        assert np.isnat(found.start[0])
        return
    place = max((n for n, bound in enumerate(bounds[:-1]) if bound <= day), default=0)
    assert (found.start[0].item(), found.end[0].item()) == (bounds[place], bounds[place + 1])
    closing = schedules.period_ending(terms, ONE, found.end)
    assert (closing.start[0], closing.end[0], closing.regular[0]) == (found.start[0], found.end[0], found.regular[0])


@pytest.mark.parametrize(
    "name,regular",
    [
        ("regular", "1111"), ("short first", "0111"), ("long first", "011"), ("first off the grid", "0011"), ("short last", "110"),
        ("long last", "110"), ("both", "010"), ("one period", "0"), ("month ends", "111"), ("clamped", "111"), ("quarterly", "111"),
    ],
)  # fmt: skip
def test_which_periods_are_regular(name, regular):
    terms = made(SCHEDULES[name][0])
    coupons = schedules.all_coupons(terms, ONE)
    found = schedules.period_ending(terms, coupons.bond_row, coupons.unadjusted).regular
    assert "".join(str(int(one)) for one in found) == regular


def test_a_last_regular_coupon_one_period_before_maturity_changes_nothing():
    told = row(last_regular_coupon="2029-12-15")
    terms = made(told)
    assert schedules.period_ending(terms, ONE, days("2030-06-15")).regular.tolist() == [True]


# --- days that move ----------------------------------------------------------------------------------------------------------

# 2027-05-30 and 31: a Sunday and US Memorial Day; 2028-05-27 to 29 a Saturday to the same holiday
PAYMENTS = (
    ("unadjusted", "2027-05-30", "2027-05-30"), ("following", "2027-05-30", "2027-06-01"), ("preceding", "2027-05-30", "2027-05-28"),
    ("modified following", "2027-05-30", "2027-05-28"), ("modified preceding", "2027-05-30", "2027-05-28"),
    ("modified preceding", "2028-01-01", "2028-01-03"), ("preceding", "2028-01-01", "2027-12-31"),
    ("nearest", "2027-05-29", "2027-05-28"), ("nearest", "2027-05-30", "2027-06-01"), ("nearest", "2027-06-06", "2027-06-07"),
)  # fmt: skip


@pytest.mark.parametrize("adjustment,due,paid", PAYMENTS)
def test_payment_adjustments(adjustment, due, paid):
    """Hand-made around US holidays."""
    terms = made(row(payment_adjustment=adjustment, calendar="XSIF"))
    assert schedules.payment_dates(terms, ONE, days(due)).tolist() == days(paid).tolist()


def test_treasuries_pay_by_the_feds_days():
    """Good Friday 2026-04-03: the bond market's calendar is closed, the Fed's is open; 11 November closes both."""
    terms = made({"market": "US_TNOTE", "coupon_rate": "4", "maturity": "2032-04-03"})
    assert schedules.payment_dates(terms, ONE, days("2026-04-03")).tolist() == days("2026-04-03").tolist()
    assert schedules.payment_dates(terms, ONE, days("2026-11-11")).tolist() == days("2026-11-12").tolist()


BEFORE = (
    # rule, calendar, coupon date, day so many days before it
    ("6b", "GB-ENG", "2013-06-07", "2013-05-30"),  # the gilt of tests/published, ex from 30 May: no holiday in between
    ("6b", "GB-ENG", "2026-06-01", "2026-05-21"),  # the spring bank holiday of 25 May between
    ("1b", "", "2026-06-01", "2026-05-29"),
    ("0b", "", "2026-05-31", "2026-05-31"),
    ("10c", "ZA", "2026-06-30", "2026-06-20"),
    ("7c", "AU-NSW", "2014-08-15", "2014-08-08"),
)  # fmt: skip


@pytest.mark.parametrize("rule,calendar,coupon,expected", BEFORE)
def test_days_before_a_coupon(rule, calendar, coupon, expected):
    """Ex-dividend and record dates count back alike, from the unadjusted coupon date."""
    terms = made(row(ex_dividend=rule, record=rule, calendar=calendar))
    assert schedules.ex_dates(terms, ONE, days(coupon)).tolist() == days(expected).tolist()
    assert schedules.record_dates(terms, ONE, days(coupon)).tolist() == days(expected).tolist()


def test_no_ex_dividend_rule_no_ex_dividend_date():
    terms = made(row())
    assert np.isnat(schedules.ex_dates(terms, ONE, days("2024-06-15"))).all()
    assert schedules.record_dates(terms, ONE, days("2024-06-15")).tolist() == days("2024-06-14").tolist()


@given(st.dates(date(2021, 1, 1), date(2029, 12, 1)), st.integers(0, 60))
def test_coupons_of_a_window_are_those_paid_in_it(first, length):
    """Those of the whole schedule whose payment date lies in the window, whatever moved them in or out of it."""
    terms = made(
        row(payment_adjustment="preceding", calendar="XSIF", frequency="12"), row(calendar="XECB", frequency="4"), zero(),
        row(last_regular_coupon="2029-11-15", maturity="2030-01-20"),
    )  # fmt: skip
    rows = np.arange(4)
    whole = schedules.all_coupons(terms, rows)
    low, high = np.datetime64(first), np.datetime64(first + timedelta(days=length))
    inside = (whole.payment_date >= low) & (whole.payment_date <= high)
    found = schedules.coupons_between(terms, rows, low, high)
    assert found.bond_row.tolist() == whole.bond_row[inside].tolist()
    assert found.unadjusted.tolist() == whole.unadjusted[inside].tolist()
    assert found.payment_date.tolist() == whole.payment_date[inside].tolist()


# --- adjusted accrual --------------------------------------------------------------------------------------------------------


def test_adjusted_periods_begin_where_the_coupon_was_paid():
    """Sunday 2027-08-15 paid on Monday: interest of the old period runs to the 16th, the new one begins there."""
    terms = made(row(accrual_adjustment="adjusted", accrual_start="2027-02-15", maturity="2030-02-15", frequency="2"))
    for day, start, end in (
        ("2027-08-14", "2027-02-15", "2027-08-16"), ("2027-08-15", "2027-02-15", "2027-08-16"), ("2027-08-16", "2027-08-16", "2028-02-15"),
    ):  # fmt: skip
        found = schedules.periods_accruing(terms, ONE, days(day))
        assert (found.accrual_start[0], found.accrual_end[0]) == (days(start)[0], days(end)[0])


def test_adjusted_backwards_opens_the_new_period_early():
    """Sunday 2027-08-15 paid on the Friday before: from the 13th on the next period accrues, also without an accrual start."""
    for start in ("2027-02-15", ""):
        told = row(accrual_adjustment="adjusted", payment_adjustment="preceding", accrual_start=start, maturity="2030-02-15")
        terms = made(told)
        found = schedules.periods_accruing(terms, np.zeros(2, np.int64), days("2027-08-12", "2027-08-13"))
        assert found.accrual_end.tolist() == days("2027-08-13", "2028-02-15").tolist()
        assert found.accrual_start[1] == days("2027-08-13")[0]


def test_adjusted_interest_still_begins_on_the_told_day():
    terms = made(row(accrual_adjustment="adjusted", accrual_start="2027-08-15", maturity="2030-02-15"))
    assert schedules.periods_accruing(terms, ONE, days("2027-08-20")).accrual_start.tolist() == days("2027-08-15").tolist()


def test_one_by_one_as_all_together():
    """Scalars are arrays of length one, and nothing comes of nothing."""
    extra = {"ex_dividend": "6b", "calendar": "XECB", "accrual_adjustment": "adjusted"}
    terms = made(*(told for told, _ in SCHEDULES.values()), *(told | extra for told, _ in SCHEDULES.values()), zero())
    rows = np.tile(np.arange(len(terms)), 4)
    dates = np.datetime64("2028-07-01") + np.arange(len(rows)) * 7
    for work in (schedules.periods_at, schedules.periods_accruing, schedules.period_ending):
        whole = work(terms, rows, dates)
        for n in range(len(rows)):
            alone = work(terms, rows[n : n + 1], dates[n : n + 1])
            for name, column in vars(whole).items():
                np.testing.assert_array_equal(getattr(alone, name), column[n : n + 1], err_msg=name)
        assert all(len(column) == 0 for column in vars(work(terms, rows[:0], dates[:0])).values())
    for work in (schedules.payment_dates, schedules.ex_dates, schedules.record_dates):
        alone = [work(terms, rows[n : n + 1], dates[n : n + 1])[0] for n in range(len(rows))]
        np.testing.assert_array_equal(work(terms, rows, dates), alone)
        assert len(work(terms, rows[:0], dates[:0])) == 0
    assert len(schedules.coupons_between(terms, rows[:0], dates[0], dates[-1])) == 0
