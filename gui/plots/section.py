"""The polar section: a quantity round the section plane, A and B on one ground."""

from __future__ import annotations

import math
from itertools import zip_longest

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QColor, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import QWidget

from core.arrays import FloatArray
from gui.plots.frame import PlotFrame
from gui.plots.grid import MINUS, number_text
from gui.plots.legend import draw_strip, split_strip
from gui.plots.lettering import below_note, draw_chip, draw_notice, draw_title, draw_top_note
from gui.plots.plane_combo import PlaneCombo
from gui.plots.polar import PolarGround, Rim, draw_ground, polar_ground
from gui.plots.strokes import band_path, draw_signed_curve, side_pen
from gui.theme import Theme
from gui.viewdata import Curve, SectionView

_NARROW = 380.0  # pixels: in a narrower picture the note on dots stands above the plane
_TITLED = 300  # pixels of the plot from which the header has room for the title
_MIDDLE = 5.0  # pixels round the centre in which an angle means nothing
_REACH = 1.25  # the mouse reads values up to this many rims from the centre
_SAME_CROSSING = 1e-9  # relative: a closed curve meets its own end on the ray


# ---------------------------------------------------------------- drawing
def draw_section(
    painter: QPainter,
    rect: QRectF,
    view: SectionView,
    theme: Theme,
    scale: float = 1.0,
    titled: bool = False,
) -> None:
    """Draw a polar section.

    Parameters
    ----------
    painter : QPainter
        Of the screen, a picture, an SVG or a PDF; the ground behind is not filled.
    rect : QRectF
        Pixels of the painter.
    view : SectionView
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
    if view.curves and view.radius > 0.0:
        _draw_body(painter, rect, view, theme, scale)
    else:
        draw_notice(painter, rect, view.notice, theme, scale)
    painter.restore()


def section_ground(
    rect: QRectF, view: SectionView, theme: Theme, scale: float = 1.0
) -> PolarGround:
    """Return where `draw_section` places the plane in `rect`, when it writes no title."""
    area, _ = split_strip(rect, _has_strip(view), theme, scale)
    area = below_note(area, _top_note(rect, view, scale), theme, scale)
    return polar_ground(area, view.radius, _rim(view), theme, scale)


def values_at(curve: Curve, angle: float) -> FloatArray:
    """Return where a curve crosses the ray at an angle (radians): none, one or more values.

    Innermost first, negative where the curve says so. The points need not stand at even
    angles nor in their order: a folded wave surface is crossed three times.
    """
    x, y = curve.points
    ahead = math.cos(angle) * x + math.sin(angle) * y
    aside = math.cos(angle) * y - math.sin(angle) * x
    # Half-open, so that a vertex on the ray counts once; NaN compares false.
    above, below = aside > 0.0, aside <= 0.0
    start = np.flatnonzero((below[:-1] & above[1:]) | (above[:-1] & below[1:]))
    share = aside[start] / (aside[start] - aside[start + 1])
    radius = ahead[start] + share * (ahead[start + 1] - ahead[start])
    start, radius = start[radius > 0.0], radius[radius > 0.0]
    order = np.argsort(radius)
    start, radius = start[order], radius[order]
    first = np.diff(radius, prepend=-np.inf) > _SAME_CROSSING * radius
    if curve.negative is not None:
        radius = np.where(curve.negative[start], -radius, radius)
    return np.asarray(radius[first], dtype=np.float64)


def shown_value(view: SectionView, radius: FloatArray) -> FloatArray:
    """Return the values that stand at a radius of the drawing; the sign stays."""
    if view.logarithmic is None:
        return radius
    low, high = view.logarithmic
    return np.asarray(np.sign(radius) * low * (high / low) ** np.abs(radius))


def curves_as_text(view: SectionView) -> str:
    """Return the curves as tab-separated columns at full precision: angle and value of each."""
    columns = [column for curve in view.curves for column in _columns(curve, view)]
    return "\n".join("\t".join(row) for row in zip_longest(*columns, fillvalue=""))


def _columns(curve: Curve, view: SectionView) -> tuple[list[str], list[str]]:
    """Return the two columns of a curve, each with its header."""
    name = " ".join(part for part in (curve.side, curve.label) if part)
    x, y = curve.points
    angles, radii = np.degrees(np.arctan2(y, x)), shown_value(view, np.hypot(x, y))
    if curve.negative is not None:
        radii = np.where(curve.negative, -radii, radii)
    header = f"{name}, {view.unit}" if view.unit else name
    return ([f"{name}, angle, °", *map(repr, angles.tolist())],
            [header, *map(repr, radii.tolist())])  # fmt: skip


def _rim(view: SectionView) -> Rim:
    """Return what is written on the ground of a section."""
    return Rim(view.rings, view.axis_labels, view.directions, view.unit, view.far_labels)


def _draw_body(
    painter: QPainter, rect: QRectF, view: SectionView, theme: Theme, scale: float
) -> None:
    """Draw the ground, the curves and everything about them."""
    ground, rim = section_ground(rect, view, theme, scale), _rim(view)
    placed = [ground.place(curve.points) for curve in view.curves]
    obstacles = [*placed, _pin_ray(ground, view.pin_angle)]
    draw_ground(painter, ground, rim, obstacles, theme, scale)
    _draw_bands(painter, ground, view, theme)
    _draw_ticks(painter, ground, view, theme, scale)
    # A lies over B, the fastest sheet over the others.
    order = sorted(
        range(len(placed)), key=lambda i: (view.curves[i].side, view.curves[i].sheet)
    )
    for index in reversed(order):
        curve = view.curves[index]
        pens = (side_pen(theme, curve.side, curve.sheet, scale),
                side_pen(theme, curve.side, curve.sheet, scale, negative=True))  # fmt: skip
        dotted = curve.leaves if curve.negative is None else curve.negative
        draw_signed_curve(painter, placed[index], dotted, pens, scale)
    if view.pin_angle is not None:
        _draw_pin(painter, ground, view, theme, scale)
    _, strip = split_strip(rect, _has_strip(view), theme, scale)
    above = _top_note(rect, view, scale)
    below = [note for note in _notes(view) if note != above]
    draw_strip(painter, strip, view.legend, below, theme, scale)
    draw_top_note(painter, rect, above, theme, scale)


def _top_note(rect: QRectF, view: SectionView, scale: float) -> str:
    """Return the line above the plane: the notice, or what has no room in a narrow strip."""
    is_narrow = rect.width() < _NARROW * scale
    dotted = view.negative_note if view.negative_note in _notes(view) else ""
    return view.notice or (dotted if is_narrow else "")


def _has_strip(view: SectionView) -> bool:
    """Tell whether anything stands under the plane."""
    return bool(view.legend or _notes(view))


def _notes(view: SectionView) -> list[str]:
    """Return the small print of a section."""
    has_negative = any(
        dotted is not None and dotted.any()
        for curve in view.curves
        for dotted in (curve.negative, curve.leaves)
    )
    has_band = any(curve.band is not None for curve in view.curves)
    return [note for note, shown in ((view.negative_note, has_negative), ("band ±1σ", has_band))
            if note and shown]  # fmt: skip


def _draw_bands(
    painter: QPainter, ground: PolarGround, view: SectionView, theme: Theme
) -> None:
    """Fill the bands of one standard uncertainty."""
    painter.setPen(Qt.PenStyle.NoPen)
    for curve in view.curves:
        if curve.band is not None:
            inner, outer = ground.place(curve.band[0]), ground.place(curve.band[1])
            painter.setBrush(theme.side(curve.side, 0.20))
            painter.drawPath(band_path(inner, outer))


def _draw_ticks(
    painter: QPainter, ground: PolarGround, view: SectionView, theme: Theme, scale: float
) -> None:
    """Draw the polarisation ticks: short lines along the displacement."""
    if view.ticks is None:
        return
    painter.setPen(QPen(theme.colour("secondary"), 1.1 * scale))
    starts, ends = ground.place(view.ticks[0]), ground.place(view.ticks[1])
    for start, end in zip(starts.T, ends.T, strict=True):
        if np.isfinite(start).all() and np.isfinite(end).all():
            painter.drawLine(QPointF(*start), QPointF(*end))


def _pin_ray(ground: PolarGround, angle: float | None) -> FloatArray:
    """Return points along the ray of the pin, shape (2, N) in pixels."""
    if angle is None:
        return np.empty((2, 0))
    along = np.linspace(0.0, ground.radius, 200)
    return ground.place(np.stack([along * math.cos(angle), along * math.sin(angle)]))


def _draw_pin(
    painter: QPainter, ground: PolarGround, view: SectionView, theme: Theme, scale: float
) -> None:
    """Draw the ray of the pin, and a disc where it crosses each curve."""
    angle = view.pin_angle or 0.0
    painter.setPen(QPen(theme.colour("alert"), 1.0 * scale))
    painter.drawLine(ground.centre, ground.at(angle, ground.rim))
    for curve in view.curves:
        painter.setPen(QPen(theme.colour("panel"), 1.2 * scale))
        painter.setBrush(theme.side(curve.side))
        for value in values_at(curve, angle):
            point = ground.at(angle, abs(float(value)) * ground.per_unit)
            painter.drawEllipse(point, 4.0 * scale, 4.0 * scale)


# ---------------------------------------------------------------- widget
class SectionPlot(PlotFrame):
    """The polar section with the choice of its plane.

    Signals
    -------
    angle_picked(float)
        Radians from the axis to the right, counter-clockwise: a press, a drag or an arrow key.
    plane_chosen(str)
        The key of a listed plane, or what was typed.
    """

    angle_picked = Signal(float)
    plane_chosen = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Section", parent)
        self._view: SectionView | None = None
        self.plane = PlaneCombo(self)
        self.header.addWidget(self.plane)
        self.plane.chosen.connect(self.plane_chosen)
        self.plane.restored.connect(self.clear_error)
        self.canvas.setAccessibleDescription(
            "Press, drag or arrow keys: turn the pin in this plane. Ctrl+C: copy the numbers."
        )

    def show_view(self, view: SectionView) -> None:
        """Draw this."""
        self._view = view
        self.title.set_whole(view.title)
        self.plane.show_plane(view.plane, view.planes)
        if not self.plane.is_wrong():
            self.set_message("")
        self.canvas.update()

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Leave the narrow header to the plane: the bar above says which quantity it is."""
        super().resizeEvent(event)
        self.title.setVisible(self.width() >= _TITLED)

    def show_error(self, message: str) -> None:
        """Mark the plane that was typed, and say why it cannot be read."""
        self.plane.mark_wrong(True)
        self.set_message(message)

    def clear_error(self) -> None:
        """Take the mark away."""
        self.plane.mark_wrong(False)
        self.set_message("")

    def readout(self, angle: float) -> list[tuple[str, QColor]]:
        """Return the lines of the card beside the mouse: the angle, and each curve's values."""
        view = self._view
        if view is None:
            return []
        right, up = view.axis_labels
        degrees = f"{math.degrees(angle):.1f}°".replace("-", MINUS)
        lines = [(f"{degrees} from {right} to {up}", self.theme.colour("secondary"))]
        for curve in view.curves:
            found = shown_value(view, values_at(curve, angle)).tolist()
            values = [number_text(value) for value in found]
            words = [curve.side, curve.label, ", ".join(values) or "–", view.unit]
            text = "  ".join(word for word in words if word)
            lines.append((text, self.theme.side(curve.side)))
        return lines

    # ------------------------------------------------------------ as a frame asks
    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the section as on the screen."""
        if self._view is not None:
            draw_section(painter, rect, self._view, theme, scale)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the section with its title."""
        if self._view is not None:
            draw_section(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw the ray under the mouse and the card of its values."""
        ground = self._ground()
        if self.hover is None or ground is None or not self._reads(ground, self.hover):
            return
        angle = ground.angle_of(self.hover)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(self.theme.colour("ink", 0.35), 1.0))
        painter.drawLine(ground.centre, ground.at(angle, ground.rim))
        draw_chip(painter, self.hover, self.readout(angle), rect, self.theme)

    def copy_text(self) -> str:
        """Return the curves as tab-separated columns."""
        return "" if self._view is None else curves_as_text(self._view)

    def press(self, point: QPointF) -> None:
        """Put the pin at the angle of a press."""
        ground = self._ground()
        if ground is not None and _distance(ground, point) > _MIDDLE:
            self.angle_picked.emit(ground.angle_of(point))

    def drag(self, point: QPointF) -> None:
        """Let the pin follow a drag."""
        self.press(point)

    def step(self, right: int, up: int) -> None:
        """Move the pin by degrees, counter-clockwise with the left and the upper arrow."""
        if self._view is not None and self._view.pin_angle is not None:
            self.angle_picked.emit(self._view.pin_angle + math.radians(up - right))

    def _ground(self) -> PolarGround | None:
        """Return where the plane lies in the area; None while nothing is drawn."""
        if self._view is None or not self._view.curves or self._view.radius <= 0.0:
            return None
        return section_ground(QRectF(self.canvas.rect()), self._view, self.theme)

    @staticmethod
    def _reads(ground: PolarGround, point: QPointF) -> bool:
        """Tell whether the mouse is where values are read."""
        return _MIDDLE < _distance(ground, point) < _REACH * ground.rim


def _distance(ground: PolarGround, point: QPointF) -> float:
    """Return the pixels from the centre to a point."""
    away = point - ground.centre
    return math.hypot(away.x(), away.y())
