"""Nearest tables, shares of classes and key angles, against print and closed forms."""

import numpy as np
import pytest

from core.tensor.closest import CHAINS, closest, decompose, log_distance
from core.tensor.hidden_axes import hidden_axes
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class

COPPER = Stiffness.from_constants("cubic", {"11": 168.4, "12": 121.4, "44": 75.4})

# Olivine, GPa, axes a, b, c (constants of the check; method: Browaeys & Chevrot 2004,
# Geophys. J. Int. 159, 667).
OLIVINE = Stiffness.from_constants("orthorhombic", {
    "11": 320.5, "12": 68.1, "13": 71.6, "22": 196.5, "23": 76.8, "33": 233.5,
    "44": 64.0, "55": 77.0, "66": 78.7,
})
Z_ALONG_A = np.array([[0.0, 1, 0], [0, 0, 1], [1, 0, 0]])  # new z = a, x = b, y = c

# Phenacite Be2SiO4, class −3 (Yeganeh-Haeri & Weidner 1989, Phys. Chem. Minerals 16, 360).
PHENACITE = Stiffness.from_constants("trigonal_7", {
    "11": 341.9, "12": 148.0, "13": 136.0, "14": 0.1, "15": 3.5, "33": 391.0, "44": 91.4,
})

# SrMoO4, class 4/m (ultrasound velocities, J. Phys. C about 1972).
SRMOO4 = Stiffness.from_constants("tetragonal_7", {
    "11": 119, "12": 62, "13": 48, "16": 12, "33": 104, "44": 34.9, "66": 42,
})


@pytest.mark.parametrize(
    ("metric", "shear"),
    [("stiffness", 54.64), ("compliance", 40.034), ("logarithm", 47.2988)],
)
def test_closest_isotropic_tables_of_copper(metric, shear):
    """Moakher & Norris 2006, J. Elasticity 85, 215: G is Voigt's, Reuss's, (C'² C44³)^(1/5)."""
    near = closest(COPPER, crystal_class("isotropic"), metric).voigt
    assert near[3, 3] == pytest.approx(shear, abs=1e-3)
    primed, c44 = (168.4 - 121.4) / 2, 75.4
    closed = {
        "stiffness": (2 * primed + 3 * c44) / 5,
        "compliance": 5 / (2 / primed + 3 / c44),
        "logarithm": (primed**2 * c44**3) ** 0.2,
    }[metric]
    assert near[3, 3] == pytest.approx(closed, rel=1e-12)
    bulk = (near[0, 0] + 2 * near[0, 1]) / 3
    assert bulk == pytest.approx((168.4 + 2 * 121.4) / 3, rel=1e-12)


def test_log_euclidean_distance_of_copper_to_isotropy():
    """Two of five shear eigenstiffnesses are 2C', three 2C44: √(2 · 3/5) ln(C44/C')."""
    expected = np.sqrt(1.2) * np.log(75.4 / 23.5)
    found = log_distance(COPPER, crystal_class("isotropic"))
    assert found == pytest.approx(expected, rel=1e-12)


def test_norm_decomposition_of_olivine():
    """Recomputed from the definition of Browaeys & Chevrot 2004, symmetry axis along a."""
    shares = {share.class_key: share for share in decompose(OLIVINE.rotate(Z_ALONG_A))}
    expected = {"isotropic": (81.60, 0.01), "hexagonal": (13.32, 0.01),
                "tetragonal_6": (0.178, 0.002), "orthorhombic": (4.905, 0.005)}  # fmt: skip
    for key, (percent, tolerance) in expected.items():
        assert shares[key].percent == pytest.approx(percent, abs=tolerance)
    assert shares["monoclinic"].percent == pytest.approx(0, abs=1e-9)
    for sums in ("percent", "energy_percent", "anisotropic_percent"):
        assert sum(getattr(s, sums) for s in shares.values()) == pytest.approx(100, abs=1e-9)


def test_the_parts_of_a_decomposition_are_those_of_the_closed_form():
    """The isotropic part has Voigt's moduli, and a Kelvin norm of 9K² + 20G²."""
    C = OLIVINE.voigt
    bulk = C[:3, :3].sum() / 9
    shear = (np.trace(C[:3, :3]) - C[:3, :3].sum() / 3 + 2 * np.trace(C[3:, 3:])) / 10
    weights = np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2])
    size = (weights * C**2).sum()
    energy = 100 * (9 * bulk**2 + 20 * shear**2) / size
    for chain in CHAINS:
        assert decompose(OLIVINE, chain)[0].energy_percent == pytest.approx(energy, rel=1e-12)


def angle_about_z(rotation):
    """Return by how much the x axis is turned about z, degrees; z must stay where it is."""
    assert abs(rotation[2, 2]) == pytest.approx(1, abs=1e-9)
    return np.degrees(np.arctan2(rotation[0, 1], rotation[0, 0]))


def test_key_angle_of_a_seven_constant_trigonal_crystal():
    """C14 + iC15 turns three times as fast as the axes: |C14'| = √(C14² + C15²), C15' = 0."""
    found = hidden_axes(PHENACITE, crystal_class("trigonal_6"))
    assert found.distance_percent < 1e-7
    key = np.degrees(np.arctan2(3.5, 0.1)) / 3
    off = (np.array([1, -1]) * angle_about_z(found.rotation) - key + 30) % 60 - 30
    assert np.abs(off).min() < 1e-6
    turned = PHENACITE.rotate(found.rotation).voigt
    assert abs(turned[0, 3]) == pytest.approx(np.hypot(0.1, 3.5), abs=1e-8)
    assert turned[0, 4] == pytest.approx(0, abs=1e-8)
    assert turned[5, 5] == pytest.approx((341.9 - 148.0) / 2, abs=1e-8)


def test_key_angle_of_a_seven_constant_tetragonal_crystal():
    """Derived in closed form: C16' = 0 at 29.839° + 45°n; there C11' 139.518, C66' 21.482."""
    found = hidden_axes(SRMOO4, crystal_class("tetragonal_6"))
    assert found.distance_percent < 1e-7
    off = (np.array([1, -1]) * angle_about_z(found.rotation) - 29.839 + 22.5) % 45 - 22.5
    assert np.abs(off).min() < 1e-3
    settings = [SRMOO4.rotate(found.rotation).voigt]
    half = np.sqrt(0.5)
    eighth = np.array([[half, half, 0], [-half, half, 0], [0, 0, 1]])
    settings.append(SRMOO4.rotate(eighth @ found.rotation).voigt)
    stiffer = max(settings, key=lambda table: table[0, 0])
    assert stiffer[0, 0] == pytest.approx(139.518, abs=2e-3)
    assert stiffer[5, 5] == pytest.approx(21.482, abs=2e-3)
    assert stiffer[0, 5] == pytest.approx(0, abs=1e-6)


def test_seven_constant_crystals_need_no_turn_in_their_own_class():
    for crystal, key in ((PHENACITE, "trigonal_7"), (SRMOO4, "tetragonal_7")):
        assert hidden_axes(crystal, crystal_class(key)).turn_deg == 0
