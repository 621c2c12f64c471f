"""What the panes are given: numbers of the kernels in part axes, one scale or two."""

from dataclasses import replace

import numpy as np
import pytest

from core import live
from core.directional.sphere import sphere_mesh
from gui.presenting import stage
from tests.gui.presenting.benches import (
    CUBIC,
    DENSITY,
    NEGATIVE,
    PIN,
    STATE,
    TURNS,
    UNSTABLE,
    compressibility,
    looked_at,
    speeds,
    table_of,
    without_density,
    young,
)
from tests.reference import christoffel_matrices

VERTICES = sphere_mesh(live.COARSE_LEVEL).vertices


def panes(state, fine=False):
    return stage.pane_views(state, fine)


def rows_of(state, side="A", sheet=0):
    return panes(state)[side].sheets[sheet].rows.astype(float)


@pytest.mark.parametrize("side", ["A", "B"])
def test_the_surface_of_young_is_e_along_every_direction_of_the_part(side):
    rows = rows_of(STATE, side)
    expected = young(table_of(STATE, side), VERTICES)
    assert np.allclose(rows[6], expected, rtol=2e-6)
    assert np.allclose(rows[:3], expected * VERTICES, rtol=2e-6, atol=1e-4)


@pytest.mark.parametrize(("key", "radius"), [("slowness", lambda v: 1 / v), ("phase", np.copy)])
def test_the_three_sheets_come_fastest_first(key, radius):
    views = panes(looked_at(STATE, quantity=key))
    expected = radius(speeds(table_of(STATE), DENSITY, VERTICES))
    for sheet in range(3):
        rows = views["A"].sheets[sheet].rows.astype(float)
        assert np.allclose(rows[6], expected[sheet], rtol=2e-6)
        assert np.allclose(np.sqrt((rows[:3] ** 2).sum(axis=0)), expected[sheet], rtol=2e-6)


def test_a_shared_scale_is_that_of_both_and_a_separate_one_that_of_each():
    tall = replace(STATE, other=replace(STATE.specimen, stiffness=tuple(
        tuple(2 * x for x in row) for row in STATE.specimen.stiffness)))  # fmt: skip
    shared = panes(tall)
    most = {side: np.nanmax(shared[side].sheets[0].rows[6]) for side in "AB"}
    least = {side: np.nanmin(shared[side].sheets[0].rows[6]) for side in "AB"}
    assert most["B"] == pytest.approx(2 * most["A"], rel=0.01)
    for view in shared.values():
        assert view.radius == pytest.approx(most["B"], rel=1e-6)
        assert (view.scale.low, view.scale.high) == (least["A"], most["B"])
    apart = panes(looked_at(tall, shared_scale=False))
    for side, view in apart.items():
        assert view.radius == pytest.approx(most[side], rel=1e-6)
        assert (view.scale.low, view.scale.high) == (least[side], most[side])


def test_a_hidden_sheet_is_not_seen_and_not_scaled_by():
    state = looked_at(STATE, quantity="slowness", sheets=(True, True, False))
    whole = panes(looked_at(STATE, quantity="slowness"))["A"]
    view = panes(state)["A"]
    assert [sheet.visible for sheet in view.sheets] == [True, True, False]
    assert view.radius < whole.radius
    assert view.scale.high == np.nanmax([v.sheets[1].rows[6] for v in panes(state).values()])


def test_negative_lobes_are_drawn_outward_and_coloured_by_sign():
    state = looked_at(NEGATIVE, quantity="compressibility", layout="A")
    view = panes(state)["A"]
    rows = view.sheets[0].rows.astype(float)
    expected = compressibility(table_of(state), VERTICES)
    assert expected.min() < 0 < expected.max()
    assert np.allclose(rows[6], expected, rtol=1e-5, atol=1e-5)
    assert np.allclose((rows[:3] * VERTICES).sum(axis=0), np.abs(expected), atol=1e-4)
    assert view.scale.diverging
    assert view.scale.low == pytest.approx(expected.min(), rel=1e-5)
    assert view.scale.low_text.startswith("−")


def test_of_an_unstable_table_only_what_is_defined_is_drawn():
    view = panes(looked_at(UNSTABLE, layout="A"))["A"]
    defined = np.isfinite(young(table_of(UNSTABLE), VERTICES))
    assert 0.02 < defined.mean() < 0.98
    assert np.array_equal(np.isfinite(view.sheets[0].rows[6]), defined)
    assert view.notice == stage.LEFT_OUT
    waves = panes(looked_at(UNSTABLE, quantity="slowness"))["A"]
    expected = speeds(table_of(UNSTABLE), 2000.0, VERTICES)
    for sheet, speed in zip(waves.sheets, expected, strict=True):
        assert np.array_equal(np.isfinite(sheet.rows[6]), np.isfinite(speed))
    assert np.isfinite(expected[0]).all()
    assert not np.isfinite(expected[2]).all()
    assert waves.notice == stage.LEFT_OUT


def test_what_runs_off_to_infinity_is_cut_at_three_times_the_median():
    view = panes(looked_at(UNSTABLE, layout="A"))["A"]
    values = np.abs(view.sheets[0].rows[6].astype(float))
    free = np.abs(young(table_of(UNSTABLE), VERTICES))
    limit = 3 * np.nanmedian(free)
    assert np.nanmax(free) > 1.5 * limit
    assert np.nanmax(values) == pytest.approx(limit, rel=1e-5)
    assert view.radius == pytest.approx(limit, rel=1e-5)
    # A stable table is drawn whole, however uneven.
    assert stage.drawable_limit(np.array([1.0, 1.0, 1.0, 50.0])) == np.inf
    assert stage.drawable_limit(np.array([1.0, 2.0, 3.0, np.nan])) == 6.0
    assert stage.drawable_limit(np.full(3, np.nan)) == np.inf


def test_without_a_density_waves_are_off_and_stiffness_is_not():
    state = without_density(STATE)
    for view in panes(looked_at(state, quantity="slowness")).values():
        assert view.sheets == ()
        assert view.notice == stage.NO_DENSITY
    assert np.array_equal(panes(state)["A"].sheets[0].rows, panes(STATE)["A"].sheets[0].rows)
    bar = stage.toolbar_view(state, linked=True)
    assert set(bar.enabled) == {"young", "compressibility", "shear_least", "shear_greatest",
                                "poisson_least", "poisson_greatest"}  # fmt: skip
    assert {key for key, *_ in bar.quantities} > set(bar.enabled)


def test_one_side_without_a_density_leaves_the_other_side_its_waves():
    state = looked_at(
        replace(STATE, other=replace(CUBIC.specimen, density=None)), quantity="phase"
    )
    state = replace(state, orientation_b=CUBIC.orientation_a)
    views = panes(state)
    assert len(views["A"].sheets) == 3
    assert views["B"].sheets == ()
    assert views["B"].notice == stage.NO_DENSITY


def test_colours_by_longitudinality_are_how_far_the_motion_follows_the_normal():
    state = looked_at(STATE, quantity="slowness", colour_by="longitudinality")
    view = panes(state)["A"]
    _, vectors = np.linalg.eigh(christoffel_matrices(table_of(STATE), VERTICES).astype(float))
    along = np.abs(np.einsum("Nis,iN->sN", vectors, VERTICES))[::-1]
    plain = panes(looked_at(STATE, quantity="slowness"))["A"]
    for sheet in range(3):
        assert np.allclose(view.sheets[sheet].rows[6], along[sheet], atol=1e-5)
        assert np.array_equal(view.sheets[sheet].rows[:6], plain.sheets[sheet].rows[:6])
    assert 0 <= view.scale.low < view.scale.high <= 1 + 1e-6
    assert "longitudinal" in view.scale.title


def test_the_scale_of_focusing_is_logarithmic_and_bounded():
    scale = panes(looked_at(STATE, quantity="focusing"))["A"].scale
    assert scale.logarithmic
    assert 0.05 <= scale.low < 1 < scale.high <= 20
    assert 1.0 in [value for value, _ in scale.ticks]
    assert all(scale.low < value < scale.high for value, _ in scale.ticks)


def test_crystal_axes_stand_as_the_part_is_cut():
    assert [t.kind for t in panes(STATE)["A"].triads] == ["part"]
    for side, view in panes(looked_at(STATE, crystal_axes=True)).items():
        part, crystal = view.triads
        assert np.array_equal(part.directions, np.eye(3))
        # z||c, y||b*: c along z; a in the plane normal to b*, so that a·y = 0.
        a, _, c = np.array(crystal.directions)
        assert np.allclose(c, TURNS[side] @ [0, 0, 1], atol=1e-12)
        beta = np.radians(STATE.specimen.cell.beta)
        assert np.allclose(a, TURNS[side] @ [np.sin(beta), 0, np.cos(beta)], atol=1e-12)
    cubic = panes(looked_at(CUBIC, crystal_axes=True))["A"].triads[1]
    assert cubic.labels == ("x", "y", "z")


def test_marks_are_the_pin_and_on_demand_the_directions_of_degeneracy():
    def marks(**choices):
        return panes(looked_at(STATE, **choices))["A"].marks

    assert [(m.kind, m.direction) for m in marks()] == [("pin", PIN)]
    assert len(marks(marks=True)) == 1  # E has no sheets that could touch
    axes = [m for m in marks(marks=True, quantity="phase") if m.kind == "axis"]
    assert axes
    for mark in axes:
        n = np.array(mark.direction)[:, None]
        v = speeds(table_of(STATE), DENSITY, n)[:, 0]
        assert min(v[0] - v[1], v[1] - v[2]) < 1e-6 * v[0]


def test_polarisation_ticks_lie_on_the_sheets_along_the_motion():
    state = looked_at(STATE, quantity="slowness", ticks=True, layout="A",
                      sheets=(True, False, False))  # fmt: skip
    view = panes(state)["A"]
    middle = view.ticks.mean(axis=1).T
    n = middle / np.sqrt((middle**2).sum(axis=0))
    slowness = 1 / speeds(table_of(STATE), DENSITY, n)[0]
    assert np.allclose(np.sqrt((middle**2).sum(axis=0)), slowness, rtol=1e-5)
    line = (view.ticks[:, 1] - view.ticks[:, 0]).T
    line /= np.sqrt((line**2).sum(axis=0))
    matrices = christoffel_matrices(table_of(STATE), n).astype(float)
    force = np.einsum("Nij,jN->iN", matrices, line)
    root = (force * line).sum(axis=0)
    assert np.abs(force - root * line).max() < 1e-3 * root.max()
    assert panes(looked_at(state, sheets=(False, False, False)))["A"].ticks is None
    assert panes(looked_at(state, quantity="young"))["A"].ticks is None


def test_the_same_request_gives_the_same_surface():
    """A moved pin recomputes no surface."""
    first = panes(STATE, fine=True)["A"].sheets[0].rows
    assert panes(looked_at(STATE, pin=(1.0, 0.0, 0.0)), fine=True)["A"].sheets[0].rows is first


def test_titles_name_the_orientation_and_two_crystals_by_their_own_names():
    state = looked_at(CUBIC, layout="AB")
    assert stage.pane_title(state, "A") == "part axes = crystal axes"
    both = replace(
        state,
        other=replace(state.specimen, name="casting LM-40"),
        orientation_b=replace(state.orientation_b, text="Z=[1 -1 0] X=[0 0 1]",
                              turn=(0.0, -1.5, 0.0)),
    )  # fmt: skip
    assert stage.pane_title(both, "B") == (
        "casting LM-40 · Z=[1 −1 0] X=[0 0 1], turned 0° −1.5° 0°"
    )


def test_planes_are_known_by_their_normals():
    assert stage.plane_key((0.0, 0.0, 1.0)) == "XY"
    assert stage.plane_key((0.0, -1.0, 0.0)) == "XZ"
    assert stage.plane_key((0.6, 0.0, 0.8)) == "other"
    assert "other" in dict(stage.plane_choices(looked_at(STATE, section=(0.6, 0.0, 0.8))))
    assert "other" not in dict(stage.plane_choices(STATE))


@pytest.mark.parametrize("fine", [False, True])
def test_fine_and_coarse_meshes(fine):
    rows = panes(STATE, fine)["A"].sheets[0].rows
    assert rows.shape == (7, 10242 if fine else 2562)


def test_a_quantity_that_is_the_same_everywhere_has_one_value_on_its_scale():
    # β of a cubic crystal is 1/(C11 + 2 C12) in every direction.
    scale = panes(replace(CUBIC, quantity="compressibility"), fine=True)["A"].scale
    assert scale.low == scale.high == pytest.approx(1e3 / (230.0 + 2 * 140.0), rel=1e-6)
    assert scale.low_text == scale.high_text == "1.961"
    assert scale.ticks == ()


def test_at_rest_the_scale_ends_at_the_extremes_between_the_vertices():
    # E of a cubic crystal is least along <100>, greatest along <111>, which are no vertices of
    # a mesh that stands in turned axes.
    state = replace(CUBIC, orientation_a=STATE.orientation_a)
    s = np.linalg.inv(table_of(CUBIC))
    slope = s[0, 0] - s[0, 1] - s[3, 3] / 2
    scale = panes(state, fine=True)["A"].scale
    assert scale.low == pytest.approx(1 / s[0, 0], rel=1e-6)
    assert scale.high == pytest.approx(1 / (s[0, 0] - 2 / 3 * slope), rel=1e-6)


def test_ends_that_differ_little_have_the_digits_that_tell_them_apart():
    scale = stage.scale_view(stage.ColourOf("E"), 100.0, 100.00012)
    assert (scale.low_text, scale.high_text) == ("100.0000", "100.0001")


def test_angles_that_are_all_zero_but_for_rounding_are_zero():
    about = stage.ColourOf("ψ, °", size=90.0)
    assert stage.scale_view(about, 0.0, 4e-14).high_text == "0"
    assert stage.scale_view(stage.ColourOf("x"), 0.0, 4e-14).high_text != "0"
