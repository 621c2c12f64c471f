"""The pane: mouse and keys act, views are shown, and nothing is left running."""

import gc
import weakref
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QCoreApplication, QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QGuiApplication, QImage, QKeySequence, QWheelEvent
from PySide6.QtWidgets import QApplication

from gui.stage import picking
from gui.stage.camera import Camera
from gui.stage.labels import scene_rect
from gui.stage.pane import StagePane
from gui.theme import LIGHT, NIGHT
from gui.viewdata import DirectionMark
from tests.gui.stage.images import rgba
from tests.gui.stage.shapes import cubic_young, ellipsoid, example_marks, pane_view, sheet

LEFT = Qt.MouseButton.LeftButton


class CountingRenderer:
    """Draws a grey picture and remembers what it was asked for."""

    def __init__(self):
        self.asked = []

    def render(self, view, camera, size, theme, ground="theme", samples=0, finish=None):
        self.asked.append((view, camera, size, samples, finish))
        image = QImage(*size, QImage.Format.Format_RGB32)
        image.fill(Qt.GlobalColor.gray)
        return image

    def close(self):
        pass


@pytest.fixture
def renderer():
    return CountingRenderer()


@pytest.fixture
def pane(qtbot, renderer):
    made = StagePane("A", renderer)
    made.resize(420, 440)
    qtbot.addWidget(made)
    made.show_view(pane_view(sheet(ellipsoid(1, 0.9, 1.1))))
    with qtbot.waitExposed(made):
        made.show()
    return made


def scene_pixel(pane, direction):
    """Where in the pane a direction of the ellipsoid of the fixture is seen."""
    scene = scene_rect(pane.rect().toRectF(), LIGHT)
    point = picking.surface_point(pane._view, direction)
    pixels, _ = pane.camera.project(point[:, None], (int(scene.width()), int(scene.height())))
    return QPoint(round(pixels[0, 0] + scene.left()), round(pixels[1, 0] + scene.top()))


def test_a_click_asks_for_the_pin_where_it_is(qtbot, pane):
    wanted = Camera(-45.0, 30.0).basis()[2]
    with qtbot.waitSignal(pane.pin_requested) as caught, qtbot.assertNotEmitted(
        pane.camera_changed
    ):
        qtbot.mouseClick(pane, LEFT, pos=scene_pixel(pane, tuple(wanted)))
    (direction,) = caught.args
    assert isinstance(direction, tuple)
    assert np.degrees(np.arccos(np.dot(direction, wanted))) < 0.6  # a pixel is 0.4°


def test_a_click_beside_the_surface_asks_for_nothing(qtbot, pane):
    with qtbot.assertNotEmitted(pane.pin_requested):
        qtbot.mouseClick(pane, LEFT, pos=QPoint(5, 60))


def test_a_drag_turns_and_asks_for_no_pin(qtbot, pane):
    before = pane.camera
    with qtbot.waitSignal(pane.camera_changed) as caught, qtbot.assertNotEmitted(
        pane.pin_requested
    ):
        qtbot.mousePress(pane, LEFT, pos=QPoint(200, 200))
        qtbot.mouseMove(pane, QPoint(230, 205))
        qtbot.mouseRelease(pane, LEFT, pos=QPoint(230, 205))
    assert caught.args[0] == pane.camera == before.turned(30, 5)


def test_a_trembling_click_is_a_click(qtbot, pane):
    with qtbot.waitSignal(pane.pin_requested), qtbot.assertNotEmitted(pane.camera_changed):
        qtbot.mousePress(pane, LEFT, pos=QPoint(200, 200))
        qtbot.mouseMove(pane, QPoint(202, 201))
        qtbot.mouseRelease(pane, LEFT, pos=QPoint(202, 201))


def test_the_wheel_zooms(qtbot, pane):
    place = QPointF(200, 200)
    event = QWheelEvent(
        place, pane.mapToGlobal(place), QPoint(), QPoint(0, 120), Qt.MouseButton.NoButton,
        Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
    )
    with qtbot.waitSignal(pane.camera_changed):
        QApplication.sendEvent(pane, event)
    assert pane.camera.zoom > 1.0


def test_a_double_click_looks_along_the_nearest_axis_and_leaves_the_pin(qtbot, pane):
    pin = DirectionMark((0.0, 0.0, 1.0), "", "pin")
    pane.show_view(replace(pane._view, marks=(pin,)))
    asked = []

    def put(direction):
        asked.append(direction)
        pane.show_view(
            replace(pane._view, marks=(DirectionMark(direction, "", "pin"),))
        )

    pane.pin_requested.connect(put)
    qtbot.mouseClick(pane, LEFT, pos=QPoint(200, 200))
    qtbot.mouseDClick(pane, LEFT, pos=QPoint(200, 200))
    assert asked[-1] == (0.0, 0.0, 1.0)
    assert pane.camera == Camera().looking_along((0.0, -1.0, 0.0))


@pytest.mark.parametrize(
    ("key", "changed"),
    [
        (Qt.Key.Key_Left, lambda before, now: now.azimuth > before.azimuth),
        (Qt.Key.Key_Right, lambda before, now: now.azimuth < before.azimuth),
        (Qt.Key.Key_Up, lambda before, now: now.elevation < before.elevation),
        (Qt.Key.Key_Down, lambda before, now: now.elevation > before.elevation),
        (Qt.Key.Key_Plus, lambda before, now: now.zoom > before.zoom),
        (Qt.Key.Key_Minus, lambda before, now: now.zoom < before.zoom),
    ],
)
def test_keys_turn_and_zoom(qtbot, pane, key, changed):
    before = pane.camera
    with qtbot.waitSignal(pane.camera_changed):
        qtbot.keyClick(pane, key)
    assert changed(before, pane.camera)
    qtbot.keyClick(pane, Qt.Key.Key_Home)
    assert pane.camera == Camera()


def test_set_camera_is_silent(qtbot, pane):
    with qtbot.assertNotEmitted(pane.camera_changed), qtbot.waitSignal(pane.frame_painted):
        pane.set_camera(Camera(10.0, 10.0))
    assert pane.camera == Camera(10.0, 10.0)


def test_show_view_is_silent(qtbot, pane):
    turned, pinned = pane.camera_changed, pane.pin_requested
    with qtbot.assertNotEmitted(turned), qtbot.assertNotEmitted(pinned):
        pane.show_view(pane_view(sheet(cubic_young(60, 190))))


def test_moving_is_drawn_plainly_and_rest_at_its_best(qtbot, pane, renderer):
    qtbot.waitUntil(lambda: pane.is_at_rest and renderer.asked[-1][3] == 4)
    qtbot.keyClick(pane, Qt.Key.Key_Left)
    pane.repaint()
    assert renderer.asked[-1][3] == 0
    qtbot.waitUntil(lambda: renderer.asked[-1][3] == 4)


def test_other_marks_and_words_draw_no_new_scene(qtbot, pane, renderer):
    qtbot.waitUntil(lambda: pane.is_at_rest and renderer.asked[-1][3] == 4)
    count = len(renderer.asked)
    before = rgba(pane.grab().toImage())
    pane.show_view(replace(pane._view, marks=example_marks(), notice="partly undefined"))
    after = rgba(pane.grab().toImage())
    assert len(renderer.asked) == count
    assert (before != after).any()
    pane.show_view(replace(pane._view, cut_away=True, section=(0.0, 1.0, 0.0)))
    pane.grab()
    assert len(renderer.asked) > count


def test_the_scene_is_drawn_in_the_pixels_of_the_screen(pane, renderer):
    pane.repaint()
    _, _, size, _, finish = renderer.asked[-1]
    ratio = pane.devicePixelRatioF()
    scene = scene_rect(pane.rect().toRectF(), LIGHT)
    assert size == (round(int(scene.width()) * ratio), round(int(scene.height()) * ratio))
    assert finish.scale == ratio


def test_the_theme_colours_the_pane(pane):
    pane.set_theme(NIGHT)
    pixels = rgba(pane.grab().toImage())
    stage = NIGHT.colour("stage")
    assert np.abs(pixels[20, 300, :3] - [stage.red(), stage.green(), stage.blue()]).max() < 4


def test_without_a_view_the_pane_is_empty(qtbot, renderer):
    pane = StagePane("B", renderer)
    qtbot.addWidget(pane)
    pane.grab()
    assert renderer.asked == []
    assert pane.picture(50, 50).isNull()


def test_a_notice_stands_in_the_middle_when_there_is_nothing_else(pane):
    empty = replace(pane._view, sheets=(), notice="Waves need a density.")
    pane.show_view(replace(empty, notice=""))
    without = rgba(pane.grab().toImage())
    pane.show_view(empty)
    changed = (rgba(pane.grab().toImage()) != without).any(axis=2)
    rows = np.flatnonzero(changed.any(axis=1))
    assert abs(rows.mean() - 220) < 40


def test_the_picture_goes_to_the_clipboard(qtbot, pane):
    (copy,) = [action for action in pane.actions() if action.text() == "Copy picture"]
    assert copy.shortcut().matches(QKeySequence.StandardKey.Copy)
    copy.trigger()
    image = QGuiApplication.clipboard().image()
    assert (image.width(), image.height()) == (2 * pane.width(), 2 * pane.height())


def test_closing_leaves_nothing_running(qtbot, renderer):
    pane = StagePane("A", renderer)
    pane.show_view(pane_view(sheet(ellipsoid(1, 1, 1))))
    with qtbot.waitExposed(pane):
        pane.show()
    assert pane._rest.isActive()
    pane.close()
    assert not pane._rest.isActive()
    reference = weakref.ref(pane)
    pane.deleteLater()
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    del pane
    gc.collect()
    assert reference() is None


def test_the_controls_say_what_they_are(pane):
    assert pane.accessibleName() == "Stage A"
    assert "arrow keys" in pane.accessibleDescription()
    assert pane.focusPolicy() == Qt.FocusPolicy.StrongFocus
