"""Entries that name their payments: who shares, who repeats."""

from __future__ import annotations

import pytest

from reconciler.records import MISSING
from tests.matching.hand import BOND, OTHER, E, booked, coupons, entries, paid, told_twice, trades, who


def test_named_parts_that_do_not_add_up_all_stand() -> None:
    cash = entries({"reference": "T1", "amount_minor": -50_000_000}, {"reference": "T1", "amount_minor": -40_000_000})
    assert who(trades({}), cash) == {"E1": ["trade T1"], "E2": ["trade T1"]}
    assert booked(trades({}), cash)["bank_minor"].tolist() == [-90_000_000]


def test_an_entry_that_fits_alone_leaves_the_others() -> None:
    cash = entries({"reference": "T1"}, {"reference": "T1", "amount_minor": -1_500})
    assert who(trades({}), cash) == {"E1": ["trade T1"]}


@pytest.mark.parametrize("separator", ["/", ";", " ", " AND ", ",", "+", " & "])
@pytest.mark.parametrize("where", ["reference", "narrative"])
def test_one_entry_names_several_trades(separator: str, where: str) -> None:
    items = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": 40_000_000, "bond": OTHER}, {"ticket": "T0003"})
    cash = entries({where: f"T0001{separator}T0002", "amount_minor": E + 40_000_000})
    assert paid(items, cash) == {"E1": {"trade T1": E, "trade T2": 40_000_000}}


def test_the_rest_of_a_unit_goes_to_the_largest() -> None:
    items = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": -40_000_000})
    cash = entries({"reference": "T0001 T0002", "amount_minor": E - 40_000_001})
    assert paid(items, cash) == {"E1": {"trade T1": E - 1, "trade T2": -40_000_000}}


def test_an_entry_that_names_several_but_pays_one() -> None:
    items = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": -40_000_000})
    assert who(items, entries({"reference": "T0001 T0002"})) == {"E1": ["trade T1"]}


def test_an_entry_that_names_several_and_fits_nothing_pays_them_all() -> None:
    items = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": -40_000_000})
    cash = entries({"reference": "T0001 T0002", "amount_minor": E - 41_000_000})
    assert paid(items, cash) == {"E1": {"trade T1": E - 1_000_000, "trade T2": -40_000_000}}


def test_a_knot_of_names_is_untied_by_amounts() -> None:
    items = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": -40_000_000})
    cash = entries({"reference": "T0001 T0002"}, {"reference": "T0001 T0002", "amount_minor": -40_000_000})
    assert paid(items, cash) == {"E1": {"trade T1": E}, "E2": {"trade T2": -40_000_000}}


def test_a_wrong_amount_told_twice() -> None:
    cash = entries({"reference": "T1", "amount_minor": -7_777_777}, {"reference": "T1", "amount_minor": -7_777_777})
    assert who(trades({}), cash) == {"E1": ["trade T1"]}
    assert told_twice(trades({}), cash) == {("E2", "E1")}
    cash = entries({"bond": BOND, "amount_minor": 1_700_000}, {"bond": BOND, "amount_minor": 1_700_000})
    assert who(coupons({}), cash) == {"E1": ["coupon 1"]}
    assert told_twice(coupons({}), cash) == {("E2", "E1")}


def test_a_named_payment_whose_amount_nobody_knows() -> None:
    items = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": MISSING}, {"ticket": "T0003", "terms_minor": MISSING})
    assert paid(items, entries({"reference": "T0002", "amount_minor": -777})) == {"E1": {"trade T2": -777}}
    assert paid(items, entries({"reference": "T0001 T0002", "amount_minor": E - 777})) == {"E1": {"trade T1": E, "trade T2": -777}}
    cash = entries({"reference": "T0002", "amount_minor": -777}, {"reference": "T0002", "amount_minor": -223})
    assert paid(items, cash) == {"E1": {"trade T2": -777}, "E2": {"trade T2": -223}}
