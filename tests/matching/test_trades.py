"""Which confirmation speaks of which ticket: every stage, and what must always hold."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reconciler.matching.trades import pair_trades
from reconciler.records import CONFIRMATIONS, TICKETS, table
from tests.matching.hand import confirmations, names, paired, repeats, shuffled, tickets

NEAR = {"settlement_minor": 99_912_345 + 77}
Change = dict[str, Any]


def test_equal_facts_pair_without_a_reference() -> None:
    assert paired(tickets({}), confirmations({})) == {("T1", "B1")}


@pytest.mark.parametrize(
    "ticket, confirmation",
    [
        pytest.param({}, {"desk_reference": "T1"}, id="ours told by the broker"),
        pytest.param({"broker_reference": "B1"}, {}, id="the broker's told by the desk"),
    ],
)
@pytest.mark.parametrize(
    "wrong",
    [
        {"face_minor": 1_000_000_000, "settlement_minor": 999_123_450}, {"side": -1}, {"bond": "ZZ0000000025"},
        {"price_e12": 98 * 10**12, "settlement_minor": 98_412_345}, {"trade_date": "2026-03-20", "settlement_date": "2026-03-31"},
        {"currency": "USD", "account": "BIRCH-2"}, {"face_minor": 5_000_000, "price_e12": 80 * 10**12, "settlement_minor": 4_020_617},
    ],
    ids=lambda told: "+".join(told),
)  # fmt: skip
def test_a_reference_decides_even_where_facts_differ(ticket: Change, confirmation: Change, wrong: Change) -> None:
    assert paired(tickets(ticket), confirmations({**confirmation, **wrong})) == {("T1", "B1")}


def test_a_reference_that_everything_contradicts_is_a_slip() -> None:
    other = {"bond": "ZZ0000000025", "side": -1, "face_minor": 7_000_000, "price_e12": 12 * 10**12, "settlement_minor": 840_000}
    assert paired(tickets({}), confirmations({"desk_reference": "T1", **other})) == {("T1", ""), ("", "B1")}


def test_a_reference_beats_equal_facts_elsewhere() -> None:
    told = tickets({}, {"face_minor": 200_000_000})
    assert paired(told, confirmations({"desk_reference": "T2"}, {"desk_reference": "T1"})) == {("T2", "B1"), ("T1", "B2")}


def test_of_two_confirmations_with_one_reference_the_more_alike_takes_the_ticket() -> None:
    told = tickets({}, {"face_minor": 200_000_000, "settlement_minor": 199_824_690})
    confirmed = confirmations(
        {"desk_reference": "T1", "face_minor": 200_000_000, "settlement_minor": 199_824_690}, {"desk_reference": "T1"}
    )
    assert paired(told, confirmed) == {("T1", "B2"), ("T2", "B1")}


def test_another_broker_pairs_by_our_reference_only() -> None:
    other = {"broker": "Orrin & Teale"}
    assert paired(tickets({}), confirmations(other)) == {("T1", ""), ("", "B1")}
    assert paired(tickets({}), confirmations({**other, "desk_reference": "T1"})) == {("T1", "B1")}
    assert paired(tickets({"broker_reference": "B1"}), confirmations(other)) == {("T1", ""), ("", "B1")}


def test_a_ticket_that_names_no_broker_pairs_by_everything_else() -> None:
    assert paired(tickets({"broker": ""}), confirmations({})) == {("T1", "B1")}


@pytest.mark.parametrize(
    "wrong",
    [
        {"settlement_minor": 99_999_999}, {"settlement_date": "2026-03-27"}, {"settlement_date": "2026-03-27", **NEAR},
        {"trade_date": "2026-03-23"}, {"price_e12": 99_375 * 10**9, "settlement_minor": 99_787_345}, {"price_e12": 9_950 * 10**9},
        {"face_minor": 1_000_000_000, "settlement_minor": 999_123_450}, {"face_minor": 100_000, "settlement_minor": 99_912},
        {"side": -1}, {"side": -1, **NEAR}, {"bond": "ZZ0000000071"}, {"bond": "ZZ0000000025"}, {"currency": "USD"},
        {"account": "BIRCH-2"}, {"account": "THEIR OWN 77"}, {"trade_date": "NaT"}, {"trade_date": "NaT", "settlement_date": "NaT"},
        {"price_e12": np.iinfo(np.int64).min}, {"settlement_minor": np.iinfo(np.int64).min},
        {"trade_date": "2026-03-23", "settlement_date": "2026-03-25", **NEAR},
    ],
    ids=lambda told: "+".join(f"{name}" for name in told),
)  # fmt: skip
def test_one_fault_does_not_keep_a_lone_pair_apart(wrong: Change) -> None:
    assert paired(tickets({}), confirmations(wrong)) == {("T1", "B1")}


@pytest.mark.parametrize(
    "other",
    [
        {"bond": "ZZ0000000025", "settlement_minor": 93_112_345}, {"broker": "Orrin & Teale"},
        {"face_minor": 25_000_000, "price_e12": 98 * 10**12, "settlement_minor": 24_603_086, "side": -1},
        {"trade_date": "2026-01-05", "settlement_date": "2026-01-07"},
    ],
    ids=lambda told: "+".join(told),
)  # fmt: skip
def test_an_unlike_trade_stays_apart(other: Change) -> None:
    assert paired(tickets({}), confirmations(other)) == {("T1", ""), ("", "B1")}


def test_what_might_be_either_stays_apart() -> None:
    """Two tickets at two prices, one confirmation at a third: nobody can tell."""
    told = tickets({"price_e12": 99 * 10**12, "settlement_minor": 99_412_345}, {"price_e12": 98 * 10**12, "settlement_minor": 98_412_345})
    confirmed = confirmations({"price_e12": 98_500 * 10**9, "settlement_minor": 98_912_345})
    assert paired(told, confirmed) == {("T1", ""), ("T2", ""), ("", "B1")}


def test_of_equal_deals_the_one_with_the_nearer_amount() -> None:
    told = tickets({"settlement_minor": 99_912_345}, {"settlement_minor": 99_962_345, "fees_minor": 50_000})
    assert paired(told, confirmations({"settlement_minor": 99_962_349})) == {("T1", ""), ("T2", "B1")}


def test_accounts_tell_equal_deals_apart() -> None:
    told = tickets({"account": "ALDER-1"}, {"account": "BIRCH-2"})
    assert paired(told, confirmations({"account": "BIRCH-2"}, {"account": ""})) == {("T1", "B2"), ("T2", "B1")}


def test_interchangeable_rows_pair_by_content() -> None:
    assert paired(tickets({}, {}), confirmations({}, {})) == {("T1", "B1"), ("T2", "B2")}
    assert paired(tickets({}, {}), confirmations({})) == {("T1", "B1"), ("T2", "")}


def test_a_crowd_of_equal_deals_pairs_in_the_order_of_amounts() -> None:
    told = tickets(*({"settlement_minor": 1_000_000 + 10 * n} for n in range(80)))
    confirmed = confirmations(*({"settlement_minor": 1_000_003 + 10 * n} for n in reversed(range(80))))
    pairs = pair_trades(told, confirmed)
    apart = told["settlement_minor"][pairs.ticket_row] - confirmed["settlement_minor"][pairs.confirmation_row]
    assert apart.tolist() == [-3] * 80


def test_yen_told_as_euros_still_pair() -> None:
    """A face of a million: 1,000,000 smallest units in yen, 100,000,000 in euros."""
    wrong = {"currency": "JPY", "face_minor": 1_000_000, "settlement_minor": 999_123, "accrued_minor": 4_123}
    assert paired(tickets({}), confirmations(wrong)) == {("T1", "B1")}


def test_a_cancelled_ticket_nobody_confirms_is_no_trade() -> None:
    told = tickets({"status": 2})
    pairs = pair_trades(told, confirmations())
    assert len(pairs) == 0
    assert pairs.quiet.tolist() == [0]


def test_a_cancelled_ticket_that_is_confirmed_is_a_trade_without_a_ticket() -> None:
    assert paired(tickets({"status": 2}), confirmations({})) == {("[T1]", "B1")}
    assert paired(tickets({"status": 2}), confirmations({"desk_reference": "T1", "face_minor": 5})) == {("[T1]", "B1")}


def test_a_trade_cancelled_and_booked_anew_is_confirmed_once() -> None:
    for confirmation in ({}, {"desk_reference": "T1"}):
        told = tickets({"status": 2}, {})
        assert paired(told, confirmations(confirmation)) == {("T2", "B1")}


@pytest.mark.parametrize("status, left", [((0, 1), {("T1", "B1")}), ((0, 2), {("T1", "")}), ((1, 2), {("T1", "")}), ((0, 1, 2), {("T1", "")})])
def test_an_amended_confirmation_stands_and_a_cancelled_one_takes_all_away(status: tuple[int, ...], left: set[tuple[str, str]]) -> None:
    confirmed = confirmations(*({"broker_reference": "B1", "status": s, "settlement_minor": 99_912_345 + s} for s in status))
    pairs = pair_trades(tickets({}), confirmed)
    assert names(pairs, tickets({}), confirmed) == left
    assert len(pairs.set_aside) == len(status) - (left == {("T1", "B1")})
    assert len(pairs.repeats) == 0


def test_a_confirmation_cancelled_leaves_others_alone() -> None:
    confirmed = confirmations({"broker_reference": "B1", "status": 2}, {"broker_reference": "B2"})
    assert paired(tickets({}), confirmed) == {("T1", "B2")}


def test_no_rows_give_no_trades() -> None:
    pairs = pair_trades(table(TICKETS), table(CONFIRMATIONS))
    assert len(pairs) == len(pairs.repeats) == len(pairs.set_aside) == len(pairs.quiet) == 0
    assert paired(tickets({}), confirmations()) == {("T1", "")}
    assert paired(tickets(), confirmations({})) == {("", "B1")}


def test_a_reference_that_everybody_uses_says_nothing() -> None:
    told = tickets(*({"broker_reference": "N/A", "face_minor": 1_000_000 * n} for n in range(1, 21)))
    confirmed = confirmations(*({"broker_reference": "N/A", "face_minor": 1_000_000 * n} for n in range(20, 0, -1)))
    pairs = pair_trades(told, confirmed)
    assert told["face_minor"][pairs.ticket_row].tolist() == confirmed["face_minor"][pairs.confirmation_row].tolist()


DEALS = st.fixed_dictionaries({
    "bond": st.sampled_from(["ZZ0000000017", "ZZ0000000025"]), "side": st.sampled_from([1, -1]),
    "face_minor": st.sampled_from([100, 200]), "price_e12": st.sampled_from([99, 100]), "settlement_minor": st.sampled_from([99, 100, 200]),
    "trade_date": st.sampled_from(["2026-03-24", "2026-03-25", "NaT"]), "broker": st.sampled_from(["Tamarisk & Vane", "Orrin & Teale"]),
    "account": st.sampled_from(["", "ALDER-1", "BIRCH-2"]), "status": st.sampled_from([0, 0, 0, 1, 2]),
})  # fmt: skip
TOLD = st.lists(st.tuples(DEALS, st.sampled_from(["", "B1", "B2", "B3"])), max_size=7)
CONFIRMED = st.lists(st.tuples(DEALS, st.sampled_from(["", "T1", "T2", "T9"]), st.sampled_from(["", "B1", "B2", "B3"])), max_size=7)


def _content(table_: Any, row: int) -> tuple[Any, ...]:
    return tuple(str(value) for value in table_.row(row).values()) if row >= 0 else ()


@settings(max_examples=150, deadline=None)
@given(TOLD, CONFIRMED, st.randoms(use_true_random=False))
def test_every_row_lands_in_one_place_whatever_its_order(
    told: list[tuple[Change, str]], confirmed: list[tuple[Change, str, str]], chance: Any
) -> None:
    mine = tickets(*({**deal, "broker_reference": own} for deal, own in told))
    theirs = confirmations(*({**deal, "desk_reference": ours, "broker_reference": own} for deal, ours, own in confirmed))
    outcomes = []
    for turn in range(2):
        order = [list(range(len(mine))), list(range(len(theirs)))]
        if turn:
            chance.shuffle(order[0])
            chance.shuffle(order[1])
        a, b = shuffled(mine, order[0]), shuffled(theirs, order[1])
        pairs = pair_trades(a, b)
        again = pairs.repeats["row"][pairs.repeats["kind"].holds("confirmation")].tolist()
        lands = [*pairs.ticket_row[pairs.ticket_row >= 0], *pairs.cancelled_row[pairs.cancelled_row >= 0], *pairs.quiet]
        assert sorted(lands) == list(range(len(a)))
        lands = [*pairs.confirmation_row[pairs.confirmation_row >= 0], *again, *pairs.set_aside]
        assert sorted(lands) == list(range(len(b)))
        outcomes.append((
            sorted((_content(a, t), _content(b, c), _content(a, v))
                   for t, c, v in zip(pairs.ticket_row, pairs.confirmation_row, pairs.cancelled_row, strict=True)),
            repeats(pairs, a, b),
        ))  # fmt: skip
    assert outcomes[0] == outcomes[1]
