"""Day counts against figures that others published; the source of each figure stands in its row."""

from __future__ import annotations

import csv
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from reconciler.bonds.daycounts import NUMBERS, Period, accrued_days, fraction

HERE = Path(__file__).parent
ONE = np.ones(1, np.int64)
NAMES = {
    "30/360 bond basis (ISDA 2006 4.16(f))": "30/360",
    "30/360 US (end-of-February rules)": "30/360 US",
    "30E/360 (ISDA 2006 4.16(g))": "30E/360",
    "30E/360 ISDA (ISDA 2006 4.16(h))": "30E/360 ISDA",
}


def rows(name: str) -> list[dict[str, str]]:
    with (HERE / name).open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


def day(text: str) -> Any:
    return np.array([text or "NaT"], "datetime64[D]")


def period(frequency: int, start: str, end: str, maturity: str = "", month_end: bool = False, **parts: int) -> Period:
    columns = {"whole": 0, "first_days": 0, "first_length": 1, "last_days": 0, "last_length": 1} | parts
    return Period(
        frequency=np.array([frequency]),
        start=day(start),
        end=day(end),
        maturity=day(maturity),
        month_end=np.array([month_end]),
        **{name: np.array([value]) for name, value in columns.items()},
    )


def test_the_worksheet_is_complete():
    """120 pairs of dates in four conventions, each with its source."""
    table = rows("daycount_30_360.csv")
    assert len(table) == 120 and {row["convention"] for row in table} == set(NAMES)
    assert all(row["source"] for row in table + rows("daycount_act_act.csv"))


@pytest.mark.parametrize(
    "row", rows("daycount_30_360.csv"), ids=lambda row: f"{NAMES[row['convention']]} {row['start']}"
)
def test_thirty_days_a_month(row):
    """In the worksheet's end-of-February pairs the bond pays on month ends."""
    number = np.array([NUMBERS[NAMES[row["convention"]]]], np.int8)
    lies_in = period(2, row["start"], row["end"], row["maturity"], month_end=True)
    assert accrued_days(number, day(row["start"]), day(row["end"]), lies_in).tolist() == [int(row["days"])]
    above, below = fraction(number, day(row["start"]), day(row["end"]), lies_in)
    assert Fraction(int(above[0]), int(below[0])) == Fraction(int(row["days"]), 360)


# How each case of the memorandum lies in its regular periods: payments a year and the parts, worked out by hand.
# "long first": 15 August 2002 to 15 January 2003 is 153 of the 184 days from 15 July, then one whole half-year.
PARTS = {
    "regular, one half-year": (2, {"first_days": 182, "first_length": 182}),
    "short first period": (1, {"first_days": 150, "first_length": 365}),
    "regular annual after it": (1, {"first_days": 366, "first_length": 366}),
    "long first period, semi-annual": (2, {"first_days": 153, "first_length": 184, "whole": 1}),
    "regular half-year after it": (2, {"first_days": 184, "first_length": 184}),
    "penultimate, end of month": (2, {"first_days": 184, "first_length": 184}),
    "short final period": (2, {"first_days": 152, "first_length": 182}),
}


@pytest.mark.parametrize("row", rows("daycount_act_act.csv"), ids=lambda row: row["case"])
def test_actual_actual(row):
    start, end = day(row["start"]), day(row["end"])
    above, below = fraction(np.array([NUMBERS["Act/Act ISDA"]]), start, end)
    assert above[0] / below[0] == pytest.approx(float(row["act_act_isda"]), abs=6e-12)
    frequency, parts = PARTS[row["case"]]
    lies_in = period(frequency, row["start"], row["end"], **parts)
    above, below = fraction(np.array([NUMBERS["Act/Act ICMA"]]), start, end, lies_in)
    assert above[0] / below[0] == pytest.approx(float(row["act_act_icma"]), abs=6e-12)


# Canadian rule: a half-year of 184 days at c = 100 % shows days/365 up to 182 days, then 1/2 - days left/365. Source:
# Canadian dealers' rule as market pages state it ("days over 365 if under half a year, else half less days left").
@pytest.mark.parametrize(
    ("days", "length", "expected"),
    [
        (1, 184, Fraction(1, 365)),
        (182, 184, Fraction(182, 365)),
        (183, 184, Fraction(1, 2) - Fraction(1, 365)),
        (184, 184, Fraction(1, 2)),
        (180, 181, Fraction(180, 365)),
        (181, 181, Fraction(1, 2)),
    ],
)
def test_canadian_half_year(days, length, expected):
    start = day("2026-03-01")
    lies_in = period(2, "2026-03-01", "2026-09-01", first_days=days, first_length=length)
    above, below = fraction(np.array([NUMBERS["Act/365 Canada"]]), start, start + days, lies_in)
    assert Fraction(int(above[0]), int(below[0])) == expected


# Act/365L, ICMA rule 251.1(i), from memory: payments once a year, 366 if the period contains 29 February; more often,
# 366 if it ends in a leap year.
@pytest.mark.parametrize(
    ("frequency", "start", "end", "basis"),
    [
        (1, "2023-03-01", "2024-03-01", 366),
        (1, "2024-02-29", "2025-02-28", 365),
        (1, "2023-02-28", "2024-02-29", 366),
        (1, "2023-02-28", "2024-02-28", 365),
        (1, "2099-03-01", "2100-03-01", 365),
        (2, "2023-07-15", "2024-01-15", 366),
        (2, "2024-07-15", "2025-01-15", 365),
        (4, "2024-06-30", "2024-09-30", 366),
    ],
)
def test_leap_basis(frequency, start, end, basis):
    lies_in = period(frequency, start, end)
    above, below = fraction(np.array([NUMBERS["Act/365L"]]), day(start), day(start) + 45, lies_in)
    assert (above[0], below[0]) == (45, basis)
