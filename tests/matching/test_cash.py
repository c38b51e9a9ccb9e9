"""Bank entries and payments as a whole: what the items say afterwards, pairing again, and what must always hold.

The stages have tests of their own: by_name, exact, groups, undone, closeness.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from reconciler.matching.cash import CashPairs, pair_again, pair_cash, with_bank
from reconciler.matching.trades import pair_trades
from reconciler.records import CASH, ITEMS, MISSING, Table, table
from tests.matching.hand import BOND, OTHER, Change, E, booked, confirmations, entries, shuffled, tickets, trades, who


def test_a_ticket_told_twice_is_paid_once() -> None:
    told, confirmed = tickets({"broker_reference": "B1"}, {"broker_reference": "B1"}), confirmations({})
    pairs = pair_trades(told, confirmed)
    again = int(pairs.repeats["row"][0])
    items = trades({"broker_reference": "B1", "ticket_row": 0}, {"broker_reference": "B1", "ticket_row": 1})
    for entry in ({"reference": "B1"}, {"bond": BOND}, {}):
        assert who(items, entries(entry), repeats=pairs.repeats) == {"E1": [f"trade T{2 - again}"]}
    assert who(items, entries({"reference": f"T{again + 1}"}), repeats=pairs.repeats) == {"E1": [f"trade T{again + 1}"]}


def test_what_pays_nothing_becomes_an_item_of_its_own() -> None:
    items, allocations = with_bank(trades({}), cash := entries({"reference": "T1"}, {"amount_minor": 555, "bond": OTHER}),
                                   pair_cash(trades({}), cash))  # fmt: skip
    assert items["item"].to_list() == ["trade T1", "bank E2"]
    loose = items.row(1)
    assert (loose["kind"], loose["account"], loose["bond"], loose["currency"]) == ("bank", "ALDER-1", OTHER, "EUR")
    assert (loose["bank_minor"], str(loose["bank_date"]), loose["bank_entries"]) == (555, "2026-03-26", "E2")
    assert allocations["item_row"].tolist() == [0, 1]
    assert allocations["cash_row"].tolist() == [0, 1]


def test_entries_stand_in_the_order_of_day_and_name() -> None:
    cash = entries({"reference": "T1", "amount_minor": -1, "value_date": "2026-03-27"}, {"reference": "T1", "amount_minor": E + 3},
                   {"reference": "T1", "amount_minor": -2, "entry": "A9"})  # fmt: skip
    row = booked(trades({}), cash).row(0)
    assert row["bank_entries"] == "A9;E2;E1"
    assert str(row["bank_date"]) == "2026-03-27"


def test_loose_entries_of_one_name_are_numbered() -> None:
    items = booked(trades({}), entries({"entry": "E", "amount_minor": 7}, {"entry": "E", "amount_minor": 5}))
    assert items["item"].to_list() == ["trade T1", "bank E", "bank E (2)"]
    assert items["bank_minor"].tolist() == [MISSING, 5, 7]


def test_a_morning_without_cash_or_without_payments() -> None:
    assert booked(trades({}), table(CASH))["bank_entries"].to_list() == [""]
    assert booked(table(ITEMS), entries({}))["item"].to_list() == ["bank E1"]
    assert len(booked(table(ITEMS), table(CASH))) == 0


def _same(one: CashPairs, other: CashPairs) -> bool:
    names = ("item_row", "cash_row", "share_minor")
    return all(one.allocations[name].tolist() == other.allocations[name].tolist() for name in names)


def test_pairing_again_keeps_what_did_not_change() -> None:
    before = trades({"ticket": "T0001"}, {"ticket": "T0002", "bond": OTHER}, {"terms_minor": -5_000_000, "ticket": "", "bond": OTHER})
    cash = entries({"reference": "T0001"}, {"reference": "T0002"}, {"bond": OTHER, "amount_minor": -4_000_000})
    first = pair_cash(before, cash)
    assert _same(pair_again(before, cash, before, first), first)
    now = before.with_columns(terms_minor=np.array([E, E - 9, -4_000_000]))
    assert _same(pair_again(now, cash, before, first), pair_cash(now, cash))
    fewer = before.take(np.array([2, 0]))
    assert _same(pair_again(fewer, cash, before, first), pair_cash(fewer, cash))


def test_pairing_again_takes_apart_who_shares_with_something_that_changed() -> None:
    before = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": -40_000_000})
    cash = entries({"reference": "T0001 T0002", "amount_minor": E - 40_000_000})
    first = pair_cash(before, cash)
    now = before.with_columns(terms_minor=np.array([E - 40_000_000, 7]))
    assert _same(pair_again(now, cash, before, first), pair_cash(now, cash))
    assert len(pair_again(now, cash, before, first).allocations) == 1


PAYMENT = st.fixed_dictionaries({
    "kind": st.sampled_from(["trade", "coupon", "redemption"]), "account": st.sampled_from(["ALDER-1", "BIRCH-2", ""]),
    "bond": st.sampled_from([BOND, OTHER]), "currency": st.sampled_from(["EUR", "USD"]), "ticket": st.sampled_from(["", "T0001", "T0002"]),
    "terms_minor": st.sampled_from([MISSING, 100, 200, 300, -100, -200]), "desk_minor": st.sampled_from([MISSING, 100, 250]),
    "terms_date": st.sampled_from(["2026-03-26", "2026-03-27", "2026-04-10", "NaT"]),
})  # fmt: skip
BOOKING = st.fixed_dictionaries({
    "account": st.sampled_from(["ALDER-1", "BIRCH-2"]), "bond": st.sampled_from(["", "", BOND, OTHER]), "currency": st.sampled_from(["EUR", "USD"]),
    "reference": st.sampled_from(["", "", "T0001", "T0002", "T0001 T0002"]), "narrative": st.sampled_from(["", "COUPON", f"{BOND} {OTHER}"]),
    "amount_minor": st.sampled_from([100, 200, 300, 400, 99, -100, -200, 70, 30]),
    "value_date": st.sampled_from(["2026-03-26", "2026-03-27", "2026-03-30"]),
})  # fmt: skip


def _content(table_: Table, row: int) -> str:
    return str([str(value) for value in table_.row(int(row)).values()])


@settings(max_examples=200, deadline=None)
@given(st.lists(PAYMENT, max_size=6), st.lists(BOOKING, max_size=7), st.randoms(use_true_random=False))
def test_money_is_kept_and_the_order_of_rows_does_not_matter(payments: list[Change], bookings: list[Change], chance: Any) -> None:
    items = trades(*({"item": f"item {n}", **one} for n, one in enumerate(payments)))
    cash = entries(*bookings)
    outcomes = []
    for turn in range(2):
        order = [list(range(len(items))), list(range(len(cash)))]
        if turn:
            chance.shuffle(order[0])
            chance.shuffle(order[1])
        a, b = shuffled(items, order[0]), shuffled(cash, order[1])
        pairs = pair_cash(a, b)
        every, allocations = with_bank(a, b, pairs)
        total = np.zeros(len(b), np.int64)
        np.add.at(total, allocations["cash_row"], allocations["share_minor"])
        assert total.tolist() == b["amount_minor"].tolist()
        assert set(pairs.repeats["row"].tolist()).isdisjoint(pairs.allocations["cash_row"].tolist())
        outcomes.append((
            sorted((_content(a, i), _content(b, c), int(s)) for i, c, s in
                   zip(*(pairs.allocations[n] for n in ("item_row", "cash_row", "share_minor")), strict=True)),
            sorted((_content(b, r), _content(b, o)) for r, o in zip(pairs.repeats["row"], pairs.repeats["of_row"], strict=True)),
            sorted(zip(every["item"].to_list(), every["bank_entries"].to_list(), every["bank_minor"].tolist(), strict=True)),
        ))  # fmt: skip
    assert outcomes[0] == outcomes[1]
