"""The correlations of the fitted constants as a picture."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QFontMetricsF, QImage, QPainter, QPen

from gui.plots.frame import PlotFrame
from gui.plots.lettering import draw_chip, draw_notice, draw_text, draw_title, lettering
from gui.speeds.marks import DIMMED, card_lines
from gui.speeds.viewdata import CorrelationView
from gui.theme import Theme, colours_of
from gui.viewdata import ScaleView
from gui.widgets.colour_bar import bar_height, draw_colour_bar

TITLE = "Correlations of the constants"
_SCALE = ScaleView(-1.0, 1.0, "−1", "+1", "correlation", True, ((0.0, "0"),))


def matrix_in(rect: QRectF, view: CorrelationView, theme: Theme, scale: float = 1.0) -> QRectF:
    """Return the square that `draw_correlation` fills, untitled."""
    names = QFontMetricsF(lettering(theme, "small", scale)).horizontalAdvance("C66")
    gap = names + 8 * scale
    area = rect.adjusted(gap + 4 * scale, gap, -10 * scale,
                         -bar_height(theme, scale) - 8 * scale)  # fmt: skip
    side = max(min(area.width(), area.height()), 8.0)
    left = area.left() + (area.width() - side) / 2
    return QRectF(left, area.top() + (area.height() - side) / 2, side, side)


def draw_correlation(
    painter: QPainter,
    rect: QRectF,
    view: CorrelationView,
    theme: Theme,
    scale: float = 1.0,
    titled: bool = False,
) -> None:
    """Draw the matrix, its names and its colour bar."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if titled:
        rect = draw_title(painter, rect, TITLE, theme, scale)
    if not view.names:
        draw_notice(painter, rect, view.notice, theme, scale)
    else:
        square = matrix_in(rect, view, theme, scale)
        painter.setOpacity(DIMMED if view.pending else 1.0)
        painter.drawImage(square, _picture(view))
        painter.setPen(QPen(theme.colour("hairline"), scale))
        painter.drawRect(square)
        _draw_names(painter, square, view, theme, scale)
        height = bar_height(theme, scale)
        strip = QRectF(rect.left(), rect.bottom() - height - 4 * scale, rect.width(), height)
        draw_colour_bar(painter, strip, _SCALE, theme, scale)
    painter.restore()


def _picture(view: CorrelationView) -> QImage:
    """Return the matrix as an image of large even pixels, free of the painter's smoothing."""
    colours = colours_of(view.matrix, -1.0, 1.0, True)
    times = max(1, 480 // len(view.names))
    data = np.ascontiguousarray(np.kron(colours, np.ones((times, times, 1), dtype=np.uint8)))
    height, width = data.shape[:2]
    image = QImage(data.data, width, height, 4 * width, QImage.Format.Format_RGBA8888)
    return image.copy()


def _draw_names(
    painter: QPainter, square: QRectF, view: CorrelationView, theme: Theme, scale: float
) -> None:
    """Write the names at the left and, upright, above; every second where they are crowded."""
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    painter.setPen(theme.colour("secondary"))
    step = square.width() / len(view.names)
    every = 1 if step >= QFontMetricsF(font).capHeight() + 2 * scale else 2
    for number, name in enumerate(view.names):
        if number % every:
            continue
        middle = (number + 0.5) * step
        left = QPointF(square.left() - 5 * scale, square.top() + middle)
        draw_text(painter, left, name, 1.0, 0.5)
        painter.save()
        painter.translate(square.left() + middle, square.top() - 5 * scale)
        painter.rotate(-90.0)
        draw_text(painter, QPointF(0.0, 0.0), name, 0.0, 0.5)
        painter.restore()


class CorrelationPlot(PlotFrame):
    """The picture, with a card for the pair under the mouse."""

    def __init__(self) -> None:
        super().__init__("Correlations")
        self._view = CorrelationView((), np.empty((0, 0)))

    def show_view(self, view: CorrelationView) -> None:
        """Draw this."""
        self._view = view
        self.title.set_whole("")
        self.canvas.update()

    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw as on the screen."""
        draw_correlation(painter, rect, self._view, theme, scale)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw with the title."""
        draw_correlation(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw the card of the pair under the mouse."""
        view = self._view
        if self.hover is None or not view.names:
            return
        square = matrix_in(QRectF(self.canvas.rect()), view, self.theme)
        if not square.contains(self.hover):
            return
        step = square.width() / len(view.names)
        last = len(view.names) - 1
        row = min(int((self.hover.y() - square.top()) / step), last)
        column = min(int((self.hover.x() - square.left()) / step), last)
        value = f"{view.matrix[row, column]:+.3f}".replace("-", "−")
        lines = card_lines((f"{view.names[row]} with {view.names[column]}", value), self.theme)
        draw_chip(painter, self.hover, lines, rect, self.theme)

    def copy_text(self) -> str:
        """Return the matrix below its names, tab-separated."""
        view = self._view
        if not view.names:
            return ""
        rows = zip(view.names, view.matrix.tolist(), strict=True)
        lines = ["\t".join([name, *map(repr, row)]) for name, row in rows]
        return "\n".join(["\t".join(["", *view.names]), *lines])
