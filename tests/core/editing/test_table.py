"""Foreign tables and cells put into a specimen: what is replaced, and what is claimed."""

import numpy as np
import pytest

from core.crystal.cell import UnitCell
from core.editing.table import simplest_claim, with_cell, with_table
from core.errors import InputError
from core.files.cif import read_cell
from core.files.matrices import understand
from core.state import Specimen, as_matrix
from tests.materials import cubic

BEFORE = Specimen(
    "before", as_matrix(np.eye(6) * 9.0), 2700.0, "triclinic",
    stiffness_std=as_matrix(np.eye(6)), covariance=as_matrix(np.eye(21)),
)  # fmt: skip
CIF = """data_made_up
_cell_length_a 4.9134(2)
_cell_length_b 4.9134(2)
_cell_length_c 5.4052(3)
_cell_angle_alpha 90
_cell_angle_beta 90
_cell_angle_gamma 120
"""


def rows(table):
    return "GPa\n" + "\n".join(" ".join(f"{x:.4f}" for x in row) for row in table)


def test_a_cubic_table_claims_to_be_cubic():
    claim = simplest_claim(understand(rows(cubic(131.0, 97.4, 86.2))))
    assert (claim.class_key, claim.certain) == ("cubic", True)


def test_rounding_does_not_hide_a_class_but_noise_does():
    table = cubic(131.0, 97.4, 86.2)
    # The mean over the three axes leaves 0.1 √(2/3) of ‖C‖ = 444.5 in Kelvin form: 0.0184 %.
    table[0, 0] += 0.1
    claim = simplest_claim(understand(rows(table)))
    assert (claim.class_key, claim.certain) == ("cubic", False)
    assert "within 0.018 %" in claim.reason
    table[2, 2] += 10.0
    assert simplest_claim(understand(rows(table))).class_key == "tetragonal_6"


def test_a_list_claims_the_class_whose_constants_it_names():
    known = understand("C11 = 93.1(4) GPa\nC12 = 8.4\nC13 = 13.2\nC14 = -16.9\nC33 = 104.6\n"
                       "C44 = 57.2")  # fmt: skip
    assert simplest_claim(known).class_key == "trigonal_6"


def test_the_table_replaces_numbers_and_claims_and_nothing_else():
    known = understand("C11 = 131.0(5) GPa\nC12 = 97.4\nC44 = 86.2")
    found = with_table(BEFORE, known, "cubic", "y", "x||a, z||c*")
    assert np.array(found.stiffness) == pytest.approx(cubic(131.0, 97.4, 86.2), abs=1e-9)
    assert found.stiffness_std[0][0] == found.stiffness_std[2][2] == 0.5
    assert found.covariance is None
    assert (found.name, found.density) == ("before", 2700.0)
    assert (found.crystal_class, found.crystal_axes) == ("cubic", "x||a, z||c*")


def test_without_uncertainties_the_old_ones_go():
    known = understand(rows(cubic(131.0, 97.4, 86.2)))
    found = with_table(BEFORE, known, "cubic", "y", BEFORE.crystal_axes)
    assert (found.stiffness_std, found.covariance) == (None, None)


def test_a_table_with_an_open_question_is_not_used():
    known = understand(rows(cubic(131.0, 97.4, 86.2)).replace("97.4000", "99.0000", 1))
    assert known.questions
    with pytest.raises(ValueError, match="open questions"):
        with_table(BEFORE, known, "cubic", "y", BEFORE.crystal_axes)


def test_a_cell_is_taken_over_and_the_numbers_stay():
    found = with_cell(BEFORE, read_cell(CIF), "x||a, z||c*")
    assert found.cell == UnitCell(4.9134, 4.9134, 5.4052, 90.0, 90.0, 120.0)
    assert (found.stiffness, found.crystal_axes) == (BEFORE.stiffness, "x||a, z||c*")


def test_axes_that_cannot_be_laid_in_the_cell_are_refused():
    with pytest.raises(InputError, match="parallel"):
        with_cell(BEFORE, read_cell(CIF), "z||c, y||c*")
