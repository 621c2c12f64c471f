"""The hemisphere: orientation, projection, undefined areas, and what its controls send out."""

import math
from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetrics

from core.directional.projection import from_disc, to_disc
from gui.plots.disc_picture import undefined, value_in
from gui.plots.hemisphere import HemispherePlot, disc_ground, draw_hemisphere
from gui.theme import LIGHT, colours_of, style_sheet
from gui.viewdata import ScaleView
from tests.gui.plots.demo_views import (
    difference_hemisphere,
    disc,
    hemisphere_of,
    young_hemisphere,
)
from tests.gui.plots.drawing import draw_image, draw_pdf, draw_svg, near, svg_words

RECT = QRectF(0, 0, 520, 400)


def at(pixels, view, x, y, rect=RECT):
    """Return the pixel at a point of the disc."""
    px, py = disc_ground(rect, view, LIGHT).place(np.array([x, y]))
    return pixels[int(py), int(px)]


def colour_at(view, value):
    rgba = colours_of(np.array([value]), view.scale.low, view.scale.high, view.scale.diverging)
    return QColor(*(int(c) for c in rgba[0, :3]))


# ---------------------------------------------------------------- drawing
@pytest.mark.parametrize(
    ("axis", "bright", "dark"), [(0, (0.8, 0.0), (-0.8, 0.0)), (1, (0.0, 0.8), (0.0, -0.8))]
)
def test_part_x_is_right_and_part_y_up(qapp, axis, bright, dark):
    view = hemisphere_of(disc()[axis])
    pixels = draw_image(draw_hemisphere, view)
    assert near(at(pixels, view, *bright), colour_at(view, disc_value(view, *bright)), 12)
    assert near(at(pixels, view, *dark), colour_at(view, disc_value(view, *dark)), 12)
    assert at(pixels, view, *bright)[0] > at(pixels, view, *dark)[0] + 80  # viridis ends


def disc_value(view, x, y):
    return value_in(view.picture, x, y)


def test_the_picture_fills_the_disc_and_no_more(qapp):
    # Coarse, so that a rim mixed with nothing would be several pixels wide.
    values = np.where(np.isnan(disc(31)[0]), np.nan, 1.0)
    view = hemisphere_of(values, scale=scale(0.0, 1.0))
    pixels = draw_image(draw_hemisphere, view)
    yellow = colour_at(view, 1.0)
    for angle in np.radians(np.arange(8.0, 360.0, 7.0)):
        inside = at(pixels, view, 0.975 * math.cos(angle), 0.975 * math.sin(angle))
        outside = at(pixels, view, 1.05 * math.cos(angle), 1.05 * math.sin(angle))
        assert near(inside, yellow, 12)
        assert near(outside, LIGHT.panel, 6)


def scale(low, high, diverging=False):
    return ScaleView(low, high, "low", "high", "a quantity", diverging)


def test_signed_pictures_are_pale_at_zero(qapp):
    x = disc()[0]
    view = hemisphere_of(np.where(x > 0.0, 3.0 * x, x), diverging=True)
    middle = at(draw_image(draw_hemisphere, view), view, 0.0, 0.4)
    assert middle.min() > 200


def test_undefined_area_is_grey_and_hatched(qapp):
    x, y, _ = disc()
    values = np.where((x < 0.0) & ~np.isnan(x), np.nan, 1.0 + 0.0 * y)
    view = hemisphere_of(values, scale=scale(0.0, 1.0), notice="No wave on the left.")
    assert undefined(view.picture).any()
    ground = disc_ground(RECT, view, LIGHT)
    pixels = draw_image(draw_hemisphere, view)
    left, right = (
        int(ground.centre.x() - 0.7 * ground.rim),
        int(ground.centre.x() - 0.2 * ground.rim),
    )
    area = pixels[int(ground.centre.y()) - 20 : int(ground.centre.y()) + 20, left:right]
    assert (np.ptp(area, axis=-1) < 12).all()  # grey
    assert area.max() - area.min() > 25  # with lines
    assert near(at(pixels, view, 0.5, 0.0), colour_at(view, 1.0), 12)
    whole = hemisphere_of(young_hemisphere().picture)
    assert not undefined(whole.picture).any()


def test_nothing_defined_says_why(qapp, tmp_path):
    view = hemisphere_of(disc()[0])
    empty = replace(view, picture=np.full((64, 64), np.nan), notice="Needs a density.")
    words = svg_words(draw_svg(draw_hemisphere, empty, tmp_path / "h.svg"))
    assert "Needs a density." in words


def test_a_notice_is_whole_in_a_small_frame(qapp):
    # Written into the small disc the long sentence lost its first and last words.
    sentence = "Waves want a density. Enter it in the ledger; the stiffness side works without."
    size = (226, 170)
    view = replace(hemisphere_of(disc()[0]), picture=np.full((64, 64), np.nan), marks=())
    ground = disc_ground(QRectF(0, 0, *size), replace(view, notice=sentence), LIGHT)
    pixels = draw_image(draw_hemisphere, replace(view, notice=sentence), size)
    columns = np.flatnonzero(near(pixels, LIGHT.secondary, 30).any(axis=0))
    assert columns.max() - columns.min() > 2 * ground.rim + 20
    assert columns.min() > 5
    assert columns.max() < size[0] - 5


@pytest.mark.parametrize(("size", "written"), [((520, 400), True), ((240, 180), False)])
def test_a_small_disc_names_the_axes_only(qapp, tmp_path, size, written):
    marks = ((0.0, 0.0, "[0 0 1]", "direction"), (0.6, 0.5, "[1 1 1]", "direction"))
    view = hemisphere_of(disc()[0], marks=marks)
    words = svg_words(draw_svg(draw_hemisphere, view, tmp_path / "h.svg", size))
    assert "[0 0 1]" in words
    assert ("[1 1 1]" in words) == written


def test_marks_stand_where_their_directions_fall(qapp):
    n = np.array([0.3, -0.5, np.sqrt(1 - 0.09 - 0.25)])
    for projection in ("equal_area", "stereographic"):
        x, y = to_disc(n, projection)
        view = hemisphere_of(disc()[0], projection=projection,
                             marks=((float(x), float(y), "pin", "pin"),))  # fmt: skip
        assert near(at(draw_image(draw_hemisphere, view), view, x, y), LIGHT.alert, 20)


def test_colliding_labels_are_left_out(qapp, tmp_path):
    crowd = tuple((0.002 * i, 0.001 * i, f"[{i} 1 7]", "direction") for i in range(9))
    view = hemisphere_of(disc()[0], marks=crowd)
    words = svg_words(draw_svg(draw_hemisphere, view, tmp_path / "h.svg"))
    written = [label for _, _, label, _ in crowd if label in words]
    assert 1 <= len(written) <= 4
    assert written[0] == "[0 1 7]"


def test_contours_are_drawn_and_labelled_sparsely(qapp, tmp_path):
    view = young_hemisphere()
    words = svg_words(draw_svg(draw_hemisphere, view, tmp_path / "h.svg"))
    levels = {f"{level:g}" for level, _ in view.contours}
    assert len(levels & words) >= 3
    plain = replace(view, contours=())
    changed = draw_image(draw_hemisphere, view) != draw_image(draw_hemisphere, plain)
    assert 0.005 < changed.any(axis=-1).mean() < 0.06


def test_vectors_have_text_and_one_picture(qapp, tmp_path):
    text = draw_svg(draw_hemisphere, young_hemisphere(), tmp_path / "h.svg", titled=True)
    words = svg_words(text)
    assert {"X", "Y", "[0 0 1]"} <= words
    assert any("equal area" in word for word in words)
    assert text.count("<image") == 1
    data = draw_pdf(draw_hemisphere, difference_hemisphere(), tmp_path / "h.pdf")
    assert data.startswith(b"%PDF")
    assert b"/Font" in data


# ---------------------------------------------------------------- widget
@pytest.fixture
def plot(qtbot):
    widget = HemispherePlot()
    qtbot.addWidget(widget)
    widget.resize(520, 400)
    widget.show_view(young_hemisphere())
    widget.show()
    qtbot.waitExposed(widget)
    return widget


def press(plot, qtbot, x, y):
    view = young_hemisphere()
    px, py = disc_ground(QRectF(plot.canvas.rect()), view, LIGHT).place(np.array([x, y]))
    qtbot.mouseClick(plot.canvas, Qt.MouseButton.LeftButton, pos=QPointF(px, py).toPoint())


@pytest.mark.parametrize("projection", ["equal_area", "stereographic"])
def test_a_click_picks_the_direction_drawn_there(plot, qtbot, projection):
    plot.show_view(young_hemisphere(projection))
    n = np.array([0.48, 0.6, 0.64])
    with qtbot.waitSignal(plot.point_picked) as caught:
        press(plot, qtbot, *to_disc(n, projection))
    np.testing.assert_allclose(from_disc(np.array(caught.args), projection), n, atol=0.012)


def test_clicks_beside_the_disc_pick_nothing_and_the_rim_is_the_rim(plot, qtbot):
    with qtbot.assertNotEmitted(plot.point_picked):
        press(plot, qtbot, 1.3, 0.0)
    with qtbot.waitSignal(plot.point_picked) as caught:
        press(plot, qtbot, 1.03, 0.0)
    assert math.hypot(*caught.args) == pytest.approx(1.0)


def test_arrow_keys_move_the_pin(plot, qtbot):
    with qtbot.waitSignal(plot.point_picked) as caught:
        qtbot.keyClick(plot.canvas, Qt.Key.Key_Up)
    assert caught.args == pytest.approx([0.35, 0.44])


def test_faces_ask_and_the_shown_one_is_pressed(plot, qtbot):
    assert plot.face("A").isChecked()
    with qtbot.waitSignal(plot.shown_chosen) as caught:
        qtbot.mouseClick(plot.face("difference"), Qt.MouseButton.LeftButton)
    assert caught.args == ["difference"]
    with qtbot.assertNotEmitted(plot.shown_chosen):
        qtbot.mouseClick(plot.face("A"), Qt.MouseButton.LeftButton)
        plot.show_view(replace(young_hemisphere(), shown="cost"))
    assert plot.face("cost").isChecked()
    assert not plot.face("A").isChecked()


def test_a_narrow_header_has_a_list_of_the_choices(plot, qtbot):
    assert plot.face("cost").isVisible()
    assert not plot.short_list.isVisible()
    plot.resize(240, 220)
    assert not plot.face("cost").isVisible()
    assert plot.short_list.isVisible()
    assert plot.short_list.currentText() == "A"
    with qtbot.waitSignal(plot.shown_chosen) as caught:
        qtbot.keyClick(plot.short_list, Qt.Key.Key_Down)
    assert caught.args == ["B"]
    with qtbot.assertNotEmitted(plot.shown_chosen):
        plot.show_view(replace(young_hemisphere(), shown="cost"))
    assert plot.short_list.currentText() == "Cutting error"
    assert plot.minimumSizeHint().width() <= 200


def test_the_pressed_face_has_room_for_its_bold_words(plot, qapp):
    qapp_sheet = qapp.styleSheet()
    qapp.setStyleSheet(style_sheet(LIGHT, "."))
    try:
        for key, words in young_hemisphere().choices:
            bold = QFontMetrics(LIGHT.font(bold=True)).horizontalAdvance(words)
            assert plot.face(key).width() >= bold + 4
    finally:
        qapp.setStyleSheet(qapp_sheet)


def test_fewer_choices_take_buttons_away(plot):
    plot.show_view(replace(young_hemisphere(), choices=(("A", "A"),)))
    assert plot.face("B") is None
    assert plot.face("A").isChecked()


def test_projection_button_asks_for_the_other(plot, qtbot):
    assert plot.projection.text() == "equal area"
    with qtbot.waitSignal(plot.projection_chosen) as caught:
        qtbot.mouseClick(plot.projection, Qt.MouseButton.LeftButton)
    assert caught.args == ["stereographic"]
    plot.show_view(young_hemisphere("stereographic"))
    assert plot.projection.text() == "stereographic"


def test_sheets_are_offered_where_there_are_three(plot, qtbot):
    assert not plot.sheet.isVisible()
    sheets = ((0, "fastest"), (1, "middle"), (2, "slowest"))
    with qtbot.assertNotEmitted(plot.sheet_chosen):
        plot.show_view(replace(young_hemisphere(), sheets=sheets, sheet=1))
    assert plot.sheet.isVisible()
    assert plot.sheet.currentText() == "middle"
    with qtbot.waitSignal(plot.sheet_chosen) as caught:
        plot.sheet.setFocus()
        qtbot.keyClick(plot.sheet, Qt.Key.Key_Down)
    assert caught.args == [2]


def test_hover_tells_direction_and_value(plot):
    x, y = to_disc(np.array([0.6, 0.0, 0.8]), "equal_area")
    (where, _), (value, _) = plot.readout(float(x), float(y))
    assert where == "θ 36.9°  φ 0.0°"
    assert float(value) == pytest.approx(value_in(young_hemisphere().picture, x, y), rel=1e-3)


def test_copying_gives_a_picture(plot):
    image = plot.picture(2.0)
    assert image.width() == 2 * plot.canvas.width()
    assert image.pixelColor(image.width() // 2, image.height() // 2) != image.pixelColor(2, 2)
