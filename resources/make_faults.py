"""Makes a morning in which every payment carries one planted fault (or two) of a known kind, to test the search for
causes.

`python resources/make_faults.py FOLDER --payments 10000 [--seed 1] [--pairs]` writes a morning folder and `truth.csv`
beside its files: which payment, which party, which kind or kinds. Nothing of the program is used, so its search for
causes is held against figures that it had no hand in. The kinds are in `fault_kinds.py`.
"""

from __future__ import annotations

import argparse
import csv
import random
import sys
from pathlib import Path

sys.path[:0] = [str(Path(__file__).resolve().parent.parent), str(Path(__file__).resolve().parent)]

from fault_kinds import SINCE, TODAY, TRADE_FAULTS, Reading
from fault_kinds_bank import BANK_FAULTS, DUE_FAULTS

from tests.oracle import bank, deals, issues
from tests.oracle.arithmetic import Bond, payment_date
from tests.oracle.deals import ACCOUNTS, Trade
from tests.oracle.world import CLOSINGS, World


def plant(trade: Trade, party: str, names: list[str], rng: random.Random) -> bool:
    """Lets a party misread a trade in the ways named; False where one of them cannot happen to it or nothing it tells
    differs.
    """
    reading = Reading(trade.bond, dict(trade.true))
    if not all(TRADE_FAULTS[name](reading, rng) for name in names):
        return False
    told, own = reading.told(), trade.broker if party == "Broker" else trade.desk
    assert own
    told |= {name: own[name] for name in ("account", "broker_reference", "desk_reference", "status")}
    same = all(told[name] == trade.true[name] for name in ("face", "price", "side", "fees", "settlement_date"))
    if told["settlement"] < 100 or (same and abs(told["settlement"] - trade.true["settlement"]) < 5):
        return False
    if party == "Broker":
        trade.broker = told
    else:
        trade.desk = told
    return True


def make(folder: Path, payments: int, seed: int, pairs: bool) -> list[tuple[str, str, str, str]]:
    """Writes the morning and its truth; returns the truth: kind of item, key, party, kinds of fault joined by +."""
    rng = random.Random(seed)
    scene = issues.Scene(rng, SINCE, TODAY, CLOSINGS)
    bonds = [maker(scene) for _ in range(max(3, payments // 400)) for maker in issues.KINDS.values()]
    # Coupons hang on what is held: trades are in bonds that pay nothing in the window, coupons in bonds nobody trades.
    paying = {
        bond.bond
        for bond in bonds
        if any(SINCE <= payment_date(bond, day) <= TODAY for _, day, _ in bank.payments(bond))
    }
    quiet, paying_bonds = [b for b in bonds if b.bond not in paying], [b for b in bonds if b.bond in paying]
    trades: list[Trade] = []
    truth: list[tuple[str, str, str, str]] = []
    kinds = [*TRADE_FAULTS, *([] if pairs else BANK_FAULTS)]
    for number in range(payments * 4 // 5):
        planted = _one(scene, quiet, kinds[number % len(kinds)], pairs, len(trades) + 1)
        if planted:
            trades.append(planted[0])
            truth.append(("trade", planted[0].true["ticket"], *planted[1:]))
    positions = bank.Positions(paying_bonds, [], rng)
    dues = [due for due in bank.expect(bonds, positions, SINCE, TODAY, rng) if due.truth.day and due.truth.day < TODAY]
    truth += _plant_dues(dues, payments // 5, rng)
    _write(folder, bonds, trades, dues, positions)
    with (folder / "truth.csv").open("w", encoding="utf-8", newline="") as out:
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(("kind", "key", "party", "fault"))
        writer.writerows(truth)
    return truth


def _one(scene: issues.Scene, bonds: list[Bond], kind: str, pairs: bool, number: int) -> tuple[Trade, str, str] | None:
    """A trade with one fault of a kind (and any second one), dealt anew until the fault can happen to it."""
    rng = scene.rng
    for _ in range(150):
        trade = deals.deal(scene, rng.choice(bonds), number)
        if trade is None or trade.true["settlement_date"] >= TODAY:
            continue
        deals.pay(trade, rng)
        trade.bank = trade.bank[:1]
        trade.bank[0].amount, trade.bank[0].reference = trade.cash, trade.true["ticket"]
        if kind in BANK_FAULTS:
            if BANK_FAULTS[kind](trade, rng):
                return trade, "Bank", kind
            continue
        # The ticket's fees are the terms' own, so a fee is always the broker's fault.
        party = "Desk" if rng.random() < 0.25 and not kind.startswith("fee") else "Broker"
        chosen = [kind, rng.choice([name for name in TRADE_FAULTS if name != kind])] if pairs else [kind]
        if plant(trade, party, chosen, rng):
            return trade, party, "+".join(chosen)
    return None


def _plant_dues(dues: list[bank.Due], most: int, rng: random.Random) -> list[tuple[str, str, str, str]]:
    truth, names = [], list(DUE_FAULTS)
    for number, due in enumerate(dues, 1):
        bank.pay(due, number, rng)
        due.bank = due.bank[:1]
        due.bank[0].amount, due.bank[0].bond = due.truth.amount or 0, due.bond.bond
        if len(truth) >= most:
            continue
        for step in range(len(names)):
            name = names[(number + step) % len(names)]
            if DUE_FAULTS[name](due, rng):
                truth.append((due.truth.kind, " ".join(due.truth.key), "Bank", name))
                break
    return truth


def _write(
    folder: Path, bonds: list[Bond], trades: list[Trade], dues: list[bank.Due], positions: bank.Positions
) -> None:
    """The folder: holdings as of the morning itself, in bonds nobody trades."""
    world = World(SINCE, TODAY, bonds, trades, dues, positions, dict.fromkeys(ACCOUNTS, TODAY))
    world.bond_rows = [issues.row(bond) for bond in bonds]
    world.tickets = [trade.desk for trade in trades if trade.desk]
    world.confirmations = [trade.broker for trade in trades if trade.broker]
    world.entries = [entry for owner in (*trades, *dues) for entry in owner.bank]
    for entry in world.entries:
        entry.booked_date = entry.value_date
    world.write(folder)


if __name__ == "__main__":
    options = argparse.ArgumentParser(description="Makes a morning of payments with one planted fault each.")
    options.add_argument("folder", type=Path)
    options.add_argument("--payments", type=int, default=10_000)
    options.add_argument("--seed", type=int, default=1)
    options.add_argument("--pairs", action="store_true", help="two faults in each payment")
    told = options.parse_args()
    made = make(told.folder, told.payments, told.seed, told.pairs)
    print(f"{len(made)} payments with a fault, {len({kinds for *_, kinds in made})} kinds")
