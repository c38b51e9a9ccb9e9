"""Terms from the words of bonds.csv, so that a test reads like the file a desk would write."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from decimal import Decimal
from typing import Any

import numpy as np

from reconciler.bonds import calendars
from reconciler.bonds.resolving import calendar_codes, resolve
from reconciler.bonds.terms import Terms
from reconciler.bonds.told import Fault
from reconciler.money import MISSING

TEXTS = (
    "market", "currency", "kind", "day_count", "end_of_month", "payment_adjustment", "accrual_adjustment", "calendar",
    "ex_dividend", "record", "quote", "accrued_rounding",
)  # fmt: skip
DATES = ("accrual_start", "first_coupon", "last_regular_coupon", "maturity")
NUMBERS = {"coupon_rate": ("coupon_rate_e9", 9), "redemption_price": ("redemption_price_e12", 12), "frequency": ("frequency", 0),
           "settlement_days": ("settlement_days", 0)}  # fmt: skip

Step = tuple[int, str, str]
"""Bond row, from, value."""


def days(*texts: str) -> np.ndarray:
    """Dates of ISO texts; NaT for ""."""
    return np.array([text or "NaT" for text in texts], "datetime64[D]")


def _steps(steps: Sequence[Step], places: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    rows = np.array([row for row, _day, _value in steps], np.int64)
    values = np.array([int(Decimal(value).scaleb(places)) for _row, _day, value in steps], np.int64)
    return rows, days(*(day for _row, day, _value in steps)), values


def resolved(
    rows: Sequence[Mapping[str, str]],
    rates: Sequence[Step] = (),
    factors: Sequence[Step] = (),
    closings: Sequence[tuple[str, date, bool]] = (),
) -> tuple[Terms, list[Fault]]:
    """The terms of some rows of bonds.csv and what is wrong with them; a row that tells no currency is in USD."""
    known = {*TEXTS, *DATES, *NUMBERS}
    assert all(set(row) <= known for row in rows)
    told: dict[str, Any] = {}
    for name in TEXTS:
        words = [row.get(name, "USD" if name == "currency" and "market" not in row else "") for row in rows]
        distinct = sorted(set(words) - {""})
        told[name] = (np.array([distinct.index(word) if word else -1 for word in words], np.int64), distinct)
    for name in DATES:
        told[name] = days(*(row.get(name, "") for row in rows))
    for name, (column, places) in NUMBERS.items():
        texts = [row.get(name, "") for row in rows]
        told[column] = np.array([int(Decimal(text).scaleb(places)) if text else MISSING for text in texts], np.int64)
    loaded, unknown = calendars.load(calendar_codes(told), closings)
    return resolve(told, len(rows), loaded, unknown, _steps(rates, 9), _steps(factors, 12))


def made(*rows: Mapping[str, str], **steps: Any) -> Terms:
    """Terms that must be sound."""
    terms, faults = resolved(rows, **steps)
    assert not faults, faults
    return terms


def row(**facts: str) -> dict[str, str]:
    """A row of bonds.csv: a half-yearly bond of 5 % under Act/Act ICMA to 2030-06-15 unless told otherwise."""
    plain = {"kind": "fixed", "coupon_rate": "5", "frequency": "2", "day_count": "Act/Act ICMA", "accrual_start": "2020-06-15",
             "maturity": "2030-06-15"}  # fmt: skip
    return {name: text for name, text in {**plain, **facts}.items() if text}


def zero(**facts: str) -> dict[str, str]:
    """A row of bonds.csv for a bond without coupons."""
    return {"kind": "zero", "day_count": "Act/360", "maturity": "2030-06-15", **facts}
