"""Imports only point down: the contracts of .importlinter, run as a test, and a watch on the watcher."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import grimp

ROOT = Path(__file__).resolve().parent.parent


def test_every_import_keeps_to_the_storeys() -> None:
    """The contracts hold."""
    done = subprocess.run(
        [sys.executable, "-c", "from importlinter.cli import lint_imports_command as c; c()"],
        cwd=ROOT, capture_output=True, text=True, check=False,
    )  # fmt: skip
    assert done.returncode == 0, done.stdout[-3000:]
    assert "0 broken" in done.stdout


def test_imports_were_really_analysed() -> None:
    """A contract over an empty graph would hold too: there must be modules and imports in it."""
    graph = grimp.build_graph("reconciler", cache_dir=None)
    modules = {name for name in graph.modules if name.startswith("reconciler.")}
    on_disk = {
        ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__")
        for path in (ROOT / "reconciler").rglob("*.py")
    }
    assert on_disk - {"reconciler"} <= modules
    assert graph.count_imports() > 200
    assert graph.find_modules_directly_imported_by("reconciler.bonds.accrual") >= {"reconciler.bonds.schedules"}
