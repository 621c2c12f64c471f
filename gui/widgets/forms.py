"""Controls that the side panels share: fields, choices, drag numbers, elided labels.

A field keeps its last good text, says when the user has finished changing it, and can be
marked as wrong without losing what was typed. Nothing here knows what the text means.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from PySide6.QtCore import QEvent, QPoint, QSize, Qt, Signal
from PySide6.QtGui import (
    QContextMenuEvent,
    QFocusEvent,
    QFontMetricsF,
    QGuiApplication,
    QHelpEvent,
    QKeyEvent,
    QKeySequence,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QPalette,
    QWheelEvent,
)
from PySide6.QtWidgets import (
    QApplication,
    QComboBox,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QMenu,
    QPlainTextEdit,
    QSizePolicy,
    QStyle,
    QStyleOptionComboBox,
    QStylePainter,
    QToolTip,
    QWidget,
)

from gui.theme import LIGHT, THEMES, Theme

MINUS = "\u2212"
DEGREES_PER_PIXEL = 0.25
FINE_DEGREES_PER_PIXEL = 0.02
DEGREES_PER_KEY = 1.0
FINE_DEGREES_PER_KEY = 0.1


# ---------------------------------------------------------------- small helpers
def current_theme() -> Theme:
    """Return the theme whose accent the application's palette carries.

    Tables and disclosure arrows paint themselves but are dressed by the application, so they
    read their colours from it instead of being told.
    """
    accent = QApplication.palette().color(QPalette.ColorRole.Highlight).name()
    return next((t for t in THEMES.values() if t.colour("a").name() == accent), LIGHT)


def label(text: str = "", role: str = "", wrap: bool = False) -> QLabel:
    """Return a label in a role of the style sheet."""
    made = QLabel(text)
    made.setTextFormat(Qt.TextFormat.PlainText)
    if role:
        made.setProperty("role", role)
    if wrap:
        made.setWordWrap(True)
        made.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
    return made


def set_or_hide(target: QLabel, text: str) -> None:
    """Show a text, or hide the label when there is none."""
    target.setText(text)
    target.setVisible(bool(text))


def plain_number(text: str) -> str:
    """Return a number as other programs read it: with the keyboard's minus sign."""
    return text.replace(MINUS, "-")


def tab_separated(rows: Iterable[Sequence[str]]) -> str:
    """Return rows as lines with tabs between the cells."""
    return "\n".join("\t".join(plain_number(cell) for cell in row) for row in rows)


def put_on_clipboard(text: str) -> None:
    """Copy a text."""
    QGuiApplication.clipboard().setText(text)


def claims(event: QEvent, *keys: QKeySequence.StandardKey) -> bool:
    """Accept a shortcut before the menus take it, and say whether it was one of `keys`."""
    if event.type() != QEvent.Type.ShortcutOverride or not isinstance(event, QKeyEvent):
        return False
    wanted = any(event.matches(key) for key in keys)
    if wanted:
        event.accept()
    return wanted


def set_mark(widget: QWidget, wrong: bool) -> None:
    """Dress a control as wrong or right."""
    if bool(widget.property("error")) == wrong:
        return
    widget.setProperty("error", wrong)
    widget.style().unpolish(widget)
    widget.style().polish(widget)


class ElidedLabel(QLabel):
    """A one-line label that ends in … when it must, and then tells the whole in its tooltip."""

    def __init__(self, text: str = "", role: str = "") -> None:
        super().__init__(text)
        self.setTextFormat(Qt.TextFormat.PlainText)
        if role:
            self.setProperty("role", role)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.setMinimumWidth(24)

    def sizeHint(self) -> QSize:
        """Ask for the whole text."""
        metrics = self.fontMetrics()
        return QSize(metrics.horizontalAdvance(self.text()) + 2, metrics.height() + 2)

    def minimumSizeHint(self) -> QSize:
        """Make do with a few letters."""
        return QSize(24, self.fontMetrics().height() + 2)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw what fits."""
        painter = QPainter(self)
        painter.setPen(self.palette().color(self.foregroundRole()))
        painter.setFont(self.font())
        shown = self.fontMetrics().elidedText(
            self.text(), Qt.TextElideMode.ElideRight, self.width()
        )
        painter.drawText(self.rect(), self.alignment() | Qt.AlignmentFlag.AlignVCenter, shown)

    def event(self, event: QEvent) -> bool:
        """Tell the whole text on hovering when it is cut short."""
        if event.type() == QEvent.Type.ToolTip and isinstance(event, QHelpEvent):
            is_cut = self.fontMetrics().horizontalAdvance(self.text()) > self.width()
            parts = [self.text()] if is_cut else []
            parts += [self.toolTip()] if self.toolTip() else []
            QToolTip.showText(event.globalPos(), "\n".join(parts), self)
            return True
        return super().event(event)

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        """Offer to copy the text."""
        menu = QMenu(self)
        menu.addAction("Copy", self.copy)
        menu.exec(event.globalPos())

    def copy(self) -> None:
        """Copy the whole text."""
        put_on_clipboard(self.text())


# ---------------------------------------------------------------- fields
class TextField(QLineEdit):
    """A line of text that keeps its last good content.

    `finished(field, text)` comes once when editing ends with a changed text. `error_label` is
    for the form to place below the field; it shows the sentence while the field is marked.
    """

    finished = Signal(str, str)

    def __init__(self, field: str, name: str, tooltip: str = "") -> None:
        super().__init__()
        self.field = field
        self._tooltip = tooltip
        self._good = ""
        self._sent: str | None = None
        self.error_label = label(role="error", wrap=True)
        self.error_label.hide()
        self.setAccessibleName(name)
        self.setToolTip(tooltip)
        self.editingFinished.connect(self._finish)

    @property
    def message(self) -> str:
        """What is wrong with the text, or nothing."""
        return self.error_label.text()

    def show_text(self, text: str) -> None:
        """Show a good text; leave what is being typed, and a wrong text still standing."""
        is_typing = self.hasFocus() and self.text() not in (self._good, self._sent)
        is_same = text == self._good
        self._good = text
        if is_typing or (self.message and is_same):
            return
        self._restore()

    def mark_error(self, message: str) -> None:
        """Mark the text as wrong and say why."""
        set_or_hide(self.error_label, message)
        self.setToolTip(message)
        self.setAccessibleDescription(message)
        set_mark(self, True)

    def clear_error(self) -> None:
        """Take the mark away and leave the text."""
        set_or_hide(self.error_label, "")
        self.setToolTip(self._tooltip)
        self.setAccessibleDescription("")
        set_mark(self, False)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Let Escape bring the last good text back."""
        is_changed = self.text() != self._good or bool(self.message)
        if event.key() == Qt.Key.Key_Escape and is_changed:
            self._restore()
            self.selectAll()
            return
        super().keyPressEvent(event)

    def _restore(self) -> None:
        self._sent = None
        self.clear_error()
        if self.text() != self._good:
            self.setText(self._good)
        if not self.hasFocus():
            self.setCursorPosition(0)

    def _finish(self) -> None:
        text = self.text()
        if text == self._good:
            self._restore()
        elif text != self._sent:
            self._sent = text
            self.clear_error()
            self.finished.emit(self.field, text)


class NotesField(QPlainTextEdit):
    """Several lines of text; `finished(field, text)` comes when the focus leaves it changed."""

    finished = Signal(str, str)

    def __init__(self, field: str, name: str, lines: int = 4) -> None:
        super().__init__()
        self.field = field
        self._good = ""
        self.setAccessibleName(name)
        self.setTabChangesFocus(True)
        self.setFixedHeight(lines * self.fontMetrics().lineSpacing() + 14)

    def show_text(self, text: str) -> None:
        """Show a text, unless another one is being typed."""
        is_typing = self.hasFocus() and self.toPlainText() != self._good
        self._good = text
        if not is_typing and self.toPlainText() != text:
            self.setPlainText(text)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Let Escape bring the last text back."""
        if event.key() == Qt.Key.Key_Escape and self.toPlainText() != self._good:
            self.setPlainText(self._good)
            return
        super().keyPressEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """Hand a changed text over."""
        super().focusOutEvent(event)
        text = self.toPlainText()
        if text != self._good and event.reason() != Qt.FocusReason.PopupFocusReason:
            self._good = text
            self.finished.emit(self.field, text)


# ---------------------------------------------------------------- choices
class Choice(QComboBox):
    """A choice among words with keys; `chosen(field, key)` comes only from the user.

    It does not turn with the wheel, since the panels around it scroll.
    """

    chosen = Signal(str, str)

    def __init__(self, field: str, name: str, tooltip: str = "") -> None:
        super().__init__()
        self.field = field
        self._tooltip = tooltip
        self._pairs: tuple[tuple[str, str], ...] = ()
        self._key = ""
        self.elide_mode = Qt.TextElideMode.ElideRight
        self.error_label = label(role="error", wrap=True)
        self.error_label.hide()
        self.setAccessibleName(name)
        self.setToolTip(tooltip)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizeAdjustPolicy(
            QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon
        )
        self.setMinimumContentsLength(6)
        self.activated.connect(self._choose)

    def show_choices(self, pairs: tuple[tuple[str, str], ...], key: str) -> None:
        """Show the choices, given as (key, words), and which of them holds."""
        if pairs != self._pairs:
            self._pairs = pairs
            self.clear()
            for each, words in pairs:
                self.addItem(words, each)
        if key != self._key:
            self.clear_error()
        self._key = key
        self.setCurrentIndex(self.findData(key))

    def mark_error(self, message: str) -> None:
        """Mark the choice as wrong and say why."""
        set_or_hide(self.error_label, message)
        self.setToolTip(message)
        set_mark(self, True)

    def clear_error(self) -> None:
        """Take the mark away."""
        set_or_hide(self.error_label, "")
        self.setToolTip(self._tooltip)
        set_mark(self, False)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Leave the wheel to the panel."""
        event.ignore()

    def paintEvent(self, event: QPaintEvent) -> None:
        """Draw the words elided instead of cut off."""
        painter = QStylePainter(self)
        option = QStyleOptionComboBox()
        self.initStyleOption(option)
        painter.drawComplexControl(QStyle.ComplexControl.CC_ComboBox, option)
        if self.isEditable():
            return
        field = self.style().subControlRect(
            QStyle.ComplexControl.CC_ComboBox,
            option,
            QStyle.SubControl.SC_ComboBoxEditField,
            self,
        )
        words = self.currentText()
        option.currentText = self.fontMetrics().elidedText(
            words, self.elide_mode, field.width() - 4
        )
        painter.drawControl(QStyle.ControlElement.CE_ComboBoxLabel, option)

    def _choose(self, index: int) -> None:
        key = str(self.itemData(index))
        if key != self._key:
            self._key = key
            self.clear_error()
            self.chosen.emit(self.field, key)


# ---------------------------------------------------------------- dragged numbers
class _Handle(QLabel):
    """A letter that is dragged sideways."""

    pulled = Signal(float, bool)  # pixels since the last one, fine
    released = Signal()
    dropped = Signal()

    def __init__(self, text: str) -> None:
        super().__init__(text)
        self._at: float | None = None
        self.setCursor(Qt.CursorShape.SizeHorCursor)
        self.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.setMinimumWidth(18)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Take hold."""
        if event.button() == Qt.MouseButton.LeftButton:
            self._at = event.position().x()
        elif self._at is not None:
            self._at = None
            self.dropped.emit()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Pull."""
        if self._at is None:
            return
        moved = event.position().x() - self._at
        self._at = event.position().x()
        is_fine = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        if moved:
            self.pulled.emit(moved, is_fine)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """Let go."""
        if self._at is not None and event.button() == Qt.MouseButton.LeftButton:
            self._at = None
            self.released.emit()


def read_degrees(text: str) -> float | None:
    """Return an angle as typed, in degrees; nothing when it is not a number."""
    try:
        value = float(plain_number(text).replace("°", "").replace(",", ".").strip())
    except ValueError:
        return None
    return value if abs(value) <= 1e6 else None


def degrees_text(value: float) -> str:
    """Return degrees to a ten-thousandth without idle zeros, with the typographic minus."""
    rounded = round(value, 4) + 0.0  # adding zero turns −0.0 into 0.0
    text = f"{rounded:.4f}".rstrip("0")
    text += "0" if text.endswith(".") else ""
    return text.replace("-", MINUS)


class DragField(QWidget):
    """An angle that is dragged by its letter, stepped with the arrow keys, or typed.

    `changed(key, degrees)` comes live; `settled()` when the change is complete. Shift makes
    dragging and stepping fine. The right button during a drag brings the first value back.
    """

    changed = Signal(int, float)
    settled = Signal()

    def __init__(self, key: int, letter: str, name: str, tooltip: str) -> None:
        super().__init__()
        self._key = key
        self._value = 0.0
        self._start: float | None = None
        self.handle = _Handle(letter)
        self.handle.setToolTip(f"{tooltip}\nDrag sideways to turn; hold Shift for fine turns.")
        self.number = TextField("turn", name, tooltip)
        self.number.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.number.setMinimumWidth(52)
        self.number.installEventFilter(self)
        self.number.show_text(degrees_text(0.0))
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(2)
        row.addWidget(self.handle)
        row.addWidget(self.number, 1)
        self.handle.pulled.connect(self._pull)
        self.handle.released.connect(self._let_go)
        self.handle.dropped.connect(self._put_back)
        self.number.finished.connect(self._read)

    def show_value(self, value: float) -> None:
        """Show an angle in degrees."""
        if self._start is None:
            self._value = value
        self.number.show_text(degrees_text(value))

    def eventFilter(self, watched: object, event: QEvent) -> bool:
        """Step with the up and down keys."""
        steps = {Qt.Key.Key_Up: 1.0, Qt.Key.Key_Down: -1.0}
        if event.type() == QEvent.Type.KeyPress and isinstance(event, QKeyEvent):
            step = steps.get(Qt.Key(event.key()))
            if step is not None:
                fine = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
                size = FINE_DEGREES_PER_KEY if fine else DEGREES_PER_KEY
                self._set(round(self._value + step * size, 4))
                self.settled.emit()
                return True
        return False

    def _set(self, value: float) -> None:
        self._value = value
        self.number.show_text(degrees_text(value))
        self.changed.emit(self._key, value)

    def _pull(self, pixels: float, fine: bool) -> None:
        if self._start is None:
            self._start = self._value
        rate = FINE_DEGREES_PER_PIXEL if fine else DEGREES_PER_PIXEL
        self._set(round(self._value + pixels * rate, 4))

    def _let_go(self) -> None:
        if self._start is not None:
            self._start = None
            self.settled.emit()

    def _put_back(self) -> None:
        if self._start is not None:
            start, self._start = self._start, None
            self._set(start)
            self.settled.emit()

    def _read(self, field: str, text: str) -> None:
        value = read_degrees(text)
        if value is None:
            self.number.mark_error(f"“{text}” is not an angle in degrees.")
            return
        self._set(value)
        self.settled.emit()


def below(widget: QWidget) -> QPoint:
    """Return the place on the screen just under a widget, for a popup."""
    return widget.mapToGlobal(QPoint(0, widget.height()))


def text_width(metrics: QFontMetricsF, texts: Iterable[str]) -> float:
    """Return the width of the widest text, in pixels."""
    return max((metrics.horizontalAdvance(text) for text in texts), default=0.0)
