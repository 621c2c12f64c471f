"""What comes of a foreign table: its verdict and the 6×6, painted."""

from __future__ import annotations

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QFont, QFontMetricsF, QPainter, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from gui.theme import Theme
from gui.verdict_band import draw_verdict
from gui.viewdata import CellView, ConstantsView, VerdictView
from gui.widgets.forms import current_theme, text_width

ROW = 23.0
HEAD = 20.0
LEAST_FONT = 0.7


def draw_constants(
    painter: QPainter, rect: QRectF, view: ConstantsView, theme: Theme, scale: float = 1.0
) -> None:
    """Draw a 6×6 with its row numbers: free cells in ink, the others in grey italics."""
    painter.save()
    size = len(view.cells)
    width, row = (rect.width() - HEAD * scale) / size, ROW * scale
    left, top = rect.x() + HEAD * scale, rect.y() + HEAD * scale
    font = _fitting_font(view, width - 8 * scale, theme, scale)
    painter.setFont(theme.font("small", scale))
    painter.setPen(theme.colour("faint"))
    centre = Qt.AlignmentFlag.AlignCenter
    for k in range(size):
        above = QRectF(left + k * width, rect.y(), width, HEAD * scale)
        beside = QRectF(rect.x(), top + k * row, HEAD * scale, row)
        for place in (above, beside):
            painter.drawText(place, centre, f"{k + 1}")
    painter.setPen(theme.colour("hairline"))
    for k in range(size + 1):
        painter.drawLine(int(left), int(top + k * row), int(rect.right()), int(top + k * row))
        x = int(left + k * width) - (k == size)
        painter.drawLine(x, int(top), x, int(top + size * row))
    for i, cells in enumerate(view.cells):
        for j, cell in enumerate(cells):
            _draw_cell(painter, QRectF(left + j * width, top + i * row, width - 5 * scale, row),
                       cell, font, theme)  # fmt: skip
    painter.restore()


def _draw_cell(
    painter: QPainter, box: QRectF, cell: CellView, font: QFont, theme: Theme
) -> None:
    shown = QFont(font)
    shown.setItalic(cell.kind == "dependent")
    painter.setFont(shown)
    painter.setPen(theme.colour("ink" if cell.kind == "independent" else "secondary"))
    side = Qt.AlignmentFlag.AlignHCenter if cell.kind == "zero" else Qt.AlignmentFlag.AlignRight
    painter.drawText(box, side | Qt.AlignmentFlag.AlignVCenter, cell.text)


def _fitting_font(view: ConstantsView, room: float, theme: Theme, scale: float) -> QFont:
    font = theme.font("body", scale)
    texts = [cell.text for cells in view.cells for cell in cells]
    least = font.pixelSize() * LEAST_FONT
    while text_width(QFontMetricsF(font), texts) > room and font.pixelSize() > least:
        font.setPixelSize(font.pixelSize() - 1)
    return font


class VerdictLine(QWidget):
    """The verdict on the table, in one line."""

    def __init__(self) -> None:
        super().__init__()
        self._view: VerdictView | None = None
        self.setFixedHeight(26)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    def show_view(self, view: VerdictView) -> None:
        """Show a verdict."""
        self._view = view
        self.setAccessibleName(f"{view.headline}. {'. '.join(view.facts)}")
        self.setToolTip("\n".join((view.headline, *view.facts)))
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the mark and the words."""
        if self._view is not None:
            painter = QPainter(self)
            room = QRectF(self.rect()).adjusted(-14, 0, 14, 0)  # flush with what is around
            draw_verdict(painter, room, self._view, current_theme())


class PreviewGrid(QWidget):
    """The 6×6 as it would be on the bench."""

    def __init__(self) -> None:
        super().__init__()
        self.view: ConstantsView | None = None
        self.setAccessibleName("Preview of the constants, GPa")
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setFixedHeight(round(HEAD + 6 * ROW) + 2)

    def sizeHint(self) -> QSize:
        """Ask for six columns of numbers."""
        return QSize(400, self.height())

    def show_view(self, view: ConstantsView) -> None:
        """Show a table."""
        self.view = view
        rows = ("  ".join(cell.text for cell in cells) for cells in view.cells)
        self.setAccessibleDescription("; ".join(rows))
        self.update()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the table."""
        if self.view is not None:
            painter = QPainter(self)
            draw_constants(painter, QRectF(self.rect()), self.view, current_theme())
