"""Stability criteria of print: those that suffice, and two often quoted that do not."""

import numpy as np
import pytest

from core.tensor.stability import assess, criteria
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import complete, crystal_class

KELVIN = np.sqrt(np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2]))


def pairs_and_sum(C):
    """Orthorhombic, often quoted: Cii > 0, Cii + Cjj − 2Cij > 0, sum of the 3x3 > 0.

    Refuted in Mouhat & Coudert 2014, Phys. Rev. B 90, 224104 (reference from memory; the
    counterexamples below need none).
    """
    pairs = [C[i, i] + C[j, j] - 2 * C[i, j] for i, j in [(0, 1), (0, 2), (1, 2)]]
    return bool(np.diag(C).min() > 0 and min(pairs) > 0 and C[:3, :3].sum() > 0)


def tetragonal_pairs_and_sum(C):
    """Tetragonal, often quoted: C11 + C33 − 2C13 > 0 and 2C11 + C33 + 2C12 + 4C13 > 0,
    with Cii > 0 and C11 > |C12|. Refuted like the other.
    """
    first = C[0, 0] + C[2, 2] - 2 * C[0, 2]
    second = 2 * C[0, 0] + C[2, 2] + 2 * C[0, 1] + 4 * C[0, 2]
    return bool(np.diag(C).min() > 0 and C[0, 0] > abs(C[0, 1]) and first > 0 and second > 0)


QUOTED = {"orthorhombic": pairs_and_sum, "tetragonal_6": tetragonal_pairs_and_sum}


@pytest.mark.parametrize("key", QUOTED)
def test_quoted_criteria_are_necessary_but_do_not_suffice(key):
    """They pass some unstable tables and refuse no stable one; ours make neither mistake."""
    rng, cls = np.random.default_rng(7), crystal_class(key)
    wrongly_passed = stable = 0
    for _ in range(4000):
        drawn = np.triu(rng.uniform(-1, 1, (6, 6)), 1) + np.diag(rng.uniform(0, 1, 6))
        table = 100 * complete(drawn, cls)
        truly = np.linalg.eigvalsh(KELVIN * table)[0] > 0
        assert all(criterion.holds for criterion in criteria(table, cls)) == truly
        quoted = QUOTED[key](table)
        assert quoted or not truly
        wrongly_passed += quoted and not truly
        stable += truly
    assert wrongly_passed > 20
    assert stable > 100


def test_an_orthorhombic_table_the_quoted_criteria_pass():
    """C11 C22 = 1000 < C12² = 1600, though each pair and the sum are positive."""
    crystal = Stiffness.from_constants("orthorhombic", {
        "11": 10, "22": 100, "33": 100, "12": 40, "13": 0, "23": 0,
        "44": 30, "55": 30, "66": 30,
    })  # fmt: skip
    assert pairs_and_sum(crystal.voigt)
    assert not assess(crystal).stable
    failed = [c for c in criteria(crystal.voigt, crystal_class("orthorhombic")) if not c.holds]
    assert failed[0].text == "C11 C22 − C12² > 0"
    assert failed[0].value == pytest.approx(-600)
    assert failed[0].unit == "GPa²"


def test_a_tetragonal_table_the_quoted_criteria_pass():
    """(C11 + C12) C33 = 1500 < 2 C13² = 1800."""
    crystal = Stiffness.from_constants(
        "tetragonal_6", {"11": 100, "12": 50, "13": 30, "33": 10, "44": 30, "66": 30}
    )
    assert tetragonal_pairs_and_sum(crystal.voigt)
    assert not assess(crystal).stable
    failed = [c for c in criteria(crystal.voigt, crystal_class("tetragonal_6")) if not c.holds]
    assert [c.text for c in failed] == ["(C11 + C12) C33 − 2 C13² > 0"]
    assert failed[0].value == pytest.approx(-300)


def test_kelvin_spectrum_of_copper():
    """Kelvin 1856; Mehrabadi & Cowin 1990: C11 + 2C12 = 3K, C11 − C12 twice, 2C44 thrice."""
    copper = Stiffness.from_constants("cubic", {"11": 168.4, "12": 121.4, "44": 75.4})
    expected = [47.0, 47.0, 150.8, 150.8, 150.8, 411.2]
    np.testing.assert_allclose(assess(copper).eigenstiffness, expected, rtol=0, atol=1e-6)


def test_the_spectrum_of_the_voigt_table_is_no_invariant_but_the_kelvin_one_is():
    copper = Stiffness.from_constants("cubic", {"11": 168.4, "12": 121.4, "44": 75.4})
    half = np.sqrt(0.5)
    turned = copper.rotate(np.array([[half, half, 0], [-half, half, 0], [0, 0, 1]]))
    kelvin = assess(turned).eigenstiffness
    np.testing.assert_allclose(kelvin, assess(copper).eigenstiffness, rtol=0, atol=1e-9)
    voigt = np.linalg.eigvalsh(turned.voigt)
    assert np.abs(voigt - np.linalg.eigvalsh(copper.voigt)).max() > 5.0
