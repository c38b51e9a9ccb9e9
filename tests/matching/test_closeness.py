"""Entries whose amount differs and that still clearly belong to a payment."""

from __future__ import annotations

import pytest

from reconciler.records import MISSING, concat
from tests.matching.hand import BOND, Change, E, coupons, entries, trades, who


def test_coupon_trade_and_redemption_are_told_apart() -> None:
    items = concat([
        trades({"terms_minor": 99_500_000}),
        coupons({"terms_minor": 2_000_000}, {"kind": "redemption", "terms_minor": 100_000_000}),
    ])  # fmt: skip
    cash = entries(
        {"bond": BOND, "amount_minor": 1_700_000}, {"bond": BOND, "amount_minor": 99_490_000, "narrative": "SECURITIES SALE"},
        {"bond": BOND, "amount_minor": 99_985_000, "narrative": "REDEMPTION 2026"},
    )  # fmt: skip
    assert who(items, cash) == {"E1": ["coupon 1"], "E2": ["trade T1"], "E3": ["coupon 2"]}


@pytest.mark.parametrize(
    "entry, found",
    [
        pytest.param({"amount_minor": 1_700_000}, True, id="tax withheld"),
        pytest.param({"amount_minor": 1_000_000}, True, id="half"),
        pytest.param({"amount_minor": 200_000, "narrative": "COUPON"}, True, id="a digit lost"),
        pytest.param({"amount_minor": 4_000_000, "narrative": "COUPON"}, True, id="double"),
        pytest.param({"amount_minor": 1_998_500, "value_date": "2026-03-30"}, True, id="a charge, late"),
        pytest.param({"amount_minor": -1_700_000}, False, id="the other direction"),
        pytest.param({"amount_minor": 1_700_000, "value_date": "2026-02-26"}, False, id="a month before"),
        pytest.param({"amount_minor": 1_700_000, "narrative": "SECURITIES SALE"}, False, id="another kind"),
        pytest.param({"amount_minor": 90_000_000}, False, id="another size"),
        pytest.param({"amount_minor": 1_700_000, "account": "BIRCH-2"}, False, id="another account and amount"),
        pytest.param({"amount_minor": 2_000_000, "account": "BIRCH-2"}, True, id="another account"),
        pytest.param({"amount_minor": 2_000_000, "currency": "USD"}, True, id="another currency"),
        pytest.param({"amount_minor": 2_000_000, "account": "BIRCH-2", "currency": "USD"}, False, id="another account and currency"),
        pytest.param({"amount_minor": -2_000_000}, True, id="the wrong way round"),
    ],
)
def test_with_the_bond_told(entry: Change, found: bool) -> None:
    assert who(coupons({}), entries({"bond": BOND, "narrative": "", **entry})) == ({"E1": ["coupon 1"]} if found else {})


@pytest.mark.parametrize(
    "entry, found",
    [
        pytest.param({"amount_minor": E + 1_500}, True, id="a charge"),
        pytest.param({"amount_minor": E + 1_500, "value_date": "2026-03-27"}, True, id="a charge, a day late"),
        pytest.param({"amount_minor": E + 1_500, "value_date": "2026-04-27"}, False, id="a month late"),
        pytest.param({"amount_minor": E + 40_000_000}, False, id="another amount"),
        pytest.param({"amount_minor": E, "value_date": "2026-04-27"}, False, id="the amount a month later"),
        pytest.param({"amount_minor": E, "narrative": "COUPON"}, False, id="another kind"),
        pytest.param({"amount_minor": E, "account": "BIRCH-2"}, False, id="another account"),
        pytest.param({"amount_minor": E, "currency": "USD"}, False, id="another currency"),
        pytest.param({"amount_minor": -E}, False, id="the other direction"),
    ],
)
def test_without_any_name(entry: Change, found: bool) -> None:
    assert who(trades({}), entries(entry)) == ({"E1": ["trade T1"]} if found else {})


def test_the_clearly_nearer_of_two_amounts() -> None:
    """One is fifteen cents off on its day, the other six percent and two days."""
    items = trades({"terms_minor": -16_178_336}, {"terms_minor": -15_207_477, "terms_date": "2026-03-28"})
    assert who(items, entries({"bond": BOND, "amount_minor": -16_178_351})) == {"E1": ["trade T1"]}
    assert who(items, entries({"bond": BOND, "amount_minor": -15_700_000})) == {}


def test_what_is_gone_makes_the_next_one_clear() -> None:
    items = trades({"terms_minor": -1_000_000}, {"terms_minor": -1_001_000})
    cash = entries({"bond": BOND, "amount_minor": -1_000_010}, {"bond": BOND, "amount_minor": -1_400_000})
    assert who(items, cash) == {"E1": ["trade T1"], "E2": ["trade T2"]}


def test_a_payment_whose_amount_nobody_knows() -> None:
    items = coupons({"terms_minor": MISSING})
    assert who(items, entries({"bond": BOND, "amount_minor": 1_234_500, "narrative": "COUPON"})) == {"E1": ["coupon 1"]}
    assert who(items, entries({"bond": BOND, "amount_minor": 1_234_500, "narrative": "SALE"})) == {}
    assert who(items, entries({"bond": BOND, "amount_minor": 5}, {"bond": BOND, "amount_minor": 6})) == {}
