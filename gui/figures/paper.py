"""Pages filled from the top: text, tables and figures laid out first and painted later.

Everything is measured in units of 1/1200 inch, the resolution of the PDF. Laying out is quick;
what is slow, the painting of figures, waits in the pages until they are drawn one by one.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QFont, QFontInfo, QFontMetricsF, QPainter, QPen
from PySide6.QtWidgets import QApplication

from core.report.blocks import Paragraph, SignOff
from gui.figures.export import MM, VECTOR_DPI
from gui.plots.lettering import lettering
from gui.theme import LIGHT

Paint = Callable[[QPainter], None]
_SIDE, _TOP, _BOTTOM = 20.0, 17.0, 21.0  # margins, mm
SIGN_OFF = 17.0  # mm, the height of the lines for signing
_INDENT = 5.0  # mm, of the text beside a mark
_BODY_POINTS = 9.0
_SHAPES = {"good": "●", "doubt": "▲", "alert": "■"}
_WRAP = int(Qt.TextFlag.TextWordWrap)


def mm(length: float) -> float:
    """Return millimetres in units of the page."""
    return length / MM * VECTOR_DPI


def scale() -> float:
    """Return how much larger the text of a page is than on the screen, in its units."""
    return _BODY_POINTS / 72.0 * VECTOR_DPI / QFontInfo(QApplication.font()).pixelSize()


def page_font(size: str = "body", bold: bool = False, factor: float = 1.0) -> QFont:
    """Return a font of the report."""
    return lettering(LIGHT, size, factor * scale(), bold)


def line_of(font: QFont) -> float:
    """Return the height of a line."""
    return QFontMetricsF(font).height()


def wrapped_height(font: QFont, text: str, width: float) -> float:
    """Return the height of a text wrapped to a width."""
    room = QRectF(0.0, 0.0, max(width, 1.0), 1e9)
    return QFontMetricsF(font).boundingRect(room, _WRAP, text).height()


@dataclass(eq=False)
class Paper:
    """Pages in the making.

    Attributes
    ----------
    width, height : float
        Of a page.
    y : float
        Where the next thing goes, from the top of the page.
    pages : list of lists of callables
        What paints each page.
    """

    width: float
    height: float
    y: float = field(init=False)
    pages: list[list[Paint]] = field(init=False)

    def __post_init__(self) -> None:
        """Begin with one empty page."""
        self.pages = [[]]
        self.y = mm(_TOP)

    @property
    def left(self) -> float:
        """The left edge of the text."""
        return mm(_SIDE)

    @property
    def room(self) -> float:
        """The width of the text."""
        return self.width - 2 * mm(_SIDE)

    @property
    def whole(self) -> float:
        """The height of the text on a page."""
        return self.height - mm(_BOTTOM) - mm(_TOP)

    @property
    def rest(self) -> float:
        """What is left of the page below `y`."""
        return self.height - mm(_BOTTOM) - self.y

    def turn(self) -> None:
        """Go on at the top of a new page."""
        self.pages.append([])
        self.y = mm(_TOP)

    def keep(self, height: float) -> bool:
        """Go to a new page unless a height is left on this one; return whether it did."""
        if height <= self.rest or self.y <= mm(_TOP):
            return False
        self.turn()
        return True

    def put(self, paint: Paint) -> None:
        """Let something be painted on the present page."""
        self.pages[-1].append(paint)

    def skip(self, millimetres: float) -> None:
        """Leave some room, unless at the top of a page."""
        if self.y > mm(_TOP):
            self.y += mm(millimetres)


def text_paint(
    rect: QRectF, text: str, font: QFont, role: str = "ink", flags: int = _WRAP
) -> Paint:
    """Return what paints a text, wrapped into a rectangle."""

    def paint(painter: QPainter) -> None:
        painter.setFont(font)
        painter.setPen(LIGHT.colour(role))
        painter.drawText(rect, flags, text)

    return paint


def rule_paint(x: float, y: float, width: float, role: str, points: float) -> Paint:
    """Return what paints a level line."""

    def paint(painter: QPainter) -> None:
        painter.setPen(QPen(LIGHT.colour(role), points / 72.0 * VECTOR_DPI))
        painter.drawLine(QPointF(x, y), QPointF(x + width, y))

    return paint


def lay_text(
    paper: Paper, text: str, font: QFont, role: str = "ink", indent: float = 0.0
) -> None:
    """Lay a piece of running text, whole, and move below it."""
    width = paper.room - indent
    height = wrapped_height(font, text, width)
    paper.keep(height)
    rect = QRectF(paper.left + indent, paper.y, width, height + 1.0)
    paper.put(text_paint(rect, text, font, role))
    paper.y += height


def lay_heading(paper: Paper, text: str, below: float = 0.0) -> None:
    """Lay the title of a section on the page that has room for what comes first below it."""
    font = page_font("title", bold=True)
    paper.skip(6.0)
    height = mm(2.8) + wrapped_height(font, text, paper.room)
    paper.keep(min(max(height + below, mm(28.0)), paper.whole))
    paper.put(rule_paint(paper.left, paper.y, paper.room, "hairline", 0.8))
    paper.y += mm(1.6)
    lay_text(paper, text, font, "a")
    paper.y += mm(1.2)


def lay_title(paper: Paper, title: str, subtitle: str, made: str) -> None:
    """Lay the head of the report."""
    lay_text(paper, title, page_font("title", bold=True, factor=1.6))
    paper.y += mm(1.0)
    words = f"{subtitle}  ·  {made}" if made else subtitle
    lay_text(paper, words, page_font("body"), "secondary")
    paper.y += mm(1.5)


def lay_paragraph(paper: Paper, paragraph: Paragraph) -> None:
    """Lay a paragraph by its role."""
    role = paragraph.role
    if role in _SHAPES:
        _lay_marked(paper, paragraph.text, _SHAPES[role], role, bold=True)
    elif role == "bullet":
        _lay_marked(paper, paragraph.text, "–", "secondary", bold=False)
    else:
        size, colour = ("small", "secondary") if role == "note" else ("body", "ink")
        lay_text(paper, paragraph.text, page_font(size, bold=role == "lead"), colour)
    paper.y += mm(1.6)


def paragraph_height(paper: Paper, paragraph: Paragraph) -> float:
    """Return the height that `lay_paragraph` takes."""
    role = paragraph.role
    size = "small" if role == "note" else "body"
    font = page_font(size, bold=role == "lead" or role in _SHAPES)
    indent = mm(_INDENT) if role in _SHAPES or role == "bullet" else 0.0
    return wrapped_height(font, paragraph.text, paper.room - indent) + mm(1.6)


def _lay_marked(paper: Paper, text: str, mark: str, role: str, bold: bool) -> None:
    """Lay a text with a mark before it."""
    font = page_font("body", bold)
    indent = mm(_INDENT)
    height = wrapped_height(font, text, paper.room - indent)
    paper.keep(height)
    place = QRectF(paper.left, paper.y, indent, line_of(font) + 1.0)
    paper.put(text_paint(place, mark, page_font("body", bold=True), role, 0))
    lay_text(paper, text, font, indent=indent)


def lay_sign_off(paper: Paper, block: SignOff) -> None:
    """Lay the lines on which people sign."""
    font = page_font("small")
    height = mm(SIGN_OFF)
    paper.skip(2.0)
    paper.keep(height)
    width = paper.room / len(block.roles)
    gap = mm(5.0)
    for number, role in enumerate(block.roles):
        x = paper.left + number * width
        paper.put(rule_paint(x, paper.y + mm(11.0), width - gap, "faint", 0.6))
        place = QRectF(x, paper.y + mm(11.8), width - gap, line_of(font) + 1.0)
        paper.put(text_paint(place, f"{role}: name, date", font, "secondary", 0))
    paper.y += height


def lay_feet(paper: Paper, words: str) -> None:
    """Write running words and numbers at the foot of every page."""
    font = page_font("small")
    y = paper.height - mm(14.0)
    count = len(paper.pages)
    right = int(Qt.AlignmentFlag.AlignRight)
    for number, page in enumerate(paper.pages, start=1):
        page.append(rule_paint(paper.left, y, paper.room, "hairline", 0.6))
        rect = QRectF(paper.left, y + mm(1.2), paper.room, line_of(font) + 1.0)
        page.append(text_paint(rect, words, font, "secondary", 0))
        page.append(text_paint(rect, f"{number} / {count}", font, "secondary", right))


def lay_side_by_side(
    paper: Paper, widths: Sequence[float], height: float,
    paint: Sequence[Callable[[QPainter, QRectF], None]],
) -> list[QRectF]:
    """Keep room for things of one height beside each other; return where they went."""
    gap = 0.0 if len(widths) < 2 else (paper.room - sum(widths)) / (len(widths) - 1)
    x, places = paper.left, []
    for width, draw in zip(widths, paint, strict=True):
        rect = QRectF(x, paper.y, width, height)
        paper.put(_placed(draw, rect))
        places.append(rect)
        x += width + gap
    paper.y += height
    return places


def _placed(draw: Callable[[QPainter, QRectF], None], rect: QRectF) -> Paint:
    def paint(painter: QPainter) -> None:
        draw(painter, rect)

    return paint
