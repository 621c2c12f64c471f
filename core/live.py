"""What the stage and the deck show, computed from frozen values and remembered by value.

A request for the same thing gives the same object: a moved pin recomputes no surface, a turned
camera nothing at all. The memories are small and bounded.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import Float32Array, FloatArray
from core.directional.medium import Medium
from core.directional.quantities import quantity
from core.directional.sphere import Directions, directions, great_circle, plane_axes, sphere_mesh
from core.directional.waves import group_velocities
from core.state import Matrix, OrientationChoice, Specimen, Vector3
from core.summary import rotation_of
from core.tensor.stiffness import Stiffness

COARSE_LEVEL = 4  # 2,562 vertices: while something moves
FINE_LEVEL = 5  # 10,242 vertices: 150 ms later
SECTION_POINTS = 721
DISC_SIZE = 181  # pixels across the hemisphere's picture
COARSE_DISC_SIZE = 91


@lru_cache(maxsize=16)
def rotation(choice: OrientationChoice, specimen: Specimen) -> FloatArray:
    """Return R (3, 3), v_part = R v_crystal, read-only."""
    found = np.array(rotation_of(choice, specimen))
    found.flags.writeable = False
    return found


@lru_cache(maxsize=16)
def _turned(stiffness: Matrix, density: float | None, turn: Matrix) -> Medium:
    return Medium(Stiffness.from_voigt(np.array(stiffness)).rotate(np.array(turn)), density)


def part_medium(specimen: Specimen, choice: OrientationChoice) -> Medium:
    """Return the medium of a specimen in part axes."""
    turn = rotation(choice, specimen)
    rows = tuple(tuple(row) for row in turn.tolist())
    return _turned(specimen.stiffness, specimen.density, rows)


@lru_cache(maxsize=16)
def crystal_medium(stiffness: Matrix, density: float | None) -> Medium:
    """Return the medium of constants in crystal axes."""
    return Medium(Stiffness.from_voigt(np.array(stiffness)), density)


@lru_cache(maxsize=8)
def surface(medium: Medium, key: str, level: int) -> Float32Array:
    """Return the surface rows of a quantity, shape (sheets, 7, N), part axes."""
    return quantity(key).surface(medium, sphere_mesh(level))


@dataclass(frozen=True, eq=False)
class SectionCurves:
    """The curves of one section.

    Attributes
    ----------
    points : ndarray, shape (sheets, 2, N)
        In the unit of the quantity; first coordinate along the plane's first axis.
    values : ndarray, shape (sheets, N)
        The signed value behind each point; the radius is its size.
    out_of_plane : ndarray of bool, shape (sheets, N)
        For the wave surface: where the ray leaves the section plane.
    """

    points: FloatArray
    values: FloatArray
    out_of_plane: FloatArray


@lru_cache(maxsize=8)
def section(medium: Medium, key: str, normal: Vector3) -> SectionCurves:
    """Return the polar section of a quantity by a plane through the origin, part axes."""
    circle = section_circle(normal)
    across, up = plane_axes(np.array(normal))
    if quantity(key).shape == "wave":
        velocity = group_velocities(medium, circle).velocity
        points = np.stack([np.einsum("i,sin->sn", across, velocity),
                           np.einsum("i,sin->sn", up, velocity)], axis=1)
        length = np.sqrt((velocity ** 2).sum(axis=1))
        off = np.abs(np.einsum("i,sin->sn", np.array(normal), velocity))
        return SectionCurves(points, length, off > 1e-3 * length)
    values = quantity(key).values(medium, circle)
    plane = np.stack([across @ circle.n, up @ circle.n])
    points = np.abs(values)[:, np.newaxis, :] * plane[np.newaxis, :, :]
    return SectionCurves(points, values, np.zeros(values.shape, dtype=bool))


@lru_cache(maxsize=4)
def section_circle(normal: Vector3) -> Directions:
    """Return the directions round a section plane, part axes."""
    return great_circle(np.array(normal), SECTION_POINTS)


# ------------------------------------------------------------------ hemisphere
@lru_cache(maxsize=4)
def disc(projection: str, size: int = DISC_SIZE) -> tuple[Directions, FloatArray]:
    """Return the directions behind the pixels of a hemisphere, and which pixels they are.

    Parameters
    ----------
    projection : "equal_area" or "stereographic"
    size : int
        Pixels across; the rim touches the border.

    Returns
    -------
    directions : Directions
        The M pixels inside the disc.
    inside : ndarray of bool, shape (size, size)
        Row 0 at the top (part Y up, part X to the right).
    """
    step = (np.arange(size) + 0.5) / size * 2.0 - 1.0
    x, y = np.meshgrid(step, -step)
    inside = np.hypot(x, y) <= 1.0 + 1.0 / size
    return directions(from_disc(np.stack([x[inside], y[inside]]), projection)), inside


def from_disc(points: FloatArray, projection: str) -> FloatArray:
    """Return unit vectors (3, N), z ≥ 0, of points (2, N) in the unit disc.

    Equal-area is Lambert's azimuthal projection, stereographic the equal-angle one; both with
    the hemisphere filling the disc. Points outside are drawn to the rim.
    """
    radius = np.hypot(points[0], points[1])
    shrink = np.where(radius > 1.0, 1.0 / np.maximum(radius, 1e-300), 1.0)
    u, v = points * shrink
    squared = u * u + v * v
    if projection == "stereographic":
        scale = 2.0 / (1.0 + squared)
        return np.stack([u * scale, v * scale, (1.0 - squared) / (1.0 + squared)])
    scale = np.sqrt(np.maximum(2.0 - squared, 0.0))
    return np.stack([u * scale, v * scale, 1.0 - squared])


def to_disc(vectors: FloatArray, projection: str) -> FloatArray:
    """Return points (2, N) in the unit disc of unit vectors (3, N); the lower half is mirrored."""
    upper = np.where(vectors[2] < 0, -1.0, 1.0) * vectors
    below = 1.0 + upper[2]
    scale = 1.0 / below if projection == "stereographic" else 1.0 / np.sqrt(below)
    return np.asarray(upper[:2] * scale)


@lru_cache(maxsize=8)
def hemisphere(medium: Medium, key: str, projection: str,
               size: int = DISC_SIZE) -> FloatArray:
    """Return the values of a quantity over the hemisphere, (sheets, size, size), NaN outside."""
    dirs, inside = disc(projection, size)
    values = quantity(key).values(medium, dirs)
    picture = np.full((len(values), *inside.shape), np.nan)
    picture[:, inside] = values
    return picture


# ------------------------------------------------------------------ sweep
def arc(pin: Vector3, axis: Vector3, angles: FloatArray) -> Directions:
    """Return the directions that the pin runs through when turned about an axis.

    Parameters
    ----------
    pin, axis : unit vectors, part axes
    angles : ndarray, shape (N,)
        Degrees, right-handed about the axis.
    """
    n, k = np.array(pin), np.array(axis)
    turn = np.deg2rad(angles)
    along = (n @ k) * k
    across = n - along
    return directions(along[:, np.newaxis] + np.outer(across, np.cos(turn))
                      + np.outer(np.cross(k, n), np.sin(turn)))
