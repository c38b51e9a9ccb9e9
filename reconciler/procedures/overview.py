"""The lists of the window need, per payment, which break stands first and which party differs; this gathers it once per morning.

Everything is a lookup or a sum over whole columns: the top-ranked break of each item and of each of its parties, how many
breaks an item has, what is at stake in all, net differences by currency. The net difference of an item is what the bank booked
less what the terms say; where cash that is due is missing, all of it; where the bank has not to speak yet, the broker's
difference, else the desk's. Amounts told in another currency than the bond's cannot be compared and are left out.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler import money
from reconciler.breaks.causes.search import FOLLOWS
from reconciler.records import MISSING, PARTIES, STATES, Table, Words


@dataclass(frozen=True)
class NetDifference:
    """The sum of an item's differences in one currency, minor units, over `items` payments with breaks."""

    currency: str
    minor: int
    digits: int
    items: int


@dataclass(frozen=True)
class Overview:
    """One value per item of the day, plus the day's counts.

    `first_break`, `telling_break` (the first whose cause is more than that it follows from another) and `party_breaks[party]` are row numbers into the day's breaks (-1 none); `party_bits` has bit i set when
    party i of records.PARTIES has a break; `net_minor` is MISSING where there is nothing to compare; `cash_row` is the first bank
    entry allocated to the item (-1 none).
    """

    first_break: np.ndarray
    telling_break: np.ndarray
    break_count: np.ndarray
    party_breaks: tuple[np.ndarray, ...]
    party_bits: np.ndarray
    kind_bits: np.ndarray
    kinds: tuple[str, ...]
    description: Words
    digits: np.ndarray
    state: np.ndarray
    net_minor: np.ndarray
    net: tuple[NetDifference, ...]
    cash_row: np.ndarray
    counts: dict[str, int]
    breaks: int


def overview(day: Any) -> Overview:
    """Gathers what the lists show of a day (procedures.morning.Day)."""
    items, breaks = day.items, day.breaks
    rows = len(items)
    item_row = np.asarray(breaks["item_row"], np.int64)
    # the last assignment to a row stands, so breaks are laid down from the least urgent to the most urgent
    order = np.argsort(np.asarray(breaks["rank"]), kind="stable")[::-1]
    telling = order[np.argsort(_numbers(breaks["cause"], (FOLLOWS.name,))[order] < 0, kind="stable")]
    parties = _numbers(breaks["party"], PARTIES)
    kinds, kind_of = _vocabulary(breaks["break"])
    kind_bits = np.zeros(rows, np.int64)
    np.bitwise_or.at(kind_bits, item_row, np.left_shift(1, kind_of.astype(np.int64)))
    by_party = []
    party_bits = np.zeros(rows, np.int8)
    # a party's cell tells the amount where that is off, else its most urgent break
    amounts_last = order[np.argsort(_is_amount(breaks["break"])[order], kind="stable")]
    for number in range(len(PARTIES)):
        mine = amounts_last[parties[amounts_last] == number]
        by_party.append(_lay_down(rows, item_row[mine], mine))
        party_bits[item_row[mine]] |= np.int8(1 << number)
    digits = digits_of(items["currency"])
    state = _numbers(items["state"], STATES)
    net_minor = _net(items, breaks, state == STATES.index("break"))
    counts = {name: int(np.count_nonzero(state == number)) for number, name in enumerate(STATES)}
    return Overview(
        first_break=_lay_down(rows, item_row[order], order),
        telling_break=_lay_down(rows, item_row[telling], telling),
        break_count=np.bincount(item_row, minlength=rows).astype(np.int32),
        party_breaks=tuple(by_party),
        party_bits=party_bits,
        kind_bits=kind_bits,
        kinds=kinds,
        description=_descriptions(items, day.source.bonds),
        digits=digits,
        state=state,
        net_minor=net_minor,
        net=_net_by_currency(items["currency"], net_minor, digits, item_row[order[::-1]]),
        counts=counts,
        breaks=len(breaks),
        cash_row=_lay_down(rows, day.allocations["item_row"][::-1], day.allocations["cash_row"][::-1]),
    )


def digits_of(currency: Words) -> np.ndarray:
    """Digits of the minor unit of every row's currency (int64), 2 where it is blank."""
    per_value = np.append(np.asarray(money.minor_digits(currency.values.to_pylist()), np.int64), 2)
    return per_value[currency.codes]


def _is_amount(kinds: Words) -> np.ndarray:
    return _numbers(kinds, ("settlement amount", "payment amount")) >= 0


def _lay_down(rows: int, at: np.ndarray, what: np.ndarray) -> np.ndarray:
    out = np.full(rows, -1, np.int64)
    out[at] = what
    return out


def _numbers(column: Words, words: tuple[str, ...]) -> np.ndarray:
    place = {word: number for number, word in enumerate(words)}
    per_value = np.array([place.get(value, -1) for value in column.values.to_pylist()] + [-1], np.int8)
    return per_value[column.codes]


def _vocabulary(column: Words) -> tuple[tuple[str, ...], np.ndarray]:
    used = np.unique(column.codes[column.codes >= 0])
    words = column.values.take(used).to_pylist() if len(used) else []
    order = sorted(range(len(words)), key=words.__getitem__)
    place = np.zeros(len(column.values) + 1, np.int64)
    place[used[order]] = np.arange(len(used))
    return tuple(words[i] for i in order), place[column.codes]


def _descriptions(items: Table, bonds: Table) -> Words:
    told = bonds["description"].take(items["bond_row"])
    return told.where(told.known(), items["bond"])


def _net(items: Table, breaks: Table, broken: np.ndarray) -> np.ndarray:
    terms = np.where(items["terms_minor"] == MISSING, 0, items["terms_minor"])
    named = _numbers(breaks["break"], ("no cash", "currency"))
    no_cash = np.zeros(len(items), bool)
    no_cash[breaks["item_row"][named == 0]] = True
    other_currency = np.zeros(len(items), bool)
    other_currency[breaks["item_row"][named == 1]] = True
    found = np.where(no_cash, 0, items["bank_minor"])
    for column in ("broker_minor", "desk_minor"):
        told = items[column]
        # the first party in order of weight that tells something else speaks for the item
        silent = (found == MISSING) | ((found == terms) & ~no_cash & (items["bank_minor"] == MISSING))
        found = np.where(silent & (told != MISSING), told, found)
    known = broken & ~other_currency & (found != MISSING)
    return np.where(known, np.where(known, found, 0) - terms, MISSING)


def _net_by_currency(
    currency: Words, net: np.ndarray, digits: np.ndarray, urgent: np.ndarray
) -> tuple[NetDifference, ...]:
    known = np.flatnonzero((net != MISSING) & (net != 0) & (currency.codes >= 0))
    codes = currency.codes[known]
    sums = np.zeros(len(currency.values), np.int64)
    np.add.at(sums, codes, net[known])
    counts = np.bincount(codes, minlength=len(currency.values))
    out = []
    for code in np.flatnonzero(counts).tolist():
        name = str(currency.values[code].as_py())
        places = int(digits[known[codes == code][0]])
        out.append(NetDifference(name, int(sums[code]), places, int(counts[code])))
    # sums of different currencies cannot be compared: the currency whose break is the most urgent stands first
    codes, first = np.unique(currency.codes[urgent], return_index=True)
    place = dict(zip((str(currency.values[int(c)].as_py()) for c in codes if c >= 0), first[codes >= 0].tolist(), strict=True))
    return tuple(sorted(out, key=lambda n: (place.get(n.currency, len(urgent)), n.currency)))
