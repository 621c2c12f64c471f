"""Cutting error: how much a quantity changes within a cone of misorientation.

A blank is cut along a direction to within some angle. For one direction the extremes within
the cone are found exactly, whatever the quantity. For every direction of a mesh at once there
is `cost_map`, which has a file of its own.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray, IntArray, read_only
from core.directional.medium import Medium
from core.directional.quantities import quantity
from core.directional.sphere import directions
from core.study.cost_map import check_half_angle, cost_map

__all__ = ["PART_AXES", "Cone", "axis_tolerances", "cone_extremes", "cost_map"]

PART_AXES = ("X", "Y", "Z")

_RINGS = 8  # rings of samples in the narrowest cone
_RING_SPACING = 1.5  # degrees: rings are no further apart in a wide one
_STARTS = 3  # the best samples, well apart, that an extreme is sought from
_APART = 2.5  # spacings
_ZOOMS, _SHRINK = 24, 0.5  # to 1e-7 of the sample spacing
_RUNAWAY = 50.0  # spreads of the samples: a value that rises so much more has no bound
_STEP = 2e-4  # radians: slopes err by its square, 4e-8
_AZIMUTHS = 96
_SMOOTH = 1e-3  # of the slope: what is not odd in the azimuth by so much is a cusp


@dataclass(frozen=True, eq=False)
class Cone:
    """One sheet of a quantity within a cone about a direction.

    Attributes
    ----------
    value : float
        Along the direction itself, in the unit of the quantity; NaN where undefined.
    least, greatest : float
        Within the cone, its edge included; infinite where there is no bound.
    least_direction, greatest_direction : (3,) arrays
        Where, in the axes of the medium.
    steepest : (3,) array
        Unit vector at right angles to the direction: tilting towards it changes the quantity
        fastest, upwards where it is smooth. Arbitrary where the slope is zero.
    slope : float
        Change per degree of tilt towards `steepest`; negative only at the top of a cusp.
    """

    value: float
    least: float
    greatest: float
    least_direction: FloatArray
    greatest_direction: FloatArray
    steepest: FloatArray
    slope: float


@dataclass(frozen=True, eq=False)
class _Cap:
    """A cone as a disc: points (..., 2) are tilts in radians towards two tangents."""

    field: Callable[[FloatArray], FloatArray]  # directions (3, N) to (sheets, N)
    centre: FloatArray  # (3,)
    tangents: FloatArray  # (2, 3)
    radius: float

    def directions(self, tilt: FloatArray) -> FloatArray:
        """Return the directions (..., 3) of tilts (..., 2)."""
        angle = np.sqrt((tilt * tilt).sum(axis=-1))[..., None]
        result: FloatArray = np.cos(angle) * self.centre + np.sinc(angle / np.pi) * (
            tilt @ self.tangents
        )
        return result

    def values(self, tilt: FloatArray) -> FloatArray:
        """Return the quantity (sheets, ...) at tilts (..., 2)."""
        n = self.directions(tilt).reshape(-1, 3).T
        return self.field(n).reshape(-1, *tilt.shape[:-1])

    def clipped(self, tilt: FloatArray) -> FloatArray:
        """Return tilts (..., 2), those outside the cone moved to its edge."""
        angle = np.sqrt((tilt * tilt).sum(axis=-1))[..., None]
        result: FloatArray = tilt * np.minimum(1.0, self.radius / np.maximum(angle, 1e-300))
        return result


def cone_extremes(
    medium: Medium, direction: FloatArray, half_angle_deg: float, key: str
) -> tuple[Cone, ...]:
    """Return the least and greatest value of a quantity within a cone, for each sheet.

    Parameters
    ----------
    medium : Medium
    direction : (3,) array
        Axis of the cone, in the axes of the medium; need not be normalised.
    half_angle_deg : float
        More than 0, at most 90.
    key : str
        A key of `core.directional.quantities.QUANTITIES`.

    Returns
    -------
    tuple of Cone
        One, or three from the fastest sheet; found within 1e-6 of their spread. The values at
        an acoustic axis inside the cone count as limits where a quantity jumps there.

    Raises
    ------
    InputError
        For an unknown quantity or an angle out of range.
    ValueError
        For a wave quantity of a medium without density.

    Notes
    -----
    Samples no further apart than an eighth of the cone, or 1.5 degrees, then a search on the
    best of them that halves in on the extreme, inside the cone or on its edge, without
    derivatives: the sheets of waves have cusps.
    """
    cap = _cap(medium, direction, half_angle_deg, key)
    samples, spacing = _samples(cap.radius)
    values = cap.values(samples)
    ends = _search(cap, samples, values, spacing)
    cones = []
    for sheet, (steepest, slope) in enumerate(_slopes(cap)):
        (least, least_at), (greatest, greatest_at) = ends[2 * sheet], ends[2 * sheet + 1]
        own = float(values[sheet, 0])
        cones.append(Cone(own, least, greatest, least_at, greatest_at, steepest, slope))
    return tuple(cones)


def axis_tolerances(
    medium: Medium, rotation: FloatArray, half_angle_deg: float, key: str
) -> dict[str, tuple[Cone, ...]]:
    """Return `cone_extremes` about the part axes X, Y and Z.

    Parameters
    ----------
    medium : Medium
        In crystal axes.
    rotation : (3, 3) array
        v_part = rotation @ v_crystal: its rows are X, Y, Z in crystal axes.
    half_angle_deg : float
    key : str

    Returns
    -------
    dict
        "X", "Y", "Z"; all directions in crystal axes.
    """
    return {
        name: cone_extremes(medium, axis, half_angle_deg, key)
        for name, axis in zip(PART_AXES, rotation, strict=True)
    }


def _cap(medium: Medium, direction: FloatArray, half_angle_deg: float, key: str) -> _Cap:
    check_half_angle(half_angle_deg)
    asked = quantity(key)
    axis = directions(np.asarray(direction))
    first, second = axis.tangents

    def field(n: FloatArray) -> FloatArray:
        return asked.values(medium, directions(n))

    frame = np.stack([first[:, 0], second[:, 0]])
    return _Cap(field, axis.n[:, 0], frame, float(np.radians(half_angle_deg)))


def _samples(radius: float) -> tuple[FloatArray, float]:
    """Return tilts (K, 2) all over a cone, the axis first, and their spacing in radians."""
    rings = max(_RINGS, int(np.ceil(np.degrees(radius) / _RING_SPACING)))
    points = [np.zeros((1, 2))]
    for ring in range(1, rings + 1):
        angle = (np.arange(6 * ring) + 0.5 * ring) * (2 * np.pi / (6 * ring))
        points.append(radius * ring / rings * np.stack([np.cos(angle), np.sin(angle)], axis=1))
    return np.concatenate(points), radius / rings


def _search(
    cap: _Cap, samples: FloatArray, values: FloatArray, spacing: float
) -> list[tuple[float, FloatArray]]:
    """Return value and direction of the least, then of the greatest, of each sheet in turn."""
    signs = np.tile([1.0, -1.0], len(values))
    sheets = np.repeat(np.arange(len(values)), 2)
    signed = signs[:, None] * values[sheets]
    signed = np.where(np.isnan(signed), np.inf, signed)
    starts = [_best_samples(samples, row, _APART * spacing) for row in signed]
    goal = np.repeat(np.arange(len(starts)), [len(each) for each in starts])
    tilt, best = _zoom(cap, samples[np.concatenate(starts)], sheets[goal], signs[goal], spacing)
    ends = []
    for k, row in enumerate(signed):
        mine = np.flatnonzero(goal == k)
        pick = mine[np.argmin(best[mine])]
        value = signs[k] * _bounded(float(best[pick]), row[np.isfinite(row)])
        ends.append((float(value), read_only(cap.directions(tilt[pick]))))
    return ends


def _bounded(least: float, samples: FloatArray) -> float:
    """Return what a search has found, or minus infinity where it would never have ended."""
    if samples.size == 0:
        return np.nan
    lowest, highest = float(samples.min()), float(samples.max())
    unbounded = lowest - least > _RUNAWAY * (highest - lowest) > 0
    return -np.inf if unbounded else least


def _best_samples(samples: FloatArray, values: FloatArray, apart: float) -> IntArray:
    """Return the numbers of the least values, each well apart from the better ones."""
    kept: list[int] = []
    open_to = np.ones(len(values), dtype=bool)
    while len(kept) < _STARTS and open_to.any():
        best = int(np.argmin(np.where(open_to, values, np.inf)))
        kept.append(best)
        offset = samples - samples[best]
        open_to &= (offset * offset).sum(axis=1) > apart * apart
    return np.array(kept)


def _zoom(
    cap: _Cap, tilt: FloatArray, sheet: IntArray, sign: FloatArray, spacing: float
) -> tuple[FloatArray, FloatArray]:
    """Move tilts (M, 2) to the least of 5 x 5 neighbours in smaller and smaller windows."""
    side = np.linspace(-1.0, 1.0, 5)
    window = np.stack(np.meshgrid(side, side, indexing="ij"), axis=-1).reshape(-1, 2)
    rows, size = np.arange(len(tilt)), spacing
    best = np.full(len(tilt), np.inf)
    for _ in range(_ZOOMS):
        tried = cap.clipped(tilt[:, None] + size * window)
        values = sign[:, None] * cap.values(tried)[sheet, rows]
        values = np.where(np.isnan(values), np.inf, values)
        pick = np.argmin(values, axis=1)
        better = values[rows, pick] < best
        tilt = np.where(better[:, None], tried[rows, pick], tilt)
        best = np.where(better, values[rows, pick], best)
        size *= _SHRINK
    return tilt, best


def _slopes(cap: _Cap) -> list[tuple[FloatArray, float]]:
    """Return the steepest tilt and the slope per degree at the axis of the cone, per sheet.

    One-sided derivatives to second order at many azimuths: where the quantity is smooth they
    are a cosine, whose amplitude and phase are exact; at a cusp the greatest is taken.
    """
    angle = np.arange(_AZIMUTHS) * (2 * np.pi / _AZIMUTHS)
    towards = np.stack([np.cos(angle), np.sin(angle)], axis=1)
    near, far = cap.values(0.5 * _STEP * towards), cap.values(_STEP * towards)
    here = cap.values(np.zeros((1, 2)))
    derivatives = (4 * near - far - 3 * here) / _STEP
    found = []
    for derivative in derivatives:
        gradient = 2 * derivative @ towards / _AZIMUTHS
        slope = float(np.hypot(*gradient))
        tilt = gradient / slope if slope > 0 else towards[0]
        largest = np.abs(derivative).max()
        if np.abs(derivative - towards @ gradient).max() > _SMOOTH * largest:
            pick = int(np.argmax(np.abs(derivative)))
            tilt, slope = towards[pick], float(derivative[pick])
        found.append((read_only(tilt @ cap.tangents), slope * np.pi / 180))
    return found
