"""Elastic moduli against the fourth-rank sums themselves, closed forms and brute force."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import lebedev_rule

from core.directional.medium import Medium, christoffel_operator
from core.directional.moduli import (
    compressibility,
    poisson,
    poisson_extremes,
    shear,
    shear_extremes,
    transverse,
    young,
)
from core.directional.sphere import directions
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, hexagonal, isotropic, random_rotation, random_stiffness

PLACE = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]])
FACTORS = np.array([1.0, 1.0, 1.0, 2.0, 2.0, 2.0])
EXTREMES = ("shear_least", "shear_greatest", "poisson_least", "poisson_greatest")
seeds = st.integers(0, 2**32 - 1)


def medium_of(table, density=None):
    return Medium(Stiffness.from_voigt(table), density)


def random_case(seed, count=20):
    """A random triclinic medium and random directions."""
    rng = np.random.default_rng(seed)
    return medium_of(random_stiffness(rng), 3000.0), directions(rng.normal(size=(3, count)))


def compliance_tensor(medium):
    """S_ijkl by inverting the 6x6 and spreading it over the four indices."""
    components = np.linalg.inv(medium.stiffness.voigt) / np.outer(FACTORS, FACTORS)
    return components[PLACE[:, :, None, None], PLACE[None, None]]


def contract(tensor, *vectors):
    """Sum of tensor_ijkl a_i b_j c_k d_l for columns of vectors."""
    return np.einsum("ijkl,in,jn,kn,ln->n", tensor, *vectors, optimize=True)


def every_value(medium, dirs):
    """All the functions of a direction as one array (6, N)."""
    return np.stack(
        [
            young(medium, dirs),
            compressibility(medium, dirs),
            *shear_extremes(medium, dirs),
            *poisson_extremes(medium, dirs),
        ]
    )


# ---------------------------------------------------------------- definitions


@given(seeds)
@settings(max_examples=20)
def test_young_and_compressibility_are_the_sums_that_define_them(seed):
    medium, dirs = random_case(seed)
    tensor, n = compliance_tensor(medium), dirs.n
    assert np.allclose(young(medium, dirs), 1 / contract(tensor, n, n, n, n), rtol=1e-11)
    expected = 1e3 * np.einsum("ijkk,in,jn->n", tensor, n, n)
    assert np.allclose(compressibility(medium, dirs), expected, rtol=1e-10, atol=1e-10)


@given(seeds)
@settings(max_examples=20)
def test_shear_and_poisson_of_a_pair_are_the_sums_that_define_them(seed):
    medium, dirs = random_case(seed)
    tensor, n = compliance_tensor(medium), dirs.n
    m = dirs.tangents[0]
    modulus = 1 / contract(tensor, n, n, n, n)
    assert np.allclose(shear(medium, n, m), 1 / (4 * contract(tensor, n, m, n, m)), rtol=1e-10)
    expected = -modulus * contract(tensor, n, n, m, m)
    assert np.allclose(poisson(medium, n, m), expected, rtol=1e-10, atol=1e-11)
    assert shear(medium, n[:, 0], m[:, 0]) == pytest.approx(shear(medium, n, m)[0], rel=1e-13)


def test_pairs_obey_reciprocity():
    """G(n, m) = G(m, n) and ν(n, m)/E(n) = ν(m, n)/E(m)."""
    medium, dirs = random_case(3)
    n, m = dirs.n, dirs.tangents[1]
    assert np.allclose(shear(medium, n, m), shear(medium, m, n), rtol=1e-13)
    left = poisson(medium, n, m) / young(medium, dirs)
    right = poisson(medium, m, n) / young(medium, directions(m))
    assert np.allclose(left, right, rtol=1e-11)


def test_a_pair_must_be_perpendicular():
    medium, dirs = random_case(0, 1)
    for function in (shear, poisson):
        with pytest.raises(ValueError, match="perpendicular"):
            function(medium, dirs.n, dirs.n)


# ---------------------------------------------------------------- extremes over m


@pytest.mark.parametrize("seed", range(4))
def test_extremes_enclose_and_touch_every_transverse_direction(seed):
    medium, dirs = random_case(seed, 15)
    first, second = dirs.tangents
    angle = np.radians(np.arange(0.0, 180.0, 0.25))[:, None, None]
    m = np.cos(angle) * first + np.sin(angle) * second
    n = np.broadcast_to(dirs.n, m.shape)
    flat = (np.moveaxis(a, 1, 0).reshape(3, -1) for a in (n, m))
    n, m = flat
    for function, extremes in ((shear, shear_extremes), (poisson, poisson_extremes)):
        sampled = function(medium, n, m).reshape(len(angle), -1)
        least, greatest = extremes(medium, dirs)
        spread = greatest - least
        assert np.all(sampled.min(axis=0) >= least - 1e-11 * np.abs(least).max())
        assert np.all(sampled.max(axis=0) <= greatest + 1e-11 * np.abs(greatest).max())
        # Half a step of 0.25° from the extreme of a cosine of the double angle.
        assert np.all(sampled.min(axis=0) - least < 1e-4 * spread)
        assert np.all(greatest - sampled.max(axis=0) < 1e-4 * spread)


@given(seeds)
@settings(max_examples=20)
def test_transverse_directions_reproduce_the_extremes(seed):
    medium, dirs = random_case(seed)
    values = (*shear_extremes(medium, dirs), *poisson_extremes(medium, dirs))
    for which, value in zip(EXTREMES, values, strict=True):
        m = transverse(medium, dirs, which)
        assert np.allclose((m * m).sum(axis=0), 1, atol=1e-14)
        assert np.abs((m * dirs.n).sum(axis=0)).max() < 1e-14
        function = shear if which.startswith("shear") else poisson
        assert np.allclose(function(medium, dirs.n, m), value, rtol=1e-9, atol=1e-11)


def test_unknown_extreme_is_refused():
    medium, dirs = random_case(0, 1)
    with pytest.raises(ValueError, match="shear_least"):
        transverse(medium, dirs, "shear_last")


# ---------------------------------------------------------------- closed forms


@pytest.mark.parametrize(("bulk", "rigidity"), [(120.0, 60.0), (2.2, 1e-3), (50.0, 100.0)])
def test_isotropic_solid(bulk, rigidity):
    medium = medium_of(isotropic(bulk, rigidity))
    dirs = directions(np.random.default_rng(0).normal(size=(3, 50)))
    modulus = 9 * bulk * rigidity / (3 * bulk + rigidity)
    ratio = (3 * bulk - 2 * rigidity) / (2 * (3 * bulk + rigidity))
    expected = [modulus, 1e3 / (3 * bulk), rigidity, rigidity, ratio, ratio]
    tolerance = 1e-12 * max(1.0, bulk / rigidity)
    for value, closed in zip(every_value(medium, dirs), expected, strict=True):
        assert np.allclose(value, closed, rtol=tolerance, atol=0)
    for which in EXTREMES:
        assert np.isfinite(transverse(medium, dirs, which)).all()


def test_cubic_young_is_the_textbook_formula():
    """1/E = S11 - 2 (S11 - S12 - S44/2)(n1²n2² + n2²n3² + n3²n1²), Nye 1957, table 10."""
    medium = medium_of(cubic(165.7, 63.9, 79.6))
    dirs = directions(np.random.default_rng(1).normal(size=(3, 50)))
    s = medium.compliance
    x, y, z = dirs.n**2
    inverse = s[0, 0] - 2 * (s[0, 0] - s[0, 1] - s[3, 3] / 2) * (x * y + y * z + z * x)
    assert np.allclose(young(medium, dirs), 1 / inverse, rtol=1e-13)
    bulk = (165.7 + 2 * 63.9) / 3
    assert np.allclose(compressibility(medium, dirs), 1e3 / (3 * bulk), rtol=1e-13)


def test_hexagonal_young_is_the_textbook_formula():
    """1/E = s⁴ S11 + c⁴ S33 + s²c² (S44 + 2 S13), s the sine from the c axis; Nye 1957."""
    medium = medium_of(hexagonal(161.0, 34.2, 50.1, 61.0, 38.3))
    dirs = directions(np.random.default_rng(1).normal(size=(3, 50)))
    s = medium.compliance
    along = dirs.n[2] ** 2
    across = 1 - along
    inverse = across**2 * s[0, 0] + along**2 * s[2, 2]
    inverse += across * along * (s[3, 3] + 2 * s[0, 2])
    assert np.allclose(young(medium, dirs), 1 / inverse, rtol=1e-13)
    expected = 1e3 * (across * (s[0, 0] + s[0, 1] + s[0, 2]) + along * (2 * s[0, 2] + s[2, 2]))
    assert np.allclose(compressibility(medium, dirs), expected, rtol=1e-12)


@pytest.mark.parametrize("seed", range(3))
def test_sphere_means_are_the_reuss_averages(seed):
    """⟨1/E⟩ = 1/(9 K_R) + 1/(3 G_R), ⟨β⟩ = 1/(3 K_R), exact by a Lebedev rule of order 5."""
    medium, _ = random_case(seed)
    points, weights = lebedev_rule(5)
    weights = weights / weights.sum()
    s = np.linalg.inv(medium.stiffness.voigt)
    bulk = 1 / s[:3, :3].sum()
    diagonal, off = np.trace(s[:3, :3]), s[0, 1] + s[0, 2] + s[1, 2]
    rigidity = 15 / (4 * diagonal - 4 * off + 3 * np.trace(s[3:, 3:]))
    dirs = directions(points)
    mean = weights @ (1 / young(medium, dirs))
    assert mean == pytest.approx(1 / (9 * bulk) + 1 / (3 * rigidity), rel=1e-12)
    expected = 1e3 / (3 * bulk)
    assert weights @ compressibility(medium, dirs) == pytest.approx(expected, rel=1e-12)


# ---------------------------------------------------------------- habits of a batch


def test_batch_is_the_loop_over_single_directions():
    medium, dirs = random_case(5)
    singles = [every_value(medium, directions(n)) for n in dirs.n.T]
    assert np.allclose(every_value(medium, dirs), np.concatenate(singles, axis=1), rtol=1e-13)
    for which in EXTREMES:
        together = transverse(medium, dirs, which)
        alone = [transverse(medium, directions(n), which) for n in dirs.n.T]
        assert np.allclose(together, np.concatenate(alone, axis=1), atol=1e-9)


def test_no_direction_gives_no_value():
    medium, _ = random_case(0)
    assert every_value(medium, directions(np.empty((3, 0)))).shape == (6, 0)


@given(seeds)
@settings(max_examples=20)
def test_values_turn_with_the_crystal(seed):
    medium, dirs = random_case(seed)
    rotation = random_rotation(np.random.default_rng(seed))
    turned = directions(rotation @ dirs.n)
    before, after = every_value(medium, dirs), every_value(medium.rotated(rotation), turned)
    assert np.allclose(before, after, rtol=1e-9, atol=1e-10)


def test_opposite_directions_agree():
    medium, dirs = random_case(6)
    opposite = directions(-dirs.n)
    assert np.array_equal(dirs.products, opposite.products)
    assert np.array_equal(dirs.quartics, opposite.quartics)
    assert np.allclose(every_value(medium, dirs), every_value(medium, opposite), rtol=1e-12)


# ---------------------------------------------------------------- media at the edge


def unstable_medium():
    """C11 - C12 is negative: E is undefined near the cube axes, defined near [111]."""
    return medium_of(cubic(100.0, 120.0, 50.0), 3000.0)


def test_unstable_medium_is_nan_only_where_the_form_is_not_positive():
    medium = unstable_medium()
    dirs = directions(np.random.default_rng(2).normal(size=(3, 400)))
    tensor, n = compliance_tensor(medium), dirs.n
    form = contract(tensor, n, n, n, n)
    modulus = young(medium, dirs)
    assert 0 < np.isnan(modulus).sum() < dirs.count
    assert np.array_equal(np.isnan(modulus), form <= 0)
    assert np.allclose(modulus[form > 0], 1 / form[form > 0], rtol=1e-10)
    for ratio in poisson_extremes(medium, dirs):
        assert np.array_equal(np.isnan(ratio), form <= 0)
    assert np.isfinite(compressibility(medium, dirs)).all()


def test_unstable_shear_is_given_where_its_own_form_is_positive():
    medium = unstable_medium()
    dirs = directions(np.array([[0.0, 1.0], [0.0, 1.0], [1.0, 0.0]]))  # [001] and [110]
    least, greatest = shear_extremes(medium, dirs)
    # Along [001] every shear is C44. On (110), 1/G runs from 1/C44 to the negative 2/(C11-C12).
    assert np.allclose(least, [50.0, 50.0], rtol=1e-12)
    assert greatest[0] == pytest.approx(50.0, rel=1e-12)
    assert np.isnan(greatest[1])
    m = transverse(medium, dirs, "shear_greatest")
    assert np.isfinite(m[:, 0]).all()
    assert np.isnan(m[:, 1]).all()


def test_singular_stiffness_has_no_elastic_values_but_keeps_its_waves():
    table = cubic(100.0, 100.0, 50.0)
    medium = medium_of(table, 3000.0)
    dirs = directions(np.eye(3))
    assert np.isnan(every_value(medium, dirs)).all()
    for which in EXTREMES:
        assert np.isnan(transverse(medium, dirs, which)).all()
    assert np.isfinite(medium.christoffel).all()


@pytest.mark.parametrize("density", [0.0, -1.0, np.nan, np.inf])
def test_impossible_density_is_refused(density):
    with pytest.raises(ValueError, match="density"):
        medium_of(isotropic(100.0, 50.0), density)


# ---------------------------------------------------------------- the operators of a medium


def test_christoffel_operator_serves_both_contractions():
    medium, dirs = random_case(7)
    tensor = medium.stiffness.voigt[PLACE[:, :, None, None], PLACE[None, None]]
    form = (medium.christoffel @ dirs.products)[PLACE]
    n = dirs.n
    assert np.allclose(form, np.einsum("ijkl,jn,ln->ikn", tensor, n, n), rtol=1e-12, atol=1e-12)
    assert np.allclose(form, np.einsum("ijkl,in,kn->jln", tensor, n, n), rtol=1e-12, atol=1e-12)
    stacked = christoffel_operator(np.stack([medium.stiffness.voigt] * 2))
    assert np.array_equal(stacked[1], medium.christoffel)


def test_compressibility_matrix_has_the_extremes_of_beta():
    medium, dirs = random_case(8, 2000)
    least, *_, greatest = 1e3 * np.linalg.eigvalsh(medium.compressibility_matrix)
    values = compressibility(medium, dirs)
    assert least - 1e-9 <= values.min() < least + 0.02 * (greatest - least)
    assert greatest + 1e-9 >= values.max() > greatest - 0.02 * (greatest - least)


def test_split_of_the_compliance():
    """S_nnmm - S_nmnm = 3/2 R(l, l), and R vanishes for a totally symmetric tensor."""
    medium, dirs = random_case(9)
    tensor, n = compliance_tensor(medium), dirs.n
    m = dirs.tangents[0]
    normal = np.cross(n, m, axis=0)
    rest = medium.asymmetric_part[PLACE]
    along = np.einsum("in,ij,jn->n", normal, rest, normal)
    difference = contract(tensor, n, n, m, m) - contract(tensor, n, m, n, m)
    assert np.allclose(difference, 1.5 * along, rtol=1e-10, atol=1e-14)
