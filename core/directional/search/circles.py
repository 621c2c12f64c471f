"""Circles on the sphere of directions: where a value is shared by more than one direction.

Also the one rule by which a direction is picked from several that are equally right. Arrays
run along their first axis: directions (M, 3).
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray, read_only

SAME_DIRECTION = 1e-5  # radians: nearer than that, two searches have ended in one place
_ZERO = 1e-9  # a smaller component is rounding
_SIGNLESS = 1e-7  # a smaller component does not decide between n and -n
_STEEP = 1e-6  # radians: an axis nearer than that to z has no highest point on its circles
_PROBE = 0.06  # radians: radius of the small circle on which a ring is looked for
_PROBE_ANGLES = 64
_ZOOMS = 12  # each narrows the azimuth fourfold, from 0.1 rad to below rounding
# Least over greatest change on the small circle. A ring is at most half a probe spacing from a
# probe, so that the change there is 0.05 of the greatest (at a cusp; 0.0025 elsewhere).
_SUSPICION = 0.1
_FAILURES = 2  # directions that prove to be on no ring, before no more are tried
_NEAR_CIRCLE = 1e-3  # radians: how far the first circle may miss directions that are on it
_SPREAD = 0.1  # second singular value of directions that are well spread round a circle
_SAME_VALUE = 1e-9  # of the scale: what counts as the same value all along a ring

ValueOf = Callable[[FloatArray], FloatArray]
"""Takes directions (3, N) to a quantity (N,)."""


@dataclass(frozen=True, eq=False)
class Circle:
    """The directions at one angle to an axis.

    Attributes
    ----------
    axis : (3,) array
        Unit vector.
    cosine : float
        Of the angle between the axis and the directions, 0 for a great circle to 1.
    """

    axis: FloatArray
    cosine: float

    def points(self, count: int) -> FloatArray:
        """Return directions (count, 3) round the circle; the first is the canonical one."""
        axis = self.axis
        steep = bool(np.hypot(axis[0], axis[1]) < _STEEP)
        reference = np.eye(3)[0 if steep else 2]
        first = reference - (reference @ axis) * axis
        first /= np.linalg.norm(first)
        angle = np.arange(count)[:, None] * (2 * np.pi / count)
        sine = np.sqrt(max(0.0, 1.0 - self.cosine**2))
        turned = np.cos(angle) * first + np.sin(angle) * np.cross(axis, first)
        result: FloatArray = self.cosine * axis + sine * turned
        return result

    @property
    def representative(self) -> FloatArray:
        """The canonical direction of the circle: greatest z, and of those greatest x."""
        highest: FloatArray = canonical(self.points(1))[0]
        return highest

    def distance(self, n: FloatArray) -> FloatArray:
        """Return the angles (M,) in radians from directions (M, 3) or their antipodes."""
        height = np.abs(n @ self.axis)
        result: FloatArray = np.abs(np.arccos(np.minimum(height, 1.0)) - np.arccos(self.cosine))
        return result


def circle_through(points: FloatArray) -> Circle:
    """Return the circle through three directions (3, 3), one a row."""
    axis = np.cross(points[1] - points[0], points[2] - points[0])
    return _circle(axis / np.linalg.norm(axis), points.mean(axis=0))


def _circle(axis: FloatArray, middle: FloatArray) -> Circle:
    """Return the circle about an axis whose plane holds a point, antipodes being equal."""
    return Circle(read_only(canonical(axis[None])[0]), abs(float(middle @ axis)))


def canonical(n: FloatArray) -> FloatArray:
    """Return the one of each n, -n (M, 3) whose last non-zero component is positive.

    Components that are zero but for rounding are made zero.
    """
    x, y, z = n.T
    last = np.where(np.abs(z) > _SIGNLESS, z, np.where(np.abs(y) > _SIGNLESS, y, x))
    result: FloatArray = np.where(np.abs(n) < _ZERO, 0.0, np.where(last[:, None] < 0, -n, n))
    return result


def preference(n: FloatArray) -> list[int]:
    """Return the order in which canonical directions (M, 3) are preferred: z, then x, then y.

    Rounded, so that directions that differ by rounding alone compare by what is left.
    """
    z, x, y = (np.round(n[:, k], 6) for k in (2, 0, 1))
    return [int(i) for i in np.lexsort((-y, -x, -z))]


def distinct(n: FloatArray, angle: float = SAME_DIRECTION) -> list[int]:
    """Return the number of the first of each cluster of directions (M, 3) or antipodes."""
    near = chords(n[:, None], n[None]) <= angle
    return [i for i in range(len(n)) if not near[i, :i].any()]


def chords(u: FloatArray, v: FloatArray) -> FloatArray:
    """Return the distances (...) between unit vectors (..., 3), the nearer of v and -v.

    For small angles the angle itself, without the cancellation of an arc cosine.
    """
    apart, together = u - v, u + v
    least = np.minimum((apart * apart).sum(axis=-1), (together * together).sum(axis=-1))
    result: FloatArray = np.sqrt(least)
    return result


def tangents(n: FloatArray) -> FloatArray:
    """Return two tangents (M, 2, 3) of directions (M, 3): n, t1, t2 is orthonormal.

    Source: Duff et al. 2017, J. Comput. Graph. Tech. 6(1), 1.
    """
    x, y, z = n.T
    sign = np.copysign(1.0, z)
    a = -1.0 / (sign + z)
    b = x * y * a
    first = np.stack([1.0 + sign * x * x * a, sign * b, -sign * x], axis=1)
    second = np.stack([b, sign + y * y * a, -y], axis=1)
    return np.stack([first, second], axis=1)


def rings_through(
    value_of: ValueOf, centres: FloatArray, extreme: float, scale: float
) -> list[Circle]:
    """Return the circles of equal value that pass through directions at which it is extreme.

    On a small circle about such a direction the extreme value is met again only where a ring
    leaves it. The azimuths are refined, and the circle through both and the centre is accepted
    if the value is the same all round.

    Parameters
    ----------
    value_of : callable
        Takes directions (3, N) to the quantity; its extreme need not be smooth.
    centres : (M, 3) array
        Directions at which the extreme is reached.
    extreme : float
        The extreme value.
    scale : float
        Size of the quantity; values nearer than 1e-9 of it are the same.
    """
    frames = tangents(centres)
    angle = np.linspace(0.0, 2 * np.pi, _PROBE_ANGLES, endpoint=False)
    change = _changes(value_of, centres, frames, np.tile(angle, (len(centres), 1)), extreme)
    greatest, least = change.max(axis=1), change.min(axis=1)
    waiting = (least < _SUSPICION * greatest) | (greatest < _SAME_VALUE * scale)
    found: list[Circle] = []
    failures = 0
    while waiting.any() and failures < _FAILURES:
        i = int(np.argmax(waiting))
        waiting[i] = False
        centre, frame = centres[i : i + 1], frames[i : i + 1]
        azimuths = _two_least(value_of, centre, frame, angle, change[i], extreme)
        leaving = _small_circle(centre, frame, azimuths[None])[0]
        circle = _fitted(circle_through(np.concatenate([centre, leaving])), centres)
        around = value_of(np.ascontiguousarray(circle.points(24).T))
        if np.abs(around - extreme).max() <= _SAME_VALUE * scale:
            found.append(circle)
            waiting &= circle.distance(centres) > _NEAR_CIRCLE
        else:
            failures += 1
    return found


def _fitted(circle: Circle, centres: FloatArray) -> Circle:
    """Return the circle that fits best those of the directions (M, 3) that lie near a circle.

    Three points near one another fix its axis poorly; where the others are well spread, they
    fix it to rounding.
    """
    near = centres[circle.distance(centres) < _NEAR_CIRCLE]
    near = np.where((near @ circle.axis)[:, None] < 0, -near, near)
    middle = near.mean(axis=0)
    _, spread, axes = np.linalg.svd(near - middle, full_matrices=False)
    if len(near) < 3 or spread[1] < _SPREAD:
        return circle
    return _circle(axes[2], middle)


def _small_circle(centres: FloatArray, frames: FloatArray, angles: FloatArray) -> FloatArray:
    """Return points (M, K, 3) at the probe radius from centres (M, 3), at azimuths (M, K)."""
    u, v = frames[:, None, 0], frames[:, None, 1]
    aside = np.cos(angles)[:, :, None] * u + np.sin(angles)[:, :, None] * v
    result: FloatArray = np.cos(_PROBE) * centres[:, None] + np.sin(_PROBE) * aside
    return result


def _changes(
    value_of: ValueOf,
    centres: FloatArray,
    frames: FloatArray,
    angles: FloatArray,
    extreme: float,
) -> FloatArray:
    """Return |value - extreme| (M, K) on the small circles."""
    points = _small_circle(centres, frames, angles)
    values = value_of(np.ascontiguousarray(points.reshape(-1, 3).T))
    change: FloatArray = np.abs(values - extreme).reshape(angles.shape)
    return np.where(np.isnan(change), np.inf, change)


def _two_least(
    value_of: ValueOf,
    centre: FloatArray,
    frame: FloatArray,
    angle: FloatArray,
    change: FloatArray,
    extreme: float,
) -> FloatArray:
    """Return the azimuths (2,) of the least changes on two sides of one small circle."""
    first = angle[int(np.argmin(change))]
    aside = np.where(np.cos(angle - first) < -0.1, change, np.inf)
    best = np.array([first, angle[int(np.argmin(aside))]])
    width = angle[1]
    for _ in range(_ZOOMS):
        tried = best[:, None] + width * np.linspace(-1.0, 1.0, 9)
        values = _changes(value_of, centre, frame, tried.reshape(1, -1), extreme).reshape(2, 9)
        best = tried[[0, 1], np.argmin(values, axis=1)]
        width /= 4
    return best
