"""A table of the trust sheet, whose columns are told what they hold."""

from __future__ import annotations

from PySide6.QtWidgets import QVBoxLayout, QWidget

from gui.viewdata import TableView
from gui.widgets.forms import label, set_or_hide
from gui.widgets.text_table import Column, ColumnKind, Line, TextTable


class KindTable(QWidget):
    """A table and a notice; a table without lines shows the notice alone."""

    def __init__(self, name: str, *kinds: ColumnKind) -> None:
        super().__init__()
        self._kinds = kinds
        self.table = TextTable(name)
        self.notice = label(role="secondary", wrap=True)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        column.addWidget(self.table)
        column.addWidget(self.notice)
        self.notice.hide()

    def show_view(self, view: TableView) -> None:
        """Show a table."""
        columns = tuple(
            Column(title, kind) for title, kind in zip(view.header, self._kinds, strict=True)
        )
        tooltips = view.tooltips or ("",) * len(view.rows)
        lines = tuple(
            Line(row, full, tooltip)
            for row, full, tooltip in zip(view.rows, view.full, tooltips, strict=True)
        )
        self.table.show_lines(columns, lines)
        self.table.setVisible(bool(lines))
        set_or_hide(self.notice, view.notice)
