"""Turned to hidden axes and made exact: the same crystal, said truly, and the same part."""

import dataclasses

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from core.crystal.cell import UnitCell, axes_matrix
from core.editing.symmetry import axes_statement, claim_exactly, kept_part, turn_to
from core.state import OrientationChoice, Specimen, as_matrix, rotation_of
from core.tensor.notation import tensor_to_voigt
from core.tensor.stiffness import Stiffness
from tests.materials import cubic

CELL = UnitCell(8.14, 12.79, 7.16, 94.3, 116.6, 87.7)
AXES = "z||c, y||b*"
TURN = Rotation.from_euler("ZXZ", [12.0, 34.0, -56.0], degrees=True).as_matrix()


def tensor_in(table, rotation):
    """Return a table in axes v_new = rotation v_old, by the law of fourth-rank tensors."""
    full = Stiffness.from_voigt(table).tensor
    return tensor_to_voigt(
        np.einsum("ia,jb,kc,ld,abcd->ijkl", rotation, rotation, rotation, rotation, full)
    )


def specimen(**known):
    table = cubic(131.0, 97.4, 86.2)
    return Specimen("s", as_matrix(tensor_in(table, TURN)), **known)


# ------------------------------------------------------------------ statements
def test_turned_axes_are_said_by_two_statements_that_hold():
    statement = axes_statement(CELL, AXES, TURN)
    # The cell's vectors in the new axes are those in the old ones, turned.
    expected = TURN @ axes_matrix(CELL, AXES)
    assert axes_matrix(CELL, statement) == pytest.approx(expected, abs=1e-5)


def test_axes_along_the_cell_are_said_by_whole_indices():
    basis = axes_matrix(CELL, AXES)
    b = np.linalg.inv(basis)[1]  # b*, the second row of the reciprocal basis
    z = basis[:, 0] / np.linalg.norm(basis[:, 0])
    x = np.cross(b / np.linalg.norm(b), z)
    rotation = np.array([x, np.cross(z, x), z])
    assert axes_statement(CELL, AXES, rotation) == "z||[1 0 0], y||(0 1 0)"


# ------------------------------------------------------------------ turning
@pytest.mark.parametrize("cell", [None, CELL])
def test_turning_to_the_hidden_axes_gives_the_table_back(cell):
    found = turn_to(specimen(cell=cell, crystal_axes=AXES), TURN.T, "cubic")
    assert np.array(found.stiffness) == pytest.approx(cubic(131.0, 97.4, 86.2), abs=1e-4)
    assert (found.crystal_class, found.cell) == ("cubic", cell)
    assert (found.crystal_axes == AXES) is (cell is None)


def test_uncertainties_turn_with_the_table():
    sigma = np.zeros((6, 6))
    sigma[0, 0] = 2.0  # C11 alone is uncertain
    before = specimen(stiffness_std=as_matrix(sigma))
    found = turn_to(before, TURN.T, "cubic")
    # Turning is linear: δC' is the turned δC, so σ' is its size.
    change = np.zeros((6, 6))
    change[0, 0] = 2.0
    expected = np.abs(tensor_in(change, TURN.T))
    assert np.array(found.stiffness_std) == pytest.approx(expected, abs=1e-9)


def test_made_exact_a_table_is_the_mean_over_the_symmetry():
    rng = np.random.default_rng(7)
    noise = np.triu(rng.normal(0.0, 1.0, (6, 6)))
    table = cubic(131.0, 97.4, 86.2) + noise + np.triu(noise, 1).T
    found = claim_exactly(Specimen("s", as_matrix(table)), "cubic")
    rotations = Rotation.create_group("O").as_matrix()
    expected = np.mean([tensor_in(table, R) for R in rotations], axis=0)
    assert np.array(found.stiffness) == pytest.approx(expected, abs=1e-9)
    assert found.crystal_class == "cubic"


# ------------------------------------------------------------------ parts
@pytest.mark.parametrize(
    "text", ["Z=[1 1 0] X=[0 0 1]", "Z=(1 1 0) X=[0 0 1]", "bunge 10 20 30", "(YXl) 35.25"]
)
def test_the_part_stays_the_same_piece_of_the_crystal(text):
    before = specimen(cell=CELL, crystal_axes=AXES)
    choice = OrientationChoice(text, (1.0, 2.0, 3.0))
    after = turn_to(before, TURN.T, "cubic")
    kept = kept_part(choice, before, after, TURN.T)
    old, new = (
        rotation_of(c, s) @ axes_matrix(s.cell, s.crystal_axes)
        for c, s in ((choice, before), (kept, after))
    )
    assert new == pytest.approx(old, abs=1e-9)  # a, b, c in part axes
    assert (kept == choice) is ("=" in text)


def test_part_axes_along_the_crystal_axes_stay_so():
    before = specimen()
    choice = OrientationChoice()
    assert kept_part(choice, before, turn_to(before, TURN.T, "cubic"), TURN.T) == choice


def test_without_a_cell_the_part_follows_the_turn():
    before = specimen()
    after = dataclasses.replace(turn_to(before, TURN.T, "cubic"), crystal_class="triclinic")
    choice = OrientationChoice("bunge 10 20 30")
    kept = kept_part(choice, before, after, TURN.T)
    in_part = [tensor_in(np.array(s.stiffness), rotation_of(c, s))
               for c, s in ((choice, before), (kept, after))]  # fmt: skip
    assert in_part[1] == pytest.approx(in_part[0], abs=1e-9)
