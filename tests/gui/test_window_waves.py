"""Waves in the whole window: what is found when, what is shown where, and where links lead."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from core.directional import acoustic_axes as finder
from gui.presenting import waves
from gui.widgets.panel import Section
from tests.gui.driving import (
    changed,
    differs,
    lines,
    load,
    picture,
    pictures,
    settle,
    show,
    type_cell,
)

CUBIC = "casting_lm40_cubic.json"


def unfold(app, *titles):
    """Open some sections of the side panels and close the others."""
    for section in app.window.reading_panel.findChildren(Section):
        if section.is_open() != (section.button.text() in titles):
            section.button.click()
    settle(app)


def axes_marks(app, side="A"):
    view = app.window.views.panes[side]._view
    return [mark.direction for mark in view.marks if mark.kind == "axis"]


@pytest.fixture
def cubic(app):
    load(app, CUBIC)
    unfold(app, "Waves", "Degenerate directions")
    yield app
    unfold(app, "Reading", "Extremes", "Cutting error", "Aggregate")


def test_links_of_degenerate_directions_move_the_pin(cubic):
    table = cubic.window.views.degenerate
    rows = lines(table.table)
    cone = next(k for k, row in enumerate(rows) if row[0] == "cone")
    table.link(cone).click()
    settle(cubic)
    assert np.allclose(np.abs(cubic.bench.state.pin), 1 / np.sqrt(3), atol=1e-8)
    notes = cubic.window.views.waves._notes.text()
    assert "middle and slowest waves meet here" in notes
    assert cubic.bench.history.canUndo()


def test_the_waves_follow_the_pin(cubic):
    before = lines(cubic.window.views.waves.table)
    show(cubic, pin=(0.6, 0.0, 0.8))
    after = lines(cubic.window.views.waves.table)
    assert [row[0] for row in before] == [row[0] for row in after]
    assert before != after


def test_arrivals_are_found_when_they_are_looked_at_and_not_before(cubic, monkeypatch):
    asked = []
    find = waves.find_arrivals
    monkeypatch.setattr(
        waves, "find_arrivals", lambda *request: asked.append(request) or find(*request)
    )
    panel = cubic.window.views.waves
    show(cubic, pin=(0.0, 0.6, 0.8))
    assert asked == []
    panel.expander.button.click()
    settle(cubic)
    assert len(asked) == 1
    rows = lines(panel.arrivals.table)
    assert len(rows) >= 3
    # What does not change the rays asks for nothing.
    show(cubic, pin=(0.0, 0.6, 0.8), quantity="phase", crystal_axes=True)
    assert len(asked) == 1
    show(cubic, pin=(0.0, 0.8, 0.6))
    assert len(asked) == 2
    panel.arrivals.link(len(rows) - 1).click()
    settle(cubic)
    assert len(asked) == 3
    panel.expander.button.click()
    show(cubic, pin=(0.0, 0.0, 1.0))
    assert len(asked) == 3


def test_hidden_waves_are_not_computed(app, monkeypatch):
    load(app, CUBIC)
    unfold(app, "Reading")
    asked = []
    monkeypatch.setattr(waves, "waves_view", lambda state: asked.append(state))
    show(app, pin=(0.6, 0.0, 0.8))
    assert asked == []
    unfold(app, "Reading", "Extremes", "Cutting error", "Aggregate")


def test_marks_come_with_the_axes_and_turn_with_the_part(cubic):
    show(cubic, quantity="slowness", marks=True)
    assert len(axes_marks(cubic)) == 7
    before = pictures(cubic)
    turned = cubic.window.views.orientations["A"].turn_edited
    turned.emit(2, 30.0)
    assert np.allclose(np.sort(np.abs(np.array(axes_marks(cubic))[:, 2])),
                       np.sort([1, 0, 0] + [3**-0.5] * 4), atol=1e-9)  # fmt: skip
    settle(cubic)
    assert {"pane A", "deck"} <= changed(before, pictures(cubic))


def test_an_edit_does_not_wait_for_the_axes(cubic, monkeypatch):
    """While the constants change the axes are not known; once they rest they are found."""
    show(cubic, quantity="slowness", marks=True)
    calls = []
    find = finder.degeneracies
    monkeypatch.setattr(
        finder, "degeneracies", lambda table: calls.append(cubic.pace.is_moving) or find(table)
    )
    cubic.window.views.constants.constant_edited.emit(0, 0, "150")
    assert calls == []
    assert axes_marks(cubic) == []
    settle(cubic)
    assert calls
    assert not any(calls)
    assert len(axes_marks(cubic)) == 7


def test_hiding_a_sheet_removes_it_from_the_pane(app):
    load(app, CUBIC)
    show(app, quantity="wave")
    before = picture(app.window.views.panes["A"])
    app.window.views.toolbar.sheet_toggled.emit(0, False)
    settle(app)
    assert differs(before, picture(app.window.views.panes["A"]), 0.05)


def test_the_time_of_the_source_picture_is_undone_and_saved(app, tmp_path):
    from core.files.bench import read_bench, write_bench

    load(app, CUBIC)
    show(app, deck="source")
    time = app.window.views.deck.source.time
    time.setFocus()
    time.selectAll()
    QTest.keyClicks(time, "2.5")
    QTest.keyClick(time, Qt.Key.Key_Return)
    settle(app)
    assert app.bench.state.display.source_time_us == 2.5
    write_bench(tmp_path / "b.tricline", app.bench.state)
    assert read_bench(tmp_path / "b.tricline").display.source_time_us == 2.5
    app.bench.history.undo()
    settle(app)
    assert time.value() == 1.0


def test_without_a_density_the_stiffness_side_goes_on(app):
    load(app, CUBIC)
    unfold(app, "Reading", "Waves", "Degenerate directions")
    show(app, specimen=replace(app.bench.state.specimen, density=None), quantity="young")
    views = app.window.views
    assert "density" in views.waves._notes.text()
    assert "density" in views.degenerate._notice.text()
    assert lines(views.degenerate.table) == []
    before = picture(views.panes["A"])
    type_cell(app, 0, 0, "140")
    settle(app)
    assert differs(before, picture(views.panes["A"]), 0.01)
    unfold(app, "Reading", "Extremes", "Cutting error", "Aggregate")
