"""Drawing into pictures and files, and looking for colours, for the tests of the plots."""

from xml.etree import ElementTree as ET

import numpy as np
from PySide6.QtCore import QMarginsF, QRect, QRectF, QSize, QSizeF
from PySide6.QtGui import QColor, QImage, QPageSize, QPainter, QPdfWriter
from PySide6.QtSvg import QSvgGenerator

from gui.theme import LIGHT


def draw_image(draw, view, size=(520, 400), theme=LIGHT, **options):
    """Return RGB pixels, shape (H, W, 3), of a drawing on the panel's ground."""
    image = QImage(*size, QImage.Format.Format_RGB32)
    image.fill(theme.colour("panel"))
    painter = QPainter(image)
    draw(painter, QRectF(0, 0, *size), view, theme, **options)
    painter.end()
    return pixels_of(image)


def pixels_of(image):
    """Return RGB pixels, shape (H, W, 3), of a QImage."""
    image = image.convertToFormat(QImage.Format.Format_RGB32)
    raw = np.frombuffer(image.constBits(), np.uint8).reshape(image.height(), image.width(), 4)
    return raw[..., 2::-1].astype(int)


def near(pixels, colour, tolerance=40):
    """Return where pixels have about a colour, shape (H, W)."""
    wanted = QColor(colour)
    rgb = np.array([wanted.red(), wanted.green(), wanted.blue()])
    return np.abs(pixels - rgb).max(axis=-1) <= tolerance


def draw_svg(draw, view, path, size=(520, 400), theme=LIGHT, **options):
    """Return the text of an SVG of a drawing."""
    generator = QSvgGenerator()
    generator.setFileName(str(path))
    generator.setSize(QSize(*size))
    generator.setViewBox(QRect(0, 0, *size))
    painter = QPainter(generator)
    draw(painter, QRectF(0, 0, *size), view, theme, **options)
    painter.end()
    return path.read_text(encoding="utf-8")


def draw_pdf(draw, view, path, theme=LIGHT, width_mm=90.0, resolution=1200, **options):
    """Return the bytes of a square PDF of a drawing, laid out as on 500 pixels."""
    writer = QPdfWriter(str(path))
    writer.setPageSize(QPageSize(QSizeF(width_mm, width_mm), QPageSize.Unit.Millimeter))
    writer.setPageMargins(QMarginsF(0, 0, 0, 0))
    writer.setResolution(resolution)
    painter = QPainter(writer)
    side = float(writer.width())
    draw(painter, QRectF(0, 0, side, side), view, theme, scale=side / 500.0, **options)
    painter.end()
    return path.read_bytes()


def svg_words(text):
    """Return the set of all texts that an SVG writes."""
    return {"".join(node.itertext()).strip() for node in ET.fromstring(text).iter()
            if node.tag.endswith("text")}  # fmt: skip
