"""Sums that the bond and the day speak for, and sums that only add up."""

from __future__ import annotations

import pytest

from reconciler.matching.cash import pair_cash
from tests.matching.hand import BOND, OTHER, Change, E, coupons, entries, paid, told_twice, trades, who


@pytest.mark.parametrize("name", [{"reference": "T1"}, {"bond": BOND}], ids=str)
@pytest.mark.parametrize("parts", [(E + 30_000_000, -30_000_000), (E + 3, -2, -1), (-40_000_000, -40_000_000, E + 80_000_000)], ids=str)
def test_entries_that_add_up_pay_together(name: Change, parts: tuple[int, ...]) -> None:
    cash = entries(*({**name, "amount_minor": part} for part in parts))
    expected = {f"E{n}": {"trade T1": part} for n, part in enumerate(parts, 1)}
    assert paid(trades({}), cash) == expected
    assert told_twice(trades({}), cash) == set()


def test_a_unit_may_be_lost_in_each_part() -> None:
    cash = entries({"reference": "T1", "amount_minor": E + 30_000_001}, {"reference": "T1", "amount_minor": -29_999_999})
    assert who(trades({}), cash) == {"E1": ["trade T1"], "E2": ["trade T1"]}
    cash = entries({"bond": BOND, "amount_minor": E + 30_000_001}, {"bond": BOND, "amount_minor": -29_999_999})
    assert who(trades({}), cash) == {"E1": ["trade T1"], "E2": ["trade T1"]}


def test_parts_booked_on_different_days() -> None:
    cash = entries({"bond": BOND, "amount_minor": E + 30_000_000}, {"bond": BOND, "amount_minor": -30_000_000, "value_date": "2026-03-27"})
    assert who(trades({}), cash) == {"E1": ["trade T1"], "E2": ["trade T1"]}


def test_parts_among_other_entries_of_the_bond() -> None:
    cash = entries(
        {"bond": BOND, "amount_minor": E + 30_000_000}, {"bond": BOND, "amount_minor": -30_000_000}, {"bond": BOND, "amount_minor": -77_700}
    )
    assert who(trades({}), cash) == {"E1": ["trade T1"], "E2": ["trade T1"]}


def test_two_ways_to_add_up_are_no_way() -> None:
    items = trades({"terms_minor": -100}, {"terms_minor": -10_000_000, "bond": OTHER})
    cash = entries(*({"bond": BOND, "amount_minor": -part} for part in (60, 40, 30, 70)))
    assert who(items, cash) == {}


def test_parts_without_bond_or_reference_are_a_proposal() -> None:
    items = trades({"terms_minor": -100_007})
    cash = entries({"amount_minor": -60_004}, {"amount_minor": -40_003})
    found = pair_cash(items, cash)
    assert len(found.allocations) == 0
    assert sorted(found.proposals["cash_row"].tolist()) == [0, 1]
    assert found.proposals["share_minor"].sum() == -100_007
    assert set(found.proposals["group"].tolist()) == {0}


def test_two_coupons_in_one_entry() -> None:
    items = coupons({"coupon_date": "2026-03-26"}, {"terms_minor": 100_000_000, "kind": "redemption"})
    cash = entries({"bond": BOND, "amount_minor": 102_000_000, "narrative": "PAYMENT"})
    assert paid(items, cash) == {"E1": {"coupon 1": 2_000_000, "coupon 2": 100_000_000}}


def test_coupons_of_two_bonds_named_in_one_narrative() -> None:
    items = coupons({}, {"bond": OTHER, "terms_minor": 350_000}, {"bond": "ZZ0000000033", "terms_minor": 350_000})
    cash = entries({"narrative": f"COUPONS {BOND} {OTHER}", "amount_minor": 2_350_000})
    assert paid(items, cash) == {"E1": {"coupon 1": 2_000_000, "coupon 2": 350_000}}
