"""The same thing told twice must not count twice: superseded confirmations, and rows that repeat another row.

Of several confirmations with one broker and reference, cancelled beats amended beats new: the beaten ones are set aside, and a
cancellation takes itself away too, for then the broker has told nothing. A confirmation left over repeats another one if broker and
reference are the same, or all facts are equal to a paired one's. A ticket left over repeats a paired one if all facts are
equal under another number.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from reconciler.matching import keys
from reconciler.matching.facts import TOLD
from reconciler.matching.keys import Pairs, content_order, mixed, whole
from reconciler.records import MISSING, STATUSES, Table, Words, unify

Array = np.ndarray[Any, Any]


def in_force(confirmations: Table) -> Array:
    """True for confirmations that stand: not superseded, not cancelled."""
    status = confirmations["status"]
    stands = np.ones(len(confirmations), np.bool_)
    if not len(status) or not (status > STATUSES["new"]).any():
        return stands
    key = _told_under(confirmations)
    _, group = np.unique(key, return_inverse=True)
    group = group.reshape(-1)
    highest = np.zeros(int(group.max()) + 1, np.int8)
    np.maximum.at(highest, group, status)
    return np.asarray((status == highest[group]) & (status != STATUSES["cancelled"]))


def _told_under(confirmations: Table) -> Array:
    """One key per broker and reference; without a reference of its own, per desk reference, else per row."""
    theirs, ours = whole(confirmations["broker_reference"]), whole(confirmations["desk_reference"])
    which = np.where(theirs != MISSING, 0, np.where(ours != MISSING, 1, 2))
    number = np.choose(which, (theirs, ours, np.arange(len(ours))))
    return mixed((whole(confirmations["broker"]), which, number))


def repeated_confirmations(
    confirmations: Table, tickets: Words, facts: Mapping[str, Array], ticket_of: Array, left: Array
) -> Pairs:
    """Those of the rows `left` without a ticket that repeat another confirmation, and which one each repeats.

    `tickets` are the ticket numbers, `ticket_of` the ticket row of every confirmation (-1 none). A confirmation that names another ticket
    than the paired one's is no repeat of it, however alike.
    """
    if not len(left):
        return keys.NO_PAIRS
    order = content_order(confirmations)
    paired = np.flatnonzero(ticket_of >= 0)
    told = whole(confirmations["broker_reference"]) != MISSING
    by_number = mixed((whole(confirmations["broker"]), whole(confirmations["broker_reference"])))
    of = np.full(len(confirmations), -1, np.int64)
    _point(of, by_number, left[told[left]], paired[told[paired]], order)
    # Without a ticket at all, the first by content stands for the trade.
    rest = left[(of[left] < 0) & told[left]]
    _point(of, by_number, rest, _firsts(by_number, rest, order), order)
    by_facts = mixed(facts[name] for name in TOLD)
    own, told_numbers = unify(tickets, confirmations["desk_reference"])
    number = np.where(ticket_of < 0, whole(told_numbers), whole(own.take(ticket_of)))
    rest = np.setdiff1d(left[of[left] < 0], of[of >= 0])
    known = rest[np.all([facts[name][rest] != MISSING for name in ("bond", "face", "amount")], axis=0)] if len(rest) else rest
    for key in (mixed((by_facts.view(np.int64), number)), by_facts):
        _point(of, key, known[of[known] < 0], paired, order, number)
    again = left[of[left] >= 0]
    return again, of[again]


def _point(of: Array, key: Array, rows: Array, firsts: Array, order: keys.Order, unlike: Array | None = None) -> None:
    """Lets each of `rows` point at the first (by content) of `firsts` with its key; `unlike` must not contradict where both told it."""
    if not len(rows) or not len(firsts):
        return
    wanted = firsts[keys.occurs(key[firsts], key[rows])]
    wanted = wanted[np.lexsort((order(wanted), key[wanted]))]
    if not len(wanted):
        return
    place = np.searchsorted(key[wanted], key[rows])
    place = np.minimum(place, len(wanted) - 1)
    target = wanted[place]
    good = (key[target] == key[rows]) & (target != rows)
    if unlike is not None:
        good &= (unlike[target] == MISSING) | (unlike[rows] == MISSING) | (unlike[target] == unlike[rows])
    of[rows[good]] = target[good]


def _firsts(key: Array, rows: Array, order: keys.Order) -> Array:
    """The first row by content of every key that occurs more than once among `rows`."""
    if not len(rows):
        return rows
    _, group, counts = np.unique(key[rows], return_inverse=True, return_counts=True)
    some = rows[counts[group.reshape(-1)] > 1]
    if not len(some):
        return some
    some = some[np.lexsort((order(some), key[some]))]
    return some[np.unique(key[some], return_index=True)[1]]


def repeated_tickets(tickets: Table, facts: Mapping[str, Array], confirmation_of: Array, active: Array) -> Pairs:
    """Tickets in force without a confirmation that repeat a paired one under another number, and which one."""
    alone = np.flatnonzero(active & (confirmation_of < 0))
    paired = np.flatnonzero(active & (confirmation_of >= 0))
    # A ticket keyed without its amount is known by its price.
    told = {name: facts[name][alone] != MISSING for name in ("bond", "face", "amount", "price")}
    known = alone[told["bond"] & told["face"] & (told["amount"] | told["price"])]
    if not len(known) or not len(paired):
        return keys.NO_PAIRS
    of = np.full(len(tickets), -1, np.int64)
    order = content_order(tickets)
    reference = whole(tickets["broker_reference"])
    by_facts = mixed(facts[name] for name in TOLD)
    for key in (mixed((by_facts.view(np.int64), reference)), by_facts):
        _point(of, key, known[of[known] < 0], paired, order, reference)
    again = known[of[known] >= 0]
    return again, of[again]
