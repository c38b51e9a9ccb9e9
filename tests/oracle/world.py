"""One invented morning with its truth: bonds, trades, holdings and cash, some of it planted with a fault, and what must be found.

`build(seed, trades)` invents it, `World.write(folder, order)` writes the files (in another order of rows for another `order`).
Faults that would change what is held are planted only where no coupon of the window hangs on them, so every truth is certain.
"""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from datetime import date, timedelta
from fractions import Fraction
from pathlib import Path
from typing import Any

from tests.oracle import bank, deals
from tests.oracle.arithmetic import Bond
from tests.oracle.bank import DUE_PLANTS, Due, Positions
from tests.oracle.deals import ACCOUNTS, Entry, Trade, Truth
from tests.oracle.issues import KINDS, Scene, row, text
from tests.oracle.plants import TRADE_PLANTS, desk_told_twice_reference
from tests.oracle.writing import (
    MANNERS,
    TICKET_COLUMNS,
    Written,
    confirmation_file,
    day_text,
    money,
    plain_file,
    shuffled,
    ticket_row,
)

CLOSINGS = (("XECB", date(2026, 3, 24), False), ("XLON", date(2026, 3, 19), False), ("XSIF", date(2026, 4, 3), True))
"""Closing days that no calendar knows, and one holiday on which the market is open after all."""

SPOILT_BONDS: dict[str, dict[str, str]] = {
    "matures before it begins": {"accrual_start": "2040-01-15", "maturity": "2031-01-15", "first_coupon": ""},
    "unknown day count": {"day_count": "Act/364"},
    "no coupon rate": {"coupon_rate": ""},
    "no maturity": {"maturity": ""},
    "five coupons a year": {"frequency": "5"},
    "unknown calendar": {"calendar": "NOWHERE"},
    "floater without a fixing": {"kind": "floating", "coupon_rate": ""},
}


@dataclass
class World:
    """A morning and its truth."""

    since: date
    today: date
    bonds: list[Bond]
    trades: list[Trade]
    dues: list[Due]
    positions: Positions
    as_of: dict[str, date]
    entries: list[Entry] = field(default_factory=list)
    truths: list[Truth] = field(default_factory=list)
    tickets: list[dict[str, Any]] = field(default_factory=list)
    confirmations: list[dict[str, Any]] = field(default_factory=list)
    bond_rows: list[dict[str, str]] = field(default_factory=list)
    show_zero: bool = False

    def write(self, folder: Path, order: int = 0) -> dict[str, Written]:
        """The morning folder; `order` above zero shuffles the rows of every file."""
        rng = random.Random(order) if order else None
        folder.mkdir(parents=True, exist_ok=True)
        (folder / "confirmations").mkdir(exist_ok=True)
        (folder / "layouts").mkdir(exist_ok=True)
        plain_file(folder / "bonds.csv", list(self.bond_rows[0]), shuffled(self.bond_rows, rng))
        written = {"tickets.csv": self._write_tickets(folder, rng), "cash.csv": self._write_cash(folder, rng)}
        self._write_holdings(folder, rng)
        self._write_steps(folder, rng)
        plain_file(folder / "closings.csv", ("calendar", "date", "open"), shuffled([
            {"calendar": code, "date": day.isoformat(), "open": "yes" if opened else "no"} for code, day, opened in CLOSINGS], rng))  # fmt: skip
        for manner in MANNERS:
            told = [facts for facts in self.confirmations if facts["broker"] == manner.broker]
            if manner.layout:
                (folder / "layouts" / f"{manner.stem}.toml").write_text(manner.layout.lstrip(), encoding="utf-8")
            for part in range(manner.parts):
                mine = [f for f in told if int(f["ticket"].strip("TXC")) % manner.parts == part]
                if mine:
                    name = f"confirmations/{manner.stem}_{self.today:%Y%m%d}{'_' + str(part + 1) if part else ''}.csv"
                    written[name] = confirmation_file(folder / name, shuffled(mine, rng), manner)
        return written

    def _write_tickets(self, folder: Path, rng: random.Random | None) -> Written:
        rows = shuffled(self.tickets, rng)
        plain_file(folder / "tickets.csv", TICKET_COLUMNS, (ticket_row(facts) for facts in rows))
        return Written(len(rows), [n for n, facts in enumerate(rows, 2) if "spoilt" in facts])

    def _write_cash(self, folder: Path, rng: random.Random | None) -> Written:
        columns = ("entry", "account", "currency", "value_date", "booked_date", "amount", "narrative", "reference", "bond")
        entries, rows = shuffled(self.entries, rng), []
        written = Written(len(entries), [n for n, entry in enumerate(entries, 2) if entry.spoilt])
        for e in entries:
            rows.append({"entry": e.entry, "account": e.account, "currency": e.currency, "value_date": e.value_date.isoformat(),
                         "booked_date": day_text(e.booked_date), "amount": money(e.amount, e.currency), "narrative": e.narrative,
                         "reference": e.reference, "bond": e.bond, **e.spoilt})  # fmt: skip
            if not e.spoilt:
                written.used[e.currency] = written.used.get(e.currency, 0) + e.amount
        plain_file(folder / "cash.csv", columns, rows)
        return written

    def _write_holdings(self, folder: Path, rng: random.Random | None) -> None:
        currency = {bond.bond: bond.currency for bond in self.bonds}
        rows = []
        for account, bond in self.positions.all():
            face = self.positions.held(account, bond, self.as_of[account])
            if face or self.show_zero or (account, bond) in self.positions.first:
                rows.append({"account": account, "bond": bond, "face": money(face, currency[bond]), "as_of": self.as_of[account].isoformat()})
        plain_file(folder / "holdings.csv", ("account", "bond", "face", "as_of"), shuffled(rows, rng))

    def _write_steps(self, folder: Path, rng: random.Random | None) -> None:
        for name, column, kinds in (("rates", "rate", ("stepped", "floating")), ("factors", "factor", ("amortising", "linked"))):
            rows = [{"bond": bond.bond, "from": day.isoformat(), column: text(value)}
                    for bond in self.bonds if bond.kind in kinds for day, value in bond.steps]  # fmt: skip
            plain_file(folder / f"{name}.csv", ("bond", "from", column), shuffled(rows, rng))


def build(seed: int, trades: int = 300, today: date = date(2026, 3, 31), planted: float = 0.25) -> World:
    """A morning of about `trades` trades, a share of them with a planted fault, and coupons and redemptions to match.

    With a share of 0 nothing at all is wrong.
    """
    rng = random.Random(seed)
    since = today - timedelta(days=14)
    scene = Scene(rng, since, today, CLOSINGS)
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
    world.bond_rows = [row(bond) for bond in bonds]
    for trade in dealt:
        if trade.paid:
            deals.pay(trade, rng)
    for number, due in enumerate(dues, 1):
        if due.paid:
            bank.pay(due, number, rng)
    _plant_trades(world, rng, planted)
    _net_trades(world.trades, rng)
    _twins(world, rng)
    _plant_dues(world, rng, planted)
    _gather(world)
    if planted:
        _odd_bonds(world, scene, rng)
        _loose_entries(world, rng)
    _booked(world, rng)
    return world


def _as_of(rng: random.Random, since: date, today: date) -> dict[str, date]:
    before, middle = since - timedelta(days=1), since + timedelta(days=7)
    choice = rng.choice(("before", "today", "mixed"))
    if choice == "mixed":
        return {account: rng.choice((before - timedelta(days=20), before, middle, today)) for account in ACCOUNTS}
    return dict.fromkeys(ACCOUNTS, before if choice == "before" else today)


def _safe(world: World) -> Callable[[Trade], bool]:
    """Trades on which no coupon or redemption of the window hangs, alone in their account, bond and currency on that day."""
    hanging = {(due.account, due.bond.bond) for due in world.dues}
    return lambda trade: (trade.true["account"], trade.true["bond"]) not in hanging


def _plant_trades(world: World, rng: random.Random, share: float) -> None:
    safe, names, turn = _safe(world), list(TRADE_PLANTS), 0
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
    """Corrections that leave nothing wrong: amended rows, a cancelled trade, a trade cancelled and booked or confirmed anew."""
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
    """Two settlements of one account, currency and day in one entry that names both tickets, as reference or in the narrative."""
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
        one = other.bank[0]
        joined = replace(one, amount=one.amount + trade.bank[0].amount, bond="", narrative="NET SETTLEMENT", reference=rng.choice((
            "/", ";", " ")).join(names))  # fmt: skip
        if rng.random() < 0.4:
            joined.reference, joined.narrative = "", f"NET OF {names[0]} AND {names[1]}"
        other.bank, trade.bank = [joined], [joined]


def _twins(world: World, rng: random.Random) -> None:
    """Trades dealt twice in earnest: every fact but the references is the same, and both are confirmed and paid."""
    plain = [t for t in world.trades if not t.truth.plant and t.truth.kind == "trade" and t.desk and t.broker and not t.more_tickets
             and not t.more_confirmations and _safe(world)(t) and len(t.bank) <= 1]  # fmt: skip
    for trade in rng.sample(plain, len(plain) // 40):
        number = f"T{len(world.trades) + 1:06d}"
        own = {"ticket": number, "broker_reference": f"{trade.true['broker_reference']}7", "desk_reference": number}
        truth = replace(trade.truth, key=(number,), must=set(), entries=set())
        assert trade.desk and trade.broker
        twin = Trade(trade.bond, {**trade.true, **own}, {**trade.desk, **own}, {**trade.broker, **own}, truth, trade.paid, trade.overdue)
        trade.desk["broker_reference"], trade.broker["desk_reference"] = trade.true["broker_reference"], ""
        twin.broker["desk_reference"] = ""  # type: ignore[index]
        for entry in trade.bank:
            entry.reference, entry.narrative, entry.bond = trade.true["ticket"], "SECURITIES", ""
            twin.bank = [replace(entry, entry=f"E{number[1:]}", reference=number)]
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
    """Two payments of one account, currency and day booked in one entry: of one bond with its bond, else named in the narrative."""
    waiting: dict[tuple[Any, ...], Due] = {}
    for due in dues:
        key = (due.account, due.truth.currency, due.truth.day)
        other = waiting.pop(key, None)
        if other is None or rng.random() < 0.3:
            waiting[key] = due
            continue
        one, two = other.bank[0], due.bank[0]
        same = other.bond.bond == due.bond.bond
        joined = replace(one, amount=one.amount + two.amount, bond=one.bond if same else "", reference="",
                         narrative=f"COUPONS {other.bond.bond} {due.bond.bond}" if not same else f"PAYMENT {due.bond.bond}")  # fmt: skip
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


def _odd_bonds(world: World, scene: Scene, rng: random.Random) -> None:
    """Trades in bonds that bonds.csv does not have, has twice in two versions, or has with terms that cannot be."""
    spoils: list[tuple[str, dict[str, str] | None]] = [("unknown", None), ("two versions", {})]
    for name, spoilt in [*spoils, *SPOILT_BONDS.items()]:
        bond = scene.plain("EUR", "XECB", 1)
        if name != "unknown":
            world.bond_rows.append({**row(bond), **(spoilt or {})})
        if name == "two versions":
            world.bond_rows.append({**row(bond), "coupon_rate": text(bond.rate + Fraction(1, 8))})
        trade = None
        while trade is None:
            trade = deals.deal(scene, bond, len(world.trades) + 1)
        if trade.paid:
            deals.pay(trade, rng)
        kind = "unknown bond" if name == "unknown" else "unsound terms"
        trade.truth.amount, trade.truth.day, trade.truth.state = None, None, "break"
        trade.truth.plant, trade.truth.must = f"bond: {name}", {(kind, "Terms")}
        trade.truth.entries = {entry.entry for entry in trade.bank}
        world.trades.append(trade)
        world.truths.append(trade.truth)
        world.tickets.append(trade.desk or {})
        world.confirmations.append(trade.broker or {})
        world.entries += trade.bank


def _loose_entries(world: World, rng: random.Random) -> None:
    """Bank entries that nothing explains, entries told twice, tickets keyed twice, rows of tickets and cash that cannot be read."""
    for number in range(max(6, len(world.trades) // 60)):
        entry = Entry(f"X{number:05d}", rng.choice(ACCOUNTS), rng.choice(("USD", "EUR", "GBP")), world.today - timedelta(days=rng.randint(1, 9)),
                      rng.choice((-1, 1)) * rng.randint(1000, 99999999), rng.choice(("ACCOUNT FEE", "TRANSFER", "COUPON", "TO BE ADVISED")),
                      rng.choice(("", f"R{number}77", "SUNDRY")))  # fmt: skip
        world.entries.append(entry)
        world.truths.append(Truth("bank", (entry.entry,), entry.currency, None, None, "break", "loose entry",
                                  {("unexplained cash", "Bank")}, {entry.entry}))  # fmt: skip
    for owner in (world.trades, world.dues):
        quiet = [one for one in owner if not one.truth.plant and len(one.bank) == 1 and len(one.truth.entries) == 1  # type: ignore[attr-defined]
                 and one.truth.state == "agrees" and _paid_once(world, one.bank[0])]  # type: ignore[attr-defined]  # fmt: skip
        for one in rng.sample(quiet, min(3, len(quiet))):
            first = one.bank[0]
            again = replace(first, entry=first.entry + "R")
            world.entries.append(again)
            one.truth.entries, one.truth.plant = {first.entry, again.entry}, "entry told twice (first)"
            world.truths.append(Truth("bank", (first.entry, again.entry), first.currency, None, None, "break", "entry told twice",
                                      {("told twice", "Bank")}, {first.entry, again.entry}))  # fmt: skip
    safe = _safe(world)
    quiet_trades = [t for t in world.trades if not t.truth.plant and t.truth.kind == "trade" and safe(t) and t.desk and t.broker
                    and not t.more_tickets and not t.more_confirmations]  # fmt: skip
    picked = rng.sample(quiet_trades, 6)
    for trade in picked[:3]:
        _key_twice(world, trade)
    for trade in picked[3:]:
        assert trade.desk
        trade.desk["spoilt"] = rng.choice((("face", lambda told: told + "x"), ("settlement_date", lambda told: "2026-02-30"),
                                           ("settlement_amount", lambda told: "n/k")))  # fmt: skip
        assert trade.broker
        trade.broker["desk_reference"] = trade.true["ticket"]
        trade.truth.plant, trade.truth.must, trade.truth.state = "ticket unreadable", {("no ticket", "Desk")}, "break"
        trade.truth.key = (trade.true["broker"], trade.true["broker_reference"])
    unread = [t for t in quiet_trades if t not in picked and t.paid and t.true["settlement_date"] < world.today and len(t.bank) == 1
              and _paid_once(world, t.bank[0]) and not t.truth.plant]  # fmt: skip
    for trade in rng.sample(unread, min(2, len(unread))):
        trade.bank[0].spoilt = rng.choice(({"amount": "12,34,5"}, {"value_date": "yesterday"}))
        trade.truth.plant, trade.truth.must, trade.truth.state = "entry unreadable", {("no cash", "Bank")}, "break"
        trade.truth.entries = set()


def _paid_once(world: World, entry: Entry) -> bool:
    return sum(entry.entry == other.entry for one in (*world.dues, *world.trades) for other in one.bank) <= 1


def _key_twice(world: World, trade: Trade) -> None:
    """The desk keyed the trade a second time; the confirmation names the first ticket."""
    assert trade.broker and trade.desk
    trade.broker["desk_reference"] = trade.true["ticket"]
    again = desk_told_twice_reference(trade)
    world.tickets.append(again)
    trade.truth.plant = "ticket told twice (first)"
    world.truths.append(Truth("trade", (again["ticket"],), trade.bond.currency, trade.truth.amount, trade.truth.day, "break",
                              "ticket told twice", {("told twice", "Desk")}))  # fmt: skip


def _booked(world: World, rng: random.Random) -> None:
    for entry in world.entries:
        entry.booked_date = entry.value_date + timedelta(days=rng.choice((0, 0, 0, 1))) if rng.random() < 0.9 else None
