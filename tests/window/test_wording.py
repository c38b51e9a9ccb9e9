"""Faults in plain words."""

from __future__ import annotations

import pytest

from reconciler.problems import KnownError, Problem
from reconciler.window.wording import fault_told, sentence


@pytest.mark.parametrize(
    ("fault", "words", "rest"),
    [
        (KnownError("The folder is gone."), "The folder is gone.", 0),
        (KnownError(Problem("a.csv", 2, "face", "x", "is no face."), "b", "c"), "a.csv, line 2, column face: 'x' is no face.", 2),
        (MemoryError(), "not enough memory", 0),
        (PermissionError(13, "Permission denied", "deep/down/out.csv"), "Permission denied: out.csv", 0),
        (ZeroDivisionError("division by zero"), "a fault of the program", 0),
    ],
)
def test_faults(fault: Exception, words: str, rest: int) -> None:
    told, more = fault_told(fault)
    assert words in told
    assert more == rest
    assert "\n" not in told


def test_sentences() -> None:
    assert sentence("As it stands.") == "As it stands."
