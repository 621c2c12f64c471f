"""What stands beside the section: the hemisphere, the sweep or the source picture."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QPushButton,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from gui.plots.hemisphere import HemispherePlot
from gui.plots.source_picture import SourcePicture
from gui.plots.sweep import SweepPlot
from gui.theme import Theme

_FACES = (
    ("hemisphere", "Hemisphere", "The quantity over all directions, seen from part Z"),
    ("sweep", "Sweep", "The quantity against the angle from the pin"),
    ("source", "Source", "Wavefronts from a point source in the section plane"),
)


class Deck(QWidget):
    """Three plots of which one is seen.

    Signals
    -------
    face_chosen(str)
        "hemisphere", "sweep" or "source".
    """

    face_chosen = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self.hemisphere = HemispherePlot()
        self.sweep = SweepPlot()
        self.source = SourcePicture()
        self._stack = QStackedWidget()
        for plot in (self.hemisphere, self.sweep, self.source):
            self._stack.addWidget(plot)
        self._buttons = QButtonGroup(self)
        row = QHBoxLayout()
        row.setContentsMargins(9, 3, 9, 0)
        row.setSpacing(12)
        for number, (_, words, tooltip) in enumerate(_FACES):
            button = QPushButton(words, checkable=True)
            button.setProperty("role", "face")
            button.setToolTip(tooltip)
            self._buttons.addButton(button, number)
            row.addWidget(button)
        row.addStretch(1)
        self._buttons.idClicked.connect(self._choose)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addLayout(row)
        column.addWidget(self._stack, 1)

    @property
    def face(self) -> str:
        """The key of the plot that is seen."""
        return _FACES[self._stack.currentIndex()][0]

    def show_face(self, key: str) -> None:
        """Bring one of the plots to the front."""
        number = [name for name, *_ in _FACES].index(key)
        self._stack.setCurrentIndex(number)
        self._buttons.button(number).setChecked(True)

    def set_theme(self, theme: Theme) -> None:
        """Hand the theme on."""
        for plot in (self.hemisphere, self.sweep, self.source):
            plot.set_theme(theme)

    def _choose(self, number: int) -> None:
        self.face_chosen.emit(_FACES[number][0])
