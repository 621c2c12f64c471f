"""The colour bar: places and colours of values, and what is drawn."""

import numpy as np
import pytest
from PySide6.QtCore import QRectF
from PySide6.QtGui import QFontMetricsF, QImage, QPainter

from gui.theme import LIGHT, NIGHT, colour_table
from gui.viewdata import ScaleView
from gui.widgets.colour_bar import (
    _fitted_title,
    bar_height,
    colour_range,
    draw_colour_bar,
    table_position,
)
from tests.gui.stage.images import rgba

LINEAR = ScaleView(20.0, 120.0, "20.0", "120.0", "E, GPa", False, ((70.0, "70.0"),))


def scale(low, high, **changes):
    return ScaleView(low, high, f"{low}", f"{high}", "title", changes.pop("diverging", False),
                     **changes)


def test_a_linear_scale_is_even():
    assert np.allclose(table_position(LINEAR, np.array([20.0, 45.0, 120.0])), [0, 0.25, 1])


def test_a_diverging_scale_is_centred_on_zero():
    view = scale(-1.0, 4.0, diverging=True)
    assert colour_range(view) == (-4.0, 4.0)
    assert np.allclose(table_position(view, np.array([-1.0, 0.0, 4.0])), [0.375, 0.5, 1.0])


def test_a_logarithmic_scale_is_even_in_the_logarithm():
    view = scale(1.0, 1000.0, logarithmic=True)
    assert np.allclose(table_position(view, np.array([1.0, 10.0, 1000.0])), [0, 1 / 3, 1])
    assert np.isnan(table_position(view, np.array([-1.0])))[0]


def test_a_logarithm_that_cannot_be_taken_is_not():
    view = scale(0.0, 1000.0, logarithmic=True)
    assert np.allclose(table_position(view, np.array([500.0])), [0.5])


@pytest.mark.parametrize("value", [0.0, 7.0, -3.0])
def test_a_scale_of_one_value_has_a_place_for_it(value):
    place = table_position(scale(value, value), np.array([value]))
    assert np.isfinite(place).all()


def draw(view, theme=LIGHT, width=360):
    image = QImage(width, int(bar_height(theme)) + 6, QImage.Format.Format_RGB32)
    image.fill(theme.colour("stage"))
    painter = QPainter(image)
    draw_colour_bar(painter, QRectF(image.rect()), view, theme)
    painter.end()
    return rgba(image)[..., :3]


@pytest.mark.parametrize("theme", [LIGHT, NIGHT], ids=lambda theme: theme.name)
def test_the_strip_runs_through_the_table(qapp, theme):
    pixels = draw(LINEAR, theme)
    row = _strip_row(pixels)
    coloured = np.flatnonzero(pixels[row].max(axis=1) - pixels[row].min(axis=1) > 40)
    ends = pixels[row, [coloured[0] + 3, coloured[-1] - 3]]
    table = colour_table(False)[[0, 255], :3].astype(int)
    assert np.abs(ends - table).max() < 25


def _strip_row(pixels):
    """The row with the most colour in it."""
    return int((pixels.max(axis=2) - pixels.min(axis=2)).sum(axis=1).argmax())


def test_ticks_without_room_are_left_out(qapp):
    crowd = ScaleView(0.0, 1.0, "0", "1", "t", False,
                      tuple((k / 40, f"0.{k:04d}") for k in range(1, 40)))
    few = ScaleView(0.0, 1.0, "0", "1", "t", False, ())
    below = _strip_row(draw(few)) + 8
    ink = [(draw(view)[below:].max(axis=2) < 200).sum() for view in (few, crowd)]
    full_row = (draw(crowd)[below:].max(axis=2) < 200).any(axis=0)
    assert ink[1] > ink[0]
    gaps = np.diff(np.flatnonzero(full_row))
    assert gaps.max() >= 4  # words stay apart


def test_the_title_is_cut_short_rather_than_drawn_beyond(qapp):
    long = ScaleView(0.0, 1.0, "0", "1", "a title much too long " * 8, False)
    pixels = draw(long, width=160)
    ground = pixels[0, 0]
    assert np.abs(pixels[:14, -1] - ground).max() < 12
    assert np.abs(pixels[:14] - ground).max() > 40


@pytest.mark.parametrize("is_diverging", [False, True])
def test_one_value_is_one_colour_and_said_once(qapp, is_diverging):
    view = scale(3.0, 3.0) if not is_diverging else scale(0.0, 0.0, diverging=True)
    assert table_position(view, np.array([view.low])) == pytest.approx([0.5])
    pixels = draw(view)
    row = pixels[_strip_row(pixels)]
    colours = np.unique(row[60:300], axis=0)
    assert len(colours) == 1


def test_a_long_title_gets_smaller_letters_before_it_is_cut(qapp):
    title = "change of Young's modulus E, GPa within ±0.5°"
    image = QImage(400, 60, QImage.Format.Format_RGB32)
    painter = QPainter(image)
    painter.setFont(LIGHT.font("small"))
    wide = QFontMetricsF(painter.font()).horizontalAdvance(title)
    assert _fitted_title(painter, title, 0.85 * wide, LIGHT, 1.0) == title
    assert QFontMetricsF(painter.font()).horizontalAdvance(title) <= 0.87 * wide
    assert _fitted_title(painter, title, 0.3 * wide, LIGHT, 1.0).endswith("…")
    painter.end()
