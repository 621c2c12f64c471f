"""Specimen files: one crystal as JSON, every key of the format in one table.

The format is described in the README. Unknown keys are kept on saving, files of a later
version are refused, and every fault of a file is reported, not only the first.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

from core.crystal.cell import UnitCell
from core.errors import InputError
from core.files.text import read_text, write_text
from core.state import Matrix, Specimen, as_matrix
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class

FORMAT = "tricline-specimen"
VERSION = 1
_CELL_KEYS = ("a", "b", "c", "alpha", "beta", "gamma")


def read_specimen(path: Path) -> Specimen:
    """Return the specimen that a file holds; `InputError` says what is wrong with it."""
    return specimen_from_dict(parse_json(read_text(path), path.name), path.name)


def write_specimen(path: Path, specimen: Specimen) -> None:
    """Write a specimen file atomically."""
    write_text(path, json_text(specimen_to_dict(specimen)))


def parse_json(text: str, where: str) -> dict[str, Any]:
    """Return the JSON object of a text; anything else is an `InputError` with the line."""
    try:
        data = json.loads(text)
    except json.JSONDecodeError as error:
        raise InputError(
            f"Line {error.lineno}, column {error.colno}: this is not JSON ({error.msg}).",
            where=where) from None
    except RecursionError:
        raise InputError("The JSON is nested too deeply to be a specimen.", where=where) from None
    if not isinstance(data, dict):
        raise InputError("A JSON object {…} was expected.", where=where)
    return data


def check_format(data: dict[str, Any], name: str, version: int, where: str) -> None:
    """Refuse a file of another format or of a later version with a plain sentence."""
    found = data.get("format")
    if found != name:
        said = "no “format” key" if found is None else f"“format” is {found!r}"
        raise InputError(f"This is not a {name} file ({said}).", where=where)
    stated = data.get("version")
    if not isinstance(stated, int) or isinstance(stated, bool) or stated < 1:
        raise InputError("“version” should be a whole number from 1 up.", where=where)
    if stated > version:
        raise InputError(
            f"The file has format version {stated}; this Tricline reads up to {version}.",
            "A later Tricline can open it.", where)


def specimen_from_dict(data: dict[str, Any], where: str) -> Specimen:
    """Return the specimen that a JSON object describes.

    Raises
    ------
    InputError
        Naming every key that cannot be used and what was expected there.
    """
    check_format(data, FORMAT, VERSION, where)
    known: dict[str, Any] = {}
    faults: list[str] = []
    for key, (name, read) in _READERS.items():
        if data.get(key) is None:
            if key in _REQUIRED:
                faults.append(f"“{key}” is missing.")
            continue
        try:
            known[name] = read(data[key], key)
        except InputError as error:
            faults.append(str(error))
    try:
        crystal_class(known.get("crystal_class", "triclinic"), known.get("unique_axis", "y"))
    except InputError as error:
        faults.append(str(error))
    if faults:
        raise InputError(" ".join(faults), where=where)
    others = {key: value for key, value in data.items()
              if key not in _READERS and key not in ("format", "version")}
    return Specimen(**known, unknown=json.dumps(others, sort_keys=True))


def specimen_to_dict(specimen: Specimen) -> dict[str, Any]:
    """Return the JSON object of a specimen; what is not known is left out."""
    data: dict[str, Any] = {"format": FORMAT, "version": VERSION}
    for key, (name, _) in _READERS.items():
        value = getattr(specimen, name)
        default = Specimen.__dataclass_fields__[name].default
        if key not in _ALWAYS and value == default:
            continue
        if isinstance(value, UnitCell):
            value = {part: getattr(value, part) for part in _CELL_KEYS}
        data[key] = value
    return data | json.loads(specimen.unknown)


def json_text(data: dict[str, Any]) -> str:
    """Return JSON with one matrix row a line, as a person would write it."""
    lines = [f"  {json.dumps(key)}: {_json_value(value)}" for key, value in data.items()]
    return "{\n" + ",\n".join(lines) + "\n}\n"


def _json_value(value: Any) -> str:
    rows = isinstance(value, (tuple, list)) and value and isinstance(value[0], (tuple, list))
    if not rows:
        return json.dumps(value, ensure_ascii=False)
    body = ",\n".join(f"    {json.dumps(row, ensure_ascii=False)}" for row in value)
    return f"[\n{body}\n  ]"


# ------------------------------------------------------------------ one reader a kind of key
def _text(value: Any, key: str) -> str:
    if not isinstance(value, str):
        raise InputError("Text was expected.", where=f"“{key}”")
    return value


def _number(value: Any, key: str) -> float:
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        raise InputError(f"A number was expected, not {value!r}.", where=f"“{key}”")
    if not math.isfinite(value):
        raise InputError("A finite number was expected.", where=f"“{key}”")
    return float(value)


def _positive(value: Any, key: str) -> float:
    number = _number(value, key)
    if number <= 0:
        raise InputError(f"A number above zero was expected, not {number:g}.",
                         where=f"“{key}”")
    return number


def _matrix(size: int) -> Callable[[Any, str], Matrix]:
    def read(value: Any, key: str) -> Matrix:
        if not isinstance(value, list) or any(not isinstance(row, list) for row in value):
            raise InputError(f"{size} rows of {size} numbers were expected.", where=f"“{key}”")
        lengths = [len(row) for row in value]
        if lengths != [size] * size:
            shape = f"{len(value)} rows of {', '.join(map(str, sorted(set(lengths))))}"
            raise InputError(f"{size} rows of {size} numbers were expected, not {shape}.",
                             where=f"“{key}”")
        return as_matrix(np.array([
            [_number(x, f"{key}, row {i + 1}, column {j + 1}") for j, x in enumerate(row)]
            for i, row in enumerate(value)]))
    return read


def _stiffness(value: Any, key: str) -> Matrix:
    try:
        return as_matrix(Stiffness.from_voigt(np.array(_matrix(6)(value, key))).voigt)
    except InputError as error:
        raise InputError(error.message, error.hint, error.where or f"“{key}”") from None


def _symmetric(size: int) -> Callable[[Any, str], Matrix]:
    def read(value: Any, key: str) -> Matrix:
        matrix = np.array(_matrix(size)(value, key))
        if not np.allclose(matrix, matrix.T, rtol=1e-6, atol=1e-12 * np.abs(matrix).max()):
            raise InputError("A symmetric matrix was expected.", where=f"“{key}”")
        return as_matrix((matrix + matrix.T) / 2)
    return read


def _cell(value: Any, key: str) -> UnitCell:
    if not isinstance(value, dict) or any(part not in value for part in _CELL_KEYS):
        raise InputError(f"An object with {', '.join(_CELL_KEYS)} was expected.",
                         where=f"“{key}”")
    return UnitCell(*(_number(value[part], f"{key}, {part}") for part in _CELL_KEYS))


_READERS: dict[str, tuple[str, Callable[[Any, str], Any]]] = {
    "name": ("name", _text),
    "source": ("source", _text),
    "notes": ("notes", _text),
    "density_kg_m3": ("density", _positive),
    "stiffness_gpa": ("stiffness", _stiffness),
    "stiffness_std_gpa": ("stiffness_std", _symmetric(6)),
    "stiffness_covariance_gpa2": ("covariance", _symmetric(21)),
    "crystal_class": ("crystal_class", _text),
    "unique_axis": ("unique_axis", _text),
    "cell": ("cell", _cell),
    "crystal_axes": ("crystal_axes", _text),
    "temperature_c": ("temperature_c", _number),
}
_REQUIRED = ("name", "stiffness_gpa")
_ALWAYS = ("name", "stiffness_gpa", "crystal_class", "crystal_axes")
