"""Specimen files: one crystal as JSON, every key of the format in one table.

The README describes the format. Unknown keys are kept on saving, files of a later version
are refused, and every fault of a file is reported, not only the first.
"""

from __future__ import annotations

import json
import math
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

from core import limits
from core.arrays import FloatArray
from core.crystal.cell import UnitCell, axes_matrix, axes_text
from core.errors import InputError
from core.files.text import read_text, write_text
from core.numbers import shortened
from core.state import Matrix, Specimen, as_matrix, to_plain
from core.tensor.symmetry import crystal_class

FORMAT = "tricline-specimen"
VERSION = 1
_CELL_KEYS = ("a", "b", "c", "alpha", "beta", "gamma")
_LONE_SURROGATE = re.compile("[\ud800-\udfff]")


def read_specimen(path: Path) -> Specimen:
    """Return the specimen that a file holds; `InputError` says what is wrong with it."""
    return specimen_from_dict(parse_json(read_text(path), path.name), path.name)


def write_specimen(path: Path, specimen: Specimen) -> None:
    """Write a specimen file atomically."""
    write_text(path, json_text(specimen_to_dict(specimen)))


# --- JSON -----------------------------------------------------------------------------------


def parse_json(text: str, where: str) -> dict[str, Any]:
    """Return the JSON object of a text.

    Raises
    ------
    InputError
        When it is not JSON, with the line, or not an object, or gives one of the keys of a
        specimen twice.
    """
    try:
        data = json.loads(text, object_pairs_hook=_object)
    except json.JSONDecodeError as error:
        raise InputError(
            f"Line {error.lineno}, column {error.colno}: this is not JSON ({error.msg}).",
            where=where,
        ) from None
    except InputError as error:
        raise InputError(error.message, error.hint, where) from None
    except RecursionError:
        raise InputError("The JSON is nested too deeply.", where=where) from None
    except ValueError as error:  # a whole number of thousands of digits
        raise InputError(f"This is not usable JSON ({error}).", where=where) from None
    if not isinstance(data, dict):
        raise InputError("A JSON object {…} was expected.", where=where)
    return data


def _object(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    """Return an object's pairs as a dict; two values for a key we read would be a riddle."""
    data = dict(pairs)
    if len(data) < len(pairs):
        names = [name for name, _ in pairs]
        twice = [name for name in data if names.count(name) > 1 and name in _READERS]
        if twice:
            raise InputError(f"“{twice[0]}” is given twice.", "Keep one of the two.")
    return data


def json_text(data: dict[str, Any]) -> str:
    """Return JSON with one matrix row a line, as a person would write it.

    Raises
    ------
    ValueError
        For NaN and infinity, which JSON does not have.
    """
    text = _object_text(data, "  ") + "\n"
    return _LONE_SURROGATE.sub(lambda match: f"\\u{ord(match[0]):04x}", text)


def _object_text(data: dict[str, Any], indent: str) -> str:
    lines = [f"{indent}{_inline(key)}: {_value_text(data[key], indent)}" for key in data]
    return "{\n" + ",\n".join(lines) + f"\n{indent[2:]}}}"


def _value_text(value: Any, indent: str) -> str:
    if isinstance(value, list) and value and isinstance(value[0], list):
        rows = ",\n".join(f"{indent}  {_inline(row)}" for row in value)
        return f"[\n{rows}\n{indent}]"
    if isinstance(value, dict) and value.get("format") == FORMAT:  # a specimen in a bench
        return _object_text(value, indent + "  ")
    return _inline(value)


def _inline(value: Any) -> str:
    return json.dumps(value, ensure_ascii=False, allow_nan=False)


def check_format(data: dict[str, Any], name: str, version: int, where: str) -> None:
    """Refuse a file of another format or of a later version with a plain sentence."""
    found = data.get("format")
    if found != name:
        said = (
            "it has no “format”" if found is None else f"its “format” is {_shown(found)}"
        )
        raise InputError(
            f"This is not a {name} file: {said}.",
            f"A file of this kind begins with \"format\": \"{name}\".", where,
        )
    stated = data.get("version")
    if not isinstance(stated, int) or isinstance(stated, bool) or stated < 1:
        raise InputError("“version” should be a whole number from 1 up.", where=where)
    if stated > version:
        raise InputError(
            f"The file has format version {shortened(str(stated))}; "
            f"this Tricline reads up to {version}.",
            "A later Tricline can open it.",
            where,
        )


def unknown_keys(data: dict[str, Any], known: set[str]) -> str:
    """Return the keys of an object that are not known, as JSON text to be kept.

    Raises
    ------
    InputError
        When they hold NaN or infinity, which no JSON file can keep.
    """
    others = {key: value for key, value in data.items() if key not in known}
    try:
        return json.dumps(others, allow_nan=False)
    except ValueError:
        names = "”, “".join(others)
        raise InputError(
            f"NaN and infinity are no JSON; one of “{names}” holds such a value."
        ) from None


# --- the specimen ---------------------------------------------------------------------------


def specimen_from_dict(data: dict[str, Any], where: str) -> Specimen:
    """Return the specimen that a JSON object describes.

    Raises
    ------
    InputError
        Naming every key that cannot be used and what was expected there.
    """
    check_format(data, FORMAT, VERSION, where)
    known: dict[str, Any] = {}
    faults = [f"“{key}” is missing." for key in _REQUIRED if data.get(key) is None]
    for key, (name, read) in _READERS.items():
        if data.get(key) is not None:
            try:
                known[name] = read(data[key], key)
            except InputError as error:
                faults.append(str(InputError(error.message, error.hint, f"“{key}”")))
    try:
        known["unknown"] = unknown_keys(data, {"format", "version", *_READERS})
        if "cell" in known and "crystal_axes" in known:
            axes_matrix(known["cell"], known["crystal_axes"])
    except InputError as error:
        faults.append(str(error))
    if faults:
        raise InputError(" ".join(faults), where=where)
    return Specimen(**known)


def specimen_to_dict(specimen: Specimen) -> dict[str, Any]:
    """Return the JSON object of a specimen; what is not known is left out."""
    data: dict[str, Any] = {"format": FORMAT, "version": VERSION}
    for key, (name, _) in _READERS.items():
        value = getattr(specimen, name)
        if key in _ALWAYS or value != Specimen.__dataclass_fields__[name].default:
            data[key] = to_plain(value)
    kept: dict[str, Any] = json.loads(specimen.unknown)
    return data | {key: value for key, value in kept.items() if key not in data}


# --- one reader a kind of key ---------------------------------------------------------------


def _shown(value: Any) -> str:
    """Return a JSON value as the file writes it, and null as nothing."""
    if value is None:
        return "nothing (null)"
    return shortened(json.dumps(value, ensure_ascii=False))


def _text(value: Any, _key: str) -> str:
    if not isinstance(value, str):
        raise InputError(f"Text was expected, not {_shown(value)}.")
    return value


def _name(value: Any, key: str) -> str:
    if not _text(value, key).strip():
        raise InputError("A specimen wants a name.")
    return str(value)


def read_number(value: Any, place: str = "") -> float:
    """Return a JSON number as a float; `place` is named in the sentence that refuses it."""
    named = f"{place}: " if place else ""
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        raise InputError(f"{named}A number was expected, not {_shown(value)}.")
    try:
        number = float(value)
    except OverflowError:  # a whole number of hundreds of digits
        number = math.inf
    if not math.isfinite(number):
        raise InputError(f"{named}A finite number was expected, not {shortened(str(value))}.")
    return number


def _density(value: Any, key: str) -> float:
    return limits.density(read_number(value), key)


def _temperature(value: Any, key: str) -> float:
    return limits.temperature(read_number(value), key)


def _table(value: Any, key: str, size: int) -> FloatArray:
    """Return a symmetric table of numbers, `size` rows of `size`."""
    expected = f"{size} rows of {size} numbers were expected"
    if not isinstance(value, list) or any(not isinstance(row, list) for row in value):
        raise InputError(f"{expected}.")
    lengths = sorted({len(row) for row in value})
    if len(value) != size or lengths != [size]:
        shape = " or ".join(map(str, lengths)) or "nothing"
        raise InputError(f"{expected}, not {len(value)} rows of {shape}.")
    numbers = [
        [read_number(x, f"row {i + 1}, column {j + 1}") for j, x in enumerate(row)]
        for i, row in enumerate(value)
    ]
    return limits.symmetric(np.array(numbers), key)


def _stiffness(value: Any, key: str) -> Matrix:
    return as_matrix(limits.stiffness(_table(value, key, 6), key))


def _deviations(value: Any, key: str) -> Matrix:
    return as_matrix(limits.deviations(_table(value, key, 6), key))


def _covariance(value: Any, key: str) -> Matrix:
    return as_matrix(limits.covariance(_table(value, key, 21), key))


def _class(value: Any, key: str) -> str:
    return crystal_class(_text(value, key)).key


def _unique_axis(value: Any, key: str) -> str:
    return crystal_class("monoclinic", _text(value, key)).unique_axis


def _axes(value: Any, key: str) -> str:
    return axes_text(_text(value, key))


def _cell(value: Any, _key: str) -> UnitCell:
    if not isinstance(value, dict):
        raise InputError(f"An object with {', '.join(_CELL_KEYS)} was expected.")
    missing = [part for part in _CELL_KEYS if part not in value]
    if missing:
        raise InputError(
            f"{', '.join(missing)} {'is' if len(missing) == 1 else 'are'} missing.",
            f"A cell has {', '.join(_CELL_KEYS)}.",
        )
    return UnitCell(*(read_number(value[part], part) for part in _CELL_KEYS))


_READERS: dict[str, tuple[str, Callable[[Any, str], Any]]] = {
    "name": ("name", _name),
    "source": ("source", _text),
    "notes": ("notes", _text),
    "density_kg_m3": ("density", _density),
    "stiffness_gpa": ("stiffness", _stiffness),
    "stiffness_std_gpa": ("stiffness_std", _deviations),
    "stiffness_covariance_gpa2": ("covariance", _covariance),
    "crystal_class": ("crystal_class", _class),
    "unique_axis": ("unique_axis", _unique_axis),
    "cell": ("cell", _cell),
    "crystal_axes": ("crystal_axes", _axes),
    "temperature_c": ("temperature_c", _temperature),
}
"""Key in the file, attribute of `Specimen`, and how the one is read into the other."""

_REQUIRED = ("name", "stiffness_gpa")
_ALWAYS = ("name", "stiffness_gpa", "crystal_class", "crystal_axes")
