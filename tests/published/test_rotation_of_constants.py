"""Turned constants against Bond's matrices.

Bond 1943, Bell Syst. Tech. J. 22, 1, for 30° about z; constants of low albite from Brown,
Abramson & Angel 2006, Phys. Chem. Minerals 33, 256.
"""

import numpy as np
import pytest

from core.tensor.stiffness import Stiffness

ALBITE = np.array([
    [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
    [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
    [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
    [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
    [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
    [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
])  # fmt: skip

c, s = np.cos(np.radians(30)), np.sin(np.radians(30))
AXES = np.array([[c, s, 0], [-s, c, 0], [0, 0, 1]])  # new axes turned by +30° about z

# Bond's M: stresses in Voigt order, by the same turn.
BOND = np.array([
    [c * c, s * s, 0, 0, 0, 2 * c * s],
    [s * s, c * c, 0, 0, 0, -2 * c * s],
    [0, 0, 1, 0, 0, 0],
    [0, 0, 0, c, -s, 0],
    [0, 0, 0, s, c, 0],
    [-c * s, c * s, 0, 0, 0, c * c - s * s],
])  # fmt: skip


def test_stiffness_turns_by_bonds_matrix():
    turned = Stiffness.from_voigt(ALBITE).rotate(AXES).voigt
    np.testing.assert_allclose(turned, BOND @ ALBITE @ BOND.T, rtol=0, atol=1e-9)
    C = ALBITE
    c11 = (c**4 * C[0, 0] + s**4 * C[1, 1] + 2 * c**2 * s**2 * (C[0, 1] + 2 * C[5, 5])
           + 4 * c**3 * s * C[0, 5] + 4 * c * s**3 * C[1, 5])  # fmt: skip
    assert turned[0, 0] == pytest.approx(c11, abs=1e-9)
    assert turned[0, 0] == pytest.approx(84.9819, abs=0.001)
    assert turned[3, 3] == pytest.approx(27.4535, abs=0.001)
    assert turned[2, 2] == pytest.approx(179.5, abs=1e-9)


def test_compliance_turns_by_the_inverse_transpose():
    crystal = Stiffness.from_voigt(ALBITE)
    strain = np.linalg.inv(BOND).T
    expected = strain @ crystal.compliance @ strain.T
    np.testing.assert_allclose(crystal.rotate(AXES).compliance, expected, rtol=0, atol=1e-12)


def test_albite_in_ieee_axes():
    """Constants in Z∥c, Y∥b* axes, by a separate calculation to three decimals."""
    rotation = np.array([
        [0.999972, 0.007489, 0.000558],
        [-0.00751, 0.997209, 0.07428],
        [0.0, -0.074283, 0.997237],
    ])  # fmt: skip
    expected = np.array([
        [69.871, 34.645, 29.938, 4.71, -2.292, -0.837],
        [34.645, 181.145, 6.305, -13.16, -7.539, -6.866],
        [29.938, 6.305, 180.707, 0.512, 8.005, -8.318],
        [4.71, -13.16, 0.512, 25.593, -0.731, -7.626],
        [-2.292, -7.539, 8.005, -0.731, 26.752, -0.098],
        [-0.837, -6.866, -8.318, -7.626, -0.098, 33.444],
    ])  # fmt: skip
    turned = Stiffness.from_voigt(ALBITE).rotate(rotation).voigt
    np.testing.assert_allclose(turned, expected, rtol=0, atol=0.003)
