"""The dialogs that hand over numbers: tables for other programs, and surfaces as meshes."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFontDatabase, QGuiApplication
from PySide6.QtWidgets import (
    QDialog,
    QFormLayout,
    QLineEdit,
    QPlainTextEdit,
    QVBoxLayout,
    QWidget,
)

from core.directional.quantities import QUANTITIES
from core.errors import InputError
from core.files.meshes import LEVELS, MESHES
from core.files.origin import Origin, today
from core.files.tables import OUR_ROWS, ROTATED, directions_csv, section_csv
from core.files.text import write_text
from core.state import BenchState
from core.tensor.notation import parse_rows, rows_text
from gui.figures.controls import (
    ask_target,
    choice_of,
    close_box,
    file_stem,
    key_of,
    number_field,
    push,
    quantity_names,
    remembered_number,
    remembered_text,
    show_key,
    side_names,
)
from gui.figures.figure_dialog import Studio
from gui.widgets.forms import label, put_on_clipboard, set_mark, set_or_hide

_LONGEST_PREVIEW = 6000  # characters


def origin_of(state: BenchState, side: str, has_both: bool = False) -> Origin:
    """Return where the numbers of a side come from, made today."""
    return Origin(state.specimen_of(side), state.orientation_of(side), today(),
                  side if has_both else "")


class TableDialog(QDialog):
    """Chooses a table, shows how its file begins, and saves or copies it.

    Signals
    -------
    saved(path)
        A file has been written.
    """

    saved = Signal(str)

    def __init__(self, studio: Studio, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Save table")
        self._studio = studio
        self._text = ""
        kinds = {key: f"C, S and moduli in part axes: {words}"
                 for key, (words, _, _) in ROTATED.items()}
        kinds |= {"directions": "quantity over a grid of directions (CSV)",
                  "section": "quantity round the section plane (CSV)"}
        self.kind = choice_of(kinds, "Kind of table")
        self.side = choice_of(side_names(studio.state), "Whose")
        self.quantity = choice_of({"all": "all quantities", **quantity_names(studio.state)},
                                  "Quantity")
        self.rows = QLineEdit(rows_text(OUR_ROWS))
        self.rows.setAccessibleName("Order of the rows")
        self.rows.setToolTip("The six rows in the order your program wants them, for example "
                             "11 22 33 12 13 23")
        self.step = number_field("Step of the grid", "°", 0.5, 45.0, 1)
        self.preview = QPlainTextEdit()
        self.preview.setReadOnly(True)
        self.preview.setLineWrapMode(QPlainTextEdit.LineWrapMode.NoWrap)
        self.preview.setFont(QFontDatabase.systemFont(QFontDatabase.SystemFont.FixedFont))
        self.preview.setAccessibleName("How the file begins")
        self.message = label(role="error", wrap=True)
        self._lay_out()
        self._recall()
        self._connect()
        self.show_table()

    def _lay_out(self) -> None:
        form = QFormLayout()
        for words, field in (("Table", self.kind), ("Whose", self.side),
                             ("Order of rows", self.rows), ("Quantity", self.quantity),
                             ("Step", self.step)):
            form.addRow(words, field)
        self._buttons = close_box()
        self.save_button = push(self._buttons, "&Save…", "Choose where the table goes")
        self.copy_button = push(self._buttons, "&Copy", "Put the whole table on the clipboard")
        self.save_button.setDefault(True)
        column = QVBoxLayout(self)
        column.addLayout(form)
        column.addWidget(self.message)
        column.addWidget(self.preview, 1)
        column.addWidget(self._buttons)
        self.resize(860, 620)

    def _recall(self) -> None:
        settings = self._studio.settings
        show_key(self.kind, remembered_text(settings, "table/kind", "page"))
        self.rows.setText(remembered_text(settings, "table/rows", rows_text(OUR_ROWS)))
        self.step.setValue(remembered_number(settings, "table/step", 5.0))
        show_key(self.quantity, self._studio.state.quantity)
        show_key(self.side, self._studio.state.display.layout[0])

    def _connect(self) -> None:
        for box in (self.kind, self.side, self.quantity):
            box.activated.connect(self.show_table)
        self.rows.editingFinished.connect(self.show_table)
        self.step.valueChanged.connect(self.show_table)
        self.save_button.clicked.connect(self.save)
        self.copy_button.clicked.connect(self.copy)
        self._buttons.rejected.connect(self.reject)

    # ------------------------------------------------------------ the table
    def show_table(self, _value: object = None) -> None:
        """Make the table and show how it begins, or say why it cannot be made."""
        kind = key_of(self.kind)
        self.rows.setEnabled(kind in ROTATED)
        self.quantity.setEnabled(kind not in ROTATED)
        self.step.setEnabled(kind == "directions")
        try:
            self._text = self._table(kind)
            problem = ""
        except InputError as error:
            self._text, problem = "", str(error)
        set_or_hide(self.message, problem)
        set_mark(self.rows, bool(problem) and kind in ROTATED)
        cut = len(self._text) > _LONGEST_PREVIEW
        self.preview.setPlainText(self._text[:_LONGEST_PREVIEW] + ("\n…" if cut else ""))
        for button in (self.save_button, self.copy_button):
            button.setEnabled(not problem)

    def _table(self, kind: str) -> str:
        state, sides = self._studio.state, key_of(self.side)
        if kind in ROTATED:
            write: Callable[..., str] = ROTATED[kind][2]
            return write(origin_of(state, sides[0]), parse_rows(self.rows.text()))
        if kind == "directions":
            return directions_csv(origin_of(state, sides[0]), self._keys(), self.step.value())
        origins = [origin_of(state, side, len(sides) > 1) for side in sides]
        key = key_of(self.quantity)
        return section_csv(origins, state.quantity if key == "all" else key, state.section)

    def _keys(self) -> list[str]:
        key = key_of(self.quantity)
        waves = self._studio.state.specimen_of(key_of(self.side)[0]).density is not None
        if key != "all":
            return [key]
        return [name for name, entry in QUANTITIES.items() if waves or not entry.wave]

    # ------------------------------------------------------------ saving
    def save(self) -> None:
        """Ask where the table goes and write it."""
        kind = key_of(self.kind)
        suffix = ROTATED[kind][1] if kind in ROTATED else ".csv"
        stem = file_stem(self._studio.state.specimen.name, kind)
        target = ask_target(self, "Save table", self._studio.settings, stem, suffix, "Table")
        if target is None:
            return
        try:
            write_text(target, self._text)
        except InputError as error:
            set_or_hide(self.message, f"The table was not saved. {error}")
            return
        settings = self._studio.settings
        settings.setValue("table/kind", kind)
        settings.setValue("table/rows", self.rows.text())
        settings.setValue("table/step", self.step.value())
        self.saved.emit(str(target))
        self.accept()

    def copy(self) -> None:
        """Put the whole table on the clipboard."""
        put_on_clipboard(self._text)


class MeshDialog(QDialog):
    """Chooses a surface and saves it as a mesh.

    Signals
    -------
    saved(path)
        A file has been written.
    """

    saved = Signal(str)

    def __init__(self, studio: Studio, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Save mesh")
        self._studio = studio
        sides = {key: key for key in side_names(studio.state) if len(key) == 1}
        self.quantity = choice_of(quantity_names(studio.state), "Quantity")
        self.side = choice_of(sides, "Whose")
        self.level = choice_of({str(level): words for level, words in LEVELS.items()},
                               "Fineness", "Vertices of each sheet")
        self.format = choice_of({suffix: words for suffix, (words, _) in MESHES.items()},
                                "Format")
        self.message = label(role="error", wrap=True)
        self.message.hide()
        self._buttons = close_box()
        self.save_button = push(self._buttons, "&Save…", "Choose where the mesh goes")
        self.save_button.setDefault(True)
        form = QFormLayout(self)
        for words, field in (("Quantity", self.quantity), ("Whose", self.side),
                             ("Fineness", self.level), ("Format", self.format)):
            form.addRow(words, field)
        form.addRow(label("Vertices are in part axes, their distance in the unit of the "
                          "quantity; the value is kept at every vertex.", "secondary", True))
        form.addRow(self.message)
        form.addRow(self._buttons)
        show_key(self.quantity, studio.state.quantity)
        show_key(self.side, studio.state.display.layout[0])
        show_key(self.level, remembered_text(studio.settings, "mesh/level", "5"))
        show_key(self.format, remembered_text(studio.settings, "mesh/format", ".ply"))
        self.save_button.clicked.connect(self.save)
        self._buttons.rejected.connect(self.reject)
        self.setMinimumWidth(440)

    def save(self) -> None:
        """Ask where the mesh goes and write it."""
        suffix, key = key_of(self.format), key_of(self.quantity)
        state, settings = self._studio.state, self._studio.settings
        stem = file_stem(state.specimen.name, key)
        words, write = MESHES[suffix]
        target = ask_target(self, "Save mesh", settings, stem, suffix, words)
        if target is None:
            return
        QGuiApplication.setOverrideCursor(Qt.CursorShape.WaitCursor)
        try:
            origin = origin_of(state, key_of(self.side))
            write_text(target, write(origin, key, int(key_of(self.level))))
        except InputError as error:
            set_or_hide(self.message, f"The mesh was not saved. {error}")
            return
        finally:
            QGuiApplication.restoreOverrideCursor()
        settings.setValue("mesh/level", key_of(self.level))
        settings.setValue("mesh/format", suffix)
        self.saved.emit(str(target))
        self.accept()
