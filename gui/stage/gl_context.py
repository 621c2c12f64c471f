"""The one hidden OpenGL context of the program, and the pictures it draws into.

Nothing on the screen owns a context: pictures are drawn off the screen, read back, and
painted by plain widgets. So docking and re-parenting cannot lose anything.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from functools import cache

import numpy as np
from PySide6.QtCore import QCoreApplication
from PySide6.QtGui import QImage, QOffscreenSurface, QOpenGLContext

from gui.stage.gl import GL
from gui.stage.gl_probe import surface_format


class HiddenContext:
    """An OpenGL context with an off-screen surface, both living as long as the application."""

    def __init__(self) -> None:
        application = QCoreApplication.instance()
        self._context = QOpenGLContext(application)
        self._context.setFormat(surface_format())
        self._surface = QOffscreenSurface(None, application)
        if not self._context.create():
            raise RuntimeError("no OpenGL context can be created")
        self._surface.setFormat(self._context.format())
        self._surface.create()

    @contextmanager
    def current(self) -> Iterator[None]:
        """Make the context current while the block runs; blocks may nest."""
        if QOpenGLContext.currentContext() is self._context:
            yield
            return
        if not self._context.makeCurrent(self._surface):
            raise RuntimeError("the OpenGL context cannot be made current")
        try:
            yield
        finally:
            self._context.doneCurrent()


@cache
def hidden_context() -> HiddenContext:
    """Return the context that every renderer shares, created on first use."""
    return HiddenContext()


class Target:
    """A framebuffer with colour and depth; its rows run downwards, as those of a picture do."""

    def __init__(self, width: int, height: int, samples: int) -> None:
        self.width, self.height, self.samples = width, height, samples
        self._buffers: list[int] = []
        self._frame = self._make(samples, with_depth=True)
        self._resolved = self._make(0, with_depth=False) if samples else self._frame
        self._halved = 0

    def begin(self, red: float, green: float, blue: float, alpha: float) -> None:
        """Draw into this from now on, starting from one colour (premultiplied)."""
        GL.glBindFramebuffer(GL.GL_FRAMEBUFFER, self._frame)
        GL.glViewport(0, 0, self.width, self.height)
        GL.glDepthMask(True)
        GL.glColorMask(True, True, True, True)
        GL.glClearColor(red, green, blue, alpha)
        GL.glClear(GL.GL_COLOR_BUFFER_BIT | GL.GL_DEPTH_BUFFER_BIT)

    def read(self, is_opaque: bool, halve: bool = False) -> QImage:
        """Return what was drawn, in half the size (each pixel the mean of four) if asked."""
        width, height = self.width, self.height
        if self.samples:
            self._blit(self._frame, self._resolved, width, height, GL.GL_NEAREST)
        source = self._resolved
        if halve:
            source = self._halved = self._halved or self._make(0, with_depth=False)
            width, height = width // 2, height // 2
            # A linear filter at exactly half the size is the mean of two by two.
            self._blit(self._resolved, source, width, height, GL.GL_LINEAR)
        kind = QImage.Format.Format_RGB32 if is_opaque else (
            QImage.Format.Format_ARGB32_Premultiplied
        )
        image = QImage(width, height, kind)
        pixels = np.frombuffer(image.bits(), dtype=np.uint8)
        GL.glBindFramebuffer(GL.GL_FRAMEBUFFER, source)
        GL.glPixelStorei(GL.GL_PACK_ALIGNMENT, 4)
        GL.glReadPixels(0, 0, width, height, GL.GL_BGRA, GL.GL_UNSIGNED_BYTE, pixels)
        return image

    def free(self) -> None:
        """Give the memory back; the context must be current."""
        frames = {self._frame, self._resolved, self._halved} - {0}
        GL.glDeleteFramebuffers(len(frames), np.array(sorted(frames), dtype=np.uint32))
        names = np.array(self._buffers, dtype=np.uint32)
        GL.glDeleteRenderbuffers(len(names), names)

    def _make(self, samples: int, with_depth: bool) -> int:
        """Make a framebuffer of this size and return its name."""
        frame = int(GL.glGenFramebuffers(1))
        GL.glBindFramebuffer(GL.GL_FRAMEBUFFER, frame)
        parts = [(GL.GL_COLOR_ATTACHMENT0, GL.GL_RGBA8)]
        if with_depth:
            parts.append((GL.GL_DEPTH_ATTACHMENT, GL.GL_DEPTH_COMPONENT24))
        for attachment, kind in parts:
            buffer = int(GL.glGenRenderbuffers(1))
            self._buffers.append(buffer)
            GL.glBindRenderbuffer(GL.GL_RENDERBUFFER, buffer)
            GL.glRenderbufferStorageMultisample(
                GL.GL_RENDERBUFFER, samples, kind, self.width, self.height
            )
            GL.glFramebufferRenderbuffer(
                GL.GL_FRAMEBUFFER, attachment, GL.GL_RENDERBUFFER, buffer
            )
        if GL.glCheckFramebufferStatus(GL.GL_FRAMEBUFFER) != GL.GL_FRAMEBUFFER_COMPLETE:
            raise RuntimeError(f"no framebuffer of {self.width} by {self.height} can be made")
        return frame

    def _blit(self, source: int, goal: int, width: int, height: int, how: int) -> None:
        """Copy the whole of one framebuffer onto the lower corner of another."""
        GL.glBindFramebuffer(GL.GL_READ_FRAMEBUFFER, source)
        GL.glBindFramebuffer(GL.GL_DRAW_FRAMEBUFFER, goal)
        GL.glBlitFramebuffer(
            0, 0, self.width, self.height, 0, 0, width, height, GL.GL_COLOR_BUFFER_BIT, how
        )
