"""The four accounts of one payment: every fact beside those of the others, marks only where the breaks say so."""

from __future__ import annotations

import numpy as np

from reconciler.window.detail.accounts import account_facts, accounts_sheet, breaks_of, entries_of
from reconciler.window.loading import Loaded


def _marks(loaded: Loaded, row: int) -> list[tuple[str, str, str]]:
    sheet = accounts_sheet(loaded.day, loaded.overview, row)
    rows = np.arange(sheet.length)
    columns = [column.show(sheet.data, rows) for column in sheet.columns]
    return [(columns[0][i].text, sheet.columns[c].title, columns[c][i].tone)
            for i in rows for c in range(1, 5) if columns[c][i].glyph]  # fmt: skip


def test_marks_follow_the_breaks(loaded: Loaded) -> None:
    assert _marks(loaded, 0) == [("Settlement amount", "Bank", "differ")]
    assert _marks(loaded, 2) == [("Settlement amount", "Broker", "differ"), ("Price", "Broker", "differ")]
    assert _marks(loaded, 6) == [("Payment date", "Bank", "day")]


def test_who_did_not_speak_is_said_once(loaded: Loaded) -> None:
    assert [mark[1:] for mark in _marks(loaded, 1)] == [("Bank", "silent")]
    assert [mark[1:] for mark in _marks(loaded, 3)] == [("Broker", "silent")]


def test_breaks_of_a_payment_stand_in_order_of_rank(loaded: Loaded) -> None:
    assert [one["break"] for one in breaks_of(loaded.day, 2)] == ["settlement amount", "price"]
    assert breaks_of(loaded.day, 20) == []


def test_bank_entries_are_named(loaded: Loaded) -> None:
    assert len(entries_of(loaded.day, 0)) == 1
    names, told = account_facts(loaded.day, loaded.overview, 0)
    assert names[-1] == "reference"
    assert told[3]["reference"] == "88121"
    assert told[2]["reference"] == "T-20931"


def test_an_unexplained_entry_has_one_account_only(loaded: Loaded) -> None:
    _names, told = account_facts(loaded.day, loaded.overview, 8)
    assert [bool(facts) for facts in told] == [False, False, False, True]
