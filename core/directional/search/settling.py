"""From several places that share an extreme value to the one that is reported.

A search ends in many candidates. Those with the best value may be copies of one another by
symmetry, or lie on a whole circle, or be any direction at all; which it is, and which one
stands for the rest, is decided here in one way for every quantity.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from core.arrays import BoolArray, FloatArray, read_only
from core.directional.search.circles import (
    SAME_DIRECTION,
    ValueOf,
    canonical,
    chords,
    distinct,
    preference,
    rings_through,
)

Where = Literal["point", "ring", "all"]

POLE = read_only(np.array([0.0, 0.0, 1.0]))  # stands for all directions
PLATEAU = 1e-9  # of the scale: a quantity that varies by less over the sphere is a constant
_TIED = 1e-10  # of the scale: copies by symmetry agree to rounding, 1e-14
_LOOSE = 1e-5  # least over greatest curvature at which an extreme may be part of a ring


@dataclass(frozen=True, eq=False)
class Extreme:
    """A least or greatest value over all directions, and where it is.

    Attributes
    ----------
    value : float
        In the unit of the quantity.
    direction : (3,) array
        Unit vector in the axes of the medium. Of several equally right ones that whose last
        non-zero component is positive and whose z, then x, then y, is greatest.
    transverse : (3,) array or None
        The transverse direction m, for the shear modulus and Poisson's ratio.
    where : str
        "point": there, and at its copies by symmetry. "ring": all along a circle through that
        direction. "all": in every direction.
    """

    value: float
    direction: FloatArray
    transverse: FloatArray | None
    where: Where


@dataclass(frozen=True, eq=False)
class Candidates:
    """Where the searches for one extreme have ended.

    Attributes
    ----------
    value : (M,) array
        Sign × quantity: the least is the best.
    frames : (M, 3, 3) array
        Rows n, m, l.
    suspect : (M,) bool array
        Whether the candidate may lie on a ring.
    """

    value: FloatArray
    frames: FloatArray
    suspect: BoolArray


@dataclass(frozen=True, eq=False)
class Settled:
    """The place that is reported; see `Extreme`.

    Attributes
    ----------
    value : float
        Sign × quantity.
    direction : (3,) array
    transverse : (3,) array or None
        None too on a ring, where the candidates do not know it.
    where : str
    """

    value: float
    direction: FloatArray
    transverse: FloatArray | None
    where: Where


def loosely_curved(hessian: FloatArray) -> BoolArray:
    """Return whether each Hessian (M, k, k) is all but singular: a neighbour may be as good."""
    curvature = np.abs(np.linalg.eigvalsh(hessian))
    result: BoolArray = curvature.min(axis=1) <= _LOOSE * curvature.max(axis=1)
    return result


def settle(
    found: Candidates, value_of: ValueOf, scale: float, exchangeable: bool = False
) -> Settled:
    """Decide which of the best candidates is reported, and whether it is one of a ring.

    Parameters
    ----------
    found : Candidates
        At least one.
    value_of : callable
        Takes directions (3, N) to sign × quantity, best over the transverse direction.
    scale : float
        Size of the quantity.
    exchangeable : bool
        Whether n and m may be exchanged, as for the shear modulus.
    """
    best = float(found.value.min())
    tied = found.value <= best + _TIED * scale
    frames, values, suspect = found.frames[tied], found.value[tied], found.suspect[tied]
    n, m = canonical(frames[:, 0]), canonical(frames[:, 1])
    centres = np.concatenate([n[suspect], m[suspect]]) if exchangeable else n[suspect]
    centres = centres[distinct(centres)]
    rings = rings_through(value_of, centres, best, scale) if len(centres) else []
    if rings:
        points = np.array([ring.representative for ring in rings])
        return Settled(best, read_only(points[preference(points)[0]]), None, "ring")
    if exchangeable:
        n, m, values = np.concatenate([n, m]), np.concatenate([m, n]), np.tile(values, 2)
    chosen = preference(n)[0]
    same = np.flatnonzero(chords(n, n[chosen]) <= SAME_DIRECTION)
    chosen = int(same[preference(m[same])[0]])
    return Settled(float(values[chosen]), read_only(n[chosen]), read_only(m[chosen]), "point")
