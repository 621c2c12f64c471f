"""What to cut next, and what to cut first: against brute force and against counting."""

import time

import numpy as np
import pytest

from core.directional.medium import Medium
from core.study.recovery.fit import FitOptions
from core.study.recovery.fitting import recover
from core.study.recovery.model import basis_of, predict, survey_of, waves
from core.study.recovery.planning import (
    candidate_directions,
    plan,
    rank_next,
    young_gradient,
)
from core.study.recovery.readings import Reading
from core.tensor.notation import upper_triangle
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CLASS_KEYS, complete, crystal_class
from tests.materials import cubic
from tests.surveys import measured_crystal, random_normals, readings_of, scattered, speeds_along

DENSITY = 2700.0
TRICLINIC = crystal_class("triclinic")


@pytest.fixture(scope="module")
def crystal():
    return scattered(np.random.default_rng(3), 0.15)


@pytest.fixture(scope="module")
def fit(crystal):
    return recover(measured_crystal(crystal, DENSITY, np.random.default_rng(4), 10), DENSITY,
                   TRICLINIC)  # fmt: skip


def with_blank(fit, direction, sigma=1e-3):
    """Return the covariance after measuring three more speeds, by plain normal equations."""
    basis = basis_of(fit.cls)
    survey = survey_of(basis, DENSITY, np.repeat(direction[:, None], 3, axis=1))
    speed, slopes = predict(survey, waves(survey, fit.constants[None]), np.array([[0, 1, 2]]))
    rows = slopes[0] / (sigma * speed[0])[:, None]
    return np.linalg.inv(fit.information + rows.T @ rows)


def test_the_candidates_are_distinct_and_the_simple_ones_come_first():
    n = candidate_directions()
    assert n.shape[1] == 49 + 1281
    assert np.allclose(np.linalg.norm(n, axis=0), 1)
    assert np.allclose(np.abs(n[:, :3]).sum(axis=0), 1)  # the three axes
    low = np.abs(n[:, :49].T @ n[:, :49]) - np.eye(49)
    assert low.max() < 1 - 1e-6


def test_the_determinant_gain_is_that_of_a_fit_with_the_blank(fit):
    n = random_normals(np.random.default_rng(6), 7)
    ranking = rank_next(fit, n, "determinant")
    before = np.linalg.slogdet(np.linalg.inv(fit.information))[1]
    for k in range(7):
        after = np.linalg.slogdet(with_blank(fit, n[:, k]))[1]
        assert ranking.gains[k] == pytest.approx(np.exp((before - after) / 42), rel=1e-3)


def test_the_largest_uncertainty_is_that_of_a_fit_with_the_blank(fit):
    n = random_normals(np.random.default_rng(7), 7)
    ranking = rank_next(fit, n, "largest", count=7)
    before = np.sqrt(np.diag(np.linalg.inv(fit.information))).max()
    for k in range(7):
        after = np.sqrt(np.diag(with_blank(fit, n[:, k]))).max()
        assert ranking.gains[k] == pytest.approx(before / after, rel=1e-3)
    assert ranking.gains[0] != pytest.approx(ranking.gains[1], rel=1e-6)


def test_one_number_is_served_by_its_own_criterion(fit):
    pin = np.array([1.0, 2.0, 2.0]) / 3
    gradient = young_gradient(Stiffness.from_voigt(fit.stiffness), pin)
    n = random_normals(np.random.default_rng(8), 40)
    ranking = rank_next(fit, n, "functional", gradient)
    spread = [np.sqrt(gradient @ with_blank(fit, d) @ gradient) for d in n.T]
    assert int(np.argmax(ranking.gains)) == int(np.argmin(spread))
    assert np.allclose(ranking.best[0].direction, n[:, np.argmin(spread)])
    with pytest.raises(ValueError, match="gradient"):
        rank_next(fit, n, "functional")


def test_the_gradient_of_youngs_modulus_is_its_slope(crystal):
    pin = np.array([0.48, 0.6, 0.64])
    q = np.array([pin[0]**2, pin[1]**2, pin[2]**2,
                  pin[1] * pin[2], pin[0] * pin[2], pin[0] * pin[1]])  # fmt: skip
    gradient = young_gradient(Stiffness.from_voigt(crystal), pin)
    slopes = []
    for i, j in zip(*np.triu_indices(6), strict=True):
        step = np.zeros((6, 6))
        step[i, j] = step[j, i] = 1e-4
        ahead, behind = (1 / (q @ np.linalg.inv(crystal + s * step) @ q) for s in (1, -1))
        slopes.append((ahead - behind) / 2e-4)
    assert np.allclose(gradient, slopes, rtol=1e-6, atol=1e-8)
    # E is homogeneous of degree one in C (Euler).
    assert gradient @ upper_triangle(crystal) == pytest.approx(
        1 / (q @ np.linalg.inv(crystal) @ q), rel=1e-9
    )


def test_suggestions_are_apart_and_not_equal_by_symmetry():
    table = cubic(165.7, 63.9, 79.6)
    n = np.array([[1.0], [0], [0]])
    readings = readings_of(speeds_along(table, DENSITY, n), n)
    fit = recover(readings, DENSITY, crystal_class("cubic"))
    assert fit.rank == 2
    folded = np.array([np.sort(np.abs(blank.direction)) for blank in rank_next(fit).best])
    closeness = folded @ folded.T - np.eye(len(folded))
    assert closeness.max() < np.cos(np.radians(10))


def test_the_blank_it_suggests_removes_what_was_not_seen():
    """[100] leaves C12 of a cubic crystal unseen; the first suggestion sees it."""
    table = cubic(165.7, 63.9, 79.6)
    n = np.array([[1.0], [0], [0]])
    readings = readings_of(speeds_along(table, DENSITY, n), n)
    cls = crystal_class("cubic")
    best = rank_next(recover(readings, DENSITY, cls)).best[0].direction[:, None]
    more = [
        Reading(r.direction, r.speed, r.sigma, r.row + 3, r.sheet)
        for r in readings_of(speeds_along(table, DENSITY, best), best)
    ]
    fit = recover(readings + more, DENSITY, cls)
    assert fit.rank == 3
    assert np.allclose(fit.stiffness, table, atol=1e-4)


def test_ranking_over_the_sphere_is_quick(fit):
    rank_next(fit)
    times = []
    for criterion in ("determinant", "largest"):
        start = time.perf_counter()
        rank_next(fit, criterion=criterion)
        times.append(time.perf_counter() - start)
    assert min(times) < 0.3


# --- from nothing ---------------------------------------------------------------------------


FEWEST = {"triclinic": 8, "monoclinic": 5, "orthorhombic": 3, "tetragonal_7": 3,
          "tetragonal_6": 2, "trigonal_7": 3, "trigonal_6": 2, "hexagonal": 2, "cubic": 1,
          "isotropic": 1}  # fmt: skip
"""Blanks that counting allows: one gives three numbers, and beyond six blanks two each."""


@pytest.mark.parametrize("key", CLASS_KEYS)
def test_a_plan_has_as_few_blanks_as_counting_allows_and_works(key, crystal):
    cls = crystal_class(key)
    table = complete(crystal, cls)
    found = plan(Medium(Stiffness.from_voigt(table), DENSITY), cls)
    assert found is not None
    assert found.directions.shape[1] == FEWEST[key]
    readings = readings_of(speeds_along(table, DENSITY, found.directions), found.directions)
    # So few speeds may suit a second crystal as well: the rough one says which is meant.
    fit = recover(readings, DENSITY, cls, FitOptions(prior=table))
    assert fit.rank == len(cls.independent)
    if key != "isotropic":  # where LAPACK's two shear waves are equal only to rounding
        stated = np.sqrt(np.diag(fit.parameter_covariance))
        assert np.allclose(found.std, stated, rtol=0.02)


def test_seven_blanks_never_do_for_twenty_one_constants(crystal):
    n = random_normals(np.random.default_rng(9), 7)
    readings = readings_of(speeds_along(crystal, DENSITY, n), n)
    fit = recover(readings, DENSITY, TRICLINIC)
    assert len(readings) == 21
    assert fit.rank <= 20


def test_a_plan_for_a_wanted_certainty_has_more_blanks(crystal):
    medium = Medium(Stiffness.from_voigt(crystal), DENSITY)
    fewest = plan(medium, TRICLINIC)
    better = plan(medium, TRICLINIC, largest_std=0.6 * fewest.std.max())
    assert better.directions.shape[1] > fewest.directions.shape[1]
    assert better.std.max() <= 0.6 * fewest.std.max()


def test_where_the_feasible_cuts_cannot_do_it_there_is_no_plan(crystal):
    angle = np.linspace(0, np.pi, 13)[:-1]
    plane = np.array([np.cos(angle), np.sin(angle), 0 * angle])
    table = complete(crystal, crystal_class("orthorhombic"))
    assert plan(Medium(Stiffness.from_voigt(table), DENSITY), TRICLINIC, plane) is None


def test_a_plan_needs_a_density(crystal):
    with pytest.raises(ValueError, match="density"):
        plan(Medium(Stiffness.from_voigt(crystal)), TRICLINIC)
