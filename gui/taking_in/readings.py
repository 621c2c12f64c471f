"""How a foreign table was understood: one row a thing, with its reason, open to change."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import (
    QComboBox,
    QFrame,
    QGridLayout,
    QHBoxLayout,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from gui.viewdata import ReadingChoice
from gui.widgets.forms import Choice, current_theme, label

SIDE = 11  # of a mark, pixels
FEW = 3  # choices that fit as buttons beside one another
CHOOSE = "choose …"
SAID = {
    "certain": "The text says so, or nothing else is possible.",
    "guess": "A guess from the numbers: look whether it is right.",
    "question": "This has to be answered before the table can be used.",
}


class MarkSign(QWidget):
    """A disc for what is certain, a ring for a guess, a triangle for an open question."""

    def __init__(self) -> None:
        super().__init__()
        self._mark = "certain"
        self.setFixedSize(SIDE + 4, SIDE + 8)

    def show_mark(self, mark: str) -> None:
        """Show a mark."""
        self._mark = mark
        self.setToolTip(SAID[mark])
        self.setAccessibleName(mark)
        self.update()

    def sizeHint(self) -> QSize:
        """Ask for the mark."""
        return QSize(SIDE + 4, SIDE + 8)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the mark."""
        theme = current_theme()
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        box = QRectF(2, (self.height() - SIDE) / 2, SIDE, SIDE)
        if self._mark == "question":
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(theme.colour("doubt"))
            top = QPointF(box.center().x(), box.top())
            painter.drawPolygon(QPolygonF([top, box.bottomRight(), box.bottomLeft()]))
        elif self._mark == "guess":
            painter.setPen(QPen(theme.colour("secondary"), 1.6))
            painter.drawEllipse(box.adjusted(1, 1, -1, -1))
        else:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(theme.colour("good"))
            painter.drawEllipse(box.adjusted(1, 1, -1, -1))


class FreeChoice(Choice):
    """A choice in which something else may be typed."""

    def __init__(self, field: str, name: str) -> None:
        super().__init__(field, name)
        self.setEditable(True)
        self.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        self.setCompleter(None)  # type: ignore[arg-type]
        line = self.lineEdit()
        if line is not None:
            line.setAccessibleName(name)
            line.editingFinished.connect(self._read)

    def show_choices(self, pairs: tuple[tuple[str, str], ...], key: str) -> None:
        """Show the choices and which of them holds."""
        super().show_choices(pairs, key)
        self.setEditText(dict(pairs).get(key, key))

    def _read(self) -> None:
        text = self.currentText().strip()
        words = dict(self._pairs).get(self._key, self._key)
        if text and text != words:
            self._key = text
            self.chosen.emit(self.field, text)


class ReadingRow(QFrame):
    """One thing: its mark, its name, its value, and the reason below."""

    chosen = Signal(str, str)

    def __init__(self, reading: ReadingChoice) -> None:
        super().__init__()
        self.key = row_key(reading)
        self.field = reading.field
        self.sign = MarkSign()
        self.reason = label(wrap=True)
        self.choice: Choice | None = None
        self.buttons: tuple[QPushButton, ...] = ()
        self.value = label()
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 2, 0, 5)
        grid.setHorizontalSpacing(8)
        grid.setVerticalSpacing(2)
        grid.addWidget(self.sign, 0, 0)
        grid.addWidget(label(reading.label, "secondary"), 0, 1)
        grid.addLayout(self._control(reading), 0, 2)
        grid.addWidget(self.reason, 1, 1, 1, 2)
        grid.setColumnMinimumWidth(1, 150)
        grid.setColumnStretch(2, 1)
        self.show_reading(reading)

    def _control(self, reading: ReadingChoice) -> QHBoxLayout:
        """Return buttons for a question with few answers, a list for many, else the value."""
        row = QHBoxLayout()
        row.setSpacing(5)
        is_question = reading.mark == "question"
        if is_question and len(reading.choices) <= FEW:
            self.buttons = tuple(self._button(key, words) for key, words in reading.choices)
            for button in self.buttons:
                row.addWidget(button)
            row.addStretch(1)
        elif len(reading.choices) > 1 or reading.is_free:
            is_free = reading.is_free and not is_question
            kind = FreeChoice if is_free else Choice
            self.choice = kind(reading.field, f"{reading.label} of the table")
            self.choice.chosen.connect(self.chosen)
            row.addWidget(self.choice, 1)
        else:
            row.addWidget(self.value, 1)
        return row

    def _button(self, key: str, words: str) -> QPushButton:
        button = QPushButton(words)
        button.setProperty("key", key)
        button.clicked.connect(partial(self._answer, key))
        return button

    def _answer(self, key: str, _checked: bool = False) -> None:
        self.chosen.emit(self.field, key)

    def show_reading(self, reading: ReadingChoice) -> None:
        """Show another value of the same thing."""
        self.sign.show_mark(reading.mark)
        self.reason.setText(reading.reason)
        role = "heading" if reading.mark == "question" else "secondary"
        if self.reason.property("role") != role:
            self.reason.setProperty("role", role)
            self.reason.style().unpolish(self.reason)
            self.reason.style().polish(self.reason)
        self.value.setText(dict(reading.choices).get(reading.value, reading.value))
        if self.choice is not None:
            is_question = reading.mark == "question"
            pairs = (("", CHOOSE), *reading.choices) if is_question else reading.choices
            self.choice.show_choices(pairs, "" if is_question else reading.value)


def row_key(reading: ReadingChoice) -> tuple[str, bool, int, bool]:
    """Return what decides which controls a row has."""
    return (reading.field, reading.mark == "question", len(reading.choices), reading.is_free)


class ReadingsForm(QWidget):
    """All rows. `chosen(field, value)` comes when the user decides otherwise."""

    chosen = Signal(str, str)

    def __init__(self) -> None:
        super().__init__()
        self.rows: dict[str, ReadingRow] = {}
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(0)

    def show_readings(self, readings: tuple[ReadingChoice, ...]) -> None:
        """Show what was understood; rows of the same things stay in place."""
        before, self.rows = self.rows, {}
        for place, reading in enumerate(readings):
            row = before.pop(reading.field, None)
            if row is not None and row.key == row_key(reading):
                row.show_reading(reading)
            else:
                self._drop(row)
                row = ReadingRow(reading)
                row.chosen.connect(self.chosen)
            self.rows[reading.field] = row
            self._column.insertWidget(place, row)
        for row in before.values():
            self._drop(row)

    def _drop(self, row: ReadingRow | None) -> None:
        if row is not None:
            self._column.removeWidget(row)
            row.hide()
            row.deleteLater()
