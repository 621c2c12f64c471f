"""The sweep: axes, curves, and what its controls send out."""

import math
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QGuiApplication

from gui.plots.sweep import SweepPlot, draw_sweep, sweep_axes, value_range
from gui.theme import LIGHT
from tests.gui.plots.demo_views import speeds_sweep, young_sweep
from tests.gui.plots.drawing import draw_image, draw_pdf, draw_svg, near, svg_words

RECT = QRectF(0, 0, 520, 400)


def with_curves(*curves, **options):
    return replace(young_sweep(), curves=curves, **options)


def level(value, side="A"):
    return (side, 0, np.full(361, value))


def row_of(view, value):
    return int(sweep_axes(RECT, view, LIGHT).y(value))


def share(pixels, view, value, colour):
    """Return the share of a level line's length that has a colour, away from the pin."""
    axes, row = sweep_axes(RECT, view, LIGHT), row_of(view, value)
    left, right = int(axes.area.left()) + 2, int(axes.area.right()) - 2
    hit = near(pixels[row - 1 : row + 2, left:right], colour, 70).any(axis=0)
    away = np.abs(np.arange(left, right) - axes.x(0.0)) > 8
    return hit[away].mean()


# ---------------------------------------------------------------- drawing
def test_a_is_solid_and_b_dashed(qapp):
    view = with_curves(level(10.0), level(20.0, "B"))
    pixels = draw_image(draw_sweep, view)
    assert share(pixels, view, 10.0, LIGHT.a) > 0.98
    assert 0.5 < share(pixels, view, 20.0, LIGHT.b) < 0.85


def test_nan_leaves_a_gap(qapp):
    values = np.where(np.linspace(-90, 90, 361) < -45.0, np.nan, 10.0)
    view = with_curves(("A", 0, values), level(20.0, "B"))
    assert share(draw_image(draw_sweep, view), view, 10.0, LIGHT.a) == pytest.approx(
        0.75, abs=0.02
    )


def test_greater_values_are_higher_and_greater_angles_right(qapp):
    view = with_curves(("A", 0, np.linspace(1.0, 2.0, 361)))
    axes = sweep_axes(RECT, view, LIGHT)
    rows, columns = np.nonzero(near(draw_image(draw_sweep, view), LIGHT.a))
    inside = (rows > axes.area.top()) & (columns > axes.area.left())
    assert np.corrcoef(rows[inside], columns[inside])[0, 1] < -0.99


def test_pin_stands_at_zero(qapp):
    view = with_curves(level(10.0), level(20.0, "B"))
    pixels, axes = draw_image(draw_sweep, view), sweep_axes(RECT, view, LIGHT)
    x = int(axes.x(0.0))
    assert near(pixels[row_of(view, 15.0), x - 1 : x + 2], LIGHT.alert, 140).any()
    y = row_of(view, 20.0)
    assert near(pixels[y - 1 : y + 2, x - 1 : x + 2], LIGHT.b, 20).all()


def test_value_range_leaves_room_and_never_vanishes():
    low, high = value_range(with_curves(level(10.0), level(20.0)))
    assert low < 10.0 < 20.0 < high
    for value in (0.0, 76.3, -0.25):
        low, high = value_range(with_curves(("A", 0, value * (1.0 + 1e-15 * np.arange(361)))))
        assert low < value < high
        assert high - low > 0.01 * abs(value)
    assert value_range(with_curves(("A", 0, np.full(361, np.nan)))) is None


def test_notice_instead_of_curves(qapp, tmp_path):
    view = with_curves(("A", 0, np.full(361, np.nan)), notice="Needs a density.")
    assert "Needs a density." in svg_words(draw_svg(draw_sweep, view, tmp_path / "s.svg"))


@pytest.mark.parametrize("view", [young_sweep(), speeds_sweep()])
def test_svg_has_text_and_no_picture(qapp, tmp_path, view):
    text = draw_svg(draw_sweep, view, tmp_path / "s.svg", titled=True)
    assert "<image" not in text
    assert {view.title, view.value_label, "0°", "\u221230°", "A", "B"} <= svg_words(text)


def test_pdf(qapp, tmp_path):
    data = draw_pdf(draw_sweep, speeds_sweep(), tmp_path / "s.pdf")
    assert data.startswith(b"%PDF")
    assert b"/Font" in data
    assert b"/Subtype /Image" not in data


# ---------------------------------------------------------------- widget
@pytest.fixture
def plot(qtbot):
    widget = SweepPlot()
    qtbot.addWidget(widget)
    widget.resize(520, 400)
    widget.show_view(young_sweep())
    widget.show()
    qtbot.waitExposed(widget)
    return widget


@pytest.mark.parametrize("angle", [-60.0, 0.0, 37.0])
def test_a_click_picks_its_angle(plot, qtbot, angle):
    axes = sweep_axes(QRectF(plot.canvas.rect()), young_sweep(), LIGHT)
    point = QPointF(axes.x(angle), axes.area.center().y())
    with qtbot.waitSignal(plot.angle_picked) as caught:
        qtbot.mouseClick(plot.canvas, Qt.MouseButton.LeftButton, pos=point.toPoint())
    assert caught.args[0] == pytest.approx(angle, abs=0.4)


def test_clicks_beside_the_axes_pick_nothing(plot, qtbot):
    axes = sweep_axes(QRectF(plot.canvas.rect()), young_sweep(), LIGHT)
    with qtbot.assertNotEmitted(plot.angle_picked):
        point = QPointF(axes.area.center().x(), axes.area.bottom() + 20)
        qtbot.mouseClick(plot.canvas, Qt.MouseButton.LeftButton, pos=point.toPoint())


def test_arrow_keys_move_the_pin(plot, qtbot):
    with qtbot.waitSignal(plot.angle_picked) as caught:
        qtbot.keyClick(plot.canvas, Qt.Key.Key_Left, Qt.KeyboardModifier.ShiftModifier)
    assert caught.args == [-5.0]


def test_axis_combo(plot, qtbot):
    with qtbot.assertNotEmitted(plot.axis_chosen):
        plot.show_view(replace(young_sweep(), chosen="X"))
    assert plot.axis.currentText() == "part X"
    plot.axis.setFocus()
    with qtbot.waitSignal(plot.axis_chosen) as caught:
        qtbot.keyClick(plot.axis, Qt.Key.Key_Down)
    assert caught.args == ["Y"]


def test_hover_tells_every_curve(plot):
    plot.show_view(speeds_sweep())
    lines = [text for text, _ in plot.readout(-30.0)]
    assert lines[0] == "\u221230.0°"
    assert [line.split()[:2] for line in lines[1:4]] == [
        ["A", "fastest"], ["A", "middle"], ["A", "slowest"]]  # fmt: skip
    assert float(lines[1].split()[-1]) == pytest.approx(
        speeds_sweep().curves[0][2][120], rel=1e-3
    )


def test_copy_gives_columns_at_full_precision(plot, qtbot):
    qtbot.keyClick(plot.canvas, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    rows = [row.split("\t") for row in QGuiApplication.clipboard().text().splitlines()]
    assert rows[0] == ["angle, °", "A", "B"]
    assert float(rows[1][0]) == -90.0
    assert float(rows[40][2]) == young_sweep().curves[1][2][39]
    assert math.isfinite(float(rows[-1][1]))
