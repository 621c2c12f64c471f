"""Nearest tables of classes: what makes them nearest, and which class is simplest."""

import numpy as np
import pytest

from core.errors import InputError
from core.tensor.closest import CHAINS, closest, decompose, log_distance, simplest_class
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS, crystal_class, distance
from tests import materials

METRICS = ("stiffness", "compliance", "logarithm")


@pytest.mark.parametrize("key", CLASS_KEYS)
@pytest.mark.parametrize("metric", METRICS)
def test_the_nearest_table_has_the_class_and_keeps_members(key, metric):
    cls = crystal_class(key)
    crystal = Stiffness.from_voigt(materials.random_physical(np.random.default_rng(4)))
    near = closest(crystal, cls, metric)
    assert distance(near.voigt, cls) < 1e-12
    np.testing.assert_allclose(closest(near, cls, metric).voigt, near.voigt, rtol=0, atol=1e-9)


def test_the_logarithmic_mean_is_its_own_inverse():
    """Nearest by logarithm commutes with inversion; the other two do not."""
    crystal = Stiffness.from_voigt(materials.random_physical(np.random.default_rng(8), 0.5))
    cls = crystal_class("hexagonal")
    inverse = Stiffness.from_kelvin(np.linalg.inv(crystal.kelvin))
    there = closest(crystal, cls, "logarithm").kelvin
    back = np.linalg.inv(closest(inverse, cls, "logarithm").kelvin)
    np.testing.assert_allclose(there, back, rtol=1e-10, atol=1e-9)
    by_stiffness = closest(crystal, cls, "stiffness").kelvin
    assert np.abs(by_stiffness - np.linalg.inv(closest(inverse, cls).kelvin)).max() > 0.1


def test_log_distance_about_turned_axes():
    turn = materials.random_rotation(np.random.default_rng(3))
    member = materials.trigonal(86.8, 7.0, 11.9, -18.0, 107.2, 58.2)
    turned = Stiffness.from_voigt(materials.rotated(member, turn))
    cls = crystal_class("trigonal_6")
    assert log_distance(turned, cls) > 0.1
    assert log_distance(turned, cls, turn.T) < 1e-12


def test_unstable_crystals_have_only_the_nearest_stiffness():
    unstable = Stiffness.from_voigt(materials.cubic(100, 120, 50))
    isotropic = crystal_class("isotropic")
    assert closest(unstable, isotropic).voigt[3, 3] == pytest.approx((100 - 120 + 150) / 5)
    assert np.isnan(log_distance(unstable, isotropic))
    for metric in ("compliance", "logarithm"):
        with pytest.raises(InputError):
            closest(unstable, isotropic, metric)


@pytest.mark.parametrize("chain", CHAINS)
def test_shares_are_not_negative_and_sum_to_a_hundred(chain):
    crystal = Stiffness.from_voigt(materials.random_physical(np.random.default_rng(1)))
    shares = decompose(crystal, chain)
    assert min(share.percent for share in shares) >= 0
    assert sum(share.energy_percent for share in shares) == pytest.approx(100)
    assert sum(share.anisotropic_percent for share in shares) == pytest.approx(100)


def test_shares_of_isotropic_and_empty_tables():
    shares = decompose(Stiffness.from_voigt(materials.isotropic(100, 50)))
    assert shares[0].percent == pytest.approx(100)
    assert all(share.anisotropic_percent == 0 for share in shares)
    empty = decompose(Stiffness.from_voigt(np.zeros((6, 6))))
    assert all(share.percent == share.energy_percent == 0 for share in empty)


@pytest.mark.parametrize(
    ("table", "key"),
    [
        (materials.isotropic(100, 50), "isotropic"),
        (materials.cubic(168.4, 121.4, 75.4), "cubic"),
        (materials.hexagonal(165, 31.1, 50, 61.8, 39.6), "hexagonal"),
        (materials.trigonal(86.8, 7.0, 11.9, -18.0, 107.2, 58.2), "trigonal_6"),
        (materials.trigonal(86.8, 7.0, 11.9, -18.0, 107.2, 58.2, c15=4), "trigonal_7"),
        (materials.tetragonal(55.7, 51.2, 21.8, 105.8, 26.5, 65.9), "tetragonal_6"),
    ],
)
def test_simplest_class_about_the_given_axes(table, key):
    cls, off = simplest_class(table, 1e-6)
    assert cls.key == key
    assert off < 1e-12


def test_simplest_class_finds_the_axis_of_a_monoclinic_table():
    table = materials.orthorhombic(320.5, 196.5, 233.5, 68.1, 71.6, 76.8, 64, 77, 78.7)
    table[0, 3] = table[3, 0] = 20.0
    cls, _ = simplest_class(table, 1e-6)
    assert (cls.key, cls.unique_axis) == ("monoclinic", "x")
    assert simplest_class(table, 0.08)[0].key == "orthorhombic"
