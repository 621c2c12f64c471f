"""The whole program for tests: built on a demo, driven by hand, and gone without a trace."""

import gc
import threading
from contextlib import contextmanager
from functools import lru_cache

import pytest
import shiboken6
from PySide6.QtCore import QCoreApplication, QEvent, QSettings, QThreadPool, QTimer
from PySide6.QtWidgets import QApplication

from gui.app import build
from gui.documents import FIRST_DEMO, first_state, open_demo
from gui.widgets.panel import Disclosure
from tests.gui import driving

SIZE = (1280, 800)
SPREADS = {"trust", "draws", "spread at pin", "spread of tables"}
SPLIT = {"columns": [360, 560, 338], "centre": [390, 310], "stage": [280, 280],
         "plots": [280, 280]}  # fmt: skip


@contextmanager
def running(qapp, folder):
    """Build the program as `tricline` does, and see that it goes without a trace.

    Long work is done at once, and the pauses after which the fine picture is drawn are short.
    """
    settings = QSettings(str(folder / "tricline.ini"), QSettings.Format.IniFormat)
    dress, style = qapp.palette(), qapp.style().objectName()
    threads = set(threading.enumerate())
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("gui.pace.REST_MS", 1)
        patch.setattr("gui.stage.pane.REST_AFTER_MS", 1)
        qapp.setStyle("Fusion")
        built = build(qapp, first_state(open_demo(FIRST_DEMO)), settings, force_sync=True)
        built.test_settings = settings
        built.test_sections = {
            heading: heading.isChecked() for heading in built.window.findChildren(Disclosure)
        }
        built.window.show()
        yield built
        built.close()
    assert running_timers() == []
    assert set(threading.enumerate()) == threads
    assert QThreadPool.globalInstance().activeThreadCount() == 0
    delete_what_is_due()
    qapp.setStyleSheet("")
    qapp.setPalette(dress)
    qapp.setStyle(style)


@pytest.fixture(scope="module")
def program(qapp, tmp_path_factory):
    """One program for all tests of a module, which saves a second each."""
    with running(qapp, tmp_path_factory.mktemp("settings")) as built:
        yield built


@pytest.fixture
def without_spreads(program, monkeypatch):
    """Leave out what takes most of the time of an edit and has tests of its own.

    The search for symmetry and the uncertainties of everything that is read.
    """
    submit = program.scheduler.submit

    def choose(job):
        if job.kind not in SPREADS:
            submit(job)

    monkeypatch.setattr(program.scheduler, "submit", choose)


@pytest.fixture
def own_app(qapp, qtbot, tmp_path):
    """A program of the test's own, to do with as it likes."""
    with running(qapp, tmp_path) as built:
        built.window.activateWindow()
        qtbot.waitUntil(built.window.isActiveWindow)
        driving.settle(built)
        yield built
        built.bench.history.clear()


@pytest.fixture
def app(program, qtbot):
    """The program on the first demo, as if it had just been opened."""
    begin_anew(program)
    program.window.activateWindow()
    qtbot.waitUntil(program.window.isActiveWindow)
    yield program
    program.bench.history.clear()


@lru_cache(maxsize=1)
def start():
    """Return the bench that the program opens on."""
    return first_state(open_demo(FIRST_DEMO))


def begin_anew(app):
    """Take back everything that an earlier test may have left."""
    for other in QApplication.topLevelWidgets():
        if other is not app.window and other.isVisible():
            other.close()
    app.test_settings.clear()
    app.documents.path = None
    if driving.sentences(app.window):
        app.bench.load(driving.BLANK)
    app.bench.load(start())
    app.window.resize(*SIZE)
    for heading, is_open in app.test_sections.items():
        if heading.isChecked() != is_open:
            heading.click()
    for name, splitter in app.window._splitters():
        if name in SPLIT:
            splitter.setSizes(SPLIT[name])
    app.window.ledger_panel.show()
    app.window.reading_panel.show()
    for dialog in (app.intake.dialog, app.intake.cell_dialog):
        dialog.reject()
    app.window.show_sheet(False)
    app.window.show_message("")
    app.cameras.set_linked(True)
    app.presenter.set_linked(True)
    app.cameras.look_from("home")
    if not app.dressing.is_chosen("light"):
        app.dressing.choose("light")
    QApplication.clipboard().clear()


def running_timers():
    """Return the timers of Python's making that still run."""
    return [
        timer
        for timer in gc.get_objects()
        if isinstance(timer, QTimer) and shiboken6.isValid(timer) and timer.isActive()
    ]


def delete_what_is_due():
    """Let Qt delete what was asked to be deleted later."""
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete.value)
    gc.collect()
