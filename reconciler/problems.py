"""A fault in what was given to us must reach the clerk as one clear sentence.

A bad row, an unsound bond or an ambiguous layout is a `Problem`: a record with a place and a reason, collected and shown,
never an exception. Exceptions are for two things only: files or folders that cannot be used at all (`KnownError`, shown as it
stands) and faults of this program (`BugError`).
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, order=True)
class Problem:
    """One fault with its place.

    `code` is a short stable word for tests and help ("bad-amount"); `line` is the line in the file (1 is the first, 0 when
    the whole file is meant); `reason` says what is wrong and what to do about it, in one sentence.
    """

    file: str
    line: int
    column: str
    value: str
    reason: str
    code: str = ""

    def sentence(self) -> str:
        """The problem as one line: file, line, column, value, what is wrong and what to do."""
        place = self.file
        if self.line:
            place += f", line {self.line}"
        if self.column:
            place += f", column {self.column}"
        shown = f" '{self.value}'" if self.value else ""
        return f"{place}:{shown} {self.reason}"


class KnownError(Exception):
    """Work cannot go on for a reason outside the program (a missing folder, a locked file); its text is shown as it stands."""

    def __init__(self, *problems: Problem | str) -> None:
        self.problems = problems
        super().__init__("\n".join(p if isinstance(p, str) else p.sentence() for p in problems))


class BugError(Exception):
    """A fault of this program: something that its own steps promise did not hold."""
