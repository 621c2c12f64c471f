"""Opening a file: what kind it is, is read from what it holds."""

import json

import numpy as np
import pytest

from core.errors import InputError
from core.files.bench import write_bench
from core.files.opening import open_file
from core.files.specimen import specimen_to_dict, write_specimen
from core.state import BenchState, Specimen, as_matrix
from tests.materials import cubic, hexagonal, random_stiffness

CUBE = Specimen("cube", as_matrix(cubic(131.0, 97.4, 86.2)), crystal_class="cubic")
TABLE = np.round(random_stiffness(np.random.default_rng(3)), 2)


def text_of(table):
    return "\n".join(" ".join(map(repr, row)) for row in table.tolist())


def opened(tmp_path, name, text):
    (tmp_path / name).write_text(text, encoding="utf-8")
    return open_file(tmp_path / name)


@pytest.mark.parametrize("name", ["a.json", "a.txt", "no-suffix", "a.tricline"])
def test_a_specimen_is_known_by_its_format_not_by_its_name(tmp_path, name):
    write_specimen(tmp_path / name, CUBE)
    found = open_file(tmp_path / name)
    assert (found.specimen, found.bench, found.guesses) == (CUBE, None, ())


@pytest.mark.parametrize("name", ["b.tricline", "b.json", "b"])
def test_a_bench_gives_its_first_crystal_and_itself(tmp_path, name):
    state = BenchState(CUBE, other=Specimen("other", CUBE.stiffness), quantity="phase")
    write_bench(tmp_path / name, state)
    found = open_file(tmp_path / name)
    assert found.bench == state
    assert found.specimen == CUBE


@pytest.mark.parametrize("name", ["run-14.txt", "run-14.dat", "run-14.csv", "run-14"])
def test_a_table_becomes_a_specimen_named_after_its_file(tmp_path, name):
    found = opened(tmp_path, name, text_of(TABLE))
    assert found.specimen.name == "run-14"
    assert found.specimen.source == f"read from {name}"
    np.testing.assert_array_equal(np.array(found.specimen.stiffness), TABLE)
    assert found.specimen.crystal_class == "triclinic"
    assert found.bench is None
    assert any("GPa" in guess for guess in found.guesses)


@pytest.mark.parametrize("brackets", ["{{%s}}", "[[%s]]"])
def test_a_table_in_braces_or_brackets_is_no_json(tmp_path, brackets):
    joint = "},\n{" if brackets[0] == "{" else "],\n["
    rows = joint.join(", ".join(map(repr, row)) for row in TABLE.tolist())
    found = opened(tmp_path, "a.txt", brackets % rows)
    np.testing.assert_array_equal(np.array(found.specimen.stiffness), TABLE)


def test_a_list_of_named_constants_claims_the_class_it_is_of(tmp_path):
    text = "C11 = 158.0(4)\nC12 = 38.2\nC13 = 47.5\nC33 = 54.6\nC44 = 36.3\n"
    found = opened(tmp_path, "slab.txt", text).specimen
    assert found.crystal_class == "hexagonal"
    np.testing.assert_allclose(
        np.array(found.stiffness), hexagonal(158.0, 38.2, 47.5, 54.6, 36.3), rtol=1e-15
    )
    assert found.stiffness_std[1][1] == pytest.approx(0.4)


@pytest.mark.parametrize(
    ("name", "text", "words"),
    [
        ("a.json", "hello", "this is not JSON"),
        ("a.json", "[1, 2, 3]", "A JSON object"),
        ("a.tricline", "1 2 3", "this is not JSON"),
        ("a.txt", '{"format": "something"}', "its “format” is \"something\""),
        ("a.txt", "hello", "no numbers"),
        ("a.txt", "1 2 3", "no table of constants"),
        ("a.txt", '{"format": ', "this is not JSON"),
        ("a.txt", text_of(np.diag([2e7] * 6)) + "\nGPa", "solid"),
    ],
)
def test_what_is_none_of_these_is_refused(tmp_path, name, text, words):
    with pytest.raises(InputError, match=words):
        opened(tmp_path, name, text)


def test_a_missing_file_is_refused(tmp_path):
    with pytest.raises(InputError, match="no such file"):
        open_file(tmp_path / "none.json")


def test_a_later_bench_is_refused_as_a_bench(tmp_path):
    data = {"format": "tricline-bench", "version": 7, "specimen": specimen_to_dict(CUBE)}
    with pytest.raises(InputError, match="format version 7"):
        opened(tmp_path, "b.tricline", json.dumps(data))


def test_a_text_table_names_itself(tmp_path):
    said = (
        "# name: blank 7\n# density_kg_m3: 8120\n"
        "# crystal_class: monoclinic\n# unique_axis: z\n"
    )
    found = opened(tmp_path, "run.txt", said + text_of(TABLE)).specimen
    assert (found.name, found.density) == ("blank 7", 8120.0)
    assert (found.crystal_class, found.unique_axis) == ("monoclinic", "z")


def test_measured_speeds_are_no_table_of_constants(tmp_path):
    with pytest.raises(InputError, match=r"tricline recover run\.csv"):
        opened(tmp_path, "run.csv", "nx;ny;nz;speed_m_s\n1;0;0;5000\n")
