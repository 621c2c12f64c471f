"""Reports as files, read back: words, numbers, pages, figures."""

import base64
import re
from dataclasses import replace
from html.parser import HTMLParser

import pytest

from core.errors import InputError
from core.numbers import significant
from core.report.blocks import Figure, Paragraph, Section, SignOff, Table
from core.report.captions import FigureChoice
from core.report.content import ReportPlan, default_figures, report_content
from core.summary import summarise
from gui.figures.paper import Paper, mm, page_font, wrapped_height
from gui.figures.report import Press, _lay_section, report_steps, run
from gui.stage.flat_scene import FlatRenderer
from tests.gui.figures.benches import (
    BENCH,
    TRICLINIC,
    coloured,
    inked,
    needs_poppler,
    pdf_pages,
    pdf_text,
    svg_of,
)

FIGURES = (FigureChoice("section", "young", "AB"), FigureChoice("sweep", "young", "AB"),
           FigureChoice("hemisphere", "young", "A", "A"))  # fmt: skip
PLAN = ReportPlan(figures=FIGURES, made="2031-05-17")


@pytest.fixture(scope="module")
def content():
    return report_content(BENCH, PLAN)


def press(**known):
    return Press(BENCH, FlatRenderer(), **known)


@pytest.fixture(scope="module")
def pdf(qapp, content):
    return run(report_steps(content, "pdf", press()))


class Page(HTMLParser):
    """What a browser would find: its tags balanced, its words, its pictures."""

    def __init__(self, text):
        super().__init__()
        self.open, self.words, self.pictures, self.titles = [], [], [], []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        if tag == "img":
            self.pictures.append(dict(attrs))
        elif tag not in ("meta",):
            self.open.append(tag)

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        if self.open and self.open[-1] == "style":
            return
        if self.open and self.open[-1] == "h2":
            self.titles.append(data)
        self.words.append(data)


@needs_poppler
def test_a_pdf_has_the_numbers_of_the_summary(pdf, tmp_path):
    words = pdf_text(pdf, tmp_path / "r.pdf")
    found = summarise(TRICLINIC)
    numbers = [*found["eigenstiffness_gpa"], found["debye_speed_km_s"],
               found["averages"]["hill"]["young_gpa"],
               found["averages"]["hashin_shtrikman"]["shear_low_gpa"],
               found["extremes"]["young_gpa"]["min"]["value"],
               found["extremes"]["slow_km_s"]["max"]["value"],
               found["anisotropy"]["universal"]]  # fmt: skip
    for number in numbers:
        assert significant(number) in words
    assert "2031-05-17" in words
    assert "licensed or certified people decide" in words
    assert "Prepared: name, date" in words


@needs_poppler
def test_every_table_cell_is_on_paper(pdf, content, tmp_path):
    words = re.sub(r"\s", "", pdf_text(pdf, tmp_path / "r.pdf"))
    tables = [block for section in content.sections for block in section.blocks
              if isinstance(block, Table)]  # fmt: skip
    cells = [cell for table in tables for row in table.rows for cell in row
             if cell and len(cell) < 20]  # fmt: skip
    assert len(cells) > 400
    missing = [cell for cell in cells if re.sub(r"\s", "", cell) not in words]
    assert missing == []


@needs_poppler
def test_pages_are_numbered_and_none_is_empty(pdf, tmp_path):
    pages = pdf_pages(pdf, tmp_path / "p.pdf")
    words = pdf_text(pdf, tmp_path / "r.pdf")
    for number in range(1, len(pages) + 1):
        assert f"{number}/{len(pages)}" in words.replace(" ", "")
    assert len(pages) > 4
    for page in pages:
        assert 0.01 < inked(page) < 0.6
        margin = page[:, : page.shape[1] // 16]
        assert inked(margin) == 0.0
    assert max(coloured(page) for page in pages) > 0.03  # the hemisphere
    assert pages[0].shape[1] == pytest.approx(210 / 25.4 * 40, abs=1)
    assert pages[0].shape[0] == pytest.approx(297 / 25.4 * 40, abs=1)


@needs_poppler
def test_letter_paper(qapp, tmp_path):
    short = report_content(BENCH, ReportPlan(("verdict", "constants")))
    data = run(report_steps(short, "pdf", press(paper="Letter")))
    (page,) = pdf_pages(data, tmp_path / "l.pdf")
    assert page.shape[:2] == (440, 340)  # 11 by 8.5 inches at 40 dots


def test_a_reproducible_report_is_the_same_every_time(qapp):
    plan = ReportPlan(("verdict", "figures"), FIGURES[:1])
    steps = [report_steps(report_content(BENCH, plan), "pdf", press(is_reproducible=True))
             for _ in range(2)]  # fmt: skip
    first, second = map(run, steps)
    assert first == second


TABLE = Table(("a", "b"), tuple((str(k), "x") for k in range(8)), "Title", "A note.")
FIGURE = Figure(FIGURES[2], "So many words that the caption takes several lines. " * 4, 1)
BEGINNINGS = {
    "table": (TABLE,),
    "sentence and table": (Paragraph("A sentence before the table."), TABLE),
    "signing": (SignOff(("Prepared",)),),
    "figure": (FIGURE,),
}


@pytest.mark.parametrize("blocks", BEGINNINGS.values(), ids=BEGINNINGS)
def test_no_heading_stands_at_the_foot_of_a_page_without_what_follows(qapp, blocks):
    section = Section("verdict", "Verdict", blocks)
    turned = 0
    for used in range(20, 280, 10):
        paper = Paper(mm(210.0), mm(297.0))
        paper.y = mm(used)
        _lay_section(paper, section, press())
        turned += len(paper.pages) - 1
        assert len(paper.pages) == 1 or paper.pages[0] == []
    assert 0 < turned < 26


def test_the_caption_of_a_last_odd_figure_stands_below_it(qapp):
    paper = Paper(mm(210.0), mm(297.0))
    before = paper.y
    _lay_section(paper, Section("figures", "Figures", (FIGURE,)), press())
    (place,) = (paint.rect for paint in paper.pages[0] if hasattr(paint, "rect"))
    lines = wrapped_height(page_font("small"), FIGURE.caption, place.width())
    assert lines > 3 * wrapped_height(page_font("small"), "A", place.width())
    assert paper.y - before >= place.height() + lines


def test_a_page_for_a_browser_says_the_same(qapp, content):
    page = Page(run(report_steps(content, "html", press())).decode("utf-8"))
    assert page.open == []
    assert page.titles == [section.title for section in content.sections]
    words = " ".join(page.words)
    for section in content.sections:
        for block in section.blocks:
            if isinstance(block, Table):
                assert all(cell in words for row in block.rows for cell in row)
    assert len(page.pictures) == len(FIGURES)
    for picture in page.pictures:
        kind, _, data = picture["src"].partition(",")
        assert kind == "data:image/svg+xml;base64"
        _, texts, _ = svg_of(base64.b64decode(data))
        assert texts
        assert picture["alt"]


def test_names_cannot_break_the_page(qapp):
    bench = replace(BENCH, specimen=replace(TRICLINIC, name="<b>bold & \"brave\"</b>"))
    plan = ReportPlan(("specimen", "figures"), FIGURES[:1])
    text = run(report_steps(report_content(bench, plan), "html",
                            Press(bench, FlatRenderer()))).decode()  # fmt: skip
    assert "<b>" not in text
    assert "<b>bold & \"brave\"</b>" in " ".join(Page(text).words)


def test_progress_rises_and_stopping_half_way_leaves_nothing_open(qapp, content):
    told = []
    run(report_steps(content, "pdf", press()), told.append)
    assert told == sorted(told)
    assert 0.0 <= told[0] < told[-1] <= 1.0
    steps = report_steps(content, "pdf", press())
    next(steps)
    next(steps)
    steps.close()  # Qt would complain of a device destroyed while it is painted on
    with pytest.raises(StopIteration):
        next(steps)


def test_unknown_papers_and_formats_are_refused(qapp, content):
    with pytest.raises(InputError, match="A4"):
        report_steps(content, "pdf", press(paper="A44"))
    with pytest.raises(InputError, match="pdf"):
        report_steps(content, "docx", press())


def test_the_usual_figures_can_all_be_drawn(qapp):
    plan = ReportPlan(("figures",), default_figures(BENCH))
    data = run(report_steps(report_content(BENCH, plan), "pdf", press()))
    assert data.startswith(b"%PDF")
    assert data.count(b"/Subtype /Image") >= 4
