"""What went wrong, in plain words: one sentence a clerk can act on, never a traceback."""

from __future__ import annotations

from pathlib import Path

from reconciler.problems import KnownError, Problem
from reconciler.window import figures


def sentence(problem: Problem | str) -> str:
    """A problem as one line."""
    return problem if isinstance(problem, str) else problem.sentence()


def fault_told(fault: object) -> tuple[str, int]:
    """A fault in words, and how many other problems stand behind the first."""
    if isinstance(fault, KnownError):
        rest = len(fault.problems) - 1
        told = sentence(fault.problems[0]) if fault.problems else str(fault)
        return told + (f" And {figures.count(rest, 'other problem')}." if rest > 0 else ""), max(rest, 0)
    if isinstance(fault, MemoryError):
        return "There was not enough memory; close other programs and try again.", 0
    if isinstance(fault, OSError):
        which = f": {Path(str(fault.filename)).name}" if fault.filename else ""
        return f"{fault.strerror or 'The file or folder cannot be used'}{which}. Try again when it is free.", 0
    return ("This is a fault of the program, not of your files; nothing was changed. "
            f"Note for the maker: {type(fault).__name__}: {fault}", 0)  # fmt: skip
