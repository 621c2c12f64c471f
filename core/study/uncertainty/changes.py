"""Uncertainties of the constants: how they follow every linear change of the table.

The 21 constants run along the upper triangle by rows, 11, 12, …, 16, 22, …, 66. A covariance
of them is a (21, 21) array in GPa².
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from core.arrays import FloatArray
from core.tensor.notation import from_upper_triangle, upper_triangle
from core.tensor.symmetry import CrystalClass, complete

Change = Callable[[FloatArray], FloatArray]
"""A linear change of a symmetric (6, 6) table into another one."""


def linear_map(change: Change) -> FloatArray:
    """Return the matrix, shape (21, 21), by which the 21 constants follow a linear change."""
    units = from_upper_triangle(np.eye(21))
    return np.array([upper_triangle(change(unit)) for unit in units]).T


def carried(covariance: FloatArray, change: Change) -> FloatArray:
    """Return the covariance, (21, 21), GPa², of the constants after a linear change."""
    matrix = linear_map(change)
    after = matrix @ covariance @ matrix.T
    return np.asarray((after + after.T) / 2)


def independent_covariance(deviations: FloatArray, claimed: CrystalClass) -> FloatArray:
    """Return the covariance of the constants of a class whose free ones err independently.

    Parameters
    ----------
    deviations : ndarray, shape (6, 6)
        Standard uncertainties, GPa. Those of the free constants are read.
    claimed : CrystalClass
        The form of the table; triclinic where all 21 constants are free.

    Returns
    -------
    ndarray, shape (21, 21)
        GPa². Dependent constants follow: in a cubic crystal C11, C22 and C33 err together.
    """
    free = np.zeros((6, 6))
    for i, j in claimed.independent:
        free[i, j] = free[j, i] = deviations[i, j]
    variances = np.diag(upper_triangle(free) ** 2)
    return carried(variances, lambda table: complete(table, claimed))


def deviations_of(covariance: FloatArray) -> FloatArray:
    """Return the standard uncertainties, (6, 6), GPa, that a covariance holds."""
    return from_upper_triangle(np.sqrt(np.maximum(np.diag(covariance), 0.0)))
