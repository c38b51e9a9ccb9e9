"""The line from a folder to a ranked list of breaks: its steps, its order, what stops it and what it writes."""

from __future__ import annotations

import csv
import datetime
import random
import shutil
from pathlib import Path

import numpy as np
import pytest

from reconciler import __main__ as door
from reconciler import settings
from reconciler.problems import KnownError
from reconciler.procedures import morning

MORNINGS = Path(__file__).parent.parent / "mornings"
DATE = datetime.date(2026, 3, 31)
FILES = ("items.csv", "breaks.csv", "rejects.csv", "totals.csv")


def _copy(tmp_path: Path, name: str = "unquiet") -> Path:
    return Path(shutil.copytree(MORNINGS / name / "in", tmp_path / "in"))


def _command(folder: Path, out: Path, *more: str) -> int:
    return door.main(["morning", str(folder), "--date", "2026-03-31", "--out", str(out), *more])


def test_the_steps_can_be_read_aloud() -> None:
    words = [str(step.__doc__) for step in morning.STEPS]
    assert len(set(words)) == len(words)
    assert all(text[0].isupper() and len(text) < 60 and "\n" not in text for text in words)


def test_progress_is_told_step_by_step() -> None:
    told: list[tuple[str, int, int]] = []
    morning.run(MORNINGS / "quiet" / "in", DATE, progress=lambda *step: told.append(step))
    count = len(morning.STEPS)
    steps = [one for one in told if one[2]]
    assert steps == [(str(step.__doc__), number, count) for number, step in enumerate(morning.STEPS)]
    assert [one[0] for one in told if not one[2]][:2] == ["Reading bonds.csv", "Reading tickets.csv"]


def test_a_morning_can_be_stopped() -> None:
    asked = iter([False, False, True])
    with pytest.raises(morning.Stopped):
        morning.run(MORNINGS / "quiet" / "in", DATE, cancelled=lambda: next(asked))


def test_no_step_edits_what_it_was_given() -> None:
    state = morning.State(MORNINGS / "unquiet" / "in", np.datetime64(DATE, "D"), np.datetime64("2026-03-17"), settings.Settings())
    for step in morning.STEPS:
        before = dict(vars(state))
        held = {name: dict(table.columns) for name, table in before.items() if hasattr(table, "columns")}
        copies = {name: {n: getattr(c, "codes", c).copy() for n, c in columns.items()} for name, columns in held.items()}
        after = step(state)
        assert vars(state) == before
        for name, columns in copies.items():
            for n, column in columns.items():
                np.testing.assert_array_equal(getattr(held[name][n], "codes", held[name][n]), column)
        state = after


def test_coupons_are_looked_at_from_ten_business_days_back() -> None:
    assert morning.run(MORNINGS / "quiet" / "in", DATE).since == datetime.date(2026, 3, 17)
    day = morning.run(MORNINGS / "quiet" / "in", DATE, since=datetime.date(2026, 3, 27))
    assert "redemption" not in day.items["kind"].to_list()
    # the bill's cash is then nobody's
    assert day.breaks["break"].to_list() == ["unexplained cash"]
    told = morning.run(MORNINGS / "quiet" / "in", DATE, settings=settings.of({"since_days": 2}))
    assert told.since == datetime.date(2026, 3, 27)


def test_the_day_stands_in_the_order_of_names() -> None:
    day = morning.run(MORNINGS / "unquiet" / "in", DATE)
    names = day.items["item"].to_list()
    assert names == sorted(names)
    for row, item in zip(day.breaks["item_row"].tolist(), day.breaks["item"].to_list(), strict=True):
        assert names[row] == item
    for row, cash_row in zip(day.allocations["item_row"].tolist(), day.allocations["cash_row"].tolist(), strict=True):
        assert day.source.cash["entry"].text(cash_row) in day.items["bank_entries"].text(row).split(";")
    assert sum(day.summary.values()) == len(names)


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_the_order_of_rows_does_not_matter(seed: int, tmp_path: Path) -> None:
    folder = _copy(tmp_path)
    _command(folder, tmp_path / "one")
    for path in sorted(folder.rglob("*.csv")):
        head, *rows = path.read_text(encoding="utf-8").splitlines()
        random.Random(seed).shuffle(rows)
        path.write_text("\n".join([head, *rows]) + "\n", encoding="utf-8")
    _command(folder, tmp_path / "two")
    for name in FILES:
        one, two = ((tmp_path / turn / name).read_text(encoding="utf-8") for turn in ("one", "two"))
        if name == "rejects.csv":
            assert [row["value"] for row in csv.DictReader(one.splitlines())] == [row["value"] for row in csv.DictReader(two.splitlines())]
        else:
            assert one == two


def test_totals_tie_out() -> None:
    totals = morning.run(MORNINGS / "unquiet" / "in", DATE).source.totals
    for name in ("rows", "amount"):
        parts = totals[f"{name}_used"] + totals[f"{name}_rejected"] + totals[f"{name}_set_aside"]
        np.testing.assert_array_equal(parts, totals[f"{name}_read"])


def test_settings_are_used(tmp_path: Path) -> None:
    told = tmp_path / "house.toml"
    told.write_text("[tolerance]\nUSD = 20000\n[interest]\nall = 3.6\n", encoding="utf-8")
    assert _command(MORNINGS / "unquiet" / "in", tmp_path / "out", "--settings", str(told)) == 1
    with (tmp_path / "out" / "breaks.csv").open(newline="") as lines:
        rows = list(csv.DictReader(lines))
    # 111.33 is within 200.00
    assert not [row for row in rows if row["item"] == "trade T-1"]
    late = next(row for row in rows if row["item"] == "coupon Northquay main ZZ000PELLER2 2026-03-29")
    assert late["daily_interest"] == "0.30"  # 3,000.00 x 3.6 % / 360


@pytest.mark.parametrize(
    ("told", "says"),
    [
        (["--since", "2026-04-01"], "lies after --date"),
        (["--settings", "nothing.toml"], "nothing.toml"),
    ],
)
def test_what_cannot_be_done_is_one_line(told: list[str], says: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert _command(MORNINGS / "quiet" / "in", tmp_path / "out", *told) == 2
    err = capsys.readouterr().err
    assert says in err
    assert len(err.splitlines()) == 1
    assert not (tmp_path / "out").exists()


def test_a_folder_that_is_not_there(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert _command(tmp_path / "none", tmp_path / "out") == 2
    assert len(capsys.readouterr().err.splitlines()) == 1


def test_a_place_that_cannot_be_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "out").write_text("a file")
    assert _command(MORNINGS / "quiet" / "in", tmp_path / "out") == 2
    assert "cannot be made" in capsys.readouterr().err


@pytest.mark.parametrize("missing", ["tickets.csv", "bonds.csv"])
def test_without_tickets_or_bonds_nothing_is_reconciled(missing: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = _copy(tmp_path, "quiet")
    (folder / missing).unlink()
    assert _command(folder, tmp_path / "out") == 2
    assert missing in capsys.readouterr().err
    with pytest.raises(KnownError):
        morning.run(folder, DATE)


def test_a_file_nobody_can_read_is_told_and_the_rest_is_written(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = _copy(tmp_path, "quiet")
    (folder / "confirmations" / "mist.csv").write_text("alpha,beta\n1,2\n", encoding="utf-8")
    assert _command(folder, tmp_path / "out") == 2
    told = capsys.readouterr().err
    assert "confirmations/mist.csv" in told
    with (tmp_path / "out" / "items.csv").open(newline="") as lines:
        assert len(list(csv.DictReader(lines))) == 5
    with (tmp_path / "out" / "totals.csv").open(newline="") as lines:
        mist = [row for row in csv.DictReader(lines) if row["file"] == "confirmations/mist.csv"]
    assert [(row["rows_read"], row["rows_rejected"]) for row in mist] == [("1", "1")]


def test_a_file_without_rows_is_no_fault(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = _copy(tmp_path, "quiet")
    head = (folder / "confirmations" / "orrin_teale_20260331.csv").read_text(encoding="utf-8").splitlines()[0]
    (folder / "confirmations" / "brandt_holloway.csv").write_text(head + "\n", encoding="utf-8")
    assert _command(folder, tmp_path / "out") == 0
    assert "brandt_holloway" in capsys.readouterr().err


def test_terms_that_are_not_sound_are_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = _copy(tmp_path, "quiet")
    bonds = folder / "bonds.csv"
    bonds.write_text(bonds.read_text(encoding="utf-8").replace("XSIF,1,following,price", "XMOON,1,following,price"), encoding="utf-8")
    assert _command(folder, tmp_path / "out") == 1
    assert "bonds.csv, line 2, column calendar: 'XMOON'" in capsys.readouterr().err
    with (tmp_path / "out" / "breaks.csv").open(newline="") as lines:
        broken = {(row["item"], row["break"]): row for row in csv.DictReader(lines)}
    assert set(broken) == {("trade T-1", "unsound terms"), ("trade T-2", "unsound terms")}
    assert "calendar 'XMOON'" in broken["trade T-1", "unsound terms"]["explanation"]


def test_terms_whose_row_was_rejected_are_unsound_not_unknown(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = _copy(tmp_path, "quiet")
    bonds = folder / "bonds.csv"
    bonds.write_text(bonds.read_text(encoding="utf-8").replace("2021-06-15,2031-06-15", "2031-06-15,2021-06-15"), encoding="utf-8")
    assert _command(folder, tmp_path / "out") == 1
    told = capsys.readouterr()
    assert told.err == ""
    assert "1 rejected (rejects.csv says why)" in told.out
    with (tmp_path / "out" / "breaks.csv").open(newline="") as lines:
        broken = {(row["item"], row["break"]): row["explanation"] for row in csv.DictReader(lines)}
    assert set(broken) == {("trade T-1", "unsound terms"), ("trade T-2", "unsound terms")}
    assert broken["trade T-1", "unsound terms"].endswith("its row in bonds.csv was rejected.")
