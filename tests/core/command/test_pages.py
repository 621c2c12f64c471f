"""Pages for a person: what the numbers of a summary look like in columns of text."""

import re

import numpy as np
import pytest

from core.command import pages
from core.state import OrientationChoice, Specimen, as_matrix
from core.summary import along, compare, rotate, summarise
from core.tensor.notation import parse_rows
from tests.materials import cubic, random_stiffness

CUBE = Specimen("cube", as_matrix(cubic(131.0, 97.4, 86.2)), 8120.0, "cubic")
BARE = Specimen("bare", CUBE.stiffness, None, "cubic")
UNSTABLE = Specimen("slip", as_matrix(cubic(90.0, 95.0, 40.0)), 4000.0, "cubic")
SINGULAR = Specimen("flat", as_matrix(np.diag([1.0, 1, 1, 1, 1, 0])))
ROCK = Specimen("rock", as_matrix(random_stiffness(np.random.default_rng(5))), 2700.0)
ROWS = parse_rows("11 22 33 23 13 12")
AS_IT_IS = OrientationChoice()


def line_of(page, label):
    (line,) = [line for line in page.splitlines() if line.strip().startswith(label)]
    return line


# --- summary --------------------------------------------------------------------------------


def test_a_summary_reads_from_verdict_to_caution():
    page = pages.summaries(summarise(CUBE))
    assert page.startswith("cube\n====\nStable: softest strain 33.6 GPa")
    assert page.endswith(pages.CAUTION)
    assert line_of(page, "Eigenstiffnesses").endswith(
        "33.60  33.60  172.4  172.4  172.4  325.8"  # C11 − C12, 2 C44, C11 + 2 C12
    )
    assert line_of(page, "Density").endswith("8120 kg/m³")
    assert line_of(page, "Claimed class").endswith("cubic, exactly in these axes")
    assert line_of(page, "Voigt").split()[1] == "108.6"  # (C11 + 2 C12)/3
    assert line_of(page, "Zener ratio").endswith("5.131")  # 2 C44/(C11 − C12)
    assert line_of(page, "Percent anisotropy of K").endswith(" 0")  # no rounding dust
    assert "Universal index" in page


def test_extremes_stand_in_columns_with_their_places():
    page = pages.summary(summarise(CUBE))
    young = line_of(page, "Young's modulus")
    assert re.search(r"47\.93 +0 +0 +1\.000 +204\.5 +0\.577 +0\.577 +0\.577$", young)
    assert "every direction" in line_of(page, "linear compressibility")
    assert "ring" in line_of(page, "shear modulus")


def test_several_summaries_follow_each_other():
    page = pages.summaries([summarise(CUBE), summarise(BARE)])
    assert page.count("Over all directions") == 2
    assert "\n\nbare\n====\n" in page


def test_what_is_not_defined_is_left_out_or_a_dash():
    page = pages.summary(summarise(UNSTABLE))
    assert page.startswith("slip\n====\nUnstable in 2 strains")
    assert line_of(page, "Debye speed").endswith("not defined")
    assert line_of(page, "Reuss").split()[1:] == ["–"] * 4
    for absent in ("Universal index", "Hashin", "nan", "None"):
        assert absent not in page
    bare = pages.summary(summarise(BARE))
    assert line_of(bare, "Density").endswith("not known: no waves")
    assert line_of(bare, "fastest wave").split()[-2:] == ["–", "–"]


def test_a_table_in_other_axes_says_how_far():
    odd = Specimen("odd", ROCK.stiffness, crystal_class="cubic")
    line = line_of(pages.summary(summarise(odd)), "Claimed class")
    assert re.search(r"cubic, \d+\.\d % away in these axes$", line)


# --- along ----------------------------------------------------------------------------------


def test_directions_follow_each_other_as_they_were_said():
    page = pages.along_page("cube", ["[0 0 1]", "1,1,0"])(
        [along(CUBE, "[0 0 1]"), along(CUBE, "1,1,0")]
    )
    assert page.startswith("cube\n\nAlong [0 0 1]\n")
    assert "\n\nAlong 1,1,0\n" in page
    first = page.split("Along 1,1,0")[0]
    assert re.search(r"unit vector, crystal axes +0 +0 +1\.00000$", first, re.MULTILINE)
    assert line_of(first, "Young's modulus").endswith("47.93")
    fast = line_of(first, "fastest").split()
    # √(C11/ρ) = 4.017 km/s, purely longitudinal, energy along the normal.
    assert fast[:5] == ["fastest", "4.017", "0.2490", "1.00", "0°"]
    assert line_of(first, "slowest").endswith("(one of a plane)")
    assert "one of a plane" not in line_of(first, "fastest")
    assert line_of(first, "energy of fastest").split()[3:] == ["4.017", "0", "0", "1.00000"]


def test_without_a_density_there_are_no_waves():
    page = pages.along_page("bare", ["1,0,0"])(along(BARE, "1,0,0"))
    assert page.endswith("   no density: no waves\n")


def test_undefined_waves_are_dashes():
    page = pages.along_page("slip", ["1,1,0"])(along(UNSTABLE, "1,1,0"))
    assert line_of(page, "slowest").split()[1:3] == ["–", "–"]
    assert "None" not in page


# --- rotate ---------------------------------------------------------------------------------


def test_a_rotated_table_with_engineering_constants():
    found = rotate(CUBE, OrientationChoice("axis [0 0 1] 45"), ROWS, True)
    page = pages.rotation_page("cube", "axis [0 0 1] 45")(found)
    assert page.startswith("cube, axis [0 0 1] 45\n\nPart axes in crystal axes\n")
    assert re.search(r"^   X +0\.70711 +0\.70711 +0$", page, re.MULTILINE)
    # C11' = (C11 + C12 + 2 C44)/2 after 45° about z.
    assert re.search(r"Stiffness, GPa; rows 11 22 33 23 13 12\n +200\.40 ", page)
    assert "Compliance, 1/TPa; rows 11 22 33 23 13 12\n" in page
    assert re.search(r"E, GPa    1: \S+  2: \S+  3: 47\.93$", page, re.MULTILINE)
    assert page.endswith("coupling, strain per strain loaded: none\n")
    assert "e-" not in page  # rounding dust reads as 0


def test_couplings_are_listed_in_short_rows():
    page = pages.rotation_page("rock", "identity")(rotate(ROCK, AS_IT_IS, ROWS, True))
    coupling = page.split("coupling, strain per strain loaded:\n")[1].splitlines()
    assert len(coupling) == 4
    S = np.linalg.inv(np.array(ROCK.stiffness))
    shown = float(re.search(r"\b23,1: (\S+)", page)[1].replace("−", "-"))
    assert shown == pytest.approx(S[3, 0] / S[0, 0], rel=5e-3)


def test_a_table_without_inverse_says_so():
    page = pages.rotation_page("flat", "identity")(rotate(SINGULAR, AS_IT_IS, ROWS, True))
    assert "Compliance: none, for the stiffness has no inverse" in page
    assert "1: –  2: –  3: –" in page


def test_engineering_constants_only_where_asked():
    page = pages.rotation_page("cube", "identity")(rotate(CUBE, AS_IT_IS, ROWS, False))
    assert "Engineering" not in page


# --- compare --------------------------------------------------------------------------------


def test_two_parts_side_by_side():
    page = pages.comparison(compare(CUBE, AS_IT_IS, BARE, OrientationChoice("axis [0 0 1] 45")))
    assert page.startswith("A  cube, identity\nB  bare, axis [0 0 1] 45\n")
    assert "Turned against each other by 45.00°" in page
    a, b, difference = line_of(page, "E along X").split()[-3:]
    assert float(b) - float(a) == pytest.approx(float(difference), abs=0.1)
    assert line_of(page, "E along Z").split()[-3:] == ["47.93", "47.93", "0"]  # no dust
    assert line_of(page, "fastest wave along X").split()[-3:] == ["4.017", "–", "–"]
    assert "None" not in page


def test_a_symmetry_that_brings_a_part_back_is_said():
    page = pages.comparison(compare(CUBE, AS_IT_IS, CUBE, OrientationChoice("axis [0 0 1] 90")))
    turned = "Turned against each other by 90.00° as they stand, 0° by the crystal's symmetry\n"
    assert turned in page


# --- words ----------------------------------------------------------------------------------


def test_no_class_claimed_is_said_in_words():
    free = Specimen("free", CUBE.stiffness)
    assert line_of(pages.summary(summarise(free)), "Claimed class").endswith(
        "none claimed; fits cubic exactly"
    )
    rough = np.array(CUBE.stiffness) * (1 + 1e-5 * np.diag([1.0, -1, 0, 1, 0, -1]))
    page = pages.summary(summarise(Specimen("rough", as_matrix(rough))))
    said = line_of(page, "Claimed class")
    assert re.search(r"none claimed; fits cubic within 0\.0\d+ %$", said)
    assert line_of(pages.summary(summarise(ROCK)), "Claimed class").endswith("none claimed")


def test_shear_and_poisson_come_with_their_second_direction():
    page = pages.summary(summarise(CUBE))
    least = line_of(page, "shear modulus").split()[3:7]
    across = line_of(page, "sheared towards").split()[2:5]
    n, m = (np.array([float(x.replace("−", "-")) for x in cells[-3:]])
            for cells in (least, across))  # fmt: skip
    assert abs(n @ m) < 2e-3  # across each other
    S = np.linalg.inv(np.array(CUBE.stiffness))
    strain = S @ np.array([*(2 * n * m), n[1] * m[2] + n[2] * m[1], n[0] * m[2] + n[2] * m[0],
                           n[0] * m[1] + n[1] * m[0]])  # of a unit shear stress  # fmt: skip
    e = np.array([[strain[0], strain[5] / 2, strain[4] / 2],
                  [strain[5] / 2, strain[1], strain[3] / 2],
                  [strain[4] / 2, strain[3] / 2, strain[2]]])  # fmt: skip
    assert 1 / (2 * n @ e @ m) == pytest.approx(float(least[0]), rel=5e-3)
    assert "contracting along" in page


def test_an_unstable_table_says_what_its_least_values_are():
    assert "least of the positive values" in pages.summary(summarise(UNSTABLE))
    assert "least of the positive values" not in pages.summary(summarise(CUBE))


def test_columns_do_not_run_together_for_odd_magnitudes():
    odd = Specimen("odd", as_matrix(1e-8 * np.array(CUBE.stiffness)), 2.684, "cubic")
    page = pages.summary(summarise(odd))
    assert not re.search(r"[⁻⁰¹²³⁴⁵⁶⁷⁸⁹][−\d]", page.split("Note:")[0])
    assert "in g/cm³ it would be 2684 kg/m³" in page


def test_decimal_points_stand_below_each_other():
    assert pages.aligned([["1.5", "−20"], ["100", "3.25"]]) == ["  1.5   −20", "100       3.25"]
