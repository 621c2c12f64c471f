"""The table of measured speeds as it is typed: its edits, what it means to a fit, its file."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from scipy.linalg import solve_triangular

from core import limits
from core.arrays import FloatArray
from core.crystal.cell import CrystalFrame
from core.errors import InputError
from core.files.foreign.facts import read_density as density_of_text
from core.files.speed_cells import Fault, read_row, uses_indices
from core.files.speeds import SpeedTable, speeds_text
from core.numbers import full_precision, parse_number
from core.state import SPEED_COLUMNS, MeasuredSpeeds, Specimen, Vector3, as_matrix
from core.study.recovery.fit import Fit
from core.study.recovery.model import basis_of, mean_stiffness
from core.study.recovery.problem import MOST_READINGS
from core.study.recovery.readings import Reading
from core.tensor.notation import from_upper_triangle
from core.tensor.symmetry import crystal_class

Row = tuple[str, ...]

EMPTY_ROW: Row = ("",) * len(SPEED_COLUMNS)
_PLACE = {name: place for place, name in enumerate(SPEED_COLUMNS)}
_MEASURED = ("speed_m_s", "thickness_mm", "transit_us")
_FLIGHT = tuple(_PLACE[name] for name in ("thickness_mm", "transit_us"))
_COMPONENTS = ("nx", "ny", "nz")
_PLANNED = re.compile(r"planned:\s*(.*?)(?:;\s*sheet\s*([123]))?")
_IDLE_ZERO = re.compile(r"(?<=\d)\.0(?!\d)")  # of 38.0, which was written 38
_LARGEST_WHOLE, _WHOLE = 12, 1e-12  # components that are written as whole numbers
_WIDEST_ERROR = 30.0  # degrees; beyond it a direction is not known at all


# --- what a table means -----------------------------------------------------------------------


@dataclass(frozen=True)
class Planned:
    """A row with a direction and nothing measured yet."""

    row: int
    direction: Vector3
    sheet: str


@dataclass(frozen=True)
class Understood:
    """What a table of typed cells means.

    Attributes
    ----------
    readings : tuple of Reading
        Rows that can be fitted, numbered from 1 as in the table.
    planned : tuple of Planned
        Rows that wait for their speed.
    faults : tuple of Fault
        What is wrong with the others, by row and column.
    density, density_sigma : float or None
        kg/m³.
    direction_sigma_deg : float
    wanting : str
        Why nothing can be fitted, as a sentence; empty when something can.
    note : str
        What was taken for granted.
    """

    readings: tuple[Reading, ...]
    planned: tuple[Planned, ...]
    faults: tuple[Fault, ...]
    density: float | None
    density_sigma: float
    direction_sigma_deg: float
    wanting: str
    note: str


@lru_cache(maxsize=4)
def understand(speeds: MeasuredSpeeds) -> Understood:
    """Return what a table means; a row with a fault is left out, the others still count."""
    readings: list[Reading] = []
    planned: list[Planned] = []
    faults: list[Fault] = []
    for number, row in enumerate(speeds.rows, start=1):
        found = _row_means(row, number, speeds.frame)
        if isinstance(found, Reading):
            readings.append(found)
        elif isinstance(found, Planned):
            planned.append(found)
        else:
            faults += found
    wanting, density, sigma, turn = "", None, 0.0, 0.0
    try:
        density, sigma = read_density(speeds.density)
        turn = read_direction_sigma(speeds.direction_sigma)
    except InputError as error:
        wanting = error.message
    if not readings:
        wanting = (
            "No row has a direction and a speed yet: type them, paste readings, or open a file."
        )
    elif density is None and not wanting:
        wanting = "The density is wanted: speeds alone give no stiffness."
    note = _note(speeds, bool(readings))
    return Understood(
        tuple(readings), tuple(planned), tuple(faults), density, sigma, turn, wanting, note
    )


@lru_cache(maxsize=2 * MOST_READINGS)
def _row_means(
    row: Row, number: int, frame: CrystalFrame
) -> Reading | Planned | tuple[Fault, ...]:
    """Return the reading of a row, the blank that it plans, or what is wrong with it."""
    cells = dict(zip(SPEED_COLUMNS, row, strict=True))
    if not any(text.strip() for text in row):
        return ()
    if any(cells[name].strip() for name in _MEASURED):
        return read_row(cells, number, frame)
    checked = read_row(cells | {"speed_m_s": "1"} | _without_flight(), number, frame)
    if not isinstance(checked, Reading):
        return checked
    return Planned(number, checked.direction, cells["sheet"].strip())


def _without_flight() -> dict[str, str]:
    return dict.fromkeys(SPEED_COLUMNS[_PLACE["thickness_mm"] :], "")


def _note(speeds: MeasuredSpeeds, has_readings: bool) -> str:
    """Say what is taken for granted in reading the directions."""
    cells = (dict(zip(SPEED_COLUMNS, row, strict=True)) for row in speeds.rows)
    if not has_readings or speeds.frame.has_basis or not any(map(uses_indices, cells)):
        return ""
    return "No unit cell is given: indices are read as components along the crystal axes."


def read_density(text: str) -> tuple[float | None, float]:
    """Return the density, kg/m³, and its standard uncertainty, of "2684 ± 1"; None of "".

    Raises
    ------
    InputError
        When it is no density.
    """
    if not text.strip():
        return None, 0.0
    value, sigma = density_of_text(text, "density")
    return value, sigma or 0.0


def read_direction_sigma(text: str) -> float:
    """Return the standard uncertainty of the directions, degrees; zero of ""."""
    if not text.strip():
        return 0.0
    value = parse_number(text.replace("°", "").replace("±", ""), "direction_sigma")
    if not 0.0 <= value <= _WIDEST_ERROR:
        raise InputError(
            f"The uncertainty of a direction lies between 0° and {_WIDEST_ERROR:g}°.",
            where="direction_sigma",
        )
    return value


# --- edits ------------------------------------------------------------------------------------


def for_specimen(specimen: Specimen) -> MeasuredSpeeds:
    """Return an empty table for a crystal: its density, class, cell and axes."""
    return with_facts_of(MeasuredSpeeds(), specimen)


def with_facts_of(speeds: MeasuredSpeeds, specimen: Specimen) -> MeasuredSpeeds:
    """Return the table with density, class, cell and axes of a specimen."""
    density = speeds.density if specimen.density is None else f"{specimen.density:.10g}"
    return replace(
        speeds,
        density=density,
        crystal_class=specimen.crystal_class,
        unique_axis=specimen.unique_axis,
        cell=specimen.cell,
        crystal_axes=specimen.crystal_axes,
    )


def set_field(speeds: MeasuredSpeeds, field: str, text: str) -> MeasuredSpeeds:
    """Return the table with another density, symmetry, uncertainty or way of fitting.

    Raises
    ------
    InputError
        When the text is none.
    """
    if field == "density":
        read_density(text)
        return replace(speeds, density=text.strip())
    if field == "direction_sigma":
        read_direction_sigma(text)
        return replace(speeds, direction_sigma=text.strip())
    if field == "robust":
        return replace(speeds, robust=text == "on")
    if field in ("crystal_class", "unique_axis"):
        changed = replace(speeds, **{field: text})  # type: ignore[arg-type]
        crystal_class(changed.crystal_class, changed.unique_axis)
        return changed
    if field in ("entered", "criterion"):
        return replace(speeds, **{field: text})  # type: ignore[arg-type]
    raise ValueError(f"measured speeds have no {field!r}")


def set_cell(speeds: MeasuredSpeeds, row: int, column: str, text: str) -> MeasuredSpeeds:
    """Return the table with another text in a cell, rows from 0; one past the end is new."""
    rows = list(speeds.rows) + [EMPTY_ROW] * (row + 1 - len(speeds.rows))
    cells = list(rows[row])
    cells[_PLACE[column]] = text.strip()
    rows[row] = tuple(cells)
    return _with_rows(speeds, rows)


def without_rows(speeds: MeasuredSpeeds, rows: Sequence[int]) -> MeasuredSpeeds:
    """Return the table without some rows, counted from 0."""
    gone = set(rows)
    kept = [row for place, row in enumerate(speeds.rows) if place not in gone]
    return replace(speeds, rows=tuple(kept))


def with_row_before(speeds: MeasuredSpeeds, place: int) -> MeasuredSpeeds:
    """Return the table with a row before another that repeats its direction, as in a blank."""
    rows = list(speeds.rows)
    if rows:
        like = list(EMPTY_ROW)
        like[0] = rows[min(place, len(rows) - 1)][0]
        rows.insert(place, tuple(like))
    return _with_rows(speeds, rows)


def with_planned(speeds: MeasuredSpeeds, directions: Sequence[str]) -> MeasuredSpeeds:
    """Return the table with three rows, one a sheet, for each direction yet to be measured."""
    more = [
        _typed({"direction": text, "sheet": sheet}) for text in directions for sheet in "123"
    ]
    return _with_rows(speeds, [*speeds.rows, *more])


def _with_rows(speeds: MeasuredSpeeds, rows: list[Row]) -> MeasuredSpeeds:
    """Return the table with other rows; empty ones at the end are dropped."""
    while rows and not any(rows[-1]):
        rows.pop()
    if len(rows) > MOST_READINGS:
        raise InputError(
            f"The table would have {len(rows):,} rows; no more than {MOST_READINGS:,} are"
            " fitted.",
            "Average repeated readings, or leave out rows, first.",
        )
    return replace(speeds, rows=tuple(rows))


def with_block(
    speeds: MeasuredSpeeds, row: int, columns: Sequence[str], text: str
) -> MeasuredSpeeds:
    """Return the table with a pasted block of cells put in from a row on.

    Parameters
    ----------
    speeds : MeasuredSpeeds
    row : int
        Counted from 0.
    columns : sequence of str
        Keys of the columns from the current one to the right; a header line in the text goes
        before them, and may name nx, ny, nz in place of the direction.
    text : str
        Cells between tabs, semicolons or commas.

    Raises
    ------
    InputError
        For nothing to paste, for too many cells or rows. What is wrong within cells is found
        when the table is understood.
    """
    lines = [line for line in text.lstrip("\ufeff").splitlines() if line.strip(" \t")]
    lines = [line for line in lines if not line.lstrip().startswith("#")]
    if not lines:
        raise InputError("There is nothing to paste.")
    mark = next((mark for mark in ("\t", ";") if mark in lines[0]), ",")
    cells = list(csv.reader(lines, delimiter=mark, skipinitialspace=True))
    header = [name.strip().lower() for name in cells[0]]
    if set(header) <= {*SPEED_COLUMNS, *_COMPONENTS}:
        columns, cells = header, cells[1:]
    widest = max((len(line) for line in cells), default=0)
    if widest > len(columns):
        raise InputError(
            f"A block {widest} cells wide does not fit from this column on.",
            f"There are {len(columns)} columns from here. Paste it further left.",
        )
    rows = list(speeds.rows) + [EMPTY_ROW] * (row + len(cells) - len(speeds.rows))
    for place, line in enumerate(cells, start=row):
        rows[place] = _overwritten(rows[place], columns, line)
    return _with_rows(speeds, rows)


def _overwritten(row: Row, columns: Sequence[str], line: Sequence[str]) -> Row:
    """Return a row with the cells of a pasted line in it."""
    given = {name: text.strip() for name, text in zip(columns, line, strict=False)}
    if any(given.get(name) for name in _COMPONENTS):
        given["direction"] = " ".join(given.get(name, "") for name in _COMPONENTS)
    return tuple(given.get(name, old) for name, old in zip(SPEED_COLUMNS, row, strict=True))


# --- what the ledger gets ---------------------------------------------------------------------


def with_constants(specimen: Specimen, fit: Fit, speeds: MeasuredSpeeds) -> Specimen:
    """Return the specimen with the constants of a fit and everything they rest on.

    Density, class, and a cell with its axes where the readings have one, go with them. Of a
    specimen of another class nothing is kept: its name, cell and temperature are another
    crystal's. A combination that the readings do not see gets the mean eigenstiffness as its
    standard uncertainty, and the notes name it: no more is known of it than that it belongs
    to a crystal.
    """
    covariance = whole_covariance(fit)
    base = specimen if is_same_crystal(specimen, fit, speeds) else Specimen(
        f"Constants from {speeds.name or 'measured speeds'}", specimen.stiffness
    )  # fmt: skip
    cell = {} if speeds.cell is None else {
        "cell": speeds.cell, "crystal_axes": speeds.crystal_axes
    }  # fmt: skip
    deviations = _deviations(covariance)
    return replace(
        base,
        stiffness=as_matrix(limits.stiffness(fit.stiffness, "fit")),
        stiffness_std=as_matrix(deviations),
        covariance=as_matrix(covariance),
        density=fit.density,
        crystal_class=fit.cls.key,
        unique_axis=speeds.unique_axis,
        source=f"fit of {len(fit.readings)} measured speeds",
        notes=_with_note(base.notes, unseen_note(fit)),
        **cell,  # type: ignore[arg-type]
    )


def is_same_crystal(specimen: Specimen, fit: Fit, speeds: MeasuredSpeeds) -> bool:
    """Tell whether the readings can be of a specimen: whether both claim one symmetry."""
    claimed = crystal_class(specimen.crystal_class, specimen.unique_axis)
    return crystal_class(fit.cls.key, speeds.unique_axis) == claimed


def unseen_words(combinations: Sequence[str]) -> str:
    """Return "3 constants were not seen: C12, C23, C25"; nothing where all were."""
    if not combinations:
        return ""
    is_single = not any(" " in text for text in combinations)
    what = "constant" if is_single else "combination of constants"
    if len(combinations) > 1:
        what = what.replace(what.split()[0], f"{what.split()[0]}s", 1)
    verb = "was" if len(combinations) == 1 else "were"
    return f"{len(combinations)} {what} {verb} not seen: {', '.join(combinations)}"


def unseen_note(fit: Fit) -> str:
    """Return what the notes of a specimen say of constants that nobody measured."""
    words = unseen_words([combination.text for combination in fit.undetermined])
    return words and f"{words}. Kept as at the start of the fit, with large uncertainties."


def _with_note(notes: str, note: str) -> str:
    """Return notes with one more line, unless it is there."""
    return notes if note in notes else "\n".join(filter(None, (notes, note)))


def whole_covariance(fit: Fit) -> FloatArray:
    """Return the covariance (21, 21), GPa², of a fit with what is not seen known loosely."""
    if fit.is_determined:
        return fit.covariance
    basis = basis_of(fit.cls)
    parts = [dict(combination.parts) for combination in fit.undetermined]
    changes = np.array([[part.get(name, 0.0) for part in parts] for name in fit.names])
    lengths = basis.kelvin_root.T @ changes
    even = solve_triangular(np.linalg.cholesky(lengths.T @ lengths), changes.T, lower=True).T
    loose = abs(mean_stiffness(basis, fit.constants)) * basis.triangle @ even
    return np.asarray(fit.covariance + loose @ loose.T)


def _deviations(covariance: FloatArray) -> FloatArray:
    """Return the standard uncertainties (6, 6), GPa."""
    return from_upper_triangle(np.sqrt(np.maximum(np.diag(covariance), 0.0)))


# --- the file ---------------------------------------------------------------------------------


def from_table(table: SpeedTable, specimen: Specimen) -> MeasuredSpeeds:
    """Return what was read from a file, as typed; what it does not say stays open.

    The axes and the cell of a specimen of the same class stand in where the file has none; its
    density does not, for another crystal's would give wrong constants without a word.
    """
    lines = [line for line in speeds_text(table).splitlines() if not line.startswith("#")]
    read = csv.DictReader(io.StringIO("\n".join(lines)))
    rows = [
        _typed(cells | ({} if reading.text else {"direction": _components(reading.direction)}))
        for cells, reading in zip(read, table.readings, strict=True)
    ]
    plans = [match for line in table.comments if (match := _PLANNED.fullmatch(line))]
    rows += [_typed({"direction": match[1], "sheet": match[2] or ""}) for match in plans]
    planned = {match[0] for match in plans}
    axis = table.unique_axis or "y"
    is_alike = (table.class_key or "triclinic", axis) == (
        specimen.crystal_class, specimen.unique_axis
    )  # fmt: skip
    like = specimen if is_alike else MeasuredSpeeds()
    return MeasuredSpeeds(
        rows=tuple(rows),
        density=_density_text(table),
        crystal_class=table.class_key or "triclinic",
        unique_axis=axis,
        cell=table.cell or like.cell,
        crystal_axes=table.crystal_axes or like.crystal_axes,
        entered=_entered(rows),
        comments=tuple(line for line in table.comments if line not in planned),
    )


def _typed(cells: Mapping[str, str]) -> Row:
    """Return cells of a file as somebody would type them."""
    return tuple(_IDLE_ZERO.sub("", cells.get(name, "")) for name in SPEED_COLUMNS)


def _components(vector: Vector3) -> str:
    """Return components that read back to a unit vector: small whole numbers if there are."""
    scaled = np.array(vector) / max(abs(component) for component in vector)
    for times in range(1, _LARGEST_WHOLE + 1):
        whole = np.round(times * scaled)
        if np.abs(times * scaled - whole).max() < _WHOLE:
            return " ".join(f"{component:.0f}" for component in whole + 0.0)
    return " ".join(full_precision(component) for component in vector)


def _density_text(table: SpeedTable) -> str:
    if table.density is None:
        return ""
    sigma = f" ± {table.density_sigma:.10g}" if table.density_sigma else ""
    return f"{table.density:.10g}{sigma}"


def _entered(rows: Sequence[Row]) -> str:
    """Return which columns a table needs."""
    speed = any(row[_PLACE["speed_m_s"]] for row in rows)
    flight = any(row[place] for row in rows for place in _FLIGHT)
    return "both" if speed and flight else "flight" if flight else "speed"


def to_table(speeds: MeasuredSpeeds) -> SpeedTable:
    """Return the table as it is saved: readings, and planned blanks as comments.

    Rows with a fault cannot be saved; `understand` counts them.
    """
    known = understand(speeds)
    plans = tuple(
        f"planned: {speeds.rows[plan.row - 1][0]}"
        + (f"; sheet {plan.sheet}" if plan.sheet else "")
        for plan in known.planned
    )
    return SpeedTable(
        readings=known.readings,
        density=known.density,
        density_sigma=known.density_sigma or None,
        class_key=speeds.crystal_class,
        unique_axis=speeds.unique_axis if speeds.crystal_class == "monoclinic" else None,
        cell=speeds.cell,
        crystal_axes=None if speeds.cell is None else speeds.crystal_axes,
        comments=(*speeds.comments, *plans),
    )
