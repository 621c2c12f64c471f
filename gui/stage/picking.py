"""From a pixel to the direction on the surface there, and from a direction to its point.

Nothing here needs OpenGL. Directions and points are in part axes, points in units of
`PaneView.radius`.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from gui.stage import composition
from gui.stage.camera import Camera, Size
from gui.stage.composition import Layer
from gui.stage.remembered import Remembered
from gui.viewdata import PaneView, SheetView, Vector3

_FARTHEST = np.cos(np.radians(8.0))  # a mesh has a vertex nearer than this, where it is defined
_OWN_DEPTH = 0.015  # a point on a surface is not hidden by the triangles it lies on
_EDGE = -1e-6  # barycentric coordinates count as inside from here

_boxes: Remembered[FloatArray] = Remembered(12)
_directions: Remembered[FloatArray] = Remembered(12)
_fans: Remembered[tuple[IntArray, IntArray]] = Remembered(6)
_mark_points: Remembered[tuple[FloatArray | None, ...]] = Remembered(4)


@dataclass(frozen=True)
class Hit:
    """Where the line of sight of a pixel first meets a visible sheet."""

    direction: Vector3  # of the property: the radius, or the wave normal on a wave surface
    sheet: int  # its place in `PaneView.sheets`
    distance: float  # from the eye


def pick(
    view: PaneView, camera: Camera, size: Size, pixel: tuple[float, float]
) -> Hit | None:
    """Return what is under a pixel of the scene, or None beside the surfaces."""
    origin, ray = camera.ray(pixel, size)
    kept = composition.kept_half(view, camera)
    best: Hit | None = None
    for layer in composition.layers(view):
        met = _first_met(view, layer, camera, size, (pixel, origin, ray), kept)
        if met is not None and (best is None or met[0] < best.distance):
            distance, triangle, weights = met
            direction = _read(view, layer.sheet, triangle, weights)
            best = Hit(direction, layer.index, distance)
    return best


def surface_point(view: PaneView, direction: Vector3) -> FloatArray | None:
    """Return where a direction pierces the outermost visible sheet, (3,), or None.

    On a wave surface the direction is that of the wave normal.
    """
    towards = np.asarray(direction, dtype=float)
    points = [_point_on(view, layer.sheet, towards) for layer in composition.layers(view)]
    found = [point for point in points if point is not None]
    return max(found, key=lambda point: float(point @ point)) if found else None


def mark_points(view: PaneView) -> tuple[FloatArray | None, ...]:
    """Return the surface point of each of the marks of a view."""
    return _mark_points.get(
        (view,), lambda: tuple(surface_point(view, mark.direction) for mark in view.marks)
    )


def are_hidden(view: PaneView, camera: Camera, size: Size, points: FloatArray) -> BoolArray:
    """Tell which points (3, N) lie behind a visible sheet as the camera sees them."""
    kept = composition.kept_half(view, camera)
    pixels, _ = camera.project(points, size)
    eye = camera.eye()
    hidden = np.zeros(points.shape[1], dtype=bool)
    for number, point in enumerate(points.T):
        distance = float(np.linalg.norm(point - eye))
        sight = ((pixels[0, number], pixels[1, number]), eye, (point - eye) / distance)
        for layer in composition.layers(view):
            met = _first_met(view, layer, camera, size, sight, kept)
            hidden[number] |= met is not None and met[0] < distance - _OWN_DEPTH
    return hidden


def _first_met(
    view: PaneView,
    layer: Layer,
    camera: Camera,
    size: Size,
    sight: tuple[tuple[float, float], FloatArray, FloatArray],
    kept: FloatArray | None,
) -> tuple[float, IntArray, FloatArray] | None:
    """Return distance, corners and weights where a line of sight first meets a sheet.

    `sight` is the pixel, the eye and the unit direction. What is cut away is not met.
    Source of the intersection: Möller & Trumbore 1997, J. Graphics Tools 2(1), 21.
    """
    (x, y), origin, ray = sight
    left, right, top, bottom = _boxes_of(view, layer.sheet, camera, size)
    near = np.flatnonzero((left <= x) & (x <= right) & (top <= y) & (y <= bottom))
    if not near.size:
        return None
    corners = layer.sheet.triangles[near].astype(np.intp)
    a, b, c = (layer.sheet.rows[:3, corners[:, k]] / view.radius for k in range(3))
    one, two, back = b - a, c - a, origin[:, None] - a
    across, turned = _cross(ray, two), _cross(back, one)
    with np.errstate(divide="ignore", invalid="ignore"):
        scale = 1.0 / _dot(one, across)
        u, v = _dot(back, across) * scale, _dot(ray, turned) * scale
        distance = _dot(two, turned) * scale
    inside = (u >= _EDGE) & (v >= _EDGE) & (u + v <= 1.0 - _EDGE)
    if kept is not None:
        inside &= kept @ origin + (kept @ ray) * distance >= 0.0
    hits = np.flatnonzero(inside)
    if not hits.size:
        return None
    first = hits[np.argmin(distance[hits])]
    weights = np.array([1.0 - u[first] - v[first], u[first], v[first]])
    return float(distance[first]), corners[first], weights


def _dot(a: FloatArray, b: FloatArray) -> FloatArray:
    """Return scalar products (N,) of vectors (3, N)."""
    products: FloatArray = a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
    return products


def _cross(a: FloatArray, b: FloatArray) -> FloatArray:
    """Return vector products (3, N); `np.cross` spends most of its time on turning axes."""
    return np.stack(
        [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]]
    )


def _boxes_of(view: PaneView, sheet: SheetView, camera: Camera, size: Size) -> FloatArray:
    """Return left, right, top and bottom of every triangle on the screen, (4, M)."""

    def measure() -> FloatArray:
        (x, y), _ = camera.project(sheet.rows[:3].astype(np.float64) / view.radius, size)
        a, b, c = sheet.triangles.T
        return np.stack(
            [
                np.minimum(np.minimum(x[a], x[b]), x[c]),
                np.maximum(np.maximum(x[a], x[b]), x[c]),
                np.minimum(np.minimum(y[a], y[b]), y[c]),
                np.maximum(np.maximum(y[a], y[b]), y[c]),
            ]
        )

    place = (camera.azimuth, camera.elevation, camera.zoom)
    return _boxes.get((sheet.rows, sheet.triangles, view.radius, size, place), measure)


def _read(
    view: PaneView, sheet: SheetView, triangle: IntArray, weights: FloatArray
) -> Vector3:
    """Return the direction that a point of a triangle stands for."""
    rows = sheet.rows[3:6] if view.is_wave_surface else sheet.rows[:3]
    x, y, z = rows[:, triangle].astype(np.float64) @ weights
    length = float(np.sqrt(x * x + y * y + z * z))
    return float(x) / length, float(y) / length, float(z) / length


def _point_on(view: PaneView, sheet: SheetView, towards: FloatArray) -> FloatArray | None:
    """Return where a direction pierces one sheet, interpolated in the triangle it falls in."""
    directions = _directions_of(view, sheet)
    closeness = towards @ directions
    nearest = int(np.argmax(closeness))
    if closeness[nearest] < _FARTHEST:
        return None
    order, starts = _fan_table(sheet)
    triangles = order[starts[nearest] : starts[nearest + 1]] // 3
    corners = sheet.triangles[triangles].astype(np.intp)
    basis = directions if view.is_wave_surface else sheet.rows[:3].astype(np.float64)
    a, b, c = (basis[:, corners[:, k]] for k in range(3))
    opposite = ((b, c), (c, a), (a, b))
    weights = np.stack([_dot(towards, _cross(p, q)) for p, q in opposite], axis=1)
    with np.errstate(invalid="ignore", divide="ignore"):
        weights = weights / weights.sum(axis=1, keepdims=True)
    inside = np.flatnonzero((weights >= _EDGE).all(axis=1))
    if not inside.size:
        return np.asarray(sheet.rows[:3, nearest], dtype=float) / view.radius
    best = inside[0]
    point: FloatArray = sheet.rows[:3, corners[best]].astype(np.float64) @ weights[best]
    return point / view.radius


def _directions_of(view: PaneView, sheet: SheetView) -> FloatArray:
    """Return the unit direction that each vertex stands for (3, N); zero where undefined."""

    def normalise() -> FloatArray:
        rows = sheet.rows[3:6] if view.is_wave_surface else sheet.rows[:3]
        vectors = rows.astype(np.float64)
        length = np.sqrt((vectors * vectors).sum(axis=0))
        with np.errstate(invalid="ignore", divide="ignore"):
            unit = vectors / length
        return np.where(np.isfinite(sheet.rows[:3]).all(axis=0), np.nan_to_num(unit), 0.0)

    return _directions.get((sheet.rows, float(view.is_wave_surface)), normalise)


def _fan_table(sheet: SheetView) -> tuple[IntArray, IntArray]:
    """Return corners sorted by vertex and where each vertex starts: its fan of triangles."""

    def sort() -> tuple[IntArray, IntArray]:
        corners = sheet.triangles.ravel()
        order = np.argsort(corners, kind="stable")
        starts = np.searchsorted(corners[order], np.arange(sheet.rows.shape[1] + 1))
        return order, starts

    return _fans.get((sheet.triangles, sheet.rows.shape[1]), sort)
