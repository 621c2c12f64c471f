"""Constants from a measured-speeds file as one plain dict, and as a page for a person."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

from core import limits
from core.command.pages import aligned
from core.crystal.cell import CrystalFrame
from core.errors import InputError
from core.files.speeds import SpeedTable, read_speeds
from core.numbers import MINUS, significant
from core.study.recovery.fit import Fit, FitOptions
from core.study.recovery.fitting import recover
from core.study.recovery.planning import Ranking, rank_next
from core.study.trust.plausibility import density_notes
from core.task import Ticker
from core.tensor.notation import constant_name
from core.tensor.symmetry import CrystalClass, crystal_class

_SUGGESTIONS = 5
_UNKNOWN = "\N{EN DASH}"


def run_recover(
    path: Path,
    density: float | None = None,
    class_name: str | None = None,
    options: FitOptions | None = None,
    ticker: Ticker | None = None,
) -> dict[str, Any]:
    """Return the constants that a measured-speeds file holds; see `recover_dict` for the keys.

    Parameters
    ----------
    path : Path
    density : float or None
        kg/m³; None for that of the file.
    class_name : str or None
        A key of `core.tensor.symmetry.CLASS_KEYS`; None for that of the file, and for
        triclinic, which assumes nothing, where the file has none.
    options : FitOptions
        The density's σ in it is replaced by that of the file where the density is the file's.

    Raises
    ------
    InputError
        Where the file is at fault, or there is no density.
    """
    frame = CrystalFrame(class_key=crystal_class(class_name).key) if class_name else None
    table = read_speeds(path, frame, needs_cell=True)
    cls, guesses = class_of_table(table, class_name)
    known, sigma = density_of_table(table, density, path.name)
    chosen = options or FitOptions()
    if density is None and sigma is not None:
        chosen = FitOptions(
            sigma, chosen.direction_sigma_deg, chosen.robust, chosen.prior, chosen.seed
        )
    fit = recover(table.readings, known, cls, chosen, ticker)
    return recover_dict(fit, rank_next(fit, count=_SUGGESTIONS), (*table.guesses, *guesses))


def class_of_table(
    table: SpeedTable, class_name: str | None = None
) -> tuple[CrystalClass, tuple[str, ...]]:
    """Return the class to fit and what was guessed: the one named, else that of the file."""
    name = class_name or table.class_key
    if name is not None:
        return crystal_class(name, table.unique_axis or "y"), ()
    return crystal_class("triclinic"), (
        "no crystal class was named: none was assumed, and all 21 constants are fitted",
    )


def density_of_table(
    table: SpeedTable, density: float | None, where: str
) -> tuple[float, float | None]:
    """Return the density to fit with and its σ: the one given, else that of the file."""
    if density is not None:
        return limits.density(density, "density"), None
    if table.density is None:
        raise InputError(
            "The density is not known; speeds alone give no stiffness.",
            "Give it with --density, or in the file: # density_kg_m3: 2649 ± 1.",
            where,
        )
    return table.density, table.density_sigma


def recover_dict(fit: Fit, ranking: Ranking, guesses: tuple[str, ...] = ()) -> dict[str, Any]:
    """Return a fit with the keys of the command line.

    `std_gpa` is null where a constant has a part in what is not seen. Rows in `outliers` and
    `readings` count from 1.
    """
    return {
        "constants_gpa": fit.stiffness.tolist(),
        "std_gpa": [[_number(x) for x in row] for row in fit.std.tolist()],
        "rank": fit.rank,
        "singular_values": fit.singular_values.tolist(),
        "undetermined": [
            {"combination": {name[1:]: part for name, part in combination.parts}}
            for combination in fit.undetermined
        ],
        "chi2": fit.chi2,
        "dof": fit.dof,
        "outliers": list(fit.outliers),
        "next_directions": [blank.direction.tolist() for blank in ranking.best],
        "crystal_class": fit.cls.key,
        "independent": [name[1:] for name in fit.names],
        "density_kg_m3": fit.density,
        "stable": fit.stable,
        "stability_probability": fit.stability_probability,
        "readings": [
            {
                "row": reading.row,
                "direction": list(reading.direction),
                "sheet": sheet,
                "speed_m_s": reading.speed,
                "sigma_m_s": float(sigma),
                "residual_sigma": float(residual),
                "studentised": float(studentised),
            }
            for reading, sheet, sigma, residual, studentised in zip(
                fit.readings, fit.sheets, fit.sigma, fit.residuals, fit.studentised, strict=True
            )
        ],
        "not_seen": [combination.text for combination in fit.undetermined],
        "notes": [
            *density_notes(fit.density), *fit.notes, *(_sentence(guess) for guess in guesses)
        ],
    }


def _sentence(guess: str) -> str:
    return f"{guess[0].upper()}{guess[1:]}."


def _number(value: float) -> float | None:
    return float(value) if math.isfinite(value) else None


# --- the page ---------------------------------------------------------------------------------


def recovery_page(data: dict[str, Any]) -> str:
    """Return the page of one recovery; see `recover_dict`."""
    size = len(data["independent"])
    lines = [
        f"Class {data['crystal_class']}, {counted(size, 'constant')}, from "
        f"{counted(len(data['readings']), 'speed')}",
        f"Density {significant(data['density_kg_m3'], 5)} kg/m³",
        "",
        "Stiffness, GPa, crystal axes; rows 11 22 33 23 13 12",
        *_table_lines(data["constants_gpa"], data["std_gpa"]),
        "",
        "Independent constants, GPa",
        *_constant_lines(data),
        "",
        f"Seen               {data['rank']} of {counted(size, 'combination')}",
        *(f"Not seen           {text}" for text in data["not_seen"]),
        f"χ²                 {significant(data['chi2'])} for "
        f"{counted(data['dof'], 'degree')} of freedom",
        f"Stable             {_stability(data)}",
        f"Outliers           {_row_list(data['outliers'])}",
        "",
        *_next_lines(data["next_directions"]),
        *(["", *data["notes"]] if data["notes"] else []),
    ]
    return "\n".join(lines) + "\n"


def counted(count: int, thing: str) -> str:
    """Return "1 speed", "2 speeds"."""
    return f"{count} {thing}{'' if count == 1 else 's'}"


def _table_lines(
    table: list[list[float]], deviations: list[list[float | None]]
) -> list[str]:
    """Return the 6×6; a constant with a part in what is not seen has a question mark."""
    dust = 1e-9 * max(abs(x) for row in table for x in row)
    cells = [
        [significant(0.0 if abs(x) < dust else x, 5) + ("?" if std is None else "")
         for x, std in zip(row, line, strict=True)]
        for row, line in zip(table, deviations, strict=True)
    ]
    lines = [f"   {line}" for line in aligned(cells)]
    if any("?" in line for line in lines):
        lines.append("   ? not measured: has a part in what is not seen, which was kept as at "
                     "the start of the fit")
    return lines


def _constant_lines(data: dict[str, Any]) -> list[str]:
    """Return one line a constant: value ± σ, to two digits of σ."""
    lines = []
    dust = 1e-9 * max(abs(x) for row in data["constants_gpa"] for x in row)
    for name in data["independent"]:
        i, j = int(name[0]) - 1, int(name[1]) - 1
        value, std = data["constants_gpa"][i][j], data["std_gpa"][i][j]
        shown = with_uncertainty(0.0 if abs(value) < dust else value, std)
        lines.append(f"   {constant_name(i, j)}   {shown}")
    return lines


def with_uncertainty(value: float, std: float | None) -> str:
    """Return "105.31 ± 0.24": two digits of σ, and the value to the same decimal."""
    if std is None:
        return f"{significant(value):>10} ± {_UNKNOWN}   (has a part in what is not seen)"
    if std <= 0:
        return f"{significant(value):>10}"
    decimals = max(1 - math.floor(math.log10(std)), 0)
    return f"{value:>10.{decimals}f} ± {std:.{decimals}f}".replace("-", MINUS)


def _stability(data: dict[str, Any]) -> str:
    verdict = "yes" if data["stable"] else "no"
    chance = data["stability_probability"]
    if chance is None:
        return f"{verdict}, as fitted; not all that decides it is seen"
    return f"{verdict}; probability {significant(chance, 3)}"


def _row_list(rows: list[int]) -> str:
    return f"row{'s' if len(rows) > 1 else ''} {', '.join(map(str, rows))}" if rows else "none"


def _next_lines(found: list[list[float]]) -> list[str]:
    if not found:
        return []
    return ["Next blanks that would tell most (crystal axes)", *(
        "   " + "  ".join(f"{significant(round(x, 4), 4):>8}" for x in vector)
        for vector in found)]  # fmt: skip
