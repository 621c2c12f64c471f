"""Standard uncertainties of what the window shows: some live, the rest for a worker.

Everything is to first order in the errors of the constants, save the draws at the pin. Results
are remembered by value, so that only what has changed is worked out again.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import lru_cache

import numpy as np

from core import live
from core.arrays import FloatArray
from core.directional import waves
from core.directional.medium import Medium
from core.directional.quantities import QUANTITIES, quantity
from core.directional.sphere import Directions, directions
from core.editing.specimen import covariance_of
from core.state import BenchState, OrientationChoice, Specimen, Vector3, claimed_class
from core.study.uncertainty import sensitivity
from core.study.uncertainty.covariance import (
    factor_of,
    rotate_covariance,
    rotate_factor,
    rotation_map,
)
from core.study.uncertainty.deviations import (
    aggregate_deviations,
    debye_deviation,
    part_deviations,
)
from core.study.uncertainty.draws import MonteCarlo, monte_carlo
from core.study.uncertainty.propagation import Contribution, contributions, propagate
from core.task import Ticker
from gui.presenting.stage import SHEET_NAMES, sides

# A place is the group and the label of a row of the table at the pin.
Place = tuple[str, str]
Deviations = dict[Place, float]

STIFFNESS = "stiffness"
SPLITTING: Place = ("middle and slowest wave", "splitting")
LONGITUDINALITY = "|p·n|"
IMPEDANCE = "Z"
LIVE_KEYS = (
    "young", "compressibility", "shear_least", "shear_greatest", "poisson_least",
    "poisson_greatest", "slowness", "phase",
)  # fmt: skip
"""Quantities whose uncertainty has a formula, so that a section's band follows every edit."""
_WAVE_KEYS = tuple(key for key, entry in QUANTITIES.items() if entry.wave)
_AT_ONCE = ("young", "compressibility")
_MODULI = tuple(key for key, entry in QUANTITIES.items() if not entry.wave)


# ------------------------------------------------------------------ what is known
@lru_cache(maxsize=16)
def crystal_covariance(specimen: Specimen) -> FloatArray | None:
    """Return the covariance of the constants, (21, 21), GPa², crystal axes; None if unknown."""
    covariance = covariance_of(specimen)
    return covariance if covariance is not None and covariance.any() else None


@lru_cache(maxsize=16)
def crystal_factor(specimen: Specimen) -> FloatArray | None:
    """Return the factor of the covariance, (21, r), GPa, crystal axes."""
    covariance = crystal_covariance(specimen)
    return None if covariance is None else factor_of(covariance)


@lru_cache(maxsize=16)
def part_factor(specimen: Specimen, choice: OrientationChoice) -> FloatArray | None:
    """Return the factor of the covariance, (21, r), GPa, part axes."""
    factor = crystal_factor(specimen)
    return None if factor is None else rotate_factor(factor, live.rotation(choice, specimen))


def pin_directions(pin: Vector3) -> Directions:
    """Return the pin as a set of one direction."""
    return directions(np.array(pin).reshape(3, 1))


# ------------------------------------------------------------------ live
def quick_deviations(state: BenchState) -> dict[str, Deviations]:
    """Return by side the uncertainties at the pin that take no time: of E, β and the speeds."""
    found = {}
    for side in sides(state):
        specimen, choice = state.specimen_of(side), state.orientation_of(side)
        factor = part_factor(specimen, choice)
        if factor is not None:
            found[side] = _quick(live.part_medium(specimen, choice), factor, state.pin)
    return found


def _quick(medium: Medium, factor: FloatArray, pin: Vector3) -> Deviations:
    one = pin_directions(pin)
    found: Deviations = {
        (STIFFNESS, quantity(key).short): float(
            sensitivity.deviation(key, medium, one, factor)[0, 0]
        )
        for key in _AT_ONCE
    }
    if medium.density is None:
        return found
    sigma = sensitivity.deviation("phase", medium, one, factor)[:, 0]
    speed = waves.speeds(medium, one)[:, 0]
    for sheet, name in enumerate(SHEET_NAMES):
        group = f"{name} wave"
        own, v = float(sigma[sheet]), float(speed[sheet])
        found[group, quantity("phase").short] = own
        found[group, quantity("slowness").short] = own / v**2
        found[group, IMPEDANCE] = own * medium.density * 1e-3
    return found


def section_deviation(state: BenchState, side: str, is_live: bool) -> FloatArray | None:
    """Return the uncertainty of the stage's quantity round the section, (sheets, N).

    None where nothing is known of the constants' errors, for the wave surface, whose points
    do not keep to the plane's directions, and, while `is_live`, for what is too slow to follow
    an edit.
    """
    key = state.quantity
    specimen, choice = state.specimen_of(side), state.orientation_of(side)
    factor = part_factor(specimen, choice)
    if factor is None or quantity(key).shape == "wave" or (is_live and key not in LIVE_KEYS):
        return None
    return _section(live.part_medium(specimen, choice), key, state.section, _Key(factor))


class _Key:
    """An array as part of the key of a memory: the same only as itself."""

    def __init__(self, array: FloatArray) -> None:
        self.array = array

    def __hash__(self) -> int:
        return id(self.array)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Key) and self.array is other.array


@lru_cache(maxsize=8)
def _section(medium: Medium, key: str, normal: Vector3, factor: _Key) -> FloatArray:
    """Return the uncertainty over a whole turn from that over the half."""
    circle = live.section_circle(normal)
    middle = circle.n.shape[1] // 2  # the first direction of the opposite half
    half = directions(circle.n[:, :middle])
    found = sensitivity.deviation(key, medium, half, factor.array)
    return np.concatenate([found, found, found[:, :1]], axis=1)


# ------------------------------------------------------------------ for the worker
@dataclass(frozen=True, eq=False)
class PinSpread:
    """Uncertainties at the pin and of the tables beside it.

    Attributes
    ----------
    pin : dict
        By side the uncertainty of every row.
    differences : dict
        Of B − A, where it has a formula: errors that both share cancel.
    shares : dict
        By side and key of a quantity, for every sheet, which constants its uncertainty comes
        from.
    draws : dict
        By side what 1,000 draws say of Young's modulus and the speeds at the pin.
    """

    pin: dict[str, Deviations] = field(default_factory=dict)
    differences: Deviations = field(default_factory=dict)
    shares: dict[tuple[str, str], tuple[tuple[Contribution, ...], ...]] = field(
        default_factory=dict
    )
    draws: dict[str, MonteCarlo] = field(default_factory=dict)


Request = tuple[tuple[tuple[str, Specimen, OrientationChoice], ...], Vector3]


def pin_request(state: BenchState) -> Request | None:
    """Return what `spread_at_pin` is asked; None where no uncertainty is known."""
    known = tuple(
        (side, state.specimen_of(side), state.orientation_of(side)) for side in sides(state)
    )
    if all(crystal_factor(specimen) is None for _, specimen, _ in known):
        return None
    return known, state.pin


def spread_at_pin(request: Request, ticker: Ticker) -> PinSpread:
    """Return all uncertainties at the pin; takes some tens of milliseconds."""
    found, (known, pin) = PinSpread(), request
    slopes: dict[str, dict[Place, FloatArray]] = {}
    for number, (side, specimen, choice) in enumerate(known):
        factor = part_factor(specimen, choice)
        covariance = crystal_covariance(specimen)
        if factor is None or covariance is None:
            continue
        medium, one = live.part_medium(specimen, choice), pin_directions(pin)
        found.pin[side] = _quick(medium, factor, pin) | _slow(medium, one, factor)
        ticker.tick((number + 0.4) / len(known))
        slopes[side] = {}
        back = rotation_map(live.rotation(choice, specimen))
        claimed = claimed_class(specimen)
        for key, places in _places(medium).items():
            gradients = sensitivity.gradients(key, medium, one)[:, :, 0] @ back
            slopes[side] |= dict(zip(places, gradients, strict=True))
            found.shares[side, key] = tuple(
                contributions(gradient, covariance, claimed)
                if np.isfinite(gradient).all()
                else ()
                for gradient in gradients
            )
        ticker.tick((number + 0.8) / len(known))
        turned = rotate_covariance(covariance, live.rotation(choice, specimen))
        found.draws[side] = monte_carlo(medium, one, turned)
    if len(slopes) == 2:
        specimens = {side: specimen for side, specimen, _ in known}
        found.differences.update(_differences(slopes, specimens))
    ticker.tick(1.0)
    return found


def _places(medium: Medium) -> dict[str, tuple[Place, ...]]:
    """Return the rows at the pin for which differences and contributions are worked out.

    Slownesses are left out: phase speeds say the same.
    """
    places: dict[str, tuple[Place, ...]] = {
        key: ((STIFFNESS, quantity(key).short),) for key in _MODULI
    }
    if medium.density is not None:
        for key in ("phase", "wave", "power_flow"):
            places[key] = tuple((f"{name} wave", quantity(key).short) for name in SHEET_NAMES)
    return places


def _slow(medium: Medium, one: Directions, factor: FloatArray) -> Deviations:
    """Return the uncertainties that `_quick` leaves out."""
    found: Deviations = {
        (STIFFNESS, quantity(key).short): float(
            sensitivity.deviation(key, medium, one, factor)[0, 0]
        )
        for key in _MODULI
        if key not in _AT_ONCE
    }
    if medium.density is None:
        return found
    for key in _WAVE_KEYS:
        if key in LIVE_KEYS:
            continue
        sigma = sensitivity.deviation(key, medium, one, factor)[:, 0]
        for sheet, name in enumerate(SHEET_NAMES):
            found[f"{name} wave", quantity(key).short] = float(sigma[sheet])

    def others(near: Medium) -> FloatArray:
        along = waves.longitudinality(near, one)[:, 0]
        return np.append(along, waves.shear_splitting(near, one))

    *along, splitting = propagate(others, medium, factor).tolist()
    for name, sigma_along in zip(SHEET_NAMES, along, strict=True):
        found[f"{name} wave", LONGITUDINALITY] = sigma_along
    found[SPLITTING] = splitting
    return found


def _differences(
    slopes: dict[str, dict[Place, FloatArray]], specimens: dict[str, Specimen]
) -> Deviations:
    """Return the uncertainty of B − A; one crystal cut two ways errs the same in both."""
    factors = {side: crystal_factor(specimen) for side, specimen in specimens.items()}
    a, b = factors["A"], factors["B"]
    if a is None or b is None:
        return {}
    found: Deviations = {}
    for place in slopes["A"].keys() & slopes["B"].keys():
        first, second = slopes["A"][place], slopes["B"][place]
        if specimens["A"] == specimens["B"]:
            sigma = float(np.linalg.norm((second - first) @ a))
        else:
            sigma = float(np.hypot(np.linalg.norm(first @ a), np.linalg.norm(second @ b)))
        if np.isfinite(sigma):
            found[place] = sigma
    return found


# ------------------------------------------------------------------ tables
@dataclass(frozen=True, eq=False)
class TableSpread:
    """Uncertainties of the tables of the reading.

    Attributes
    ----------
    aggregate : dict
        By the words of a row, in the order of its numbers.
    part : dict
        By side, in the order of the rows.
    """

    aggregate: dict[str, tuple[float, ...]]
    part: dict[str, FloatArray]


TableRequest = tuple[Specimen, tuple[tuple[str, Specimen, OrientationChoice], ...]]


def spread_of_tables(request: TableRequest, ticker: Ticker) -> TableSpread:
    """Return the uncertainties of aggregates and of the part; some tens of milliseconds."""
    specimen, known = request
    part = {}
    for number, (side, own, choice) in enumerate(known):
        factor = part_factor(own, choice)
        if factor is not None:
            part[side] = part_deviations(live.part_medium(own, choice), factor)
        ticker.tick((number + 1) / (len(known) + 1))
    return TableSpread(_aggregate(specimen), part)


def table_request(state: BenchState, specimen: Specimen) -> TableRequest | None:
    """Return what `spread_of_tables` is asked; None where no uncertainty is known."""
    known = tuple(
        (side, state.specimen_of(side), state.orientation_of(side)) for side in sides(state)
    )
    asked = (specimen, *(own for _, own, _ in known))
    if all(crystal_factor(own) is None for own in asked):
        return None
    return specimen, known


@lru_cache(maxsize=4)
def _aggregate(specimen: Specimen) -> dict[str, tuple[float, ...]]:
    factor = crystal_factor(specimen)
    if factor is None:
        return {}
    medium = live.crystal_medium(specimen.stiffness, specimen.density)
    found = aggregate_deviations(
        medium.stiffness, factor, claimed_class(specimen).key == "cubic"
    )
    means, index = found.averages, found.anisotropy
    rows = {
        name: (mean.bulk, mean.shear, mean.young, mean.poisson)
        for name, mean in (
            ("Voigt", means.voigt), ("Hill", means.hill), ("Reuss", means.reuss)
        )
    }  # fmt: skip
    spreads: dict[str, tuple[float, ...]] = rows | {
        "A universal": (index.universal,),
        "A log-Euclid": (index.log_euclidean,),
        "A % of K, G": (index.percent_bulk, index.percent_shear),
    }
    if index.zener is not None:
        spreads["Zener ratio"] = (index.zener,)
    if specimen.density is not None and medium.stiffness.is_stable:
        spreads["Debye, km/s"] = (debye_deviation(medium, factor),)
    return spreads
