"""The verdict on a table of constants: one mark, one headline, the facts that decide."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from core.arrays import FloatArray
from core.numbers import significant
from core.tensor.averages import anisotropy, averages
from core.tensor.notation import KELVIN_WEIGHTS
from core.tensor.stability import Stability, assess, criteria
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, distance

NOTABLE_DISTANCE = 1e-6  # relative: below it a table has its class exactly


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

    mark: Literal["stable", "doubtful", "unstable"]
    headline: str
    facts: tuple[str, ...]
    detail: str

    @property
    def sentence(self) -> str:
        """The verdict as one sentence."""
        return f"{self.headline}: {'; '.join(self.facts)}."


def judge(
    stiffness: Stiffness, claimed: CrystalClass, deviation: FloatArray | None = None
) -> Verdict:
    """Return the verdict on a table.

    Parameters
    ----------
    stiffness : Stiffness
        Crystal axes, GPa.
    claimed : CrystalClass
        The symmetry the specimen claims.
    deviation : ndarray, shape (6, 6), optional
        Standard uncertainties of the constants, GPa, taken as independent.
    """
    stability = assess(stiffness)
    softest = float(stability.eigenstiffness[0])
    sigma = None if deviation is None else softest_deviation(stability, deviation)
    mark, headline = _mark(stability, softest, sigma)
    return Verdict(mark, headline, _facts(stiffness, claimed, stability, sigma),
                   _detail(stiffness, claimed, stability))


def softest_deviation(stability: Stability, deviation: FloatArray) -> float:
    """Return the standard uncertainty of the least eigenstiffness, GPa, to first order.

    With e the Kelvin eigenstrain, ∂λ/∂C_IJ = w_I w_J e_I e_J, twice that off the diagonal.
    """
    strain = stability.eigenstrains[:, 0] * KELVIN_WEIGHTS
    slope = np.outer(strain, strain) * (2.0 - np.eye(6))
    rows, columns = np.triu_indices(6)
    return float(np.linalg.norm((slope * deviation)[rows, columns]))


def _mark(
    stability: Stability, softest: float, sigma: float | None
) -> tuple[Literal["stable", "doubtful", "unstable"], str]:
    if not stability.stable:
        count = int((stability.eigenstiffness <= 0).sum())
        return "unstable", "Unstable" if count == 1 else f"Unstable in {count} strains"
    if sigma is not None and softest < 2 * sigma:
        return "doubtful", "Stable, but not beyond the uncertainties"
    if stability.near:
        return "doubtful", "Stable, but only just"
    return "stable", "Stable"


def _facts(
    stiffness: Stiffness, claimed: CrystalClass, stability: Stability, sigma: float | None
) -> tuple[str, ...]:
    softest = significant(float(stability.eigenstiffness[0]), 3)
    spread = "" if sigma is None else f" ± {significant(sigma, 2)}"
    facts = [f"softest strain {softest}{spread} GPa ({stability.descriptions[0]})"]
    off = distance(stiffness.voigt, claimed)
    if off > NOTABLE_DISTANCE:
        facts.append(f"{significant(100 * off, 2)} % away from {claimed.name} in these axes")
    else:
        facts.append(f"{claimed.name} as entered")
    if stability.stable:
        hill = averages(stiffness).hill
        index = anisotropy(stiffness, claimed.key == "cubic").universal
        facts.append(f"universal anisotropy {significant(index, 3)}")
        facts.append(f"K {significant(hill.bulk, 3)}, G {significant(hill.shear, 3)} GPa (Hill)")
    return tuple(facts)


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
    lines += ["", "A crystal is stable when all six eigenstiffnesses are positive."]
    return "\n".join(lines)
