"""View data of the verdict band and the ledger."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from core import live
from core.arrays import FloatArray
from core.crystal.cell import (
    AXES_CONVENTIONS,
    CrystalFrame,
    axes_note,
    axes_text,
    axes_words,
    cell_mismatch,
)
from core.crystal.orientation import (
    WAYS,
    misorientation,
    missed_direction,
    orientation_texts,
    parse_orientation,
    turned,
)
from core.editing.specimen import FITS
from core.errors import InputError
from core.numbers import MINUS, full_precision, significant, with_deviation
from core.state import BenchState, OrientationChoice, Specimen, claimed_class, stiffness_of
from core.study.trust.findings import Findings
from core.study.trust.plausibility import DENSITY
from core.study.trust.symmetry_verdict import claim_sentence
from core.study.uncertainty.changes import deviations_of
from core.study.uncertainty.deviations import eigenstiffness_deviation
from core.study.verdict import Verdict, judge
from core.tensor.notation import constant_name
from core.tensor.stability import assess
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import (
    CLASS_KEYS,
    CrystalClass,
    complete,
    crystal_class,
    dependence_text,
    distance,
    laue_rotations,
)
from gui.presenting.near import axis_words
from gui.presenting.sigmas import number_text, plain_or_bracketed
from gui.presenting.spread import crystal_factor
from gui.viewdata import (
    CellFormView,
    CellView,
    ConstantsView,
    OrientationView,
    SpecimenView,
    SpectrumBar,
    SpectrumView,
    VerdictView,
)

UNITS = {"stiffness": "GPa", "compliance": "1/TPa", "uncertainty": "GPa"}
NAMES = {"stiffness": "Stiffness", "compliance": "Compliance", "uncertainty": "Uncertainty"}
COVARIANCE_NOTE = (
    "How the 21 errors are correlated is known too (a full covariance), and every ± goes by "
    "it. Editing an uncertainty lets the correlations go."
)
LEAST_CHANCE = 0.95  # of being stable: with less a crystal is doubtful
DOUBTED = "Stable, but not beyond the uncertainties"
_ABOUT_CLASS = ("as entered", "in these axes", "claimed ", "nearest higher class")
_DIGITS = 4
_PLAIN = (1e-3, 1e6)  # sizes of the largest number that are written without powers of ten
_OFF_PATTERN = 1e-6  # of the largest constant: a cell this far from its class says so


def ledger_specimen(state: BenchState) -> Specimen:
    """Return the crystal that the ledger shows."""
    return state.specimen_of(state.display.ledger)


@lru_cache(maxsize=8)
def verdict_of(specimen: Specimen, symmetry: str = "", notes: int = 0) -> Verdict:
    """Return the verdict on a specimen; see `core.study.verdict.judge`."""
    std = None if specimen.stiffness_std is None else np.array(specimen.stiffness_std)
    stiffness = Stiffness.from_voigt(np.array(specimen.stiffness))
    covariance = None if specimen.covariance is None else np.array(specimen.covariance)
    return judge(stiffness, claimed_class(specimen), std, covariance, symmetry, notes)


def verdict_view(specimen: Specimen, findings: Findings | None = None) -> VerdictView:
    """Return the band above everything, with what the search for symmetry has found."""
    verdict = verdict_of(specimen)
    mark, headline, facts = verdict.mark, verdict.headline, verdict.facts
    if findings is not None:
        facts = _with_findings(specimen, findings, facts)
        chance = findings.chance
        if mark == "stable" and chance is not None and chance.probability < LEAST_CHANCE:
            mark, headline = "doubtful", DOUBTED
            facts = (f"stable in {100 * chance.probability:.0f} % of the draws", *facts)
    if specimen.density is None:
        facts = (*facts, "no density: waves are off")
    elif not DENSITY[0] <= specimen.density <= DENSITY[1]:
        facts = (f"no crystal has a density of {significant(specimen.density)} kg/m³", *facts)
    return VerdictView(mark, headline, facts, verdict.detail)


def _with_findings(
    specimen: Specimen, findings: Findings, facts: tuple[str, ...]
) -> tuple[str, ...]:
    """Return the facts of a verdict with one on what is claimed and found of the symmetry.

    It comes first where it is news; of an unstable crystal what gives way comes first.
    """
    claimed, stiffness = claimed_class(specimen), stiffness_of(specimen)
    said = claim_sentence(claimed, distance(stiffness.voigt, claimed), findings.symmetry)
    others = [fact for fact in facts if not is_about_class(fact)]
    is_news = ";" in said and assess(stiffness).stable
    facts = (said, *others) if is_news else (*others[:1], said, *others[1:])
    count = len(findings.notes)
    return (f"{count} {'note' if count == 1 else 'notes'}", *facts) if count else facts


def is_about_class(fact: str) -> bool:
    """Return whether a fact of a verdict tells how the table stands to its claimed class."""
    return any(words in fact for words in _ABOUT_CLASS)


def window_title(specimen: Specimen) -> str:
    """Return the specimen's part of the window title."""
    return specimen.name


# ------------------------------------------------------------------ constants
def constants_view(specimen: Specimen, face: str) -> ConstantsView:
    """Return one face of the 6×6 grid."""
    claimed = claimed_class(specimen)
    table, note = _face_table(specimen, face)
    expected = _expected(specimen, claimed) if face == "stiffness" else table
    std = deviations(specimen) if face == "stiffness" else np.zeros((6, 6))
    slack = _OFF_PATTERN * float(np.abs(np.array(specimen.stiffness)).max())
    decimals = _decimals(table, claimed)
    texts = [
        [_cell_text(face, float(table[i, j]), float(std[i, j]), decimals) for j in range(6)]
        for i in range(6)
    ]
    cells = tuple(
        tuple(
            _cell(face, claimed, table, expected, slack, i, j, texts[i][j]) for j in range(6)
        )
        for i in range(6)
    )
    known_face = face if face in UNITS else "stiffness"
    is_editable = not note
    if face == "uncertainty" and specimen.covariance is not None:
        note = COVARIANCE_NOTE
    return ConstantsView(known_face, UNITS[known_face], cells, is_editable, note)  # type: ignore[arg-type]


def deviations(specimen: Specimen) -> FloatArray:
    """Return the standard uncertainties of the constants, (6, 6), GPa; zeros if unknown."""
    if specimen.stiffness_std is not None:
        return np.array(specimen.stiffness_std)
    if specimen.covariance is not None:
        return deviations_of(np.array(specimen.covariance))
    return np.zeros((6, 6))


def _face_table(specimen: Specimen, face: str) -> tuple[FloatArray, str]:
    stiffness = Stiffness.from_voigt(np.array(specimen.stiffness))
    if face == "uncertainty":
        return deviations(specimen), ""
    if face == "compliance":
        try:
            return np.array(stiffness.compliance) * 1e3, ""
        except InputError as error:
            return np.full((6, 6), np.nan), str(error)
    return np.array(stiffness.voigt), ""


def _expected(specimen: Specimen, claimed: CrystalClass) -> FloatArray:
    return complete(np.array(specimen.stiffness), claimed)


def _cell(
    face: str,
    claimed: CrystalClass,
    table: FloatArray,
    expected: FloatArray,
    slack: float,
    row: int,
    column: int,
    text: str,
) -> CellView:
    """Return one cell; a number that breaks the class's pattern shows as a free one."""
    i, j = sorted((row, column))
    kind = claimed.kinds[i][j]
    value = float(table[row, column])
    letter = "S" if face == "compliance" else "C"
    tooltip = f"{letter}{i + 1}{j + 1}"
    if kind != "independent":
        tooltip = (
            dependence_text(claimed, i, j)
            if face != "compliance"
            else (f"{tooltip}: follows from the {claimed.name} class")
        )
        if abs(table[i, j] - expected[i, j]) > slack:
            kind = "independent"
            tooltip = f"{tooltip}, but the table has {significant(value)}"
    elif row > column:
        kind = "dependent"
        tooltip = f"equal to {letter}{i + 1}{j + 1}"
    if kind == "zero":
        return CellView("·", "zero", "0.0", f"{letter}{i + 1}{j + 1}: zero by symmetry")
    full = full_precision(value)
    return CellView(text, kind, full, f"{tooltip}: {full.replace('-', MINUS)} {UNITS[face]}")  # type: ignore[arg-type]


def _decimals(table: FloatArray, claimed: CrystalClass) -> int | None:
    """Return how many decimals all numbers of a face have; None where they are of odd sizes.

    The largest independent number shows four significant digits, so the others line up under
    it and what rounding left reads as zero.
    """
    free = [abs(float(table[i, j])) for i, j in claimed.independent]
    largest = max(free) if np.isfinite(table).all() else 0.0
    if not _PLAIN[0] <= largest < _PLAIN[1]:
        return None
    return max(_DIGITS - 1 - int(f"{largest:.{_DIGITS - 1}e}".split("e")[1]), 0)


def _cell_text(face: str, value: float, deviation: float, decimals: int | None) -> str:
    """Return a number with the digits that its uncertainty leaves it, or that its face has."""
    if face == "uncertainty":
        return "·" if value == 0.0 else significant(value, 2)
    if deviation > 0 or decimals is None:
        return with_deviation(value, deviation).split(" ")[0]
    return f"{round(value, decimals) + 0.0:.{decimals}f}".replace("-", MINUS)


def edit_label(face: str, row: int, column: int) -> str:
    """Return the name of the step that changes a cell."""
    i, j = sorted((row, column))
    name = constant_name(i, j)
    return {
        "stiffness": f"Change {name}",
        "compliance": f"Change {name.replace('C', 'S')}",
        "uncertainty": f"Change the uncertainty of {name}",
    }[face]


def spectrum_view(specimen: Specimen) -> SpectrumView:
    """Return the six bars of the strain spectrum."""
    stiffness = Stiffness.from_voigt(np.array(specimen.stiffness))
    stability = assess(stiffness)
    factor = crystal_factor(specimen)
    sigmas = np.zeros(6) if factor is None else eigenstiffness_deviation(stiffness, factor)
    bars = tuple(
        _bar(value, sigma, words)
        for value, sigma, words in zip(
            stability.eigenstiffness.tolist(),
            sigmas.tolist(),
            stability.descriptions,
            strict=True,
        )
    )
    count = int((stability.eigenstiffness <= 0).sum())
    note = (
        ""
        if stability.stable
        else (f"{count} of 6 strains release energy instead of storing it")
    )
    return SpectrumView(bars, note)


def _bar(value: float, sigma: float, words: str) -> SpectrumBar:
    known = number_text(value, sigma) if sigma else significant(value, 6)
    return SpectrumBar(
        value,
        plain_or_bracketed(value, sigma) if sigma else significant(value, 3),
        words,
        f"{known} GPa: {words}. An eigenvalue of the stiffness in Kelvin form; the crystal is "
        "stable when all six are positive.",
    )


# ------------------------------------------------------------------ forms
@lru_cache(maxsize=1)
def class_choices() -> tuple[tuple[str, str], ...]:
    """Return the crystal classes with the number of their constants, for a combo box."""
    named = ((key, crystal_class(key)) for key in CLASS_KEYS)
    return tuple((key, _class_words(entry)) for key, entry in named)


def _class_words(entry: CrystalClass) -> str:
    count = f"{len(entry.independent)} constants"
    return entry.name if count in entry.name else f"{entry.name}, {count}"


def specimen_view(state: BenchState) -> SpecimenView:
    """Return the specimen form."""
    specimen = ledger_specimen(state)
    claimed = claimed_class(specimen)
    off = distance(np.array(specimen.stiffness), claimed)
    note = (
        ""
        if off < FITS
        else (
            f"The table is {significant(100 * off, 2)} % away from {claimed.name} "
            "in these axes."
        )
    )
    choices = (
        () if state.other is None else (("A", state.specimen.name), ("B", state.other.name))
    )
    temperature = specimen.temperature_c
    return SpecimenView(
        name=specimen.name,
        source=specimen.source,
        notes=specimen.notes,
        density="" if specimen.density is None else f"{specimen.density:.10g}",
        temperature="" if temperature is None else f"{temperature:g}".replace("-", "−"),
        crystal_class=specimen.crystal_class,
        classes=class_choices(),
        unique_axis=specimen.unique_axis,
        has_unique_axis=specimen.crystal_class == "monoclinic",
        class_note=note,
        sides="A and B" if state.other is None else state.display.ledger,
        choices=choices,
        chosen=state.display.ledger,
    )


def cell_form_view(specimen: Specimen) -> CellFormView:
    """Return the form of the unit cell and the axes."""
    cell = specimen.cell
    conventions = tuple(AXES_CONVENTIONS.items())
    if specimen.crystal_axes not in AXES_CONVENTIONS:
        conventions = (*conventions, (specimen.crystal_axes, axes_words(specimen.crystal_axes)))
    if cell is None:
        note = (
            "No cell: indices follow the unit cube."
            if specimen.frame.has_basis
            else "No cell: [u v w] and (h k l) cannot be read."
        )
        return CellFormView(
            ("",) * 3,
            ("",) * 3,
            axes_text(specimen.crystal_axes),
            conventions,
            note,
        )
    mismatch = cell_mismatch(cell, specimen.crystal_class, specimen.unique_axis)
    notes = (
        f"volume {significant(cell.volume)} Å³",
        mismatch,
        axes_note(cell, specimen.crystal_axes),
    )
    return CellFormView(
        (f"{cell.a:g}", f"{cell.b:g}", f"{cell.c:g}"),
        (f"{cell.alpha:g}", f"{cell.beta:g}", f"{cell.gamma:g}"),
        axes_text(specimen.crystal_axes),
        conventions,
        " · ".join(note for note in notes if note),
    )


def orientation_view(state: BenchState, side: str) -> OrientationView:
    """Return the form of one orientation."""
    specimen, choice = state.specimen_of(side), state.orientation_of(side)
    way, others, axes = _said(choice, specimen.frame)
    doubt = missed_direction(choice.text, specimen.frame)
    note = _misorientation_note(state) if side == "B" else ""
    return OrientationView(
        side, choice.text, way, tuple(WAYS.items()), choice.turn, others, axes, note,
        doubt,
    )  # fmt: skip


@lru_cache(maxsize=8)
def _said(
    choice: OrientationChoice, frame: CrystalFrame
) -> tuple[str, tuple[tuple[str, str], ...], tuple[str, str, str]]:
    """Return the way an orientation is said, the same said otherwise, and its axes in words."""
    said = parse_orientation(choice.text, frame)
    turn = turned(said.rotation, choice.turn)
    others = tuple((WAYS[way], text) for way, text in orientation_texts(turn, frame).items())
    axes = (axis_words(turn[0], frame), axis_words(turn[1], frame), axis_words(turn[2], frame))
    return said.way, others, axes


def _misorientation_note(state: BenchState) -> str:
    """Return how far B is turned from A, as it stands and by the crystal's own symmetry."""
    rotation_a, rotation_b = (
        live.rotation(state.orientation_of(side), state.specimen_of(side)) for side in "AB"
    )
    plain = misorientation(rotation_a, rotation_b)
    if plain.angle_deg < 1e-9:
        return "the same orientation as A"
    text = f"{significant(plain.angle_deg, 4)}° from A as they stand"
    claimed = claimed_class(state.specimen)
    if state.other is not None or claimed.key in ("triclinic", "isotropic"):
        return text
    least = misorientation(rotation_a, rotation_b, laue_rotations(claimed))
    if least.angle_deg < plain.angle_deg - 1e-9:
        text += f", {significant(least.angle_deg, 4)}° by the crystal's symmetry"
    return text
