"""How the numbers of a foreign table may be meant: shape, kind, unit, order of rows, notation.

Every reading is a `Guess`: a value, the reason for it, and a question where the numbers
allow another reading that cannot be ruled out. Nothing here reads text.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import permutations

import numpy as np

from core.arrays import FloatArray
from core.errors import InputError
from core.files.table_cells import Number, Row, TableText, place
from core.files.table_units import (
    KINDS,
    UNIT_CHOICES,
    find_kind,
    find_notation,
    find_order,
    find_units,
    parse_unit,
)
from core.numbers import significant
from core.tensor.notation import (
    compliance_to_kelvin,
    kelvin_to_stiffness,
    parse_rows,
    restore_order,
    rows_text,
    stiffness_to_kelvin,
)
from core.tensor.symmetry import CLASS_KEYS, complete, crystal_class, distance

OUR_ORDER = "11 22 33 23 13 12"
NOTATIONS = ("Voigt", "Kelvin")
AS_LISTED = "as listed"
SYMMETRY_CHOICES = ("upper", "lower", "mean")

SOFTEST, STIFFEST = 3.0, 1200.0  # GPa: largest constant of nearly all crystals; diamond 1079
_SYMMETRIC = 1e-6  # of the largest cell
_FITS = 5e-3  # relative distance: the rounding of a printed table
_NAMES_FIT = 2e-3  # relative: a constant that a list names beside those it depends on

_ORDERS = (OUR_ORDER, "11 22 33 12 13 23", "11 22 33 12 23 13") + tuple(
    order for order in (f"11 22 33 {' '.join(shears)}"
                        for shears in permutations(("23", "13", "12")))
    if order not in (OUR_ORDER, "11 22 33 12 13 23", "11 22 33 12 23 13")
)
"""All orders of the shear rows, the commonest first."""

_SHAPES = {
    "full 6×6": (6,) * 6,
    "upper triangle": (6, 5, 4, 3, 2, 1),
    "lower triangle": (1, 2, 3, 4, 5, 6),
}
_IN_A_ROW = ("21 along the upper triangle", "21 along the lower triangle")


@dataclass(frozen=True)
class Guess:
    """One thing that was understood of a table.

    Attributes
    ----------
    field : str
        "shape", "symmetry", "kind", "unit", "rows", "notation" or "class".
    value : str
    reason : str
        A plain sentence.
    certain : bool
        Whether the text says so, or nothing else is possible.
    choices : tuple of str
        What else may be chosen, the value among them.
    question : str
        What must be asked before the table can be used; empty where nothing.
    """

    field: str
    value: str
    reason: str
    certain: bool
    choices: tuple[str, ...]
    question: str = ""

    @property
    def is_guess(self) -> bool:
        """Whether it rests on the numbers alone."""
        return not self.certain


@dataclass(frozen=True, eq=False)
class RawTable:
    """A table before its meaning is known.

    Attributes
    ----------
    values : ndarray, shape (6, 6)
        As written; NaN where a list names nothing.
    sigmas : ndarray, shape (6, 6)
        0 where no uncertainty is written.
    """

    values: FloatArray
    sigmas: FloatArray

    @property
    def has_sigmas(self) -> bool:
        """Whether any uncertainty is written."""
        return bool(self.sigmas.any())


def choose(guess: Guess, chosen: str | None) -> Guess:
    """Return the guess with what the user chose in its place.

    Raises
    ------
    InputError
        When it is none of the choices.
    """
    if chosen is None:
        return guess
    if chosen not in guess.choices:
        raise InputError(f"“{chosen}” is no {guess.field} of a table.",
                         f"Choose {', '.join(guess.choices)}.", guess.field)
    return replace(guess, value=chosen, reason="Chosen by hand.", certain=True, question="")


# --------------------------------------------------------------------------- shape
def read_shape(table: TableText, chosen: str | None, where: str) -> tuple[RawTable, Guess]:
    """Return the numbers of a table in their cells, and the shape that was seen in them."""
    if table.named:
        return _list_table(table, where), choose(
            Guess("shape", "list", "Every number carries the name of its constant.", True,
                  ("list",)), chosen)
    guess = choose(_shape(table.rows, where), chosen)
    return _placed(table.rows, guess.value), guess


def _shape(rows: tuple[Row, ...], where: str) -> Guess:
    compact = [sum(cell is not None for cell in row.cells) for row in rows]
    lengths = tuple(len(row.cells) for row in rows)
    count = sum(compact)
    if lengths == _SHAPES["full 6×6"]:
        return _full_shape(rows)
    for name in ("upper triangle", "lower triangle"):
        if tuple(compact) == _SHAPES[name]:
            return Guess("shape", name, f"The rows have {_counts(compact)} numbers.", True,
                         (name,))
    if count == 21 and len(rows) <= 2:
        return _triangle_in_a_row(rows)
    if count == 36 and all(cell is not None for row in rows for cell in row.cells):
        return Guess("shape", "36 in a row", "36 numbers are taken as six rows of six.", False,
                     ("36 in a row",))
    kinds = f"{_counts(compact)}" if len(compact) <= 12 else f"{len(compact)} different"
    odd = next((row.line for row, length in zip(rows, lengths, strict=True) if length != 6), None)
    raise InputError(
        f"{count} {'number' if count == 1 else 'numbers'} in {len(rows)} "
        f"{'row' if len(rows) == 1 else 'rows'} ({kinds}) are no table of constants.",
        "A 6×6, a triangle, 21 numbers or a list such as C11 = 168.4 was expected.",
        place(where, odd) if odd is not None and len(rows) == 6 else where)


def _counts(lengths: Sequence[int]) -> str:
    words = [str(length) for length in lengths]
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


def _full_shape(rows: tuple[Row, ...]) -> Guess:
    """Return whether six rows of six are a whole table or a triangle with an empty rest."""
    values = _values(rows)
    blank = np.array([[cell is None for cell in row.cells] for row in rows])
    choices = tuple(_SHAPES)
    for name, rest in (("upper triangle", np.tril_indices(6, -1)),
                       ("lower triangle", np.triu_indices(6, 1))):
        mirror = values.T[rest]
        if blank[rest].all():
            return Guess("shape", name, "The other triangle is empty.", True, choices)
        if not values[rest].any() and mirror.any():
            side = "below" if name.startswith("upper") else "above"
            return Guess("shape", name, f"All cells {side} the diagonal are zero or empty and "
                         "those on the other side are not.", False, choices)
    return Guess("shape", "full 6×6", "There are six rows of six numbers.", True, choices)


def _triangle_in_a_row(rows: tuple[Row, ...]) -> Guess:
    """Return along which triangle 21 numbers run: the one that makes a stable crystal."""
    stable = [
        bool(np.linalg.eigvalsh(_mirrored(_placed(rows, name).values))[0] > 0)
        for name in _IN_A_ROW
    ]
    if stable == [False, True]:
        return Guess("shape", _IN_A_ROW[1], "Only along the lower triangle, row by row, do the "
                     "21 numbers make a stable crystal.", False, _IN_A_ROW)
    reason = ("Only along the upper triangle, row by row, do the 21 numbers make a stable "
              "crystal." if stable == [True, False] else
              "21 numbers are taken to run along the upper triangle, row by row.")
    question = ("Do the 21 numbers run along the upper triangle (11 12 … 16 22 …) or along the "
                "lower one (11 21 22 31 …)? Both make a stable crystal."
                if stable == [True, True] and _differ(rows) else "")
    return Guess("shape", _IN_A_ROW[0], reason, False, _IN_A_ROW, question)


def _differ(rows: tuple[Row, ...]) -> bool:
    upper, lower = (_mirrored(_placed(rows, name).values) for name in _IN_A_ROW)
    return not np.array_equal(upper, lower)


def _values(rows: tuple[Row, ...]) -> FloatArray:
    return np.array([[0.0 if cell is None else cell.value for cell in row.cells]
                     for row in rows])


def _placed(rows: tuple[Row, ...], shape: str) -> RawTable:
    """Return the numbers in their cells; a triangle is mirrored."""
    values, sigmas = np.zeros((6, 6)), np.zeros((6, 6))
    cells = [cell for row in rows for cell in row.cells]
    triangle = np.tril_indices(6) if "lower" in shape else np.triu_indices(6)
    is_full = shape in ("full 6×6", "36 in a row")
    if len(cells) == 36:
        places = [(i, j) for i in range(6) for j in range(6)]
    else:
        places = [(int(i), int(j)) for i, j in zip(*triangle, strict=True)]
        cells = [cell for cell in cells if cell is not None]
    wanted = {(int(i), int(j)) for i, j in zip(*triangle, strict=True)}
    for (i, j), cell in zip(places, cells, strict=True):
        if not is_full and (i, j) not in wanted:
            continue
        number = _mirror_cell(cells, i, j) if cell is None and is_full else cell
        if number is not None:
            values[i, j], sigmas[i, j] = number.value, number.sigma or 0.0
    if is_full:
        return RawTable(values, sigmas)
    return RawTable(_mirrored(values), _mirrored(sigmas))


def _mirror_cell(cells: Sequence[Number | None], i: int, j: int) -> Number | None:
    """Return what an empty cell of a whole table stands for: its mirror image, else nothing."""
    return cells[6 * j + i]


def _mirrored(triangle: FloatArray) -> FloatArray:
    """Return the symmetric table of one triangle, the other being zero."""
    whole: FloatArray = triangle + triangle.T - np.diag(np.diag(triangle))
    is_whole = np.tril(triangle, -1).any() and np.triu(triangle, 1).any()
    return triangle if is_whole else whole


def _list_table(table: TableText, where: str) -> RawTable:
    values, sigmas = np.full((6, 6), np.nan), np.zeros((6, 6))
    letters = {item.letter for item in table.named}
    if len(letters) > 1:
        raise InputError("The list names both stiffnesses (C) and compliances (S).",
                         "Paste one of the two.", where)
    for item in table.named:
        i, j = item.cell
        if np.isfinite(values[i, j]) and values[i, j] != item.number.value:
            raise InputError(
                f"{item.letter}{i + 1}{j + 1} is given twice: {values[i, j]:g} and "
                f"{item.number.value:g}.", where=place(where, item.line))
        values[i, j], sigmas[i, j] = item.number.value, item.number.sigma or 0.0
    mirrored = np.isnan(values) & np.isfinite(values.T)
    return RawTable(np.where(mirrored, values.T, values), np.where(mirrored, sigmas.T, sigmas))


# ------------------------------------------------------------------------ symmetry
def read_symmetry(raw: RawTable, chosen: str | None) -> tuple[RawTable, Guess | None]:
    """Return the table made symmetric, and a question where its triangles differ."""
    values = raw.values
    gap = np.abs(values - values.T)
    largest = float(np.nanmax(np.abs(values))) if np.isfinite(values).any() else 0.0
    if not np.nanmax(gap, initial=0.0) > _SYMMETRIC * largest:
        return RawTable((values + values.T) / 2, np.maximum(raw.sigmas, raw.sigmas.T)), None
    i, j = (int(k) for k in np.unravel_index(np.nanargmax(np.triu(gap)), (6, 6)))
    others = int((np.triu(gap) > _SYMMETRIC * largest).sum()) - 1
    more = f" ({others} more {'pair differs' if others == 1 else 'pairs differ'} less)" if (
        others) else ""
    question = (f"Row {i + 1}, column {j + 1} holds {values[i, j]:.7g} but row {j + 1}, column "
                f"{i + 1} holds {values[j, i]:.7g}{more}. Which is meant: the upper triangle, "
                "the lower one, or the mean?")
    guess = choose(Guess("symmetry", "mean", "The two triangles differ; their mean is shown "
                         "until one is chosen.", False, SYMMETRY_CHOICES, question), chosen)
    return _symmetrised(raw, guess.value), guess


def _symmetrised(raw: RawTable, way: str) -> RawTable:
    if way == "mean":
        sigmas = np.sqrt(raw.sigmas**2 + raw.sigmas.T**2) / 2
        np.fill_diagonal(sigmas, np.diag(raw.sigmas))
        return RawTable((raw.values + raw.values.T) / 2, sigmas)
    upper = np.triu_indices(6)
    values, sigmas = (
        part if way == "upper" else part.T for part in (raw.values, raw.sigmas)
    )
    whole, spread = np.empty((6, 6)), np.empty((6, 6))
    whole[upper], spread[upper] = values[upper], sigmas[upper]
    whole.T[upper], spread.T[upper] = values[upper], sigmas[upper]
    return RawTable(whole, spread)


# -------------------------------------------------------------------- kind and unit
def read_kind(table: TableText, raw: RawTable, chosen: str | None) -> Guess:
    """Return whether a table is stiffness or compliance."""
    if table.named:
        letter = table.named[0].letter
        kind = "compliance" if letter == "S" else "stiffness"
        return choose(Guess("kind", kind, f"The constants are named {letter}.", True, KINDS),
                      chosen)
    said = _said_kind(table)
    return choose(_kind_from_numbers(raw.values) if said is None else said, chosen)


def _said_kind(table: TableText) -> Guess | None:
    for line, text in table.headings:
        kinds = {unit.kind for unit in find_units(text)}
        kind = find_kind(text) or (kinds.pop() if len(kinds) == 1 else None)
        if kind is not None:
            return Guess("kind", kind, f"Line {line} says “{_clipped(text)}”.", True, KINDS)
    return None


def _kind_from_numbers(values: FloatArray) -> Guess:
    """Return stiffness unless contraction across speaks for compliance.

    C12, C13 and C23 are positive, and S12, S13 and S23 negative, in nearly every crystal.
    """
    across = [values[0, 1], values[0, 2], values[1, 2]]
    if sum(x < 0 for x in across) < 2 or sum(across) >= 0:
        return Guess("kind", "stiffness", "The constants 12, 13 and 23 are not negative, as they "
                     "would be in nearly every table of compliances.", False, KINDS)
    reason = ("The constants 12, 13 and 23 are mostly negative, as in nearly every table of "
              "compliances.")
    largest = float(np.abs(np.diag(values)).max())
    stable = np.linalg.eigvalsh(stiffness_to_kelvin(values))[0] > 0
    question = (f"{reason} Are these compliances, or stiffnesses in GPa?"
                if stable and SOFTEST <= largest <= STIFFEST else "")
    return Guess("kind", "compliance", reason, False, KINDS, question)


def read_unit(table: TableText, raw: RawTable, kind: str, chosen: str | None) -> Guess:
    """Return the unit of a table.

    Raises
    ------
    InputError
        When the chosen unit is none, or one of the other kind.
    """
    if chosen is not None:
        unit = parse_unit(chosen)
        if unit.kind != kind:
            raise InputError(f"“{chosen}” is a unit of {unit.kind}, not of {kind}.", "", "unit")
        return Guess("unit", unit.text, "Chosen by hand.", True, _with(unit.text, kind))
    said = _said_unit(table, raw, kind)
    return _unit_from_numbers(raw, kind) if said is None else said


def _said_unit(table: TableText, raw: RawTable, kind: str) -> Guess | None:
    sources = [(f"Line {line} says “{_clipped(text)}”.", text) for line, text in table.headings]
    sources += [(f"The list says “{_clipped(text)}”.", text) for text in table.stray]
    found = {
        unit.text: (unit, reason) for reason, text in reversed(sources)
        for unit in find_units(text) if unit.kind == kind
    }
    if not found:
        return None
    if len(found) > 1:
        names = " and ".join(found)
        return Guess("unit", next(iter(found)), f"The text names {names}.", False,
                     _with(next(iter(found)), kind),
                     f"The text names {names}. Which is the unit of the numbers?")
    (unit, reason), = found.values()
    size = _largest(raw.values, kind) * (unit.factor if kind == "stiffness" else 1 / unit.factor)
    question = "" if SOFTEST / 30 <= size <= 2 * STIFFEST else (
        f"{reason} In {unit.text} the largest stiffness would be {significant(size, 3)} GPa, "
        "which no known solid has. Which is the unit of the numbers?")
    return Guess("unit", unit.text, reason, not question, _with(unit.text, kind), question)


def _unit_from_numbers(raw: RawTable, kind: str) -> Guess:
    """Return the unit that makes the largest stiffness that of a known solid."""
    largest = _largest(raw.values, kind)
    sizes = {
        name: largest * (parse_unit(name).factor if kind == "stiffness"
                         else 1 / parse_unit(name).factor)
        for name in UNIT_CHOICES[kind][:6 if kind == "stiffness" else 4]
    }
    fitting = _distinct([name for name, size in sizes.items() if SOFTEST <= size <= STIFFEST])
    choices = UNIT_CHOICES[kind]
    if kind == "stiffness" and (not fitting or fitting[0] == "GPa"):
        reason = "No unit is written; in GPa " if fitting else (
            "No unit is written, and no usual one makes this a known solid; in GPa ")
        reason += f"the largest constant is {significant(largest, 3)}."
        question = "" if fitting else f"{reason} Which is the unit?"
        return Guess("unit", "GPa", reason, False, choices, question)
    first = fitting[0] if fitting else choices[0]
    reason = (f"No unit is written; in {first} the largest stiffness is "
              f"{significant(sizes[first], 3)} GPa.")
    soft = kind == "stiffness" and largest < SOFTEST
    if soft:
        reason += f" In GPa it would be {significant(largest, 3)}, softer than nearly all crystals."
    others = [f"{significant(sizes[name], 3)} GPa in {name}" for name in fitting[1:]]
    if others:
        reason += f" It would be {', or '.join(others)}."
    is_open = bool(others) or soft or not fitting
    return Guess("unit", first, reason, False, choices,
                 f"{reason} Which is the unit?" if is_open else "")


def _distinct(units: list[str]) -> list[str]:
    """Return units without those that are another name for an earlier one."""
    kept: dict[float, str] = {}
    for unit in units:
        kept.setdefault(parse_unit(unit).factor, unit)
    return list(kept.values())


def _largest(values: FloatArray, kind: str) -> float:
    """Return the largest diagonal stiffness, in the unit of the table or of its inverse."""
    diagonal = np.abs(np.diag(values))
    diagonal = diagonal[np.isfinite(diagonal) & (diagonal > 0)]
    if diagonal.size == 0:
        return 0.0
    return float(diagonal.max() if kind == "stiffness" else 1 / diagonal.min())


def _with(unit: str, kind: str) -> tuple[str, ...]:
    choices = UNIT_CHOICES[kind]
    return choices if unit in choices else (unit, *choices)


def _clipped(text: str) -> str:
    line = " ".join(text.split())
    return line if len(line) <= 60 else f"{line[:59]}…"


# --------------------------------------------------------------- rows and notation
def tensor_components(values: FloatArray, kind: str, rows: str, notation: str) -> FloatArray:
    """Return a table in our order as tensor components, the form that all classes share.

    For a stiffness that is the Voigt table; a compliance loses its factors 2 and 4.
    """
    ours = restore_order(values, parse_rows(rows))
    if notation == "Kelvin":
        return kelvin_to_stiffness(ours)
    return ours if kind == "stiffness" else kelvin_to_stiffness(compliance_to_kelvin(ours))


def read_rows(table: TableText, raw: RawTable, kind: str, chosen: str | None) -> Guess:
    """Return the order of the rows, as six index pairs."""
    if chosen is not None:
        order = rows_text(parse_rows(chosen))
        return Guess("rows", order, "Chosen by hand.", True, _with_order(order))
    if table.named:
        return Guess("rows", OUR_ORDER, "The constants are named.", True, _ORDERS)
    if table.order:
        order = rows_text(parse_rows(table.order))
        return Guess("rows", order, "The rows or columns are labelled.", True, _with_order(order))
    for line, text in table.headings:
        written = find_order(text)
        if written is not None:
            order = rows_text(parse_rows(written))
            return Guess("rows", order, f"Line {line} lists “{written}”.", True,
                         _with_order(order))
    return _rows_from_numbers(raw.values, kind)


def _with_order(order: str) -> tuple[str, ...]:
    return _ORDERS if order in _ORDERS else (order, *_ORDERS)


def _rows_from_numbers(values: FloatArray, kind: str) -> Guess:
    """Return our order, with a question where another makes the table more symmetric."""
    constants = {
        order: simplest_class(tensor_components(values, kind, order, "Voigt"))
        for order in _ORDERS
    }
    ours, best = constants[OUR_ORDER], min(constants.values(), key=lambda found: found[0])
    reason = "No order is written; 23 13 12 is the usual one."
    if ours[0] <= best[0]:
        return Guess("rows", OUR_ORDER, reason, False, _ORDERS)
    other = next(order for order in _ORDERS if constants[order][0] == best[0])
    question = (f"With the rows in the order {other} this is the table of a {best[1]} crystal; "
                f"in the usual order {OUR_ORDER} it is not. In which order are they?")
    return Guess("rows", OUR_ORDER, reason, False, _ORDERS, question)


def simplest_class(components: FloatArray) -> tuple[int, str]:
    """Return the fewest constants that describe a table about its own axes, and the class."""
    for key in reversed(CLASS_KEYS):
        for axis in "yzx" if key == "monoclinic" else "y":
            cls = crystal_class(key, axis)
            if distance(components, cls) < _FITS:
                return len(cls.independent), cls.name
    return 21, "triclinic"


def read_notation(
    table: TableText, raw: RawTable, kind: str, rows: str, chosen: str | None
) -> Guess:
    """Return whether shear rows carry Voigt's factors or Kelvin's."""
    for line, text in table.headings:
        said = find_notation(text)
        if said is not None:
            return choose(Guess("notation", said, f"Line {line} says “{_clipped(text)}”.", True,
                                NOTATIONS), chosen)
    guess = Guess("notation", "Voigt", "No notation is written; Voigt's is the usual one.", False,
                  NOTATIONS)
    if not np.isfinite(raw.values).all():
        return choose(guess, chosen)
    voigt, kelvin = (
        simplest_class(tensor_components(raw.values, kind, rows, name)) for name in NOTATIONS
    )
    # Zener's ratio 2 alone makes a cubic table isotropic in the other notation: no evidence.
    if kelvin[0] < voigt[0] and kelvin[1] != "isotropic":
        guess = replace(guess, question=(
            f"In Kelvin's notation (shear rows times √2) this is the table of a {kelvin[1]} "
            "crystal; in Voigt's it is not. Which notation is it?"))
    return choose(guess, chosen)


# --------------------------------------------------------------- classes of lists
def read_class(components: FloatArray, chosen: str | None, where: str) -> tuple[FloatArray, Guess]:
    """Return the whole table of a list that names some constants, and the class that says so.

    Parameters
    ----------
    components : ndarray, shape (6, 6)
        Tensor components, our order, NaN where the list names nothing.
    chosen : str or None
        A class key, "monoclinic x" with the axis, or "as listed".

    Raises
    ------
    InputError
        When a diagonal constant is missing and no class gives it.
    """
    fitting = _fitting_classes(components)
    labels = [label for label, _ in fitting]
    first = labels[0] if labels else AS_LISTED
    name = first.replace("_6", "").replace("_7", "")
    reason = (f"The constants named are those of {'an' if name[0] in 'aeio' else 'a'} {name} "
              "crystal; the others follow from them." if labels else
              "The constants named are those of no class; the others are taken as zero.")
    guess = choose(Guess("class", first, reason, False, (*labels, AS_LISTED)), chosen)
    if guess.value != AS_LISTED:
        return dict(fitting)[guess.value], guess
    missing = [f"{k + 1}{k + 1}" for k in range(6) if np.isnan(components[k, k])]
    if missing:
        raise InputError(
            f"The list does not name {', '.join(missing)}, and no crystal class gives "
            f"{'it' if len(missing) == 1 else 'them'} from the constants it names.",
            "Name every independent constant of the class.", where)
    return np.nan_to_num(components, nan=0.0), guess


def _fitting_classes(components: FloatArray) -> list[tuple[str, FloatArray]]:
    """Return classes whose independent constants are all named, and that give the others."""
    found = []
    size = float(np.nanmax(np.abs(components)))
    for key in reversed(CLASS_KEYS):
        for axis in "yzx" if key == "monoclinic" else "y":
            cls = crystal_class(key, axis)
            if any(np.isnan(components[cell]) for cell in cls.independent):
                continue
            whole = complete(components, cls)
            gap = np.nan_to_num(np.abs(whole - components), nan=0.0)
            if gap.max() <= _NAMES_FIT * size:
                found.append((f"{key} {axis}" if key == "monoclinic" else key, whole))
    return found
