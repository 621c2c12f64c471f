"""What a text table says of itself: its density, name and class, and how it is to be read.

Lines such as `# density_kg_m3: 2684`, `density: 2.684 g/cm3` or `# symmetry: mean`, in comments
or among the headings.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field

from core import limits
from core.errors import InputError
from core.files.foreign.cells import TableText, place, read_value
from core.files.foreign.guess import Guess
from core.files.foreign.shapes import SYMMETRY_CHOICES
from core.files.foreign.units import KINDS, parse_unit
from core.numbers import shortened
from core.tensor.notation import parse_rows, rows_text
from core.tensor.symmetry import crystal_class

NOTATIONS = ("Voigt", "Kelvin")

_LINE = re.compile(
    r"(?P<key>density_kg_m3|density|rho|ρ|name|crystal_class|unique_axis|"
    r"symmetry|kind|unit|rows|notation)\s*[:=]\s*(?P<value>.+)",
    re.IGNORECASE,
)
_DENSITY_KEYS = ("density_kg_m3", "density", "rho", "ρ")
_DENSITY_UNIT = re.compile(
    r"\s*(?P<unit>kg\s*/?\s*m\^?(?:3|³|-3|⁻³)|g\s*/?\s*cm\^?(?:3|³|-3|⁻³)|g/cc)\s*$"
)
_PLUS_MINUS = re.compile(r"\s*(?:±|\+/-|\+-)\s*")


@dataclass(frozen=True)
class Facts:
    """What a text says besides its numbers.

    Attributes
    ----------
    name : str
        Empty where none is given.
    density : float or None
        kg/m³.
    class_key, unique_axis : str or None
    said : mapping of str to str
        Fields of a foreign table and what the text says of them: "symmetry", "kind", "unit",
        "rows", "notation".
    notes : tuple of str
        Lines that look like one of these and cannot be understood.
    lines : tuple of int
        Those that are such, from 1.
    """

    name: str = ""
    density: float | None = None
    class_key: str | None = None
    unique_axis: str | None = None
    said: Mapping[str, str] = field(default_factory=dict)
    notes: tuple[str, ...] = ()
    lines: tuple[int, ...] = ()


NO_FACTS = Facts()


def read_facts(table: TableText, where: str = "") -> Facts:
    """Return what the comments and headings of a text say.

    Raises
    ------
    InputError
        For a density or a class that is none, naming the line.
    """
    known: dict[str, object] = {}
    said: dict[str, str] = {}
    notes, lines = [], []
    for line, text in table.words:
        found = _LINE.fullmatch(text.strip(" \t,;"))
        if found is None:
            continue
        lines.append(line)
        key, value = found["key"].lower(), found["value"].strip(" \t\"'“”")
        try:
            if key in _READERS:
                said[key] = _READERS[key](value)
            else:
                known |= _fact(key, value)
        except InputError as error:
            if key not in _READERS:
                raise InputError(error.message, error.hint, place(where, line)) from None
            # Prose may begin with one of these words: "unit: that of the source".
            notes.append(f"Line {line}, “{shortened(text, 60)}”, says nothing that is "
                         f"understood of the {key}.")
    return Facts(**known, said=said, notes=tuple(notes), lines=tuple(lines))  # type: ignore[arg-type]


def as_said(guess: Guess, facts: Facts) -> Guess:
    """Return a guess with the reason "The text says so" where the text chose it."""
    if guess.field not in facts.said:
        return guess
    return Guess(guess.field, guess.value, "The text says so.", True, guess.choices)


def read_density(text: str, where: str = "") -> tuple[float, float | None]:
    """Return a density, kg/m³, and its standard uncertainty where one is written.

    Understood are "2684", "2684 ± 1", "2684(1)", and either with a unit: kg/m³ or g/cm³.

    Raises
    ------
    InputError
        When it is no density.
    """
    plain, factor = text.strip(), 1.0
    unit = _DENSITY_UNIT.search(plain)
    if unit is not None:
        plain = plain[: unit.start()]
        factor = 1.0 if unit["unit"].startswith("kg") else 1000.0
    joined = _PLUS_MINUS.sub("±", plain.strip())
    number = read_value(re.sub(r"(?<=\d)\s+(?=\()", "", joined), where)
    if number.sigma is not None and number.sigma < 0:
        raise InputError("The uncertainty of the density is below zero.", where=where)
    sigma = None if number.sigma is None else _scaled(number.sigma, factor)
    return limits.density(_scaled(number.value, factor), where), sigma


def _scaled(value: float, factor: float) -> float:
    """Return the product without the dust of decimal fractions: 2.684 g/cm³ is 2684."""
    return float(f"{factor * value:.15g}")


def _fact(key: str, value: str) -> dict[str, object]:
    if key in _DENSITY_KEYS:
        return {"density": read_density(value)[0]}
    if key == "crystal_class":
        return {"class_key": crystal_class(value).key}
    if key == "unique_axis":
        return {"unique_axis": crystal_class("monoclinic", value.lower()).unique_axis}
    return {"name": value}


def _one_of(value: str, choices: tuple[str, ...], name: str) -> str:
    for choice in choices:
        if value.lower() == choice.lower():
            return choice
    raise InputError(f"“{value}” is no {name}.")


_READERS = {
    "symmetry": lambda value: _one_of(value, SYMMETRY_CHOICES, "symmetry"),
    "kind": lambda value: _one_of(value, KINDS, "kind"),
    "unit": lambda value: parse_unit(value).text,
    "rows": lambda value: rows_text(parse_rows(value)),
    "notation": lambda value: _one_of(value, NOTATIONS, "notation"),
}
"""How what a text says of a field is read."""
