"""Payments of which somebody says nothing, says it twice, or says it so that it cannot be read."""

from __future__ import annotations

import random
from collections.abc import Callable
from typing import Any

from tests.oracle.deals import Trade

Must = set[tuple[str, str]] | None
TradePlant = Callable[[Trade, random.Random], Must]


def unconfirmed(trade: Trade, rng: random.Random) -> Must:
    assert trade.desk
    trade.broker, trade.desk["fees"] = None, trade.true["fees"]
    return {("no confirmation", "Broker")}


def without_ticket(trade: Trade, rng: random.Random) -> Must:
    if trade.bond.settlement_days is None:
        return None
    trade.desk = None
    if trade.broker:
        trade.broker["fees"] = trade.true["fees"]
    for entry in trade.bank:
        # nobody knows our ticket's number now, so the bank goes by the broker's reference
        entry.reference = trade.true["broker_reference"]
        entry.narrative = "SECURITIES"
    trade.truth.key = (trade.true["broker"], trade.true["broker_reference"])
    return {("no ticket", "Desk")}


def cancelled_but_confirmed(trade: Trade, rng: random.Random) -> Must:
    """Our ticket is cancelled; the broker confirms it all the same."""
    assert trade.desk and trade.broker
    trade.desk["status"], trade.broker["fees"] = "cancelled", trade.true["fees"]
    if rng.random() < 0.5:
        trade.more_tickets.append({**trade.desk, "status": "new"})
    trade.truth.key = (trade.true["broker"], trade.true["broker_reference"])
    trade.broker["desk_reference"] = trade.true["ticket"]
    return {("no ticket", "Desk")}


def confirmed_twice(same_reference: bool) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        assert trade.broker
        again = dict(trade.broker)
        if not same_reference:
            again["broker_reference"] += "9"
        trade.more_confirmations.append(again)
        return {("told twice", "Broker")}

    return plant


def rejected_confirmation(column: str, spoil: Callable[[str], str]) -> TradePlant:
    """A confirmation whose row cannot be read leaves its ticket unconfirmed."""

    def plant(trade: Trade, rng: random.Random) -> Must:
        assert trade.broker and trade.desk
        trade.broker["spoilt"], trade.desk["fees"] = (column, spoil), trade.true["fees"]
        return {("no confirmation", "Broker")}

    return plant


def desk_told_twice_reference(trade: Trade) -> dict[str, Any]:
    """The same trade keyed a second time under a ticket number of its own."""
    assert trade.desk
    return {**trade.desk, "ticket": trade.desk["ticket"] + "X"}
