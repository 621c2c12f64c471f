"""Small tables know numbers from words; the cutting error is typed into its field."""

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication

from gui.reading.aggregate_table import AggregateTable
from gui.reading.cutting_error import CuttingErrorPanel
from gui.reading.small_table import SmallTable
from gui.viewdata import TableView

AGGREGATE = TableView(
    title="",
    header=("", "Voigt", "Reuss", "where", ""),
    rows=(("bulk modulus", "71.32", "70.10", "all over", "GPa"),
          ("Poisson's ratio", "−0.2640", "—", "[0 0 1]", "")),
    full=(("bulk modulus", "71.321234", "70.1", "all over", "GPa"),
          ("Poisson's ratio", "-0.264001", "nan", "[0 0 1]", "")),
    tooltips=("resistance to pressure", ""),
    notice="Grains in every orientation.",
)


def test_columns_are_known_by_their_contents(qtbot):
    table = AggregateTable()
    qtbot.addWidget(table)
    table.show_view(AGGREGATE)
    kinds = [column.kind for column in table.table.lines.columns]
    assert kinds == ["label", "number", "number", "words", "unit"]
    assert table._notice.text() == "Grains in every orientation."
    assert table._notice.isVisibleTo(table)


def test_a_matrix_is_all_numbers(qtbot):
    table = SmallTable()
    qtbot.addWidget(table)
    rows = (("86.10", "−121.84", "·"), ("1.2e-05", "0", "+3"))
    table.show_view(TableView("constants", ("1", "2", "3"), rows, ()))
    assert {column.kind for column in table.table.lines.columns} == {"number"}
    assert table.table.accessibleName() == "constants"
    assert not table._notice.isVisibleTo(table)
    assert table.table.lines.copied(0, 1) == "−121.84"


def test_the_table_is_as_tall_as_its_lines(qtbot):
    table = SmallTable()
    qtbot.addWidget(table)
    table.resize(320, 400)
    table.show_view(AGGREGATE)
    grid = table.table
    lines = sum(grid.rowHeight(row) for row in range(2)) + grid.horizontalHeader().height()
    assert grid.height() == lines


def test_copying_a_table_is_exact(qtbot):
    table = SmallTable()
    qtbot.addWidget(table)
    table.show_view(AGGREGATE)
    qtbot.keyClick(table.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    assert QGuiApplication.clipboard().text() == (
        "\tVoigt\tReuss\twhere\t\n"
        "bulk modulus\t71.321234\t70.1\tall over\tGPa\n"
        "Poisson's ratio\t-0.264001\tnan\t[0 0 1]\t"
    )


def test_the_cutting_error_is_told_once(qtbot):
    panel = CuttingErrorPanel()
    qtbot.addWidget(panel)
    told = []
    panel.edited.connect(lambda *what: told.append(what))
    panel.show_half_angle("0.5")
    panel.show_view(AGGREGATE)
    assert panel.field.text() == "0.5"
    assert panel.table.table.lines.rowCount() == 2
    panel.show()
    panel.field.selectAll()
    qtbot.keyClicks(panel.field, "wide")
    qtbot.keyClick(panel.field, Qt.Key.Key_Return)
    assert told == [("cutting_error", "wide")]
    panel.show_error("cutting_error", "“wide” is not an angle.")
    assert panel.field.property("error") is True
    assert panel.field.error_label.isVisible()
    qtbot.keyClick(panel.field, Qt.Key.Key_Escape)
    assert panel.field.text() == "0.5"


def test_tables_that_stand_together_have_one_size_of_type(qtbot):
    panels = CuttingErrorPanel(), SmallTable("wide")
    for panel, columns in zip(panels, (2, 9), strict=True):
        qtbot.addWidget(panel)
        panel.resize(300, 100)
        panel.show_view(TableView("t", ("",) * columns, (("1.234567",) * columns,), ()))
    assert panels[0].table.table.font() == panels[1].table.font()
