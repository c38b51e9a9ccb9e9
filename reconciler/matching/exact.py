"""Most entries pay a payment to the cent on its day; those without a usable name are found by that.

Stages from the surest on: account, currency, bond, amount and day; the day within a month late or a week early; a unit off; without a
bond told, only where nothing else on either side could be meant (or where as many entries as payments are alike in everything that
was told); then, with the bond and the exact amount, an entry on another account or in another currency, and one booked the wrong way
round. Each stage tries the terms' amount first, then the desk's, then the broker's.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from reconciler.matching import keys
from reconciler.matching.board import Board
from reconciler.matching.keys import Order
from reconciler.records import MISSING

Array = np.ndarray[Any, Any]

LATE, EARLY = 31, 7
# Days off in the order they are tried; a day early counts like two days late, for banks are rather late than early.
_DAYS_OFF = sorted((d for d in range(-EARLY, LATE + 1) if d), key=lambda d: (d if d > 0 else -2 * d, d))


def pair_exact(board: Board) -> None:
    """Takes the pairs of equal amounts."""
    for off in (0, 1, -1):
        for amounts in board.i_different:
            _with_bond(board, amounts, off)
    for off in (0, 1, -1):
        for amounts in board.i_different:
            _without_bond(board, amounts, off)
    for amounts in board.i_different:
        _accountless(board, amounts)


def pair_elsewhere(board: Board) -> None:
    """Entries with the bond and the very amount on another account or in another currency."""
    for amounts in board.i_different:
        _elsewhere(board, amounts)


def pair_wrong_way(board: Board) -> None:
    """Entries with the bond, the day and the very amount, booked the wrong way round."""
    for amounts in board.i_different:
        payments, entries = _open(board, amounts)
        if not len(payments):
            continue
        entries = entries[~board.e_undoes[entries]]
        left, right = _keys(board, ("account", "currency", "bond"), payments, entries, -amounts[payments])
        a, b = keys.only_pairs(left, right)
        calm = ~_busy(board, payments, entries, a, b)
        _take_near(board, payments[a][calm], entries[b][calm], 0, 0)


def _open(board: Board, amounts: Array, with_bond: bool = True) -> tuple[Array, Array]:
    payments, entries = board.open()
    payments = payments[amounts[payments] != MISSING]
    if with_bond:
        payments, entries = payments[board.i_bond[payments] >= 0], entries[board.e_bond[entries] >= 0]
    else:
        entries = entries[board.e_bond[entries] < 0]
    return payments, entries


def _keys(board: Board, names: Sequence[str], payments: Array, entries: Array, amount: Array, *more: tuple[Array, Array]) -> tuple[Array, Array]:
    """Keys of payments and entries by some facts, an amount, and more columns; an untold fact is never equal."""
    left = [getattr(board, f"i_{name}")[payments] for name in names]
    right = [getattr(board, f"e_{name}")[entries] for name in names]
    # Untold on the left is -1, on the right -2: they must not meet.
    right = [np.where(column < 0, -2, column) for column in right]
    return (keys.mixed([*left, amount, *(a for a, _ in more)]), keys.mixed([*right, board.e_amount[entries], *(b for _, b in more)]))


def _with_bond(board: Board, amounts: Array, off: int) -> None:
    names = ("account", "currency", "bond")
    payments, entries = _open(board, amounts)
    if not len(payments) or not len(entries):
        return
    days = board.i_days[payments], board.e_days[entries]
    left, right = _keys(board, names, payments, entries, amounts[payments] + off, days)
    _take_ranked(board, payments, entries, left, right)
    payments, entries = _open(board, amounts)
    left, right = _keys(board, names, payments, entries, amounts[payments] + off)
    keep_l, keep_r = keys.occurs(left, right), keys.occurs(right, left)
    payments, entries, left, right = payments[keep_l], entries[keep_r], left[keep_l], right[keep_r]
    for late in _DAYS_OFF:
        if not len(payments) or not len(entries):
            return
        known = board.i_days[payments] != MISSING
        here = keys.mixed((left.view(np.int64)[known], board.i_days[payments][known] + late))
        there = keys.mixed((right.view(np.int64), board.e_days[entries]))
        _take_ranked(board, payments[known], entries, here, there)
        open_l, open_r = board.i_open[payments], board.e_open[entries]
        payments, entries, left, right = payments[open_l], entries[open_r], left[open_l], right[open_r]


def _take_ranked(board: Board, payments: Array, entries: Array, left: Array, right: Array, even: bool = False) -> None:
    a, b = keys.ranked_pairs(left, right, within(board.item_order, payments), within(board.entry_order, entries), even)
    board.take(payments[a], entries[b])


def within(order: Order, rows: Array) -> Order:
    """The order of a whole table, asked for places in a list of its rows."""
    return lambda places: order(rows[places])


def _without_bond(board: Board, amounts: Array, off: int) -> None:
    """No bond told: the kind must not be contradicted, and nothing else may be meant."""
    names = ("account", "currency")
    if not all(map(len, _open(board, amounts, with_bond=False))):
        return
    if off == 0:
        for spoken in (True, False):
            payments, entries = _open(board, amounts, with_bond=False)
            single = np.isin(board.e_kind[entries], (1, 2, 4))
            entries = entries[single if spoken else board.e_kind[entries] == 0]
            kind = board.i_kind[payments] if spoken else np.zeros(len(payments), np.int64)
            days = board.i_days[payments], board.e_days[entries]
            left, right = _keys(board, names, payments, entries, amounts[payments], days, (kind, board.e_kind[entries]))
            _take_ranked(board, payments, entries, left, right, even=True)
    payments, entries = _open(board, amounts, with_bond=False)
    left, right = _keys(board, names, payments, entries, amounts[payments] + off)
    a, b = keys.only_pairs(left, right)
    good = board.kinds_agree(payments[a], entries[b])
    _take_near(board, payments[a][good], entries[b][good], 3, 7)


def _accountless(board: Board, amounts: Array) -> None:
    """Payments whose account nobody told: on any account, only if nothing else could be meant."""
    for names in (("currency", "bond"), ("currency",)):
        payments, entries = _open(board, amounts, with_bond="bond" in names)
        payments = payments[board.i_account[payments] < 0]
        if len(payments):
            a, b = keys.only_pairs(*_keys(board, names, payments, entries, amounts[payments]))
            good = board.kinds_agree(payments[a], entries[b])
            _take_near(board, payments[a][good], entries[b][good], 3, 7)


def _elsewhere(board: Board, amounts: Array) -> None:
    """Only if nothing else could be meant: nobody else waits for the amount, nor for anything in the bond at either account."""
    for names in (("currency", "bond"), ("account", "bond")):
        payments, entries = _open(board, amounts)
        if not len(payments):
            continue
        left, right = _keys(board, names, payments, entries, amounts[payments])
        a, b = keys.only_pairs(left, right)
        good = board.kinds_agree(payments[a], entries[b]) & ~_busy(board, payments, entries, a, b)
        _take_near(board, payments[a][good], entries[b][good], 5, 10)


def _busy(board: Board, payments: Array, entries: Array, a: Array, b: Array) -> Array:
    """True for pairs (places a and b) where something else might be meant for either: of the same bond, direction and days."""
    theirs, mine = _rivals(board, payments, entries[b])[1], _rivals(board, payments[a], entries)[0]
    return np.asarray(keys.occurs(entries[b], theirs) | keys.occurs(payments[a], mine))


def _rivals(board: Board, payments: Array, entries: Array) -> tuple[Array, Array]:
    """Pairs of one account, currency, bond, direction, kind (if spoken of) and near days, whatever their amounts."""
    left, right = (
        keys.mixed(getattr(board, f"{side}_{n}")[rows] for n in ("account", "currency", "bond"))
        for side, rows in (("i", payments), ("e", entries))
    )
    a, b = keys.candidates(left, right, most=400)
    payments, entries = payments[a], entries[b]
    days = board.days_late(payments, entries)
    keep = (days >= -5) & (days <= 10) & (np.sign(board.i_expected[payments]) == np.sign(board.e_amount[entries]))
    keep &= board.kinds_agree(payments, entries)
    return payments[keep], entries[keep]


def _take_near(board: Board, payments: Array, entries: Array, early: int, late: int) -> None:
    days = board.days_late(payments, entries)
    near = (days >= -early) & (days <= late)
    board.take(payments[near], entries[near])
