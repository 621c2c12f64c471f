"""Which blank to cut next, and which to cut when nothing has been measured."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QGridLayout,
    QHBoxLayout,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from gui.speeds.result_panel import SentenceList
from gui.speeds.viewdata import BlanksView, PlanView
from gui.widgets.forms import Choice, ElidedLabel, TextField, label, set_or_hide
from gui.widgets.panel import Section


class _BlankLine:
    """The four widgets of one suggested blank."""

    def __init__(self, grid: QGridLayout, row: int) -> None:
        self.number = label(role="side_a")
        self.where = ElidedLabel()
        self.gain = label()
        self.gain.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.add = QPushButton("plan")
        self.add.setProperty("role", "link")
        self.add.setCursor(Qt.CursorShape.PointingHandCursor)
        for column, widget in enumerate((self.number, self.where, self.gain, self.add)):
            grid.addWidget(widget, row, column)

    def set_visible(self, is_used: bool) -> None:
        """Show or hide all four."""
        for widget in (self.number, self.where, self.gain, self.add):
            widget.setVisible(is_used)

    def set_enabled(self, is_ready: bool) -> None:
        """Grey all four while they are out of date."""
        for widget in (self.number, self.where, self.gain, self.add):
            widget.setEnabled(is_ready)


class BlanksPanel(QWidget):
    """The lower part of the right column.

    Signals
    -------
    criterion_chosen(str field, str key)
        The field is "criterion".
    blank_wanted(str direction)
        Rows for this blank, as text of the table.
    plan_asked(str sigma, str largest)
        Relative σ of a speed in percent, and the largest σ wanted of a constant in GPa or "".
    plan_wanted()
        Rows for all blanks of the plan.
    """

    criterion_chosen = Signal(str, str)
    blank_wanted = Signal(str)
    plan_asked = Signal(str, str)
    plan_wanted = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.criterion = Choice(
            "criterion", "What the next blank shall make more certain",
            "What the suggestions are ranked by.",
        )  # fmt: skip
        self.sigma = TextField(
            "sigma", "Standard uncertainty of a speed in percent",
            "How well a speed will be measured, percent.",
        )  # fmt: skip
        self.largest = TextField(
            "largest", "Largest standard uncertainty wanted, GPa",
            "Blanks are added until no constant is less certain; empty for the fewest blanks"
            " that see them all.",
        )  # fmt: skip
        self.ask = QPushButton("Plan blanks")
        self.place = QPushButton("Put them into the table")
        self.plan = SentenceList()
        self._about = label(role="secondary", wrap=True)
        self._notice = label(role="secondary", wrap=True)
        self._plan_notice = label(role="error", wrap=True)
        self._lines: list[_BlankLine] = []
        self._directions: tuple[str, ...] = ()
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(2)
        column.addWidget(Section("Next blank", self._next_part(), "three speeds along it"))
        column.addWidget(
            Section("Plan from nothing", self._plan_part(), "the fewest blanks", is_open=False)
        )
        self._connect()

    def _next_part(self) -> QWidget:
        part = QWidget()
        column = QVBoxLayout(part)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(4)
        self._grid = QGridLayout()
        self._grid.setHorizontalSpacing(8)
        self._grid.setVerticalSpacing(1)
        self._grid.setColumnStretch(1, 1)
        column.addWidget(self.criterion)
        column.addWidget(self._notice)
        column.addLayout(self._grid)
        self._notice.hide()
        return part

    def _plan_part(self) -> QWidget:
        part = QWidget()
        column = QVBoxLayout(part)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(5)
        column.addWidget(self._about)
        row = QHBoxLayout()
        row.setSpacing(5)
        for words, field, unit, width in (
            ("speeds ±", self.sigma, "%", 46), ("each constant ±", self.largest, "GPa", 46),
        ):  # fmt: skip
            field.setFixedWidth(width)
            row.addWidget(label(words, "secondary"))
            row.addWidget(field)
            row.addWidget(label(unit, "secondary"))
        row.addStretch(1)
        column.addLayout(row)
        for field in (self.sigma, self.largest):
            column.addWidget(field.error_label)
        buttons = QHBoxLayout()
        buttons.addWidget(self.ask)
        buttons.addWidget(self.place)
        buttons.addStretch(1)
        for widget in (self.plan, self._plan_notice):
            column.addWidget(widget)
        column.addLayout(buttons)
        self.sigma.show_text("0.1")
        self.largest.setPlaceholderText("any")
        self.ask.setToolTip("Find the smallest set of blanks that determines every constant")
        self.place.setToolTip("Add three rows, one a wave, for each blank of the plan")
        self._plan_notice.hide()
        self.place.hide()
        return part

    def _connect(self) -> None:
        self.criterion.chosen.connect(self.criterion_chosen)
        self.ask.clicked.connect(self._ask)
        self.place.clicked.connect(self.plan_wanted)

    # ------------------------------------------------------------ showing
    def show_blanks(self, view: BlanksView) -> None:
        """Show the suggestions, greyed while better ones are being found."""
        self.criterion.show_choices(view.criteria, view.criterion)
        self._directions = tuple(row.direction for row in view.rows)
        while len(self._lines) < len(view.rows):
            line = _BlankLine(self._grid, len(self._lines))
            line.add.clicked.connect(partial(self._want, len(self._lines)))
            self._lines.append(line)
        for number, line in enumerate(self._lines):
            line.set_visible(number < len(view.rows))
            if number >= len(view.rows):
                continue
            row = view.rows[number]
            line.number.setText(row.number)
            line.where.setText(row.where)
            line.gain.setText(row.gain)
            line.add.setAccessibleName(f"Plan blank {row.number} along {row.where}")
            line.add.setToolTip("Add three rows, one a wave, along this direction")
            for widget in (line.where, line.gain):
                widget.setToolTip(row.tooltip)
            line.set_enabled(not view.pending)
        set_or_hide(self._notice, view.notice)

    def show_plan(self, view: PlanView) -> None:
        """Show what a plan would start from, and the plan once there is one."""
        set_or_hide(self._about, view.about)
        self.plan.show_sentences(view.found)
        self.place.setVisible(view.can_place)
        set_or_hide(self._plan_notice, view.notice)

    def show_error(self, field: str, message: str) -> None:
        """Mark a field of the plan as wrong."""
        {"sigma": self.sigma, "largest": self.largest}[field].mark_error(message)

    def _ask(self) -> None:
        for field in (self.sigma, self.largest):
            field.clear_error()
        self.plan_asked.emit(self.sigma.text(), self.largest.text())

    def _want(self, number: int, _checked: bool = False) -> None:
        self.blank_wanted.emit(self._directions[number])
