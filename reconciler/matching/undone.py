"""Banks book things twice and take things back; neither is a payment, and both must stay in sight.

An entry that equals one that pays (account, currency, amount, value date, and reference and bond as far as both tell them) is told
twice. An entry of the opposite amount that names the same reference or bond, and that comes on the same day or later, takes the first one
back: it is kept with the payment, and so is the booking that then replaces it. Where nothing replaces it, the payment is not paid.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.matching import keys
from reconciler.matching.board import Board
from reconciler.matching.exact import within
from reconciler.matching.keys import Pairs

Array = np.ndarray[Any, Any]


def pair_reversals(board: Board) -> None:
    """Takes reversals of entries that pay one payment, and the bookings that replace them."""
    payment, entry = _single(board)
    taken_back = _follow(board, payment, entry, -1)
    if len(taken_back[0]):
        board.take(*taken_back)
        board.take(*_follow(board, *taken_back, -1))


def _single(board: Board) -> Pairs:
    """Pairs so far of entries that pay one payment whole, which no other entry shares."""
    payment, entry, _ = board.taken()
    alone = (np.bincount(payment, minlength=1)[payment] == 1) & (np.bincount(entry, minlength=1)[entry] == 1) if len(entry) else entry > 0
    return payment[alone], entry[alone]


def _follow(board: Board, payment: Array, entry: Array, sign: int) -> Pairs:
    """For pairs, the open entry of `sign` times the amount that follows the entry under the same reference or bond."""
    out_payment, out_entry = [], []
    free = np.flatnonzero(board.e_open)
    for column in (board.e_reference, board.e_bond):
        known, other = np.flatnonzero(column[entry] >= 0), free[board.e_open[free] & (column[free] >= 0)]
        facts = (board.e_account, board.e_currency, column)
        left = keys.mixed([*(fact[entry[known]] for fact in facts), sign * board.e_amount[entry[known]]])
        right = keys.mixed([*(fact[other] for fact in facts), board.e_amount[other]])
        a, b = keys.ranked_pairs(left, right, within(board.entry_order, entry[known]), within(board.entry_order, other))
        a = known[a]
        later = board.e_days[other[b]] >= board.e_days[entry[a]]
        out_payment.append(payment[a[later]])
        out_entry.append(other[b[later]])
        gone = np.isin(free, out_entry[-1])
        free = free[~gone]
        rest = ~np.isin(entry, entry[a[later]])
        payment, entry = payment[rest], entry[rest]
    return np.concatenate(out_payment), np.concatenate(out_entry)


def shadows(board: Board) -> Array:
    """Open entries that tell the same as another open one, but for their own number; the first of each kind is not among them."""
    free = np.flatnonzero(board.e_open)
    if len(free) < 2:
        return free[:0]
    key = keys.mixed(keys.whole(board.cash[name])[free] for name in ("account", "currency", "amount_minor", "value_date", "reference", "bond"))
    order = np.lexsort((board.entry_order(free), key))
    again = np.zeros(len(free), np.bool_)
    again[order[1:]] = key[order][1:] == key[order][:-1]
    return free[again]


def mark_repeats(board: Board) -> None:
    """Marks open entries that repeat one that pays."""
    free = np.flatnonzero(board.e_open)
    if not len(free):
        return
    pays = np.zeros(len(board.e_open), np.bool_)
    pays[board.taken()[1]] = True
    paying = np.flatnonzero(pays)
    facts = (board.e_account, board.e_currency, board.e_amount, board.e_days)
    left, right = (keys.mixed(fact[rows] for fact in facts) for rows in (paying, free))
    few = keys.occurs(left, right)
    paying, left = paying[few], left[few]
    a, b = keys.candidates(left, right, most=4096)
    first, again = paying[a], free[b]
    keep = _same_story(board, first, again)
    first, again = first[keep], again[keep]
    order = np.lexsort((board.entry_order(first), again)) if len(again) else again
    rows, place = np.unique(again[order], return_index=True)
    board.repeat(rows, first[order][place])


def _same_story(board: Board, first: Array, again: Array) -> Array:
    """True where reference and bond agree as far as both tell them, and one of them does; where neither tells any, the narratives."""
    agree, contradict, told = (np.zeros(len(first), np.bool_) for _ in range(3))
    for column in (board.e_reference, board.e_bond):
        one, other = column[first], column[again]
        agree |= (one == other) & (one >= 0)
        contradict |= (one != other) & (one >= 0) & (other >= 0)
        told |= (one >= 0) | (other >= 0)
    narrative = board.cash["narrative"].codes
    return np.asarray(~contradict & (agree | (~told & (narrative[first] == narrative[again]))))
