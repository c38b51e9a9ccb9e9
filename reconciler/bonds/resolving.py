"""From what a row of bonds.csv tells to the terms that can be reckoned with, and what is wrong with them.

A row says a few things and leaves the rest to its market. `resolve` puts both together, finds what cannot be (maturity
before issue, an unknown word) as data with the reason, and works out what every later step needs: the anchor of the coupon
grid, the first coupon, the calendars' numbers.

The coupon grid is rolled back from the last regular coupon, or from maturity where none is told. The end-of-month rule
applies where bond or market say so; where the bond does not tell it, also when anchor and first coupon (or accrual start, where no
first coupon is told) are month ends on the grid with different days, since no grid without the rule meets both: a 30 June bond that
pays on 31 December. Where nothing speaks for the rule, it does not apply.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import numpy as np

from reconciler.bonds import markets
from reconciler.bonds.calendars import ADJUSTMENTS, Calendars
from reconciler.bonds.dates import civil
from reconciler.bonds.daycounts import NUMBERS
from reconciler.bonds.grid import grid_after, grid_before, packed
from reconciler.bonds.terms import (
    AMORTISING,
    BUSINESS,
    FIXED,
    FLOATING,
    FREQUENCIES,
    KINDS,
    LINKED,
    ONE,
    QUOTES,
    ZERO,
    Terms,
    last_of_month,
)
from reconciler.bonds.told import Columns, Fault
from reconciler.money import MISSING, known_currency, minor_digits

Array = np.ndarray[Any, Any]

_ROUNDING = re.compile(r"^(?:(\d{1,9}):(\d{1,2}))?[\s,;]*(down)?$")

def resolve(
    told: Mapping[str, Any],
    length: int,
    calendars: Calendars,
    unknown_calendars: Mapping[str, str],
    rates: tuple[Array, Array, Array],
    factors: tuple[Array, Array, Array],
    currency_needed: bool = True,
) -> tuple[Terms, list[Fault]]:
    """The terms of every bond, and what is wrong with them.

    `told` has the columns of bonds.csv (records.BONDS without file and line): text as (codes, distinct texts), the rest numpy.
    `calendars` holds every calendar that `calendar_codes` names. `rates` and `factors` are (bond row, from, value) columns in any order.
    Without `currency_needed` a bond that tells no currency counts in hundredths.
    """
    columns = Columns(told, length)
    columns.market = columns.each("market", _market, -1, _NO_MARKET).astype(np.int64)
    rate_csr, factor_csr = _grouped(rates, length), _grouped(factors, length)
    facts = _currencies(columns, currency_needed) | _coupons(columns) | _calendars(columns, calendars, unknown_calendars)
    facts |= _grid(columns, facts["frequency"]) | _days_before(columns) | _quoting(columns) | _roundings(columns)
    terms = Terms(
        market=columns.market,
        settlement_days=columns.whole("settlement_days"),
        sound=~columns.unsound,
        calendars=calendars,
        rate_offsets=rate_csr[0],
        rate_from=rate_csr[1],
        rate_e9s=rate_csr[2],
        factor_offsets=factor_csr[0],
        factor_from=factor_csr[1],
        factor_e12s=factor_csr[2],
        **facts,
    )
    return _with_first_coupons(terms), sorted(set(columns.faults))


_NO_MARKET = "is not a market of the conventions table; correct it or tell the terms in full."


def _market(text: str) -> int | None:
    number = markets.number(text)
    return None if number < 0 else number


def calendar_codes(told: Mapping[str, Any]) -> list[str]:
    """Every calendar code that the bonds (or their markets) name, for `calendars.load`; "" stands for weekends only."""
    codes = {text for text in told["calendar"][1]} if told.get("calendar") else set()
    market_texts = set(told["market"][1]) if told.get("market") else set()
    for market in markets.MARKETS:
        if market.code in market_texts:
            codes |= {market.calendar, market.payment_calendar}
    return ["", *sorted(codes - {""})]


def _currencies(columns: Columns, needed: bool) -> dict[str, Any]:
    codes, texts = columns.text("currency", "currency")
    columns.fault_where((codes < 0) & needed, "currency", "is blank and the market does not say it; add the currency.")
    unknown = np.array([not known_currency(text) for text in texts] + [False])[codes]
    if unknown.any():
        rows = np.flatnonzero(unknown)
        values = [texts[code] for code in codes[rows].tolist()]
        columns.fault(rows, "currency", "is not a currency of ISO 4217; correct the code.", values)
    currency = tuple(texts[code] if code >= 0 else "" for code in codes.tolist())
    return {"currency": currency, "currency_digits": np.append(minor_digits(texts), 2)[codes]}


def _coupons(columns: Columns) -> dict[str, Any]:
    """Kind, rate, frequency and day count, and how often the yield of a zero compounds."""
    kind = columns.word("kind", KINDS, "fixed", "kind")
    told = columns.whole("frequency", "frequency")
    frequency = np.where((told == MISSING) & (kind == ZERO), 0, told)
    bad = ~np.isin(frequency, FREQUENCIES)
    if bad.any():
        rows = np.flatnonzero(bad)
        values = ["" if f == MISSING else str(f) for f in frequency[rows].tolist()]
        columns.fault(rows, "frequency", "is not a number of payments a year that is known: use 0, 1, 2, 4 or 12.", values)
    frequency = np.where(bad | (kind == ZERO), 0, frequency)
    pays = frequency > 0
    day_count = columns.word("day_count", tuple(NUMBERS), "", "day_count")
    blank = pays & (columns.text("day_count", "day_count")[0] < 0)
    columns.fault_where(blank, "day_count", "is blank and the market does not say it; add the day count.")
    rate = columns.whole("coupon_rate_e9")
    needs_rate = pays & np.isin(kind, (FIXED, LINKED, AMORTISING))
    columns.fault_where((rate == MISSING) & needs_rate, "coupon_rate", "is blank; add the coupon rate in percent.")
    columns.fault_where(~pays & ~bad & (kind != ZERO) & (rate > 0), "frequency",
                        "is 0 although the bond has a coupon rate; say how often it pays, or call it a zero.")  # fmt: skip
    # a zero that tells a frequency pays nothing but compounds its yield that often
    yearly = columns.whole("frequency")
    compounding = np.where((kind == ZERO) & (yearly > 0), yearly, columns.whole("compounding", "compounding"))
    return {
        "kind": kind.astype(np.int8), "frequency": frequency, "day_count": np.maximum(day_count, 0).astype(np.int8),
        "rate_e9": np.where(rate == MISSING, np.where(kind == FLOATING, MISSING, 0), rate), "compounding": compounding,
    }  # fmt: skip


def _grid(columns: Columns, frequency: Array) -> dict[str, Any]:
    """The told dates, where the coupon grid is rolled back from, and whether it keeps month ends."""
    dates = {name: columns.dates(name) for name in ("accrual_start", "first_coupon", "last_regular_coupon", "maturity")}
    columns.fault_where(np.isnat(dates["maturity"]), "maturity", "is blank; add the maturity date.")
    for first, second, strict in _IN_ORDER:
        bad = dates[second] <= dates[first] if strict else dates[second] < dates[first]
        if bad.any():
            rows = np.flatnonzero(bad)
            reason = f"lies {'on or ' if strict else ''}before the {first.replace('_', ' ')}; one of the two dates is wrong."
            columns.fault(rows, second, reason, [str(day) for day in dates[second][rows]])
    anchor = np.where(np.isnat(dates["last_regular_coupon"]), dates["maturity"], dates["last_regular_coupon"])
    month_end = _month_ends(columns, anchor, dates, frequency)
    return {
        **dates, "told_first_coupon": dates["first_coupon"], "anchor": anchor, "end_of_month": month_end,
        "grid": packed(anchor, month_end, frequency),
    }  # fmt: skip


_IN_ORDER = (
    ("accrual_start", "maturity", True),
    ("first_coupon", "maturity", False),
    ("last_regular_coupon", "maturity", False),
    ("accrual_start", "first_coupon", True),
    ("accrual_start", "last_regular_coupon", False),
    ("first_coupon", "last_regular_coupon", False),
)
"""Dates that must follow one another: earlier, later, and whether they must differ."""


def _month_ends(columns: Columns, anchor: Array, dates: Mapping[str, Array], frequency: Array) -> Array:
    told = columns.word("end_of_month", ("no", "yes"), "")
    of_market = columns.word("end_of_month", ("no", "yes"), "", "end_of_month")
    # Untold, the dates must speak: month ends on different days of the month cannot both be met without the rule. What
    # the bond's own dates say goes before a market that says no.
    other = np.where(np.isnat(dates["first_coupon"]), dates["accrual_start"], dates["first_coupon"])
    step = 12 // np.maximum(frequency, 1)
    year, month, day = civil(anchor)
    other_year, other_month, other_day = civil(other)
    on_grid = ((year - other_year) * 12 + month - other_month) % step == 0
    speak = last_of_month(anchor) & last_of_month(other) & on_grid & (day != other_day)
    applies = np.where(told < 0, speak | (of_market == 1), told == 1)
    result: Array = applies & (frequency > 0) & last_of_month(anchor)
    return result


def _calendars(columns: Columns, calendars: Calendars, unknown: Mapping[str, str]) -> dict[str, Any]:
    reason = "names a calendar that is not known; correct the code."

    def number(text: str) -> int | None:
        return None if text in unknown else calendars.number(text)

    weekends = calendars.number("")
    adjustment = columns.word("payment_adjustment", ADJUSTMENTS, "following", "payment_adjustment")
    accrual = columns.word("accrual_adjustment", ("unadjusted", "adjusted"), "unadjusted", "accrual_adjustment")
    return {
        "calendar": columns.each("calendar", number, weekends, reason, "calendar").astype(np.int64),
        "payment_calendar": columns.each("calendar", number, weekends, reason, "payment_calendar").astype(np.int64),
        "payment_adjustment": adjustment.astype(np.int8),
        "accrual_adjusted": accrual == 1,
    }


def _days_before(columns: Columns) -> dict[str, Any]:
    ex_days, ex_unit = columns.spans("ex_dividend", "ex_dividend")
    days, unit = columns.spans("record", "record")
    blank = days == MISSING
    return {
        "ex_days": ex_days, "ex_unit": ex_unit, "record_days": np.where(blank, 1, days),
        "record_unit": np.where(blank, BUSINESS, unit).astype(np.int8),
    }  # fmt: skip


def _quoting(columns: Columns) -> dict[str, Any]:
    redemption = columns.whole("redemption_price_e12", "redemption_price_e12")
    return {
        "quote": columns.word("quote", QUOTES, "price", "quote").astype(np.int8),
        "redemption_price_e12": np.where(redemption == MISSING, 100 * ONE, redemption),
        "accrued_cap": columns.of_market([*(market.accrued_cap == "coupon" for market in markets.MARKETS), False]),
        "floor_at_par": columns.of_market([*(market.floor_at_par for market in markets.MARKETS), False]),
    }


def _roundings(columns: Columns) -> dict[str, Any]:
    def read(text: str) -> int | None:
        found = _ROUNDING.match(text)
        if found is None or (found[1] and int(found[1]) == 0):
            return None
        per, places = int(found[1] or 0), int(found[2] or 0)
        return (per * 100 + places) * 2 + bool(found[3])

    reason = "is not a rounding rule: use 100:3 (three decimals per 100), down, or both."
    packed = columns.each("accrued_rounding", read, 0, reason, "accrued_rounding").astype(np.int64)
    return {"rounding_per": packed // 200, "rounding_places": packed // 2 % 100, "rounding_down": packed % 2 == 1}


def _grouped(rows: tuple[Array, Array, Array], length: int) -> tuple[Array, Array, Array]:
    """(bond row, from, value) as offsets per bond and the other columns in order of bond and date."""
    bond, start, value = (np.asarray(column) for column in rows)
    order = np.lexsort((value, start, bond))
    order = order[bond[order] >= 0]
    counts = np.bincount(bond[order], minlength=length) if len(order) else np.zeros(length, np.int64)
    offsets = np.concatenate([[0], np.cumsum(counts)]).astype(np.int64)
    return offsets, start[order].astype("datetime64[D]"), value[order].astype(np.int64)


def _with_first_coupons(terms: Terms) -> Terms:
    """Terms with what told dates leave open: the first coupon, or where interest begins before a told first coupon."""
    begin, told = terms.accrual_start, terms.told_first_coupon
    pays = (terms.frequency > 0) & ~np.isnat(terms.maturity)
    first = told.copy()
    rows = np.flatnonzero(pays & ~np.isnat(begin) & np.isnat(told))
    following = np.minimum(grid_after(terms, rows, begin[rows]), terms.maturity[rows])
    # interest that begins with or after the last regular coupon has one odd period, however long
    first[rows] = np.where(begin[rows] >= terms.anchor[rows], terms.maturity[rows], following)
    rows = np.flatnonzero(pays & np.isnat(begin) & ~np.isnat(told))
    begin = begin.copy()
    begin[rows] = grid_before(terms, rows, told[rows])
    return replace(terms, first_coupon=first, accrual_start=begin)
