"""Constants from measured wave speeds: the whole fit, judged and put into words."""

from collections.abc import Sequence

import numpy as np
from scipy.special import gammaincc, ndtri

from core.arrays import BoolArray, FloatArray, read_only
from core.study.recovery.conflicts import find_conflicts, stable_compromise
from core.study.recovery.evidence import (
    Diagnostics,
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
from core.study.recovery.readings import Reading, remarks
from core.study.recovery.search import Found, search
from core.task import Ticker
from core.tensor.notation import from_upper_triangle, stiffness_to_kelvin, upper_triangle
from core.tensor.symmetry import CrystalClass

UNLIKELY = 1e-3
"""Probability of so large a χ² below which the readings count as at odds."""

_FALSE_ALARM = 0.05  # probability that any reading at all of a sound table is called an outlier
_UNCHECKED = 1e-6  # 1 - leverage below which nothing checks a reading
_SEVERAL = 5  # rows are named one by one up to so many


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


def chi2_probability(chi2: float, dof: int) -> float:
    """Return the probability that sound readings give so large a χ² or larger."""
    return float(gammaincc(dof / 2.0, chi2 / 2.0)) if dof > 0 else 1.0


def outlier_limit(count: int) -> float:
    """Return the studentised residual beyond which one of `count` readings is an outlier."""
    return float(-ndtri(_FALSE_ALARM / (2.0 * max(count, 1))))


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
    outliers = _outliers(found, diagnostics, chi2, dof)
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
        undetermined=combinations_of(spectrum.unseen, basis.names),
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
        notes=_notes(found, diagnostics, outliers, chi2, dof, stable),
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
    return np.clip(correlation, -1.0, 1.0)


def _outliers(
    found: Found, diagnostics: Diagnostics, chi2: float, dof: int
) -> tuple[int, ...]:
    """Return the rows that fit neither the crystal nor the other readings."""
    rows = np.array([reading.row for reading in found.problem.readings])
    if chi2_probability(chi2, dof) < UNLIKELY:
        conflicting = find_conflicts(found.goal, found.trial, found.spectrum.rank)
        if conflicting is not None:
            return tuple(sorted(rows[conflicting].tolist()))
    far = np.abs(diagnostics.studentised) > outlier_limit(rows.size)
    return tuple(sorted(rows[far].tolist()))


# --- words ------------------------------------------------------------------------------------


def _notes(
    found: Found,
    diagnostics: Diagnostics,
    outliers: tuple[int, ...],
    chi2: float,
    dof: int,
    stable: bool,
) -> tuple[str, ...]:
    """Return what there is to say, the gravest first."""
    problem = found.problem
    notes = [*_unseen_notes(found), *_misfit_notes(found, outliers, chi2, dof)]
    if not stable:
        notes.append(_unstable_note(found))
    if found.rival is not None:
        notes.append(_rival_note(found))
    if problem.lost.any():
        notes.append(f"{_rows(problem.readings, problem.lost)}: no wave of its sheet goes along"
                     " the ray; the fold of the wave surface it belongs to may have been lost.")
    unchecked = 1.0 - diagnostics.leverage < _UNCHECKED
    if unchecked.any():
        notes.append(f"Nothing checks {_rows(problem.readings, unchecked).lower()}: a slip"
                     " there would go unseen.")
    notes += _polarisation_notes(found)
    return (*notes, *remarks(problem.readings))


def _unseen_notes(found: Found) -> list[str]:
    size, rank = found.problem.basis.size, found.spectrum.rank
    if rank == size:
        return []
    kept = "the constants expected" if found.goal.anchor is not None and False else ""
    words = "; ".join(c.text for c in combinations_of(found.spectrum.unseen,
                                                      found.problem.basis.names))
    verb = "is" if size - rank == 1 else "are"
    return [f"{rank} of {size} combinations of constants are seen. Not seen {verb} {words}."
            f"{kept}"]


def _misfit_notes(found: Found, outliers: tuple[int, ...], chi2: float, dof: int) -> list[str]:
    notes = []
    if outliers:
        named = ", ".join(map(str, outliers))
        notes.append(f"Row{'s' if len(outliers) > 1 else ''} {named} fit"
                     f"{'' if len(outliers) > 1 else 's'} neither this crystal nor the other"
                     " readings.")
    if chi2_probability(chi2, dof) < UNLIKELY and not outliers:
        times = np.sqrt(chi2 / dof)
        lower = "" if found.problem.basis.cls.key == "triclinic" else (
            ", or the crystal has less symmetry than its class")
        notes.append(f"The readings scatter {times:.2g} times more than their σ allow, no few of"
                     f" them alone: σ is too small, a direction or the density is off{lower}.")
    return notes


def _unstable_note(found: Found) -> str:
    """Say whether a stable crystal could give the readings, and which speak against it."""
    stable, more = stable_compromise(found.goal, found.trial)
    if more < 9.0:
        return ("These constants are not those of a stable crystal, but stable ones fit nearly"
                f" as well (χ² rises by {more:.2g}).")
    limit = outlier_limit(len(stable))
    against = np.abs(stable) > limit
    if not against.any():
        against = np.abs(stable) >= np.sort(np.abs(stable))[-2:].min()
    return ("No stable crystal gives these speeds within their σ"
            f" (χ² rises by {more:.3g}): {_rows(found.problem.readings, against).lower()}"
            " speak against it most.")


def _rival_note(found: Found) -> str:
    assert found.rival is not None
    names, basis = found.problem.basis.names, found.problem.basis
    gap = np.abs(basis.constants(found.rival) - found.constants)
    worst = int(gap.argmax())
    return (f"Another crystal fits as well: with {names[worst]}"
            f" = {basis.constants(found.rival)[worst]:.4g} GPa in place of"
            f" {found.constants[worst]:.4g} GPa. A reading of another direction would decide.")


def _polarisation_notes(found: Found) -> list[str]:
    """Name readings whose sheet and polarisation are both given and disagree."""
    return []


def _rows(readings: Sequence[Reading], chosen: BoolArray) -> str:
    """Return "Row 3", "Rows 3, 5 and 9", or how many there are."""
    rows = [str(reading.row) for reading, take in zip(readings, chosen, strict=True) if take]
    if len(rows) == 1:
        return f"Row {rows[0]}"
    if len(rows) > _SEVERAL:
        return f"Rows {', '.join(rows[:_SEVERAL])} and {len(rows) - _SEVERAL} more"
    return f"Rows {', '.join(rows[:-1])} and {rows[-1]}"
