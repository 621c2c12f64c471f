"""Picking against surfaces whose points are known exactly."""

from dataclasses import replace

import numpy as np
import pytest

from core.directional.sphere import sphere_mesh
from gui.stage import picking
from gui.stage.camera import Camera
from tests.gui.stage.shapes import cubic_young, ellipsoid, pane_view, sheet, three_sheets

SIZE = (600, 560)
CAMERA = Camera(-50.0, 24.0)


def angle(a, b):
    cosine = float(np.dot(a, b) / np.linalg.norm(a) / np.linalg.norm(b))
    return np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0)))


def visible_directions(count, least=0.35):
    """Directions on the side of the camera, well away from the outline."""
    rng = np.random.default_rng(11)
    n = rng.standard_normal((3, 20 * count))
    n /= np.linalg.norm(n, axis=0)
    return n[:, CAMERA.basis()[2] @ n > least][:, :count].T


def test_the_direction_under_a_pixel_is_the_one_that_projects_there():
    half_axes = np.array([1.0, 0.8, 1.15])
    view = pane_view(sheet(ellipsoid(*half_axes)))
    for n in visible_directions(30, least=0.5):
        point = n / np.sqrt(((n / half_axes) ** 2).sum())  # on the ellipsoid itself
        (x, y), _ = CAMERA.project(point[:, None] / view.radius, SIZE)
        hit = picking.pick(view, CAMERA, SIZE, (x[0], y[0]))
        assert angle(hit.direction, n) < 0.2


def test_beside_the_surface_there_is_nothing():
    view = pane_view(sheet(ellipsoid(1, 1, 1)))
    assert picking.pick(view, CAMERA, SIZE, (3.0, 3.0)) is None


def test_the_front_sheet_is_picked_and_a_hidden_one_is_not():
    view = pane_view(*three_sheets())
    middle = (SIZE[0] / 2, SIZE[1] / 2)
    assert picking.pick(view, CAMERA, SIZE, middle).sheet == 2
    inner, second, outer = view.sheets
    without = replace(view, sheets=(inner, second, replace(outer, visible=False)))
    assert picking.pick(without, CAMERA, SIZE, middle).sheet == 1


def test_what_is_cut_away_is_not_picked():
    section = (0.0, 0.0, 1.0)
    view = pane_view(sheet(ellipsoid(1, 1, 1)), section=section, cut_away=True)
    camera = Camera().looking_along(section)
    hit = picking.pick(view, camera, SIZE, (SIZE[0] / 2 + 1.0, SIZE[1] / 2))
    assert angle(hit.direction, (0, 0, -1)) < 1.0
    closed = replace(view, cut_away=False)
    hit = picking.pick(closed, camera, SIZE, (SIZE[0] / 2 + 1.0, SIZE[1] / 2))
    assert angle(hit.direction, (0, 0, 1)) < 1.0


def wave_of_an_ellipsoid(half_axes):
    """The surface of points x with x/a² along n, but told by its normals: x = a² n / |a n|."""
    n = sphere_mesh(4).vertices
    a = np.array(half_axes)[:, None]
    points = a * a * n / np.sqrt(((a * n) ** 2).sum(axis=0))
    return np.vstack([points, n, np.linalg.norm(points, axis=0)[None]]).astype(np.float32)


def test_on_a_wave_surface_the_normal_is_picked():
    half_axes = (1.0, 0.7, 1.2)
    rows = wave_of_an_ellipsoid(half_axes)
    view = replace(pane_view(sheet(rows)), is_wave_surface=True)
    a = np.array(half_axes)
    for n in visible_directions(20, least=0.5):
        point = a * a * n / np.linalg.norm(a * n)
        (x, y), _ = CAMERA.project(point[:, None] / view.radius, SIZE)
        hit = picking.pick(view, CAMERA, SIZE, (x[0], y[0]))
        assert angle(hit.direction, n) < 0.3
        found = picking.surface_point(view, tuple(n)) * view.radius
        assert np.linalg.norm(found - point) < 0.004


def test_surface_point_lies_on_the_outermost_visible_sheet():
    half_axes = np.array([0.9, 1.0, 1.3])
    outer = sheet(ellipsoid(*half_axes))
    view = pane_view(sheet(ellipsoid(0.3, 0.3, 0.3)), outer)
    for n in visible_directions(20, least=-1.0):
        exact = n / np.sqrt(((n / half_axes) ** 2).sum()) / view.radius
        found = picking.surface_point(view, tuple(n))
        assert angle(found, n) < 1e-4
        assert np.linalg.norm(found) == pytest.approx(np.linalg.norm(exact), rel=2e-3)
    hidden = replace(view, sheets=(view.sheets[0], replace(outer, visible=False)))
    found = picking.surface_point(hidden, (0.0, 0.0, 1.0))
    assert np.linalg.norm(found) * view.radius == pytest.approx(0.3, rel=1e-3)


def test_where_nothing_is_defined_there_is_no_point():
    rows = ellipsoid(1, 1, 1)
    rows[:, rows[2] > 0.7] = np.nan
    view = pane_view(sheet(rows))
    assert picking.surface_point(view, (0.0, 0.0, 1.0)) is None
    assert picking.surface_point(view, (0.0, 0.0, -1.0)) is not None


def test_the_far_side_and_what_lies_behind_a_lobe_are_hidden():
    view = pane_view(sheet(cubic_young(40, 200)))
    towards = CAMERA.basis()[2]
    near = picking.surface_point(view, tuple(towards))
    hidden = picking.are_hidden(view, CAMERA, SIZE, np.stack([near, -near, 2 * near], axis=1))
    assert hidden.tolist() == [False, True, False]
    lobe = picking.surface_point(view, (0.57735, -0.57735, 0.57735))
    origin = CAMERA.eye()
    behind_lobe = lobe + 0.25 * (lobe - origin) / np.linalg.norm(lobe - origin)
    assert picking.are_hidden(view, CAMERA, SIZE, behind_lobe[:, None]).all()
