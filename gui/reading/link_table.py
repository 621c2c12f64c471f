"""A table whose lines lead somewhere: each may end in a link that moves the pin."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QPushButton, QWidget

from gui.viewdata import Vector3
from gui.widgets.text_table import Column, Line, TextTable

GO = "go"


@dataclass(frozen=True)
class Link:
    """Where a line leads, what to call the link, and its tooltip."""

    direction: Vector3
    name: str
    tooltip: str


class GoLink(QPushButton):
    """The word "go" at the end of a line; `wanted(direction)` comes on a click."""

    wanted = Signal(object)

    def __init__(self) -> None:
        super().__init__(GO)
        self._link: Link | None = None
        self.setProperty("role", "link")
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.clicked.connect(self._go)

    def lead_to(self, link: Link, is_ready: bool) -> None:
        """Lead to a place, at once or only when it is certain."""
        self._link = link
        self.setEnabled(is_ready)
        self.setAccessibleName(link.name)
        self.setToolTip(link.tooltip)

    def _go(self) -> None:
        if self._link is not None:
            self.wanted.emit(self._link.direction)


class LinkTable(TextTable):
    """The table. `go(direction)` comes on a click on a link, a double click, or Enter."""

    go = Signal(object)

    def __init__(self, name: str) -> None:
        super().__init__(name, is_small=True)
        self._links: tuple[Link | None, ...] = ()
        self.opened.connect(self._follow)

    def show_links(
        self,
        columns: tuple[Column, ...],
        lines: tuple[Line, ...],
        links: Sequence[Link | None],
        pending: bool = False,
    ) -> None:
        """Show lines with their links; dimmed and without effect while they are pending.

        The last column is the links' own.
        """
        self._links = tuple(links)
        self.show_lines(columns, lines, dimmed=pending)
        before = self._buttons()
        for row, link in enumerate(links):
            self._place(row, link, not pending)
        after = self._buttons()
        if after != before:  # new ones would come last in the window
            for first, second in pairwise((self, *after)):
                QWidget.setTabOrder(first, second)

    def _buttons(self) -> list[QWidget]:
        """Return the links that lead anywhere, from the top."""
        found = (self.link(row) for row in range(len(self._links)))
        return [button for button in found if button is not None]

    def link(self, row: int) -> GoLink | None:
        """Return the link at the end of a line, if it leads anywhere."""
        found = self.indexWidget(self.lines.index(row, self.lines.columnCount() - 1))
        return found if isinstance(found, GoLink) else None

    def _place(self, row: int, link: Link | None, is_ready: bool) -> None:
        """Keep, make or take away the link of a line."""
        button = self.link(row)
        place = self.lines.index(row, self.lines.columnCount() - 1)
        if link is None:
            if button is not None:
                self.setIndexWidget(place, None)  # type: ignore[arg-type]
            return
        if button is None:
            button = GoLink()
            button.wanted.connect(self.go)
            self.setIndexWidget(place, button)
        button.lead_to(link, is_ready)

    def _follow(self, row: int) -> None:
        link = self._links[row]
        if link is not None:
            self.go.emit(link.direction)
