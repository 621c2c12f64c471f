"""Engineering constants of a part against print, closed forms and Hooke's law itself."""

import numpy as np
import pytest

from core.directional.medium import Medium
from core.study.part import engineering_constants, part_table
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, orthorhombic, random_rotation, random_stiffness, rotated

# Hopcroft, Nix & Kenny 2010, J. MEMS 19(2), 229-238: constants of silicon, GPa, and the
# summary table of a (100) wafer with its flat along ⟨110⟩.
SILICON = cubic(165.7, 63.9, 79.6)
WAFER = np.array([[1, 1, 0], [-1, 1, 0], [0, 0, np.sqrt(2)]]) / np.sqrt(2)


def test_silicon_wafer_with_its_flat_along_110():
    found = engineering_constants(Stiffness.from_voigt(SILICON).rotate(WAFER))
    np.testing.assert_allclose(found.young, [169, 169, 130], atol=0.5)  # printed
    np.testing.assert_allclose(found.shear, [79.6, 79.6, 50.9], atol=0.05)  # from memory
    assert found.poisson[0, 2] == pytest.approx(0.36, abs=0.005)  # from memory
    assert found.poisson[2, 0] == pytest.approx(0.28, abs=0.005)  # from memory
    # Printed is 0.064, from compliances rounded to three digits (next test); the stiffnesses
    # give 0.0622 (a separate calculation on full fourth-rank tensors).
    assert found.poisson[0, 1] == pytest.approx(0.0622, abs=5e-5)


def test_silicon_from_rounded_compliances_gives_the_printed_poisson_ratio():
    # Ibid.: s11, s12, s44 = 7.68, −2.14, 12.6 in 1/TPa give ν = 0.064.
    compliance = np.diag([7.68 + 2.14] * 3 + [12.6] * 3)
    compliance[:3, :3] -= 2.14
    stiffness = Stiffness.from_compliance(compliance * 1e-3).rotate(WAFER)
    assert engineering_constants(stiffness).poisson[0, 1] == pytest.approx(0.064, abs=5e-4)


@pytest.mark.parametrize("degrees", [10.0, 30.0, 45.0, 80.0])
def test_a_lamina_off_its_axes_couples_as_in_the_textbook(degrees):
    # Jones 1975, Mechanics of Composite Materials, section 2.6 (from memory): η_xy,x = S̄16/S̄11
    # of an orthotropic sheet whose axis 1 lies at +θ from x. Constants are invented.
    table = orthorhombic(150.0, 12.0, 11.0, 5.0, 4.0, 4.5, 3.8, 5.1, 6.2)
    S = np.linalg.inv(table)
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    S11 = S[0, 0] * c**4 + (2 * S[0, 1] + S[5, 5]) * s**2 * c**2 + S[1, 1] * s**4
    S16 = (2 * S[0, 0] - 2 * S[0, 1] - S[5, 5]) * s * c**3 - (
        2 * S[1, 1] - 2 * S[0, 1] - S[5, 5]
    ) * s**3 * c
    rows = np.array([[c, -s, 0], [s, c, 0], [0, 0, 1]])  # x, y, z along 1, 2, 3
    found = engineering_constants(Stiffness.from_voigt(table).rotate(rows))
    assert found.young[0] == pytest.approx(1 / S11, rel=1e-12)
    assert found.coupling["12,1"] == pytest.approx(S16 / S11, rel=1e-10)


def test_every_coefficient_is_the_strain_that_one_stress_causes():
    names = ["1", "2", "3", "23", "13", "12"]
    table = random_stiffness(np.random.default_rng(7))
    found = engineering_constants(Stiffness.from_voigt(table))
    for column in range(6):
        stress = np.eye(6)[column]
        strain = np.linalg.solve(table, stress)  # engineering shears
        modulus = [*found.young, *found.shear][column]
        assert modulus == pytest.approx(1 / strain[column], rel=1e-10)
        for row in range(6):
            ratio = strain[row] / strain[column]
            if row < 3 and column < 3 and row != column:
                assert found.poisson[column, row] == pytest.approx(-ratio, rel=1e-9, abs=1e-12)
            elif row != column:
                name = f"{names[row]},{names[column]}"
                assert found.coupling[name] == pytest.approx(ratio, rel=1e-9, abs=1e-12)
    assert len(found.coupling) == 36 - 6 - 6  # neither itself nor Poisson's ratios
    assert np.isnan(np.diag(found.poisson)).all()


def test_what_does_not_resist_has_no_modulus():
    unstable = np.linalg.inv(np.diag([1.0, -2.0, 3.0, 1.0, 1.0, -1.0]))
    found = engineering_constants(Stiffness.from_voigt(unstable))
    np.testing.assert_allclose(found.young, [1.0, np.nan, 1 / 3])
    np.testing.assert_allclose(found.shear, [1.0, 1.0, np.nan])
    singular = engineering_constants(Stiffness.from_voigt(np.diag([1.0, 1, 1, 1, 1, 0])))
    for values in (singular.young, singular.shear, singular.poisson):
        assert np.isnan(values).all()


def rows_of(table, density=None):
    return {row.key: row for row in part_table(Medium(Stiffness.from_voigt(table), density))}


def test_the_part_table_of_silicon_along_its_cube_axes():
    rows = rows_of(SILICON, 2330.0)
    assert rows["young_X_gpa"].value == pytest.approx(130, abs=0.5)  # Hopcroft, as above
    assert rows["shear_23_gpa"].label == "G in YZ"
    assert rows["shear_23_gpa"].value == pytest.approx(79.6)
    # Pure modes along a cube axis: ρv² = C11 and C44, and no ray leaves its normal.
    for axis in "XYZ":
        fastest = rows[f"speed_{axis}_fastest_km_s"].value
        assert fastest == pytest.approx(np.sqrt(165.7e9 / 2330) / 1e3, rel=1e-12)
        for sheet in ("middle", "slowest"):
            value = rows[f"speed_{axis}_{sheet}_km_s"].value
            assert value == pytest.approx(np.sqrt(79.6e9 / 2330) / 1e3, rel=1e-12)
        assert rows[f"power_flow_{axis}_fastest_deg"].value == pytest.approx(0, abs=1e-6)
    assert all(abs(row.value) < 1e-12 for row in rows.values() if row.group == "coupling")


def test_waves_are_in_the_part_table_only_with_a_density():
    rng = np.random.default_rng(3)
    table = rotated(cubic(131.0, 97.4, 86.2), random_rotation(rng))
    bare, full = rows_of(table), rows_of(table, 8120.0)
    assert {row.group for row in bare.values()} == {"stiffness", "coupling"}
    assert {row.group for row in full.values()} == {"stiffness", "coupling", "waves"}
    assert list(full)[: len(bare)] == list(bare)
    assert len(full) - len(bare) == 2 * 3 * 3
    assert {row.unit for row in full.values()} == {"GPa", "", "km/s", "°"}
