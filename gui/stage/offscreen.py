"""Pictures of any size: the pane of the window, drawn finer and in pieces."""

from __future__ import annotations

from collections.abc import Iterator

from PySide6.QtCore import QRect, QRectF
from PySide6.QtGui import QImage, QPainter

from gui.stage.camera import Camera, Size, Tile
from gui.stage.composition import Finish, Ground, Renderer, ground_colour
from gui.stage.labels import draw_decorations, scene_rect
from gui.theme import LIGHT, Theme
from gui.viewdata import PaneView

USUAL_SIDE = 520.0  # a pane this wide shows text and strokes at their size on the screen
_TILE = 768
_SAMPLES = 4


def picture_scale(width: int, height: int) -> float:
    """Return how much larger text and strokes are in a picture of this size."""
    return min(width, height) / USUAL_SIDE


def render_picture(
    view: PaneView,
    camera: Camera,
    width: int,
    height: int,
    ground: Ground,
    theme: Theme,
    renderer: Renderer,
) -> QImage:
    """Return a pane as a picture, the scene and all that is laid over it.

    Parameters
    ----------
    view, camera
    width, height : int
        Pixels. Text and strokes grow with the picture.
    ground : "white", "theme" or "transparent"
        A white picture takes its ink from the light theme.
    theme, renderer

    Returns
    -------
    QImage
        Premultiplied; opaque unless the ground is transparent.
    """
    ink = LIGHT if ground == "white" else theme
    scale = picture_scale(width, height)
    image = QImage(width, height, QImage.Format.Format_ARGB32_Premultiplied)
    image.fill(ground_colour(ground, ink))
    whole = QRectF(0, 0, width, height)
    scene = scene_rect(whole, ink, scale).toRect()
    painter = QPainter(image)
    paint_scene(painter, scene, view, camera, ground, ink, renderer, scale)
    draw_decorations(painter, whole, view, camera, ink, scale)
    painter.end()
    return image


def paint_scene(
    painter: QPainter,
    scene: QRect,
    view: PaneView,
    camera: Camera,
    ground: Ground,
    theme: Theme,
    renderer: Renderer,
    scale: float,
) -> None:
    """Paint the scene of a pane at its best into a rectangle of a picture, tile by tile."""
    size = (scene.width(), scene.height())
    painter.save()
    painter.setClipRect(scene)
    painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_Source)
    for tile in tiles(size):
        finish = Finish(scale, tile, supersample=2)
        part = renderer.render(view, camera, size, theme, ground, _SAMPLES, finish)
        painter.drawImage(scene.left() + tile[0], scene.top() + tile[1], part)
    painter.restore()


def tiles(size: Size) -> Iterator[Tile]:
    """Yield tiles of one size that cover a picture; the last ones reach over its edge."""
    width, height = (min(_TILE, length + length % 2) for length in size)
    for y in range(0, size[1], height):
        for x in range(0, size[0], width):
            yield x, y, width, height
