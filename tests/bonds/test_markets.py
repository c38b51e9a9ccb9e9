"""Market conventions: every row can be read, every word is known, cycles change on the day they changed."""

from __future__ import annotations

import csv
import re
from datetime import date
from pathlib import Path

import numpy as np
import pytest

from reconciler import money, resources
from reconciler.bonds import calendars, daycounts, markets
from reconciler.bonds.markets import MARKETS, MISSING, settlement_days

SHEET = Path(__file__).parents[3] / "shared" / "markets.csv"

CODES = """
    US_TBILL US_TNOTE US_STRIPS US_TIPS US_FRN US_CORP US_CORP_FRN US_MUNI US_AGENCY US_MBS EUROBOND_ICMA
    EUROBOND_30E EUROBOND_FRN DE_BUND DE_BUBILL FR_OAT FR_BTF FR_OATI IT_BTP IT_BOT IT_CCTEU IT_BTPI
    IT_BTPITALIA ES_BONO ES_LETRA NL_DSL AT_RAGB BE_OLO IE_GOVT PT_OT UK_GILT UK_ILG3 UK_ILG8 UK_TBILL UK_CORP
    CH_CONF SE_GOVT NO_GOVT DK_GOVT DK_MTG JP_JGB JP_TDB AU_TB AU_TN AU_TIB NZ_GB CA_GOC CA_PROV_CORP CA_MBS_NHA
    CA_TBILL ZA_BOND BR_LTN BR_NTNF BR_NTNB MX_MBONO MX_CETE IN_GSEC IN_TBILL IN_CORP SG_SGS SG_TBILL HK_HKGB
    HK_RETAIL PL_POLGB CZ_GB HU_GB
""".split()

KINDS = ("zero", "fixed", "stepped", "floating", "linked", "amortising")
QUOTES = ("price", "32nds", "discount", "yield")
YIELDS = ("street", "treasury", "simple", "annual", "discount", "investment")
STANDINGS = ("read", "part", "memory")


def number(code: str) -> int:
    found = markets.number(code)
    assert found >= 0, code
    return found


def test_the_codes():
    assert [market.code for market in MARKETS] == CODES
    if SHEET.exists():
        with SHEET.open(encoding="utf-8", newline="") as lines:
            assert [row["market_code"] for row in csv.DictReader(lines)] == CODES
    assert markets.number("") == markets.number("UK_gilt") == -1


@pytest.mark.parametrize("market", MARKETS, ids=CODES)
def test_every_word_is_known(market):
    assert market.description and market.source and market.standing in STANDINGS
    assert market.currency == "" or money.known_currency(market.currency)
    assert market.kind in KINDS and market.quote in QUOTES and market.yield_convention in YIELDS
    assert market.frequency in (0, 1, 2, 4, 12, MISSING)
    assert (market.kind == "zero") == (market.frequency == 0)
    assert market.day_count in daycounts.NUMBERS
    assert market.end_of_month in ("yes", "no")
    assert market.payment_adjustment in calendars.ADJUSTMENTS
    assert market.accrual_adjustment in ("unadjusted", "adjusted")
    assert re.fullmatch(r"(\d+[bc])?", market.ex_dividend) and re.fullmatch(r"(\d+[bc])?", market.record)
    assert re.fullmatch(r"(\d+:\d+)?( ?down)?", market.accrued_rounding)
    assert market.accrued_cap in ("", "coupon")
    assert market.redemption_price_e12 == 100 * 10**12
    assert market.minimum_denomination_e12 > 0 or market.minimum_denomination_e12 == MISSING
    assert market.compounding in (0, 1, 2, MISSING)
    assert not market.floor_at_par or market.kind == "linked"
    assert market.calendar and market.payment_calendar


def test_every_calendar_is_known():
    codes = {market.calendar for market in MARKETS} | {market.payment_calendar for market in MARKETS}
    assert calendars.load(codes)[1] == {}


def test_record_and_ex_dividend_fit_together():
    """Who settles the day before the ex-dividend day is on record, who settles on it is not: record is one day
    earlier."""
    for market in MARKETS:
        if market.ex_dividend:
            days, unit = int(market.ex_dividend[:-1]), market.ex_dividend[-1]
            assert market.record == f"{days + 1}{unit}", market.code


# Settlement terms of the ex-dividend rules; gilts, Australia and South Africa as the contract states them.
@pytest.mark.parametrize(
    ("code", "ex_dividend", "record"),
    [
        ("UK_GILT", "6b", "7b"), ("UK_ILG3", "6b", "7b"), ("AU_TB", "7c", "8c"), ("ZA_BOND", "10c", "11c"),
        ("NZ_GB", "10c", "11c"), ("SG_SGS", "2b", "3b"), ("SE_GOVT", "4b", "5b"), ("HU_GB", "1b", "2b"),
        ("DK_GOVT", "", "1b"), ("PL_POLGB", "", "3b"), ("DE_BUND", "", "1b"), ("US_TNOTE", "", "1b"),
    ],
)  # fmt: skip
def test_ex_dividend_rules(code, ex_dividend, record):
    market = MARKETS[number(code)]
    assert (market.ex_dividend, market.record) == (ex_dividend, record)


def test_hungarian_days():
    """Paid on Thursday 20 November 2025: cum until four business days before, ex from three, on record two before (the
    custodian page named in the row); at T+2 the last cum trade settles on the record date, the first ex one a day
    later."""
    loaded = calendars.load(["HU"])[0]
    coupon = np.array(["2025-11-20"], "datetime64[D]")
    market = MARKETS[number("HU_GB")]
    record = loaded.add(1, coupon, -int(market.record[:-1]))
    ex_dividend = loaded.add(1, coupon, -int(market.ex_dividend[:-1]))
    last_cum, first_ex = loaded.add(1, coupon, -4), loaded.add(1, coupon, -3)
    assert loaded.add(1, last_cum, 2) == record
    assert loaded.add(1, first_ex, 2) == ex_dividend


@pytest.mark.parametrize(
    ("code", "trade", "days"),
    [
        # Named in the project's description of the job.
        ("US_CORP", "2024-05-27", 2),
        ("US_CORP", "2024-05-28", 1),
        # Market sheet.
        ("US_CORP", "2017-09-01", 3),
        ("US_CORP", "2017-09-05", 2),
        ("US_TNOTE", "1999-01-04", 1),
        ("DE_BUND", "2014-10-03", 3),
        ("DE_BUND", "2014-10-06", 2),
        ("DE_BUND", "2027-10-08", 2),
        ("DE_BUND", "2027-10-11", 1),
        ("UK_CORP", "2027-10-11", 1),
        ("UK_GILT", "2010-01-04", 1),
        ("UK_GILT", "2028-01-04", 1),
        ("CA_GOC", "2024-05-24", 2),
        ("CA_GOC", "2024-05-27", 1),
        ("AU_TB", "2016-03-04", 3),
        ("AU_TB", "2016-03-07", 2),
        ("ZA_BOND", "2026-03-31", 3),
        ("SG_SGS", "2026-03-31", 1),
        # From memory.
        ("JP_JGB", "2018-04-27", 2),
        ("JP_JGB", "2018-05-01", 1),
        # No cycle could be confirmed.
        ("US_MBS", "2026-03-31", MISSING),
        ("MX_MBONO", "2026-03-31", MISSING),
    ],
)
def test_settlement_cycles(code, trade, days):
    assert settlement_days(np.array([number(code)]), np.array([trade], "datetime64[D]")).tolist() == [days]


def test_settlement_days_of_a_book():
    """Row by row is one call; no market or no trade date gives MISSING; empty in, empty out."""
    random = np.random.default_rng(1)
    market = random.integers(-1, len(MARKETS), 500)
    trade = np.datetime64("2012-01-01") + random.integers(0, 6_500, 500)
    trade[::50] = np.datetime64("NaT")
    days = settlement_days(market, trade)
    assert days.tolist() == [int(settlement_days(market[r : r + 1], trade[r : r + 1])[0]) for r in range(500)]
    assert (days[(market < 0) | np.isnat(trade)] == MISSING).all()
    assert len(settlement_days(np.empty(0, np.int64), np.empty(0, "datetime64[D]"))) == 0


def test_cycles_are_sound():
    """Known markets, whole dates, no date twice, a source and a standing in every row; cycles only ever got shorter."""
    last: dict[str, tuple[str, int]] = {}
    for row in resources.table("settlement_cycles"):
        code, start, days = row["market"], row["from"], int(row["days"])
        assert markets.number(code) >= 0 and row["source"] and row["standing"] in (*STANDINGS, "planned"), row
        assert start == "" or date.fromisoformat(start)
        if code in last:
            assert start > last[code][0] and days < last[code][1], row
        else:
            assert start == "", row
        last[code] = (start, days)


def test_rows_marked_memory_or_part_say_so():
    """The market sheet is honest about what was read; so is this table, and cycles that are only planned are marked."""
    standings = {market.code: market.standing for market in MARKETS}
    assert standings["US_STRIPS"] == standings["UK_TBILL"] == "memory" and standings["SG_SGS"] == "part"
    planned = {row["from"] for row in resources.table("settlement_cycles") if row["standing"] == "planned"}
    assert planned == {"2027-10-11"}
