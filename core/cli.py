"""The headless verbs: everything the bench computes, for a terminal and for other programs.

Only the words are read here, so that help comes at once; `core.command.verbs` computes.
"""

from __future__ import annotations

import argparse
import difflib
import json
import re
import sys
from collections.abc import Callable, Mapping, Sequence
from typing import Any, NoReturn

from core.command import figure_words, recovery_words, terminal
from core.command.several import Outcome, SomeFailedError
from core.errors import InputError
from core.version import VERSION

UNUSABLE = 2  # exit status for an input that cannot be used
INTERRUPTED = 130  # what shells give for Ctrl+C

_PROGRAM = """\
A bench for anisotropic crystals: check a 6x6 table of elastic constants and see it in every
direction, and compare orientations. Without a verb the window opens, on FILE if one is given.
"""
_FILES = """\
FILE is a specimen file (.json), a bench file (.tricline; the crystal of A is read), or a text
table of constants: a 6x6, a triangle, 21 numbers, or a list such as C11 = 168.4. What is
guessed about a text table is said on stderr. What numbers cannot say, the text of a table may
say for itself, in lines such as
  # unit: kbar          # kind: compliance     # rows: 11 22 33 12 13 23
  # symmetry: mean      # notation: Kelvin     # name: blank 7
  # density_kg_m3: 2684                        # crystal_class: trigonal_6
"""
_DIRECTIONS = """\
A DIRECTION is one word for the shell:
  "[1 1 0]"        along a lattice direction; indices follow the unit cell of the specimen
  "(1 0 2)"        along the normal of a lattice plane
  "[2 -1 -1 0]"    with four indices, for hexagonal and trigonal crystals
  "0.3,0.4,0.87"   three components along the Cartesian crystal axes, of any length
Without a cell only cubic and isotropic crystals understand indices.
"""
_ORIENTATIONS = """\
An ORIENTATION is one word for the shell. It says how the part axes X, Y, Z lie in the crystal:
  "identity"                  part axes along the crystal axes
  "Z=(1 1 0) X=[0 0 1]"       part Z along the first, part X as near as possible to the second
  "bunge 10 20 30"            Euler angles phi1, Phi, phi2 in degrees
  "(YXl) 35.25"               a rotated cut after IEEE Std 176, up to three turns
  "axis [1 1 1] 15"           the crystal axes turned by 15 degrees about [1 1 1]
  "matrix r11 r12 ... r33"    nine numbers by rows: part X, Y, Z in crystal axes
Each may end in "turn x y z": small turns in degrees about the part's own X, then Y, then Z.
"""
_ALL_VERBS = """\
Examples:
  tricline blank.json                                 open the window on a specimen
  tricline summary blank.json                         can this table be trusted?
  tricline along blank.json "[1 0 0]" "(0 1 2)"       read along two directions
  tricline rotate blank.json "(YXl) 35.25" --engineering
  tricline compare blank.json --a identity --b "axis [0 0 1] 15"

Every verb takes --json for one JSON document at full precision, and has its own help:
tricline VERB --help. The verbs need no screen. Exit status: 0, or 2 for an input that cannot
be used, with one sentence on stderr.
"""
_SUMMARY = f"""\
For each specimen: whether the crystal is stable and which strain it resists least, the six
eigenstiffnesses, averages and bounds of an untextured polycrystal, indices of anisotropy, how
far the table is from the claimed class, the Debye speed, and the least and greatest value of
every quantity over all directions with the direction (crystal axes). Of an unstable table all
that is still defined is given. Without a density there are no waves.

{_FILES}
Examples:
  tricline summary blank.json
  tricline summary *.json --json > all.json            a list, one object a file
"""
_ALONG = f"""\
Along each direction: Young's modulus, linear compressibility, the least and greatest shear
modulus and Poisson's ratio over all transverse directions; with a density, for the three
waves from the fastest: speed, polarisation, how longitudinal it is, group velocity, the angle
by which the energy leaves the normal, and how much the crystal focuses it.

{_DIRECTIONS}
{_FILES}
Examples:
  tricline along blank.json "[1 0 0]" "[0 0 1]"
  tricline along blank.json 0.3,0.4,0.87 --json       one object; a list for several directions
"""
_ROTATE = f"""\
The stiffness and the compliance in part axes, in GPa and 1/TPa with engineering shears (--json:
1/GPa), rows in the order 11 22 33 23 13 12 unless --rows says otherwise.

{_ORIENTATIONS}
{_FILES}
Examples:
  tricline rotate blank.json "(YXl) 35.25"
  tricline rotate blank.json "Z=(1 0 1) X=[0 1 0]" --rows "11 22 33 12 13 23" --engineering
"""
_COMPARE = f"""\
Moduli, Poisson's ratios, coupling coefficients and, with densities, wave speeds along the part
axes X, Y, Z for two parts: A, B and B - A. Two files compare two crystals, one file two
orientations of one crystal. Of a bench file its own A and B are taken unless --a or --b is
given.

{_ORIENTATIONS}
{_FILES}
Examples:
  tricline compare blank.json --b "axis [0 0 1] 15"
  tricline compare first.json second.json --a "Z=[1 1 0] X=[0 0 1]" --b "Z=[1 1 0] X=[0 0 1]"
"""


def main(
    argv: Sequence[str] | None = None,
    drawing: Mapping[str, Callable[[argparse.Namespace], Any]] | None = None,
) -> int:
    """Run one headless verb; return the exit status.

    Parameters
    ----------
    argv : sequence of str, optional
    drawing : mapping of verb to callable, optional
        Runs the verbs that draw, as those of `core.command.verbs` do;
        nothing in `core` can.
    """
    words = list(sys.argv[1:] if argv is None else argv)
    try:
        arguments = read_words(words)
        from core.command import (
            verbs,  # numpy and the kernels: only once there is something to compute
        )

        run = {**verbs.RUN, **(drawing or {})}.get(arguments.verb)
        if run is None:
            raise InputError(f"{arguments.verb} draws, and there is nothing to draw with here.",
                             f"Run: tricline {arguments.verb}.")
        _write(run(arguments), arguments.json)
        return 0
    except SomeFailedError as some:
        if some.outcome is not None:
            _write(some.outcome, arguments.json)
        for error in some.errors:
            terminal.say(str(error))
        terminal.say(f"{len(some.errors)} of {some.count} files cannot be used.")
        return UNUSABLE
    except InputError as error:
        terminal.say(str(error))
        return UNUSABLE
    except KeyboardInterrupt:
        return INTERRUPTED
    except SystemExit as done:  # argparse has printed help or the version
        return int(done.code or 0)


# --- reading the words ----------------------------------------------------------------------


def read_words(words: Sequence[str]) -> argparse.Namespace:
    """Return the arguments that the words of a command line make.

    Raises
    ------
    InputError
        When they are not a verb with its arguments.
    """
    if words and not words[0].startswith("-") and words[0] not in VERBS:
        near = nearest_verb(words[0])
        hint = f"Did you mean {near}?" if near else f"There are {', '.join(VERBS)}."
        raise InputError(f"“{words[0]}” is not a verb.", hint)
    if words and words[0].startswith("-") and words[0] not in ("-h", "--help", "--version"):
        raise InputError(f"“{words[0]}” is no option.", "See tricline --help.")
    # A word such as -1,0,0 is a direction; a blank before it keeps argparse from taking it for
    # an option.
    guarded = [f" {word}" if re.match(r"-[\d.]", word) else word for word in words]
    return _build_parser().parse_args(guarded)


def nearest_verb(word: str) -> str:
    """Return the verb that a mistyped one may have meant; empty when there is none."""
    return next(iter(difflib.get_close_matches(word, VERBS, n=1, cutoff=0.7)), "")


class _Parser(argparse.ArgumentParser):
    """A parser whose complaints are one sentence, like all others of the program."""

    def error(self, message: str) -> NoReturn:
        """Raise `InputError` in place of printing the usage."""
        hint = f"See {self.prog} --help."
        _, is_surplus, rest = message.partition("unrecognized arguments: ")
        if is_surplus:
            word = rest.split()[0]
            fault = "is no option" if word.startswith("-") else "is one argument too many"
            raise InputError(f"“{word}” {fault}.", hint)
        raise InputError(f"{message[:1].upper()}{message[1:]}.", hint)


def _build_parser() -> argparse.ArgumentParser:
    """Return the parser of the headless verbs, with help that a person can learn from."""
    parser = _Parser(
        prog="tricline",
        usage="tricline [FILE ...]\n       tricline VERB ...",
        description=_PROGRAM,
        epilog=_ALL_VERBS,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument(
        "--version",
        action="version",
        version=f"tricline {VERSION}",
        help="print the version and exit",
    )
    verbs = parser.add_subparsers(
        dest="verb", required=True, metavar="VERB", title="verbs", prog="tricline"
    )
    for name, (one_line, text, add_arguments) in _VERBS.items():
        verb = verbs.add_parser(
            name,
            help=one_line,
            description=text,
            formatter_class=argparse.RawDescriptionHelpFormatter,
            allow_abbrev=False,
        )
        add_arguments(verb)
        verb.add_argument("--json", action="store_true", help="print one JSON document")
    return parser


def _add_files(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("files", nargs="+", metavar="FILE", help="specimens; or a pattern")
    figure_words.add_density(verb)


def _add_along(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("file", metavar="FILE", help="the specimen")
    verb.add_argument("directions", nargs="+", metavar="DIRECTION", help="as above")
    figure_words.add_density(verb)


def _add_rotate(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("file", metavar="FILE", help="the specimen")
    verb.add_argument("orientation", metavar="ORIENTATION", help="as above")
    verb.add_argument(
        "--rows",
        default="11 22 33 23 13 12",
        metavar="ORDER",
        help='order of the six rows, for example "11 22 33 12 13 23"',
    )
    verb.add_argument(
        "--engineering",
        action="store_true",
        help="add E, Poisson's ratios, G and coupling coefficients along X, Y, Z",
    )


def _add_compare(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("file", metavar="FILE", help="the crystal of A, and of B without another")
    verb.add_argument("other", nargs="?", metavar="FILE", help="the crystal of B")
    verb.add_argument("--a", metavar="ORIENTATION", help="of A; identity if left out")
    verb.add_argument("--b", metavar="ORIENTATION", help="of B; identity if left out")


_VERBS: dict[str, tuple[str, str, Callable[[argparse.ArgumentParser], None]]] = {
    "summary": (
        "verdict, averages, anisotropy, symmetry and extremes of specimens",
        _SUMMARY,
        _add_files,
    ),
    "along": ("every quantity along directions", _ALONG, _add_along),
    "rotate": ("the 6x6 in part axes, and engineering constants", _ROTATE, _add_rotate),
    "compare": ("two orientations, or two crystals, side by side", _COMPARE, _add_compare),
    "recover": (
        "constants from measured wave speeds",
        recovery_words.RECOVER_HELP,
        recovery_words.add_recover,
    ),
    "section": (
        "a polar section, as numbers or as a figure",
        figure_words.SECTION_HELP,
        figure_words.add_section,
    ),
    "figure": (
        "a figure of any size: PNG, SVG, PDF; or the surface as a mesh",
        figure_words.FIGURE_HELP,
        figure_words.add_figure,
    ),
    "report": (
        "the whole report as PDF or HTML",
        figure_words.REPORT_HELP,
        figure_words.add_report,
    ),
}
"""Verb, its line in the list of verbs, its own help, and what adds its arguments."""

VERBS = tuple(_VERBS)


# --- writing the results --------------------------------------------------------------------


def _write(outcome: Outcome, as_json: bool) -> None:
    """Print results as JSON or as a page."""
    results, page = outcome
    if as_json:
        terminal.write(_json(results), is_page=False)
    else:
        terminal.write(page(results))


def _json(results: Any) -> str:
    """Return one JSON document, in ASCII where the terminal does not take UTF-8."""
    plain = not terminal.takes_unicode()
    return json.dumps(results, indent=2, ensure_ascii=plain, allow_nan=False) + "\n"


if __name__ == "__main__":
    sys.exit(main())
