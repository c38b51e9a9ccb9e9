"""How much can go wrong while a break stays open? Money now, interest every day, and what the market may do meanwhile.

- `stake`: of an amount that differs, the difference; of cash that is missing, unexplained or told twice, the amount; of a trade nobody
  confirms (or whose face, price or side is disputed), what one percentage point of yield would cost, but at least the cash in
  dispute; of a wrong day, the interest for those days.
- `daily_interest`: the cash in dispute times the house's rate over 360 or 365 days (0 unless the settings tell a rate).
- `rate_exposure`: the position revalued in full with the dealt yield one percentage point higher and lower, the larger change of the
  two. A duration would do for a ten-year bond; for a thirty-year zero it is off by an eighth.

Weights are common practice, no source. Not done: probabilities, or netting of breaks against each other.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.bonds import accrual, pricing, settlement
from reconciler.breaks.given import Given, per_word
from reconciler.money import half_up
from reconciler.records import BREAK_KINDS, MISSING, Table, Words

Array = np.ndarray[Any, Any]

ON_DIFFERENCE = ("settlement amount", "payment amount", "accrued", "fees")
ON_AMOUNT = ("no cash", "unexplained cash", "told twice")
ON_DAYS = ("settlement date", "payment date")
REVALUED = ("no confirmation", "no ticket", "face", "price", "side")

POINT = 1.0
"""The shift of yields, in percentage points."""

_CHUNK = 20_000
"""Positions revalued at a time: a long bond has some sixty payments each."""


def weigh(given: Given, breaks: Table) -> Table:
    """The breaks with stake, daily interest and rate exposure (minor units of the item's currency) and days overdue."""
    item = breaks["item_row"]
    kind = _kinds(breaks["break"])
    amount = item_amounts(given)[item]
    cash = _cash_in_dispute(given, breaks, kind, amount)
    interest = _interest(given, item, cash, 1)
    exposure = np.full(len(item), MISSING)
    moved = np.flatnonzero(_among(kind, REVALUED))
    if len(moved):
        rows, place = np.unique(item[moved], return_inverse=True)
        exposure[moved] = rate_exposure(given, rows)[place.reshape(-1)]
    return breaks.with_columns(
        stake_minor=_stake(given, breaks, kind, cash, exposure),
        daily_interest_minor=interest,
        rate_exposure_minor=exposure,
        overdue_days=overdue_days(given)[item],
    )


def _kinds(column: Words) -> Array:
    return per_word(column, lambda words: np.array([BREAK_KINDS.index(word) for word in words], np.int64), -1)


def _among(kind: Array, names: tuple[str, ...]) -> Array:
    return np.isin(kind, [BREAK_KINDS.index(name) for name in names])


def item_amounts(given: Given) -> Array:
    """What an item is about, in minor units without sign: the expected amount, else what the bank booked; 0 when not known."""
    amount = np.where(given.expected_minor == MISSING, given.items["bank_minor"], given.expected_minor)
    return np.where(amount == MISSING, 0, np.abs(amount))


def _cash_in_dispute(given: Given, breaks: Table, kind: Array, amount: Array) -> Array:
    """The money that interest runs on: the difference, the missing amount, or the amount paid on a wrong day."""
    off = np.abs(np.where(breaks["difference_minor"] == MISSING, 0, breaks["difference_minor"]))
    cash = np.where(_among(kind, ON_DIFFERENCE), off, 0)
    cash = np.where(_among(kind, ON_AMOUNT + ON_DAYS), amount, cash)
    disputed = np.flatnonzero(_among(kind, ("face", "price", "side")))
    if len(disputed):
        cash[disputed] = _told_apart(given, breaks, disputed)
    return cash


def _told_apart(given: Given, breaks: Table, rows: Array) -> Array:
    """By how much the party's own amount is off, where face, price or side are in dispute."""
    items, item = given.items, breaks["item_row"][rows]
    by_broker = breaks["party"].holds("Broker")[rows]
    told = np.where(by_broker, items["broker_minor"][item], items["desk_minor"][item])
    expected = given.expected_minor[item]
    known = (told != MISSING) & (expected != MISSING)
    return np.where(known, np.abs(np.where(known, told - expected, 0)), 0)


def _interest(given: Given, item: Array, cash: Array, days: Array | int) -> Array:
    """Interest on cash for so many days, exact and rounded half up."""
    currency = given.items["currency"].take(item)
    rate = per_word(currency, given.settings.interest_e9, given.settings.interest_e9([""])[0])
    basis = per_word(currency, given.settings.interest_basis, 360)
    return half_up([cash, rate, days], [100 * 10**9, basis])


def _stake(given: Given, breaks: Table, kind: Array, cash: Array, exposure: Array) -> Array:
    money = np.where(_among(kind, ON_DIFFERENCE + ON_AMOUNT), cash, 0)
    dates = np.flatnonzero(_among(kind, ON_DAYS))
    if len(dates):
        days = np.abs(_days(breaks["difference"].take(dates)))
        money[dates] = np.abs(_interest(given, breaks["item_row"][dates], cash[dates], days))
    return np.where(_among(kind, REVALUED), np.maximum(cash, np.where(exposure == MISSING, 0, exposure)), money)


def _days(differences: Words) -> Array:
    """Differences of dates, told in whole days."""
    return np.asarray(pc.cast(differences.to_arrow(), pa.int64()).to_numpy(zero_copy_only=False), np.int64)


def overdue_days(given: Given) -> Array:
    """Business days from each item's payment day to the morning's date, on the bond's calendar; 0 when not past."""
    items, terms = given.items, given.terms
    due = np.where(np.isnat(given.expected_date), items["bank_date"], given.expected_date)
    late = ~np.isnat(due) & (due < given.date)
    out = np.zeros(len(given), np.int64)
    on_bond = np.flatnonzero(late & (items["bond_row"] >= 0))
    if len(on_bond):
        calendar = terms.calendar[items["bond_row"][on_bond]]
        out[on_bond] = terms.calendars.count(calendar, due[on_bond], np.full(len(on_bond), given.date))
    others = np.flatnonzero(late & (items["bond_row"] < 0))
    if len(others):
        out[others] = np.busday_count(due[others], given.date)
    return np.maximum(out, 0)


def rate_exposure(given: Given, rows: Array) -> Array:
    """What one percentage point of yield moves each item's position, minor units; MISSING where no yield goes with its price."""
    items = given.items
    out = np.full(len(rows), MISSING)
    usable = (items["bond_row"][rows] >= 0) & (items["price_e12"][rows] != MISSING) & (items["face_minor"][rows] != MISSING)
    usable &= ~np.isnat(given.expected_date[rows])
    places = np.flatnonzero(usable)
    for first in range(0, len(places), _CHUNK):
        part = places[first : first + _CHUNK]
        out[part] = _revalued(given, rows[part])
    return out


def _revalued(given: Given, rows: Array) -> Array:
    items, terms = given.items, given.terms
    bonds, day = items["bond_row"][rows].astype(np.int64), given.expected_date[rows]
    face = np.abs(items["face_minor"][rows])
    clean = settlement.settle(terms, bonds, day, face, items["price_e12"][rows]).price_per100
    dealt = pricing.yield_from_price(terms, bonds, day, clean)
    here = pricing.dirty_at(terms, bonds, day, dealt)
    moves = [np.abs(pricing.dirty_at(terms, bonds, day, dealt + shift) - here) for shift in (-POINT, POINT)]
    # one side may be beyond any yield that has a price
    change = np.fmax(*moves) / 100 * (accrual.factors(terms, bonds, day) / 10**12)
    worth = face * change
    known = np.isfinite(worth) & (worth < 2.0**62)
    return np.where(known, np.rint(np.where(known, worth, 0)).astype(np.int64), MISSING)
