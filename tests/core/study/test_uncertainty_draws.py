"""Monte Carlo against linear propagation, plain sampling and normal theory."""

import math

import numpy as np
import pytest

from core.directional.medium import Medium
from core.directional.quantities import quantity
from core.directional.sphere import directions, sphere_mesh
from core.study.uncertainty.changes import independent_covariance
from core.study.uncertainty.covariance import factor_of
from core.study.uncertainty.draws import (
    are_stable,
    draws,
    monte_carlo,
    sample,
    stability_chance,
)
from core.task import Cancelled, Ticker
from core.tensor.notation import upper_triangle
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import crystal_class
from tests.materials import cubic, random_physical
from tests.reference import christoffel_matrices

TRICLINIC = Medium(Stiffness.from_voigt(random_physical(np.random.default_rng(1))), 3000.0)
SMALL = 0.2**2 * np.eye(21)


def test_draws_have_the_mean_and_the_covariance_asked_for():
    rng = np.random.default_rng(2)
    columns = rng.standard_normal((21, 5))
    drawn = upper_triangle(draws(TRICLINIC.stiffness, columns @ columns.T, 40_000))
    mean = upper_triangle(TRICLINIC.stiffness.voigt)
    scale = np.sqrt(np.diag(columns @ columns.T))
    assert np.abs((drawn.mean(axis=0) - mean) / scale).max() < 0.03
    gap = (np.cov(drawn.T) - columns @ columns.T) / np.outer(scale, scale)
    assert np.abs(gap).max() < 0.04


def test_draws_repeat_and_keep_the_form_of_the_class():
    claimed = crystal_class("hexagonal")
    stiffness = Stiffness.from_constants(
        "hexagonal", {"11": 162.0, "12": 92.0, "13": 69.0, "33": 181.0, "44": 47.0}
    )
    covariance = independent_covariance(np.full((6, 6), 1.0), claimed)
    tables = draws(stiffness, covariance, 50)
    assert np.array_equal(tables, draws(stiffness, covariance, 50))
    assert not np.array_equal(tables, draws(stiffness, covariance, 50, seed=1))
    assert tables[:, 5, 5] == pytest.approx((tables[:, 0, 0] - tables[:, 0, 1]) / 2)
    assert np.abs(tables[:, 0, 3]).max() < 1e-12
    assert np.array_equal(tables, tables.transpose(0, 2, 1))


def test_monte_carlo_equals_a_plain_loop_over_the_same_draws():
    """LAPACK's eigenvalues and inverses of the same tables, and numpy's statistics."""
    dirs = directions(np.random.default_rng(3).standard_normal((3, 11)))
    found = monte_carlo(TRICLINIC, dirs, SMALL, count=200, percentiles=True)
    tables = draws(TRICLINIC.stiffness, SMALL, 200)
    speeds, youngs = [], []
    n = dirs.n
    pull = np.stack([n[0] ** 2, n[1] ** 2, n[2] ** 2, n[1] * n[2], n[0] * n[2], n[0] * n[1]])
    for table in tables:
        values = np.linalg.eigvalsh(christoffel_matrices(table, n).astype(float))
        speeds.append(np.sqrt(values[:, ::-1].T * 1e3 / 3000.0))
        youngs.append(1 / np.einsum("in,ij,jn->n", pull, np.linalg.inv(table), pull)[None])
    for key, samples in (("phase", np.array(speeds)), ("young", np.array(youngs))):
        spread = found.spreads[key]
        assert spread.mean == pytest.approx(samples.mean(axis=0), rel=1e-12)
        assert spread.deviation == pytest.approx(samples.std(axis=0, ddof=1), rel=1e-9)
        low, high = np.percentile(samples, [2.5, 97.5], axis=0)
        assert spread.low == pytest.approx(low, rel=1e-12)
        assert spread.high == pytest.approx(high, rel=1e-12)
    assert (found.count, found.stable) == (200, 200)


def test_monte_carlo_agrees_with_linear_propagation_where_errors_are_small():
    """σ of 1,000 draws scatters by 1/√2000 = 2.2 %; five of those, away from meeting sheets."""
    dirs = sphere_mesh(3).half
    found = monte_carlo(TRICLINIC, dirs, SMALL)
    young = found.spreads["young"]
    assert np.abs(young.deviation / young.linear - 1).max() < 0.12
    assert young.low is None
    assert not young.differs.any()
    phase = found.spreads["phase"]
    speed = quantity("phase").values(TRICLINIC, dirs)
    gap = np.minimum(speed[0] - speed[1], speed[1] - speed[2])
    clear = gap > 0.2
    assert clear.mean() > 0.3
    assert np.abs(phase.deviation / phase.linear - 1)[:, clear].max() < 0.12
    assert found.differing["young"] == 0.0


def test_directions_where_sheets_repel_are_flagged():
    """At the degenerate [001] of a cubic crystal triclinic errors push the two shear sheets
    apart: with ρv² = C44 + m ± r the mean of the middle sheet rises."""
    medium = Medium(Stiffness.from_voigt(cubic(165.7, 63.9, 79.6)), 2330.0)
    dirs = directions(np.array([[0.0, 0.5], [0.0, 0.2], [1.0, 0.8]]))
    found = monte_carlo(medium, dirs, np.eye(21), count=2000)
    phase = found.spreads["phase"]
    plain = quantity("phase").values(medium, dirs)
    assert phase.mean[1, 0] > plain[1, 0] + phase.deviation[1, 0] / 10
    assert phase.mean[2, 0] < plain[2, 0] - phase.deviation[2, 0] / 10
    assert phase.differs[1:, 0].any()
    assert not phase.differs[:, 1].any()
    assert found.differing == {"young": 0.0, "phase": 0.5}


def test_large_errors_of_young_bias_its_mean():
    """1/E is nearly linear in nothing, so at 10 % errors E has a bias; it is seen, and the
    percentiles enclose 95 % of other draws."""
    covariance = np.diag((0.05 * np.abs(upper_triangle(TRICLINIC.stiffness.voigt)) + 1) ** 2)
    dirs = directions(np.array([0.3, 0.4, 0.9]))
    found = monte_carlo(TRICLINIC, dirs, covariance, count=4000, percentiles=True)
    spread = found.spreads["young"]
    tables = draws(TRICLINIC.stiffness, covariance, 4000, seed=77)
    others = [
        quantity("young").values(Medium(Stiffness.from_voigt(table)), dirs)[0, 0]
        for table in tables[are_stable(tables)][:2000]
    ]
    inside = np.mean((others > spread.low[0, 0]) & (others < spread.high[0, 0]))
    assert inside == pytest.approx(0.95, abs=0.02)


def test_unstable_draws_are_counted_and_left_out():
    medium = Medium(Stiffness.from_voigt(cubic(100.0, 97.0, 40.0)), 5000.0)
    covariance = independent_covariance(np.full((6, 6), 2.0), crystal_class("cubic"))
    dirs = directions(np.array([0.2, 0.3, 0.9]))
    found = monte_carlo(medium, dirs, covariance, count=500)
    # C11 − C12 is 3 with a standard uncertainty of 2 √2: stable with Φ(1.06) = 0.856.
    assert found.stable / found.count == pytest.approx(0.856, abs=0.06)
    assert np.isfinite(found.spreads["phase"].deviation).all()
    hopeless = Medium(Stiffness.from_voigt(cubic(100.0, 150.0, 40.0)), 5000.0)
    nothing = monte_carlo(hopeless, dirs, 1e-6 * SMALL, count=50)
    assert nothing.stable == 0
    assert np.isnan(nothing.spreads["young"].mean).all()


def test_sampling_any_function_gives_what_the_fast_way_gives():
    dirs = directions(np.array([[0.3, 0.1], [0.4, 0.2], [0.9, 0.9]]))
    fast = monte_carlo(TRICLINIC, dirs, SMALL, count=100, percentiles=True).spreads["phase"]
    phase = quantity("phase")
    plain = sample(lambda near: phase.values(near, dirs), TRICLINIC, SMALL, count=100)
    for name in ("mean", "deviation", "low", "high"):
        assert getattr(plain, name) == pytest.approx(getattr(fast, name), rel=1e-9)
    assert plain.linear is None
    assert not plain.differs.any()


def test_without_density_there_is_young_alone():
    dirs = directions(np.array([0.3, 0.4, 0.9]))
    found = monte_carlo(Medium(TRICLINIC.stiffness), dirs, SMALL, count=20)
    assert list(found.spreads) == ["young"]


def test_progress_is_told_and_a_request_to_stop_obeyed():
    told = []
    dirs = sphere_mesh(3).half
    monte_carlo(TRICLINIC, dirs, SMALL, ticker=Ticker(told.append))
    assert told == sorted(told)
    assert told[-1] == 1.0
    assert len(told) > 10
    with pytest.raises(Cancelled):
        monte_carlo(TRICLINIC, dirs, SMALL, ticker=Ticker(is_cancelled=lambda: len(told) > 0))


def test_chance_of_stability_where_one_strain_decides():
    """Cubic with C11 − C12 = 3 ± 2√2 GPa, everything else safe: Φ(3/(2√2))."""
    stiffness = Stiffness.from_voigt(cubic(100.0, 97.0, 40.0))
    covariance = independent_covariance(np.full((6, 6), 2.0), crystal_class("cubic"))
    exact = 0.5 * math.erfc(-3 / (2 * math.sqrt(2)) / math.sqrt(2))
    chance = stability_chance(stiffness, covariance)
    assert chance.normal == pytest.approx(exact, rel=1e-9)
    assert abs(chance.probability - exact) < 4 * chance.standard_error
    binomial = math.sqrt(exact * (1 - exact) / chance.count)
    assert chance.standard_error == pytest.approx(binomial, rel=0.1)


def test_certainty_has_a_standard_error_still():
    chance = stability_chance(TRICLINIC.stiffness, SMALL, count=500)
    assert (chance.probability, chance.count) == (1.0, 500)
    assert 0 < chance.standard_error < 0.01
    exact = stability_chance(TRICLINIC.stiffness, np.zeros((21, 21)), count=10)
    assert exact.normal == 1.0
    unstable = stability_chance(Stiffness.from_voigt(cubic(100.0, 150.0, 40.0)), SMALL)
    assert unstable.normal < 1e-9
    assert unstable.probability == 0.0


def test_factor_and_draws_agree_on_what_is_uncertain():
    covariance = np.zeros((21, 21))
    covariance[15, 15] = 4.0
    tables = draws(TRICLINIC.stiffness, covariance, 100)
    assert factor_of(covariance).shape == (21, 1)
    still = np.ones((6, 6), dtype=bool)
    still[3, 3] = False
    assert np.ptp(tables, axis=0)[still].max() == 0.0
    assert tables[:, 3, 3].std() == pytest.approx(2.0, rel=0.25)
