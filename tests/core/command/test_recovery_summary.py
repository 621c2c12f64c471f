"""Recovery from a file: the keys, the page, and the two demo tables."""

import json
from importlib import resources

import numpy as np
import pytest

from core.command.recovery_summary import recovery_page, run_recover, with_uncertainty
from core.errors import InputError
from core.files.specimen import read_specimen
from tests.surveys import speeds_along

with resources.as_file(resources.files("demo_materials")) as _folder:
    FOLDER = _folder

KEYS = ("constants_gpa", "std_gpa", "rank", "singular_values", "undetermined", "chi2", "dof",
        "outliers", "next_directions")  # fmt: skip


@pytest.fixture(scope="module")
def determined():
    return run_recover(FOLDER / "speeds_lm7_determined.csv")


@pytest.fixture(scope="module")
def blind():
    return run_recover(FOLDER / "speeds_lm26_blind.csv")


def written(tmp_path, text):
    path = tmp_path / "speeds.csv"
    path.write_text(text, encoding="utf-8")
    return path


def cubic_rows(*cuts, facts="", brackets="[]"):
    """Return a file of three exact speeds along each cut of an invented cubic crystal."""
    table = np.zeros((6, 6))
    table[:3, :3] = 64.0
    table[np.arange(6), np.arange(6)] = [166.0] * 3 + [80.0] * 3
    rows = []
    for cut in cuts:
        n = np.array(cut, dtype=float)[:, None] / np.linalg.norm(cut)
        for k, v in enumerate(speeds_along(table, 2329.0, n)[:, 0].tolist()):
            said = f"{brackets[:1]}{' '.join(map(str, cut))}{brackets[1:]}"
            rows.append(f"{said},{k + 1},{v!r}")
    return facts + "direction,sheet,speed_m_s\n" + "\n".join(rows) + "\n"


def test_the_demo_that_determines_everything(determined):
    truth = np.array(read_specimen(FOLDER / "blank_lm7_triclinic.json").stiffness)
    std = np.array(determined["std_gpa"], dtype=float)
    assert determined["rank"] == 21
    assert determined["undetermined"] == []
    assert np.abs((np.array(determined["constants_gpa"]) - truth) / std).max() < 4
    assert std.max() < 0.5
    assert determined["outliers"] == [17]
    assert len(determined["next_directions"]) == 5


def test_the_demo_that_is_blind_in_three_combinations(blind):
    truth = np.array(read_specimen(FOLDER / "plate_lm26_monoclinic.json").stiffness)
    assert blind["rank"] == 10
    assert [c["combination"] for c in blind["undetermined"]] == [
        {"12": 1.0}, {"23": 1.0}, {"25": 1.0}
    ]  # fmt: skip
    std = np.array([[np.nan if x is None else x for x in row] for row in blind["std_gpa"]])
    seen = np.isfinite(std) & (std > 0)
    assert np.isnan(std[[0, 1, 1], [1, 2, 4]]).all()
    assert seen.sum() == 14
    assert np.abs((np.array(blind["constants_gpa"]) - truth)[seen] / std[seen]).max() < 4
    assert blind["outliers"] == []


def test_the_blanks_suggested_for_the_blind_demo_cure_it(blind, tmp_path):
    """One blank brings two of the three: the sum of its three ρv² is known beforehand."""
    truth = read_specimen(FOLDER / "plate_lm26_monoclinic.json")
    text = (FOLDER / "speeds_lm26_blind.csv").read_text(encoding="utf-8")
    ranks, data = [], blind
    for _ in range(2):
        n = np.array(data["next_directions"][0])[:, None]
        speeds = speeds_along(np.array(truth.stiffness), truth.density, n)[:, 0]
        for sheet, v in enumerate(speeds, start=1):
            text += f"{n[0, 0]},{n[1, 0]},{n[2, 0]},{sheet},,{v},{1e-3 * v}\n"
        data = run_recover(written(tmp_path, text))
        ranks.append(data["rank"])
    assert ranks == [12, 13]


def test_the_demo_readings_say_that_they_are_invented():
    for path in FOLDER.glob("speeds_*.csv"):
        assert path.read_text(encoding="utf-8").startswith("# Invented demo readings")


def test_the_dict_has_the_keys_and_is_json(determined, blind):
    for data in (determined, blind):
        assert set(KEYS) <= set(data)
        assert json.loads(json.dumps(data, allow_nan=False)) == data
        assert np.shape(data["constants_gpa"]) == np.shape(data["std_gpa"]) == (6, 6)
        assert len(data["singular_values"]) == len(data["independent"])
        assert np.shape(data["next_directions"]) == (5, 3)


def test_the_page_says_what_the_dict_holds(determined, blind):
    page = recovery_page(determined)
    assert "Seen               21 of 21 combinations" in page
    assert "Outliers           row 17" in page
    page = recovery_page(blind)
    assert "Seen               10 of 13 combinations" in page
    assert "Not seen           C25" in page
    assert "has a part in what is not seen" in page


def test_the_command_line_goes_before_the_file(tmp_path):
    facts = "# density_kg_m3: 2000 ± 20\n# crystal_class: cubic\n"
    path = written(tmp_path, cubic_rows((1, 1, 0), (1, 0, 0), facts=facts))
    given = run_recover(path, 2329.0)
    assert given["constants_gpa"][0][1] == pytest.approx(64.0, abs=1e-3)
    own = run_recover(path)
    assert own["constants_gpa"][0][0] == pytest.approx(166.0 * 2000 / 2329, abs=1e-3)
    # ± 20 kg/m³ of the file is one per cent of every constant.
    grown = own["std_gpa"][3][3] ** 2 - (given["std_gpa"][3][3] * 2000 / 2329) ** 2
    assert np.sqrt(grown) == pytest.approx(0.01 * own["constants_gpa"][3][3], rel=1e-3)
    assert run_recover(path, 2329.0, "isotropic")["crystal_class"] == "isotropic"


def test_a_rank_below_the_number_of_constants_is_reported_not_refused(tmp_path):
    data = run_recover(written(tmp_path, cubic_rows((1, 0, 0))), 2329.0, "cubic")
    assert data["rank"] == 2
    assert data["undetermined"] == [{"combination": {"12": 1.0}}]
    assert data["std_gpa"][0][1] is None
    assert data["std_gpa"][0][0] is not None


def test_without_a_class_no_symmetry_is_assumed_and_this_is_said(tmp_path):
    data = run_recover(written(tmp_path, cubic_rows((1, 0, 0), brackets="")), 2329.0)
    assert data["crystal_class"] == "triclinic"
    assert any("No crystal class was named" in note for note in data["notes"])


def test_a_missing_density_is_asked_for(tmp_path):
    with pytest.raises(InputError, match="--density"):
        run_recover(written(tmp_path, cubic_rows((1, 0, 0))), None, "cubic")


def test_an_unknown_class_is_named_with_the_nearest(tmp_path):
    with pytest.raises(InputError, match="trigonal_6"):
        run_recover(written(tmp_path, cubic_rows((1, 0, 0))), 2329.0, "trigonal6")


@pytest.mark.parametrize(("value", "std", "text"), [
    (105.3127, 0.2411, "105.31 ± 0.24"), (-1.2345, 0.0311, "−1.234 ± 0.031"),
    (105.3127, 24.11, "105 ± 24"), (0.0, 0.0, "0"),
])  # fmt: skip
def test_digits_follow_the_uncertainty(value, std, text):
    assert with_uncertainty(value, std).strip() == text


def test_indices_without_a_cell_are_refused_and_components_are_not(tmp_path):
    with pytest.raises(InputError, match=r"Indices need the unit cell.*without brackets"):
        run_recover(written(tmp_path, cubic_rows((1, 0, 0))), 2329.0, "trigonal_6")
    rows = cubic_rows((1, 0, 0), brackets="")
    assert run_recover(written(tmp_path, rows), 2329.0, "trigonal_6")["rank"] > 0


def test_what_was_not_measured_is_marked_in_the_table(tmp_path, determined, blind):
    assert "?" not in recovery_page(determined)
    block = recovery_page(blind).split("rows 11 22 33 23 13 12\n")[1].splitlines()
    marked = np.array([["?" in cell for cell in row.split()] for row in block[:6]])
    unseen = np.zeros((6, 6), dtype=bool)
    for i, j in ((0, 1), (1, 2), (1, 4)):  # C12, C23 and C25
        unseen[i, j] = unseen[j, i] = True
    assert (marked == unseen).all()
    assert block[6].lstrip().startswith("? not measured")


def test_one_is_no_plural(tmp_path):
    text = "direction,sheet,speed_m_s\n1 0 0,1,5000\n0 1 0,1,5000\n"
    page = recovery_page(run_recover(written(tmp_path, text), 2329.0, "cubic"))
    assert "from 2 speeds" in page
    assert "for 1 degree of freedom\n" in page
    page = recovery_page(
        run_recover(written(tmp_path, text.replace("0 1 0,1,5000\n", "")), 2329.0, "cubic")
    )
    assert "from 1 speed\n" in page


def test_impossible_density_and_speeds_are_noted(tmp_path):
    rows = cubic_rows((1, 0, 0), (1, 1, 0)).splitlines()
    cells = [row.split(",") for row in rows[1:]]
    slow = [f"{cut},{sheet},{float(speed) / 1e3!r}" for cut, sheet, speed in cells]
    notes = run_recover(written(tmp_path, "\n".join([rows[0], *slow])), 2.329, "cubic")["notes"]
    assert any("in g/cm³ it would be 2329 kg/m³" in note for note in notes)
    (note,) = [note for note in notes if "was it given in km/s?" in note]
    assert note.startswith("Rows 1, 2, 3, 4, 5 and 1 more: ")
