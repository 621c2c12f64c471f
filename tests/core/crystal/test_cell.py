"""The unit cell against closed forms, and the crystal axes against their definitions."""

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from core.crystal.cell import (
    AXES_CONVENTIONS,
    CrystalFrame,
    UnitCell,
    axes_matrix,
    axes_note,
    axes_text,
    axes_words,
    cell_mismatch,
    change_of_axes,
)
from core.errors import InputError

OBLIQUE = UnitCell(5.2, 7.9, 9.1, 82.0, 107.5, 98.3)

lengths = st.floats(1.0, 30.0)
angles = st.floats(40.0, 140.0)


@st.composite
def cells(draw):
    """Any cell that is not nearly flat."""
    alpha, beta, gamma = draw(angles), draw(angles), draw(angles)
    total = alpha + beta + gamma
    assume(total < 350 and 2 * max(alpha, beta, gamma) < total - 5)
    return UnitCell(draw(lengths), draw(lengths), draw(lengths), alpha, beta, gamma)


def cosines(cell):
    return [math.cos(math.radians(angle)) for angle in (cell.alpha, cell.beta, cell.gamma)]


@given(cells())
@settings(deadline=None, max_examples=60)
def test_volume_is_the_textbook_formula(cell):
    """V = abc √(1 − Σcos² + 2 Π cos), any crystallography text."""
    ca, cb, cg = cosines(cell)
    expected = (
        cell.a * cell.b * cell.c * math.sqrt(1 - ca**2 - cb**2 - cg**2 + 2 * ca * cb * cg)
    )
    assert cell.volume == pytest.approx(expected, rel=1e-10)


@given(cells())
@settings(deadline=None, max_examples=60)
def test_reciprocal_cell_is_the_textbook_formula(cell):
    """a* = bc sin α / V and cos α* = (cos β cos γ − cos α)/(sin β sin γ), and cyclic."""
    other = cell.reciprocal()
    ca, cb, cg = cosines(cell)
    sa, sb, sg = (math.sqrt(1 - value**2) for value in (ca, cb, cg))
    assert other.a == pytest.approx(cell.b * cell.c * sa / cell.volume, rel=1e-10)
    assert other.b == pytest.approx(cell.a * cell.c * sb / cell.volume, rel=1e-10)
    assert other.c == pytest.approx(cell.a * cell.b * sg / cell.volume, rel=1e-10)
    starred = [
        (cb * cg - ca) / (sb * sg),
        (ca * cg - cb) / (sa * sg),
        (ca * cb - cg) / (sa * sb),
    ]
    assert cosines(other) == pytest.approx(starred, abs=1e-10)
    assert other.volume == pytest.approx(1 / cell.volume, rel=1e-10)
    again = other.reciprocal()
    assert (again.a, again.alpha) == pytest.approx((cell.a, cell.alpha), rel=1e-9)


@pytest.mark.parametrize(
    ("values", "reason"),
    [
        ((0, 1, 1, 90, 90, 90), "length a = 0"),
        ((1, -2.5, 1, 90, 90, 90), "length b = -2.5"),
        ((1, 1, math.inf, 90, 90, 90), "c is not a finite number"),
        ((1, 1, 1, 90, math.nan, 90), "β is not a finite number"),
        ((1e300, 1, 1, 90, 90, 90), "not that of a crystal's cell"),
        ((1, 1, 1, 0, 90, 90), "α = 0° must lie between 0 and 180"),
        ((1, 1, 1, 90, 90, 180), "γ = 180° must lie between 0 and 180"),
        ((1, 1, 1, 120, 120, 120), "α + β + γ = 360° must add up to less than 360"),
        ((1, 1, 1, 130, 60, 60), "α = 130° must be less than β + γ = 120"),
        ((1, 1, 1, 60, 121, 60), "β = 121° must be less than α + γ = 120"),
        ((1, 1, 1, 60, 60, 120), "γ = 120° must be less than α + β = 120"),
        ((1, 1, 1, 60, 60, 120 - 1e-13), "flat"),
    ],
)
def test_an_impossible_cell_is_refused_with_the_reason(values, reason):
    with pytest.raises(InputError, match="Unit cell") as caught:
        UnitCell(*values)
    assert reason in str(caught.value)


@pytest.mark.parametrize("axes", [*AXES_CONVENTIONS, "z||[1 1 0], x||(1 -1 2)", "y//c*, x//a"])
@given(cell=cells())
@settings(deadline=None, max_examples=20)
def test_axes_keep_the_metric_and_are_right_handed(axes, cell):
    """AᵀA is the metric tensor a_i·a_j whatever the axes; det A is +V."""
    A = axes_matrix(cell, axes)
    ca, cb, cg = cosines(cell)
    sides = np.array([cell.a, cell.b, cell.c])
    metric = np.outer(sides, sides) * np.array([[1, cg, cb], [cg, 1, ca], [cb, ca, 1]])
    np.testing.assert_allclose(A.T @ A, metric, rtol=0, atol=1e-10 * metric.max())
    assert np.linalg.det(A) == pytest.approx(cell.volume, rel=1e-10)


@pytest.mark.parametrize("axes", AXES_CONVENTIONS)
def test_each_convention_puts_the_axes_where_it_says(axes):
    A = axes_matrix(OBLIQUE, axes)
    vectors = dict(zip(["a", "b", "c"], A.T, strict=True))
    vectors |= dict(zip(["a*", "b*", "c*"], np.linalg.inv(A), strict=True))
    for statement in axes.split(", "):
        letter, target = statement.split("||")
        along = vectors[target] / np.linalg.norm(vectors[target])
        np.testing.assert_allclose(along, np.eye(3)["xyz".index(letter)], atol=1e-14)
    assert axes_note(OBLIQUE, axes) == ""


@pytest.mark.parametrize(
    ("spelling", "same_as"),
    [
        ("z∥c, y∥b*", "z||c, y||b*"),
        ("z||[0 0 1], y||(0 1 0)", "z||c, y||b*"),
        ("Z//[001]; Y//(010)", "z||c, y||b*"),
        ("x = [1,0,0] z = (0,0,1)", "x||a, z||c*"),
        ("y||b*, z||c", "z||c, y||b*"),
        ("z||[0 0 2.5], y||(0 1 0)", "z||c, y||b*"),
    ],
)
def test_custom_statements_and_spellings(spelling, same_as):
    np.testing.assert_allclose(
        axes_matrix(OBLIQUE, spelling), axes_matrix(OBLIQUE, same_as), atol=1e-13
    )


def test_axes_have_one_text_and_words():
    assert axes_text("Z∥c;y // b*") == "z||c, y||b*"
    assert axes_words("z∥c, y∥b*") == AXES_CONVENTIONS["z||c, y||b*"]
    assert axes_words("z||[1 1 1], x||(1 -1 0)") == "z along [1 1 1], x along (1 -1 0)"


def test_of_two_statements_that_are_not_perpendicular_the_first_is_exact():
    A = axes_matrix(OBLIQUE, "z||c, y||b")
    b, c = A[:, 1], A[:, 2]
    np.testing.assert_allclose(c / OBLIQUE.c, [0, 0, 1], atol=1e-14)
    assert b[0] == pytest.approx(0, abs=1e-14)
    assert b[1] > 0
    note = axes_note(OBLIQUE, "z||c, y||b")
    assert "z lies exactly along c" in note
    assert "y is 8° from b" in note  # α = 82° leaves 8°


@pytest.mark.parametrize(
    ("axes", "reason"),
    [
        ("", "does not say how"),
        ("z||c", "does not say how"),
        ("z||c, y||q", "does not say how"),
        ("z||c, z||b", "twice about z"),
        ("z||c, y||[0 0 2]", "parallel"),
        ("z||[0 0 0], y||b", "zero"),
        ("z||c, y||(0 1 -1 0)", "four indices"),
    ],
)
def test_axes_that_fix_nothing_are_refused(axes, reason):
    with pytest.raises(InputError, match=reason):
        axes_matrix(OBLIQUE, axes)


def test_four_index_statements_hold_in_a_hexagonal_cell():
    quartz = UnitCell(4.9137, 4.9137, 5.4047, 90, 90, 120)
    A = axes_matrix(quartz, "z||c, y||(0 1 -1 0)")
    np.testing.assert_allclose(A, axes_matrix(quartz, "z||c, y||b*"), atol=1e-14)


@pytest.mark.parametrize("new", AXES_CONVENTIONS)
@pytest.mark.parametrize("old", AXES_CONVENTIONS)
def test_change_of_axes_carries_the_cell_vectors(old, new):
    R = change_of_axes(OBLIQUE, old, new)
    np.testing.assert_allclose(
        R @ axes_matrix(OBLIQUE, old), axes_matrix(OBLIQUE, new), atol=1e-13
    )
    np.testing.assert_allclose(R @ R.T, np.eye(3), atol=1e-14)
    assert np.linalg.det(R) > 0


def test_frame_without_cell_is_the_unit_cube_only_for_cubic_and_isotropic():
    for key in ("cubic", "isotropic"):
        np.testing.assert_array_equal(CrystalFrame(class_key=key).basis(), np.eye(3))
    for key in ("triclinic", "hexagonal", "tetragonal_6"):
        frame = CrystalFrame(class_key=key)
        assert not frame.has_basis
        with pytest.raises(InputError, match="need the unit cell"):
            frame.basis()
    turned_cube = CrystalFrame(axes="z||[1 1 1], x||[1 -1 0]", class_key="cubic").basis()
    np.testing.assert_allclose(turned_cube.sum(axis=1), [0, 0, math.sqrt(3)], atol=1e-14)


@pytest.mark.parametrize(
    ("cell", "fitting"),
    [
        (
            UnitCell(4, 4, 4, 90, 90, 90),
            {"cubic", "tetragonal_6", "orthorhombic", "trigonal_7"},
        ),
        (UnitCell(4, 4, 7, 90, 90, 120), {"hexagonal", "trigonal_6", "triclinic"}),
        (UnitCell(4, 4, 4, 75, 75, 75), {"trigonal_6", "triclinic"}),
        (UnitCell(4, 4, 7, 90, 90, 90), {"tetragonal_7", "orthorhombic", "monoclinic"}),
        (UnitCell(4, 5, 7, 90, 103, 90), {"monoclinic", "triclinic", "isotropic"}),
    ],
)
def test_cell_and_class_agree_or_the_rule_is_named(cell, fitting):
    keys = ("triclinic", "monoclinic", "orthorhombic", "tetragonal_7", "tetragonal_6",
            "trigonal_7", "trigonal_6", "hexagonal", "cubic", "isotropic")  # fmt: skip
    good = {key for key in keys if not cell_mismatch(cell, key)}
    assert fitting <= good
    assert ("cubic" in good) == (cell == UnitCell(4, 4, 4, 90, 90, 90))
    assert ("hexagonal" in good) == (cell.gamma == 120)


def test_cell_mismatch_follows_the_unique_axis():
    cell = UnitCell(4, 5, 7, 90, 90, 103)
    assert cell_mismatch(cell, "monoclinic", "z") == ""
    assert "α = γ = 90°" in cell_mismatch(cell, "monoclinic", "y")
