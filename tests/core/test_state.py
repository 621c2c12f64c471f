"""The state is one value: frozen, hashable, equal when its parts are equal."""

import dataclasses
import json

import numpy as np
import pytest

from core.crystal.cell import UnitCell
from core.errors import InputError
from core.state import (
    BenchState,
    Display,
    OrientationChoice,
    Specimen,
    as_matrix,
    as_vector,
    claimed_class,
    rotation_of,
    stiffness_of,
    to_plain,
)
from tests.materials import cubic

ROCK = Specimen("invented", as_matrix(cubic(131.0, 97.4, 86.2)), crystal_class="cubic")


def test_equal_parts_make_equal_states_with_equal_hashes():
    first = BenchState(ROCK, orientation_a=OrientationChoice("axis [1 1 1] 15"))
    again = BenchState(
        Specimen("invented", as_matrix(cubic(131.0, 97.4, 86.2)), crystal_class="cubic"),
        orientation_a=OrientationChoice("axis [1 1 1] 15"),
    )
    assert first == again
    assert hash(first) == hash(again)
    assert first != dataclasses.replace(first, pin=(1.0, 0.0, 0.0))
    assert len({first, again, dataclasses.replace(again, quantity="phase")}) == 2


@pytest.mark.parametrize("value", [BenchState(ROCK), ROCK, Display(), OrientationChoice()])
def test_nothing_of_a_state_can_be_set(value):
    for field in dataclasses.fields(value):
        with pytest.raises(dataclasses.FrozenInstanceError):
            setattr(value, field.name, getattr(value, field.name))


def test_a_state_holds_no_arrays():
    assert isinstance(ROCK.stiffness, tuple)
    assert all(type(x) is float for row in ROCK.stiffness for x in row)
    assert as_vector(np.array([0.0, 3.0, -4.0])) == (0.0, 3.0, -4.0)
    assert as_matrix(np.eye(2)) == ((1.0, 0.0), (0.0, 1.0))
    with pytest.raises(ValueError, match="unpack"):
        as_vector(np.zeros(4))


def test_b_shows_the_crystal_of_a_until_it_has_its_own():
    state = BenchState(ROCK, orientation_b=OrientationChoice("bunge 1 2 3"))
    assert state.specimen_of("A") is ROCK
    assert state.specimen_of("B") is ROCK
    other = dataclasses.replace(ROCK, name="another")
    both = dataclasses.replace(state, other=other)
    assert both.specimen_of("A") is ROCK
    assert both.specimen_of("B") is other
    assert both.orientation_of("A") == OrientationChoice()
    assert both.orientation_of("B").text == "bunge 1 2 3"


def test_a_state_is_plain_enough_for_json():
    cell = UnitCell(8.1, 12.8, 7.2, 94.0, 116.0, 88.0)
    state = BenchState(dataclasses.replace(ROCK, cell=cell), other=ROCK)
    plain = json.loads(json.dumps(to_plain(state), allow_nan=False))
    assert plain["specimen"]["cell"]["alpha"] == 94.0
    assert plain["specimen"]["stiffness"][0][:2] == [131.0, 97.4]
    assert plain["display"]["sheets"] == [True, True, True]
    assert plain["other"]["cell"] is None


def test_a_specimen_means_a_class_a_stiffness_and_a_frame():
    assert claimed_class(ROCK).key == "cubic"
    assert stiffness_of(ROCK).voigt[3, 3] == 86.2
    assert ROCK.frame.class_key == "cubic"
    table = as_matrix(np.diag([9.0, 8.0, 7.0, 3.0, 2.0, 1.0]))
    low = Specimen("m", table, crystal_class="monoclinic", unique_axis="z")
    assert claimed_class(low).unique_axis == "z"


def test_the_turn_of_an_orientation_follows_its_text():
    # Part Z along the crystal's x, part X along its y; then 90° about the part's own Z takes
    # part X to where part Y was: the crystal's z.
    choice = OrientationChoice("Z=[1 0 0] X=[0 1 0]", (0.0, 0.0, 90.0))
    expected = [[0, 0, 1], [0, -1, 0], [1, 0, 0]]
    np.testing.assert_allclose(rotation_of(choice, ROCK), expected, atol=1e-15)


def test_an_orientation_that_needs_a_cell_asks_for_it():
    bare = Specimen("t", as_matrix(np.eye(6)))
    with pytest.raises(InputError, match="unit cell"):
        rotation_of(OrientationChoice("Z=[1 0 0] X=[0 1 0]"), bare)
