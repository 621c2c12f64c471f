"""Editing the constants and what is known of a specimen, in the whole window."""

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QComboBox, QLineEdit

from core.tensor.symmetry import complete, crystal_class
from gui.documents import FIRST_DEMO, first_state, open_demo
from tests.gui.driving import (
    KEYS,
    changed,
    choose,
    control,
    enter,
    fill_in,
    load,
    menu,
    pick,
    picture,
    pictures,
    sentences,
    settle,
    show,
    shown_cell,
    type_cell,
)
from tests.materials import random_physical

pytestmark = pytest.mark.usefixtures("without_spreads")
TRICLINIC = "blank_lm7_triclinic.json"
CUBIC = "casting_lm40_cubic.json"


def table_of(app):
    return np.array(app.bench.state.specimen.stiffness)


def grid(app):
    return app.window.views.constants


# ------------------------------------------------------------------ typing constants
def test_thirty_six_typed_cells_are_the_state(app):
    wanted = random_physical(np.random.default_rng(5)).round(2)
    wanted = (wanted + wanted.T) / 2
    for row in range(6):
        for column in range(6):
            type_cell(app, row, column, f"{wanted[row, column]:.2f}", KEYS.Key_Tab)
    settle(app)
    assert np.array_equal(table_of(app), wanted.round(2))
    shown = [[float(shown_cell(app, i, j).replace("−", "-")) for j in range(6)]
             for i in range(6)]  # fmt: skip
    # Two digits of the uncertainty are kept, 0.15 GPa or more: a hundredth.
    assert np.abs(np.array(shown) - wanted).max() <= 0.005 + 1e-9
    assert app.bench.history.count() <= 21
    assert sentences(app.window) == []


def test_enter_tab_and_arrows_move_on_after_typing(app):
    table = grid(app).table
    for key, place in ((KEYS.Key_Return, (2, 1)), (KEYS.Key_Tab, (1, 2)),
                       (KEYS.Key_Right, (1, 2)), (KEYS.Key_Up, (0, 1))):  # fmt: skip
        type_cell(app, 1, 1, "120", key)
        assert (table.currentIndex().row(), table.currentIndex().column()) == place


def test_an_edit_changes_every_painted_view_and_a_no_op_changes_none(app):
    show(app, layout="AB")
    before = pictures(app)
    type_cell(app, 0, 0, "86.10")  # what stands there, written otherwise
    grid(app).table.setCurrentIndex(grid(app).cells.index(0, 0))
    app.window.setFocus()
    settle(app)
    assert app.bench.history.count() == 0
    assert changed(before, pictures(app)) == set()
    type_cell(app, 0, 0, "140")
    settle(app)
    assert app.bench.history.count() == 1
    assert changed(before, pictures(app)) == set(before)


def test_the_picture_of_a_pane_follows_the_constant_and_comes_back(app):
    settle(app)
    pane = app.window.views.panes["A"]
    before = picture(pane)
    type_cell(app, 2, 2, "60")
    settle(app)
    after = picture(pane)
    assert (np.abs(after.astype(int) - before).max(axis=2) > 20).mean() > 0.05
    menu(app, "Undo")
    app.window.setFocus()
    settle(app)
    assert np.array_equal(picture(pane), before)


def test_fifty_edits_undo_to_the_start_and_redo_to_the_end(app):
    start = app.bench.state
    for k in range(10):
        type_cell(app, 0, 0, f"{87 + k}")
        type_cell(app, 1, 4, f"{0.5 + 0.1 * k:.1f}")
        fill_in(app, "Density in kg/m³", f"{2600 + k}")
        fill_in(app, "Name of the specimen", f"blank {k}")
        fill_in(app, "Cutting error δ, degrees", f"{1 + 0.1 * k:.1f}")
    end = app.bench.state
    assert app.bench.history.count() == 50
    for _ in range(50):
        menu(app, "Undo")
    assert app.bench.state == start
    assert not app.menu_bar.actions["Undo"].isEnabled()
    settle(app)
    assert shown_cell(app, 0, 0) == "86.10"
    assert control(app, QLineEdit, "Density in kg/m³").text() == "2684"
    for _ in range(50):
        menu(app, "Redo")
    assert app.bench.state == end
    assert not app.menu_bar.actions["Redo"].isEnabled()
    settle(app)
    assert shown_cell(app, 0, 0) == "96.00"
    assert control(app, QLineEdit, "Cutting error δ, degrees").text() == "1.9"


def test_undo_is_named_in_the_menu(app):
    type_cell(app, 0, 3, "5")
    assert app.menu_bar.actions["Undo"].text() == "&Undo: change C14"
    menu(app, "Undo")
    assert app.menu_bar.actions["Undo"].text() == "&Undo"
    assert app.menu_bar.actions["Redo"].text() == "&Redo: change C14"


# ------------------------------------------------------------------ bad entries
BAD_CELLS = {
    "letters": ("abc", "not a number"),
    "empty": ("", "empty"),
    "too large for a computer": ("1e400", "too large"),
    "NaN": ("NaN", "not a number"),
    "beyond any solid": ("1e9", "beyond any solid"),
    "thousands": ("1,684", "thousands"),
}


def test_bad_entries_are_refused_in_place_and_the_last_good_state_stays(app):
    settle(app)
    start, before = app.bench.state, picture(app.window.views.panes["A"])
    for kind, (text, word) in BAD_CELLS.items():
        type_cell(app, 0, 1, text)
        (sentence,) = sentences(grid(app))
        assert word in sentence, kind
        assert app.bench.state == start, kind
        if text:
            assert shown_cell(app, 0, 1) == text, kind  # it stays, to be mended
    settle(app)
    assert app.bench.history.count() == 0
    app.window.setFocus()
    assert np.array_equal(picture(app.window.views.panes["A"]), before)
    type_cell(app, 0, 1, "33.5")
    assert sentences(grid(app)) == []
    assert table_of(app)[0, 1] == table_of(app)[1, 0] == 33.5


def test_escape_brings_the_last_good_value_back(app):
    type_cell(app, 0, 1, "rubbish")
    QTest.keyClick(grid(app).table, KEYS.Key_Escape)
    assert sentences(grid(app)) == []
    assert shown_cell(app, 0, 1) == "31.42"


def test_a_dependent_cell_says_what_it_follows_from(app):
    load(app, CUBIC)
    table = grid(app).table
    table.setFocus()
    table.setCurrentIndex(grid(app).cells.index(1, 1))
    QTest.keyClicks(table, "5")
    settle(app)
    assert "C11" in grid(app)._note.text()
    assert app.bench.history.count() == 0


def paste(app, row, column, text):
    table = grid(app).table
    table.setFocus()
    table.setCurrentIndex(grid(app).cells.index(row, column))
    QApplication.clipboard().setText(text)
    QTest.keyClick(table, KEYS.Key_V, Qt.KeyboardModifier.ControlModifier)


def rows_text(table, separator="\t"):
    return "\n".join(separator.join(f"{x:g}" for x in row) for row in table)


def test_a_pasted_table_replaces_all_and_what_is_copied_pastes_back(app):
    wanted = random_physical(np.random.default_rng(8)).round(3)
    wanted = ((wanted + wanted.T) / 2).round(3)
    paste(app, 3, 2, rows_text(wanted))
    assert np.array_equal(table_of(app), wanted)
    menu(app, "Copy the matrix")
    copied = QApplication.clipboard().text()
    assert np.array_equal([[float(x) for x in r.split("\t")] for r in copied.split("\n")],
                          wanted)  # fmt: skip
    menu(app, "Undo")
    paste(app, 0, 0, copied)
    assert np.array_equal(table_of(app), wanted)


ODD_TABLES = {
    "five rows of six and one of five": (
        rows_text(np.ones((5, 6))) + "\n" + rows_text(np.ones((1, 5)))),
    "seven rows": rows_text(np.ones((7, 6))),
    "letters": "86.1\tabc\n31.4\t120",
}


@pytest.mark.parametrize(
    ("text", "word"),
    [("100\t20\n25\t90", "25"), (rows_text(np.full((6, 6), np.nan)), "number")],
    ids=["not symmetric", "NaN"],
)
def test_what_cannot_go_in_is_refused_under_the_grid(app, text, word):
    start = app.bench.state
    paste(app, 1, 1, text)
    (sentence,) = sentences(grid(app))
    assert word in sentence
    assert grid(app).cells.faults() == ()  # no cell is a bad one
    assert app.bench.state == start
    assert app.bench.history.count() == 0
    assert shown_cell(app, 0, 0) == "86.10"
    grid(app).table.setCurrentIndex(grid(app).cells.index(2, 2))
    assert sentences(grid(app)) == []


@pytest.mark.parametrize("kind", ODD_TABLES)
def test_what_is_no_plain_block_goes_to_the_dialog_of_tables(app, kind):
    start = app.bench.state
    paste(app, 1, 1, ODD_TABLES[kind])
    dialog = app.intake.dialog
    assert dialog.isVisible()
    assert dialog.text.toPlainText() == ODD_TABLES[kind].replace("\r", "")
    dialog.reject()
    assert sentences(grid(app)) == []
    assert app.bench.state == start


def test_a_whole_table_that_is_not_symmetric_is_asked_about_and_changes_nothing(app):
    asked, start = [], app.bench.state
    app.ledger.table_asked.connect(asked.append)
    text = rows_text(np.arange(36.0).reshape(6, 6))
    paste(app, 0, 0, text)
    app.ledger.table_asked.disconnect(asked.append)
    assert asked == [text]
    assert app.bench.state == start


def test_a_block_that_reaches_over_the_edge_is_refused(app):
    start = app.bench.state
    paste(app, 4, 5, "1\t2\n3\t4")
    assert "does not fit" in sentences(grid(app))[0]
    assert app.bench.state == start


def test_a_guess_about_a_pasted_table_is_said(app):
    wanted = table_of(app) * 1.5
    paste(app, 0, 0, rows_text(10 * wanted))  # kbar, by the size of the numbers
    assert np.allclose(table_of(app), wanted, rtol=1e-4)
    assert "Unit taken as kbar and converted" in app.window._message.text()


# ------------------------------------------------------------------ what else is known
def test_bad_densities_are_refused_in_place(app):
    start = app.bench.state
    field = control(app, QLineEdit, "Density in kg/m³")
    for text in ("0", "-2650", "heavy", "1e400", "nan"):
        enter(field, text)
        settle(app)
        assert len(sentences(app.window.views.specimen)) == 1, text
        assert app.bench.state == start, text
        assert field.text() == text
        QTest.keyClick(field, KEYS.Key_Escape)
        assert field.text() == "2684"
        assert sentences(app.window) == [], text


@pytest.mark.parametrize("text", ["1e-9", "1e9"])
def test_an_implausible_density_is_taken_and_said(app, text):
    pick(app, "Quantity", "slowness")
    fill_in(app, "Density in kg/m³", text)
    settle(app)
    assert app.bench.state.specimen.density == float(text)
    assert len(app.window.views.panes["A"]._view.sheets) == 3
    assert any("density" in fact for fact in app.window.views.verdict._view.facts)


def test_a_name_may_not_be_empty(app):
    fill_in(app, "Name of the specimen", "")
    assert sentences(app.window.views.specimen) == ["name: A specimen wants a name."]
    assert app.bench.state.specimen.name == "Lanternmoor blank LM-7"


def test_a_class_with_more_symmetry_makes_the_dependent_cells_follow(app):
    pick(app, "Symmetry and number of independent constants", "hexagonal")
    settle(app)
    expected = complete(
        np.array(first_state(open_demo(FIRST_DEMO)).specimen.stiffness),
        crystal_class("hexagonal"),
    )
    assert np.allclose(table_of(app), expected, rtol=1e-15)
    assert shown_cell(app, 0, 3) == "·"
    assert shown_cell(app, 1, 1) == "86.10"
    type_cell(app, 0, 0, "100")
    assert table_of(app)[5, 5] == pytest.approx((100 - 31.42) / 2, rel=1e-15)
    menu(app, "Undo")
    menu(app, "Undo")
    assert app.bench.state == first_state(open_demo(FIRST_DEMO))


def test_making_the_class_exact_projects_the_table(app):
    load(app, "prism_lm29_other_axes.json")
    form = app.window.views.specimen
    assert "away from" in form._class_note.text()
    menu(app, "Make the class exact")
    settle(app)
    assert form._class_note.isHidden()
    table = table_of(app)
    assert np.abs(table[:3, 3:]).max() == 0.0


def test_the_faces_show_the_same_crystal(app):
    choose_face(app, "Compliance S")
    shown = float(shown_cell(app, 0, 0).replace("−", "-"))
    inverse = np.linalg.inv(table_of(app)) * 1e3
    assert shown == pytest.approx(inverse[0, 0], rel=1e-3)
    type_cell(app, 3, 3, "40")
    assert np.linalg.inv(table_of(app))[3, 3] == pytest.approx(0.040, rel=1e-12)
    choose_face(app, "± Uncertainty")
    type_cell(app, 0, 0, "0.5")
    assert app.bench.state.specimen.stiffness_std[0][0] == 0.5
    type_cell(app, 0, 0, "-1")
    assert "negative" in sentences(grid(app))[0]
    assert app.bench.state.specimen.stiffness_std[0][0] == 0.5


def choose_face(app, words):
    button = next(b for b in grid(app)._faces.values() if b.text() == words)
    QTest.mouseClick(button, Qt.MouseButton.LeftButton)
    settle(app)


# ------------------------------------------------------------------ the cell and its axes
def test_a_cell_can_be_typed_in_from_nothing(app):
    menu(app, "Reset both")  # B was said in indices, which need a cell
    for name in ("edge a", "edge b", "edge c"):
        fill_in(app, f"Length of cell {name} in Å", "")
    for angle in "αβγ":
        fill_in(app, f"Cell angle {angle} in degrees", "")
    assert app.bench.state.specimen.cell is None
    assert sentences(app.window.views.cell) == []
    for name, text in (("Length of cell edge a in Å", "5"), ("Length of cell edge b in Å", "6"),
                       ("Length of cell edge c in Å", "7"), ("Cell angle α in degrees", "90"),
                       ("Cell angle β in degrees", "100")):  # fmt: skip
        fill_in(app, name, text)
        assert app.bench.state.specimen.cell is None
        assert "γ still wanted" in sentences(app.window.views.cell)[-1]
    fill_in(app, "Cell angle γ in degrees", "90")
    cell = app.bench.state.specimen.cell
    assert (cell.a, cell.b, cell.c, cell.alpha, cell.beta, cell.gamma) == (5, 6, 7, 90, 100, 90)
    assert sentences(app.window.views.cell) == []


def test_cells_that_cannot_be_are_refused_in_place(app):
    start = app.bench.state
    for text in ("200", "0", "-5", "wide", "1e400"):
        fill_in(app, "Cell angle β in degrees", text)
        assert len(sentences(app.window.views.cell)) == 1, text
        assert app.bench.state == start, text
        fill_in(app, "Cell angle β in degrees", "116.6")
        assert sentences(app.window.views.cell) == [], text


def test_a_fault_of_the_cell_is_marked_where_it_is(app):
    """Another field that is edited meanwhile does not take the blame."""
    fill_in(app, "Cell angle β in degrees", "wide")
    fill_in(app, "Length of cell edge a in Å", "9")
    fields = app.window.views.cell._fields
    assert fields["beta"].message
    assert not fields["a"].message
    fill_in(app, "Cell angle β in degrees", "110")
    cell = app.bench.state.specimen.cell
    assert (cell.a, cell.beta) == (9.0, 110.0)
    assert sentences(app.window.views.cell) == []


def test_other_axes_ask_what_is_to_become_of_the_numbers(app):
    start = table_of(app)
    combo = control(app, QComboBox, "Crystal axes")
    choose(combo, "x||a, z||c*")
    QTest.mouseClick(app.window.views.cell._question.first, Qt.MouseButton.LeftButton)
    settle(app)
    turned = table_of(app)
    assert app.bench.state.specimen.crystal_axes == "x||a, z||c*"
    assert np.abs(turned - start).max() > 1.0
    # Turning changes no invariant: C_iijj and C_ijij.
    for invariant in (lambda c: c[:3, :3].sum(),
                      lambda c: np.trace(c[:3, :3]) + 2 * np.trace(c[3:, 3:])):  # fmt: skip
        assert invariant(turned) == pytest.approx(invariant(start), rel=1e-13)
    menu(app, "Undo")
    assert np.array_equal(table_of(app), start)


def test_nothing_breaks_when_an_orientation_loses_its_cell(app):
    """B is said in indices; they cannot be read without a cell, so the cell must stay."""
    start = app.bench.state
    for name in ("edge a", "edge b", "edge c"):
        fill_in(app, f"Length of cell {name} in Å", "")
    for angle in "αβγ":
        fill_in(app, f"Cell angle {angle} in degrees", "")
    assert app.bench.state.specimen == start.specimen
    assert "B" in sentences(app.window.views.cell)[-1]


def test_every_class_can_be_chosen_and_undone(app):
    load(app, TRICLINIC)
    start = app.bench.state
    combo = control(app, QComboBox, "Symmetry and number of independent constants")
    keys = [combo.itemData(k) for k in range(combo.count())]
    assert len(keys) == 10
    for key in keys:
        choose(combo, key)
        assert app.bench.state.specimen.crystal_class == key
    settle(app)
    while app.bench.history.canUndo():
        menu(app, "Undo")
    assert app.bench.state == start


def test_a_field_keeps_what_is_being_typed_while_something_else_changes(app):
    field = control(app, QLineEdit, "Density in kg/m³")
    field.setFocus()
    field.selectAll()
    QTest.keyClicks(field, "27")
    app.stage.move_pin((0.0, 1.0, 0.0))
    app.stage.choose_layout("A")
    settle(app)
    assert field.text() == "27"
    enter(field, "2700")
    assert app.bench.state.specimen.density == 2700.0
