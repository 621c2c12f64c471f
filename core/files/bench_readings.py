"""The measured speeds of a bench file: a table of texts by column, and how they are fitted."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields
from typing import Any

from core.crystal.cell import UnitCell, axes_matrix, axes_text
from core.errors import InputError
from core.files.specimen import read_number
from core.numbers import shortened
from core.state import SPEED_COLUMNS, MeasuredSpeeds, to_plain
from core.study.recovery.problem import MOST_READINGS
from core.tensor.symmetry import crystal_class

_ONE_OF = {
    "entered": ("speed", "flight", "both"),
    "criterion": ("determinant", "largest", "functional"),
    "unique_axis": ("x", "y", "z"),
}
_CELL_KEYS = tuple(field.name for field in fields(UnitCell))


def readings_to_dict(readings: MeasuredSpeeds) -> dict[str, Any]:
    """Return the JSON object of measured speeds; columns without any text are left out."""
    used = [
        place
        for place, name in enumerate(SPEED_COLUMNS)
        if name == "direction" or any(row[place] for row in readings.rows)
    ]
    data = {"columns": [SPEED_COLUMNS[place] for place in used]}
    data["rows"] = [[row[place] for place in used] for row in readings.rows]  # type: ignore[misc]
    others = (field.name for field in fields(MeasuredSpeeds) if field.name != "rows")
    return data | {name: to_plain(getattr(readings, name)) for name in others}


def readings_from_dict(value: Any) -> MeasuredSpeeds:
    """Return the measured speeds that a JSON object describes; defaults for what is left out.

    Raises
    ------
    InputError
        Naming the key that cannot be used.
    """
    if not isinstance(value, dict):
        raise InputError("An object of measured speeds was expected.")
    known: dict[str, Any] = {"rows": _rows(value)}
    for name, read in _READERS.items():
        if value.get(name) is not None:
            known[name] = read(name, value[name])
    readings = MeasuredSpeeds(**known)
    if readings.cell is not None:
        axes_matrix(readings.cell, readings.crystal_axes)
    return readings


def _rows(value: dict[str, Any]) -> tuple[tuple[str, ...], ...]:
    """Return the rows with a cell for each column."""
    columns, rows = value.get("columns", []), value.get("rows", [])
    if not _is_list_of_texts(columns) or not set(columns) <= set(SPEED_COLUMNS):
        raise InputError(
            "“columns” is not a list of columns of measured speeds.",
            f"There are {', '.join(SPEED_COLUMNS)}.",
        )
    if not isinstance(rows, list) or len(rows) > MOST_READINGS:
        raise InputError(f"“rows” should be a list of at most {MOST_READINGS:,} rows.")
    for number, row in enumerate(rows, start=1):
        if not _is_list_of_texts(row) or len(row) != len(columns):
            raise InputError(f"Row {number} should hold {len(columns)} texts.")
    made = (dict(zip(columns, row, strict=True)) for row in rows)
    return tuple(tuple(cells.get(name, "") for name in SPEED_COLUMNS) for cells in made)


def _is_list_of_texts(value: Any) -> bool:
    return isinstance(value, list) and all(isinstance(item, str) for item in value)


def _text(name: str, value: Any) -> str:
    if not isinstance(value, str):
        raise InputError(f"“{name}” should be a text, not {shortened(repr(value))}.")
    return value


def _choice(name: str, value: Any) -> str:
    if value not in _ONE_OF[name]:
        raise InputError(
            f"“{name}” cannot be {shortened(repr(value))}.",
            f"It is one of {', '.join(_ONE_OF[name])}.",
        )
    return str(value)


def _flag(name: str, value: Any) -> bool:
    if not isinstance(value, bool):
        raise InputError(f"“{name}” should be true or false.")
    return value


def _cell(_name: str, value: Any) -> UnitCell:
    if not isinstance(value, dict) or set(value) != set(_CELL_KEYS):
        raise InputError(f"A cell has {', '.join(_CELL_KEYS)}.")
    return UnitCell(*(read_number(value[key], key) for key in _CELL_KEYS))


def _comments(_name: str, value: Any) -> tuple[str, ...]:
    if not _is_list_of_texts(value):
        raise InputError("“comments” should be a list of texts.")
    return tuple(value)


_READERS: dict[str, Callable[[str, Any], Any]] = {
    "density": _text,
    "crystal_class": lambda name, value: crystal_class(_text(name, value)).key,
    "unique_axis": _choice,
    "cell": _cell,
    "crystal_axes": lambda name, value: axes_text(_text(name, value)),
    "entered": _choice,
    "direction_sigma": _text,
    "robust": _flag,
    "criterion": _choice,
    "comments": _comments,
    "name": _text,
}
