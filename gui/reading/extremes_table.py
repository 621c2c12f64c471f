"""The least and greatest of every quantity over all directions, with links to the places."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QPushButton, QVBoxLayout, QWidget

from gui.forms import label, set_or_hide
from gui.reading.text_table import Column, Line, TextTable
from gui.viewdata import ExtremeRow, ExtremesView, Vector3

COLUMNS = (
    Column("", "label"),
    Column("", "number"),
    Column("", "words"),
    Column("", "link"),
)
LINK = 3
GO = "go"


class GoLink(QPushButton):
    """The word "go" at the end of a line; `wanted(direction)` comes on a click."""

    wanted = Signal(object)

    def __init__(self) -> None:
        super().__init__(GO)
        self.direction: Vector3 | None = None
        self.setProperty("role", "link")
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.clicked.connect(self._go)

    def lead_to(self, row: ExtremeRow, is_ready: bool) -> None:
        """Lead to the direction of an extreme."""
        self.direction = row.direction
        self.setEnabled(is_ready)
        self.setAccessibleName(f"Put the pin where the {row.label} is")
        self.setToolTip(f"Put the pin there: {row.where}")

    def _go(self) -> None:
        if self.direction is not None:
            self.wanted.emit(self.direction)


class ExtremesTable(QWidget):
    """One line an extreme: value, place, and a link that moves the pin there."""

    go = Signal(object)

    def __init__(self) -> None:
        super().__init__()
        self._directions: tuple[Vector3 | None, ...] = ()
        self._notice = label(role="secondary", wrap=True)
        self.table = TextTable("Extremes over all directions")
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        column.addWidget(self.table)
        column.addWidget(self._notice)
        self._notice.hide()
        self.table.opened.connect(self._open)

    def show_view(self, view: ExtremesView) -> None:
        """Show the extremes, dimmed while they are still being computed."""
        self._directions = tuple(row.direction for row in view.rows)
        lines = tuple(
            Line(
                (row.label, row.value, row.where, GO if row.direction else ""),
                (row.label, row.full, row.where),
                row.tooltip,
            )
            for row in view.rows
        )
        self.table.show_lines(COLUMNS, lines, dimmed=view.pending)
        for number, row in enumerate(view.rows):
            self._link(number, row, not view.pending)
        self.table.setAccessibleName(view.title)
        set_or_hide(self._notice, view.notice)

    def link(self, row: int) -> GoLink | None:
        """Return the link at the end of a line, if it leads anywhere."""
        link = self.table.indexWidget(self.table.lines.index(row, LINK))
        return link if isinstance(link, GoLink) else None

    def _link(self, number: int, row: ExtremeRow, is_ready: bool) -> None:
        """Keep, make or take away the link of a line."""
        place = self.table.lines.index(number, LINK)
        link = self.link(number)
        if row.direction is None:
            if link is not None:
                self.table.setIndexWidget(place, None)  # type: ignore[arg-type]
            return
        if link is None:
            link = GoLink()
            link.wanted.connect(self.go)
            self.table.setIndexWidget(place, link)
        link.lead_to(row, is_ready)

    def _open(self, row: int) -> None:
        direction = self._directions[row]
        if direction is not None:
            self.go.emit(direction)
