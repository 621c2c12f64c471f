"""Six spellings of one table, each arriving right or with a question; cells of CIF files."""

from pathlib import Path

import numpy as np
import pytest

from core.errors import InputError
from core.files.cif import read_cell
from gui.presenting import taking_in
from tests.gui.presenting.benches import CUBIC

TABLES = Path(__file__).parents[2] / "core" / "files" / "tables"
SPECIMEN = CUBIC.specimen
# The invented trigonal table that most of the files spell; see tests/core/files.
TRIGONAL = {(0, 0): 93.1, (0, 1): 8.4, (0, 2): 13.2, (0, 3): -16.9, (2, 2): 104.6, (3, 3): 57.2}


def text_of(name):
    return (TABLES / name).read_text(encoding="utf-8")


def marks(view):
    return {reading.field: reading.mark for reading in view.readings}


def table_of(name, **choices):
    known = taking_in.read(text_of(name), choices)
    return np.array(taking_in.result(SPECIMEN, known, choices).stiffness)


@pytest.mark.parametrize(
    "name", ["full_gpa.txt", "lower_dyn.txt", "upper_kbar.txt", "in_a_row_pa.txt",
             "latex_rows.txt", "list_uncertainties.txt", "decimal_commas.txt", "kelvin.txt"],
)  # fmt: skip
def test_spellings_that_say_enough_arrive_right(name):
    view = taking_in.taking_in_view(SPECIMEN, text_of(name), {})
    assert view.is_ready, view.status
    table = table_of(name)
    for cell, value in TRIGONAL.items():
        assert table[cell] == pytest.approx(value, rel=2e-3)


@pytest.mark.parametrize(
    ("name", "field", "answer"),
    [
        ("no_unit_mbar.txt", "unit", "Mbar"),
        ("triangles_differ.txt", "symmetry", "upper"),
        ("kelvin_not_said.txt", "notation", "Kelvin"),
        ("order_not_said.txt", "rows", "11 22 33 12 13 23"),
    ],
)
def test_the_others_arrive_with_a_question_and_then_right(name, field, answer):
    view = taking_in.taking_in_view(SPECIMEN, text_of(name), {})
    assert not view.is_ready
    assert marks(view)[field] == "question"
    assert view.status == "1 question is open"
    assert view.preview is not None
    answered = taking_in.taking_in_view(SPECIMEN, text_of(name), {field: answer})
    assert answered.is_ready
    assert marks(answered)[field] == "certain"
    table = table_of(name, **{field: answer})
    assert table[0, 0] == pytest.approx(93.1, rel=2e-3)
    assert table[0, 3] == pytest.approx(-16.9, rel=2e-3)


def test_a_text_that_is_no_table_says_why_and_where():
    view = taking_in.taking_in_view(SPECIMEN, text_of("thirty_five.txt"), {})
    assert "line 5" in view.error
    assert (view.readings, view.preview, view.is_ready) == ((), None, False)
    assert taking_in.taking_in_view(SPECIMEN, "  \n", {}).status == taking_in.NOTHING_YET


def test_a_choice_of_another_kind_lets_the_choices_about_units_go():
    choices = {"unit": "Mbar", "rows": "11 22 33 12 13 23", "axes": "y||b, z||c*"}
    assert taking_in.still_valid(choices, "kind") == {"axes": "y||b, z||c*"}
    assert taking_in.still_valid(choices, "unit") == choices


def test_the_class_and_the_axes_can_be_chosen():
    choices = {"claim": "monoclinic z", "axes": "y||b, z||c*"}
    known = taking_in.read(text_of("full_gpa.txt"), choices)
    found = taking_in.result(SPECIMEN, known, choices)
    assert (found.crystal_class, found.unique_axis) == ("monoclinic", "z")
    assert found.crystal_axes == "y||b, z||c*"
    view = taking_in.taking_in_view(SPECIMEN, text_of("full_gpa.txt"), choices)
    assert marks(view)["claim"] == marks(view)["axes"] == "certain"


def test_a_choice_that_cannot_be_is_refused():
    with pytest.raises(InputError, match="furlong"):
        taking_in.result_or_questions(SPECIMEN, text_of("full_gpa.txt"), {"unit": "furlong"})


def test_ten_megabytes_are_refused_at_once():
    view = taking_in.taking_in_view(SPECIMEN, "1 2 3 4 5 6\n" * 900_000, {})
    assert "a table has some hundreds" in view.error


# ------------------------------------------------------------------ cells
CIF = """data_lm18
_space_group_IT_number 152
_cell_length_a 4.9134(2)
_cell_length_b 4.9134(2)
_cell_length_c 5.4052(3)
_cell_angle_gamma 120
"""


def test_the_cell_of_a_file_is_shown_with_all_that_is_odd():
    view = taking_in.cell_file_view(SPECIMEN, read_cell(CIF), "lm18.cif", "z||c, y||b*")
    assert view.title == "lm18.cif, block lm18"
    assert view.lines[0] == ("a", "4.9134(2) Å")
    assert view.lines[5] == ("γ", "120°")
    notes = " ".join(view.notes)
    assert "_cell_angle_alpha is not given" in notes
    assert "A cubic crystal has a = b = c" in notes
    assert "trigonal" in notes
