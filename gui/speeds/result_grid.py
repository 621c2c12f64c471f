"""The fitted constants as a 6×6, each over its standard uncertainty: read only."""

from __future__ import annotations

from PySide6.QtCore import QRect, QSize, Qt
from PySide6.QtGui import QFont, QPainter
from PySide6.QtWidgets import QStyle, QStyleOptionViewItem

from gui.ledger.constants_cells import DOT, PADDING, SIZE, CellDelegate, ConstantsModel, Index
from gui.ledger.constants_grid import HEADER_HEIGHT, ConstantsTable
from gui.speeds.marks import DIMMED
from gui.speeds.viewdata import ResultCell
from gui.theme import Theme
from gui.viewdata import ConstantsView
from gui.widgets.forms import current_theme

ROW_HEIGHT = 36


class ResultDelegate(CellDelegate):
    """Draws a constant and, smaller, its uncertainty; grey where it is not seen."""

    def __init__(self, parent: ResultGrid) -> None:
        super().__init__(parent)
        self.is_dimmed = False

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """Ask for two lines."""
        return QSize(52, ROW_HEIGHT)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw one cell."""
        model = index.model()
        if not isinstance(model, ConstantsModel):
            return
        row, column = index.row(), index.column()
        cell, kind = model.cell(row, column), model.kind(row, column)
        if not isinstance(cell, ResultCell):
            return
        theme, rect, alpha = current_theme(), option.rect, DIMMED if self.is_dimmed else 1.0
        painter.save()
        if option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(rect, theme.colour("hover"))
        if kind == "zero":
            painter.setPen(theme.colour("faint", alpha))
            painter.drawText(rect, Qt.AlignmentFlag.AlignCenter, DOT)
        else:
            is_free = kind == "independent"
            role = ("ink" if cell.is_seen else "doubt") if is_free else "faint"
            self._draw_pair(painter, rect, cell, option.font, theme, (role, alpha, is_free))
        painter.restore()

    def _draw_pair(
        self, painter: QPainter, rect: QRect, cell: ResultCell, font: QFont, theme: Theme,
        look: tuple[str, float, bool],
    ) -> None:
        """Write the value in the upper half and what it is uncertain by in the lower."""
        role, alpha, is_free = look
        room = rect.adjusted(PADDING, 2, -PADDING, -2)
        upper = room.adjusted(0, 0, 0, -room.height() // 2)
        lower = room.adjusted(0, room.height() // 2, 0, 0)
        number = QFont(font)
        number.setItalic(not is_free)
        small = Theme.font("small")
        small.setPixelSize(min(small.pixelSize(), number.pixelSize()))
        small.setItalic(not is_free)
        side = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        painter.setFont(number)
        painter.setPen(theme.colour(role, alpha))
        painter.drawText(upper, side, cell.text)
        painter.setFont(small)
        quiet = role if role != "ink" else "secondary"
        painter.setPen(theme.colour(quiet, alpha))
        painter.drawText(lower, side, cell.deviation)


class ResultGrid(ConstantsTable):
    """The grid; copying gives the constants at full precision."""

    def __init__(self) -> None:
        super().__init__(ConstantsModel())
        self.cells.setParent(self)
        self._look = ResultDelegate(self)
        self.setItemDelegate(self._look)
        for row in range(SIZE):
            self.setRowHeight(row, ROW_HEIGHT)
        self.setFixedHeight(HEADER_HEIGHT + SIZE * ROW_HEIGHT + 1)
        self.setAccessibleName("Fitted constants, 6 by 6")

    def show_view(self, view: ConstantsView, dimmed: bool) -> None:
        """Show the constants, dimmed while others are being found."""
        self._look.is_dimmed = dimmed
        self.cells.show_view(view)
        self.viewport().update()
