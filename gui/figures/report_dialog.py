"""The dialog that makes a report: which sections and figures, on which paper, how far it is."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import Qt, QTimer, QUrl, Signal
from PySide6.QtGui import QCloseEvent, QDesktopServices
from PySide6.QtWidgets import (
    QComboBox,
    QDialog,
    QFormLayout,
    QHBoxLayout,
    QListWidget,
    QListWidgetItem,
    QProgressBar,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from core.errors import InputError
from core.files.origin import today
from core.files.text import write_bytes
from core.report.captions import FIGURE_KINDS, FigureChoice
from core.report.content import (
    ALWAYS,
    SECTIONS,
    FileNote,
    ReportPlan,
    default_figures,
    report_content,
)
from gui.figures.controls import (
    ask_target,
    choice_of,
    close_box,
    file_stem,
    key_of,
    push,
    quantity_names,
    remembered_flag,
    remembered_text,
    show_key,
    shown_names,
    side_names,
    tick_box,
)
from gui.figures.figure_dialog import Studio
from gui.figures.report import PAPERS, REPORT_FORMATS, Press, Steps, report_steps
from gui.widgets.forms import label, set_or_hide

_CHOICE = Qt.ItemDataRole.UserRole
_ON, _OFF = Qt.CheckState.Checked, Qt.CheckState.Unchecked


@dataclass(eq=False)
class _Making:
    """A report on its way to a file."""

    steps: Steps
    target: Path


class ReportDialog(QDialog):
    """Chooses what goes into a report, makes it piece by piece, and opens it.

    The pieces are made between the events of the window, so that Cancel is heard at once:
    pictures are drawn by the one OpenGL context, which lives in this thread.

    Signals
    -------
    saved(path)
        A file has been written.
    """

    saved = Signal(str)

    def __init__(self, studio: Studio, file: FileNote | None, drawn_with: str = "",
                 parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Report")
        self._studio, self._file, self._drawn_with = studio, file, drawn_with
        self._making: _Making | None = None
        self._next = QTimer(self)
        self._next.setInterval(0)
        self._next.timeout.connect(self._step)
        self._make_controls()
        self._lay_out()
        self._recall()
        self._connect()

    # ------------------------------------------------------------ building
    def _make_controls(self) -> None:
        state = self._studio.state
        self.sections = _checked_list("Sections of the report")
        for key, words in SECTIONS.items():
            item = _add(self.sections, words, key, True)
            if key in ALWAYS:  # ticked for good
                item.setFlags(item.flags() & ~Qt.ItemFlag.ItemIsEnabled)
                item.setToolTip("In every report")
        self.figures = _checked_list("Figures of the report")
        for choice in default_figures(state):
            _add(self.figures, choice.title, choice, True)
        self.kind = choice_of(FIGURE_KINDS, "Kind of another figure")
        self.quantity = choice_of(quantity_names(state), "Quantity of another figure")
        self.whose = choice_of(side_names(state), "Whose the other figure is")
        self.shown = choice_of(shown_names(state), "What the other hemisphere shows")
        self.add_button = QPushButton("&Add figure")
        self.add_button.setAccessibleName("Add figure")
        self.paper = choice_of({key: key for key in PAPERS}, "Paper")
        self.format = choice_of(REPORT_FORMATS, "Format")
        self.opens = tick_box("Open when done", "Show the file in its own program")
        self.progress = QProgressBar()
        self.progress.setAccessibleName("How far the report is")
        self.progress.setRange(0, 100)
        self.progress.hide()
        self.message = label(role="error", wrap=True)
        self.message.hide()

    def _lay_out(self) -> None:
        left, right = QVBoxLayout(), QVBoxLayout()
        left.addWidget(label("Sections", "heading"))
        left.addWidget(self.sections)
        right.addWidget(label("Figures", "heading"))
        right.addWidget(self.figures)
        another = QHBoxLayout()
        for box, letters in ((self.kind, 19), (self.quantity, 15), (self.whose, 6),
                             (self.shown, 6)):
            box.setSizeAdjustPolicy(
                QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
            box.setMinimumContentsLength(letters)
            another.addWidget(box, letters)
        another.addWidget(self.add_button)
        right.addLayout(another)
        form = QFormLayout()
        form.addRow("Format", self.format)
        form.addRow("Paper", self.paper)
        form.addRow("", self.opens)
        right.addLayout(form)
        columns = QHBoxLayout()
        columns.addLayout(left, 2)
        columns.addLayout(right, 3)
        self._buttons = close_box()
        self.make_button = push(self._buttons, "&Make report…", "Choose where the report goes")
        self.cancel_button = push(self._buttons, "Cance&l", "Stop making the report")
        self.cancel_button.setEnabled(False)
        self.make_button.setDefault(True)
        whole = QVBoxLayout(self)
        whole.addLayout(columns)
        whole.addWidget(self.message)
        whole.addWidget(self.progress)
        whole.addWidget(self._buttons)
        self.resize(900, 560)

    def _connect(self) -> None:
        self.add_button.clicked.connect(self.add_figure)
        self.kind.activated.connect(self._enable)
        self.format.activated.connect(self._enable)
        self.make_button.clicked.connect(self.make)
        self.cancel_button.clicked.connect(self.cancel)
        self._buttons.rejected.connect(self.reject)
        self._enable()

    def _recall(self) -> None:
        settings = self._studio.settings
        left_out = remembered_text(settings, "report/without", "").split()
        for item in _items(self.sections):
            is_out = item.data(_CHOICE) in left_out and item.data(_CHOICE) not in ALWAYS
            item.setCheckState(_OFF if is_out else _ON)
        show_key(self.paper, remembered_text(settings, "report/paper", "A4"))
        show_key(self.format, remembered_text(settings, "report/format", "pdf"))
        self.opens.setChecked(remembered_flag(settings, "report/open", True))
        show_key(self.quantity, self._studio.state.quantity)

    def _remember(self) -> None:
        settings = self._studio.settings
        left_out = [str(item.data(_CHOICE)) for item in _items(self.sections)
                    if item.checkState() == _OFF]
        settings.setValue("report/without", " ".join(left_out))
        settings.setValue("report/paper", key_of(self.paper))
        settings.setValue("report/format", key_of(self.format))
        settings.setValue("report/open", self.opens.isChecked())

    # ------------------------------------------------------------ what is chosen
    def plan(self) -> ReportPlan:
        """Return what goes into the report."""
        return ReportPlan(
            tuple(item.data(_CHOICE) for item in _items(self.sections)
                  if item.checkState() == _ON),
            tuple(item.data(_CHOICE) for item in _items(self.figures)
                  if item.checkState() == _ON),
            self._file, today(), self._again(), self._drawn_with)

    def _again(self) -> str:
        """Return the command that makes such a report from the file, if there is one."""
        if self._file is None or not self._file.is_current:
            return ""
        paper = "" if key_of(self.paper) == "A4" else f" --paper {key_of(self.paper)}"
        return f"tricline report {self._file.name}{paper} --out report.{key_of(self.format)}"

    def add_figure(self) -> None:
        """Add the figure that the boxes describe, ticked."""
        kind = key_of(self.kind)
        shown = key_of(self.shown) if kind == "hemisphere" else "A"
        sides = key_of(self.whose)
        if kind == "hemisphere":
            sides = "AB" if shown == "difference" else "A"
        choice = FigureChoice(kind, key_of(self.quantity), sides, shown)
        _add(self.figures, choice.title, choice, True)
        self.figures.scrollToBottom()

    def _enable(self, _index: int = 0) -> None:
        kind = key_of(self.kind)
        self.quantity.setEnabled(kind != "source")
        self.whose.setVisible(kind != "hemisphere")
        self.shown.setVisible(kind == "hemisphere")
        self.paper.setEnabled(key_of(self.format) == "pdf")

    # ------------------------------------------------------------ making
    def make(self) -> None:
        """Ask where the report goes and begin to make it."""
        kind = key_of(self.format)
        stem = file_stem(self._studio.state.specimen.name, "report")
        target = ask_target(self, "Save report", self._studio.settings, stem, f".{kind}",
                            REPORT_FORMATS[kind])
        if target is not None:
            self.begin(target)

    def begin(self, target: Path) -> None:
        """Begin to make the report; it is written when all of it is there."""
        set_or_hide(self.message, "")
        studio = self._studio
        press = Press(studio.state, studio.renderer, studio.cameras, key_of(self.paper))
        try:
            content = report_content(studio.state, self.plan())
            steps = report_steps(content, key_of(self.format), press)
        except InputError as error:
            set_or_hide(self.message, str(error))
            return
        self._making = _Making(steps, target)
        self._show_busy(True)
        self._next.start()

    def _step(self) -> None:
        """Make the next piece."""
        making = self._making
        if making is None:
            return
        try:
            self.progress.setValue(round(100 * next(making.steps)))
        except StopIteration as end:
            self._finish(making, bytes(end.value))
        except InputError as error:
            self._show_busy(False)
            set_or_hide(self.message, str(error))

    def _finish(self, making: _Making, data: bytes) -> None:
        self._show_busy(False)
        try:
            write_bytes(making.target, data)
        except InputError as error:
            set_or_hide(self.message, f"The report was not saved. {error}")
            return
        self._remember()
        self.saved.emit(str(making.target))
        if self.opens.isChecked():
            QDesktopServices.openUrl(QUrl.fromLocalFile(str(making.target)))
        self.accept()

    def cancel(self) -> None:
        """Stop making the report; nothing is written."""
        if self._making is not None:
            self._making.steps.close()
        self._show_busy(False)

    def _show_busy(self, busy: bool) -> None:
        if not busy:
            self._next.stop()
            self._making = None
        self.progress.setValue(0)
        self.progress.setVisible(busy)
        self.make_button.setEnabled(not busy)
        self.cancel_button.setEnabled(busy)

    def done(self, result: int) -> None:
        """Stop whatever is being made."""
        self.cancel()
        super().done(result)

    def closeEvent(self, event: QCloseEvent) -> None:
        """Stop whatever is being made."""
        self.cancel()
        super().closeEvent(event)


def _checked_list(name: str) -> QListWidget:
    made = QListWidget()
    made.setAccessibleName(name)
    made.setToolTip("Tick what the report shall have; Space ticks the line you are on")
    return made


def _add(
    target: QListWidget, words: str, data: object, is_on: bool
) -> QListWidgetItem:
    item = QListWidgetItem(words)
    item.setData(_CHOICE, data)
    item.setToolTip(words)
    item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
    item.setCheckState(_ON if is_on else _OFF)
    target.addItem(item)
    return item


def _items(source: QListWidget) -> list[QListWidgetItem]:
    return [source.item(row) for row in range(source.count())]
