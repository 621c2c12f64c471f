"""Opening whatever a user hands over: a specimen, a bench, or a text table of constants."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

from core import limits
from core.errors import InputError
from core.files import bench, specimen
from core.files.foreign.readings import AS_LISTED
from core.files.matrices import ForeignTable, read_table
from core.files.speeds import names_speeds
from core.files.text import read_text
from core.state import BenchState, Specimen, as_matrix

_OBJECT = re.compile(r'\s*\{\s*["}]')  # how JSON begins; {{1, 2, …}} is a table in braces
_JSON_SUFFIXES = (".json", bench.SUFFIX)


@dataclass(frozen=True)
class Opened:
    """What a file turned out to be.

    Attributes
    ----------
    specimen : Specimen
        The specimen, or the bench's first one.
    bench : BenchState or None
        The whole bench where the file is one.
    guesses : tuple of str
        What was guessed about a text table, for the user to confirm.
    """

    specimen: Specimen
    bench: BenchState | None = None
    guesses: tuple[str, ...] = ()


def table_text(path: Path) -> str | None:
    """Return the text of a file that is neither a specimen nor a bench, but may be a table.

    Raises
    ------
    InputError
        When it cannot be read at all.
    """
    text = read_text(path)
    return None if _is_json(path, text) else text


def _is_json(path: Path, text: str) -> bool:
    return path.suffix.lower() in _JSON_SUFFIXES or bool(_OBJECT.match(text))


def open_file(path: Path) -> Opened:
    """Return what a file holds.

    Raises
    ------
    InputError
        When it is none of the kinds that Tricline reads, or has a fault.
    """
    text = read_text(path)
    if not _is_json(path, text):
        return _open_table(text, path)
    data = specimen.parse_json(text, path.name)
    if data.get("format") == bench.FORMAT:
        state = bench.bench_from_dict(data, path.name)
        return Opened(state.specimen, state)
    return Opened(specimen.specimen_from_dict(data, path.name))


def _open_table(text: str, path: Path) -> Opened:
    """Return the specimen of a text table, named by the text or else after its file."""
    if names_speeds(text):
        raise InputError("This is a file of measured speeds, not a table of constants.",
                         f"Use: tricline recover {path.name}; in the window, open it on the "
                         "page of measured speeds.", path.name)
    table = read_table(text, path.name)
    key, axis = _claimed_class(table)
    known = Specimen(
        name=table.facts.name or path.stem,
        stiffness=as_matrix(limits.stiffness(table.stiffness, path.name)),
        density=table.facts.density,
        crystal_class=key,
        unique_axis=axis,
        source=f"read from {path.name}",
        stiffness_std=None if table.std is None else as_matrix(table.std),
    )
    return Opened(known, guesses=table.guesses)


def _claimed_class(table: ForeignTable) -> tuple[str, str]:
    """Return class and unique axis: what the text claims, else what a list is one of.

    Triclinic where neither is known: nothing more is claimed than was written.
    """
    if table.facts.class_key is not None:
        return table.facts.class_key, table.facts.unique_axis or "y"
    reading = table.class_reading
    if reading is None or reading.value == AS_LISTED:
        return "triclinic", "y"
    key, *axis = reading.value.split()
    return key, axis[0] if axis else "y"
