"""Holds what the program wrote against the truth of an invented morning: amounts, dates, states, breaks found, no
false ones.
"""

from __future__ import annotations

import csv
from collections import Counter
from dataclasses import dataclass, field
from decimal import Decimal
from pathlib import Path

from tests.oracle.deals import Truth
from tests.oracle.world import World
from tests.oracle.writing import Written, money


def rows_of(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8-sig", newline="") as lines:
        return list(csv.DictReader(lines))


@dataclass
class Verdict:
    """Complaints by kind; `further` are breaks beyond the planted ones on items that carry a plant, for a person to
    look at.
    """

    complaints: list[str] = field(default_factory=list)
    further: Counter[tuple[str, str, str]] = field(default_factory=Counter)
    found: Counter[str] = field(default_factory=Counter)

    def say(self, what: str) -> None:
        self.complaints.append(what)


def _key(item: dict[str, str]) -> tuple[str, ...]:
    if item["kind"] == "trade":
        return (item["broker"], item["broker_reference"])
    if item["kind"] == "bank":
        return (item["bank_entries"],)
    return (item["account"], item["bond"], item["coupon_date"])


def _index(items: list[dict[str, str]]) -> dict[tuple[str, tuple[str, ...]], dict[str, str]]:
    found = {}
    for item in items:
        found[item["kind"], _key(item)] = item
        if item["kind"] == "trade" and item["ticket"]:
            found["trade", (item["ticket"],)] = item
    return found


def _item_of(truth: Truth, index: dict[tuple[str, tuple[str, ...]], dict[str, str]]) -> dict[str, str] | None:
    keys = [(name,) for name in truth.key] if truth.kind == "bank" else [truth.key]
    return next((index[truth.kind, key] for key in keys if (truth.kind, key) in index), None)


def hold(world: World, out: Path, written: dict[str, Written]) -> Verdict:
    """Every complaint about one run of the program."""
    verdict = Verdict()
    items, breaks = rows_of(out / "items.csv"), rows_of(out / "breaks.csv")
    index, by_item = _index(items), {}
    for found in breaks:
        by_item.setdefault(found["item"], []).append((found["break"], found["party"]))
    known = set()
    for truth in world.truths:
        item = _item_of(truth, index)
        if item is None:
            verdict.say(f"no item for {truth.kind} {truth.key} ({truth.plant or 'no plant'})")
            continue
        known.add(item["item"])
        _compare(truth, item, by_item.get(item["item"], []), verdict)
    for item in items:
        if item["item"] not in known:
            verdict.say(f"item too many: {item['item']} {item['state']} {by_item.get(item['item'], [])}")
    _totals(out, written, verdict)
    _rejects(out, written, verdict)
    return verdict


def _compare(truth: Truth, item: dict[str, str], breaks: list[tuple[str, str]], verdict: Verdict) -> None:
    name = f"{item['item']} [{truth.plant or 'no plant'}]"
    if truth.amount is not None and truth.kind != "bank":
        expected = Decimal(money(truth.amount, truth.currency))
        if not item["terms_amount"] or Decimal(item["terms_amount"]) != expected:
            verdict.say(f"{name}: terms_amount {item['terms_amount']} not {expected}")
    if truth.day is not None and item["terms_date"] != truth.day.isoformat():
        verdict.say(f"{name}: terms_date {item['terms_date']} not {truth.day}")
    if item["state"] != truth.state:
        verdict.say(f"{name}: state {item['state']} not {truth.state} {breaks}")
    for must in truth.must:
        if must not in breaks:
            verdict.say(f"{name}: not found {must}, only {breaks}")
        else:
            verdict.found[truth.plant] += 1
    for one in breaks:
        if one not in truth.must:
            if not truth.must:
                verdict.say(f"{name}: false break {one}")
            else:
                verdict.further[(truth.plant, *one)] += 1
    told = set(filter(None, item["bank_entries"].split(";")))
    if truth.plant.startswith("entry told twice"):
        if not (len(told) == 1 and told <= truth.entries):
            verdict.say(f"{name}: bank entries {told} not one of {truth.entries}")
    elif told != truth.entries:
        verdict.say(f"{name}: bank entries {told} not {truth.entries}")


def _totals(out: Path, written: dict[str, Written], verdict: Verdict) -> None:
    read: Counter[str] = Counter()
    for line in rows_of(out / "totals.csv"):
        rows = [int(line[f"rows_{part}"]) for part in ("read", "used", "rejected", "set_aside")]
        sums = [Decimal(line[f"amount_{part}"] or "0") for part in ("read", "used", "rejected", "set_aside")]
        if rows[0] != sum(rows[1:]) or sums[0] != sum(sums[1:]):
            verdict.say(f"totals do not tie out: {line}")
        read[line["file"]] += rows[0]
        expected = written[line["file"]].used.get(line["currency"]) if line["file"] in written else None
        if expected is not None and sums[1] != Decimal(money(expected, line["currency"])):
            verdict.say(
                f"totals of {line['file']} {line['currency']}: used {sums[1]} not {money(expected, line['currency'])}"
            )
    for file, told in written.items():
        if read[file] != told.rows:
            verdict.say(f"totals of {file}: read {read[file]} rows not {told.rows}")


def _rejects(out: Path, written: dict[str, Written], verdict: Verdict) -> None:
    lines = {(line["file"], int(line["row"] or 0)) for line in rows_of(out / "rejects.csv")}
    expected = {(file, number) for file, told in written.items() for number in told.rejected}
    for file, number in sorted(expected - lines):
        verdict.say(f"not rejected: {file} line {number}")
    for file, number in sorted(lines - expected):
        if file in written:
            verdict.say(f"rejected without cause: {file} line {number}")
