"""Which readings are at odds: with the others, or with any crystal that could exist."""

from dataclasses import replace

import numpy as np

from core.arrays import FloatArray, IntArray
from core.study.recovery.descent import Goal, Trial, descend
from core.tensor.notation import stiffness_to_kelvin

_ACCEPTED = 3.1  # standard deviations that χ² of the rest may lie above its mean
_MOST_PART = 0.2  # of the readings that may be set aside
_FEWEST = 3
_ASIDE = 1e6  # factor on the σ of a reading that is set aside
_LEAST_STIFFNESS = 1e-3  # of the mean eigenstiffness, of a crystal that may still exist
_STEPS = 40


def find_conflicts(goal: Goal, trial: Trial, rank: int) -> IntArray | None:
    """Return the fewest readings without which the others agree, or None if there are none few.

    The worst reading of a robust fit is set aside, one after another (up to a fifth of all),
    until χ² of the rest is credible. A robust fit is less drawn to the culprits than least
    squares, which spreads their misfit over good readings.
    """
    count = trial.residuals.shape[1]
    aside = np.zeros(count, dtype=bool)
    most = min(max(_FEWEST, int(_MOST_PART * count)), count - rank - 1)
    now = trial.constants
    for _ in range(most):
        sigma = np.where(aside, _ASIDE * goal.sigma, goal.sigma)
        robust = descend(replace(goal, robust=True, sigma=sigma), now, _STEPS)
        now = robust.constants
        aside[np.where(aside, 0.0, np.abs(robust.residuals[0])).argmax()] = True
        sigma = np.where(aside, _ASIDE * goal.sigma, goal.sigma)
        plain = descend(replace(goal, robust=False, sigma=sigma), now, _STEPS)
        dof = count - int(aside.sum()) - rank
        chi2 = (plain.residuals[0][~aside] ** 2).sum()
        if chi2 <= dof + _ACCEPTED * np.sqrt(2.0 * max(dof, 1)):
            return np.flatnonzero(aside)
    return None


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
