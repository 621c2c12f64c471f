"""The source picture: where the pulse of a point source has come to after a given time."""

from __future__ import annotations

import math

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSignalBlocker, Qt, Signal
from PySide6.QtGui import QColor, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import QAbstractSpinBox, QDoubleSpinBox, QWidget

from core.state import SOURCE_TIMES_US
from gui.plots.frame import ElidedLabel, PlotFrame
from gui.plots.grid import MINUS, number_text
from gui.plots.legend import draw_strip, split_strip
from gui.plots.lettering import below_note, draw_chip, draw_notice, draw_title, draw_top_note
from gui.plots.polar import PolarGround, Rim, draw_ground, polar_ground
from gui.plots.strokes import draw_signed_curve, side_pen
from gui.theme import Theme
from gui.viewdata import SourceView

_UNIT = "mm"
_NOTE = "dotted: energy leaves the plane"
_FIRST_WORDS = "wavefronts in "
_TIME_WIDTH = 88  # pixels of the field of the time
_CONTROLS = 230  # pixels of the header that the list of faces and the time take
_NARROW = 380.0  # pixels: in a narrower picture the note stands above the plane
_NO_ARROWS = """QDoubleSpinBox::up-button, QDoubleSpinBox::down-button {
    width: 0; border: none; }"""
_FAINT = 0.7


# ---------------------------------------------------------------- drawing
def draw_source(
    painter: QPainter,
    rect: QRectF,
    view: SourceView,
    theme: Theme,
    scale: float = 1.0,
    titled: bool = False,
) -> None:
    """Draw the wavefronts of a point source.

    Parameters
    ----------
    painter : QPainter
        Of the screen, a picture, an SVG or a PDF; the ground behind is not filled.
    rect : QRectF
        Pixels of the painter.
    view : SourceView
    theme : Theme
    scale : float
        Size of text and strokes; 1 on the screen.
    titled : bool
        Write title and time at the top: for pictures that stand alone.
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if titled:
        words = f"{view.title} · after {number_text(view.time_us)} µs"
        rect = draw_title(painter, rect, words, theme, scale)
    if view.curves and _radius(view) > 0.0:
        _draw_body(painter, rect, view, theme, scale)
    else:
        draw_notice(painter, rect, view.notice, theme, scale)
    painter.restore()


def source_ground(
    rect: QRectF, view: SourceView, theme: Theme, scale: float = 1.0
) -> PolarGround:
    """Return where `draw_source` places the plane in `rect` when it writes no title."""
    area, _ = split_strip(rect, True, theme, scale)
    area = below_note(area, _top_note(rect, view, scale), theme, scale)
    return polar_ground(area, _radius(view), _rim(view), theme, scale)


def _radius(view: SourceView) -> float:
    """Return the radius of the outermost ring, mm."""
    return max((radius for radius, _ in view.rings), default=0.0)


def _leaves_plane(view: SourceView) -> bool:
    """Tell whether any part of the wavefronts is dotted."""
    return any(leaves.any() for _, _, _, leaves in view.curves)


def _top_note(rect: QRectF, view: SourceView, scale: float) -> str:
    """Return the line above the plane: the notice, or what has no room under it."""
    is_narrow = rect.width() < _NARROW * scale
    return view.notice or (_NOTE if is_narrow and _leaves_plane(view) else "")


def _rim(view: SourceView) -> Rim:
    """Return what is written on the ground."""
    return Rim(view.rings, view.axis_labels, unit=_UNIT, far_labels=view.far_labels)


def _draw_body(
    painter: QPainter, rect: QRectF, view: SourceView, theme: Theme, scale: float
) -> None:
    """Draw the ground, the wavefronts, the source and the strip under them."""
    ground, rim = source_ground(rect, view, theme, scale), _rim(view)
    placed = [ground.place(points) for _, _, points, _ in view.curves]
    draw_ground(painter, ground, rim, placed, theme, scale)
    order = sorted(range(len(placed)), key=lambda i: view.curves[i][:2])
    for index in reversed(order):
        side, sheet, _, leaves = view.curves[index]
        faint = side_pen(theme, side, sheet, scale, negative=True)
        faint.setColor(theme.side(side, _FAINT))
        pens = (side_pen(theme, side, sheet, scale), faint)
        draw_signed_curve(painter, placed[index], leaves, pens, scale)
    painter.setPen(QPen(theme.colour("panel"), 1.2 * scale))
    painter.setBrush(theme.colour("ink"))
    painter.drawEllipse(ground.centre, 3.5 * scale, 3.5 * scale)
    _, strip = split_strip(rect, True, theme, scale)
    entries = [(side, "") for side in sorted({curve[0] for curve in view.curves})]
    above = _top_note(rect, view, scale)
    notes = [_NOTE] if _leaves_plane(view) and above != _NOTE else []
    draw_strip(painter, strip, entries, notes, theme, scale)
    draw_top_note(painter, rect, above, theme, scale)


# ---------------------------------------------------------------- widget
class SourcePicture(PlotFrame):
    """The source picture with its time.

    Signals
    -------
    time_chosen(float)
        Microseconds.
    """

    time_chosen = Signal(float)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Point source", parent)
        self._view: SourceView | None = None
        self.time = QDoubleSpinBox(self)
        self.time.setAccessibleName("Time since the pulse, microseconds")
        self.time.setToolTip("Time since the pulse, µs")
        self.time.setSuffix(" µs")
        self.time.setMaximumWidth(_TIME_WIDTH)
        self.time.setDecimals(2)
        self.time.setRange(*SOURCE_TIMES_US)
        # Not NoButtons: in a styled spin box Qt then makes the field one pixel wide.
        self.time.setStyleSheet(_NO_ARROWS)
        self.time.setStepType(QAbstractSpinBox.StepType.AdaptiveDecimalStepType)
        self.time.setKeyboardTracking(False)
        self.time.valueChanged.connect(self.time_chosen)
        self.before_time = ElidedLabel(self)
        self.before_time.setProperty("role", "secondary")
        middle = Qt.AlignmentFlag.AlignVCenter
        self.before_time.setAlignment(Qt.AlignmentFlag.AlignRight | middle)
        self.header.addWidget(self.before_time, 10)
        self.header.addWidget(self.time)
        self.canvas.setAccessibleDescription("Ctrl+C: copy the wavefronts as numbers.")

    def show_view(self, view: SourceView) -> None:
        """Draw this."""
        self._view = view
        self.title.set_whole(view.title)
        with QSignalBlocker(self.time):
            self.time.setValue(view.time_us)
        self._say_before_time()
        self.canvas.update()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Say what the time is of in as many words as there is room for."""
        super().resizeEvent(event)
        self._say_before_time()

    def _say_before_time(self) -> None:
        """Write the words before the time, without the first where all do not fit."""
        if self._view is not None:
            whole = self._view.before_time
            room = self.width() - _CONTROLS
            fits = self.before_time.fontMetrics().horizontalAdvance(whole) <= room
            self.before_time.set_whole(whole if fits else whole.removeprefix(_FIRST_WORDS))

    def readout(self, angle: float, distance_mm: float) -> list[tuple[str, QColor]]:
        """Return the lines of the card beside the mouse: how far from the source, and where."""
        view = self._view
        if view is None:
            return []
        right, up = view.axis_labels
        degrees = f"{math.degrees(angle):.1f}°".replace("-", MINUS)
        lines = [(f"{degrees} from {right} to {up}", self.theme.colour("secondary"))]
        lines.append((f"{number_text(distance_mm)} {_UNIT}", self.theme.colour("ink")))
        speed = number_text(distance_mm / view.time_us)
        lines.append((f"reached by {speed} km/s", self.theme.colour("secondary")))
        return lines

    # ------------------------------------------------------------ as a frame asks
    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the wavefronts as on the screen."""
        if self._view is not None:
            draw_source(painter, rect, self._view, theme, scale)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the wavefronts with title and time."""
        if self._view is not None:
            draw_source(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw a ray to the mouse and the card of the place under it."""
        view = self._view
        if self.hover is None or view is None or not view.curves or not _radius(view):
            return
        ground = source_ground(rect, view, self.theme)
        away = self.hover - ground.centre
        pixels = math.hypot(away.x(), away.y())
        if pixels > ground.rim:
            return
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(self.theme.colour("ink", 0.35), 1.0))
        painter.drawLine(ground.centre, QPointF(self.hover))
        lines = self.readout(ground.angle_of(self.hover), pixels / ground.per_unit)
        draw_chip(painter, self.hover, lines, rect, self.theme)

    def copy_text(self) -> str:
        """Return the wavefronts as tab-separated rows: side, sheet, x, y, leaves the plane."""
        if self._view is None or not self._view.curves:
            return ""
        right, up = self._view.axis_labels
        rows = [f"side\tsheet\t{right}, mm\t{up}, mm\tleaves the plane"]
        for side, sheet, points, leaves in self._view.curves:
            for (x, y), out in zip(points.T.tolist(), np.asarray(leaves).tolist(), strict=True):
                rows.append(f"{side}\t{sheet + 1}\t{x!r}\t{y!r}\t{'yes' if out else 'no'}")
        return "\n".join(rows)
