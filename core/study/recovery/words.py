"""What there is to say of a fit, in sentences."""

from collections.abc import Sequence

import numpy as np

from core.arrays import BoolArray
from core.directional.sphere import dot, sphere_mesh
from core.study.recovery.conflicts import (
    UNLIKELY,
    chi2_probability,
    outlier_limit,
    stable_compromise,
)
from core.study.recovery.evidence import Combination, Diagnostics
from core.study.recovery.model import speeds_of, survey_of, waves
from core.study.recovery.readings import Reading, remarks
from core.study.recovery.search import Found

_UNCHECKED = 1e-6  # 1 - leverage below which nothing checks a reading
_SEVERAL = 5  # rows are named one by one up to so many
_MOST_UNSEEN = 4
_NEARLY_AS_WELL = 9.0  # rise of χ² that the readings do not speak against: 3 σ
_SAME_SPEEDS = 0.01  # relative, over all directions
_ACROSS = np.cos(np.radians(45.0))


def notes_of(
    found: Found,
    diagnostics: Diagnostics,
    undetermined: Sequence[Combination],
    outliers: tuple[int, ...],
    stable: bool,
) -> tuple[str, ...]:
    """Return what there is to say of a fit, the gravest first."""
    readings = found.problem.readings
    notes = [*_unseen(found, undetermined), *_misfit(found, outliers)]
    if not stable:
        notes.append(_unstable(found))
    if found.rival is not None:
        notes.append(_rival(found))
    if found.problem.lost.any():
        notes.append(
            f"{_rows(readings, found.problem.lost)}: no wave of that sheet was found along the"
            " ray; the fold of the wave surface it belongs to may have been lost."
        )
    if found.problem.is_group.any():
        notes.append(
            "Group speeds serve for crystals of weak to moderate anisotropy, and are fitted"
            " robustly: a reading on another fold of the wave surface counts as an outlier."
        )
    unchecked = 1.0 - diagnostics.leverage < _UNCHECKED
    if unchecked.all():
        notes.append("No reading is to spare: nothing checks them, and a slip would go unseen.")
    elif unchecked.any():
        rows = _rows(readings, unchecked).lower()
        notes.append(f"Nothing checks {rows}: a slip there would go unseen.")
    return (*notes, *_wrong_polarisation(found), *remarks(readings))


def _unseen(found: Found, undetermined: Sequence[Combination]) -> list[str]:
    """Say what is not seen, and what stands in its place."""
    if not undetermined:
        return []
    size = found.problem.basis.size
    said = "; ".join(combination.text for combination in undetermined[:_MOST_UNSEEN])
    rest = len(undetermined) - _MOST_UNSEEN
    if rest > 0:
        said += f"; and {rest} more"
    verb = "is" if len(undetermined) == 1 else "are"
    return [
        f"{found.spectrum.rank} of {size} combinations of constants are seen. Not seen {verb}"
        f" {said}. What is not seen was kept as it was at the start of the fit."
    ]


def _misfit(found: Found, outliers: tuple[int, ...]) -> list[str]:
    """Say which rows are off, or that all scatter too much."""
    if outliers:
        named, many = ", ".join(map(str, outliers)), len(outliers) > 1
        return [
            f"Row{'s' if many else ''} {named} fit{'' if many else 's'} neither this crystal"
            " nor the other readings."
        ]
    chi2 = float(found.trial.chi2[0])
    dof = len(found.problem.readings) - found.spectrum.rank
    if chi2_probability(chi2, dof) >= UNLIKELY:
        return []
    lower = ", or the crystal has less symmetry than its class"
    return [
        f"The readings scatter {np.sqrt(chi2 / dof):.2g} times more than their σ allow, and no"
        " few of them explain it: σ is too small, or a direction or a sheet is wrong"
        f"{'' if found.problem.basis.cls.key == 'triclinic' else lower}."
    ]


def _unstable(found: Found) -> str:
    """Say whether a stable crystal could give the readings, and which speak against it."""
    residuals, more = stable_compromise(found.goal, found.trial)
    if more < _NEARLY_AS_WELL:
        return (
            "These constants are not those of a stable crystal, but stable ones fit nearly as"
            f" well (χ² rises by {max(more, 0.0):.2g})."
        )
    size = np.abs(residuals)
    against = size > min(outlier_limit(size.size), float(np.sort(size)[-2:].min()))
    against |= size == size.max()
    return (
        f"No stable crystal gives these speeds within their σ (χ² rises by {more:.3g}):"
        f" {_rows(found.problem.readings, against).lower()} speak against it most."
    )


def _rival(found: Found) -> str:
    """Say that other constants fit as well, where they differ most, and what would decide."""
    assert found.rival is not None
    basis = found.problem.basis
    other = basis.constants(found.rival)
    worst = int(np.abs(other - found.constants).argmax())
    everywhere = survey_of(basis, found.problem.survey.density, sphere_mesh(2).half.n)
    own, its = (speeds_of(everywhere, constants) for constants in (found.constants, other))
    same = float(np.abs(its / own - 1.0).max()) < _SAME_SPEEDS
    decides = (
        "Its speeds are the same in every direction: only the directions in which the waves"
        " move can decide (the polarisation column)."
        if same
        else "A reading in another direction, or a polarisation, decides."
    )
    return (
        f"Another crystal fits as well, with {basis.names[worst]} = {other[worst]:.4g} GPa in"
        f" place of {found.constants[worst]:.4g} GPa. {decides}"
    )


def _wrong_polarisation(found: Found) -> list[str]:
    """Name the readings whose sheet and polarisation are both given and do not agree."""
    readings, survey = found.problem.readings, found.goal.survey
    both = np.array(
        [r.sheet is not None and isinstance(r.polarisation, tuple) for r in readings]
    )
    if not both.any():
        return []
    waves_found = waves(survey, found.constants[None])
    sheets = found.trial.sheets[0]
    own = waves_found.polarisation[sheets, :, 0, survey.place].T
    given = np.array(
        [r.polarisation if isinstance(r.polarisation, tuple) else (0.0, 0.0, 0.0)
         for r in readings]
    ).T  # fmt: skip
    apart = both & (np.abs(dot(own, given)) < _ACROSS)
    if not apart.any():
        return []
    return [
        f"{_rows(readings, apart)}: in this crystal the wave of the given sheet moves nearly"
        " across the given polarisation. The sheet was used."
    ]


def _rows(readings: Sequence[Reading], chosen: BoolArray) -> str:
    """Return "Row 3", "Rows 3, 5 and 9", or the first few and how many more."""
    rows = [str(reading.row) for reading, take in zip(readings, chosen, strict=True) if take]
    if len(rows) == 1:
        return f"Row {rows[0]}"
    if len(rows) > _SEVERAL:
        return f"Rows {', '.join(rows[:_SEVERAL])} and {len(rows) - _SEVERAL} more"
    return f"Rows {', '.join(rows[:-1])} and {rows[-1]}"
