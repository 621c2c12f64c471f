"""Text on drawings: real text in the theme's three sizes, placed, elided, kept apart.

Every font here has its size in pixels of the painter, so that screen, PNG, SVG and PDF at any
resolution show the same proportions.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPen

from gui.theme import Theme

_LEAST_SHRINK = 0.75
_TABULAR_FIGURES = QFont.Tag("tnum")


def lettering(
    theme: Theme, size: str = "small", scale: float = 1.0, bold: bool = False
) -> QFont:
    """Return a font of the theme with its size in pixels, figures of even width."""
    font = theme.font(size, scale, bold)
    font.setFeature(_TABULAR_FIGURES, 1)
    return font


def text_rect(font: QFont, point: QPointF, text: str, across: float, down: float) -> QRectF:
    """Return the box of a text from cap height to base line.

    `across` and `down` say which point of the box lies at `point`: 0, 0 the top left, 1, 1 the
    bottom right, 0.5, 0.5 the middle.
    """
    metrics = QFontMetricsF(font)
    width, height = metrics.horizontalAdvance(text), metrics.capHeight()
    return QRectF(point.x() - across * width, point.y() - down * height, width, height)


def draw_text(
    painter: QPainter, point: QPointF, text: str, across: float = 0.5, down: float = 0.5
) -> QRectF:
    """Write with the painter's font and pen, placed as `text_rect` says, and return the box."""
    box = text_rect(painter.font(), point, text, across, down)
    painter.drawText(box.bottomLeft(), text)
    return box


def elide(font: QFont, text: str, width: float) -> str:
    """Return the text, or its beginning and an ellipsis when it is wider than `width`."""
    return QFontMetricsF(font).elidedText(text, Qt.TextElideMode.ElideRight, max(0.0, width))


def line_height(font: QFont) -> float:
    """Return the distance of two lines of text."""
    return QFontMetricsF(font).height()


@dataclass
class Placement:
    """Boxes already taken: a label goes where nothing is yet, or it is left out."""

    margin: float = 2.0
    taken: list[QRectF] = field(default_factory=list)

    def block(self, box: QRectF) -> None:
        """Take a box whatever lies there."""
        grow = self.margin
        self.taken.append(box.adjusted(-grow, -grow, grow, grow))

    def is_free(self, box: QRectF) -> bool:
        """Tell whether nothing has taken any of a box."""
        return not any(box.intersects(other) for other in self.taken)

    def claim(self, box: QRectF) -> bool:
        """Take a box when it is free, and say whether it was."""
        if not self.is_free(box):
            return False
        self.block(box)
        return True


_NOTICE_FLAGS = int(Qt.AlignmentFlag.AlignCenter) | int(Qt.TextFlag.TextWordWrap)


def _notice_area(rect: QRectF, scale: float) -> QRectF:
    """Return the part of an area in which a notice is wrapped."""
    return rect.adjusted(18 * scale, 8 * scale, -18 * scale, -8 * scale)


def notice_box(rect: QRectF, text: str, theme: Theme, scale: float = 1.0) -> QRectF:
    """Return the box of what `draw_notice` writes into an area."""
    metrics = QFontMetricsF(lettering(theme, "body", scale))
    return metrics.boundingRect(_notice_area(rect, scale), _NOTICE_FLAGS, text)


def draw_notice(
    painter: QPainter, rect: QRectF, text: str, theme: Theme, scale: float = 1.0
) -> None:
    """Write why nothing is to be seen in the middle of an area, on several lines if needed."""
    if not text:
        return
    painter.setFont(lettering(theme, "body", scale))
    painter.setPen(theme.colour("secondary"))
    # Where even the whole area is too low, better beyond its edge than cut in the middle.
    flags = _NOTICE_FLAGS | int(Qt.TextFlag.TextDontClip)
    painter.drawText(_notice_area(rect, scale), flags, text)


def draw_top_note(
    painter: QPainter, rect: QRectF, text: str, theme: Theme, scale: float = 1.0
) -> None:
    """Write one quiet line, shortened if need be, along the top left of an area."""
    if not text:
        return
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    painter.setPen(theme.colour("secondary"))
    corner = rect.topLeft() + QPointF(10 * scale, 6 * scale)
    draw_text(painter, corner, elide(font, text, rect.width() - 20 * scale), 0.0, 0.0)


def below_note(rect: QRectF, text: str, theme: Theme, scale: float = 1.0) -> QRectF:
    """Return what `draw_top_note` leaves of an area."""
    height = line_height(lettering(theme, "small", scale)) if text else 0.0
    return rect.adjusted(0.0, height, 0.0, 0.0)


def draw_title(
    painter: QPainter, rect: QRectF, text: str, theme: Theme, scale: float = 1.0
) -> QRectF:
    """Write a title along the top of an area and return the area that is left below it.

    A long title has smaller letters, and goes on on further lines.
    """
    gap = 10 * scale
    room = rect.width() - 2 * gap
    font = fitting(theme, "body", text, room, scale, bold=True)
    painter.setFont(font)
    painter.setPen(theme.colour("ink"))
    if QFontMetricsF(font).horizontalAdvance(text) <= room:
        box = draw_text(painter, rect.topLeft() + QPointF(gap, gap), text, 0.0, 0.0)
    else:
        flags = int(Qt.TextFlag.TextWordWrap)
        place = QRectF(rect.left() + gap, rect.top() + 0.5 * gap, room, rect.height())
        box = QFontMetricsF(font).boundingRect(place, flags, text)
        painter.drawText(place, flags, text)
    return rect.adjusted(0.0, box.bottom() - rect.top() + 6 * scale, 0.0, 0.0)


def fitting(
    theme: Theme, size: str, text: str, width: float, scale: float = 1.0, bold: bool = False
) -> QFont:
    """Return a font of the theme, smaller if a text would else be wider than `width`.

    It is never smaller than three quarters of the theme's.
    """
    font = lettering(theme, size, scale, bold)
    wanted = QFontMetricsF(font).horizontalAdvance(text)
    if wanted <= width:
        return font
    return lettering(theme, size, scale * max(_LEAST_SHRINK, width / wanted), bold)


def draw_chip(
    painter: QPainter,
    near: QPointF,
    lines: Sequence[tuple[str, QColor]],
    bounds: QRectF,
    theme: Theme,
) -> None:
    """Draw a small card of text lines beside a point, kept inside `bounds`."""
    font = lettering(theme)
    height, gap = line_height(font), 6.0
    width = max(QFontMetricsF(font).horizontalAdvance(text) for text, _ in lines)
    card = QRectF(near.x() + 14, near.y() + 12, width + 2 * gap, height * len(lines) + gap)
    if card.right() > bounds.right() - 2:
        card.moveRight(near.x() - 10)
    if card.bottom() > bounds.bottom() - 2:
        card.moveBottom(near.y() - 10)
    card.moveLeft(max(card.left(), bounds.left() + 2))
    card.moveTop(max(card.top(), bounds.top() + 2))
    painter.setPen(QPen(theme.colour("hairline"), 1.0))
    painter.setBrush(theme.colour("panel", 0.94))
    painter.drawRoundedRect(card, 3.0, 3.0)
    painter.setFont(font)
    for row, (text, colour) in enumerate(lines):
        painter.setPen(colour)
        middle = card.top() + gap / 2 + height * (row + 0.5)
        draw_text(painter, QPointF(card.left() + gap, middle), text, 0.0, 0.5)
