"""The plots of a fit: points where the numbers say, outliers named, presses that find rows."""

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPointF, QRectF

from gui.plots.section import section_ground
from gui.speeds.correlation_plot import CorrelationPlot, draw_correlation, matrix_in
from gui.speeds.plots import FACES, FitPlots
from gui.speeds.residual_plot import ResidualPlot, draw_residuals, strips_in
from gui.speeds.section_plot import SpeedsSection, draw_speeds_section
from gui.speeds.singular_plot import SingularPlot, bars_in, draw_singular
from gui.theme import LIGHT, NIGHT
from tests.gui.driving import choose
from tests.gui.plots.drawing import draw_image, draw_pdf, draw_svg, near, svg_words
from tests.gui.speeds.samples import CORRELATION, RESIDUALS, SECTION, SINGULAR

pytestmark = pytest.mark.usefixtures("qapp")
SIZE = (520, 400)
RECT = QRectF(0, 0, *SIZE)


@pytest.fixture
def shown(qtbot):
    """Show a plot with its view."""

    def show(plot, view):
        qtbot.addWidget(plot)
        plot.resize(520, 420)
        plot.show_view(view)
        plot.show()
        qtbot.waitExposed(plot)
        return plot

    return show


# ------------------------------------------------------------------ residuals
def test_there_is_a_strip_for_each_sheet_with_readings():
    strips = strips_in(RECT, RESIDUALS, LIGHT)
    assert list(strips.areas) == [0, 1, 2]
    assert list(strips_in(RECT, replace(RESIDUALS, points=RESIDUALS.points[1:3]), LIGHT).areas
                ) == [1]  # fmt: skip
    tops = [area.top() for area in strips.areas.values()]
    assert tops == sorted(tops)
    assert all(RECT.contains(area) for area in strips.areas.values())


def test_a_residual_is_as_high_as_it_is_large_and_one_beyond_lies_on_the_edge():
    strips = strips_in(RECT, RESIDUALS, LIGHT)
    fine, low, off, far = (strips.place(point) for point in RESIDUALS.points)
    middle = strips.areas[1].center().y()
    assert (low.y() - middle) / (middle - off.y()) == pytest.approx(2.1 / 5.5)
    assert far.y() == pytest.approx(strips.areas[2].top())
    assert fine.x() < low.x() < off.x() < far.x()


@pytest.mark.parametrize("theme", [LIGHT, NIGHT])
def test_outliers_are_in_the_alert_colour(theme):
    pixels = draw_image(draw_residuals, RESIDUALS, SIZE, theme)
    assert near(pixels, theme.alert, 30).sum() > 60
    sound = replace(RESIDUALS, points=RESIDUALS.points[:2])
    without = draw_image(draw_residuals, sound, SIZE, theme)
    assert near(without, theme.alert, 30).sum() == 0


def test_outliers_are_named_in_words(tmp_path):
    words = svg_words(draw_svg(draw_residuals, RESIDUALS, tmp_path / "r.svg"))
    assert {"row 4, 5.5", "row 6, 40.0"} <= {text.removesuffix(" σ") for text in words}
    assert not any(text.startswith("row 2") for text in words)


def test_a_press_near_a_point_tells_its_row(shown):
    plot = shown(ResidualPlot(), RESIDUALS)
    rows = []
    plot.row_picked.connect(rows.append)
    strips = strips_in(QRectF(plot.canvas.rect()), RESIDUALS, LIGHT)
    plot.press(strips.place(RESIDUALS.points[2]) + QPointF(3, 3))
    plot.press(QPointF(2, 2))
    assert rows == [4]
    plot.show_row(4)
    plot.step(1, 0)
    plot.step(-1, 0)
    assert rows == [4, 6, 2]


def test_the_residuals_are_copied_as_columns(shown):
    lines = shown(ResidualPlot(), RESIDUALS).copy_text().splitlines()
    assert lines[0].split("\t")[0] == "row"
    assert lines[3].split("\t") == ["4", "2", "5.5"]


# ------------------------------------------------------------------ section
def test_readings_lie_where_their_speeds_are():
    pixels = draw_image(draw_speeds_section, SECTION, SIZE)
    ground = section_ground(RECT, SECTION.section, LIGHT)
    for point, colour in zip(SECTION.points, (LIGHT.b, LIGHT.alert), strict=True):
        x, y = ground.place(np.array([point.x, point.y]))
        assert near(pixels, colour)[round(y), round(x)]


def test_a_press_on_a_reading_tells_its_row(shown):
    plot = shown(SpeedsSection(), SECTION)
    rows, planes = [], []
    plot.row_picked.connect(rows.append)
    plot.plane_chosen.connect(planes.append)
    ground = section_ground(QRectF(plot.canvas.rect()), SECTION.section, LIGHT)
    plot.press(QPointF(*ground.place(np.array([0.0, 3.3]))))
    plot.press(ground.centre)
    assert rows == [4]
    choose(plot.plane, "XZ")
    assert planes == ["XZ"]
    plot.show_error("That is no direction.")
    assert plot.message.text() == "That is no direction."


# ------------------------------------------------------------------ spectrum
def test_the_bars_stand_on_powers_of_ten():
    bars = bars_in(RECT, SINGULAR, LIGHT)
    heights = [bars.area.bottom() - bars.y(value) for value in (0.1, 1.0, 10.0)]
    assert heights[2] - heights[1] == pytest.approx(heights[1] - heights[0])
    assert bars.y(float("inf")) == pytest.approx(bars.area.top())
    assert bars.area.top() < bars.y(SINGULAR.typical) < bars.y(1.0)


def test_a_combination_that_is_not_seen_is_told_by_colour_and_hatching():
    pixels = draw_image(draw_singular, SINGULAR, SIZE)
    bars = bars_in(RECT, SINGULAR, LIGHT)
    seen, unseen = bars.box(0, 0.1), bars.box(3, float("inf"))
    centre = seen.center()
    assert near(pixels, LIGHT.a)[round(centre.y()), round(centre.x())]
    box = pixels[round(unseen.top()) : round(unseen.bottom()),
                 round(unseen.left()) : round(unseen.right())]  # fmt: skip
    assert not near(box, LIGHT.a).any()
    assert near(box, LIGHT.doubt, 60).any()


def test_the_spectrum_is_copied_with_what_is_seen(shown):
    lines = shown(SingularPlot(), SINGULAR).copy_text().splitlines()
    assert [line.split("\t")[2] for line in lines[1:]] == ["yes", "yes", "yes", "no"]


# ------------------------------------------------------------------ correlations
def test_the_colour_of_a_pair_is_that_of_its_correlation():
    pixels = draw_image(draw_correlation, CORRELATION, SIZE)
    square = matrix_in(RECT, CORRELATION, LIGHT)
    step = square.width() / 3

    def colour(row, column):
        x, y = square.left() + (column + 0.5) * step, square.top() + (row + 0.5) * step
        return pixels[round(y), round(x)]

    assert np.array_equal(colour(0, 1), colour(1, 0))
    red, _, blue = colour(0, 1)
    assert blue > red  # negative is blue
    red, _, blue = colour(0, 0)
    assert red > blue
    assert np.ptp(colour(0, 2)) < 20  # none is white or grey


def test_the_matrix_is_copied_with_its_names(shown):
    lines = shown(CorrelationPlot(), CORRELATION).copy_text().splitlines()
    assert lines[0] == "\tC11\tC12\tC44"
    assert lines[1].split("\t")[2] == "-0.8"


# ------------------------------------------------------------------ all of them
VIEWS = {
    "residuals": (draw_residuals, RESIDUALS), "section": (draw_speeds_section, SECTION),
    "spectrum": (draw_singular, SINGULAR), "correlation": (draw_correlation, CORRELATION),
}  # fmt: skip


@pytest.mark.parametrize("name", VIEWS)
def test_every_plot_goes_on_paper_with_its_title(name, tmp_path):
    draw, view = VIEWS[name]
    assert draw_pdf(draw, view, tmp_path / "p.pdf", titled=True).startswith(b"%PDF")
    plain = draw_image(draw, view, SIZE)
    titled = draw_image(draw, view, SIZE, titled=True)
    assert (plain != titled).any()


@pytest.mark.parametrize("name", VIEWS)
def test_an_old_plot_is_dimmed(name):
    draw, view = VIEWS[name]
    ground = np.array(LIGHT.colour("panel").getRgb()[:3])
    fresh = np.abs(draw_image(draw, view, SIZE) - ground).sum()
    assert np.abs(draw_image(draw, replace(view, pending=True), SIZE) - ground).sum() < fresh


def test_one_plot_is_seen_and_the_list_asks_for_another(qtbot):
    plots = FitPlots()
    qtbot.addWidget(plots)
    faces, rows = [], []
    plots.face_chosen.connect(faces.append)
    plots.row_picked.connect(rows.append)
    for number, (key, *_) in enumerate(FACES):
        plots.show_face(key)
        assert plots.face == key
        assert plots.all()[number].isVisibleTo(plots)
    assert faces == []
    choose(plots.choices[3], "Residuals")
    assert faces == ["residuals"]
    plots.residuals.row_picked.emit(5)
    assert rows == [5]
