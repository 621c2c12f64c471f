"""The page of measured speeds: readings at the left, plots in the middle, the result right."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QSplitter, QWidget

from gui.plots.hemisphere import HemispherePlot
from gui.speeds.blanks_panel import BlanksPanel
from gui.speeds.plots import FitPlots
from gui.speeds.readings_panel import ReadingsPanel
from gui.speeds.result_panel import ResultPanel
from gui.theme import Theme
from gui.widgets.frames import framed, scrolled

READINGS_WIDTH, RESULT_WIDTH = 476, 356


class SpeedsPage(QWidget):
    """Places the panels, and lets the table and the plots follow one another."""

    def __init__(self) -> None:
        super().__init__()
        self.readings = ReadingsPanel()
        self.plots = FitPlots()
        self.sphere = HemispherePlot()
        self.result = ResultPanel()
        self.blanks = BlanksPanel()
        self.columns = QSplitter(Qt.Orientation.Horizontal)
        self.middle = QSplitter(Qt.Orientation.Vertical)
        self._place()
        self.readings.row_shown.connect(self.plots.show_row)
        self.plots.row_picked.connect(self.readings.select_row)

    def _place(self) -> None:
        for plot in (self.plots, self.sphere):
            self.middle.addWidget(framed(plot))
        self.middle.setSizes([360, 400])
        left = framed(self.readings)
        left.setMinimumWidth(396)
        right = framed(scrolled("Result", self.result, self.blanks))
        right.setMinimumWidth(RESULT_WIDTH - 14)
        for part in (left, self.middle, right):
            self.columns.addWidget(part)
        self.columns.setSizes([READINGS_WIDTH, 560, RESULT_WIDTH])
        self.columns.setStretchFactor(1, 1)
        for splitter in (self.columns, self.middle):
            splitter.setChildrenCollapsible(False)
            splitter.setHandleWidth(6)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.addWidget(self.columns)

    def set_theme(self, theme: Theme) -> None:
        """Hand the theme to what paints itself."""
        self.plots.set_theme(theme)
        self.sphere.set_theme(theme)
