"""Summaries as pages for a person: the same dicts that `--json` prints, in columns of text."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Any

from core.numbers import MINUS, UNDEFINED, significant
from core.tensor.symmetry import crystal_class

Data = dict[str, Any]
Page = Callable[[Any], str]

_DUST = 1e-9  # of what is shown with four digits: an index or a percentage below it is zero
_EXACT = 1e-7  # percent
_PRINTED = 0.01  # percent: what the rounding of a table of five digits leaves
_WIDE = 31  # columns of labels
_EXTREMES = (
    ("young_gpa", "Young's modulus, GPa"),
    ("linear_compressibility_per_tpa", "linear compressibility, 1/TPa"),
    ("shear_gpa", "shear modulus, GPa"),
    ("poisson", "Poisson's ratio"),
    ("fast_km_s", "fastest wave, km/s"),
    ("middle_km_s", "middle wave, km/s"),
    ("slow_km_s", "slowest wave, km/s"),
)
_ACROSS = {"shear_gpa": "   sheared towards", "poisson": "   contracting along"}
_OF_AN_UNSTABLE_TABLE = (
    "The table is unstable: a least value is the least of the positive values, and – stands",
    "where a quantity is not defined or has no bound, for some strain meets no resistance.",
)
_VALUE = 12  # columns of a value
_INDICES = (
    ("universal", "Universal index"),
    ("log_euclidean", "Log-Euclidean index"),
    ("percent_bulk", "Percent anisotropy of K"),
    ("percent_shear", "Percent anisotropy of G"),
    ("zener", "Zener ratio"),
)
_ALONG = (
    ("young_gpa", "Young's modulus, GPa"),
    ("linear_compressibility_per_tpa", "linear compressibility, 1/TPa"),
    ("shear_min_gpa", "shear modulus, least, GPa"),
    ("shear_max_gpa", "shear modulus, greatest, GPa"),
    ("poisson_min", "Poisson's ratio, least"),
    ("poisson_max", "Poisson's ratio, greatest"),
)
CAUTION = (
    "Linear elastic, single crystal: says nothing of strength, fatigue or residual stress.\n"
    "Parts under load or pressure are decided by codes and licensed or certified people.\n"
)


# --- summary --------------------------------------------------------------------------------


def summaries(found: Data | list[Data]) -> str:
    """Return one page a specimen."""
    return "\n".join(summary(one) for one in (found if isinstance(found, list) else [found]))


def summary(data: Data) -> str:
    """Return the page of one specimen: see `core.summary.summarise`."""
    blocks = [
        [data["name"], "=" * len(data["name"]), data["verdict"]],
        _fact_lines(data),
        _symmetry_lines(data["symmetry"]["nearest"]),
        _average_lines(data["averages"]),
        _index_lines(data["anisotropy"]),
        _extreme_lines(data["extremes"], data["stable"]),
        [f"Note: {note}" for note in data["notes"]],
        [CAUTION],
    ]
    return "\n\n".join("\n".join(block) for block in blocks if block)


def _fact_lines(data: Data) -> list[str]:
    density, debye = data["density_kg_m3"], data["debye_speed_km_s"]
    facts = {
        "Eigenstiffnesses (Kelvin), GPa": "  ".join(
            map(significant, data["eigenstiffness_gpa"])
        ),
        "Density": f"{significant(density)} kg/m³" if density else "not known: no waves",
        "Debye speed": f"{significant(debye)} km/s" if debye else "not defined",
        "Claimed class": _claim(data["symmetry"]),
    }
    return [f"{label:{_WIDE}} {value}" for label, value in facts.items()]


def _claim(symmetry: Data) -> str:
    """Return in words which class is claimed and whether the table has it.

    A triclinic crystal claims no symmetry: of it is said which class its table has.
    """
    claimed, off = symmetry["declared"], symmetry["as_entered_percent"]
    if claimed == "triclinic":
        return f"none claimed{_fit_words(symmetry['nearest'])}"
    if off < _DUST:
        return f"{claimed}, exactly in these axes"
    return f"{claimed}, {significant(off, 3)} % away in these axes"


def _fit_words(nearest: list[Data]) -> str:
    """Return which is the simplest class that a table has, to the digits of a printed one."""
    fitting = [row for row in nearest
               if row["distance_percent"] < _PRINTED and row["class"] != "triclinic"]
    if not fitting:
        return ""
    best = min(fitting, key=lambda row: len(crystal_class(row["class"]).independent))
    percent = best["distance_percent"]
    how = "exactly" if percent < _EXACT else f"within {significant(percent, 2)} %"
    return f"; fits {best['class']} {how}"


def _symmetry_lines(nearest: list[Data]) -> list[str]:
    """Return how near every class is, and along what its axes lie in those of the table."""
    lines = [f"{'Nearest table of class':24}{'distance':>9}   axes x; y; z of the class"]
    for row in nearest:
        percent = row["distance_percent"]
        distance = "exact" if percent < _EXACT else f"{significant(percent, 3)} %"
        axes = "; ".join(_vector(axis, 3).strip() for axis in row["axes"])
        lines.append(f"   {row['class']:21}{distance:>9}   {axes}")
    return lines


def _average_lines(averages: Data) -> list[str]:
    lines = [f"{'Polycrystal':14}{'K GPa':>12}{'G GPa':>12}{'E GPa':>12}{'ν':>12}"]
    for name, label in (("voigt", "Voigt"), ("hill", "Hill"), ("reuss", "Reuss")):
        numbers = (
            significant(averages[name][key])
            for key in ("bulk_gpa", "shear_gpa", "young_gpa", "poisson")
        )
        lines.append(f"{label:14}" + "".join(f"{number:>12}" for number in numbers))
    bounds = averages["hashin_shtrikman"]
    if bounds["bulk_low_gpa"] is None:
        return lines
    ranges = (
        f"{letter} {significant(bounds[f'{key}_low_gpa'])} to "
        f"{significant(bounds[f'{key}_high_gpa'])}"
        for key, letter in (("bulk", "K"), ("shear", "G"))
    )
    return [*lines, f"Hashin–Shtrikman bounds: {', '.join(ranges)} GPa"]


def _index_lines(indices: Data) -> list[str]:
    known = ((label, indices[key]) for key, label in _INDICES if indices[key] is not None)
    return [
        f"{label:{_WIDE}} {significant(0.0 if abs(value) < _DUST else value)}"
        for label, value in known
    ]


def _extreme_lines(extremes: Data, is_stable: bool) -> list[str]:
    lines = [
        f"{'Over all directions':{_WIDE}}{'least':>{_VALUE}}  {'along':28}"
        f"{'greatest':>{_VALUE}}  along"
    ]
    for key, label in _EXTREMES:
        least, greatest = extremes[key]["min"], extremes[key]["max"]
        line = (
            f"{label:{_WIDE}}{_value(least)}  {_place(least):28}"
            f"{_value(greatest)}  {_place(greatest)}"
        )
        lines.append(line.rstrip())
        if _across(least) or _across(greatest):
            across = f"{_ACROSS[key]:{_WIDE}}{'':{_VALUE}}  {_across(least):28}"
            lines.append(f"{across}{'':{_VALUE}}  {_across(greatest)}".rstrip())
    return lines if is_stable else [*lines, *_OF_AN_UNSTABLE_TABLE]


def _value(found: Data | None) -> str:
    return f"{significant(None if found is None else found['value']):>{_VALUE}}"


def _across(found: Data | None) -> str:
    """Return the second direction that a shear modulus or Poisson's ratio goes with."""
    if found is None or found["transverse"] is None or found["set"] == "all":
        return ""
    return _vector(found["transverse"], 3)


def _place(found: Data | None) -> str:
    if found is None:
        return ""
    if found["set"] == "all":
        return "every direction"
    words = _vector(found["direction"], 3)
    return f"{words}, ring" if found["set"] == "ring" else words


# --- along ----------------------------------------------------------------------------------


def along_page(name: str, texts: Sequence[str]) -> Page:
    """Return the writer of a page of directions; see `core.summary.along`."""

    def page(found: Data | list[Data]) -> str:
        each = found if isinstance(found, list) else [found]
        return f"{name}\n" + "".join(
            f"\nAlong {text}\n" + "\n".join(_along_lines(data)) + "\n"
            for text, data in zip(texts, each, strict=True)
        )

    return page


def _along_lines(data: Data) -> list[str]:
    lines = [f"   {'unit vector, crystal axes':{_WIDE}} {_vector(data['direction'])}"]
    lines += [f"   {label:{_WIDE}} {significant(data[key]):>{_VALUE}}" for key, label in _ALONG]
    if data["sheets"] is None:
        return [*lines, "   no density: no waves"]
    lines.append(
        "   wave          v km/s    1/v s/km     longit.    flow off    focusing"
        "  polarisation, crystal axes"
    )
    named = list(zip(("fastest", "middle", "slowest"), data["sheets"], strict=True))
    for name, sheet in named:
        numbers = (
            significant(sheet["speed_km_s"]),
            significant(sheet["slowness_s_km"]),
            significant(_without_dust(sheet["longitudinality"]), 3),
            _degrees(_without_dust(sheet["power_flow_deg"], 1e-5)),
            significant(sheet["focusing"], 3),
        )
        columns = "".join(f"{number:>{_VALUE}}" for number in numbers)
        degenerate = "  (one of a plane)" if sheet["degenerate"] else ""
        lines.append(f"   {name:7}{columns[1:]}  {_vector(sheet['polarisation'])}{degenerate}")
    lines.append(f"   {'':17}{'group km/s':>{_VALUE}}  its direction, crystal axes")
    return lines + [
        f"   energy of {name:7}{_group_words(sheet['group_km_s'])}" for name, sheet in named
    ]


def _group_words(velocity: Sequence[float | None]) -> str:
    """Return the group speed and the direction in which the energy goes."""
    known = [x for x in velocity if x is not None]
    speed = math.sqrt(sum(x * x for x in known))
    if len(known) < len(velocity) or speed == 0.0:
        return f"{UNDEFINED:>{_VALUE}}"
    return f"{significant(speed):>{_VALUE}}  {_vector([x / speed for x in known])}"


def _degrees(value: float | None) -> str:
    return UNDEFINED if value is None else f"{significant(value, 3)}°"


def _without_dust(value: float | None, dust: float = _DUST) -> float | None:
    return 0.0 if value is not None and abs(value) < dust else value


def _vector(components: Sequence[float], decimals: int = 5) -> str:
    """Return the components of a unit vector in columns; rounding dust reads as 0."""
    words = (
        "0" if abs(x) < _DUST else f"{round(x, decimals) + 0.0:.{decimals}f}"
        for x in components
    )
    line = " ".join(f"{word:>{decimals + 3}}" for word in words)
    return line.replace("-", MINUS)


# --- rotate and compare ---------------------------------------------------------------------


def rotation_page(name: str, orientation: str) -> Page:
    """Return the writer of a rotated 6×6; see `core.summary.rotate`."""

    def page(data: Data) -> str:
        lines = [f"{name}, {orientation}", "", "Part axes in crystal axes"]
        lines += [
            f"   {axis}   {_vector(row)}"
            for axis, row in zip("XYZ", data["rotation"], strict=True)
        ]
        lines += ["", *_block("Stiffness, GPa", data["rows"], data["stiffness_gpa"], 1.0)]
        if data["compliance_per_gpa"] is None:
            lines += ["", "Compliance: none, for the stiffness has no inverse"]
        else:
            compliance = data["compliance_per_gpa"]
            lines += ["", *_block("Compliance, 1/TPa", data["rows"], compliance, 1e3)]
        if "engineering" in data:
            lines += ["", *_engineering_lines(data["engineering"])]
        return "\n".join(lines) + "\n"

    return page


def _block(
    title: str, rows: Sequence[str], matrix: Sequence[Sequence[float]], factor: float
) -> list[str]:
    """Return a 6×6 with five significant digits; what is rounding dust of it reads as 0."""
    dust = 1e-12 * max(abs(x) for row in matrix for x in row)
    cells = [
        [significant(0.0 if abs(x) < dust else factor * x, 5) for x in row] for row in matrix
    ]
    return [f"{title}; rows {' '.join(rows)}", *(f"   {line}" for line in aligned(cells))]


def aligned(rows: Sequence[Sequence[str]]) -> list[str]:
    """Return rows of numbers as lines, the decimal points of every column below each other."""
    columns = []
    for column in zip(*rows, strict=True):
        parts = [cell.partition(".") for cell in column]
        before = max(len(whole) for whole, _, _ in parts)
        after = max(len(point + rest) for _, point, rest in parts)
        columns.append(
            [f"{whole:>{before}}{point + rest:{after}}" for whole, point, rest in parts]
        )
    return ["   ".join(line).rstrip() for line in zip(*columns, strict=True)]


def _engineering_lines(data: Data) -> list[str]:
    ratios = (
        f"{i + 1}{j + 1}: {significant(_without_dust(x))}"
        for i, row in enumerate(data["poisson"])
        for j, x in enumerate(row)
        if i != j
    )
    couplings = [
        f"{name}: {significant(x, 3)}"
        for name, x in data["coupling"].items()
        if x is not None and abs(x) > _DUST
    ]
    moduli = zip("123", data["young_gpa"], strict=True)
    shears = data["shear_gpa"].items()
    return [
        "Engineering constants; 1, 2, 3 are X, Y, Z",
        "   E, GPa    " + "  ".join(f"{axis}: {significant(x)}" for axis, x in moduli),
        "   G, GPa    " + "  ".join(f"{pair}: {significant(x)}" for pair, x in shears),
        "   ν, loaded and across      " + "  ".join(ratios),
        "   coupling, strain per strain loaded:"
        + (" none" if not couplings else _wrapped(couplings)),
    ]


def _wrapped(pieces: Sequence[str], each: int = 6) -> str:
    """Return pieces in rows of a few, below the line that announces them."""
    rows = (pieces[start : start + each] for start in range(0, len(pieces), each))
    return "".join(
        "\n      " + "  ".join(f"{piece:14}" for piece in row).rstrip() for row in rows
    )


def comparison(data: Data) -> str:
    """Return the page of two parts side by side; see `core.summary.compare`."""
    lines = [
        f"A  {data['a']['name']}, {data['a']['orientation']}",
        f"B  {data['b']['name']}, {data['b']['orientation']}",
        f"Turned against each other by {_turn_words(data)}",
        "",
    ]
    cells, labels = [("A", "B", f"B {MINUS} A")], [""]
    for row in data["rows"]:
        labels.append(f"{row['label']}{', ' if row['unit'] else ''}{row['unit']}")
        size = max(abs(row[key] or 0.0) for key in ("a", "b"))
        dust = 1e-5 if row["unit"] == "°" else max(_DUST, 1e-12 * size)
        a, b, difference = (
            significant(_without_dust(row[key], dust)) for key in ("a", "b", "difference")
        )
        cells.append((a, b, difference))
    lines += [f"{label:38}   {line}".rstrip()
              for label, line in zip(labels, aligned(cells), strict=True)]
    return "\n".join(lines) + "\n"


def _turn_words(data: Data) -> str:
    """Return the angle as the parts stand, and the least that the crystal's symmetry leaves."""
    as_it_is, least = data["misorientation_deg"], data["misorientation_by_symmetry_deg"]
    said = f"{significant(_without_dust(as_it_is, 1e-5))}°"
    if least is None or abs(least - as_it_is) < 1e-5:
        return said
    return (f"{said} as they stand, {significant(_without_dust(least, 1e-5))}° by the crystal's"
            " symmetry")
