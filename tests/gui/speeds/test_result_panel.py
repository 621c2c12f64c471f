"""The result says constants with ±, what is not seen, and hands the constants on."""

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLabel

from gui.speeds.blanks_panel import BlanksPanel
from gui.speeds.result_panel import ResultPanel
from gui.speeds.viewdata import PlanView
from gui.theme import LIGHT
from tests.gui.driving import choose, enter, picture
from tests.gui.plots.drawing import near
from tests.gui.speeds.samples import BLANKS, RESULT


@pytest.fixture
def result(qtbot):
    made = ResultPanel()
    qtbot.addWidget(made)
    made.resize(340, 700)
    made.show()
    qtbot.waitExposed(made)
    made.show_view(RESULT)
    return made


@pytest.fixture
def blanks(qtbot):
    made = BlanksPanel()
    qtbot.addWidget(made)
    made.told = []
    for name in ("criterion_chosen", "blank_wanted", "plan_asked", "plan_wanted"):
        getattr(made, name).connect(lambda *what, name=name: made.told.append((name, *what)))
    made.resize(340, 500)
    made.show()
    qtbot.waitExposed(made)
    made.show_blanks(BLANKS)
    made.show_plan(PlanView("From the ledger."))
    assert made.told == []
    return made


def words(widget):
    return [label.text() for label in widget.findChildren(QLabel) if label.isVisible()]


def test_facts_and_sentences_are_shown(result):
    assert ("Outliers", "row 17") in result.facts.texts()
    assert result.unseen.texts() == ["C12", "C14 + 0.3 C56"]
    assert result.notes.texts() == [RESULT.notes[0]]
    result.show_view(replace(RESULT, facts=RESULT.facts[:1], unseen=(), notes=()))
    assert result.facts.texts() == [("Seen", "1 of 2 combinations")]
    assert not result.unseen.isVisible()


def test_the_grid_copies_full_precision_and_cannot_be_typed_in(result):
    result.grid.copy_matrix()
    assert QApplication.clipboard().text().split("\t")[0] == "86.0612345"
    index = result.grid.cells.index(0, 0)
    assert not index.flags() & Qt.ItemFlag.ItemIsEditable


def test_an_unseen_constant_is_told_by_its_colour(result):
    def doubtful():
        return near(picture(result.grid.viewport()), LIGHT.doubt, 60).sum()

    before = doubtful()
    seen = [list(row) for row in RESULT.constants.cells]
    seen[0][1] = replace(seen[0][1], is_seen=True, deviation="± 0.1")
    view = replace(RESULT.constants, cells=tuple(map(tuple, seen)))
    result.show_view(replace(RESULT, constants=view))
    assert before > 20
    assert doubtful() < before / 4


def test_an_old_result_is_dimmed_and_cannot_be_used(result):
    fresh = picture(result.grid.viewport())
    result.show_view(replace(RESULT, pending=True))
    old = picture(result.grid.viewport())
    assert near(old, LIGHT.ink, 30).sum() < near(fresh, LIGHT.ink, 30).sum()
    assert not result.use.isEnabled()


def test_the_constants_are_handed_on_by_a_press(result, qtbot):
    with qtbot.waitSignal(result.use_wanted, timeout=1000):
        QTest.mouseClick(result.use, Qt.MouseButton.LeftButton)


def test_without_a_result_the_reason_is_said(result):
    result.show_view(replace(RESULT, constants=None, facts=(), unseen=(), notes=(),
                             can_use=False, notice="The density is wanted."))  # fmt: skip
    assert "The density is wanted." in words(result)
    assert not result.grid.isVisible()
    assert not result.use.isVisible()


def test_suggestions_are_planned_by_their_links(blanks):
    assert "[1 0 2]" in words(blanks)
    links = [line.add for line in blanks._lines if line.add.isVisible()]
    assert len(links) == 2
    QTest.mouseClick(links[1], Qt.MouseButton.LeftButton)
    choose(blanks.criterion, "largest")
    assert blanks.told == [("blank_wanted", "0.1000 0.2000 0.9700"),
                           ("criterion_chosen", "criterion", "largest")]  # fmt: skip
    blanks.show_blanks(replace(BLANKS, rows=BLANKS.rows[:1], pending=True))
    assert [line.add.isVisible() for line in blanks._lines] == [True, False]
    assert not links[0].isEnabled()


def test_a_plan_is_asked_for_with_what_stands_in_its_fields(blanks):
    blanks.findChild(QLabel)
    for part in blanks.findChildren(type(blanks.ask)):
        part.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
    blanks.sigma.show_text("0.1")
    enter(blanks.largest, "0.5")
    blanks.ask.click()
    assert blanks.told == [("plan_asked", "0.1", "0.5")]
    blanks.show_error("largest", "-5 is not above zero.")
    assert blanks.largest.message == "-5 is not above zero."
    blanks.ask.click()
    assert blanks.largest.message == ""


def test_a_plan_goes_into_the_table_once_there_is_one(blanks):
    assert blanks.place.isHidden()
    blanks.show_plan(PlanView("From the ledger.", ("8 blanks.",), True))
    assert not blanks.place.isHidden()
    assert blanks.plan.texts() == ["8 blanks."]
    blanks.place.click()
    assert blanks.told == [("plan_wanted",)]
