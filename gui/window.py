"""The window: it places the widgets and nothing more; the presenter says what they show."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import QByteArray, QSettings, Qt, Signal
from PySide6.QtGui import QCloseEvent, QDragEnterEvent, QDropEvent, QResizeEvent
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QMainWindow,
    QProgressBar,
    QPushButton,
    QScrollArea,
    QSizePolicy,
    QSplitter,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from gui.deck import Deck
from gui.ledger.cell_form import CellForm
from gui.ledger.constants_grid import ConstantsGrid
from gui.ledger.orientation_form import OrientationButtons, OrientationForm
from gui.ledger.specimen_form import SpecimenForm
from gui.ledger.strain_spectrum import StrainSpectrum
from gui.pages import PageSwitch
from gui.plots.section import SectionPlot
from gui.reading.cutting_error import CuttingErrorPanel
from gui.reading.extremes_table import ExtremesTable
from gui.reading.pin_table import PinTable
from gui.reading.small_table import SmallTable
from gui.reading.waves_panel import DegenerateList, WavesPanel
from gui.speeds.page import SpeedsPage
from gui.stage.camera import Camera
from gui.stage.composition import Renderer
from gui.stage.pane import StagePane
from gui.theme import Theme
from gui.toolbar import StageToolbar
from gui.trust.sheet import TrustSheet
from gui.verdict_band import VerdictBand
from gui.widgets.frames import framed, scrolled, stacked
from gui.widgets.panel import Section

LEDGER_WIDTH = 360  # the least in which nothing of either panel is cut
READING_WIDTH = 338
SHEET_HEIGHT = 330
_ROOM_FOR_ALL = 1010  # height of the window from which the plots stay beside the open sheet
_LAYOUT_VERSION = 4  # a layout saved by an older arrangement is not restored


@dataclass(frozen=True, eq=False)
class Views:
    """Every widget that shows something, for the presenter."""

    verdict: VerdictBand
    trust: TrustSheet
    specimen: SpecimenForm
    constants: ConstantsGrid
    spectrum: StrainSpectrum
    cell: CellForm
    orientations: dict[str, OrientationForm]
    orientation_buttons: OrientationButtons
    toolbar: StageToolbar
    panes: dict[str, StagePane]
    section: SectionPlot
    deck: Deck
    pin: PinTable
    waves: WavesPanel
    degenerate: DegenerateList
    extremes: ExtremesTable
    cutting_error: CuttingErrorPanel
    aggregate: SmallTable
    part: SmallTable
    speeds: SpeedsPage

    def painted(self) -> tuple[QWidget, ...]:
        """Every view that paints itself and wants the theme."""
        own = (self.verdict, self.spectrum, self.section, self.deck, self.speeds)
        return (*own, *self.panes.values())


def build_views(renderer: Renderer) -> Views:
    """Return all widgets of the bench, not yet placed."""
    camera = Camera()
    return Views(
        verdict=VerdictBand(),
        trust=TrustSheet(),
        specimen=SpecimenForm(),
        constants=ConstantsGrid(),
        spectrum=StrainSpectrum(),
        cell=CellForm(),
        orientations={side: OrientationForm(side) for side in "AB"},
        orientation_buttons=OrientationButtons(),
        toolbar=StageToolbar(),
        panes={side: StagePane(side, renderer, camera) for side in "AB"},
        section=SectionPlot(),
        deck=Deck(),
        pin=PinTable(),
        waves=WavesPanel(),
        degenerate=DegenerateList(),
        extremes=ExtremesTable(),
        cutting_error=CuttingErrorPanel(),
        aggregate=SmallTable(),
        part=SmallTable(),
        speeds=SpeedsPage(),
    )


class Window(QMainWindow):
    """The main window.

    Signals
    -------
    files_dropped(list of str)
    close_asked(QCloseEvent)
        To be accepted or ignored by whoever knows whether there is unsaved work.
    cancel_asked()
    """

    files_dropped = Signal(list)
    close_asked = Signal(object)
    cancel_asked = Signal()

    def __init__(self, views: Views) -> None:
        super().__init__()
        self.views = views
        self.setAcceptDrops(True)
        self.setMinimumSize(1120, 680)
        self.resize(1440, 900)
        self._pane_frames = {side: framed(pane) for side, pane in views.panes.items()}
        self.switch = PageSwitch()
        self._pages = QStackedWidget()
        self._columns = QSplitter(Qt.Orientation.Horizontal)
        self._centre = QSplitter(Qt.Orientation.Vertical)
        self._stage = QSplitter(Qt.Orientation.Horizontal)
        self._plots = QSplitter(Qt.Orientation.Horizontal)
        self._sheet = QSplitter(Qt.Orientation.Vertical)
        self.ledger_panel = _side_panel(_ledger(views), LEDGER_WIDTH)
        self.reading_panel = _side_panel(_reading(views), READING_WIDTH)
        self._place()
        self._message = QLabel()
        self._note = QLabel()
        self._progress = QProgressBar()
        self._cancel = QPushButton("Cancel")
        self._fill_status_line()

    def _place(self) -> None:
        for frame in self._pane_frames.values():
            self._stage.addWidget(frame)
        self._plots.addWidget(framed(self.views.section))
        self._plots.addWidget(framed(self.views.deck))
        for splitter in (self._stage, self._plots):
            splitter.setSizes([500, 500])
            splitter.setChildrenCollapsible(False)
            splitter.setHandleWidth(6)
        self._centre.addWidget(self._stage)
        self._centre.addWidget(self._plots)
        self._centre.setSizes([470, 330])
        self._centre.setChildrenCollapsible(False)
        self._centre.setHandleWidth(6)
        middle = QWidget()
        column = QVBoxLayout(middle)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(6)
        column.addWidget(framed(self.views.toolbar))
        column.addWidget(self._centre, 1)
        for part in (self.ledger_panel, middle, self.reading_panel):
            self._columns.addWidget(part)
        self._columns.setSizes([LEDGER_WIDTH, 700, READING_WIDTH])
        self._columns.setStretchFactor(1, 1)
        self._columns.setCollapsible(1, False)
        self._columns.setHandleWidth(6)
        whole = QWidget()
        rows = QVBoxLayout(whole)
        rows.setContentsMargins(0, 0, 0, 0)
        rows.setSpacing(0)
        rows.addWidget(self.views.verdict)
        body = QWidget()
        box = QHBoxLayout(body)
        box.setContentsMargins(6, 6, 6, 0)
        for page in (self._columns, self.views.speeds):
            self._pages.addWidget(page)
        box.addWidget(self._pages)
        self.menuBar().setCornerWidget(self.switch)
        self._place_sheet(body)
        rows.addWidget(self._sheet, 1)
        self.setCentralWidget(whole)

    def _place_sheet(self, body: QWidget) -> None:
        """Put the trust sheet above everything, put away at first."""
        trust = self.views.trust
        for part in (trust, body):
            self._sheet.addWidget(part)
        self._sheet.setChildrenCollapsible(False)
        self._sheet.setHandleWidth(5)
        self._sheet.setStretchFactor(1, 1)
        self._sheet.setSizes([SHEET_HEIGHT, 520])
        trust.hide()
        trust.closed.connect(self.close_sheet)
        self.views.verdict.opened.connect(self.toggle_sheet)

    def _fill_status_line(self) -> None:
        line = self.statusBar()
        line.setSizeGripEnabled(False)
        line.setContentsMargins(12, 0, 8, 0)
        self._message.setAccessibleName("Message")
        self._message.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self._progress.setRange(0, 100)
        self._progress.setFixedWidth(220)
        self._progress.setAccessibleName("Progress")
        self._cancel.setToolTip("Stop the running computation; the last results stay")
        self._cancel.clicked.connect(self.cancel_asked)
        line.addWidget(self._message, 1)
        for widget in (self._progress, self._cancel, self._note):
            line.addPermanentWidget(widget)
        self.hide_progress()

    # -------------------------------------------------------------- what others may ask
    def show_panes(self, layout: str) -> None:
        """Show pane A, pane B or both."""
        for side, frame in self._pane_frames.items():
            frame.setVisible(side in layout)

    def show_page(self, key: str) -> None:
        """Show the bench or the measured speeds."""
        shown = self.views.speeds if key == "speeds" else self._columns
        self._pages.setCurrentWidget(shown)
        self.switch.show_page(key)

    def toggle_sheet(self) -> None:
        """Open the trust sheet, or put it away."""
        self.show_sheet(not self.views.trust.isVisibleTo(self))

    def close_sheet(self) -> None:
        """Put the trust sheet away."""
        self.show_sheet(False)
        self.views.verdict.setFocus()

    def show_sheet(self, is_open: bool) -> None:
        """Open the trust sheet or put it away; in a low window the plots make room for it."""
        self.views.trust.setVisible(is_open)
        self.views.verdict.show_open(is_open)
        self._make_room()

    def _make_room(self) -> None:
        is_open = self.views.trust.isVisibleTo(self)
        self._plots.setVisible(not is_open or self.height() >= _ROOM_FOR_ALL)

    def show_message(self, text: str, is_error: bool = False) -> None:
        """Say one sentence in the status line."""
        self._message.setProperty("role", "error" if is_error else "secondary")
        self._message.style().unpolish(self._message)
        self._message.style().polish(self._message)
        self._message.setText(text)
        self._message.setToolTip(text)

    def show_refusal(self, text: str) -> None:
        """Say why something cannot be done."""
        self.show_message(text, is_error=True)

    def show_note(self, text: str) -> None:
        """Show a quiet lasting note at the right end of the status line."""
        self._note.setText(text)
        self._note.setProperty("role", "secondary")

    def show_progress(self, words: str, fraction: float) -> None:
        """Show how far a long computation has come, with Cancel."""
        self._progress.setFormat(f"{words}  %p %")
        self._progress.setValue(round(100 * fraction))
        self._progress.show()
        self._cancel.show()

    def hide_progress(self) -> None:
        """Take the progress away."""
        self._progress.hide()
        self._cancel.hide()

    def set_theme(self, theme: Theme) -> None:
        """Give every view that paints itself the theme."""
        for view in self.views.painted():
            view.set_theme(theme)  # type: ignore[attr-defined]

    def save_layout(self, settings: QSettings) -> None:
        """Remember sizes and places."""
        settings.setValue("layout/version", _LAYOUT_VERSION)
        settings.setValue("layout/window", self.saveGeometry())
        settings.setValue("layout/sheet_open", self.views.trust.isVisibleTo(self))
        for name, splitter in self._splitters():
            settings.setValue(f"layout/{name}", splitter.saveState())

    def restore_layout(self, settings: QSettings) -> None:
        """Bring back sizes and places, if they were saved by this arrangement."""
        if str(settings.value("layout/version")) != str(_LAYOUT_VERSION):
            return
        parts = (("window", self.restoreGeometry),) + tuple(
            (name, splitter.restoreState) for name, splitter in self._splitters()
        )
        for name, restore in parts:
            saved = settings.value(f"layout/{name}")
            if isinstance(saved, (QByteArray, bytes)):  # what else stands there was not ours
                restore(saved)
        self.show_sheet(str(settings.value("layout/sheet_open")).lower() == "true")

    def _splitters(self) -> tuple[tuple[str, QSplitter], ...]:
        return (
            ("columns", self._columns),
            ("centre", self._centre),
            ("stage", self._stage),
            ("plots", self._plots),
            ("speeds", self.views.speeds.columns),
            ("speeds_plots", self.views.speeds.middle),
            ("sheet", self._sheet),
        )

    # -------------------------------------------------------------- events
    def resizeEvent(self, event: QResizeEvent) -> None:
        """Let the plots come back where there is room for them and the sheet."""
        super().resizeEvent(event)
        self._make_room()

    def closeEvent(self, event: QCloseEvent) -> None:
        """Ask before unsaved work is lost."""
        self.close_asked.emit(event)

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Take files."""
        if event.mimeData().hasUrls():
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Hand over the dropped files."""
        paths = [url.toLocalFile() for url in event.mimeData().urls() if url.isLocalFile()]
        if paths:
            event.acceptProposedAction()
            self.files_dropped.emit([str(Path(path)) for path in paths])


def _side_panel(content: QScrollArea, width: int) -> QFrame:
    frame = framed(content)
    frame.setMinimumWidth(width)
    return frame


def _ledger(views: Views) -> QScrollArea:
    return scrolled(
        "Ledger",
        Section("Ledger", views.specimen, ruled=False),
        Section("Constants", views.constants),
        Section("Strain spectrum", views.spectrum, "eigenstiffness, GPa (Kelvin)"),
        Section(
            "Orientations of the part",
            stacked(
                views.orientations["A"], views.orientations["B"], views.orientation_buttons
            ),
        ),
        Section("Unit cell and crystal axes", views.cell),
    )


def _reading(views: Views) -> QScrollArea:
    return scrolled(
        "Reading",
        Section("Reading", views.pin, ruled=False),
        Section("Waves", views.waves, "along the pin", is_open=False),
        Section("Extremes", views.extremes),
        Section(
            "Degenerate directions", views.degenerate, "two waves as fast", is_open=False
        ),
        Section("Cutting error", views.cutting_error),
        Section("Aggregate", views.aggregate, "random polycrystal"),
        Section("Part", views.part, "along X, Y, Z", is_open=False),
    )
