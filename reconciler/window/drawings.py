"""Two pictures that are read faster than lists: a bond's coupons as a strip, and the cash ahead as bars by day.

Both take plain figures worked out elsewhere and only draw. Colours carry no meaning alone: every marked part has its words.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF, QRect, QRectF, QSize, Qt
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from reconciler.window import figures
from reconciler.window.theme import SEMIBOLD, theme

if TYPE_CHECKING:
    from reconciler.procedures.ahead import Bar


@dataclass(frozen=True)
class Strip:
    """What the coupon strip shows: boundaries of coupon periods, the span accrued, the day marked and what is said of both."""

    boundaries: Sequence[np.datetime64] = ()
    accrued: tuple[np.datetime64, np.datetime64] | None = None
    marked: np.datetime64 | None = None
    marked_words: str = ""
    accrued_words: str = ""
    next_period: int = -1
    words: str = field(default="")


class CouponStrip(QWidget):
    """A bond's coupon periods around the payment, the accrued span filled, the settlement or payment day marked."""

    def __init__(self) -> None:
        super().__init__()
        self.strip = Strip()
        self.setMinimumSize(320, 106)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("Coupons of this bond")
        theme().changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(560, 106)

    def show_strip(self, strip: Strip) -> None:
        """Draws another bond's coupons."""
        self.strip = strip
        self.setAccessibleDescription(strip.words or ", ".join(w for w in (strip.marked_words, strip.accrued_words) if w))
        self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        strip, look = self.strip, theme()
        if len(strip.boundaries) < 2:
            return
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        left, right = 38.0, self.width() - 44.0
        first, last = (day.astype("datetime64[D]").astype(int) for day in (strip.boundaries[0], strip.boundaries[-1]))

        def at(day: np.datetime64) -> float:
            place = (day.astype("datetime64[D]").astype(int) - first) / max(last - first, 1)
            return left + min(max(place, -0.02), 1.03) * (right - left)

        top, height = 34.0, 14.0
        for number, (start, end) in enumerate(zip(strip.boundaries[:-1], strip.boundaries[1:], strict=True)):
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(look.colour("accent" if number == strip.next_period else "wash"))
            painter.drawRoundedRect(QRectF(at(start) + 1.5, top, at(end) - at(start) - 3, height), 2, 2)
        if strip.accrued is not None:
            begin, end = (at(day) for day in strip.accrued)
            painter.setPen(QPen(look.colour("differ"), 1))
            painter.setBrush(look.colour("differ_wash"))
            painter.drawRect(QRectF(begin + 0.5, top, max(end - begin, 2), height))
        self._ticks(painter, at, top, height)
        self._marks(painter, at, top, height)

    def _ticks(self, painter: QPainter, at, top: float, height: float) -> None:  # type: ignore[no-untyped-def]
        look = theme()
        painter.setFont(look.font("small"))
        metrics = QFontMetrics(look.font("small"))
        taken = -1e9
        for day in self.strip.boundaries:
            x = at(day)
            painter.setPen(QPen(look.colour("soft"), 1))
            painter.drawLine(QPointF(x, top - 6), QPointF(x, top + height + 6))
            text = figures.date(day)
            half = metrics.horizontalAdvance(text) / 2
            if x - half > taken + 5:
                painter.drawText(QPointF(x - half, top + height + 22), text)
                taken = x + half

    def _marks(self, painter: QPainter, at, top: float, height: float) -> None:  # type: ignore[no-untyped-def]
        strip, look = self.strip, theme()
        metrics = QFontMetrics(look.font("small", SEMIBOLD))
        painter.setFont(look.font("small", SEMIBOLD))
        painter.setPen(QPen(look.colour("differ"), 2))
        if strip.marked is not None:
            x = at(strip.marked)
            painter.drawLine(QPointF(x, top - 11), QPointF(x, top + height + 8))
            wide = metrics.horizontalAdvance(strip.marked_words)
            painter.drawText(QPointF(min(max(x - wide / 2, 0), self.width() - wide), top - 17), strip.marked_words)
        if strip.accrued_words:
            middle = sum(at(day) for day in strip.accrued) / 2 if strip.accrued else self.width() / 2
            wide = metrics.horizontalAdvance(strip.accrued_words)
            x = min(max(middle - wide / 2, 0), self.width() - wide)
            painter.drawText(QPointF(x, top + height + 42), strip.accrued_words)


class CashLadder(QWidget):
    """Money in above the line and out below it, a lane per currency and a column per day; each lane has its own scale."""

    LANE, AXIS = 52, 30

    def __init__(self) -> None:
        super().__init__()
        self.bars: Sequence[Bar] = ()
        self.days: list[np.datetime64] = []
        self.currencies: list[str] = []
        self.setAccessibleName("Cash ladder")
        self.setMouseTracking(True)
        theme().changed.connect(self.update)

    def show_bars(self, bars: Sequence[Bar]) -> None:
        """Draws other figures."""
        self.bars = bars
        self.days = sorted({bar.day for bar in bars})
        totals: dict[str, int] = {}
        for bar in bars:
            totals[bar.currency] = totals.get(bar.currency, 0) + bar.payments
        self.currencies = sorted(totals, key=lambda name: (-totals[name], name))
        self.setMinimumHeight(len(self.currencies) * self.LANE + self.AXIS)
        self.setAccessibleDescription("; ".join(self.words(bar) for bar in bars[:40]))
        self.update()

    @staticmethod
    def words(bar: Bar) -> str:
        """One bar in words."""
        net = figures.amount(bar.received - bar.paid, bar.digits, signed=True)
        return f"{figures.date(bar.day)} {bar.currency} {net} from {figures.count(bar.payments, 'payment')}"

    def paintEvent(self, _event: QPaintEvent) -> None:
        if not self.bars:
            return
        look, painter = theme(), QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        left, right = 118, self.width() - 12
        step = (right - left) / max(len(self.days), 1)
        for lane, currency in enumerate(self.currencies):
            mine = [bar for bar in self.bars if bar.currency == currency]
            high = min((self.height() - self.AXIS) / len(self.currencies), 96)
            self._lane(painter, mine, QRect(left, int(6 + lane * high), right - left, int(high - 14)), step)
        painter.setFont(look.font("small"))
        painter.setPen(look.colour("soft"))
        metrics = painter.fontMetrics()
        self._legend(painter)
        painter.setPen(look.colour("soft"))
        year = int(str(np.datetime64(self.days[0], "Y")))
        every = max(1, int(np.ceil((metrics.horizontalAdvance("30 Mar") + 14) / step)))
        for number, day in enumerate(self.days):
            if number % every == 0:
                room = QRectF(left + number * step - 40, self._axis_top(), step + 80, 20)
                painter.drawText(room, Qt.AlignmentFlag.AlignCenter, figures.date(day, year))

    def _legend(self, painter: QPainter) -> None:
        look, x = theme(), 0.0
        for colour, words in (("accent", "received"), ("outline", "paid")):
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(look.colour(colour))
            painter.drawRoundedRect(QRectF(x, self._axis_top() + 6, 8, 8), 1.5, 1.5)
            painter.setPen(look.colour("soft"))
            painter.drawText(QPointF(x + 12, self._axis_top() + 14), words)
            x += 24 + painter.fontMetrics().horizontalAdvance(words)

    def _axis_top(self) -> float:
        return min((self.height() - self.AXIS) / len(self.currencies), 96) * len(self.currencies) + 6

    def _lane(self, painter: QPainter, bars: list[Bar], room: QRect, step: float) -> None:
        look = theme()
        digits = bars[0].digits
        net = sum(bar.received - bar.paid for bar in bars)
        painter.setFont(look.font("body", SEMIBOLD))
        painter.setPen(look.colour("ink"))
        painter.drawText(QRect(0, room.center().y() - 19, 108, 20), Qt.AlignmentFlag.AlignLeft, bars[0].currency)
        painter.setFont(look.font("small"))
        painter.setPen(look.colour("soft"))
        painter.drawText(QRect(0, room.center().y() + 1, 114, 18), Qt.AlignmentFlag.AlignLeft,
                         figures.amount(net, digits, signed=True).rsplit(".", 1)[0])  # fmt: skip
        most_in, most_out = max(bar.received for bar in bars), max(bar.paid for bar in bars)
        span = max(most_in + most_out, 1)
        zero = room.top() + room.height() * most_in / span
        painter.setPen(look.colour("hairline"))
        painter.drawLine(QPointF(room.left(), zero), QPointF(room.right(), zero))
        painter.setPen(Qt.PenStyle.NoPen)
        wide = min(step * 0.6, 30)
        for bar in bars:
            x = room.left() + self.days.index(bar.day) * step + (step - wide) / 2
            up, down = room.height() * bar.received / span, room.height() * bar.paid / span
            painter.setBrush(look.colour("accent"))
            if bar.received:
                painter.drawRoundedRect(QRectF(x, zero - max(up, 1.5), wide, max(up, 1.5)), 1.5, 1.5)
            painter.setBrush(look.colour("outline"))
            if bar.paid:
                painter.drawRoundedRect(QRectF(x, zero + 1, wide, max(down, 1.5)), 1.5, 1.5)
