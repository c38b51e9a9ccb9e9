"""What is at stake, reckoned again with fractions, and for the revaluation with QuantLib."""

from __future__ import annotations

from datetime import date
from fractions import Fraction
from typing import Any

import pytest
import QuantLib as ql

from reconciler import settings
from reconciler.records import MISSING
from tests.breaks.hand import BILL, NOTE, TRUE, YEN, ZERO, One, coupon, entry, found, only

AMOUNT = TRUE["settlement_minor"]


def _one(one: One, told: settings.Settings | None = None, on: str = "2026-03-31") -> dict[str, Any]:
    return only(found([one], told, on)[1])


@pytest.mark.parametrize(
    ("one", "stake"),
    [
        (One(broker={"settlement_minor": AMOUNT - 500}), 500),
        (coupon(bank=[{"amount_minor": 1_700_000}]), 300_000),
        (One(broker={"accrued_minor": 1_100_000}), 66_667),
        (One(desk={"fees_minor": 0}, broker={"fees_minor": 2500}), 2500),
        (One(bank=[]), AMOUNT),
        (entry(amount_minor=-4242), 4242),
        (One(broker={"trade_date": "2026-03-26"}), 0),
        (One(broker={"settlement_date": "2026-04-02"}), 0),
        (One(broker={"account": "Northquay custody"}), 0),
        (One(broker={"currency": "EUR"}), 0),
    ],
)
def test_money_at_stake(one: One, stake: int) -> None:
    assert _one(one)["stake_minor"] == stake


@pytest.mark.parametrize(
    ("one", "told", "daily"),
    [
        # minor units x percent / 100 / days of the year, half up
        (One(bank=[]), {"interest": {"USD": 4}}, Fraction(AMOUNT * 4, 100 * 360)),
        (One(broker={"settlement_minor": AMOUNT - 50_000_000}), {"interest": {"all": 5}}, Fraction(50_000_000 * 5, 100 * 360)),
        (coupon(bond=YEN, bank=[]), {"interest": {"JPY": 1}}, Fraction(2_000_000, 100 * 360)),
        (One(bank=[]), {"interest": {"USD": 4}, "interest_basis": {"USD": 365}}, Fraction(AMOUNT * 4, 100 * 365)),
        (One(bank=[]), {}, Fraction(0)),
    ],
)
def test_daily_interest(one: One, told: dict[str, Any], daily: Fraction) -> None:
    assert _one(one, settings.of(told))["daily_interest_minor"] == int(daily + Fraction(1, 2))


def test_a_wrong_day_costs_the_interest_of_its_days() -> None:
    one = _one(One(bank=[{"value_date": "2026-04-02"}]), settings.of({"interest": {"USD": 3}}), "2026-04-03")
    assert one["stake_minor"] == int(Fraction(AMOUNT * 3 * 3, 100 * 360) + Fraction(1, 2))
    assert one["daily_interest_minor"] == int(Fraction(AMOUNT * 3, 100 * 360) + Fraction(1, 2))


@pytest.mark.parametrize(
    ("one", "on", "days"),
    [
        (One(bank=[]), "2026-03-31", 1),
        # Memorial Day, 25 May 2026, closes the US bond market (SIFMA) but not Japan
        (coupon(terms={"terms_date": "2026-05-22"}, bank=[]), "2026-05-26", 1),
        (coupon(terms={"terms_date": "2026-05-22"}, bond=YEN, bank=[]), "2026-05-26", 2),
        (One(broker=None, terms={"terms_date": "2026-04-01"}, desk={"settlement_date": "2026-04-01"}, bank=[]), "2026-03-31", 0),
        (One(broker=None, terms={"terms_date": "2026-03-31"}, desk={"settlement_date": "2026-03-31"}, bank=[]), "2026-03-31", 0),
        (entry(value_date="2026-03-27"), "2026-03-31", 2),
        (entry(value_date="2026-04-07"), "2026-03-31", 0),
    ],
)
def test_overdue_days_are_business_days_of_the_bonds_calendar(one: One, on: str, days: int) -> None:
    assert _one(one, on=on)["overdue_days"] == days


def _quantlib_exposure(yield_of: Any, price_of: Any, clean: float, face: int) -> int:
    dealt = yield_of(clean)
    return round(max(abs(price_of(dealt + shift) - price_of(dealt)) for shift in (-0.01, 0.01)) / 100 * face)


def test_exposure_of_a_coupon_bond() -> None:
    """1,000,000 of 4 % half-yearly 15 June 2031 at 99.5, settled 30 March 2026."""
    schedule = ql.Schedule(ql.Date(15, 6, 2021), ql.Date(15, 6, 2031), ql.Period(6, ql.Months), ql.NullCalendar(), ql.Unadjusted,
                           ql.Unadjusted, ql.DateGeneration.Backward, False)  # fmt: skip
    count = ql.Thirty360(ql.Thirty360.USA)
    bond, day = ql.FixedRateBond(0, 100, schedule, [0.04], count), ql.Date(30, 3, 2026)

    def of_price(clean: float) -> float:
        return float(bond.bondYield(ql.BondPrice(clean, ql.BondPrice.Clean), count, ql.Compounded, ql.Semiannual, day, 1e-12))

    expected = _quantlib_exposure(of_price, lambda y: bond.cleanPrice(y, count, ql.Compounded, ql.Semiannual, day), 99.5, 100_000_000)
    assert _one(One(broker=None))["rate_exposure_minor"] == pytest.approx(expected, abs=100)


def test_exposure_of_a_thirty_year_zero_is_far_above_a_bills() -> None:
    """The same million: unconfirmed, the zero loses a quarter with a point of yield, the bill a fifth of a percent."""
    price = {"price_e12": 22 * 10**12}
    zero = One(bond=ZERO, broker=None, terms=price, desk=price)
    discount = {"price_e12": 4 * 10**12}
    bill = One(bond=BILL, broker=None, terms=discount, desk=discount)
    _, breaks = found([bill, zero])
    assert breaks["item"].to_list() == ["trade 001", "trade 000"]
    assert breaks["rank"].tolist() == [1, 2]
    years = (date(2056, 2, 15) - date(2026, 3, 30)).days / 365
    # compounding yearly, in closed form: price (1 + y)^-t with y from the dealt price
    dealt = (100 / 22) ** (1 / years) - 1
    loss = 100 * ((1 + dealt - 0.01) ** -years) - 22
    assert breaks["rate_exposure_minor"][0] == pytest.approx(loss * 1_000_000, rel=0.002)
    # simple interest over 80 days of Act/360 on a price of 100 - 4 x 80 / 360
    clean = 100 - 4 * 80 / 360
    rate = (100 / clean - 1) / (80 / 360)
    loss = 100 / (1 + (rate - 0.01) * 80 / 360) - clean
    assert breaks["rate_exposure_minor"][1] == pytest.approx(loss * 1_000_000, rel=0.002)
    assert breaks["stake_minor"].tolist() == breaks["rate_exposure_minor"].tolist()


def test_a_disputed_face_is_worth_at_least_the_cash_in_dispute() -> None:
    _, breaks = found([One(bond=NOTE, broker={"face_minor": 10**9, "settlement_minor": AMOUNT * 10})])
    row = breaks["break"].to_list().index("face")
    assert breaks["stake_minor"][row] == AMOUNT * 9 > breaks["rate_exposure_minor"][row] > 0


def test_exposure_is_blank_where_the_price_gives_no_yield() -> None:
    told = {"price_e12": 10**18 - 1}
    one = _one(One(broker=None, desk=told, terms=told))
    assert one["rate_exposure_minor"] == MISSING
    assert one["stake_minor"] == 0
    assert _one(One(bank=[]))["rate_exposure_minor"] == MISSING


def test_exposure_grows_with_the_face_alone() -> None:
    small = _one(One(broker=None))["rate_exposure_minor"]
    large = _one(One(broker=None, terms={"face_minor": 10 * TRUE["face_minor"]}, desk={"face_minor": 10 * TRUE["face_minor"]}))
    assert large["rate_exposure_minor"] == pytest.approx(10 * small, abs=10)
