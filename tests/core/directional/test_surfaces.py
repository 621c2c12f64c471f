"""Vertices and normals of surfaces: finite differences, spheres, symmetry, holes."""

import numpy as np
import pytest

from core.directional.medium import Medium
from core.directional.quantities import QUANTITIES
from core.directional.sphere import SphereMesh, directions, sphere_mesh
from core.directional.surfaces import ROWS, all_surfaces
from core.directional.waves import group_velocities
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, isotropic, random_physical, random_rotation

STEP = 1e-5
SHAPED = ("young", "compressibility", "shear_least", "shear_greatest", "poisson_least",
          "poisson_greatest", "slowness", "phase", "wave")  # fmt: skip
COLOURED = ("power_flow", "polarisation", "focusing")


def triclinic(seed=1, density=2700.0):
    table = random_physical(np.random.default_rng(seed))
    return Medium(Stiffness.from_voigt(table), density)


def auxetic():
    """Negative Poisson's ratios and a negative linear compressibility, in no special axes."""
    table = cubic(200.0, 60.0, 20.0)
    table[0, 0] = 60.0
    table[0, 1] = table[1, 0] = 90.0
    rotation = random_rotation(np.random.default_rng(4))
    return Medium(Stiffness.from_voigt(table).rotate(rotation), 2500.0)


def points(key, medium, n):
    """Vertices (sheets, 3, N) in double precision, from the definition of the shape."""
    dirs = directions(n)
    if key == "wave":
        return group_velocities(medium, dirs).velocity
    values = QUANTITIES["slowness" if key in COLOURED else key].values(medium, dirs)
    return np.abs(values)[:, None, :] * dirs.n


def scattered_mesh(n):
    """A mesh of scattered directions: surfaces need no triangles."""
    half = directions(n)
    none = np.empty((0, 3), dtype=np.uint32)
    vertices = np.concatenate([half.n, -half.n], axis=1)
    return SphereMesh(0, half, vertices, none, np.empty((6, half.count), dtype=np.intp))


def separated(medium, n):
    """Directions where no two sheets and no two transverse extremes come near one another."""
    keep = np.ones(n.shape[1], dtype=bool)
    speeds = QUANTITIES["phase"].values(medium, directions(n))
    keep &= (speeds[0] - speeds[1] > 0.1) & (speeds[1] - speeds[2] > 0.1)
    for kind in ("shear", "poisson"):
        least, greatest = (
            QUANTITIES[f"{kind}_{end}"].values(medium, directions(n))[0]
            for end in ("least", "greatest")
        )
        keep &= greatest - least > 0.05 * np.abs(greatest).max()
        keep &= (np.abs(least) > 0.02) & (np.abs(greatest) > 0.02)
    keep &= np.abs(QUANTITIES["compressibility"].values(medium, directions(n))[0]) > 0.3
    return n[:, keep]


@pytest.mark.parametrize("make", [triclinic, auxetic])
@pytest.mark.parametrize("key", SHAPED + COLOURED)
def test_normals_are_perpendicular_to_finite_differences(key, make):
    medium = make()
    n = separated(medium, np.random.default_rng(0).normal(size=(3, 150)))
    mesh = scattered_mesh(n)
    count = mesh.half.count
    assert count > 20
    normal = QUANTITIES[key].surface(medium, mesh)[:, 3:6, :count].astype(float)
    normal /= np.sqrt((normal**2).sum(axis=1, keepdims=True))
    for tangent in mesh.half.tangents:
        ahead, behind = (
            points(key, medium, mesh.half.n + s * STEP * tangent) for s in (1, -1)
        )
        along = (ahead - behind) / (2 * STEP)
        size = np.sqrt((along**2).sum(axis=1)).max(axis=1)
        assert np.all(np.abs((along * normal).sum(axis=1)).max(axis=1) < 2e-6 * size)


@pytest.mark.parametrize("make", [triclinic, auxetic])
@pytest.mark.parametrize("key", SHAPED + COLOURED)
def test_normals_point_outward(key, make):
    surface = QUANTITIES[key].surface(make(), sphere_mesh(3)).astype(float)
    # Focusing alone may be undefined in places of a stable medium.
    defined = np.isfinite(surface).all(axis=1)
    assert defined.all() or key == "focusing"
    radial = (surface[:, 0:3] * surface[:, 3:6]).sum(axis=1)
    assert radial[defined].min() > 0


@pytest.mark.parametrize("key", SHAPED + COLOURED)
def test_vertices_and_values_follow_the_quantity(key):
    medium, mesh = triclinic(), sphere_mesh(3)
    entry = QUANTITIES[key]
    surface = entry.surface(medium, mesh)
    values = entry.values(medium, mesh.half)
    half = mesh.half.count
    assert surface.dtype == np.float32
    assert surface.shape == (entry.sheets, len(ROWS), 2 * half)
    assert values.shape == (entry.sheets, half)
    assert np.allclose(surface[:, 6, :half], values, rtol=1e-6, equal_nan=True)
    defined = np.isfinite(values)[:, None, :]
    expected = np.where(defined, points(key, medium, mesh.half.n), np.nan)
    assert np.allclose(surface[:, :3, :half], expected, rtol=1e-6, atol=1e-6, equal_nan=True)


@pytest.mark.parametrize("key", SHAPED + COLOURED)
def test_second_half_is_the_exact_point_reflection(key):
    mesh = sphere_mesh(3)
    surface = QUANTITIES[key].surface(triclinic(), mesh)
    first, second = np.split(surface, 2, axis=2)
    assert np.array_equal(second[:, :6], -first[:, :6], equal_nan=True)
    assert np.array_equal(second[:, 6], first[:, 6], equal_nan=True)


def test_isotropic_surfaces_are_spheres_with_radial_normals():
    medium, mesh = Medium(Stiffness.from_voigt(isotropic(80.0, 45.0)), 2500.0), sphere_mesh(3)
    fast, slow = np.sqrt((80.0 + 60.0) / 2.5), np.sqrt(45.0 / 2.5)
    radii = {
        "young": [9 * 80 * 45 / (3 * 80 + 45)],
        "shear_least": [45.0],
        "shear_greatest": [45.0],
        "poisson_least": [(3 * 80 - 90) / (2 * (3 * 80 + 45))],
        "compressibility": [1e3 / 240],
        "phase": [fast, slow, slow],
        "slowness": [1 / fast, 1 / slow, 1 / slow],
        "wave": [fast, slow, slow],
    }
    for key, expected in radii.items():
        surface = QUANTITIES[key].surface(medium, mesh).astype(float)
        for sheet, radius in zip(surface, expected, strict=True):
            assert np.allclose(sheet[:3], radius * mesh.vertices, atol=1e-6 * radius)
            length = np.sqrt((sheet[3:6] ** 2).sum(axis=0))
            assert np.allclose(sheet[3:6] / length, mesh.vertices, atol=1e-6)


def test_negative_lobes_keep_their_sign_in_the_value_only():
    medium, mesh = auxetic(), sphere_mesh(3)
    for key in ("compressibility", "poisson_least"):
        sheet = QUANTITIES[key].surface(medium, mesh)[0].astype(float)
        assert sheet[6].min() < 0 < sheet[6].max()
        radius = (sheet[:3] * mesh.vertices).sum(axis=0)
        assert np.allclose(radius, np.abs(sheet[6]), atol=1e-5 * np.abs(sheet[6]).max())


def test_undefined_directions_are_nan_in_every_row():
    medium = Medium(Stiffness.from_voigt(cubic(100.0, 120.0, 50.0)), 3000.0)
    mesh = sphere_mesh(3)
    surfaces = all_surfaces(medium, mesh)
    for key in ("young", "shear_greatest", "poisson_least", "slowness", "phase", "wave"):
        block = surfaces[key]
        undefined = np.isnan(block).any(axis=1)
        assert np.array_equal(undefined, np.isnan(block).all(axis=1))
        values = QUANTITIES[key].values(medium, mesh.half)
        assert np.array_equal(undefined[:, : mesh.half.count], np.isnan(values))
        assert 0 < undefined.sum() < undefined.size
        assert np.isfinite(block[:, :, ~undefined.any(axis=0)]).all()


def test_a_colour_that_is_not_defined_leaves_no_hole():
    """Along cube axes two shear waves are one: the slowness is defined, the focusing is not."""
    medium = Medium(Stiffness.from_voigt(cubic(165.7, 63.9, 79.6)), 2330.0)
    mesh = sphere_mesh(3)
    block = QUANTITIES["focusing"].surface(medium, mesh)
    on_axis = np.flatnonzero(np.abs(mesh.vertices).max(axis=0) > 1 - 1e-12)
    assert len(on_axis) == 6
    assert np.isfinite(block[:, :6]).all()
    slowness = np.linalg.norm(block[1:, :3, on_axis].astype(float), axis=1)
    assert np.allclose(slowness, np.sqrt(2.330 / 79.6), rtol=1e-6)
    assert np.isnan(block[1:, 6, on_axis]).all()
    assert np.isfinite(np.delete(block[:, 6], on_axis, axis=1)).all()


def test_singular_stiffness_draws_its_waves_only():
    medium = Medium(Stiffness.from_voigt(cubic(100.0, 100.0, 50.0)), 3000.0)
    surfaces = all_surfaces(medium, sphere_mesh(3))
    assert np.isnan(surfaces["young"]).all()
    assert np.isfinite(surfaces["phase"][0]).all()


def test_one_pass_equals_each_surface_alone():
    medium, mesh = triclinic(2), sphere_mesh(3)
    together = all_surfaces(medium, mesh)
    assert tuple(together) == SHAPED
    for key, surface in together.items():
        alone = QUANTITIES[key].surface(medium, mesh)
        assert np.allclose(surface, alone, rtol=1e-6, atol=1e-6)


def test_a_mesh_of_many_chunks_is_drawn_like_one():
    """Level 6 has 20,481 evaluated directions, in three chunks."""
    medium, mesh = triclinic(2), sphere_mesh(6)
    assert len(mesh.chunks) == 3
    covered = np.concatenate([np.arange(mesh.half.count)[place] for place, _ in mesh.chunks])
    assert np.array_equal(covered, np.arange(mesh.half.count))
    for key in ("shear_least", "wave", "power_flow"):
        block = QUANTITIES[key].surface(medium, mesh)
        values = QUANTITIES[key].values(medium, mesh.half)
        assert np.allclose(block[:, 6, : mesh.half.count], values, rtol=1e-6)
        assert np.array_equal(block[:, :6, mesh.half.count :], -block[:, :6, : mesh.half.count])


def test_without_a_density_only_elastic_surfaces_are_made():
    medium = Medium(triclinic().stiffness)
    assert tuple(all_surfaces(medium, sphere_mesh(2))) == SHAPED[:6]


def test_surfaces_turn_with_the_crystal():
    medium = triclinic(3)
    rotation = random_rotation(np.random.default_rng(5))
    n = separated(medium, np.random.default_rng(6).normal(size=(3, 60)))
    before = all_surfaces(medium, scattered_mesh(n))
    after = all_surfaces(medium.rotated(rotation), scattered_mesh(rotation @ n))
    for key in SHAPED:
        a, b = before[key].astype(float), after[key].astype(float)
        scale = np.abs(a).max(axis=2, keepdims=True).max(axis=1, keepdims=True)
        assert np.allclose(a[:, 6], b[:, 6], rtol=1e-5)
        for rows in (slice(0, 3), slice(3, 6)):
            assert np.all(np.abs(rotation @ a[:, rows] - b[:, rows]) < 2e-6 * scale)
