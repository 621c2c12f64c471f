"""Units of foreign tables, and the words about a table that tell what it holds."""

from __future__ import annotations

import difflib
import re
from dataclasses import dataclass

from core.errors import InputError
from core.tensor.notation import UNITS, parse_rows

KINDS = ("stiffness", "compliance")

_INVERSE_BASES: dict[str, float] = {
    "1/GPa": 1.0, "1/TPa": 1e-3, "1/MPa": 1e3, "1/Pa": 1e9, "1/kbar": 10.0, "1/Mbar": 1e-2,
    "m²/N": 1e9, "cm²/dyn": 1e10,
}
"""Units of compliance, in 1/GPa."""

_BASES: dict[str, dict[str, float]] = {
    "stiffness": UNITS | {"TPa": 1e3, "kPa": 1e-6, "bar": 1e-4, "N/m²": 1e-9, "N/mm²": 1e-3},
    "compliance": _INVERSE_BASES,
}

UNIT_CHOICES: dict[str, tuple[str, ...]] = {
    "stiffness": (*UNITS, "1e10 Pa", "1e11 dyn/cm²", "1e12 dyn/cm²"),
    "compliance": ("1/GPa", "1/TPa", "1e-11 m²/N", "1e-12 m²/N", "1/Pa", "1/kbar", "1/Mbar",
                   "1e-13 cm²/dyn"),
}
"""What the window offers; `parse_unit` reads more."""

_SUPERSCRIPTS = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺", "0123456789-+")
_POWER = (r"(?:(?:[×x*]\s*)?10\s*\^\s*\(?(?P<power>[+-]?\d+)\)?|"
          r"1?[eE](?P<short>[+-]?\d+))?\s*[*·]?\s*")
_PRESSURE = r"GPa|TPa|MPa|kPa|Pa|kbar|Mbar|bar"
_PATTERNS = (
    rf"1\s*/\s*\(?(?P<per>{_PRESSURE})\)?",
    rf"\(?(?P<inverse>{_PRESSURE})\)?\s*\^?\s*-1",
    r"(?P<m_per_n>m\^?2\s*/\s*N|m\^?2\s*N\s*\^?\s*-1)",
    r"(?P<cm_per_dyn>cm\^?2\s*/\s*dyne?s?|cm\^?2\s*dyne?s?\s*\^?\s*-1)",
    r"(?P<dyn_per_cm>dyne?s?\s*/\s*cm\^?2|dyne?s?\s*cm\s*\^?\s*-2)",
    r"(?P<n_per_mm>N\s*/\s*mm\^?2|N\s*mm\s*\^?\s*-2)",
    r"(?P<n_per_m>N\s*/\s*m\^?2|N\s*m\s*\^?\s*-2)",
    rf"(?P<pressure>{_PRESSURE})(?!\s*\^?\s*-\d)",
)
_UNIT = re.compile(
    rf"(?<![A-Za-z/^]){_POWER}(?:{'|'.join(_PATTERNS)})(?![A-Za-z])", re.IGNORECASE
)
_SPELLED = {name.lower(): name for name in _PRESSURE.split("|")}
_AREA_UNITS = {
    "m_per_n": "m²/N", "cm_per_dyn": "cm²/dyn", "dyn_per_cm": "dyn/cm²",
    "n_per_mm": "N/mm²", "n_per_m": "N/m²",
}

_KIND_WORDS: tuple[tuple[str, str], ...] = (
    (r"complian|(?<![A-Za-z])[Ss]_?\{?(?:ij|IJ|mn|pq)|(?<![A-Za-z])S\s*matrix", "compliance"),
    (r"stiffness|(?<![A-Za-z])[Cc]_?\{?(?:ij|IJ|mn|pq)|elastic (?:constants|moduli)|"
     r"(?<![A-Za-z])C\s*matrix", "stiffness"),
)
_KELVIN_WORDS = re.compile(r"kelvin|mandel", re.IGNORECASE)
_VOIGT_WORDS = re.compile(r"voigt", re.IGNORECASE)
_ORDER = re.compile(
    r"(?:(?<![\w.])(?:[1-3]{2}|[xyz]{2}|[XYZ]{2})(?![\w.])[\s,;/]*){6}(?!\d)"
)


@dataclass(frozen=True)
class Unit:
    """A unit as understood: its text, "stiffness" or "compliance", and GPa (1/GPa) in it."""

    text: str
    kind: str
    factor: float


def parse_unit(text: str) -> Unit:
    """Return a unit of stiffness or compliance, such as "GPa", "1e11 dyn/cm2" or "TPa^-1".

    Raises
    ------
    InputError
        When it is neither; the nearest known one is named.
    """
    plain = _plain(text).strip(" ()")
    found = _UNIT.fullmatch(plain)
    if found is None:
        known = [unit for kind in KINDS for unit in _BASES[kind]]
        near = difflib.get_close_matches(text.strip(), known, n=1, cutoff=0.4)
        question = f"Did you mean {near[0]}? " if near else ""
        raise InputError(f"“{text}” is not a unit of stiffness or compliance.",
                         f"{question}Known units: {', '.join(known)}.", "unit")
    return _unit(found)


def find_units(text: str) -> tuple[Unit, ...]:
    """Return the different units that words about a table name.

    A pressure that is a measured value, as in "at 5 GPa" or "300 K, 0.1 MPa", is no unit.
    """
    units: dict[str, Unit] = {}
    plain = _plain(text)
    for found in _UNIT.finditer(plain):
        if re.search(r"\d\s*$", plain[: found.start()]):
            continue
        unit = _unit(found)
        units.setdefault(unit.text, unit)
    return tuple(units.values())


def find_kind(text: str) -> str | None:
    """Return "stiffness" or "compliance" where words about a table say one of them."""
    kinds = {kind for pattern, kind in _KIND_WORDS if re.search(pattern, text)
             or re.search(pattern, text.lower())}
    return kinds.pop() if len(kinds) == 1 else None


def find_notation(text: str) -> str | None:
    """Return "Voigt" or "Kelvin" where words about a table say one of them."""
    kelvin, voigt = _KELVIN_WORDS.search(text), _VOIGT_WORDS.search(text)
    if (kelvin is None) == (voigt is None):
        return None
    return "Kelvin" if kelvin else "Voigt"


def find_order(text: str) -> str | None:
    """Return the six index pairs that words about a table list, as written; None if none."""
    found = _ORDER.search(text)
    if found is None:
        return None
    order = found.group(0).strip(" ,;/")
    try:
        parse_rows(order.replace("/", " "))
    except InputError:  # six numbers that are no order: a list of constants, say
        return None
    return order.replace("/", " ")


def _plain(text: str) -> str:
    """Return a text with superscripts as ^ powers and without the braces of typesetting."""
    plain = re.sub(r"[⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺]+", lambda run: "^" + run[0].translate(_SUPERSCRIPTS), text)
    plain = plain.replace("\N{MINUS SIGN}", "-").replace("**", "^")
    return re.sub(r"[{}$\\]|mathrm|(?<=\w)\s*~", "", plain)


def _unit(found: re.Match[str]) -> Unit:
    power = int(found["power"] or found["short"] or 0)
    groups = found.groupdict()
    base = next((name for group, name in _AREA_UNITS.items() if groups[group]), None)
    if base is None:
        inverse = groups["per"] or groups["inverse"]
        base = f"1/{_SPELLED[inverse.lower()]}" if inverse else _SPELLED[
            groups["pressure"].lower()]
    kind = "compliance" if base in _INVERSE_BASES else "stiffness"
    text = f"1e{power} {base}" if power else base
    return Unit(text, kind, float(f"1e{power}") * _BASES[kind][base])
