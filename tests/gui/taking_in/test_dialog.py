"""The dialogs that take things in, driven by hand."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest

from gui.taking_in.cell_dialog import CellDialog
from gui.taking_in.dialog import TableDialog
from gui.taking_in.readings import CHOOSE
from gui.viewdata import (
    CellFileView,
    CellView,
    ConstantsView,
    ReadingChoice,
    TakingInView,
    VerdictView,
)
from tests.gui.driving import choose, enter

UNITS = tuple((unit, unit) for unit in ("GPa", "kbar", "Mbar", "Pa"))
SHAPE = ReadingChoice("shape", "Shape", "full 6×6", (("full 6×6", "full 6×6"),),
                      "There are six rows of six numbers.", "certain")  # fmt: skip
KIND = ReadingChoice("kind", "Stiffness or compliance", "stiffness",
                     (("stiffness", "stiffness"), ("compliance", "compliance")),
                     "Not negative.", "guess")  # fmt: skip
UNIT = ReadingChoice("unit", "Unit", "GPa", UNITS, "No unit is written.", "guess", True)
ASK_UNIT = ReadingChoice("unit", "Unit", "Mbar", UNITS, "Which is the unit?", "question", True)
ASK_SIDE = ReadingChoice("symmetry", "Which triangle", "mean",
                         tuple((k, k) for k in ("upper", "lower", "mean")),
                         "Which is meant?", "question")  # fmt: skip
CELL = CellView("93.10", "independent", "93.1", "C11")
GRID = ConstantsView("stiffness", "GPa", ((CELL,) * 6,) * 6, True)
VERDICT = VerdictView("stable", "Stable", (), "")


def view(*readings, is_ready=True, error="", status="", preview=GRID):
    return TakingInView(readings, preview, VERDICT, ("Cubic as entered.",), ("Odd.",), error,
                        status, is_ready)  # fmt: skip


@pytest.fixture
def dialog(qtbot):
    from PySide6.QtWidgets import QWidget

    parent = QWidget()
    qtbot.addWidget(parent)
    made = TableDialog(parent)
    made.show_view(view(SHAPE, KIND, UNIT))
    made.open()
    qtbot.waitExposed(made)
    yield made
    made.reject()


def told(signal):
    heard = []
    signal.connect(lambda *values: heard.append(values))
    return heard


def test_typing_and_pasting_tell_the_text(dialog, qtbot):
    heard = told(dialog.text_changed)
    QTest.keyClicks(dialog.text, "C11")
    assert heard[-1] == ("C11",)
    QGuiApplication.clipboard().setText("1 2\n3 4")
    paste = next(b for b in dialog.findChildren(type(dialog.use)) if b.text() == "&Paste")
    qtbot.mouseClick(paste, Qt.MouseButton.LeftButton)
    assert heard[-1] == ("1 2\n3 4",)


def test_a_text_shown_is_not_told(dialog):
    heard = told(dialog.text_changed)
    dialog.show_text("86.1 31.4")
    assert dialog.text.toPlainText() == "86.1 31.4"
    assert heard == []


def test_each_reading_stands_with_mark_and_reason(dialog):
    rows = dialog.readings.rows
    assert list(rows) == ["shape", "kind", "unit"]
    assert rows["shape"].value.text() == "full 6×6"
    assert rows["shape"].sign.accessibleName() == "certain"
    assert rows["kind"].choice.currentText() == "stiffness"
    assert rows["kind"].reason.text() == "Not negative."
    assert rows["unit"].choice.isEditable()


def test_a_guess_is_changed_from_its_list_or_typed(dialog):
    heard = told(dialog.chosen)
    choose(dialog.readings.rows["kind"].choice, "compliance")
    enter(dialog.readings.rows["unit"].choice.lineEdit(), "1e10 Pa")
    assert heard == [("kind", "compliance"), ("unit", "1e10 Pa")]


def test_a_question_is_answered_even_with_the_likeliest(dialog, qtbot):
    heard = told(dialog.chosen)
    dialog.show_view(view(ASK_SIDE, ASK_UNIT, is_ready=False, status="2 questions are open"))
    rows = dialog.readings.rows
    assert rows["unit"].choice.currentText() == CHOOSE
    assert [button.text() for button in rows["symmetry"].buttons] == ["upper", "lower", "mean"]
    assert not dialog.use.isEnabled()
    assert dialog.status.text() == "2 questions are open"
    qtbot.mouseClick(rows["symmetry"].buttons[2], Qt.MouseButton.LeftButton)
    choose(rows["unit"].choice, "Mbar")
    assert heard == [("symmetry", "mean"), ("unit", "Mbar")]


def test_rows_come_and_go_in_their_order_and_nothing_is_told(dialog):
    heard = told(dialog.chosen)
    kept = dialog.readings.rows["kind"]
    dialog.show_view(view(SHAPE, ASK_SIDE, KIND, UNIT))
    assert list(dialog.readings.rows) == ["shape", "symmetry", "kind", "unit"]
    assert dialog.readings.rows["kind"] is kept
    dialog.show_view(view(KIND))
    assert list(dialog.readings.rows) == ["kind"]
    assert heard == []


def test_an_error_stands_alone_and_bars_the_way(dialog):
    dialog.show_view(view(is_ready=False, error="line 5: 35 numbers", preview=None))
    assert dialog.error.isVisible()
    assert not dialog.grid.isVisible()
    dialog.accept()
    assert dialog.isVisible()


def test_the_preview_is_painted_and_read_aloud(dialog):
    assert "93.10" in dialog.grid.accessibleDescription()
    picture = dialog.grid.grab().toImage()
    colours = {picture.pixelColor(x, 30).name() for x in range(picture.width())}
    assert len(colours) > 2
    with_other = GRID.cells[0][:5] + (CellView("·", "zero", "0.0", "C16"),)
    dialog.grid.show_view(ConstantsView("stiffness", "GPa", (with_other,) * 6, True))
    assert dialog.grid.grab().toImage() != picture


def test_use_closes_with_yes(dialog, qtbot):
    with qtbot.waitSignal(dialog.accepted):
        qtbot.mouseClick(dialog.use, Qt.MouseButton.LeftButton)


# ------------------------------------------------------------------ cells
CONVENTIONS = (("z||c, y||b*", "z along c"), ("x||a, z||c*", "x along a"))
CELL_VIEW = CellFileView(
    "lm18.cif", tuple((name, f"{k}.0 Å") for k, name in enumerate("abcαβγ")), ("An odd cell.",),
    CONVENTIONS, "z||c, y||b*",
)  # fmt: skip


def test_the_cell_is_shown_and_its_axes_are_asked(qtbot):
    from PySide6.QtWidgets import QWidget

    parent = QWidget()
    qtbot.addWidget(parent)
    dialog = CellDialog(parent)
    dialog.show_view(CELL_VIEW)
    dialog.open()
    assert [value.text() for value in dialog.values] == [f"{k}.0 Å" for k in range(6)]
    assert "An odd cell." in dialog.notes.text()
    heard = told(dialog.axes_chosen)
    choose(dialog.axes, "x||a, z||c*")
    assert heard == [("x||a, z||c*",)]
    dialog.show_error("These name two parallel directions.")
    assert not dialog.use.isEnabled()
    dialog.show_error("")
    assert dialog.use.isEnabled()
    dialog.reject()
