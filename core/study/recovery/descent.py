"""Weighted least squares by damped steps (Levenberg-Marquardt), for many starts at once.

A compiled routine for one start at a time takes two to three times as long as this over a
multistart of sixty readings, and the fit runs while a table is being typed.
"""

from dataclasses import dataclass, replace

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.study.recovery.assignment import Assignment
from core.study.recovery.model import Survey, predict, waves
from core.tensor.notation import stiffness_to_kelvin

HUBER = 1.345
"""Residual in σ from which the robust loss grows linearly: 95 % efficiency on normal errors."""

_STEPS = 60
_FIRST_DAMPING = 1e-2
_LEAST_DAMPING, _MOST_DAMPING = 1e-12, 1e8
_EASE, _TIGHTEN = 0.15, 5.0
_CONVERGED = 1e-9  # relative fall of the cost
_COST_FLOOR = 1e-10  # squared residuals below this are rounding
_LEAST_DIAGONAL = 1e-9


@dataclass(frozen=True, eq=False)
class Goal:
    """What is minimised.

    Attributes
    ----------
    survey : Survey
    assignment : Assignment
    speeds : (M,) or (B, M) array
        Measured, m/s; with B rows each start has measurements of its own.
    sigma : (M,) array
        Standard uncertainties, m/s.
    robust : bool
        Huber's loss in place of the square.
    anchor : (P,) array or None
        Constants to stay near where the readings do not speak, GPa.
    anchor_sigma : float
        How near, GPa in the Kelvin norm.
    pins, pinned_at : (K, P) and (P,) arrays, or None
        Combinations held: each, times the change from `pinned_at`, is one more residual.
    least_stiffness : float or None
        GPa: eigenstiffnesses below it are pushed up, at `HUBER`-free quadratic cost.
    """

    survey: Survey
    assignment: Assignment
    speeds: FloatArray
    sigma: FloatArray
    robust: bool = False
    anchor: FloatArray | None = None
    anchor_sigma: float = np.inf
    pins: FloatArray | None = None
    pinned_at: FloatArray | None = None
    least_stiffness: float | None = None

    def without_anchor(self) -> "Goal":
        """Return the same goal with nothing but the readings."""
        return replace(self, anchor=None)

    def rows(self, index: IntArray | BoolArray) -> "Goal":
        """Return the goal of some of the starts only."""
        return self if self.speeds.ndim == 1 else replace(self, speeds=self.speeds[index])


@dataclass(frozen=True, eq=False)
class Trial:
    """B crystals held against the readings.

    Attributes
    ----------
    constants : (B, P) array
    cost : (B,) array
        What is minimised.
    residuals : (B, M) array
        (predicted - measured)/σ.
    jacobian : (B, M, P) array
        d residual / d constant, 1/GPa.
    sheets : (B, M) int array
    gradient : (B, P) array
        Half the gradient of the cost.
    curvature : (B, P, P) array
        Half the Gauss-Newton approximation of its second derivatives.
    """

    constants: FloatArray
    cost: FloatArray
    residuals: FloatArray
    jacobian: FloatArray
    sheets: IntArray
    gradient: FloatArray
    curvature: FloatArray

    @property
    def chi2(self) -> FloatArray:
        """Plain sum of squared residuals, (B,)."""
        return np.asarray((self.residuals**2).sum(axis=1))

    def rows(self, index: IntArray | BoolArray) -> "Trial":
        """Return some of the crystals."""
        return Trial(**{name: getattr(self, name)[index] for name in _FIELDS})

    def with_rows(self, index: IntArray, other: "Trial") -> "Trial":
        """Return the trial with some crystals replaced."""
        merged = {}
        for name in _FIELDS:
            merged[name] = getattr(self, name).copy()
            merged[name][index] = getattr(other, name)
        return Trial(**merged)


_FIELDS = tuple(Trial.__dataclass_fields__)


def evaluate(goal: Goal, constants: FloatArray) -> Trial:
    """Hold crystals with constants (B, P) against the readings."""
    survey = goal.survey
    found = waves(survey, constants)
    sheets = goal.assignment.sheets(survey, found, goal.speeds, goal.sigma)
    speed, slopes = predict(survey, found, sheets)
    residuals = (speed - goal.speeds) / goal.sigma
    jacobian = slopes / goal.sigma[:, None]
    weighted, cost = jacobian, (residuals**2).sum(axis=1)
    if goal.robust:
        size = np.abs(residuals)
        weight = HUBER / np.maximum(size, HUBER)
        weighted = jacobian * weight[:, :, None]
        cost = np.where(size > HUBER, HUBER * (2.0 * size - HUBER), size**2).sum(axis=1)
    turned = weighted.transpose(0, 2, 1)
    gradient = (turned @ residuals[:, :, None])[:, :, 0]
    curvature = turned @ jacobian
    for extra in (_anchor_terms, _pin_terms, _stability_terms):
        more_cost, more_gradient, more_curvature = extra(goal, constants)
        cost = cost + more_cost
        gradient = gradient + more_gradient
        curvature = curvature + more_curvature
    return Trial(constants, cost, residuals, jacobian, sheets, gradient, curvature)


_Terms = tuple[FloatArray | float, FloatArray | float, FloatArray | float]


def _anchor_terms(goal: Goal, constants: FloatArray) -> _Terms:
    """Return the cost, gradient and curvature of leaving the anchor."""
    if goal.anchor is None:
        return 0.0, 0.0, 0.0
    root = goal.survey.basis.kelvin_root
    gram = root @ root.T / goal.anchor_sigma**2
    away = constants - goal.anchor
    pull = away @ gram
    return (pull * away).sum(axis=1), pull, gram


def _pin_terms(goal: Goal, constants: FloatArray) -> _Terms:
    """Return the cost, gradient and curvature of moving what is held."""
    if goal.pins is None or goal.pinned_at is None:
        return 0.0, 0.0, 0.0
    gram = goal.pins.T @ goal.pins
    away = constants - goal.pinned_at
    pull = away @ gram
    return (pull * away).sum(axis=1), pull, gram


def _stability_terms(goal: Goal, constants: FloatArray) -> _Terms:
    """Return the cost, gradient and curvature of eigenstiffnesses that are too small.

    The unit is a thousandth of the mean eigenstiffness, so that any real shortfall costs more
    than readings can.
    """
    if goal.least_stiffness is None:
        return 0.0, 0.0, 0.0
    basis = goal.survey.basis
    kelvin = stiffness_to_kelvin(basis.table(constants))
    values, vectors = np.linalg.eigh(kelvin)
    unit = 1e-3 * np.abs(values).mean(axis=1, keepdims=True)
    short = np.minimum(values - goal.least_stiffness, 0.0) / unit
    tables = stiffness_to_kelvin(basis.tables)
    slopes = np.einsum("bik,pij,bjk->bkp", vectors, tables, vectors) / unit[:, :, None]
    slopes *= (short < 0.0)[:, :, None]
    turned = slopes.transpose(0, 2, 1)
    return (short**2).sum(axis=1), (turned @ short[:, :, None])[:, :, 0], turned @ slopes


def descend(goal: Goal, starts: FloatArray, steps: int = _STEPS) -> Trial:
    """Return the crystals that starts (B, P) settle at.

    Steps are those of Levenberg 1944 and Marquardt 1963, damped along the diagonal of the
    curvature. A start is done when a step lowers its cost by less than 1e-9 of it, when no
    step lowers it, or after `steps` steps.
    """
    trial = evaluate(goal, starts)
    damping = np.full(len(starts), _FIRST_DAMPING)
    active = np.arange(len(starts))
    for _ in range(steps):
        if active.size == 0:
            break
        now = trial.rows(active)
        part = goal.rows(active)
        new = evaluate(part, now.constants - _damped_step(now, damping[active]))
        better = new.cost < now.cost
        fall = now.cost - new.cost
        settled = (better & (fall <= _CONVERGED * new.cost)) | (now.cost < _COST_FLOOR)
        trial = trial.with_rows(active[better], new.rows(better))
        damping[active] = np.maximum(
            damping[active] * np.where(better, _EASE, _TIGHTEN), _LEAST_DAMPING
        )
        active = active[~settled & (damping[active] < _MOST_DAMPING)]
    return trial


def _damped_step(trial: Trial, damping: FloatArray) -> FloatArray:
    """Return the steps (B, P) that solve the damped normal equations."""
    diagonal = np.einsum("bpp->bp", trial.curvature)
    least = _LEAST_DIAGONAL * diagonal.max(axis=1, keepdims=True) + np.finfo(float).tiny
    added = damping[:, None] * np.maximum(diagonal, least)
    matrix = trial.curvature + added[:, :, None] * np.eye(diagonal.shape[1])
    step: FloatArray = np.linalg.solve(matrix, trial.gradient[:, :, None])[:, :, 0]
    return step
