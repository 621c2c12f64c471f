"""Newton's method over orthonormal frames, many starts at once.

A direction with its two tangents, or a load with its transverse direction, is one orthonormal
frame: a (3, 3) array with rows n, m, l. Three small turns carry a frame to its neighbours, so
everything that an extreme is sought of (moduli, ratios, sheets of speeds) is minimised by the
one loop of this file. What is minimised belongs elsewhere.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray, read_only

FIRST_RADIUS = 0.3  # radians: about four mesh spacings of the grid the starts come from
LARGEST_RADIUS = 0.5  # radians: a longer step would not be local
ROUNDING = 1e-15  # of the scale: a value that rises by less has not risen


def _generators() -> FloatArray:
    """Return the three turns as antisymmetric matrices: n to m, n to l, m to l."""
    turns = np.zeros((3, 3, 3))
    for turn, (p, q) in zip(turns, ((0, 1), (0, 2), (1, 2)), strict=True):
        turn[p, q], turn[q, p] = 1.0, -1.0
    return turns


GENERATORS = read_only(_generators())


@dataclass(frozen=True, eq=False)
class Local:
    """An objective to second order in the three turns, at M frames.

    Attributes
    ----------
    value : (M,) array
    gradient : (M, 3) array
    hessian : (M, 3, 3) array
        A turn that changes nothing has zero rows here and in the gradient.
    """

    value: FloatArray
    gradient: FloatArray
    hessian: FloatArray

    def times(self, sign: FloatArray) -> "Local":
        """Return the objective multiplied by a number (M,) for each frame."""
        gradient, hessian = sign[:, None] * self.gradient, sign[:, None, None] * self.hessian
        return Local(sign * self.value, gradient, hessian)


@dataclass(frozen=True, eq=False)
class Descent:
    """Where M starts have come to.

    Attributes
    ----------
    frames : (M, 3, 3) array
        Rows n, m, l.
    value : (M,) array
    converged : (M,) bool array
        Whether the gradient vanishes there: False on the edge or point of a cusp.
    hessian : (M, 3, 3) array
    """

    frames: FloatArray
    value: FloatArray
    converged: BoolArray
    hessian: FloatArray


Objective = Callable[[FloatArray, IntArray], Local]
"""Evaluates frames (K, 3, 3) that belong to the starts with the given numbers (K,)."""


def turned(frames: FloatArray, turns: FloatArray) -> FloatArray:
    """Return frames (M, 3, 3) turned by the exponential of small turns (M, 3), in radians.

    Rodrigues' formula. Turn 0 moves n towards m, turn 1 moves n towards l, turn 2 m towards l.
    """
    matrix = (turns @ GENERATORS.reshape(3, 9)).reshape(-1, 3, 3)
    angle = np.sqrt((turns * turns).sum(axis=1))[:, None, None]
    half = np.sinc(angle / (2 * np.pi))
    rotation = np.eye(3) + np.sinc(angle / np.pi) * matrix + 0.5 * half**2 * (matrix @ matrix)
    result: FloatArray = rotation @ frames
    return result


def descend(
    frames: FloatArray,
    objective: Objective,
    scale: FloatArray,
    steps: int = 40,
    flat: float = 1e-11,
    least_radius: float = 1e-9,
) -> Descent:
    """Minimise an objective from many frames at once by safeguarded Newton steps.

    The step uses the absolute values of the Hessian's eigenvalues, so that it always leads
    down, is cut to a trust radius, and is taken only if the value does not rise.

    Parameters
    ----------
    frames : (M, 3, 3) array
        Starts, rows n, m, l. Not changed.
    objective : callable
        See `Objective`.
    scale : (M,) array
        Size of the objective, positive: what "flat" and "rounding" are measured by.
    steps : int
        After so many steps what has not converged stays where it is.
    flat : float
        A gradient below this part of the scale has vanished.
    least_radius : float
        In radians; a start whose trust radius falls below has not converged and is left.
    """
    frames, active = frames.copy(), np.arange(len(frames))
    here = objective(frames, active)
    here = Local(here.value.copy(), here.gradient.copy(), here.hessian.copy())
    radius = np.full(len(frames), FIRST_RADIUS)
    converged = _norm(here.gradient) <= flat * scale
    active = active[~converged]
    for _ in range(steps):
        if active.size == 0:
            break
        step = _newton_step(here, active, radius[active], scale[active])
        tried = turned(frames[active], step)
        there = objective(tried, active)
        better = there.value <= here.value[active] + ROUNDING * scale[active]
        kept = active[better]
        frames[kept] = tried[better]
        here.value[kept] = there.value[better]
        here.gradient[kept] = there.gradient[better]
        here.hessian[kept] = there.hessian[better]
        radius[kept] = np.minimum(1.5 * radius[kept], LARGEST_RADIUS)
        radius[active[~better]] *= 0.25
        converged[active] = _norm(here.gradient[active]) <= flat * scale[active]
        active = active[~converged[active] & (radius[active] > least_radius)]
    return Descent(frames, here.value, converged, here.hessian)


def _newton_step(
    here: Local, active: IntArray, radius: FloatArray, scale: FloatArray
) -> FloatArray:
    """Return |H|⁻¹(-g) for the active starts, (K, 3), no longer than their radius."""
    values, vectors = np.linalg.eigh(here.hessian[active])
    curvature = np.maximum(np.abs(values), 1e-7 * scale[:, None])
    along = (here.gradient[active, None, :] @ vectors)[:, 0]
    step: FloatArray = (vectors @ (-along / curvature)[:, :, None])[:, :, 0]
    length = _norm(step)
    return step * np.minimum(1.0, radius / np.maximum(length, 1e-300))[:, None]


def _norm(vectors: FloatArray) -> FloatArray:
    """Return the lengths (K,) of vectors (K, 3)."""
    length: FloatArray = np.sqrt((vectors * vectors).sum(axis=1))
    return length
