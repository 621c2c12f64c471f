"""The whole program for tests: built on a demo, driven by hand, and gone without a trace."""

import gc
import threading

import pytest
import shiboken6
from PySide6.QtCore import QCoreApplication, QEvent, QSettings, QThreadPool, QTimer
from PySide6.QtWidgets import QApplication

from gui.app import build
from gui.documents import FIRST_DEMO, first_state, open_demo
from tests.gui import driving

SIZE = (1280, 800)
SPLIT = ([360, 560, 338], [390, 310], [280, 280], [280, 280])  # columns, centre, stage, plots


@pytest.fixture(scope="module")
def program(qapp, tmp_path_factory):
    """The program as `tricline` builds it, with long work done at once and short pauses."""
    settings = QSettings(
        str(tmp_path_factory.mktemp("settings") / "tricline.ini"), QSettings.Format.IniFormat
    )
    dress, style = qapp.palette(), qapp.style().objectName()
    threads = set(threading.enumerate())
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("gui.pace.REST_MS", 1)
        patch.setattr("gui.stage.pane.REST_AFTER_MS", 1)
        qapp.setStyle("Fusion")
        built = build(qapp, first_state(open_demo(FIRST_DEMO)), settings, force_sync=True)
        built.test_settings = settings
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


@pytest.fixture
def app(program, qtbot):
    """The program on the first demo, as if it had just been opened."""
    begin_anew(program)
    program.window.activateWindow()
    qtbot.waitUntil(program.window.isActiveWindow)
    driving.settle(program)
    yield program
    program.bench.history.clear()


def begin_anew(app):
    """Take back everything that an earlier test may have left."""
    app.test_settings.clear()
    app.documents.path = None
    app.bench.load(driving.BLANK)
    app.bench.load(first_state(open_demo(FIRST_DEMO)))
    app.window.resize(*SIZE)
    for (_, splitter), sizes in zip(app.window._splitters(), SPLIT, strict=True):
        splitter.setSizes(sizes)
    app.window.ledger_panel.show()
    app.window.reading_panel.show()
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
