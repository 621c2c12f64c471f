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
    """

    sentence: str
    as_entered: CrystalClass
    entered_percent: float
    hidden: HiddenAxes | None
    tolerance_percent: float


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
        Standard uncertainties, GPa; they set the tolerance, which is 1 % without them.
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
        sentence = f"{_entered_words(entered, entered_percent)}; {_hidden_words(hidden)}"
    elif entered.key == "triclinic":
        sentence = f"triclinic; {_nothing_nearer(found, tolerance)}"
    else:
        sentence = _entered_words(entered, entered_percent)
    return SymmetryVerdict(sentence, entered, entered_percent, hidden, tolerance)


def tolerance_percent(stiffness: Stiffness, std: FloatArray | None = None) -> float:
    """Return how far from a class a table may be and still belong to it, percent of ‖C‖.

    The expected size of the noise in Kelvin form, √(Σ w² σ²), where uncertainties are given,
    but never less than 0.1 %; else 1 %.
    """
    size = float(np.linalg.norm(stiffness.kelvin))
    if std is None or not np.any(std) or size == 0:
        return TOLERANCE_PERCENT
    noise = float(np.linalg.norm(std * np.outer(KELVIN_WEIGHTS, KELVIN_WEIGHTS)))
    return max(100 * noise / size, _LEAST_TOLERANCE)


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


def _entered_words(cls: CrystalClass, percent: float) -> str:
    about = f" about {cls.unique_axis}" if cls.key == "monoclinic" else ""
    if percent < _EXACT:
        return f"{cls.name}{about} as entered"
    return f"{cls.name}{about} within {significant(percent, 2)} % as entered"


def _hidden_words(axes: HiddenAxes) -> str:
    name = crystal_class(axes.class_key).name
    within = "" if axes.distance_percent < _EXACT else (
        f" within {significant(axes.distance_percent, 2)} %")
    spread = "" if axes.axis_uncertainty_deg is None else (
        f" (± {significant(axes.axis_uncertainty_deg, 1)}°)")
    return (f"{name}{within} once turned {axes.turn_deg:.1f}°{spread} about "
            f"{vector_text(axes.turn_axis)}")


def _nothing_nearer(found: tuple[HiddenAxes, ...], tolerance: float) -> str:
    nearest = sorted(
        (axes for axes in found if axes.class_key in ("monoclinic", "orthorhombic")),
        key=lambda axes: axes.distance_percent,
    )
    listed = ", ".join(f"{axes.class_key} {significant(axes.distance_percent, 2)} %"
                       for axes in nearest)
    return f"no axes bring it within {significant(tolerance, 2)} % of a higher class ({listed})"


def vector_text(vector: tuple[float, float, float]) -> str:
    """Return a unit vector to two decimals, as in [0.1 0.2 0.97]."""
    parts = [f"{component:.2f}".rstrip("0").rstrip(".") for component in vector]
    return f"[{' '.join('0' if part in ('-0', '') else part for part in parts)}]".replace(
        "-", MINUS)
