"""The readings are typed, pasted and taken out by hand; what is wrong is marked where it is."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QFontMetrics
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLabel, QLineEdit, QPushButton

from gui.speeds.readings_panel import ReadingsPanel
from tests.gui.driving import choose, enter
from tests.gui.speeds.samples import FORM, TABLE

KEYS = Qt.Key
SIGNALS = ("edited", "cell_edited", "pasted", "cleared", "removed", "inserted", "facts_wanted",
           "open_wanted", "save_wanted")  # fmt: skip


@pytest.fixture
def panel(qtbot):
    made = ReadingsPanel()
    qtbot.addWidget(made)
    made.told = []
    for name in SIGNALS:
        getattr(made, name).connect(lambda *what, name=name: made.told.append((name, *what)))
    made.resize(430, 560)
    made.show()
    qtbot.waitExposed(made)
    made.show_form(FORM)
    made.show_table(TABLE)
    assert made.told == []
    return made


def go_to(panel, row, column):
    panel.table.setFocus()
    panel.table.setCurrentIndex(panel.readings.index(row, column))


def type_cell(panel, row, column, text, key=KEYS.Key_Return):
    go_to(panel, row, column)
    for letter in text:
        editors = panel.table.viewport().findChildren(QLineEdit)
        target = next((e for e in editors if e.isVisible()), panel.table)
        QTest.keyClicks(target, letter)
    editor = next(e for e in panel.table.viewport().findChildren(QLineEdit) if e.isVisible())
    QTest.keyClick(editor, key)


def fault(panel):
    return [label.text() for label in panel.findChildren(QLabel)
            if label.property("role") == "error" and label.isVisible()]  # fmt: skip


def press(panel, words):
    (button,) = [b for b in panel.findChildren(QPushButton) if b.text() == words]
    QTest.mouseClick(button, Qt.MouseButton.LeftButton)


def test_the_form_shows_what_is_known_and_emits_each_change_once(panel):
    assert panel.density.text() == "2684 ± 1"
    assert panel.crystal_class.currentData() == "monoclinic"
    assert panel.robust.isChecked()
    assert panel.unique_axis.isVisible()
    enter(panel.density, "2700")
    enter(panel.direction_sigma, "0.5")
    choose(panel.crystal_class, "triclinic")
    QTest.mouseClick(panel.robust, Qt.MouseButton.LeftButton)
    press(panel, "Times of flight")
    press(panel, "from the ledger")
    assert panel.told == [
        ("edited", "density", "2700"), ("edited", "direction_sigma", "0.5"),
        ("edited", "crystal_class", "triclinic"), ("edited", "robust", "off"),
        ("edited", "entered", "flight"), ("facts_wanted",),
    ]  # fmt: skip


def test_the_unique_axis_is_asked_of_monoclinic_crystals_only(panel):
    panel.show_form(replace(FORM, has_unique_axis=False))
    assert not panel.unique_axis.isVisible()


def test_a_typed_cell_is_told_by_its_column(panel):
    type_cell(panel, 0, 2, "6001")
    assert panel.told == [("cell_edited", 0, "speed_m_s", "6001")]
    # The cell itself changes when a view says so, not before.
    assert panel.readings.index(0, 2).data() == "6000"
    assert (panel.table.currentIndex().row(), panel.table.currentIndex().column()) == (1, 2)


def test_typing_what_stands_there_is_no_edit(panel):
    type_cell(panel, 0, 2, "6000")
    assert panel.told == []


def test_the_last_row_is_empty_and_typing_into_it_begins_a_new_one(panel):
    assert panel.readings.rowCount() == len(TABLE.rows) + 1
    type_cell(panel, 3, 0, "111", KEYS.Key_Tab)
    assert panel.told == [("cell_edited", 3, "direction", "111")]
    assert panel.table.currentIndex().column() == 1


def test_what_the_fit_says_of_a_row_cannot_be_typed_over(panel):
    go_to(panel, 0, 3)
    QTest.keyClicks(panel.table, "9")
    assert not [e for e in panel.table.viewport().findChildren(QLineEdit) if e.isVisible()]
    assert panel.told == []


def test_a_fault_is_named_below_the_table_and_at_its_cell(panel):
    assert fault(panel) == ["Row 2, v, m/s: “fast” is not a number."]
    tip = panel.readings.index(1, 2).data(Qt.ItemDataRole.ToolTipRole)
    assert tip == "“fast” is not a number."
    assert panel.readings.index(1, 2).data() == "fast"  # what was typed is not lost
    panel.show_table(replace(TABLE, faults={}))
    assert fault(panel) == []


def test_a_refused_change_is_said_until_the_next_step(panel):
    panel.show_error("table", "That does not fit.")
    assert fault(panel) == ["That does not fit."]
    go_to(panel, 2, 0)
    assert fault(panel) == ["Row 2, v, m/s: “fast” is not a number."]


def test_a_wrong_density_is_marked_in_its_field(panel):
    enter(panel.density, "heavy")
    panel.show_error("density", "“heavy” is not a number.")
    assert panel.density.text() == "heavy"
    assert "“heavy” is not a number." in fault(panel)
    panel.show_form(replace(FORM, density="2600"))
    assert panel.density.text() == "2600"
    assert "“heavy” is not a number." not in fault(panel)


def test_ghosts_show_what_an_empty_cell_is_taken_for(panel):
    assert panel.readings.ghost(0, 1) == "(1)"
    assert panel.readings.ghost(1, 1) == ""


def test_rows_are_put_in_and_taken_out(panel):
    go_to(panel, 1, 0)
    QTest.keyClick(panel.table, KEYS.Key_Insert)
    press(panel, "Add row")
    panel.table.selectRow(1)
    QTest.keyClick(panel.table, KEYS.Key_Delete, Qt.KeyboardModifier.ControlModifier)
    press(panel, "Remove")
    assert panel.told == [("inserted", 1), ("inserted", 1), ("removed", (1,)),
                          ("removed", (1,))]  # fmt: skip


def test_delete_empties_the_typed_cells_that_hold_something(panel):
    panel.table.setFocus()
    panel.table.selectRow(2)
    QTest.keyClick(panel.table, KEYS.Key_Delete)
    assert panel.told == [("cleared", ((2, 0), (2, 1)))]


def test_copied_rows_can_be_pasted_again(panel):
    panel.table.copy_table()
    text = QApplication.clipboard().text()
    assert text.splitlines()[0] == "direction\tsheet\tspeed_m_s"
    assert text.splitlines()[1] == "[1 0 0]\t1\t6000"
    go_to(panel, 1, 1)
    QTest.keyClick(panel.table, KEYS.Key_V, Qt.KeyboardModifier.ControlModifier)
    assert panel.told == [("pasted", 1, 1, text)]


def test_a_row_is_found_and_told(panel):
    rows = []
    panel.row_shown.connect(rows.append)
    panel.select_row(3)
    assert panel.table.currentIndex().row() == 2
    assert rows == [3]


def test_files_are_asked_for(panel):
    press(panel, "Open…")
    press(panel, "Save…")
    assert panel.told == [("open_wanted",), ("save_wanted",)]


def test_ten_thousand_rows_are_shown_at_once(panel):
    rows = tuple((f"{k} 1 0", "1", "6000", "0.1") for k in range(10_000))
    panel.show_table(replace(TABLE, rows=rows, faults={}, marks={}))
    panel.select_row(9_999)
    assert panel.readings.rowCount() == 10_001
    assert panel.table.currentIndex().row() == 9_998


def test_points_stand_in_line_and_minus_signs_are_true(panel):
    rows = (("[1 -1 0]", "1", "6792.4", "0.3"), ("0.31 -0.87", "2", "6792.43", ""),
            ("well-known", "", "6792", ""))  # fmt: skip
    panel.show_table(replace(TABLE, rows=rows, ghosts={}, faults={}))
    shown = [[panel.readings.shown(row, column) for column in (0, 2)] for row in range(3)]
    assert [row[0] for row in shown] == ["[1 −1 0]", "0.31 −0.87", "well-known"]
    metrics = QFontMetrics(panel.table.font())
    after = [metrics.horizontalAdvance(row[1]) - metrics.horizontalAdvance(row[1].split(".")[0])
             for row in shown[:2]]  # fmt: skip
    assert after[0] == pytest.approx(after[1], abs=1)
    assert len({len(row[1]) for row in shown}) == 1
    assert shown[1][1] == "6792.43"
    # What is typed and copied has neither.
    assert panel.readings.text(0, 0) == "[1 -1 0]"
    assert panel.readings.data(panel.readings.index(0, 2), Qt.ItemDataRole.EditRole) == "6792.4"
    go_to(panel, 0, 2)
    panel.table.copy()
    assert QApplication.clipboard().text() == "6792.4"
