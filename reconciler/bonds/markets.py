"""A clerk need not spell out how a gilt settles or how a Treasury note is quoted: the market's row says so.

resources/tables/markets.csv has one row for each kind of bond, with the words of bonds.csv for whatever that file
leaves blank, a source and how far it was confirmed. resources/tables/settlement_cycles.csv has the days from trade to
settlement by trade date, since cycles change from one trading day to the next (US corporates: T+2 until 2024-05-27, T+1
from 2024-05-28).

A market names two calendars where two matter: `calendar` for settlement and `payment_calendar` for coupons and
redemption (US Treasuries settle by the bond market's days and pay by the Fed's). The calendar of bonds.csv, if told,
replaces both. Withholding tax is not modelled. A market without a confirmed cycle gives no settlement date rather than
a guessed one.
"""

from __future__ import annotations

from dataclasses import dataclass
from decimal import Decimal
from typing import Any

import numpy as np

from reconciler import resources

Array = np.ndarray[Any, Any]

MISSING = np.iinfo(np.int64).min


@dataclass(frozen=True)
class Market:
    """One kind of bond; text fields hold the words of bonds.csv, "" where the market says nothing."""

    code: str
    description: str
    currency: str
    kind: str
    frequency: int
    """Payments a year; MISSING where the bond must say."""
    day_count: str
    end_of_month: str
    payment_adjustment: str
    accrual_adjustment: str
    calendar: str
    payment_calendar: str
    """Calendar of coupons and redemption, the same as `calendar` unless the market keeps two."""
    ex_dividend: str
    record: str
    quote: str
    redemption_price_e12: int
    accrued_rounding: str
    accrued_cap: str
    """"coupon" where accrued never exceeds the period's coupon, else ""."""
    floor_at_par: bool
    """Whether a linked bond pays back at least par."""
    yield_convention: str
    compounding: int
    """Periods a year in which the yield of a zero compounds, 0 for simple interest; MISSING: as the bond pays."""
    minimum_denomination_e12: int
    """Smallest face in major units times 10**12; MISSING where it differs from bond to bond."""
    standing: str
    source: str
    note: str


def _e12(text: str) -> int:
    return int(Decimal(text) * 10**12) if text else MISSING


def _whole(text: str) -> int:
    return int(text) if text else MISSING


def _read(row: dict[str, str]) -> Market:
    return Market(
        code=row["market"],
        description=row["description"],
        currency=row["currency"],
        kind=row["kind"],
        frequency=_whole(row["frequency"]),
        day_count=row["day_count"],
        end_of_month=row["end_of_month"],
        payment_adjustment=row["payment_adjustment"],
        accrual_adjustment=row["accrual_adjustment"],
        calendar=row["calendar"],
        payment_calendar=row["payment_calendar"] or row["calendar"],
        ex_dividend=row["ex_dividend"],
        record=row["record"],
        quote=row["quote"],
        redemption_price_e12=_e12(row["redemption_price"]),
        accrued_rounding=row["accrued_rounding"],
        accrued_cap=row["accrued_cap"],
        floor_at_par=row["floor_at_par"] == "yes",
        yield_convention=row["yield_convention"],
        compounding=_whole(row["compounding"]),
        minimum_denomination_e12=_e12(row["minimum_denomination"]),
        standing=row["standing"],
        source=row["source"],
        note=row["note"],
    )


MARKETS: tuple[Market, ...] = tuple(_read(row) for row in resources.table("markets"))
"""Every market, in the order of the table; an int column of markets holds the index."""

_NUMBERS = {market.code: number for number, market in enumerate(MARKETS)}


def number(code: str) -> int:
    """The index of a market in MARKETS, -1 for an unknown or blank code."""
    return _NUMBERS.get(code, -1)


def _cycles() -> tuple[Array, Array]:
    """Trade dates on which some cycle changes, and per market (last row: unknown) the days in each stretch between."""
    rows = resources.table("settlement_cycles")
    turns = sorted({row["from"] for row in rows} - {""})
    days = np.full((len(MARKETS) + 1, len(turns) + 1), MISSING, np.int64)
    for row in sorted(rows, key=lambda row: row["from"]):
        # In order of time, so that each row rules from its date until the market's next row.
        days[_NUMBERS[row["market"]], turns.index(row["from"]) + 1 if row["from"] else 0 :] = int(row["days"])
    return np.array(turns, "datetime64[D]"), days


_TURNS, _CYCLE_DAYS = _cycles()


def settlement_days(market: Array, trade_dates: Array) -> Array:
    """Business days from trade to settlement, int64: market indexes and trade dates of one shape.

    MISSING for market -1, a market without a confirmed cycle, or no trade date.
    """
    trade = np.atleast_1d(np.asarray(trade_dates, "datetime64[D]"))
    stretch = np.zeros(trade.shape, np.int64)
    for turn in _TURNS:
        stretch += trade >= turn
    days = _CYCLE_DAYS[np.asarray(market, np.int64), stretch]
    return np.where(np.isnat(trade), MISSING, days)
