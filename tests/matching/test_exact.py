"""Entries found by bond, amount and day."""

from __future__ import annotations

import pytest

from reconciler.records import MISSING
from tests.matching.hand import BOND, OTHER, Change, E, coupons, entries, trades, who


@pytest.mark.parametrize(
    "entry",
    [
        {"reference": "T1"}, {"reference": "t1"}, {"narrative": "SALE OF BONDS"}, {"bond": BOND}, {"reference": BOND},
        {"narrative": f"SETTLEMENT {BOND}, account holders"}, {"narrative": f"settlement {BOND.lower()}"}, {"reference": "", "narrative": ""},
        {"bond": BOND, "value_date": "2026-04-02"}, {"bond": BOND, "value_date": "2026-03-25"}, {"bond": BOND, "amount_minor": E + 1},
        {"value_date": "2026-03-27"}, {"value_date": "2026-03-24"}, {"amount_minor": E - 1},
    ],
    ids=str,
)  # fmt: skip
def test_the_amount_to_the_cent_finds_its_payment(entry: Change) -> None:
    if "SALE" in str(entry):
        assert who(trades({}), entries({"narrative": "COUPON"})) == {}
    assert who(trades({}), entries(entry)) == {"E1": ["trade T1"]}


def test_the_bank_may_pay_what_the_broker_or_the_desk_told() -> None:
    items = trades({"terms_minor": E, "desk_minor": E - 4_000, "broker_minor": E - 9_000})
    for amount in (E, E - 4_000, E - 9_000):
        assert who(items, entries({"amount_minor": amount})) == {"E1": ["trade T1"]}


def test_an_unknown_amount_is_found_by_the_desks() -> None:
    items = trades({"terms_minor": MISSING, "terms_date": "NaT", "desk_minor": E, "desk_date": "2026-03-26"})
    assert who(items, entries({})) == {"E1": ["trade T1"]}


def test_without_any_name_only_where_nothing_else_is_meant() -> None:
    two = trades({}, {"bond": OTHER})
    assert who(two, entries({})) == {}
    assert who(two, entries({}, {})) == {"E1": ["trade T1"], "E2": ["trade T2"]}
    assert who(two, entries({"amount_minor": E + 900})) == {}
    assert who(trades({}), entries({}, {"value_date": "2026-03-27"})) == {"E1": ["trade T1"]}


def test_another_account_only_where_nothing_waits_there() -> None:
    cash = entries({"bond": BOND, "account": "BIRCH-2", "amount_minor": 2_000_000})
    items = coupons({}, {"account": "BIRCH-2", "terms_minor": 2_500_000})
    assert who(items, cash) == {"E1": ["coupon 2"]}


def test_the_nearest_day_first() -> None:
    items = coupons({"terms_date": "2026-03-16"}, {"terms_date": "2026-03-26"})
    cash = entries({"bond": BOND, "amount_minor": 2_000_000, "value_date": "2026-03-27"},
                   {"bond": BOND, "amount_minor": 2_000_000, "value_date": "2026-03-18"})  # fmt: skip
    assert who(items, cash) == {"E1": ["coupon 2"], "E2": ["coupon 1"]}


def test_a_late_payment_without_a_known_day_is_left() -> None:
    items = trades({"terms_date": "NaT"})
    assert who(items, entries({"bond": BOND})) == {}
    assert who(items, entries({"reference": "T1"})) == {"E1": ["trade T1"]}


@pytest.mark.parametrize("entry", [{"bond": BOND}, {}, {"bond": BOND, "value_date": "2026-03-30"}], ids=str)
def test_a_payment_whose_account_nobody_told(entry: Change) -> None:
    assert who(trades({"account": ""}), entries(entry)) == {"E1": ["trade T1"]}
    assert who(trades({"account": ""}), entries(entry, {**entry, "account": "BIRCH-2"})) == {}
