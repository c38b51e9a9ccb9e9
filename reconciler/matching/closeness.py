"""Tax kept back, a wrong day count, a digit slipped: the amount differs, and still a clerk knows which payment the entry is for.

With account, currency and bond equal, direction right and the day near, the entry and the payment are paired if they clearly belong to
each other more than to anything else: amounts near in proportion, days near, the narrative naming the kind. Without a bond told
only amounts within a bank charge are near enough, and only where nothing else comes near at all.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.matching import keys
from reconciler.matching.board import Board
from reconciler.matching.undone import shadows
from reconciler.records import MISSING

Array = np.ndarray[Any, Any]

EARLY, LATE = 5, 10
# Natural logarithms of the proportion between booked and expected amount.
_FAR, _FAR_IF_SURE = float(np.log(3)), float(np.log(15))
# Nearness counts in powers of ten: to be preferred, an amount must be about three times as near; ten days weigh like one power.
_PER_DAY, _MARGIN, _NEAREST = 0.1, 0.5, 1e-5
# A bank charge, in the smallest unit. A share of the amount would be too wide: on a morning of thousands some stranger is always near.
_CHARGE, _CHARGE_SHARE = 3000, 0.05


def pair_close(board: Board) -> None:
    """Takes pairs whose amounts differ."""
    hidden = shadows(board)
    board.e_open[hidden] = False
    _with_bond(board)
    _of_unknown_amount(board)
    _without_bond(board)
    board.e_open[hidden] = True


def _proportion(board: Board, payment: Array, entry: Array) -> Array:
    """How far the booked amount is from the nearest of the payment's amounts, as the logarithm of the proportion; infinite if the signs differ."""
    booked = board.e_amount[entry].astype(float)
    out = np.full(len(payment), np.inf)
    for column in board.i_amounts:
        told = np.where(column[payment] == MISSING, 0, column[payment]).astype(float)
        good = told * booked > 0
        with np.errstate(divide="ignore", invalid="ignore"):
            far = np.abs(np.log(np.where(good, booked / np.where(good, told, 1), 1)))
        out = np.where(good, np.minimum(out, far), out)
    return out


def _with_bond(board: Board) -> None:
    payments, entries = board.open()
    payments = payments[(board.i_bond[payments] >= 0) & (board.i_expected[payments] != MISSING)]
    entries = entries[board.e_bond[entries] >= 0]
    names = ("account", "currency", "bond")
    a, b = keys.candidates(keys.mixed([getattr(board, f"i_{n}")[payments] for n in names]),
                           keys.mixed([getattr(board, f"e_{n}")[entries] for n in names]), most=400)  # fmt: skip
    payment, entry = payments[a], entries[b]
    days, far = board.days_late(payment, entry), _proportion(board, payment, entry)
    spoken = (board.e_kind[entry] & board.i_kind[payment]) > 0
    on_its_day = days == 0
    # A digit lost in front makes any proportion; kind and day together then say enough, if nothing else comes near.
    limit = np.where(spoken & on_its_day, np.inf, np.where(spoken | on_its_day, _FAR_IF_SURE, _FAR))
    keep = (days >= -EARLY) & (days <= LATE) & board.kinds_agree(payment, entry) & np.isfinite(far) & (far <= limit)
    payment, entry, days = payment[keep], entry[keep], days[keep]
    cost = np.log10(far[keep] + _NEAREST) + _PER_DAY * np.abs(days)
    _take_clear(board, payment, entry, cost)


def _of_unknown_amount(board: Board) -> None:
    """Payments whose amount nobody knows (a rate not fixed): the only entry of the account, currency and bond near the day."""
    payments, entries = board.open()
    payments = payments[(board.i_bond[payments] >= 0) & (board.i_expected[payments] == MISSING)]
    entries = entries[board.e_bond[entries] >= 0]
    if not len(payments):
        return
    a, b = keys.only_pairs(*(keys.mixed(getattr(board, f"{side}_{n}")[rows] for n in ("account", "currency", "bond"))
                             for side, rows in (("i", payments), ("e", entries))))  # fmt: skip
    payment, entry = payments[a], entries[b]
    days = board.days_late(payment, entry)
    keep = (days >= -EARLY) & (days <= LATE) & board.kinds_agree(payment, entry)
    board.take(payment[keep], entry[keep])


def _take_clear(board: Board, payment: Array, entry: Array, cost: Array) -> None:
    """Clear pairs, again and again: a pair that is gone may make another one clear."""
    while len(payment):
        chosen = keys.clear((payment, entry), cost, _MARGIN)
        if not len(chosen):
            break
        board.take(payment[chosen], entry[chosen])
        rest = board.i_open[payment] & board.e_open[entry]
        payment, entry, cost = payment[rest], entry[rest], cost[rest]


def _without_bond(board: Board) -> None:
    payments, entries = board.open()
    payments = payments[board.i_expected[payments] != MISSING]
    entries = entries[board.e_bond[entries] < 0]
    if not len(payments) or not len(entries):
        return
    # One sorted axis of (account and currency, amount): an entry's neighbours are a slice of it.
    size = np.int64(len(board.items["currency"].values) + len(board.cash["currency"].values) + 2)
    group_i = board.i_account[payments] * size + board.i_currency[payments]
    group_e = board.e_account[entries] * size + board.e_currency[entries]
    amount_i, amount_e = board.i_expected[payments], board.e_amount[entries]
    order = np.lexsort((amount_i, group_i))
    near = np.minimum(_CHARGE, (np.abs(amount_e) * _CHARGE_SHARE).astype(np.int64))
    low = _place(group_i[order], amount_i[order], group_e, amount_e - near, "left")
    high = _place(group_i[order], amount_i[order], group_e, amount_e + near, "right")
    few = (high - low <= 8) & (board.e_account[entries] >= 0)
    at, place = keys.spread(np.flatnonzero(few), low[few], high[few])
    payment, entry = payments[order[place]], entries[at]
    days, far = board.days_late(payment, entry), _proportion(board, payment, entry)
    keep = (days >= -1) & (days <= 3) & board.kinds_agree(payment, entry) & (payment >= 0)
    payment, entry, far = payment[keep], entry[keep], far[keep]
    # Alone for each other: another candidate at all makes it unclear.
    chosen = keys.clear((payment, entry), far, 1.0)
    board.take(payment[chosen], entry[chosen])


def _place(groups: Array, amounts: Array, group: Array, amount: Array, side: str) -> Array:
    """Where (group, amount) belongs among sorted (groups, amounts)."""
    both_g, both_a = np.concatenate((groups, group)), np.concatenate((amounts, amount))
    asked = np.concatenate((np.full(len(groups), 1), np.full(len(group), 0 if side == "left" else 2)))
    order = np.lexsort((asked, both_a, both_g))
    before = np.cumsum(order < len(groups))
    out = np.empty(len(order), np.int64)
    out[order] = before
    return out[len(groups) :]
