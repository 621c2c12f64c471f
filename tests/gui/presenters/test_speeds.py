"""Fits come from the worker: the latest readings win, the old result is dimmed meanwhile."""

import threading
from dataclasses import replace
from types import SimpleNamespace

import pytest
from PySide6.QtCore import QObject

from core.editing.readings import set_cell
from core.state import SPEED_COLUMNS, BenchState, Display, MeasuredSpeeds, Specimen, as_matrix
from gui.bench import Bench
from gui.presenters import speeds as speeds_presenter
from gui.presenters.speeds import STOPPED, SpeedsPresenter
from gui.scheduler import Scheduler
from gui.speeds.page import SpeedsPage
from tests.materials import isotropic

DENSITY = 2500.0


def row(direction, speed):
    cells = {"direction": direction, "speed_m_s": str(speed)}
    return tuple(cells.get(name, "") for name in SPEED_COLUMNS)


STATE = BenchState(
    Specimen("glass", as_matrix(isotropic(60.0, 30.0)), DENSITY),
    readings=MeasuredSpeeds((row("1 0 0", 6000), row("0 0 1", 3000)), "2500", "isotropic"),
    display=Display(page="speeds"),
)


class Window(QObject):
    """What the presenter asks of the window."""

    def __init__(self, page):
        super().__init__()
        self.views, self.shown = SimpleNamespace(speeds=page), []

    def show_page(self, key):
        self.shown.append(key)

    def show_progress(self, words, fraction):
        """Take no notice."""

    def hide_progress(self):
        """Take no notice."""


@pytest.fixture
def desk(qtbot):
    """A presenter with a real worker, a page and a bench."""
    page = SpeedsPage()
    qtbot.addWidget(page)
    window, bench = Window(page), Bench(STATE)
    presenter = SpeedsPresenter(bench, Scheduler(window), window, window)
    yield SimpleNamespace(bench=bench, page=page, window=window, presenter=presenter)
    presenter.close()


def is_ready(desk):
    return desk.presenter.fit is not None and not desk.presenter._found("").ranking_pending


def speed(desk, text):
    readings = set_cell(desk.bench.state.readings, 0, "speed_m_s", text)
    desk.bench.edit("Change the speed", replace(desk.bench.state, readings=readings))


def stiffness(desk):
    return desk.presenter.fit.stiffness[0, 0]


def test_the_fit_comes_from_the_worker_and_then_the_next_blank(desk, qtbot, monkeypatch):
    threads = []
    fit = speeds_presenter.recover
    monkeypatch.setattr(speeds_presenter, "recover", lambda *words: (
        threads.append(threading.current_thread()), fit(*words))[1])  # fmt: skip
    desk.presenter.show_page()
    assert desk.window.shown == ["speeds"]
    assert desk.presenter.fit is None
    qtbot.waitUntil(lambda: is_ready(desk), timeout=20_000)
    # ρv² of the fastest wave of an isotropic body is C11.
    assert stiffness(desk) == pytest.approx(DENSITY * 36e6 / 1e9, rel=1e-4)
    assert threads
    assert threading.main_thread() not in threads


def test_of_many_edits_the_last_is_fitted_and_the_old_result_is_dimmed(
    desk, qtbot, monkeypatch
):
    fitted = []
    fit = speeds_presenter.recover
    monkeypatch.setattr(speeds_presenter, "recover", lambda readings, *words: (
        fitted.append(readings[0].speed), fit(readings, *words))[1])  # fmt: skip
    desk.presenter.show_page()
    qtbot.waitUntil(lambda: is_ready(desk), timeout=20_000)
    for k in range(20):
        speed(desk, f"{6100 + k}")
    assert desk.page.readings.readings.view.pending
    assert not desk.page.result.use.isEnabled()
    qtbot.waitUntil(lambda: is_ready(desk), timeout=20_000)
    assert fitted == [6000.0, 6119.0]
    assert stiffness(desk) == pytest.approx(DENSITY * 6119**2 / 1e9, rel=1e-4)
    assert desk.page.result.use.isEnabled()


def test_undo_needs_no_new_fit(desk, qtbot, monkeypatch):
    desk.presenter.show_page()
    qtbot.waitUntil(lambda: is_ready(desk), timeout=20_000)
    first = desk.presenter.fit
    speed(desk, "6500")
    qtbot.waitUntil(lambda: is_ready(desk), timeout=20_000)
    monkeypatch.setattr(speeds_presenter, "recover", None)
    desk.bench.history.undo()
    assert desk.presenter.fit is first


def test_nothing_is_fitted_while_the_bench_is_seen(desk, qtbot, monkeypatch):
    asked = []
    monkeypatch.setattr(desk.presenter._scheduler, "submit", asked.append)
    away = replace(STATE, display=Display(page="bench"))
    desk.bench.load(away)
    speed(desk, "7000")
    assert asked == []
    desk.bench.edit("Go", replace(desk.bench.state, display=Display(page="speeds")))
    assert [job.kind for job in asked] == ["measured speeds"]


def test_a_fit_that_was_stopped_says_so_and_the_next_edit_starts_again(
    desk, qtbot, monkeypatch
):
    fit, begun = speeds_presenter.recover, threading.Event()

    def endless(*words):
        begun.set()
        while True:
            words[-1].tick(0.1)

    monkeypatch.setattr(speeds_presenter, "recover", endless)
    desk.presenter.show_page()
    qtbot.waitUntil(begun.is_set, timeout=20_000)
    desk.presenter.stop()
    assert desk.presenter._found(STOPPED).notice == STOPPED
    assert desk.page.result._notice.text() == STOPPED
    monkeypatch.setattr(speeds_presenter, "recover", fit)
    speed(desk, "6500")
    qtbot.waitUntil(lambda: is_ready(desk), timeout=20_000)
    assert desk.page.result._notice.text() == ""
