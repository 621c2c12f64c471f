"""Residuals of the readings in units of σ: a strip for each sheet, outliers named."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QFontMetricsF, QPainter, QPen

from gui.plots.frame import PlotFrame
from gui.plots.grid import nice_ticks
from gui.plots.lettering import (
    Placement,
    draw_chip,
    draw_notice,
    draw_text,
    draw_title,
    elide,
    lettering,
    line_height,
    text_rect,
)
from gui.speeds.marks import DIMMED, apart, arrow, card_lines, diamond
from gui.speeds.viewdata import ResidualPoint, ResidualsView
from gui.theme import Theme

SHEETS = ("fastest", "middle", "slowest")
TITLE = "(predicted − measured)/σ"
_LEAST, _MOST = 3.0, 8.0  # σ that a strip reaches at least and at most
_NEAR = 12.0  # pixels within which the mouse means a point


@dataclass(frozen=True)
class Strips:
    """Where the strips lie on the paper.

    Attributes
    ----------
    areas : dict of int to QRectF
        By sheet.
    rows : int
        Rows of the table, along x.
    reach : float
        σ from the middle of a strip to its edge.
    """

    areas: dict[int, QRectF]
    rows: int
    reach: float

    def place(self, point: ResidualPoint) -> QPointF:
        """Return where a reading is drawn; one beyond the strip lies on its edge."""
        area = self.areas[point.sheet]
        x = area.left() + (point.row - 0.5) / max(self.rows, 1) * area.width()
        inside = min(max(point.residual, -self.reach), self.reach)
        return QPointF(x, area.center().y() - inside / self.reach * area.height() / 2)

    def y(self, sheet: int, sigmas: float) -> float:
        """Return the height of a residual in a strip."""
        area = self.areas[sheet]
        return area.center().y() - sigmas / self.reach * area.height() / 2


def draw_residuals(
    painter: QPainter,
    rect: QRectF,
    view: ResidualsView,
    theme: Theme,
    scale: float = 1.0,
    chosen: int = 0,
    titled: bool = False,
) -> None:
    """Draw the strips; `chosen` is the row, from 1, that is ringed."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if titled:
        rect = draw_title(painter, rect, TITLE, theme, scale)
    if not view.points:
        draw_notice(painter, rect, view.notice, theme, scale)
    else:
        strips = strips_in(rect, view, theme, scale)
        for sheet in strips.areas:
            _draw_strip(painter, strips, sheet, view, theme, scale)
        _draw_rows_axis(painter, rect, strips, theme, scale)
        painter.setOpacity(DIMMED if view.pending else 1.0)
        _draw_points(painter, strips, view, theme, scale, chosen)
    painter.restore()


def strips_in(rect: QRectF, view: ResidualsView, theme: Theme, scale: float = 1.0) -> Strips:
    """Return where `draw_residuals` places the strips, untitled."""
    line = line_height(lettering(theme, "small", scale))
    left = QFontMetricsF(lettering(theme, "small", scale)).horizontalAdvance("−88") + 16 * scale
    sheets = sorted({point.sheet for point in view.points})
    top, bottom = rect.top() + 4 * scale, rect.bottom() - line - 12 * scale
    each = (bottom - top) / max(len(sheets), 1)
    width = max(rect.width() - left - 14 * scale, 1.0)
    areas = {
        sheet: QRectF(rect.left() + left, top + number * each + line + 2 * scale,
                      width, max(each - line - 6 * scale, 4.0))
        for number, sheet in enumerate(sheets)
    }  # fmt: skip
    largest = max((abs(point.residual) for point in view.points), default=0.0)
    return Strips(areas, view.rows, min(max(1.08 * largest, _LEAST), _MOST))


def _draw_strip(
    painter: QPainter, strips: Strips, sheet: int, view: ResidualsView, theme: Theme,
    scale: float,
) -> None:
    """Draw the ground of one strip: its name, ±1 σ, and the limit of an outlier."""
    area = strips.areas[sheet]
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    painter.setPen(theme.colour("secondary"))
    count = sum(point.sheet == sheet for point in view.points)
    words = f"{SHEETS[sheet]} wave, {count} reading{'' if count == 1 else 's'}"
    draw_text(painter, area.topLeft() - QPointF(0.0, 4 * scale),
              elide(font, words, area.width()), 0.0, 1.0)  # fmt: skip
    one = QRectF(area.left(), strips.y(sheet, 1.0), area.width(),
                 strips.y(sheet, -1.0) - strips.y(sheet, 1.0))  # fmt: skip
    painter.fillRect(one, theme.colour("a", 0.09))
    painter.setPen(QPen(theme.colour("hairline"), scale))
    painter.drawRect(area)
    painter.setPen(QPen(theme.colour("faint"), scale))
    painter.drawLine(QPointF(area.left(), area.center().y()),
                     QPointF(area.right(), area.center().y()))  # fmt: skip
    if view.limit < strips.reach:
        painter.setPen(QPen(theme.colour("alert", 0.7), scale, Qt.PenStyle.DashLine))
        for sigmas in (view.limit, -view.limit):
            y = strips.y(sheet, sigmas)
            painter.drawLine(QPointF(area.left(), y), QPointF(area.right(), y))
    painter.setPen(theme.colour("secondary"))
    step = 2 if strips.reach < 5 else 5
    for tick in (-step, 0, step):
        text = f"{tick}".replace("-", "−")
        draw_text(painter, QPointF(area.left() - 6 * scale, strips.y(sheet, tick)), text, 1.0)


def _draw_rows_axis(
    painter: QPainter, rect: QRectF, strips: Strips, theme: Theme, scale: float
) -> None:
    """Write the numbers of the rows under the last strip."""
    area = list(strips.areas.values())[-1]
    painter.setFont(lettering(theme, "small", scale))
    painter.setPen(theme.colour("secondary"))
    count = max(2, int(area.width() / (46 * scale)))
    ticks = [t for t in nice_ticks(1.0, float(strips.rows), count) if t == round(t)]
    for tick in sorted({1.0, *ticks}):
        x = area.left() + (tick - 0.5) / max(strips.rows, 1) * area.width()
        painter.drawLine(QPointF(x, area.bottom()), QPointF(x, area.bottom() + 3 * scale))
        draw_text(painter, QPointF(x, area.bottom() + 8 * scale), f"{tick:.0f}", 0.5, 0.0)
    draw_text(painter, QPointF(rect.left() + 8 * scale, area.bottom() + 8 * scale), "row",
              0.0, 0.0)  # fmt: skip


def _draw_points(
    painter: QPainter, strips: Strips, view: ResidualsView, theme: Theme, scale: float,
    chosen: int,
) -> None:
    """Draw the readings, outliers last and named."""
    placement = Placement(2.0 * scale)
    font = lettering(theme, "small", scale, bold=True)
    size = 3.4 * scale if strips.rows < 200 else 2.0 * scale
    for point in sorted(view.points, key=lambda point: point.is_outlier):
        at = strips.place(point)
        colour = theme.colour("alert" if point.is_outlier else "a")
        painter.setPen(QPen(theme.colour("panel"), 0.8 * scale))
        painter.setBrush(colour)
        if abs(point.residual) > strips.reach:
            painter.drawPolygon(arrow(at, 5.5 * scale, point.residual > 0))
        elif point.is_outlier:
            painter.drawPolygon(diamond(at, 5.0 * scale))
        else:
            painter.drawEllipse(at, size, size)
        if point.row == chosen:
            painter.setPen(QPen(theme.colour("ink"), 1.4 * scale))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawEllipse(at, 7.5 * scale, 7.5 * scale)
        if point.is_outlier:
            painter.setFont(font)
            painter.setPen(colour)
            _draw_name(painter, strips, point, placement, scale)


def _draw_name(
    painter: QPainter, strips: Strips, point: ResidualPoint, placement: Placement, scale: float
) -> None:
    """Name an outlier beside its mark, on the side where there is room."""
    at, area = strips.place(point), strips.areas[point.sheet]
    text = f"row {point.row}, {point.residual:.1f} σ".replace("-", "−")
    for right in (1.0, -1.0):
        box = text_rect(painter.font(), at + QPointF(9 * scale * right, 0.0), text,
                        0.0 if right > 0 else 1.0, 0.5)  # fmt: skip
        box.moveTop(min(max(box.top(), area.top() + 2), area.bottom() - box.height() - 2))
        if area.left() <= box.left() and box.right() <= area.right() and placement.claim(box):
            painter.drawText(box.bottomLeft(), text)
            return


class ResidualPlot(PlotFrame):
    """The residuals; `row_picked(row)` comes on a press near a point, rows from 1."""

    row_picked = Signal(int)

    def __init__(self) -> None:
        super().__init__("Residuals")
        self._view = ResidualsView((), 0, 3.0)
        self._chosen = 0

    def show_view(self, view: ResidualsView) -> None:
        """Draw these."""
        self._view = view
        self.title.set_whole(TITLE)
        self.canvas.update()

    def show_row(self, row: int) -> None:
        """Ring the reading of a row."""
        if row != self._chosen:
            self._chosen = row
            self.canvas.update()

    def nearest(self, point: QPointF) -> ResidualPoint | None:
        """Return the reading under the mouse."""
        view = self._view
        if not view.points:
            return None
        strips = strips_in(QRectF(self.canvas.rect()), view, self.theme)
        best = min(view.points, key=lambda each: apart(strips.place(each), point))
        return best if apart(strips.place(best), point) < _NEAR else None

    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw as on the screen."""
        draw_residuals(painter, rect, self._view, theme, scale, self._chosen)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw with the title."""
        draw_residuals(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw the card of the reading under the mouse."""
        found = None if self.hover is None else self.nearest(self.hover)
        if found is not None and self.hover is not None:
            draw_chip(painter, self.hover, card_lines(found.card, self.theme), rect, self.theme)

    def copy_text(self) -> str:
        """Return rows, sheets and residuals as tab-separated columns."""
        lines = [f"{each.row}\t{each.sheet + 1}\t{each.residual!r}"
                 for each in self._view.points]  # fmt: skip
        return "\n".join(["row\tsheet\tresidual, σ", *lines]) if lines else ""

    def press(self, point: QPointF) -> None:
        """Choose the reading under the mouse."""
        found = self.nearest(point)
        if found is not None:
            self.row_picked.emit(found.row)

    def step(self, right: int, up: int) -> None:
        """Go to the next reading with the arrow keys."""
        rows = sorted(point.row for point in self._view.points)
        if rows and right:
            after = [row for row in rows if (row > self._chosen if right > 0 else
                                             row < self._chosen)]  # fmt: skip
            if after:
                self.row_picked.emit(after[0] if right > 0 else after[-1])
