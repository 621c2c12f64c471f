"""A stiffness with a density, and the operators that every directional kernel starts from."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from core.arrays import FloatArray, read_only
from core.directional.sphere import QUARTIC_EXPONENTS
from core.errors import InputError
from core.tensor.notation import SHEAR_FACTORS, VOIGT_INDEX, VOIGT_PAIRS, voigt_to_tensor
from core.tensor.stiffness import Stiffness


@dataclass(frozen=True, eq=False)
class Medium:
    """What waves and loads meet: the constants in one Cartesian frame, and the density.

    Attributes
    ----------
    stiffness : Stiffness
        In GPa. Its axes are the axes of every direction used with this medium.
    density : float or None
        In kg/m³; None where only elastic quantities are wanted.

    Notes
    -----
    A stiffness without an inverse has NaN for all that comes of the compliance; everything
    about waves still works.
    """

    stiffness: Stiffness
    density: float | None = None

    def __post_init__(self) -> None:
        if self.density is not None and not 0 < self.density < np.inf:
            raise ValueError(f"a density must be positive and finite, not {self.density}")

    def rotated(self, rotation: FloatArray) -> "Medium":
        """Return the same medium in other axes: v_new = rotation @ v_old."""
        return Medium(self.stiffness.rotate(rotation), self.density)

    @cached_property
    def compliance(self) -> FloatArray:
        """S with engineering shears, (6, 6), 1/GPa; NaN where the stiffness has no inverse."""
        try:
            return self.stiffness.compliance
        except InputError:
            return read_only(np.full((6, 6), np.nan))

    @cached_property
    def christoffel(self) -> FloatArray:
        """`christoffel_operator` of the stiffness, (6, 6), GPa."""
        return read_only(christoffel_operator(self.stiffness.voigt))

    @cached_property
    def compliance_christoffel(self) -> FloatArray:
        """`christoffel_operator` of the compliance, (6, 6), 1/GPa.

        At q(m) it gives the form S_ijkl m_j m_l, whose value along n is S_ijkl n_i m_j n_k m_l.
        """
        return read_only(christoffel_operator(self._compliance_components))

    @cached_property
    def strain_operator(self) -> FloatArray:
        """Takes q(n) to the tensor strains S_ijkl n_k n_l of a unit pull along n; (6, 6)."""
        return read_only(self.compliance / SHEAR_FACTORS[:, None])

    @cached_property
    def quartic(self) -> FloatArray:
        """Coefficients (15,) of S_ijkl n_i n_j n_k n_l over `Directions.quartics`, 1/GPa."""
        return read_only(_QUARTIC_OF_VOIGT @ self.compliance.ravel())

    @cached_property
    def compressibility_form(self) -> FloatArray:
        """Coefficients (6,) of S_ijkk n_i n_j over q(n), 1/GPa."""
        return read_only(self.compliance[:, :3].sum(axis=1))

    @cached_property
    def compressibility_matrix(self) -> FloatArray:
        """The symmetric matrix S_ijkk, (3, 3), 1/GPa; its eigenvalues are the extremes of β."""
        return read_only((self.compressibility_form / SHEAR_FACTORS)[VOIGT_INDEX])

    @cached_property
    def trace_form(self) -> FloatArray:
        """Coefficients (6,) of S_ijkj n_i n_k over q(n), 1/GPa."""
        operator = self.compliance_christoffel
        return read_only(operator[0] + operator[1] + operator[2])

    @cached_property
    def asymmetric_part(self) -> FloatArray:
        """R of the split of S, tensor components (6,) in Voigt order, 1/GPa.

        S is a totally symmetric tensor (the fifteen of `quartic`) plus a rest that six numbers
        hold, R_pq = ε_pik ε_qjl S_ijkl / 3. For perpendicular unit vectors n, m and l = n × m,
        with s = S^sym(n, n, m, m): S_nnmm = s + R(l, l) and S_nmnm = s - R(l, l)/2.
        """
        components = voigt_to_tensor(self._compliance_components).ravel()
        return read_only(_ASYMMETRIC_OF_TENSOR @ components)

    @cached_property
    def transverse_forms(self) -> FloatArray:
        """Coefficients (2, 21) over `Directions.transverse_rows`, 1/GPa.

        Row 0 is the form S(n, n, m, m) of Poisson's ratio, row 1 the form S(n, m, n, m) of the
        shear modulus, both for m perpendicular to n. In that plane R(l, l) = tr - R(m, m), so
        the deviator of R enters with its sign turned.
        """
        rest = self.asymmetric_part
        return read_only(
            np.stack([np.append(self.quartic, -rest), np.append(self.quartic, rest / 2)])
        )

    @cached_property
    def _compliance_components(self) -> FloatArray:
        """S as tensor components in a 6x6, without engineering factors."""
        result: FloatArray = self.compliance / np.outer(SHEAR_FACTORS, SHEAR_FACTORS)
        return result


def christoffel_operator(components: FloatArray) -> FloatArray:
    """Return K with A_ijkl n_j n_l = K @ q(n), for tensor components A of shape (..., 6, 6).

    Rows are the pairs (i, k) in Voigt order, columns the products xx, yy, zz, yz, xz, xy.
    Because A_ijkl = A_jilk, the same operator on q(p) gives A_ijkl p_i p_k, rows (j, l): the
    form behind group velocity and every gradient.
    """
    flat = np.reshape(components, (*np.shape(components)[:-2], 36))
    result: FloatArray = flat[..., _KEPT] + _MIXED * flat[..., _SWAPPED]
    return result


def _christoffel_places() -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return for each (ik, jl) the flat places of A_ijkl and A_ilkj, and whether j is not l."""
    kept, swapped, mixed = np.zeros((3, 6, 6))
    for row, (i, k) in enumerate(VOIGT_PAIRS):
        for column, (j, m) in enumerate(VOIGT_PAIRS):
            kept[row, column] = 6 * VOIGT_INDEX[i, j] + VOIGT_INDEX[k, m]
            swapped[row, column] = 6 * VOIGT_INDEX[i, m] + VOIGT_INDEX[k, j]
            mixed[row, column] = float(j != m)
    return kept, swapped, mixed


def _quartic_of_voigt() -> FloatArray:
    """Return the matrix (15, 36) from a flattened engineering 6x6 to quartic coefficients."""
    matrix = np.zeros((len(QUARTIC_EXPONENTS), 36))
    for row, first in enumerate(VOIGT_PAIRS):
        for column, second in enumerate(VOIGT_PAIRS):
            letters = first + second
            exponents = (letters.count(0), letters.count(1), letters.count(2))
            matrix[QUARTIC_EXPONENTS.index(exponents), 6 * row + column] += 1.0
    return matrix


def _asymmetric_of_tensor() -> FloatArray:
    """Return the matrix (6, 81) of R_pq = ε_pik ε_qjl A_ijkl / 3, rows pq in Voigt order."""
    alternating = np.zeros((3, 3, 3))
    for i, j, k in ((0, 1, 2), (1, 2, 0), (2, 0, 1)):
        alternating[i, j, k], alternating[i, k, j] = 1.0, -1.0
    full = np.einsum("pik,qjl->pqijkl", alternating, alternating) / 3.0
    return np.stack([full[p, q].ravel() for p, q in VOIGT_PAIRS])


_places = _christoffel_places()
_KEPT, _SWAPPED, _MIXED = _places[0].astype(np.intp), _places[1].astype(np.intp), _places[2]
_QUARTIC_OF_VOIGT = _quartic_of_voigt()
_ASYMMETRIC_OF_TENSOR = _asymmetric_of_tensor()
