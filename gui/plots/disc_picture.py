"""A picture of values inside a disc, smooth and with a soft edge, as a QImage."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
import numpy.typing as npt
from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QBrush, QImage, QPainter

from core.arrays import BoolArray, FloatArray, IntArray
from gui.theme import colours_of
from gui.viewdata import HemisphereView
from gui.widgets.colour_bar import table_position

_INWARDS = 3.0  # half pixels: where a pixel beyond the rim takes its colour from


@lru_cache(maxsize=3)  # enough for the screen and an export; each may be 16 MB
def disc_picture(view: HemisphereView, pixels: int) -> QImage:
    """Return a view's picture as a disc that fills a square, transparent where undefined."""
    small = _image(_rgba(view))
    smooth = small.scaled(
        QSize(pixels, pixels),
        Qt.AspectRatioMode.IgnoreAspectRatio,
        Qt.TransformationMode.SmoothTransformation,
    )
    disc = QImage(pixels, pixels, QImage.Format.Format_ARGB32_Premultiplied)
    disc.fill(Qt.GlobalColor.transparent)
    painter = QPainter(disc)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QBrush(smooth))
    painter.drawEllipse(QRectF(0.0, 0.0, pixels, pixels))
    painter.end()
    return disc


def undefined(picture: FloatArray) -> BoolArray:
    """Return where a picture has no value although it lies inside the disc, shape (H, W)."""
    inside: BoolArray = _radius(*picture.shape) <= 1.0 - _INWARDS / min(picture.shape)
    return inside & np.isnan(picture)


def value_in(picture: FloatArray, x: float, y: float) -> float:
    """Return the value of the pixel at a point of the disc, y upwards; NaN outside."""
    height, width = picture.shape
    row, column = int((1.0 - y) / 2.0 * height), int((x + 1.0) / 2.0 * width)
    inside = x * x + y * y <= 1.0 and 0 <= row < height and 0 <= column < width
    return float(picture[row, column]) if inside else float("nan")


def _rgba(view: HemisphereView) -> npt.NDArray[np.uint8]:
    """Return the colours of the picture, continued a little beyond the rim, (H, W, 4)."""
    rows, columns, beyond = _edge(*view.picture.shape)
    filled = view.picture.copy()
    missing = beyond & np.isnan(filled)
    filled[missing] = view.picture[rows[missing], columns[missing]]
    return colours_of(table_position(view.scale, filled), 0.0, 1.0, view.scale.diverging)


def _image(rgba: npt.NDArray[np.uint8]) -> QImage:
    """Return colours as an image of its own memory."""
    height, width = rgba.shape[:2]
    data = np.ascontiguousarray(rgba)
    image = QImage(data.data, width, height, 4 * width, QImage.Format.Format_RGBA8888)
    return image.convertToFormat(QImage.Format.Format_ARGB32_Premultiplied)


def _centres(height: int, width: int) -> tuple[FloatArray, FloatArray]:
    """Return x and y of the pixels' centres, each (H, W): the square of the disc, y upwards."""
    x = (2.0 * np.arange(width) + 1.0) / width - 1.0
    y = 1.0 - (2.0 * np.arange(height) + 1.0) / height
    across, up = np.meshgrid(x, y)
    return across, up


@lru_cache(maxsize=4)
def _radius(height: int, width: int) -> FloatArray:
    """Return the distance of each pixel's centre from the middle, (H, W)."""
    x, y = _centres(height, width)
    return np.asarray(np.hypot(x, y), dtype=np.float64)


@lru_cache(maxsize=4)
def _edge(height: int, width: int) -> tuple[IntArray, IntArray, BoolArray]:
    """Return for each pixel near or beyond the rim the pixel inside that it takes after.

    Without it the smooth enlargement would mix the colours of the rim with nothing.
    """
    x, y = _centres(height, width)
    radius = np.maximum(_radius(height, width), 1e-9)
    inwards = (1.0 - _INWARDS / min(height, width)) / radius
    rows = np.clip(((1.0 - y * inwards) / 2.0 * height).astype(np.intp), 0, height - 1)
    columns = np.clip(((x * inwards + 1.0) / 2.0 * width).astype(np.intp), 0, width - 1)
    return rows, columns, radius > 1.0 - _INWARDS / min(height, width)
