"""The commands of the window that hand work over, on the whole program."""

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QDialog

from gui.figures.exports import Exports
from gui.figures.figure_dialog import FigureDialog
from gui.figures.report_dialog import ReportDialog
from gui.figures.table_dialog import MeshDialog, TableDialog


@pytest.fixture
def exports(app):
    return Exports(app.bench, app.window, app.test_settings, app.renderer,
                   lambda: app.documents.path, "numpy")  # fmt: skip


def meet(qtbot, command):
    """Run a command; return the dialog that it opens, closed again."""
    met = []

    def look():
        dialog = QApplication.activeModalWidget()
        assert isinstance(dialog, QDialog)
        met.append(type(dialog))
        dialog.reject()

    QTimer.singleShot(200, look)
    command()
    return met


@pytest.mark.parametrize(("name", "kind"), [
    ("ask_figure", FigureDialog), ("ask_report", ReportDialog),
    ("ask_table", TableDialog), ("ask_mesh", MeshDialog),
])  # fmt: skip
def test_every_command_opens_its_dialog(qtbot, exports, name, kind):
    assert meet(qtbot, getattr(exports, name)) == [kind]


def test_every_command_has_its_line_in_the_menu(exports):
    entries = exports.entries()
    assert [entry.run for entry in entries] == [
        exports.ask_figure, exports.ask_report, exports.ask_table, exports.ask_mesh]
    assert all(entry.tip for entry in entries)


def test_a_report_knows_the_file_and_whether_it_is_current(qtbot, app, exports, tmp_path):
    dialog = exports.report_dialog()
    qtbot.addWidget(dialog)
    assert dialog.plan().file is None
    path = tmp_path / "saved.tricline"
    path.write_text("{}")
    app.documents.path = path
    later = exports.report_dialog()
    qtbot.addWidget(later)
    assert later.plan().file.name == "saved.tricline"
    assert later.plan().file.is_current
    assert later.plan().drawn_with == "numpy"
    path.unlink()
    gone = exports.report_dialog()
    qtbot.addWidget(gone)
    assert gone.plan().file is None


def test_a_figure_begins_with_what_the_stage_shows(qtbot, app, exports):
    dialog = exports.figure_dialog()
    qtbot.addWidget(dialog)
    assert dialog.choice().quantity == app.bench.state.quantity
    assert dialog.choice().sides == app.bench.state.display.layout
