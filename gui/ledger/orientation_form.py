"""The forms of the two orientations, and the buttons between them."""

from __future__ import annotations

import re

from PySide6.QtCore import Signal
from PySide6.QtWidgets import (
    QGridLayout,
    QHBoxLayout,
    QLineEdit,
    QPushButton,
    QSizePolicy,
    QVBoxLayout,
    QWidget,
)

from gui.viewdata import OrientationView
from gui.widgets.forms import Choice, DragField, ElidedLabel, TextField, label, set_or_hide
from gui.widgets.panel import Expander

AXES = ("X", "Y", "Z")
WORDS_WIDTH = 132  # of the ways in the list of the same, pixels
TEXT_TIP = (
    "How the part's axes X, Y, Z lie in the crystal: Z=(1 1 0) X=[0 0 1], bunge 10 20 30, "
    "(YXl) 35.25, axis [1 1 1] 15, matrix and nine numbers. Of a rotated cut part Z is the "
    "plate's thickness and part X its length."
)
WORD_SPACE = "\N{NO-BREAK SPACE}"


def _kept_together(text: str) -> str:
    """Return a text in which no line breaks within indices."""
    return re.sub(
        r"\[[^]]*\]|\([^)]*\)", lambda found: found[0].replace(" ", WORD_SPACE), text
    )


class SaidOtherwise(QWidget):
    """The same orientation in the other ways, to be read and copied."""

    def __init__(self) -> None:
        super().__init__()
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(8)
        self._grid.setVerticalSpacing(2)
        self._grid.setColumnStretch(1, 1)
        self._lines: list[tuple[ElidedLabel, QLineEdit]] = []

    def show_pairs(self, pairs: tuple[tuple[str, str], ...]) -> None:
        """Show words and texts, one pair a line."""
        while len(self._lines) < len(pairs):
            self._add_line()
        for number, (words, line) in enumerate(self._lines):
            is_used = number < len(pairs)
            words.setVisible(is_used)
            line.setVisible(is_used)
            if is_used:
                said, text = pairs[number]
                words.setText(said)
                line.setText(text)
                line.setCursorPosition(0)
                line.setToolTip(text)
                line.setAccessibleName(said)

    def _add_line(self) -> None:
        words = ElidedLabel(role="secondary")
        words.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Preferred)
        words.setFixedWidth(WORDS_WIDTH)
        line = QLineEdit()
        line.setReadOnly(True)
        row = len(self._lines)
        self._grid.addWidget(words, row, 0)
        self._grid.addWidget(line, row, 1)
        self._lines.append((words, line))


class OrientationForm(QWidget):
    """How one part is cut: said in words, turned further by small angles."""

    edited = Signal(str, str)
    way_chosen = Signal(str)
    turn_edited = Signal(int, float)
    turn_finished = Signal()

    def __init__(self, side: str) -> None:
        super().__init__()
        self.side = side
        self._way = Choice(
            "way", f"How orientation {side} is said", "The way of saying the orientation."
        )
        self._text = TextField(
            "text", f"Orientation {side}", TEXT_TIP
        )
        self._turns = tuple(
            DragField(
                number,
                axis,
                f"Turn {side} about part {axis}, degrees",
                f"Turn the part further about its own {axis}, in degrees.",
            )
            for number, axis in enumerate(AXES)
        )
        self._axes = label(role="secondary", wrap=True)
        self._note = label(role="secondary", wrap=True)
        self._doubt = label(role="doubt", wrap=True)
        self._otherwise = SaidOtherwise()
        self._lay_out()
        self._connect()

    def _lay_out(self) -> None:
        letter = label(self.side, f"side_{self.side.lower()}")
        letter.setFixedWidth(14)
        first = QHBoxLayout()
        first.setSpacing(6)
        first.addWidget(letter)
        first.addWidget(self._way, 1)
        turns = QHBoxLayout()
        turns.setSpacing(6)
        turns.addWidget(label("turn", "secondary"))
        for field in self._turns:
            turns.addWidget(field, 1)
        turns.addWidget(label("°", "secondary"))
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(4)
        column.addLayout(first)
        column.addWidget(self._text)
        column.addWidget(self._text.error_label)
        column.addWidget(self._doubt)
        column.addLayout(turns)
        for field in self._turns:
            column.addWidget(field.number.error_label)
        column.addWidget(self._axes)
        column.addWidget(self._note)
        column.addWidget(Expander("the same, said otherwise", self._otherwise))
        self._note.hide()
        self._doubt.hide()

    def _connect(self) -> None:
        self._way.chosen.connect(self._choose_way)
        self._text.finished.connect(self.edited)
        for field in self._turns:
            field.changed.connect(self.turn_edited)
            field.settled.connect(self.turn_finished)

    def show_view(self, view: OrientationView) -> None:
        """Show one orientation."""
        self._way.show_choices(view.ways, view.way)
        self._text.show_text(view.text)
        for field, angle in zip(self._turns, view.turn, strict=True):
            field.show_value(angle)
        pieces = [f"{axis} ∥ {where}" for axis, where in zip(AXES, view.axes, strict=True)]
        self._axes.setText("   ".join(piece.replace(" ", WORD_SPACE) for piece in pieces))
        self._otherwise.show_pairs(view.said_otherwise)
        set_or_hide(self._note, view.note)
        set_or_hide(self._doubt, f"▲ {_kept_together(view.doubt)}" if view.doubt else "")

    def show_error(self, field: str, message: str) -> None:
        """Mark the text as wrong and say why."""
        (self._way if field == "way" else self._text).mark_error(message)

    def clear_error(self, field: str) -> None:
        """Take the mark off the text."""
        (self._way if field == "way" else self._text).clear_error()

    def _choose_way(self, field: str, way: str) -> None:
        self.way_chosen.emit(way)


class OrientationButtons(QWidget):
    """Swap the two orientations, or copy one to the other."""

    swap_requested = Signal()
    copy_requested = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(6)
        self.swap = QPushButton("Swap A ↔ B")
        self.swap.setToolTip("Give A the orientation of B, and B that of A.")
        self.to_b = QPushButton("Copy A → B")
        self.to_b.setToolTip("Give B the orientation of A.")
        self.to_a = QPushButton("Copy B → A")
        self.to_a.setToolTip("Give A the orientation of B.")
        for button in (self.swap, self.to_b, self.to_a):
            button.setAccessibleName(button.text())
            row.addWidget(button)
        row.addStretch(1)
        self.swap.clicked.connect(self._swap)
        self.to_b.clicked.connect(self._copy_to_b)
        self.to_a.clicked.connect(self._copy_to_a)

    def _swap(self) -> None:
        self.swap_requested.emit()

    def _copy_to_b(self) -> None:
        self.copy_requested.emit("A")

    def _copy_to_a(self) -> None:
        self.copy_requested.emit("B")
