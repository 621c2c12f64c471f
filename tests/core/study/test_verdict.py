"""Verdicts: the mark, the headline and the facts of tables whose answer is known beforehand."""

import numpy as np
import pytest

from core.study.uncertainty.changes import (
    carried,
    deviations_of,
    independent_covariance,
    linear_map,
)
from core.study.verdict import judge, softest_deviation
from core.tensor.notation import from_upper_triangle, upper_triangle
from core.tensor.stability import assess
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class
from tests.materials import cubic, random_rotation, random_stiffness, rotated

CUBIC, TRICLINIC = crystal_class("cubic"), crystal_class("triclinic")
KELVIN = np.array([1, 1, 1, np.sqrt(2), np.sqrt(2), np.sqrt(2)])


def verdict(table, claimed=CUBIC, **known):
    return judge(Stiffness.from_voigt(table), claimed, **known)


def least_eigenstiffness(table):
    return np.linalg.eigvalsh(table * np.outer(KELVIN, KELVIN))[0]


def test_a_stable_crystal():
    found = verdict(cubic(131.0, 97.4, 86.2))
    assert found.mark == "stable"
    assert found.headline == "Stable"
    assert found.facts[0] == "softest strain 33.6 GPa (stretch 1 against 2)"  # C11 − C12
    assert found.facts[1] == "cubic as entered"
    # Closed form for cubic crystals: (6/5)(√A − 1/√A)², A = 2 C44/(C11 − C12).
    zener = 2 * 86.2 / (131.0 - 97.4)
    universal = 1.2 * (np.sqrt(zener) - 1 / np.sqrt(zener)) ** 2
    assert found.facts[2] == f"universal anisotropy {universal:.2f}"
    assert found.facts[3].startswith("K 109, G ")  # (C11 + 2 C12)/3 = 108.6
    assert found.sentence == f"Stable: {'; '.join(found.facts)}."
    assert "\n" not in found.sentence


@pytest.mark.parametrize(
    ("table", "headline"),
    [
        (cubic(90.0, 95.0, 40.0), "Unstable in 2 strains"),  # C11 < C12: a double root
        (cubic(100.0, -60.0, 40.0), "Unstable"),  # C11 + 2 C12 < 0: only the volume change
        (cubic(100.0, 60.0, -1.0), "Unstable in 3 strains"),
        (cubic(100.0, 60.0, 0.0), "Unstable in 3 strains"),  # costs nothing: not stable
        (np.zeros((6, 6)), "Unstable in 6 strains"),
    ],
)
def test_an_unstable_crystal_says_in_how_many_strains(table, headline):
    found = verdict(table)
    assert found.mark == "unstable"
    assert found.headline == headline
    assert len(found.facts) == 2  # no averages: they are not defined
    assert "nan" not in found.sentence.lower()


def test_a_crystal_that_only_just_holds_is_doubtful():
    found = verdict(cubic(100.5, 100.0, 80.0))  # C11 − C12 = 0.5, mean eigenstiffness 90
    assert found.mark == "doubtful"
    assert found.headline == "Stable, but only just"


def test_a_table_in_other_axes_is_said_to_leave_its_class():
    table = rotated(cubic(131.0, 97.4, 86.2), random_rotation(np.random.default_rng(5)))
    found = verdict(table)
    assert found.mark == "stable"
    assert "% away from cubic in these axes" in found.facts[1]
    assert "departs from the class" in found.detail
    assert "departs" not in verdict(cubic(131.0, 97.4, 86.2)).detail


def test_the_detail_lists_six_strains_and_the_criteria():
    lines = verdict(cubic(90.0, 95.0, 40.0)).detail.splitlines()
    assert sum(" GPa   " in line for line in lines) == 6
    assert "   FAILS   C11 − C12 > 0   (−5.000 GPa)" in lines
    assert "   holds   C44 > 0   (40.00 GPa)" in lines


# --- uncertainties --------------------------------------------------------------------------


def test_the_softest_strain_of_a_cubic_crystal_has_the_uncertainty_of_its_two_constants():
    # λ = C11 − C12, and its variance is the sum of the two: not that of C11, C22, C12 apart.
    deviations = np.zeros((6, 6))
    deviations[:3, :3] = 0.3
    np.fill_diagonal(deviations, 0.4)
    found = verdict(cubic(131.0, 97.4, 86.2), deviations=deviations)
    assert found.facts[0].startswith("softest strain 33.60 ± 0.50 GPa")
    as_triclinic = verdict(cubic(131.0, 97.4, 86.2), TRICLINIC, deviations=deviations)
    # (C11 + C22)/2 − C12 of three free constants: √(0.4²/2 + 0.3²) = 0.41.
    assert as_triclinic.facts[0].startswith("softest strain 33.60 ± 0.41 GPa")


def test_a_softest_strain_within_its_uncertainty_is_doubtful():
    deviations = np.full((6, 6), 10.0)
    sure = verdict(cubic(131.0, 97.4, 86.2), deviations=deviations)
    unsure = verdict(cubic(131.0, 97.4, 86.2), deviations=1.3 * deviations)
    assert sure.mark == "stable"  # 33.6 against 2 × 14.1
    assert unsure.mark == "doubtful"  # 33.6 against 2 × 18.4
    assert unsure.headline == "Stable, but not beyond the uncertainties"


def test_a_covariance_goes_before_the_deviations():
    # C11 and C12 err fully together: their difference is certain.
    together = np.zeros((21, 21))
    constants = upper_triangle(cubic(1.0, 1.0, 0.0)).astype(bool)
    together[np.ix_(constants, constants)] = 25.0
    found = verdict(
        cubic(131.0, 97.4, 86.2), deviations=np.full((6, 6), 5.0), covariance=together
    )
    assert found.facts[0].startswith("softest strain 33.6 GPa")


def test_the_slope_of_the_least_eigenstiffness_is_that_of_finite_differences():
    rng = np.random.default_rng(11)
    table = random_stiffness(rng)
    deviations = np.abs(rng.standard_normal(21))
    slopes = []
    for unit in np.eye(21):
        step = from_upper_triangle(unit) * 1e-4
        slopes.append(
            (least_eigenstiffness(table + step) - least_eigenstiffness(table - step)) / 2e-4
        )
    expected = np.linalg.norm(np.array(slopes) * deviations)
    covariance = independent_covariance(from_upper_triangle(deviations), TRICLINIC)
    found = softest_deviation(assess(Stiffness.from_voigt(table)), covariance)
    assert found == pytest.approx(expected, rel=1e-6)


def test_dependent_constants_err_with_those_they_follow():
    deviations = np.zeros((6, 6))
    deviations[0, 0], deviations[0, 1], deviations[0, 3] = 3.0, 4.0, 2.0
    covariance = independent_covariance(deviations, crystal_class("trigonal_6"))
    found = deviations_of(covariance)
    assert found[1, 1] == 3.0  # C22 = C11
    assert found[5, 5] == 2.5  # C66 = (C11 − C12)/2: √(3² + 4²)/2
    assert found[1, 3] == found[4, 5] == 2.0  # C24 = −C14, C56 = C14
    assert found[2, 2] == found[3, 3] == 0.0
    order = [(i, j) for i in range(6) for j in range(i, 6)]
    assert covariance[order.index((0, 3)), order.index((1, 3))] == -4.0
    assert covariance[order.index((0, 3)), order.index((4, 5))] == 4.0


def test_a_rotation_carries_the_covariance_like_its_samples():
    rng = np.random.default_rng(2)
    R = random_rotation(rng)
    samples = from_upper_triangle(rng.standard_normal((40, 21)) * rng.uniform(0.1, 1, 21))
    before = np.cov(upper_triangle(samples).T)
    after = np.cov(np.array([upper_triangle(rotated(one, R)) for one in samples]).T)
    np.testing.assert_allclose(carried(before, lambda t: rotated(t, R)), after, atol=1e-10)
    np.testing.assert_allclose(linear_map(lambda t: 2 * t), 2 * np.eye(21))


def test_a_sentence_about_symmetry_takes_the_place_of_the_bare_class():
    table = cubic(131.0, 97.4, 86.2)
    stiffness, claimed = Stiffness.from_voigt(table), crystal_class("cubic")
    plain = judge(stiffness, claimed).facts
    said = judge(stiffness, claimed, symmetry="cubic as entered").facts
    assert said == plain
    notes = judge(stiffness, claimed, symmetry="cubic as entered", notes=2).facts
    assert notes == ("2 notes", *plain)


def test_hidden_axes_come_before_everything_but_the_notes():
    table = cubic(131.0, 97.4, 86.2)
    table[0, 5] = table[5, 0] = 4.0
    sentence = "triclinic as entered; cubic within 0.6 % once turned 12.0° about [0 0 1]"
    facts = judge(
        Stiffness.from_voigt(table), crystal_class("cubic"), symmetry=sentence, notes=1
    ).facts
    assert facts[0] == "1 note"
    assert "% away from cubic in these axes" in facts[1]
    assert facts[2] == sentence
    assert facts[3].startswith("softest strain")


def test_an_unstable_table_says_first_what_gives_way():
    facts = judge(
        Stiffness.from_voigt(cubic(90.0, 95.0, 40.0)), crystal_class("cubic"),
        symmetry="isotropic; nothing", notes=0,
    ).facts  # fmt: skip
    assert facts[0].startswith("softest strain")


@pytest.mark.parametrize(("sigma", "mark"), [(0.82, "doubtful"), (0.05, "unstable")])
def test_what_is_unstable_only_within_the_uncertainty_is_doubtful(sigma, mark):
    table = cubic(100.0, 60.0, -0.1)  # 2 C44 = −0.2 in three strains
    deviations = np.zeros((6, 6))
    deviations[3, 3] = deviations[4, 4] = deviations[5, 5] = sigma / 2
    found = verdict(table, deviations=deviations)
    assert found.mark == mark
    is_doubtful = mark == "doubtful"
    assert found.headline == (
        "Not stable as it stands, but within the uncertainties" if is_doubtful
        else "Unstable in 3 strains"
    )
    assert ("−0.20 ± 0.82 GPa" in found.facts[0]) == is_doubtful


def test_one_strain_below_zero_beyond_its_uncertainty_is_enough():
    table = cubic(100.0, 60.0, -0.1)
    table[5, 5] = -30.0
    deviations = np.zeros((6, 6))
    deviations[3, 3] = deviations[4, 4] = deviations[5, 5] = 0.4
    assert verdict(table, TRICLINIC, deviations=deviations).mark == "unstable"


def test_a_table_that_claims_no_class_says_so():
    assert "no class claimed" in verdict(cubic(131.0, 97.4, 86.2), TRICLINIC).facts
