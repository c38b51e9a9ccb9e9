"""What goes wrong on the three mornings of the sample, one short call each, and how it ends.

A fault shows on one morning (0, 1, 2) and is gone on a later one where somebody put it right: the broker sends an
amended confirmation, the desk amends its ticket, the bank's entry comes late or is reversed. Those without an end
stay.
"""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import replace
from datetime import date, timedelta
from fractions import Fraction
from typing import TYPE_CHECKING, Any

from tests.oracle import plants
from tests.oracle.arithmetic import Bond, half_up
from tests.oracle.bank import Due
from tests.oracle.deals import ACCOUNTS, Entry, Trade, reckon

if TYPE_CHECKING:
    from make_sample import Story

Alter = Callable[[Trade], Any]
Wanted = Callable[[Trade], bool]


class Stage:
    """Picks payments for faults and tells who told what when."""

    def __init__(self, story: Story, rng: random.Random, mornings: tuple[date, ...]) -> None:
        self.story, self.rng, self.mornings = story, rng, mornings
        self.hanging = {due.bond.bond for due in story.dues}

    def known(self, trade: Trade) -> int:
        """The first morning whose files have the trade."""
        return next(told.first for told in self.story.tickets if told.row is trade.desk)

    def pick(self, morning: int, wanted: Wanted, settled: bool | None = None, skip: int = 0) -> Trade:
        """The first trade (past `skip`) new on a morning that nothing else has happened to and no coupon hangs on."""
        for trade in self.story.trades:
            day = trade.true["settlement_date"]
            if trade.true["ticket"] in self.story.touched or self.known(trade) != morning or not wanted(trade):
                continue
            if trade.true["bond"] in self.hanging:
                continue
            if settled is None or settled == (day < self.mornings[morning]):
                skip -= 1
                if skip >= 0:
                    continue
                self.story.touched.add(trade.true["ticket"])
                trade.paid = trade.overdue = day < self.mornings[morning]
                return trade
        raise LookupError(f"the story has no trade for this fault on morning {morning}")

    def due(self, bond: Bond) -> Due:
        """The largest payment of one of the cast."""
        mine = [
            due for due in self.story.dues if due.bond is bond and due.account + due.bond.bond not in self.story.touched
        ]
        chosen = max(mine, key=lambda due: abs(due.truth.amount or 0))
        self.story.touched.add(chosen.account + bond.bond)
        chosen.bank = [replace(chosen.bank[0], amount=chosen.truth.amount, bond=bond.bond)]
        return chosen

    def note(self, morning: int, end: int | None, trade: Trade | Due, what: str) -> None:
        """Keeps a fault for the page of the sample and for its test."""
        if isinstance(trade, Trade):
            facts = trade.true
            name = f"trade {facts['ticket']}"
            items = {
                name,
                f"confirmation {facts['broker']} {facts['broker_reference']}",
                f"bank {trade.bank[0].entry}R",
            }
        else:
            day = trade.coupon_date.isoformat()
            name = f"{trade.truth.kind} {trade.account} {trade.bond.description} {day}"
            items = {f"{trade.truth.kind} {trade.account} {trade.bond.bond} {day}"}
        self.keep(morning, end, name, what, items)

    def keep(self, morning: int, end: int | None, name: str, what: str, items: set[str]) -> None:
        """Keeps a fault under a name of its own."""
        from make_sample import Note

        self.story.notes.append(Note(morning, end, name, what, frozenset(items)))

    def confirmed(
        self,
        morning: int,
        end: int | None,
        what: str,
        alter: str,
        wanted: Wanted = lambda t: True,
        settled: bool | None = None,
    ) -> Trade:
        """The broker tells something wrong; with an end, it sends an amended confirmation."""
        for skip in range(len(self.story.trades)):
            trade = self.pick(morning, wanted, settled, skip)
            assert trade.broker
            told = next(told for told in self.story.confirmations if told.row is trade.broker)
            right = dict(trade.broker)
            if plants.TRADE_PLANTS[alter](trade, self.rng) is not None:
                break
            self.story.touched.discard(trade.true["ticket"])
        told.row = trade.broker
        if end is not None:
            self.story.confirmations.append(type(told)({**right, "status": "amended"}, end))
        self.note(morning, end, trade, what)
        return trade

    def ticketed(self, morning: int, end: int | None, what: str, alter: str, wanted: Wanted = lambda t: True) -> Trade:
        """Our own ticket is wrong, and the bank has paid the right amount; with an end, the desk amends it."""
        for skip in range(len(self.story.trades)):
            trade = self.pick(morning, wanted, True, skip)
            assert trade.desk
            told = next(told for told in self.story.tickets if told.row is trade.desk)
            right = dict(trade.desk)
            if plants.TRADE_PLANTS[alter](trade, self.rng) is not None:
                break
            self.story.touched.discard(trade.true["ticket"])
        told.row = trade.desk
        if end is not None:
            self.story.tickets.append(type(told)({**right, "status": "amended"}, end))
        self.note(morning, end, trade, what)
        return trade

    def entry(self, entry: Entry, first: int) -> None:
        """A bank entry known from a morning on, whatever its value date."""
        told_type = type(self.story.tickets[0])
        self.story.cash.append(told_type(entry, first))

    def silent(self, morning: int, end: int | None, what: str, wanted: Wanted = lambda t: True) -> Trade:
        """The broker has not confirmed; with an end, it does then."""
        trade = self.pick(morning, wanted)
        told = next(told for told in self.story.confirmations if told.row is trade.broker)
        told.first = end if end is not None else len(self.mornings)
        self.note(morning, end, trade, what)
        return trade


def _is(**facts: Any) -> Wanted:
    return lambda trade: all(getattr(trade.bond, name) == value for name, value in facts.items())


def _coupon_bond(trade: Trade) -> bool:
    return trade.bond.kind == "fixed" and trade.true["accrued_days"] > 20


def _thirty_years(trade: Trade) -> bool:
    return trade.bond.kind == "zero" and trade.bond.maturity.year > 2045


def _named(trade: Trade) -> bool:
    return bool(trade.bank[0].reference) and len(trade.bank) == 1


def happen(story: Story, players: dict[str, Bond], rng: random.Random) -> None:
    """All faults of the three mornings."""
    from make_sample import MORNINGS

    stage = Stage(story, rng, MORNINGS)
    _bonds(stage, players)
    _first(stage)
    _second(stage)
    _third(stage)
    _coupons(stage, players)
    _bank(stage)


def _first(s: Stage) -> None:
    zero = s.silent(0, 1, "thirty-year zero not confirmed; the confirmation comes a day late", _thirty_years)
    _resize(s, zero, 20_000_000_00)
    s.confirmed(
        0,
        1,
        "broker accrues under another day count; corrected next morning",
        "broker's day count",
        _coupon_bond,
        False,
    )
    s.confirmed(
        0, 2, "broker reads 32nds as decimals; corrected on the third morning", "32nds as decimals", _is(quote="32nds")
    )
    s.confirmed(
        0, None, "fee stands only on our ticket", "fee on the ticket only", lambda t: bool(t.true["fees"]), False
    )
    s.confirmed(
        0, 1, "broker settles a day later than the market; corrected next morning", "broker settles later", _coupon_bond
    )
    s.confirmed(0, None, "broker accrues a day or two too many", "broker's days", _coupon_bond)
    s.confirmed(0, None, "confirmation sent twice", "confirmed twice")
    again = next(t for t in s.story.trades if t.more_confirmations)
    s.story.confirmations.append(type(s.story.tickets[0])(again.more_confirmations[0], 0))
    s.confirmed(
        0, None, "broker names another account", "broker's account", lambda t: t.true["account"] == t.broker["account"]
    )
    s.confirmed(
        0, 2, "digits of the broker's amount exchanged; corrected on the third morning", "broker's amount mistyped"
    )
    s.confirmed(0, 1, "broker confirms in another currency; corrected next morning", "broker's currency")
    s.ticketed(0, 1, "our ticket has the wrong face; amended next morning", "desk's face")
    s.ticketed(0, 1, "our ticket has the wrong side; amended next morning", "desk's side")
    trade = s.pick(0, lambda t: True, settled=False)
    told = next(told for told in s.story.tickets if told.row is trade.desk)
    assert trade.broker
    told.first, trade.broker["desk_reference"] = 1, trade.true["ticket"]
    s.note(0, 1, trade, "broker confirms a trade of which no ticket was keyed; it is keyed a day later")
    bill = s.pick(0, lambda t: t.bond.quote == "discount")
    _year_of_365(s, bill, 0)


def _second(s: Stage) -> None:
    s.confirmed(1, 2, "broker's price differs; corrected next morning", "broker's price")
    s.confirmed(1, None, "broker accrues under another day count", "broker's day count", _coupon_bond)
    s.silent(1, 2, "not confirmed; the confirmation comes a day late")
    s.confirmed(1, None, "broker confirms the other side", "broker's side")
    s.confirmed(1, 2, "broker's trade date differs; corrected next morning", "broker's trade date")
    s.confirmed(1, None, "broker's face differs", "broker's face")


def _third(s: Stage) -> None:
    s.confirmed(2, None, "broker's amount mistyped", "broker's amount mistyped")
    s.silent(2, None, "not confirmed")
    s.confirmed(2, None, "broker accrues a day or two too many", "broker's days", _coupon_bond)
    s.confirmed(2, None, "confirmation under a new reference repeats one", "confirmed twice anew")
    again = [t for t in s.story.trades if t.more_confirmations][-1]
    s.story.confirmations.append(type(s.story.tickets[0])(again.more_confirmations[0], 2))
    s.confirmed(2, None, "broker settles a day later than the market", "broker's settlement date")


def _resize(s: Stage, trade: Trade, face: int) -> None:
    """Makes a trade as large as its story needs, for everybody."""
    for facts in (trade.true, trade.desk, trade.broker):
        assert facts
        new = reckon(trade.bond, facts, face=face)
        facts.update({name: new[name] for name in ("face", "principal", "settlement")})
    for entry in trade.bank:
        entry.amount = trade.cash


def _year_of_365(s: Stage, trade: Trade, morning: int) -> None:
    """The broker takes a bill's discount over a year of 365 days."""
    assert trade.broker
    right = trade.true
    days = (trade.bond.maturity - right["settlement_date"]).days
    price = 100 - right["price"] * Fraction(days, 365)
    principal = half_up(right["face"] * price / 100)
    trade.broker["principal"], trade.broker["settlement"] = principal, principal + right["side"] * (right["fees"] or 0)
    s.note(morning, None, trade, "broker discounts a bill over a year of 365 days instead of 360")


def _coupons(s: Stage, players: dict[str, Bond]) -> None:
    for name, morning in (("weekend", 0), ("weekend in euro", 1)):
        due = s.due(players[name])
        due.bank[0].value_date = date(2026, 3, 27)
        s.entry(due.bank[0], morning)
        s.note(
            morning,
            None,
            due,
            "coupon paid on its unadjusted date, or the business day before it, instead of the next one",
        )
    for name, kept, morning in (("taxed", 85, 0), ("taxed too", 74, 1)):
        due = s.due(players[name])
        due.bank[0].amount = half_up(Fraction(due.bank[0].amount * kept, 100))
        s.note(morning, None, due, f"tax of {100 - kept} % withheld from the coupon")
    for name, end in (("late", 1), ("late too", 2)):
        due = s.due(players[name])
        s.entry(due.bank[0], end)
        due.bank[0].booked_date = s.mornings[end] - timedelta(days=1)
        s.note(end - 1, end, due, "coupon not in the cash file; it comes a morning later with the right value date")
    for name, morning in (("face of old", 0), ("face of old too", 2)):
        due = s.due(players[name])
        due.bank[0].amount = due.bank[0].amount * 4 // 5
        s.note(morning, None, due, "coupon paid on an older, smaller face")
    due = s.due(players["in two"])
    part = due.bank[0].amount * 2 // 5
    due.bank = [
        replace(due.bank[0], amount=part),
        replace(due.bank[0], entry=due.bank[0].entry + "B", amount=due.bank[0].amount - part - 1),
    ]
    s.note(
        0,
        None,
        due,
        "coupon in two entries, each cut to the cent: one cent short in all, within tolerance and no break",
    )
    due = s.due(players["to another account"])
    due.bank[0].account = ACCOUNTS[(ACCOUNTS.index(due.account) + 1) % 4]
    s.note(1, None, due, "coupon booked to another of our accounts")
    due = s.due(players["short first"])
    due.bank[0].amount = half_up(due.face * due.bond.rate / 100)
    s.note(0, None, due, "short first coupon paid as if it were a whole one")
    due = s.due(players["long first"])
    due.bank[0].amount = half_up(due.face * due.bond.rate / 200)
    s.note(2, None, due, "long first coupon paid as if it were a regular one")


def _bank(s: Stage) -> None:
    trade = s.pick(0, _named, settled=True)
    trade.bank[0].amount -= 2500
    s.note(0, None, trade, "bank took a charge of 25.00 out of the settlement")
    trade = s.pick(0, _named, settled=True)
    s.entry(trade.bank[0], 2)
    s.note(0, 2, trade, "no cash: the settlement failed, and is booked for its day on the third morning")
    trade = s.pick(0, _named, settled=True)
    first = trade.bank[0]
    second = replace(first, entry=first.entry + "R")
    s.entry(second, 0)
    s.entry(
        replace(
            second,
            entry=first.entry + "S",
            amount=-first.amount,
            narrative="REVERSAL " + first.narrative,
            booked_date=s.mornings[0],
        ),
        1,
    )
    s.note(0, 1, trade, "bank booked a settlement twice; it reverses the second one next morning")
    trade = s.pick(0, _named, settled=True)
    trade.bank[0].value_date += timedelta(days=1)
    s.note(0, None, trade, "bank booked a settlement for a wrong day")
    for number, (morning, amount, account, words) in enumerate(
        (
            (0, -125000, 0, "CUSTODY FEE FIRST QUARTER"),
            (0, 4812350, 2, "TO BE ADVISED"),
            (1, 99125, 1, "COUPON"),
            (2, -3350, 3, "CHARGES"),
        )
    ):
        day = s.mornings[morning] - timedelta(days=3 if morning == 0 else 1)
        s.entry(
            Entry(f"X{number + 1:05d}", ACCOUNTS[account], ("USD", "EUR", "GBP", "EUR")[number], day, amount, words),
            morning,
        )
        name = f"bank X{number + 1:05d}"
        s.keep(morning, None, name, "entry that nothing explains", {name})


def _bonds(s: Stage, players: dict[str, Bond]) -> None:
    """One bond is missing from bonds.csv on its first morning; a gilt dealt without its coupon is confirmed with it."""
    missing = players["not on file"]
    trade = next(t for t in s.story.trades if t.bond is missing)
    s.story.touched.add(trade.true["ticket"])
    first = s.known(trade)
    s.story.late_bonds[missing.bond] = first + 1
    s.note(first, first + 1, trade, "bond is not in bonds.csv; it is a morning later")
    for trade in s.story.trades:
        if trade.true["accrued"] < 0 and trade.true["ticket"] not in s.story.touched:
            assert trade.broker
            s.story.touched.add(trade.true["ticket"])
            coupon = half_up(trade.true["face"] * trade.bond.rate / 200)
            trade.broker["accrued"] += coupon
            trade.broker["settlement"] += coupon
            trade.broker["accrued_days"] = 175
            s.note(s.known(trade), None, trade, "broker charges accrued although the gilt is dealt without its coupon")
            return
    raise LookupError("no gilt was dealt without its coupon")


def page(story: Story) -> str:
    """The sample's own README: what happens on each morning and how it ends."""
    from make_sample import MORNINGS

    lines = [
        "# Three mornings of an invented house",
        "",
        "Every name, bond and amount here is invented (identifiers begin with ZZ). Made by",
        "`python resources/make_sample.py`;",
        "each folder holds what was known on its morning: tickets, confirmations of four brokers in four",
        "layouts, holdings of the evening before, and the bank's entries up to the day before. Open one, or run",
        "`python -m reconciler morning sample_tickets/2026-03-30 --date 2026-03-30 --out out`.",
        "",
    ]
    for number, morning in enumerate(MORNINGS):
        lines += [f"## {morning.isoformat()}", "", "| payment | what happened | gone on |", "| --- | --- | --- |"]
        for note in sorted(story.notes, key=lambda note: (note.first, note.name, note.what)):
            if note.first == number:
                gone = MORNINGS[note.end].isoformat() if note.end is not None else ""
                lines.append(f"| {note.name} | {note.what} | {gone} |")
        lines.append("")
    return "\n".join(lines)
