"""The strain spectrum: six eigenstiffnesses as bars, the live check of stability."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import (
    QColor,
    QContextMenuEvent,
    QFontMetricsF,
    QHelpEvent,
    QKeyEvent,
    QKeySequence,
    QPainter,
    QPaintEvent,
    QPen,
    QPolygonF,
)
from PySide6.QtWidgets import QMenu, QSizePolicy, QToolTip, QWidget

from gui.theme import LIGHT, Theme
from gui.viewdata import SpectrumBar, SpectrumView
from gui.widgets.forms import claims, put_on_clipboard, tab_separated, text_width

ROW = 21.0  # height of one bar with its gap, unscaled pixels
GAP = 8.0
MARK = 9.0  # side of the triangle that flags a bar near zero
BARS_SHARE = 0.3  # of the width is for the bars, the rest for words
NEAR_ZERO = 0.02  # of the mean of the positive bars: too short to be seen as a bar


@dataclass(frozen=True)
class _Places:
    """Where the columns of the drawing stand."""

    axis: float  # x of zero
    per_unit: float  # pixels per GPa
    values: float  # right edge of the numbers
    words: float  # left edge of the descriptions
    row: float  # height of a row


def bar_role(bar: SpectrumBar, view: SpectrumView) -> str:
    """Return the colour role of a bar: alert when negative, doubt when near zero."""
    positive = [each.value for each in view.bars if each.value > 0.0]
    mean = sum(positive) / len(positive) if positive else 0.0
    if bar.value < 0.0:
        return "alert"
    return "doubt" if bar.value <= NEAR_ZERO * mean else "a"


def draw_spectrum(
    painter: QPainter, rect: QRectF, view: SpectrumView, theme: Theme, scale: float = 1.0
) -> None:
    """Draw six bars with their values and strains, and the note below them."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setFont(theme.font("body", scale))
    places = _place(QFontMetricsF(painter.font()), rect, view, scale)
    for number, bar in enumerate(view.bars):
        line = QRectF(rect.x(), rect.y() + number * places.row, rect.width(), places.row)
        _draw_bar(painter, line, bar, bar_role(bar, view), places, theme, scale)
    bottom = rect.y() + len(view.bars) * places.row
    painter.setPen(QPen(theme.colour("secondary"), scale))
    painter.drawLine(QPointF(places.axis, rect.y()), QPointF(places.axis, bottom))
    if view.note:
        painter.setFont(theme.font("small", scale))
        painter.setPen(theme.colour("secondary"))
        under = QRectF(rect.x(), bottom + 3 * scale, rect.width(), rect.bottom() - bottom)
        painter.drawText(under, int(Qt.TextFlag.TextWordWrap), view.note)
    painter.restore()


def _place(
    metrics: QFontMetricsF, rect: QRectF, view: SpectrumView, scale: float
) -> _Places:
    """Share the width: bars on both sides of zero, then numbers, then words."""
    values = [bar.value for bar in view.bars]
    low, high = min([0.0, *values]), max([0.0, *values])
    span = (high - low) or 1.0
    room = rect.width() * BARS_SHARE
    per_unit = room / span
    is_flagged = any(bar_role(bar, view) != "a" for bar in view.bars)
    numbers = rect.x() + room + (GAP + (MARK + 2 if is_flagged else 0)) * scale
    right = numbers + text_width(metrics, (bar.text for bar in view.bars))
    return _Places(rect.x() - low * per_unit, per_unit, right, right + GAP * scale, ROW * scale)


def _draw_bar(
    painter: QPainter, line: QRectF, bar: SpectrumBar, role: str, places: _Places,
    theme: Theme, scale: float,
) -> None:
    height = places.row * 0.62
    top = line.y() + (places.row - height) / 2
    length = bar.value * places.per_unit
    shape = QRectF(places.axis, top, length, height).normalized()
    if shape.width() < 1.5 * scale:
        shape.setWidth(1.5 * scale)
    painter.fillRect(shape, theme.colour(role))
    is_plain = role == "a"
    if not is_plain:
        _draw_mark(painter, line, role, places, theme.colour(role), scale)
    centre = Qt.AlignmentFlag.AlignVCenter
    painter.setFont(theme.font("body", scale, bold=role == "alert"))
    painter.setPen(theme.colour("ink" if is_plain else role))
    painter.drawText(
        QRectF(line.x(), line.y(), places.values - line.x(), line.height()),
        centre | Qt.AlignmentFlag.AlignRight,
        bar.text,
    )
    painter.setFont(theme.font("body", scale))
    painter.setPen(theme.colour("secondary" if is_plain else role))
    room = line.right() - places.words
    words = f"near zero · {bar.strain}" if role == "doubt" else bar.strain
    shown = painter.fontMetrics().elidedText(words, Qt.TextElideMode.ElideRight, int(room))
    painter.drawText(QRectF(places.words, line.y(), room, line.height()), centre, shown)


def _draw_mark(
    painter: QPainter, line: QRectF, role: str, places: _Places, colour: QColor, scale: float
) -> None:
    """Draw a triangle (near zero) or a square (negative): the shapes of the verdict."""
    side = MARK * scale
    left = line.x() + line.width() * BARS_SHARE + GAP * scale / 2
    box = QRectF(left, line.center().y() - side / 2, side, side)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(colour)
    if role == "alert":
        painter.drawRect(box.adjusted(1, 1, -1, -1))
        return
    top = QPointF(box.center().x(), box.top())
    painter.drawPolygon(QPolygonF([top, box.bottomRight(), box.bottomLeft()]))


class StrainSpectrum(QWidget):
    """The bars on the screen, with a tooltip for each and copying as a table."""

    def __init__(self) -> None:
        super().__init__()
        self._view = SpectrumView((), "")
        self._theme = LIGHT
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        policy = QSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        policy.setHeightForWidth(True)
        self.setSizePolicy(policy)
        self.setAccessibleName("Strain spectrum")

    def show_view(self, view: SpectrumView) -> None:
        """Show six bars."""
        self._view = view
        self.setAccessibleDescription("; ".join(f"{b.text} {b.strain}" for b in view.bars))
        self.updateGeometry()
        self.update()

    def set_theme(self, theme: Theme) -> None:
        """Draw in another dress."""
        self._theme = theme
        self.update()

    def hasHeightForWidth(self) -> bool:
        """Say that the note takes more lines in a narrow place."""
        return True

    def heightForWidth(self, width: int) -> int:
        """Return the height of six rows and the note at a width."""
        bars = max(len(self._view.bars), 6) * ROW
        if not self._view.note:
            return int(bars + 2)
        metrics = QFontMetricsF(self._theme.font("small"))
        room = QRectF(0, 0, width, 1000)
        note = metrics.boundingRect(room, int(Qt.TextFlag.TextWordWrap), self._view.note)
        return int(bars + note.height() + 6)

    def sizeHint(self) -> QSize:
        """Ask for the height at the present width."""
        return QSize(300, self.heightForWidth(max(self.width(), 220)))

    def minimumSizeHint(self) -> QSize:
        """Ask for the height in full."""
        return QSize(220, self.heightForWidth(max(self.width(), 220)))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the bars."""
        painter = QPainter(self)
        draw_spectrum(painter, QRectF(self.rect()), self._view, self._theme)
        if self.hasFocus():
            painter.setPen(QPen(self._theme.colour("a"), 1, Qt.PenStyle.DotLine))
            painter.drawRect(self.rect().adjusted(0, 0, -1, -1))

    def event(self, event: QEvent) -> bool:
        """Tell about the bar under the pointer; keep copying for the widget."""
        if claims(event, QKeySequence.StandardKey.Copy):
            return True
        if event.type() == QEvent.Type.ToolTip and isinstance(event, QHelpEvent):
            row = int(event.pos().y() // ROW)
            bars = self._view.bars
            text = bars[row].tooltip or bars[row].strain if row < len(bars) else self._view.note
            QToolTip.showText(event.globalPos(), text, self)
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Copy with Ctrl+C."""
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        else:
            super().keyPressEvent(event)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer to copy."""
        menu = QMenu(self)
        menu.addAction("&Copy\tCtrl+C", self.copy)
        menu.exec(event.globalPos())

    def copy(self) -> None:
        """Copy the eigenstiffnesses at full precision, with their strains."""
        put_on_clipboard(tab_separated([(repr(b.value), b.strain) for b in self._view.bars]))
