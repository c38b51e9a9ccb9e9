"""The columns that cash matching looks at, and what narratives speak of."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.matching.board import COUPON, REDEMPTION, TRADE, Board, spoken
from reconciler.records import MISSING, Words, concat
from tests.matching.hand import coupons, entries, trades


@pytest.mark.parametrize(
    "narrative, kinds, undoes",
    [
        ("COUPON ZZ0000000017", COUPON, False), ("Interest payment", COUPON, False), ("redemption at par.", REDEMPTION, False),
        ("PRINCIPAL AND INTEREST", COUPON | REDEMPTION, False), ("DVP sale", TRADE, False), ("SALES TAX", 0, False), ("", 0, False),
        ("STORNO COUPON", COUPON, True), ("(reversal)", 0, True), ("REVERSED-", 0, True), ("IRREVERSIBLE", 0, False),
    ],
)  # fmt: skip
def test_what_a_narrative_speaks_of(narrative: str, kinds: int, undoes: bool) -> None:
    found = spoken(Words.of([narrative, "COUPON"]))
    assert (int(found[0][0]), bool(found[1][0])) == (kinds, undoes)
    assert int(found[0][1]) == COUPON


def test_amounts_days_and_kinds_of_payments() -> None:
    items = concat([
        trades({}, {"terms_minor": MISSING, "terms_date": "NaT", "desk_minor": 5, "desk_date": "2026-03-27"}, {"terms_minor": 0}),
        coupons({"terms_minor": MISSING}),
    ])  # fmt: skip
    board = Board(items, entries({"account": "ELSEWHERE"}), np.array([False, False, False, False]))
    assert board.i_expected.tolist() == [-99_912_345, 5, 0, MISSING]
    assert (board.i_days - board.e_days[0]).tolist() == [0, 1, 0, 0]
    assert board.i_kind.tolist() == [TRADE, TRADE, TRADE, COUPON]
    assert board.i_open.tolist() == [True, True, False, True]
    assert board.e_account[0] not in board.i_account.tolist()


def test_taken_rows_are_open_no_longer() -> None:
    board = Board(trades({}, {}), entries({}, {}, {}), np.zeros(2, np.bool_))
    board.take(np.array([1]), np.array([0]))
    board.repeat(np.array([2]), np.array([0]))
    assert [rows.tolist() for rows in board.open()] == [[0], [1]]
    assert [column.tolist() for column in board.taken()] == [[1], [0], [-99_912_345]]
    assert board.e_repeats.tolist() == [-1, -1, 0]


def test_silent_payments_wait_for_nothing() -> None:
    board = Board(trades({}, {}), entries({}), np.array([True, False]))
    assert board.open()[0].tolist() == [1]


@pytest.mark.parametrize("amount, slack, fits", [(100, 0, True), (205, 0, True), (101, 1, True), (102, 1, False), (0, 5, False)])
def test_any_of_the_told_amounts_fits(amount: int, slack: int, fits: bool) -> None:
    items = trades({"terms_minor": 100, "desk_minor": 205, "broker_minor": MISSING})
    board = Board(items, entries({}), np.zeros(1, np.bool_))
    assert board.fits(np.array([0]), np.array([amount]), slack).tolist() == [fits]
