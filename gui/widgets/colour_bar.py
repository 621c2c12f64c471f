"""The colour bar: how a value becomes a colour, and the strip that says so.

Every coloured picture of the window, and every exported one, is read through these few
functions, so that the same number has the same colour everywhere.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QLinearGradient, QPainter, QPen

from gui.theme import Theme, colour_table
from gui.viewdata import ScaleView

_STOPS = 33  # colours along the strip; between them the gradient is straight
_LEAST_SHRINK = 0.75  # of the letters of a long title
_EVERYWHERE = "the same in every direction"
_LONGEST = 320.0  # a longer strip is no easier to read


def colour_range(scale: ScaleView) -> tuple[float, float]:
    """Return the values at the two ends of the colour table.

    A diverging table is centred on zero, so its ends are ± the greater magnitude; any other
    table runs from `low` to `high`. The ends of an empty range are set one apart about its
    value, which then has the colour in the middle.
    """
    low, high = scale.low, scale.high
    if scale.diverging:
        greatest = max(abs(low), abs(high))
        low, high = -greatest, greatest
    return (low, high) if high > low else (low - 0.5, low + 0.5)


def is_logarithmic(scale: ScaleView) -> bool:
    """Tell whether colours follow the logarithm: asked for, and both ends positive."""
    return scale.logarithmic and scale.low > 0.0 and scale.high > scale.low


def table_position(
    scale: ScaleView, values: npt.NDArray[np.float64]
) -> npt.NDArray[np.float64]:
    """Return where values fall in the colour table, 0 to 1 and not clipped; NaN stays NaN."""
    low, high = colour_range(scale)
    numbers = np.asarray(values, dtype=np.float64)
    if not is_logarithmic(scale):
        return np.asarray((numbers - low) / (high - low), dtype=np.float64)
    with np.errstate(invalid="ignore", divide="ignore"):
        position = (np.log(numbers) - math.log(low)) / (math.log(high) - math.log(low))
    return np.asarray(position, dtype=np.float64)


def bar_height(theme: Theme, scale: float = 1.0) -> float:
    """Return the height in pixels that the colour bar with its two lines of text wants."""
    line = QFontMetricsF(theme.font("small", scale)).height()
    return 2.0 * line + 17.0 * scale


def draw_colour_bar(
    painter: QPainter, rect: QRectF, view: ScaleView, theme: Theme, scale: float = 1.0
) -> None:
    """Draw a horizontal colour bar in the middle of a rectangle.

    The title stands above it, the least and greatest value under its ends, and between them
    whichever ticks find room.

    Parameters
    ----------
    painter : QPainter
    rect : QRectF
        At least `bar_height` high.
    view : ScaleView
    theme : Theme
    scale : float
        Size of text and strokes; 1 on the screen.
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    font = theme.font("small", scale)
    painter.setFont(font)
    metrics = QFontMetricsF(font)
    strip = _strip(rect, view, metrics, scale)
    painter.setPen(theme.colour("secondary"))
    title = _fitted_title(painter, view.title, rect.width(), theme, scale)
    top = QRectF(
        rect.left(), strip.top() - metrics.height() - 2 * scale, rect.width(), metrics.height()
    )
    painter.drawText(top, Qt.AlignmentFlag.AlignCenter, title)
    painter.setFont(font)
    painter.setPen(QPen(theme.colour("hairline"), scale))
    painter.setBrush(_gradient(strip, view))
    painter.drawRect(strip)
    _draw_numbers(painter, strip, view, theme, scale)
    painter.restore()


def _fitted_title(
    painter: QPainter, text: str, width: float, theme: Theme, scale: float
) -> str:
    """Set the painter to letters in which a title fits; return it, shortened if none do."""
    wanted = QFontMetricsF(painter.font()).horizontalAdvance(text)
    if wanted > width:
        painter.setFont(theme.font("small", scale * max(_LEAST_SHRINK, width / wanted)))
    metrics = QFontMetricsF(painter.font())
    return metrics.elidedText(text, Qt.TextElideMode.ElideRight, width)


def _strip(rect: QRectF, view: ScaleView, metrics: QFontMetricsF, scale: float) -> QRectF:
    """Return where the coloured strip goes: centred, between its two lines of text."""
    texts = (metrics.horizontalAdvance(text) / 2 for text in (view.low_text, view.high_text))
    beside = max(metrics.averageCharWidth() * 4, *texts)  # the numbers reach past its ends
    beside += metrics.averageCharWidth()
    width = min(rect.width() - 2.0 * beside, _LONGEST * scale)
    width = max(width, 24.0 * scale)
    height = 7.0 * scale
    content = 2.0 * metrics.height() + height + 6.0 * scale
    top = rect.center().y() - content / 2 + metrics.height() + 2.0 * scale
    return QRectF(rect.center().x() - width / 2, top, width, height)


def _gradient(strip: QRectF, view: ScaleView) -> QLinearGradient:
    """Return the colours from the least to the greatest value, even in table position."""
    ends = table_position(view, np.array([view.low, view.high]))
    gradient = QLinearGradient(strip.topLeft(), strip.topRight())
    table = colour_table(view.diverging)
    for stop in np.linspace(0.0, 1.0, _STOPS):
        position = ends[0] + stop * (ends[1] - ends[0])
        index = int(np.clip(position * 255.0 + 0.5, 0, 255)) if np.isfinite(position) else 0
        red, green, blue = (int(c) for c in table[index, :3])
        gradient.setColorAt(float(stop), QColor(red, green, blue))
    return gradient


def _draw_numbers(
    painter: QPainter, strip: QRectF, view: ScaleView, theme: Theme, scale: float
) -> None:
    """Write the two ends under the strip, and the ticks that do not touch a neighbour."""
    metrics = QFontMetricsF(painter.font())
    if view.low == view.high:
        _write_one_value(painter, strip, view, theme, scale)
        return
    taken: list[tuple[float, float]] = []
    entries = [(view.low, view.low_text), (view.high, view.high_text), *view.ticks]
    places = _places(view, [value for value, _ in entries])
    baseline = strip.bottom() + 4.0 * scale + metrics.ascent()
    for number, ((_, text), place) in enumerate(zip(entries, places, strict=True)):
        if not -1e-6 <= place <= 1.0 + 1e-6:
            continue
        x = strip.left() + place * strip.width()
        half = metrics.horizontalAdvance(text) / 2
        gap = metrics.averageCharWidth()
        if any(x + half + gap > left and x - half - gap < right for left, right in taken):
            continue
        taken.append((x - half, x + half))
        is_end = number < 2
        painter.setPen(QPen(theme.colour("ink" if is_end else "secondary"), scale))
        if not is_end:
            painter.drawLine(QPointF(x, strip.bottom()), QPointF(x, strip.bottom() + 3 * scale))
        painter.drawText(QPointF(x - half, baseline), text)


def _write_one_value(
    painter: QPainter, strip: QRectF, view: ScaleView, theme: Theme, scale: float
) -> None:
    """Write the one value of a constant quantity under the middle of the strip."""
    metrics = QFontMetricsF(painter.font())
    text = f"{view.low_text}, {_EVERYWHERE}"
    baseline = strip.bottom() + 4.0 * scale + metrics.ascent()
    painter.setPen(QPen(theme.colour("ink"), scale))
    left = strip.center().x() - metrics.horizontalAdvance(text) / 2
    painter.drawText(QPointF(left, baseline), text)


def _places(view: ScaleView, values: list[float]) -> list[float]:
    """Return where values stand along the strip, 0 at the least and 1 at the greatest."""
    low, high, *rest = table_position(view, np.array([view.low, view.high, *values]))
    return [float((place - low) / (high - low)) for place in rest]
