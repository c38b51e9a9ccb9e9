"""The two sides that cash matching looks at, payments and bank entries, as columns of whole numbers, and what has been paired so far.

Words of both sides share one vocabulary, so equal numbers mean equal text; -1 is untold. A payment may have been told three amounts
(Terms, Desk, Broker): the bank may have paid any of them. Stages take pairs from what is still open; nothing is ever taken back.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.matching.keys import Order, content_order
from reconciler.records import ITEM_KINDS, MISSING, Table, Words, unify

Array = np.ndarray[Any, Any]

TRADE, COUPON, REDEMPTION = 1, 2, 4
"""Kinds as bits, so that a narrative may speak of several."""

# Words by which banks say what they pay, whole words in capitals; common practice, no source.
_SPEAKING = (
    (COUPON, ("COUPON", "COUPONS", "CPN", "INTEREST", "INT")),
    (REDEMPTION, ("REDEMPTION", "REDEMPTIONS", "MATURITY", "MATURED", "REPAYMENT", "PRINCIPAL", "AMORTISATION", "AMORTIZATION")),
    (TRADE, ("PURCHASE", "SALE", "BOUGHT", "SOLD", "BUY", "SELL", "TRADE", "TRADES", "DVP", "RVP", "SECURITIES")),
)  # fmt: skip
_UNDOING = ("REVERSAL", "REVERSED", "REVERSE", "REV", "STORNO", "CANCEL", "CANCELLED", "CANCELLATION", "CORRECTION", "CORR", "RETURN")


class Board:
    """Payments (`i_` columns, rows of items) and entries (`e_` columns, rows of cash).

    `i_amounts` are the amounts of Terms, Desk and Broker, `i_different` the same with MISSING for one that a party before told,
    `i_expected` the first one known; `i_days` and `e_days` are days as int64.
    `i_open` and `e_open` say who still waits; payments of nothing and those of `silent` wait for nothing.
    """

    def __init__(self, items: Table, cash: Table, silent: Array) -> None:
        self.items, self.cash = items, cash
        self.i_account, self.e_account = _codes(items["account"], cash["account"])
        self.i_currency, self.e_currency = _codes(items["currency"], cash["currency"])
        self.i_bond = items["bond"].codes.astype(np.int64)
        told = cash["bond"].codes_in(items["bond"].values).astype(np.int64)
        self.e_bond = told
        self.e_reference = cash["reference"].codes.astype(np.int64)
        self.i_amounts = [items["terms_minor"], items["desk_minor"], items["broker_minor"]]
        self.i_different = [
            np.where(np.logical_or.reduce([column == other for other in self.i_amounts[:n]]), MISSING, column) if n else column
            for n, column in enumerate(self.i_amounts)
        ]
        self.i_expected = first_known(self.i_amounts, MISSING)
        self.e_amount = cash["amount_minor"]
        self.i_days = first_known([_days(items[n]) for n in ("terms_date", "desk_date", "broker_date")], MISSING)
        self.e_days = _days(cash["value_date"])
        self.i_kind = _kinds(items["kind"])
        self.e_kind, self.e_undoes = spoken(cash["narrative"])
        self.silent = silent.copy()
        self.i_open = (self.i_expected != 0) & ~silent & (self.i_kind > 0)
        self.e_open = self.e_amount != MISSING
        self.e_repeats = np.full(len(cash), -1, np.int64)
        self._taken: list[tuple[Array, Array, Array]] = []
        self.item_order: Order = content_order(items)
        self.entry_order: Order = content_order(cash, ("value_date", "entry"))

    def open(self) -> tuple[Array, Array]:
        """Rows of payments and of entries that nobody has yet."""
        return np.flatnonzero(self.i_open), np.flatnonzero(self.e_open)

    def take(self, payments: Array, entries: Array, shares: Array | None = None) -> None:
        """Keeps the pairs; without shares each entry goes to its payment whole."""
        payments, entries = np.asarray(payments, np.int64), np.asarray(entries, np.int64)
        self._taken.append((payments, entries, self.e_amount[entries] if shares is None else np.asarray(shares, np.int64)))
        self.i_open[payments] = False
        self.silent[payments] = False
        self.e_open[entries] = False

    def repeat(self, entries: Array, of: Array) -> None:
        """Marks entries as told twice: they pay nothing."""
        self.e_repeats[entries] = of
        self.e_open[entries] = False

    def taken(self) -> tuple[Array, Array, Array]:
        """All pairs so far: payment, entry, share."""
        if not self._taken:
            return np.zeros(0, np.int64), np.zeros(0, np.int64), np.zeros(0, np.int64)
        payments, entries, shares = (np.concatenate(column) for column in zip(*self._taken, strict=True))
        return payments, entries, shares

    def fits(self, payments: Array, amounts: Array, slack: Array | int = 1) -> Array:
        """True where an amount is, give or take the slack, one of the payment's three."""
        out = np.zeros(len(payments), np.bool_)
        for column in self.i_amounts:
            told = column[payments]
            out |= (told != MISSING) & (np.abs(np.where(told == MISSING, 0, told) - amounts) <= slack)
        return out

    def kinds_agree(self, payments: Array, entries: Array) -> Array:
        """False where the narrative speaks of another kind of payment."""
        spoken_of = self.e_kind[entries]
        return np.asarray((spoken_of == 0) | ((spoken_of & self.i_kind[payments]) > 0))

    def days_late(self, payments: Array, entries: Array) -> Array:
        """Days from the payment's day to the entry's, negative when early; MISSING where a day is untold."""
        due, came = self.i_days[payments], self.e_days[entries]
        known = (due != MISSING) & (came != MISSING)
        return np.where(known, np.where(known, came, 0) - np.where(known, due, 0), MISSING)


def _codes(one: Words, other: Words) -> tuple[Array, Array]:
    a, b = unify(one, other)
    return a.codes.astype(np.int64), b.codes.astype(np.int64)


def _days(dates: Array) -> Array:
    return np.asarray(dates.astype("datetime64[D]").view(np.int64))


def first_known(columns: list[Array], missing: int) -> Array:
    """Row by row the first of the columns that is not missing."""
    out = columns[0]
    for column in columns[1:]:
        out = np.where(out == missing, column, out)
    return out


def _kinds(kind: Words) -> Array:
    bits = {"trade": TRADE, "coupon": COUPON, "redemption": REDEMPTION}
    assert set(bits) < set(ITEM_KINDS)
    return np.asarray(np.array([bits.get(text, 0) for text in kind.values.to_pylist()] + [0])[kind.codes])


def spoken(narrative: Words) -> tuple[Array, Array]:
    """Per row the kinds of payment that the narrative speaks of (bits), and whether it speaks of undoing one."""
    used = np.unique(narrative.codes[narrative.codes >= 0])
    kinds = np.zeros(len(narrative.values) + 1, np.int8)
    undoes = np.zeros(len(narrative.values) + 1, np.bool_)
    if len(used):
        texts = pc.ascii_upper(narrative.values.take(pa.array(used)))
        parts = pc.ascii_split_whitespace(texts)
        owner = pc.list_parent_indices(parts).to_numpy()
        words = pc.utf8_trim(parts.flatten(), ".,;:()[]-/")
        table = [(word, bit) for bit, speaking in _SPEAKING for word in speaking] + [(word, 8) for word in _UNDOING]
        found = pc.fill_null(pc.index_in(words, value_set=pa.array([word for word, _ in table])), -1).to_numpy()
        hit = np.flatnonzero(found >= 0)
        bits = np.array([bit for _, bit in table], np.int8)[found[hit]]
        np.bitwise_or.at(kinds, used[owner[hit]], bits)
        undoes = (kinds & 8) > 0
        kinds &= 7
    kinds[-1], undoes[-1] = 0, False
    return kinds[narrative.codes], undoes[narrative.codes]
