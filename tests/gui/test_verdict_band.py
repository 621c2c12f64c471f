"""The verdict is told by shape, colour and words, and opens into its detail."""

import pytest
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QGuiApplication, QImage, QPainter
from PySide6.QtWidgets import QApplication

from gui.theme import LIGHT, NIGHT
from gui.verdict_band import ROLES, VerdictBand, draw_mark, draw_verdict, fit_facts
from gui.viewdata import VerdictView

FACTS = ("softest strain 24.1 GPa", "universal anisotropy 1.42", "K 71.3 G 38.9 GPa (Hill)")
VIEW = VerdictView("stable", "Stable", FACTS, "Every eigenstiffness is above zero.")


@pytest.fixture
def band(qtbot):
    made = VerdictBand()
    qtbot.addWidget(made)
    made.resize(1180, 40)
    made.show_view(VIEW)
    made.show()
    qtbot.waitExposed(made)
    return made


def filled_share(mark):
    image = QImage(60, 60, QImage.Format.Format_RGB32)
    image.fill(QColor("white"))
    painter = QPainter(image)
    draw_mark(painter, QRectF(0, 0, 60, 60), mark, QColor("black"))
    painter.end()
    dark = sum(
        image.pixelColor(x, y).lightness() < 128 for x in range(60) for y in range(60)
    )
    return dark / 3600


def test_shapes_differ_even_without_colour(qapp):
    # a disc covers π/4 of its box, a triangle a half, a square nearly all
    assert filled_share("stable") == pytest.approx(0.785, abs=0.02)
    assert filled_share("doubtful") == pytest.approx(0.5, abs=0.03)
    assert filled_share("unstable") == pytest.approx((58 / 60) ** 2, abs=0.03)


@pytest.mark.parametrize("theme", [LIGHT, NIGHT])
@pytest.mark.parametrize("mark", ["stable", "doubtful", "unstable"])
def test_the_mark_has_the_colour_of_its_state(qapp, theme, mark):
    image = QImage(900, 40, QImage.Format.Format_RGB32)
    image.fill(theme.colour("panel"))
    painter = QPainter(image)
    view = VerdictView(mark, "Words", FACTS, "")
    draw_verdict(painter, QRectF(0, 0, 900, 40), view, theme)
    painter.end()
    assert image.pixelColor(16 + 6, 20).name() == theme.colour(ROLES[mark]).name()


def test_facts_are_left_out_whole_and_counted(qapp):
    metrics = QFontMetricsF(QApplication.font())
    whole = fit_facts(metrics, FACTS, 5000)
    assert whole == "  ·  ".join(FACTS)
    room = metrics.horizontalAdvance(FACTS[0]) + 120
    short = fit_facts(metrics, FACTS, room)
    assert short == f"{FACTS[0]}  ·  and 2 more"
    assert metrics.horizontalAdvance(short) <= room
    for room in range(0, 800, 37):
        assert metrics.horizontalAdvance(fit_facts(metrics, FACTS, room)) <= max(room, 1)


def test_nothing_is_drawn_over_the_hint_at_the_end(band):
    long = VerdictView("unstable", "Unstable " + "because " * 60, FACTS, "")
    band.show_view(long)
    picture = band.grab().toImage()
    ground = LIGHT.panel.lower()
    margin = {picture.pixelColor(x, y).name() for x in range(1170, 1180) for y in range(2, 36)}
    assert margin == {ground}


def test_a_click_or_a_key_asks_for_the_sheet(band, qtbot):
    asked = []
    band.opened.connect(lambda: asked.append(True))
    qtbot.mouseClick(band, Qt.MouseButton.LeftButton)
    for key in (Qt.Key.Key_Return, Qt.Key.Key_Space):
        qtbot.keyClick(band, key)
    assert len(asked) == 3
    qtbot.mouseClick(band, Qt.MouseButton.RightButton)
    assert len(asked) == 3


def test_the_hint_turns_over_while_the_sheet_is_open(band):
    hint = (1180 - 34, 8, 30, 24)
    away = band.grab().toImage().copy(*hint)
    band.show_open(True)
    turned = band.grab().toImage().copy(*hint)
    assert turned != away
    band.show_open(False)
    assert band.grab().toImage().copy(*hint) == away


def test_it_can_be_read_aloud_and_copied(band, qtbot):
    assert band.accessibleDescription().startswith("stable: Stable")
    assert FACTS[1] in band.toolTip()
    qtbot.keyClick(band, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    assert QGuiApplication.clipboard().text().split("\n") == ["Stable", *FACTS, VIEW.detail]
