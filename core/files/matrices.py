"""Foreign tables of constants: 6×6 blocks, triangles and lists as people paste them.

`understand` says how it read a table, one `Guess` at a time, and asks where it cannot know;
`read_table` is for those who have nobody to ask.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, read_only
from core.errors import InputError
from core.files.foreign.cells import read_cells, read_number_rows
from core.files.foreign.facts import NO_FACTS, Facts, as_said, read_facts
from core.files.foreign.guess import Guess, RawTable
from core.files.foreign.readings import (
    AS_LISTED,
    read_class,
    read_kind,
    read_notation,
    read_rows,
    read_unit,
    tensor_components,
)
from core.files.foreign.shapes import read_shape, read_symmetry
from core.files.foreign.units import parse_unit
from core.numbers import shortened, significant
from core.tensor.notation import (
    KELVIN_WEIGHTS,
    SHEAR_FACTORS,
    kelvin_to_stiffness,
    parse_rows,
    restore_order,
    stiffness_to_kelvin,
)
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import complete, crystal_class

__all__ = ["FIELDS", "ForeignTable", "Guess", "Understood", "read_block", "read_table",
           "understand"]

FIELDS = ("shape", "symmetry", "kind", "unit", "rows", "notation", "class")
"""What can be understood of a table, and chosen by hand."""

_WEIGHTS = np.outer(KELVIN_WEIGHTS, KELVIN_WEIGHTS)
_SEVERAL = 4  # cells named one by one in a note; more are counted


@dataclass(frozen=True, eq=False)
class Understood:
    """A foreign table in our units, order and notation, and how it was read.

    Attributes
    ----------
    stiffness : ndarray, shape (6, 6)
        GPa, Voigt, order 11, 22, 33, 23, 13, 12; the axes are the table's own. While a
        question is open it is a preview of the likeliest reading.
    std : ndarray, shape (6, 6), or None
        Standard uncertainties, GPa; None where none is written.
    readings : tuple of Guess
        How each thing was understood, in the order of `FIELDS`.
    notes : tuple of str
        What is odd about the table but does not stop it.
    facts : Facts
        What the text says besides its numbers: name, density, class.
    """

    stiffness: FloatArray
    std: FloatArray | None
    readings: tuple[Guess, ...]
    notes: tuple[str, ...]
    facts: Facts = NO_FACTS

    @property
    def questions(self) -> tuple[str, ...]:
        """What must be answered, by an override, before the table is used."""
        return tuple(guess.question for guess in self.readings if guess.question)

    def reading(self, field: str) -> Guess | None:
        """Return the reading of a field; None where there was nothing to read."""
        return next((guess for guess in self.readings if guess.field == field), None)


@dataclass(frozen=True, eq=False)
class ForeignTable:
    """A table as read, in our units and order of rows.

    Attributes
    ----------
    stiffness : ndarray, shape (6, 6)
        GPa, Voigt order 11, 22, 33, 23, 13, 12.
    guesses : tuple of str
        Sentences: what was taken for granted, and why; and what is odd.
    std : ndarray, shape (6, 6), or None
        Standard uncertainties, GPa.
    facts : Facts
        What the text says besides its numbers: name, density, class.
    class_reading : Guess or None
        Which class a list of named constants is one of; None for other tables.
    """

    stiffness: FloatArray
    guesses: tuple[str, ...]
    std: FloatArray | None = None
    facts: Facts = NO_FACTS
    class_reading: Guess | None = None


def understand(
    text: str, overrides: Mapping[str, str] | None = None, where: str = ""
) -> Understood:
    """Return the stiffness that a text holds, and how the text was read.

    Read are a whole 6×6, a triangle, 21 numbers in a row, lists such as ``C11 = 168.4(3)``
    and rows typeset with LaTeX; stiffnesses or compliances in any usual unit, with the order
    of the rows as a heading or the labels say, in Voigt's or Kelvin's notation.

    Parameters
    ----------
    text : str
    overrides : mapping of str to str, optional
        Fields of `FIELDS` and what the user chose for them; they go before what the text
        itself says in lines such as ``# symmetry: mean``.
    where : str
        The file it comes from, for messages.

    Raises
    ------
    InputError
        For a text that is no table, naming the line and why; for a choice that does not
        exist; for compliances without an inverse.
    ValueError
        For an override of a field that does not exist.
    """
    chosen = dict(overrides or {})
    unknown = set(chosen) - set(FIELDS)
    if unknown:
        raise ValueError(f"no reading of a table is called {', '.join(sorted(unknown))}")
    table = read_cells(text, where)
    facts = read_facts(table, where)
    by_hand, chosen = chosen, {**facts.said, **chosen}
    raw, shape = read_shape(table, chosen.get("shape"), where)
    raw, symmetry = read_symmetry(raw, chosen.get("symmetry"))
    kind = read_kind(table, raw, chosen.get("kind"))
    unit = read_unit(table, raw, kind.value, chosen.get("unit"))
    rows = read_rows(table, raw, kind.value, chosen.get("rows"))
    notation = read_notation(table, raw, kind.value, rows.value, chosen.get("notation"))
    components = tensor_components(raw.values, kind.value, rows.value, notation.value)
    listed = None
    if np.isnan(components).any():
        claimed = _class_label(facts)
        components, listed = read_class(
            components, chosen.get("class"), where, claimed, kind.value)
    factor = parse_unit(unit.value).factor
    is_compliance = kind.value == "compliance"
    stiffness = _stiffness(components * factor, is_compliance)
    std = None
    if raw.has_sigmas:
        sigmas = factor * _component_sigmas(raw, is_compliance, rows.value, notation.value)
        std = read_only(_std(sigmas, stiffness if is_compliance else None, listed))
    found = (shape, symmetry, kind, unit, rows, notation, listed)
    readings = tuple(
        guess if guess.field in by_hand else as_said(guess, facts) for guess in found if guess
    )
    headings = tuple(head for head in table.headings if head[0] not in facts.lines)
    notes = facts.notes + _notes(headings, raw, kind.value, stiffness)
    return Understood(stiffness.voigt, std, readings, notes, facts)


def _class_label(facts: Facts) -> str:
    """Return the class that a text claims, as `read_class` names it; empty where none."""
    if facts.class_key == "monoclinic":
        return f"monoclinic {facts.unique_axis or 'y'}"
    return facts.class_key or ""


def read_table(text: str, where: str = "") -> ForeignTable:
    """Return the stiffness that a text table holds, and what was guessed about it.

    Raises
    ------
    InputError
        Naming the line that is no part of a table, the shape that was found, or the question
        that only the user can answer.
    """
    known = understand(text, where=where)
    asked = next((guess for guess in known.readings if guess.question), None)
    if asked is not None:
        raise InputError(asked.question, _advice(asked), where)
    guesses = tuple(
        f"{guess.field} taken as {guess.value}: {guess.reason}"
        for guess in known.readings if guess.is_guess
    )
    return ForeignTable(known.stiffness, guesses + known.notes, known.std, known.facts,
                        known.reading("class"))


def _advice(asked: Guess) -> str:
    """Return what to write into the text to answer a question."""
    if asked.field == "shape":
        return "Write the numbers as six rows of a triangle or of the whole table."
    others = [one for one in asked.choices if one != asked.value][:5]
    rest = f" (or {', '.join(others)})" if others else ""
    return f"Add a line to the text: # {asked.field}: {asked.value}{rest}."


def read_block(text: str, where: str = "") -> list[list[float]]:
    """Return the numbers of a pasted rectangular block, row by row.

    Raises
    ------
    InputError
        Naming the row and the column of what is not a number, or ragged rows.
    """
    rows = read_number_rows(text, where)
    if not rows:
        raise InputError("There are no numbers in what was pasted.", where=where)
    lengths = {len(row) for row in rows}
    if len(lengths) != 1:
        raise InputError(
            f"The pasted rows have {', '.join(str(len(row)) for row in rows)} numbers; "
            "rows of one length were expected.", where=where)
    return rows


def _stiffness(components: FloatArray, is_compliance: bool) -> Stiffness:
    """Return the stiffness of tensor components in GPa, or of compliances in 1/GPa."""
    if not is_compliance:
        return Stiffness.from_voigt(components)
    return Stiffness.from_compliance(components * np.outer(SHEAR_FACTORS, SHEAR_FACTORS))


# ------------------------------------------------------------------- uncertainties
def _component_sigmas(
    raw: RawTable, is_compliance: bool, rows: str, notation: str
) -> FloatArray:
    """Return the sizes of the uncertainties of tensor components, in the table's unit."""
    sigmas = restore_order(np.abs(raw.sigmas), parse_rows(rows))
    if notation == "Kelvin":
        return sigmas / _WEIGHTS
    return sigmas / np.outer(SHEAR_FACTORS, SHEAR_FACTORS) if is_compliance else sigmas


def _std(sigmas: FloatArray, inverse: Stiffness | None, listed: Guess | None) -> FloatArray:
    """Return the standard uncertainties of the stiffnesses, GPa.

    What was written is taken as independent. Dependent constants of a list follow those it
    names; those of a compliance go through δC = −C δS C (Kelvin form), to first order.
    """
    variances = np.zeros((6, 6))
    for (i, j), slope in _free_constants(listed):
        if sigmas[i, j] == 0:
            continue
        change = slope
        if inverse is not None:
            kelvin = inverse.kelvin
            change = kelvin_to_stiffness(kelvin @ stiffness_to_kelvin(slope) @ kelvin)
        variances += (change * sigmas[i, j]) ** 2
    std: FloatArray = np.sqrt(variances)
    return std


def _free_constants(listed: Guess | None) -> list[tuple[tuple[int, int], FloatArray]]:
    """Return the cells that vary by themselves, and how the table follows each."""
    if listed is None or listed.value == AS_LISTED:
        cells = [(i, j) for i in range(6) for j in range(i, 6)]
        cls = crystal_class("triclinic")
    else:
        cls = crystal_class(*listed.value.split())
        cells = list(cls.independent)
    slopes = []
    for cell in cells:
        unit = np.zeros((6, 6))
        unit[cell] = 1.0
        slopes.append((cell, complete(unit, cls)))
    return slopes


# --------------------------------------------------------------------------- notes
def _notes(
    headings: tuple[tuple[int, str], ...], raw: RawTable, kind: str, stiffness: Stiffness
) -> tuple[str, ...]:
    notes = [f"Line {line}, “{shortened(text, 60)}”, was taken as a heading."
             for line, text in headings if text]
    letter = "S" if kind == "compliance" else "C"
    upper = np.triu(np.ones((6, 6), dtype=bool))
    negative = upper & (raw.sigmas < 0)
    large = upper & (np.abs(raw.sigmas) > np.abs(np.nan_to_num(raw.values)))
    if negative.any():
        notes.append(f"The uncertainty of {_cells(negative, letter)} is negative; its size is "
                     "kept.")
    if large.any():
        notes.append(f"The uncertainty of {_cells(large, letter)} is larger than the value; it "
                     "is kept.")
    if not stiffness.is_stable:
        softest = significant(float(stiffness.eigenstiffness[0]), 3)
        notes.append(f"As read the crystal is not stable: its softest strain has a stiffness "
                     f"of {softest} GPa.")
    return tuple(notes)


def _cells(mask: BoolArray, letter: str) -> str:
    """Return the names of marked cells of the table as written: "C12, C13 and 4 more"."""
    names = [f"{letter}{i + 1}{j + 1}" for i, j in np.argwhere(mask)]
    if len(names) > _SEVERAL:
        return f"{', '.join(names[:_SEVERAL])} and {len(names) - _SEVERAL} more"
    return ", ".join(names)
