"""Entries that name their payment are paired with it, whatever the amount; what is left to settle is who shares and who repeats.

One entry, one payment: paired. Several entries that name one payment pay it together if they add up (reversals net out); if some of
them alone add up, the others are either the same entry told twice or wait for other stages; if nothing adds up, all of them
are taken as they stand and the amount is a break. One entry that names several payments pays those that add up to it, else all.
Tangles of both kinds are untied by exact amounts first.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.matching import keys
from reconciler.matching.board import Board
from reconciler.matching.combinations import MOST, members, solve
from reconciler.matching.keys import Pairs
from reconciler.records import MISSING

Array = np.ndarray[Any, Any]


def pair_named(board: Board, named: Pairs) -> None:
    """Takes the pairs that the names make, and marks repeated entries."""
    entry, payment = named
    for untangled in (False, True, True):
        entry, payment = _still(board, entry, payment)
        if untangled:
            _exactly(board, entry, payment)
            entry, payment = _still(board, entry, payment)
        count_e, count_i = _count(entry, len(board.e_open)), _count(payment, len(board.i_open))
        alone = (count_e == 1) & (count_i == 1)
        board.take(payment[alone], entry[alone])
        parts = _star(payment, entry, (count_i > 1) & (count_e == 1))
        if len(parts[0]):
            _entries_of_one(board, *parts)
        shares = _star(entry, payment, (count_e > 1) & (count_i == 1))
        if len(shares[0]):
            _payments_of_one(board, *shares)


def _still(board: Board, entry: Array, payment: Array) -> Pairs:
    keep = board.e_open[entry] & (board.i_open[payment] | board.silent[payment])
    return entry[keep], payment[keep]


def _count(rows: Array, size: int) -> Array:
    return np.asarray(np.bincount(rows, minlength=size)[rows])


def _star(centre: Array, ray: Array, good: Array) -> Pairs:
    """(centre, ray) pairs of centres all of whose rays are good, in order of the centres."""
    spoilt = np.zeros(int(centre.max(initial=-1)) + 1, np.bool_)
    spoilt[centre[~good]] = True
    keep = good & ~spoilt[centre]
    order = np.argsort(centre[keep], kind="stable")
    return centre[keep][order], ray[keep][order]


def _groups(centre: Array) -> tuple[Array, Array]:
    starts = np.flatnonzero(np.concatenate(([True], centre[1:] != centre[:-1])))
    return starts, np.diff(np.append(starts, len(centre)))


def _exactly(board: Board, entry: Array, payment: Array) -> None:
    """Of a tangle, the pairs whose amount fits."""
    fit = board.fits(payment, board.e_amount[entry])
    pairs = payment[fit], entry[fit]
    late = np.abs(board.days_late(*pairs).astype(float))
    chosen = keys.greedy(pairs, late, board.item_order, board.entry_order)
    board.take(pairs[0][chosen], pairs[1][chosen])


def _entries_of_one(board: Board, payment: Array, entry: Array) -> None:
    """Several entries name one payment."""
    starts, sizes = _groups(payment)
    total = np.add.reduceat(board.e_amount[entry], starts)
    fit = board.fits(payment[starts], total, sizes)
    whole = np.repeat(fit, sizes)
    board.take(payment[whole], entry[whole])
    for place in np.flatnonzero(~fit).tolist():
        _part_of_entries(board, int(payment[starts[place]]), entry[starts[place] : starts[place] + sizes[place]])


def _part_of_entries(board: Board, payment: int, entries: Array) -> None:
    """The entries do not add up: some of them may, and the others repeat; else all stand."""
    entries = entries[np.lexsort((board.entry_order(entries), board.e_days[entries]))]
    chosen = _fitting(board, payment, entries)
    if not len(chosen):
        again, of = _identical(board, entries)
        board.repeat(again, of)
        rest = entries[~np.isin(entries, again)]
        board.take(np.full(len(rest), payment), rest)
        return
    board.take(np.full(len(chosen), payment), chosen)
    rest = entries[~np.isin(entries, chosen)]
    for one in rest.tolist():
        same = chosen[board.e_amount[chosen] == board.e_amount[one]]
        if len(same):
            board.repeat(np.array([one]), same[:1])


def _fitting(board: Board, payment: int, entries: Array) -> Array:
    """The entries (the more the better, without choice among them) that sum to one of the payment's amounts; none if unclear."""
    if len(entries) > MOST:
        return entries[:0]
    amounts = board.e_amount[entries]
    for column in board.i_amounts:
        target = int(column[payment])
        if target == MISSING:
            continue
        for least in range(len(entries), 0, -1):
            found = int(solve(amounts[None, :], np.array([target]), least)[0])
            if found > 0:
                return entries[members(found)]
            if found < 0:
                break
    return entries[:0]


def _identical(board: Board, entries: Array) -> Pairs:
    """Entries that tell the same as an earlier one of the list, but for their own number; and that earlier one."""
    cash = board.cash
    columns = [keys.whole(cash[name])[entries] for name in ("amount_minor", "value_date", "account", "currency", "narrative", "reference")]
    _, first, back = np.unique(np.stack(columns), axis=1, return_index=True, return_inverse=True)
    original = first[back.reshape(-1)]
    again = original != np.arange(len(entries))
    return entries[again], entries[original[again]]


def _payments_of_one(board: Board, entry: Array, payment: Array) -> None:
    """One entry names several payments."""
    starts, sizes = _groups(entry)
    of = np.repeat(np.arange(len(starts)), sizes)
    amount = board.e_amount[entry[starts]]
    done = np.zeros(len(starts), np.bool_)
    for column in board.i_amounts:
        told = column[payment]
        known = np.logical_and.reduceat(told != MISSING, starts)
        off = amount - np.add.reduceat(np.where(told == MISSING, 0, told), starts)
        fit = known & (np.abs(off) <= sizes) & ~done
        _share(board, entry, payment, told, of, fit, off)
        done |= fit
    for place in np.flatnonzero(~done).tolist():
        _part_of_payments(board, int(entry[starts[place]]), payment[starts[place] : starts[place] + sizes[place]])


def _share(board: Board, entry: Array, payment: Array, told: Array, of: Array, groups: Array, off: Array) -> None:
    """Each payment gets its amount, the largest of a group also what is over (a unit or so)."""
    rows = np.flatnonzero(groups[of])
    if not len(rows):
        return
    shares = told[rows].copy()
    order = np.lexsort((board.item_order(payment[rows]), -np.abs(shares), of[rows]))
    largest = order[np.unique(of[rows][order], return_index=True)[1]]
    shares[largest] += off[of[rows][largest]]
    board.take(payment[rows], entry[rows], shares)


def _part_of_payments(board: Board, entry: int, payments: Array) -> None:
    """The payments do not add up to the entry: those that do, else the one whose amount it is, else all."""
    payments = payments[np.argsort(board.item_order(payments), kind="stable")]
    expected = board.i_expected[payments]
    amount = board.e_amount[entry]
    unknown = payments[expected == MISSING]
    if len(unknown):
        # what the known ones leave is for the first whose amount nobody knows
        known = payments[expected != MISSING]
        rest = amount - int(board.i_expected[known].sum())
        board.take(np.append(known, unknown[0]), np.full(len(known) + 1, entry), np.append(board.i_expected[known], rest))
        return
    single = payments[board.fits(payments, np.full(len(payments), amount))]
    chosen = single if len(single) == 1 else payments
    if not len(single) and len(payments) <= MOST:
        found = int(solve(expected[None, :], np.array([amount]))[0])
        chosen = payments[members(found)] if found > 0 else payments
    if len(chosen) == 1:
        board.take(chosen, np.array([entry]))
        return
    expected = board.i_expected[chosen]
    one = np.ones(1, np.bool_)
    _share(board, np.full(len(chosen), entry), chosen, expected, np.zeros(len(chosen), np.int64), one, np.array([amount - expected.sum()]))
