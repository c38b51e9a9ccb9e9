"""Breaks that explain each other, on hand-made tables."""

from __future__ import annotations

import numpy as np

from reconciler.breaks.causes.across import OTHER_ACCOUNT, UNDONE, across
from reconciler.records import BREAKS, ITEMS, MISSING, Table, table


def _tables(*rows: tuple[str, str, str, int, str]) -> tuple[Table, Table]:
    """(item, account, kind of break, amount, broker): bank entries carry the amount as paid, payments as expected."""
    bank = [kind == "unexplained cash" for _i, _a, kind, _m, _b in rows]
    items = table(
        ITEMS, item=[r[0] for r in rows], account=[r[1] for r in rows], currency=["EUR"] * len(rows), broker=[r[4] for r in rows],
        bank_entries=[r[0].upper() if b else "" for r, b in zip(rows, bank, strict=True)],
        bank_minor=np.array([r[3] if b else MISSING for r, b in zip(rows, bank, strict=True)]),
        terms_minor=np.array([MISSING if b else r[3] for r, b in zip(rows, bank, strict=True)]),
    )  # fmt: skip
    breaks = table(
        BREAKS, item=[r[0] for r in rows], item_row=np.arange(len(rows)), party=["Bank" if not r[4] else "Broker" for r in rows],
        certainty=["open"] * len(rows), explanation=["told."] * len(rows),
        cause=["another day count" if r[4] else "" for r in rows], **{"break": [r[2] for r in rows]},
    )  # fmt: skip
    return items, breaks


def _causes(*rows: tuple[str, str, str, int, str]) -> list[str]:
    items, breaks = _tables(*rows)
    return across(items, breaks)["cause"].to_list()


def test_cash_on_another_account() -> None:
    found = _causes(("e1", "A", "unexplained cash", 500, ""), ("p1", "B", "no cash", 500, ""))
    assert found == [OTHER_ACCOUNT, OTHER_ACCOUNT]


def test_not_when_two_payments_could_be_meant() -> None:
    rows = (("e1", "A", "unexplained cash", 500, ""), ("p1", "B", "no cash", 500, ""), ("p2", "C", "no cash", 500, ""))
    assert _causes(*rows) == ["", "", ""]


def test_not_on_the_same_account_or_of_another_amount() -> None:
    assert _causes(("e1", "A", "unexplained cash", 500, ""), ("p1", "A", "no cash", 500, "")) == ["", ""]
    assert _causes(("e1", "A", "unexplained cash", 500, ""), ("p1", "B", "no cash", 501, "")) == ["", ""]


def test_an_entry_and_its_reversal() -> None:
    found = _causes(("e1", "A", "unexplained cash", 700, ""), ("e2", "A", "unexplained cash", -700, ""))
    assert found == [UNDONE, UNDONE]
    assert _causes(("e1", "A", "unexplained cash", 700, ""), ("e2", "B", "unexplained cash", -700, "")) == ["", ""]


def test_a_habit_is_said() -> None:
    items, breaks = _tables(*((f"t{n}", "A", "accrued", 100 + n, "Orrin & Teale") for n in range(3)))
    told = across(items, breaks)["explanation"].to_list()
    assert all("on 2 other payments of Orrin & Teale" in text for text in told)


def test_order_of_rows_changes_nothing() -> None:
    rows = [("e1", "A", "unexplained cash", 500, ""), ("p1", "B", "no cash", 500, ""), ("e2", "A", "unexplained cash", 7, ""),
            ("e3", "A", "unexplained cash", -7, "")]  # fmt: skip
    there = dict(zip([r[0] for r in rows], _causes(*rows), strict=True))
    back = dict(zip([r[0] for r in reversed(rows)], _causes(*reversed(rows)), strict=True))
    assert there == back
