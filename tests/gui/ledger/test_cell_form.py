"""The cell form emits lengths and angles, and asks before the axes change."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QPushButton

from gui.ledger.cell_form import AxesChoice, AxesQuestion, CellForm
from gui.widgets.forms import TextField
from tests.gui.ledger.sample_views import CELL

NAMES = ("a", "b", "c", "alpha", "beta", "gamma")


@pytest.fixture
def form(qtbot):
    made = CellForm()
    qtbot.addWidget(made)
    made.told, made.axes = [], []
    made.edited.connect(lambda *what: made.told.append(what))
    made.axes_changed.connect(lambda *what: made.axes.append(what))
    made.resize(340, 250)
    made.show_view(CELL)
    made.show()
    qtbot.waitExposed(made)
    made.activateWindow()
    return made


def field(form, name):
    return next(f for f in form.findChildren(TextField) if f.field == name)


def question(form):
    return form.findChild(AxesQuestion)


def answer(form, qtbot, words):
    button = next(b for b in form.findChildren(QPushButton) if b.text() == words)
    qtbot.mouseClick(button, Qt.MouseButton.LeftButton)


def choose_other(form, qtbot):
    axes = form.findChild(AxesChoice)
    axes.setFocus()
    qtbot.keyClick(axes, Qt.Key.Key_Down)
    return axes


def test_it_shows_the_cell_and_says_nothing(form):
    assert tuple(field(form, name).text() for name in NAMES) == CELL.lengths + CELL.angles
    assert form.findChild(AxesChoice).currentText() == "z ∥ c, y ∥ b*"
    form.show_view(replace(CELL, axes="x||a, z||c*", lengths=("1", "2", "3")))
    assert form.findChild(AxesChoice).currentText() == "x ∥ a, z ∥ c*"
    assert field(form, "c").text() == "3"
    assert (form.told, form.axes) == ([], [])


@pytest.mark.parametrize("name", NAMES)
def test_each_field_emits_its_name(form, qtbot, name):
    target = field(form, name)
    target.setFocus()
    target.selectAll()
    qtbot.keyClicks(target, "9.5")
    qtbot.keyClick(target, Qt.Key.Key_Return)
    assert form.told == [(name, "9.5")]
    assert form.texts()[name] == "9.5"
    assert list(form.texts()) == list(NAMES)


@pytest.mark.parametrize(
    ("words", "re_express"), [("&Turn the numbers", True), ("&Keep the numbers", False)]
)
def test_a_new_convention_asks_what_becomes_of_the_numbers(form, qtbot, words, re_express):
    choose_other(form, qtbot)
    assert question(form).isVisible()
    assert form.axes == []
    answer(form, qtbot, words)
    assert form.axes == [("x||a, z||c*", re_express)]
    assert not question(form).isVisible()


def test_cancel_keeps_the_axes(form, qtbot):
    axes = choose_other(form, qtbot)
    answer(form, qtbot, "Cancel")
    assert form.axes == []
    assert axes.currentText() == "z ∥ c, y ∥ b*"
    choose_other(form, qtbot)  # may be asked again
    assert question(form).isVisible()


def test_the_question_outlives_other_changes_but_not_new_axes(form, qtbot):
    axes = choose_other(form, qtbot)
    form.show_view(replace(CELL, note="Volume 665 Å³"))
    assert question(form).isVisible()
    assert axes.currentText() == "x ∥ a, z ∥ c*"
    form.show_view(replace(CELL, axes="y||b, x||a*"))
    assert not question(form).isVisible()
    assert axes.currentText() == "y||b, x||a*"


def test_a_typed_convention(form, qtbot):
    axes = form.findChild(AxesChoice)
    axes.lineEdit().setFocus()
    axes.lineEdit().selectAll()
    qtbot.keyClicks(axes.lineEdit(), "z||[1 1 0], y||(0 0 1)")
    qtbot.keyClick(axes.lineEdit(), Qt.Key.Key_Return)
    assert question(form).isVisible()
    answer(form, qtbot, "&Keep the numbers")
    assert form.axes == [("z||[1 1 0], y||(0 0 1)", False)]
    form.show_error("axes", "The two statements are not at right angles.")
    assert axes.property("error") is True
    assert axes.error_label.text() == "The two statements are not at right angles."


def test_errors_are_marked_in_place(form, qtbot):
    form.show_error("alpha", "Angle α must lie between 0° and 180°.")
    assert field(form, "alpha").property("error") is True
    assert field(form, "alpha").error_label.isVisible()
    form.clear_error("alpha")
    assert field(form, "alpha").property("error") is False
