"""What the stage and the deck show, computed from frozen values and remembered by value.

A request for the same thing gives the same object: a moved pin recomputes no surface, a turned
camera nothing at all. The memories are small and bounded. All arrays are in part axes and
must not be written to.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import BoolArray, Float32Array, FloatArray, read_only
from core.directional.medium import Medium
from core.directional.projection import from_disc
from core.directional.quantities import quantity
from core.directional.sphere import (
    Directions,
    directions,
    great_circle,
    plane_axes,
    sphere_mesh,
)
from core.directional.waves import group_velocities, modes
from core.state import Matrix, OrientationChoice, Specimen, Vector3, as_matrix, rotation_of
from core.tensor.stiffness import Stiffness

COARSE_LEVEL = 4  # 2,562 vertices: while something moves
FINE_LEVEL = 5  # 10,242 vertices: 150 ms later
SECTION_POINTS = 721
DISC_SIZE = 181  # pixels across the hemisphere's picture
COARSE_DISC_SIZE = 91
_ASIDE = 0.03  # radians: this far beside a plane a crossing must be found again …
_SEARCHED = 8  # … among so many points to either side
_EXCHANGED = 1.8  # of 2: how much of two polarisations has to be found in the other sheet
_IN_PLANE = 1e-3  # of a ray's length: a ray this near the section plane lies in it


# --- media ----------------------------------------------------------------------------------


@lru_cache(maxsize=16)
def rotation(choice: OrientationChoice, specimen: Specimen) -> FloatArray:
    """Return R, shape (3, 3), read-only, v_part = R v_crystal.

    Raises
    ------
    InputError
        When the text of the orientation cannot be used with this specimen.
    """
    return read_only(rotation_of(choice, specimen))


@lru_cache(maxsize=16)
def _turned(stiffness: Matrix, density: float | None, turn: Matrix) -> Medium:
    return crystal_medium(stiffness, density).rotated(np.array(turn))


def part_medium(specimen: Specimen, choice: OrientationChoice) -> Medium:
    """Return the medium of a specimen in part axes.

    It is the same object for specimens that differ in name or class only.
    """
    turn = as_matrix(rotation(choice, specimen))
    return _turned(specimen.stiffness, specimen.density, turn)


@lru_cache(maxsize=16)
def crystal_medium(stiffness: Matrix, density: float | None) -> Medium:
    """Return the medium of constants in crystal axes."""
    return Medium(Stiffness.from_voigt(stiffness), density)


# --- surfaces and sections ------------------------------------------------------------------


@lru_cache(maxsize=8)
def surface(medium: Medium, key: str, level: int) -> Float32Array:
    """Return the surface rows of a quantity, shape (sheets, 7, N), of a mesh of some level."""
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
    broken : ndarray of bool, shape (sheets, N - 1)
        For the wave surface: where, between a point and the next, a line of directions is met
        on which the sheet crosses another. No rays lie between the two points. At a single
        acoustic axis they are the ends of the flat lid of the wave surface.
    """

    points: FloatArray
    values: FloatArray
    out_of_plane: BoolArray
    broken: BoolArray


@lru_cache(maxsize=8)
def section(medium: Medium, key: str, normal: Vector3) -> SectionCurves:
    """Return the polar section of a quantity by a plane through the origin.

    Of the wave surface it is the rays of the waves whose normals lie in the plane, as they
    project on it.
    """
    circle = section_circle(normal)
    across, up = plane_axes(np.array(normal))
    if quantity(key).shape == "wave":
        return _ray_section(medium, circle, np.stack([across, up, np.array(normal)]))
    values = quantity(key).values(medium, circle)
    plane = np.stack([across @ circle.n, up @ circle.n])
    points = np.abs(values)[:, np.newaxis, :] * plane[np.newaxis, :, :]
    nowhere = np.zeros(values.shape, dtype=bool)
    return SectionCurves(points, values, nowhere, nowhere[:, 1:])


def _ray_section(medium: Medium, circle: Directions, axes: FloatArray) -> SectionCurves:
    """Return the section of the wave surface; `axes` are the plane's two and its normal."""
    velocity = group_velocities(medium, circle).velocity
    across, up, off = np.einsum("ai,sin->asn", axes, velocity)
    length = np.sqrt((velocity**2).sum(axis=1))
    return SectionCurves(
        np.stack([across, up], axis=1),
        length,
        np.abs(off) > _IN_PLANE * length,
        _crossed_lines(medium, circle, axes[2]),
    )


def _crossed_lines(medium: Medium, circle: Directions, normal: FloatArray) -> BoolArray:
    """Tell between which directions of a circle sheets cross along a line, (3, N - 1).

    They then cross beside the plane, too, which they do not at a single axis.
    """
    crossed = _exchanges(medium, circle)
    if crossed.any():
        near = np.arange(-_SEARCHED, _SEARCHED + 1)
        places = (np.arange(crossed.shape[1])[:, None] + near) % crossed.shape[1]
        for tilt in (-_ASIDE, _ASIDE):
            beside = _exchanges(medium, directions(circle.n + tilt * normal[:, None]))
            crossed &= beside[:, places].any(axis=2)
    return crossed


def _exchanges(medium: Medium, circle: Directions) -> BoolArray:
    """Tell from which direction to the next sheets exchange their polarisations, (3, N - 1)."""
    polarisation = modes(medium, circle).polarisation
    one, following = polarisation[:, :, :-1], polarisation[:, :, 1:]
    overlap = np.abs(np.einsum("aiN,biN->abN", one, following))
    crossing = np.zeros((3, overlap.shape[2]), dtype=bool)
    for pair in (0, 1):
        exchanged = overlap[pair, pair + 1] + overlap[pair + 1, pair]
        kept = overlap[pair, pair] + overlap[pair + 1, pair + 1]
        crossing[pair : pair + 2] |= (exchanged > _EXCHANGED) & (kept < 2.0 - _EXCHANGED)
    return crossing


@lru_cache(maxsize=4)
def section_circle(normal: Vector3) -> Directions:
    """Return the directions round a section plane, the last one equal to the first."""
    return great_circle(np.array(normal), SECTION_POINTS)


# --- hemisphere -----------------------------------------------------------------------------


@lru_cache(maxsize=4)
def disc(projection: str, size: int = DISC_SIZE) -> tuple[Directions, BoolArray]:
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


@lru_cache(maxsize=8)
def hemisphere(medium: Medium, key: str, projection: str, size: int = DISC_SIZE) -> FloatArray:
    """Return a quantity over the hemisphere, shape (sheets, size, size), NaN outside."""
    dirs, inside = disc(projection, size)
    values = quantity(key).values(medium, dirs)
    picture = np.full((len(values), *inside.shape), np.nan)
    picture[:, inside] = values
    picture.flags.writeable = False
    return picture


# --- sweep ----------------------------------------------------------------------------------


def arc(pin: Vector3, axis: Vector3, angles: FloatArray) -> Directions:
    """Return the directions that the pin runs through when turned about an axis.

    Parameters
    ----------
    pin, axis : tuple of 3 floats
        Unit vectors.
    angles : ndarray, shape (N,)
        Degrees, right-handed about the axis; 0 is the pin.
    """
    n, k = np.array(pin), np.array(axis)
    turn = np.deg2rad(angles)
    along = (n @ k) * k
    across = n - along
    return directions(
        along[:, np.newaxis]
        + np.outer(across, np.cos(turn))
        + np.outer(np.cross(k, n), np.sin(turn))
    )
