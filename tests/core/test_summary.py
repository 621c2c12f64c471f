"""Summaries: the keys of the command line, and numbers against print through it all."""

import dataclasses
import json
import math

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from core.command import pages
from core.crystal.cell import UnitCell
from core.errors import InputError
from core.state import OrientationChoice, Specimen, as_matrix
from core.summary import along, compare, rotate, summarise
from core.task import Cancelled, Ticker
from core.tensor.notation import parse_rows, tensor_to_voigt
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS
from tests.materials import cubic, isotropic, trigonal

AS_IT_IS = OrientationChoice()
OUR_ROWS = parse_rows("11 22 33 23 13 12")

# Ledbetter & Naimon 1974, J. Phys. Chem. Ref. Data 3, 897 (from memory): copper, GPa.
COPPER = Specimen("copper", as_matrix(cubic(168.4, 121.4, 75.4)), 8960.0, "cubic")
# Brown, Abramson & Angel 2006, Phys. Chem. Minerals 33, 256: low albite, X∥a*, Y∥b.
ALBITE = Specimen(
    "albite",
    as_matrix(
        [
            [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
            [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
            [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
            [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
            [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
            [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
        ]
    ),
    2623.0,
    cell=UnitCell(8.137, 12.786, 7.158, 94.26, 116.6, 87.71),
    crystal_axes="y||b, x||a*",
)
# Bechmann 1958, Phys. Rev. 110, 1060: quartz in the frame of the IRE standard of 1949.
QUARTZ = Specimen(
    "quartz",
    as_matrix(trigonal(86.74, 6.99, 11.91, -17.91, 107.2, 57.94)),
    2649.0,
    "trigonal_6",
    cell=UnitCell(4.9134, 4.9134, 5.4052, 90, 90, 120),
    crystal_axes="x||a, z||c*",
)
UNSTABLE = Specimen("u", as_matrix(cubic(90.0, 95.0, 40.0)), 4000.0, "cubic")
GLASS = Specimen("g", as_matrix(isotropic(40.0, 30.0)), 2500.0, "isotropic")


def strict(data):
    """Return what JSON makes of a summary; NaN and infinity fail."""
    return json.loads(json.dumps(data, allow_nan=False))


# --- keys -----------------------------------------------------------------------------------

MEAN = {"bulk_gpa", "shear_gpa", "young_gpa", "poisson"}
BOUNDS = {"bulk_low_gpa", "bulk_high_gpa", "shear_low_gpa", "shear_high_gpa"}
EXTREMES = {"young_gpa", "linear_compressibility_per_tpa", "shear_gpa", "poisson", "fast_km_s",
            "middle_km_s", "slow_km_s"}  # fmt: skip


@pytest.mark.parametrize("specimen", [COPPER, ALBITE, UNSTABLE, GLASS], ids=lambda s: s.name)
@pytest.mark.parametrize("density", [2700.0, None])
def test_a_summary_has_the_keys_that_are_promised(specimen, density):
    found = strict(summarise(dataclasses.replace(specimen, density=density)))
    assert set(found) == {"name", "stable", "verdict", "eigenstiffness_gpa", "averages",
                          "anisotropy", "symmetry", "density_kg_m3", "debye_speed_km_s",
                          "extremes", "notes"}  # fmt: skip
    assert type(found["stable"]) is bool
    assert len(found["eigenstiffness_gpa"]) == 6
    assert found["eigenstiffness_gpa"] == sorted(found["eigenstiffness_gpa"])
    assert set(found["averages"]) == {"voigt", "reuss", "hill", "hashin_shtrikman"}
    assert all(set(found["averages"][name]) == MEAN for name in ("voigt", "reuss", "hill"))
    assert set(found["averages"]["hashin_shtrikman"]) == BOUNDS
    assert set(found["anisotropy"]) == {
        "universal", "log_euclidean", "percent_bulk", "percent_shear", "zener"
    }  # fmt: skip
    assert set(found["symmetry"]) == {"declared", "as_entered_percent", "nearest"}
    assert [row["class"] for row in found["symmetry"]["nearest"]] == list(CLASS_KEYS)
    for row in found["symmetry"]["nearest"]:
        assert set(row) == {"class", "distance_percent", "axes"}
        axes = np.array(row["axes"])
        assert np.abs(axes @ axes.T - np.eye(3)).max() < 1e-9
        assert np.linalg.det(axes) > 0
    assert set(found["extremes"]) == EXTREMES
    for pair in found["extremes"].values():
        assert set(pair) == {"min", "max"}
        for extreme in filter(None, pair.values()):
            assert set(extreme) == {"value", "direction", "transverse", "set"}
            assert extreme["set"] in ("point", "ring", "all")
            assert math.hypot(*extreme["direction"]) == pytest.approx(1)
    assert (found["density_kg_m3"], found["name"]) == (density, specimen.name)


def test_a_turned_orthorhombic_table_is_found_again():
    # Invented constants, turned by scipy; by construction the distance is zero.
    table = np.diag([214.0, 158.0, 186.0, 58.0, 77.0, 69.0])
    for (i, j), value in {(0, 1): 64.0, (0, 2): 71.0, (1, 2): 83.0}.items():
        table[i, j] = table[j, i] = value
    turn = Rotation.from_euler("ZXZ", [20.0, 35.0, -50.0], degrees=True).as_matrix()
    full = Stiffness.from_voigt(table).tensor
    turned = tensor_to_voigt(np.einsum("ia,jb,kc,ld,abcd->ijkl", turn, turn, turn, turn, full))
    specimen = Specimen("turned", as_matrix(turned), crystal_class="triclinic")
    rows = {row["class"]: row for row in summarise(specimen)["symmetry"]["nearest"]}
    assert rows["orthorhombic"]["distance_percent"] < 1e-6
    assert rows["tetragonal_6"]["distance_percent"] > 1.0
    axes = np.abs(np.array(rows["orthorhombic"]["axes"]) @ turn)  # a permutation, up to signs
    assert np.abs(np.sort(axes, axis=1) - [0.0, 0.0, 1.0]).max() < 1e-6
    page = pages.summary(summarise(specimen))
    line = next(row for row in page.splitlines() if row.split()[:1] == ["orthorhombic"])
    assert line.split()[1] == "exact"


def test_along_has_the_keys_that_are_promised():
    found = strict(along(ALBITE, "[1 1 0]"))
    assert list(found) == ["direction", "young_gpa", "linear_compressibility_per_tpa",
                           "shear_min_gpa", "shear_max_gpa", "poisson_min", "poisson_max",
                           "sheets"]  # fmt: skip
    assert len(found["sheets"]) == 3
    for sheet in found["sheets"]:
        assert list(sheet) == [
            "speed_km_s", "slowness_s_km", "polarisation", "longitudinality", "group_km_s",
            "power_flow_deg", "focusing", "degenerate",
        ]  # fmt: skip
        assert sheet["slowness_s_km"] == pytest.approx(1 / sheet["speed_km_s"])
        assert np.dot(sheet["group_km_s"], found["direction"]) == pytest.approx(
            sheet["speed_km_s"]
        )
    assert along(dataclasses.replace(ALBITE, density=None), "[1 1 0]")["sheets"] is None


# --- numbers --------------------------------------------------------------------------------


def test_copper_in_closed_form():
    found = summarise(COPPER)
    means, bounds = found["averages"], found["averages"]["hashin_shtrikman"]
    # (C11 + 2 C12)/3; (C11 − C12 + 3 C44)/5; 5(C11 − C12)C44/(4C44 + 3(C11 − C12)).
    assert means["voigt"]["bulk_gpa"] == pytest.approx(137.0667, abs=1e-4)
    assert means["voigt"]["shear_gpa"] == pytest.approx(54.64, abs=1e-3)
    assert means["reuss"]["shear_gpa"] == pytest.approx(40.034, abs=1e-3)
    # Hashin & Shtrikman 1962, J. Mech. Phys. Solids 10, 343, closed form for cubic crystals.
    assert bounds["shear_low_gpa"] == pytest.approx(45.964, abs=1e-3)
    assert bounds["shear_high_gpa"] == pytest.approx(49.445, abs=1e-3)
    # Ranganathan & Ostoja-Starzewski 2008; Kube 2016; Chung & Buessem 1967: forms in A.
    indices = found["anisotropy"]
    assert indices["zener"] == pytest.approx(3.2085, abs=5e-5)
    assert indices["universal"] == pytest.approx(1.82422, abs=1e-5)
    assert indices["log_euclidean"] == pytest.approx(0.69551, abs=1e-5)
    assert indices["percent_shear"] == pytest.approx(15.4278, abs=1e-4)
    assert found["eigenstiffness_gpa"] == pytest.approx([47.0] * 2 + [150.8] * 3 + [411.2])
    assert found["symmetry"]["as_entered_percent"] == pytest.approx(0, abs=1e-10)
    assert found["stable"]
    assert found["verdict"].startswith("Stable: ")


def test_copper_extremes():
    extremes = summarise(COPPER)["extremes"]
    # Turley & Sines 1971, J. Phys. D 4, 264; Baughman et al. 1998, Nature 392, 362: E is least
    # along ⟨100⟩ and greatest along ⟨111⟩, ν is least for [1 1 0], [1 −1 0] and negative.
    assert extremes["young_gpa"]["min"]["value"] == pytest.approx(66.69, abs=0.005)
    assert extremes["young_gpa"]["max"]["value"] == pytest.approx(191.15, abs=0.005)
    assert np.abs(extremes["young_gpa"]["max"]["direction"]) == pytest.approx([3**-0.5] * 3)
    assert extremes["shear_gpa"]["min"]["value"] == pytest.approx(23.5)  # (C11 − C12)/2
    assert extremes["shear_gpa"]["max"]["value"] == pytest.approx(75.4)  # C44
    assert extremes["poisson"]["min"]["value"] == pytest.approx(-0.1357, abs=5e-5)
    assert extremes["poisson"]["max"]["value"] == pytest.approx(0.8187, abs=5e-5)
    beta = extremes["linear_compressibility_per_tpa"]["min"]
    assert beta["value"] == pytest.approx(1e3 / 411.2)
    assert beta["set"] == "all"
    assert extremes["slow_km_s"]["min"]["value"] == pytest.approx(math.sqrt(23.5e3 / 8960))


def test_albite_against_a_separate_calculation():
    # Full fourth-rank tensors and brute force over directions; no printed values.
    found = summarise(ALBITE)
    means, bounds = found["averages"], found["averages"]["hashin_shtrikman"]
    assert means["voigt"]["bulk_gpa"] == pytest.approx(63.72, abs=0.01)
    assert means["reuss"]["bulk_gpa"] == pytest.approx(55.16, abs=0.01)
    assert means["voigt"]["shear_gpa"] == pytest.approx(41.21, abs=0.01)
    assert means["reuss"]["shear_gpa"] == pytest.approx(29.80, abs=0.01)
    assert means["hill"]["bulk_gpa"] == pytest.approx(59.44, abs=0.01)
    assert means["hill"]["shear_gpa"] == pytest.approx(35.51, abs=0.01)
    assert bounds == pytest.approx(
        {"bulk_low_gpa": 58.09, "bulk_high_gpa": 61.12, "shear_low_gpa": 32.80,
         "shear_high_gpa": 36.60}, abs=0.02)  # fmt: skip
    assert found["anisotropy"]["universal"] == pytest.approx(2.069, abs=1e-3)
    assert found["anisotropy"]["zener"] is None
    extremes = found["extremes"]
    assert extremes["young_gpa"]["min"]["value"] == pytest.approx(48.64, abs=0.02)
    assert extremes["young_gpa"]["max"]["value"] == pytest.approx(168.23, abs=0.02)
    assert extremes["fast_km_s"]["min"]["value"] == pytest.approx(5.138, abs=1e-3)
    assert extremes["fast_km_s"]["max"]["value"] == pytest.approx(8.3845, abs=1e-3)


def test_albite_along_its_soft_axis():
    # Brown, Angel & Ross 2016, J. Geophys. Res. 121, 663: "softest by a factor of 3" along a*.
    soft, stiff = along(ALBITE, "(1 0 0)"), along(ALBITE, "[0 1 0]")
    assert soft["direction"] == pytest.approx([1, 0, 0], abs=1e-12)  # x∥a*
    assert stiff["young_gpa"] / soft["young_gpa"] == pytest.approx(3, abs=0.5)
    assert soft["linear_compressibility_per_tpa"] == pytest.approx(11.10, abs=0.01)


def test_along_a_cube_axis_in_closed_form():
    found = along(COPPER, "[0 0 1]")
    fast, *slow = found["sheets"]
    assert fast["speed_km_s"] == pytest.approx(math.sqrt(168.4e3 / 8960))
    assert fast["longitudinality"] == pytest.approx(1)
    assert np.abs(fast["polarisation"]) == pytest.approx([0, 0, 1], abs=1e-9)
    assert fast["power_flow_deg"] == pytest.approx(0, abs=1e-5)
    assert not fast["degenerate"]
    for sheet in slow:
        assert sheet["speed_km_s"] == pytest.approx(math.sqrt(75.4e3 / 8960))
        assert sheet["longitudinality"] == pytest.approx(0, abs=1e-9)
        assert sheet["degenerate"]


# --- tables that are not those of a crystal -------------------------------------------------


def test_an_unstable_table_gives_all_that_is_defined():
    found = strict(summarise(UNSTABLE))
    assert found["stable"] is False
    assert found["verdict"].startswith("Unstable in 2 strains")
    assert found["averages"]["voigt"]["bulk_gpa"] == pytest.approx(280 / 3)
    assert found["averages"]["reuss"]["bulk_gpa"] is None
    assert found["averages"]["hashin_shtrikman"]["shear_low_gpa"] is None
    assert found["anisotropy"]["universal"] is None
    assert found["debye_speed_km_s"] is None
    assert found["extremes"]["fast_km_s"]["max"]["value"] > 0
    assert found["extremes"]["slow_km_s"]["min"] is None
    one = strict(along(UNSTABLE, "[1 1 0]"))
    assert one["sheets"][0]["speed_km_s"] == pytest.approx(math.sqrt((92.5 + 40) * 1e3 / 4000))
    assert one["sheets"][2]["speed_km_s"] is one["sheets"][2]["slowness_s_km"] is None
    assert one["sheets"][2]["group_km_s"] == [None] * 3


@pytest.mark.parametrize(
    "table", [np.zeros((6, 6)), np.diag([1.0, 1, 1, 1, 1, 0]), -np.eye(6), np.ones((6, 6))]
)
def test_a_table_without_inverse_raises_nothing(table):
    known = Specimen("odd", as_matrix(table), 1000.0)
    found = strict(summarise(known))
    assert found["stable"] is False
    assert found["extremes"]["young_gpa"]["max"] is None
    strict(along(known, "0.3,0.4,0.87"))
    turned = strict(rotate(known, OrientationChoice("bunge 1 2 3"), OUR_ROWS, True))
    has_inverse = abs(np.linalg.det(table)) > 0
    assert (turned["compliance_per_gpa"] is not None) == has_inverse
    rows = strict(compare(known, AS_IT_IS, COPPER, AS_IT_IS))["rows"]
    assert all(row["difference"] is None for row in rows if row["key"] == "young_X_gpa")


def test_an_isotropic_body_is_the_same_everywhere():
    extremes = summarise(GLASS)["extremes"]
    for key in ("young_gpa", "shear_gpa", "fast_km_s"):
        assert extremes[key]["min"]["set"] == "all"
        assert extremes[key]["min"]["value"] == pytest.approx(extremes[key]["max"]["value"])


def test_a_specimen_without_density_has_no_waves():
    bare = dataclasses.replace(COPPER, density=None)
    found = summarise(bare)
    assert found["density_kg_m3"] is found["debye_speed_km_s"] is None
    for key in ("fast_km_s", "middle_km_s", "slow_km_s"):
        assert found["extremes"][key] == {"min": None, "max": None}
    assert found["extremes"]["young_gpa"]["min"] is not None


def test_uncertainties_reach_the_verdict():
    std = as_matrix(np.full((6, 6), 0.3))
    known = dataclasses.replace(COPPER, stiffness_std=std)
    assert "47.00 ± 0.42 GPa" in summarise(known)["verdict"]  # √2 × 0.3
    known = dataclasses.replace(known, covariance=as_matrix(np.zeros((21, 21))))
    assert "softest strain 47.0 GPa" in summarise(known)["verdict"]


def test_a_summary_can_be_cancelled():
    with pytest.raises(Cancelled):
        summarise(COPPER, Ticker(is_cancelled=lambda: True))


# --- rotate ---------------------------------------------------------------------------------


def test_the_at_cut_of_quartz_as_printed():
    # Tiersten 1969, Linear Piezoelectric Plate Vibrations (from memory): the AT cut at 35.25°
    # along X, Y' (thickness), Z'. C56 is printed 2.53 where 2.536 is exact.
    printed = {
        "11": 86.74, "22": 129.77, "33": 102.83, "44": 38.61, "55": 68.81, "66": 29.01,
        "12": -8.25, "13": 27.15, "14": -3.66, "23": -7.42, "24": 5.70, "34": 9.92, "56": 2.53,
    }  # fmt: skip
    # Part X, Y, Z of a cut are length, width, thickness: the turn makes Y' of the thickness.
    found = rotate(QUARTZ, OrientationChoice("(YXl) 35.25 turn 90 0 0"), OUR_ROWS, False)
    table = np.array(found["stiffness_gpa"])
    for name, value in printed.items():
        assert table[int(name[0]) - 1, int(name[1]) - 1] == pytest.approx(value, abs=0.0061)
    np.testing.assert_allclose(
        np.array(found["rotation"])[1], [0, 0.81664, 0.57715], atol=6e-6
    )  # Y' by the rule of IEEE Std 176


def test_rows_are_listed_as_asked():
    text = "11 22 33 12 13 23"
    listed = rotate(ALBITE, AS_IT_IS, parse_rows(text), False)
    ours = rotate(ALBITE, AS_IT_IS, OUR_ROWS, False)
    assert listed["rows"] == text.split()
    order = [0, 1, 2, 5, 4, 3]
    for key in ("stiffness_gpa", "compliance_per_gpa"):
        expected = np.array(ours[key])[np.ix_(order, order)]
        np.testing.assert_array_equal(np.array(listed[key]), expected)
    np.testing.assert_allclose(
        np.array(listed["stiffness_gpa"]) @ np.array(listed["compliance_per_gpa"]),
        np.eye(6), atol=1e-12)  # fmt: skip
    assert "engineering" not in ours


def test_engineering_constants_have_the_keys_that_are_promised():
    found = strict(rotate(ALBITE, AS_IT_IS, OUR_ROWS, True))["engineering"]
    assert set(found) == {"young_gpa", "poisson", "shear_gpa", "coupling"}
    assert list(found["shear_gpa"]) == ["23", "13", "12"]
    assert [found["poisson"][k][k] for k in range(3)] == [None] * 3
    # ν12/E1 = ν21/E2: loaded first, responding second.
    assert found["poisson"][0][1] / found["young_gpa"][0] == pytest.approx(
        found["poisson"][1][0] / found["young_gpa"][1]
    )
    S = np.linalg.inv(np.array(ALBITE.stiffness))
    assert found["poisson"][0][1] == pytest.approx(-S[1, 0] / S[0, 0])
    assert found["coupling"]["23,1"] == pytest.approx(S[3, 0] / S[0, 0])


# --- compare --------------------------------------------------------------------------------


def test_two_orientations_of_one_crystal():
    turned = OrientationChoice("axis [0 0 1] 15")
    found = strict(compare(COPPER, AS_IT_IS, COPPER, turned))
    assert set(found) == {"a", "b", "misorientation_deg", "misorientation_by_symmetry_deg",
                          "rows"}  # fmt: skip
    assert found["misorientation_deg"] == pytest.approx(15)
    assert found["b"]["orientation"] == "axis [0 0 1] 15"
    rows = {row["key"]: row for row in found["rows"]}
    assert rows["young_Z_gpa"]["difference"] == pytest.approx(0, abs=1e-9)
    # Cubic, in the (001) plane: 1/E = S11 − 2 (S11 − S12 − S44/2) c² s².
    S = np.linalg.inv(np.array(COPPER.stiffness))
    c2s2 = (math.sin(math.radians(30)) / 2) ** 2
    softer = S[0, 0] - 2 * (S[0, 0] - S[0, 1] - S[3, 3] / 2) * c2s2
    assert rows["young_X_gpa"]["b"] == pytest.approx(1 / softer)
    assert rows["young_X_gpa"]["difference"] == pytest.approx(1 / softer - 1 / S[0, 0])


def test_small_turns_are_part_of_what_is_compared():
    turned = OrientationChoice("identity", (0.0, 0.0, 15.0))
    found = compare(COPPER, AS_IT_IS, COPPER, turned)
    assert found["misorientation_deg"] == pytest.approx(15)
    assert found["b"]["orientation"] == "identity turn 0 0 15"


def test_two_crystals_of_which_one_has_no_density():
    bare = dataclasses.replace(COPPER, name="bare", density=None)
    for first, second, missing in ((bare, COPPER, "a"), (COPPER, bare, "b")):
        rows = {r["key"]: r for r in compare(first, AS_IT_IS, second, AS_IT_IS)["rows"]}
        waves = rows["speed_X_fastest_km_s"]
        assert waves[missing] is waves["difference"] is None
        assert waves["b" if missing == "a" else "a"] > 0
        assert rows["young_X_gpa"]["difference"] == 0


# --- what cannot be read --------------------------------------------------------------------


def test_what_cannot_be_read_is_refused():
    bare = dataclasses.replace(ALBITE, cell=None)
    with pytest.raises(InputError, match="Indices need the unit cell"):
        along(bare, "[1 1 0]")
    assert along(bare, "1,0,0")["young_gpa"] > 0
    with pytest.raises(InputError, match="is not a direction"):
        along(ALBITE, "up")
    with pytest.raises(InputError, match="is not an orientation"):
        rotate(ALBITE, OrientationChoice("sideways"), OUR_ROWS, False)


def test_a_misorientation_by_the_crystals_own_symmetry():
    turned = OrientationChoice("bunge 100 0 0")
    found = compare(COPPER, AS_IT_IS, COPPER, turned)
    assert found["misorientation_deg"] == pytest.approx(100)
    assert found["misorientation_by_symmetry_deg"] == pytest.approx(10)  # 90° bring a cube back
    assert compare(COPPER, AS_IT_IS, GLASS, turned)["misorientation_by_symmetry_deg"] is None
    assert compare(GLASS, AS_IT_IS, GLASS, turned)["misorientation_by_symmetry_deg"] == 0.0
    free = dataclasses.replace(COPPER, crystal_class="triclinic")
    found = compare(free, AS_IT_IS, free, turned)
    assert found["misorientation_by_symmetry_deg"] == pytest.approx(100)


def test_impossible_magnitudes_are_noted():
    light = dataclasses.replace(COPPER, density=8.96)
    notes = summarise(light)["notes"]
    assert any("in g/cm³ it would be 8960 kg/m³" in note for note in notes)
    assert summarise(dataclasses.replace(COPPER, density=8960.0))["notes"] == []
    assert summarise(dataclasses.replace(COPPER, density=None))["notes"] == []
