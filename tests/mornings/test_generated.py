"""A whole morning, files in to files out, against truths reckoned elsewhere: amounts to the cent, dates to the day,
every planted break, no false one, totals that tie out, and the same bytes whatever the order of the rows.

`tests/oracle` invents the morning and knows its truth. Five thousand trades run behind the marker `long`.
"""

from __future__ import annotations

import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from tests.oracle.building import build
from tests.oracle.plants import TRADE_PLANTS
from tests.oracle.verdict import Verdict, hold
from tests.oracle.world import World
from tests.oracle.writing import Written

FILES = ("items.csv", "breaks.csv", "totals.csv")


def _run(folder: Path, world: World, out: Path) -> int:
    """The headless command on a folder; its exit code."""
    done = subprocess.run(
        [
            sys.executable,
            "-m",
            "reconciler",
            "morning",
            str(folder),
            "--date",
            world.today.isoformat(),
            "--since",
            world.since.isoformat(),
            "--out",
            str(out),
        ],
        capture_output=True,
        text=True,
        timeout=600,
    )
    assert "Traceback" not in done.stderr, done.stderr
    return done.returncode


def _judged(world: World, folder: Path, order: int = 0) -> tuple[Verdict, dict[str, Written]]:
    written = world.write(folder / "in", order)
    assert _run(folder / "in", world, folder / "out") == 1
    return hold(world, folder / "out", written), written


@pytest.mark.parametrize("seed", [11, 12, 13])
def test_a_morning_of_three_hundred_trades(seed: int, tmp_path: Path) -> None:
    world = build(seed, 300)
    verdict, _ = _judged(world, tmp_path / "one")
    assert not verdict.complaints, "\n".join(verdict.complaints)
    assert sum(verdict.found.values()) > 60


def test_the_order_of_rows_changes_nothing_but_line_numbers(tmp_path: Path) -> None:
    world = build(14, 300)
    for order in (0, 1, 2):
        world.write(tmp_path / f"in{order}", order)
        assert _run(tmp_path / f"in{order}", world, tmp_path / f"out{order}") == 1
    for name in FILES:
        assert len({(tmp_path / f"out{order}" / name).read_bytes() for order in (0, 1, 2)}) == 1, name
    rejects = {
        tuple(
            sorted(
                line.split(b",", 2)[2] for line in (tmp_path / f"out{order}" / "rejects.csv").read_bytes().splitlines()
            )
        )
        for order in (0, 1, 2)
    }
    assert len(rejects) == 1


def test_a_morning_without_a_fault_has_no_break(tmp_path: Path) -> None:
    """Nothing planted: every item agrees or is due, and the command says so with its exit code."""
    world = build(15, 300, planted=0.0)
    written = world.write(tmp_path / "in")
    assert _run(tmp_path / "in", world, tmp_path / "out") == 0
    verdict = hold(world, tmp_path / "out", written)
    assert not verdict.complaints, "\n".join(verdict.complaints)


def test_the_same_folder_gives_the_same_bytes_twice(tmp_path: Path) -> None:
    world = build(16, 120)
    world.write(tmp_path / "in")
    outs = []
    for turn in ("a", "b"):
        _run(tmp_path / "in", world, tmp_path / turn)
        outs.append({path.name: path.read_bytes() for path in sorted((tmp_path / turn).iterdir())})
    assert outs[0] == outs[1]
    assert set(outs[0]) == {"items.csv", "breaks.csv", "rejects.csv", "totals.csv"}


@pytest.mark.long
def test_a_morning_of_five_thousand_trades(tmp_path: Path) -> None:
    world = build(21, 5000)
    verdict, _ = _judged(world, tmp_path / "one")
    assert not verdict.complaints, "\n".join(verdict.complaints[:50])
    planted = {truth.plant for truth in world.truths}
    assert planted >= set(TRADE_PLANTS)
    shutil.rmtree(tmp_path / "one")
