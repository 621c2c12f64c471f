"""The singular spectrum: how uncertain each combination of constants is, on powers of ten."""

from __future__ import annotations

import math
from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QFontMetricsF, QPainter, QPen

from gui.plots.frame import PlotFrame
from gui.plots.grid import number_text
from gui.plots.lettering import (
    draw_chip,
    draw_notice,
    draw_text,
    draw_title,
    elide,
    lettering,
    line_height,
)
from gui.speeds.marks import DIMMED, card_lines
from gui.speeds.viewdata import SingularView
from gui.theme import Theme

TITLE = "Standard uncertainty of each combination of constants, GPa"
_ABOVE = 1.0  # powers of ten above the mean stiffness that are drawn; then a bar is cut
_BAR = 0.62  # of the step from bar to bar


@dataclass(frozen=True)
class Bars:
    """Where the bars stand, and the powers of ten at both ends of the upright axis."""

    area: QRectF
    count: int
    low: float
    high: float

    def y(self, value: float) -> float:
        """Return the height of an uncertainty, GPa, kept inside the area."""
        power = self.high if not math.isfinite(value) else math.log10(max(value, 1e-300))
        share = (min(max(power, self.low), self.high) - self.low) / (self.high - self.low)
        return self.area.bottom() - share * self.area.height()

    def box(self, number: int, value: float) -> QRectF:
        """Return the bar of one combination."""
        step = self.area.width() / self.count
        x = self.area.left() + (number + 0.5 - _BAR / 2) * step
        return QRectF(x, self.y(value), _BAR * step, self.area.bottom() - self.y(value))


def bars_in(rect: QRectF, view: SingularView, theme: Theme, scale: float = 1.0) -> Bars:
    """Return where `draw_singular` places the bars, untitled."""
    font = lettering(theme, "small", scale)
    line = line_height(font)
    left = QFontMetricsF(font).horizontalAdvance("0.001") + 18 * scale
    area = rect.adjusted(left, line + 14 * scale, -14 * scale, -2 * line - 12 * scale)
    known = [value for value in view.deviations if math.isfinite(value) and value > 0]
    low = math.floor(math.log10(min([*known, view.typical])) - 0.2)
    top = [value for value in known if value < view.typical * 10**_ABOVE]
    high = max(math.log10(max([*top, view.typical])) + 0.3, low + 1.0)
    return Bars(area, max(len(view.deviations), 1), low, high)


def draw_singular(
    painter: QPainter,
    rect: QRectF,
    view: SingularView,
    theme: Theme,
    scale: float = 1.0,
    titled: bool = False,
) -> None:
    """Draw a bar for each combination; those that do not count as seen are hatched."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if titled:
        rect = draw_title(painter, rect, TITLE, theme, scale)
    if not view.deviations:
        draw_notice(painter, rect, view.notice, theme, scale)
    else:
        bars = bars_in(rect, view, theme, scale)
        _draw_powers(painter, rect, bars, theme, scale)
        painter.setOpacity(DIMMED if view.pending else 1.0)
        _draw_bars(painter, bars, view, theme, scale)
        _draw_typical(painter, bars, view, theme, scale)
    painter.restore()


def _draw_powers(
    painter: QPainter, rect: QRectF, bars: Bars, theme: Theme, scale: float
) -> None:
    """Draw a line for every power of ten, and say what the two axes are."""
    painter.setFont(lettering(theme, "small", scale))
    for power in range(math.ceil(bars.low), math.floor(bars.high) + 1):
        y = bars.y(10.0**power)
        painter.setPen(QPen(theme.colour("hairline"), scale))
        painter.drawLine(QPointF(bars.area.left(), y), QPointF(bars.area.right(), y))
        painter.setPen(theme.colour("secondary"))
        draw_text(painter, QPointF(bars.area.left() - 6 * scale, y), f"{10.0**power:g}", 1.0)
    words = elide(painter.font(), "σ of the combination, GPa", rect.width() - 20 * scale)
    draw_text(painter, QPointF(rect.left() + 10 * scale, rect.top() + 8 * scale), words,
              0.0, 0.0)  # fmt: skip
    below = QPointF(bars.area.center().x(), rect.bottom() - 6 * scale)
    words = elide(painter.font(), "combinations of unit Kelvin norm, the most certain first",
                  bars.area.width())  # fmt: skip
    draw_text(painter, below, words, 0.5, 1.0)
    painter.setPen(QPen(theme.colour("faint"), scale))
    painter.drawLine(bars.area.bottomLeft(), bars.area.bottomRight())


def _draw_bars(
    painter: QPainter, bars: Bars, view: SingularView, theme: Theme, scale: float
) -> None:
    painter.setFont(lettering(theme, "small", scale))
    wide = bars.area.width() / bars.count > 20 * scale
    for number, value in enumerate(view.deviations):
        box = bars.box(number, value)
        is_seen = number < view.rank
        colour = theme.colour("a" if is_seen else "doubt")
        painter.fillRect(box, theme.colour("a") if is_seen else theme.colour("doubt", 0.16))
        if not is_seen:
            painter.setPen(QPen(colour, 1.2 * scale))
            painter.setBrush(QBrush(colour, Qt.BrushStyle.BDiagPattern))
            painter.drawRect(box)
        painter.setPen(theme.colour("secondary"))
        if wide or number % 5 == 0:
            at = QPointF(box.center().x(), bars.area.bottom() + 5 * scale)
            draw_text(painter, at, str(number + 1), 0.5, 0.0)


def _draw_typical(
    painter: QPainter, bars: Bars, view: SingularView, theme: Theme, scale: float
) -> None:
    """Draw the mean eigenstiffness: what is as uncertain is not known at all."""
    y = bars.y(view.typical)
    painter.setPen(QPen(theme.colour("faint"), scale, Qt.PenStyle.DashLine))
    painter.drawLine(QPointF(bars.area.left(), y), QPointF(bars.area.right(), y))
    painter.setFont(lettering(theme, "small", scale))
    words = elide(painter.font(), "mean eigenstiffness", bars.area.width())
    painter.setPen(theme.colour("secondary"))
    draw_text(painter, QPointF(bars.area.left() + 4 * scale, y - 4 * scale), words, 0.0, 1.0)


class SingularPlot(PlotFrame):
    """The spectrum, with a card for the bar under the mouse."""

    def __init__(self) -> None:
        super().__init__("Singular spectrum")
        self._view = SingularView((), 0, 1.0, ())

    def show_view(self, view: SingularView) -> None:
        """Draw this."""
        self._view = view
        self.title.set_whole("")
        self.canvas.update()

    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw as on the screen."""
        draw_singular(painter, rect, self._view, theme, scale)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw with the title."""
        draw_singular(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw the card of the combination under the mouse."""
        view = self._view
        if self.hover is None or not view.deviations:
            return
        bars = bars_in(QRectF(self.canvas.rect()), view, self.theme)
        if bars.area.contains(self.hover):
            share = (self.hover.x() - bars.area.left()) / bars.area.width()
            number = min(int(share * bars.count), bars.count - 1)
            lines = card_lines(self._card(number), self.theme)
            draw_chip(painter, self.hover, lines, rect, self.theme)

    def copy_text(self) -> str:
        """Return the uncertainties as tab-separated columns."""
        lines = [f"{number + 1}\t{value!r}\t{'yes' if number < self._view.rank else 'no'}"
                 for number, value in enumerate(self._view.deviations)]  # fmt: skip
        return "\n".join(["combination\tσ, GPa\tseen", *lines]) if lines else ""

    def _card(self, number: int) -> tuple[str, ...]:
        view, value = self._view, self._view.deviations[number]
        is_known = math.isfinite(value)
        size = f"σ {number_text(value, 3)} GPa" if is_known else "no reading acts on it"
        if number < view.rank:
            return f"combination {number + 1}", size
        return (f"combination {number + 1}: not seen", size, *view.unseen)
