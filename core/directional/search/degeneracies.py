"""Where two sheets of waves meet: isolated directions, circles and other curves.

At most sixteen isolated ones exist in a crystal that is not degenerate along a whole curve.
Each is sought twice: from where the gap between two sheets is least on a mesh, and from the
triangles of the mesh round which a polarisation comes back with its sign turned, which nothing
but a meeting of sheets can cause. Newton's method then makes them exact. Arrays run along
their first axis: directions (M, 3).
"""

from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray
from core.directional.search.circles import (
    SAME_DIRECTION,
    Circle,
    canonical,
    chords,
    circle_through,
    distinct,
    tangents,
)
from core.directional.search.local_waves import polarised, sheet_frames
from core.directional.sphere import SphereMesh, sphere_mesh

SEARCH_LEVEL = 4  # 1,281 directions: axes nearer than 4 degrees are told apart by their seeds
CURVE_POINTS = 72  # at which a circle is checked, and drawn

_ISOTROPIC = 1e-9  # gap over the fastest ρv²: less, everywhere, and the two sheets are one
_CLOSED = 1e-10  # gap over the fastest ρv² at which two sheets have met
_CLOSED_PART = 1e-5  # the same in parts of the greatest gap, for all but isotropic crystals
_ROUNDING = 1e-14  # of the fastest ρv²: a smaller gap is none
_CLOSED_CURVE = 1e-8  # the same along a circle, which is known less exactly
_FLAT = 1e-4  # of the greatest gap: a slower opening of the gap is no cone
_LEANING = 0.1  # slower over faster opening of a cone that may have a partner close by
_LEVEL = 1e-7  # the same ratio below which it is rounding: the point of a line
_PARTNER_DISTANCES = np.array([0.02, -0.02, 0.05, -0.05, 0.1, -0.1, 0.2, -0.2])  # radians
_LINE_PROBES = np.array([0.1, -0.1])  # radians
_SEEDS = 160  # starts for one pair: a line of degeneracy would ask for thousands
_STEPS = 16
_LONGEST_STEP = 0.15  # radians
_PATIENCE, _STRAY_STEP = 6, 0.02  # after so many steps one so long (radians) leads nowhere
_TANGENTIAL_OFFSET = 1e-4  # radians: error there 1e-12 by curvature, 1e-11 by rounding
_CIRCLE_TRIALS = 4  # points of curves that are no circles, before no more circles are tried


@dataclass(frozen=True, eq=False)
class Degeneracies:
    """What the search for one pair of sheets has found.

    Attributes
    ----------
    everywhere : bool
        The two sheets are one; the rest is empty.
    axes : (M, 3) array
        Isolated directions, canonical and distinct.
    conical : (M,) bool array
        Whether the gap opens linearly there in every direction.
    circles : tuple of Circle
        Whole circles along which the sheets meet.
    strays : (K, 3) array
        One direction of each curve of degeneracy that is no circle.
    """

    everywhere: bool
    axes: FloatArray
    conical: BoolArray
    circles: tuple[Circle, ...]
    strays: FloatArray

    def candidates(self) -> FloatArray:
        """Return every direction (M, 3) found, circles by their canonical one."""
        rings = [circle.representative[None] for circle in self.circles]
        return np.concatenate([self.axes, *rings, self.strays])

    def cones(self) -> BoolArray:
        """Return which of the `candidates` are isolated cones, (M,)."""
        rest = len(self.circles) + len(self.strays)
        return np.append(self.conical, np.zeros(rest, dtype=bool))


def degeneracies(operator: FloatArray) -> tuple[Degeneracies, Degeneracies]:
    """Find where the fastest and the middle, and the middle and the slowest, sheet meet.

    `operator` is `local_waves.contraction` of the stiffness. No density is needed.
    """
    mesh = sphere_mesh(SEARCH_LEVEL)
    system = sheet_frames(operator, mesh.half.n.T)
    first, second = (
        _search(operator, mesh, system.values, system.vectors, pair) for pair in (0, 1)
    )
    return first, second


def _search(
    operator: FloatArray, mesh: SphereMesh, values: FloatArray, vectors: FloatArray, pair: int
) -> Degeneracies:
    """Find where sheets `pair` and `pair + 1` meet, from the eigensystem on the mesh."""
    gap = values[:, pair] - values[:, pair + 1]
    largest = float(np.abs(values).max())
    empty = np.empty((0, 3))
    if gap.max() <= _ISOTROPIC * largest:
        return Degeneracies(True, empty, np.empty(0, dtype=bool), (), empty)
    turning = vectors[:, 0 if pair == 0 else 2]
    closed = min(_CLOSED * largest, max(_CLOSED_PART * gap.max(), _ROUNDING * largest))
    n = _meetings(operator, _seeds(mesh, gap, turning), pair, closed)
    slope, weak = _openings(operator, n, pair)
    leaning = (slope[:, 1] < _LEANING * slope[:, 0]) & (slope[:, 1] > _LEVEL * slope[:, 0])
    if leaning.any():
        beside = _beside(n[leaning], weak[leaning], _PARTNER_DISTANCES).reshape(-1, 3)
        n = np.concatenate([n, _meetings(operator, beside, pair, closed)])
        n = n[distinct(n)]
        slope, weak = _openings(operator, n, pair)
    steep = slope > _FLAT * gap.max()
    lined = np.flatnonzero(steep[:, 0] & ~steep[:, 1])
    lined = lined[_stays_closed(operator, n[lined], weak[lined], pair, largest)]
    on_line = np.isin(np.arange(len(n)), lined)
    circles, strays = _curves(operator, n[on_line], pair, largest)
    conical, touching = n[steep[:, 0] & ~on_line], n[~steep[:, 0]]
    touching = canonical(_centre_tangential(operator, touching, pair))
    touching = touching[distinct(touching)]
    axes = np.concatenate([conical, touching])
    is_conical = np.arange(len(axes)) < len(conical)
    off_circles = np.ones(len(axes), dtype=bool)
    for circle in circles:
        off_circles &= circle.distance(axes) > SAME_DIRECTION
    return Degeneracies(False, axes[off_circles], is_conical[off_circles], circles, strays)


def _meetings(operator: FloatArray, starts: FloatArray, pair: int, closed: float) -> FloatArray:
    """Return the distinct directions (M, 3) where Newton's method closes the gap."""
    n = _converge(operator, starts, pair)
    values = sheet_frames(operator, n).values
    n = canonical(n[values[:, pair] - values[:, pair + 1] <= closed])
    return n[distinct(n)]


def _openings(operator: FloatArray, n: FloatArray, pair: int) -> tuple[FloatArray, FloatArray]:
    """Return the slopes (M, 2) of the gap about axes (M, 3), and the slower way (M, 3)."""
    jacobian, _, frames = _jacobian(operator, n, pair)
    _, slope, ways = np.linalg.svd(jacobian)
    weak: FloatArray = (ways[:, None, 1] @ frames)[:, 0]
    return slope, weak


def _beside(n: FloatArray, way: FloatArray, distances: FloatArray) -> FloatArray:
    """Return directions (M, K, 3) at some distances from n (M, 3) along tangents (M, 3)."""
    beside = n[:, None] + distances[:, None] * way[:, None]
    result: FloatArray = beside / np.linalg.norm(beside, axis=2, keepdims=True)
    return result


def _stays_closed(
    operator: FloatArray, n: FloatArray, weak: FloatArray, pair: int, largest: float
) -> BoolArray:
    """Tell points (M, 3) of lines from very flat cones: the gap is closed beside them too."""
    ends = _converge(operator, _beside(n, weak, _LINE_PROBES).reshape(-1, 3), pair)
    values = sheet_frames(operator, ends).values
    closed = values[:, pair] - values[:, pair + 1] <= _CLOSED_CURVE * largest
    moved = chords(ends.reshape(-1, 2, 3), n[:, None]) > 0.5 * _LINE_PROBES[0]
    result: BoolArray = (closed.reshape(-1, 2) & moved).all(axis=1)
    return result


def _seeds(mesh: SphereMesh, gap: FloatArray, turning: FloatArray) -> FloatArray:
    """Return starts (K, 3): every least gap with its neighbours, and every turning triangle."""
    around = mesh.neighbours
    least = np.flatnonzero((gap[None] <= gap[around]).all(axis=0))
    near = np.unique(np.concatenate([least, around[:, least].ravel()]))
    corners = mesh.triangles[: len(mesh.triangles) // 2].astype(np.intp)
    lines = turning[corners % gap.size]
    a, b, c = lines[:, 0], lines[:, 1], lines[:, 2]
    sign = (a * b).sum(axis=1) * (b * c).sum(axis=1) * (c * a).sum(axis=1)
    turned = corners[sign < 0]
    middles = mesh.vertices[:, turned].sum(axis=2).T
    middles /= np.linalg.norm(middles, axis=1, keepdims=True)
    starts = np.concatenate([mesh.half.n[:, near].T, middles])
    size = np.concatenate([gap[near], gap[turned % gap.size].min(axis=1)])
    return starts[np.argsort(size, kind="stable")[:_SEEDS]]


def _jacobian(
    operator: FloatArray, n: FloatArray, pair: int
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return how the 2x2 block of two sheets opens about directions (M, 3).

    In the polarisations a, b at n the block about its mean is [[h, g], [g, -h]], with g = 0.

    Returns
    -------
    jacobian : (M, 2, 2) array
        Derivatives of h and g (rows) along the two tangents (columns).
    half_gap : (M,) array
        h at n.
    frames : (M, 2, 3) array
        The tangents.
    """
    system, frames = sheet_frames(operator, n), tangents(n)
    a, b = system.vectors[:, pair], system.vectors[:, pair + 1]
    left, right = np.stack([a, b, a], axis=1), np.stack([a, b, b], axis=1)
    forms = polarised(operator, left, right)
    slopes = (n[:, None, None] @ forms)[:, :, 0] @ frames.transpose(0, 2, 1)
    jacobian = np.stack([(slopes[:, 0] - slopes[:, 1]) / 2, slopes[:, 2]], axis=1)
    return jacobian, (system.values[:, pair] - system.values[:, pair + 1]) / 2, frames


def _newton_steps(operator: FloatArray, n: FloatArray, pair: int) -> FloatArray:
    """Return the steps (M, 3) that would close the gap if the block opened linearly.

    Along a curve of degeneracy the Jacobian has rank one; the shortest step is taken.
    """
    jacobian, half_gap, frames = _jacobian(operator, n, pair)
    target = np.stack([-half_gap, np.zeros_like(half_gap)], axis=1)
    step = (np.linalg.pinv(jacobian, rcond=1e-7) @ target[:, :, None])[:, :, 0]
    result: FloatArray = (step[:, None] @ frames)[:, 0]
    return result


def _converge(operator: FloatArray, n: FloatArray, pair: int) -> FloatArray:
    """Return where Newton's method leads from directions (M, 3), converged or not.

    At a tangential axis the plain step falls short by half; where that shows it is doubled.
    """
    before = np.full(len(n), np.inf)
    active = np.arange(len(n))
    n = n.copy()
    for count in range(_STEPS):
        step = _newton_steps(operator, n[active], pair)
        length = np.linalg.norm(step, axis=1)
        halving = np.abs(length / before[active] - 0.5) < 0.03
        factor = np.where(halving, 2.0, 1.0)
        factor = np.minimum(factor, _LONGEST_STEP / np.maximum(length, 1e-300))
        moved = n[active] + factor[:, None] * step
        n[active] = moved / np.linalg.norm(moved, axis=1, keepdims=True)
        before[active] = length
        arrived = (length <= 1e-14) | (halving & (length < 1e-5))
        astray = (length > _STRAY_STEP) & (count >= _PATIENCE)
        active = active[~arrived & ~astray]
        if active.size == 0:
            break
    return n


def _centre_tangential(operator: FloatArray, n: FloatArray, pair: int) -> FloatArray:
    """Return tangential axes (M, 3) made exact.

    At the axis itself the step is rounding over rounding. From a small distance the doubled
    step is good to the third power of that distance, and four sides average the rest out.
    """
    if len(n) == 0:
        return n
    total = np.zeros_like(n)
    for side in tangents(n).transpose(1, 0, 2):
        for sign in (1.0, -1.0):
            start = n + sign * _TANGENTIAL_OFFSET * side
            start /= np.linalg.norm(start, axis=1, keepdims=True)
            total += start + 2.0 * _newton_steps(operator, start, pair)
    result: FloatArray = total / np.linalg.norm(total, axis=1, keepdims=True)
    return result


def _curves(
    operator: FloatArray, n: FloatArray, pair: int, largest: float
) -> tuple[tuple[Circle, ...], FloatArray]:
    """Return the circles that points (M, 3) of lines of degeneracy lie on, and stray points.

    The line leaves a point along the direction in which the gap stays closed; two short ways
    along it, corrected, give the circle. What lies on no circle is reported by one point for
    each chain of points nearer than the mesh is wide.
    """
    circles: list[Circle] = []
    strays: list[FloatArray] = []
    while len(n) and len(strays) < _CIRCLE_TRIALS:
        circle = _circle_from(operator, n[0], pair)
        values = sheet_frames(operator, circle.points(CURVE_POINTS)).values
        if (values[:, pair] - values[:, pair + 1]).max() <= _CLOSED_CURVE * largest:
            circles.append(circle)
            n = n[circle.distance(n) > SAME_DIRECTION]
        else:
            strays.append(n[0])
            n = n[1:]
    strays.extend(n)
    left = np.array(strays).reshape(-1, 3)
    return tuple(circles), left[_chains(left)]


def _circle_from(operator: FloatArray, n: FloatArray, pair: int) -> Circle:
    """Return the circle through a point (3,) of a line of degeneracy and two beside it."""
    _, weak = _openings(operator, n[None], pair)
    beside = _converge(operator, _beside(n[None], weak, _LINE_PROBES)[0], pair)
    return circle_through(np.concatenate([n[None], beside]))


def _chains(points: FloatArray, reach: float = 0.15) -> list[int]:
    """Return the number of one of the points (M, 3) of each set linked by short steps."""
    near = chords(points[:, None], points[None]) < reach
    linked = near
    for _ in range(max(1, len(points).bit_length())):  # each doubles how many steps are counted
        linked = linked @ linked
    return [int(i) for i in np.unique(linked.argmax(axis=1))] if len(points) else []
