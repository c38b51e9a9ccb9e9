"""Any mixture of wrong facts gives exactly the breaks that plain comparing, one item at a time, gives."""

from __future__ import annotations

from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from reconciler.breaks import comparing
from reconciler.records import MISSING
from tests.breaks import hand
from tests.breaks.hand import TRUE, One

CHANGES: dict[str, list[Any]] = {
    "settlement_minor": [TRUE["settlement_minor"] + n for n in (-7, -1, 1, 2)], "settlement_date": ["2026-03-31"],
    "face_minor": [7, MISSING], "price_e12": [98 * 10**12, MISSING], "accrued_minor": [TRUE["accrued_minor"] + n for n in (-9, 1)] +
    [MISSING], "side": [-1], "trade_date": ["2026-03-25", "NaT"], "currency": ["EUR"], "account": ["Northquay custody", "NQ"],
}  # fmt: skip
PARTY = st.fixed_dictionaries({}, optional={name: st.sampled_from(values) for name, values in CHANGES.items()})
KINDS = {"settlement_minor": "settlement amount", "settlement_date": "settlement date", "face_minor": "face", "price_e12": "price",
         "accrued_minor": "accrued", "side": "side", "trade_date": "trade date"}  # fmt: skip


def _expected(told: dict[str, Any], party: str) -> set[tuple[str, str]]:
    other = told.get("currency", "USD") != "USD"
    out = {("currency", party)} if other else set()
    for name, kind in KINDS.items():
        value = told.get(name, TRUE[name])
        apart = value not in (MISSING, "NaT") and value != TRUE[name]
        if name in ("settlement_minor", "accrued_minor"):
            apart = apart and abs(value - TRUE[name]) > 1 and not other
        if apart:
            out.add((kind, party))
    if told.get("side") == -1 and not other:
        out.add(("settlement amount", party))
    return out


@settings(max_examples=60, deadline=None)
@given(st.lists(st.tuples(PARTY, PARTY), min_size=1, max_size=8))
def test_each_wrong_fact_is_a_break_of_its_own(told: list[tuple[dict[str, Any], dict[str, Any]]]) -> None:
    ones = [One(broker=broker, desk=desk) for broker, desk in told]
    _, breaks = hand.found(ones)
    found: list[set[tuple[str, str]]] = [set() for _ in ones]
    for row, kind, party in zip(breaks["item_row"].tolist(), breaks["break"].to_list(), breaks["party"].to_list(), strict=True):
        found[row].add((kind, party))
    for (broker, desk), breaks_of in zip(told, found, strict=True):
        wanted = _expected(broker, "Broker") | _expected(desk, "Desk")
        accounts = desk.get("account", TRUE["account"]), broker.get("account", TRUE["account"])
        if accounts[0] != accounts[1] and accounts[1] in (TRUE["account"], "Northquay custody", desk.get("account")):
            wanted.add(("account", "Broker"))
        if desk.get("account", TRUE["account"]) != TRUE["account"]:
            breaks_of.discard(("account", "Bank"))
        assert breaks_of == wanted


def test_within_tolerance_looks_at_every_amount() -> None:
    ones = [One(), One(broker={"accrued_minor": TRUE["accrued_minor"] + 1}), One(bank=[{"amount_minor": -TRUE["settlement_minor"] - 1}]),
            hand.entry()]  # fmt: skip
    assert comparing.within_tolerance(hand.given(ones)).tolist() == [False, True, True, False]
