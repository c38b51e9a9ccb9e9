"""The headless commands: arguments in, files and a few lines out, exit codes that scripts can rely on. No window is ever opened here.

Each command is a module with NAME, HELP, `add_arguments(parser)` and `run(arguments)`, which returns the exit code. What a command
needs is imported when it runs, so that asking for help costs nothing. Faults that the user can mend are lines on standard
error; a fault of ours is one sentence and a report in a file, never a traceback.
"""

from __future__ import annotations

import argparse
import importlib
import os
import sys
import tempfile
import traceback
from collections.abc import Sequence
from pathlib import Path
from types import ModuleType

from reconciler import __version__
from reconciler.problems import KnownError, Problem

MODULES = ("morning", "recalc", "schedule")

AGREES, BREAKS, NOTHING, OUR_FAULT = 0, 1, 2, 3
"""Exit codes: everything agrees; there are breaks; nothing could be done; a fault of this program."""


def modules() -> list[ModuleType]:
    """The commands' modules, in the order of the help."""
    return [importlib.import_module(f"reconciler.command.{name}") for name in MODULES]


def parser() -> argparse.ArgumentParser:
    """The command line as declared by the commands."""
    whole = argparse.ArgumentParser(
        prog="python -m reconciler",
        description="Holds what brokers confirmed, the desk booked and the bank paid against the bonds' own terms. "
        "Without a command it opens the window.",
        allow_abbrev=False,
    )
    whole.add_argument("--version", action="version", version=f"Reconciler {__version__}")
    commands = whole.add_subparsers(dest="command", metavar="COMMAND", title="commands")
    for module in modules():
        one = commands.add_parser(module.NAME, help=module.HELP, description=module.HELP, allow_abbrev=False)
        module.add_arguments(one)
        one.set_defaults(run=module.run)
    return whole


def main(told: Sequence[str]) -> int:
    """Runs a command; returns the exit code."""
    arguments = parser().parse_args(told)
    if getattr(arguments, "run", None) is None:
        parser().print_usage(sys.stderr)
        return NOTHING
    _write_any_letter()
    try:
        code = int(arguments.run(arguments))
        sys.stdout.flush()
        return code
    except KnownError as fault:
        tell(fault.problems)
        return NOTHING
    except KeyboardInterrupt:
        print("Stopped before the end.", file=sys.stderr)
        return NOTHING
    except MemoryError:
        print("There is not enough memory for this morning; close other programs or split the files.", file=sys.stderr)
        return NOTHING
    except BrokenPipeError:
        # whoever read our output has gone; that is no fault, and the interpreter must not complain of it on its way out
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return NOTHING
    except Exception:
        print(_report(traceback.format_exc()), file=sys.stderr)
        return OUR_FAULT


def _write_any_letter() -> None:
    """Lets names with letters that the terminal does not have be written in another way instead of failing."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")


def tell(problems: Sequence[Problem | str]) -> None:
    """One line per problem on standard error."""
    for problem in problems:
        text = problem if isinstance(problem, str) else problem.sentence()
        print(" ".join(text.split()), file=sys.stderr)


def _report(trace: str) -> str:
    """Keeps what is needed to find a fault of ours in a file, and says where."""
    plain = "This is a fault of the program, not of your files."
    try:
        with tempfile.NamedTemporaryFile(
            "w", prefix="reconciler-report-", suffix=".txt", delete=False, encoding="utf-8"
        ) as report:
            report.write(f"Reconciler {__version__}, Python {sys.version}\n{trace}")
        return f"{plain} What happened is written to {Path(report.name)}; please send that file to whoever keeps the program."
    except OSError:
        return f"{plain} A report could not be written."
