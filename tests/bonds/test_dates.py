"""Civil dates against Python's own calendar."""

from __future__ import annotations

import calendar
from datetime import date

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from reconciler.bonds.dates import civil, last_of_february, leap, leap_days_through, year_of


@given(st.lists(st.dates(date(1, 1, 1), date(9999, 12, 31)), min_size=1, max_size=20))
def test_civil_equals_python(days):
    years, months, numbers = civil(np.array(days, "datetime64[D]"))
    assert [(int(y), int(m), int(d)) for y, m, d in zip(years, months, numbers, strict=True)] == [
        (day.year, day.month, day.day) for day in days
    ]


def test_every_day_of_the_table():
    every = np.arange("1900-01-01", "2200-01-01", dtype="datetime64[D]")
    years, months, numbers = civil(every)
    expected = [(day.year, day.month, day.day) for day in every.astype(object)]
    assert list(zip(years.tolist(), months.tolist(), numbers.tolist(), strict=True)) == expected
    assert year_of(every).tolist() == [day[0] for day in expected]
    assert last_of_february(years, months, numbers).tolist() == [
        m == 2 and d == (29 if calendar.isleap(y) else 28) for y, m, d in expected
    ]


def test_leap_years_and_days():
    years = np.arange(1800, 2401)
    assert leap(years).tolist() == [calendar.isleap(year) for year in years.tolist()]
    ends = np.array([f"{year}-12-31" for year in years], "datetime64[D]")
    grown = np.diff(leap_days_through(ends))
    assert grown.tolist() == [int(calendar.isleap(year)) for year in years[1:].tolist()]
    around = np.array(["2024-02-28", "2024-02-29", "2024-03-01", "2100-02-28", "2100-03-01"], "datetime64[D]")
    assert np.diff(leap_days_through(around)).tolist() == [1, 0, 18, 0]


def test_empty_in_empty_out():
    assert [len(part) for part in civil(np.empty(0, "datetime64[D]"))] == [0, 0, 0]
