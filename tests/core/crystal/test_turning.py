"""Rotation matrices from angles and back, against scipy."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from core.crystal.turning import (
    axis_and_angle,
    axis_turn,
    cosine_sine,
    nearest_rotation,
    triad,
    turn_angles,
    turns_about,
)

SEQUENCES = [s for s in itertools.product(range(3), repeat=3) if s[0] != s[1] != s[2]]
angles = st.one_of(
    st.floats(-360, 360),
    st.sampled_from([0.0, 90.0, -90.0, 180.0, -180.0, 1e-9, 180 - 1e-9, 90 + 1e-11]),
)
triples = st.tuples(angles, angles, angles)


@pytest.mark.parametrize("axes", SEQUENCES, ids=lambda s: "".join("XYZ"[k] for k in s))
@given(degrees=triples)
@settings(deadline=None, max_examples=25)
def test_turns_agree_with_scipy_and_are_read_back(axes, degrees):
    R = turns_about(axes, degrees)
    letters = "".join("XYZ"[axis] for axis in axes)
    expected = Rotation.from_euler(letters, degrees, degrees=True).as_matrix()
    np.testing.assert_allclose(R, expected, rtol=0, atol=5e-15)
    again = turns_about(axes, turn_angles(R, axes))
    np.testing.assert_allclose(again, R, rtol=0, atol=5e-15)


@given(vector=st.tuples(*[st.floats(-1, 1)] * 3).filter(lambda v: np.linalg.norm(v) > 1e-3),
       degrees=angles)  # fmt: skip
@settings(deadline=None, max_examples=80)
def test_axis_turn_agrees_with_scipy_and_is_read_back(vector, degrees):
    axis = np.array(vector) / np.linalg.norm(vector)
    R = axis_turn(axis, degrees)
    expected = Rotation.from_rotvec(axis * degrees, degrees=True).as_matrix()
    np.testing.assert_allclose(R, expected, rtol=0, atol=5e-15)
    found_axis, found_angle = axis_and_angle(R)
    assert 0 <= found_angle <= 180
    np.testing.assert_allclose(axis_turn(found_axis, found_angle), R, rtol=0, atol=5e-15)


def test_quarter_turns_are_exact():
    assert [cosine_sine(k * 90) for k in range(-4, 5)] == [
        (1, 0), (0, 1), (-1, 0), (0, -1), (1, 0), (0, 1), (-1, 0), (0, -1), (1, 0)
    ]  # fmt: skip
    assert cosine_sine(3.6e20 + 0.0) == (1, 0)
    for degrees in (-721.3, 33.3, 134.9, 1e4):
        radians = math.radians(degrees)
        expected = (math.cos(radians), math.sin(radians))
        assert cosine_sine(degrees) == pytest.approx(expected, abs=1e-12)


def test_no_turn_and_half_turns_have_one_axis():
    assert axis_and_angle(np.eye(3))[1] == 0
    np.testing.assert_array_equal(axis_and_angle(np.eye(3))[0], [0, 0, 1])
    for axis in ([1, 0, 0], [0, 1, 0], [0, 0, 1], [0, 0.6, -0.8]):
        for sign in (1, -1):
            found, degrees = axis_and_angle(axis_turn(sign * np.array(axis, float), 180))
            assert degrees == pytest.approx(180, abs=1e-12)
            np.testing.assert_allclose(found, axis, atol=1e-15)


def test_nearest_rotation_undoes_a_small_stretch():
    """A stretch V R has polar rotation R: known exactly when V is symmetric."""
    R = Rotation.random(random_state=3).as_matrix()
    stretch = np.array([[1.02, 0.01, 0.0], [0.01, 0.97, -0.03], [0.0, -0.03, 1.01]])
    found, is_right_handed = nearest_rotation(stretch @ R)
    np.testing.assert_allclose(found, R, atol=1e-14)
    assert is_right_handed
    found, is_right_handed = nearest_rotation(-stretch @ R)
    assert np.linalg.det(found) == pytest.approx(1)
    assert not is_right_handed


@pytest.mark.parametrize(("first", "second"), list(itertools.permutations(range(3), 2)))
def test_triad_keeps_the_first_exactly_and_the_second_near(first, second):
    along = np.array([0.6, 0.0, 0.8])
    near = np.array([0.0, 0.28, 0.96])
    rows = triad(first, along, second, near)
    np.testing.assert_array_equal(rows[first], along)
    np.testing.assert_allclose(rows @ rows.T, np.eye(3), atol=1e-15)
    assert np.linalg.det(rows) == pytest.approx(1)
    across = near - (near @ along) * along
    np.testing.assert_allclose(rows[second], across / np.linalg.norm(across), atol=1e-15)
