"""Voigt, Kelvin and fourth-rank forms against index-by-index definitions."""

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.errors import InputError
from core.tensor import notation
from tests.materials import random_rotation, random_stiffness, rotated

seeds = st.integers(0, 2**32 - 1)
few = settings(max_examples=20, deadline=None)

PLACE = {(0, 0): 0, (1, 1): 1, (2, 2): 2, (1, 2): 3, (2, 1): 3,
         (0, 2): 4, (2, 0): 4, (0, 1): 5, (1, 0): 5}  # fmt: skip


def symmetric(rng):
    matrix = rng.normal(size=(6, 6))
    return matrix + matrix.T


def test_voigt_index_and_pairs_agree():
    assert notation.VOIGT_PAIRS == ((0, 0), (1, 1), (2, 2), (1, 2), (0, 2), (0, 1))
    for pair, position in PLACE.items():
        assert notation.VOIGT_INDEX[pair] == position


def test_voigt_to_tensor_places_every_one_of_the_81_components():
    matrix = symmetric(np.random.default_rng(1))
    tensor = notation.voigt_to_tensor(matrix)
    for i, j, k, m in itertools.product(range(3), repeat=4):
        assert tensor[i, j, k, m] == matrix[PLACE[i, j], PLACE[k, m]]


@given(seeds)
@few
def test_tensor_round_trip_in_batches(seed):
    batch = np.random.default_rng(seed).normal(size=(4, 2, 6, 6))
    tensors = notation.voigt_to_tensor(batch)
    assert tensors.shape == (4, 2, 3, 3, 3, 3)
    np.testing.assert_array_equal(notation.tensor_to_voigt(tensors), batch)
    np.testing.assert_array_equal(tensors[3, 1], notation.voigt_to_tensor(batch[3, 1]))


@given(seeds)
@few
def test_kelvin_form_keeps_the_norm_of_the_tensor(seed):
    stiffness = random_stiffness(np.random.default_rng(seed))
    tensor = notation.voigt_to_tensor(stiffness)
    kelvin = notation.stiffness_to_kelvin(stiffness)
    assert np.linalg.norm(kelvin) == pytest.approx(np.sqrt((tensor**2).sum()), rel=1e-13)


@given(seeds)
@few
def test_kelvin_round_trips_and_inverse(seed):
    stiffness = random_stiffness(np.random.default_rng(seed))
    kelvin = notation.stiffness_to_kelvin(stiffness)
    np.testing.assert_allclose(notation.kelvin_to_stiffness(kelvin), stiffness, rtol=1e-14)
    compliance = np.linalg.inv(stiffness)
    kelvin_compliance = notation.compliance_to_kelvin(compliance)
    np.testing.assert_allclose(kelvin_compliance @ kelvin, np.eye(6), atol=1e-11)
    back = notation.kelvin_to_compliance(kelvin_compliance)
    np.testing.assert_allclose(back, compliance, rtol=1e-14)


def test_engineering_shear_of_a_cubic_crystal_is_one_over_c44():
    """S44 = 1/C44 for engineering shears; the tensor component S2323 is a quarter of it."""
    compliance = np.diag([1.0, 1.0, 1.0, 1 / 80.0, 1 / 80.0, 1 / 80.0])
    kelvin = notation.compliance_to_kelvin(compliance)
    assert kelvin[3, 3] == pytest.approx(2 * (1 / 80.0) / 4)


@given(seeds)
@few
def test_kelvin_rotation_is_orthogonal_composes_and_turns_as_the_tensor_does(seed):
    rng = np.random.default_rng(seed)
    first, second = random_rotation(rng), random_rotation(rng)
    turn = notation.kelvin_rotation(np.stack([first, second, second @ first]))
    np.testing.assert_allclose(turn[0] @ turn[0].T, np.eye(6), atol=1e-14)
    np.testing.assert_allclose(turn[1] @ turn[0], turn[2], atol=1e-14)
    stiffness = random_stiffness(rng)
    kelvin = turn[0] @ notation.stiffness_to_kelvin(stiffness) @ turn[0].T
    expected = rotated(stiffness, first)
    np.testing.assert_allclose(notation.kelvin_to_stiffness(kelvin), expected, atol=1e-11)


@given(seeds)
@few
def test_kelvin_rotation_turns_second_rank_tensors(seed):
    rng = np.random.default_rng(seed)
    rotation, form = random_rotation(rng), rng.normal(size=(3, 3))
    form = form + form.T
    turned = rotation @ form @ rotation.T
    first, second = zip(*notation.VOIGT_PAIRS, strict=True)
    vector, expected = (notation.KELVIN_WEIGHTS * x[first, second] for x in (form, turned))
    found = notation.kelvin_rotation(rotation) @ vector
    np.testing.assert_allclose(found, expected, atol=1e-13)


@pytest.mark.parametrize(
    ("text", "order"),
    [
        ("11 22 33 23 13 12", (0, 1, 2, 3, 4, 5)),
        ("11 22 33 12 13 23", (0, 1, 2, 5, 4, 3)),
        ("11, 22, 33, 12, 23, 31", (0, 1, 2, 5, 3, 4)),
        ("xx yy zz xy yz xz", (0, 1, 2, 5, 3, 4)),
        (" 33 11\t22;21 13 32 ", (2, 0, 1, 5, 4, 3)),
    ],
)
def test_parse_rows(text, order):
    assert notation.parse_rows(text) == order
    assert notation.parse_rows(notation.rows_text(order)) == order


@pytest.mark.parametrize("text", ["", "11 22 33", "11 22 33 23 13 13", "11 22 33 23 13 21 12"])
def test_parse_rows_refuses_missing_and_repeated_pairs(text):
    with pytest.raises(InputError, match="each of 11, 22, 33, 23, 13 and 12 once"):
        notation.parse_rows(text)


def test_parse_rows_names_the_word_it_cannot_read():
    with pytest.raises(InputError, match="'14' is not a pair of axes"):
        notation.parse_rows("11 22 33 14 13 12")


@given(seeds, st.permutations(range(6)))
@few
def test_reorder_lists_cells_by_name_and_is_undone(seed, order):
    matrix = symmetric(np.random.default_rng(seed))
    listed = notation.reorder(matrix, tuple(order))
    for row, column in itertools.product(range(6), repeat=2):
        assert listed[row, column] == matrix[order[row], order[column]]
    np.testing.assert_array_equal(notation.restore_order(listed, tuple(order)), matrix)


def test_units():
    """1 GPa = 10 kbar = 0.01 Mbar = 1e9 Pa = 1000 MPa = 1e10 dyn/cm² (definitions)."""
    same = {"GPa": 1, "kbar": 10, "Mbar": 0.01, "Pa": 1e9, "MPa": 1000, "dyn/cm²": 1e10}
    assert set(same) == set(notation.UNITS)
    for unit, value in same.items():
        assert notation.to_gpa(value, unit) == pytest.approx(1.0, rel=1e-15)
    assert notation.to_gpa(2e11, "dyn/cm2") == pytest.approx(20.0)
    np.testing.assert_allclose(notation.to_gpa(np.array([10.0, 20.0]), "kbar"), [1.0, 2.0])


def test_unknown_unit_names_the_nearest():
    with pytest.raises(InputError, match="Did you mean GPa"):
        notation.to_gpa(1.0, "GPA")


@given(seeds)
@few
def test_upper_triangle_runs_by_rows_and_round_trips(seed):
    matrix = symmetric(np.random.default_rng(seed))
    constants = notation.upper_triangle(matrix)
    expected = [matrix[i, j] for i in range(6) for j in range(i, 6)]
    np.testing.assert_array_equal(constants, expected)
    np.testing.assert_array_equal(notation.from_upper_triangle(constants), matrix)
    batch = np.stack([matrix, 2 * matrix])
    stacked = notation.from_upper_triangle(notation.upper_triangle(batch))
    np.testing.assert_array_equal(stacked, batch)


def test_constant_name_is_of_the_upper_triangle():
    assert notation.constant_name(0, 3) == "C14"
    assert notation.constant_name(3, 0) == "C14"
