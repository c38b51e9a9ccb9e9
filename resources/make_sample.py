"""Makes `sample_tickets/`: three mornings of an invented investment house, so that the program can be tried without
own files.

Run from a checkout: `python resources/make_sample.py`. Every run gives the same bytes. The amounts come from the
scalar reckoning in `tests/oracle`, not from the program, so the sample is also a witness. Each folder is what was
known on its morning: the last ten business days in full, cash only for days before it. Faults lie in
`resources/sample_faults.py`, told with what ends them.
"""

from __future__ import annotations

import random
import shutil
import sys
from dataclasses import dataclass, field
from datetime import date, timedelta
from fractions import Fraction
from pathlib import Path
from typing import Any

sys.path[:0] = [str(Path(__file__).resolve().parent.parent), str(Path(__file__).resolve().parent)]

from tests.oracle import bank, deals, issues, manners, writing
from tests.oracle.arithmetic import Bond, months_on
from tests.oracle.bank import Due, Positions
from tests.oracle.deals import Entry, Trade

MORNINGS = (date(2026, 3, 30), date(2026, 3, 31), date(2026, 4, 1))
SINCE = (date(2026, 3, 16), date(2026, 3, 17), date(2026, 3, 18))
BROKERS = ("Tamarisk & Vane", "Orrin & Teale", "Quillon Harrow", "Ellisk Fane")
SEED = 20260330
LAST = len(MORNINGS) - 1


@dataclass(frozen=True)
class Note:
    """A fault: the morning it shows and the one it is gone on, the payment, what happened, and the items it may show on."""

    first: int
    end: int | None
    name: str
    what: str
    items: frozenset[str]


@dataclass
class Told:
    """One row somebody told: from which morning it is in the files, and up to which."""

    row: Any
    first: int
    last: int = LAST


@dataclass
class Story:
    """Everything told over the three mornings."""

    bonds: list[Bond] = field(default_factory=list)
    trades: list[Trade] = field(default_factory=list)
    dues: list[Due] = field(default_factory=list)
    tickets: list[Told] = field(default_factory=list)
    confirmations: list[Told] = field(default_factory=list)
    cash: list[Told] = field(default_factory=list)
    late_bonds: dict[str, int] = field(default_factory=dict)
    touched: set[str] = field(default_factory=set)
    positions: Positions | None = None
    notes: list[Note] = field(default_factory=list)
    """Every fault: the morning it shows, the morning it is gone, the payment, and what happened."""


def morning_after(day: date) -> int:
    """The first morning whose files can know of a day: the one after it (past the last one: never)."""
    return next((n for n, morning in enumerate(MORNINGS) if morning > day), LAST + 1)


def eighths(rate: Fraction) -> str:
    """A coupon as bonds are named by: 4 5/8, 0 3/4, or a decimal where it is no eighth."""
    whole, part = divmod(rate, 1)
    if not part:
        return str(whole)
    return f"{whole} {part.numerator}/{part.denominator}" if part.denominator in (2, 4, 8) else f"{float(rate):g}"


def cast(scene: issues.Scene) -> dict[str, Bond]:
    """The bonds that the faults need, one by one."""
    two_five = {"rate": Fraction(37, 8), "frequency": 2, "day_count": "30/360", "settlement_days": 1}

    def fixed(currency: str, calendar: str, coupon: date, years: int, **terms: object) -> Bond:
        maturity = months_on(coupon, 12 * years, False)
        return scene.new(currency, calendar, "fixed", maturity, months_on(coupon, -48, False), **terms)

    sterling = {
        "rate": Fraction(17, 4),
        "frequency": 2,
        "settlement_days": 1,
        "ex_dividend": "6b",
        "record": "7b",
        "market": "UK_GILT",
    }
    found = {
        "weekend": fixed("USD", "XFED", date(2026, 3, 28), 5, **two_five),
        "weekend in euro": fixed("EUR", "XECB", date(2026, 3, 29), 7, rate=Fraction(25, 8), frequency=1),
        "taxed": fixed("USD", "XFED", date(2026, 3, 26), 9, **{**two_five, "rate": Fraction(47, 8)}),
        "taxed too": fixed("EUR", "XECB", date(2026, 3, 30), 4, rate=Fraction(11, 4), frequency=1),
        "ex dividend": fixed("GBP", "GB", date(2026, 4, 8), 12, **sterling),
        "ex dividend too": fixed("GBP", "GB", date(2026, 4, 9), 3, **{**sterling, "rate": Fraction(7, 8)}),
        "late": fixed("EUR", "XECB", date(2026, 3, 27), 6, rate=Fraction(33, 8), frequency=1, day_count="30E/360"),
        "late too": fixed("JPY", "JP", date(2026, 3, 30), 8, rate=Fraction(9, 8), frequency=2, settlement_days=1),
        "face of old": fixed("USD", "XFED", date(2026, 3, 25), 2, **{**two_five, "rate": Fraction(7, 2)}),
        "face of old too": fixed(
            "GBP", "XLON", date(2026, 3, 31), 2, rate=Fraction(6), frequency=4, day_count="Act/365F"
        ),
        "in two": fixed("USD", "XFED", date(2026, 3, 24), 11, **{**two_five, "rate": Fraction(41, 8)}),
        "to another account": fixed(
            "GBP", "XLON", date(2026, 3, 30), 5, rate=Fraction(5), frequency=4, day_count="Act/365F"
        ),
    }
    short = fixed("EUR", "XECB", date(2026, 3, 27), 10, rate=Fraction(29, 8), frequency=1)
    short.first_coupon, short.accrual_start = date(2026, 3, 27), date(2025, 8, 14)
    long = fixed("USD", "XFED", date(2026, 3, 31), 7, **two_five)
    long.first_coupon, long.accrual_start = date(2026, 3, 31), date(2025, 7, 10)
    found |= {"short first": short, "long first": long}
    found["not on file"] = fixed("EUR", "XECB", date(2026, 9, 21), 4, rate=Fraction(21, 8), frequency=1)
    return found


EXTRA = (
    ("treasury",) * 7
    + ("month end",) * 3
    + ("bill",) * 5
    + ("zero of thirty years",) * 3
    + ("zero",) * 2
    + ("US company",) * 5
    + ("bund",) * 7
    + ("gilt",) * 6
    + ("European",) * 5
    + ("quarterly",) * 5
    + ("Japanese",) * 6
    + (
        "euro floater",
        "dollar floater",
        "maturing",
        "maturing",
        "zero that matures",
        "zero that matures",
        "maturing gilt",
        "short first",
        "short first in months",
        "long first counted",
    )
)


def invent() -> tuple[Story, dict[str, Bond], random.Random]:
    """Bonds, trades and payments told truly by everybody."""
    rng = random.Random(SEED)
    scene = issues.Scene(rng, SINCE[0], MORNINGS[-1], ())
    players = cast(scene)
    story = Story(bonds=list(players.values()))
    story.bonds += [issues.KINDS[name](scene) for name in EXTRA]
    for bond in story.bonds:
        bond.rate = Fraction(round(bond.rate * 8) or 1, 8) if bond.kind == "fixed" else bond.rate
        name = " ".join(bond.description.split()[:2])
        words = {"zero": "zero" if bond.quote == "price" else "bill", "floating": "floating"}
        bond.description = f"{name} {words.get(bond.kind) or eighths(bond.rate)} {bond.maturity.year}"
    room = [100, 20, 20]
    while any(room):
        bond = rng.choice(story.bonds)
        if len(story.trades) % 10 == 4:
            # enough of what the faults ask for: bills, long zeros, notes in 32nds, gilts about to pay
            bond = rng.choice(
                [b for b in story.bonds if b.quote != "price" or b.maturity.year > 2045 or b is players["ex dividend"]]
            )
        if len(story.trades) == 40:
            bond = players["not on file"]
        trade = deals.deal(scene, bond, len(story.trades) + 1)
        if trade and trade.true["broker"] in BROKERS and trade.true["trade_date"] < MORNINGS[-1]:
            known = morning_after(trade.true["trade_date"])
            if room[known]:
                room[known] -= 1
                story.trades.append(trade)
    positions = Positions([b for b in story.bonds if b is not players["not on file"]], story.trades, rng)
    positions.first = {key: abs(face) for key, face in positions.first.items()}
    for name, bond in players.items():
        if name != "not on file":
            positions.first[deals.ACCOUNTS[len(name) % 4], bond.bond] = (
                deals.face_for(bond, rng) // 10**7 * 10**7 + 25 * 10**7
            )
    story.dues = bank.expect(story.bonds, positions, SINCE[0], MORNINGS[-1], rng)
    for number, due in enumerate(story.dues, 1):
        bank.pay(due, number, rng)
    for trade in story.trades:
        deals.pay(trade, rng)
        known = morning_after(trade.true["trade_date"])
        story.tickets.append(Told(trade.desk, known))
        story.confirmations.append(Told(trade.broker, known))
    story.positions = positions
    return story, players, rng


def book(story: Story) -> None:
    """Cash as it becomes known: entries of a day are in the next morning's file."""
    done = {id(told.row) for told in story.cash}
    for owner in (*story.trades, *story.dues):
        for entry in owner.bank:
            if id(entry) not in done:
                story.cash.append(Told(entry, morning_after(entry.value_date)))
    for told in story.cash:
        told.row.booked_date = told.row.booked_date or told.row.value_date


def write(story: Story, folder: Path) -> None:
    """The three folders."""
    for number, today in enumerate(MORNINGS):
        target = folder / today.isoformat()
        shutil.rmtree(target, ignore_errors=True)
        (target / "confirmations").mkdir(parents=True)
        (target / "layouts").mkdir()
        known = [bond for bond in story.bonds if story.late_bonds.get(bond.bond, 0) <= number]
        rows = [issues.row(bond) for bond in known]
        writing.plain_file(target / "bonds.csv", list(rows[0]), rows)
        inside = [told.row for told in story.tickets if told.first <= number <= told.last]
        writing.plain_file(target / "tickets.csv", writing.TICKET_COLUMNS, map(writing.ticket_row, inside))
        _write_cash(story, target, number)
        _write_holdings(story, target, number)
        _write_rates(known, target)
        for manner in manners.MANNERS:
            told = [
                t.row for t in story.confirmations if t.first <= number <= t.last and t.row["broker"] == manner.broker
            ]
            if told:
                writing.confirmation_file(target / f"confirmations/{manner.stem}_{today:%Y%m%d}.csv", told, manner)
            if told and manner.layout:
                (target / f"layouts/{manner.stem}.toml").write_text(manner.layout.lstrip(), encoding="utf-8")


def _write_cash(story: Story, target: Path, number: int) -> None:
    gone = {entry.entry for due in story.dues if due.truth.day and due.truth.day < SINCE[number] for entry in due.bank}
    rows = []
    for told in story.cash:
        e: Entry = told.row
        if told.first <= number <= told.last and e.entry not in gone:
            rows.append(
                {
                    "entry": e.entry,
                    "account": e.account,
                    "currency": e.currency,
                    "value_date": e.value_date.isoformat(),
                    "booked_date": writing.day_text(e.booked_date),
                    "amount": writing.money(e.amount, e.currency),
                    "narrative": e.narrative,
                    "reference": e.reference,
                    "bond": e.bond,
                }
            )
    rows.sort(key=lambda row: (row["value_date"], row["account"], row["entry"]))
    columns = ("entry", "account", "currency", "value_date", "booked_date", "amount", "narrative", "reference", "bond")
    writing.plain_file(target / "cash.csv", columns, rows)


def _write_holdings(story: Story, target: Path, number: int) -> None:
    """What was held the evening before; trades that failed to settle stand as if they had, as position systems show
    them.
    """
    positions = story.positions
    assert positions
    evening = MORNINGS[number] - timedelta(days=3 if number == 0 else 1)
    currency = {bond.bond: bond.currency for bond in story.bonds}
    rows = []
    for account, bond in positions.all():
        face = positions.held(account, bond, evening)
        if face:
            rows.append(
                {
                    "account": account,
                    "bond": bond,
                    "face": writing.money(face, currency[bond]),
                    "as_of": evening.isoformat(),
                }
            )
    writing.plain_file(target / "holdings.csv", ("account", "bond", "face", "as_of"), rows)


def _write_rates(bonds: list[Bond], target: Path) -> None:
    rows = [
        {"bond": bond.bond, "from": day.isoformat(), "rate": issues.text(rate)}
        for bond in bonds
        if bond.kind == "floating"
        for day, rate in bond.steps
    ]
    writing.plain_file(target / "rates.csv", ("bond", "from", "rate"), rows)


def make(folder: Path) -> Story:
    """Invents the story, lets the faults happen, and writes the three folders and the page that tells of them."""
    import sample_faults

    story, players, rng = invent()
    sample_faults.happen(story, players, rng)
    book(story)
    write(story, folder)
    (folder / "README.md").write_text(sample_faults.page(story), encoding="utf-8")
    return story


if __name__ == "__main__":
    make(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).resolve().parent.parent / "sample_tickets")
