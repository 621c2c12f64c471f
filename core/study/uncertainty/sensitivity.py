"""How much each directional quantity moves with the constants, in every direction at once.

For the moduli and the phase speeds the slopes have one form: a small change δC of the stiffness
changes the quantity by weight · u δC v, with u and v strains (6, N) in engineering shears. For
Young's modulus they are the strain under a pull along n, for a wave the strain that it makes.
That is exact to first order, also where the transverse direction of a modulus is itself chosen
as the best, because at the best it does not matter where it moves. The other quantities are
differenced by `propagation`, save those of `ray_sensitivity`.

Where two sheets of waves meet, or a modulus is the same for all transverse directions, errors
may split what was one value, and no slope exists. The uncertainty there is the root mean square
over the polarisations (transverse directions) that share the value: the same in all axes, and
the plain one where the errors split nothing.
"""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional import moduli, waves
from core.directional.medium import Medium
from core.directional.quantities import quantity
from core.directional.sphere import Directions, directions, mixed_products
from core.study.uncertainty.covariance import TWICE
from core.study.uncertainty.propagation import gradient, propagate
from core.study.uncertainty.ray_sensitivity import (
    GPA_TO_SQUARE_SPEED,
    RAY_KEYS,
    ray_responses,
    wave_strain,
)

_BLOCK = 1024  # directions whose intermediate results stay in the second-level cache
_EQUAL = 1e-9  # of a modulus: extremes over m that differ by less are one
_LIFTED = 1e-6  # of the uncertainty: errors that split two sheets by less do not split them
_PRESSURE = np.array([1.0, 1.0, 1.0, 0.0, 0.0, 0.0])


_memory = threading.local()  # every thread works in blocks of its own


def _scratch(errors: int, directions: int) -> tuple[FloatArray, FloatArray]:
    """Return (21, n) and (r, n) to work in; this thread's next call reuses them.

    Fresh blocks of this size would cost more in memory pages than the sums done in them.
    """
    buffer = getattr(_memory, "buffer", None)
    if buffer is None:
        buffer = _memory.buffer = np.empty((2, 21 * _BLOCK))
    products, responses = buffer
    return (
        products[: 21 * directions].reshape(21, directions),
        responses[: errors * directions].reshape(errors, directions),
    )


@dataclass(frozen=True, eq=False)
class Form:
    """One slope in N directions: δX = weight · u δC v.

    Attributes
    ----------
    weight : ndarray, shape (N,)
    u, v : ndarray, shape (6, N)
        Strains with engineering shears, in the axes of the medium.
    """

    weight: FloatArray
    u: FloatArray
    v: FloatArray

    @property
    def slopes(self) -> FloatArray:
        """By each of the 21 constants, (21, N)."""
        return TWICE[:, None] * self.weight * self._products()

    def responses(self, factor: FloatArray) -> FloatArray:
        """Return the change caused by each column of a factor (21, r), shape (r, N)."""
        response = (TWICE[:, None] * factor).T @ self._products()
        response *= self.weight
        return response

    def variance(self, factor: FloatArray) -> FloatArray:
        """Return the sum of the squared `responses`, (N,)."""
        pull = (TWICE[:, None] * factor).T.copy()
        squares = np.empty(self.weight.size)
        for start in range(0, squares.size, _BLOCK):
            part = slice(start, start + _BLOCK)
            products, response = _scratch(len(pull), squares[part].size)
            np.dot(pull, self._products(part, products), out=response)
            np.einsum("kn,kn->n", response, response, out=squares[part])
        squares *= self.weight
        squares *= self.weight
        return squares

    def _products(
        self, part: slice = slice(None), out: FloatArray | None = None
    ) -> FloatArray:
        """Return the symmetric part of u vᵀ along the upper triangle, (21, N), of a part."""
        u, half = self.u[:, part], 0.5 * self.v[:, part]
        products, end = np.empty((21, u.shape[1])) if out is None else out, 0
        for i in range(6):
            start, end = end, end + 6 - i
            row = products[start:end]
            if self.u is self.v:
                np.multiply(u[i], u[i:], out=row)
            else:
                np.multiply(u[i], half[i:], out=row)
                row += half[i] * u[i:]
        return products


@dataclass(frozen=True, eq=False)
class _Cluster:
    """Sheets that share a value in some directions.

    Attributes
    ----------
    sheets : tuple of int
        Those of the quantity that are concerned.
    columns : ndarray of int, shape (n,)
    forms : d rows of d Form
        The slopes of the d x d symmetric form whose d equal eigenvalues the value is.
    """

    sheets: tuple[int, ...]
    columns: IntArray
    forms: tuple[tuple[Form, ...], ...]

    @property
    def mean_slopes(self) -> FloatArray:
        """Slopes of the mean of the eigenvalues, (21, n)."""
        diagonal = [row[k].slopes for k, row in enumerate(self.forms)]
        return np.asarray(sum(diagonal) / len(diagonal))

    def responses(self, factor: FloatArray) -> FloatArray:
        """Return the change of the form by each column of a factor, (d, d, r, n)."""
        return np.array([[form.responses(factor) for form in row] for row in self.forms])


@dataclass(frozen=True, eq=False)
class _Slopes:
    """All about the slopes of one quantity: a form for each sheet, and where they fail."""

    forms: tuple[Form, ...]
    clusters: tuple[_Cluster, ...] = ()

    def gradients(self) -> FloatArray:
        """Return the slopes by the 21 constants, (sheets, 21, N)."""
        slopes = np.stack([form.slopes for form in self.forms])
        for cluster in self.clusters:
            for sheet in cluster.sheets:
                slopes[sheet][:, cluster.columns] = cluster.mean_slopes
        return slopes

    def deviation(self, factor: FloatArray) -> FloatArray:
        """Return the standard uncertainty, (sheets, N)."""
        variance: FloatArray = np.stack([form.variance(factor) for form in self.forms])
        for cluster in self.clusters:
            shared = mean_square(cluster.responses(factor))
            for sheet in cluster.sheets:
                variance[sheet, cluster.columns] = shared
        return np.asarray(np.sqrt(variance))


def mean_square(responses: FloatArray) -> FloatArray:
    """Return the mean over unit vectors x of Σ (xᵀ M x)², summed over r errors.

    Parameters
    ----------
    responses : ndarray, shape (d, d, r, ...)
        The symmetric M of each error.

    Returns
    -------
    ndarray, shape (...)
        Σ [(tr M)² + 2 tr M²] / (d (d + 2)), from the isotropic mean of x x x x.
    """
    size = len(responses)
    trace = np.trace(responses)
    squares = (responses * responses).sum(axis=(0, 1))
    mean = (trace * trace + 2 * squares) / (size * (size + 2))
    return np.asarray(mean.sum(axis=0))


# --- what is offered ------------------------------------------------------------------------


def deviation(
    key: str, medium: Medium, dirs: Directions, factor: FloatArray
) -> FloatArray:
    """Return the standard uncertainty of a quantity in many directions, to first order.

    Parameters
    ----------
    key : str
        A key of `core.directional.quantities.QUANTITIES`.
    medium : Medium
    dirs : Directions
        In the axes of the medium.
    factor : ndarray, shape (21, r)
        L, GPa, in the axes of the medium; see `core.study.uncertainty.covariance.factor_of`.

    Returns
    -------
    ndarray, shape (sheets, N)
        In the unit of the quantity. NaN where the quantity is undefined, and, for what depends
        on a polarisation, where two sheets meet that the errors would part.

    Raises
    ------
    InputError
        For an unknown quantity.
    ValueError
        For a wave quantity of a medium without density.
    """
    asked = quantity(key)
    if key in _ANALYTIC:
        return _ANALYTIC[key](medium, dirs).deviation(factor)
    if key in RAY_KEYS:
        found, rest = _ray_deviation(key, medium, dirs, factor)
    else:
        found, rest = np.empty((asked.sheets, dirs.count)), np.arange(dirs.count)
    if rest.size:
        others = directions(dirs.n[:, rest])
        found[:, rest] = propagate(lambda near: asked.values(near, others), medium, factor)
        found[_parted(medium, dirs, factor)] = np.nan
    return found


def _ray_deviation(
    key: str, medium: Medium, dirs: Directions, factor: FloatArray
) -> tuple[FloatArray, IntArray]:
    """Return the standard uncertainty by formula, and the directions where it has none."""
    responses, irregular = ray_responses(key, medium, dirs, factor)
    deviations = np.sqrt((responses**2).sum(axis=1))
    return deviations, np.flatnonzero(irregular.any(axis=0))


def gradients(key: str, medium: Medium, dirs: Directions) -> FloatArray:
    """Return the slopes of a quantity by the 21 constants in many directions.

    Parameters
    ----------
    key, medium, dirs
        As for `deviation`.

    Returns
    -------
    ndarray, shape (sheets, 21, N)
        Unit of the quantity per GPa. Where sheets meet, those of their mean for the speeds and
        without meaning for what depends on a polarisation.
    """
    asked = quantity(key)
    if key in _ANALYTIC:
        return _ANALYTIC[key](medium, dirs).gradients()
    if key in RAY_KEYS:
        return ray_responses(key, medium, dirs, np.eye(21))[0]
    slopes: FloatArray = gradient(lambda near: asked.values(near, dirs), medium)
    return np.asarray(np.moveaxis(slopes, -1, 1))


def young_deviation(medium: Medium, dirs: Directions, factor: FloatArray) -> FloatArray:
    """Return the standard uncertainty of Young's modulus, (N,), GPa; as `deviation`."""
    return np.asarray(_young(medium, dirs).deviation(factor)[0])


def speed_deviation(medium: Medium, dirs: Directions, factor: FloatArray) -> FloatArray:
    """Return the standard uncertainty of the phase speeds, (3, N), km/s; as `deviation`."""
    return _phase(medium, dirs).deviation(factor)


# --- moduli ---------------------------------------------------------------------------------


def young_form(medium: Medium, dirs: Directions) -> Form:
    """Return the slope of E: δE = E² e δC e, e the strain under a unit pull along n; GPa."""
    strain = medium.compliance @ dirs.products
    return Form(moduli.young(medium, dirs) ** 2, strain, strain)


def compressibility_form(medium: Medium, dirs: Directions) -> Form:
    """Return the slope of β: δβ = −e δC e₀, e₀ the strain under a unit pressure; 1/TPa."""
    squeezed = (medium.compliance @ _PRESSURE)[:, None]
    strain = medium.compliance @ dirs.products
    weight = np.full(dirs.count, -moduli.PER_TPA)
    return Form(weight, strain, np.broadcast_to(squeezed, strain.shape))


def shear_form(
    medium: Medium, n: FloatArray, m: FloatArray, other: FloatArray | None = None
) -> Form:
    """Return the slope of G for perpendicular unit vectors n and m, (3, N) each; GPa.

    δG = 4 G² a δC a with a the strain under the shear stress (n mᵀ + m nᵀ)/2. With `other`
    instead of the second m it is the mixed slope of the form over transverse directions.
    """
    strain = medium.compliance @ mixed_products(n, m)
    second = strain if other is None else medium.compliance @ mixed_products(n, other)
    return Form(4 * moduli.shear(medium, n, m) ** 2, strain, second)


def poisson_form(
    medium: Medium, n: FloatArray, m: FloatArray, other: FloatArray | None = None
) -> Form:
    """Return the slope of ν for a pull along n and the transverse direction m, (3, N) each.

    δν = E e δC (e_m + ν e), e and e_m the strains under unit pulls along n and m. With `other`
    it is the mixed slope, δν = E e δC e_ab with the strain under the stress (m oᵀ + o mᵀ)/2.
    """
    strain = medium.compliance @ mixed_products(n, n)
    young = 1.0 / (mixed_products(n, n) * strain).sum(axis=0)
    across = medium.compliance @ mixed_products(m, m if other is None else other)
    if other is None:
        across += moduli.poisson(medium, n, m) * strain
    return Form(young, strain, across)


_FormOf = Callable[[Medium, FloatArray, FloatArray, FloatArray | None], Form]


def _young(medium: Medium, dirs: Directions) -> _Slopes:
    return _Slopes((young_form(medium, dirs),))


def _compressibility(medium: Medium, dirs: Directions) -> _Slopes:
    return _Slopes((compressibility_form(medium, dirs),))


def _transverse(form_of: _FormOf, which: str) -> Callable[[Medium, Directions], _Slopes]:
    """Return the slopes of an extreme over transverse directions, "shear_least" and so on."""
    modulus, end = which.split("_")
    opposite = f"{modulus}_{'greatest' if end == 'least' else 'least'}"

    def slopes(medium: Medium, dirs: Directions) -> _Slopes:
        value, spread = (quantity(key).values(medium, dirs)[0] for key in (which, opposite))
        m = moduli.transverse(medium, dirs, which)
        with np.errstate(invalid="ignore"):
            level = np.abs(value - spread) <= _EQUAL * np.maximum(np.abs(value), _EQUAL)
        columns = np.flatnonzero(level)
        n, first = dirs.n[:, columns], m[:, columns]
        second = np.cross(n, first, axis=0)
        mixed = form_of(medium, n, first, second)
        cluster = _Cluster((0,), columns, (
            (form_of(medium, n, first, None), mixed),
            (mixed, form_of(medium, n, second, None)),
        ))  # fmt: skip
        return _Slopes((_defined(form_of, medium, dirs.n, m),), (cluster,) * bool(columns.size))

    return slopes


def _defined(form_of: _FormOf, medium: Medium, n: FloatArray, m: FloatArray) -> Form:
    """Return the slopes for given pairs, NaN where m is."""
    known, count = np.asarray(np.isfinite(m).all(axis=0)), n.shape[1]
    if known.all():
        return form_of(medium, n, m, None)
    there = form_of(medium, n[:, known], m[:, known], None)
    weight, u, v = np.full(count, np.nan), np.zeros((6, count)), np.zeros((6, count))
    weight[known], u[:, known], v[:, known] = there.weight, there.u, there.v
    return Form(weight, u, v)


# --- waves ----------------------------------------------------------------------------------


def _phase(medium: Medium, dirs: Directions) -> _Slopes:
    """Return the slopes of v: δv = (e δC e) / (2 ρ v), e the strain of a unit wave; km/s."""
    found = waves.modes(medium, dirs)
    weights = GPA_TO_SQUARE_SPEED / (2 * float(medium.density or np.nan)) / found.speed
    return _wave_slopes(found, weights, dirs)


def _slowness(medium: Medium, dirs: Directions) -> _Slopes:
    """Return the slopes of 1/v: those of v over −v²; s/km."""
    found = waves.modes(medium, dirs)
    weights = -GPA_TO_SQUARE_SPEED / (2 * float(medium.density or np.nan)) / found.speed**3
    return _wave_slopes(found, weights, dirs)


def _wave_slopes(found: waves.Modes, weights: FloatArray, dirs: Directions) -> _Slopes:
    strains = [wave_strain(p, dirs.n) for p in found.polarisation]
    forms = [Form(weight, e, e) for weight, e in zip(weights, strains, strict=True)]
    return _Slopes(tuple(forms), tuple(_clusters(found.degenerate, weights, strains)))


def _clusters(
    degenerate: BoolArray, weights: FloatArray, strains: list[FloatArray]
) -> list[_Cluster]:
    """Return the sheets that share a speed, by directions."""
    upper, middle, lower = degenerate
    found = []
    for sheets, meet in (
        ((0, 1), upper & ~lower),
        ((1, 2), lower & ~upper),
        ((0, 1, 2), upper & middle & lower),
    ):
        columns = np.flatnonzero(meet)
        if columns.size:
            weight = weights[sheets[0], columns]
            each = [strains[sheet][:, columns] for sheet in sheets]
            forms = tuple(tuple(Form(weight, a, b) for b in each) for a in each)
            found.append(_Cluster(sheets, columns, forms))
    return found


def _parted(medium: Medium, dirs: Directions, factor: FloatArray) -> BoolArray:
    """Return where sheets meet that the errors would part, (3, N)."""
    slopes = _phase(medium, dirs)
    parted = np.zeros((3, dirs.count), dtype=bool)
    for cluster in slopes.clusters:
        responses = cluster.responses(factor)
        size = len(responses)
        squares = (responses * responses).sum(axis=(0, 1, 2))
        level = (np.trace(responses) ** 2).sum(axis=0) / size
        split = squares - level > _LIFTED * squares
        for sheet in cluster.sheets:
            parted[sheet, cluster.columns] = split
    return parted


_ANALYTIC: dict[str, Callable[[Medium, Directions], _Slopes]] = {
    "young": _young,
    "compressibility": _compressibility,
    "shear_least": _transverse(shear_form, "shear_least"),
    "shear_greatest": _transverse(shear_form, "shear_greatest"),
    "poisson_least": _transverse(poisson_form, "poisson_least"),
    "poisson_greatest": _transverse(poisson_form, "poisson_greatest"),
    "slowness": _slowness,
    "phase": _phase,
}
"""Quantities whose slopes have a formula."""
