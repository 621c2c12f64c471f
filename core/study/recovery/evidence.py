"""What readings say about the constants and about one another, to first order around a fit.

All rests on the weighted Jacobian J, d residual / d constant. In the Kelvin norm a combination
of constants of unit length has the standard uncertainty 1/s, with s its singular value. It
counts as *seen* when all of this holds:

- 1/s is below the mean eigenstiffness: what is less certain is not known better than from
  knowing that it is a crystal at all;
- its singular value in the derivatives of ρv² is not lost under the largest (`LOST`), where
  density, cut and model would have to be better than any are;
- 1/s is below a tenth of the mean eigenstiffness, or the geometry sees it well (`FAINT`).
"""

from dataclasses import dataclass

import numpy as np
from scipy.linalg import qr, solve_triangular

from core.arrays import FloatArray
from core.numbers import MINUS
from core.study.recovery.model import Basis
from core.tensor.notation import stiffness_to_kelvin

LOST, FAINT = 2e-3, 0.02
"""Parts of the largest singular value of the derivatives of ρv²."""

_HOPELESS, _DOUBTFUL = 1.0, 0.1  # of the mean eigenstiffness

_DUST = 1e-3  # parts of a combination, relative to its largest, that are left out
_WORTH_SAYING = 0.02  # likewise, in words
_MOST_PARTS = 6
_TOUCHED = 0.03  # share of a constant in what is not seen, beyond which it is not known
_DRAWS = 4000
_NO_FREEDOM = 1e-9  # 1 - leverage of a reading that nothing checks


@dataclass(frozen=True)
class Combination:
    """Constants that may change together without any reading changing.

    Attributes
    ----------
    parts : tuple of (str, float)
        Name, "C14", and part of each constant; the largest part is 1.
    """

    parts: tuple[tuple[str, float], ...]

    @property
    def text(self) -> str:
        """The combination for people: "C14 + 0.3 C56"; a long one keeps its largest parts."""
        said = [part for part in self.parts if abs(part[1]) >= _WORTH_SAYING]
        largest = sorted(said, key=lambda part: -abs(part[1]))[:_MOST_PARTS]
        words = ""
        for name, part in (part for part in said if part in largest):
            sign = f" {MINUS if part < 0 else '+'} " if words else (MINUS if part < 0 else "")
            size = "" if abs(abs(part) - 1.0) < 5e-3 else f"{abs(part):.2g} "
            words += f"{sign}{size}{name}"
        rest = len(said) - len(largest)
        return f"{words} and smaller parts of {rest} more" if rest else words


@dataclass(frozen=True, eq=False)
class Spectrum:
    """How well each combination of constants is seen.

    Attributes
    ----------
    singular_values : (P,) array
        Of the weighted Jacobian in the Kelvin norm, 1/GPa, descending: 1/s is the standard
        uncertainty of the combination.
    rank : int
        How many are seen.
    seen, unseen : (P, rank) and (P, P - rank) arrays
        Columns: changes of the constants, of unit Kelvin norm.
    """

    singular_values: FloatArray
    rank: int
    seen: FloatArray
    unseen: FloatArray


def spectrum_of(
    jacobian: FloatArray, squared: FloatArray, basis: Basis, typical: float
) -> Spectrum:
    """Return the singular spectrum of a weighted Jacobian.

    Parameters
    ----------
    jacobian : (M, P) array
        d residual / d constant, 1/GPa.
    squared : (M, P) array
        Derivatives of ρv² in any unit: the floor under the largest singular value must depend
        neither on how unequal the uncertainties are nor on how slow the slowest wave is.
    basis : Basis
    typical : float
        Mean eigenstiffness, GPa.
    """
    size = basis.size
    few = len(jacobian) < size  # the whole of the right side is wanted, of the left nothing
    _left, values, right = np.linalg.svd(_to_kelvin(jacobian, basis), full_matrices=few)
    singular = np.zeros(size)
    singular[: values.size] = values
    plain = np.linalg.svd(_to_kelvin(squared, basis), compute_uv=False)
    geometry = np.zeros(size)
    geometry[: plain.size] = plain / plain[0]
    known = singular * typical
    seen = (known > 1.0 / _HOPELESS) & (geometry > LOST)
    seen &= (known > 1.0 / _DOUBTFUL) | (geometry > FAINT)
    rank = int(np.cumprod(seen).sum())
    changes = solve_triangular(basis.kelvin_root, right.T, lower=True, trans="T")
    return Spectrum(singular, rank, changes[:, :rank], changes[:, rank:])


def _to_kelvin(jacobian: FloatArray, basis: Basis) -> FloatArray:
    """Return derivatives along coordinates y = Lᵀ x, in which |C| is the length of y."""
    turned: FloatArray = solve_triangular(basis.kelvin_root, jacobian.T, lower=True).T
    return turned


def covariance_of(spectrum: Spectrum) -> FloatArray:
    """Return the covariance (P, P) of the constants within what is seen, GPa²."""
    scaled = spectrum.seen / spectrum.singular_values[: spectrum.rank]
    return np.asarray(scaled @ scaled.T)


def touched_by(changes: FloatArray, triangle: FloatArray, basis: Basis) -> FloatArray:
    """Return the share (21,) of each cell of the table in what is not seen, 0 to 1.

    It is how much of the cell's own direction lies in the unseen changes (P, k).
    """
    if not changes.shape[1]:
        return np.zeros(len(triangle))
    own = np.linalg.norm(solve_triangular(basis.kelvin_root, triangle.T, lower=True), axis=0)
    share = np.linalg.norm(triangle @ changes, axis=1)
    return np.asarray(np.divide(share, own, out=np.zeros_like(share), where=own > 0))


def is_touched(share: FloatArray) -> FloatArray:
    """Tell which cells are not known because of what is not seen."""
    return np.asarray(share > _TOUCHED)


def combinations_of(unseen: FloatArray, names: tuple[str, ...]) -> tuple[Combination, ...]:
    """Return what is not seen as combinations with as few constants as can be.

    Each unseen change gets a constant of its own (chosen by pivoting) that the others lack.
    """
    count = unseen.shape[1]
    if not count:
        return ()
    _q, _r, order = qr(unseen.T, pivoting=True, mode="economic")
    own = np.sort(order[:count])
    reduced = unseen @ np.linalg.inv(unseen[own])
    reduced /= np.abs(reduced).max(axis=0)
    return tuple(
        Combination(
            tuple(
                (name, float(part))
                for name, part in zip(names, column * np.sign(column[own[k]]), strict=True)
                if abs(part) > _DUST
            )
        )
        for k, column in enumerate(reduced.T)
    )


# --- readings -------------------------------------------------------------------------------


@dataclass(frozen=True, eq=False)
class Diagnostics:
    """How each reading stands to the fit.

    Attributes
    ----------
    leverage : (M,) array
        How much of its own fitted value a reading decides, 0 to 1.
    studentised : (M,) array
        Residual over its own standard uncertainty, with the scatter of the other readings
        where that exceeds their σ; 0 where nothing checks the reading.
    shifts : (M, P) array
        Change of each constant if the reading were left out, GPa.
    influence : (M,) array
        Mean square of that change in units of the uncertainties (Cook 1977).
    """

    leverage: FloatArray
    studentised: FloatArray
    shifts: FloatArray
    influence: FloatArray


def diagnose(
    residuals: FloatArray, jacobian: FloatArray, weights: FloatArray, spectrum: Spectrum
) -> Diagnostics:
    """Return leverage, studentised residuals and leave-one-out changes of M readings.

    `weights` (M,) are those of a robust fit, else ones; `spectrum` is that of the Jacobian
    with its rows multiplied by their roots.

    With h the leverage, leaving out reading i changes the constants by
    V Jᵢ rᵢ/(1 - hᵢ), V the covariance (Belsley, Kuh & Welsch 1980, *Regression Diagnostics*,
    chapter 2). The sign is that of the constants: new minus old.
    """
    pulled = jacobian @ covariance_of(spectrum) * weights[:, None]
    leverage = np.clip((pulled * jacobian).sum(axis=1), 0.0, 1.0)
    free = 1.0 - leverage
    checked = free > _NO_FREEDOM
    safe = np.where(checked, free, 1.0)
    alone = np.where(checked, residuals**2 / safe, 0.0)
    dof = len(residuals) - spectrum.rank
    rest = np.maximum((weights * residuals**2).sum() - weights * alone, 0.0) / max(dof - 1, 1)
    scatter = np.sqrt(np.maximum(rest, 1.0)) if dof > 1 else np.ones_like(rest)
    studentised = np.where(checked, residuals / np.sqrt(safe) / scatter, 0.0)
    shifts = np.where(checked, residuals / safe, 0.0)[:, None] * pulled
    influence = np.where(checked, weights * alone * leverage / safe, 0.0)
    return Diagnostics(leverage, studentised, shifts, influence / max(spectrum.rank, 1))


def stability_probability(
    constants: FloatArray, covariance: FloatArray, basis: Basis, seed: int = 0
) -> float:
    """Return the probability that a crystal with these constants (P,) is stable.

    The part of 4,000 normal draws with six positive eigenstiffnesses.
    """
    values, vectors = np.linalg.eigh(covariance)
    root = vectors * np.sqrt(np.maximum(values, 0.0))
    draws = np.random.default_rng(seed).standard_normal((_DRAWS, len(constants)))
    tables = stiffness_to_kelvin(basis.table(constants + draws @ root.T))
    return float((np.linalg.eigvalsh(tables)[:, 0] > 0.0).mean())
