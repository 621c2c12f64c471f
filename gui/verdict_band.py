"""The verdict band: the state of the constants in one line that is always seen."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QColor,
    QContextMenuEvent,
    QFontMetricsF,
    QKeyEvent,
    QKeySequence,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QPolygonF,
)
from PySide6.QtWidgets import QMenu, QSizePolicy, QWidget

from gui.theme import LIGHT, Theme
from gui.viewdata import Mark, VerdictView
from gui.widgets.forms import claims, put_on_clipboard

HEIGHT = 40
MARGIN = 16.0
MARK = 13.0
GAP = 10.0
BETWEEN = "  ·  "
LEAST_PIECE = 90.0  # a fact cut shorter than this says nothing
HINT = "Click (F7) to see whether the table can be trusted."
ROLES: dict[Mark, str] = {"stable": "good", "doubtful": "doubt", "unstable": "alert"}
SAID: dict[Mark, str] = {
    "stable": "stable",
    "doubtful": "doubtful within the uncertainties",
    "unstable": "unstable",
}


def draw_verdict(
    painter: QPainter, rect: QRectF, view: VerdictView, theme: Theme, scale: float = 1.0
) -> None:
    """Draw the mark, the headline in bold, and as many facts as there is room for."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    side = MARK * scale
    left = rect.x() + MARGIN * scale
    box = QRectF(left, rect.center().y() - side / 2, side, side)
    draw_mark(painter, box, view.mark, theme.colour(ROLES[view.mark]))
    left += side + GAP * scale
    right = rect.right() - (MARGIN + 14) * scale
    centre = Qt.AlignmentFlag.AlignVCenter
    painter.setFont(theme.font("body", scale, bold=True))
    painter.setPen(theme.colour("ink" if view.mark == "stable" else ROLES[view.mark]))
    metrics = QFontMetricsF(painter.font())
    headline = metrics.elidedText(view.headline, Qt.TextElideMode.ElideRight, right - left)
    painter.drawText(QRectF(left, rect.y(), right - left, rect.height()), centre, headline)
    left += metrics.horizontalAdvance(headline) + 1.5 * GAP * scale
    painter.setFont(theme.font("body", scale))
    painter.setPen(theme.colour("secondary"))
    facts = fit_facts(QFontMetricsF(painter.font()), view.facts, right - left, scale)
    painter.drawText(QRectF(left, rect.y(), right - left, rect.height()), centre, facts)
    painter.restore()


def draw_mark(painter: QPainter, box: QRectF, mark: Mark, colour: QColor) -> None:
    """Draw a disc for stable, a triangle for doubtful, a square for unstable."""
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(colour)
    if mark == "stable":
        painter.drawEllipse(box)
    elif mark == "unstable":
        painter.drawRect(box.adjusted(1, 1, -1, -1))
    else:
        top = QPointF(box.center().x(), box.top())
        painter.drawPolygon(QPolygonF([top, box.bottomRight(), box.bottomLeft()]))


def fit_facts(
    metrics: QFontMetricsF, facts: tuple[str, ...], room: float, scale: float = 1.0
) -> str:
    """Return the facts that fit in a line; the last may be elided, the rest are counted."""
    whole = BETWEEN.join(facts)
    if metrics.horizontalAdvance(whole) <= room:
        return whole
    for count in range(len(facts) - 1, -1, -1):
        tail = f"{BETWEEN if count else ''}and {len(facts) - count} more"
        head = BETWEEN.join(facts[:count])
        if metrics.horizontalAdvance(head + tail) <= room:
            return head + tail
    enough = room >= LEAST_PIECE * scale
    return metrics.elidedText(whole, Qt.TextElideMode.ElideRight, room) if enough else ""


class VerdictBand(QWidget):
    """The band on the screen.

    Signals
    -------
    opened()
        A click, Enter or Space: the sheet under the band is to be opened, or put away.
    """

    opened = Signal()

    def __init__(self) -> None:
        super().__init__()
        self._view = VerdictView("stable", "", (), "")
        self._theme = LIGHT
        self._is_open = False
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.setAttribute(Qt.WidgetAttribute.WA_Hover)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("Verdict on the constants")

    def show_view(self, view: VerdictView) -> None:
        """Show a verdict."""
        self._view = view
        said = f"{SAID[view.mark]}: {view.headline}. {'. '.join(view.facts)}"
        self.setAccessibleDescription(said)
        self.setToolTip("\n".join((view.headline, *view.facts, HINT)))
        self.update()

    def set_theme(self, theme: Theme) -> None:
        """Draw in another dress."""
        self._theme = theme
        self.update()

    def sizeHint(self) -> QSize:
        """Ask for one line over the whole width."""
        line = QFontMetricsF(self._theme.font("body", bold=True)).height()
        return QSize(900, max(HEIGHT, int(line) + 18))

    def minimumSizeHint(self) -> QSize:
        """Make do with the headline."""
        return QSize(240, self.sizeHint().height())

    def show_open(self, is_open: bool) -> None:
        """Point the hint down while the sheet is away, and up while it is open."""
        self._is_open = is_open
        self.update()

    def copy(self) -> None:
        """Copy the verdict with its facts and detail."""
        parts = (self._view.headline, *self._view.facts, self._view.detail)
        put_on_clipboard("\n".join(part for part in parts if part))

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the band, its hairline, and the hint that it opens."""
        painter = QPainter(self)
        ground = self._theme.colour("hover" if self.underMouse() else "panel")
        painter.fillRect(self.rect(), ground)
        painter.fillRect(0, self.height() - 1, self.width(), 1, self._theme.colour("hairline"))
        draw_verdict(painter, QRectF(self.rect()), self._view, self._theme)
        self._draw_hint(painter)
        if self.hasFocus():
            painter.setPen(QPen(self._theme.colour("a"), 1, Qt.PenStyle.DotLine))
            painter.drawRect(self.rect().adjusted(3, 3, -4, -4))

    def _draw_hint(self, painter: QPainter) -> None:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        rise = 5 if self._is_open else -5
        tip = QPointF(self.width() - MARGIN - 5, self.height() / 2 - rise / 2)
        painter.setPen(QPen(self._theme.colour("secondary"), 1.5))
        painter.drawPolyline(QPolygonF([tip + QPointF(-5, rise), tip, tip + QPointF(5, rise)]))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """Open the sheet, or put it away."""
        is_inside = self.rect().contains(event.position().toPoint())
        if event.button() == Qt.MouseButton.LeftButton and is_inside:
            self.opened.emit()

    def event(self, event: QEvent) -> bool:
        """Keep copying for the band."""
        return claims(event, QKeySequence.StandardKey.Copy) or super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Open the sheet with Enter or Space; copy with Ctrl+C."""
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space):
            self.opened.emit()
        else:
            super().keyPressEvent(event)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer to copy."""
        menu = QMenu(self)
        menu.addAction("&Copy\tCtrl+C", self.copy)
        menu.exec(event.globalPos())
