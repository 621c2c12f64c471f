"""Direction sets and sphere meshes."""

from collections import deque
from math import factorial, prod

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.directional.sphere import (
    QUARTIC_EXPONENTS,
    directions,
    great_circle,
    mixed_products,
    pair_products,
    perpendicular_circle,
    plane_axes,
    sphere_mesh,
    symmetric_times,
)
from core.tensor.notation import VOIGT_PAIRS

AXIS = np.eye(3)
LEVELS = (0, 1, 2, 3, 4)
components = st.floats(-1.0, 1.0, allow_nan=False)
vectors = st.tuples(components, components, components).filter(
    lambda v: sum(c * c for c in v) > 1e-6
)


def random_directions(count, seed=0):
    return directions(np.random.default_rng(seed).normal(size=(3, count)))


def as_matrix(form):
    """A symmetric matrix (3, 3) of its six components in the order 11 22 33 23 13 12."""
    matrix = np.empty((3, 3))
    for component, (i, j) in zip(form, VOIGT_PAIRS, strict=True):
        matrix[i, j] = matrix[j, i] = component
    return matrix


# ---------------------------------------------------------------- the mesh


@pytest.mark.parametrize("level", LEVELS)
def test_mesh_is_a_closed_sphere(level):
    mesh = sphere_mesh(level)
    count = mesh.vertices.shape[1]
    assert count == 10 * 4**level + 2
    edges = np.stack([mesh.triangles, np.roll(mesh.triangles, -1, axis=1)], axis=-1)
    directed = {tuple(edge) for edge in edges.reshape(-1, 2).tolist()}
    # Every edge runs once each way: closed, and all triangles turn the same way round.
    assert len(directed) == 3 * len(mesh.triangles)
    assert {(b, a) for a, b in directed} == directed
    assert count - len(directed) // 2 + len(mesh.triangles) == 2  # Euler


@pytest.mark.parametrize("level", LEVELS)
def test_triangles_face_outward_and_cover_the_sphere_once(level):
    mesh = sphere_mesh(level)
    a, b, c = (mesh.vertices[:, corner] for corner in mesh.triangles.T.astype(int))
    triple = (a * np.cross(b, c, axis=0)).sum(axis=0)
    assert triple.min() > 0
    # Solid angle of a triangle: Van Oosterom & Strackee 1983, IEEE Trans. Biomed. Eng. 30, 125.
    cosines = 1 + (a * b).sum(axis=0) + (b * c).sum(axis=0) + (c * a).sum(axis=0)
    assert 2 * np.arctan2(triple, cosines).sum() == pytest.approx(4 * np.pi, rel=1e-12)


@pytest.mark.parametrize("level", LEVELS)
def test_second_half_is_exactly_minus_the_first(level):
    mesh = sphere_mesh(level)
    half = mesh.half.count
    assert np.array_equal(mesh.vertices[:, :half], mesh.half.n)
    assert np.array_equal(mesh.vertices[:, half:], -mesh.half.n)
    assert mesh.half.n[2].min() >= 0
    assert np.abs((mesh.vertices**2).sum(axis=0) - 1).max() < 1e-15


def test_mesh_holds_the_coordinate_axes():
    n = sphere_mesh(3).half.n
    for axis in AXIS:
        assert np.abs(axis @ n).max() == 1.0


@pytest.mark.parametrize("level", [3, 4])
def test_neighbours_are_the_nearest_directions(level):
    mesh = sphere_mesh(level)
    half = mesh.half.count
    cosine = np.abs(mesh.half.n.T @ mesh.half.n)
    np.fill_diagonal(cosine, -1)
    five_fold = 0
    for vertex in range(half):
        table = set(mesh.neighbours[:, vertex].tolist())
        five_fold += vertex in table
        around = table - {vertex}
        assert len(around) == 6 - (vertex in table)
        assert around == set(np.argsort(cosine[vertex])[-len(around) :].tolist())
    assert five_fold == 6  # of the twelve corners of the icosahedron, antipodes folded


def misses(triangles, size):
    """Vertices fetched per triangle by a first-in first-out cache."""
    cache, fetched = deque(maxlen=size), 0
    for vertex in triangles.ravel().tolist():
        if vertex not in cache:
            cache.append(vertex)
            fetched += 1
    return fetched / len(triangles)


def test_triangles_are_ordered_for_the_vertex_cache():
    triangles = sphere_mesh(4).triangles
    shuffled = np.random.default_rng(0).permutation(triangles)
    assert misses(triangles, 16) < 1.15
    assert misses(shuffled, 16) > 2.5


def test_vertices_are_numbered_in_order_of_first_use():
    mesh = sphere_mesh(4)
    used, first = np.unique(mesh.triangles, return_index=True)
    half = first[used < mesh.half.count]
    assert np.all(np.diff(half) > 0)


def test_meshes_are_kept_and_closed_to_writing():
    mesh = sphere_mesh(3)
    assert sphere_mesh(3) is mesh
    for array in (mesh.vertices, mesh.triangles, mesh.neighbours, mesh.half.quartics):
        with pytest.raises(ValueError, match="read-only"):
            array[0, 0] = 0


@pytest.mark.parametrize("level", [-1, 9])
def test_impossible_level_is_refused(level):
    with pytest.raises(ValueError, match="levels"):
        sphere_mesh(level)


# ---------------------------------------------------------------- direction sets


def test_directions_are_normalised():
    n = directions(np.array([[3.0, 0.0], [4.0, 0.0], [0.0, -2.0]])).n
    assert np.allclose(n, [[0.6, 0.0], [0.8, 0.0], [0.0, -1.0]], atol=1e-16)
    assert directions(np.array([0.0, 0.0, 5.0])).n.shape == (3, 1)
    once = random_directions(200).n
    assert np.array_equal(directions(once).n, once)


@pytest.mark.parametrize(
    "bad", [np.zeros((2, 4)), np.zeros((3, 1)), np.full((3, 1), np.nan), np.ones((3, 2, 2))]
)
def test_what_has_no_direction_is_refused(bad):
    with pytest.raises(ValueError, match=r"direction"):
        directions(bad)


def test_products_and_quartics_are_the_monomials():
    dirs = random_directions(7)
    x, y, z = dirs.n
    assert np.array_equal(dirs.products, [x * x, y * y, z * z, y * z, x * z, x * y])
    expected = [x**a * y**b * z**c for a, b, c in QUARTIC_EXPONENTS]
    assert np.allclose(dirs.quartics, expected, rtol=1e-14)
    assert len(set(QUARTIC_EXPONENTS)) == 15


@given(vectors)
def test_tangents_complete_a_right_handed_frame(vector):
    dirs = directions(np.array(vector))
    frame = np.column_stack([*(t[:, 0] for t in dirs.tangents), dirs.n[:, 0]])
    assert np.allclose(frame.T @ frame, np.eye(3), atol=1e-14)
    assert np.linalg.det(frame) == pytest.approx(1.0, abs=1e-14)


@pytest.mark.parametrize("pole", [AXIS[2], -AXIS[2], [0.0, 1.0, -0.0]])
def test_tangents_hold_at_the_poles(pole):
    first, second = directions(np.array(pole)).tangents
    assert np.allclose(np.cross(first[:, 0], second[:, 0]), pole, atol=1e-15)


def test_plane_rows_give_the_deviator_in_the_tangent_plane():
    dirs = random_directions(9)
    form = np.random.default_rng(1).normal(size=6)
    matrix = as_matrix(form)
    first, second = dirs.tangents
    along = [np.einsum("in,ij,jn->n", t, matrix, t) for t in (first, second)]
    h, b = (form @ rows for rows in dirs.plane_rows)
    assert np.allclose(h, (along[0] - along[1]) / 2, atol=1e-14)
    assert np.allclose(b, np.einsum("in,ij,jn->n", first, matrix, second), atol=1e-14)


def test_transverse_rows_differentiate_the_quartic():
    """T(n, n, a, a) of f = (g.n)^4 is (g.n)² (g.a)², which needs no Hessian."""
    dirs = random_directions(9)
    g = np.array([0.3, -1.1, 0.7])
    quartic = [24 / prod(map(factorial, es)) * prod(g**es) for es in QUARTIC_EXPONENTS]
    first, second = (g @ t for t in dirs.tangents)
    h, b = (quartic @ rows[:15] for rows in dirs.transverse_rows)
    assert np.allclose(h, (g @ dirs.n) ** 2 * (first**2 - second**2) / 2, atol=1e-14)
    assert np.allclose(b, (g @ dirs.n) ** 2 * first * second, atol=1e-14)


def test_symmetric_helpers_agree_with_matrices():
    rng = np.random.default_rng(2)
    a, b, form = rng.normal(size=(3, 4)), rng.normal(size=(3, 4)), rng.normal(size=(6, 4))
    for k in range(4):
        outer = np.outer(a[:, k], b[:, k])
        assert np.allclose(as_matrix(mixed_products(a, b)[:, k]), (outer + outer.T) / 2)
        assert np.allclose(as_matrix(pair_products(a)[:, k]), np.outer(a[:, k], a[:, k]))
        product = as_matrix(form[:, k]) @ a[:, k]
        assert np.allclose(symmetric_times(form, a)[:, k], product)
        assert np.allclose(symmetric_times(form[:, k], a[:, k]), product)


# ---------------------------------------------------------------- planes and circles


@pytest.mark.parametrize(
    ("normal", "right", "up"),
    [(2, 0, 1), (1, 0, 2), (0, 1, 2)],
)
@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_coordinate_planes_read_as_usual(normal, right, up, sign):
    first, second = plane_axes(sign * AXIS[normal])
    assert np.array_equal(first, AXIS[right])
    assert np.array_equal(second, AXIS[up])


@given(vectors)
def test_plane_axes_are_orthonormal_in_the_plane(vector):
    normal = np.array(vector) / np.linalg.norm(vector)
    first, second = plane_axes(normal)
    frame = np.column_stack([first, second, normal])
    assert np.allclose(frame.T @ frame, np.eye(3), atol=1e-8)


def test_an_inclined_plane_reads_counter_clockwise_with_x_to_the_right():
    normal = np.array([0.2, -0.5, 0.8])
    first, second = plane_axes(normal)
    assert np.allclose(np.cross(first, second), normal / np.linalg.norm(normal))
    assert first[0] > 0
    assert abs(first @ np.cross(normal, AXIS[0])) < 1e-15  # the projection of X itself
    steep = plane_axes(np.array([1.0, 0.1, 0.0]))[0]
    assert steep[1] > 0.9


@pytest.mark.parametrize("count", [721, 361, 9, 8])
def test_great_circle_is_closed_and_lies_in_its_plane(count):
    normal = np.array([1.0, 2.0, -0.5])
    circle = great_circle(normal, count).n
    assert circle.shape == (3, count)
    assert np.array_equal(circle[:, 0], circle[:, -1])
    assert np.abs(normal @ circle).max() < 1e-14
    steps = np.einsum("in,in->n", circle[:, 1:], circle[:, :-1])
    assert np.allclose(steps, np.cos(2 * np.pi / (count - 1)), atol=1e-14)
    if count % 2:
        assert np.array_equal(circle[:, count // 2 :], -circle[:, : count // 2 + 1])


def test_circle_starts_to_the_right_and_turns_up():
    circle = perpendicular_circle(AXIS[1], 5)
    assert np.allclose(circle.T, [AXIS[0], AXIS[2], -AXIS[0], -AXIS[2], AXIS[0]], atol=1e-15)
