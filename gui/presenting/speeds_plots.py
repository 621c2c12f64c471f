"""View data of the plots on the page of measured speeds."""

from __future__ import annotations

from functools import lru_cache
from itertools import combinations

import numpy as np

from core import live
from core.arrays import BoolArray, FloatArray, IntArray
from core.crystal.cell import CrystalFrame
from core.crystal.directions import nearest_indices, parse_direction
from core.directional.projection import to_disc
from core.directional.sphere import plane_axes, sphere_mesh
from core.editing.readings import understand
from core.numbers import significant
from core.state import BenchState, MeasuredSpeeds, Vector3, as_matrix
from core.study.recovery.conflicts import outlier_limit
from core.study.recovery.fit import Fit
from core.study.recovery.model import basis_of, mean_stiffness
from core.study.recovery.planning import candidate_directions
from core.study.recovery.readings import Reading
from gui.plots.grid import nice_ticks, tick_texts
from gui.presenting.speeds import SHEETS, Found
from gui.presenting.stage import PLANES, ColourOf, scale_view, unit_vector
from gui.speeds.viewdata import (
    CorrelationView,
    ResidualPoint,
    ResidualsView,
    SectionPoint,
    SingularView,
    SpeedsSectionView,
)
from gui.viewdata import Curve, HemisphereView, SectionView

NO_FIT = "Nothing is fitted yet."
FITTING = "The fit is on its way."
_IN_PLANE_DEG = 1.0  # a reading this near a plane is drawn on its section
_MOST_PLANES = 5  # suggested beside the three of the axes
_MOST_PAIRED = 60  # directions whose pairs are tried for planes
_MOST_CARDS = 2000  # readings that get a card with all there is to say
_PIXELS = 91  # across the picture of the hemisphere
_NEAREST = 6  # candidates whose gains a pixel mixes
CANDIDATE_LEVEL = 4  # of the mesh among the candidates
_SPREAD = 0.045  # radians over which they are mixed: half their distance
_PICKED = 0.08  # of the disc's radius: how near a press must be to a measured direction


def _why_empty(found: Found) -> str:
    return found.notice or (FITTING if found.pending else NO_FIT)


# ------------------------------------------------------------------ residuals
def residuals_view(speeds: MeasuredSpeeds, found: Found) -> ResidualsView:
    """Return the residual plot."""
    fit = found.fit
    if fit is None:
        return ResidualsView((), 0, 3.0, found.pending, _why_empty(found))
    outliers = set(fit.outliers)
    has_cards = len(fit.readings) <= _MOST_CARDS
    points = tuple(
        ResidualPoint(
            reading.row,
            fit.sheets[number] - 1,
            float(fit.residuals[number]),
            reading.row in outliers,
            card_of(fit, number) if has_cards else (f"row {reading.row}",),
        )
        for number, reading in enumerate(fit.readings)
    )
    rows = max(len(speeds.rows), *(point.row for point in points))
    return ResidualsView(points, rows, outlier_limit(len(points)), found.pending)


def card_of(fit: Fit, number: int) -> tuple[str, ...]:
    """Return what there is to say of one reading."""
    reading = fit.readings[number]
    words = reading.text.replace("-", "−") or "  ".join(
        significant(x, 3) for x in reading.direction
    )
    kind = "group speed" if reading.kind == "group" else "phase speed"
    shift = fit.shifts[number]
    std = np.sqrt(np.maximum(np.diag(fit.parameter_covariance), 1e-300))
    most = int(np.abs(shift / std).argmax())
    lines = [
        f"row {reading.row}: {words}, {SHEETS[fit.sheets[number] - 1]} wave",
        f"{kind} {reading.speed:.1f} ± {significant(float(fit.sigma[number]), 2)} m/s",
        f"predicted {fit.predicted[number]:.1f} m/s",
        f"off by {significant(float(fit.residuals[number]), 2)} σ,"
        f" studentised {significant(float(fit.studentised[number]), 2)}",
    ]
    if abs(shift[most]) > 0:
        lines.append(
            f"without it {fit.names[most]} would change by"
            f" {significant(float(shift[most]), 2)} GPa"
        )
    return tuple(lines)


# ------------------------------------------------------------------ section
def section_view(state: BenchState, speeds: MeasuredSpeeds, found: Found) -> SpeedsSectionView:
    """Return the fitted phase speeds round a plane with the readings that lie in it."""
    normal = state.display.speeds_plane
    across, up = plane_axes(np.array(normal))
    labels, axes = _axes_words(across, up)
    fit = found.fit
    curves: tuple[Curve, ...] = ()
    points: tuple[SectionPoint, ...] = ()
    if fit is not None:
        medium = live.crystal_medium(as_matrix(fit.stiffness), fit.density)
        shown = live.section(medium, "phase", normal)
        curves = tuple(
            Curve(points_of, "A", sheet, SHEETS[sheet])
            for sheet, points_of in enumerate(shown.points)
        )
        points = _points_in_plane(fit, np.array(normal), across, up)
    reaches = [float(np.nanmax(np.hypot(*curve.points), initial=0.0)) for curve in curves]
    radius = max([*reaches, *(float(np.hypot(point.x, point.y)) for point in points)],
                 default=0.0)  # fmt: skip
    ticks = nice_ticks(0.0, radius, 4)[1:] if radius > 0 else ()
    count = len(points)
    section = SectionView(
        title="Phase speed",
        curves=curves,
        radius=radius,
        rings=tuple(zip(ticks, tick_texts(ticks), strict=True)),
        axis_labels=labels,
        unit="km/s",
        pin_angle=None,
        notice=f"{_section_note(count, fit)}{axes}" if curves else _why_empty(found),
        plane=next((key for key, _, vector in planes_of(speeds) if vector == normal), "other"),
        planes=plane_choices(speeds, normal),
    )
    return SpeedsSectionView(section, points, found.pending)


def _section_note(count: int, fit: Fit | None) -> str:
    total = 0 if fit is None else len(fit.readings)
    return f"{count} of {total} readings within {_IN_PLANE_DEG:g}° of it"


def _points_in_plane(
    fit: Fit, normal: FloatArray, across: FloatArray, up: FloatArray
) -> tuple[SectionPoint, ...]:
    """Return the phase speeds whose normals lie in a plane, km/s."""
    limit, outliers = np.sin(np.radians(_IN_PLANE_DEG)), set(fit.outliers)
    points = []
    for number, reading in enumerate(fit.readings):
        n = np.array(reading.direction)
        if reading.kind != "phase" or abs(n @ normal) > limit:
            continue
        length = np.hypot(n @ across, n @ up)
        size = reading.speed / 1e3 / length
        points.append(
            SectionPoint(
                float(n @ across * size), float(n @ up * size), reading.row,
                reading.row in outliers, card_of(fit, number),
            )
        )  # fmt: skip
    return tuple(points)


def _axes_words(across: FloatArray, up: FloatArray) -> tuple[tuple[str, str], str]:
    """Return labels of the two axes of a plane, and what they stand for where that is wanted.

    Crystal axes are called by their letters; any others p and q.
    """
    labels, said = [], ""
    for letter, vector in (("p", across), ("q", up)):
        named = [name for name, axis in zip("xyz", np.eye(3), strict=True)
                 if vector @ axis > 1 - 1e-9]  # fmt: skip
        labels.append(named[0] if named else letter)
        said += "" if named else f" · {letter} = {_short(vector)}"
    return (labels[0], labels[1]), said


def _short(vector: FloatArray) -> str:
    """Return components to a tenth, for a line with little room."""
    tenths = (f"{x:.1f}".removesuffix(".0") for x in (np.round(vector, 1) + 0.0).tolist())
    return " ".join(tenths).replace("-", "−")


def plane_choices(speeds: MeasuredSpeeds, normal: Vector3) -> tuple[tuple[str, str], ...]:
    """Return the planes to choose from, the present one among them."""
    choices = [(key, words) for key, words, _ in planes_of(speeds)]
    if all(vector != normal for *_, vector in planes_of(speeds)):
        choices.append(("other", f"across {_normal_words(normal, speeds.frame)}"))
    return tuple(choices)


def planes_of(speeds: MeasuredSpeeds) -> tuple[tuple[str, str, Vector3], ...]:
    """Return key, words and normal of the planes of the axes and those with most readings."""
    return _planes(understand(speeds).readings, speeds.frame)


def _normal_words(normal: Vector3, frame: CrystalFrame) -> str:
    """Return the normal of a plane by the indices it is within a degree of, or components."""
    if frame.has_basis:
        near = [nearest_indices(normal, frame, largest=3, plane=kind) for kind in (False, True)]
        best = min(near, key=lambda each: each.angle_deg)
        if best.angle_deg < _IN_PLANE_DEG:
            return best.text.replace("-", "−")
    return "  ".join(significant(round(x, 2), 2) for x in normal)


@lru_cache(maxsize=4)
def _planes(
    readings: tuple[Reading, ...], frame: CrystalFrame
) -> tuple[tuple[str, str, Vector3], ...]:
    vectors = list(dict.fromkeys(reading.direction for reading in readings))
    every = np.array([reading.direction for reading in readings]).reshape(-1, 3)
    limit = np.sin(np.radians(_IN_PLANE_DEG))
    planes = [(key, key.lower(), normal) for key, normal in PLANES.items()]
    first = np.array(vectors[:_MOST_PAIRED]).reshape(-1, 3)
    pairs = np.array(list(combinations(range(len(first)), 2)), dtype=np.intp).reshape(-1, 2)
    normals = np.cross(first[pairs[:, 0]], first[pairs[:, 1]])
    length = np.linalg.norm(normals, axis=1)
    normals = normals[length > 0.1] / length[length > 0.1, None]
    counts = (np.abs(normals @ first.T) < limit).sum(axis=1)
    known = np.array([normal for *_, normal in planes])
    for place in np.argsort(-counts, kind="stable"):
        if counts[place] < 3 or len(planes) >= 3 + _MOST_PLANES:
            break
        if np.abs(known @ normals[place]).max() < np.cos(np.radians(_IN_PLANE_DEG)):
            known = np.vstack([known, normals[place]])
            largest = normals[place][np.abs(normals[place]).argmax()]
            normal = unit_vector(normals[place] * np.sign(largest) + 0.0)
            words = f"across {_normal_words(normal, frame)}"
            planes.append((f"P{len(planes)}", words, normal))
    return tuple(
        (key, f"{words} ({_lying(every, normal, limit)})", normal)
        for key, words, normal in planes
    )


def _lying(every: FloatArray, normal: Vector3, limit: float) -> int:
    return int((np.abs(every @ np.array(normal)) < limit).sum())


def plane_normal(speeds: MeasuredSpeeds, text: str) -> Vector3:
    """Return the normal of a listed plane, or of one that was typed.

    Raises
    ------
    InputError
        When the text is neither.
    """
    for key, _, normal in planes_of(speeds):
        if key == text:
            return normal
    return parse_direction(text, speeds.frame).vector


# ------------------------------------------------------------------ spectrum, correlations
def singular_view(found: Found) -> SingularView:
    """Return the singular spectrum."""
    fit = found.fit
    if fit is None:
        return SingularView((), 0, 1.0, (), found.pending, _why_empty(found))
    values = fit.singular_values
    with np.errstate(divide="ignore"):
        deviations = np.where(values > 0, 1.0 / values, np.inf)
    typical = abs(mean_stiffness(basis_of(fit.cls), fit.constants))
    unseen = tuple(combination.text for combination in fit.undetermined)
    return SingularView(
        tuple(deviations.tolist()), fit.rank, typical, unseen, found.pending
    )


def correlation_view(found: Found) -> CorrelationView:
    """Return the picture of the correlations."""
    fit = found.fit
    if fit is None:
        empty = np.empty((0, 0))
        return CorrelationView((), empty, found.pending, _why_empty(found))
    return CorrelationView(fit.names, fit.correlation, found.pending)


# ------------------------------------------------------------------ hemisphere
def sphere_view(state: BenchState, speeds: MeasuredSpeeds, found: Found) -> HemisphereView:
    """Return the hemisphere: what has been measured, and how much a next blank would tell."""
    projection = state.display.projection
    ranking = found.ranking
    picture = np.full((2, 2), np.nan)
    low, high = 0.0, 1.0
    if ranking is not None:
        gains = 100.0 * (1.0 - 1.0 / ranking.gains)
        picture = gain_picture(gains, projection)
        low, high = float(gains.min()), float(gains.max())
    about = ColourOf("by how much a blank there lowers σ, %")
    legend = "● measured   ▲ next blanks   ▼ planned"
    return HemisphereView(
        title="Next blank",
        picture=picture,
        scale=scale_view(about, low, high),
        contours=(),
        marks=_marks(state, speeds, found),
        projection=projection,  # type: ignore[arg-type]
        shown="",
        choices=(),
        axis_labels=("x", "y"),
        notice=legend if ranking is not None else _why_empty(found),
    )


def gain_picture(gains: FloatArray, projection: str) -> FloatArray:
    """Return the gains of the candidates on the disc, (pixels, pixels), NaN outside."""
    places, weights, inside = _mixing(projection)
    picture = np.full(inside.shape, np.nan)
    picture[inside] = (gains[places] * weights).sum(axis=1)
    return picture


@lru_cache(maxsize=2)
def _mixing(projection: str) -> tuple[IntArray, FloatArray, BoolArray]:
    """Return for each pixel the candidates near it, with weights, and which lie inside."""
    from scipy.spatial import cKDTree

    even = sphere_mesh(CANDIDATE_LEVEL).half.n  # the last of the candidates
    first = candidate_directions().shape[1] - even.shape[1]
    both = np.concatenate([even, -even], axis=1).T
    directions, inside = live.disc(projection, _PIXELS)
    distance, index = cKDTree(both).query(directions.n.T, k=_NEAREST)
    weights = np.exp(-0.5 * (distance / _SPREAD) ** 2)
    weights /= weights.sum(axis=1, keepdims=True)
    return np.asarray(first + index % even.shape[1]), weights, inside


def _marks(
    state: BenchState, speeds: MeasuredSpeeds, found: Found
) -> tuple[tuple[float, float, str, str], ...]:
    """Return measured, planned and suggested directions, and the pin where it matters."""
    projection = state.display.projection
    known = understand(speeds)
    measured = dict.fromkeys(reading.direction for reading in known.readings)
    planned = dict.fromkeys(plan.direction for plan in known.planned)
    marks = [(*on_disc(vector, projection), "", "direction") for vector in measured]
    marks += [(*on_disc(vector, projection), "", "least") for vector in planned]
    if found.ranking is not None:
        marks += [
            (*on_disc(unit_vector(blank.direction), projection), str(number), "greatest")
            for number, blank in enumerate(found.ranking.best, start=1)
        ]
    if speeds.criterion == "functional":
        marks.append((*on_disc(pin_direction(state), projection), "", "pin"))
    return tuple(marks)


def on_disc(direction: Vector3, projection: str) -> tuple[float, float]:
    """Return where a direction falls on the disc."""
    x, y = to_disc(np.array(direction).reshape(3, 1), projection)[:, 0].tolist()
    return x, y


def pin_direction(state: BenchState) -> Vector3:
    """Return the direction of the pin in the crystal axes of A."""
    turn = live.rotation(state.orientation_a, state.specimen)
    return unit_vector(turn.T @ np.array(state.pin))


def measured_at(state: BenchState, speeds: MeasuredSpeeds, x: float, y: float) -> int | None:
    """Return the row of the measured direction nearest to a point of the disc, if any is."""
    readings = understand(speeds).readings
    if not readings:
        return None
    vectors = np.array([reading.direction for reading in readings]).T
    places = to_disc(vectors, state.display.projection)
    gaps = np.hypot(places[0] - x, places[1] - y)
    nearest = int(gaps.argmin())
    return readings[nearest].row if gaps[nearest] < _PICKED else None
