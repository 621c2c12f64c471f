"""Opening whatever a user hands over: a specimen, a bench, or a text table of constants."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from core.errors import InputError
from core.files import bench, specimen
from core.files.matrices import read_table
from core.files.text import read_text
from core.state import BenchState, Specimen, as_matrix


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


def open_file(path: Path) -> Opened:
    """Return what a file holds.

    Raises
    ------
    InputError
        When it is none of the kinds that Tricline reads, or has a fault.
    """
    text = read_text(path)
    if not text.lstrip().startswith("{"):
        if path.suffix.lower() in (".json", bench.SUFFIX):
            raise InputError("A JSON object {…} was expected.", where=path.name)
        table = read_table(text, path.name)
        known = Specimen(name=path.stem, stiffness=as_matrix(table.stiffness),
                         source=f"read from {path.name}")
        return Opened(known, guesses=table.guesses)
    data = specimen.parse_json(text, path.name)
    if data.get("format") == bench.FORMAT:
        state = bench.bench_from_dict(data, path.name)
        return Opened(state.specimen, state)
    return Opened(specimen.specimen_from_dict(data, path.name))
