"""How many constants the data support: the classes weighed against the uncertainties.

A class that describes a table within its uncertainties by few constants is worth more than
one that follows the noise with many. The measure is Schwarz's criterion, χ² + k ln n, with
the n = 21 constants of the table as data (Schwarz 1978, Ann. Stat. 6, 461).
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import FloatArray, read_only
from core.tensor.hidden_axes import HiddenAxes, exponential, kelvin_generator
from core.tensor.notation import kelvin_rotation, kelvin_to_stiffness, upper_triangle
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, crystal_class, kelvin_projector

_DATA = 21
_ITERATIONS = 25
_SETTLED = 1e-6  # of χ², plus 1e-9: what a step must gain for another one

_ORIENTATION = {
    "triclinic": 0, "monoclinic": 2, "orthorhombic": 3, "tetragonal_6": 3, "trigonal_6": 3,
    "hexagonal": 2, "cubic": 3, "isotropic": 0,
}
"""Angles that set the axes, where they add to the constants: a turn about the axis of a
monoclinic or hexagonal crystal changes the constants only. The seven-constant classes are
left out: turned, they are the six-constant ones."""


@dataclass(frozen=True)
class Support:
    """How well a class describes a table with uncertainties.

    Attributes
    ----------
    class_key : str
    constants : int
        Independent constants of the class.
    parameters : int
        Those and the angles of its axes.
    chi2 : float
        Squared differences in units of the uncertainties, summed over the 21 constants, for
        the best constants and axes.
    criterion : float
        χ² + parameters × ln 21; the least is best supported, and 10 more is hardly tenable.
    """

    class_key: str
    constants: int
    parameters: int
    chi2: float
    criterion: float


def supported_classes(
    stiffness: Stiffness, std: FloatArray, found: Iterable[HiddenAxes]
) -> tuple[Support, ...]:
    """Return how well every class describes a table, the best supported first.

    Parameters
    ----------
    stiffness : Stiffness
        In any axes.
    std : ndarray, shape (6, 6)
        Standard uncertainties, GPa, taken as independent. A constant without one (0) is
        taken to be known as well as the best one.
    found : iterable of HiddenAxes
        From `nearest_classes`: where the search for each class begins.

    Raises
    ------
    ValueError
        When no constant has an uncertainty.
    """
    sigmas = upper_triangle(np.abs(std))
    if not sigmas.any():
        raise ValueError("no constant has an uncertainty")
    weights = 1 / np.where(sigmas > 0, sigmas, sigmas[sigmas > 0].min())
    data = weights * upper_triangle(stiffness.voigt)
    supports = []
    for axes in found:
        if axes.class_key not in _ORIENTATION:
            continue
        cls = crystal_class(axes.class_key, axes.unique_axis)
        constants = len(cls.independent)
        parameters = min(constants + _ORIENTATION[cls.key], _DATA)
        chi2 = 0.0 if constants == _DATA else _least_chi2(data, weights, cls, axes.rotation)
        criterion = chi2 + parameters * float(np.log(_DATA))
        supports.append(Support(cls.key, constants, parameters, chi2, criterion))
    return tuple(sorted(supports, key=lambda support: support.criterion))


def _least_chi2(
    data: FloatArray, weights: FloatArray, cls: CrystalClass, rotation: FloatArray
) -> float:
    """Return the least χ² over the constants of a class and its axes, from given axes.

    The constants are linear and solved for at every step; damped Gauss–Newton steps turn the
    axes (variable projection; Golub & Pereyra 1973, SIAM J. Numer. Anal. 10, 413).
    """
    damping, axes = 1e-3, np.array(rotation)
    chi2, residual, slopes = _fit(data, weights, cls, axes)
    for _ in range(_ITERATIONS):
        normal = slopes.T @ slopes
        ridge = damping * float(np.trace(normal)) + 1e-300
        step = np.linalg.solve(normal + ridge * np.eye(3), slopes.T @ residual)
        turned = exponential(np.array([-step], dtype=np.float64))[0] @ axes
        new = _fit(data, weights, cls, turned)
        if new[0] < chi2:
            gain, axes, damping = chi2 - new[0], turned, damping * 0.2
            chi2, residual, slopes = new
            if gain < _SETTLED * chi2 + 1e-9:
                break
        else:
            damping *= 10
    return chi2


def _fit(
    data: FloatArray, weights: FloatArray, cls: CrystalClass, rotation: FloatArray
) -> tuple[float, FloatArray, FloatArray]:
    """Return χ², the weighted residual (21,), and its slopes with turns of the axes (21, 3)."""
    back = kelvin_rotation(rotation.T)
    basis = _class_basis(cls)
    columns = _weighted(back @ basis @ back.T, weights)
    constants, *_ = np.linalg.lstsq(columns, data, rcond=None)
    residual = columns @ constants - data
    table = np.tensordot(constants, basis, axes=1)
    turned = []
    for k in range(3):  # the class's axes turn by R → exp(ω) R: back → back exp(−ω)
        generator = kelvin_generator(k)
        turned.append(back @ (table @ generator - generator @ table) @ back.T)
    moves = _weighted(np.array(turned), weights)
    moves = moves - columns @ np.linalg.lstsq(columns, moves, rcond=None)[0]
    return float(residual @ residual), residual, moves


def _weighted(kelvin: FloatArray, weights: FloatArray) -> FloatArray:
    """Return tables (K, 6, 6) in Kelvin form as columns (21, K) of weighted constants."""
    columns: FloatArray = (upper_triangle(kelvin_to_stiffness(kelvin)) * weights).T
    return columns


@lru_cache(maxsize=32)
def _class_basis(cls: CrystalClass) -> FloatArray:
    """Return orthonormal Kelvin tables (constants, 6, 6) that span a class."""
    values, vectors = np.linalg.eigh(kelvin_projector(cls))
    return read_only(vectors[:, values > 0.5].T.reshape(-1, 6, 6))
