"""Orientations: every way against scipy, said and read back, and compared."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from core.crystal.cell import CrystalFrame, UnitCell
from core.crystal.directions import parse_direction
from core.crystal.orientation import (
    WAYS,
    misorientation,
    missed_direction,
    orientation_texts,
    parse_orientation,
    turned,
)
from core.errors import InputError
from core.tensor.symmetry import crystal_class, laue_rotations

CUBIC = CrystalFrame(class_key="cubic")
QUARTZ = CrystalFrame(UnitCell(4.9137, 4.9137, 5.4047, 90, 90, 120), class_key="trigonal_6")
OBLIQUE = CrystalFrame(UnitCell(5.2, 7.9, 9.1, 82.0, 107.5, 98.3), "x||a, z||c*")
BARE = CrystalFrame()
FRAMES = [CUBIC, QUARTZ, OBLIQUE, BARE]
FRAME_NAMES = ["cubic", "quartz", "oblique", "bare"]

angles = st.floats(-360, 360)
gimbal = st.sampled_from([0.0, 180.0, 1e-10, 180 - 1e-10, 90.0, 1e-7])
rotations = st.one_of(
    st.tuples(angles, angles, angles),
    st.tuples(angles, gimbal, angles),
    st.tuples(gimbal, gimbal, gimbal),
).map(lambda degrees: Rotation.from_euler("ZXZ", degrees, degrees=True).as_matrix())


def rotation(text, frame=CUBIC):
    return parse_orientation(text, frame).rotation


def test_a_second_direction_that_cannot_be_met_is_told_with_its_angle():
    """The angle from the vectors of the two statements, by numpy alone."""
    words = missed_direction("Z=(1 1 0) X=[1 0 0] turn 1 2 3", OBLIQUE)
    x = rotation("Z=(1 1 0) X=[1 0 0]", OBLIQUE)[0]
    wanted = np.array(parse_direction("[1 0 0]", OBLIQUE).vector)
    off = np.degrees(np.arccos(x @ wanted))
    assert off > 10
    assert words == f"X lies {off:.1f}° from [1 0 0], which is not in the plane (1 1 0)"
    other = missed_direction("Z=[1 1 0] Y=[1 0 0]", CUBIC)
    assert other == "Y lies 45.0° from [1 0 0], which is not at right angles to [1 1 0]"


@pytest.mark.parametrize(
    "text", ["Z=(1 1 0) X=[0 0 1]", "Z=(1 1 0) X=[-1 1 0]", "bunge 1 2 3", "axis [1 1 1] 15"]
)
def test_directions_that_are_met_say_nothing(text):
    assert missed_direction(text, CUBIC) == ""


def test_a_miss_below_a_twentieth_of_a_degree_is_none():
    assert missed_direction("Z=0,0,1 X=1,0,0.0008", CUBIC) == ""
    assert missed_direction("Z=0,0,1 X=1,0,0.001", CUBIC) != ""


@pytest.mark.parametrize(
    ("loose", "usual"),
    [
        ("YXl 35.25", "(YXl) 35.25"),
        ("YXlw 21.93/33.93", "(YXlw) 21.93/33.93"),
        ("Euler 10 20 30", "bunge 10 20 30"),
        ("euler 10, 20, 30", "bunge 10 20 30"),
    ],
)
def test_usual_words_are_read_and_said_back_in_one_form(loose, usual):
    assert parse_orientation(loose, CUBIC).text == usual


# --- reading -------------------------------------------------------------------------------


def test_two_directions():
    """The part of the everyday case written out by hand: Z = (1 1 0), X = [0 0 1]."""
    R = rotation("Z=(1 1 0) X=[0 0 1]")
    h = np.sqrt(0.5)
    np.testing.assert_allclose(R, [[0, 0, 1], [h, -h, 0], [h, h, 0]], atol=1e-15)


@pytest.mark.parametrize("pair", ["ZX", "XZ", "XY", "YX", "YZ", "ZY"])
def test_the_first_named_is_exact_and_the_second_as_near_as_possible(pair):
    R = rotation(f"{pair[0]}=(1 2 -1) {pair[1]}=[3 1 1]", OBLIQUE)
    first = np.array(parse_direction("(1 2 -1)", OBLIQUE).vector)
    second = np.array(parse_direction("[3 1 1]", OBLIQUE).vector)
    np.testing.assert_allclose(R["XYZ".index(pair[0])], first, atol=1e-15)
    # Nearest possible: the angle to its goal is what the right angle leaves over.
    best = np.sqrt(1 - (first @ second) ** 2)
    assert R["XYZ".index(pair[1])] @ second == pytest.approx(best, abs=1e-14)
    assert np.linalg.det(R) == pytest.approx(1)


def test_bunge_is_scipys_intrinsic_zxz():
    for degrees in ((10, 20, 30), (275.5, 131, -40), (0, 0, 0), (33, 180, 12)):
        expected = Rotation.from_euler("ZXZ", degrees, degrees=True).as_matrix()
        R = rotation("bunge {} {} {}".format(*degrees))
        np.testing.assert_allclose(R, expected, atol=1e-15)


def test_bunge_against_the_printed_matrix():
    """First row of g = Z(φ2) X(Φ) Z(φ1), Bunge 1982, eq. 2.50 (from memory); R = gᵀ."""
    p1, P, p2 = np.radians((10, 20, 30))
    first_row_of_g = [
        np.cos(p1) * np.cos(p2) - np.sin(p1) * np.sin(p2) * np.cos(P),
        np.sin(p1) * np.cos(p2) + np.cos(p1) * np.sin(p2) * np.cos(P),
        np.sin(p2) * np.sin(P),
    ]
    np.testing.assert_allclose(rotation("bunge 10 20 30")[:, 0], first_row_of_g, atol=1e-15)


@pytest.mark.parametrize("degrees", [15, -37.5, 180, 270])
def test_axis_turns_the_part_axes_actively(degrees):
    axis = np.ones(3) / np.sqrt(3)
    part_axes = Rotation.from_rotvec(axis * degrees, degrees=True).apply(np.eye(3))
    np.testing.assert_allclose(rotation(f"axis [1 1 1] {degrees}"), part_axes, atol=1e-14)


def test_a_turn_about_z_moves_x_towards_y():
    for text in ("axis [0 0 1] 30", "axis z 30", "axis 0,0,1 30°", "axis 0 0 1 30", "(ZXt) 30"):
        np.testing.assert_allclose(rotation(text)[0], [np.sqrt(0.75), 0.5, 0], atol=1e-15)


def test_the_suffix_turns_the_part_about_its_own_axes_in_order():
    start = Rotation.from_matrix(rotation("bunge 10 20 30"))
    # The part axes as columns in crystal axes, then intrinsic turns: multiply on the right.
    columns = start.inv() * Rotation.from_euler("XYZ", (0.5, -2, 40), degrees=True)
    R = rotation("bunge 10 20 30 turn 0.5 -2° 40")
    np.testing.assert_allclose(R, columns.as_matrix().T, atol=1e-15)
    np.testing.assert_allclose(R, turned(start.as_matrix(), (0.5, -2, 40)), atol=1e-15)
    # About its own Z the part keeps Z.
    np.testing.assert_allclose(turned(start.as_matrix(), (0, 0, 7))[2], start.as_matrix()[2])


@pytest.mark.parametrize(
    ("text", "canonical", "way"),
    [
        ("Z=(110)  X = [001]", "Z=(1 1 0) X=[0 0 1]", "directions"),
        ("z∥(1 1 0), x∥[0 0 −1]", "Z=(1 1 0) X=[0 0 -1]", "directions"),
        ("Y=0.1,0.2,-5 Z=a", "Y=0.1,0.2,-5 Z=[1 0 0]", "directions"),
        ("Bunge 10°, 20°, 30°", "bunge 10 20 30", "bunge"),
        ("(YXl)35.25°", "(YXl) 35.25", "cut"),
        ("axis [111] 15°", "axis [1 1 1] 15", "axis"),
        ("axis 1 1 1 15", "axis 1,1,1 15", "axis"),
        ("matrix 0,1,0; -1,0,0; 0,0,1", "matrix 0 1 0 -1 0 0 0 0 1", "matrix"),
        ("matrix [[0 1 0] [-1 0 0] [0 0 1]]", "matrix 0 1 0 -1 0 0 0 0 1", "matrix"),
        ("Identity", "identity", "identity"),
        ("identity turn 0 0 0", "identity", "identity"),
        ("turn 0 0 1", "identity turn 0 0 1", "identity"),
        ("(YXl) 35.25 turn 0.5 0 −1", "(YXl) 35.25 turn 0.5 0 -1", "cut"),
    ],
)
def test_canonical_text(text, canonical, way):
    found = parse_orientation(text, CUBIC)
    assert (found.text, found.way) == (canonical, way)
    assert way in WAYS
    again = parse_orientation(found.text, CUBIC)
    assert again.text == found.text
    np.testing.assert_allclose(again.rotation, found.rotation, rtol=0, atol=1e-15)
    assert not found.rotation.flags.writeable


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("", "is not an orientation"),
        ("bungee 1 2 3", "Did you mean 'bunge'?"),
        ("sideways", "is not an orientation"),
        ("[1 1 0]", "names one direction"),
        ("Z=[1 1 0]", "two different part axes"),
        ("Z=[1 1 0] Z=[0 0 1]", "two different part axes"),
        ("Z=[1 1 0] X=[0 0 1] Y=[1 -1 0]", "two different part axes"),
        ("Z=[1 1 0] X=[-2 -2 0]", "are parallel"),
        ("Z=[1 1 0] X=[0 0 0]", "names no direction"),
        ("bunge 10 20", "2 were given"),
        ("bunge 10 20 x", "'x' is not a number"),
        ("axis [1 1 1]", "one angle"),
        ("axis [1 1 1] 10 20", "one angle"),
        ("axis 1 1 1", "one angle"),
        ("identity 5", "nothing may follow"),
        ("identity turn 1 2", "three angles"),
        ("matrix 1 0 0 0 1 0 0 0", "nine numbers"),
        ("(YXl)", "0 angles"),
    ],
)
def test_what_cannot_be_read_is_refused_in_words(text, reason):
    with pytest.raises(InputError) as caught:
        parse_orientation(text, CUBIC)
    assert reason in str(caught.value)


PIECES = [
    "Z=", "X=", "(YXl)", "axis", "bunge", "matrix", "identity", "turn", "[1 1 0]", "(1 0 2)",
    "[", ")", "⟨", "c*", "1", "-2.5", "1e999", "°", "′", "\u0305", ",", "/", "z", "0", "é", "=",
]  # fmt: skip


@pytest.mark.parametrize("read", [parse_orientation, parse_direction])
@given(st.lists(st.sampled_from(PIECES), max_size=12).map(" ".join))
@settings(deadline=None, max_examples=200)
def test_whatever_is_typed_is_read_or_refused_in_a_sentence(read, text):
    try:
        said = read(text, OBLIQUE).text
    except InputError as refused:
        said = refused.message
        is_good = said.endswith(".")
    else:
        is_good = read(said, OBLIQUE).text == said
    assert is_good, said


def test_indices_in_an_orientation_ask_for_the_cell():
    with pytest.raises(InputError, match="no cell was given"):
        parse_orientation("Z=[1 1 0] X=[0 0 1]", BARE)
    assert rotation("Z=0,0,1 X=1,0,0", BARE).tolist() == np.eye(3).tolist()


# --- matrices ------------------------------------------------------------------------------


def matrix_text(matrix):
    return "matrix " + " ".join(map(repr, np.asarray(matrix).ravel().tolist()))


def test_a_matrix_of_six_decimals_is_cleaned():
    R = Rotation.random(random_state=11).as_matrix()
    cleaned = rotation(matrix_text(np.round(R, 6)))
    np.testing.assert_allclose(cleaned @ cleaned.T, np.eye(3), atol=1e-15)
    np.testing.assert_allclose(cleaned, R, atol=1e-6)


def test_a_matrix_near_a_rotation_is_refused_and_the_nearest_offered():
    R = Rotation.random(random_state=12).as_matrix()
    stretch = 1 + 0.005 / np.abs(R).max()
    with pytest.raises(InputError, match=r"up to 0\.005 away") as caught:
        parse_orientation(matrix_text(stretch * R), CUBIC)
    offered = caught.value.hint.split(": ")[1]
    np.testing.assert_allclose(rotation(offered), R, atol=1e-14)


def test_the_limit_of_a_matrix_is_one_in_a_million():
    good, bad = np.eye(3) * (1 + 0.9e-6), np.eye(3) * (1 + 1.1e-6)
    np.testing.assert_allclose(rotation(matrix_text(good)), np.eye(3), atol=1e-15)
    with pytest.raises(InputError, match=r"more than 1e-06"):
        rotation(matrix_text(bad))


@pytest.mark.parametrize(
    ("matrix", "reason"),
    [
        (np.diag([1, 1, -1]), "left-handed"),
        (-np.eye(3), "left-handed"),
        (np.diag([3, 1, 1]), "right angles"),
        (np.zeros((3, 3)), "not a rotation|left-handed"),
        (np.full((3, 3), 1e300), "not a rotation|left-handed"),
    ],
)
def test_what_is_no_rotation_is_refused(matrix, reason):
    with pytest.raises(InputError, match=reason):
        parse_orientation(matrix_text(matrix), CUBIC)


# --- saying --------------------------------------------------------------------------------


@pytest.mark.parametrize("frame", FRAMES, ids=FRAME_NAMES)
@given(R=rotations)
@settings(deadline=None, max_examples=50)
def test_every_way_reads_back_to_the_rotation(frame, R):
    texts = orientation_texts(R, frame)
    assert [way for way in WAYS if way != "identity"] == [w for w in texts if w != "identity"]
    for way, text in texts.items():
        found = parse_orientation(text, frame)
        assert found.way == way
        np.testing.assert_allclose(found.rotation, R, rtol=0, atol=1e-12, err_msg=text)


@pytest.mark.parametrize("frame", [CUBIC, QUARTZ, OBLIQUE], ids=FRAME_NAMES[:3])
@pytest.mark.parametrize("text", ["Z=(1 1 0) X=[0 0 1]", "Z=[1 2 0] X=(1 0 1)",
                                  "Z=(1 0 2) X=(0 1 0)", "Y=[1 1 1] Z=(1 -2 1)"])  # fmt: skip
def test_low_indices_come_back_as_indices(frame, text):
    R = rotation(text, frame)
    said = orientation_texts(R, frame)["directions"]
    np.testing.assert_allclose(rotation(said, frame), R, rtol=0, atol=1e-12)
    if text.startswith("Z="):
        assert "," not in said


@pytest.mark.parametrize(
    ("text", "way", "said"),
    [
        ("Z=(1 1 0) X=[0 0 1]", "directions", "Z=(1 1 0) X=[0 0 1]"),
        ("bunge 10 20 30", "bunge", "bunge 10 20 30"),
        ("bunge 350 0 20", "bunge", "bunge 0 0 10"),
        ("(YXwl) 21.93/33.93", "cut", "(YXwl) 21.93/33.93"),
        ("axis [1 1 1] 15", "axis", "axis [1 1 1] 15"),
        ("axis [1 0 0] -30", "axis", "axis [1 0 0] -30"),
        ("axis [0 0 1] 90", "matrix", "matrix 0 1 0 -1 0 0 0 0 1"),
        ("bunge 0 0 360", "identity", "identity"),
    ],
)
def test_round_numbers_stay_round(text, way, said):
    assert orientation_texts(rotation(text), CUBIC)[way] == said


def test_of_several_indices_the_simplest_is_said():
    """[0 1 0], [1 1 0], [-1 1 0] … all put X in the same place beside Z = [1 0 0]."""
    said = orientation_texts(rotation("Z=[1 0 0] X=[-1 1 0]", OBLIQUE), OBLIQUE)
    assert said["directions"] == "Z=[1 0 0] X=[0 1 0]"


def test_identity_is_said_only_of_the_identity():
    assert "identity" not in orientation_texts(rotation("axis [0 0 1] 1e-6"), CUBIC)


# --- comparing -----------------------------------------------------------------------------


@given(Ra=rotations, Rb=rotations)
@settings(deadline=None, max_examples=60)
def test_misorientation_is_the_angle_scipy_finds(Ra, Rb):
    found = misorientation(Ra, Rb)
    expected = np.degrees(
        (Rotation.from_matrix(Rb) * Rotation.from_matrix(Ra).inv()).magnitude()
    )
    assert found.angle_deg == pytest.approx(expected, abs=1e-6)
    # The turn, in crystal axes, takes the part axes of A to those of B.
    turn = Rotation.from_rotvec(np.array(found.axis) * found.angle_deg, degrees=True)
    np.testing.assert_allclose(turn.apply(Ra), Rb, atol=1e-12)


@pytest.mark.parametrize("key", ["cubic", "hexagonal", "trigonal_6", "orthorhombic"])
@pytest.mark.parametrize("seed", range(6))
def test_misorientation_with_symmetry_is_the_least_over_the_group(key, seed):
    group = laue_rotations(crystal_class(key))
    Ra, Rb = Rotation.random(2, random_state=seed).as_matrix()
    magnitudes = Rotation.from_matrix(Rb @ group @ Ra.T).magnitude()
    found = misorientation(Ra, Rb, group)
    assert found.angle_deg == pytest.approx(np.degrees(magnitudes.min()), abs=1e-9)
    same = misorientation(Ra, Ra @ group[-1], group)
    assert same.angle_deg == pytest.approx(0, abs=1e-6)


def test_no_cubic_misorientation_exceeds_the_known_limit():
    """62.8° for the cubic group: Mackenzie 1958, Biometrika 45, 229 (from memory)."""
    group = laue_rotations(crystal_class("cubic"))
    turns = Rotation.random(1500, random_state=5).as_matrix()
    largest = max(misorientation(np.eye(3), R, group).angle_deg for R in turns)
    assert 58 < largest < 62.8


def test_sigma_three_twin():
    """180° about [1 1 1] is 60° about ⟨1 1 1⟩ in a cubic crystal (the Σ3 twin)."""
    found = misorientation(np.eye(3), rotation("axis [1 1 1] 180"),
                           laue_rotations(crystal_class("cubic")))  # fmt: skip
    assert found.angle_deg == pytest.approx(60, abs=1e-12)
    np.testing.assert_allclose(np.abs(found.axis), np.ones(3) / np.sqrt(3), atol=1e-14)


@pytest.mark.parametrize(
    "text",
    ["bunge 1e300 0 0", "axis [1 1 1] 2e6", "(YXl) 3e6", "identity turn 0 -1e7 0"],
)
def test_angles_of_which_no_fraction_of_a_turn_is_left_are_refused(text):
    with pytest.raises(InputError, match="out of reach"):
        parse_orientation(text, CUBIC)
