"""How the numbers of a foreign table may be meant: kind, unit, order of rows, notation, class.

Every reading is a `Guess`: a value, the reason for it, and a question where the numbers
allow another reading that cannot be ruled out. Nothing here reads text.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import permutations

import numpy as np

from core.arrays import FloatArray
from core.errors import InputError
from core.files.foreign.cells import TableText
from core.files.foreign.facts import NOTATIONS
from core.files.foreign.guess import Guess, RawTable, choose
from core.files.foreign.units import (
    KINDS,
    UNIT_CHOICES,
    Unit,
    find_kind,
    find_notation,
    find_order,
    find_units,
    parse_unit,
)
from core.numbers import shortened, significant
from core.tensor.closest import simplest_class
from core.tensor.notation import (
    SHEAR_FACTORS,
    compliance_to_kelvin,
    kelvin_to_stiffness,
    parse_rows,
    restore_order,
    rows_text,
    stiffness_to_kelvin,
)
from core.tensor.symmetry import CLASS_KEYS, complete, crystal_class

OUR_ORDER = "11 22 33 23 13 12"
AS_LISTED = "as listed"

SOFTEST, STIFFEST = 3.0, 1200.0  # GPa: largest constant of nearly all crystals; diamond 1079
_FITS = 5e-3  # relative distance: the rounding of a printed table
_NAMES_FIT = 2e-3  # relative: a constant that a list names beside those it depends on

_COMMONEST = (OUR_ORDER, "11 22 33 12 13 23", "11 22 33 12 23 13")
_ORDERS = tuple(dict.fromkeys((
    *_COMMONEST,
    *(f"11 22 33 {' '.join(shears)}" for shears in permutations(("23", "13", "12"))),
)))
"""All orders of the shear rows, the commonest first."""


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
    for line, text in table.words:
        kinds = {unit.kind for unit in find_units(text)}
        kind = find_kind(text) or (kinds.pop() if len(kinds) == 1 else None)
        if kind is not None:
            return Guess("kind", kind, _says(line, text), True, KINDS)
    return None


def _kind_from_numbers(values: FloatArray) -> Guess:
    """Return stiffness unless contraction across speaks for compliance.

    C12, C13 and C23 are positive, and S12, S13 and S23 negative, in nearly every crystal.
    """
    across = [values[0, 1], values[0, 2], values[1, 2]]
    if sum(x < 0 for x in across) < 2 or sum(across) >= 0:
        return Guess("kind", "stiffness", "The constants 12, 13 and 23 are not negative, as "
                     "they would be in nearly every table of compliances.", False, KINDS)
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
    sources = [(_says(line, text), text) for line, text in table.words]
    sources += [(f"The list says “{shortened(text, 60)}”.", text) for text in table.stray]
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
    size = _in_gpa(_largest(raw.values, kind), unit)
    question = "" if SOFTEST / 30 <= size <= 2 * STIFFEST else (
        f"{reason} In {unit.text} the largest stiffness would be {significant(size, 3)} GPa, "
        "which no known solid has. Which is the unit of the numbers?")
    return Guess("unit", unit.text, reason, not question, _with(unit.text, kind), question)


def _unit_from_numbers(raw: RawTable, kind: str) -> Guess:
    """Return the unit that makes the largest stiffness that of a known solid."""
    largest = _largest(raw.values, kind)
    sizes = {
        name: _in_gpa(largest, parse_unit(name))
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
        reason += (f" In GPa it would be {significant(largest, 3)}, softer than nearly all "
                   "crystals.")
    others = [f"{significant(sizes[name], 3)} GPa in {name}" for name in fitting[1:]]
    if others:
        reason += f" It would be {', or '.join(others)}."
    is_open = bool(others) or soft or not fitting
    return Guess("unit", first, reason, False, choices,
                 f"{reason} Which is the unit?" if is_open else "")


def _in_gpa(largest: float, unit: Unit) -> float:
    """Return what `_largest` found, in GPa."""
    return largest * (unit.factor if unit.kind == "stiffness" else 1 / unit.factor)


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


def _says(line: int, text: str) -> str:
    return f"Line {line} says “{shortened(text, 60)}”."


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
        return Guess("rows", order, "The rows or columns are labelled.", True,
                     _with_order(order))
    for line, text in table.words:
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
        order: _simplest(tensor_components(values, kind, order, "Voigt")) for order in _ORDERS
    }
    ours, best = constants[OUR_ORDER], min(constants.values(), key=lambda found: found[0])
    reason = "No order is written; 23 13 12 is the usual one."
    if ours[0] <= best[0]:
        return Guess("rows", OUR_ORDER, reason, False, _ORDERS)
    other = next(order for order in _ORDERS if constants[order][0] == best[0])
    question = (f"With the rows in the order {other} this is the table of a {best[1]} crystal; "
                f"in the usual order {OUR_ORDER} it is not. In which order are they?")
    return Guess("rows", OUR_ORDER, reason, False, _ORDERS, question)


def _simplest(components: FloatArray) -> tuple[int, str]:
    """Return the fewest constants that describe a table about its own axes, and the class."""
    cls, _ = simplest_class(components, _FITS)
    return len(cls.independent), cls.name


def read_notation(
    table: TableText, raw: RawTable, kind: str, rows: str, chosen: str | None
) -> Guess:
    """Return whether shear rows carry Voigt's factors or Kelvin's."""
    for line, text in table.words:
        said = find_notation(text)
        if said is not None:
            return choose(Guess("notation", said, _says(line, text), True,
                                NOTATIONS), chosen)
    guess = Guess("notation", "Voigt", "No notation is written; Voigt's is the usual one.",
                  False, NOTATIONS)
    if not np.isfinite(raw.values).all():
        return choose(guess, chosen)
    voigt, kelvin = (
        _simplest(tensor_components(raw.values, kind, rows, name)) for name in NOTATIONS
    )
    # Zener's ratio 2 alone makes a cubic table isotropic in the other notation: no evidence.
    if kelvin[0] < voigt[0] and kelvin[1] != "isotropic":
        guess = replace(guess, question=(
            f"In Kelvin's notation (shear rows times √2) this is the table of a {kelvin[1]} "
            "crystal; in Voigt's it is not. Which notation is it?"))
    return choose(guess, chosen)


# --------------------------------------------------------------- classes of lists
def read_class(
    components: FloatArray,
    chosen: str | None,
    where: str,
    claimed: str = "",
    kind: str = "stiffness",
) -> tuple[FloatArray, Guess]:
    """Return the whole table of a list that names some constants, and the class that says so.

    Parameters
    ----------
    components : ndarray, shape (6, 6)
        Tensor components, our order, NaN where the list names nothing.
    chosen : str or None
        A class key, "monoclinic x" with the axis, or "as listed".
    where : str
    claimed : str
        The class that the text claims, in the same form; empty where it claims none.
    kind : "stiffness" or "compliance"
        For the sentence that refuses a list.

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
    guess = Guess("class", first, reason, False, (*labels, AS_LISTED))
    if claimed in labels:
        guess = replace(guess, value=claimed, reason="The text says so.", certain=True)
    elif claimed and chosen is None and (said := _contradiction(components, kind, claimed)):
        raise InputError(said, "Correct one of them, or the class.", where)
    guess = choose(guess, chosen)
    if guess.value != AS_LISTED:
        return dict(fitting)[guess.value], guess
    missing = [f"{k + 1}{k + 1}" for k in range(6) if np.isnan(components[k, k])]
    if missing:
        contradiction = _contradiction(components, kind)
        if contradiction:
            raise InputError(contradiction, "Correct one of them, or leave out what follows "
                             "from the others.", where)
        raise InputError(
            f"The list does not name {', '.join(missing)}, and no crystal class gives "
            f"{'it' if len(missing) == 1 else 'them'} from the constants it names.",
            "Name every independent constant of the class.", where)
    return np.nan_to_num(components, nan=0.0), guess


def _fitting_classes(components: FloatArray) -> list[tuple[str, FloatArray]]:
    """Return classes whose independent constants are all named, and that give the others."""
    size = float(np.nanmax(np.abs(components)))
    return [
        (label, whole) for label, whole in _named_classes(components)
        if _gap(components, whole).max() <= _NAMES_FIT * size
    ]


def _named_classes(components: FloatArray) -> list[tuple[str, FloatArray]]:
    """Return classes whose independent constants are all named, with the table of each."""
    found = []
    for key in reversed(CLASS_KEYS):
        for axis in "yzx" if key == "monoclinic" else "y":
            cls = crystal_class(key, axis)
            if not any(np.isnan(components[cell]) for cell in cls.independent):
                label = f"{key} {axis}" if key == "monoclinic" else key
                found.append((label, complete(components, cls)))
    return found


def _gap(components: FloatArray, whole: FloatArray) -> FloatArray:
    """Return how far named constants are from those of a whole table; 0 where not named."""
    return np.asarray(np.nan_to_num(np.abs(whole - components), nan=0.0))


def _contradiction(components: FloatArray, kind: str, claimed: str = "") -> str:
    """Return which named constant breaks the class that all others are named for.

    Empty where more than one does, where it ought to be zero, or no class is named at all.
    Of a class that is claimed only its own constants count.
    """
    size = float(np.nanmax(np.abs(components)))
    is_compliance = kind == "compliance"
    factors = np.outer(SHEAR_FACTORS, SHEAR_FACTORS) if is_compliance else np.ones((6, 6))
    letter = "S" if is_compliance else "C"
    for label, whole in _named_classes(components):
        if claimed not in ("", label):
            continue
        cells = np.argwhere(np.triu(_gap(components, whole)) > _NAMES_FIT * size).tolist()
        if len(cells) != 1 or whole[tuple(cells[0])] == 0:
            continue
        i, j = cells[0]
        listed, due = (significant(float(factors[i, j] * table[i, j]))
                       for table in (components, whole))
        key = label.split()[0].split("_")[0]
        rule = "the others" if is_compliance else _RULES.get((key, (i, j)), "the others")
        return (f"{letter}{i + 1}{j + 1} is {listed} in the list, but by {rule} it would be "
                f"{due} in {'an' if key[0] in 'aeio' else 'a'} {key} crystal.")
    return ""


_RULES = {
    ("isotropic", (3, 3)): "(C11 − C12)/2", ("hexagonal", (5, 5)): "(C11 − C12)/2",
    ("trigonal", (5, 5)): "(C11 − C12)/2",
}
"""What a dependent constant follows from, where it is no plain equality."""
