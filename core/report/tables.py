"""The tables and sentences of a report, one function a section, with numbers as text.

Every function takes what it needs of a bench and returns blocks; `lead` is "A: " or "B: " where
a report has two crystals, and stands before titles.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from core import live
from core.arrays import FloatArray
from core.crystal.cell import axes_note, axes_words, cell_mismatch
from core.crystal.directions import Direction, nearest_indices
from core.crystal.orientation import WAYS, misorientation, orientation_texts
from core.crystal.turning import axis_and_angle
from core.directional.quantities import quantity
from core.errors import InputError
from core.files.origin import orientation_words
from core.numbers import MINUS, signed, significant, with_deviation
from core.report.blocks import Block, Paragraph, Table
from core.report.captions import plain_orientation
from core.state import BenchState, Specimen, claimed_class, stiffness_of
from core.study.tolerance import cone_extremes
from core.study.trust.plausibility import plausibility_notes
from core.study.trust.symmetry_verdict import symmetry_verdict
from core.study.uncertainty.changes import deviations_of
from core.study.verdict import NOTABLE_DISTANCE, Verdict, judge
from core.summary import along_direction
from core.tensor.hidden_axes import HiddenAxes
from core.tensor.notation import VOIGT_PAIRS
from core.tensor.stability import assess, criteria
from core.tensor.symmetry import crystal_class, dependence_text, distance, laue_rotations

SHEETS = ("fastest", "middle", "slowest")
_ROWS = tuple(f"{i + 1}{j + 1}" for i, j in VOIGT_PAIRS)
_DUST = 1e-12  # of the largest of a table: what is smaller is zero but for rounding
_EXACT_PERCENT = 1e-6  # a distance this small is none but for rounding
_FLAT = 1e-8  # per degree: a slope this small is none but for rounding
_NO_BREAK = "\N{NO-BREAK SPACE}\N{NO-BREAK SPACE}"
_SAME_ANGLE = 5e-3  # degrees: nearer to a lattice direction is along it


# --- the specimen ---------------------------------------------------------------------------


def title_block(specimen: Specimen, lead: str) -> list[Block]:
    """Return what is known of a crystal besides its constants."""
    claimed = claimed_class(specimen)
    rows = [
        ("name", specimen.name),
        ("source of the constants", specimen.source or "not stated"),
        ("crystal class", f"{claimed.name} ({claimed.groups})"),
        ("unit cell", _cell_words(specimen)),
        ("crystal axes x, y, z", _axes_words(specimen)),
        ("density", "not known; waves are left out" if specimen.density is None else
         f"{specimen.density:g} kg/m³"),
        ("temperature", "not stated" if specimen.temperature_c is None else
         f"{specimen.temperature_c:g} °C".replace("-", MINUS)),
    ]
    if specimen.notes:
        rows.append(("notes", specimen.notes))
    return [Table((), tuple(rows), lead.rstrip(": "), words=2)]


def _cell_words(specimen: Specimen) -> str:
    cell = specimen.cell
    if cell is None:
        return "not given"
    mismatch = cell_mismatch(cell, specimen.crystal_class, specimen.unique_axis)
    lengths = f"a {cell.a:g}, b {cell.b:g}, c {cell.c:g} Å"
    angles = f"α {cell.alpha:g}°, β {cell.beta:g}°, γ {cell.gamma:g}°"
    return "; ".join(word for word in (
        lengths, angles, f"volume {significant(cell.volume)} Å³", mismatch) if word)


def _axes_words(specimen: Specimen) -> str:
    if specimen.cell is not None:
        return axes_words(specimen.crystal_axes)
    return "those of the table; no cell is given to tie them to"


def deviations(specimen: Specimen) -> FloatArray | None:
    """Return the standard uncertainties of the constants, (6, 6), GPa, or None."""
    if specimen.covariance is not None:
        return deviations_of(np.array(specimen.covariance))
    return None if specimen.stiffness_std is None else np.array(specimen.stiffness_std)


# --- verdict, constants, stability, symmetry ------------------------------------------------


def verdict_of(specimen: Specimen) -> Verdict:
    """Return the verdict on a crystal's table."""
    std = None if specimen.stiffness_std is None else np.array(specimen.stiffness_std)
    covariance = None if specimen.covariance is None else np.array(specimen.covariance)
    return judge(stiffness_of(specimen), claimed_class(specimen), std, covariance)


def oddities(specimen: Specimen, lead: str) -> list[Block]:
    """Return what is odd about a crystal for a solid: units, rows, density, axes."""
    axes = "" if specimen.cell is None else axes_words(specimen.crystal_axes)
    notes = plausibility_notes(stiffness_of(specimen), specimen.density,
                               claimed_class(specimen), axes)
    return [Paragraph(f"{lead}{note}", "bullet") for note in notes]


def spectrum(specimen: Specimen, lead: str) -> Table:
    """Return the six eigenstiffnesses with their strains."""
    found = assess(stiffness_of(specimen))
    rows = tuple(
        (str(number), significant(float(value)), words)
        for number, (value, words) in enumerate(
            zip(found.eigenstiffness, found.descriptions, strict=True), start=1))
    return Table(("", "GPa", "strain"), rows, f"{lead}Eigenstiffnesses (Kelvin form)",
                 "The crystal is stable when all six are positive.", trailing_words=1)


def constants(specimen: Specimen, lead: str) -> list[Block]:
    """Return stiffness with uncertainties, the compliance, and what follows from what."""
    claimed = claimed_class(specimen)
    table = np.array(specimen.stiffness)
    std = deviations(specimen)
    spread = std if std is not None else np.zeros((6, 6))
    rows = tuple(
        (_ROWS[i], *(_constant(table[i, j], spread[i, j], claimed.kinds[min(i, j)][max(i, j)])
                     for j in range(6)))
        for i in range(6))
    sure = "± one standard uncertainty" if std is not None else "no uncertainties are given"
    blocks: list[Block] = [
        Table(("", *_ROWS), rows, f"{lead}Stiffness C, GPa, crystal axes",
              f"Voigt order; {sure}; a dot is a zero by symmetry."),
        _compliance(specimen, lead),
    ]
    follows = [dependence_text(claimed, i, j) for i in range(6) for j in range(i, 6)
               if claimed.kinds[i][j] == "dependent"]
    if follows:
        blocks.append(Paragraph(f"{lead}By symmetry {', '.join(follows)}.", "note"))
    return blocks


def _constant(value: float, spread: float, kind: str) -> str:
    if value == 0.0 and kind == "zero":
        return "·"
    return with_deviation(float(value), float(spread))


def _compliance(specimen: Specimen, lead: str) -> Block:
    try:
        table = 1e3 * stiffness_of(specimen).compliance
    except InputError as error:
        return Paragraph(f"{lead}Compliance: {error}", "alert")
    return Table(("", *_ROWS), _matrix_rows(table), f"{lead}Compliance S, 1/TPa, crystal axes",
                 "Engineering shears, γ = 2ε.")


def _matrix_rows(table: FloatArray) -> tuple[tuple[str, ...], ...]:
    dust = _DUST * float(np.abs(table).max())
    return tuple(
        (name, *(significant(0.0 if abs(x) < dust else float(x)) for x in row))
        for name, row in zip(_ROWS, table, strict=True))


def stability(specimen: Specimen, lead: str) -> list[Block]:
    """Return the closed criteria of the class with their values."""
    claimed = claimed_class(specimen)
    rows = tuple((item.text, significant(item.value), item.unit,
                  "holds" if item.holds else "FAILS")
                 for item in criteria(np.array(specimen.stiffness), claimed))
    away = distance(np.array(specimen.stiffness), claimed) > NOTABLE_DISTANCE
    note = "They read the free cells of the class only; this table departs from it." if (
        away) else ""
    return [Table(("criterion", "value", "unit", ""), rows,
                  f"{lead}Criteria of the class: {claimed.name}", note, trailing_words=2)]


def symmetry(specimen: Specimen, found: Mapping[str, Any], lead: str) -> list[Block]:
    """Return how far the table is from the class it claims, and from others in their axes.

    Parameters
    ----------
    specimen : Specimen
    found : mapping
        The part of `core.summary.summarise` on the symmetry.
    lead : str
    """
    blocks: list[Block] = [Paragraph(f"{lead}{_claim_words(specimen, found)}")]
    hidden = hidden_of(specimen, found)
    if hidden is not None:
        blocks += _hidden_blocks(specimen, hidden, lead)
    rows = tuple((crystal_class(entry["class"]).name, _percent(entry["distance_percent"]))
                 for entry in found["nearest"])
    return [*blocks, Table(("class", "distance, %"), rows,
                           f"{lead}Distance to each class in the axes that suit it best")]


def _claim_words(specimen: Specimen, found: Mapping[str, Any]) -> str:
    claimed = claimed_class(specimen)
    if claimed.key == "triclinic":
        return ("No class is claimed, or the triclinic one: any table with 21 independent "
                "constants has it.")
    percent = found["as_entered_percent"]
    away = ("has exactly the form of the class it claims" if
            percent <= 100 * NOTABLE_DISTANCE else
            f"is {significant(percent, 3)} % away from the class it claims")
    return (f"In the axes given the table {away}: {claimed.name}, point groups "
            f"{claimed.groups}, {len(claimed.independent)} independent constants.")


def _percent(distance_percent: float) -> str:
    """Return a distance, percent; what only rounding keeps from zero is "exact"."""
    return "exact" if distance_percent < _EXACT_PERCENT else significant(distance_percent, 3)


def hidden_of(specimen: Specimen, found: Mapping[str, Any]) -> HiddenAxes | None:
    """Return the axes in which a table has more symmetry than in its own; None without any.

    `found` is the part of `core.summary.summarise` on the symmetry.
    """
    classes = tuple(_hidden_axes(specimen, entry) for entry in found["nearest"])
    return symmetry_verdict(stiffness_of(specimen), classes, deviations(specimen)).hidden


def _hidden_axes(specimen: Specimen, entry: Mapping[str, Any]) -> HiddenAxes:
    rotation = np.array(entry["axes"])
    axis, angle = axis_and_angle(rotation.T)
    x, y, z = axis.tolist()
    return HiddenAxes(entry["class"], specimen.unique_axis, entry["distance_percent"], np.nan,
                      rotation, float(angle), (x, y, z))


def _hidden_blocks(specimen: Specimen, hidden: HiddenAxes, lead: str) -> list[Block]:
    """Return that the axes look wrong, and the axes in which the table is more symmetric."""
    name = crystal_class(hidden.class_key).name
    close = _percent(hidden.distance_percent)
    within = "exactly" if close == "exact" else f"within {close} %"
    sentence = (
        f"{lead}The axes look wrong: turned by {hidden.turn_deg:.2f}° the table is {name} "
        f"{within}. Check the axes against where the constants came from.")
    rows = tuple((f"axis {letter}", *(_component(x) for x in row), place(row, specimen))
                 for letter, row in zip("xyz", hidden.rotation, strict=True))
    table = Table(("", "x", "y", "z", "in the lattice"), rows,
                  f"{lead}Axes in which the table is {name}",
                  "Components along the axes of the table as given.", trailing_words=1)
    return [Paragraph(sentence, "doubt"), table]


# --- axes and orientations ------------------------------------------------------------------


def axes_statements(specimen: Specimen, lead: str) -> list[Block]:
    """Return how the crystal axes lie in the cell, in sentences."""
    words = _axes_words(specimen)
    note = "" if specimen.cell is None else axes_note(specimen.cell, specimen.crystal_axes)
    sentence = f"{lead}The table is given in Cartesian crystal axes: {words}."
    return [Paragraph(f"{sentence} {note}".rstrip())]


def orientation(state: BenchState, side: str) -> list[Block]:
    """Return how the part lies in the crystal: in the user's words, as a matrix, otherwise."""
    specimen, choice = state.specimen_of(side), state.orientation_of(side)
    turn = live.rotation(choice, specimen)
    rows = tuple(
        (f"part {axis}", *(_component(x) for x in row), place(row, specimen))
        for axis, row in zip("XYZ", turn, strict=True))
    table = Table(("", "x", "y", "z", "in the lattice"), rows,
                  f"{side}: {plain_orientation(orientation_words(choice))}",
                  "Rows of R, v_part = R v_crystal: part axes in crystal axes.",
                  trailing_words=1)
    said = orientation_texts(turn, specimen.frame)
    others = "; ".join(f"{WAYS[way]}: {text}" for way, text in said.items()
                       if way in ("bunge", "cut") and text != choice.text)
    return [table, Paragraph(f"{side} said otherwise: {plain_orientation(others)}", "note")]


def turned_apart(state: BenchState) -> list[Block]:
    """Return how far the two parts are turned against each other."""
    turn_a, turn_b = (live.rotation(state.orientation_of(side), state.specimen_of(side))
                      for side in "AB")
    plain = misorientation(turn_a, turn_b)
    sentence = f"B is turned from A by {significant(plain.angle_deg)}°"
    if state.other is None:
        least = misorientation(turn_a, turn_b, laue_rotations(claimed_class(state.specimen)))
        if least.angle_deg < plain.angle_deg - 1e-9:
            sentence += f", by {significant(least.angle_deg)}° seen with the crystal's symmetry"
    return [Paragraph(f"{sentence}.")]


def place(vector: Sequence[float] | FloatArray, specimen: Specimen) -> str:
    """Return the lattice direction or plane normal nearest to a vector (crystal axes)."""
    if not specimen.frame.has_basis:
        return ""
    array = np.asarray(vector, dtype=float)
    direction = nearest_indices(array, specimen.frame)
    plane = nearest_indices(array, specimen.frame, plane=True)
    best = plane if plane.angle_deg < direction.angle_deg - 1e-6 else direction
    text = best.text.replace("-", MINUS)
    if best.angle_deg < _SAME_ANGLE:
        return text
    return f"{significant(best.angle_deg, 2)}° from {text.replace(' ', _NO_BREAK[0])}"


def _component(x: float) -> str:
    return f"{round(float(x), 5) + 0.0:.5f}".replace("-", MINUS)


def _vector(vector: Sequence[float]) -> str:
    texts = (f"{round(float(x), 4) + 0.0:.4f}".replace("-", MINUS) for x in vector)
    return _NO_BREAK.join(texts)


# --- averages and extremes ------------------------------------------------------------------

_INDICES = (
    ("universal", "universal index", ""),
    ("log_euclidean", "log-Euclidean index", ""),
    ("percent_bulk", "percent anisotropy of K", "%"),
    ("percent_shear", "percent anisotropy of G", "%"),
    ("zener", "Zener ratio", ""),
)
_COUNTS = {1: "one", 2: "two", 3: "three", 4: "four"}
_EXTREMES = (
    ("young_gpa", "E", "GPa"),
    ("linear_compressibility_per_tpa", "β", "1/TPa"),
    ("shear_gpa", "G", "GPa"),
    ("poisson", "ν", ""),
    ("fast_km_s", "fastest wave", "km/s"),
    ("middle_km_s", "middle wave", "km/s"),
    ("slow_km_s", "slowest wave", "km/s"),
)


def averages(summary: Mapping[str, Any], lead: str) -> list[Block]:
    """Return the averages and bounds of a polycrystal, and the indices of anisotropy."""
    found = summary["averages"]
    rows = [
        (words, *(significant(found[key][name]) for name in
                  ("bulk_gpa", "shear_gpa", "young_gpa", "poisson")))
        for key, words in (("voigt", "Voigt"), ("hill", "Hill"), ("reuss", "Reuss"))]
    bounds = found["hashin_shtrikman"]
    rows += [(f"Hashin–Shtrikman, {words}", significant(bounds[f"bulk_{end}_gpa"]),
              significant(bounds[f"shear_{end}_gpa"]), "", "")
             for end, words in (("high", "upper"), ("low", "lower"))]
    known = {key: value for key, value in summary["anisotropy"].items() if value is not None}
    indices = [(label, significant(_without_dust(known[key])), unit)
               for key, label, unit in _INDICES if key in known]
    if summary["density_kg_m3"] is not None:
        indices.append(("Debye speed", significant(summary["debye_speed_km_s"]), "km/s"))
    return [
        Table(("", "K, GPa", "G, GPa", "E, GPa", "ν"), tuple(rows),
              f"{lead}Polycrystal without texture"),
        Table(("", "value", "unit"), tuple(indices), f"{lead}Anisotropy",
              _isotropic_words(known), trailing_words=1),
    ]


def _isotropic_words(known: Mapping[str, float]) -> str:
    """Return what the indices of an isotropic body are, of those that are there."""
    zeros = [key for key, _, _ in _INDICES if key in known and key != "zener"]
    if not zeros:
        return ""
    ratio = ", the Zener ratio is 1" if "zener" in known else ""
    return f"The first {_COUNTS[len(zeros)]} are 0 for an isotropic body{ratio}."


def _without_dust(value: float) -> float:
    return 0.0 if abs(value) < _DUST else value


def extremes(specimen: Specimen, found: Mapping[str, Any], lead: str) -> list[Block]:
    """Return the least and the greatest of every quantity with where they are."""
    rows = [
        (f"{label}{', ' if unit else ''}{unit}", word, *_extreme(found[key][end], specimen))
        for key, label, unit in _EXTREMES
        if found[key]["min"] is not None or found[key]["max"] is not None
        for end, word in (("min", "least"), ("max", "greatest"))]
    return [Table(("", "", "value", "along", "x, y, z", "across"), tuple(rows),
                  f"{lead}Crystal axes", "“Across”: the direction m of the shear, or of the "
                  "widening, in crystal axes.", words=2, trailing_words=3)]


def _extreme(found: Mapping[str, Any] | None, specimen: Specimen) -> tuple[str, ...]:
    """Return value, place, components and transverse direction of an extreme."""
    if found is None:
        return "–", "not defined", "", ""
    value = significant(found["value"])
    if found["set"] == "all":
        return value, "every direction", "", ""
    where = place(found["direction"], specimen)
    if found["set"] == "ring":
        where = f"ring through {where}".strip()
    across = "" if found["transverse"] is None else _vector(found["transverse"])
    return value, where, _vector(found["direction"]), across


# --- the pin, A against B, the part, the cutting error --------------------------------------

_ALONG = (
    ("young_gpa", "Young's modulus E, GPa"),
    ("linear_compressibility_per_tpa", "linear compressibility β, 1/TPa"),
    ("shear_min_gpa", "shear modulus G, least, GPa"),
    ("shear_max_gpa", "shear modulus G, greatest, GPa"),
    ("poisson_min", "Poisson's ratio ν, least"),
    ("poisson_max", "Poisson's ratio ν, greatest"),
)
_SHEET_ROWS = (
    ("speed_km_s", "phase speed v, km/s"),
    ("longitudinality", "|p·n|"),
    ("power_flow_deg", "power-flow angle ψ, °"),
    ("focusing", "focusing A"),
)


def pin(state: BenchState, sides: str) -> tuple[Block, ...]:
    """Return every quantity along the pin."""
    found = {side: _at_pin(state, side) for side in sides}
    where = "; ".join(
        f"{side}: {near}" for side in sides
        if (near := place(live.rotation(state.orientation_of(side), state.specimen_of(side)).T
                          @ np.array(state.pin), state.specimen_of(side))))
    labels = [label for label, _ in found[sides[0]]]
    if any([label for label, _ in found[side]] != labels for side in sides):
        labels = labels[: len(_ALONG)]  # one of the crystals has no density
    values = [dict(found[side]) for side in sides]
    rows = tuple(_compared(label, [value[label] for value in values]) for label in labels)
    words = f"The pin points along {_vector(state.pin)} in part axes"
    return (Paragraph(f"{words} ({where})." if where else f"{words}."),
            Table(_compared_header(sides), rows))


def _at_pin(state: BenchState, side: str) -> list[tuple[str, float | None]]:
    x, y, z = state.pin
    medium = live.part_medium(state.specimen_of(side), state.orientation_of(side))
    found = along_direction(medium, Direction((x, y, z), "pin", "vector"))
    rows = [(label, found[key]) for key, label in _ALONG]
    for name, sheet in zip(SHEETS, found["sheets"] or (), strict=False):
        rows += [(f"{name} wave: {label}", sheet[key]) for key, label in _SHEET_ROWS]
    return rows


def _compared_header(sides: str) -> tuple[str, ...]:
    return ("", "A", "B", "B − A") if len(sides) == 2 else ("", sides)


def _compared(label: str, values: Sequence[float | None]) -> tuple[str, ...]:
    """Return a row with one value, or with two and their difference."""
    clean = [0.0 if value is not None and abs(value) < _DUST else value for value in values]
    texts = tuple(significant(value) for value in clean)
    if len(clean) == 1:
        return (label, *texts)
    return (label, *texts, _difference(*clean))


def _difference(first: float | None, second: float | None) -> str:
    """Return B − A with its sign; what only rounding keeps from zero is zero."""
    if first is None or second is None:
        return significant(None)
    change = second - first
    return "0" if abs(change) <= _DUST * max(abs(first), abs(second)) else signed(change, 3)


def comparison(found: Mapping[str, Any]) -> tuple[Block, ...]:
    """Return A, B and B − A along the part axes; `found` is from `core.summary.compare`."""
    rows = tuple(
        _compared(f"{row['label']}{', ' if row['unit'] else ''}{row['unit']}",
                  [row["a"], row["b"]]) for row in found["rows"])
    sentence = f"The parts are turned against each other by {_angle(found)}°."
    return (Paragraph(sentence),
            Table(_compared_header("AB"), rows, note="1, 2, 3 stand for X, Y, Z. η i,j: strain "
                  "i per strain j when only stress j acts."))


def _angle(found: Mapping[str, Any]) -> str:
    return significant(found["misorientation_deg"])


def part(state: BenchState, side: str) -> list[Block]:
    """Return stiffness and compliance in part axes: what a model of the part wants."""
    stiffness = live.part_medium(state.specimen_of(side), state.orientation_of(side)).stiffness
    blocks: list[Block] = [Table(("", *_ROWS), _matrix_rows(np.array(stiffness.voigt)),
                                 f"{side}: stiffness C, GPa, part axes")]
    try:
        compliance = 1e3 * stiffness.compliance
    except InputError as error:
        return [*blocks, Paragraph(f"{side}: compliance: {error}", "alert")]
    return [*blocks, Table(("", *_ROWS), _matrix_rows(compliance),
                           f"{side}: compliance S, 1/TPa, part axes",
                           "Engineering shears, γ = 2ε.")]


def cutting_error(state: BenchState, sides: str) -> tuple[Block, ...]:
    """Return least and greatest within the cone of the cutting error about the pin."""
    delta = state.cutting_error_deg
    rows = []
    for side in sides:
        medium = live.part_medium(state.specimen_of(side), state.orientation_of(side))
        keys = ["young", *(["phase"] if medium.density is not None else [])]
        shown = quantity(state.quantity)
        if shown.key not in (*keys, "slowness", "wave") and (
                medium.density is not None or not shown.wave):
            keys.append(shown.key)
        for key in keys:
            entry = quantity(key)
            unit = f"{', ' if entry.unit else ''}{entry.unit}"
            for sheet, cone in enumerate(
                    cone_extremes(medium, np.array(state.pin), delta, key)):
                name = entry.name if entry.sheets == 1 else f"{entry.name}, {SHEETS[sheet]}"
                flat = abs(cone.slope) < _FLAT * abs(cone.value)
                slope = 0.0 if flat else abs(cone.slope)
                numbers = (cone.value, cone.least, cone.greatest, slope)
                rows.append((side, name + unit, *map(_bounded, numbers)))
    return (Table(("", "", "at the pin", "least", "greatest", "per °"), tuple(rows),
                  f"Within ±{delta:g}° of the pin", words=2),)


def _bounded(value: float) -> str:
    return "no bound" if np.isinf(value) else significant(value)
