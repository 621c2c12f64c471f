"""Rotation matrices from angles and back: numbers only, no text and no crystal.

Everything is active and right-handed: a positive turn about an axis runs counter-clockwise
for somebody at whom the axis points. Angles are in degrees. Angles read off a matrix give
that matrix back to a few rounding errors, also where two of three axes coincide, because
each angle is read off what the earlier ones have left over.
"""

import math
from collections.abc import Sequence

import numpy as np

from core.arrays import FloatArray

_UNDECIDED = 1e-14
"""Below this both arguments of an arc tangent are rounding errors: the angle is free."""

_NO_TURN = 1e-18
"""Sine of half an angle too small to move any vector by a rounding error."""


def cosine_sine(degrees: float) -> tuple[float, float]:
    """Return cosine and sine, exact at multiples of 90 degrees."""
    reduced = math.fmod(degrees, 360.0)
    quarter = round(reduced / 90.0)
    rest = math.radians(reduced - 90.0 * quarter)
    cosine, sine = math.cos(rest), math.sin(rest)
    quadrants = ((cosine, sine), (-sine, cosine), (-cosine, -sine), (sine, -cosine))
    return quadrants[quarter % 4]


def unit(vector: FloatArray) -> FloatArray:
    """Return a vector of length one; scaled first, so that no square can overflow."""
    largest = float(np.abs(vector).max())
    if not largest > 0:
        raise ValueError("a vector of no length has no direction")
    scaled = vector / largest
    length = math.sqrt(float(scaled @ scaled))
    return np.asarray(scaled / length, dtype=np.float64)


def angle_between(first: FloatArray, second: FloatArray) -> float:
    """Return the angle in degrees between two unit vectors, accurate near 0 and 180."""
    across = float(np.linalg.norm(np.cross(first, second)))
    return math.degrees(math.atan2(across, float(first @ second)))


def axis_turn(axis: FloatArray, degrees: float) -> FloatArray:
    """Return the (3, 3) matrix that turns vectors about a unit axis (Rodrigues)."""
    cosine, sine = cosine_sine(degrees)
    x, y, z = axis
    cross = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    turn = cosine * np.eye(3) + sine * cross + (1.0 - cosine) * np.outer(axis, axis)
    return np.asarray(turn, dtype=np.float64)


def turns_about(axes: Sequence[int], degrees: Sequence[float]) -> FloatArray:
    """Return the product of turns about coordinate axes 0, 1, 2, the first leftmost.

    Read as one motion of a body: each turn is about the body's already turned axis
    (intrinsic).
    """
    total = np.eye(3)
    for axis, angle in zip(axes, degrees, strict=True):
        total = total @ axis_turn(np.eye(3)[axis], angle)
    return total


def turn_angles(rotation: FloatArray, axes: Sequence[int]) -> tuple[float, ...]:
    """Return angles with `turns_about(axes, angles)` equal, or nearest, to the rotation.

    Parameters
    ----------
    rotation : ndarray, shape (3, 3)
    axes : sequence of 1 to 3 ints
        Coordinate axes 0, 1, 2; neighbours must differ. Three always reach any rotation;
        with fewer the caller checks that the product gives the rotation back.

    Returns
    -------
    tuple of float
        Degrees in (−180, 180]. With three turns the middle one is in [0, 180] where first
        and last axis are equal, else in [−90, 90].

    Notes
    -----
    Derived here: the last axis e is carried by the first turn out of the plane that the
    middle turn keeps it in, so the first angle is read off R e; then the first turn is
    undone.
    """
    basis = np.eye(3)
    first, last = axes[0], axes[-1]
    if len(axes) == 1:
        start = carried = basis[(first + 1) % 3]
    elif first == last:
        start, carried = np.cross(basis[axes[1]], basis[first]), basis[last]
    else:
        start = carried = basis[last]
    arrived = rotation @ carried
    rise = float(basis[first] @ np.cross(start, arrived))
    run = float(start @ arrived)
    angle = math.degrees(math.atan2(rise, run)) if math.hypot(rise, run) > _UNDECIDED else 0.0
    if len(axes) == 1:
        return (angle,)
    rest = axis_turn(basis[first], -angle) @ rotation
    return (angle, *turn_angles(rest, axes[1:]))


def axis_and_angle(rotation: FloatArray) -> tuple[FloatArray, float]:
    """Return the unit axis and the angle in degrees, 0 to 180, of a rotation matrix.

    The unit quaternion is read off the row of its 4×4 outer product with the largest
    diagonal, so nothing cancels at any angle. The axis of no rotation is z; of the two axes
    of a half turn, the one whose first component that is not zero is positive.
    """
    R = rotation
    trace = R[0, 0] + R[1, 1] + R[2, 2]
    outer = R + R.T
    outer[np.diag_indices(3)] = 1.0 + 2.0 * np.diag(R) - trace
    skew = np.array([R[2, 1] - R[1, 2], R[0, 2] - R[2, 0], R[1, 0] - R[0, 1]])
    table = np.block([[np.array([[1.0 + trace]]), skew[None, :]], [skew[:, None], outer]])
    quaternion = table[np.argmax(np.diag(table))]
    quaternion = quaternion / np.linalg.norm(quaternion)
    scalar, vector = float(quaternion[0]), quaternion[1:]
    length = float(np.linalg.norm(vector))
    if length < _NO_TURN:
        return np.array([0.0, 0.0, 1.0]), 0.0
    leading = vector[np.argmax(np.abs(vector) > 1e-15)]
    sign = math.copysign(1.0, leading if abs(scalar) < 1e-15 else scalar)
    angle = math.degrees(2.0 * math.atan2(length, abs(scalar)))
    return np.asarray(sign * vector / length, dtype=np.float64), angle


def nearest_rotation(matrix: FloatArray) -> tuple[FloatArray, bool]:
    """Return the rotation nearest to a matrix, and whether the matrix was right-handed.

    The orthogonal factor of the polar decomposition, from singular values; a left-handed
    matrix gets the nearest proper rotation.
    """
    left, _, right = np.linalg.svd(matrix)
    is_right_handed = bool(np.linalg.det(left) * np.linalg.det(right) > 0)
    if not is_right_handed:
        left = left * np.array([1.0, 1.0, -1.0])
    return np.asarray(left @ right, dtype=np.float64), is_right_handed


def triad(first: int, along: FloatArray, second: int, near: FloatArray) -> FloatArray:
    """Return a right-handed triad as rows: one axis exact, a second as near as possible.

    Parameters
    ----------
    first, second : int
        Two different axes, 0, 1 or 2.
    along, near : ndarray, shape (3,)
        Unit vectors, not parallel: axis `first` lies along `along`, axis `second` in the
        plane of both, on the side of `near`.
    """
    across = near - (near @ along) * along
    across = unit(across - (across @ along) * along)  # twice, for nearly parallel pairs
    across = unit(across - (across @ along) * along)
    rows = np.empty((3, 3))
    rows[first], rows[second] = along, across
    handed = 1.0 if (second - first) % 3 == 1 else -1.0
    rows[3 - first - second] = handed * np.cross(along, across)
    return rows
