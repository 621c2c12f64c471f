"""The words of the verbs that write figures, sections and reports: arguments and their help.

Nothing is computed or drawn here, so that `--help` comes at once and needs no screen.
"""

from __future__ import annotations

import argparse
import glob
import re
from collections.abc import Sequence
from pathlib import Path

from core.errors import InputError

PICTURES = (".png", ".svg", ".pdf")
REPORTS = (".pdf", ".html")
SURFACE_FILES = (".ply", ".obj", ".csv")

_QUANTITIES = """\
A quantity is one of young, compressibility, shear_least, shear_greatest, poisson_least,
poisson_greatest and, with a density, slowness, phase, wave, power_flow, polarisation, focusing.
"""
_MANY = """\
FILE is a specimen (.json), a bench (.tricline) or a text table of constants, or a pattern such
as "crystals/*.json", in quotes or not. With several files the name to write must hold {name},
which becomes the name of each file: --out "figures/{name}.png".
A file that is there already stays whole until the new one is complete.
"""
_SIZES = """\
A size is millimetres ("85x70mm"; text stays at --text points) or pixels ("3000x3000"; text
grows with the figure). At most 20,000 pixels a side. Journals print 85 mm (one column), 114 mm
or 174 mm (two columns).
"""
SECTION_HELP = f"""\
A polar section: the quantity round a plane of the part. Without --out, or with a name ending in
.csv, as columns of numbers; with .png, .svg or .pdf as a figure (see: tricline figure --help).

{_QUANTITIES}
{_SIZES}
Examples:
  tricline section blank.json --quantity young --plane XY
  tricline section blank.json --quantity slowness --plane 1,1,0 --out slowness.csv
  tricline section two_cuts.tricline --quantity wave --plane XZ --out wave.svg
"""
FIGURE_HELP = f"""\
A figure of any size. The ending of --out decides what is written:
  .png            a picture, --dpi dots an inch
  .svg .pdf       vectors, text as text; a shaded surface is a fine picture inside, or, with
                  --vectors, made of triangles itself
  .ply .obj       the surface as a mesh with the value at every vertex
  .csv            the quantity over a grid of directions, every --step degrees
Every figure has a caption with specimen, source, quantity, unit, axes and orientation, unless
--no-caption is given. No screen is needed.

{_QUANTITIES}
{_SIZES}
{_MANY}
Examples:
  tricline figure blank.json --quantity young --out young.png
  tricline figure blank.json --quantity slowness --b "axis [0 0 1] 15" --out both.pdf
  tricline figure blank.json --kind hemisphere --quantity poisson_least --out nu.svg
  tricline figure "crystals/*.json" --quantity young --out "{{name}}.png" --size 1200x1200
"""
REPORT_HELP = f"""\
The report: verdict, constants, axes and orientations, stability, averages, extremes, figures, A
against B, cutting error, how each number is computed, cautions, provenance. The ending of --out
decides: .pdf for pages, .html for one page for a browser. No screen is needed.

--sections takes some of: specimen verdict constants orientation stability symmetry averages
extremes figures pin comparison part cutting_error methods cautions provenance; the cautions
are in every report
--figure KIND:QUANTITY:WHOSE chooses a figure and may be repeated; KIND is surface, section,
hemisphere, sweep or source; WHOSE is A, B, AB or, for a hemisphere, difference or cost.

{_QUANTITIES}
{_MANY}
Examples:
  tricline report two_cuts.tricline --out report.pdf
  tricline report blank.json --b "axis [0 0 1] 15" --out report.html
  tricline report blank.json --figure surface:slowness:A --figure section:young:A --out r.pdf
"""


def add_section(verb: argparse.ArgumentParser) -> None:
    """Add the arguments of `tricline section`."""
    verb.add_argument("file", metavar="FILE", help="specimen, bench or table of constants")
    verb.add_argument("--csv", action="store_true", help="columns of numbers (the usual)")
    verb.add_argument("--out", metavar="NAME", help="where to write; else to the terminal")
    _add_bench(verb)
    _add_look(verb)


def add_figure(verb: argparse.ArgumentParser) -> None:
    """Add the arguments of `tricline figure`."""
    _add_files(verb)
    verb.add_argument("--kind", default="surface", metavar="KIND",
                      help="surface (the usual), section, hemisphere, sweep or source")
    verb.add_argument("--shown", metavar="WHAT",
                      help="of a hemisphere: A, B, difference, or cost of a cutting error")
    verb.add_argument("--time", type=float, metavar="US",
                      help="of a source picture: µs after the pulse, else the bench's")
    verb.add_argument("--step", type=float, default=5.0, metavar="DEG",
                      help="of a .csv: degrees between directions")
    _add_bench(verb)
    _add_look(verb)


def add_report(verb: argparse.ArgumentParser) -> None:
    """Add the arguments of `tricline report`."""
    _add_files(verb)
    verb.add_argument("--paper", default="A4", metavar="PAPER", help="A4 (the usual) or Letter")
    verb.add_argument("--sections", nargs="+", metavar="NAME", help="only these sections")
    verb.add_argument("--figure", action="append", metavar="K:Q:W", help="a figure; see above")
    verb.add_argument("--no-figures", action="store_true", help="text and tables only")
    _add_bench(verb)
    _add_reproducible(verb)


def _add_files(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("files", nargs="+", metavar="FILE",
                      help="specimens, benches or text tables of constants")
    verb.add_argument("--out", required=True, metavar="NAME", help="where to write; see above")


def add_density(verb: argparse.ArgumentParser) -> None:
    """Add the density that goes before that of the file."""
    verb.add_argument("--density", metavar="RHO",
                      help="kg/m³, else that of the file: 2684, or \"2.684 g/cm3\"")


def _add_bench(verb: argparse.ArgumentParser) -> None:
    """Add what changes the bench before anything is drawn; a bench file has its own."""
    verb.add_argument("--quantity", metavar="NAME", help="see above; young if left out")
    verb.add_argument("--plane", metavar="PLANE",
                      help="section plane of the part: XY, XZ, YZ or its normal, as 1,1,0")
    verb.add_argument("--a", metavar="ORIENTATION", help="of A; see tricline rotate --help")
    verb.add_argument("--b", metavar="ORIENTATION", help="of B, and show both")
    verb.add_argument("--side", metavar="SIDE", help="whose: A, B or AB")
    verb.add_argument("--pin", metavar="DIRECTION",
                      help="the direction read, in A's crystal: see tricline along --help")
    add_density(verb)


def _add_look(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("--size", default="85x85mm", metavar="SIZE",
                      help="85x85mm if left out, 174x95mm for surfaces of A and B; see above")
    verb.add_argument("--dpi", type=float, default=300.0, help="dots an inch, 300 if left out")
    verb.add_argument("--text", type=float, default=8.0, metavar="PT",
                      help="height of text, 4 to 40 points, for sizes in millimetres")
    verb.add_argument("--ground", default="white", help="white, theme or transparent")
    verb.add_argument("--theme", default="light", help="light or night")
    verb.add_argument("--look", metavar="WHERE", help="from X, Y, Z, or AZIMUTH,ELEVATION")
    verb.add_argument("--vectors", action="store_true", help="surfaces as vectors too")
    verb.add_argument("--no-caption", action="store_true", help="leave the caption out")
    _add_reproducible(verb)


def _add_reproducible(verb: argparse.ArgumentParser) -> None:
    verb.add_argument("--reproducible", action="store_true",
                      help="no dates: the same input gives the same bytes, as long as "
                           "program, libraries and fonts are the same")


# --- files ----------------------------------------------------------------------------------


def expand(patterns: Sequence[str]) -> list[Path]:
    """Return the files that names and patterns mean, each once.

    Raises
    ------
    InputError
        For a pattern that no file matches.
    """
    found: dict[Path, None] = {}
    for pattern in patterns:
        if Path(pattern).exists() or not glob.has_magic(pattern):
            found[Path(pattern)] = None
            continue
        whole = Path(pattern)
        inside = str(whole.relative_to(whole.anchor))
        matches = sorted(Path(whole.anchor).glob(inside))
        if not matches:
            raise InputError("No file matches this pattern.", where=pattern)
        found |= dict.fromkeys(matches)
    return list(found)


def outputs(pattern: str, files: Sequence[Path]) -> list[Path]:
    """Return where the result for each file goes.

    Raises
    ------
    InputError
        When several files would be written to one place, or for other words in braces.
    """
    for word in re.findall(r"\{[^{}]*\}", pattern):
        if word != "{name}":
            raise InputError(f"{word} stands for nothing.",
                             "{name} becomes the name of each file.", "--out")
    targets = [Path(pattern.replace("{name}", path.stem)) for path in files]
    if len(set(targets)) < len(targets):
        raise InputError(
            f"{len(files)} files would be written to {len(set(targets))} of one name.",
            "Put {name} into --out: it becomes the name of each file.", "--out")
    return targets
