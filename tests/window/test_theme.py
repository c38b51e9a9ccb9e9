"""One set of names, two sets of colours; every token is filled in, every drawing is there."""

from __future__ import annotations

import re

import pytest
from PySide6.QtGui import QFont, QFontMetrics
from PySide6.QtWidgets import QApplication

from reconciler import resources
from reconciler.window import tokens
from reconciler.window.stylesheet import SHEET
from reconciler.window.theme import icon, style_sheet, theme


@pytest.mark.parametrize("palette", tokens.PALETTES.values(), ids=lambda p: p.name)
def test_every_token_of_the_style_sheet_is_known(palette: tokens.Palette) -> None:
    assert "@" not in style_sheet(palette)
    assert len(re.findall(r"@\w+", SHEET)) > 50


def test_figures_have_one_width(qapp: QApplication) -> None:
    theme().start("light")
    for weight in (QFont.Weight.Normal, QFont.Weight.DemiBold):
        metrics = QFontMetrics(theme().font("body", weight))
        assert len({metrics.horizontalAdvance(digit * 8) for digit in "0123456789"}) == 1


def test_every_drawing_can_be_drawn(qapp: QApplication) -> None:
    theme().start("light")
    drawings = sorted((resources.folder() / "icons").glob("*.svg"))
    assert len(drawings) >= 5
    for path in drawings:
        picture = icon(path.stem, "ink").pixmap(16, 16).toImage()
        assert any(picture.pixelColor(x, y).alpha() > 0 for x in range(picture.width()) for y in range(picture.height())), path


def test_an_unknown_choice_follows_the_system(qapp: QApplication) -> None:
    theme().start("no such thing")
    assert theme().choice == "system"
