"""What no trade or coupon tells: bonds unknown or impossible, entries without a cause, rows told twice or unread."""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import replace
from datetime import timedelta
from fractions import Fraction

from tests.oracle import deals
from tests.oracle.arithmetic import payment_date
from tests.oracle.bank import payments
from tests.oracle.deals import ACCOUNTS, Entry, Trade, Truth
from tests.oracle.issues import Scene, row, text
from tests.oracle.silent_plants import desk_told_twice_reference
from tests.oracle.world import World

SPOILT_BONDS: dict[str, dict[str, str]] = {
    "matures before it begins": {"accrual_start": "2040-01-15", "maturity": "2031-01-15", "first_coupon": ""},
    "unknown day count": {"day_count": "Act/364"},
    "no coupon rate": {"coupon_rate": ""},
    "no maturity": {"maturity": ""},
    "five coupons a year": {"frequency": "5"},
    "unknown calendar": {"calendar": "NOWHERE"},
    "floater without a fixing": {"kind": "floating", "coupon_rate": ""},
}


def safe_trades(world: World) -> Callable[[Trade], bool]:
    """Trades in bonds that pay nothing in the window: a fault in them changes nobody's coupon."""
    paying = {
        bond.bond
        for bond in world.bonds
        if any(world.since <= payment_date(bond, day) <= world.today for _, day, _ in payments(bond))
    }
    return lambda trade: trade.true["bond"] not in paying


def odd_bonds(world: World, scene: Scene, rng: random.Random) -> None:
    """Trades in bonds that bonds.csv does not have, has twice in two versions, or has with terms that cannot be."""
    spoils: list[tuple[str, dict[str, str] | None]] = [
        ("unknown", None),
        ("two versions", {}),
        ("the same row twice", {}),
    ]
    for name, spoilt in [*spoils, *SPOILT_BONDS.items()]:
        bond = scene.plain("EUR", "XECB", 1)
        while any(world.since <= payment_date(bond, day) <= world.today for _, day, _ in payments(bond)):
            bond = scene.plain("EUR", "XECB", 1)
        if name != "unknown":
            world.bond_rows.append({**row(bond), **(spoilt or {})})
        if name == "the same row twice":
            world.bond_rows.append(row(bond))
        if name == "two versions":
            world.bond_rows.append({**row(bond), "coupon_rate": text(bond.rate + Fraction(1, 8))})
        trade = None
        while trade is None:
            trade = deals.deal(scene, bond, len(world.trades) + 1)
        if trade.paid:
            deals.pay(trade, rng)
        trade.truth.plant = f"bond: {name}"
        if name != "the same row twice":
            trade.truth.amount, trade.truth.day, trade.truth.state = None, None, "break"
            trade.truth.must = {("unknown bond" if name == "unknown" else "unsound terms", "Terms")}
        trade.truth.entries = {entry.entry for entry in trade.bank}
        world.trades.append(trade)
        world.truths.append(trade.truth)
        world.tickets.append(trade.desk or {})
        world.confirmations.append(trade.broker or {})
        world.entries += trade.bank


def loose_entries(world: World, rng: random.Random) -> None:
    """Bank entries that nothing explains, entries told twice, tickets keyed twice, rows of tickets and cash that
    cannot be read.
    """
    for number in range(max(6, len(world.trades) // 60)):
        entry = Entry(
            f"X{number:05d}",
            rng.choice(ACCOUNTS),
            rng.choice(("USD", "EUR", "GBP")),
            world.today - timedelta(days=rng.randint(1, 9)),
            rng.choice((-1, 1)) * rng.randint(1000, 99999999),
            rng.choice(("ACCOUNT FEE", "TRANSFER", "COUPON", "TO BE ADVISED")),
            rng.choice(("", f"R{number}77", "SUNDRY")),
        )
        world.entries.append(entry)
        world.truths.append(
            Truth(
                "bank",
                (entry.entry,),
                entry.currency,
                None,
                None,
                "break",
                "loose entry",
                {("unexplained cash", "Bank")},
                {entry.entry},
            )
        )
    for owner in (world.trades, world.dues):
        quiet = [
            one
            for one in owner
            if not one.truth.plant
            and len(one.bank) == 1
            and len(one.truth.entries) == 1  # type: ignore[attr-defined]
            and one.truth.state == "agrees"
            and paid_once(world, one.bank[0])
        ]  # type: ignore[attr-defined]
        for one in rng.sample(quiet, min(3, len(quiet))):
            first = one.bank[0]
            again = replace(first, entry=first.entry + "R")
            world.entries.append(again)
            one.truth.entries, one.truth.plant = {first.entry, again.entry}, "entry told twice (first)"
            world.truths.append(
                Truth(
                    "bank",
                    (first.entry, again.entry),
                    first.currency,
                    None,
                    None,
                    "break",
                    "entry told twice",
                    {("told twice", "Bank")},
                    {first.entry, again.entry},
                )
            )
    safe = safe_trades(world)
    quiet_trades = [
        t
        for t in world.trades
        if not t.truth.plant
        and t.truth.kind == "trade"
        and safe(t)
        and t.desk
        and t.broker
        and not t.more_tickets
        and not t.more_confirmations
    ]
    picked = rng.sample(quiet_trades, min(6, len(quiet_trades)))
    for trade in picked[:3]:
        _key_twice(world, trade)
    for trade in picked[3:]:
        assert trade.desk
        trade.desk["spoilt"] = rng.choice(
            (
                ("face", lambda told: told + "x"),
                ("settlement_date", lambda told: "2026-02-30"),
                ("settlement_amount", lambda told: "n/k"),
            )
        )
        assert trade.broker
        trade.broker["desk_reference"], trade.broker["fees"] = trade.true["ticket"], trade.true["fees"]
        trade.truth.plant, trade.truth.must, trade.truth.state = "ticket unreadable", {("no ticket", "Desk")}, "break"
        trade.truth.key = (trade.true["broker"], trade.true["broker_reference"])
    unread = [
        t
        for t in quiet_trades
        if t not in picked
        and t.paid
        and t.true["settlement_date"] < world.today
        and len(t.bank) == 1
        and paid_once(world, t.bank[0])
        and not t.truth.plant
    ]
    for trade in rng.sample(unread, min(2, len(unread))):
        trade.bank[0].spoilt = rng.choice(({"amount": "12,34,5"}, {"value_date": "yesterday"}))
        trade.truth.plant, trade.truth.must, trade.truth.state = "entry unreadable", {("no cash", "Bank")}, "break"
        trade.truth.entries = set()


def paid_once(world: World, entry: Entry) -> bool:
    return sum(entry.entry == other.entry for one in (*world.dues, *world.trades) for other in one.bank) <= 1


def _key_twice(world: World, trade: Trade) -> None:
    """The desk keyed the trade a second time; the confirmation names the first ticket."""
    assert trade.broker and trade.desk
    trade.broker["desk_reference"] = trade.true["ticket"]
    again = desk_told_twice_reference(trade)
    world.tickets.append(again)
    trade.truth.plant = "ticket told twice (first)"
    world.truths.append(
        Truth(
            "trade",
            (again["ticket"],),
            trade.bond.currency,
            trade.truth.amount,
            trade.truth.day,
            "break",
            "ticket told twice",
            {("told twice", "Desk")},
        )
    )


def book(world: World, rng: random.Random) -> None:
    for entry in world.entries:
        entry.booked_date = entry.value_date + timedelta(days=rng.choice((0, 0, 0, 1))) if rng.random() < 0.9 else None
