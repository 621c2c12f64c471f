"""What the plots of a fit share: the marks of readings and the card beside the mouse."""

from __future__ import annotations

import math

from PySide6.QtCore import QPointF
from PySide6.QtGui import QColor, QPolygonF

from gui.theme import Theme

DIMMED = 0.45
"""Opacity of what is out of date."""


def apart(first: QPointF, second: QPointF) -> float:
    """Return the pixels between two points."""
    gap = first - second
    return math.hypot(gap.x(), gap.y())


def card_lines(card: tuple[str, ...], theme: Theme) -> list[tuple[str, QColor]]:
    """Return the lines of a card: the first in ink, the others grey."""
    return [(text, theme.colour("secondary" if number else "ink"))
            for number, text in enumerate(card)]  # fmt: skip


def diamond(at: QPointF, size: float) -> QPolygonF:
    """Return the mark of an outlier."""
    corners = [QPointF(0, -size), QPointF(size, 0), QPointF(0, size), QPointF(-size, 0)]
    return QPolygonF([at + corner for corner in corners])


def arrow(at: QPointF, size: float, upwards: bool) -> QPolygonF:
    """Return a triangle whose tip lies at a point, for what lies beyond an edge."""
    tip = -size if upwards else size
    corners = [QPointF(0, 0), QPointF(0.8 * size, -1.4 * tip), QPointF(-0.8 * size, -1.4 * tip)]
    return QPolygonF([at + corner for corner in corners])
