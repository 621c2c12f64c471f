"""The wave normals behind measured rays, so that group speeds can be fitted like phase speeds.

A pulse from a small source goes along a ray r at the group speed V = v(n)/(n . r), where n is
the normal whose energy follows r; V is stationary in n there (it is the support function of the
wave surface). With n held, dV/dC = (dv/dC)/(n . r), exactly: a group speed is a phase speed
V (n . r) along n, and only n has to be found anew as the constants move.
"""

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional.medium import Medium
from core.directional.sphere import Directions, directions, dot
from core.directional.waves import group_velocities

_STEPS = 30
_SHIFT = 1e-6  # radians, of the central differences
_FARTHEST_STEP = 0.15  # radians
_HIT = 1e-7  # half-angle between energy and ray, radians
_LEAST_COSINE = 0.3  # between normal and ray: beyond it the branch has been lost


def wave_normals(
    medium: Medium, rays: FloatArray, sheets: IntArray, starts: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Return the wave normal of each ray as reached from a start, and whether it was found.

    Parameters
    ----------
    medium : Medium
        With a density.
    rays, starts : (3, N) arrays
        Directions of energy flow, and normals to begin at; unit vectors, crystal axes.
    sheets : (N,) int array
        0 fastest.

    Returns
    -------
    normals : (3, N) array
        Unit vectors; the start itself where nothing was found.
    found : (N,) bool array

    Notes
    -----
    Damped Gauss-Newton steps on the half-angle between energy and ray. Where a wave surface
    is folded several normals share a ray and the one reached from the start is given.
    """
    frame = directions(rays)
    normals = directions(starts).n
    miss = _misses(medium, frame, normals, sheets)
    damping = np.full(sheets.size, 1e-3)
    for _ in range(_STEPS):
        step = _step(medium, frame, normals, sheets, miss, damping)
        trial = _moved(normals, step)
        trial_miss = _misses(medium, frame, trial, sheets)
        better = (trial_miss**2).sum(axis=0) < (miss**2).sum(axis=0)
        normals = np.where(better, trial, normals)
        miss = np.where(better, trial_miss, miss)
        damping = np.clip(damping * np.where(better, 0.1, 10.0), 1e-12, 1e6)
        if not better.any() or np.abs(miss).max() < _HIT:
            break
    found = (np.abs(miss).max(axis=0) < _HIT) & (dot(normals, frame.n) > _LEAST_COSINE)
    return np.where(found, normals, directions(starts).n), found


def _misses(
    medium: Medium, frame: Directions, normals: FloatArray, sheets: IntArray
) -> FloatArray:
    """Return by how much energy misses each ray: (2, N), tangents of half angles."""
    velocity = group_velocities(medium, directions(normals)).velocity
    own = velocity[sheets, :, np.arange(sheets.size)].T
    length = np.sqrt(dot(own, own)) + dot(frame.n, own)
    with np.errstate(divide="ignore", invalid="ignore"):
        miss = np.stack([dot(tangent, own) for tangent in frame.tangents]) / length
    return np.where(np.isfinite(miss), miss, 1e3)


def _moved(normals: FloatArray, step: FloatArray) -> FloatArray:
    first, second = directions(normals).tangents
    return directions(normals + step[0] * first + step[1] * second).n


def _step(
    medium: Medium,
    frame: Directions,
    normals: FloatArray,
    sheets: IntArray,
    miss: FloatArray,
    damping: FloatArray,
) -> FloatArray:
    """Return damped Gauss-Newton steps (2, N) in the tangent planes of the normals."""
    columns = []
    for axis in np.eye(2)[:, :, None]:
        ahead, behind = (
            _misses(medium, frame, _moved(normals, sign * _SHIFT * axis), sheets)
            for sign in (1.0, -1.0)
        )
        columns.append((ahead - behind) / (2.0 * _SHIFT))
    jacobian = np.stack(columns, axis=1)
    normal = np.einsum("ain,ajn->nij", jacobian, jacobian)
    size = damping * (np.trace(normal, axis1=1, axis2=2) + 1e-12)
    normal += size[:, None, None] * np.eye(2)
    right = np.einsum("ain,an->ni", jacobian, miss)
    step = -np.linalg.solve(normal, right[:, :, None])[:, :, 0].T
    length = np.maximum(np.sqrt((step**2).sum(axis=0)), 1e-300)
    return np.asarray(step * np.minimum(1.0, _FARTHEST_STEP / length))
