"""Pictures of any size, with either renderer."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QRectF

from gui.stage import offscreen
from gui.stage.camera import Camera
from gui.stage.flat_scene import FlatRenderer
from gui.stage.labels import scene_rect
from gui.stage.offscreen import picture_scale, render_picture, tiles
from gui.theme import LIGHT, NIGHT
from tests.gui.stage.images import rgba
from tests.gui.stage.shapes import cubic_young, example_marks, pane_view, sheet, three_sheets


@pytest.fixture(params=[pytest.param("gl", marks=pytest.mark.gl), "flat"])
def renderer(request, qapp):
    if request.param == "flat":
        yield FlatRenderer()
        return
    from gui.stage.scene import SceneRenderer

    made = SceneRenderer()
    yield made
    made.close()


@pytest.fixture
def view():
    surface = sheet(cubic_young(66, 190))
    return pane_view(surface, marks=example_marks(), section=(0.0, 1.0, 0.0))


def picture(view, renderer, ground="white", size=(300, 320), theme=LIGHT):
    return render_picture(view, Camera(), *size, ground, theme, renderer)


def test_tiles_cover_a_picture_once():
    covered = np.zeros((2000, 1700), dtype=int)
    for x, y, width, height in tiles((1700, 2000)):
        covered[y : y + height, x : x + width] += 1
    assert (covered == 1).all()


def test_a_tiled_picture_is_the_untiled_one(view, renderer, monkeypatch):
    whole = rgba(picture(view, renderer))
    monkeypatch.setattr(offscreen, "_TILE", 90)
    tiled = rgba(picture(view, renderer))
    assert (np.abs(whole - tiled).max(axis=2) > 40).mean() < 0.002


def test_a_larger_picture_shows_the_same_larger(view, renderer):
    small, large = rgba(picture(view, renderer)), rgba(picture(view, renderer, size=(600, 640)))
    reduced = large.reshape(320, 2, 300, 2, 4).mean(axis=(1, 3))
    assert np.abs(reduced - small).mean() < 4.0


def test_a_transparent_picture_has_no_ground(view, renderer):
    pixels = rgba(picture(view, renderer, "transparent"))
    scene = scene_rect(QRectF(0, 0, 300, 320), LIGHT, picture_scale(300, 320))
    middle = int(scene.center().y())
    assert pixels[4, 294, 3] == 0
    assert pixels[middle, 150, 3] == 255


def test_a_white_picture_has_dark_ink_in_the_night_too(view, renderer):
    day, night = (rgba(picture(view, renderer, theme=theme)) for theme in (LIGHT, NIGHT))
    assert np.array_equal(day, night)
    assert tuple(day[4, 294, :3]) == (255, 255, 255)


def test_the_ground_of_the_theme(view, renderer):
    stage = NIGHT.colour("stage")
    pixels = rgba(picture(view, renderer, "theme", theme=NIGHT))
    assert tuple(pixels[4, 294, :3]) == (stage.red(), stage.green(), stage.blue())


def test_marks_and_words_are_in_the_picture(view, renderer):
    bare = replace(view, marks=(), title="")
    changed = np.abs(rgba(picture(view, renderer)) - rgba(picture(bare, renderer))).max(axis=2)
    assert (changed > 60).sum() > 150
    assert (changed[:20] > 60).any()  # the title


def test_odd_sizes(renderer):
    image = picture(pane_view(*three_sheets(3)), renderer, size=(151, 173))
    assert (image.width(), image.height()) == (151, 173)
