"""Invents one morning with its truth: bonds, trades, holdings, cash, some of it with a fault, and what must be found.

`build(seed, trades)` invents it. Faults that would change what is held are planted only where no coupon of the window
hangs on them, so that every truth is certain.
"""

from __future__ import annotations

import random
from dataclasses import replace
from datetime import date, timedelta
from typing import Any

from tests.oracle import bank, deals
from tests.oracle.bank import DUE_PLANTS, Due, Positions
from tests.oracle.deals import ACCOUNTS, Entry, Trade
from tests.oracle.issues import KINDS, Scene, row, text
from tests.oracle.manners import restyled
from tests.oracle.oddities import book, loose_entries, odd_bonds, safe_trades
from tests.oracle.plants import TRADE_PLANTS
from tests.oracle.world import CLOSINGS, World

STYLES = (
    ("T{:06d}", "{0:.2}{1}"),
    ("1{:05d}", "{0:.3}-{1}"),
    ("TK-2026-{}", "{1}"),
    ("26/{:05d}", "{0:.1}/{1}/26"),
)
"""Ways of numbering: our tickets and the brokers' references."""


def build(seed: int, trades: int = 300, today: date = date(2026, 3, 31), planted: float = 0.25) -> World:
    """A morning of about `trades` trades, a share of them with a planted fault, and coupons and redemptions to match.

    With a share of 0 nothing at all is wrong.
    """
    rng = random.Random(seed)
    since = today - timedelta(days=14)
    scene = Scene(rng, since, today, CLOSINGS)
    scene.styles, scene.desk_codes = STYLES[seed % len(STYLES)], seed % 2 == 1
    bonds = [make(scene) for _ in range(max(2, trades // 250)) for make in KINDS.values()]
    dealt: list[Trade] = []
    while len(dealt) < trades:
        trade = deals.deal(scene, rng.choice(bonds), len(dealt) + 1)
        if trade:
            dealt.append(trade)
    positions = Positions(bonds, dealt, rng)
    dues = bank.expect(bonds, positions, since, today, rng)
    as_of = _as_of(rng, since, today)
    world = World(since, today, bonds, dealt, dues, positions, as_of, show_zero=rng.random() < 0.5)
    if seed % 3:
        world.manners = tuple(restyled(manner, rng) for manner in world.manners)
    if rng.random() < 0.4:
        world.earlier = {account: since - timedelta(days=20) for account in ACCOUNTS[:2]}
    world.bond_rows = [row(bond) for bond in bonds]
    for trade in dealt:
        if trade.paid:
            deals.pay(trade, rng)
    for number, due in enumerate(dues, 1):
        if due.paid:
            bank.pay(due, number, rng)
    _plant_trades(world, rng, planted)
    _twins(world, rng)
    _net_trades(world.trades, rng)
    _plant_dues(world, rng, planted)
    _gather(world)
    if planted:
        odd_bonds(world, scene, rng)
        loose_entries(world, rng)
    book(world, rng)
    return world


def _as_of(rng: random.Random, since: date, today: date) -> dict[str, date]:
    before, middle = since - timedelta(days=1), since + timedelta(days=7)
    choice = rng.choice(("before", "today", "mixed"))
    if choice == "mixed":
        return {account: rng.choice((before - timedelta(days=20), before, middle, today)) for account in ACCOUNTS}
    return dict.fromkeys(ACCOUNTS, before if choice == "before" else today)


def _plant_trades(world: World, rng: random.Random, share: float) -> None:
    safe, names, turn = safe_trades(world), list(TRADE_PLANTS), 0
    chosen = [trade for trade in world.trades if safe(trade)]
    rng.shuffle(chosen)
    for trade in chosen[: int(len(world.trades) * share)]:
        for _ in range(len(names)):
            name = names[turn % len(names)]
            turn += 1
            must = TRADE_PLANTS[name](trade, rng)
            if must is not None:
                _within(world, trade.bank)
                trade.truth.plant, trade.truth.must = name, must
                break
        if trade.truth.must:
            trade.truth.state = "break"
    for trade in chosen[int(len(world.trades) * share) :]:
        _harmless(trade, rng)


def _harmless(trade: Trade, rng: random.Random) -> None:
    """Corrections that leave nothing wrong: amended rows, a cancelled trade, a trade cancelled and booked or confirmed
    anew.
    """
    draw, told = rng.random(), trade.broker
    if not told or not trade.desk:
        return
    if draw < 0.03:
        trade.more_confirmations.append({**told, "settlement": told["settlement"] + 12345, "status": "new"})
        told["status"] = "amended"
    elif draw < 0.06:
        price = trade.desk["price"] + 1
        trade.more_tickets.append({**trade.desk, "price": price, "price_text": text(price), "status": "new"})
        trade.desk["status"] = "amended"
    elif draw < 0.08 and not trade.paid:
        trade.desk["status"], trade.truth.kind = "cancelled", "none"
        if rng.random() < 0.5:
            trade.more_confirmations.append({**told, "status": "cancelled"})
        else:
            trade.broker = None
    elif draw < 0.10:
        # the broker cancels one confirmation and sends another under a new reference
        old = {**told, "broker_reference": told["broker_reference"] + "0"}
        trade.more_confirmations += [{**old, "status": "new"}, {**old, "status": "cancelled"}]
    elif draw < 0.12:
        # the desk cancels one ticket and books the trade anew
        trade.more_tickets.append({**trade.desk, "ticket": trade.desk["ticket"] + "C", "status": "cancelled"})


def _net_trades(trades: list[Trade], rng: random.Random) -> None:
    """Two settlements of one account, currency and day in one entry that names both tickets, as reference or in the
    narrative.
    """
    waiting: dict[tuple[Any, ...], Trade] = {}
    for trade in trades:
        if trade.truth.plant or len(trade.bank) != 1 or trade.truth.kind != "trade" or rng.random() > 0.1:
            continue
        key = (trade.true["account"], trade.true["currency"], trade.true["settlement_date"])
        other = waiting.pop(key, None)
        if other is None:
            waiting[key] = trade
            continue
        names = [other.true["ticket"], trade.true["ticket"]]
        one, signs = other.bank[0], (";", " ", ", ") if "/" in names[0] else ("/", ";", " ")
        joined = replace(
            one,
            amount=one.amount + trade.bank[0].amount,
            bond="",
            narrative="NET SETTLEMENT",
            reference=rng.choice(signs).join(names),
        )
        if rng.random() < 0.4:
            joined.reference, joined.narrative = "", f"NET OF {names[0]} AND {names[1]}"
        other.bank, trade.bank = [joined], [joined]


def _twins(world: World, rng: random.Random) -> None:
    """Trades dealt twice in earnest: every fact but the references is the same, and both are confirmed and paid."""
    safe = safe_trades(world)
    plain = [
        t
        for t in world.trades
        if not t.truth.plant
        and t.truth.kind == "trade"
        and t.desk
        and t.broker
        and not t.more_tickets
        and not t.more_confirmations
        and safe(t)
        and len(t.bank) <= 1
    ]
    for trade in rng.sample(plain, len(plain) // 40):
        number = f"{trade.true['ticket']}-2"
        own = {"ticket": number, "broker_reference": f"{trade.true['broker_reference']}7", "desk_reference": number}
        truth = replace(trade.truth, key=(number,), must=set(), entries=set())
        assert trade.desk and trade.broker
        twin = Trade(
            trade.bond,
            {**trade.true, **own},
            {**trade.desk, **own},
            {**trade.broker, **own},
            truth,
            trade.paid,
            trade.overdue,
        )
        trade.desk["broker_reference"], trade.broker["desk_reference"] = trade.true["broker_reference"], ""
        twin.broker["desk_reference"] = ""  # type: ignore[index]
        for entry in trade.bank:
            entry.reference, entry.narrative, entry.bond = trade.true["ticket"], "SECURITIES", ""
            twin.bank = [replace(entry, entry=f"E{len(world.trades) + 1:06d}", reference=number)]
        world.trades.append(twin)


def _within(world: World, entries: list[Entry]) -> None:
    """Nothing may be booked for a day that has not come; a plant that did so is drawn back to the morning's own day."""
    for entry in entries:
        if entry.value_date > world.today:
            entry.value_date = world.today


def _plant_dues(world: World, rng: random.Random, share: float) -> None:
    names, turn = list(DUE_PLANTS), 0
    paid = [due for due in world.dues if due.paid and due.truth.day and due.truth.day < world.today - timedelta(days=3)]
    rng.shuffle(paid)
    held = {(due.account, due.bond.bond) for due in world.dues}
    alone: dict[tuple[str, str], int] = {}
    for due in world.dues:
        alone[due.account, due.bond.bond] = alone.get((due.account, due.bond.bond), 0) + 1
    for due in paid[: int(len(paid) * share)]:
        if alone[due.account, due.bond.bond] > 1:
            continue
        for _ in range(len(names)):
            name = names[turn % len(names)]
            turn += 1
            if name == "paid to another account":
                must = bank.on_another_account(due, rng, lambda account, due=due: (account, due.bond.bond) in held)  # type: ignore[misc]
            else:
                must = DUE_PLANTS[name](due, rng)
            if must is not None:
                due.truth.plant, due.truth.must = name, must
                break
        if due.truth.must:
            due.truth.state = "break"
    _net([due for due in paid[int(len(paid) * share) :] if len(due.bank) == 1], rng)


def _net(dues: list[Due], rng: random.Random) -> None:
    """Two payments of one account, currency and day booked in one entry: of one bond with its bond, else named in the
    narrative.
    """
    waiting: dict[tuple[Any, ...], Due] = {}
    for due in dues:
        key = (due.account, due.truth.currency, due.truth.day)
        other = waiting.pop(key, None)
        if other is None or rng.random() < 0.3:
            waiting[key] = due
            continue
        one, two = other.bank[0], due.bank[0]
        same = other.bond.bond == due.bond.bond
        joined = replace(
            one,
            amount=one.amount + two.amount,
            bond=one.bond if same else "",
            reference="",
            narrative=f"COUPONS {other.bond.bond} {due.bond.bond}" if not same else f"PAYMENT {due.bond.bond}",
        )
        other.bank, due.bank = [joined], [joined]


def _gather(world: World) -> None:
    """All that was told, and the truth of it, in flat lists."""
    seen: set[str] = set()
    for trade in world.trades:
        tickets = ([trade.desk] if trade.desk else []) + trade.more_tickets
        world.tickets += tickets
        world.confirmations += ([trade.broker] if trade.broker else []) + trade.more_confirmations
        trade.truth.entries = {entry.entry for entry in trade.bank}
        world.entries += [entry for entry in trade.bank if entry.entry not in seen]
        seen |= trade.truth.entries
        if trade.truth.kind != "none":
            world.truths.append(trade.truth)
    for due in world.dues:
        due.truth.entries = {entry.entry for entry in due.bank}
        world.entries += [entry for entry in due.bank if entry.entry not in seen]
        seen |= due.truth.entries
        world.truths.append(due.truth)
