"""DEVELOPERS.md and README.md are tested prose: what they name exists, and what exists is named."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from reconciler import command

ROOT = Path(__file__).resolve().parent.parent
PAGE = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
README = (ROOT / "README.md").read_text(encoding="utf-8")


def test_every_room_is_named() -> None:
    rooms = [path.parent.name for path in (ROOT / "reconciler").glob("*/__init__.py")]
    modules = [path.name for path in (ROOT / "reconciler").glob("*.py") if not path.name.startswith("__")]
    missing = [f"reconciler/{name}" for name in rooms + modules if f"reconciler/{name}" not in PAGE]
    assert len(rooms) > 8 and not missing


@pytest.mark.parametrize("name", command.MODULES)
def test_every_command_is_named(name: str) -> None:
    assert f"`{name}`" in PAGE and f"python -m reconciler {name}" in README


@pytest.mark.parametrize("page", ["DEVELOPERS.md", "README.md"])
def test_every_path_exists(page: str) -> None:
    text = (ROOT / page).read_text(encoding="utf-8")
    paths = set(re.findall(r"(?<![\w/.])((?:reconciler|resources|tests|sample_tickets)/[\w./-]*\w/?)", text))
    assert len(paths) > 2
    assert not [path for path in paths if not (ROOT / path).exists()]
