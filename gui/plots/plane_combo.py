"""The combo of section planes: a list to choose from, and any other plane typed."""

from __future__ import annotations

from PySide6.QtCore import QSignalBlocker, Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QComboBox, QCompleter, QLineEdit, QWidget

OTHER = "other…"


class PlaneCombo(QComboBox):
    """An editable combo that sends out the key of a listed plane or the text that was typed.

    Signals
    -------
    chosen(str)
    restored()
        A text was taken back with Escape or left empty.
    """

    chosen = Signal(str)
    restored = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._plane = ""
        self._words = ""
        self._sent = ""
        self._is_wrong = False
        self._line = QLineEdit(self)
        self.setLineEdit(self._line)
        self.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        # Without words of its own: nothing is completed while a plane is typed.
        self.setCompleter(QCompleter(self))
        self.setMinimumContentsLength(8)
        self.setAccessibleName("Section plane")
        self.setToolTip("Plane of the section: choose one, or type its normal, "
                        "for example [1 1 0] or (1 0 2)")  # fmt: skip
        self.activated.connect(self._choose)
        self._line.editingFinished.connect(self._finish)
        self._line.textEdited.connect(self._forget)

    def show_plane(self, plane: str, planes: tuple[tuple[str, str], ...]) -> None:
        """Show a plane and the list, silently; a wrong text stays until the plane changes."""
        if self._is_wrong and plane == self._plane:
            return
        words = dict(planes).get(plane, plane)
        listed = tuple((self.itemData(i), self.itemText(i)) for i in range(self.count()))
        wanted = (*planes, (None, OTHER))
        with QSignalBlocker(self):
            if listed != wanted:
                self.clear()
                for key, text in wanted:
                    self.addItem(text, key)
            self.setCurrentIndex(self.findData(plane))
            self.setEditText(words)
            self._line.setCursorPosition(0)  # long words are seen from their beginning
        self._plane, self._words, self._sent = plane, words, ""
        self.mark_wrong(False)

    def mark_wrong(self, wrong: bool) -> None:
        """Mark the text as one that could not be read, or take the mark away."""
        self._is_wrong = wrong
        self.setProperty("error", "true" if wrong else "false")
        self.style().unpolish(self)
        self.style().polish(self)

    def is_wrong(self) -> bool:
        """Tell whether the text is marked."""
        return self._is_wrong

    def restore(self) -> None:
        """Show the plane that is drawn again, in place of a text."""
        self.mark_wrong(False)
        with QSignalBlocker(self):
            self.setCurrentIndex(self.findData(self._plane))
            self.setEditText(self._words)
        self._sent = ""
        self.restored.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Take a text back with Escape."""
        if event.key() == Qt.Key.Key_Escape:
            self.restore()
        super().keyPressEvent(event)

    def _choose(self, index: int) -> None:
        """Send the key of a listed plane, or ask for a text."""
        key = self.itemData(index)
        if key is not None:
            self._send(str(key))
            return
        self.setEditText("")
        self._line.setPlaceholderText("normal, e.g. [1 1 0]")
        self._line.setFocus()

    def _finish(self) -> None:
        """Send a typed text; an empty one means that nothing was meant."""
        text = self.currentText().strip()
        if text in ("", OTHER, self._words):
            self.restore()
        else:
            index = self.findText(text, Qt.MatchFlag.MatchFixedString)
            self._send(text if index < 0 else str(self.itemData(index)))

    def _send(self, plane: str) -> None:
        """Send a plane once: Enter is told of both as a choice and as an end of editing."""
        if plane == self._plane:
            self.restore()
        elif plane != self._sent:
            self._sent = plane
            self.chosen.emit(plane)

    def _forget(self, text: str) -> None:
        """Let the same text be sent again after it was edited."""
        self._sent = ""
