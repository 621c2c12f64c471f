"""The frame every plot sits in: a slim header with real controls, and a painted area below.

A plot derives from `PlotFrame`, says how its area is drawn and what a press there means; the
frame brings the mouse, the arrow keys, copying and the theme.
"""

from __future__ import annotations

from PySide6.QtCore import QEvent, QPoint, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import (
    QAction,
    QGuiApplication,
    QImage,
    QKeyEvent,
    QKeySequence,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPen,
    QResizeEvent,
)
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from gui.theme import LIGHT, Theme

_LEAST_WIDTH = 190  # pixels
_COPY_SCALE = 2.0  # copied pictures are this much finer than the screen
_KEY_STEPS = {
    Qt.Key.Key_Left: (-1, 0),
    Qt.Key.Key_Right: (1, 0),
    Qt.Key.Key_Up: (0, 1),
    Qt.Key.Key_Down: (0, -1),
}


class ElidedLabel(QLabel):
    """A one-line label that shortens its text to its width and keeps the whole as tool tip."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._whole = ""
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)

    def set_whole(self, text: str) -> None:
        """Show this text, shortened where it must be."""
        self._whole = text
        self._fit()

    def whole(self) -> str:
        """Return the text before shortening."""
        return self._whole

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Shorten anew."""
        super().resizeEvent(event)
        self._fit()

    def _fit(self) -> None:
        """Write what fits."""
        metrics = self.fontMetrics()
        text = metrics.elidedText(self._whole, Qt.TextElideMode.ElideRight, self.width())
        self.setText(text)
        self.setToolTip(self._whole if text != self._whole else "")


class Canvas(QWidget):
    """A painted area that reports presses, the hovering mouse and arrow keys.

    Signals
    -------
    pressed(QPointF), dragged(QPointF)
        The left button, in pixels of the area.
    hovered(object)
        A QPointF, or None when the mouse has left.
    stepped(int, int)
        An arrow key: steps to the right and up; with Shift five at once.
    """

    pressed = Signal(QPointF)
    dragged = Signal(QPointF)
    hovered = Signal(object)
    stepped = Signal(int, int)

    def __init__(self, frame: PlotFrame) -> None:
        super().__init__(frame)
        self._frame = frame
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setContextMenuPolicy(Qt.ContextMenuPolicy.ActionsContextMenu)
        self.setMinimumSize(120, 100)

    def sizeHint(self) -> QSize:
        """Ask for a middling area."""
        return QSize(420, 320)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the plot, then what belongs to the screen only: the hover and the focus."""
        painter = QPainter(self)
        theme = self._frame.theme
        painter.fillRect(self.rect(), theme.colour("panel"))
        area = QRectF(self.rect())
        self._frame.draw(painter, area, theme, 1.0)
        self._frame.draw_hover(painter, area)
        if self.hasFocus():
            painter.setPen(QPen(theme.colour("a"), 1.0, Qt.PenStyle.DotLine))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(area.adjusted(1.5, 1.5, -1.5, -1.5))
        painter.end()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Report a press of the left button."""
        if event.button() == Qt.MouseButton.LeftButton:
            self.pressed.emit(event.position())

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Report a drag or a hover."""
        if event.buttons() & Qt.MouseButton.LeftButton:
            self.dragged.emit(event.position())
        elif event.buttons() == Qt.MouseButton.NoButton:
            self.hovered.emit(event.position())

    def leaveEvent(self, event: QEvent) -> None:
        """Report that the mouse has left."""
        self.hovered.emit(None)

    def event(self, event: QEvent) -> bool:
        """Claim the key of copying from the window while the plot has the focus."""
        if (
            event.type() == QEvent.Type.ShortcutOverride
            and isinstance(event, QKeyEvent)
            and event.matches(QKeySequence.StandardKey.Copy)
        ):
            event.accept()
            return True
        return super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Copy, or report an arrow key; leave the other keys to the window."""
        if event.matches(QKeySequence.StandardKey.Copy):
            self._frame.copy()
            return
        step = _KEY_STEPS.get(Qt.Key(event.key()))
        if step is None:
            super().keyPressEvent(event)
            return
        times = 5 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 1
        self.stepped.emit(step[0] * times, step[1] * times)


class PlotFrame(QWidget):
    """A plot: header row, message line, painted area."""

    def __init__(self, name: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme: Theme = LIGHT
        self.hover: QPointF | None = None
        self.setAccessibleName(name)
        self.title = ElidedLabel(self)
        self.title.setProperty("role", "heading")
        self.message = QLabel(self)
        self.message.setProperty("role", "error")
        self.message.setWordWrap(True)
        self.message.hide()
        self.canvas = Canvas(self)
        self.canvas.setAccessibleName(f"{name}, drawing")
        self.header = QHBoxLayout()
        self.header.setContentsMargins(10, 6, 8, 2)
        self.header.setSpacing(6)
        self.header.addWidget(self.title, 1)
        self._lay_out()
        self._connect()

    # ------------------------------------------------------------ what a plot says for itself
    def draw(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the plot, as on the screen."""
        raise TypeError("a plot says how it is drawn")

    def minimumSizeHint(self) -> QSize:
        """Make do with little: the header gives way, so that plots side by side stay equal."""
        return QSize(_LEAST_WIDTH, super().minimumSizeHint().height())

    def draw_titled(self, painter: QPainter, rect: QRectF, theme: Theme, scale: float) -> None:
        """Draw the plot with its title, as a picture of its own."""
        self.draw(painter, rect, theme, scale)

    def draw_hover(self, painter: QPainter, rect: QRectF) -> None:
        """Draw what follows the mouse; nothing unless the plot says otherwise."""

    def copy_text(self) -> str:
        """Return the plot's numbers as tab-separated text; "" when there are none to copy."""
        return ""

    def press(self, point: QPointF) -> None:
        """Act on a press of the left button; nothing unless the plot says otherwise."""

    def drag(self, point: QPointF) -> None:
        """Act on a drag; nothing unless the plot says otherwise."""

    def step(self, right: int, up: int) -> None:
        """Act on an arrow key; nothing unless the plot says otherwise."""

    # ------------------------------------------------------------ what every plot has
    def set_theme(self, theme: Theme) -> None:
        """Draw in another dress."""
        self.theme = theme
        self.canvas.update()

    def set_message(self, text: str) -> None:
        """Show a sentence under the header, or nothing."""
        self.message.setText(text)
        self.message.setVisible(bool(text))

    def copy(self) -> None:
        """Put the numbers into the clipboard, or the picture of a plot without numbers."""
        text = self.copy_text()
        if text:
            QGuiApplication.clipboard().setText(text)
        else:
            self.copy_picture()

    def copy_picture(self) -> None:
        """Put the picture, titled, into the clipboard."""
        QGuiApplication.clipboard().setImage(self.picture(_COPY_SCALE))

    def picture(self, scale: float = 1.0) -> QImage:
        """Return the plot with its title as a picture, `scale` times the size on the screen."""
        size = self.canvas.size() * scale
        image = QImage(size, QImage.Format.Format_ARGB32_Premultiplied)
        image.fill(self.theme.colour("panel"))
        painter = QPainter(image)
        self.draw_titled(painter, QRectF(QPoint(0, 0), image.size()), self.theme, scale)
        painter.end()
        return image

    def _lay_out(self) -> None:
        """Stack header, message and area."""
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addLayout(self.header)
        self.message.setContentsMargins(10, 0, 8, 2)
        column.addWidget(self.message)
        column.addWidget(self.canvas, 1)

    def _connect(self) -> None:
        """Bind mouse, keys and copying."""
        self.canvas.pressed.connect(self.press)
        self.canvas.dragged.connect(self.drag)
        self.canvas.hovered.connect(self._hover_at)
        self.canvas.stepped.connect(self.step)
        self._copy_action = QAction("Copy", self.canvas)
        self._copy_action.triggered.connect(self._copy)
        self._picture_action = QAction("Copy picture", self.canvas)
        self._picture_action.triggered.connect(self._copy_picture)
        self.canvas.addActions([self._copy_action, self._picture_action])

    def _hover_at(self, point: QPointF | None) -> None:
        """Remember where the mouse is and draw anew."""
        self.hover = point
        self.canvas.update()

    def _copy(self, checked: bool = False) -> None:
        """Copy what the plot has."""
        self.copy()

    def _copy_picture(self, checked: bool = False) -> None:
        """Copy the picture."""
        self.copy_picture()
