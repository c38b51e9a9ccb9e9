"""What must a trade settle for, and when? The bond's terms answer, once it is settled which facts were dealt.

Broker and Desk may tell different faces, prices or sides. The terms reckon on what two of Broker, Desk and Bank agree on: the desk's
facts, unless the cash the bank booked is (to one smallest unit) what the broker's facts come to, or is the very amount the broker told.
The same for the trade date: the desk's, unless two of the told days follow by the market's cycle from the broker's and
fewer from the desk's. Fees are the ticket's, else the confirmation's; a purchase pays them, a sale receives less.

The terms' settlement date is the market's cycle from the trade date; without a cycle, the day two of Broker, Desk and Bank tell,
else the ticket's. Nothing is reckoned on a bond that is not known or whose terms are not sound.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Protocol

import numpy as np
import pyarrow as pa

from reconciler.bonds import settlement
from reconciler.bonds.terms import Terms
from reconciler.expected.naming import names
from reconciler.expected.terms import bond_rows
from reconciler.money import minor_digits
from reconciler.records import ITEMS, MISSING, Table, Words, gather, table

Array = np.ndarray[Any, Any]
NAT = np.datetime64("NaT", "D")


class Pairs(Protocol):
    """Which rows of tickets and confirmations are one trade (matching.trades.TradePairs)."""

    @property
    def ticket_row(self) -> Array:
        """Row of the ticket in force, -1 none."""

    @property
    def confirmation_row(self) -> Array:
        """Row of the confirmation, -1 none."""

    @property
    def cancelled_row(self) -> Array:
        """Row of the cancelled ticket that is confirmed all the same, -1 none."""

    @property
    def repeats(self) -> Table:
        """Rows told twice: kind ("ticket" or "confirmation"), row, and the row of_row it repeats."""


@dataclass(frozen=True)
class _Told:
    """One party's facts per trade, faces and fees in the item's smallest unit; MISSING, NaT or 0 (side) where untold."""

    trade_date: Array
    settlement_date: Array
    side: Array
    face: Array
    price: Array
    fees: Array
    amount: Array
    """Signed by the party's own side; as told, in the unit of the currency it told."""


def expect_trades(
    terms: Terms,
    bonds: Table,
    tickets: Table,
    confirmations: Table,
    pairs: Pairs,
    bank_minor: Array | None = None,
    bank_date: Array | None = None,
) -> Table:
    """The trades of a morning as ITEMS, a row per pair in the order of the pairs, with what Terms, Broker and Desk say.

    `bank_minor` and `bank_date` (per pair, MISSING and NaT where the bank has not spoken) let the bank's cash decide between broker and
    desk; without them the desk's facts stand.
    """
    ticket, confirmation, void = pairs.ticket_row, pairs.confirmation_row, pairs.cancelled_row
    named = np.where(ticket >= 0, ticket, void)
    bond = _first(tickets["bond"].take(ticket), confirmations["bond"].take(confirmation))
    row = bond_rows(bond, bonds)
    currency = _first(
        Words.of(terms.currency).take(row), tickets["currency"].take(ticket), confirmations["currency"].take(confirmation)
    )
    digits = np.append(minor_digits(currency.values.to_pylist()), 2)[currency.codes]
    desk, broker = _told(tickets, ticket, digits), _told(confirmations, confirmation, digits)
    bank = np.full(len(row), MISSING) if bank_minor is None else bank_minor
    day = np.full(len(row), NAT) if bank_date is None else bank_date
    trade_date = _trade_dates(terms, row, desk, broker, day)
    settle_on = _settlement_dates(terms, row, trade_date, desk, broker, day)
    fees = _fees(pairs, desk.fees, broker.fees)
    by_broker = _dealt(terms, row, settle_on, fees, desk, broker, bank)
    face, price, side = (_chosen(by_broker[n], getattr(desk, n), getattr(broker, n)) for n in ("face", "price", "side"))
    reckoned = _reckon(terms, row, settle_on, side, face, price, fees)
    price_text = tickets["price_text"].take(ticket)
    use_broker = by_broker["price"] | ~price_text.known()
    return table(
        ITEMS,
        item=_names(tickets, confirmations, named, confirmation),
        kind=Words.constant("trade", len(row)),
        account=_accounts(tickets, confirmations, named, confirmation),
        bond=bond, currency=currency, ticket=tickets["ticket"].take(named),
        broker=_first(confirmations["broker"].take(confirmation), tickets["broker"].take(named)),
        broker_reference=_first(confirmations["broker_reference"].take(confirmation), tickets["broker_reference"].take(named)),
        side=side.astype(np.int8), face_minor=face, price_e12=price,
        price_text=confirmations["price_text"].take(np.where(use_broker, confirmation, -1)).where(use_broker, price_text),
        terms_minor=reckoned.amount, broker_minor=broker.amount, desk_minor=desk.amount,
        terms_date=settle_on, broker_date=broker.settlement_date, desk_date=desk.settlement_date,
        bond_row=row.astype(np.int32), ticket_row=ticket.astype(np.int32), confirmation_row=confirmation.astype(np.int32),
        terms_principal_minor=reckoned.principal, terms_accrued_minor=reckoned.accrued,
        terms_accrued_days=reckoned.days, terms_fees_minor=np.where(side == 0, MISSING, -fees), terms_trade_date=trade_date,
    )  # fmt: skip


def _first(*columns: Words) -> Words:
    """The first column's text, where blank the next one's."""
    out = columns[0]
    for other in columns[1:]:
        if not out.known().all():
            out = out.where(out.known(), other)
    return out


def _told(told: Table, rows: Array, digits: Array) -> _Told:
    own = np.append(minor_digits(told["currency"].values.to_pylist()), 2)[told["currency"].take(rows).codes]
    shift = np.where(rows < 0, 0, digits - own)
    side = gather(told["side"], rows, 0).astype(np.int64)
    amount = gather(told["settlement_minor"], rows)
    return _Told(
        trade_date=gather(told["trade_date"], rows, NAT),
        settlement_date=gather(told["settlement_date"], rows, NAT),
        side=side,
        face=_scaled(gather(told["face_minor"], rows), shift),
        price=gather(told["price_e12"], rows),
        fees=_scaled(gather(told["fees_minor"], rows), shift),
        amount=np.where((amount == MISSING) | (side == 0), MISSING, -side * amount),
    )


def _scaled(minor: Array, shift: Array) -> Array:
    """Amounts told in the unit of another currency, as so many major units of the item's."""
    if not shift.any():
        return minor
    more = minor * 10 ** np.maximum(shift, 0) // 10 ** np.maximum(-shift, 0)
    return np.where(minor == MISSING, MISSING, more)


def _fees(pairs: Pairs, desk: Array, broker: Array) -> Array:
    """The ticket's fees, else the confirmation's, else none; a ticket told twice has the confirmation of the one it repeats."""
    fees = np.where(desk == MISSING, broker, desk)
    repeats = pairs.repeats
    if len(repeats) and (fees == MISSING).any():
        of_ticket = repeats["kind"].holds("ticket")
        again, original = (repeats[name][of_ticket] for name in ("row", "of_row"))
        item_of = np.full(max(int(column.max(initial=-1)) for column in (pairs.ticket_row, again, original)) + 2, -1)
        item_of[pairs.ticket_row] = np.arange(len(pairs.ticket_row))
        item_of[-1] = -1
        again, original = item_of[again], item_of[original]
        known = (again >= 0) & (original >= 0)
        again, original = again[known], original[known]
        fees[again] = np.where(fees[again] == MISSING, fees[original], fees[again])
    return np.where(fees == MISSING, 0, fees)


def _untold(name: str, column: Array) -> Array:
    return np.asarray(column == 0 if name == "side" else column == MISSING)


def _chosen(by_broker: Array, desk: Array, broker: Array) -> Array:
    return np.where(by_broker, broker, desk)


def _trade_dates(terms: Terms, row: Array, desk: _Told, broker: _Told, bank_date: Array) -> Array:
    """The desk's trade date, else the broker's; the broker's too where the told settlement days follow from it alone."""
    own, theirs = desk.trade_date, broker.trade_date
    out = np.where(np.isnat(own), theirs, own)
    w = np.flatnonzero((own != theirs) & ~np.isnat(own) & ~np.isnat(theirs) & (row >= 0))
    if len(w):
        told = (desk.settlement_date[w], broker.settlement_date[w], bank_date[w])
        votes = [
            np.sum([settlement.settlement_dates(terms, row[w], days[w]) == day for day in told], axis=0)
            for days in (own, theirs)
        ]
        out[w] = np.where((votes[1] >= 2) & (votes[0] < 2), theirs[w], own[w])
    return out


def _settlement_dates(terms: Terms, row: Array, trade_date: Array, desk: _Told, broker: _Told, bank_date: Array) -> Array:
    """The market's cycle; without one, the day two parties agree on, else the ticket's, else the confirmation's. NaT without sound terms."""
    out = np.full(len(row), NAT)
    known = np.flatnonzero(row >= 0)
    known = known[terms.sound[row[known]]]
    out[known] = settlement.settlement_dates(terms, row[known], trade_date[known])
    w = known[np.isnat(out[known])]
    if len(w):
        mine, theirs, bank = desk.settlement_date[w], broker.settlement_date[w], bank_date[w]
        agreed = np.where((theirs == bank) & (mine != bank), theirs, mine)
        out[w] = np.where(np.isnat(agreed), theirs, agreed)
    return out


_FACTS = ("face", "price", "side")
# Which of the disputed facts are the broker's, in the order they are tried: none of them, all, then mixtures.
_MIXTURES = ((False, False, False), (True, True, True), (True, False, False), (False, True, False), (False, False, True),
             (True, True, False), (True, False, True), (False, True, True))  # fmt: skip


def _dealt(
    terms: Terms, row: Array, settle_on: Array, fees: Array, desk: _Told, broker: _Told, bank: Array
) -> dict[str, Array]:
    """Per fact, where the broker's is the one that was dealt: untold by the desk, or spoken for by the bank's cash."""
    told = {name: (getattr(desk, name), getattr(broker, name)) for name in _FACTS}
    out = {name: _untold(name, mine) for name, (mine, _) in told.items()}
    disputed = {n: ~_untold(n, mine) & ~_untold(n, theirs) & (mine != theirs) for n, (mine, theirs) in told.items()}
    w = np.flatnonzero(np.logical_or.reduce(list(disputed.values())) & (bank != MISSING))
    if not len(w):
        return out
    found = np.zeros(len(w), np.bool_)
    for mixture in (*_MIXTURES, None):
        pick = dict.fromkeys(_FACTS, True) if mixture is None else dict(zip(_FACTS, mixture, strict=True))
        take = {n: out[n][w] | (disputed[n][w] & pick[n]) for n in _FACTS}
        if mixture is None:
            good = (np.abs(bank[w] - broker.amount[w]) <= 1) & (np.abs(bank[w] - desk.amount[w]) > 1) & (broker.amount[w] != MISSING)
        else:
            face, price, side = (_chosen(take[n], told[n][0][w], told[n][1][w]) for n in _FACTS)
            amount = _reckon(terms, row[w], settle_on[w], side, face, price, fees[w]).amount
            good = (amount != MISSING) & (np.abs(amount - bank[w]) <= 1)
        good &= ~found
        for n in _FACTS:
            out[n][w[good]] = take[n][good]
        found |= good
    return out


@dataclass(frozen=True)
class _Reckoned:
    """What the terms make of a trade, signed from our cash account's side."""

    amount: Array
    principal: Array
    accrued: Array
    days: Array


def _reckon(terms: Terms, row: Array, settle_on: Array, side: Array, face: Array, price: Array, fees: Array) -> _Reckoned:
    out = [np.full(len(row), MISSING) for _ in range(4)]
    w = np.flatnonzero((row >= 0) & ~np.isnat(settle_on) & (side != 0) & (face != MISSING) & (price != MISSING))
    if len(w):
        every = len(w) == len(row)
        part: Callable[[Array], Array] = (lambda column: column) if every else (lambda column: column[w])
        settled = settlement.settle(terms, part(row), part(settle_on), part(face), part(price))
        sign, sound = -part(side), settled.sound
        figures = (sign * (settled.principal_minor + settled.accrued_minor) - part(fees), sign * settled.principal_minor,
                   sign * settled.accrued_minor, settled.accrued_days)  # fmt: skip
        for column, figure in zip(out, figures, strict=True):
            column[w] = np.where(sound, figure, MISSING)
    return _Reckoned(*out)


def _names(tickets: Table, confirmations: Table, ticket: Array, confirmation: Array) -> Words:
    """"trade TICKET", else "confirmation BROKER REFERENCE"."""
    known = ticket >= 0
    kind = pa.array(["confirmation", "trade"]).take(pa.array(known.astype(np.int8)))
    lone = np.where(known, -1, confirmation)
    parts = [tickets["ticket"].take(ticket), confirmations["broker"].take(lone), confirmations["broker_reference"].take(lone)]
    facts = ("trade_date", "settlement_date", "face_minor", "price_e12", "settlement_minor", "accrued_minor")

    def content(rows: Array) -> list[Array]:
        told = ((tickets, ticket[rows]), (confirmations, confirmation[rows]))
        return [gather(source[name], at, NAT if source[name].dtype.kind == "M" else MISSING) for source, at in told for name in facts]

    return names(kind, parts, content)


def _accounts(tickets: Table, confirmations: Table, ticket: Array, confirmation: Array) -> Words:
    """The desk's account; the broker's only where that is a name the desk uses."""
    own = tickets["account"]
    theirs = confirmations["account"]
    theirs = Words(theirs.codes_in(own.values), own.values)
    return _first(own.take(ticket), theirs.take(confirmation))
