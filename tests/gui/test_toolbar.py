"""The toolbar emits choices, keeps everything reachable, and never cuts or covers a control."""

from dataclasses import replace
from itertools import combinations
from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, QRect, QSize, Qt
from PySide6.QtWidgets import QLabel, QToolButton

from gui.theme import LIGHT, style_sheet
from gui.toolbar import MARGIN, OPTIONS, Group, StageToolbar, flow
from gui.viewdata import ToolbarView
from gui.widgets.forms import Choice

ASSETS = (Path(__file__).parents[2] / "assets").as_posix()
VIEW = ToolbarView(
    quantity="young",
    quantities=(
        ("young", "Young's modulus", "pull over stretch"),
        ("shear_greatest", "shear modulus, greatest", ""),
        ("slowness", "slowness", "wants a density"),
    ),
    enabled=("young", "shear_greatest"),
    layout="AB",
    sheets=None,
    colours=(("value", "value"), ("power_flow", "power flow")),
    planes=(("XY", "part XY"), ("XZ", "part XZ")),
)
WAVES = replace(VIEW, quantity="slowness", sheets=(True, True, False))


@pytest.fixture
def bar(qtbot):
    made = StageToolbar()
    qtbot.addWidget(made)
    made.told = []
    for name in ("quantity_chosen", "layout_chosen", "sheet_toggled", "plane_chosen",
                 "option_toggled", "colour_chosen", "linked_toggled", "look_from"):
        signal = getattr(made, name)
        signal.connect(lambda *what, name=name: made.told.append((name, *what)))
    made.setStyleSheet(style_sheet(LIGHT, ASSETS))
    made.resize(1300, 40)
    made.show_view(VIEW)
    made.show()
    qtbot.waitExposed(made)
    return made


def choice(bar, field):
    return next(c for c in bar.findChildren(Choice) if c.field == field)


def button(bar, words):
    return next(b for b in bar.findChildren(QToolButton) if b.text() == words)


def action(bar, name):
    return next(a for a in bar._view_menu.actions() if a.data() == name)


def click(qtbot, target):
    qtbot.mouseClick(target, Qt.MouseButton.LeftButton)


def test_showing_says_nothing(bar):
    bar.show_view(replace(WAVES, layout="B", cut_away=True, marks=True, linked_cameras=False))
    assert bar.told == []
    assert button(bar, "B").isChecked()
    assert not button(bar, "A + B").isChecked()
    assert action(bar, "cut_away").isChecked()
    assert not action(bar, "linked_cameras").isChecked()
    assert [button(bar, n).isChecked() for n in "123"] == [True, True, False]


def test_choices(bar, qtbot):
    for field, name, key in (
        ("quantity", "quantity_chosen", "shear_greatest"),
        ("colour", "colour_chosen", "power_flow"),
    ):
        qtbot.keyClick(choice(bar, field), Qt.Key.Key_Down)
        assert bar.told.pop() == (name, key)
    qtbot.keyClick(choice(bar, "plane"), Qt.Key.Key_Up)
    assert bar.told == [("plane_chosen", "XY")]


def test_what_cannot_be_drawn_is_grey(bar, qtbot):
    model = choice(bar, "quantity").model()
    assert [model.item(row).isEnabled() for row in range(3)] == [True, True, False]
    assert model.item(2).toolTip() == "wants a density"
    qtbot.keyClick(choice(bar, "quantity"), Qt.Key.Key_End)
    assert ("quantity_chosen", "slowness") not in bar.told


def test_layout_buttons(bar, qtbot):
    for words, key in (("A", "A"), ("B", "B"), ("A + B", "AB")):
        click(qtbot, button(bar, words))
        assert bar.told[-1] == ("layout_chosen", key)
    assert len(bar.told) == 3


def test_sheets_are_there_for_three_sheet_quantities_only(bar, qtbot):
    assert not button(bar, "1").isVisible()
    bar.show_view(WAVES)
    assert button(bar, "1").isVisible()
    click(qtbot, button(bar, "3"))
    click(qtbot, button(bar, "1"))
    assert bar.told == [("sheet_toggled", 2, True), ("sheet_toggled", 0, False)]


@pytest.mark.parametrize("option", [o for o in OPTIONS if o.name != "linked_cameras"])
def test_every_option_is_in_the_view_menu(bar, option):
    bar.show_view(replace(WAVES, shared_scale=False))
    action(bar, option.name).trigger()
    assert bar.told == [("option_toggled", option.name, True)]


def test_turning_together_has_its_own_signal(bar, qtbot):
    click(qtbot, button(bar, "Turn together"))
    assert bar.told == [("linked_toggled", False)]


def test_choices_without_alternatives_are_not_offered(bar):
    bar.show_view(replace(VIEW, colours=(("value", "value"),), planes=()))
    assert not choice(bar, "colour").isVisible()
    assert not choice(bar, "plane").isVisible()
    bar.show_view(VIEW)
    assert choice(bar, "colour").isVisible()
    assert choice(bar, "plane").isVisible()


def test_marks_and_ticks_are_for_waves(bar):
    assert not action(bar, "ticks").isEnabled()
    assert not action(bar, "marks").isEnabled()
    bar.show_view(WAVES)
    assert action(bar, "ticks").isEnabled()


@pytest.mark.parametrize("key", ["X", "Y", "Z", "home"])
def test_looking_from_an_axis(bar, key):
    action(bar, key).trigger()
    assert bar.told == [("look_from", key)]


@pytest.mark.parametrize("view", [VIEW, WAVES])
@pytest.mark.parametrize("width", [1300, 1000, 760, 500])
def test_nothing_is_cut_or_covered(bar, qtbot, view, width):
    bar.show_view(view)
    bar.resize(width, bar.heightForWidth(width))
    qtbot.wait(1)
    groups = [g for g in bar.findChildren(Group) if g.isVisible()]
    for group in groups:
        assert bar.rect().contains(group.geometry())
        assert group.width() >= group.minimumSizeHint().width()
    for one, other in combinations(groups, 2):
        assert not one.geometry().intersects(other.geometry())
    visible = {c.field for c in bar.findChildren(Choice) if c.isVisible()}
    assert visible == {"quantity", "colour", "plane"}
    assert button(bar, "View ▾").isVisible()


@pytest.mark.parametrize("view", [VIEW, WAVES])
def test_one_row_from_760_pixels(bar, view):
    bar.show_view(view)
    one_row = bar.heightForWidth(1600)
    assert bar.heightForWidth(760) == one_row
    assert bar.heightForWidth(400) > one_row


def test_option_buttons_show_where_there_is_room(bar, qtbot):
    assert button(bar, "Cut open").isVisible()
    bar.resize(760, 40)
    qtbot.wait(1)
    assert not button(bar, "Cut open").isVisible()


def test_flow_fills_rows():
    places, height = flow([QSize(100, 20), QSize(100, 30), QSize(100, 20)], 230)
    assert [place.top() == places[0].top() for place in places] == [True, True, False]
    assert places[2] == QRect(QPoint(MARGIN, places[2].top()), QSize(100, 20))
    assert height >= places[2].bottom()


def test_words_and_cut_open_stay_where_two_rows_have_room(bar, qtbot):
    bar.show_view(replace(WAVES, planes=()))
    bar.resize(456, bar.heightForWidth(456))
    qtbot.wait(1)
    words = {label.text() for label in bar.findChildren(QLabel) if label.isVisible()}
    assert "Sheets" in words
    assert button(bar, "Cut open").isVisible()
    assert not button(bar, "Turn together").isVisible()
