"""The headless verbs: everything the bench computes, for a terminal and for other programs."""

from __future__ import annotations

import argparse
import json
import sys
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

from core import pages
from core.errors import InputError
from core.files.opening import open_file
from core.state import OrientationChoice, Specimen
from core.summary import along, compare, rotate, summarise
from core.tensor.notation import parse_rows

DIRECTIONS_HELP = """\
A direction is written as on paper:
  "[1 1 0]"        along a lattice direction (indices follow the cell of the specimen)
  "(1 0 2)"        along the normal of a lattice plane
  "[2 -1 -1 0]"    with four indices, for hexagonal and trigonal crystals
  "0.3,0.4,0.87"   three components in the Cartesian crystal axes
"""
ORIENTATIONS_HELP = """\
An orientation is one string:
  "identity"                  part axes along the crystal axes
  "Z=(1 1 0) X=[0 0 1]"       part Z along the first, part X as near as possible to the second
  "bunge 10 20 30"            Euler angles phi1, Phi, phi2 in degrees
  "(YXl) 35.25"               a rotated cut after IEEE Std 176, up to three turns
  "axis [1 1 1] 15"           the crystal axes turned by 15 degrees about [1 1 1]
  "matrix r11 r12 ... r33"    rows: part X, Y, Z in crystal axes
each may be followed by "turn x y z": small turns about the part's own X, Y, Z.
"""


def main(argv: Sequence[str] | None = None) -> int:
    """Run one headless verb; return the exit status (0, or 2 for an input that cannot be used)."""
    arguments = build_parser().parse_args(argv)
    try:
        results, page = arguments.run(arguments)
    except InputError as error:
        print(f"tricline: {error}", file=sys.stderr)
        return 2
    if arguments.json:
        print(json.dumps(results, indent=2, ensure_ascii=False))
    else:
        print(page(results), end="")
    return 0


def build_parser() -> argparse.ArgumentParser:
    """Return the parser of the headless verbs, with help that a person can learn from."""
    parser = argparse.ArgumentParser(
        prog="tricline",
        description="Without a verb, tricline [FILE …] opens the window.",
        epilog="FILE is a specimen file, a bench file or a text table of constants.")
    verbs = parser.add_subparsers(dest="verb", required=True, metavar="VERB")
    for name, help_text, epilog, run, add in _VERBS:
        verb = verbs.add_parser(
            name, help=help_text, description=help_text, epilog=epilog,
            formatter_class=argparse.RawDescriptionHelpFormatter)
        add(verb)
        verb.add_argument("--json", action="store_true", help="print one JSON document")
        verb.set_defaults(run=run)
    return parser


def load(path: str) -> Specimen:
    """Return the specimen of a file; what was guessed about a table is said on stderr."""
    opened = open_file(Path(path))
    for guess in opened.guesses:
        print(f"tricline: {path}: {guess}", file=sys.stderr)
    return opened.specimen


Outcome = tuple[Any, Callable[[Any], str]]


def _summary(arguments: argparse.Namespace) -> Outcome:
    found = [summarise(load(path)) for path in arguments.files]
    return (found if len(found) > 1 else found[0]), pages.summaries


def _along(arguments: argparse.Namespace) -> Outcome:
    specimen = load(arguments.file)
    found = [along(specimen, text) for text in arguments.directions]
    page = pages.along_page(specimen.name, arguments.directions)
    return (found if len(found) > 1 else found[0]), page


def _rotate(arguments: argparse.Namespace) -> Outcome:
    specimen = load(arguments.file)
    choice = OrientationChoice(arguments.orientation)
    found = rotate(specimen, choice, parse_rows(arguments.rows), arguments.engineering)
    return found, pages.rotation_page(specimen.name, arguments.orientation)


def _compare(arguments: argparse.Namespace) -> Outcome:
    first = load(arguments.files[0])
    second = load(arguments.files[1]) if len(arguments.files) > 1 else first
    found = compare(first, OrientationChoice(arguments.a), second, OrientationChoice(arguments.b))
    return found, pages.comparison


def _add_files(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("files", nargs="+", metavar="FILE")


def _add_along(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("file", metavar="FILE")
    verb.add_argument("directions", nargs="+", metavar="DIRECTION")


def _add_rotate(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("file", metavar="FILE")
    verb.add_argument("orientation", metavar="ORIENTATION")
    verb.add_argument("--rows", default="11 22 33 23 13 12", metavar="ORDER",
                      help='order of the six rows, for example "11 22 33 12 13 23"')
    verb.add_argument("--engineering", action="store_true",
                      help="add E, Poisson's ratios, G and coupling coefficients")


def _add_compare(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("files", nargs="+", metavar="FILE", action=_OneOrTwo)
    verb.add_argument("--a", default="identity", metavar="ORIENTATION")
    verb.add_argument("--b", default="identity", metavar="ORIENTATION")


class _OneOrTwo(argparse.Action):
    """Takes one file, or two where B is another crystal."""

    def __call__(self, parser: argparse.ArgumentParser, namespace: argparse.Namespace,
                 values: Any, option_string: str | None = None) -> None:
        if len(values) > 2:
            parser.error(f"one or two files can be compared, not {len(values)}")
        setattr(namespace, self.dest, values)


_VERBS = (
    ("summary", "verdict, averages, anisotropy, symmetry and extremes of specimens", "",
     _summary, _add_files),
    ("along", "every quantity along directions", DIRECTIONS_HELP, _along, _add_along),
    ("rotate", "the 6x6 in part axes", ORIENTATIONS_HELP, _rotate, _add_rotate),
    ("compare", "two orientations, or two crystals, along the part axes", ORIENTATIONS_HELP,
     _compare, _add_compare),
)
VERBS = tuple(name for name, *_ in _VERBS)
