"""A pane of the stage: the picture of a scene, and what mouse and keys do to it."""

from __future__ import annotations

import time
from dataclasses import replace
from typing import Any

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, QTimer, Signal, Slot
from PySide6.QtGui import (
    QAction,
    QCloseEvent,
    QFocusEvent,
    QGuiApplication,
    QHideEvent,
    QImage,
    QKeyEvent,
    QKeySequence,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QResizeEvent,
    QShowEvent,
    QWheelEvent,
)
from PySide6.QtWidgets import QWidget

from gui.stage import picking
from gui.stage.camera import Camera, Size
from gui.stage.composition import Finish, Ground, Renderer
from gui.stage.labels import draw_decorations, scene_rect
from gui.stage.offscreen import render_picture
from gui.theme import LIGHT, Theme
from gui.viewdata import PaneView, SheetView, Vector3

REST_AFTER_MS = 150  # quiet time after which the picture is drawn at its best
CLICK_PIXELS = 4.0  # a press that moves less than this is a click
_REST_SAMPLES = 4
_KEY_PIXELS = 12.0  # an arrow key turns like a drag over this distance
_ZOOM_STEP = 1.15
_ARROWS = {
    Qt.Key.Key_Left: (-1.0, 0.0),
    Qt.Key.Key_Right: (1.0, 0.0),
    Qt.Key.Key_Up: (0.0, -1.0),
    Qt.Key.Key_Down: (0.0, 1.0),
}
_ZOOM_KEYS = {
    Qt.Key.Key_Plus: _ZOOM_STEP,
    Qt.Key.Key_Equal: _ZOOM_STEP,
    Qt.Key.Key_Minus: 1.0 / _ZOOM_STEP,
}


class StagePane(QWidget):
    """Shows one orientation in three dimensions.

    A click asks for the pin, a drag turns, the wheel zooms, a double click looks along the
    nearest part axis; arrow keys turn (finely with Shift), + and − zoom, Home comes back.

    Signals
    -------
    pin_requested(direction)
        A tuple of three floats, unit vector, part axes.
    camera_changed(camera)
        The user turned or zoomed; not emitted by `set_camera`.
    frame_painted(milliseconds)
    """

    pin_requested = Signal(object)
    camera_changed = Signal(object)
    frame_painted = Signal(float)

    def __init__(
        self,
        side: str,
        renderer: Renderer,
        camera: Camera | None = None,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._side = side
        self._renderer = renderer
        self._camera = Camera() if camera is None else camera
        self._theme: Theme = LIGHT
        self._view: PaneView | None = None
        self._image: QImage | None = None
        self._samples = 0
        self._pressed_at: QPointF | None = None
        self._dragged_to: QPointF | None = None
        self._pin_before: Vector3 | None = None
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.setInterval(REST_AFTER_MS)
        self._rest.timeout.connect(self._draw_at_rest)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.setMinimumSize(180, 200)
        self.setAccessibleName(f"Stage {side}")
        self.setAccessibleDescription(
            "Click: put the pin. Drag or arrow keys: turn. Wheel, plus and minus: zoom. "
            "Double click: look along the nearest part axis. Home: the usual view."
        )
        self._add_actions()

    # ------------------------------------------------------------ what is shown
    @property
    def camera(self) -> Camera:
        """Where the viewer stands."""
        return self._camera

    @property
    def is_at_rest(self) -> bool:
        """Whether the picture is drawn at its best, nothing having changed for a while."""
        return self._samples > 0

    def show_view(self, view: PaneView) -> None:
        """Show a view; only a change of the scene itself is drawn anew."""
        is_same = self._view is not None and _is_same_scene(self._view, view)
        self._view = view
        if not is_same:
            self._redraw()
        self.update()

    def set_camera(self, camera: Camera) -> None:
        """Look from somewhere else, without emitting anything."""
        if camera != self._camera:
            self._camera = camera
            self._redraw()

    def set_theme(self, theme: Theme) -> None:
        """Take the colours of another theme."""
        self._theme = theme
        self._redraw()

    def picture(self, width: int, height: int, ground: Ground = "theme") -> QImage:
        """Return what is shown as a picture of any size; empty before the first view."""
        if self._view is None:
            return QImage()
        return render_picture(
            self._view, self._camera, width, height, ground, self._theme, self._renderer
        )

    def sizeHint(self) -> QSize:
        """Ask for a comfortable square."""
        return QSize(420, 440)

    # ------------------------------------------------------------ painting
    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the scene, made anew if need be, and what is laid over it."""
        started = time.perf_counter()
        painter = QPainter(self)
        painter.fillRect(self.rect(), self._theme.colour("stage"))
        if self._view is not None:
            if self._image is None:
                self._image = self._render(self._view)
            whole = QRectF(self.rect())
            painter.drawImage(scene_rect(whole, self._theme).topLeft(), self._image)
            draw_decorations(painter, whole, self._view, self._camera, self._theme)
        self._draw_frame(painter)
        painter.end()
        self.frame_painted.emit((time.perf_counter() - started) * 1e3)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Draw anew in the new size."""
        self._redraw()
        super().resizeEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Show the focus in the frame."""
        self.update()
        super().focusInEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Take the focus out of the frame."""
        self.update()
        super().focusOutEvent(event)

    def showEvent(self, event: QShowEvent) -> None:
        """See to it that the picture comes to rest."""
        if not self.is_at_rest:
            self._rest.start()
        super().showEvent(event)

    def hideEvent(self, event: QHideEvent) -> None:
        """Leave no timer running while nobody looks."""
        self._rest.stop()
        super().hideEvent(event)

    def closeEvent(self, event: QCloseEvent) -> None:
        """Leave no timer running."""
        self._rest.stop()
        super().closeEvent(event)

    def _render(self, view: PaneView) -> QImage:
        """Return the scene in this screen's pixels: the one place that knows their ratio."""
        ratio = self.devicePixelRatioF()
        width, height = self._scene_size()
        pixels = (max(round(width * ratio), 1), max(round(height * ratio), 1))
        image = self._renderer.render(
            view, self._camera, pixels, self._theme, "theme", self._samples, Finish(ratio)
        )
        image.setDevicePixelRatio(ratio)
        return image

    def _scene_size(self) -> Size:
        """Return the logical pixels of the scene."""
        scene = scene_rect(QRectF(self.rect()), self._theme)
        return max(int(scene.width()), 1), max(int(scene.height()), 1)

    def _draw_frame(self, painter: QPainter) -> None:
        """Draw the hairline in the colour of the side, stronger with the keyboard focus."""
        width = 2.0 if self.hasFocus() else 1.0
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
        painter.setPen(QPen(self._theme.side(self._side), width))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        half = width / 2
        painter.drawRect(QRectF(self.rect()).adjusted(half, half, -half, -half))

    def _redraw(self) -> None:
        """Draw the scene anew: at once and plainly, and at its best a little later."""
        self._image = None
        self._samples = 0
        if self.isVisible():
            self._rest.start()
        self.update()

    @Slot()
    def _draw_at_rest(self) -> None:
        """Draw the scene at its best."""
        self._image = None
        self._samples = _REST_SAMPLES
        self.update()

    # ------------------------------------------------------------ mouse
    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Begin a click or a drag."""
        if event.button() == Qt.MouseButton.LeftButton:
            self._pressed_at = self._dragged_to = event.position()
            self._pin_before = self._pin()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Turn, once the pointer has left the place of a click."""
        if self._pressed_at is None or self._dragged_to is None:
            return
        moved = event.position() - self._pressed_at
        is_dragging = self._dragged_to is not self._pressed_at
        if not is_dragging and _length(moved) < CLICK_PIXELS:
            return
        step = event.position() - self._dragged_to
        self._dragged_to = event.position()
        self.setCursor(Qt.CursorShape.ClosedHandCursor)
        self._look(self._camera.turned(step.x(), step.y()))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """End a drag, or ask for the pin where the click was."""
        if event.button() != Qt.MouseButton.LeftButton or self._pressed_at is None:
            return
        is_click = self._dragged_to is self._pressed_at
        place = self._pressed_at - scene_rect(QRectF(self.rect()), self._theme).topLeft()
        self._pressed_at = self._dragged_to = None
        self.unsetCursor()
        if is_click and self._view is not None:
            hit = picking.pick(
                self._view, self._camera, self._scene_size(), (place.x(), place.y())
            )
            if hit is not None:
                self.pin_requested.emit(hit.direction)

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Look along the nearest part axis; the pin goes back to before the first click."""
        if event.button() != Qt.MouseButton.LeftButton:
            return
        before, now = self._pin_before, self._pin()
        if before is not None and before != now:
            self.pin_requested.emit(before)
        self.look_along_nearest_axis()

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Zoom."""
        self._look(self._camera.zoomed(_ZOOM_STEP ** (event.angleDelta().y() / 120.0)))
        event.accept()

    # ------------------------------------------------------------ keys and actions
    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Turn, zoom, or come back to the usual view."""
        key = Qt.Key(event.key())
        if key in _ARROWS:
            is_fine = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
            reach = _KEY_PIXELS * (0.2 if is_fine else 1.0)
            dx, dy = _ARROWS[key]
            self._look(self._camera.turned(dx * reach, dy * reach))
        elif key in _ZOOM_KEYS:
            self._look(self._camera.zoomed(_ZOOM_KEYS[key]))
        elif key is Qt.Key.Key_Home:
            self.look_home()
        else:
            super().keyPressEvent(event)

    @Slot()
    def look_along_nearest_axis(self) -> None:
        """Turn the camera onto the part axis that is nearest to it."""
        self._look(self._camera.looking_along(self._camera.nearest_axis()))

    @Slot()
    def look_home(self) -> None:
        """Come back to the usual view."""
        self._look(Camera())

    @Slot()
    def copy_picture(self) -> None:
        """Put what is shown on the clipboard, twice as fine as on the screen."""
        picture = self.picture(2 * self.width(), 2 * self.height(), "theme")
        if not picture.isNull():
            QGuiApplication.clipboard().setImage(picture)

    def _add_actions(self) -> None:
        """Offer in the context menu what keys and mouse do, and copying."""
        copy = QAction("Copy picture", self)
        copy.setShortcut(QKeySequence(QKeySequence.StandardKey.Copy))
        copy.setShortcutContext(Qt.ShortcutContext.WidgetShortcut)
        copy.triggered.connect(self.copy_picture)
        nearest = QAction("Look along the nearest part axis", self)
        nearest.triggered.connect(self.look_along_nearest_axis)
        home = QAction("Usual view", self)
        home.triggered.connect(self.look_home)
        self.addActions([copy, nearest, home])
        self.setContextMenuPolicy(Qt.ContextMenuPolicy.ActionsContextMenu)

    def _look(self, camera: Camera) -> None:
        """Take another camera and tell about it."""
        if camera != self._camera:
            self.set_camera(camera)
            self.camera_changed.emit(camera)

    def _pin(self) -> Vector3 | None:
        """Return the direction of the pin as it is shown."""
        marks = () if self._view is None else self._view.marks
        return next((mark.direction for mark in marks if mark.kind == "pin"), None)


def _length(step: QPointF) -> float:
    """Return the length of a step in pixels."""
    return float((step.x() ** 2 + step.y() ** 2) ** 0.5)


def _is_same_scene(old: PaneView, new: PaneView) -> bool:
    """Tell whether two views differ at most in their marks and words."""
    if len(old.sheets) != len(new.sheets) or old.ticks is not new.ticks:
        return False
    if not all(map(_is_same_sheet, old.sheets, new.sheets)):
        return False
    words: dict[str, Any] = {"marks": (), "title": "", "notice": ""}
    nothing = {"sheets": (), "ticks": None} | words
    return vars(replace(old, **nothing)) == vars(replace(new, **nothing))


def _is_same_sheet(old: SheetView, new: SheetView) -> bool:
    """Tell whether two sheets are drawn from the same arrays in the same way."""
    return (
        old.rows is new.rows
        and old.triangles is new.triangles
        and (old.visible, old.opacity) == (new.visible, new.opacity)
    )
