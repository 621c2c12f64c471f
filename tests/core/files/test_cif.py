"""Unit cells from CIF files: invented files in the spellings that the dictionary allows."""

import pytest

from core.crystal.cell import UnitCell
from core.errors import InputError
from core.files.cif import read_cell

TEXT = """\
# invented
data_quince
_chemical_name_common  'quince salt'
_cell_length_a     8.1442(3)
_cell_length_b     12.793(1)
_CELL_LENGTH_C     7.158(12)
_cell_angle_alpha  94.25
_cell_angle_beta   116.61(2)
_cell_angle_gamma  87.7
_space_group_IT_number 2
_publ_section_comment
;
_cell_length_a 99
data_none
;
loop_
_atom_site_label
_atom_site_fract_x
A1 0.25 A2 0.5
"""


def test_the_cell_and_its_uncertainties():
    found = read_cell(TEXT)
    assert found.block == "quince"
    assert found.cell == UnitCell(8.1442, 12.793, 7.158, 94.25, 116.61, 87.7)
    assert found.std == pytest.approx((0.0003, 0.001, 0.012, 0, 0.02, 0))
    assert found.class_key == "triclinic"
    assert found.notes == ()


@pytest.mark.parametrize(
    ("number", "key"),
    [(1, "triclinic"), (3, "monoclinic"), (15, "monoclinic"), (16, "orthorhombic"),
     (74, "orthorhombic"), (75, "tetragonal_7"), (88, "tetragonal_7"), (89, "tetragonal_6"),
     (142, "tetragonal_6"), (143, "trigonal_7"), (148, "trigonal_7"), (149, "trigonal_6"),
     (167, "trigonal_6"), (168, "hexagonal"), (194, "hexagonal"), (195, "cubic"),
     (230, "cubic")],
)  # fmt: skip
def test_class_of_the_space_group(number, key):
    """First and last groups of each Laue class: International Tables A (from memory)."""
    text = TEXT.replace("_IT_number 2", f"_IT_number '{number}'")
    assert read_cell(text).class_key == key


def test_other_spellings():
    """Names with a dot, and the older tag of the group's number."""
    text = TEXT.replace("_cell_", "_cell.").replace("_space_group_IT", "_symmetry_Int_Tables")
    found = read_cell(text)
    assert found.cell.a == 8.1442
    assert found.class_key == "triclinic"
    assert read_cell(TEXT.replace("_space_group_IT_number 2", "")).class_key is None


def test_missing_angles_are_right_angles_and_noted():
    found = read_cell(TEXT.replace("_cell_angle_alpha  94.25", "_cell_angle_alpha ?"))
    assert found.cell.alpha == 90
    assert any("_cell_angle_alpha" in note for note in found.notes)


def test_the_first_of_several_blocks_with_a_cell_is_read_and_noted():
    second = "data_medlar\n" + TEXT.split("data_quince\n")[1].replace("8.1442(3)", "5.0")
    found = read_cell("data_global\n_journal_year 2031\n" + TEXT + second)
    assert found.block == "quince"
    assert found.cell.a == 8.1442
    assert any("2 data blocks" in note for note in found.notes)


def test_items_of_loops_are_no_cell():
    loop = "data_x\nloop_\n_cell_length_a\n_cell_length_b\n1 2 3 4\n_cell_length_c 5\n"
    with pytest.raises(InputError, match="_cell_length_a is not given"):
        read_cell(loop)


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ("8.1442(3)", "?", "_cell_length_a is unknown"),
        ("8.1442(3)", "8.1x", "8.1x"),
        ("_cell_length_b     12.793(1)", "", "_cell_length_b is not given"),
        ("116.61(2)", "194", "."),
    ],
)
def test_faults_are_named(old, new, said):
    with pytest.raises(InputError, match=said) as refused:
        read_cell(TEXT.replace(old, new), "quince.cif")
    assert refused.value.where.startswith("quince.cif")


@pytest.mark.parametrize("text", ["", "hello", "data_x\n_chemical_name_common y\n"])
def test_a_file_without_a_cell_is_refused(text):
    with pytest.raises(InputError, match="There is no"):
        read_cell(text)
