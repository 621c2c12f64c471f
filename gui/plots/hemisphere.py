"""The hemisphere: a quantity over all directions at once, as a picture on a disc."""

from __future__ import annotations

import math
from functools import partial

import numpy as np
from PySide6.QtCore import QPointF, QRectF, QSignalBlocker, Qt, Signal
from PySide6.QtGui import QColor, QFontMetrics, QPaintEngine, QPainter, QPen, QResizeEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QComboBox,
    QGridLayout,
    QHBoxLayout,
    QPushButton,
    QWidget,
)

from core.arrays import FloatArray
from core.directional.projection import from_disc
from gui.plots.disc_marks import draw_marks
from gui.plots.disc_picture import disc_picture, undefined, value_in
from gui.plots.frame import PlotFrame
from gui.plots.grid import MINUS, number_text, short_text
from gui.plots.lettering import (
    Placement,
    draw_chip,
    draw_notice,
    draw_text,
    draw_title,
    elide,
    lettering,
    line_height,
    notice_box,
    text_rect,
)
from gui.plots.polar import PolarGround, Rim, draw_axis_ends, polar_ground
from gui.plots.strokes import draw_curve
from gui.theme import GREY_FOR_UNDEFINED, LIGHT, Theme, colour_table
from gui.viewdata import HemisphereView
from gui.widgets.colour_bar import bar_height, draw_colour_bar, table_position

PROJECTIONS = {"equal_area": "equal area", "stereographic": "stereographic"}
_HATCH = 6.0  # pixels between the lines where nothing is defined
_VECTOR_PIXELS, _MOST_PIXELS = 1024, 2048  # side of the picture in SVG and PDF; and ever
_LABELLED_LENGTH = 70.0  # pixels: a shorter contour gets no label
_STEP = 0.02  # of the disc's radius, for an arrow key
_WIDE_HEADER = 360  # pixels from which the choices have a button each
_RIM_SLACK = 1.06  # a press this far out still means the rim


# ---------------------------------------------------------------- drawing
def draw_hemisphere(
    painter: QPainter,
    rect: QRectF,
    view: HemisphereView,
    theme: Theme,
    scale: float = 1.0,
    titled: bool = False,
) -> None:
    """Draw a hemisphere with its contours, marks and colour bar.

    Parameters
    ----------
    painter : QPainter
        Of the screen, a picture, an SVG or a PDF; the ground behind is not filled.
    rect : QRectF
        Pixels of the painter.
    view : HemisphereView
    theme : Theme
    scale : float
        Size of text and strokes; 1 on the screen.
    titled : bool
        Write title and projection at the top: for pictures that stand alone.
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
    if titled:
        words = f"{view.title} · {PROJECTIONS[view.projection]}, upper hemisphere"
        rect = draw_title(painter, rect, words, theme, scale)
    ground = disc_ground(rect, view, theme, scale)
    defined = bool(np.isfinite(view.picture).any())
    if undefined(view.picture).any():
        _draw_hatch(painter, ground, scale)
    if defined:
        _draw_picture(painter, ground, view)
    _draw_over(painter, ground, view, theme, scale)
    if defined:
        draw_colour_bar(painter, _bar_rect(rect, theme, scale), view.scale, theme, scale)
        _draw_note(painter, rect, view.notice, theme, scale)
    else:
        _draw_plate(painter, rect, ground, view.notice, theme, scale)
    painter.restore()


def disc_ground(
    rect: QRectF, view: HemisphereView, theme: Theme, scale: float = 1.0
) -> PolarGround:
    """Return where `draw_hemisphere` places the disc in `rect`, when it writes no title."""
    below = _bar_rect(rect, theme, scale).height() + _note_height(view.notice, theme, scale)
    area = rect.adjusted(0.0, 0.0, 0.0, -below)
    return polar_ground(area, 1.0, Rim((), view.axis_labels), theme, scale)


def _bar_rect(rect: QRectF, theme: Theme, scale: float) -> QRectF:
    """Return the strip of the colour bar."""
    height = bar_height(theme, scale)
    return QRectF(rect.left(), rect.bottom() - height - 4 * scale, rect.width(), height)


def _note_height(text: str, theme: Theme, scale: float) -> float:
    """Return the height kept for a notice between the disc and the colour bar."""
    return line_height(lettering(theme, "small", scale)) if text else 0.0


def _draw_note(painter: QPainter, rect: QRectF, text: str, theme: Theme, scale: float) -> None:
    """Write a notice above the colour bar, shortened if need be."""
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    painter.setPen(theme.colour("secondary"))
    y = _bar_rect(rect, theme, scale).top() - 0.5 * _note_height(text, theme, scale)
    words = elide(font, text, rect.width() - 20 * scale)
    draw_text(painter, QPointF(rect.center().x(), y), words)


def _draw_picture(painter: QPainter, ground: PolarGround, view: HemisphereView) -> None:
    """Draw the coloured disc, as fine as the device shows it."""
    side = 2.0 * ground.rim
    pixels = math.ceil(side * painter.device().devicePixelRatio())
    if painter.paintEngine().type() != QPaintEngine.Type.Raster:
        pixels = max(pixels, _VECTOR_PIXELS)
    corner = ground.centre - QPointF(ground.rim, ground.rim)
    image = disc_picture(view, min(max(pixels, 2), _MOST_PIXELS))
    painter.drawImage(QRectF(corner.x(), corner.y(), side, side), image)


def _draw_hatch(painter: QPainter, ground: PolarGround, scale: float) -> None:
    """Fill the disc with grey and slanting lines, for what is not defined."""
    grey = QColor(GREY_FOR_UNDEFINED)
    grey.setAlphaF(0.18)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(grey)
    painter.drawEllipse(ground.centre, ground.rim, ground.rim)
    grey.setAlphaF(0.55)
    painter.setPen(QPen(grey, scale))
    along, across = QPointF(1.0, -1.0) / math.sqrt(2.0), QPointF(1.0, 1.0) / math.sqrt(2.0)
    for away in np.arange(-ground.rim, ground.rim, _HATCH * scale)[1:]:
        half = math.sqrt(max(0.0, ground.rim**2 - float(away) ** 2))
        middle = ground.centre + across * float(away)
        painter.drawLine(middle - along * half, middle + along * half)


def _draw_over(
    painter: QPainter, ground: PolarGround, view: HemisphereView, theme: Theme, scale: float
) -> None:
    """Draw contours, rim, axis letters and marks over the picture."""
    placement = Placement(2.0 * scale)
    _block_marks(ground, view, placement, scale)
    _draw_contours(painter, ground, view, placement, theme, scale)
    _draw_lines(painter, ground, view, theme, scale)
    painter.setPen(QPen(theme.colour("ink"), 1.2 * scale))
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.drawEllipse(ground.centre, ground.rim, ground.rim)
    for quarter in range(4):
        angle = quarter * math.pi / 2
        painter.drawLine(ground.at(angle, ground.rim), ground.at(angle, ground.rim + 4 * scale))
    draw_axis_ends(painter, ground, view.axis_labels, placement, theme, scale)
    draw_marks(painter, ground, view.marks, placement, theme, scale)


def _draw_lines(
    painter: QPainter, ground: PolarGround, view: HemisphereView, theme: Theme, scale: float
) -> None:
    """Draw lines of equal speeds in dashes that are told from contours on any colour."""
    halo = QPen(theme.colour("panel"), 3.2 * scale)
    dashes = QPen(theme.colour("ink"), 1.6 * scale)
    dashes.setDashPattern([4.0, 2.5])
    dashes.setCapStyle(Qt.PenCapStyle.FlatCap)
    for line in view.lines:
        for pen in (halo, dashes):
            draw_curve(painter, ground.place(line), pen, scale)


def _block_marks(
    ground: PolarGround, view: HemisphereView, placement: Placement, scale: float
) -> None:
    """Keep labels off the marks themselves."""
    half = 4.5 * scale
    for x, y, _, _ in view.marks:
        px, py = ground.place(np.array([x, y]))
        placement.block(QRectF(px - half, py - half, 2 * half, 2 * half))


def _draw_contours(
    painter: QPainter,
    ground: PolarGround,
    view: HemisphereView,
    placement: Placement,
    theme: Theme,
    scale: float,
) -> None:
    """Draw the contour lines, one label on the longest line of each level."""
    font = lettering(theme, "small", scale)
    painter.setFont(font)
    longest = _longest_lines(view, ground)
    for index, (level, line) in enumerate(view.contours):
        points = ground.place(line)
        pen = QPen(_over_colour(view, level), 1.0 * scale)
        if longest.get(level) == index:
            middle = points[:, np.flatnonzero(np.isfinite(points[0]))]
            middle = middle[:, middle.shape[1] // 2]
            text = short_text(level).replace("-", MINUS)
            box = text_rect(font, QPointF(*middle), text, 0.5, 0.5)
            if placement.claim(box):
                painter.setPen(pen)
                painter.drawText(box.bottomLeft(), text)
                points = _without(points, box, 2.5 * scale)
        draw_curve(painter, points, pen, scale)


def _longest_lines(view: HemisphereView, ground: PolarGround) -> dict[float, int]:
    """Return for each level the index of its longest line, if that is long enough to label."""
    best: dict[float, tuple[float, int]] = {}
    for index, (level, line) in enumerate(view.contours):
        steps = np.hypot(*np.diff(line, axis=1)) * ground.rim
        length = float(np.nansum(steps)) if steps.size else 0.0
        best[level] = max(best.get(level, (0.0, -1)), (length, index))
    return {level: i for level, (length, i) in best.items() if length > _LABELLED_LENGTH}


def _without(points: FloatArray, box: QRectF, pad: float) -> FloatArray:
    """Return a line with a gap where a box lies."""
    inside = (np.abs(points[0] - box.center().x()) < box.width() / 2 + pad) & (
        np.abs(points[1] - box.center().y()) < box.height() / 2 + pad
    )
    return np.where(inside, np.nan, points)


def _over_colour(view: HemisphereView, level: float) -> QColor:
    """Return dark or light ink, whichever shows on the colour that a level has."""
    position = float(table_position(view.scale, np.array([level]))[0])
    index = int(np.clip(np.nan_to_num(position) * 255.0, 0, 255))
    red, green, blue = (int(c) for c in colour_table(view.scale.diverging)[index, :3])
    luminance = 0.2126 * red + 0.7152 * green + 0.0722 * blue
    return QColor(255, 255, 255, 200) if luminance < 120 else LIGHT.colour("ink", 0.7)


def _draw_plate(
    painter: QPainter, rect: QRectF, ground: PolarGround, text: str, theme: Theme, scale: float
) -> None:
    """Write a notice on a plate across the whole frame, at the height of the empty disc."""
    if not text:
        return
    half = min(ground.centre.y() - rect.top(), rect.bottom() - ground.centre.y())
    area = QRectF(rect.left(), ground.centre.y() - half, rect.width(), 2 * half)
    edge = 10 * scale
    plate = notice_box(area, text, theme, scale).adjusted(-edge, -edge, edge, edge)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(theme.colour("panel", 0.92))
    painter.drawRoundedRect(plate, 4 * scale, 4 * scale)
    draw_notice(painter, area, text, theme, scale)


# ---------------------------------------------------------------- widget
class HemispherePlot(PlotFrame):
    """The hemisphere with what is shown on it, its projection and, of three sheets, which.

    Signals
    -------
    point_picked(float, float)
        A point of the disc, radius 1, y upwards: a press, a drag or an arrow key.
    shown_chosen(str), projection_chosen(str), sheet_chosen(int)
    """

    point_picked = Signal(float, float)
    shown_chosen = Signal(str)
    projection_chosen = Signal(str)
    sheet_chosen = Signal(int)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Hemisphere", parent)
        self._view: HemisphereView | None = None
        self._choices: tuple[tuple[str, str], ...] = ()
        self._faces = QButtonGroup(self)
        self._face_row = QHBoxLayout()
        self._face_row.setSpacing(10)
        self.header.addLayout(self._face_row)
        self.short_list = QComboBox(self)
        self.short_list.setAccessibleName("What the hemisphere shows")
        self.short_list.setToolTip("Whose hemisphere, or what is compared on it")
        self.short_list.setMinimumContentsLength(4)
        self.short_list.activated.connect(self._choose_face)
        self.header.addWidget(self.short_list, 1)
        self.canvas.setAccessibleDescription(
            "Press, drag or arrow keys: put the pin. Ctrl+C: copy the picture."
        )
        self._build_corners()

    def show_view(self, view: HemisphereView) -> None:
        """Draw this."""
        self._view = view
        self.title.set_whole(view.title)
        self._show_faces(view)
        other = _other_projection(view.projection)
        self.projection.setText(PROJECTIONS[view.projection])
        self.projection.setToolTip(
            f"Projection of the upper hemisphere; change to {PROJECTIONS[other]}"
        )
        self._show_sheets(view)
        self.canvas.update()

    def face(self, key: str) -> QPushButton | None:
        """Return the button of a choice."""
        keys = [name for name, _ in self._choices]
        button = self._faces.button(keys.index(key)) if key in keys else None
        return button if isinstance(button, QPushButton) else None

    def readout(self, x: float, y: float) -> list[tuple[str, QColor]]:
        """Return the lines of the card beside the mouse: direction and value."""
        if self._view is None:
            return []
        n = from_disc(np.array([x, y]), self._view.projection)
        polar = math.degrees(math.acos(min(1.0, max(-1.0, float(n[2])))))
        turn = math.degrees(math.atan2(float(n[1]), float(n[0])))
        where = f"θ {polar:.1f}°  φ {turn:.1f}°".replace("-", MINUS)
        value = value_in(self._view.picture, x, y)
        text = "not defined" if math.isnan(value) else number_text(value)
        return [(where, self.theme.colour("secondary")), (text, self.theme.colour("ink"))]

    # ------------------------------------------------------------ as a frame asks
    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the hemisphere as on the screen."""
        if self._view is not None:
            draw_hemisphere(painter, rect, self._view, theme, scale)

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the hemisphere with its title."""
        if self._view is not None:
            draw_hemisphere(painter, rect, self._view, theme, scale, titled=True)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw the card of the direction and value under the mouse."""
        point = None if self.hover is None else self._disc_point(self.hover)
        if point is None or self.hover is None or math.hypot(*point) > 1.0:
            return
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        draw_chip(painter, self.hover, self.readout(*point), rect, self.theme)

    def press(self, point: QPointF) -> None:
        """Put the pin where the disc was pressed."""
        place = self._disc_point(point)
        if place is not None and math.hypot(*place) <= _RIM_SLACK:
            self._pick(*place)

    def drag(self, point: QPointF) -> None:
        """Let the pin follow a drag, along the rim when it leaves the disc."""
        place = self._disc_point(point)
        if place is not None:
            self._pick(*place)

    def step(self, right: int, up: int) -> None:
        """Move the pin over the disc with the arrow keys."""
        marks = () if self._view is None else self._view.marks
        for x, y, _, kind in marks:
            if kind == "pin":
                self._pick(x + _STEP * right, y + _STEP * up)
                return

    # ------------------------------------------------------------ inside
    def _build_corners(self) -> None:
        """Put the small controls where a disc leaves its square free."""
        self.projection = QPushButton(self.canvas)
        self.projection.setProperty("role", "link")
        self.projection.setAccessibleName("Projection")
        self.projection.setCursor(Qt.CursorShape.PointingHandCursor)
        self.projection.clicked.connect(self._change_projection)
        self.sheet = QComboBox(self.canvas)
        self.sheet.setAccessibleName("Sheet")
        self.sheet.setToolTip("Which of the three sheets, by speed")
        self.sheet.activated.connect(self._choose_sheet)
        corners = QGridLayout(self.canvas)
        corners.setContentsMargins(8, 2, 8, 2)
        corners.addWidget(self.projection, 0, 0, Qt.AlignmentFlag.AlignLeft)
        corners.addWidget(self.sheet, 0, 1, Qt.AlignmentFlag.AlignRight)
        corners.setRowStretch(1, 1)

    def _show_faces(self, view: HemisphereView) -> None:
        """Show one button for each choice, the shown one pressed."""
        if view.choices != self._choices:
            self._choices = view.choices
            for old in self._faces.buttons():
                self._faces.removeButton(old)
                self._face_row.removeWidget(old)
                old.hide()
                old.deleteLater()
            before: QWidget = self.sheet
            for index, (_, words) in enumerate(view.choices):
                self._add_face(index, words)
                added = self._faces.button(index)
                QWidget.setTabOrder(before, added)
                before = added
            with QSignalBlocker(self.short_list):
                self.short_list.clear()
                self.short_list.addItems([words for _, words in view.choices])
            self._fit_header()
        button = self.face(view.shown)
        if button is not None:
            button.setChecked(True)
            self.short_list.setCurrentIndex(self._faces.id(button))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Offer the choices as buttons, or as a list where these have no room."""
        super().resizeEvent(event)
        self._fit_header()

    def _fit_header(self) -> None:
        """Show the buttons of the choices in a wide header, their list in a narrow one."""
        is_narrow = self.width() < _WIDE_HEADER
        self.short_list.setVisible(is_narrow)
        for button in self._faces.buttons():
            button.setVisible(not is_narrow)

    def _add_face(self, index: int, words: str) -> None:
        """Add the button of one choice."""
        button = QPushButton(words, self)
        button.setProperty("role", "face")
        button.setCheckable(True)
        button.setAccessibleName(f"Hemisphere of {words}")
        bold = QFontMetrics(LIGHT.font(bold=True))  # as the pressed one is written
        button.setMinimumWidth(bold.horizontalAdvance(words) + 6)
        button.setToolTip(f"Show {words}")
        button.clicked.connect(partial(self._choose_face, index))
        self._faces.addButton(button, index)
        self._face_row.addWidget(button)

    def _show_sheets(self, view: HemisphereView) -> None:
        """Show the list of sheets, or hide it where there is one only."""
        with QSignalBlocker(self.sheet):
            self.sheet.clear()
            for number, words in view.sheets:
                self.sheet.addItem(words, number)
            self.sheet.setCurrentIndex(self.sheet.findData(view.sheet))
        self.sheet.setVisible(len(view.sheets) > 1)

    def _choose_face(self, index: int, checked: bool = False) -> None:
        """Ask for another choice to be shown."""
        key = self._choices[index][0]
        if self._view is not None and key != self._view.shown:
            self.shown_chosen.emit(key)

    def _choose_sheet(self, index: int) -> None:
        """Ask for another sheet."""
        self.sheet_chosen.emit(int(self.sheet.itemData(index)))

    def _change_projection(self, checked: bool = False) -> None:
        """Ask for the other projection."""
        if self._view is not None:
            self.projection_chosen.emit(_other_projection(self._view.projection))

    def _disc_point(self, point: QPointF) -> tuple[float, float] | None:
        """Return a point of the area as one of the disc."""
        if self._view is None:
            return None
        ground = disc_ground(QRectF(self.canvas.rect()), self._view, self.theme)
        away = (point - ground.centre) / ground.rim
        return away.x(), -away.y()

    def _pick(self, x: float, y: float) -> None:
        """Send a point out, drawn back to the rim where it lies beyond."""
        beyond = max(1.0, math.hypot(x, y))
        self.point_picked.emit(x / beyond, y / beyond)


def _other_projection(projection: str) -> str:
    """Return the projection that is not this one."""
    return "stereographic" if projection == "equal_area" else "equal_area"
