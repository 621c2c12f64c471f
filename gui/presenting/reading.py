"""View data of the reading: the pin, extremes, cutting error, aggregates, the part table."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from functools import lru_cache
from itertools import zip_longest
from typing import Any

import numpy as np

from core import live
from core.directional import waves
from core.directional.debye import debye_speed
from core.directional.extremes import Extreme
from core.directional.medium import Medium
from core.directional.quantities import QUANTITIES, Quantity, quantity
from core.directional.sphere import Directions, directions
from core.numbers import full_precision, signed, significant
from core.state import BenchState, Specimen, Vector3, claimed_class
from core.study.part import PartRow, part_table
from core.study.tolerance import cone_extremes
from core.study.uncertainty.deviations import extreme_deviations
from core.tensor.averages import anisotropy, averages, hashin_shtrikman
from core.tensor.stiffness import Stiffness
from gui.presenting.near import angle_words, near_words, place_words
from gui.presenting.sigmas import (
    DIFFERENCE_BRACKETS,
    NOTHING,
    RowSigmas,
    difference_text,
    drawn_otherwise,
    draws_notice,
    number_text,
    plain_or_bracketed,
    rounded,
    sigma_words,
)
from gui.presenting.spread import (
    IMPEDANCE,
    LONGITUDINALITY,
    SPLITTING,
    PinSpread,
    TableSpread,
    crystal_factor,
    quick_deviations,
)
from gui.presenting.stage import SHEET_NAMES, sides
from gui.viewdata import ExtremeRow, ExtremesView, ReadingRow, ReadingView, TableView

_DUST = 1e-9  # of the size of a quantity
Row = tuple[str, str, str, float, str, str]  # key, label, unit, value, tooltip, group


# ------------------------------------------------------------------ the pin
def reading_view(state: BenchState, spread: PinSpread | None = None) -> ReadingView:
    """Return the table at the pin for A and B.

    Parameters
    ----------
    state : BenchState
    spread : PinSpread, optional
        All uncertainties at this pin; without it there are those that take no time.
    """
    values = {side: pin_rows(_medium(state, side), state.pin) for side in sides(state)}
    a, b = values.get("A"), values.get("B")
    first = a or b or ()
    second = {_place_of(row): row[3] for row in b} if a and b else {}
    known = quick_deviations(state) if spread is None else spread.pin
    sigmas = RowSigmas(
        known.get(sides(state)[0], {}),
        known.get("B", {}) if second else {},
        spread.differences if spread is not None else {},
        bool(second),
        drawn_otherwise(spread, sides(state)[0]),
    )
    rows = tuple(_reading_row(row, second.get(_place_of(row)), sigmas) for row in first)
    missing = [side for side in sides(state) if state.specimen_of(side).density is None]
    notices = (
        "Waves want a density: enter it in the ledger." if missing else "",
        DIFFERENCE_BRACKETS if sigmas.difference else "",
        draws_notice(spread),
    )
    notice = " ".join(text for text in notices if text)
    return ReadingView(
        pin_words(state.pin),
        _near_words(state, "A"),
        _near_words(state, "B"),
        rows,
        bool(a and b),
        notice,
        sides(state)[0],
        _about(state),
    )


def _about(state: BenchState) -> str:
    """Return whose numbers these are, in one line for whoever pastes them."""
    parts = [
        f"{side}: {state.specimen_of(side).name}, orientation {state.orientation_of(side).text}"
        + "".join(
            f", turned {significant(angle)}° about {axis}"
            for axis, angle in zip("XYZ", state.orientation_of(side).turn, strict=True)
            if angle
        )
        for side in sides(state)
    ]
    return "; ".join((*parts, f"pin {pin_words(state.pin)}"))


def _place_of(row: Row) -> tuple[str, str]:
    """Return group and label: what a row of A and a row of B have in common."""
    return row[5], row[1]


def _medium(state: BenchState, side: str) -> Medium:
    return live.part_medium(state.specimen_of(side), state.orientation_of(side))


def pin_words(pin: Vector3) -> str:
    """Return the polar angles of the pin in part axes."""
    return f"{angle_words(np.array(pin))} in part axes"


def _near_words(state: BenchState, side: str) -> str:
    specimen = state.specimen_of(side)
    vector = live.rotation(state.orientation_of(side), specimen).T @ np.array(state.pin)
    return near_words(vector, specimen.frame)


@lru_cache(maxsize=4)
def pin_rows(medium: Medium, pin: Vector3) -> tuple[Row, ...]:
    """Return every quantity at the pin: key, label, unit, value, tooltip, group."""
    one = directions(np.array(pin).reshape(3, 1))
    rows: list[Row] = []
    for key, entry in QUANTITIES.items():
        if entry.wave:
            continue
        value = float(entry.values(medium, one)[0, 0])
        rows.append((key, entry.short, entry.unit, value, _tip(entry), "stiffness"))
    if medium.density is not None:
        rows += _wave_rows(medium, one)
    return tuple(rows)


def _tip(entry: Quantity) -> str:
    """Return what a symbol stands for, and its definition."""
    return f"{entry.name}\n{entry.definition}"


_WAVE_KEYS = tuple(key for key, entry in QUANTITIES.items() if entry.wave)


def _wave_rows(medium: Medium, one: Directions) -> list[Row]:
    """Return the waves at the pin, sheet by sheet."""
    rows: list[Row] = []
    values = {key: quantity(key).values(medium, one)[:, 0] for key in _WAVE_KEYS}
    along = waves.longitudinality(medium, one)[:, 0]
    impedance = waves.impedance(medium, one)[:, 0]
    for sheet, name in enumerate(SHEET_NAMES):
        group = f"{name} wave"
        for key in _WAVE_KEYS:
            entry = quantity(key)
            rows.append(
                (
                    key,
                    entry.short,
                    entry.unit,
                    float(values[key][sheet]),
                    _tip(entry),
                    group,
                )
            )
        rows.append(
            (
                "phase",
                LONGITUDINALITY,
                "",
                float(along[sheet]),
                "Longitudinality: 1 for a purely longitudinal wave, 0 for a pure shear wave.",
                group,
            )
        )
        rows.append(
            (
                "phase",
                IMPEDANCE,
                "MRayl",
                float(impedance[sheet]),
                "Acoustic impedance of a plane wave: Z = ρ v.",
                group,
            )
        )
    splitting = float(waves.shear_splitting(medium, one)[0])
    rows.append(
        (
            "slowness",
            SPLITTING[1],
            "ns/mm",
            splitting,
            "Shear splitting: travel time of the slowest wave less that of the middle one.",
            SPLITTING[0],
        )
    )
    return rows


def _reading_row(row: Row, other: float | None, sigmas: RowSigmas) -> ReadingRow:
    key, label, unit, value, tooltip, group = row
    place = group, label
    floor = _floor(unit)
    value = without_dust(value, floor)
    other = None if other is None else without_dust(other, floor)
    difference = None if other is None else difference_of(value, other, floor)
    text = rounded if sigmas.beside else number_text
    own = sigmas.first.get(place, 0.0)
    return ReadingRow(
        label,
        unit,
        text(value, own),
        "" if other is None else text(other, sigmas.second.get(place, 0.0)),
        ""
        if difference is None
        else difference_text(difference, sigmas.difference.get(place, 0.0)),
        (full_precision(value), full_precision(other), full_precision(difference)),
        "\n".join((tooltip, *sigma_words(unit, place, sigmas))),
        key,
        group,
    )


def without_dust(value: float, *scale: float) -> float:
    """Return zero for what only rounding keeps from it, beside sizes that count."""
    return 0.0 if abs(value) <= _DUST * max(map(abs, scale)) else value


def difference_of(first: float, second: float, floor: float) -> float:
    """Return second − first, zero where both are the same but for rounding."""
    return without_dust(second - first, first, second, floor)


def _floor(unit: str) -> float:
    """Return a size below which a unit is never of interest: pure numbers and angles are of 1.

    Other quantities may be of any size, and where they vanish they do so all but exactly.
    """
    return 1.0 if unit in ("", "°") else 1e-3


# ------------------------------------------------------------------ extremes
_EXTREMES = (
    ("young", "E", "GPa"),
    ("compressibility", "β", "1/TPa"),
    ("shear", "G", "GPa"),
    ("poisson", "ν", ""),
    ("fast", "v1", "km/s"),
    ("middle", "v2", "km/s"),
    ("slow", "v3", "km/s"),
)
_EXTREME_WORDS = {
    "E": "Young's modulus", "β": "Linear compressibility",
    "G": "Shear modulus over all pairs of directions",
    "ν": "Poisson's ratio over all pairs of directions",
    "v1": "Speed of the fastest wave", "v2": "Speed of the middle wave",
    "v3": "Speed of the slowest wave",
}  # fmt: skip
Extremes = dict[str, tuple[Extreme | None, Extreme | None]]


def extremes_view(
    specimen: Specimen,
    turn: np.ndarray,
    found: Extremes | None,
    pending: bool,
    whose: str = "",
) -> ExtremesView:
    """Return the extremes over all directions.

    Parameters
    ----------
    specimen : Specimen
    turn : ndarray, shape (3, 3)
        v_part = turn v_crystal, to say go-links in part axes.
    found : dict or None
        Crystal axes; None while nothing has been computed yet.
    pending : bool
        Whether a newer result is on its way.
    whose : str
        Which crystal this is, where there are two.
    """
    sigmas = {} if found is None or pending else _extreme_sigmas(specimen, found)
    rows = (
        []
        if found is None
        else [
            _extreme_row(
                specimen, turn, f"{label} {word}", unit, pair[which],
                sigmas.get(key, (None, None))[which],
            )
            for key, label, unit in _EXTREMES
            if (pair := found.get(key)) is not None
            for which, word in ((0, "least"), (1, "greatest"))
            if not (pair[0] is None and pair[1] is None)
        ]
    )
    return ExtremesView(
        "Extremes", tuple(rows), pending, "being found …" if found is None else "", whose
    )


def whose(state: BenchState) -> str:
    """Return which of two crystals the tables of one crystal are about."""
    if state.other is None:
        return ""
    side = state.display.ledger
    return f"crystal of {side}: {state.specimen_of(side).name}"


def _extreme_sigmas(
    specimen: Specimen, found: Extremes
) -> dict[str, tuple[float | None, float | None]]:
    """Return the uncertainties of extremes where those of the constants are known."""
    factor = crystal_factor(specimen)
    if factor is None:
        return {}
    medium = live.crystal_medium(specimen.stiffness, specimen.density)
    return extreme_deviations(medium, found, factor)


def _extreme_row(
    specimen: Specimen,
    turn: np.ndarray,
    label: str,
    unit: str,
    extreme: Extreme | None,
    sigma: float | None,
) -> ExtremeRow:
    name = f"{label}{', ' if unit else ''}{unit}"
    if extreme is None:
        return ExtremeRow(
            name, "–", "not defined", None, "Not defined: the table is unstable.", ""
        )
    crystal = np.array(extreme.direction)
    place = place_words(crystal, specimen.frame, turn)
    place = {"all": "every direction", "ring": f"ring through {place}"}.get(
        extreme.where, place
    )
    spread = f" ± {significant(sigma, 2)}" if sigma else ""
    tooltip = (
        f"{_EXTREME_WORDS[label.split()[0]]}\n"
        f"{extreme.value!r}{spread} along {extreme.direction} in crystal axes"
    )
    if extreme.transverse is not None:
        tooltip += f", transverse direction {extreme.transverse}"
    x, y, z = (turn @ crystal).tolist()
    return ExtremeRow(
        name,
        plain_or_bracketed(extreme.value, sigma or 0.0),
        place,
        (x, y, z),
        tooltip,
        full_precision(extreme.value),
    )


# ------------------------------------------------------------------ cutting error
def cutting_error_view(state: BenchState) -> TableView:
    """Return the least and the greatest of the shown quantity within the cone about the pin."""
    rows, full = [], []
    delta = state.cutting_error_deg
    for side in sides(state):
        medium = _medium(state, side)
        for key in _cone_keys(state, medium):
            entry = quantity(key)
            for sheet, cone in enumerate(
                cone_extremes(medium, np.array(state.pin), delta, key)
            ):
                label = (
                    entry.symbol
                    if entry.sheets == 1
                    else (f"{SHEET_NAMES[sheet]} {entry.symbol}")
                )
                floor = _floor(entry.unit)
                sizes = [x for x in (cone.least, cone.greatest, floor) if np.isfinite(x)]
                least, greatest, slope = (
                    without_dust(x, *sizes) for x in (cone.least, cone.greatest, cone.slope)
                )
                shown = significant(least), significant(greatest), significant(abs(slope), 3)
                exact = map(full_precision, (least, greatest, slope))
                rows.append((side, label, *shown, entry.unit))
                full.append((side, label, *exact, entry.unit))
    return TableView(
        "Cutting error",
        ("", "", "least", "greatest", "per °", "unit"),
        tuple(rows),
        tuple(full),
    )


def _cone_keys(state: BenchState, medium: Medium) -> tuple[str, ...]:
    """Return what a cutter asks about: E and the speeds, and whatever is on the stage."""
    keys = ["young"] + (["phase"] if medium.density is not None else [])
    shown = quantity(state.quantity)
    if state.quantity not in (*keys, "slowness", "wave") and (
        medium.density is not None or not shown.wave
    ):
        keys.insert(0, state.quantity)
    return tuple(keys)


# ------------------------------------------------------------------ aggregates and part
def aggregate_view(
    specimen: Specimen, spread: TableSpread | None = None, whose: str = ""
) -> TableView:
    """Return averages, bounds and indices of anisotropy, with uncertainties where known."""
    view = _aggregate(
        specimen.stiffness, specimen.density, claimed_class(specimen).key == "cubic"
    )
    view = replace(view, notice=whose)
    if spread is None or not spread.aggregate:
        return view
    sigmas = tuple(spread.aggregate.get(row[0], ()) for row in view.rows)
    return replace(view, **_with_sigmas(view.rows, view.full, sigmas, view.tooltips))


def _with_sigmas(
    rows: tuple[tuple[str, ...], ...],
    full: tuple[tuple[str, ...], ...],
    sigmas: Sequence[tuple[float, ...]],
    tooltips: tuple[str, ...],
) -> dict[str, Any]:
    """Return rows and tooltips of a table with uncertainties.

    One number in a line has its own in brackets; of several, for which there is no room, the
    tooltip tells.
    """
    shown, tips = [], []
    for row, exact, known, tip in zip(rows, full, sigmas, tooltips, strict=True):
        values = [float(text) if text else None for text in exact[1:]]
        many = sum(value is not None for value in values) > 1
        text = rounded if many else plain_or_bracketed
        cells = [
            cell if value is None or not sigma else text(value, sigma)
            for cell, value, sigma in zip_longest(row[1:], values, known)
        ]
        shown.append((row[0], *cells))
        spreads = ", ".join(significant(sigma, 2) for sigma in known if sigma > NOTHING)
        tips.append(f"{tip}\n± {spreads}: one standard uncertainty." if spreads else tip)
    return {"rows": tuple(shown), "tooltips": tuple(tips)}


@lru_cache(maxsize=8)
def _aggregate(table: Any, density: float | None, cubic: bool) -> TableView:
    stiffness = Stiffness.from_voigt(np.array(table))
    means = averages(stiffness)
    bounds = hashin_shtrikman(stiffness)
    index = anisotropy(stiffness, cubic)
    lines: list[tuple[str, tuple[float, ...], str]] = [
        (name, (mean.bulk, mean.shear, mean.young, mean.poisson), tip)
        for name, mean, tip in (
            ("Voigt", means.voigt, "Uniform strain: the upper bound."),
            ("Hill", means.hill, "The mean of Voigt and Reuss (Hill 1952)."),
            ("Reuss", means.reuss, "Uniform stress: the lower bound."),
        )
    ]
    lines += [
        (
            "H–S, upper",
            (bounds.bulk_high, bounds.shear_high),
            "Hashin–Shtrikman: closest upper bound on a random polycrystal without texture.",
        ),
        (
            "H–S, lower",
            (bounds.bulk_low, bounds.shear_low),
            "Hashin–Shtrikman: closest lower bound on a random polycrystal without texture.",
        ),
        (
            "A universal",
            (without_dust(index.universal, 1.0),),
            "Universal anisotropy: 5 G_V/G_R + K_V/K_R − 6 (Ranganathan & Ostoja-Starzewski"
            " 2008); 0 when isotropic.",
        ),
        (
            "A log-Euclid",
            (without_dust(index.log_euclidean, 1.0),),
            "Log-Euclidean anisotropy: √[ln²(K_V/K_R) + 5 ln²(G_V/G_R)] (Kube 2016); 0 when"
            " isotropic.",
        ),
        (
            "A % of K, G",
            tuple(without_dust(x, 1.0) for x in (index.percent_bulk, index.percent_shear)),
            "Percent anisotropy: 100 (K_V − K_R)/(K_V + K_R), and the same of G (Chung &"
            " Buessem 1967).",
        ),
    ]
    if index.zener is not None:
        lines.append(("Zener ratio", (index.zener,), "2 C44/(C11 − C12), cubic crystals only."))
    if density is not None:
        lines.append(
            (
                "Debye, km/s",
                (debye_speed(Medium(stiffness, density)).speed,),
                "Debye speed: (⟨Σ v⁻³⟩/3)^(−1/3) over all directions and the three waves.",
            )
        )
    return TableView(
        "Aggregate",
        ("", "K GPa", "G GPa", "E GPa", "ν"),
        tuple(_padded(label, values, significant) for label, values, _ in lines),
        tuple(_padded(label, values, full_precision) for label, values, _ in lines),
        tuple(tip for *_, tip in lines),
    )


def _padded(
    label: str, values: tuple[float, ...], text: Callable[[float | None], str]
) -> tuple[str, ...]:
    return label, *(text(value) for value in values), *[""] * (4 - len(values))


def part_view(state: BenchState, spread: TableSpread | None = None) -> TableView:
    """Return E, ν, G, coupling, speeds and power flow along the part axes for A and B.

    With uncertainties where they are known.
    """
    tables = {side: _part(_medium(state, side)) for side in sides(state)}
    first = tables.get("A") or tables["B"]
    second = {row.key: row.value for row in tables["B"]} if len(tables) == 2 else {}
    header = ("", "A", "B", "B − A") if second else ("", sides(state)[0])
    rows = tuple(_part_row(row, second, significant, lambda x: signed(x, 3)) for row in first)
    full = tuple(_part_row(row, second, full_precision, full_precision) for row in first)
    view = TableView("Part", header, rows, full, tuple(_part_words(row) for row in first))
    if spread is None or not spread.part:
        return view
    sigmas = _part_sigmas(state, tables, spread)
    return replace(view, **_with_sigmas(rows, full, sigmas, view.tooltips))


def _part_sigmas(
    state: BenchState, tables: dict[str, tuple[PartRow, ...]], spread: TableSpread
) -> list[tuple[float, ...]]:
    """Return the uncertainties of A and B, or of the one side shown, row by row."""
    by_key = {
        side: dict(zip([row.key for row in rows], spread.part[side].tolist(), strict=True))
        for side, rows in tables.items()
        if side in spread.part
    }
    first = tables[sides(state)[0]]
    return [
        tuple(by_key.get(side, {}).get(row.key, 0.0) for side in sides(state)) for row in first
    ]


@lru_cache(maxsize=4)
def _part(medium: Medium) -> tuple[PartRow, ...]:
    return part_table(medium)


_PART_SYMBOLS = tuple(
    (f"{name} wave{words}", f"{letter}{number}")
    for number, name in enumerate(SHEET_NAMES, start=1)
    for words, letter in ((": power flow off", "ψ"), ("", "v"))
)


def _part_words(row: PartRow) -> str:
    return f"{row.label}{', ' if row.unit else ''}{row.unit}"


def _part_row(
    row: PartRow, second: dict[str, float], text: Any, difference_text: Any
) -> tuple[str, ...]:
    label = _part_words(row)
    for words, symbol in _PART_SYMBOLS:
        label = label.replace(words, symbol)
    floor = _floor(row.unit)
    value = without_dust(row.value, floor)
    if not second:
        return label, text(value)
    other = without_dust(second.get(row.key, float("nan")), floor)
    return label, text(value), text(other), difference_text(difference_of(value, other, floor))
