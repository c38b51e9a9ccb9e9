"""The geometric sum and its slope against payments added one by one in high precision, also where growth all but vanishes."""

from __future__ import annotations

from decimal import Decimal, localcontext

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds.compound import Compounded, solve, value


def annuity(count: int, first_time: float = 0.4, equal: float = 2.5) -> Compounded:
    one = np.ones(1)
    none = np.zeros(0, np.int64)
    return Compounded(
        equal * one, first_time * one, equal * one, count * one, 100 * one, (first_time + count) * one, none, none.astype(float),
        none.astype(float), 0 * one, np.zeros(1, np.bool_),
    )  # fmt: skip


def by_hand(count: int, percent: Decimal) -> tuple[Decimal, Decimal]:
    """Value and slope of the same flows in fifty digits, half-yearly."""
    growth = 1 + percent / 200
    times = [Decimal("0.4") + n for n in range(count + 1)]
    amounts = [Decimal("2.5")] * count + [Decimal("102.5")]
    total = sum((a * growth**-t for a, t in zip(amounts, times, strict=True)), Decimal(0))
    slope = sum((-a * t * growth ** (-t - 1) / 2 for a, t in zip(amounts, times, strict=True)), Decimal(0))
    return total, slope


@pytest.mark.parametrize("count", [0, 1, 2, 59, 119, 400])
@pytest.mark.parametrize("percent", ["0", "1e-13", "1e-9", "-1e-9", "1e-6", "0.001", "0.01", "0.1", "-0.75", "3", "14", "-20", "250"])
def test_every_digit_near_zero_and_far_from_it(count, percent):
    with localcontext() as context:
        context.prec = 50
        expected, slope = by_hand(count, Decimal(percent))
    found = value(annuity(count), np.array([2.0]), np.array([float(percent) / 100]))
    assert found[0][0] == pytest.approx(float(expected), rel=2e-13)
    assert found[1][0] == pytest.approx(float(slope), rel=2e-12)


@given(st.integers(0, 500), st.floats(-0.9, 60), st.floats(0.001, 1))
def test_the_yield_is_found_from_anywhere(count, yields, first_time):
    flows = annuity(count, first_time)
    price, _ = value(flows, np.array([2.0]), np.array([yields]))
    found = solve(flows, np.array([2.0]), price)
    back, _ = value(flows, np.array([2.0]), found)
    assert back[0] == pytest.approx(price[0], rel=1e-12)


def test_no_price_no_yield():
    for price in (0.0, -5.0, np.nan, np.inf):
        with np.errstate(all="ignore"):
            assert np.isnan(solve(annuity(5), np.array([2.0]), np.array([price])))[0]
