"""Bench files: a bench reopens to the very same state, or is refused in words."""

import dataclasses
import json

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.directional.quantities import QUANTITIES
from core.errors import InputError
from core.files.bench import bench_from_dict, bench_to_dict, read_bench, write_bench
from core.files.specimen import json_text, parse_json
from core.state import BenchState, Display, OrientationChoice, Specimen, as_matrix
from tests.materials import cubic, random_stiffness

CUBE = Specimen("cube", as_matrix(cubic(131.0, 97.4, 86.2)), density=8120.0,
                crystal_class="cubic", unknown='{"mine": [1]}')  # fmt: skip
ROCK = Specimen("rock", as_matrix(random_stiffness(np.random.default_rng(1))))


def plain(state=None):
    return json.loads(json.dumps(bench_to_dict(state or BenchState(CUBE))))


def refusal(**changes):
    with pytest.raises(InputError) as caught:
        bench_from_dict(plain() | changes, "b.tricline")
    assert str(caught.value).startswith("b.tricline")
    return str(caught.value)


def test_a_bench_comes_back_from_its_file(tmp_path):
    state = BenchState(
        CUBE,
        other=ROCK,
        orientation_a=OrientationChoice("Z=[1 1 1] X=[1 -1 0]", (0.5, 0.0, -1.25)),
        orientation_b=OrientationChoice("bunge 10 20 30"),
        pin=(0.6, 0.0, 0.8),
        section=(0.0, 0.0, 1.0),
        quantity="phase",
        cutting_error_deg=1.5,
        display=Display(layout="B", sheets=(True, False, True), colour_by="focusing",
                        sweep_about=(1.0, 0.0, 0.0), hemisphere="cost", hemisphere_sheet=2,
                        source_time_us=2.5),
        unknown='{"later": {"key": 1}}',
    )  # fmt: skip
    path = tmp_path / "b.tricline"
    write_bench(path, state)
    assert read_bench(path) == state
    data = json.loads(path.read_text(encoding="utf-8"))
    assert data["format"] == "tricline-bench"
    assert data["later"] == {"key": 1}
    assert data["specimen"]["mine"] == [1]


def test_what_is_left_out_takes_its_default():
    data = {key: plain()[key] for key in ("format", "version", "specimen")}
    assert bench_from_dict(data, "b") == BenchState(CUBE)
    nothing = plain() | {"other": None, "display": None, "pin": None}
    assert bench_from_dict(nothing, "b") == BenchState(CUBE)


def test_a_direction_is_made_one_long():
    found = bench_from_dict(plain() | {"pin": [3, 0, 4], "section": [0, -2e-3, 0]}, "b")
    assert found.pin == (0.6000000000000001, 0.0, 0.8) or found.pin == (0.6, 0.0, 0.8)
    assert found.section == (0.0, -1.0, 0.0)


def test_display_choices_of_a_later_version_are_left_alone():
    data = plain()
    data["display"]["fog"] = True
    assert bench_from_dict(data, "b").display == Display()


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"format": "tricline-specimen"}, "not a tricline-bench file"),
        ({"version": 2}, "format version 2"),
        ({"specimen": None}, "“specimen” is missing"),
        ({"specimen": 5}, "specimen: A specimen was expected"),
        ({"specimen": {"format": "tricline-specimen", "version": 1}}, "“name” is missing"),
        ({"other": "rock"}, "other: A specimen was expected"),
        ({"orientation_a": "identity"}, "orientation_a: An object with “text” and “turn”"),
        ({"orientation_a": {"text": 5}}, "orientation_a: An object with “text” and “turn”"),
        ({"orientation_a": {"text": "up"}}, "orientation_a: 'up' is not an orientation"),
        ({"orientation_b": {"text": "axis [1 1 -2 0] 5"}}, "orientation_b: "),
        ({"orientation_a": {"turn": [0, 0]}}, "Three numbers were expected"),
        ({"orientation_a": {"turn": [0, 0, True]}}, "A number was expected, not true"),
        ({"pin": [0, 0, 0]}, "pin: A direction of length zero"),
        ({"pin": [0, 0]}, "pin: Three numbers were expected"),
        ({"pin": [0, 0, "1"]}, "pin: A number was expected"),
        ({"section": {"x": 1}}, "section: Three numbers were expected"),
        ({"quantity": "youngs"}, "quantity: 'youngs' is not a quantity. Did you mean 'young'"),
        ({"quantity": 3}, "quantity: The name of a quantity was expected"),
        ({"cutting_error_deg": 0}, "cutting_error_deg: An angle above 0°"),
        ({"cutting_error_deg": 31}, "up to 30°"),
        ({"cutting_error_deg": True}, "A number was expected"),
        ({"display": []}, "display: An object of display choices"),
        ({"display": {"layout": "C"}}, "“layout” cannot be 'C'. It is one of A, AB, B"),
        ({"display": {"layout": 1}}, "“layout” cannot be 1"),
        ({"display": {"cut_away": 1}}, "“cut_away” cannot be 1"),
        ({"display": {"sheets": [True, 1, True]}}, "“sheets” should be three of true or false"),
        ({"display": {"hemisphere_sheet": True}}, "“hemisphere_sheet” cannot be True"),
        ({"display": {"hemisphere_sheet": 3}}, "It is one of 0, 1, 2"),
        ({"display": {"colour_by": "young"}}, "it has not three sheets"),
        ({"display": {"colour_by": "hue"}}, "'hue' is not a quantity"),
        ({"display": {"sweep_about": [0, 0, 0]}}, "length zero"),
        ({"display": {"source_time_us": 0}}, "A time from 0.01 to 10,000 µs was expected"),
        ({"display": {"source_time_us": "1"}}, "A number was expected"),
    ],
)  # fmt: skip
def test_a_value_that_cannot_be_used_is_named(changes, words):
    assert words in refusal(**changes)


def test_numbers_that_no_file_can_keep_are_refused():
    text = json.dumps(plain() | {"pin": [0, 0, 987654.0]})
    for literal in ("NaN", "Infinity", "1e400"):
        with pytest.raises(InputError, match="pin: A finite number was expected"):
            bench_from_dict(parse_json(text.replace("987654.0", literal), "b"), "b")


def test_an_orientation_must_suit_the_crystal_that_it_turns():
    state = BenchState(CUBE, other=ROCK, orientation_b=OrientationChoice("Z=[0 0 1] X=[1 0 0]"))
    data = plain(state)  # the rock has no cell
    with pytest.raises(InputError, match=r"^b, orientation_b: Indices need the unit cell"):
        bench_from_dict(data, "b")


UNIT = st.tuples(*[st.floats(-1, 1)] * 3).filter(lambda v: np.linalg.norm(v) > 0.1).map(
    lambda v: tuple((np.array(v) / np.linalg.norm(v)).tolist()))  # fmt: skip
ORIENTATION = st.builds(
    OrientationChoice,
    st.sampled_from(["identity", "bunge 1 2 3", "(YXl) 35.25", "axis 1,1,1 15"]),
    st.tuples(*[st.floats(-180, 180)] * 3),
)
DISPLAY = st.builds(
    Display,
    layout=st.sampled_from(["A", "AB", "B"]),
    sheets=st.tuples(*[st.booleans()] * 3),
    colour_by=st.sampled_from(["value", "longitudinality", "power_flow"]),
    cut_away=st.booleans(),
    deck=st.sampled_from(["hemisphere", "sweep", "source"]),
    projection=st.sampled_from(["equal_area", "stereographic"]),
    sweep_about=st.none() | UNIT,
    face=st.sampled_from(["stiffness", "compliance", "uncertainty"]),
    hemisphere_sheet=st.integers(0, 2),
    source_time_us=st.floats(0.01, 1e4),
)
STATES = st.builds(
    BenchState,
    specimen=st.sampled_from([CUBE, ROCK]),
    other=st.sampled_from([None, ROCK, dataclasses.replace(CUBE, density=None)]),
    orientation_a=ORIENTATION,
    orientation_b=ORIENTATION,
    pin=UNIT,
    section=UNIT,
    quantity=st.sampled_from(sorted(QUANTITIES)),
    cutting_error_deg=st.floats(1e-3, 30),
    display=DISPLAY,
)


@settings(deadline=None, max_examples=60)
@given(STATES)
def test_what_is_written_is_read_back_as_the_same_value(state):
    assert bench_from_dict(parse_json(json_text(bench_to_dict(state)), "x"), "x") == state
