"""Day counts: laws that hold for every one of them, and random dates against QuantLib."""

from __future__ import annotations

from datetime import date
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
import QuantLib
from hypothesis import given, settings
from hypothesis import strategies as st

from reconciler.bonds.calendars import load
from reconciler.bonds.daycounts import DAY_COUNTS, EVEN, NUMBERS, Period, accrued_days, fraction

MISSING = np.iinfo(np.int64).min
CALENDARS = load(["BR"])[0]
BRAZIL = np.array([CALENDARS.number("BR")])
ALL = [entry.name for entry in DAY_COUNTS]

# The words of this project's contract.
CONTRACT = [
    "Act/Act ICMA", "Act/Act ISDA", "Act/360", "Act/365F", "Act/365L", "30/360", "30/360 US", "30E/360", "30E/360 ISDA",
    "Act/365 Canada", "NL/365", "Bus/252",
]  # fmt: skip


def half_year(start: Any, end: Any) -> Period:
    """Half-years that begin at `start` with as many days as fit: 184, at least the span."""
    size = (end - start).astype(np.int64)
    length = np.maximum(size, 184)
    zero, one = np.zeros(1, np.int64), np.ones(1, np.int64)
    never = np.array(["NaT"], "datetime64[D]")
    return Period(np.array([2]), start, start + length, zero, size, length, zero, one, never, np.array([True]))


def days_and_ratio(name: str, start: Any, end: Any, period: Period | None = None) -> tuple[list[int], list[Fraction]]:
    number = np.full(len(start), NUMBERS[name], np.int8)
    period = period or half_year(start, end)
    above, below = fraction(number, start, end, period, CALENDARS, BRAZIL)
    days = accrued_days(number, start, end, period, CALENDARS, BRAZIL)
    return days.tolist(), [Fraction(a, b) for a, b in zip(above.tolist(), below.tolist(), strict=True)]


def array(*days: date) -> Any:
    return np.array(days, "datetime64[D]")


def test_the_registry():
    assert ALL == CONTRACT
    assert len(set(ALL)) == len(ALL) == len(NUMBERS) == len(EVEN)
    assert all(entry.source for entry in DAY_COUNTS)
    assert [entry.name for entry in DAY_COUNTS if entry.even] == [
        "Act/Act ICMA", "30/360", "30/360 US", "30E/360", "30E/360 ISDA", "Act/365 Canada",
    ]  # fmt: skip


DATES = st.dates(date(1971, 1, 1), date(2099, 1, 1))


@pytest.mark.parametrize("name", ALL)
@settings(max_examples=100, deadline=None)
@given(start=DATES, span=st.integers(0, 184))
def test_laws(name, start, span):
    """The same day is nothing, time never runs back, a day more is never less, half a year is about a half."""
    first = array(start)
    days, ratio = days_and_ratio(name, first, first)
    assert (days, ratio) == ([0], [0])
    at = first + np.arange(span + 1)
    days, ratio = days_and_ratio(name, np.broadcast_to(first, at.shape), at)
    assert min(days) == 0 and min(ratio) == 0
    if name not in ("30E/360 ISDA", "30/360 US", "Act/365 Canada"):
        # The end of February is stretched to the 30th, so that 1 March can show fewer days than it; Canada changes
        # rules.
        assert days == sorted(days) and ratio == sorted(ratio)
    # Business days come in lumps: half a year in Brazil has 118 to 131 of them.
    loose = Fraction(1, 25) if name == "Bus/252" else Fraction(1, 60)
    assert max(days) <= span + 2 and abs(ratio[-1] - Fraction(span, 365)) < loose


@pytest.mark.parametrize("name", ["30E/360 ISDA"])
def test_nothing_between_a_maturity_in_february_and_itself(name):
    end = array(date(2025, 2, 28))
    one = np.ones(1, np.int64)
    period = Period(one, end, end, one, one, one, one, one, end, np.array([True]))
    assert days_and_ratio(name, end, end, period) == ([0], [0])


@pytest.mark.parametrize("name", ALL)
def test_row_by_row_is_one_call(name):
    random = np.random.default_rng(5)
    start = np.datetime64("1990-01-01") + random.integers(0, 20_000, 60)
    end = start + random.integers(0, 184, 60)
    days, ratio = days_and_ratio(name, start, end)
    for row in range(60):
        one = slice(row, row + 1)
        assert days_and_ratio(name, start[one], end[one]) == (days[one], ratio[one])


def test_mixed_day_counts_are_each_their_own():
    random = np.random.default_rng(6)
    start = np.datetime64("1990-01-01") + random.integers(0, 20_000, 600)
    end = start + random.integers(0, 184, 600)
    which = random.integers(0, len(ALL), 600).astype(np.int8)
    period = half_year(start, end)
    above, below = fraction(which, start, end, period, CALENDARS, BRAZIL)
    days = accrued_days(which, start, end, period, CALENDARS, BRAZIL)
    for number, name in enumerate(ALL):
        mine = np.flatnonzero(which == number)
        alone_days, alone = days_and_ratio(name, start[mine], end[mine])
        assert days[mine].tolist() == alone_days
        assert [Fraction(a, b) for a, b in zip(above[mine].tolist(), below[mine].tolist(), strict=True)] == alone


@pytest.mark.parametrize("name", ALL)
def test_empty_and_unknown_dates(name):
    nothing = np.empty(0, "datetime64[D]")
    assert days_and_ratio(name, nothing, nothing) == ([], [])
    start = np.array(["2025-01-15", "NaT", "2025-01-15"], "datetime64[D]")
    end = np.array(["NaT", "2025-01-15", "2025-02-15"], "datetime64[D]")
    days, ratio = days_and_ratio(name, start, end)
    assert days[:2] == [MISSING] * 2 and days[2] > 0
    assert ratio[:2] == [MISSING] * 2 and ratio[2] > 0


@pytest.mark.parametrize("name", ["Act/Act ICMA", "Act/365 Canada", "Act/365L", "30/360 US", "30E/360 ISDA", "Bus/252"])
def test_what_a_convention_needs_must_be_given(name):
    with pytest.raises(ValueError, match="needs"):
        fraction(np.array([NUMBERS[name]]), array(date(2025, 1, 1)), array(date(2025, 2, 1)))


# --- random dates against QuantLib ---------------------------------------------------------------------------------

SIZE = 4_000


def quantlib_date(day: date) -> QuantLib.Date:
    return QuantLib.Date(day.day, day.month, day.year)


def random_spans(seed: int) -> tuple[Any, Any]:
    """Spans of up to three years, with many ends of months and of February among them."""
    random = np.random.default_rng(seed)
    start = np.datetime64("1980-01-01") + random.integers(0, 36_000, SIZE)
    end = start + random.integers(0, 1_100, SIZE)
    for dates in (start, end):
        month_ends = random.random(SIZE) < 0.3
        dates[month_ends] = (dates[month_ends].astype("datetime64[M]") + 1).astype("datetime64[D]") - 1
        february = random.random(SIZE) < 0.1
        years = dates[february].astype("datetime64[Y]").astype("datetime64[M]")
        dates[february] = (years + 2).astype("datetime64[D]") - 1
    return np.minimum(start, end), np.maximum(start, end)


THIRTY = QuantLib.Thirty360
REFERENCES = [
    ("Act/360", QuantLib.Actual360()),
    ("Act/365F", QuantLib.Actual365Fixed()),
    ("NL/365", QuantLib.Actual365Fixed(QuantLib.Actual365Fixed.NoLeap)),
    ("Act/Act ISDA", QuantLib.ActualActual(QuantLib.ActualActual.ISDA)),
    ("30/360", THIRTY(THIRTY.BondBasis)),
    ("30/360 US", THIRTY(THIRTY.USA)),
    ("30E/360", THIRTY(THIRTY.European)),
    ("30E/360 ISDA", THIRTY(THIRTY.ISDA)),
]


@pytest.mark.parametrize(("name", "reference"), REFERENCES, ids=[name for name, _ in REFERENCES])
def test_random_dates_against_quantlib(name, reference):
    """QuantLib's USA rule stretches every end of February, as ours does where the bond pays on month ends."""
    start, end = random_spans(len(name))
    days, ratio = days_and_ratio(name, start, end)
    for row, (first, last) in enumerate(zip(start.astype(object), end.astype(object), strict=True)):
        a, b = quantlib_date(first), quantlib_date(last)
        if name == "30E/360 ISDA" and first == last:
            continue  # QuantLib stretches only one end of a span of no days
        assert days[row] == reference.dayCount(a, b), (first, last)
        assert float(ratio[row]) == pytest.approx(reference.yearFraction(a, b), abs=1e-12), (first, last)


def test_maturity_in_february_against_quantlib():
    """30E/360 ISDA does not stretch an end of February that is the maturity."""
    start, end = random_spans(77)
    one = np.ones(1, np.int64)
    maturity = np.where(np.arange(SIZE) % 2 == 0, end, end + 365)
    period = Period(one, start, end, one, one, one, one, one, maturity, np.array([False]))
    days, _ = days_and_ratio("30E/360 ISDA", start, end, period)
    dates = zip(start.astype(object), end.astype(object), maturity.astype(object), strict=True)
    for row, (first, last, matures) in enumerate(dates):
        if first != last:
            expected = THIRTY(THIRTY.ISDA, quantlib_date(matures)).dayCount(quantlib_date(first), quantlib_date(last))
            assert days[row] == expected, (first, last, matures)


def test_without_month_ends_the_us_rule_is_the_bond_basis():
    start, end = random_spans(78)
    one = np.ones(1, np.int64)
    period = Period(one, start, end, one, one, one, one, one, end, np.array([False]))
    assert days_and_ratio("30/360 US", start, end, period) == days_and_ratio("30/360", start, end)


def regular_half_years(seed: int) -> tuple[Any, Any, Any, Any]:
    """Start and end of half-years on a day up to the 28th, and a span inside each."""
    random = np.random.default_rng(seed)
    months = np.datetime64("1990-01") + random.integers(0, 600, SIZE)
    day = random.integers(0, 28, SIZE)
    start = months.astype("datetime64[D]") + day
    end = (months + 6).astype("datetime64[D]") + day
    last = start + random.integers(0, (end - start).astype(np.int64) + 1)
    return start, end, start.copy(), last


@pytest.mark.parametrize("name", ["Act/Act ICMA", "Act/365 Canada"])
def test_half_years_against_quantlib(name):
    """QuantLib's Canadian rule changes over at 365 / 2 cut to 182 days, ours at 182.5 (so 182 days differ), and it
    shows 181/365 for a whole half-year of 181 days, where the coupon is always exactly half."""
    if name == "Act/Act ICMA":
        reference: Any = QuantLib.ActualActual(QuantLib.ActualActual.ISMA)
    else:
        reference = QuantLib.Actual365Fixed(QuantLib.Actual365Fixed.Canadian)
    begin, finish, start, end = regular_half_years(9)
    length = (finish - begin).astype(np.int64)
    zero, one = np.zeros(1, np.int64), np.ones(1, np.int64)
    period = Period(
        np.array([2]), begin, finish, zero, (end - start).astype(np.int64), length, zero, one, finish, np.array([False])
    )
    days, ratio = days_and_ratio(name, start, end, period)
    differing = 0
    for row, (first, last, stop) in enumerate(
        zip(begin.astype(object), end.astype(object), finish.astype(object), strict=True)
    ):
        if name == "Act/365 Canada" and (days[row] == 182 or days[row] == length[row]):
            differing += 1
            continue
        a, b, c = quantlib_date(first), quantlib_date(last), quantlib_date(stop)
        assert float(ratio[row]) == pytest.approx(reference.yearFraction(a, b, a, c), abs=1e-12), (first, last)
    assert differing < SIZE / 25


def test_long_first_coupon_against_quantlib():
    """A first coupon of 16 months paid half-yearly: four months of one half-year, then two whole ones."""
    schedule = [date(2023, 3, 15), date(2023, 9, 15), date(2024, 3, 15), date(2024, 9, 15)]
    issue, first = date(2023, 5, 20), schedule[-1]
    dates = QuantLib.Schedule(
        quantlib_date(issue),
        quantlib_date(date(2026, 9, 15)),
        QuantLib.Period(6, QuantLib.Months),
        QuantLib.NullCalendar(),
        QuantLib.Unadjusted,
        QuantLib.Unadjusted,
        QuantLib.DateGeneration.Backward,
        False,
        quantlib_date(first),
    )
    bond = QuantLib.FixedRateBond(0, 100.0, dates, [0.05], QuantLib.ActualActual(QuantLib.ActualActual.ISMA))
    parts = {"first_days": (schedule[1] - issue).days, "first_length": (schedule[1] - schedule[0]).days}
    zero, one = np.zeros(1, np.int64), np.ones(1, np.int64)
    period = Period(
        np.array([2]), array(issue), array(first), np.array([2]), np.array([parts["first_days"]]),
        np.array([parts["first_length"]]), zero, one, array(date(2026, 9, 15)), np.array([False]),
    )  # fmt: skip
    _, ratio = days_and_ratio("Act/Act ICMA", array(issue), array(first), period)
    assert float(ratio[0]) * 5 == pytest.approx(bond.cashflows()[0].amount(), abs=1e-10)
    assert ratio[0] == Fraction(parts["first_days"], parts["first_length"] * 2) + 1


def test_both_ends_irregular():
    """First days over one length, last days over another: added exactly."""
    begin, finish = array(date(2024, 1, 1)), array(date(2024, 12, 1))
    period = Period(
        np.array([2]), begin, finish, np.array([1]), np.array([31]), np.array([182]), np.array([122]), np.array([184]),
        finish, np.array([False]),
    )  # fmt: skip
    _, ratio = days_and_ratio("Act/Act ICMA", begin, finish, period)
    assert ratio == [Fraction(31, 2 * 182) + Fraction(1, 2) + Fraction(122, 2 * 184)]
    _, ratio = days_and_ratio("Act/365 Canada", begin, finish, period)
    assert ratio == [Fraction(31, 365) + Fraction(1, 2) + Fraction(122, 365)]


def test_a_bond_without_frequency_counts_as_annual():
    begin, finish = array(date(2024, 1, 1)), array(date(2025, 1, 1))
    zero, one = np.zeros(1, np.int64), np.ones(1, np.int64)
    period = Period(zero, begin, finish, zero, np.array([61]), np.array([366]), zero, one, finish, np.array([False]))
    assert days_and_ratio("Act/Act ICMA", begin, begin + 61, period) == ([61], [Fraction(61, 366)])
    assert days_and_ratio("Act/365L", begin, begin + 61, period) == ([61], [Fraction(61, 366)])


def test_business_days_against_quantlib():
    """Bus/252 counts from the first day, itself included, to the last, itself not."""
    reference = QuantLib.Business252(QuantLib.Brazil(QuantLib.Brazil.Settlement))
    random = np.random.default_rng(10)
    start = np.datetime64("2000-01-03") + random.integers(0, 9_000, 1_000)
    end = start + random.integers(0, 900, 1_000)
    days, ratio = days_and_ratio("Bus/252", start, end)
    for row, (first, last) in enumerate(zip(start.astype(object), end.astype(object), strict=True)):
        assert days[row] == reference.dayCount(quantlib_date(first), quantlib_date(last))
        assert ratio[row] == Fraction(days[row], 252)
