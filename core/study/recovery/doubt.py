"""Combinations that only look seen: they enter squared, and noise moved them off zero.

In a plane of mirror symmetry some constants act on the speeds by their squares only. Where they
are zero the readings are blind to them to first order; but a fit puts them where noise likes
them best, some way off zero and with either sign, and there the derivative is not zero. The
linear theory then gives them an uncertainty that means nothing. Such a combination shows itself
by a χ² that, two or three of its σ away, is not what linear theory says. The derivatives J_k
along several of them change by H_kl t_l with shifts t; where all are least together, in the
sense of least squares, is where the combinations are put.
"""

from dataclasses import replace

import numpy as np

from core.arrays import BoolArray, FloatArray
from core.study.recovery.descent import Goal, Trial, descend, evaluate
from core.study.recovery.evidence import Spectrum

_STEPS = np.array([-3.0, -2.0, 2.0, 3.0])  # of σ
_LEAST, _MOST = 0.5, 1.5  # of the rise of χ² that linear theory expects
_UNCERTAIN = 0.003  # σ over the mean eigenstiffness from which a combination is looked at
_STIFF = 1e-4  # of the mean eigenstiffness: how closely a combination is held
_FARTHEST = 4.0  # σ
_WIDEST = 0.05  # of the mean eigenstiffness: steps along what is not seen at all
_NOTHING = 1e-3  # a rise of χ² that is none


def without_slope(
    goal: Goal, trial: Trial, spectrum: Spectrum, typical: float
) -> tuple[Trial, int] | None:
    """Return the fit with doubtful combinations held where the readings have no slope.

    Returns
    -------
    (Trial, int) or None
        The fit, and how many combinations are held; None where linear theory holds for all.
    """
    values = spectrum.singular_values
    weak = np.flatnonzero(values * _UNCERTAIN * typical < 1.0)
    if not weak.size:
        return None
    every = np.concatenate([spectrum.seen, spectrum.unseen], axis=1)[:, weak].T
    with np.errstate(divide="ignore"):
        sigma = np.minimum(1.0 / values[weak], _WIDEST * typical)
    changes = every * sigma[:, None]
    doubtful = _fails_linear_theory(goal, trial, changes, values[weak] * sigma)
    if not doubtful.any():
        return None
    changes = changes[doubtful]
    root = goal.survey.basis.kelvin_root
    rows = every[doubtful] @ root @ root.T
    place = trial.constants[0] + _shift_to_no_slope(goal, trial, changes) @ changes
    held = replace(goal, pins=rows / (_STIFF * typical), pinned_at=place)
    return descend(held, place[None]), len(changes)


def _fails_linear_theory(
    goal: Goal, trial: Trial, changes: FloatArray, slope: FloatArray
) -> BoolArray:
    """Tell along which of K changes (K, P) the rise of χ² is not the square of slope and step.

    `slope` (K,) is the length of the derivative of the residuals along each change.
    """
    moved = trial.constants[0] + np.multiply.outer(_STEPS, changes)
    there = evaluate(goal, moved.reshape(-1, changes.shape[1]))
    rise = there.chi2.reshape(_STEPS.size, -1) - trial.chi2[0]
    expected = np.multiply.outer(_STEPS, slope) ** 2
    fails = (rise < _LEAST * expected) | (rise > _MOST * expected + _NOTHING)
    return np.asarray(fails.any(axis=0))


def _shift_to_no_slope(goal: Goal, trial: Trial, changes: FloatArray) -> FloatArray:
    """Return the shifts (K,), in σ, along K changes that make their derivatives least."""
    count = len(changes)
    moved = trial.constants[0] + np.concatenate([changes, -changes])
    slopes = evaluate(goal, moved).jacobian @ changes.T
    bends = (slopes[:count] - slopes[count:]) / 2.0
    here = (trial.jacobian[0] @ changes.T).ravel()
    shift = np.linalg.lstsq(bends.reshape(count, -1).T, -here, rcond=None)[0]
    return np.asarray(np.clip(shift, -_FARTHEST, _FARTHEST))
