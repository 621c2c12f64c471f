"""What each headless verb computes: arguments in, plain results and their page out."""

from __future__ import annotations

import sys
from argparse import Namespace
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

from core import pages
from core.files.opening import open_file
from core.state import BenchState, OrientationChoice, Specimen
from core.summary import along, compare, rotate, summarise
from core.tensor.notation import parse_rows

Outcome = tuple[Any, Callable[[Any], str]]
"""Results made of dicts, lists and numbers, and what writes them as a page."""


def open_bench(path: str) -> BenchState:
    """Return what a file holds as a bench; guesses about a text table are said on stderr."""
    opened = open_file(Path(path))
    for guess in opened.guesses:
        sys.stderr.write(f"tricline: {path}: {guess.rstrip('.')}.\n")
    return opened.bench or BenchState(opened.specimen)


def load(path: str) -> Specimen:
    """Return the specimen of a file, of a bench file the crystal of A."""
    return open_bench(path).specimen


def _one_or_all(results: list[dict[str, Any]]) -> Any:
    """Return one object where one was asked for, else the list."""
    return results if len(results) > 1 else results[0]


def _summary(arguments: Namespace) -> Outcome:
    found = [summarise(load(path)) for path in arguments.files]
    return _one_or_all(found), pages.summaries


def _along(arguments: Namespace) -> Outcome:
    specimen = load(arguments.file)
    texts = [text.strip() for text in arguments.directions]
    found = [along(specimen, text) for text in texts]
    return _one_or_all(found), pages.along_page(specimen.name, texts)


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


RUN: dict[str, Callable[[Namespace], Outcome]] = {
    "summary": _summary,
    "along": _along,
    "rotate": _rotate,
    "compare": _compare,
}
