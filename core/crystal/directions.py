"""Directions and plane normals: read from text, named by the nearest indices, in families.

Every vector here is in crystal axes.
"""

import math
from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

import numpy as np

from core.arrays import FloatArray, IntArray, read_only
from core.crystal.cell import CELL_NAMES, CrystalFrame, lattice_vector, three_indices
from core.crystal.indices import (
    CLOSING,
    Indices,
    four_from_three,
    number_text,
    plain_signs,
    read_indices,
    read_numbers,
)
from core.crystal.turning import angle_between, unit
from core.errors import InputError
from core.tensor.symmetry import crystal_class, laue_rotations

Vector = tuple[float, float, float]
Kind = Literal["uvw", "hkl", "vector"]

_WHOLE = 0.02
"""How far a symmetry operation, written on the cell vectors, may be from whole numbers."""
_NAMES = {**CELL_NAMES, "x": "1,0,0", "y": "0,1,0", "z": "0,0,1"}
_ACCEPTED = "Write [1 1 0], (1 0 2), or three components along the crystal axes: 0.3,0.4,0.87."


@dataclass(frozen=True)
class Direction:
    """A direction in the crystal.

    Attributes
    ----------
    vector : tuple of 3 floats
        Unit vector, crystal axes.
    text : str
        As it would be printed, with ASCII minus signs; reads back as the same vector.
    kind : str
        "uvw" along cell vectors, "hkl" normal to a plane, "vector" by components.
    """

    vector: Vector
    text: str
    kind: Kind


@dataclass(frozen=True)
class Nearest:
    """Indices near a vector.

    Attributes
    ----------
    text : str
        "[1 -1 0]" or "(1 0 2)"; four indices for hexagonal cells.
    angle_deg : float
        Angle between the vector and what the indices name.
    vector : tuple of 3 floats
        What the indices name, as unit vector, crystal axes.
    """

    text: str
    angle_deg: float
    vector: Vector


def vector_text(vector: FloatArray) -> str:
    """Return components at full precision, "0.3,0.4,0.87"; rounding dust reads as 0."""
    return ",".join(number_text(v if abs(v) > 1e-16 else 0.0) for v in vector.tolist())


def parse_direction(text: str, frame: CrystalFrame) -> Direction:
    """Read a direction of the crystal.

    Parameters
    ----------
    text : str
        "[1 1 0]", "[1-10]", "[2 -1 -1 0]" along cell vectors, "(1 0 2)", "(1 0 -1 2)" along
        a plane normal, "0.3,0.4,0.87" by components along the crystal axes, or one of the
        names a, b, c, a*, b*, c*, x, y, z. Indices need not be whole.
    frame : CrystalFrame

    Returns
    -------
    Direction
        Unit vector in crystal axes.

    Raises
    ------
    InputError
        If it cannot be read, has no direction, or needs a cell that was not given.
    """
    plain = plain_signs(text)
    plain = _NAMES.get(plain, plain)
    if plain[:1] in ("⟨", "{"):
        raise InputError(f"{text} names a whole family of directions.", "Name one member.")
    if plain[:1] in CLOSING:
        indices = three_indices(plain, frame.cell, frame.class_key)
        return _as_direction(indices, frame, read_indices(plain).text)
    return _parse_components(plain, text)


def _as_direction(indices: Indices, frame: CrystalFrame, text: str) -> Direction:
    x, y, z = lattice_vector(indices, frame.basis()).tolist()
    return Direction((x, y, z), text, "hkl" if indices.is_plane else "uvw")


def _parse_components(plain: str, text: str) -> Direction:
    try:
        values = read_numbers(plain)
    except InputError as error:
        raise InputError(f"'{text}' is not a direction.", _ACCEPTED) from error
    if len(values) != 3:
        raise InputError(
            f"'{text}' has {len(values)} {'component' if len(values) == 1 else 'components'}"
            " where three are needed.",
            _ACCEPTED,
        )
    if not any(values):
        raise InputError(f"'{text}' has no direction: all its components are zero.")
    x, y, z = unit(np.array(values)).tolist()
    return Direction((x, y, z), ",".join(number_text(v) for v in values), "vector")


# --- nearest indices -----------------------------------------------------------------------


@lru_cache(maxsize=8)
def _coprime_triples(largest: int) -> IntArray:
    """Return whole triples without common factor, one of each ± pair, simplest first."""
    span = np.arange(-largest, largest + 1)
    triples = np.stack(np.meshgrid(span, span, span, indexing="ij"), axis=-1).reshape(-1, 3)
    coprime = np.gcd.reduce(triples, axis=1) == 1
    first = np.take_along_axis(triples, np.argmax(triples != 0, axis=1)[:, None], axis=1)
    kept = triples[coprime & (first[:, 0] > 0)]
    negatives = (kept < 0).sum(axis=1)
    order = np.lexsort((negatives, (kept**2).sum(axis=1)))
    return np.asarray(kept[order], dtype=np.intp)


@lru_cache(maxsize=32)
def index_table(frame: CrystalFrame, largest: int, plane: bool) -> tuple[IntArray, FloatArray]:
    """Return low-index triples and their unit vectors in crystal axes, each (N, 3).

    One of each pair ±, without common factors, simplest (least sum of squares) first.
    """
    triples = _coprime_triples(largest)
    basis = frame.basis()
    rows = np.linalg.inv(basis) if plane else basis.T
    vectors = triples @ rows
    return triples, read_only(vectors / np.linalg.norm(vectors, axis=1, keepdims=True))


def indices_text(triple: Iterable[int], frame: CrystalFrame, plane: bool) -> str:
    """Return whole indices as printed for this crystal: four of them for hexagonal cells."""
    indices = Indices(tuple(float(value) for value in triple), "(" if plane else "[")
    return (four_from_three(indices) if frame.uses_four_indices else indices).text


def nearest_indices(
    vector: FloatArray | Vector, frame: CrystalFrame, largest: int = 6, plane: bool = False
) -> Nearest:
    """Return the low-index direction, or plane normal, nearest to a vector.

    Parameters
    ----------
    vector : array_like, shape (3,)
        Crystal axes, any length but zero.
    frame : CrystalFrame
        Its table of candidates is kept, so calling again costs microseconds.
    largest : int
        No index, taken as three, is larger.
    plane : bool
        Whether to name the plane whose normal is nearest.

    Raises
    ------
    InputError
        If the frame has no cell and needs one (see `CrystalFrame.has_basis`).
    """
    triples, vectors = index_table(frame, largest, plane)
    target = unit(np.asarray(vector, dtype=np.float64))
    closeness = vectors @ target
    sizes = np.abs(closeness)
    best = int(np.argmax(sizes >= sizes.max() - 1e-14))  # the simplest of equals
    sign = 1 if closeness[best] >= 0 else -1
    x, y, z = (sign * vectors[best]).tolist()
    text = indices_text((sign * triples[best]).tolist(), frame, plane)
    return Nearest(text, angle_between(target, sign * vectors[best]), (x, y, z))


# --- families ------------------------------------------------------------------------------


def family(text: str, frame: CrystalFrame) -> tuple[Direction, ...]:
    """Return every direction ⟨u v w⟩, or plane normal {h k l}, that symmetry makes equal.

    Parameters
    ----------
    text : str
        "⟨1 1 0⟩" (or "<1 1 0>") or "{1 0 2}"; four indices where hexagonal.
    frame : CrystalFrame

    Returns
    -------
    tuple of Direction
        Each member once, opposites counted apart, the one named first: the multiplicity is
        the length. An isotropic medium has no symmetry-equal indices beyond the opposite.

    Raises
    ------
    InputError
        If it cannot be read, or the cell does not have the symmetry of the class.
    """
    indices = three_indices(text, frame.cell, frame.class_key)
    if indices.bracket not in "⟨{":
        raise InputError(
            f"{text} names one {'plane' if indices.is_plane else 'direction'}, not a family.",
            "Write ⟨u v w⟩ for directions and {h k l} for planes.",
        )
    is_four = len(read_indices(text).values) == 4
    one = Indices((), "(" if indices.is_plane else "[")
    start = np.array(indices.values)
    members: dict[Vector, Direction] = {}
    for operation in _lattice_operations(frame):
        turned = operation @ start if not indices.is_plane else start @ operation
        for values in (turned, -turned):
            u, v, w = (value + 0.0 for value in np.round(values, 12).tolist())
            member = one.with_values((u, v, w))
            shown = _four_index_member(member) if is_four else member
            members.setdefault((u, v, w), _as_direction(member, frame, shown.text))
    return tuple(members.values())


def _four_index_member(member: Indices) -> Indices:
    """Return a family member in four indices, at the scale of the four that were read."""
    u, v, w = member.values
    if member.is_plane:
        return member.with_values((u, v, -(u + v), w))
    four = ((2 * u - v) / 3, (2 * v - u) / 3, -(u + v) / 3, w)
    return member.with_values([round(value, 12) for value in four])


@lru_cache(maxsize=16)
def _lattice_operations(frame: CrystalFrame) -> IntArray:
    """Return the Laue group's rotations as whole matrices on [u v w], identity first."""
    basis = frame.basis()
    rotations = laue_rotations(crystal_class(frame.class_key, frame.unique_axis))
    operations = np.linalg.solve(basis, rotations @ basis)
    whole = np.rint(operations)
    if np.abs(operations - whole).max() > _WHOLE:
        raise InputError(
            f"The cell, with the axes '{frame.axes}', does not have the symmetry of the"
            f" class {frame.class_key}: its operations do not carry the cell onto itself.",
            "Check the cell, the crystal axes and the class.",
        )
    from_identity = np.abs(whole - np.eye(3)).sum(axis=(1, 2))
    order = np.argsort(from_identity, kind="stable")
    return np.asarray(whole[order], dtype=np.intp)


def angle_text(degrees: float) -> str:
    """Return an angle so that it reads back within 1e-14 rad, without rounding dust."""
    rounded = round(degrees, 12)
    return number_text(rounded if math.isfinite(rounded) else degrees)
