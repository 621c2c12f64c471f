"""What each headless verb computes: arguments in, plain results and their page out."""

from __future__ import annotations

from argparse import Namespace
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np

from core.command import pages
from core.command.figure_words import expand
from core.command.several import Outcome, for_each, told
from core.command.terminal import say
from core.crystal.directions import parse_direction
from core.directional.quantities import quantity
from core.errors import InputError
from core.files.foreign.facts import read_density
from core.files.opening import open_file
from core.files.origin import Origin, today
from core.files.text import write_text
from core.report.captions import SIDES, one_of, parse_plane
from core.state import BenchState, OrientationChoice, Specimen, as_vector, rotation_of
from core.summary import along, compare, rotate, summarise
from core.tensor.notation import parse_rows

__all__ = ["RUN", "Outcome", "bench_as_asked", "load", "open_bench"]


def open_bench(path: str, density: str | None = None) -> BenchState:
    """Return what a file holds as a bench; guesses about a text table are said on stderr.

    Parameters
    ----------
    path : str
    density : str, optional
        Goes before that of the file, for both crystals of a bench.
    """
    known = None if density is None else read_density(density, "--density")[0]
    opened = open_file(Path(path))
    for guess in opened.guesses:
        say(f"{path}: {guess.rstrip('.')}.")
    state = opened.bench or BenchState(opened.specimen)
    if known is None:
        return state
    other = None if state.other is None else replace(state.other, density=known)
    return replace(state, specimen=replace(state.specimen, density=known), other=other)


def load(path: str, density: str | None = None) -> Specimen:
    """Return the specimen of a file, of a bench file the crystal of A."""
    return open_bench(path, density).specimen


def _summary(arguments: Namespace) -> Outcome:
    files = expand(arguments.files)
    found, errors = for_each(
        files, lambda path: summarise(load(str(path), arguments.density))
    )
    return told(found, errors, pages.summaries)


def _along(arguments: Namespace) -> Outcome:
    specimen = load(arguments.file, arguments.density)
    texts = [text.strip() for text in arguments.directions]
    found = [along(specimen, text) for text in texts]
    return told(found, (), pages.along_page(specimen.name, texts))


def _rotate(arguments: Namespace) -> Outcome:
    specimen = load(arguments.file)
    choice = OrientationChoice(arguments.orientation)
    found = rotate(specimen, choice, parse_rows(arguments.rows), arguments.engineering)
    return found, pages.rotation_page(specimen.name, arguments.orientation)


def _compare(arguments: Namespace) -> Outcome:
    bench = open_bench(arguments.file)
    if arguments.other is not None:
        bench = replace(bench, other=load(arguments.other), orientation_b=OrientationChoice())
    if arguments.a is not None:
        bench = replace(bench, orientation_a=OrientationChoice(arguments.a))
    if arguments.b is not None:
        bench = replace(bench, orientation_b=OrientationChoice(arguments.b))
    found = compare(
        bench.specimen_of("A"), bench.orientation_a, bench.specimen_of("B"), bench.orientation_b
    )
    return found, pages.comparison


def bench_as_asked(arguments: Namespace, path: str) -> BenchState:
    """Return the bench of a file, changed by the words of a verb that draws."""
    state = open_bench(path, arguments.density)
    if arguments.a is not None:
        state = replace(state, orientation_a=OrientationChoice(arguments.a))
    if arguments.b is not None:
        state = replace(state, orientation_b=OrientationChoice(arguments.b))
    display = state.display if arguments.b is None else replace(state.display, layout="AB")
    if arguments.side is not None:
        display = replace(display, layout=one_of(arguments.side.upper(), SIDES, "side"))
    changes: dict[str, Any] = {"display": display}
    if arguments.quantity is not None:
        changes["quantity"] = quantity(arguments.quantity).key
    if arguments.plane is not None:
        changes["section"] = parse_plane(arguments.plane)
    if arguments.pin is not None:
        found = parse_direction(arguments.pin, state.specimen.frame)
        turn = rotation_of(state.orientation_a, state.specimen)
        changes["pin"] = as_vector(turn @ np.array(found.vector))
    state = replace(state, **changes)
    for side in state.display.layout:  # an orientation that cannot be read is refused here
        rotation_of(state.orientation_of(side), state.specimen_of(side))
    return state


def _section(arguments: Namespace) -> Outcome:
    from core.files import tables

    state = bench_as_asked(arguments, arguments.file)
    made = today(arguments.reproducible)
    sides = state.display.layout
    origins = [Origin(state.specimen_of(side), state.orientation_of(side), made,
                      side if len(sides) > 1 else "") for side in sides]
    found = tables.section_data(origins, state.quantity, state.section)
    text = tables.section_csv(origins, state.quantity, state.section)
    if arguments.out is None:
        return found, lambda _: text
    target = Path(arguments.out)
    if target.suffix.lower() != ".csv":
        raise InputError(f"“{target.name}” names no form of a section.",
                         "A name ending in .csv, .png, .svg or .pdf is wanted.", "--out")
    write_text(target, text)
    return found, lambda _: f"wrote {target}\n"


def _recover(arguments: Namespace) -> Outcome:
    from core.command import recovery_summary
    from core.editing import readings as measured
    from core.study.recovery.fit import FitOptions

    density, sigma = measured.read_density(arguments.density or "")
    options = FitOptions(
        density_sigma=sigma,
        direction_sigma_deg=measured.read_direction_sigma(arguments.direction_sigma),
        robust=arguments.robust,
    )
    path = Path(arguments.speeds)
    found = recovery_summary.run_recover(path, density, arguments.class_name, options)
    if not arguments.json:
        return found, recovery_summary.recovery_page
    for note in found["notes"]:
        say(f"{path}: {note}")
    return {key: found[key] for key in _RECOVERED}, recovery_summary.recovery_page


_RECOVERED = (
    "constants_gpa", "std_gpa", "rank", "singular_values", "undetermined", "chi2", "dof",
    "outliers", "next_directions",
)  # fmt: skip
"""What `recover --json` prints; its notes go to stderr."""


RUN: dict[str, Callable[[Namespace], Outcome]] = {
    "summary": _summary,
    "along": _along,
    "rotate": _rotate,
    "compare": _compare,
    "recover": _recover,
    "section": _section,
}
