"""What entries name, and when a name counts."""

from __future__ import annotations

import pytest

from tests.matching.hand import OTHER, Change, E, confirmations, entries, trades, who


@pytest.mark.parametrize("name", ["T-2026/0017", "T 2026 17", "TKT0017"])
@pytest.mark.parametrize(
    "where", ["{}", "REF {}", "/{}/", "{}, {}", "PAYMENT ({})", "ORDER={}", "{};B1", "SEC_{}", "#{}", "DVP-{}-A"], ids=lambda text: text
)  # fmt: skip
def test_a_name_settles_even_a_wrong_amount(name: str, where: str) -> None:
    if " " in name and where != "{}":
        return  # a number with blanks is only known when it is the whole reference
    if "-" in name and ("-" in where or "_" in where):
        return  # and one that itself has strokes is not looked for inside others
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
    assert who(items, entries({"reference": "XY-250000", "amount_minor": E // 3})) == {}


def test_the_brokers_number_names_a_trade() -> None:
    items = trades({"ticket": "", "broker_reference": "B77-1"})
    assert who(items, entries({"reference": "B77-1", "amount_minor": E + 5_000})) == {"E1": ["trade T1"]}


def test_a_trade_without_a_ticket_is_known_by_the_number_its_broker_names() -> None:
    items = trades({"ticket": "", "confirmation_row": 0, "account": ""})
    confirmed = confirmations({"desk_reference": "T0009"})
    cash = entries({"reference": "T0009", "amount_minor": E - 4_000_000}, {"reference": "T0009", "amount_minor": 4_000_000})
    assert who(items, cash) == {}
    assert who(items, cash, confirmations=confirmed) == {"E1": ["trade T1"], "E2": ["trade T1"]}


def test_short_names_are_names() -> None:
    items = trades({}, {"terms_minor": 40_000_000, "bond": OTHER})
    for where in ("reference", "narrative"):
        assert who(items, entries({where: "NET T1/T2", "amount_minor": E + 40_000_000})) == {"E1": ["trade T1", "trade T2"]}
    assert who(trades({"ticket": "7"}), entries({"narrative": "PART 7 OF 9", "amount_minor": E // 3})) == {}
