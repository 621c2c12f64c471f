"""The renderer with OpenGL and the one without, judged by their pixels."""

import os
from dataclasses import replace

import numpy as np
import pytest

from gui.stage.camera import DISTANCE, Camera
from gui.stage.composition import AXIS_REACH
from gui.stage.flat_scene import FlatRenderer
from gui.stage.renderer import REQUIRE_VARIABLE
from gui.theme import LIGHT, NIGHT, colour_table
from tests.gui.stage.images import centroid, covered, rgba
from tests.gui.stage.shapes import (
    cubic_young,
    ellipsoid,
    pane_view,
    scale_of,
    sheet,
    three_sheets,
)

SIZE = (240, 200)
STAGE = LIGHT.colour("stage")
TOP = Camera().looking_along((0.0, 0.0, 1.0))


@pytest.fixture(scope="module")
def gl_renderer(qapp, gl_report):
    if not gl_report.ok:
        is_required = os.environ.get(REQUIRE_VARIABLE) == "1"
        (pytest.fail if is_required else pytest.skip)(gl_report.reason)
    from gui.stage.scene import SceneRenderer

    made = SceneRenderer()
    yield made
    made.close()


@pytest.fixture(params=[pytest.param("gl", marks=pytest.mark.gl), "flat"])
def renderer(request, qapp):
    if request.param == "flat":
        yield FlatRenderer()
        return
    made = request.getfixturevalue("gl_renderer")
    yield made
    from gui.stage.gl import GL
    from gui.stage.gl_context import hidden_context

    with hidden_context().current():
        assert GL.glGetError() == GL.GL_NO_ERROR


def bare(*sheets, **changes):
    return pane_view(*sheets, triads=(), **changes)


def draw(renderer, view, camera=TOP, theme=LIGHT, ground="theme", samples=0, size=SIZE):
    return renderer.render(view, camera, size, theme, ground, samples)


def test_a_sphere_covers_the_disc_that_perspective_says(renderer):
    image = draw(renderer, bare(sheet(ellipsoid(1, 1, 1))))
    mask = covered(image, STAGE)
    # Seen from D, a sphere of radius 1 has the outline of a disc of radius 1/√(1 − 1/D²).
    radius = TOP.pixels_per_unit(SIZE) / np.sqrt(1 - 1 / DISTANCE**2)
    assert mask.sum() == pytest.approx(np.pi * radius**2, rel=0.02)
    x, y = centroid(mask)
    assert (x, y) == pytest.approx((SIZE[0] / 2, SIZE[1] / 2), abs=0.6)


def test_the_picture_is_upright(renderer):
    """X to the right and Y up, seen from Z: a colour by x + 2y is greatest up on the right."""
    view = bare(sheet(ellipsoid(1, 1, 1, value=lambda n: n[0] + 2 * n[1])))
    pixels = rgba(draw(renderer, view))
    up_right, down_left = pixels[55, 140], pixels[145, 100]
    assert up_right[1] > down_left[1] + 60  # viridis: yellow against violet


@pytest.mark.parametrize("diverging", [False, True])
def test_the_colour_at_the_middle_is_that_of_the_table(renderer, diverging):
    rows = ellipsoid(1, 1, 1, value=lambda n: n[2])
    view = bare(sheet(rows))
    view = replace(view, scale=scale_of(rows, diverging))
    seen = rgba(draw(renderer, view))[100, 120, :3].astype(float)
    wanted = colour_table(diverging)[255, :3].astype(float)  # z = 1 is the greatest value
    # Light changes brightness only: the proportions of the channels stay, sheen adds a little.
    assert np.abs(seen / seen.max() - wanted / wanted.max()).max() < 0.12


def test_a_logarithmic_scale_moves_the_middle(renderer):
    rows = ellipsoid(1, 1, 1, value=lambda n: 10 ** (2 * np.abs(n[2])))  # 1 at the rim, 100
    view = bare(sheet(rows))
    linear = rgba(draw(renderer, view))
    log_scale = replace(view.scale, logarithmic=True)
    logarithmic = rgba(draw(renderer, replace(view, scale=log_scale)))
    assert logarithmic[40, 120, 1] > linear[40, 120, 1] + 30  # greener: further up the table


def test_another_surface_changes_the_picture_and_the_same_view_does_not(renderer):
    view = bare(sheet(cubic_young(60, 190)))
    first, again = rgba(draw(renderer, view)), rgba(draw(renderer, view))
    assert np.array_equal(first, again)
    other = replace(view, sheets=(sheet(ellipsoid(100, 100, 60)),))
    assert (np.abs(rgba(draw(renderer, other)) - first).max(axis=2) > 20).mean() > 0.05


def test_turning_changes_the_picture(renderer):
    view = bare(sheet(cubic_young(60, 190)))
    before, after = draw(renderer, view), draw(renderer, view, TOP.turned(40, 25))
    assert (np.abs(rgba(before) - rgba(after)).max(axis=2) > 20).mean() > 0.05


def test_a_hidden_sheet_is_gone(renderer):
    inner, _, outer = three_sheets()
    both = bare(inner, outer)
    without = replace(both, sheets=(inner, replace(outer, visible=False)))
    assert covered(draw(renderer, without), STAGE).sum() < 0.5 * covered(
        draw(renderer, both), STAGE
    ).sum()


def test_the_inner_sheet_shows_through_the_outer_one(renderer):
    inner, _, outer = three_sheets()
    view = bare(inner, outer)
    alone = rgba(draw(renderer, replace(view, sheets=(outer,))))[100, 120]
    through = rgba(draw(renderer, view))[100, 120]
    opaque = rgba(draw(renderer, replace(view, sheets=(inner,))))[100, 120]
    assert np.abs(through - alone).max() > 30
    assert np.abs(through - opaque).max() > 10


def test_cutting_away_opens_the_outer_sheet(renderer):
    """Seen from Z with the section normal to Z, the half before the plane is gone."""
    small = sheet(ellipsoid(0.4, 0.4, 0.4, value=lambda n: 0 * n[0]))
    large = sheet(ellipsoid(1, 1, 1, value=lambda n: 0 * n[0] + 1))
    view = bare(small, large, section=(0.0, 0.0, 1.0), cut_away=True)
    pixels = rgba(draw(renderer, view))
    violet, yellow = pixels[100, 120], pixels[100, 120 + 55]
    assert violet[2] > violet[1]  # the inside of the small one
    assert yellow[1] > yellow[2] + 60  # the inside of the large one, around it
    below = Camera().looking_along((0.0, 0.0, -1.0))
    assert np.abs(rgba(draw(renderer, view, below))[100, 120] - violet).max() < 60


def test_undefined_vertices_leave_a_hole_and_undefined_values_are_grey(renderer):
    rows = ellipsoid(1, 1, 1)
    holed, grey = rows.copy(), rows.copy()
    cap = rows[2] > 0.9
    holed[:, cap] = np.nan
    grey[6, cap] = np.nan
    whole = bare(sheet(rows))
    seen = rgba(draw(renderer, replace(whole, sheets=(sheet(holed),))))[100, 120, :3]
    assert np.abs(seen - [STAGE.red(), STAGE.green(), STAGE.blue()]).max() < 3
    red, green, blue, _ = rgba(draw(renderer, replace(whole, sheets=(sheet(grey),))))[100, 120]
    assert max(red, green, blue) - min(red, green, blue) < 12
    nothing = replace(whole, sheets=(sheet(np.full_like(rows, np.nan)),))
    assert not covered(draw(renderer, nothing), STAGE).any()


def test_a_transparent_ground_is_transparent_and_the_surface_is_not(renderer):
    image = draw(renderer, bare(sheet(ellipsoid(1, 1, 1))), ground="transparent")
    alpha = rgba(image)[..., 3]
    assert alpha[2, 2] == 0
    assert alpha[100, 120] == 255


def test_grounds(renderer):
    view = bare(sheet(ellipsoid(1, 1, 1)))
    night = NIGHT.colour("stage")
    assert tuple(rgba(draw(renderer, view, ground="white"))[2, 2, :3]) == (255, 255, 255)
    assert tuple(rgba(draw(renderer, view, theme=NIGHT))[2, 2, :3]) == (
        night.red(), night.green(), night.blue(),
    )


def test_axes_stand_out_of_the_surface_where_the_camera_says(renderer):
    view = pane_view(sheet(ellipsoid(1, 1, 1)))
    camera = Camera()
    tip = np.array([[0.0], [0.0], [(1.0 + AXIS_REACH) / 2]])
    (x, y), _ = camera.project(tip, SIZE)
    column, row = int(x[0]), int(y[0])
    ink = rgba(draw(renderer, view, camera))[row, column - 1 : column + 2, :3].min(axis=0)
    ground = rgba(draw(renderer, replace(view, triads=()), camera))[row, column, :3]
    assert (ground - ink).min() > 80


def test_the_section_disc_is_seen_beside_the_surface_only(renderer):
    view = bare(sheet(ellipsoid(0.5, 0.5, 0.5)))
    view = replace(view, radius=1.0)
    with_disc = replace(view, section=(0.0, 0.0, 1.0))
    changed = np.abs(rgba(draw(renderer, with_disc)) - rgba(draw(renderer, view))).max(axis=2)
    assert changed[100, 120 + 60] > 4  # the disc beside the sphere
    assert changed[100, 120] == 0  # the sphere is before the disc


def test_samples_smooth_the_outline(renderer):
    view = bare(sheet(ellipsoid(1, 1, 1, value=lambda n: 0 * n[0])))
    view = replace(view, scale=replace(view.scale, high=view.scale.low + 1.0))  # all dark
    plain, smooth = (rgba(draw(renderer, view, samples=n))[:, :, 0] for n in (0, 4))
    assert len(np.unique(smooth)) > len(np.unique(plain)) + 20


def test_wave_surfaces_are_drawn_from_both_sides(renderer):
    """A sheet turned inside out is invisible when closed, visible as a wave surface."""
    triangles = sheet(ellipsoid(1, 1, 1)).triangles[:, ::-1].copy()
    inside_out = replace(sheet(ellipsoid(1, 1, 1)), triangles=triangles)
    view = bare(inside_out)
    folded = replace(view, is_wave_surface=True)
    front = rgba(draw(renderer, folded))[100, 120]
    whole = rgba(draw(renderer, bare(sheet(ellipsoid(1, 1, 1)))))[100, 120]
    assert np.abs(front - whole).max() < 8


@pytest.mark.gl
def test_only_other_rows_are_uploaded(qapp):
    from gui.stage.scene import SceneRenderer

    renderer = SceneRenderer()
    view = bare(sheet(cubic_young(60, 190)), section=(0.0, 1.0, 0.0))
    draw(renderer, view)
    assert renderer.uploads == 1
    draw(renderer, view, TOP.turned(30, 10))
    draw(renderer, replace(view, scale=scale_of(view.sheets[0].rows, True), cut_away=True))
    draw(renderer, view, size=(100, 100), samples=4, theme=NIGHT)
    assert renderer.uploads == 1
    draw(renderer, replace(view, sheets=(sheet(view.sheets[0].rows.copy()),)))
    assert renderer.uploads == 2
    draw(renderer, bare(sheet(cubic_young(60, 190, level=3), level=3)))
    assert renderer.uploads == 3
    renderer.close()
    renderer.close()  # once more does no harm


@pytest.mark.gl
@pytest.mark.parametrize("changes", [{}, {"section": (0.0, 1.0, 0.0), "cut_away": True}])
def test_both_renderers_draw_the_same_picture(gl_renderer, changes):
    view = bare(*three_sheets(), **changes)
    camera = Camera()
    a, b = (draw(one, view, camera) for one in (gl_renderer, FlatRenderer()))
    cover_a, cover_b = covered(a, STAGE), covered(b, STAGE)
    assert (cover_a != cover_b).sum() < 0.02 * cover_a.sum()
    difference = np.abs(rgba(a) - rgba(b)).max(axis=2)
    assert (difference > 24).mean() < 0.02
    assert difference.mean() < 4.0


@pytest.mark.gl
def test_pictures_take_no_more_names_on_the_graphics_side(gl_renderer):
    from gui.stage.gl import GL
    from gui.stage.gl_context import hidden_context

    def next_name():
        with hidden_context().current():
            return int(GL.glGenBuffers(1))

    view = bare(*three_sheets(), section=(0.0, 1.0, 0.0))
    draw(gl_renderer, view)
    before = next_name()
    for turn in range(20):
        draw(gl_renderer, view, TOP.turned(turn, 5))
    assert next_name() == before + 1
