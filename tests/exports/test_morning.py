"""The four files of a morning, with the contract's columns in the contract's order, read back by Python's csv module."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np

from reconciler import records
from reconciler.exports import morning
from reconciler.records import MISSING, Words

# the contract's own lists, copied from its page
ITEMS = ("item kind account bond currency ticket broker broker_reference coupon_date side face price terms_amount broker_amount "
         "desk_amount bank_amount terms_date broker_date desk_date bank_date bank_entries state").split()  # fmt: skip
BREAKS = ("item break party expected found difference cause certainty explanation next_step overdue_days money_at_stake "
          "daily_interest rate_exposure rank").split()  # fmt: skip
REJECTS = "file row column value reason".split()
TOTALS = ("file currency rows_read rows_used rows_rejected rows_set_aside amount_read amount_used amount_rejected "
          "amount_set_aside").split()  # fmt: skip


def _back(path: Path) -> list[dict[str, str]]:
    with path.open(encoding="utf-8", newline="") as lines:
        return list(csv.DictReader(lines))


def test_items(tmp_path: Path) -> None:
    items = records.table(
        records.ITEMS, item=["trade T-2", "trade T-1"], kind=["trade", "trade"], currency=["USD", "JPY"], side=[1, -1],
        face_minor=[100_000_000, 5_000], price_e12=[99_500_000_000_000, 10**14], terms_minor=[-5, MISSING],
        broker_minor=[-123, 7], desk_minor=[-5, MISSING], terms_date=["2026-03-31", "NaT"], coupon_date=["NaT", "2026-03-29"],
        state=["break", "agrees"], bank_entries=["E1;E2", ""], account=["=main", ""],
    )  # fmt: skip
    told = Words.of(["JPY", "USD"])
    morning.write_items(tmp_path / "items.csv", items, {"Broker": (told, np.array([0, -1])), "Bank": (told, np.array([-1, -1]))})
    first, second = _back(tmp_path / "items.csv")
    assert list(first) == ITEMS
    assert (first["item"], second["item"]) == ("trade T-1", "trade T-2")
    assert (first["side"], first["face"], first["price"], first["terms_amount"], first["broker_amount"]) == ("sell", "5000", "100", "", "7")
    assert first["coupon_date"] == "2026-03-29"
    assert (second["side"], second["face"], second["price"], second["terms_amount"]) == ("buy", "1000000.00", "99.5", "-0.05")
    # told in yen, written in yen
    assert (second["broker_amount"], second["desk_amount"]) == ("-123", "-0.05")
    assert (second["bank_entries"], second["terms_date"], second["account"]) == ("E1;E2", "2026-03-31", "=main")
    assert (tmp_path / "items.csv").read_bytes().endswith(b"break\n")


def test_breaks_stand_in_the_order_of_their_rank(tmp_path: Path) -> None:
    breaks = records.table(
        records.BREAKS, item=["b", "a"], rank=[2, 1], currency=["USD", "KWD"], stake_minor=[5, 1234], daily_interest_minor=[0, 0],
        overdue_days=[0, 3], explanation=["One, two.", "Three."], **{"break": ["face", "no cash"]},
    )  # fmt: skip
    morning.write_breaks(tmp_path / "breaks.csv", breaks)
    first, second = _back(tmp_path / "breaks.csv")
    assert list(first) == BREAKS
    assert (first["item"], first["money_at_stake"], first["daily_interest"], first["rate_exposure"]) == ("a", "1.234", "0.000", "")
    assert (first["overdue_days"], first["rank"], second["explanation"]) == ("3", "1", "One, two.")


def test_rejects_stand_by_file_line_and_column(tmp_path: Path) -> None:
    rejects = records.table(
        records.REJECTS, file=["b.csv", "a.csv", "a.csv", "a.csv"], row=[1, 10, 9, 9], column=["x", "x", "y", "x"],
        value=["1", 'say "', "3", "4"], reason=["r"] * 4, code=["c"] * 4,
    )  # fmt: skip
    morning.write_rejects(tmp_path / "rejects.csv", rejects)
    rows = _back(tmp_path / "rejects.csv")
    assert list(rows[0]) == REJECTS
    assert [(r["file"], r["row"], r["column"]) for r in rows] == [("a.csv", "9", "x"), ("a.csv", "9", "y"), ("a.csv", "10", "x"), ("b.csv", "1", "x")]


def test_totals_stand_by_file_and_currency(tmp_path: Path) -> None:
    totals = records.table(
        records.TOTALS, file=["t.csv", "t.csv", "c.csv"], currency=["USD", "", "JPY"], rows_read=[3, 1, 2], rows_used=[3, 0, 2],
        rows_rejected=[0, 1, 0], rows_set_aside=[0, 0, 0], amount_read=[300, 0, 5], amount_used=[300, 0, 5],
        amount_rejected=[0, 0, 0], amount_set_aside=[0, 0, 0],
    )  # fmt: skip
    morning.write_totals(tmp_path / "totals.csv", totals)
    rows = _back(tmp_path / "totals.csv")
    assert list(rows[0]) == TOTALS
    assert [(r["file"], r["currency"], r["amount_read"]) for r in rows] == [("c.csv", "JPY", "5"), ("t.csv", "", "0.00"), ("t.csv", "USD", "3.00")]


def test_nothing_leaves_only_the_titles(tmp_path: Path) -> None:
    morning.write_items(tmp_path / "items.csv", records.table(records.ITEMS), {})
    morning.write_breaks(tmp_path / "breaks.csv", records.table(records.BREAKS))
    assert (tmp_path / "items.csv").read_text() == ",".join(ITEMS) + "\n"
    assert (tmp_path / "breaks.csv").read_text() == ",".join(BREAKS) + "\n"
