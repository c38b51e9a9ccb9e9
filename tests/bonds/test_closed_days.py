"""Closed days: weekday by weekday against QuantLib, and the shipped file against the package it was taken from."""

from __future__ import annotations

import importlib.util
from collections.abc import Callable
from datetime import date

import numpy as np
import pytest
import QuantLib

from reconciler import resources
from reconciler.bonds import closed_days
from reconciler.bonds.closed_days import DAYS, FIRST, LAST, WEEKDAYS, UnknownCalendar, days_of, easter

US = QuantLib.UnitedStates


def never(_day: date, _name: str) -> bool:
    return False


def on(*texts: str) -> Callable[[date, str], bool]:
    """Explains the days listed."""
    return lambda day, _name: day.isoformat() in texts


def hungary(day: date, name: str) -> bool:
    """Bridge days that Hungary swaps for working Saturdays, and Christmas Eve, free by law from 2026; not in
    QuantLib."""
    return name.startswith("Day off (substituted") or (name == "Christmas Eve" and day.year >= 2026)


def poland(day: date, name: str) -> bool:
    """Christmas Eve is free by law from 2025, and 12 November 2018 was free once; neither is in QuantLib."""
    return (name == "Christmas Eve" and day.year >= 2025) or day == date(2018, 11, 12)


def south_africa(_day: date, name: str) -> bool:
    """Elections and days declared once, which QuantLib lists in part only."""
    return "Election" in name or "Decree" in name or "Y2K" in name


def mexico(day: date, name: str) -> bool:
    """The package's exchange begins in 2001; the Monday rule came in 2006, and two days were declared once."""
    return day.year == 2000 or day.isoformat() in ("2006-03-20", "2006-03-21", "2006-12-01", "2010-09-17") or (
        day.isoformat() in ("2001-11-02", "2004-11-02", "2005-11-02")
    )  # fmt: skip


def hong_kong(day: date, name: str) -> bool:
    """QuantLib lists moon-based days for 2004 to 2026 only and lacks some that were moved off a weekend in those years;
    10 May 2012 it takes for the Buddha's birthday, which fell on 28 April."""
    moved = "2004-12-27 2005-12-27 2010-12-27 2012-05-10 2012-10-02 2019-05-13 2021-04-06 2021-12-27 2022-12-27"
    return not 2004 <= day.year <= 2026 or day.isoformat() in moved.split()


# Code, QuantLib's calendar, which differences on weekdays of 2000 to 2030 are explained.
REFERENCES: list[tuple[str, QuantLib.Calendar, Callable[[date, str], bool]]] = [
    # The bond market stayed shut the day after the attacks; QuantLib has it open.
    ("XSIF", US(US.GovernmentBond), on("2001-09-12")),
    ("XFED", US(US.FederalReserve), never),
    ("XNYS", US(US.NYSE), never),
    # Juneteenth 2021 became law the day before and was kept on Friday 18 June; QuantLib begins in 2022.
    ("US", US(US.Settlement), on("2021-06-18")),
    ("XECB", QuantLib.TARGET(), never),
    ("GB-ENG", QuantLib.UnitedKingdom(QuantLib.UnitedKingdom.Settlement), never),
    ("XLON", QuantLib.UnitedKingdom(QuantLib.UnitedKingdom.Exchange), never),
    # QuantLib alone closes on 6 May 2003, a Tuesday after a holiday that did not fall on a Sunday.
    ("JP", QuantLib.Japan(), on("2003-05-06")),
    ("CA-ON", QuantLib.Canada(QuantLib.Canada.Settlement), never),
    ("CH-ZH", QuantLib.Switzerland(), never),
    ("SE", QuantLib.Sweden(), never),
    ("NO", QuantLib.Norway(), never),
    ("DK", QuantLib.Denmark(), never),
    ("FI", QuantLib.Finland(), never),
    ("AU-NSW", QuantLib.Australia(QuantLib.Australia.Settlement), never),
    ("NZ-WGN", QuantLib.NewZealand(QuantLib.NewZealand.Wellington), never),
    ("NZ-AUK", QuantLib.NewZealand(QuantLib.NewZealand.Auckland), never),
    ("BR", QuantLib.Brazil(QuantLib.Brazil.Settlement), never),
    # The exchange stayed shut twice in 2004 without a public holiday.
    ("CZ", QuantLib.CzechRepublic(), on("2004-01-02", "2004-12-31")),
    ("HU", QuantLib.Hungary(), hungary),
    ("PL", QuantLib.Poland(), poland),
    ("ZA", QuantLib.SouthAfrica(), south_africa),
    ("XMEX", QuantLib.Mexico(), mexico),
    ("HK", QuantLib.HongKong(), hong_kong),
]


def weekdays(first: str, last: str) -> np.ndarray:
    every = np.arange(np.datetime64(first), np.datetime64(last) + 1)
    return every[(every.astype(np.int64) + 3) % 7 < 5]


@pytest.mark.parametrize(("code", "reference", "explained"), REFERENCES, ids=[code for code, _, _ in REFERENCES])
def test_weekday_by_weekday_against_quantlib(code, reference, explained):
    ours = closed_days.closed_days(code)
    unexplained = []
    for day in weekdays("2000-01-01", "2030-12-31").astype(object):
        number = (day - date(1970, 1, 1)).days
        theirs = not reference.isBusinessDay(QuantLib.Date(day.day, day.month, day.year))
        if bool(ours.closed[number]) != theirs and not explained(day, ours.names.get(number, "")):
            unexplained.append((day.isoformat(), ours.names.get(number, "open here")))
    assert unexplained == []


@pytest.mark.parametrize(("code", "reference"), [("XFED", US(US.FederalReserve)), ("XSIF", US(US.GovernmentBond))])
def test_earlier_years_against_quantlib(code, reference):
    """Before the package's own start the federal holidays stand in. QuantLib has Martin Luther King's day from 1983,
    when the law was made; it was first kept in 1986. The bond market closed on Good Friday 1996, which QuantLib leaves
    open."""
    ours = closed_days.closed_days(code)
    for day in weekdays("1972-01-01", "1999-12-31").astype(object):
        number = (day - date(1970, 1, 1)).days
        theirs = not reference.isBusinessDay(QuantLib.Date(day.day, day.month, day.year))
        known = (1983 <= day.year <= 1985 and day.month == 1 and day.day >= 15) or day == date(1996, 4, 5)
        assert bool(ours.closed[number]) == theirs or known, day


# Beyond 2030 the bond market's list has Good Fridays that QuantLib does not (reference: calendars.md of this project).
@pytest.mark.parametrize("day", ["2034-04-07", "2037-04-03", "2042-04-04", "2045-04-07", "2048-04-03", "2053-04-04"])
def test_good_fridays_beyond_2030(day):
    assert closed_days.closed_days("XSIF").closed[int(np.datetime64(day).astype(np.int64))]


# Singapore's gazetted days of 2024 and 2025; from memory. QuantLib's lists lack too many to compare with.
SINGAPORE = [
    "2024-01-01", "2024-02-12", "2024-03-29", "2024-04-10", "2024-05-01", "2024-05-22", "2024-06-17", "2024-08-09",
    "2024-10-31", "2024-12-25", "2025-01-01", "2025-01-29", "2025-01-30", "2025-03-31", "2025-04-18", "2025-05-01",
    "2025-05-03", "2025-05-12", "2025-08-09", "2025-10-20", "2025-12-25",
]  # fmt: skip


def test_singapore():
    days = weekdays("2024-01-01", "2025-12-31")
    closed = days[closed_days.closed_days("SG").closed[days.astype(np.int64)]]
    gazetted = np.array(SINGAPORE, "datetime64[D]")
    assert closed.tolist() == gazetted[(gazetted.astype(np.int64) + 3) % 7 < 5].tolist()


# Holidays of the Bombay (Mumbai) market in 2024 with a fixed date, from memory; moon-based ones differ from list to
# list.
@pytest.mark.parametrize("day", ["2024-01-26", "2024-03-29", "2024-05-01", "2024-08-15", "2024-10-02", "2024-12-25"])
def test_mumbai(day):
    assert closed_days.closed_days("IN-MH").closed[int(np.datetime64(day).astype(np.int64))]


def pack_script():
    spec = importlib.util.spec_from_file_location("pack_calendars", resources.folder() / "pack_calendars.py")
    assert spec and spec.loader
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_shipped_calendars_are_the_packages():
    """If this fails after an upgrade of the package: look at what changed, then run resources/pack_calendars.py."""
    fresh = pack_script().packed()
    with np.load(resources.folder() / "tables" / "calendars.npz") as shipped:
        assert set(shipped.files) == set(fresh)
        for name, array in fresh.items():
            assert np.array_equal(shipped[name], array), name


def test_every_calendar_of_a_market_is_shipped():
    shipped = set(pack_script().CODES)
    wanted = {
        part
        for row in resources.table("markets")
        for part in (row["calendar"] + "+" + row["payment_calendar"]).split("+")
        if part
    }
    assert wanted <= shipped


def test_a_code_that_is_not_shipped_is_built():
    ours = closed_days.closed_days("DE-BY")  # Epiphany is a holiday in Bavaria and few other states
    number = int(np.datetime64("2025-01-06").astype(np.int64))
    assert ours.closed[number]
    assert not closed_days.closed_days("DE").closed[number]


def test_weekends():
    """Saturday and Sunday; Friday and Saturday where the package says so; Hong Kong's Saturdays are closed all the
    same."""
    week = np.arange(np.datetime64("2026-03-02"), np.datetime64("2026-03-09")).astype(np.int64)
    assert closed_days.closed_days("HK").closed[week].tolist() == [False] * 5 + [True] * 2
    assert closed_days.closed_days("XSAU").closed[week].tolist() == [False] * 4 + [True] * 2 + [False]
    # The United Arab Emirates moved their weekend from Friday and Saturday in 2022.
    emirates = closed_days.closed_days("AE").closed
    old = np.arange(np.datetime64("2021-03-01"), np.datetime64("2021-03-08")).astype(np.int64)
    assert emirates[old].tolist() == [False] * 4 + [True] * 2 + [False]
    assert emirates[week].tolist() == [False] * 5 + [True] * 2


def test_half_days_are_open():
    """Sweden's banks close early on the eve of a holiday, fully on Midsummer, Christmas and New Year's Eve."""
    sweden = closed_days.closed_days("SE").closed
    assert not sweden[int(np.datetime64("2026-04-02").astype(np.int64))]  # Maundy Thursday
    assert sweden[int(np.datetime64("2026-06-19").astype(np.int64))]  # Midsummer Eve


@pytest.mark.parametrize("code", ["", "QQ", "US-ZZ", "XSIF2", "holidays", "../etc", "HolidayBase", "GB-", "-"])
def test_unknown_codes(code):
    with pytest.raises(UnknownCalendar, match="is no calendar"):
        closed_days.closed_days(code)


@pytest.mark.parametrize(
    ("code", "meant"),
    [("XECB", "XECB"), ("TAR", "XECB"), ("ECB", "XECB"), ("NYSE", "XNYS"), ("GB", "GB-ENG"), ("UK", "GB-ENG"),
     ("GBR", "GB-ENG"), ("GB-SCT", "GB-SCT"), ("JPN", "JP"), (" XSIF ", "XSIF"), ("QQ", "QQ")],
)  # fmt: skip
def test_canonical(code, meant):
    assert closed_days.canonical(code) == meant


# Dates of Easter Sunday; common knowledge, also in QuantLib's tables (Easter Monday below).
@pytest.mark.parametrize("day", ["1970-03-29", "2000-04-23", "2008-03-23", "2024-03-31", "2026-04-05", "2038-04-25"])
def test_easter(day):
    assert easter(int(day[:4])) == int(np.datetime64(day).astype(np.int64))


def test_easter_against_quantlib():
    target = QuantLib.TARGET()
    for year in range(2000, 2101):
        monday = date.fromordinal(easter(year) + 1 + date(1970, 1, 1).toordinal())
        assert target.isHoliday(QuantLib.Date(monday.day, monday.month, monday.year)), year
        assert monday.weekday() == 0


@pytest.mark.parametrize(
    ("rule", "expected"),
    [
        ("2001-09-12", ["2001-09-12"]),
        ("01-02", ["2025-01-02", "2026-01-02"]),
        ("01-02 if Friday", ["2026-01-02"]),
        ("01-02 if Thursday Friday", ["2025-01-02", "2026-01-02"]),
        ("01-02 if Monday", []),
        ("Friday from 06-19", ["2025-06-20", "2026-06-19"]),
        ("Monday from 08-01", ["2025-08-04", "2026-08-03"]),
        ("Easter+40", ["2025-05-30", "2026-05-15"]),
        ("Easter-48", ["2025-03-03", "2026-02-16"]),
    ],
)
def test_rules_of_the_corrections(rule, expected):
    got = np.array(days_of(rule, 2025, 2026), np.int64).view("datetime64[D]") if days_of(rule, 2025, 2026) else []
    assert [str(day) for day in got] == expected


def test_every_correction_is_sound_and_needed():
    """Each row parses, has a source and a standing, and changes at least one weekday of the package's calendar."""
    for row in resources.table("calendar_corrections"):
        assert row["name"] and row["source"] and row["standing"] in ("read", "part", "memory"), row
        assert row["open"] in ("yes", "no"), row
        days = days_of(row["rule"], int(row["first_year"] or 1970), int(row["last_year"] or 2100))
        assert days and all(0 <= day < DAYS for day in days), row
        found, _, weekend = closed_days.from_package(row["calendar"])
        raw = weekend.copy()
        raw[found] = True
        if row["rule"] != "Easter-2":  # stands beside the federal holidays in years the package does not know
            assert any(raw[day] != (row["open"] == "no") for day in days), row


def test_the_span_of_the_tables():
    assert str(FIRST) == "1970-01-01" and str(LAST) == "2100-12-31"
    assert WEEKDAYS[closed_days.WEEKDAY[0]] == "Thursday"
    assert WEEKDAYS[closed_days.WEEKDAY[-1]] == "Friday"
    assert len(closed_days.weekends()) == DAYS == 47_847
