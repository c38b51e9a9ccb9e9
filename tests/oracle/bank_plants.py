"""How a bank books a settlement wrongly: another amount, day, account, currency or sign, or not at all."""

from __future__ import annotations

import random
from datetime import timedelta

from tests.oracle.deals import ACCOUNTS, Trade


def bank_amount(trade: Trade, rng: random.Random) -> set[tuple[str, str]] | None:
    if not trade.bank:
        return None
    entry = trade.bank[0]
    change = rng.choice((-2500, 2500, -15, entry.amount // 10)) or 77
    entry.amount += change if abs(change) > 5 else 77
    return {("settlement amount", "Bank")}


def bank_late(trade: Trade, rng: random.Random) -> set[tuple[str, str]] | None:
    if len(trade.bank) != 1 or not trade.overdue:
        return None
    trade.bank[0].value_date += timedelta(days=rng.choice((1, 2, 3)))
    return {("settlement date", "Bank")}


def bank_missing(trade: Trade, rng: random.Random) -> set[tuple[str, str]] | None:
    if not trade.bank or not trade.overdue:
        return None
    trade.bank = []
    trade.truth.plant = "no cash"
    return {("no cash", "Bank")}


def bank_currency(trade: Trade, rng: random.Random) -> set[tuple[str, str]] | None:
    other = {"USD": "EUR", "EUR": "GBP", "GBP": "EUR"}.get(trade.bond.currency)
    if len(trade.bank) != 1 or not other or not trade.bank[0].reference:
        return None
    trade.bank[0].currency = other
    return {("currency", "Bank")}


def bank_account(trade: Trade, rng: random.Random) -> set[tuple[str, str]] | None:
    if len(trade.bank) != 1 or not trade.bank[0].reference:
        return None
    trade.bank[0].account = rng.choice([name for name in ACCOUNTS if name != trade.true["account"]])
    return {("account", "Bank")}


def bank_sign(trade: Trade, rng: random.Random) -> set[tuple[str, str]] | None:
    """Booked the wrong way round, though the reference names the trade."""
    if len(trade.bank) != 1 or not trade.bank[0].reference:
        return None
    trade.bank[0].amount = -trade.bank[0].amount
    return {("settlement amount", "Bank")}


def bank_one_unit_off(trade: Trade, rng: random.Random) -> set[tuple[str, str]] | None:
    """No break: one smallest unit is within tolerance."""
    if not trade.bank or trade.truth.state == "due":
        return None
    trade.bank[0].amount += rng.choice((-1, 1))
    trade.truth.state = "within tolerance"
    return set()
