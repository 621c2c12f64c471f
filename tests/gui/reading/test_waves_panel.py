"""The waves panel and the list of degenerate directions: what they show and where they lead."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication

from gui.reading.waves_panel import DegenerateList, WavesPanel
from gui.viewdata import LinkedRow, LinkedView, WaveRow, WavesView, WaveTable

SPEED = WaveRow("phase speed", ("6.301", "3.412", "3.105"), "km/s",
                ("6.30112", "3.41234", "3.10456"), "Speed of the plane wave.")  # fmt: skip
ALONG_X = WaveRow("polarisation, X", ("0.9981", "−0.0123", "–"), "",
                  ("0.998101", "-0.012345", ""), "Particle motion along part X.")  # fmt: skip
ONE = WavesView((WaveTable("A", "A, blank", (SPEED, ALONG_X), ("Rays near: …",)),))
BOTH = WavesView((*ONE.tables, WaveTable("B", "B, rod", (SPEED,), ("Waves meet here.",))))
ARRIVALS = LinkedView(
    ("", "V km/s", "v km/s", "n off °", "focusing"),
    (
        ("A", (LinkedRow(("fastest", "6.301", "6.299", "1.2", "0.9"),
                         ("fastest", "6.30112", "6.29912", "1.2034", "0.9012"),
                         (0.6, 0.0, 0.8), "Put the pin on the normal of A's", "n: 0.6 0"),)),
        ("B", (LinkedRow(("slowest", "3.105", "3.100", "0", "2.1"),
                         ("slowest", "3.10512", "3.10012", "0", "2.1012"),
                         (0.0, 0.0, 1.0), "Put the pin on the normal of B's"),)),
    ),
)  # fmt: skip
AXES = LinkedView(
    ("", "v km/s", "cone °", ""),
    (
        ("middle and slowest wave", (
            LinkedRow(("cone", "3.101", "12.6", "[1 1 1]"),
                      ("cone", "3.1012", "12.612", "[1 1 1]"),
                      (0.0, 1.0, 0.0), "Put the pin where they meet"),
            LinkedRow(("everywhere", "3.1", "", ""), ("everywhere", "3.1", "", ""), None, ""),
        )),
    ),
)  # fmt: skip


@pytest.fixture
def panel(qtbot):
    made = WavesPanel()
    qtbot.addWidget(made)
    made.gone = []
    made.go.connect(made.gone.append)
    made.resize(330, 400)
    made.show_view(ONE)
    made.show()
    qtbot.waitExposed(made)
    return made


def texts(table):
    model = table.lines
    return [[model.text(row, k) for k in range(len(model.columns))]
            for row in range(len(model.lines))]  # fmt: skip


def notes(panel):
    return panel._notes.text() if panel._notes.isVisibleTo(panel) else ""


def test_three_waves_stand_side_by_side(panel):
    titles = [column.title for column in panel.table.lines.columns]
    assert titles == ["", "fastest", "middle", "slowest", ""]
    assert texts(panel.table) == [
        ["phase speed", "6.301", "3.412", "3.105", "km/s"],
        ["polarisation, X", "0.9981", "−0.0123", "–", ""],
    ]
    assert notes(panel) == "Rays near: …"
    assert panel.table.lines.lines[0].tooltip == "Speed of the plane wave."


def test_both_sides_have_headings_and_their_notes_letters(panel):
    panel.show_view(BOTH)
    headings = [line.cells[0] for line in panel.table.lines.lines if line.is_heading]
    assert headings == ["A, blank", "B, rod"]
    assert notes(panel).split("\n") == ["A: Rays near: …", "B: Waves meet here."]
    panel.show_view(ONE)
    assert len(texts(panel.table)) == 2
    assert notes(panel) == "Rays near: …"


def test_without_waves_there_is_only_the_sentence(panel):
    panel.show_view(WavesView((), "Waves want a density."))
    assert notes(panel) == "Waves want a density."
    assert not panel.table.isVisible()
    assert not panel.expander.isVisible()
    panel.show_view(ONE)
    assert panel.table.isVisible()
    assert panel.expander.isVisible()


def test_copying_gives_every_digit(panel, qtbot):
    qtbot.keyClick(panel.table, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    lines = [line.split("\t") for line in QGuiApplication.clipboard().text().split("\n")]
    assert lines[0] == ["", "fastest", "middle", "slowest", ""]
    assert lines[1] == ["phase speed", "6.30112", "3.41234", "3.10456", "km/s"]


def test_arrivals_are_asked_for_only_when_they_are_opened(panel, qtbot):
    assert not panel.arrivals.isVisible()
    asked = []
    panel.arrivals.shown.connect(lambda: asked.append(True))
    panel.show_view(BOTH)
    assert asked == []
    qtbot.mouseClick(panel.expander.button, Qt.MouseButton.LeftButton)
    assert panel.arrivals.isVisible()
    assert asked == [True]


def test_arrivals_lead_to_their_wave_normals(panel, qtbot):
    qtbot.mouseClick(panel.expander.button, Qt.MouseButton.LeftButton)
    panel.arrivals.show_view(ARRIVALS)
    table = panel.arrivals.table
    assert [line.is_heading for line in table.lines.lines] == [True, False, True, False]
    for row in (3, 1):
        qtbot.mouseClick(panel.arrivals.link(row), Qt.MouseButton.LeftButton)
    assert panel.gone == [(0.0, 0.0, 1.0), (0.6, 0.0, 0.8)]
    assert panel.arrivals.link(1).accessibleName() == "Put the pin on the normal of A's"
    assert panel.arrivals.link(0) is None
    # Headings hide their link's place; fewer lines leave none behind.
    panel.arrivals.show_view(replace(ARRIVALS, groups=(("", ARRIVALS.groups[0][1]),)))
    qtbot.mouseClick(panel.arrivals.link(0), Qt.MouseButton.LeftButton)
    assert panel.gone[-1] == (0.6, 0.0, 0.8)
    assert table.lines.rowCount() == 1


def test_pending_arrivals_lead_nowhere(panel, qtbot):
    qtbot.mouseClick(panel.expander.button, Qt.MouseButton.LeftButton)
    panel.arrivals.show_view(replace(ARRIVALS, pending=True))
    assert panel.arrivals.table.lines.is_dimmed
    qtbot.mouseClick(panel.arrivals.link(1), Qt.MouseButton.LeftButton)
    assert panel.gone == []
    panel.arrivals.show_view(LinkedView(ARRIVALS.header, (), True, "being found …"))
    assert not panel.arrivals.table.isVisible()
    assert panel.arrivals._notice.text() == "being found …"


def test_showing_again_tells_and_a_restored_window_does_not(panel, qtbot):
    told = []
    panel.shown.connect(lambda: told.append(True))
    panel.hide()
    panel.show()
    assert told == [True]


def test_degenerate_directions_lead_to_where_they_are(qtbot):
    made = DegenerateList()
    qtbot.addWidget(made)
    made.resize(330, 200)
    gone = []
    made.go.connect(gone.append)
    with qtbot.assertNotEmitted(made.go):
        made.show_view(AXES)
    made.show()
    qtbot.waitExposed(made)
    assert texts(made.table)[1] == ["cone", "3.101", "12.6", "[1 1 1]", "go"]
    assert made.link(2) is None
    made.table.setCurrentIndex(made.table.lines.index(1, 0))
    qtbot.keyClick(made.table, Qt.Key.Key_Return)
    made.table.setCurrentIndex(made.table.lines.index(2, 0))
    qtbot.keyClick(made.table, Qt.Key.Key_Return)
    assert gone == [(0.0, 1.0, 0.0)]


@pytest.mark.parametrize("width", [316, 280])
def test_no_number_is_cut(panel, width):
    panel.show_view(BOTH)
    panel.resize(width, 400)
    table = panel.table
    metrics = table.fontMetrics()
    for row in texts(table):
        for column, text in enumerate(row[1:4], start=1):
            assert metrics.horizontalAdvance(text) < table.columnWidth(column)
