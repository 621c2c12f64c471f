"""Tables for other programs: constants in part axes, quantities over directions, sections.

Every function returns the text of a file, headed by where its numbers come from, at full
precision with decimal points. Nothing is written here; see `core.files.text.write_text`.
"""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np

from core.arrays import FloatArray
from core.directional.quantities import Quantity, quantity
from core.directional.sphere import directions, great_circle, plane_axes
from core.directional.waves import group_velocities
from core.errors import InputError
from core.files.matrices import understand
from core.files.origin import Origin, origin_facts, origin_lines
from core.files.specimen import json_text
from core.numbers import full_precision
from core.study.part import EngineeringConstants, engineering_constants
from core.tensor.notation import VOIGT_PAIRS, reorder, rows_text
from core.tensor.stiffness import Stiffness

OUR_ROWS = (0, 1, 2, 3, 4, 5)
SHEETS = ("fastest", "middle", "slowest")
MARK = "#"
_FINEST_STEP, _COARSEST_STEP = 0.25, 45.0  # degrees
_NAMES = tuple(f"{i + 1}{j + 1}" for i, j in VOIGT_PAIRS)

Rows = tuple[int, ...]


# --- constants in part axes -----------------------------------------------------------------


def rotated_block(origin: Origin, rows: Rows = OUR_ROWS) -> str:
    """Return the stiffness in part axes as six tab-separated lines under a head of comments.

    Parameters
    ----------
    origin : Origin
    rows : tuple of 6 ints
        Order of rows and columns, from `core.tensor.notation.parse_rows`.

    Raises
    ------
    InputError
        When the text does not read back to the same tensor.
    """
    head = [_rows_line("stiffness", "GPa", rows), *origin_lines([origin], MARK)]
    body = _block(reorder(origin.medium.stiffness.voigt, rows), "")
    return _checked("\n".join([*head, *body]) + "\n", origin, rows)


def rotated_text(origin: Origin, rows: Rows = OUR_ROWS) -> str:
    """Return all that a part shows along its axes, as a page that is also a table.

    The stiffness stands bare; the compliance, the engineering constants and the coupling
    coefficients are comments, so that programs that read a 6×6, this one among them, take the
    page as it is. Parameters and errors are those of `rotated_block`.
    """
    stiffness = origin.medium.stiffness
    lines = [_rows_line("stiffness", "GPa", rows), *origin_lines([origin], MARK),
             *_block(reorder(stiffness.voigt, rows), ""), MARK]
    compliance = _compliance(stiffness)
    if compliance is None:
        lines.append(f"{MARK} compliance: none, the table has no inverse")
    else:
        shears = "engineering shears (gamma = 2 epsilon)"
        lines += [_rows_line("compliance", f"1/GPa, {shears}", rows),
                  *_block(reorder(compliance, rows), f"{MARK} ")]
    lines += [MARK, *_engineering_lines(engineering_constants(stiffness)), MARK,
              f"{MARK} checked: read back as a table, every constant the same"]
    return _checked("\n".join(lines) + "\n", origin, rows)


def rotated_csv(origin: Origin, rows: Rows = OUR_ROWS) -> str:
    """Return the same in columns: name, row, column, value, unit; one number a line.

    `rows` only decides the order of the lines: every line names its pairs of axes.
    """
    stiffness = origin.medium.stiffness
    table = [("C", _NAMES[i], _NAMES[j], float(stiffness.voigt[i, j]), "GPa")
             for i in rows for j in rows]
    compliance = _compliance(stiffness)
    if compliance is not None:
        table += [("S", _NAMES[i], _NAMES[j], float(compliance[i, j]), "1/GPa")
                  for i in rows for j in rows]
    table += _engineering_rows(engineering_constants(stiffness))
    return _csv(origin_lines([origin], MARK), ("name", "row", "column", "value", "unit"),
                [(*names, full_precision(value), unit) for *names, value, unit in table])


def rotated_json(origin: Origin, rows: Rows = OUR_ROWS) -> str:
    """Return the same as JSON, with the keys that `tricline rotate --json` has."""
    stiffness = origin.medium.stiffness
    compliance = _compliance(stiffness)
    constants = engineering_constants(stiffness)
    data = {
        "origin": dict(origin_facts(origin)),
        "rotation": origin.rotation.tolist(),
        "rows": rows_text(rows).split(),
        "stiffness_gpa": reorder(stiffness.voigt, rows).tolist(),
        "compliance_per_gpa": (None if compliance is None else
                               reorder(compliance, rows).tolist()),
        "engineering": {
            "young_gpa": _plain(constants.young), "poisson": _plain(constants.poisson),
            "shear_gpa": dict(zip(_NAMES[3:], _plain(constants.shear), strict=True)),
            "coupling": {key: _plain(value) for key, value in constants.coupling.items()},
        },
    }
    return json_text(data)


ROTATED: Mapping[str, tuple[str, str, Callable[[Origin, Rows], str]]] = {
    "page": ("a page, readable as a 6×6", ".txt", rotated_text),
    "block": ("a bare block of the stiffness", ".txt", rotated_block),
    "csv": ("one number a line (CSV)", ".csv", rotated_csv),
    "json": ("JSON", ".json", rotated_json),
}
"""Forms of the constants in part axes: words, file suffix, writer."""


def _checked(text: str, origin: Origin, rows: Rows) -> str:
    """Return the text once it has read back to the very numbers it was made from.

    The first line of the text says kind, unit, order and notation to whoever reads it; here
    they are given as well, in case the words of the specimen say something else.
    """
    meant = {"kind": "stiffness", "unit": "GPa", "rows": rows_text(rows), "notation": "Voigt"}
    found = understand(text, meant, origin.specimen.name).stiffness
    wanted = origin.medium.stiffness.voigt
    if not np.allclose(found, wanted, rtol=1e-12, atol=1e-12 * float(np.abs(wanted).max())):
        raise InputError("These constants do not read back as the same numbers.",
                         "Write them as JSON or CSV.", origin.specimen.name)
    return text


def _rows_line(name: str, unit: str, rows: Rows) -> str:
    return f"{MARK} {name} in {unit}, Voigt, rows and columns {rows_text(rows)}, part axes"


def _block(matrix: FloatArray, lead: str) -> list[str]:
    clean = matrix + 0.0  # no minus before a zero
    return [lead + "\t".join(repr(float(x)) for x in row) for row in clean]


def _compliance(stiffness: Stiffness) -> FloatArray | None:
    try:
        return stiffness.compliance
    except InputError:
        return None


def _plain(values: Any) -> Any:
    """Return numbers as lists and floats; what is not defined is None, as JSON has no NaN."""
    if np.ndim(values):
        return [_plain(value) for value in values]
    return float(values) if math.isfinite(values) else None


def _engineering_rows(found: EngineeringConstants) -> list[tuple[str, str, str, float, str]]:
    """Return name, row, column, value and unit of every engineering constant."""
    rows = [("E", str(i + 1), str(i + 1), float(found.young[i]), "GPa") for i in range(3)]
    rows += [("G", name, name, float(value), "GPa")
             for name, value in zip(_NAMES[3:], found.shear, strict=True)]
    rows += [("nu", str(i + 1), str(j + 1), float(found.poisson[i, j]), "1")
             for i in range(3) for j in range(3) if i != j]
    for key, value in found.coupling.items():
        caused, cause = key.split(",")
        rows.append(("eta", caused, cause, value, "1"))
    return rows


def _engineering_lines(found: EngineeringConstants) -> list[str]:
    texts = [f"{MARK} engineering constants along part axes 1 2 3 = X Y Z",
             f"{MARK} nu i j: loaded along i, widening along j; eta i j: strain i per strain j",
             f"{MARK} when only stress j acts (shears by two digits, pulls by one)"]
    for name, row, column, value, unit in _engineering_rows(found):
        place = row if row == column else f"{row} {column}"
        unit_text = "" if unit == "1" else f" {unit}"
        number = full_precision(value) or "not defined"
        texts.append(f"{MARK} {name} {place}  {number}{unit_text}")
    return texts


# --- quantities over directions -------------------------------------------------------------


def directions_csv(origin: Origin, keys: Sequence[str], step_deg: float = 5.0) -> str:
    """Return quantities over a grid of directions of the upper hemisphere.

    Parameters
    ----------
    origin : Origin
    keys : sequence of str
        Keys of `core.directional.quantities.QUANTITIES`.
    step_deg : float
        Between neighbours in θ (from part Z) and φ (from part X towards Y), 0.25 to 45.

    Raises
    ------
    InputError
        For a step that makes no grid, an unknown quantity, or waves without a density.
    """
    shown = [_known(origin, key) for key in keys]
    theta, phi = _grid(step_deg)
    t, p = np.deg2rad(theta), np.deg2rad(phi)
    n = np.stack([np.sin(t) * np.cos(p), np.sin(t) * np.sin(p), np.cos(t)])
    n = np.where(np.abs(n) < 1e-15, 0.0, n)
    columns = [theta, phi, *n, *(origin.rotation.T @ n)]
    names = ["theta [deg]", "phi [deg]", *(f"{axis} [part]" for axis in "XYZ"),
             *(f"{axis} [crystal]" for axis in "xyz")]
    grid = directions(n)
    for entry in shown:
        columns += list(entry.values(origin.medium, grid))
        names += _column_names(entry)
    head = [*origin_lines([origin], MARK), *_quantity_lines(shown),
            f"{MARK} directions: unit vectors; n and -n have the same values"]
    return _csv(head, names, _texts(columns))


def _grid(step_deg: float) -> tuple[FloatArray, FloatArray]:
    """Return polar angles and azimuths, degrees, the pole once."""
    if not _FINEST_STEP <= step_deg <= _COARSEST_STEP:
        raise InputError(
            f"A step of {step_deg:g} degrees makes no useful grid.",
            f"From {_FINEST_STEP:g} to {_COARSEST_STEP:g} degrees is accepted.", "step")
    rings = np.linspace(0.0, 90.0, round(90.0 / step_deg) + 1)
    turns = np.linspace(0.0, 360.0, round(360.0 / step_deg), endpoint=False)
    theta = np.concatenate([[0.0], np.repeat(rings[1:], turns.size)])
    phi = np.concatenate([[0.0], np.tile(turns, rings.size - 1)])
    return theta, phi


def section_csv(
    origins: Sequence[Origin], key: str, normal: Sequence[float], count: int = 721
) -> str:
    """Return a polar section as columns, one or two crystals side by side.

    Parameters
    ----------
    origins : sequence of Origin
        A, or A and B.
    key : str
        Key of the quantity.
    normal : 3 floats
        Normal of the section plane, part axes.
    count : int
        Directions once round, the last one the first again.
    """
    plane = np.array(normal, dtype=float)
    circle = great_circle(plane, count)
    across, up = plane_axes(plane)
    angle = np.linspace(0.0, 360.0, count)
    names = ["angle [deg]", *(f"{axis} [part]" for axis in "XYZ")]
    columns = [angle, *np.where(np.abs(circle.n) < 1e-15, 0.0, circle.n)]
    entry = quantity(key)
    for origin in origins:
        entry = _known(origin, key)
        lead = f"{origin.side} " if origin.side else ""
        columns += list(entry.values(origin.medium, circle))
        names += [lead + name for name in _column_names(entry)]
        if entry.shape == "wave":
            velocity = group_velocities(origin.medium, circle).velocity
            for sheet, name in enumerate(SHEETS):
                columns += [axis @ velocity[sheet] for axis in (across, up, plane)]
                names += [f"{lead}{name} ray {axis} [km/s]" for axis in ("right", "up", "out")]
    head = [*origin_lines(origins, MARK), *_quantity_lines([entry]),
            f"{MARK} section plane: normal {_vector(plane)} in part axes; angle from "
            f"{_vector(across)} towards {_vector(up)}"]
    return _csv(head, names, _texts(columns))


def section_data(
    origins: Sequence[Origin], key: str, normal: Sequence[float], count: int = 721
) -> dict[str, Any]:
    """Return a polar section as plain lists, keys with their units where they have one.

    Parameters are those of `section_csv`.
    """
    plane = np.array(normal, dtype=float)
    circle = great_circle(plane, count)
    across, up = plane_axes(plane)
    entry = quantity(key)
    curves = []
    for origin in origins:
        values = _known(origin, key).values(origin.medium, circle)
        for sheet, row in enumerate(values):
            curves.append({
                "side": origin.side or "A", "name": origin.specimen.name,
                "sheet": SHEETS[sheet] if entry.sheets == 3 else None, "value": _plain(row)})
    return {"quantity": key, "unit": entry.unit, "normal": plane.tolist(),
            "right": (across + 0.0).tolist(), "up": (up + 0.0).tolist(),
            "angle_deg": np.linspace(0.0, 360.0, count).tolist(),
            "direction": circle.n.T.tolist(), "curves": curves}


def _known(origin: Origin, key: str) -> Quantity:
    """Return a quantity that can be computed for a crystal."""
    entry = quantity(key)
    if entry.wave and origin.specimen.density is None:
        raise InputError(
            f"{entry.name} wants a density, and {origin.specimen.name} has none.",
            "Add “density_kg_m3” to the specimen.", "density")
    return entry


def _column_names(entry: Quantity) -> list[str]:
    unit = entry.unit.replace("°", "deg") or "1"
    if entry.sheets == 1:
        return [f"{entry.key} [{unit}]"]
    return [f"{entry.key} {sheet} [{unit}]" for sheet in SHEETS]


def _quantity_lines(entries: Sequence[Quantity]) -> list[str]:
    return [f"{MARK} {entry.key}: {entry.name}. {entry.definition}" for entry in entries]


def _vector(vector: FloatArray) -> str:
    return "(" + " ".join(f"{x + 0.0:.10g}" for x in vector) + ")"


def _texts(columns: Sequence[FloatArray]) -> list[tuple[str, ...]]:
    return list(zip(*([full_precision(x + 0.0) for x in column.tolist()] for column in columns),
                    strict=True))


def _csv(head: Sequence[str], names: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    stream = io.StringIO()
    stream.write("".join(f"{line}\n" for line in head))
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(names)
    writer.writerows(rows)
    return stream.getvalue()
