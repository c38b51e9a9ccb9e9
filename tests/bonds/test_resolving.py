"""What bonds.csv leaves blank comes from the market; what cannot be is said with its row, column and reason."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.bonds import schedules
from reconciler.bonds.calendars import ADJUSTMENTS
from reconciler.bonds.daycounts import DAY_COUNTS
from reconciler.bonds.terms import BUSINESS, CALENDAR, KINDS, ONE, QUOTES
from reconciler.money import MISSING
from tests.bonds.made import days, made, resolved, row, zero


def test_a_market_fills_every_blank():
    """A gilt that tells no more than its coupon and its dates (markets.csv, UK_GILT)."""
    gilt = made({"market": "UK_GILT", "coupon_rate": "4.25", "accrual_start": "2020-06-07", "maturity": "2032-06-07"})
    assert gilt.currency == ("GBP",) and KINDS[gilt.kind[0]] == "fixed" and gilt.frequency[0] == 2
    assert DAY_COUNTS[gilt.day_count[0]].name == "Act/Act ICMA" and QUOTES[gilt.quote[0]] == "price"
    assert ADJUSTMENTS[gilt.payment_adjustment[0]] == "following" and not gilt.accrual_adjusted[0]
    assert gilt.calendars.codes[gilt.calendar[0]] == "GB-ENG"
    assert (gilt.ex_days[0], gilt.ex_unit[0], gilt.record_days[0], gilt.record_unit[0]) == (6, BUSINESS, 7, BUSINESS)
    assert gilt.redemption_price_e12[0] == 100 * ONE and gilt.settlement_days[0] == MISSING


def test_what_the_bond_tells_goes_before_its_market():
    told = {"market": "UK_GILT", "coupon_rate": "4", "maturity": "2032-06-07", "ex_dividend": "10c", "record": "11c", "calendar": "XECB",
            "currency": "EUR", "frequency": "1", "day_count": "30E/360", "settlement_days": "3", "redemption_price": "102.5"}  # fmt: skip
    terms = made(told)
    assert terms.currency == ("EUR",) and terms.frequency[0] == 1 and terms.settlement_days[0] == 3
    assert (terms.ex_days[0], terms.ex_unit[0]) == (10, CALENDAR)
    # a told calendar stands for settlement and for payment
    assert terms.calendars.codes[terms.calendar[0]] == terms.calendars.codes[terms.payment_calendar[0]] == "XECB"
    assert terms.redemption_price_e12[0] == 102_500_000_000_000


def test_treasuries_settle_and_pay_by_two_calendars():
    terms = made({"market": "US_TNOTE", "coupon_rate": "4", "maturity": "2032-05-15"})
    codes = terms.calendars.codes
    assert (codes[terms.calendar[0]], codes[terms.payment_calendar[0]]) == ("XSIF", "XFED")


def test_nobody_tells_it():
    """The defaults of the contract: fixed, following, unadjusted, price, redeemed at 100, record one business day before."""
    terms = made({"coupon_rate": "5", "frequency": "2", "day_count": "30/360", "maturity": "2030-06-15"})
    assert KINDS[terms.kind[0]] == "fixed" and QUOTES[terms.quote[0]] == "price" and terms.market[0] == -1
    assert ADJUSTMENTS[terms.payment_adjustment[0]] == "following" and not terms.accrual_adjusted[0]
    assert (terms.record_days[0], terms.record_unit[0], terms.ex_days[0]) == (1, BUSINESS, MISSING)
    assert terms.calendars.codes[terms.calendar[0]] == ""


def test_words_are_known_whatever_their_case():
    assert made(row(kind="Fixed", day_count="act/act icma", end_of_month="NO", payment_adjustment="Modified Following"))


FAULTS = (
    (row(kind="fixd"), "kind", "fixd"),
    (row(frequency="3"), "frequency", "3"),
    (row(frequency=""), "frequency", ""),
    (row(frequency="0"), "frequency", ""),
    (row(day_count=""), "day_count", ""),
    (row(day_count="ACT/365"), "day_count", "ACT/365"),
    (row(coupon_rate=""), "coupon_rate", ""),
    (row(maturity=""), "maturity", ""),
    (row(maturity="2020-06-15"), "maturity", "2020-06-15"),
    (row(first_coupon="2031-01-01"), "maturity", "2030-06-15"),
    (row(first_coupon="2020-06-15"), "first_coupon", "2020-06-15"),
    (row(last_regular_coupon="2031-01-01"), "maturity", "2030-06-15"),
    (row(last_regular_coupon="2020-01-15"), "last_regular_coupon", "2020-01-15"),
    (row(first_coupon="2022-06-15", last_regular_coupon="2021-12-15"), "last_regular_coupon", "2021-12-15"),
    (row(end_of_month="perhaps"), "end_of_month", "perhaps"),
    (row(payment_adjustment="next"), "payment_adjustment", "next"),
    (row(accrual_adjustment="both"), "accrual_adjustment", "both"),
    (row(calendar="XX-NOWHERE"), "calendar", "XX-NOWHERE"),
    (row(ex_dividend="six"), "ex_dividend", "six"),
    (row(record="6d"), "record", "6d"),
    (row(quote="64ths"), "quote", "64ths"),
    (row(accrued_rounding="0:3"), "accrued_rounding", "0:3"),
    (row(accrued_rounding="up"), "accrued_rounding", "up"),
    (row(currency="EURO"), "currency", "EURO"),
    (row(market="MARS", currency="USD"), "market", "MARS"),
)  # fmt: skip


@pytest.mark.parametrize("told,column,value", FAULTS, ids=lambda part: str(part)[:20])
def test_what_cannot_be_is_said(told, column, value):
    """The bond keeps its row, is marked, and the good bond beside it is not touched."""
    terms, faults = resolved([row(), told])
    assert [(where, name, text) for where, name, text, _reason in faults] == [(1, column, value)]
    assert all(reason.endswith(".") and not reason[0].isupper() for *_, reason in faults)
    assert terms.sound.tolist() == [True, False]


def test_a_currency_is_needed_unless_it_is_not():
    assert [fault[1] for fault in resolved([row(currency="")])[1]] == []  # made.py tells USD
    blank = row() | {"currency": ""}
    assert [fault[1] for fault in resolved([blank])[1]] == ["currency"]


@pytest.mark.parametrize(
    "told,end_of_month",
    [
        # told, or said by the market
        ({"end_of_month": "yes", "maturity": "2030-06-30"}, True),
        ({"end_of_month": "no", "maturity": "2030-06-30", "first_coupon": "2020-12-31"}, False),
        ({"market": "US_TNOTE", "maturity": "2030-06-30"}, True),
        ({"market": "US_TNOTE", "maturity": "2030-06-15"}, False),
        ({"end_of_month": "yes", "maturity": "2030-06-15"}, False),
        # the dates speak: a June month end that pays on 31 December, a February that pays on 31 August
        ({"maturity": "2030-06-30", "first_coupon": "2020-12-31"}, True),
        ({"maturity": "2030-02-28", "first_coupon": "2020-08-31"}, True),
        ({"market": "US_CORP", "maturity": "2030-06-30", "first_coupon": "2020-12-31"}, True),
        ({"maturity": "2030-06-30", "accrual_start": "2019-12-31"}, True),
        # they do not: the same day of the month, or a first coupon that lies on no grid
        ({"maturity": "2030-08-31", "first_coupon": "2021-02-28"}, True),
        ({"maturity": "2030-06-30", "first_coupon": "2020-12-30"}, False),
        ({"maturity": "2030-06-30", "first_coupon": "2021-01-31"}, False),
        ({"maturity": "2030-06-30"}, False),
    ],
)
def test_the_end_of_month_rule(told, end_of_month):
    facts = {"coupon_rate": "5", "frequency": "2", "day_count": "Act/Act ICMA"} | told
    assert made(facts).end_of_month.tolist() == [end_of_month]


def test_a_first_coupon_alone_tells_where_interest_begins():
    terms = made(row(accrual_start="", first_coupon="2021-06-15"), row(accrual_start="", first_coupon="2021-04-01"))
    assert terms.accrual_start.tolist() == days("2020-12-15", "2020-12-15").tolist()


def test_a_bond_of_one_odd_period():
    """Interest that begins with the last regular coupon is paid once, at maturity, also after more than a period."""
    terms = made(row(accrual_start="2029-12-15", last_regular_coupon="2029-12-15", maturity="2030-09-01"))
    assert terms.first_coupon.tolist() == days("2030-09-01").tolist()
    assert schedules.all_coupons(terms, np.array([0])).unadjusted.tolist() == days("2030-09-01").tolist()


def test_zeros_need_little():
    terms = made(zero(), {"market": "US_STRIPS", "maturity": "2030-05-15"}, {"kind": "zero", "maturity": "2030-05-15", "frequency": "2"})
    assert terms.frequency.tolist() == [0, 0, 0] and terms.sound.all()
    assert terms.compounding.tolist() == [MISSING, 2, 2]


def test_steps_come_in_any_order():
    """Rates lie by bond and date; bonds that are not there are left out."""
    rates = [(1, "2024-01-01", "3"), (0, "2023-01-01", "2"), (1, "2022-01-01", "1"), (-1, "2022-01-01", "9")]
    told = row(kind="stepped")
    for order in ([0, 1, 2, 3], [3, 2, 1, 0]):
        terms = made(told, told, rates=[rates[n] for n in order])
        assert terms.rate_offsets.tolist() == [0, 1, 3]
        assert terms.rate_e9s.tolist() == [2 * 10**9, 10**9, 3 * 10**9]


def test_nothing_is_resolved_to_nothing():
    terms, faults = resolved([])
    assert len(terms) == 0 and not faults
