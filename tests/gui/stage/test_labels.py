"""What is laid over the scene: where it stands, and what is left out."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QRectF
from PySide6.QtGui import QImage, QPainter

from gui.stage.camera import Camera
from gui.stage.composition import AXIS_REACH
from gui.stage.labels import draw_decorations, scene_rect
from gui.theme import LIGHT, NIGHT
from gui.viewdata import DirectionMark
from tests.gui.stage.images import centroid, rgba
from tests.gui.stage.shapes import PART, ellipsoid, pane_view, sheet

WIDTH, HEIGHT = 420, 440
CAMERA = Camera()
TOWARDS = tuple(float(x) for x in CAMERA.basis()[2])
AWAY = tuple(-x for x in TOWARDS)

pytestmark = pytest.mark.usefixtures("qapp")


@pytest.fixture
def plain():
    return pane_view(sheet(ellipsoid(1, 1, 1)), triads=(), title="")


def draw(view, theme=LIGHT, camera=CAMERA):
    image = QImage(WIDTH, HEIGHT, QImage.Format.Format_RGB32)
    image.fill(theme.colour("stage"))
    painter = QPainter(image)
    draw_decorations(painter, QRectF(image.rect()), view, camera, theme)
    painter.end()
    return rgba(image)[..., :3]


def changed(view, plain, **kwargs):
    return np.abs(draw(view, **kwargs) - draw(plain, **kwargs)).max(axis=2) > 40


def place_of(point):
    scene = scene_rect(QRectF(0, 0, WIDTH, HEIGHT), LIGHT)
    pixels, _ = CAMERA.project(
        np.array(point, dtype=float)[:, None], (int(scene.width()), int(scene.height()))
    )
    return pixels[0, 0] + scene.left(), pixels[1, 0] + scene.top()


def mark(direction, kind="pin", label=""):
    return DirectionMark(tuple(direction), label, kind)


def test_the_scene_leaves_room_for_title_and_colour_bar():
    whole = QRectF(10, 20, 300, 300)
    scene = scene_rect(whole, LIGHT)
    assert whole.contains(scene)
    assert scene.top() - whole.top() >= 15
    assert whole.bottom() - scene.bottom() >= 30
    assert scene_rect(QRectF(0, 0, 600, 600), LIGHT, 2.0).top() > 1.7 * (scene.top() - 20)


@pytest.mark.parametrize("letter", [0, 1, 2])
def test_letters_stand_at_the_tips(plain, letter):
    labels = ["", "", ""]
    labels[letter] = "W"
    triad = replace(PART, labels=tuple(labels))
    found = centroid(changed(replace(plain, triads=(triad,)), plain))
    tip = place_of(AXIS_REACH * np.eye(3)[letter])
    assert np.hypot(found[0] - tip[0], found[1] - tip[1]) < 18


def test_a_long_title_does_not_hide_a_letter(plain):
    titled = replace(plain, title="a specimen with quite a long name, slowness of the sheets")
    lettered = replace(titled, triads=(replace(PART, labels=("", "", "W")),))
    found = centroid(changed(lettered, titled))
    tip = place_of((0, 0, AXIS_REACH))
    assert np.hypot(found[0] - tip[0], found[1] - tip[1]) < 40
    assert found[1] > 5


@pytest.mark.parametrize("theme", [LIGHT, NIGHT], ids=lambda theme: theme.name)
def test_the_pin_is_a_disc_in_front_and_a_ring_behind(plain, theme):
    alert = theme.colour("alert")
    colour = np.array([alert.red(), alert.green(), alert.blue()])
    x, y = (int(c) for c in place_of(TOWARDS))
    front = draw(replace(plain, marks=(mark(TOWARDS),)), theme)
    assert np.abs(front[y, x] - colour).max() < 8
    behind = draw(replace(plain, marks=(mark(AWAY),)), theme)
    assert np.abs(behind[y, x] - colour).max() > 40  # only the ring of its other end
    ring = changed(replace(plain, marks=(mark(AWAY),)), plain, theme=theme)
    assert 20 < ring.sum() < 160


def test_a_mark_is_drawn_at_whichever_end_is_seen(plain):
    for direction in (TOWARDS, AWAY):
        shape = changed(replace(plain, marks=(mark(direction, "greatest"),)), plain)
        assert centroid(shape) == pytest.approx(place_of(TOWARDS), abs=2.0)


def test_least_and_greatest_are_told_by_shape(plain):
    shapes = [
        changed(replace(plain, marks=(mark(TOWARDS, kind),)), plain)
        for kind in ("least", "greatest", "axis")
    ]
    widths = []
    for shape in shapes:
        rows = np.flatnonzero(shape.any(axis=1))
        widths.append((shape[rows[2]].sum(), shape[rows[-3]].sum()))
    assert widths[0][0] > widths[0][1]  # points down
    assert widths[1][0] < widths[1][1]  # points up
    assert abs(widths[2][0] - widths[2][1]) <= 2


def test_labels_do_not_cover_one_another(plain):
    near = np.array(TOWARDS) + 0.03 * CAMERA.basis()[0]
    one = replace(plain, marks=(mark(TOWARDS, "least", "least"),))
    two = replace(plain, marks=(*one.marks, mark(near / np.linalg.norm(near), "axis", "axis")))
    first, second = changed(one, plain), changed(two, one)
    assert (second & ~first).sum() > 20


def test_marks_on_what_is_not_there_are_left_out(plain):
    rows = ellipsoid(1, 1, 1)
    rows[:, np.array(TOWARDS) @ rows[:3] > 0.7] = np.nan
    rows[:, np.array(AWAY) @ rows[:3] > 0.7] = np.nan
    holed = replace(plain, sheets=(sheet(rows),))
    assert not changed(replace(holed, marks=(mark(TOWARDS, "least"),)), holed).any()


def test_without_sheets_there_is_no_colour_bar(plain):
    strip = draw(plain)[HEIGHT - 45 :]
    empty = draw(replace(plain, sheets=()))[HEIGHT - 45 :]
    assert (np.ptp(strip, axis=2) > 60).any()
    assert not (np.ptp(empty, axis=2) > 60).any()


def test_the_letter_of_the_side_is_in_its_colour(plain):
    for side, colour in (("A", LIGHT.colour("a")), ("B", LIGHT.colour("b"))):
        corner = draw(replace(plain, side=side))[:24, :24]
        distance = np.abs(corner - [colour.red(), colour.green(), colour.blue()]).max(axis=2)
        assert distance.min() < 30


def test_marks_on_the_half_that_is_cut_away_are_left_out(plain):
    near = (0.0, -1.0, 0.0)  # towards the camera; its other end shows inside the open half
    opened = replace(plain, section=(0.0, 1.0, 0.0), cut_away=True)
    marks = (mark(near, "least"),)
    found = changed(replace(opened, marks=marks), opened)
    assert centroid(found) == pytest.approx(place_of((0.0, 1.0, 0.0)), abs=2.0)
    closed = changed(replace(plain, marks=marks), plain)
    assert centroid(closed) == pytest.approx(place_of(near), abs=2.0)
