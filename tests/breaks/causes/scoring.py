"""How well causes are found: planted faults beside the causes named, as a table a person can read.

The faults are made by resources/make_faults.py, which shares no code with the program. Several names answer one fault where they
come to the same thing (a digit left out at the end of an amount is a decimal point moved where the digit was a nought).
"""

from __future__ import annotations

import csv
import datetime
import sys
from collections import defaultdict
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from reconciler.procedures import morning

ROOT = Path(__file__).resolve().parents[3]
sys.path.insert(0, str(ROOT / "resources"))

SLIPS = {"two digits exchanged", "digit left out", "digit typed twice", "decimal point moved", "one digit mistyped"}
COUNTED = {"another day count", "another basis of days"}
ANSWERS: dict[str, set[str]] = {
    "30/360 for actual": COUNTED, "30E/360 for actual": COUNTED, "actual for 30/360": COUNTED, "Act/365F for Act/Act": COUNTED,
    "Act/365F for Act/360": COUNTED, "Act/360 for others": COUNTED, "Act/Act ISDA for ICMA": COUNTED,
    "one day of accrued": {"accrued one day off", "accrued to the trade date"},
    "accrued to the trade date": {"accrued one day off", "accrued to the trade date"},
    "accrued from the issue": {"accrued from the issue", "odd period taken as regular"},
    "last coupon not taken off": {"last coupon not taken off"},
    "settles a day later": {"another settlement cycle", "late", "holiday not known"},
    "ex-dividend missed": {"ex-dividend date missed"},
    "32nds as decimals": {"32nds read as decimals"}, "plus lost": {"eighths of a 32nd lost"},
    "decimals as 32nds": {"decimals read as 32nds"},
    "price digits exchanged": SLIPS, "price cut to two places": {"price cut first", "price rounded first"},
    "price with accrued": {"accrued counted twice"},
    "face ten times": {"decimal point moved"}, "face in thousands": {"face in another unit", "decimal point moved"},
    "factor ignored": {"factor ignored"}, "factor of before": {"factor of another date", "factor ignored"},
    "rate of before": {"rate of another period"}, "side": {"side reversed"},
    "fee missing": {"fees left out", "fees on one side only"}, "fee twice": {"fees counted twice"},
    "fee added on a sale": {"fees with the wrong sign"}, "without accrued": {"accrued left out"},
    "accrued rounded per 100": {"accrued rounded otherwise"},
    "amount digits exchanged": SLIPS, "amount digit dropped": SLIPS, "amount point moved": SLIPS,
    "minus lost": {"sign of the accrued lost", "sign lost"}, "day and month exchanged": {"day and month exchanged"},
    "bank: sign": {"booked the wrong way round", "sign lost"}, "bank: a day late": {"late", "another settlement cycle", "early", "holiday not known"},
    "bank: charge": {"bank charge deducted"}, "bank: without accrued": {"accrued left out"},
    "coupon: tax": {"tax withheld"}, "coupon: of a year": {"other coupon frequency", "paid twice in one amount", "half of it paid"},
    "coupon: odd period as a whole one": {"odd period taken as regular"}, "coupon: rate of before": {"rate of another period"},
    "coupon: charge": {"bank charge deducted"}, "coupon: digits exchanged": SLIPS,
    "coupon: unadjusted date": {"paid on the unadjusted date", "another payment adjustment", "holiday not known", "early"},
}  # fmt: skip
"""The causes that answer each planted fault."""

NO_CAUSE = {"bank: other account"}
"""Faults that are a fact of their own and need no search."""

FEES = {"fee missing", "fee twice", "fee added on a sale"}

FOLLOWS = "follows from the facts told"


@dataclass
class Score:
    """One kind of fault: how many were planted, found as a break, rightly named first, named among what fits, proved, wrongly proved."""

    planted: int = 0
    found: int = 0
    first: int = 0
    among: int = 0
    proved: int = 0
    wrong: int = 0


def scores(folder: Path) -> tuple[dict[str, Score], list[str]]:
    """Scores per kind of fault, and what was wrong in words."""
    day = morning.run(folder, datetime.date(2026, 3, 31), datetime.date(2026, 3, 17))
    breaks = day.breaks
    firsts: dict[tuple[str, str], list[tuple[str, str]]] = defaultdict(list)
    rows: dict[tuple[str, str], list[int]] = defaultdict(list)
    names = {i: name for i, name in enumerate(day.items["item"].to_list())}
    for row, (item, party, cause, certainty) in enumerate(zip(
        breaks["item_row"].tolist(), breaks["party"].to_list(), breaks["cause"].to_list(), breaks["certainty"].to_list(), strict=True,
    )):  # fmt: skip
        firsts[names[item], party].append((cause, certainty))
        rows[names[item], party].append(row)
    among: dict[int, set[str]] = defaultdict(set)
    for row, cause in zip(day.explanations["break_row"].tolist(), day.explanations["cause"].to_list(), strict=True):
        among[row].add(cause)
    table: dict[str, Score] = defaultdict(Score)
    wrongs = []
    for kind, key, party, fault in _truth(folder):
        item = f"{kind} {key}" if kind != "trade" else f"trade {key}"
        faults = [one for one in fault.split("+") if one not in NO_CAUSE]
        if party == "Desk" and any(one in FEES for one in faults):
            # the ticket's fees are the terms' fees: the desk cannot differ in them
            continue
        if not faults:
            continue
        score = table[fault if "+" not in fault else "two faults"]
        score.planted += 1
        told = firsts.get((item, party), [])
        score.found += bool(told)
        named = _parts(cause for cause, _certainty in told)
        score.first += all(ANSWERS[one] & named for one in faults)
        every = _parts(cause for row in rows.get((item, party), []) for cause in among[row])
        score.among += all(ANSWERS[one] & every for one in faults)
        right = set().union(*(ANSWERS[one] for one in faults)) | {FOLLOWS}
        sure = [cause for cause, certainty in told if certainty == "proved"]
        score.proved += bool(sure)
        bad = [cause for cause in sure if not _parts([cause]) <= right]
        score.wrong += bool(bad)
        if bad or not all(ANSWERS[one] & named for one in faults):
            wrongs.append(f"{fault} | {item} {party}: {told}")
    return dict(table), wrongs


def _parts(causes: Iterable[str]) -> set[str]:
    return {part for cause in causes for part in cause.split(" and ") if part}


def _truth(folder: Path) -> list[tuple[str, str, str, str]]:
    with (folder / "truth.csv").open(encoding="utf-8") as lines:
        return [(r["kind"], r["key"], r["party"], r["fault"]) for r in csv.DictReader(lines)]


def printed(table: dict[str, Score]) -> str:
    """The table, a line a kind."""
    lines = [f"{'planted fault':<36}{'number':>7}{'found':>7}{'first':>7}{'among':>7}{'proved':>8}{'wrong':>7}"]
    for kind, s in sorted(table.items()):
        lines.append(f"{kind:<36}{s.planted:>7}{s.found:>7}{s.first:>7}{s.among:>7}{s.proved:>8}{s.wrong:>7}")
    total = [sum(getattr(s, name) for s in table.values()) for name in ("planted", "found", "first", "among", "proved", "wrong")]
    lines.append(f"{'all':<36}" + "".join(f"{n:>{w}}" for n, w in zip(total, (7, 7, 7, 7, 8, 7), strict=True)))
    return "\n".join(lines)
