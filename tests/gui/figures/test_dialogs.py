"""The dialogs for figures, reports, tables and meshes, driven by their own controls."""

from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import Qt, QUrl
from PySide6.QtGui import QDesktopServices, QGuiApplication
from PySide6.QtWidgets import QDialog, QFileDialog

from core.files.matrices import read_table
from core.report.captions import FigureChoice
from core.report.content import SECTIONS, FileNote
from gui.figures.controls import file_stem, key_of, show_key
from gui.figures.figure_dialog import FigureDialog, Studio
from gui.figures.report_dialog import ReportDialog
from gui.figures.table_dialog import MeshDialog, TableDialog
from gui.stage.flat_scene import FlatRenderer
from tests import materials
from tests.core.files.test_meshes import read_obj
from tests.gui.figures.benches import BENCH, DULL, TRICLINIC, svg_of


@pytest.fixture
def studio(settings):
    return Studio(BENCH, FlatRenderer(), {}, "light", settings)


@pytest.fixture
def target(monkeypatch, tmp_path):
    """Answer every question for a file with the name that the test puts in here."""
    answer = {"name": str(tmp_path / "answer")}
    monkeypatch.setattr(QFileDialog, "getSaveFileName",
                        lambda *_: (answer["name"], ""))  # fmt: skip
    return answer


@pytest.fixture
def opened(monkeypatch):
    """Keep what would be opened in other programs."""
    urls: list[QUrl] = []
    monkeypatch.setattr(QDesktopServices, "openUrl", urls.append)
    return urls


def choose(box, key):
    """Choose in a combo box as a user does."""
    show_key(box, key)
    box.activated.emit(box.currentIndex())


# --- figures --------------------------------------------------------------------------------


@pytest.fixture
def figure(qtbot, studio):
    dialog = FigureDialog(studio)
    qtbot.addWidget(dialog)
    choose(dialog.kind, "section")
    dialog.draw_preview()
    return dialog


def test_the_preview_has_the_figures_proportions(figure):
    figure.width_mm.setValue(100.0)
    figure.height_mm.setValue(50.0)
    figure.draw_preview()
    picture = figure.preview.pixmap()
    assert picture.width() == pytest.approx(2 * picture.height(), abs=2)
    assert "100 × 50 mm" in figure.words.text()
    assert "1,181 × 591 pixels" in figure.words.text()


def test_column_widths_and_the_width_follow_each_other(figure):
    choose(figure.columns, "85")
    assert figure.width_mm.value() == 85.0
    figure.width_mm.setValue(114.0)
    assert key_of(figure.columns) == "114"
    figure.width_mm.setValue(99.0)
    assert key_of(figure.columns) == "own"


def test_only_what_has_an_effect_can_be_changed(figure):
    choose(figure.kind, "source")
    assert not figure.quantity.isEnabled()
    choose(figure.kind, "hemisphere")
    assert figure.shown.isEnabled()
    assert not figure.sides.isEnabled()
    choose(figure.kind, "surface")
    choose(figure.format, "png")
    assert not figure.vectors.isEnabled()
    choose(figure.format, "svg")
    assert figure.vectors.isEnabled()


def test_a_change_draws_the_preview_anew_after_a_pause(qtbot, figure):
    before = figure.preview.pixmap().toImage()
    choose(figure.quantity, "slowness")
    qtbot.waitUntil(lambda: figure.preview.pixmap().toImage() != before, timeout=3000)


def test_saving_writes_and_remembers_the_form(qtbot, figure, target, tmp_path, studio):
    choose(figure.format, "svg")
    figure.width_mm.setValue(77.0)
    with qtbot.waitSignal(figure.saved) as told:
        figure.save_button.click()
    assert told.args == [str(tmp_path / "answer.svg")]
    root, texts, _ = svg_of((tmp_path / "answer.svg").read_bytes())
    assert float(root.get("width")[:-2]) == pytest.approx(77.0, abs=0.05)
    assert any("Test piece" in text for text in texts)
    assert figure.result() == QDialog.DialogCode.Accepted
    again = FigureDialog(studio)
    qtbot.addWidget(again)
    assert again.width_mm.value() == 77.0
    assert key_of(again.format) == "svg"
    assert studio.settings.value("folder") == str(tmp_path)


def test_a_figure_that_cannot_be_written_keeps_the_dialog_and_the_old_file(figure, target,
                                                                         tmp_path):
    target["name"] = str(tmp_path / "missing" / "a.png")
    figure.save_button.click()
    assert "was not saved" in figure.message.text()
    assert figure.result() == 0
    assert list(tmp_path.iterdir()) == []


def test_giving_up_the_file_writes_nothing(figure, target, tmp_path):
    target["name"] = ""
    figure.save_button.click()
    assert list(tmp_path.iterdir()) == []


def test_copying_puts_the_picture_on_the_clipboard(figure):
    figure.width_mm.setValue(60.0)
    figure.dpi.setValue(100.0)
    figure.copy_button.click()
    image = QGuiApplication.clipboard().image()
    assert image.width() == 236


def test_what_is_too_large_is_said_and_cannot_be_saved(figure):
    figure.width_mm.setValue(1000.0)
    figure.dpi.setValue(1200.0)
    figure.draw_preview()
    assert "20,000 pixels" in figure.message.text()
    assert not figure.save_button.isEnabled()


def test_without_a_density_no_wave_is_offered(qtbot, settings):
    dialog = FigureDialog(Studio(DULL, FlatRenderer(), {}, "light", settings))
    qtbot.addWidget(dialog)
    assert dialog.quantity.findData("slowness") == -1
    choose(dialog.kind, "source")
    dialog.draw_preview()
    assert "wants a density" in dialog.message.text()


# --- reports --------------------------------------------------------------------------------


@pytest.fixture
def report(qtbot, studio):
    dialog = ReportDialog(studio, FileNote("b.tricline", "ab" * 32))
    qtbot.addWidget(dialog)
    for row in range(1, dialog.figures.count()):
        dialog.figures.item(row).setCheckState(Qt.CheckState.Unchecked)
    dialog.figures.item(0).setData(Qt.ItemDataRole.UserRole,
                                   FigureChoice("section", "young", "A"))  # fmt: skip
    return dialog


def test_ticks_decide_what_goes_in(report):
    assert report.plan().sections == tuple(SECTIONS)
    report.sections.item(1).setCheckState(Qt.CheckState.Unchecked)
    assert "verdict" not in report.plan().sections
    assert len(report.plan().figures) == 1
    assert report.plan().file.name == "b.tricline"
    assert report.plan().again.startswith("tricline report b.tricline")


def test_the_cautions_cannot_be_left_out(report):
    row = list(SECTIONS).index("cautions")
    item = report.sections.item(row)
    assert item.checkState() == Qt.CheckState.Checked
    assert not item.flags() & Qt.ItemFlag.ItemIsEnabled


def test_another_figure_can_be_added(report):
    choose(report.kind, "hemisphere")
    choose(report.shown, "difference")
    choose(report.quantity, "poisson_least")
    report.add_button.click()
    assert report.plan().figures[-1] == FigureChoice(
        "hemisphere", "poisson_least", "AB", "difference")  # fmt: skip
    assert "Poisson" in report.figures.item(report.figures.count() - 1).text()


def test_a_report_is_made_in_pieces_saved_and_opened(qtbot, report, target, tmp_path, opened):
    with qtbot.waitSignal(report.saved, timeout=20000) as told:
        report.make_button.click()
        assert report.cancel_button.isEnabled()
        assert not (tmp_path / "answer.pdf").exists()
    written = tmp_path / "answer.pdf"
    assert told.args == [str(written)]
    assert written.read_bytes().startswith(b"%PDF")
    assert [Path(url.toLocalFile()) for url in opened] == [written]
    assert report.result() == QDialog.DialogCode.Accepted


def test_cancelling_writes_nothing_and_keeps_the_old_report(qtbot, report, target, tmp_path,
                                                          opened):
    old = tmp_path / "answer.pdf"
    old.write_bytes(b"old")
    report.make_button.click()
    report.cancel_button.click()
    qtbot.wait(50)
    assert old.read_bytes() == b"old"
    assert report.make_button.isEnabled()
    assert not report.cancel_button.isEnabled()
    assert opened == []


def test_closing_stops_the_making(qtbot, report, target, tmp_path):
    report.make_button.click()
    report.reject()
    qtbot.wait(50)
    assert not (tmp_path / "answer.pdf").exists()


def test_what_was_left_out_is_left_out_again(qtbot, report, target, studio, opened):
    report.sections.item(0).setCheckState(Qt.CheckState.Unchecked)
    report.opens.setChecked(False)
    choose(report.format, "html")
    assert not report.paper.isEnabled()
    with qtbot.waitSignal(report.saved, timeout=20000):
        report.make_button.click()
    assert opened == []
    again = ReportDialog(studio, None)
    qtbot.addWidget(again)
    assert again.sections.item(0).checkState() == Qt.CheckState.Unchecked
    assert again.sections.item(1).checkState() == Qt.CheckState.Checked
    assert key_of(again.format) == "html"


def test_a_report_that_cannot_be_written_says_so(qtbot, report, target, tmp_path):
    target["name"] = str(tmp_path / "missing" / "r.pdf")
    report.make_button.click()
    qtbot.waitUntil(lambda: "was not saved" in report.message.text(), timeout=20000)
    assert report.make_button.isEnabled()


# --- tables and meshes ----------------------------------------------------------------------


@pytest.fixture
def table(qtbot, studio):
    dialog = TableDialog(studio)
    qtbot.addWidget(dialog)
    return dialog


def test_a_table_is_shown_copied_and_saved(qtbot, table, target, tmp_path):
    choose(table.kind, "block")
    choose(table.side, "B")
    table.rows.setText("11 22 33 12 13 23")
    table.rows.editingFinished.emit()
    table.copy_button.click()
    text = QGuiApplication.clipboard().text()
    assert table.preview.toPlainText() == text
    with qtbot.waitSignal(table.saved):
        table.save_button.click()
    written = (tmp_path / "answer.txt").read_text()
    assert written == text
    turn = np.array([row.split(":")[1].split() for row in written.splitlines()
                     if row.startswith("# part")], dtype=float)  # fmt: skip
    wanted = materials.rotated(TRICLINIC.stiffness, turn)
    assert np.abs(read_table(written).stiffness - wanted).max() < 1e-6


def test_a_wrong_order_of_rows_is_marked(table):
    choose(table.kind, "page")
    table.rows.setText("11 22 33 12 13 13")
    table.rows.editingFinished.emit()
    assert table.rows.property("error")
    assert "each of 11, 22, 33" in table.message.text()
    assert not table.save_button.isEnabled()
    table.rows.setText("11 22 33 23 13 12")
    table.rows.editingFinished.emit()
    assert table.save_button.isEnabled()


def test_directions_of_all_quantities(table):
    choose(table.kind, "directions")
    choose(table.quantity, "all")
    table.step.setValue(45.0)
    head = next(line for line in table.preview.toPlainText().splitlines()
                if line.startswith("theta"))  # fmt: skip
    assert "young [GPa]" in head
    assert "focusing slowest [1]" in head


def test_a_section_of_both_sides(table):
    choose(table.kind, "section")
    choose(table.side, "AB")
    choose(table.quantity, "young")
    assert "A young [GPa],B young [GPa]" in table.preview.toPlainText()


def test_a_mesh_is_saved(qtbot, studio, target, tmp_path):
    dialog = MeshDialog(studio)
    qtbot.addWidget(dialog)
    choose(dialog.level, "4")
    choose(dialog.format, ".obj")
    choose(dialog.quantity, "young")
    with qtbot.waitSignal(dialog.saved):
        dialog.save_button.click()
    places, values, _, _ = read_obj((tmp_path / "answer.obj").read_text())
    assert len(places) == 2562
    assert np.sqrt((places**2).sum(axis=1)) == pytest.approx(values[:, 0], rel=1e-5)


def test_names_of_files_are_plain():
    assert file_stem("Test piece: 5/8", "young") == "Test_piece_5_8_young"
    assert file_stem("") == "figure"
