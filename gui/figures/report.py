"""The report as a file: PDF pages or one page for a browser, from one content.

Both are made step by step, so that a window can show how far it has come and stop in between;
figures are drawn by the routines that draw them everywhere else.
"""

from __future__ import annotations

import html
from base64 import b64encode
from collections.abc import Callable, Generator, Iterator, Mapping
from dataclasses import dataclass, field, replace

from PySide6.QtCore import QRectF, QSizeF
from PySide6.QtGui import QPageSize, QPainter

from core.report.blocks import Figure, Paragraph, Report, Section, SignOff, Table
from core.report.captions import one_of
from core.state import BenchState
from gui.figures.drawing import Drawable, Look, draw_figure, drawable
from gui.figures.export import (
    VECTOR_DPI,
    FigureForm,
    PdfSteps,
    figure_bytes,
    text_scale,
)
from gui.figures.paper import (
    SIGN_OFF,
    Paper,
    lay_feet,
    lay_heading,
    lay_paragraph,
    lay_side_by_side,
    lay_sign_off,
    lay_title,
    mm,
    page_font,
    paragraph_height,
    text_paint,
    wrapped_height,
)
from gui.figures.paper_tables import kept_height, lay_table
from gui.stage.camera import Camera
from gui.stage.composition import Renderer
from gui.theme import LIGHT

_Row = Paragraph | Table | SignOff | list[Figure]
Steps = Generator[float, None, bytes]
"""Yields the fraction done, 0 to 1, between pieces of work; returns the file."""

PAPERS: dict[str, QPageSize.PageSizeId] = {
    "A4": QPageSize.PageSizeId.A4, "Letter": QPageSize.PageSizeId.Letter,
}
REPORT_FORMATS: dict[str, str] = {"pdf": "PDF pages", "html": "a page for a browser"}
_WIDE, _NARROW = (170.0, 92.0), (82.0, 80.0)  # mm
_TEXT_POINTS = 7.5
_DPI = 300.0


@dataclass(frozen=True, eq=False)
class Press:
    """What a report is made with.

    Attributes
    ----------
    state : BenchState
    renderer : Renderer
    cameras : mapping of side to Camera
    paper : str
        Key of `PAPERS`; a page for a browser has none.
    is_reproducible : bool
    """

    state: BenchState
    renderer: Renderer
    cameras: Mapping[str, Camera] = field(default_factory=dict)
    paper: str = "A4"
    is_reproducible: bool = False


def report_steps(report: Report, kind: str, press: Press) -> Steps:
    """Return the making of a report, not yet begun; `kind` is a key of `REPORT_FORMATS`."""
    one_of(kind, REPORT_FORMATS, "format of a report")
    one_of(press.paper, dict.fromkeys(PAPERS, ""), "paper")
    return _pdf_steps(report, press) if kind == "pdf" else _html_steps(report, press)


def run(steps: Steps, tell: Callable[[float], None] = lambda fraction: None) -> bytes:
    """Make a report in one go, telling how far it has come."""
    made = b""

    def whole() -> Iterator[float]:
        nonlocal made
        made = yield from steps

    for fraction in whole():
        tell(fraction)
    return made


# --- PDF ------------------------------------------------------------------------------------


def _pdf_steps(report: Report, press: Press) -> Steps:
    size = QPageSize(PAPERS[press.paper])
    points: QSizeF = size.size(QPageSize.Unit.Point)
    paper = Paper(*(side / 72.0 * VECTOR_DPI for side in (points.width(), points.height())))
    lay_title(paper, report.title, report.subtitle, report.made)
    for section in report.sections:
        _lay_section(paper, section, press)
    lay_feet(paper, report.running)
    total = sum(map(len, paper.pages))
    yield 0.0
    pdf = PdfSteps(size, f"{report.title}: {report.subtitle}", press.is_reproducible)
    try:
        done = 0
        for number, page in enumerate(paper.pages):
            if number:
                pdf.turn()
            for paint in page:
                pdf.painter.save()
                paint(pdf.painter)
                pdf.painter.restore()
                done += 1
                if done % 40 == 0 or isinstance(paint, _FigurePaint):
                    yield done / total
        return pdf.finish()
    finally:  # when the making is given up half-way
        pdf.stop()


def _lay_section(paper: Paper, section: Section, press: Press) -> None:
    rows = list(_rows_of(section))
    lay_heading(paper, section.title, _beginning(paper, rows))
    for row in rows:
        if isinstance(row, list):
            _lay_figures(paper, row, press)
        elif isinstance(row, Table):
            lay_table(paper, row)
        elif isinstance(row, SignOff):
            lay_sign_off(paper, row)
        else:
            lay_paragraph(paper, row)


def _beginning(paper: Paper, rows: list[_Row]) -> float:
    """Return the height of what has to stand right under a heading, past its sentences."""
    height = 0.0
    for row in rows:
        if isinstance(row, Paragraph):
            height += paragraph_height(paper, row)
            if height > paper.whole / 3:
                return height
        elif isinstance(row, Table):
            return height + kept_height(paper, row)
        elif isinstance(row, SignOff):
            return height + mm(SIGN_OFF)
        else:
            return height + sum(_figure_heights(row))
    return height


def _rows_of(section: Section) -> Iterator[_Row]:
    """Yield the blocks of a section, narrow figures in pairs."""
    waiting: list[Figure] = []
    for block in section.blocks:
        if waiting and not (isinstance(block, Figure) and _is_narrow(block)):
            yield waiting
            waiting = []
        if not isinstance(block, Figure):
            yield block
        elif not _is_narrow(block):
            yield [block]
        else:
            waiting.append(block)
            if len(waiting) == 2:
                yield waiting
                waiting = []
    if waiting:
        yield waiting


def _is_narrow(figure: Figure) -> bool:
    choice = figure.choice
    return choice.kind != "sweep" and not (choice.kind == "surface" and choice.sides == "AB")


def figure_size(figure: Figure) -> tuple[float, float]:
    """Return the width and height of a figure in a report, millimetres."""
    return _NARROW if _is_narrow(figure) else _WIDE


def _lay_figures(paper: Paper, figures: list[Figure], press: Press) -> None:
    """Lay one figure, or two side by side, with the captions under them."""
    font = page_font("small")
    widths = [mm(figure_size(figure)[0]) for figure in figures]
    height, below = _figure_heights(figures)
    paper.keep(height + below + mm(2.0))
    draws = [_FigurePaint(figure, press) for figure in figures]
    before = len(paper.pages[-1])
    places = lay_side_by_side(paper, widths, height, draws)
    paper.pages[-1][before:] = [
        replace(draw, rect=place) for draw, place in zip(draws, places, strict=True)]
    paper.y += mm(1.0)
    for figure, place in zip(figures, places, strict=True):
        rect = QRectF(place.left(), paper.y, place.width(), below + 1.0)
        paper.put(text_paint(rect, _numbered(figure), font, "secondary"))
    paper.y += below + mm(5.0)


def _figure_heights(figures: list[Figure]) -> tuple[float, float]:
    """Return the height of figures that stand beside each other, and of their captions."""
    font = page_font("small")
    height = mm(max(figure_size(figure)[1] for figure in figures))
    below = max(wrapped_height(font, _numbered(figure), mm(figure_size(figure)[0]))
                for figure in figures)
    return height, below


def _numbered(figure: Figure) -> str:
    return f"Figure {figure.number}. {figure.caption}"


@dataclass(frozen=True, eq=False)
class _FigurePaint:
    """Paints one figure of a report, computing it only then."""

    figure: Figure
    press: Press
    rect: QRectF = field(default_factory=QRectF)

    def __call__(self, painter: QPainter, rect: QRectF | None = None) -> None:
        """Paint into the rectangle that the figure was given."""
        press = self.press
        shown: Drawable = drawable(press.state, self.figure.choice)
        look = Look(LIGHT, "white", press.renderer, press.cameras, "picture",
                    _DPI / VECTOR_DPI, has_caption=False, is_captioned=True)
        form = FigureForm(text_pt=_TEXT_POINTS)
        draw_figure(painter, rect or self.rect, shown, look, text_scale(form, VECTOR_DPI))


# --- a page for a browser -------------------------------------------------------------------

_STYLE = """
:root { color-scheme: light; }
body { font-family: system-ui, sans-serif; font-size: 15px; line-height: 1.45; color: #23272C;
  background: #F4F2EE; margin: 0; }
main { max-width: 900px; margin: 0 auto; padding: 32px 40px 60px; background: #FFFFFF; }
h1 { font-size: 28px; margin: 0 0 4px; }
h2 { font-size: 18px; color: #0F6A8B; border-top: 1px solid #DAD6CE; padding-top: 10px;
  margin: 34px 0 8px; }
p { margin: 6px 0; } p.note, figcaption, .subtitle, caption, td.quiet { color: #6B7077; }
p.note, figcaption, table { font-size: 13px; }
p.good, p.doubt, p.alert { font-weight: 600; }
p.good::before { content: "\\25CF\\00A0\\00A0"; color: #3B7D3A; }
p.doubt::before { content: "\\25B2\\00A0\\00A0"; color: #A86A00; }
p.alert::before { content: "\\25A0\\00A0\\00A0"; color: #B3261E; }
p.bullet { padding-left: 1.2em; text-indent: -1.2em; }
p.bullet::before { content: "–\\00A0\\00A0"; }
.wide { overflow-x: auto; margin: 12px 0 16px; }
table { border-collapse: collapse; border-top: 1px solid #A3A19B;
  border-bottom: 1px solid #A3A19B; font-variant-numeric: tabular-nums; }
caption { text-align: left; font-weight: 600; color: #23272C; padding-bottom: 4px; }
th { border-bottom: 1px solid #DAD6CE; color: #6B7077; }
th, td { padding: 2px 9px; text-align: right; vertical-align: top; white-space: nowrap; }
th.words, td.words { text-align: left; white-space: normal; }
figure { margin: 18px 0; } figure img { width: 100%; height: auto; }
figure.narrow { display: inline-block; width: 48%; vertical-align: top; margin-right: 1%; }
.signing { display: flex; gap: 20px; margin-top: 46px; }
.signing div { flex: 1; border-top: 1px solid #A3A19B; color: #6B7077; font-size: 13px; }
footer { margin-top: 40px; color: #6B7077; font-size: 13px; }
@media print { body { background: #FFFFFF; } h2, figure, tr { break-inside: avoid; } }
"""


def _html_steps(report: Report, press: Press) -> Steps:
    blocks = [block for section in report.sections for block in section.blocks]
    total = max(sum(isinstance(block, Figure) for block in blocks), 1)
    parts = [_html_head(report)]
    done = 0
    for section in report.sections:
        parts.append(f'<section id="{section.key}"><h2>{html.escape(section.title)}</h2>')
        for block in section.blocks:
            if isinstance(block, Figure):
                yield done / total
                done += 1
                parts.append(_html_figure(block, press))
            elif isinstance(block, Table):
                parts.append(_html_table(block))
            elif isinstance(block, SignOff):
                lines = "".join(f"<div>{html.escape(role)}: name, date</div>"
                                for role in block.roles)
                parts.append(f'<div class="signing">{lines}</div>')
            else:
                parts.append(f'<p class="{block.role}">{html.escape(block.text)}</p>')
        parts.append("</section>")
    parts.append(f"<footer>{html.escape(report.running)}</footer></main></body></html>\n")
    yield 1.0
    return "\n".join(parts).encode("utf-8")


def _html_head(report: Report) -> str:
    title, subtitle = html.escape(report.title), html.escape(report.subtitle)
    made = f" · {html.escape(report.made)}" if report.made else ""
    return (
        f'<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
        f'<meta name="viewport" content="width=device-width">'
        f"<title>{title}: report</title><style>{_STYLE}</style></head>\n<body><main>"
        f'<h1>{title}</h1><p class="subtitle">{subtitle}{made}</p>')


def _html_table(table: Table) -> str:
    count = max(len(row) for row in (*table.rows, table.header))

    def cell(tag: str, column: int, text: str) -> str:
        is_words = column < table.words or column >= count - table.trailing_words
        names = ["words"] * is_words + ["quiet"] * (column == 0 and not table.header)
        kind = f' class="{" ".join(names)}"' if names else ""
        return f"<{tag}{kind}>{html.escape(text)}</{tag}>"

    def row(tag: str, texts: tuple[str, ...]) -> str:
        return f"<tr>{''.join(cell(tag, k, text) for k, text in enumerate(texts))}</tr>"

    caption = f"<caption>{html.escape(table.title)}</caption>" if table.title else ""
    head = f"<thead>{row('th', table.header)}</thead>" if table.header else ""
    body = "\n".join(row("td", texts) for texts in table.rows)
    note = f'<p class="note">{html.escape(table.note)}</p>' if table.note else ""
    return f'<div class="wide"><table>{caption}{head}<tbody>{body}</tbody></table>{note}</div>'


def _html_figure(figure: Figure, press: Press) -> str:
    """Return a figure as an SVG picture inside the page, its caption as text."""
    width, height = figure_size(figure)
    form = FigureForm(width, height, _DPI, _TEXT_POINTS, has_caption=False, is_captioned=True)
    data = figure_bytes(drawable(press.state, figure.choice), "svg", form, press.renderer,
                        press.cameras)
    words = html.escape(_numbered(figure))
    kind = ' class="narrow"' if _is_narrow(figure) else ""
    source = f"data:image/svg+xml;base64,{b64encode(data).decode()}"
    return (f'<figure{kind}><img alt="{html.escape(figure.choice.title)}" src="{source}">'
            f"<figcaption>{words}</figcaption></figure>")
