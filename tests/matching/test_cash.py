"""Bank entries and payments as a whole: every sentence about cash, told once or twice, in parts, together, taken back."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reconciler.matching.cash import CashPairs, pair_again, pair_cash, with_bank
from reconciler.matching.trades import pair_trades
from reconciler.records import CASH, ITEMS, MISSING, Table, concat, table
from tests.matching.hand import confirmations, coupons, entries, paid, shuffled, tickets, trades, who

Change = dict[str, Any]
E = -99_912_345
BOND = "ZZ0000000017"
OTHER = "ZZ0000000025"


def booked(items: Table, cash: Table, **more: Any) -> Table:
    return with_bank(items, cash, pair_cash(items, cash, **more))[0]


def told_twice(items: Table, cash: Table) -> set[tuple[str, str]]:
    found = pair_cash(items, cash).repeats
    return {(cash["entry"].text(a), cash["entry"].text(b)) for a, b in zip(found["row"], found["of_row"], strict=True)}


# --- one entry, one payment


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


@pytest.mark.parametrize("name", ["T-2026/0017", "T 2026 17", "TKT0017"])
@pytest.mark.parametrize(
    "where", ["{}", "REF {}", "/{}/", "{}, {}", "PAYMENT ({})", "ORDER={}", "{};B1"], ids=lambda text: text
)  # fmt: skip
def test_a_name_settles_even_a_wrong_amount(name: str, where: str) -> None:
    if " " in name and where != "{}":
        return  # a number with blanks is only known when it is the whole reference
    wrong = {"amount_minor": E + 250_000, "value_date": "2026-03-30"}
    items = trades({"ticket": name})
    assert who(items, entries({**wrong, "reference": where.format(name, name)})) == {"E1": ["trade T1"]}
    if " " not in name:
        assert who(items, entries({**wrong, "narrative": where.format(name, name)})) == {"E1": ["trade T1"]}


@pytest.mark.parametrize(
    "wrong",
    [{"account": "BIRCH-2"}, {"currency": "USD"}, {"amount_minor": -E}, {"bond": OTHER}, {"account": ""}],
    ids=str,
)
def test_a_name_settles_another_account_currency_side_or_bond(wrong: Change) -> None:
    assert who(trades({}), entries({"reference": "T1", **wrong})) == {"E1": ["trade T1"]}


def test_a_name_that_account_and_amount_contradict_is_chance() -> None:
    assert who(trades({}), entries({"reference": "T1", "account": "BIRCH-2", "amount_minor": 1_500})) == {}
    known = trades({}, {"bond": OTHER, "terms_minor": 70_000_000})
    assert who(known, entries({"reference": "T1", "bond": OTHER, "amount_minor": 1_500})) == {}


def test_a_bare_number_in_a_narrative_needs_more() -> None:
    items = trades({"ticket": "250000"})
    assert who(items, entries({"narrative": "COUPON FACE 250000", "amount_minor": 1_250_000})) == {}
    assert who(items, entries({"narrative": "COUPON FACE 250000", "amount_minor": E + 2_500_000})) == {"E1": ["trade T1"]}
    assert who(items, entries({"reference": "250000", "amount_minor": E // 3})) == {"E1": ["trade T1"]}


def test_the_brokers_number_names_a_trade() -> None:
    items = trades({"ticket": "", "broker_reference": "B77-1"})
    assert who(items, entries({"reference": "B77-1", "amount_minor": E + 5_000})) == {"E1": ["trade T1"]}


def test_a_trade_without_a_ticket_is_known_by_the_number_its_broker_names() -> None:
    items = trades({"ticket": "", "confirmation_row": 0, "account": ""})
    confirmed = confirmations({"desk_reference": "T0009"})
    cash = entries({"reference": "T0009", "amount_minor": E - 4_000_000}, {"reference": "T0009", "amount_minor": 4_000_000})
    assert who(items, cash) == {}
    assert who(items, cash, confirmations=confirmed) == {"E1": ["trade T1"], "E2": ["trade T1"]}


def test_the_bank_may_pay_what_the_broker_or_the_desk_told() -> None:
    items = trades({"terms_minor": E, "desk_minor": E - 4_000, "broker_minor": E - 9_000})
    for amount in (E, E - 4_000, E - 9_000):
        assert who(items, entries({"amount_minor": amount})) == {"E1": ["trade T1"]}


def test_an_unknown_amount_is_found_by_the_desks() -> None:
    items = trades({"terms_minor": MISSING, "terms_date": "NaT", "desk_minor": E, "desk_date": "2026-03-26"})
    assert who(items, entries({})) == {"E1": ["trade T1"]}


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


# --- several entries, one payment; one entry, several payments


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


def test_two_coupons_in_one_entry() -> None:
    items = coupons({"coupon_date": "2026-03-26"}, {"terms_minor": 100_000_000, "kind": "redemption"})
    cash = entries({"bond": BOND, "amount_minor": 102_000_000, "narrative": "PAYMENT"})
    assert paid(items, cash) == {"E1": {"coupon 1": 2_000_000, "coupon 2": 100_000_000}}


def test_coupons_of_two_bonds_named_in_one_narrative() -> None:
    items = coupons({}, {"bond": OTHER, "terms_minor": 350_000}, {"bond": "ZZ0000000033", "terms_minor": 350_000})
    cash = entries({"narrative": f"COUPONS {BOND} {OTHER}", "amount_minor": 2_350_000})
    assert paid(items, cash) == {"E1": {"coupon 1": 2_000_000, "coupon 2": 350_000}}


def test_a_knot_of_names_is_untied_by_amounts() -> None:
    items = trades({"ticket": "T0001"}, {"ticket": "T0002", "terms_minor": -40_000_000})
    cash = entries({"reference": "T0001 T0002"}, {"reference": "T0001 T0002", "amount_minor": -40_000_000})
    assert paid(items, cash) == {"E1": {"trade T1": E}, "E2": {"trade T2": -40_000_000}}


# --- told twice, taken back


@pytest.mark.parametrize("name", [{"reference": "T1"}, {"bond": BOND}, {"narrative": f"PAID {BOND}"}], ids=str)
def test_an_entry_told_twice_is_no_part(name: Change) -> None:
    cash = entries(name, name)
    assert who(trades({}), cash) == {"E1": ["trade T1"]}
    assert told_twice(trades({}), cash) == {("E2", "E1")}


def test_a_wrong_amount_told_twice() -> None:
    cash = entries({"reference": "T1", "amount_minor": -7_777_777}, {"reference": "T1", "amount_minor": -7_777_777})
    assert who(trades({}), cash) == {"E1": ["trade T1"]}
    assert told_twice(trades({}), cash) == {("E2", "E1")}
    cash = entries({"bond": BOND, "amount_minor": 1_700_000}, {"bond": BOND, "amount_minor": 1_700_000})
    assert who(coupons({}), cash) == {"E1": ["coupon 1"]}
    assert told_twice(coupons({}), cash) == {("E2", "E1")}


def test_two_equal_payments_are_not_told_twice() -> None:
    cash = entries({"bond": BOND}, {"bond": BOND})
    assert who(trades({}, {}), cash) == {"E1": ["trade T1"], "E2": ["trade T2"]}
    assert told_twice(trades({}, {}), cash) == set()


def test_an_equal_amount_of_another_story_is_not_told_twice() -> None:
    for other in ({"reference": "SUNDRY"}, {"bond": OTHER}, {}):
        assert told_twice(trades({}), entries({"reference": "T1", "bond": BOND}, other)) == set()


@pytest.mark.parametrize("name", [{"reference": "T1"}, {"bond": BOND}], ids=str)
def test_an_entry_its_reversal_and_the_rebooking(name: Change) -> None:
    cash = entries(name, {**name, "amount_minor": -E, "value_date": "2026-03-27", "narrative": "REVERSAL"}, {**name, "value_date": "2026-03-27"})
    items = booked(trades({}), cash)
    assert items["item"].to_list() == ["trade T1"]
    assert items.row(0)["bank_minor"] == E
    assert items.row(0)["bank_entries"] == "E1;E2;E3"
    assert str(items.row(0)["bank_date"]) == "2026-03-27"


@pytest.mark.parametrize("name", [{"reference": "T1"}, {"bond": BOND}], ids=str)
def test_an_entry_taken_back_is_no_payment(name: Change) -> None:
    cash = entries(name, {**name, "amount_minor": -E, "value_date": "2026-03-27", "narrative": "REVERSAL"})
    items = booked(trades({}), cash)
    assert items["item"].to_list() == ["trade T1"]
    assert items.row(0)["bank_minor"] == MISSING
    assert items.row(0)["bank_entries"] == "E1;E2"


def test_a_sale_and_a_purchase_take_nothing_back() -> None:
    items = trades({}, {"terms_minor": -E})
    assert who(items, entries({"bond": BOND}, {"bond": BOND, "amount_minor": -E})) == {"E1": ["trade T1"], "E2": ["trade T2"]}


def test_a_ticket_told_twice_is_paid_once() -> None:
    told, confirmed = tickets({"broker_reference": "B1"}, {"broker_reference": "B1"}), confirmations({})
    pairs = pair_trades(told, confirmed)
    again = int(pairs.repeats["row"][0])
    items = trades({"broker_reference": "B1", "ticket_row": 0}, {"broker_reference": "B1", "ticket_row": 1})
    for entry in ({"reference": "B1"}, {"bond": BOND}, {}):
        assert who(items, entries(entry), repeats=pairs.repeats) == {"E1": [f"trade T{2 - again}"]}
    assert who(items, entries({"reference": f"T{again + 1}"}), repeats=pairs.repeats) == {"E1": [f"trade T{again + 1}"]}


# --- what the items then say


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


# --- reckoned again


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
