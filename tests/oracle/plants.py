"""Ways of going wrong, one short function each: what a desk, a broker or a bank would then tell, and which break must
be found.

A function gets one trade (or one coupon) told truly and alters what was told; it returns the breaks that must be found
on the item, as (break, party), or None where the fault cannot happen to it. Further breaks that follow from the same
fault are allowed.
"""

from __future__ import annotations

import random
from collections.abc import Callable
from datetime import timedelta
from fractions import Fraction
from typing import Any

from tests.oracle.arithmetic import DIGITS, Calendar
from tests.oracle.bank_plants import (
    bank_account,
    bank_amount,
    bank_currency,
    bank_late,
    bank_missing,
    bank_one_unit_off,
    bank_sign,
)
from tests.oracle.deals import ACCOUNTS, Trade, reckon
from tests.oracle.issues import text
from tests.oracle.silent_plants import (
    cancelled_but_confirmed,
    confirmed_twice,
    rejected_confirmation,
    unconfirmed,
    without_ticket,
)

Must = set[tuple[str, str]] | None

TradePlant = Callable[[Trade, random.Random], Must]

YIELD_TELLERS = ("Orrin & Teale", "Pellgrove")

"""Brokers whose files have a column for the yield."""

OTHER_COUNTS = ("30/360", "Act/360", "Act/365F", "30E/360", "NL/365")


def slip(number: int, rng: random.Random) -> int:
    """A typing slip: two digits exchanged, one changed, dropped or doubled; never within a few smallest units."""
    digits = str(abs(number))
    for _ in range(60):
        place = rng.randrange(len(digits))
        kind = rng.choice(("exchange", "change", "drop", "double"))
        if kind == "exchange" and place:
            new = digits[: place - 1] + digits[place] + digits[place - 1] + digits[place + 1 :]
        elif kind == "change":
            new = digits[:place] + str((int(digits[place]) + rng.randint(1, 9)) % 10) + digits[place + 1 :]
        elif kind == "drop":
            new = digits[:place] + digits[place + 1 :]
        else:
            new = digits[:place] + digits[place] + digits[place:]
        if new and abs(int(new) - abs(number)) > 5:
            return int(new)
    return abs(number) + 1000


def _told(trade: Trade, party: str) -> dict[str, Any] | None:
    """The facts of a party, where a fault of it can be told from the others': the desk needs the bank against it."""
    if party == "Desk" and not trade.paid:
        return None
    return trade.broker if party == "Broker" else trade.desk


def _put(trade: Trade, party: str, facts: dict[str, Any]) -> None:
    if party == "Broker":
        trade.broker = facts
    else:
        trade.desk = facts


def _again(trade: Trade, facts: dict[str, Any], **changes: Any) -> dict[str, Any]:
    """Told facts reckoned again, with what the party leaves untold still untold."""
    new = reckon(
        trade.bond,
        {**trade.true, **{k: facts[k] for k in ("status", "account", "broker_reference", "desk_reference")}},
        **changes,
    )
    for name in ("accrued", "settlement"):
        if facts[name] is None:
            new[name] = None
    return new


def amount_slip(party: str) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = trade.broker if party == "Broker" else trade.desk
        if not facts or facts["settlement"] is None:
            return None
        facts["settlement"] = slip(facts["settlement"], rng)
        return {("settlement amount", party)}

    return plant


def wrong_day_count(party: str) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = trade.broker if party == "Broker" else trade.desk
        if (
            not facts
            or trade.bond.kind == "zero"
            or None in (facts["accrued"], facts["settlement"])
            or trade.true["accrued"] <= 0
        ):
            return None
        new = _again(trade, facts, day_count=rng.choice(OTHER_COUNTS))
        if abs(new["accrued"] - trade.true["accrued"]) < 5:
            return None
        _put(trade, party, new)
        return {("accrued", party), ("settlement amount", party)}

    return plant


def one_day_more(party: str) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = trade.broker if party == "Broker" else trade.desk
        if not facts or trade.bond.kind == "zero" or None in (facts["accrued"], facts["settlement"]):
            return None
        new = _again(trade, facts, to=trade.true["settlement_date"] + timedelta(days=rng.choice((1, 2))))
        if abs(new["accrued"] - trade.true["accrued"]) < 5:
            return None
        _put(trade, party, new)
        return {("accrued", party), ("settlement amount", party)}

    return plant


def accrued_alone(party: str) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = trade.broker if party == "Broker" else trade.desk
        if not facts or not facts["accrued"] or facts["accrued"] < 100:
            return None
        facts["accrued"] = slip(facts["accrued"], rng)
        return {("accrued", party)}

    return plant


def later_settlement(party: str, amounts_too: bool) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = trade.broker if party == "Broker" else trade.desk
        assert facts
        if (trade.bond.settlement_days is None and not trade.paid) or facts["settlement"] is None:
            return None
        day = trade.bond.calendar.walk(trade.true["settlement_date"], rng.choice((1, 2)))
        if day >= trade.bond.maturity:
            return None
        if not amounts_too:
            facts["settlement_date"] = day
            return {("settlement date", party)}
        new = _again(trade, facts, settlement_date=day)
        if abs(new["settlement"] - trade.true["settlement"]) < 5:
            return None
        _put(trade, party, new)
        return {("settlement date", party), ("settlement amount", party)}

    return plant


def wrong_price(party: str, carried: bool) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = _told(trade, party)
        if not facts or trade.bond.quote == "32nds" or facts["settlement"] is None:
            return None
        price = trade.true["price"] + Fraction(
            rng.choice((-9, -5, -1, 1, 5, 9)), 8 if trade.bond.quote == "price" else 100
        )
        new = (
            _again(trade, facts, price=price, price_text=text(price))
            if carried
            else {**facts, "price": price, "price_text": text(price)}
        )
        if carried and abs(new["settlement"] - trade.true["settlement"]) < 5:
            return None
        _put(trade, party, new)
        return {("price", party)} | ({("settlement amount", party)} if carried else set())

    return plant


def thirty_seconds_as_decimals(trade: Trade, rng: random.Random) -> Must:
    facts = trade.broker
    if not facts or trade.bond.quote != "32nds":
        return None
    whole, _, ticks = trade.true["price_text"].partition("-")
    price = Fraction(f"{whole}.{ticks[:2]}")
    if price == trade.true["price"]:
        return None
    trade.broker = _again(trade, facts, price=price, price_text=text(price))
    return {("price", "Broker"), ("settlement amount", "Broker")}


def wrong_face(party: str) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = _told(trade, party)
        if not facts or facts["settlement"] is None:
            return None
        unit = 1000 * 10 ** DIGITS[trade.bond.currency]
        face = rng.choice((trade.true["face"] * 10, trade.true["face"] + unit, trade.true["face"] * 2))
        _put(trade, party, _again(trade, facts, face=face))
        return {("face", party), ("settlement amount", party)}

    return plant


def wrong_side(party: str) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = _told(trade, party)
        if not facts or facts["settlement"] is None:
            return None
        _put(trade, party, _again(trade, facts, side=-trade.true["side"]))
        return {("side", party)}

    return plant


def wrong_fees(trade: Trade, rng: random.Random) -> Must:
    """The broker charges other fees than the ticket's; the bank pays what the ticket says."""
    facts = trade.broker
    if not facts or not trade.true["fees"] or not trade.desk or trade.desk["fees"] is None or facts["fees"] is None:
        return None
    trade.broker = _again(trade, facts, fees=rng.choice((0, trade.true["fees"] * 2, trade.true["fees"] + 2500)))
    return {("fees", "Broker"), ("settlement amount", "Broker")}


def fee_on_ticket_only(trade: Trade, rng: random.Random) -> Must:
    facts = trade.broker
    if not facts or not trade.true["fees"] or not trade.desk or trade.desk["fees"] is None:
        return None
    trade.broker = {**_again(trade, facts, fees=0), "fees": None}
    return {("settlement amount", "Broker")}


def fee_missing_on_the_ticket(trade: Trade, rng: random.Random) -> Must:
    """The desk knows of no fee and tells an amount without one; broker and bank know it."""
    facts = trade.desk
    if not facts or not trade.true["fees"] or not trade.paid or not trade.broker or None in (
        facts["settlement"], trade.broker["fees"]):  # fmt: skip
        return None
    trade.desk = {**_again(trade, facts, fees=0), "fees": None}
    return {("settlement amount", "Desk")}


def wrong_currency(party: str) -> TradePlant:
    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = trade.broker if party == "Broker" else trade.desk
        other = {"USD": "EUR", "EUR": "GBP", "GBP": "EUR", "CHF": "EUR", "AUD": "USD"}.get(trade.bond.currency)
        if not facts or not other:
            return None
        facts["currency"] = other
        return {("currency", party)}

    return plant


def other_account(trade: Trade, rng: random.Random) -> Must:
    assert trade.broker
    trade.broker["account"] = rng.choice([name for name in ACCOUNTS if name != trade.true["account"]])
    return {("account", "Broker")}


def wrong_trade_date(trade: Trade, rng: random.Random) -> Must:
    assert trade.broker
    calendar: Calendar = trade.bond.calendar
    trade.broker["trade_date"] = calendar.walk(trade.true["trade_date"], rng.choice((-1, -2)))
    return {("trade date", "Broker")}


def wrong_yield(trade: Trade, rng: random.Random) -> Must:
    if not trade.broker or not trade.true["yield_text"] or trade.true["broker"] not in YIELD_TELLERS:
        return None
    told = Fraction(trade.true["yield_text"]) + rng.choice((Fraction(1, 4), Fraction(-1, 8), Fraction(11, 100)))
    trade.broker["yield_text"] = f"{float(told):.3f}"
    return {("yield", "Broker")}


def one_unit_off(party: str) -> TradePlant:
    """No break: one smallest unit is within tolerance."""

    def plant(trade: Trade, rng: random.Random) -> Must:
        facts = trade.broker if party == "Broker" else trade.desk
        if not facts or trade.truth.state == "due" or not trade.paid or facts["settlement"] is None:
            return None
        facts["settlement"] += rng.choice((-1, 1))
        trade.truth.state = "within tolerance"
        return set()

    return plant


TRADE_PLANTS: dict[str, TradePlant] = {
    "broker's amount mistyped": amount_slip("Broker"),
    "desk's amount mistyped": amount_slip("Desk"),
    "broker's day count": wrong_day_count("Broker"),
    "desk's day count": wrong_day_count("Desk"),
    "broker's days": one_day_more("Broker"),
    "desk's days": one_day_more("Desk"),
    "broker's accrued mistyped": accrued_alone("Broker"),
    "desk's accrued mistyped": accrued_alone("Desk"),
    "broker's settlement date": later_settlement("Broker", False),
    "broker settles later": later_settlement("Broker", True),
    "desk's settlement date": later_settlement("Desk", False),
    "desk settles later": later_settlement("Desk", True),
    "broker's price": wrong_price("Broker", True),
    "broker's price mistyped": wrong_price("Broker", False),
    "desk's price": wrong_price("Desk", True),
    "32nds as decimals": thirty_seconds_as_decimals,
    "broker's face": wrong_face("Broker"),
    "desk's face": wrong_face("Desk"),
    "broker's side": wrong_side("Broker"),
    "desk's side": wrong_side("Desk"),
    "broker's fees": wrong_fees,
    "fee on the ticket only": fee_on_ticket_only,
    "broker's currency": wrong_currency("Broker"),
    "desk's currency": wrong_currency("Desk"),
    "broker's account": other_account,
    "broker's trade date": wrong_trade_date,
    "broker's yield": wrong_yield,
    "unconfirmed": unconfirmed,
    "confirmed without ticket": without_ticket,
    "cancelled but confirmed": cancelled_but_confirmed,
    "confirmed twice": confirmed_twice(True),
    "confirmed twice anew": confirmed_twice(False),
    "face unreadable": rejected_confirmation("face", lambda told: told + "O"),
    "amount unreadable": rejected_confirmation("settlement", lambda told: told[:1] + "l" + told[1:]),
    "day unreadable": rejected_confirmation("settlement_date", lambda told: "soon"),
    "side unreadable": rejected_confirmation("side", lambda told: "swap"),
    "broker one unit off": one_unit_off("Broker"),
    "desk one unit off": one_unit_off("Desk"),
    "fee missing on the ticket": fee_missing_on_the_ticket,
    "bank one unit off": bank_one_unit_off,
    "bank's amount": bank_amount,
    "bank late": bank_late,
    "bank missing": bank_missing,
    "bank's currency": bank_currency,
    "bank's account": bank_account,
    "bank's sign": bank_sign,
}
