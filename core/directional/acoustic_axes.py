"""Acoustic axes: the directions along which two waves have the same speed.

Where they are is found in `search.degeneracies`; here they become records in the units of the
window, with the cone into which a beam along each of them spreads.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from core.arrays import FloatArray, read_only
from core.directional.medium import Medium
from core.directional.search.circles import preference
from core.directional.search.degeneracies import CURVE_POINTS, Degeneracies, degeneracies
from core.directional.search.local_waves import contraction, polarised, sheet_frames

Kind = Literal["conical", "tangential", "line", "all"]

_PHASES = 33  # of the polarisation, between which the widest opening of a cone is sought


@dataclass(frozen=True, eq=False)
class AcousticAxis:
    """A direction, or a set of directions, of equal speeds.

    Attributes
    ----------
    direction : (3,) array
        Unit vector in the axes of the medium, last non-zero component positive. Of a line, the
        point with the greatest z (then x); of "all", z.
    pair : int
        0 where the fastest and the middle sheet meet, 1 the middle and the slowest.
    kind : str
        "conical": the sheets meet at a point and open linearly, so that a beam spreads into a
        cone. "tangential": they touch and open quadratically. "line": they meet along a whole
        curve, as in a transversely isotropic crystal. "all": they are one everywhere, as the
        shear sheets of an isotropic solid.
    speed : float
        km/s, that of both sheets.
    half_angle_deg : float or None
        Of internal conical refraction: half the greatest angle between opposite rays of the
        cone. 0 for a tangential axis, None for a line or "all".
    curve : (3, K) array or None
        Points all along a line that is a circle, for drawing; of another curve one point only.
        None for the other kinds.
    """

    direction: FloatArray
    pair: int
    kind: Kind
    speed: float
    half_angle_deg: float | None
    curve: FloatArray | None = None


def acoustic_axes(medium: Medium) -> tuple[AcousticAxis, ...]:
    """Find every direction of equal speeds, exact to 1e-8 rad.

    Parameters
    ----------
    medium : Medium
        With a density.

    Returns
    -------
    tuple of AcousticAxis
        One of each antipodal pair, in the axes of the medium; first the pairs of the fastest
        sheet, then by direction. Where ρv² is negative (unstable media) two sheets can meet
        too, but not two waves: such directions are left out.

    Raises
    ------
    ValueError
        For a medium without density.
    """
    if medium.density is None:
        raise ValueError("acoustic axes are of waves, which need a density")
    operator = contraction(medium.stiffness.tensor)
    records = [
        record
        for pair, found in enumerate(degeneracies(operator))
        for record in _records(operator, medium.density, pair, found)
    ]
    return tuple(record for record in records if record.speed > 0)


def _records(
    operator: FloatArray, density: float, pair: int, found: Degeneracies
) -> list[AcousticAxis]:
    """Return the records of one pair of sheets, in the order of `preference`."""
    if found.everywhere:
        axis = np.array([[0.0, 0.0, 1.0]])
        speed = _speeds(operator, density, axis, pair)[0]
        return [AcousticAxis(read_only(axis[0]), pair, "all", speed, None)]
    isolated = _isolated_records(operator, density, pair, found)
    lines = [
        (circle.representative, read_only(circle.points(CURVE_POINTS + 1).T))
        for circle in found.circles
    ] + [(stray, read_only(stray[:, None])) for stray in found.strays]
    speeds = _speeds(operator, density, np.array([n for n, _ in lines]).reshape(-1, 3), pair)
    records = isolated + [
        AcousticAxis(read_only(n), pair, "line", speed, None, curve)
        for (n, curve), speed in zip(lines, speeds, strict=True)
    ]
    order = preference(np.array([record.direction for record in records]).reshape(-1, 3))
    return [records[i] for i in order]


def _isolated_records(
    operator: FloatArray, density: float, pair: int, found: Degeneracies
) -> list[AcousticAxis]:
    speeds = _speeds(operator, density, found.axes, pair)
    angles = np.zeros(len(found.axes))
    angles[found.conical] = _cone_angles(operator, found.axes[found.conical], pair)
    return [
        AcousticAxis(
            read_only(n), pair, "conical" if conical else "tangential", speed, float(angle)
        )
        for n, conical, speed, angle in zip(
            found.axes, found.conical, speeds, angles, strict=True
        )
    ]


def _speeds(operator: FloatArray, density: float, n: FloatArray, pair: int) -> list[float]:
    """Return the speed in km/s at directions (M, 3), NaN where ρv² is not positive."""
    values = sheet_frames(operator, n).values[:, pair]
    return [float(np.sqrt(1e3 * value / density)) if value > 0 else np.nan for value in values]


def _cone_angles(operator: FloatArray, n: FloatArray, pair: int) -> FloatArray:
    """Return the half angles (M,) in degrees of the cones of rays at acoustic axes (M, 3).

    With p = a cos φ + b sin φ the rays V_j ∝ C_ijkl p_i p_k n_l describe an ellipse once while
    φ goes through half a turn (Musgrave, Crystal Acoustics, 1970, ch. 11); opposite rays are a
    quarter turn of φ apart.
    """
    system = sheet_frames(operator, n)
    a, b = system.vectors[:, pair], system.vectors[:, pair + 1]
    left, right = np.stack([a, b, a], axis=1), np.stack([a, b, b], axis=1)
    rays = (polarised(operator, left, right) @ n[:, None, :, None])[..., 0] / 2
    centre = (rays[:, None, 0] + rays[:, None, 1]) / 2
    axes = np.stack([(rays[:, 0] - rays[:, 1]) / 2, rays[:, 2]], axis=1)
    best, width = np.zeros(len(n)), np.pi / 2
    for _ in range(10):
        phase = best[:, None] + width * np.linspace(-1.0, 1.0, _PHASES)
        offset = np.stack([np.cos(phase), np.sin(phase)], axis=2) @ axes
        angle = _angles_between(centre + offset, centre - offset)
        best = phase[np.arange(len(n)), np.argmax(angle, axis=1)]
        width /= 8
    result: FloatArray = np.degrees(angle.max(axis=1)) / 2
    return result


def _angles_between(u: FloatArray, v: FloatArray) -> FloatArray:
    """Return the angles (...) in radians between vectors (..., 3)."""
    across = np.linalg.norm(np.cross(u, v), axis=-1)
    result: FloatArray = np.arctan2(across, (u * v).sum(axis=-1))
    return result
