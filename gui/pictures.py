"""Pictures of the stage: both panes side by side, free of the window's size."""

from __future__ import annotations

from PySide6.QtGui import QImage, QPainter

from core.state import BenchState
from gui.stage.composition import Ground
from gui.window import Views

PANE_WIDTH, PANE_HEIGHT = 1400, 1200


def stage_picture(views: Views, state: BenchState, ground: Ground = "theme") -> QImage:
    """Return the panes that the stage shows, side by side, at print size."""
    panes = [
        views.panes[side].picture(PANE_WIDTH, PANE_HEIGHT, ground)
        for side in state.display.layout
    ]
    whole = QImage(
        PANE_WIDTH * len(panes), PANE_HEIGHT, QImage.Format.Format_ARGB32_Premultiplied
    )
    whole.fill(0)
    painter = QPainter(whole)
    for number, pane in enumerate(panes):
        painter.drawImage(number * PANE_WIDTH, 0, pane)
    painter.end()
    return whole
