"""Small parts that the dialogs for figures, reports, tables and meshes share."""

from __future__ import annotations

import re
from collections.abc import Mapping
from pathlib import Path

from PySide6.QtCore import QSettings
from PySide6.QtGui import QIcon
from PySide6.QtWidgets import (
    QCheckBox,
    QComboBox,
    QDialogButtonBox,
    QDoubleSpinBox,
    QFileDialog,
    QPushButton,
    QWidget,
)

from core.directional.quantities import QUANTITIES
from core.report.captions import SHOWN, SIDES
from core.report.content import compared_sides
from core.state import BenchState


def choice_of(pairs: Mapping[str, str], name: str, tip: str = "") -> QComboBox:
    """Return a combo box of words, each with its key."""
    box = QComboBox()
    box.setAccessibleName(name)
    box.setToolTip(tip)
    for key, words in pairs.items():
        box.addItem(words, key)
    return box


def key_of(box: QComboBox) -> str:
    """Return the key of what a combo box shows."""
    return str(box.currentData())


def show_key(box: QComboBox, key: str) -> None:
    """Show the words of a key; a key that is not offered changes nothing."""
    index = box.findData(key)
    if index >= 0:
        box.setCurrentIndex(index)


def number_field(
    name: str, unit: str, low: float, high: float, decimals: int = 0, tip: str = ""
) -> QDoubleSpinBox:
    """Return a field for a number within limits, its unit behind it."""
    field = QDoubleSpinBox()
    field.setAccessibleName(name)
    field.setToolTip(tip or f"{low:g} to {high:g} {unit}")
    field.setRange(low, high)
    field.setDecimals(decimals)
    field.setSuffix(f" {unit}" if unit else "")
    field.setKeyboardTracking(False)
    return field


def tick_box(words: str, tip: str = "") -> QCheckBox:
    """Return a box to tick."""
    box = QCheckBox(words)
    box.setAccessibleName(words)
    box.setToolTip(tip)
    return box


def close_box() -> QDialogButtonBox:
    """Return the row of buttons of a dialog, with Close at its end."""
    buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
    buttons.button(QDialogButtonBox.StandardButton.Close).setIcon(QIcon())
    return buttons


def push(buttons: QDialogButtonBox, words: str, tip: str = "") -> QPushButton:
    """Add a button that acts without closing the dialog."""
    button = buttons.addButton(words, QDialogButtonBox.ButtonRole.ActionRole)
    button.setAccessibleName(words.replace("&", "").rstrip("…"))
    button.setToolTip(tip)
    return button


# --- what a bench has to offer --------------------------------------------------------------


def quantity_names(state: BenchState) -> dict[str, str]:
    """Return keys and names of the quantities that can be drawn: waves want a density."""
    waves = all(state.specimen_of(side).density is not None for side in compared_sides(state))
    return {key: entry.name for key, entry in QUANTITIES.items() if waves or not entry.wave}


def side_names(state: BenchState) -> dict[str, str]:
    """Return the sides worth choosing among: one, unless B differs from A."""
    return dict(SIDES) if compared_sides(state) == "AB" else {"A": "A"}


def shown_names(state: BenchState) -> dict[str, str]:
    """Return what a hemisphere can show."""
    both = compared_sides(state) == "AB"
    return {key: words for key, words in SHOWN.items() if both or key in ("A", "cost")}


# --- what was used last ---------------------------------------------------------------------


def remembered_text(settings: QSettings, key: str, usual: str) -> str:
    """Return a text that was used last."""
    return str(settings.value(key, usual))


def remembered_number(settings: QSettings, key: str, usual: float) -> float:
    """Return a number that was used last; one that cannot be read is the usual one."""
    try:
        return float(str(settings.value(key, usual)))
    except ValueError:
        return usual


def remembered_flag(settings: QSettings, key: str, usual: bool) -> bool:
    """Return a tick that was set last."""
    return str(settings.value(key, usual)).lower() in ("true", "1")


# --- where files go -------------------------------------------------------------------------


def file_stem(*words: str) -> str:
    """Return words as a file name that every file system takes."""
    joined = "_".join(word for word in words if word)
    return re.sub(r"[^\w\-]+", "_", joined).strip("_") or "figure"


def ask_target(
    parent: QWidget, title: str, settings: QSettings, stem: str, suffix: str, words: str
) -> Path | None:
    """Ask where to write a file; the suffix is added where it is missing, the folder kept."""
    folder = Path(remembered_text(settings, "folder", str(Path.home())))
    name, _ = QFileDialog.getSaveFileName(
        parent, title, str(folder / f"{stem}{suffix}"), f"{words} (*{suffix})")
    if not name:
        return None
    target = Path(name)
    if target.suffix.lower() != suffix:
        target = target.with_name(target.name + suffix)
    settings.setValue("folder", str(target.resolve().parent))
    return target
