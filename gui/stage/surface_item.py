"""Sheets and strokes in OpenGL buffers: uploaded when they are new, and only then."""

from __future__ import annotations

import ctypes
import operator
from collections.abc import Sequence

import numpy as np

from core.arrays import BoolArray, Float32Array, IndexArray
from gui.stage.composition import LineSet
from gui.stage.gl import GL
from gui.stage.shaders import UNDEFINED

_FLOAT = 4  # bytes
_STRIDE = 7 * _FLOAT
_ATTRIBUTES = ((3, 0), (3, 3), (1, 6))  # place, normal, value: length and first of the seven


class IndexPool:
    """Triangle lists on the graphics side, shared by all the sheets drawn on one mesh."""

    def __init__(self, depth: int = 6) -> None:
        self._depth = depth
        self._known: list[tuple[IndexArray, int]] = []

    def buffer(self, triangles: IndexArray) -> int:
        """Return the buffer of a triangle list, uploaded on its first use."""
        for known, name in self._known:
            if known is triangles:
                return name
        if len(self._known) == self._depth:
            _delete_buffers([self._known.pop(0)[1]])
        name = int(GL.glGenBuffers(1))
        _fill(name, triangles)
        self._known.append((triangles, name))
        return name

    def free(self) -> None:
        """Give the memory back; the context must be current."""
        _delete_buffers([name for _, name in self._known])
        self._known.clear()


class SurfaceItem:
    """One sheet on the graphics side.

    The planar rows are interleaved on their way up: measured, that costs a twentieth of a
    millisecond and saves several in the drawing of 10,000 vertices. Triangles that touch an
    undefined vertex are left out; a value undefined on a defined vertex becomes grey.
    """

    def __init__(self) -> None:
        self.uploads = 0
        self._rows: Float32Array | None = None
        self._triangles: IndexArray | None = None
        self._vertices = 0
        self._indices = 0  # number of indices drawn
        self._array = int(GL.glGenVertexArrays(1))
        self._buffer, self._own_indices = (int(name) for name in GL.glGenBuffers(2))
        self._is_whole = True

    def show(self, rows: Float32Array, triangles: IndexArray) -> None:
        """Take other rows and triangles; the very same objects cost nothing."""
        if rows is self._rows and triangles is self._triangles:
            return
        self._rows, self._triangles = rows, triangles
        self.uploads += 1
        defined: BoolArray = np.logical_and.reduce(np.isfinite(rows[:6]), axis=0)
        self._is_whole = bool(defined.all())
        self._indices = triangles.size
        if not self._is_whole:
            kept = np.ascontiguousarray(triangles[defined[triangles].all(axis=1)])
            self._indices = kept.size
            _fill(self._own_indices, kept)
        self._upload(_interleaved(rows))

    def draw(self, pool: IndexPool) -> None:
        """Draw the triangles with the program in use."""
        if self._triangles is None or self._indices == 0:
            return
        GL.glBindVertexArray(self._array)
        indices = pool.buffer(self._triangles) if self._is_whole else self._own_indices
        GL.glBindBuffer(GL.GL_ELEMENT_ARRAY_BUFFER, indices)
        GL.glDrawElements(GL.GL_TRIANGLES, self._indices, GL.GL_UNSIGNED_INT, None)
        GL.glBindVertexArray(0)

    def free(self) -> None:
        """Give the memory back; the context must be current."""
        GL.glDeleteVertexArrays(1, np.array([self._array], dtype=np.uint32))
        _delete_buffers([self._buffer, self._own_indices])

    def _upload(self, vertices: Float32Array) -> None:
        """Overwrite the buffer, or make it anew for another number of vertices."""
        GL.glBindBuffer(GL.GL_ARRAY_BUFFER, self._buffer)
        if len(vertices) == self._vertices:
            GL.glBufferSubData(GL.GL_ARRAY_BUFFER, 0, vertices.nbytes, vertices)
            return
        self._vertices = len(vertices)
        GL.glBufferData(GL.GL_ARRAY_BUFFER, vertices.nbytes, vertices, GL.GL_DYNAMIC_DRAW)
        GL.glBindVertexArray(self._array)
        for place, (length, first) in enumerate(_ATTRIBUTES):
            GL.glEnableVertexAttribArray(place)
            start = ctypes.c_void_p(first * _FLOAT)
            GL.glVertexAttribPointer(place, length, GL.GL_FLOAT, False, _STRIDE, start)
        GL.glBindVertexArray(0)


class LineItem:
    """Sets of strokes on the graphics side, in one buffer."""

    def __init__(self) -> None:
        self._sets: tuple[LineSet, ...] = ()
        self._array = int(GL.glGenVertexArrays(1))
        self._buffer = int(GL.glGenBuffers(1))

    def show(self, sets: Sequence[LineSet]) -> None:
        """Take other strokes; the very same ones cost nothing."""
        known = [line.segments for line in self._sets]
        given = [line.segments for line in sets]
        is_same = len(known) == len(given) and all(map(operator.is_, known, given))
        self._sets = tuple(sets)
        if is_same or not given:
            return
        segments = np.ascontiguousarray(np.concatenate(given).reshape(-1, 6), dtype=np.float32)
        _fill(self._buffer, segments)

    def draw(self, number: int) -> None:
        """Draw one of the sets with the program in use."""
        first = sum(len(line.segments) for line in self._sets[:number])
        GL.glBindVertexArray(self._array)
        GL.glBindBuffer(GL.GL_ARRAY_BUFFER, self._buffer)
        for place in (0, 1):
            start = ctypes.c_void_p(_FLOAT * (6 * first + 3 * place))
            GL.glEnableVertexAttribArray(place)
            GL.glVertexAttribPointer(place, 3, GL.GL_FLOAT, False, 6 * _FLOAT, start)
            GL.glVertexAttribDivisor(place, 1)
        count = len(self._sets[number].segments)
        GL.glDrawArraysInstanced(GL.GL_TRIANGLE_STRIP, 0, 4, count)
        GL.glBindVertexArray(0)

    def free(self) -> None:
        """Give the memory back; the context must be current."""
        GL.glDeleteVertexArrays(1, np.array([self._array], dtype=np.uint32))
        _delete_buffers([self._buffer])


class DiscItem:
    """The filled section disc on the graphics side."""

    def __init__(self) -> None:
        self._key: tuple[float, ...] = ()
        self._count = 0
        self._array = int(GL.glGenVertexArrays(1))
        self._buffer = int(GL.glGenBuffers(1))

    def show(self, key: tuple[float, ...], rim: Float32Array) -> None:
        """Take another rim, points (3, N), known by its plane normal."""
        if key == self._key:
            return
        self._key = key
        fan = np.ascontiguousarray(np.concatenate([np.zeros((1, 3)), rim.T]), dtype=np.float32)
        self._count = len(fan)
        GL.glBindVertexArray(self._array)
        _fill(self._buffer, fan)
        GL.glEnableVertexAttribArray(0)
        GL.glVertexAttribPointer(0, 3, GL.GL_FLOAT, False, 0, ctypes.c_void_p(0))
        GL.glBindVertexArray(0)

    def draw(self) -> None:
        """Draw the disc with the program in use."""
        GL.glBindVertexArray(self._array)
        GL.glDrawArrays(GL.GL_TRIANGLE_FAN, 0, self._count)
        GL.glBindVertexArray(0)

    def free(self) -> None:
        """Give the memory back; the context must be current."""
        GL.glDeleteVertexArrays(1, np.array([self._array], dtype=np.uint32))
        _delete_buffers([self._buffer])


def _interleaved(rows: Float32Array) -> Float32Array:
    """Return the rows as vertices (N, 7), undefined values marked."""
    vertices = np.array(rows.T, dtype=np.float32, order="C")
    values = vertices[:, 6]
    undefined = ~np.isfinite(values)
    if undefined.any():
        values[undefined] = UNDEFINED
    return vertices


def _fill(buffer: int, data: Float32Array | IndexArray) -> None:
    """Upload a whole buffer; what it is used for is decided where it is bound to draw."""
    GL.glBindBuffer(GL.GL_ARRAY_BUFFER, buffer)
    contents = np.ascontiguousarray(data)
    GL.glBufferData(GL.GL_ARRAY_BUFFER, contents.nbytes, contents, GL.GL_DYNAMIC_DRAW)


def _delete_buffers(names: list[int]) -> None:
    """Give buffers back."""
    if names:
        GL.glDeleteBuffers(len(names), np.array(names, dtype=np.uint32))
