"""The numbers at the pin: one line a quantity, for A, for B and their difference."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QVBoxLayout, QWidget

from gui.viewdata import ReadingRow, ReadingView
from gui.widgets.forms import ElidedLabel, TextField, label, set_or_hide
from gui.widgets.text_table import Column, Line, TextTable

BOTH = (
    Column("", "label"),
    Column("A", "number", "a"),
    Column("B", "number", "b"),
    Column("B \N{MINUS SIGN} A", "number"),
    Column("", "unit"),
)
ONE = {
    side: (Column("", "label"), Column(side, "number", side.lower()), Column("", "unit"))
    for side in "AB"
}


def _line(row: ReadingRow, has_b: bool) -> Line:
    unit = f"Unit: {row.unit}" if row.unit else ""
    tooltip = "\n".join(part for part in (row.tooltip, unit) if part)
    if has_b:
        return Line(
            (row.label, row.a, row.b, row.difference, row.unit),
            (row.label, *row.full, row.unit),
            tooltip,
        )
    return Line((row.label, row.a, row.unit), (row.label, row.full[0], row.unit), tooltip)


class NearLine(QWidget):
    """The low-index direction that the pin is near in one part."""

    def __init__(self, side: str) -> None:
        super().__init__()
        self._text = ElidedLabel(role="secondary")
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(6)
        row.addWidget(label(side, f"side_{side.lower()}"))
        row.addWidget(self._text, 1)

    def show_text(self, text: str) -> None:
        """Show the words, or nothing at all."""
        self._text.setText(text)
        self.setVisible(bool(text))


class PinTable(QWidget):
    """Where the pin is, a field to say where it shall be, and the table."""

    direction_typed = Signal(str)
    quantity_chosen = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._where_text = ""
        self._keys: tuple[str, ...] = ()
        self._where = ElidedLabel()
        self._near = {side: NearLine(side) for side in "AB"}
        self.direction = TextField(
            "direction",
            "Direction of the pin",
            "A direction for the pin, then Enter: [1 0 2] along a lattice row, (1 0 2) normal "
            "to a plane, or three components along the crystal axes.",
        )
        self.direction.setPlaceholderText("go to  [1 0 2]  (1 0 2)  0.3 0.4 0.87")
        self.table = TextTable("Quantities at the pin", is_small=True)
        self._notice = label(role="secondary", wrap=True)
        self._notice.hide()
        self._lay_out()
        self.direction.finished.connect(self._go)
        self.table.opened.connect(self._choose)

    def _lay_out(self) -> None:
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        column.addWidget(self._where)
        for side in "AB":
            column.addWidget(self._near[side])
        column.addWidget(self.direction)
        column.addWidget(self.direction.error_label)
        column.addSpacing(2)
        column.addWidget(self.table)
        column.addWidget(self._notice)

    def show_view(self, view: ReadingView) -> None:
        """Show the numbers; a typed direction goes when the pin has moved."""
        if view.where != self._where_text:
            self._where_text = view.where
            self.direction.clear_error()
            self.direction.show_text("")
        self._where.setText(view.where)
        for side, text in (("A", view.near_a), ("B", view.near_b)):
            self._near[side].show_text(text if view.has_b or view.side == side else "")
        lines: list[Line] = []
        keys: list[str] = []
        group = ""
        for row in view.rows:
            if row.group and row.group != group:
                lines.append(Line((row.group,), is_heading=True))
                keys.append("")
            group = row.group
            lines.append(_line(row, view.has_b))
            keys.append(row.key)
        self._keys = tuple(keys)
        self.table.about = view.about
        self.table.show_lines(BOTH if view.has_b else ONE[view.side], tuple(lines))
        set_or_hide(self._notice, view.notice)

    def show_error(self, field: str, message: str) -> None:
        """Mark the direction as wrong and say why."""
        self.direction.mark_error(message)

    def clear_error(self, field: str) -> None:
        """Take the mark off the direction."""
        self.direction.clear_error()

    def _go(self, field: str, text: str) -> None:
        if text.strip():
            self.direction_typed.emit(text.strip())

    def _choose(self, row: int) -> None:
        if self._keys[row]:
            self.quantity_chosen.emit(self._keys[row])
