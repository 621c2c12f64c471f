"""The form of what is known of a crystal besides its constants and its cell."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QLabel, QSizePolicy, QWidget

from gui.viewdata import SpecimenView
from gui.widgets.forms import Choice, NotesField, TextField, label, set_or_hide
from gui.widgets.panel import Expander

UNIQUE_AXES = (("x", "along x"), ("y", "along y"), ("z", "along z"))


class SpecimenForm(QWidget):
    """Name, density, symmetry, source, notes; and which of two crystals is looked at.

    `edited(field, text)`; the field "chosen" comes with the side, "A" or "B", whose crystal
    the ledger shall show.
    """

    edited = Signal(str, str)

    def __init__(self) -> None:
        super().__init__()
        self._fields = {
            field.field: field
            for field in (
                TextField("name", "Name of the specimen"),
                TextField("density", "Density in kg/m³", "Mass density, kg/m³; waves need it."),
                TextField("temperature", "Temperature in °C", "Temperature of the data in °C."),
                TextField("source", "Source", "Where the constants come from."),
            )
        }
        self._class = Choice(
            "crystal_class",
            "Symmetry and number of independent constants",
            "The symmetry the constants claim: it decides which cells follow from others.",
        )
        self._axis = Choice(
            "unique_axis", "Unique axis", "The crystal axis of the two-fold symmetry."
        )
        self._crystal = Choice("chosen", "Crystal of", "Whose crystal the ledger shows.")
        self._crystal_label = label("Crystal of", "secondary")
        self._axis_label = label("Unique axis", "secondary")
        self._class_note = label(role="secondary", wrap=True)
        self._notes = NotesField("notes", "Notes")
        self._notes.setToolTip("Anything else worth knowing; kept in the file.")
        self._notes_part = Expander("Notes", self._notes)
        self._lay_out()
        self._connect()

    def _lay_out(self) -> None:
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(8)
        grid.setVerticalSpacing(4)
        grid.setColumnStretch(1, 1)
        name, source = self._fields["name"], self._fields["source"]
        rows: tuple[tuple[QLabel, QWidget | QHBoxLayout, QLabel | None], ...] = (
            (self._crystal_label, self._crystal, None),
            (label("Name", "secondary"), name, name.error_label),
            (label("Density", "secondary"), self._density_row(), None),
            (label("Symmetry", "secondary"), self._class, self._class.error_label),
            (self._axis_label, self._axis, self._axis.error_label),
            (label("Source", "secondary"), source, source.error_label),
        )
        for words, control, error in rows:
            row = grid.rowCount()
            grid.addWidget(words, row, 0)
            if isinstance(control, QWidget):
                grid.addWidget(control, row, 1)
                words.setBuddy(control)
            else:
                grid.addLayout(control, row, 1)
                words.setBuddy(self._fields["density"])
                for key in ("density", "temperature"):
                    grid.addWidget(self._fields[key].error_label, grid.rowCount(), 0, 1, 2)
            if error is not None:
                grid.addWidget(error, grid.rowCount(), 0, 1, 2)
            if control is self._class:
                grid.addWidget(self._class_note, grid.rowCount(), 1)
        grid.addWidget(self._notes_part, grid.rowCount(), 0, 1, 2)
        self._class_note.hide()

    def _density_row(self) -> QHBoxLayout:
        row = QHBoxLayout()
        row.setSpacing(6)
        for name, unit in (("density", "kg/m³"), ("temperature", "°C")):
            field = self._fields[name]
            field.setMinimumWidth(48)
            field.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
            row.addWidget(field, 3 if name == "density" else 2)
            row.addWidget(label(unit, "secondary"))
            if name == "density":
                row.addWidget(label("at", "secondary"))
        return row

    def _connect(self) -> None:
        for field in self._fields.values():
            field.finished.connect(self.edited)
        self._notes.finished.connect(self.edited)
        self._class.chosen.connect(self.edited)
        self._axis.chosen.connect(self.edited)
        self._crystal.chosen.connect(self.edited)

    def show_view(self, view: SpecimenView) -> None:
        """Show what is known."""
        for name in ("name", "density", "temperature", "source"):
            self._fields[name].show_text(str(getattr(view, name)))
        self._class.show_choices(view.classes, view.crystal_class)
        self._axis.show_choices(UNIQUE_AXES, view.unique_axis)
        for widget in (self._axis, self._axis_label):
            widget.setVisible(view.has_unique_axis)
        set_or_hide(self._class_note, view.class_note)
        self._notes.show_text(view.notes)
        self._notes_part.set_aside(view.notes)
        has_two = len(view.choices) > 1
        pairs = tuple((side, f"{side} · {name}") for side, name in view.choices)
        self._crystal.show_choices(pairs, view.chosen)
        self._crystal.setVisible(has_two)
        self._crystal_label.setVisible(has_two)

    def show_error(self, field: str, message: str) -> None:
        """Mark a field as wrong and say why."""
        self._marked(field).mark_error(message)

    def clear_error(self, field: str) -> None:
        """Take the mark off a field."""
        self._marked(field).clear_error()

    def _marked(self, field: str) -> TextField | Choice:
        choices = {"crystal_class": self._class, "unique_axis": self._axis}
        return choices[field] if field in choices else self._fields[field]
