"""Combinations that only look seen: they enter squared, and noise moved them off zero.

In a plane of mirror symmetry some constants act on the speeds by their squares only. Where they
are zero the readings are blind to them to first order; but a fit puts them where noise likes
them best, some way off zero and with either sign. There the derivative is not zero, and linear
theory gives them an uncertainty that means nothing. So where a crystal of higher symmetry about
the same axes explains the readings as well, the constants it has at zero are left there.
"""

from dataclasses import replace

import numpy as np

from core.arrays import FloatArray
from core.study.recovery.descent import Goal, Trial, descend, evaluate
from core.study.recovery.evidence import Spectrum
from core.study.recovery.model import Survey, basis_of, mean_stiffness
from core.study.recovery.spectrum import spectrum_at
from core.tensor.symmetry import CrystalClass, crystal_class, distance, project

_FARTHEST = 0.15  # Kelvin distance to a higher class beyond which it is not tried
_STEPS = 30
_WORTH = 4.0  # fall of χ² that a further combination must bring: two σ
_FEWEST_TO_SPARE = 2  # readings beyond what is given up, or nothing speaks for the symmetry
_STIFF = 1e-4  # of the mean eigenstiffness: how closely a combination is held

_HIGHER: dict[str, tuple[tuple[str, str], ...]] = {
    "triclinic": (("orthorhombic", "y"), ("monoclinic", "y"), ("monoclinic", "x"),
                  ("monoclinic", "z")),
    "monoclinic": (("orthorhombic", "y"),),
    "tetragonal_7": (("tetragonal_6", "y"),),
    "trigonal_7": (("trigonal_6", "y"), ("hexagonal", "y")),
    "trigonal_6": (("hexagonal", "y"),),
}  # fmt: skip
"""Classes of higher symmetry about the same axes, with their unique axes, the highest first."""


def simplest(goal: Goal, trial: Trial) -> tuple[Trial, Spectrum]:
    """Return the fit with as much left at zero by a higher symmetry as the readings allow.

    Parameters
    ----------
    goal : Goal
    trial : Trial
        The best crystal.

    Returns
    -------
    Trial, Spectrum
        Where a higher symmetry explains the readings as well, the spectrum is that at the
        crystal of that symmetry: what is seen there to first order.
    """
    basis = goal.survey.basis
    spectrum = spectrum_at(goal, trial)
    table = basis.table(trial.constants[0])
    for key, axis in _HIGHER.get(basis.cls.key, ()):
        cls = crystal_class(key, axis)
        if distance(table, cls) > _FARTHEST:
            continue
        held, fewer = _with_zeros_of(goal, cls, project(table, cls))
        given_up = spectrum.rank - fewer.rank
        to_spare = goal.survey.count - fewer.rank
        if not 0 < given_up < to_spare - _FEWEST_TO_SPARE:
            continue
        if held.chi2[0] - trial.chi2[0] <= _WORTH * given_up:
            return held, fewer
    return trial, spectrum


def _with_zeros_of(goal: Goal, cls: CrystalClass, start: FloatArray) -> tuple[Trial, Spectrum]:
    """Return the fit in which what is not seen stays where it is in a higher class.

    The fit of the higher class comes first, from a table (6, 6); around it all that is seen to
    first order is set free. The spectrum is that at the crystal of the higher class.
    """
    basis, higher = goal.survey.basis, basis_of(cls)
    survey = Survey(higher, goal.survey.density, goal.survey.normals, goal.survey.place)
    constants = higher.constants(start)
    smaller = replace(goal, survey=survey, anchor=constants)
    table = higher.table(descend(smaller, constants[None], _STEPS).constants[0])
    place = basis.constants(table)
    here = evaluate(goal, place[None])
    spectrum = spectrum_at(goal, here)
    if not spectrum.unseen.shape[1]:
        return here, spectrum
    root = basis.kelvin_root
    pins = np.asarray((root @ root.T @ spectrum.unseen).T)
    stiff = _STIFF * mean_stiffness(basis, place)
    held = descend(replace(goal, pins=pins / stiff, pinned_at=place), place[None], _STEPS)
    return held, spectrum
