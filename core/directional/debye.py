"""The Debye speed: the mean over the sphere that low-temperature heat capacity depends on."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from scipy.integrate import lebedev_rule

from core.arrays import FloatArray, read_only
from core.directional.medium import Medium
from core.directional.sphere import Directions, directions
from core.directional.waves import speeds

# Lebedev orders, each the check on the one before. 35 serves ordinary crystals to 1e-6; the
# last is the highest there is.
_ORDERS = (35, 59, 83, 131)
_ENOUGH = 1e-6  # relative change at which the refinement stops


@dataclass(frozen=True)
class Debye:
    """The Debye speed and how well the mean over the sphere has settled.

    Attributes
    ----------
    speed : float
        km/s; NaN where a wave does not propagate in some direction.
    order : int
        Lebedev order of the mean.
    relative_change : float
        By how much `speed` differs from that of the next lower order, relative; it bounds the
        error of the lower order, and that of `speed` is far smaller. NaN if `speed` is.
    """

    speed: float
    order: int
    relative_change: float


def debye_speed(medium: Medium) -> Debye:
    """Return v_D, with 3/v_D^3 the mean over all directions of the sum of v^-3 of the sheets.

    Parameters
    ----------
    medium : Medium
        With a density; in any axes.

    Returns
    -------
    Debye

    Raises
    ------
    ValueError
        If the medium has no density.

    Notes
    -----
    P. Debye, Ann. Phys. 344 (1912) 789. The sum over the three sheets is a smooth function of
    direction even where sheets touch, so that the rule of V. I. Lebedev converges
    exponentially with its order. Order 59 is compared with 35; where they differ by more than
    1e-6 the orders 83 and 131 follow.
    """
    order, speed, change = _ORDERS[0], _mean_speed(medium, _ORDERS[0]), np.nan
    for order in _ORDERS[1:]:
        coarser, speed = speed, _mean_speed(medium, order)
        change = abs(speed / coarser - 1.0)
        if not change > _ENOUGH:  # settled, or NaN that no order will mend
            break
    return Debye(speed, order, float(change))


def _mean_speed(medium: Medium, order: int) -> float:
    """Return the Debye speed by the Lebedev rule of one order, km/s."""
    dirs, weights = _sphere_rule(order)
    slowness_cubed = (speeds(medium, dirs) ** -3).sum(axis=0)
    return float((weights @ slowness_cubed / 3.0) ** (-1.0 / 3.0))


@lru_cache(maxsize=len(_ORDERS))
def _sphere_rule(order: int) -> tuple[Directions, FloatArray]:
    """Return the points of a Lebedev rule and their weights, which add up to one."""
    points, weights = lebedev_rule(order)
    return directions(points), read_only(weights / weights.sum())
