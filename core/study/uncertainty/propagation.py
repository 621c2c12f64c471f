"""How the errors of the constants carry over, to first order, to any number or field.

The uncertainty is given as a factor L, shape (21, r), with L Lᵀ the covariance of the 21
constants (see `covariance`): r independent errors, each worth one standard
uncertainty. Quantities with a formula for their slopes are in `sensitivity` and `deviations`;
here are the differences that serve everything else.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from core.arrays import FloatArray
from core.directional.medium import Medium
from core.study.uncertainty.covariance import (
    KELVIN_21,
    class_basis,
    follows_class,
    independent_part,
)
from core.tensor.notation import constant_name, from_upper_triangle
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, crystal_class

Function = Callable[[Medium], npt.ArrayLike]
"""Anything that can be computed of a medium: a number or an array of numbers."""

# Of the least eigenstiffness: a step errs by its square, 1e-8, and by rounding over it.
_STEP = 1e-4
_SOFTEST = 1e-5  # of the largest eigenstiffness: no smaller least one is stepped by


@dataclass(frozen=True)
class Contribution:
    """How much one constant has to do with the uncertainty of a number.

    Attributes
    ----------
    name : str
        Of an independent constant: "C44".
    share : float
        Part of the variance, 0 to 1, that would go if this constant were known exactly. The
        shares add up to 1 where the errors of the constants are independent.
    """

    name: str
    share: float


def changed(medium: Medium, constants: FloatArray) -> Medium:
    """Return the medium with small amounts, (21,), GPa, added to its constants."""
    table = medium.stiffness.voigt + from_upper_triangle(constants)
    return Medium(Stiffness.from_voigt(table), medium.density)


def propagate(function: Function, medium: Medium, factor: FloatArray) -> FloatArray:
    """Return the standard uncertainty of anything that is computed of a medium.

    Parameters
    ----------
    function : callable
        Of a `Medium`, returning a number or an array of any shape.
    medium : Medium
    factor : ndarray, shape (21, r)
        L, GPa, in the axes of the medium.

    Returns
    -------
    ndarray
        The shape and unit of what `function` returns; NaN where that, or one of its
        neighbours, is not finite.

    Notes
    -----
    One step forwards and one backwards along each column of L, 2 r + 1 calls in all; the
    squares of the two slopes are averaged. Where the function is smooth that is the square of
    the central difference to 1e-8; at a kink, such as the point where an angle is zero or two
    sheets meet, where central differences may vanish, it is the mean of both sides.
    """
    here = np.asarray(function(medium), dtype=np.float64)
    variance = np.zeros(here.shape)
    step = _step(medium)
    for column in factor.T[factor.any(axis=0)]:
        unit, size = _unit(column)
        with np.errstate(invalid="ignore", over="ignore"):
            for sign in (1.0, -1.0):
                there = np.asarray(function(changed(medium, sign * step * unit)))
                variance += 0.5 * ((there - here) / step * size) ** 2
    known = np.isfinite(variance) & np.isfinite(here)
    return np.asarray(np.sqrt(np.where(known, variance, np.nan)))


def gradient(function: Function, medium: Medium) -> FloatArray:
    """Return the slopes of anything that is computed of a medium, by each of the 21 constants.

    Parameters
    ----------
    function : callable
        As for `propagate`.
    medium : Medium

    Returns
    -------
    ndarray, shape (..., 21)
        Per GPa; each constant off the diagonal changes both of its cells. Central differences
        to 1e-8 where the function is smooth.
    """
    slopes, step = [], _step(medium)
    for constant in np.eye(21):
        unit, size = _unit(constant)
        ahead, behind = (
            np.asarray(function(changed(medium, sign * step * unit)), dtype=np.float64)
            for sign in (1.0, -1.0)
        )
        with np.errstate(invalid="ignore"):
            slopes.append((ahead - behind) / (2 * step) * size)
    return np.stack(slopes, axis=-1)


def _step(medium: Medium) -> float:
    """Return how far, GPa in the Kelvin norm, constants are changed to see the slope."""
    stiff = np.abs(medium.stiffness.eigenstiffness)
    return _STEP * max(float(stiff.min()), _SOFTEST * float(stiff.max()))


def _unit(constants: FloatArray) -> tuple[FloatArray, float]:
    """Return a change of the constants, (21,), at unit Kelvin norm, and its norm."""
    largest = float(np.abs(constants).max())  # first, for the smallest numbers have no squares
    plain = constants / largest
    norm = float(np.linalg.norm(KELVIN_21 * plain))
    return plain / norm, norm * largest


def contributions(
    slopes: FloatArray, covariance: FloatArray, claimed: CrystalClass
) -> tuple[Contribution, ...]:
    """Return which constants the uncertainty of a number comes from, the worst first.

    Parameters
    ----------
    slopes : ndarray, shape (21,)
        Of the number by the 21 constants, from `gradient` or `sensitivity.gradients`.
    covariance : ndarray, shape (21, 21)
        GPa², in the axes of the slopes and of the class.
    claimed : CrystalClass
        Dependent constants count with those they follow. Where the covariance breaks the form
        of the class all 21 are taken as independent.

    Returns
    -------
    tuple of Contribution
        One for each independent constant that has an uncertainty; empty where the number has
        none, or is undefined.

    Notes
    -----
    With Σ the covariance of the independent constants and g the slopes by them, knowing
    constant i exactly takes (Σ g)ᵢ² / Σᵢᵢ off the variance gᵀ Σ g: the square of its
    correlation with the number.
    """
    form = claimed if follows_class(covariance, claimed) else crystal_class("triclinic")
    own = independent_part(covariance, form)
    pulled = own @ (class_basis(form).T @ slopes)
    variance = float(slopes @ covariance @ slopes)
    if not variance > 0:
        return ()
    shares = [
        Contribution(constant_name(*cell), float(pull**2 / (own[k, k] * variance)))
        for k, (cell, pull) in enumerate(zip(form.independent, pulled, strict=True))
        if own[k, k] > 0
    ]
    return tuple(sorted(shares, key=lambda each: -each.share))
