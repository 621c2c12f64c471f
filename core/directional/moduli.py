"""The elastic moduli in every direction: E, β, G and ν, exact over the transverse direction.

For a direction n, a quantity that still depends on a transverse direction m is a symmetric
form in the plane normal to n: its mean there is c, its deviator has the components h and b in
the tangents t1, t2, and its least and greatest values are c ∓ sqrt(h² + b²). Nothing is
searched and no angle is computed.
"""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from core.arrays import BoolArray, FloatArray
from core.directional.medium import Medium
from core.directional.sphere import Directions, dot, mixed_products, pair_products

PER_TPA = 1e3  # 1/GPa in 1/TPa

# Cosine between n and m from which a pair given as perpendicular is taken for a mistake.
_PERPENDICULAR = 1e-6

# Rows of `Medium.transverse_forms`.
_POISSON, _SHEAR = 0, 1

# Which form the transverse direction belongs to, and whether it is where the form is greatest:
# 1/(4G) is greatest where G is least, and S(n, n, m, m) = -ν/E where ν is least.
_TRANSVERSE = {
    "shear_least": (_SHEAR, True),
    "shear_greatest": (_SHEAR, False),
    "poisson_least": (_POISSON, True),
    "poisson_greatest": (_POISSON, False),
}


@dataclass(frozen=True, eq=False)
class ElasticFields:
    """The elastic quantities of one medium along one set of directions, each computed once.

    Attributes
    ----------
    medium : Medium
    directions : Directions
        In the axes of the medium's stiffness.
    """

    medium: Medium
    directions: Directions

    @cached_property
    def axial(self) -> FloatArray:
        """S_ijkl n_i n_j n_k n_l = 1/E, shape (N,), 1/GPa; any sign for an unstable medium."""
        return self.medium.quartic @ self.directions.quartics

    @cached_property
    def young(self) -> FloatArray:
        """E, shape (N,), GPa."""
        return _reciprocal(self.axial)

    @cached_property
    def linear_compressibility(self) -> FloatArray:
        """S_ijkk n_i n_j, shape (N,), 1/GPa (the public function gives 1/TPa)."""
        return self.medium.compressibility_form @ self.directions.products

    @cached_property
    def shear_extremes(self) -> tuple[FloatArray, FloatArray]:
        """Least and greatest G over m, (N,) each, GPa."""
        mean = (self.medium.trace_form @ self.directions.products - self.axial) / 2
        radius = self._radius[_SHEAR]
        return _reciprocal(4 * (mean + radius)), _reciprocal(4 * (mean - radius))

    @cached_property
    def poisson_extremes(self) -> tuple[FloatArray, FloatArray]:
        """Least and greatest ν over m, (N,) each."""
        mean = (self.linear_compressibility - self.axial) / 2
        radius = self._radius[_POISSON]
        return -self.young * (mean + radius), self.young * (radius - mean)

    def transverse(self, which: str) -> FloatArray:
        """Return the unit m (3, N) of an extreme; see the function of the same name."""
        form, greatest = _TRANSVERSE[which]
        cosine, sine = (part[form] for part in self._half_angles)
        first, second = self.directions.tangents
        along, across = (first, second) if greatest else (second, -first)
        result: FloatArray = cosine * along + sine * across
        return result

    @cached_property
    def _deviators(self) -> tuple[FloatArray, FloatArray]:
        """Deviators h and b of the Poisson and the shear form, (2, N) each, 1/GPa."""
        rows_h, rows_b = self.directions.transverse_rows
        forms = self.medium.transverse_forms
        return forms @ rows_h, forms @ rows_b

    @cached_property
    def _radius(self) -> FloatArray:
        """Half the spread of each form over m, (2, N), 1/GPa."""
        h, b = self._deviators
        return np.sqrt(h * h + b * b)

    @cached_property
    def _half_angles(self) -> tuple[FloatArray, FloatArray]:
        """Cosine and sine, from t1 towards t2, of where each form is greatest, (2, N) each."""
        return half_angle(*self._deviators, self._radius)


def young(medium: Medium, dirs: Directions) -> FloatArray:
    """Return Young's modulus along every direction.

    Parameters
    ----------
    medium : Medium
    dirs : Directions
        N directions in the axes of the medium's stiffness.

    Returns
    -------
    (N,) array
        GPa; NaN where 1/E = S_ijkl n_i n_j n_k n_l is not positive (unstable media only).
    """
    return ElasticFields(medium, dirs).young


def compressibility(medium: Medium, dirs: Directions) -> FloatArray:
    """Return the linear compressibility β = S_ijkk n_i n_j, (N,), 1/TPa; it may be negative."""
    return PER_TPA * ElasticFields(medium, dirs).linear_compressibility


def shear_extremes(medium: Medium, dirs: Directions) -> tuple[FloatArray, FloatArray]:
    """Return the least and the greatest shear modulus over m perpendicular to n.

    1/G = 4 S_ijkl n_i m_j n_k m_l.

    Returns
    -------
    least, greatest : (N,) arrays
        GPa; NaN where that 1/G is not positive (unstable media only).
    """
    return ElasticFields(medium, dirs).shear_extremes


def poisson_extremes(medium: Medium, dirs: Directions) -> tuple[FloatArray, FloatArray]:
    """Return the least and the greatest Poisson's ratio over m perpendicular to the load n.

    ν = -E S_ijkl n_i n_j m_k m_l, NaN where E is undefined.

    Returns
    -------
    least, greatest : (N,) arrays
    """
    return ElasticFields(medium, dirs).poisson_extremes


def transverse(medium: Medium, dirs: Directions, which: str) -> FloatArray:
    """Return the transverse direction at which an extreme over m is reached.

    Parameters
    ----------
    medium : Medium
    dirs : Directions
    which : str
        "shear_least", "shear_greatest", "poisson_least" or "poisson_greatest".

    Returns
    -------
    (3, N) array
        Unit vectors perpendicular to n, in the axes of the medium; m and -m are the same
        answer. Where every m does, the first tangent or, for "greatest", the second. NaN
        where the extreme is undefined.
    """
    if which not in _TRANSVERSE:
        raise ValueError(f"no extreme is called {which!r}; there are {', '.join(_TRANSVERSE)}")
    fields = ElasticFields(medium, dirs)
    extremes = fields.shear_extremes if which.startswith("shear") else fields.poisson_extremes
    value = extremes[0] if which.endswith("least") else extremes[1]
    return np.where(np.isfinite(value), fields.transverse(which), np.nan)


def shear(medium: Medium, n: FloatArray, m: FloatArray) -> FloatArray:
    """Return the shear modulus of given perpendicular unit vectors.

    1/G = 4 S_ijkl n_i m_j n_k m_l.

    Parameters
    ----------
    medium : Medium
    n, m : (3, ...) arrays
        Plane normal and shear direction; exchanging them changes nothing.

    Returns
    -------
    (...) array
        GPa; NaN where 1/G is not positive.
    """
    _require_perpendicular(n, m)
    pair = mixed_products(n, m)
    return _reciprocal(4 * _contract(pair, medium.compliance, pair))


def poisson(medium: Medium, n: FloatArray, m: FloatArray) -> FloatArray:
    """Return Poisson's ratio of given perpendicular unit vectors.

    ν = -E S_ijkl n_i n_j m_k m_l.

    Parameters
    ----------
    medium : Medium
    n, m : (3, ...) arrays
        Direction of the load, and the transverse direction whose strain is read.

    Returns
    -------
    (...) array
        NaN where E is undefined along n.
    """
    _require_perpendicular(n, m)
    loaded, read = pair_products(n), pair_products(m)
    modulus = _reciprocal(_contract(loaded, medium.compliance, loaded))
    return -modulus * _contract(read, medium.compliance, loaded)


def half_angle(
    h: FloatArray, b: FloatArray, radius: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return cosine and sine of the angle at which [[h, b], [b, -h]] is greatest.

    Parameters
    ----------
    h, b : (...) arrays
        Deviator of a symmetric form in a plane.
    radius : (...) array
        sqrt(h² + b²), its greatest value.

    Returns
    -------
    cosine, sine : (...) arrays
        Of the angle from the first axis of the plane; (1, 0) where the deviator vanishes.

    Notes
    -----
    The sum radius + abs(h) never cancels, and no inverse tangent is needed.
    """
    ahead = h >= 0
    larger = radius + np.abs(h)
    cosine, sine = np.where(ahead, larger, b), np.where(ahead, b, larger)
    length = np.sqrt(cosine * cosine + sine * sine)
    vanishing = length == 0
    if vanishing.any():
        cosine[vanishing], sine[vanishing], length[vanishing] = 1.0, 0.0, 1.0
    return cosine / length, sine / length


def _reciprocal(form: FloatArray) -> FloatArray:
    """Return 1/form, NaN where the form is not positive."""
    positive: BoolArray = np.asarray(form > 0)
    if positive.all():
        return np.asarray(1.0 / form)
    undefined = np.full(np.shape(form), np.nan)
    return np.asarray(np.divide(1.0, form, out=undefined, where=positive))


def _contract(left: FloatArray, compliance: FloatArray, right: FloatArray) -> FloatArray:
    """Return left . S . right for tensor components (6, ...) and engineering S.

    The two factors of two of each shear are those that the engineering S already holds.
    """
    result: FloatArray = (left * np.tensordot(compliance, right, axes=1)).sum(axis=0)
    return result


def _require_perpendicular(n: FloatArray, m: FloatArray) -> None:
    """Refuse pairs that are not perpendicular: the formulas would answer another question."""
    if bool(np.any(np.abs(dot(n, m)) > _PERPENDICULAR)):
        raise ValueError("the transverse direction must be perpendicular to the first")
