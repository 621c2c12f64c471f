"""The cells of the constants grid: what they hold, how they are drawn and typed in."""

from __future__ import annotations

from typing import Any, Literal

from PySide6.QtCore import (
    QAbstractItemModel,
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
from PySide6.QtGui import QFont, QKeyEvent, QPainter, QPen
from PySide6.QtWidgets import (
    QAbstractItemDelegate,
    QHeaderView,
    QLineEdit,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from gui.theme import Theme
from gui.viewdata import CellView, ConstantsView
from gui.widgets.forms import current_theme, plain_number

Index = QModelIndex | QPersistentModelIndex
Kind = Literal["independent", "dependent", "zero"]
SIZE = 6
DOT = "·"
PADDING = 3  # left and right of a number, pixels
_NOWHERE = QModelIndex()


class ConstantsModel(QAbstractTableModel):
    """The 6×6 cells of one face, with the bad entries that still stand in them.

    `entered(row, column, text)` comes when a cell was typed into with a changed text.
    """

    entered = Signal(int, int, str)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.view: ConstantsView | None = None
        self._typed: dict[tuple[int, int], str] = {}
        self._faults: dict[tuple[int, int], str] = {}

    def show_view(self, view: ConstantsView) -> None:
        """Take new cells; a bad entry goes when its cell has changed, or the face has."""
        old, self.view = self.view, view
        if old is None or old.face != view.face:
            self.drop_all()
        else:
            for row, column in list(self._faults):
                if old.cells[row][column].full != view.cells[row][column].full:
                    self.drop(row, column)
        self._announce()

    def cell(self, row: int, column: int) -> CellView | None:
        """Return one cell, once there are any."""
        return self.view.cells[row][column] if self.view is not None else None

    def kind(self, row: int, column: int) -> Kind:
        """Say how a cell is drawn; below the diagonal it mirrors the one above."""
        cell = self.cell(row, column)
        if cell is None:
            return "zero"
        return "dependent" if row > column and cell.kind == "independent" else cell.kind

    def is_open(self, row: int, column: int) -> bool:
        """Say whether a cell may be typed in: it, or its mirror image, is independent."""
        if self.view is None or not self.view.editable:
            return False
        kinds = (self.view.cells[row][column].kind, self.view.cells[column][row].kind)
        return "independent" in kinds

    def fault(self, row: int, column: int) -> str:
        """Return what is wrong with the entry standing in a cell, or nothing."""
        return self._faults.get((row, column), "")

    def faults(self) -> tuple[str, ...]:
        """Return what is wrong anywhere, oldest first."""
        return tuple(self._faults.values())

    def mark(self, row: int, column: int, message: str) -> None:
        """Let the last entry of a cell stand as a bad one, with the reason."""
        self._faults[row, column] = message
        self._announce()

    def drop(self, row: int, column: int) -> None:
        """Forget a bad entry: the cell shows its last good value again."""
        self._faults.pop((row, column), None)
        self._typed.pop((row, column), None)
        self._announce()

    def drop_all(self) -> None:
        """Forget all bad entries."""
        self._faults.clear()
        self._typed.clear()
        self._announce()

    def copied(self, row: int, column: int) -> str:
        """Return a cell as it is copied: the whole number."""
        cell = self.cell(row, column)
        if cell is None:
            return ""
        return plain_number(cell.full or ("0" if cell.kind == "zero" else cell.text))

    def rowCount(self, parent: Index = _NOWHERE) -> int:
        """Return 6."""
        return 0 if parent.isValid() else SIZE

    def columnCount(self, parent: Index = _NOWHERE) -> int:
        """Return 6."""
        return 0 if parent.isValid() else SIZE

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Let the open cells be edited."""
        flags = Qt.ItemFlag.ItemIsSelectable | Qt.ItemFlag.ItemIsEnabled
        if self.is_open(index.row(), index.column()):
            flags |= Qt.ItemFlag.ItemIsEditable
        return flags

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        """Return the text shown, the text edited, or the words of the tooltip."""
        place = index.row(), index.column()
        cell = self.cell(*place)
        if cell is None:
            return None
        standing = self._typed.get(place, "") if place in self._faults else ""
        if role == Qt.ItemDataRole.DisplayRole:
            return standing or (DOT if cell.kind == "zero" else cell.text)
        if role == Qt.ItemDataRole.EditRole:
            return standing or self.copied(*place)
        if role == Qt.ItemDataRole.ToolTipRole:
            return self.fault(*place) or cell.tooltip
        if role == Qt.ItemDataRole.AccessibleDescriptionRole:
            return self.fault(*place) or cell.tooltip
        return None

    def headerData(
        self, section: int, orientation: Qt.Orientation,
        role: int = Qt.ItemDataRole.DisplayRole,
    ) -> Any:
        """Return the numbers of rows and columns, from 1."""
        return str(section + 1) if role == Qt.ItemDataRole.DisplayRole else None

    def setData(self, index: Index, value: Any, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Hand a changed entry on; the cell itself changes only when a new view says so."""
        place = index.row(), index.column()
        text = str(value).strip()
        is_unchanged = plain_number(text) == self.copied(*place)
        self.drop(*place)
        if is_unchanged or role != Qt.ItemDataRole.EditRole:
            return False
        self._typed[place] = text
        self.entered.emit(*place, text)
        return True

    def _announce(self) -> None:
        self.dataChanged.emit(self.index(0, 0), self.index(SIZE - 1, SIZE - 1))


class CellEditor(QLineEdit):
    """The editor of a cell: as wide as its number, though the cell may be narrower."""

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self.setStyleSheet("QLineEdit { padding: 0 2px; border-radius: 0; }")
        self.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.textChanged.connect(self.grow)

    def grow(self) -> None:
        """Widen to the left as far as the text wants, or to the right at the left edge."""
        wanted = self.fontMetrics().horizontalAdvance(self.text()) + 16
        parent = self.parentWidget()
        if wanted <= self.width() or parent is None:
            return
        width = min(wanted, parent.width())
        right = max(self.geometry().right(), width - 1)
        self.setGeometry(QRect(right - width + 1, self.y(), width, self.height()))


class CellDelegate(QStyledItemDelegate):
    """Draws the cells and moves on from the editor as a sheet of numbers does.

    `stepped(rows, columns)` and `tabbed(direction)` come after the entry was committed.
    """

    stepped = Signal(int, int)
    tabbed = Signal(int)

    def __init__(self, parent: QObject) -> None:
        super().__init__(parent)
        self.is_replacing = False  # typing over a cell: the side arrows leave it, too

    def createEditor(
        self, parent: QWidget, option: QStyleOptionViewItem, index: Index
    ) -> QWidget:
        """Make an editor of the grid's own font."""
        return CellEditor(parent)

    def setModelData(
        self, editor: QWidget, model: QAbstractItemModel, index: Index
    ) -> None:
        """Commit the text."""
        if isinstance(editor, CellEditor):
            model.setData(index, editor.text(), Qt.ItemDataRole.EditRole)

    def setEditorData(self, editor: QWidget, index: Index) -> None:
        """Offer the whole number."""
        if isinstance(editor, CellEditor) and not editor.isModified():
            editor.setText(str(index.data(Qt.ItemDataRole.EditRole)))
            editor.selectAll()

    def updateEditorGeometry(
        self, editor: QWidget, option: QStyleOptionViewItem, index: Index
    ) -> None:
        """Cover the cell, and more when the number is long."""
        editor.setGeometry(option.rect)
        if isinstance(editor, CellEditor):
            editor.grow()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Move on with Enter, Tab and the arrows."""
        if (
            event.type() == QEvent.Type.KeyPress
            and isinstance(event, QKeyEvent)
            and isinstance(watched, CellEditor)
            and self._move_on(watched, event)
        ):
            return True
        return super().eventFilter(watched, event)

    def _move_on(self, editor: CellEditor, event: QKeyEvent) -> bool:
        key, shift = event.key(), bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        tabs = {Qt.Key.Key_Tab: 1, Qt.Key.Key_Backtab: -1}
        steps = {
            Qt.Key.Key_Return: (-1 if shift else 1, 0),
            Qt.Key.Key_Enter: (-1 if shift else 1, 0),
            Qt.Key.Key_Up: (-1, 0),
            Qt.Key.Key_Down: (1, 0),
        }
        if self.is_replacing and not shift:
            steps |= {Qt.Key.Key_Left: (0, -1), Qt.Key.Key_Right: (0, 1)}
        if key not in tabs and key not in steps:
            return False
        self.commitData.emit(editor)
        self.closeEditor.emit(editor, QAbstractItemDelegate.EndEditHint.NoHint)
        if key in tabs:
            self.tabbed.emit(tabs[Qt.Key(key)])
        else:
            self.stepped.emit(*steps[Qt.Key(key)])
        return True

    def sizeHint(self, option: QStyleOptionViewItem, index: Index) -> QSize:
        """Ask for the least size of a cell."""
        return QSize(52, 26)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw the number, its state, and the frame of the current cell."""
        model = index.model()
        if not isinstance(model, ConstantsModel):
            return
        theme = current_theme()
        rect: QRect = option.rect
        state: QStyle.StateFlag = option.state
        is_wrong = bool(model.fault(index.row(), index.column()))
        kind = model.kind(index.row(), index.column())
        painter.save()
        if is_wrong:
            painter.fillRect(rect, theme.colour("alert", 0.12))
        elif state & QStyle.StateFlag.State_Selected:
            painter.fillRect(rect, theme.colour("hover"))
        painter.setFont(_cell_font(option.font, kind, is_wrong))
        painter.setPen(theme.colour(_cell_role(kind, is_wrong)))
        _draw_number(painter, rect, str(index.data() or ""), kind)
        if state & QStyle.StateFlag.State_HasFocus:
            _draw_frame(painter, rect, theme, is_wrong)
        painter.restore()


def _cell_font(font: QFont, kind: Kind, is_wrong: bool) -> QFont:
    """Slant what follows from other cells."""
    slanted = QFont(font)
    slanted.setItalic(kind == "dependent" and not is_wrong)
    return slanted


def _cell_role(kind: Kind, is_wrong: bool) -> str:
    if is_wrong:
        return "alert"
    return {"independent": "ink", "dependent": "faint", "zero": "faint"}[kind]


def _draw_number(painter: QPainter, rect: QRect, text: str, kind: Kind) -> None:
    if text == DOT and kind == "zero":
        painter.drawText(rect, Qt.AlignmentFlag.AlignCenter, text)
        return
    room = rect.adjusted(PADDING, 0, -PADDING, 0)
    shown = painter.fontMetrics().elidedText(
        text, Qt.TextElideMode.ElideRight, room.width() + 1
    )
    painter.drawText(room, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter, shown)


def _draw_frame(painter: QPainter, rect: QRect, theme: Theme, is_wrong: bool) -> None:
    painter.setPen(QPen(theme.colour("alert" if is_wrong else "a"), 2))
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.drawRect(rect.adjusted(1, 1, -1, -1))


class NumbersHeader(QHeaderView):
    """The small faint numbers 1 to 6 beside the grid."""

    def __init__(self, orientation: Qt.Orientation, parent: QWidget) -> None:
        super().__init__(orientation, parent)
        self.setSectionsClickable(False)
        self.setHighlightSections(True)
        self.setMinimumSectionSize(14)

    def paintSection(self, painter: QPainter, rect: QRect, logical: int) -> None:
        """Draw one number; that of the current cell in ink."""
        theme = current_theme()
        view = self.parentWidget()
        current = view.currentIndex() if isinstance(view, QTableView) else QModelIndex()
        here = current.column() if self.orientation() == Qt.Orientation.Horizontal else (
            current.row()
        )
        painter.save()
        painter.setFont(Theme.font("small"))
        painter.setPen(theme.colour("secondary" if here == logical else "faint"))
        painter.drawText(rect, Qt.AlignmentFlag.AlignCenter, str(logical + 1))
        painter.setPen(theme.colour("hairline"))
        if self.orientation() == Qt.Orientation.Horizontal:
            painter.drawLine(rect.bottomLeft(), rect.bottomRight())
        else:
            painter.drawLine(rect.topRight(), rect.bottomRight())
        painter.restore()
