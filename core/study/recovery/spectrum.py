"""The singular spectrum of what a fit minimises, at a crystal."""

import numpy as np

from core.arrays import FloatArray
from core.study.recovery.descent import HUBER, Goal, Trial
from core.study.recovery.evidence import Spectrum, spectrum_of
from core.study.recovery.model import mean_stiffness


def weights_of(goal: Goal, trial: Trial) -> FloatArray:
    """Return what each reading (M,) counts in the fit."""
    size = np.abs(trial.residuals[0])
    return HUBER / np.maximum(size, HUBER) if goal.robust else np.ones_like(size)


def spectrum_at(goal: Goal, trial: Trial) -> Spectrum:
    """Return what the readings of a goal see of the constants at a crystal."""
    basis = goal.survey.basis
    jacobian = trial.jacobian[0] * np.sqrt(weights_of(goal, trial))[:, None]
    squared = trial.jacobian[0] * (goal.sigma * goal.speeds)[:, None]
    return spectrum_of(jacobian, squared, basis, mean_stiffness(basis, trial.constants[0]))
