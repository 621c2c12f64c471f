"""View data of the waves at the pin, of arrivals along it, and of degenerate directions."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core import live
from core.arrays import BoolArray, FloatArray
from core.crystal.cell import CrystalFrame
from core.directional import waves
from core.directional.acoustic_axes import AcousticAxis
from core.directional.medium import Medium
from core.directional.quantities import quantity
from core.directional.rays import Arrival, arrivals
from core.directional.sphere import directions
from core.numbers import full_precision, significant
from core.state import BenchState, Specimen, Vector3
from core.task import Ticker
from gui.presenting.axes import Axes
from gui.presenting.near import axis_words, place_words
from gui.presenting.stage import NO_DENSITY, SHEET_NAMES, sides, unit_vector
from gui.viewdata import LinkedRow, LinkedView, WaveRow, WavesView, WaveTable

_DUST = 1e-9
_AIM = 1e-4  # degrees to which the search for a wave normal is to be trusted on a fold
FINDING = "being found …"
Text = Callable[[float | None], str]


# ------------------------------------------------------------------ the waves
def waves_view(state: BenchState) -> WavesView:
    """Return the three waves along the pin, for every side that has a density."""
    known = [side for side in sides(state) if state.specimen_of(side).density is not None]
    tables = tuple(_wave_table(state, side) for side in known)
    return WavesView(tables, "" if len(known) == len(sides(state)) else NO_DENSITY)


def _wave_table(state: BenchState, side: str) -> WaveTable:
    specimen, choice = state.specimen_of(side), state.orientation_of(side)
    found = waves_along(live.part_medium(specimen, choice), state.pin)
    rows, notes = _scalar_rows(found) + _vector_rows(found), _notes(found)
    if specimen.frame.has_basis:
        near = _near_words(found, live.rotation(choice, specimen), specimen.frame)
        notes = (near, *notes) if near else notes
    return WaveTable(side, f"{side}, {specimen.name}", rows, notes)


@dataclass(frozen=True, eq=False)
class WavesAlong:
    """The three plane waves along one direction, part axes, fastest first.

    Attributes
    ----------
    speed, focusing, power_flow, longitudinality, impedance : ndarray, shape (3,)
        km/s, ratio, degrees, ratio, MRayl.
    polarisation, ray : ndarray, shape (3 sheets, 3)
        Unit vectors; rays in km/s. A polarisation points along the wave normal, or, where it
        is normal to it, to the side of its largest component.
    degenerate : ndarray of bool, shape (3,)
    """

    speed: FloatArray
    focusing: FloatArray
    power_flow: FloatArray
    longitudinality: FloatArray
    impedance: FloatArray
    polarisation: FloatArray
    ray: FloatArray
    degenerate: BoolArray


@lru_cache(maxsize=4)
def waves_along(medium: Medium, pin: Vector3) -> WavesAlong:
    """Return the waves along a direction; of degenerate ones no polarisation (NaN)."""
    one = directions(np.array(pin))
    found, bent = waves.modes(medium, one), waves.curvature(medium, one)
    degenerate = found.degenerate[:, 0]
    polarisation = np.stack([_pointing(p[:, 0], one.n[:, 0]) for p in found.polarisation])
    along = np.abs(polarisation @ one.n[:, 0])
    # Of two pure shear waves any mixture is one, too; of others the share is as arbitrary.
    along[degenerate & (along > _DUST)] = np.nan
    polarisation[degenerate] = np.nan
    return WavesAlong(
        speed=found.speed[:, 0],
        focusing=bent.focusing[:, 0],
        power_flow=waves.power_flow(medium, one)[:, 0],
        longitudinality=along,
        impedance=waves.impedance(medium, one)[:, 0],
        polarisation=polarisation,
        ray=bent.velocity[:, :, 0],
        degenerate=degenerate,
    )


def _pointing(p: FloatArray, n: FloatArray) -> FloatArray:
    """Return a polarisation with a sign that does not depend on how it was found."""
    sense = p @ n if abs(p @ n) > _DUST else p[np.argmax(np.abs(p).round(9))]
    return np.asarray(np.copysign(1.0, sense) * p)


def _scalar_rows(found: WavesAlong) -> tuple[WaveRow, ...]:
    with np.errstate(divide="ignore"):
        slowness = 1.0 / found.speed
    group = np.sqrt((found.ray**2).sum(axis=1))
    return (
        _row("phase speed", found.speed, "km/s", quantity("phase").definition),
        _row("slowness", slowness, "s/km", quantity("slowness").definition),
        _row("group speed", group, "km/s", quantity("wave").definition),
        _row("power flow off", found.power_flow, "°", quantity("power_flow").definition),
        _row("focusing", found.focusing, "", quantity("focusing").definition),
        _row("impedance", found.impedance, "MRayl", "Z = ρ v of a plane wave."),
        _row(
            "longitudinality",
            found.longitudinality,
            "",
            "|p·n|: 1 for a purely longitudinal wave, 0 for a pure shear wave.",
        ),
    )


def _vector_rows(found: WavesAlong) -> tuple[WaveRow, ...]:
    length = np.sqrt((found.ray**2).sum(axis=1, keepdims=True))
    return tuple(
        _row(f"{words}, {letter}", vectors[:, axis], "", f"{tip}, along part {letter}.")
        for words, vectors, tip in (
            ("polarisation", found.polarisation, "Unit vector of the particle motion"),
            ("ray", found.ray / length, "Unit vector along which the energy travels"),
        )
        for axis, letter in enumerate("XYZ")
    )


def _row(label: str, values: FloatArray, unit: str, tooltip: str) -> WaveRow:
    numbers = [0.0 if abs(value) < _DUST else value for value in values.tolist()]
    return WaveRow(
        label, _three(numbers, significant), unit, _three(numbers, full_precision), tooltip
    )


def _three(numbers: list[float], text: Text) -> tuple[str, str, str]:
    fast, middle, slow = (text(number) for number in numbers)
    return fast, middle, slow


def _near_words(found: WavesAlong, turn: FloatArray, frame: CrystalFrame) -> str:
    """Return the low-index directions that the rays are near."""
    words = [
        f"{name} {axis_words(turn.T @ ray, frame)}"
        for name, ray in zip(SHEET_NAMES, found.ray, strict=True)
        if np.isfinite(ray).all()
    ]
    return f"Rays near: {', '.join(words)}." if words else ""


def _notes(found: WavesAlong) -> tuple[str, ...]:
    """Return in words where waves meet here, and which do not propagate."""
    notes = []
    if found.degenerate.all():
        notes.append("All three waves meet here: polarisations are not determined.")
    elif found.degenerate.any():
        pair = PAIRS[0 if found.degenerate[0] else 1]
        notes.append(
            f"The {pair} waves meet here: their polarisations are not determined, and the ray "
            "is the middle of theirs."
        )
    notes += [
        f"The {name} wave does not propagate here: ρv² is not positive."
        for name, speed in zip(SHEET_NAMES, found.speed, strict=True)
        if np.isnan(speed)
    ]
    return tuple(notes)


# ------------------------------------------------------------------ arrivals
@dataclass(frozen=True)
class ArrivalsRequest:
    """What the arrivals depend on: the media in part axes, by side, and the ray."""

    media: tuple[tuple[str, Medium], ...]
    ray: Vector3


FoundArrivals = Mapping[str, tuple[Arrival, ...]]


def arrivals_request(state: BenchState) -> ArrivalsRequest:
    """Return what is to be found for every side that has a density."""
    return ArrivalsRequest(
        tuple(
            (side, live.part_medium(state.specimen_of(side), state.orientation_of(side)))
            for side in sides(state)
            if state.specimen_of(side).density is not None
        ),
        state.pin,
    )


def find_arrivals(request: ArrivalsRequest, ticker: Ticker) -> FoundArrivals:
    """Find the arrivals of every side; some 20 to 100 ms each."""
    found = {}
    for number, (side, medium) in enumerate(request.media):
        ticker.tick(number / len(request.media))
        found[side] = arrivals(medium, np.array(request.ray))
    return found


_ARRIVAL_HEADER = ("", "V km/s", "v km/s", "n off °", "focusing")


def arrivals_view(found: FoundArrivals | None, ray: Vector3, pending: bool) -> LinkedView:
    """Return what arrives along a ray, the first to arrive first.

    Parameters
    ----------
    found : mapping or None
        By side; None while nothing has been found yet.
    ray : tuple of 3 floats
        Part axes.
    pending : bool
        Whether a newer result is on its way.
    """
    if found is None:
        return LinkedView(_ARRIVAL_HEADER, (), pending, FINDING if pending else NO_DENSITY)
    line = np.array(ray)
    groups = tuple(
        (side if len(found) > 1 else "", tuple(_arrival_row(one, line) for one in some))
        for side, some in found.items()
    )
    none = [side for side, some in found.items() if not some]
    notice = "Nothing arrives along this ray." if none == list(found) else ""
    return LinkedView(_ARRIVAL_HEADER, groups, pending, notice)


def _arrival_row(arrival: Arrival, ray: FloatArray) -> LinkedRow:
    name = SHEET_NAMES[arrival.sheet]
    normal = arrival.normal
    off = float(np.degrees(np.arctan2(np.linalg.norm(np.cross(normal, ray)), normal @ ray)))
    if off < _AIM:
        off = 0.0
    numbers = (arrival.ray_speed, arrival.phase_speed, off, arrival.focusing)
    x, y, z = (significant(round(component, 6), 3) for component in normal.tolist())
    tooltip = f"Wave normal n: {x}  {y}  {z} in part axes, {significant(off, 3)}° off the ray."
    if arrival.where == "ring":
        name += ", ring"
        tooltip += (
            " One of a closed ring of wave normals whose energy all travels along this ray "
            "(external conical refraction)."
        )
    if arrival.degenerate:
        tooltip += " Another wave has the same speed there."
    return LinkedRow(
        (name, *(significant(0.0 if abs(number) < _DUST else number) for number in numbers)),
        (name, *(full_precision(number) for number in numbers)),
        unit_vector(normal),
        f"Put the pin on the wave normal of this arrival: {name}",
        tooltip,
    )


# ------------------------------------------------------------------ degenerate directions
PAIRS = ("fastest and middle", "middle and slowest")
_KINDS = {
    "conical": (
        "cone",
        "The sheets meet at a point: a beam along it spreads into a cone of rays (internal "
        "conical refraction) of this half-angle.",
    ),
    "tangential": ("touch", "The sheets touch: both waves send their energy one way."),
    "line": ("line", "The sheets cross along a whole curve, on which this direction lies."),
    "all": ("everywhere", "The two waves are one in every direction."),
}
_AXES_HEADER = ("", "v km/s", "cone °", "")


def axes_view(
    specimen: Specimen, turn: FloatArray, found: Axes | None, pending: bool
) -> LinkedView:
    """Return the directions in which two waves are as fast.

    Parameters
    ----------
    specimen : Specimen
    turn : ndarray, shape (3, 3)
        v_part = turn v_crystal, to say go-links in part axes.
    found : tuple of AcousticAxis or None
        Crystal axes; None while nothing has been found yet.
    pending : bool
        Whether a newer result is on its way.
    """
    if specimen.density is None:
        return LinkedView(_AXES_HEADER, (), notice=NO_DENSITY)
    if found is None:
        return LinkedView(_AXES_HEADER, (), pending, FINDING)
    groups = tuple(
        (f"{words} wave", tuple(_axis_row(specimen, turn, axis) for axis in axes))
        for pair, words in enumerate(PAIRS)
        if (axes := [axis for axis in found if axis.pair == pair])
    )
    notice = "" if groups else "No two waves are as fast in any direction."
    return LinkedView(_AXES_HEADER, groups, pending, notice)


def _axis_row(specimen: Specimen, turn: FloatArray, axis: AcousticAxis) -> LinkedRow:
    kind, tooltip = _KINDS[axis.kind]
    vector = axis.direction
    place = "" if axis.kind == "all" else place_words(vector, specimen.frame, turn)
    tooltip += f"\n{', '.join(full_precision(x) for x in vector.tolist())} in crystal axes"
    cone = axis.half_angle_deg if axis.kind == "conical" else None
    return LinkedRow(
        (kind, significant(axis.speed), "" if cone is None else significant(cone, 3), place),
        (kind, full_precision(axis.speed), full_precision(cone), place),
        None if axis.kind == "all" else unit_vector(turn @ vector),
        f"Put the pin where the {PAIRS[axis.pair]} waves are as fast: {place}",
        tooltip,
    )
