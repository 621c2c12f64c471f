"""View data of the deck: the section, the hemisphere, the sweep and the source picture."""

from __future__ import annotations

import itertools
import math
from functools import lru_cache

import numpy as np

from core import live
from core.arrays import FloatArray
from core.crystal.cell import CrystalFrame
from core.crystal.directions import nearest_indices
from core.directional.medium import Medium
from core.directional.projection import from_disc, to_disc
from core.directional.quantities import Quantity, quantity
from core.directional.sphere import plane_axes
from core.directional.waves import modes
from core.numbers import significant
from core.state import BenchState, Vector3
from core.study.true_range import true_range
from gui.plots.grid import nice_step, nice_ticks, tick_texts
from gui.presenting.axes import AxesOf, axes_in_part, axes_now, single_directions
from gui.presenting.discs import contour_lines, disc_values
from gui.presenting.rays import parted, parted_flags
from gui.presenting.spread import section_deviation
from gui.presenting.stage import (
    ALL_HIDDEN,
    NO_DENSITY,
    PLANES,
    SHEET_NAMES,
    ColourOf,
    colour_of,
    drawable_limit,
    hidden_notice,
    pane_title,
    plane_choices,
    plane_key,
    quantity_title,
    scale_view,
    sides,
    unit_vector,
)
from gui.viewdata import Curve, HemisphereView, SectionView, SourceView, SweepView

_ON_PLANE = 0.02  # |n·pin| below which the pin is drawn on the section
_SECTION_CLIP = {"focusing": 20.0}  # infinite on caustics: the plot stops here
LOGARITHMIC = (0.05, 20.0)  # values at the centre and at the rim of a logarithmic radius
_LOGARITHMIC_RINGS = (0.1, 1.0, 10.0)
_TICK_STEP = 24  # every so many points of a section carry a polarisation tick


def shown_sides(state: BenchState) -> tuple[str, ...]:
    """Return the sides whose quantity can be computed."""
    shown = quantity(state.quantity)
    return tuple(
        side
        for side in sides(state)
        if not shown.wave or state.specimen_of(side).density is not None
    )


def _is_known(state: BenchState) -> bool:
    """Tell whether a crystal that is shown has a density."""
    return any(state.specimen_of(side).density is not None for side in sides(state))


def _medium(state: BenchState, side: str) -> Medium:
    return live.part_medium(state.specimen_of(side), state.orientation_of(side))


# ------------------------------------------------------------------ section
def section_view(state: BenchState, is_live: bool = False) -> SectionView:
    """Return the polar section of A and B, with bands of one standard uncertainty.

    Of quantities whose uncertainty takes too long to follow an edit, the bands are left out
    while `is_live`.
    """
    shown = quantity(state.quantity)
    curves = [
        curve for side in shown_sides(state) for curve in _curves(state, shown, side, is_live)
    ]
    radius, rings = _radius_and_rings(shown, curves)
    across, up = plane_axes(np.array(state.section))
    dotted = any(
        flags is not None and flags.any()
        for curve in curves
        for flags in (curve.negative, curve.leaves)
    )
    return SectionView(
        title=quantity_title(shown),
        curves=tuple(curves),
        radius=radius,
        rings=rings,
        axis_labels=(axis_label(across), axis_label(up)),
        far_labels=far_labels(across, up),
        logarithmic=LOGARITHMIC if shown.logarithmic else None,
        unit=shown.unit,
        pin_angle=_pin_angle(state, across, up),
        negative_note=_dotted_note(shown, dotted),
        notice="" if curves else hidden_notice(state) or NO_DENSITY,
        legend=tuple((side, pane_title(state, side)) for side in shown_sides(state)),
        directions=_rim_directions(state, across, up),
        ticks=_section_ticks(state, shown, across, up),
        plane=plane_key(state.section),
        planes=plane_choices(state),
    )


def _radius_and_rings(
    shown: Quantity, curves: list[Curve]
) -> tuple[float, tuple[tuple[float, str], ...]]:
    """Return the radius of the drawing and its rings with their texts."""
    if shown.logarithmic and curves:
        return 1.0, tuple((float(_log_share(v)), f"{v:g}") for v in _LOGARITHMIC_RINGS)
    radius = max((_reach(curve) for curve in curves), default=0.0)
    ticks = nice_ticks(0.0, radius, 4)[1:] if radius > 0 else ()
    return radius, tuple(zip(ticks, tick_texts(ticks), strict=True))


def _log_share(values: FloatArray | float) -> FloatArray:
    """Return how far out values stand on a logarithmic radius: 0 the centre, 1 the rim."""
    low, high = LOGARITHMIC
    kept = np.clip(values, low, high)  # leaves NaN alone
    return np.asarray(np.log(kept / low) / np.log(high / low))


def _on_log_radius(points: FloatArray) -> FloatArray:
    """Return points (2, ...) moved along their rays to where their logarithm stands."""
    length = np.hypot(points[0], points[1])
    share = _log_share(length)
    return np.asarray(points * (share / np.where(length > 0.0, length, 1.0)))


def _reach(curve: Curve) -> float:
    """Return how far out a curve goes, the outer edge of its band included."""
    outer = curve.points if curve.band is None else curve.band[1]
    return max(
        float(np.nanmax(np.hypot(*points), initial=0.0)) for points in (curve.points, outer)
    )


def _curves(state: BenchState, shown: Quantity, side: str, is_live: bool) -> list[Curve]:
    found = live.section(_medium(state, side), state.quantity, state.section)
    limit = _SECTION_CLIP.get(shown.key, drawable_limit(found.values))
    sigmas = section_deviation(state, side, is_live)
    curves = []
    for sheet, (points, values) in enumerate(zip(found.points, found.values, strict=True)):
        if shown.sheets == 3 and not state.display.sheets[sheet]:
            continue
        with np.errstate(invalid="ignore"):
            drawn = np.where(np.abs(values) > limit, np.nan, points)
        negative = values < 0 if shown.signed else None
        label = SHEET_NAMES[sheet] if shown.sheets == 3 else ""
        band = None if sigmas is None else _band(drawn, sigmas[sheet], limit)
        leaves = None
        if shown.shape == "wave":
            gaps = np.flatnonzero(found.broken[sheet])
            drawn = parted(drawn, gaps)
            leaves = parted_flags(found.out_of_plane[sheet], gaps)
            band = None if band is None else parted(band, gaps)
        if shown.logarithmic:
            drawn = _on_log_radius(drawn)
            band = None if band is None else np.stack([_on_log_radius(edge) for edge in band])
        curves.append(Curve(drawn, side, sheet, label, band, negative, leaves))
    return curves


def _band(points: FloatArray, sigma: FloatArray, limit: float) -> FloatArray:
    """Return the inner and the outer edge of a band, (2, 2, N); nowhere beyond `limit`."""
    radius = np.hypot(*points)
    with np.errstate(invalid="ignore", divide="ignore"):
        width = np.where(sigma < limit, sigma, np.nan) / radius
        inner = np.maximum(1.0 - width, 0.0)
        outer = np.minimum(1.0 + width, limit / radius)
    return np.stack([inner * points, outer * points])


def _dotted_note(shown: Quantity, dotted: bool) -> str:
    if not dotted:
        return ""
    return (
        "dotted: the ray leaves the plane"
        if shown.shape == "wave"
        else ("dotted where negative")
    )


def axis_label(vector: FloatArray) -> str:
    """Return "X" for a part axis, or the components of another direction."""
    for name, axis in zip("XYZ", np.eye(3), strict=True):
        if abs(vector @ axis) > 1 - 1e-9:
            return name if vector @ axis > 0 else f"−{name}"
    return " ".join(significant(round(float(x), 2), 2) for x in vector)


def far_labels(across: FloatArray, up: FloatArray) -> tuple[str, str]:
    """Return what stands at the far ends of two axes: "−X", and nothing for a free direction.

    Three numbers at either end would leave the drawing no room, and say the same twice.
    """
    left, below = (axis_label(-vector) for vector in (across, up))
    return ("" if " " in left else left, "" if " " in below else below)


def _pin_angle(state: BenchState, across: FloatArray, up: FloatArray) -> float | None:
    pin = np.array(state.pin)
    if abs(pin @ np.array(state.section)) > _ON_PLANE:
        return None
    return float(np.arctan2(pin @ up, pin @ across))


def section_direction(state: BenchState, angle: float) -> Vector3:
    """Return the direction at an angle of the section, part axes."""
    across, up = plane_axes(np.array(state.section))
    return unit_vector(np.cos(angle) * across + np.sin(angle) * up)


def _rim_directions(
    state: BenchState, across: FloatArray, up: FloatArray
) -> tuple[tuple[float, str], ...]:
    """Return the simplest lattice directions of A's crystal that lie in the plane."""
    side = sides(state)[0]
    specimen = state.specimen_of(side)
    if not specimen.frame.has_basis or state.display.layout == "AB":
        return ()
    turn = live.rotation(state.orientation_of(side), specimen)
    marks, seen = [], set()
    for degrees in range(0, 180, 5):
        angle = np.deg2rad(degrees)
        vector = turn.T @ (np.cos(angle) * across + np.sin(angle) * up)
        near = nearest_indices(vector, specimen.frame, largest=2)
        named = turn @ np.array(near.vector)
        off = abs(named @ np.cross(across, up))
        if off > 1e-6 or near.text in seen:
            continue
        seen.add(near.text)
        where = float(np.arctan2(named @ up, named @ across))
        marks.append((where, near.text.replace("-", "−")))
    return tuple(marks[:8])


def _section_ticks(
    state: BenchState, shown: Quantity, across: FloatArray, up: FloatArray
) -> FloatArray | None:
    """Return polarisation ticks on the curves of the first side, shape (2, 2, M)."""
    if not state.display.ticks or shown.sheets == 1 or shown.logarithmic:
        return None
    if not shown_sides(state):
        return None
    medium = _medium(state, shown_sides(state)[0])
    found = live.section(medium, state.quantity, state.section)
    circle = live.section_circle(state.section)
    polarisation = modes(medium, circle).polarisation
    size = 0.045 * float(np.nanmax(np.abs(found.points), initial=0.0))
    lines = []
    for sheet, visible in enumerate(state.display.sheets):
        if visible:
            points = found.points[sheet][:, ::_TICK_STEP]
            p = polarisation[sheet][:, ::_TICK_STEP]
            flat = size * np.stack([across @ p, up @ p])
            lines.append(np.stack([points - flat, points + flat], axis=1).transpose(1, 0, 2))
    return np.concatenate(lines, axis=2) if lines else None


def plane_normal(state: BenchState, key: str) -> Vector3 | None:
    """Return the normal of a plane of the combo; None for one that is typed."""
    if key in PLANES:
        return PLANES[key]
    if key == "pin":
        pin = np.array(state.pin)
        normal = np.cross(pin, (1.0, 0.0, 0.0))
        if np.linalg.norm(normal) < 1e-9:
            normal = np.array((0.0, 1.0, 0.0))
        return unit_vector(normal)
    return state.section if key == "other" else None


# ------------------------------------------------------------------ hemisphere
_SHOWN = {"A": "A", "B": "B", "difference": "B − A", "cost": "cutting error"}


def hemisphere_view(
    state: BenchState, fine: bool = True, axes_of: AxesOf = axes_now
) -> HemisphereView:
    """Return the hemisphere of A, of B, of their difference, or of what a cutting error costs.

    While something moves it has fewer pixels and no contours.
    """
    size = live.DISC_SIZE if fine else live.COARSE_DISC_SIZE
    shown = quantity(state.quantity)
    choice = _hemisphere_choice(state)
    sides_wanted = _sides_of(state, choice)
    known = all(side in shown_sides(state) for side in sides_wanted)
    projection = state.display.projection
    sheet = min(state.display.hemisphere_sheet, shown.sheets - 1)
    picture = np.full((2, 2), np.nan)
    media: tuple[Medium, ...] = ()
    if known:
        media = tuple(_medium(state, side) for side in sides_wanted)
        picture = disc_values(
            media, shown.key, choice, sheet, projection, state.cutting_error_deg, size
        )
    about = _colour_of(state, shown, choice, sides_wanted, media)
    ends = _picture_range(about, picture, projection, size)
    if known and fine and choice in ("A", "B") and not about.logarithmic:
        ends = _widened(ends, true_range(media[0], shown.key)[sheet])
    scale = scale_view(about, *ends)
    levels = tuple(value for value, _ in scale.ticks)
    return HemisphereView(
        title=about.title,
        picture=picture,
        scale=scale,
        contours=contour_lines(picture, levels) if known and fine else (),
        marks=_hemisphere_marks(state, choice, axes_of) if known else (),
        lines=_degenerate_lines(state, choice, axes_of) if known else (),
        projection=projection,  # type: ignore[arg-type]
        shown=choice,
        choices=_hemisphere_choices(state),
        sheet=sheet,
        sheets=tuple(enumerate(SHEET_NAMES)) if shown.sheets == 3 else (),
        notice="" if known else NO_DENSITY,
    )


def _picture_range(
    about: ColourOf, picture: FloatArray, projection: str, size: int
) -> tuple[float, float]:
    """Return the least and the greatest value of a picture that its colours tell apart."""
    if not np.isfinite(picture).any():
        return 0.0, 1.0
    values = picture[live.disc(projection, size)[1]]
    limit = np.inf if about.logarithmic else drawable_limit(values)
    low, high = float(np.nanmin(picture)), float(np.nanmax(picture))
    return max(low, -limit), min(high, limit)


def _widened(ends: tuple[float, float], true: FloatArray) -> tuple[float, float]:
    """Return the range of a picture widened to the extremes between its pixels, where known."""
    low, high = ends
    if not np.isfinite(true).all():
        return ends
    return min(low, float(true[0])), max(high, float(true[1]))


def _hemisphere_choices(state: BenchState) -> tuple[tuple[str, str], ...]:
    both = len(sides(state)) == 2
    keys = ("A", "B", "difference", "cost") if both else (sides(state)[0], "cost")
    return tuple((key, _SHOWN[key]) for key in keys)


def _hemisphere_choice(state: BenchState) -> str:
    choice = state.display.hemisphere
    offered = [key for key, _ in _hemisphere_choices(state)]
    return choice if choice in offered else offered[0]


def _sides_of(state: BenchState, choice: str) -> tuple[str, ...]:
    """Return the sides that a choice of the hemisphere is about."""
    if choice == "difference":
        return ("A", "B")
    return (choice,) if choice in ("A", "B") else (shown_sides(state) or sides(state))[:1]


def _colour_of(
    state: BenchState, shown: Quantity, choice: str, about: tuple[str, ...],
    media: tuple[Medium, ...],
) -> ColourOf:  # fmt: skip
    """Return what the colours of the hemisphere tell."""
    colours, title = colour_of(shown), quantity_title(shown)
    if choice not in ("difference", "cost"):
        return colours
    sizes = [float(np.nan_to_num(np.abs(true_range(medium, shown.key))).max())
             for medium in media]  # fmt: skip
    size = max([colours.size, *sizes])
    if choice == "difference":
        return ColourOf(f"B − A: {title}", diverging=True, size=size)
    words = f"change of {title} within ±{state.cutting_error_deg:g}° ({about[0]})"
    return ColourOf(words, size=size)


def _hemisphere_marks(
    state: BenchState, choice: str, axes_of: AxesOf
) -> tuple[tuple[float, float, str, str], ...]:
    """Return the pin, the low-index directions and the acoustic axes on the disc."""
    projection = state.display.projection
    side = choice if choice in ("A", "B") else sides(state)[0]
    specimen = state.specimen_of(side)
    marks = [(*_on_disc(state.pin, projection), "", "pin")]
    if specimen.frame.has_basis:
        turn = live.rotation(state.orientation_of(side), specimen)
        marks += [
            (*_on_disc(unit_vector(turn @ vector), projection), text, "direction")
            for text, vector in low_directions(specimen.frame)
            if _is_upper(turn @ vector)
        ]
    if _marks_axes(state, side):
        marks += [
            (*_on_disc(unit_vector(axis.direction), projection), "", "axis")
            for axis in single_directions(axes_in_part(state, side, axes_of))
        ]
    return tuple(marks)


def _marks_axes(state: BenchState, side: str) -> bool:
    """Return whether acoustic axes are to be marked on the hemisphere of a side."""
    has_density = state.specimen_of(side).density is not None
    return state.display.marks and has_density and quantity(state.quantity).wave


def _degenerate_lines(
    state: BenchState, choice: str, axes_of: AxesOf
) -> tuple[FloatArray, ...]:
    """Return the lines along which two waves are as fast, on the disc."""
    side = choice if choice in ("A", "B") else sides(state)[0]
    if not _marks_axes(state, side):
        return ()
    curves = [axis.curve for axis in axes_in_part(state, side, axes_of)]
    return tuple(
        _line_on_disc(curve, state.display.projection) for curve in curves if curve is not None
    )


def _line_on_disc(curve: FloatArray, projection: str) -> FloatArray:
    """Return directions (3, M), or their opposites, on the disc; NaN where that changes."""
    below = curve[2] < 0
    points = to_disc(np.where(below, -curve, curve), projection)
    points[:, 1:][:, below[1:] != below[:-1]] = np.nan
    return points


@lru_cache(maxsize=4)
def low_directions(frame: CrystalFrame) -> tuple[tuple[str, FloatArray], ...]:
    """Return the simplest lattice directions of a crystal with their unit vectors."""
    basis = frame.basis()
    found: dict[str, FloatArray] = {}
    for steps in _SIMPLE_STEPS:
        vector = basis @ np.array(steps, dtype=float)
        vector /= np.linalg.norm(vector)
        near = nearest_indices(vector, frame, largest=1)
        if near.angle_deg < 1e-6:
            found.setdefault(near.text.replace("-", "−"), np.array(near.vector))
    return tuple(found.items())


def _is_upper(vector: FloatArray) -> bool:
    """Return whether a direction is the one of its two ends that the disc shows."""
    x, y, z = np.round(vector, 9)
    return bool(z > 0 or (z == 0 and (y > 0 or (y == 0 and x > 0))))


_SIMPLE_STEPS = tuple(
    step
    for size in (1, 2, 3)
    for step in itertools.product((1, 0, -1), repeat=3)
    if np.abs(step).sum() == size
)


def _on_disc(direction: Vector3, projection: str) -> tuple[float, float]:
    x, y = to_disc(np.array(direction).reshape(3, 1), projection)[:, 0].tolist()
    return x, y


def disc_direction(state: BenchState, x: float, y: float) -> Vector3:
    """Return the direction behind a point of the hemisphere, part axes."""
    return unit_vector(from_disc(np.array([[x], [y]]), state.display.projection)[:, 0])


# ------------------------------------------------------------------ sweep
_SWEEP = np.linspace(-90.0, 90.0, 361)
_SWEEP_AXES: dict[str, Vector3] = {
    "X": (1.0, 0.0, 0.0),
    "Y": (0.0, 1.0, 0.0),
    "Z": (0.0, 0.0, 1.0),
}


def sweep_axis(state: BenchState) -> Vector3:
    """Return the axis about which the sweep turns the pin, part axes."""
    return state.display.sweep_about or state.section


def sweep_choice(key: str) -> Vector3 | None:
    """Return the axis of a choice of the combo; None stands for the section's normal."""
    return _SWEEP_AXES.get(key)


def sweep_view(state: BenchState) -> SweepView:
    """Return the quantity against the angle from the pin."""
    shown = quantity(state.quantity)
    axis = sweep_axis(state)
    dirs = live.arc(state.pin, axis, _SWEEP)
    curves = []
    for side in shown_sides(state):
        values = quantity(shown.key).values(_medium(state, side), dirs)
        curves += [
            (side, sheet, row)
            for sheet, row in enumerate(values)
            if shown.sheets == 1 or state.display.sheets[sheet]
        ]
    chosen = next(
        (key for key, vector in _SWEEP_AXES.items() if state.display.sweep_about == vector),
        "normal",
    )
    parallel = abs(np.dot(axis, state.pin)) > 1 - 1e-9
    notice = "The pin lies on this axis: turning about it moves nothing." if parallel else ""
    return SweepView(
        title=f"{shown.name} away from the pin",
        angles=_SWEEP,
        curves=tuple(curves),
        axis=f"part {axis_label(np.array(axis))}",
        choices=(
            ("normal", "about the normal"),
            *((key, f"about part {key}") for key in _SWEEP_AXES),
        ),
        chosen=chosen,
        value_label=f"{shown.symbol}{', ' if shown.unit else ''}{shown.unit}",
        notice=notice if curves else hidden_notice(state) or NO_DENSITY,
    )


def sweep_direction(state: BenchState, degrees: float) -> Vector3:
    """Return the direction that far along the sweep from the pin, part axes."""
    found = live.arc(state.pin, sweep_axis(state), np.array([degrees]))
    return unit_vector(found.n[:, 0])


# ------------------------------------------------------------------ source picture
def _plane_words(state: BenchState) -> str:
    """Return what the section plane is called in a short sentence, "part XZ"."""
    key = plane_key(state.section)
    return "the section plane" if key == "other" else dict(plane_choices(state))[key]


def source_view(state: BenchState, time_us: float | None = None) -> SourceView:
    """Return the wavefronts from a point source in the section plane.

    They are as far as after the time that the bench shows, or after another one, µs.
    """
    if time_us is None:
        time_us = state.display.source_time_us
    across, up = plane_axes(np.array(state.section))
    curves = []
    for side in sides(state):
        if state.specimen_of(side).density is None:
            continue
        found = live.section(_medium(state, side), "wave", state.section)
        for sheet in np.flatnonzero(state.display.sheets).tolist():
            gaps = np.flatnonzero(found.broken[sheet])
            points = parted(found.points[sheet] * time_us, gaps)
            leaves = parted_flags(found.out_of_plane[sheet], gaps)
            curves.append((side, sheet, points, leaves))
    radius = max(
        (float(np.nanmax(np.hypot(*points), initial=0.0)) for _, _, points, _ in curves),
        default=0.0,
    )
    step = nice_step(radius, 4) if radius > 0 else 1.0
    rings = tuple(step * k for k in range(1, math.ceil(radius / step) + 1))
    return SourceView(
        title="Wavefronts from a point source",
        curves=tuple(curves),
        time_us=time_us,
        rings=tuple(zip(rings, tick_texts(rings), strict=True)),
        axis_labels=(axis_label(across), axis_label(up)),
        far_labels=far_labels(across, up),
        before_time=f"wavefronts in {_plane_words(state)} after",
        notice=("" if curves else ALL_HIDDEN if _is_known(state) else NO_DENSITY),
    )
