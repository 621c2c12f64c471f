"""Cells of the measured-speeds table: a row of text made a reading, faults named by column."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import lru_cache
from typing import TypeVar

import numpy as np

from core.crystal.cell import CrystalFrame
from core.crystal.directions import parse_direction
from core.crystal.indices import CLOSING, plain_signs, read_indices, three_from_four
from core.crystal.turning import unit
from core.errors import InputError
from core.numbers import parse_number, shortened
from core.study.recovery.readings import (
    DEFAULT_RELATIVE_SIGMA,
    Flight,
    Kind,
    Path,
    Polarisation,
    Reading,
    Vector,
)

COLUMNS: dict[str, str] = {
    "direction": "wave normal (ray, for group speeds): [1 1 0], (1 0 2) or components",
    "nx": "component of the direction along crystal axis x",
    "ny": "component along y",
    "nz": "component along z",
    "sheet": "1 fastest, 2, 3; empty where not known",
    "polarisation": "a direction, longitudinal or shear; may be empty",
    "kind": "phase (default) or group",
    "speed_m_s": "speed",
    "sigma_m_s": "its standard uncertainty; 0.1 % of the speed where empty",
    "thickness_mm": "thickness of the blank, in place of a speed",
    "transit_us": "transit time",
    "sigma_us": "standard uncertainty of the transit time; 0.1 % of it where empty",
    "path": "through (default) or echo",
    "delay_ns": "delay in couplant and cables, taken off the transit; 0 where empty",
    "sigma_mm": "standard uncertainty of the thickness; 0 where empty",
}
"""Columns of the file and what they hold, in the order in which they are written."""

Cells = Mapping[str, str]

_COMPONENTS = ("nx", "ny", "nz")
_FLIGHT = ("thickness_mm", "transit_us", "sigma_us", "path", "delay_ns", "sigma_mm")
_KINDS: dict[str, Kind] = {"phase": "phase", "group": "group"}
_PATHS: dict[str, Path] = {"through": "through", "echo": "echo"}
_SHEETS: dict[str, int] = {"1": 1, "2": 2, "3": 3, "1.0": 1, "2.0": 2, "3.0": 3}
_Value = TypeVar("_Value")


@dataclass(frozen=True)
class Fault:
    """What is wrong with a cell.

    Attributes
    ----------
    row : int
        Row of the table, from 1.
    column : str
        A key of `COLUMNS`, or empty where the row as a whole is at fault.
    message, hint : str
    """

    row: int
    column: str
    message: str
    hint: str = ""

    @property
    def where(self) -> str:
        """The place for people: "row 3, column speed_m_s"."""
        return f"row {self.row}" + (f", column {self.column}" if self.column else "")


@dataclass
class _Row:
    """One row while it is being read: gives cells and collects what is wrong with them."""

    cells: Cells
    number: int
    frame: CrystalFrame
    faults: list[Fault] = field(default_factory=list)

    def text(self, column: str) -> str:
        return self.cells.get(column, "").strip()

    def fault(self, column: str, message: str, hint: str = "") -> None:
        self.faults.append(Fault(self.number, column, message, hint))

    def read(self, column: str, parse: Callable[[str], _Value], empty: _Value) -> _Value:
        """Return a cell as `parse` makes it; `empty` where it is empty or at fault."""
        text = self.text(column)
        if not text:
            return empty
        try:
            return parse(text)
        except InputError as error:
            self.fault(column, error.message, error.hint)
            return empty

    def positive(self, column: str) -> float | None:
        """Return a number above zero; None where the cell is empty or at fault."""
        value = self.read(column, parse_number, None)
        if value is not None and value <= 0:
            self.fault(column, f"{value:g} is not above zero.")
            return None
        return value


def read_row(cells: Cells, number: int, frame: CrystalFrame) -> Reading | tuple[Fault, ...]:
    """Return the reading that a row of text cells holds, or everything that is wrong with it.

    Parameters
    ----------
    cells : mapping of str to str
        By the keys of `COLUMNS`; those that are missing count as empty.
    number : int
        Of the row, from 1.
    frame : CrystalFrame
        What indices refer to. Where it has no cell and needs one, [u v w] and (h k l) are
        read as components along the crystal axes.
    """
    row = _Row(cells, number, frame)
    direction = _direction_of(row)
    sheet = row.read("sheet", _sheet, None)
    polarisation = row.read("polarisation", lambda text: _polarisation(text, frame), None)
    kind = row.read("kind", lambda text: _word(text, _KINDS), _KINDS["phase"])
    flight = _flight_of(row)
    speed, sigma = _speed_of(row, flight)
    if row.faults or direction is None:
        return tuple(row.faults)
    text = row.text("direction")
    return Reading(direction, speed, sigma, number, sheet, polarisation, kind, text, flight)


def uses_indices(cells: Cells) -> bool:
    """Tell whether a direction or polarisation of a row is written with indices."""
    texts = (cells.get(column, "") for column in ("direction", "polarisation"))
    return any(plain_signs(text)[:1] in CLOSING for text in texts)


# --- directions -----------------------------------------------------------------------------


def _direction_of(row: _Row) -> Vector | None:
    """Return the direction of a row; None where it has none or it is at fault."""
    given = [column for column in _COMPONENTS if row.text(column)]
    if row.text("direction"):
        if given:
            row.fault("direction", "The direction is given twice, here and as nx, ny, nz.")
            return None
        return row.read("direction", lambda text: direction_vector(text, row.frame), None)
    if not given:
        row.fault("direction", "The direction is missing.", "Give it here or as nx, ny, nz.")
        return None
    components = [row.read(column, parse_number, np.nan) for column in _COMPONENTS]
    for column in _COMPONENTS:
        if column not in given:
            row.fault(column, "This component of the direction is missing.")
    if not all(map(np.isfinite, components)):
        return None
    if not any(components):
        row.fault("nx", "The direction has no length: nx, ny and nz are all zero.")
        return None
    return _unit_vector(components)


@lru_cache(maxsize=4096)
def direction_vector(text: str, frame: CrystalFrame) -> Vector:
    """Return the unit vector (crystal axes) of a direction written in a cell of the table.

    Raises
    ------
    InputError
        When it cannot be read.
    """
    plain = plain_signs(text)
    if plain[:1] in CLOSING and not frame.has_basis:
        indices = read_indices(plain)
        if len(indices.values) == 4:
            raise InputError(f"{text} has four indices and needs the cell.", _ASK_FOR_CELL)
        return _unit_vector(three_from_four(indices).values)
    return parse_direction(plain, frame).vector


_ASK_FOR_CELL = "Add a line such as # cell: 4.91 4.91 5.40 90 90 120, or give components."


def _unit_vector(components: tuple[float, ...] | list[float]) -> Vector:
    x, y, z = unit(np.array(components)).tolist()
    return x, y, z


def _polarisation(text: str, frame: CrystalFrame) -> Polarisation:
    word = text.lower()
    if word == "longitudinal":
        return "longitudinal"
    if word == "shear":
        return "shear"
    if word[:1].isalpha() and len(word) > 2:
        raise InputError(
            f"“{shortened(text)}” is not a polarisation.",
            "Write longitudinal, shear, or a direction such as [0 0 1].",
        )
    return direction_vector(text, frame)


def _sheet(text: str) -> int:
    if text not in _SHEETS:
        raise InputError(
            f"“{shortened(text)}” is not a sheet.",
            "Sheets are 1 (fastest), 2 and 3; leave the cell empty where it is not known.",
        )
    return _SHEETS[text]


def _word(text: str, words: Mapping[str, _Value]) -> _Value:
    if text.lower() not in words:
        raise InputError(
            f"“{shortened(text)}” is not known here.", f"Write {' or '.join(words)}."
        )
    return words[text.lower()]


# --- speeds ---------------------------------------------------------------------------------


def _flight_of(row: _Row) -> Flight | None:
    """Return the time of flight of a row; None where it has none or it is at fault."""
    if not any(row.text(column) for column in _FLIGHT):
        return None
    before = len(row.faults)
    thickness, transit = row.positive("thickness_mm"), row.positive("transit_us")
    for column in ("thickness_mm", "transit_us"):
        if not row.text(column):
            row.fault(column, "A time of flight needs a thickness and a transit time.")
    sigma = row.positive("sigma_us")
    path = row.read("path", lambda text: _word(text, _PATHS), _PATHS["through"])
    delay = row.read("delay_ns", parse_number, 0.0)
    sigma_mm = row.read("sigma_mm", parse_number, 0.0)
    if sigma_mm < 0:
        row.fault("sigma_mm", f"{sigma_mm:g} is below zero.")
    if thickness is None or transit is None or len(row.faults) > before:
        return None
    if 1e-3 * delay >= transit:
        row.fault("delay_ns", f"A delay of {delay:g} ns is longer than the transit time.",
                  "The delay is in ns, the transit time in µs.")  # fmt: skip
        return None
    own = sigma if sigma is not None else DEFAULT_RELATIVE_SIGMA * transit
    return Flight(thickness, transit, own, path, delay, sigma_mm)


def _speed_of(row: _Row, flight: Flight | None) -> tuple[float, float]:
    """Return speed and standard uncertainty, m/s; ones where they are at fault."""
    timed = any(row.text(column) for column in _FLIGHT)
    if row.text("speed_m_s") and timed:
        row.fault("speed_m_s", "The row has both a speed and a time of flight.", "Keep one.")
    if timed:
        return (flight.speed, flight.sigma) if flight is not None else (1.0, 1.0)
    speed = row.positive("speed_m_s")
    sigma = row.positive("sigma_m_s")
    if not row.text("speed_m_s"):
        row.fault("speed_m_s", "The speed is missing.", "Or give thickness_mm and transit_us.")
    if speed is None:
        return 1.0, 1.0
    return speed, sigma if sigma is not None else DEFAULT_RELATIVE_SIGMA * speed
