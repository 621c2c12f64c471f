"""Quantities of three sheets in the whole window: what is drawn, coloured, left out."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QComboBox, QLineEdit, QToolButton

from core import live
from core.directional.acoustic_axes import acoustic_axes
from core.directional.quantities import QUANTITIES
from gui.presenting.stage import LEFT_OUT, NO_DENSITY
from tests.gui.driving import (
    changed,
    control,
    differs,
    drag,
    fill_in,
    lines,
    load,
    menu,
    pick,
    picture,
    pictures,
    pixels_of,
    settle,
    show,
)

pytestmark = pytest.mark.usefixtures("without_spreads")
CUBIC = "casting_lm40_cubic.json"
UNSTABLE = "ledger_slip_lm21_unstable.json"


@pytest.fixture
def waves(app):
    """The slowness of the cubic casting in one pane."""
    load(app, CUBIC)
    pick(app, "Quantity", "slowness")
    settle(app)
    return app


def pane(app, side="A"):
    return app.window.views.panes[side]


def press(app, tooltip):
    QTest.mouseClick(control(app, QToolButton, tooltip), Qt.MouseButton.LeftButton)
    settle(app)


def option(app, name):
    action = app.window.views.toolbar._actions[name]
    assert action.isEnabled()
    action.trigger()
    settle(app)


def scene(app, view, size=(300, 300)):
    """Return a view as the stage's renderer draws it, without the text over it."""
    image = app.renderer.render(view, pane(app).camera, size, app.dressing.theme, "theme", 0)
    return pixels_of(image)


def test_a_hidden_sheet_is_gone_from_the_pane(waves):
    whole = picture(pane(waves))
    press(waves, "Show the slowest sheet")
    view = pane(waves)._view
    assert waves.bench.state.display.sheets == (True, True, False)
    assert differs(whole, picture(pane(waves)), 0.05)
    without = replace(view, sheets=view.sheets[:2])
    assert np.array_equal(scene(waves, view), scene(waves, without))
    shown = replace(view, sheets=(*view.sheets[:2], replace(view.sheets[2], visible=True)))
    assert differs(scene(waves, view), scene(waves, shown), 0.05)
    assert [curve.sheet for curve in waves.window.views.section._view.curves] == [0, 1]
    press(waves, "Show the slowest sheet")
    waves.window.setFocus()
    settle(waves)
    assert np.array_equal(picture(pane(waves)), whole)


def test_cutting_open_shows_the_inner_sheets(waves):
    """Looking along the normal of the section, the middle is the inside of the fastest."""
    menu(waves, "Look along part Y")
    settle(waves)
    closed = scene(waves, pane(waves)._view)
    option(waves, "cut_away")
    opened = scene(waves, pane(waves)._view)
    view = pane(waves)._view
    alone = scene(waves, replace(view, sheets=view.sheets[:1]))
    middle = (slice(140, 160), slice(140, 160))
    assert differs(closed[middle], opened[middle], 0.9)
    assert np.abs(opened[middle].astype(int) - alone[middle]).max() < 40
    # Low slowness is dark, high slowness bright: outside the fast sheet it is brighter.
    assert opened[middle].mean() < closed[middle].mean()


def test_colours_follow_what_is_chosen(waves):
    seen = {"value": picture(pane(waves))}
    titles = {pane(waves)._view.scale.title}
    for key in ("longitudinality", "power_flow", "focusing"):
        pick(waves, "Colour", key)
        settle(waves)
        seen[key] = picture(pane(waves))
        titles.add(pane(waves)._view.scale.title)
    assert len(titles) == 4
    for key in ("longitudinality", "power_flow", "focusing"):
        assert differs(seen["value"], seen[key], 0.05)
    pick(waves, "Quantity", "young")
    settle(waves)
    assert not control_is_seen(waves, QComboBox, "Colour")


def control_is_seen(app, kind, name):
    return any(w.isVisible() for w in app.window.findChildren(kind)
               if w.accessibleName() == name)  # fmt: skip


def test_axes_of_degeneracy_are_marked_on_the_stage_and_the_hemisphere(waves):
    before = pictures(waves)
    option(waves, "marks")
    state = waves.bench.state
    found = acoustic_axes(live.part_medium(state.specimen, state.orientation_a))
    points = [axis for axis in found if axis.kind != "line"]
    # A cubic crystal has them along its three four-fold and four three-fold axes at least.
    assert len(points) >= 7
    assert sum(m.kind == "axis" for m in pane(waves)._view.marks) == len(points)
    marks = waves.window.views.deck.hemisphere._view.marks
    assert sum(kind == "axis" for *_, kind in marks) == len(points)
    assert changed(before, pictures(waves)) == {"pane A", "deck"}


def test_polarisation_ticks_are_drawn_on_demand(waves):
    before = pictures(waves)
    option(waves, "ticks")
    assert changed(before, pictures(waves)) == {"pane A", "section"}
    option(waves, "ticks")
    waves.window.setFocus()
    settle(waves)
    assert changed(before, pictures(waves)) == set()


def test_the_options_of_waves_are_off_for_stiffness(app):
    actions = app.window.views.toolbar._actions
    assert not actions["ticks"].isEnabled()
    assert not actions["marks"].isEnabled()
    assert not control_is_seen(app, QToolButton, "Show the slowest sheet")
    pick(app, "Quantity", "wave")
    settle(app)
    assert actions["ticks"].isEnabled()
    assert control_is_seen(app, QToolButton, "Show the slowest sheet")


def test_without_a_density_waves_are_off_and_the_rest_works(app):
    pick(app, "Quantity", "slowness")
    settle(app)
    fill_in(app, "Density in kg/m³", "")
    settle(app)
    views = app.window.views
    for side in "AB":
        assert pane(app, side)._view.notice == NO_DENSITY
    assert views.section._view.notice == NO_DENSITY
    assert views.deck.hemisphere._view.notice == NO_DENSITY
    assert any("waves are off" in fact for fact in views.verdict._view.facts)
    assert "density" in views.pin._notice.text()
    combo = control(app, QComboBox, "Quantity")
    off = {combo.itemData(k) for k in range(combo.count())
           if not combo.model().item(k).isEnabled()}  # fmt: skip
    assert off == {key for key, entry in QUANTITIES.items() if entry.wave}
    pick(app, "Quantity", "young")
    settle(app)
    assert pane(app)._view.notice == ""
    assert views.section._view.curves
    assert not any("wave" in row[0] for row in lines(views.pin.table))
    assert len(lines(views.extremes.table)) == 8
    fill_in(app, "Density in kg/m³", "2684")
    settle(app)
    assert len(lines(views.extremes.table)) == 14


@pytest.mark.parametrize("face", ["hemisphere", "sweep", "source"])
def test_every_quantity_of_an_unstable_table_is_shown_as_far_as_it_is_defined(app, face):
    load(app, UNSTABLE)
    show(app, deck=face)
    notices = {}
    for key in QUANTITIES if face == "hemisphere" else ("young", "slowness", "focusing"):
        pick(app, "Quantity", key)
        settle(app)
        view = pane(app)._view
        notices[key] = view.notice
        values = np.concatenate([sheet.rows[6] for sheet in view.sheets])
        assert np.isfinite(values).any()
        assert np.isfinite([view.radius, view.scale.low, view.scale.high]).all()
        assert (view.notice == LEFT_OUT) == bool(np.isnan(view.sheets[0].rows[0]).any()
            or any(np.isnan(s.rows[0]).any() for s in view.sheets))  # fmt: skip
    assert notices["slowness"] == LEFT_OUT
    assert notices["young"] == LEFT_OUT
    assert app.window.views.verdict._view.mark == "unstable"


def test_the_source_picture_follows_its_time(app):
    before = app.bench.state
    app.window.views.deck.choices[0].setCurrentIndex(2)
    app.window.views.deck.choices[0].activated.emit(2)
    settle(app)
    assert app.bench.state == replace(before, display=replace(before.display, deck="source"))
    source = app.window.views.deck.source
    first, seen = source._view, picture(source.canvas)
    source.time.setFocus()
    source.time.selectAll()
    QTest.keyClicks(source.time, "4")
    QTest.keyClick(source.time, Qt.Key.Key_Return)
    assert source._view.time_us == 4.0
    assert np.allclose(source._view.curves[0][2], 4 * first.curves[0][2])
    assert differs(seen, picture(source.canvas))


def test_a_row_of_the_reading_puts_its_quantity_on_the_stage(app):
    table = app.window.views.pin.table
    rows = [row[0] for row in lines(table)]
    table.setFocus()
    table.setCurrentIndex(table.lines.index(rows.index("ψ flow"), 0))
    QTest.keyClick(table, Qt.Key.Key_Return)
    assert app.bench.state.quantity == "power_flow"
    settle(app)
    assert control(app, QComboBox, "Quantity").currentData() == "power_flow"


def test_the_cutting_error_is_typed_and_refused_in_place(app):
    name = "Cutting error δ, degrees"
    fill_in(app, name, "2")
    settle(app)
    assert app.bench.state.cutting_error_deg == 2.0
    table = app.window.views.cutting_error.table.table
    least, greatest = (float(table.lines.copied(0, k)) for k in (2, 3))
    for bad in ("0", "-1", "31", "much", "1e400"):
        fill_in(app, name, bad)
        assert app.bench.state.cutting_error_deg == 2.0
        assert app.window.views.cutting_error.field.message
    fill_in(app, name, "4°")
    settle(app)
    assert app.window.views.cutting_error.field.message == ""
    assert float(table.lines.copied(0, 2)) <= least
    assert float(table.lines.copied(0, 3)) >= greatest
    assert control(app, QLineEdit, name).text() == "4"


@pytest.mark.gl
@pytest.mark.parametrize("key", ["young", "slowness"])
def test_a_moved_pin_uploads_nothing_and_a_turned_camera_touches_no_model(app, key):
    pick(app, "Quantity", key)
    settle(app)
    uploads, views = app.renderer.uploads, [p._view for p in app.window.views.panes.values()]
    for pin in ((1.0, 0.0, 0.0), (0.0, 0.6, 0.8)):
        app.stage.move_pin(pin)
        settle(app)
    assert app.renderer.uploads == uploads
    moved = [p._view for p in app.window.views.panes.values()]
    assert all(a is not b for a, b in zip(views, moved, strict=True))
    drag(pane(app), (120, 120), (180, 150))
    settle(app)
    assert app.renderer.uploads == uploads
    assert [p._view for p in app.window.views.panes.values()] == moved
    fill_in(app, "Orientation A", "bunge 1 2 3")
    settle(app)
    assert app.renderer.uploads > uploads
