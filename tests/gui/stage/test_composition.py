"""The order of drawing, the section curve, and the arrays under them."""

from dataclasses import replace

import numpy as np
import pytest

from gui.stage import composition
from gui.stage.camera import Camera
from gui.stage.raster import places_in_run, rasterise
from gui.stage.remembered import Remembered
from gui.theme import LIGHT
from tests.gui.stage.shapes import PART, ellipsoid, pane_view, sheet, three_sheets


def test_sheets_are_drawn_from_the_inside_whatever_their_order():
    inner, second, outer = three_sheets(3)
    view = pane_view(outer, inner, second)
    order = composition.layers(view)
    assert [layer.index for layer in order] == [1, 2, 0]
    assert order[0].opacity == 1.0
    assert 0.0 < order[2].opacity < order[1].opacity < 1.0
    opened = composition.layers(replace(view, section=(0.0, 1.0, 0.0), cut_away=True))
    assert [(layer.opacity, layer.is_opened) for layer in opened] == [(1.0, True)] * 3


def test_a_sheet_that_is_nowhere_defined_is_not_drawn():
    rows = np.full_like(ellipsoid(1, 1, 1, level=3), np.nan)
    whole = pane_view(sheet(ellipsoid(1, 1, 1, level=3), 3))
    assert composition.layers(replace(whole, sheets=(sheet(rows, 3),))) == ()


def test_the_half_towards_the_viewer_is_cut_away():
    view = pane_view(*three_sheets(3), section=(0.0, 1.0, 0.0), cut_away=True)
    for azimuth in (-60.0, 60.0):
        camera = Camera(azimuth)
        assert composition.kept_half(view, camera) @ camera.eye() < 0.0
    assert composition.kept_half(replace(view, cut_away=False), Camera()) is None


@pytest.mark.parametrize("normal", [(0.0, 1.0, 0.0), (0.6, 0.0, 0.8), (0.48, 0.6, 0.64)])
def test_the_section_curve_of_an_ellipsoid_is_an_ellipse(normal):
    half_axes = np.array([1.0, 0.7, 1.2])
    item = sheet(ellipsoid(*half_axes, level=5), 5)  # edges of 2°: chords within 1e-3
    segments = composition.section_segments(item.rows, item.triangles, normal)
    points = segments.reshape(-1, 3).astype(float)
    assert np.abs(points @ np.array(normal)).max() < 1e-6
    assert np.abs(((points / half_axes) ** 2).sum(axis=1) - 1).max() < 2e-3
    first = composition.disc_rim(normal, 3)[:, 0] / composition.DISC_RADIUS
    second = np.cross(normal, first)
    # The ellipse in the plane: u² A + 2 u v B + v² C = 1 has the area π/√(AC − B²).
    inverse = np.diag(half_axes**-2.0)
    a, b, c = first @ inverse @ first, first @ inverse @ second, second @ inverse @ second
    u, v = points @ first, points @ second
    area = np.abs(u[::2] * v[1::2] - u[1::2] * v[::2]).sum() / 2
    assert area == pytest.approx(np.pi / np.sqrt(a * c - b * b), rel=2e-3)


def test_undefined_vertices_leave_gaps_in_the_section_curve():
    item = sheet(ellipsoid(1, 1, 1))
    rows = item.rows.copy()
    rows[:, rows[2] > 0.5] = np.nan
    segments = composition.section_segments(rows, item.triangles, (0.0, 1.0, 0.0))
    assert np.isfinite(segments).all()
    assert segments[..., 2].max() < 0.55
    assert len(segments) > 20


def test_lines_of_a_view():
    ticks = np.array([[[0, 0, 1.0], [0, 0.2, 1.0]]])
    view = pane_view(sheet(ellipsoid(1, 1, 1, level=3), 3), ticks=ticks, section=(0, 1, 0))
    lines = composition.free_lines(view, LIGHT)
    axes, behind, tick, ring = lines
    assert np.allclose(axes.segments[:, 1], composition.AXIS_REACH * np.array(PART.directions))
    assert behind.colour.alphaF() < 0.5
    assert np.allclose(tick.segments, ticks / view.radius)
    reach = np.linalg.norm(ring.segments, axis=2)
    assert np.allclose(reach, composition.DISC_RADIUS, atol=1e-6)
    crystal = replace(PART, kind="crystal", labels=("a", "b", "c"))
    dashed = composition.free_lines(replace(view, triads=(crystal,)), LIGHT)[0]
    assert dashed.dash > 0.0


def test_rasterised_triangles_tile_a_square_without_gap_or_overlap():
    rng = np.random.default_rng(3)
    inner = rng.uniform(3, 37, 2)
    corners = np.array([[0.2, 0.3], [39.7, 0.1], [39.9, 39.6], [0.4, 39.8]])
    fan = np.stack([np.stack([corners, np.roll(corners, -1, 0)], 1)[:, 0],
                    np.roll(corners, -1, 0), np.tile(inner, (4, 1))], axis=1)
    linear = fan @ np.array([2.0, -3.0]) + 5.0
    found = rasterise(fan, linear[..., None], 40, 40)
    assert len(np.unique(found.pixel)) == len(found.pixel)
    assert len(found.pixel) == pytest.approx(39.5**2, rel=0.03)
    y, x = np.divmod(found.pixel, 40)
    assert np.allclose(found.values[0], 2 * (x + 0.5) - 3 * (y + 0.5) + 5, atol=2e-4)


def test_triangles_beyond_the_picture_are_clipped():
    triangle = np.array([[[-50.0, -50.0], [90.0, -50.0], [-50.0, 90.0]]])
    found = rasterise(triangle, np.ones((1, 3, 1)), 20, 10)
    assert sorted(found.pixel.tolist()) == list(range(200))
    away = rasterise(triangle - 300.0, np.ones((1, 3, 1)), 20, 10)
    assert len(away.pixel) == 0


def test_places_in_run():
    assert places_in_run(np.array([3, 0, 2])).tolist() == [0, 1, 2, 0, 1]


def test_results_are_remembered_by_identity():
    made = []
    memory = Remembered(2)
    array = np.arange(3)

    def make():
        made.append(1)
        return len(made)

    assert memory.get((array, 1.0), make) == 1
    assert memory.get((array, 1.0), make) == 1
    assert memory.get((array, 2.0), make) == 2
    assert memory.get((array.copy(), 1.0), make) == 3
    assert memory.get((array, 1.0), make) == 4  # the oldest of two was forgotten
