"""What leaves the window: figures, reports, tables and meshes, one command each."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QSettings
from PySide6.QtWidgets import QDialog

from core.errors import InputError
from core.report.content import FileNote, file_note
from gui.actions import Entry
from gui.bench import Bench
from gui.figures.figure_dialog import FigureDialog, Studio
from gui.figures.report_dialog import ReportDialog
from gui.figures.table_dialog import MeshDialog, TableDialog
from gui.stage.composition import Renderer
from gui.widgets.forms import current_theme
from gui.window import Window


def no_file() -> Path | None:
    """Return that the bench has no file."""
    return None


class Exports:
    """The commands that hand work over; each opens its dialog on the bench as it is.

    Parameters
    ----------
    bench : Bench
    window : Window
    settings : QSettings
        Keeps what was used last.
    renderer : Renderer
        The one that draws the panes.
    file_of : callable
        Returns the file of the bench, or None while it has none.
    drawn_with : str
        What draws, in words, for the provenance of reports.
    """

    def __init__(
        self,
        bench: Bench,
        window: Window,
        settings: QSettings,
        renderer: Renderer,
        file_of: Callable[[], Path | None] = no_file,
        drawn_with: str = "",
    ) -> None:
        self._bench, self._window, self._settings = bench, window, settings
        self._renderer, self._file_of, self._drawn_with = renderer, file_of, drawn_with

    def entries(self) -> tuple[Entry, ...]:
        """Return the lines of the menu."""
        return (
            Entry("Save &figure…", self.ask_figure, "Ctrl+E",
                  "Any pane or plot as PNG, SVG or PDF, with a preview"),
            Entry("Save &report…", self.ask_report, "Ctrl+Shift+E",
                  "Everything known of the specimen and the part, as PDF or HTML"),
            Entry("Save &table…", self.ask_table, "",
                  "Constants in part axes, directions or the section as text"),
            Entry("Save &mesh…", self.ask_mesh, "",
                  "A surface as PLY or OBJ, with a value at every vertex"),
        )

    def figure_dialog(self) -> FigureDialog:
        """Return the dialog for a figure, not yet shown."""
        return FigureDialog(self._studio(), self._window)

    def report_dialog(self) -> ReportDialog:
        """Return the dialog for a report, not yet shown."""
        return ReportDialog(self._studio(), self._note(), self._drawn_with, self._window)

    def table_dialog(self) -> TableDialog:
        """Return the dialog for a table, not yet shown."""
        return TableDialog(self._studio(), self._window)

    def mesh_dialog(self) -> MeshDialog:
        """Return the dialog for a mesh, not yet shown."""
        return MeshDialog(self._studio(), self._window)

    def ask_figure(self) -> None:
        """Let the user choose and save a figure."""
        self._run(self.figure_dialog())

    def ask_report(self) -> None:
        """Let the user choose and save a report."""
        self._run(self.report_dialog())

    def ask_table(self) -> None:
        """Let the user choose and save a table."""
        self._run(self.table_dialog())

    def ask_mesh(self) -> None:
        """Let the user choose and save a mesh."""
        self._run(self.mesh_dialog())

    def _run(self, dialog: FigureDialog | ReportDialog | TableDialog | MeshDialog) -> None:
        dialog.saved.connect(self._tell)
        dialog.exec()
        QDialog.deleteLater(dialog)

    def _tell(self, path: str) -> None:
        self._window.show_message(f"Saved {Path(path).name}")

    def _studio(self) -> Studio:
        cameras = {side: pane.camera for side, pane in self._window.views.panes.items()}
        return Studio(self._bench.state, self._renderer, cameras, current_theme().name,
                      self._settings)

    def _note(self) -> FileNote | None:
        """Return which file the bench has, and whether it is still as that file."""
        path = self._file_of()
        if path is None:
            return None
        try:
            return file_note(path, self._bench.history.isClean())
        except InputError:  # moved or deleted since it was opened
            return None
