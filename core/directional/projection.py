"""The upper hemisphere on a disc of radius 1: part X to the right, Y up, Z towards the eye."""

from __future__ import annotations

import numpy as np

from core.arrays import FloatArray

PROJECTIONS = ("equal_area", "stereographic")


def to_disc(directions: FloatArray, projection: str) -> FloatArray:
    """Return where unit directions fall on the disc.

    Parameters
    ----------
    directions : ndarray, shape (3, ...)
        Unit vectors, part axes; those with negative Z are taken at their other end.
    projection : "equal_area" or "stereographic"
        r = √2 sin(θ/2) (Lambert 1772) or r = tan(θ/2), with θ from part Z: 1 on the rim in
        both.

    Returns
    -------
    ndarray, shape (2, ...)
    """
    x, y, z = np.where(directions[2] < 0.0, -directions, directions)
    # √2 sin(θ/2) / sin θ and tan(θ/2) / sin θ, without the 0/0 at the middle.
    factor = 1.0 / np.sqrt(1.0 + z) if _is_equal_area(projection) else 1.0 / (1.0 + z)
    return np.stack([x * factor, y * factor])


def from_disc(points: FloatArray, projection: str) -> FloatArray:
    """Return the unit directions, part axes, of points of the disc: the inverse of `to_disc`.

    Shape (2, ...) in, (3, ...) out; points beyond the rim give the direction on the rim.
    """
    x, y = points
    beyond = np.maximum(np.hypot(x, y), 1.0)
    x, y = x / beyond, y / beyond
    square = x * x + y * y
    if _is_equal_area(projection):
        factor, z = np.sqrt(2.0 - square), 1.0 - square
    else:
        factor, z = 2.0 / (1.0 + square), (1.0 - square) / (1.0 + square)
    return np.stack([x * factor, y * factor, z])


def _is_equal_area(projection: str) -> bool:
    """Return whether a projection is the equal-area one; refuse names that are neither."""
    if projection not in PROJECTIONS:
        raise ValueError(f"no projection {projection!r}")
    return projection == "equal_area"
