"""What the search for breaks looks at, brought to one row per item.

The four accounts of an item lie in different tables: the terms in the item itself, the broker's in the confirmations, the desk's in
the tickets, the bank's in the cash. `Given` gathers a fact of any party for every item, so that every check is a comparison of two
columns. A party that told another currency is marked once here, because its amounts cannot be compared.
"""

from __future__ import annotations

import functools
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.bonds.terms import Terms
from reconciler.money import minor_digits
from reconciler.records import MISSING, Table, Words, gather, unify
from reconciler.settings import Settings

Array = np.ndarray[Any, Any]
NAT = np.datetime64("NaT", "D")
TERMS, BROKER, DESK, BANK = range(4)


@dataclass(frozen=True)
class Given:
    """The tables of a morning up to the paired cash. `terms` has the row numbers of the items' `bond_row`.

    `faults` says per bond what is wrong with its terms, blank where they are sound; `repeats` has `kind` ("ticket", "confirmation" or
    "entry"), `row` and the row `of_row` that it repeats.
    """

    items: Table
    tickets: Table
    confirmations: Table
    cash: Table
    allocations: Table
    repeats: Table
    terms: Terms
    faults: Words
    date: np.datetime64
    settings: Settings
    accounts: pa.Array
    """Account names the desk uses; a broker's own name for an account is no difference."""

    def __len__(self) -> int:
        return len(self.items)

    def table_of(self, party: int) -> tuple[Table, Array]:
        """The confirmations or tickets, and every item's row in them (-1 none)."""
        if party == BROKER:
            return self.confirmations, self.items["confirmation_row"]
        return self.tickets, self.items["ticket_row"]

    def told(self, party: int, name: str) -> Any:
        """A fact that Broker or Desk told, per item; MISSING, NaT, 0 (side) or blank where not told."""
        table, rows = self.table_of(party)
        column = table[name]
        if isinstance(column, Words):
            return column.take(rows)
        missing: Any = NAT if column.dtype.kind == "M" else MISSING if column.dtype == np.int64 else 0
        return gather(column, rows, missing)

    @functools.cached_property
    def trade(self) -> Array:
        """True for items that are trades."""
        return np.asarray(self.items["kind"].holds("trade"))

    @functools.cached_property
    def bank_only(self) -> Array:
        """True for bank entries that nothing explains."""
        return np.asarray(self.items["kind"].holds("bank"))

    @functools.cached_property
    def digits(self) -> Array:
        """Digits of the minor unit of every item's currency."""
        return digits_of(self.items["currency"])

    @functools.cached_property
    def tolerance(self) -> Array:
        """Tolerated difference of every item, minor units."""
        return per_word(self.items["currency"], self.settings.tolerance_minor, self.settings.tolerance_minor([""])[0])

    def other_currency(self, party: int) -> Array:
        """True where Broker or Desk told a currency that is not the item's."""
        return self._other_currencies[party]

    @functools.cached_property
    def _other_currencies(self) -> dict[int, Array]:
        return {party: differs(self.told(party, "currency"), self.items["currency"]) for party in (BROKER, DESK)}

    @functools.cached_property
    def bank_currency_differs(self) -> Array:
        """True where an entry paired with the item is in another currency than the item."""
        out = np.zeros(len(self), np.bool_)
        rows = self.allocations["item_row"]
        theirs, mine = self.cash["currency"].take(self.allocations["cash_row"]), self.items["currency"].take(rows)
        out[rows[differs(theirs, mine)]] = True
        return out & self.paid

    @functools.cached_property
    def paid(self) -> Array:
        """True for payments that entries pay; not where all of them were taken back again."""
        return np.asarray((self.items["bank_minor"] != MISSING) & ~self.bank_only)

    @functools.cached_property
    def expected_date(self) -> Array:
        """The day cash is expected: the terms', else the desk's, else the broker's."""
        items = self.items
        desk = np.where(np.isnat(items["desk_date"]), items["broker_date"], items["desk_date"])
        return np.asarray(np.where(np.isnat(items["terms_date"]), desk, items["terms_date"]))

    @functools.cached_property
    def expected_minor(self) -> Array:
        """The amount expected: the terms', else the desk's, else the broker's."""
        items = self.items
        desk = np.where(items["desk_minor"] == MISSING, items["broker_minor"], items["desk_minor"])
        return np.asarray(np.where(items["terms_minor"] == MISSING, desk, items["terms_minor"]))

    @functools.cached_property
    def repeated_tickets(self) -> tuple[Array, Array]:
        """Items whose ticket repeats another one, and that other ticket's row."""
        return self._repeats("ticket", self.items["ticket_row"], len(self.tickets), by_row=True)

    @functools.cached_property
    def repeated_confirmations(self) -> tuple[Array, Array]:
        """Items whose confirmation was told again, and the row of the confirmation that repeats it."""
        return self._repeats("confirmation", self.items["confirmation_row"], len(self.confirmations), by_row=False)

    @functools.cached_property
    def entry_items(self) -> Array:
        """The bank item of every cash row, -1 where the entry pays something."""
        out = np.full(len(self.cash), -1, np.int64)
        rows = self.allocations["item_row"]
        own = self.bank_only[rows]
        out[self.allocations["cash_row"][own]] = rows[own]
        return out

    @functools.cached_property
    def repeated_entries(self) -> tuple[Array, Array]:
        """Bank items whose entry repeats another one, and that other entry's row."""
        chosen = self.repeats["kind"].holds("entry")
        at = self.entry_items[self.repeats["row"][chosen]]
        return at[at >= 0], self.repeats["of_row"][chosen][at >= 0]

    def _repeats(self, kind: str, own: Array, length: int, by_row: bool) -> tuple[Array, Array]:
        chosen = self.repeats["kind"].holds(kind)
        row, of_row = self.repeats["row"][chosen], self.repeats["of_row"][chosen]
        item_of = np.full(length, -1, np.int64)
        known = own >= 0
        item_of[own[known]] = np.flatnonzero(known)
        at = item_of[row if by_row else of_row]
        return at[at >= 0], (of_row if by_row else row)[at >= 0]


def differs(one: Words, other: Words) -> Array:
    """True where both told something and not the same."""
    a, b = unify(one, other)
    return np.asarray((a.codes != b.codes) & (a.codes >= 0) & (b.codes >= 0))


def per_word(column: Words, of: Any, blank: Any) -> Array:
    """A value worked out once per distinct word, for every row; `blank` where nothing is told."""
    words: Sequence[str] = column.values.to_pylist()
    values = np.asarray(of(words))
    return np.asarray(np.append(values, np.asarray(blank, values.dtype if len(values) else None))[column.codes])


def digits_of(currency: Words) -> Array:
    """Digits of the minor unit of every row's currency, 2 where it is blank."""
    return per_word(currency, minor_digits, 2)
