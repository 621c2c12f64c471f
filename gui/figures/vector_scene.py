"""The scene of a pane as vectors: triangles from the farthest to the nearest, no pixels.

For the coarse mesh; a finer one makes files that few programs open with pleasure. Sheets are
painted from the inside outwards, as the renderers do it, and lit by the same lamps.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath, QPen, QPolygonF

from core.arrays import BoolArray, FloatArray, IntArray
from gui.stage import composition, lighting, picking
from gui.stage.camera import Camera, Size
from gui.stage.composition import Layer, LineSet
from gui.theme import GREY_FOR_UNDEFINED, Theme, colour_table
from gui.viewdata import PaneView
from gui.widgets.colour_bar import table_position

_SEAM = 0.45  # pixels at scale 1: strokes that close the seams between opaque triangles
_PIECE = 0.03  # radii: lines are tested for being hidden in pieces of this length
_LIFT = 1.012  # lines that lie on a sheet are tested this much farther out
_RINGS, _SPOKES = 24, 96  # cells of the section disc


class _Place:
    """Where points of the scene lie in the painter's rectangle."""

    def __init__(self, rect: QRectF, camera: Camera) -> None:
        self.rect, self.camera = rect, camera
        self.size: Size = (max(int(rect.width()), 1), max(int(rect.height()), 1))

    def project(self, points: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return the painter's coordinates (2, N) and depths (N,) of points (3, N)."""
        pixels, depth = self.camera.project(points, self.size)
        corner = np.array([[self.rect.left()], [self.rect.top()]])
        return pixels + corner, depth


def draw_vector_scene(
    painter: QPainter, rect: QRectF, view: PaneView, camera: Camera, theme: Theme, scale: float
) -> None:
    """Draw surfaces, section and axes of a pane as vectors.

    Parameters
    ----------
    painter : QPainter
    rect : QRectF
        What the scene fills: `gui.stage.labels.scene_rect` of the pane.
    view, camera, theme
    scale : float
        Size of strokes; 1 on the screen.
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    place = _Place(rect, camera)
    lines = composition.free_lines(view, theme, composition.kept_half(view, camera))
    for line in lines:
        _draw_lines(painter, place, view, line, scale, hidden=True)
    layers = composition.layers(view)
    for count, layer in enumerate(layers, start=1):
        _draw_sheet(painter, place, view, layer, scale)
        within = replace(view, sheets=tuple(one.sheet for one in layers[:count]))
        for line in composition.outlines(view, layer, theme):
            _draw_lines(painter, place, within, line, scale, lift=_LIFT)
    if composition.has_disc(view):
        _draw_disc(painter, place, view, theme)
    for line in lines:
        _draw_lines(painter, place, view, line, scale)
    painter.restore()


# --- sheets ---------------------------------------------------------------------------------


def _draw_sheet(
    painter: QPainter, place: _Place, view: PaneView, layer: Layer, scale: float
) -> None:
    rows = layer.sheet.rows.astype(np.float64)
    rows[:3] /= view.radius
    points, depth = place.project(rows[:3])
    triangles = _seen(points, rows, view, layer, place.camera)
    if not len(triangles):
        return
    order = np.argsort(-depth[triangles].mean(axis=1))
    triangles = triangles[order]
    colours = _face_colours(rows, triangles, view, layer, place.camera)
    corners = points[:, triangles].transpose(1, 2, 0).tolist()
    pen = QPen(Qt.PenStyle.NoPen)
    for polygon, (red, green, blue, alpha) in zip(corners, colours.tolist(), strict=True):
        colour = QColor(red, green, blue, alpha)
        if alpha == 255:
            pen = QPen(colour, _SEAM * scale)
            pen.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
        painter.setPen(pen if alpha == 255 else Qt.PenStyle.NoPen)
        painter.setBrush(colour)
        painter.drawPolygon(QPolygonF([QPointF(x, y) for x, y in polygon]))


def _seen(
    points: FloatArray, rows: FloatArray, view: PaneView, layer: Layer, camera: Camera
) -> IntArray:
    """Return the triangles to paint, (M, 3): defined, kept, and facing the eye."""
    triangles = layer.sheet.triangles.astype(np.intp)
    defined: BoolArray = np.logical_and.reduce(np.isfinite(rows[:6]), axis=0)
    triangles = triangles[defined[triangles].all(axis=1)]
    kept = composition.kept_half(view, camera)
    if kept is not None:
        middles = rows[:3, triangles].mean(axis=2)
        triangles = triangles[kept @ middles >= 0.0]
    if layer.is_opened or view.is_wave_surface:
        return triangles
    a, b, c = (points[:, triangles[:, corner]] for corner in range(3))
    area = (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])
    facing: IntArray = triangles[area < 0.0]
    return facing  # counter-clockwise in the world; y runs down here


def _face_colours(
    rows: FloatArray, triangles: IntArray, view: PaneView, layer: Layer, camera: Camera
) -> IntArray:
    """Return red, green, blue and alpha of each triangle, (M, 4), 0 to 255."""
    basis = camera.basis()
    towards = basis @ (camera.eye()[:, None] - rows[:3])
    with np.errstate(invalid="ignore", divide="ignore"):
        normals = basis @ rows[3:6]
        normals = normals / np.sqrt((normals * normals).sum(axis=0))
        towards = towards / np.sqrt((towards * towards).sum(axis=0))
        light, sheen, facing = lighting.lit(normals, towards)
        inside = (normals * towards).sum(axis=0) < 0.0
    base = _base_colours(rows[6], view)
    if layer.is_opened:
        base = np.where(inside, base * lighting.BACK_TINT[:, None], base)
    shaded = np.clip(base * light + sheen, 0.0, 1.0)
    alpha = lighting.covered(layer.opacity, facing)
    vertex = np.concatenate([shaded, alpha[None, :]])
    mean = vertex[:, triangles].mean(axis=2).T
    return np.asarray(np.clip(mean * 255.0 + 0.5, 0, 255), dtype=np.intp)


def _base_colours(values: FloatArray, view: PaneView) -> FloatArray:
    """Return the colours of values before light, (3, N), 0 to 1."""
    position = table_position(view.scale, values)
    defined = np.isfinite(position)
    index = np.clip(np.where(defined, position, 0.0) * 255.0 + 0.5, 0, 255).astype(np.intp)
    base = colour_table(view.scale.diverging)[index, :3].T / 255.0
    grey = QColor(GREY_FOR_UNDEFINED)
    plain = np.array([[grey.redF()], [grey.greenF()], [grey.blueF()]])
    return np.where(defined, base, plain)


# --- lines and the disc ---------------------------------------------------------------------


def _draw_lines(
    painter: QPainter, place: _Place, view: PaneView, line: LineSet, scale: float,
    hidden: bool = False, lift: float = 1.0,
) -> None:
    """Draw the pieces of strokes before the sheets, or, faintly, those behind them."""
    if hidden and line.shine <= 0.0:
        return
    starts, ends = _pieces(line)
    if not starts.shape[1]:
        return
    behind = picking.are_hidden(view, place.camera, place.size, lift * 0.5 * (starts + ends))
    kept = composition.kept_half(view, place.camera)
    if kept is not None and lift != 1.0:
        behind = behind & (np.abs(kept @ (starts + ends)) > 1e-3)
    chosen = behind if hidden else ~behind
    (x0, y0), _ = place.project(starts[:, chosen])
    (x1, y1), _ = place.project(ends[:, chosen])
    colour = QColor(line.colour)
    if hidden:
        colour.setAlphaF(line.shine)
    pen = QPen(colour, line.width * scale)
    pen.setCapStyle(Qt.PenCapStyle.FlatCap if line.dash else Qt.PenCapStyle.RoundCap)
    if colour.alpha() < 255:
        pen.setCapStyle(Qt.PenCapStyle.FlatCap)
    painter.setPen(pen)
    corners = zip(*(side.tolist() for side in (x0, y0, x1, y1)), strict=True)
    painter.drawLines([QLineF(*corner) for corner in corners])


def _pieces(line: LineSet) -> tuple[FloatArray, FloatArray]:
    """Return the starts and ends of short pieces, each (3, N); of dashed lines every other."""
    first = line.segments[:, 0].T.astype(np.float64)
    step = line.segments[:, 1].T.astype(np.float64) - first
    lengths = np.sqrt((step * step).sum(axis=0))
    counts = np.maximum(1, np.ceil(lengths / _PIECE)).astype(np.intp)
    owner = np.repeat(np.arange(len(counts)), counts)
    number = np.arange(len(owner)) - np.repeat(np.cumsum(counts) - counts, counts)
    begin, end = number / counts[owner], (number + 1) / counts[owner]
    if line.dash > 0.0:
        keep = number % 2 == 0
        owner, begin, end = owner[keep], begin[keep], end[keep]
    return first[:, owner] + begin * step[:, owner], first[:, owner] + end * step[:, owner]


def _draw_disc(painter: QPainter, place: _Place, view: PaneView, theme: Theme) -> None:
    """Fill the part of the section disc that no sheet hides, as one path."""
    rim = composition.disc_rim(view.section or (0.0, 0.0, 1.0), _SPOKES + 1)
    share = np.linspace(0.0, 1.0, _RINGS + 1)
    grid = share[None, :, None] * rim[:, None, :]  # (3, rings, spokes)
    middles = 0.25 * (grid[:, :-1, :-1] + grid[:, 1:, :-1] + grid[:, :-1, 1:] + grid[:, 1:, 1:])
    flat = middles.reshape(3, -1)
    hidden = picking.are_hidden(view, place.camera, place.size, flat).reshape(middles.shape[1:])
    pixels, _ = place.project(grid.reshape(3, -1))
    x, y = pixels.reshape(2, *grid.shape[1:])
    path = QPainterPath()
    path.setFillRule(Qt.FillRule.WindingFill)
    for i, j in np.argwhere(~hidden).tolist():
        corners = ((i, j), (i + 1, j), (i + 1, j + 1), (i, j + 1))
        path.addPolygon(QPolygonF([QPointF(float(x[c]), float(y[c])) for c in corners]))
        path.closeSubpath()
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(composition.disc_colour(view, theme))
    painter.drawPath(path)
