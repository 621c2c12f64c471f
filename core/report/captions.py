"""Figures in words: which there are, what each shows, and the caption that says where from."""

from __future__ import annotations

import difflib
import re
from dataclasses import dataclass, replace

import numpy as np

from core import live
from core.crystal.cell import axes_words
from core.directional.quantities import Quantity, quantity
from core.errors import InputError
from core.files.origin import PROGRAM, orientation_words
from core.numbers import MINUS
from core.state import BenchState, OrientationChoice, Specimen, Vector3

FIGURE_KINDS: dict[str, str] = {
    "surface": "surface in three dimensions",
    "section": "polar section",
    "hemisphere": "hemisphere",
    "sweep": "sweep away from the pin",
    "source": "wavefronts from a point source",
}
"""Keys of the kinds of figures, and their words."""
SIDES: dict[str, str] = {"A": "A", "B": "B", "AB": "A and B"}
SHOWN: dict[str, str] = {
    "A": "A", "B": "B", "difference": "B − A", "cost": "what a cutting error costs",
}
_WAVES = ("fastest", "middle", "slowest")
_LONG_NUMBER = re.compile(r"-?\d+\.\d{5,}(?:e[+-]?\d+)?")
_READ_DECIMALS = 4  # of a number in an orientation, for reading
_PLANES = {"XY": (0.0, 0.0, 1.0), "XZ": (0.0, 1.0, 0.0), "YZ": (1.0, 0.0, 0.0)}


@dataclass(frozen=True)
class FigureChoice:
    """One figure of a bench.

    Attributes
    ----------
    kind : str
        A key of `FIGURE_KINDS`.
    quantity : str
        Key of the quantity; the source picture always shows the wave surface.
    sides : "A", "B" or "AB"
        Which crystals: a surface of both is drawn side by side, on one scale.
    shown : str
        What a hemisphere shows, a key of `SHOWN`; the other kinds do not read it.
    time_us : float or None
        Time after the pulse of a source picture, microseconds; None: the bench's.
    """

    kind: str = "surface"
    quantity: str = "young"
    sides: str = "A"
    shown: str = "A"
    time_us: float | None = None

    @property
    def title(self) -> str:
        """The figure in a few words, for lists."""
        words = FIGURE_KINDS[self.kind]
        if self.kind == "source":
            return f"{words}, {SIDES[self.sides]}"
        what = SHOWN[self.shown] if self.kind == "hemisphere" else SIDES[self.sides]
        return f"{quantity(self.quantity).name}: {words}, {what}"


def one_of(key: str, choices: dict[str, str], name: str) -> str:
    """Return a key that is among some, small and capital letters being alike.

    Raises
    ------
    InputError
        If it is not; the hint names the nearest, or all.
    """
    known = {choice.lower(): choice for choice in choices}
    given = key.strip().lower()
    if given in known:
        return known[given]
    near = difflib.get_close_matches(given, known, n=1)
    hint = f"Did you mean '{known[near[0]]}'?" if near else f"There are {', '.join(choices)}."
    raise InputError(f"'{key}' is no {name}.", hint, name)


def state_for(state: BenchState, choice: FigureChoice) -> BenchState:
    """Return the bench as a figure shows it.

    Raises
    ------
    InputError
        When the quantity needs a density that a crystal shown has not.
    """
    shown = quantity("wave" if choice.kind == "source" else choice.quantity)
    sides = needed_sides(choice)
    for side in sides:
        specimen = state.specimen_of(side)
        if shown.wave and specimen.density is None:
            raise InputError(f"{shown.name} wants a density, and {specimen.name} has none.",
                             "Enter it in the ledger or the specimen file.", "density")
    display = replace(state.display, layout=sides, hemisphere=choice.shown, shared_scale=True)
    return replace(state, quantity=shown.key, display=display)


def needed_sides(choice: FigureChoice) -> str:
    """Return the sides that a figure draws: a difference needs both."""
    if choice.kind != "hemisphere":
        return choice.sides
    if choice.shown == "difference":
        return "AB"
    return choice.shown if choice.shown in ("A", "B") else choice.sides[:1]


def caption(state: BenchState, choice: FigureChoice) -> str:
    """Return what a figure shows and where it comes from, in a few sentences."""
    sentences = [_what(state, choice), *_whose(state, needed_sides(choice))]
    if choice.kind == "surface" and choice.sides == "AB":
        sentences.append("One scale of lengths and colours for both.")
    sentences += _line_words(state_for(state, choice), choice)
    sentences.append(f"{PROGRAM}.")
    return " ".join(sentences)


def _what(state: BenchState, choice: FigureChoice) -> str:
    entry = quantity("wave" if choice.kind == "source" else choice.quantity)
    name = f"{entry.name} {entry.symbol}{', ' if entry.unit else ''}{entry.unit}"
    if choice.kind == "surface":
        return f"{name}, {_surface_words(entry)}. {_marks_words(state)}"
    if choice.kind == "section":
        return f"{name}, in the plane {plane_words(state.section)} of the part."
    if choice.kind == "hemisphere":
        projection = state.display.projection.replace("_", "-")
        return f"{_hemisphere_words(state, choice, name)}; {projection} projection from part Z."
    if choice.kind == "sweep":
        axis = state.display.sweep_about or state.section
        return (f"{name}, against the angle from {direction_words(state.pin)}, turned about "
                f"{direction_words(axis)}.")
    time = state.display.source_time_us if choice.time_us is None else choice.time_us
    return (f"Wavefronts in the plane {plane_words(state.section)} of the part "
            f"{time:g} µs after a pulse from a point; radius in mm.")


def _surface_words(entry: Quantity) -> str:
    if entry.key == "slowness":
        return "three sheets along the wave normal"
    if entry.shape == "slowness":
        return "as colours on the slowness surface"
    if entry.shape == "wave":
        return "where the energy of plane waves has come to after a unit of time"
    size = "size" if entry.signed else "value"
    return f"over all directions; the distance from the middle is its {size}"


def _marks_words(state: BenchState) -> str:
    plane = plane_words(state.section)
    how = "Opened at" if state.display.cut_away else "Disc:"
    return f"{how} the plane {plane} of the part; ring: {direction_words(state.pin)}."


def _line_words(state: BenchState, choice: FigureChoice) -> list[str]:
    """Return what the lines and the hatching of a figure stand for, as far as it has them."""
    sides = needed_sides(choice)
    if choice.kind == "hemisphere":
        return _disc_words(state, sides)
    if choice.kind == "surface":
        return []
    words = ["A solid, B dashed"] if len(sides) == 2 else []
    if quantity(state.quantity).sheets == 3 and sum(state.display.sheets) > 1:
        words.append("the faster the wave, the thicker its line")
    dotted = "" if choice.kind == "sweep" else _dotted_words(state, sides)
    words += [dotted] if dotted else []
    joined = "; ".join(words)
    return [f"{joined[0].upper()}{joined[1:]}."] if joined else []


def _dotted_words(state: BenchState, sides: str) -> str:
    """Return why parts of the curves of a section are dotted, where any is."""
    shown = quantity(state.quantity)
    found = [
        live.section(live.part_medium(state.specimen_of(side), state.orientation_of(side)),
                     shown.key, state.section) for side in sides]
    if shown.shape == "wave":
        leaves = any(curves.out_of_plane.any() for curves in found)
        return "dotted where the ray leaves the plane" if leaves else ""
    negative = shown.signed and any((curves.values < 0).any() for curves in found)
    return "dotted where negative" if negative else ""


def _disc_words(state: BenchState, sides: str) -> list[str]:
    """Return what the marks on a hemisphere are, and its hatching where it has any."""
    words = [f"Red dot: {direction_words(state.pin)}."]
    if state.display.marks and quantity(state.quantity).wave:
        words.append("Diamonds and dashes: two waves are as fast.")
    media = [live.part_medium(state.specimen_of(side), state.orientation_of(side))
             for side in sides]
    if not all(medium.stiffness.is_stable for medium in media):
        words.append("Hatched where the quantity is not defined: the table is unstable.")
    return words


def _hemisphere_words(state: BenchState, choice: FigureChoice, name: str) -> str:
    if quantity(choice.quantity).sheets == 3:
        name += f", {_WAVES[state.display.hemisphere_sheet]} wave"
    if choice.shown == "difference":
        return f"B − A of {name}"
    if choice.shown == "cost":
        return (f"Greatest change of {name} within a cutting error of "
                f"±{state.cutting_error_deg:g}°")
    return name


def _whose(state: BenchState, sides: str) -> list[str]:
    """Return the crystals, their sources and axes, and how the parts lie in them."""
    turns = [_turn_words(state.orientation_of(side)) for side in sides]
    if len(sides) == 2 and state.other is None:
        return [f"{_crystal_words(state.specimen)}. A: {turns[0]}. B: {turns[1]}."]
    return [f"{side}: {_crystal_words(state.specimen_of(side))}; {turn}."
            for side, turn in zip(sides, turns, strict=True)]


def _crystal_words(specimen: Specimen) -> str:
    source = f" ({specimen.source})" if specimen.source else ""
    axes = f", crystal axes {axes_words(specimen.crystal_axes)}" if specimen.cell else ""
    return f"{specimen.name}{source}{axes}"


def _turn_words(choice: OrientationChoice) -> str:
    words = plain_orientation(orientation_words(choice))
    return "part axes along the crystal axes" if words == "identity" else f"part {words}"


def plain_orientation(text: str) -> str:
    """Return an orientation for reading: no number with more than four decimals."""

    def shortened(match: re.Match[str]) -> str:
        return f"{round(float(match[0]), _READ_DECIMALS) + 0.0:.10g}"

    return _LONG_NUMBER.sub(shortened, text).replace("-", MINUS)


def plane_words(normal: Vector3) -> str:
    """Return "XZ" for a plane of two part axes, else its normal."""
    for name, axis in _PLANES.items():
        if abs(float(np.dot(axis, normal))) > 1 - 1e-12:
            return name
    return f"normal to {vector_words(normal)}"


def direction_words(vector: Vector3) -> str:
    """Return "part X" for a part axis, else the components in part axes."""
    for name, axis in zip("XYZ", np.eye(3), strict=True):
        if float(np.dot(axis, vector)) > 1 - 1e-9:
            return f"part {name}"
    return f"the direction {vector_words(vector)} in part axes"


def vector_words(vector: Vector3) -> str:
    """Return "X, Y, Z = 0, 0.6, 0.8", rounded for reading: brackets would name a plane."""
    words = ", ".join(f"{round(float(x), 4) + 0.0:g}" for x in vector)
    return f"X, Y, Z = {words}".replace("-", MINUS)


def parse_plane(text: str) -> Vector3:
    """Return the unit normal of a section plane, part axes.

    Parameters
    ----------
    text : str
        "XY", "XZ", "YZ", or three components of the normal such as "1,1,0".

    Raises
    ------
    InputError
        For anything else.
    """
    named = "".join(sorted(text.strip().upper()))
    if named in _PLANES:
        return _PLANES[named]
    try:
        vector = np.array([float(word) for word in text.replace(",", " ").split()])
    except ValueError:
        vector = np.zeros(0)
    if vector.shape != (3,) or not np.isfinite(vector).all() or not vector.any():
        raise InputError(f"'{text}' is no section plane.",
                         "XY, XZ, YZ or the normal in part axes, such as 1,1,0.", "plane")
    x, y, z = (vector / np.linalg.norm(vector)).tolist()
    return x, y, z
