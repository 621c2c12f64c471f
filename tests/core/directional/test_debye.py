"""The Debye speed against closed forms, another quadrature, and other axes."""

import numpy as np
import pytest
from scipy.integrate import quad_vec

from core.directional.debye import debye_speed
from core.directional.medium import Medium
from core.tensor.stiffness import Stiffness
from tests.materials import (
    cubic,
    hexagonal,
    isotropic,
    random_rotation,
    random_stiffness,
    rotated,
)
from tests.reference import christoffel_matrices


def medium_of(table, density=3000.0):
    return Medium(Stiffness.from_voigt(table), density)


def product_mean(table, density, count=120):
    """v_D by Gauss-Legendre in cos θ and equal steps in φ, with LAPACK's eigenvalues."""
    height, weight = np.polynomial.legendre.leggauss(count)
    angle = 2 * np.pi * np.arange(2 * count) / (2 * count)
    z, phi = (grid.ravel() for grid in np.meshgrid(height, angle, indexing="ij"))
    radius = np.sqrt(1 - z * z)
    n = np.array([radius * np.cos(phi), radius * np.sin(phi), z])
    values = np.linalg.eigvalsh(christoffel_matrices(table, n).astype(float))
    slowness_cubed = ((values * 1e3 / density) ** -1.5).sum(axis=1).reshape(count, -1)
    mean = weight @ slowness_cubed.mean(axis=1) / 2
    return (mean / 3) ** (-1 / 3)


def test_isotropic_closed_form():
    """3/v_D³ = 1/v_P³ + 2/v_S³ (Debye 1912)."""
    fast, slow = np.sqrt(180e9 / 2500) / 1e3, np.sqrt(60e9 / 2500) / 1e3
    expected = (3 / (fast**-3 + 2 * slow**-3)) ** (1 / 3)
    found = debye_speed(medium_of(isotropic(100.0, 60.0), 2500.0))
    assert found.speed == pytest.approx(expected, rel=1e-13)
    assert found.order == 59
    assert found.relative_change < 1e-12


def test_a_hexagonal_crystal_in_one_dimension():
    """Its mean is an integral over cos θ alone, done adaptively with closed-form speeds."""
    c11, c12, c13, c33, c44 = 161.0, 34.2, 50.1, 61.0, 38.3

    def slowness_cubed(z):
        s2, c2 = 1 - z * z, z * z
        a, b = c11 * s2 + c44 * c2, c44 * s2 + c33 * c2
        root = np.hypot((a - b) / 2, (c13 + c44) * np.sqrt(s2 * c2))
        values = np.array(
            [(a + b) / 2 + root, (a + b) / 2 - root, (c11 - c12) / 2 * s2 + c44 * c2]
        )
        return ((values * 1e3 / 7134.0) ** -1.5).sum()

    mean, _ = quad_vec(slowness_cubed, 0, 1, epsrel=1e-11)
    found = debye_speed(medium_of(hexagonal(c11, c12, c13, c33, c44), 7134.0))
    assert found.speed == pytest.approx((mean / 3) ** (-1 / 3), rel=1e-8)


@pytest.mark.parametrize("seed", range(4))
def test_triclinic_against_a_product_rule(seed):
    table = random_stiffness(np.random.default_rng(seed), 0.5)
    found = debye_speed(medium_of(table))
    assert found.speed == pytest.approx(product_mean(table, 3000.0), rel=1e-7)
    assert found.relative_change < 1e-6


def test_rough_media_take_higher_orders_until_settled():
    """C' = 0.5 GPa against C44 = 75: a needle of slow shear that order 59 does not resolve."""
    table = cubic(122.0, 121.0, 75.0)
    found = debye_speed(medium_of(table))
    assert found.order > 59
    assert found.speed == pytest.approx(product_mean(table, 3000.0, 200), rel=1e-3)


def test_axes_do_not_matter():
    rng = np.random.default_rng(7)
    table = random_stiffness(rng, 0.4)
    turned = rotated(table, random_rotation(rng))
    expected = debye_speed(medium_of(table)).speed
    assert debye_speed(medium_of(turned)).speed == pytest.approx(expected, rel=1e-7)


def test_unstable_is_nan_and_no_density_is_a_mistake():
    found = debye_speed(medium_of(cubic(50.0, 80.0, 30.0)))
    assert np.isnan(found.speed)
    assert np.isnan(found.relative_change)
    with pytest.raises(ValueError, match="density"):
        debye_speed(Medium(Stiffness.from_voigt(isotropic(100.0, 60.0))))
