"""Every fact that two parties tell is held against each other; each one that differs is a break of its own.

What the terms know is compared with what Broker, Desk and Bank told; where the terms are silent (an unknown bond, an untold fact),
the desk's figures stand in for them and the broker differs. Amounts differ only beyond the tolerance, everything else exactly.
A party that told another currency has that one break: its amounts cannot be compared. Yields have a file of
their own.

Not compared: accrued days, principal (the causes look at them) and a broker's own name for an account.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.breaks.found import AMOUNT, DATE, DECIMAL, WORD, Found, found
from reconciler.breaks.given import (
    BANK,
    BROKER,
    DESK,
    NAT,
    TERMS,
    Given,
    differs,
    digits_of,
    per_word,
)
from reconciler.records import MISSING, Words

Array = np.ndarray[Any, Any]

AMOUNT_KINDS = ("settlement amount", "payment amount")
DATE_KINDS = ("settlement date", "payment date")


def _reference(given: Given, terms: Array, name: str | None, missing: Any = MISSING) -> tuple[Array, Array]:
    """What is held against: the terms' fact, else the desk's (`name` in tickets); and whose it is."""
    desk = given.told(DESK, name) if name else np.full(len(given), missing, terms.dtype)
    silent = np.isnat(terms) if terms.dtype.kind == "M" else terms == missing
    return np.where(silent, desk, terms), np.where(silent, DESK, TERMS)


def amounts(given: Given) -> Iterator[Found]:
    """Settlement amounts and payments."""
    items = given.items
    expected = np.where(items["terms_minor"] == MISSING, items["desk_minor"], items["terms_minor"])
    reference = np.where(items["terms_minor"] == MISSING, DESK, TERMS)
    for party, name in ((BROKER, "broker_minor"), (DESK, "desk_minor"), (BANK, "bank_minor")):
        told = items[name]
        if party == BANK:
            # an item nobody but the broker and the bank told of
            by_broker = expected == MISSING
            other = given.bank_currency_differs | given.bank_only
            reference = np.where(by_broker, BROKER, reference)
            expected = np.where(by_broker & ~given.other_currency(BROKER), items["broker_minor"], expected)
            expected = np.where((reference == DESK) & given.other_currency(DESK), MISSING, expected)
        else:
            other = given.other_currency(party)
        both = (told != MISSING) & (expected != MISSING) & ~other
        off = both & (np.abs(np.where(both, told - expected, 0)) > given.tolerance)
        for kind, which in zip(AMOUNT_KINDS, (given.trade, ~given.trade), strict=True):
            rows = np.flatnonzero(off & which)
            yield found(kind, party, rows, AMOUNT, expected[rows], told[rows], reference=reference[rows])


def accrued(given: Given) -> Iterator[Found]:
    """Accrued interest, unsigned as told: negative only between the ex-dividend day and the coupon."""
    items = given.items
    signed = items["terms_accrued_minor"]
    terms = np.where(signed == MISSING, MISSING, -signed * items["side"])
    expected, reference = _reference(given, terms, "accrued_minor")
    for party in (BROKER, DESK):
        told = given.told(party, "accrued_minor")
        both = (told != MISSING) & (expected != MISSING) & ~given.other_currency(party)
        rows = np.flatnonzero(both & (np.abs(np.where(both, told - expected, 0)) > given.tolerance))
        yield found("accrued", party, rows, AMOUNT, expected[rows], told[rows], reference=reference[rows])


def fees(given: Given) -> Iterator[Found]:
    """Fees: the terms take the ticket's, so it is the broker who differs."""
    desk, broker = given.told(DESK, "fees_minor"), given.told(BROKER, "fees_minor")
    both = (desk != MISSING) & (broker != MISSING) & ~given.other_currency(BROKER) & ~given.other_currency(DESK)
    rows = np.flatnonzero(both & (desk != broker))
    yield found("fees", BROKER, rows, AMOUNT, desk[rows], broker[rows], reference=DESK)


def faces(given: Given) -> Iterator[Found]:
    """Faces, brought to the item's minor units where a party told another currency."""
    expected, reference = _reference(given, given.items["face_minor"], None)
    for party in (BROKER, DESK):
        told = given.told(party, "face_minor")
        digits = np.where(given.other_currency(party), digits_of(given.told(party, "currency")), given.digits)
        shift = given.digits - digits
        if shift.any():
            scaled = np.where(shift > 0, told * 10 ** np.maximum(shift, 0), told // 10 ** np.maximum(-shift, 0))
            told = np.where(told == MISSING, MISSING, scaled)
        rows = np.flatnonzero((told != MISSING) & (expected != MISSING) & (told != expected) & given.trade)
        yield found("face", party, rows, AMOUNT, expected[rows], told[rows], reference=reference[rows])


def prices(given: Given) -> Iterator[Found]:
    """Prices in the bond's quote, as numbers."""
    expected = given.items["price_e12"]
    for party in (BROKER, DESK):
        told = given.told(party, "price_e12")
        rows = np.flatnonzero((told != MISSING) & (expected != MISSING) & (told != expected))
        yield found("price", party, rows, DECIMAL, expected[rows], told[rows])


def sides(given: Given) -> Iterator[Found]:
    """Who buys and who sells, from our point of view."""
    words = pa.array(["sell", None, "buy"], pa.string())
    expected = given.items["side"]
    for party in (BROKER, DESK):
        told = given.told(party, "side")
        rows = np.flatnonzero((told != 0) & (expected != 0) & (told != expected) & given.trade)
        mine, theirs = (words.take(pa.array(side[rows] + 1)) for side in (expected, told))
        yield found("side", party, rows, WORD, mine, theirs)


def settlement_dates(given: Given) -> Iterator[Found]:
    """Settlement dates of Broker and Desk."""
    items = given.items
    silent = np.isnat(items["terms_date"])
    expected, reference = np.where(silent, items["desk_date"], items["terms_date"]), np.where(silent, DESK, TERMS)
    for party, name in ((BROKER, "broker_date"), (DESK, "desk_date")):
        told = items[name]
        rows = np.flatnonzero(~np.isnat(told) & ~np.isnat(expected) & (told != expected) & given.trade)
        yield found("settlement date", party, rows, DATE, expected[rows], told[rows], reference=reference[rows])


def bank_dates(given: Given) -> Iterator[Found]:
    """Value dates of the entries that pay an item; where several are off, the last of them."""
    rows = given.allocations["item_row"]
    value = given.cash["value_date"][given.allocations["cash_row"]]
    expected = given.expected_date[rows]
    off = ~np.isnat(value) & ~np.isnat(expected) & (value != expected) & given.paid[rows]
    last = np.full(len(given), np.iinfo(np.int64).min)
    np.maximum.at(last, rows[off], value[off].astype(np.int64))
    told = last.view("datetime64[D]")  # int64 min is NaT
    wrong = np.flatnonzero(~np.isnat(told))
    reference = np.where(np.isnat(given.items["terms_date"]), DESK, TERMS)
    for kind, which in zip(DATE_KINDS, (given.trade, ~given.trade), strict=True):
        at = wrong[which[wrong]]
        yield found(kind, BANK, at, DATE, given.expected_date[at], told[at], reference=reference[at])


def trade_dates(given: Given) -> Iterator[Found]:
    """Trade dates."""
    expected, reference = _reference(given, given.items["terms_trade_date"], "trade_date", NAT)
    for party in (BROKER, DESK):
        told = given.told(party, "trade_date")
        rows = np.flatnonzero(~np.isnat(told) & ~np.isnat(expected) & (told != expected))
        yield found("trade date", party, rows, DATE, expected[rows], told[rows], reference=reference[rows])


def _word_breaks(kind: str, party: int, rows: Array, expected: Words, told: Words, reference: Array | int = TERMS) -> Found:
    return found(kind, party, rows, WORD, expected.to_arrow(), told.to_arrow(), reference=reference)


def currencies(given: Given) -> Iterator[Found]:
    """Currencies: the bond's is right."""
    mine = given.items["currency"]
    for party in (BROKER, DESK):
        rows = np.flatnonzero(given.other_currency(party) & given.trade)
        yield _word_breaks("currency", party, rows, mine.take(rows), given.told(party, "currency").take(rows))
    yield from _entry_breaks(given, "currency")


def accounts(given: Given) -> Iterator[Found]:
    """Accounts: the broker's only where it is a name that the desk uses, the bank's by the entry."""
    desk, broker = given.told(DESK, "account"), given.told(BROKER, "account")
    known = per_word(broker, lambda words: pc.is_in(pa.array(words, pa.string()), given.accounts).to_numpy(False), False)
    rows = np.flatnonzero(differs(desk, broker) & known.astype(np.bool_))
    yield _word_breaks("account", BROKER, rows, desk.take(rows), broker.take(rows), DESK)
    yield from _entry_breaks(given, "account")


def _entry_breaks(given: Given, name: str) -> Iterator[Found]:
    """Account or currency of the entries that pay an item; of several wrong ones the alphabetically first."""
    rows, cash_rows = given.allocations["item_row"], given.allocations["cash_row"]
    theirs, mine = given.cash[name].take(cash_rows), given.items[name].take(rows)
    off = np.flatnonzero(differs(theirs, mine) & given.paid[rows])
    order = off[np.lexsort((theirs.rank()[off], rows[off]))] if len(off) else off
    at, first = np.unique(rows[order], return_index=True)
    yield _word_breaks(name, BANK, at, given.items[name].take(at), theirs.take(order[first]))


def within_tolerance(given: Given) -> Array:
    """True where an amount that is compared is off, but by no more than the tolerance."""
    items = given.items
    out = np.zeros(len(given), np.bool_)
    expected = given.expected_minor
    for name in ("broker_minor", "desk_minor", "bank_minor"):
        told = items[name]
        both = (told != MISSING) & (expected != MISSING)
        out |= both & (told != expected)
    signed = items["terms_accrued_minor"]
    terms = np.where(signed == MISSING, MISSING, -signed * items["side"])
    for party in (BROKER, DESK):
        told = given.told(party, "accrued_minor")
        out |= (told != MISSING) & (terms != MISSING) & (told != terms)
    return out & ~given.bank_only
