"""How far quantities reach: against closed forms, wherever the crystal is turned."""

import numpy as np
import pytest

from core.directional.medium import Medium
from core.study.true_range import LONGITUDINALITY, true_range
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, random_physical, random_rotation, rotated
from tests.reference import christoffel_matrices

C11, C12, C44, DENSITY = 230.0, 140.0, 120.0, 8000.0


def turned(seed):
    turn = random_rotation(np.random.default_rng(seed))
    return Medium(Stiffness.from_voigt(rotated(cubic(C11, C12, C44), turn)), DENSITY)


@pytest.mark.parametrize("seed", range(4))
def test_youngs_modulus_of_a_cubic_crystal_ends_at_100_and_111(seed):
    # 1/E = S11 along <100> and S11 − 2/3 (S11 − S12 − S44/2) along <111> (J. F. Nye 1957).
    s = np.linalg.inv(cubic(C11, C12, C44))
    slope = s[0, 0] - s[0, 1] - s[3, 3] / 2
    ends = 1 / s[0, 0], 1 / (s[0, 0] - 2 / 3 * slope)
    assert true_range(turned(seed), "young")[0] == pytest.approx(ends, rel=1e-7)


@pytest.mark.parametrize("seed", range(2))
def test_speeds_of_a_cubic_crystal(seed):
    # Slowest: along <110>, ρv² = (C11 − C12)/2. Fastest: <111>, (C11 + 2 C12 + 4 C44)/3.
    found = true_range(turned(seed), "phase")
    slowest, fastest = (C11 - C12) / 2, (C11 + 2 * C12 + 4 * C44) / 3
    assert found[2, 0] == pytest.approx(np.sqrt(1e3 * slowest / DENSITY), rel=1e-6)
    assert found[0, 1] == pytest.approx(np.sqrt(1e3 * fastest / DENSITY), rel=1e-6)
    assert found[2, 1] == pytest.approx(np.sqrt(1e3 * C44 / DENSITY), rel=1e-4)  # a cusp


def test_no_direction_lies_beyond_the_range():
    rng = np.random.default_rng(5)
    table = random_physical(rng)
    n = rng.standard_normal((3, 4000))
    n /= np.linalg.norm(n, axis=0)
    roots = np.linalg.eigvalsh(christoffel_matrices(table, n).astype(float))[:, ::-1].T
    speeds = np.sqrt(roots * 1e3 / DENSITY)
    found = true_range(Medium(Stiffness.from_voigt(table), DENSITY), "phase")
    assert (speeds >= found[:, :1] * (1 - 1e-5)).all()
    assert (speeds <= found[:, 1:] * (1 + 1e-5)).all()
    assert (speeds.max(axis=1) > found[:, 1] * 0.99).all()


def test_what_is_undefined_somewhere_has_no_range():
    medium = Medium(Stiffness.from_voigt(cubic(100.0, 40.0, -5.0)), 2000.0)
    assert np.isnan(true_range(medium, "young")).all()


def test_how_longitudinal_a_wave_is_reaches_one():
    found = true_range(turned(0), LONGITUDINALITY)
    assert found[0, 1] == pytest.approx(1.0, abs=1e-9)
    assert (found >= -1e-12).all()
