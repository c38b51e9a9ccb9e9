"""A ticket and a confirmation speak of one trade in their own words; here both become columns of whole numbers that compare.

Words get one vocabulary for both sides, faces and amounts one scale (a party may have told the wrong currency, and yen have no cents),
anything untold is MISSING. Weights say how much an equal fact speaks for one trade: a settlement amount equal to the cent
or the same bond much, a side (right half of the time by chance) little. They are common sense, not measurements.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

import numpy as np

from reconciler.matching.keys import Pairs, mixed, whole
from reconciler.money import minor_digits
from reconciler.records import MISSING, Table, Words, unify

Array = np.ndarray[Any, Any]

DEALT = ("broker", "bond", "side", "face", "price", "trade_date", "settlement_date")
"""What was dealt, and with whom."""

TOLD = (*DEALT, "amount", "account", "currency", "accrued", "fees")
"""All that a ticket and a confirmation both tell."""

WEIGHTS = {"bond": 4.0, "amount": 5.0, "face": 3.0, "price": 3.0, "side": 1.0, "trade_date": 1.0, "settlement_date": 1.0, "account": 0.5}

_COLUMNS = {
    "broker": "broker", "bond": "bond", "side": "side", "face": "face_minor", "price": "price_e12", "trade_date": "trade_date",
    "settlement_date": "settlement_date", "amount": "settlement_minor", "account": "account", "currency": "currency",
    "accrued": "accrued_minor", "fees": "fees_minor",
}  # fmt: skip
_MONEY = ("face", "amount", "accrued", "fees")
# The most digits that ISO 4217 gives a currency's smallest unit.
_MOST_DIGITS = 4


@dataclass(frozen=True)
class Facts:
    """The facts of TOLD per ticket (`desk`) and per confirmation (`broker`), int64 each, MISSING where untold."""

    desk: dict[str, Array]
    broker: dict[str, Array]

    def keys(self, names: Iterable[str], tickets: Array, confirmations: Array) -> tuple[Array, Array]:
        """Keys of some facts for some rows of each side."""
        names = tuple(names)
        return (mixed(self.desk[n][tickets] for n in names), mixed(self.broker[n][confirmations] for n in names))

    def told(self, names: Iterable[str], tickets: Array, confirmations: Array) -> tuple[Array, Array]:
        """Those of the rows that told every one of the facts."""
        for name in names:
            tickets = tickets[self.desk[name][tickets] != MISSING]
            confirmations = confirmations[self.broker[name][confirmations] != MISSING]
        return tickets, confirmations

    def equal(self, name: str, pairs: Pairs) -> Array:
        """True where both told the same."""
        mine = self.desk[name][pairs[0]]
        return np.asarray((mine == self.broker[name][pairs[1]]) & (mine != MISSING))

    def apart(self, name: str, pairs: Pairs) -> Array:
        """How far apart two numbers are, as float; infinite where one is untold."""
        mine, theirs = self.desk[name][pairs[0]], self.broker[name][pairs[1]]
        known = (mine != MISSING) & (theirs != MISSING)
        return np.where(known, np.abs(np.where(known, mine, 0).astype(float) - np.where(known, theirs, 0)), np.inf)

    def likeness(self, pairs: Pairs) -> Array:
        """How much speaks for each pair being one trade: equal facts by weight, near ones by less."""
        score = np.zeros(len(pairs[0]))
        for name, weight in WEIGHTS.items():
            score += weight * self.equal(name, pairs)
        score += 2.0 * self.near("amount", pairs, 0.005) * ~self.equal("amount", pairs)
        score += 1.0 * self.near("price", pairs, 0.01) * ~self.equal("price", pairs)
        score += 1.0 * self.power_of_ten("face", pairs)
        for name in ("trade_date", "settlement_date"):
            score += 0.5 * (~self.equal(name, pairs) & (self.apart(name, pairs) <= 5))
        return score

    def near(self, name: str, pairs: Pairs, share: float) -> Array:
        """True where the two differ by no more than a share of the desk's."""
        mine = np.abs(self.desk[name][pairs[0]].astype(float))
        return np.asarray(self.apart(name, pairs) <= share * mine)

    def power_of_ten(self, name: str, pairs: Pairs) -> Array:
        """True where one is the other with zeros more: told in thousands, a digit too many."""
        mine, theirs = self.desk[name][pairs[0]].astype(float), self.broker[name][pairs[1]].astype(float)
        with np.errstate(divide="ignore", invalid="ignore"):
            zeros = np.log10(np.where((mine > 0) & (theirs > 0), mine / theirs, np.nan))
        return np.asarray((np.abs(zeros) > 0.5) & (np.abs(zeros - np.rint(zeros)) < 1e-9))


def facts_of(tickets: Table, confirmations: Table) -> Facts:
    """The facts of both tables over shared vocabularies and scales."""
    desk: dict[str, Array] = {}
    broker: dict[str, Array] = {}
    for name, column in _COLUMNS.items():
        mine, theirs = tickets[column], confirmations[column]
        if isinstance(mine, Words):
            mine, theirs = unify(mine, theirs)
        desk[name], broker[name] = whole(mine), whole(theirs)
    for side in (desk, broker):
        side["side"] = np.where(side["side"] == 0, MISSING, side["side"])
    shifts = _shift(tickets["currency"]), _shift(confirmations["currency"])
    both = np.unique(np.concatenate([np.unique(shift) for shift in shifts]))
    if len(both) > 1:
        for side, shift in zip((desk, broker), shifts, strict=True):
            for name in _MONEY:
                side[name] = np.where(side[name] == MISSING, MISSING, side[name] * 10**shift)
    return Facts(desk, broker)


def _shift(currency: Words) -> Array:
    digits = np.append(minor_digits(currency.values.to_pylist()), 2)
    return np.asarray(_MOST_DIGITS - digits[currency.codes])
