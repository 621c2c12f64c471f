"""Tables for other programs, read back and held against closed forms."""

import csv
import io
import json
import re
from dataclasses import replace

import numpy as np
import pytest

from core.errors import InputError
from core.files.matrices import read_table, understand
from core.files.origin import Origin, origin_facts, today
from core.files.tables import (
    OUR_ROWS,
    ROTATED,
    directions_csv,
    rotated_block,
    rotated_csv,
    rotated_json,
    rotated_text,
    section_csv,
    section_data,
)
from core.state import OrientationChoice, Specimen, as_matrix
from core.tensor.notation import parse_rows
from tests import materials

C11, C12, C44 = 190.0, 118.0, 92.0
ORDERS = ("11 22 33 23 13 12", "11 22 33 12 13 23", "11 22 33 12 23 13", "33 22 11 12 13 23")
UNTURNED = OrientationChoice()
TURNED = OrientationChoice("bunge 10 20 30", (0.5, -1.0, 2.0))


def specimen(table, **known):
    known = {"name": "test piece", "density": 2500.0, "source": "invented", **known}
    return Specimen(stiffness=as_matrix(table), **known)


def cubic_origin(orientation=UNTURNED, **known):
    made = specimen(materials.cubic(C11, C12, C44), crystal_class="cubic", **known)
    return Origin(made, orientation)


def random_origin(seed=7, made=""):
    table = materials.random_physical(np.random.default_rng(seed))
    return Origin(specimen(table), TURNED, made)


def columns_of(text):
    """Return the named columns of a CSV file, its comments left out."""
    lines = [line for line in text.splitlines() if not line.startswith("#")]
    names, *rows = csv.reader(io.StringIO("\n".join(lines)))
    return {name: np.array([float(row[k] or "nan") for row in rows])
            for k, name in enumerate(names)}  # fmt: skip


# --- constants in part axes -----------------------------------------------------------------


@pytest.mark.parametrize("order", ORDERS)
@pytest.mark.parametrize("write", [rotated_block, rotated_text])
def test_a_block_reads_back_through_the_paste_reader(write, order):
    origin = random_origin()
    found = read_table(write(origin, parse_rows(order)))
    wanted = materials.rotated(origin.specimen.stiffness, origin.rotation)
    assert np.abs(found.stiffness - wanted).max() < 1e-11


@pytest.mark.parametrize("order", ORDERS)
def test_the_reader_has_nothing_to_ask(order):
    assert understand(rotated_text(random_origin(), parse_rows(order))).questions == ()


def test_the_lines_stand_in_the_order_wanted():
    text = rotated_block(random_origin(), parse_rows("11 22 33 12 13 23"))
    lines = [line for line in text.splitlines() if not line.startswith("#")]
    wanted = materials.rotated(random_origin().specimen.stiffness, random_origin().rotation)
    assert float(lines[3].split("\t")[3]) == pytest.approx(wanted[5, 5], abs=1e-11)
    assert float(lines[5].split("\t")[0]) == pytest.approx(wanted[3, 0], abs=1e-11)


def test_an_unturned_part_has_the_very_numbers_entered():
    origin = replace(random_origin(), orientation=OrientationChoice())
    read = read_table(rotated_block(origin)).stiffness
    assert np.array_equal(read, np.array(origin.specimen.stiffness))


def test_words_of_the_specimen_do_not_mislead_the_check():
    table = materials.random_physical(np.random.default_rng(1))
    origin = Origin(specimen(table, source="converted from kbar; compliance in 1/TPa"), TURNED)
    text = rotated_block(origin, parse_rows("11 22 33 12 13 23"))
    assert text.startswith("# stiffness in GPa")


def test_columns_name_their_pairs():
    origin = random_origin()
    lines = [line for line in rotated_csv(origin).splitlines() if not line.startswith("#")]
    rows = list(csv.DictReader(io.StringIO("\n".join(lines))))
    pairs = ("11", "22", "33", "23", "13", "12")
    found = {letter: np.array([[next(float(r["value"]) for r in rows if r["name"] == letter
                                     and (r["row"], r["column"]) == (a, b)) for b in pairs]
                               for a in pairs]) for letter in "CS"}  # fmt: skip
    wanted = materials.rotated(origin.specimen.stiffness, origin.rotation)
    assert np.abs(found["C"] - wanted).max() < 1e-11
    assert np.abs(found["S"] @ found["C"] - np.eye(6)).max() < 1e-11
    young = {r["row"]: float(r["value"]) for r in rows if r["name"] == "E"}
    assert young["2"] == pytest.approx(1 / found["S"][1, 1], rel=1e-13)
    nu = next(float(r["value"]) for r in rows if (r["name"], r["row"], r["column"]) ==
              ("nu", "1", "3"))  # fmt: skip
    assert nu == pytest.approx(-found["S"][2, 0] / found["S"][0, 0], rel=1e-13)
    eta = next(float(r["value"]) for r in rows if (r["name"], r["row"], r["column"]) ==
               ("eta", "23", "1"))  # fmt: skip
    assert eta == pytest.approx(found["S"][3, 0] / found["S"][0, 0], rel=1e-12)


def test_json_holds_a_cubic_crystals_closed_forms():
    data = json.loads(rotated_json(cubic_origin()))
    s11 = (C11 + C12) / ((C11 - C12) * (C11 + 2 * C12))  # Nye 1957, chapter 8
    assert data["engineering"]["young_gpa"] == pytest.approx([1 / s11] * 3, rel=1e-12)
    assert data["engineering"]["shear_gpa"]["12"] == pytest.approx(C44, rel=1e-12)
    nu = C12 / (C11 + C12)
    assert data["engineering"]["poisson"][0][1] == pytest.approx(nu, rel=1e-12)
    assert data["engineering"]["poisson"][0][0] is None
    assert data["rows"] == ["11", "22", "33", "23", "13", "12"]
    assert np.array(data["stiffness_gpa"])[0, 1] == C12
    assert data["origin"]["specimen"] == "test piece"


def test_a_table_without_inverse_says_so():
    singular = materials.isotropic(50.0, 0.0)
    origin = Origin(specimen(singular), OrientationChoice())
    assert "no inverse" in rotated_text(origin)
    assert json.loads(rotated_json(origin))["compliance_per_gpa"] is None
    assert "\nS," not in rotated_csv(origin)


@pytest.mark.parametrize("form", ROTATED)
def test_every_form_says_where_its_numbers_come_from(form):
    origin = replace(random_origin(), made="2031-05-17")
    text = ROTATED[form][2](origin, OUR_ROWS)
    for words in ("test piece", "invented", "bunge 10 20 30 turn 0.5 -1 2", "2031-05-17",
                  "Tricline", "triclinic"):  # fmt: skip
        assert words in text
    assert ROTATED[form][1] in (".txt", ".csv", ".json")


def test_a_reproducible_file_has_no_date():
    assert today(reproducible=True) == ""
    assert re.fullmatch(r"\d{4}-\d\d-\d\d", today())
    assert "date" not in dict(origin_facts(random_origin()))


def test_a_name_with_a_line_break_stays_in_its_comment():
    origin = cubic_origin(name="two\nlines", notes="x")
    assert "# specimen: two lines\n" in rotated_block(origin)


# --- directions and sections ----------------------------------------------------------------


def cubic_young(n):
    """1/E = S11 − 2 (S11 − S12 − S44/2)(n1²n2² + n2²n3² + n3²n1²); Nye 1957, chapter 8."""
    s11 = (C11 + C12) / ((C11 - C12) * (C11 + 2 * C12))
    s12 = -C12 / ((C11 - C12) * (C11 + 2 * C12))
    x, y, z = n**2
    return 1 / (s11 - 2 * (s11 - s12 - 0.5 / C44) * (x * y + y * z + z * x))


def test_a_grid_of_directions_holds_the_closed_form():
    found = columns_of(directions_csv(cubic_origin(TURNED), ["young"], 15.0))
    assert len(found["young [GPa]"]) == 1 + 6 * 24
    crystal = np.stack([found[f"{axis} [crystal]"] for axis in "xyz"])
    assert found["young [GPa]"] == pytest.approx(cubic_young(crystal), rel=1e-11)
    theta, phi = (np.radians(found[f"{name} [deg]"]) for name in ("theta", "phi"))
    part = [np.sin(theta) * np.cos(phi), np.sin(theta) * np.sin(phi), np.cos(theta)]
    assert np.abs(np.array(part) - [found[f"{axis} [part]"] for axis in "XYZ"]).max() < 1e-12
    turned = cubic_origin(TURNED).rotation @ crystal
    assert np.abs(turned - np.array(part)).max() < 1e-12


def test_waves_have_a_column_a_sheet():
    found = columns_of(directions_csv(cubic_origin(), ["phase"], 45.0))
    along_x = np.argmax(found["X [part]"])
    speeds = [found[f"phase {sheet} [km/s]"][along_x] for sheet in ("fastest", "slowest")]
    wanted = np.sqrt(np.array([C11, C44]) * 1e9 / 2500.0) / 1e3  # along a cube axis
    assert speeds == pytest.approx(list(wanted), rel=1e-12)


def test_a_section_goes_once_round_its_plane():
    found = columns_of(section_csv([cubic_origin()], "young", (0.0, 0.0, 1.0), 73))
    n = np.stack([found[f"{axis} [part]"] for axis in "XYZ"])
    assert found["angle [deg]"][0] == 0.0
    assert found["angle [deg]"][-1] == 360.0
    angle = np.radians(found["angle [deg]"])
    assert np.abs(n - [np.cos(angle), np.sin(angle), 0 * angle]).max() < 1e-12
    assert found["young [GPa]"] == pytest.approx(cubic_young(n), rel=1e-11)


def test_rays_of_a_section_carry_the_phase_speed_along_the_normal():
    origin = random_origin()
    text = section_csv([replace(origin, side="A")], "wave", (0.0, 1.0, 0.0), 37)
    found = columns_of(text)
    phase = columns_of(section_csv([origin], "phase", (0.0, 1.0, 0.0), 37))
    for sheet in ("fastest", "middle", "slowest"):
        right, up, out = (found[f"A {sheet} ray {axis} [km/s]"] for axis in
                          ("right", "up", "out"))  # fmt: skip
        along = right * found["X [part]"] + up * found["Z [part]"]  # V·n = v
        assert along == pytest.approx(phase[f"phase {sheet} [km/s]"], rel=1e-9)
        size = np.sqrt(right**2 + up**2 + out**2)
        assert size == pytest.approx(found[f"A wave {sheet} [km/s]"], rel=1e-11)


def test_the_same_section_as_plain_lists():
    origins = [Origin(cubic_origin().specimen, OrientationChoice(), side=side) for side in "AB"]
    data = section_data(origins, "slowness", (0.0, 0.0, 1.0), 37)
    assert [curve["side"] for curve in data["curves"]] == ["A"] * 3 + ["B"] * 3
    assert data["curves"][0]["sheet"] == "fastest"
    assert data["curves"][0]["value"][0] == pytest.approx(
        1e3 / np.sqrt(C11 * 1e9 / 2500.0), rel=1e-12)  # fmt: skip
    assert json.loads(json.dumps(data, allow_nan=False)) == data


def test_what_is_not_defined_is_empty_in_columns_and_null_in_lists():
    unstable = materials.cubic(100.0, 150.0, 40.0)
    origin = Origin(specimen(unstable), OrientationChoice())
    assert np.isnan(columns_of(directions_csv(origin, ["young"], 45.0))["young [GPa]"]).any()
    data = section_data([origin], "young", (0.0, 0.0, 1.0), 9)
    assert None in data["curves"][0]["value"]


@pytest.mark.parametrize("step", [0.0, -5.0, 0.01, 60.0, float("nan")])
def test_a_step_that_makes_no_grid_is_refused(step):
    with pytest.raises(InputError, match=r"45 degrees"):
        directions_csv(cubic_origin(), ["young"], step)


def test_unknown_quantities_and_missing_densities_are_refused():
    with pytest.raises(InputError, match="Did you mean 'young'"):
        section_csv([cubic_origin()], "yuong", (0.0, 0.0, 1.0))
    with pytest.raises(InputError, match="wants a density"):
        section_csv([cubic_origin(density=None)], "phase", (0.0, 0.0, 1.0))
    with pytest.raises(InputError, match="wants a density"):
        directions_csv(cubic_origin(density=None), ["young", "slowness"])
