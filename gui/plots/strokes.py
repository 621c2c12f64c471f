"""Lines of data: the pens of A and B, and curves with gaps, true to a tenth of a pixel."""

from __future__ import annotations

from typing import cast

import numpy as np
import pyqtgraph as pg
from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QPainter, QPainterPath, QPen, QPolygonF

from core.arrays import BoolArray, FloatArray, IntArray
from gui.theme import Theme

SHEET_WEIGHTS = (2.0, 1.5, 1.1)  # fastest, middle, slowest; pixels
_DASH, _DASH_GAP = 7.0, 4.0  # pixels
_DOT_GAP = 4.2  # pixels from dot to dot
# Every second vertex nearer than this to the line past it is left out: no eye sees it, and
# stroking costs half.
_FLATNESS = 0.06  # pixels


def side_pen(
    theme: Theme, side: str, sheet: int = 0, scale: float = 1.0, negative: bool = False
) -> QPen:
    """Return the pen of a curve: A solid, B dashed, both dotted where the value is negative."""
    weight = SHEET_WEIGHTS[min(max(sheet, 0), 2)]
    pen = QPen(theme.side(side), weight * scale)
    pen.setJoinStyle(Qt.PenJoinStyle.BevelJoin)
    pen.setCapStyle(Qt.PenCapStyle.FlatCap)
    if negative:
        pen.setCapStyle(Qt.PenCapStyle.RoundCap)
        pen.setDashPattern([0.01, _DOT_GAP / weight])
    elif side == "B":
        pen.setDashPattern([_DASH / weight, _DASH_GAP / weight])
    return pen


def polygon(points: FloatArray) -> QPolygonF:
    """Return points, shape (2, N), as a polygon of Qt."""
    x, y = np.ascontiguousarray(points)
    return cast(QPolygonF, pg.functions.arrayToQPolygonF(x, y))


def runs(kinds: IntArray) -> list[tuple[int, int, int]]:
    """Return the runs of equal entries as (kind, first, one past the last)."""
    if not kinds.size:
        return []
    edges = np.flatnonzero(kinds[1:] != kinds[:-1]) + 1
    starts = [0, *edges.tolist()]
    return [(int(kinds[i]), i, j)
            for i, j in zip(starts, [*edges.tolist(), kinds.size], strict=True)]  # fmt: skip


def finite_runs(points: FloatArray) -> list[tuple[int, int]]:
    """Return first and one past the last index of each stretch without NaN, shape (M, N)."""
    broken: BoolArray = ~np.isfinite(points.sum(axis=0))
    return [(i, j) for kind, i, j in runs(broken.astype(np.intp)) if not kind]


def thin(points: FloatArray, tolerance: float = _FLATNESS) -> FloatArray:
    """Return the points without every second one that its neighbours' chord passes closely.

    Shape (2, N) in pixels, finite. Corners and both ends stay.
    """
    if points.shape[1] < 5:
        return points
    middle = 0.5 * (points[:, 0:-2:2] + points[:, 2::2])
    off = np.abs(points[:, 1:-1:2] - middle).max(axis=0)
    keep = np.ones(points.shape[1], dtype=bool)
    keep[1:-1:2] = off > tolerance
    return points[:, keep]


def draw_curve(painter: QPainter, points: FloatArray, pen: QPen, scale: float = 1.0) -> None:
    """Draw a curve, shape (2, N) in pixels, broken at NaN."""
    painter.setPen(pen)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    for first, last in finite_runs(points):
        if last - first > 1:
            painter.drawPolyline(polygon(thin(points[:, first:last], _FLATNESS * scale)))


def draw_signed_curve(
    painter: QPainter,
    points: FloatArray,
    negative: BoolArray | None,
    pens: tuple[QPen, QPen],
    scale: float = 1.0,
) -> None:
    """Draw a curve, shape (2, N) in pixels, by the second pen where `negative`, shape (N,)."""
    if negative is None or not negative.any():
        draw_curve(painter, points, pens[0], scale)
        return
    for kind, first, last in runs(negative.astype(np.intp)):
        # One point more, so that the two pens meet.
        draw_curve(painter, points[:, first : last + 1], pens[kind], scale)


def band_path(inner: FloatArray, outer: FloatArray) -> QPainterPath:
    """Return the area between two curves, each (2, N) in pixels, where both are defined."""
    path = QPainterPath()
    path.setFillRule(Qt.FillRule.OddEvenFill)
    for first, last in finite_runs(np.concatenate([inner, outer])):
        if last - first > 1:
            edge = np.concatenate(
                [thin(outer[:, first:last]), thin(inner[:, first:last])[:, ::-1]], axis=1
            )
            path.addPolygon(polygon(edge))
            path.closeSubpath()
    return path


def draw_sample(
    painter: QPainter, left: QPointF, length: float, theme: Theme, side: str, scale: float
) -> None:
    """Draw the short line of a legend, from `left` to the right."""
    painter.setPen(side_pen(theme, side, 0, scale))
    painter.drawLine(left, left + QPointF(length, 0.0))
