"""Measured speeds in the whole window: from readings to constants in the ledger, and back."""

from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
from PySide6.QtCore import QRectF, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLabel, QPushButton

from core import live
from core.editing.readings import understand
from core.files.bench import read_bench
from core.files.speeds import read_speeds
from core.state import SPEED_COLUMNS
from gui.speeds.residual_plot import strips_in
from gui.speeds_files import DEMOS
from gui.theme import LIGHT
from tests.gui.driving import choose, click, differs, menu, picture, settle, show
from tests.gui.plots.drawing import near

DETERMINED, BLIND = (name for name, _ in DEMOS)


@pytest.fixture
def page(app):
    return app.window.views.speeds


def open_demo(app, name):
    app.speed_files.open_demo(name)
    settle(app)


def cell(app, row, column):
    return app.bench.state.readings.rows[row][SPEED_COLUMNS.index(column)]


def facts(page):
    return dict(page.result.facts.texts())


def type_cell(page, row, key, text):
    table, model = page.readings.table, page.readings.readings
    keys = [column.key for column in model.view.columns]
    index = model.index(row, keys.index(key))
    table.setCurrentIndex(index)
    assert model.setData(index, text)


# ------------------------------------------------------------------ the page
def test_the_page_is_changed_by_its_buttons_keys_and_menu(app, page):
    assert not page.isVisible()
    QTest.mouseClick(app.window.switch.button("speeds"), Qt.MouseButton.LeftButton)
    assert page.isVisible()
    assert app.bench.state.display.page == "speeds"
    assert not app.window.ledger_panel.isVisible()
    # What is judged there is not what is measured here.
    name, band = app.bench.state.specimen.name, app.window.views.verdict
    assert band._view.headline == f"{name}, on the bench: Stable"
    QTest.keyClick(app.window, Qt.Key.Key_F5)
    assert not page.isVisible()
    assert app.window.ledger_panel.isVisible()
    assert band._view.headline == "Stable"
    menu(app, "Measured speeds")
    assert page.isVisible()
    assert app.window.switch.button("speeds").isChecked()


def test_going_to_the_page_and_back_is_no_step(app, page):
    menu(app, "Measured speeds")
    menu(app, "Bench")
    assert app.bench.history.count() == 0


def test_an_empty_page_says_what_it_wants_and_takes_its_facts_from_the_ledger(app, page):
    menu(app, "Measured speeds")
    assert page.readings.density.text() == "2684"
    assert page.readings.crystal_class.currentData() == "triclinic"
    assert page.result.use.isHidden()
    assert app.bench.state.readings is None


# ------------------------------------------------------------------ the round trip
def test_demo_readings_become_constants_in_the_ledger_and_undo_takes_them_back(app, page):
    before = app.bench.state.specimen
    open_demo(app, DETERMINED)
    assert page.isVisible()
    assert facts(page)["Seen"] == "21 of 21 combinations of constants"
    assert facts(page)["Outliers"] == "row 17"
    c11 = page.result.grid.cells.cell(0, 0)
    assert c11.deviation.startswith("± ")
    # The demo was made of blank LM-7, whose table is the one on the bench.
    assert float(c11.full) == pytest.approx(before.stiffness[0][0], abs=0.6)
    QTest.mouseClick(page.result.use, Qt.MouseButton.LeftButton)
    settle(app)
    after = app.bench.state.specimen
    assert app.bench.state.display.page == "bench"
    assert not page.isVisible()
    assert after.stiffness[0][0] == float(c11.full)
    assert after.stiffness_std[0][0] == pytest.approx(float(app.speeds.fit.std[0, 0]))
    assert after.covariance is not None
    assert after.source == "fit of 39 measured speeds"
    assert app.bench.history.undoText() == "Use the fitted constants"
    app.bench.history.undo()
    settle(app)
    assert app.bench.state.specimen == before
    assert page.isVisible()
    app.bench.history.undo()
    assert app.bench.state.readings is None
    assert not page.isVisible()


def test_the_blind_demo_names_what_it_does_not_see_and_what_to_cut_next(app, page):
    open_demo(app, BLIND)
    assert facts(page)["Seen"] == "10 of 13 combinations of constants"
    said = " ".join(page.result.unseen.texts())
    assert all(name in said for name in ("C12", "C23", "C25"))
    links = [b for b in page.blanks.findChildren(QPushButton)
             if b.text() == "plan" and not b.isHidden()]  # fmt: skip
    assert len(links) == 5
    links[0].click()
    settle(app)
    planned = understand(app.bench.state.readings).planned
    assert [plan.sheet for plan in planned] == ["1", "2", "3"]
    # Blanks were cut along y and across it: only one in between sees the rest.
    n = np.array(planned[0].direction)
    assert 0.2 < abs(n[1]) < 0.98
    assert "3 planned" in page.readings.readings.view.summary
    before = app.bench.state.specimen
    turn = live.rotation(app.bench.state.orientation_b, before)
    page.result.use.click()
    assert app.bench.state.specimen is before
    question = page.result.question
    assert question.isVisible()
    assert "3 constants were not seen: C12, C23, C25." in spoken(question)
    question.no.click()
    assert not question.isVisible()
    assert app.bench.state.specimen is before
    page.result.use.click()
    question.yes.click()
    settle(app)
    specimen = app.bench.state.specimen
    assert specimen.crystal_class == "monoclinic"
    assert specimen.stiffness_std[0][1] > 20.0 > specimen.stiffness_std[0][0]
    # The ledger held another crystal, a triclinic one with a cell and a temperature.
    assert specimen.name == "Constants from speeds_lm26_blind"
    assert (specimen.cell, specimen.temperature_c) == (None, None)
    # B was said by lattice directions; the same turn goes on without them.
    assert "[" not in app.bench.state.orientation_b.text
    assert live.rotation(app.bench.state.orientation_b, specimen) == pytest.approx(turn)
    assert "C12, C23, C25" in specimen.notes
    said = [one.text() for one in app.window.findChildren(QLabel)
            if one.accessibleName() == "Message"]  # fmt: skip
    assert "not kept" in said[0]


def spoken(widget):
    return " ".join(label.text() for label in widget.findChildren(QLabel))


def test_a_planned_blank_is_seen_on_the_hemisphere(app, page):
    open_demo(app, BLIND)
    before = picture(page.sphere.canvas)
    page.blanks.blank_wanted.emit("0.3 0.4 0.87")
    settle(app)
    assert differs(before, picture(page.sphere.canvas))


# ------------------------------------------------------------------ editing
def test_every_edit_is_a_step_and_the_fit_follows(app, page):
    open_demo(app, DETERMINED)
    chi2 = app.speeds.fit.chi2
    steps = app.bench.history.count()
    type_cell(page, 16, "transit_us", "3.5750")  # nearer to what the others say
    assert app.bench.history.count() == steps + 1
    assert app.bench.history.undoText() == "Change the transit time of row 17"
    assert cell(app, 16, "transit_us") == "3.5750"
    assert app.speeds.fit.chi2 != chi2
    app.bench.history.undo()
    assert app.speeds.fit.chi2 == chi2
    assert page.readings.readings.index(16, 3).data() == "3.5959"


def test_a_bad_cell_stands_marked_and_its_row_is_left_out(app, page):
    open_demo(app, DETERMINED)
    type_cell(page, 0, "transit_us", "soon")
    assert cell(app, 0, "transit_us") == "soon"
    assert "not a number" in page.readings.readings.fault(0, 3)
    assert facts(page)["Readings"] == "38, 1 row with faults left out"
    assert len(app.speeds.fit.readings) == 38
    type_cell(page, 0, "transit_us", "2.8251")
    assert len(app.speeds.fit.readings) == 39


def test_an_edited_density_scales_the_constants(app, page):
    open_demo(app, DETERMINED)
    before = app.speeds.fit.stiffness
    page.readings.edited.emit("density", "5368")
    assert app.speeds.fit.stiffness == pytest.approx(2 * before, rel=1e-6, abs=1e-6)
    page.readings.edited.emit("density", "heavy")
    assert app.bench.state.readings.density == "5368"
    assert page.readings.density.message.endswith("“heavy” is not a number.")
    page.readings.edited.emit("density", "")
    assert page.result.grid.isHidden()
    assert app.speeds.fit is None


def test_pasted_rows_with_a_header_make_a_fit(app, page):
    menu(app, "Measured speeds")
    page.readings.edited.emit("crystal_class", "isotropic")
    QApplication.clipboard().setText("nx\tny\tnz\tspeed_m_s\n1\t0\t0\t6000\n0\t1\t0\t3000\n")
    page.readings.table.setFocus()
    page.readings.table.paste()
    # ρv² of the two waves of an isotropic body are C11 and C44 = (C11 − C12)/2.
    fit = app.speeds.fit
    assert fit.stiffness[0, 0] == pytest.approx(2684 * 36e6 / 1e9, rel=1e-4)
    assert fit.stiffness[3, 3] == pytest.approx(2684 * 9e6 / 1e9, rel=1e-4)
    assert app.bench.history.undoText() == "Paste readings"


def test_a_hundred_thousand_rows_are_refused_and_nothing_is_lost(app, page):
    open_demo(app, BLIND)
    rows = app.bench.state.readings.rows
    page.readings.pasted.emit(0, 4, "5000\n" * 100_000)
    assert app.bench.state.readings.rows == rows
    assert "100,000 rows" in page.readings._fault.text()


def test_rows_are_put_in_and_taken_out_by_hand(app, page):
    open_demo(app, BLIND)
    page.readings.select_row(4)
    page.readings.table.insert_row()
    assert cell(app, 3, "direction") == "1 0 0"
    page.readings.select_row(4)
    page.readings.table.remove_rows()
    assert len(app.bench.state.readings.rows) == 21
    page.readings.cleared.emit(((0, 4), (0, 5)))
    assert cell(app, 0, "speed_m_s") == ""
    assert understand(app.bench.state.readings).planned[0].row == 1


def test_robust_fitting_spares_the_others_from_the_slip(app, page):
    open_demo(app, DETERMINED)
    plain = app.speeds.fit
    page.readings.robust.click()
    assert app.bench.state.readings.robust
    index = [r.row for r in plain.readings].index(17)
    robust = app.speeds.fit
    assert abs(robust.residuals[index]) > abs(plain.residuals[index])


# ------------------------------------------------------------------ plots and blanks
def test_each_plot_is_drawn_when_it_is_chosen(app, page):
    open_demo(app, DETERMINED)
    seen = []
    for words in ("Section", "Singular spectrum", "Correlations", "Residuals"):
        choose(next(c for c in page.plots.choices if c.isVisible()), words)
        settle(app)
        plot = next(plot for plot in page.plots.all() if plot.isVisible())
        seen.append(picture(plot.canvas))
        assert near(seen[-1].astype(int), LIGHT.panel, 2).mean() < 0.99
    assert all(differs(a, b, 0.01) for a, b in pairwise(seen))


def test_a_press_on_a_residual_goes_to_its_row(app, page):
    open_demo(app, DETERMINED)
    plot = page.plots.residuals
    view = plot._view
    point = next(each for each in view.points if each.is_outlier)
    at = strips_in(QRectF(plot.canvas.rect()), view, plot.theme).place(point)
    click(plot.canvas, at.x(), at.y())
    assert page.readings.table.currentIndex().row() == 16


def test_the_criterion_changes_what_is_suggested(app, page):
    open_demo(app, DETERMINED)
    first = app.speeds._ranking[1].best[0].direction
    choose(page.blanks.criterion, "functional")
    along_pin = app.speeds._ranking[1].best[0].direction
    assert not np.allclose(first, along_pin)
    assert any(kind == "pin" for *_, kind in page.sphere._view.marks)
    app.stage.move_pin((1.0, 0.0, 0.0))
    assert not np.allclose(along_pin, app.speeds._ranking[1].best[0].direction)


def test_a_plan_from_nothing_fills_the_table(app, page):
    show(app, page="speeds")
    page.blanks.ask.click()
    assert "determine all 21 constants" in page.blanks.plan.texts()[0]
    page.blanks.place.click()
    planned = understand(app.bench.state.readings).planned
    assert len(planned) == 24
    assert len({plan.direction for plan in planned}) == 8
    page.blanks.plan_asked.emit("none", "")
    assert page.blanks.sigma.message == "“none” is not a number."
    page.blanks.plan_asked.emit("0.1", "0")
    assert page.blanks.largest.message == "0 is not above zero."
    page.blanks.plan_asked.emit("5", "0.001")
    assert "thirty blanks" in page.blanks._plan_notice.text()


def test_a_typed_plane_is_read_or_refused(app, page):
    open_demo(app, DETERMINED)
    page.plots.face_chosen.emit("section")
    page.plots.section.plane_chosen.emit("[0 0 1]")
    assert app.bench.state.display.speeds_plane == pytest.approx((0.0, 0.0, 1.0))
    page.plots.section.plane_chosen.emit("sideways")
    assert page.plots.section.plane.is_wrong()
    assert page.plots.section.message.text() != ""


# ------------------------------------------------------------------ files
def test_readings_are_saved_and_opened_again(app, page, tmp_path):
    open_demo(app, BLIND)
    page.blanks.blank_wanted.emit("0.3 0.4 0.87")
    path = tmp_path / "mine.csv"
    assert app.speed_files.save(path)
    assert len(read_speeds(path).readings) == 21
    kept = app.bench.state.readings
    app.bench.history.undo()
    app.bench.history.undo()
    assert app.bench.state.readings is None
    assert app.documents.open(path)  # known by its header
    assert app.bench.state.readings.rows == kept.rows
    assert app.bench.state.display.page == "speeds"


def test_a_wrong_file_is_refused_with_row_and_column(app, page, tmp_path, monkeypatch):
    said = []
    monkeypatch.setattr(app.documents, "complain", lambda *words: said.append(words))
    path = tmp_path / "wrong.csv"
    path.write_text("direction,speed_m_s\n1 0 0,fast\n")
    assert not app.speed_files.open(path)
    assert said[0][0] == "The speeds were not opened"
    assert "wrong.csv, row 1, column speed_m_s" in said[0][1]
    assert app.bench.state.readings is None


def test_the_page_survives_saving_the_bench(app, page, tmp_path):
    open_demo(app, DETERMINED)
    page.plots.face_chosen.emit("spectrum")
    app.documents.path = tmp_path / "b.tricline"
    assert app.documents.save()
    state = read_bench(app.documents.path)
    assert state == app.bench.state
    assert (state.display.page, state.display.speeds_plot) == ("speeds", "spectrum")


@pytest.mark.parametrize("size", [(1180, 720), (1600, 1000)])
def test_nothing_is_clipped(app, page, size):
    open_demo(app, DETERMINED)
    app.window.resize(*size)
    settle(app)
    for button in page.findChildren(QPushButton):
        if button.isVisible():
            assert button.width() >= button.minimumSizeHint().width(), button.text()
    for panel in (page.readings, page.plots, page.sphere, page.result):
        right = panel.mapTo(app.window, panel.rect().bottomRight())
        assert right.x() <= app.window.width()
    app.bench.load(replace(app.bench.state, readings=None))
