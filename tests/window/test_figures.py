"""Amounts and days as texts."""

from __future__ import annotations

import datetime

import numpy as np
import pytest

from reconciler.records import MISSING
from reconciler.window import figures


@pytest.mark.parametrize(
    ("minor", "digits", "signed", "text"),
    [
        (-506792808, 2, False, "−5,067,928.08"),
        (120400, 2, True, "+1,204.00"),
        (1204, 0, True, "+1,204"),
        (-5, 2, False, "−0.05"),
        (0, 2, True, "0.00"),
        (1234567, 3, False, "1,234.567"),
        (MISSING, 2, True, ""),
        (10**15 + 1, 2, False, "10,000,000,000,000.01"),
    ],
)
def test_amount(minor: int, digits: int, signed: bool, text: str) -> None:
    assert figures.amount(minor, digits, signed) == text


@pytest.mark.parametrize(
    ("minor", "digits", "text"), [(-506792808, 2, "-5067928.08"), (1204, 0, "1204"), (-5, 3, "-0.005"), (MISSING, 2, "")]
)
def test_plain_amount_is_what_spreadsheets_read(minor: int, digits: int, text: str) -> None:
    assert figures.plain_amount(minor, digits) == text


@pytest.mark.parametrize(("minor", "text"), [(500000000, "5,000,000"), (500000050, "5,000,000.50"), (MISSING, "")])
def test_face_drops_empty_decimals(minor: int, text: str) -> None:
    assert figures.face(minor, 2) == text


@pytest.mark.parametrize(
    ("value", "places", "text"), [(4_625_000_000, 9, "4.625"), (5_000_000_000, 9, "5"), (-250, 3, "−0.25"), (MISSING, 9, "")]
)
def test_decimal(value: int, places: int, text: str) -> None:
    assert figures.decimal(value, places) == text


def test_days() -> None:
    day = np.datetime64("2026-03-30")
    assert figures.date(day, 2026) == "30 Mar"
    assert figures.date(day, 2025) == "30 Mar 2026"
    assert figures.date(np.datetime64("NaT")) == ""
    assert figures.long_date(datetime.date(2026, 3, 31)) == "31 March 2026"
    assert figures.weekday(datetime.date(2026, 3, 31)) == "Tuesday"
    assert figures.iso(day) == "2026-03-30"
    assert figures.iso(np.datetime64("NaT")) == ""


@pytest.mark.parametrize(
    ("text", "signed", "shown"),
    [("-1082.34", False, "−1,082.34"), ("1711205.48", True, "+1,711,205.48"), ("0.00", True, "0.00"), ("85-10", False, "85-10"),
     ("buy", True, "buy"), ("", True, ""), ("1440000", False, "1,440,000")],
)  # fmt: skip
def test_grouped_changes_numbers_only(text: str, signed: bool, shown: str) -> None:
    assert figures.grouped(text, signed) == shown


def test_counts() -> None:
    assert figures.count(1, "break") == "1 break"
    assert figures.count(1234, "break") == "1,234 breaks"
    assert figures.count(2, "currency", "currencies") == "2 currencies"
