"""The probe, and which renderer follows from it."""

import gc
import sys

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtGui import QColor, QImage, QPainter
from PySide6.QtWidgets import QLabel, QWidget

from gui.stage.flat_scene import FlatRenderer
from gui.stage.gl_probe import GlReport, probe
from gui.stage.renderer import REQUIRE_VARIABLE, make_renderer

BROKEN = GlReport(False, "no OpenGL context can be created")


def test_without_opengl_numpy_draws(qapp, monkeypatch):
    monkeypatch.delenv(REQUIRE_VARIABLE, raising=False)
    assert isinstance(make_renderer(BROKEN), FlatRenderer)


def test_where_opengl_is_required_its_absence_is_an_error(qapp, monkeypatch):
    monkeypatch.setenv(REQUIRE_VARIABLE, "1")
    with pytest.raises(RuntimeError, match="no OpenGL context can be created"):
        make_renderer(BROKEN)


@pytest.mark.gl
def test_a_working_opengl_is_used(qapp):
    from gui.stage.scene import SceneRenderer

    report = probe()
    assert report.reason == ""
    assert report.version[0] in "34"
    renderer = make_renderer(report)
    assert isinstance(renderer, SceneRenderer)
    renderer.close()


def test_void_calls_of_qt_lose_no_reference_to_none(qapp):
    """PySide6 6.12.0 on Python 3.10 and 3.11 loses one per call, until Python aborts."""
    timer, widget, label = QTimer(), QWidget(), QLabel()
    image = QImage(8, 8, QImage.Format.Format_RGB32)
    painter = QPainter(image)
    colour = QColor("red")
    calls = (
        timer.stop,
        lambda: timer.setInterval(5),
        widget.update,
        lambda: label.setText("a"),
        lambda: image.fill(0),
        lambda: painter.setPen(colour),
        lambda: painter.drawLine(0, 0, 5, 5),
    )
    gc.collect()
    before = sys.getrefcount(None)
    for _ in range(300):
        for call in calls:
            call()
    lost = before - sys.getrefcount(None)
    painter.end()
    assert abs(lost) < 100  # 2,100 calls
