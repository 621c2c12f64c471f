"""The grid of constants behaves as a sheet of numbers and emits what the user meant."""

import pytest
from PySide6.QtCore import QEvent, QPoint, Qt
from PySide6.QtGui import QFontMetricsF, QGuiApplication, QKeyEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit, QPushButton, QVBoxLayout, QWidget

from gui.ledger.constants_cells import PADDING
from gui.ledger.constants_grid import ConstantsGrid
from tests.gui.ledger.sample_views import hexagonal, number, triclinic, with_cell


class Told:
    """Everything a grid has said."""

    def __init__(self, grid):
        self.edits, self.pastes, self.faces = [], [], []
        grid.constant_edited.connect(self.edit)
        grid.block_pasted.connect(self.paste)
        grid.face_chosen.connect(self.face)

    def edit(self, *what):
        self.edits.append(what)

    def paste(self, *what):
        self.pastes.append(what)

    def face(self, what):
        self.faces.append(what)


@pytest.fixture
def grid(qtbot):
    made = ConstantsGrid()
    qtbot.addWidget(made)
    made.resize(340, 300)
    made.show_view(hexagonal())
    made.show()
    qtbot.waitExposed(made)
    made.activateWindow()
    made.table.setFocus()
    qtbot.waitUntil(made.table.hasFocus)
    return made


@pytest.fixture
def told(grid):
    return Told(grid)


def at(grid, row, column):
    grid.table.setCurrentIndex(grid.cells.index(row, column))


def here(grid):
    index = grid.table.currentIndex()
    return index.row(), index.column()


def editor(grid):
    return next(
        (e for e in grid.table.viewport().findChildren(QLineEdit) if e.isVisible()), None
    )


def shown(grid, row, column):
    return grid.cells.index(row, column).data()


def type_keys(qtbot, grid, text):
    """Type as at the keyboard: the first key opens the editor, which gets the rest."""
    for letter in text:
        qtbot.keyClicks(editor(grid) or grid.table, letter)


def test_typing_replaces_and_enter_goes_down(grid, told, qtbot):
    at(grid, 0, 0)
    type_keys(qtbot, grid, "98.5")
    qtbot.keyClick(editor(grid), Qt.Key.Key_Return)
    assert told.edits == [(0, 0, "98.5")]
    assert here(grid) == (1, 0)


def test_the_cell_keeps_its_value_until_a_new_view(grid, told, qtbot):
    before = shown(grid, 0, 0)
    at(grid, 0, 0)
    type_keys(qtbot, grid, "98.5")
    qtbot.keyClick(editor(grid), Qt.Key.Key_Return)
    assert shown(grid, 0, 0) == before
    grid.show_view(with_cell(hexagonal(), 0, 0, "98.5"))
    assert shown(grid, 0, 0) == "98.5"


def test_tab_goes_through_the_independent_cells(grid, told, qtbot):
    at(grid, 0, 0)
    visited = []
    for _ in range(4):
        qtbot.keyClick(grid.table, Qt.Key.Key_Tab)
        visited.append(here(grid))
    assert visited == [(0, 1), (0, 2), (2, 2), (3, 3)]
    qtbot.keyClick(grid.table, Qt.Key.Key_Backtab)
    assert here(grid) == (2, 2)
    assert told.edits == []


def test_tab_in_the_editor_commits_and_goes_on(grid, told, qtbot):
    at(grid, 0, 1)
    type_keys(qtbot, grid, "7")
    qtbot.keyClick(editor(grid), Qt.Key.Key_Tab)
    assert told.edits == [(0, 1, "7")]
    assert here(grid) == (0, 2)


def test_tab_leaves_the_grid_at_its_end(qtbot):
    page = QWidget()
    qtbot.addWidget(page)
    grid, after = ConstantsGrid(), QPushButton("after")
    column = QVBoxLayout(page)
    column.addWidget(grid)
    column.addWidget(after)
    grid.show_view(hexagonal())
    page.show()
    qtbot.waitExposed(page)
    page.activateWindow()
    grid.table.setFocus()
    at(grid, 3, 3)
    qtbot.keyClick(grid.table, Qt.Key.Key_Tab)
    qtbot.waitUntil(after.hasFocus)


def test_arrows_move_and_leave_the_editor_when_typing_over(grid, told, qtbot):
    at(grid, 0, 0)
    qtbot.keyClick(grid.table, Qt.Key.Key_Right)
    assert here(grid) == (0, 1)
    type_keys(qtbot, grid, "5")
    qtbot.keyClick(editor(grid), Qt.Key.Key_Right)
    assert told.edits == [(0, 1, "5")]
    assert here(grid) == (0, 2)


def test_f2_edits_the_whole_number_and_keeps_side_arrows(grid, told, qtbot):
    at(grid, 0, 2)
    qtbot.keyClick(grid.table, Qt.Key.Key_F2)
    assert editor(grid).text() == repr(number(0, 2))
    qtbot.keyClick(editor(grid), Qt.Key.Key_End)
    qtbot.keyClick(editor(grid), Qt.Key.Key_Left)
    assert editor(grid) is not None
    qtbot.keyClick(editor(grid), Qt.Key.Key_Return)
    assert told.edits == []  # nothing was changed


def test_escape_in_the_editor_changes_nothing(grid, told, qtbot):
    at(grid, 0, 0)
    type_keys(qtbot, grid, "98")
    qtbot.keyClick(editor(grid), Qt.Key.Key_Escape)
    assert told.edits == []
    assert editor(grid) is None or not editor(grid).isVisible()


def test_the_lower_triangle_tells_its_own_place(grid, told, qtbot):
    at(grid, 2, 0)
    assert grid.cells.kind(2, 0) == "dependent"
    type_keys(qtbot, grid, "3")
    qtbot.keyClick(editor(grid), Qt.Key.Key_Return)
    assert told.edits == [(2, 0, "3")]


@pytest.mark.parametrize(("row", "column"), [(5, 5), (1, 1), (0, 3)])
def test_dependent_and_zero_cells_cannot_be_typed_in(grid, told, qtbot, row, column):
    at(grid, row, column)
    qtbot.keyClicks(grid.table, "3")
    assert editor(grid) is None
    assert here(grid) == (row, column)
    assert told.edits == []
    assert grid._note.text() == grid.cells.cell(row, column).tooltip
    assert grid._note.isVisible()


def test_a_bad_entry_stands_marked_until_escape(grid, told, qtbot):
    def refuse(row, column, text):
        grid.show_error(row, column, f"“{text}” is not a number.")

    grid.constant_edited.connect(refuse)
    good = shown(grid, 0, 0)
    at(grid, 0, 0)
    type_keys(qtbot, grid, "1.x")
    qtbot.keyClick(editor(grid), Qt.Key.Key_Return)
    assert here(grid) == (0, 0)  # stays to be corrected
    assert shown(grid, 0, 0) == "1.x"
    assert grid.cells.index(0, 0).data(Qt.ItemDataRole.ToolTipRole) == "“1.x” is not a number."
    assert grid._fault.isVisible()
    assert grid._fault.text() == "“1.x” is not a number."
    grid.show_view(hexagonal())  # the same values: the entry still stands
    assert shown(grid, 0, 0) == "1.x"
    qtbot.keyClick(grid.table, Qt.Key.Key_Escape)
    assert shown(grid, 0, 0) == good
    assert not grid._fault.isVisible()


def test_a_bad_entry_goes_when_its_cell_changes(grid, told, qtbot):
    grid.cells.setData(grid.cells.index(0, 0), "bad")
    grid.show_error(0, 0, "no")
    grid.show_view(with_cell(hexagonal(), 0, 0, "55"))
    assert shown(grid, 0, 0) == "55"
    assert grid._fault.text() == ""


def test_a_bad_entry_is_painted_in_the_alert_colour(grid):
    def reddish():
        picture = grid.table.viewport().grab().toImage()
        x, y = grid.table.columnViewportPosition(0) + 4, grid.table.rowViewportPosition(0) + 4
        colour = picture.pixelColor(x, y)
        return colour.red() - colour.green()

    at(grid, 5, 0)
    assert reddish() < 5
    grid.cells.setData(grid.cells.index(0, 0), "bad")
    grid.show_error(0, 0, "no")
    assert reddish() > 10


def test_copying_the_selection_and_the_matrix(grid, qtbot):
    at(grid, 0, 2)
    qtbot.keyClick(grid.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    assert QGuiApplication.clipboard().text() == repr(number(0, 2))
    grid.table.clearSelection()
    qtbot.keyClick(grid.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    lines = QGuiApplication.clipboard().text().split("\n")
    values = [[float(text) for text in line.split("\t")] for line in lines]
    expected = [
        [number(i, j) if grid.cells.kind(i, j) != "zero" else 0.0 for j in range(6)]
        for i in range(6)
    ]
    assert values == expected


def test_copy_is_claimed_before_a_menu_takes_it(grid, qtbot):
    from PySide6.QtGui import QKeyEvent

    event = QKeyEvent(
        QEvent.Type.ShortcutOverride, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier
    )
    event.ignore()
    grid.table.event(event)
    assert event.isAccepted()


def test_pasting_hands_the_block_over_at_the_current_cell(grid, told, qtbot):
    QGuiApplication.clipboard().setText("1\t2\n3\t4")
    at(grid, 2, 2)
    qtbot.keyClick(grid.table, Qt.Key.Key_V, Qt.KeyboardModifier.ControlModifier)
    assert told.pastes == [(2, 2, "1\t2\n3\t4")]


def test_a_read_only_face_takes_nothing(grid, told, qtbot):
    grid.show_view(hexagonal("compliance", editable=False))
    QGuiApplication.clipboard().setText("1\t2")
    at(grid, 0, 0)
    qtbot.keyClick(grid.table, Qt.Key.Key_V, Qt.KeyboardModifier.ControlModifier)
    qtbot.keyClicks(grid.table, "4")
    assert editor(grid) is None
    assert told.edits == []
    assert told.pastes == []
    assert grid._note.isVisible()


def test_faces(grid, told, qtbot):
    buttons = {b.text(): b for b in grid.findChildren(QPushButton)}
    qtbot.mouseClick(buttons["Compliance S"], Qt.MouseButton.LeftButton)
    assert told.faces == ["compliance"]
    grid.show_view(hexagonal("compliance"))
    assert buttons["Compliance S"].isChecked()
    qtbot.mouseClick(buttons["Compliance S"], Qt.MouseButton.LeftButton)
    assert told.faces == ["compliance"]


def test_showing_says_nothing(grid, told):
    grid.show_view(triclinic())
    grid.show_view(hexagonal("uncertainty", note="No uncertainties are known."))
    assert (told.edits, told.pastes, told.faces) == ([], [], [])
    assert grid._note.text() == "No uncertainties are known."


def test_a_click_moves_to_the_cell(grid, qtbot):
    place = grid.table.visualRect(grid.cells.index(3, 4)).center()
    qtbot.mouseClick(grid.table.viewport(), Qt.MouseButton.LeftButton, pos=QPoint(place))
    assert here(grid) == (3, 4)


def test_no_number_is_cut_in_a_narrow_ledger(grid, qtbot):
    view = with_cell(triclinic(), 0, 0, "\N{MINUS SIGN}121.84")
    grid.show_view(with_cell(view, 1, 1, "1234.5"))
    grid.resize(334, 300)
    qtbot.wait(1)
    metrics = QFontMetricsF(grid.table.font())
    total = 0
    for column in range(6):
        width = grid.table.columnWidth(column)
        total += width
        assert width >= 52
        for row in range(6):
            text = grid.cells.index(row, column).data()
            assert metrics.horizontalAdvance(text) <= width - 1 - 2 * PADDING
    assert total <= grid.table.viewport().width()
    assert grid.table.rowHeight(0) >= 24


def test_the_editor_grows_with_a_long_number(grid, qtbot):
    at(grid, 0, 2)
    qtbot.keyClick(grid.table, Qt.Key.Key_F2)
    wide = editor(grid)
    assert wide.width() > wide.fontMetrics().horizontalAdvance(repr(number(0, 2)))
    assert grid.table.viewport().rect().contains(wide.geometry())


def test_home_and_end_stay_in_the_grid(grid):
    """The menus have Home for the camera; over the grid it goes to the first column."""
    table = grid.table
    table.setFocus()
    table.setCurrentIndex(grid.cells.index(2, 3))
    asked = QKeyEvent(
        QEvent.Type.ShortcutOverride, Qt.Key.Key_Home, Qt.KeyboardModifier.NoModifier
    )
    asked.ignore()
    QApplication.sendEvent(table, asked)
    assert asked.isAccepted()
    QTest.keyClick(table, Qt.Key.Key_Home)
    assert (table.currentIndex().row(), table.currentIndex().column()) == (2, 0)
    QTest.keyClick(table, Qt.Key.Key_End)
    assert (table.currentIndex().row(), table.currentIndex().column()) == (2, 5)


def test_a_refusal_stands_under_the_grid_until_something_is_done(grid):
    grid.show_refusal("That is no table.")
    assert grid._fault.text() == "That is no table."
    assert grid.cells.faults() == ()
    grid.table.setCurrentIndex(grid.cells.index(1, 1))
    assert not grid._fault.isVisibleTo(grid)
