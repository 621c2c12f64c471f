"""View data of the page of measured speeds: the table, the form, what a fit says."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from core.arrays import FloatArray
from core.crystal.cell import CrystalFrame, axes_text
from core.editing.readings import Understood, understand, unseen_words
from core.numbers import full_precision, significant, with_deviation
from core.state import SPEED_COLUMNS, BenchState, MeasuredSpeeds
from core.study.recovery.conflicts import UNLIKELY, chi2_probability
from core.study.recovery.fit import Fit
from core.study.recovery.planning import Plan, Ranking
from core.study.recovery.readings import DEFAULT_RELATIVE_SIGMA, Reading
from core.tensor.symmetry import dependence_text
from gui.presenting.ledger import class_choices, ledger_specimen
from gui.presenting.near import axis_words
from gui.speeds.viewdata import (
    BlankRow,
    BlanksView,
    Fact,
    Place,
    PlanView,
    ResultCell,
    ResultView,
    SpeedColumn,
    SpeedsFormView,
    SpeedsTableView,
)
from gui.viewdata import ConstantsView

SHEETS = ("fastest", "middle", "slowest")
CRITERIA = (
    ("determinant", "all constants together"),
    ("largest", "the least certain constant"),
    ("functional", "Young's modulus along the pin"),
)

_COLUMNS = {
    "direction": SpeedColumn(
        "direction", "direction",
        "Wave normal (ray, for group speeds): [1 1 0], (1 0 2), or components along the crystal"
        " axes such as 0.3 0.4 0.87", False, "0.31 −0.87",
    ),
    "sheet": SpeedColumn(
        "sheet", "sheet", "1 for the fastest wave, 2, 3; empty where not known", True, "(2)"
    ),
    "polarisation": SpeedColumn(
        "polarisation", "polarisation",
        "How the wave moves: longitudinal, shear, or a direction; may be empty", False, "shear",
    ),
    "kind": SpeedColumn("kind", "kind", "phase (the default) or group", False, "phase"),
    "speed_m_s": SpeedColumn("speed_m_s", "v, m/s", "Speed, m/s", True, "6792.43"),
    "sigma_m_s": SpeedColumn(
        "sigma_m_s", "σ", "Standard uncertainty of the speed, m/s; 0.1 % where empty", True,
        "12.7",
    ),
    "thickness_mm": SpeedColumn(
        "thickness_mm", "mm", "Thickness of the blank, mm", True, "12.345"
    ),
    "transit_us": SpeedColumn("transit_us", "µs", "Transit time, µs", True, "12.3456"),
    "sigma_us": SpeedColumn(
        "sigma_us", "σ", "Standard uncertainty of the transit time, µs; 0.1 % where empty",
        True, "0.0048",
    ),
    "path": SpeedColumn(
        "path", "path", "through (the default) or echo: there and back", False, "through"
    ),
    "delay_ns": SpeedColumn(
        "delay_ns", "delay", "Delay in couplant and cables, ns, taken off the transit time",
        True, "38.5",
    ),
    "sigma_mm": SpeedColumn(
        "sigma_mm", "σ, mm", "Standard uncertainty of the thickness, mm; 0 where empty", True,
        "0.002",
    ),
    "residual": SpeedColumn(
        "residual", "off, σ", "(predicted − measured)/σ of the fit", True, "−12.3", False
    ),
}  # fmt: skip
_WAVE = ("direction", "sheet", "polarisation", "kind")
_SPEED = ("speed_m_s", "sigma_m_s")
_FLIGHT = ("thickness_mm", "transit_us", "sigma_us", "path", "delay_ns", "sigma_mm")
_SHOWN = {
    "speed": (*_WAVE, *_SPEED, "residual"),
    "flight": ("direction", "sheet", *_FLIGHT[:5], "residual", *_WAVE[2:], "sigma_mm"),
    "both": (*_WAVE, *_SPEED, *_FLIGHT, "residual"),
}


@dataclass(frozen=True, eq=False)
class Found:
    """What is known of a fit at a moment.

    Attributes
    ----------
    fit : Fit or None
        The last one; of other readings while `pending`.
    ranking : Ranking or None
    pending, ranking_pending : bool
    notice : str
        Why there is no fit.
    """

    fit: Fit | None = None
    ranking: Ranking | None = None
    pending: bool = False
    ranking_pending: bool = False
    notice: str = ""


# ------------------------------------------------------------------ readings
def shown_columns(speeds: MeasuredSpeeds) -> tuple[str, ...]:
    """Return the keys of the columns that the table shows, what the fit says included."""
    return _SHOWN[speeds.entered]


def typed_columns(speeds: MeasuredSpeeds, first: int) -> tuple[str, ...]:
    """Return the keys of the typed columns from a place of the table on."""
    return tuple(key for key in shown_columns(speeds)[first:] if key != "residual")


def table_view(speeds: MeasuredSpeeds, found: Found) -> SpeedsTableView:
    """Return the table of readings."""
    keys = shown_columns(speeds)
    known = understand(speeds)
    residuals = _residual_texts(found.fit)
    places = [SPEED_COLUMNS.index(key) if key != "residual" else -1 for key in keys]
    rows = tuple(
        tuple(residuals.get(number, "") if place < 0 else row[place] for place in places)
        for number, row in enumerate(speeds.rows, start=1)
    )
    marks: dict[int, Literal["outlier", "planned"]] = {}
    marks |= {plan.row - 1: "planned" for plan in known.planned}
    if found.fit is not None:
        marks |= {row - 1: "outlier" for row in found.fit.outliers}
    return SpeedsTableView(
        columns=tuple(_COLUMNS[key] for key in keys),
        rows=rows,
        ghosts=_ghosts(speeds, known, keys, found.fit),
        faults=_faults(known, keys),
        marks=marks,
        entered=speeds.entered,
        summary=_summary(known),
        pending=found.pending,
    )


def _residual_texts(fit: Fit | None) -> dict[int, str]:
    if fit is None:
        return {}
    return {
        reading.row: f"{round(residual, 1) + 0.0:.1f}".replace("-", "−")
        for reading, residual in zip(fit.readings, fit.residuals.tolist(), strict=True)
    }


def _ghosts(
    speeds: MeasuredSpeeds, known: Understood, keys: Sequence[str], fit: Fit | None
) -> dict[Place, str]:
    """Return what the empty cells of sound rows are taken for."""
    columns = {key: place for place, key in enumerate(keys)}
    sheets = {} if fit is None else {
        reading.row: sheet for reading, sheet in zip(fit.readings, fit.sheets, strict=True)
    }  # fmt: skip
    ghosts: dict[Place, str] = {}
    for reading in known.readings:
        row = dict(zip(SPEED_COLUMNS, speeds.rows[reading.row - 1], strict=True))
        for key, text in _taken_for(reading, sheets.get(reading.row)).items():
            if key in columns and text and not row[key]:
                ghosts[reading.row - 1, columns[key]] = text
    return ghosts


def _taken_for(reading: Reading, sheet: int | None) -> dict[str, str]:
    """Return what each cell of a row is taken for where it is empty."""
    taken = {
        "sheet": f"({sheet})" if sheet else "",
        "kind": "phase",
        "speed_m_s": f"{reading.speed:.1f}",
        "sigma_m_s": significant(reading.sigma, 2),
    }
    flight = reading.flight
    if flight is not None:
        sigma = significant(DEFAULT_RELATIVE_SIGMA * flight.transit_us, 2)
        taken |= {"sigma_us": sigma, "path": "through", "delay_ns": "0", "sigma_mm": "0"}
    return taken


def _faults(known: Understood, keys: Sequence[str]) -> dict[Place, str]:
    """Return what is wrong, by cell; of a column that is not shown at the first one."""
    columns = {key: place for place, key in enumerate(keys)}
    faults: dict[Place, str] = {}
    for fault in known.faults:
        place = (fault.row - 1, columns.get(fault.column, 0))
        words = f"{fault.message} {fault.hint}".strip()
        if fault.column and fault.column not in columns:
            words = f"{fault.column}: {words}"
        faults.setdefault(place, words)
    return faults


def _summary(known: Understood) -> str:
    """Return how much there is in the table."""
    count = len(known.readings)
    blanks = len({reading.direction for reading in known.readings})
    parts = [f"{count:,} along {blanks:,} direction{'' if blanks == 1 else 's'}"]
    if known.planned:
        parts.append(f"{len(known.planned)} planned")
    wrong = len({fault.row for fault in known.faults})
    if wrong:
        parts.append(f"{wrong} left out")
    return ", ".join(parts) if count or wrong or known.planned else "none yet"


def form_view(speeds: MeasuredSpeeds) -> SpeedsFormView:
    """Return what is known of the measured crystal."""
    known = understand(speeds)
    return SpeedsFormView(
        density=speeds.density,
        crystal_class=speeds.crystal_class,
        classes=class_choices(),
        unique_axis=speeds.unique_axis,
        has_unique_axis=speeds.crystal_class == "monoclinic",
        direction_sigma=speeds.direction_sigma,
        robust=speeds.robust,
        frame=_frame_words(speeds),
        note=known.note,
    )


def _frame_words(speeds: MeasuredSpeeds) -> str:
    """Return what indices refer to, in a line."""
    if speeds.cell is None:
        return "no unit cell"
    cell = speeds.cell
    numbers = " ".join(
        f"{x:g}" for x in (cell.a, cell.b, cell.c, cell.alpha, cell.beta, cell.gamma)
    )
    axes = axes_text(speeds.crystal_axes).replace("||", "∥")
    return f"{axes}; cell {numbers}"


# ------------------------------------------------------------------ result
def result_view(speeds: MeasuredSpeeds, found: Found) -> ResultView:
    """Return what a fit says."""
    fit = found.fit
    if fit is None:
        return ResultView(None, (), (), (), False, found.pending, found.notice)
    unseen = tuple(combination.text for combination in fit.undetermined)
    first = f"{fit.rank} of "  # the sentence that says what `unseen` says
    return ResultView(
        constants=_constants(fit),
        facts=_facts(fit, understand(speeds)),
        unseen=unseen,
        notes=tuple(note for note in fit.notes if not (unseen and note.startswith(first))),
        can_use=not found.notice,
        pending=found.pending,
        notice=found.notice,
        question=f"{unseen_words(unseen)}." if unseen else "",
    )


def _constants(fit: Fit) -> ConstantsView:
    dust = 1e-9 * float(np.abs(fit.stiffness).max())
    cells = tuple(tuple(_cell(fit, i, j, dust) for j in range(6)) for i in range(6))
    return ConstantsView("stiffness", "GPa", cells, editable=False)


def _cell(fit: Fit, row: int, column: int, dust: float) -> ResultCell:
    i, j = sorted((row, column))
    kind, name = fit.cls.kinds[i][j], f"C{i + 1}{j + 1}"
    if kind == "zero":
        return ResultCell("·", "zero", "0.0", f"{name}: zero by symmetry")
    value, std = float(fit.stiffness[i, j]), float(fit.std[i, j])
    value = 0.0 if abs(value) < dust else value
    is_seen = bool(np.isfinite(std))
    text, _, deviation = with_deviation(value, std if is_seen else 0.0).partition(" ± ")
    tip = dependence_text(fit.cls, i, j) if kind == "dependent" else name
    told = f"± {deviation}" if deviation else ("not seen" if not is_seen else "")
    words = f"{tip}: {text} {told} GPa" if is_seen else (
        f"{tip}: has a part in what the readings do not see"
    )  # fmt: skip
    return ResultCell(text, kind, full_precision(value), words, told, is_seen)  # type: ignore[arg-type]


def _facts(fit: Fit, known: Understood) -> tuple[Fact, ...]:
    size, count = len(fit.names), len(fit.readings)
    left_out = len({fault.row for fault in known.faults})
    others = f", {left_out} row{'s' if left_out > 1 else ''} with faults left out"
    return (
        Fact("Readings", f"{count:,}{others if left_out else ''}", "Rows that were fitted."),
        Fact(
            "Seen",
            f"{fit.rank} of {size} combinations of constants",
            "The rank of the fit: how many independent combinations the readings determine.",
            "ink" if fit.is_determined else "doubt",
        ),
        _misfit(fit),
        _outliers(fit),
        _stability(fit),
    )


def _misfit(fit: Fit) -> Fact:
    tip = (
        "χ²: sum of the squared residuals in units of σ. With the right σ and the right"
        " symmetry it is about the number of degrees of freedom."
    )
    if fit.dof <= 0:
        return Fact("Misfit", "nothing to spare: no reading checks another", tip, "doubt")
    ratio = significant(fit.chi2 / fit.dof, 3)
    text = f"χ²/dof {ratio} ({significant(fit.chi2)} for {fit.dof})"
    is_credible = chi2_probability(fit.chi2, fit.dof) >= UNLIKELY
    return Fact("Misfit", text, tip, "ink" if is_credible else "doubt")


def _outliers(fit: Fit) -> Fact:
    rows = ", ".join(map(str, fit.outliers))
    text = f"row{'s' if len(fit.outliers) > 1 else ''} {rows}" if rows else "none"
    tip = "Rows that fit neither the crystal nor the other rows."
    return Fact("Outliers", text, tip, "alert" if rows else "ink")


def _stability(fit: Fit) -> Fact:
    chance, tip = fit.stability_probability, (
        "Whether all six eigenstiffnesses are positive, and how probable that is, given the"
        " uncertainties."
    )  # fmt: skip
    if not fit.stable:
        return Fact("Stable", f"no{_chance(chance)}", tip, "alert")
    if chance is None:
        return Fact("Stable", "as fitted; not all that decides it is seen", tip, "doubt")
    return Fact("Stable", f"yes{_chance(chance)}", tip, "ink" if chance > 0.99 else "doubt")


def _chance(chance: float | None) -> str:
    if chance is None:
        return ""
    words = "above 0.999" if chance > 0.999 else "below 0.001" if chance < 0.001 else (
        f"{chance:.3f}")  # fmt: skip
    return f", probability {words}"


# ------------------------------------------------------------------ blanks
def blanks_view(speeds: MeasuredSpeeds, found: Found) -> BlanksView:
    """Return the suggestions for the next blank."""
    ranking, fit = found.ranking, found.fit
    if ranking is None or fit is None:
        notice = "Suggestions come with the first fit." if fit is None else ""
        return BlanksView(speeds.criterion, CRITERIA, (), True, notice)
    rows = tuple(
        BlankRow(
            str(number),
            axis_words(blank.direction, speeds.frame),
            f"σ −{100 * (1 - 1 / blank.gain):.1f} %",
            _gain_words(speeds.criterion, blank.gain, fit.names, blank.std.tolist()),
            table_direction(blank.direction, speeds.frame),
        )
        for number, blank in enumerate(ranking.best, start=1)
    )
    pending = found.pending or found.ranking_pending
    return BlanksView(speeds.criterion, CRITERIA, rows, pending)


def _gain_words(criterion: str, gain: float, names: Sequence[str], std: list[float]) -> str:
    what = {
        "determinant": "Three speeds along it would make the combinations of constants more"
        " certain, on average by a factor of",
        "largest": "Three speeds along it would make the least certain constant more certain,"
        " by a factor of",
        "functional": "Three speeds along it would make E along the pin more certain, by a"
        " factor of",
    }[criterion]
    worst = int(np.argmax(std))
    return (
        f"{what} {significant(gain, 3)}. Least certain then: {names[worst]}"
        f" ± {significant(std[worst], 2)} GPa."
    )


def table_direction(vector: FloatArray, frame: CrystalFrame) -> str:
    """Return a suggested direction as it goes into the table: simple indices if it has any."""
    words = axis_words(vector, frame).replace("−", "-") if frame.has_basis else ""
    if words and " off" not in words:
        return words
    return " ".join(f"{component:.4f}" for component in (np.asarray(vector) + 0.0).tolist())


def plan_view(state: BenchState, plan: Plan | None, notice: str = "") -> PlanView:
    """Return what a plan starts from, and the plan once there is one."""
    specimen = ledger_specimen(state)
    about = (
        f"Roughly the constants of {specimen.name} in the ledger, with the symmetry chosen"
        " above for the readings; three waves along each blank."
    )
    if plan is None:
        return PlanView(about, notice=notice)
    count = plan.directions.shape[1]
    order = np.argsort(plan.std)
    best, worst = int(order[0]), int(order[-1])
    return PlanView(
        about,
        (
            f"{count} blank{'s' if count > 1 else ''}, {3 * count} speeds at"
            f" {100 * plan.relative_sigma:g} %, determine all {len(plan.names)} constants.",
            f"Expected σ: from {significant(float(plan.std[best]), 2)} GPa ({plan.names[best]})"
            f" to {significant(float(plan.std[worst]), 2)} GPa ({plan.names[worst]}).",
        ),
        True,
    )
