"""How near a table is to every crystal class, and the actions on the class that is chosen."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QAbstractItemView, QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from gui.viewdata import ClassRow, TrustView
from gui.widgets.forms import label, set_or_hide
from gui.widgets.text_table import Column, ColumnKind, Index, Line, TextTable

KINDS: tuple[ColumnKind, ...] = (
    "label", "number", "number", "number", "number", "number", "number", "words",
)  # fmt: skip
ACTIONS = (
    (
        "turn",
        "&Turn to its axes",
        "Write the constants in the axes at which the {0} class fits best, and claim it. The "
        "crystal stays the same.",
    ),
    (
        "both",
        "Turn and make e&xact",
        "Write the constants in the axes at which the {0} class fits best, and replace them by "
        "the nearest ones of that class.",
    ),
    (
        "exact",
        "Make exact as e&ntered",
        "Replace the constants by the nearest ones of the {0} class about the axes as entered.",
    ),
)


class ClassesTable(TextTable):
    """The table of classes, of which one row is chosen; `chosen(row)` tells which."""

    chosen = Signal(int)

    def __init__(self) -> None:
        super().__init__("Crystal classes")
        self.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)

    def currentChanged(self, current: Index, previous: Index) -> None:
        """Tell that another row is chosen."""
        super().currentChanged(current, previous)
        if current.isValid() and current.row() != previous.row():
            self.chosen.emit(current.row())


class ClassPanel(QWidget):
    """The table with its actions.

    Signals
    -------
    asked(str, str)
        "turn", "both" or "exact", and the key of the class.
    """

    asked = Signal(str, str)

    def __init__(self) -> None:
        super().__init__()
        self._rows: tuple[ClassRow, ...] = ()
        self._is_pending = True
        self._suggested = ""
        self.table = ClassesTable()
        self.support = label(role="secondary", wrap=True)
        self.doubt = label(role="doubt", wrap=True)
        self.buttons: dict[str, QPushButton] = {}
        row = QHBoxLayout()
        row.setSpacing(6)
        for action, words, _ in ACTIONS:
            button = QPushButton(words)
            button.setProperty("action", action)
            button.clicked.connect(self._ask)
            self.buttons[action] = button
            row.addWidget(button)
        row.addStretch(1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(5)
        column.addWidget(self.table)
        column.addLayout(row)
        column.addWidget(self.doubt)
        column.addWidget(self.support)
        column.addStretch(1)
        self.support.hide()
        self.doubt.hide()
        self.table.chosen.connect(self._offer)

    @property
    def chosen(self) -> ClassRow | None:
        """The class that the actions are about."""
        number = self.table.currentIndex().row()
        return self._rows[number] if 0 <= number < len(self._rows) else None

    def show_view(self, view: TrustView) -> None:
        """Show the classes, dimmed while they are being searched for anew."""
        before, self._rows, self._is_pending = self.chosen, view.classes, view.pending
        columns = tuple(
            Column(title, kind) for title, kind in zip(view.header, KINDS, strict=True)
        )
        lines = tuple(Line(row.cells, row.full, row.tooltip) for row in view.classes)
        self.table.show_lines(columns, lines, dimmed=view.pending)
        keys = [row.key for row in view.classes]
        wanted = before.key if before is not None else ""
        if not view.pending and view.suggested != self._suggested:
            self._suggested = wanted = view.suggested
        if wanted in keys:
            self.table.selectRow(keys.index(wanted))
        set_or_hide(self.support, view.support)
        self._offer()

    def _offer(self, _row: int = 0) -> None:
        """Offer what makes sense for the chosen class."""
        row = self.chosen
        is_ready = row is not None and not self._is_pending
        for action, _, tooltip in ACTIONS:
            button = self.buttons[action]
            allowed = row is not None and (row.can_exact if action == "exact" else row.can_turn)
            button.setEnabled(is_ready and allowed)
            words = tooltip.format(row.cells[0] if row is not None else "chosen")
            change = row.change if row is not None and action == "exact" else ""
            button.setToolTip(f"{words} {change}".rstrip())
        doubt = row.doubt if row is not None and is_ready and row.can_exact else ""
        set_or_hide(self.doubt, f"▲ {doubt}" if doubt else "")

    def _ask(self) -> None:
        row, action = self.chosen, self.sender().property("action")
        if row is not None:
            self.asked.emit(str(action), row.key)
