"""The waves along the pin, what arrives along it as a ray, and where waves are as fast."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import QVBoxLayout, QWidget

from gui.reading.link_table import GO, GoLink, Link, LinkTable
from gui.viewdata import LinkedView, WaveRow, WavesView
from gui.widgets.forms import label, set_or_hide
from gui.widgets.panel import Expander
from gui.widgets.text_table import Column, ColumnKind, Line, TextTable

COLUMNS = (
    Column("", "label"),
    Column("fastest", "number"),
    Column("middle", "number"),
    Column("slowest", "number"),
    Column("", "unit"),
)
ARRIVALS = "Arrivals along the pin taken as a ray"


class LinkedList(QWidget):
    """A list of directions with links, and a sentence under it.

    Signals
    -------
    go(direction)
        A link was followed.
    shown()
        The list has just come into sight: whoever fills it may have spared the work so far.
    """

    go = Signal(object)
    shown = Signal()

    def __init__(self, name: str, kinds: tuple[ColumnKind, ...]) -> None:
        super().__init__()
        self._kinds = kinds
        self._notice = label(role="secondary", wrap=True)
        self._notice.hide()
        self.table = LinkTable(name)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        column.addWidget(self.table)
        column.addWidget(self._notice)
        self.table.go.connect(self.go)

    def show_view(self, view: LinkedView) -> None:
        """Show the list, dimmed while it is still being computed."""
        lines: list[Line] = []
        links: list[Link | None] = []
        for heading, rows in view.groups:
            if heading:
                lines.append(Line((heading,), is_heading=True))
                links.append(None)
            for row in rows:
                link = row.direction and Link(row.direction, row.words, row.words)
                lines.append(Line((*row.cells, GO if link else ""), row.full, row.tooltip))
                links.append(link)
        columns = tuple(
            Column(title, kind) for title, kind in zip(view.header, self._kinds, strict=True)
        )
        self.table.show_links((*columns, Column("", "link")), tuple(lines), links, view.pending)
        self.table.setVisible(bool(lines))
        set_or_hide(self._notice, view.notice)

    def link(self, row: int) -> GoLink | None:
        """Return the link at the end of a line, headings counted, if it leads anywhere."""
        return self.table.link(row)

    def showEvent(self, event: QShowEvent) -> None:
        """Tell that the list can be seen."""
        super().showEvent(event)
        if not event.spontaneous():
            self.shown.emit()


class DegenerateList(LinkedList):
    """The directions in which two waves are as fast."""

    def __init__(self) -> None:
        super().__init__("Degenerate directions", ("label", "number", "number", "words"))


class WavesPanel(QWidget):
    """The three waves side by side, for one side of the bench or for both.

    Signals
    -------
    go(direction)
        A link to a wave normal was followed.
    shown()
        The panel has just come into sight.
    """

    go = Signal(object)
    shown = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.table = TextTable("Waves along the pin", is_small=True)
        self._notes = label(role="secondary", wrap=True)
        self._notes.hide()
        self.arrivals = LinkedList(ARRIVALS, ("label", "number", "number", "number", "number"))
        self.expander = Expander(ARRIVALS, self.arrivals)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        for part in (self.table, self._notes, self.expander):
            column.addWidget(part)
        self.arrivals.go.connect(self.go)

    def show_view(self, view: WavesView) -> None:
        """Show the waves; with both sides each has its heading."""
        lines: list[Line] = []
        notes = [view.notice] if view.notice else []
        for table in view.tables:
            if len(view.tables) > 1:
                lines.append(Line((table.heading,), is_heading=True))
            lines += [_line(row) for row in table.rows]
            prefix = f"{table.side}: " if len(view.tables) > 1 else ""
            notes += [prefix + note for note in table.notes]
        self.table.show_lines(COLUMNS, tuple(lines))
        self.table.setVisible(bool(lines))
        self.expander.setVisible(bool(lines))
        set_or_hide(self._notes, "\n".join(notes))

    def showEvent(self, event: QShowEvent) -> None:
        """Tell that the panel can be seen."""
        super().showEvent(event)
        if not event.spontaneous():
            self.shown.emit()


def _line(row: WaveRow) -> Line:
    return Line(
        (row.label, *row.values, row.unit), (row.label, *row.full, row.unit), row.tooltip
    )
