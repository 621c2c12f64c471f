"""The extremes lead to where they are, by link and by keyboard."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QLabel, QPushButton, QVBoxLayout, QWidget

from gui.reading.extremes_table import ExtremesTable
from gui.viewdata import ExtremeRow, ExtremesView

VIEW = ExtremesView(
    "over all directions of A",
    (
        ExtremeRow("E least", "74.21", "[1 0 2], 1.3° off", (0.6, 0.0, 0.8), "", "74.2134"),
        ExtremeRow("E greatest", "148.9", "[0 1 0]", (0.0, 1.0, 0.0), "", "148.9012"),
        ExtremeRow("bulk", "71.30", "all directions", None, "", "71.301"),
    ),
)


@pytest.fixture
def table(qtbot):
    made = ExtremesTable()
    qtbot.addWidget(made)
    made.gone = []
    made.go.connect(made.gone.append)
    made.resize(320, 200)
    made.show_view(VIEW)
    made.show()
    qtbot.waitExposed(made)
    return made


def test_links_lead_to_their_directions(table, qtbot):
    for row in (1, 0):
        qtbot.mouseClick(table.link(row), Qt.MouseButton.LeftButton)
    assert table.gone == [(0.0, 1.0, 0.0), (0.6, 0.0, 0.8)]
    assert table.link(2) is None


def test_the_links_come_right_after_their_table(qtbot):
    page = QWidget()
    qtbot.addWidget(page)
    tables, button = [ExtremesTable(), ExtremesTable()], QPushButton("last")
    column = QVBoxLayout(page)
    for widget in (*tables, button):
        column.addWidget(widget)
    page.show()
    qtbot.waitExposed(page)
    for made in tables:
        made.show_view(replace(VIEW, rows=VIEW.rows[:1]))
    for made in reversed(tables):  # made later than the button, and in another order
        made.show_view(VIEW)
    tables[0].table.setFocus()
    order = [
        widget
        for made in tables
        for widget in (made.table, made.link(0), made.link(1))
    ]
    for widget in (*order[1:], button):
        page.focusNextChild()
        assert page.focusWidget() is widget


def test_which_of_two_crystals_it_is_stands_above(table):
    assert [one.text() for one in table.findChildren(QLabel) if one.isVisible()] == []
    table.show_view(replace(VIEW, whose="crystal of B: blank"))
    shown = [one for one in table.findChildren(QLabel) if one.isVisible()]
    assert [one.text() for one in shown] == ["crystal of B: blank"]
    assert shown[0].y() < table.table.y()


def test_enter_on_a_line_leads_there(table, qtbot):
    grid = table.table
    for row in (0, 2):
        grid.setCurrentIndex(grid.lines.index(row, 0))
        qtbot.keyClick(grid, Qt.Key.Key_Return)
    assert table.gone == [(0.6, 0.0, 0.8)]


def test_new_extremes_take_the_links_along(table, qtbot):
    moved = tuple(replace(row, direction=(0.0, 0.0, 1.0)) for row in VIEW.rows)
    table.show_view(replace(VIEW, rows=moved))
    qtbot.mouseClick(table.link(0), Qt.MouseButton.LeftButton)
    assert table.gone == [(0.0, 0.0, 1.0)]
    assert table.link(2).isVisible()
    table.show_view(replace(VIEW, rows=moved[:1]))
    assert table.table.lines.rowCount() == 1
    qtbot.waitUntil(lambda: table.link(0).width() == table.table.columnWidth(3))
    qtbot.mouseClick(table.link(0), Qt.MouseButton.LeftButton)
    assert len(table.gone) == 2
    table.show_view(replace(VIEW, rows=(replace(VIEW.rows[0], direction=None),)))
    assert table.link(0) is None


def test_pending_extremes_are_dimmed_and_lead_nowhere(table, qtbot):
    def darkest():
        picture = table.grab().toImage()
        top = table.table.y() + table.table.rowHeight(0) + 2
        return min(
            picture.pixelColor(x, y).lightness()
            for x in range(60)
            for y in range(top, top + table.table.rowHeight(1) - 4)
        )

    before = darkest()
    table.show_view(replace(VIEW, pending=True))
    assert darkest() > before + 40
    qtbot.mouseClick(table.link(0), Qt.MouseButton.LeftButton)
    assert table.gone == []


def test_copying_leaves_the_links_out(table, qtbot):
    qtbot.keyClick(table.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    lines = QGuiApplication.clipboard().text().split("\n")
    assert lines[1].split("\t") == ["E least", "74.2134", "[1 0 2], 1.3° off"]
    assert len(lines) == 4
