"""The strain spectrum, its words, and the closed criteria of every class."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.tensor.stability import assess, criteria, describe_strain
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS, complete, crystal_class
from tests.materials import (
    cubic,
    hexagonal,
    isotropic,
    orthorhombic,
    random_rotation,
    random_stiffness,
    rotated,
    tetragonal,
    trigonal,
)

seeds = st.integers(0, 2**32 - 1)
few = settings(max_examples=20, deadline=None)

ALL = [crystal_class(key) for key in CLASS_KEYS] + [
    crystal_class("monoclinic", axis) for axis in "xz"
]
R2 = np.sqrt(2)


def least_eigenstiffness(table):
    weights = np.array([1, 1, 1, R2, R2, R2])
    return np.linalg.eigvalsh(table * np.outer(weights, weights))[0]


def random_member(rng, cls):
    """Return a table of the class that may be stable or not."""
    table = np.triu(rng.uniform(-0.4, 0.4, (6, 6)), 1)
    table += np.diag(rng.uniform(-0.05, 1.0, 6))
    return 100 * complete(table, cls)


@pytest.mark.parametrize("cls", ALL, ids=lambda cls: f"{cls.key}-{cls.unique_axis}")
def test_criteria_hold_exactly_for_the_positive_definite(cls):
    """Necessary and sufficient: no disagreement with the spectrum in 3000 tables."""
    rng = np.random.default_rng(11)
    stable = 0
    for _ in range(3000):
        table = random_member(rng, cls)
        least = least_eigenstiffness(table)
        assert abs(least) > 1e-6  # none so close to the edge that rounding decides
        met = all(criterion.holds for criterion in criteria(table, cls))
        assert met == (least > 0)
        stable += met
    assert 30 < stable < 2970


@pytest.mark.parametrize("cls", ALL, ids=lambda cls: f"{cls.key}-{cls.unique_axis}")
@given(seed=seeds)
@settings(max_examples=5, deadline=None)
def test_criteria_carry_value_unit_and_verdict(cls, seed):
    """A table k times as stiff has each criterion k to the power of its unit."""
    table = random_member(np.random.default_rng(seed), cls)
    powers = {"GPa": 1, "GPa²": 2, "GPa³": 3, "GPa⁴": 4, "GPa⁵": 5, "GPa⁶": 6}
    for once, twice in zip(criteria(table, cls), criteria(2 * table, cls), strict=True):
        assert once.text.endswith(" > 0")
        assert once.holds == (once.value > 0)
        assert twice.value == pytest.approx(2 ** powers[once.unit] * once.value, rel=1e-9)


@pytest.mark.parametrize("cls", ALL, ids=lambda cls: f"{cls.key}-{cls.unique_axis}")
def test_written_out_criteria_evaluate_to_their_value(cls):
    table = random_member(np.random.default_rng(2), cls)
    constants = {f"C{i + 1}{j + 1}": table[i, j] for i in range(6) for j in range(6)}
    for criterion in criteria(table, cls):
        formula = criterion.text.removesuffix(" > 0").replace("−", "-").replace("²", "**2")
        if formula.startswith("determinant of rows and columns "):
            rows = [int(row) - 1 for row in formula.rsplit("columns ")[1].split(", ")]
            expected = np.linalg.det(table[np.ix_(rows, rows)])
        else:
            product = formula.replace(") C", ") * C").replace("2 C", "2 * C")
            product = product.replace("2 (", "2 * (")
            for i in "123456":
                product = product.replace(f"C{i}{i} C", f"C{i}{i} * C")
            expected = eval(product, {}, constants)  # our own text
        assert criterion.value == pytest.approx(expected, rel=1e-12)


def test_eigenstiffnesses_of_an_isotropic_body():
    """Once 3K and five times 2G."""
    found = assess(Stiffness.from_voigt(isotropic(120, 45)))
    np.testing.assert_allclose(found.eigenstiffness, [90] * 5 + [360], rtol=1e-13)
    assert found.stable
    assert not found.near
    assert found.descriptions == (
        "shear 2–3", "shear 1–3", "shear 1–2",
        "stretch 1 against 2", "stretch 3 against 1 and 2", "volume change",
    )  # fmt: skip


def test_cubic_eigenstrains_are_the_plain_ones():
    found = assess(Stiffness.from_voigt(cubic(170, 120, 75)))
    np.testing.assert_allclose(found.eigenstiffness, [50, 50, 150, 150, 150, 410], rtol=1e-13)
    assert found.descriptions == (
        "stretch 1 against 2", "stretch 3 against 1 and 2",
        "shear 2–3", "shear 1–3", "shear 1–2", "volume change",
    )  # fmt: skip
    np.testing.assert_allclose(found.eigenstrains[:, 5], [1 / np.sqrt(3)] * 3 + [0] * 3)


def test_hexagonal_spectrum_in_closed_form():
    """2C44 and C11 − C12 twice, and the roots of the 2x2 of basal dilation and c stretch."""
    c11, c12, c13, c33, c44 = 161, 34, 50, 61, 38
    pair = np.linalg.eigvalsh([[c11 + c12, R2 * c13], [R2 * c13, c33]])
    expected = sorted([2 * c44, 2 * c44, c11 - c12, c11 - c12, *pair])
    found = assess(Stiffness.from_voigt(hexagonal(c11, c12, c13, c33, c44)))
    np.testing.assert_allclose(found.eigenstiffness, expected, rtol=1e-13)


@given(seeds)
@few
def test_eigenstrains_are_orthonormal_and_diagonalise(seed):
    rng = np.random.default_rng(seed)
    for table in (random_stiffness(rng), rotated(cubic(170, 120, 75), random_rotation(rng))):
        crystal = Stiffness.from_voigt(table)
        found = assess(crystal)
        strains = found.eigenstrains
        np.testing.assert_allclose(strains.T @ strains, np.eye(6), atol=1e-12)
        diagonal = strains.T @ crystal.kelvin @ strains
        np.testing.assert_allclose(diagonal, np.diag(found.eigenstiffness), atol=1e-9)
        assert (np.diff(found.eigenstiffness) >= 0).all()
        assert (strains[np.abs(strains).argmax(axis=0), range(6)] > 0).all()


@given(seeds)
@few
def test_the_spectrum_is_invariant_under_rotation(seed):
    rng = np.random.default_rng(seed)
    table = random_stiffness(rng)
    turned = Stiffness.from_voigt(rotated(table, random_rotation(rng)))
    found = assess(turned).eigenstiffness
    np.testing.assert_allclose(found, assess(Stiffness.from_voigt(table)).eigenstiffness)


@pytest.mark.parametrize(
    ("table", "words"),
    [
        (cubic(50, 80, 40), "stretch 1 against 2"),
        (cubic(166, 64, -5), "shear 2–3"),
        (cubic(100, -60, 40), "volume change"),
        (orthorhombic(100, 100, 100, 20, 20, 20, 40, -1, 40), "shear 1–3"),
    ],
)
def test_an_unstable_crystal_names_the_strain_that_gains_energy(table, words):
    found = assess(Stiffness.from_voigt(table))
    assert not found.stable
    assert not found.near
    assert found.eigenstiffness[0] < 0
    assert found.descriptions[0] == words


def test_near_means_below_two_percent_of_the_mean():
    """Cubic: 2C44 three times, C11 − C12 twice, C11 + 2C12 once."""
    edge = 0.02 * (3 * 160 + 100 + 400) / (6 - 2 * 0.02)  # C11 − C12 at 2 % of the mean

    def near(difference):
        c12 = (500 - difference) / 3
        return assess(Stiffness.from_voigt(cubic(c12 + difference, c12, 80))).near

    assert near(0.99 * edge)
    assert not near(1.01 * edge)
    assert not near(-1.0)


def test_a_strain_that_costs_nothing_is_not_stable():
    found = assess(Stiffness.from_voigt(cubic(100, 100, 50)))
    assert not found.stable
    assert not assess(Stiffness.from_voigt(np.zeros((6, 6)))).stable


@pytest.mark.parametrize(
    ("vector", "words"),
    [
        ([1, 1, 1, 0, 0, 0], "volume change"),
        ([-2, -2, -2, 0, 0, 0], "volume change"),
        ([0, 0, 0, 1, 0, 0], "shear 2–3"),
        ([0, 0, 0, 0, -3, 0], "shear 1–3"),
        ([0, 0, 0, 0, 0, 1], "shear 1–2"),
        ([1, -1, 0, 0, 0, 0], "stretch 1 against 2"),
        ([0, 1, -1, 0, 0, 0], "stretch 2 against 3"),
        ([1, -1.05, 0.05, 0, 0, 0], "stretch 1 against 2"),
        ([2, -1, -1, 0, 0, 0], "stretch 1 against 2 and 3"),
        ([-1, 2, -1, 0, 0, 0], "stretch 2 against 1 and 3"),
        ([0, 0, 0, 0.9, 0, np.sqrt(0.19)], "81 % shear 2–3, 19 % shear 1–2"),
        ([1, 0, 0, 0, 0, 0], "67 % stretch 1 against 2 and 3, 33 % volume change"),
        ([0, 0, 0, 0.97, 0, 0.24], "94 % shear 2–3"),
    ],
)
def test_words_for_strains(vector, words):
    assert describe_strain(np.array(vector, dtype=float)) == words


def test_trigonal_soft_mode_mixes_stretch_and_shear():
    """C14 couples stretch 1 against 2 with shear 2–3: [[C11 − C12, 2C14], [2C14, 2C44]]."""
    c11, c12, c14, c44 = 87, 7, -18, 58
    block = [[c11 - c12, 2 * c14], [2 * c14, 2 * c44]]
    values, vectors = np.linalg.eigh(block)
    found = assess(Stiffness.from_voigt(trigonal(c11, c12, 12, c14, 106, c44)))
    np.testing.assert_allclose(found.eigenstiffness[:2], values[0], rtol=1e-12)
    stretch = vectors[0, 0] ** 2
    assert f"{100 * stretch:.0f} % " in found.descriptions[0]
    assert f"{100 * (1 - stretch):.0f} % " in found.descriptions[0]


def test_criteria_read_the_independent_cells_only():
    table = tetragonal(60, 4, -4, 42, 67, 26)
    broken = table.copy()
    broken[0, 3] = broken[3, 0] = 900.0
    cls = crystal_class("tetragonal_6")
    assert criteria(broken, cls) == criteria(table, cls)
    assert not assess(Stiffness.from_voigt(broken)).stable
