"""The user's hands and eyes: what tests do to the whole window, and what they see of it."""

import time
from dataclasses import replace

import numpy as np
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QAccessible, QColor, QImage
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QComboBox, QLabel, QLineEdit, QWidget

from core.crystal.cell import UnitCell
from core.state import BenchState, Display, OrientationChoice, Specimen
from gui.documents import first_state, open_demo
from tests.materials import isotropic

KEYS = Qt.Key
PATIENCE = 20.0  # seconds
# Differs from every demo in all that the forms show, so that nothing of an old test stays.
BLANK = BenchState(
    Specimen(
        "blank page",
        tuple(tuple(row) for row in isotropic(3.0, 2.0).tolist()),
        density=1.5,
        crystal_class="isotropic",
        unique_axis="x",
        cell=UnitCell(2.5, 2.5, 2.5, 90.0, 90.0, 90.0),
        crystal_axes="y||b, x||a*",
        temperature_c=-1.0,
        source="nowhere",
        notes="nothing",
    ),
    orientation_a=OrientationChoice("bunge 1 2 3", (1.5, 2.5, 3.5)),
    orientation_b=OrientationChoice("bunge 4 5 6", (4.5, 5.5, 6.5)),
    pin=(0.6, 0.0, 0.8),
    section=(0.8, 0.0, 0.6),
    quantity="phase",
    cutting_error_deg=17.0,
    display=Display(layout="AB", face="uncertainty"),
)


def load(app, name):
    """Put a demo material on the bench, as if the window had opened on it."""
    app.bench.load(BLANK)
    app.bench.load(first_state(open_demo(name)))
    settle(app)


def show(app, **choices):
    """Look at the bench otherwise, without a step to undo."""
    state = app.bench.state
    known = {name: choices.pop(name) for name in list(choices) if hasattr(state, name)}
    app.bench.load(replace(state, display=replace(state.display, **choices), **known))
    settle(app)


def settle(app):
    """Wait until everything is shown finely and no picture is to be redrawn."""
    panes = app.window.views.panes.values()
    until = time.monotonic() + PATIENCE
    QTest.qWait(0)
    while app.pace.is_moving or any(p.isVisible() and not p.is_at_rest for p in panes):
        assert time.monotonic() < until, "the window does not come to rest"
        QTest.qWait(1)
    QTest.qWait(0)


# ------------------------------------------------------------------ seeing
def picture(widget):
    """Return what a widget shows, (height, width, 3) of 0–255."""
    image = QImage(widget.size(), QImage.Format.Format_RGB32)
    image.fill(QColor("magenta"))
    widget.render(image)
    return pixels_of(image)


def pixels_of(image):
    """Return the colours of an image, (height, width, 3) of 0–255."""
    image = image.convertToFormat(QImage.Format.Format_RGB32)
    flat = np.frombuffer(image.constBits(), np.uint8)
    rows = flat.reshape(image.height(), image.bytesPerLine() // 4, 4)
    return rows[:, : image.width(), 2::-1].copy()


def pictures(app):
    """Return what every view that paints itself shows, by name."""
    settle(app)
    views = app.window.views
    seen = {
        "verdict": views.verdict,
        "spectrum": views.spectrum,
        "section": views.section.canvas,
        "deck": getattr(views.deck, views.deck.face).canvas,
    } | {f"pane {side}": pane for side, pane in views.panes.items() if pane.isVisible()}
    return {name: picture(widget) for name, widget in seen.items()}


def differs(before, after, share=0.0):
    """Tell whether more than a share of the pixels of two pictures differ."""
    return before.shape != after.shape or (before != after).any(axis=2).mean() > share


def changed(before, after):
    """Return the names of the pictures that differ."""
    return {name for name in before if differs(before[name], after[name])}


def control(app, kind, name):
    """Return the one control of a kind with an accessible name, of all that are shown."""
    named = [
        w
        for w in app.window.findChildren(kind)
        if (w.accessibleName() or spoken(w)) == name
    ]
    found = [w for w in named if w.isVisibleTo(app.window)] if len(named) > 1 else named
    assert len(found) == 1, f"{len(found)} controls are called {name!r}"
    return found[0]


def spoken(widget):
    """Return the name that a screen reader reads out."""
    face = QAccessible.queryAccessibleInterface(widget)
    return face.text(QAccessible.Text.Name) if face is not None else ""


def sentences(widget):
    """Return the error sentences that stand somewhere in a widget."""
    return [
        label.text()
        for label in widget.findChildren(QLabel)
        if label.property("role") == "error" and not label.isHidden() and label.text()
    ]


def lines(table):
    """Return the lines of a table of texts, each as a tuple of cells."""
    model = table.lines
    return [tuple(model.text(row, k) for k in range(len(model.columns)))
            for row in range(len(model.lines))]  # fmt: skip


def full(table, label, column=1, heading=""):
    """Return the number at full precision in the line of a label, below a heading."""
    model, under = table.lines, ""
    for row, line in enumerate(model.lines):
        if line.is_heading:
            under = line.cells[0]
        elif line.cells[0] == label and heading in ("", under):
            text = model.copied(row, column)
            return float(text) if text else float("nan")
    raise AssertionError(f"no line is called {label!r}")


# ------------------------------------------------------------------ doing
def enter(field, text, key=KEYS.Key_Return):
    """Type over the text of a field and press a key."""
    field.setFocus()
    field.selectAll()
    if text:
        QTest.keyClicks(field, text)
    else:
        QTest.keyClick(field, KEYS.Key_Delete)
    QTest.keyClick(field, key)


def fill_in(app, name, text):
    """Type into the field of a name, then Enter."""
    enter(control(app, QLineEdit, name), text)


def choose(combo, key):
    """Choose from a list by its key or its words, as a click on the list does."""
    index = combo.findData(key)
    index = combo.findText(key) if index < 0 else index
    assert index >= 0, f"no choice {key!r}"
    combo.setFocus()
    combo.setCurrentIndex(index)
    combo.activated.emit(index)


def pick(app, name, key):
    """Choose from the list of a name."""
    choose(control(app, QComboBox, name), key)


def menu(app, words):
    """Run an action of the menus."""
    action = app.menu_bar.actions[words]
    assert action.isEnabled(), f"{words} is off"
    action.trigger()


def type_cell(app, row, column, text, key=KEYS.Key_Return):
    """Type into a cell of the grid of constants."""
    table = app.window.views.constants.table
    table.setFocus()
    table.setCurrentIndex(table.cells.index(row, column))
    for letter in text or "x":
        QTest.keyClicks(_editor(table) or table, letter)
    editor = _editor(table)
    assert editor is not None, f"cell {row + 1}, {column + 1} cannot be typed in"
    if not text:
        editor.clear()
    QTest.keyClick(editor, key)


def _editor(table):
    found = table.viewport().findChildren(QLineEdit)
    return next((editor for editor in found if editor.isVisible()), None)


def shown_cell(app, row, column):
    """Return what a cell of the grid shows."""
    return app.window.views.constants.cells.index(row, column).data()


def click(widget, x, y):
    """Click a place of a widget, in its pixels."""
    QTest.mouseClick(widget, Qt.MouseButton.LeftButton, pos=QPoint(round(x), round(y)))


def drag(widget, start, end, steps=4):
    """Drag with the left button from one place of a widget to another, in its pixels."""
    (x0, y0), (x1, y1) = start, end
    QTest.mousePress(widget, Qt.MouseButton.LeftButton, pos=QPoint(x0, y0))
    for k in range(1, steps + 1):
        at = QPoint(x0 + (x1 - x0) * k // steps, y0 + (y1 - y0) * k // steps)
        QTest.mouseMove(widget, at)
    QTest.mouseRelease(widget, Qt.MouseButton.LeftButton, pos=QPoint(x1, y1))


def visible_controls(parent: QWidget, kinds):
    """Return the controls of some kinds that a user sees, parts of other controls left out."""
    return [
        widget
        for widget in parent.findChildren(QWidget)
        if isinstance(widget, kinds)
        and widget.isVisible()
        and not isinstance(widget.parentWidget(), QComboBox)
        and not widget.objectName().startswith("qt_")
    ]
