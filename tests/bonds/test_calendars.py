"""Adjusting, adding and counting business days, against numpy's busday functions and QuantLib's calendars."""

from __future__ import annotations

from datetime import date, timedelta

import numpy as np
import pytest
import QuantLib
from hypothesis import given, settings
from hypothesis import strategies as st

from reconciler.bonds.calendars import ADJUSTMENTS, FIRST, LAST, Calendars, load
from reconciler.problems import KnownError

MISSING = np.iinfo(np.int64).min
CODES = ["XSIF", "XECB", "GB-ENG", "JP", "XSIF+XECB"]


@pytest.fixture(scope="module")
def calendars() -> Calendars:
    return load(CODES)[0]


def days(*texts: str) -> np.ndarray:
    return np.array(texts, "datetime64[D]")


def random_dates(seed: int, size: int = 20_000) -> np.ndarray:
    return np.datetime64("1975-01-01") + np.random.default_rng(seed).integers(0, 43_000, size)


def closed(calendars: Calendars, number: int) -> np.ndarray:
    """The closed weekdays of a calendar, as numpy's functions want them."""
    every = np.arange(FIRST, LAST + 1)
    weekday = (every.astype(np.int64) + 3) % 7 < 5
    return every[weekday & ~calendars.is_open(number, every)]


ROLLS = {
    "following": "following",
    "modified following": "modifiedfollowing",
    "preceding": "preceding",
    "modified preceding": "modifiedpreceding",
}


@pytest.mark.parametrize("code", CODES)
@pytest.mark.parametrize("adjustment", ROLLS)
def test_roll_equals_numpy(calendars, code, adjustment):
    number, dates = calendars.number(code), random_dates(1)
    expected = np.busday_offset(dates, 0, roll=ROLLS[adjustment], holidays=closed(calendars, number))
    assert (calendars.roll(number, dates, ADJUSTMENTS.index(adjustment)) == expected).all()


def test_unadjusted_stays(calendars):
    dates = random_dates(2)
    assert (calendars.roll(1, dates, ADJUSTMENTS.index("unadjusted")) == dates).all()


QUANTLIB = {
    "following": QuantLib.Following,
    "modified following": QuantLib.ModifiedFollowing,
    "preceding": QuantLib.Preceding,
    "modified preceding": QuantLib.ModifiedPreceding,
    "nearest": QuantLib.Nearest,
}


@pytest.mark.parametrize("adjustment", QUANTLIB)
def test_roll_equals_quantlib(calendars, adjustment):
    """TARGET days, where both libraries agree on every weekday; "nearest" with its ties among them."""
    target, number = QuantLib.TARGET(), calendars.number("XECB")
    dates = np.datetime64("2000-01-01") + np.arange(11_000)
    got = calendars.roll(number, dates, ADJUSTMENTS.index(adjustment)).astype(object)
    for day, found in zip(dates.astype(object), got, strict=True):
        expected = target.adjust(QuantLib.Date(day.day, day.month, day.year), QUANTLIB[adjustment])
        assert found == date(expected.year(), expected.month(), expected.dayOfMonth())


# By the calendar of 2026: Saturday 4 July, Monday 1 June, Good Friday 3 April; TARGET closed 3 and 6 April 2026.
@pytest.mark.parametrize(
    ("day", "adjustment", "expected"),
    [
        ("2026-02-28", "following", "2026-03-02"),
        ("2026-02-28", "modified following", "2026-02-27"),
        ("2026-03-01", "preceding", "2026-02-27"),
        ("2026-03-01", "modified preceding", "2026-03-02"),
        ("2026-02-28", "nearest", "2026-02-27"),
        ("2026-03-01", "nearest", "2026-03-02"),
        ("2026-04-03", "nearest", "2026-04-02"),
        ("2026-04-04", "nearest", "2026-04-02"),
        ("2026-04-05", "nearest", "2026-04-07"),
        ("2026-04-06", "nearest", "2026-04-07"),
        ("2025-05-01", "nearest", "2025-05-02"),
    ],
)
def test_roll_by_hand(calendars, day, adjustment, expected):
    got = calendars.roll(calendars.number("XECB"), days(day), ADJUSTMENTS.index(adjustment))
    assert got == days(expected)


@pytest.mark.parametrize("code", ["XECB", "GB-ENG"])
def test_add_equals_quantlib(calendars, code):
    """QuantLib counts strictly from the day itself, open or closed, as we do; 0 days it adjusts forward."""
    reference = {"XECB": QuantLib.TARGET(), "GB-ENG": QuantLib.UnitedKingdom()}[code]
    random = np.random.default_rng(3)
    dates = np.datetime64("2000-01-03") + random.integers(0, 11_000, 4_000)
    steps = random.integers(-12, 13, 4_000)
    got = calendars.add(calendars.number(code), dates, steps).astype(object)
    for day, step, found in zip(dates.astype(object), steps.tolist(), got, strict=True):
        expected = reference.advance(QuantLib.Date(day.day, day.month, day.year), step, QuantLib.Days)
        assert found == date(expected.year(), expected.month(), expected.dayOfMonth()), (day, step)


def test_add_equals_numpy_from_open_days(calendars):
    random = np.random.default_rng(4)
    for code in CODES:
        number = calendars.number(code)
        dates = random_dates(5, 5_000)
        dates = dates[calendars.is_open(number, dates)]
        steps = random.integers(-60, 61, len(dates))
        expected = np.busday_offset(dates, steps, holidays=closed(calendars, number))
        assert (calendars.add(number, dates, steps) == expected).all()


@pytest.mark.parametrize(
    ("day", "step", "expected"),
    [
        ("2026-04-04", 1, "2026-04-07"),
        ("2026-04-02", 1, "2026-04-07"),
        ("2026-04-07", -1, "2026-04-02"),
        ("2026-04-05", -1, "2026-04-02"),
        ("2026-04-05", -2, "2026-04-01"),
        ("2026-04-05", 0, "2026-04-07"),
        ("2026-04-07", 0, "2026-04-07"),
    ],
)
def test_add_counts_strictly_from_closed_days(calendars, day, step, expected):
    """Over Easter 2026 in euro: Friday 3 and Monday 6 April are closed."""
    assert calendars.add(calendars.number("XECB"), days(day), step) == days(expected)


@pytest.mark.parametrize("code", CODES)
def test_count_equals_numpy(calendars, code):
    number = calendars.number(code)
    start = random_dates(6)
    end = start + np.random.default_rng(7).integers(0, 900, len(start))
    expected = np.busday_count(start, end, holidays=closed(calendars, number))
    assert (calendars.count(number, start, end) == expected).all()
    assert (calendars.count(number, end, start) == -expected).all()


def test_mixed_calendars_equal_one_at_a_time(calendars):
    random = np.random.default_rng(8)
    dates, which = random_dates(9), random.integers(0, len(calendars.codes), 20_000)
    how, steps = random.integers(0, len(ADJUSTMENTS), 20_000).astype(np.int8), random.integers(-9, 10, 20_000)
    rolled, added = calendars.roll(which, dates, how), calendars.add(which, dates, steps)
    counted, opened = calendars.count(which, dates, dates + steps), calendars.is_open(which, dates)
    for number in range(len(calendars.codes)):
        mine = which == number
        assert (rolled[mine] == calendars.roll(number, dates[mine], how[mine])).all()
        assert (added[mine] == calendars.add(number, dates[mine], steps[mine])).all()
        assert (counted[mine] == calendars.count(number, dates[mine], (dates + steps)[mine])).all()
        assert (opened[mine] == calendars.is_open(number, dates[mine])).all()
    for row in range(50):
        one = slice(row, row + 1)
        assert calendars.roll(which[one], dates[one], how[one]) == rolled[one]
        assert calendars.add(which[one], dates[one], steps[one]) == added[one]


@given(day=st.dates(date(1971, 1, 1), date(2099, 12, 31)), step=st.integers(1, 40), code=st.sampled_from(CODES))
@settings(max_examples=200, deadline=None)
def test_laws(day, step, code):
    calendars = load(CODES)[0]
    number, start = calendars.number(code), days(day.isoformat())
    following, preceding = (calendars.roll(number, start, ADJUSTMENTS.index(a)) for a in ("following", "preceding"))
    assert preceding <= start <= following
    assert calendars.is_open(number, following) and calendars.is_open(number, preceding)
    assert (following == start) == (preceding == start) == calendars.is_open(number, start)[0]
    later, earlier = calendars.add(number, start, step), calendars.add(number, start, -step)
    assert calendars.count(number, start + 1, later + 1) == step
    assert calendars.count(number, earlier, start) == step
    assert calendars.add(number, later, -step) == (start if calendars.is_open(number, start) else preceding)


def test_outside_the_tables(calendars):
    """NaT in, dates before 1970 and after 2100: NaT or MISSING out, and the other rows are not disturbed."""
    odd = days("NaT", "1969-12-31", "2101-01-01", "1066-10-14", "2026-04-02")
    for how in range(len(ADJUSTMENTS)):
        got = calendars.roll(calendars.number("XECB"), odd, how)
        assert np.isnat(got[:4]).all() and got[4] == odd[4]
    got = calendars.add(calendars.number("XECB"), odd, 1)
    assert np.isnat(got[:4]).all() and got[4] == days("2026-04-07")
    # 1 January 2101 may end a count: the day before it is still known.
    odd[2] = np.datetime64("2101-01-02")
    assert calendars.count(0, odd, days("2026-04-03")).tolist() == [MISSING] * 4 + [1]
    assert calendars.count(0, days("2026-04-03"), odd[:2]).tolist() == [MISSING] * 2
    assert calendars.is_open(0, odd).tolist() == [False] * 4 + [True]


def test_edges_of_the_tables():
    """1 January 1970 is a holiday without a day before it; the last business day is 31 December 2100, a Friday."""
    calendars = load(["XNYS"])[0]
    number = calendars.number("XNYS")
    how = {name: calendars.roll(number, days("1970-01-01"), ADJUSTMENTS.index(name))[0] for name in ADJUSTMENTS}
    assert np.isnat(how["preceding"])
    assert how["following"] == how["nearest"] == how["modified preceding"] == days("1970-01-02")
    assert np.isnat(calendars.add(number, days("1970-01-02"), -1))
    assert np.isnat(calendars.add(number, days("2100-12-31"), 1))
    assert np.isnat(calendars.add(number, days("2000-01-01"), 10**6))
    assert calendars.count(number, days("2100-12-31"), days("2101-01-01")) == 1


def test_empty_in_empty_out(calendars):
    nothing, none = days(), np.empty(0, np.int64)
    assert len(calendars.roll(none, nothing, none)) == len(calendars.add(none, nothing, none)) == 0
    assert len(calendars.count(none, nothing, nothing)) == len(calendars.is_open(none, nothing)) == 0


def test_codes_and_numbers(calendars):
    assert calendars.codes == ("", "GB-ENG", "JP", "XECB", "XSIF", "XSIF+XECB")
    assert [calendars.number(code) for code in calendars.codes] == list(range(6))
    with pytest.raises(KnownError, match="XLON"):
        calendars.number("XLON")


def test_joint_is_closed_if_any_part_is(calendars):
    every = np.arange(np.datetime64("2000-01-01"), np.datetime64("2031-01-01"))
    both = calendars.is_open(calendars.number("XSIF"), every) & calendars.is_open(calendars.number("XECB"), every)
    assert (calendars.is_open(calendars.number("XSIF+XECB"), every) == both).all()
    turned = load(["XECB+XSIF"])[0]
    assert (turned.is_open(1, every) == both).all()


def test_plain_gb_is_england_and_wales():
    calendars = load(["GB", "GB-ENG", "UK"])[0]
    for day in ("2026-04-06", "2026-08-31"):  # Easter Monday and the August bank holiday
        assert not calendars.is_open(np.arange(1, 4), np.repeat(days(day), 3)).any()


def test_unknown_codes_have_a_reason():
    calendars, reasons = load(["XSIF", "QQ", "XECB+NOWHERE", "US-ZZ", "xsif", "", "__doc__"])
    assert set(reasons) == {"QQ", "XECB+NOWHERE", "US-ZZ", "xsif", "__doc__"}
    assert "'QQ' is no calendar: use a market code" in reasons["QQ"]
    assert "NOWHERE" in reasons["XECB+NOWHERE"]
    assert reasons["US-ZZ"] == "'US-ZZ' is no calendar: US has no subdivision 'ZZ' in the holidays package"
    assert calendars.is_open(calendars.number("QQ"), days("2026-12-25", "2026-12-26")).tolist() == [True, False]
    # The part that is known still closes.
    assert not calendars.is_open(calendars.number("XECB+NOWHERE"), days("2026-12-25"))


CLOSINGS = [
    ("XECB", date(2026, 3, 31), False),
    ("XECB", date(2025, 4, 18), True),
    ("XSIF+XECB", date(2026, 4, 15), False),
    ("HOUSE", date(2026, 4, 16), False),
    ("GB", np.datetime64("2026-04-17"), False),
    ("XECB", date(2026, 3, 28), True),
    ("XECB", date(1901, 1, 1), False),
]


def test_closings_close_and_open():
    calendars, reasons = load(["XECB", "XSIF+XECB", "HOUSE", "GB-ENG"], CLOSINGS)
    euro, joint = calendars.number("XECB"), calendars.number("XSIF+XECB")
    house, london = calendars.number("HOUSE"), calendars.number("GB-ENG")
    assert calendars.is_open(euro, days("2026-03-31", "2025-04-18", "2026-04-15")).tolist() == [False, True, True]
    # Good Friday 2025 stays closed in the joint calendar: the bond market is closed as well.
    assert calendars.is_open(joint, days("2026-03-31", "2025-04-18", "2026-04-15")).tolist() == [False] * 3
    assert calendars.is_open(euro, days("2026-03-28"))  # a Saturday told open
    assert not calendars.is_open(london, days("2026-04-17"))
    assert not calendars.is_open(house, days("2026-04-16")) and set(reasons) == {"HOUSE"}
    assert calendars.add(euro, days("2026-03-30"), 1) == days("2026-04-01")
    assert calendars.why_closed(euro, date(2026, 3, 31)) == "closed by closings.csv"
    assert calendars.why_closed(joint, date(2026, 3, 31)) == "closed by closings.csv"
    assert calendars.why_closed(joint, date(2026, 4, 15)) == "closed by closings.csv"
    assert calendars.why_closed(house, date(2026, 4, 16)) == "closed by closings.csv"
    assert calendars.why_closed(euro, date(2025, 4, 18)) == ""
    # Calendars loaded without closings are not touched.
    assert load(["XECB"])[0].is_open(1, days("2026-03-31"))


def test_closings_do_not_depend_on_their_order():
    told = [*CLOSINGS, ("XECB", date(2026, 3, 31), True)]
    every = np.arange(np.datetime64("2026-01-01"), np.datetime64("2027-01-01"))
    one, other = load(["XECB", "XSIF+XECB"], told)[0], load(["XSIF+XECB", "XECB"], told[::-1])[0]
    assert one.codes == other.codes
    for number in range(3):
        assert (one.is_open(number, every) == other.is_open(number, every)).all()
    # A day told both open and closed is closed.
    assert not one.is_open(one.number("XECB"), days("2026-03-31"))


@pytest.mark.parametrize(
    ("code", "day", "reason"),
    [
        ("XECB", "2026-04-04", "Saturday"),
        ("XECB", "2026-04-05", "Sunday"),
        ("XECB", "2026-04-03", "Good Friday"),
        ("XSIF", "2026-07-03", "Independence Day (observed)"),
        ("XSIF+XECB", "2026-05-01", "Labour Day"),
        ("JP", "2026-01-02", "Bank Holiday"),
        ("XECB", "2026-04-02", ""),
        ("XECB", "2222-04-02", ""),
    ],
)
def test_why_closed(calendars, code, day, reason):
    assert calendars.why_closed(calendars.number(code), np.datetime64(day)) == reason


def test_a_calendar_that_is_always_closed_has_no_days():
    shut = [("SHUT", date(1970, 1, 1) + timedelta(n), False) for n in range(47_847)]
    calendars = load(["SHUT"], shut)[0]
    number = calendars.number("SHUT")
    assert np.isnat(calendars.roll(number, days("2026-01-01"), np.arange(1, 6))).all()
    assert np.isnat(calendars.add(number, days("2026-01-01"), np.array([-1, 0, 1]))).all()
