"""Printed stiffnesses inverted: printed compliances and what follows along the axes.

Tolerances are half of the last printed digit, so that agreement means agreement in print.
"""

import numpy as np
import pytest

from core.tensor.stiffness import Stiffness

# Courtney, Mechanical Behavior of Materials, table 2.2, cubic block.
# C11, C12, C44 in GPa; printed S11, S12, S44 in 1e-2/GPa; tolerance.
CUBIC = {
    "Al": ((108.2, 61.3, 28.5), (1.57, -0.57, 3.51), 0.006),
    "Cu": ((168.4, 121.4, 75.4), (1.50, -0.63, 1.33), 0.006),
    "Ni": ((246.5, 147.3, 124.7), (0.73, -0.27, 0.80), 0.006),
    "W": ((501, 198, 151.4), (0.26, -0.07, 0.66), 0.006),
    "ZnS": ((107.9, 72.2, 41.2), (2.0, -0.802, 2.43), (0.06, 0.0006, 0.006)),
    "spinel": ((279, 153, 153), (0.585, -0.208, 0.654), 0.0012),
    "Mo": ((460, 176, 110), (0.28, -0.08, 0.91), 0.006),
}

# In these rows of the same table the printed compliances are not the inverse of the printed
# stiffnesses: what the inverse is instead (a separate full-tensor calculation).
MISPRINTED = {
    "Fe": ((237, 141, 116), (0.80, -0.28, 0.86), (0.75867, -0.28300, 0.86207), [0]),
    "Au": ((186, 157, 42), (2.33, -1.07, 2.38), (2.36552, -1.08276, 2.38095), [0, 1]),
}

# The hexagonal block of the same table. C11, C12, C13, C33, C44 in GPa; printed S11, S12,
# S13, S33, S44 in 1e-2/GPa; E basal and along c in GPa; linear compressibility along a and
# c in 1/TPa (the last four follow in closed form).
HEXAGONAL = {
    "Mg": ((59.7, 26.2, 21.7, 61.7, 16.4), (2.20, -0.79, -0.50, 1.97, 6.10),
           (45.4, 50.7), (9.18, 9.75)),
    "Zn": ((161, 34.2, 50.1, 61.0, 38.3), (0.84, 0.05, -0.73, 2.84, 2.61),
           (119.4, 35.3), (1.58, 13.79)),
}  # fmt: skip


def cubic_crystal(c11, c12, c44):
    return Stiffness.from_constants("cubic", {"11": c11, "12": c12, "44": c44})


def cubic_compliances(crystal):
    compliance = 100 * crystal.compliance
    return np.array([compliance[0, 0], compliance[0, 1], compliance[3, 3]])


@pytest.mark.parametrize("name", CUBIC)
def test_printed_cubic_compliances(name):
    constants, printed, tolerance = CUBIC[name]
    found = cubic_compliances(cubic_crystal(*constants))
    assert (np.abs(found - printed) <= tolerance).all()


@pytest.mark.parametrize("name", MISPRINTED)
def test_printed_rows_that_do_not_invert_are_not_reproduced(name):
    constants, printed, expected, wrong = MISPRINTED[name]
    found = cubic_compliances(cubic_crystal(*constants))
    np.testing.assert_allclose(found, expected, atol=2e-5)
    differs = np.abs(found - printed) > 0.006
    assert list(np.flatnonzero(differs)) == wrong


@pytest.mark.parametrize("name", HEXAGONAL)
def test_printed_hexagonal_compliances_and_what_follows(name):
    constants, printed, young, compressibility = HEXAGONAL[name]
    cells = dict(zip(["11", "12", "13", "33", "44"], constants, strict=True))
    S = Stiffness.from_constants("hexagonal", cells).compliance
    found = 100 * np.array([S[0, 0], S[0, 1], S[0, 2], S[2, 2], S[3, 3]])
    np.testing.assert_allclose(found, printed, rtol=0, atol=0.0062)
    np.testing.assert_allclose([1 / S[0, 0], 1 / S[2, 2]], young, rtol=0, atol=0.06)
    linear = 1000 * S[:3, :3].sum(axis=1)
    np.testing.assert_allclose(linear[[0, 2]], compressibility, rtol=0, atol=0.006)
    assert S[5, 5] == pytest.approx(2 * (S[0, 0] - S[0, 1]))  # not half of it, as for C66


def test_zinc_from_compliances():
    """Hanson 1934, Phys. Rev. 45, 324 (resonant bars): compliances in, and back again."""
    s11, s12, s13, s33, s44 = 0.00838, 0.0005, -0.00731, 0.0284, 0.0261
    table = np.zeros((6, 6))
    table[:3, :3] = [[s11, s12, s13], [s12, s11, s13], [s13, s13, s33]]
    table[3, 3] = table[4, 4] = s44
    table[5, 5] = 2 * (s11 - s12)
    S = Stiffness.from_compliance(table).compliance
    np.testing.assert_allclose(S, table, atol=1e-15)
    assert 1 / S[0, 0] == pytest.approx(119.33, abs=0.01)
    assert 1 / S[2, 2] == pytest.approx(35.21, abs=0.01)
    assert 1000 * S[5, 5] == pytest.approx(15.76, abs=0.005)
    linear = 1000 * S[:3, :3].sum(axis=1)
    np.testing.assert_allclose(linear, [1.57, 1.57, 13.78], rtol=0, atol=0.005)


def test_silicon_from_compliances_gives_back_its_compliances():
    """Wortman & Evans 1965, J. Appl. Phys. 36, 153: 7.68, −2.14, 12.6 in 1/TPa.

    ν along [110] across [1 −1 0] is 0.064 in Brantley 1973, J. Appl. Phys. 44, 534.
    """
    s11, s12, s44 = 0.00768, -0.00214, 0.0126
    table = np.diag([s11 - s12] * 3 + [s44] * 3)
    table[:3, :3] += s12
    crystal = Stiffness.from_compliance(table)
    half = np.sqrt(0.5)
    S = crystal.rotate(np.array([[half, half, 0], [-half, half, 0], [0, 0, 1]])).compliance
    assert 1 / S[0, 0] == pytest.approx(169, abs=0.5)  # E[110], GPa, same sources
    assert 1 / crystal.compliance[0, 0] == pytest.approx(130, abs=0.5)  # E[100]
    assert -S[0, 1] / S[0, 0] == pytest.approx(0.064, abs=0.0005)
    assert -S[0, 2] / S[0, 0] == pytest.approx(0.36, abs=0.005)  # across [001]
