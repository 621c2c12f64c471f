"""The measured-speeds file: CSV with units in the header, every fault named by row and column.

Lines that start with # are comments; some of them carry facts about the specimen:

    # density_kg_m3: 2649 ± 1
    # crystal_class: trigonal_6
    # unique_axis: y
    # cell: 4.91 4.91 5.40 90 90 120
    # crystal_axes: x||a, z||c*

Columns are those of `core.files.speed_cells.COLUMNS`, in any order. Commas separate cells;
semicolons or tabs do where the header has them, and then a decimal comma is understood.
"""

from __future__ import annotations

import csv
import difflib
import io
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from core.crystal.cell import CrystalFrame, UnitCell, axes_text
from core.crystal.indices import read_numbers
from core.errors import InputError
from core.files.foreign.facts import read_density
from core.files.speed_cells import COLUMNS, Cells, Fault, read_row, uses_indices
from core.files.text import read_text, write_text
from core.numbers import full_precision, shortened
from core.study.recovery.problem import MOST_READINGS
from core.study.recovery.readings import Reading
from core.tensor.symmetry import crystal_class

FACTS = ("density_kg_m3", "crystal_class", "unique_axis", "cell", "crystal_axes")
"""Keys of comment lines that are read."""

_FACT = re.compile(rf"#\s*({'|'.join(FACTS)})\s*[:=]\s*(.*)", re.IGNORECASE)
_MOST_FAULTS = 20  # that are named; a wrong file has thousands
_MOST_ROWS = 5  # that are named for one fault
_SPEED = ("speed_m_s", "sigma_m_s")


@dataclass(frozen=True)
class SpeedTable:
    """What a measured-speeds file holds.

    Attributes
    ----------
    readings : tuple of Reading
        Numbered by row from 1, comments and header not counted.
    density, density_sigma : float or None
        kg/m³.
    class_key, unique_axis : str or None
    cell : UnitCell or None
    crystal_axes : str or None
    comments : tuple of str
        Other comment lines, without their mark.
    guesses : tuple of str
        Sentences: what was taken for granted in reading.
    """

    readings: tuple[Reading, ...]
    density: float | None = None
    density_sigma: float | None = None
    class_key: str | None = None
    unique_axis: str | None = None
    cell: UnitCell | None = None
    crystal_axes: str | None = None
    comments: tuple[str, ...] = ()
    guesses: tuple[str, ...] = ()


def read_speeds(
    path: Path, frame: CrystalFrame | None = None, needs_cell: bool = False
) -> SpeedTable:
    """Return the readings of a file. See `parse_speeds`."""
    return parse_speeds(read_text(path), frame, path.name, needs_cell)


def names_speeds(text: str) -> bool:
    """Tell whether a text is a table of measured speeds, to judge by its header."""
    _, lines = _split(text)
    names = {name.strip().lower() for name in re.split(r"[\t;,]", lines[0])} if lines else set()
    return bool(names & {"speed_m_s", "transit_us"}) and len(names & set(COLUMNS)) >= 2


def parse_speeds(
    text: str,
    frame: CrystalFrame | None = None,
    where: str = "",
    needs_cell: bool = False,
) -> SpeedTable:
    """Return the readings of a text, such as one that was pasted.

    Parameters
    ----------
    text : str
    frame : CrystalFrame
        What indices refer to where the text does not say; a cell, axes or class in the text
        go before it.
    where : str
        Name of the file, for sentences.
    needs_cell : bool
        Refuse indices where neither the text nor `frame` has the cell they refer to; without
        it they are read as components, for somebody who still will give the cell.

    Raises
    ------
    InputError
        For a wrong header, for more rows than can be fitted, and for faulty cells: the first
        twenty are named by row and column.
    """
    if re.match(r'\s*\{\s*["}]', text):
        raise InputError("This is a specimen or a bench file, not a table of measured speeds.",
                         "Use: tricline summary, along, rotate or compare.", where)
    comments, lines = _split(text)
    facts, rest = _read_facts(comments, where)
    rows = _table(lines, where)
    own = _frame(facts, frame)
    readings, faults = read_rows(rows, own)
    if needs_cell and not own.has_basis:
        faults = (*_without_cell(rows, own), *faults)
    if faults:
        raise _refusal(faults, where)
    return replace(facts, readings=readings, comments=rest, guesses=_guesses(rows, own))


def read_rows(
    rows: Sequence[Cells], frame: CrystalFrame
) -> tuple[tuple[Reading, ...], tuple[Fault, ...]]:
    """Return the readings of rows of text cells, and everything that is wrong with the others.

    Rows without any text are passed over but counted, so that a row keeps its number in a
    table that is being typed.
    """
    readings: list[Reading] = []
    faults: list[Fault] = []
    for number, cells in enumerate(rows, start=1):
        if _SURPLUS in cells:
            faults.append(Fault(number, "", cells[_SURPLUS], _SURPLUS_HINT))
        elif any(text.strip() for text in cells.values()):
            found = read_row(cells, number, frame)
            if isinstance(found, Reading):
                readings.append(found)
            else:
                faults += found
    return tuple(readings), tuple(faults)


def _without_cell(rows: Sequence[Cells], frame: CrystalFrame) -> list[Fault]:
    """Return a fault for every row whose indices refer to a cell that is not known."""
    family = frame.class_key.split("_")[0]
    message = (f"Indices need the unit cell: this crystal is {family} and no cell was given.")
    hint = ("Add a line such as # cell: 4.91 4.91 5.40 90 90 120, or give components along the"
            " crystal axes without brackets: 1 0 0.")
    return [
        Fault(number, "direction", message, hint)
        for number, cells in enumerate(rows, start=1) if uses_indices(cells)
    ]


# --- the text ---------------------------------------------------------------------------------


def _split(text: str) -> tuple[list[str], list[str]]:
    """Return comment lines and the others; blank lines are dropped."""
    lines = [line for line in text.lstrip("\ufeff").splitlines() if line.strip(" \t,;")]
    comments = [line.strip() for line in lines if line.lstrip().startswith("#")]
    return comments, [line for line in lines if not line.lstrip().startswith("#")]


def _table(lines: Sequence[str], where: str) -> list[Cells]:
    """Return the rows of a table as cells by column.

    Raises
    ------
    InputError
        When there is no table, its header is wrong, or it is too long.
    """
    if not lines:
        raise InputError(
            "There is no table of speeds here.", f"It starts with a header: {_EXAMPLE}.", where
        )
    count = len(lines) - 1
    if count > MOST_READINGS:
        raise InputError(
            f"The table has {count:,} rows; no more than {MOST_READINGS:,} are fitted.",
            "Average repeated readings, or leave out rows, first.", where,
        )  # fmt: skip
    delimiter = next((mark for mark in ("\t", ";") if mark in lines[0]), ",")
    try:
        reader = csv.reader(lines, delimiter=delimiter, skipinitialspace=True, strict=True)
        header, *rows = reader
    except csv.Error as error:
        raise InputError(f"The table cannot be read as CSV ({error}).", where=where) from None
    columns = _columns(header, where)
    return [_cells(columns, row) for row in rows]


def _columns(header: Sequence[str], where: str) -> list[str]:
    """Return the columns that a header names.

    Raises
    ------
    InputError
        Naming a column that is not known, or given twice, or that is missing.
    """
    columns = [name.strip().lower() for name in header]
    for place, name in enumerate(columns, start=1):
        spot = _place(where, f"header, column {place}")
        if name not in COLUMNS:
            near = difflib.get_close_matches(name, COLUMNS, n=1, cutoff=0.5)
            question = f"Did you mean {near[0]}? " if near else ""
            raise InputError(
                f"“{shortened(header[place - 1])}” is not a column of measured speeds.",
                f"{question}Columns are {', '.join(COLUMNS)}.", spot,
            )  # fmt: skip
        if columns.count(name) > 1:
            raise InputError(f"The column {name} is there twice.", "Keep one.", spot)
    has_direction = "direction" in columns or {"nx", "ny", "nz"} <= set(columns)
    has_speed = "speed_m_s" in columns or {"thickness_mm", "transit_us"} <= set(columns)
    if not has_direction or not has_speed:
        missing = "a direction (or nx, ny, nz)" if not has_direction else (
            "speed_m_s (or thickness_mm and transit_us)")  # fmt: skip
        raise InputError(
            f"The header lacks {missing}.", f"For example {_EXAMPLE}.", _place(where, "header")
        )
    return columns


def _cells(columns: Sequence[str], row: Sequence[str]) -> Cells:
    """Return the cells of a row by column, with a note where there are too many."""
    if len(row) > len(columns) and any(cell.strip() for cell in row[len(columns) :]):
        return {_SURPLUS: f"The row has {len(row)} cells, the header {len(columns)}."}
    return dict(zip(columns, row, strict=False))


_SURPLUS = "surplus"
_SURPLUS_HINT = (
    "Use decimal points, not commas, and put a direction written with commas in quotes."
)
_EXAMPLE = "direction,sheet,speed_m_s,sigma_m_s"


def _place(where: str, part: str) -> str:
    return f"{where}, {part}" if where else part


def _refusal(faults: Sequence[Fault], where: str) -> InputError:
    """Return the error that names the faults of a table, one that many rows share once."""
    shared: dict[tuple[str, str, str], list[int]] = {}
    for fault in faults:
        shared.setdefault((fault.column, fault.message, fault.hint), []).append(fault.row)
    (column, message, hint), rows = next(iter(shared.items()))
    others = list(shared.items())[1:]
    if others:
        named = [f"{_spot(numbers, key[0])}: {key[1]}"
                 for key, numbers in others[: _MOST_FAULTS - 1]]
        more = len(others) - len(named)
        rest = f"And {more:,} more faults." if more else ""
        hint = " ".join(part for part in (hint, "Also", *named, rest) if part)
    return InputError(message, hint, _place(where, _spot(rows, column)))


def _spot(rows: Sequence[int], column: str) -> str:
    """Return "row 3, column sheet", or "rows 3, 4, 5 and 9 more, column sheet"."""
    if len(rows) == 1:
        place = f"row {rows[0]}"
    else:
        named, rest = rows[:_MOST_ROWS], len(rows) - _MOST_ROWS
        place = f"rows {', '.join(map(str, named))}{f' and {rest:,} more' if rest > 0 else ''}"
    return place + (f", column {column}" if column else "")


# --- comment lines ----------------------------------------------------------------------------


def _read_facts(comments: Sequence[str], where: str) -> tuple[SpeedTable, tuple[str, ...]]:
    """Return what comments say of the specimen, as a table without readings, and the rest."""
    facts, rest = SpeedTable(()), []
    for line in comments:
        match = _FACT.fullmatch(line)
        if match is None:
            rest.append(line.lstrip("# ").rstrip())
            continue
        key = match[1].lower()
        try:
            facts = replace(facts, **_FACT_READERS[key](match[2].strip()))
        except InputError as error:
            spot = _place(where, f"comment {key}")
            raise InputError(error.message, error.hint, spot) from None
    if facts.class_key is not None:
        known = crystal_class(facts.class_key, facts.unique_axis or "y")
        facts = replace(facts, class_key=known.key)
    return facts, tuple(rest)


def _read_density(text: str) -> dict[str, Any]:
    value, sigma = read_density(text)
    return {"density": value, "density_sigma": sigma}


def _read_cell(text: str) -> dict[str, Any]:
    numbers = read_numbers(text)
    if len(numbers) != 6:
        raise InputError(
            f"A cell has six numbers, not {len(numbers)}.", "a b c in Å and α β γ in degrees."
        )
    return {"cell": UnitCell(*numbers)}


_FACT_READERS: dict[str, Callable[[str], dict[str, Any]]] = {
    "density_kg_m3": _read_density,
    "crystal_class": lambda text: {"class_key": crystal_class(text).key},
    "unique_axis": lambda text: {
        "unique_axis": crystal_class("monoclinic", text.lower()).unique_axis
    },
    "cell": _read_cell,
    "crystal_axes": lambda text: {"crystal_axes": axes_text(text)},
}


def _frame(facts: SpeedTable, frame: CrystalFrame | None) -> CrystalFrame:
    """Return what indices refer to: what the text says, then what the caller knows."""
    known = frame or CrystalFrame()
    return CrystalFrame(
        facts.cell or known.cell,
        facts.crystal_axes or known.axes,
        facts.class_key or known.class_key,
        facts.unique_axis or known.unique_axis,
    )


def _guesses(rows: Sequence[Cells], frame: CrystalFrame) -> tuple[str, ...]:
    """Return what was taken for granted."""
    guesses = []
    if not frame.has_basis and any(uses_indices(cells) for cells in rows):
        guesses.append(
            "no unit cell is given: indices were read as components along the crystal axes"
        )
    timed = [cells for cells in rows if cells.get("thickness_mm", "").strip()]
    plain = [cells for cells in rows if cells.get("speed_m_s", "").strip()]
    if any(not cells.get("sigma_m_s", "").strip() for cells in plain) or any(
        not cells.get("sigma_us", "").strip() for cells in timed
    ):
        guesses.append("readings without a standard uncertainty were given 0.1 %")
    return tuple(guesses)


# --- writing ----------------------------------------------------------------------------------


def write_speeds(path: Path, table: SpeedTable) -> None:
    """Write a measured-speeds file atomically."""
    write_text(path, speeds_text(table))


def speeds_text(table: SpeedTable) -> str:
    """Return the text of a measured-speeds file, at full precision with decimal points.

    Reading it back gives the same table, but for guesses. Directions keep the words in which
    they were entered; where there are none their components are written.
    """
    rows = [_row_cells(reading) for reading in table.readings]
    used = {column for cells in rows for column, text in cells.items() if text}
    needed = {"direction"} if "thickness_mm" in used else {"direction", *_SPEED}
    columns = [column for column in COLUMNS if column in used | needed]
    stream = io.StringIO()
    stream.writelines(f"# {line}\n" for line in (*table.comments, *_fact_lines(table)))
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(columns)
    writer.writerows([cells.get(column, "") for column in columns] for cells in rows)
    return stream.getvalue()


def _row_cells(reading: Reading) -> dict[str, str]:
    """Return the cells of a reading by column."""
    motion = reading.polarisation
    cells = {
        "direction": reading.text or _components(reading.direction),
        "sheet": "" if reading.sheet is None else str(reading.sheet),
        "polarisation": _components(motion) if isinstance(motion, tuple) else motion or "",
        "kind": "" if reading.kind == "phase" else reading.kind,
    }
    flight = reading.flight
    if flight is None:
        return {
            **cells,
            "speed_m_s": full_precision(reading.speed),
            "sigma_m_s": full_precision(reading.sigma),
        }
    return {
        **cells,
        "thickness_mm": full_precision(flight.thickness_mm),
        "transit_us": full_precision(flight.transit_us),
        "sigma_us": full_precision(flight.sigma_us),
        "path": flight.path,
        "delay_ns": full_precision(flight.delay_ns) if flight.delay_ns else "",
        "sigma_mm": full_precision(flight.sigma_mm) if flight.sigma_mm else "",
    }


def _components(vector: Sequence[float]) -> str:
    return " ".join(full_precision(component) for component in vector)


def _fact_lines(table: SpeedTable) -> list[str]:
    """Return the comment lines that say what is known of the specimen."""
    lines = []
    if table.density is not None:
        sigma = f" ± {table.density_sigma!r}" if table.density_sigma is not None else ""
        lines.append(f"density_kg_m3: {table.density!r}{sigma}")
    if table.class_key is not None:
        lines.append(f"crystal_class: {table.class_key}")
    if table.unique_axis is not None:
        lines.append(f"unique_axis: {table.unique_axis}")
    if table.cell is not None:
        cell = table.cell
        numbers = (cell.a, cell.b, cell.c, cell.alpha, cell.beta, cell.gamma)
        lines.append("cell: " + " ".join(full_precision(number) for number in numbers))
    if table.crystal_axes is not None:
        lines.append(f"crystal_axes: {table.crystal_axes}")
    return lines
