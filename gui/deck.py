"""What stands beside the section: the hemisphere, the sweep or the source picture."""

from __future__ import annotations

from PySide6.QtCore import QSignalBlocker, Qt, Signal
from PySide6.QtWidgets import QComboBox, QStackedWidget, QVBoxLayout, QWidget

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
    """Three plots of which one is seen; the header of each has the list of all.

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
        self.choices: list[QComboBox] = []
        for number, plot in enumerate((self.hemisphere, self.sweep, self.source)):
            choice = _face_choice(number)
            choice.activated.connect(self._choose)
            self.choices.append(choice)
            plot.header.insertWidget(0, choice)
            plot.header.insertStretch(1)
            plot.title.hide()  # the colour bar and the axes say what is plotted
            self._stack.addWidget(plot)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self._stack)

    @property
    def face(self) -> str:
        """The key of the plot that is seen."""
        return _FACES[self._stack.currentIndex()][0]

    def show_face(self, key: str) -> None:
        """Bring one of the plots to the front."""
        self._stack.setCurrentIndex([name for name, *_ in _FACES].index(key))
        for number, choice in enumerate(self.choices):
            with QSignalBlocker(choice):
                choice.setCurrentIndex(number)

    def set_theme(self, theme: Theme) -> None:
        """Hand the theme on."""
        for plot in (self.hemisphere, self.sweep, self.source):
            plot.set_theme(theme)

    def _choose(self, number: int) -> None:
        self.face_chosen.emit(_FACES[number][0])


def _face_choice(number: int) -> QComboBox:
    choice = QComboBox()
    choice.setAccessibleName("What is plotted here")
    for _, words, tooltip in _FACES:
        choice.addItem(words)
        choice.setItemData(choice.count() - 1, tooltip, Qt.ItemDataRole.ToolTipRole)
    choice.setToolTip("What is plotted beside the section")
    choice.setCurrentIndex(number)
    return choice
