"""The orientation form emits words, ways and turns, and shows the same said otherwise."""

from dataclasses import replace

import pytest
from PySide6.QtCore import QEvent, QPointF, Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtWidgets import QApplication, QLabel, QLineEdit

from gui.ledger.orientation_form import OrientationButtons, OrientationForm
from gui.widgets.forms import Choice, DragField, TextField
from gui.widgets.panel import Disclosure
from tests.gui.ledger.sample_views import ORIENTATION

NO_BREAK = "\N{NO-BREAK SPACE}"


class Told:
    def __init__(self, form):
        self.texts, self.ways, self.turns, self.ends = [], [], [], 0
        form.edited.connect(self.text)
        form.way_chosen.connect(self.ways.append)
        form.turn_edited.connect(self.turn)
        form.turn_finished.connect(self.end)

    def text(self, *what):
        self.texts.append(what)

    def turn(self, *what):
        self.turns.append(what)

    def end(self):
        self.ends += 1


@pytest.fixture
def form(qtbot):
    made = OrientationForm("A")
    qtbot.addWidget(made)
    made.resize(340, 220)
    made.show_view(ORIENTATION)
    made.show()
    qtbot.waitExposed(made)
    made.activateWindow()
    return made


@pytest.fixture
def told(form):
    return Told(form)


def drag_field(form, axis):
    return form.findChildren(DragField)[axis]


def send_mouse(handle, kind, x, buttons, modifiers=Qt.KeyboardModifier.NoModifier):
    button = Qt.MouseButton.NoButton if kind == QEvent.Type.MouseMove else (
        Qt.MouseButton.LeftButton
    )
    at = QPointF(x, 5)
    event = QMouseEvent(kind, at, handle.mapToGlobal(at), button, buttons, modifiers)
    QApplication.sendEvent(handle, event)


def drag(handle, pixels, modifiers=Qt.KeyboardModifier.NoModifier):
    left, none = Qt.MouseButton.LeftButton, Qt.MouseButton.NoButton
    send_mouse(handle, QEvent.Type.MouseButtonPress, 5, left)
    send_mouse(handle, QEvent.Type.MouseMove, 5 + pixels / 2, left, modifiers)
    send_mouse(handle, QEvent.Type.MouseMove, 5 + pixels, left, modifiers)
    send_mouse(handle, QEvent.Type.MouseButtonRelease, 5 + pixels, none)


def test_it_shows_the_orientation_and_says_nothing(form, told):
    form.show_view(replace(ORIENTATION, way="cut", text="(YXl) 35°", turn=(1.0, 0.0, 0.0)))
    form.show_view(ORIENTATION)
    assert [d.number.text() for d in form.findChildren(DragField)] == [
        "0.0", "\N{MINUS SIGN}12.5", "0.25"
    ]
    words = [label.text().replace("\N{NO-BREAK SPACE}", " ") for label in
             form.findChildren(QLabel)]
    assert "X ∥ [1 0 0]   Y ∥ [0 0 -1]   Z ∥ [0 1 0]" in words
    assert "90° from B" in words
    assert (told.texts, told.ways, told.turns, told.ends) == ([], [], [], 0)


def test_text_and_way(form, told, qtbot):
    text = next(f for f in form.findChildren(TextField) if f.field == "text")
    text.setFocus()
    text.selectAll()
    qtbot.keyClicks(text, "bunge 10 20 30")
    qtbot.keyClick(text, Qt.Key.Key_Return)
    assert told.texts == [("text", "bunge 10 20 30")]
    qtbot.keyClick(form.findChild(Choice), Qt.Key.Key_Down)
    assert told.ways == ["cut"]
    form.show_error("text", "Three angles are wanted.")
    assert text.error_label.text() == "Three angles are wanted."
    assert text.text() == "bunge 10 20 30"


def test_dragging_turns_live_and_finishes_once(form, told):
    drag(drag_field(form, 0).handle, 40)
    assert told.turns == [(0, 5.0), (0, 10.0)]  # a quarter of a degree a pixel
    assert told.ends == 1
    assert drag_field(form, 0).number.text() == "10.0"


def test_shift_drags_finely(form, told):
    drag(drag_field(form, 2).handle, 40, Qt.KeyboardModifier.ShiftModifier)
    assert [axis for axis, _ in told.turns] == [2, 2]
    assert told.turns[-1][1] == pytest.approx(0.25 + 40 * 0.02)


def test_a_press_without_a_move_changes_nothing(form, told):
    drag(drag_field(form, 0).handle, 0)
    assert (told.turns, told.ends) == ([], 0)


def test_typed_and_stepped_turns(form, told, qtbot):
    number = drag_field(form, 1).number
    number.setFocus()
    number.selectAll()
    number.insert("\N{MINUS SIGN}3.5°")  # as pasted: test keys know ASCII only
    qtbot.keyClick(number, Qt.Key.Key_Return)
    assert told.turns == [(1, -3.5)]
    qtbot.keyClick(number, Qt.Key.Key_Up)
    qtbot.keyClick(number, Qt.Key.Key_Down, Qt.KeyboardModifier.ShiftModifier)
    assert told.turns[1:] == [(1, -2.5), (1, -2.6)]
    assert told.ends == 3


def test_a_bad_angle_is_marked_and_not_emitted(form, told, qtbot):
    number = drag_field(form, 0).number
    number.setFocus()
    number.selectAll()
    qtbot.keyClicks(number, "steep")
    qtbot.keyClick(number, Qt.Key.Key_Return)
    assert told.turns == []
    assert number.property("error") is True
    assert "steep" in number.error_label.text()
    assert number.error_label.isVisible()
    qtbot.keyClick(number, Qt.Key.Key_Escape)
    assert number.text() == "0.0"


def test_the_same_said_otherwise(form, qtbot):
    lines = [e for e in form.findChildren(QLineEdit) if e.isReadOnly()]
    assert [line.text() for line in lines] == ["bunge 0 90 0", "axis 1 0 0 90"]
    assert not any(line.isVisible() for line in lines)
    qtbot.mouseClick(form.findChild(Disclosure), Qt.MouseButton.LeftButton)
    assert all(line.isVisible() for line in lines)
    form.show_view(replace(ORIENTATION, said_otherwise=(("matrix", "matrix 1 0 0"),)))
    assert [line.text() for line in lines if line.isVisible()] == ["matrix 1 0 0"]


def test_buttons_between_the_orientations(qtbot):
    buttons = OrientationButtons()
    qtbot.addWidget(buttons)
    with qtbot.waitSignal(buttons.swap_requested):
        qtbot.mouseClick(buttons.swap, Qt.MouseButton.LeftButton)
    for button, side in ((buttons.to_b, "A"), (buttons.to_a, "B")):
        with qtbot.waitSignal(buttons.copy_requested) as caught:
            qtbot.mouseClick(button, Qt.MouseButton.LeftButton)
        assert caught.args == [side]


def test_a_direction_that_is_missed_is_told_in_the_colour_of_doubt(form):
    words = "X lies 51.2° from [1 0 0], which is not in the plane (1 1 0)"
    form.show_view(replace(ORIENTATION, doubt=words))
    (told,) = (one for one in form.findChildren(QLabel) if one.property("role") == "doubt")
    assert told.text().replace(NO_BREAK, " ") == f"▲ {words}"
    assert f"(1{NO_BREAK}1{NO_BREAK}0)" in told.text()  # indices stay on one line
    assert told.isVisible()
    form.show_view(ORIENTATION)
    assert not told.isVisible()
