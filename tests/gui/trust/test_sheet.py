"""The trust sheet: what it shows, which actions it offers, and what it asks for."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest

from gui.trust.sheet import NO_NOTES, TrustSheet
from gui.viewdata import ClassRow, TableView, TrustView

HEADER = ("class", "free", "as entered", "turned", "by", "about x, y, z", "log", "")


def row(key, entered, turned, can_turn=True, can_exact=True):
    cells = (key, "9", entered, turned, "42.4°", "0.00, 0.00, 1.00", "0.1", "")
    change = f"Changes the table by {entered}."
    doubt = f"That is much: {entered}." if key == "orthorhombic" else ""
    return ClassRow(key, cells, cells, f"tip of {key}", can_turn, can_exact, change, doubt)


def view(pending=False, suggested="orthorhombic", notes=("The density is odd.",), **known):
    empty = TableView("Empty", ("", "", ""), (), (), notice="nothing known")
    return TrustView(
        sentence="Triclinic as entered; orthorhombic within 0.6 %.",
        header=HEADER,
        classes=(row("triclinic", "exact", "exact", False, False),
                 row("orthorhombic", "12 %", "0.6 %"), row("cubic", "13 %", "12 %")),
        suggested=suggested,
        support="The data support 9 constants.",
        facts=("softest strain 87.7 GPa",),
        chance="Stable in all of 4,000 draws.",
        strains=TableView("Strains", ("", "", ""), (("87.7", "GPa", "71 % shear"),),
                          (("87.69", "GPa", "71 % shear"),), ("tip",)),
        criteria=TableView("Criteria of the cubic class", ("", "", "value", ""),
                           (("■ fails", "C44 > 0", "−5.00", "GPa"),),
                           (("fails", "C44 > 0", "-5.0", "GPa"),)),
        notes=notes,
        shares=empty,
        pin=TableView("Uncertainty at the pin, A", ("", "±", "drawn ±", "measure better"),
                      (("E, GPa", "0.57", "▲ 0.80", "C33 96 %"),),
                      (("E, GPa", "0.5712", "0.8012", "C33 96 %"),)),
        draws="1,000 draws agree.",
        pending=pending,
        **known,
    )  # fmt: skip


@pytest.fixture
def sheet(qtbot):
    made = TrustSheet()
    qtbot.addWidget(made)
    made.resize(1180, 340)
    made.show_view(view())
    made.show()
    qtbot.waitExposed(made)
    return made


def asked_of(sheet):
    asked = []
    sheet.asked.connect(lambda action, key: asked.append((action, key)))
    return asked


def offered(sheet):
    return {action for action, button in sheet.classes.buttons.items() if button.isEnabled()}


def test_everything_that_is_known_stands_there(sheet):
    table = sheet.classes.table.lines
    assert [table.text(k, 0) for k in range(3)] == ["triclinic", "orthorhombic", "cubic"]
    assert sheet.sentence.text().startswith("Triclinic as entered")
    assert sheet.classes.support.text() == "The data support 9 constants."
    assert sheet.notes.texts == ("– The density is odd.",)
    assert sheet.facts.texts == ("– softest strain 87.7 GPa",)
    assert sheet.criteria.table.lines.text(0, 0) == "■ fails"
    assert sheet.pin.table.lines.text(0, 2) == "▲ 0.80"
    assert sheet.draws.isVisibleTo(sheet)
    assert sheet.shares.notice.text() == "nothing known"
    assert not sheet.shares.table.isVisibleTo(sheet)


def test_the_suggested_class_is_chosen_and_its_actions_ask(sheet, qtbot):
    asked = asked_of(sheet)
    assert sheet.classes.chosen.key == "orthorhombic"
    assert offered(sheet) == {"turn", "both", "exact"}
    for action in ("turn", "both", "exact"):
        qtbot.mouseClick(sheet.classes.buttons[action], Qt.MouseButton.LeftButton)
    assert asked == [(action, "orthorhombic") for action in ("turn", "both", "exact")]


def test_another_class_is_chosen_with_the_arrows(sheet, qtbot):
    asked = asked_of(sheet)
    sheet.classes.table.setFocus()
    QTest.keyClick(sheet.classes.table, Qt.Key.Key_Down)
    assert sheet.classes.chosen.key == "cubic"
    assert "cubic" in sheet.classes.buttons["turn"].toolTip()
    qtbot.mouseClick(sheet.classes.buttons["exact"], Qt.MouseButton.LeftButton)
    assert asked == [("exact", "cubic")]


def test_the_size_of_the_change_stands_at_the_button_and_a_large_one_is_doubted(sheet):
    assert "Changes the table by 12 %." in sheet.classes.buttons["exact"].toolTip()
    assert "Changes" not in sheet.classes.buttons["turn"].toolTip()
    assert sheet.classes.doubt.text() == "▲ That is much: 12 %."
    assert sheet.classes.doubt.property("role") == "doubt"
    assert sheet.classes.doubt.isVisibleTo(sheet)
    QTest.keyClick(sheet.classes.table, Qt.Key.Key_Down)
    assert not sheet.classes.doubt.isVisibleTo(sheet)


def test_what_makes_no_sense_is_not_offered(sheet):
    QTest.keyClick(sheet.classes.table, Qt.Key.Key_Up)
    assert sheet.classes.chosen.key == "triclinic"
    assert offered(sheet) == set()


def test_while_it_is_searched_nothing_is_offered_and_the_choice_stays(sheet):
    asked = asked_of(sheet)
    QTest.keyClick(sheet.classes.table, Qt.Key.Key_Down)
    sheet.show_view(view(pending=True))
    assert offered(sheet) == set()
    assert sheet.classes.table.lines.is_dimmed
    sheet.show_view(view())
    assert sheet.classes.chosen.key == "cubic"
    sheet.show_view(view(suggested="triclinic"))
    assert sheet.classes.chosen.key == "triclinic"
    assert asked == []


def test_no_notes_are_said_too(sheet):
    sheet.show_view(view(notes=()))
    assert sheet.notes.texts == (NO_NOTES,)
    sheet.show_view(view(notes=(), pending=True))
    assert sheet.notes.texts == ()


def test_escape_and_the_link_put_it_away(sheet, qtbot):
    with qtbot.waitSignal(sheet.closed):
        QTest.keyClick(sheet.classes.table, Qt.Key.Key_Escape)
    with qtbot.waitSignal(sheet.closed):
        qtbot.mouseClick(sheet.close_button, Qt.MouseButton.LeftButton)


def test_it_asks_to_be_filled_when_it_comes_into_sight(sheet, qtbot):
    sheet.hide()
    with qtbot.waitSignal(sheet.shown):
        sheet.show()


def test_tables_copy_at_full_precision(sheet):
    sheet.pin.table.copy_table()
    assert "0.5712" in QGuiApplication.clipboard().text()
