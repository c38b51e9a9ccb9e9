"""The working of payments of the mornings made by hand (tests/mornings), every figure of which is reckoned there."""

from __future__ import annotations

import datetime
from pathlib import Path

import numpy as np
import pytest

from reconciler.procedures import morning, working
from reconciler.procedures.morning import Day
from reconciler.records import MISSING

MORNINGS = Path(__file__).parent.parent / "mornings"


@pytest.fixture(scope="module")
def quiet() -> Day:
    return morning.run(MORNINGS / "quiet" / "in", datetime.date(2026, 3, 31))


@pytest.fixture(scope="module")
def unquiet() -> Day:
    return morning.run(MORNINGS / "unquiet" / "in", datetime.date(2026, 3, 31))


def _row(day: Day, item: str) -> int:
    return day.items["item"].to_list().index(item)


def _working(day: Day, item: str) -> dict[str, working.Line]:
    told = working.working(day, _row(day, item))
    assert len({line.fact for line in told.lines}) == len(told.lines)
    return {line.fact: line for line in told.lines}


def test_a_trade(quiet: Day) -> None:
    lines = _working(quiet, "trade T-2")
    told = {fact: (line.terms, line.broker, line.desk, line.bank) for fact, line in lines.items()}
    assert told["Side"] == ("sell", "sell", "sell", "")
    assert told["Face"] == ("500,000.00", "500,000.00", "500,000.00", "")
    assert told["Price"] == ("99.25", "99.25", "99.25", "")
    assert told["Principal"] == ("496,250.00", "", "", "")
    assert told["Accrued interest"] == ("5,888.89", "5,888.89", "5,888.89", "")
    assert told["Fees"] == ("25.00", "25.00", "25.00", "")
    assert told["Settlement amount"] == ("502,113.89", "502,113.89", "502,113.89", "")
    assert told["Settlement date"] == ("31 Mar 2026", "31 Mar 2026", "31 Mar 2026", "")
    assert lines["Principal"].note == "500,000.00 × 99.25 %"
    assert (lines["Accrued days"].terms, lines["Accrued days"].note) == ("106", "15 Dec 2025 to 31 Mar 2026")
    assert (lines["Day count"].terms, lines["Day count"].note) == ("30/360", "4 % × 106 / 360")
    assert lines["Settlement date"].note == "1 business day after 30 Mar 2026"
    assert not any(line.differs for line in lines.values())


def test_a_coupon(quiet: Day) -> None:
    lines = _working(quiet, "coupon Northquay custody ZZ000PELLER2 2026-03-29")
    assert (lines["Face held"].terms, lines["Face held"].note) == ("800,000.00", "at the close of 27 Mar 2026")
    assert (lines["Coupon period"].terms, lines["Coupon period"].note) == ("29 Mar 2025 to 29 Mar 2026", "a full period")
    assert (lines["Days"].terms, lines["Days"].note, lines["Rate"].terms) == ("365", "Act/Act ICMA", "3 %")
    assert (lines["Amount"].terms, lines["Amount"].bank) == ("24,000.00", "24,000.00")
    assert (lines["Payment date"].terms, lines["Payment date"].note) == ("30 Mar 2026", "29 Mar 2026 is a Sunday; moved following")


def test_a_redemption(quiet: Day) -> None:
    lines = _working(quiet, "redemption Northquay custody ZZ000TENNIC9 2026-03-26")
    assert [lines[fact].terms for fact in ("Face held", "Redemption price", "Amount")] == ["250,000.00", "100", "250,000.00"]


def test_who_differs_is_marked(unquiet: Day) -> None:
    lines = _working(unquiet, "trade T-1")
    assert {fact: set(line.differs) for fact, line in lines.items() if line.differs} == {
        "Accrued interest": {"Broker"}, "Settlement amount": {"Broker"}}  # fmt: skip
    assert lines["Accrued interest"].told("Broker") == "11,778.00"
    lines = _working(unquiet, "trade T-2")
    assert {fact: set(line.differs) for fact, line in lines.items() if line.differs} == {"Settlement date": {"Bank"}}
    lines = _working(unquiet, "coupon Northquay main ZZ000PELLER2 2026-03-29")
    assert lines["Amount"].differs == {"Bank"}


def test_a_discount_is_told_with_its_days(unquiet: Day) -> None:
    lines = _working(unquiet, "trade T-3")
    assert lines["Principal"].note == "1,000,000.00 × (100 − 4 × 79 days / year) %"
    assert lines["Principal"].terms == "991,222.22"


def test_an_entry_nothing_explains(unquiet: Day) -> None:
    lines = _working(unquiet, "bank B-8")
    assert {fact: line.bank for fact, line in lines.items()} == {
        "Amount": "-15.00", "Value date": "27 Mar 2026", "Entry": "B-8", "Booked": "27 Mar 2026", "Narrative": "CHARGES",
        "Account": "Northquay main"}  # fmt: skip


def test_an_unknown_bond_leaves_what_was_told(unquiet: Day) -> None:
    told = working.working(unquiet, _row(unquiet, "trade T-5"))
    assert told.parties == ("Broker", "Desk", "Bank")
    amount = next(line for line in told.lines if line.fact == "Settlement amount")
    assert (amount.terms, amount.broker, amount.desk, amount.bank) == ("", "98,000.00", "98,000.00", "98,000.00")


@pytest.mark.parametrize("name", ["quiet", "unquiet"])
def test_every_payment_has_a_working_and_its_parts_add_up(name: str, request: pytest.FixtureRequest) -> None:
    day: Day = request.getfixturevalue(name)
    for row in range(len(day.items)):
        told = working.working(day, row)
        assert told.lines
        assert told.title
        figures = {line.fact: line.terms.replace(",", "") for line in told.lines}
        if figures.get("Principal"):
            side = int(day.items["side"][row])
            parts = float(figures["Principal"]) + float(figures.get("Accrued interest") or 0) + side * float(figures.get("Fees") or 0)
            assert float(figures["Settlement amount"]) == pytest.approx(-side * parts, abs=0.001)


def test_the_strip_lies_around_the_payment(quiet: Day) -> None:
    strip = working.working(quiet, _row(quiet, "trade T-1")).strip
    assert [str(day) for day in strip.boundaries] == [
        "2024-12-15", "2025-06-15", "2025-12-15", "2026-06-15", "2026-12-15", "2027-06-15"]  # fmt: skip
    assert strip.accrued == (np.datetime64("2025-12-15"), np.datetime64("2026-03-30"))
    assert (str(strip.marked), strip.marked_words, strip.accrued_words) == ("2026-03-30", "settles 30 Mar 2026", "105 days accrued")
    assert strip.next_period == 3


def test_the_coupons_of_a_bond(quiet: Day) -> None:
    row = _row(quiet, "coupon Northquay custody ZZ000PELLER2 2026-03-29")
    told = working.bond_coupons(quiet, int(quiet.items["bond_row"][row]), row)
    assert len(told.table) == 10
    assert told.shown == 5
    shown = told.table.row(told.shown)
    assert (str(shown["start"]), str(shown["end"]), str(shown["payment_date"])) == ("2025-03-29", "2026-03-29", "2026-03-30")
    assert (shown["why"], shown["amount_minor"], str(shown["record_date"])) == (
        "29 Mar 2026 is a Sunday; moved following", 2_400_000, "2026-03-27")  # fmt: skip
    alone = working.bond_coupons(quiet, 0)
    assert alone.shown == -1
    assert alone.table["face_minor"].tolist() == [10_000] * 20
    assert alone.strip.marked_words == "today"


def test_a_bond_without_coupons_has_none(quiet: Day) -> None:
    told = working.bond_coupons(quiet, 2)
    assert len(told.table) == 0
    assert told.strip.boundaries == ()
    assert MISSING not in told.table["amount_minor"].tolist()
