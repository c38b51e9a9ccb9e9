"""A morning as data and as files: what everybody told, what is true of it, and the folder it is written to."""

from __future__ import annotations

import random
from dataclasses import dataclass, field
from datetime import date
from pathlib import Path
from typing import Any

from tests.oracle.arithmetic import Bond
from tests.oracle.bank import Due, Positions
from tests.oracle.deals import Entry, Trade, Truth
from tests.oracle.issues import text
from tests.oracle.manners import MANNERS, Manner
from tests.oracle.writing import (
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
    manners: tuple[Manner, ...] = MANNERS
    earlier: dict[str, date] = field(default_factory=dict)
    """Accounts whose holdings are told a second time, as of an earlier day."""

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
        plain_file(
            folder / "closings.csv",
            ("calendar", "date", "open"),
            shuffled(
                [
                    {"calendar": code, "date": day.isoformat(), "open": "yes" if opened else "no"}
                    for code, day, opened in CLOSINGS
                ],
                rng,
            ),
        )
        for manner in self.manners:
            told = [facts for facts in self.confirmations if facts["broker"] == manner.broker]
            if manner.layout:
                (folder / "layouts" / f"{manner.stem}.toml").write_text(manner.layout.lstrip(), encoding="utf-8")
            for part in range(manner.parts):
                mine = [f for f in told if f["number"] % manner.parts == part]
                if mine:
                    name = f"confirmations/{manner.stem}_{self.today:%Y%m%d}{'_' + str(part + 1) if part else ''}.csv"
                    written[name] = confirmation_file(folder / name, shuffled(mine, rng), manner)
        return written

    def _write_tickets(self, folder: Path, rng: random.Random | None) -> Written:
        rows = shuffled(self.tickets, rng)
        plain_file(folder / "tickets.csv", TICKET_COLUMNS, (ticket_row(facts) for facts in rows))
        return Written(len(rows), [n for n, facts in enumerate(rows, 2) if "spoilt" in facts])

    def _write_cash(self, folder: Path, rng: random.Random | None) -> Written:
        columns = (
            "entry",
            "account",
            "currency",
            "value_date",
            "booked_date",
            "amount",
            "narrative",
            "reference",
            "bond",
        )
        entries, rows = shuffled(self.entries, rng), []
        written = Written(len(entries), [n for n, entry in enumerate(entries, 2) if entry.spoilt])
        for e in entries:
            rows.append(
                {
                    "entry": e.entry,
                    "account": e.account,
                    "currency": e.currency,
                    "value_date": e.value_date.isoformat(),
                    "booked_date": day_text(e.booked_date),
                    "amount": money(e.amount, e.currency),
                    "narrative": e.narrative,
                    "reference": e.reference,
                    "bond": e.bond,
                    **e.spoilt,
                }
            )
            if not e.spoilt:
                written.used[e.currency] = written.used.get(e.currency, 0) + e.amount
        plain_file(folder / "cash.csv", columns, rows)
        return written

    def _write_holdings(self, folder: Path, rng: random.Random | None) -> None:
        currency = {bond.bond: bond.currency for bond in self.bonds}
        rows = []
        for account, bond in self.positions.all():
            face = self.positions.held(account, bond, self.as_of[account])
            earlier = self.earlier.get(account)
            if earlier:
                old = self.positions.held(account, bond, earlier)
                rows.append(
                    {"account": account, "bond": bond, "face": money(old, currency[bond]), "as_of": earlier.isoformat()}
                )
            if face or earlier or self.show_zero or (account, bond) in self.positions.first:
                rows.append(
                    {
                        "account": account,
                        "bond": bond,
                        "face": money(face, currency[bond]),
                        "as_of": self.as_of[account].isoformat(),
                    }
                )
        plain_file(folder / "holdings.csv", ("account", "bond", "face", "as_of"), shuffled(rows, rng))

    def _write_steps(self, folder: Path, rng: random.Random | None) -> None:
        for name, column, kinds in (
            ("rates", "rate", ("stepped", "floating")),
            ("factors", "factor", ("amortising", "linked")),
        ):
            rows = [
                {"bond": bond.bond, "from": day.isoformat(), column: text(value)}
                for bond in self.bonds
                if bond.kind in kinds
                for day, value in bond.steps
            ]
            plain_file(folder / f"{name}.csv", ("bond", "from", column), shuffled(rows, rng))
