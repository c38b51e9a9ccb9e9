"""Which coupons and redemptions are expected, on which face, and when: amounts by head."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reconciler.expected.coupons import expect_coupons
from reconciler.expected.settlements import expect_trades
from reconciler.records import ITEMS, MISSING, Table, table
from tests.expected.hand import (
    BOND,
    OTHER,
    Change,
    bonds,
    confirmations,
    holdings,
    pairs,
    rows,
    terms_of,
    tickets,
)

NO_TRADES = table(ITEMS)
Span = tuple[str, str]
MARCH: Span = ("2026-03-10", "2026-03-31")
PAYS: Change = {"accrual_start": "2020-03-22", "maturity": "2030-03-22"}
"""Pays on 22 March 2026, a Sunday: on Monday the 23rd. The record day is Friday the 20th."""


def due(
    bond: Change, held: Table, trades: Table = NO_TRADES, span: Span = MARCH, rates: list[Change] | None = None, factors: list[Change] | None = None
) -> Table:
    told = bonds(bond)
    return expect_coupons(terms_of(told, rates, factors), told, held, trades, np.datetime64(span[0]), np.datetime64(span[1]))


def traded(*changes: Change, **more: Any) -> Table:
    told = bonds(PAYS)
    return expect_trades(terms_of(told), told, tickets(*changes), confirmations(), pairs(*((n, -1) for n in range(len(changes))), **more))


def test_a_coupon_in_every_column() -> None:
    found = due(PAYS, holdings({}))
    assert len(found) == 1
    item = found.row(0)
    assert (item["item"], item["kind"], item["account"], item["bond"]) == (f"coupon ALDER-1 {BOND} 2026-03-22", "coupon", "ALDER-1", BOND)
    assert (item["terms_minor"], item["face_minor"], item["currency"], item["side"]) == (6_000_000, 100_000_000, "EUR", 0)
    assert (str(item["coupon_date"]), str(item["terms_date"]), str(item["record_date"])) == ("2026-03-22", "2026-03-23", "2026-03-20")
    assert (item["bond_row"], item["ticket_row"], item["confirmation_row"], item["desk_minor"]) == (0, -1, -1, MISSING)


@pytest.mark.parametrize(
    "since, date, expected",
    [("2026-03-23", "2026-03-23", 1), ("2026-03-22", "2026-03-22", 0), ("2026-03-24", "2026-03-31", 0), ("2025-03-01", "2026-03-31", 2)],
)
def test_the_payment_date_must_lie_in_the_window(since: str, date: str, expected: int) -> None:
    assert len(due(PAYS, holdings({}), span=(since, date))) == expected


@pytest.mark.parametrize(
    "trade, face",
    [
        pytest.param({"trade_date": "2026-03-18"}, 200_000_000, id="settles on the record day, Friday"),
        pytest.param({"trade_date": "2026-03-19"}, 100_000_000, id="settles on Monday, after it"),
        pytest.param({"trade_date": "2026-03-18", "side": -1}, None, id="all sold"),
        pytest.param({"trade_date": "2026-03-18", "side": -1, "face_minor": 150_000_000}, -50_000_000, id="short"),
        pytest.param({"trade_date": "2026-02-25"}, 100_000_000, id="in the holding already"),
        pytest.param({"trade_date": "2026-03-18", "account": "BIRCH-2"}, 100_000_000, id="another account"),
    ],
)
def test_the_face_held_at_the_close_of_the_record_day(trade: Change, face: int | None) -> None:
    found = due(PAYS, holdings({}), traded(trade))
    mine = found["account"].holds("ALDER-1")
    assert found["face_minor"][mine].tolist() == ([] if face is None else [face])
    assert found["terms_minor"][mine].tolist() == ([] if face is None else [face * 6 // 100])
    assert len(found) == mine.sum() + ("account" in trade)


def test_a_holding_known_later_is_taken_back_to_the_record_day() -> None:
    later = holdings({"as_of": "2026-03-31", "face_minor": 300_000_000})
    assert due(PAYS, later, traded({"trade_date": "2026-03-19"}))["face_minor"].tolist() == [200_000_000]


def test_only_tickets_in_force_that_repeat_no_other_move_a_holding() -> None:
    told = bonds(PAYS)
    terms, mine, theirs = terms_of(told), tickets(*({"trade_date": "2026-03-18"} for _ in range(3))), confirmations({"trade_date": "2026-03-18"})
    paired = pairs((0, -1), (1, -1), (-1, 0), cancelled=(2,), repeats=((1, 0),))
    trades = expect_trades(terms, told, mine, theirs, paired)
    window = np.datetime64(MARCH[0]), np.datetime64(MARCH[1])
    assert expect_coupons(terms, told, holdings({}), trades, *window, paired.repeats)["face_minor"].tolist() == [200_000_000]
    assert expect_coupons(terms, told, holdings({}), trades, *window)["face_minor"].tolist() == [300_000_000]


def test_the_last_coupon_and_the_redemption_are_two_payments() -> None:
    found = due({**PAYS, "maturity": "2026-03-22", "redemption_price_e12": 101 * 10**12}, holdings({}))
    assert found["item"].to_list() == [f"coupon ALDER-1 {BOND} 2026-03-22", f"redemption ALDER-1 {BOND} 2026-03-22"]
    assert found["terms_minor"].tolist() == [6_000_000, 101_000_000]
    assert [str(day) for day in found["terms_date"]] == ["2026-03-23", "2026-03-23"]


def test_a_zero_is_redeemed_only() -> None:
    found = due({"kind": "zero", "frequency": 0, "coupon_rate_e9": MISSING, "maturity": "2026-03-18"}, holdings({}))
    assert (found["kind"].to_list(), found["terms_minor"].tolist()) == (["redemption"], [100_000_000])


def test_a_factor_that_drops_pays_a_part_back() -> None:
    """From 0.8 to 0.7 of the face on the coupon day: the coupon still on 0.8, a tenth of the face paid back."""
    steps = [{"bond": BOND, "from": "2025-03-22", "factor_e12": 8 * 10**11}, {"bond": BOND, "from": "2026-03-22", "factor_e12": 7 * 10**11}]
    found = due({**PAYS, "kind": "amortising"}, holdings({}), factors=steps)
    assert found["kind"].to_list() == ["coupon", "redemption"]
    assert found["terms_minor"].tolist() == [4_800_000, 10_000_000]


def test_a_rate_not_fixed_leaves_the_amount_open() -> None:
    floater = {**PAYS, "kind": "floating", "coupon_rate_e9": MISSING}
    assert due(floater, holdings({}))["terms_minor"].tolist() == [MISSING]
    fixing = [{"bond": BOND, "from": "2025-03-22", "rate_e9": 3 * 10**9}]
    assert due(floater, holdings({}), rates=fixing)["terms_minor"].tolist() == [3_000_000]


@pytest.mark.parametrize(
    "bond", [{"coupon_rate_e9": 0}, {"day_count": "Act/364"}, {"frequency": 0, "kind": "zero", "maturity": "2031-03-22"}], ids=str
)
def test_nothing_is_expected_where_nothing_is_paid(bond: Change) -> None:
    assert len(due({**PAYS, **bond}, holdings({}))) == 0


def test_nobody_holds_nothing_expected() -> None:
    assert len(due(PAYS, rows({"account": "text", "bond": "text", "face_minor": "int64", "as_of": "date"}, []))) == 0
    assert len(due(PAYS, holdings({"face_minor": 0}))) == 0


def test_all_accounts_bonds_and_days() -> None:
    told = bonds({**PAYS, "bond": OTHER, "frequency": 12}, PAYS)
    held = holdings({"account": "BIRCH-2"}, {}, {"bond": OTHER})
    found = expect_coupons(terms_of(told), told, held, NO_TRADES, np.datetime64("2026-02-01"), np.datetime64("2026-03-31"))
    assert dict(zip(found["item"].to_list(), found["terms_minor"].tolist(), strict=True)) == {
        f"coupon ALDER-1 {OTHER} 2026-02-22": 500_000, f"coupon ALDER-1 {OTHER} 2026-03-22": 500_000,
        f"coupon BIRCH-2 {BOND} 2026-03-22": 6_000_000, f"coupon ALDER-1 {BOND} 2026-03-22": 6_000_000,
    }  # fmt: skip
