"""What trades settle for: amounts by head, whose facts the terms take, and which day."""

from __future__ import annotations

from typing import Any

import pytest

from reconciler.expected.settlements import expect_trades
from reconciler.records import MISSING
from tests.expected.hand import (
    ACCRUED,
    OTHER,
    PRINCIPAL,
    Change,
    bonds,
    confirmations,
    expected,
    pairs,
    terms_of,
    tickets,
)

WHOLE = PRINCIPAL + ACCRUED


@pytest.mark.parametrize(
    "told, amount",
    [
        ({}, -WHOLE), ({"side": -1}, WHOLE), ({"fees_minor": 2_500}, -WHOLE - 2_500), ({"side": -1, "fees_minor": 2_500}, WHOLE - 2_500),
        ({"face_minor": 50_000_000}, -49_750_000 - 1_591_667), ({"price_e12": 100 * 10**12}, -100_000_000 - ACCRUED),
    ],
)  # fmt: skip
def test_a_purchase_pays_the_fees_and_a_sale_receives_less(told: Change, amount: int) -> None:
    item = expected(told, told)
    assert item["terms_minor"] == amount
    assert item["terms_principal_minor"] + item["terms_accrued_minor"] + item["terms_fees_minor"] == amount
    assert item["terms_accrued_days"] == 191
    assert (str(item["terms_date"]), str(item["terms_trade_date"])) == ("2026-03-26", "2026-03-24")


def test_what_desk_and_broker_told_stands_as_they_told_it() -> None:
    item = expected({"settlement_minor": 5, "settlement_date": "2026-03-27"}, {"settlement_minor": 7, "side": -1, "settlement_date": "2026-03-30"})
    assert (item["desk_minor"], item["broker_minor"], item["bank_minor"]) == (-5, 7, MISSING)
    assert (str(item["desk_date"]), str(item["broker_date"]), str(item["bank_date"])) == ("2026-03-27", "2026-03-30", "NaT")
    untold = expected({"settlement_minor": MISSING}, {"side": 0})
    assert (untold["desk_minor"], untold["broker_minor"]) == (MISSING, MISSING)


@pytest.mark.parametrize(
    "ticket, confirmation, fees",
    [
        ({"fees_minor": 100}, {"fees_minor": 900}, 100), ({}, {"fees_minor": 900}, 900), ({"fees_minor": 0}, {"fees_minor": 900}, 0),
        ({}, {}, 0), ({}, None, 0), (None, {"fees_minor": 900}, 900),
    ],
)  # fmt: skip
def test_fees_are_the_tickets_else_the_confirmations(ticket: Change | None, confirmation: Change | None, fees: int) -> None:
    assert expected(ticket, confirmation)["terms_fees_minor"] == -fees


DOUBLE = 2 * PRINCIPAL + 6_366_667
"""On twice the face; the accrued is rounded on its own: 63,666.67."""
FACE = {"face_minor": 200_000_000, "settlement_minor": DOUBLE}
PRICE = {"price_e12": 98 * 10**12, "price_text": "98", "settlement_minor": 98_000_000 + ACCRUED}
SIDE: Change = {"side": -1}


@pytest.mark.parametrize("wrong, other", [(FACE, -DOUBLE), (PRICE, -98_000_000 - ACCRUED), (SIDE, WHOLE)], ids=["face", "price", "side"])
def test_the_facts_two_of_three_agree_on(wrong: Change, other: int) -> None:
    """Desk and broker differ: the bank's cash says whose facts were dealt; without it the ticket's stand."""
    day = "2026-03-26"
    for bank, amount in ((None, -WHOLE), ((-WHOLE, day), -WHOLE), ((-WHOLE + 1, day), -WHOLE), ((-1, day), -WHOLE), ((other, day), other)):
        assert expected({}, wrong, bank)["terms_minor"] == amount
    for bank, amount in ((None, other), ((other, day), other), ((-1, day), other), ((-WHOLE, day), -WHOLE), ((-WHOLE - 1, day), -WHOLE)):
        assert expected(wrong, {}, bank)["terms_minor"] == amount


def test_the_facts_taken_are_shown() -> None:
    item = expected({**FACE, **PRICE, "side": -1}, {}, (-WHOLE, "2026-03-26"))
    assert (item["face_minor"], item["price_e12"], item["price_text"], item["side"]) == (100_000_000, 99_500 * 10**9, "99.5", 1)


def test_each_fact_may_be_another_partys() -> None:
    """The desk has the face right, the broker the price: 1,000,000 at 98."""
    item = expected({}, {**PRICE, "face_minor": 300_000_000}, (-98_000_000 - ACCRUED, "2026-03-26"))
    assert (item["face_minor"], item["price_e12"]) == (100_000_000, 98 * 10**12)


def test_the_bank_speaks_for_the_broker_it_paid_to_the_cent() -> None:
    """The broker's total has a fee nobody reckons, but it is what was paid."""
    told = {**FACE, "settlement_minor": DOUBLE + 700}
    assert expected({"fees_minor": 0}, told, (-DOUBLE - 700, "2026-03-26"))["face_minor"] == 200_000_000
    assert expected({"fees_minor": 0}, told, (-DOUBLE - 800, "2026-03-26"))["face_minor"] == 100_000_000


@pytest.mark.parametrize("name, blank", [("face_minor", MISSING), ("price_e12", MISSING), ("side", 0)])
def test_what_the_desk_leaves_untold_the_broker_tells(name: str, blank: Any) -> None:
    assert expected({name: blank}, {})["terms_minor"] == -WHOLE
    assert expected({name: blank}, None)["terms_minor"] == MISSING


def test_without_a_trade_date_the_told_settlement_date_stands() -> None:
    untold = {"trade_date": "NaT", "settlement_date": "2026-03-27"}
    assert str(expected(untold, {})["terms_date"]) == "2026-03-26"
    assert str(expected(untold, None)["terms_date"]) == "2026-03-27"
    assert expected(untold, None)["terms_accrued_days"] == 192


@pytest.mark.parametrize(
    "ticket, confirmation, bank, taken",
    [
        ("2026-03-24", "2026-03-23", None, "2026-03-24"), ("2026-03-23", "2026-03-24", None, "2026-03-24"),
        ("2026-03-23", "2026-03-25", None, "2026-03-23"), ("2026-03-23", "2026-03-20", "2026-03-24", "2026-03-23"),
    ],
)  # fmt: skip
def test_the_trade_date_from_which_the_told_days_follow(ticket: str, confirmation: str, bank: str | None, taken: str) -> None:
    """Both told 26 March as settlement date: that follows from the 24th."""
    item = expected({"trade_date": ticket}, {"trade_date": confirmation}, (-1, bank) if bank else None)
    assert str(item["terms_trade_date"]) == taken


NO_CYCLE = {"settlement_days": MISSING}


@pytest.mark.parametrize(
    "desk, broker, bank, taken",
    [
        ("2026-03-26", "2026-03-27", None, "2026-03-26"), ("2026-03-26", "2026-03-27", "2026-03-27", "2026-03-27"),
        ("2026-03-26", "2026-03-27", "2026-03-26", "2026-03-26"), ("2026-03-26", "2026-03-27", "2026-03-30", "2026-03-26"),
        ("NaT", "2026-03-27", None, "2026-03-27"), ("NaT", "NaT", None, "NaT"), ("2026-03-26", "NaT", "2026-03-27", "2026-03-26"),
    ],
)  # fmt: skip
def test_without_a_cycle_the_day_two_parties_agree_on(desk: str, broker: str, bank: str | None, taken: str) -> None:
    item = expected({"settlement_date": desk}, {"settlement_date": broker}, (-1, bank) if bank else None, NO_CYCLE)
    assert str(item["terms_date"]) == taken
    assert (item["terms_minor"] == MISSING) == (taken == "NaT")


@pytest.mark.parametrize("bond", [{"day_count": "Act/364"}, {"maturity": "NaT"}])
def test_nothing_is_reckoned_on_unsound_terms(bond: Change) -> None:
    item = expected({}, {}, None, bond)
    assert (item["terms_minor"], str(item["terms_date"]), item["bond_row"]) == (MISSING, "NaT", 0)
    assert (item["desk_minor"], item["broker_minor"]) == (-WHOLE, -WHOLE)


def test_nothing_is_reckoned_on_an_unknown_bond() -> None:
    item = expected({"bond": "ZZ0000000033"}, {"bond": "ZZ0000000033"})
    assert (item["bond"], item["bond_row"], item["terms_minor"], item["currency"]) == ("ZZ0000000033", -1, MISSING, "EUR")


def test_the_currency_is_the_bonds_and_faces_are_read_in_it() -> None:
    """A million yen is 1,000,000 smallest units, a million euros 100,000,000."""
    item = expected({"currency": "JPY", "face_minor": 1_000_000, "settlement_minor": 1_026_833}, {})
    assert (item["currency"], item["face_minor"], item["terms_minor"], item["desk_minor"]) == ("EUR", 100_000_000, -WHOLE, -1_026_833)


def test_names_accounts_and_references() -> None:
    told = bonds({})
    mine = tickets({"broker_reference": "X1"}, {"status": 2}, {"account": "BIRCH-2"})
    theirs = confirmations({"account": "THEIR OWN"}, {"broker": "Orrin & Teale", "account": "BIRCH-2"}, {"account": "THEIR OWN"}, {"account": ""})
    items = expect_trades(terms_of(told), told, mine, theirs, pairs((0, 0), (2, -1), (-1, 2), (-1, 3), (-1, 1), cancelled=(1,)))
    assert items["item"].to_list() == ["trade T1", "trade T3", "confirmation Tamarisk & Vane B3", "confirmation Tamarisk & Vane B4", "trade T2"]
    assert items["ticket"].to_list() == ["T1", "T3", "", "", "T2"]
    assert items["ticket_row"].tolist() == [0, 2, -1, -1, -1]
    assert items["account"].to_list() == ["ALDER-1", "BIRCH-2", "", "", "ALDER-1"]
    assert items["broker_reference"].to_list() == ["B1", "", "B3", "B4", "B2"]
    assert items["broker"].to_list() == ["Tamarisk & Vane", "Tamarisk & Vane", "Tamarisk & Vane", "Tamarisk & Vane", "Orrin & Teale"]


def test_clashing_names_are_numbered_by_content() -> None:
    told = bonds({})
    changes = ({"face_minor": 7, "broker_reference": "B1"}, {"face_minor": 5, "broker_reference": "B1"})
    for order in ((0, 1), (1, 0)):
        theirs = confirmations(*(changes[n] for n in order))
        items = expect_trades(terms_of(told), told, tickets(), theirs, pairs((-1, 0), (-1, 1)))
        by_name = dict(zip(items["item"].to_list(), items["face_minor"].tolist(), strict=True))
        assert by_name == {"confirmation Tamarisk & Vane B1": 5, "confirmation Tamarisk & Vane B1 (2)": 7}


def test_a_ticket_told_twice_has_the_fees_of_the_first() -> None:
    told = bonds({})
    items = expect_trades(terms_of(told), told, tickets({}, {}), confirmations({"fees_minor": 900}),
                          pairs((0, 0), (1, -1), repeats=((1, 0),)))  # fmt: skip
    assert items["terms_fees_minor"].tolist() == [-900, -900]


def test_every_trade_is_reckoned_as_if_it_were_alone() -> None:
    told = bonds({}, {"bond": OTHER, "coupon_rate_e9": 3 * 10**9})
    changes: list[Change] = [{}, {"side": -1}, {"bond": OTHER}, {"bond": "ZZ0000000033"}, {"price_e12": MISSING}, FACE]
    terms, none = terms_of(told), confirmations()
    together = expect_trades(terms, told, tickets(*changes), none, pairs(*((n, -1) for n in range(len(changes)))))
    for n, change in enumerate(changes):
        alone = expect_trades(terms, told, tickets(change), none, pairs((0, -1))).row(0)
        for name in ("terms_minor", "terms_date", "face_minor", "side", "bond", "currency", "terms_accrued_minor"):
            assert str(together.row(n)[name]) == str(alone[name])


def test_no_trades_give_no_items() -> None:
    told = bonds({})
    empty = expect_trades(terms_of(told), told, tickets(), confirmations(), pairs())
    assert len(empty) == 0
