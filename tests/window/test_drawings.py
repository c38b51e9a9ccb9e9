"""The strip and the ladder draw what they are given and say it in words too."""

from __future__ import annotations

import numpy as np
from PySide6.QtGui import QImage
from pytestqt.qtbot import QtBot

from reconciler.window.drawings import CashLadder, CouponStrip, Strip
from reconciler.window.theme import theme
from tests.window import fabricated


def _colours(image: QImage) -> set[int]:
    image = image.convertToFormat(QImage.Format.Format_RGB32)
    pixels = np.frombuffer(image.constBits(), np.uint32) & 0xFFFFFF
    return set(np.unique(pixels).tolist())


def _rgb(name: str) -> int:
    return theme().colour(name).rgb() & 0xFFFFFF


def test_the_strip_shows_periods_accrual_and_day(qtbot: QtBot) -> None:
    theme().start("light")
    strip = CouponStrip()
    qtbot.addWidget(strip)
    strip.resize(560, 110)
    told = fabricated.working(None, 0).strip
    strip.show_strip(Strip(told.boundaries, told.accrued, told.marked, told.marked_words, told.accrued_words, told.next_period))
    strip.show()
    seen = _colours(strip.grab().toImage())
    assert {_rgb("wash"), _rgb("accent"), _rgb("differ_wash"), _rgb("differ")} <= seen
    assert strip.accessibleDescription() == "settles 30 Mar, 196 days accrued"


def test_a_bond_without_coupons_leaves_the_strip_empty(qtbot: QtBot) -> None:
    strip = CouponStrip()
    qtbot.addWidget(strip)
    strip.show_strip(Strip())
    strip.show()
    assert _rgb("accent") not in _colours(strip.grab().toImage())


def test_the_ladder_has_a_lane_per_currency_and_says_every_bar(qtbot: QtBot) -> None:
    theme().start("light")
    ladder = CashLadder()
    qtbot.addWidget(ladder)
    ladder.resize(800, 300)
    ladder.show_bars(fabricated.ahead().bars)
    ladder.show()
    assert ladder.currencies == ["USD", "GBP", "EUR", "JPY"]
    assert len(ladder.days) == 6
    assert {_rgb("accent"), _rgb("outline")} <= _colours(ladder.grab().toImage())
    assert "1 Apr 2026 EUR −582,600.00 from 1 payment" in ladder.accessibleDescription()
    ladder.show_bars(())
    ladder.grab()
