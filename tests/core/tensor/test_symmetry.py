"""The table of crystal classes against averages over groups and tables of another hand."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from core.errors import InputError
from core.tensor.symmetry import (
    CLASS_KEYS,
    complete,
    crystal_class,
    dependence_text,
    distance,
    kelvin_projector,
    laue_rotations,
    project,
)
from tests.materials import (
    cubic,
    hexagonal,
    isotropic,
    orthorhombic,
    random_stiffness,
    rotated,
    tetragonal,
    trigonal,
)

seeds = st.integers(0, 2**32 - 1)
few = settings(max_examples=15, deadline=None)

ALL = [crystal_class(key) for key in CLASS_KEYS] + [
    crystal_class("monoclinic", axis) for axis in "xz"
]
FINITE = [cls for cls in ALL if cls.key != "isotropic"]


def name_of(cls):
    return f"{cls.key} {cls.unique_axis}" if cls.key == "monoclinic" else cls.key


every_class = pytest.mark.parametrize("cls", ALL, ids=name_of)
finite_class = pytest.mark.parametrize("cls", FINITE, ids=name_of)

# Proper rotations of the Laue groups by another library, main axis and (for Dn) a twofold
# axis along x: scipy.spatial.transform.Rotation.create_group.
REFERENCE_GROUPS = {
    "triclinic": ("C1", "Z"), "monoclinic x": ("C2", "X"), "monoclinic y": ("C2", "Y"),
    "monoclinic z": ("C2", "Z"), "orthorhombic": ("D2", "Z"), "tetragonal_7": ("C4", "Z"),
    "tetragonal_6": ("D4", "Z"), "trigonal_7": ("C3", "Z"), "trigonal_6": ("D3", "Z"),
    "hexagonal": ("D6", "Z"), "cubic": ("O", "Z"),
}  # fmt: skip

# Tables written out cell by cell in tests.materials.
WRITTEN_OUT = {
    "orthorhombic": orthorhombic(101, 112, 123, 31, 32, 33, 41, 42, 43),
    "tetragonal_7": tetragonal(101, 31, 32, 123, 41, 43, c16=7),
    "tetragonal_6": tetragonal(101, 31, 32, 123, 41, 43),
    "trigonal_7": trigonal(101, 31, 32, 9, 123, 41, c15=7),
    "trigonal_6": trigonal(101, 31, 32, 9, 123, 41),
    "hexagonal": hexagonal(101, 31, 32, 123, 41),
    "cubic": cubic(101, 31, 41),
    "isotropic": isotropic(80, 35),
}


@finite_class
def test_rotations_are_those_of_the_reference_group(cls):
    reference = Rotation.create_group(*REFERENCE_GROUPS[name_of(cls)]).as_matrix()
    ours = laue_rotations(cls)
    assert ours.shape == reference.shape
    np.testing.assert_array_equal(ours[0], np.eye(3))
    gaps = np.abs(ours[:, None] - reference[None]).max(axis=(2, 3))
    assert gaps.min(axis=1).max() < 1e-12
    assert gaps.min(axis=0).max() < 1e-12


@finite_class
@given(seed=seeds)
@few
def test_projection_is_the_average_over_the_group(cls, seed):
    table = random_stiffness(np.random.default_rng(seed))
    average = np.mean([rotated(table, turn) for turn in laue_rotations(cls)], axis=0)
    np.testing.assert_allclose(project(table, cls), average, atol=1e-11)


@given(seed=seeds)
@few
def test_isotropic_projection_is_the_average_over_the_icosahedral_group(seed):
    """Its 60 turns leave no fourth-rank tensor but the isotropic ones unchanged."""
    table = random_stiffness(np.random.default_rng(seed))
    turns = Rotation.create_group("I").as_matrix()
    average = np.mean([rotated(table, turn) for turn in turns], axis=0)
    np.testing.assert_allclose(project(table, crystal_class("isotropic")), average, atol=1e-11)


@every_class
@given(seed=seeds)
@few
def test_projection_is_idempotent_and_at_right_angles(cls, seed):
    table = random_stiffness(np.random.default_rng(seed))
    nearest = project(table, cls)
    np.testing.assert_allclose(project(nearest, cls), nearest, atol=1e-11)
    weights = np.array([1, 1, 1, 2, 2, 2])
    inner = (np.outer(weights, weights) * nearest * (table - nearest)).sum()
    assert abs(inner) < 1e-9 * np.linalg.norm(table) ** 2


@every_class
def test_projector_has_one_dimension_for_each_independent_constant(cls):
    projector = kelvin_projector(cls)
    np.testing.assert_allclose(projector, projector.T, atol=1e-15)
    assert np.trace(projector) == pytest.approx(len(cls.independent), abs=1e-12)


def test_projection_takes_batches():
    rng = np.random.default_rng(3)
    batch = np.stack([random_stiffness(rng) for _ in range(4)])
    cls = crystal_class("trigonal_7")
    one_by_one = np.stack([project(table, cls) for table in batch])
    np.testing.assert_allclose(project(batch, cls), one_by_one, atol=1e-12)


@every_class
@given(seed=seeds)
@few
def test_completion_keeps_independent_cells_and_lands_in_the_class(cls, seed):
    table = random_stiffness(np.random.default_rng(seed))
    whole = complete(table, cls)
    for cell in cls.independent:
        assert whole[cell] == table[cell]
    np.testing.assert_array_equal(whole, whole.T)
    np.testing.assert_array_equal(complete(whole, cls), whole)
    assert distance(whole, cls) < 1e-14


@every_class
@given(seed=seeds)
@few
def test_completed_tables_are_unchanged_by_the_group(cls, seed):
    whole = complete(random_stiffness(np.random.default_rng(seed)), cls)
    for turn in laue_rotations(cls):
        np.testing.assert_allclose(rotated(whole, turn), whole, atol=1e-10)


@pytest.mark.parametrize("key", WRITTEN_OUT)
def test_completion_equals_the_table_written_out_by_hand(key):
    table = WRITTEN_OUT[key]
    np.testing.assert_allclose(complete(np.triu(table), crystal_class(key)), table, atol=1e-13)
    assert distance(table, crystal_class(key)) < 1e-15


def test_completion_reads_no_cell_but_the_independent_ones():
    table = np.full((6, 6), np.nan)
    table[0, 0], table[0, 1], table[3, 3] = 166, 64, 80
    np.testing.assert_array_equal(complete(table, crystal_class("cubic")), cubic(166, 64, 80))


@every_class
def test_kinds_say_what_completion_does(cls):
    """A cell is zero exactly when no independent constant reaches it."""
    whole = complete(random_stiffness(np.random.default_rng(8)), cls)
    kinds = np.array(cls.kinds)
    np.testing.assert_array_equal(kinds == "zero", whole == 0)
    np.testing.assert_array_equal(kinds, kinds.T)
    upper = [(i, j) for i in range(6) for j in range(i, 6)]
    free = [cell for cell in upper if kinds[cell] == "independent"]
    assert list(cls.independent) == free  # in reading order, upper triangle


@every_class
def test_dependence_texts_evaluate_to_the_completed_cell(cls):
    whole = complete(random_stiffness(np.random.default_rng(9)), cls)
    constants = {f"C{i + 1}{j + 1}": whole[i, j] for i in range(6) for j in range(6)}
    for i in range(6):
        for j in range(6):
            text = dependence_text(cls, i, j)
            if cls.kinds[i][j] == "dependent":
                name, formula = text.split(" = ")
                assert constants[name] == whole[i, j]
                value = eval(formula.replace("−", "-"), {}, constants)  # our own text
                assert value == pytest.approx(whole[i, j], rel=1e-14)


def test_dependence_text_wording():
    hexa, low = crystal_class("hexagonal"), crystal_class("trigonal_7")
    assert dependence_text(hexa, 5, 5) == "C66 = (C11 − C12)/2"
    assert dependence_text(hexa, 4, 4) == "C55 = C44"
    assert dependence_text(hexa, 2, 1) == "C23 = C13"
    assert dependence_text(hexa, 0, 3) == "zero by symmetry"
    assert dependence_text(hexa, 0, 0) == "independent"
    assert dependence_text(low, 1, 4) == "C25 = −C15"


def test_distance_of_a_known_departure():
    """δ added to C11 of a cubic crystal is shared among 11, 22, 33: ‖C − P‖ = δ √(2/3)."""
    table = cubic(166, 64, 80)
    table[0, 0] += 6
    size = np.sqrt((table[:3, :3] ** 2).sum() + 3 * (2 * 80) ** 2)
    found = distance(table, crystal_class("cubic"))
    assert found == pytest.approx(6 * np.sqrt(2 / 3) / size, rel=1e-12)


def test_distance_lies_between_none_and_all():
    lonely = np.zeros((6, 6))
    lonely[0, 3] = lonely[3, 0] = 5.0
    assert distance(lonely, crystal_class("orthorhombic")) == pytest.approx(1.0)
    assert distance(lonely, crystal_class("triclinic")) < 1e-14
    assert distance(np.zeros((6, 6)), crystal_class("cubic")) == 0.0


def test_isotropic_rotations_are_the_identity_alone():
    np.testing.assert_array_equal(laue_rotations(crystal_class("isotropic")), [np.eye(3)])


def test_shared_results_cannot_be_written_to():
    cls = crystal_class("cubic")
    for shared in (laue_rotations(cls), kelvin_projector(cls)):
        with pytest.raises(ValueError, match="read-only"):
            shared[0] = 0.0


def test_keys_are_read_leniently_and_classes_are_equal_values():
    assert crystal_class(" Tetragonal 7 ") == crystal_class("tetragonal_7")
    assert crystal_class("Trigonal-6") == crystal_class("trigonal_6")
    assert crystal_class("cubic", "z") == crystal_class("cubic")
    assert crystal_class("monoclinic", "z") != crystal_class("monoclinic")


def test_unknown_class_names_the_nearest():
    with pytest.raises(InputError, match="'hexagnal' is not a crystal class") as caught:
        crystal_class("hexagnal")
    assert "Did you mean hexagonal?" in caught.value.hint
    with pytest.raises(InputError) as caught:
        crystal_class("trigonal")
    assert "trigonal_7 or trigonal_6" in caught.value.hint


def test_unknown_unique_axis():
    with pytest.raises(InputError, match="'b' is not an axis"):
        crystal_class("monoclinic", "b")
