"""Bench files: a whole `BenchState` as JSON, so that a bench reopens to the same picture."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields
from pathlib import Path
from typing import Any

import numpy as np

from core.crystal.turning import unit
from core.directional.quantities import quantity
from core.errors import InputError
from core.files.bench_readings import readings_from_dict, readings_to_dict
from core.files.specimen import (
    check_format,
    json_text,
    parse_json,
    read_number,
    specimen_from_dict,
    specimen_to_dict,
    unknown_keys,
)
from core.files.text import read_text, write_text
from core.numbers import shortened
from core.state import (
    SOURCE_TIMES_US,
    BenchState,
    Display,
    MeasuredSpeeds,
    OrientationChoice,
    Specimen,
    Vector3,
    as_vector,
    rotation_of,
    to_plain,
)

FORMAT = "tricline-bench"
VERSION = 1
SUFFIX = ".tricline"
WIDEST_CONE = 30.0  # degrees; a larger error of cutting is a different cut


def read_bench(path: Path) -> BenchState:
    """Return the bench that a file holds; `InputError` says what is wrong with it."""
    return bench_from_dict(parse_json(read_text(path), path.name), path.name)


def write_bench(path: Path, state: BenchState) -> None:
    """Write a bench file atomically."""
    write_text(path, json_text(bench_to_dict(state)))


def bench_to_dict(state: BenchState) -> dict[str, Any]:
    """Return the JSON object of a bench."""
    data: dict[str, Any] = {"format": FORMAT, "version": VERSION}
    for field in fields(BenchState):
        value = getattr(state, field.name)
        if isinstance(value, Specimen):
            data[field.name] = specimen_to_dict(value)
        elif isinstance(value, MeasuredSpeeds):
            data[field.name] = readings_to_dict(value)
        elif field.name != "unknown":
            data[field.name] = to_plain(value)
    kept: dict[str, Any] = parse_json(state.unknown, "unknown keys")
    return data | {key: value for key, value in kept.items() if key not in data}


def bench_from_dict(data: dict[str, Any], where: str) -> BenchState:
    """Return the bench that a JSON object describes; what is left out takes its default.

    Raises
    ------
    InputError
        Naming the file and the key that cannot be used.
    """
    check_format(data, FORMAT, VERSION, where)
    if data.get("specimen") is None:
        raise InputError("“specimen” is missing.", where=where)
    known: dict[str, Any] = {}
    for key, read in _READERS.items():
        if data.get(key) is not None:
            known[key] = _reading(read, data[key], f"{where}, {key}")
    known["unknown"] = _reading(
        lambda value: unknown_keys(value, {"format", "version", *_READERS}), data, where
    )
    state = BenchState(**known)
    for side in "AB":  # an orientation speaks of its own crystal's cell
        place = f"{where}, orientation_{side.lower()}"
        _reading(
            lambda s: rotation_of(state.orientation_of(s), state.specimen_of(s)), side, place
        )
    return state


def _reading(read: Callable[[Any], Any], value: Any, where: str) -> Any:
    """Return what a reader makes of a value; its refusal names the place."""
    try:
        return read(value)
    except InputError as error:
        place = where if error.where in ("", "quantity") else f"{where}, {error.where}"
        raise InputError(error.message, error.hint, place) from None


# --- one reader a key -----------------------------------------------------------------------


def _specimen(value: Any) -> Specimen:
    if not isinstance(value, dict):
        raise InputError("A specimen was expected.")
    return specimen_from_dict(value, "")


def _orientation(value: Any) -> OrientationChoice:
    if not isinstance(value, dict) or not isinstance(value.get("text", ""), str):
        raise InputError("An object with “text” and “turn” was expected.")
    default = OrientationChoice()
    return OrientationChoice(
        value.get("text", default.text), _three_numbers(value.get("turn", list(default.turn)))
    )


def _three_numbers(value: Any) -> Vector3:
    if not isinstance(value, list) or len(value) != 3:
        raise InputError("Three numbers were expected.")
    return read_number(value[0]), read_number(value[1]), read_number(value[2])


def _unit_vector(value: Any) -> Vector3:
    given = _three_numbers(value)
    if not any(given):
        raise InputError("A direction of length zero points nowhere.")
    # One that was saved as a unit vector comes back as the very same numbers.
    is_unit = abs(float(np.dot(given, given)) - 1.0) < 1e-14
    return given if is_unit else as_vector(unit(np.array(given)))


def _quantity(value: Any) -> str:
    if not isinstance(value, str):
        raise InputError(f"The name of a quantity was expected, not {shortened(repr(value))}.")
    return quantity(value).key


def _cone(value: Any) -> float:
    degrees = read_number(value)
    if not 0.0 < degrees <= WIDEST_CONE:
        raise InputError(f"An angle above 0° and up to {WIDEST_CONE:g}° was expected.")
    return degrees


def _time(value: Any) -> float:
    least, most = SOURCE_TIMES_US
    time = read_number(value)
    if not least <= time <= most:
        raise InputError(f"A time from {least:g} to {most:,g} µs was expected.")
    return time


_OTHER_COLOURS = ("value", "longitudinality")
_ONE_OF: dict[str, tuple[object, ...]] = {
    "layout": ("A", "AB", "B"),
    "deck": ("hemisphere", "sweep", "source"),
    "hemisphere": ("A", "B", "difference", "cost"),
    "projection": ("equal_area", "stereographic"),
    "ledger": ("A", "B"),
    "face": ("stiffness", "compliance", "uncertainty"),
    "hemisphere_sheet": (0, 1, 2),
    "page": ("bench", "speeds"),
    "speeds_plot": ("residuals", "section", "spectrum", "correlation"),
}
"""The display choices that are one of a few."""


def _display(value: Any) -> Display:
    """Return the display choices; one that cannot be used is refused, an unknown one left."""
    if not isinstance(value, dict):
        raise InputError("An object of display choices was expected.")
    known: dict[str, Any] = {}
    for choice in fields(Display):
        if choice.name in value:
            known[choice.name] = _choice(choice.name, value[choice.name], choice.default)
    return Display(**known)


def _choice(name: str, given: Any, default: Any) -> Any:
    if name == "sweep_about":
        return None if given is None else _unit_vector(given)
    if name == "speeds_plane":
        return _unit_vector(given)
    if name == "sheets":
        return _three_flags(given)
    if name == "source_time_us":
        return _time(given)
    if name == "colour_by" and given not in _OTHER_COLOURS:
        return _sheet_quantity(given)
    if type(given) is not type(default):
        raise InputError(f"“{name}” cannot be {shortened(repr(given))}.")
    if name in _ONE_OF and given not in _ONE_OF[name]:
        choices = ", ".join(map(str, _ONE_OF[name]))
        raise InputError(
            f"“{name}” cannot be {shortened(repr(given))}.", f"It is one of {choices}."
        )
    return given


def _sheet_quantity(value: Any) -> str:
    key = _quantity(value)
    if quantity(key).sheets != 3:
        raise InputError(f"“colour_by” cannot be “{key}”: it has not three sheets.")
    return key


def _three_flags(value: Any) -> tuple[bool, bool, bool]:
    if isinstance(value, list) and len(value) == 3 and all(type(x) is bool for x in value):
        return value[0], value[1], value[2]
    raise InputError("“sheets” should be three of true or false.")


_READERS: dict[str, Callable[[Any], Any]] = {
    "specimen": _specimen,
    "other": _specimen,
    "orientation_a": _orientation,
    "orientation_b": _orientation,
    "pin": _unit_vector,
    "section": _unit_vector,
    "quantity": _quantity,
    "cutting_error_deg": _cone,
    "display": _display,
    "readings": readings_from_dict,
}
"""Key in the file, which is the attribute of `BenchState`, and how it is read."""
