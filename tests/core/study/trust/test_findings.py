"""Everything about the trust in a table, gathered: against tables whose answer is known."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from core.study.trust.findings import examine
from core.study.uncertainty.changes import independent_covariance
from core.task import Cancelled, Ticker
from core.tensor.notation import tensor_to_voigt
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS, crystal_class
from tests.materials import cubic

TRICLINIC = crystal_class("triclinic")


def turned(table, degrees, axis=(0.6, 0.0, 0.8)):
    turn = Rotation.from_rotvec(np.radians(degrees) * np.array(axis)).as_matrix()
    full = Stiffness.from_voigt(table).tensor
    return tensor_to_voigt(
        np.einsum("ia,jb,kc,ld,abcd->ijkl", turn, turn, turn, turn, full)
    ), turn


def test_a_turned_cubic_table_is_found_to_be_cubic():
    table, turn = turned(cubic(131.0, 97.4, 86.2), 25.0)
    found = examine(Stiffness.from_voigt(table), 8000.0, TRICLINIC)
    assert [row.claimed.key for row in found.entered] == list(CLASS_KEYS)
    assert [row.class_key for row in found.hidden] == list(CLASS_KEYS)
    hidden = found.hidden_of("cubic")
    assert hidden.distance_percent < 1e-6
    assert hidden.turn_deg == pytest.approx(25.0, abs=1e-6)
    axes = np.abs(hidden.rotation @ turn)
    assert np.abs(np.sort(axes, axis=1) - [0.0, 0.0, 1.0]).max() < 1e-7
    assert "cubic once turned 25.0°" in found.symmetry.sentence
    # ‖C − P(C)‖/‖C‖ about the axes as entered, from the average over the cube's rotations.
    rotations = Rotation.create_group("O").as_matrix()
    full = Stiffness.from_voigt(table).tensor
    mean = np.mean([np.einsum("ia,jb,kc,ld,abcd->ijkl", R, R, R, R, full)
                    for R in rotations], axis=0)  # fmt: skip
    expected = 100 * np.linalg.norm(full - mean) / np.linalg.norm(full)
    assert found.entered_of("cubic").percent == pytest.approx(expected, rel=1e-9)


def test_without_uncertainties_nothing_is_said_of_chance_or_support():
    found = examine(Stiffness.from_voigt(cubic(131.0, 97.4, 86.2)), None, TRICLINIC)
    assert (found.supports, found.chance) == ((), None)
    assert any("No density" in note for note in found.notes)


def test_noise_of_the_stated_size_leaves_the_cubic_class_best_supported():
    sigma = np.full((6, 6), 0.5)
    table, _ = turned(cubic(131.0, 97.4, 86.2), 40.0)
    noise = np.triu(np.random.default_rng(3).normal(0.0, 0.5, (6, 6)))
    noisy = table + noise + np.triu(noise, 1).T
    covariance = independent_covariance(sigma, TRICLINIC)
    found = examine(Stiffness.from_voigt(noisy), 8000.0, TRICLINIC, covariance)
    assert found.supports[0].class_key == "cubic"
    assert found.hidden_of("cubic").axis_uncertainty_deg == pytest.approx(0.3, abs=0.3)
    assert found.chance is not None
    assert found.chance.probability == 1.0


def test_a_crystal_near_instability_has_a_chance_between_none_and_all():
    table = cubic(100.0, 99.0, 50.0)  # C11 − C12 = 1
    covariance = independent_covariance(np.full((6, 6), 1.0), crystal_class("cubic"))
    found = examine(Stiffness.from_voigt(table), 8000.0, crystal_class("cubic"), covariance)
    # C11 − C12 is normal with mean 1 and standard deviation √2: Φ(1/√2) = 0.760.
    assert found.chance.probability == pytest.approx(0.760, abs=0.02)


@pytest.mark.parametrize(
    "table", [np.zeros((6, 6)), np.diag([1.0, 1.0, 1.0, 0.0, 0.0, 0.0]), -np.eye(6)]
)
def test_no_table_is_too_odd_to_be_examined(table):
    found = examine(Stiffness.from_voigt(table), None, TRICLINIC)
    assert np.isfinite([axes.distance_percent for axes in found.hidden]).all()


def test_it_can_be_cancelled():
    with pytest.raises(Cancelled):
        examine(Stiffness.from_voigt(cubic(131.0, 97.4, 86.2)), None, TRICLINIC,
                ticker=Ticker(is_cancelled=lambda: True))  # fmt: skip
