"""Indices as text, directions in space, nearest indices, and families."""

import math
import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.crystal.cell import CrystalFrame, UnitCell
from core.crystal.directions import family, nearest_indices, parse_direction
from core.errors import InputError

CUBIC = CrystalFrame(class_key="cubic")
QUARTZ_CELL = UnitCell(4.9137, 4.9137, 5.4047, 90, 90, 120)
QUARTZ = CrystalFrame(QUARTZ_CELL, class_key="trigonal_6")
OBLIQUE = CrystalFrame(UnitCell(5.2, 7.9, 9.1, 82.0, 107.5, 98.3))
ROOT2, ROOT3 = math.sqrt(2), math.sqrt(3)


def angle(first, second):
    return math.degrees(math.acos(np.clip(np.dot(first, second), -1, 1)))


@pytest.mark.parametrize(
    ("text", "vector", "printed"),
    [
        ("[1 1 0]", (1, 1, 0), "[1 1 0]"),
        ("[110]", (1, 1, 0), "[1 1 0]"),
        ("[1-10]", (1, -1, 0), "[1 -1 0]"),
        ("[1 −1 0]", (1, -1, 0), "[1 -1 0]"),
        ("[1 1\u0304 0]", (1, -1, 0), "[1 -1 0]"),
        ("[11\u03050]", (1, -1, 0), "[1 -1 0]"),
        ("[1\u03051\u03052]", (-1, -1, 2), "[-1 -1 2]"),
        ("[1\u03050\u0305 1 0]", (-10, 1, 0), "[-10 1 0]"),
        ("(1, 0, 2)", (1, 0, 2), "(1 0 2)"),
        ("( 1 ,0, 2 )", (1, 0, 2), "(1 0 2)"),
        ("[0.5 +1 -1.5e1]", (0.5, 1, -15), "[0.5 1 -15]"),
        ("[2 2 0]", (1, 1, 0), "[2 2 0]"),
        ("0.3,0.4,0.87", (0.3, 0.4, 0.87), "0.3,0.4,0.87"),
        ("0.3 0.4 −0.87", (0.3, 0.4, -0.87), "0.3,0.4,-0.87"),
        ("b", (0, 1, 0), "[0 1 0]"),
        ("c*", (0, 0, 1), "(0 0 1)"),
        ("x", (1, 0, 0), "1,0,0"),
        ("1e200,1e200,0", (1, 1, 0), "1e+200,1e+200,0"),
    ],
)
def test_reading_in_a_cube(text, vector, printed):
    direction = parse_direction(text, CUBIC)
    expected = np.array(vector) / np.linalg.norm(vector)
    np.testing.assert_allclose(direction.vector, expected, atol=1e-15)
    assert direction.text == printed
    assert parse_direction(direction.text, CUBIC) == direction


def test_kinds_are_told_apart():
    kinds = [parse_direction(text, CUBIC).kind for text in ("[1 1 0]", "(1 1 0)", "1,1,0")]
    assert kinds == ["uvw", "hkl", "vector"]


@given(
    st.lists(st.floats(-9, 9), min_size=3, max_size=3).filter(lambda v: max(map(abs, v)) > 1e-3)
)
@settings(deadline=None, max_examples=60)
def test_printed_components_and_indices_read_back_exactly(values):
    for left, right in ("[]", "()"):
        text = left + " ".join(map(repr, values)) + right
        once = parse_direction(text, OBLIQUE)
        assert parse_direction(once.text, OBLIQUE) == once


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("[0 0 0]", "names no direction"),
        ("(000)", "names no plane"),
        ("0,0,0", "has no direction"),
        ("[1 1]", "2 indices"),
        ("[1 2 3 4 5]", "5 indices"),
        ("[1 -10]", "Put a space"),
        ("[12345]", "cannot be told apart"),
        ("[1.5-10]", "cannot be told apart"),
        ("[11", "must end with ']'"),
        ("[1 1 0)", "must end with ']'"),
        ("[1 x 0]", "'x' in"),
        ("[1 nan 0]", "'nan' in"),
        ("[1 1e999 0]", "'1e999' in"),
        ("0.3,0.4", "2 components where three"),
        ("0,3 0,4 0,87", "6 components where three"),
        ("north", "is not a direction"),
        ("", "0 components where three"),
        ("⟨1 1 0⟩", "family"),
        ("{1 1 0}", "family"),
        ("[1 1 -2 0]", "this crystal is cubic"),
    ],
)
def test_what_cannot_be_read_is_refused_in_words(text, reason):
    with pytest.raises(InputError) as caught:
        parse_direction(text, CUBIC)
    assert reason in str(caught.value)


def test_indices_without_a_cell_ask_for_it():
    for text in ("[1 0 0]", "(1 0 0)", "a"):
        with pytest.raises(InputError, match="no cell was given"):
            parse_direction(text, CrystalFrame(class_key="orthorhombic"))
    with pytest.raises(InputError, match="c/a decides"):
        parse_direction("[2 -1 -1 0]", CrystalFrame(class_key="hexagonal"))
    assert parse_direction("0,0,2", CrystalFrame()).vector == (0, 0, 1)


def test_a_plane_normal_is_perpendicular_to_the_directions_in_the_plane():
    """[u v w] lies in (h k l) when hu + kv + lw = 0 (zone law)."""
    for plane, direction in (("(1 2 3)", "[1 1 -1]"), ("(2 -1 0)", "[1 2 5]")):
        normal = parse_direction(plane, OBLIQUE).vector
        inside = parse_direction(direction, OBLIQUE).vector
        assert np.dot(normal, inside) == pytest.approx(0, abs=1e-15)


@pytest.mark.parametrize(
    ("four", "three"),
    [
        ("[2 -1 -1 0]", "[1 0 0]"),
        ("[1 1 -2 0]", "[1 1 0]"),
        ("[1 0 -1 0]", "[2 1 0]"),
        ("[2 -1 -1 3]", "[1 0 1]"),
        ("[0 0 0 1]", "[0 0 1]"),
        ("[1 1\u0304 0 1]", "[1 -1 1]"),
        ("(1 0 -1 1)", "(1 0 1)"),
        ("(10-11)", "(1 0 1)"),
        ("(1 1 -2 2)", "(1 1 2)"),
    ],
)
def test_four_indices_agree_with_three(four, three):
    np.testing.assert_allclose(
        parse_direction(four, QUARTZ).vector, parse_direction(three, QUARTZ).vector, atol=1e-15
    )


@pytest.mark.parametrize(
    ("text", "needed", "offer"),
    [
        ("[1 1 0 0]", "here -2", "[1 1 -2 0]"),
        ("(1 0 1 2)", "here -1", "(1 0 -1 2)"),
        ("[0.5 0.25 0 1]", "here -0.75", "[0.5 0.25 -0.75 1]"),
    ],
)
def test_the_third_of_four_must_be_minus_the_sum(text, needed, offer):
    with pytest.raises(InputError, match="minus the sum of the first two") as caught:
        parse_direction(text, QUARTZ)
    assert needed in caught.value.message
    assert offer in caught.value.hint


def test_four_indices_need_hexagonal_axes():
    frame = CrystalFrame(UnitCell(4, 4, 4, 75, 75, 75), class_key="trigonal_6")
    with pytest.raises(InputError, match=r"this cell has a = 4 Å, b = 4 Å, α = 75°"):
        parse_direction("[1 1 -2 0]", frame)
    by_metric = CrystalFrame(QUARTZ_CELL, class_key="triclinic")
    assert parse_direction("[2 -1 -1 0]", by_metric).vector == pytest.approx((1, 0, 0))


def test_angles_between_planes_against_closed_forms():
    """Hexagonal: tan ρ(h0−hl) = 2 (c/a) h / (√3 l); cubic: cos from the indices."""
    rhomb = parse_direction("(1 0 -1 1)", QUARTZ).vector
    expected = math.degrees(math.atan(2 * 5.4047 / 4.9137 / ROOT3))
    assert angle(rhomb, (0, 0, 1)) == pytest.approx(expected, abs=1e-10)
    # Quartz r against c: 51°47′ (goniometric tables; from memory).
    assert angle(rhomb, (0, 0, 1)) == pytest.approx(51 + 47 / 60, abs=0.02)
    a, b = parse_direction("[1 1 0]", CUBIC).vector, parse_direction("[1 1 1]", CUBIC).vector
    assert angle(a, b) == pytest.approx(math.degrees(math.acos(2 / ROOT2 / ROOT3)), abs=1e-10)


# --- nearest indices -----------------------------------------------------------------------


@pytest.mark.parametrize("plane", [False, True])
@pytest.mark.parametrize("frame", [CUBIC, QUARTZ, OBLIQUE], ids=["cubic", "quartz", "oblique"])
def test_nearest_indices_are_the_best_of_all_that_exist(frame, plane):
    """Against a plain loop over every triple up to 3, through the parser."""
    rng = np.random.default_rng(7)
    left, right = "()" if plane else "[]"
    span = range(-3, 4)
    everything = [
        parse_direction(f"{left}{u} {v} {w}{right}", frame).vector
        for u in span for v in span for w in span if (u, v, w) != (0, 0, 0)
    ]  # fmt: skip
    for vector in rng.normal(size=(12, 3)):
        vector /= np.linalg.norm(vector)
        nearest = nearest_indices(vector, frame, largest=3, plane=plane)
        least = min(angle(vector, other) for other in everything)
        assert nearest.angle_deg == pytest.approx(least, abs=1e-6)
        named = parse_direction(nearest.text, frame).vector
        np.testing.assert_allclose(named, nearest.vector, atol=1e-14)
        assert nearest.angle_deg == pytest.approx(angle(vector, named), abs=1e-6)


def test_nearest_indices_find_what_was_named():
    for text in ("[1 -1 0]", "[-3 2 6]", "(1 0 2)", "(-1 -1 -1)"):
        direction = parse_direction(text, OBLIQUE)
        found = nearest_indices(direction.vector, OBLIQUE, plane=direction.kind == "hkl")
        assert found.text == text
        assert found.angle_deg < 1e-12
    assert nearest_indices((2, 0, 0), QUARTZ).text == "[2 -1 -1 0]"
    assert nearest_indices((0, 1, 0), QUARTZ, plane=True).text == "(0 1 -1 0)"
    assert nearest_indices((1, 1, 0.001), CUBIC).text == "[1 1 0]"


def test_nearest_indices_cost_less_than_a_millisecond():
    nearest_indices((0.3, 0.4, 0.87), OBLIQUE)
    times = []
    for _ in range(20):
        start = time.perf_counter()
        nearest_indices((0.3, 0.4, 0.87), OBLIQUE)
        times.append(time.perf_counter() - start)
    assert min(times) < 1e-3


def test_nearest_indices_need_a_cell():
    with pytest.raises(InputError, match="no cell was given"):
        nearest_indices((1, 0, 0), CrystalFrame())


# --- families ------------------------------------------------------------------------------

TETRAGONAL_CELL = UnitCell(4, 4, 7, 90, 90, 90)

# Multiplicities of face forms of the Laue groups: International Tables for Crystallography
# vol. A, tables of crystal forms (from memory; they follow from orbit and stabiliser).
MULTIPLICITIES = [
    ("cubic", None, {"{1 0 0}": 6, "{1 1 1}": 8, "{1 1 0}": 12, "{2 1 0}": 24, "{2 1 1}": 24,
                     "{3 2 1}": 48, "⟨1 1 0⟩": 12, "<1 2 3>": 48}),
    ("hexagonal", QUARTZ_CELL, {"{0 0 0 1}": 2, "{1 0 -1 0}": 6, "{1 1 -2 0}": 6,
                                "{1 0 -1 1}": 12, "{1 1 -2 1}": 12, "{2 1 -3 1}": 24,
                                "⟨2 -1 -1 0⟩": 6, "⟨0 0 0 1⟩": 2}),
    ("trigonal_6", QUARTZ_CELL, {"{0 0 0 1}": 2, "{1 0 -1 0}": 6, "{1 0 -1 1}": 6,
                                 "{1 1 -2 1}": 12, "{2 1 -3 1}": 12, "⟨1 0 0⟩": 6}),
    ("trigonal_7", QUARTZ_CELL, {"{0 0 0 1}": 2, "{1 0 -1 1}": 6, "{2 1 -3 1}": 6}),
    ("tetragonal_6", TETRAGONAL_CELL, {"{0 0 1}": 2, "{1 1 1}": 8, "{3 2 1}": 16}),
    ("tetragonal_7", TETRAGONAL_CELL, {"{0 0 1}": 2, "{1 0 0}": 4, "{3 2 1}": 8}),
    ("orthorhombic", UnitCell(4, 5, 7, 90, 90, 90), {"{1 0 0}": 2, "{1 1 0}": 4, "{1 2 3}": 8}),
    ("monoclinic", UnitCell(4, 5, 7, 90, 103, 90), {"{0 1 0}": 2, "{1 0 2}": 2, "{1 2 3}": 4}),
    ("triclinic", OBLIQUE.cell, {"{1 2 3}": 2, "⟨1 0 0⟩": 2}),
    ("isotropic", None, {"{1 2 3}": 2}),
]  # fmt: skip


@pytest.mark.parametrize(("key", "cell", "counts"), MULTIPLICITIES, ids=lambda v: str(v)[:12])
def test_multiplicity_of_a_family(key, cell, counts):
    frame = CrystalFrame(cell, class_key=key)
    for text, count in counts.items():
        members = family(text, frame)
        assert len(members) == count, text
        assert len({member.text for member in members}) == count
        vectors = np.array([member.vector for member in members])
        np.testing.assert_allclose(vectors.sum(axis=0), 0, atol=1e-12)


@pytest.mark.parametrize(("text", "first"), [("⟨1 1 0⟩", "[1 1 0]"), ("{3 1 2}", "(3 1 2)")])
def test_family_begins_with_the_member_named(text, first):
    members = family(text, CUBIC)
    assert members[0].text == first
    assert all(parse_direction(member.text, CUBIC) == member for member in members)


def test_family_members_make_equal_angles_with_the_axes_of_symmetry():
    heights = [abs(member.vector[2]) for member in family("{1 0 -1 1}", QUARTZ)]
    assert heights == pytest.approx([heights[0]] * 6, abs=1e-14)
    texts = {member.text for member in family("{1 0 -1 1}", QUARTZ)}
    # The positive rhombohedron r, not the negative one z = {0 1 -1 1}.
    assert texts == {"(1 0 -1 1)", "(0 -1 1 1)", "(-1 1 0 1)",
                     "(-1 0 1 -1)", "(0 1 -1 -1)", "(1 -1 0 -1)"}  # fmt: skip


def test_family_refuses_a_cell_without_the_symmetry_of_the_class():
    frame = CrystalFrame(UnitCell(4, 5, 6, 90, 90, 90), class_key="cubic")
    with pytest.raises(InputError, match="does not have the symmetry of the class cubic"):
        family("{1 1 1}", frame)
    with pytest.raises(InputError, match="not a family"):
        family("[1 1 1]", CUBIC)
