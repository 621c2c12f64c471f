"""Directions in words: the nearer of indices, and angles where none are near."""

import numpy as np
import pytest

from core.crystal.cell import CrystalFrame, UnitCell
from gui.presenting.near import angle_words, axis_words, near_words, place_words

# In an orthorhombic cell (h k l) is not normal to [h k l]: both are known in closed form.
FRAME = CrystalFrame(UnitCell(2.0, 3.0, 4.0, 90.0, 90.0, 90.0), "z||c, x||a*", "orthorhombic")
NORMAL = np.array([1 / 2, 1 / 3, 0.0])  # of the plane (1 1 0)
ROW = np.array([2.0, 3.0, 0.0])  # along [1 1 0]


def test_a_plane_normal_is_named_where_it_is_nearer_than_a_row():
    assert axis_words(NORMAL, FRAME) == "(1 1 0)"
    assert axis_words(ROW, FRAME) == "[1 1 0]"
    assert axis_words(-ROW, FRAME) == "[−1 −1 0]"
    assert near_words(ROW, FRAME) == "along [1 1 0]"


def test_what_is_off_says_by_how_much():
    angle = np.radians(0.4)
    off = np.cos(angle) * np.eye(3)[2] + np.sin(angle) * np.eye(3)[0]
    assert axis_words(off, FRAME) == "[0 0 1] 0.40° off"
    assert near_words(off, FRAME) == "near [0 0 1], 0.40° off"


def test_without_a_cell_components_are_said():
    frame = CrystalFrame(None, "z||c, x||a*", "triclinic")
    assert axis_words(np.array([0.6, 0.0, -0.8]), frame) == "0.600  0  −0.800"
    assert place_words(np.array([0.6, 0.0, -0.8]), frame, np.eye(3)) == "θ 143.1°  φ 0.0°"


def test_far_from_low_indices_a_place_is_two_angles_in_part_axes():
    # Of a cell so flat the low indices crowd about one plane, and leave its normal bare.
    flat = CrystalFrame(UnitCell(1.0, 1.0, 90.0, 90.0, 90.0, 90.0), "z||c, x||a*", "tetragonal")
    vector = np.array([1.0, 0.0, np.sqrt(3.0)]) / 2  # 30° from z
    turn = np.array([[0.0, 1, 0], [-1, 0, 0], [0, 0, 1]])
    assert place_words(vector, flat, turn) == "θ 30.0°  φ −90.0°"
    assert place_words(np.eye(3)[0], flat, turn) == "[1 0 0]"


@pytest.mark.parametrize(("vector", "words"), [
    ((0.0, 0.0, 2.0), "θ 0.0°  φ 0.0°"), ((1.0, 1.0, 0.0), "θ 90.0°  φ 45.0°"),
])  # fmt: skip
def test_polar_angles(vector, words):
    assert angle_words(np.array(vector)) == words
