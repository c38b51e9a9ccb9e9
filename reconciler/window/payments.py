"""One payment, four accounts side by side: silent where they agree, plain where they differ.

The columns of the lists of payments (breaks, due, agreed), declared as data: what a page of rows shows (payment_cells.py), how
rows rank, what is copied and exported; and the lists themselves, with what can be searched and filtered.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.records import MISSING, PARTIES, STATES, Words, gather
from reconciler.window.payment_cells import (
    Payments,
    day_cells,
    overdue_cells,
    party_cells,
    payment_cells,
    stake_cells,
    terms_cells,
    text_cells,
    why_cells,
)
from reconciler.window.search import Index
from reconciler.window.sheet import Column, Facet, Fact, Sheet, facet_of


def _scaled(data: Payments, minor: np.ndarray) -> np.ndarray:
    """Minor units of different currencies on one scale, for ordering only."""
    scale = 10 ** (data.finest - data.overview.digits[data.rows])
    return np.where(minor == MISSING, MISSING, minor * scale)


def _day_rank(days: np.ndarray) -> np.ndarray:
    return np.where(np.isnat(days), MISSING, days.astype(np.int64))


def _payment_rank(data: Payments) -> np.ndarray:
    names = data.overview.description.rank()[data.rows].astype(np.int64)
    kinds = data.whole("kind").rank().astype(np.int64)
    return (names << 4) | (kinds + 1)


def _party_rank(party: int, column: str) -> Any:
    def rank(data: Payments) -> np.ndarray:
        # those with a break first, by how urgent it is; then those that spoke
        found = data.overview.party_breaks[party][data.rows]
        urgency = np.append(data.breaks["rank"], 0)[found]
        told = data.items[column][data.rows] != MISSING
        return np.where(found >= 0, urgency, np.where(told, 2**40, 2**41))

    return rank


def _break_rank(name: str) -> Any:
    def rank(data: Payments) -> np.ndarray:
        column = data.breaks[name]
        values = column.rank() if isinstance(column, Words) else column
        return gather(np.asarray(values, np.int64), data.first)

    return rank


def _cause_rank(data: Payments) -> np.ndarray:
    return gather(data.breaks["cause"].rank().astype(np.int64), data.telling)


def _stake_rank(data: Payments) -> np.ndarray:
    # amounts of different currencies cannot be compared as they stand; the morning's ranking has done it in one currency
    return -gather(np.asarray(data.breaks["rank"], np.int64), data.first, 0)


COLUMNS: tuple[Column, ...] = (
    Column("payment", "Payment", "What is paid; below it ticket, date and counterparty", payment_cells, _payment_rank, 310,
           stretch=3),
    Column("terms", "Terms", "What the bond's own terms say must be paid; a payment by us is negative", terms_cells,
           lambda d: _scaled(d, d.whole("terms_minor")), 90, right=True),
    Column("broker", "Broker", "What the broker confirmed: = where it agrees with the terms",
           party_cells(1, "broker_minor"), _party_rank(1, "broker_minor"), 72, right=True),
    Column("desk", "Desk", "What our own ticket says: = where it agrees with the terms", party_cells(2, "desk_minor"),
           _party_rank(2, "desk_minor"), 72, right=True),
    Column("bank", "Bank", "What was booked to our cash account: = where it agrees with the terms",
           party_cells(3, "bank_minor"), _party_rank(3, "bank_minor"), 72, right=True),
    Column("why", "Why", "The cause found for the most urgent break, and how certain it is", why_cells, _cause_rank, 230,
           stretch=2),
    Column("overdue", "Overdue", "Business days since the payment was due", overdue_cells, _break_rank("overdue_days"), 60,
           right=True, descending_first=True),
    Column("stake", "At stake", "What can be lost while the break is open; sorted by its worth in one currency", stake_cells,
           _stake_rank, 80, right=True, descending_first=True),
)  # fmt: skip

QUIET_COLUMNS: tuple[Column, ...] = (
    *COLUMNS[:5],
    Column("day", "Day", "The day the terms say it is paid", day_cells, lambda d: _day_rank(d.whole("terms_date")), 90, stretch=1),
    Column("account", "Account", "The cash account it is paid to or from", text_cells("account"),
           lambda d: d.whole("account").rank(), 150, stretch=2),
    Column("state", "State", "Agrees, within tolerance or due", text_cells("state"), lambda d: d.whole("state").rank(), 120,
           stretch=1),
)  # fmt: skip
"""Of the lists without breaks."""


def _item_fact(title: str, name: str, kind: str = "text") -> Fact:
    digits = (lambda d, at: d.overview.digits[d.rows[at]]) if kind == "amount" else None
    return Fact(title, kind, lambda d, at: d.item(name, at), digits)


def _break_fact(title: str, name: str, kind: str = "text") -> Fact:
    digits = (lambda d, at: d.overview.digits[d.rows[at]]) if kind == "amount" else None
    return Fact(title, kind, lambda d, at: d.of_break(name, at), digits)


ITEM_FACTS: tuple[Fact, ...] = (
    _item_fact("item", "item"), _item_fact("kind", "kind"), _item_fact("account", "account"), _item_fact("bond", "bond"),
    Fact("description", "text", lambda d, at: d.overview.description.take(d.rows[at])),
    _item_fact("currency", "currency"), _item_fact("ticket", "ticket"), _item_fact("broker", "broker"),
    _item_fact("broker reference", "broker_reference"), _item_fact("coupon date", "coupon_date", "date"),
    _item_fact("face", "face_minor", "amount"), _item_fact("price", "price_text"),
    _item_fact("terms amount", "terms_minor", "amount"), _item_fact("broker amount", "broker_minor", "amount"),
    _item_fact("desk amount", "desk_minor", "amount"), _item_fact("bank amount", "bank_minor", "amount"),
    _item_fact("terms date", "terms_date", "date"), _item_fact("broker date", "broker_date", "date"),
    _item_fact("desk date", "desk_date", "date"), _item_fact("bank date", "bank_date", "date"),
    _item_fact("bank entries", "bank_entries"), _item_fact("state", "state"),
)  # fmt: skip

BREAK_FACTS: tuple[Fact, ...] = (
    Fact("breaks", "count", lambda d, at: d.overview.break_count[d.rows[at]].astype(np.int64)),
    _break_fact("break", "break"), _break_fact("party", "party"), _break_fact("expected", "expected"),
    _break_fact("found", "found"), _break_fact("difference", "difference"), _break_fact("cause", "cause"),
    _break_fact("certainty", "certainty"), _break_fact("explanation", "explanation"),
    _break_fact("next step", "next_step"), _break_fact("overdue days", "overdue_days", "count"),
    _break_fact("money at stake", "stake_minor", "amount"), _break_fact("rank", "rank", "count"),
)  # fmt: skip


def _index(data: Payments) -> Index:
    digits = data.overview.digits[data.rows]
    words = {name: data.whole(name) for name in
             ("ticket", "bond", "broker", "broker_reference", "account", "bank_entries", "kind", "currency")}  # fmt: skip
    words["description"] = data.overview.description.take(data.rows)
    if (data.first >= 0).any():
        words |= {name: data.breaks[name].take(data.first) for name in ("cause", "break", "explanation")}
    amounts = {name: (data.whole(name), digits) for name in
               ("terms_minor", "broker_minor", "desk_minor", "bank_minor", "face_minor")}  # fmt: skip
    dates = {name: data.whole(name) for name in ("terms_date", "broker_date", "desk_date", "bank_date", "coupon_date")}
    return Index(len(data.rows), words, amounts, dates)


def _facets(data: Payments, broken: bool) -> list[Facet]:
    facets = []
    if broken:
        facets = [
            Facet("party", "Party", PARTIES, bits=data.overview.party_bits[data.rows]),
            Facet("kind", "Kind", data.overview.kinds, bits=data.overview.kind_bits[data.rows]),
        ]
    else:
        facets = [facet_of("kind", "Kind", data.whole("kind"))]
    facets += [facet_of("currency", "Currency", data.whole("currency")), facet_of("broker", "Broker", data.whole("broker")),
               facet_of("account", "Account", data.whole("account"))]  # fmt: skip
    return facets


def payments_sheet(day: Any, overview: Any, states: tuple[str, ...]) -> Sheet:
    """The list of the day's items in some states; breaks by urgency, the others by date and item order."""
    wanted = np.isin(overview.state, [STATES.index(state) for state in states])
    rows = np.flatnonzero(wanted)
    broken = "break" in states
    if broken:
        first = overview.first_break[rows]
        urgency = np.where(first >= 0, np.append(day.breaks["rank"], 0)[first], np.iinfo(np.int64).max)
        rows = rows[np.argsort(urgency, kind="stable")]
    else:
        # the latest first: what was paid yesterday is looked up more often than what was paid a week ago
        rows = rows[np.argsort(-_day_rank(day.items["terms_date"][rows]), kind="stable")]
    data = Payments(day, overview, rows)
    columns = COLUMNS if broken else QUIET_COLUMNS
    facts = ITEM_FACTS + BREAK_FACTS if broken else ITEM_FACTS
    return Sheet(data, len(rows), columns, facts, _index(data), _facets(data, broken))
