"""The theme that the window wears, remembered from one time to the next."""

from __future__ import annotations

from importlib import resources

from PySide6.QtCore import QSettings
from PySide6.QtWidgets import QApplication

from gui.theme import LIGHT, THEMES, Theme, palette, style_sheet
from gui.window import Window


class Dressing:
    """Puts a theme on the application and on every view that paints itself."""

    def __init__(self, application: QApplication, window: Window, settings: QSettings) -> None:
        self._application, self._window, self._settings = application, window, settings
        self.theme = THEMES.get(str(settings.value("theme", LIGHT.name)), LIGHT)

    def choose(self, name: str) -> None:
        """Wear another theme from now on."""
        self.theme = THEMES[name]
        self._settings.setValue("theme", name)
        self.put_on()

    def is_chosen(self, name: str) -> bool:
        """Return whether this theme is worn."""
        return self.theme.name == name

    def put_on(self) -> None:
        """Dress everything in the present theme."""
        dress(self._application, self.theme)
        self._window.set_theme(self.theme)


def dress(application: QApplication, theme: Theme) -> None:
    """Give the application the palette and the style sheet of a theme."""
    application.setPalette(palette(theme))
    with resources.as_file(resources.files("assets")) as folder:
        application.setStyleSheet(style_sheet(theme, folder.as_posix()))
