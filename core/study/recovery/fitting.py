"""Constants from measured wave speeds: the whole fit, judged and put into words."""

from collections.abc import Sequence

import numpy as np

from core.arrays import FloatArray, read_only
from core.study.recovery.conflicts import find_outliers
from core.study.recovery.evidence import (
    combinations_of,
    covariance_of,
    diagnose,
    is_touched,
    stability_probability,
    touched_by,
)
from core.study.recovery.fit import Fit, FitOptions
from core.study.recovery.model import basis_of
from core.study.recovery.problem import problem_of
from core.study.recovery.readings import Reading
from core.study.recovery.search import Found, search
from core.study.recovery.words import notes_of
from core.task import Ticker
from core.tensor.notation import from_upper_triangle, stiffness_to_kelvin
from core.tensor.symmetry import CrystalClass


def recover(
    readings: Sequence[Reading],
    density: float,
    cls: CrystalClass,
    options: FitOptions | None = None,
    ticker: Ticker | None = None,
) -> Fit:
    """Return the constants of a crystal from measured wave speeds.

    Parameters
    ----------
    readings : sequence of Reading
        Directions in the crystal axes of the class. Fewer than there are constants are
        accepted: what they do not see is named, and kept as it was at the start.
    density : float
        kg/m³.
    cls : CrystalClass
    options : FitOptions
    ticker : Ticker

    Raises
    ------
    InputError
        Without readings, with too many, or with a density that is none.

    Notes
    -----
    Weighted nonlinear least squares on the speeds (see `core.study.recovery.descent` and
    `search` for steps, starts and stopping). The density scales every constant alike and
    changes no residual, so its uncertainty is added to the covariance afterwards. The
    covariance is that of the stated σ; it is not blown up where the readings scatter more.
    """
    chosen = options or FitOptions()
    problem = problem_of(readings, density, basis_of(cls))
    found = search(problem, chosen, ticker or Ticker())
    return _judge(found, chosen)


def _judge(found: Found, options: FitOptions) -> Fit:
    """Return the fit with all that is said of it."""
    problem, trial, spectrum = found.problem, found.trial, found.spectrum
    basis, constants, jacobian = problem.basis, found.constants, trial.jacobian[0]
    residuals = trial.residuals[0]
    diagnostics = diagnose(residuals, jacobian, found.weights, spectrum)
    covariance = covariance_of(spectrum)
    relative = options.density_sigma / problem.survey.density
    covariance = covariance + relative**2 * np.outer(constants, constants)
    cells = basis.triangle @ covariance @ basis.triangle.T
    hidden = is_touched(touched_by(spectrum.unseen, basis.triangle, basis))
    chi2, dof = float(trial.chi2[0]), len(residuals) - spectrum.rank
    stable = bool(np.linalg.eigvalsh(stiffness_to_kelvin(basis.table(constants)))[0] > 0)
    determined = spectrum.rank == basis.size
    undetermined = combinations_of(spectrum.unseen, basis.names)
    rows = [reading.row for reading in problem.readings]
    outliers = tuple(sorted(rows[i] for i in find_outliers(found.goal, trial, spectrum)))
    return Fit(
        readings=problem.readings,
        density=problem.survey.density,
        cls=basis.cls,
        names=basis.names,
        stiffness=read_only(basis.table(constants)),
        std=read_only(_std(cells, hidden)),
        covariance=read_only(cells),
        constants=read_only(constants),
        parameter_covariance=read_only(covariance),
        correlation=read_only(_correlation(covariance)),
        information=read_only((jacobian * found.weights[:, None]).T @ jacobian),
        rank=spectrum.rank,
        singular_values=read_only(spectrum.singular_values),
        undetermined=undetermined,
        chi2=chi2,
        dof=dof,
        predicted=read_only(problem.measured + residuals * problem.sigma),
        sigma=read_only(problem.sigma),
        residuals=read_only(residuals),
        studentised=read_only(diagnostics.studentised),
        leverage=read_only(diagnostics.leverage),
        influence=read_only(diagnostics.influence),
        shifts=read_only(diagnostics.shifts),
        sheets=tuple(int(sheet) + 1 for sheet in trial.sheets[0]),
        outliers=outliers,
        stable=stable,
        stability_probability=stability_probability(constants, covariance, basis)
        if determined else None,
        starts=found.starts,
        notes=notes_of(found, diagnostics, undetermined, outliers, stable),
    )  # fmt: skip


def _std(cells: FloatArray, hidden: FloatArray) -> FloatArray:
    """Return standard uncertainties (6, 6) from the covariance of 21 cells."""
    own = np.sqrt(np.maximum(np.diag(cells), 0.0))
    return from_upper_triangle(np.where(hidden, np.inf, own))


def _correlation(covariance: FloatArray) -> FloatArray:
    """Return correlations (P, P); zero for a constant that is not seen at all."""
    own = np.sqrt(np.diag(covariance))
    scale = np.outer(own, own)
    correlation = np.divide(covariance, scale, out=np.zeros_like(scale), where=scale > 0)
    np.fill_diagonal(correlation, 1.0)
    return np.asarray(np.clip(correlation, -1.0, 1.0))
