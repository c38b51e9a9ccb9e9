"""Which confirmation speaks of which ticket? References settle most; for the rest, what was dealt has to.

In stages, surest first, each one-to-one: (1) by reference, ours or the broker's, unless everything dealt contradicts it; (2) all facts
equal; (3) one or two facts differ, but nothing else on either side fits; (4) by likeness, where the best is clearly better than the
next. Cancelled tickets come after the ones in force, so that a trade booked anew finds its confirmation. A confirmation of another
broker pairs by reference only.

An honest `no confirmation` beside a `no ticket` is better than a wrong pair: what stays unclear stays apart. Interchangeable rows pair
in the order of their content, never of their place in a file.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.matching import keys
from reconciler.matching.facts import DEALT, TOLD, Facts, facts_of
from reconciler.matching.keys import NO_PAIRS, Order, Pairs, content_order
from reconciler.matching.repeats import in_force, repeated_confirmations, repeated_tickets
from reconciler.matching.similar import similar_words
from reconciler.records import MISSING, STATUSES, Table, Words, unify

Array = np.ndarray[Any, Any]

REPEATS: dict[str, str] = {
    # a row that repeats another one of the same table: kind is ticket, confirmation or entry
    "kind": "text", "row": "int64", "of_row": "int64",
}  # fmt: skip

_ORDER = ("settlement_minor", "accrued_minor", "fees_minor", "account", "currency", "settlement_date", "trade_date")
# Weights of facts when only a reference speaks for a pair: enough of them must not contradict it.
_REFERENCE_WEIGHTS = {"bond": 4, "face": 4, "amount": 3, "price": 2, "side": 1, "trade_date": 1, "settlement_date": 1, "broker": 1}
_ENOUGH = 4
_LIKE_ENOUGH, _CLEARLY = 8.5, 1.25


@dataclass(frozen=True)
class TradePairs:
    """The trades of a morning, a row each; -1 where a party has none.

    `cancelled_row` is the cancelled ticket that a confirmation without a ticket in force speaks of. `repeats` (schema REPEATS) are
    tickets and confirmations told twice; a repeating ticket is a row here too, a repeating confirmation is not. `set_aside` are
    confirmations superseded by an amendment or cancelled, with the cancellations. `quiet` are cancelled tickets nobody confirms.
    Every ticket row is in `ticket_row`, `cancelled_row` or `quiet`, every confirmation row in `confirmation_row`, `repeats` or `set_aside`, once.
    """

    ticket_row: Array
    confirmation_row: Array
    cancelled_row: Array
    repeats: Table
    set_aside: Array
    quiet: Array

    def __len__(self) -> int:
        return len(self.ticket_row)


class _Pairing:
    """Who is paired with whom so far; stages take from the rows that are still open."""

    def __init__(self, tickets: Table, confirmations: Table, given: Array) -> None:
        self.tickets, self.confirmations = tickets, confirmations
        self.facts: Facts = facts_of(tickets, confirmations)
        self.of_ticket = np.full(len(tickets), -1, np.int64)
        self.of_confirmation = np.full(len(confirmations), -1, np.int64)
        self.given = self.stands = given
        self.desk_order: Order = content_order(tickets, _ORDER)
        self.broker_order: Order = content_order(confirmations, _ORDER)

    def open(self, allowed: Array) -> Pairs:
        """Rows of tickets (out of `allowed`) and of confirmations that nobody has yet."""
        return np.flatnonzero(allowed & (self.of_ticket < 0)), np.flatnonzero(self.given & (self.of_confirmation < 0))

    def set_repeats_aside(self) -> None:
        """Confirmations that repeat a paired one answer no other, unlike ticket.

        They tell its broker and reference, or name its ticket and tell the same facts under a new reference.
        """
        numbers, named = unify(self.tickets["ticket"], self.confirmations["desk_reference"])
        number = np.where(self.of_confirmation < 0, keys.whole(named), keys.whole(numbers.take(self.of_confirmation)))
        reference = keys.whole(self.confirmations["broker_reference"])
        for told, columns in (
            (reference, (keys.whole(self.confirmations["broker"]), reference)),
            (number, (number, *(self.facts.broker[name] for name in TOLD))),
        ):
            key, known = keys.mixed(columns), self.given & (told != MISSING)
            open_rows = np.flatnonzero(known & (self.of_confirmation < 0))
            paired = np.flatnonzero(known & (self.of_confirmation >= 0))
            if len(open_rows) and len(paired):
                self.given = self.given.copy()
                self.given[open_rows[keys.occurs(key[open_rows], key[paired])]] = False

    def take(self, pairs: Pairs) -> None:
        """Keeps the pairs (rows of the tables)."""
        self.of_ticket[pairs[0]] = pairs[1]
        self.of_confirmation[pairs[1]] = pairs[0]


def pair_trades(tickets: Table, confirmations: Table) -> TradePairs:
    """Tickets and confirmations as trades."""
    given = in_force(confirmations)
    work = _Pairing(tickets, confirmations, given)
    active = tickets["status"] != STATUSES["cancelled"]
    _by_reference(work, active)
    _by_facts(work, active)
    _by_reference(work, ~active)
    _with_differences(work, active)
    _by_facts(work, ~active)
    _with_differences(work, ~active)
    return _result(work, active)


def _result(work: _Pairing, active: Array) -> TradePairs:
    left = np.flatnonzero(work.stands & (work.of_confirmation < 0))
    again, of_confirmation = repeated_confirmations(
        work.confirmations, work.tickets["ticket"], work.facts.broker, work.of_confirmation, left
    )
    twice, of_ticket = repeated_tickets(work.tickets, work.facts.desk, work.of_ticket, active)
    lone = np.setdiff1d(left, again, assume_unique=True)
    mine = np.flatnonzero(active)
    void = np.flatnonzero(~active & (work.of_ticket >= 0))
    kinds = Words(np.repeat(np.array([0, 1], np.int32), [len(twice), len(again)]), Words.of(["ticket", "confirmation"]).values)
    return TradePairs(
        ticket_row=np.concatenate((mine, _none(len(void) + len(lone)))),
        confirmation_row=np.concatenate((work.of_ticket[mine], work.of_ticket[void], lone)),
        cancelled_row=np.concatenate((_none(len(mine)), void, _none(len(lone)))),
        repeats=Table({"kind": kinds, "row": np.concatenate((twice, again)), "of_row": np.concatenate((of_ticket, of_confirmation))}),
        set_aside=np.flatnonzero(~work.stands),
        quiet=np.flatnonzero(~active & (work.of_ticket < 0)),
    )


def _none(length: int) -> Array:
    return np.full(length, -1, np.int64)


def _by_reference(work: _Pairing, allowed: Array) -> None:
    """Our ticket number told by the broker, or the broker's number told by the desk with the same broker."""
    mine, theirs = work.open(allowed)
    if not len(mine) or not len(theirs):
        return
    ours = _told_alike(work.tickets["ticket"], work.confirmations["desk_reference"], mine, theirs)
    brokers = _told_alike(
        work.tickets["broker_reference"], work.confirmations["broker_reference"], mine, theirs,
        work.facts.desk["broker"], work.facts.broker["broker"],
    )  # fmt: skip
    if not len(ours[0]) + len(brokers[0]):
        return
    size = len(work.confirmations)
    both = [a * size + b for a, b in (ours, brokers)]
    packed = keys.distinct(np.concatenate(both))
    named = sum(weight * keys.occurs(packed, part) for weight, part in zip((1.5, 1.0), both, strict=True))
    pairs = packed // size, packed % size
    agree = np.zeros(len(packed))
    for name, weight in _REFERENCE_WEIGHTS.items():
        agree += weight * work.facts.equal(name, pairs)
    sound = np.flatnonzero(agree >= _ENOUGH)
    pairs, cost = (pairs[0][sound], pairs[1][sound]), -(agree + named)[sound]
    alone = _alone(pairs)
    work.take((pairs[0][alone], pairs[1][alone]))
    rest = np.flatnonzero(~alone)
    some = pairs[0][rest], pairs[1][rest]
    chosen = keys.greedy(some, cost[rest], work.desk_order, work.broker_order)
    work.take((some[0][chosen], some[1][chosen]))


def _alone(pairs: Pairs) -> Array:
    """True where neither row is in another pair."""
    out = np.ones(len(pairs[0]), np.bool_)
    for side in pairs:
        out &= np.bincount(side)[side] == 1 if len(side) else True
    return out


def _told_alike(
    one: Words, other: Words, mine: Array, theirs: Array, mine_too: Array | None = None, theirs_too: Array | None = None
) -> Pairs:
    """Rows that told the same, non-blank text (and have the same number beside it)."""
    if not len(one.values) or not len(other.values):
        return NO_PAIRS
    left = one.codes.astype(np.int64)[mine]
    right = other.codes_in(one.values).astype(np.int64)[theirs]
    mine, left, theirs, right = mine[left >= 0], left[left >= 0], theirs[right >= 0], right[right >= 0]
    if mine_too is not None and theirs_too is not None:
        left, right = keys.mixed((left, mine_too[mine])), keys.mixed((right, theirs_too[theirs]))
    else:
        left, right = left.view(np.uint64), right.view(np.uint64)
    a, b = keys.candidates(left, right)
    return mine[a], theirs[b]


def _by_facts(work: _Pairing, allowed: Array) -> None:
    """All that was dealt is equal; of several such, those of one amount and account first."""
    for names in ((*DEALT, "amount", "account", "currency"), (*DEALT, "amount")):
        mine, theirs = work.facts.told(DEALT, *work.open(allowed))
        if not len(mine) or not len(theirs):
            return
        a, b = keys.ranked_pairs(
            *work.facts.keys(names, mine, theirs), _within(work.desk_order, mine), _within(work.broker_order, theirs)
        )
        _take_equal(work, names, (mine[a], theirs[b]))
    mine, theirs = work.facts.told(DEALT, *work.open(allowed))
    a, b = keys.candidates(*work.facts.keys(DEALT, mine, theirs), most=4096)
    pairs = mine[a], theirs[b]
    chosen = keys.greedy(pairs, work.facts.apart("amount", pairs), work.desk_order, work.broker_order)
    _take_equal(work, DEALT, (pairs[0][chosen], pairs[1][chosen]))
    # Runs too crowded to compare every amount with every other: in the order of their amounts.
    mine, theirs = work.facts.told(DEALT, *work.open(allowed))
    a, b = keys.ranked_pairs(*work.facts.keys(DEALT, mine, theirs), _within(work.desk_order, mine), _within(work.broker_order, theirs))
    _take_equal(work, DEALT, (mine[a], theirs[b]))


def _take_equal(work: _Pairing, names: tuple[str, ...], pairs: Pairs) -> None:
    desk, broker = work.facts.desk, work.facts.broker
    work.take(keys.same([desk[n] for n in names], [broker[n] for n in names], pairs))


def _within(order: Order, rows: Array) -> Order:
    """The order of the whole table, asked for places in a list of its rows."""
    return lambda places: order(rows[places])


_ONE_OFF = ("settlement_date", "trade_date", "price", "face", "side", "bond")
_TWO_OFF = (
    ("trade_date", "settlement_date"), ("price", "settlement_date"), ("face", "settlement_date"), ("price", "trade_date"),
    ("face", "trade_date"), ("side", "settlement_date"), ("side", "trade_date"), ("side", "price"), ("side", "face"),
)  # fmt: skip


def _with_differences(work: _Pairing, allowed: Array) -> None:
    """One or two facts differ or are untold, and no other row of either side fits as well; then by likeness."""
    if not all(map(len, work.open(allowed))):
        return
    work.set_repeats_aside()
    stages: list[tuple[str, ...]] = [tuple(n for n in (*DEALT, "amount") if n != off) for off in _ONE_OFF]
    stages += [tuple(n for n in DEALT if n != off) for off in _ONE_OFF]
    stages += [tuple(n for n in (*DEALT, "amount") if n not in off) for off in _TWO_OFF]
    stages += [("broker", "bond", "side", "amount"), ("broker", "side", "face", "amount")]
    stages += [tuple(n for n in DEALT if n not in off) for off in _TWO_OFF]
    for names in stages:
        mine, theirs = work.facts.told(names, *work.open(allowed))
        if not len(mine) or not len(theirs):
            continue
        a, b = keys.only_pairs(*work.facts.keys(names, mine, theirs))
        _take_equal(work, names, _plausible(work, names, (mine[a], theirs[b])))
    _without_broker(work, allowed)
    _by_likeness(work, allowed)


def _plausible(work: _Pairing, names: tuple[str, ...], pairs: Pairs) -> Pairs:
    """Those pairs in which what differs may be one trade's: dates near each other, bonds that are almost the same text."""
    keep = np.ones(len(pairs[0]), np.bool_)
    for name in ("trade_date", "settlement_date"):
        apart = work.facts.apart(name, pairs)
        keep &= (apart <= 10) | np.isinf(apart)
    if "bond" not in names:
        # The settlement amount to the cent is proof enough that a different name means the same bond.
        keep &= work.facts.equal("amount", pairs) | similar_words(
            work.tickets["bond"], work.confirmations["bond"], pairs
        )
    return pairs[0][keep], pairs[1][keep]


def _without_broker(work: _Pairing, allowed: Array) -> None:
    """Tickets that name no broker: everything else equal."""
    nameless = allowed & (work.facts.desk["broker"] == MISSING)
    if not nameless.any():
        return
    names = tuple(n for n in DEALT if n != "broker")
    mine, theirs = work.facts.told(names, *work.open(nameless))
    a, b = keys.only_pairs(*work.facts.keys(names, mine, theirs))
    _take_equal(work, names, (mine[a], theirs[b]))


_LIKE = (
    ("broker", "bond", "face"), ("broker", "bond", "price"), ("broker", "bond", "amount"), ("broker", "amount", "side"),
    ("broker", "bond", "side", "settlement_date"),
)  # fmt: skip


def _by_likeness(work: _Pairing, allowed: Array) -> None:
    """The most alike of what is left, where it is alike enough and nothing else comes near."""
    found: list[Pairs] = []
    for names in _LIKE:
        mine, theirs = work.facts.told(names, *work.open(allowed))
        if len(mine) and len(theirs):
            a, b = keys.candidates(*work.facts.keys(names, mine, theirs))
            found.append((mine[a], theirs[b]))
    if not found:
        return
    size = max(len(work.confirmations), 1)
    packed = keys.distinct(np.concatenate([a * size + b for a, b in found]))
    pairs = packed // size, packed % size
    score = work.facts.likeness(pairs)
    apart = work.facts.apart("trade_date", pairs)
    keep = (score >= _LIKE_ENOUGH) & ((apart <= 10) | np.isinf(apart))
    pairs, score = (pairs[0][keep], pairs[1][keep]), score[keep]
    chosen = keys.clear(pairs, -score, _CLEARLY)
    work.take((pairs[0][chosen], pairs[1][chosen]))
