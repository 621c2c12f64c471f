"""Bench files: a whole `BenchState` as JSON, so that a bench reopens to the same picture."""

from __future__ import annotations

from dataclasses import fields
from pathlib import Path
from typing import Any

import numpy as np

from core.errors import InputError
from core.files.specimen import (
    check_format,
    json_text,
    parse_json,
    specimen_from_dict,
    specimen_to_dict,
)
from core.files.text import read_text, write_text
from core.state import BenchState, Display, OrientationChoice, Vector3, to_plain

FORMAT = "tricline-bench"
VERSION = 1
SUFFIX = ".tricline"


def read_bench(path: Path) -> BenchState:
    """Return the bench that a file holds; `InputError` says what is wrong with it."""
    return bench_from_dict(parse_json(read_text(path), path.name), path.name)


def write_bench(path: Path, state: BenchState) -> None:
    """Write a bench file atomically."""
    write_text(path, json_text(bench_to_dict(state)))


def bench_to_dict(state: BenchState) -> dict[str, Any]:
    """Return the JSON object of a bench."""
    return {
        "format": FORMAT,
        "version": VERSION,
        "specimen": specimen_to_dict(state.specimen),
        "other": None if state.other is None else specimen_to_dict(state.other),
        "orientation_a": to_plain(state.orientation_a),
        "orientation_b": to_plain(state.orientation_b),
        "pin": list(state.pin),
        "section": list(state.section),
        "quantity": state.quantity,
        "cutting_error_deg": state.cutting_error_deg,
        "display": to_plain(state.display),
    }


def bench_from_dict(data: dict[str, Any], where: str) -> BenchState:
    """Return the bench that a JSON object describes; what is left out takes its default."""
    check_format(data, FORMAT, VERSION, where)
    if not isinstance(data.get("specimen"), dict):
        raise InputError("“specimen” is missing.", where=where)
    other = data.get("other")
    default = BenchState(specimen_from_dict(data["specimen"], f"{where}, specimen"))
    return BenchState(
        specimen=default.specimen,
        other=specimen_from_dict(other, f"{where}, other") if isinstance(other, dict) else None,
        orientation_a=_orientation(data.get("orientation_a"), f"{where}, orientation_a"),
        orientation_b=_orientation(data.get("orientation_b"), f"{where}, orientation_b"),
        pin=_unit_vector(data.get("pin", default.pin), f"{where}, pin"),
        section=_unit_vector(data.get("section", default.section), f"{where}, section"),
        quantity=_text(data.get("quantity", default.quantity), f"{where}, quantity"),
        cutting_error_deg=_angle(data.get("cutting_error_deg", default.cutting_error_deg),
                                 f"{where}, cutting_error_deg"),
        display=_display(data.get("display"), f"{where}, display"),
    )


def _orientation(value: Any, where: str) -> OrientationChoice:
    if value is None:
        return OrientationChoice()
    if not isinstance(value, dict):
        raise InputError("An object with “text” and “turn” was expected.", where=where)
    text = _text(value.get("text", "identity"), where)
    return OrientationChoice(text, _three(value.get("turn", [0.0, 0.0, 0.0]), where))


def _display(value: Any, where: str) -> Display:
    """Return the display choices; a choice of the wrong kind is refused, an unknown one left."""
    if value is None:
        return Display()
    if not isinstance(value, dict):
        raise InputError("An object of display choices was expected.", where=where)
    known: dict[str, Any] = {}
    for choice in fields(Display):
        if choice.name not in value:
            continue
        given = value[choice.name]
        if choice.name == "sweep_about":
            known[choice.name] = None if given is None else _unit_vector(given, where)
        elif choice.name == "sheets":
            known[choice.name] = _three_flags(given, where)
        elif type(given) is type(choice.default):
            known[choice.name] = given
        else:
            raise InputError(f"“{choice.name}” cannot be {given!r}.", where=where)
    return Display(**known)


def _three_flags(value: Any, where: str) -> tuple[bool, bool, bool]:
    if isinstance(value, list) and len(value) == 3 and all(type(x) is bool for x in value):
        return value[0], value[1], value[2]
    raise InputError("“sheets” should be three of true or false.", where=where)


def _text(value: Any, where: str) -> str:
    if not isinstance(value, str):
        raise InputError("Text was expected.", where=where)
    return value


def _angle(value: Any, where: str) -> float:
    good = isinstance(value, (int, float)) and not isinstance(value, bool)
    if not good or not 0.0 < value <= 30.0:
        raise InputError("An angle above 0° and up to 30° was expected.", where=where)
    return float(value)


def _three(value: Any, where: str) -> Vector3:
    good = isinstance(value, (list, tuple)) and len(value) == 3
    if not good or not all(
            isinstance(x, (int, float)) and not isinstance(x, bool) and np.isfinite(x)
            for x in value):
        raise InputError("Three numbers were expected.", where=where)
    return float(value[0]), float(value[1]), float(value[2])


def _unit_vector(value: Any, where: str) -> Vector3:
    x, y, z = _three(value, where)
    length = float(np.sqrt(x * x + y * y + z * z))
    if length == 0.0:
        raise InputError("A direction of length zero points nowhere.", where=where)
    return (x, y, z) if abs(length - 1) < 1e-12 else (x / length, y / length, z / length)
