"""Any small table of the reading panel: aggregates, the constants in part axes, and more."""

from __future__ import annotations

import re

from PySide6.QtWidgets import QVBoxLayout, QWidget

from gui.viewdata import TableView
from gui.widgets.forms import label, plain_number, set_or_hide
from gui.widgets.text_table import Column, ColumnKind, Line, TextTable

SIDES = {"A": "a", "B": "b"}
_NUMBER = re.compile(r"[-+]?(\d|\.\d).*|nan|inf|[-–—·]?")


class SmallTable(QWidget):
    """A table and a notice. Columns of numbers are known by their contents."""

    def __init__(self, name: str = "Table") -> None:
        super().__init__()
        self._notice = label(role="secondary", wrap=True)
        self.table = TextTable(name, is_small=True)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(3)
        column.addWidget(self.table)
        column.addWidget(self._notice)
        self._notice.hide()

    def show_view(self, view: TableView) -> None:
        """Show a table."""
        lines = tuple(
            Line(row, full, tooltip)
            for row, full, tooltip in zip(
                view.rows,
                view.full or view.rows,
                view.tooltips or ("",) * len(view.rows),
                strict=True,
            )
        )
        self.table.show_lines(_columns(view), lines)
        self.table.setAccessibleName(view.title)
        set_or_hide(self._notice, view.notice)


def _columns(view: TableView) -> tuple[Column, ...]:
    return tuple(
        Column(title, _kind(number, view), SIDES.get(title, "secondary"))
        for number, title in enumerate(view.header)
    )


def _kind(number: int, view: TableView) -> ColumnKind:
    """Tell labels, which come first, from numbers and from units or other words."""
    texts = [plain_number(row[number]) for row in view.rows if number < len(row)]
    if any(texts) and all(_NUMBER.fullmatch(text) for text in texts):
        return "number"
    if number == 0:
        return "label"
    is_last = number == len(view.header) - 1
    return "unit" if is_last and max(map(len, texts), default=0) <= 7 else "words"
