"""Colours, fonts and the style sheet: the roles of the look, in a light and a night dress."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import numpy.typing as npt
from PySide6.QtGui import QColor, QFont, QFontInfo, QPalette
from PySide6.QtWidgets import QApplication

_LIGATURES = QFont.Tag("liga")
SEQUENTIAL_MAP = "viridis"
DIVERGING_MAP = "CET-D1A"
_CHUNK_SHARE = 0.35  # of the colour of A in a progress bar: its text stays readable
GREY_FOR_UNDEFINED = "#9A9A94"


@dataclass(frozen=True)
class Theme:
    """The roles that every drawing and every widget takes its colours from."""

    name: str
    background: str
    panel: str
    field: str
    hairline: str
    ink: str
    secondary: str
    faint: str
    a: str
    b: str
    alert: str
    good: str
    doubt: str
    stage: str
    hover: str

    def colour(self, role: str, alpha: float = 1.0) -> QColor:
        """Return the colour of a role, with an opacity from 0 to 1."""
        colour = QColor(getattr(self, role))
        colour.setAlphaF(alpha)
        return colour

    def side(self, side: str, alpha: float = 1.0) -> QColor:
        """Return the colour of side "A" or "B"."""
        return self.colour("a" if side == "A" else "b", alpha)

    @staticmethod
    def font(size: str = "body", scale: float = 1.0, bold: bool = False) -> QFont:
        """Return the one type family in one of three sizes: "small", "body", "title".

        In pixels, so that it comes out alike on the screen and on a page of 1200 dots an inch.
        """
        font = QApplication.font()
        factor = {"small": 0.88, "body": 1.0, "title": 1.2}[size]
        font.setPixelSize(max(1, round(QFontInfo(font).pixelSize() * factor * scale)))
        font.setBold(bold)
        font.setFeature(_LIGATURES, 0)  # so that “file” is found in a PDF
        return font


LIGHT = Theme(
    name="light",
    background="#F4F2EE",
    panel="#FFFFFF",
    field="#FFFFFF",
    hairline="#DAD6CE",
    ink="#23272C",
    secondary="#6B7077",
    faint="#A3A19B",
    a="#0F6A8B",
    b="#C4691C",
    alert="#B3261E",
    good="#3B7D3A",
    doubt="#A86A00",
    stage="#FBFAF8",
    hover="#EBE7DF",
)
NIGHT = Theme(
    name="night",
    background="#17191C",
    panel="#1F2226",
    field="#262A2F",
    hairline="#383D44",
    ink="#E6E3DD",
    secondary="#9BA1A8",
    faint="#6C727A",
    a="#4FB3D6",
    b="#E8954A",
    alert="#FF8A80",
    good="#7CC47A",
    doubt="#E0B050",
    stage="#1B1E22",
    hover="#2D3238",
)
THEMES = {theme.name: theme for theme in (LIGHT, NIGHT)}


@lru_cache(maxsize=8)
def colour_table(diverging: bool) -> npt.NDArray[np.uint8]:
    """Return 256 RGBA colours, shape (256, 4): even and safe for colour-blind eyes.

    The diverging map is read centred on zero. CET maps: Kovesi, *Good colour maps: how to
    design them*, 2015, licensed CC-BY.
    """
    import pyqtgraph as pg

    name = DIVERGING_MAP if diverging else SEQUENTIAL_MAP
    table = pg.colormap.get(name).getLookupTable(0.0, 1.0, 256, alpha=True)
    return np.ascontiguousarray(table, dtype=np.uint8)


def colours_of(
    values: npt.NDArray[np.float64], low: float, high: float, diverging: bool
) -> npt.NDArray[np.uint8]:
    """Return RGBA colours for values, shape (..., 4); NaN is transparent."""
    span = high - low if high > low else 1.0
    with np.errstate(invalid="ignore"):
        index = np.clip(np.nan_to_num((values - low) / span) * 255.0 + 0.5, 0, 255)
    rgba = colour_table(diverging)[index.astype(np.intp)]
    rgba[..., 3] = np.where(np.isfinite(values), 255, 0)
    return rgba


def palette(theme: Theme) -> QPalette:
    """Return the palette for native parts: selections, tool tips, menus."""
    roles = {
        QPalette.ColorRole.Window: theme.background,
        QPalette.ColorRole.WindowText: theme.ink,
        QPalette.ColorRole.Base: theme.field,
        QPalette.ColorRole.AlternateBase: theme.panel,
        QPalette.ColorRole.Text: theme.ink,
        QPalette.ColorRole.PlaceholderText: theme.faint,
        QPalette.ColorRole.Button: theme.panel,
        QPalette.ColorRole.ButtonText: theme.ink,
        QPalette.ColorRole.ToolTipBase: theme.panel,
        QPalette.ColorRole.ToolTipText: theme.ink,
        QPalette.ColorRole.Highlight: theme.a,
        QPalette.ColorRole.HighlightedText: theme.panel,
        QPalette.ColorRole.Link: theme.a,
    }
    result = QPalette()
    for role, colour in roles.items():
        result.setColor(role, QColor(colour))
    for role in (
        QPalette.ColorRole.WindowText,
        QPalette.ColorRole.Text,
        QPalette.ColorRole.ButtonText,
    ):
        result.setColor(QPalette.ColorGroup.Disabled, role, QColor(theme.faint))
    return result


_STYLE_SHEET = """
QWidget {{ color: {ink}; }}
QMainWindow, QDialog {{ background: {background}; }}
QMenuBar {{ background: {panel}; border-bottom: 1px solid {hairline}; padding: 1px 4px; }}
QMenuBar::item {{ padding: 4px 9px; background: transparent; }}
QMenuBar::item:selected, QMenu::item:selected {{ background: {hover}; color: {ink}; }}
QMenu {{ background: {panel}; border: 1px solid {hairline}; padding: 4px 0; }}
QMenu::item {{ padding: 4px 26px 4px 22px; }}
QMenu::item:disabled {{ color: {faint}; }}
QMenu::separator {{ height: 1px; background: {hairline}; margin: 4px 8px; }}
QStatusBar {{ background: {background}; color: {secondary}; }}
QStatusBar::item {{ border: none; }}
QToolTip {{ background: {panel}; color: {ink}; border: 1px solid {hairline}; padding: 4px; }}
QSplitter::handle {{ background: transparent; }}
QScrollArea, QScrollArea > QWidget > QWidget {{ background: transparent; border: none; }}
QFrame[role="panel"] {{ background: {panel}; border: 1px solid {hairline}; }}
QLabel {{ background: transparent; }}
QLabel[role="secondary"] {{ color: {secondary}; }}
QLabel[role="faint"] {{ color: {faint}; }}
QLabel[role="error"] {{ color: {alert}; }}
QLabel[role="doubt"] {{ color: {doubt}; }}
QLabel[role="side_a"] {{ color: {a}; font-weight: bold; }}
QLabel[role="side_b"] {{ color: {b}; font-weight: bold; }}
QLabel[role="heading"] {{ font-weight: bold; }}
QLineEdit, QPlainTextEdit, QSpinBox, QDoubleSpinBox, QComboBox {{
    background: {field}; border: 1px solid {hairline}; border-radius: 3px; padding: 2px 5px;
    selection-background-color: {a}; selection-color: {panel}; min-height: 1.35em; }}
QLineEdit:focus, QPlainTextEdit:focus, QSpinBox:focus, QDoubleSpinBox:focus, QComboBox:focus {{
    border: 1px solid {a}; }}
QLineEdit[error="true"], QComboBox[error="true"], QDoubleSpinBox[error="true"] {{
    border: 1px solid {alert}; color: {alert}; }}
QLineEdit:disabled, QComboBox:disabled, QDoubleSpinBox:disabled {{ color: {faint}; }}
QComboBox::drop-down {{ border: none; width: 16px; }}
QComboBox::down-arrow {{ image: url({arrow}); width: 9px; height: 9px; }}
QComboBox QAbstractItemView {{ background: {panel}; border: 1px solid {hairline};
    selection-background-color: {hover}; selection-color: {ink}; outline: none; }}
QPushButton, QToolButton {{ background: {panel}; border: 1px solid {hairline};
    border-radius: 3px; padding: 3px 9px; }}
QPushButton:hover, QToolButton:hover {{ background: {hover}; }}
QPushButton:focus, QToolButton:focus {{ border: 1px solid {a}; }}
QPushButton:checked, QToolButton:checked {{ background: {hover}; border: 1px solid {a};
    color: {a}; }}
QPushButton:disabled, QToolButton:disabled {{ color: {faint}; }}
QPushButton[role="link"], QToolButton[role="link"] {{ border: none; color: {a};
    background: transparent; padding: 0 2px; text-decoration: underline; }}
QPushButton[role="link"]:disabled {{ color: {faint}; }}
QPushButton[role="link"]:focus {{ border: 1px dotted {a}; }}
QPushButton[role="face"] {{ border: none; border-bottom: 2px solid transparent;
    background: transparent; color: {secondary}; padding: 2px 1px; border-radius: 0; }}
QPushButton[role="face"]:checked {{ color: {a}; border-bottom: 2px solid {a};
    font-weight: bold; }}
QPushButton[role="face"]:focus {{ border-bottom: 2px dotted {a}; }}
QAbstractSpinBox::up-button, QAbstractSpinBox::down-button {{ width: 0; border: none; }}
QCheckBox {{ background: transparent; spacing: 5px; }}
QCheckBox:focus {{ color: {a}; }}
QCheckBox::indicator {{ width: 13px; height: 13px; border: 1px solid {faint};
    border-radius: 3px; background: {field}; }}
QCheckBox::indicator:hover {{ border: 1px solid {a}; }}
QCheckBox::indicator:checked {{ background: {a}; border: 1px solid {a}; image: url({tick}); }}
QCheckBox::indicator:disabled {{ border: 1px solid {hairline}; background: {background}; }}
QTableView {{ background: {panel}; gridline-color: {hairline}; border: 1px solid {hairline};
    selection-background-color: {hover}; selection-color: {ink}; }}
QHeaderView::section {{ background: {panel}; color: {secondary}; border: none;
    padding: 2px 4px; }}
QTabWidget::pane {{ border: none; }}
QTabBar::tab {{ background: transparent; color: {secondary}; padding: 4px 12px;
    border-bottom: 2px solid transparent; }}
QTabBar::tab:selected {{ color: {ink}; border-bottom: 2px solid {a}; }}
QTabBar::tab:focus {{ color: {a}; }}
QScrollBar:vertical {{ background: transparent; width: 10px; margin: 0; }}
QScrollBar:horizontal {{ background: transparent; height: 10px; margin: 0; }}
QScrollBar::handle {{ background: {hairline}; border-radius: 4px; min-height: 24px;
    min-width: 24px; margin: 1px; }}
QScrollBar::handle:hover {{ background: {faint}; }}
QScrollBar::add-line, QScrollBar::sub-line {{ width: 0; height: 0; }}
QScrollBar::add-page, QScrollBar::sub-page {{ background: transparent; }}
QProgressBar {{ background: {field}; border: 1px solid {hairline}; border-radius: 3px;
    color: {ink}; text-align: center; }}
QProgressBar::chunk {{ background: {chunk}; }}
"""


def style_sheet(theme: Theme, folder: str) -> str:
    """Return the application's style sheet; `folder` holds the arrows and ticks of controls."""
    roles = {name: getattr(theme, name) for name in Theme.__dataclass_fields__}
    pictures = {part: f"{folder}/{part}_{theme.name}.svg" for part in ("arrow", "tick")}
    chunk = _mix(theme.a, theme.field, _CHUNK_SHARE)
    return _STYLE_SHEET.format(chunk=chunk, **pictures, **roles)


def _mix(colour: str, ground: str, share: float) -> str:
    """Return a colour laid over a ground with an opacity."""
    over, under = QColor(colour), QColor(ground)
    parts = zip(over.getRgb()[:3], under.getRgb()[:3], strict=True)  # type: ignore[index]
    return QColor(*(round(share * a + (1 - share) * b) for a, b in parts)).name()
