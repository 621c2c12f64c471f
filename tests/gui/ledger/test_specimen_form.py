"""The specimen form emits what was changed, once, and keeps bad text in view."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QPlainTextEdit

from gui.ledger.specimen_form import SpecimenForm
from gui.widgets.forms import Choice, TextField
from gui.widgets.panel import Disclosure
from tests.gui.ledger.sample_views import SPECIMEN


@pytest.fixture
def form(qtbot):
    made = SpecimenForm()
    qtbot.addWidget(made)
    made.told = []
    made.edited.connect(lambda *what: made.told.append(what))
    made.resize(340, 300)
    made.show_view(SPECIMEN)
    made.show()
    qtbot.waitExposed(made)
    made.activateWindow()
    return made


def field(form, name):
    return next(f for f in form.findChildren(TextField) if f.field == name)


def choice(form, name):
    return next(c for c in form.findChildren(Choice) if c.field == name)


def retype(qtbot, target, text):
    target.setFocus()
    target.selectAll()
    qtbot.keyClicks(target, text)


def test_it_shows_what_is_known_and_says_nothing(form):
    shown = {f.field: f.text() for f in form.findChildren(TextField)}
    assert shown == {
        "name": "Blank 7", "density": "2684", "temperature": "21", "source": "pulse-echo"
    }
    assert choice(form, "crystal_class").currentText() == "triclinic · 21 constants"
    assert form.findChild(QPlainTextEdit).toPlainText() == "clear"
    form.show_view(replace(SPECIMEN, name="Other", crystal_class="cubic"))
    assert field(form, "name").text() == "Other"
    assert form.told == []


@pytest.mark.parametrize("name", ["name", "density", "temperature", "source"])
def test_enter_emits_a_changed_text_once(form, qtbot, name):
    retype(qtbot, field(form, name), "77")
    qtbot.keyClick(field(form, name), Qt.Key.Key_Return)
    qtbot.keyClick(field(form, name), Qt.Key.Key_Tab)
    assert form.told == [(name, "77")]


def test_tab_emits_and_an_unchanged_text_does_not(form, qtbot):
    retype(qtbot, field(form, "density"), "2684")
    qtbot.keyClick(field(form, "density"), Qt.Key.Key_Tab)
    assert form.told == []
    retype(qtbot, field(form, "density"), "2685")
    qtbot.keyClick(field(form, "density"), Qt.Key.Key_Tab)
    assert form.told == [("density", "2685")]


def test_a_bad_text_stays_until_escape(form, qtbot):
    density = field(form, "density")
    retype(qtbot, density, "heavy")
    qtbot.keyClick(density, Qt.Key.Key_Return)
    form.show_error("density", "“heavy” is not a density.")
    form.show_view(SPECIMEN)
    assert density.text() == "heavy"
    assert density.property("error") is True
    assert density.error_label.isVisible()
    assert density.error_label.text() == density.toolTip() == "“heavy” is not a density."
    qtbot.keyClick(density, Qt.Key.Key_Escape)
    assert density.text() == "2684"
    assert density.property("error") is False
    assert not density.error_label.isVisible()
    assert form.told == [("density", "heavy")]


def test_a_mark_goes_with_a_changed_value(form, qtbot):
    form.show_error("density", "no")
    form.show_view(replace(SPECIMEN, density="2700"))
    assert field(form, "density").text() == "2700"
    assert field(form, "density").message == ""


def test_text_being_typed_is_left_alone(form, qtbot):
    name = field(form, "name")
    retype(qtbot, name, "Half a na")
    form.show_view(replace(SPECIMEN, name="From elsewhere"))
    assert name.text() == "Half a na"


def test_choosing_a_class(form, qtbot):
    classes = choice(form, "crystal_class")
    classes.setFocus()
    qtbot.keyClick(classes, Qt.Key.Key_Down)
    assert form.told == [("crystal_class", "cubic")]


def test_the_unique_axis_is_asked_of_monoclinic_crystals_only(form, qtbot):
    assert not choice(form, "unique_axis").isVisible()
    form.show_view(replace(SPECIMEN, has_unique_axis=True))
    assert choice(form, "unique_axis").isVisible()
    assert choice(form, "unique_axis").currentData() == "y"
    qtbot.keyClick(choice(form, "unique_axis"), Qt.Key.Key_Down)
    assert form.told == [("unique_axis", "z")]


def test_the_crystal_is_chosen_where_there_are_two(form, qtbot):
    crystals = choice(form, "chosen")
    assert not crystals.isVisible()
    form.show_view(replace(SPECIMEN, choices=(("A", "Blank 7"), ("B", "Plate 3"))))
    assert crystals.isVisible()
    qtbot.keyClick(crystals, Qt.Key.Key_Down)
    assert form.told == [("chosen", "B")]


def test_notes_open_and_are_told_when_left(form, qtbot):
    notes = form.findChild(QPlainTextEdit)
    assert not notes.isVisible()
    qtbot.mouseClick(form.findChild(Disclosure), Qt.MouseButton.LeftButton)
    assert notes.isVisible()
    notes.setFocus()
    notes.selectAll()
    qtbot.keyClicks(notes, "cracked")
    field(form, "name").setFocus()
    assert form.told == [("notes", "cracked")]
