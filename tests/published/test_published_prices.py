"""Prices, yields, durations, odd first payments and ex-dividend interest against figures that others published."""

from __future__ import annotations

import csv
import re
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from reconciler.bonds import accrual, pricing, schedules, settlement
from reconciler.bonds.pricing import ANNUAL, DISCOUNT, INVESTMENT, SIMPLE, STREET, TREASURY
from tests.bonds.made import days, made, row, zero

HERE = Path(__file__).parent
ONE = np.zeros(1, np.int64)


def rows(name: str) -> list[dict[str, str]]:
    with (HERE / name).open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


@pytest.mark.parametrize("name", sorted(path.name for path in HERE.glob("*.csv")))
def test_every_figure_names_its_source(name):
    assert all(line["source"] for line in rows(name))


# --- 31 CFR 356 Appendix B ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "line", rows("us_treasury_formulas.csv") + rows("us_treasury_reopenings.csv"), ids=lambda line: line["case"][:40]
)
def test_treasury_prices(line):
    kind = "linked" if "inflation" in line["case"] else "fixed"
    told = row(kind=kind, coupon_rate=line["rate_pct"], accrual_start=line["dated_date"], maturity=line["maturity_date"],
               first_coupon=line["first_interest_date"])  # fmt: skip
    terms, settle = made(told), days(line["issue_date"])
    price = pricing.price_from_yield(terms, ONE, settle, np.array([float(line["yield_pct"])]), TREASURY)
    assert f"{price[0]:.6f}" == line["price_per_100"]
    back = pricing.yield_from_price(terms, ONE, settle, price, TREASURY)
    assert back[0] == pytest.approx(float(line["yield_pct"]), abs=1e-9)
    if line["accrued_per_100"]:
        part = accrual.accrued(terms, ONE, settle, ONE)
        exact = Fraction(int(part.rate_e9[0]), 10**9) * Fraction(int(part.numerator[0]), int(part.denominator[0]))
        assert f"{float(exact):.6f}" == line["accrued_per_100"]


@pytest.mark.parametrize("line", rows("us_treasury_interest.csv"), ids=lambda line: line["case"][:20])
def test_odd_first_payments(line):
    """A payment of 1,000 to six decimals is one of 10 billion to the last dollar cent times 100."""
    long = "long" in line["case"]
    # the regulation's examples name no maturity: any on the grid of the first payment will do
    maturity = line["first_interest_date"].replace("1990", "1999").replace("1991", "2001")
    told = row(coupon_rate=line["rate_pct"], accrual_start=line["issue_date"], maturity=maturity,
               first_coupon=line["first_interest_date"], end_of_month="no" if long else "yes")  # fmt: skip
    terms = made(told)
    first = days(line["first_interest_date"])
    above, below = accrual.coupon_fraction(terms, ONE, schedules.period_ending(terms, ONE, first))
    exact = Fraction(line["rate_pct"]) * 10 * Fraction(int(above[0]), int(below[0]))
    assert f"{float(exact):.6f}" == line["interest_per_1000"]
    odd = exact - (Fraction(line["rate_pct"]) * 5 if long else 0)
    # the regulation shows the daily figure to nine decimals
    assert float(odd / int(line["days_counted"])) == pytest.approx(float(line["daily_per_1000"]), abs=5e-10)


@pytest.mark.parametrize("line", rows("us_treasury_bills.csv"), ids=lambda line: line["case"])
def test_bills(line):
    terms, settle = made(zero(market="US_TBILL", maturity=line["maturity_date"])), days(line["issue_date"])
    rate = np.array([float(line["discount_rate_pct"])])
    price = pricing.price_from_yield(terms, ONE, settle, rate, DISCOUNT)
    assert price[0] == pytest.approx(float(line["price_per_100"]), abs=5e-7)
    settled = settlement.settle(terms, ONE, settle, np.array([100_000_000]), np.rint(rate * 1e12).astype(np.int64))
    assert settled.principal_minor.tolist() == [round(float(line["price_per_100"]) * 1e6)]
    if line["investment_rate_pct"]:
        investment = pricing.yield_from_price(terms, ONE, settle, np.round(price, 6), INVESTMENT)
        assert f"{investment[0]:.3f}" == line["investment_rate_pct"]


# --- gilts -------------------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("by_market", [True, False])
@pytest.mark.parametrize("line", rows("gilt_ex_dividend.csv"), ids=lambda line: line["settlement_date"])
def test_gilt_around_its_ex_dividend_date(line, by_market):
    told = {"market": "UK_GILT"} if by_market else {"calendar": "GB-ENG", "ex_dividend": "6b", "currency": "GBP"}
    plain = row(coupon_rate="8", accrual_start="1996-02-29", first_coupon="1996-06-07", maturity="2021-06-07")
    terms, settle = made(plain | {"currency": "GBP"} | told), days(line["settlement_date"])
    # face of 10 billion, so that the amount shows the figure per 100 to ten decimals
    part = accrual.accrued(terms, ONE, settle, np.array([10**12]))
    assert part.minor[0] / 1e10 == pytest.approx(float(line["accrued_per_100"]), abs=1e-7)
    assert part.ex[0] == (float(line["accrued_per_100"]) < 0)
    clean = np.array([float(line["clean_price"])])
    yields = pricing.yield_from_price(terms, ONE, settle, clean)
    assert yields[0] == pytest.approx(float(line["yield_pct"]), abs=1e-8)
    duration, _point = pricing.risk(terms, ONE, settle, yields)
    assert duration[0] == pytest.approx(float(line["modified_duration"]), abs=1e-8)
    assert pricing.dirty_at(terms, ONE, settle, yields)[0] == pytest.approx(float(line["full_price"]), abs=1e-7)
    low, high = pricing.dirty_at(terms, ONE, settle, yields - 0.01), pricing.dirty_at(terms, ONE, settle, yields + 0.01)
    middle = pricing.dirty_at(terms, ONE, settle, yields)
    convexity = (low + high - 2 * middle) / 1e-8 / middle
    assert convexity[0] == pytest.approx(float(line["convexity"]), rel=1e-4)


# --- OpenFormula -------------------------------------------------------------------------------------------------------------


def _arguments(line: dict[str, str]) -> dict[str, str]:
    found = dict(part.strip().split("=") for part in line["arguments"].split(";"))
    return {name: text.removesuffix("%") for name, text in found.items()}


def _bond(told: dict[str, str]) -> object:
    count = {"30/360 US": "30/360 US", "act/act": "Act/Act ICMA"}[told["basis"]]
    rate = told.get("rate") or told.get("coupon") or "0"
    return made(row(coupon_rate=rate, day_count=count, accrual_start="", maturity=told["maturity"], end_of_month="no"))


def _function(name: str, told: dict[str, str]) -> float:
    settle = days(told["settlement"])
    if name.startswith("TBILL"):
        terms = made(zero(maturity=told["maturity"]))
        if name == "TBILLYIELD":
            return float(pricing.yield_from_price(terms, ONE, settle, np.array([float(told["price"])]), SIMPLE)[0]) / 100
        price = pricing.price_from_yield(terms, ONE, settle, np.array([float(told["discount"])]), DISCOUNT)
        if name == "TBILLPRICE":
            return float(price[0])
        return float(pricing.yield_from_price(terms, ONE, settle, price, INVESTMENT)[0]) / 100
    terms = _bond(told)
    periods = schedules.periods_at(terms, ONE, settle)
    if name.startswith("COUPDAY"):
        start, end = {"COUPDAYBS": (periods.start, settle), "COUPDAYS": (periods.start, periods.end),
                      "COUPDAYSNC": (settle, periods.end)}[name]  # fmt: skip
        return int((end - start)[0].astype(int))
    if name == "COUPNUM":
        return len(schedules.coupon_dates(terms, ONE, settle + 1, terms.maturity)[1])
    yields = np.array([float(told["yield"])])
    if name == "PRICE":
        return float(pricing.price_from_yield(terms, ONE, settle, yields)[0])
    modified = float(pricing.risk(terms, ONE, settle, yields)[0][0])
    return modified if name == "MDURATION" else modified * (1 + yields[0] / 200)


@pytest.mark.parametrize("line", rows("openformula.csv"), ids=lambda line: line["function"])
def test_openformula(line):
    places = re.match(r"(\d+) decimals", line["precision"])
    found = _function(line["function"], _arguments(line))
    assert found == pytest.approx(float(line["expected"]), abs=0.5 * 10 ** -int(places[1]) * 1.0001 if places else 0)


# --- common practice, no source ----------------------------------------------------------------------------------------------


def _practice(name: str) -> float:
    """1,000 face priced by the row's name: kind, years, yield."""
    kind, years = name.split("_")[:2]
    maturity = f"{2000 + int(years.removesuffix('y'))}-01-01"
    coupon = made(row(accrual_start="2000-01-01", maturity=maturity, day_count="30/360"))
    terms = coupon if kind == "coupon" else made(zero(maturity=maturity, day_count="Act/Act ICMA"))
    convention = STREET if kind == "coupon" else ANNUAL

    def price(percent: float) -> float:
        return 10 * float(pricing.price_from_yield(terms, ONE, days("2000-01-01"), np.array([percent]), convention)[0])

    if name.endswith("shift"):
        return (price(6) / price(5) - 1) * 100
    return price(5 if name.endswith(("5pct", "par")) else 6)


@pytest.mark.parametrize("line", rows("field_practice.csv"), ids=lambda line: line["id"])
def test_field_practice(line):
    within = {"cent": 0.005, "whole percent": 0.5, "within 2 points": 2}[line["precision"]]
    assert _practice(line["id"]) == pytest.approx(float(line["expected"].removesuffix("%")), abs=within)


# --- figures quoted in the market conventions table ---------------------------------------------------------------------------

MARKET_INTEREST = (
    # market, row, settlement date, face in minor units, accrued, source
    ("AU_TB", {"coupon_rate": "6", "maturity": "2019-02-15"}, "2014-08-07", 10**7, 286_700, "QuantLib test-suite (Australian bond, 2.867)"),
    ("AU_TB", {"coupon_rate": "6", "maturity": "2019-02-15"}, "2014-08-08", 10**7, -11_600, "QuantLib test-suite (Australian bond, -0.116)"),
    ("US_MBS", {"coupon_rate": "3.5", "maturity": "2050-01-01"}, "2024-03-13", 8 * 10**8, 933_333, "prowide-core sample of an MT547"),
    ("JP_JGB", {"coupon_rate": "2.9", "maturity": "2030-03-20"}, "2004-09-19", 10**9, 14_500_000, "clearstream.com A15190 (never above half the coupon)"),
    ("ZA_BOND", {"coupon_rate": "8", "maturity": "2030-01-31"}, "2016-03-03", 10**9, 7_013_700, "QuantSA BesaJseBondEx (0.70137 per 100)"),
)  # fmt: skip


@pytest.mark.parametrize("market,told,settle,face,expected,source", MARKET_INTEREST, ids=lambda value: str(value)[:24])
def test_interest_quoted_with_the_markets(market, told, settle, face, expected, source):
    terms = made({"market": market, **told})
    assert accrual.accrued(terms, ONE, days(settle), np.array([face])).minor.tolist() == [expected], source


def test_a_pass_through_pays_for_its_current_face():
    """MT547 sample of prowide-core: 7,999,999.573 x 102.713552 % = 8,217,083.72, here on a factor of the original 10 million."""
    told = {"market": "US_MBS", "coupon_rate": "3.5", "maturity": "2050-01-01"}
    terms = made(told, factors=[(0, "2020-01-01", "0.7999999573")])
    settled = settlement.settle(terms, ONE, days("2024-03-13"), np.array([10**9]), np.array([102_713_552_000_000]))
    assert settled.principal_minor.tolist() == [821_708_372]


def test_price_of_a_south_african_bond():
    """QuantSA BesaJseBondEx: 8 % 31 January 2030 at 9.7 %, settled 2016-03-03: clean 87.15471, all-in 87.85608."""
    terms = made({"market": "ZA_BOND", "coupon_rate": "8", "maturity": "2030-01-31"})
    clean = pricing.price_from_yield(terms, ONE, days("2016-03-03"), np.array([9.7]))
    assert round(float(clean[0]), 5) == 87.15471 and round(round(float(clean[0]), 5) + 0.70137, 5) == 87.85608
