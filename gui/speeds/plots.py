"""Four plots of a fit of which one is seen; the header of each has the list of all."""

from __future__ import annotations

from PySide6.QtCore import QSignalBlocker, Qt, Signal
from PySide6.QtWidgets import QComboBox, QStackedWidget, QVBoxLayout, QWidget

from gui.plots.frame import PlotFrame
from gui.speeds.correlation_plot import CorrelationPlot
from gui.speeds.residual_plot import ResidualPlot
from gui.speeds.section_plot import SpeedsSection
from gui.speeds.singular_plot import SingularPlot
from gui.theme import Theme

FACES = (
    ("residuals", "Residuals", "How far each reading is from the fit, in units of its σ"),
    ("section", "Section", "Fitted speeds round a plane, with the readings in it"),
    ("spectrum", "Singular spectrum", "How uncertain each combination of constants is"),
    ("correlation", "Correlations", "How the uncertainties of the constants hang together"),
)


class FitPlots(QWidget):
    """The plots. `face_chosen(key)`; `row_picked(row)` from a press on a reading."""

    face_chosen = Signal(str)
    row_picked = Signal(int)

    def __init__(self) -> None:
        super().__init__()
        self.residuals = ResidualPlot()
        self.section = SpeedsSection()
        self.spectrum = SingularPlot()
        self.correlation = CorrelationPlot()
        self._stack = QStackedWidget()
        self.choices: list[QComboBox] = []
        for number, plot in enumerate(self.all()):
            choice = _face_choice(number)
            choice.activated.connect(self._choose)
            self.choices.append(choice)
            plot.header.insertWidget(0, choice)
            plot.title.setProperty("role", "secondary")
            self._stack.addWidget(plot)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self._stack)
        self.residuals.row_picked.connect(self.row_picked)
        self.section.row_picked.connect(self.row_picked)

    def all(self) -> tuple[PlotFrame, ...]:
        """Return the four plots in the order of the list."""
        return self.residuals, self.section, self.spectrum, self.correlation

    @property
    def face(self) -> str:
        """The key of the plot that is seen."""
        return FACES[self._stack.currentIndex()][0]

    def show_face(self, key: str) -> None:
        """Bring one of the plots to the front."""
        self._stack.setCurrentIndex([name for name, *_ in FACES].index(key))
        for number, choice in enumerate(self.choices):
            with QSignalBlocker(choice):
                choice.setCurrentIndex(number)

    def show_row(self, row: int) -> None:
        """Ring the reading of a row, counted from 1."""
        self.residuals.show_row(row)
        self.section.show_row(row)

    def set_theme(self, theme: Theme) -> None:
        """Hand the theme on."""
        for plot in self.all():
            plot.set_theme(theme)

    def _choose(self, number: int) -> None:
        self.face_chosen.emit(FACES[number][0])


def _face_choice(number: int) -> QComboBox:
    choice = QComboBox()
    choice.setAccessibleName("What is plotted of the fit")
    for _, words, tooltip in FACES:
        choice.addItem(words)
        choice.setItemData(choice.count() - 1, tooltip, Qt.ItemDataRole.ToolTipRole)
    choice.setToolTip("What is plotted of the fit")
    choice.setCurrentIndex(number)
    return choice
