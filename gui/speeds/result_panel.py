"""What a fit says: the constants with their uncertainties, and how far to trust them."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from gui.speeds.result_grid import ResultGrid
from gui.speeds.viewdata import Fact, ResultView
from gui.widgets.forms import label, set_or_hide
from gui.widgets.panel import Section

_ROLES = {"ink": "", "doubt": "doubt", "alert": "error"}  # of the style sheet


class FactList(QWidget):
    """Labels with their values, one line each; grey while they are out of date."""

    def __init__(self) -> None:
        super().__init__()
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 2, 0, 0)
        self._grid.setHorizontalSpacing(10)
        self._grid.setVerticalSpacing(3)
        self._grid.setColumnStretch(1, 1)
        self._lines: list[tuple[QLabel, QLabel]] = []

    def show_facts(self, facts: tuple[Fact, ...], pending: bool) -> None:
        """Show these lines and no others."""
        while len(self._lines) < len(facts):
            row = len(self._lines)
            pair = (label(role="secondary"), label(wrap=True))
            for column, made in enumerate(pair):
                made.setAlignment(Qt.AlignmentFlag.AlignTop)
                self._grid.addWidget(made, row, column)
            self._lines.append(pair)
        for number, (name, value) in enumerate(self._lines):
            is_used = number < len(facts)
            name.setVisible(is_used)
            value.setVisible(is_used)
            if is_used:
                self._show(name, value, facts[number], pending)

    def texts(self) -> list[tuple[str, str]]:
        """Return what the lines say."""
        return [(name.text(), value.text()) for name, value in self._lines
                if not name.isHidden()]  # fmt: skip

    @staticmethod
    def _show(name: QLabel, value: QLabel, fact: Fact, pending: bool) -> None:
        name.setText(fact.label)
        value.setText(fact.text)
        for each in (name, value):
            each.setToolTip(fact.tooltip)
        value.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        role = "faint" if pending else _ROLES[fact.role]
        if value.property("role") != role:
            value.setProperty("role", role)
            value.style().unpolish(value)
            value.style().polish(value)


class SentenceList(QWidget):
    """Sentences one below the other, each free to take several lines."""

    def __init__(self, role: str = "") -> None:
        super().__init__()
        self._role = role
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(4)
        self._labels: list[QLabel] = []

    def show_sentences(self, sentences: tuple[str, ...]) -> None:
        """Show these sentences and no others."""
        while len(self._labels) < len(sentences):
            made = label(role=self._role, wrap=True)
            made.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
            self._labels.append(made)
            self._column.addWidget(made)
        for number, made in enumerate(self._labels):
            set_or_hide(made, sentences[number] if number < len(sentences) else "")

    def texts(self) -> list[str]:
        """Return the sentences."""
        return [made.text() for made in self._labels if made.text()]


class UnseenQuestion(QWidget):
    """Asks in place about constants that nobody measured; `agreed()` is the answer yes."""

    agreed = Signal()

    def __init__(self) -> None:
        super().__init__()
        self._words = label(role="doubt", wrap=True)
        self.yes = QPushButton("Use with large uncertainties")
        self.no = QPushButton("Cancel")
        buttons = QHBoxLayout()
        for button in (self.yes, self.no):
            buttons.addWidget(button)
            button.clicked.connect(self.hide)
        self.yes.clicked.connect(self.agreed)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(6)
        column.addWidget(self._words)
        column.addLayout(buttons)
        self.hide()

    @property
    def has_words(self) -> bool:
        """Whether there is something to ask."""
        return bool(self._words.text())

    def show_words(self, words: str) -> None:
        """Take the question, which is asked later; another one takes back what was asked."""
        if words != self._words.text():
            self._words.setText(words)
            self.hide()

    def ask(self) -> None:
        """Ask."""
        self.show()
        self.yes.setFocus()


class ResultPanel(QWidget):
    """The upper part of the right column: `use_wanted()` hands the constants to the ledger."""

    use_wanted = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.grid = ResultGrid()
        self.facts = FactList()
        self.unseen = SentenceList()
        self.notes = SentenceList("secondary")
        self.use = QPushButton("Use these constants")
        self.use.setToolTip(
            "Give the ledger these constants with their covariance, the density and the"
            " symmetry they rest on, and go back to the bench. Undo takes it back."
        )
        self.question = UnseenQuestion()
        self.question.agreed.connect(self.use_wanted)
        self.use.clicked.connect(self._use)
        self._notice = label(role="secondary", wrap=True)
        self._unseen_part = Section("Not seen", self.unseen, "kept as at the start of the fit")
        self._notes_part = Section("Remarks", self.notes)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(2)
        self._constants_part = Section(
            "Constants", self._body(), "GPa, crystal axes", ruled=False
        )
        for part in (self._constants_part, self._unseen_part, self._notes_part):
            column.addWidget(part)

    def _body(self) -> QWidget:
        body = QWidget()
        column = QVBoxLayout(body)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(6)
        for part in (self._notice, self.grid, self.facts, self.use, self.question):
            column.addWidget(part)
        return body

    def show_view(self, view: ResultView) -> None:
        """Show a fit, dimmed while a newer one is being found."""
        set_or_hide(self._notice, view.notice)
        has_result = view.constants is not None
        for part in (self.grid, self.facts, self.use):
            part.setVisible(has_result)
        if view.constants is not None:
            self.grid.show_view(view.constants, view.pending)
        self.facts.show_facts(view.facts, view.pending)
        self.unseen.show_sentences(_gathered(view.unseen))
        self.notes.show_sentences(view.notes)
        self._unseen_part.setVisible(bool(view.unseen))
        self._notes_part.setVisible(bool(view.notes))
        self.use.setEnabled(view.can_use and not view.pending)
        self.question.show_words(view.question if self.use.isEnabled() else "")

    def _use(self) -> None:
        """Hand the constants over, or first ask about those that nobody measured."""
        if self.question.has_words:
            self.question.ask()
        else:
            self.use_wanted.emit()


def _gathered(combinations: tuple[str, ...]) -> tuple[str, ...]:
    """Return combinations one a line, those of a single constant together in the first."""
    single = [text for text in combinations if " " not in text]
    others = tuple(text for text in combinations if " " in text)
    return ((", ".join(single),) if single else ()) + others
