"""The sentence about symmetry: each claim in it is checked against how the table was made."""

import numpy as np
import pytest

from core.study.trust.symmetry_verdict import (
    claim_sentence,
    entered_distances,
    symmetry_sentence,
    symmetry_verdict,
    tolerance_percent,
    vector_text,
)
from core.tensor.hidden_axes import nearest_classes
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS, crystal_class, distance
from tests import materials

OLIVINE = materials.orthorhombic(320.5, 196.5, 233.5, 68.1, 71.6, 76.8, 64, 77, 78.7)
KELVIN = np.sqrt(np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2]))


def turn_about(axis, degrees):
    """Return the frame whose axes are the old ones turned about a unit axis."""
    x, y, z = axis
    cross = np.array([[0, -z, y], [z, 0, -x], [-y, x, 0]])
    t = np.radians(degrees)
    return (np.eye(3) + np.sin(t) * cross + (1 - np.cos(t)) * cross @ cross).T


def verdict(table, std=None):
    stiffness = Stiffness.from_voigt((table + table.T) / 2)
    return symmetry_verdict(stiffness, nearest_classes(stiffness, std), std)


def test_a_turned_crystal_is_told_how_to_turn_back():
    """Entered in axes turned by −31.2° about n, it is orthorhombic once turned +31.2°."""
    n = np.array([0.1, 0.2, 0.97])
    n /= np.linalg.norm(n)
    table = materials.rotated(OLIVINE, turn_about(n, -31.2))
    found = verdict(table)
    assert found.sentence == (
        "triclinic as entered; orthorhombic once turned 31.2° about x, y, z = 0.10, 0.20, 0.97")
    back = materials.rotated(table, found.hidden.rotation)
    np.testing.assert_allclose(back, OLIVINE, rtol=0, atol=1e-5)


def test_a_distance_is_said_where_the_fit_is_not_exact():
    rng = np.random.default_rng(5)
    noise = rng.standard_normal((6, 6))
    noise = noise + noise.T
    noise *= 0.008 * np.linalg.norm(OLIVINE * KELVIN) / np.linalg.norm(noise)
    table = materials.rotated(OLIVINE, turn_about(np.array([0.6, 0, 0.8]), 25)) + noise / KELVIN
    found = verdict(table)
    assert found.as_entered.key == "triclinic"
    assert found.hidden.class_key == "orthorhombic"
    assert "orthorhombic within 0." in found.sentence
    assert "once turned 2" in found.sentence


@pytest.mark.parametrize(
    ("table", "sentence"),
    [
        (OLIVINE, "orthorhombic as entered"),
        (materials.cubic(168.4, 121.4, 75.4), "cubic as entered"),
        (materials.isotropic(100, 50), "isotropic as entered"),
        (materials.hexagonal(165, 31.1, 50, 61.8, 39.6), "hexagonal as entered"),
    ],
)
def test_a_crystal_in_its_own_axes(table, sentence):
    found = verdict(table)
    assert found.sentence == sentence
    assert found.hidden is None


def test_a_higher_symmetry_about_other_axes_is_seen_from_a_lower_one():
    """A hexagonal crystal with its axis along x is orthorhombic as entered."""
    sideways = np.array([[0.0, 0, 1], [0, 1, 0], [-1, 0, 0]])
    table = materials.rotated(materials.hexagonal(165, 31.1, 50, 61.8, 39.6), sideways)
    found = verdict(table)
    assert found.as_entered.key == "orthorhombic"
    assert found.hidden.class_key == "hexagonal"
    assert found.hidden.turn_deg == pytest.approx(90)
    assert found.sentence.startswith("orthorhombic as entered; hexagonal once turned 90.0°")


def test_a_triclinic_crystal_is_said_to_have_no_better_axes():
    table = materials.random_physical(np.random.default_rng(3), 0.5)
    found = verdict(table)
    assert found.hidden is None
    # Monoclinic is contained in every higher class, so none can be nearer.
    searched = nearest_classes(Stiffness.from_voigt(table))
    off = next(axes.distance_percent for axes in searched if axes.class_key == "monoclinic")
    assert found.sentence == f"triclinic; nearest higher class: monoclinic, {off:.1f} % away"
    std = np.full((6, 6), 0.02 * np.linalg.norm(table * KELVIN) / 9)  # √(9 + 36 + 36) = 9
    assert verdict(table, std).sentence == f"{found.sentence} (uncertainty 2.0 %)"


def test_a_small_turn_within_a_class_is_said_when_it_matters():
    """A misalignment of 1° leaves 0.8 % and is put right by turning; 0.1° is not mentioned."""
    x = np.array([1.0, 0, 0])
    tilted = verdict(materials.rotated(OLIVINE, turn_about(x, 1.5)))
    assert tilted.as_entered.key == "orthorhombic"
    assert tilted.hidden is not None
    assert tilted.hidden.turn_deg == pytest.approx(1.5, abs=1e-6)
    assert verdict(materials.rotated(OLIVINE, turn_about(x, 0.1))).hidden is None


def test_uncertainties_set_the_tolerance():
    """√(Σ w² σ²)/‖C‖: 9 cells of w² = 1, 18 of 2 and 9 of 4."""
    stiffness = Stiffness.from_voigt(OLIVINE)
    size = np.linalg.norm(OLIVINE * KELVIN)
    assert tolerance_percent(stiffness) == 1
    assert tolerance_percent(stiffness, np.full((6, 6), 0.3)) == pytest.approx(
        100 * 0.3 * np.sqrt(9 + 36 + 36) / size)
    assert tolerance_percent(stiffness, np.full((6, 6), 100.0)) == 1
    assert tolerance_percent(stiffness, np.full((6, 6), 1e-6)) == 0.1
    assert tolerance_percent(stiffness, np.zeros((6, 6))) == 1


def test_a_small_uncertainty_speaks_against_a_class_that_is_only_near():
    table = OLIVINE.copy()
    table[0, 3] = table[3, 0] = 1.5
    stiffness = Stiffness.from_voigt(table)
    std = np.full((6, 6), 0.05)
    loose, strict = verdict(table), verdict(table, std)
    assert loose.as_entered.key == "orthorhombic"
    assert strict.as_entered.key == "monoclinic"
    assert strict.as_entered.unique_axis == "x"
    assert symmetry_sentence(stiffness, nearest_classes(stiffness, std), std) == strict.sentence


def test_distances_as_entered():
    rows = entered_distances(Stiffness.from_voigt(OLIVINE))
    assert tuple(cls.key for cls, *_ in rows) == CLASS_KEYS
    off = {cls.key: percent for cls, percent, _ in rows}
    assert off["orthorhombic"] < 1e-12
    # ‖C − C_iso‖/‖C‖ = 18.40 %: the check 15-OLI, 100 − 81.60.
    assert off["isotropic"] == pytest.approx(18.404, abs=1e-3)


def test_vector_text():
    assert vector_text((0.1, 0.2, 0.97)) == "0.10, 0.20, 0.97"
    assert vector_text((-0.001, -1.0, 0.0)) == "0.00, −1.00, 0.00"


def test_large_errors_do_not_give_a_table_the_name_of_a_class_far_away():
    """Olivine is 18 % from isotropic; with errors of a third it is still not called that."""
    found = verdict(OLIVINE, np.full((6, 6), 20.0))
    assert found.sentence == "orthorhombic as entered"


@pytest.mark.parametrize(
    ("key", "axis", "words"),
    [
        ("cubic", "", "cubic as entered"),
        ("triclinic", "", "claimed triclinic; has the form of cubic"),
        ("trigonal_6", "", "claimed trigonal with 6 constants, 9.1 % away in these axes; "
         "has the form of cubic"),
        ("monoclinic", "y", "claimed monoclinic; has the form of cubic"),
    ],
)
def test_claim_and_form_are_one_fact(key, axis, words):
    table = materials.cubic(168.4, 121.4, 75.4)
    claimed = crystal_class(key, axis) if axis else crystal_class(key)
    off = distance(table, claimed)
    assert claim_sentence(claimed, off, verdict(table)) == words.replace(
        "9.1", f"{100 * off:.1f}" if 100 * off < 10 else f"{100 * off:.0f}")


def test_a_claim_that_other_axes_would_meet_says_both_in_one_breath():
    axis = np.array([0.1, 0.2, 0.97])
    table = materials.rotated(OLIVINE, turn_about(axis / np.linalg.norm(axis), -31.2))
    claimed = crystal_class("orthorhombic")
    off = distance(table, claimed)
    assert claim_sentence(claimed, off, verdict(table)) == (
        f"claimed orthorhombic, {100 * off:.{0 if off >= 0.1 else 1}f} % away in these axes; "
        "orthorhombic once turned 31.2° about x, y, z = 0.10, 0.20, 0.97")
