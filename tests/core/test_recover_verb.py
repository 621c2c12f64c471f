"""`tricline recover`: a table of speeds in, constants and what is not seen out."""

import json

import numpy as np
import pytest

from core import cli
from core.files.speeds import SpeedTable, speeds_text
from tests.materials import cubic, random_physical
from tests.surveys import measured_crystal, readings_of, speeds_along

KEYS = {"constants_gpa", "std_gpa", "rank", "singular_values", "undetermined", "chi2", "dof",
        "outliers", "next_directions"}  # CONVENTIONS section 8  # fmt: skip
DENSITY = 2700.0


@pytest.fixture
def run(tmp_path, monkeypatch, capsys):
    """Run the command line in a folder of its own; returns (status, stdout, stderr)."""
    monkeypatch.chdir(tmp_path)

    def run_words(*words):
        status = cli.main(["recover", *words])
        return (status, *capsys.readouterr())

    return run_words


def write(path, readings, density=DENSITY, key="triclinic"):
    table = SpeedTable(tuple(readings), density=density, class_key=key)
    path.write_text(speeds_text(table), encoding="utf-8")


@pytest.fixture
def survey(tmp_path):
    """A determined table of a crystal, whose truth is returned."""
    rng = np.random.default_rng(8)
    truth = random_physical(rng)
    write(tmp_path / "speeds.csv", measured_crystal(truth, DENSITY, rng, 20))
    return truth


def test_the_constants_and_exactly_the_agreed_keys(run, survey):
    status, out, err = run("speeds.csv", "--json")
    found = json.loads(out)
    assert (status, err) == (0, "")
    assert set(found) == KEYS
    assert found["rank"] == len(found["singular_values"]) == 21
    assert found["undetermined"] == []
    assert found["dof"] == 60 - 21
    error = np.abs(np.array(found["constants_gpa"]) - survey) / np.array(found["std_gpa"])
    assert error.max() < 5.0
    assert np.linalg.norm(found["next_directions"], axis=1) == pytest.approx(1.0)


def test_a_rank_below_the_number_of_constants_is_reported_with_status_0(run, tmp_path):
    # Along the cube edge alone C12 has no part in any speed.
    speeds = speeds_along(cubic(160.0, 90.0, 70.0), 8000.0, np.eye(3)[:, :1])
    write(tmp_path / "blind.csv", readings_of(speeds, np.eye(3)[:, :1]), 8000.0, "cubic")
    status, out, err = run("blind.csv", "--json")
    found = json.loads(out)
    assert status == 0
    assert (found["rank"], len(found["singular_values"])) == (2, 3)
    assert found["undetermined"] == [{"combination": {"12": 1.0}}]
    assert found["std_gpa"][0][1] is None
    assert found["constants_gpa"][0][0] == pytest.approx(160.0, rel=1e-3)
    assert found["constants_gpa"][3][3] == pytest.approx(70.0, rel=1e-3)
    assert "Not seen is C12" in err
    status, out, _ = run("blind.csv")
    assert status == 0
    assert "Seen               2 of 3 combinations" in out
    assert "Not seen           C12" in out


def test_density_and_class_of_the_command_line_go_before_those_of_the_file(run, survey):
    plain = json.loads(run("speeds.csv", "--json")[1])
    doubled = json.loads(run("speeds.csv", "--density", "5400", "--json")[1])
    # Every constant is proportional to the density.
    assert np.array(doubled["constants_gpa"]) == pytest.approx(
        2.0 * np.array(plain["constants_gpa"]), rel=1e-4
    )
    assert len(json.loads(run("speeds.csv", "--class", "monoclinic", "--json")[1])[
        "singular_values"]) == 13  # fmt: skip


def test_uncertain_density_and_directions_widen_the_uncertainties(run, survey):
    plain = np.array(json.loads(run("speeds.csv", "--json")[1])["std_gpa"])
    dense = np.array(
        json.loads(run("speeds.csv", "--density", "2700 ± 27", "--json")[1])["std_gpa"]
    )
    # One percent of the density is one percent of every constant.
    added = np.sqrt(dense**2 - plain**2)[0, 0]
    assert added == pytest.approx(0.01 * survey[0, 0], rel=0.02)
    words = ("speeds.csv", "--direction-sigma", "1", "--robust", "--json")
    turned = np.array(json.loads(run(*words)[1])["std_gpa"])
    assert (turned > plain).all()


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("missing.csv",), "There is no such file"),
        (("speeds.csv", "--density", "heavy"), "density: “heavy” is not a number"),
        (("speeds.csv", "--density", "-5"), "above zero"),
        (("speeds.csv", "--class", "quartz"), "not a crystal class"),
        (("speeds.csv", "--direction-sigma", "90"), "between 0° and 30°"),
        (("bare.csv",), "The density is not known"),
        (("comma.csv",), "row 1"),
        (("header.csv",), "is not a column of measured speeds"),
        ((), "required"),
    ],
)
def test_what_cannot_be_used_is_one_sentence_and_status_2(run, survey, tmp_path, words, said):
    (tmp_path / "bare.csv").write_text("direction,speed_m_s\n1 0 0,5000\n")
    (tmp_path / "comma.csv").write_text(
        "# density_kg_m3: 2700\ndirection,speed_m_s\n1 0 0,5000,5\n"
    )
    (tmp_path / "header.csv").write_text("direction,velocity\n1 0 0,5000\n")
    status, out, err = run(*words)
    assert (status, out) == (2, "")
    assert said in err
    assert err.count("\n") == 1


def test_the_help_teaches_the_file(capsys):
    assert cli.main(["recover", "--help"]) == 0
    text = capsys.readouterr().out
    for word in ("speed_m_s", "transit_us", "# density_kg_m3", "trigonal_6", "Examples:"):
        assert word in text
