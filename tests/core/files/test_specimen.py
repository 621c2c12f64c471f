"""Specimen files: every fault is named in words, and nothing that was in a file is lost."""

import dataclasses
import json
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.crystal.cell import AXES_CONVENTIONS, UnitCell
from core.errors import InputError
from core.files.specimen import (
    json_text,
    parse_json,
    read_specimen,
    specimen_from_dict,
    specimen_to_dict,
    write_specimen,
)
from core.state import Specimen, as_matrix
from core.tensor.symmetry import CLASS_KEYS

TABLE = [[*row] for row in (np.eye(6) * 50 + 10).tolist()]
CELL = {"a": 8.14, "b": 12.79, "c": 7.16, "alpha": 94.3, "beta": 116.6, "gamma": 87.7}


def minimal(**others):
    return {
        "format": "tricline-specimen",
        "version": 1,
        "name": "LM-0",
        "stiffness_gpa": [row[:] for row in TABLE],
    } | others


def changed(row, column, value, key="stiffness_gpa"):
    table = [row[:] for row in TABLE]
    table[row][column] = value
    return minimal(**{key: table})


def refusal(data):
    """Return the sentence with which a file that holds this JSON value is refused."""
    text = data if isinstance(data, str) else json.dumps(data)
    with pytest.raises(InputError) as caught:
        specimen_from_dict(parse_json(text, "a.json"), "a.json")
    assert str(caught.value).startswith("a.json: ")
    return str(caught.value)


def read(data):
    return specimen_from_dict(parse_json(json.dumps(data), "a.json"), "a.json")


# --- what is read ---------------------------------------------------------------------------


def test_the_least_that_a_file_needs():
    found = read(minimal())
    assert found == Specimen("LM-0", as_matrix(TABLE))
    assert (found.density, found.cell, found.crystal_class) == (None, None, "triclinic")


def test_everything_that_a_file_may_hold():
    found = read(
        minimal(
            source="run 3",
            notes="two\nlines",
            density_kg_m3=2684,
            stiffness_std_gpa=np.full((6, 6), 0.5).tolist(),
            stiffness_covariance_gpa2=np.eye(21).tolist(),
            crystal_class="Monoclinic",
            unique_axis="z",
            cell=CELL,
            crystal_axes="z ∥ c ,  y∥b*",
            temperature_c=-40,
        )
    )
    assert found.density == 2684.0
    assert found.stiffness_std[0][1] == 0.5
    assert found.covariance[20][20] == 1.0
    assert (found.crystal_class, found.unique_axis) == ("monoclinic", "z")
    assert found.cell == UnitCell(**CELL)
    assert found.crystal_axes == "z||c, y||b*"  # in the one spelling that files keep
    assert found.temperature_c == -40.0


def test_null_stands_for_not_known():
    found = read(minimal(density_kg_m3=None, cell=None, notes=None, my_key=None))
    assert (found.density, found.cell, found.notes) == (None, None, "")
    assert json.loads(found.unknown) == {"my_key": None}


def test_rounding_between_the_triangles_is_averaged():
    found = read(changed(0, 1, 10.000004))
    assert found.stiffness[0][1] == found.stiffness[1][0] == pytest.approx(10.000002)


# --- what is refused ------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("{", "Line 1, column 2: this is not JSON"),
        (
            '{"format": "tricline-specimen",\n "version": }',
            "Line 2, column 13: this is not JSON",
        ),
        ("[1, 2]", "A JSON object"),
        ("3", "A JSON object"),
        ("null", "A JSON object"),
        ("[" * 100_000, "nested too deeply"),
        ('{"a": ' + "1" * 5000 + "}", "not usable JSON"),
    ],
)
def test_a_text_that_is_no_json_object(text, words):
    assert words in refusal(text)


@pytest.mark.parametrize(
    ("data", "words"),
    [
        ({}, "This is not a tricline-specimen file: it has no “format”"),
        (minimal(format="other"), 'its “format” is "other"'),
        (minimal(format=["x"] * 100), 'its “format” is ["x'),
        (minimal(version=2), "format version 2; this Tricline reads up to 1"),
        (minimal(version=10**30), "A later Tricline"),
        (minimal(version=0), "whole number"),
        (minimal(version=True), "whole number"),
        (minimal(version="1"), "whole number"),
        (minimal(version=1.5), "whole number"),
    ],
)
def test_another_format_or_a_later_version(data, words):
    assert words in refusal(data)


@pytest.mark.parametrize(
    ("others", "words"),
    [
        ({"name": 5}, "“name”: Text was expected, not 5."),
        ({"name": "  "}, "“name”: A specimen wants a name."),
        ({"notes": ["x"]}, "“notes”: Text was expected"),
        ({"density_kg_m3": 0}, "“density_kg_m3”: A density is above zero"),
        ({"density_kg_m3": -2684}, "“density_kg_m3”: A density is above zero, not -2684"),
        ({"density_kg_m3": "2684"}, "“density_kg_m3”: A number was expected, not \"2684\""),
        ({"density_kg_m3": True}, "“density_kg_m3”: A number was expected, not true"),
        ({"density_kg_m3": 1e15}, "No solid has 1e+15 kg/m³"),
        ({"density_kg_m3": 1e-15}, "No solid has 1e-15 kg/m³"),
        ({"temperature_c": -300}, "“temperature_c”: A temperature of -300 °C"),
        ({"temperature_c": False}, "“temperature_c”: A number was expected"),
        ({"crystal_class": "trigonal6"}, "Did you mean trigonal_6"),
        ({"crystal_class": 6}, "“crystal_class”: Text was expected"),
        ({"unique_axis": "w"}, "“unique_axis”: 'w' is not an axis"),
        ({"crystal_axes": "as usual"}, "“crystal_axes”: 'as usual' does not say"),
        ({"crystal_axes": "z||c, y||[0 0 2]", "cell": CELL}, "two parallel directions"),
        ({"cell": [8, 12, 7]}, "“cell”: An object with a, b, c, alpha, beta, gamma"),
        ({"cell": {"a": 1, "b": 1, "c": 1}}, "“cell”: alpha, beta, gamma are missing"),
        ({"cell": CELL | {"alpha": 20}}, "“cell”: The angle β"),
        ({"cell": CELL | {"c": -7}}, "“cell”: The length c = -7 Å must be greater than zero"),
        ({"cell": CELL | {"c": "7"}}, "“cell”: c: A number was expected"),
        ({"cell": CELL | {"c": True}}, "“cell”: c: A number was expected, not true"),
        ({"stiffness_gpa": 5}, "“stiffness_gpa”: 6 rows of 6 numbers were expected"),
        ({"stiffness_gpa": TABLE[:5]}, "were expected, not 5 rows of 6"),
        ({"stiffness_gpa": [row[:5] for row in TABLE]}, "not 6 rows of 5"),
        ({"stiffness_gpa": [*TABLE[:5], [1]]}, "not 6 rows of 1 or 6"),
        ({"stiffness_gpa": []}, "not 0 rows of nothing"),
        ({"stiffness_gpa": [[]] * 6}, "not 6 rows of 0"),
        ({"stiffness_gpa": (np.array(TABLE) * 1e9).tolist()}, "Are the numbers in Pa?"),
        ({"stiffness_gpa": (np.array(TABLE) * 1e-12).tolist()}, "Are the numbers compliances?"),
        ({"stiffness_std_gpa": TABLE[:1]}, "“stiffness_std_gpa”: 6 rows"),
        (
            {"stiffness_covariance_gpa2": TABLE},
            "21 rows of 21 numbers were expected, not 6 rows",
        ),
        ({"stiffness_covariance_gpa2": (-np.eye(21)).tolist()}, "negative variance"),
    ],
)
def test_a_value_that_cannot_be_used_is_named(others, words):
    assert words in refusal(minimal(**others))


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (changed(2, 4, "5.1"), "“stiffness_gpa”: row 3, column 5: A number was expected, not"),
        (changed(2, 4, True), "row 3, column 5: A number was expected, not true"),
        (changed(2, 4, None), "row 3, column 5: A number was expected, not nothing (null)"),
        (changed(2, 4, [1]), "row 3, column 5: A number was expected, not [1]"),
        (changed(1, 4, 12.0), "Row 2, column 5 holds 12 but row 5, column 2 holds 10"),
        (changed(1, 1, -0.1, "stiffness_std_gpa"), "row 2, column 2 holds -0.1"),
        (changed(0, 1, 3, "stiffness_std_gpa"), "“stiffness_std_gpa”: Row 1, column 2 holds 3"),
    ],
)  # fmt: skip
def test_a_cell_that_cannot_be_used_is_named(data, words):
    assert words in refusal(data)


@pytest.mark.parametrize("literal", ["NaN", "Infinity", "-Infinity", "1e400", "9" * 400])
def test_numbers_that_are_none_are_refused_with_row_and_column(literal):
    text = json.dumps(changed(3, 3, 987654.0)).replace("987654.0", literal)
    assert "“stiffness_gpa”: row 4, column 4: A finite number was expected" in refusal(text)
    text = json.dumps(minimal(density_kg_m3=987654.0)).replace("987654.0", literal)
    assert "“density_kg_m3”: A finite number was expected" in refusal(text)


@pytest.mark.parametrize("literal", ["NaN", "Infinity", "1e400"])
def test_numbers_that_no_file_can_keep_are_refused_in_unknown_keys_too(literal):
    text = json.dumps(minimal(mine={"deep": [987654.0]})).replace("987654.0", literal)
    assert "one of “mine” holds such a value" in refusal(text)


def test_all_faults_are_named_at_once():
    data = minimal(density_kg_m3=-1, crystal_class="cubik", cell={"a": 1})
    del data["name"], data["stiffness_gpa"]
    message = refusal(data)
    for words in ("“name” is missing", "“stiffness_gpa” is missing", "above zero", "'cubik'",
                  "Did you mean cubic", "b, c, alpha, beta, gamma are missing"):  # fmt: skip
        assert words in message


def test_a_key_that_is_given_twice():
    text = json.dumps(minimal())
    twice = text[:-1] + ', "stiffness_gpa": []}'
    assert "“stiffness_gpa” is given twice" in refusal(twice)
    # Keys that mean nothing here follow the usual rule of JSON: the last one stays.
    harmless = text[:-1] + ', "mine": 1, "mine": 2}'
    kept = specimen_from_dict(parse_json(harmless, "a.json"), "a.json")
    assert json.loads(kept.unknown) == {"mine": 2}


# --- what comes back ------------------------------------------------------------------------

UNUSUAL = {
    "mine": {"nested": [1, {"deep": None}], "flag": True},
    "": "an empty key",
    "Name": "differs from name by its capital",
    "key with “quotes” and \n lines": [1.5, "é"],
    "\ud800": "half a surrogate pair \udc00",
    "stiffness": [[1, 2], [3, 4]],
}


def test_unknown_keys_stay_through_reading_and_writing(tmp_path):
    path = tmp_path / "a.json"
    path.write_text(json.dumps(minimal(**UNUSUAL)), encoding="utf-8")
    found = read_specimen(path)
    write_specimen(path, dataclasses.replace(found, name="renamed"))
    data = json.loads(path.read_text(encoding="utf-8"))
    assert data == minimal(name="renamed", crystal_class="triclinic",
                           crystal_axes="z||c, y||b*", **UNUSUAL)  # fmt: skip
    assert read_specimen(path) == dataclasses.replace(found, name="renamed")


def test_a_file_is_laid_out_for_people(tmp_path):
    write_specimen(tmp_path / "a.json", read(minimal(cell=CELL, name="é")))
    lines = (tmp_path / "a.json").read_text(encoding="utf-8").splitlines()
    assert lines[0] == "{"
    assert lines[3] == '  "name": "é",'
    assert lines[5] == "    [60.0, 10.0, 10.0, 10.0, 10.0, 10.0],"
    assert '  "cell": {"a": 8.14, "b": 12.79' in "\n".join(lines)


def test_what_is_not_known_is_left_out():
    keys = set(specimen_to_dict(read(minimal())))
    assert keys == {
        "format",
        "version",
        "name",
        "stiffness_gpa",
        "crystal_class",
        "crystal_axes",
    }


def test_nan_is_never_written():
    with pytest.raises(ValueError, match="JSON"):
        json_text({"x": math.nan})


NUMBER = st.floats(-900, 900).map(lambda x: x if abs(x) > 1e-6 else 0.0)
TEXT = st.text(max_size=20)


def symmetric(size, numbers):
    cells = st.lists(numbers, min_size=size * (size + 1) // 2, max_size=size * (size + 1) // 2)

    def square(values):
        table = np.zeros((size, size))
        table[np.triu_indices(size)] = values
        return as_matrix(table + np.triu(table, 1).T)

    return cells.map(square)


SPECIMENS = st.builds(
    Specimen,
    name=st.text(min_size=1, max_size=20).filter(str.strip),
    stiffness=symmetric(6, NUMBER),
    density=st.none() | st.floats(1e-3, 2e4),
    crystal_class=st.sampled_from(CLASS_KEYS),
    unique_axis=st.sampled_from("xyz"),
    cell=st.none() | st.builds(UnitCell, *[st.floats(1, 50)] * 3, *[st.floats(80, 110)] * 3),
    crystal_axes=st.sampled_from([*AXES_CONVENTIONS, "z||[0 0 1], y||(0 1 0)"]),
    temperature_c=st.none() | st.floats(-273, 3000),
    source=TEXT,
    notes=TEXT,
    stiffness_std=st.none() | symmetric(6, st.floats(0, 100)),
    covariance=st.none()
    | st.lists(st.floats(0, 9), min_size=21, max_size=21).map(lambda d: as_matrix(np.diag(d))),
    unknown=st.dictionaries(
        TEXT.map("my ".__add__), st.integers() | TEXT | st.none() | st.lists(st.booleans())
    ).map(json.dumps),
)


@settings(deadline=None, max_examples=60)
@given(SPECIMENS)
def test_what_is_written_is_read_back_as_the_same_value(specimen):
    text = json_text(specimen_to_dict(specimen))
    assert specimen_from_dict(parse_json(text, "x"), "x") == specimen
