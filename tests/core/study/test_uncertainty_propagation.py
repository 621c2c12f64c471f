"""Linear propagation: formulas, finite differences and closed forms against each other."""

import time

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.directional.acoustic_axes import acoustic_axes
from core.directional.extremes import extremes
from core.directional.medium import Medium
from core.directional.quantities import QUANTITIES, quantity
from core.directional.sphere import directions, sphere_mesh
from core.errors import InputError
from core.study.part import part_table
from core.study.uncertainty.changes import independent_covariance
from core.study.uncertainty.covariance import factor_of, rotate_covariance, rotate_factor
from core.study.uncertainty.deviations import (
    aggregate_deviations,
    bounds_deviation,
    debye_deviation,
    eigenstiffness_deviation,
    engineering_deviations,
    extreme_deviations,
    part_deviations,
)
from core.study.uncertainty.propagation import changed, contributions, gradient, propagate
from core.study.uncertainty.sensitivity import (
    deviation,
    gradients,
    mean_square,
    speed_deviation,
    young_deviation,
)
from core.tensor.notation import upper_triangle
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class
from tests.materials import cubic, isotropic, random_physical, random_rotation, trigonal

SEEDS = st.integers(0, 2**32 - 1)
FORMULAS = [key for key in QUANTITIES if key != "focusing"]
SILICON = cubic(165.7, 63.9, 79.6)
"""Hopcroft, Nix & Kenny 2010, J. MEMS 19, 229."""


def medium_of(table, density=3000.0):
    return Medium(Stiffness.from_voigt(table), density)


def triclinic(seed, size=0.3):
    rng = np.random.default_rng(seed)
    columns = size * rng.standard_normal((21, 21))
    return medium_of(random_physical(rng)), columns @ columns.T


def class_factor(key, deviations):
    """Factor of independent errors of a class; `deviations` by name of constant."""
    table = np.zeros((6, 6))
    for name, value in deviations.items():
        table[name // 10 - 1, name % 10 - 1] = value
    return factor_of(independent_covariance(table, crystal_class(key)))


# --- formulas against finite differences ----------------------------------------------


@pytest.mark.parametrize("key", FORMULAS)
@settings(deadline=None, max_examples=5)
@given(seed=SEEDS)
def test_formula_equals_central_differences_of_the_21_constants(key, seed):
    """Differences written out here, with a step of their own."""
    medium, covariance = triclinic(seed)
    rng = np.random.default_rng(seed)
    dirs = directions(rng.standard_normal((3, 6)))
    speed = quantity("phase").values(medium, dirs)
    gap = np.abs(np.diff(speed, axis=0)).min(axis=0)
    step, slopes = 1e-3, []
    for unit in np.eye(21):
        ahead, behind = (
            quantity(key).values(changed(medium, sign * step * unit), dirs)
            for sign in (1, -1)
        )
        slopes.append((ahead - behind) / (2 * step))
    slopes = np.stack(slopes, axis=1)
    expected = np.sqrt(np.einsum("skn,kl,sln->sn", slopes, covariance, slopes))
    clear = gap > 0.05  # km/s: nearer sheets bend within the step
    found = deviation(key, medium, dirs, factor_of(covariance))
    scale = np.maximum(expected, 1e-3 * expected.max())
    assert (np.abs(found - expected) / scale)[:, clear].max(initial=0) < 1e-3
    worst = np.abs(gradients(key, medium, dirs) - slopes)[..., clear].max(initial=0)
    assert worst < 1e-3 * np.abs(slopes).max()


def test_focusing_is_differenced():
    medium, covariance = triclinic(4, size=0.01)
    dirs = directions(np.array([[0.2, 0.9], [0.5, 0.1], [0.8, 0.3]]))
    found = deviation("focusing", medium, dirs, factor_of(covariance))
    slopes = gradients("focusing", medium, dirs)
    expected = np.sqrt(np.einsum("skn,kl,sln->sn", slopes, covariance, slopes))
    assert found == pytest.approx(expected, rel=1e-3)


@settings(deadline=None, max_examples=10)
@given(seed=SEEDS)
def test_deviations_do_not_depend_on_the_axes(seed):
    """Medium, covariance and directions turned together leave σ of everything unchanged."""
    medium, covariance = triclinic(seed)
    rng = np.random.default_rng(seed + 1)
    turn, n = random_rotation(rng), rng.standard_normal((3, 5))
    factor, turned = factor_of(covariance), factor_of(rotate_covariance(covariance, turn))
    there = medium.rotated(turn)
    for key in FORMULAS:
        before = deviation(key, medium, directions(n), factor)
        after = deviation(key, there, directions(turn @ n), turned)
        assert after == pytest.approx(before, rel=1e-5)
    for number in (
        lambda m, L: eigenstiffness_deviation(m.stiffness, L),
        lambda m, L: [aggregate_deviations(m.stiffness, L, False).averages.hill.young],
        lambda m, L: [aggregate_deviations(m.stiffness, L, False).anisotropy.universal],
    ):
        assert number(there, turned) == pytest.approx(number(medium, factor), rel=1e-5)


# --- closed forms ---------------------------------------------------------------------


@settings(deadline=None, max_examples=20)
@given(
    bulk=st.floats(20, 200),
    ratio=st.floats(0.1, 1.5),
    sigma_bulk=st.floats(0.0, 2.0),
    sigma_shear=st.floats(0.01, 2.0),
)
def test_isotropic_solid_in_closed_form(bulk, ratio, sigma_bulk, sigma_shear):
    """K and G err independently: E = 9KG/(3K + G), ν = (3K − 2G)/(6K + 2G), β = 1/3K,
    ρv² = K + 4G/3 and G. Derivatives by hand."""
    shear, rho = ratio * bulk, 2500.0
    medium = medium_of(isotropic(bulk, shear), rho)
    columns = [sigma_bulk * isotropic(1.0, 0.0), sigma_shear * isotropic(0.0, 1.0)]
    factor = np.array([upper_triangle(column) for column in columns]).T
    dirs = directions(np.random.default_rng(1).standard_normal((3, 7)))
    whole = 3 * bulk + shear

    def both(by_bulk, by_shear):
        return np.hypot(by_bulk * sigma_bulk, by_shear * sigma_shear)

    fast, slow = np.sqrt((bulk + 4 * shear / 3) / rho * 1e3), np.sqrt(shear / rho * 1e3)
    wide = both(1, 4 / 3) * 1e3 / (2 * rho * fast)
    narrow = both(0, 1) * 1e3 / (2 * rho * slow)
    poisson = both(9 * shear, 9 * bulk) / (2 * whole**2)
    expected = {
        "young": [both(9 * shear**2, 27 * bulk**2) / whole**2],
        "compressibility": [both(1e3 / (3 * bulk**2), 0)],
        "shear_least": [sigma_shear],
        "shear_greatest": [sigma_shear],
        "poisson_least": [poisson],
        "poisson_greatest": [poisson],
        "phase": [wide, narrow, narrow],
        "slowness": [wide / fast**2, narrow / slow**2, narrow / slow**2],
        "wave": [wide, narrow, narrow],
        "power_flow": [0, 0, 0],
        "polarisation": [0, 0, 0],
    }
    for key, sheets in expected.items():
        found = deviation(key, medium, dirs, factor)
        degrees = key in ("power_flow", "polarisation")
        assert found == pytest.approx(
            np.tile(np.array(sheets)[:, None], 7), rel=1e-6, abs=1e-4 if degrees else 1e-9
        ), key
    means = aggregate_deviations(medium.stiffness, factor, False).averages.hill
    assert means.bulk == pytest.approx(sigma_bulk, rel=1e-6, abs=1e-9)
    assert means.shear == pytest.approx(sigma_shear, rel=1e-6)
    assert means.young == pytest.approx(expected["young"][0], rel=1e-6)
    assert means.poisson == pytest.approx(poisson, rel=1e-6)


def test_silicon_along_its_axes():
    """ρ v² along [001] is C11 and C44; 1/E = S11 = (C11 + C12)/((C11 − C12)(C11 + 2 C12))."""
    medium = medium_of(SILICON, 2330.0)
    factor = class_factor("cubic", {11: 0.5, 12: 0.4, 44: 0.3})
    dirs = directions(np.array([0.0, 0.0, 1.0]))
    speed = np.sqrt(np.array([165.7, 79.6, 79.6]) / 2.33)
    found = speed_deviation(medium, dirs, factor)[:, 0]
    assert found == pytest.approx(np.array([0.5, 0.3, 0.3]) / (2 * 2.33 * speed), rel=1e-12)

    def young(c11, c12):
        return (c11 - c12) * (c11 + 2 * c12) / (c11 + c12)

    by_11 = (young(165.71, 63.9) - young(165.69, 63.9)) / 0.02
    by_12 = (young(165.7, 63.91) - young(165.7, 63.89)) / 0.02
    expected = np.hypot(0.5 * by_11, 0.4 * by_12)
    assert young_deviation(medium, dirs, factor)[0] == pytest.approx(expected, rel=1e-6)
    for key in ("shear_least", "shear_greatest"):
        assert deviation(key, medium, dirs, factor)[0, 0] == pytest.approx(0.3, rel=1e-9)


def test_voigt_averages_and_zener_in_closed_form():
    """K = (C11 + 2 C12)/3, G_V = (C11 − C12 + 3 C44)/5, A = 2 C44/(C11 − C12)."""
    factor = class_factor("cubic", {11: 0.5, 12: 0.4, 44: 0.3})
    found = aggregate_deviations(Stiffness.from_voigt(SILICON), factor, True)
    assert found.averages.voigt.bulk == pytest.approx(np.hypot(0.5, 0.8) / 3, rel=1e-7)
    assert found.averages.reuss.bulk == pytest.approx(np.hypot(0.5, 0.8) / 3, rel=1e-7)
    shear = np.linalg.norm([0.5, 0.4, 0.9]) / 5
    assert found.averages.voigt.shear == pytest.approx(shear, rel=1e-7)
    gap = 165.7 - 63.9
    zener = np.linalg.norm([2 / gap * 0.3, *(2 * 79.6 / gap**2 * np.array([0.5, 0.4]))])
    assert found.anisotropy.zener == pytest.approx(zener, rel=1e-6)
    general = aggregate_deviations(Stiffness.from_voigt(SILICON), factor, False)
    assert general.anisotropy.zener is None


def test_hashin_shtrikman_bounds_in_closed_form():
    """Cubic: Hashin & Shtrikman 1962, J. Mech. Phys. Solids 10, 343, differenced by C44."""
    factor = class_factor("cubic", {44: 0.3})

    def bounds(c44):
        bulk, first = (165.7 + 2 * 63.9) / 3, (165.7 - 63.9) / 2
        b1, b2 = (-3 * (bulk + 2 * g) / (5 * g * (3 * bulk + 4 * g)) for g in (first, c44))
        return np.array([
            first + 3 / (5 / (c44 - first) - 4 * b1), c44 + 2 / (5 / (first - c44) - 6 * b2)
        ])  # fmt: skip

    low, high = np.sort(np.abs(bounds(79.601) - bounds(79.599)) / 0.002 * 0.3)[::-1]
    found = bounds_deviation(Stiffness.from_voigt(SILICON), factor)
    assert sorted([found.shear_low, found.shear_high]) == pytest.approx([high, low], rel=1e-3)
    assert found.bulk_low == pytest.approx(0.0, abs=1e-5)


def test_eigenstiffnesses_of_a_cubic_crystal():
    """C11 − C12 twice, 2 C44 three times, C11 + 2 C12 once; errors of the class split none."""
    factor = class_factor("cubic", {11: 0.5, 12: 0.4, 44: 0.3})
    found = eigenstiffness_deviation(Stiffness.from_voigt(SILICON), factor)
    soft, stiff = np.hypot(0.5, 0.4), np.hypot(0.5, 0.8)
    assert found == pytest.approx([soft, soft, 0.6, 0.6, 0.6, stiff], rel=1e-10)


def test_eigenstiffnesses_that_errors_split_share_one_uncertainty():
    """Turned axes, in which LAPACK picks other eigenstrains of the shared ones."""
    rng = np.random.default_rng(9)
    stiffness = Stiffness.from_voigt(SILICON)
    columns = 0.2 * rng.standard_normal((21, 21))
    turn = random_rotation(rng)
    here = eigenstiffness_deviation(stiffness, columns)
    there = eigenstiffness_deviation(stiffness.rotate(turn), rotate_factor(columns, turn))
    assert there == pytest.approx(here, rel=1e-9)
    assert here[0] == pytest.approx(here[1])
    assert here[0] != pytest.approx(here[2], rel=1e-3)


def test_mean_square_is_the_mean_over_unit_vectors():
    rng = np.random.default_rng(2)
    for size in (1, 2, 3, 5):
        forms = rng.standard_normal((size, size, 4))
        forms = forms + forms.transpose(1, 0, 2)
        x = rng.standard_normal((size, 200_000))
        x /= np.linalg.norm(x, axis=0)
        sampled = (np.einsum("ijr,in,jn->rn", forms, x, x, optimize=True) ** 2).mean(axis=1)
        assert mean_square(forms) == pytest.approx(sampled.sum(), rel=0.02)


# --- where sheets meet ----------------------------------------------------------------


def test_meeting_sheets_share_one_uncertainty_in_all_axes():
    rng = np.random.default_rng(11)
    medium, columns = medium_of(SILICON), 0.2 * rng.standard_normal((21, 21))
    n = np.array([0.0, 0.0, 1.0])
    here = speed_deviation(medium, directions(n), columns)[:, 0]
    assert here[1] == here[2]
    for _ in range(4):
        turn = random_rotation(rng)
        there = speed_deviation(
            medium.rotated(turn), directions(turn @ n), rotate_factor(columns, turn)
        )[:, 0]
        assert there == pytest.approx(here, rel=1e-6)


def test_rays_are_unknown_where_errors_part_the_sheets_only():
    medium, n = medium_of(SILICON), directions(np.array([0.0, 0.0, 1.0]))
    parting = deviation("wave", medium, n, 0.2 * np.eye(21))[:, 0]
    assert np.isnan(parting[1:]).all()
    assert np.isfinite(parting[0])
    kept = deviation("wave", medium, n, class_factor("cubic", {11: 1.0, 12: 1.0, 44: 1.0}))
    assert np.isfinite(kept).all()


def test_power_flow_of_a_pure_mode_is_uncertain_to_one_side():
    """ψ = 0 along [001] of a cubic crystal; an error c of C35 tilts the fast ray. By hand:
    Γ_13 = c turns p by t = c/(C11 − C44) towards x, and ρ v V_x = c + t (C12 + C44), so that
    ψ = c (C11 + C12)/(C11 (C11 − C44))."""
    factor = np.zeros((21, 1))
    medium, dirs = medium_of(SILICON), directions(np.array([0.0, 0.0, 1.0]))
    factor[upper_triangle(np.arange(36).reshape(6, 6)) == 2 * 6 + 4] = 0.4
    found = deviation("power_flow", medium, dirs, factor)[0, 0]
    expected = 0.4 * (165.7 + 63.9) / (165.7 * (165.7 - 79.6))
    assert found == pytest.approx(np.degrees(expected), rel=1e-3)


# --- other numbers --------------------------------------------------------------------


def test_engineering_constants_equal_their_differences():
    medium, covariance = triclinic(21)
    factor = factor_of(covariance)
    found = engineering_deviations(medium.stiffness, factor)
    rows = part_deviations(medium, factor)
    keys = [row.key for row in part_table(medium)]
    assert rows.shape == (len(keys),)
    by_key = dict(zip(keys, rows, strict=True))
    for k, axis in enumerate("XYZ"):
        assert found.young[k] == pytest.approx(by_key[f"young_{axis}_gpa"], rel=1e-6)
    assert found.shear[0] == pytest.approx(by_key["shear_23_gpa"], rel=1e-6)
    assert found.poisson[0, 1] == pytest.approx(by_key["poisson_12"], rel=1e-6)
    assert found.coupling["23,1"] == pytest.approx(by_key["coupling_23_1"], rel=1e-6)
    assert np.isnan(np.diag(found.poisson)).all()


@pytest.mark.parametrize("seed", [1, 2])
def test_extremes_equal_the_differences_of_the_search(seed):
    """The whole search of the sphere done again for one error; cones included."""
    medium, _ = triclinic(seed)
    column = np.random.default_rng(seed).standard_normal((21, 1))
    step = 1e-3
    here = extremes(medium)
    ahead, behind = (extremes(changed(medium, sign * step * column[:, 0])) for sign in (1, -1))
    found = extreme_deviations(medium, here, column)
    for key, pair in here.items():
        for end in (0, 1):
            slope = abs(ahead[key][end].value - behind[key][end].value) / (2 * step)
            assert found[key][end] == pytest.approx(
                slope, rel=1e-3, abs=1e-5 * abs(pair[end].value)
            ), (key, end)


def test_some_extreme_of_those_is_the_tip_of_a_cone():
    """Else the test above says nothing of tips."""
    medium, _ = triclinic(1)
    tips = [axis.direction for axis in acoustic_axes(medium) if axis.kind == "conical"]
    found = extremes(medium)
    ends = [end.direction for key in ("fast", "middle", "slow") for end in found[key]]
    assert any(abs(tip @ end) > 1 - 1e-9 for tip in tips for end in ends)


def test_debye_speed_of_an_isotropic_solid():
    """3/v³ = 1/v_L³ + 2/v_T³, so δv/v⁴ = (δv_L/v_L⁴ + 2 δv_T/v_T⁴)/3."""
    medium = medium_of(isotropic(100.0, 50.0), 2500.0)
    factor = upper_triangle(isotropic(0.0, 1.0))[:, None]
    fast, slow = np.sqrt((100 + 200 / 3) / 2.5), np.sqrt(50 / 2.5)
    speed = (3 / (1 / fast**3 + 2 / slow**3)) ** (1 / 3)
    d_fast, d_slow = 4 / 3 / (2 * 2.5 * fast), 1 / (2 * 2.5 * slow)
    expected = speed**4 * (d_fast / fast**4 + 2 * d_slow / slow**4) / 3
    assert debye_deviation(medium, factor) == pytest.approx(expected, rel=1e-6)


# --- contributions --------------------------------------------------------------------


def test_contributions_of_a_cubic_crystal():
    """Shear along [001] depends on C44 alone; K = (C11 + 2 C12)/3 on the other two."""
    medium, claimed = medium_of(SILICON), crystal_class("cubic")
    deviations = np.zeros((6, 6))
    deviations[0, 0], deviations[0, 1], deviations[3, 3] = 0.5, 0.4, 0.3
    covariance = independent_covariance(deviations, claimed)
    slopes = gradients("phase", medium, directions(np.array([0.0, 0.0, 1.0])))
    worst = contributions(slopes[2, :, 0], covariance, claimed)
    assert worst[0].name == "C44"
    assert worst[0].share == pytest.approx(1.0, rel=1e-9)

    def bulk(near):
        table = near.stiffness.voigt
        return table[:3, :3].sum() / 9

    shares = contributions(gradient(bulk, medium), covariance, claimed)
    assert [each.name for each in shares[:2]] == ["C12", "C11"]
    assert [each.share for each in shares] == pytest.approx(
        [0.64 / 0.89, 0.25 / 0.89, 0.0], abs=1e-9
    )


@settings(deadline=None, max_examples=20)
@given(seed=SEEDS)
def test_share_is_the_variance_that_goes_when_a_constant_becomes_known(seed):
    """Against the conditional covariance of the normal law, Σ − Σ_i Σ_iᵀ/Σ_ii."""
    rng = np.random.default_rng(seed)
    columns = rng.standard_normal((21, 21))
    covariance, slopes = columns @ columns.T, rng.standard_normal(21)
    triclinic_class = crystal_class("triclinic")
    shares = {
        each.name: each.share for each in contributions(slopes, covariance, triclinic_class)
    }
    known = covariance - np.outer(covariance[15], covariance[15]) / covariance[15, 15]
    before, after = (slopes @ matrix @ slopes for matrix in (covariance, known))
    assert shares["C44"] == pytest.approx(1 - after / before, abs=1e-9)


def test_independent_errors_share_the_whole():
    medium = medium_of(trigonal(86.7, 7.0, 11.9, -17.9, 107.2, 57.9), 2649.0)
    claimed = crystal_class("trigonal_6")
    covariance = independent_covariance(np.full((6, 6), 0.1), claimed)
    slopes = gradients("young", medium, directions(np.array([0.3, 0.5, 0.8])))[0, :, 0]
    shares = contributions(slopes, covariance, claimed)
    assert len(shares) == 6
    assert sum(each.share for each in shares) == pytest.approx(1.0, rel=1e-12)
    assert contributions(slopes, np.zeros((21, 21)), claimed) == ()


# --- what is undefined ----------------------------------------------------------------


def test_unstable_and_singular_media_have_no_uncertainty_where_no_value():
    unstable = medium_of(np.diag([100.0, 100.0, -20.0, 30.0, 30.0, 30.0]))
    dirs = directions(np.array([[0.0, 1.0], [0.0, 0.0], [1.0, 0.0]]))
    for key in QUANTITIES:
        values = quantity(key).values(unstable, dirs)
        found = deviation(key, unstable, dirs, 0.1 * np.eye(21))
        assert found.shape == values.shape
        assert np.isnan(found[np.isnan(values)]).all()
    assert np.isfinite(deviation("young", unstable, dirs, 0.1 * np.eye(21))[0, 1])
    singular = medium_of(np.diag([100.0, 100.0, 0.0, 30.0, 30.0, 30.0]))
    assert np.isnan(deviation("young", singular, dirs, 0.1 * np.eye(21))).all()
    assert np.isnan(engineering_deviations(singular.stiffness, np.eye(21)).young).all()


def test_nothing_uncertain_is_certain():
    medium = triclinic(3)[0]
    dirs = directions(np.array([0.1, 0.2, 0.9]))
    for key in QUANTITIES:
        assert np.array_equal(
            deviation(key, medium, dirs, np.zeros((21, 0))),
            np.zeros((quantity(key).sheets, 1)),
        )


def test_elastic_quantities_need_no_density_and_unknown_keys_are_refused():
    medium = medium_of(SILICON, None)
    dirs = directions(np.array([0.1, 0.2, 0.9]))
    assert np.isfinite(deviation("young", medium, dirs, np.eye(21))).all()
    with pytest.raises(ValueError, match="density"):
        deviation("phase", medium, dirs, np.eye(21))
    with pytest.raises(InputError, match="yung"):
        deviation("yung", medium, dirs, np.eye(21))


def test_propagate_is_exact_for_a_linear_function():
    medium, covariance = triclinic(8)
    weights = np.random.default_rng(1).standard_normal((2, 21))
    found = propagate(
        lambda near: weights @ upper_triangle(near.stiffness.voigt),
        medium,
        factor_of(covariance),
    )
    assert found == pytest.approx(np.sqrt(np.diag(weights @ covariance @ weights.T)), rel=1e-8)


def test_linear_propagation_is_quick():
    """E and three speeds at the 1,281 directions of a mesh of 2,562: 0.8 ms, and 1.5 ms is
    wanted; four times that on a busy machine."""
    medium, covariance = triclinic(1)
    factor, dirs, spent = factor_of(covariance), sphere_mesh(4).half, []
    for _ in range(15):
        start = time.process_time()
        young_deviation(medium, dirs, factor)
        speed_deviation(medium, dirs, factor)
        spent.append(time.process_time() - start)
    assert np.median(spent) < 0.006
