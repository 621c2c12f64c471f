"""Help: what every quantity means, the conventions, the keys, the cautions, the versions."""

from __future__ import annotations

import platform
from collections.abc import Iterable
from importlib import metadata

import numpy as np
import PySide6
import scipy
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QTabWidget, QTextBrowser, QVBoxLayout

from core.crystal.cell import AXES_CONVENTIONS
from core.crystal.orientation import WAYS
from core.directional.quantities import QUANTITIES
from core.report.cautions import CAUTIONS
from core.report.methods import METHODS
from gui.actions import Menus

_KEYS = (
    ("in the grid", "arrows, Tab and Enter move; typing replaces; F2 edits; Escape takes back"),
    (
        "in a pane",
        "arrows turn; + and − zoom; a click puts the pin; a double click looks along "
        "the nearest part axis",
    ),
    ("in a table", "Ctrl+C copies the selected lines at full precision"),
    ("in a turn field", "drag its letter sideways; Shift drags finely"),
)


_CONVENTIONS = (
    (
        "Matrices",
        "Voigt order 11, 22, 33, 23, 13, 12; engineering shears (γ = 2ε) in the compliance. "
        "Stiffness in GPa, compliance in 1/TPa, density in kg/m³, speeds in km/s, angles in "
        "degrees.",
        (),
    ),
    (
        "Crystal axes",
        "The Cartesian axes x, y, z in which the table is given. Which directions of the cell "
        "they follow belongs to the specimen:",
        tuple(AXES_CONVENTIONS.values()),
    ),
    (
        "Part axes",
        "X, Y, Z of the blank, wafer, casting or model. An orientation is the matrix R with "
        "v_part = R v_crystal; its rows are X, Y, Z in crystal axes. It can be said as:",
        tuple(WAYS.values()),
    ),
    (
        "Directions",
        "[u v w] follows the vectors of the cell, (h k l) is the normal of the plane; four "
        "indices for hexagonal and trigonal crystals, the third minus the sum of the first two."
        " "
        "0.3,0.4,0.87 are components along the crystal axes.",
        (),
    ),
)


class HelpDialog(QDialog):
    """Help in five leaves."""

    def __init__(self, menus: Menus, renderer_words: str) -> None:
        super().__init__()
        self.setWindowTitle("Tricline help")
        self.resize(820, 640)
        self._leaves = QTabWidget()
        for title, html in (
            ("Quantities", quantities_html()),
            ("Conventions", conventions_html()),
            ("Keys", keys_html(menus)),
            ("Cautions", cautions_html()),
            ("About", about_html(renderer_words)),
        ):
            leaf = QTextBrowser()
            leaf.setHtml(html)
            leaf.setOpenLinks(False)
            leaf.setAccessibleName(title)
            self._leaves.addTab(leaf, title)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.addWidget(self._leaves)
        column.addWidget(buttons)

    def open_leaf(self, title: str) -> None:
        """Show one leaf."""
        titles = [self._leaves.tabText(k) for k in range(self._leaves.count())]
        self._leaves.setCurrentIndex(titles.index(title))
        self.show()
        self.raise_()


def quantities_html() -> str:
    """Return definition, unit and source of every quantity, and how everything is computed."""
    quantities = "".join(
        f"<h3>{entry.name} <i>{entry.symbol}</i>{', ' if entry.unit else ''}{entry.unit}</h3>"
        f"<p>{entry.definition}<br><small>{entry.source}</small></p>"
        for entry in QUANTITIES.values()
    )
    methods = "".join(
        f"<h3>{what}</h3><p>{formula}<br><small>{source}</small></p>"
        for of_section in METHODS.values()
        for what, formula, source in of_section
    )
    return f"{quantities}<hr>{methods}"


def conventions_html() -> str:
    """Return the conventions in words."""
    return "".join(
        f"<h3>{title}</h3><p>{text}</p>{_listed(items)}" for title, text, items in _CONVENTIONS
    )


def _listed(items: Iterable[str]) -> str:
    lines = "".join(f"<li>{item}</li>" for item in items)
    return f"<ul>{lines}</ul>" if lines else ""


def keys_html(menus: Menus) -> str:
    """Return the list of keys, read from the menus themselves."""
    rows = [
        (entry.words.replace("&", "").rstrip("…"), entry.keys)
        for _, entries in menus
        for entry in entries
        if entry.keys
    ]
    lines = "".join(
        f"<tr><td>{words}&nbsp;&nbsp;</td><td><b>{keys}</b></td></tr>" for words, keys in rows
    )
    places = "".join(
        f"<tr><td>{where}&nbsp;&nbsp;</td><td>{what}</td></tr>" for where, what in _KEYS
    )
    return f"<table cellpadding='3'>{lines}</table><hr><table cellpadding='3'>{places}</table>"


def cautions_html() -> str:
    """Return the cautions."""
    return "<ul>" + "".join(f"<li><p>{text}</p></li>" for text in CAUTIONS) + "</ul>"


def about_html(renderer_words: str) -> str:
    """Return the versions in use."""
    return (
        f"<h3>Tricline {metadata.version('tricline')}</h3>"
        "<p>A bench for anisotropic crystals. BSD 3-Clause licence.</p>"
        f"<p>Python {platform.python_version()}, numpy {np.__version__}, "
        f"scipy {scipy.__version__}, Qt for Python {PySide6.__version__}</p>"
        f"<p>Drawing: {renderer_words}</p>"
        "<p>The diverging colour map is CET-D1A by Peter Kovesi (CC-BY).</p>"
    )
