"""Confirmations and tickets told twice or superseded."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reconciler.matching.repeats import in_force
from reconciler.matching.trades import pair_trades
from tests.matching.hand import confirmations, names, repeats, tickets

Change = dict[str, Any]


@pytest.mark.parametrize(
    "again",
    [
        pytest.param({"broker_reference": "B1"}, id="same number, same facts"),
        pytest.param({"broker_reference": "B1", "settlement_minor": 99_900_000}, id="same number, other amount"),
        pytest.param({"broker_reference": "B9"}, id="another number, same facts"),
        pytest.param({"broker_reference": "B9", "desk_reference": "T1"}, id="another number, our reference"),
        pytest.param({"broker_reference": ""}, id="no number"),
    ],
)
def test_a_confirmation_told_twice(again: Change) -> None:
    told, confirmed = tickets({"broker_reference": "B1"}), confirmations({"desk_reference": "T1"}, again)
    pairs = pair_trades(told, confirmed)
    assert names(pairs, told, confirmed) == {("T1", "B1")}
    assert {(kind, of) for kind, _, of in repeats(pairs, told, confirmed)} == {("confirmation", "B1")}


@pytest.mark.parametrize(
    "other",
    [
        {"broker_reference": "B9", "settlement_minor": 99_900_000, "face_minor": 50}, {"broker_reference": "B9", "desk_reference": "T77"},
        {"broker_reference": "B9", "account": "BIRCH-2"}, {"broker_reference": "B9", "fees_minor": 5},
    ],
    ids=str,
)  # fmt: skip
def test_a_confirmation_of_something_else(other: Change) -> None:
    told, confirmed = tickets({"broker_reference": "B1"}), confirmations({"desk_reference": "T1"}, other)
    pairs = pair_trades(told, confirmed)
    assert names(pairs, told, confirmed) == {("T1", "B1"), ("", "B9")}
    assert len(pairs.repeats) == 0


def test_a_confirmation_without_a_ticket_told_twice_is_one_trade() -> None:
    told, confirmed = tickets(), confirmations({"broker_reference": "B1"}, {"broker_reference": "B1", "settlement_minor": 5}, {})
    pairs = pair_trades(told, confirmed)
    assert names(pairs, told, confirmed) == {("", "B1"), ("", "B3")}
    assert repeats(pairs, told, confirmed) == {("confirmation", "B1", "B1")}


def test_a_repeated_confirmation_answers_no_other_ticket() -> None:
    told = tickets({"broker_reference": "B1"}, {"price_e12": 98 * 10**12})
    confirmed = confirmations({}, {"broker_reference": "B1", "settlement_minor": 5})
    pairs = pair_trades(told, confirmed)
    assert names(pairs, told, confirmed) == {("T1", "B1"), ("T2", "")}


@pytest.mark.parametrize(
    "again, twice",
    [
        ({}, True), ({"broker_reference": "B1"}, True), ({"broker_reference": "B2"}, False), ({"face_minor": 5}, False),
        ({"account": "BIRCH-2"}, False), ({"status": 2}, False),
    ],
    ids=str,
)  # fmt: skip
def test_a_ticket_told_twice(again: Change, twice: bool) -> None:
    told, confirmed = tickets({"broker_reference": "B1"}, again), confirmations({"desk_reference": "T1"})
    pairs = pair_trades(told, confirmed)
    assert repeats(pairs, told, confirmed) == ({("ticket", "T2", "T1")} if twice else set())
    assert len(pairs) == (1 if again.get("status") == 2 else 2)


def test_two_equal_trades_both_confirmed_are_not_told_twice() -> None:
    told, confirmed = tickets({}, {}), confirmations({}, {})
    assert len(pair_trades(told, confirmed).repeats) == 0


def test_two_equal_tickets_nobody_confirms_are_two_tickets() -> None:
    told, confirmed = tickets({}, {}), confirmations()
    pairs = pair_trades(told, confirmed)
    assert len(pairs.repeats) == 0
    assert len(pairs) == 2


@pytest.mark.parametrize(
    "told, stands",
    [
        (({"status": 0}, {"status": 1}), [False, True]), (({"status": 1}, {"status": 0}, {"status": 2}), [False, False, False]),
        (({"status": 0}, {"status": 0}), [True, True]), (({"status": 1}, {"status": 1}), [True, True]),
        (({"status": 2, "broker": "Orrin & Teale"}, {"status": 0}), [False, True]),
    ],
)  # fmt: skip
def test_cancelled_beats_amended_beats_new(told: tuple[Change, ...], stands: list[bool]) -> None:
    assert in_force(confirmations(*({"broker_reference": "B1", **one} for one in told))).tolist() == stands


def test_a_cancellation_without_a_number_goes_by_our_reference_else_by_itself() -> None:
    blank = {"broker_reference": ""}
    assert in_force(confirmations({**blank, "desk_reference": "T1"}, {**blank, "desk_reference": "T1", "status": 2})).tolist() == [False, False]
    assert in_force(confirmations(blank, {**blank, "status": 2})).tolist() == [True, False]
    assert in_force(confirmations()).tolist() == np.zeros(0, bool).tolist()
