"""When does this bond pay, how much, and why on that day? One bond's coupons as a list that a person can read.

Terms come from bonds.csv; rates.csv, factors.csv and closings.csv beside it are used where they are there, since coupons may depend
on them. Every coupon is a line: its period, its own and its payment date with the reason for a shift, days, amount on
the face, ex-dividend and record date. What is paid back, at maturity or on the way, follows. Without an accrual start and
a first coupon nothing says where a schedule begins: it is listed from 1970, where the calendars begin.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler import texts
from reconciler.bonds import accrual, schedules
from reconciler.bonds.calendars import FIRST, LAST
from reconciler.bonds.terms import Terms
from reconciler.expected.terms import bond_rows, resolve_terms
from reconciler.intake import cells, folder, own
from reconciler.intake.reading import Unreadable
from reconciler.money import MISSING, to_text
from reconciler.problems import KnownError
from reconciler.procedures.bond_coupons import coupon_table
from reconciler.procedures.reasons import why_moved
from reconciler.records import CLOSINGS, FACTORS, RATES, Table, Words, table

REDEMPTIONS: dict[str, str] = {
    # what one bond pays back, a line a date; amount_minor on the face asked for
    "date": "date", "payment_date": "date", "why": "text", "record_date": "date", "amount_minor": "int64",
}  # fmt: skip


@dataclass(frozen=True)
class Schedule:
    """One bond's payments on a face in minor units.

    `coupons` has the columns of COUPONS and the days interest is `counted_from` and `counted_to` (adjusted where the terms adjust);
    `redemptions` has those of REDEMPTIONS.
    """

    bond: str
    description: str
    currency: str
    digits: int
    face_minor: int
    coupons: Table
    redemptions: Table


def read(bond: str, path: Path, face: str = "") -> Schedule:
    """The schedule of the bond that bonds.csv at `path` calls `bond`, on `face` (major units as text; 100 when blank).

    Raises KnownError when a file cannot be read, bonds.csv does not have the bond, its terms are not sound or the face is no amount.
    """
    bonds, faults = folder.read_bonds(path)
    row = int(bond_rows(Words.of([bond.strip()]), bonds)[0])
    if row < 0:
        raise KnownError(f"{path.name} has no bond {bond}; check the identifier.")
    rates = _beside(path, "rates.csv", own.rates, table(RATES))
    factors = _beside(path, "factors.csv", own.factors, table(FACTORS))
    closings = _beside(path, "closings.csv", own.closings, table(CLOSINGS))
    terms, unsound = resolve_terms(bonds, rates, factors, closings)
    if not bool(terms.sound[row]):
        # a row that intake refused leaves a bond without a line: any of the file's faults may be the reason
        line = int(bonds["line"][row])
        raise KnownError(*([fault for fault in unsound if fault.line == line] if line else faults))
    digits = int(terms.currency_digits[row])
    face_minor = _face(face, digits, terms.currency[row])
    coupons = coupon_table(terms, row, face_minor)
    counted = schedules.period_ending(terms, np.full(len(coupons), row), coupons["end"])
    coupons = coupons.with_columns(counted_from=counted.accrual_start, counted_to=counted.accrual_end)
    return Schedule(
        bond.strip(), bonds["description"].text(row), terms.currency[row], digits, face_minor, coupons,
        redemption_table(terms, row, face_minor),
    )  # fmt: skip


def _beside(path: Path, name: str, reader: Callable[[Path], tuple[Table, Any]], otherwise: Table) -> Table:
    file = path.parent / name
    if not file.exists():
        return otherwise
    try:
        return reader(file)[0]
    except Unreadable as failure:
        if failure.problem.code == "header-only":
            return otherwise
        raise KnownError(failure.problem) from None


def _face(text: str, digits: int, currency: str) -> int:
    if not text.strip():
        return int(100 * 10**digits)
    found = cells.amounts(pa.array([text]), np.array([digits]))
    if found.values[0] == MISSING or found.values[0] < 0:
        raise KnownError(f"'{text}' is not a face in {currency}; write an amount such as 1000000.")
    return int(found.values[0])


def redemption_table(terms: Terms, bond_row: int, face_minor: int) -> Table:
    """What one bond pays back on a face: drops of its factor on the way, the rest at maturity."""
    rows, face = np.array([bond_row]), np.array([face_minor], np.int64)
    drops = accrual.partial_redemptions(terms, rows, FIRST, LAST)
    maturity = terms.maturity[rows]
    dates = np.concatenate([drops.unadjusted, maturity])
    each = np.full(len(dates), bond_row)
    paid = schedules.payment_dates(terms, each, dates)
    partial = accrual.partial_amounts(terms, drops.bond_row, drops.drop_e12, np.full(len(drops), face_minor, np.int64))
    return table(
        REDEMPTIONS, date=dates, payment_date=paid,
        why=Words.of([why_moved(terms, bond_row, one, other) for one, other in zip(dates, paid, strict=True)]),
        record_date=schedules.record_dates(terms, each, dates),
        amount_minor=np.concatenate([partial, accrual.redemption_amounts(terms, rows, face)]),
    )  # fmt: skip


HEADINGS = (
    "period_start", "period_end", "coupon_date", "payment_date", "days", "amount", "ex_dividend", "record", "reason",
)  # fmt: skip


def lines(schedule: Schedule) -> list[str]:
    """The schedule as lines of text: a title, the coupons in columns, what is paid back."""
    coupons, back = schedule.coupons, schedule.redemptions
    title = f"{schedule.bond} {schedule.description}".strip()
    out = [f"{title}, on a face of {schedule.currency} {to_text([schedule.face_minor], schedule.digits)[0]}"]
    days = np.where(coupons["days"] == MISSING, "-", coupons["days"].astype(str))
    columns = [
        _dates(coupons["counted_from"]), _dates(coupons["counted_to"]), _dates(coupons["end"]), _dates(coupons["payment_date"]),
        days.tolist(), _amounts(coupons["amount_minor"], schedule.digits),
        _dates(coupons["ex_date"]), _dates(coupons["record_date"]), coupons["why"].to_list(),
    ]  # fmt: skip
    out += _aligned(HEADINGS, columns) if len(coupons) else ["pays no coupons"]
    paid = _amounts(back["amount_minor"], schedule.digits)
    columns = [_dates(back["date"]), _dates(back["payment_date"]), paid, _dates(back["record_date"]), back["why"].to_list()]
    return [*out, "", *_aligned(("redemption_date", "payment_date", "amount", "record", "reason"), columns)]


def _dates(column: np.ndarray) -> list[str]:
    return [text or "-" for text in texts.dates(column).to_pylist()]


def _amounts(minor: np.ndarray, digits: int) -> list[str]:
    """Amounts as text; a coupon whose rate is not known yet says so."""
    return [text or "not fixed" for text in to_text(minor, digits)]


def _aligned(headings: Sequence[str], columns: Sequence[Sequence[str]]) -> list[str]:
    width = [max(len(text) for text in (heading, *column)) for heading, column in zip(headings, columns, strict=True)]
    rows = [headings, *zip(*columns, strict=True)]
    right = {"days", "amount"}
    return [
        "  ".join(
            text.rjust(size) if heading in right else text.ljust(size)
            for heading, text, size in zip(headings, row, width, strict=True)
        ).rstrip()
        for row in rows
    ]
