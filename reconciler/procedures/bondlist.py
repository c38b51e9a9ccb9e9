"""The auditor asks by which terms a bond is reckoned: the list of bonds shows them as they are used, blanks filled from the market.

Everything is taken from the resolved terms; only the identifier, the description and the market's code are as told. A bond
whose terms are not sound keeps its line and says so.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.bonds.calendars import ADJUSTMENTS
from reconciler.bonds.daycounts import DAY_COUNTS
from reconciler.bonds.terms import KINDS, QUOTES
from reconciler.records import MISSING, Table, Words

BONDLIST: dict[str, str] = {
    # one bond a row, in the order of the morning's bonds
    "bond": "text", "description": "text", "market": "text", "currency": "text", "kind": "text", "coupon_rate_e9": "int64",
    "frequency": "int64", "day_count": "text", "accrual_start": "date", "first_coupon": "date", "maturity": "date",
    "payment_adjustment": "text", "calendar": "text", "settlement_days": "int64", "ex_dividend": "text", "record": "text",
    "quote": "text", "terms": "text",
}  # fmt: skip


def bondlist(day: Any) -> Table:
    """The bonds of a day (procedures.morning.Day) with the terms they are reckoned by."""
    bonds, terms = day.source.bonds, day.terms
    pays = terms.frequency > 0
    return Table({
        "bond": bonds["bond"],
        "description": bonds["description"],
        "market": bonds["market"],
        "currency": Words.of(terms.currency),
        "kind": _named(terms.kind, KINDS),
        "coupon_rate_e9": np.where(pays, terms.rate_e9, MISSING),
        "frequency": np.where(pays, terms.frequency, MISSING),
        "day_count": _named(terms.day_count, [one.name for one in DAY_COUNTS]),
        "accrual_start": terms.accrual_start,
        "first_coupon": terms.first_coupon,
        "maturity": terms.maturity,
        "payment_adjustment": _named(terms.payment_adjustment, ADJUSTMENTS),
        "calendar": _named(terms.calendar, terms.calendars.codes),
        "settlement_days": terms.settlement_days,
        "ex_dividend": _spans(terms.ex_days, terms.ex_unit),
        "record": _spans(terms.record_days, terms.record_unit),
        "quote": _named(terms.quote, QUOTES),
        "terms": _named(np.where(terms.sound, 0, 1), ("sound", "not sound")),
    })  # fmt: skip


def _named(numbers: np.ndarray, names: Any) -> Words:
    """Numbers as the words they stand for; below zero, or a blank word, is blank."""
    blank = np.array([not name for name in names] + [True])
    codes = np.where(blank[numbers], -1, numbers).astype(np.int32)
    return Words(codes, pa.array(list(names), pa.string()))


def _spans(days: np.ndarray, unit: np.ndarray) -> Words:
    """Days before the coupon as bonds.csv writes them: 6b, 10c; blank where there is no such day."""
    told = [] if not len(days) else sorted(set(zip(days.tolist(), unit.tolist(), strict=True)))
    texts = {pair: "" if pair[0] == MISSING else f"{pair[0]}{'c' if pair[1] else 'b'}" for pair in told}
    return Words.of([texts[pair] for pair in zip(days.tolist(), unit.tolist(), strict=True)])
