"""A figure drawn by one routine, whatever it is drawn on: screen, PNG, SVG or PDF."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Literal

from PySide6.QtCore import QRect, QRectF, Qt
from PySide6.QtGui import QFontMetricsF, QImage, QPainter

from core.report.captions import FigureChoice, caption, needed_sides, state_for
from core.state import BenchState
from gui.figures.vector_scene import draw_vector_scene
from gui.plots.hemisphere import draw_hemisphere
from gui.plots.lettering import draw_title, lettering
from gui.plots.section import draw_section
from gui.plots.source_picture import draw_source
from gui.plots.sweep import draw_sweep
from gui.presenting import deck, stage
from gui.stage.camera import Camera
from gui.stage.composition import Ground, Renderer, ground_colour
from gui.stage.labels import draw_decorations, scene_rect
from gui.stage.offscreen import paint_scene
from gui.theme import LIGHT, Theme
from gui.viewdata import HemisphereView, PaneView, SectionView, SourceView, SweepView
from gui.widgets.colour_bar import bar_height, draw_colour_bar

Surface = Literal["pixels", "picture", "vectors"]
"""How a shaded surface is drawn: into the pixels of the painter, as a picture inside a vector
file, or as vectors itself."""
PlotView = SectionView | HemisphereView | SweepView | SourceView
_EDGE = 8.0  # pixels round the caption at scale 1
_PICTURE_PIXELS = 6000  # most of a side of a picture inside a vector file


@dataclass(frozen=True, eq=False)
class Drawable:
    """A figure ready to be drawn.

    Attributes
    ----------
    choice : FigureChoice
    caption : str
    panes : tuple of PaneView
        One, or A and B on one scale; empty for a plot.
    plot : view data or None
    """

    choice: FigureChoice
    caption: str
    panes: tuple[PaneView, ...] = ()
    plot: PlotView | None = None


@dataclass(frozen=True, eq=False)
class Look:
    """How a figure is drawn.

    Attributes
    ----------
    theme : Theme
    ground : "white", "theme" or "transparent"
        A white picture takes its ink from the light theme.
    renderer : Renderer
        Draws the shaded surfaces.
    cameras : mapping of side to Camera
        A side without one is seen from the usual place.
    surface : "pixels", "picture" or "vectors"
    dots : float
        Pixels of a picture inside a vector file per unit of its painter.
    has_caption : bool
        Write the caption under the figure.
    is_captioned : bool
        Somebody else writes it there: titles need not say it all.
    """

    theme: Theme
    ground: Ground
    renderer: Renderer
    cameras: Mapping[str, Camera] = field(default_factory=dict)
    surface: Surface = "pixels"
    dots: float = 1.0
    has_caption: bool = True
    is_captioned: bool = False

    @property
    def ink(self) -> Theme:
        """The theme that text and lines take their colours from."""
        return LIGHT if self.ground == "white" else self.theme

    def camera(self, side: str) -> Camera:
        """Return from where a side is seen."""
        return self.cameras.get(side) or Camera()


def drawable(state: BenchState, choice: FigureChoice, is_coarse: bool = False) -> Drawable:
    """Return a figure of a bench, computed and ready to be drawn.

    Raises
    ------
    InputError
        When the quantity needs a density that a crystal shown has not.
    """
    shown = state_for(state, choice)
    words = caption(state, choice)
    if choice.kind == "surface":
        views = stage.pane_views(shown, fine=not is_coarse)
        return Drawable(choice, words, tuple(views[side] for side in needed_sides(choice)))
    return Drawable(choice, words, plot=_plot_view(shown, choice))


def _plot_view(state: BenchState, choice: FigureChoice) -> PlotView:
    if choice.kind == "section":
        return deck.section_view(state)
    if choice.kind == "hemisphere":
        return deck.hemisphere_view(state)
    if choice.kind == "sweep":
        return deck.sweep_view(state)
    return deck.source_view(state, choice.time_us)


def draw_figure(
    painter: QPainter, rect: QRectF, figure: Drawable, look: Look, scale: float
) -> None:
    """Draw a figure with its ground and, if wanted, its caption.

    Parameters
    ----------
    painter : QPainter
    rect : QRectF
        All that the figure fills.
    figure, look
    scale : float
        Size of text and strokes; 1 on the screen.
    """
    if look.ground != "transparent":
        painter.fillRect(rect, ground_colour(look.ground, look.ink))
    if look.has_caption:
        height = caption_height(figure.caption, rect.width(), look.ink, scale)
        below = QRectF(rect.left(), rect.bottom() - height, rect.width(), height)
        rect = rect.adjusted(0.0, 0.0, 0.0, -height)
        _draw_caption(painter, below, figure.caption, look.ink, scale)
    if figure.panes:
        _draw_panes(painter, rect, figure.panes, look, scale)
    else:
        _draw_plot(painter, rect, figure, look, scale)


def caption_height(text: str, width: float, theme: Theme, scale: float) -> float:
    """Return the height that a caption takes under a figure of a width."""
    edge = _EDGE * scale
    metrics = QFontMetricsF(lettering(theme, "small", scale))
    room = QRectF(0.0, 0.0, max(width - 2 * edge, 1.0), 1e6)
    wrapped = metrics.boundingRect(room, int(Qt.TextFlag.TextWordWrap), text)
    return math.ceil(wrapped.height() + 1.2 * edge)


def _draw_caption(
    painter: QPainter, rect: QRectF, text: str, theme: Theme, scale: float
) -> None:
    edge = _EDGE * scale
    painter.setFont(lettering(theme, "small", scale))
    painter.setPen(theme.colour("secondary"))
    room = rect.adjusted(edge, 0.2 * edge, -edge, 0.0)
    painter.drawText(room, int(Qt.TextFlag.TextWordWrap), text)


def _draw_plot(
    painter: QPainter, rect: QRectF, figure: Drawable, look: Look, scale: float
) -> None:
    """Draw a plot with its title by the routine that draws it on the screen."""
    view, theme, has_caption = figure.plot, look.ink, look.has_caption or look.is_captioned
    if isinstance(view, SectionView):
        if has_caption:  # which says how A and B lie; the legend has their letters
            view = replace(view, legend=tuple((side, "") for side, _ in view.legend))
        draw_section(painter, rect, view, theme, scale, titled=True)
    elif isinstance(view, HemisphereView):
        if has_caption:  # which says the projection; the title need not
            rect = draw_title(painter, rect, view.title, theme, scale)
        draw_hemisphere(painter, rect, view, theme, scale, titled=not has_caption)
    elif isinstance(view, SweepView):
        draw_sweep(painter, rect, view, theme, scale, titled=True)
    elif isinstance(view, SourceView):
        draw_source(painter, rect, view, theme, scale, titled=True)


# --- surfaces -------------------------------------------------------------------------------


def _draw_panes(
    painter: QPainter, rect: QRectF, panes: tuple[PaneView, ...], look: Look, scale: float
) -> None:
    """Draw one pane with its colour bar, or two side by side over one bar."""
    if len(panes) == 1:
        _draw_pane(painter, rect, panes[0], look, scale, has_bar=True)
        return
    below = math.ceil(bar_height(look.ink, scale) + 8.0 * scale)
    width = math.floor(rect.width() / len(panes))
    for number, view in enumerate(panes):
        part = QRectF(rect.left() + number * width, rect.top(), width, rect.height() - below)
        _draw_pane(painter, part, view, look, scale, has_bar=False)
    strip = QRectF(rect.left(), rect.bottom() - below, rect.width(), below - 6.0 * scale)
    draw_colour_bar(painter, strip, panes[0].scale, look.ink, scale)


def _draw_pane(
    painter: QPainter, rect: QRectF, view: PaneView, look: Look, scale: float, has_bar: bool
) -> None:
    whole = QRectF(rect.toRect()) if look.surface == "pixels" else rect
    camera = look.camera(view.side)
    scene = scene_rect(whole, look.ink, scale, has_bar)
    if look.surface == "vectors":
        draw_vector_scene(painter, scene, view, camera, look.ink, scale)
    elif look.surface == "pixels":
        paint_scene(painter, scene.toRect(), view, camera, look.ground, look.ink,
                    look.renderer, scale)
    else:
        painter.drawImage(scene, _scene_picture(scene, view, camera, look, scale))
    draw_decorations(painter, whole, view, camera, look.ink, scale, has_bar)


def _scene_picture(
    scene: QRectF, view: PaneView, camera: Camera, look: Look, scale: float
) -> QImage:
    """Return the scene as a picture of its own, as fine as the file is meant to be."""
    dots = min(look.dots, _PICTURE_PIXELS / max(scene.width(), scene.height()))
    width, height = (max(round(dots * side), 2) for side in (scene.width(), scene.height()))
    image = QImage(width, height, QImage.Format.Format_ARGB32_Premultiplied)
    image.fill(ground_colour(look.ground, look.ink))
    painter = QPainter(image)
    paint_scene(painter, QRect(0, 0, width, height), view, camera, look.ground, look.ink,
                look.renderer, scale * dots)
    painter.end()
    if look.ground != "transparent":
        return image.convertToFormat(QImage.Format.Format_RGB32)
    return image


