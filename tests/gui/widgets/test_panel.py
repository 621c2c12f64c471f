"""Sections open and close by mouse and keyboard, and say so only then."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel

from gui.widgets.panel import Disclosure, Expander, Section


@pytest.fixture
def section(qtbot):
    made = Section("Unit cell", QLabel("inside"), aside="triclinic")
    qtbot.addWidget(made)
    made.told = []
    made.toggled.connect(made.told.append)
    made.show()
    return made


def test_a_click_closes_and_opens(section, qtbot):
    assert section.widget.isVisible()
    for expected in (False, True):
        qtbot.mouseClick(section.button, Qt.MouseButton.LeftButton)
        assert section.widget.isVisible() is expected
        assert section.is_open() is expected
    assert section.told == [False, True]


def test_keys(section, qtbot):
    steps = (
        (Qt.Key.Key_Left, False), (Qt.Key.Key_Left, False), (Qt.Key.Key_Right, True),
        (Qt.Key.Key_Return, False), (Qt.Key.Key_Space, True),
    )
    for key, expected in steps:
        qtbot.keyClick(section.button, key)
        assert section.is_open() is expected
    assert section.told == [False, True, False, True]


def test_opening_by_the_program_is_silent(section):
    section.set_open(False)
    assert not section.widget.isVisible()
    assert section.told == []


def test_the_heading_is_reached_and_named(section):
    assert section.button.focusPolicy() == Qt.FocusPolicy.StrongFocus
    assert section.button.accessibleName() == "Unit cell"


def test_the_arrow_turns(section):
    def picture():
        return section.button.grab().toImage()

    before = picture()
    section.set_open(False)
    assert picture() != before


def test_an_expander_is_closed_at_first(qtbot):
    made = Expander("Notes", QLabel("inside"))
    qtbot.addWidget(made)
    made.show()
    assert not made.widget.isVisible()
    qtbot.mouseClick(made.findChild(Disclosure), Qt.MouseButton.LeftButton)
    assert made.widget.isVisible()
