"""What a user may change of a specimen: one pure function an edit, text in, a new value out.

Every function raises `InputError` with the field in `where` when the text cannot be used; the
specimen that was handed in is never changed.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from core.arrays import FloatArray
from core.crystal.cell import UnitCell, axes_text, change_of_axes
from core.errors import InputError
from core.files.matrices import read_block, read_table
from core.numbers import parse_number
from core.state import Specimen, as_matrix
from core.tensor.notation import SHEAR_FACTORS, constant_name
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import (
    CrystalClass,
    complete,
    crystal_class,
    dependence_text,
    distance,
    project,
)

FITS = 1e-9  # relative distance below which a table has the form of its class
CELL_FIELDS = ("a", "b", "c", "alpha", "beta", "gamma")
_FACTORS = np.outer(SHEAR_FACTORS, SHEAR_FACTORS)


def claimed_class(specimen: Specimen) -> CrystalClass:
    """Return the crystal class that a specimen claims."""
    return crystal_class(specimen.crystal_class, specimen.unique_axis)


def fits_class(specimen: Specimen) -> bool:
    """Return whether the table has the form of the claimed class in its axes."""
    return distance(np.array(specimen.stiffness), claimed_class(specimen)) < FITS


# ------------------------------------------------------------------ constants
def set_constant(specimen: Specimen, face: str, row: int, column: int, text: str) -> Specimen:
    """Return the specimen with one cell of a face of the grid changed.

    In a table that has the form of its class the dependent cells follow and cannot be set
    themselves; in one that has not, the cell alone is set (and its mirror image).
    """
    i, j = sorted((row, column))
    name = constant_name(i, j)
    value = parse_number(text, name)
    if face == "uncertainty":
        return _with_deviation(specimen, i, j, value)
    table = _components(specimen, face)
    claimed = claimed_class(specimen)
    follows = fits_class(specimen)
    if follows and claimed.kinds[i][j] != "independent":
        raise InputError(
            f"In a {claimed.name} crystal this cell is not free: "
            f"{dependence_text(claimed, i, j)}.",
            "Choose a class with less symmetry to set it.", name)
    factor = _FACTORS[i, j] if face == "compliance" else 1.0
    table[i, j] = table[j, i] = value / factor
    return _with_components(specimen, face, complete(table, claimed) if follows else table)


def set_block(specimen: Specimen, face: str, row: int, column: int, text: str) -> Specimen:
    """Return the specimen with a pasted block put in, its first number at a cell.

    A full table (6×6, a triangle, 21 numbers, a list) replaces everything wherever it is
    pasted; a smaller block fills the cells from (row, column) on.
    """
    whole = _whole_table(specimen, face, text)
    if whole is not None:
        return whole
    rows = read_block(text, "pasted block")
    height, width = len(rows), len(rows[0])
    if row + height > 6 or column + width > 6:
        raise InputError(
            f"A block of {height}×{width} numbers does not fit from row {row + 1}, "
            f"column {column + 1} on.", "Paste it further up or left.", "pasted block")
    table = _components(specimen, face)
    for di, numbers in enumerate(rows):
        for dj, value in enumerate(numbers):
            i, j = row + di, column + dj
            factor = _FACTORS[i, j] if face == "compliance" else 1.0
            table[i, j] = table[j, i] = value / factor
    if face == "uncertainty":
        return replace(specimen, stiffness_std=as_matrix(np.abs(table)), covariance=None)
    return _with_components(specimen, face, table)


def _whole_table(specimen: Specimen, face: str, text: str) -> Specimen | None:
    """Return the specimen with a pasted full table; None when the text is a smaller block."""
    if face == "uncertainty":
        return None
    try:
        rows = read_block(text, "pasted block")
        if len(rows) < 6 and len(rows) * len(rows[0]) != 21:
            return None
    except InputError:
        if "=" not in text and len(text.split()) < 21:
            return None
    if face == "compliance":
        numbers = np.array(read_block(text, "pasted block"))
        return replace(specimen, stiffness=as_matrix(Stiffness.from_compliance(numbers).voigt))
    return replace(specimen, stiffness=as_matrix(read_table(text, "pasted table").stiffness))


def _components(specimen: Specimen, face: str) -> FloatArray:
    """Return a face of the grid as tensor components, in which every face has one form."""
    if face == "uncertainty":
        return np.zeros((6, 6)) if specimen.stiffness_std is None else np.array(
            specimen.stiffness_std)
    stiffness = Stiffness.from_voigt(np.array(specimen.stiffness))
    if face == "compliance":  # shown in 1/TPa
        return np.array(stiffness.compliance) * 1e3 / _FACTORS
    return np.array(stiffness.voigt)


def _with_components(specimen: Specimen, face: str, table: FloatArray) -> Specimen:
    if face == "compliance":
        stiffness = Stiffness.from_compliance(table * _FACTORS * 1e-3).voigt
    else:
        stiffness = Stiffness.from_voigt(table).voigt
    return replace(specimen, stiffness=as_matrix(stiffness))


def _with_deviation(specimen: Specimen, i: int, j: int, value: float) -> Specimen:
    if value < 0:
        raise InputError("An uncertainty cannot be negative.", where=constant_name(i, j))
    table = _components(specimen, "uncertainty")
    table[i, j] = table[j, i] = value
    known = as_matrix(table) if table.any() else None
    return replace(specimen, stiffness_std=known, covariance=None)


def set_class(specimen: Specimen, key: str, unique_axis: str | None = None) -> Specimen:
    """Return the specimen with another claimed class; dependent cells follow at once."""
    axis = unique_axis or specimen.unique_axis
    claimed = crystal_class(key, axis)
    table = complete(np.array(specimen.stiffness), claimed)
    return replace(specimen, crystal_class=key, unique_axis=axis,
                   stiffness=as_matrix(table))


def make_exact(specimen: Specimen) -> Specimen:
    """Return the specimen with the nearest table of its class (Kelvin norm)."""
    nearest = project(np.array(specimen.stiffness), claimed_class(specimen))
    return replace(specimen, stiffness=as_matrix(nearest))


# ------------------------------------------------------------------ everything else known
def set_field(specimen: Specimen, field: str, text: str) -> Specimen:
    """Return the specimen with one field of its forms changed; see `SPECIMEN_FIELDS`."""
    if field in CELL_FIELDS:
        raise ValueError("the six numbers of a cell are set together: see set_cell")
    return SPECIMEN_FIELDS[field](specimen, text)


def _set_name(specimen: Specimen, text: str) -> Specimen:
    if not text.strip():
        raise InputError("A specimen wants a name.", where="name")
    return replace(specimen, name=text.strip())


def _set_density(specimen: Specimen, text: str) -> Specimen:
    if not text.strip():
        return replace(specimen, density=None)
    value = parse_number(text, "density")
    if value <= 0:
        raise InputError("A density is above zero.", "In kg/m³; leave it empty if unknown.",
                         "density")
    return replace(specimen, density=value)


def _set_temperature(specimen: Specimen, text: str) -> Specimen:
    if not text.strip():
        return replace(specimen, temperature_c=None)
    value = parse_number(text, "temperature")
    if value < -273.15:
        raise InputError("Nothing is colder than −273.15 °C.", where="temperature")
    return replace(specimen, temperature_c=value)


SPECIMEN_FIELDS: dict[str, Callable[[Specimen, str], Specimen]] = {
    "name": _set_name,
    "source": lambda specimen, text: replace(specimen, source=text.strip()),
    "notes": lambda specimen, text: replace(specimen, notes=text.strip()),
    "density": _set_density,
    "temperature": _set_temperature,
    "crystal_class": set_class,
    "unique_axis": lambda specimen, text: set_class(specimen, specimen.crystal_class, text),
}


def set_cell(specimen: Specimen, texts: dict[str, str]) -> Specimen:
    """Return the specimen with another unit cell; six empty fields take the cell away."""
    if not any(texts[field].strip() for field in CELL_FIELDS):
        return replace(specimen, cell=None)
    return replace(specimen, cell=UnitCell(
        *(parse_number(texts[field], field) for field in CELL_FIELDS)))


def set_axes(specimen: Specimen, axes: str, re_express: bool) -> Specimen:
    """Return the specimen with another axes convention.

    Parameters
    ----------
    specimen : Specimen
    axes : str
        One of the conventions, or two statements of one's own.
    re_express : bool
        True turns the numbers into the new axes: the same crystal. False keeps the numbers:
        another crystal, as when the first statement was a mistake.
    """
    canonical = axes_text(axes)
    changed = replace(specimen, crystal_axes=canonical)
    if not re_express or canonical == specimen.crystal_axes:
        return changed
    if specimen.cell is None:
        raise InputError("Turning the numbers into other axes needs the unit cell.",
                         "Fill in the cell first.", "axes")
    turn = change_of_axes(specimen.cell, specimen.crystal_axes, canonical)
    turned = Stiffness.from_voigt(np.array(specimen.stiffness)).rotate(turn)
    return replace(changed, stiffness=as_matrix(turned.voigt), stiffness_std=None,
                   covariance=None)
