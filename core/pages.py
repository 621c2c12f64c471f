"""Summaries as pages for a person: the same dicts that `--json` prints, in columns of text."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from core.numbers import significant

_EXTREME_LABELS = (
    ("young_gpa", "Young's modulus", "GPa"),
    ("linear_compressibility_per_tpa", "linear compressibility", "1/TPa"),
    ("shear_gpa", "shear modulus", "GPa"),
    ("poisson", "Poisson's ratio", ""),
    ("fast_km_s", "fastest wave", "km/s"),
    ("middle_km_s", "middle wave", "km/s"),
    ("slow_km_s", "slowest wave", "km/s"),
)
_ANISOTROPY_LABELS = (
    ("universal", "universal index"),
    ("log_euclidean", "log-Euclidean index"),
    ("percent_bulk", "percent anisotropy of K"),
    ("percent_shear", "percent anisotropy of G"),
    ("zener", "Zener ratio"),
)
CAUTION = (
    "Linear elastic, single crystal: says nothing of strength, fatigue or residual stress.\n"
    "Parts under load or pressure are decided by codes and licensed or certified people.\n"
)


def summaries(found: dict[str, Any] | list[dict[str, Any]]) -> str:
    """Return one page a specimen."""
    return "\n".join(summary(one) for one in (found if isinstance(found, list) else [found]))


def summary(data: dict[str, Any]) -> str:
    """Return the page of one specimen: see `core.summary.summarise`."""
    density = data["density_kg_m3"]
    lines = [
        data["name"],
        "=" * len(data["name"]),
        data["verdict"],
        "",
        "Eigenstiffnesses (Kelvin), GPa   "
        + "  ".join(significant(x) for x in data["eigenstiffness_gpa"]),
        f"Density                          {significant(density)} kg/m³" if density else
        "Density                          not known: no waves",
        f"Debye speed                      {significant(data['debye_speed_km_s'])} km/s",
        f"Claimed class                    {data['symmetry']['declared']}, "
        f"{significant(data['symmetry']['as_entered_percent'], 3)} % away in these axes",
        "",
        *_average_lines(data["averages"]),
        "",
        *(f"{label:32} {significant(data['anisotropy'][key])}"
          for key, label in _ANISOTROPY_LABELS if data["anisotropy"][key] is not None),
        "",
        *_extreme_lines(data["extremes"]),
        "",
        CAUTION.rstrip(),
    ]
    return "\n".join(lines) + "\n"


def _average_lines(averages: dict[str, Any]) -> list[str]:
    lines = [f"{'Aggregate':14}{'K GPa':>10}{'G GPa':>10}{'E GPa':>10}{'ν':>10}"]
    for name, label in (("voigt", "Voigt"), ("hill", "Hill"), ("reuss", "Reuss")):
        mean = averages[name]
        lines.append(f"{label:14}" + "".join(
            f"{significant(mean[key]):>10}"
            for key in ("bulk_gpa", "shear_gpa", "young_gpa", "poisson")))
    bounds = averages["hashin_shtrikman"]
    lines.append(
        "Hashin–Shtrikman  K "
        f"{significant(bounds['bulk_low_gpa'])} to {significant(bounds['bulk_high_gpa'])}, G "
        f"{significant(bounds['shear_low_gpa'])} to {significant(bounds['shear_high_gpa'])} GPa")
    return lines


def _extreme_lines(extremes: dict[str, Any]) -> list[str]:
    lines = [f"{'Extremes over all directions':28}{'least':>10}  {'along':24}"
             f"{'greatest':>10}  along"]
    for key, label, unit in _EXTREME_LABELS:
        least, greatest = extremes[key]["min"], extremes[key]["max"]
        name = f"{label}{', ' if unit else ''}{unit}"
        lines.append(f"{name:28}{_value(least)}  {_place(least):24}"
                     f"{_value(greatest)}  {_place(greatest)}".rstrip())
    return lines


def _value(found: dict[str, Any] | None) -> str:
    return f"{significant(None if found is None else found['value']):>10}"


def _place(found: dict[str, Any] | None) -> str:
    if found is None:
        return ""
    if found["set"] == "all":
        return "every direction"
    words = "  ".join(significant(round(x, 4), 3) for x in found["direction"])
    return f"ring through {words}" if found["set"] == "ring" else words


def along_page(name: str, texts: Sequence[str]) -> Callable[[Any], str]:
    """Return the writer of a page of directions; see `core.summary.along`."""
    def page(found: dict[str, Any] | list[dict[str, Any]]) -> str:
        each = found if isinstance(found, list) else [found]
        return f"{name}\n" + "".join(
            f"\nalong {text}\n{_along_text(data)}"
            for text, data in zip(texts, each, strict=True))
    return page


_ALONG_LABELS = (
    ("young_gpa", "Young's modulus", "GPa"),
    ("linear_compressibility_per_tpa", "linear compressibility", "1/TPa"),
    ("shear_min_gpa", "shear modulus, least", "GPa"),
    ("shear_max_gpa", "shear modulus, greatest", "GPa"),
    ("poisson_min", "Poisson's ratio, least", ""),
    ("poisson_max", "Poisson's ratio, greatest", ""),
)


def _along_text(data: dict[str, Any]) -> str:
    lines = [f"   unit vector               {_vector(data['direction'])}  (crystal axes)"]
    lines += [f"   {label:26}{significant(data[key]):>10} {unit}".rstrip()
              for key, label, unit in _ALONG_LABELS]
    if data["sheets"] is None:
        lines.append("   no density: waves are off")
    else:
        lines.append("   sheet      v km/s  longit.  flow off  focusing  polarisation")
        for name, sheet in zip(("fastest", "middle", "slowest"), data["sheets"], strict=True):
            lines.append(
                f"   {name:8}{significant(sheet['speed_km_s']):>9}"
                f"{significant(sheet['longitudinality'], 3):>9}"
                f"{significant(sheet['power_flow_deg'], 3):>9}°"
                f"{significant(sheet['focusing'], 3):>10}  {_vector(sheet['polarisation'])}"
                + ("  degenerate" if sheet["degenerate"] else ""))
    return "\n".join(lines) + "\n"


def _vector(components: Sequence[float]) -> str:
    return "  ".join(f"{significant(round(x, 6), 4):>8}" for x in components)


def rotation_page(name: str, orientation: str) -> Callable[[Any], str]:
    """Return the writer of a rotated 6×6; see `core.summary.rotate`."""
    def page(data: dict[str, Any]) -> str:
        lines = [f"{name}, {orientation}", "", "Part axes in crystal axes"]
        lines += [f"   {axis}   {_vector(row)}"
                  for axis, row in zip("XYZ", data["rotation"], strict=True)]
        lines += ["", *_block("Stiffness, GPa", data["rows"], data["stiffness_gpa"], 1.0)]
        lines += ["", *_block("Compliance, 1/TPa", data["rows"], data["compliance_per_gpa"], 1e3)]
        if "engineering" in data:
            lines += ["", *_engineering_lines(data["engineering"])]
        return "\n".join(lines) + "\n"
    return page


def _block(title: str, rows: Sequence[str], matrix: Sequence[Sequence[float]],
           factor: float) -> list[str]:
    largest = max(abs(x) for row in matrix for x in row)
    lines = [f"{title}; rows {' '.join(rows)}"]
    lines += ["   " + "".join(
        f"{significant(0.0 if abs(x) < 1e-12 * largest else factor * x, 5):>12}" for x in row)
        for row in matrix]
    return lines


def _engineering_lines(data: dict[str, Any]) -> list[str]:
    lines = ["Engineering constants along X, Y, Z",
             "   E, GPa    " + "  ".join(significant(x) for x in data["young_gpa"]),
             "   G, GPa    " + "  ".join(f"{k}: {significant(x)}"
                                         for k, x in data["shear_gpa"].items()),
             "   ν         " + "  ".join(
                 f"{i + 1}{j + 1}: {significant(x)}"
                 for i, row in enumerate(data["poisson"]) for j, x in enumerate(row) if i != j)]
    pairs = [f"{k}: {significant(x, 3)}" for k, x in data["coupling"].items()
             if x is not None and abs(x) > 1e-9]
    lines.append("   coupling  " + ("  ".join(pairs) if pairs else "none"))
    return lines


def comparison(data: dict[str, Any]) -> str:
    """Return the page of two parts side by side; see `core.summary.compare`."""
    lines = [f"A  {data['a']['name']}, {data['a']['orientation']}",
             f"B  {data['b']['name']}, {data['b']['orientation']}",
             f"turned against each other by {significant(data['misorientation_deg'])}°", "",
             f"{'':36}{'A':>11}{'B':>11}{'B − A':>11}"]
    for row in data["rows"]:
        label = f"{row['label']}{', ' if row['unit'] else ''}{row['unit']}"
        lines.append(f"{label:36}" + "".join(
            f"{significant(row[key]):>11}" for key in ("a", "b", "difference")))
    return "\n".join(lines) + "\n"
