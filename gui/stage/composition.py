"""What the stage draws, in which order: the part of the drawing that needs no OpenGL.

Both renderers take their orders from here, so that a picture looks the same whichever of
them made it. Lengths are in units of `PaneView.radius`, positions in part axes.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, Protocol

import numpy as np
from PySide6.QtGui import QColor, QImage

from core.arrays import Float32Array, FloatArray, IndexArray
from gui.stage.camera import DISTANCE, Camera, Size, Tile
from gui.stage.remembered import Remembered
from gui.theme import Theme
from gui.viewdata import PaneView, SheetView, Triad, Vector3

Ground = Literal["theme", "white", "transparent"]

AXIS_REACH = 1.19  # how far axes come out of the surface
AXIS_BACK = 1.04  # and at their negative end, where they are faint
DISC_RADIUS = 1.08
DISC_OPACITY = 0.10
_OUTER_OPACITY = (0.40, 0.26)  # of the first and second sheet round the innermost one

_outlines: Remembered[Float32Array] = Remembered(16)
_radii: Remembered[float] = Remembered(16)


@dataclass(frozen=True)
class Finish:
    """How finely a picture is made.

    Attributes
    ----------
    scale : float
        Pixels of the picture per logical pixel: how strokes grow.
    tile : (int, int, int, int) or None
        Draw only this part of the picture; None draws it all.
    supersample : 1 or 2
        2 draws twice as fine each way and takes the mean.
    """

    scale: float = 1.0
    tile: Tile | None = None
    supersample: int = 1


PLAIN = Finish()


class Renderer(Protocol):
    """Draws the scene of a pane: everything but the words and marks laid over it."""

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
        """Return the picture, or its tile; `size` is that of the whole picture in pixels."""

    def close(self) -> None:
        """Give back whatever is held outside Python; the renderer is not used after."""


@dataclass(frozen=True, eq=False)
class Layer:
    """One sheet to draw.

    Attributes
    ----------
    index : int
        Its place in `PaneView.sheets`.
    opacity : float
        1 for an opaque sheet.
    is_opened : bool
        The half in front of the section plane is cut away and the inside shows.
    """

    index: int
    sheet: SheetView
    opacity: float
    is_opened: bool


@dataclass(frozen=True, eq=False)
class LineSet:
    """Straight strokes with one look.

    Attributes
    ----------
    segments : (M, 2, 3) float32 array
    width, dash : float
        Logical pixels; a dash of 0 is a solid line.
    shine : float
        Opacity with which the part behind a surface shows through.
    lift : float
        Distance in depth by which the line is drawn before the surface it lies on.
    """

    segments: Float32Array
    colour: QColor
    width: float
    dash: float = 0.0
    shine: float = 0.0
    lift: float = 0.0


def layers(view: PaneView) -> tuple[Layer, ...]:
    """Return the visible sheets from the innermost to the outermost.

    The innermost is opaque and the ones around it are translucent; when the view is cut away
    all are opaque and opened.
    """
    shown = [
        (mean_radius(sheet), index, sheet)
        for index, sheet in enumerate(view.sheets)
        if sheet.visible
    ]
    ordered = sorted((item for item in shown if item[0] > 0.0), key=lambda item: item[0])
    is_opened = view.cut_away and view.section is not None
    result = []
    for place, (_, index, sheet) in enumerate(ordered):
        glass = 1.0 if is_opened or place == 0 else _OUTER_OPACITY[min(place, 2) - 1]
        result.append(Layer(index, sheet, glass * sheet.opacity, is_opened))
    return tuple(result)


def mean_radius(sheet: SheetView) -> float:
    """Return the mean distance of the vertices from the origin; 0 where none is defined."""

    def measure() -> float:
        x, y, z = (row[::3] for row in sheet.rows[:3])
        radius = np.sqrt(x * x + y * y + z * z)
        radius = radius[np.isfinite(radius)]
        return float(radius.mean()) if radius.size else 0.0

    return _radii.get((sheet.rows,), measure)


def kept_half(view: PaneView, camera: Camera) -> FloatArray | None:
    """Return the unit normal of the half-space that stays, (3,), or None when all stays.

    The half towards the viewer is the one cut away, whichever side he looks from.
    """
    if view.section is None or not view.cut_away:
        return None
    normal = np.asarray(view.section, dtype=float)
    return -normal if normal @ camera.eye() > 0.0 else normal


def outlines(view: PaneView, layer: Layer, theme: Theme) -> tuple[LineSet, ...]:
    """Return the curve in which the section plane cuts a sheet, with a halo under it."""
    if view.section is None:
        return ()
    rows, triangles, normal = layer.sheet.rows, layer.sheet.triangles, view.section
    segments = _outlines.get(
        (rows, triangles, normal, view.radius),
        lambda: section_segments(rows, triangles, normal) / np.float32(view.radius),
    )
    if layer.is_opened:
        width = 1.2 if view.is_wave_surface else 1.8  # folded sheets have many rims
        return (LineSet(segments, theme.colour("ink"), width, lift=0.012),)
    return (
        LineSet(segments, theme.colour("stage", 0.55), 3.2, lift=0.012),
        LineSet(segments, theme.side(view.side), 1.5, lift=0.013),
    )


def section_segments(
    rows: Float32Array, triangles: IndexArray, normal: Vector3
) -> Float32Array:
    """Return where a plane through the origin cuts a mesh, as strokes (M, 2, 3)."""
    height = np.asarray(normal, dtype=np.float32) @ rows[:3]
    above = height >= 0.0
    corners = above[triangles]
    count = corners.sum(axis=1)
    crossing = np.flatnonzero((count == 1) | (count == 2))
    cut = triangles[crossing]
    cut_above = corners[crossing]
    defined = np.isfinite(height[cut]).all(axis=1)
    cut, cut_above = cut[defined], cut_above[defined]
    is_single = count[crossing][defined] == 1
    lone = np.argmax(cut_above == is_single[:, None], axis=1)
    each = np.arange(len(cut))
    tip = cut[each, lone]
    ends = []
    for step in (1, 2):
        other = cut[each, (lone + step) % 3]
        share = height[tip] / (height[tip] - height[other])
        ends.append(rows[:3, tip] + share * (rows[:3, other] - rows[:3, tip]))
    return np.ascontiguousarray(np.stack(ends).transpose(2, 0, 1), dtype=np.float32)


def free_lines(
    view: PaneView, theme: Theme, kept: FloatArray | None = None
) -> tuple[LineSet, ...]:
    """Return the axes, the polarisation ticks and the rim of the section disc.

    Ticks of what is cut away go with it; `kept` is the normal of the half that stays.
    """
    result = [line for triad in view.triads for line in _triad_lines(triad, theme)]
    if view.ticks is not None and len(view.ticks):
        ticks = np.asarray(view.ticks / view.radius, dtype=np.float32)
        if kept is not None:
            ticks = np.ascontiguousarray(ticks[ticks.sum(axis=1) @ kept >= 0.0])
        result.append(LineSet(ticks, theme.colour("ink"), 1.3, lift=0.02))
    if has_disc(view):
        result.append(LineSet(_ring(view), theme.side(view.side, 0.55), 1.0))
    return tuple(result)


def has_disc(view: PaneView) -> bool:
    """Tell whether the section plane is drawn as a disc."""
    return view.section is not None and not view.cut_away


def disc_colour(view: PaneView, theme: Theme) -> QColor:
    """Return the colour of the section disc, with its opacity."""
    return theme.side(view.side, DISC_OPACITY)


def disc_rim(normal: Vector3, count: int = 145) -> FloatArray:
    """Return points (3, count) once round the section disc; the last is the first."""
    n = np.asarray(normal, dtype=float)
    first = np.eye(3)[int(np.argmin(np.abs(n)))]
    first = first - (first @ n) * n
    first /= np.linalg.norm(first)
    second = np.cross(n, first)
    angle = np.linspace(0.0, 2.0 * np.pi, count)
    rim: FloatArray = DISC_RADIUS * (
        np.outer(first, np.cos(angle)) + np.outer(second, np.sin(angle))
    )
    return rim


def depth_of(camera: Camera, points: FloatArray) -> FloatArray:
    """Return how far points (3, ...) lie from the eye along the direction of view."""
    towards = camera.basis()[2]
    depth: FloatArray = DISTANCE - np.tensordot(towards, points, axes=1)
    return depth


def ground_colour(ground: Ground, theme: Theme) -> QColor:
    """Return what stands behind the surface."""
    if ground == "transparent":
        return QColor(0, 0, 0, 0)
    return QColor("white") if ground == "white" else theme.colour("stage")


def _ring(view: PaneView) -> Float32Array:
    """Return the rim of the section disc as strokes."""
    points = disc_rim(view.section or (0.0, 0.0, 1.0)).T
    return np.stack([points[:-1], points[1:]], axis=1).astype(np.float32)


def _triad_lines(triad: Triad, theme: Theme) -> tuple[LineSet, LineSet]:
    """Return the three axes of a triad, and their faint negative ends."""
    directions = np.asarray(triad.directions, dtype=np.float32)
    origin = np.zeros_like(directions)
    ahead = np.stack([origin, AXIS_REACH * directions], axis=1)
    behind = np.stack([origin, -AXIS_BACK * directions], axis=1)
    if triad.kind == "crystal":
        colour, width, dash = theme.colour("secondary"), 1.4, 5.0
    else:
        colour, width, dash = theme.colour("ink"), 1.5, 0.0
    faint = QColor(colour)
    faint.setAlphaF(0.30)
    return (
        LineSet(ahead.astype(np.float32), colour, width, dash, shine=0.16),
        LineSet(behind.astype(np.float32), faint, 1.0, dash, shine=0.05),
    )
