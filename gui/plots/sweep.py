"""The sweep: a quantity against the angle from the pin along an arc, A and B together."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSignalBlocker, Signal
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen
from PySide6.QtWidgets import QComboBox, QWidget

from core.arrays import FloatArray
from gui.plots.frame import PlotFrame
from gui.plots.grid import MINUS, angle_ticks, nice_ticks, number_text, tick_texts
from gui.plots.lettering import (
    draw_chip,
    draw_notice,
    draw_text,
    draw_title,
    elide,
    lettering,
    line_height,
)
from gui.plots.strokes import draw_curve, draw_sample, side_pen
from gui.theme import Theme
from gui.viewdata import SweepView

_MARGIN = 0.07  # of the values' range, above and below
_LEVEL = 1e-7  # relative: a smaller range is a level line and its rounding
_LEVEL_MARGIN = 0.05  # of the value, above and below a level line
_TICK_SPACING_Y, _TICK_SPACING_X = 38.0, 58.0  # pixels
_TICK = 4.0
_SHEETS = ("fastest", "middle", "slowest")


@dataclass(frozen=True)
class Axes:
    """Where a sweep lies on the paper, and the ranges of its two axes.

    Attributes
    ----------
    area : QRectF
    angles, values : tuple of 2 floats
        Least and greatest, degrees and the quantity's unit.
    """

    area: QRectF
    angles: tuple[float, float]
    values: tuple[float, float]

    def x(self, angle: float) -> float:
        """Return where an angle is, pixels from the left."""
        low, high = self.angles
        return self.area.left() + (angle - low) / (high - low) * self.area.width()

    def y(self, value: float) -> float:
        """Return where a value is, pixels from the top."""
        low, high = self.values
        return self.area.bottom() - (value - low) / (high - low) * self.area.height()

    def angle_at(self, x: float) -> float:
        """Return the angle of a place, degrees, kept inside the axis."""
        low, high = self.angles
        angle = low + (x - self.area.left()) / self.area.width() * (high - low)
        return min(max(angle, low), high)

    def place(self, angles: FloatArray, values: FloatArray) -> FloatArray:
        """Return points in pixels, shape (2, N)."""
        (first, last), (low, high) = self.angles, self.values
        x = self.area.left() + (angles - first) / (last - first) * self.area.width()
        y = self.area.bottom() - (values - low) / (high - low) * self.area.height()
        return np.stack([x, y])


# ---------------------------------------------------------------- drawing
def draw_sweep(
    painter: QPainter,
    rect: QRectF,
    view: SweepView,
    theme: Theme,
    scale: float = 1.0,
    titled: bool = False,
) -> None:
    """Draw a sweep on Cartesian axes.

    Parameters
    ----------
    painter : QPainter
        Of the screen, a picture, an SVG or a PDF; the ground behind is not filled.
    rect : QRectF
        Pixels of the painter.
    view : SweepView
    theme : Theme
    scale : float
        Size of text and strokes; 1 on the screen.
    titled : bool
        Write the title at the top: for pictures that stand alone.
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if titled:
        rect = draw_title(painter, rect, view.title, theme, scale)
    axes = sweep_axes(rect, view, theme, scale)
    if axes is None:
        draw_notice(painter, rect, view.notice, theme, scale)
    else:
        _draw_grid(painter, axes, view, theme, scale)
        _draw_words(painter, rect, axes, view, theme, scale)
        _draw_curves(painter, axes, view, theme, scale)
    painter.restore()


def value_range(view: SweepView) -> tuple[float, float] | None:
    """Return the range of the value axis, a little wider than the values; None without any."""
    finite = [values[np.isfinite(values)] for _, _, values in view.curves]
    finite = [values for values in finite if values.size]
    if not finite:
        return None
    low = min(float(values.min()) for values in finite)
    high = max(float(values.max()) for values in finite)
    largest = max(abs(low), abs(high))
    if high - low <= _LEVEL * largest or largest == 0.0:
        margin = _LEVEL_MARGIN * largest or 1.0
    else:
        margin = _MARGIN * (high - low)
    return low - margin, high + margin


def sweep_axes(rect: QRectF, view: SweepView, theme: Theme, scale: float = 1.0) -> Axes | None:
    """Return where `draw_sweep` places its axes, untitled; None without values."""
    values = value_range(view)
    if values is None or view.angles.size < 2:
        return None
    font = lettering(theme, "small", scale)
    line = line_height(font)
    top, bottom = line + 12 * scale, 2 * line + 14 * scale
    height = max(rect.height() - top - bottom, 1.0)
    texts = tick_texts(_value_ticks(values, height, scale))
    widest = max((QFontMetricsF(font).horizontalAdvance(text) for text in texts), default=0.0)
    left = widest + (_TICK + 16) * scale
    width = max(rect.width() - left - 18 * scale, 1.0)
    area = QRectF(rect.left() + left, rect.top() + top, width, height)
    return Axes(area, (float(view.angles[0]), float(view.angles[-1])), values)


def value_at(view: SweepView, values: FloatArray, angle: float) -> float:
    """Return a curve's value at an angle, between its points; NaN where it is not defined."""
    return float(np.interp(angle, view.angles, values))


def curves_as_text(view: SweepView) -> str:
    """Return angles and curves as tab-separated columns at full precision."""
    header = ["angle, °", *(_curve_name(view, side, sheet) for side, sheet, _ in view.curves)]
    columns = [view.angles, *(values for _, _, values in view.curves)]
    rows = np.stack(columns, axis=1).tolist()
    return "\n".join(["\t".join(header), *("\t".join(map(repr, row)) for row in rows)])


def _curve_name(view: SweepView, side: str, sheet: int) -> str:
    """Return what a curve is called: its letter, and its sheet where there are several."""
    several = any(number > 0 for _, number, _ in view.curves)
    return f"{side} {_SHEETS[sheet]}" if several else side


def _value_ticks(values: tuple[float, float], height: float, scale: float) -> tuple[float, ...]:
    """Return the ticks of the value axis."""
    return nice_ticks(*values, max(2, int(height / (_TICK_SPACING_Y * scale))))


def _draw_grid(
    painter: QPainter, axes: Axes, view: SweepView, theme: Theme, scale: float
) -> None:
    """Draw the grid and its numbers, the two axes, and the line of the pin."""
    painter.setFont(lettering(theme, "small", scale))
    area = axes.area
    ticks = _value_ticks(axes.values, area.height(), scale)
    for value, text in zip(ticks, tick_texts(ticks), strict=True):
        y = axes.y(value)
        painter.setPen(QPen(theme.colour("hairline"), scale))
        painter.drawLine(QPointF(area.left(), y), QPointF(area.right(), y))
        painter.setPen(theme.colour("secondary"))
        draw_text(painter, QPointF(area.left() - (_TICK + 3) * scale, y), text, 1.0, 0.5)
    count = max(2, int(area.width() / (_TICK_SPACING_X * scale)))
    for angle in angle_ticks(*axes.angles, count):
        x = axes.x(angle)
        painter.setPen(QPen(theme.colour("hairline"), scale))
        painter.drawLine(QPointF(x, area.top()), QPointF(x, area.bottom() + _TICK * scale))
        painter.setPen(theme.colour("secondary"))
        text = f"{number_text(angle, 3) if angle % 1 else int(angle)}°".replace("-", MINUS)
        draw_text(painter, QPointF(x, area.bottom() + (_TICK + 5) * scale), text, 0.5, 0.0)
    painter.setPen(QPen(theme.colour("faint"), scale))
    painter.drawLine(area.bottomLeft(), area.bottomRight())
    painter.drawLine(area.topLeft(), area.bottomLeft())
    if axes.values[0] < 0.0 < axes.values[1]:
        painter.drawLine(QPointF(area.left(), axes.y(0.0)), QPointF(area.right(), axes.y(0.0)))


def _draw_words(
    painter: QPainter, rect: QRectF, axes: Axes, view: SweepView, theme: Theme, scale: float
) -> None:
    """Write what the axes mean and which line is whose."""
    font = lettering(theme, "small", scale)
    middle = (rect.top() + axes.area.top()) / 2
    left = _draw_letters(painter, QPointF(axes.area.right(), middle), view, theme, scale)
    painter.setFont(font)
    painter.setPen(theme.colour("secondary"))
    start = QPointF(rect.left() + 10 * scale, middle)
    label = f"{view.value_label}  ·  {view.notice}" if view.notice else view.value_label
    draw_text(painter, start, elide(font, label, left - start.x() - 8 * scale), 0.0, 0.5)
    words = elide(font, f"angle from the pin, about {view.axis}", axes.area.width())
    below = QPointF(axes.area.center().x(), rect.bottom() - 6 * scale)
    draw_text(painter, below, words, 0.5, 1.0)


def _draw_letters(
    painter: QPainter, right: QPointF, view: SweepView, theme: Theme, scale: float
) -> float:
    """Draw line sample and letter of each side up to a point; return where they begin."""
    painter.setFont(lettering(theme, "small", scale, bold=True))
    x = right.x()
    for side in sorted({side for side, _, _ in view.curves}, reverse=True):
        painter.setPen(theme.side(side))
        x = draw_text(painter, QPointF(x, right.y()), side, 1.0, 0.5).left() - 29 * scale
        draw_sample(painter, QPointF(x, right.y()), 24 * scale, theme, side, scale)
        x -= 12 * scale
    return x


def _draw_curves(
    painter: QPainter, axes: Axes, view: SweepView, theme: Theme, scale: float
) -> None:
    """Draw the line of the pin, the curves, A over B, and a disc on each at the pin."""
    has_pin = axes.angles[0] <= 0.0 <= axes.angles[1]
    if has_pin:
        painter.setPen(QPen(theme.colour("alert"), scale))
        x = axes.x(0.0)
        painter.drawLine(QPointF(x, axes.area.top()), QPointF(x, axes.area.bottom()))
    ordered = sorted(view.curves, key=lambda curve: (curve[0], curve[1]), reverse=True)
    for side, sheet, values in ordered:
        points = axes.place(view.angles, values)
        draw_curve(painter, points, side_pen(theme, side, sheet, scale), scale)
    for side, _, values in ordered:
        value = value_at(view, values, 0.0)
        if has_pin and math.isfinite(value):
            painter.setPen(QPen(theme.colour("panel"), 1.2 * scale))
            painter.setBrush(theme.side(side))
            painter.drawEllipse(QPointF(axes.x(0.0), axes.y(value)), 4 * scale, 4 * scale)


# ---------------------------------------------------------------- widget
class SweepPlot(PlotFrame):
    """The sweep with the choice of the axis the pin is turned about.

    Signals
    -------
    angle_picked(float)
        Degrees from the pin: a press or an arrow key.
    axis_chosen(str)
    """

    angle_picked = Signal(float)
    axis_chosen = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Sweep", parent)
        self._view: SweepView | None = None
        self.axis = QComboBox(self)
        self.axis.setAccessibleName("Axis the pin is turned about")
        self.axis.setToolTip(
            "The axis about which the pin is turned: the normal of the section or a part axis"
        )
        # The list comes later than the first show, up to which Qt would measure it.
        self.axis.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
        self.axis.activated.connect(self._choose_axis)
        self.header.addWidget(self.axis)
        self.canvas.setAccessibleDescription(
            "Press or left and right keys: turn the pin. Ctrl+C: copy the numbers."
        )

    def show_view(self, view: SweepView) -> None:
        """Draw this."""
        self._view = view
        self.title.set_whole(view.title)
        with QSignalBlocker(self.axis):
            self.axis.clear()
            for key, words in view.choices:
                self.axis.addItem(words, key)
            self.axis.setCurrentIndex(self.axis.findData(view.chosen))
        self.canvas.update()

    def readout(self, angle: float) -> list[tuple[str, QColor]]:
        """Return the lines of the card beside the mouse: the angle, and each curve's value."""
        view = self._view
        if view is None:
            return []
        lines = [(f"{angle:.1f}°".replace("-", MINUS), self.theme.colour("secondary"))]
        for side, sheet, values in view.curves:
            text = number_text(value_at(view, values, angle))
            lines.append((f"{_curve_name(view, side, sheet)}  {text}", self.theme.side(side)))
        return lines

    # ------------------------------------------------------------ as a frame asks
    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the sweep as on the screen."""
        if self._view is not None:
            draw_sweep(painter, rect, self._view, theme, scale)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the sweep with its title."""
        if self._view is not None:
            draw_sweep(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw the line under the mouse and the card of its values."""
        axes = self._axes()
        if self.hover is None or axes is None or not axes.area.contains(self.hover):
            return
        x = self.hover.x()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(self.theme.colour("ink", 0.35), 1.0))
        painter.drawLine(QPointF(x, axes.area.top()), QPointF(x, axes.area.bottom()))
        draw_chip(painter, self.hover, self.readout(axes.angle_at(x)), rect, self.theme)

    def copy_text(self) -> str:
        """Return angles and curves as tab-separated columns."""
        return "" if self._view is None else curves_as_text(self._view)

    def press(self, point: QPointF) -> None:
        """Move the pin to the angle of a press."""
        axes = self._axes()
        if axes is not None and axes.area.contains(point):
            self.angle_picked.emit(axes.angle_at(point.x()))

    def step(self, right: int, up: int) -> None:
        """Move the pin by degrees along its arc."""
        if right and self._axes() is not None:
            self.angle_picked.emit(float(right))

    def _axes(self) -> Axes | None:
        """Return where the axes lie in the area; None while nothing is drawn."""
        if self._view is None:
            return None
        return sweep_axes(QRectF(self.canvas.rect()), self._view, self.theme)

    def _choose_axis(self, index: int) -> None:
        """Ask for another axis."""
        key = str(self.axis.itemData(index))
        if self._view is not None and key != self._view.chosen:
            self.axis_chosen.emit(key)
