"""The verdict on a table of constants: one mark, one headline, the facts that decide."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np

from core.arrays import FloatArray
from core.numbers import significant, with_deviation
from core.study.uncertainty.changes import independent_covariance
from core.tensor.averages import anisotropy, averages
from core.tensor.notation import KELVIN_WEIGHTS, upper_triangle
from core.tensor.stability import Stability, assess, criteria
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, crystal_class, distance

NOTABLE_DISTANCE = 1e-6  # relative: below it a table has its class exactly
_ZERO = 1e-12  # of the largest |eigenstiffness|: what lies below resists nothing
_SURE = 2.0  # standard uncertainties between the softest strain and zero

Mark = Literal["stable", "doubtful", "unstable"]


@dataclass(frozen=True)
class Verdict:
    """What the bench says of a table at first sight.

    Attributes
    ----------
    mark : "stable", "doubtful" or "unstable"
    headline : str
        The mark in words.
    facts : tuple of str
        In the order in which they most often change a decision.
    detail : str
        Paragraphs: the eigenstiffnesses with their strains, the criteria of the class.
    """

    mark: Mark
    headline: str
    facts: tuple[str, ...]
    detail: str

    @property
    def sentence(self) -> str:
        """The verdict as one sentence."""
        return f"{self.headline}: {'; '.join(self.facts)}."


def judge(
    stiffness: Stiffness,
    claimed: CrystalClass,
    deviations: FloatArray | None = None,
    covariance: FloatArray | None = None,
    symmetry: str = "",
    notes: int = 0,
) -> Verdict:
    """Return the verdict on a table.

    Parameters
    ----------
    stiffness : Stiffness
        GPa, crystal axes.
    claimed : CrystalClass
        The symmetry the specimen claims.
    deviations : ndarray, shape (6, 6), optional
        Standard uncertainties of the constants, GPa, those of the free constants taken as
        independent: of the class where the table has its form, else of all 21.
    covariance : ndarray, shape (21, 21), optional
        GPa², along the upper triangle by rows; read in place of `deviations`.
    symmetry : str
        The sentence of `core.study.trust.symmetry_verdict`, where the search has been made.
    notes : int
        How many things `core.study.trust.plausibility` finds odd.
    """
    stability = assess(stiffness)
    fits = distance(stiffness.voigt, claimed) <= NOTABLE_DISTANCE
    if covariance is None and deviations is not None:
        form = claimed if fits else crystal_class("triclinic")
        covariance = independent_covariance(deviations, form)
    sigma = None if covariance is None else softest_deviation(stability, covariance)
    mark, headline = _mark(stability, covariance)
    facts = _facts(stiffness, claimed, stability, sigma, symmetry)
    if notes:
        facts = (f"{notes} {'note' if notes == 1 else 'notes'}", *facts)
    return Verdict(mark, headline, facts, _detail(stiffness, claimed, stability))


def softest_deviation(
    stability: Stability, covariance: FloatArray, which: int = 0
) -> float:
    """Return the standard uncertainty of an eigenstiffness, GPa, to first order.

    Of the least one by default. With e its Kelvin eigenstrain and w the Kelvin weights,
    ∂λ/∂C_IJ = w_I w_J e_I e_J, twice that off the diagonal, for C_IJ and C_JI are one constant.
    """
    strain = stability.eigenstrains[:, which] * KELVIN_WEIGHTS
    slope = upper_triangle(np.outer(strain, strain) * (2.0 - np.eye(6)))
    variance = float(slope @ covariance @ slope)
    return math.sqrt(max(variance, 0.0))


def _mark(stability: Stability, covariance: FloatArray | None) -> tuple[Mark, str]:
    values = stability.eigenstiffness
    if not stability.stable:
        count = int((values <= _ZERO * np.abs(values).max()).sum())
        if covariance is not None and _may_be_positive(stability, covariance, count):
            return "doubtful", "Not stable as it stands, but within the uncertainties"
        return "unstable", "Unstable" if count == 1 else f"Unstable in {count} strains"
    if covariance is not None:
        sigma = softest_deviation(stability, covariance)
        if float(values[0]) < _SURE * sigma:
            return "doubtful", "Stable, but not beyond the uncertainties"
    if stability.near:
        return "doubtful", "Stable, but only just"
    return "stable", "Stable"


def _may_be_positive(stability: Stability, covariance: FloatArray, count: int) -> bool:
    """Tell whether none of the first eigenstiffnesses is below zero beyond its uncertainty."""
    spreads = [softest_deviation(stability, covariance, k) for k in range(count)]
    return bool((stability.eigenstiffness[:count] > -_SURE * np.array(spreads)).all())


def _facts(
    stiffness: Stiffness,
    claimed: CrystalClass,
    stability: Stability,
    sigma: float | None,
    symmetry: str,
) -> tuple[str, ...]:
    least = float(stability.eigenstiffness[0])
    softest = significant(least, 3) if not sigma else with_deviation(least, sigma)
    facts = [f"softest strain {softest} GPa ({stability.descriptions[0]})"]
    about = _symmetry_facts(stiffness, claimed, symmetry)
    is_news = bool(symmetry) and (len(about) > 1 or ";" in symmetry)
    facts = [*about, *facts] if is_news and stability.stable else [*facts, *about]
    if stability.stable:
        hill = averages(stiffness).hill
        index = anisotropy(stiffness, claimed.key == "cubic").universal
        facts.append(f"universal anisotropy {significant(index, 3)}")
        facts.append(
            f"K {significant(hill.bulk, 3)}, G {significant(hill.shear, 3)} GPa (Hill)"
        )
    return tuple(facts)


def _symmetry_facts(
    stiffness: Stiffness, claimed: CrystalClass, symmetry: str
) -> tuple[str, ...]:
    """Return what is said of the claimed class, and of the class that the table has.

    One sentence serves for both where the table has the class it claims.
    """
    off = distance(stiffness.voigt, claimed)
    form = claimed.name.replace(",", " with")  # "tetragonal with 6 constants"
    found = symmetry.replace(", 6 con", " with 6 con").replace(", 7 con", " with 7 con")
    if off > NOTABLE_DISTANCE:
        own = f"{significant(100 * off, 2)} % away from {form} in these axes"
    elif claimed.key == "triclinic":
        own = "no class claimed"
    elif found.startswith(form):
        return (found,)
    else:
        own = f"{form} as entered"
    return (own, found) if found else (own,)


def _detail(stiffness: Stiffness, claimed: CrystalClass, stability: Stability) -> str:
    lines = ["Eigenstiffnesses (Kelvin form) and their strains:"]
    lines += [
        f"   {significant(float(value))} GPa   {words}"
        for value, words in zip(stability.eigenstiffness, stability.descriptions, strict=True)
    ]
    lines += ["", f"Stability criteria for {claimed.name} crystals:"]
    lines += [
        f"   {'holds ' if item.holds else 'FAILS '}  {item.text}   "
        f"({significant(item.value)} {item.unit})"
        for item in criteria(stiffness.voigt, claimed)
    ]
    if distance(stiffness.voigt, claimed) > NOTABLE_DISTANCE:
        lines += ["   They read the free cells only; this table departs from the class."]
    lines += ["", "A crystal is stable when all six eigenstiffnesses are positive."]
    return "\n".join(lines)
