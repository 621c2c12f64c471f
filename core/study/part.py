"""Engineering constants of a part: E, ν, G and coupling coefficients along its axes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray
from core.directional.medium import Medium
from core.directional.sphere import directions
from core.directional.waves import power_flow, speeds
from core.errors import InputError
from core.tensor.notation import VOIGT_PAIRS
from core.tensor.stiffness import Stiffness

PAIR_NAMES = tuple(f"{i + 1}{j + 1}" if i != j else f"{i + 1}" for i, j in VOIGT_PAIRS)
"""What each of the six strains is called: "1", "2", "3", "23", "13", "12"."""
SHEAR_NAMES = PAIR_NAMES[3:]
_AXES = "XYZ"
_WAVES = ("fastest", "middle", "slowest")


@dataclass(frozen=True, eq=False)
class EngineeringConstants:
    """What a part shows along its own axes 1, 2, 3 (X, Y, Z).

    Attributes
    ----------
    young : ndarray, shape (3,)
        E₁, E₂, E₃ in GPa.
    poisson : ndarray, shape (3, 3)
        Row loaded, column responding: ν₁₂ = −ε₂/ε₁ under stress along 1. NaN on the diagonal.
    shear : ndarray, shape (3,)
        G₂₃, G₁₃, G₁₂ in GPa.
    response : ndarray, shape (6, 6)
        Strain I per strain J when only stress J acts: S_IJ / S_JJ, engineering shears.
        Off its normal block these are the coupling coefficients: of mutual influence after
        Lekhnitskii (*Theory of Elasticity of an Anisotropic Body*, 1963), between two shears
        after Chentsov.
    """

    young: FloatArray
    poisson: FloatArray
    shear: FloatArray
    response: FloatArray

    @property
    def coupling(self) -> dict[str, float]:
        """Coupling coefficients by name: "23,1" is the 23 shear caused by stress along 1."""
        return {
            f"{PAIR_NAMES[i]},{PAIR_NAMES[j]}": float(self.response[i, j])
            for i in range(6)
            for j in range(6)
            if i != j and (i > 2 or j > 2)
        }


def engineering_constants(stiffness: Stiffness) -> EngineeringConstants:
    """Return the engineering constants in the frame of the stiffness (part axes).

    NaN where a diagonal compliance is not positive, as in an unstable table, and everywhere
    for a table without an inverse.
    """
    try:
        compliance = stiffness.compliance
    except InputError:
        compliance = np.full((6, 6), np.nan)
    diagonal = np.where(np.diag(compliance) > 0, np.diag(compliance), np.nan)
    response = compliance / diagonal[np.newaxis, :]
    poisson = -response[:3, :3].T
    poisson[np.diag_indices(3)] = np.nan
    return EngineeringConstants(1 / diagonal[:3], poisson, 1 / diagonal[3:], response)


@dataclass(frozen=True)
class PartRow:
    """One number of the part table.

    Attributes
    ----------
    key : str
        Name in JSON, with its unit.
    label, unit : str
        For people.
    value : float
        NaN where undefined.
    group : str
        "stiffness", "coupling" or "waves".
    """

    key: str
    label: str
    unit: str
    value: float
    group: str


def part_table(medium: Medium) -> tuple[PartRow, ...]:
    """Return what a part shows along its axes X, Y, Z; the medium is in part axes.

    Young's moduli, shear moduli, Poisson's ratios, coupling coefficients and, with a density,
    the three speeds and power-flow angles along each axis.
    """
    constants = engineering_constants(medium.stiffness)
    rows = [*_moduli_rows(constants), *_coupling_rows(constants)]
    if medium.density is not None:
        rows += _wave_rows(medium)
    return tuple(rows)


def _moduli_rows(constants: EngineeringConstants) -> list[PartRow]:
    rows = [
        PartRow(f"young_{axis}_gpa", f"E along {axis}", "GPa", float(value), "stiffness")
        for axis, value in zip(_AXES, constants.young, strict=True)
    ]
    rows += [
        PartRow(
            f"shear_{pair}_gpa", f"G in {_lettered(pair)}", "GPa", float(value), "stiffness"
        )
        for pair, value in zip(SHEAR_NAMES, constants.shear, strict=True)
    ]
    rows += [
        PartRow(
            f"poisson_{i + 1}{j + 1}",
            f"ν loaded {_AXES[i]}, across {_AXES[j]}",
            "",
            float(constants.poisson[i, j]),
            "stiffness",
        )
        for i in range(3)
        for j in range(3)
        if i != j
    ]
    return rows


def _lettered(pair: str) -> str:
    return "".join(_AXES[int(digit) - 1] for digit in pair)


def _coupling_rows(constants: EngineeringConstants) -> list[PartRow]:
    """Return how much each stretch and each shear of a part drives the other shears.

    How a shear drives a stretch is left out: it follows from these and the moduli.
    """
    return [
        PartRow(f"coupling_{name.replace(',', '_')}", f"η {name}", "", value, "coupling")
        for name, value in constants.coupling.items()
        if name.split(",")[0] in SHEAR_NAMES
    ]


def _wave_rows(medium: Medium) -> list[PartRow]:
    axes = directions(np.eye(3))
    measures = (
        ("speed", "wave along", "km_s", "km/s", speeds(medium, axes)),
        ("power_flow", "wave: power flow off", "deg", "°", power_flow(medium, axes)),
    )
    return [
        PartRow(
            f"{key}_{axis}_{name}_{unit_key}",
            f"{name} {what} {axis}",
            unit,
            float(values[sheet, column]),
            "waves",
        )
        for key, what, unit_key, unit, values in measures
        for column, axis in enumerate(_AXES)
        for sheet, name in enumerate(_WAVES)
    ]
