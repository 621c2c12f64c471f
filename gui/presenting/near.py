"""Directions in words: the nearest low-index direction or plane normal, and polar angles."""

from __future__ import annotations

import numpy as np

from core.arrays import FloatArray
from core.crystal.cell import CrystalFrame
from core.crystal.directions import Nearest, nearest_indices
from core.numbers import MINUS, significant

_EXACT = 5e-3  # degrees off that are not worth a word
_FAR = 3.0  # degrees off from which indices tell less than angles


def nearer(vector: FloatArray, frame: CrystalFrame) -> Nearest:
    """Return the low-index direction nearest to a vector (crystal axes), or plane normal."""
    direction = nearest_indices(vector, frame)
    plane = nearest_indices(vector, frame, plane=True)
    return plane if plane.angle_deg < direction.angle_deg - 1e-6 else direction


def axis_words(vector: FloatArray, frame: CrystalFrame) -> str:
    """Return "[1 0 2] 1.3° off" for a vector in crystal axes; components without a cell."""
    if not frame.has_basis:
        return "  ".join(significant(round(float(x), 4), 3) for x in vector)
    near = nearer(vector, frame)
    off = "" if near.angle_deg < _EXACT else f" {significant(near.angle_deg, 2)}° off"
    return near.text.replace("-", MINUS) + off


def near_words(vector: FloatArray, frame: CrystalFrame) -> str:
    """Return "near [1 0 2], 1.3° off", or "along [1 0 2]", for a vector in crystal axes."""
    words = axis_words(vector, frame)
    if not frame.has_basis:
        return f"x y z  {words}"
    if not words.endswith(" off"):
        return f"along {words}"
    near, angle, off = words.rsplit(" ", 2)
    return f"near {near}, {angle} {off}"


def place_words(vector: FloatArray, frame: CrystalFrame, turn: FloatArray) -> str:
    """Return where a vector of crystal axes is, for a narrow table.

    Indices where low ones are near, polar angles in part axes where none are. Rows of `turn`
    (3, 3) are the part's axes in crystal axes.
    """
    if frame.has_basis and nearer(vector, frame).angle_deg <= _FAR:
        return axis_words(vector, frame)
    return angle_words(turn @ vector)


def angle_words(vector: FloatArray) -> str:
    """Return the polar angles of a vector, "θ 34.1°  φ 12.0°"."""
    x, y, z = vector.tolist()
    across = np.hypot(x, y)
    theta = np.degrees(np.arctan2(across, z))
    phi = np.degrees(np.arctan2(y, x)) if across > 1e-12 else 0.0
    return f"θ {theta:.1f}°  φ {phi:.1f}°".replace("-", MINUS)
