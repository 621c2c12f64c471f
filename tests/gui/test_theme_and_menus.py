"""Themes, menus, keys and accessibility of the whole window."""

import numpy as np
import pytest
from PySide6.QtCore import QSettings, Qt
from PySide6.QtGui import QAction, QColor
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractItemView,
    QAbstractSpinBox,
    QApplication,
    QComboBox,
    QFileDialog,
    QHeaderView,
    QLabel,
    QLineEdit,
    QMessageBox,
    QPlainTextEdit,
    QTextBrowser,
    QWidget,
)

from gui.plots.frame import Canvas
from gui.stage.pane import StagePane
from gui.theme import LIGHT, NIGHT, style_sheet
from gui.widgets.panel import Disclosure
from gui.window import _LAYOUT_VERSION
from tests.gui.driving import (
    changed,
    menu,
    pictures,
    settle,
    show,
    spoken,
    visible_controls,
)

CONTROLS = (
    QAbstractButton, QAbstractItemView, QAbstractSpinBox, QComboBox, QLineEdit, QPlainTextEdit,
    Canvas, StagePane,
)  # fmt: skip


# ------------------------------------------------------------------ themes
@pytest.mark.parametrize("face", ["hemisphere", "sweep", "source"])
def test_a_theme_changes_every_painted_view_and_goes_back(app, face):
    show(app, deck=face, layout="AB")
    app.window.setFocus()
    light = pictures(app)
    menu(app, "Night theme")
    settle(app)
    night = pictures(app)
    assert changed(light, night) == set(light)
    for name, image in night.items():
        # The ground is dark in the night and light by day.
        assert np.median(image) < 80 < 170 < np.median(light[name]), name
    menu(app, "Light theme")
    settle(app)
    assert changed(light, pictures(app)) == set()


def test_the_theme_is_remembered(app):
    menu(app, "Night theme")
    assert app.test_settings.value("theme") == "night"
    assert app.dressing.theme is NIGHT
    assert QApplication.palette().highlight().color().name().upper() == NIGHT.a
    menu(app, "Light theme")
    assert app.dressing.theme is LIGHT


def test_a_layout_is_remembered_and_one_of_another_version_is_not(app, tmp_path):
    settings = QSettings(str(tmp_path / "layout.ini"), QSettings.Format.IniFormat)
    columns = app.window._columns
    columns.setSizes([330, 500, 430])
    settle(app)
    wanted = columns.sizes()
    app.window.save_layout(settings)
    settings.remove("layout/window")  # a test's screen may be smaller than the window
    columns.setSizes([400, 500, 360])
    settle(app)
    other = columns.sizes()
    assert other != wanted
    settings.setValue("layout/version", "from another time")
    app.window.restore_layout(settings)
    assert columns.sizes() == other
    settings.setValue("layout/version", _LAYOUT_VERSION)
    app.window.restore_layout(settings)
    assert columns.sizes() == wanted
    settings.setValue("layout/columns", "scribbled over by hand")
    app.window.restore_layout(settings)
    assert columns.sizes() == wanted


# ------------------------------------------------------------------ menus
def test_every_action_of_the_menus_runs(own_app, monkeypatch):
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: ("", ""))
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: ("", ""))
    monkeypatch.setattr(QMessageBox, "exec", lambda *_: QMessageBox.StandardButton.Cancel)
    monkeypatch.setattr("PySide6.QtWidgets.QDialog.exec", lambda *_: 0)
    QApplication.clipboard().setText("1\t2")
    ran = 0
    for words, action in own_app.menu_bar.actions.items():
        if words == "Quit":
            continue
        if action.isEnabled():
            action.trigger()
            QTest.qWait(0)
            ran += 1
    settle(own_app)
    assert ran >= 25
    own_app.help.close()
    assert own_app.window.isVisible()


def test_every_submenu_opens_filled(app):
    below = [
        action.menu()
        for top in app.window.menuBar().actions()
        for action in top.menu().actions()
        if action.menu() is not None
    ]
    assert len(below) >= 3
    for submenu in below:
        submenu.aboutToShow.emit()
        first = [action.text() for action in submenu.actions()]
        assert first
        submenu.aboutToShow.emit()
        assert [action.text() for action in submenu.actions()] == first


def test_quit_closes_the_window_by_way_of_the_question(app, monkeypatch):
    asked = []
    monkeypatch.setattr(app.window, "closeEvent", lambda event: asked.append(event.ignore()))
    menu(app, "Quit")
    assert len(asked) == 1
    assert app.window.isVisible()


def test_every_shortcut_is_unique(app):
    keys = [
        sequence.toString()
        for action in app.window.findChildren(QAction)
        for sequence in action.shortcuts()
        # A key of one widget alone may also mean something elsewhere.
        if action.shortcutContext() != Qt.ShortcutContext.WidgetShortcut
    ]
    assert len(keys) >= 15
    assert sorted(keys) == sorted(set(keys))


def test_every_menu_has_its_own_letters(app):
    """No two lines of one menu, and no two menus, answer to the same letter."""
    bars = [app.window.menuBar().actions()]
    bars += [action.menu().actions() for action in bars[0]]
    for actions in bars:
        texts = [a.text() for a in actions if not a.isSeparator()]
        letters = [t[t.index("&") + 1].lower() for t in texts if "&" in t]
        assert sorted(letters) == sorted(set(letters)), texts


def test_menu_lines_tell_what_they_do(app):
    for words, action in app.menu_bar.actions.items():
        assert action.toolTip(), words


def test_panels_can_be_put_away_and_the_menu_ticks_them(app):
    window = app.window
    view = next(a.menu() for a in window.menuBar().actions() if a.text() == "&View")
    for words, panel in (("Ledger", window.ledger_panel), ("Reading", window.reading_panel)):
        action = app.menu_bar.actions[words]
        for is_shown in (False, True):
            menu(app, words)
            assert panel.isVisible() == is_shown
            view.aboutToShow.emit()
            assert action.isChecked() == is_shown
    menu(app, "Pane B")
    view.aboutToShow.emit()
    assert app.menu_bar.actions["Pane B"].isChecked()
    assert not app.menu_bar.actions["Pane A"].isChecked()


def test_help_opens_at_the_leaf_that_is_asked_for(app):
    for action, words in (("Quantities and formulas", "Young's modulus"),
                          ("Conventions", "Voigt order"), ("Keys", "Ctrl+Z"),
                          ("Cautions", "linear elasticity"), ("About", "BSD")):  # fmt: skip
        menu(app, action)
        assert app.help.isVisible()
        assert words in app.help._leaves.currentWidget().toPlainText()
    keys = app.help._leaves.widget(2)
    assert isinstance(keys, QTextBrowser)
    for shown in app.menu_bar.actions.values():
        for sequence in shown.shortcuts():
            assert sequence.toString() in keys.toPlainText() or not sequence.toString()
    app.help.close()


def test_what_is_copied_can_be_read_back(app):
    menu(app, "Copy the reading")
    text = QApplication.clipboard().text()
    specimen, *_ = text.splitlines()
    assert specimen.startswith(f"A: {app.bench.state.specimen.name}, orientation identity; ")
    assert "\nE\t" in text
    assert "−" not in text
    numbers = text.split("\n")[3].split("\t")[1:4]
    a, b, difference = map(float, numbers)
    assert b - a == pytest.approx(difference)


# ------------------------------------------------------------------ accessibility
def described(widget):
    """Return the tooltip of a control, of the control it is part of, or of its buddy."""
    while widget is not None and not isinstance(widget, QWidget):
        widget = widget.parent()
    buddies = [label for label in widget.window().findChildren(QLabel)
               if label.buddy() is widget]  # fmt: skip
    parent = widget.parentWidget()
    return (
        widget.toolTip()
        or widget.accessibleDescription()
        or buddies
        or (parent.toolTip() if parent is not None else "")
    )


@pytest.mark.parametrize("face", ["hemisphere", "sweep", "source"])
def test_every_control_has_a_name_and_an_explanation(app, face):
    show(app, deck=face, quantity="slowness")
    open_all_sections(app)
    controls = [w for w in visible_controls(app.window, CONTROLS)
                if not isinstance(w, QHeaderView)]  # fmt: skip
    assert len(controls) > 60
    nameless = [w for w in controls if not (w.accessibleName() or spoken(w))]
    assert [(type(w).__name__, w.parent()) for w in nameless] == []
    unexplained = [
        (type(w).__name__, w.accessibleName() or spoken(w))
        for w in controls
        if not described(w) and not isinstance(w, QAbstractItemView)
    ]
    assert unexplained == []


def open_all_sections(app):
    for button in app.window.findChildren(Disclosure):
        if not button.isChecked():
            button.click()
    settle(app)


def test_tab_reaches_the_grid_the_panes_the_plots_and_the_tables(app):
    views = app.window.views
    wanted = {
        views.constants.table, *views.panes.values(), views.section.canvas,
        views.deck.hemisphere.canvas, views.pin.direction, views.pin.table,
        views.extremes.table, views.cutting_error.field, views.aggregate.table,
    }  # fmt: skip
    app.window.setFocus()
    reached, order = set(), []
    for _ in range(260):
        QTest.keyClick(QApplication.focusWidget() or app.window, Qt.Key.Key_Tab)
        widget = QApplication.focusWidget()
        order.append(widget)
        reached.add(widget)
        if wanted <= reached:
            break
    assert wanted <= reached, [w.accessibleName() for w in wanted - reached]
    # Ledger, then stage, then reading: as one reads.
    as_read = (views.constants.table, views.panes["A"], views.section.canvas, views.pin.table)
    places = [order.index(widget) for widget in as_read]
    assert places == sorted(places)


def test_the_focus_is_seen_on_panes_and_plots(app):
    for widget in (app.window.views.panes["A"], app.window.views.section.canvas):
        app.window.setFocus()
        settle(app)
        before = pictures(app)
        widget.setFocus()
        settle(app)
        assert changed(before, pictures(app)) == {
            "pane A" if isinstance(widget, StagePane) else "section"
        }


@pytest.mark.parametrize("size", [(1180, 720), (1900, 1100)])
def test_the_window_can_be_small_and_large(app, size):
    app.window.resize(*size)
    settle(app)
    assert (app.window.width(), app.window.height()) == size
    for name, image in pictures(app).items():
        assert image.shape[0] >= 30, name
        assert image.shape[1] >= 120, name
    deck, section = app.window.views.deck, app.window.views.section
    assert abs(deck.width() - section.width()) <= 2  # equal halves
    for panel in (app.window.ledger_panel, app.window.reading_panel):
        right = panel.mapTo(app.window, panel.rect().bottomRight())
        assert right.x() <= size[0]
        assert right.y() <= size[1]


@pytest.mark.parametrize("theme", [LIGHT, NIGHT])
def test_the_words_on_the_progress_bar_are_legible(theme):
    # WCAG 2.2, success criterion 1.4.3: text has a contrast of 4.5 to 1 with its ground.
    chunk = style_sheet(theme, ".").split("QProgressBar::chunk {")[1].split("}")[0]
    ground = QColor(chunk.split(":")[1].strip(" ;"))
    assert contrast(QColor(theme.ink), ground) >= 4.5
    assert contrast(ground, QColor(theme.field)) >= 1.3  # and the bar is seen


def contrast(one, other):
    """Return the contrast ratio of two colours, WCAG 2.2, from their relative luminance."""
    lighter, darker = sorted((luminance(one), luminance(other)), reverse=True)
    return (lighter + 0.05) / (darker + 0.05)


def luminance(colour):
    parts = np.array([colour.redF(), colour.greenF(), colour.blueF()])
    linear = np.where(parts <= 0.04045, parts / 12.92, ((parts + 0.055) / 1.055) ** 2.4)
    return float(linear @ (0.2126, 0.7152, 0.0722))


def test_a_message_keeps_off_the_edge_of_the_window(app):
    app.window.show_message("A sentence.")
    settle(app)
    said = app.window._message
    assert said.mapTo(app.window, said.rect().topLeft()).x() >= 10
