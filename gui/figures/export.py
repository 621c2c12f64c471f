"""Figures as files: PNG, SVG and PDF of any size, made in memory and written whole."""

from __future__ import annotations

import re
import uuid
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import QBuffer, QIODevice, QMarginsF, QRectF, QSize, QSizeF, QUuid
from PySide6.QtGui import (
    QFontInfo,
    QImage,
    QImageWriter,
    QPageSize,
    QPainter,
    QPdfWriter,
)
from PySide6.QtSvg import QSvgGenerator
from PySide6.QtWidgets import QApplication

from core.errors import InputError
from core.files.origin import PROGRAM
from core.files.text import write_bytes
from core.report.captions import one_of
from gui.figures.drawing import Drawable, Look, Surface, draw_figure
from gui.stage.camera import Camera
from gui.stage.composition import Ground, Renderer
from gui.stage.offscreen import USUAL_SIDE
from gui.theme import LIGHT, THEMES, Theme

MM = 25.4  # millimetres an inch
MOST_PIXELS = 20_000  # of a side
MOST_IN_ALL = 200_000_000  # of a picture
VECTOR_DPI = 1200  # units of SVG and PDF to the inch
LEAST_DPI, MOST_DPI = 30, 2400
LEAST_TEXT, MOST_TEXT = 4.0, 40.0  # points
LEAST_SIDE, LEAST_PIXELS = 15.0, 50  # millimetres, with text in points; else pixels
_LARGE = 4_000_000  # pixels: from here on packing takes longer than it is worth
_QUICKLY = 60  # PNG is always lossless; this only says how hard to pack
FORMATS: dict[str, str] = {
    "png": "PNG picture", "svg": "SVG vectors", "pdf": "PDF page",
}
GROUNDS: dict[str, str] = {
    "white": "white", "theme": "as the window", "transparent": "transparent",
}
COLUMN_WIDTHS: dict[str, float] = {
    "one column, 85 mm": 85.0, "one and a half, 114 mm": 114.0, "two columns, 174 mm": 174.0,
    "slide, 254 mm": 254.0,
}
"""Widths that journals and slides have room for, millimetres."""


@dataclass(frozen=True)
class FigureForm:
    """The form of a figure's file.

    Attributes
    ----------
    width_mm, height_mm : float
    dpi : float
        Dots per inch of a PNG, and of a shaded surface inside SVG and PDF.
    text_pt : float
        Height of ordinary text in points; 0 lets text grow with the figure.
    ground : str
        Key of `GROUNDS`.
    theme : str
        "light" or "night".
    has_caption, is_captioned : bool
        Write the caption; or leave it, and what it says, to somebody else.
    all_vectors : bool
        In SVG and PDF draw surfaces as vectors too, from the coarse mesh.
    is_reproducible : bool
        No date and no chance in the file.
    """

    width_mm: float = 85.0
    height_mm: float = 85.0
    dpi: float = 300.0
    text_pt: float = 8.0
    ground: str = "white"
    theme: str = "light"
    has_caption: bool = True
    is_captioned: bool = False
    all_vectors: bool = False
    is_reproducible: bool = False

    @property
    def pixels(self) -> tuple[int, int]:
        """Width and height of a PNG in pixels."""
        return round(self.width_mm / MM * self.dpi), round(self.height_mm / MM * self.dpi)

    @property
    def look_theme(self) -> Theme:
        """The theme by its name."""
        return THEMES.get(self.theme, LIGHT)


def check_form(form: FigureForm) -> None:
    """Refuse a size that no file can have.

    Raises
    ------
    InputError
        Naming the limit.
    """
    one_of(form.ground, GROUNDS, "ground")
    if not LEAST_DPI <= form.dpi <= MOST_DPI:
        raise InputError(f"A resolution of {form.dpi:g} dpi is out of reach.",
                         f"From {LEAST_DPI} to {MOST_DPI} dpi is accepted.", "dpi")
    if form.text_pt > 0 and not LEAST_TEXT <= form.text_pt <= MOST_TEXT:
        raise InputError(f"Text of {form.text_pt:g} points is out of reach.",
                         f"From {LEAST_TEXT:g} to {MOST_TEXT:g} points are accepted.", "text")
    width, height = form.pixels
    if form.text_pt > 0 and min(form.width_mm, form.height_mm) < LEAST_SIDE:
        raise InputError(
            f"A figure of {form.width_mm:g} by {form.height_mm:g} mm is too small to read.",
            f"Both sides must have {LEAST_SIDE:g} mm at least.", "size")
    if min(width, height) < LEAST_PIXELS:
        raise InputError(f"A figure of {width} by {height} pixels is too small to read.",
                         f"Both sides must have {LEAST_PIXELS} pixels at least.", "size")
    if max(width, height) > MOST_PIXELS or width * height > MOST_IN_ALL:
        raise InputError(
            f"A figure of {width:,} by {height:,} pixels is too large.",
            f"Up to {MOST_PIXELS:,} pixels a side and {MOST_IN_ALL // 1_000_000} million in "
            "all are accepted.", "size")


def text_scale(form: FigureForm, dpi: float) -> float:
    """Return how much larger text and strokes are than on the screen, at a resolution."""
    if form.text_pt > 0:
        return form.text_pt / 72.0 * dpi / QFontInfo(QApplication.font()).pixelSize()
    return min(form.width_mm, form.height_mm) / MM * dpi / USUAL_SIDE


def figure_bytes(
    figure: Drawable,
    kind: str,
    form: FigureForm,
    renderer: Renderer,
    cameras: Mapping[str, Camera] | None = None,
) -> bytes:
    """Return a figure as the whole content of a file.

    Parameters
    ----------
    figure : Drawable
    kind : str
        Key of `FORMATS`.
    form : FigureForm
    renderer : Renderer
    cameras : mapping of side to Camera, optional

    Raises
    ------
    InputError
        For an unknown format, or a size out of reach.
    """
    check_form(form)
    one_of(kind, FORMATS, "format")
    surface: Surface = "pixels" if kind == "png" else (
        "vectors" if form.all_vectors else "picture")
    ground: Ground = form.ground  # type: ignore[assignment]
    dots = form.dpi / VECTOR_DPI
    look = Look(form.look_theme, ground, renderer, cameras or {}, surface, dots,
                form.has_caption, form.is_captioned)
    return _WRITERS[kind](figure, look, form)


def save_figure(path: Path, data: bytes) -> None:
    """Write the file of a figure; an old one stays whole until the new one is complete."""
    write_bytes(path, data)


def format_of(path: Path) -> str:
    """Return the format that a file name asks for.

    Raises
    ------
    InputError
        When its suffix is none of ours.
    """
    suffix = path.suffix.lower().lstrip(".")
    if suffix in FORMATS:
        return suffix
    said = f"“{path.suffix}” is" if path.suffix else "No suffix is"
    raise InputError(f"{said} no format of a figure.",
                     f"A name ending in {', '.join('.' + key for key in FORMATS)} is wanted.",
                     path.name)


# --- one writer a format --------------------------------------------------------------------


def _png(figure: Drawable, look: Look, form: FigureForm) -> bytes:
    width, height = form.pixels
    image = QImage(width, height, QImage.Format.Format_ARGB32_Premultiplied if (
        look.ground == "transparent") else QImage.Format.Format_RGB32)
    if image.isNull():
        raise InputError(f"There is not enough memory for {width:,} by {height:,} pixels.",
                         "Choose a smaller size.", "size")
    image.fill(0)
    painter = QPainter(image)
    draw_figure(painter, QRectF(0, 0, width, height), figure, look, text_scale(form, form.dpi))
    painter.end()
    return picture_bytes(image, form.dpi, figure.caption)


def picture_bytes(image: QImage, dpi: float, words: str) -> bytes:
    """Return a picture as a PNG file that states its resolution, caption and program."""
    image.setDotsPerMeterX(round(dpi / MM * 1000))
    image.setDotsPerMeterY(round(dpi / MM * 1000))
    image.setText("Description", words)
    image.setText("Software", PROGRAM)
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    writer = QImageWriter(buffer, b"png")
    if image.width() * image.height() > _LARGE:
        writer.setQuality(_QUICKLY)
    if not writer.write(image):
        raise InputError("The picture could not be made; memory may be short.",
                         "Choose a smaller size.", "size")
    return bytes(buffer.data().data())


def _svg(figure: Drawable, look: Look, form: FigureForm) -> bytes:
    width, height = _vector_size(form)
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    generator = QSvgGenerator()
    generator.setOutputDevice(buffer)
    generator.setResolution(VECTOR_DPI)
    generator.setSize(QSize(round(width), round(height)))
    generator.setViewBox(QRectF(0, 0, round(width), round(height)))
    generator.setTitle(figure.choice.title)
    generator.setDescription(figure.caption)
    painter = QPainter(generator)
    draw_figure(painter, QRectF(0, 0, round(width), round(height)), figure, look,
                text_scale(form, VECTOR_DPI))
    painter.end()
    return _named_family(bytes(buffer.data().data()))


def _named_family(svg: bytes) -> bytes:
    """Return the SVG with the family that was measured, and a fallback that browsers know."""
    family = QFontInfo(QApplication.font()).family()
    named = f'font-family="{family}, sans-serif"'.encode()
    return re.sub(rb'font-family="[^"]*"', named, svg)


def _pdf(figure: Drawable, look: Look, form: FigureForm) -> bytes:
    width, height = _vector_size(form)
    page = QPageSize(QSizeF(form.width_mm, form.height_mm), QPageSize.Unit.Millimeter, "",
                     QPageSize.SizeMatchPolicy.ExactMatch)

    pdf = PdfSteps(page, figure.choice.title, form.is_reproducible)
    draw_figure(pdf.painter, QRectF(0, 0, width, height), figure, look,
                text_scale(form, VECTOR_DPI))
    return pdf.finish()


class PdfSteps:
    """A PDF file in the making, in memory; its painter works in units of 1/1200 inch."""

    def __init__(self, page: QPageSize, title: str, is_reproducible: bool = False) -> None:
        self._buffer = QBuffer()
        self._buffer.open(QIODevice.OpenModeFlag.WriteOnly)
        self._is_reproducible = is_reproducible
        self._writer = QPdfWriter(self._buffer)
        self._writer.setResolution(VECTOR_DPI)
        self._writer.setPageSize(page)
        self._writer.setPageMargins(QMarginsF(0, 0, 0, 0))
        self._writer.setTitle(title)
        self._writer.setCreator(PROGRAM)
        if is_reproducible:
            name = uuid.uuid5(uuid.NAMESPACE_OID, title)
            self._writer.setDocumentId(QUuid(str(name)))
        self.painter = QPainter(self._writer)
        self.painter.setRenderHint(QPainter.RenderHint.LosslessImageRendering)

    def turn(self) -> None:
        """Go on on a new page."""
        self._writer.newPage()

    def stop(self) -> None:
        """Leave the file; nothing can be drawn after."""
        if self.painter.isActive():
            self.painter.end()

    def finish(self) -> bytes:
        """Return the whole file; nothing can be drawn after."""
        self.painter.end()
        data = bytes(self._buffer.data().data())
        return undated(data) if self._is_reproducible else data


_PDF_DATE = re.compile(rb"(/(?:CreationDate|ModDate) \(D:)\d{14}[^)]*(?=\))")
_XMP_DATE = re.compile(rb"(Date=\")\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d")


def undated(pdf: bytes) -> bytes:
    """Return a PDF with its dates set to the start of 2000; no byte moves."""
    pdf = _PDF_DATE.sub(_first_of_2000, pdf)
    return _XMP_DATE.sub(rb"\g<1>2000-01-01T00:00:00", pdf)


def _first_of_2000(date: re.Match[bytes]) -> bytes:
    """Return a date of a PDF as long as it was, whatever zone it was given in."""
    start, whole = date[1], date[0]
    return (start + b"20000101000000Z00'00'")[: len(whole)].ljust(len(whole))


def _vector_size(form: FigureForm) -> tuple[float, float]:
    return form.width_mm / MM * VECTOR_DPI, form.height_mm / MM * VECTOR_DPI


_WRITERS: dict[str, Callable[[Drawable, Look, FigureForm], bytes]] = {
    "png": _png, "svg": _svg, "pdf": _pdf,
}
