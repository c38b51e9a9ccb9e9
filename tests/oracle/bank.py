"""Coupons and redemptions: who held what on the record date, what the bank then paid, and how that goes wrong."""

from __future__ import annotations

import random
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field, replace
from datetime import date, timedelta
from fractions import Fraction

from tests.oracle.arithmetic import (
    Bond,
    coupon_amount,
    half_up,
    payment_date,
    periods,
    record_date,
    redemption_amount,
)
from tests.oracle.deals import ACCOUNTS, Entry, Trade, Truth, face_for
from tests.oracle.plants import Must, slip


@dataclass
class Due:
    """A coupon or redemption that one account is entitled to."""

    bond: Bond
    account: str
    coupon_date: date
    face: int
    truth: Truth
    paid: bool
    bank: list[Entry] = field(default_factory=list)


class Positions:
    """What every account holds: a first position and the trades that settle after it."""

    def __init__(self, bonds: Iterable[Bond], trades: Iterable[Trade], rng: random.Random) -> None:
        self.first: dict[tuple[str, str], int] = {}
        self.moves: dict[tuple[str, str], list[tuple[date, int]]] = {}
        for bond in bonds:
            for account in rng.sample(ACCOUNTS, rng.choice((0, 1, 1, 2, 3))):
                self.first[account, bond.bond] = face_for(bond, rng) * (-1 if rng.random() < 0.03 else 1)
        for trade in trades:
            facts = trade.true
            move = (facts["settlement_date"], facts["side"] * facts["face"])
            self.moves.setdefault((facts["account"], facts["bond"]), []).append(move)

    def held(self, account: str, bond: str, day: date) -> int:
        return self.first.get((account, bond), 0) + sum(
            face for settled, face in self.moves.get((account, bond), ()) if settled <= day)  # fmt: skip

    def all(self) -> list[tuple[str, str]]:
        return sorted(set(self.first) | set(self.moves))


def payments(bond: Bond) -> list[tuple[str, date, Callable[[int], int]]]:
    """Every payment of a bond: kind, unadjusted date, and the amount on a face."""
    found: list[tuple[str, date, Callable[[int], int]]] = []
    for period in periods(bond):
        found.append(("coupon", period.end, lambda face, period=period: coupon_amount(bond, period, face)))  # type: ignore[misc]
    if bond.kind == "amortising":
        for (_, old), (day, new) in zip(bond.steps, bond.steps[1:], strict=False):
            found.append(("redemption", day, lambda face, drop=old - new: half_up(  # type: ignore[misc]
                Fraction(face) * drop * bond.redemption_price / 100)))  # fmt: skip
    found.append(("redemption", bond.maturity, lambda face: redemption_amount(bond, face)))
    return found


def expect(bonds: Iterable[Bond], positions: Positions, since: date, today: date, rng: random.Random) -> list[Due]:
    """Every coupon and redemption with a payment date in [since, today] on a face held at the close of its record
    date.
    """
    accounts: dict[str, list[str]] = {}
    for account, name in positions.all():
        accounts.setdefault(name, []).append(account)
    found = []
    for bond in bonds:
        for kind, day, amount in payments(bond):
            paid_on = payment_date(bond, day)
            if not since <= paid_on <= today:
                continue
            for account in accounts.get(bond.bond, ()):
                face = positions.held(account, bond.bond, record_date(bond, day))
                if face == 0 or amount(face) == 0:
                    continue
                truth = Truth(kind, (account, bond.bond, day.isoformat()), bond.currency, amount(face), paid_on)
                paid = paid_on < today or rng.random() < 0.5
                if not paid:
                    truth.state = "due"
                found.append(Due(bond, account, day, face, truth, paid))
    return found


def pay(due: Due, number: int, rng: random.Random) -> None:
    """The bank's booking, in one of the manners banks have of naming a coupon."""
    truth, word = due.truth, "COUPON" if due.truth.kind == "coupon" else "REDEMPTION"
    assert truth.amount is not None and truth.day is not None
    entry = Entry(
        f"C{number:06d}", due.account, truth.currency, truth.day, truth.amount, f"{word} {due.bond.description}"
    )
    manner = rng.choice(("bond", "bond", "reference", "narrative", "two entries", "bank's own", "lower"))
    if manner in ("bond", "two entries", "bank's own"):
        entry.bond = due.bond.bond
        if manner == "bank's own":
            entry.reference = f"CA{rng.randint(10**8, 10**9)}"
    elif manner == "reference":
        entry.reference = due.bond.bond
    elif manner == "lower":
        entry.narrative = f"{word.lower()} {due.bond.bond.lower()}, record holders"
    else:
        entry.narrative = f"{word} {due.bond.bond} FACE {abs(due.face)}"
    due.bank = [entry]
    if manner == "two entries" and abs(entry.amount) > 10000:
        part = entry.amount * rng.randint(20, 80) // 100
        due.bank = [replace(entry, amount=entry.amount - part), replace(entry, entry=entry.entry + "B", amount=part)]


DuePlant = Callable[[Due, random.Random], Must]


def tax_withheld(due: Due, rng: random.Random) -> Must:
    if due.truth.kind != "coupon" or len(due.bank) != 1 or abs(due.bank[0].amount) < 100:
        return None
    kept = rng.choice((Fraction(85, 100), Fraction(74, 100), Fraction(65, 100), Fraction(80, 100)))
    due.bank[0].amount = half_up(due.bank[0].amount * kept)
    return {("payment amount", "Bank")}


def on_unadjusted_date(due: Due, rng: random.Random) -> Must:
    if not due.bank or due.truth.day == due.coupon_date:
        return None
    for entry in due.bank:
        entry.value_date = due.coupon_date
    return {("payment date", "Bank")}


def paid_late(due: Due, rng: random.Random) -> Must:
    if not due.bank or due.truth.day is None:
        return None
    day = due.truth.day + timedelta(days=rng.choice((1, 2, 3)))
    for entry in due.bank:
        entry.value_date = day
    return {("payment date", "Bank")}


def not_paid(due: Due, rng: random.Random) -> Must:
    due.bank = []
    due.truth.plant = "no cash"
    return {("no cash", "Bank")}


def wrong_amount(due: Due, rng: random.Random) -> Must:
    if len(due.bank) != 1 or abs(due.bank[0].amount) < 10000:
        return None
    sign = 1 if due.bank[0].amount > 0 else -1
    due.bank[0].amount = rng.choice((sign * slip(due.bank[0].amount, rng), due.bank[0].amount - 1000))
    return {("payment amount", "Bank")}


def on_another_face(due: Due, rng: random.Random) -> Must:
    if len(due.bank) != 1:
        return None
    amount = due.bank[0].amount * rng.choice((2, 3)) // rng.choice((1, 4, 5))
    if abs(amount - due.bank[0].amount) < 5:
        return None
    due.bank[0].amount = amount
    return {("payment amount", "Bank")}


def on_another_account(due: Due, rng: random.Random, taken: Callable[[str], bool] = lambda account: False) -> Must:
    """Paid to an account that has no such payment of its own."""
    free = [name for name in ACCOUNTS if name != due.account and not taken(name)]
    if len(due.bank) != 1 or not free:
        return None
    due.bank[0].account = rng.choice(free)
    return {("account", "Bank")}


def one_unit_lost(due: Due, rng: random.Random) -> Must:
    """No break: two entries, each cut to the smallest unit, are one unit short."""
    if len(due.bank) != 2:
        return None
    due.bank[0].amount -= 1
    due.truth.state = "within tolerance"
    return set()


DUE_PLANTS: dict[str, DuePlant] = {
    "tax withheld": tax_withheld,
    "paid on the unadjusted date": on_unadjusted_date,
    "paid late": paid_late,
    "not paid": not_paid,
    "wrong amount": wrong_amount,
    "paid on another face": on_another_face,
    "paid to another account": on_another_account,
    "one unit lost in two entries": one_unit_lost,
}
