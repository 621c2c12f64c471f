"""The polar ground: where a plane goes on the paper, its rings, axes and rim labels."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSizeF, Qt
from PySide6.QtGui import QFont, QFontMetricsF, QPainter, QPen

from core.arrays import BoolArray, FloatArray
from gui.plots.grid import MINUS
from gui.plots.lettering import Placement, draw_text, lettering, text_rect
from gui.theme import Theme

# Rays along which the texts of the rings may stand, degrees, the best liked first.
_TEXT_RAYS = (68.0, 22.0, 112.0, 158.0, -22.0, -68.0, 45.0, 135.0, -45.0, -112.0, 75.0,
              15.0, 52.0, 38.0, 105.0, 165.0, -15.0, -75.0, 128.0, 142.0)  # fmt: skip
_CLEARANCE = 2.0  # pixels from a ring's text to the nearest curve
SMALL_RIM = 70.0  # pixels: a smaller rim has no room for the names of directions
_RIM_GAP = 6.0  # pixels from the rim to its labels
_SPOKES_DEG = (30.0, 60.0, 120.0, 150.0)


@dataclass(frozen=True)
class PolarGround:
    """Where a plane lies on the paper: first axis to the right, second axis up.

    Attributes
    ----------
    centre : QPointF
    rim : float
        Pixels of the outermost ring.
    radius : float
        The same in the unit of the drawing.
    """

    centre: QPointF
    rim: float
    radius: float

    @property
    def per_unit(self) -> float:
        """Pixels per unit."""
        return self.rim / self.radius if self.radius > 0.0 else 0.0

    def place(self, points: FloatArray) -> FloatArray:
        """Return points of the plane, shape (2, ...), in pixels."""
        x = self.centre.x() + points[0] * self.per_unit
        y = self.centre.y() - points[1] * self.per_unit
        return np.stack([x, y])

    def at(self, angle: float, pixels: float) -> QPointF:
        """Return the point so many pixels from the centre, at an angle from the right."""
        return self.centre + QPointF(pixels * math.cos(angle), -pixels * math.sin(angle))

    def angle_of(self, point: QPointF) -> float:
        """Return the angle of a point of the paper, radians in (−π, π], from the right."""
        away = point - self.centre
        return math.atan2(-away.y(), away.x())


@dataclass(frozen=True)
class Rim:
    """What is written on a polar ground."""

    rings: Sequence[tuple[float, str]]
    axis_labels: tuple[str, str]
    directions: Sequence[tuple[float, str]] = ()
    unit: str = ""
    # The labels at the far ends of the two axes; without them the others with a minus before.
    far_labels: tuple[str, str] | None = None

    @property
    def far(self) -> tuple[str, str]:
        """The labels at the left and at the bottom."""
        right, up = self.axis_labels
        return self.far_labels or (MINUS + right, MINUS + up)


def polar_ground(
    rect: QRectF, radius: float, rim: Rim, theme: Theme, scale: float = 1.0
) -> PolarGround:
    """Return the largest ground that leaves room in `rect` for the labels round its rim."""
    metrics = QFontMetricsF(lettering(theme, "small", scale))
    bold = QFontMetricsF(lettering(theme, "small", scale, bold=True))
    beside = (*_lines(rim.axis_labels[0]), *_lines(rim.far[0]))
    letter = max(bold.horizontalAdvance(text) for text in beside)
    named = max((metrics.horizontalAdvance(text) for _, text in rim.directions), default=0.0)
    half = rect.width() / 2 - (_RIM_GAP + 4) * scale
    down = rect.height() / 2 - metrics.height() - _RIM_GAP * scale
    pixels = min(half - max(letter, named), down)
    if pixels < SMALL_RIM * scale:  # the names of the directions are left out: take their room
        pixels = min(half - letter, down, max(pixels, 0.99 * SMALL_RIM * scale))
    return PolarGround(rect.center(), max(pixels, 8.0 * scale), radius)


def draw_ground(
    painter: QPainter,
    ground: PolarGround,
    rim: Rim,
    curves: Sequence[FloatArray],
    theme: Theme,
    scale: float = 1.0,
) -> None:
    """Draw rings, spokes and axes, and everything written on and round them.

    `curves` are what will be drawn over it, each (2, N) in pixels: the rings' texts keep off
    them where they can.
    """
    placement = Placement(2.0 * scale)
    _draw_axis_letters(painter, ground, rim, placement, theme, scale)
    _draw_directions(painter, ground, rim, placement, theme, scale)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(QPen(theme.colour("hairline", 0.6), 0.8 * scale))
    for degrees in _SPOKES_DEG:
        angle = math.radians(degrees)
        painter.drawLine(ground.at(angle, ground.rim), ground.at(angle + math.pi, ground.rim))
    _draw_rings(painter, ground, rim, _cloud(curves), placement, theme, scale)
    painter.setPen(QPen(theme.colour("faint"), scale))
    for angle in (0.0, math.pi / 2):
        painter.drawLine(ground.at(angle, ground.rim), ground.at(angle + math.pi, ground.rim))


def _draw_rings(
    painter: QPainter,
    ground: PolarGround,
    rim: Rim,
    cloud: FloatArray,
    placement: Placement,
    theme: Theme,
    scale: float,
) -> None:
    """Draw the rings with their texts along the ray where most of these are free.

    The outermost text says the unit; others that would lie on a curve are left out.
    """
    painter.setFont(lettering(theme, "small", scale))
    rings = sorted(
        (radius * ground.per_unit, text) for radius, text in rim.rings if radius > 0.0
    )
    if not rings:
        return
    if rim.unit:
        rings[-1] = (rings[-1][0], f"{rings[-1][1]} {rim.unit}")
    boxes, clear = _best_ray(painter.font(), ground, rings, cloud, placement, scale)
    for index, (box, (pixels, text)) in enumerate(zip(boxes, rings, strict=True)):
        painter.setPen(QPen(theme.colour("hairline"), scale))
        # The outermost ring always says how large it is; the others are evenly spaced.
        if clear[index] or index == len(rings) - 1:
            _draw_broken_ring(painter, ground, pixels, box, 2.5 * scale)
            painter.setPen(theme.colour("secondary"))
            painter.drawText(box.bottomLeft(), text)
        else:
            painter.drawEllipse(ground.centre, pixels, pixels)


def _draw_broken_ring(
    painter: QPainter, ground: PolarGround, pixels: float, box: QRectF, pad: float
) -> None:
    """Draw a ring that pauses where its text stands, whatever the ground behind."""
    angle = ground.angle_of(box.center())
    across = abs(math.sin(angle)) * box.width() + abs(math.cos(angle)) * box.height()
    half = min((across / 2 + pad) / pixels, math.pi / 2)
    square = QRectF(ground.centre - QPointF(pixels, pixels), QSizeF(2 * pixels, 2 * pixels))
    start, span = math.degrees(angle + half), 360.0 - math.degrees(2 * half)
    painter.drawArc(square, round(16 * start), round(16 * span))


def draw_axis_ends(
    painter: QPainter,
    ground: PolarGround,
    labels: tuple[str, str],
    placement: Placement,
    theme: Theme,
    scale: float = 1.0,
) -> None:
    """Write the two axis letters at the right and the top of a rim."""
    painter.setFont(lettering(theme, "small", scale, bold=True))
    painter.setPen(theme.colour("ink"))
    right, up = labels
    placement.block(_draw_outside(painter, ground, math.pi / 2, up, _RIM_GAP * scale))
    pitch = QFontMetricsF(painter.font()).capHeight() + 4.0 * scale
    lines = _lines(right)
    for row, text in enumerate(lines):
        down = QPointF(_RIM_GAP * scale, (row - (len(lines) - 1) / 2) * pitch)
        placement.block(draw_text(painter, ground.at(0.0, ground.rim) + down, text, 0.0, 0.5))


def _lines(label: str) -> list[str]:
    """Return the lines of a label beside the rim.

    The numbers of a free direction stand one below the other: a row of them would take the
    drawing's room.
    """
    return label.split(" ")


def rim_text_box(
    ground: PolarGround, font: QFont, angle: float, text: str, gap: float
) -> QRectF:
    """Return the box of a text that stands outside the rim and faces it."""
    across, down = 0.5 - 0.5 * math.cos(angle), 0.5 + 0.5 * math.sin(angle)
    return text_rect(font, ground.at(angle, ground.rim + gap), text, across, down)


def _draw_outside(
    painter: QPainter, ground: PolarGround, angle: float, text: str, gap: float
) -> QRectF:
    """Write a text outside the rim and return its box."""
    box = rim_text_box(ground, painter.font(), angle, text, gap)
    painter.drawText(box.bottomLeft(), text)
    return box


def _draw_axis_letters(
    painter: QPainter,
    ground: PolarGround,
    rim: Rim,
    placement: Placement,
    theme: Theme,
    scale: float,
) -> None:
    """Write the axis letters at the ends of the axes, the negative ends more quietly."""
    draw_axis_ends(painter, ground, rim.axis_labels, placement, theme, scale)
    painter.setFont(lettering(theme, "small", scale))
    painter.setPen(theme.colour("faint"))
    for label, angle in zip(rim.far, (math.pi, -math.pi / 2), strict=True):
        box = _draw_outside(painter, ground, angle, label, _RIM_GAP * scale)
        placement.block(box)


def _draw_directions(
    painter: QPainter,
    ground: PolarGround,
    rim: Rim,
    placement: Placement,
    theme: Theme,
    scale: float,
) -> None:
    """Mark low-index directions on the rim, and name those whose label finds room."""
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    tick, gap = 3.5 * scale, (_RIM_GAP + 2.0) * scale
    is_small = ground.rim < SMALL_RIM * scale
    for angle, text in rim.directions:
        painter.setPen(QPen(theme.colour("secondary"), scale))
        painter.drawLine(ground.at(angle, ground.rim), ground.at(angle, ground.rim + tick))
        box = rim_text_box(ground, font, angle, text, gap)
        if text and not is_small and placement.claim(box):
            painter.drawText(box.bottomLeft(), text)


def _best_ray(
    font: QFont,
    ground: PolarGround,
    rings: Sequence[tuple[float, str]],
    cloud: FloatArray,
    placement: Placement,
    scale: float,
) -> tuple[list[QRectF], list[bool]]:
    """Return the boxes of the rings' texts along the ray that serves best, and which are free.

    The outermost text counts most, then how many are free, then the order of `_TEXT_RAYS`.
    """
    angles = np.radians(_TEXT_RAYS)
    sizes = [text_rect(font, QPointF(), text, 0.5, 0.5).size() for _, text in rings]
    halves = np.array([(size.width() / 2, size.height() / 2) for size in sizes])
    radii = np.array([pixels / ground.per_unit for pixels, _ in rings])
    middles = ground.place(radii * np.stack([np.cos(angles), np.sin(angles)])[:, :, None])
    near_curve = _touches(middles, halves.T + _CLEARANCE * scale, cloud)
    best: tuple[list[QRectF], list[bool]] = ([], [])
    for ray in range(len(angles)):
        places = zip(*middles[:, ray].tolist(), sizes, strict=True)
        boxes = [_box_at(x, y, size) for x, y, size in places]
        clear = [not near and placement.is_free(box)
                 for box, near in zip(boxes, near_curve[ray], strict=True)]  # fmt: skip
        if not best[0] or (clear[-1], sum(clear)) > (best[1][-1], sum(best[1])):
            best = boxes, clear
        if all(clear):
            break
    return best


def _box_at(x: float, y: float, size: QSizeF) -> QRectF:
    """Return a box with its middle at a point."""
    return QRectF(x - size.width() / 2, y - size.height() / 2, size.width(), size.height())


def _cloud(curves: Sequence[FloatArray]) -> FloatArray:
    """Return some points of all curves, shape (2, M), none of them NaN."""
    points = np.concatenate([curve[:, ::8] for curve in curves] or [np.empty((2, 0))], axis=1)
    return points[:, np.isfinite(points).all(axis=0)]


def _touches(middles: FloatArray, halves: FloatArray, cloud: FloatArray) -> BoolArray:
    """Return which boxes hold any of some points.

    Middles (2, rays, rings), half sizes (2, rings), points (2, M); result (rays, rings).
    """
    beside = np.abs(cloud[0] - middles[0][..., None]) < halves[0][:, None]
    above = np.abs(cloud[1] - middles[1][..., None]) < halves[1][:, None]
    return np.asarray((beside & above).any(axis=-1), dtype=np.bool_)
