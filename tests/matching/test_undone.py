"""Entries told twice and entries taken back."""

from __future__ import annotations

import pytest

from reconciler.records import MISSING
from tests.matching.hand import BOND, OTHER, Change, E, booked, entries, told_twice, trades, who


@pytest.mark.parametrize("name", [{"reference": "T1"}, {"bond": BOND}, {"narrative": f"PAID {BOND}"}], ids=str)
def test_an_entry_told_twice_is_no_part(name: Change) -> None:
    cash = entries(name, name)
    assert who(trades({}), cash) == {"E1": ["trade T1"]}
    assert told_twice(trades({}), cash) == {("E2", "E1")}


def test_two_equal_payments_are_not_told_twice() -> None:
    cash = entries({"bond": BOND}, {"bond": BOND})
    assert who(trades({}, {}), cash) == {"E1": ["trade T1"], "E2": ["trade T2"]}
    assert told_twice(trades({}, {}), cash) == set()


def test_an_equal_amount_of_another_story_is_not_told_twice() -> None:
    for other in ({"reference": "SUNDRY"}, {"bond": OTHER}, {}):
        assert told_twice(trades({}), entries({"reference": "T1", "bond": BOND}, other)) == set()


@pytest.mark.parametrize("name", [{"reference": "T1"}, {"bond": BOND}], ids=str)
def test_an_entry_its_reversal_and_the_rebooking(name: Change) -> None:
    cash = entries(name, {**name, "amount_minor": -E, "value_date": "2026-03-27", "narrative": "REVERSAL"}, {**name, "value_date": "2026-03-27"})
    items = booked(trades({}), cash)
    assert items["item"].to_list() == ["trade T1"]
    assert items.row(0)["bank_minor"] == E
    assert items.row(0)["bank_entries"] == "E1;E2;E3"
    assert str(items.row(0)["bank_date"]) == "2026-03-27"


@pytest.mark.parametrize("name", [{"reference": "T1"}, {"bond": BOND}], ids=str)
def test_an_entry_taken_back_is_no_payment(name: Change) -> None:
    cash = entries(name, {**name, "amount_minor": -E, "value_date": "2026-03-27", "narrative": "REVERSAL"})
    items = booked(trades({}), cash)
    assert items["item"].to_list() == ["trade T1"]
    assert items.row(0)["bank_minor"] == MISSING
    assert items.row(0)["bank_entries"] == "E1;E2"


def test_a_sale_and_a_purchase_take_nothing_back() -> None:
    items = trades({}, {"terms_minor": -E})
    assert who(items, entries({"bond": BOND}, {"bond": BOND, "amount_minor": -E})) == {"E1": ["trade T1"], "E2": ["trade T2"]}
