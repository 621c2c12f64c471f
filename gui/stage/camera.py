"""The camera of the stage: where the viewer stands, and what that does to points and pixels.

The world is the part's axes, Z up, in units of `PaneView.radius`: a surface of that radius
reaches the distance 1 from the origin. Pixels count from the upper left corner of the scene,
x to the right and y down; the middle of the first pixel is (0.5, 0.5).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from core.arrays import FloatArray

Size = tuple[int, int]
Tile = tuple[int, int, int, int]  # x, y, width, height in pixels of the whole picture

DISTANCE = 5.2  # of the eye from the origin: far enough for a calm perspective
HALF_EXTENT = 1.30  # what half the shorter side shows at the origin: axes and their letters
NEAR, FAR = 1.0, 2.0 * DISTANCE
LEAST_ZOOM, GREATEST_ZOOM = 0.4, 12.0
DEGREES_PER_PIXEL = 0.45


@dataclass(frozen=True)
class Camera:
    """Where the viewer stands; the eye always looks at the origin.

    Attributes
    ----------
    azimuth : float
        Degrees of the eye about part Z, from part X towards part Y. At the usual -55° X
        points to the right and forward, Y to the right and back.
    elevation : float
        Degrees of the eye above the plane of X and Y, -90 to 90.
    zoom : float
        Magnification; 1 shows the whole surface with its axes.
    """

    azimuth: float = -55.0
    elevation: float = 22.0
    zoom: float = 1.0

    def basis(self) -> FloatArray:
        """Return the rows right, up and towards the viewer, (3, 3), part axes."""
        a, e = math.radians(self.azimuth), math.radians(self.elevation)
        ca, sa, ce, se = math.cos(a), math.sin(a), math.cos(e), math.sin(e)
        return np.array([[-sa, ca, 0.0], [-se * ca, -se * sa, ce], [ce * ca, ce * sa, se]])

    def eye(self) -> FloatArray:
        """Return where the eye is, (3,), part axes."""
        position: FloatArray = DISTANCE * self.basis()[2]
        return position

    def half_extents(self, size: Size) -> tuple[float, float]:
        """Return half the width and half the height shown at the distance 1 from the eye."""
        width, height = size
        shorter = HALF_EXTENT / (DISTANCE * self.zoom)
        return shorter * width / min(width, height), shorter * height / min(width, height)

    def pixels_per_unit(self, size: Size) -> float:
        """Return how many pixels a unit length across the view takes at the origin."""
        return min(size) * self.zoom / (2.0 * HALF_EXTENT)

    def matrix(self, size: Size, tile: Tile | None = None) -> FloatArray:
        """Return the (4, 4) matrix from part axes to clip coordinates, y up.

        Parameters
        ----------
        size : (int, int)
            Width and height of the whole picture.
        tile : (int, int, int, int) or None
            Only this part of the picture fills the clip volume; the rays stay the same.
        """
        half_width, half_height = self.half_extents(size)
        view = np.eye(4)
        view[:3, :3] = self.basis()
        view[2, 3] = -DISTANCE
        lens = np.zeros((4, 4))
        lens[0, 0], lens[1, 1] = 1.0 / half_width, 1.0 / half_height
        lens[2, 2] = -(FAR + NEAR) / (FAR - NEAR)
        lens[2, 3] = -2.0 * FAR * NEAR / (FAR - NEAR)
        lens[3, 2] = -1.0
        return _window(size, tile) @ lens @ view

    def project(self, points: FloatArray, size: Size) -> tuple[FloatArray, FloatArray]:
        """Return the pixels (2, N) and the depths (N,) from the eye of points (3, N)."""
        seen = self.basis() @ np.asarray(points, dtype=np.float64).reshape(3, -1)
        depth = DISTANCE - seen[2]
        half_width, half_height = self.half_extents(size)
        with np.errstate(invalid="ignore", divide="ignore"):
            x = (0.5 + 0.5 * seen[0] / (half_width * depth)) * size[0]
            y = (0.5 - 0.5 * seen[1] / (half_height * depth)) * size[1]
        return np.stack([x, y]), depth

    def ray(self, pixel: tuple[float, float], size: Size) -> tuple[FloatArray, FloatArray]:
        """Return the eye (3,) and the unit direction (3,) in which a pixel looks."""
        half_width, half_height = self.half_extents(size)
        right, up, towards = self.basis()
        across = (2.0 * pixel[0] / size[0] - 1.0) * half_width
        upwards = (1.0 - 2.0 * pixel[1] / size[1]) * half_height
        direction = across * right + upwards * up - towards
        return self.eye(), direction / np.linalg.norm(direction)

    def turned(self, dx: float, dy: float) -> Camera:
        """Return the camera after a drag by pixels: the surface follows the pointer."""
        azimuth = (self.azimuth - dx * DEGREES_PER_PIXEL + 180.0) % 360.0 - 180.0
        elevation = min(max(self.elevation + dy * DEGREES_PER_PIXEL, -90.0), 90.0)
        return replace(self, azimuth=azimuth, elevation=elevation)

    def zoomed(self, factor: float) -> Camera:
        """Return the camera with its magnification multiplied, within limits."""
        return replace(self, zoom=min(max(self.zoom * factor, LEAST_ZOOM), GREATEST_ZOOM))

    def looking_along(self, axis: FloatArray | tuple[float, float, float]) -> Camera:
        """Return the camera with the eye on the tip of an axis, Z (or, along Z, Y) upright."""
        x, y, z = np.asarray(axis, dtype=float) / np.linalg.norm(axis)
        level = math.hypot(x, y)
        azimuth = math.degrees(math.atan2(y, x)) if level > 1e-9 else -90.0
        return replace(self, azimuth=azimuth, elevation=math.degrees(math.atan2(z, level)))

    def nearest_axis(self) -> tuple[float, float, float]:
        """Return the part axis, or minus a part axis, whose tip is nearest to the eye."""
        towards = self.basis()[2]
        index = int(np.argmax(np.abs(towards)))
        axis = [0.0, 0.0, 0.0]
        axis[index] = math.copysign(1.0, towards[index])
        return axis[0], axis[1], axis[2]


def _window(size: Size, tile: Tile | None) -> FloatArray:
    """Return the clip-space matrix that spreads one tile of a picture over the whole."""
    window = np.eye(4)
    if tile is None:
        return window
    width, height = size
    x, y, tile_width, tile_height = tile
    window[0, 0], window[1, 1] = width / tile_width, height / tile_height
    window[0, 3] = (width - 2.0 * x) / tile_width - 1.0
    window[1, 3] = 1.0 - (height - 2.0 * y) / tile_height
    return window
