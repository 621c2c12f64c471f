"""Cutting errors against dense sampling, closed forms and one another."""

import time

import numpy as np
import pytest

from core.directional.acoustic_axes import acoustic_axes
from core.directional.extremes import extremes
from core.directional.medium import Medium
from core.directional.quantities import QUANTITIES, quantity
from core.directional.sphere import directions, sphere_mesh
from core.errors import InputError
from core.study.tolerance import axis_tolerances, cone_extremes, cost_map
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, isotropic, random_physical, random_rotation

TRICLINIC = random_physical(np.random.default_rng(1))
# What the docstring of `cost_map` says, of the greatest change: smooth quantities, and those
# with cusps where two sheets or two transverse directions meet.
MAPPED = {"young": 0.01, "compressibility": 0.01, "phase": 0.08, "shear_least": 0.08}


def medium_of(table, density=3000.0):
    return Medium(Stiffness.from_voigt(table), density)


def cap(n, half_angle, count, rng):
    """Directions (3, count) uniform in a cone, a quarter of them on its edge."""
    n = n / np.linalg.norm(n)
    height = rng.uniform(np.cos(half_angle), 1.0, count)
    height[: count // 4] = np.cos(half_angle)
    side = rng.standard_normal((3, count))
    side -= np.outer(n, n @ side)
    side /= np.linalg.norm(side, axis=0)
    return np.outer(n, height) + side * np.sqrt(1 - height**2)


@pytest.mark.parametrize("key", [key for key in QUANTITIES if key != "focusing"])
@pytest.mark.parametrize("half_angle", [0.5, 8.0])
def test_no_sample_of_a_cone_beats_its_extremes(key, half_angle):
    medium, n = medium_of(TRICLINIC), np.array([0.3, -0.5, 0.8])
    cones = cone_extremes(medium, n, half_angle, key)
    sampled = cap(n, np.radians(half_angle), 40_000, np.random.default_rng(2))
    values = quantity(key).values(medium, directions(sampled))
    assert len(cones) == quantity(key).sheets
    for cone, row in zip(cones, values, strict=True):
        spread = row.max() - row.min()
        assert cone.least <= row.min() + 1e-6 * spread
        assert cone.greatest >= row.max() - 1e-6 * spread
        # The cone is no wider than asked: the samples come near, its edge being among them.
        assert row.min() - cone.least < 5e-3 * spread
        assert cone.greatest - row.max() < 5e-3 * spread


@pytest.mark.parametrize("key", list(QUANTITIES))
def test_directions_of_the_extremes_give_them_and_lie_in_the_cone(key):
    medium, n = medium_of(TRICLINIC), np.array([0.48, 0.6, 0.64])
    for sheet, cone in enumerate(cone_extremes(medium, n, 3.0, key)):
        for value, at in (
            (cone.least, cone.least_direction),
            (cone.greatest, cone.greatest_direction),
        ):
            assert np.degrees(np.arccos(min(1.0, n @ at))) <= 3.0 + 1e-9
            if np.isfinite(value):
                again = quantity(key).values(medium, directions(at))[sheet, 0]
                assert again == pytest.approx(value, rel=1e-9)
        assert cone.least <= cone.value <= cone.greatest


def test_whole_hemisphere_gives_the_global_extremes():
    medium = medium_of(TRICLINIC)
    (young,) = cone_extremes(medium, np.array([0.0, 0.0, 1.0]), 90.0, "young")
    assert young.least == pytest.approx(extremes(medium)["young"][0].value, rel=1e-9)
    assert young.greatest == pytest.approx(extremes(medium)["young"][1].value, rel=1e-9)
    speeds = cone_extremes(medium, np.array([0.0, 0.0, 1.0]), 90.0, "phase")
    for cone, key in zip(speeds, ("fast", "middle", "slow"), strict=True):
        least, greatest = extremes(medium)[key]
        assert cone.least == pytest.approx(least.value, rel=1e-6)
        assert cone.greatest == pytest.approx(greatest.value, rel=1e-6)


def test_silicon_wafer_off_the_cube_axis():
    """About [001] E is least, and within 3° it is greatest towards [111], on the edge:
    1/E = S11 - 2 (S11 - S12 - S44/2) (n1² n2² + n2² n3² + n3² n1²) (Nye 1957, chapter 8)."""
    table = cubic(165.7, 63.9, 79.6)
    s = np.linalg.inv(table)
    (cone,) = cone_extremes(medium_of(table), np.array([0.0, 0.0, 1.0]), 3.0, "young")
    sine, cosine = np.sin(np.radians(3.0)) ** 2, np.cos(np.radians(3.0)) ** 2
    shape = sine * cosine + sine**2 / 4
    greatest = 1 / (s[0, 0] - 2 * (s[0, 0] - s[0, 1] - s[3, 3] / 2) * shape)
    assert cone.value == pytest.approx(1 / s[0, 0], rel=1e-12)
    assert cone.least == pytest.approx(1 / s[0, 0], rel=1e-12)
    assert cone.greatest == pytest.approx(greatest, rel=1e-10)
    across = cone.greatest_direction[:2]
    assert abs(across[0]) == pytest.approx(abs(across[1]), rel=1e-3)
    assert cone.slope == pytest.approx(0.0, abs=1e-6)


def test_slope_in_closed_form():
    """In the plane (010) of a cubic crystal, E as above: its derivative by the tilt."""
    table = cubic(165.7, 63.9, 79.6)
    s = np.linalg.inv(table)
    factor = 2 * (s[0, 0] - s[0, 1] - s[3, 3] / 2)
    tilt = np.radians(20.0)
    shape, change = np.sin(2 * tilt) ** 2 / 4, np.sin(4 * tilt) / 2
    young = 1 / (s[0, 0] - factor * shape)
    n = np.array([np.sin(tilt), 0.0, np.cos(tilt)])
    (cone,) = cone_extremes(medium_of(table), n, 1.0, "young")
    assert cone.slope == pytest.approx(young**2 * factor * change * np.pi / 180, rel=1e-6)
    assert cone.steepest == pytest.approx([np.cos(tilt), 0.0, -np.sin(tilt)], abs=1e-6)


@pytest.mark.parametrize("key", list(QUANTITIES))
def test_tilting_towards_the_steepest_changes_as_the_slope_says(key):
    medium, n = medium_of(TRICLINIC), np.array([0.48, 0.6, 0.64])
    small = np.radians(0.01)
    for sheet, cone in enumerate(cone_extremes(medium, n, 1.0, key)):
        assert abs(cone.steepest @ n) < 1e-12
        both = np.stack([n + small * cone.steepest, n - small * cone.steepest], axis=1)
        up, down = quantity(key).values(medium, directions(both))[sheet]
        assert (up - down) / 0.02 == pytest.approx(cone.slope, rel=1e-4)


def test_slope_at_the_point_of_a_cusp():
    """On an acoustic axis the sheets have no gradient but slopes; the steepest is reported."""
    medium = medium_of(TRICLINIC)
    axis = next(a for a in acoustic_axes(medium) if a.kind == "conical")
    cone = cone_extremes(medium, axis.direction, 1.0, "phase")[axis.pair + 1]
    phase = np.linspace(0, 2 * np.pi, 721)
    first = np.cross(axis.direction, [0.0, 1.0, 0.0])
    first /= np.linalg.norm(first)
    second = np.cross(axis.direction, first)
    small = np.radians(0.001)
    around = axis.direction[:, None] + small * (
        np.outer(first, np.cos(phase)) + np.outer(second, np.sin(phase))
    )
    change = quantity("phase").values(medium, directions(around))[axis.pair + 1] - cone.value
    steepest = change[np.argmax(np.abs(change))] / 0.001
    assert cone.slope == pytest.approx(steepest, rel=5e-3)


def test_focusing_has_no_bound_where_a_caustic_crosses_the_cone():
    """Germanium's slow waves have caustics near [001]: Maris 1971, J. Acoust. Soc. Am. 50, 812.
    (The article is cited from memory.)"""
    medium = medium_of(cubic(128.35, 48.23, 66.66), 5323.0)
    wide = cone_extremes(medium, np.array([0.02, 0.01, 1.0]), 20.0, "focusing")
    assert any(np.isinf(cone.greatest) for cone in wide)
    assert all(np.isfinite(cone.least) for cone in wide)
    assert np.isfinite(wide[0].greatest)


def test_isotropic_solid_has_no_cutting_error():
    medium = medium_of(isotropic(100.0, 50.0))
    for key in ("young", "poisson_least", "phase", "wave"):
        for cone in cone_extremes(medium, np.array([1.0, 2.0, 3.0]), 5.0, key):
            assert cone.greatest - cone.least < 1e-9 * abs(cone.value)


def test_part_axes_are_the_rows_of_the_rotation():
    """The same numbers from the crystal turned into the part axes."""
    turn = random_rotation(np.random.default_rng(4))
    medium = medium_of(TRICLINIC)
    by_axis = axis_tolerances(medium, turn, 2.0, "young")
    assert list(by_axis) == ["X", "Y", "Z"]
    for k, (cone,) in enumerate(by_axis.values()):
        (same,) = cone_extremes(medium.rotated(turn), np.eye(3)[k], 2.0, "young")
        assert (cone.least, cone.greatest) == pytest.approx(
            (same.least, same.greatest), rel=1e-9
        )
        assert turn @ cone.greatest_direction == pytest.approx(
            same.greatest_direction, abs=1e-4
        )


@pytest.mark.parametrize("half_angle", [0.0, -1.0, 90.5, float("nan")])
def test_angles_that_are_no_cone_are_refused(half_angle):
    medium = medium_of(TRICLINIC)
    with pytest.raises(InputError, match="cone"):
        cone_extremes(medium, np.array([0.0, 0.0, 1.0]), half_angle, "young")
    with pytest.raises(InputError, match="cone"):
        cost_map(medium, sphere_mesh(3), half_angle, "young")


def test_unknown_quantity_is_refused():
    with pytest.raises(InputError, match="yung"):
        cone_extremes(medium_of(TRICLINIC), np.array([0.0, 0.0, 1.0]), 1.0, "yung")


# --- maps -----------------------------------------------------------------------------


@pytest.mark.parametrize("key", MAPPED)
@pytest.mark.parametrize("half_angle", [1.0, 2.0, 5.0, 10.0])
def test_map_equals_the_exact_cone(key, half_angle):
    """Within the stated part of the greatest change, and ten times nearer in the median."""
    medium, mesh = medium_of(TRICLINIC), sphere_mesh(5)
    mapped = cost_map(medium, mesh, half_angle, key)
    assert mapped.shape == (quantity(key).sheets, mesh.half.count)
    errors = []
    for k in np.random.default_rng(5).choice(mesh.half.count, 12, replace=False):
        cones = cone_extremes(medium, mesh.half.n[:, k], half_angle, key)
        exact = [max(cone.greatest - cone.value, cone.value - cone.least) for cone in cones]
        errors.append(np.abs(mapped[:, k] - exact) / mapped.max(axis=1))
    assert np.max(errors) < MAPPED[key]
    assert np.median(errors) < 0.1 * max(MAPPED[key], 0.03)


def test_map_of_an_isotropic_solid_is_zero():
    mapped = cost_map(medium_of(isotropic(100.0, 50.0)), sphere_mesh(4), 3.0, "young")
    assert np.abs(mapped).max() < 1e-9


def test_map_has_the_symmetry_of_the_crystal():
    """Along a cube axis of silicon the change is that of the wafer above."""
    mesh, table = sphere_mesh(5), cubic(165.7, 63.9, 79.6)
    mapped = cost_map(medium_of(table), mesh, 2.0, "young")[0]
    for axis in np.eye(3):
        k = int(np.argmax(np.abs(axis @ mesh.half.n)))
        (cone,) = cone_extremes(medium_of(table), mesh.half.n[:, k], 2.0, "young")
        exact = max(cone.greatest - cone.value, cone.value - cone.least)
        assert mapped[k] == pytest.approx(exact, rel=0.05)


def test_map_is_quick():
    """3 ms for E and the speeds at 10,242 directions; three times that on a busy machine."""
    medium, mesh = medium_of(TRICLINIC), sphere_mesh(5)
    for key in ("young", "phase"):
        cost_map(medium, mesh, 2.0, key)
        spent = []
        for _ in range(15):
            start = time.process_time()
            cost_map(medium, mesh, 2.0, key)
            spent.append(time.process_time() - start)
        assert np.median(spent) < 0.009
