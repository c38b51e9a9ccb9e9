"""The door without a window: exit codes, lines on standard error, and no traceback whatever happens."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest

from reconciler import __main__ as door
from reconciler import command
from reconciler.problems import KnownError, Problem


@pytest.fixture
def stand_in(monkeypatch: pytest.MonkeyPatch) -> Callable[[Callable[[Any], int]], None]:
    """Puts one command in place of all others."""

    def put(run: Callable[[Any], int]) -> None:
        module = ModuleType("stand_in")
        module.NAME, module.HELP, module.run = "work", "Works.", run  # type: ignore[attr-defined]
        module.add_arguments = lambda parser: parser.add_argument("--number", type=int, default=0)  # type: ignore[attr-defined]
        monkeypatch.setattr(command, "modules", lambda: [module])

    return put


def test_a_command_gives_its_exit_code(stand_in: Any) -> None:
    stand_in(lambda arguments: arguments.number)
    assert [door.main(["work", "--number", str(n)]) for n in (0, 1)] == [0, 1]


def test_problems_are_one_line_each(stand_in: Any, capsys: pytest.CaptureFixture[str]) -> None:
    def run(_arguments: Any) -> int:
        raise KnownError(Problem("tickets.csv", 3, "face", "x", "is not a number;\nwrite digits."), "The folder is empty.")

    stand_in(run)
    assert door.main(["work"]) == command.NOTHING
    told = capsys.readouterr()
    assert told.err.splitlines() == ["tickets.csv, line 3, column face: 'x' is not a number; write digits.", "The folder is empty."]
    assert told.out == ""


@pytest.mark.parametrize("fault", [ValueError("nonsense"), ZeroDivisionError(), AssertionError("no")])
def test_a_fault_of_ours_is_a_sentence_and_a_report(
    fault: Exception, stand_in: Any, capsys: pytest.CaptureFixture[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def run(_arguments: Any) -> int:
        raise fault

    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    stand_in(run)
    assert door.main(["work"]) == command.OUR_FAULT
    told = capsys.readouterr().err
    assert len(told.splitlines()) == 1
    assert "Traceback" not in told
    (report,) = tmp_path.iterdir()
    assert str(report) in told
    assert type(fault).__name__ in report.read_text()


@pytest.mark.parametrize(("fault", "says"), [(KeyboardInterrupt(), "Stopped"), (MemoryError(), "not enough memory")])
def test_stopped_and_out_of_memory(fault: BaseException, says: str, stand_in: Any, capsys: pytest.CaptureFixture[str]) -> None:
    def run(_arguments: Any) -> int:
        raise fault

    stand_in(run)
    assert door.main(["work"]) == command.NOTHING
    assert says in capsys.readouterr().err


@pytest.mark.parametrize("told", [["nothing"], ["work", "--numb", "1"], ["work", "--number", "one"]])
def test_wrong_arguments_are_refused(told: list[str], stand_in: Any, capsys: pytest.CaptureFixture[str]) -> None:
    stand_in(lambda _arguments: 0)
    with pytest.raises(SystemExit) as caught:
        door.main(told)
    assert caught.value.code == 2
    assert "usage" in capsys.readouterr().err


def test_every_declared_command_is_whole() -> None:
    for module in command.modules():
        assert module.NAME
        assert module.HELP.endswith(".")
        assert callable(module.run)
    assert [module.NAME for module in command.modules()] == list(command.MODULES)
    assert "morning" in command.parser().format_help()


def test_without_arguments_the_window_opens(monkeypatch: pytest.MonkeyPatch) -> None:
    app = ModuleType("reconciler.window.app")
    app.run = lambda: 7  # type: ignore[attr-defined]
    monkeypatch.setitem(sys.modules, "reconciler.window.app", app)
    window = __import__("reconciler.window", fromlist=["app"])
    monkeypatch.setattr(window, "app", app, raising=False)
    assert door.main([]) == 7


def _run(code: str, **more: str) -> subprocess.CompletedProcess[str]:
    import os

    return subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60, check=False,
                          env={**os.environ, **more})  # fmt: skip


def test_letters_the_terminal_does_not_have_are_no_fault() -> None:
    code = ("import sys\nfrom types import ModuleType\nfrom reconciler import command\nm = ModuleType('m')\nm.NAME, m.HELP = 'w', 'W.'\n"
            "m.add_arguments = lambda p: None\nm.run = lambda a: print('G\u00fcnther \u2212') or 1\ncommand.modules = lambda: [m]\n"
            "sys.exit(command.main(['w']))")  # fmt: skip
    done = _run(code, PYTHONIOENCODING="ascii", PYTHONUTF8="0")
    assert (done.returncode, done.stderr) == (1, "")
    assert done.stdout.startswith("G\\xfcnther")


def test_whoever_reads_may_go_away() -> None:
    code = ("import os, sys\nfrom types import ModuleType\nfrom reconciler import command\nm = ModuleType('m')\nm.NAME, m.HELP = 'w', 'W.'\n"
            "m.add_arguments = lambda p: None\nm.run = lambda a: print('x' * 100) or 0\ncommand.modules = lambda: [m]\n"
            "r, w = os.pipe()\nos.dup2(w, 1)\nos.close(w)\nos.close(r)\nsys.exit(command.main(['w']))")  # fmt: skip
    done = _run(code)
    assert (done.returncode, done.stderr) == (command.NOTHING, "")


def test_headless_commands_know_no_qt() -> None:
    code = ("import sys\nfrom reconciler import command\ncommand.parser()\nfrom reconciler.procedures import morning\n"
            "print([name for name in sys.modules if name.startswith(('PySide6', 'shiboken'))])")  # fmt: skip
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60, check=True)
    assert done.stdout.strip() == "[]"
