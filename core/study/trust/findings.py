"""Everything that tells whether a table can be trusted, gathered in one value.

The parts are those of `hidden_axes`, `symmetry_verdict`, `closest`, `support`, `plausibility`
and `draws`; here they are only asked, in one go, for a worker to carry out.
"""

from __future__ import annotations

from dataclasses import dataclass

from core.arrays import FloatArray
from core.study.trust.plausibility import plausibility_notes
from core.study.trust.support import Support, supported_classes
from core.study.trust.symmetry_verdict import (
    SymmetryVerdict,
    entered_distances,
    symmetry_verdict,
)
from core.study.uncertainty.changes import deviations_of
from core.study.uncertainty.draws import StabilityChance, stability_chance
from core.task import Ticker
from core.tensor.closest import Share, decompose
from core.tensor.hidden_axes import HiddenAxes, nearest_classes
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass


@dataclass(frozen=True)
class Entered:
    """How far a table is from a class about the axes it is given in.

    Attributes
    ----------
    claimed : CrystalClass
        Monoclinic about whichever of x, y and z is nearest.
    percent : float
        100 ‖C − P(C)‖/‖C‖ in Kelvin form.
    log : float
        Log-Euclidean; NaN for a crystal that is not stable.
    """

    claimed: CrystalClass
    percent: float
    log: float


@dataclass(frozen=True, eq=False)
class Findings:
    """What has been found out about a table.

    Attributes
    ----------
    symmetry : SymmetryVerdict
    entered, hidden : tuple
        For every class, in the order of `core.tensor.symmetry.CLASS_KEYS`: about the given
        axes, and about the axes at which it fits best.
    shares : tuple of Share
        What the anisotropy is made of, about the given axes.
    notes : tuple of str
        What is odd about the numbers.
    supports : tuple of Support
        How well each class describes the table, the best first; empty without uncertainties.
    chance : StabilityChance or None
        None without uncertainties.
    """

    symmetry: SymmetryVerdict
    entered: tuple[Entered, ...]
    hidden: tuple[HiddenAxes, ...]
    shares: tuple[Share, ...]
    notes: tuple[str, ...]
    supports: tuple[Support, ...]
    chance: StabilityChance | None

    def hidden_of(self, key: str) -> HiddenAxes:
        """Return the axes found for a class."""
        return next(axes for axes in self.hidden if axes.class_key == key)

    def entered_of(self, key: str) -> Entered:
        """Return how far the table is from a class as entered."""
        return next(row for row in self.entered if row.claimed.key == key)


def examine(
    stiffness: Stiffness,
    density: float | None,
    claimed: CrystalClass,
    covariance: FloatArray | None = None,
    axes: str = "",
    chain: str = "orthorhombic",
    ticker: Ticker | None = None,
) -> Findings:
    """Return everything that tells whether a table can be trusted.

    Parameters
    ----------
    stiffness : Stiffness
        GPa, crystal axes.
    density : float or None
        kg/m³.
    claimed : CrystalClass
        The class that the crystal claims.
    covariance : ndarray, shape (21, 21), optional
        GPa², along the upper triangle by rows.
    axes : str
        How the crystal axes follow the cell, in words; empty where that is not known.
    chain : str
        Along which classes the anisotropy is taken apart: a key of `closest.CHAINS`.
    ticker : Ticker, optional
        Told of progress; may cancel.
    """
    ticker = ticker or Ticker()
    std = None if covariance is None else deviations_of(covariance)
    if std is not None and not std.any():
        std = None
    notes = plausibility_notes(stiffness, density, claimed, axes)
    ticker.tick(0.1)
    hidden = nearest_classes(stiffness, std, claimed.unique_axis)
    ticker.tick(0.7)
    entered = tuple(Entered(*row) for row in entered_distances(stiffness))
    supports: tuple[Support, ...] = ()
    chance = None
    if std is not None and covariance is not None:
        supports = supported_classes(stiffness, std, hidden)
        ticker.tick(0.9)
        chance = stability_chance(stiffness, covariance)
    ticker.tick(1.0)
    verdict = symmetry_verdict(stiffness, hidden, std)
    shares = decompose(stiffness, chain)
    return Findings(verdict, entered, hidden, shares, notes, supports, chance)
