"""The least and greatest of every quantity over all directions, with links to the places."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QVBoxLayout, QWidget

from gui.reading.link_table import GO, GoLink, Link, LinkTable
from gui.viewdata import ExtremeRow, ExtremesView
from gui.widgets.forms import ElidedLabel, label, set_or_hide
from gui.widgets.text_table import Column, Line

COLUMNS = (
    Column("", "label"),
    Column("", "number"),
    Column("", "words"),
    Column("", "link"),
)


class ExtremesTable(QWidget):
    """One line an extreme: value, place, and a link that moves the pin there."""

    go = Signal(object)

    def __init__(self) -> None:
        super().__init__()
        self._notice = label(role="secondary", wrap=True)
        self._whose = ElidedLabel(role="secondary")
        self._whose.hide()
        self.table = LinkTable("Extremes over all directions")
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        column.addWidget(self._whose)
        column.addWidget(self.table)
        column.addWidget(self._notice)
        self._notice.hide()
        self.table.go.connect(self.go)

    def show_view(self, view: ExtremesView) -> None:
        """Show the extremes, dimmed while they are still being computed."""
        lines = tuple(
            Line(
                (row.label, row.value, row.where, GO if row.direction else ""),
                (row.label, row.full, row.where),
                row.tooltip,
            )
            for row in view.rows
        )
        self.table.show_links(COLUMNS, lines, [_link(row) for row in view.rows], view.pending)
        self.table.setAccessibleName(view.title)
        set_or_hide(self._notice, view.notice)
        self._whose.setText(view.whose)
        self._whose.setVisible(bool(view.whose))

    def link(self, row: int) -> GoLink | None:
        """Return the link at the end of a line, if it leads anywhere."""
        return self.table.link(row)


def _link(row: ExtremeRow) -> Link | None:
    if row.direction is None:
        return None
    name = f"Put the pin where the {row.label} is"
    return Link(row.direction, name, f"Put the pin there: {row.where}")
