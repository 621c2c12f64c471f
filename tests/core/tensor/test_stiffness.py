"""The stiffness value: what it accepts, its other forms, and its turning."""

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.errors import InputError
from core.tensor.stiffness import Stiffness
from tests.materials import (
    cubic,
    hexagonal,
    random_physical,
    random_rotation,
    random_stiffness,
    rotated,
    trigonal,
)

seeds = st.integers(0, 2**32 - 1)
few = settings(max_examples=20, deadline=None)


@given(seeds)
@few
def test_stiffness_times_compliance_is_one(seed):
    stiffness = Stiffness.from_voigt(random_stiffness(np.random.default_rng(seed)))
    np.testing.assert_allclose(stiffness.voigt @ stiffness.compliance, np.eye(6), atol=1e-10)
    again = Stiffness.from_compliance(stiffness.compliance)
    np.testing.assert_allclose(again.voigt, stiffness.voigt, rtol=1e-10, atol=1e-10)
    again = Stiffness.from_kelvin(stiffness.kelvin)
    np.testing.assert_allclose(again.voigt, stiffness.voigt, rtol=1e-14)


@given(seeds)
@few
def test_rotate_is_the_fourth_rank_sum(seed):
    rng = np.random.default_rng(seed)
    table, rotation = random_physical(rng), random_rotation(rng)
    turned = Stiffness.from_voigt(table).rotate(rotation)
    np.testing.assert_allclose(turned.voigt, rotated(table, rotation), rtol=0, atol=1e-11)


@given(seeds)
@few
def test_rotations_compose_and_leave_the_eigenstiffnesses(seed):
    rng = np.random.default_rng(seed)
    first, second = random_rotation(rng), random_rotation(rng)
    crystal = Stiffness.from_voigt(random_stiffness(rng))
    twice = crystal.rotate(first).rotate(second)
    np.testing.assert_allclose(twice.voigt, crystal.rotate(second @ first).voigt, atol=1e-10)
    np.testing.assert_allclose(twice.eigenstiffness, crystal.eigenstiffness, rtol=1e-11)


def test_a_reflection_changes_nothing_in_a_centre_of_symmetry():
    table = random_stiffness(np.random.default_rng(5))
    turned = Stiffness.from_voigt(table).rotate(-np.eye(3))
    np.testing.assert_allclose(turned.voigt, table, rtol=1e-14)


def test_rotate_refuses_what_is_no_rotation():
    crystal = Stiffness.from_voigt(cubic(166, 64, 80))
    with pytest.raises(ValueError, match="right angles"):
        crystal.rotate(np.diag([1.0, 1.0, 1.001]))


def test_tensor_has_the_symmetries_of_an_elastic_tensor():
    tensor = Stiffness.from_voigt(random_stiffness(np.random.default_rng(2))).tensor
    for axes in [(1, 0, 2, 3), (0, 1, 3, 2), (2, 3, 0, 1)]:
        np.testing.assert_array_equal(tensor, tensor.transpose(axes))


def test_the_value_is_frozen_and_keeps_its_own_copy():
    table = cubic(166, 64, 80)
    crystal = Stiffness.from_voigt(table)
    table[0, 0] = 1.0
    assert crystal.voigt[0, 0] == 166
    for array in (crystal.voigt, crystal.kelvin, crystal.tensor, crystal.compliance):
        with pytest.raises(ValueError, match="read-only"):
            array[0] = 0.0
    with pytest.raises(dataclasses.FrozenInstanceError):
        crystal.voigt = table
    assert crystal.compliance is crystal.compliance


def test_rounding_in_the_two_triangles_is_averaged_away():
    table = cubic(166, 64, 80)
    table[0, 1] += 1e-5
    crystal = Stiffness.from_voigt(table)
    assert crystal.voigt[0, 1] == crystal.voigt[1, 0] == pytest.approx(64 + 0.5e-5, abs=1e-12)


def test_two_unequal_cells_are_named_with_their_values():
    table = cubic(166, 64, 80)
    table[4, 1] = 3.5
    said = r"Row 2, column 5 holds 0 but row 5, column 2 holds 3\.5"
    with pytest.raises(InputError, match=said):
        Stiffness.from_voigt(table)
    with pytest.raises(InputError, match="Row 2, column 5"):
        Stiffness.from_kelvin(table)
    with pytest.raises(InputError, match="Row 2, column 5"):
        Stiffness.from_compliance(table)


def test_a_cell_that_is_not_finite_is_named():
    table = cubic(166, 64, 80)
    table[3, 2] = np.nan
    with pytest.raises(InputError, match="Row 4, column 3 is not a finite number"):
        Stiffness.from_voigt(table)


@pytest.mark.parametrize(
    ("shape", "said"), [((3, 3), "3 by 3"), ((6,), "is 6"), ((), "single number")]
)
def test_a_wrong_shape_is_refused(shape, said):
    with pytest.raises(InputError, match=said):
        Stiffness.from_voigt(np.ones(shape))


def test_a_singular_table_is_a_stiffness_without_compliance():
    crystal = Stiffness.from_voigt(cubic(100, 100, 50))
    assert not crystal.is_stable
    with pytest.raises(InputError, match="stiffness is singular"):
        _ = crystal.compliance
    with pytest.raises(InputError, match="compliance is singular"):
        Stiffness.from_compliance(cubic(1, 1, 1) / 100)
    with pytest.raises(InputError, match="singular"):
        _ = Stiffness.from_voigt(np.zeros((6, 6))).compliance


def test_an_unstable_table_still_has_its_inverse():
    crystal = Stiffness.from_voigt(cubic(50, 80, 40))
    assert not crystal.is_stable
    np.testing.assert_allclose(crystal.voigt @ crystal.compliance, np.eye(6), atol=1e-13)


def test_from_constants_fills_the_class():
    crystal = Stiffness.from_constants(
        "trigonal_6", {"11": 87, "12": 7, "13": 12, "14": -18, "33": 106, "44": 58}
    )
    np.testing.assert_array_equal(crystal.voigt, trigonal(87, 7, 12, -18, 106, 58))
    crystal = Stiffness.from_constants(
        "hexagonal", {"11": 60, "12": 26, "13": 22, "33": 62, "44": 16}
    )
    np.testing.assert_array_equal(crystal.voigt, hexagonal(60, 26, 22, 62, 16))


def test_from_constants_reads_the_unique_axis():
    names = ["11", "12", "13", "16", "22", "23", "26", "33", "36", "44", "45", "55", "66"]
    constants = dict(zip(names, range(100, 113), strict=True))
    crystal = Stiffness.from_constants("monoclinic", constants, unique_axis="z")
    assert crystal.voigt[5, 0] == constants["16"]
    assert crystal.voigt[3, 4] == constants["45"]
    assert np.count_nonzero(crystal.voigt) == 20


def test_from_constants_names_the_missing_and_the_surplus():
    with pytest.raises(InputError, match="missing C44; not independent C66") as caught:
        Stiffness.from_constants("cubic", {"11": 1, "12": 0, "66": 1})
    assert "C11, C12, C44" in caught.value.hint
