"""The table of readings: cells of text that are typed, pasted and marked in place."""

from __future__ import annotations

import re
from typing import Any

from PySide6.QtCore import (
    QAbstractTableModel,
    QEvent,
    QItemSelectionModel,
    QModelIndex,
    QObject,
    QPersistentModelIndex,
    QRect,
    QSize,
    Qt,
    Signal,
)
from PySide6.QtGui import (
    QContextMenuEvent,
    QFont,
    QFontMetrics,
    QGuiApplication,
    QKeyEvent,
    QKeySequence,
    QPainter,
    QPen,
)
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHeaderView,
    QMenu,
    QStyle,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from core.numbers import MINUS
from gui.ledger.constants_cells import CellDelegate
from gui.speeds.marks import DIMMED
from gui.speeds.viewdata import SpeedsTableView
from gui.theme import Theme
from gui.widgets.forms import (
    claims,
    current_theme,
    plain_number,
    put_on_clipboard,
    tab_separated,
)

Index = QModelIndex | QPersistentModelIndex
ROW_HEIGHT = 23
PADDING = 4  # left and right of a text, pixels
FIGURE_SPACE, POINT_SPACE = "\N{FIGURE SPACE}", "\N{PUNCTUATION SPACE}"
_HYPHEN = re.compile(r"-(?=[\d.])")  # of a number
_PLAIN = re.compile(rf"[-+{MINUS}]?\d*\.?\d*")
_NOWHERE = QModelIndex()


def _most_decimals(view: SpeedsTableView, column: int) -> int:
    """Return the digits after the point of the longest number that a column shows."""
    texts = [row[column] for row in view.rows]
    texts += [ghost for (_, place), ghost in view.ghosts.items() if place == column]
    return max((len(text.partition(".")[2]) for text in texts if _is_plain(text)), default=0)


def _aligned(text: str, decimals: int) -> str:
    """Return a number with blanks after it, as wide as the digits that it lacks."""
    if not decimals or not _is_plain(text):
        return text
    point, lack = "." in text, decimals - len(text.partition(".")[2])
    return text + ("" if point else POINT_SPACE) + lack * FIGURE_SPACE


def _is_plain(text: str) -> bool:
    return bool(_PLAIN.fullmatch(text))


class ReadingsModel(QAbstractTableModel):
    """The rows as typed, and an empty one below them to go on with.

    `entered(row, column, text)` comes when a cell was typed into with a changed text; the
    column is its key.
    """

    entered = Signal(int, str, str)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.view: SpeedsTableView | None = None
        self._decimals: tuple[int, ...] = ()

    def show_view(self, view: SpeedsTableView) -> None:
        """Take other rows; the current cell stays where the shape is the same."""
        old = self.view
        is_reshaped = old is None or (old.columns, len(old.rows)) != (
            view.columns, len(view.rows)
        )  # fmt: skip
        if is_reshaped:
            self.beginResetModel()
        self.view = view
        self._decimals = tuple(
            _most_decimals(view, place) if column.is_number else 0
            for place, column in enumerate(view.columns)
        )
        if is_reshaped:
            self.endResetModel()
        else:
            last = self.index(self.rowCount() - 1, self.columnCount() - 1)
            self.dataChanged.emit(self.index(0, 0), last)

    def rowCount(self, parent: Index = _NOWHERE) -> int:
        """Return the number of rows, the empty one included."""
        return 0 if parent.isValid() or self.view is None else len(self.view.rows) + 1

    def columnCount(self, parent: Index = _NOWHERE) -> int:
        """Return the number of columns."""
        return 0 if parent.isValid() or self.view is None else len(self.view.columns)

    def text(self, row: int, column: int) -> str:
        """Return the text of a cell."""
        view = self.view
        return view.rows[row][column] if view and row < len(view.rows) else ""

    def shown(self, row: int, column: int) -> str:
        """Return a cell as it is drawn, typed or taken for: true minus, points in line.

        Digits that nobody typed are left blank rather than filled with zeros.
        """
        text = self.text(row, column) or self.ghost(row, column)
        return _aligned(_HYPHEN.sub(MINUS, text), self._decimals[column])

    def ghost(self, row: int, column: int) -> str:
        """Return what an empty cell is taken for."""
        return self.view.ghosts.get((row, column), "") if self.view else ""

    def fault(self, row: int, column: int) -> str:
        """Return what is wrong with a cell, or nothing."""
        return self.view.faults.get((row, column), "") if self.view else ""

    def mark(self, row: int) -> str:
        """Return "outlier", "planned" or nothing."""
        return self.view.marks.get(row, "") if self.view else ""

    def is_typed(self, column: int) -> bool:
        """Tell whether a column is typed in."""
        return self.view is not None and self.view.columns[column].is_typed

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Let the typed columns be edited."""
        flags = Qt.ItemFlag.ItemIsSelectable | Qt.ItemFlag.ItemIsEnabled
        if self.is_typed(index.column()):
            flags |= Qt.ItemFlag.ItemIsEditable
        return flags

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        """Return the text of a cell, or the words of its tooltip."""
        row, column = index.row(), index.column()
        if self.view is None:
            return None
        if role == Qt.ItemDataRole.DisplayRole:
            return self.shown(row, column)
        if role == Qt.ItemDataRole.EditRole:
            return self.text(row, column)
        if role in (Qt.ItemDataRole.ToolTipRole, Qt.ItemDataRole.AccessibleDescriptionRole):
            return self.fault(row, column) or self._hint(row, column)
        return None

    def _hint(self, row: int, column: int) -> str:
        """Return the tooltip of a sound cell: its whole text and what the column holds."""
        view = self.view
        if view is None:
            return ""
        words = {"outlier": "This row fits neither the crystal nor the other rows.",
                 "planned": "This row waits for its speed."}  # fmt: skip
        mark = words.get(self.mark(row))
        parts = (self.text(row, column), view.columns[column].tooltip, mark)
        return "\n".join(part for part in parts if part)

    def headerData(
        self, section: int, orientation: Qt.Orientation,
        role: int = Qt.ItemDataRole.DisplayRole,
    ) -> Any:
        """Return the headings, and the numbers of the rows from 1."""
        if self.view is None:
            return None
        if orientation == Qt.Orientation.Vertical:
            is_new = section == len(self.view.rows)
            return ("+" if is_new else str(section + 1)) if (
                role == Qt.ItemDataRole.DisplayRole
            ) else None  # fmt: skip
        column = self.view.columns[section]
        if role == Qt.ItemDataRole.DisplayRole:
            return column.title
        return column.tooltip if role == Qt.ItemDataRole.ToolTipRole else None

    def setData(self, index: Index, value: Any, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Hand a changed entry on; the cell itself changes only when a new view says so."""
        text = str(value).strip()
        place = index.row(), index.column()
        if self.view is None or role != Qt.ItemDataRole.EditRole or text == self.text(*place):
            return False
        self.entered.emit(index.row(), self.view.columns[index.column()].key, text)
        return True


class ReadingDelegate(CellDelegate):
    """Draws the cells; moves on from the editor as the grid of constants does."""

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """Ask for a row's height."""
        return QSize(40, ROW_HEIGHT)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw the text, its state, and the frame of the current cell."""
        model = index.model()
        if not isinstance(model, ReadingsModel) or model.view is None:
            return
        theme, rect, place = current_theme(), option.rect, (index.row(), index.column())
        is_wrong = bool(model.fault(*place))
        painter.save()
        if is_wrong:
            painter.fillRect(rect, theme.colour("alert", 0.12))
        elif option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(rect, theme.colour("hover"))
        text = model.text(*place)
        painter.setFont(_cell_font(option.font, not text or model.mark(place[0]) == "planned"))
        painter.setPen(_cell_pen(model, *place, theme))
        column = model.view.columns[place[1]]
        _draw_text(painter, rect, model.shown(*place), column.is_number)
        if option.state & QStyle.StateFlag.State_HasFocus:
            painter.setPen(QPen(theme.colour("alert" if is_wrong else "a"), 2))
            painter.drawRect(rect.adjusted(1, 1, -1, -1))
        elif is_wrong and not text:
            painter.setPen(QPen(theme.colour("alert"), 1))
            painter.drawLine(rect.bottomLeft(), rect.bottomRight())
        painter.restore()


def _cell_font(font: QFont, is_slanted: bool) -> QFont:
    made = QFont(font)
    made.setItalic(is_slanted)
    return made


def _cell_pen(model: ReadingsModel, row: int, column: int, theme: Theme) -> QPen:
    """Return the pen of a text: alert where wrong, grey where it is not the user's."""
    mark, is_typed = model.mark(row), model.is_typed(column)
    if model.fault(row, column) or (mark == "outlier" and not is_typed):
        return QPen(theme.colour("alert"))
    if not model.text(row, column):
        return QPen(theme.colour("faint"))
    if not is_typed:
        pending = model.view is not None and model.view.pending
        return QPen(theme.colour("secondary", DIMMED if pending else 1.0))
    return QPen(theme.colour("secondary" if mark == "planned" else "ink"))


def _draw_text(painter: QPainter, rect: QRect, text: str, is_number: bool) -> None:
    room = rect.adjusted(PADDING, 0, -PADDING, 0)
    shown = painter.fontMetrics().elidedText(
        text, Qt.TextElideMode.ElideRight, room.width() + 1
    )
    side = Qt.AlignmentFlag.AlignRight if is_number else Qt.AlignmentFlag.AlignLeft
    painter.drawText(room, side | Qt.AlignmentFlag.AlignVCenter, shown)


class RowNumbers(QHeaderView):
    """The numbers of the rows; that of an outlier in the alert colour."""

    def __init__(self, parent: QWidget, model: ReadingsModel) -> None:
        super().__init__(Qt.Orientation.Vertical, parent)
        self._readings = model
        self.setSectionsClickable(True)
        self.setMinimumSectionSize(ROW_HEIGHT)
        self.setDefaultSectionSize(ROW_HEIGHT)
        self.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)

    def sizeHint(self) -> QSize:
        """Ask for the widest number."""
        digits = "9" * max(2, len(str(self._readings.rowCount())))
        return QSize(QFontMetrics(Theme.font("small")).horizontalAdvance(digits) + 14, 0)

    def paintSection(self, painter: QPainter, rect: QRect, logical: int) -> None:
        """Draw one number."""
        theme = current_theme()
        is_outlier = self._readings.mark(logical) == "outlier"
        painter.save()
        painter.setFont(Theme.font("small", bold=is_outlier))
        view = self.parentWidget()
        is_here = isinstance(view, QTableView) and view.currentIndex().row() == logical
        painter.setPen(theme.colour("alert" if is_outlier else "ink" if is_here else "faint"))
        text = str(self._readings.headerData(logical, Qt.Orientation.Vertical))
        place = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        painter.drawText(rect.adjusted(0, 0, -5, 0), place, text)
        painter.setPen(theme.colour("hairline"))
        painter.drawLine(rect.topRight(), rect.bottomRight())
        painter.restore()


class ReadingsTable(QTableView):
    """The table itself.

    Signals
    -------
    pasted(int row, int column, str text)
        The clipboard's text at the current cell.
    cleared(object places), removed(object rows), inserted(int row)
        Cells to be emptied; rows to be taken out; a row wanted before another.
    row_shown(int)
        The row of the current cell, from 1.
    """

    pasted = Signal(int, int, str)
    cleared = Signal(object)
    removed = Signal(object)
    inserted = Signal(int)
    row_shown = Signal(int)

    def __init__(self, model: ReadingsModel) -> None:
        super().__init__()
        self.readings = model
        self.setModel(model)
        self._delegate = ReadingDelegate(self)
        self.setItemDelegate(self._delegate)
        self._delegate.stepped.connect(self.step)
        self._delegate.tabbed.connect(self._tab)
        self.setVerticalHeader(RowNumbers(self, model))
        self.setAccessibleName("Readings")
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setStyleSheet(
            "QTableView { border: none; background: transparent; }"
            "QTableCornerButton::section { border: none; background: transparent; }"
            "QHeaderView { background: transparent; border: none; }"
        )
        self.setCornerWidget(QWidget())
        self.setWordWrap(False)
        self.setCornerButtonEnabled(False)
        self.setTabKeyNavigation(False)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setEditTriggers(
            QAbstractItemView.EditTrigger.AnyKeyPressed
            | QAbstractItemView.EditTrigger.EditKeyPressed
            | QAbstractItemView.EditTrigger.DoubleClicked
        )
        self.horizontalHeader().setSectionsClickable(False)
        self.horizontalHeader().setMinimumSectionSize(20)
        self.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignCenter)
        self.setMinimumSize(200, ROW_HEIGHT * 5)
        model.modelReset.connect(self.fit)

    # ------------------------------------------------------------ fitting
    def fit(self) -> None:
        """Give every column the width of its usual contents, and the words what is left."""
        view = self.readings.view
        if view is None:
            return
        font = Theme.font("small")
        self.setFont(font)
        self.horizontalHeader().setFont(font)
        metrics = QFontMetrics(font)
        widths = [
            max(metrics.horizontalAdvance(column.sample) + 2 * PADDING + 3,
                metrics.horizontalAdvance(column.title) + 12)
            for column in view.columns
        ]  # fmt: skip
        header = self.verticalHeader()
        room = self.width() - header.sizeHint().width() - self._bar_width()
        widths[0] += max(0, room - sum(widths) - 1)
        for place, width in enumerate(widths):
            self.setColumnWidth(place, width)

    def _bar_width(self) -> int:
        bar = self.verticalScrollBar()
        return bar.sizeHint().width() if bar.isVisible() else 0

    def resizeEvent(self, event: Any) -> None:
        """Fit the columns to the new width."""
        super().resizeEvent(event)
        self.fit()

    # ------------------------------------------------------------ moving about
    def select_row(self, row: int) -> None:
        """Go to a row, counted from 1."""
        column = max(self.currentIndex().column(), 0)
        index = self.readings.index(row - 1, column)
        if index.isValid():
            self.setCurrentIndex(index)
            self.selectRow(row - 1)
            self.scrollTo(index)

    def step(self, rows: int, columns: int) -> None:
        """Go to a neighbour."""
        here = self.currentIndex()
        row = min(max(here.row() + rows, 0), self.readings.rowCount() - 1)
        column = min(max(here.column() + columns, 0), self.readings.columnCount() - 1)
        self.setCurrentIndex(self.readings.index(row, column))

    def _tab(self, direction: int) -> None:
        if not self._hop(direction):
            self.focusNextChild() if direction > 0 else self.focusPreviousChild()

    def _hop(self, direction: int) -> bool:
        """Go to the next typed cell in reading order, if there is one."""
        here, width = self.currentIndex(), self.readings.columnCount()
        start = here.row() * width + here.column() if here.isValid() else -1
        end = self.readings.rowCount() * width
        for place in range(start + direction, end if direction > 0 else -1, direction):
            row, column = divmod(place, width)
            if self.readings.is_typed(column):
                self.setCurrentIndex(self.readings.index(row, column))
                return True
        return False

    def focusNextPrevChild(self, forward: bool) -> bool:
        """Walk through the cells with Tab, then leave the table."""
        return self._hop(1 if forward else -1) or super().focusNextPrevChild(forward)

    def focusInEvent(self, event: Any) -> None:
        """Stand on a cell from the first."""
        super().focusInEvent(event)
        if not self.currentIndex().isValid() and self.readings.rowCount():
            self.selectionModel().setCurrentIndex(
                self.readings.index(0, 0), QItemSelectionModel.SelectionFlag.ClearAndSelect
            )

    def currentChanged(self, current: Index, previous: Index) -> None:
        """Tell that another cell is looked at."""
        super().currentChanged(current, previous)
        self.verticalHeader().viewport().update()
        self.row_shown.emit(current.row() + 1)

    # ------------------------------------------------------------ keys
    def event(self, event: QEvent) -> bool:
        """Keep copying, pasting, deleting and selecting all for the table."""
        keys = QKeySequence.StandardKey
        wanted = (keys.Copy, keys.Paste, keys.SelectAll, keys.Delete)
        return claims(event, *wanted) or super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Copy, paste, empty cells, take out or put in rows, step down, or begin to type."""
        shift = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        control = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.matches(QKeySequence.StandardKey.Paste):
            self.paste()
        elif event.key() == Qt.Key.Key_Delete and control:
            self.remove_rows()
        elif event.key() in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace):
            self._clear()
        elif event.key() == Qt.Key.Key_Insert:
            self.insert_row()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.step(-1 if shift else 1, 0)
        else:
            self._delegate.is_replacing = event.key() != Qt.Key.Key_F2
            super().keyPressEvent(event)

    def mouseDoubleClickEvent(self, event: Any) -> None:
        """Edit within the text."""
        self._delegate.is_replacing = False
        super().mouseDoubleClickEvent(event)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer what can be done with cells and rows."""
        menu = QMenu(self)
        menu.addAction("&Copy\tCtrl+C", self.copy)
        menu.addAction("Copy &table", self.copy_table)
        menu.addAction("&Paste\tCtrl+V", self.paste)
        menu.addSeparator()
        menu.addAction("&Insert a row\tIns", self.insert_row)
        menu.addAction("&Remove rows\tCtrl+Del", self.remove_rows)
        menu.exec(event.globalPos())

    # ------------------------------------------------------------ copying, pasting, rows
    def copy(self) -> None:
        """Copy the selected cells, or the whole table when none is."""
        chosen = self.selectionModel().selectedIndexes()
        if not chosen:
            self.copy_table()
            return
        rows = sorted({index.row() for index in chosen})
        columns = sorted({index.column() for index in chosen})
        put_on_clipboard(tab_separated(
            [[self.readings.text(row, column) for column in columns] for row in rows]
        ))  # fmt: skip

    def copy_table(self) -> None:
        """Copy all rows below a header of column names, as they can be pasted again."""
        view = self.readings.view
        if view is None:
            return
        typed = [place for place, column in enumerate(view.columns) if column.is_typed]
        header = [view.columns[place].key for place in typed]
        body = [[plain_number(row[place]) for place in typed] for row in view.rows]
        put_on_clipboard(tab_separated([header, *body]))

    def paste(self) -> None:
        """Hand the clipboard's text on, to go in at the current cell."""
        here, text = self.currentIndex(), QGuiApplication.clipboard().text()
        new_row = self.readings.rowCount() - 1
        row = here.row() if here.isValid() else new_row
        if text.strip():
            self.pasted.emit(row, max(here.column(), 0), text)

    def insert_row(self) -> None:
        """Ask for a row before the current one."""
        here = self.currentIndex()
        self.inserted.emit(here.row() if here.isValid() else self.readings.rowCount() - 1)

    def remove_rows(self) -> None:
        """Ask for the selected rows to be taken out."""
        chosen = self.selectionModel().selectedIndexes()
        if chosen:
            self.removed.emit(tuple(sorted({index.row() for index in chosen})))

    def _clear(self) -> None:
        chosen = self.selectionModel().selectedIndexes()
        places = [(index.row(), index.column()) for index in chosen
                  if self.readings.is_typed(index.column())
                  and self.readings.text(index.row(), index.column())]  # fmt: skip
        if places:
            self.cleared.emit(tuple(places))
