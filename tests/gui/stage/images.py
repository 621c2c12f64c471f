"""Looking at pictures as numbers."""

import numpy as np
from PySide6.QtGui import QImage


def rgba(image):
    """The pixels of a picture, (H, W, 4), straight colours 0 to 255."""
    plain = image.convertToFormat(QImage.Format.Format_RGBA8888)
    pixels = np.frombuffer(plain.constBits(), np.uint8)
    padded = pixels.reshape(plain.height(), plain.bytesPerLine() // 4, 4)
    return padded[:, : plain.width()].astype(int)


def covered(image, ground):
    """Which pixels are clearly not the ground."""
    colour = np.array([ground.red(), ground.green(), ground.blue()])
    return np.abs(rgba(image)[..., :3] - colour).max(axis=2) > 12


def centroid(mask):
    """Mean column and row of the true pixels."""
    rows, columns = np.nonzero(mask)
    return columns.mean() + 0.5, rows.mean() + 0.5
