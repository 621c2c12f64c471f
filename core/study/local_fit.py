"""Slope and curvature of any quantity at every vertex of a mesh, from its neighbours.

The paraboloid through a vertex that fits its six neighbours best has coefficients that are
fixed combinations of the differences of values; the combinations depend on the mesh alone.
"""

from functools import lru_cache

import numpy as np

from core.arrays import FloatArray, IntArray, read_only
from core.directional.sphere import SphereMesh, dot, sphere_mesh


def local_quadratics(values: FloatArray, mesh: SphereMesh) -> FloatArray:
    """Return the paraboloids (5, K, N/2) that fit quantities (K, N/2) about each vertex.

    Parameters
    ----------
    values : (K, N/2) array
        Values on `mesh.half`, the same along n and -n; NaN spreads to the neighbours.
    mesh : SphereMesh

    Returns
    -------
    (5, K, N/2) array
        Derivatives along the tangents t1, t2 of `mesh.half` and second derivatives 11, 12, 22,
        per radian and per radian squared. Smooth quantities: the slope errs by the sixth part
        of the third derivative times the square of the mesh spacing.
    """
    weights = _weights(mesh.level)
    fitted = np.zeros((5, *values.shape))
    for row, value in enumerate(values):
        for around, weight in zip(mesh.neighbours, weights, strict=True):
            fitted[:, row] += weight * (value[around] - value)
    return fitted


@lru_cache(maxsize=8)
def _weights(level: int) -> FloatArray:
    """Return the weight (6 neighbours, 5 coefficients, N/2) of each difference."""
    mesh = sphere_mesh(level)
    centre = np.arange(mesh.half.count)
    pairs = [tangent_coordinates(mesh, centre, mesh.half.n[:, k]) for k in mesh.neighbours]
    x, y = (np.stack(part, axis=1) for part in zip(*pairs, strict=True))
    inverse = np.linalg.pinv(np.stack([x, y, x * x / 2, x * y, y * y / 2], axis=2))
    return read_only(inverse.transpose(2, 1, 0))


def tangent_coordinates(
    mesh: SphereMesh, centre: IntArray, n: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return where directions lie as seen from vertices of a mesh.

    Parameters
    ----------
    mesh : SphereMesh
    centre : (K,) int array
        Vertices, numbered in the half.
    n : (3, K) array
        Directions near those vertices or their antipodes.

    Returns
    -------
    x, y : (K,) arrays
        Arc length along the tangents of `mesh.half`, radians.
    """
    axis = mesh.half.n[:, centre]
    height = dot(n, axis)
    x, y = (np.copysign(1.0, height) * dot(n, t[:, centre]) for t in mesh.half.tangents)
    sine = np.hypot(x, y)
    angle = np.arctan2(sine, np.abs(height))
    stretch = np.divide(angle, sine, out=np.ones_like(sine), where=sine > 0)
    return x * stretch, y * stretch
