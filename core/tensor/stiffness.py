"""The elastic tensor as one frozen value; its other forms are computed when first read."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt

from core.arrays import FloatArray, read_only
from core.errors import InputError
from core.tensor.notation import (
    compliance_to_kelvin,
    kelvin_rotation,
    kelvin_to_compliance,
    kelvin_to_stiffness,
    stiffness_to_kelvin,
    voigt_to_tensor,
)
from core.tensor.symmetry import CrystalClass, complete, crystal_class

_SYMMETRY_TOLERANCE = 1e-6  # of the largest cell: more than rounding in any printed table
_SINGULAR = 1e-12  # of the largest |eigenstiffness|: nearer zero than that is rounding
_ORTHOGONAL = 1e-6  # what is accepted as a rotation everywhere in the program


@dataclass(frozen=True, eq=False)
class Stiffness:
    """Elastic stiffness in whatever Cartesian frame the caller says.

    Attributes
    ----------
    voigt : ndarray, shape (6, 6)
        GPa, Voigt order 11 22 33 23 13 12, tensor components; read-only and symmetric.

    Raises
    ------
    InputError
        For a table that is not 6x6, not finite, or whose two triangles differ by more
        than 1e-6 of its largest cell (the cells are named). Smaller differences are
        averaged away. An unstable or singular table is accepted.
    """

    voigt: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "voigt", read_only(_symmetric(self.voigt)))

    @classmethod
    def from_voigt(cls, matrix: npt.ArrayLike) -> "Stiffness":
        """Return the stiffness of a Voigt table in GPa, shape (6, 6)."""
        return cls(np.asarray(matrix, dtype=np.float64))

    @classmethod
    def from_compliance(cls, matrix: npt.ArrayLike) -> "Stiffness":
        """Return the stiffness whose compliance is given.

        Parameters
        ----------
        matrix : array_like, shape (6, 6)
            1/GPa, Voigt order, engineering shears (S44 is 1/G of a cubic crystal).

        Raises
        ------
        InputError
            As for a stiffness, and for a compliance that has no inverse.
        """
        compliance = _symmetric(np.asarray(matrix, dtype=np.float64))
        kelvin = _inverse(compliance_to_kelvin(compliance), "compliance")
        return cls(kelvin_to_stiffness(kelvin))

    @classmethod
    def from_kelvin(cls, matrix: npt.ArrayLike) -> "Stiffness":
        """Return the stiffness of a table in Kelvin form in GPa, shape (6, 6)."""
        return cls(kelvin_to_stiffness(_symmetric(np.asarray(matrix, dtype=np.float64))))

    @classmethod
    def from_constants(
        cls, class_key: str, constants: Mapping[str, float], unique_axis: str = "y"
    ) -> "Stiffness":
        """Return the stiffness of a crystal class from its independent constants.

        Parameters
        ----------
        class_key : str
            One of `core.tensor.symmetry.CLASS_KEYS`.
        constants : mapping of str to float
            GPa, in the standard crystal axes of the class: ``{"11": 165.7, "12": 63.9,
            "44": 79.6}``. Exactly the independent ones.
        unique_axis : str
            Of a monoclinic crystal.

        Raises
        ------
        InputError
            Naming the constants that are missing or do not belong.
        """
        crystal = crystal_class(class_key, unique_axis)
        _check_names(constants, crystal)
        table = np.zeros((6, 6))
        for i, j in crystal.independent:
            table[i, j] = constants[f"{i + 1}{j + 1}"]
        return cls(complete(table, crystal))

    @cached_property
    def kelvin(self) -> FloatArray:
        """Kelvin form, GPa, shape (6, 6), read-only, the same frame."""
        return read_only(stiffness_to_kelvin(self.voigt))

    @cached_property
    def tensor(self) -> FloatArray:
        """Fourth-rank C_ijkl, GPa, shape (3, 3, 3, 3), read-only, the same frame."""
        return read_only(voigt_to_tensor(self.voigt))

    @cached_property
    def eigenstiffness(self) -> FloatArray:
        """Six eigenvalues of the Kelvin form, GPa, ascending, read-only; no frame."""
        return read_only(np.asarray(np.linalg.eigvalsh(self.kelvin), dtype=np.float64))

    @property
    def is_stable(self) -> bool:
        """Whether all six eigenstiffnesses are positive, beyond rounding."""
        values = self.eigenstiffness
        return bool(values[0] > _SINGULAR * np.abs(values).max())

    @cached_property
    def compliance(self) -> FloatArray:
        """Inverse, 1/GPa, shape (6, 6), engineering shears, read-only, the same frame.

        Raises
        ------
        InputError
            When the stiffness is singular.
        """
        return read_only(kelvin_to_compliance(_inverse(self.kelvin, "stiffness")))

    def rotate(self, rotation: FloatArray) -> "Stiffness":
        """Return the same crystal in turned axes.

        Parameters
        ----------
        rotation : ndarray, shape (3, 3)
            v_new = rotation @ v_old; rows are the new axes in the present frame.

        Raises
        ------
        ValueError
            When the matrix is not orthogonal within 1e-6.
        """
        if not np.allclose(rotation @ rotation.T, np.eye(3), rtol=0.0, atol=_ORTHOGONAL):
            raise ValueError("the axes of a rotation must be unit vectors at right angles")
        turn = kelvin_rotation(rotation)
        return Stiffness(kelvin_to_stiffness(turn @ self.kelvin @ turn.T))


def _symmetric(matrix: FloatArray) -> FloatArray:
    """Return the mean of a table and its transpose, refusing what is not an elastic table."""
    if matrix.shape != (6, 6):
        size = " by ".join(str(length) for length in matrix.shape) or "a single number"
        raise InputError(
            f"The table of constants must have 6 rows of 6; this one is {size}.", where="table"
        )
    if not np.isfinite(matrix).all():
        i, j = np.argwhere(~np.isfinite(matrix))[0]
        raise InputError(
            f"Row {i + 1}, column {j + 1} is not a finite number.",
            "Every cell needs a value; use 0 where a constant is zero.",
            "table",
        )
    gap = np.abs(matrix - matrix.T)
    if gap.max() > _SYMMETRY_TOLERANCE * np.abs(matrix).max():
        i, j = np.unravel_index(np.triu(gap).argmax(), (6, 6))
        raise InputError(
            f"Row {i + 1}, column {j + 1} holds {matrix[i, j]:.6g} but "
            f"row {j + 1}, column {i + 1} holds {matrix[j, i]:.6g}.",
            "The table must be symmetric: make the two cells equal.",
            "table",
        )
    return (matrix + matrix.T) / 2


def _inverse(kelvin: FloatArray, what: str) -> FloatArray:
    """Return the inverse of a symmetric table in Kelvin form, or refuse a singular one."""
    values, vectors = np.linalg.eigh(kelvin)
    if np.abs(values).min() <= _SINGULAR * np.abs(values).max():
        raise InputError(
            f"The {what} is singular: a strain costs no energy, and it has no inverse.",
            "Check for a constant that is missing or zero.",
            "table",
        )
    inverse: FloatArray = (vectors / values) @ vectors.T
    return (inverse + inverse.T) / 2


def _check_names(constants: Mapping[str, float], crystal: CrystalClass) -> None:
    wanted = [f"{i + 1}{j + 1}" for i, j in crystal.independent]
    missing = [f"C{name}" for name in wanted if name not in constants]
    surplus = [f"C{name}" for name in constants if name not in wanted]
    faults = [
        f"{said} {', '.join(names)}"
        for said, names in (("missing", missing), ("not independent", surplus))
        if names
    ]
    if faults:
        raise InputError(
            f"Constants of a crystal of class {crystal.key}: {'; '.join(faults)}.",
            f"Give {', '.join(f'C{name}' for name in wanted)}.",
            "constants",
        )
