"""The renderer without OpenGL: the same picture from numpy, for machines that have none.

Sheets are filled triangle by triangle with a depth buffer, lit at their vertices, and laid
over one another from the inside outwards; strokes are drawn by Qt where the depth buffer
lets them be seen.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QLineF, Qt
from PySide6.QtGui import QColor, QImage, QPainter, QPen

from core.arrays import BoolArray, Float32Array, FloatArray, IntArray
from gui.stage import composition, lighting
from gui.stage.camera import Camera, Size, Tile
from gui.stage.composition import PLAIN, Finish, Ground, Layer, LineSet
from gui.stage.raster import Fragments, places_in_run, rasterise
from gui.theme import GREY_FOR_UNDEFINED, Theme, colour_table
from gui.viewdata import PaneView
from gui.widgets.colour_bar import table_position

_PIECE = 3.0  # pixels: strokes are tested for visibility in pieces of this length


@dataclass(eq=False)
class _Canvas:
    """A picture being made: pixels (premultiplied blue, green, red, alpha) and depths."""

    image: QImage
    pixels: npt.NDArray[np.uint8]  # (height * width, 4), a view into the image
    depth: Float32Array  # (height * width,) from the eye; infinite where nothing is
    stroke: float  # pixels per logical pixel

    @property
    def width(self) -> int:
        """Pixels across."""
        return self.image.width()

    @property
    def height(self) -> int:
        """Pixels down."""
        return self.image.height()


@dataclass(frozen=True)
class _Shot:
    """One picture being made: what is seen, and how points become pixels."""

    view: PaneView
    camera: Camera
    theme: Theme
    matrix: FloatArray
    size: Size

    def project(self, points: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return pixels of the canvas (2, N) and depths (N,) of points (3, N) in radii."""
        x, y, _, depth = self.matrix[:, :3] @ points + self.matrix[:, 3:]
        with np.errstate(invalid="ignore", divide="ignore"):
            across = (0.5 + 0.5 * x / depth) * self.size[0]
            down = (0.5 - 0.5 * y / depth) * self.size[1]
        return np.stack([across, down]), depth


class FlatRenderer:
    """Draws scenes with numpy, with the same interface as the renderer with OpenGL."""

    def render(
        self,
        view: PaneView,
        camera: Camera,
        size: Size,
        theme: Theme,
        ground: Ground = "theme",
        samples: int = 0,
        finish: Finish = PLAIN,
    ) -> QImage:
        """Return the scene of a pane as a picture of its own.

        Parameters are those of `composition.Renderer.render`. There are no samples here: at
        rest the picture is made twice as fine and reduced.
        """
        fine = max(finish.supersample, 2 if samples else 1)
        tile: Tile = (0, 0, *size) if finish.tile is None else finish.tile
        width, height = tile[2] * fine, tile[3] * fine
        canvas = _canvas(width, height, composition.ground_colour(ground, theme),
                         finish.scale * fine)
        shot = _Shot(view, camera, theme, camera.matrix(size, tile), (width, height))
        for layer in composition.layers(view):
            _draw_sheet(canvas, shot, layer)
            _draw_lines(canvas, shot, composition.outlines(view, layer, theme))
        _draw_disc(canvas, shot)
        kept = composition.kept_half(view, camera)
        _draw_lines(canvas, shot, composition.free_lines(view, theme, kept))
        return canvas.image if fine == 1 else canvas.image.scaled(
            tile[2], tile[3], Qt.AspectRatioMode.IgnoreAspectRatio,
            Qt.TransformationMode.SmoothTransformation,
        )

    def close(self) -> None:
        """Hold nothing, free nothing."""


def _canvas(width: int, height: int, ground: QColor, stroke: float) -> _Canvas:
    """Return an empty picture of one colour."""
    image = QImage(width, height, QImage.Format.Format_ARGB32_Premultiplied)
    image.fill(ground)
    pixels = np.frombuffer(image.bits(), dtype=np.uint8).reshape(-1, 4)
    return _Canvas(image, pixels, np.full(width * height, np.inf, dtype=np.float32), stroke)


def _draw_sheet(canvas: _Canvas, shot: _Shot, layer: Layer) -> None:
    """Fill the triangles of a sheet that can be seen."""
    rows = layer.sheet.rows.astype(np.float64)
    rows[:3] /= shot.view.radius
    pixels, depth = shot.project(rows[:3])
    triangles, is_back = _facing(pixels, rows, shot, layer)
    if not len(triangles):
        return
    colour, opacity = _vertex_colours(rows, shot, layer)
    kept = composition.kept_half(shot.view, shot.camera)
    rows_at_corners = [depth, *colour]
    if layer.opacity < 1.0:
        rows_at_corners.append(opacity)
    if kept is not None:
        rows_at_corners.append(kept @ rows[:3])
    values = np.stack([row[triangles] for row in rows_at_corners], axis=-1)
    if is_back.any():
        values[is_back, :, 1:4] *= lighting.BACK_TINT[::-1]
    corners = pixels[:, triangles].transpose(1, 2, 0)
    found = rasterise(corners, values, canvas.width, canvas.height)
    _lay_over(canvas, _nearest(canvas, found, is_cut=kept is not None))


def _facing(
    pixels: FloatArray, rows: FloatArray, shot: _Shot, layer: Layer
) -> tuple[IntArray, BoolArray]:
    """Return the triangles to fill, and which of them show their inside."""
    triangles = layer.sheet.triangles
    defined: BoolArray = np.logical_and.reduce(np.isfinite(rows[:6]), axis=0)
    if not defined.all():
        triangles = triangles[defined[triangles].all(axis=1)]
    a, b, c = (pixels[:, triangles[:, corner]] for corner in range(3))
    # Counter-clockwise in the world is negative here, because y runs down.
    area = (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])
    is_back = area > 0.0
    if layer.is_opened or shot.view.is_wave_surface:
        return triangles.astype(np.intp), is_back & layer.is_opened
    front = triangles[~is_back].astype(np.intp)
    return front, np.zeros(len(front), dtype=bool)


def _vertex_colours(
    rows: FloatArray, shot: _Shot, layer: Layer
) -> tuple[FloatArray, FloatArray]:
    """Return lit colours (3, N), blue green red, and opacities (N,), all 0 to 1."""
    basis = shot.camera.basis()
    normals = basis @ rows[3:6]
    towards = (shot.camera.eye()[:, None] - rows[:3]).T @ basis.T
    towards = towards.T
    with np.errstate(invalid="ignore", divide="ignore"):
        normals = normals / np.sqrt((normals * normals).sum(axis=0))
        towards = towards / np.sqrt((towards * towards).sum(axis=0))
    light, sheen, facing = lighting.lit(normals, towards)
    position = table_position(shot.view.scale, rows[6])
    undefined = ~np.isfinite(position)
    index = np.clip(np.where(undefined, 0.0, position) * 255.0 + 0.5, 0, 255).astype(np.intp)
    base = colour_table(shot.view.scale.diverging)[index, 2::-1].T / 255.0
    if undefined.any():
        grey = QColor(GREY_FOR_UNDEFINED)
        base[:, undefined] = np.array([[grey.blueF()], [grey.greenF()], [grey.redF()]])
    return np.minimum(base * light + sheen, 1.0), lighting.covered(layer.opacity, facing)


def _nearest(canvas: _Canvas, found: Fragments, is_cut: bool) -> Fragments:
    """Return the fragments not hidden by others nor by what is drawn, and note their depth."""
    pixel, values = found.pixel, found.values
    if is_cut:
        stays = values[-1] >= 0.0
        pixel, values = pixel[stays], values[:-1, stays]
    np.minimum.at(canvas.depth, pixel, values[0])
    wins = values[0] <= canvas.depth[pixel]
    return Fragments(pixel[wins], values[1:, wins])


def _lay_over(canvas: _Canvas, found: Fragments) -> None:
    """Blend fragments, rows blue, green, red and, unless opaque, opacity, over the picture."""
    colour = np.clip(found.values[:3], 0.0, 1.0)
    paint = np.full((len(found.pixel), 4), np.float32(255.5))
    if len(found.values) == 3:
        paint[:, :3] = (colour * np.float32(255.0) + np.float32(0.5)).T
    else:
        opacity = np.clip(found.values[3], 0.0, 1.0)
        paint[:, :3] = (colour * opacity * np.float32(255.0)).T
        paint[:, 3] = opacity * np.float32(255.0)
        paint += canvas.pixels[found.pixel] * (1.0 - opacity)[:, None] + np.float32(0.5)
    canvas.pixels[found.pixel] = paint.astype(np.uint8)


def _draw_disc(canvas: _Canvas, shot: _Shot) -> None:
    """Blend the section disc where no sheet is before it: one ray per pixel meets its plane."""
    if shot.view.section is None or not composition.has_disc(shot.view):
        return
    rim, _ = shot.project(composition.disc_rim(shot.view.section))
    left, top = np.maximum(np.floor(rim.min(axis=1)), 0).astype(int)
    right = min(int(np.ceil(rim[0].max())), canvas.width)
    bottom = min(int(np.ceil(rim[1].max())), canvas.height)
    if left >= right or top >= bottom:
        return
    x, y = np.arange(left, right) + 0.5, np.arange(top, bottom) + 0.5
    depth, radius = _disc_depth(shot, x, y)
    pixel = (np.arange(top, bottom)[:, None] * canvas.width + np.arange(left, right)).ravel()
    shown = np.flatnonzero(
        (radius.ravel() <= composition.DISC_RADIUS) & (depth.ravel() < canvas.depth[pixel])
    )
    colour = composition.disc_colour(shot.view, shot.theme)
    parts = [colour.blueF(), colour.greenF(), colour.redF(), colour.alphaF()]
    values = np.repeat(np.array(parts, dtype=np.float32)[:, None], len(shown), axis=1)
    _lay_over(canvas, Fragments(pixel[shown], values))


def _disc_depth(shot: _Shot, x: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the depth and the distance from the origin where pixels' rays meet the plane."""
    inverse = np.linalg.inv(shot.matrix)
    across = 2.0 * x / shot.size[0] - 1.0
    upwards = 1.0 - 2.0 * y / shot.size[1]
    eye = shot.camera.eye()
    # A point deep inside the clip volume on the ray of each pixel, homogeneous coordinates.
    point = (inverse[:, 0, None, None] * across + inverse[:, 1, None, None] * upwards[:, None]
             + inverse[:, 2, None, None] * 0.5 + inverse[:, 3, None, None])
    ray = point[:3] / point[3] - eye[:, None, None]
    normal = np.asarray(shot.view.section)
    with np.errstate(divide="ignore", invalid="ignore"):
        share = -(normal @ eye) / np.einsum("i,iyx->yx", normal, ray)
        met = eye[:, None, None] + share * ray
        depth = composition.depth_of(shot.camera, met)
        radius = np.sqrt((met * met).sum(axis=0))
    return np.where(depth > 0.0, depth, np.inf), np.where(np.isfinite(radius), radius, np.inf)


def _draw_lines(canvas: _Canvas, shot: _Shot, sets: tuple[LineSet, ...]) -> None:
    """Draw strokes with Qt: first what shines through a sheet, then what is before it."""
    painter = QPainter(canvas.image)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    for line in sets:
        visible, hidden = _split(canvas, shot, line)
        pen = QPen(line.colour, line.width * canvas.stroke)
        pen.setCapStyle(Qt.PenCapStyle.FlatCap)
        if line.dash > 0.0:
            pen.setDashPattern([line.dash / line.width, 0.8 * line.dash / line.width])
        if line.shine > 0.0 and hidden:
            faint = QColor(line.colour)
            faint.setAlphaF(line.shine)
            pen.setColor(faint)
            painter.setPen(pen)
            painter.drawLines(hidden)
        if visible:
            pen.setColor(line.colour)
            painter.setPen(pen)
            painter.drawLines(visible)
    painter.end()


def _split(
    canvas: _Canvas, shot: _Shot, line: LineSet
) -> tuple[list[QLineF], list[QLineF]]:
    """Return the parts of strokes before the sheets and the parts behind them."""
    starts, steps = (
        line.segments[:, 0].T.astype(np.float64),
        (line.segments[:, 1] - line.segments[:, 0]).T.astype(np.float64),
    )
    lengths = np.hypot(*(shot.project(starts + steps)[0] - shot.project(starts)[0]))
    counts = np.maximum(1, lengths / (_PIECE * canvas.stroke)).astype(np.intp)
    owner, place = np.repeat(np.arange(len(counts)), counts), places_in_run(counts)
    middles = starts[:, owner] + steps[:, owner] * ((place + 0.5) / counts[owner])
    hidden = _is_hidden(canvas, shot, middles, line.lift)
    # A run of pieces that are alike, of one stroke, is drawn as one.
    begins = np.flatnonzero((place == 0) | (hidden != np.roll(hidden, 1)))
    ends = np.append(begins[1:], len(place)) - 1
    who = owner[begins]
    first, last = place[begins] / counts[who], (place[ends] + 1) / counts[who]
    (x0, y0), _ = shot.project(starts[:, who] + steps[:, who] * first)
    (x1, y1), _ = shot.project(starts[:, who] + steps[:, who] * last)
    parts: tuple[list[QLineF], list[QLineF]] = ([], [])
    for number, corners in enumerate(zip(*(c.tolist() for c in (x0, y0, x1, y1)), strict=True)):
        parts[int(hidden[begins[number]])].append(QLineF(*corners))
    return parts


def _is_hidden(canvas: _Canvas, shot: _Shot, points: FloatArray, lift: float) -> BoolArray:
    """Tell which points (3, N) lie behind what is drawn; beside the picture none does."""
    (x, y), depth = shot.project(points)
    column, row = np.floor(x).astype(np.intp), np.floor(y).astype(np.intp)
    inside = (column >= 0) & (column < canvas.width) & (row >= 0) & (row < canvas.height)
    pixel = np.where(inside, row * canvas.width + column, 0)
    hidden: BoolArray = inside & (depth - lift > canvas.depth[pixel])
    return hidden
