"""Which blank to cut next, and which to cut when nothing has been measured.

To first order a reading adds the outer product of its weighted derivatives to the information
matrix; the covariance follows by a small update (Fedorov 1972, *Theory of Optimal Experiments*;
Sherman-Morrison-Woodbury). What has not been seen at all is taken as known to `PRIOR_PART` of
the mean eigenstiffness, which is next to nothing and keeps the arithmetic finite.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import product
from typing import Literal

import numpy as np

from core.arrays import FloatArray, read_only
from core.directional.medium import Medium
from core.directional.sphere import directions, pair_products, sphere_mesh
from core.study.recovery.evidence import Spectrum, spectrum_of
from core.study.recovery.fit import Fit
from core.study.recovery.model import (
    Basis,
    basis_of,
    mean_stiffness,
    predict,
    survey_of,
    waves,
)
from core.study.recovery.readings import DEFAULT_RELATIVE_SIGMA
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, laue_rotations

Criterion = Literal["determinant", "largest", "functional"]

PRIOR_PART = 1.0
_MESH_LEVEL = 4  # 1,281 directions, about 4 degrees apart
_PLAN_LEVEL = 2  # 81 directions beside the low-index ones: a plan needs no finer choice
_LOW_INDICES = 2
_APART_DEG = 12.0  # between two suggestions
_SWAPS = 12  # passes of the exchange
_GAIN = 1e-9
_MOST_BLANKS = 30
_CONDITION = 0.03  # of the largest singular value: a plan must see everything well


@dataclass(frozen=True, eq=False)
class NextBlank:
    """A direction worth cutting a blank along.

    Attributes
    ----------
    direction : (3,) array
        Unit vector, crystal axes.
    gain : float
        Of the criterion: by what factor the standard uncertainty that counts falls; for the
        determinant the factor by which that of each seen combination falls on average
        (geometric mean).
    std : (P,) array
        Standard uncertainties of the independent constants to expect with the blank, GPa;
        large where a constant would still not be known.
    """

    direction: FloatArray
    gain: float
    std: FloatArray


@dataclass(frozen=True, eq=False)
class Ranking:
    """Candidates in the order of what they add.

    Attributes
    ----------
    candidates : (3, K) array
    gains : (K,) array
        As `NextBlank.gain`, for each candidate.
    best : tuple of NextBlank
        The first few, no two near one another or equal by symmetry.
    """

    candidates: FloatArray
    gains: FloatArray
    best: tuple[NextBlank, ...]


@dataclass(frozen=True, eq=False)
class Plan:
    """A set of blanks that determines every constant.

    Attributes
    ----------
    directions : (3, N) array
        Unit vectors, crystal axes.
    std : (P,) array
        Standard uncertainties to expect of the independent constants, GPa.
    names : tuple of str
    rank : int
    relative_sigma : float
        Of the speeds, as assumed.
    """

    directions: FloatArray
    std: FloatArray
    names: tuple[str, ...]
    rank: int
    relative_sigma: float


@lru_cache(maxsize=4)
def candidate_directions(level: int = _MESH_LEVEL) -> FloatArray:
    """Return directions (3, K) spread over half a sphere, after 49 simple ones; crystal axes.

    The simple ones have components 0, ±1 or ±2 along the axes. A caller who knows the cell
    may put its low-index directions in their place.
    """
    span = range(-_LOW_INDICES, _LOW_INDICES + 1)
    simple = [t for t in product(span, repeat=3) if t > (0, 0, 0) and np.gcd.reduce(t) == 1]
    simple.sort(key=lambda t: sum(x * x for x in t))
    low = np.array(simple, dtype=np.float64).T
    low /= np.linalg.norm(low, axis=0)
    return read_only(np.concatenate([low, sphere_mesh(level).half.n], axis=1))


def rank_next(
    fit: Fit,
    candidates: FloatArray | None = None,
    criterion: Criterion = "determinant",
    functional: FloatArray | None = None,
    sheets: Sequence[int] = (1, 2, 3),
    relative_sigma: float = DEFAULT_RELATIVE_SIGMA,
    count: int = 5,
) -> Ranking:
    """Return where the next blank would tell most.

    Parameters
    ----------
    fit : Fit
        Of the readings so far.
    candidates : (3, K) array
        Wave normals that can be cut, crystal axes; by default simple directions and 1,281
        over the sphere.
    criterion : "determinant", "largest" or "functional"
        What is to fall: the volume of uncertainty, the largest standard uncertainty of any
        constant, or that of one number.
    functional : (21,) array
        Gradient of that number along the upper triangle, as `young_gradient` gives it.
    sheets : sequence of int
        Which waves will be measured.
    relative_sigma : float
        Of the speeds to be measured.
    count : int
        How many to pick out.

    Raises
    ------
    ValueError
        For the functional criterion without a functional.
    """
    if criterion == "functional" and functional is None:
        raise ValueError("the functional criterion needs the gradient of a number")
    basis = basis_of(fit.cls)
    vectors = candidate_directions() if candidates is None else directions(candidates).n
    rows, _speed = _rows_along(
        basis, fit.density, fit.constants, vectors, sheets, relative_sigma
    )
    covariance = _loose_inverse(basis, fit.information, fit.constants)
    update = _Update.of(covariance, rows)
    before = np.sqrt(np.diag(covariance))
    after = np.sqrt(np.maximum(update.variances(), 0.0))
    if criterion == "determinant":
        gains = np.exp(update.log_determinants() / (2 * basis.size))
    elif criterion == "largest":
        gains = before.max() / after.max(axis=1)
    else:
        gradient = np.asarray(functional) @ basis.triangle
        gains = np.sqrt(gradient @ covariance @ gradient / update.variance_of(gradient))
    picked = _spread(vectors, gains, fit.cls, count)
    best = tuple(
        NextBlank(read_only(vectors[:, k]), float(gains[k]), read_only(after[k]))
        for k in picked
    )
    return Ranking(read_only(vectors), read_only(gains), best)


@dataclass(frozen=True, eq=False)
class _Update:
    """What each of K candidates would make of a covariance V.

    With A the rows (S, P) of a candidate, V' = V - V Aᵀ (1 + A V Aᵀ)⁻¹ A V.
    """

    covariance: FloatArray  # (P, P)
    pulled: FloatArray  # (K, S, P) A V
    inner: FloatArray  # (K, S, S) 1 + A V Aᵀ

    @classmethod
    def of(cls, covariance: FloatArray, rows: FloatArray) -> "_Update":
        pulled = rows @ covariance
        inner = np.eye(rows.shape[1]) + pulled @ rows.transpose(0, 2, 1)
        return cls(covariance, pulled, inner)

    def log_determinants(self) -> FloatArray:
        """Return by how much log det V falls, (K,)."""
        return np.asarray(np.linalg.slogdet(self.inner)[1])

    def variances(self) -> FloatArray:
        """Return the new variances of the constants, (K, P)."""
        taken = (self.pulled * np.linalg.solve(self.inner, self.pulled)).sum(axis=1)
        return np.asarray(np.diag(self.covariance) - taken)

    def variance_of(self, gradient: FloatArray) -> FloatArray:
        """Return the new variance of a linear functional of the constants, (K,)."""
        right = self.pulled @ gradient
        taken = (right * np.linalg.solve(self.inner, right[:, :, None])[:, :, 0]).sum(axis=1)
        return np.asarray(gradient @ self.covariance @ gradient - taken)


def _rows_along(
    basis: Basis,
    density: float,
    constants: FloatArray,
    vectors: FloatArray,
    sheets: Sequence[int],
    relative_sigma: float,
) -> tuple[FloatArray, FloatArray]:
    """Return weighted derivatives (K, S, P), 1/GPa, and speeds (K, S) along K directions."""
    count = vectors.shape[1]
    place = np.repeat(np.arange(count), len(sheets))
    survey = survey_of(basis, density, vectors, place)
    chosen = np.tile(np.array(sheets, dtype=np.intp) - 1, count)[None]
    speed, slopes = predict(survey, waves(survey, constants[None]), chosen)
    rows = slopes[0] / (relative_sigma * speed[0])[:, None]
    shape = (count, len(sheets))
    return rows.reshape(*shape, basis.size), speed.reshape(shape)


def _loose_inverse(basis: Basis, information: FloatArray, constants: FloatArray) -> FloatArray:
    """Return the covariance (P, P) with what is not seen known only very loosely."""
    return np.asarray(
        np.linalg.inv(information + _prior(basis, mean_stiffness(basis, constants)))
    )


def _prior(basis: Basis, typical: float) -> FloatArray:
    """Return the information (P, P), 1/GPa², of knowing hardly anything."""
    loose = PRIOR_PART * abs(typical)
    return np.asarray(basis.kelvin_root @ basis.kelvin_root.T / loose**2)


def _spread(
    vectors: FloatArray, gains: FloatArray, cls: CrystalClass, count: int
) -> list[int]:
    """Return the best candidates of which no two are near, or near by symmetry."""
    turns = laue_rotations(cls)
    limit = np.cos(np.radians(_APART_DEG))
    # Rounding must not choose among equals: the first, and so the simplest, wins.
    order = np.argsort(-np.round(gains, 9), kind="stable")
    free = np.ones(gains.size, dtype=bool)
    picked: list[int] = []
    for k in order:
        if free[k]:
            picked.append(int(k))
            images = turns @ vectors[:, k]
            free &= np.abs(images @ vectors).max(axis=0) < limit
        if len(picked) == count:
            break
    return picked


def young_gradient(stiffness: Stiffness, direction: FloatArray) -> FloatArray:
    """Return dE/dC along the upper triangle (21,) for Young's modulus E along a direction.

    E² e_I e_J, twice off the diagonal, with e = S q(n) the strain of a unit pull.
    """
    q = pair_products(directions(direction).n[:, 0])
    strain = stiffness.compliance @ q
    young = 1.0 / float(q @ strain)
    rows, columns = np.triu_indices(6)
    twice = np.where(rows == columns, 1.0, 2.0)
    return np.asarray(young**2 * twice * strain[rows] * strain[columns])


# --- planning from nothing --------------------------------------------------------------------


def plan(
    medium: Medium,
    cls: CrystalClass,
    candidates: FloatArray | None = None,
    sheets: Sequence[int] = (1, 2, 3),
    relative_sigma: float = DEFAULT_RELATIVE_SIGMA,
    largest_std: float | None = None,
) -> Plan | None:
    """Return a smallest set of blanks that determines every constant of a class.

    Parameters
    ----------
    medium : Medium
        Roughly what the crystal is like, in its crystal axes, with a density.
    cls : CrystalClass
    candidates : (3, K) array
        Wave normals that can be cut; by default 49 simple ones and 81 over the sphere.
    sheets : sequence of int
        Which waves will be measured along each.
    relative_sigma : float
        Standard uncertainty expected of the speeds, relative.
    largest_std : float or None
        GPa: blanks are added until no constant is less certain.

    Returns
    -------
    Plan or None
        None where no set of up to thirty blanks from the candidates will do.

    Notes
    -----
    Sets are grown one blank at a time by the determinant of the information and then improved
    by exchanging single blanks (Fedorov 1972). The size starts at the least that counting
    allows: the sum of ρv² over the three sheets is a quadratic form in the normal with six
    coefficients, so beyond six full blanks each adds two numbers; 21 constants need eight.
    """
    if medium.density is None:
        raise ValueError("a plan for wave speeds needs a density")
    basis = basis_of(cls)
    constants = basis.constants(medium.stiffness.voigt)
    vectors = directions(candidates).n if candidates is not None else _simple_ones()
    rows, speed = _rows_along(
        basis, medium.density, constants, vectors, sheets, relative_sigma
    )
    typical = mean_stiffness(basis, constants)
    loose = _prior(basis, typical)
    chosen: list[int] = []
    for size in range(1, min(_MOST_BLANKS, vectors.shape[1]) + 1):
        chosen = _grown(rows, chosen, loose)
        if size < _fewest(basis.size, len(sheets)):
            continue
        chosen = _exchanged(rows, chosen, loose)
        seen = _spectrum(rows[chosen], speed[chosen], basis, typical)
        if not _sees_all(seen, basis.size):
            continue
        std = _expected_std(rows[chosen])
        if largest_std is None or std.max() <= largest_std:
            found = read_only(vectors[:, chosen])
            return Plan(found, std, basis.names, seen.rank, relative_sigma)
    return None


def _simple_ones() -> FloatArray:
    """Return the candidates (3, K) of a plan where none are given."""
    return candidate_directions(_PLAN_LEVEL)


def _expected_std(rows: FloatArray) -> FloatArray:
    """Return the uncertainties, GPa, that weighted rows (blank, sheet, constant) give."""
    information = np.einsum("ksp,ksq->pq", rows, rows)
    return np.asarray(np.sqrt(np.diag(np.linalg.inv(information))))


def _fewest(constants: int, sheets: int) -> int:
    """Return the least number of blanks that counting allows for so many constants."""
    if sheets < 3:
        return -(-constants // sheets)
    return next(n for n in range(1, constants + 1) if min(3 * n, 2 * n + 6) >= constants)


def _grown(rows: FloatArray, chosen: list[int], loose: FloatArray) -> list[int]:
    """Return the set with the candidate that adds most."""
    information = loose + np.einsum("ksp,ksq->pq", rows[chosen], rows[chosen])
    gains = _Update.of(np.linalg.inv(information), rows).log_determinants()
    return [*chosen, int(np.round(gains, 9).argmax())]


def _exchanged(rows: FloatArray, chosen: list[int], loose: FloatArray) -> list[int]:
    """Return the set after exchanging single blanks until none is better replaced."""
    best = list(chosen)
    for _ in range(_SWAPS):
        before = list(best)
        for place in range(len(best)):
            others = best[:place] + best[place + 1 :]
            information = loose + np.einsum("ksp,ksq->pq", rows[others], rows[others])
            gains = _Update.of(np.linalg.inv(information), rows).log_determinants()
            top = int(np.round(gains, 9).argmax())
            if gains[top] > gains[best[place]] + _GAIN:
                best[place] = top
        if best == before:
            break
    return best


def _spectrum(rows: FloatArray, speed: FloatArray, basis: Basis, typical: float) -> Spectrum:
    """Return the singular spectrum of blanks with derivatives (N, S, P) and speeds (N, S)."""
    squared = rows * speed[:, :, None] ** 2
    flat = (-1, basis.size)
    return spectrum_of(rows.reshape(flat), squared.reshape(flat), basis, typical)


def _sees_all(seen: Spectrum, size: int) -> bool:
    """Tell whether everything is seen, and nothing just barely."""
    values = seen.singular_values
    return seen.rank == size and bool(values[-1] > _CONDITION * values[0])
