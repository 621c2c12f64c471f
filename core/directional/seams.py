"""Where sheets meet: the mesh mended about acoustic axes and along lines of equal speeds.

The energy velocity has no one value along an acoustic axis. About a conical one it runs round
an ellipse, so that a triangle of the sphere mesh across the axis cuts the tip of the slowness
sheets short, shades it as a dimple, and closes the hole in the wave surface by a ragged patch.
Such triangles are taken out. In their place stands a fringe of new ones up to a tiny circle of
directions about the axis, with the positions and normals that the sheet really has there, and
a disc within the circle: of no size on the slowness and phase sheets, the flat lid of internal
conical refraction on the wave surface, which touches it along the whole ellipse (Musgrave,
Crystal Acoustics, 1970, chapter 11). Both sheets of the pair get the lid, for either can be
shown alone.

Along a line of equal speeds, as in a transversely isotropic body, the two sheets, sorted by
speed, exchange their shapes. A triangle across it joins what does not belong together: it cuts
short the crease of the slowness sheets and draws a ribbon through the wave surface, on which
nothing travels. Such a triangle is parted at the line, and either part gets the positions and
normals of its own shape there.

Axes at which sheets only touch need nothing: the energy velocity is one there.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import BoolArray, Float32Array, FloatArray, IndexArray, IntArray
from core.directional.acoustic_axes import AcousticAxis
from core.directional.medium import Medium
from core.directional.sphere import SphereMesh, directions, plane_axes
from core.directional.surfaces import Fields, SurfaceMaker
from core.directional.waves import modes

SPOKES = 36  # directions on the circle about an axis
_STEPS = np.arange(SPOKES)
_DISC = np.stack([np.full(SPOKES, SPOKES), _STEPS, (_STEPS + 1) % SPOKES], axis=1)
_RADIUS = 1e-4  # of that circle, radians: far below a pixel, far above rounding
_SLACK = 0.1  # barycentric: an axis this near an edge takes the triangle beyond it too
_AT_VERTEX = 0.35  # edges of the mesh: an axis this near a vertex takes all about it
_ALIKE, _UNLIKE = 0.8, 0.5  # |p.p| within one shape, and across a line of equal speeds
_APART = 3.0  # edges of the mesh: this near an isolated axis polarisations turn anyway


@dataclass(frozen=True, eq=False)
class Cap:
    """What replaces the triangles across one end of a conical axis.

    Attributes
    ----------
    removed : ndarray of int, shape (R,)
        Numbers of the triangles taken out, in the mesh's list.
    circle : ndarray, shape (3, SPOKES)
        Directions about the axis, counter-clockwise seen from outside.
    fringe : ndarray of int, shape (F, 3)
        Triangles up to the circle. Vertices of the mesh by their number, those of the circle
        as -1, -2, …
    """

    removed: IntArray
    circle: FloatArray
    fringe: IntArray


@dataclass(frozen=True, eq=False)
class Parting:
    """The triangles across lines of equal speeds of one pair of sheets.

    Attributes
    ----------
    removed : ndarray of int, shape (S,)
        Their numbers in the mesh's list.
    corners : ndarray of int, shape (3, S)
        Of each, counter-clockwise, first the one alone on its side of the line.
    shares : ndarray, shape (2, S)
        Where the line crosses the edges from the first corner to the second and to the third,
        as parts of the edges.
    """

    removed: IntArray
    corners: IntArray
    shares: FloatArray


@dataclass(frozen=True, eq=False)
class Seams:
    """How the mesh of the three sheets of one medium is mended.

    Attributes
    ----------
    caps : tuple of (int, Cap)
        With the pair of sheets that meet: 0 for the fastest and the middle one, 1 for the
        middle and the slowest.
    partings : tuple of (int, Parting)
        Likewise.
    """

    caps: tuple[tuple[int, Cap], ...]
    partings: tuple[tuple[int, Parting], ...]


@dataclass(frozen=True, eq=False)
class MendedSheet:
    """One sheet with vertices and triangles of its own.

    Attributes
    ----------
    rows : (7, N + K) float32 array
        As `surfaces` makes them; the N of the mesh come first, unchanged.
    triangles : (M, 3) uint32 array
    """

    rows: Float32Array
    triangles: IndexArray


def find_seams(medium: Medium, mesh: SphereMesh, axes: Iterable[AcousticAxis]) -> Seams:
    """Return how the mesh has to be mended for a medium.

    Parameters
    ----------
    medium : Medium
        With a density.
    mesh : SphereMesh
    axes : iterable of AcousticAxis
        All of the medium's, in its axes.

    Notes
    -----
    Of two conical axes less than a triangle apart only the first is mended.
    """
    axes = tuple(axes)
    return Seams(tuple(_caps(mesh, axes)), tuple(_partings(medium, mesh, axes)))


def mend(
    seams: Seams, medium: Medium, mesh: SphereMesh, rows: Float32Array, maker: SurfaceMaker
) -> tuple[MendedSheet, ...]:
    """Return the three sheets of a surface, mended.

    Parameters
    ----------
    seams : Seams
        Of this medium and mesh.
    medium : Medium
    mesh : SphereMesh
        N vertices.
    rows : (3, 7, N) float32 array
        The surface over the mesh.
    maker : callable
        What has made it.
    """
    circles = _circle_rows(seams, medium, maker)
    return tuple(
        _mended(sheet, seams, mesh, rows, [circle[sheet] for circle in circles])
        for sheet in range(len(rows))
    )


# ------------------------------------------------------------------ conical axes
def _caps(mesh: SphereMesh, axes: Sequence[AcousticAxis]) -> Iterator[tuple[int, Cap]]:
    """Yield the caps of all conical axes, both ends of each."""
    taken: dict[int, set[int]] = {0: set(), 1: set()}
    for axis in axes:
        if axis.kind != "conical":
            continue
        for end in (axis.direction, -axis.direction):
            cap = _cap(mesh, end)
            of_others = taken[0] | taken[1]
            if of_others.isdisjoint(cap.removed.tolist()):
                taken[axis.pair].update(cap.removed.tolist())
                yield axis.pair, cap


def _cap(mesh: SphereMesh, end: FloatArray) -> Cap:
    """Return the cap about one end of an axis, (3,)."""
    removed = _triangles_at(mesh, end)
    rim = _boundary(mesh.triangles[removed].astype(np.intp))
    first = plane_axes(end)[0]
    second = np.cross(end, first)
    outer = mesh.vertices[:, rim]
    angle = np.arctan2(second @ outer, first @ outer) % (2 * np.pi)
    order = np.argsort(angle)
    turn = _STEPS * (2 * np.pi / SPOKES)
    circle = np.outer(first, np.cos(turn)) + np.outer(second, np.sin(turn))
    near = directions(end[:, None] + _RADIUS * circle).n
    return Cap(removed, near, _fringe(rim[order], angle[order]))


def _triangles_at(mesh: SphereMesh, end: FloatArray) -> IntArray:
    """Return the triangles in which a direction lies, or nearly.

    All about a vertex that is near, else one, or the two at an edge that is near: a patch of
    which every corner can be seen from the direction.
    """
    closeness = end @ mesh.vertices
    nearest = int(np.argmax(closeness))
    order, starts = _triangles_by_vertex(mesh)
    candidates = order[starts[nearest] : starts[nearest + 1]] // 3
    if closeness[nearest] > np.cos(_AT_VERTEX * edge_angle(mesh)):
        return candidates
    a, b, c = mesh.vertices[:, mesh.triangles[candidates]].transpose(2, 0, 1)
    weights = np.stack([end @ np.cross(p, q, axis=0) for p, q in ((b, c), (c, a), (a, b))])
    inside = (weights >= -_SLACK * weights.sum(axis=0)).all(axis=0)
    found: IntArray = candidates[inside]
    return found


@lru_cache(maxsize=4)
def _triangles_by_vertex(mesh: SphereMesh) -> tuple[IntArray, IntArray]:
    """Return all corners sorted by vertex, and where in that list each vertex begins."""
    corners = mesh.triangles.ravel()
    order = np.argsort(corners, kind="stable")
    return order, np.searchsorted(corners[order], np.arange(mesh.vertices.shape[1] + 1))


def edge_angle(mesh: SphereMesh) -> float:
    """Return the mean angle of a triangle's edge, radians."""
    return float(np.sqrt(4 * np.pi / len(mesh.triangles) * 4 / np.sqrt(3)))


def _boundary(triangles: IntArray) -> IntArray:
    """Return the vertices at the rim of a patch of triangles."""
    edges = np.concatenate([triangles[:, [0, 1]], triangles[:, [1, 2]], triangles[:, [2, 0]]])
    known = set(map(tuple, edges.tolist()))
    rim = [start for start, end in edges.tolist() if (end, start) not in known]
    return np.array(rim)


def _fringe(rim: IntArray, angle: FloatArray) -> IntArray:
    """Return the triangles between the rim and the circle, both sorted by angle.

    Every step of the circle is joined to the rim's vertex nearest to it by angle; where that
    changes to the next one, an edge of the rim is joined to the circle.
    """
    middles = (_STEPS + 0.5) * (2 * np.pi / SPOKES)
    between = (angle + np.diff(angle, append=angle[0] + 2 * np.pi) / 2) % (2 * np.pi)
    order = np.argsort(between)
    owner = order[np.searchsorted(between[order], middles) % len(rim)]
    triangles, at = [], int(owner[-1])
    for step, wanted in enumerate(owner.tolist()):
        here, following = -1 - step, -1 - (step + 1) % SPOKES
        while at != wanted:
            beyond = (at + 1) % len(rim)
            triangles.append((here, rim[at], rim[beyond]))
            at = beyond
        triangles.append((here, rim[at], following))
    return np.array(triangles)


def _circle_rows(seams: Seams, medium: Medium, maker: SurfaceMaker) -> list[Float32Array]:
    """Return the rows (3, 7, SPOKES + 1) of each cap: its circle and the middle of its disc."""
    if not seams.caps:
        return []
    everywhere = directions(np.concatenate([cap.circle for _, cap in seams.caps], axis=1))
    rows = np.empty((3, 7, everywhere.count), dtype=np.float32)
    maker(Fields(medium, everywhere), rows)
    circles = np.split(rows, len(seams.caps), axis=2)
    return [
        np.concatenate([circle, circle.mean(axis=2, keepdims=True)], axis=2)
        for circle in circles
    ]


# ------------------------------------------------------------------ lines
def _partings(
    medium: Medium, mesh: SphereMesh, axes: Sequence[AcousticAxis]
) -> Iterator[tuple[int, Parting]]:
    """Yield the triangles across lines of equal speeds, pair by pair."""
    pairs = sorted({axis.pair for axis in axes if axis.kind == "line"})
    if not pairs:
        return
    found = modes(medium, mesh.half)
    for pair in pairs:
        half = found.polarisation[pair]
        both = np.concatenate([half, half], axis=1)
        a, b, c = (both[:, mesh.triangles[:, corner]] for corner in range(3))
        likeness = np.abs(np.stack([(p * q).sum(axis=0) for p, q in ((b, c), (c, a), (a, b))]))
        crossing = (
            (likeness.max(axis=0) > _ALIKE)
            & (np.median(likeness, axis=0) < _UNLIKE)
            & ~_near_points(mesh, axes)
        )
        removed = np.flatnonzero(crossing)
        # The edge whose ends are alike is the one opposite the lone corner.
        lone = np.argmax(likeness[:, removed], axis=0)
        turned = (lone + np.arange(3)[:, None]) % 3
        corners = mesh.triangles[removed, turned].astype(np.intp)
        gap = np.tile(found.speed[pair] - found.speed[pair + 1], 2)[corners]
        yield pair, Parting(removed, corners, gap[0] / (gap[0] + gap[1:]))


def _near_points(mesh: SphereMesh, axes: Sequence[AcousticAxis]) -> BoolArray:
    """Tell which triangles lie about an isolated axis, where polarisations turn anyway."""
    points = [axis.direction for axis in axes if axis.kind in ("conical", "tangential")]
    near = np.zeros(mesh.vertices.shape[1], dtype=bool)
    for point in points:
        near |= np.abs(point @ mesh.vertices) > np.cos(_APART * edge_angle(mesh))
    return np.asarray(near[mesh.triangles].any(axis=1))


# ------------------------------------------------------------------ putting together
def _mended(
    sheet: int, seams: Seams, mesh: SphereMesh, rows: Float32Array, circles: list[Float32Array]
) -> MendedSheet:
    """Return one sheet with its caps, parted where it crosses a neighbour."""
    kept = np.ones(len(mesh.triangles), dtype=bool)
    parts, added, count = [rows[sheet]], [], rows.shape[2]
    for pair, parting in seams.partings:
        if sheet in (pair, pair + 1):
            kept[parting.removed] = False
            other = rows[2 * pair + 1 - sheet]
            parts.append(_parted_rows(parting, rows[sheet], other))
            added.append(_parted_triangles(parting, count))
            count += parts[-1].shape[1]
    for (pair, cap), circle in zip(seams.caps, circles, strict=True):
        if sheet in (pair, pair + 1):
            kept[cap.removed] = False
            parts.append(circle)
            added += [np.where(cap.fringe < 0, count - 1 - cap.fringe, cap.fringe)]
            added += [count + _DISC]
            count += SPOKES + 1
    return MendedSheet(
        np.ascontiguousarray(np.concatenate(parts, axis=1)),
        np.concatenate([mesh.triangles[kept], *added]).astype(np.uint32),
    )


def _parted_rows(parting: Parting, own: Float32Array, other: Float32Array) -> Float32Array:
    """Return new vertices (7, 4 S) on the line: two of each shape.

    The shape that the sheet has at the lone corner goes on beyond the line in the other sheet.
    """
    alone, *rest = parting.corners
    ends = []
    for near, far in ((own, other), (other, own)):
        for corner, share in zip(rest, parting.shares, strict=True):
            ends.append(near[:, alone] + share * (far[:, corner] - near[:, alone]))
    return np.concatenate(ends, axis=1).astype(np.float32)


def _parted_triangles(parting: Parting, count: int) -> IntArray:
    """Return the triangles (3 S, 3) in place of the removed ones, new vertices from `count`."""
    alone, second, third = parting.corners
    size = len(parting.removed)
    to_second, to_third, from_second, from_third = (
        count + np.arange(4 * size).reshape(4, size)
    )
    return np.concatenate(
        [
            np.stack([alone, to_second, to_third], axis=1),
            np.stack([from_second, second, third], axis=1),
            np.stack([from_second, third, from_third], axis=1),
        ]
    )
