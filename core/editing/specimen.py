"""What a user may change of a specimen: one pure function an edit, text in, a new value out.

Every function raises `InputError` with the field in `where` when the text cannot be used; the
specimen that was handed in is never changed.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from core import limits
from core.arrays import FloatArray
from core.crystal.cell import UnitCell, axes_matrix, axes_text, change_of_axes
from core.errors import InputError
from core.files.foreign.guess import Guess
from core.files.foreign.readings import AS_LISTED
from core.files.matrices import read_block, understand
from core.numbers import parse_number
from core.state import Matrix, Specimen, as_matrix, claimed_class, stiffness_of
from core.study.uncertainty.changes import (
    Change,
    carried,
    deviations_of,
    independent_covariance,
)
from core.tensor.notation import (
    SHEAR_FACTORS,
    constant_name,
    upper_triangle,
)
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
PASTED = "pasted block"
_FEW_WORDS = 9  # fewer than in any table without names
_NAMED = re.compile(r"[CcSs][\^_{]*[1-6]")  # "C11", "S_{14}": the name of a constant
_READ_AS: dict[str, dict[str, str]] = {
    "stiffness": {},
    "compliance": {"kind": "compliance", "unit": "1/TPa"},
    "uncertainty": {"kind": "stiffness", "unit": "GPa"},
}
"""What a face settles about a table that is pasted into it."""
_FACTORS = np.outer(SHEAR_FACTORS, SHEAR_FACTORS)  # engineering over tensor compliances


def fits_class(specimen: Specimen) -> bool:
    """Return whether the table has the form of the claimed class in its axes."""
    return distance(np.array(specimen.stiffness), claimed_class(specimen)) < FITS


# --- one cell -------------------------------------------------------------------------------


def set_constant(specimen: Specimen, face: str, row: int, column: int, text: str) -> Specimen:
    """Return the specimen with one cell of a face of the grid changed.

    In a table that has the form of its class the dependent cells follow and cannot be set
    themselves; in one that has not, the cell alone is set (and its mirror image).

    Parameters
    ----------
    specimen : Specimen
    face : "stiffness", "compliance" or "uncertainty"
        In GPa, 1/TPa with engineering shears, and GPa.
    row, column : int
        From 0; either triangle.
    text : str
    """
    i, j = sorted((row, column))
    name = cell_name(face, i, j)
    value = parse_number(text, name)
    claimed = claimed_class(specimen)
    follows = fits_class(specimen)
    if follows and claimed.kinds[i][j] != "independent":
        rule = rule_text(claimed, face, i, j)
        raise InputError(
            f"In a {claimed.name} crystal this cell is not free: {rule}.",
            "Choose a class with less symmetry to set it.",
            name,
        )
    table = _components(specimen, face)
    table[i, j] = table[j, i] = value / _factor(face, i, j)
    if face == "uncertainty":
        return _with_deviations(specimen, table, claimed if follows else None, name)
    if not follows:
        return _with_components(specimen, face, table, name)
    changed = _with_components(specimen, face, complete(table, claimed), name)
    exact = complete(np.array(changed.stiffness), claimed)  # an inverse leaves rounding dust
    return replace(changed, stiffness=as_matrix(exact))


def cell_name(face: str, i: int, j: int) -> str:
    """Return the name of a cell of a face: "C14", of the compliance "S14"."""
    name = constant_name(i, j)
    return name.replace("C", "S") if face == "compliance" else name


def rule_text(claimed: CrystalClass, face: str, i: int, j: int) -> str:
    """Return how a cell of a face stands in a class: "C66 = (C11 − C12)/2", "S56 = 2 S14"."""
    rule = dependence_text(claimed, i, j)
    if face != "compliance" or " = " not in rule:
        return rule
    name, terms = rule.replace("C", "S").split(" = ")
    if terms.endswith("/2"):  # ε₁₂ is half of γ₁₂, so the factor goes to the other side
        return f"{name} = 2 {terms.removesuffix('/2')}"
    first, second = (int(digit) - 1 for digit in re.findall(r"\d", terms))
    doubled = _FACTORS[i, j] == 2 * _FACTORS[first, second]
    sign, plain = ("−", terms[1:]) if terms.startswith("−") else ("", terms)
    return f"{name} = {sign}{'2 ' if doubled else ''}{plain}"


def _factor(face: str, i: int, j: int) -> float:
    return float(_FACTORS[i, j]) if face == "compliance" else 1.0


def _components(specimen: Specimen, face: str) -> FloatArray:
    """Return a face of the grid as tensor components, in which all faces follow one rule."""
    if face == "uncertainty":
        known = specimen.stiffness_std
        return np.zeros((6, 6)) if known is None else np.array(known)
    stiffness = stiffness_of(specimen)
    if face == "compliance":
        return np.array(stiffness.compliance) * 1e3 / _FACTORS
    return np.array(stiffness.voigt)


def _with_components(specimen: Specimen, face: str, table: FloatArray, where: str) -> Specimen:
    try:
        if face == "compliance":
            changed = Stiffness.from_compliance(table * _FACTORS * 1e-3)
        else:
            changed = Stiffness.from_voigt(table)
    except InputError as error:
        raise InputError(error.message, error.hint, where) from None
    return replace(specimen, stiffness=as_matrix(limits.stiffness(changed.voigt, where)))


def _with_deviations(
    specimen: Specimen, table: FloatArray, claimed: CrystalClass | None, where: str
) -> Specimen:
    """Return the specimen with other uncertainties, those of dependent cells following."""
    limits.deviations(table, where)
    if claimed is not None:
        table = deviations_of(independent_covariance(table, claimed))
    return replace(specimen, stiffness_std=_known(table), covariance=None)


def _known(deviations: FloatArray) -> Matrix | None:
    return as_matrix(deviations) if deviations.any() else None


# --- pasted tables and blocks ---------------------------------------------------------------


def set_block(specimen: Specimen, face: str, row: int, column: int, text: str) -> Specimen:
    """Return the specimen with a pasted table or block put in.

    A full table (6×6, a triangle, 21 numbers, a list such as C11 = 168.4) replaces everything
    wherever it is pasted, with it the uncertainties of the old numbers. A smaller block fills
    the cells from (row, column) on, and their mirror images; it may break the form of the
    class. A list of the constants of a class claims that class. `paste_words` tells how the
    text was taken.
    """
    block = _smaller_block(text)
    if block is None:
        return _with_whole_table(specimen, face, text)
    height, width = block.shape
    if row + height > 6 or column + width > 6:
        raise InputError(
            f"A block of {height}×{width} numbers does not fit from row {row + 1}, "
            f"column {column + 1} on.",
            "Paste it further up or left.",
            PASTED,
        )
    table = _filled(_components(specimen, face), face, row, column, block)
    if face == "uncertainty":
        return _with_deviations(specimen, table, None, PASTED)
    return _with_components(specimen, face, table, PASTED)


def paste_words(before: Specimen, after: Specimen, face: str, text: str) -> tuple[str, ...]:
    """Return how a pasted table was taken, and what of the old one is gone or stays.

    What changes the numbers comes first, what was merely taken for granted last.

    Parameters
    ----------
    before, after : Specimen
        As `set_block` got and gave it.
    face, text : str
    """
    if face == "uncertainty" or _smaller_block(text) is not None:
        return ()
    readings = understand(text, _READ_AS[face], PASTED).readings
    telling = {guess.field: _taken_words(guess) for guess in readings}
    words = [telling.pop(field, "") for field in ("unit", "class")]
    is_listed = any(guess.field == "class" and guess.value != AS_LISTED for guess in readings)
    if not is_listed and not fits_class(after):
        words.append(f"the claim to be {claimed_class(after).name} is as before")
    had = before.stiffness_std is not None or before.covariance is not None
    if had and after.stiffness_std is None:
        words.append("the old uncertainties are gone")
    return tuple(word for word in (*words, *telling.values()) if word)


def _taken_words(guess: Guess) -> str:
    """Return how one thing about a table was taken; nothing where that goes without saying."""
    if guess.field == "class":
        if guess.value == AS_LISTED:
            return ""
        name = crystal_class(*guess.value.split()).name.replace(",", " with")
        return f"class taken as {name}"
    converted = guess.field == "unit" and guess.value not in ("GPa", "1/TPa")
    if converted:
        return f"unit taken as {guess.value} and converted"
    return f"{guess.field} taken as {guess.value}" if guess.is_guess else ""


def belongs_in_dialog(face: str, text: str) -> bool:
    """Return whether a pasted text is more than the grid can take without asking.

    A plain block of numbers and a table that leaves no question are the grid's own; so is
    what holds no digit, which is no table at all.
    """
    if face != "stiffness" or not any(letter.isdigit() for letter in text):
        return False
    try:
        if _smaller_block(text) is not None:
            return False
        readings = understand(text, _READ_AS[face], PASTED).readings
    except InputError:
        return True
    return any(reading.question for reading in readings)


def _smaller_block(text: str) -> FloatArray | None:
    """Return a pasted block that is less than a table; None for a table.

    Raises
    ------
    InputError
        For a short text that is neither, naming what is wrong with it as a block.
    """
    try:
        block = np.array(read_block(text, PASTED))
    except InputError:
        if len(text.split()) < _FEW_WORDS and not _NAMED.search(text):
            raise
        return None
    height, width = block.shape
    return None if height > 6 or width > 6 or height == width == 6 else block


def _filled(
    table: FloatArray, face: str, row: int, column: int, block: FloatArray
) -> FloatArray:
    """Return a face with a block in it; a pair of mirror cells must be given alike."""
    given: dict[tuple[int, int], float] = {}
    for di, dj in np.ndindex(*block.shape):
        i, j = row + di, column + dj
        value = float(block[di, dj])
        if abs(given.get((j, i), value) - value) > 1e-6 * float(np.abs(block).max()):
            raise InputError(
                f"Row {j + 1}, column {i + 1} would be {given[j, i]:g} but row {i + 1}, "
                f"column {j + 1} would be {value:g}.",
                "The table is symmetric: make the two cells equal.",
                PASTED,
            )
        given[i, j] = value
        table[i, j] = table[j, i] = value / _factor(face, i, j)
    return table


def _with_whole_table(specimen: Specimen, face: str, text: str) -> Specimen:
    known = understand(text, _READ_AS[face], PASTED)
    for reading in known.readings:
        is_open = reading.question and (face != "uncertainty" or reading.field == "symmetry")
        if is_open:
            raise InputError(reading.question, "Make it plain in what you paste.", PASTED)
    if face == "uncertainty":
        return _with_deviations(specimen, np.array(known.stiffness), None, PASTED)
    limits.stiffness(known.stiffness, PASTED)
    std = None if known.std is None else _known(known.std)
    table = as_matrix(known.stiffness)
    taken = replace(specimen, stiffness=table, stiffness_std=std, covariance=None)
    listed = known.reading("class")
    if listed is None or listed.value == AS_LISTED:
        return taken
    key, *axis = listed.value.split()
    return replace(taken, crystal_class=key, unique_axis=(*axis, specimen.unique_axis)[0])


# --- the class ------------------------------------------------------------------------------


def set_class(specimen: Specimen, key: str, unique_axis: str | None = None) -> Specimen:
    """Return the specimen with another claimed class; dependent cells follow at once."""
    axis = unique_axis or specimen.unique_axis
    axis = crystal_class("monoclinic", axis).unique_axis  # refuses what is no axis
    claimed = crystal_class(key, axis)
    changed = changed_by(specimen, lambda table: complete(table, claimed))
    return replace(changed, crystal_class=claimed.key, unique_axis=axis)


def make_exact(specimen: Specimen) -> Specimen:
    """Return the specimen with the nearest table of its class (Kelvin norm)."""
    claimed = claimed_class(specimen)
    return changed_by(specimen, lambda table: project(table, claimed))


def changed_by(specimen: Specimen, change: Change) -> Specimen:
    """Return the specimen with a linear change of its table, the uncertainties with it."""
    table = change(np.array(specimen.stiffness))
    covariance = covariance_of(specimen)
    if covariance is None:
        return replace(specimen, stiffness=as_matrix(table))
    after = carried(covariance, change)
    return replace(
        specimen,
        stiffness=as_matrix(table),
        stiffness_std=_known(deviations_of(after)),
        covariance=None if specimen.covariance is None else as_matrix(after),
    )


def covariance_of(specimen: Specimen) -> FloatArray | None:
    """Return what is known of the errors as one covariance (21, 21), GPa², or None.

    Uncertainties without correlations are those of independent constants: of the free ones of
    the class where the table has its form, else of all 21.
    """
    if specimen.covariance is not None:
        return np.array(specimen.covariance)
    if specimen.stiffness_std is None:
        return None
    deviations = np.array(specimen.stiffness_std)
    if fits_class(specimen):
        return independent_covariance(deviations, claimed_class(specimen))
    return np.diag(upper_triangle(deviations) ** 2)


# --- everything else known ------------------------------------------------------------------


def set_field(specimen: Specimen, field: str, text: str) -> Specimen:
    """Return the specimen with one field of its form changed, one of `SPECIMEN_FIELDS`."""
    return SPECIMEN_FIELDS[field](specimen, text)


def _set_name(specimen: Specimen, text: str) -> Specimen:
    if not text.strip():
        raise InputError("A specimen wants a name.", where="name")
    return replace(specimen, name=text.strip())


def _set_density(specimen: Specimen, text: str) -> Specimen:
    if not text.strip():
        return replace(specimen, density=None)
    return replace(specimen, density=limits.density(parse_number(text, "density"), "density"))


def _set_temperature(specimen: Specimen, text: str) -> Specimen:
    if not text.strip():
        return replace(specimen, temperature_c=None)
    value = limits.temperature(parse_number(text, "temperature"), "temperature")
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
    """Return the specimen with another unit cell; six empty fields take the cell away.

    Parameters
    ----------
    specimen : Specimen
    texts : dict
        For each of `CELL_FIELDS` what its field holds: Å and degrees.
    """
    if not any(texts[field].strip() for field in CELL_FIELDS):
        return replace(specimen, cell=None)
    cell = UnitCell(*(parse_number(texts[field], field) for field in CELL_FIELDS))
    axes_matrix(cell, specimen.crystal_axes)  # refuses a cell in which they cannot be laid
    return replace(specimen, cell=cell)


def set_axes(specimen: Specimen, axes: str, re_express: bool) -> Specimen:
    """Return the specimen with another axes convention.

    Parameters
    ----------
    specimen : Specimen
    axes : str
        One of the conventions, or two statements of one's own.
    re_express : bool
        True turns the numbers into the new axes: the same crystal, its uncertainties turned
        with it. False keeps the numbers: another crystal, as when the first statement was a
        mistake.
    """
    canonical = axes_text(axes)
    if specimen.cell is not None:
        axes_matrix(specimen.cell, canonical)
    renamed = replace(specimen, crystal_axes=canonical)
    if not re_express or canonical == specimen.crystal_axes:
        return renamed
    if specimen.cell is None:
        raise InputError(
            "Turning the numbers into other axes needs the unit cell.",
            "Fill in the cell first.",
            "axes",
        )
    turn = change_of_axes(specimen.cell, specimen.crystal_axes, canonical)
    return replace(turned(specimen, turn), crystal_axes=canonical)


def turned(specimen: Specimen, rotation: FloatArray) -> Specimen:
    """Return the specimen with its numbers in other Cartesian axes, v_new = rotation v_old.

    What is said of the axes stays as it was.
    """
    covariance = covariance_of(specimen)
    if covariance is not None:  # turned errors are correlated, even where they were not
        specimen = replace(specimen, covariance=as_matrix(covariance))
    return changed_by(
        specimen, lambda table: Stiffness.from_voigt(table).rotate(rotation).voigt
    )
