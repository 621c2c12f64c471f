"""The table at the pin: numbers whole, directions typed, quantities chosen, copying exact."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFontMetrics, QGuiApplication
from PySide6.QtWidgets import QApplication

from gui.reading.pin_table import PinTable
from gui.theme import LIGHT, NIGHT, palette
from gui.viewdata import ReadingRow, ReadingView
from gui.widgets.text_table import PADDING, shorten

ROWS = (
    ReadingRow("Young's modulus", "GPa", "112.4", "98.10", "−14.30",
               ("112.41234", "98.104321", "-14.308019"), "pull by stretch", "young", "moduli"),
    ReadingRow("shear modulus, greatest", "GPa", "1234", "−0.01234", "−1234",
               ("1234.4", "-0.012341", "-1234.412341"), "", "shear_greatest", "moduli"),
    ReadingRow("speed, fast sheet", "km/s", "6.710", "6.440", "−0.2700",
               ("6.71", "6.44", "-0.27"), "", "phase", "waves"),
)
VIEW = ReadingView("θ 34.1°  φ 12.0°", "near [1 0 2], 1.3° off", "near [0 1 0]", ROWS, True)


@pytest.fixture
def table(qtbot):
    made = PinTable()
    qtbot.addWidget(made)
    made.directions, made.quantities = [], []
    made.direction_typed.connect(made.directions.append)
    made.quantity_chosen.connect(made.quantities.append)
    made.resize(300, 300)
    made.show_view(VIEW)
    made.show()
    qtbot.waitExposed(made)
    made.activateWindow()
    return made


def texts(table):
    model = table.table.lines
    return [
        [model.text(row, column) for column in range(model.columnCount())]
        for row in range(model.rowCount())
    ]


def test_lines_stand_in_their_groups(table):
    assert [row[0] for row in texts(table)] == [
        "moduli", "Young's modulus", "shear modulus, greatest", "waves", "speed, fast sheet"
    ]
    assert texts(table)[1] == ["Young's modulus", "112.4", "98.10", "−14.30", "GPa"]
    assert (table.directions, table.quantities) == ([], [])


def test_without_b_its_columns_are_gone(table):
    table.show_view(replace(VIEW, has_b=False))
    assert texts(table)[1] == ["Young's modulus", "112.4", "GPa"]
    assert not table._near["B"].isVisible()
    assert table._near["A"].isVisible()


def test_a_typed_direction_is_told_on_enter_and_goes_when_the_pin_moves(table, qtbot):
    qtbot.keyClicks(table.direction, "[1 1 0]")
    assert table.directions == []
    qtbot.keyClick(table.direction, Qt.Key.Key_Return)
    assert table.directions == ["[1 1 0]"]
    table.show_view(VIEW)
    assert table.direction.text() == "[1 1 0]"
    table.show_view(replace(VIEW, where="θ 90°  φ 45°"))
    assert table.direction.text() == ""


def test_a_bad_direction_is_marked_and_stays(table, qtbot):
    qtbot.keyClicks(table.direction, "[1 1")
    qtbot.keyClick(table.direction, Qt.Key.Key_Return)
    table.show_error("direction", "Three indices are wanted.")
    assert table.direction.property("error") is True
    assert table.direction.error_label.isVisible()
    assert table.direction.text() == "[1 1"
    qtbot.keyClick(table.direction, Qt.Key.Key_Escape)
    assert table.direction.text() == ""
    assert table.direction.property("error") is False


def test_enter_or_a_double_click_chooses_the_quantity(table, qtbot):
    grid = table.table
    grid.setCurrentIndex(grid.lines.index(1, 1))
    qtbot.keyClick(grid, Qt.Key.Key_Return)
    place = grid.visualRect(grid.lines.index(4, 0)).center()
    qtbot.mouseClick(grid.viewport(), Qt.MouseButton.LeftButton, pos=place)
    qtbot.mouseDClick(grid.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert table.quantities == ["young", "phase"]
    grid.opened.emit(0)  # a heading belongs to no quantity
    assert table.quantities == ["young", "phase"]


def test_copying_gives_the_whole_numbers(table, qtbot):
    grid = table.table
    qtbot.keyClick(grid, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    lines = QGuiApplication.clipboard().text().split("\n")
    assert lines[0].split("\t") == ["", "A", "B", "B - A", ""]
    assert lines[2].split("\t") == [
        "Young's modulus", "112.41234", "98.104321", "-14.308019", "GPa"
    ]
    grid.setCurrentIndex(grid.lines.index(1, 3))
    qtbot.keyClick(grid, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    assert QGuiApplication.clipboard().text() == "-14.308019"


def test_a_copy_of_the_whole_table_says_whose_it_is(table):
    table.show_view(replace(VIEW, about="A: blank, orientation identity; pin θ 34.1°"))
    table.table.copy_table()
    lines = QGuiApplication.clipboard().text().split("\n")
    assert lines[0] == "A: blank, orientation identity; pin θ 34.1°"
    assert lines[1].split("\t")[1] == "A"


@pytest.mark.parametrize("width", [280, 300, 330, 500])
def test_no_number_is_cut(table, qtbot, width):
    table.resize(width, 300)
    qtbot.wait(1)
    grid = table.table
    metrics = QFontMetrics(grid.font())
    for column in (1, 2, 3):
        room = grid.columnWidth(column) - 2 * PADDING
        for row in range(grid.lines.rowCount()):
            assert metrics.horizontalAdvance(grid.lines.text(row, column)) <= room
    assert sum(grid.columnWidth(column) for column in range(5)) <= grid.viewport().width()


def test_a_shortened_label_keeps_what_tells_it_apart(qapp):
    metrics = QFontMetrics(QApplication.font())
    text = "shear modulus, greatest"
    full = metrics.horizontalAdvance(text)
    short = shorten(metrics, text, int(full * 0.8), is_label=True)
    assert short.endswith("…, greatest")
    assert metrics.horizontalAdvance(short) <= full * 0.8
    assert shorten(metrics, text, full, is_label=True) == text
    wave = "slowest wave greatest, km/s"
    short = shorten(metrics, wave, int(metrics.horizontalAdvance(wave) * 0.8), is_label=True)
    assert short.endswith("… greatest, km/s")
    assert not shorten(metrics, text, int(full * 0.8), is_label=False).endswith("greatest")


def test_labels_tell_the_whole_in_their_tooltip(table):
    tooltip = table.table.lines.index(1, 0).data(Qt.ItemDataRole.ToolTipRole)
    assert tooltip == "Young's modulus\npull by stretch\nUnit: GPa"


def nearest(picture, wanted):
    """Return how near the nearest pixel comes to a colour."""
    r, g, b, _ = QColor(wanted).getRgb()
    pixels = (
        picture.pixelColor(x, y).getRgb()
        for x in range(picture.width())
        for y in range(picture.height())
    )
    return min(abs(p[0] - r) + abs(p[1] - g) + abs(p[2] - b) for p in pixels)


@pytest.mark.parametrize("theme", [LIGHT, NIGHT])
def test_the_table_follows_the_dress_of_the_application(table, qapp, theme):
    before = qapp.palette()
    try:
        qapp.setPalette(palette(theme))
        picture = table.table.horizontalHeader().viewport().grab().toImage()
        other = NIGHT if theme is LIGHT else LIGHT
        assert nearest(picture, theme.b) < nearest(picture, other.b)
        assert nearest(picture, theme.a) < nearest(picture, other.a)
    finally:
        qapp.setPalette(before)
