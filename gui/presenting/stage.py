"""View data of the stage: the tool bar above it and the two panes."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np

from core import live
from core.arrays import Float32Array, FloatArray
from core.crystal.cell import axes_matrix
from core.crystal.directions import nearest_indices
from core.directional.medium import Medium
from core.directional.quantities import QUANTITIES, Quantity, quantity
from core.directional.seams import MendedSheet, Seams, find_seams, mend
from core.directional.sphere import sphere_mesh
from core.directional.surfaces import Fields, SurfaceMaker
from core.directional.waves import longitudinality, modes
from core.numbers import MINUS, significant
from core.state import BenchState, Vector3
from core.study.true_range import true_range
from gui.plots.grid import nice_ticks, tick_texts
from gui.presenting.axes import Axes, AxesOf, axes_in_part, axes_now, single_directions
from gui.viewdata import (
    DirectionMark,
    PaneView,
    ScaleView,
    SheetView,
    ToolbarView,
    Triad,
)

PLANES: dict[str, Vector3] = {
    "XY": (0.0, 0.0, 1.0),
    "XZ": (0.0, 1.0, 0.0),
    "YZ": (1.0, 0.0, 0.0),
}
COLOURS = {
    "value": "colour: value",
    "longitudinality": "colour: how longitudinal",
    "power_flow": "colour: power-flow angle",
    "focusing": "colour: focusing",
}
SHEET_NAMES = ("fastest", "middle", "slowest")
NO_DENSITY = "Waves want a density. Enter it in the ledger; the stiffness side works without."
ALL_HIDDEN = "All sheets are hidden: show one in the bar above."
LEFT_OUT = "Left out where it is not defined or has no bound: the table is unstable."
_EXACT_DEG = 1e-5  # a normal this near a low-index one is that one
_TICK_LEVEL = 2  # 162 vertices: enough ticks to read, few enough to see the sheet
_TALLEST = 3.0  # times the median: where a quantity runs off to infinity, it is cut there
_COLOUR_VALUES = {
    "longitudinality": longitudinality,
    **{key: entry.values for key, entry in QUANTITIES.items() if entry.sheets == 3},
}
_FOCUSING_RANGE = (0.05, 20.0)  # focusing is infinite on caustics: colours stop here
_ALIKE = 1e-9  # of the size of a quantity: values that differ by less are one value
_ALIKE_DRAWN = 1e-6  # the same of surfaces, which are kept to seven digits
_RIGHT_ANGLE = 90.0  # degrees: the size of an angle, which may itself be zero everywhere
_FEWEST_DIGITS, _MOST_DIGITS = 4, 10  # of the ends of a scale


def toolbar_view(state: BenchState, linked: bool) -> ToolbarView:
    """Return the controls above the stage."""
    shown = quantity(state.quantity)
    known = has_density(state)
    display = state.display
    return ToolbarView(
        quantity=state.quantity,
        quantities=tuple(
            (key, entry.name, f"{entry.definition} ({entry.unit or 'no unit'})")
            for key, entry in QUANTITIES.items()
        ),
        enabled=tuple(key for key, entry in QUANTITIES.items() if known or not entry.wave),
        layout=display.layout,
        sheets=display.sheets if shown.sheets == 3 else None,
        colour_by=display.colour_by if shown.sheets == 3 else "value",
        colours=tuple(COLOURS.items()) if shown.sheets == 3 else (),
        shared_scale=display.shared_scale,
        linked_cameras=linked,
        cut_away=display.cut_away,
        crystal_axes=display.crystal_axes,
        marks=display.marks,
        ticks=display.ticks,
    )


def hidden_notice(state: BenchState) -> str:
    """Return the sentence for three sheets of which none is shown, or nothing."""
    hides_all = quantity(state.quantity).sheets == 3 and not any(state.display.sheets)
    is_known = any(state.specimen_of(side).density is not None for side in sides(state))
    return ALL_HIDDEN if hides_all and is_known else ""


def has_density(state: BenchState) -> bool:
    """Return whether every crystal on the stage has a density."""
    return all(state.specimen_of(side).density is not None for side in sides(state))


def sides(state: BenchState) -> tuple[str, ...]:
    """Return the sides that the stage shows."""
    return tuple(state.display.layout)


def plane_key(normal: Vector3) -> str:
    """Return "XY", "XZ", "YZ" or "other"."""
    for key, axis in PLANES.items():
        if abs(np.dot(axis, normal)) > 1 - 1e-12:
            return key
    return "other"


def plane_choices(state: BenchState) -> tuple[tuple[str, str], ...]:
    """Return the section planes to choose from, the present one among them."""
    choices = [(key, f"part {key}") for key in PLANES]
    choices.append(("pin", "through X and the pin"))
    if plane_key(state.section) == "other":
        choices.append(("other", f"normal {_normal_words(state)}"))
    return tuple(choices)


def _normal_words(state: BenchState) -> str:
    """Return a plane or direction of the crystal that is exactly a free normal, or numbers."""
    side = sides(state)[0]
    specimen = state.specimen_of(side)
    turn = live.rotation(state.orientation_of(side), specimen)
    if specimen.frame.has_basis:
        normal = turn.T @ np.array(state.section)
        for plane in (True, False):
            near = nearest_indices(normal, specimen.frame, largest=6, plane=plane)
            if near.angle_deg < _EXACT_DEG:
                return f"{near.text.replace('-', MINUS)} of {side}'s crystal"
    return "  ".join(significant(round(x, 3), 3) for x in state.section)


# ------------------------------------------------------------------ panes
@dataclass(frozen=True, eq=False)
class Drawn:
    """The surfaces of one side, before scale and colours are settled between the sides."""

    side: str
    rows: tuple[Float32Array, ...]  # one array a sheet
    medium: Medium
    axes: Axes  # acoustic axes in part axes, as far as they are known


def pane_views(
    state: BenchState, fine: bool, axes_of: AxesOf = axes_now
) -> dict[str, PaneView]:
    """Return the panes that the stage shows.

    With the fine mesh the sheets of waves are mended where they meet (see
    `core.directional.seams`), as far as `axes_of` knows where that is.
    """
    shown = quantity(state.quantity)
    if hidden_notice(state):
        return {side: _empty_pane(state, side, shown) for side in sides(state)}
    level = live.FINE_LEVEL if fine else live.COARSE_LEVEL
    drawn = {}
    for side in sides(state):
        if shown.wave and state.specimen_of(side).density is None:
            continue
        medium = live.part_medium(state.specimen_of(side), state.orientation_of(side))
        axes = axes_in_part(state, side, axes_of) if shown.wave else ()
        drawn[side] = Drawn(side, coloured_rows(medium, state, level), medium, axes)
    groups = [tuple(drawn)] if state.display.shared_scale else [(side,) for side in drawn]
    views = {}
    for group in groups:
        radius, scale = _settle([drawn[side] for side in group], state, shown, fine)
        for side in group:
            views[side] = _pane(state, shown, drawn[side], radius, scale, level, fine)
    return {side: views.get(side) or _empty_pane(state, side, shown) for side in sides(state)}


def coloured_rows(medium: Medium, state: BenchState, level: int) -> tuple[Float32Array, ...]:
    """Return the rows of each sheet with the values that the colours follow in the last row."""
    return _sheet_rows(medium, state.quantity, state.display.colour_by, level)


@lru_cache(maxsize=8)
def _sheet_rows(
    medium: Medium, key: str, colour: str, level: int
) -> tuple[Float32Array, ...]:
    """Return the sheets apart, the same objects for the same request: the stage goes by it."""
    is_plain = colour in ("value", key) or quantity(key).sheets == 1
    rows = bounded_rows(medium, key, level)
    if is_plain and not quantity(key).logarithmic:
        return tuple(rows)
    coloured = rows.copy()
    if not is_plain:
        values = _COLOUR_VALUES[colour](medium, sphere_mesh(level).half)
        coloured[:, 6] = np.tile(values, 2)
    _keep_to_colours(coloured, key if is_plain else colour)
    return tuple(coloured)


def _keep_to_colours(rows: Float32Array, colour: str) -> None:
    """Take values beyond the ends of a logarithmic scale back to them.

    Between two vertices the drawing goes straight from one value to the other: a thousand
    beside a caustic would paint most of its triangles in the colour of twenty.
    """
    if colour in QUANTITIES and quantity(colour).logarithmic:
        np.clip(rows[:, 6], *_FOCUSING_RANGE, out=rows[:, 6])


def _settle(
    group: list[Drawn], state: BenchState, shown: Quantity, fine: bool
) -> tuple[float, ScaleView]:
    """Return the length that fills a pane and the colour scale, shared by a group of sides.

    At rest (`fine`) the scale ends at the very extremes, not at those of the vertices.
    """
    seen = [sheet for one in group for sheet in _visible(one.rows, state)]
    if not seen:
        seen = [sheet for one in group for sheet in one.rows]
    # Squares summed by planes: a (3, N) temporary would cost as much as the surface.
    radius = max(
        (float(np.sqrt(np.nanmax(_squared_length(sheet), initial=0.0))) for sheet in seen),
        default=1.0,
    )
    values = [sheet[6] for sheet in seen]
    low = min((float(np.nanmin(v, initial=np.inf)) for v in values), default=0.0)
    high = max((float(np.nanmax(v, initial=-np.inf)) for v in values), default=1.0)
    about = _colour_quantity(state, shown)
    if fine and not about.logarithmic:
        low, high = _widened(low, high, group, state, shown)
    return radius or 1.0, scale_view(replace(about, alike=_ALIKE_DRAWN), low, high)


def _widened(
    low: float, high: float, group: list[Drawn], state: BenchState, shown: Quantity
) -> tuple[float, float]:
    """Return a range of vertices widened to the extremes between them, where known."""
    key = shown.key
    if shown.sheets == 3 and state.display.colour_by != "value":
        key = state.display.colour_by
    for one in group:
        ends = true_range(one.medium, key)
        if shown.sheets == 3 and any(state.display.sheets):
            ends = ends[np.flatnonzero(state.display.sheets)]
        if np.isfinite(ends).all():
            low, high = min(low, float(ends.min())), max(high, float(ends.max()))
    return low, high


def drawable_limit(sizes: FloatArray) -> float:
    """Return the largest size that is drawn, infinity where nothing is undefined.

    Beside directions in which a quantity is not defined it grows without bound, as 1/E towards
    zero in an unstable table; drawn whole, everything else would shrink to a point.
    """
    defined = np.abs(sizes[np.isfinite(sizes)])
    if defined.size == sizes.size or defined.size == 0:
        return np.inf
    return float(_TALLEST * np.median(defined))


@lru_cache(maxsize=8)
def bounded_rows(medium: Medium, key: str, level: int) -> Float32Array:
    """Return the surface rows, what runs off beyond `drawable_limit` drawn back to it."""
    rows = live.surface(medium, key, level)
    lengths = np.sqrt(np.stack([_squared_length(sheet) for sheet in rows]))
    limit = drawable_limit(lengths)
    if limit == np.inf:
        return rows
    with np.errstate(invalid="ignore"):
        shrink = np.minimum(np.float32(limit) / lengths, np.float32(1.0))
    bounded = rows.copy()
    bounded[:, :3] *= shrink[:, np.newaxis, :]
    if quantity(key).shape != "slowness" or key == "slowness":  # others only colour it
        bounded[:, 6] *= shrink
    return bounded


def _squared_length(sheet: Float32Array) -> Float32Array:
    x, y, z = sheet[:3]
    squared: Float32Array = x * x + y * y + z * z
    return squared


def _visible(rows: tuple[Float32Array, ...], state: BenchState) -> list[Float32Array]:
    if len(rows) == 1:
        return list(rows)
    return [sheet for sheet, on in zip(rows, state.display.sheets, strict=True) if on]


@dataclass(frozen=True)
class ColourOf:
    """What a colour scale is about.

    Attributes
    ----------
    title : str
    diverging, logarithmic : bool
    size : float
        How large the quantity is where the values shown do not tell: differences may all be
        zero, and rounding is small beside what they are differences of.
    alike : float
        Values that differ by less than this part of the size are one value.
    """

    title: str
    diverging: bool = False
    logarithmic: bool = False
    size: float = 0.0
    alike: float = _ALIKE


def quantity_title(shown: Quantity) -> str:
    """Return "Young's modulus E, GPa"."""
    unit = f", {shown.unit}" if shown.unit else ""
    return f"{shown.name} {shown.symbol}{unit}"


def _colour_quantity(state: BenchState, shown: Quantity) -> ColourOf:
    colour = state.display.colour_by
    if shown.sheets == 3 and colour == "longitudinality":
        return ColourOf("how longitudinal, |p·n|", size=1.0)
    if shown.sheets == 3 and colour != "value":
        shown = quantity(colour)
    return colour_of(shown)


def colour_of(shown: Quantity) -> ColourOf:
    """Return the colours that tell a quantity itself."""
    size = _RIGHT_ANGLE if shown.unit == "°" else 0.0
    return ColourOf(quantity_title(shown), shown.signed, shown.logarithmic, size)


def scale_view(about: ColourOf, low: float, high: float) -> ScaleView:
    """Return the colour scale over a range of values.

    A range that is nothing but rounding is one value: both ends are that value, and there are
    no ticks.
    """
    if not (np.isfinite(low) and np.isfinite(high)):
        low, high = 0.0, 1.0
    size = max(about.size, abs(low), abs(high))
    if high - low <= about.alike * size:
        value = 0.5 * (low + high)
        return _constant_scale(about, 0.0 if abs(value) <= about.alike * size else value)
    ends = _end_texts(low, high)
    if about.logarithmic:
        least, most = _FOCUSING_RANGE
        ends = (
            f"≤ {least:g}" if low < 1.001 * least else ends[0],
            f"≥ {most:g}" if high > 0.999 * most else ends[1],
        )
        low, high = np.clip((low, high), least, most).tolist()
        ticks = tuple(x for x in (0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0) if low < x < high)
        texts = tuple(f"{x:g}" for x in ticks)
    else:
        ticks = nice_ticks(low, high, 5)
        texts = tick_texts(ticks)
    return ScaleView(
        low,
        high,
        *ends,
        about.title,
        about.diverging and low < 0,
        tuple(zip(ticks, texts, strict=True)),
        about.logarithmic,
    )


def _constant_scale(about: ColourOf, value: float) -> ScaleView:
    """Return the scale of a quantity that is the same in every direction."""
    text = significant(value)
    is_diverging = about.diverging and value <= 0
    return ScaleView(value, value, text, text, about.title, is_diverging)


def _end_texts(low: float, high: float) -> tuple[str, str]:
    """Return the two ends in words, with as many digits as tell them apart."""
    for digits in range(_FEWEST_DIGITS, _MOST_DIGITS):
        texts = significant(low, digits), significant(high, digits)
        if texts[0] != texts[1]:
            return texts
    return significant(low, _MOST_DIGITS), significant(high, _MOST_DIGITS)


def _pane(
    state: BenchState,
    shown: Quantity,
    drawn: Drawn,
    radius: float,
    scale: ScaleView,
    level: int,
    fine: bool,
) -> PaneView:
    on = state.display.sheets if shown.sheets == 3 else (True,)
    sheets = tuple(
        SheetView(one.rows, one.triangles, visible)
        for one, visible in zip(_sheets(state, drawn, level, fine), on, strict=True)
    )
    missing = not drawn.medium.stiffness.is_stable and any(
        bool(np.isnan(rows[0]).any()) for rows in drawn.rows
    )
    return PaneView(
        side=drawn.side,
        title=pane_title(state, drawn.side),
        sheets=sheets,
        radius=radius,
        scale=scale,
        triads=_triads(state, drawn.side),
        marks=_marks(state, shown, drawn),
        section=state.section,
        cut_away=state.display.cut_away,
        ticks=_polarisation_ticks(state, shown, drawn, radius),
        notice=LEFT_OUT if missing else "",
        is_wave_surface=shown.shape == "wave",
    )


def _sheets(
    state: BenchState, drawn: Drawn, level: int, fine: bool
) -> tuple[MendedSheet, ...]:
    """Return the sheets of a side, mended when they are fine and defined everywhere."""
    if fine and drawn.axes and drawn.medium.stiffness.is_stable:
        colour = state.display.colour_by
        return _mended(drawn.medium, state.quantity, colour, level, drawn.axes)
    triangles = sphere_mesh(level).triangles
    return tuple(MendedSheet(rows, triangles) for rows in drawn.rows)


@lru_cache(maxsize=4)
def _mended(
    medium: Medium, key: str, colour: str, level: int, axes: Axes
) -> tuple[MendedSheet, ...]:
    rows = np.stack(_sheet_rows(medium, key, colour, level))
    seams = _seams(medium, level, axes)
    return mend(seams, medium, sphere_mesh(level), rows, _coloured_maker(key, colour))


@lru_cache(maxsize=4)
def _seams(medium: Medium, level: int, axes: Axes) -> Seams:
    return find_seams(medium, sphere_mesh(level), axes)


def _coloured_maker(key: str, colour: str) -> SurfaceMaker:
    """Return what makes the rows of a quantity in the colours that are shown."""
    is_plain = colour in ("value", key)

    def fill(fields: Fields, out: Float32Array) -> None:
        quantity(key).maker(fields, out)
        if not is_plain:
            out[:, 6] = _COLOUR_VALUES[colour](fields.medium, fields.directions)
        _keep_to_colours(out, key if is_plain else colour)

    return fill


def _empty_pane(state: BenchState, side: str, shown: Quantity) -> PaneView:
    scale = ScaleView(0.0, 1.0, "", "", quantity_title(shown), False)
    return PaneView(
        side=side,
        title=pane_title(state, side),
        sheets=(),
        radius=1.0,
        scale=scale,
        triads=(),
        marks=(),
        section=None,
        notice=NO_DENSITY if state.specimen_of(side).density is None else hidden_notice(state),
    )


def pane_title(state: BenchState, side: str) -> str:
    """Return the crystal and the orientation of a side in one line."""
    choice = state.orientation_of(side)
    words = choice.text if choice.text != "identity" else "part axes = crystal axes"
    if any(choice.turn):
        words += ", turned " + " ".join(f"{x:g}°" for x in choice.turn)
    words = words.replace("-", "−")
    return words if state.other is None else f"{state.specimen_of(side).name} · {words}"


def _triads(state: BenchState, side: str) -> tuple[Triad, ...]:
    part = Triad(((1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)), ("X", "Y", "Z"), "part")
    specimen = state.specimen_of(side)
    if not state.display.crystal_axes:
        return (part,)
    turn = live.rotation(state.orientation_of(side), specimen)
    if specimen.cell is None:
        axes, labels = np.eye(3), ("x", "y", "z")
    else:
        axes, labels = axes_matrix(specimen.cell, specimen.crystal_axes), ("a", "b", "c")
    vectors = turn @ (axes / np.linalg.norm(axes, axis=0))
    a, b, c = (unit_vector(vectors[:, k]) for k in range(3))
    return part, Triad((a, b, c), labels, "crystal")


def unit_vector(vector: FloatArray) -> Vector3:
    """Return a vector's direction as a tuple."""
    x, y, z = (vector / np.linalg.norm(vector)).tolist()
    return x, y, z


def _marks(state: BenchState, shown: Quantity, drawn: Drawn) -> tuple[DirectionMark, ...]:
    marks = [DirectionMark(state.pin, "", "pin")]
    if shown.wave and state.display.marks:
        marks += [
            DirectionMark(unit_vector(np.array(axis.direction)), "", "axis")
            for axis in single_directions(drawn.axes)
        ]
    return tuple(marks)


def _polarisation_ticks(
    state: BenchState, shown: Quantity, drawn: Drawn, radius: float
) -> FloatArray | None:
    """Return short lines along the polarisation on every visible sheet, (M, 2, 3)."""
    if not state.display.ticks or shown.sheets == 1 or not any(state.display.sheets):
        return None
    return _tick_lines(drawn.medium, state.quantity, state.display.sheets, radius)


@lru_cache(maxsize=4)
def _tick_lines(
    medium: Medium, key: str, sheets: tuple[bool, bool, bool], radius: float
) -> FloatArray:
    mesh = sphere_mesh(_TICK_LEVEL)
    polarisation = modes(medium, mesh.half).polarisation
    rows = live.surface(medium, key, _TICK_LEVEL)
    lines = []
    for sheet in np.flatnonzero(sheets):
        points = rows[sheet, :3].T.astype(np.float64)
        both = np.concatenate([polarisation[sheet], polarisation[sheet]], axis=1).T
        lines.append(
            np.stack([points - 0.045 * radius * both, points + 0.045 * radius * both], axis=1)
        )
    ticks = np.concatenate(lines)
    with np.errstate(invalid="ignore"):  # where nothing is defined, or it was drawn back
        is_drawn = np.linalg.norm(ticks.mean(axis=1), axis=1) <= 1.001 * radius
    return np.asarray(ticks[is_drawn])
