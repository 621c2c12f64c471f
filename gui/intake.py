"""Taking things in: foreign tables through their dialog, unit cells from CIF files."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
from PySide6.QtCore import QObject, Slot
from PySide6.QtWidgets import QFileDialog

from core.editing.table import with_cell
from core.errors import InputError
from core.files.cif import CifCell, read_cell
from core.files.opening import Opened
from core.files.text import read_text
from core.state import Matrix, Specimen, as_matrix
from core.study.trust.symmetry_verdict import SymmetryVerdict, symmetry_verdict
from core.task import Ticker
from core.tensor.hidden_axes import nearest_classes
from core.tensor.stiffness import Stiffness
from gui.bench import Bench
from gui.documents import Documents
from gui.intents.base import Intents, with_specimen
from gui.presenting import taking_in
from gui.presenting.ledger import ledger_specimen
from gui.scheduler import Job, Scheduler
from gui.taking_in.cell_dialog import CellDialog
from gui.taking_in.dialog import TableDialog
from gui.window import Window

_AXES = "axes of a foreign table"
_TABLES = "Tables (*.txt *.csv *.dat *.tsv *.tex);;All files (*)"
_CIF = "CIF files (*.cif *.mmcif *.mcif);;All files (*)"
AxesRequest = tuple[Matrix, Matrix | None]


class Intake(Intents):
    """Opens the dialogs and carries out what comes of them."""

    def __init__(
        self,
        bench: Bench,
        documents: Documents,
        scheduler: Scheduler,
        window: Window,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(bench, parent)
        self._documents, self._scheduler, self._window = documents, scheduler, window
        self._text = ""
        self._choices: dict[str, str] = {}
        self._symmetry: tuple[AxesRequest, SymmetryVerdict] | None = None
        self._base: Callable[[], Specimen] = self._ledger_specimen
        self._use: Callable[[Specimen], None] = self._put_in_ledger
        self._cell: tuple[CifCell, str, str] | None = None
        self.dialog = TableDialog(window)
        self.cell_dialog = CellDialog(window)
        self._connect()

    def _connect(self) -> None:
        self.dialog.text_changed.connect(self._set_text)
        self.dialog.chosen.connect(self._choose)
        self.dialog.file_asked.connect(self._read_file)
        self.dialog.accepted.connect(self._take)
        self.cell_dialog.axes_chosen.connect(self._choose_axes)
        self.cell_dialog.accepted.connect(self._take_cell)
        self._scheduler.finished.connect(self._on_finished)
        self._documents.table_met.connect(self.open_file_table)
        self._documents.other_met.connect(self.open_other_table)
        self._documents.cell_met.connect(self.open_cell)

    # -------------------------------------------------------------- tables
    def take_in(self, text: str = "") -> None:
        """Open the dialog for a table that goes into the ledger's specimen."""
        self._open(text, self._ledger_specimen, self._put_in_ledger)

    @Slot(str, object)
    def open_file_table(self, text: str, path: Path) -> None:
        """Open the dialog for a file that is a table: a specimen of its own."""

        def use(specimen: Specimen) -> None:
            self._documents.take_table(specimen, path)

        self._open(text, lambda: _specimen_of(path), use)

    @Slot(str, object)
    def open_other_table(self, text: str, path: Path) -> None:
        """Open the dialog for a file that is to be the other crystal."""

        def use(specimen: Specimen) -> None:
            self._documents.use_other(Opened(specimen))

        self._open(text, lambda: _specimen_of(path), use)

    def _open(
        self, text: str, base: Callable[[], Specimen], use: Callable[[Specimen], None]
    ) -> None:
        self._base, self._use = base, use
        self.dialog.show_text(text)
        self._set_text(text)
        self.dialog.open()
        self.dialog.text.setFocus()

    @Slot(str)
    def _set_text(self, text: str) -> None:
        self._text, self._choices = text, {}
        self._show()

    @Slot(str, str)
    def _choose(self, field: str, value: str) -> None:
        """Follow a choice; one that cannot be is said and not followed."""
        before = self._choices
        self._choices = taking_in.still_valid(before, field) | {field: value}
        try:
            taking_in.result_or_questions(self._base(), self._text, self._choices)
        except InputError as error:
            self._choices = before
            self._show(str(error))
        else:
            self._show()

    def _show(self, complaint: str = "") -> None:
        request = self._axes_request()
        known = self._symmetry
        symmetry = known[1] if known is not None and known[0] == request else None
        view = taking_in.taking_in_view(self._base(), self._text, self._choices, symmetry)
        if complaint:
            view = replace(view, error=complaint)
        self.dialog.show_view(view)
        if request is not None and symmetry is None:
            self._scheduler.submit(Job(_AXES, request, _find_axes, "Axes of the table"))

    def _axes_request(self) -> AxesRequest | None:
        try:
            known = taking_in.read(self._text, self._choices)
        except InputError:
            return None
        std = None if known.std is None else as_matrix(known.std)
        return as_matrix(known.stiffness), std

    @Slot(str, object, object)
    def _on_finished(self, kind: str, request: Any, result: Any) -> None:
        if kind == _AXES:
            self._symmetry = (request, result)
            if self.dialog.isVisible() and request == self._axes_request():
                self._show()

    @Slot()
    def _read_file(self) -> None:
        path, _ = QFileDialog.getOpenFileName(self.dialog, "Read a table", "", _TABLES)
        if not path:
            return
        try:
            text = read_text(Path(path))
        except InputError as error:
            self._documents.complain("The file was not read", str(error))
            return
        self.dialog.show_text(text)
        self._set_text(text)

    @Slot()
    def _take(self) -> None:
        known = taking_in.read(self._text, self._choices)
        self._use(taking_in.result(self._base(), known, self._choices))

    def _ledger_specimen(self) -> Specimen:
        return ledger_specimen(self.bench.state)

    def _put_in_ledger(self, specimen: Specimen) -> None:
        before = self._ledger_specimen()
        had = before.stiffness_std is not None or before.covariance is not None
        gone = ", the old uncertainties are gone" if had and not specimen.stiffness_std else ""
        self.attempt(
            lambda state: with_specimen(state, specimen), "Take in a table", self._refuse
        )
        self.said.emit(
            f"The table is in{gone}. Name, density and unit cell are those from before: change "
            "them if it is another crystal."
        )

    def _refuse(self, message: str) -> None:
        self._documents.complain("The table was not taken in", message)

    # -------------------------------------------------------------- cells
    def ask_cell(self) -> None:
        """Let the user choose a CIF file for the unit cell."""
        path, _ = QFileDialog.getOpenFileName(
            self._window, "Unit cell from a CIF file", "", _CIF
        )
        if path:
            self.open_cell(Path(path))

    @Slot(object)
    def open_cell(self, path: Path) -> None:
        """Show the cell of a CIF file and ask how the crystal axes follow it."""
        try:
            found = read_cell(read_text(path), path.name)
        except InputError as error:
            self._documents.complain("The cell was not read", str(error))
            return
        specimen = self._ledger_specimen()
        self._cell = (found, path.name, specimen.crystal_axes)
        self._show_cell()
        self.cell_dialog.open()

    @Slot(str)
    def _choose_axes(self, axes: str) -> None:
        if self._cell is not None:
            self._cell = (*self._cell[:2], axes)
            self._show_cell()

    def _show_cell(self) -> None:
        if self._cell is None:
            return
        found, name, axes = self._cell
        specimen = self._ledger_specimen()
        self.cell_dialog.show_view(taking_in.cell_file_view(specimen, found, name, axes))
        try:
            with_cell(specimen, found, axes)
        except InputError as error:
            self.cell_dialog.show_error(str(error))
        else:
            self.cell_dialog.show_error("")

    @Slot()
    def _take_cell(self) -> None:
        if self._cell is None:
            return
        found, name, axes = self._cell
        self.attempt(
            lambda state: with_specimen(state, with_cell(ledger_specimen(state), found, axes)),
            f"Take the unit cell of {name}",
            self._refuse_cell,
        )

    def _refuse_cell(self, message: str) -> None:
        self._documents.complain("The cell was not taken over", message)


def _specimen_of(path: Path) -> Specimen:
    """Return an empty specimen named after a file."""
    return Specimen(path.stem, as_matrix(np.zeros((6, 6))), source=f"read from {path.name}")


def _find_axes(request: AxesRequest, ticker: Ticker) -> SymmetryVerdict:
    stiffness = Stiffness.from_voigt(request[0])
    std = None if request[1] is None else np.array(request[1])
    ticker.tick(0.0)
    return symmetry_verdict(stiffness, nearest_classes(stiffness, std), std)
