"""The content of a report: every section as plain data, from a bench alone.

Numbers are those of `core.summary`, so that a report and `tricline summary --json` never
differ; the text has them as the window shows them.
"""

from __future__ import annotations

import hashlib
import platform
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
import scipy

from core.directional.quantities import QUANTITIES, quantity
from core.errors import InputError
from core.files.bench import bench_to_dict
from core.files.origin import PROGRAM
from core.files.specimen import json_text
from core.report import tables
from core.report.blocks import Block, Figure, Paragraph, Report, Section, SignOff, Table
from core.report.captions import FigureChoice, caption, state_for
from core.report.cautions import CAUTIONS
from core.report.methods import methods_of
from core.state import BenchState, Specimen, claimed_class
from core.study.verdict import NOTABLE_DISTANCE, Verdict
from core.summary import compare, summarise
from core.task import Ticker
from core.tensor.symmetry import distance

SECTIONS: dict[str, str] = {
    "specimen": "Specimen",
    "verdict": "Verdict",
    "constants": "Constants",
    "orientation": "Axes and orientations",
    "stability": "Stability criteria",
    "symmetry": "Symmetry",
    "averages": "Averages and anisotropy",
    "extremes": "Extremes over all directions",
    "figures": "Figures",
    "pin": "At the pin",
    "comparison": "A against B along the part axes",
    "part": "Constants in part axes",
    "cutting_error": "Cutting error",
    "methods": "How each number is computed",
    "cautions": "Cautions",
    "provenance": "Provenance",
}
"""Keys and titles of the sections, in their order."""
ALWAYS = ("cautions",)
"""Sections that no report goes without."""
_MARK_ROLES = {"stable": "good", "doubtful": "doubt", "unstable": "alert"}


@dataclass(frozen=True)
class FileNote:
    """Which file a report was made from."""

    name: str
    sha256: str
    is_current: bool = True  # whether the bench is as the file has it


@dataclass(frozen=True)
class ReportPlan:
    """What goes into a report.

    Attributes
    ----------
    sections : tuple of str
        Keys of `SECTIONS`; the order is always that of `SECTIONS`. Those of `ALWAYS` are
        there whether named or not.
    figures : tuple of FigureChoice
    file : FileNote or None
        None while the bench has not been saved.
    made : str
        Date, or empty for a report that is the same whenever it is made.
    again : str
        The command that makes the same report, or empty.
    drawn_with : str
        What drew the pictures, or empty.
    """

    sections: tuple[str, ...] = tuple(SECTIONS)
    figures: tuple[FigureChoice, ...] = ()
    file: FileNote | None = None
    made: str = ""
    again: str = ""
    drawn_with: str = ""


@dataclass(eq=False)
class Draft:
    """A report in the making: the bench, the plan, and what was computed once for several."""

    state: BenchState
    plan: ReportPlan
    ticker: Ticker
    summaries: dict[int, dict[str, Any]] = field(default_factory=dict)

    @property
    def sides(self) -> str:
        """The sides worth reporting: "AB" where B differs from A, else "A"."""
        return compared_sides(self.state)

    @property
    def crystals(self) -> list[tuple[str, Specimen]]:
        """The different crystals with what to call them in titles."""
        state = self.state
        if state.other is None or self.sides == "A":
            return [("", state.specimen)]
        return [("A: ", state.specimen), ("B: ", state.other)]

    def summary(self, specimen: Specimen) -> dict[str, Any]:
        """Return the summary of a crystal, computed once."""
        key = id(specimen)
        if key not in self.summaries:
            self.summaries[key] = summarise(specimen, self.ticker)
        return self.summaries[key]

    def each(self, blocks: Callable[[Specimen, str], Iterable[Block]]) -> tuple[Block, ...]:
        """Return the blocks of every crystal, one after the other."""
        return tuple(block for lead, specimen in self.crystals
                     for block in blocks(specimen, lead))


def file_note(path: Path, is_current: bool = True) -> FileNote:
    """Return the name and the SHA-256 of a file.

    Raises
    ------
    InputError
        When it cannot be read.
    """
    try:
        return FileNote(path.name, hashlib.sha256(path.read_bytes()).hexdigest(), is_current)
    except OSError as error:
        raise InputError(f"The file cannot be read ({error.strerror}).",
                         where=str(path)) from None


def compared_sides(state: BenchState) -> str:
    """Return "AB" where B is another crystal or another orientation, else "A"."""
    same = state.other is None and state.orientation_b == state.orientation_a
    return "A" if same else "AB"


def default_figures(state: BenchState) -> tuple[FigureChoice, ...]:
    """Return the figures that a report has unless others are chosen: eight at the most."""
    sides = compared_sides(state)
    crystals = [state.specimen_of(side) for side in sides]
    waves = all(specimen.density is not None for specimen in crystals)
    shown = state.quantity if waves or not quantity(state.quantity).wave else "young"
    figures = [
        FigureChoice("surface", shown, sides), FigureChoice("section", shown, sides),
        FigureChoice("hemisphere", shown, sides, "A"),
        FigureChoice("hemisphere", shown, sides, "difference" if sides == "AB" else "cost"),
    ]
    if waves:
        figures.append(FigureChoice("source", "wave", sides))
    figures.append(FigureChoice("sweep", shown, sides))
    if waves:
        other = "young" if quantity(shown).wave else "slowness"
        figures += [FigureChoice(kind, other, sides) for kind in ("surface", "section")]
    return tuple(figures)


def report_content(state: BenchState, plan: ReportPlan, ticker: Ticker | None = None) -> Report:
    """Return the whole content of a report.

    Parameters
    ----------
    state : BenchState
    plan : ReportPlan
    ticker : Ticker, optional
        Hears of progress after every section.

    Raises
    ------
    InputError
        For an unknown section, or a figure that cannot be drawn.
    core.task.Cancelled
        When the ticker says so.
    """
    for key in plan.sections:
        if key not in SECTIONS:
            raise InputError(f"'{key}' is no section of a report.",
                             f"There are {', '.join(SECTIONS)}.", "sections")
    told = ticker or Ticker()
    draft = Draft(state, plan, told)
    chosen = [key for key in SECTIONS if key in plan.sections or key in ALWAYS]
    sections = []
    for number, key in enumerate(chosen):
        told.tick(number / len(chosen))
        blocks = _BUILDERS[key](draft)
        if blocks:
            sections.append(Section(key, SECTIONS[key], blocks))
    names = " and ".join(dict.fromkeys(state.specimen_of(side).name for side in draft.sides))
    subtitle = "Elastic constants, directions and orientation of a crystal part"
    return Report(names, subtitle, plan.made, f"{names} · {PROGRAM}", tuple(sections))


# --- one builder a section ------------------------------------------------------------------


def _specimen(draft: Draft) -> tuple[Block, ...]:
    return (*draft.each(tables.title_block), SignOff(("Prepared", "Checked", "Approved")))


def _verdict(draft: Draft) -> tuple[Block, ...]:
    def blocks(specimen: Specimen, lead: str) -> list[Block]:
        verdict = tables.verdict_of(specimen)
        return [
            Paragraph(f"{lead}{verdict.sentence}", _MARK_ROLES[verdict.mark]),  # type: ignore[arg-type]
            *tables.oddities(specimen, lead),
            tables.spectrum(specimen, lead),
        ]
    return draft.each(blocks)


def _constants(draft: Draft) -> tuple[Block, ...]:
    return draft.each(tables.constants)


def _orientation(draft: Draft) -> tuple[Block, ...]:
    state, sides = draft.state, draft.sides
    return (*draft.each(tables.axes_statements),
            *(block for side in sides for block in tables.orientation(state, side)),
            *(tables.turned_apart(state) if sides == "AB" else ()))


def _stability(draft: Draft) -> tuple[Block, ...]:
    return draft.each(tables.stability)


def _symmetry(draft: Draft) -> tuple[Block, ...]:
    return draft.each(lambda specimen, lead: tables.symmetry(
        specimen, draft.summary(specimen)["symmetry"], lead))


def _averages(draft: Draft) -> tuple[Block, ...]:
    return draft.each(lambda specimen, lead: tables.averages(draft.summary(specimen), lead))


def _extremes(draft: Draft) -> tuple[Block, ...]:
    return draft.each(lambda specimen, lead: tables.extremes(
        specimen, draft.summary(specimen)["extremes"], lead))


def _figures(draft: Draft) -> tuple[Block, ...]:
    for choice in draft.plan.figures:
        state_for(draft.state, choice)  # refuses what cannot be drawn before anything is
    return tuple(Figure(choice, caption(draft.state, choice), number)
                 for number, choice in enumerate(draft.plan.figures, start=1))


def _pin(draft: Draft) -> tuple[Block, ...]:
    return tables.pin(draft.state, draft.sides)


def _comparison(draft: Draft) -> tuple[Block, ...]:
    if draft.sides == "A":
        return ()
    state = draft.state
    return tables.comparison(compare(
        state.specimen_of("A"), state.orientation_a, state.specimen_of("B"),
        state.orientation_b))


def _part(draft: Draft) -> tuple[Block, ...]:
    return tuple(block for side in draft.sides for block in tables.part(draft.state, side))


def _cutting_error(draft: Draft) -> tuple[Block, ...]:
    return tables.cutting_error(draft.state, draft.sides)


def _methods(draft: Draft) -> tuple[Block, ...]:
    has_waves = any(specimen.density is not None for _, specimen in draft.crystals)
    used = ["wave" if choice.kind == "source" else choice.quantity
            for choice in draft.plan.figures if "figures" in draft.plan.sections]
    shown = [key for key in QUANTITIES if key in used]
    rows = methods_of(draft.plan.sections, shown, has_waves)
    conventions = (
        "Voigt order 11, 22, 33, 23, 13, 12; engineering shears (γ = 2ε) in the compliance. "
        "Stiffness in GPa, compliance in 1/TPa, speeds in km/s, angles in degrees. Sums run "
        "over repeated indices. Double precision throughout.")
    return (Paragraph(conventions),
            Table(("number", "computed as", "source"), tuple(rows), words=3))


def _cautions(draft: Draft) -> tuple[Block, ...]:
    own = [text for _, specimen in draft.crystals
           for text in cautions_of(specimen, tables.verdict_of(specimen),
                                   _look_wrong(draft, specimen))]
    return tuple(Paragraph(text, "bullet") for text in (*CAUTIONS, *dict.fromkeys(own)))


def _departs(specimen: Specimen) -> bool:
    """Tell whether a table has not the form of the class it claims."""
    off = distance(np.array(specimen.stiffness), claimed_class(specimen))
    return off > NOTABLE_DISTANCE


def _look_wrong(draft: Draft, specimen: Specimen) -> bool:
    """Tell whether the axes of a table look wrong; only one that departs is looked at."""
    if not _departs(specimen):
        return False
    return tables.hidden_of(specimen, draft.summary(specimen)["symmetry"]) is not None


def cautions_of(specimen: Specimen, verdict: Verdict, axes_look_wrong: bool) -> list[str]:
    """Return what has to be said of one crystal besides the cautions that hold for all."""
    name, found = specimen.name, []
    if verdict.mark == "unstable":
        found.append(f"{name}: the table is unstable, no crystal has it. Find the fault before "
                     "anything here is used.")
    if verdict.mark == "doubtful":
        found.append(f"{name}: stable only within its margins. A small error in the constants "
                     "would turn the verdict.")
    if axes_look_wrong:
        found.append(f"{name}: the axes look wrong. In others the table has more symmetry: see "
                     "“Symmetry”.")
    elif _departs(specimen):
        found.append(f"{name}: the table departs from the class it claims, in the axes given.")
    if specimen.stiffness_std is None and specimen.covariance is None:
        found.append(f"{name}: no uncertainties are given; four digits are not four known "
                     "digits.")
    if not specimen.source:
        found.append(f"{name}: the source of the constants is not stated.")
    return found


def _provenance(draft: Draft) -> tuple[Block, ...]:
    plan = draft.plan
    file = plan.file
    rows = [("file", "not saved" if file is None else file.name)]
    if file is not None:
        rows.append(("SHA-256 of the file", file.sha256))
        if not file.is_current:
            rows.append(("since then", "changed on the bench; the report shows it as changed"))
    rows += [("SHA-256 of the bench", bench_digest(draft.state)), ("program", PROGRAM),
             ("computed with", f"Python {platform.python_version()}, numpy {np.__version__}, "
                               f"scipy {scipy.__version__}")]
    if plan.drawn_with:
        rows.append(("drawn with", plan.drawn_with))
    if plan.made:
        rows.append(("made on", plan.made))
    if plan.again:
        rows.append(("the same again", plan.again))
    return (Table((), tuple(rows), words=2),)


def bench_digest(state: BenchState) -> str:
    """Return the SHA-256 of a bench as its file would hold it: the same for the same bench."""
    return hashlib.sha256(json_text(bench_to_dict(state)).encode()).hexdigest()


_BUILDERS: dict[str, Callable[[Draft], tuple[Block, ...]]] = {
    "specimen": _specimen, "verdict": _verdict, "constants": _constants,
    "orientation": _orientation, "stability": _stability, "symmetry": _symmetry,
    "averages": _averages, "extremes": _extremes, "figures": _figures, "pin": _pin,
    "comparison": _comparison, "part": _part, "cutting_error": _cutting_error,
    "methods": _methods, "cautions": _cautions, "provenance": _provenance,
}
