"""The strain spectrum shows at a glance which strain makes a crystal unstable."""

import pytest
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QGuiApplication, QImage, QPainter

from gui.ledger.strain_spectrum import StrainSpectrum, bar_role, draw_spectrum
from gui.theme import LIGHT, NIGHT
from tests.gui.ledger.sample_views import spectrum

HEIGHT, WIDTH = 140, 340


def drawn(view, theme=LIGHT, scale=1.0):
    image = QImage(int(WIDTH * scale), int(HEIGHT * scale), QImage.Format.Format_RGB32)
    image.fill(theme.colour("panel"))
    painter = QPainter(image)
    draw_spectrum(painter, QRectF(0, 0, WIDTH * scale, HEIGHT * scale), view, theme, scale)
    painter.end()
    return image


def columns_of(image, colour, row, scale=1.0):
    """Return the columns in which a bar's middle line has a colour."""
    y = int((row + 0.5) * 21 * scale)
    return [x for x in range(image.width()) if image.pixelColor(x, y).name() == colour.lower()]


def test_lengths_are_in_proportion(qapp):
    image = drawn(spectrum(25.0, 50.0, 75.0, 100.0, 150.0, 200.0))
    lengths = [len(columns_of(image, LIGHT.a, row)) for row in range(6)]
    for length, share in zip(lengths, (1, 2, 3, 4, 6, 8), strict=True):
        assert length == pytest.approx(lengths[5] * share / 8, abs=2)
    assert lengths[5] > 80


@pytest.mark.parametrize("theme", [LIGHT, NIGHT])
def test_a_negative_bar_leaves_to_the_left_in_the_alert_colour(qapp, theme):
    image = drawn(spectrum(-60.0, 33.0, 41.0, 55.0, 82.0, 120.0), theme)
    negative = columns_of(image, theme.alert, 0)
    positive = columns_of(image, theme.a, 5)
    bar = [x for x in negative if x < min(positive)]
    assert len(bar) == pytest.approx(len(positive) / 2, abs=3)
    assert max(bar) <= min(positive)
    assert columns_of(image, theme.alert, 5) == []


def test_a_bar_near_zero_is_flagged(qapp):
    view = spectrum(0.2, 33.0, 41.0, 55.0, 82.0, 120.0)
    assert [bar_role(bar, view) for bar in view.bars] == ["doubt", "a", "a", "a", "a", "a"]
    assert columns_of(drawn(view), LIGHT.doubt, 0)
    assert bar_role(view.bars[0], spectrum(0.2, 0.2, 0.2)) == "a"


def test_the_drawing_scales(qapp):
    one = columns_of(drawn(spectrum(10.0, 20.0, 30.0, 40.0, 50.0, 60.0)), LIGHT.a, 5)
    view = spectrum(10.0, 20.0, 30.0, 40.0, 50.0, 60.0)
    two = columns_of(drawn(view, scale=2.0), LIGHT.a, 5, scale=2.0)
    assert len(two) == pytest.approx(2 * len(one), abs=3)


def test_copying_gives_full_precision(qtbot):
    widget = StrainSpectrum()
    qtbot.addWidget(widget)
    widget.show_view(spectrum(1 / 3, 2.0))
    qtbot.keyClick(widget, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    lines = QGuiApplication.clipboard().text().split("\n")
    assert float(lines[0].split("\t")[0]) == 1 / 3
    assert lines[1].split("\t")[1] == "strain 1"


def test_the_note_has_room(qtbot):
    widget = StrainSpectrum()
    qtbot.addWidget(widget)
    widget.show_view(spectrum(1.0, 2.0, 3.0, 4.0, 5.0, 6.0))
    assert widget.heightForWidth(60) > widget.heightForWidth(340) > 6 * 21
    assert "6 strain 5" in widget.accessibleDescription()
