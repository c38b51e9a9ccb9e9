"""Which bank entry pays which payment?

As a clerk would go about it: first by the names that entries carry (our ticket, the broker's number), then by bond, amount and day, then
sums that bond and day speak for, then entries taken back or told twice, and last amounts that differ but clearly belong together. Every
stage takes only what is certain by its own rule; what is left stays open on both sides, as cash that is missing and cash that nobody
explains. Sums that merely add up are proposals.

Each entry is paired, told twice, or open; the shares of a paired entry sum to its amount. The outcome depends on what rows say, never
on their order.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.matching.board import Board
from reconciler.matching.by_name import pair_named
from reconciler.matching.closeness import pair_close
from reconciler.matching.exact import pair_elsewhere, pair_exact, pair_wrong_way
from reconciler.matching.groups import pair_groups, propose
from reconciler.matching.keys import content_order, spread, whole
from reconciler.matching.named import name
from reconciler.matching.undone import mark_repeats, pair_reversals
from reconciler.records import ALLOCATIONS, ITEMS, MISSING, Table, Words, concat, table, unify

Array = np.ndarray[Any, Any]

PROPOSALS: dict[str, str] = {"group": "int64", **ALLOCATIONS}
"""Sums that only add up: rows of one `group` belong together."""


@dataclass(frozen=True)
class CashPairs:
    """What pays what (`allocations`, records.ALLOCATIONS), what is told twice (`repeats`: kind "entry", row, of_row), and what a
    person might pair (`proposals`, PROPOSALS).
    """

    allocations: Table
    repeats: Table
    proposals: Table


def pair_cash(
    items: Table, cash: Table, repeats: Table | None = None, confirmations: Table | None = None
) -> CashPairs:
    """Pairs bank entries with trades, coupons and redemptions (records.ITEMS).

    `repeats` names tickets told twice (kind "ticket"): their items are paid only where an entry names their own number. With
    `confirmations` a trade without a ticket is also known by the ticket number that its broker names.
    """
    return _paired(Board(items, cash, _silent(items, repeats)), confirmations)


def pair_again(
    items: Table, cash: Table, before: Table, pairs: CashPairs, repeats: Table | None = None, confirmations: Table | None = None
) -> CashPairs:
    """Pairs cash anew after some payments were reckoned again: what was paired with payments that are as they were `before` stays.

    Payments are the same when they have one name; the rest is as in `pair_cash`.
    """
    board = Board(items, cash, _silent(items, repeats))
    old, entry, share = (pairs.allocations[name] for name in ("item_row", "cash_row", "share_minor"))
    row = _as_before(before, items)[old]
    # Who shares an entry or a payment with something that changed is looked at again too.
    loose_entry, loose_item = np.zeros(len(cash), np.bool_), np.zeros(len(before), np.bool_)
    loose_entry[entry[row < 0]] = True
    for _ in range(len(entry)):
        loose_item[old[loose_entry[entry]]] = True
        more = loose_item[old] & ~loose_entry[entry]
        if not more.any():
            break
        loose_entry[entry[more]] = True
    kept = ~loose_entry[entry]
    board.take(row[kept], entry[kept], share[kept])
    again, of = pairs.repeats["row"], pairs.repeats["of_row"]
    board.repeat(again[~loose_entry[of]], of[~loose_entry[of]])
    return _paired(board, confirmations)


def _as_before(before: Table, items: Table) -> Array:
    """The row of each former payment among the present ones if nothing that pairing looks at has changed, else -1."""
    row_of = np.full(len(items["item"].values) + 1, -1, np.int64)
    row_of[items["item"].codes] = np.arange(len(items))
    row_of[-1] = -1
    row = row_of[before["item"].codes_in(items["item"].values)]
    same = row >= 0
    for fact in ("terms_minor", "desk_minor", "broker_minor", "terms_date"):
        own, now = whole(before[fact]), whole(items[fact])
        same &= own == now[row] if len(now) else False
    return np.where(same, row, -1)


def _paired(board: Board, confirmations: Table | None) -> CashPairs:
    """Every stage in turn."""
    items, cash = board.items, board.cash
    if len(items) and len(cash):
        named = name(board, _numbers(items, confirmations))
        pair_named(board, named.payments)
        pair_exact(board)
        pair_groups(board, named.bonds)
        pair_reversals(board)
        mark_repeats(board)
        pair_elsewhere(board)
        pair_close(board)
        pair_wrong_way(board)
        mark_repeats(board)
    payment, entry, share = board.taken()
    order = np.argsort(payment * len(cash) + entry)
    again = np.flatnonzero(board.e_repeats >= 0)
    group, *proposed = propose(board) if len(items) and len(cash) else [np.zeros(0, np.int64)] * 4
    return CashPairs(
        table(ALLOCATIONS, item_row=payment[order], cash_row=entry[order], share_minor=share[order]),
        Table({"kind": Words.constant("entry", len(again)), "row": again, "of_row": board.e_repeats[again]}),
        table(PROPOSALS, group=group, item_row=proposed[0], cash_row=proposed[1], share_minor=proposed[2]),
    )


def _numbers(items: Table, confirmations: Table | None) -> Words:
    """Our number of every trade: its ticket's, else the one that the broker names."""
    own: Words = items["ticket"]
    if confirmations is None or own.known().all():
        return own
    told = confirmations["desk_reference"].take(np.where(own.known(), -1, items["confirmation_row"]))
    return own.where(own.known(), told) if told.known().any() else own


def _silent(items: Table, repeats: Table | None) -> Array:
    if repeats is None or not len(repeats):
        return np.zeros(len(items), np.bool_)
    return np.isin(items["ticket_row"], repeats["row"][repeats["kind"].holds("ticket")])


def with_bank(items: Table, cash: Table, pairs: CashPairs) -> tuple[Table, Table]:
    """The items with what the bank told, followed by an item of kind "bank" for every entry that pays nothing; and all allocations.

    `bank_minor` is the sum of an item's shares, `bank_date` the latest value date; entries are named in the order of value date and
    name. An item whose entries were all taken back again names them but has no bank amount: it is not paid.
    """
    allocations = pairs.allocations
    free = np.ones(len(cash), np.bool_)
    free[allocations["cash_row"]] = False
    loose = np.flatnonzero(free)
    loose = loose[np.argsort(content_order(cash, ("value_date", "entry"))(loose), kind="stable")]
    every = concat([items, _bank_items(cash, loose)])
    own = table(
        ALLOCATIONS,
        item_row=np.arange(len(items), len(every)), cash_row=loose, share_minor=cash["amount_minor"][loose],
    )  # fmt: skip
    allocations = concat([allocations, own])
    return every.with_columns(**_told_by_bank(len(every), cash, allocations)), allocations


def _told_by_bank(length: int, cash: Table, allocations: Table) -> dict[str, Any]:
    item, entry, share = (allocations[n] for n in ("item_row", "cash_row", "share_minor"))
    minor, date = np.full(length, MISSING), np.full(length, np.datetime64("NaT", "D"))
    if not len(item):
        return {"bank_minor": minor, "bank_date": date, "bank_entries": Words.blank(length)}
    value = cash["value_date"][entry]
    several = np.flatnonzero(np.bincount(item, minlength=length)[item] > 1)
    rank = np.zeros(len(item), np.int64)
    rank[several[np.lexsort((content_order(cash, ("entry",))(entry[several]), value[several]))]] = np.arange(len(several))
    place = np.argsort(item * len(item) + rank)
    item, entry, share, value = item[place], entry[place], share[place], value[place]
    starts = np.flatnonzero(np.concatenate(([True], item[1:] != item[:-1])))
    rows = item[starts]
    total = np.add.reduceat(share, starts)
    undone = (total == 0) & np.logical_or.reduceat(share != 0, starts)
    minor[rows] = np.where(undone, MISSING, total)
    date[rows] = np.where(undone, np.datetime64("NaT", "D"), value[np.append(starts[1:], len(item)) - 1])
    return {"bank_minor": minor, "bank_date": date, "bank_entries": _joined(length, rows, starts, cash["entry"].take(entry))}


def _joined(length: int, rows: Array, starts: Array, names: Words) -> Words:
    """The entries' names of every item, joined by semicolons."""
    ends = np.append(starts[1:], len(names))
    codes = np.full(length, -1, np.int32)
    codes[rows] = names.codes[starts]
    single = Words(codes, names.values)
    several = np.flatnonzero(ends - starts > 1)
    if not len(several):
        return single
    _, place = spread(several, starts[several], ends[several])
    sizes = ends[several] - starts[several]
    lists = pa.ListArray.from_arrays(pa.array(np.append(0, np.cumsum(sizes)), pa.int32()), pc.fill_null(names.take(place).to_arrow(), ""))
    one, joined = unify(single, Words.from_arrow(pc.binary_join(lists, ";")))
    one.codes[rows[several]] = joined.codes
    return one


def _bank_items(cash: Table, rows: Array) -> Table:
    """Items of kind "bank", one for each entry."""
    entries = cash["entry"].take(rows)
    label = pc.binary_join_element_wise("bank", entries.to_arrow(), " ", null_handling="skip")
    return table(
        ITEMS,
        item=_numbered(label), kind=Words.constant("bank", len(rows)), account=cash["account"].take(rows),
        bond=cash["bond"].take(rows), currency=cash["currency"].take(rows),
    )  # fmt: skip


def _numbered(labels: pa.Array) -> Words:
    """Names made different by " (2)", " (3)" in the order in which they stand."""
    coded = pc.dictionary_encode(labels)
    if len(coded.dictionary) == len(labels):
        return Words.from_arrow(labels)
    group = coded.indices.to_numpy()
    order = np.argsort(group, kind="stable")
    start = np.searchsorted(group[order], group[order])
    number = np.empty(len(order), np.int64)
    number[order] = np.arange(len(order)) - start + 1
    return Words.of([f"{text} ({n})" if n > 1 else text for text, n in zip(labels.to_pylist(), number.tolist(), strict=True)])
