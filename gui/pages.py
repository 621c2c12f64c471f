"""The two pages of the window and the buttons that change between them."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtGui import QFontMetrics
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QPushButton, QWidget

from gui.theme import Theme

PAGES = (
    ("bench", "Bench", "F5", "The constants, the stage and the reading"),
    ("speeds", "Measured speeds", "F6", "Constants from measured wave speeds"),
)


class PageSwitch(QWidget):
    """Two face buttons for the corner of the menu bar; `page_chosen(key)`."""

    page_chosen = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._group = QButtonGroup(self)
        self._buttons: dict[str, QPushButton] = {}
        row = QHBoxLayout(self)
        row.setContentsMargins(8, 0, 12, 0)
        row.setSpacing(14)
        bold = QFontMetrics(Theme.font(bold=True))
        for key, words, keys, tooltip in PAGES:
            button = QPushButton(words)
            button.setProperty("role", "face")
            button.setProperty("key", key)
            button.setCheckable(True)
            button.setToolTip(f"{tooltip} ({keys})")
            button.setAccessibleName(f"Page: {words}")
            button.setMinimumWidth(bold.horizontalAdvance(words) + 8)
            self._group.addButton(button)
            self._buttons[key] = button
            row.addWidget(button)
        self._group.buttonClicked.connect(self._choose)
        self._shown = PAGES[0][0]
        self.show_page(self._shown)

    def show_page(self, key: str) -> None:
        """Show which page is seen."""
        self._shown = key
        self._buttons[key].setChecked(True)

    def button(self, key: str) -> QPushButton:
        """Return the button of a page."""
        return self._buttons[key]

    def _choose(self, button: QPushButton) -> None:
        key = str(button.property("key"))
        if key != self._shown:
            self.page_chosen.emit(key)
