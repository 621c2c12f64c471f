"""What a covariance of the 21 constants can be, how it turns, and its factor.

The constants run along the upper triangle by rows, 11, 12, …, 16, 22, …, 66, and a covariance
is a (21, 21) array in GPa². Its Kelvin form weighs the constants so that turning the axes is an
orthogonal change of all 21: only there are eigenvalues, and distances, the same in all axes.
"""

from __future__ import annotations

import numpy as np

from core.arrays import FloatArray
from core.errors import InputError
from core.study.uncertainty.changes import linear_map
from core.tensor.notation import (
    KELVIN_WEIGHTS,
    constant_name,
    from_upper_triangle,
    kelvin_rotation,
    kelvin_to_stiffness,
    stiffness_to_kelvin,
    upper_triangle,
)
from core.tensor.symmetry import CrystalClass, complete

CELLS: tuple[tuple[int, int], ...] = tuple((i, j) for i in range(6) for j in range(i, 6))
"""Row and column, from 0, of each of the 21 constants."""

TWICE: FloatArray = upper_triangle(2.0 - np.eye(6))
"""How often each of the 21 stands in the 6x6: once on the diagonal, twice off it."""

KELVIN_21: FloatArray = np.sqrt(TWICE) * upper_triangle(
    np.outer(KELVIN_WEIGHTS, KELVIN_WEIGHTS)
)
"""Weights that make the plain length of the 21 the norm of the tensor."""

_PRINTED = 1e-6  # of the largest eigenvalue or cell: rounding in a printed table
_ROUNDING = 1e-13  # of the largest eigenvalue of the correlations: what is none


# --- forms ----------------------------------------------------------------------------------


def class_basis(claimed: CrystalClass) -> FloatArray:
    """Return how the 21 constants follow the m independent ones of a class, (21, m).

    The independent constants are those of ``claimed.independent``, in that order.
    """
    own = [CELLS.index(cell) for cell in claimed.independent]
    return linear_map(lambda table: complete(table, claimed))[:, own]


def independent_part(covariance: FloatArray, claimed: CrystalClass) -> FloatArray:
    """Return the covariance of the independent constants of a class, (m, m), GPa²."""
    own = [CELLS.index(cell) for cell in claimed.independent]
    return np.asarray(covariance[np.ix_(own, own)])


def class_covariance(covariance: FloatArray, claimed: CrystalClass) -> FloatArray:
    """Return the covariance of the 21 that the independent constants of a class bring along.

    Parameters
    ----------
    covariance : ndarray, shape (21, 21)
        GPa², crystal axes. Only the cells of the independent constants are read.
    claimed : CrystalClass

    Returns
    -------
    ndarray, shape (21, 21)
        GPa²; in a hexagonal crystal C66 = (C11 − C12)/2 errs as C11 and C12 do.
    """
    basis = class_basis(claimed)
    return np.asarray(basis @ independent_part(covariance, claimed) @ basis.T)


def follows_class(covariance: FloatArray, claimed: CrystalClass) -> bool:
    """Return whether a covariance leaves the form of a class unbroken, within rounding."""
    gap = np.abs(covariance - class_covariance(covariance, claimed)).max()
    return bool(gap <= _PRINTED * np.abs(covariance).max())


# --- turning --------------------------------------------------------------------------------


def rotation_map(rotation: FloatArray) -> FloatArray:
    """Return the matrix, (21, 21), by which the 21 constants follow a rotation of the axes.

    `rotation` is (3, 3), v_new = rotation @ v_old.
    """
    turn = kelvin_rotation(rotation)
    units = stiffness_to_kelvin(from_upper_triangle(np.eye(21)))
    return upper_triangle(kelvin_to_stiffness(turn @ units @ turn.T)).T


def rotate_covariance(covariance: FloatArray, rotation: FloatArray) -> FloatArray:
    """Return a covariance, (21, 21), GPa², in turned axes: v_new = rotation @ v_old."""
    change = rotation_map(rotation)
    return np.asarray(change @ covariance @ change.T)


def rotate_factor(factor: FloatArray, rotation: FloatArray) -> FloatArray:
    """Return the factor, (21, r), GPa, of a covariance in turned axes."""
    return np.asarray(rotation_map(rotation) @ factor)


# --- factor ---------------------------------------------------------------------------------


def factor_of(covariance: FloatArray) -> FloatArray:
    """Return L with L Lᵀ the covariance: r independent errors of one standard uncertainty.

    Parameters
    ----------
    covariance : ndarray, shape (21, 21)
        GPa². Negative eigenvalues (rounding; `check_covariance` refuses more) count as zero.

    Returns
    -------
    ndarray, shape (21, r)
        GPa; r is the rank, for a covariance that follows a class at most the number of its
        independent constants. No columns where nothing is uncertain.

    Notes
    -----
    The eigenvectors are those of the correlations, so that constants known to very different
    degrees all keep their digits.
    """
    deviations = np.sqrt(np.maximum(np.diag(covariance), 0.0))
    scale = np.where(deviations > 0, deviations, 1.0)
    correlations = np.asarray(covariance) / np.outer(scale, scale)
    correlations[deviations == 0] = correlations[:, deviations == 0] = 0.0
    values, vectors = np.linalg.eigh(correlations)
    kept = values > _ROUNDING * max(float(values[-1]), 0.0)
    return np.asarray(deviations[:, None] * vectors[:, kept] * np.sqrt(values[kept]))


# --- checks ---------------------------------------------------------------------------------


def check_covariance(covariance: FloatArray, where: str = "covariance") -> FloatArray:
    """Return a covariance, made exactly symmetric, if there can be such errors.

    Parameters
    ----------
    covariance : ndarray, shape (21, 21)
        GPa².
    where : str
        The field or file, for the message.

    Raises
    ------
    InputError
        For another shape, numbers that are not finite, two cells that differ by more than
        1e-6 of the largest, a negative variance, or a negative eigenvalue beyond 1e-6 of the
        largest; the cell or the eigenvalue is named. `nearest_covariance` mends the last two.
    """
    table = np.asarray(covariance, dtype=np.float64)
    _check_cells(table, where)
    table = (table + table.T) / 2
    least = np.diag(table).argmin()
    if table[least, least] < 0:
        raise InputError(
            f"The variance of {_name(least)} is negative: {_text(table[least, least])} GPa².",
            "A variance is the square of a standard uncertainty.",
            where,
        )
    values, vectors = np.linalg.eigh(_weighted(table))
    if values[0] < -_PRINTED * values[-1]:
        raise InputError(
            _eigenvalue_text(values, vectors[:, 0]), _offer_text(table), where
        )
    return table


def nearest_covariance(covariance: FloatArray) -> FloatArray:
    """Return the nearest covariance that there can be, (21, 21), GPa².

    Nearest in the Kelvin form, so that it is the same one in all axes: the negative eigenvalues
    of the symmetric part become zero (Higham 1988, Linear Algebra Appl. 103, 103).
    """
    values, vectors = np.linalg.eigh(_weighted((covariance + covariance.T) / 2))
    mended = (vectors * np.maximum(values, 0.0)) @ vectors.T
    return np.asarray((mended + mended.T) / 2 / np.outer(KELVIN_21, KELVIN_21))


def _weighted(covariance: FloatArray) -> FloatArray:
    return covariance * np.outer(KELVIN_21, KELVIN_21)


def _check_cells(table: FloatArray, where: str) -> None:
    if table.shape != (21, 21):
        size = " by ".join(str(length) for length in table.shape) or "a single number"
        raise InputError(
            f"A covariance of the constants has 21 rows of 21; this one is {size}.",
            "They run along the upper triangle by rows: 11, 12, …, 16, 22, …, 66.",
            where,
        )
    if not np.isfinite(table).all():
        i, j = np.argwhere(~np.isfinite(table))[0]
        raise InputError(
            f"The covariance of {_name(i)} and {_name(j)} is not a finite number.",
            "Use 0 where two errors have nothing to do with each other.",
            where,
        )
    gap = np.abs(table - table.T)
    if gap.max() > _PRINTED * np.abs(table).max():
        i, j = np.unravel_index(np.triu(gap).argmax(), table.shape)
        raise InputError(
            f"The covariance of {_name(i)} and {_name(j)} is given as {_text(table[i, j])} "
            f"and as {_text(table[j, i])} GPa².",
            "A covariance is symmetric: make the two cells equal.",
            where,
        )


def _eigenvalue_text(values: FloatArray, vector: FloatArray) -> str:
    count = int((values < -_PRINTED * values[-1]).sum())
    first, second = np.argsort(-np.abs(vector), kind="stable")[:2]
    many = "" if count == 1 else f", the least of {count} negative ones"
    return (
        "No errors can be correlated like this: in Kelvin form the covariance has the "
        f"eigenvalue {_text(values[0])} GPa²{many}, mostly of {_name(first)} and "
        f"{_name(second)}."
    )


def _offer_text(table: FloatArray) -> str:
    change = np.abs(nearest_covariance(table) - table)
    i, j = np.unravel_index(np.triu(change).argmax(), change.shape)
    what = f"{_name(i)} and {_name(j)}" if i != j else f"{_name(i)} with itself"
    return (
        "The nearest that can be changes no cell by more than "
        f"{_text(change[i, j])} GPa² ({what})."
    )


def _name(place: np.intp | int) -> str:
    return constant_name(*CELLS[int(place)])


def _text(value: float) -> str:
    return f"{value:.3g}".replace("-", "−")
