"""A marked cell is seen: glyph, figure and ground are drawn, and decimal points stand in one line."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QRect
from PySide6.QtGui import QImage, QPainter
from PySide6.QtWidgets import QApplication

from reconciler.window.painting import paint_cell
from reconciler.window.sheet import Cell, Column
from reconciler.window.theme import theme

_RIGHT = Column("n", "N", "Number", lambda _d, _at: [], lambda _d: np.zeros(0, np.int64), right=True)


def _draw(cell: Cell, **state: bool) -> np.ndarray:
    theme().start("light")
    image = QImage(200, 46, QImage.Format.Format_RGB32)
    image.fill(theme().colour("surface"))
    painter = QPainter(image)
    paint_cell(painter, QRect(0, 0, 200, 46), cell, _RIGHT, **state)
    painter.end()
    return np.frombuffer(image.constBits(), np.uint32).reshape(46, 200) & 0xFFFFFF


def _has(picture: np.ndarray, colour: str) -> bool:
    return bool((picture == theme().colour(colour).rgb() & 0xFFFFFF).any())


def test_a_quiet_cell_has_no_ground_of_its_own(qapp: QApplication) -> None:
    picture = _draw(Cell("=", tone="quiet"))
    assert not _has(picture, "differ_wash")
    assert _has(picture, "hairline")


@pytest.mark.parametrize("tone", ["differ", "silent", "day"])
def test_a_marked_cell_is_marked_by_ground_and_glyph(qapp: QApplication, tone: str) -> None:
    marked = _draw(Cell("1,082.34", "−4.00", "≠", tone))
    assert _has(marked, f"{tone}_wash")
    left = marked[:, 8:30]
    without = _draw(Cell("1,082.34", "−4.00", " ", tone))[:, 8:30]
    assert (left != without).any()


def test_decimal_points_align(qapp: QApplication) -> None:
    def right_edge(cell: Cell) -> int:
        ink = np.flatnonzero((_draw(cell)[8:40] < 0x808080).any(axis=0))
        return int(ink.max())

    assert right_edge(Cell("1,204", shift=2)) < right_edge(Cell("1,204.00")) - 12


def test_selected_rows_show_where_the_keyboard_is(qapp: QApplication) -> None:
    assert _has(_draw(Cell("x"), first=True, selected=True, focused=True), "accent")
    assert not _has(_draw(Cell("x"), first=True, selected=True, focused=False), "accent")
    assert _has(_draw(Cell("x"), selected=True), "wash")
