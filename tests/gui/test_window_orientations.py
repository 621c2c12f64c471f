"""Two orientations side by side, and the pin, in the whole window."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QComboBox, QLineEdit, QPushButton

from core import live
from core.state import OrientationChoice
from gui.plots.hemisphere import disc_ground
from gui.plots.section import section_ground
from gui.plots.sweep import sweep_axes
from gui.stage.labels import scene_rect
from gui.stage.picking import surface_point
from gui.widgets.forms import DEGREES_PER_PIXEL
from tests.gui.driving import (
    KEYS,
    changed,
    click,
    control,
    drag,
    enter,
    fill_in,
    full,
    lines,
    load,
    menu,
    pick,
    picture,
    pictures,
    pixels_of,
    sentences,
    settle,
    show,
)
from tests.materials import rotated

pytestmark = pytest.mark.usefixtures("without_spreads")
TRIGONAL = "rod_lm12_trigonal.json"
CUBIC = "casting_lm40_cubic.json"


def rotation(app, side):
    state = app.bench.state
    return live.rotation(state.orientation_of(side), state.specimen_of(side))


def part(app):
    return app.window.views.part.table


def open_part_table(app):
    """Open the section of the part table, which is closed at first."""
    app.window.views.part.setVisible(True)
    settle(app)


def press(app, words):
    QTest.mouseClick(control(app, QPushButton, words), Qt.MouseButton.LeftButton)
    settle(app)


# ------------------------------------------------------------------ orientations
def test_a_rotated_cut_typed_into_a_turns_everything_that_shows_a(app):
    show(app, shared_scale=False)
    before = pictures(app)
    fill_in(app, "Orientation A", "(YXl) 35.25")
    settle(app)
    assert app.bench.state.orientation_a == OrientationChoice("(YXl) 35.25")
    # IEEE Std 176-1987: thickness along Y and length along X, then 35.25° about the length;
    # part Z is the thickness and part X the length.
    s, c = np.sin(np.radians(35.25)), np.cos(np.radians(35.25))
    cut = np.array([[1.0, 0.0, 0.0], [0.0, s, -c], [0.0, c, s]])
    assert np.allclose(rotation(app, "A"), cut, atol=1e-15)
    assert changed(before, pictures(app)) == {"pane A", "section", "deck"}
    turned = np.linalg.inv(rotated(np.array(app.bench.state.specimen.stiffness), cut))
    for axis, place in zip("XYZ", range(3), strict=True):
        shown = full(part(app), f"E along {axis}, GPa", 1)
        assert shown == pytest.approx(1 / turned[place, place], rel=1e-12)
    assert full(part(app), "G in YZ, GPa", 1) == pytest.approx(1 / turned[3, 3], rel=1e-12)
    assert full(part(app), "ν loaded X, across Y", 1) == pytest.approx(
        -turned[0, 1] / turned[0, 0], rel=1e-12
    )
    menu(app, "Undo")
    assert app.bench.state.orientation_a == OrientationChoice()
    settle(app)
    assert {n for n in changed(before, pictures(app)) if n.startswith("pane")} == set()


BAD_ORIENTATIONS = {
    "parallel": ("Z=[0 0 1] X=[0 0 2]", "parallel"),
    "no direction": ("Z=[0 0 0] X=[1 0 0]", "0 0 0"),
    "unknown letters": ("(YXq) 35", "'q'"),
    "too few angles": ("(YXlt) 35", "1 angle"),
    "no rotation": ("matrix 1 0 0 0 1 0 0 0 2", "rotation"),
    "nonsense": ("sideways", ""),
    "empty": ("", ""),
    "one direction": ("[1 1 0]", "two"),
}


def test_bad_orientations_are_refused_in_place(app):
    start = app.bench.state
    for kind, (text, word) in BAD_ORIENTATIONS.items():
        fill_in(app, "Orientation B", text)
        (sentence,) = sentences(app.window.views.orientations["B"])
        assert word in sentence, kind
        assert app.bench.state == start, kind
        assert control(app, QLineEdit, "Orientation B").text() == text
    fill_in(app, "Orientation B", "bunge 10 20 30")
    assert sentences(app.window.views.orientations["B"]) == []
    assert app.bench.state.orientation_b.text == "bunge 10 20 30"


def test_four_indices_that_break_the_sum_rule_are_told_the_third(app):
    load(app, TRIGONAL)
    fill_in(app, "Orientation A", "Z=[2 -1 5 0] X=[0 0 0 1]")
    (sentence,) = sentences(app.window.views.orientations["A"])
    assert "-1" in sentence.replace("−", "-")
    assert app.bench.state.orientation_a.text == "identity"


def test_another_way_says_the_same_orientation(app):
    fill_in(app, "Orientation B", "axis 1,2,3 40")
    before = rotation(app, "B").copy()
    for way, beginning in (("directions", "Z="), ("bunge", "bunge"), ("cut", "("),
                           ("matrix", "matrix"), ("axis", "axis")):  # fmt: skip
        pick(app, "How orientation B is said", way)
        assert np.abs(rotation(app, "B") - before).max() < 1e-12, way
        text = control(app, QLineEdit, "Orientation B").text()
        assert text.startswith(beginning)
        assert app.bench.state.orientation_b.text == text


def test_the_list_of_ways_follows_what_is_typed(app):
    ways = control(app, QComboBox, "How orientation A is said")
    for text, way in (("bunge 1 2 3", "bunge"), ("(YXl) 35", "cut"), ("identity", "identity")):
        fill_in(app, "Orientation A", text)
        settle(app)
        assert ways.currentData() == way


def test_a_drag_of_a_turn_is_one_step_and_shows_while_it_goes(app):
    handle = app.window.views.orientations["B"]._turns[2].handle
    seen = []
    app.bench.changed.connect(lambda state, names: seen.append(state.orientation_b.turn[2]))
    before = rotation(app, "B").copy()
    drag(handle, (5, 5), (45, 5))
    settle(app)
    assert len(seen) >= 3
    assert app.bench.history.count() == 1
    assert app.bench.history.undoText() == "Turn B about part Z"
    angle = np.radians(40 * DEGREES_PER_PIXEL)
    assert app.bench.state.orientation_b.turn == (0.0, 0.0, 40 * DEGREES_PER_PIXEL)
    about_z = np.array([[np.cos(angle), np.sin(angle), 0.0],
                        [-np.sin(angle), np.cos(angle), 0.0], [0.0, 0.0, 1.0]])  # fmt: skip
    assert np.allclose(rotation(app, "B"), about_z @ before, atol=1e-14)
    drag(handle, (5, 5), (25, 5))
    assert app.bench.history.count() == 2
    menu(app, "Undo")
    menu(app, "Undo")
    assert app.bench.state.orientation_b.turn == (0.0, 0.0, 0.0)


def test_a_typed_turn_is_one_step_and_nonsense_none(app):
    name = "Turn A about part X, degrees"
    fill_in(app, name, "12.5")
    assert app.bench.state.orientation_a.turn == (12.5, 0.0, 0.0)
    fill_in(app, name, "much")
    assert app.bench.state.orientation_a.turn == (12.5, 0.0, 0.0)
    assert len(sentences(app.window.views.orientations["A"])) == 1
    assert app.bench.history.count() == 1


def test_swap_and_copy(app):
    a, b = app.bench.state.orientation_a, app.bench.state.orientation_b
    press(app, "Swap A ↔ B")
    assert (app.bench.state.orientation_a, app.bench.state.orientation_b) == (b, a)
    assert control(app, QLineEdit, "Orientation A").text() == b.text
    press(app, "Copy A → B")
    assert (app.bench.state.orientation_a, app.bench.state.orientation_b) == (b, b)
    menu(app, "Undo")
    press(app, "Copy B → A")
    assert (app.bench.state.orientation_a, app.bench.state.orientation_b) == (a, a)
    menu(app, "Undo")
    menu(app, "Undo")
    assert (app.bench.state.orientation_a, app.bench.state.orientation_b) == (a, b)


def test_b_equal_to_a_is_the_same_picture_and_no_difference(app):
    show(app, hemisphere="difference", layout="AB")
    assert np.nanmax(np.abs(app.window.views.deck.hemisphere._view.picture)) > 10
    press(app, "Copy A → B")
    views = app.window.views
    one, other = views.panes["A"]._view, views.panes["B"]._view
    camera = views.panes["A"].camera
    assert views.panes["B"].camera == camera
    images = [
        pixels_of(app.renderer.render(replace(v, side="A"), camera, (300, 300),
                                      app.dressing.theme, "theme", 0))
        for v in (one, other)
    ]  # fmt: skip
    assert np.array_equal(*images)
    assert np.nanmax(np.abs(views.deck.hemisphere._view.picture)) == 0.0
    assert views.deck.hemisphere._view.shown == "difference"
    for _, a, b, difference, _ in lines(views.pin.table)[1:7]:
        assert a == b
        assert difference == "0"


def test_another_crystal_in_b_and_back(app):
    start = app.bench.state
    choose_submenu(app, "Another crystal in B, from the demos", "casting")
    settle(app)
    state = app.bench.state
    assert "LM-40" in state.other.name
    assert state.display.layout == "AB"
    assert state.orientation_b == OrientationChoice()
    assert "LM-40" in app.window.views.panes["B"]._view.title
    young = full(app.window.views.part.table, "E along Z, GPa", 2)
    compliance = np.linalg.inv(np.array(state.other.stiffness))
    assert young == pytest.approx(1 / compliance[2, 2], rel=1e-12)
    pick(app, "Crystal of", "B")
    settle(app)
    assert "LM-40" in control(app, QLineEdit, "Name of the specimen").text()
    fill_in(app, "Density in kg/m³", "8000")
    assert app.bench.state.other.density == 8000.0
    assert app.bench.state.specimen == start.specimen
    menu(app, "One crystal for A and B")
    settle(app)
    assert app.bench.state.other is None
    assert control(app, QLineEdit, "Name of the specimen").text() == start.specimen.name
    while app.bench.history.canUndo():
        menu(app, "Undo")
    assert app.bench.state == start


def test_one_crystal_again_when_b_speaks_of_a_cell_that_a_has_not(app):
    """B's words can be read in its own crystal only; its orientation in space stays."""
    load(app, CUBIC)
    choose_submenu(app, "Another crystal in B, from the demos", "LM-12")
    fill_in(app, "Orientation B", "Z=[2 -1 -1 3] X=[0 1 -1 0]")
    assert sentences(app.window.views.orientations["B"]) == []
    before = rotation(app, "B").copy()
    menu(app, "One crystal for A and B")
    settle(app)
    assert app.bench.state.other is None
    assert np.abs(rotation(app, "B") - before).max() < 1e-12


def test_copying_an_orientation_between_crystals_keeps_the_rotation(app):
    choose_submenu(app, "Another crystal in B, from the demos", "casting")
    fill_in(app, "Orientation A", "Z=(1 1 0) X=[0 0 1]")
    press(app, "Copy A → B")
    assert np.abs(rotation(app, "B") - rotation(app, "A")).max() < 1e-12


def choose_submenu(app, words, entry):
    below = next(
        action.menu()
        for top in app.window.menuBar().actions()
        for action in top.menu().actions()
        if action.menu() is not None and action.text().replace("&", "") == words
    )
    below.aboutToShow.emit()
    next(action for action in below.actions() if entry in action.text()).trigger()


# ------------------------------------------------------------------ layouts, cameras, plane
def test_layouts_show_one_pane_or_two(app):
    for keys, sides in (("Pane A", "A"), ("Pane B", "B"), ("Panes A and B", "AB")):
        menu(app, keys)
        settle(app)
        assert {s for s, p in app.window.views.panes.items() if p.isVisible()} == set(sides)
        reading = app.window.views.pin.table.lines.columns
        assert [c.title for c in reading if c.title in "AB" and c.title] == (
            ["A", "B"] if sides == "AB" else [sides]
        )


def test_the_reading_of_b_alone_is_that_of_b(app):
    both = full(app.window.views.pin.table, "E", 2)
    menu(app, "Pane B")
    settle(app)
    assert full(app.window.views.pin.table, "E", 1) == both


def test_cameras_turn_together_until_they_are_unlinked(app):
    panes = app.window.views.panes
    start = app.bench.state
    QTest.keyClick(panes["A"], KEYS.Key_Left)
    assert panes["B"].camera == panes["A"].camera != type(panes["A"].camera)()
    app.window.views.toolbar._actions["linked_cameras"].trigger()
    kept = panes["B"].camera
    drag(panes["A"], (150, 150), (200, 180))
    assert panes["B"].camera == kept != panes["A"].camera
    app.window.views.toolbar._actions["linked_cameras"].trigger()
    assert panes["B"].camera == panes["A"].camera
    assert app.bench.state == start  # turning the camera is no edit


def test_scales_are_shared_or_each_its_own(app):
    press_option(app, "shared_scale")
    settle(app)
    a, b = (app.window.views.panes[s]._view for s in "AB")
    apart = (a.radius, a.scale.high) != (b.radius, b.scale.high)
    press_option(app, "shared_scale")
    settle(app)
    a, b = (app.window.views.panes[s]._view for s in "AB")
    assert apart
    assert (a.radius, a.scale) == (b.radius, b.scale)


def press_option(app, name):
    app.window.views.toolbar._actions[name].trigger()


def plane_field(app):
    return app.window.views.section.plane.lineEdit()


def test_a_typed_plane_moves_the_section(app):
    before = pictures(app)
    enter(plane_field(app), "[1 0 0]")
    settle(app)
    a = app.bench.state.specimen.frame.basis()[:, 0]
    assert np.allclose(app.bench.state.section, a / np.linalg.norm(a), atol=1e-14)
    assert {"section", "pane A", "pane B"} <= changed(before, pictures(app))
    enter(plane_field(app), "rubbish")
    assert app.window.views.section.message.text()
    assert np.allclose(app.bench.state.section, a / np.linalg.norm(a), atol=1e-14)
    enter(plane_field(app), "part XY")
    assert app.bench.state.section == (0.0, 0.0, 1.0)
    assert app.window.views.section.message.text() == ""


def test_a_bad_plane_is_forgotten_when_the_old_one_is_chosen_again(app):
    enter(plane_field(app), "rubbish")
    assert app.window.views.section.plane.is_wrong()
    enter(plane_field(app), "part XZ")
    assert not app.window.views.section.plane.is_wrong()
    assert app.window.views.section.message.text() == ""


def test_the_plane_of_the_pin_holds_the_pin(app):
    plane = app.window.views.section.plane
    index = plane.findData("pin")
    plane.setCurrentIndex(index)
    plane.activated.emit(index)
    settle(app)
    assert abs(np.dot(app.bench.state.section, app.bench.state.pin)) < 1e-15
    assert app.window.views.section._view.pin_angle is not None


# ------------------------------------------------------------------ the pin
def angle_between(a, b):
    """Degrees between two directions, either end."""
    return np.degrees(np.arccos(min(1.0, abs(float(np.dot(a, b))))))


def test_a_click_on_a_surface_puts_the_pin_there(app):
    pane = app.window.views.panes["B"]
    wanted = np.array([0.3, -0.8, 0.5]) / np.linalg.norm([0.3, -0.8, 0.5])
    point = surface_point(pane._view, tuple(wanted))
    corner = scene_rect(QRectF(pane.rect()), app.dressing.theme).topLeft()
    (x, y), _ = pane.camera.project(point[:, None], pane._scene_size())
    click(pane, float(x[0]) + corner.x(), float(y[0]) + corner.y())
    settle(app)
    assert angle_between(app.bench.state.pin, wanted) < 1.0
    assert app.bench.history.undoText() == "Move the pin"
    assert app.bench.history.count() == 1


def test_a_drag_on_a_pane_turns_and_leaves_the_pin(app):
    start = app.bench.state.pin
    drag(app.window.views.panes["A"], (150, 150), (190, 170))
    assert app.bench.state.pin == start


def test_a_click_on_the_section_puts_the_pin_there(app):
    plot = app.window.views.section
    ground = section_ground(QRectF(plot.canvas.rect()), plot._view, app.dressing.theme)
    at = ground.at(np.radians(30.0), 0.6 * ground.rim)
    click(plot.canvas, at.x(), at.y())
    settle(app)
    # The plane XZ: X to the right, Z up.
    wanted = (np.cos(np.radians(30)), 0.0, np.sin(np.radians(30)))
    assert angle_between(app.bench.state.pin, wanted) < 1.0
    assert plot._view.pin_angle == pytest.approx(np.radians(30), abs=0.02)


@pytest.mark.parametrize("projection", ["equal_area", "stereographic"])
def test_a_click_on_the_hemisphere_puts_the_pin_there(app, projection):
    show(app, projection=projection)
    plot = app.window.views.deck.hemisphere
    theta, phi = np.radians(50.0), np.radians(200.0)
    # Snyder 1987: r = √2 sin(θ/2) equal area, tan(θ/2) stereographic.
    radius = {"equal_area": np.sqrt(2) * np.sin(theta / 2),
              "stereographic": np.tan(theta / 2)}[projection]  # fmt: skip
    ground = disc_ground(QRectF(plot.canvas.rect()), plot._view, app.dressing.theme)
    at = ground.centre + ground.rim * radius * QPointF(np.cos(phi), -np.sin(phi))
    click(plot.canvas, at.x(), at.y())
    wanted = (np.sin(theta) * np.cos(phi), np.sin(theta) * np.sin(phi), np.cos(theta))
    assert angle_between(app.bench.state.pin, wanted) < 1.5
    assert app.bench.state.pin[2] > 0


def test_a_click_on_the_sweep_turns_the_pin_about_the_axis(app):
    show(app, deck="sweep", sweep_about=(0.0, 0.0, 1.0), pin=(1.0, 0.0, 0.0))
    plot = app.window.views.deck.sweep
    axes = sweep_axes(QRectF(plot.canvas.rect()), plot._view, app.dressing.theme)
    click(plot.canvas, axes.x(40.0), axes.area.center().y())
    wanted = (np.cos(np.radians(40)), np.sin(np.radians(40)), 0.0)
    assert np.degrees(np.arccos(np.dot(app.bench.state.pin, wanted))) < 0.6
    pick(app, "Axis the pin is turned about", "X")
    assert app.bench.state.display.sweep_about == (1.0, 0.0, 0.0)
    pick(app, "Axis the pin is turned about", "normal")
    assert app.bench.state.display.sweep_about is None


def test_a_typed_direction_puts_the_pin_there(app):
    field = control(app, QLineEdit, "Direction of the pin")
    enter(field, "[0 0 1]")
    settle(app)
    # The axes are z||c, y||b*: part Z of the unturned A is c, part Y the normal of (0 1 0).
    assert np.allclose(app.bench.state.pin, (0.0, 0.0, 1.0), atol=1e-15)
    assert field.text() == ""
    enter(field, "(0 1 0)")
    assert np.allclose(app.bench.state.pin, (0.0, 1.0, 0.0), atol=1e-15)
    enter(field, "0.6 0 0.8")
    assert np.allclose(app.bench.state.pin, (0.6, 0.0, 0.8), atol=1e-15)


def test_bad_directions_are_refused_in_place(app):
    start = app.bench.state
    field = control(app, QLineEdit, "Direction of the pin")
    for text in ("[0 0 0]", "up", "[1 2]", "(1 2 x)", "0 0 0"):
        enter(field, text)
        settle(app)
        assert len(sentences(app.window.views.pin)) == 1, text
        assert app.bench.state == start, text
        assert field.text() == text
    enter(field, "[1 0 0]")
    settle(app)
    assert sentences(app.window.views.pin) == []
    assert app.bench.state != start


SAME_IN_THE_READING = {
    "E": ("E", "stiffness"),
    "β": ("β", "stiffness"),
    "G least": ("G least", "stiffness"),
    "G greatest": ("G greatest", "stiffness"),
    "ν least": ("ν least", "stiffness"),
    "ν greatest": ("ν greatest", "stiffness"),
    "v1": ("v", "fastest wave"),
    "v2": ("v", "middle wave"),
    "v3": ("v", "slowest wave"),
}


def test_every_go_link_puts_the_pin_where_the_reading_is_the_extreme(app):
    fill_in(app, "Orientation A", "bunge 20 50 -35")
    settle(app)
    table = app.window.views.extremes
    rows = lines(table.table)
    assert len(rows) == 14
    for number, row in enumerate(rows):
        name = row[0].split(",")[0]  # "E least"
        label, heading = SAME_IN_THE_READING.get(name) or SAME_IN_THE_READING[
            name.rsplit(" ", 1)[0]
        ]
        extreme = float(table.table.lines.copied(number, 1))
        QTest.mouseClick(table.link(number), Qt.MouseButton.LeftButton)
        settle(app)
        at_pin = full(app.window.views.pin.table, label, 1, heading)
        assert at_pin == pytest.approx(extreme, rel=1e-9), row


def test_the_pin_shows_in_every_picture_that_has_one(app):
    show(app, pin=(0.0, 0.0, 1.0))
    before = pictures(app)
    app.stage.move_pin((0.6, 0.0, 0.8))
    settle(app)
    assert changed(before, pictures(app)) == {"pane A", "pane B", "section", "deck"}
    assert np.array_equal(picture(app.window.views.spectrum), before["spectrum"])
