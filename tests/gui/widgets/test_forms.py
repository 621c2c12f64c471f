"""Shared controls: numbers as typed, labels that shorten, choices the wheel leaves alone."""

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QApplication, QLabel

from gui.theme import LIGHT, NIGHT, palette
from gui.widgets.forms import (
    Choice,
    ElidedLabel,
    current_theme,
    degrees_text,
    read_degrees,
    tab_separated,
)


@pytest.mark.parametrize(
    ("text", "value"),
    [("12.5", 12.5), ("−3", -3.0), (" 7° ", 7.0), ("0,5", 0.5), ("1e2", 100.0)],
)
def test_degrees_are_read(text, value):
    assert read_degrees(text) == value


@pytest.mark.parametrize("text", ["", "abc", "nan", "inf", "1e9", "1 2"])
def test_what_is_no_angle(text):
    assert read_degrees(text) is None


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.0, "0.0"), (-0.0, "0.0"), (-0.00001, "0.0"), (12.5, "12.5"), (-123.25, "−123.25"),
     (90.0, "90.0"), (0.12345, "0.1235")],
)
def test_degrees_are_written(value, text):
    assert degrees_text(value) == text


@pytest.mark.parametrize("value", [0.02, -45.5, 179.9999, 0.0001])
def test_written_degrees_read_back(value):
    assert read_degrees(degrees_text(value)) == value


def test_copied_tables_use_the_plain_minus():
    assert tab_separated([("−1", "a"), ("2", "b")]) == "-1\ta\n2\tb"


def test_the_theme_is_known_by_its_palette(qapp):
    before = qapp.palette()
    try:
        for theme in (NIGHT, LIGHT):
            qapp.setPalette(palette(theme))
            assert current_theme() is theme
    finally:
        qapp.setPalette(before)


def test_the_wheel_does_not_change_a_choice(qtbot):
    choice = Choice("c", "choice")
    qtbot.addWidget(choice)
    choice.show_choices((("a", "first"), ("b", "second")), "a")
    choice.show()
    event = QWheelEvent(
        QPointF(5, 5), QPointF(5, 5), QPoint(0, -120), QPoint(0, -120),
        Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier,
        Qt.ScrollPhase.NoScrollPhase, False,
    )
    with qtbot.assertNotEmitted(choice.chosen):
        QApplication.sendEvent(choice, event)
    assert choice.currentData() == "a"
    assert not event.isAccepted()


def test_an_elided_label_shows_less_but_copies_all(qtbot):
    text = "a rather long sentence about nothing"
    elided, plain = ElidedLabel(text), QLabel(text)
    for made in (elided, plain):
        qtbot.addWidget(made)
        made.resize(90, 20)
        made.show()
    assert elided.minimumSizeHint().width() < plain.minimumSizeHint().width()
    assert elided.grab().toImage() != plain.grab().toImage()
    elided.copy()
    assert QApplication.clipboard().text() == text
