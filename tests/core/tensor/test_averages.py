"""Averages, bounds and indices against closed forms, direct averaging and one another."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from core.tensor.averages import anisotropy, averages, hashin_shtrikman, isotropic
from core.tensor.stiffness import Stiffness
from tests.materials import (
    cubic,
    hexagonal,
    random_physical,
    random_rotation,
    random_stiffness,
    rotated,
)
from tests.materials import isotropic as isotropic_table

seeds = st.integers(0, 2**32 - 1)
few = settings(max_examples=20, deadline=None)

TURNS = Rotation.create_group("I").as_matrix()
KELVIN = np.sqrt(np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2]))
VOLUME = np.zeros((6, 6))
VOLUME[:3, :3] = 1 / 3
SHAPE = np.eye(6) - VOLUME


def both_spreads(rng):
    tables = random_stiffness(rng), random_physical(rng)
    return tuple(Stiffness.from_voigt(table) for table in tables)


def numbers(*results):
    return np.array([value for result in results for value in vars(result).values()])


@given(seeds)
@few
def test_voigt_and_reuss_are_averages_over_orientations(seed):
    """The mean over the 60 icosahedral turns is the mean over all orientations."""
    table = random_stiffness(np.random.default_rng(seed))
    found = averages(Stiffness.from_voigt(table))
    stiff = np.mean([rotated(table, turn) for turn in TURNS], axis=0)
    assert found.voigt.shear == pytest.approx(stiff[3, 3], rel=1e-11)
    assert found.voigt.bulk == pytest.approx(stiff[:3, :3].sum() / 9, rel=1e-11)
    # A compliance turns as a tensor once its engineering factors 1, 2, 4 are taken out.
    shears = np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2])
    soft = np.linalg.inv(table) / shears
    soft = np.mean([rotated(soft, turn) for turn in TURNS], axis=0)
    assert found.reuss.shear == pytest.approx(1 / (4 * soft[3, 3]), rel=1e-9)
    assert found.reuss.bulk == pytest.approx(1 / soft[:3, :3].sum(), rel=1e-9)
    assert found.hill.bulk == pytest.approx((found.voigt.bulk + found.reuss.bulk) / 2)
    assert found.hill.shear == pytest.approx((found.voigt.shear + found.reuss.shear) / 2)


@given(st.floats(1, 500), st.floats(1, 500))
@few
def test_an_isotropic_body_is_its_own_average(bulk, shear):
    crystal = Stiffness.from_voigt(isotropic_table(bulk, shear))
    found, bounds = averages(crystal), hashin_shtrikman(crystal)
    for body in (found.voigt, found.reuss, found.hill):
        assert (body.bulk, body.shear) == pytest.approx((bulk, shear), rel=1e-9)
    assert numbers(bounds) == pytest.approx([bulk, bulk, shear, shear], rel=1e-9)
    indices = anisotropy(crystal, cubic=True)
    assert numbers(indices) == pytest.approx([0, 0, 0, 0, 1], abs=1e-6)


@given(st.floats(1, 500), st.floats(-0.9, 0.49))
@few
def test_engineering_constants_of_an_isotropic_body(young, poisson):
    """K = E/(3(1 − 2ν)) and G = E/(2(1 + ν)), inverted."""
    body = isotropic(young / (3 * (1 - 2 * poisson)), young / (2 * (1 + poisson)))
    assert body.young == pytest.approx(young, rel=1e-12)
    assert body.poisson == pytest.approx(poisson, abs=1e-12)


@given(seeds)
@few
def test_everything_is_invariant_under_rotation(seed):
    rng = np.random.default_rng(seed)
    rotation = random_rotation(rng)
    for crystal in both_spreads(rng):
        turned = Stiffness.from_voigt(rotated(crystal.voigt, rotation))
        for one, other in [(averages(crystal).hill, averages(turned).hill),
                           (averages(crystal).reuss, averages(turned).reuss),
                           (hashin_shtrikman(crystal), hashin_shtrikman(turned))]:  # fmt: skip
            np.testing.assert_allclose(numbers(one), numbers(other), rtol=1e-9)
        first, second = anisotropy(crystal, False), anisotropy(turned, False)
        np.testing.assert_allclose(
            numbers(first)[:4].astype(float), numbers(second)[:4].astype(float), rtol=1e-7
        )


@given(seeds)
@few
def test_bounds_lie_in_order(seed):
    """Voigt ≥ upper ≥ lower ≥ Reuss."""
    for crystal in both_spreads(np.random.default_rng(seed)):
        found, bounds = averages(crystal), hashin_shtrikman(crystal)
        bulk = [found.reuss.bulk, bounds.bulk_low, bounds.bulk_high, found.voigt.bulk]
        shear = [found.reuss.shear, bounds.shear_low, bounds.shear_high, found.voigt.shear]
        assert (np.diff(bulk) > 0).all()
        assert (np.diff(shear) > 0).all()


def cubic_bounds(c11, c12, c44):
    """Return the shear bounds of Hashin & Shtrikman 1962, J. Mech. Phys. Solids 10, 343."""
    bulk, g1, g2 = (c11 + 2 * c12) / 3, (c11 - c12) / 2, c44
    beta1, beta2 = (-3 * (bulk + 2 * g) / (5 * g * (3 * bulk + 4 * g)) for g in (g1, g2))
    first = g1 + 3 / (5 / (g2 - g1) - 4 * beta1)
    second = g2 + 2 / (5 / (g1 - g2) - 6 * beta2)
    return min(first, second), max(first, second)


@given(st.floats(5, 300), st.floats(5, 300), st.floats(1.0001, 30), st.booleans())
@few
def test_cubic_bounds_are_the_closed_form(bulk, shear, ratio, hard_diagonals):
    g1, g2 = (shear, shear * ratio) if hard_diagonals else (shear * ratio, shear)
    constants = (bulk + 4 * g1 / 3, bulk - 2 * g1 / 3, g2)
    bounds = hashin_shtrikman(Stiffness.from_voigt(cubic(*constants)))
    expected = cubic_bounds(*constants)
    assert (bounds.shear_low, bounds.shear_high) == pytest.approx(expected, rel=1e-9)
    assert (bounds.bulk_low, bounds.bulk_high) == pytest.approx((bulk, bulk), rel=1e-9)


def test_cubic_bounds_survive_rotation_of_the_axes():
    """Rounding then couples volume and shape by 1e-14 instead of nothing."""
    table = cubic(168.4, 121.4, 75.4)
    expected = cubic_bounds(168.4, 121.4, 75.4)
    rng = np.random.default_rng(4)
    for _ in range(5):
        bounds = hashin_shtrikman(Stiffness.from_voigt(rotated(table, random_rotation(rng))))
        assert (bounds.shear_low, bounds.shear_high) == pytest.approx(expected, rel=1e-9)


def test_bounds_are_continuous_as_a_crystal_leaves_cubic_symmetry():
    table, size = cubic(168.4, 121.4, 75.4), 75.4
    before = numbers(hashin_shtrikman(Stiffness.from_voigt(table)))
    for departure in (1e-12, 1e-9, 1e-6, 1e-4):
        changed = table.copy()
        changed[2, 2] += departure * size
        after = numbers(hashin_shtrikman(Stiffness.from_voigt(changed)))
        np.testing.assert_allclose(after, before, rtol=30 * np.sqrt(departure) + 1e-10)


def estimate(kelvin, bulk, shear):
    """Return K and G of the estimate with one comparison body, by 6x6 inversion."""
    star_shear = shear / 6 * (9 * bulk + 8 * shear) / (bulk + 2 * shear)
    soft = np.linalg.inv(kelvin + 4 * shear * VOLUME + 2 * star_shear * SHAPE)
    stiff_bulk = 1 / (3 * np.trace(VOLUME @ soft))
    stiff_shear = 5 / (2 * np.trace(SHAPE @ soft))
    return np.array([stiff_bulk - 4 * shear / 3, stiff_shear - star_shear])


@given(seeds)
@settings(max_examples=15, deadline=None)
def test_no_admissible_body_gives_a_tighter_bound(seed):
    """Brute force: bodies at random, each scaled till C − C₀ is just semi-definite."""
    rng = np.random.default_rng(seed)
    table = random_stiffness(rng) if seed % 2 else random_physical(rng)
    kelvin, bounds = table * KELVIN, hashin_shtrikman(Stiffness.from_voigt(table))
    low = np.array([bounds.bulk_low, bounds.shear_low])
    high = np.array([bounds.bulk_high, bounds.shear_high])
    closest = np.full((2, 2), np.inf)
    for ratio in np.geomspace(0.02, 100, 120):
        root = np.linalg.inv(np.sqrt(3 * ratio) * VOLUME + np.sqrt(2) * SHAPE)
        softest, *_, stiffest = np.linalg.eigvalsh(root @ kelvin @ root)
        lower = estimate(kelvin, ratio * softest, softest)
        upper = estimate(kelvin, ratio * stiffest, stiffest)
        assert (lower <= low * (1 + 1e-9)).all()
        assert (upper >= high * (1 - 1e-9)).all()
        closest = np.minimum(closest, [1 - lower / low, upper / high - 1])
    assert (closest < 2e-3).all()  # and they are attained, not merely outside all


def test_hexagonal_bulk_average_of_a_uniaxial_crystal_in_closed_form():
    """K_R = [(C11 + C12) C33 − 2C13²]/(C11 + C12 + 2C33 − 4C13) of a hexagonal crystal."""
    c11, c12, c13, c33, c44 = 161, 34, 50, 61, 38
    expected = ((c11 + c12) * c33 - 2 * c13**2) / (c11 + c12 + 2 * c33 - 4 * c13)
    found = averages(Stiffness.from_voigt(hexagonal(c11, c12, c13, c33, c44)))
    assert found.reuss.bulk == pytest.approx(expected, rel=1e-12)


@given(seeds)
@few
def test_indices_follow_their_definitions(seed):
    for crystal in both_spreads(np.random.default_rng(seed)):
        found, index = averages(crystal), anisotropy(crystal, cubic=False)
        bulk, shear = found.voigt.bulk / found.reuss.bulk, found.voigt.shear / found.reuss.shear
        assert index.universal == pytest.approx(5 * shear + bulk - 6)
        squares = math.log(bulk) ** 2 + 5 * math.log(shear) ** 2
        assert index.log_euclidean**2 == pytest.approx(squares)
        assert index.percent_bulk == pytest.approx(100 * (bulk - 1) / (bulk + 1))
        assert index.percent_shear == pytest.approx(100 * (shear - 1) / (shear + 1))
        assert index.zener is None


@pytest.mark.parametrize("table", [cubic(50, 80, 40), cubic(166, 64, 0), cubic(100, 100, 50)])
def test_an_unstable_crystal_keeps_what_is_defined(table):
    """Voigt needs no stability; Reuss, Hill, the bounds and the indices do."""
    crystal = Stiffness.from_voigt(table)
    found = averages(crystal)
    assert found.voigt.bulk == pytest.approx((table[0, 0] + 2 * table[0, 1]) / 3)
    assert found.voigt.shear == pytest.approx((table[0, 0] - table[0, 1] + 3 * table[3, 3]) / 5)
    assert math.isfinite(found.voigt.young)
    assert np.isnan(numbers(found.reuss, found.hill, hashin_shtrikman(crystal))).all()
    index = anisotropy(crystal, cubic=True)
    assert np.isnan(numbers(index)[:4]).all()
    difference = table[0, 0] - table[0, 1]
    if difference:
        assert index.zener == pytest.approx(2 * table[3, 3] / difference)
    else:
        assert math.isnan(index.zener)


def test_a_table_of_zeros_gives_no_exception():
    crystal = Stiffness.from_voigt(np.zeros((6, 6)))
    found = averages(crystal)
    assert (found.voigt.bulk, found.voigt.shear) == (0, 0)
    assert math.isnan(found.voigt.young)
    assert math.isnan(found.voigt.poisson)
    assert np.isnan(numbers(hashin_shtrikman(crystal), anisotropy(crystal, True))).all()
