"""Monte Carlo: what becomes of numbers when the constants are drawn anew from their errors.

Linear propagation errs where errors are large, where two sheets of waves nearly meet, and near
instability; here nothing is linearised. A drawn table that is unstable is no crystal, and is
counted but not used. Everything is reproducible: a seed and a count give the same draws.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray
from core.directional import christoffel
from core.directional.medium import Medium, christoffel_operator
from core.directional.sphere import Directions
from core.study.uncertainty.covariance import CELLS, TWICE, factor_of
from core.study.uncertainty.deviations import eigenstiffness_deviation
from core.study.uncertainty.propagation import Function
from core.study.uncertainty.ray_sensitivity import GPA_TO_SQUARE_SPEED
from core.study.uncertainty.sensitivity import speed_deviation, young_deviation
from core.task import Ticker
from core.tensor.notation import from_upper_triangle, stiffness_to_kelvin, upper_triangle
from core.tensor.stiffness import Stiffness

COUNT = 1000
STABILITY_COUNT = 4000
SEED = 20_000
QUANTILES = (0.025, 0.975)
NOTABLE = 0.2  # of the linear standard uncertainty: a difference worth saying

_BELIEVED = 1e-9  # of the mean: a smaller uncertainty is rounding


@dataclass(frozen=True, eq=False)
class Spread:
    """How one quantity scatters over the stable draws.

    Attributes
    ----------
    mean, deviation : ndarray
        In the unit of the quantity. NaN with fewer than two stable draws.
    low, high : ndarray or None
        The 2.5 and the 97.5 percentile, where asked for.
    linear : ndarray or None
        The standard uncertainty to first order, where it was worked out.
    """

    mean: FloatArray
    deviation: FloatArray
    low: FloatArray | None = None
    high: FloatArray | None = None
    linear: FloatArray | None = None

    @property
    def differs(self) -> BoolArray:
        """Where the two standard uncertainties differ by more than 20 % of the linear one."""
        if self.linear is None:
            return np.zeros(self.mean.shape, dtype=bool)
        with np.errstate(invalid="ignore"):
            gap = np.abs(self.deviation - self.linear)
            return np.asarray(gap > NOTABLE * self.linear + _BELIEVED * np.abs(self.mean))


@dataclass(frozen=True, eq=False)
class MonteCarlo:
    """What many draws say of Young's modulus and of the phase speeds.

    Attributes
    ----------
    spreads : dict
        "young", arrays (1, N) in GPa, and, with a density, "phase", arrays (3, N) in km/s.
    count, stable : int
        Draws made, and those of them that are stable crystals.
    """

    spreads: dict[str, Spread]
    count: int
    stable: int

    @property
    def differing(self) -> dict[str, float]:
        """The part of the directions, 0 to 1, where linear propagation does not do."""
        return {
            key: float(spread.differs.any(axis=0).mean())
            for key, spread in self.spreads.items()
        }


@dataclass(frozen=True)
class StabilityChance:
    """How probable it is that a crystal with these constants and errors is stable.

    Attributes
    ----------
    probability : float
        The stable part of the draws.
    standard_error : float
        Of `probability`, from the number of draws; never zero, for no number of draws proves
        that none is unstable.
    count : int
        Draws made.
    normal : float
        The probability by the normal law from the least eigenstiffness and its linear
        uncertainty; too high where several eigenstiffnesses are as small.
    """

    probability: float
    standard_error: float
    count: int
    normal: float


def draws(
    stiffness: Stiffness, covariance: FloatArray, count: int = COUNT, seed: int = SEED
) -> FloatArray:
    """Return tables drawn from the normal law about a stiffness.

    Parameters
    ----------
    stiffness : Stiffness
    covariance : ndarray, shape (21, 21)
        GPa², the same axes.
    count, seed : int

    Returns
    -------
    ndarray, shape (count, 6, 6)
        Voigt, GPa, the same axes; some may be unstable.
    """
    factor = factor_of(covariance)
    normal = np.random.default_rng(seed).standard_normal((count, factor.shape[1]))
    return stiffness.voigt + from_upper_triangle(normal @ factor.T)


def are_stable(tables: FloatArray) -> BoolArray:
    """Return which of the tables (count, 6, 6), Voigt, resist every strain."""
    return np.asarray(np.linalg.eigvalsh(stiffness_to_kelvin(tables))[:, 0] > 0)


def monte_carlo(
    medium: Medium,
    dirs: Directions,
    covariance: FloatArray,
    *,
    count: int = COUNT,
    seed: int = SEED,
    percentiles: bool = False,
    ticker: Ticker | None = None,
) -> MonteCarlo:
    """Return how Young's modulus and the phase speeds scatter in many directions.

    Parameters
    ----------
    medium : Medium
        Without a density only Young's modulus.
    dirs : Directions
        In the axes of the medium.
    covariance : ndarray, shape (21, 21)
        GPa², in the axes of the medium.
    count, seed : int
    percentiles : bool
        Whether to find the 2.5 and the 97.5 percentile as well, at twice the time.
    ticker : Ticker, optional
        Told of progress; may cancel.

    Notes
    -----
    The sheets of each draw are sorted by speed, as those of the crystal are: where two nearly
    meet, draws push them apart, and the means differ from the speeds of the mean table.
    """
    ticker = ticker or Ticker()
    tables = draws(medium.stiffness, covariance, count, seed)
    tables = tables[are_stable(tables)]
    found = np.full((4, 1 if medium.density is None else 4, dirs.count), np.nan)
    if len(tables) > 1:
        fields = _Fields(tables, medium.density)
        step = max(1, christoffel.CHUNK // len(tables))
        for start in range(0, dirs.count, step):
            ticker.tick(start / dirs.count)
            part = slice(start, start + step)
            _summarise(fields.values(dirs.products[:, part]), found[..., part], percentiles)
    ticker.tick(1.0)
    linear = _linear(medium, dirs, factor_of(covariance))
    spreads = _spreads(found, linear, percentiles)
    return MonteCarlo(spreads, count, len(tables))


def sample(
    function: Function,
    medium: Medium,
    covariance: FloatArray,
    *,
    count: int = COUNT,
    seed: int = SEED,
    ticker: Ticker | None = None,
) -> Spread:
    """Return how anything that is computed of a medium scatters over the stable draws.

    Parameters
    ----------
    function : callable
        Of a `Medium`, returning a number or an array of any shape; it is called for each draw.
    medium, covariance, count, seed, ticker
        As for `monte_carlo`.

    Returns
    -------
    Spread
        With percentiles, without `linear` (see `propagation.propagate`). NaN where a draw has
        no value.
    """
    ticker = ticker or Ticker()
    tables = draws(medium.stiffness, covariance, count, seed)
    values = []
    for done, table in enumerate(tables[are_stable(tables)]):
        ticker.tick(done / count)
        near = Medium(Stiffness.from_voigt(table), medium.density)
        values.append(np.asarray(function(near), dtype=np.float64))
    ticker.tick(1.0)
    found = np.full((4, *np.shape(function(medium))), np.nan)
    if len(values) > 1:
        _summarise(np.stack(values, axis=-1), found, True)
    return Spread(found[0], found[1], found[2], found[3])


def stability_chance(
    stiffness: Stiffness, covariance: FloatArray, count: int = STABILITY_COUNT, seed: int = SEED
) -> StabilityChance:
    """Return how probable it is that a crystal is stable.

    Parameters
    ----------
    stiffness : Stiffness
    covariance : ndarray, shape (21, 21)
        GPa², the same axes.
    count, seed : int

    Notes
    -----
    The standard error is that of the probability given the draws, all probabilities being as
    likely before: √[q (1 − q)/(count + 3)], q = (stable + 1)/(count + 2).
    """
    stable = int(are_stable(draws(stiffness, covariance, count, seed)).sum())
    middle = (stable + 1) / (count + 2)
    error = math.sqrt(middle * (1 - middle) / (count + 3))
    least = float(stiffness.eigenstiffness[0])
    sigma = float(eigenstiffness_deviation(stiffness, factor_of(covariance))[0])
    if sigma > 0:
        normal = 0.5 * math.erfc(-least / (math.sqrt(2) * sigma))
    else:
        normal = float(stiffness.is_stable)
    return StabilityChance(stable / count, error, count, normal)


class _Fields:
    """Young's modulus and phase speeds of T stable tables, in a few directions at a time."""

    def __init__(self, tables: FloatArray, density: float | None) -> None:
        compliances = upper_triangle(np.asarray(np.linalg.inv(tables)))
        self.count = len(tables)
        self.axial = np.ascontiguousarray((TWICE * compliances).T)  # (21, T)
        self.operators = np.ascontiguousarray(
            np.moveaxis(christoffel_operator(tables), 0, -1)
        )  # (6, 6, T)
        self.scale = None if density is None else GPA_TO_SQUARE_SPEED / density

    def values(self, products: FloatArray) -> FloatArray:
        """Return E and the speeds, (4, n, T), or E alone, (1, n, T), at q(n) (6, n)."""
        n = products.shape[1]
        values = np.empty((1 if self.scale is None else 4, n, self.count))
        quartics = np.stack([products[i] * products[j] for i, j in CELLS])
        np.divide(1.0, quartics.T @ self.axial, out=values[0])
        if self.scale is not None:
            matrices = np.matmul(products.T, self.operators).reshape(6, -1)
            squares = values[1:].reshape(3, -1)
            christoffel.eigenvalues(matrices, out=squares)
            squares *= self.scale
            np.maximum(squares, 0.0, out=squares)  # of a table that is just stable
            np.sqrt(squares, out=squares)
        return values


def _summarise(values: FloatArray, out: FloatArray, percentiles: bool) -> None:
    """Write mean, standard deviation and percentiles over the last axis; `values` are lost."""
    mean = values.mean(axis=-1)
    out[0] = mean
    if percentiles:
        values.sort(axis=-1)  # in place, which is faster than to ask for quantiles
        out[2:] = [_between(values, quantile) for quantile in QUANTILES]
    values -= mean[..., None]
    variance = np.einsum("...t,...t->...", values, values) / (values.shape[-1] - 1)
    out[1] = np.sqrt(variance)


def _between(ascending: FloatArray, quantile: float) -> FloatArray:
    """Return a quantile of sorted values along the last axis, linear between neighbours."""
    place = quantile * (ascending.shape[-1] - 1)
    below = int(place)
    above = min(below + 1, ascending.shape[-1] - 1)
    share = place - below
    return np.asarray((1 - share) * ascending[..., below] + share * ascending[..., above])


def _linear(medium: Medium, dirs: Directions, factor: FloatArray) -> FloatArray:
    """Return linear standard uncertainties in the order of `_Fields.values`, (4 or 1, N)."""
    young = young_deviation(medium, dirs, factor)[None]
    if medium.density is None:
        return young
    return np.concatenate([young, speed_deviation(medium, dirs, factor)])


def _spreads(found: FloatArray, linear: FloatArray, percentiles: bool) -> dict[str, Spread]:
    """Return the spreads by key of mean, deviation, low and high, (4, sheets, N)."""
    spreads = {}
    for key, rows in (("young", slice(0, 1)), ("phase", slice(1, 4))):
        mean, deviation, low, high = found[:, rows]
        if mean.size:
            spreads[key] = Spread(
                mean,
                deviation,
                low if percentiles else None,
                high if percentiles else None,
                linear[rows],
            )
    return spreads
