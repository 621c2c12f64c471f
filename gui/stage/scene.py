"""The renderer with OpenGL: the only user of the hidden context."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from PySide6.QtCore import QCoreApplication
from PySide6.QtGui import QColor, QImage

from core.arrays import FloatArray
from gui.stage import composition
from gui.stage.camera import DISTANCE, FAR, NEAR, Camera, Size
from gui.stage.composition import PLAIN, Finish, Ground, Layer, LineSet
from gui.stage.gl import GL
from gui.stage.gl_context import Target, hidden_context
from gui.stage.shaders import (
    Program,
    depth_program,
    disc_program,
    line_program,
    surface_program,
)
from gui.stage.surface_item import DiscItem, IndexPool, LineItem, SurfaceItem
from gui.theme import GREY_FOR_UNDEFINED, Theme, colour_table
from gui.viewdata import PaneView, ScaleView
from gui.widgets.colour_bar import colour_range, is_logarithmic

_MOST_TARGETS = 4  # two panes, each at rest and moving

# OpenGL counts rows upwards and pictures downwards. Drawing upside down saves turning every
# picture over after it was read; it also turns the winding of the triangles.
_UPSIDE_DOWN = np.diag([1.0, -1.0, 1.0, 1.0])


@dataclass
class _Programs:
    """The shader programs, compiled with the context current."""

    surface: Program = field(default_factory=surface_program)
    depth: Program = field(default_factory=depth_program)
    line: Program = field(default_factory=line_program)
    disc: Program = field(default_factory=disc_program)

    def free(self) -> None:
        """Give the programs back; the context must be current."""
        for program in (self.surface, self.depth, self.line, self.disc):
            GL.glDeleteProgram(program.name)


@dataclass
class _Slot:
    """What one pane keeps on the graphics side between two pictures."""

    disc: DiscItem = field(default_factory=DiscItem)
    free_lines: LineItem = field(default_factory=LineItem)
    sheets: dict[int, SurfaceItem] = field(default_factory=dict)
    outlines: dict[int, LineItem] = field(default_factory=dict)
    lines: tuple[LineSet, ...] = ()
    lines_of: tuple[object, ...] = ()

    def sheet(self, index: int) -> SurfaceItem:
        """Return what draws a sheet. Not by setdefault: items made in vain keep buffers."""
        if index not in self.sheets:
            self.sheets[index] = SurfaceItem()
        return self.sheets[index]

    def outline(self, index: int) -> LineItem:
        """Return what draws the section curve of one sheet."""
        if index not in self.outlines:
            self.outlines[index] = LineItem()
        return self.outlines[index]

    def free(self) -> None:
        """Give the buffers back; the context must be current."""
        self.disc.free()
        for sheet in self.sheets.values():
            sheet.free()
        for strokes in (self.free_lines, *self.outlines.values()):
            strokes.free()


@dataclass(frozen=True)
class _Shot:
    """One picture being made."""

    view: PaneView
    camera: Camera
    theme: Theme
    matrix: FloatArray
    kept: FloatArray | None
    viewport: tuple[float, float]
    stroke: float  # pixels of the target per logical pixel


class SceneRenderer:
    """Draws scenes with OpenGL in the hidden context; one serves all panes.

    Buffers are kept per side of the bench ("A", "B") and per sheet. They are uploaded when a
    view brings other row objects; the camera, the colours and the section never upload a sheet.
    """

    def __init__(self) -> None:
        self._context = hidden_context()
        self._slots: dict[str, _Slot] = {}
        self._targets: dict[tuple[int, int, int], Target] = {}
        self._tables: dict[bool, int] = {}
        with self._context.current():
            self._programs = _Programs()
            self._indices = IndexPool()
        self._is_closed = False
        application = QCoreApplication.instance()
        if application is not None:
            application.aboutToQuit.connect(self.close)

    @property
    def uploads(self) -> int:
        """How often a sheet was uploaded so far."""
        slots = self._slots.values()
        return sum(item.uploads for slot in slots for item in slot.sheets.values())

    def render(
        self,
        view: PaneView,
        camera: Camera,
        size: Size,
        theme: Theme,
        ground: Ground = "theme",
        samples: int = 0,
        finish: Finish = PLAIN,
    ) -> QImage:
        """Return the scene of a pane as a picture of its own.

        Parameters
        ----------
        view, camera, theme
        size : (int, int)
            Pixels of the whole picture, whether or not only a tile of it is drawn.
        ground : "theme", "white" or "transparent"
        samples : int
            Samples per pixel; 0 while something moves, 4 at rest.
        finish : Finish
        """
        fine = finish.supersample
        width, height = size if finish.tile is None else finish.tile[2:]
        with self._context.current():
            target = self._target(width * fine, height * fine, samples)
            background = composition.ground_colour(ground, theme)
            target.begin(*_premultiplied(background))
            shot = _Shot(
                view, camera, theme,
                matrix=_UPSIDE_DOWN @ camera.matrix(size, finish.tile),
                kept=composition.kept_half(view, camera),
                viewport=(float(target.width), float(target.height)),
                stroke=finish.scale * fine,
            )
            self._draw(shot)
            return target.read(is_opaque=ground != "transparent", halve=fine == 2)

    def close(self) -> None:
        """Free every buffer, program and framebuffer."""
        if self._is_closed:
            return
        self._is_closed = True
        with self._context.current():
            for slot in self._slots.values():
                slot.free()
            for target in self._targets.values():
                target.free()
            self._indices.free()
            self._programs.free()
            tables = np.array(list(self._tables.values()), dtype=np.uint32)
            GL.glDeleteTextures(len(tables), tables)
        self._slots.clear()
        self._targets.clear()

    def _target(self, width: int, height: int, samples: int) -> Target:
        """Return a framebuffer of this size, keeping the few last used."""
        key = (width, height, samples)
        target = self._targets.pop(key, None) or Target(width, height, samples)
        self._targets[key] = target
        while len(self._targets) > _MOST_TARGETS:
            self._targets.pop(next(iter(self._targets))).free()
        return target

    def _draw(self, shot: _Shot) -> None:
        """Draw sheets from the inside outwards, each with its section curve, then the rest."""
        slot = self._slots.get(shot.view.side)
        if slot is None:
            slot = self._slots[shot.view.side] = _Slot()
        GL.glEnable(GL.GL_DEPTH_TEST)
        GL.glDepthFunc(GL.GL_LEQUAL)
        GL.glBlendFunc(GL.GL_ONE, GL.GL_ONE_MINUS_SRC_ALPHA)
        GL.glFrontFace(GL.GL_CW)  # because the picture is upside down
        self._prepare(shot)
        for layer in composition.layers(shot.view):
            item = slot.sheet(layer.index)
            item.show(layer.sheet.rows, layer.sheet.triangles)
            self._draw_sheet(shot, layer, item)
            curves = composition.outlines(shot.view, layer, shot.theme)
            if curves:
                self._draw_lines(shot, slot.outline(layer.index), curves)
        self._draw_disc(shot, slot)
        key = (shot.view, shot.theme, _is_far_half(shot))
        if len(slot.lines_of) != len(key) or any(map(_differs, slot.lines_of, key)):
            slot.lines_of = key
            slot.lines = composition.free_lines(shot.view, shot.theme, shot.kept)
        self._draw_lines(shot, slot.free_lines, slot.lines)

    def _prepare(self, shot: _Shot) -> None:
        """Set what all the sheets of a picture have in common."""
        kept = np.zeros(4) if shot.kept is None else np.append(shot.kept, 0.0)
        for program in (self._programs.depth, self._programs.surface):
            program.use()
            program.set(
                matrix=shot.matrix, basis=shot.camera.basis(), distance=DISTANCE,
                unit=1.0 / shot.view.radius, clip=kept,
            )
        self._programs.surface.set(
            range=_shader_range(shot.view.scale),
            undefined=_premultiplied(QColor(GREY_FOR_UNDEFINED))[:3],
            by_normal=1.0 if shot.view.is_wave_surface else 0.0,
        )
        GL.glActiveTexture(GL.GL_TEXTURE0)
        GL.glBindTexture(GL.GL_TEXTURE_2D, self._table(shot.view.scale.diverging))

    def _draw_sheet(self, shot: _Shot, layer: Layer, item: SurfaceItem) -> None:
        """Draw one sheet: opaque, opened, or translucent after a pass for its depth alone.

        Only the front faces of closed sheets are drawn. A folded wave surface has none that
        could be left out.
        """
        is_closed = not shot.view.is_wave_surface and not layer.is_opened
        _switch(GL.GL_CULL_FACE, is_closed)
        _switch(GL.GL_CLIP_DISTANCE0, layer.is_opened)
        if layer.opacity < 1.0:
            self._programs.depth.use()
            GL.glColorMask(False, False, False, False)
            item.draw(self._indices)
            GL.glColorMask(True, True, True, True)
        _switch(GL.GL_BLEND, layer.opacity < 1.0)
        self._programs.surface.use()
        self._programs.surface.set(
            opacity=layer.opacity, back_amount=1.0 if layer.is_opened else 0.0
        )
        item.draw(self._indices)
        _switch(GL.GL_CULL_FACE, False)
        _switch(GL.GL_CLIP_DISTANCE0, False)

    def _draw_disc(self, shot: _Shot, slot: _Slot) -> None:
        """Draw the section plane as a thin disc, hidden where a sheet is before it."""
        if shot.view.section is None or not composition.has_disc(shot.view):
            return
        normal = shot.view.section
        slot.disc.show(normal, composition.disc_rim(normal).astype(np.float32))
        GL.glEnable(GL.GL_BLEND)
        GL.glDepthMask(False)
        program = self._programs.disc
        program.use()
        program.set(
            matrix=shot.matrix,
            colour=_straight(composition.disc_colour(shot.view, shot.theme)),
        )
        slot.disc.draw()
        GL.glDepthMask(True)

    def _draw_lines(self, shot: _Shot, item: LineItem, sets: tuple[LineSet, ...]) -> None:
        """Draw strokes: what lies behind a sheet faintly, then what lies before it."""
        item.show(sets)
        program = self._programs.line
        program.use()
        program.set(matrix=shot.matrix, viewport=shot.viewport)
        GL.glEnable(GL.GL_BLEND)
        GL.glDepthMask(False)
        for number, line in enumerate(sets):
            red, green, blue, alpha = _straight(line.colour)
            program.set(half=0.5 * line.width * shot.stroke, dash=line.dash * shot.stroke,
                        lift=_clip_depth(line.lift))
            if line.shine > 0.0:
                GL.glDepthFunc(GL.GL_GREATER)
                program.set(colour=(red, green, blue, line.shine))
                item.draw(number)
            GL.glDepthFunc(GL.GL_LEQUAL)
            program.set(colour=(red, green, blue, alpha))
            item.draw(number)
        GL.glDepthMask(True)

    def _table(self, diverging: bool) -> int:
        """Return the colour table as a texture, uploaded on its first use."""
        if diverging not in self._tables:
            name = int(GL.glGenTextures(1))
            GL.glBindTexture(GL.GL_TEXTURE_2D, name)
            GL.glTexImage2D(
                GL.GL_TEXTURE_2D, 0, GL.GL_RGBA8, 256, 1, 0, GL.GL_RGBA, GL.GL_UNSIGNED_BYTE,
                colour_table(diverging),
            )
            for choice, value in (
                (GL.GL_TEXTURE_MIN_FILTER, GL.GL_LINEAR),
                (GL.GL_TEXTURE_MAG_FILTER, GL.GL_LINEAR),
                (GL.GL_TEXTURE_WRAP_S, GL.GL_CLAMP_TO_EDGE),
                (GL.GL_TEXTURE_WRAP_T, GL.GL_CLAMP_TO_EDGE),
            ):
                GL.glTexParameteri(GL.GL_TEXTURE_2D, choice, value)
            self._tables[diverging] = name
        return self._tables[diverging]


def _switch(what: int, is_on: bool) -> None:
    """Turn one of OpenGL's switches on or off."""
    if is_on:
        GL.glEnable(what)
    else:
        GL.glDisable(what)


def _differs(a: object, b: object) -> bool:
    """Tell whether two things are not the same object."""
    return a is not b


def _is_far_half(shot: _Shot) -> bool | None:
    """Tell whether the half that the section's normal points from is the one that stays."""
    if shot.kept is None or shot.view.section is None:
        return None
    return bool(shot.kept @ np.asarray(shot.view.section) < 0.0)


def _straight(colour: QColor) -> tuple[float, float, float, float]:
    """Return a colour as four numbers from 0 to 1."""
    return colour.redF(), colour.greenF(), colour.blueF(), colour.alphaF()


def _premultiplied(colour: QColor) -> tuple[float, float, float, float]:
    """Return a colour as four numbers from 0 to 1, the first three times the fourth."""
    red, green, blue, alpha = _straight(colour)
    return red * alpha, green * alpha, blue * alpha, alpha


def _shader_range(scale: ScaleView) -> tuple[float, float, float]:
    """Return the ends of the colour table as the shader reads them."""
    low, high = colour_range(scale)
    if is_logarithmic(scale):
        return float(np.log(low)), float(np.log(high)), 1.0
    return low, high, 0.0


def _clip_depth(lift: float) -> float:
    """Return the step in clip depth that a step towards the eye makes at the origin."""
    return 2.0 * FAR * NEAR / ((FAR - NEAR) * DISTANCE**2) * lift
