"""The wave table, arrivals and degenerate directions against closed forms and a reference."""

from dataclasses import replace

import numpy as np
import pytest

from core.directional.sphere import directions
from core.state import OrientationChoice
from core.task import Ticker
from gui.presenting import deck, stage, waves
from gui.presenting.axes import axes_in_part, axes_now, single_directions
from tests.gui.presenting.benches import (
    CUBIC,
    DENSITY,
    PIN,
    STATE,
    TURNS,
    UNSTABLE,
    as_rows,
    looked_at,
    speeds,
    table_of,
    without_density,
)
from tests.materials import cubic, hexagonal
from tests.reference import christoffel_matrices, full_tensor

N = np.array(PIN).reshape(3, 1)
C11, C12, C44, RHO = 230.0, 140.0, 120.0, 8000.0  # of CUBIC
DIAGONAL = tuple((np.ones(3) / np.sqrt(3)).tolist())
# Its two shear sheets cross on a cone about c.
CROSSING = looked_at(
    replace(CUBIC, specimen=replace(
        CUBIC.specimen, stiffness=as_rows(hexagonal(161.0, 89.0, 50.1, 61.0, 38.3)),
        crystal_class="hexagonal"))
)  # fmt: skip


def number(text):
    return float(text.replace("\N{MINUS SIGN}", "-"))


def full(table, label):
    """The three numbers of a line of the wave table, at full precision."""
    (row,) = (row for row in table.rows if row.label == label)
    return np.array([float(text) if text else np.nan for text in row.full])


def vector(table, words):
    return np.stack([full(table, f"{words}, {letter}") for letter in "XYZ"], axis=1)


# ------------------------------------------------------------------ the wave table
@pytest.mark.parametrize("side", ["A", "B"])
def test_the_wave_table_is_that_of_the_reference(side):
    """Γp = ρv²p, V_j = C_ijkl p_i p_k n_l/(ρv), in part axes, by the full tensor."""
    tables = {table.side: table for table in waves.waves_view(STATE).tables}
    table, stiffness = tables[side], table_of(STATE, side)
    v = full(table, "phase speed")
    assert np.allclose(v, speeds(stiffness, DENSITY, N)[:, 0], rtol=1e-10)
    assert np.allclose(full(table, "slowness"), 1 / v, rtol=1e-12)
    assert np.allclose(full(table, "impedance"), DENSITY * v * 1e-3, rtol=1e-12)
    p, ray = vector(table, "polarisation"), vector(table, "ray")
    matrix = christoffel_matrices(stiffness, N)[0].astype(float)
    assert np.allclose(p @ matrix, (DENSITY * v * v * 1e-3)[:, None] * p, atol=1e-8)
    assert np.allclose(np.linalg.norm(p, axis=1), 1)
    assert (p @ N >= 0).all()
    assert np.allclose(full(table, "longitudinality"), np.abs(p @ N)[:, 0])
    tensor = full_tensor(stiffness).astype(float)
    energy = np.einsum("ijkl,si,sk,l->sj", tensor, p, p, N[:, 0]) * 1e3 / (DENSITY * v)[:, None]
    assert np.allclose(full(table, "group speed"), np.linalg.norm(energy, axis=1), rtol=1e-9)
    assert np.allclose(ray * full(table, "group speed")[:, None], energy, atol=1e-8)
    off = np.degrees(np.arccos(v / np.linalg.norm(energy, axis=1)))
    assert np.allclose(full(table, "power flow off"), off, atol=1e-6)
    assert any(f"near: {waves.SHEET_NAMES[0]} {mark}" in note for note in table.notes
               for mark in "[(")  # fmt: skip


def test_units_and_short_numbers_of_the_wave_table():
    (table,) = waves.waves_view(looked_at(CUBIC, pin=(1.0, 0.0, 0.0))).tables
    rows = {row.label: row for row in table.rows}
    assert rows["phase speed"].values[0] == f"{np.sqrt(C11 / RHO * 1e3):.3f}"
    assert {row.unit for row in table.rows} == {"km/s", "s/km", "°", "", "MRayl"}
    # Nothing that rounding alone keeps from zero is shown.
    assert rows["power flow off"].values == ("0", "0", "0")
    assert rows["ray, Y"].values == ("0", "0", "0")


def test_where_two_waves_meet_it_is_said_in_words_and_no_polarisation_is_invented():
    (table,) = waves.waves_view(looked_at(CUBIC, pin=(0.0, 0.0, 1.0))).tables
    assert any("middle and slowest waves meet here" in note for note in table.notes)
    p = vector(table, "polarisation")
    assert np.allclose(p[0], [0, 0, 1])
    assert np.isnan(p[1:]).all()
    assert np.array_equal(full(table, "longitudinality"), [1, 0, 0])
    rows = {row.label: row.values for row in table.rows}
    assert rows["polarisation, X"][1:] == ("–", "–")
    (elsewhere,) = waves.waves_view(looked_at(CUBIC, pin=(0.6, 0.0, 0.8))).tables
    assert not any("meet" in note for note in elsewhere.notes)


def test_a_wave_that_does_not_propagate_is_named():
    """C44 < 0: along a cube axis both shear waves have ρv² = C44."""
    (table,) = waves.waves_view(looked_at(UNSTABLE, pin=(1.0, 0.0, 0.0))).tables
    v = full(table, "phase speed")
    assert v[0] == pytest.approx(np.sqrt(100.0 / 2000.0 * 1e3), rel=1e-12)
    assert np.isnan(v[1:]).all()
    said = [note for note in table.notes if "does not propagate" in note]
    assert [note.split()[1] for note in said] == ["middle", "slowest"]


def test_without_a_density_there_is_a_plain_sentence():
    view = waves.waves_view(without_density(CUBIC))
    assert view.tables == ()
    assert view.notice == stage.NO_DENSITY
    mixed = looked_at(replace(STATE, other=replace(CUBIC.specimen, density=None),
                              orientation_b=CUBIC.orientation_a))  # fmt: skip
    view = waves.waves_view(mixed)
    assert [table.side for table in view.tables] == ["A"]
    assert view.notice == stage.NO_DENSITY


# ------------------------------------------------------------------ arrivals
def arrivals_of(state):
    request = waves.arrivals_request(state)
    return waves.arrivals_view(waves.find_arrivals(request, Ticker()), request.ray, False)


def test_arrivals_along_a_cube_axis():
    """L at √(C11/ρ), both T at √(C44/ρ), and the folded sheet's normals in fours."""
    ((heading, rows),) = arrivals_of(looked_at(CUBIC, pin=(0.0, 0.0, 1.0))).groups
    assert heading == ""
    assert number(rows[0].cells[1]) == pytest.approx(np.sqrt(C11 / RHO * 1e3), abs=6e-4)
    straight = [row for row in rows if row.cells[3] == "0"]
    assert [row.cells[0] for row in straight] == ["fastest", "middle", "slowest"]
    assert float(straight[2].full[1]) == pytest.approx(np.sqrt(C44 / RHO * 1e3), rel=1e-9)
    ray_speeds = [float(row.full[1]) for row in rows]
    assert np.diff(ray_speeds).max() < 1e-8
    folded = [row for row in rows if row.cells[3] != "0"]
    assert folded
    assert len(folded) % 4 == 0
    for row in folded:
        assert np.linalg.norm(row.direction) == pytest.approx(1, abs=1e-12)
        off = np.degrees(np.arccos(row.direction[2]))
        assert float(row.full[3]) == pytest.approx(off, abs=1e-9)
        # Its energy travels along the ray: the plane wave advances at v / cos(off).
        assert float(row.full[2]) / row.direction[2] == pytest.approx(float(row.full[1]))


def test_arrivals_of_both_sides_stand_under_their_letters():
    view = arrivals_of(STATE)
    assert [heading for heading, _ in view.groups] == ["A", "B"]
    assert all(len(rows) >= 3 for _, rows in view.groups)


def test_arrivals_that_are_not_known_yet_are_pending():
    view = waves.arrivals_view(None, PIN, True)
    assert view.pending
    assert view.notice == waves.FINDING
    assert waves.arrivals_request(without_density(CUBIC)).media == ()
    assert waves.arrivals_view(None, PIN, False).notice == stage.NO_DENSITY


def test_the_same_bench_asks_for_the_same_arrivals():
    assert waves.arrivals_request(STATE) == waves.arrivals_request(looked_at(STATE, ticks=True))
    elsewhere = looked_at(STATE, pin=DIAGONAL)
    assert waves.arrivals_request(STATE) != waves.arrivals_request(elsewhere)


# ------------------------------------------------------------------ degenerate directions
AS_IT_IS = np.eye(3)


def axes_of(state, turn=AS_IT_IS):
    found = axes_now(state.specimen)
    return waves.axes_view(state.specimen, turn, found, pending=False)


def test_degenerate_directions_of_a_cubic_crystal():
    """Cones about ⟨111⟩ with the closed half-angle, touching sheets along ⟨100⟩."""
    turn = TURNS["A"]
    ((heading, rows),) = axes_of(CUBIC, turn).groups
    assert heading == "middle and slowest wave"
    cones = [row for row in rows if row.cells[0] == "cone"]
    touching = [row for row in rows if row.cells[0] == "touch"]
    assert (len(cones), len(touching)) == (4, 3)
    wide = np.degrees(np.arctan(abs(C11 - C12 - 2 * C44) / (np.sqrt(2) * (C11 - C12 + C44))))
    for row in cones:
        assert float(row.full[1]) == pytest.approx(np.sqrt((C11 - C12 + C44) / 3 / RHO * 1e3))
        assert float(row.full[2]) == pytest.approx(wide, abs=1e-6)
        assert np.allclose(np.abs(turn.T @ row.direction), 1 / np.sqrt(3), atol=1e-8)
        assert row.cells[3].strip("[]").replace("−", "").split() == ["1", "1", "1"]
    for row in touching:
        assert row.cells[2] == ""
        assert float(row.full[1]) == pytest.approx(np.sqrt(C44 / RHO * 1e3))


def test_a_line_and_a_solid_that_is_degenerate_everywhere():
    kinds = [row.cells[0] for _, rows in axes_of(CROSSING).groups for row in rows]
    assert sorted(kinds) == ["line", "touch"]
    glass = replace(CUBIC, specimen=replace(CUBIC.specimen,
                                            stiffness=as_rows(cubic(100.0, 40.0, 30.0))))
    ((_, (row,)),) = axes_of(glass).groups
    assert row.cells[0] == "everywhere"
    assert row.direction is None


def test_degenerate_directions_wait_or_say_why_there_are_none():
    pending = waves.axes_view(CUBIC.specimen, np.eye(3), None, pending=True)
    assert pending.pending
    assert pending.notice == waves.FINDING
    none = waves.axes_view(replace(CUBIC.specimen, density=None), np.eye(3), None, True)
    assert not none.pending
    assert none.notice == stage.NO_DENSITY
    assert "No two waves" in waves.axes_view(CUBIC.specimen, np.eye(3), (), False).notice


def test_axes_turn_with_the_part_and_stay_the_same_object():
    state = replace(STATE, specimen=CUBIC.specimen)
    for side in "AB":
        axes = single_directions(axes_in_part(state, side, axes_now))
        back = np.array([np.linalg.inv(TURNS[side]) @ axis.direction for axis in axes])
        known = np.array([axis.direction for axis in axes_now(CUBIC.specimen)])
        assert np.allclose(back, known, atol=1e-12)
    again = axes_in_part(looked_at(state, pin=DIAGONAL), "A", axes_now)
    assert again is axes_in_part(state, "A", axes_now)


# ------------------------------------------------------------------ marks and mended sheets
MARKED = looked_at(CUBIC, quantity="slowness", marks=True)


def test_marks_stand_where_the_axes_are_known_and_nowhere_before():
    marks = stage.pane_views(MARKED, True)["A"].marks
    axes = np.array([mark.direction for mark in marks if mark.kind == "axis"])
    assert len(axes) == 7
    greatest = np.sort(np.abs(axes).max(axis=1))
    assert np.allclose(greatest, [3**-0.5] * 4 + [1] * 3)
    waiting = stage.pane_views(MARKED, True, lambda specimen: ())["A"].marks
    assert [mark.kind for mark in waiting] == ["pin"]
    kinds = [mark[3] for mark in deck.hemisphere_view(MARKED).marks]
    assert kinds.count("axis") == 7
    kinds = [mark[3] for mark in deck.hemisphere_view(MARKED, True, lambda s: ()).marks]
    assert kinds.count("axis") == 0


def test_fine_sheets_are_mended_and_coarse_ones_are_the_mesh():
    fine, coarse = (stage.pane_views(MARKED, level)["A"].sheets for level in (True, False))
    fast, middle, slow = fine
    assert fast.rows.shape[1] == 10242
    # Eight ends of four axes, 36 vertices round each and one in the middle.
    assert middle.rows.shape[1] == slow.rows.shape[1] == 10242 + 8 * 37
    assert all(sheet.rows.shape[1] == 2562 for sheet in coarse)
    again = stage.pane_views(looked_at(MARKED, pin=DIAGONAL), True)["A"].sheets
    assert all(one.rows is two.rows and one.triangles is two.triangles
               for one, two in zip(fine, again, strict=True))  # fmt: skip


@pytest.mark.parametrize("colour", ["value", "longitudinality", "power_flow", "focusing"])
@pytest.mark.parametrize("key", ["slowness", "phase", "wave", "power_flow", "polarisation"])
def test_mended_sheets_are_coloured_like_the_others(key, colour):
    """On the circle about 111 the rays stand at the cone's angle from the axis."""
    view = stage.pane_views(looked_at(CUBIC, quantity=key, colour_by=colour), True)["A"]
    for sheet in view.sheets:
        assert np.isfinite(sheet.rows[:6]).all()
        added = sheet.rows[6, 10242:]
        assert np.isfinite(added).all()
        if colour == "power_flow" and added.size:
            wide = np.arctan(abs(C11 - C12 - 2 * C44) / (np.sqrt(2) * (C11 - C12 + C44)))
            assert np.allclose(added, np.degrees(wide), rtol=5e-3)
        if colour == "focusing":
            colours = sheet.rows[6][np.isfinite(sheet.rows[6])]
            assert 0.0499999 < colours.min() < colours.max() < 20.00001


def test_a_table_that_is_unstable_is_drawn_unmended():
    view = stage.pane_views(looked_at(UNSTABLE, quantity="slowness"), True)["A"]
    assert all(sheet.rows.shape[1] == 10242 for sheet in view.sheets)


def test_polarisation_ticks_stay_where_something_is_drawn():
    state = looked_at(UNSTABLE, quantity="slowness", ticks=True)
    view = stage.pane_views(state, True)["A"]
    middles = view.ticks.mean(axis=1)
    assert len(middles)
    assert np.linalg.norm(middles, axis=1).max() <= 1.01 * view.radius


def test_angles_of_an_unstable_table_are_not_shrunk_with_its_sheets():
    """Sheets that run off are drawn back; the power-flow angle that colours them is not."""
    state = looked_at(UNSTABLE, quantity="power_flow")
    view = stage.pane_views(state, False)["A"]
    (sheet,) = (view.sheets[1],)
    found = stage.quantity("power_flow").values(
        stage.live.part_medium(state.specimen, OrientationChoice()),
        stage.sphere_mesh(stage.live.COARSE_LEVEL).half,
    )[1]
    defined = np.isfinite(found)
    shown = sheet.rows[6, : found.size]
    assert np.allclose(shown[defined], found[defined], rtol=1e-5, atol=1e-4)


# ------------------------------------------------------------------ sections
@pytest.mark.parametrize("cut", ["identity", "bunge 0 30 0"])
def test_no_chord_is_drawn_where_sheets_cross_along_a_line(cut):
    """There the rays of either sheet jump; each curve ends and begins anew elsewhere."""
    state = looked_at(replace(CROSSING, orientation_a=OrientationChoice(cut)), quantity="wave")
    section, source = deck.section_view(state), deck.source_view(state)
    curves = [(c.sheet, c.points, c.leaves) for c in section.curves]
    for sheet, points, leaves in curves + [curve[1:] for curve in source.curves]:
        assert leaves.shape == points.shape[1:]
        gaps = np.flatnonzero(np.isnan(points[0]))
        assert len(gaps) == (0 if sheet == 0 else 4)
        for gap in gaps:
            jump = np.hypot(*(points[:, gap + 1] - points[:, gap - 1]))
            onwards = np.hypot(*(points[:, gap - 1] - points[:, gap - 2]))
            assert jump > 8 * onwards


def test_rays_that_leave_the_plane_are_flagged_not_negative():
    state = replace(CUBIC, orientation_a=OrientationChoice("bunge 20 30 40"))
    view = deck.section_view(looked_at(state, quantity="wave"))
    assert any(curve.leaves.any() for curve in view.curves)
    assert all(curve.negative is None for curve in view.curves)
    assert view.negative_note == "dotted: the ray leaves the plane"


def test_the_time_of_the_source_picture_is_kept_by_the_bench():
    view = deck.source_view(looked_at(CUBIC, source_time_us=3.0))
    assert view.time_us == 3.0
    fast = next(points for _, sheet, points, _ in view.curves if sheet == 0)
    assert np.hypot(*fast[:, 0]) == pytest.approx(3.0 * np.sqrt(C11 / RHO * 1e3), rel=1e-12)


@pytest.mark.parametrize("projection", ["equal_area", "stereographic"])
def test_a_line_of_equal_speeds_is_drawn_on_the_hemisphere(projection):
    """Under a tilt of 50° part of the cone about c is below the rim: it comes in opposite."""
    state = looked_at(
        replace(CROSSING, orientation_a=OrientationChoice("bunge 0 50 0")),
        quantity="slowness", marks=True, projection=projection,
    )  # fmt: skip
    (line,) = deck.hemisphere_view(state).lines
    x, y = line
    assert np.nanmax(np.hypot(x, y)) <= 1 + 1e-9
    assert 1 <= np.isnan(x).sum() <= 4
    steps = np.hypot(*np.diff(line, axis=1))
    assert np.nanmax(steps) < 0.2
    for place in line[:, np.isfinite(x)].T[::7]:
        n = np.array(deck.disc_direction(state, *place)).reshape(3, 1)
        medium = stage.live.part_medium(state.specimen, state.orientation_a)
        _, middle, slow = stage.quantity("phase").values(medium, directions(n))[:, 0]
        assert middle == pytest.approx(slow, rel=1e-6)
    assert deck.hemisphere_view(looked_at(state, marks=False)).lines == ()
