"""The form of the unit cell and of the axes that the constants are written in."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QComboBox,
    QFrame,
    QGridLayout,
    QHBoxLayout,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from gui.viewdata import CellFormView
from gui.widgets.forms import Choice, TextField, label, set_or_hide

LENGTHS = (("a", "a"), ("b", "b"), ("c", "c"))
ANGLES = (
    ("alpha", "α"),
    ("beta", "β"),
    ("gamma", "γ"),
)
QUESTION = (
    "The constants are written along the axes used until now. Turn the numbers, so that they "
    "describe the same crystal along the new axes? Or keep the numbers, and only correct what "
    "the axes are called?"
)


class AxesChoice(Choice):
    """The conventions for the crystal axes; another one may be typed."""

    def __init__(self) -> None:
        super().__init__(
            "axes",
            "Crystal axes",
            "How the Cartesian crystal axes x, y, z follow the cell. Choose a convention or "
            "type two statements: z||[0 0 1], y||(0 1 0)",
        )
        self.setEditable(True)
        self.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        self.setCompleter(None)  # type: ignore[arg-type]
        self._words = ""
        line = self.lineEdit()
        if line is not None:
            line.setAccessibleName("Crystal axes")
            line.editingFinished.connect(self._read)

    def show_axes(self, pairs: tuple[tuple[str, str], ...], axes: str) -> None:
        """Show the conventions and the one that holds, listed or not."""
        self.show_choices(pairs, axes)
        self._words = dict(pairs).get(axes, axes)
        self.setEditText(self._words)
        line = self.lineEdit()
        if line is not None:
            line.setCursorPosition(0)

    def _read(self) -> None:
        text = self.currentText().strip()
        if text in ("", self._words):
            self.setEditText(self._words)
            return
        key = next((key for key, words in self._pairs if text in (key, words)), text)
        if key != self._key:
            self._key = key
            self._words = text
            self.clear_error()
            self.chosen.emit(self.field, key)


class AxesQuestion(QFrame):
    """What to do with the numbers when the axes change, asked in place."""

    answered = Signal(bool)
    withdrawn = Signal()

    def __init__(self) -> None:
        super().__init__()
        turn = QPushButton("&Turn the numbers")
        turn.setToolTip("The crystal stays the same; its constants are rewritten.")
        keep = QPushButton("&Keep the numbers")
        keep.setToolTip("The numbers stay the same; they now mean other axes.")
        leave = QPushButton("Cancel")
        leave.setProperty("role", "link")
        leave.setToolTip("Go back to the axes in use until now.")
        row = QHBoxLayout()
        row.setSpacing(6)
        for button in (turn, keep, leave):
            row.addWidget(button)
        row.addStretch(1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 2, 0, 4)
        column.setSpacing(5)
        column.addWidget(label(QUESTION, wrap=True))
        column.addLayout(row)
        self.first = turn
        turn.clicked.connect(self._turn)
        keep.clicked.connect(self._keep)
        leave.clicked.connect(self.withdrawn)

    def _turn(self) -> None:
        self.answered.emit(True)

    def _keep(self) -> None:
        self.answered.emit(False)


class CellForm(QWidget):
    """Lengths, angles and axes. Changing the axes asks what is to become of the numbers.

    `file_asked()` comes when the cell is to be read from a file.
    """

    edited = Signal(str, str)
    axes_changed = Signal(str, bool)
    file_asked = Signal()

    def __init__(self) -> None:
        super().__init__()
        self._view: CellFormView | None = None
        self._wanted = ""
        self._fields: dict[str, TextField] = {}
        self._axes = AxesChoice()
        self._question = AxesQuestion()
        self._note = label(role="secondary", wrap=True)
        self._file = QPushButton("From a CIF file…")
        self._file.setProperty("role", "link")
        self._file.setToolTip("Read the unit cell of a CIF file")
        self._file.clicked.connect(self.file_asked)
        self._lay_out()
        self._question.hide()
        self._note.hide()
        self._axes.chosen.connect(self._ask)
        self._question.answered.connect(self._answer)
        self._question.withdrawn.connect(self._withdraw)

    def _lay_out(self) -> None:
        grid = QGridLayout()
        grid.setHorizontalSpacing(5)
        grid.setVerticalSpacing(4)
        self._add_row(grid, 0, LENGTHS, "Å", "Length of cell edge {} in Å")
        self._add_row(grid, 1, ANGLES, "°", "Cell angle {} in degrees")
        axes = QHBoxLayout()
        axes.setSpacing(8)
        words = label("Crystal axes", "secondary")
        words.setBuddy(self._axes)
        axes.addWidget(words)
        axes.addWidget(self._axes, 1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(4)
        column.addLayout(grid)
        for field in self._fields.values():
            column.addWidget(field.error_label)
        column.addLayout(axes)
        column.addWidget(self._axes.error_label)
        column.addWidget(self._question)
        column.addWidget(self._note)
        column.addWidget(self._file, 0, Qt.AlignmentFlag.AlignLeft)

    def _add_row(
        self, grid: QGridLayout, row: int, names: tuple[tuple[str, str], ...], unit: str,
        words: str,
    ) -> None:
        for number, (key, symbol) in enumerate(names):
            field = TextField(key, words.format(symbol), words.format(symbol))
            field.setMinimumWidth(56)
            field.finished.connect(self.edited)
            self._fields[key] = field
            grid.addWidget(label(symbol, "secondary"), row, 2 * number)
            grid.addWidget(field, row, 2 * number + 1)
            grid.setColumnStretch(2 * number + 1, 1)
        grid.addWidget(label(unit, "secondary"), row, 6)

    def show_view(self, view: CellFormView) -> None:
        """Show the cell and its axes; a question stands until the axes change."""
        keys = [key for key, _ in LENGTHS + ANGLES]
        for key, text in zip(keys, view.lengths + view.angles, strict=True):
            self._fields[key].show_text(text)
        has_moved = self._view is None or self._view.axes != view.axes
        self._view = view
        if has_moved or not self._wanted:
            self._close_question()
            self._axes.show_axes(view.conventions, view.axes)
        set_or_hide(self._note, view.note)

    def texts(self) -> dict[str, str]:
        """Return the six numbers as they stand in their fields."""
        return {key: field.text() for key, field in self._fields.items()}

    def show_error(self, field: str, message: str) -> None:
        """Mark a field as wrong and say why."""
        self._marked(field).mark_error(message)

    def clear_error(self, field: str) -> None:
        """Take the mark off a field."""
        self._marked(field).clear_error()

    def _marked(self, field: str) -> TextField | Choice:
        return self._axes if field == "axes" else self._fields[field]

    def _ask(self, field: str, axes: str) -> None:
        if self._view is not None and axes == self._view.axes:
            self._withdraw()
            return
        self._wanted = axes
        self._question.show()
        self._question.first.setFocus()

    def _answer(self, re_express: bool) -> None:
        wanted = self._wanted
        self._close_question()
        self.axes_changed.emit(wanted, re_express)

    def _withdraw(self) -> None:
        self._close_question()
        if self._view is not None:
            self._axes.show_axes(self._view.conventions, self._view.axes)

    def _close_question(self) -> None:
        self._wanted = ""
        self._question.hide()
