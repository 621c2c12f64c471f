"""Figures as files, read back: sizes, pixels, words, vectors."""

import re
from dataclasses import replace
from datetime import date

import numpy as np
import pytest
from PySide6.QtGui import QImage

from core.errors import InputError
from core.report.captions import FIGURE_KINDS, FigureChoice
from gui.figures.drawing import drawable
from gui.figures.export import (
    FORMATS,
    FigureForm,
    check_form,
    figure_bytes,
    format_of,
    text_scale,
    undated,
)
from gui.stage.camera import Camera
from gui.stage.flat_scene import FlatRenderer
from gui.theme import NIGHT
from tests.gui.figures.benches import (
    BENCH,
    DULL,
    SVG,
    coloured,
    inked,
    needs_poppler,
    pdf_pages,
    pdf_text,
    pixels_of,
    svg_of,
)

SMALL = FigureForm(60.0, 55.0, 100.0, 5.0)
WIDE = FigureForm(120.0, 60.0, 100.0, 5.0)
CHOICES = [FigureChoice(kind, "slowness", "AB", "A") for kind in FIGURE_KINDS]
PLOTS = [choice for choice in CHOICES if choice.kind in ("section", "sweep", "source")]


def made(choice, kind="png", form=SMALL, bench=BENCH, **known):
    figure = drawable(bench, choice, is_coarse=form.all_vectors)
    return figure_bytes(figure, kind, form, FlatRenderer(), **known)


# --- PNG ------------------------------------------------------------------------------------


@pytest.mark.parametrize("choice", CHOICES, ids=lambda choice: choice.kind)
def test_a_picture_has_its_size_resolution_and_something_on_it(qapp, choice):
    data = made(choice)
    image = QImage.fromData(data)
    assert (image.width(), image.height()) == SMALL.pixels == (236, 217)
    assert image.dotsPerMeterX() == round(100 / 0.0254)
    pixels = pixels_of(data)
    assert (pixels[..., 3] == 255).all()
    assert 0.02 < inked(pixels) < 0.9
    assert coloured(pixels) > 0.002
    assert tuple(pixels[0, -1, :3]) == (255, 255, 255)


def test_a_picture_says_what_it_is(qapp):
    image = QImage.fromData(made(CHOICES[0]))
    assert "Test piece" in image.text("Description")
    assert "Tricline" in image.text("Software")


def test_grounds(qapp):
    choice = FigureChoice("section", "young", "A")
    clear = pixels_of(made(choice, form=replace(SMALL, ground="transparent")))
    assert (clear[..., 3] == 0).mean() > 0.5
    assert clear[..., 3].max() == 255
    night = pixels_of(made(choice, form=replace(SMALL, ground="theme", theme="night")))
    stage = NIGHT.colour("stage")
    assert tuple(night[0, 0, :3]) == (stage.red(), stage.green(), stage.blue())
    white = pixels_of(made(choice, form=replace(SMALL, theme="night")))
    assert np.array_equal(white, pixels_of(made(choice)))


@pytest.mark.gl
def test_a_transparent_surface_with_opengl(gl_report):
    from gui.stage.scene import SceneRenderer

    renderer = SceneRenderer()
    form = replace(SMALL, ground="transparent", has_caption=False)
    figure = drawable(BENCH, FigureChoice("surface", "young", "A"))
    pixels = pixels_of(figure_bytes(figure, "png", form, renderer))
    renderer.close()
    assert pixels[0, -1, 3] == 0
    assert pixels[pixels.shape[0] // 2, pixels.shape[1] // 2, 3] == 255


def test_a_caption_takes_room_below(qapp):
    choice = FigureChoice("section", "young", "A")
    with_words = pixels_of(made(choice))
    without = pixels_of(made(choice, form=replace(SMALL, has_caption=False)))
    foot = slice(-30, None)
    assert inked(with_words[foot]) > 0.03
    assert not np.array_equal(with_words, without)


def test_a_camera_turns_the_surface(qapp):
    choice = FigureChoice("surface", "young", "A")
    usual = pixels_of(made(choice))
    above = pixels_of(made(choice, cameras={"A": Camera(elevation=80.0)}))
    assert (np.abs(usual.astype(int) - above).max(axis=2) > 40).mean() > 0.02


def test_a_and_b_stand_side_by_side_over_one_colour_bar(qapp):
    svg = made(FigureChoice("surface", "young", "AB"), "svg", WIDE)
    _, texts, pictures = svg_of(svg)
    assert len(pictures) == 2
    assert texts.count("A") == texts.count("B") == 1
    assert texts.count("Young's modulus E, GPa") == 1
    left, right = (float(picture.get("x")) for picture in pictures)
    assert right - left == pytest.approx(WIDE.width_mm / 25.4 * 1200 / 2, rel=0.01)


def test_text_keeps_its_height_in_points(qapp):
    scales = [text_scale(FigureForm(width, 80.0, dpi, 8.0), dpi)
              for width, dpi in ((85.0, 300.0), (170.0, 300.0), (85.0, 600.0))]  # fmt: skip
    assert scales[0] == scales[1]
    assert scales[2] == pytest.approx(2 * scales[0])
    assert text_scale(FigureForm(200.0, 200.0, 300.0, 0.0), 300.0) == pytest.approx(
        2 * text_scale(FigureForm(100.0, 100.0, 300.0, 0.0), 300.0))  # fmt: skip


# --- SVG ------------------------------------------------------------------------------------


@pytest.mark.parametrize("choice", PLOTS, ids=lambda choice: choice.kind)
def test_plots_are_vectors_with_text_as_text(qapp, choice):
    root, texts, pictures = svg_of(made(choice, "svg"))
    assert pictures == []
    assert root.get("width").endswith("mm")
    assert float(root.get("width")[:-2]) == pytest.approx(60.0, abs=0.05)
    joined = " ".join(texts)
    assert "Test piece" in joined
    assert "invented" in joined
    assert "0" in joined
    assert len(list(root.iter(f"{SVG}polyline")) + list(root.iter(f"{SVG}path"))) > 3


def test_the_title_and_description_of_an_svg(qapp):
    root, _, _ = svg_of(made(FigureChoice("sweep", "young", "A"), "svg"))
    assert "sweep" in root.find(f"{SVG}title").text
    assert "Test piece" in root.find(f"{SVG}desc").text
    assert "sans-serif" in next(root.iter(f"{SVG}text")).get("font-family")


def test_a_surface_is_one_picture_inside_or_none_at_all(qapp):
    choice = FigureChoice("surface", "young", "A")
    _, texts, pictures = svg_of(made(choice, "svg"))
    assert len(pictures) == 1
    assert {"X", "Y", "Z"} <= set(texts)
    root, texts, pictures = svg_of(made(choice, "svg", replace(SMALL, all_vectors=True)))
    assert pictures == []
    assert len(list(root.iter(f"{SVG}path"))) + len(list(root.iter(f"{SVG}polygon"))) > 1000
    assert {"X", "Y", "Z"} <= set(texts)


@pytest.mark.parametrize("key", ["slowness", "wave"])
def test_nested_and_folded_surfaces_as_vectors(qapp, key):
    bench = replace(BENCH, display=replace(BENCH.display, cut_away=key == "slowness"))
    choice = FigureChoice("surface", key, "A")
    data = made(choice, "svg", replace(SMALL, all_vectors=True), bench)
    root, _, pictures = svg_of(data)
    assert pictures == []
    assert len(list(root.iter(f"{SVG}path"))) + len(list(root.iter(f"{SVG}polygon"))) > 3000


# --- PDF ------------------------------------------------------------------------------------


@needs_poppler
@pytest.mark.parametrize("choice", CHOICES, ids=lambda choice: choice.kind)
def test_a_pdf_page_has_the_words_and_the_picture(qapp, tmp_path, choice):
    data = made(choice, "pdf")
    assert "Test piece (invented)" in pdf_text(data, tmp_path / "a.pdf")
    (page,) = pdf_pages(data, tmp_path / "b.pdf", 100)
    assert page.shape[1] == pytest.approx(236, abs=2)
    assert page.shape[0] == pytest.approx(217, abs=2)
    assert 0.02 < inked(page) < 0.9
    screen = made(choice)
    assert inked(page) == pytest.approx(inked(pixels_of(screen)), rel=0.25)


def test_fonts_are_in_the_pdf(qapp):
    data = made(FigureChoice("sweep", "young", "A"), "pdf")
    assert b"/FontFile2" in data


def test_a_reproducible_pdf_is_the_same_every_time(qapp):
    choice = FigureChoice("section", "young", "AB")
    form = replace(SMALL, is_reproducible=True)
    first, second = made(choice, "pdf", form), made(choice, "pdf", form)
    assert first == second
    assert b"D:20000101000000" in first
    assert b"D:20000101000000" not in made(choice, "pdf")


def test_no_date_is_left_in_a_reproducible_pdf(qapp):
    year = str(date.today().year).encode()
    dates = re.findall(rb"/(?:CreationDate|ModDate) \(([^)]*)\)|\w+Date=\"([^\"]*)\"",
                       made(PLOTS[0], "pdf", replace(SMALL, is_reproducible=True)))
    assert len(dates) >= 2
    assert not any(year in b"".join(pair) for pair in dates)


def test_dates_are_as_long_as_they_were():
    given = b"/CreationDate (D:20310517101112Z) /ModDate (D:20310517101112+02'00')"
    found = undated(given)
    assert len(found) == len(given)
    assert b"2031" not in found
    assert found.count(b"D:20000101000000Z") == 2


@pytest.mark.parametrize("kind", ["png", "svg"])
def test_pictures_and_svgs_are_the_same_every_time(qapp, kind):
    choice = FigureChoice("surface", "young", "A")
    assert made(choice, kind) == made(choice, kind)


# --- what is refused ------------------------------------------------------------------------


@pytest.mark.parametrize(("form", "words"), [
    (FigureForm(0.0, 80.0), "15 mm at least"),
    (FigureForm(80.0, -1.0), "15 mm at least"),
    (FigureForm(4.0, 4.0, text_pt=0.0), "50 pixels at least"),
    (FigureForm(text_pt=3.0), "4 to 40 points"),
    (FigureForm(text_pt=41.0), "4 to 40 points"),
    (FigureForm(9000.0, 80.0), "20,000 pixels"),
    (FigureForm(1600.0, 1600.0), "200 million"),
    (FigureForm(dpi=5.0), "30 to 2400"),
    (FigureForm(dpi=1e5), "30 to 2400"),
    (FigureForm(ground="whit"), "Did you mean 'white'"),
])  # fmt: skip
def test_impossible_forms_are_refused(form, words):
    with pytest.raises(InputError, match=words):
        check_form(form)


def test_unknown_formats_are_refused(tmp_path):
    assert [format_of(tmp_path / f"a.{key}") for key in FORMATS] == list(FORMATS)
    with pytest.raises(InputError, match=r"\.png, \.svg, \.pdf"):
        format_of(tmp_path / "a.gif")
    with pytest.raises(InputError, match="No suffix"):
        format_of(tmp_path / "a")


def test_a_figure_without_its_density_is_refused(qapp):
    with pytest.raises(InputError, match="wants a density"):
        made(FigureChoice("surface", "slowness", "A"), bench=DULL)
