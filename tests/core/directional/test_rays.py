"""Arrivals along a ray: closed forms, folded sheets, rings, and completeness by brute force."""

import numpy as np
import pytest
from scipy.optimize import brentq

from core.directional.medium import Medium
from core.directional.rays import arrivals
from core.directional.sphere import directions
from core.directional.waves import group_velocities
from core.tensor.stiffness import Stiffness
from tests.materials import (
    cubic,
    hexagonal,
    isotropic,
    random_physical,
    random_rotation,
    rotated,
)

GERMANIUM = cubic(128.35, 48.23, 66.66)  # the constants of Northrop & Wolfe 1980
ZINC = hexagonal(161.0, 34.2, 50.1, 61.0, 38.3)  # Courtney, Mechanical Behavior, table 2.2


def medium_of(table, density=5000.0):
    return Medium(Stiffness.from_voigt(table), density)


def angle(a, b):
    """Degrees between two vectors."""
    return np.degrees(np.arctan2(np.linalg.norm(np.cross(a, b)), np.dot(a, b)))


def check_aim(medium, ray, found):
    """Every arrival must do what it says: its energy follows the ray at its ray speed."""
    for arrival in found:
        group = group_velocities(medium, directions(arrival.normal))
        velocity = group.velocity[arrival.sheet, :, 0]
        assert np.linalg.norm(velocity) == pytest.approx(arrival.ray_speed, rel=1e-9)
        assert group.speed[arrival.sheet, 0] == pytest.approx(arrival.phase_speed, rel=1e-12)
        assert angle(velocity, ray) < 1e-6
        # Along the ray the plane wave advances at v / (n.r).
        along = arrival.normal @ ray / np.linalg.norm(ray)
        assert arrival.phase_speed / along == pytest.approx(arrival.ray_speed, rel=1e-9)


def test_isotropic():
    """The normal is the ray, on each sheet, once."""
    ray = np.array([1.0, -2.0, 0.5])
    found = arrivals(medium_of(isotropic(100.0, 60.0), 2500.0), ray)
    assert [arrival.sheet for arrival in found] == [0, 1, 2]
    assert [arrival.degenerate for arrival in found] == [False, True, True]
    for arrival, modulus in zip(found, (180.0, 60.0, 60.0), strict=True):
        np.testing.assert_allclose(arrival.normal, ray / np.linalg.norm(ray), atol=1e-8)
        assert arrival.ray_speed == pytest.approx(np.sqrt(modulus / 2.5), rel=1e-12)
        assert arrival.where == "point"
        assert arrival.focusing == pytest.approx(1.0, rel=1e-9)
    assert abs(found[0].polarisation @ found[0].normal) == pytest.approx(1.0, rel=1e-12)


def test_ellipsoid_of_shear_waves():
    """SH of a hexagonal crystal: ray along r has normal along (C44 r_x, C44 r_y, C66 r_z)."""
    ray = np.array([0.6, 0.3, 0.8])
    medium = medium_of(hexagonal(120.0, 40.0, 35.0, 90.0, 25.0))
    normal = np.array([25.0 * 0.6, 25.0 * 0.3, 40.0 * 0.8])
    normal /= np.linalg.norm(normal)
    found = arrivals(medium, ray)
    check_aim(medium, ray, found)
    nearest = min(found, key=lambda arrival: angle(arrival.normal, normal))
    assert angle(nearest.normal, normal) < 1e-6


def test_folded_sheet_of_germanium_along_100():
    """Four-fold symmetry: L and two T on the axis, and two sets of four normals off it.

    In the (100) plane the second normal is where the in-plane ray angle vanishes again, found
    here from the 2x2 Christoffel matrix of the plane.
    """
    ray = np.array([1.0, 0.0, 0.0])
    medium = medium_of(GERMANIUM, 5323.0)
    found = arrivals(medium, ray)
    check_aim(medium, ray, found)
    off = [arrival for arrival in found if angle(arrival.normal, ray) > 1]
    assert len(found) - len(off) == 3
    assert len(off) == 8
    c11, c12, c44 = 128.35, 48.23, 66.66

    def slope(theta):
        """d(ρv²)/dθ /2 + tan θ ρv²: what vanishes where the ray is along the axis."""
        c, s = np.cos(theta), np.sin(theta)
        a, b, d = c11 * c * c + c44 * s * s, c44 * c * c + c11 * s * s, (c12 + c44) * s * c
        root = np.hypot((a - b) / 2, d)
        value = (a + b) / 2 - root
        da, dd = (c44 - c11) * 2 * s * c, (c12 + c44) * (c * c - s * s)
        derivative = -((a - b) / 2 * da + d * dd) / root
        return derivative / 2 + np.tan(theta) * value

    expected = np.degrees(brentq(slope, 0.3, 0.7))
    in_plane = [a for a in off if min(abs(a.normal[1]), abs(a.normal[2])) < 1e-6]
    assert len(in_plane) == 4
    for arrival in in_plane:
        assert angle(arrival.normal, ray) == pytest.approx(expected, abs=1e-5)


def test_ring_of_zinc_along_c():
    """A whole cone of normals sends its energy along c; it is one arrival, and says so."""
    ray = np.array([0.0, 0.0, 1.0])
    medium = medium_of(ZINC, 7134.0)
    found = arrivals(medium, ray)
    check_aim(medium, ray, found)
    assert [arrival.where for arrival in found] == ["point", "point", "point", "ring"]
    assert [arrival.sheet for arrival in found] == [0, 1, 2, 2]
    np.testing.assert_allclose(found[0].normal, ray, atol=1e-8)
    assert found[0].ray_speed == pytest.approx(np.sqrt(61.0e3 / 7134), rel=1e-12)


@pytest.mark.parametrize("seed", range(3))
def test_nothing_is_missed_that_a_fine_scan_sees(seed):
    """Every random normal must come back among the arrivals along its own energy."""
    rng = np.random.default_rng(seed)
    medium = medium_of(random_physical(rng, 0.4))
    dirs = directions(rng.standard_normal((3, 5)))
    group = group_velocities(medium, dirs)
    for sheet in range(3):
        for column in range(5):
            ray = group.velocity[sheet, :, column]
            found = arrivals(medium, ray)
            check_aim(medium, ray, found)
            assert any(
                arrival.sheet == sheet and angle(arrival.normal, dirs.n[:, column]) < 1e-3
                for arrival in found
            )
            speeds = [arrival.ray_speed for arrival in found]
            assert speeds == sorted(speeds, reverse=True)


@pytest.mark.parametrize("seed", range(5))
def test_arrivals_turn_with_the_crystal(seed):
    rng = np.random.default_rng(seed)
    table, rotation, ray = (
        random_physical(rng, 0.2),
        random_rotation(rng),
        rng.standard_normal(3),
    )
    found = arrivals(medium_of(table), ray)
    turned = arrivals(medium_of(rotated(table, rotation)), rotation @ ray)
    assert len(found) == len(turned)
    np.testing.assert_allclose(
        [arrival.ray_speed for arrival in turned],
        [arrival.ray_speed for arrival in found],
        rtol=1e-8,
    )


def test_the_lid_over_a_cone_carries_no_arrival():
    """Along 111 the axis of the cone is no ray of it: only L arrives with its normal there.

    Along 100 the sheets touch, and both shear waves do, at √(C44/ρ).
    """
    medium = medium_of(GERMANIUM, 5323.0)
    ray = np.ones(3) / np.sqrt(3)
    along = [one for one in arrivals(medium, ray) if angle(one.normal, ray) < 0.01]
    assert [one.sheet for one in along] == [0]
    ray = np.array([0.0, 0.0, 1.0])
    along = [one for one in arrivals(medium, ray) if angle(one.normal, ray) < 0.01]
    assert [one.sheet for one in along] == [0, 1, 2]
    expected = np.sqrt(66.66e3 / 5323.0)
    assert [one.ray_speed for one in along[1:]] == pytest.approx([expected] * 2, rel=1e-9)


@pytest.mark.parametrize("ray", [(0.3, 0.5, 0.7), (1.0, 1.0, 0.0), (0.0, 0.0, 1.0)])
def test_sheets_that_end_somewhere_are_searched_up_to_there(ray):
    """C11 < C12: along ⟨110⟩ one shear wave has ρv² < 0, and its sheet ends about there."""
    medium = medium_of(cubic(56.9, 61.3, 24.1))
    found = arrivals(medium, np.array(ray))
    check_aim(medium, np.array(ray), found)
    assert 0 in [one.sheet for one in found]
    assert all(np.isfinite(one.ray_speed) for one in found)


def test_unstable_sheets_have_no_arrivals_and_density_is_needed():
    found = arrivals(medium_of(isotropic(100.0, 0.0)), np.array([1.0, 0.0, 0.0]))
    assert [arrival.sheet for arrival in found] == [0]
    with pytest.raises(ValueError, match="density"):
        arrivals(Medium(Stiffness.from_voigt(GERMANIUM)), np.array([1.0, 0.0, 0.0]))
    with pytest.raises(ValueError, match="direction"):
        arrivals(medium_of(GERMANIUM), np.zeros(3))
