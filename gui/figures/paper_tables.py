"""Tables on paper: columns as wide as their numbers, words wrapped, headers on every page."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QFont, QFontMetricsF

from core.report.blocks import Table
from gui.figures.paper import (
    Paper,
    lay_text,
    line_of,
    mm,
    page_font,
    rule_paint,
    text_paint,
    wrapped_height,
)

_PAD = 3.0  # mm between columns, half on either side
_EDGE = 0.8  # mm from the left of a column to its text
_LEAD = 0.55  # mm above and below the text of a row
_KEPT_ROWS = 8  # a table of up to so many rows is never parted
_FIRST_ROWS = 3  # a longer one begins on a page that has room for so many rows


@dataclass(frozen=True, eq=False)
class _Grid:
    """A table measured: its columns, fonts and who is set flush right."""

    table: Table
    widths: list[float]
    font: QFont
    bold: QFont

    @property
    def width(self) -> float:
        """The width of the whole table."""
        return sum(self.widths)

    def is_words(self, column: int) -> bool:
        """Tell whether a column holds words, set flush left."""
        count = len(self.widths)
        return column < self.table.words or column >= count - self.table.trailing_words


def lay_table(paper: Paper, table: Table) -> None:
    """Lay a table, going on to new pages between its rows."""
    grid = _measure(table, paper.room)
    heights, head = _heights(grid)
    paper.keep(_kept(grid, heights, head))
    if table.title:
        lay_text(paper, table.title, page_font("small", bold=True))
        paper.y += mm(0.8)
    _lay_head(paper, grid, head)
    for row, height in zip(table.rows, heights, strict=True):
        if paper.keep(height):
            _lay_head(paper, grid, head)
        _lay_row(paper, grid, row, height, grid.font, "ink")
    paper.put(rule_paint(paper.left, paper.y, grid.width, "faint", 0.5))
    paper.y += mm(0.8)
    if table.note:
        lay_text(paper, table.note, page_font("small"), "secondary")
    paper.y += mm(2.6)


def kept_height(paper: Paper, table: Table) -> float:
    """Return the height of what `lay_table` keeps together at the top of a table."""
    grid = _measure(table, paper.room)
    return _kept(grid, *_heights(grid))


def _heights(grid: _Grid) -> tuple[list[float], float]:
    """Return the heights of the rows and of the header of a table."""
    table = grid.table
    head = _row_height(grid, table.header, grid.bold) if table.header else 0.0
    return [_row_height(grid, row, grid.font) for row in table.rows], head


def _kept(grid: _Grid, heights: list[float], head: float) -> float:
    kept = len(heights) if len(heights) <= _KEPT_ROWS else _FIRST_ROWS
    title = line_of(grid.bold) + mm(0.8) if grid.table.title else 0.0
    return title + head + sum(heights[:kept]) + mm(1.0)


def _measure(table: Table, room: float) -> _Grid:
    """Return a table with its column widths: natural where they fit, else words share."""
    font, bold = page_font("small"), page_font("small", bold=True)
    rows = [*table.rows, *([table.header] if table.header else [])]
    count = max(len(row) for row in rows)
    plain, strong = QFontMetricsF(font), QFontMetricsF(bold)
    widths = [0.0] * count
    for row in table.rows:
        for column, text in enumerate(row):
            widths[column] = max(widths[column], plain.horizontalAdvance(text))
    for column, text in enumerate(table.header):
        widths[column] = max(widths[column], strong.horizontalAdvance(text))
    grid = _Grid(table, [width + mm(_PAD) + 2.0 for width in widths], font, bold)
    return grid if grid.width <= room else _Grid(table, _squeezed(grid, room), font, bold)


def _squeezed(grid: _Grid, room: float) -> list[float]:
    """Return widths that fit: columns of words give way, the widest first.

    No column becomes narrower than its longest word.
    """
    widths = list(grid.widths)
    floors = [_floor(grid, column) for column in range(len(widths))]
    for _ in range(4 * len(widths)):
        over = sum(widths) - room
        free = [k for k, width in enumerate(widths) if width > floors[k] + 1.0]
        if over <= 1.0 or not free:
            break
        widest = max(free, key=lambda k: widths[k])
        next_wide = max((widths[k] for k in free if k != widest), default=0.0)
        least = max(floors[widest], min(next_wide, widths[widest] - over / 2))
        widths[widest] = max(widths[widest] - over, least)
    return widths


def _floor(grid: _Grid, column: int) -> float:
    """Return the least width of a column: of its longest word, or of a number as it is."""
    if not grid.is_words(column):
        return grid.widths[column]
    metrics = QFontMetricsF(grid.bold)
    words = [word for row in (*grid.table.rows, grid.table.header) if column < len(row)
             for word in row[column].split(" ")]
    longest = max((metrics.horizontalAdvance(word) for word in words), default=0.0)
    return min(grid.widths[column], longest + mm(_PAD) + 2.0)


def _row_height(grid: _Grid, row: tuple[str, ...], font: QFont) -> float:
    heights = [wrapped_height(font, text, grid.widths[column] - mm(_PAD))
               for column, text in enumerate(row) if text and grid.is_words(column)]
    return max([line_of(font), *heights]) + 2 * mm(_LEAD)


def _lay_head(paper: Paper, grid: _Grid, height: float) -> None:
    paper.put(rule_paint(paper.left, paper.y, grid.width, "faint", 0.8))
    if grid.table.header:
        _lay_row(paper, grid, grid.table.header, height, grid.bold, "secondary")
        paper.put(rule_paint(paper.left, paper.y, grid.width, "hairline", 0.5))


def _lay_row(
    paper: Paper, grid: _Grid, row: tuple[str, ...], height: float, font: QFont, role: str
) -> None:
    """Lay one row; words wrap from the left, numbers stand flush right on one line."""
    x = paper.left
    for column, text in enumerate(row):
        width = grid.widths[column]
        if text:
            cell = QRectF(x + mm(_EDGE), paper.y + mm(_LEAD), width - mm(_PAD),
                          height - 2 * mm(_LEAD) + 1.0)
            flags = int(Qt.TextFlag.TextWordWrap) if grid.is_words(column) else int(
                Qt.AlignmentFlag.AlignRight | Qt.TextFlag.TextDontClip)
            quiet = not grid.table.header and column == 0
            paper.put(text_paint(cell, text, font, "secondary" if quiet else role, flags))
        x += width
    paper.y += height
