"""The dialog that shows the cell of a CIF file and asks how the crystal axes follow it."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtGui import QIcon
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QGridLayout,
    QHBoxLayout,
    QVBoxLayout,
    QWidget,
)

from gui.viewdata import CellFileView
from gui.widgets.forms import Choice, label, set_or_hide

QUESTION = (
    "The constants stay as they are. How do the axes x, y, z in which they are written follow "
    "this cell?"
)


class CellDialog(QDialog):
    """The six numbers, what is odd about them, and the question about the axes.

    Signals
    -------
    axes_chosen(str)
    """

    axes_chosen = Signal(str)

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self.setWindowTitle("Unit cell from a CIF file")
        self.setModal(True)
        self.title = label(role="heading", wrap=True)
        self.values = [label() for _ in range(6)]
        self.notes = label(wrap=True)
        self.error = label(role="error", wrap=True)
        self.axes = Choice("axes", "Crystal axes in this cell")
        self.axes.setMinimumContentsLength(30)
        self.axes.chosen.connect(self._choose)
        buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel
        )
        self.use = buttons.button(QDialogButtonBox.StandardButton.Ok)
        self.use.setText("&Use this cell")
        for button in buttons.buttons():
            button.setIcon(QIcon())
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        axes = QHBoxLayout()
        axes.setSpacing(8)
        words = label("Crystal axes", "secondary")
        words.setBuddy(self.axes)
        axes.addWidget(words)
        axes.addWidget(self.axes, 1)
        column = QVBoxLayout(self)
        column.setContentsMargins(16, 14, 16, 12)
        column.setSpacing(10)
        column.addWidget(self.title)
        column.addLayout(self._grid())
        column.addWidget(self.notes)
        column.addWidget(label(QUESTION, wrap=True))
        column.addLayout(axes)
        column.addWidget(self.error)
        column.addWidget(buttons)
        self.setMinimumWidth(460)
        self.error.hide()

    def _grid(self) -> QGridLayout:
        grid = QGridLayout()
        grid.setHorizontalSpacing(8)
        self._names = [label(role="secondary") for _ in self.values]
        for number, (name, value) in enumerate(zip(self._names, self.values, strict=True)):
            row, place = divmod(number, 3)
            grid.addWidget(name, row, 2 * place)
            grid.addWidget(value, row, 2 * place + 1)
            grid.setColumnStretch(2 * place + 1, 1)
        return grid

    def show_view(self, view: CellFileView) -> None:
        """Show a cell."""
        self.title.setText(view.title)
        for name, value, (word, text) in zip(self._names, self.values, view.lines, strict=True):
            name.setText(word)
            value.setText(text)
        set_or_hide(self.notes, "\n".join(f"– {note}" for note in view.notes))
        self.axes.show_choices(view.conventions, view.axes)

    def show_error(self, message: str) -> None:
        """Say why these axes cannot be laid in this cell."""
        set_or_hide(self.error, message)
        self.use.setEnabled(not message)

    def _choose(self, _field: str, axes: str) -> None:
        self.axes_chosen.emit(axes)
