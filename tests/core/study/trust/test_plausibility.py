"""Plausibility: sound crystals draw no remark, and each way of going wrong draws its own."""

import re

import numpy as np
import pytest

from core.study.trust.plausibility import (
    average_notes,
    density_notes,
    plausibility_notes,
    row_notes,
    speed_notes,
    trigonal_notes,
    unit_notes,
)
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class
from tests import materials

# Constants and densities of common solids, GPa and kg/m³ (handbook values, from memory).
SOLIDS = {
    "copper": (materials.cubic(168.4, 121.4, 75.4), 8960, "cubic"),
    "diamond": (materials.cubic(1079, 124, 578), 3515, "cubic"),
    "lead": (materials.cubic(49.5, 42.3, 14.9), 11340, "cubic"),
    "rock salt": (materials.cubic(49.1, 12.8, 12.8), 2165, "cubic"),
    "tungsten": (materials.cubic(522, 204, 161), 19250, "cubic"),
    "ice": (materials.hexagonal(13.9, 7.1, 5.8, 15.0, 3.0), 917, "hexagonal"),
    "zinc": (materials.hexagonal(165, 31.1, 50, 61.8, 39.6), 7140, "hexagonal"),
    "paratellurite": (materials.tetragonal(55.7, 51.2, 21.8, 105.8, 26.5, 65.9), 5990,
                      "tetragonal_6"),
}
QUARTZ = materials.trigonal(86.8, 7.0, 11.9, -18.0, 107.2, 58.2)


def stiffness(table):
    return Stiffness.from_voigt(table)


@pytest.mark.parametrize("name", SOLIDS)
def test_common_solids_draw_no_remark(name):
    table, density, key = SOLIDS[name]
    assert plausibility_notes(stiffness(table), density, crystal_class(key)) == ()


def test_a_missing_density_is_the_only_remark_on_copper_without_one():
    notes = plausibility_notes(stiffness(SOLIDS["copper"][0]), None, crystal_class("cubic"))
    assert len(notes) == 1
    assert "No density" in notes[0]


@pytest.mark.parametrize("density", [1e-9, 1e9, 60.0, 24_000.0])
def test_densities_of_no_solid(density):
    (note,) = density_notes(density)
    assert "no known solid" in note
    assert "between 80 and 23,000" in note


def test_a_density_in_grams_per_cubic_centimetre_is_recognised():
    (note,) = density_notes(2.65)
    assert "in g/cm³ it would be 2650 kg/m³" in note


@pytest.mark.parametrize(
    ("density", "word"), [(5.0, "faster than 25 km/s"), (1e9, "as slowly as")]
)
def test_speeds_of_no_solid(density, word):
    """Copper is stiffest along [1 1 1]: (C11 + 2C12 + 4C44)/3 = 237.6 GPa."""
    notes = speed_notes(stiffness(SOLIDS["copper"][0]), density)
    assert any(word in note for note in notes)
    assert len(notes) == 1
    if density == 5.0:
        said = float(re.search(r"up to ([\d.]+) km/s", notes[0])[1])
        assert said == pytest.approx(np.sqrt(237.6e9 / 5) / 1e3, rel=0.01)


def test_speeds_without_a_density_or_a_stable_crystal_raise_nothing():
    assert speed_notes(stiffness(SOLIDS["copper"][0]), None) == ()
    assert speed_notes(stiffness(-SOLIDS["copper"][0]), 8960) == ()
    assert plausibility_notes(stiffness(np.zeros((6, 6))), 8960, crystal_class("cubic"))


def test_averages_of_no_solid():
    assert average_notes(stiffness(SOLIDS["diamond"][0])) == ()
    hard = average_notes(stiffness(10 * SOLIDS["tungsten"][0]))
    assert any("bulk" in note for note in hard)
    assert any("shear" in note for note in hard)
    soft = average_notes(stiffness(SOLIDS["copper"][0] / 1e4))
    assert len(soft) == 2


def test_an_average_poisson_ratio_out_of_bounds():
    """C11 < C12 by enough: Voigt's G is negative, and with it ν above 1/2."""
    (note,) = [note for note in average_notes(stiffness(materials.cubic(100, 140, 5)))
               if "Poisson" in note]
    assert "outside −1 to 0.5" in note


@pytest.mark.parametrize("name", ["copper", "tungsten", "zinc", "diamond"])
def test_values_ten_times_too_large_are_suspected(name):
    table, density, _ = SOLIDS[name]
    (note,) = unit_notes(stiffness(10 * table), density)
    assert "ten times smaller" in note
    assert "kbar" in note


@pytest.mark.parametrize("name", ["copper", "tungsten", "zinc", "rock salt"])
def test_values_ten_times_too_small_are_suspected(name):
    table, density, _ = SOLIDS[name]
    (note,) = unit_notes(stiffness(table / 10), density)
    assert "ten times larger" in note
    assert "10¹¹ dyn/cm²" in note


def test_values_ten_times_off_without_a_density():
    (note,) = unit_notes(stiffness(10 * SOLIDS["copper"][0]), None)
    assert "ten times smaller it would be 137 GPa" in note
    assert unit_notes(stiffness(SOLIDS["copper"][0]), None) == ()


@pytest.mark.parametrize("order", [(0, 1, 2, 5, 4, 3), (0, 1, 2, 4, 3, 5), (0, 1, 2, 5, 3, 4)])
def test_shear_rows_in_another_order(order):
    """The table as it looks when a foreign order is taken for ours."""
    mixed = QUARTZ[np.ix_(order, order)]
    names = {3: "23", 4: "13", 5: "12"}
    listed = " ".join(names[k] for k in order[3:])
    for claimed in ("trigonal_6", "triclinic"):
        (note,) = row_notes(stiffness(mixed), crystal_class(claimed))
        assert "trigonal" in note
        assert "exactly" in note
        assert f"in the order {listed} instead" in note


def test_shear_rows_in_our_order_draw_no_remark():
    for table, _, key in SOLIDS.values():
        assert row_notes(stiffness(table), crystal_class(key)) == ()
        assert row_notes(stiffness(table), crystal_class("triclinic")) == ()
    random = materials.random_physical(np.random.default_rng(1))
    assert row_notes(stiffness(random), crystal_class("triclinic")) == ()


def test_the_sign_of_c14_is_recalled_for_trigonal_crystals():
    (note,) = trigonal_notes(stiffness(QUARTZ), crystal_class("trigonal_6"), "z along c")
    assert "C14 is −18" in note
    assert "turned 60° about z it is 18" in note
    assert "z along c" in note
    turned = stiffness(QUARTZ).rotate(
        np.array([[0.5, np.sqrt(0.75), 0], [-np.sqrt(0.75), 0.5, 0], [0, 0, 1]]))
    assert turned.voigt[0, 3] == pytest.approx(18.0)
    assert trigonal_notes(stiffness(QUARTZ), crystal_class("triclinic")) == ()
    assert trigonal_notes(stiffness(SOLIDS["zinc"][0]), crystal_class("trigonal_6")) == ()
