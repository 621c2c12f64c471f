"""Starting and closing the program, on machines with and without a screen."""

import gc
import os
import subprocess
import sys
import threading
import weakref
from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, QSettings, Qt
from PySide6.QtTest import QTest

from gui.app import build
from gui.documents import FIRST_DEMO, first_state, open_demo
from gui.window import _LAYOUT_VERSION
from tests.gui.conftest import delete_what_is_due, running_timers

ROOT = Path(__file__).resolve().parents[2]
# Builds the program, lets it come to rest, tells what it shows, and quits by a timer.
OPEN_AND_TELL = """
import sys
from PySide6.QtCore import QTimer
from gui import app

real = app.build

def build(*arguments, **more):
    built = real(*arguments, **more)

    def tell():
        pane = built.window.views.panes["A"]
        image = pane.grab().toImage()
        colours = {image.pixel(x, y) for x in range(0, image.width(), 7)
                   for y in range(0, image.height(), 7)}
        print(type(built.renderer).__name__)
        print(built.window._note.text())
        print(len(colours), built.window.isVisible(), built.window.windowTitle())
        built.window.close()

    QTimer.singleShot(1000, tell)
    return built

app.build = build
sys.exit(app.run(sys.argv[1:]))
"""


def run_without_screen(words, tmp_path, **more):
    hidden = {"TRICLINE_REQUIRE_OPENGL", "DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM"}
    environment = {key: value for key, value in os.environ.items() if key not in hidden}
    environment |= {"HOME": str(tmp_path), "XDG_CONFIG_HOME": str(tmp_path), **more}
    return subprocess.run(
        [sys.executable, *words], capture_output=True, text=True, timeout=60, cwd=ROOT,
        env=environment, check=False,
    )  # fmt: skip


@pytest.mark.skipif(sys.platform != "linux", reason="other systems always have a screen")
def test_without_a_screen_there_is_one_sentence_and_status_2(tmp_path):
    done = run_without_screen(["-m", "gui.launch"], tmp_path)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr.count("\n") == 1
    assert "there is no screen" in done.stderr
    assert "Traceback" not in done.stderr


def test_a_file_that_cannot_be_opened_is_one_sentence_and_status_2(tmp_path):
    path = tmp_path / "bad.json"
    path.write_text("{")
    done = run_without_screen(
        ["-m", "gui.launch", str(path)], tmp_path, QT_QPA_PLATFORM="offscreen"
    )
    assert done.returncode == 2
    assert done.stderr.startswith("tricline: bad.json")
    assert done.stderr.count("\n") == 1


def test_offscreen_the_window_opens_and_draws_without_opengl(tmp_path):
    words = ["-c", OPEN_AND_TELL, "demo_materials/casting_lm40_cubic.json"]
    done = run_without_screen(words, tmp_path, QT_QPA_PLATFORM="offscreen")
    assert done.returncode == 0, done.stderr
    renderer, note, seen = done.stdout.splitlines()
    assert renderer == "FlatRenderer"
    assert note == "drawn without OpenGL"
    colours, visible, title = seen.split(" ", 2)
    assert int(colours) > 150
    assert visible == "True"
    assert title.startswith("Lanternmoor seeded casting LM-40 (casting_lm40_cubic.json)")


# ------------------------------------------------------------------ closing
def use_and_close(qapp, settings):
    """Build the program, do some of everything, close it; return a weak reference to it."""
    built = build(qapp, first_state(open_demo(FIRST_DEMO)), settings)
    built.window.show()
    built.stage.choose_quantity("slowness")
    built.help.open_leaf("Keys")
    handle = built.window.views.orientations["A"]._turns[0].handle
    QTest.mousePress(handle, Qt.MouseButton.LeftButton, pos=QPoint(5, 5))
    QTest.mouseMove(handle, QPoint(15, 5))
    QTest.qWait(120)  # the extremes are being found
    window = weakref.ref(built.window)
    built.close()
    return window


def test_closing_leaves_no_timer_no_thread_and_no_window(qapp, settings):
    dress = qapp.palette()
    threads = set(threading.enumerate())
    window = use_and_close(qapp, settings)
    assert running_timers() == []
    assert set(threading.enumerate()) == threads
    delete_what_is_due()
    gc.collect()
    assert window() is None
    qapp.setStyleSheet("")
    qapp.setPalette(dress)


def test_the_layout_and_the_theme_of_last_time_are_worn(qapp, tmp_path):
    dress = qapp.palette()
    settings = QSettings(str(tmp_path / "s.ini"), QSettings.Format.IniFormat)
    settings.setValue("theme", "night")
    settings.setValue("layout/version", _LAYOUT_VERSION)
    settings.setValue("layout/window", b"nonsense")
    built = build(qapp, first_state(open_demo(FIRST_DEMO)), settings, force_sync=True)
    assert built.dressing.is_chosen("night")
    built.close()
    delete_what_is_due()
    qapp.setStyleSheet("")
    qapp.setPalette(dress)
