"""Measured speeds in a bench file: they come back as typed, or are refused in words."""

import json

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.crystal.cell import UnitCell
from core.errors import InputError
from core.files.bench import bench_from_dict, bench_to_dict, read_bench, write_bench
from core.files.specimen import json_text, parse_json
from core.state import SPEED_COLUMNS, BenchState, Display, MeasuredSpeeds, Specimen, as_matrix
from tests.materials import cubic

CUBE = Specimen("cube", as_matrix(cubic(131.0, 97.4, 86.2)), 8120.0, "cubic")
ROW = ("[1 1 0]", "2", "shear", "", "3200", "bad σ", "", "", "", "", "", "")
READINGS = MeasuredSpeeds(
    (ROW, ("",) * len(SPEED_COLUMNS), ROW), "8120 ± 4", "monoclinic", "z",
    UnitCell(5.0, 6.0, 7.0, 90.0, 90.0, 100.0), "z||c, y||b*", "both", "0.2", True,
    "functional", ("run 6, second blank",),
)  # fmt: skip


def test_a_bench_with_readings_comes_back_from_its_file(tmp_path):
    display = Display(page="speeds", speeds_plot="spectrum", speeds_plane=(0.6, 0.0, 0.8))
    state = BenchState(CUBE, readings=READINGS, display=display)
    path = tmp_path / "b.tricline"
    write_bench(path, state)
    assert read_bench(path) == state
    data = json.loads(path.read_text(encoding="utf-8"))["readings"]
    assert data["columns"] == ["direction", "sheet", "polarisation", "speed_m_s", "sigma_m_s"]
    assert data["rows"][0] == ["[1 1 0]", "2", "shear", "3200", "bad σ"]


def test_a_file_of_before_there_were_readings_has_none():
    data = bench_to_dict(BenchState(CUBE))
    del data["readings"], data["display"]["page"], data["display"]["speeds_plot"]
    assert bench_from_dict(data, "b") == BenchState(CUBE)


def refusal(readings, **display):
    data = json.loads(json.dumps(bench_to_dict(BenchState(CUBE, readings=READINGS))))
    if isinstance(readings, dict):
        data["readings"].update(readings)
    else:
        data["readings"] = readings
    data["display"].update(display)
    with pytest.raises(InputError) as caught:
        bench_from_dict(data, "b.tricline")
    return str(caught.value)


@pytest.mark.parametrize(
    ("readings", "words"),
    [
        ([1], "readings: An object of measured speeds"),
        ({"columns": ["speed"]}, "“columns” is not a list of columns"),
        ({"columns": "speed"}, "“columns” is not a list of columns"),
        ({"rows": [["1"]]}, "Row 1 should hold 5 texts"),
        ({"rows": [[1, 2, 3, 4, 5]]}, "Row 1 should hold 5 texts"),
        ({"rows": {}}, "“rows” should be a list"),
        ({"rows": [["", "", "", "", ""]] * 10_001}, "at most 10,000 rows"),
        ({"density": 5}, "“density” should be a text"),
        ({"crystal_class": "quartz"}, "is not a crystal class"),
        ({"unique_axis": "w"}, "“unique_axis” cannot be 'w'. It is one of x, y, z"),
        ({"entered": ["speed"]}, "“entered” cannot be"),
        ({"robust": 1}, "“robust” should be true or false"),
        ({"cell": {"a": 1}}, "A cell has a, b, c"),
        ({"comments": "x"}, "“comments” should be a list"),
    ],
)
def test_a_value_that_cannot_be_used_is_named(readings, words):
    assert words in refusal(readings)


@pytest.mark.parametrize(
    ("display", "words"),
    [({"page": "desk"}, "“page” cannot be 'desk'. It is one of bench, speeds"),
     ({"speeds_plot": "pie"}, "“speeds_plot” cannot be 'pie'"),
     ({"speeds_plane": [0, 0, 0]}, "length zero")],
)  # fmt: skip
def test_a_display_choice_that_cannot_be_used_is_named(display, words):
    assert words in refusal({}, **display)


TEXT = st.text(st.characters(exclude_categories=["Cs"]), max_size=8)
TABLES = st.builds(
    MeasuredSpeeds,
    rows=st.lists(st.tuples(*[TEXT] * len(SPEED_COLUMNS)), max_size=4).map(tuple),
    density=TEXT,
    crystal_class=st.sampled_from(["cubic", "triclinic", "monoclinic"]),
    unique_axis=st.sampled_from("xyz"),
    entered=st.sampled_from(["speed", "flight", "both"]),
    direction_sigma=TEXT,
    robust=st.booleans(),
    criterion=st.sampled_from(["determinant", "largest", "functional"]),
    comments=st.lists(TEXT, max_size=2).map(tuple),
    name=TEXT,
)


@settings(deadline=None, max_examples=50)
@given(TABLES)
def test_whatever_was_typed_is_read_back(readings):
    state = BenchState(CUBE, readings=readings)
    assert bench_from_dict(parse_json(json_text(bench_to_dict(state)), "x"), "x") == state


def test_a_state_with_readings_is_hashable():
    assert len({BenchState(CUBE, readings=READINGS), BenchState(CUBE)}) == 2
    assert np.ndim(READINGS.rows) == 2
