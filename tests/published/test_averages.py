"""Averages, bounds and indices of anisotropy against print and closed forms.

"Separate calculation" marks values from an independent brute-force program on full
fourth-rank tensors, with no printed counterpart.
"""

import numpy as np
import pytest

from core.tensor.averages import anisotropy, averages, hashin_shtrikman
from core.tensor.notation import kelvin_to_stiffness
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class, distance, project

COPPER = Stiffness.from_constants("cubic", {"11": 168.4, "12": 121.4, "44": 75.4})

# Brown, Abramson & Angel 2006, Phys. Chem. Minerals 33, 256: low albite, GPa.
ALBITE = Stiffness.from_voigt([
    [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
    [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
    [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
    [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
    [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
    [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
])  # fmt: skip

# Abramson, Brown, Slutsky & Zaug 1997, J. Geophys. Res. 102, 12253: San Carlos olivine.
OLIVINE = Stiffness.from_constants("orthorhombic", {
    "11": 320.5, "12": 68.1, "13": 71.6, "22": 196.5, "23": 76.8, "33": 233.5,
    "44": 64.0, "55": 77.0, "66": 78.7,
})  # fmt: skip


def test_olivine_hashin_shtrikman():
    """K = 129.4 and G = 78 GPa, means of the bounds, in the abstract of the same paper."""
    bounds = hashin_shtrikman(OLIVINE)
    assert (bounds.bulk_low + bounds.bulk_high) / 2 == pytest.approx(129.4, abs=0.05)
    assert (bounds.shear_low + bounds.shear_high) / 2 == pytest.approx(78, abs=0.5)
    # Separate calculation.
    assert (bounds.bulk_low + bounds.bulk_high) / 2 == pytest.approx(129.3664, abs=1e-3)
    assert (bounds.shear_low + bounds.shear_high) / 2 == pytest.approx(77.9243, abs=1e-3)


def test_olivine_hill():
    """Separate calculation."""
    hill = averages(OLIVINE).hill
    assert hill.bulk == pytest.approx(129.44, abs=0.01)
    assert hill.shear == pytest.approx(78.01, abs=0.01)


def test_diopside_hill():
    """Sang, Vanpeteghem, Sinogeikin & Bass 2011, Am. Mineral. 96, 224: K 114.6, G 72.7 GPa."""
    diopside = Stiffness.from_constants("monoclinic", {
        "11": 229.0, "22": 179.0, "33": 242.5, "44": 78.9, "55": 68.1, "66": 78.2,
        "12": 78.0, "13": 69.8, "23": 58.0, "15": 9.9, "25": 6.1, "35": 40.9, "46": 6.6,
    })  # fmt: skip
    hill = averages(diopside).hill
    assert hill.bulk == pytest.approx(114.6, abs=0.05)
    assert hill.shear == pytest.approx(72.7, abs=0.05)


def test_cristobalite_aggregate_has_a_negative_poisson_ratio():
    """Yeganeh-Haeri, Weidner & Parise 1992, Science 257, 650: ν = −0.16 of the aggregate.

    The bulk averages are of a separate calculation.
    """
    crystal = Stiffness.from_constants("tetragonal_6", {
        "11": 59.4, "12": 3.8, "13": -4.4, "33": 42.4, "44": 67.2, "66": 25.7,
    })  # fmt: skip
    found = averages(crystal)
    assert found.hill.poisson == pytest.approx(-0.16, abs=0.005)
    assert found.voigt.bulk == pytest.approx(16.8, abs=0.005)
    assert found.reuss.bulk == pytest.approx(15.95, abs=0.005)


def test_phenakite_hill():
    """Constants: Yeganeh-Haeri & Weidner 1989, Phys. Chem. Minerals 16, 360.

    K is of a separate calculation.
    """
    crystal = Stiffness.from_constants("trigonal_7", {
        "11": 341.9, "12": 148.0, "13": 136.0, "14": 0.1, "15": 3.5, "33": 391.0, "44": 91.4,
    })  # fmt: skip
    assert averages(crystal).hill.bulk == pytest.approx(212.5, abs=0.1)


def test_ice_is_nearly_isotropic_in_bulk():
    """Gammon, Kiefte, Clouter & Denner 1983, J. Glaciology 29, 433: ice Ih at −16 °C.

    K = 8.899 GPa by both averages (printed value from memory); G of a separate calculation.
    """
    ice = Stiffness.from_constants(
        "hexagonal", {"11": 13.929, "12": 7.082, "13": 5.765, "33": 15.01, "44": 3.014}
    )
    found = averages(ice)
    assert found.voigt.bulk == pytest.approx(8.899, abs=0.001)
    assert found.reuss.bulk == pytest.approx(8.899, abs=0.001)
    assert found.hill.shear == pytest.approx(3.463, abs=0.001)


def test_albite_averages_bounds_and_index():
    """Separate calculation on the printed 21 constants."""
    found, bounds = averages(ALBITE), hashin_shtrikman(ALBITE)
    assert found.voigt.bulk == pytest.approx(63.7222, abs=1e-3)
    assert found.reuss.bulk == pytest.approx(55.1557, abs=1e-3)
    assert found.voigt.shear == pytest.approx(41.2133, abs=1e-3)
    assert found.reuss.shear == pytest.approx(29.8041, abs=1e-3)
    assert found.hill.bulk == pytest.approx(59.4390, abs=1e-3)
    assert found.hill.shear == pytest.approx(35.5087, abs=1e-3)
    assert bounds.bulk_low == pytest.approx(58.0942, abs=1e-3)
    assert bounds.bulk_high == pytest.approx(61.1153, abs=1e-3)
    assert bounds.shear_low == pytest.approx(32.7994, abs=1e-3)
    assert bounds.shear_high == pytest.approx(36.6027, abs=1e-3)
    assert anisotropy(ALBITE, cubic=False).universal == pytest.approx(2.06936, abs=1e-4)


def test_albite_axis_compressibility_and_modulus_ratio():
    """β along a*: separate calculation. E(b) is some three times E(a*): Brown, Angel &
    Ross 2016, J. Geophys. Res. 121, 663, abstract ("softest by a factor of 3").
    """
    S = ALBITE.compliance
    assert 1000 * S[0, :3].sum() == pytest.approx(11.10, abs=0.01)
    assert S[0, 0] / S[1, 1] == pytest.approx(3, abs=0.5)
    assert 1 / S[:3, :3].sum() == pytest.approx(averages(ALBITE).reuss.bulk, rel=1e-12)


def test_copper_averages_and_bounds():
    """G_V = (C11 − C12 + 3C44)/5; G_R = 5/(4(S11 − S12) + 3S44); the bounds of Hashin &
    Shtrikman 1962, J. Mech. Phys. Solids 10, 343, evaluated by hand.
    """
    found, bounds = averages(COPPER), hashin_shtrikman(COPPER)
    assert found.voigt.shear == pytest.approx(54.64, abs=1e-9)
    assert found.reuss.shear == pytest.approx(5 / (4 / 47.0 + 3 / 75.4), abs=1e-9)
    assert found.reuss.shear == pytest.approx(40.034, abs=0.001)
    bulk, g1, g2 = 411.2 / 3, 23.5, 75.4
    beta1, beta2 = (-3 * (bulk + 2 * g) / (5 * g * (3 * bulk + 4 * g)) for g in (g1, g2))
    low, high = g1 + 3 / (5 / (g2 - g1) - 4 * beta1), g2 + 2 / (5 / (g1 - g2) - 6 * beta2)
    assert (low, high) == pytest.approx((45.964, 49.445), abs=0.001)
    assert (bounds.shear_low, bounds.shear_high) == pytest.approx((low, high), rel=1e-12)
    assert (bounds.bulk_low, bounds.bulk_high) == pytest.approx((bulk, bulk), rel=1e-12)


def test_copper_indices_as_functions_of_the_zener_ratio():
    """For a cubic crystal each index is a function of A = 2C44/(C11 − C12) alone.

    Ranganathan & Ostoja-Starzewski 2008, PRL 101, 055504: (6/5)(√A − 1/√A)²; Kube 2016,
    AIP Adv. 6, 095209: √5 ln[(2 + 3A)(3 + 2A)/(25A)]; Chung & Buessem 1967, J. Appl. Phys.
    38, 2010: 3(A − 1)²/[3(A − 1)² + 25A].
    """
    index = anisotropy(COPPER, cubic=True)
    A = 150.8 / 47.0
    assert index.zener == pytest.approx(A, rel=1e-12)
    assert index.zener == pytest.approx(3.21, abs=0.005)
    assert index.universal == pytest.approx(1.2 * (A**0.5 - A**-0.5) ** 2, rel=1e-12)
    assert index.universal == pytest.approx(1.82422, abs=1e-4)
    log_euclidean = np.sqrt(5) * np.log((2 + 3 * A) * (3 + 2 * A) / (25 * A))
    assert index.log_euclidean == pytest.approx(log_euclidean, rel=1e-12)
    assert index.log_euclidean == pytest.approx(0.69551, abs=1e-4)
    percent = 300 * (A - 1) ** 2 / (3 * (A - 1) ** 2 + 25 * A)
    assert index.percent_shear == pytest.approx(percent, rel=1e-12)
    assert index.percent_shear == pytest.approx(15.4278, abs=0.001)
    assert index.percent_bulk == pytest.approx(0, abs=1e-12)


def test_closest_isotropic_body_of_copper():
    """Moakher & Norris 2006, J. Elasticity 85, 215: nearest by stiffness is Voigt's, by
    compliance Reuss's, by the logarithm μ = (C'² C44³)^(1/5), C' = (C11 − C12)/2.
    """
    isotropic = crystal_class("isotropic")
    assert project(COPPER.voigt, isotropic)[3, 3] == pytest.approx(54.64, abs=1e-9)
    assert project(COPPER.voigt, isotropic)[3, 3] == pytest.approx(
        averages(COPPER).voigt.shear, rel=1e-12
    )
    values, vectors = np.linalg.eigh(COPPER.kelvin)

    def nearest_shear(function, inverse):
        image = kelvin_to_stiffness((vectors * function(values)) @ vectors.T)
        return inverse(2 * project(image, isotropic)[3, 3]) / 2

    reuss = nearest_shear(np.reciprocal, np.reciprocal)
    assert reuss == pytest.approx(averages(COPPER).reuss.shear, rel=1e-12)
    assert reuss == pytest.approx(40.034, abs=0.001)
    logarithmic = nearest_shear(np.log, np.exp)
    assert logarithmic == pytest.approx((23.5**2 * 75.4**3) ** 0.2, rel=1e-12)
    assert logarithmic == pytest.approx(47.2988, abs=0.001)


def test_olivine_norm_falls_into_parts_of_rising_symmetry():
    """Browaeys & Chevrot 2004, Geophys. J. Int. 159, 667: the method; shares of a separate
    calculation, with the symmetry axis (new z) along a, new x along b, new y along c.
    """
    turned = OLIVINE.rotate(np.array([[0.0, 1, 0], [0, 0, 1], [1, 0, 0]])).voigt
    keys = ["isotropic", "hexagonal", "tetragonal_6", "orthorhombic"]
    outside = [1.0] + [distance(turned, crystal_class(key)) for key in keys]
    shares = -100 * np.diff(outside)
    np.testing.assert_allclose(shares, [81.596, 13.321, 0.178, 4.905], rtol=0, atol=0.002)
