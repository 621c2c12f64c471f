"""Which readings are at odds: with the others, or with any crystal that could exist."""

from dataclasses import replace

import numpy as np
from scipy.special import gammaincc, ndtri

from core.arrays import BoolArray, FloatArray, IntArray
from core.study.recovery.descent import Goal, Trial, descend
from core.study.recovery.evidence import Spectrum, diagnose
from core.study.recovery.spectrum import spectrum_at, weights_of
from core.tensor.notation import stiffness_to_kelvin

UNLIKELY = 1e-3
"""Probability of so large a χ² below which the readings count as at odds."""

_FALSE_ALARM = 0.05  # probability that any reading at all of a sound table is called an outlier
_MOST_PART = 0.2  # of the readings that may be set aside
_FEWEST = 3
_ASIDE = 1e6  # factor on the σ of a reading that is set aside
_LEAST_STIFFNESS = 1e-3  # of the mean eigenstiffness, of a crystal that may still exist
_STEPS = 40


def chi2_probability(chi2: float, dof: int) -> float:
    """Return the probability that sound readings give so large a χ² or larger."""
    return float(gammaincc(dof / 2.0, chi2 / 2.0)) if dof > 0 else 1.0


def outlier_limit(count: int) -> float:
    """Return the studentised residual beyond which one of `count` readings is an outlier.

    Two-sided normal, so that a sound table has an outlier once in twenty (Bonferroni).
    """
    return float(-ndtri(_FALSE_ALARM / (2.0 * max(count, 1))))


def find_outliers(goal: Goal, trial: Trial, spectrum: Spectrum) -> IntArray:
    """Return the indices of readings that fit neither the crystal nor the other readings.

    While χ² is not credible or a studentised residual is out of bounds, the worst reading of a
    robust fit is set aside, up to a fifth of all. A robust fit is less drawn to the culprits
    than least squares, which spreads their misfit over good readings. Where that does not
    help, the readings scatter as a whole, and those out of bounds by that scatter are given.
    """
    count = trial.residuals.shape[1]
    aside = np.zeros(count, dtype=bool)
    far = _is_far(goal, trial, spectrum, aside)
    if _is_credible(trial, aside, spectrum.rank) and not far.any():
        return np.flatnonzero(aside)
    most = min(max(_FEWEST, int(_MOST_PART * count)), count - spectrum.rank - 1)
    constants = trial.constants
    for _ in range(most):
        robust = descend(_without(goal, aside, robust=True), constants, _STEPS)
        constants = robust.constants
        aside[np.where(aside, 0.0, np.abs(robust.residuals[0])).argmax()] = True
        rest = _without(goal, aside, robust=False)
        plain = descend(rest, constants, _STEPS)
        seen = spectrum_at(rest, plain)
        if _is_credible(plain, aside, seen.rank):
            aside |= _is_far(rest, plain, seen, aside)
            return np.flatnonzero(aside)
    return np.flatnonzero(far)


def _without(goal: Goal, aside: BoolArray, robust: bool) -> Goal:
    """Return the goal with some readings made to count for nothing."""
    sigma = np.where(aside, _ASIDE * goal.sigma, goal.sigma)
    return replace(goal, robust=robust, sigma=sigma)


def _is_credible(trial: Trial, aside: BoolArray, rank: int) -> bool:
    dof = int((~aside).sum()) - rank
    return chi2_probability(float((trial.residuals[0] ** 2).sum()), dof) >= UNLIKELY


def _is_far(goal: Goal, trial: Trial, spectrum: Spectrum, aside: BoolArray) -> BoolArray:
    """Tell which readings have a studentised residual out of bounds."""
    weights = weights_of(goal, trial)
    found = diagnose(trial.residuals[0], trial.jacobian[0], weights, spectrum)
    far: BoolArray = np.abs(found.studentised) > outlier_limit(int((~aside).sum()))
    return far & ~aside


def stable_compromise(goal: Goal, trial: Trial) -> tuple[FloatArray, float]:
    """Return how a stable crystal fits where the best one is not stable.

    Returns
    -------
    residuals : (M,) array
        In σ, of the best crystal whose eigenstiffnesses all reach a thousandth of their mean.
    more : float
        By how much its χ² is the larger.
    """
    basis = goal.survey.basis
    kelvin = stiffness_to_kelvin(basis.table(trial.constants[0]))
    least = _LEAST_STIFFNESS * float(np.trace(kelvin)) / 6.0
    bounded = descend(replace(goal, least_stiffness=least), trial.constants)
    return bounded.residuals[0], float(bounded.chi2[0] - trial.chi2[0])
