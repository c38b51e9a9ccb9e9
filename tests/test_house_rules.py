"""The house rules that a command can check, each with the reason it is there."""

from __future__ import annotations

import ast
import csv
import re
import subprocess
import tomllib
from pathlib import Path

import pytest

from reconciler import records
from reconciler.intake.identifiers import isin_ok

ROOT = Path(__file__).resolve().parent.parent
SOURCES = sorted((ROOT / "reconciler").rglob("*.py"))
SCRIPTS = sorted((ROOT / "resources").glob("*.py"))
TESTS = sorted((ROOT / "tests").rglob("*.py"))

LONG_FILES: dict[str, str] = {
    "tests/oracle/plants.py": "one list of plants, to be read from top to bottom",
}
"""Files above 400 lines, each with the reason why it may be."""


def _tracked() -> list[Path]:
    listed = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=False).stdout.split("\n")
    return [ROOT / name for name in listed if name and (ROOT / name).is_file()]


def _id(path: Path) -> str:
    return str(path.relative_to(ROOT))


@pytest.mark.parametrize("path", SOURCES + SCRIPTS, ids=_id)
def test_a_newcomer_is_told_what_a_module_is_for(path: Path) -> None:
    assert ast.get_docstring(ast.parse(path.read_text(encoding="utf-8")))


def test_what_is_public_is_described() -> None:
    """At least nine in ten public functions and classes outside the window have a docstring."""
    told = untold = 0
    for path in SOURCES:
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_"):
                if ast.get_docstring(node):
                    told += 1
                elif "window" not in path.parts:
                    untold += 1
    assert told > 300
    assert untold <= told / 9


@pytest.mark.parametrize("path", SOURCES + SCRIPTS + TESTS, ids=_id)
def test_a_file_can_be_read_in_one_sitting(path: Path) -> None:
    lines = path.read_text(encoding="utf-8").count("\n")
    assert lines <= 400 or _id(path) in LONG_FILES


def test_nothing_stands_here_that_must_not() -> None:
    """No path of a machine and no word that does not belong (the pieces are joined so that this file passes itself)."""
    words = ["lec" + "ture", "tran" + "script", "spea" + "ker", "you" + "tube"]
    paths = ["/wo" + "rk/", "/ro" + "ot/", "/fa" + "rm/"]
    pattern = re.compile("|".join(words), re.IGNORECASE)
    found = []
    for path in _tracked():
        if path.suffix in (".png", ".npz", ".xlsx"):
            continue
        text = path.read_text(encoding="utf-8", errors="replace")
        if pattern.search(text) or any(word in text for word in paths):
            found.append(_id(path))
    assert not found


def test_the_top_level_stays_as_it_is() -> None:
    allowed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "reconciler", "resources", "tests", "sample_tickets"}
    top = {path.relative_to(ROOT).parts[0] for path in _tracked()}
    assert not {name for name in top - allowed if not name.startswith(".")}


def test_no_frames_in_the_product() -> None:
    for path in SOURCES:
        assert not re.search(r"^\s*(import|from) pandas", path.read_text(encoding="utf-8"), re.MULTILINE), path


def test_threads_of_the_window_live_in_one_file() -> None:
    for path in SOURCES:
        if "window" in path.parts and path.name != "jobs.py":
            assert not re.search(r"\bQThread\b|\bQRunnable\b|\bthreading\b", path.read_text(encoding="utf-8")), path


def test_columns_say_their_units() -> None:
    """An amount, price or rate in a table of records carries its unit in its name."""
    for name, schema in vars(records).items():
        if name.isupper() and isinstance(schema, dict) and name not in ("SIDES", "STATUSES", "TOTALS"):
            bare = {column for column, kind in schema.items() if kind == "int64"} & {"price", "amount", "rate", "face", "accrued"}
            assert not bare, name


def test_every_package_is_shipped() -> None:
    told = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["tool"]["setuptools"]["packages"]
    there = {".".join(path.parent.relative_to(ROOT).parts) for path in SOURCES}
    assert there == set(told) - {"reconciler._resources"}


def test_sample_bonds_are_invented_and_valid() -> None:
    seen = 0
    for path in (ROOT / "sample_tickets").rglob("bonds.csv"):
        with path.open(encoding="utf-8") as rows:
            for row in csv.DictReader(rows):
                assert row["bond"].startswith("ZZ") and isin_ok(row["bond"]), row
                seen += 1
    assert seen > 100


@pytest.mark.parametrize("path", sorted((ROOT / "tests" / "published").rglob("*.csv")), ids=_id)
def test_published_values_name_their_source(path: Path) -> None:
    with path.open(encoding="utf-8") as rows:
        told = list(csv.DictReader(line for line in rows if not line.startswith("#")))
    assert told and all(row.get("source", "").strip() for row in told)


THROUGH_OTHERS = {
    # module -> the test that holds it through the rooms' own steps
    "bonds/grid.py": "tests/bonds/test_schedules.py",
    "bonds/flows.py": "tests/bonds/test_pricing.py",
    "bonds/compound.py": "tests/bonds/test_pricing.py",
    "breaks/given.py": "tests/breaks/test_finding.py",
}


@pytest.mark.parametrize("room", ["bonds", "matching", "breaks", "expected", "exports"])
def test_every_module_is_tested_somewhere(room: str) -> None:
    """Each module of a room has a twin among the tests, is imported by one, or is named above with the test that holds it."""
    texts = {path.name: path.read_text(encoding="utf-8") for path in TESTS}
    untested = []
    for path in sorted((ROOT / "reconciler" / room).glob("*.py")):
        held = THROUGH_OTHERS.get(f"{room}/{path.name}", "")
        if path.name == "__init__.py" or f"test_{path.name}" in texts or (held and (ROOT / held).exists()):
            continue
        named = re.compile(rf"reconciler\.{room}(\.{path.stem}\b| import .*\b{path.stem}\b)")
        if not any(named.search(text) for text in texts.values()):
            untested.append(path.name)
    assert not untested
