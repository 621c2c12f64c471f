"""The mended mesh: closed, outward, with the lids and the creases that closed forms say."""

import numpy as np
import pytest

from core.directional.acoustic_axes import acoustic_axes
from core.directional.medium import Medium
from core.directional.quantities import QUANTITIES
from core.directional.seams import SPOKES, edge_angle, find_seams, mend
from core.directional.sphere import sphere_mesh
from core.tensor.stiffness import Stiffness
from tests.materials import (
    cubic,
    hexagonal,
    isotropic,
    random_physical,
    random_rotation,
    rotated,
)

SILICON = cubic(165.7, 63.9, 79.6)  # Hopcroft, Nix & Kenny 2010, J. MEMS 19(2), 229
C66, C44, RHO = 36.0, 38.3, 7000.0
# Its two shear sheets cross on a cone about c (invented; after zinc, with a smaller C66).
CROSSING = hexagonal(161.0, 161.0 - 2 * C66, 50.1, 61.0, C44)
TURN = random_rotation(np.random.default_rng(8))
MESH = sphere_mesh(4)


def medium_of(table, density=RHO):
    return Medium(Stiffness.from_voigt(table), density)


def mended(medium, key, mesh=MESH):
    entry = QUANTITIES[key]
    rows = entry.surface(medium, mesh)
    seams = find_seams(medium, mesh, acoustic_axes(medium))
    return mend(seams, medium, mesh, rows, entry.maker)


def edges_of(triangles):
    corners = triangles.astype(int)
    return [tuple(edge) for pair in ((0, 1), (1, 2), (2, 0)) for edge in corners[:, pair]]


MEDIA = {
    "cubic": medium_of(SILICON),
    "turned cubic": medium_of(rotated(SILICON, TURN)),
    "triclinic": medium_of(random_physical(np.random.default_rng(3))),
    "rough": medium_of(random_physical(np.random.default_rng(4), 0.4)),
}


@pytest.mark.parametrize("name", MEDIA)
def test_every_sheet_stays_a_closed_surface(name):
    """Every edge has its opposite, and V - E + F = 2 (Euler)."""
    for sheet in mended(MEDIA[name], "slowness"):
        edges = edges_of(sheet.triangles)
        assert len(set(edges)) == len(edges)
        assert {(b, a) for a, b in edges} == set(edges)
        used = np.unique(sheet.triangles)
        assert len(used) - len(edges) // 2 + len(sheet.triangles) == 2


@pytest.mark.parametrize("name", [*MEDIA, "crossing"])
def test_triangles_face_outward_and_fill_the_sheet(name):
    """A slowness sheet is seen whole from the origin: every triangle has a positive volume.

    The volumes add up to that of a much finer mesh.
    """
    medium = MEDIA.get(name) or medium_of(rotated(CROSSING, TURN))
    fine, mesh = sphere_mesh(6), sphere_mesh(5)
    exact = QUANTITIES["slowness"].surface(medium, fine).astype(float)
    for rows, sheet in zip(exact, mended(medium, "slowness", mesh), strict=True):
        volumes = volumes_of(sheet.rows.astype(float), sheet.triangles)
        assert volumes.min() > -1e-9 * volumes.max()
        assert volumes.sum() == pytest.approx(volumes_of(rows, fine.triangles).sum(), rel=2e-3)


def volumes_of(rows, triangles):
    a, b, c = (rows[:3, triangles[:, corner]] for corner in range(3))
    return (a * np.cross(b, c, axis=0)).sum(axis=0) / 6


def caps_of(sheet, mesh=MESH):
    """Rows of each cap, (caps, 7, SPOKES + 1): all that follows the mesh's own vertices."""
    own = sheet.rows[:, mesh.vertices.shape[1] :].astype(float)
    return own.reshape(7, -1, SPOKES + 1).transpose(1, 0, 2)


def test_the_lid_of_silicon_is_flat_round_and_as_wide_as_its_cone():
    """About 111 the cone is round: tan(angle) = |c11 - c12 - 2 c44| / [√2 (c11 - c12 + c44)].

    de Klerk & Musgrave 1955. The lid touches the wave surface in the plane V.n = v.
    """
    c11, c12, c44 = SILICON[0, 0], SILICON[0, 1], SILICON[3, 3]
    wide = np.arctan(abs(c11 - c12 - 2 * c44) / (np.sqrt(2) * (c11 - c12 + c44)))
    assert np.degrees(wide) == pytest.approx(12.612, abs=0.001)
    v = np.sqrt((c11 - c12 + c44) / 3 * 1e3 / RHO)
    fast, *shear = mended(MEDIA["cubic"], "wave")
    assert fast.triangles.shape == MESH.triangles.shape
    for sheet in shear:
        caps = caps_of(sheet)
        assert len(caps) == 8
        for cap in caps:
            axis = np.sign(cap[3:6, -1]) / np.sqrt(3)
            rays, middle = cap[:3, :-1], cap[:3, -1]
            assert np.allclose(axis @ cap[:3], v, rtol=1e-6)
            assert np.allclose(middle, v * axis, atol=1e-4)
            off = np.linalg.norm(np.cross(axis, rays, axis=0), axis=0)
            assert np.allclose(off, v * np.tan(wide), rtol=1e-3)
            assert np.allclose(axis @ cap[3:6], 1, atol=1e-6)


def test_the_slow_tip_of_silicon_has_the_normals_of_its_cone():
    """On the slowness sheets the lid has no size, and normals stand along the rays."""
    _, middle, _ = mended(MEDIA["cubic"], "slowness")
    for cap in caps_of(middle):
        spread = np.linalg.norm(cap[:3] - cap[:3, -1:], axis=0)
        assert spread.max() < 1e-3 * np.linalg.norm(cap[:3, -1])
        normals = cap[3:6, :-1] / np.linalg.norm(cap[3:6, :-1], axis=0)
        axis = np.sign(cap[:3, -1]) / np.sqrt(3)
        assert np.degrees(np.arccos(axis @ normals)) == pytest.approx(12.612, abs=0.05)


def test_an_axis_on_an_edge_or_a_vertex_is_mended_too():
    vertex = MESH.vertices[:, 100]
    towards = MESH.vertices[:, MESH.neighbours[0, 100] % MESH.half.count]
    towards = towards * np.sign(towards @ vertex)
    for place in (vertex, vertex + 1e-3 * edge_angle(MESH) * towards, vertex + towards):
        place = place / np.linalg.norm(place)
        first = np.cross(place, [0.3, 0.5, 0.8])
        first /= np.linalg.norm(first)
        frame = np.stack([first, np.cross(place, first), place])  # rows
        diagonal = np.array([[1, -1, 0], [1, 1, -2], [1, 1, 1]])
        diagonal = diagonal / np.linalg.norm(diagonal, axis=1, keepdims=True)
        turn = frame.T @ diagonal  # takes 111 to the place
        for sheet in mended(medium_of(rotated(SILICON, turn)), "slowness"):
            edges = edges_of(sheet.triangles)
            assert {(b, a) for a, b in edges} == set(edges)


# ------------------------------------------------------------------ lines
def is_sh(rows):
    """Which vertices are rays of the SH wave: V = (C66 nx, C66 ny, C44 nz)/(ρ v), km/s.

    Its ρv² is C66 (nx² + ny²) + C44 nz² (Musgrave 1970, chapter 8).
    """
    places, n = rows[:3].astype(float), rows[3:6].astype(float)
    n = n / np.linalg.norm(n, axis=0)
    stiff = np.array([[C66], [C66], [C44]])
    speed = np.sqrt((stiff * n * n).sum(axis=0) * 1e3 / RHO)
    return np.linalg.norm(places - stiff * n * 1e3 / RHO / speed, axis=0) < 0.01 * speed


def ribbon(rows, triangles):
    """How many triangles join rays of SH waves to others, 10° and more from c."""
    n = rows[3:6].astype(float) / np.linalg.norm(rows[3:6].astype(float), axis=0)
    sh = is_sh(rows)[triangles]
    away = np.abs(n[2])[triangles].max(axis=1) < np.cos(np.radians(10))
    return (sh.any(axis=1) & ~sh.all(axis=1) & away).sum()


def test_no_ribbon_joins_the_shear_sheets_of_a_hexagonal_crystal():
    medium, mesh = medium_of(CROSSING), sphere_mesh(5)
    plain = QUANTITIES["wave"].surface(medium, mesh)
    for number, sheet in enumerate(mended(medium, "wave", mesh)):
        assert (ribbon(plain[number], mesh.triangles) > 500) == (number > 0)
        assert ribbon(sheet.rows, sheet.triangles) == 0


def test_the_crease_of_the_slowness_sheets_lies_on_the_line():
    """New vertices stand where the two shear speeds are equal, at their common slowness."""
    medium = medium_of(CROSSING)
    (line,) = (axis for axis in acoustic_axes(medium) if axis.kind == "line")
    _, middle, slow = mended(medium, "slowness")
    count = MESH.vertices.shape[1]
    for sheet in (middle, slow):
        added = sheet.rows[:, count:].astype(float)
        assert added.shape[1] > 200
        radius = np.linalg.norm(added[:3], axis=0)
        assert np.allclose(radius, 1 / line.speed, rtol=2e-3)
        height = np.abs(added[2]) / radius
        assert np.allclose(height, abs(line.direction[2]), atol=3e-3)


# ------------------------------------------------------------------ nothing to mend
@pytest.mark.parametrize(
    "table", [isotropic(100.0, 60.0), hexagonal(161.0, 34.2, 50.1, 61.0, 38.3)]
)
def test_sheets_that_only_touch_stay_as_they_are(table):
    medium = medium_of(table)
    rows = QUANTITIES["wave"].surface(medium, MESH)
    for own, sheet in zip(rows, mended(medium, "wave"), strict=True):
        assert np.array_equal(sheet.rows, own)
        assert np.array_equal(sheet.triangles, MESH.triangles)
