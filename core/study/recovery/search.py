"""The search for the constants that fit best: many starts, then the last refinements."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray
from core.study.recovery.descent import Goal, Trial, descend
from core.study.recovery.doubles import is_unstable, weigh_doubles
from core.study.recovery.evidence import Spectrum
from core.study.recovery.fit import FitOptions
from core.study.recovery.model import mean_stiffness
from core.study.recovery.parsimony import simplest
from core.study.recovery.problem import Problem, with_direction_sigma, with_ray_normals
from core.study.recovery.spectrum import spectrum_at, weights_of
from core.study.recovery.starts import isotropic_start, start_batches
from core.task import Ticker

ANCHOR_PART = 0.3
"""Of the mean eigenstiffness: how loosely a fit is held to its start, for what is not seen."""

_CONFIRMED, _TRIED = 3, 25  # starts that must agree on a poor best place, and of how many
_SAME_COST = 1e-3  # relative
_ROUGH_RAY = 0.03  # of a group speed: what taking its ray for the wave normal may cost
_ROUNDS = 25
_SETTLED = 1e-7  # relative change of the constants between rounds


@dataclass(frozen=True, eq=False)
class Found:
    """The best crystal.

    Attributes
    ----------
    problem : Problem
        With the wave normals and uncertainties it was fitted with.
    goal : Goal
        What was minimised in the end.
    trial : Trial
        One crystal.
    spectrum : Spectrum
    starts : int
    rival : (6, 6) array or None
        Other constants that fit as well.
    """

    problem: Problem
    goal: Goal
    trial: Trial
    spectrum: Spectrum
    starts: int
    rival: FloatArray | None

    @property
    def constants(self) -> FloatArray:
        """The constants (P,), GPa."""
        return np.asarray(self.trial.constants[0])

    @property
    def weights(self) -> FloatArray:
        """Weights (M,) of the readings in a robust fit, else ones."""
        return weights_of(self.goal, self.trial)


def search(problem: Problem, options: FitOptions, ticker: Ticker) -> Found:
    """Return the constants that fit the readings best.

    Starts are tried in batches of 1, 4, 12, 12 and 11, the first being the isotropic crystal
    with the median speeds (and the prior, if there is one). The search stops when a stable
    crystal has χ² below dof + 6 √(2 dof), when no start has and at least three of 25 arrived
    at one best place, or after the last batch. With no more spare readings than constants a
    second batch is always tried, since several crystals may fit. Group speeds are always
    fitted robustly: some may belong to another fold of the wave surface.
    """
    first = isotropic_start(problem.readings, problem.survey.density, problem.basis)
    anchor, also = first, []
    if options.prior is not None:
        anchor = problem.basis.constants(options.prior)
        also = [anchor]
    rough = np.where(problem.is_group, _ROUGH_RAY * problem.measured, problem.sigma)
    goal = Goal(
        problem.survey, problem.assignment, problem.measured, rough,
        options.robust or bool(problem.is_group.any()),
        anchor, ANCHOR_PART * mean_stiffness(problem.basis, first),
    )  # fmt: skip
    trial, starts, rival = _multistart(goal, first, also, options.seed, ticker)
    problem, goal, trial = _refine(problem, goal, trial, options)
    trial, spectrum = simplest(goal, trial)
    if spectrum.rank == problem.basis.size:
        goal = goal.without_anchor()
        trial = descend(goal, trial.constants)
        spectrum = spectrum_at(goal, trial)
    return Found(problem, goal, trial, spectrum, starts, rival)


def _multistart(
    goal: Goal, first: FloatArray, also: Sequence[FloatArray], seed: int, ticker: Ticker
) -> tuple[Trial, int, FloatArray | None]:
    """Return the best crystal, the number of starts, and a rival that fits as well."""
    basis = goal.survey.basis
    spare = goal.survey.count - basis.size
    dof = max(spare, 1)
    enough = dof + 6.0 * np.sqrt(2.0 * dof)
    fewest = 2 if 0 <= spare <= basis.size else 1
    best: Trial | None = None
    costs: list[float] = []
    others = np.empty((0, basis.size))
    for number, starts in enumerate(start_batches(first, also, basis, seed), start=1):
        ticker.tick(len(costs) / 40)
        trial = descend(goal, starts)
        costs += trial.cost.tolist()
        place = int(trial.cost.argmin())
        if best is None or trial.cost[place] < best.cost[0]:
            best = trial.rows(np.array([place]))
        good = trial.constants[trial.chi2 < enough]
        others = np.concatenate([others, good])
        arrivals = sum(cost <= best.cost[0] * (1 + _SAME_COST) + _SAME_COST for cost in costs)
        confirmed = best.chi2[0] >= enough and arrivals >= _CONFIRMED and len(costs) >= _TRIED
        found = bool((~is_unstable(basis, others)).any())
        if confirmed or (found and number >= fewest):
            break
    assert best is not None
    if spare < 0:
        return best, len(costs), None
    believed, rival = weigh_doubles(goal, best, others, enough)
    return believed, len(costs), rival


def _refine(
    problem: Problem, goal: Goal, trial: Trial, options: FitOptions
) -> tuple[Problem, Goal, Trial]:
    """Return the fit with wave normals behind rays, and uncertainties of directions.

    Both depend on the constants and are brought up to date between fits until the constants
    rest.
    """
    has_rays = bool(problem.is_group.any())
    rounds = _ROUNDS if has_rays else (2 if options.direction_sigma_deg > 0 else 0)
    for _ in range(rounds):
        before = trial.constants[0]
        if has_rays:
            problem = with_ray_normals(problem, before, trial.sheets[0])
        if options.direction_sigma_deg > 0:
            problem = with_direction_sigma(
                problem, before, trial.sheets[0], options.direction_sigma_deg
            )
        goal = goal_for(problem, goal)
        trial = descend(goal, trial.constants)
        change = np.linalg.norm(trial.constants[0] - before)
        if change <= _SETTLED * np.linalg.norm(before):
            break
    return problem, goal, trial


def goal_for(problem: Problem, like: Goal) -> Goal:
    """Return a goal like another for a problem with other normals or uncertainties."""
    return Goal(
        problem.survey, problem.assignment, problem.measured * problem.cosine,
        problem.sigma * problem.cosine, like.robust, like.anchor, like.anchor_sigma,
    )  # fmt: skip
