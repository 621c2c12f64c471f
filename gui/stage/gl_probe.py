"""Does this machine draw with OpenGL? Asked once, by drawing and looking at the result."""

from __future__ import annotations

import importlib
from dataclasses import dataclass

from PySide6.QtGui import (
    QColor,
    QGuiApplication,
    QOffscreenSurface,
    QOpenGLContext,
    QSurfaceFormat,
)
from PySide6.QtOpenGL import QOpenGLFramebufferObject

LEAST_VERSION = (3, 3)
_GL_VERSION, _GL_RENDERER = 0x1F02, 0x1F01
_GL_COLOR_BUFFER_BIT = 0x4000
_TEST_COLOUR = QColor(255, 128, 0)


@dataclass(frozen=True)
class GlReport:
    """What the probe found."""

    ok: bool
    reason: str  # in plain words why there is no OpenGL, or ""
    version: str = ""
    renderer: str = ""


def surface_format() -> QSurfaceFormat:
    """Return the context this program asks for: 3.3 core, 24 bits of depth."""
    wanted = QSurfaceFormat()
    wanted.setVersion(*LEAST_VERSION)
    wanted.setProfile(QSurfaceFormat.OpenGLContextProfile.CoreProfile)
    wanted.setDepthBufferSize(24)
    return wanted


def probe() -> GlReport:
    """Create a context, clear a picture in it and read it back; never raises.

    Needs a running QGuiApplication; without one it reports so.
    """
    if QGuiApplication.instance() is None:
        return GlReport(False, "no application is running")
    context = QOpenGLContext()
    context.setFormat(surface_format())
    if not context.create():
        return GlReport(False, "no OpenGL context can be created")
    surface = QOffscreenSurface()
    surface.setFormat(context.format())
    surface.create()
    try:
        if not surface.isValid() or not context.makeCurrent(surface):
            return GlReport(False, "the OpenGL context cannot be made current")
        return _look_at(context)
    finally:
        context.doneCurrent()
        surface.destroy()


def _look_at(context: QOpenGLContext) -> GlReport:
    """Judge the current context by its version, its library and one cleared picture."""
    functions = context.functions()
    version = str(functions.glGetString(_GL_VERSION))
    renderer = str(functions.glGetString(_GL_RENDERER))
    found = context.format().version()
    if context.isOpenGLES() or tuple(found) < LEAST_VERSION:
        return GlReport(False, f"OpenGL 3.3 is needed, this is {version}", version, renderer)
    target = QOpenGLFramebufferObject(4, 4)
    if not target.isValid() or not target.bind():
        return GlReport(False, "no framebuffer can be made", version, renderer)
    red, green, blue = _TEST_COLOUR.redF(), _TEST_COLOUR.greenF(), _TEST_COLOUR.blueF()
    functions.glClearColor(red, green, blue, 1.0)
    functions.glClear(_GL_COLOR_BUFFER_BIT)
    seen = target.toImage().pixelColor(1, 1)
    target.release()
    wanted = (_TEST_COLOUR.red(), _TEST_COLOUR.green(), _TEST_COLOUR.blue())
    got = (seen.red(), seen.green(), seen.blue())
    if max(abs(a - b) for a, b in zip(got, wanted, strict=True)) > 3:
        return GlReport(False, "a cleared picture reads back wrong", version, renderer)
    return _check_bindings(version, renderer)


def _check_bindings(version: str, renderer: str) -> GlReport:
    """Check that the Python bindings find the same OpenGL library."""
    try:
        importlib.import_module("gui.stage.gl")
    except (ImportError, OSError, AttributeError, TypeError) as error:
        return GlReport(False, f"PyOpenGL does not load: {error}", version, renderer)
    return GlReport(True, "", version, renderer)
