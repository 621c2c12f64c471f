"""Whether a table can be what it says: notes in plain sentences, never refusals.

Each function looks at one thing and returns what is odd about it; nothing odd, no sentence.
The ranges are those of known solids, widely drawn: from solid neon to diamond and osmium.
"""

from __future__ import annotations

import math
from itertools import permutations

import numpy as np

from core.directional.medium import Medium
from core.directional.sphere import sphere_mesh
from core.directional.waves import speeds
from core.numbers import significant
from core.tensor.averages import averages
from core.tensor.closest import simplest_class
from core.tensor.notation import restore_order, rows_text
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, distance

SPEEDS = (0.1, 25.0)  # km/s
BULK = (0.5, 500.0)  # GPa; solid neon about 1, diamond 442
SHEAR = (0.2, 600.0)  # GPa; solid neon about 0.6, diamond 535
DENSITY = (80.0, 23_000.0)  # kg/m³; solid hydrogen 86, osmium 22,590

_BULK_SPEED = (1.4, 12.5)  # km/s, √(K/ρ): caesium iodide 1.7, diamond 11.2
_USUAL_BULK = (2.0, 450.0)  # GPa
_CURES = {-1: (10.0, "larger", "10¹¹ dyn/cm² or 10¹⁰ Pa"), 1: (0.1, "smaller", "kbar")}
_MESH = 3  # 321 directions: extremes within a per cent or so
_NEAR = 5e-3  # relative distance to a class, as the rounding of a printed table leaves it
_FAR = 1e-2
_BETTER = 0.2


def plausibility_notes(
    stiffness: Stiffness,
    density: float | None,
    cls: CrystalClass,
    axes: str = "",
) -> tuple[str, ...]:
    """Return everything that is odd about a crystal, one plain sentence each.

    Parameters
    ----------
    stiffness : Stiffness
        In crystal axes.
    density : float or None
        kg/m³.
    cls : CrystalClass
        The class that the crystal claims.
    axes : str
        How the crystal axes follow the cell, in words; empty where that is not known.
    """
    return (
        *density_notes(density),
        *speed_notes(stiffness, density),
        *average_notes(stiffness),
        *unit_notes(stiffness, density),
        *row_notes(stiffness, cls),
        *trigonal_notes(stiffness, cls, axes),
    )


def density_notes(density: float | None) -> tuple[str, ...]:
    """Return what is odd about a density, kg/m³: missing, or that of no solid."""
    if density is None:
        return ("No density is given, so there are no wave speeds.",)
    if DENSITY[0] <= density <= DENSITY[1]:
        return ()
    said = f"{significant(density)} kg/m³ is the density of no known solid"
    for factor, unit in ((1e3, "g/cm³"), (1e-3, "mg/cm³ or g/m³")):
        if DENSITY[0] <= factor * density <= DENSITY[1]:
            return (f"{said}; in {unit} it would be {significant(factor * density)} kg/m³.",)
    return (f"{said}; they lie between 80 and 23,000 kg/m³.",)


def speed_notes(stiffness: Stiffness, density: float | None) -> tuple[str, ...]:
    """Return what is odd about the wave speeds: any outside 0.1 to 25 km/s."""
    if density is None or not density > 0:
        return ()
    values = speeds(Medium(stiffness, density), sphere_mesh(_MESH).half)
    values = values[np.isfinite(values)]
    notes = []
    if values.size and values.max() > SPEEDS[1]:
        notes.append(f"Waves would run at up to {significant(values.max(), 3)} km/s; none "
                     "faster than 25 km/s is known in a solid.")
    if values.size and values.min() < SPEEDS[0]:
        notes.append(f"Waves would run as slowly as {significant(values.min(), 3)} km/s; less "
                     "than 0.1 km/s is known of no crystal.")
    return tuple(notes)


def average_notes(stiffness: Stiffness) -> tuple[str, ...]:
    """Return what is odd about the averages over all directions: K, G and ν of a polycrystal.

    Hill's averages; Voigt's for a crystal that is not stable.
    """
    means = averages(stiffness)
    mean = means.hill if math.isfinite(means.hill.shear) else means.voigt
    notes = []
    for name, value, (low, high) in (("bulk", mean.bulk, BULK), ("shear", mean.shear, SHEAR)):
        if not low <= value <= high:
            notes.append(
                f"The average {name} modulus, {significant(value, 3)} GPa, is that of no known "
                f"solid; they lie between {low:g} and {high:g} GPa.")
    if not -1 < mean.poisson < 0.5:
        notes.append(f"The average Poisson's ratio, {significant(mean.poisson, 3)}, lies "
                     "outside −1 to 0.5: the average of this crystal would not be stable.")
    return tuple(notes)


def unit_notes(stiffness: Stiffness, density: float | None) -> tuple[str, ...]:
    """Return whether values ten times larger or smaller would be those of a usual solid.

    The bulk modulus decides, and with a density √(K/ρ), a speed that differs less from solid
    to solid. A light crystal in kbar may pass for a hard one.
    """
    bulk = averages(stiffness).voigt.bulk
    if not bulk > 0:
        return ()
    known = density if density is not None and DENSITY[0] <= density <= DENSITY[1] else None
    cure = _CURES.get(_size(bulk, known))
    if cure is None or _size(cure[0] * bulk, known) != 0:
        return ()
    factor, way, source = cure
    return (f"The bulk modulus, {significant(bulk, 3)} GPa, is unusual for a solid"
            f"{'' if known is None else ' of this density'}; with values ten times {way} it "
            f"would be {significant(factor * bulk, 3)} GPa. Were they given in {source}?",)


def _size(bulk: float, density: float | None) -> int:
    """Return whether a bulk modulus is too small for a solid (−1), too large (1), or fits."""
    speed = None if density is None else math.sqrt(1e3 * bulk / density)
    if bulk < _USUAL_BULK[0] or (speed is not None and speed < _BULK_SPEED[0]):
        return -1
    return int(bulk > _USUAL_BULK[1] or (speed is not None and speed > _BULK_SPEED[1]))


def row_notes(stiffness: Stiffness, cls: CrystalClass) -> tuple[str, ...]:
    """Return whether another order of the shear rows makes the table more symmetric.

    First against the class the crystal claims; where that says nothing, whether any other
    order leaves fewer constants.
    """
    table = stiffness.voigt
    others = [order for order in _shear_orders() if order != (0, 1, 2, 3, 4, 5)]
    entered = distance(table, cls)
    tried = [(distance(restore_order(table, order), cls), order) for order in others]
    best, order = min(tried)
    if entered > _FAR and best < _BETTER * entered:
        return (_row_sentence(order, cls, best, entered),)
    if entered <= _NEAR and cls.key != "triclinic":
        return ()
    now, _ = simplest_class(table, _NEAR)
    for order in others:
        found, off = simplest_class(restore_order(table, order), _NEAR)
        was = distance(table, found)
        if len(found.independent) < len(now.independent) and was > _FAR:
            return (_row_sentence(order, found, off, was),)
    return ()


def _shear_orders() -> list[tuple[int, ...]]:
    return [(0, 1, 2, *shears) for shears in permutations((3, 4, 5))]


def _row_sentence(
    order: tuple[int, ...], cls: CrystalClass, distance_then: float, distance_now: float
) -> str:
    shears = rows_text(order).split(" ", 3)[3]
    within = f"within {significant(100 * distance_then, 2)} %"
    then = "exactly" if distance_then < 1e-9 else within
    return (f"If the last three rows were given in the order {shears} instead of 23 13 12, the "
            f"table would be {cls.name} {then}; as it is, it is "
            f"{significant(100 * distance_now, 2)} % away.")


def trigonal_notes(stiffness: Stiffness, cls: CrystalClass, axes: str = "") -> tuple[str, ...]:
    """Return a reminder that the sign of C14 goes with the choice of x in trigonal crystals."""
    if cls.key not in ("trigonal_6", "trigonal_7"):
        return ()
    c14 = float(stiffness.voigt[0, 3])
    if abs(c14) <= 1e-9 * float(np.abs(stiffness.voigt).max()):
        return ()
    said = f" ({axes})" if axes else ""
    return (f"C14 is {significant(c14)} GPa here; in axes turned 60° about z it is "
            f"{significant(-c14)}. Check that the constants and the crystal axes{said} come "
            "from the same source.",)
