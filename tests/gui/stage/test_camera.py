"""The camera against geometry checked by hand, and its parts against one another."""

import math

import numpy as np
import pytest

from gui.stage.camera import DISTANCE, GREATEST_ZOOM, HALF_EXTENT, Camera

SIZE = (640, 480)


def test_looking_along_z_lays_x_right_and_y_up():
    camera = Camera().looking_along((0.0, 0.0, 1.0))
    (x, y), depth = camera.project(np.array([[0, 1, 0], [0, 0, 1], [0, 0, 0]], float), SIZE)
    assert np.allclose([x[0], y[0]], [320, 240])
    assert x[1] > 320
    assert y[1] == pytest.approx(240)
    assert y[2] < 240
    assert x[2] == pytest.approx(320)
    assert np.allclose(depth, DISTANCE)


def test_looking_along_minus_y_lays_x_right_and_z_up():
    right, up, towards = Camera().looking_along((0.0, -1.0, 0.0)).basis()
    assert np.allclose([right, up, towards], [[1, 0, 0], [0, 0, 1], [0, -1, 0]], atol=1e-12)


def test_the_usual_view_has_x_right_and_forward_y_right_and_back_z_up():
    right, up, towards = Camera().basis()
    assert right[0] > 0.3
    assert towards[0] > 0.3
    assert right[1] > 0.3
    assert towards[1] < -0.3
    assert up[2] > 0.8
    assert np.allclose(np.cross(right, up), towards)


def test_size_at_the_origin_follows_the_shorter_side():
    camera = Camera().looking_along((0.0, 0.0, 1.0))
    (x, _), _ = camera.project(np.array([[HALF_EXTENT], [0.0], [0.0]]), SIZE)
    assert x[0] == pytest.approx(320 + 240)
    assert camera.pixels_per_unit(SIZE) == pytest.approx(240 / HALF_EXTENT)


def test_nearer_points_look_larger():
    camera = Camera().looking_along((0.0, 0.0, 1.0))
    near_and_far = np.array([[0.5, 0.5], [0.0, 0.0], [1.0, -1.0]])
    (x, _), _ = camera.project(near_and_far, SIZE)
    assert (x[0] - 320) / (x[1] - 320) == pytest.approx((DISTANCE + 1) / (DISTANCE - 1))


def test_the_matrix_and_the_projection_agree():
    rng = np.random.default_rng(5)
    points = rng.uniform(-1, 1, (3, 40))
    camera = Camera(33.0, -41.0, 1.7)
    clip = camera.matrix(SIZE) @ np.vstack([points, np.ones(40)])
    (x, y), depth = camera.project(points, SIZE)
    assert np.allclose((clip[0] / clip[3] + 1) / 2 * SIZE[0], x)
    assert np.allclose((1 - clip[1] / clip[3]) / 2 * SIZE[1], y)
    assert np.allclose(clip[3], depth)


def test_a_tile_is_the_same_picture_cut_out():
    rng = np.random.default_rng(6)
    points = np.vstack([rng.uniform(-1, 1, (3, 40)), np.ones((1, 40))])
    camera, tile = Camera(), (200, 100, 160, 120)
    whole, part = camera.matrix(SIZE) @ points, camera.matrix(SIZE, tile) @ points
    x = (part[0] / part[3] + 1) / 2 * tile[2] + tile[0]
    y = (1 - part[1] / part[3]) / 2 * tile[3] + tile[1]
    assert np.allclose(x, (whole[0] / whole[3] + 1) / 2 * SIZE[0])
    assert np.allclose(y, (1 - whole[1] / whole[3]) / 2 * SIZE[1])


def test_a_ray_passes_through_the_points_that_project_to_its_pixel():
    point = np.array([0.3, -0.7, 0.45])
    camera = Camera(70.0, 15.0, 0.8)
    (x, y), _ = camera.project(point[:, None], SIZE)
    origin, ray = camera.ray((x[0], y[0]), SIZE)
    assert np.linalg.norm(ray) == pytest.approx(1.0)
    assert np.allclose(np.cross(point - origin, ray), 0.0, atol=1e-12)


def test_a_drag_moves_the_near_side_with_the_pointer():
    camera = Camera(elevation=0.0)
    front = camera.basis()[2][:, None] * 0.9
    (x, y), _ = camera.turned(10.0, 8.0).project(front, SIZE)
    assert x[0] > SIZE[0] / 2
    assert y[0] > SIZE[1] / 2


def test_limits():
    assert Camera(elevation=80.0).turned(0, 500).elevation == 90.0
    assert -180.0 <= Camera(azimuth=170.0).turned(-100, 0).azimuth < 180.0
    assert Camera().zoomed(1e6).zoom == GREATEST_ZOOM


@pytest.mark.parametrize(
    ("camera", "axis"),
    [
        (Camera(4.0, 5.0), (1.0, 0.0, 0.0)),
        (Camera(-95.0, 20.0), (0.0, -1.0, 0.0)),
        (Camera(40.0, -70.0), (0.0, 0.0, -1.0)),
    ],
)
def test_nearest_axis(camera, axis):
    assert camera.nearest_axis() == axis
    towards = camera.looking_along(axis).basis()[2]
    assert math.degrees(math.acos(min(1.0, float(towards @ np.array(axis))))) < 1e-5
