"""Yields told by desk and broker: when they differ, and whose goes with the price (QuantLib as reference)."""

from __future__ import annotations

from typing import Any

import pytest

from reconciler.breaks import yields
from reconciler.records import MISSING
from tests.breaks.hand import NOTE, One, found, given, only, pairs


@pytest.mark.parametrize(
    ("desk", "broker", "differs"),
    [("4.25", "4.25", False), ("4.25", "4.26", True), ("4.25", "4.2537", False), ("4.25", "4.2601", True), ("4.25 %", "4.250", False),
     ("4", "4.9", False), ("4.1", "", False), ("4.123456", "4.123457", True)],
)  # fmt: skip
def test_yields_differ_by_a_unit_of_the_coarser(desk: str, broker: str, differs: bool) -> None:
    def told(text: str) -> dict[str, Any]:
        number = text.rstrip(" %")
        return {"yield_text": text, "yield_e12": round(float(number) * 10**12) if number else MISSING}

    _, breaks = found([One(desk=told(desk), broker=told(broker))])
    assert [kind for kind, _party in pairs(breaks)] == (["yield"] if differs else [])


def test_the_yield_that_goes_with_the_price_is_right() -> None:
    """4 % half-yearly at 99.5 with 5.2 years left yields 4.10655 % (QuantLib 1.44, BondFunctions, street): the other is wrong."""
    right, wrong = {"yield_e12": 4_107 * 10**9, "yield_text": "4.107"}, {"yield_e12": 4_166 * 10**9, "yield_text": "4.166"}
    _, breaks = found([One(desk=right, broker=wrong)])
    assert pairs(breaks) == [("yield", "Broker")]
    assert only(breaks)["expected"] == "4.107"
    _, breaks = found([One(desk=wrong, broker=right)])
    assert pairs(breaks) == [("yield", "Desk")]
    assert (only(breaks)["expected"], only(breaks)["found"]) == ("4.107", "4.166")


def test_a_yield_of_another_convention_is_right_too() -> None:
    """The same price: 4.10655 % half-yearly is 4.1487 % compounded yearly, (1 + 0.0410655 / 2) ** 2 - 1."""
    yearly, wrong = {"yield_e12": 4_149 * 10**9, "yield_text": "4.149"}, {"yield_e12": 4_300 * 10**9, "yield_text": "4.300"}
    _, breaks = found([One(desk=wrong, broker=yearly)])
    assert pairs(breaks) == [("yield", "Desk")]


def test_without_terms_the_broker_differs() -> None:
    told = [{"yield_e12": number * 10**9, "yield_text": str(number / 1000)} for number in (4100, 4200)]
    silent = {"terms_minor": MISSING, "terms_accrued_minor": MISSING}
    morning = given([One(bond=-1, terms=silent, desk=told[0], broker=told[1]), One(bond=NOTE, desk=told[0])])
    assert [(one.party, one.item_row.tolist()) for one in yields.yields(morning) if len(one)] == [(1, [0])]
