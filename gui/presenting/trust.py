"""View data of the trust sheet: symmetry, stability, notes and uncertainties of a table."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np

from core import live
from core.arrays import FloatArray
from core.crystal.cell import axes_words
from core.directional.quantities import quantity
from core.directional.sphere import sphere_mesh
from core.numbers import full_precision, significant
from core.state import BenchState, Specimen, claimed_class, stiffness_of
from core.study.trust.findings import Entered, Findings, examine
from core.study.trust.support import Support
from core.study.trust.symmetry_verdict import claim_sentence, vector_text
from core.study.uncertainty.deviations import eigenstiffness_deviation
from core.study.uncertainty.draws import MonteCarlo, StabilityChance, monte_carlo
from core.study.uncertainty.propagation import Contribution
from core.task import Ticker
from core.tensor.closest import Share
from core.tensor.hidden_axes import HiddenAxes
from core.tensor.stability import assess, criteria
from core.tensor.symmetry import CLASS_KEYS, crystal_class, distance
from gui.presenting.ledger import is_about_class, ledger_specimen, verdict_view
from gui.presenting.sigmas import number_text, sentence
from gui.presenting.spread import (
    STIFFNESS,
    PinSpread,
    Place,
    crystal_covariance,
    crystal_factor,
)
from gui.presenting.stage import SHEET_NAMES, sides
from gui.viewdata import ClassRow, TableView, TrustView

FINDING = "Symmetry is being searched for …"
_SEEN_TURN = 0.005  # degrees: a smaller turn is none
_EXACT = 1e-7  # percent
_NAMED = 3  # constants that are named as worth measuring better
_LEAST_SHARE = 0.05
_TENABLE = 10.0  # of Schwarz's criterion: more than that behind the best is hardly tenable
_MUCH = 1.0  # percent: making a class exact that changes more is worth a warning
_FAR_BETTER = 0.5  # of the change as entered: when turning first is the better advice
_SAME_CHANCE = 0.02  # the normal law knows one strain only: said where it agrees with draws
_DRAW_LEVEL = 4  # 1,281 directions
_CHAINS = {"trigonal_6": "trigonal", "trigonal_7": "trigonal", "cubic": "cubic"}
HEADER = ("class", "free", "as entered", "turned", "by", "about x, y, z", "log", "")


# ------------------------------------------------------------------ requests
@dataclass(frozen=True)
class TrustRequest:
    """What the findings about a specimen depend on."""

    stiffness: Any
    density: float | None
    class_key: str
    unique_axis: str
    std: Any
    covariance: Any
    axes: str


def trust_request(specimen: Specimen) -> TrustRequest:
    """Return what `find` is asked about a specimen."""
    return TrustRequest(
        specimen.stiffness,
        specimen.density,
        specimen.crystal_class,
        specimen.unique_axis,
        specimen.stiffness_std,
        specimen.covariance,
        "" if specimen.cell is None else axes_words(specimen.crystal_axes),
    )


def find(request: tuple[TrustRequest, Specimen], ticker: Ticker) -> Findings:
    """Return the findings about a specimen; takes up to a hundred milliseconds."""
    asked, specimen = request
    claimed = claimed_class(specimen)
    return examine(
        stiffness_of(specimen), specimen.density, claimed, crystal_covariance(specimen),
        asked.axes, _CHAINS.get(claimed.key, "orthorhombic"), ticker,
    )  # fmt: skip


def draw_everywhere(
    request: tuple[TrustRequest, Specimen], ticker: Ticker
) -> MonteCarlo | None:
    """Return what 1,000 draws say of E and the speeds in all directions."""
    _, specimen = request
    covariance = crystal_covariance(specimen)
    if covariance is None:
        return None
    medium = live.crystal_medium(specimen.stiffness, specimen.density)
    return monte_carlo(medium, sphere_mesh(_DRAW_LEVEL).half, covariance, ticker=ticker)


# ------------------------------------------------------------------ the sheet
def trust_view(
    state: BenchState,
    findings: Findings | None,
    spread: PinSpread | None = None,
    drawn: MonteCarlo | None = None,
) -> TrustView:
    """Return the trust sheet of the ledger's crystal.

    Parameters
    ----------
    state : BenchState
    findings : Findings or None
        Of this very table; None while they are being found.
    spread : PinSpread, optional
        Uncertainties at this pin.
    drawn : MonteCarlo, optional
        Draws over all directions for this table.
    """
    specimen = ledger_specimen(state)
    suggested = ""
    chance = None if findings is None else findings.chance
    if findings is not None:
        symmetry = findings.symmetry
        hidden = symmetry.hidden
        suggested = symmetry.as_entered.key if hidden is None else hidden.class_key
    return TrustView(
        sentence=FINDING if findings is None else _symmetry_sentence(specimen, findings),
        header=HEADER,
        classes=(
            _waiting_rows(specimen)
            if findings is None
            else _class_rows(specimen, findings, suggested)
        ),
        suggested=suggested,
        support="" if findings is None else _support_text(findings.supports),
        facts=tuple(fact for fact in verdict_view(specimen).facts if not is_about_class(fact)),
        chance="" if chance is None else chance_text(chance),
        strains=_strains(specimen),
        criteria=_criteria(specimen),
        notes=() if findings is None else findings.notes,
        shares=_shares(() if findings is None else findings.shares),
        pin=_pin(state, spread),
        draws="" if drawn is None else draws_text(drawn),
        pending=findings is None,
    )


# ------------------------------------------------------------------ symmetry
def _symmetry_sentence(specimen: Specimen, findings: Findings) -> str:
    """Return what the table claims and what it has the form of."""
    claimed = claimed_class(specimen)
    off = distance(np.array(specimen.stiffness), claimed)
    return sentence(claim_sentence(claimed, off, findings.symmetry))


def _class_rows(specimen: Specimen, findings: Findings, suggested: str) -> tuple[ClassRow, ...]:
    best = findings.supports[0].class_key if findings.supports else ""
    return tuple(
        _class_row(specimen, entered, axes, suggested, best)
        for entered, axes in zip(findings.entered, findings.hidden, strict=True)
    )


def _waiting_rows(specimen: Specimen) -> tuple[ClassRow, ...]:
    """Return the classes without numbers: those of another table would mislead."""
    rows = []
    for key in CLASS_KEYS:
        cls = crystal_class(key)
        claimed = "claimed" if key == specimen.crystal_class else ""
        cells = (_name(key), str(len(cls.independent)), "…", "…", "", "", "", claimed)
        rows.append(ClassRow(key, cells, cells, FINDING, False, False))
    return tuple(rows)


def _class_row(
    specimen: Specimen, entered: Entered, axes: HiddenAxes, suggested: str, best: str
) -> ClassRow:
    cls = entered.claimed
    about = f" about {cls.unique_axis}" if cls.key == "monoclinic" else ""
    is_turned = axes.turn_deg > _SEEN_TURN
    is_better = is_turned and axes.distance_percent < entered.percent - _EXACT
    remarks = [
        words
        for words, holds in (
            ("claimed", cls.key == specimen.crystal_class),
            ("supported", cls.key == best),
            ("fits", cls.key == suggested),
        )
        if holds
    ]
    turn = f"{axes.turn_deg:.2f}°" if is_better else "–"
    if is_better and (axes.axis_uncertainty_deg or 0.0) > _SEEN_TURN:
        turn = f"{axes.turn_deg:.1f} ± {significant(axes.axis_uncertainty_deg or 0.0, 1)}°"
    cells = (
        cls.name.split(",")[0] + about.replace(" about", ","),
        str(len(cls.independent)),
        percent_text(entered.percent),
        percent_text(axes.distance_percent),
        turn,
        vector_text(axes.turn_axis) if is_better else "",
        significant(axes.log_distance, 2) if axes.log_distance > 1e-9 else "0",
        ", ".join(remarks),
    )
    full = (
        cls.name + about,
        cells[1],
        full_precision(entered.percent),
        full_precision(axes.distance_percent),
        full_precision(axes.turn_deg),
        " ".join(full_precision(x) for x in axes.turn_axis),
        full_precision(axes.log_distance),
        cells[7],
    )
    tooltip = (
        f"{cls.name}{about}; point groups {cls.groups}. Free: its independent constants. As "
        "entered, turned: the distance ‖C − C_class‖/‖C‖ in Kelvin form, about the axes as "
        "entered and about those at which the class fits best; by, about: how far and about "
        "which direction those are turned; log: the log-Euclidean distance about them."
    )
    can_exact = entered.percent > _EXACT or cls.key != specimen.crystal_class
    change, doubt = _change_words(entered.percent, axes.distance_percent)
    return ClassRow(cls.key, cells, full, tooltip, is_better, can_exact, change, doubt)


def _change_words(entered: float, turned: float) -> tuple[str, str]:
    """Return by how much making a class exact changes the table, and a warning where much.

    Parameters
    ----------
    entered, turned : float
        The distances to the class, about the axes as entered and about the best, percent.
    """
    if entered <= _EXACT:
        return "The numbers stay as they are.", ""
    change = f"Changes the table by {significant(entered, 2)} %."
    if entered < _MUCH:
        return change, ""
    doubt = f"Exact as entered changes the table by {significant(entered, 2)} %"
    if turned < _FAR_BETTER * entered:
        rest = "not at all" if turned <= _EXACT else f"by {percent_text(turned)}"
        doubt += f"; once turned to its axes, {rest}"
    return change, f"{doubt}."


def percent_text(percent: float) -> str:
    """Return a distance in percent with two digits; "exact" for rounding."""
    return "exact" if percent < _EXACT else f"{significant(percent, 2)} %"


def _support_text(supports: tuple[Support, ...]) -> str:
    if not supports:
        return ""
    best = supports[0]
    chi2 = significant(best.chi2 if best.chi2 > _EXACT else 0.0, 3)
    words = (
        f"Within the uncertainties the data support {best.constants} constants: "
        f"{_name(best.class_key)}, χ² {chi2} (Schwarz's criterion)."
    )
    simpler = [
        _name(support.class_key)
        for support in supports[1:]
        if support.constants < best.constants
        and support.criterion - best.criterion < _TENABLE
    ]
    if simpler:
        words += f" Fewer are not ruled out: {', '.join(simpler)}."
    return words


def _name(key: str) -> str:
    return crystal_class(key).name.split(",")[0]


def _shares(shares: tuple[Share, ...]) -> TableView:
    rows = [share for share in shares if share.class_key != "isotropic"]
    known = [share for share in rows if share.anisotropic_percent > 1e-9]
    return TableView(
        "What the anisotropy is made of",
        ("", "of ‖C − iso‖²", "of ‖C‖"),
        tuple(
            (
                f"{_name(s.class_key)} part",
                f"{significant(s.anisotropic_percent, 3)} %",
                f"{significant(s.percent, 3)} %",
            )
            for s in known
        ),
        tuple(
            (
                f"{_name(s.class_key)} part",
                full_precision(s.anisotropic_percent),
                full_precision(s.percent),
            )
            for s in known
        ),
        (
            "What this class adds to those before it, about the axes as entered with z as the "
            "axis of symmetry (Browaeys & Chevrot 2004).",
        )
        * len(known),
        "" if known or not shares else "The table is isotropic.",
    )


# ------------------------------------------------------------------ stability
def _strains(specimen: Specimen) -> TableView:
    stiffness = stiffness_of(specimen)
    stability, factor = assess(stiffness), crystal_factor(specimen)
    sigmas: FloatArray = (
        np.zeros(6) if factor is None else eigenstiffness_deviation(stiffness, factor)
    )
    rows, full = [], []
    for value, sigma, words in zip(
        stability.eigenstiffness.tolist(), sigmas.tolist(), stability.descriptions, strict=True
    ):
        rows.append((number_text(value, sigma), "GPa", words))
        full.append((full_precision(value), "GPa", words))
    tip = "Eigenvalue of the stiffness in Kelvin form, and the strain it resists."
    return TableView("Strain spectrum", ("", "", ""), tuple(rows), tuple(full), (tip,) * 6)


def _criteria(specimen: Specimen) -> TableView:
    claimed = claimed_class(specimen)
    found = criteria(stiffness_of(specimen).voigt, claimed)
    return TableView(
        f"Criteria of the {claimed.name.split(',')[0]} class",
        ("", "", "value", ""),
        tuple(
            ("● holds" if c.holds else "■ fails", c.text, significant(c.value, 3), c.unit)
            for c in found
        ),
        tuple(
            ("holds" if c.holds else "fails", c.text, full_precision(c.value), c.unit)
            for c in found
        ),
        ("Necessary and sufficient together, read from the free constants of the class.",)
        * len(found),
    )


def chance_text(chance: StabilityChance) -> str:
    """Return how probable it is that the crystal is stable, in a sentence."""
    if chance.probability >= 1.0:
        return f"Stable in all of {chance.count:,} draws from the uncertainties."
    if chance.probability <= 0.0:
        return f"Stable in none of {chance.count:,} draws from the uncertainties."
    error = 100 * chance.standard_error
    normal = ""
    if abs(chance.normal - chance.probability) < _SAME_CHANCE:
        normal = f"; {significant(100 * chance.normal, 3)} % by the normal law"
    return (
        f"Stable with a probability of {number_text(100 * chance.probability, error)} % "
        f"({chance.count:,} draws{normal})."
    )


# ------------------------------------------------------------------ uncertainties
_WORDS = {"young": "E", "phase": "v"}


def _pin(state: BenchState, spread: PinSpread | None) -> TableView:
    side = _pin_side(state)
    title = f"Uncertainty at the pin, {side}"
    if spread is None or side not in spread.pin:
        known = crystal_factor(ledger_specimen(state)) is not None
        words = "being found …" if known else (
            "No uncertainties are known. Enter them in the ± face of the grid."
        )  # fmt: skip
        return TableView(title, ("", "±", "drawn ±", "measure better"), (), (), (), words)
    keys = dict.fromkeys((state.quantity, "young", "phase"))
    rows, full = [], []
    for key in keys:
        for sheet, shares in enumerate(spread.shares.get((side, key), ())):
            place, label = _place(key, sheet)
            sigma = spread.pin[side].get(place, math.nan)
            drawn = _drawn(spread, side, key, sheet)
            rows.append((label, significant(sigma, 2), *drawn[:1], shares_text(shares)))
            full.append((label, full_precision(sigma), drawn[1], shares_text(shares, 21)))
    tip = (
        "One standard uncertainty to first order, the same by 1,000 draws, and how much of the "
        "variance would go if a constant were known exactly."
    )
    return TableView(
        title, ("", "±", "drawn ±", "measure better"), tuple(rows), tuple(full),
        (tip,) * len(rows),
    )  # fmt: skip


def _pin_side(state: BenchState) -> str:
    """Return the first side shown whose crystal is that of the ledger."""
    own = ledger_specimen(state)
    return next(
        (side for side in sides(state) if state.specimen_of(side) == own), sides(state)[0]
    )


def _place(key: str, sheet: int) -> tuple[Place, str]:
    entry = quantity(key)
    if entry.sheets == 1:
        return (STIFFNESS, entry.short), f"{_WORDS.get(key, entry.short)}, {entry.unit}".rstrip(
            ", "
        )
    name = SHEET_NAMES[sheet]
    return (f"{name} wave", entry.short), (
        f"{name} {_WORDS.get(key, entry.short)}, {entry.unit}".rstrip(", ")
    )


def _drawn(spread: PinSpread, side: str, key: str, sheet: int) -> tuple[str, str]:
    """Return the drawn uncertainty, marked where it differs, and at full precision."""
    found = spread.draws[side].spreads.get(key) if side in spread.draws else None
    if found is None:
        return "", ""
    value = float(found.deviation[sheet, 0])
    mark = "▲ " if found.differs[sheet, 0] else ""
    return f"{mark}{significant(value, 2)}", full_precision(value)


def shares_text(shares: tuple[Contribution, ...], most: int = _NAMED) -> str:
    """Return "C44 61 %, C11 20 %": the constants that a variance comes from."""
    least = _LEAST_SHARE if most == _NAMED else 0.0
    named = [s for s in shares[:most] if s.share >= least] or list(shares[:1])
    return ", ".join(f"{s.name} {round(100 * s.share)} %" for s in named)


def draws_text(drawn: MonteCarlo) -> str:
    """Return where linear uncertainties do not do, in a sentence."""
    unstable = drawn.count - drawn.stable
    lost = f"; {unstable:,} were unstable and left out" if unstable else ""
    parts = [
        f"in {significant(100 * share, 2)} % of all directions for {words}"
        for key, words in (("young", "E"), ("phase", "the speeds"))
        if (share := drawn.differing.get(key, 0.0)) > 0
    ]
    if not parts:
        return f"{drawn.count:,} draws agree with the linear ± in every direction{lost}."
    return (
        f"{drawn.count:,} draws give another ± than the linear one, by more than 20 %, "
        f"{' and '.join(parts)}{lost}."
    )
