"""Who should have spoken and did not, or spoke twice."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from reconciler.breaks import finding, silent
from reconciler.records import MISSING
from tests.breaks.hand import One, coupon, entry, found, given, only, pairs


def test_a_confirmation_told_twice_is_a_break_of_the_item_it_repeats() -> None:
    morning = [One(), One(broker={}, desk=None, kind="trade", repeats=[("confirmation", 0)])]
    both = given(morning)
    kept = both.items.take(np.array([0]))
    items, breaks = finding.find_breaks(replace(both, items=kept, allocations=both.allocations.take(np.array([0]))))
    assert pairs(breaks) == [("told twice", "Broker")]
    assert items["state"].to_list() == ["break"]
    assert (only(breaks)["expected"], only(breaks)["found"]) == ("TV0", "TV1")
    assert "TV1" in only(breaks)["explanation"]


def test_a_ticket_told_twice_asks_for_nothing_more() -> None:
    _, breaks = found([One(), One(broker=None, bank=[], repeats=[("ticket", 0)])])
    assert pairs(breaks) == [("told twice", "Desk")]
    assert only(breaks)["item"] == "trade 001"
    assert (only(breaks)["expected"], only(breaks)["found"]) == ("T-0", "T-1")


def test_an_entry_told_twice_is_not_called_unexplained() -> None:
    _, breaks = found([coupon(), entry(repeats=[("entry", 0)]), entry(amount_minor=7)])
    assert pairs(breaks) == [("told twice", "Bank"), ("unexplained cash", "Bank")]


def test_a_ticket_that_repeats_two_others_names_the_first_of_them() -> None:
    morning = given([One(), One(broker=None, bank=[], repeats=[("ticket", 0)]), One(broker=None, bank=[], repeats=[("ticket", 0)])])
    rows, originals = morning.repeated_tickets
    assert (rows.tolist(), originals.tolist()) == ([1, 2], [0, 0])


@pytest.mark.parametrize(
    ("one", "date", "waits", "late"),
    [
        (One(bank=[]), "2026-03-31", True, True),
        (One(bank=[]), "2026-03-30", True, False),
        (One(), "2026-03-31", False, False),
        (coupon(bank=[], terms={"terms_minor": 0}), "2026-03-31", False, False),
        (coupon(bank=[], terms={"terms_minor": MISSING}), "2026-03-31", True, True),
        (entry(), "2026-03-31", False, False),
        # an entry and its reversal: named, but not paid
        (One(bank=[{"amount_minor": 5}, {"amount_minor": -5}]), "2026-03-31", False, False),
    ],
)
def test_waiting_and_overdue(one: One, date: str, waits: bool, late: bool) -> None:
    morning = given([one], date=date)
    assert (silent.waits_for_cash(morning).tolist(), silent.overdue(morning).tolist()) == ([waits], [late])


def test_cash_taken_back_again_is_no_cash_and_no_wrong_day() -> None:
    both = given([One(bank=[{"value_date": "2026-03-27"}, {"amount_minor": 100_666_667, "value_date": "2026-03-28"}])])
    items = both.items.with_columns(bank_minor=np.array([MISSING]), bank_date=np.array(["NaT"], "datetime64[D]"))
    _, breaks = finding.find_breaks(replace(both, items=items))
    assert pairs(breaks) == [("no cash", "Bank")]
