"""What an error of cutting does: the range of every quantity within a small cone."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QVBoxLayout, QWidget

from gui.reading.small_table import SmallTable
from gui.viewdata import TableView
from gui.widgets.forms import TextField, label


class CuttingErrorPanel(QWidget):
    """The half-angle of the cone, and the table of what happens within it."""

    edited = Signal(str, str)

    def __init__(self) -> None:
        super().__init__()
        self.field = TextField(
            "cutting_error",
            "Cutting error δ, degrees",
            "How far off the part may be cut, to any side: half-angle of the cone in degrees.",
        )
        self.field.setFixedWidth(64)
        self.field.setAlignment(Qt.AlignmentFlag.AlignRight)
        words = label("within δ = ±", "secondary")
        words.setBuddy(self.field)
        self.table = SmallTable("Ranges within the cutting error")
        row = QHBoxLayout()
        row.setSpacing(3)
        row.addWidget(words)
        row.addWidget(self.field)
        row.addWidget(label("°  of the pin", "secondary"))
        row.addStretch(1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        column.addLayout(row)
        column.addWidget(self.field.error_label)
        column.addWidget(self.table)
        self.field.finished.connect(self.edited)

    def show_view(self, view: TableView) -> None:
        """Show the ranges."""
        self.table.show_view(view)

    def show_half_angle(self, text: str) -> None:
        """Show the half-angle in its field, in degrees."""
        self.field.show_text(text)

    def show_error(self, field: str, message: str) -> None:
        """Mark the half-angle as wrong and say why."""
        self.field.mark_error(message)

    def clear_error(self, field: str) -> None:
        """Take the mark off the half-angle."""
        self.field.clear_error()
