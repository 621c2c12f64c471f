"""Other crystals that give the same speeds, or nearly, and which of them to believe.

Readings along few planes leave two well-known doubts. A crystal mirrored in the plane of the
readings gives the same speeds; and in a plane of symmetry only the square of C12 + C66 (or
C13 + C55, C23 + C44) shows, so that the sum may have either sign. With two of the three sums
reversed an orthorhombic crystal gives the same speeds in every direction, and differs in its
polarisations alone (Helbig & Schoenberg 1987, J. Acoust. Soc. Am. 81, 1235; reference from
memory). None of these lies near the best crystal, so that none is seen in its uncertainties.
"""

import numpy as np

from core.arrays import BoolArray, FloatArray
from core.study.recovery.descent import Goal, Trial, descend, evaluate
from core.study.recovery.model import Basis
from core.study.recovery.starts import with_reversed_sums
from core.tensor.notation import VOIGT_PAIRS, stiffness_to_kelvin

_NEAR = 100.0  # times a credible χ²: worth a few steps
_STEPS = 30
_AS_GOOD = 4.0  # of χ²: no worse than the best
_BY_NOISE = 0.02
_ANOTHER = 0.01  # relative Kelvin distance beyond which two crystals differ


def weigh_doubles(
    goal: Goal, best: Trial, also: FloatArray, credible: float
) -> tuple[Trial, FloatArray | None]:
    """Return the crystal to believe, and another that fits as well, if there is one.

    Any stable crystal that fits goes before an unstable one; of those whose χ² differs from
    the least by less than 4, the nearest to the anchor of the goal.

    Parameters
    ----------
    goal : Goal
        With an anchor.
    best : Trial
        One crystal.
    also : (K, P) array
        Constants that other starts arrived at.
    credible : float
        χ² below which a crystal fits.

    Returns
    -------
    believed : Trial
    rival : (6, 6) array or None
        The stable crystal that fits and is least like the one believed.
    """
    basis = goal.survey.basis
    trial = evaluate(goal, _doubles(basis, best.constants[0]))
    near = trial.constants[trial.chi2 < _NEAR * credible]
    pool = descend(goal, np.concatenate([best.constants, also, near]), _STEPS)
    fits = np.flatnonzero(pool.chi2 < credible)
    if best.chi2[0] >= credible or fits.size == 0:
        return best, None
    pool = pool.rows(fits)
    unstable = is_unstable(basis, pool.constants)
    away = _distance(basis, pool.constants, goal.anchor)
    least = pool.chi2[~unstable].min() if not unstable.all() else pool.chi2.min()
    worse = pool.chi2 > least + _AS_GOOD
    first = int(np.lexsort((away, worse, unstable))[0])
    apart = _distance(basis, pool.constants, pool.constants[first])
    apart[unstable] = 0.0
    farthest = int(apart.argmax())
    size = np.linalg.norm(pool.constants[first] @ basis.kelvin_root)
    rival = basis.table(pool.constants[farthest]) if apart[farthest] > _ANOTHER * size else None
    return pool.rows(np.array([first])), rival


def is_unstable(basis: Basis, constants: FloatArray) -> BoolArray:
    """Tell which of some constants (K, P) are far from those of any stable crystal.

    Within a fiftieth of the mean eigenstiffness noise may be to blame.
    """
    kelvin = stiffness_to_kelvin(basis.table(constants))
    mean = np.trace(kelvin, axis1=1, axis2=2) / 6.0
    return np.asarray(np.linalg.eigvalsh(kelvin)[:, 0] <= -_BY_NOISE * np.abs(mean))


def _distance(basis: Basis, constants: FloatArray, place: FloatArray | None) -> FloatArray:
    """Return the Kelvin distance of each of some constants (K, P) from a place (P,)."""
    origin = np.zeros(basis.size) if place is None else place
    return np.asarray(np.linalg.norm((constants - origin) @ basis.kelvin_root, axis=1))


def _doubles(basis: Basis, constants: FloatArray) -> FloatArray:
    """Return the constants (10, P) of three mirrored crystals and seven with sums reversed."""
    table = basis.table(constants)
    found = []
    for axis in range(3):
        # A component changes sign with an odd number of indices along the mirrored axis.
        odd = np.array([pair.count(axis) % 2 for pair in VOIGT_PAIRS])
        sign = np.where(odd, -1.0, 1.0)
        found.append(table * np.outer(sign, sign))
    mirrored = basis.constants(np.array(found))
    return np.concatenate([mirrored, with_reversed_sums(basis, constants)])
