"""The source picture: wavefronts in their place, faint where they leave the plane."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QGuiApplication

from gui.plots.source_picture import SourcePicture, draw_source, source_ground
from gui.theme import LIGHT, style_sheet
from gui.viewdata import SourceView
from tests.gui.plots.demo_views import ANGLES, TABLE_A, polar, wave_source
from tests.gui.plots.drawing import draw_image, draw_pdf, draw_svg, near, svg_words

ASSETS = (Path(__file__).parents[3] / "assets").as_posix()
RECT = QRectF(0, 0, 520, 400)


def circles(leaves):
    points = polar(np.full_like(ANGLES, 20.0))
    rings = ((10.0, "10"), (30.0, "30"))
    return SourceView("t", (("A", 0, points, leaves),), 5.0, rings, ("X", "Z"))


def test_fronts_out_of_the_plane_are_dotted_and_faint(qapp):
    view = circles(np.sin(ANGLES) > 0.0)
    pixels, ground = draw_image(draw_source, view), source_ground(RECT, view, LIGHT)
    angles = np.linspace(0.0, 2.0 * np.pi, 1440, endpoint=False)
    x, y = ground.place(20.0 * np.stack([np.cos(angles), np.sin(angles)]))
    hit = near(pixels[y.astype(int), x.astype(int)], LIGHT.a, 70)
    assert hit[760:1400].mean() > 0.97
    assert hit[40:680].mean() < 0.6
    assert near(pixels[y.astype(int), x.astype(int)][40:680], LIGHT.a, 200).mean() > 0.25


def test_demo_fronts_match_the_closed_form_on_the_axis():
    # Along c of a trigonal crystal v = √(C33/ρ), and the energy stays on the axis.
    x, z = wave_source(4.0).curves[0][2][:, 180]
    assert x == pytest.approx(0.0, abs=1e-3)
    assert z == pytest.approx(4.0 * np.sqrt(TABLE_A[2, 2] / 2.65), rel=1e-6)


def test_vectors(qapp, tmp_path):
    text = draw_svg(draw_source, wave_source(), tmp_path / "s.svg", titled=True)
    assert "<image" not in text
    words = svg_words(text)
    assert {"Point source · after 4.000 µs", "30 mm", "X", "Z"} <= words
    assert "dotted: energy leaves the plane" in words
    assert draw_pdf(draw_source, wave_source(), tmp_path / "s.pdf").startswith(b"%PDF")


def test_notice_instead_of_fronts(qapp, tmp_path):
    view = replace(wave_source(), curves=(), notice="Needs a density.")
    assert "Needs a density." in svg_words(draw_svg(draw_source, view, tmp_path / "s.svg"))


@pytest.fixture
def plot(qtbot):
    widget = SourcePicture()
    qtbot.addWidget(widget)
    widget.resize(520, 400)
    widget.show_view(wave_source())
    widget.show()
    qtbot.waitExposed(widget)
    return widget


def test_a_typed_time_is_sent(plot, qtbot):
    assert plot.time.value() == 4.0
    plot.time.selectAll()
    with qtbot.waitSignal(plot.time_chosen) as caught:
        qtbot.keyClicks(plot.time, "7.5")
        qtbot.keyClick(plot.time, Qt.Key.Key_Return)
    assert caught.args == [7.5]


def test_show_view_sends_nothing(plot, qtbot):
    with qtbot.assertNotEmitted(plot.time_chosen):
        plot.show_view(wave_source(9.0))
    assert plot.time.value() == 9.0


def test_hover_tells_distance_and_speed(plot):
    lines = [text for text, _ in plot.readout(0.0, 20.0)]
    assert lines == ["0.0° from X to Z", "20.00 mm", "reached by 5.000 km/s"]


def test_copy_gives_rows(plot, qtbot):
    qtbot.keyClick(plot.canvas, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    rows = [row.split("\t") for row in QGuiApplication.clipboard().text().splitlines()]
    assert rows[0] == ["side", "sheet", "X, mm", "Z, mm", "leaves the plane"]
    assert len(rows) == 1 + 3 * 721
    side, sheet, points, leaves = wave_source().curves[2]
    assert rows[-1] == [side, str(sheet + 1), repr(float(points[0, -1])),
                        repr(float(points[1, -1])), "yes" if leaves[-1] else "no"]  # fmt: skip


def test_the_time_can_be_read_in_the_window_s_dress(qtbot):
    widget = SourcePicture()
    qtbot.addWidget(widget)
    widget.setStyleSheet(style_sheet(LIGHT, ASSETS))
    widget.resize(380, 300)
    widget.show_view(wave_source(1234.56))
    widget.show()
    qtbot.waitExposed(widget)
    line = widget.time.lineEdit()
    assert line.width() >= line.fontMetrics().horizontalAdvance("1234.56 µs")


def test_the_header_says_what_the_time_is_of(plot):
    plot.show_view(replace(wave_source(), before_time="wavefronts in part XZ after"))
    assert plot.before_time.whole() == "wavefronts in part XZ after"
    assert plot.before_time.geometry().right() < plot.time.geometry().left()
    plot.resize(340, 300)
    assert plot.before_time.whole() == "part XZ after"


def test_dots_are_explained_in_a_narrow_picture(qapp, tmp_path):
    words = svg_words(draw_svg(draw_source, wave_source(), tmp_path / "n.svg", (230, 200)))
    assert "dotted: energy leaves the plane" in words
