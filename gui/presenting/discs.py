"""Pictures of values over the hemisphere, remembered by what they show, and their contours."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from core import live
from core.arrays import FloatArray, IntArray
from core.directional.medium import Medium
from core.directional.sphere import sphere_mesh
from core.study.tolerance import cost_map
from gui.stage.remembered import Remembered

_COST_LEVEL = 5
_contours: Remembered[tuple[tuple[float, FloatArray], ...]] = Remembered(4)


@lru_cache(maxsize=8)
def disc_values(
    media: tuple[Medium, ...],
    key: str,
    choice: str,
    sheet: int,
    projection: str,
    delta: float,
    size: int,
) -> FloatArray:
    """Return the picture of one sheet; the same request gives the same object."""
    if choice == "cost":
        costs: FloatArray = _cost_picture(media[0], key, projection, delta, size)[sheet]
        return costs
    values = [live.hemisphere(medium, key, projection, size)[sheet] for medium in media]
    picture: FloatArray = values[1] - values[0] if choice == "difference" else values[0]
    return picture


@lru_cache(maxsize=4)
def _cost_picture(
    medium: Medium, key: str, projection: str, delta: float, size: int
) -> FloatArray:
    """Return the cost of a cutting error on the disc, taken from the nearest vertices."""
    mesh = sphere_mesh(_COST_LEVEL)
    costs = cost_map(medium, mesh, delta, key)
    inside = live.disc(projection, size)[1]
    nearest = _nearest_vertices(projection, size)
    picture = np.full((len(costs), *inside.shape), np.nan)
    picture[:, inside] = costs[:, nearest]
    return picture


@lru_cache(maxsize=4)
def _nearest_vertices(projection: str, size: int) -> IntArray:
    """Return, for every pixel of the disc, the nearest evaluated direction of the mesh."""
    from scipy.spatial import cKDTree

    half = sphere_mesh(_COST_LEVEL).half.n
    both = np.concatenate([half, -half], axis=1).T
    _, index = cKDTree(both).query(live.disc(projection, size)[0].n.T)
    return np.asarray(index % half.shape[1])


def contour_lines(
    picture: FloatArray, levels: tuple[float, ...]
) -> tuple[tuple[float, FloatArray], ...]:
    """Return contour lines of the picture in disc coordinates, remembered by the picture."""
    return _contours.get((picture, levels), lambda: _trace(picture, levels))


def _trace(
    picture: FloatArray, levels: tuple[float, ...]
) -> tuple[tuple[float, FloatArray], ...]:
    import pyqtgraph as pg

    size = picture.shape[0]
    lines = []
    for level in levels:
        for line in pg.functions.isocurve(picture, level, connected=True):
            points = np.array(line).T  # the middle of the first pixel is (0.5, 0.5)
            x = points[1] / size * 2.0 - 1.0
            y = 1.0 - points[0] / size * 2.0
            lines.append((level, np.stack([x, y])))
    return tuple(lines)
