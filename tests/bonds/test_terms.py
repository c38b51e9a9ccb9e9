"""Values that change over time: the one in force is the last that began."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds.terms import in_force, last_of_month
from tests.bonds.made import days


@given(
    st.lists(st.tuples(st.integers(0, 3), st.integers(-40, 40), st.integers(0, 9)), max_size=12),
    st.lists(st.tuples(st.integers(0, 3), st.integers(-50, 50)), max_size=12),
)
def test_the_last_that_began(steps, asked):
    """Against a plain loop: of a bond's steps the last `from` on or before the day, else what held before."""
    steps = sorted({(bond, day): value for bond, day, value in steps}.items())
    offsets = np.searchsorted([bond for (bond, _day), _value in steps], np.arange(5))
    starts = np.array([day for (_bond, day), _value in steps], "datetime64[D]")
    values = np.array([value for _place, value in steps], np.int64)
    rows = np.array([bond for bond, _day in asked], np.int64)
    dates = np.array([day for _bond, day in asked], "datetime64[D]")
    found = in_force(offsets, starts, values, rows, dates, np.full(len(rows), -7))
    expected = [
        next((value for (bond, begins), value in reversed(steps) if bond == row and begins <= day), -7) for row, day in asked
    ]
    assert found.tolist() == expected


def test_last_of_month():
    found = last_of_month(days("2024-02-29", "2023-02-28", "2024-02-28", "2024-12-31", "2024-04-30", "2024-05-30"))
    assert found.tolist() == [True, True, False, True, True, False]
