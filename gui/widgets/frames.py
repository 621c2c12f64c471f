"""How panels are put together: framed, stacked, and scrolled where there is no room."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QScrollArea, QVBoxLayout, QWidget

PANEL_MARGINS = (11, 8, 11, 8)


def framed(widget: QWidget) -> QFrame:
    """Return a widget with the hairline of a panel round it."""
    frame = QFrame()
    frame.setProperty("role", "panel")
    box = QVBoxLayout(frame)
    box.setContentsMargins(1, 1, 1, 1)
    box.addWidget(widget)
    return frame


def stacked(
    *parts: QWidget, spacing: int = 7, margins: tuple[int, int, int, int] = (0, 0, 0, 0)
) -> QWidget:
    """Return widgets one under the other."""
    box = QWidget()
    column = QVBoxLayout(box)
    column.setContentsMargins(*margins)
    column.setSpacing(spacing)
    for part in parts:
        column.addWidget(part)
    return box


def scrolled(
    name: str, *parts: QWidget, margins: tuple[int, int, int, int] = PANEL_MARGINS
) -> QScrollArea:
    """Return widgets one under the other that scroll where they find no room."""
    content = stacked(*parts, spacing=2, margins=margins)
    column = content.layout()
    if isinstance(column, QVBoxLayout):
        column.addStretch(1)
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    area.setFrameShape(QFrame.Shape.NoFrame)
    area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    area.setAccessibleName(name)
    area.setWidget(content)
    return area
