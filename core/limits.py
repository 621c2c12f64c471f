"""What a number about a crystal can be: the checks that files and edits share.

Every check returns the number, or raises `InputError` with a plain sentence.
"""

from __future__ import annotations

import numpy as np

from core.arrays import FloatArray
from core.errors import InputError

SOFTEST, STIFFEST = 1e-9, 1e6  # GPa; the stiffest solid known has some 1e3, a jelly 1e-6
LIGHTEST, DENSEST = 1e-12, 1e12  # kg/m³; the densest solid known has some 2e4, an aerogel 1
COLDEST = -273.15  # °C
HOTTEST = 1e5


def density(value: float, where: str) -> float:
    """Return a density in kg/m³."""
    if value <= 0:
        raise InputError(
            f"A density is above zero, not {value:g}.",
            "In kg/m³; leave it out if it is not known.",
            where,
        )
    if not LIGHTEST <= value <= DENSEST:
        raise InputError(f"No solid has {value:g} kg/m³.", "1 g/cm³ is 1000 kg/m³.", where)
    return value


def temperature(value: float, where: str) -> float:
    """Return a temperature in °C."""
    if not COLDEST <= value <= HOTTEST:
        raise InputError(
            f"A temperature of {value:g} °C is out of reach.",
            f"Absolute zero is {COLDEST} °C.".replace("-", "−"),
            where,
        )
    return value


def stiffness(table: FloatArray, where: str) -> FloatArray:
    """Return a table of stiffnesses in GPa, shape (6, 6); one of zeros only is accepted."""
    largest = float(np.abs(table).max())
    if 0.0 < largest < SOFTEST:
        raise InputError(
            f"With no constant above {largest:.4g} GPa this is no solid.",
            "Are the numbers compliances?",
            where,
        )
    if largest > STIFFEST:
        raise InputError(
            f"A constant of {largest:.4g} GPa is beyond any solid.",
            "Are the numbers in Pa? 1 GPa is 1e9 Pa.",
            where,
        )
    return table


def symmetric(table: FloatArray, where: str) -> FloatArray:
    """Return the mean of a square table and its transpose, which must agree within 1e-6.

    Raises
    ------
    InputError
        Naming the two cells that differ most.
    """
    gap = np.abs(table - table.T)
    if gap.max() > 1e-6 * np.abs(table).max():
        i, j = np.unravel_index(np.triu(gap).argmax(), table.shape)
        raise InputError(
            f"Row {i + 1}, column {j + 1} holds {table[i, j]:.6g} but "
            f"row {j + 1}, column {i + 1} holds {table[j, i]:.6g}.",
            "The table must be symmetric: make the two cells equal.",
            where,
        )
    return np.asarray((table + table.T) / 2)


def deviations(table: FloatArray, where: str) -> FloatArray:
    """Return standard uncertainties in GPa, none negative."""
    if (table < 0).any():
        i, j = np.argwhere(table < 0)[0]
        raise InputError(
            f"An uncertainty cannot be negative: row {i + 1}, column {j + 1} "
            f"holds {table[i, j]:g}.",
            where=where,
        )
    return table


def covariance(table: FloatArray, where: str) -> FloatArray:
    """Return a covariance, shape (21, 21), GPa², without negative variance in any direction."""
    least = float(np.linalg.eigvalsh(table)[0])
    if least < -1e-9 * float(np.abs(table).max()):
        raise InputError(
            "No errors can be correlated like this: some combination of the constants would "
            "have a negative variance.",
            where=where,
        )
    return table
