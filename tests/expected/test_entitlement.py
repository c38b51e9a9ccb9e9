"""What an account holds on a day: told for one day, moved by trades before and after it."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.expected.entitlement import held, positions
from reconciler.records import HOLDINGS, ITEMS, Table, table
from tests.expected.hand import BOND, OTHER, Change, bonds, holdings, rows

TOLD = bonds({}, {"bond": OTHER})


def trade(day: str, face: int, side: int = 1, account: str = "ALDER-1", bond_row: int = 0) -> Change:
    return {"terms_date": day, "face_minor": face, "side": side, "account": account, "bond_row": bond_row, "ticket_row": 0}


def face_on(day: str, told: Table, moved: list[Change], account: str = "ALDER-1", bond_row: int = 0) -> int:
    of = positions(TOLD, told, rows(ITEMS, moved))
    for n in range(len(of)):
        if of.account.text(n) == account and of.bond_row[n] == bond_row:
            return int(held(of, np.array([n]), np.array([day], "datetime64[D]"))[0])
    raise LookupError(account)


@pytest.mark.parametrize(
    "day, face",
    [("2026-03-01", 100), ("2026-03-09", 100), ("2026-03-10", 140), ("2026-03-20", 115), ("2026-02-20", 90), ("2026-02-19", 100),
     ("2026-02-14", 100)],
)  # fmt: skip
def test_trades_move_a_holding_forward_and_back(day: str, face: int) -> None:
    """100 at the close of 1 March; 10 sold on 19 and bought back on 28 February, 40 bought on 10 and 25 sold on 20 March."""
    moved = [trade("2026-02-20", 10, -1), trade("2026-02-28", 10), trade("2026-03-10", 40), trade("2026-03-20", 25, -1)]
    assert face_on(day, holdings({"face_minor": 100}), moved) == face


def test_a_trade_that_settles_on_the_known_day_is_in_it() -> None:
    assert face_on("2026-03-05", holdings({"face_minor": 100}), [trade("2026-03-01", 30)]) == 100
    assert face_on("2026-02-27", holdings({"face_minor": 100}), [trade("2026-03-01", 30)]) == 70


@pytest.mark.parametrize("day, face", [("2026-03-02", 100), ("2026-03-10", 500), ("2026-03-31", 500), ("2026-02-10", 100)])
def test_the_latest_known_day_counts(day: str, face: int) -> None:
    told = holdings({"face_minor": 500, "as_of": "2026-03-10"}, {"face_minor": 100})
    assert face_on(day, told, []) == face


def test_lots_of_one_day_are_one_holding() -> None:
    assert face_on("2026-03-02", holdings({"face_minor": 100}, {"face_minor": 7}), []) == 107


@pytest.mark.parametrize(
    "told, face",
    [
        pytest.param([], 40, id="no file at all"),
        pytest.param([{"bond": OTHER}], 40, id="known on 1 March for another bond"),
        pytest.param([{"bond": OTHER, "as_of": "2026-03-10"}], 0, id="nothing yet on the 10th, so bought and sold before"),
        pytest.param([{"account": "BIRCH-2"}], 40, id="another account is known"),
        pytest.param([{"account": "BIRCH-2", "as_of": "2026-03-10"}], 0, id="the file's first day"),
    ],
)
def test_who_is_not_in_the_file_held_nothing_on_its_first_day(told: list[Change], face: int) -> None:
    assert face_on("2026-03-12", holdings(*told) if told else table(HOLDINGS), [trade("2026-03-09", 40)]) == face


def test_accounts_and_bonds_are_kept_apart() -> None:
    told = holdings({"face_minor": 1}, {"account": "BIRCH-2", "face_minor": 2}, {"bond": OTHER, "face_minor": 4})
    moved = [trade("2026-03-10", 10), trade("2026-03-10", 20, account="BIRCH-2"), trade("2026-03-10", 40, bond_row=1)]
    assert face_on("2026-03-10", told, moved) == 11
    assert face_on("2026-03-10", told, moved, account="BIRCH-2") == 22
    assert face_on("2026-03-10", told, moved, bond_row=1) == 44


def test_a_short_position_is_negative() -> None:
    assert face_on("2026-03-10", holdings({"face_minor": -50}), [trade("2026-03-10", 10, -1)]) == -60


def test_what_cannot_be_placed_is_left_out() -> None:
    told = holdings({}, {"bond": "ZZ0000000033"}, {"account": ""})
    moved = [trade("NaT", 10), trade("2026-03-10", 10, 0), trade("2026-03-10", 10, account=""), trade("2026-03-10", 10, bond_row=-1)]
    assert len(positions(TOLD, told, rows(ITEMS, moved))) == 1
    assert face_on("2026-03-31", told, moved) == 100_000_000
    assert len(positions(TOLD, table(HOLDINGS), table(ITEMS))) == 0


DAYS = [f"2026-03-{day:02d}" for day in range(1, 9)]
MOVES = st.lists(st.tuples(st.sampled_from(DAYS), st.integers(1, 9), st.sampled_from([1, -1]), st.integers(0, 1)), max_size=8)
KNOWN = st.lists(st.tuples(st.sampled_from(DAYS), st.integers(-9, 9), st.integers(0, 1)), max_size=4, unique_by=lambda one: (one[0], one[2]))


@given(MOVES, KNOWN, st.sampled_from(DAYS))
def test_positions_add_up_as_in_a_ledger(moved: list[tuple[str, int, int, int]], known: list[tuple[str, int, int]], day: str) -> None:
    told = holdings(*({"bond": (BOND, OTHER)[bond], "as_of": on, "face_minor": face} for on, face, bond in known)) if known else table(HOLDINGS)
    trades = rows(ITEMS, [trade(on, face, side, bond_row=bond) for on, face, side, bond in moved])
    of = positions(TOLD, told, trades)
    found: dict[int, Any] = {int(of.bond_row[n]): int(held(of, np.array([n]), np.array([day], "datetime64[D]"))[0]) for n in range(len(of))}
    assert set(found) == {bond for *_, bond in moved} | {bond for *_, bond in known}
    for bond, face in found.items():
        days = sorted(on for on, _, b in known if b == bond)
        start = max((on for on in days if on <= day), default=days[0] if days else min((on for on, *_ in known), default=""))
        expected = sum(f for on, f, b in known if b == bond and on == start)
        expected += sum(f * side for on, f, side, b in moved if b == bond and start < on <= day)
        expected -= sum(f * side for on, f, side, b in moved if b == bond and day < on <= start)
        assert face == expected
