"""The strip under a plot: whose line is whose, and the small print."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QFontMetricsF, QPainter

from gui.plots.lettering import draw_text, elide, lettering, line_height
from gui.plots.strokes import draw_sample
from gui.theme import Theme

_EDGE = 10.0  # pixels from the border of the area
_SAMPLE = 24.0  # length of a line sample
_GAP = 5.0
_NARROW = 330.0  # pixels: a shorter strip has the letters of the sides only
_BETWEEN = 14.0  # from one entry to the next
_NOTES_SHARE = 0.4  # of the strip, for the notes where the entries are long


def strip_height(theme: Theme, scale: float = 1.0) -> float:
    """Return the height of the strip in pixels."""
    return line_height(lettering(theme, "small", scale)) + 8.0 * scale


def split_strip(
    rect: QRectF, wanted: bool, theme: Theme, scale: float = 1.0
) -> tuple[QRectF, QRectF]:
    """Return the area above the strip and the strip, which is empty when not wanted."""
    height = strip_height(theme, scale) if wanted else 0.0
    strip = QRectF(rect.left(), rect.bottom() - height, rect.width(), height)
    return rect.adjusted(0.0, 0.0, 0.0, -height), strip


def draw_strip(
    painter: QPainter,
    strip: QRectF,
    entries: Sequence[tuple[str, str]],
    notes: Sequence[str],
    theme: Theme,
    scale: float = 1.0,
) -> None:
    """Draw line sample, letter and words of each side from the left, the notes at the right."""
    if strip.width() < _NARROW * scale:
        entries = [(side, "") for side, _ in entries]  # a few letters of words say nothing
    left, right = strip.left() + _EDGE * scale, strip.right() - _EDGE * scale
    middle = strip.center().y() - 2.0 * scale
    font = lettering(theme, "small", scale)
    if notes:
        painter.setFont(font)
        painter.setPen(theme.colour("secondary"))
        wanted = sum(_wants(entries, theme, scale)) + _BETWEEN * scale * len(entries)
        share = max(_NOTES_SHARE * (right - left), right - left - wanted)
        text = elide(font, " · ".join(notes), share)
        right = draw_text(painter, QPointF(right, middle), text, 1.0, 0.5).left()
        right -= _BETWEEN * scale
    x = left
    for (side, words), room in zip(entries, _rooms(entries, right - left, theme, scale),
                                   strict=True):  # fmt: skip
        _draw_entry(painter, QPointF(x, middle), side, words, room, theme, scale)
        x += room + _BETWEEN * scale


def _lead(theme: Theme, scale: float) -> float:
    """Return the width of a line sample and its letter."""
    bold = QFontMetricsF(lettering(theme, "small", scale, bold=True))
    return (_SAMPLE + 2 * _GAP) * scale + bold.horizontalAdvance("A")


def _wants(entries: Sequence[tuple[str, str]], theme: Theme, scale: float) -> list[float]:
    """Return the width that each entry wants."""
    metrics = QFontMetricsF(lettering(theme, "small", scale))
    lead = _lead(theme, scale)
    return [lead + metrics.horizontalAdvance(words) + 1.0 for _, words in entries]


def _rooms(
    entries: Sequence[tuple[str, str]], width: float, theme: Theme, scale: float
) -> list[float]:
    """Return the width of each entry: what it wants, or a fair share when that is too much."""
    wants = _wants(entries, theme, scale)
    free = width - _BETWEEN * scale * max(0, len(wants) - 1)
    rooms = list(wants)
    # The shortest are served first; what they leave is shared among the longer ones.
    for served, index in enumerate(sorted(range(len(wants)), key=wants.__getitem__)):
        rooms[index] = min(wants[index], free / (len(wants) - served))
        free -= rooms[index]
    return rooms


def _draw_entry(
    painter: QPainter,
    left: QPointF,
    side: str,
    words: str,
    room: float,
    theme: Theme,
    scale: float,
) -> None:
    """Draw one entry: the line, the letter in its colour, the words."""
    draw_sample(painter, left, _SAMPLE * scale, theme, side, scale)
    painter.setFont(lettering(theme, "small", scale, bold=True))
    box = draw_text(painter, left + QPointF((_SAMPLE + _GAP) * scale, 0.0), side, 0.0, 0.5)
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    painter.setPen(theme.colour("secondary"))
    start = QPointF(box.right() + _GAP * scale, left.y())
    text = elide(font, words, left.x() + room - start.x())
    draw_text(painter, start, text, 0.0, 0.5)
