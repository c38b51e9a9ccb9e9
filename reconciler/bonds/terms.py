"""What a bond promises, as columns: one row a bond, every blank filled from its market, every date grid worked out once.

A row of bonds.csv says a few things and leaves the rest to its market. `resolve` puts both together, finds what cannot be
(maturity before issue, an unknown word) as data with the reason, and works out what every later step needs: the months of the coupon
grid, the first coupon, the calendars' numbers. A bond whose terms are not sound keeps its row and is marked, so that
row numbers stay those of the bonds table.

The coupon grid is rolled back from the last regular coupon, or from maturity where none is told. The end-of-month rule
applies where bond or market say so; where the bond does not tell it, also when anchor and first coupon (or accrual start, where no
first coupon is told) are month ends on the grid with different days, since no grid without the rule meets both: a 30 June bond that
pays on 31 December. Where nothing speaks for the rule, it does not apply.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from reconciler.bonds import markets
from reconciler.bonds.calendars import ADJUSTMENTS, Calendars
from reconciler.bonds.dates import civil
from reconciler.bonds.daycounts import NUMBERS
from reconciler.bonds.grid import grid_after, grid_before
from reconciler.money import MISSING, known_currency, minor_digits

Array = np.ndarray[Any, Any]

KINDS = ("zero", "fixed", "stepped", "floating", "linked", "amortising")
QUOTES = ("price", "32nds", "discount", "yield")
FREQUENCIES = (0, 1, 2, 4, 12)
BUSINESS, CALENDAR = 0, 1
NAT = np.datetime64("NaT", "D")
ONE = 10**12

Fault = tuple[int, str, str, str]
"""Row, column, value, what is wrong and what to do."""


@dataclass(frozen=True)
class Terms:
    """One numpy column a fact, one row a bond. Rates are percent x 10^9, prices and factors x 10^12."""

    currency: tuple[str, ...]
    currency_digits: Array
    kind: Array
    market: Array
    rate_e9: Array
    frequency: Array
    day_count: Array
    accrual_start: Array
    """Where interest begins; where only a first coupon is told, the grid date before it."""
    first_coupon: Array
    """The first coupon date, worked out where not told; NaT for zeros and where neither date is told."""
    told_first_coupon: Array
    last_regular_coupon: Array
    maturity: Array
    end_of_month: Array
    payment_adjustment: Array
    accrual_adjusted: Array
    calendar: Array
    payment_calendar: Array
    settlement_days: Array
    """Told business days to settlement; MISSING: the market's cycle by trade date."""
    ex_days: Array
    ex_unit: Array
    record_days: Array
    record_unit: Array
    quote: Array
    redemption_price_e12: Array
    rounding_per: Array
    rounding_places: Array
    rounding_down: Array
    accrued_cap: Array
    floor_at_par: Array
    compounding: Array
    sound: Array
    anchor: Array
    """Where the coupon grid is rolled back from."""
    calendars: Calendars
    rate_offsets: Array
    rate_from: Array
    rate_e9s: Array
    factor_offsets: Array
    factor_from: Array
    factor_e12s: Array

    def __len__(self) -> int:
        return len(self.maturity)


_PERIOD = re.compile(r"^(\d{1,3})\s*([bc])$")
_ROUNDING = re.compile(r"^(?:(\d{1,9}):(\d{1,2}))?[\s,;]*(down)?$")


class _Columns:
    """Told columns with blanks filled from the market; collects faults. Text is told as (codes, distinct texts), -1 blank."""

    def __init__(self, told: Mapping[str, Any], length: int) -> None:
        self.told, self.length = told, length
        self.faults: list[Fault] = []
        self.unsound = np.zeros(length, np.bool_)
        self.market = np.full(length, -1, np.int64)

    def fault(self, rows: Array, column: str, reason: str, values: Sequence[str] | None = None) -> None:
        for place, row in enumerate(np.asarray(rows).tolist()):
            self.faults.append((row, column, values[place] if values is not None else "", reason))
        self.unsound[rows] = True

    def text(self, name: str, market_field: str | None = None) -> tuple[Array, list[str]]:
        """Codes and distinct texts; where blank, the market's word."""
        codes, texts = self.told.get(name) or (np.full(self.length, -1, np.int64), [])
        codes, texts = np.asarray(codes, np.int64), list(texts)
        if market_field is None:
            return codes, texts
        words = [str(getattr(market, market_field)) for market in markets.MARKETS]
        fill = np.array([len(texts) + i if word else -1 for i, word in enumerate(words)] + [-1], np.int64)
        return np.where(codes < 0, fill[self.market], codes), texts + words

    def each(self, name: str, read: Any, blank: Any, reason: str, market_field: str | None = None) -> Array:
        """Every row's text read once per distinct text; `read` gives None for a word it does not know."""
        codes, texts = self.text(name, market_field)
        used = set(np.unique(codes).tolist())
        values = [read(text) if code in used else blank for code, text in enumerate(texts)]
        bad = np.array([value is None for value in values] + [False])[codes]
        if bad.any():
            rows = np.flatnonzero(bad)
            self.fault(rows, name, reason, [texts[code] for code in codes[rows].tolist()])
        return np.array([blank if value is None else value for value in values] + [blank])[codes]

    def word(self, name: str, words: Sequence[str], default: str, market_field: str | None = None) -> Array:
        """Index of each row's word among `words`; an unknown word is a fault, a blank takes the default."""
        numbers = {word: number for number, word in enumerate(words)}
        reason = f"is not a known word here; use one of: {', '.join(words)}."
        return self.each(name, numbers.get, numbers.get(default, -1), reason, market_field)

    def whole(self, name: str, market_field: str | None = None) -> Array:
        told = self.told.get(name)
        column = np.full(self.length, MISSING) if told is None else np.asarray(told, np.int64)
        if market_field is None:
            return column
        numbers = np.array([getattr(market, market_field) for market in markets.MARKETS] + [MISSING], np.int64)
        return np.where(column == MISSING, numbers[self.market], column)

    def dates(self, name: str) -> Array:
        told = self.told.get(name)
        return np.full(self.length, NAT) if told is None else np.asarray(told, "datetime64[D]")

    def spans(self, name: str, market_field: str) -> tuple[Array, Array]:
        """Days and unit of a text such as 6b or 10c."""

        def read(text: str) -> int | None:
            found = _PERIOD.match(text)
            return None if found is None else int(found[1]) * 2 + (found[2] == "c")

        reason = "is not a number of days followed by b (business) or c (calendar), such as 6b; correct it or leave it blank."
        packed = self.each(name, read, -1, reason, market_field).astype(np.int64)
        return np.where(packed < 0, MISSING, packed // 2), (packed % 2).astype(np.int8)


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
    columns = _Columns(told, length)
    columns.market = columns.each("market", lambda t: m if (m := markets.number(t)) >= 0 else None, -1,
                                  "is not a market of the conventions table; correct it or tell the terms in full.").astype(np.int64)  # fmt: skip
    currency_codes, currency_texts = columns.text("currency", "currency")
    _check_currency(columns, currency_codes, currency_texts, currency_needed)
    kind = columns.word("kind", KINDS, "fixed", "kind")
    ex_days, ex_unit = columns.spans("ex_dividend", "ex_dividend")
    record_days, record_unit = columns.spans("record", "record")
    record_unit = np.where(record_days == MISSING, BUSINESS, record_unit).astype(np.int8)
    record_days = np.where(record_days == MISSING, 1, record_days)
    rounding = _roundings(columns)
    settlement_calendar, payment_calendar = _calendar_numbers(columns, calendars, unknown_calendars)
    frequency = _frequencies(columns, kind)
    day_count = columns.word("day_count", tuple(NUMBERS), "", "day_count")
    dates = {name: columns.dates(name) for name in ("accrual_start", "first_coupon", "last_regular_coupon", "maturity")}
    _check_dates(columns, dates)
    rate = columns.whole("coupon_rate_e9")
    pays = frequency > 0
    missing = pays & (columns.text("day_count", "day_count")[0] < 0)
    if missing.any():
        columns.fault(np.flatnonzero(missing), "day_count", "is blank and the market does not say it; add the day count.")
    missing = (rate == MISSING) & np.isin(kind, (1, 4, 5)) & pays
    if missing.any():
        columns.fault(np.flatnonzero(missing), "coupon_rate", "is blank; add the coupon rate in percent.")
    anchor = np.where(np.isnat(dates["last_regular_coupon"]), dates["maturity"], dates["last_regular_coupon"])
    month_end = _month_ends(columns, anchor, dates, frequency)
    rate_csr, factor_csr = _grouped(rates, length), _grouped(factors, length)
    # a zero that tells a frequency pays nothing but compounds its yield that often
    told_frequency = columns.whole("frequency")
    compounding = np.where((kind == 0) & (told_frequency > 0), told_frequency, columns.whole("compounding", "compounding"))
    redemption = columns.whole("redemption_price_e12", "redemption_price_e12")
    cap = np.array([market.accrued_cap == "coupon" for market in markets.MARKETS] + [False])[columns.market]
    floor = np.array([market.floor_at_par for market in markets.MARKETS] + [False])[columns.market]
    terms = Terms(
        currency=tuple(currency_texts[code] if code >= 0 else "" for code in currency_codes.tolist()),
        currency_digits=np.append(minor_digits(currency_texts), 2)[currency_codes],
        kind=kind.astype(np.int8),
        market=columns.market,
        rate_e9=np.where(rate == MISSING, np.where(kind == 3, MISSING, 0), rate),
        frequency=frequency,
        day_count=np.maximum(day_count, 0).astype(np.int8),
        accrual_start=dates["accrual_start"],
        first_coupon=dates["first_coupon"],
        told_first_coupon=dates["first_coupon"],
        last_regular_coupon=dates["last_regular_coupon"],
        maturity=dates["maturity"],
        end_of_month=month_end,
        payment_adjustment=columns.word("payment_adjustment", ADJUSTMENTS, "following", "payment_adjustment").astype(np.int8),
        accrual_adjusted=columns.word("accrual_adjustment", ("unadjusted", "adjusted"), "unadjusted", "accrual_adjustment") == 1,
        calendar=settlement_calendar,
        payment_calendar=payment_calendar,
        settlement_days=columns.whole("settlement_days"),
        ex_days=ex_days,
        ex_unit=ex_unit,
        record_days=record_days,
        record_unit=record_unit,
        quote=columns.word("quote", QUOTES, "price", "quote").astype(np.int8),
        redemption_price_e12=np.where(redemption == MISSING, 100 * ONE, redemption),
        rounding_per=rounding[0],
        rounding_places=rounding[1],
        rounding_down=rounding[2],
        accrued_cap=cap,
        floor_at_par=floor,
        compounding=compounding,
        sound=~columns.unsound,
        anchor=anchor,
        calendars=calendars,
        rate_offsets=rate_csr[0],
        rate_from=rate_csr[1],
        rate_e9s=rate_csr[2],
        factor_offsets=factor_csr[0],
        factor_from=factor_csr[1],
        factor_e12s=factor_csr[2],
    )
    return _with_first_coupons(terms), sorted(set(columns.faults))


def calendar_codes(told: Mapping[str, Any]) -> list[str]:
    """Every calendar code that the bonds (or their markets) name, for `calendars.load`; "" stands for weekends only."""
    codes = {text for text in told["calendar"][1]} if told.get("calendar") else set()
    market_texts = set(told["market"][1]) if told.get("market") else set()
    for market in markets.MARKETS:
        if market.code in market_texts:
            codes |= {market.calendar, market.payment_calendar}
    return ["", *sorted(codes - {""})]


def _check_currency(columns: _Columns, codes: Array, texts: Sequence[str], needed: bool) -> None:
    blank = codes < 0
    if needed and blank.any():
        columns.fault(np.flatnonzero(blank), "currency", "is blank and the market does not say it; add the currency.")
    unknown = np.array([not known_currency(text) for text in texts] + [False])[codes]
    if unknown.any():
        rows = np.flatnonzero(unknown)
        values = [texts[code] for code in codes[rows].tolist()]
        columns.fault(rows, "currency", "is not a currency of ISO 4217; correct the code.", values)


def _frequencies(columns: _Columns, kind: Array) -> Array:
    frequency = columns.whole("frequency", "frequency")
    frequency = np.where((frequency == MISSING) & (kind == 0), 0, frequency)
    bad = ~np.isin(frequency, FREQUENCIES)
    if bad.any():
        rows = np.flatnonzero(bad)
        values = ["" if f == MISSING else str(f) for f in frequency[rows].tolist()]
        columns.fault(rows, "frequency", "is not a number of payments a year that is known: use 0, 1, 2, 4 or 12.", values)
    return np.where(bad | (kind == 0), 0, frequency)


def _check_dates(columns: _Columns, dates: Mapping[str, Array]) -> None:
    blank = np.isnat(dates["maturity"])
    if blank.any():
        columns.fault(np.flatnonzero(blank), "maturity", "is blank; add the maturity date.")
    for first, second, reason in (
        ("accrual_start", "maturity", "lies on or before the accrual start; one of the two dates is wrong."),
        ("first_coupon", "maturity", "lies before the first coupon; one of the two dates is wrong."),
        ("last_regular_coupon", "maturity", "lies before the last regular coupon; one of the two dates is wrong."),
        ("accrual_start", "first_coupon", "lies on or before the accrual start; one of the two dates is wrong."),
        ("accrual_start", "last_regular_coupon", "lies before the accrual start; one of the two dates is wrong."),
        ("first_coupon", "last_regular_coupon", "lies before the first coupon; one of the two dates is wrong."),
    ):
        strict = first == "accrual_start" and second != "last_regular_coupon"
        bad = dates[second] <= dates[first] if strict else dates[second] < dates[first]
        if bad.any():
            rows = np.flatnonzero(bad)
            columns.fault(rows, second, reason, [str(day) for day in dates[second][rows]])


def _roundings(columns: _Columns) -> tuple[Array, Array, Array]:
    def read(text: str) -> int | None:
        found = _ROUNDING.match(text)
        if found is None or (found[1] and int(found[1]) == 0):
            return None
        per, places = int(found[1] or 0), int(found[2] or 0)
        return (per * 100 + places) * 2 + bool(found[3])

    reason = "is not a rounding rule: use 100:3 (three decimals per 100), down, or both."
    packed = columns.each("accrued_rounding", read, 0, reason, "accrued_rounding").astype(np.int64)
    return packed // 200, packed // 2 % 100, packed % 2 == 1


def _calendar_numbers(columns: _Columns, calendars: Calendars, unknown: Mapping[str, str]) -> tuple[Array, Array]:
    reason = "names a calendar that is not known; correct the code."

    def number(text: str) -> int | None:
        return None if text in unknown else calendars.number(text)

    weekends = calendars.number("")
    settlement = columns.each("calendar", number, weekends, reason, "calendar")
    payment = columns.each("calendar", number, weekends, reason, "payment_calendar")
    return settlement.astype(np.int64), payment.astype(np.int64)


def last_of_month(dates: Array) -> Array:
    """Whether each date is the last of its month."""
    return np.asarray((dates + 1).astype("datetime64[M]") != dates.astype("datetime64[M]"))


def _month_ends(columns: _Columns, anchor: Array, dates: Mapping[str, Array], frequency: Array) -> Array:
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


def in_force(offsets: Array, starts: Array, values: Array, rows: Array, dates: Array, before: Array) -> Array:
    """The value whose `from` is the last on or before each date, `before` where none is (rates and factors)."""
    out = np.array(before, np.int64, copy=True)
    if not len(starts):
        return out
    some = np.flatnonzero(offsets[rows + 1] > offsets[rows])
    if not len(some):
        return out
    # One sorted key of (bond, from) makes a single search over all bonds; the bond's own first entry bounds it below.
    owner = np.repeat(np.arange(len(offsets) - 1), np.diff(offsets))
    day = 1 << 20
    keys = owner * day + (starts.astype(np.int64) + day // 2)
    place = np.searchsorted(keys, rows[some] * day + (dates[some].astype(np.int64) + day // 2), side="right") - 1
    held = place >= offsets[rows[some]]
    out[some[held]] = values[place[held]]
    return out
