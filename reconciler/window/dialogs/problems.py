"""Every problem of the morning's files with its place: nothing is shown first alone and nothing is kept back."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtWidgets import QWidget

from reconciler.problems import Problem
from reconciler.window import figures
from reconciler.window.dialogs.dialog import Dialog
from reconciler.window.sheet import Cell
from reconciler.window.static import static_sheet
from reconciler.window.table import SheetView
from reconciler.window.widgets import Empty, button, card


class Problems(Dialog):
    """The list of problems; it can be copied."""

    def __init__(self, parent: QWidget | None, problems: Sequence[Problem | str]) -> None:
        super().__init__(parent, figures.count(len(problems), "problem"),
                         "What was wrong with files or folder, where, and what to do about it.", leave="Close")  # fmt: skip
        self.resize(960, 460)
        self.list = SheetView("Problems", two_lines=False)
        self.list.sortable = False
        if not problems:
            self.inside.addWidget(Empty("No problems", "Every file could be read."))
            return
        heads = [("File", 190, False, 0), ("Line", 56, True, 0), ("Column", 120, False, 0), ("Value", 120, False, 0),
                 ("What is wrong, what to do", 380, False, 1)]  # fmt: skip
        self.list.set_sheet(static_sheet(heads, [_cells(problem) for problem in problems]))
        self.inside.addWidget(card(self.list, margin=1), 1)
        copy = button("Copy all", "", "Copy the list as text")
        copy.clicked.connect(lambda: (self.list.selectAll(), self.list.copy()))
        self.column.itemAt(self.column.count() - 1).layout().insertWidget(0, copy)  # type: ignore[union-attr]


def _cells(problem: Problem | str) -> tuple[Cell, ...]:
    if isinstance(problem, str):
        return Cell(""), Cell(""), Cell(""), Cell(""), Cell(problem)
    return (Cell(problem.file, strong=True), Cell(str(problem.line) if problem.line else "", tone="soft"), Cell(problem.column),
            Cell(problem.value), Cell(problem.reason))  # fmt: skip
