"""Marked directions on a disc: the pin, low-index directions, extremes; labels kept apart."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QFont, QPainter, QPen, QPolygonF

from gui.plots.lettering import Placement, lettering, text_rect
from gui.plots.polar import SMALL_RIM, PolarGround
from gui.theme import Theme

Mark = tuple[float, float, str, str]

_AWAY = 7.0  # pixels from a mark to its label
# The sides a label may stand on, as (x, y) from the mark and its anchor there.
_SIDES = (
    (1.0, 0.0, 0.0, 0.5),
    (-1.0, 0.0, 1.0, 0.5),
    (0.0, -1.0, 0.5, 1.0),
    (0.0, 1.0, 0.5, 0.0),
)
_FIRST = {"pin": 0, "least": 1, "greatest": 1}  # whose label goes first


def draw_marks(
    painter: QPainter,
    ground: PolarGround,
    marks: Sequence[Mark],
    placement: Placement,
    theme: Theme,
    scale: float = 1.0,
) -> None:
    """Draw marks (x, y in the disc, label, kind) and those of their labels that find room."""
    ordered = sorted(marks, key=lambda mark: _FIRST.get(mark[3], 2))
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    is_small = ground.rim < SMALL_RIM * scale
    for x, y, label, kind in ordered:
        point = QPointF(*ground.place(np.array([x, y])))
        # The pin is told by its shape and colour; a word beside it would hide the picture.
        is_bare = kind == "pin" or (is_small and not _is_axis(label))
        box = None if is_bare else _free_box(font, point, label, placement, scale)
        if box is not None:
            _draw_label(painter, box, label, theme, scale)
    for x, y, _, kind in reversed(ordered):
        _draw_symbol(painter, QPointF(*ground.place(np.array([x, y]))), kind, theme, scale)


def _is_axis(label: str) -> bool:
    """Tell whether a label is one of the three axes, as [1 0 0]."""
    return sorted(label.strip("[]").split()) == ["0", "0", "1"]


def _free_box(
    font: QFont, point: QPointF, label: str, placement: Placement, scale: float
) -> QRectF | None:
    """Return the first free box beside a mark, or None."""
    if not label:
        return None
    for right, down, across, along in _SIDES:
        anchor = point + QPointF(right, down) * (_AWAY * scale)
        box = text_rect(font, anchor, label, across, along)
        if placement.claim(box):
            return box
    return None


def _draw_label(painter: QPainter, box: QRectF, label: str, theme: Theme, scale: float) -> None:
    """Write a label on a plate that lets it be read on any colour."""
    pad = 2.0 * scale
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(theme.colour("panel", 0.78))
    painter.drawRoundedRect(box.adjusted(-pad, -pad, pad, pad), pad, pad)
    painter.setPen(theme.colour("ink"))
    painter.drawText(box.bottomLeft(), label)


def _draw_symbol(
    painter: QPainter, point: QPointF, kind: str, theme: Theme, scale: float
) -> None:
    """Draw the symbol of a kind: shape and colour both tell."""
    painter.setPen(QPen(theme.colour("panel"), 1.3 * scale))
    if kind == "pin":
        painter.setBrush(theme.colour("alert"))
        painter.drawEllipse(point, 4.5 * scale, 4.5 * scale)
    elif kind in ("least", "greatest"):
        painter.setBrush(theme.colour("ink"))
        painter.drawPolygon(_triangle(point, 5.0 * scale, upwards=kind == "greatest"))
    elif kind == "axis":
        painter.setBrush(theme.colour("ink"))
        painter.drawPolygon(_diamond(point, 4.5 * scale))
    else:
        painter.setBrush(theme.colour("ink"))
        painter.drawEllipse(point, 2.6 * scale, 2.6 * scale)


def _triangle(point: QPointF, size: float, upwards: bool) -> QPolygonF:
    """Return a triangle about a point."""
    tip = -size if upwards else size
    corners = [
        QPointF(0.0, tip),
        QPointF(0.9 * size, -0.7 * tip),
        QPointF(-0.9 * size, -0.7 * tip),
    ]
    return QPolygonF([point + corner for corner in corners])


def _diamond(point: QPointF, size: float) -> QPolygonF:
    """Return a diamond about a point."""
    corners = [QPointF(0, -size), QPointF(size, 0), QPointF(0, size), QPointF(-size, 0)]
    return QPolygonF([point + corner for corner in corners])
