"""What a row of the list of breaks says."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.window.loading import Loaded
from reconciler.window.payment_cells import break_cell, days_apart, title_of


def _row(loaded: Loaded, place: int) -> dict[str, tuple[str, str, str, str]]:
    sheet = loaded.sheets["breaks"]
    cells = {column.key: column.show(sheet.data, np.array([place]))[0] for column in sheet.columns}
    return {key: (cell.text, cell.small, cell.glyph, cell.tone) for key, cell in cells.items()}


def test_the_most_urgent_break_stands_first_and_says_who_differs(loaded: Loaded) -> None:
    row = _row(loaded, 0)
    assert row["payment"][:2] == ("Buy 5,000,000 Marlow Gas 4.625 2031", "T-20931  ·  settles 30 Mar  ·  Tamarisk & Vane")
    assert row["terms"][:2] == ("−5,067,928.08", "USD")
    assert row["broker"] == ("=", "", "", "quiet")
    assert row["desk"] == ("=", "", "", "quiet")
    assert row["bank"] == ("−5,069,010.42", "−1,082.34", "≠", "differ")
    assert row["why"][1] == "proved to the cent"
    assert row["overdue"][0] == "1 d"
    assert row["stake"][0] == "1,082.34"


def test_who_did_not_speak_and_who_need_not(loaded: Loaded) -> None:
    coupon = _row(loaded, 1)
    assert coupon["bank"] == ("no cash", "", "∅", "silent")
    assert coupon["broker"][0] == coupon["desk"][0] == ""
    assert _row(loaded, 3)["broker"][0] == "silent"


def test_a_payment_with_two_breaks_says_so(loaded: Loaded) -> None:
    assert _row(loaded, 2)["why"][1] == "proved to the cent  ·  1 more break"


@pytest.mark.parametrize(
    ("kind", "found", "difference", "expected"),
    [
        ("settlement date", "2026-04-02", "1", ("2 Apr", "1 day late", "→", "day")),
        ("payment date", "2026-03-27", "-3", ("27 Mar", "3 days early", "←", "day")),
        ("trade date", "2026-03-26", "-1", ("26 Mar", "trade date −1 d", "←", "day")),
        ("no ticket", "", "", ("no ticket", "", "∅", "silent")),
        ("unexplained cash", "42310.00", "42310.00", ("+42,310.00", "unexplained", "?", "silent")),
        ("price", "85.1", "-0.2125", ("85.1", "price −0.2125", "≠", "differ")),
        ("side", "sell", "", ("sell", "side", "≠", "differ")),
        ("told twice", "OT-765", "", ("told twice", "OT-765", "2×", "differ")),
        ("unknown bond", "ZZ0009999991", "", ("unknown bond", "", "?", "silent")),
    ],
)
def test_every_look_of_a_break(kind: str, found: str, difference: str, expected: tuple[str, ...]) -> None:
    cell = break_cell(kind, found, difference, 2026)
    assert (cell.text, cell.small, cell.glyph, cell.tone) == expected


def test_titles() -> None:
    assert title_of("trade", -1, "2,000,000", "Osk 2044") == "Sell 2,000,000 Osk 2044"
    assert title_of("coupon", 0, "300", "Osk 2044") == "Coupon on 300 Osk 2044"
    assert title_of("redemption", 0, "300", "Osk 2044") == "Redemption of 300 Osk 2044"
    assert title_of("bank", 0, "", "", "Bank entry 7") == "Bank entry 7"
    assert days_apart("not a number", "kind") == "kind"


def test_yen_are_moved_left_by_the_decimals_they_lack(loaded: Loaded) -> None:
    sheet = loaded.sheets["breaks"]
    cells = sheet.column("terms").show(sheet.data, np.arange(sheet.length))
    assert {cell.shift for cell in cells if cell.small == "JPY"} == {2}
    assert {cell.shift for cell in cells if cell.small == "USD"} == {0}
