"""What a covariance can be, how it follows a class and a rotation, and its factor."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.errors import InputError
from core.study.uncertainty.changes import independent_covariance
from core.study.uncertainty.covariance import (
    CELLS,
    KELVIN_21,
    check_covariance,
    class_basis,
    class_covariance,
    factor_of,
    follows_class,
    nearest_covariance,
    rotate_covariance,
    rotate_factor,
    rotation_map,
)
from core.tensor.notation import from_upper_triangle, upper_triangle
from core.tensor.symmetry import CLASS_KEYS, crystal_class
from tests.materials import hexagonal, random_physical, random_rotation, rotated, trigonal

SEEDS = st.integers(0, 2**32 - 1)
PLACE = {cell: k for k, cell in enumerate(CELLS)}


def random_covariance(rng, rank=21, size=1.0):
    columns = rng.standard_normal((21, rank))
    return size**2 * columns @ columns.T


def at(first, second):
    """The place of two constants such as 11 and 12 in the covariance."""
    return tuple(PLACE[(name // 10 - 1, name % 10 - 1)] for name in (first, second))


# --- classes --------------------------------------------------------------------------


def test_c66_of_a_hexagonal_crystal_errs_as_half_the_difference():
    """C66 = (C11 − C12)/2, so var C66 = (var C11 + var C12 − 2 cov)/4 by hand."""
    full = np.diag(np.arange(1.0, 22.0))
    full[at(11, 12)] = full[at(11, 12)[::-1]] = 0.5
    derived = class_covariance(full, crystal_class("hexagonal"))
    c11, c12 = full[at(11, 11)], full[at(12, 12)]
    assert derived[at(66, 66)] == pytest.approx((c11 + c12 - 2 * 0.5) / 4, rel=1e-14)
    assert derived[at(66, 11)] == pytest.approx((c11 - 0.5) / 2, rel=1e-14)
    assert derived[at(66, 12)] == pytest.approx((0.5 - c12) / 2, rel=1e-14)
    assert derived[at(22, 11)] == pytest.approx(c11, rel=1e-14)
    assert derived[at(66, 44)] == 0.0


@pytest.mark.parametrize(
    ("key", "table"),
    [
        ("hexagonal", lambda c: hexagonal(*c[:5])),
        ("trigonal_6", lambda c: trigonal(*c[:6])),
        ("trigonal_7", lambda c: trigonal(*c[:7])),
    ],
)
def test_covariance_of_a_class_is_that_of_its_drawn_tables(key, table):
    """Tables written out cell by cell (Nye 1957, table 9) from drawn independent constants."""
    rng = np.random.default_rng(3)
    samples = np.array([upper_triangle(table(rng.standard_normal(7))) for _ in range(4000)])
    sampled = np.cov(samples.T)
    claimed = crystal_class(key)
    derived = class_covariance(sampled, claimed)
    assert derived == pytest.approx(sampled, abs=1e-12)
    assert follows_class(sampled, claimed)
    assert not follows_class(sampled + 0.01 * np.eye(21), claimed)


@pytest.mark.parametrize("key", CLASS_KEYS)
def test_rank_is_at_most_the_number_of_independent_constants(key):
    claimed = crystal_class(key)
    covariance = independent_covariance(np.full((6, 6), 0.7), claimed)
    factor = factor_of(covariance)
    assert factor.shape == (21, len(claimed.independent))
    assert factor @ factor.T == pytest.approx(covariance, abs=1e-13)
    assert class_basis(claimed).shape == factor.shape


# --- turning --------------------------------------------------------------------------


@settings(deadline=None, max_examples=20)
@given(seed=SEEDS)
def test_the_constants_follow_a_rotation_as_the_fourth_rank_sum(seed):
    rng = np.random.default_rng(seed)
    table, turn = random_physical(rng), random_rotation(rng)
    change = rotation_map(turn)
    turned = upper_triangle(rotated(table, turn))
    assert change @ upper_triangle(table) == pytest.approx(turned, abs=1e-11)
    # In Kelvin form the 21 turn like the components of a vector.
    orthogonal = KELVIN_21[:, None] * change / KELVIN_21
    assert orthogonal @ orthogonal.T == pytest.approx(np.eye(21), abs=1e-13)


@settings(deadline=None, max_examples=20)
@given(seed=SEEDS)
def test_turned_factor_is_a_factor_of_the_turned_covariance(seed):
    rng = np.random.default_rng(seed)
    covariance, turn = random_covariance(rng), random_rotation(rng)
    turned = rotate_factor(factor_of(covariance), turn)
    assert turned @ turned.T == pytest.approx(rotate_covariance(covariance, turn), abs=1e-11)
    back = rotate_covariance(rotate_covariance(covariance, turn), turn.T)
    assert back == pytest.approx(covariance, abs=1e-11)


def test_trace_in_kelvin_form_is_the_same_in_all_axes():
    rng = np.random.default_rng(5)
    covariance, turn = random_covariance(rng), random_rotation(rng)
    weights = np.outer(KELVIN_21, KELVIN_21)
    before = np.linalg.eigvalsh(covariance * weights)
    after = np.linalg.eigvalsh(rotate_covariance(covariance, turn) * weights)
    assert after == pytest.approx(before, rel=1e-10)


# --- factor ---------------------------------------------------------------------------


@settings(deadline=None, max_examples=30)
@given(seed=SEEDS, rank=st.integers(0, 21))
def test_factor_gives_the_covariance_back(seed, rank):
    covariance = random_covariance(np.random.default_rng(seed), rank)
    factor = factor_of(covariance)
    assert factor.shape == (21, rank)
    assert factor @ factor.T == pytest.approx(covariance, abs=1e-12)


def test_factor_keeps_constants_known_to_very_different_degrees():
    deviations = np.logspace(-6, 3, 21)
    factor = factor_of(np.diag(deviations**2))
    assert np.sqrt((factor**2).sum(axis=1)) == pytest.approx(deviations, rel=1e-12)


# --- checks ---------------------------------------------------------------------------


def test_a_good_covariance_passes_unchanged():
    covariance = random_covariance(np.random.default_rng(6))
    covariance = (covariance + covariance.T) / 2
    assert np.array_equal(check_covariance(covariance), covariance)
    assert nearest_covariance(covariance) == pytest.approx(covariance, abs=1e-11)


def test_printed_digits_of_a_singular_covariance_are_forgiven():
    claimed = crystal_class("hexagonal")
    rounded = np.round(independent_covariance(np.full((6, 6), 1 / 3), claimed), 8)
    assert np.linalg.eigvalsh(rounded)[0] < 0
    assert check_covariance(rounded) is not None


def test_the_negative_eigenvalue_is_named_with_the_nearest_that_can_be():
    """Two unit variances of C44 and C55 with covariance 1.5: eigenvalues 2.5 and −0.5, in
    Kelvin form four times that; mended, the two variances and the covariance are 1.25."""
    covariance = np.eye(21)
    covariance[at(44, 55)] = covariance[at(55, 44)] = 1.5
    with pytest.raises(InputError) as caught:
        check_covariance(covariance, "covariance.csv")
    assert "eigenvalue −2 GPa²" in caught.value.message
    assert "C44 and C55" in caught.value.message
    assert "0.25 GPa²" in caught.value.hint
    assert caught.value.where == "covariance.csv"
    mended = nearest_covariance(covariance)
    assert mended[at(44, 55)] == pytest.approx(1.25, rel=1e-12)
    assert mended[at(44, 44)] == pytest.approx(1.25, rel=1e-12)
    assert mended[at(11, 11)] == pytest.approx(1.0, rel=1e-12)
    assert check_covariance(mended) is not None


@settings(deadline=None, max_examples=20)
@given(seed=SEEDS)
def test_nearest_is_the_same_covariance_in_all_axes(seed):
    rng = np.random.default_rng(seed)
    broken = rng.standard_normal((21, 21))
    broken = (broken + broken.T) / 2
    turn = random_rotation(rng)
    after = nearest_covariance(rotate_covariance(broken, turn))
    assert after == pytest.approx(rotate_covariance(nearest_covariance(broken), turn), abs=1e-9)


def test_no_nearby_covariance_is_nearer():
    """Against covariances a little off the one found, in the Kelvin norm."""
    rng = np.random.default_rng(8)
    broken = rng.standard_normal((21, 21))
    broken = (broken + broken.T) / 2
    weights = np.outer(KELVIN_21, KELVIN_21)
    nearest = nearest_covariance(broken)
    distance = np.linalg.norm((nearest - broken) * weights)
    factor = factor_of(nearest)
    for _ in range(200):
        other = factor + 0.01 * rng.standard_normal(factor.shape)
        assert np.linalg.norm((other @ other.T - broken) * weights) >= distance


def test_other_faults_are_named():
    good = np.eye(21)
    with pytest.raises(InputError, match="21 rows of 21; this one is 6 by 6"):
        check_covariance(np.eye(6))
    lopsided = good.copy()
    lopsided[at(11, 14)] = 0.3
    with pytest.raises(InputError, match=r"C11 and C14 is given as 0\.3 and as 0 GPa²"):
        check_covariance(lopsided)
    infinite = good.copy()
    infinite[at(12, 66)] = np.nan
    with pytest.raises(InputError, match="C12 and C66 is not a finite number"):
        check_covariance(infinite)
    negative = good.copy()
    negative[at(44, 44)] = -0.2
    with pytest.raises(InputError, match=r"variance of C44 is negative: −0\.2"):
        check_covariance(negative)


def test_uncertain_nothing_has_an_empty_factor():
    factor = factor_of(np.zeros((21, 21)))
    assert factor.shape == (21, 0)
    assert from_upper_triangle(factor.T).shape == (0, 6, 6)
