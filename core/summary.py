"""Everything about one specimen as plain dicts: what the command line and the report print.

Keys carry their units; the README lists them. What is not defined is None.
"""

from __future__ import annotations

import math
from dataclasses import asdict
from typing import Any

import numpy as np

from core.arrays import FloatArray
from core.crystal.directions import Direction, parse_direction
from core.crystal.indices import number_text
from core.crystal.orientation import misorientation
from core.directional.extremes import Extreme, extremes
from core.directional.medium import Medium
from core.directional.moduli import compressibility, poisson_extremes, shear_extremes, young
from core.directional.sphere import directions
from core.directional.waves import (
    focusing,
    group_velocities,
    longitudinality,
    modes,
    power_flow,
)
from core.state import (
    OrientationChoice,
    Specimen,
    claimed_class,
    rotation_of,
    stiffness_of,
)
from core.study.part import (
    SHEAR_NAMES,
    EngineeringConstants,
    PartRow,
    engineering_constants,
    part_table,
)
from core.study.trust.plausibility import density_notes, plausibility_notes
from core.study.verdict import judge
from core.task import Ticker
from core.tensor.averages import Averages, Bounds, anisotropy, averages, hashin_shtrikman
from core.tensor.hidden_axes import nearest_classes
from core.tensor.notation import reorder, rows_text
from core.tensor.stability import assess
from core.tensor.symmetry import distance, laue_rotations

_EXTREME_KEYS = {
    "young": "young_gpa",
    "compressibility": "linear_compressibility_per_tpa",
    "shear": "shear_gpa",
    "poisson": "poisson",
    "fast": "fast_km_s",
    "middle": "middle_km_s",
    "slow": "slow_km_s",
}


def medium_of(specimen: Specimen, rotation: FloatArray | None = None) -> Medium:
    """Return what the kernels need of a specimen, in crystal axes or turned into part axes."""
    medium = Medium(stiffness_of(specimen), specimen.density)
    return medium if rotation is None else medium.rotated(rotation)


# --- the whole specimen ---------------------------------------------------------------------


def summarise(specimen: Specimen, ticker: Ticker | None = None) -> dict[str, Any]:
    """Return the whole summary of a specimen, directions in crystal axes.

    Of an unstable or singular table, or one without a density, what is not defined is None.
    """
    medium = medium_of(specimen)
    stiffness = medium.stiffness
    claimed = claimed_class(specimen)
    stability = assess(stiffness)
    indices = anisotropy(stiffness, claimed.key == "cubic")
    return {
        "name": specimen.name,
        "stable": bool(stability.stable),
        "verdict": _verdict(specimen),
        "eigenstiffness_gpa": stability.eigenstiffness.tolist(),
        "averages": _averages(averages(stiffness), hashin_shtrikman(stiffness)),
        "anisotropy": {key: _number(value) for key, value in asdict(indices).items()},
        "symmetry": {
            "declared": claimed.key,
            "as_entered_percent": 100 * distance(stiffness.voigt, claimed),
            "nearest": _nearest(specimen),
        },
        "density_kg_m3": specimen.density,
        "debye_speed_km_s": _debye(medium),
        "extremes": _extremes(extremes(medium, ticker)),
        "notes": _notes(specimen),
    }


def _notes(specimen: Specimen) -> list[str]:
    """Return what is odd about a crystal, but for a missing density: that stands by itself."""
    notes = plausibility_notes(
        stiffness_of(specimen), specimen.density, claimed_class(specimen), specimen.crystal_axes
    )
    missing = density_notes(None) if specimen.density is None else ()
    return [note for note in notes if note not in missing]


def _verdict(specimen: Specimen) -> str:
    std, covariance = (
        None if matrix is None else np.array(matrix)
        for matrix in (specimen.stiffness_std, specimen.covariance)
    )
    return judge(stiffness_of(specimen), claimed_class(specimen), std, covariance).sentence


def _nearest(specimen: Specimen) -> list[dict[str, Any]]:
    """Return for every class how near the table comes, and about which axes (rows)."""
    std = specimen.stiffness_std
    found = nearest_classes(
        stiffness_of(specimen), None if std is None else np.array(std), specimen.unique_axis
    )
    return [
        {
            "class": axes.class_key,
            "distance_percent": float(axes.distance_percent),
            "axes": axes.rotation.tolist(),
        }
        for axes in found
    ]


def _debye(medium: Medium) -> float | None:
    if medium.density is None:
        return None
    # Imported here, for its quadrature takes longer to load than all else to compute.
    from core.directional.debye import debye_speed

    return _number(debye_speed(medium).speed)


# --- one direction --------------------------------------------------------------------------


def along(specimen: Specimen, text: str) -> dict[str, Any]:
    """Return every quantity along one direction, said in the crystal's own words."""
    return along_direction(medium_of(specimen), parse_direction(text, specimen.frame))


def along_direction(medium: Medium, direction: Direction) -> dict[str, Any]:
    """Return every quantity along a direction; medium and direction in crystal axes."""
    one = directions(np.array(direction.vector))
    least_shear, greatest_shear = shear_extremes(medium, one)
    least_poisson, greatest_poisson = poisson_extremes(medium, one)
    return {
        "direction": list(direction.vector),
        "young_gpa": _number(young(medium, one)[0]),
        "linear_compressibility_per_tpa": _number(compressibility(medium, one)[0]),
        "shear_min_gpa": _number(least_shear[0]),
        "shear_max_gpa": _number(greatest_shear[0]),
        "poisson_min": _number(least_poisson[0]),
        "poisson_max": _number(greatest_poisson[0]),
        "sheets": None if medium.density is None else _sheets(medium, one.n),
    }


def _sheets(medium: Medium, n: FloatArray) -> list[dict[str, Any]]:
    one = directions(n)
    wave = modes(medium, one)
    rays = group_velocities(medium, one)
    along_n = longitudinality(medium, one)
    flow = power_flow(medium, one)
    focus = focusing(medium, one)
    return [
        {
            "speed_km_s": _number(wave.speed[sheet, 0]),
            "slowness_s_km": _number(1 / wave.speed[sheet, 0]),
            "polarisation": wave.polarisation[sheet, :, 0].tolist(),
            "longitudinality": _number(along_n[sheet, 0]),
            "group_km_s": [_number(x) for x in rays.velocity[sheet, :, 0]],
            "power_flow_deg": _number(flow[sheet, 0]),
            "focusing": _number(focus[sheet, 0]),
            "degenerate": bool(wave.degenerate[sheet, 0]),
        }
        for sheet in range(3)
    ]


# --- parts ----------------------------------------------------------------------------------


def rotate(
    specimen: Specimen, choice: OrientationChoice, rows: tuple[int, ...], engineering: bool
) -> dict[str, Any]:
    """Return the 6×6 in part axes, its rows in the order wanted, and what the part shows.

    Parameters
    ----------
    specimen : Specimen
    choice : OrientationChoice
    rows : tuple of 6 ints
        From `core.tensor.notation.parse_rows`.
    engineering : bool
        Whether to add the engineering constants along X, Y, Z.

    Returns
    -------
    dict
        The compliance is None where the stiffness has no inverse.
    """
    rotation = rotation_of(choice, specimen)
    medium = medium_of(specimen, rotation)
    has_inverse = bool(np.isfinite(medium.compliance).all())
    data: dict[str, Any] = {
        "rotation": rotation.tolist(),
        "stiffness_gpa": reorder(medium.stiffness.voigt, rows).tolist(),
        "compliance_per_gpa": reorder(medium.compliance, rows).tolist()
        if has_inverse
        else None,
        "rows": rows_text(rows).split(),
    }
    if engineering:
        data["engineering"] = engineering_dict(engineering_constants(medium.stiffness))
    return data


def compare(
    first: Specimen,
    choice_a: OrientationChoice,
    second: Specimen,
    choice_b: OrientationChoice,
) -> dict[str, Any]:
    """Return A, B and B − A of the part table of two orientations or two crystals.

    The misorientation is given as the parts stand, and, for crystals of one class, with the
    turns that bring such a crystal back onto itself. A row that one of the two has not, as the
    waves of a crystal without a density, is None there.
    """
    rotation_a, rotation_b = rotation_of(choice_a, first), rotation_of(choice_b, second)
    table_a, table_b = (
        {row.key: row for row in part_table(medium_of(specimen, rotation))}
        for specimen, rotation in ((first, rotation_a), (second, rotation_b))
    )
    return {
        "a": _part(first, choice_a, rotation_a),
        "b": _part(second, choice_b, rotation_b),
        "misorientation_deg": misorientation(rotation_a, rotation_b).angle_deg,
        "misorientation_by_symmetry_deg": _by_symmetry(first, rotation_a, second, rotation_b),
        "rows": [
            _compared(row, table_a.get(key), table_b.get(key))
            for key, row in (table_a | table_b).items()
        ],
    }


def _by_symmetry(
    first: Specimen, rotation_a: FloatArray, second: Specimen, rotation_b: FloatArray
) -> float | None:
    """Return the least turn between parts that their crystals' own turns leave, degrees.

    None where the two crystals are of different classes. In an isotropic one nothing is turned.
    """
    claimed, other = claimed_class(first), claimed_class(second)
    if (claimed.key, claimed.unique_axis) != (other.key, other.unique_axis):
        return None
    if claimed.key == "isotropic":
        return 0.0
    return misorientation(rotation_a, rotation_b, laue_rotations(claimed)).angle_deg


def _part(
    specimen: Specimen, choice: OrientationChoice, rotation: FloatArray
) -> dict[str, Any]:
    turn = f" turn {' '.join(map(number_text, choice.turn))}" if any(choice.turn) else ""
    return {
        "name": specimen.name,
        "orientation": choice.text + turn,
        "rotation": rotation.tolist(),
    }


def _compared(row: PartRow, a: PartRow | None, b: PartRow | None) -> dict[str, Any]:
    first, second = (_number(None if part is None else part.value) for part in (a, b))
    both = None if first is None or second is None else second - first
    return {
        "key": row.key,
        "label": row.label,
        "unit": row.unit,
        "a": first,
        "b": second,
        "difference": both,
    }


def engineering_dict(constants: EngineeringConstants) -> dict[str, Any]:
    """Return engineering constants with the keys of the command line."""
    return {
        "young_gpa": [_number(x) for x in constants.young],
        "poisson": [[_number(x) for x in row] for row in constants.poisson],
        "shear_gpa": {
            name: _number(x) for name, x in zip(SHEAR_NAMES, constants.shear, strict=True)
        },
        "coupling": {name: _number(x) for name, x in constants.coupling.items()},
    }


# --- pieces ---------------------------------------------------------------------------------


def _averages(means: Averages, bounds: Bounds) -> dict[str, Any]:
    data: dict[str, Any] = {
        name: {
            "bulk_gpa": _number(mean.bulk),
            "shear_gpa": _number(mean.shear),
            "young_gpa": _number(mean.young),
            "poisson": _number(mean.poisson),
        }
        for name, mean in (("voigt", means.voigt), ("reuss", means.reuss), ("hill", means.hill))
    }
    data["hashin_shtrikman"] = {
        f"{key}_gpa": _number(value) for key, value in asdict(bounds).items()
    }
    return data


def _extremes(found: dict[str, tuple[Extreme | None, Extreme | None]]) -> dict[str, Any]:
    return {
        name: {
            "min": _extreme(found[key][0]) if key in found else None,
            "max": _extreme(found[key][1]) if key in found else None,
        }
        for key, name in _EXTREME_KEYS.items()
    }


def _extreme(found: Extreme | None) -> dict[str, Any] | None:
    if found is None:
        return None
    return {
        "value": float(found.value),
        "direction": found.direction.tolist(),
        "transverse": None if found.transverse is None else found.transverse.tolist(),
        "set": found.where,
    }


def _number(value: float | None) -> float | None:
    """Return a plain float, or None where it is not defined (JSON has no NaN)."""
    return None if value is None or not math.isfinite(value) else float(value)
