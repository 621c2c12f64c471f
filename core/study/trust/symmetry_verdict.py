"""What the symmetry of a table is, in one sentence: as entered, and once its axes are found."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray
from core.numbers import MINUS, significant
from core.tensor.closest import log_distance, nearest_setting, simplest_class
from core.tensor.hidden_axes import HiddenAxes
from core.tensor.notation import KELVIN_WEIGHTS
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS, CrystalClass, crystal_class

TOLERANCE_PERCENT = 1.0
_LEAST_TOLERANCE = 0.1  # percent: what rounding to four digits leaves
_EXACT = 1e-4  # percent
_MET = 1e-6  # relative: a table so near to its class has the class's form
_MUCH_BETTER = 0.5  # of the distance as entered: when turning within a class is worth saying
_SEEN_TURN = 0.5  # degrees


@dataclass(frozen=True)
class SymmetryVerdict:
    """What is said of the symmetry of a table.

    Attributes
    ----------
    sentence : str
    as_entered : CrystalClass
        The class of fewest constants within the tolerance about the given axes.
    entered_percent : float
        The distance to it.
    hidden : HiddenAxes or None
        The axes worth turning to; None where the given ones serve.
    tolerance_percent : float
        What counts as belonging to a class.
    beyond : str
        The part of the sentence that goes beyond the axes as entered; may be empty.
    """

    sentence: str
    as_entered: CrystalClass
    entered_percent: float
    hidden: HiddenAxes | None
    tolerance_percent: float
    beyond: str = ""


def symmetry_sentence(
    stiffness: Stiffness, found: tuple[HiddenAxes, ...], std: FloatArray | None = None
) -> str:
    """Return the sentence of `symmetry_verdict`."""
    return symmetry_verdict(stiffness, found, std).sentence


def symmetry_verdict(
    stiffness: Stiffness, found: tuple[HiddenAxes, ...], std: FloatArray | None = None
) -> SymmetryVerdict:
    """Return which symmetry a table has as entered, and which about other axes.

    Parameters
    ----------
    stiffness : Stiffness
    found : tuple of HiddenAxes
        From `nearest_classes`.
    std : ndarray, shape (6, 6), optional
        Standard uncertainties, GPa; they set the tolerance: see `tolerance_percent`.
    """
    tolerance = tolerance_percent(stiffness, std)
    entered, off = simplest_class(stiffness.voigt, tolerance / 100)
    entered_percent = 100 * off
    best = _simplest(found, tolerance)
    fewer = len(crystal_class(best.class_key, best.unique_axis).independent) < len(
        entered.independent)
    nearer = (
        best.class_key == entered.key and best.turn_deg > _SEEN_TURN
        and best.distance_percent < _MUCH_BETTER * entered_percent
    )
    hidden = best if fewer or nearer else None
    if hidden is not None:
        beyond = _hidden_words(hidden)
        sentence = f"{_form_words(entered, entered_percent)} as entered; {beyond}"
    elif entered.key == "triclinic":
        beyond = _nearest_words(found, noise_percent(stiffness, std))
        sentence = f"triclinic; {beyond}"
    else:
        beyond = ""
        sentence = f"{_form_words(entered, entered_percent)} as entered"
    return SymmetryVerdict(sentence, entered, entered_percent, hidden, tolerance, beyond)


def claim_sentence(claimed: CrystalClass, off: float, found: SymmetryVerdict) -> str:
    """Return what a table claims beside what it has the form of, without saying either twice.

    Parameters
    ----------
    claimed : CrystalClass
    off : float
        The relative distance of the table from it, about the axes as entered.
    found : SymmetryVerdict
    """
    form = found.as_entered
    if (claimed.key, claimed.unique_axis) == (form.key, form.unique_axis):
        return found.sentence
    away = "" if off <= _MET else f", {significant(100 * off, 2)} % away in these axes"
    pieces = [f"claimed {_name_of(claimed)}{away}"]
    if form.key != "triclinic":
        pieces.append(f"has the form of {_form_words(form, found.entered_percent)}")
    return "; ".join(piece for piece in (*pieces, found.beyond) if piece)


def tolerance_percent(stiffness: Stiffness, std: FloatArray | None = None) -> float:
    """Return how far from a class a table may be and still belong to it, percent of ‖C‖.

    `noise_percent` where uncertainties are given, but never less than 0.1 % and never more
    than 1 %: large errors make a class tenable, which is no reason to call a table that is far
    from it by its name.
    """
    noise = noise_percent(stiffness, std)
    if noise is None:
        return TOLERANCE_PERCENT
    return min(max(noise, _LEAST_TOLERANCE), TOLERANCE_PERCENT)


def noise_percent(stiffness: Stiffness, std: FloatArray | None = None) -> float | None:
    """Return the expected size of the noise, √(Σ w² σ²) in Kelvin form, percent of ‖C‖.

    None where no uncertainties are given.
    """
    size = float(np.linalg.norm(stiffness.kelvin))
    if std is None or not np.any(std) or size == 0:
        return None
    noise = float(np.linalg.norm(std * np.outer(KELVIN_WEIGHTS, KELVIN_WEIGHTS)))
    return 100 * noise / size


def entered_distances(stiffness: Stiffness) -> tuple[tuple[CrystalClass, float, float], ...]:
    """Return every class with its distances about the given axes, in the order of `CLASS_KEYS`.

    Distances are relative in percent, and log-Euclidean (NaN for an unstable crystal).
    Monoclinic is given about whichever of x, y and z is nearest.
    """
    rows = []
    for key in CLASS_KEYS:
        cls, off = nearest_setting(stiffness.voigt, key)
        rows.append((cls, 100 * off, log_distance(stiffness, cls)))
    return tuple(rows)


def _simplest(found: tuple[HiddenAxes, ...], tolerance: float) -> HiddenAxes:
    """Return the class of fewest constants within the tolerance; of several the nearest."""
    near = [axes for axes in found
            if axes.distance_percent <= tolerance or axes.class_key == "triclinic"]
    return min(near, key=lambda axes: (
        len(crystal_class(axes.class_key).independent), axes.distance_percent))


def _form_words(cls: CrystalClass, percent: float) -> str:
    about = f" about {cls.unique_axis}" if cls.key == "monoclinic" else ""
    return f"{_name_of(cls)}{about}{_within(percent)}"


def _hidden_words(axes: HiddenAxes) -> str:
    name = _name_of(crystal_class(axes.class_key))
    spread = "" if axes.axis_uncertainty_deg is None else (
        f" (± {significant(axes.axis_uncertainty_deg, 1)}°)")
    return (f"{name}{_within(axes.distance_percent)} once turned {axes.turn_deg:.1f}°{spread} "
            f"about x, y, z = {vector_text(axes.turn_axis)}")


def _nearest_words(found: tuple[HiddenAxes, ...], noise: float | None) -> str:
    nearest = min(
        (axes for axes in found if axes.class_key != "triclinic"),
        key=lambda axes: axes.distance_percent,
    )
    spread = "" if noise is None else f" (uncertainty {significant(noise, 2)} %)"
    return (f"nearest higher class: {_name_of(crystal_class(nearest.class_key))}, "
            f"{significant(nearest.distance_percent, 2)} % away{spread}")


def _within(percent: float) -> str:
    return "" if percent < _EXACT else f" within {significant(percent, 2)} %"


def _name_of(cls: CrystalClass) -> str:
    return cls.name.replace(",", " with")  # "trigonal with 6 constants"


def vector_text(vector: tuple[float, float, float]) -> str:
    """Return Cartesian components to two decimals: "0.10, −0.20, 0.97".

    Without brackets, which are those of lattice directions.
    """
    parts = (f"{component:.2f}" for component in vector)
    return ", ".join("0.00" if part == "-0.00" else part for part in parts).replace("-", MINUS)
