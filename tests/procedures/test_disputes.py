"""Which trades the cash decides, and that nothing else is touched."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler import records
from reconciler.procedures import disputes
from reconciler.records import MISSING


def _told(schema: dict[str, str], **facts: object) -> records.Table:
    base = {"side": [1], "face_minor": [100], "price_e12": [5], "trade_date": ["2026-03-27"], "settlement_date": ["NaT"]}
    return records.table(schema, **{**base, **{name: [value] for name, value in facts.items()}})


@pytest.mark.parametrize(
    ("broker", "bank", "apart"),
    [({}, 7, False), ({"face_minor": 200}, 7, True), ({"face_minor": 200}, MISSING, False), ({"side": -1}, 7, True),
     ({"price_e12": MISSING}, 7, True), ({"trade_date": "2026-03-26"}, 7, True), ({"settlement_date": "2026-03-30"}, 7, True)],
)  # fmt: skip
def test_disputed(broker: dict[str, object], bank: int, apart: bool) -> None:
    trades = records.table(records.ITEMS, ticket_row=[0, 0, -1], confirmation_row=[0, -1, 0])
    items = trades.with_columns(bank_minor=np.array([bank] * 3))
    rows = disputes.disputed(trades, items, _told(records.TICKETS), _told(records.CONFIRMATIONS, **broker))
    assert rows.tolist() == ([0] if apart else [])


def test_only_what_was_reckoned_changes() -> None:
    whole = records.table(records.ITEMS, item=["a", "b", "c"], price_text=["1", "2", "3"], terms_minor=[1, 2, 3],
                          bank_minor=[4, 5, 6], terms_date=["2026-03-30", "NaT", "NaT"])  # fmt: skip
    part = records.table(records.ITEMS, item=["x"], price_text=["9"], terms_minor=[8], terms_date=["2026-03-31"])
    changed = disputes.put_in(whole, np.array([1]), part)
    assert changed["price_text"].to_list() == ["1", "9", "3"]
    assert changed["terms_minor"].tolist() == [1, 8, 3]
    assert changed["item"].to_list() == ["a", "b", "c"]
    assert changed["bank_minor"].tolist() == [4, 5, 6]
    assert str(changed["terms_date"][1]) == "2026-03-31"
    assert whole["terms_minor"].tolist() == [1, 2, 3]


def test_same() -> None:
    one = records.table(records.ITEMS, item=["a", "b"], terms_date=["NaT", "2026-03-30"])
    assert disputes.same(one, records.table(records.ITEMS, item=["a", "b"], terms_date=["NaT", "2026-03-30"]))
    assert not disputes.same(one, records.table(records.ITEMS, item=["a", "c"], terms_date=["NaT", "2026-03-30"]))
    assert not disputes.same(one, one.take(np.array([0])))
    assert disputes.same(one, records.table(records.ITEMS, item=["a", "c"]), ("terms_minor",))
