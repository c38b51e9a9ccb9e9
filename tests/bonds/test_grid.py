"""The coupon grid against python-dateutil's month arithmetic."""

from __future__ import annotations

from datetime import date

import numpy as np
from dateutil.relativedelta import relativedelta
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds.grid import Grid, grid_after, grid_before
from tests.bonds.made import days, made, row

DATES = st.dates(date(1901, 1, 1), date(2190, 12, 31))


@given(anchor=st.dates(date(1975, 1, 1), date(2095, 12, 31)), day=DATES, frequency=st.sampled_from([1, 2, 4, 12]), month_end=st.booleans())
def test_every_date_counts_from_the_anchor(anchor, day, frequency, month_end):
    told = row(maturity=anchor.isoformat(), frequency=str(frequency), accrual_start="", end_of_month="yes" if month_end else "no")
    terms, one = made(told), np.zeros(1, np.int64)
    last = (anchor + relativedelta(days=1)).day == 1
    step = 12 // frequency

    def on_grid(number: int) -> date:
        # day 31 is clamped to the month's last by relativedelta
        return anchor + relativedelta(months=-number * step, **({"day": 31} if month_end and last else {}))

    at = days(day.isoformat())
    number = int(Grid(terms, one).number_at_or_before(at)[0])
    assert on_grid(number) <= day < on_grid(number - 1)
    assert Grid(terms, one).at(np.array([number])).tolist() == [on_grid(number)]
    assert grid_after(terms, one, at).tolist() == [on_grid(number - 1)]
    assert grid_before(terms, one, at).tolist() == [on_grid(number if on_grid(number) < day else number + 1)]


def test_bonds_without_coupons_have_a_yearly_grid():
    terms = made({"kind": "zero", "maturity": "2030-02-28"})
    assert Grid(terms, np.zeros(3, np.int64)).at(np.array([0, 1, 2])).tolist() == days("2030-02-28", "2029-02-28", "2028-02-28").tolist()
