"""How one cell of a list is drawn: a figure, a quiet second line, and a mark where something differs.

A marked cell says it three times: a glyph at its left, the word or figure, and the colour behind it. Figures end at one
decimal point per column: a currency with fewer decimals is moved left by what it lacks.
"""

from __future__ import annotations

from PySide6.QtCore import QRect, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetrics, QPainter

from reconciler.window import tokens
from reconciler.window.sheet import Cell, Column
from reconciler.window.theme import MEDIUM, SEMIBOLD, theme

_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_ELIDE = Qt.TextElideMode.ElideRight
PADDING = 8


def paint_cell(
    painter: QPainter,
    rect: QRect,
    cell: Cell,
    column: Column,
    *,
    first: bool = False,
    selected: bool = False,
    hovered: bool = False,
    focused: bool = False,
) -> None:
    """Draws a cell with its row's background and the hairline below it."""
    look = theme()
    if selected:
        painter.fillRect(rect, look.colour("wash"))
    elif hovered:
        painter.fillRect(rect, look.colour("raised"))
    painter.setPen(look.colour("hairline"))
    painter.drawLine(rect.bottomLeft(), rect.bottomRight())
    if first and selected:
        painter.fillRect(QRect(rect.left(), rect.top(), 3, rect.height()), look.colour("accent" if focused else "outline"))
    if not cell.text and not cell.small:
        return
    room = rect.adjusted(PADDING + (4 if first else 0), 0, -PADDING, -1)
    if column.right and cell.glyph:
        _marked(painter, rect, room, cell)
    elif cell.small:
        _two_lines(painter, room, cell, column)
    else:
        _one_line(painter, room, cell, column)


def _marked(painter: QPainter, rect: QRect, room: QRect, cell: Cell) -> None:
    look = theme()
    ink, wash, _ = tokens.TONES[cell.tone]
    inset = 5 if rect.height() > tokens.ROW_ONE else 3
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(look.colour(wash))
    painter.drawRoundedRect(QRectF(rect.adjusted(4, inset, -2, -inset - 1)), 5, 5)
    painter.restore()
    colour = look.colour(ink)
    if cell.small:
        upper, lower = _halves(room)
        _figure(painter, upper, cell, colour, strong=True)
        painter.setFont(look.font("small", SEMIBOLD))
        painter.drawText(QRect(rect.left() + 12, lower.top(), 20, lower.height()), _LEFT, cell.glyph)
        painter.setFont(look.font("small"))
        shift = _shift(painter.fontMetrics(), cell.shift) if _is_figure(cell.small) else 0
        inside = lower.adjusted(18, 0, -shift, 0)
        painter.drawText(inside, _RIGHT, painter.fontMetrics().elidedText(cell.small, _ELIDE, inside.width()))
    else:
        painter.setPen(colour)
        painter.setFont(look.font("small", SEMIBOLD))
        painter.drawText(QRect(rect.left() + 12, rect.top(), 22, rect.height() - 1), _LEFT, cell.glyph)
        _figure(painter, room.adjusted(18, 0, 0, 0), cell, colour, strong=True)


def _two_lines(painter: QPainter, room: QRect, cell: Cell, column: Column) -> None:
    look = theme()
    upper, lower = _halves(room)
    if column.right:
        _figure(painter, upper, cell, look.colour("ink"), strong=cell.strong)
    else:
        painter.setFont(look.font("body", MEDIUM if cell.strong else look.font().weight()))
        painter.setPen(look.colour("ink"))
        painter.drawText(upper, _LEFT, painter.fontMetrics().elidedText(cell.text, _ELIDE, upper.width()))
    painter.setFont(look.font("small"))
    painter.setPen(look.colour(tokens.TONES[cell.tone][0] if cell.tone else "soft"))
    small = f"{cell.glyph} {cell.small}" if cell.glyph else cell.small
    shift = _shift(QFontMetrics(look.font()), cell.shift) if column.right and _is_figure(cell.small) else 0
    painter.drawText(lower.adjusted(0, 0, -shift, 0), _RIGHT if column.right else _LEFT,
                     painter.fontMetrics().elidedText(small, _ELIDE, lower.width()))  # fmt: skip


def _one_line(painter: QPainter, room: QRect, cell: Cell, column: Column) -> None:
    look = theme()
    colour = look.colour(tokens.TONES[cell.tone][0])
    if column.right:
        _figure(painter, room, cell, colour, strong=cell.strong)
        return
    painter.setFont(look.font("body", MEDIUM if cell.strong else look.font().weight()))
    painter.setPen(colour)
    text = f"{cell.glyph} {cell.text}" if cell.glyph else cell.text
    painter.drawText(room, _LEFT, painter.fontMetrics().elidedText(text, _ELIDE, room.width()))


def _figure(painter: QPainter, room: QRect, cell: Cell, colour: QColor, strong: bool) -> None:
    painter.setFont(theme().font("body", SEMIBOLD if strong else theme().font().weight()))
    painter.setPen(colour)
    metrics = painter.fontMetrics()
    shift = _shift(metrics, cell.shift)
    room = room.adjusted(0, 0, -shift, 0)
    painter.drawText(room, _RIGHT, metrics.elidedText(cell.text, _ELIDE, room.width() + 2))


def _shift(metrics: QFontMetrics, decimals: int) -> int:
    """The width of the decimals a figure lacks; with none at all the point is lacking too."""
    if decimals <= 0:
        return 0
    return decimals * metrics.horizontalAdvance("0") + (metrics.horizontalAdvance(".") if decimals >= 2 else 0)


def _is_figure(text: str) -> bool:
    return bool(text) and (text[0].isdigit() or text[0] in "+-\u2212") and text[-1].isdigit()


def _halves(room: QRect) -> tuple[QRect, QRect]:
    middle = room.top() + room.height() // 2
    return QRect(room.left(), middle - 19, room.width(), 20), QRect(room.left(), middle + 1, room.width(), 17)
