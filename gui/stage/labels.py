"""What Qt draws over the scene: letters, marks, title, notice and colour bar.

One routine serves the panes and every exported picture, vector formats included.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import (
    QColor,
    QFont,
    QFontMetricsF,
    QPainter,
    QPainterPath,
    QPen,
    QPolygonF,
)

from core.arrays import BoolArray, FloatArray
from gui.stage import composition, picking
from gui.stage.camera import Camera, Size
from gui.theme import Theme
from gui.viewdata import DirectionMark, PaneView, Triad
from gui.widgets.colour_bar import bar_height, draw_colour_bar

_MARGIN = 10.0  # from the edge of the pane to its words


@dataclass
class _Sketch:
    """A picture being lettered: its painter, its measures, and where words stand already."""

    painter: QPainter
    view: PaneView
    camera: Camera
    theme: Theme
    scale: float
    origin: QPointF  # upper left corner of the scene
    size: Size  # of the scene in pixels
    taken: list[QRectF] = field(default_factory=list)

    def project(self, points: FloatArray) -> list[QPointF]:
        """Return where points (3, N) in radii are in the picture."""
        pixels, _ = self.camera.project(points, self.size)
        return [self.origin + QPointF(float(x), float(y)) for x, y in pixels.T]

    def hidden(self, points: FloatArray) -> BoolArray:
        """Tell which points (3, N) are behind a sheet."""
        return picking.are_hidden(self.view, self.camera, self.size, points)


def scene_rect(
    rect: QRectF, theme: Theme, scale: float = 1.0, has_bar: bool = True
) -> QRectF:
    """Return the part of a pane the scene fills: between the title and the colour bar."""
    title = QFontMetricsF(theme.font("title", scale, bold=True)).height()
    above = math.ceil(title + 0.8 * _MARGIN * scale)
    below = math.ceil(bar_height(theme, scale) + 6.0 * scale) if has_bar else 0
    height = max(rect.height() - above - below, 1.0)
    return QRectF(rect.left(), rect.top() + above, rect.width(), height)


def draw_decorations(
    painter: QPainter,
    rect: QRectF,
    view: PaneView,
    camera: Camera,
    theme: Theme,
    scale: float = 1.0,
    has_bar: bool = True,
) -> None:
    """Draw everything that belongs to a pane besides the scene itself.

    Parameters
    ----------
    painter : QPainter
    rect : QRectF
        The whole pane; the scene fills `scene_rect` of it.
    view, camera, theme
    scale : float
        Size of text and marks; 1 on the screen.
    has_bar : bool
        False where one colour bar elsewhere serves several panes.
    """
    scene = scene_rect(rect, theme, scale, has_bar)
    size = (max(int(scene.width()), 1), max(int(scene.height()), 1))
    sketch = _Sketch(painter, view, camera, theme, scale, scene.topLeft(), size)
    painter.save()
    painter.setRenderHints(
        QPainter.RenderHint.Antialiasing | QPainter.RenderHint.TextAntialiasing
    )
    _draw_title(sketch, rect)
    _draw_marks(sketch)
    for triad in view.triads:
        _draw_letters(sketch, triad)
    _draw_notice(sketch, scene)
    painter.restore()
    if has_bar and composition.layers(view):
        inset = _MARGIN * scale
        strip = QRectF(rect.left() + inset, scene.bottom(), rect.width() - 2 * inset,
                       rect.bottom() - scene.bottom() - 4.0 * scale)
        draw_colour_bar(painter, strip, view.scale, theme, scale)


def _draw_title(sketch: _Sketch, rect: QRectF) -> None:
    """Write the letter of the side in its colour, and the title after it."""
    letter_font = sketch.theme.font("title", sketch.scale, bold=True)
    font = sketch.theme.font("body", sketch.scale)
    inset = _MARGIN * sketch.scale
    baseline = rect.top() + 0.7 * inset + QFontMetricsF(letter_font).ascent()
    left = rect.left() + inset
    sketch.painter.setFont(letter_font)
    sketch.painter.setPen(sketch.theme.side(sketch.view.side))
    sketch.painter.drawText(QPointF(left, baseline), sketch.view.side)
    left += QFontMetricsF(letter_font).horizontalAdvance(sketch.view.side) + 0.8 * inset
    metrics = QFontMetricsF(font)
    title = metrics.elidedText(
        sketch.view.title, Qt.TextElideMode.ElideRight, rect.right() - inset - left
    )
    sketch.painter.setFont(font)
    sketch.painter.setPen(sketch.theme.colour("secondary"))
    sketch.painter.drawText(QPointF(left, baseline), title)
    width = left + metrics.horizontalAdvance(title) - rect.left()
    height = baseline + sketch.scale - rect.top()
    sketch.taken.append(QRectF(rect.left(), rect.top(), width, height))


def _draw_letters(sketch: _Sketch, triad: Triad) -> None:
    """Write the letters of a triad just past its tips, faint where a sheet hides the tip."""
    is_crystal = triad.kind == "crystal"
    font = sketch.theme.font("body", sketch.scale, bold=not is_crystal)
    font.setItalic(is_crystal)
    tips = composition.AXIS_REACH * np.asarray(triad.directions, dtype=float).T
    centre = sketch.project(np.zeros((3, 1)))[0]
    hidden = sketch.hidden(tips)
    for number, tip in enumerate(sketch.project(tips)):
        away = tip - centre
        length = math.hypot(away.x(), away.y())
        step = away / length if length > 4.0 * sketch.scale else QPointF(0.6, -0.8)
        role = "secondary" if is_crystal or hidden[number] else "ink"
        anchor = tip + step * (10.0 * sketch.scale)
        _write(sketch, anchor, triad.labels[number], font, sketch.theme.colour(role), step)


def _write(
    sketch: _Sketch, anchor: QPointF, text: str, font: QFont, colour: QColor, step: QPointF
) -> None:
    """Write a few letters about a point, or a little beside it where others stand already."""
    metrics = QFontMetricsF(font)
    width, height = metrics.horizontalAdvance(text), metrics.capHeight()
    reach = 1.6 * max(width, height)
    aside = QPointF(-step.y(), step.x())
    first = QRectF(anchor.x() - width / 2, anchor.y() - height / 2, width, height)
    places = [
        first.translated(move * reach) for move in (QPointF(), aside, -aside, step, -step)
    ]
    box = next((place for place in places if _is_free(sketch, place)), first)
    _draw_with_halo(sketch, box.bottomLeft(), text, font, colour)
    sketch.taken.append(box)


def _is_free(sketch: _Sketch, box: QRectF) -> bool:
    """Tell whether no words stand in a box."""
    return not any(box.intersects(other) for other in sketch.taken)


def _draw_with_halo(
    sketch: _Sketch, baseline: QPointF, text: str, font: QFont, colour: QColor
) -> None:
    """Draw text as text, with a halo of the ground that keeps it legible on any colour."""
    path = QPainterPath()
    path.addText(baseline, font, text)
    halo = QPen(sketch.theme.colour("stage", 0.7), 2.6 * sketch.scale)
    halo.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
    sketch.painter.strokePath(path, halo)
    sketch.painter.setFont(font)
    sketch.painter.setPen(colour)
    sketch.painter.drawText(baseline, text)


def _draw_marks(sketch: _Sketch) -> None:
    """Draw every mark at both its ends, the pin last and above all others."""
    points = picking.mark_points(sketch.view)
    pairs = [
        (mark, point)
        for mark, point in zip(sketch.view.marks, points, strict=True)
        if point is not None
    ]
    if not pairs:
        return
    tips = np.stack([point for _, point in pairs], axis=1)
    ends = np.concatenate([tips, -tips], axis=1)
    places, hidden = sketch.project(ends), sketch.hidden(ends)
    hidden |= _cut_off(sketch, ends)
    count = len(pairs)
    for number in sorted(range(count), key=lambda k: pairs[k][0].kind == "pin"):
        mark = pairs[number][0]
        far = number + count
        if mark.kind == "pin":
            _draw_pin(sketch, places[number], places[far], hidden[number], hidden[far])
            continue
        for end in (number, far):
            if not hidden[end]:
                _SHAPES[mark.kind](sketch, places[end])
        if mark.label and not (hidden[number] and hidden[far]):
            _label(sketch, mark, places[far if hidden[number] else number])


def _cut_off(sketch: _Sketch, points: FloatArray) -> BoolArray:
    """Tell which points lie in the half that is cut away."""
    kept = composition.kept_half(sketch.view, sketch.camera)
    if kept is None:
        return np.zeros(points.shape[1], dtype=bool)
    return np.asarray(kept @ points < -1e-9)


def _label(sketch: _Sketch, mark: DirectionMark, place: QPointF) -> None:
    """Write the label of a mark beside it, where there is room."""
    font = sketch.theme.font("small", sketch.scale)
    metrics = QFontMetricsF(font)
    width, height = metrics.horizontalAdvance(mark.label), metrics.capHeight()
    gap = 12.0 * sketch.scale
    offsets = (
        QPointF(gap, -height / 2), QPointF(-gap - width, -height / 2),
        QPointF(-width / 2, -gap - height), QPointF(-width / 2, gap),
    )
    for offset in offsets:
        box = QRectF(place + offset, place + offset + QPointF(width, height))
        if _is_free(sketch, box):
            _draw_tag(sketch, box, mark.label, font)
            return


def _draw_tag(sketch: _Sketch, box: QRectF, text: str, font: QFont) -> None:
    """Write text on a small tag of the ground's colour, legible on any surface."""
    scale, painter = sketch.scale, sketch.painter
    tag = box.adjusted(-4.0 * scale, -3.5 * scale, 4.0 * scale, 3.5 * scale)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(sketch.theme.colour("stage", 0.86))
    painter.drawRoundedRect(tag, 3.0 * scale, 3.0 * scale)
    painter.setFont(font)
    painter.setPen(sketch.theme.colour("ink"))
    painter.drawText(box.bottomLeft(), text)
    sketch.taken.append(tag)


def _draw_pin(
    sketch: _Sketch, place: QPointF, far: QPointF, is_hidden: bool, is_far_hidden: bool
) -> None:
    """Draw the pin: a disc where it is seen, a faded ring where it is behind.

    Its other end, where every property is the same, is a thin ring when it is seen.
    """
    scale, painter = sketch.scale, sketch.painter
    colour = sketch.theme.colour("alert")
    halo = QColor("white")
    if not is_far_hidden:
        painter.setBrush(Qt.BrushStyle.NoBrush)
        for pen in (QPen(halo, 3.4 * scale), QPen(colour, 1.6 * scale)):
            painter.setPen(pen)
            painter.drawEllipse(far, 4.2 * scale, 4.2 * scale)
    if is_hidden:
        colour.setAlphaF(0.55)
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(QPen(colour, 1.4 * scale, Qt.PenStyle.DotLine))
        painter.drawEllipse(place, 5.5 * scale, 5.5 * scale)
        return
    painter.setBrush(colour)
    painter.setPen(QPen(halo, 2.0 * scale))
    painter.drawEllipse(place, 5.5 * scale, 5.5 * scale)
    reach = 8.0 * scale
    sketch.taken.append(QRectF(place.x() - reach, place.y() - reach, 2 * reach, 2 * reach))


def _draw_shape(sketch: _Sketch, place: QPointF, corners: tuple[tuple[float, float], ...],
                is_filled: bool) -> None:
    """Draw a small polygon with a halo; filled with ink, or with the ground and an ink edge."""
    scale = sketch.scale
    shape = QPolygonF([place + QPointF(x, y) * scale for x, y in corners])
    ink, ground = sketch.theme.colour("ink"), sketch.theme.colour("stage")
    pens = [QPen(ground, 3.2 * scale), QPen(ink, 1.3 * scale)]
    for pen in pens:
        pen.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
        sketch.painter.setPen(pen)
        sketch.painter.setBrush(ink if is_filled else ground)
        sketch.painter.drawPolygon(shape)


def _draw_least(sketch: _Sketch, place: QPointF) -> None:
    """Draw a triangle that points down."""
    _draw_shape(sketch, place, ((-4.5, -3.5), (4.5, -3.5), (0.0, 4.5)), is_filled=True)


def _draw_greatest(sketch: _Sketch, place: QPointF) -> None:
    """Draw a triangle that points up."""
    _draw_shape(sketch, place, ((-4.5, 3.5), (4.5, 3.5), (0.0, -4.5)), is_filled=True)


def _draw_axis(sketch: _Sketch, place: QPointF) -> None:
    """Draw an open diamond."""
    _draw_shape(
        sketch, place, ((0.0, -4.2), (4.2, 0.0), (0.0, 4.2), (-4.2, 0.0)), is_filled=False
    )


_SHAPES: dict[str, Callable[[_Sketch, QPointF], None]] = {
    "least": _draw_least,
    "greatest": _draw_greatest,
    "axis": _draw_axis,
}


def _draw_notice(sketch: _Sketch, scene: QRectF) -> None:
    """Write why there is nothing to see in the middle, or what is missing quietly below."""
    if not sketch.view.notice:
        return
    inset = 3 * _MARGIN * sketch.scale
    room = scene.adjusted(inset, inset, -inset, -4.0 * sketch.scale)
    has_something = bool(composition.layers(sketch.view))
    font = sketch.theme.font("small" if has_something else "body", sketch.scale)
    sketch.painter.setFont(font)
    sketch.painter.setPen(sketch.theme.colour("secondary"))
    place = Qt.AlignmentFlag.AlignBottom if has_something else Qt.AlignmentFlag.AlignVCenter
    flags = Qt.AlignmentFlag.AlignHCenter | place | Qt.TextFlag.TextWordWrap
    sketch.painter.drawText(room, int(flags), sketch.view.notice)
