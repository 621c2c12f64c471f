"""The nearest table of a class about given axes, in three metrics, and the share of each class.

Nearest in the Kelvin norm of the stiffness, of the compliance, or of the logarithm; the last
treats both alike (Moakher & Norris 2006, J. Elasticity 85, 215). Axes that a table hides are
sought elsewhere; here the axes are given.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray
from core.errors import InputError
from core.tensor.notation import kelvin_rotation
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import (
    CLASS_KEYS,
    CrystalClass,
    crystal_class,
    distance,
    kelvin_projector,
)

CHAINS: dict[str, tuple[str, ...]] = {
    "orthorhombic": ("isotropic", "hexagonal", "tetragonal_6", "orthorhombic", "monoclinic",
                     "triclinic"),
    "trigonal": ("isotropic", "hexagonal", "trigonal_6", "trigonal_7", "triclinic"),
    "cubic": ("isotropic", "cubic", "tetragonal_6", "orthorhombic", "monoclinic", "triclinic"),
}
"""Classes each of whose tables are also tables of the next, from the fewest constants up."""

_Function = Callable[[FloatArray], FloatArray]
_METRICS: dict[str, tuple[_Function, _Function]] = {
    "stiffness": (lambda x: x, lambda x: x),
    "compliance": (lambda x: 1 / x, lambda x: 1 / x),
    "logarithm": (np.log, np.exp),
}
"""What is done to the eigenstiffnesses before the class average, and what undoes it."""


@dataclass(frozen=True)
class Share:
    """What one class adds to those before it in a chain.

    Attributes
    ----------
    class_key : str
    percent : float
        By how much the distance to the chain shrinks, in percent of ‖C‖; sums to 100
        (Browaeys & Chevrot 2004, Geophys. J. Int. 159, 667).
    energy_percent : float
        ‖part‖²/‖C‖² in percent; the parts are orthogonal, and these sum to 100 too.
    anisotropic_percent : float
        ‖part‖² in percent of the anisotropic rest, ‖C − C_isotropic‖²; 0 for the isotropic
        part itself, and for all parts of an isotropic table.
    """

    class_key: str
    percent: float
    energy_percent: float
    anisotropic_percent: float


def closest(stiffness: Stiffness, cls: CrystalClass, metric: str = "stiffness") -> Stiffness:
    """Return the nearest table of a class about the given axes.

    Parameters
    ----------
    stiffness : Stiffness
        In the axes about which the class is meant.
    cls : CrystalClass
    metric : "stiffness", "compliance" or "logarithm"
        Kelvin norm of the difference of the stiffnesses, of the compliances, or of the
        logarithms.

    Raises
    ------
    InputError
        In the last two metrics, when the crystal is not stable.
    """
    there, back = _METRICS[metric]
    if metric != "stiffness" and not stiffness.is_stable:
        raise InputError(
            f"The nearest table by {metric} is defined for a stable crystal only.",
            where="table",
        )
    mapped = kelvin_function(stiffness.kelvin, there).reshape(36) @ kelvin_projector(cls)
    return Stiffness.from_kelvin(kelvin_function(mapped.reshape(6, 6), back))


def kelvin_function(kelvin: FloatArray, function: _Function) -> FloatArray:
    """Return a function of a symmetric (6, 6) in Kelvin form, applied to its eigenvalues."""
    values, vectors = np.linalg.eigh(kelvin)
    result: FloatArray = (vectors * function(values)) @ vectors.T
    return (result + result.T) / 2


def simplest_class(matrix: FloatArray, tolerance: float) -> tuple[CrystalClass, float]:
    """Return the class of fewest constants that a table is near to, about the given axes.

    Parameters
    ----------
    matrix : ndarray, shape (6, 6)
        Stiffness, Voigt.
    tolerance : float
        The largest relative distance (Kelvin) that counts as near.

    Returns
    -------
    CrystalClass, float
        The class, monoclinic with whichever axis is nearest, and the relative distance; of
        classes with as many constants the nearer one. Triclinic at the worst.
    """
    near = [
        (len(cls.independent), off, cls)
        for cls, off in (nearest_setting(matrix, key) for key in CLASS_KEYS)
        if off <= tolerance or cls.key == "triclinic"
    ]
    _, off, cls = min(near, key=lambda row: row[:2])
    return cls, off


def nearest_setting(matrix: FloatArray, key: str) -> tuple[CrystalClass, float]:
    """Return a class with its relative distance; monoclinic about the nearest of x, y and z."""
    settings = [crystal_class(key, axis) for axis in ("yzx" if key == "monoclinic" else "y")]
    offs = [distance(matrix, cls) for cls in settings]
    nearest = int(np.argmin(offs))
    return settings[nearest], offs[nearest]


def log_distance(
    stiffness: Stiffness, cls: CrystalClass, rotation: FloatArray | None = None
) -> float:
    """Return the log-Euclidean distance to a class, ‖ln C − P(ln C)‖ in Kelvin form.

    Parameters
    ----------
    stiffness : Stiffness
    cls : CrystalClass
    rotation : ndarray, shape (3, 3), optional
        Rows are the axes of the class in the axes of the table; the same axes by default.

    Returns
    -------
    float
        0.01 is about one percent in one eigenstiffness; NaN for a crystal that is not stable.
    """
    if not stiffness.is_stable:
        return float("nan")
    logarithm = kelvin_function(stiffness.kelvin, np.log)
    if rotation is not None:
        turn = kelvin_rotation(rotation)
        logarithm = turn @ logarithm @ turn.T
    flat = logarithm.reshape(36)
    return float(np.linalg.norm(flat - flat @ kelvin_projector(cls)))


def decompose(stiffness: Stiffness, chain: str = "orthorhombic") -> tuple[Share, ...]:
    """Return how much of a table each class of a chain explains, about the given axes.

    Parameters
    ----------
    stiffness : Stiffness
        Its z axis is the axis of the hexagonal, tetragonal and trigonal parts, and the
        twofold axis of the monoclinic part.
    chain : str
        A key of `CHAINS`.

    Notes
    -----
    Successive orthogonal projections in Kelvin form: Browaeys & Chevrot 2004, Geophys. J.
    Int. 159, 667. All percentages of a table of zeros are 0.
    """
    kelvin = np.array(stiffness.kelvin).reshape(36)
    parts = [
        kelvin @ kelvin_projector(crystal_class(key, unique_axis="z")) for key in CHAINS[chain]
    ]
    size = float(np.linalg.norm(kelvin)) or 1.0
    rests = [1.0, *(float(np.linalg.norm(kelvin - part)) / size for part in parts)]
    if not kelvin.any():
        rests = [0.0] * len(rests)
    anisotropic = rests[1] ** 2 if rests[1] > 1e-12 else np.inf
    shares = []
    for place, key in enumerate(CHAINS[chain]):
        before, after = rests[place], rests[place + 1]
        energy = before**2 - after**2
        share = 100 * energy / anisotropic if place else 0.0
        shares.append(Share(key, 100 * (before - after), 100 * energy, share))
    return tuple(shares)
