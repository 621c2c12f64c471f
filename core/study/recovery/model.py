"""Speeds of a survey as a function of the constants, with derivatives, for many crystals.

A *survey* is what a table of readings becomes: the distinct wave normals, and for each reading
which normal and which sheet it belongs to. The constants are the independent ones of a crystal
class, so that a symmetry is obeyed by construction. Everything carries a leading axis B of
crystals: a multistart fit tries many at once for little more than the price of one.

The derivative of an eigenvalue of the Christoffel matrix is p . dΓ p, and Γ is linear in the
constants: d(ρv²)/dc_k = Γ_k(n) : p p, with Γ_k the matrix of a unit constant c_k.
"""

from dataclasses import dataclass
from functools import cached_property, lru_cache

import numpy as np

from core.arrays import FloatArray, IntArray, read_only
from core.directional import christoffel
from core.directional.medium import christoffel_operator
from core.directional.sphere import directions, pair_products
from core.tensor.notation import (
    SHEAR_FACTORS,
    constant_name,
    stiffness_to_kelvin,
    upper_triangle,
)
from core.tensor.symmetry import CrystalClass, complete

_GPA = 1e9
# Below this part of the largest eigenvalue the speed goes on along its tangent, so that a
# trial crystal without a real speed is still led back by a finite slope.
_FLOOR = 1e-3


@dataclass(frozen=True, eq=False)
class Basis:
    """The independent constants of a crystal class as coordinates of its stiffness.

    Attributes
    ----------
    cls : CrystalClass
    tables : (P, 6, 6) array
        Stiffness of a unit of each constant, dependent cells included.
    kelvin_root : (P, P) array
        Lower triangle L with |C|² = |Lᵀ x|² in the Kelvin norm, for constants x.
    """

    cls: CrystalClass
    tables: FloatArray
    kelvin_root: FloatArray

    @property
    def size(self) -> int:
        """Number of independent constants P."""
        return len(self.tables)

    @property
    def names(self) -> tuple[str, ...]:
        """Names of the constants, "C11", in order."""
        return tuple(constant_name(i, j) for i, j in self.cls.independent)

    @cached_property
    def triangle(self) -> FloatArray:
        """Matrix (21, P) from the constants to the upper triangle of the table."""
        return read_only(upper_triangle(self.tables).T)

    def table(self, constants: FloatArray) -> FloatArray:
        """Return the stiffness (..., 6, 6) of constants (..., P), GPa."""
        return np.asarray(np.tensordot(constants, self.tables, axes=1))

    def constants(self, table: FloatArray) -> FloatArray:
        """Return the independent cells (..., P) of a stiffness (..., 6, 6)."""
        rows, columns = (list(part) for part in zip(*self.cls.independent, strict=True))
        return np.asarray(table[..., rows, columns])


@lru_cache(maxsize=32)
def basis_of(cls: CrystalClass) -> Basis:
    """Return the coordinates of a crystal class, in its crystal axes."""
    tables = []
    for i, j in cls.independent:
        unit = np.zeros((6, 6))
        unit[i, j] = 1.0
        tables.append(complete(unit, cls))
    flat = stiffness_to_kelvin(np.array(tables)).reshape(len(tables), 36)
    root: FloatArray = np.asarray(np.linalg.cholesky(flat @ flat.T), dtype=np.float64)
    return Basis(cls, read_only(np.array(tables)), read_only(root))


def mean_stiffness(basis: Basis, constants: FloatArray) -> float:
    """Return the mean eigenstiffness, GPa: the trace of the Kelvin form over six."""
    return float(np.trace(stiffness_to_kelvin(basis.table(constants)))) / 6.0


@dataclass(frozen=True, eq=False)
class Survey:
    """Wave normals and the readings along them, ready for many evaluations.

    Attributes
    ----------
    basis : Basis
    density : float
        kg/m³.
    normals : (3, D) array
        Distinct unit wave normals, crystal axes.
    place : (M,) int array
        The normal of each reading.
    """

    basis: Basis
    density: float
    normals: FloatArray
    place: IntArray

    @property
    def count(self) -> int:
        """Number of readings M."""
        return int(self.place.size)

    @cached_property
    def matrices(self) -> FloatArray:
        """Christoffel matrix of a unit of each constant along each normal, (P, 6, D)."""
        operators = christoffel_operator(self.basis.tables)
        return read_only(operators @ pair_products(self.normals))

    @cached_property
    def reading_matrices(self) -> FloatArray:
        """The same at each reading, weighted for the product with p p, (M, 6, P)."""
        weighted = self.matrices[:, :, self.place] * SHEAR_FACTORS[:, None]
        return read_only(weighted.transpose(2, 1, 0))

    @property
    def scale(self) -> float:
        """(m/s)² for one GPa."""
        return _GPA / self.density


def survey_of(
    basis: Basis, density: float, vectors: FloatArray, place: IntArray | None = None
) -> Survey:
    """Return a survey along vectors (3, D) of any length; one reading each unless placed."""
    normals = directions(vectors).n
    where = np.arange(normals.shape[1]) if place is None else place
    return Survey(basis, density, normals, np.asarray(where, dtype=np.intp))


@dataclass(frozen=True, eq=False)
class Waves:
    """The three waves along every normal of a survey, for B crystals.

    Attributes
    ----------
    values : (3 sheets, B, D) array
        ρv², GPa, fastest first; may be negative for a trial crystal.
    polarisation : (3 sheets, 3, B, D) array
    """

    values: FloatArray
    polarisation: FloatArray


def waves(survey: Survey, constants: FloatArray) -> Waves:
    """Return the waves of crystals with constants (B, P) along the normals of a survey."""
    size, crystals = survey.basis.size, len(constants)
    count = survey.normals.shape[1]
    matrices = constants @ survey.matrices.reshape(size, 6 * count)
    columns = matrices.reshape(crystals, 6, count).transpose(1, 0, 2).reshape(6, -1)
    system = christoffel.eigensystem(np.ascontiguousarray(columns))
    return Waves(
        system.values.reshape(3, crystals, count),
        system.vectors.reshape(3, 3, crystals, count),
    )


def wave_speeds(survey: Survey, values: FloatArray) -> FloatArray:
    """Return speeds, m/s, from ρv² (3, ..., D); below a small floor they go on linearly."""
    floor = _FLOOR * np.abs(values).max(axis=0)
    safe = np.maximum(values, floor)
    root = np.sqrt(safe)
    below = np.minimum(values - safe, 0.0)
    return np.asarray(np.sqrt(survey.scale) * (root + below / (2.0 * root)))


def predict(
    survey: Survey, found: Waves, sheets: IntArray
) -> tuple[FloatArray, FloatArray]:
    """Return the speed of each reading and its derivatives.

    Parameters
    ----------
    survey : Survey
    found : Waves
        Of B crystals.
    sheets : (B, M) int array
        Sheet of each reading, 0 for the fastest.

    Returns
    -------
    speed : (B, M) array
        m/s.
    jacobian : (B, M, P) array
        d speed / d constant, m/s per GPa.
    """
    crystal = np.arange(len(sheets))[:, None]
    place = survey.place[None, :]
    own = found.values[sheets, crystal, place]
    largest = np.abs(found.values).max(axis=0)[crystal, place]
    speed_root = np.sqrt(np.maximum(own, _FLOOR * largest))
    p = np.moveaxis(found.polarisation[sheets, :, crystal, place], 2, 0)
    products = pair_products(p)
    slopes = np.matmul(products.transpose(2, 1, 0), survey.reading_matrices)
    factor = np.sqrt(survey.scale) / (2.0 * speed_root)
    jacobian = slopes.transpose(1, 0, 2) * factor[:, :, None]
    speed = wave_speeds(survey, found.values)[sheets, crystal, place]
    return speed, jacobian


def speeds_of(survey: Survey, constants: FloatArray) -> FloatArray:
    """Return all three speeds (3, D), m/s, of one crystal along the normals of a survey."""
    return wave_speeds(survey, waves(survey, constants[None]).values)[:, 0]
