"""How far a quantity truly reaches over all directions: what the ends of a scale say.

The vertices of a mesh miss an extreme by up to a thousandth, so that a scale taken from them
contradicts the table of extremes. Here every local extreme of a mesh is closed in upon by
ever smaller patches of directions, which serves at cusps as well as where a quantity is smooth.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache

import numpy as np

from core.arrays import FloatArray, IntArray, read_only
from core.directional.medium import Medium
from core.directional.quantities import quantity
from core.directional.search.sheet_extremes import grid_starts
from core.directional.sphere import Directions, directions, sphere_mesh
from core.directional.waves import longitudinality

LONGITUDINALITY = "longitudinality"
_LEVEL = 4  # 1,281 directions
_STARTS = 4  # the best local extremes of each end of each sheet
_SIDE = 5  # directions along the side of a patch
_WIDTH = 0.08  # radians, half of the first patch: the spacing of the mesh
_ROUNDS = 11  # each halves the patch: 0.08/2¹¹ is 4e-5 radians

ValuesOf = Callable[[Medium, Directions], FloatArray]


@lru_cache(maxsize=16)
def true_range(medium: Medium, key: str) -> FloatArray:
    """Return the least and the greatest value of each sheet of a quantity.

    Parameters
    ----------
    medium : Medium
    key : str
        Key of a quantity, or `LONGITUDINALITY`.

    Returns
    -------
    (sheets, 2) array, read-only
        In the unit of the quantity; within 1e-6 of its size where it is smooth. NaN where the
        quantity is undefined anywhere on the mesh, and so has no extreme that means anything.
    """
    values_of: ValuesOf = longitudinality if key == LONGITUDINALITY else quantity(key).values
    mesh = sphere_mesh(_LEVEL)
    values = values_of(medium, mesh.half)
    found = np.stack([np.nanmin(values, axis=1, initial=np.inf),
                      np.nanmax(values, axis=1, initial=-np.inf)], axis=1)  # fmt: skip
    if not np.isfinite(values).all():
        return read_only(np.full_like(found, np.nan))
    count = len(values)
    goal, column = grid_starts(np.concatenate([values, -values]), mesh, _STARTS)
    signs = np.where(goal < count, 1.0, -1.0)
    best = _closed_in(medium, values_of, mesh.half.n[:, column], goal % count, signs)
    for sheet in range(count):
        found[sheet, 0] = min(found[sheet, 0], best[goal == sheet].min())
        found[sheet, 1] = max(found[sheet, 1], -best[goal == sheet + count].min())
    return read_only(found)


def _closed_in(
    medium: Medium, values_of: ValuesOf, n: FloatArray, sheet: IntArray, signs: FloatArray
) -> FloatArray:
    """Return sign × value, (M,), at the least that patches about directions n (3, M) find."""
    steps = np.linspace(-1.0, 1.0, _SIDE)
    across, up = (part.ravel() for part in np.meshgrid(steps, steps))
    number = np.arange(sheet.size)
    best = np.full(sheet.size, np.inf)
    width = _WIDTH
    for _ in range(_ROUNDS):
        middle = directions(n)
        first, second = (t[:, :, np.newaxis] for t in middle.tangents)
        patch = middle.n[:, :, np.newaxis] + width * (across * first + up * second)
        patch /= np.linalg.norm(patch, axis=0)
        values = values_of(medium, directions(patch.reshape(3, -1)))
        signed = signs[:, np.newaxis] * values.reshape(len(values), *patch.shape[1:])[
            sheet, number]
        chosen = np.nan_to_num(signed, nan=np.inf).argmin(axis=1)
        n, best = patch[:, number, chosen], signed[number, chosen]
        width /= 2.0
    return best
