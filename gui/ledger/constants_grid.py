"""The 6×6 grid of constants: three faces, typed and pasted into like a sheet of numbers."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QItemSelectionModel, Qt, Signal
from PySide6.QtGui import (
    QContextMenuEvent,
    QFocusEvent,
    QFontMetrics,
    QFontMetricsF,
    QGuiApplication,
    QKeyEvent,
    QKeySequence,
    QMouseEvent,
    QResizeEvent,
)
from PySide6.QtWidgets import (
    QAbstractItemView,
    QButtonGroup,
    QFrame,
    QHBoxLayout,
    QMenu,
    QPushButton,
    QSizePolicy,
    QTableView,
    QVBoxLayout,
    QWidget,
)

from gui.ledger.constants_cells import (
    PADDING,
    SIZE,
    CellDelegate,
    ConstantsModel,
    Index,
    NumbersHeader,
)
from gui.theme import Theme
from gui.viewdata import ConstantsView
from gui.widgets.forms import (
    claims,
    label,
    put_on_clipboard,
    set_or_hide,
    tab_separated,
    text_width,
)

ROW_HEIGHT = 26
LEAST_CELL = 52
HEADER_WIDTH = 16
HEADER_HEIGHT = 18
LEAST_FONT = 0.7  # of the body size: numbers shrink to this before they are elided
FACES = (
    ("stiffness", "Stiffness C", "The stiffness matrix, Voigt order 11 22 33 23 13 12."),
    (
        "compliance",
        "Compliance S",
        "The compliance matrix with engineering shear strains: the inverse of C.",
    ),
    ("uncertainty", "± Uncertainty", "The standard uncertainty of every stiffness constant."),
)


class ConstantsTable(QTableView):
    """The grid itself.

    `pasted(row, column, text)` comes with the clipboard's text at the current cell;
    `refused(row, column)` when a cell was typed at that follows from others.
    """

    pasted = Signal(int, int, str)
    refused = Signal(int, int)
    moved = Signal()

    def __init__(self, model: ConstantsModel) -> None:
        super().__init__()
        self.cells = model
        self.setModel(model)
        self._delegate = CellDelegate(self)
        self.setItemDelegate(self._delegate)
        self._delegate.stepped.connect(self.step)
        self._delegate.tabbed.connect(self._tab)
        self.setHorizontalHeader(NumbersHeader(Qt.Orientation.Horizontal, self))
        self.setVerticalHeader(NumbersHeader(Qt.Orientation.Vertical, self))
        self._settle_look()
        model.dataChanged.connect(self.fit)

    def _settle_look(self) -> None:
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setStyleSheet(
            "QTableView { border: none; background: transparent; }"
            "QTableCornerButton::section { border: none; background: transparent; }"
        )
        self.setEditTriggers(
            QAbstractItemView.EditTrigger.AnyKeyPressed
            | QAbstractItemView.EditTrigger.EditKeyPressed
            | QAbstractItemView.EditTrigger.DoubleClicked
        )
        self.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
        self.setTabKeyNavigation(False)
        self.setCornerButtonEnabled(False)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.horizontalHeader().setFixedHeight(HEADER_HEIGHT)
        self.verticalHeader().setFixedWidth(HEADER_WIDTH)
        for row in range(SIZE):
            self.setRowHeight(row, ROW_HEIGHT)
        self.setFixedHeight(HEADER_HEIGHT + SIZE * ROW_HEIGHT + 1)
        self.setMinimumWidth(HEADER_WIDTH + SIZE * LEAST_CELL)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("Constants, 6 by 6")

    def fit(self) -> None:
        """Share the width between the columns and find the size at which all numbers fit."""
        room = max(self.width() - HEADER_WIDTH - 1, SIZE * LEAST_CELL)
        edges = [room * i // SIZE for i in range(SIZE + 1)]
        for column in range(SIZE):
            self.setColumnWidth(column, edges[column + 1] - edges[column])
        font = Theme.font()
        texts = [
            str(self.cells.index(row, column).data() or "")
            for row in range(SIZE)
            for column in range(SIZE)
            if not self.cells.fault(row, column)
        ]
        free = room // SIZE - 1 - 2 * PADDING
        least = font.pixelSize() * LEAST_FONT
        # Hinted widths do not shrink in proportion, so sizes are tried.
        while text_width(QFontMetricsF(font), texts) > free and font.pixelSize() > least:
            font.setPixelSize(font.pixelSize() - 1)
        self.setFont(font)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Fit the numbers to the new width."""
        super().resizeEvent(event)
        self.fit()

    # ------------------------------------------------------------ moving about
    def step(self, rows: int, columns: int) -> None:
        """Go to a neighbour, unless the entry just made there is a bad one."""
        here = self.currentIndex()
        if self.cells.fault(here.row(), here.column()):
            self.moved.emit()
            return
        row = min(max(here.row() + rows, 0), SIZE - 1)
        column = min(max(here.column() + columns, 0), SIZE - 1)
        self.setCurrentIndex(self.cells.index(row, column))

    def _tab(self, direction: int) -> None:
        here = self.currentIndex()
        if self.cells.fault(here.row(), here.column()):
            self.moved.emit()
        elif not self._hop(direction):
            self.focusNextChild() if direction > 0 else self.focusPreviousChild()

    def _hop(self, direction: int) -> bool:
        """Go to the next independent cell in reading order, if there is one."""
        here = self.currentIndex()
        start = here.row() * SIZE + here.column() if here.isValid() else -1
        places = range(start + direction, SIZE * SIZE if direction > 0 else -1, direction)
        for place in places:
            row, column = divmod(place, SIZE)
            if self.cells.is_open(row, column) and column >= row:
                self.setCurrentIndex(self.cells.index(row, column))
                return True
        return False

    def focusNextPrevChild(self, forward: bool) -> bool:
        """Walk through the independent cells with Tab, then leave the grid."""
        return self._hop(1 if forward else -1) or super().focusNextPrevChild(forward)

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Stand on a cell from the first."""
        super().focusInEvent(event)
        if not self.currentIndex().isValid():
            self.selectionModel().setCurrentIndex(
                self.cells.index(0, 0), QItemSelectionModel.SelectionFlag.ClearAndSelect
            )

    def currentChanged(self, current: Index, previous: Index) -> None:
        """Tell that another cell is looked at."""
        super().currentChanged(current, previous)
        self.horizontalHeader().viewport().update()
        self.verticalHeader().viewport().update()
        self.moved.emit()

    # ------------------------------------------------------------ keys
    def event(self, event: QEvent) -> bool:
        """Keep copying, pasting, selecting all, Home and End for the grid."""
        keys = QKeySequence.StandardKey
        own = (
            keys.Copy,
            keys.Paste,
            keys.SelectAll,
            keys.MoveToStartOfLine,
            keys.MoveToEndOfLine,
            keys.MoveToStartOfDocument,
            keys.MoveToEndOfDocument,
        )
        return claims(event, *own) or super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Copy, paste, drop a bad entry, step down, or begin to type."""
        shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.matches(QKeySequence.StandardKey.Paste):
            self.paste()
        elif event.key() == Qt.Key.Key_Escape and self.cells.faults():
            self._drop_fault()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.step(-1 if shift else 1, 0)
        else:
            self._delegate.is_replacing = event.key() != Qt.Key.Key_F2
            super().keyPressEvent(event)

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Edit within the number."""
        self._delegate.is_replacing = False
        super().mouseDoubleClickEvent(event)

    def keyboardSearch(self, search: str) -> None:
        """Say why a cell cannot be typed in, instead of jumping to one that begins so."""
        here = self.currentIndex()
        if here.isValid() and search.strip():
            self.refused.emit(here.row(), here.column())

    def _drop_fault(self) -> None:
        here = self.currentIndex()
        if self.cells.fault(here.row(), here.column()):
            self.cells.drop(here.row(), here.column())
        else:
            self.cells.drop_all()
        self.moved.emit()

    # ------------------------------------------------------------ copying and pasting
    def copy(self) -> None:
        """Copy the selected block, or the whole matrix when nothing is selected."""
        indexes = self.selectionModel().selectedIndexes()
        if not indexes:
            self.copy_matrix()
            return
        rows = sorted({index.row() for index in indexes})
        columns = sorted({index.column() for index in indexes})
        self._copy(rows, columns)

    def copy_matrix(self) -> None:
        """Copy the 36 numbers at full precision."""
        self._copy(list(range(SIZE)), list(range(SIZE)))

    def paste(self) -> None:
        """Hand the clipboard's text on, to go in at the current cell."""
        text = QGuiApplication.clipboard().text()
        here = self.currentIndex()
        row, column = max(here.row(), 0), max(here.column(), 0)
        view = self.cells.view
        if view is None or not view.editable:
            self.refused.emit(row, column)
        elif text.strip():
            self.pasted.emit(row, column, text)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer to copy and paste."""
        menu = QMenu(self)
        menu.addAction("&Copy\tCtrl+C", self.copy)
        menu.addAction("Copy &matrix", self.copy_matrix)
        paste = menu.addAction("&Paste\tCtrl+V", self.paste)
        paste.setEnabled(self.cells.view is not None and self.cells.view.editable)
        menu.exec(event.globalPos())

    def _copy(self, rows: list[int], columns: list[int]) -> None:
        block = [[self.cells.copied(row, column) for column in columns] for row in rows]
        put_on_clipboard(tab_separated(block))


class ConstantsGrid(QWidget):
    """The grid with its three faces and the sentence under it."""

    constant_edited = Signal(int, int, str)
    block_pasted = Signal(int, int, str)
    face_chosen = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self.cells = ConstantsModel(self)
        self.table = ConstantsTable(self.cells)
        self._faces: dict[str, QPushButton] = {}
        self._unit = label(role="secondary")
        self._note = label(role="secondary", wrap=True)
        self._fault = label(role="error", wrap=True)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(4)
        column.addLayout(self._make_faces())
        column.addWidget(self.table)
        column.addWidget(self._fault)
        column.addWidget(self._note)
        self._fault.hide()
        self._note.hide()
        self.cells.entered.connect(self.constant_edited)
        self.table.pasted.connect(self.block_pasted)
        self.table.refused.connect(self._explain)
        self.table.moved.connect(self._show_words)

    def _make_faces(self) -> QHBoxLayout:
        row = QHBoxLayout()
        row.setSpacing(9)
        self._group = QButtonGroup(self)
        for key, words, tooltip in FACES:
            button = QPushButton(words)
            button.setProperty("role", "face")
            button.setCheckable(True)
            button.setToolTip(tooltip)
            button.setAccessibleName(words)
            button.setProperty("key", key)
            chosen = QFontMetrics(Theme.font(bold=True))  # the chosen face is written in bold
            button.setMinimumWidth(chosen.horizontalAdvance(words) + 8)
            self._group.addButton(button)
            self._faces[key] = button
            row.addWidget(button)
        row.addStretch(1)
        row.addWidget(self._unit)
        self._group.buttonClicked.connect(self._choose_face)
        return row

    def show_view(self, view: ConstantsView) -> None:
        """Show the cells of one face."""
        self._faces[view.face].setChecked(True)
        self._unit.setText(view.unit)
        self.cells.show_view(view)
        self._show_words()

    def show_error(self, row: int, column: int, message: str) -> None:
        """Mark the entry last made in a cell as a bad one and say why."""
        self.cells.mark(row, column, message)
        self._show_words()

    def show_refusal(self, message: str) -> None:
        """Say under the grid why what was pasted did not go in; the cells are as good as ever.

        The next move, entry or paste takes the words away.
        """
        set_or_hide(self._fault, message)
        self._note.hide()

    def clear_error(self, row: int, column: int) -> None:
        """Take the mark off a cell."""
        self.cells.drop(row, column)
        self._show_words()

    def _choose_face(self, button: QPushButton) -> None:
        view = self.cells.view
        key = str(button.property("key"))
        if view is None or key != view.face:
            self.face_chosen.emit(key)

    def _show_words(self) -> None:
        """Write the fault of the current cell, or of the last bad one, or else the note."""
        here = self.table.currentIndex()
        faults = self.cells.faults()
        fault = self.cells.fault(here.row(), here.column()) or (faults[-1] if faults else "")
        set_or_hide(self._fault, fault)
        view = self.cells.view
        set_or_hide(self._note, "" if fault or view is None else view.note)

    def _explain(self, row: int, column: int) -> None:
        """Say what a cell follows from when it cannot be typed in."""
        cell = self.cells.cell(row, column)
        view = self.cells.view
        if cell is None or view is None:
            return
        reason = cell.tooltip if view.editable else "This face is read only."
        set_or_hide(self._note, reason or "This cell follows from the others.")
