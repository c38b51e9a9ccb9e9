"""Makes a morning of any size for the benchmark: consistent files, about one payment in a hundred at fault.

Everything is invented. Written with arrow, so that making a million rows a file takes seconds. The figures are reckoned by the
project itself: this is for measuring time, not correctness.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc
import pyarrow.csv as pacsv

from reconciler import texts as text
from reconciler.bonds import settlement
from reconciler.expected.terms import resolve_terms
from reconciler.intake import folder as intake
from reconciler.records import CLOSINGS, FACTORS, RATES, table

MARKETS = ("US_TNOTE", "US_CORP", "UK_GILT", "DE_BUND", "FR_OAT", "AU_TB", "CA_GOC")
BROKERS = ("Tamarisk & Vane", "Orrin & Teale", "Ellisk Fane", "Quillon Harrow")


def _isin(number: int) -> str:
    body = f"ZZ{number:09d}"
    digits = "".join(str(int(sign, 36)) for sign in body)
    total = 0
    for place, digit in enumerate(reversed(digits)):
        doubled = int(digit) * (2 - place % 2)
        total += doubled // 10 + doubled % 10
    return body + str(-total % 10)


def _write(path: Path, columns: dict[str, object]) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    pacsv.write_csv(pa.table(columns), path, pacsv.WriteOptions(quoting_style="none"))


def make(folder: Path, trades: int, bonds: int = 100_000, seed: int = 7) -> None:
    """Writes a morning folder of so many tickets, confirmations and bank entries."""
    draw = np.random.default_rng(seed)
    isins = [_isin(n) for n in range(bonds)]
    start = np.datetime64("2016-01-15") + draw.integers(0, 3000, bonds)
    maturity = np.datetime64("2027-01-15") + draw.integers(0, 9000, bonds)
    _write(folder / "bonds.csv", {
        "bond": isins, "market": [MARKETS[n % len(MARKETS)] for n in range(bonds)],
        "coupon_rate": [f"{n / 8:g}" for n in draw.integers(4, 64, bonds)],
        "accrual_start": np.datetime_as_string(start).tolist(), "maturity": np.datetime_as_string(maturity).tolist(),
    })  # fmt: skip
    told, _faults = intake.read_bonds(folder / "bonds.csv")
    terms, _problems = resolve_terms(told, table(RATES), table(FACTORS), table(CLOSINGS))
    row = draw.integers(0, bonds, trades)
    trade_date = np.datetime64("2026-03-20") + draw.integers(0, 12, trades)
    trade_date -= np.maximum(0, (trade_date.astype(np.int64) + 3) % 7 - 4)
    settles = settlement.settlement_dates(terms, row, trade_date)
    face = draw.integers(1, 2000, trades) * 1_000_00
    price = draw.integers(80 * 256, 120 * 256, trades) * (10**12 // 256)
    done = settlement.settle(terms, row, settles, face, price)
    side = draw.choice(np.array([1, -1]), trades)
    amount = done.principal_minor + done.accrued_minor
    numbers = pc.cast(pa.array(np.arange(trades)), pa.string())
    ticket = pc.binary_join_element_wise("T-", numbers, "")
    broker = pa.array(BROKERS).take(pa.array(np.arange(trades) % 4))
    shown = {
        "bond": pa.array(isins).take(pa.array(row)), "side": pa.array(["sell", "", "buy"]).take(pa.array(side + 1)),
        "face": text.amounts(face, 2), "price": text.decimals(price, 12), "currency": pa.array(terms.currency).take(pa.array(row)),
        "trade_date": text.dates(trade_date), "settlement_date": text.dates(settles), "account": pa.array([f"ACC{n:02d}" for n in range(20)]).take(pa.array(np.arange(trades) % 20)),
    }  # fmt: skip
    reference = pc.binary_join_element_wise("R", numbers, "")
    _write(folder / "tickets.csv", {
        "ticket": ticket, **shown, "accrued": text.amounts(done.accrued_minor, 2), "fees": pa.array(["0.00"] * trades),
        "settlement_amount": text.amounts(amount, 2), "broker": broker, "broker_reference": reference,
    })  # fmt: skip
    wrong = draw.random(trades) < 0.005
    confirmed = amount + np.where(wrong, draw.integers(-90_000, 90_000, trades), 0)
    for number, name in enumerate(BROKERS):
        mine = pa.array(np.flatnonzero(np.arange(trades) % 4 == number))
        _write(folder / "confirmations" / f"{name.lower().replace(' & ', '_').replace(' ', '_')}_20260331.csv", {
            "broker_reference": reference.take(mine), **{key: column.take(mine) for key, column in shown.items()},
            "accrued": text.amounts(done.accrued_minor[mine.to_numpy()], 2), "settlement_amount": text.amounts(confirmed[mine.to_numpy()], 2),
        })  # fmt: skip
    paid = settles <= np.datetime64("2026-03-31")
    booked = -side * amount + np.where(draw.random(trades) < 0.005, draw.integers(-90_000, 90_000, trades), 0)
    # later settlements are prepaid here so that every ticket has its entry
    _write(folder / "cash.csv", {
        "entry": pc.binary_join_element_wise("E", numbers, ""), "account": shown["account"], "currency": shown["currency"],
        "value_date": shown["settlement_date"], "booked_date": shown["settlement_date"], "amount": text.amounts(booked, 2),
        "narrative": pa.array(["settlement"] * trades), "reference": ticket, "bond": shown["bond"],
    })  # fmt: skip
    del paid
