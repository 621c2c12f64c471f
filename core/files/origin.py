"""Where the numbers of a written file come from: the lines that head every file."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from core.arrays import FloatArray
from core.crystal.cell import axes_text
from core.directional.medium import Medium
from core.state import OrientationChoice, Specimen, rotation_of, stiffness_of
from core.version import VERSION

PROGRAM = f"Tricline {VERSION}"
_DUST = 1e-15  # a component of a rotation this small is zero but for rounding


def today(reproducible: bool = False) -> str:
    """Return the date of today as in 2031-05-17; empty where files must not depend on it."""
    return "" if reproducible else dt.date.today().isoformat()


@dataclass(frozen=True)
class Origin:
    """One crystal in one orientation: what the numbers of a file belong to.

    Attributes
    ----------
    specimen : Specimen
    orientation : OrientationChoice
        How part axes X, Y, Z lie in the crystal.
    made : str
        Date, or empty for a file that is the same whenever it is made.
    side : str
        "A" or "B" where both are written, else empty.
    """

    specimen: Specimen
    orientation: OrientationChoice
    made: str = ""
    side: str = ""

    @cached_property
    def rotation(self) -> FloatArray:
        """R (3, 3), v_part = R v_crystal."""
        found = rotation_of(self.orientation, self.specimen)
        return np.where(np.abs(found) < _DUST, 0.0, found)

    @cached_property
    def medium(self) -> Medium:
        """The crystal in part axes."""
        stiffness = stiffness_of(self.specimen)
        rotation = rotation_of(self.orientation, self.specimen)
        if not np.array_equal(rotation, np.eye(3)):  # else the very numbers that were entered
            stiffness = stiffness.rotate(rotation)
        return Medium(stiffness, self.specimen.density)


def origin_facts(origin: Origin) -> tuple[tuple[str, str], ...]:
    """Return what heads a file, as names and values, each on one line of plain text."""
    specimen = origin.specimen
    rows = [" ".join(f"{x:.10g}" for x in row) for row in origin.rotation]
    facts = [
        ("specimen", specimen.name),
        ("source", specimen.source or "not stated"),
        ("crystal class", specimen.crystal_class),
        ("density", "not known" if specimen.density is None else
         f"{specimen.density:.10g} kg/m3"),
        ("crystal axes", axes_text(specimen.crystal_axes) if specimen.cell is not None else
         "x y z of the table (no cell given)"),
        ("orientation", orientation_words(origin.orientation)),
        *((f"part {axis} in crystal axes", row) for axis, row in zip("XYZ", rows, strict=True)),
        ("date", origin.made),
        ("program", PROGRAM),
    ]
    lead = f"{origin.side}, " if origin.side else ""
    return tuple((lead + name, " ".join(value.split())) for name, value in facts if value)


def origin_lines(origins: Iterable[Origin], mark: str) -> list[str]:
    """Return the head of a file as lines that begin with the mark of a comment."""
    return [f"{mark} {name}: {value}" for origin in origins
            for name, value in origin_facts(origin)]


def orientation_words(choice: OrientationChoice) -> str:
    """Return an orientation in the user's words, its small turns after it."""
    if not any(choice.turn):
        return choice.text
    return f"{choice.text} turn {' '.join(f'{x:.10g}' for x in choice.turn)}"
