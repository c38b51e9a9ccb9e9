"""What one party told of one payment, beside what the terms say: the rows that the search for causes works on.

A case is an item together with a party (Broker, Desk or Bank) that differs in at least one fact. All facts that the party
told are kept, also those that agree, because an explanation must reproduce every one of them, not just the total.
Amounts are signed from our cash account's side; accrued, principal and fees are unsigned as told (accrued negative in the
ex-dividend period). MISSING and NaT stand for "not told".
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from reconciler.money import MISSING
from reconciler.records import Table, gather

BROKER, DESK, BANK = 1, 2, 3
TRADE, COUPON, REDEMPTION = 0, 1, 2

NAT = np.datetime64("NaT", "D")


@dataclass(frozen=True)
class Told:
    """The facts of one payment as one party (or the terms) has them; every field has one row per case."""

    side: np.ndarray
    face: np.ndarray
    price: np.ndarray
    fees: np.ndarray
    accrued_days: np.ndarray
    accrued: np.ndarray
    principal: np.ndarray
    amount: np.ndarray
    date: np.ndarray
    trade_date: np.ndarray

    def take(self, rows: np.ndarray) -> Told:
        """The same facts for some of the cases."""
        return Told(**{name: column[rows] for name, column in vars(self).items()})


@dataclass(frozen=True)
class Cases:
    """One row per item and differing party. `item_row` points into items, `bond_row` into the terms."""

    item_row: np.ndarray
    party: np.ndarray
    kind: np.ndarray
    bond_row: np.ndarray
    coupon_date: np.ndarray
    digits: np.ndarray
    broker_amount: np.ndarray
    desk_amount: np.ndarray
    terms: Told
    told: Told

    def __len__(self) -> int:
        return len(self.item_row)

    def take(self, rows: np.ndarray) -> Cases:
        """Some of the cases."""
        plain = {n: c[rows] for n, c in vars(self).items() if n not in ("terms", "told")}
        return Cases(**plain, terms=self.terms.take(rows), told=self.told.take(rows))


def _party_number(parties: list[str]) -> np.ndarray:
    numbers = {"Broker": BROKER, "Desk": DESK, "Bank": BANK}
    return np.array([numbers.get(p, 0) for p in parties], np.int8)


_COMPARED = (
    "settlement amount", "payment amount", "accrued", "price", "face", "side", "fees", "settlement date", "payment date",
    "trade date",
)  # fmt: skip


def from_breaks(items: Table, tickets: Table, confirmations: Table, breaks: Table, digits: np.ndarray) -> Cases:
    """The cases behind the breaks that are a difference in a fact; `digits` are the minor digits of every item's currency."""
    words = breaks["break"]
    compared = np.array([w in _COMPARED for w in words.values.to_pylist()] + [False])[words.codes]
    party = np.append(_party_number(breaks["party"].values.to_pylist()), np.int8(0))[breaks["party"].codes]
    mask = compared & (party > 0) & (breaks["item_row"] >= 0)
    known = items["terms_minor"] != MISSING
    mask &= known[np.where(mask, breaks["item_row"], 0)] if len(items) else mask
    pair = np.unique(breaks["item_row"][mask] * 4 + party[mask])
    return _cases(items, tickets, confirmations, pair // 4, (pair % 4).astype(np.int8), digits)


def _kind_numbers(items: Table) -> np.ndarray:
    numbers = {"trade": TRADE, "coupon": COUPON, "redemption": REDEMPTION}
    table = np.array([numbers.get(k, -1) for k in items["kind"].values.to_pylist()] + [-1], np.int8)
    return table[items["kind"].codes]


def _cases(
    items: Table, tickets: Table, confirmations: Table, item_row: np.ndarray, party: np.ndarray, digits: np.ndarray
) -> Cases:
    item = items.take(item_row)
    return Cases(
        item_row=item_row,
        party=party,
        kind=_kind_numbers(item),
        bond_row=item["bond_row"].astype(np.int64),
        coupon_date=item["coupon_date"],
        digits=digits[item_row],
        broker_amount=item["broker_minor"],
        desk_amount=item["desk_minor"],
        terms=_of_terms(item),
        told=_of_party(item, tickets, confirmations, party),
    )


def _of_terms(item: Table) -> Told:
    side = np.where(item["side"] == 0, 1, item["side"]).astype(np.int8)

    def unsigned(name: str) -> np.ndarray:
        # terms_* parts are signed like the amount (a purchase is negative); the search works with them as told
        column = item[name]
        return np.where(column == MISSING, MISSING, -side * column)

    return Told(
        side=side,
        face=item["face_minor"],
        price=item["price_e12"],
        fees=np.where(item["terms_fees_minor"] == MISSING, 0, np.abs(item["terms_fees_minor"])),
        accrued_days=item["terms_accrued_days"],
        accrued=unsigned("terms_accrued_minor"),
        principal=unsigned("terms_principal_minor"),
        amount=item["terms_minor"],
        date=item["terms_date"],
        trade_date=item["terms_trade_date"],
    )


def _of_party(item: Table, tickets: Table, confirmations: Table, party: np.ndarray) -> Told:
    ticket = np.where(party == DESK, item["ticket_row"], -1)
    confirmation = np.where(party == BROKER, item["confirmation_row"], -1)

    def told(name: str, missing: object = MISSING) -> np.ndarray:
        from_ticket = gather(tickets[name], ticket, missing) if name in tickets else None
        from_broker = gather(confirmations[name], confirmation, missing)
        if from_ticket is None:
            return from_broker
        return np.where(ticket >= 0, from_ticket, from_broker)

    amount: Callable[[str], np.ndarray] = lambda tail: np.select(  # noqa: E731 - the same choice for amounts and dates
        [party == BROKER, party == DESK], [item[f"broker_{tail}"], item[f"desk_{tail}"]], item[f"bank_{tail}"]
    )
    return Told(
        side=told("side", 0),
        face=told("face_minor"),
        price=told("price_e12"),
        fees=told("fees_minor"),
        accrued_days=told("accrued_days"),
        accrued=told("accrued_minor"),
        principal=told("principal_minor"),
        amount=amount("minor"),
        date=amount("date"),
        trade_date=told("trade_date", NAT),
    )
