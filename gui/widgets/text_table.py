"""A small table of texts, as tall as its lines, in which numbers are never cut.

The type gets small when the lines are too long; then words are shortened where the least is
lost, and tell the whole in the tooltip; and at last the table scrolls sideways.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

from PySide6.QtCore import (
    QAbstractTableModel,
    QEvent,
    QModelIndex,
    QObject,
    QPersistentModelIndex,
    QRect,
    QSize,
    Qt,
    Signal,
)
from PySide6.QtGui import (
    QColor,
    QContextMenuEvent,
    QFont,
    QFontMetrics,
    QKeyEvent,
    QKeySequence,
    QPainter,
    QResizeEvent,
)
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHeaderView,
    QMenu,
    QSizePolicy,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from gui.theme import Theme
from gui.widgets.forms import claims, current_theme, put_on_clipboard, tab_separated

Index = QModelIndex | QPersistentModelIndex
ColumnKind = Literal["label", "words", "number", "unit", "link"]
PADDING = 3  # left and right of a text, pixels
ROW_GAP = 6  # above and below a line together
LEAST_WORDS = 56  # the least width of a column of words
BREATH = 8  # pixels that a column of numbers gets before words get any
LEAST_HEAD = 24  # of what stands before the comma of a label
LEAST_LABEL = 76
DIMMED = 0.45
_NOWHERE = QModelIndex()


@dataclass(frozen=True)
class Column:
    """A column: its heading, what it holds, and the colour role of the heading."""

    title: str
    kind: ColumnKind
    role: str = "secondary"


@dataclass(frozen=True)
class Line:
    """A line: the texts shown, the same as copied, its tooltip. A heading has one text only."""

    cells: tuple[str, ...]
    full: tuple[str, ...] = ()
    tooltip: str = ""
    is_heading: bool = False


class LinesModel(QAbstractTableModel):
    """Columns and lines of text."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.columns: tuple[Column, ...] = ()
        self.lines: tuple[Line, ...] = ()
        self.is_dimmed = False

    def show(self, columns: tuple[Column, ...], lines: tuple[Line, ...], dimmed: bool) -> None:
        """Take other content; the selection survives when the shape is the same."""
        is_reshaped = columns != self.columns or len(lines) != len(self.lines)
        if is_reshaped:
            self.beginResetModel()
        self.columns, self.lines, self.is_dimmed = columns, lines, dimmed
        if is_reshaped:
            self.endResetModel()
        elif lines and columns:
            last = self.index(len(lines) - 1, len(columns) - 1)
            self.dataChanged.emit(self.index(0, 0), last)

    def rowCount(self, parent: Index = _NOWHERE) -> int:
        """Return the number of lines."""
        return 0 if parent.isValid() else len(self.lines)

    def columnCount(self, parent: Index = _NOWHERE) -> int:
        """Return the number of columns."""
        return 0 if parent.isValid() else len(self.columns)

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Let the lines, not the headings among them, be selected."""
        if self.lines[index.row()].is_heading:
            return Qt.ItemFlag.ItemIsEnabled
        return Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable

    def text(self, row: int, column: int) -> str:
        """Return the text shown in a cell."""
        cells = self.lines[row].cells
        return cells[column] if column < len(cells) else ""

    def copied(self, row: int, column: int) -> str:
        """Return a cell as it is copied: the whole number."""
        full = self.lines[row].full
        return full[column] if column < len(full) else self.text(row, column)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        """Return the text of a cell or its tooltip."""
        if role == Qt.ItemDataRole.DisplayRole:
            return self.text(index.row(), index.column())
        if role == Qt.ItemDataRole.ToolTipRole:
            text = self.text(index.row(), index.column())
            is_words = self.columns[index.column()].kind in ("label", "words")
            tooltip = self.lines[index.row()].tooltip
            return f"{text}\n{tooltip}".strip() if is_words else tooltip or text
        return None

    def headerData(
        self, section: int, orientation: Qt.Orientation,
        role: int = Qt.ItemDataRole.DisplayRole,
    ) -> Any:
        """Return the headings of the columns."""
        if orientation == Qt.Orientation.Vertical or role != Qt.ItemDataRole.DisplayRole:
            return None
        return self.columns[section].title


class LineDelegate(QStyledItemDelegate):
    """Draws labels in grey, numbers in ink and to the right, units small."""

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw one cell."""
        model = index.model()
        if not isinstance(model, LinesModel):
            return
        theme = current_theme()
        line, column = model.lines[index.row()], model.columns[index.column()]
        painter.save()
        if option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(option.rect, theme.colour("hover"))
        if column.kind == "link":  # a button stands here
            painter.restore()
            return
        painter.setFont(cell_font(option.font, column, line))
        painter.setPen(_cell_colour(theme, column, line, model.is_dimmed))
        room = _inside(option.rect, index.column())
        text = str(index.data() or "")
        is_label = column.kind == "label"
        shown = shorten(painter.fontMetrics(), text, room.width() + 1, is_label)
        painter.drawText(room, _alignment(column), shown)
        painter.restore()

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """Ask for the text."""
        metrics = QFontMetrics(option.font)
        width = metrics.horizontalAdvance(str(index.data() or "")) + 2 * PADDING
        return QSize(width, metrics.height() + ROW_GAP)


def cell_font(font: QFont, column: Column, line: Line) -> QFont:
    """Return the font of a cell."""
    made = QFont(font)
    if column.kind == "unit" and not line.is_heading:
        made.setPixelSize(Theme.font("small").pixelSize())
    made.setBold(line.is_heading)
    return made


def _cell_colour(theme: Theme, column: Column, line: Line, dimmed: bool) -> QColor:
    role = "ink" if column.kind in ("number", "words") else "secondary"
    if line.is_heading:
        role = "secondary"
    return theme.colour(role, DIMMED if dimmed else 1.0)


def shorten(metrics: QFontMetrics, text: str, width: int, is_label: bool) -> str:
    """Return a text elided to a width; labels keep their last words, for they differ there.

    "shear modulus, greatest" becomes "shear mo…, greatest", and "slowest wave least, km/s"
    becomes "slowe… least, km/s".
    """
    if metrics.horizontalAdvance(text) <= width:
        return text
    head, comma, tail = text.partition(", ")
    tail = comma + tail
    if head.count(" ") > 1:
        head, _, last = head.rpartition(" ")
        tail = f" {last}{tail}"
    room = width - metrics.horizontalAdvance(tail)
    if is_label and tail and room >= LEAST_HEAD:
        return metrics.elidedText(head, Qt.TextElideMode.ElideRight, room) + tail
    return metrics.elidedText(text, Qt.TextElideMode.ElideRight, width)


def _inside(rect: QRect, column: int) -> QRect:
    """Return the place of a text; the first column is flush with what stands above."""
    return rect.adjusted(PADDING if column else 0, 0, -PADDING, 0)


def _alignment(column: Column) -> Qt.AlignmentFlag:
    is_number = column.kind == "number"
    side = Qt.AlignmentFlag.AlignRight if is_number else Qt.AlignmentFlag.AlignLeft
    return side | Qt.AlignmentFlag.AlignVCenter


class ColumnsHeader(QHeaderView):
    """The headings of the columns, in the colours of their roles."""

    def __init__(self, parent: QWidget, model: LinesModel) -> None:
        super().__init__(Qt.Orientation.Horizontal, parent)
        self._lines = model
        self.setSectionsClickable(False)
        self.setMinimumSectionSize(8)

    def paintSection(self, painter: QPainter, rect: QRect, logical: int) -> None:
        """Draw one heading."""
        column = self._lines.columns[logical]
        painter.save()
        font = QFont(self.font())
        font.setBold(column.role in ("a", "b"))
        painter.setFont(font)
        painter.setPen(current_theme().colour(column.role))
        room = _inside(rect, logical)
        shown = painter.fontMetrics().elidedText(
            column.title, Qt.TextElideMode.ElideRight, room.width() + 1
        )
        painter.drawText(room, _alignment(column), shown)
        painter.restore()


class TextTable(QTableView):
    """The table. `opened(row)` comes on a double click on a line, or on Enter."""

    opened = Signal(int)

    def __init__(self, name: str, is_small: bool = False) -> None:
        super().__init__()
        self._is_small = is_small  # whatever the room: tables that stand together look alike
        self.lines = LinesModel(self)
        self.about = ""  # the first line of a copy of the whole table
        self.setModel(self.lines)
        self.setItemDelegate(LineDelegate(self))
        self.setHorizontalHeader(ColumnsHeader(self, self.lines))
        self.verticalHeader().hide()
        self.verticalHeader().setMinimumSectionSize(8)
        self.setAccessibleName(name)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setStyleSheet("QTableView { border: none; background: transparent; }")
        self.setShowGrid(False)
        self.setWordWrap(False)
        self.setTabKeyNavigation(False)
        self.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setMinimumWidth(160)
        self.doubleClicked.connect(self._open)

    def show_lines(
        self, columns: tuple[Column, ...], lines: tuple[Line, ...], dimmed: bool = False
    ) -> None:
        """Show other content and fit the columns to it."""
        self.lines.show(columns, lines, dimmed)
        self.clearSpans()
        for row, line in enumerate(lines):
            if line.is_heading and len(columns) > 1:
                self.setSpan(row, 0, 1, len(columns))
        self.horizontalHeader().setVisible(any(column.title for column in columns))
        self.fit()

    # ------------------------------------------------------------ fitting
    def fit(self) -> None:
        """Find the size of type and the widths at which every number is whole."""
        room = self.width()
        font = Theme.font("body")
        wanted = self._wanted_widths(font)
        if self._is_small or sum(wanted) > room:
            font = Theme.font("small")
            wanted = self._wanted_widths(font)
        widths = self._share(wanted, room)
        self.setFont(font)
        self.horizontalHeader().setFont(font)
        for column, width in enumerate(widths):
            self.setColumnWidth(column, width)
        self._fit_height(font, sum(widths) > room)

    def _wanted_widths(self, font: QFont) -> list[int]:
        widths = []
        for number, column in enumerate(self.lines.columns):
            heading = QFont(font)
            heading.setBold(column.role in ("a", "b"))
            widest = QFontMetrics(heading).horizontalAdvance(column.title)
            metrics = QFontMetrics(cell_font(font, column, Line(())))
            for row, line in enumerate(self.lines.lines):
                if not line.is_heading:
                    text = self.lines.text(row, number)
                    widest = max(widest, metrics.horizontalAdvance(text))
            widths.append(widest + 2 * PADDING + 1)
        return widths

    def _share(self, wanted: list[int], room: int) -> list[int]:
        """Take a lack from the words, longest first; spread a surplus."""
        widths = list(wanted)
        if not widths:
            return widths
        columns = self.lines.columns
        least = {"label": LEAST_LABEL, "words": LEAST_WORDS}
        elastic = [i for i, column in enumerate(columns) if column.kind in least]
        while sum(widths) > room:
            givers = [i for i in elastic if widths[i] > least[columns[i].kind]]
            if not givers:
                return widths
            widest = max(givers, key=lambda i: widths[i] - least[columns[i].kind])
            widths[widest] -= 1
        return self._spread(widths, room - sum(widths))

    def _spread(self, widths: list[int], surplus: int) -> list[int]:
        """Give what is left over to the numbers first, so that they breathe, then to words."""
        columns = self.lines.columns
        numbers = [i for i, column in enumerate(columns) if column.kind == "number"]
        words = [i for i, column in enumerate(columns) if column.kind in ("label", "words")]
        takers = sorted(words, key=lambda i: -widths[i])[:1] or list(range(len(widths)))
        for turn in range(max(surplus, 0)):
            breathes = turn < BREATH * len(numbers)
            taker = numbers[turn % len(numbers)] if breathes else takers[turn % len(takers)]
            widths[taker] += 1
        return widths

    def _fit_height(self, font: QFont, scrolls: bool) -> None:
        height = QFontMetrics(font).height() + ROW_GAP
        header = self.horizontalHeader()
        self.verticalHeader().setDefaultSectionSize(height)
        header.setFixedHeight(height)
        total = height * len(self.lines.lines) + (0 if header.isHidden() else height)
        bar = self.horizontalScrollBar().sizeHint().height() if scrolls else 0
        self.setHorizontalScrollBarPolicy(
            Qt.ScrollBarPolicy.ScrollBarAlwaysOn if scrolls else
            Qt.ScrollBarPolicy.ScrollBarAlwaysOff
        )
        self.setFixedHeight(total + bar)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Fit the columns to the new width."""
        super().resizeEvent(event)
        if event.oldSize().width() != event.size().width():
            self.fit()

    # ------------------------------------------------------------ keys and copying
    def event(self, event: QEvent) -> bool:
        """Keep copying and selecting all for the table."""
        keys = QKeySequence.StandardKey
        return claims(event, keys.Copy, keys.SelectAll) or super().event(event)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Copy with Ctrl+C, open a line with Enter."""
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self._open(self.currentIndex())
        else:
            super().keyPressEvent(event)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer to copy."""
        menu = QMenu(self)
        menu.addAction("&Copy\tCtrl+C", self.copy)
        menu.addAction("Copy &table", self.copy_table)
        menu.exec(event.globalPos())

    def copy(self) -> None:
        """Copy the selected cells, or the whole table when none is."""
        chosen = self.selectionModel().selectedIndexes()
        if not chosen:
            self.copy_table()
            return
        rows = sorted({index.row() for index in chosen})
        columns = sorted({index.column() for index in chosen})
        block = [[self.lines.copied(row, column) for column in columns] for row in rows]
        put_on_clipboard(tab_separated(block))

    def copy_table(self) -> None:
        """Copy everything, with the headings, at full precision."""
        columns = [
            i for i, column in enumerate(self.lines.columns) if column.kind != "link"
        ]
        rows = [[self.about]] if self.about else []
        rows.append([self.lines.columns[i].title for i in columns])
        for row, line in enumerate(self.lines.lines):
            if line.is_heading:
                rows.append([line.cells[0]])
            else:
                rows.append([self.lines.copied(row, i) for i in columns])
        put_on_clipboard(tab_separated(rows))

    def _open(self, index: Index) -> None:
        if index.isValid() and not self.lines.lines[index.row()].is_heading:
            self.opened.emit(index.row())
