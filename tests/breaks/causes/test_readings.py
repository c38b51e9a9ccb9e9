"""Prices read wrongly. Check pairs: formats met in practice (common practice, no source; 99-16 = 99.5 from CME's page on quoting)."""

from __future__ import annotations

from decimal import Decimal

import numpy as np
import pytest

from reconciler.breaks.causes import inputs, readings
from reconciler.money import MISSING

ONE = 10**12


def _read(name: str, price: str) -> set[str]:
    right = np.array([int(Decimal(price) * ONE)], np.int64)
    found = [int(r.read(right)[0]) for r in readings.READINGS if r.name == name]
    return {format((Decimal(f) / ONE).normalize(), "f") for f in found if f != MISSING}


@pytest.mark.parametrize(
    ("name", "right", "told"),
    [
        ("32nds read as decimals", "99.5", "99.16"), ("32nds read as decimals", "99.515625", "99.165"),
        ("eighths of a 32nd lost", "99.515625", "99.5"), ("eighths of a 32nd lost", "99.5078125", "99.5"),
        ("third digit misread", "99.5078125", "99.50625"), ("decimals read as 32nds", "99.16", "99.5"),
        ("price rounded first", "99.123456", "99.12"), ("price cut first", "99.129", "99.12"),
        ("price per another unit", "99.5", "9.95"),
    ],
)  # fmt: skip
def test_readings(name: str, right: str, told: str) -> None:
    assert told in _read(name, right)


def test_no_reading_gives_the_right_price() -> None:
    prices = np.arange(80, 120, 0.0078125)
    exact = (prices * 256).astype(np.int64) * (ONE // 256)
    for reading in readings.READINGS:
        assert not (reading.read(exact) == exact).any()


@pytest.mark.parametrize(
    ("right", "told", "cause"),
    [("98.75", "98.57", "two digits exchanged"), ("98.75", "9.875", "decimal point moved"), ("98.125", "98.15", "digit left out"),
     ("98.125", "98.1225", "digit typed twice"), ("98.75", "98.76", "one digit mistyped")],
)  # fmt: skip
def test_written_prices(right: str, told: str, cause: str) -> None:
    names = {found.name for found, _words, _weight in inputs.written(Decimal(right), Decimal(told), "price")}
    assert cause in names
