"""Each of the three sample mornings breaks where its own page says so, and nowhere else; what is put right is gone next morning."""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path
from types import ModuleType

import pytest

from reconciler.procedures import morning

ROOT = Path(__file__).resolve().parent.parent.parent
DAYS = ("2026-03-30", "2026-03-31", "2026-04-01")


@pytest.fixture(scope="module")
def maker() -> ModuleType:
    """The script that makes the sample, as a module."""
    spec = importlib.util.spec_from_file_location("make_sample", ROOT / "resources" / "make_sample.py")
    assert spec is not None
    assert spec.loader is not None
    module = sys.modules["make_sample"] = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def story(maker: ModuleType, tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, list[object]]:
    """The sample made anew, and the faults in it."""
    folder = tmp_path_factory.mktemp("sample")
    return folder, maker.make(folder).notes


@pytest.mark.parametrize("number", range(3))
def test_breaks_stand_where_the_page_says(number: int, maker: ModuleType, story: tuple[Path, list[object]]) -> None:
    folder, notes = story
    today = maker.MORNINGS[number]
    day = morning.run(folder / today.isoformat(), today)
    broken = {
        item for item, state in zip(day.items["item"].to_list(), day.items["state"].to_list()) if state == "break"
    }
    told = [note for note in notes if note.first <= number and (note.end is None or number < note.end)]
    assert broken <= set().union(*(note.items for note in told))
    unseen = [note.name for note in told if not broken & note.items]
    assert unseen == [note.name for note in told if "no break" in note.what]
    assert 20 <= len(broken) <= 35
    assert 150 <= len(day.items) <= 260
