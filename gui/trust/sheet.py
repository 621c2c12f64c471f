"""The sheet under the verdict band that says whether a table can be trusted, and why."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent, QShowEvent
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from gui.trust.class_table import ClassPanel
from gui.trust.kind_table import KindTable
from gui.viewdata import TrustView
from gui.widgets.forms import ElidedLabel, label, set_or_hide
from gui.widgets.frames import scrolled, stacked
from gui.widgets.panel import Section

_MARGINS = (0, 0, 8, 4)
TITLE = "Can this table be trusted?"
WIDTHS = (46, 26, 28)  # shares of the three columns
LEAST_HEIGHT = 180
NO_NOTES = "Nothing about the numbers is odd."


class Lines(QWidget):
    """Sentences below one another, each with a dash in front."""

    def __init__(self) -> None:
        super().__init__()
        self._labels: list[QLabel] = []
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(4)

    @property
    def texts(self) -> tuple[str, ...]:
        """What is shown."""
        return tuple(each.text() for each in self._labels)

    def show_lines(self, lines: tuple[str, ...], empty: str = "") -> None:
        """Show sentences, or one that says there are none."""
        shown = tuple(f"– {line}" for line in lines) or ((empty,) if empty else ())
        if shown == self.texts:
            return
        for old in self._labels:
            self._column.removeWidget(old)
            old.hide()
            old.deleteLater()
        self._labels = [label(text, "" if lines else "secondary", wrap=True) for text in shown]
        for each in self._labels:
            each.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
            self._column.addWidget(each)


class TrustSheet(QFrame):
    """Three columns: symmetry, stability, and notes with uncertainties.

    Signals
    -------
    asked(str, str)
        "turn", "both" or "exact", and the key of a crystal class.
    closed()
        The sheet is to be put away.
    shown()
        The sheet has come into sight.
    """

    asked = Signal(str, str)
    closed = Signal()
    shown = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setProperty("role", "panel")
        self.setMinimumHeight(LEAST_HEIGHT)
        self.setAccessibleName(TITLE)
        self.sentence = ElidedLabel()
        self.classes = ClassPanel()
        self.facts = Lines()
        self.chance = label(role="secondary", wrap=True)
        self.strains = KindTable("Strain spectrum in numbers", "number", "unit", "words")
        self.criteria = KindTable("Stability criteria", "words", "words", "number", "unit")
        self.notes = Lines()
        self.pin = KindTable("Uncertainty at the pin", "label", "number", "number", "words")
        self.draws = label(role="secondary", wrap=True)
        self.shares = KindTable("What the anisotropy is made of", "label", "number", "number")
        self._titles = {
            name: Section(title, part, ruled=is_ruled)
            for name, title, part, is_ruled in (
                ("notes", "Notes", self.notes, False),
                ("pin", "Uncertainty at the pin", stacked(self.pin, self.draws), True),
                ("shares", "What the anisotropy is made of", self.shares, True),
                ("facts", "Verdict", self.facts, False),
                ("strains", "Strain spectrum", stacked(self.chance, self.strains), True),
                ("criteria", "Stability criteria", self.criteria, True),
            )
        }
        self._lay_out()
        self.classes.asked.connect(self.asked)

    def _lay_out(self) -> None:
        self.close_button = QPushButton("Put away")
        self.close_button.setProperty("role", "link")
        self.close_button.setCursor(Qt.CursorShape.PointingHandCursor)
        self.close_button.setToolTip("Put the sheet away (F7, or Escape)")
        self.close_button.clicked.connect(self.closed)
        top = QHBoxLayout()
        top.setSpacing(14)
        top.addWidget(label(TITLE, "heading"))
        top.addWidget(self.sentence, 1)
        top.addWidget(self.close_button)
        body = QHBoxLayout()
        body.setSpacing(10)
        columns = (
            scrolled("Symmetry", self.classes, margins=_MARGINS),
            scrolled(
                "Stability",
                *self._sections("facts", "strains", "criteria"),
                margins=_MARGINS,
            ),
            scrolled("Notes", *self._sections("notes", "pin", "shares"), margins=_MARGINS),
        )
        for area, share in zip(columns, WIDTHS, strict=True):
            body.addWidget(area, share)
        column = QVBoxLayout(self)
        column.setContentsMargins(14, 8, 8, 6)
        column.setSpacing(6)
        column.addLayout(top)
        column.addLayout(body, 1)

    def _sections(self, *names: str) -> tuple[Section, ...]:
        return tuple(self._titles[name] for name in names)

    def show_view(self, view: TrustView) -> None:
        """Show what is known of the table."""
        self.sentence.setText(view.sentence)
        self.classes.show_view(view)
        self.facts.show_lines(view.facts)
        set_or_hide(self.chance, view.chance)
        self.strains.show_view(view.strains)
        self.criteria.show_view(view.criteria)
        self.notes.show_lines(view.notes, "" if view.pending else NO_NOTES)
        self.pin.show_view(view.pin)
        set_or_hide(self.draws, view.draws)
        self.shares.show_view(view.shares)
        for name in ("criteria", "pin"):
            self._titles[name].button.setText(getattr(view, name).title)

    def showEvent(self, event: QShowEvent) -> None:
        """Ask to be filled."""
        super().showEvent(event)
        if not event.spontaneous():
            self.shown.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Put the sheet away with Escape."""
        if event.key() == Qt.Key.Key_Escape:
            self.closed.emit()
        else:
            super().keyPressEvent(event)
