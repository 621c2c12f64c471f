"""Standard uncertainties of the numbers without a direction of one's own choice.

Eigenstiffnesses, averages, indices of anisotropy, the constants of a part, global extremes:
each function returns the shape of the numbers it speaks of, so that a window shows the two side
by side. All to first order in the errors, given as a factor L, (21, r), GPa, in the axes of the
medium (see `core.study.uncertainty.covariance`). NaN where the number is undefined.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import astuple, dataclass

import numpy as np

from core.arrays import FloatArray
from core.directional import waves
from core.directional.debye import debye_speed
from core.directional.extremes import Extreme
from core.directional.medium import Medium
from core.directional.sphere import Directions, directions, mixed_products
from core.study.part import EngineeringConstants, engineering_constants, part_table
from core.study.uncertainty.propagation import propagate
from core.study.uncertainty.ray_sensitivity import GPA_TO_SQUARE_SPEED, wave_strain
from core.study.uncertainty.sensitivity import (
    Form,
    compressibility_form,
    mean_square,
    poisson_form,
    shear_form,
    young_form,
)
from core.tensor.averages import (
    Anisotropy,
    Averages,
    Bounds,
    Isotropic,
    anisotropy,
    averages,
    hashin_shtrikman,
)
from core.tensor.notation import VOIGT_INDEX, from_upper_triangle, stiffness_to_kelvin
from core.tensor.stiffness import Stiffness

_SHARED = 1e-7  # of the largest |eigenstiffness|: closer ones share their eigenstrains
_MET = 1e-6  # of the speed: sheets nearer than this meet at an extreme
_CONE = 1e-6  # opening of a cone across its widest: less, and it is a line where sheets meet
_SHEETS = {"fast": 0, "middle": 1, "slow": 2}

Deviations = tuple[float | None, float | None]


# --- invariants -----------------------------------------------------------------------------


def eigenstiffness_deviation(stiffness: Stiffness, factor: FloatArray) -> FloatArray:
    """Return the standard uncertainties of the six eigenstiffnesses, (6,), GPa, ascending.

    With e the eigenstrain, δλ = e δC e in Kelvin form. Equal eigenstiffnesses, which errors may
    split, have the root mean square over the eigenstrains that share them.
    """
    values, strains = np.linalg.eigh(stiffness.kelvin)
    errors = stiffness_to_kelvin(from_upper_triangle(factor.T))
    responses = np.moveaxis(strains.T @ errors @ strains, 0, -1)
    gaps = np.diff(values) > _SHARED * np.abs(values).max()
    variance = np.empty(6)
    for own in np.split(np.arange(6), np.flatnonzero(gaps) + 1):
        variance[own] = mean_square(responses[np.ix_(own, own)])
    return np.sqrt(variance)


@dataclass(frozen=True)
class Aggregates:
    """Standard uncertainties of a polycrystal without texture, and of the indices.

    Attributes
    ----------
    averages, anisotropy
        In place of each number its standard uncertainty, in the same unit.
    """

    averages: Averages
    anisotropy: Anisotropy


def aggregate_deviations(stiffness: Stiffness, factor: FloatArray, cubic: bool) -> Aggregates:
    """Return the standard uncertainties of averages and of indices of anisotropy.

    Parameters
    ----------
    stiffness : Stiffness
        In its cubic crystal axes if `cubic`, else in any frame.
    factor : ndarray, shape (21, r)
        GPa, the same frame.
    cubic : bool
        Whether Zener's ratio applies.
    """

    def numbers(medium: Medium) -> list[float]:
        means, index = averages(medium.stiffness), anisotropy(medium.stiffness, cubic)
        rows = (means.voigt, means.reuss, means.hill, index)
        return [np.nan if x is None else x for row in rows for x in astuple(row)]

    sigma = [float(x) for x in propagate(numbers, Medium(stiffness), factor)]
    voigt, reuss, hill = (Isotropic(*sigma[k : k + 4]) for k in (0, 4, 8))
    universal, logarithmic, bulk, shear, zener = sigma[12:]
    index = Anisotropy(universal, logarithmic, bulk, shear, zener if cubic else None)
    return Aggregates(Averages(voigt, reuss, hill), index)


def bounds_deviation(stiffness: Stiffness, factor: FloatArray) -> Bounds:
    """Return the standard uncertainties of the Hashin–Shtrikman bounds, GPa.

    Each of up to 43 tables has its bounds searched for anew: too slow to follow an edit.
    """
    sigma = propagate(
        lambda near: astuple(hashin_shtrikman(near.stiffness)), Medium(stiffness), factor
    )
    return Bounds(*(float(x) for x in sigma))


def debye_deviation(medium: Medium, factor: FloatArray) -> float:
    """Return the standard uncertainty of the Debye speed, km/s.

    The density, which the medium must have, counts as exact.
    """
    return float(propagate(lambda near: debye_speed(near).speed, medium, factor))


# --- a part ---------------------------------------------------------------------------------


def engineering_deviations(stiffness: Stiffness, factor: FloatArray) -> EngineeringConstants:
    """Return the standard uncertainties of the engineering constants of a part.

    Parameters
    ----------
    stiffness : Stiffness
        Part axes.
    factor : ndarray, shape (21, r)
        GPa, part axes.

    Returns
    -------
    EngineeringConstants
        In place of each number its standard uncertainty. From δS = −S δC S.
    """
    own = engineering_constants(stiffness)
    stiff = np.concatenate([own.young, own.shear])
    if not np.isfinite(stiff).any():
        return own
    S = stiffness.compliance
    change = -S @ from_upper_triangle(factor.T) @ S
    diagonal = np.diagonal(change, axis1=1, axis2=2)
    response = (change - own.response * diagonal[:, None, :]) * stiff
    sigma = np.sqrt((response**2).sum(axis=0))
    sizes = stiff**2 * np.sqrt((diagonal**2).sum(axis=0))
    poisson = sigma[:3, :3].T.copy()
    poisson[np.diag_indices(3)] = np.nan
    return EngineeringConstants(sizes[:3], poisson, sizes[3:], sigma)


def part_deviations(medium: Medium, factor: FloatArray) -> FloatArray:
    """Return the standard uncertainties of the rows of `core.study.part.part_table`, in order.

    Medium and factor are in part axes.
    """
    return propagate(lambda near: [row.value for row in part_table(near)], medium, factor)


# --- global extremes ------------------------------------------------------------------------


def extreme_deviations(
    medium: Medium, found: dict[str, tuple[Extreme | None, Extreme | None]], factor: FloatArray
) -> dict[str, Deviations]:
    """Return the standard uncertainties of global extremes.

    Parameters
    ----------
    medium : Medium
    found : dict
        From `core.directional.extremes.extremes` of this medium.
    factor : ndarray, shape (21, r)
        GPa, the same axes.

    Returns
    -------
    dict
        For each key of `found` those of the least and of the greatest, in its unit; None where
        there is no extreme.

    Notes
    -----
    At an extreme the value does not depend on the direction to first order, so that the
    direction may be held. The exception is the tip of a cone, where two sheets of waves meet:
    there the errors move the tip, and the value follows it.
    """
    sigma: dict[str, Deviations] = {}
    for key, (least, greatest) in found.items():
        sigma[key] = _of_one(medium, key, least, factor), _of_one(medium, key, greatest, factor)
    return sigma


def _of_one(medium: Medium, key: str, extreme: Extreme | None, L: FloatArray) -> float | None:
    if extreme is None:
        return None
    dirs = directions(extreme.direction)
    if key in _SHEETS:
        return _of_speed(medium, dirs, _SHEETS[key], L)
    across = dirs.tangents[0] if extreme.transverse is None else extreme.transverse[:, None]
    return float(np.sqrt(_MODULI[key](medium, dirs, across).variance(L)[0]))


_MODULI: dict[str, Callable[[Medium, Directions, FloatArray], Form]] = {
    "young": lambda medium, dirs, m: young_form(medium, dirs),
    "compressibility": lambda medium, dirs, m: compressibility_form(medium, dirs),
    "shear": lambda medium, dirs, m: shear_form(medium, dirs.n, m),
    "poisson": lambda medium, dirs, m: poisson_form(medium, dirs.n, m),
}


def _of_speed(medium: Medium, dirs: Directions, sheet: int, factor: FloatArray) -> float:
    """Return the standard uncertainty of an extreme speed of a sheet, km/s."""
    if medium.density is None:
        raise ValueError("waves need a density")
    found = waves.modes(medium, dirs)
    speed = found.speed[:, 0]
    own = np.flatnonzero(np.abs(speed - speed[sheet]) <= _MET * speed[sheet])
    strains = [wave_strain(found.polarisation[k], dirs.n) for k in own]
    one = np.ones(1)
    responses = np.array(
        [[Form(one, a, b).responses(factor)[:, 0] for b in strains] for a in strains]
    )
    if own.size == 2:
        tip = _tip(medium, dirs, found.polarisation[own, :, 0], responses)
        variance = float(mean_square(responses)) if tip is None else float(tip @ tip)
    else:
        variance = float(mean_square(responses))
    weight = GPA_TO_SQUARE_SPEED / (2 * medium.density * speed[sheet])
    return float(weight * np.sqrt(variance))


def _tip(
    medium: Medium, dirs: Directions, pair: FloatArray, responses: FloatArray
) -> FloatArray | None:
    """Return how ρv² at the tip of a cone follows each error, (r,), GPa; None where no cone is.

    On the two polarisations `pair`, (2, 3), the Christoffel matrix is a 2x2 with the mean m and
    the deviator (h, b), zero at the tip. An error changes m and (h, b); the tip moves across
    the sphere by what brings (h, b) back to zero, and m changes along the way.
    """
    towards = []
    for tangent in dirs.tangents:
        change = medium.christoffel @ (2 * mixed_products(dirs.n, tangent))
        towards.append(pair @ change[:, 0][VOIGT_INDEX] @ pair.T)
    slopes = np.array([_parts(each) for each in towards]).T  # rows m, h, b; columns tangents
    errors = _parts(responses)
    widths = np.linalg.svd(slopes[1:], compute_uv=False)
    if widths[1] <= _CONE * widths[0] or widths[0] <= _CONE * np.abs(medium.christoffel).max():
        return None
    moved = -np.linalg.solve(slopes[1:], errors[1:])
    return np.asarray(errors[0] + slopes[0] @ moved)


def _parts(form: FloatArray) -> FloatArray:
    """Return mean, half difference and off-diagonal of symmetric 2x2 forms (2, 2, ...)."""
    return np.array(
        [(form[0, 0] + form[1, 1]) / 2, (form[0, 0] - form[1, 1]) / 2, form[0, 1]]
    )
