"""The dialog in which a foreign table is read, questioned and looked at before it is used."""

from __future__ import annotations

from PySide6.QtCore import QSignalBlocker, Qt, Signal
from PySide6.QtGui import QFont, QFontDatabase, QIcon
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFrame,
    QHBoxLayout,
    QPlainTextEdit,
    QPushButton,
    QScrollArea,
    QSplitter,
    QVBoxLayout,
    QWidget,
)

from gui.taking_in.preview import PreviewGrid, VerdictLine
from gui.taking_in.readings import ReadingsForm
from gui.theme import Theme
from gui.viewdata import TakingInView
from gui.widgets.forms import label, set_or_hide

TITLE = "Take in a table"
LEFT, RIGHT = 470, 530
UPPER, LOWER = 240, 360


class TableDialog(QDialog):
    """Text on the left, what comes of it below, and how it is read on the right.

    Signals
    -------
    text_changed(str)
    chosen(str, str)
        A field of the readings, and what it is to be.
    file_asked()
        Another file is to be read.
    """

    text_changed = Signal(str)
    chosen = Signal(str, str)
    file_asked = Signal()

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self.setWindowTitle(TITLE)
        self.setModal(True)
        self.resize(1040, 680)
        self.setMinimumSize(820, 520)
        self.text = QPlainTextEdit()
        self.readings = ReadingsForm()
        self.verdict = VerdictLine()
        self.grid = PreviewGrid()
        self.lines = label(role="secondary", wrap=True)
        self.notes = label(wrap=True)
        self.error = label(role="error", wrap=True)
        self.status = label(role="heading")
        self.use = QPushButton("&Use this table")
        self._preview = QWidget()
        self._heading = label("How it is read", "heading")
        self._lay_out()
        self.text.textChanged.connect(self._tell_text)
        self.readings.chosen.connect(self.chosen)

    def _lay_out(self) -> None:
        halves = QSplitter(Qt.Orientation.Horizontal)
        halves.setChildrenCollapsible(False)
        halves.setHandleWidth(10)
        halves.addWidget(self._left())
        halves.addWidget(self._right())
        halves.setSizes([LEFT, RIGHT])
        halves.setStretchFactor(1, 1)
        buttons = QDialogButtonBox()
        buttons.addButton(self.use, QDialogButtonBox.ButtonRole.AcceptRole)
        buttons.addButton(QDialogButtonBox.StandardButton.Cancel).setIcon(QIcon())
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        foot = QHBoxLayout()
        foot.addWidget(self.status, 1)
        foot.addWidget(buttons)
        column = QVBoxLayout(self)
        column.setContentsMargins(14, 12, 14, 12)
        column.setSpacing(10)
        column.addWidget(halves, 1)
        column.addLayout(foot)

    def _left(self) -> QWidget:
        self.text.setAccessibleName("The table as text")
        self.text.setLineWrapMode(QPlainTextEdit.LineWrapMode.NoWrap)
        self.text.setTabChangesFocus(True)
        self.text.setFont(fixed_font())
        self.text.setPlaceholderText("Paste or type the table here")
        paste = QPushButton("&Paste")
        paste.setToolTip("Put what is on the clipboard in place of the text")
        paste.clicked.connect(self._paste)
        read = QPushButton("From a &file…")
        read.setToolTip("Read the text of a file")
        read.clicked.connect(self.file_asked)
        row = QHBoxLayout()
        row.setSpacing(6)
        row.addWidget(label("The table", "heading"))
        row.addStretch(1)
        for button in (paste, read):
            button.setAutoDefault(False)
            row.addWidget(button)
        above = QWidget()
        column = QVBoxLayout(above)
        column.setContentsMargins(0, 0, 0, 0)
        column.addLayout(row)
        column.addWidget(self.text, 1)
        half = QSplitter(Qt.Orientation.Vertical)
        half.setChildrenCollapsible(False)
        half.setHandleWidth(10)
        half.addWidget(above)
        half.addWidget(self._below())
        half.setStretchFactor(0, 1)
        half.setSizes([UPPER, LOWER])
        return half

    def _below(self) -> QScrollArea:
        below = QVBoxLayout(self._preview)
        below.setContentsMargins(0, 0, 8, 0)
        below.setSpacing(6)
        below.addWidget(label("What comes of it", "heading"))
        shown: tuple[QWidget, ...] = (self.verdict, self.grid, self.lines)
        for part in shown:
            below.addWidget(part)
        below.addStretch(1)
        return scrolled(self._preview, "What comes of the table")

    def _right(self) -> QScrollArea:
        content = QWidget()
        column = QVBoxLayout(content)
        column.setContentsMargins(0, 4, 10, 0)
        column.setSpacing(6)
        whole: tuple[QWidget, ...] = (self._heading, self.error, self.readings, self.notes)
        for part in whole:
            column.addWidget(part)
        column.addStretch(1)
        return scrolled(content, "How the table is read")

    def show_text(self, text: str) -> None:
        """Put a text in, without a word."""
        with QSignalBlocker(self.text):
            self.text.setPlainText(text)

    def show_view(self, view: TakingInView) -> None:
        """Show how the text is read and what comes of it."""
        self.readings.show_readings(view.readings)
        set_or_hide(self.error, view.error)
        self._heading.setVisible(bool(view.readings or view.error))
        self._preview.setVisible(view.preview is not None)
        if view.preview is not None:
            self.grid.show_view(view.preview)
        if view.verdict is not None:
            self.verdict.show_view(view.verdict)
        set_or_hide(self.lines, "\n".join(view.lines))
        set_or_hide(self.notes, "\n".join(f"– {note}" for note in view.notes))
        self.status.setText(view.status)
        self.status.setToolTip(view.status)
        self.use.setEnabled(view.is_ready)

    def accept(self) -> None:
        """Close with the table to be used, if it can be."""
        if self.use.isEnabled():
            super().accept()

    def _tell_text(self) -> None:
        self.text_changed.emit(self.text.toPlainText())

    def _paste(self) -> None:
        self.text.selectAll()
        self.text.paste()


def scrolled(content: QWidget, name: str) -> QScrollArea:
    """Return a widget that scrolls up and down where there is no room for it."""
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setFrameShape(QFrame.Shape.NoFrame)
    area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    area.setAccessibleName(name)
    area.setWidget(content)
    return area


def fixed_font() -> QFont:
    """Return the platform's font of fixed width, in the size of the body."""
    font = QFontDatabase.systemFont(QFontDatabase.SystemFont.FixedFont)
    font.setPixelSize(Theme.font().pixelSize())
    return font
