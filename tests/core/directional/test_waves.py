"""Waves: identities, closed forms, finite differences, and where nothing is defined."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import lebedev_rule

from core.directional.medium import Medium
from core.directional.sphere import directions, sphere_mesh
from core.directional.waves import (
    curvature,
    focusing,
    group_velocities,
    impedance,
    longitudinality,
    modes,
    polarisation_deviation,
    power_flow,
    shear_splitting,
    speeds,
)
from core.tensor.stiffness import Stiffness
from tests.materials import (
    cubic,
    hexagonal,
    isotropic,
    random_physical,
    random_rotation,
    random_stiffness,
    rotated,
)
from tests.reference import christoffel_matrices, jacobi, near_axis

# Albite: Brown, Abramson & Angel 2006, Phys. Chem. Minerals 33, 256; x along a*, y along b.
ALBITE = np.array(
    [
        [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
        [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
        [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
        [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
        [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
        [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
    ]
)
SILICON = cubic(165.7, 63.9, 79.6)  # Hopcroft, Nix & Kenny 2010, J. MEMS 19, 229
ZINC = hexagonal(161.0, 34.2, 50.1, 61.0, 38.3)  # Courtney, Mechanical Behavior, table 2.2
WAVES = (speeds, modes, group_velocities, curvature, focusing, power_flow, longitudinality)


def medium_of(table, density=2623.0):
    return Medium(Stiffness.from_voigt(table), density)


def random_directions(seed, count):
    return directions(np.random.default_rng(seed).standard_normal((3, count)))


def table_of(seed):
    rng = np.random.default_rng(seed)
    return random_physical(rng) if seed % 2 else random_stiffness(rng, 0.5)


@pytest.mark.parametrize("wave", [*WAVES, impedance, shear_splitting, polarisation_deviation])
def test_no_density_is_a_mistake_of_the_program(wave):
    with pytest.raises(ValueError, match="density"):
        wave(Medium(Stiffness.from_voigt(ALBITE)), random_directions(0, 3))


@pytest.mark.parametrize("seed", range(6))
def test_speeds_and_polarisations_are_those_of_the_reference(seed):
    medium, dirs = medium_of(table_of(seed), 3000.0), random_directions(seed, 200)
    exact, vectors = jacobi(christoffel_matrices(table_of(seed), dirs.n))
    expected = np.sqrt(exact * 1e9 / 3000.0) / 1e3
    np.testing.assert_allclose(speeds(medium, dirs), expected.astype(float), rtol=1e-12)
    found = modes(medium, dirs)
    np.testing.assert_allclose(found.speed, expected.astype(float), rtol=1e-12)
    overlap = np.abs(np.einsum("akn,akn->an", found.polarisation, vectors.astype(float)))
    assert np.all(overlap > 1 - 1e-9)
    assert not found.degenerate.any()


@given(st.integers(0, 2**32 - 1))
def test_sum_of_squares_is_the_trace(seed):
    """Σ ρ v² = C_ijil n_j n_l, a quadratic form that needs no eigenvalue."""
    rng = np.random.default_rng(seed)
    table = random_stiffness(rng, 0.5)
    n = rng.standard_normal(3)
    n /= np.linalg.norm(n)
    trace = float(np.trace(christoffel_matrices(table, n[:, None])[0]))
    v = speeds(medium_of(table, 2000.0), directions(n))[:, 0]
    assert 2000.0 * (v**2).sum() * 1e-3 == pytest.approx(trace, rel=1e-13)


@given(st.integers(0, 2**32 - 1))
def test_energy_velocity_along_the_normal_is_the_phase_speed(seed):
    rng = np.random.default_rng(seed)
    dirs = directions(rng.standard_normal((3, 20)))
    group = group_velocities(medium_of(random_stiffness(rng, 0.5)), dirs)
    along = np.einsum("akn,kn->an", group.velocity, dirs.n)
    np.testing.assert_allclose(along, group.speed, rtol=1e-12)


@pytest.mark.parametrize("table", [ALBITE, SILICON, ZINC, isotropic(100.0, 40.0)])
def test_energy_velocity_along_the_normal_on_the_mesh_and_about_axes(table):
    """Through every mixture of the two routes and on exact degeneracies."""
    rng = np.random.default_rng(1)
    offsets = 10.0 ** -np.arange(1, 17)
    axes = [near_axis(axis, offsets, rng) for axis in ((0, 0, 1), (1, 1, 1), (1, 0, 0))]
    for dirs in (sphere_mesh(4).half, directions(np.concatenate(axes, axis=1))):
        group = group_velocities(medium_of(table), dirs)
        along = np.einsum("akn,kn->an", group.velocity, dirs.n)
        np.testing.assert_allclose(along, group.speed, rtol=1e-12)


@pytest.mark.parametrize("table", [ALBITE, table_of(2), table_of(3)])
def test_energy_velocity_is_the_gradient_of_the_frequency(table):
    """Central differences of v|k|, in space, by the reference eigenvalues."""
    medium, dirs = medium_of(table), random_directions(2, 60)
    step = 1e-5
    gradient = np.empty((3, 3, dirs.count))
    for axis, unit in enumerate(np.eye(3)):
        sides = []
        for sign in (1, -1):
            k = dirs.n.astype(np.longdouble) + sign * step * unit[:, None]
            values, _ = jacobi(christoffel_matrices(table, k))
            sides.append(np.sqrt(values * np.longdouble(1e3) / 2623))
        gradient[:, axis] = ((sides[0] - sides[1]) / (2 * step)).astype(float)
    group = group_velocities(medium, dirs)
    values = medium.density * group.speed**2
    gap = np.abs(np.diff(values, axis=0)).min(axis=0) / values[0]
    clear = gap > 0.01
    assert np.count_nonzero(clear) > 40
    np.testing.assert_allclose(
        group.velocity[..., clear], gradient[..., clear], rtol=1e-6, atol=1e-6
    )


def test_energy_velocity_is_normal_to_the_slowness_surface():
    """In albite: no chord of a slowness sheet to a near point has a part along V."""
    medium, dirs = medium_of(ALBITE), random_directions(3, 50)
    group = group_velocities(medium, dirs)
    step = 1e-5
    for tangent in dirs.tangents:
        ahead, behind = (directions(dirs.n + s * step * tangent) for s in (1, -1))
        chord = [d.n / speeds(medium, d)[:, None] for d in (ahead, behind)]
        slope = np.einsum("akn,akn->an", group.velocity, chord[0] - chord[1]) / (2 * step)
        np.testing.assert_allclose(slope, 0, atol=1e-6)


@pytest.mark.parametrize("table", [ALBITE, table_of(4)])
def test_curvature_against_differences_of_the_energy_velocity(table):
    """W is the derivative of V along the tangents, and kappa its determinant."""
    medium, dirs = medium_of(table), random_directions(5, 200)
    found = curvature(medium, dirs)
    step = 1e-5
    derivative = np.empty((2, 2, 3, dirs.count))
    for column, tangent in enumerate(dirs.tangents):
        ahead, behind = (
            group_velocities(medium, directions(dirs.n + s * step * tangent)).velocity
            for s in (1, -1)
        )
        slope = (ahead - behind) / (2 * step)
        for row, other in enumerate(dirs.tangents):
            derivative[row, column] = np.einsum("akn,kn->an", slope, other)
    expected = derivative[0, 0] * derivative[1, 1] - derivative[0, 1] * derivative[1, 0]
    values = found.speed**2
    gap = np.abs(np.diff(values, axis=0)).min(axis=0) / values[0]
    clear = gap > 0.02
    assert np.count_nonzero(clear) > 120
    scale = found.speed[0] ** 2
    error = np.abs(found.kappa - expected) / scale
    assert np.all(error[:, clear] < 1e-5)
    group = group_velocities(medium, dirs)
    np.testing.assert_allclose(found.velocity, group.velocity, rtol=1e-9, atol=1e-10)


def test_gaussian_curvature_of_an_ellipsoid():
    """SH waves of a hexagonal crystal have an ellipsoid of slowness, whose curvature is known.

    With semi-axes a, a, c the curvature at s is 1/(a² c)² / (s_x²/a⁴ + s_y²/a⁴ + s_z²/c⁴)².
    """
    density, dirs = 7134.0, random_directions(6, 300)
    medium = medium_of(ZINC, density)
    x, y, z = dirs.n
    c66, c44 = (161.0 - 34.2) / 2, 38.3
    v = np.sqrt((c66 * (x * x + y * y) + c44 * z * z) * 1e3 / density)
    found = curvature(medium, dirs)
    sheet = np.argmin(np.abs(found.speed - v), axis=0)
    column = np.arange(dirs.count)
    np.testing.assert_allclose(found.speed[sheet, column], v, rtol=1e-12)
    a2, c2 = density / c66 * 1e-3, density / c44 * 1e-3
    s2 = dirs.n**2 / v**2
    expected = 1 / (a2 * a2 * c2) / ((s2[0] + s2[1]) / a2**2 + s2[2] / c2**2) ** 2
    np.testing.assert_allclose(found.gaussian[sheet, column], expected, rtol=1e-9)


@pytest.mark.parametrize(
    "table", [SILICON, ZINC, random_physical(np.random.default_rng(5), 0.2)]
)
def test_a_closed_sheet_covers_the_sphere_of_rays_once(table):
    """∫ κ v/|V|³ dΩ = 4π for a sheet that touches no other (Gauss-Bonnet)."""
    points, weights = lebedev_rule(131)
    dirs = directions(points)
    medium = medium_of(table)
    found = curvature(medium, dirs)
    value = found.speed**2
    assert (1 - value[1] / value[0]).min() > 0.05
    ray = np.linalg.norm(found.velocity[0], axis=0)
    total = weights @ (found.kappa[0] * found.speed[0] / ray**3)
    assert total == pytest.approx(4 * np.pi, rel=1e-10)


def test_isotropic_closed_forms():
    """v_P² = (K + 4G/3)/ρ and v_S² = G/ρ; energy along the normal; no focusing anywhere."""
    dirs = random_directions(7, 100)
    medium = medium_of(isotropic(100.0, 60.0), 2500.0)
    fast, slow = np.sqrt(180e9 / 2500) / 1e3, np.sqrt(60e9 / 2500) / 1e3
    expected = np.array([fast, slow, slow])[:, None] * np.ones(100)
    np.testing.assert_allclose(speeds(medium, dirs), expected, rtol=1e-14)
    group = group_velocities(medium, dirs)
    np.testing.assert_allclose(group.velocity, expected[:, None] * dirs.n, atol=1e-13)
    np.testing.assert_array_equal(group.degenerate[:, 0], [False, True, True])
    assert group.degenerate[1:].all()
    found = curvature(medium, dirs)
    np.testing.assert_allclose(found.focusing, 1, rtol=1e-12)
    np.testing.assert_allclose(found.gaussian, expected**2, rtol=1e-12)
    np.testing.assert_allclose(power_flow(medium, dirs), 0, atol=1e-12)
    np.testing.assert_allclose(polarisation_deviation(medium, dirs), 0, atol=1e-12)
    np.testing.assert_allclose(longitudinality(medium, dirs)[0], 1, rtol=1e-14)
    np.testing.assert_allclose(longitudinality(medium, dirs)[1:], 0, atol=1e-14)
    np.testing.assert_allclose(impedance(medium, dirs), 2.5 * expected, rtol=1e-14)
    np.testing.assert_allclose(shear_splitting(medium, dirs), 0, atol=1e-10)


def test_exact_degeneracy_gives_the_mean_and_no_focusing():
    """On ⟨111⟩ of a cubic crystal the cone of energy is round: its middle is the axis."""
    dirs = directions(np.array([1.0, 1.0, 1.0]))
    medium = medium_of(SILICON, 2330.0)
    group, found = group_velocities(medium, dirs), curvature(medium, dirs)
    np.testing.assert_array_equal(group.degenerate[:, 0], [False, True, True])
    np.testing.assert_array_equal(modes(medium, dirs).degenerate[:, 0], [False, True, True])
    for sheet in (1, 2):
        np.testing.assert_allclose(
            group.velocity[sheet, :, 0], group.speed[sheet, 0] * dirs.n[:, 0], rtol=1e-12
        )
    np.testing.assert_allclose(group.velocity[1], group.velocity[2], rtol=1e-14)
    np.testing.assert_allclose(found.velocity[1], found.velocity[2], rtol=1e-14)
    assert np.isfinite(found.focusing[0, 0])
    assert np.isnan(found.focusing[1:]).all()
    assert np.isnan(found.kappa[1:]).all()
    assert np.isnan(found.gaussian[1:]).all()


@pytest.mark.parametrize("axis", [(1.0, 0.0, 0.0), (0.0, 0.0, 1.0)])
def test_a_tangential_degeneracy_has_no_focusing_either(axis):
    """⟨100⟩ of a cubic crystal: the sheets touch without a cone, but bend differently."""
    found = curvature(medium_of(SILICON, 2330.0), directions(np.array(axis)))
    np.testing.assert_array_equal(np.isnan(found.focusing[:, 0]), [False, True, True])


def test_a_sheet_that_does_not_propagate_is_nan_and_the_others_are_not():
    """C44 < 0: shear across z is unstable, the longitudinal wave is not."""
    dirs = directions(np.array([[0.0, 0.0], [0.0, 1.0], [1.0, 1.0]]))
    medium = medium_of(cubic(200.0, 100.0, -20.0), 2000.0)
    v = speeds(medium, dirs)
    assert v[0, 0] == pytest.approx(10.0, rel=1e-14)
    assert np.isnan(v[1:, 0]).all()
    assert np.isfinite(v[:2, 1]).all()  # along [011]: only the wave moving along x is lost
    assert np.isnan(v[2, 1])
    found, group = modes(medium, dirs), group_velocities(medium, dirs)
    np.testing.assert_allclose(np.linalg.norm(found.polarisation, axis=1), 1, rtol=1e-14)
    np.testing.assert_array_equal(np.isnan(found.speed), np.isnan(v))
    np.testing.assert_array_equal(np.isnan(group.speed), np.isnan(v))
    np.testing.assert_array_equal(np.isnan(group.velocity).any(axis=1), np.isnan(v))
    assert np.isfinite(curvature(medium, dirs).focusing[0]).all()


def test_zero_rigidity_is_not_a_speed_of_rounding_size():
    v = speeds(medium_of(isotropic(100.0, 0.0), 1000.0), random_directions(8, 500))
    np.testing.assert_allclose(v[0], 10.0, rtol=1e-14)
    assert np.isnan(v[1:]).all()


def test_batch_is_the_loop_of_single_directions():
    medium, dirs = medium_of(ALBITE), random_directions(9, 40)
    whole = [
        *vars(group_velocities(medium, dirs)).values(),
        *vars(curvature(medium, dirs)).values(),
    ]
    for column in range(0, 40, 7):
        one = directions(dirs.n[:, column])
        parts = [
            *vars(group_velocities(medium, one)).values(),
            *vars(curvature(medium, one)).values(),
        ]
        for many, single in zip(whole, parts, strict=True):
            np.testing.assert_allclose(single[..., 0], many[..., column], rtol=1e-10)


def test_more_directions_than_a_chunk():
    medium, dirs = medium_of(ALBITE), random_directions(10, 9000)
    tail = directions(dirs.n[:, 8900:])
    np.testing.assert_allclose(speeds(medium, dirs)[:, 8900:], speeds(medium, tail), rtol=1e-13)
    whole, part = group_velocities(medium, dirs), group_velocities(medium, tail)
    np.testing.assert_allclose(whole.velocity[..., 8900:], part.velocity, rtol=1e-9, atol=1e-11)
    np.testing.assert_allclose(
        focusing(medium, dirs)[:, 8900:], focusing(medium, tail), rtol=1e-6
    )


@given(st.integers(0, 2**32 - 1))
def test_everything_turns_with_the_crystal(seed):
    rng = np.random.default_rng(seed)
    table, rotation = random_physical(rng), random_rotation(rng)
    dirs = directions(rng.standard_normal((3, 5)))
    turned = directions(rotation @ dirs.n)
    medium, other = medium_of(table), medium_of(rotated(table, rotation))
    np.testing.assert_allclose(speeds(other, turned), speeds(medium, dirs), rtol=1e-11)
    group, image = group_velocities(medium, dirs), group_velocities(other, turned)
    values = group.speed**2
    gap = np.abs(np.diff(values, axis=0)).min(axis=0) / values[0]
    clear = gap > 1e-3
    expected = np.einsum("ij,ajn->ain", rotation, group.velocity)
    np.testing.assert_allclose(image.velocity[..., clear], expected[..., clear], atol=1e-9)
    np.testing.assert_allclose(power_flow(other, turned), power_flow(medium, dirs), atol=1e-5)
    np.testing.assert_allclose(
        1 / focusing(other, turned)[:, clear], 1 / focusing(medium, dirs)[:, clear], atol=1e-6
    )


def test_antipodes_have_the_same_speeds_and_opposite_energy():
    medium, dirs = medium_of(ALBITE), random_directions(11, 50)
    opposite = directions(-dirs.n)
    group, other = group_velocities(medium, dirs), group_velocities(medium, opposite)
    np.testing.assert_allclose(other.speed, group.speed, rtol=1e-14)
    np.testing.assert_allclose(other.velocity, -group.velocity, rtol=1e-12, atol=1e-12)


def test_power_flow_and_deviation_against_the_arc_cosine():
    """The naive angle, which loses digits near 0 and 90 degrees but not in between."""
    medium, dirs = medium_of(ALBITE), random_directions(12, 200)
    velocity, p = group_velocities(medium, dirs).velocity, modes(medium, dirs).polarisation
    cosine = np.einsum("akn,kn->an", velocity, dirs.n) / np.linalg.norm(velocity, axis=1)
    np.testing.assert_allclose(
        power_flow(medium, dirs), np.degrees(np.arccos(np.minimum(cosine, 1))), atol=1e-5
    )
    along = np.abs(np.einsum("akn,kn->an", p, dirs.n))
    np.testing.assert_allclose(longitudinality(medium, dirs), along, rtol=1e-12, atol=1e-14)
    angle = np.degrees(np.arccos(np.minimum(along, 1)))
    expected = np.where(along >= np.sqrt(0.5), angle, 90 - angle)
    np.testing.assert_allclose(polarisation_deviation(medium, dirs), expected, atol=1e-5)


def test_power_flow_keeps_its_digits_near_zero():
    """SH in zinc at a small angle θ to c: tan of the ray angle is C66/C44 tan θ."""
    theta = 1e-9
    dirs = directions(np.array([np.sin(theta), 0.0, np.cos(theta)]))
    ratio = ((161.0 - 34.2) / 2) / 38.3
    angles = np.radians(power_flow(medium_of(isotropic(100.0, 60.0)), dirs))
    np.testing.assert_allclose(angles, 0, atol=1e-15)
    table = np.diag([200.0, 200.0, 200.0, 38.3, 30.0, 38.3 * ratio])
    found = group_velocities(medium_of(table), dirs)
    # y-polarised: ρ v² = C66 nx² + C44 nz²; it is the middle sheet, C44 > C55
    expected = np.arctan(ratio * np.tan(theta)) - theta
    flow = np.radians(power_flow(medium_of(table), dirs))[1, 0]
    assert found.speed[1, 0] == pytest.approx(np.sqrt(38.3e3 / 2623), rel=1e-12)
    assert flow == pytest.approx(expected, rel=1e-6)


def test_shear_splitting_and_impedance_units():
    """Along z of a made-up medium: shear speeds 2 and 2.5 km/s differ by 100 ns in each mm."""
    density = 2000.0
    table = np.diag([100.0, 100.0, 98.0, 8.0, 12.5, 20.0])
    along_z = directions(np.array([0.0, 0.0, 1.0]))
    medium = medium_of(table, density)
    assert shear_splitting(medium, along_z)[0] == pytest.approx(100.0, rel=1e-12)
    np.testing.assert_allclose(impedance(medium, along_z)[:, 0], [14.0, 5.0, 4.0], rtol=1e-12)


def test_results_are_closed_to_writing():
    group = group_velocities(medium_of(ALBITE), random_directions(13, 4))
    with pytest.raises(ValueError, match="read-only"):
        group.velocity[0] = 0.0
