"""The fitted speeds round a plane, with the readings that lie in it."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Signal
from PySide6.QtGui import QPainter, QPen

from gui.plots.frame import PlotFrame
from gui.plots.lettering import draw_chip, draw_title
from gui.plots.plane_combo import PlaneCombo
from gui.plots.section import curves_as_text, draw_section, section_ground
from gui.speeds.marks import DIMMED, apart, card_lines, diamond
from gui.speeds.viewdata import SectionPoint, SpeedsSectionView
from gui.theme import Theme

_NEAR = 10.0  # pixels within which the mouse means a reading


def draw_speeds_section(
    painter: QPainter,
    rect: QRectF,
    view: SpeedsSectionView,
    theme: Theme,
    scale: float = 1.0,
    chosen: int = 0,
    titled: bool = False,
) -> None:
    """Draw curves and readings; `chosen` is the row, from 1, that is ringed."""
    painter.save()
    painter.setOpacity(DIMMED if view.pending else 1.0)
    if titled:
        rect = draw_title(painter, rect, view.section.title, theme, scale)
    draw_section(painter, rect, view.section, theme, scale)
    if view.section.curves:
        _draw_points(painter, rect, view, theme, scale, chosen)
    painter.restore()


def _draw_points(
    painter: QPainter, rect: QRectF, view: SpeedsSectionView, theme: Theme, scale: float,
    chosen: int,
) -> None:
    """Draw a disc at each reading, a diamond at an outlier."""
    ground = section_ground(rect, view.section, theme, scale)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    for point in view.points:
        at = QPointF(*ground.place(np.array([point.x, point.y])))
        painter.setPen(QPen(theme.colour("panel"), 1.2 * scale))
        painter.setBrush(theme.colour("alert" if point.is_outlier else "b"))
        if point.is_outlier:
            painter.drawPolygon(diamond(at, 6.0 * scale))
        else:
            painter.drawEllipse(at, 4.2 * scale, 4.2 * scale)
        if point.row == chosen:
            painter.setPen(QPen(theme.colour("ink"), 1.4 * scale))
            painter.setBrush(theme.colour("ink", 0.0))
            painter.drawEllipse(at, 8.0 * scale, 8.0 * scale)


class SpeedsSection(PlotFrame):
    """The section. `plane_chosen(key or text)`; `row_picked(row)`, rows from 1."""

    plane_chosen = Signal(str)
    row_picked = Signal(int)

    def __init__(self) -> None:
        super().__init__("Section of the fitted speeds")
        self._view: SpeedsSectionView | None = None
        self._chosen = 0
        self.plane = PlaneCombo(self)
        self.plane.setAccessibleName("Plane of the fitted speeds")
        self.plane.setToolTip(
            "Plane of the section, crystal axes, with the number of readings in it: choose one,"
            " or type its normal, for example [1 1 0] or (1 0 2)"
        )
        self.header.addWidget(self.plane)
        self.plane.chosen.connect(self.plane_chosen)
        self.plane.restored.connect(self.clear_error)

    def show_view(self, view: SpeedsSectionView) -> None:
        """Draw this."""
        self._view = view
        self.title.set_whole(view.section.title)
        self.plane.show_plane(view.section.plane, view.section.planes)
        line = self.plane.lineEdit()
        if line is not None and not line.hasFocus():
            line.setCursorPosition(0)
        if not self.plane.is_wrong():
            self.set_message("")
        self.canvas.update()

    def show_row(self, row: int) -> None:
        """Ring the reading of a row."""
        if row != self._chosen:
            self._chosen = row
            self.canvas.update()

    def show_error(self, message: str) -> None:
        """Mark the plane that was typed, and say why it cannot be read."""
        self.plane.mark_wrong(True)
        self.set_message(message)

    def clear_error(self) -> None:
        """Take the mark away."""
        self.plane.mark_wrong(False)
        self.set_message("")

    def nearest(self, point: QPointF) -> SectionPoint | None:
        """Return the reading under the mouse."""
        view = self._view
        if view is None or not view.points or not view.section.curves:
            return None
        ground = section_ground(QRectF(self.canvas.rect()), view.section, self.theme)
        near = [(apart(QPointF(*ground.place(np.array([each.x, each.y]))), point), number)
                for number, each in enumerate(view.points)]  # fmt: skip
        distance, number = min(near)
        return view.points[number] if distance < _NEAR else None

    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw as on the screen."""
        if self._view is not None:
            draw_speeds_section(painter, rect, self._view, theme, scale, self._chosen)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw with the title."""
        if self._view is not None:
            draw_speeds_section(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw the card of the reading under the mouse."""
        found = None if self.hover is None else self.nearest(self.hover)
        if found is not None and self.hover is not None:
            draw_chip(painter, self.hover, card_lines(found.card, self.theme), rect, self.theme)

    def copy_text(self) -> str:
        """Return the curves as tab-separated columns."""
        return "" if self._view is None else curves_as_text(self._view.section)

    def press(self, point: QPointF) -> None:
        """Choose the reading under the mouse."""
        found = self.nearest(point)
        if found is not None:
            self.row_picked.emit(found.row)
