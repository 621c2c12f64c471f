"""Edits of a specimen: what follows, what is refused, and that nothing else changes."""

import dataclasses
import re

import numpy as np
import pytest

from core.crystal.cell import UnitCell
from core.editing.specimen import (
    belongs_in_dialog,
    cell_name,
    fits_class,
    make_exact,
    paste_words,
    rule_text,
    set_axes,
    set_block,
    set_cell,
    set_class,
    set_constant,
    set_field,
)
from core.errors import InputError
from core.state import Specimen, as_matrix
from core.tensor.averages import averages
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS, complete, crystal_class
from tests.materials import cubic, hexagonal, random_stiffness, trigonal

RNG = np.random.default_rng(4)


def specimen(table, key="triclinic", **known):
    return Specimen("invented", as_matrix(table), crystal_class=key, **known)


def stiffness(known):
    return np.array(known.stiffness)


def refusal(edit, *arguments):
    with pytest.raises(InputError) as caught:
        edit(*arguments)
    return str(caught.value)


CUBE = specimen(cubic(131.0, 97.4, 86.2), "cubic")
ROD = specimen(trigonal(131.4, 24.6, 18.3, 21.7, 96.2, 44.9), "trigonal_6")
LOW = specimen(random_stiffness(RNG))


# --- constants ------------------------------------------------------------------------------


def test_dependent_cells_follow_where_the_table_has_the_form_of_its_class():
    changed = set_constant(ROD, "stiffness", 0, 3, "−17,5")
    np.testing.assert_allclose(
        stiffness(changed), trigonal(131.4, 24.6, 18.3, -17.5, 96.2, 44.9), rtol=1e-15
    )
    changed = set_constant(ROD, "stiffness", 1, 0, "30")  # the lower triangle is the upper
    assert stiffness(changed)[5, 5] == (131.4 - 30) / 2
    assert ROD.stiffness[0][1] == 24.6  # what was handed in is as it was


@pytest.mark.parametrize(
    ("known", "row", "column", "rule"),
    [
        (CUBE, 1, 1, "C22 = C11"),
        (CUBE, 5, 5, "C66 = C44"),
        (CUBE, 3, 0, "zero by symmetry"),
        (ROD, 5, 5, "C66 = (C11 − C12)/2"),
        (ROD, 3, 1, "C24 = −C14"),
    ],
)
def test_a_dependent_cell_is_refused_with_its_rule(known, row, column, rule):
    message = refusal(set_constant, known, "stiffness", row, column, "1")
    assert rule in message
    assert "this cell is not free" in message


def test_in_a_table_that_leaves_its_class_every_cell_is_free():
    odd = specimen(cubic(131.0, 97.4, 86.2) + np.diag([0, 1.0, 0, 0, 0, 0]), "cubic")
    assert not fits_class(odd)
    changed = stiffness(set_constant(odd, "stiffness", 0, 0, "140"))
    expected = stiffness(odd)
    expected[0, 0] = 140
    np.testing.assert_array_equal(changed, expected)


def test_a_typed_cell_is_named_when_it_cannot_be_read():
    assert refusal(set_constant, LOW, "stiffness", 3, 0, "abc").startswith("C14: ")
    assert refusal(set_constant, LOW, "compliance", 3, 0, "").startswith("S14: ")
    assert "beyond any solid" in refusal(set_constant, LOW, "stiffness", 0, 0, "1.6e11")


def test_the_compliance_is_edited_in_1_per_tpa_with_engineering_shears():
    S = np.linalg.inv(stiffness(LOW))
    for (i, j), value in {(0, 0): 12.0, (3, 3): 45.0, (1, 4): -1.5, (3, 5): 2.5}.items():
        S[i, j] = S[j, i] = value * 1e-3
        changed = set_constant(LOW, "compliance", i, j, str(value))
        np.testing.assert_allclose(stiffness(changed), np.linalg.inv(S), rtol=1e-9)
        S = np.linalg.inv(stiffness(LOW))


def test_compliances_of_a_class_follow_with_their_own_factors():
    S = np.linalg.inv(stiffness(ROD)) * 1e3
    changed = set_constant(ROD, "compliance", 0, 3, "-6")
    found = np.linalg.inv(stiffness(changed)) * 1e3
    assert found[0, 3] == pytest.approx(-6)
    assert found[1, 3] == pytest.approx(6)
    assert found[4, 5] == pytest.approx(-12)  # S56 = 2 S14
    assert found[5, 5] == pytest.approx(2 * (S[0, 0] - S[0, 1]))
    assert fits_class(changed)
    assert np.count_nonzero(stiffness(changed)) == np.count_nonzero(stiffness(ROD))  # no dust


@pytest.mark.parametrize("key", CLASS_KEYS)
def test_every_rule_of_the_compliance_is_true(key):
    claimed = crystal_class(key)
    C = complete(random_stiffness(np.random.default_rng(8), 0.2), claimed)
    S = np.linalg.inv(C)
    for i in range(6):
        for j in range(i, 6):
            if claimed.kinds[i][j] != "dependent":
                continue
            name, terms = rule_text(claimed, "compliance", i, j).split(" = ")
            assert name == cell_name("compliance", i, j)
            python = terms.replace("−", "-").replace("2 ", "2*").replace("S", "s")
            values = {f"s{k + 1}{m + 1}": S[k, m] for k in range(6) for m in range(6)}
            assert eval(python, {}, values) == pytest.approx(S[i, j], rel=1e-9)
            assert rule_text(claimed, "stiffness", i, j).startswith(f"C{i + 1}{j + 1} = ")


def test_a_compliance_without_inverse_is_refused():
    free = specimen(np.eye(6))
    message = refusal(set_constant, free, "compliance", 0, 0, "0")
    assert message.startswith("S11: ")
    flat = specimen(np.diag([1.0, 1, 1, 1, 1, 0]))
    assert "singular" in refusal(set_constant, flat, "compliance", 0, 0, "2").lower()


# --- uncertainties --------------------------------------------------------------------------


def test_an_uncertainty_is_set_with_its_mirror_and_dependents():
    changed = set_constant(LOW, "uncertainty", 4, 1, "0.3")
    assert changed.stiffness_std[1][4] == changed.stiffness_std[4][1] == 0.3
    assert changed.stiffness == LOW.stiffness
    first = set_constant(ROD, "uncertainty", 0, 0, "3")
    both = set_constant(first, "uncertainty", 0, 1, "4")
    assert both.stiffness_std[1][1] == 3.0
    assert both.stiffness_std[5][5] == 2.5  # C66 = (C11 − C12)/2: √(3² + 4²)/2
    assert "not free" in refusal(set_constant, ROD, "uncertainty", 5, 5, "1")


def test_a_negative_uncertainty_is_refused():
    assert "cannot be negative" in refusal(set_constant, LOW, "uncertainty", 0, 0, "-0.1")
    assert "cannot be negative" in refusal(set_block, LOW, "uncertainty", 0, 0, "0.1 -0.1")


def test_uncertainties_of_nothing_are_not_kept():
    set_once = set_constant(LOW, "uncertainty", 0, 0, "0.1")
    assert set_constant(set_once, "uncertainty", 0, 0, "0").stiffness_std is None


def test_a_changed_uncertainty_takes_the_old_covariance_away():
    known = dataclasses.replace(LOW, covariance=as_matrix(np.eye(21)))
    assert set_constant(known, "uncertainty", 0, 0, "0.1").covariance is None
    assert set_constant(known, "stiffness", 0, 0, "120").covariance == known.covariance


# --- pasting --------------------------------------------------------------------------------

TABLE = np.round(random_stiffness(np.random.default_rng(9)), 3)


def text_of(rows):
    return "\n".join("\t".join(f"{x!r}" for x in map(float, row)) for row in rows)


def upper(table):
    return [table[i, i:] for i in range(6)]


def lower(table):
    return [table[i, : i + 1] for i in range(6)]


FORMS = {
    "6×6": TABLE,
    "upper triangle": upper(TABLE),
    "lower triangle": lower(TABLE),
    "21 in a row": [np.concatenate(upper(TABLE))],
}


@pytest.mark.parametrize("form", FORMS)
@pytest.mark.parametrize("cell", [(0, 0), (4, 3)])
def test_a_whole_table_replaces_everything_wherever_it_is_pasted(form, cell):
    known = dataclasses.replace(
        LOW, stiffness_std=as_matrix(np.ones((6, 6))), covariance=as_matrix(np.eye(21))
    )
    changed = set_block(known, "stiffness", *cell, text_of(FORMS[form]))
    np.testing.assert_array_equal(stiffness(changed), TABLE)
    assert changed.stiffness_std is changed.covariance is None  # those of other numbers
    S = set_block(LOW, "compliance", *cell, text_of(FORMS[form]))
    np.testing.assert_allclose(stiffness(S), np.linalg.inv(TABLE * 1e-3), rtol=1e-9)
    sigma = set_block(LOW, "uncertainty", *cell, text_of(np.abs(r) for r in FORMS[form]))
    np.testing.assert_array_equal(np.array(sigma.stiffness_std), np.abs(TABLE))
    assert sigma.stiffness == LOW.stiffness


def test_a_list_of_named_constants_is_a_whole_table():
    text = "C11 = 131.0(5)\nC12 = 97.4(3), C44 = 86.2"
    changed = set_block(LOW, "stiffness", 2, 2, text)
    np.testing.assert_array_equal(stiffness(changed), stiffness(CUBE))
    assert np.array(changed.stiffness_std)[2, 2] == pytest.approx(0.5)  # it came with the table
    assert changed.crystal_class == "cubic"  # what the list is of, it claims
    assert "class taken as cubic" in paste_words(LOW, changed, "stiffness", text)


@pytest.mark.parametrize(
    ("text", "key", "axis"),
    [
        ("C11 168.4 C12 121.4 C44 75.4", "cubic", "y"),
        ("C11 = 168.4 GPa\nC12 = 121.4 GPa\nC44 = 75.4 GPa", "cubic", "y"),
        ("C11 86.8 C12 7 C13 11.9 C14 -18 C33 105.8 C44 58.2", "trigonal_6", "y"),
    ],
)
def test_the_class_of_a_pasted_list_is_claimed_and_named_in_words(text, key, axis):
    changed = set_block(LOW, "stiffness", 0, 0, text)
    assert (changed.crystal_class, changed.unique_axis) == (key, axis)
    assert fits_class(changed)
    words = "; ".join(paste_words(LOW, changed, "stiffness", text))
    assert crystal_class(key).name.split(",")[0] in words
    assert "_" not in words


def test_what_was_made_of_a_paste_is_told():
    known = dataclasses.replace(CUBE, stiffness_std=as_matrix(np.ones((6, 6))))
    in_pascal = "Pa\n" + text_of(TABLE * 1e9)
    changed = set_block(known, "stiffness", 0, 0, in_pascal)
    np.testing.assert_allclose(stiffness(changed), TABLE, rtol=1e-12)
    assert paste_words(known, changed, "stiffness", in_pascal) == (
        "unit taken as Pa and converted",
        "the claim to be cubic is as before",
        "the old uncertainties are gone",
        "rows taken as 11 22 33 23 13 12",
        "notation taken as Voigt",
    )
    assert paste_words(LOW, LOW, "stiffness", "1 2\n3 4") == ()
    assert paste_words(LOW, LOW, "uncertainty", text_of(TABLE)) == ()


def test_what_cannot_be_guessed_about_a_paste_is_refused_with_the_question():
    message = refusal(set_block, LOW, "stiffness", 0, 0, text_of(TABLE * 1e9))
    assert "Which is the unit?" in message


@pytest.mark.parametrize("face", ["stiffness", "compliance", "uncertainty"])
def test_a_table_that_is_not_symmetric_is_refused_with_both_cells(face):
    odd = np.abs(TABLE)
    odd[1, 4] += 1.0
    message = refusal(set_block, LOW, face, 0, 0, text_of(odd))
    assert "ow 2, column 5" in message
    assert "row 5, column 2" in message


def test_a_smaller_block_fills_the_cells_from_where_it_is_pasted():
    changed = stiffness(set_block(LOW, "stiffness", 0, 3, "1 2 3\n4 5 6"))
    expected = stiffness(LOW)
    expected[:2, 3:] = [[1, 2, 3], [4, 5, 6]]
    expected[3:, :2] = expected[:2, 3:].T
    np.testing.assert_array_equal(changed, expected)


def test_a_smaller_block_may_go_into_the_lower_triangle():
    changed = stiffness(set_block(LOW, "stiffness", 3, 0, "1 4\n2 5\n3 6"))
    expected = stiffness(set_block(LOW, "stiffness", 0, 3, "1 2 3\n4 5 6"))
    np.testing.assert_array_equal(changed, expected)


def test_a_block_across_the_diagonal_must_agree_with_itself():
    changed = stiffness(set_block(LOW, "stiffness", 1, 1, "9 2\n2 8"))
    assert (changed[1, 2], changed[2, 1], changed[2, 2]) == (2, 2, 8)
    message = refusal(set_block, LOW, "stiffness", 1, 1, "9 2\n3 8")
    assert "Row 2, column 3 would be 2 but row 3, column 2 would be 3" in message


def test_a_block_on_the_compliance_face_has_engineering_shears():
    S = np.linalg.inv(stiffness(LOW))
    S[3, 3], S[3, 4], S[4, 3], S[4, 4] = 0.03, 0.001, 0.001, 0.04
    changed = set_block(LOW, "compliance", 3, 3, "30 1\n1 40")
    np.testing.assert_allclose(stiffness(changed), np.linalg.inv(S), rtol=1e-9)


@pytest.mark.parametrize("face", ["stiffness", "compliance", "uncertainty"])
@pytest.mark.parametrize(
    ("row", "column", "text", "words"),
    [
        (4, 0, "1\n2\n3", "does not fit from row 5, column 1"),
        (0, 5, "1 2", "does not fit from row 1, column 6"),
        (0, 0, "1 2\n3", "have 2, 1 numbers; rows of one length were expected"),
        (0, 0, "1 2 3 4 5 6 7", "7 numbers in 1 row .*are no table"),
        (0, 0, "1 b", "“b” is not a number"),
        (0, 0, "", "no numbers"),
        (0, 0, "some words that are longer than any list of constants", "no numbers"),
    ],
)
def test_a_block_that_fits_nowhere_is_refused(face, row, column, text, words):
    assert re.search(words, refusal(set_block, LOW, face, row, column, text))


# --- class ----------------------------------------------------------------------------------


def test_another_class_completes_the_table_at_once():
    changed = set_class(LOW, "cubic")
    c = stiffness(LOW)
    np.testing.assert_allclose(stiffness(changed), cubic(c[0, 0], c[0, 1], c[3, 3]), rtol=1e-14)
    assert changed.crystal_class == "cubic"
    assert fits_class(changed)
    assert set_class(LOW, "Trigonal 6").crystal_class == "trigonal_6"


def test_the_uncertainties_follow_another_class():
    sigma = np.arange(36.0).reshape(6, 6)
    known = specimen(stiffness(LOW), stiffness_std=as_matrix(sigma + sigma.T))
    changed = set_class(known, "hexagonal")
    found = np.array(changed.stiffness_std)
    assert found[1, 1] == found[0, 0] == 0.0
    assert found[1, 2] == found[0, 2] == 14.0
    assert found[5, 5] == pytest.approx(3.5)  # half of σ12 = 7
    assert found[0, 3] == 0.0


def test_an_unknown_class_is_refused_with_the_nearest():
    assert "Did you mean trigonal_6" in refusal(set_class, LOW, "trigonal6")
    assert "is not an axis" in refusal(set_class, LOW, "monoclinic", "w")
    assert "is not an axis" in refusal(set_field, LOW, "unique_axis", "w")


def test_the_unique_axis_moves_the_zeros():
    changed = set_class(LOW, "monoclinic", "z")
    assert changed.unique_axis == "z"
    assert stiffness(changed)[0, 5] != 0
    assert stiffness(changed)[0, 4] == 0
    again = set_field(changed, "unique_axis", "y")
    assert (again.crystal_class, again.unique_axis) == ("monoclinic", "y")
    assert stiffness(again)[0, 5] == 0


def test_making_exact_finds_the_nearest_table_of_the_class():
    # Of two cubic tables beside each other the nearest exact one lies between: C11 is the mean
    # of the three, C66 of a hexagonal crystal shares its misfit with C11 and C12.
    table = np.diag([100.0, 103, 106, 30, 31, 32]) + 0.0
    made = stiffness(make_exact(specimen(table, "cubic")))
    np.testing.assert_allclose(np.diag(made), [103] * 3 + [31] * 3)
    exact = make_exact(specimen(hexagonal(158, 38.2, 47.5, 54.6, 36.3), "hexagonal"))
    np.testing.assert_allclose(
        stiffness(exact), hexagonal(158, 38.2, 47.5, 54.6, 36.3), rtol=1e-14
    )


def test_making_exact_averages_independent_errors_down():
    sigma = np.zeros((6, 6))
    sigma[0, 0], sigma[1, 1], sigma[2, 2] = 0.3, 0.3, 0.3
    table = cubic(131.0, 97.4, 86.2) + np.diag([1.0, 0, 0, 0, 0, 0])
    made = make_exact(specimen(table, "cubic", stiffness_std=as_matrix(sigma)))
    assert np.array(made.stiffness_std)[0, 0] == pytest.approx(0.3 / np.sqrt(3))


# --- the rest of the form -------------------------------------------------------------------


def test_texts_of_the_form():
    assert set_field(LOW, "name", "  LM-50 ").name == "LM-50"
    assert set_field(LOW, "source", " run 3 ").source == "run 3"
    assert set_field(LOW, "notes", "").notes == ""
    assert "wants a name" in refusal(set_field, LOW, "name", "  ")
    assert set_field(LOW, "crystal_class", "cubic").crystal_class == "cubic"


def test_density_and_temperature():
    assert set_field(LOW, "density", "2684,5").density == 2684.5
    assert set_field(dataclasses.replace(LOW, density=1.0), "density", " ").density is None
    for bad in ("0", "-3"):
        assert "above zero" in refusal(set_field, LOW, "density", bad)
    assert "kg/m³" in refusal(set_field, LOW, "density", "1e15")
    assert set_field(LOW, "temperature", "−40").temperature_c == -40.0
    assert set_field(LOW, "temperature", "").temperature_c is None
    assert "−273.15" in refusal(set_field, LOW, "temperature", "-300")
    for field in ("density", "temperature"):
        assert refusal(set_field, LOW, field, "warm").startswith(field)


CELL = {
    "a": "8.14",
    "b": "12.79",
    "c": "7.16",
    "alpha": "94.3",
    "beta": "116.6",
    "gamma": "87.7",
}


def test_a_cell_is_set_as_a_whole_or_taken_away():
    changed = set_cell(LOW, CELL)
    assert changed.cell == UnitCell(8.14, 12.79, 7.16, 94.3, 116.6, 87.7)
    assert set_cell(changed, dict.fromkeys(CELL, " ")).cell is None
    assert refusal(set_cell, LOW, {**CELL, "beta": ""}).startswith("beta: ")
    assert "less than" in refusal(set_cell, LOW, {**CELL, "alpha": "20"})


def test_a_cell_in_which_the_axes_cannot_be_laid_is_refused():
    odd = dataclasses.replace(LOW, crystal_axes="z||[0 0 1], y||[1 1 -2 0]")
    assert "four indices" in refusal(set_cell, odd, CELL)


# --- axes -----------------------------------------------------------------------------------

# A cell and constants like those of low albite, with cell data of a triclinic feldspar.
FELDSPAR = specimen(
    [
        [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
        [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
        [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
        [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
        [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
        [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
    ],
    cell=UnitCell(8.137, 12.786, 7.158, 94.26, 116.6, 87.71),
    crystal_axes="y||b, x||a*",
)
# Constants: Brown, Abramson & Angel 2006, Phys. Chem. Minerals 33, 256, low albite, X∥a*, Y∥b.
# Turned into z∥c, y∥b* by a separate calculation on full fourth-rank tensors, three decimals.
IN_IEEE_AXES = [
    [69.871, 34.645, 29.938, 4.71, -2.292, -0.837],
    [34.645, 181.145, 6.305, -13.16, -7.539, -6.866],
    [29.938, 6.305, 180.707, 0.512, 8.005, -8.318],
    [4.71, -13.16, 0.512, 25.593, -0.731, -7.626],
    [-2.292, -7.539, 8.005, -0.731, 26.752, -0.098],
    [-0.837, -6.866, -8.318, -7.626, -0.098, 33.444],
]


def test_re_expressing_keeps_the_crystal():
    changed = set_axes(FELDSPAR, "z∥c, y∥b*", re_express=True)
    assert changed.crystal_axes == "z||c, y||b*"
    np.testing.assert_allclose(stiffness(changed), IN_IEEE_AXES, atol=6e-4)
    before, after = (averages(Stiffness.from_voigt(x.stiffness)) for x in (FELDSPAR, changed))
    for kind in ("voigt", "reuss", "hill"):
        np.testing.assert_allclose(
            dataclasses.astuple(getattr(after, kind)),
            dataclasses.astuple(getattr(before, kind)),
            rtol=1e-12,
        )
    back = set_axes(changed, "y||b, x||a*", re_express=True)
    np.testing.assert_allclose(stiffness(back), stiffness(FELDSPAR), atol=1e-12)


def test_renaming_the_axes_keeps_the_numbers():
    changed = set_axes(FELDSPAR, "x||a, z||c*", re_express=False)
    assert changed.stiffness == FELDSPAR.stiffness
    assert changed.crystal_axes == "x||a, z||c*"
    assert set_axes(FELDSPAR, "y || b ,  x||a*", re_express=True) == FELDSPAR


def test_uncertainties_turn_with_the_numbers():
    sigma = np.array(FELDSPAR.stiffness) * 0 + 0.5
    known = dataclasses.replace(FELDSPAR, stiffness_std=as_matrix(sigma))
    turned = set_axes(known, "z||c, y||b*", re_express=True)
    assert turned.covariance is not None
    np.testing.assert_allclose(
        np.array(turned.stiffness_std)[np.triu_indices(6)] ** 2, np.diag(turned.covariance)
    )
    back = set_axes(turned, "y||b, x||a*", re_express=True)
    np.testing.assert_allclose(np.array(back.stiffness_std), sigma, rtol=1e-10)


def test_axes_that_cannot_be_laid_are_refused():
    assert "needs the unit cell" in refusal(set_axes, LOW, "x||a, z||c*", True)
    assert set_axes(LOW, "x||a, z||c*", False).crystal_axes == "x||a, z||c*"
    assert "two statements" in refusal(set_axes, FELDSPAR, "sideways", False)
    assert "parallel" in refusal(set_axes, FELDSPAR, "x||a, z||[2 0 0]", False)


@pytest.mark.parametrize(
    ("text", "is_asked"),
    [
        ("GPa\n" + "\n".join(" ".join(["1.0"] * 6) for _ in range(6)), False),
        ("100 20\n20 90", False),  # a block, not a table
        ("C11 168.4 C12 121.4 C44 75.4", False),  # a list that leaves no question
        ("abc", False),
        ("C11 = 131 GPa, C12 = 97.4, C12 = 98.0, C44 = 86.2", True),  # twice C12
        ("C11 168.4", True),
        ("E = 210 GPa", True),
        ("1 2\n3", True),
        ("\n".join(" ".join(map(str, row)) for row in np.arange(36).reshape(6, 6)), True),
    ],
)
def test_what_is_no_plain_block_and_no_plain_table_belongs_in_the_dialog(text, is_asked):
    assert belongs_in_dialog("stiffness", text) is is_asked
    assert not belongs_in_dialog("uncertainty", text)
