"""What side panels are built of: sections with a heading that opens and closes them."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QPainter, QPaintEvent, QPen, QPolygonF
from PySide6.QtWidgets import QAbstractButton, QHBoxLayout, QSizePolicy, QVBoxLayout, QWidget

from gui.widgets.forms import ElidedLabel, current_theme

ARROW = 4.0  # half the side of the disclosure arrow, pixels
INDENT = 14  # from the left edge to the words


class Disclosure(QAbstractButton):
    """Words with an arrow that points down when what they head is open."""

    def __init__(self, text: str, bold: bool = False) -> None:
        super().__init__()
        self._bold = bold
        self.setText(text)
        self.setAccessibleName(text)
        self.setCheckable(True)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.setAttribute(Qt.WidgetAttribute.WA_Hover)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
        font = self.font()
        font.setBold(bold)
        self.setFont(font)

    def sizeHint(self) -> QSize:
        """Ask for the arrow and the words."""
        metrics = self.fontMetrics()
        return QSize(metrics.horizontalAdvance(self.text()) + INDENT + 6, metrics.height() + 6)

    def minimumSizeHint(self) -> QSize:
        """Never cut a heading."""
        return self.sizeHint()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Open with Right, close with Left, change with Enter; Space is the button's own."""
        wanted = {Qt.Key.Key_Right: True, Qt.Key.Key_Left: False}.get(Qt.Key(event.key()))
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            wanted = not self.isChecked()
        if wanted is None:
            super().keyPressEvent(event)
        elif wanted != self.isChecked():
            self.click()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the arrow, the words, and a dotted line under them when focused."""
        theme = current_theme()
        words = theme.colour("ink" if self._bold or self.underMouse() else "secondary")
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        self._draw_arrow(painter, theme.colour("secondary"))
        painter.setPen(words)
        painter.setFont(self.font())
        place = self.rect().adjusted(INDENT, 0, 0, 0)
        painter.drawText(place, Qt.AlignmentFlag.AlignVCenter, self.text())
        if self.hasFocus():
            painter.setPen(QPen(theme.colour("a"), 1.0, Qt.PenStyle.DotLine))
            width = self.fontMetrics().horizontalAdvance(self.text())
            painter.drawLine(INDENT, self.height() - 2, INDENT + width, self.height() - 2)

    def _draw_arrow(self, painter: QPainter, colour: QColor) -> None:
        centre = QPointF(ARROW + 1, self.height() / 2)
        wide, high = ARROW, ARROW * 0.6
        down = [QPointF(-wide, -high), QPointF(wide, -high), QPointF(0, high)]
        right = [QPointF(p.y(), p.x()) for p in down]
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(colour)
        shape = down if self.isChecked() else right
        painter.drawPolygon(QPolygonF([centre + corner for corner in shape]))


class _Folding(QWidget):
    """A heading over a widget that it shows and hides."""

    toggled = Signal(bool)

    def __init__(self, title: str, widget: QWidget, is_open: bool, bold: bool) -> None:
        super().__init__()
        self.widget = widget
        self._aside = ElidedLabel(role="secondary")
        self.button = Disclosure(title, bold)
        self.button.setChecked(is_open)
        self.button.clicked.connect(self._show_choice)
        self.button.setToolTip(f"Show or hide: {title}")
        widget.setVisible(is_open)

    def is_open(self) -> bool:
        """Say whether the widget is shown."""
        return self.button.isChecked()

    def set_open(self, is_open: bool) -> None:
        """Show or hide the widget without a word."""
        self.button.setChecked(is_open)
        self.widget.setVisible(is_open)

    def set_aside(self, text: str) -> None:
        """Show a few words at the right end of the heading."""
        self._aside.setText(" ".join(text.split()))

    def _heading(self) -> QHBoxLayout:
        row = QHBoxLayout()
        row.setSpacing(8)
        row.addWidget(self.button)
        row.addWidget(self._aside, 1)
        return row

    def _show_choice(self, is_open: bool) -> None:
        self.widget.setVisible(is_open)
        self.toggled.emit(is_open)


class Section(_Folding):
    """A part of a side panel: a hairline, a bold heading, a word aside, and a widget.

    `toggled(open)` comes when the user opens or closes it; the section remembers nothing.
    """

    def __init__(
        self,
        title: str,
        widget: QWidget,
        aside: str = "",
        is_open: bool = True,
        ruled: bool = True,
    ) -> None:
        super().__init__(title, widget, is_open, bold=True)
        self._ruled = ruled
        self._aside.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.set_aside(aside)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 7 if ruled else 0, 0, 7)
        column.setSpacing(4)
        column.addLayout(self._heading())
        column.addWidget(widget)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the hairline above."""
        if self._ruled:
            painter = QPainter(self)
            painter.fillRect(0, 0, self.width(), 1, current_theme().colour("hairline"))


class Expander(_Folding):
    """A small heading within a form that opens something seldom wanted."""

    def __init__(self, title: str, widget: QWidget) -> None:
        super().__init__(title, widget, is_open=False, bold=False)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(2)
        column.addLayout(self._heading())
        column.addWidget(widget)
