"""What the verdict band and the ledger are given."""

from dataclasses import replace

import numpy as np
import pytest

from core.state import OrientationChoice
from gui.documents import first_state, open_demo
from gui.presenting import ledger
from tests.gui.presenting.benches import (
    CUBIC,
    SPECIMEN,
    STATE,
    TABLE,
    TURNS,
    UNSTABLE,
    as_rows,
    without_density,
)
from tests.materials import cubic

_KELVIN = np.sqrt(np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2]))


def texts(view):
    return [[cell.text for cell in row] for row in view.cells]


def kinds(view):
    return [[cell.kind for cell in row] for row in view.cells]


# ------------------------------------------------------------------ constants
def test_the_grid_holds_the_table_at_full_precision():
    view = ledger.constants_view(SPECIMEN, "stiffness")
    read = np.array([[float(cell.full) for cell in row] for row in view.cells])
    assert np.array_equal(read, (TABLE + TABLE.T) / 2)
    assert view.unit == "GPa"
    assert view.editable
    assert kinds(view)[0] == ["independent"] * 6
    assert kinds(view)[5] == ["dependent"] * 5 + ["independent"]
    assert view.cells[5][0].tooltip.startswith("equal to C16: −16.6")


def test_of_a_cubic_table_three_cells_are_free():
    view = ledger.constants_view(CUBIC.specimen, "stiffness")
    free = {(i, j) for i in range(6) for j in range(6) if kinds(view)[i][j] == "independent"}
    assert free == {(0, 0), (0, 1), (3, 3)}
    assert texts(view)[0][3] == "·"
    assert view.cells[1][1].tooltip == "C22 = C11: 230.0 GPa"


def test_a_number_that_breaks_the_class_is_shown_and_named():
    broken = np.array(CUBIC.specimen.stiffness)
    broken[0, 4] = broken[4, 0] = 7.5
    broken[1, 1] += 3.0
    view = ledger.constants_view(replace(CUBIC.specimen, stiffness=as_rows(broken)),
                                 "stiffness")  # fmt: skip
    assert texts(view)[0][4] == "7.5"  # to the place of 230.0
    assert kinds(view)[0][4] == "independent"
    assert "7.5" in view.cells[0][4].tooltip
    assert kinds(view)[1][1] == "independent"
    assert texts(view)[1][1] == "233.0"


def test_the_compliance_is_the_inverse_with_engineering_shears():
    view = ledger.constants_view(SPECIMEN, "compliance")
    read = np.array([[float(cell.full) for cell in row] for row in view.cells])
    assert np.allclose(read, np.linalg.inv(TABLE) * 1e3, rtol=1e-10)
    assert view.unit == "1/TPa"


def test_a_table_without_an_inverse_says_so():
    singular = replace(CUBIC.specimen, stiffness=as_rows(cubic(100.0, 100.0, 50.0)))
    view = ledger.constants_view(singular, "compliance")
    assert not view.editable
    assert view.note
    assert view.cells[0][0].text == "–"


def test_numbers_keep_the_digits_that_their_uncertainty_leaves():
    table, std = np.array(SPECIMEN.stiffness), np.zeros((6, 6))
    table[0, 0], std[0, 0] = 86.1234, 0.34
    known = replace(SPECIMEN, stiffness=as_rows(table), stiffness_std=as_rows(std))
    assert texts(ledger.constants_view(known, "stiffness"))[0][0] == "86.12"
    face = ledger.constants_view(known, "uncertainty")
    assert texts(face)[0][:2] == ["0.34", "·"]


@pytest.mark.parametrize(("face", "name"), [
    ("stiffness", "Change C14"), ("compliance", "Change S14"),
    ("uncertainty", "Change the uncertainty of C14"),
])  # fmt: skip
def test_steps_are_named_after_the_upper_cell(face, name):
    assert ledger.edit_label(face, 3, 0) == name


# ------------------------------------------------------------------ verdict and spectrum
def test_the_spectrum_is_that_of_the_kelvin_matrix():
    view = ledger.spectrum_view(SPECIMEN)
    expected = np.linalg.eigvalsh(TABLE * _KELVIN)
    assert np.allclose([bar.value for bar in view.bars], expected, rtol=1e-12)
    assert view.note == ""
    unstable = ledger.spectrum_view(UNSTABLE.specimen)
    assert [bar.value for bar in unstable.bars][:3] == pytest.approx([-10.0] * 3)
    assert unstable.note.startswith("3 of 6")
    assert unstable.bars[0].text == "−10.0"


def test_the_mark_tells_stable_from_doubtful_from_unstable():
    assert ledger.verdict_view(SPECIMEN).mark == "stable"
    assert ledger.verdict_view(UNSTABLE.specimen).mark == "unstable"
    soft = np.linalg.eigvalsh(TABLE * _KELVIN)[0]
    unsure = replace(SPECIMEN, stiffness_std=as_rows(np.full((6, 6), soft)))
    assert ledger.verdict_view(unsure).mark == "doubtful"


def test_a_missing_or_impossible_density_is_a_fact():
    def facts(density):
        return " ".join(ledger.verdict_view(replace(SPECIMEN, density=density)).facts)

    assert "waves are off" in facts(None)
    for density in (1e-9, 1e6):
        assert "density" in facts(density)
    for density in (534.0, 2650.0, 22590.0):  # lithium, quartz, osmium
        assert "density" not in facts(density)


def test_without_uncertainties_all_numbers_have_the_decimals_of_the_largest():
    table = np.array(CUBIC.specimen.stiffness)
    table[0, 0], table[0, 4], table[4, 0] = 57.344, -2e-7, -2e-7
    table[0, 1] = table[1, 0] = 9.7031
    low = replace(CUBIC.specimen, stiffness=as_rows(np.clip(table, -1e9, 60)),
                  crystal_class="triclinic")  # fmt: skip
    shown = texts(ledger.constants_view(low, "stiffness"))
    assert (shown[0][0], shown[0][1], shown[0][4]) == ("57.34", "9.70", "0.00")
    numbers = [text for row in shown for text in row]
    assert {len(text.partition(".")[2]) for text in numbers} == {2}
    view = ledger.constants_view(low, "stiffness")
    assert view.cells[0][4].tooltip.endswith("−2e-07 GPa".replace("-", "−"))


# ------------------------------------------------------------------ forms
def test_the_specimen_form_writes_what_is_known():
    view = ledger.specimen_view(replace(STATE, specimen=replace(
        SPECIMEN, temperature_c=-10.5, density=2684.25)))  # fmt: skip
    assert (view.density, view.temperature) == ("2684.25", "−10.5")
    assert view.choices == ()
    assert ledger.specimen_view(without_density(STATE)).density == ""
    two = replace(STATE, other=CUBIC.specimen)
    assert ledger.specimen_view(two).choices == (("A", "blank"), ("B", "casting"))


def test_a_table_off_its_class_says_by_how_much():
    tilted = first_state(open_demo("prism_lm29_other_axes.json"))
    assert "away from" in ledger.specimen_view(tilted).class_note
    assert ledger.specimen_view(CUBIC).class_note == ""


def test_the_cell_form_tells_the_volume():
    view = ledger.cell_form_view(SPECIMEN)
    a, b, c, *angles = (float(x) for x in (*view.lengths, *view.angles))
    ca, cb, cg = np.cos(np.radians(angles))
    volume = a * b * c * np.sqrt(1 - ca**2 - cb**2 - cg**2 + 2 * ca * cb * cg)
    assert f"volume {volume:.1f} Å³" in view.note
    nothing = ledger.cell_form_view(replace(SPECIMEN, cell=None))
    assert nothing.lengths == ("", "", "")
    assert "cannot be read" in nothing.note
    assert "unit cube" in ledger.cell_form_view(CUBIC.specimen).note


# ------------------------------------------------------------------ orientations
def test_the_angle_between_a_and_b_is_said():
    note = ledger.orientation_view(STATE, "B").note
    cosine = (np.trace(TURNS["B"] @ TURNS["A"].T) - 1) / 2
    assert float(note.split("°")[0]) == pytest.approx(np.degrees(np.arccos(cosine)), rel=1e-3)
    assert ledger.orientation_view(STATE, "A").note == ""
    same = replace(STATE, orientation_b=STATE.orientation_a)
    assert ledger.orientation_view(same, "B").note == "the same orientation as A"


def test_a_turn_of_the_crystal_s_own_symmetry_is_none():
    turned = replace(CUBIC, orientation_b=OrientationChoice("axis [0 0 1] 80"))
    assert ledger.orientation_view(turned, "B").note == (
        "80.00° from A as they stand, 10.00° by the crystal's symmetry"
    )


def test_a_part_axis_that_misses_its_direction_is_doubted():
    missed = replace(CUBIC, orientation_a=OrientationChoice("Z=(1 1 0) X=[1 0 0]"))
    # In a cubic crystal [1 0 0] is 45° from (1 1 0), so X stays 45° from it.
    assert ledger.orientation_view(missed, "A").doubt == (
        "X lies 45.0° from [1 0 0], which is not in the plane (1 1 0)"
    )
    assert ledger.orientation_view(CUBIC, "A").doubt == ""


def test_every_way_of_saying_is_listed_and_the_axes_are_named():
    view = ledger.orientation_view(
        replace(CUBIC, orientation_a=OrientationChoice("Z=[1 1 0] X=[0 0 1]")), "A"
    )
    assert view.way == "directions"
    assert {words for words, _ in view.said_otherwise} == {
        words for key, words in view.ways if key != "identity"
    }
    assert view.axes == ("[0 0 1]", "[1 −1 0]", "[1 1 0]")
