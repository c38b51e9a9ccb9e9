"""A coupon booked in two entries, a redemption booked together with the last coupon: sums that the bond and the day speak for.

Made only where account, currency and bond are the same and the days near: first all of one day together, then any part of at most
twelve that is the only one to add up. Two groups that want the same row are both left alone. Sums without a bond or a reference are
proposals for a person (`propose`): among round amounts too many of them are chance.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.matching import keys
from reconciler.matching.board import Board
from reconciler.matching.combinations import MOST, solve
from reconciler.matching.keys import Pairs
from reconciler.records import MISSING

Array = np.ndarray[Any, Any]

EARLY, LATE = 5, 10
"""Days that all entries, or all payments, of one day may be off together."""

PART_EARLY, PART_LATE = 1, 5
"""Days that a part of what is open may be off: more of them, and chance finds a sum."""

_SAME = ("account", "currency", "bond")


def pair_groups(board: Board, bonds: Pairs) -> None:
    """Takes sums of entries that pay one payment and of payments that one entry pays. `bonds`: entries that name several bonds."""
    _days_of_entries(board)
    _days_of_payments(board)
    for early, late in ((0, 0), (PART_EARLY, PART_LATE)):
        _parts(board, *_edges(board, _SAME, early, late), by_payment=True)
        _parts(board, *_edges(board, _SAME, early, late), by_payment=False)
        _parts(board, *_named_edges(board, bonds, early, late), by_payment=False)


def propose(board: Board) -> tuple[Array, Array, Array, Array]:
    """Sums that only add up: group number, payment, entry and share, of rows that are still open; nothing is taken."""
    found = []
    payment, entry = _edges(board, ("account", "currency"), 0, 0)
    for by_payment in (True, False):
        found.append(_solutions(board, payment, entry, by_payment))
    groups = np.concatenate([found[0][0], found[1][0] + len(board.items)])
    payments, entries, shares = (np.concatenate([one[n] for one in found]) for n in (1, 2, 3))
    return np.unique(groups, return_inverse=True)[1].reshape(-1), payments, entries, shares


def _key(board: Board, side: str, rows: Array, names: tuple[str, ...], *more: Array) -> Array:
    columns = [getattr(board, f"{side}_{name}")[rows] for name in names]
    untold = -1 if side == "i" else -2
    return keys.mixed([*(np.where(column < 0, untold, column) for column in columns), *more])


def _sums(key: Array, amounts: Array) -> tuple[Array, Array, Array, Array]:
    """Keys that occur at least twice: a row of each, its sum, its count; and the group of every row (-1 of none)."""
    _, first, back, count = np.unique(key, return_index=True, return_inverse=True, return_counts=True)
    total = np.zeros(len(first), np.int64)
    np.add.at(total, back.reshape(-1), amounts)
    several = count > 1
    number = np.where(several, np.cumsum(several) - 1, -1)
    return first[several], total[several], count[several], number[back.reshape(-1)]


def _days_of_entries(board: Board) -> None:
    """All entries of one account, currency, bond and day together pay one payment."""
    payments, entries = board.open()
    entries = entries[board.e_bond[entries] >= 0]
    first, total, count, group = _sums(_key(board, "e", entries, _SAME, board.e_days[entries]), board.e_amount[entries])
    if not len(first) or not len(payments):
        return
    lead = entries[first]
    a, b = keys.candidates(_key(board, "i", payments, _SAME), _key(board, "e", lead, _SAME))
    late = board.days_late(payments[a], lead[b])
    keep = board.fits(payments[a], total[b], count[b]) & (late >= -EARLY) & (late <= LATE)
    a, b, late = a[keep], b[keep], late[keep]
    chosen = keys.clear((a, b), np.abs(late).astype(float), 0.0)
    payment_of = np.full(len(first) + 1, -1)
    payment_of[b[chosen]] = payments[a[chosen]]
    paid = payment_of[group] >= 0
    board.take(payment_of[group][paid], entries[paid])


def _days_of_payments(board: Board) -> None:
    """One entry pays all payments of one account, currency, bond and day."""
    payments, entries = board.open()
    payments = payments[(board.i_bond[payments] >= 0) & (board.i_expected[payments] != MISSING)]
    first, total, count, group = _sums(_key(board, "i", payments, _SAME, board.i_days[payments]), board.i_expected[payments])
    if not len(first) or not len(entries):
        return
    lead = payments[first]
    a, b = keys.candidates(_key(board, "i", lead, _SAME), _key(board, "e", entries, _SAME))
    late = board.days_late(lead[a], entries[b])
    off = board.e_amount[entries[b]] - total[a]
    keep = (np.abs(off) <= count[a]) & (late >= -EARLY) & (late <= LATE)
    a, b, late, off = a[keep], b[keep], late[keep], off[keep]
    chosen = keys.clear((a, b), np.abs(late).astype(float), 0.0)
    entry_of, over = np.full(len(first) + 1, -1), np.zeros(len(first) + 1, np.int64)
    entry_of[a[chosen]], over[a[chosen]] = entries[b[chosen]], off[chosen]
    paid = np.flatnonzero(entry_of[group] >= 0)
    rows, of = payments[paid], group[paid]
    board.take(rows, entry_of[of], _with_rest(board, rows, of, over))


def _with_rest(board: Board, payments: Array, group: Array, over: Array) -> Array:
    """Each payment's own amount; what is over in its group goes to the largest."""
    shares = board.i_expected[payments].copy()
    if len(shares):
        order = np.lexsort((board.item_order(payments), -np.abs(shares), group))
        largest = order[np.unique(group[order], return_index=True)[1]]
        shares[largest] += over[group[largest]]
    return shares


def _edges(board: Board, names: tuple[str, ...], early: int, late: int) -> Pairs:
    """Open (payment, entry) pairs with equal facts and near days; crowds are left out."""
    payments, entries = board.open()
    if "bond" in names:
        entries = entries[board.e_bond[entries] >= 0]
    else:
        entries = entries[board.e_bond[entries] < 0]
    payments = payments[board.i_expected[payments] != MISSING]
    day = () if "bond" in names else (board.i_days[payments],)
    a, b = keys.candidates(_key(board, "i", payments, names, *day),
                           _key(board, "e", entries, names, *(() if "bond" in names else (board.e_days[entries],))), MOST * MOST)  # fmt: skip
    return _near(board, payments[a], entries[b], early, late)


def _named_edges(board: Board, bonds: Pairs, early: int, late: int) -> Pairs:
    """Open pairs of entries that name several bonds with the payments of those bonds."""
    payments, _ = board.open()
    payments = payments[board.i_expected[payments] != MISSING]
    entry, code = bonds
    entry, code = entry[board.e_open[entry]], code[board.e_open[entry]]
    a, b = keys.candidates(_key(board, "i", payments, _SAME), _key(board, "e", entry, ("account", "currency"), code), MOST * MOST)
    payment, entry = _near(board, payments[a], entry[b], early, late)
    packed = np.unique(payment * len(board.e_open) + entry)
    return packed // max(len(board.e_open), 1), packed % max(len(board.e_open), 1)


def _near(board: Board, payment: Array, entry: Array, early: int, late: int) -> Pairs:
    days = board.days_late(payment, entry)
    keep = (days >= -early) & (days <= late)
    return payment[keep], entry[keep]


def _parts(board: Board, payment: Array, entry: Array, by_payment: bool) -> None:
    """Takes the sums that are the only ones for their target, and whose rows no other sum wants."""
    group, payments, entries, shares = _solutions(board, payment, entry, by_payment)
    rays = entries if by_payment else payments
    wanted = np.bincount(rays, minlength=1)[rays] > 1 if len(rays) else np.zeros(0, np.bool_)
    good = ~np.isin(group, group[wanted])
    board.take(payments[good], entries[good], shares[good])


def _solutions(board: Board, payment: Array, entry: Array, by_payment: bool) -> tuple[Array, Array, Array, Array]:
    """Sums of entries per payment, or of payments per entry: target row, payment, entry, share."""
    centre, ray = (payment, entry) if by_payment else (entry, payment)
    order = np.lexsort(((board.entry_order if by_payment else board.item_order)(ray), centre)) if len(ray) else np.zeros(0, np.int64)
    centre, ray = centre[order], ray[order]
    targets, values = (board.i_expected, board.e_amount) if by_payment else (board.e_amount, board.i_expected)
    starts = np.flatnonzero(np.concatenate(([True], centre[1:] != centre[:-1]))) if len(centre) else np.zeros(0, np.int64)
    sizes = np.diff(np.append(starts, len(centre)))
    out: list[tuple[Array, Array]] = []
    for n in range(2, MOST + 1):
        at = starts[sizes == n]
        if not len(at):
            continue
        place = at[:, None] + np.arange(n)
        bits = solve(values[ray[place]], targets[centre[at]])
        found, column = np.nonzero((bits[:, None] >> np.arange(n)) & 1 & (bits[:, None] > 0))
        out.append((centre[at[found]], ray[place[found, column]]))
    if not out:
        none = np.zeros(0, np.int64)
        return none, none, none, none
    centre, ray = (np.concatenate(column) for column in zip(*out, strict=True))
    if by_payment or not len(centre):
        return centre, centre, ray, board.e_amount[ray]
    _, group = np.unique(centre, return_inverse=True)
    group = group.reshape(-1)
    over = np.zeros(int(group.max(initial=-1)) + 1, np.int64)
    np.subtract.at(over, group, board.i_expected[ray])
    over += board.e_amount[centre[np.unique(group, return_index=True)[1]]]
    return centre, ray, centre, _with_rest(board, ray, group, over)
