"""Foreign tables and cells in the whole window: pasted, opened, dropped, asked about."""

from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QPushButton

from core.crystal.cell import UnitCell
from tests.gui.driving import choose, load, menu, settle
from tests.materials import cubic

TABLES = Path(__file__).parents[1] / "core" / "files" / "tables"
CUBIC = "casting_lm40_cubic.json"
CIF = """data_lm40
_cell_length_a 3.615(1)
_cell_length_b 3.615
_cell_length_c 3.615
_cell_angle_alpha 90
_cell_angle_beta 90
_cell_angle_gamma 90
"""


def text_of(name):
    return (TABLES / name).read_text(encoding="utf-8")


def dialog(app):
    return app.intake.dialog


def table_of(app):
    return np.array(app.bench.state.specimen.stiffness)


def answer(app, field, key):
    row = dialog(app).readings.rows[field]
    button = next((b for b in row.buttons if b.text() == key), None)
    if button is None:
        choose(row.choice, key)
    else:
        QTest.mouseClick(button, Qt.MouseButton.LeftButton)


def use(app):
    assert dialog(app).use.isEnabled()
    QTest.mouseClick(dialog(app).use, Qt.MouseButton.LeftButton)
    settle(app)


def paste(app, text):
    QApplication.clipboard().setText(text)
    table = app.window.views.constants.table
    table.setFocus()
    table.setCurrentIndex(table.cells.index(0, 0))
    table.paste()
    settle(app)


# ------------------------------------------------------------------ tables
def test_a_table_is_taken_in_from_the_menu_as_one_step(app):
    load(app, CUBIC)
    start = app.bench.state
    menu(app, "Take in a table…")
    assert dialog(app).isVisible()
    assert not dialog(app).use.isEnabled()
    dialog(app).text.setPlainText("C11 = 168.4(12) GPa\nC12 = 121.4\nC44 = 75.4")
    assert "cubic" in dialog(app).lines.text().lower()
    use(app)
    found = app.bench.state.specimen
    assert table_of(app) == pytest.approx(cubic(168.4, 121.4, 75.4), abs=1e-9)
    assert found.stiffness_std[1][1] == pytest.approx(1.2)
    assert (found.crystal_class, found.name) == ("cubic", start.specimen.name)
    assert app.bench.history.undoText() == "Take in a table"
    assert app.bench.history.count() == 1
    menu(app, "Undo")
    assert app.bench.state == start


def test_a_pasted_table_that_leaves_a_question_opens_the_dialog(app):
    load(app, CUBIC)
    start = app.bench.state
    paste(app, text_of("no_unit_mbar.txt"))
    assert dialog(app).isVisible()
    assert app.bench.state == start
    assert dialog(app).status.text() == "1 question is open"
    answer(app, "unit", "Mbar")
    use(app)
    assert table_of(app)[0, 0] == pytest.approx(93.1)
    assert app.bench.state.specimen.crystal_class == "trigonal_6"


def test_a_plain_table_still_goes_in_at_once(app):
    load(app, CUBIC)
    paste(app, text_of("full_gpa.txt"))
    assert not dialog(app).isVisible()
    assert table_of(app)[0, 0] == pytest.approx(93.1)


def test_cancelling_changes_nothing(app):
    start = app.bench.state
    paste(app, text_of("triangles_differ.txt"))
    dialog(app).reject()
    assert app.bench.state == start
    assert app.bench.history.count() == 0


def test_a_choice_that_cannot_be_is_said_and_not_followed(app):
    menu(app, "Take in a table…")
    dialog(app).text.setPlainText(text_of("full_gpa.txt"))
    row = dialog(app).readings.rows["unit"]
    row.choice.chosen.emit("unit", "furlong")
    assert "furlong" in dialog(app).error.text()
    assert dialog(app).readings.rows["unit"].choice.currentText() == "GPa"
    row.choice.chosen.emit("unit", "kbar")
    assert not dialog(app).error.isVisible()
    use(app)
    assert table_of(app)[0, 0] == pytest.approx(9.31)


def test_a_new_text_forgets_the_choices_of_the_old_one(app):
    menu(app, "Take in a table…")
    dialog(app).text.setPlainText(text_of("no_unit_mbar.txt"))
    answer(app, "unit", "Mbar")
    assert dialog(app).use.isEnabled()
    dialog(app).text.setPlainText(text_of("no_unit_mbar.txt") + "\n")
    assert not dialog(app).use.isEnabled()


def test_a_text_file_is_looked_at_before_it_is_opened(app):
    start = app.bench.state
    assert app.documents.open(TABLES / "list_uncertainties.txt")
    assert dialog(app).isVisible()
    assert app.bench.state == start
    use(app)
    found = app.bench.state.specimen
    assert found.name == "list_uncertainties"
    assert found.source == "read from list_uncertainties.txt"
    assert found.crystal_class == "trigonal_6"
    assert (found.density, found.cell) == (None, None)
    assert app.documents.path is None
    assert app.bench.history.count() == 0


def test_a_dropped_file_that_is_no_table_can_be_mended_in_place(app):
    app.window.files_dropped.emit([str(TABLES / "thirty_five.txt")])
    assert "35 numbers" in dialog(app).error.text()
    mended = text_of("thirty_five.txt").replace("0 57.2 0\n", "0 57.2 0 0\n")
    dialog(app).text.setPlainText(mended)
    assert dialog(app).use.isEnabled()
    dialog(app).reject()


def test_hidden_axes_of_the_table_are_said_before_it_is_used(app):
    load(app, "prism_lm29_other_axes.json")
    menu(app, "Copy the matrix")
    menu(app, "Take in a table…")
    dialog(app).text.setPlainText(QApplication.clipboard().text())
    assert "once turned 42.4°" in dialog(app).lines.text()
    dialog(app).reject()


# ------------------------------------------------------------------ cells
def test_a_dropped_cif_gives_the_cell_and_asks_about_the_axes(app, tmp_path):
    load(app, CUBIC)
    path = tmp_path / "lm40.cif"
    path.write_text(CIF, encoding="utf-8")
    start = app.bench.state
    app.window.files_dropped.emit([str(path)])
    shown = app.intake.cell_dialog
    assert shown.isVisible()
    assert shown.values[0].text() == "3.615(1) Å"
    assert app.bench.state == start
    choose(shown.axes, "y||b, x||a*")
    QTest.mouseClick(shown.use, Qt.MouseButton.LeftButton)
    settle(app)
    found = app.bench.state.specimen
    assert found.cell == UnitCell(3.615, 3.615, 3.615, 90.0, 90.0, 90.0)
    assert found.crystal_axes == "y||b, x||a*"
    assert found.stiffness == start.specimen.stiffness
    assert app.bench.history.undoText() == "Take the unit cell of lm40.cif"
    menu(app, "Undo")
    assert app.bench.state == start


def test_the_cell_form_asks_for_a_file(app, monkeypatch, tmp_path):
    path = tmp_path / "lm40.cif"
    path.write_text(CIF, encoding="utf-8")
    monkeypatch.setattr(
        "gui.intake.QFileDialog.getOpenFileName", lambda *_: (str(path), "")
    )
    form = app.window.views.cell
    button = next(b for b in form.findChildren(QPushButton) if "CIF" in b.text())
    QTest.mouseClick(button, Qt.MouseButton.LeftButton)
    assert app.intake.cell_dialog.isVisible()
    app.intake.cell_dialog.reject()


def test_a_cif_without_a_cell_is_refused(app, monkeypatch, tmp_path):
    path = tmp_path / "empty.cif"
    path.write_text("data_nothing\n_cell_length_a 3.6\n", encoding="utf-8")
    said = []
    monkeypatch.setattr(app.documents, "complain", lambda title, text: said.append(text))
    start = app.bench.state
    app.intake.open_cell(path)
    assert "_cell_length_b" in said[0]
    assert not app.intake.cell_dialog.isVisible()
    assert app.bench.state == start
