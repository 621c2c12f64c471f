"""The readings with what is known of their crystal, and everything done to the table."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFontMetrics
from PySide6.QtWidgets import (
    QButtonGroup,
    QGridLayout,
    QHBoxLayout,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from gui.speeds.readings_table import ReadingsModel, ReadingsTable
from gui.speeds.viewdata import SpeedsFormView, SpeedsTableView
from gui.theme import Theme
from gui.widgets.forms import Choice, ElidedLabel, TextField, label, set_or_hide

UNIQUE_AXES = (("x", "along x"), ("y", "along y"), ("z", "along z"))
ENTERED = (
    ("speed", "Speeds", "Rows hold speeds in m/s."),
    ("flight", "Times of flight", "Rows hold thicknesses and transit times."),
    ("both", "Both", "Show the columns of both."),
)


class ReadingsPanel(QWidget):
    """The left column of the page.

    Signals
    -------
    edited(str field, str text)
        density, crystal_class, unique_axis, direction_sigma, robust ("on", "off"), entered.
    cell_edited(int row, str column, str text), pasted(int row, int column, str text)
    cleared(object places), removed(object rows), inserted(int row)
    facts_wanted(), open_wanted(), save_wanted()
        Take density, class and cell from the ledger; open and save a file.
    row_shown(int)
        From 1.
    """

    edited = Signal(str, str)
    cell_edited = Signal(int, str, str)
    pasted = Signal(int, int, str)
    cleared = Signal(object)
    removed = Signal(object)
    inserted = Signal(int)
    facts_wanted = Signal()
    open_wanted = Signal()
    save_wanted = Signal()
    row_shown = Signal(int)

    def __init__(self) -> None:
        super().__init__()
        self.readings = ReadingsModel(self)
        self.table = ReadingsTable(self.readings)
        self.density = TextField(
            "density",
            "Density of the measured crystal in kg/m³",
            "kg/m³, with its standard uncertainty where it is known: 2684 ± 1",
        )
        self.crystal_class = Choice(
            "crystal_class",
            "Symmetry of the measured crystal",
            "The symmetry whose independent constants are sought.",
        )
        self.unique_axis = Choice(
            "unique_axis", "Unique axis of the measured crystal", "The axis of symmetry."
        )
        self.direction_sigma = TextField(
            "direction_sigma",
            "Standard uncertainty of the directions in degrees",
            "How well the blanks are cut: standard uncertainty about each of two axes,"
            " degrees. It is added to σ by what it does to each speed.",
        )
        self.robust = QPushButton("robust")
        self.robust.setCheckable(True)
        self._heading = label("Readings", "heading")
        self._summary = ElidedLabel(role="secondary")
        self._summary.setAlignment(Qt.AlignmentFlag.AlignRight)
        self._frame = ElidedLabel(role="secondary")
        self._note = label(role="secondary", wrap=True)
        self._fault = label(role="error", wrap=True)
        self._message = ""
        self._axis_label = label("Unique axis", "secondary")
        self._lay_out()
        self._connect()

    # ------------------------------------------------------------ building
    def _lay_out(self) -> None:
        column = QVBoxLayout(self)
        column.setContentsMargins(11, 8, 11, 8)
        column.setSpacing(5)
        heading = QHBoxLayout()
        heading.setSpacing(8)
        heading.addWidget(self._heading)
        heading.addWidget(self._summary, 1)
        column.addLayout(heading)
        column.addLayout(self._form())
        column.addWidget(self._note)
        column.addLayout(self._faces_row())
        column.addWidget(self.table, 1)
        column.addWidget(self._fault)
        column.addLayout(self._buttons())
        self._fault.hide()
        self._note.hide()

    def _form(self) -> QGridLayout:
        grid = QGridLayout()
        grid.setHorizontalSpacing(8)
        grid.setVerticalSpacing(4)
        grid.setColumnStretch(1, 1)
        rows: tuple[tuple[QWidget, QWidget | QHBoxLayout], ...] = (
            (label("Density", "secondary"), self._density_row()),
            (label("Symmetry", "secondary"), self.crystal_class),
            (self._axis_label, self.unique_axis),
            (label("Indices", "secondary"), self._frame_row()),
        )
        for words, control in rows:
            row = grid.rowCount()
            grid.addWidget(words, row, 0)
            if isinstance(control, QWidget):
                grid.addWidget(control, row, 1)
            else:
                grid.addLayout(control, row, 1)
        for field in (self.density, self.direction_sigma):
            grid.addWidget(field.error_label, grid.rowCount(), 0, 1, 2)
        return grid

    def _density_row(self) -> QHBoxLayout:
        row = QHBoxLayout()
        row.setSpacing(6)
        self.density.setMinimumWidth(84)
        row.addWidget(self.density, 3)
        row.addWidget(label("kg/m³", "secondary"))
        row.addSpacing(8)
        words = label("cut to ±", "secondary")
        words.setBuddy(self.direction_sigma)
        self.direction_sigma.setFixedWidth(46)
        row.addWidget(words)
        row.addWidget(self.direction_sigma)
        row.addWidget(label("°", "secondary"))
        row.addSpacing(8)
        self.robust.setToolTip(
            "Let readings that are far off count less (Huber's loss), so that a slip in one"
            " does not pull at the constants."
        )
        row.addWidget(self.robust)
        return row

    def _frame_row(self) -> QHBoxLayout:
        row = QHBoxLayout()
        row.setSpacing(6)
        self._take = QPushButton("from the ledger")
        self._take.setProperty("role", "link")
        self._take.setToolTip(
            "Take density, symmetry, unit cell and crystal axes from the ledger."
        )
        self._take.setAccessibleName("Take density, symmetry and cell from the ledger")
        row.addWidget(self._frame, 1)
        row.addWidget(self._take)
        return row

    def _faces_row(self) -> QHBoxLayout:
        row = QHBoxLayout()
        row.setSpacing(10)
        self._group = QButtonGroup(self)
        self._faces: dict[str, QPushButton] = {}
        for key, words, tooltip in ENTERED:
            button = QPushButton(words)
            button.setProperty("role", "face")
            button.setProperty("key", key)
            button.setCheckable(True)
            button.setToolTip(tooltip)
            button.setAccessibleName(f"Entered as {words.lower()}")
            bold = QFontMetrics(Theme.font(bold=True))
            button.setMinimumWidth(bold.horizontalAdvance(words) + 8)
            self._group.addButton(button)
            self._faces[key] = button
            row.addWidget(button)
        row.addStretch(1)
        return row

    def _buttons(self) -> QHBoxLayout:
        row = QHBoxLayout()
        row.setSpacing(5)
        for words, tooltip, slot in (
            ("Add row", "Put a row before the current one, along the same direction (Ins)",
             self.table.insert_row),
            ("Remove", "Take the selected rows out (Ctrl+Del)", self.table.remove_rows),
            ("Paste", "Put copied cells in from the current one on; a header line says which"
             " columns they are (Ctrl+V)", self.table.paste),
            ("Open…", "Open a CSV file of measured speeds", self.open_wanted),
            ("Save…", "Save the readings as a CSV file", self.save_wanted),
        ):  # fmt: skip
            button = QPushButton(words)
            button.setToolTip(tooltip)
            button.clicked.connect(slot)
            row.addWidget(button)
        row.addStretch(1)
        return row

    def _connect(self) -> None:
        for field in (self.density, self.direction_sigma):
            field.finished.connect(self.edited)
        self.crystal_class.chosen.connect(self.edited)
        self.unique_axis.chosen.connect(self.edited)
        self.robust.clicked.connect(self._toggle_robust)
        self._group.buttonClicked.connect(self._choose_face)
        self._take.clicked.connect(self.facts_wanted)
        self.readings.entered.connect(self.cell_edited)
        table = self.table
        for signal, own in (
            (table.pasted, self.pasted), (table.cleared, self.cleared),
            (table.removed, self.removed), (table.inserted, self.inserted),
            (table.row_shown, self.row_shown),
        ):  # fmt: skip
            signal.connect(own)
        table.selectionModel().currentChanged.connect(self._on_moved)

    # ------------------------------------------------------------ showing
    def show_form(self, view: SpeedsFormView) -> None:
        """Show what is known of the crystal."""
        self.density.show_text(view.density)
        self.direction_sigma.show_text(view.direction_sigma)
        self.crystal_class.show_choices(view.classes, view.crystal_class)
        self.unique_axis.show_choices(UNIQUE_AXES, view.unique_axis)
        for widget in (self.unique_axis, self._axis_label):
            widget.setVisible(view.has_unique_axis)
        self.robust.setChecked(view.robust)
        self._frame.setText(view.frame)
        self._frame.setToolTip(view.frame)
        set_or_hide(self._note, view.note)
        for field, message in view.faults.items():
            self.show_error(field, message)

    def show_table(self, view: SpeedsTableView) -> None:
        """Show the rows."""
        self._message = ""
        self._faces[view.entered].setChecked(True)
        here = self.table.currentIndex()
        self.readings.show_view(view)
        index = self.readings.index(
            min(here.row(), self.readings.rowCount() - 1),
            min(here.column(), self.readings.columnCount() - 1),
        )
        if here.isValid() and not self.table.currentIndex().isValid():
            self.table.setCurrentIndex(index)
        self._summary.setText(view.summary)
        self._show_fault()

    def show_error(self, field: str, message: str) -> None:
        """Mark a field as wrong, or say why the table could not be changed."""
        if field in ("density", "direction_sigma"):
            {"density": self.density, "direction_sigma": self.direction_sigma}[
                field
            ].mark_error(message)
        else:
            self._message = message
            self._show_fault()

    def clear_error(self, field: str) -> None:
        """Take the mark off a field."""
        marked = {"density": self.density, "direction_sigma": self.direction_sigma}
        if field in marked:
            marked[field].clear_error()
        else:
            self._message = ""
            self._show_fault()

    def select_row(self, row: int) -> None:
        """Go to a row, counted from 1."""
        self.table.select_row(row)

    # ------------------------------------------------------------ inside
    def _on_moved(self) -> None:
        self._message = ""
        self._show_fault()

    def _show_fault(self) -> None:
        """Write what is wrong: with the last change, the current cell, or the first cell."""
        view = self.readings.view
        if view is None:
            return
        here = self.table.currentIndex()
        place = (here.row(), here.column())
        if place not in view.faults and view.faults:
            place = min(view.faults)
        fault = view.faults.get(place, "")
        if fault:
            title = view.columns[place[1]].title
            fault = f"Row {place[0] + 1}, {title}: {fault}"
            rest = len(view.faults) - 1
            fault += f" And {rest} more." if rest else ""
        set_or_hide(self._fault, self._message or fault)

    def _toggle_robust(self, on: bool) -> None:
        self.edited.emit("robust", "on" if on else "off")

    def _choose_face(self, button: QPushButton) -> None:
        view, key = self.readings.view, str(button.property("key"))
        if view is None or key != view.entered:
            self.edited.emit("entered", key)
