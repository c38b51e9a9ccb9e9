"""Whose coupon is it? The holder's at the close of the record date, which the holdings file tells for another day.

A position on a day is the settled holding of a known day plus what settled since, or less what settled in between when the known day is
the later one. Of several known days the latest up to the day asked for counts, else the earliest after it. An account that is not
in the file for a bond held nothing on the account's first known day (else the file's first). Trades count on the
terms' settlement date with the terms' face and side; a position may be negative: short, and then the coupon is owed.

Not done: claims between buyer and seller for trades that settle late; those are another payment.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.expected.terms import bond_rows
from reconciler.records import Table, Words, unify

Array = np.ndarray[Any, Any]

# Days fit 20 bits (until the year 3405), so that (position, day) is one sorted number.
_DAY_BITS = 20
_DAY_ZERO = 1 << (_DAY_BITS - 1)


@dataclass(frozen=True)
class Positions:
    """What every account holds of every bond, day by day: position i is account `account[i]` in bond `bond_row[i]`, by bond and account.

    `known_keys` and `known_face` are the holdings told (position and day in one number), `move_keys` and `move_sums` the running sums of
    the trades. `start` is the day on which an untold holding was nothing.
    """

    account: Words
    bond_row: Array
    start: Array
    known_first: Array
    known_keys: Array
    known_face: Array
    move_keys: Array
    move_sums: Array

    def __len__(self) -> int:
        return len(self.bond_row)

    def of_bonds(self, rows: Array) -> tuple[Array, Array]:
        """For each bond row asked for: the first of its positions, and one after the last."""
        return np.searchsorted(self.bond_row, rows, side="left"), np.searchsorted(self.bond_row, rows, side="right")


def positions(bonds: Table, holdings: Table, trades: Table) -> Positions:
    """The positions told by holdings (records.HOLDINGS) and moved by trades (records.ITEMS, trade rows that count)."""
    held_account, dealt_account = unify(holdings["account"], trades["account"])
    held_bond, dealt_bond = bond_rows(holdings["bond"], bonds), trades["bond_row"].astype(np.int64)
    held = np.flatnonzero((held_bond >= 0) & (held_account.codes >= 0))
    dealt = np.flatnonzero((dealt_bond >= 0) & (dealt_account.codes >= 0) & ~np.isnat(trades["terms_date"]) & (trades["side"] != 0))
    size = max(len(held_account.values), 1)
    keys = np.concatenate((held_bond[held] * size + held_account.codes[held], dealt_bond[dealt] * size + dealt_account.codes[dealt]))
    distinct, place = np.unique(keys, return_inverse=True)
    place = place.reshape(-1)
    known_keys, known_face = _summed(_with_day(place[: len(held)], holdings["as_of"][held]), holdings["face_minor"][held])
    faces = trades["side"][dealt].astype(np.int64) * trades["face_minor"][dealt]
    move_keys, move_faces = _summed(_with_day(place[len(held) :], trades["terms_date"][dealt]), faces)
    begin = np.arange(len(distinct)) << _DAY_BITS
    return Positions(
        account=Words((distinct % size).astype(np.int32), held_account.values),
        bond_row=distinct // size,
        start=_first_days(holdings, held_account, size)[distinct % size],
        known_first=np.searchsorted(known_keys, begin),
        known_keys=known_keys,
        known_face=known_face,
        move_keys=move_keys,
        move_sums=np.concatenate(([0], np.cumsum(move_faces))),
    )


def _with_day(position: Array, day: Array) -> Array:
    return (position << _DAY_BITS) + (day.astype("datetime64[D]").view(np.int64) + _DAY_ZERO)


def _summed(keys: Array, faces: Array) -> tuple[Array, Array]:
    """Distinct keys in order, and the sum of the faces of each."""
    order = np.argsort(keys, kind="stable")
    ordered = keys[order]
    starts = np.flatnonzero(np.concatenate(([True], ordered[1:] != ordered[:-1]))) if len(keys) else np.zeros(0, np.int64)
    return ordered[starts], np.add.reduceat(faces[order], starts) if len(starts) else np.zeros(0, np.int64)


def _first_days(holdings: Table, account: Words, size: int) -> Array:
    """Per account code, the first day told of the account; where none is, the file's first; else before all days."""
    days = holdings["as_of"].astype("datetime64[D]").view(np.int64)
    known = ~np.isnat(holdings["as_of"]) & (account.codes >= 0)
    earliest = int(days[known].min()) if known.any() else -_DAY_ZERO + 1
    first = np.full(size, np.iinfo(np.int64).max)
    np.minimum.at(first, account.codes[known], days[known])
    return np.where(first == np.iinfo(np.int64).max, earliest, first).view("datetime64[D]")


def held(of: Positions, position: Array, day: Array) -> Array:
    """The face held at the close of each day, int64 minor units; positions by number."""
    asked = _with_day(position, day)
    place = np.searchsorted(of.known_keys, asked, side="right") - 1
    first = of.known_first[position]
    follows = np.append(of.known_first, len(of.known_keys))[position + 1]
    told = follows > first
    place = np.where(place < first, first, place)
    if len(of.known_keys):
        place = np.minimum(place, len(of.known_keys) - 1)
        face = np.where(told, of.known_face[place], 0)
        since = np.where(told, of.known_keys[place], _with_day(position, of.start[position]))
    else:
        face, since = np.zeros(len(position), np.int64), _with_day(position, of.start[position])
    return np.asarray(face + _moved(of, asked) - _moved(of, since))


def _moved(of: Positions, until: Array) -> Array:
    """The running sum of the moves up to and including each (position, day); only differences within a position mean something."""
    return of.move_sums[np.searchsorted(of.move_keys, until, side="right")]
