"""What the section, the hemisphere, the sweep and the source picture are given."""

from dataclasses import replace

import numpy as np
import pytest

from core import live
from gui.presenting import deck, stage
from tests.gui.presenting.benches import (
    CUBIC,
    DENSITY,
    NEGATIVE,
    PIN,
    STATE,
    UNSTABLE,
    compressibility,
    looked_at,
    speeds,
    table_of,
    without_density,
    young,
)
from tests.reference import christoffel_matrices

TILTED = tuple((np.array([1.0, 2.0, 2.0]) / 3).tolist())


# ------------------------------------------------------------------ section
def in_space(view, points):
    """Return points of the plane XZ as directions (3, N) and distances."""
    distance = np.hypot(*points)
    x, z = points / distance
    return np.stack([x, np.zeros_like(x), z]), distance


def test_the_section_is_e_round_the_plane_x_to_the_right_and_z_up():
    view = deck.section_view(STATE)
    assert view.axis_labels == ("X", "Z")
    assert {curve.side for curve in view.curves} == {"A", "B"}
    for curve in view.curves:
        n, distance = in_space(view, curve.points)
        assert np.allclose(distance, young(table_of(STATE, curve.side), n), rtol=1e-11)
        assert np.allclose(curve.points[:, 0], curve.points[:, -1], rtol=1e-12)
    assert view.radius == pytest.approx(max(np.hypot(*c.points).max() for c in view.curves))


def test_a_tilted_section_lies_in_its_plane():
    state = looked_at(STATE, section=TILTED)
    view = deck.section_view(state)
    curve = view.curves[0]
    for k in (0, 100, 333):
        angle = np.arctan2(curve.points[1, k], curve.points[0, k])
        n = np.array(deck.section_direction(state, float(angle)))
        assert abs(n @ TILTED) < 1e-14
        assert np.hypot(*curve.points[:, k]) == pytest.approx(
            young(table_of(STATE), n[:, None])[0], rel=1e-11
        )
    assert view.plane == "other"


def test_far_ends_of_axes_are_true_opposites():
    assert deck.section_view(STATE).far_labels == ("−X", "−Z")
    # Of the plane of normal 1 2 2 the first axis is X less its share of the normal,
    # (8, −2, −2)/√72: its numbers stand at one end only.
    view = deck.section_view(looked_at(STATE, section=TILTED))
    assert view.axis_labels[0] == "0.94 −0.24 −0.24"
    assert view.far_labels == ("", "")


def test_a_plane_of_the_crystal_is_called_by_its_indices():
    diagonal = tuple((np.ones(3) / np.sqrt(3)).tolist())
    words = dict(deck.section_view(looked_at(CUBIC, section=diagonal)).planes)
    assert words["other"] == "normal (1 1 1) of A's crystal"
    odd = tuple((np.array([0.41, -0.62, 0.67]) / np.linalg.norm([0.41, -0.62, 0.67])).tolist())
    words = dict(deck.section_view(looked_at(CUBIC, section=odd)).planes)
    assert words["other"].startswith("normal 0.4")


def test_focusing_stands_on_a_logarithmic_radius():
    state = looked_at(STATE, quantity="focusing", layout="A", ticks=True)
    view = deck.section_view(state)
    low, high = view.logarithmic
    assert (view.radius, low, high) == (1.0, 0.05, 20.0)
    assert [text for _, text in view.rings] == ["0.1", "1", "10"]
    # A ring stands where its decade does: 1 is half way from 1/20 to 20.
    assert view.rings[1][0] == pytest.approx(0.5)
    assert view.ticks is None
    medium = live.part_medium(state.specimen_of("A"), state.orientation_of("A"))
    true = live.section(medium, "focusing", state.section).values
    for curve in view.curves:
        radius = np.hypot(*curve.points)
        kept = np.isfinite(radius) & (true[curve.sheet] > low)
        assert kept.sum() > 300
        expected = true[curve.sheet][kept]
        assert np.allclose(low * (high / low) ** radius[kept], expected, rtol=1e-9)


def test_hidden_sheets_are_said_to_be_hidden():
    state = looked_at(STATE, quantity="slowness", sheets=(False, False, False))
    for view in (deck.section_view(state), deck.sweep_view(state), deck.source_view(state, 1.0),
                 *stage.pane_views(state, fine=False).values()):  # fmt: skip
        assert view.notice == stage.ALL_HIDDEN
    empty = without_density(state)
    assert deck.section_view(empty).notice == stage.NO_DENSITY  # the first thing that lacks


def test_three_sheets_make_three_curves_a_side_and_hidden_ones_none():
    state = looked_at(STATE, quantity="slowness", layout="A")
    curves = deck.section_view(state).curves
    assert [curve.sheet for curve in curves] == [0, 1, 2]
    for curve in curves:
        n, distance = in_space(None, curve.points)
        expected = 1 / speeds(table_of(STATE), DENSITY, n)[curve.sheet]
        assert np.allclose(distance, expected, rtol=1e-9)
    hidden = looked_at(state, sheets=(False, True, True))
    assert [curve.sheet for curve in deck.section_view(hidden).curves] == [1, 2]


def test_negative_values_are_marked_and_said():
    state = looked_at(NEGATIVE, quantity="compressibility")
    view = deck.section_view(state)
    (curve,) = view.curves
    n, distance = in_space(view, curve.points)
    expected = compressibility(table_of(state), n)
    assert np.allclose(distance, np.abs(expected), rtol=1e-10)
    assert np.array_equal(curve.negative, expected < 0)
    assert curve.negative.any()
    assert not curve.negative.all()
    assert view.negative_note == "dotted where negative"
    assert deck.section_view(CUBIC).negative_note == ""


def test_the_section_of_an_unstable_table_has_gaps_and_bounds():
    view = deck.section_view(UNSTABLE)
    (curve,) = view.curves
    radii = np.hypot(*curve.points)
    assert np.isnan(radii).any()
    assert np.isfinite(radii).any()
    angles = np.linspace(0, 2 * np.pi, 721)
    n = np.stack([np.cos(angles), np.zeros(721), np.sin(angles)])
    defined = young(table_of(UNSTABLE), n)
    limit = 3 * np.nanmedian(defined)
    assert np.nanmax(defined) > limit
    assert view.radius <= limit * 1.01
    assert np.isnan(radii[np.isnan(defined)]).all()


def test_the_pin_is_on_the_section_when_it_lies_in_the_plane():
    assert deck.section_view(STATE).pin_angle is None
    state = looked_at(STATE, pin=(0.6, 0.0, 0.8))
    angle = deck.section_view(state).pin_angle
    assert angle == pytest.approx(np.arctan2(0.8, 0.6))
    assert deck.section_direction(state, angle) == pytest.approx((0.6, 0.0, 0.8))


def test_rays_of_the_wave_section_end_where_the_energy_goes():
    """Along a cube axis the energy follows the normal: C11 and C44 alone decide."""
    state = looked_at(CUBIC, quantity="wave")
    fast, *shear = (np.hypot(*c.points)[0] for c in deck.section_view(state).curves)
    assert fast == pytest.approx(np.sqrt(230.0 / 8.0), rel=1e-12)
    assert shear == pytest.approx([np.sqrt(120.0 / 8.0)] * 2, rel=1e-12)


def test_polarisation_ticks_of_the_section_are_a_small_part_of_it():
    state = looked_at(STATE, quantity="slowness", ticks=True, layout="A")
    view = deck.section_view(state)
    start, end = view.ticks
    length = np.hypot(*(end - start))
    assert 0.07 * view.radius < length.max() <= 0.0901 * view.radius
    middle = (start + end) / 2
    n, distance = in_space(view, middle)
    v = 1 / distance
    force = np.einsum("Nij,jN->iN", christoffel_matrices(table_of(STATE), n).astype(float),
                      np.stack([(end - start)[0], 0 * v, (end - start)[1]]))  # fmt: skip
    assert np.isfinite(force).all()
    assert deck.section_view(looked_at(state, ticks=False)).ticks is None


def test_planes_of_the_list():
    assert deck.plane_normal(STATE, "XY") == (0.0, 0.0, 1.0)
    assert deck.plane_normal(STATE, "[1 1 0]") is None
    normal = np.array(deck.plane_normal(STATE, "pin"))
    assert abs(normal @ PIN) < 1e-15
    assert abs(normal[0]) < 1e-15
    along_x = looked_at(STATE, pin=(1.0, 0.0, 0.0))
    assert abs(np.array(deck.plane_normal(along_x, "pin"))[0]) < 1e-15


def test_without_a_density_the_deck_says_so():
    state = looked_at(without_density(STATE), quantity="slowness")
    assert deck.section_view(state).notice == stage.NO_DENSITY
    assert deck.section_view(state).curves == ()
    assert deck.hemisphere_view(state).notice == stage.NO_DENSITY
    assert deck.sweep_view(state).notice == stage.NO_DENSITY
    assert deck.source_view(state, 1.0).notice == stage.NO_DENSITY


# ------------------------------------------------------------------ hemisphere
def directions_of_pixels(size, projection, places):
    """Return the directions (3, N) behind pixels (row, column): X right, Y up, Z at us.

    Snyder 1987, Map projections, USGS Professional Paper 1395: r = √2 sin(θ/2) for the
    equal-area and tan(θ/2) for the stereographic projection, scaled to 1 at the rim.
    """
    rows, columns = np.array(places).T
    x, y = (columns + 0.5) / size * 2 - 1, 1 - (rows + 0.5) / size * 2
    r, phi = np.hypot(x, y), np.arctan2(y, x)
    theta = 2 * (np.arcsin(r / np.sqrt(2)) if projection == "equal_area" else np.arctan(r))
    return np.stack([np.sin(theta) * np.cos(phi), np.sin(theta) * np.sin(phi), np.cos(theta)])


def values_of_pixels(picture, places):
    return np.array([picture[row, column] for row, column in places])


PLACES = [(90, 90), (30, 90), (90, 150), (120, 40), (60, 60), (140, 120)]


@pytest.mark.parametrize("projection", ["equal_area", "stereographic"])
@pytest.mark.parametrize("side", ["A", "B"])
def test_a_pixel_of_the_hemisphere_is_e_along_its_direction(projection, side):
    view = deck.hemisphere_view(looked_at(STATE, projection=projection, hemisphere=side))
    n = directions_of_pixels(view.picture.shape[0], projection, PLACES)
    expected = young(table_of(STATE, side), n)
    assert np.allclose(values_of_pixels(view.picture, PLACES), expected, rtol=1e-11)
    assert np.isnan(view.picture[0, 0])
    assert view.shown == side


def test_the_difference_is_b_less_a_on_a_diverging_scale():
    view = deck.hemisphere_view(looked_at(STATE, hemisphere="difference"))
    n = directions_of_pixels(view.picture.shape[0], "equal_area", PLACES)
    expected = young(table_of(STATE, "B"), n) - young(table_of(STATE, "A"), n)
    assert np.allclose(values_of_pixels(view.picture, PLACES), expected, rtol=1e-9)
    assert view.scale.diverging
    assert view.scale.low == pytest.approx(np.nanmin(view.picture))
    same = replace(STATE, orientation_b=STATE.orientation_a)
    assert np.nanmax(np.abs(deck.hemisphere_view(
        looked_at(same, hemisphere="difference")).picture)) == 0.0  # fmt: skip


def test_the_sheet_that_is_asked_for_is_shown():
    for sheet in range(3):
        view = deck.hemisphere_view(
            looked_at(STATE, quantity="phase", hemisphere_sheet=sheet)
        )
        n = directions_of_pixels(view.picture.shape[0], "equal_area", PLACES)
        expected = speeds(table_of(STATE), DENSITY, n)[sheet]
        assert np.allclose(values_of_pixels(view.picture, PLACES), expected, rtol=1e-11)
        assert view.sheet == sheet


def test_the_cost_of_a_cutting_error_is_the_greatest_change_within_the_cone():
    view = deck.hemisphere_view(looked_at(STATE, hemisphere="cost", cutting_error_deg=3.0))
    places = [(90, 90), (60, 70), (120, 100)]
    for n, cost in zip(
        directions_of_pixels(view.picture.shape[0], "equal_area", places).T,
        values_of_pixels(view.picture, places),
        strict=True,
    ):
        across = np.linalg.svd(n[None, :])[2][1:]  # two unit vectors normal to n
        turn, tilt = np.meshgrid(np.linspace(0, 2 * np.pi, 73), np.radians([1.0, 2.0, 3.0]))
        cone = np.cos(tilt) * n[:, None, None] + np.sin(tilt) * (
            np.cos(turn) * across[0][:, None, None] + np.sin(turn) * across[1][:, None, None]
        )
        change = np.abs(
            young(table_of(STATE), cone.reshape(3, -1)) - young(table_of(STATE), n[:, None])
        )
        # The map is taken at the nearest of 10,242 directions, up to 1.1° off.
        assert cost == pytest.approx(change.max(), rel=0.25)
    assert "±3°" in view.title


def test_contours_run_where_the_quantity_has_their_level():
    view = deck.hemisphere_view(STATE)
    inner = [(level, line) for level, line in view.contours if np.hypot(*line).min() < 0.9]
    assert inner
    for level, line in inner:
        inside = np.hypot(*line) < 0.97
        x, y = line[:, inside]
        r, phi = np.hypot(x, y), np.arctan2(y, x)
        theta = 2 * np.arcsin(r / np.sqrt(2))
        n = np.stack([np.sin(theta) * np.cos(phi), np.sin(theta) * np.sin(phi),
                      np.cos(theta)])  # fmt: skip
        span = view.scale.high - view.scale.low
        assert np.abs(young(table_of(STATE), n) - level).max() < 0.004 * span
    assert deck.hemisphere_view(STATE, fine=False).contours == ()


def test_marks_of_the_hemisphere_stand_at_their_directions():
    marks = deck.hemisphere_view(looked_at(CUBIC, pin=(0.0, 0.6, -0.8))).marks
    named = {label: (x, y) for x, y, label, kind in marks if kind == "direction"}
    assert named["[0 0 1]"] == pytest.approx((0.0, 0.0))
    assert named["[1 0 0]"] == pytest.approx((1.0, 0.0))
    half = np.sqrt(2) * np.sin(np.radians(22.5))
    assert named["[0 1 1]"] == pytest.approx((0.0, half))
    # The pin points down: its other end is shown.
    x, y = next((x, y) for x, y, _, kind in marks if kind == "pin")
    theta = np.arccos(0.8)
    assert (x, y) == pytest.approx((0.0, -np.sqrt(2) * np.sin(theta / 2)))
    # 13 lattice rows of index 1: three axes, six ⟨1 1 0⟩, four ⟨1 1 1⟩.
    assert len(named) == 13


@pytest.mark.parametrize("projection", ["equal_area", "stereographic"])
def test_a_point_of_the_disc_is_the_direction_behind_it(projection):
    state = looked_at(STATE, projection=projection)
    for place in PLACES:
        (n,) = directions_of_pixels(181, projection, [place]).T
        row, column = place
        x, y = (column + 0.5) / 181 * 2 - 1, 1 - (row + 0.5) / 181 * 2
        assert deck.disc_direction(state, x, y) == pytest.approx(tuple(n))


def test_the_hemisphere_of_a_side_that_has_no_waves_is_empty_and_says_why():
    state = looked_at(
        replace(STATE, other=replace(CUBIC.specimen, density=None),
                orientation_b=CUBIC.orientation_a),
        quantity="phase",
    )  # fmt: skip
    seen = {key: deck.hemisphere_view(looked_at(state, hemisphere=key))
            for key in ("A", "B", "difference", "cost")}  # fmt: skip
    for key in ("B", "difference"):
        assert seen[key].shown == key
        assert np.isnan(seen[key].picture).all()
        assert seen[key].notice == stage.NO_DENSITY
    for key in ("A", "cost"):
        assert np.isfinite(seen[key].picture).any()
        assert seen[key].notice == ""


def test_the_hemisphere_of_an_unstable_table_is_bounded_and_has_holes():
    view = deck.hemisphere_view(UNSTABLE)
    inside = np.hypot(*np.meshgrid(*[np.linspace(-1, 1, view.picture.shape[0])] * 2)) < 0.98
    values = view.picture[inside]
    assert 0 < np.isnan(values).mean() < 1
    assert view.scale.high <= 3 * np.nanmedian(values) * 1.01


def test_a_moved_pin_makes_no_new_picture_and_no_new_contours():
    first = deck.hemisphere_view(STATE)
    moved = deck.hemisphere_view(looked_at(STATE, pin=(1.0, 0.0, 0.0)))
    assert moved.picture is first.picture
    assert moved.contours is first.contours
    assert moved.marks != first.marks


# ------------------------------------------------------------------ sweep
def test_the_sweep_passes_through_the_pin_at_zero():
    view = deck.sweep_view(looked_at(STATE, sweep_about=(0.0, 0.0, 1.0)))
    (at,) = np.flatnonzero(view.angles == 0.0)
    for side, _, values in view.curves:
        expected = young(table_of(STATE, side), np.array(PIN)[:, None])[0]
        assert values[at] == pytest.approx(expected, rel=1e-12)


def test_the_sweep_turns_right_handed_about_its_axis():
    """From X, 90° about Z leads to Y and −90° to −Y."""
    state = looked_at(STATE, pin=(1.0, 0.0, 0.0), sweep_about=(0.0, 0.0, 1.0), layout="A")
    view = deck.sweep_view(state)
    values = view.curves[0][2]
    angle = np.radians(30.0)
    n = np.array([[np.cos(angle)], [np.sin(angle)], [0.0]])
    (at,) = np.flatnonzero(view.angles == 30.0)
    assert values[at] == pytest.approx(young(table_of(STATE), n)[0], rel=1e-12)
    assert deck.sweep_direction(state, 90.0) == pytest.approx((0.0, 1.0, 0.0), abs=1e-15)
    assert deck.sweep_direction(state, -90.0) == pytest.approx((0.0, -1.0, 0.0), abs=1e-15)
    assert (view.chosen, view.axis) == ("Z", "part Z")
    assert deck.sweep_choice("Z") == (0.0, 0.0, 1.0)
    assert deck.sweep_choice("normal") is None


def test_a_sweep_about_the_pin_itself_says_that_nothing_moves():
    view = deck.sweep_view(looked_at(STATE, pin=(0.0, 1.0, 0.0)))  # the normal of XZ
    assert "moves nothing" in view.notice
    assert np.ptp(view.curves[0][2]) < 1e-9


def test_the_sweep_leaves_hidden_sheets_out():
    state = looked_at(STATE, quantity="phase", sheets=(False, True, False), layout="A")
    assert [sheet for _, sheet, _ in deck.sweep_view(state).curves] == [1]


# ------------------------------------------------------------------ source picture
def test_wavefronts_are_as_far_as_the_rays_run_in_the_time():
    view = deck.source_view(CUBIC, 2.5)
    fast = next(points for side, sheet, points, _ in view.curves if sheet == 0)
    # mm after 2.5 µs at √(C11/ρ) km/s along a cube axis.
    assert np.hypot(*fast[:, 0]) == pytest.approx(2.5 * np.sqrt(230.0 / 8.0), rel=1e-12)
    twice = deck.source_view(CUBIC, 5.0)
    assert np.allclose(twice.curves[0][2], 2 * view.curves[0][2])
    assert view.rings[-1][0] >= np.nanmax(np.hypot(*fast))


@pytest.mark.parametrize(("shown", "text"), [
    ("A", "1.961"), ("cost", "0"), ("difference", "0"),
])  # fmt: skip
def test_the_hemisphere_of_a_constant_is_one_flat_colour(shown, text):
    turned = replace(CUBIC, quantity="compressibility", orientation_b=STATE.orientation_b)
    view = deck.hemisphere_view(looked_at(turned, layout="AB", hemisphere=shown))
    assert view.scale.low == view.scale.high
    assert view.scale.low_text == view.scale.high_text == text
    assert view.contours == ()


def test_the_hemisphere_and_the_stage_say_the_same_ends():
    state = looked_at(STATE, hemisphere="A", layout="A")
    disc, pane = deck.hemisphere_view(state), stage.pane_views(state, True)["A"]
    assert disc.scale.low == pytest.approx(pane.scale.low, rel=1e-6)
    assert disc.scale.high == pytest.approx(pane.scale.high, rel=1e-6)
    assert disc.scale.high_text == pane.scale.high_text
