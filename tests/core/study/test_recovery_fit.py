"""The fit: it finds the crystal, and is right about how sure it is.

Readings come from LAPACK on the full Christoffel matrix (tests.surveys), never from `core`.
"""

import time
from dataclasses import replace

import numpy as np
import pytest

from core.errors import InputError
from core.study.recovery.fit import FitOptions
from core.study.recovery.fitting import recover
from core.study.recovery.readings import Reading
from core.task import Cancelled, Ticker
from core.tensor.symmetry import CLASS_KEYS, complete, crystal_class
from tests.materials import cubic, isotropic, orthorhombic
from tests.surveys import (
    kelvin_norm,
    measured_crystal,
    misfit,
    polarisations_along,
    random_normals,
    readings_of,
    scattered,
    speeds_along,
)

DENSITY = 2700.0
TRICLINIC = crystal_class("triclinic")


@pytest.fixture
def rng():
    return np.random.default_rng(31)


def constants_of(fit, table):
    return np.array([table[i, j] for i, j in fit.cls.independent])


def exact(table, rng, count, sigma=1e-3):
    n = random_normals(rng, count)
    return readings_of(speeds_along(table, DENSITY, n), n, sigma)


# --- finding the crystal --------------------------------------------------------------------


@pytest.mark.parametrize("key", CLASS_KEYS)
def test_exact_readings_give_back_the_crystal_of_every_class(rng, key):
    cls = crystal_class(key)
    table = complete(scattered(rng, 0.1), cls)
    fit = recover(exact(table, rng, 12), DENSITY, cls)
    assert np.allclose(fit.stiffness, table, rtol=0, atol=1e-5)
    assert fit.rank == len(cls.independent)
    assert fit.chi2 < 1e-6
    assert fit.stable
    assert fit.outliers == ()


@pytest.mark.parametrize("axis", "xyz")
def test_the_unique_axis_of_a_monoclinic_crystal_is_obeyed(rng, axis):
    cls = crystal_class("monoclinic", axis)
    table = complete(scattered(rng, 0.1), cls)
    assert np.allclose(recover(exact(table, rng, 12), DENSITY, cls).stiffness, table, atol=1e-5)


def succeeds(rng, normals, cases):
    """Count the random triclinic crystals whose fit is as good as the true crystal."""
    good = 0
    for _ in range(cases):
        table = scattered(rng)
        readings = measured_crystal(table, DENSITY, rng, normals)
        fit = recover(readings, DENSITY, TRICLINIC)
        good += fit.chi2 <= 1.05 * misfit(table, DENSITY, readings)
    return good


def test_twenty_blanks_are_enough_to_find_a_triclinic_crystal(rng):
    assert succeeds(rng, 20, 12) == 12


@pytest.mark.slow
def test_success_over_a_hundred_crystals():
    """The numbers asked for: 98 of 100 from 60 readings, 97 of 100 from 30, σ 0.1 %."""
    assert succeeds(np.random.default_rng(0), 20, 100) >= 98
    assert succeeds(np.random.default_rng(0), 10, 100) >= 97


@pytest.mark.slow
@pytest.mark.parametrize(("normals", "seconds"), [(20, 0.1), (10, 0.4)])
def test_a_fit_is_quick(rng, normals, seconds):
    """Typical time of a whole fit: 60 readings in 100 ms, 30 readings in 400 ms."""
    times = []
    for _ in range(9):
        readings = measured_crystal(scattered(rng), DENSITY, rng, normals)
        start = time.perf_counter()
        recover(readings, DENSITY, TRICLINIC)
        times.append(time.perf_counter() - start)
    assert np.median(times) < seconds


def test_sheets_need_not_be_known(rng):
    table = scattered(rng, 0.15)
    known = measured_crystal(table, DENSITY, rng, 20)
    shuffled = [replace(known[k], sheet=None) for k in rng.permutation(len(known))]
    fit = recover(shuffled, DENSITY, TRICLINIC)
    assert [fit.sheets[k] for k in np.argsort([r.row for r in shuffled])] == [
        reading.sheet for reading in known
    ]
    assert np.allclose(fit.stiffness, recover(known, DENSITY, TRICLINIC).stiffness, atol=1e-4)


def test_one_unmarked_speed_along_a_normal_is_given_its_sheet(rng):
    table = scattered(rng, 0.15)
    readings = measured_crystal(table, DENSITY, rng, 20)
    wanted = {k: readings[k].sheet for k in (3, 10, 20, 31)}
    for k in wanted:
        readings[k] = replace(readings[k], sheet=None)
    lonely = measured_crystal(table, DENSITY, rng, 1)[1]
    fit = recover([*readings, replace(lonely, sheet=None, row=99)], DENSITY, TRICLINIC)
    assert {k: fit.sheets[k] for k in wanted} == wanted
    assert fit.sheets[-1] == 2


def test_polarisations_tell_the_sheets(rng):
    table, n = scattered(rng, 0.1), random_normals(rng, 16)
    motion = polarisations_along(table, n)
    readings = readings_of(speeds_along(table, DENSITY, n), n, rng=rng)
    marked = []
    for reading in readings:
        column, sheet = divmod(reading.row - 1, 3)
        # A transducer is never aligned better than some degrees.
        vector = motion[sheet, :, column] + 0.1 * rng.standard_normal(3)
        words = "longitudinal" if sheet == 0 else tuple(vector / np.linalg.norm(vector))
        marked.append(replace(reading, sheet=None, polarisation=words))
    fit = recover(marked, DENSITY, TRICLINIC)
    assert [int(s) for s in fit.sheets] == [reading.sheet for reading in readings]
    assert np.allclose(fit.stiffness, table, atol=6 * fit.std.max())


def test_a_shear_wave_that_outruns_the_longitudinal_one_is_told_by_its_motion():
    """C11 < C44 along x: the fastest wave is a shear wave there, and both shears are it."""
    table = orthorhombic(40, 160, 150, 5, 6, 45, 50, 60, 62)
    cuts = [[1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 1, 0], [1, 0, 1], [0, 1, 1], [1, 1, 1]]
    n = np.array(cuts).T
    n = n / np.linalg.norm(n, axis=0)
    speeds = speeds_along(table, DENSITY, n)
    readings = readings_of(speeds, n)
    along_x = [
        replace(readings[0], sheet=None, polarisation="shear"),
        replace(readings[1], sheet=None, polarisation="shear"),
        replace(readings[2], sheet=None, polarisation="longitudinal"),
    ]
    fit = recover(along_x + readings[3:], DENSITY, crystal_class("orthorhombic"))
    assert fit.sheets[:3] == (1, 2, 3)
    assert np.allclose(fit.stiffness, table, atol=1e-4)


def test_a_sheet_and_a_polarisation_that_disagree_are_named(rng):
    table = isotropic(80, 40) + 0.0
    readings = exact(table, rng, 4)
    wrong = replace(readings[0], polarisation=tuple(np.cross(readings[0].direction, [0, 0, 1])))
    fit = recover([wrong, *readings[1:]], DENSITY, crystal_class("cubic"))
    assert any(note.startswith("Row 1: in this crystal") for note in fit.notes)


@pytest.mark.parametrize("seed", [0, 2, 3])
def test_group_speeds_along_rays_are_fitted(seed):
    """Rays and their speeds from LAPACK: V = C_ijkl p_i p_k n_l/(ρv), |V| along V/|V|."""
    from tests.reference import full_tensor

    rng = np.random.default_rng(seed)
    table, n = scattered(rng, 0.06), random_normals(rng, 24)
    tensor = full_tensor(table).astype(float)
    speeds, motion = speeds_along(table, DENSITY, n), polarisations_along(table, n)
    readings = []
    for sheet in range(3):
        p, v = motion[sheet], speeds[sheet]
        velocity = np.einsum("ijkl,ia,ka,la->ja", tensor, p, p, n) * 1e9 / (DENSITY * v)
        for column, ray in enumerate(velocity.T):
            size = float(np.linalg.norm(ray))
            row = len(readings) + 1
            readings.append(
                Reading(tuple(ray / size), size, 1e-3 * size, row, sheet + 1, kind="group")
            )
            assert ray @ n[:, column] == pytest.approx(v[column], rel=1e-9)
    fit = recover(readings, DENSITY, TRICLINIC)
    assert kelvin_norm(fit.stiffness - table) < 1e-3 * kelvin_norm(table)
    as_phase = recover([replace(r, kind="phase") for r in readings], DENSITY, TRICLINIC)
    assert kelvin_norm(as_phase.stiffness - table) > 2e-3 * kelvin_norm(table)


# --- how sure -------------------------------------------------------------------------------


def repeated_fits(table, normals, cases, rng, sigma=1e-3):
    n = random_normals(rng, normals)
    speeds = speeds_along(table, DENSITY, n)
    fits = [recover(readings_of(speeds, n, sigma, rng=rng), DENSITY, TRICLINIC)
            for _ in range(cases)]  # fmt: skip
    return fits, np.array([constants_of(fit, table) for fit in fits])


def check_coverage(fits, true):
    """Return scatter over stated σ per constant, and the part of all within one σ."""
    found = np.array([fit.constants for fit in fits])
    stated = np.array([np.sqrt(np.diag(fit.parameter_covariance)) for fit in fits])
    ratio = found.std(axis=0, ddof=1) / stated.mean(axis=0)
    return ratio, float((np.abs(found - true) < stated).mean())


def test_the_stated_uncertainties_are_those_of_repeated_measurement():
    rng = np.random.default_rng(5)
    fits, true = repeated_fits(scattered(rng, 0.15), 16, 40, rng)
    ratio, within = check_coverage(fits, true)
    assert np.sqrt((ratio**2).mean()) == pytest.approx(1.0, abs=0.15)
    assert within == pytest.approx(0.683, abs=0.06)
    assert np.mean([fit.chi2 for fit in fits]) == pytest.approx(fits[0].dof, rel=0.15)


@pytest.mark.slow
def test_every_uncertainty_matches_the_scatter_of_two_hundred_fits():
    """Each of 21 to 15 %; σ of a scatter from 200 fits is itself 5 %."""
    rng = np.random.default_rng(6)
    fits, true = repeated_fits(scattered(rng, 0.15), 20, 200, rng)
    ratio, within = check_coverage(fits, true)
    assert np.abs(ratio - 1).max() < 0.15
    assert within == pytest.approx(0.683, abs=0.03)


def test_the_density_scales_every_constant(rng):
    readings = measured_crystal(scattered(rng, 0.15), DENSITY, rng, 14)
    plain = recover(readings, DENSITY, TRICLINIC)
    denser = recover(readings, DENSITY * 1.01, TRICLINIC)
    assert np.allclose(denser.stiffness, 1.01 * plain.stiffness, rtol=1e-5, atol=1e-5)
    unsure = recover(readings, DENSITY, TRICLINIC, FitOptions(density_sigma=0.01 * DENSITY))
    grown = unsure.std**2 - plain.std**2
    assert np.allclose(grown, (0.01 * plain.stiffness) ** 2, rtol=1e-3, atol=1e-6)


def test_uncertain_directions_widen_the_uncertainties_of_tilted_sheets(rng):
    """Scatter of fits with blanks cut 0.2° off, against σ that knows it and that does not."""
    table, n = scattered(rng, 0.2), random_normals(rng, 20)
    cut = np.radians(0.2)
    found, stated, naive = [], [], []
    for _ in range(25):
        readings = []
        for k in range(3):  # each wave on a blank of its own, so that the cuts are independent
            turned = n + cut * rng.standard_normal(n.shape)
            speeds = speeds_along(table, DENSITY, turned / np.linalg.norm(turned, axis=0))
            readings += readings_of(speeds, n, 2e-4, (k + 1,))
        readings = [replace(r, row=i + 1) for i, r in enumerate(readings)]
        fit = recover(readings, DENSITY, TRICLINIC, FitOptions(direction_sigma_deg=0.2))
        found.append(fit.constants)
        stated.append(np.sqrt(np.diag(fit.parameter_covariance)))
        plain = recover(readings, DENSITY, TRICLINIC)
        naive.append(np.sqrt(np.diag(plain.parameter_covariance)))
    scatter = np.std(found, axis=0, ddof=1)
    ratio, naive_ratio = (
        np.sqrt(np.mean((scatter / np.mean(sigma, axis=0)) ** 2)) for sigma in (stated, naive)
    )
    assert ratio == pytest.approx(1, abs=0.2)
    assert naive_ratio > 2


def test_the_probability_of_stability_follows_the_uncertainty(rng):
    """A bulk modulus of about one σ: P(stable) is the probability that it is positive."""
    from scipy.stats import norm

    table = cubic(100.0, -49.7, 20.0)
    fit = recover(exact(table, rng, 6, sigma=3e-3), DENSITY, crystal_class("cubic"))
    bulk = np.array([1.0, 2.0, 0.0]) / 3
    spread = np.sqrt(bulk @ fit.parameter_covariance @ bulk)
    chance = norm.cdf(bulk @ fit.constants / spread)
    assert 0.6 < chance < 0.98
    assert fit.stability_probability == pytest.approx(chance, abs=0.03)


def test_a_well_measured_crystal_is_surely_stable(rng):
    fit = recover(measured_crystal(scattered(rng), DENSITY, rng, 14), DENSITY, TRICLINIC)
    assert fit.stability_probability == 1.0
    assert np.allclose(np.diag(fit.correlation), 1.0)
    assert np.abs(fit.correlation).max() <= 1.0


# --- suspects -------------------------------------------------------------------------------


def test_a_reading_five_sigma_off_is_flagged_and_named(rng):
    readings = measured_crystal(scattered(rng, 0.15), DENSITY, rng, 20)
    off = next(r for r in readings if r.row == 23)
    readings[22] = replace(off, speed=off.speed + 6.5 * off.sigma)
    fit = recover(readings, DENSITY, TRICLINIC)
    assert fit.outliers == (23,)
    assert np.abs(fit.studentised).argmax() == 22
    assert fit.notes[0] == "Row 23 fits neither this crystal nor the other readings."


def test_sound_tables_have_hardly_ever_an_outlier():
    rng = np.random.default_rng(77)
    table = scattered(rng, 0.15)
    false = sum(
        bool(recover(measured_crystal(table, DENSITY, rng, 20), DENSITY, TRICLINIC).outliers)
        for _ in range(30)
    )
    assert false <= 5  # one table in twenty is expected


def test_several_gross_slips_are_found_together(rng):
    readings = measured_crystal(scattered(rng, 0.15), DENSITY, rng, 20)
    for k, factor in ((4, 1.02), (17, 0.97), (40, 1.05)):
        readings[k] = replace(readings[k], speed=readings[k].speed * factor)
    assert recover(readings, DENSITY, TRICLINIC).outliers == (5, 18, 41)


def test_a_robust_fit_is_hardly_moved_by_gross_slips(rng):
    table = scattered(rng, 0.15)
    readings = measured_crystal(table, DENSITY, rng, 20)
    for k, factor in ((4, 1.02), (17, 0.97), (40, 1.05)):
        readings[k] = replace(readings[k], speed=readings[k].speed * factor)
    plain = recover(readings, DENSITY, TRICLINIC)
    robust = recover(readings, DENSITY, TRICLINIC, FitOptions(robust=True))
    error = [kelvin_norm(fit.stiffness - table) for fit in (plain, robust)]
    assert error[1] < 0.3 * error[0]
    assert robust.outliers == (5, 18, 41)


def test_a_sigma_that_is_too_small_is_said_and_no_reading_blamed(rng):
    readings = measured_crystal(scattered(rng, 0.15), DENSITY, rng, 24, sigma=3e-3)
    bold = [replace(reading, sigma=reading.sigma / 5) for reading in readings]
    fit = recover(bold, DENSITY, TRICLINIC)
    assert fit.outliers == ()
    assert any("times more than their σ allow" in note for note in fit.notes)


def test_too_high_a_symmetry_is_said(rng):
    readings = measured_crystal(scattered(rng, 0.1), DENSITY, rng, 24)
    fit = recover(readings, DENSITY, crystal_class("orthorhombic"))
    assert any("less symmetry than its class" in note for note in fit.notes)


def test_leaving_a_reading_out_changes_the_constants_as_foretold(rng):
    readings = measured_crystal(scattered(rng, 0.15), DENSITY, rng, 14)
    fit = recover(readings, DENSITY, TRICLINIC)
    scale = np.sqrt(np.diag(fit.parameter_covariance))
    for k in np.argsort(-fit.influence)[[0, 5, 20]]:
        rest = readings[:k] + readings[k + 1 :]
        refit = recover(rest, DENSITY, TRICLINIC, FitOptions(prior=fit.stiffness))
        assert np.abs((refit.constants - fit.constants - fit.shifts[k]) / scale).max() < 0.05
        rise = (fit.shifts[k] @ np.linalg.solve(fit.parameter_covariance, fit.shifts[k])) / 21
        assert fit.influence[k] == pytest.approx(rise, rel=1e-6)
    assert fit.leverage.sum() == pytest.approx(21, rel=1e-6)


def test_speeds_of_no_stable_crystal_are_named(rng):
    """Isotropic with ρv_s² > 3/4 ρv_p²: the bulk modulus would be negative."""
    density = 2700.0
    fast, slow = (np.sqrt(c * 1e9 / density) for c in (100.0, 85.0))
    readings = [Reading((1, 0, 0), fast, 3.0, 1, 1), Reading((1, 0, 0), slow, 3.0, 2, 2),
                Reading((0, 0.6, 0.8), fast, 3.0, 3, 1)]  # fmt: skip
    fit = recover(readings, density, crystal_class("isotropic"))
    assert not fit.stable
    assert fit.stability_probability == 0.0
    (note,) = [note for note in fit.notes if note.startswith("No stable crystal")]
    assert "rows" in note
    assert "2" in note


# --- what is not seen -----------------------------------------------------------------------


def test_fewer_readings_than_constants_are_fitted_where_they_see(rng):
    table = scattered(rng, 0.1)
    n = np.eye(3)
    fit = recover(readings_of(speeds_along(table, DENSITY, n), n), DENSITY, TRICLINIC)
    assert (fit.rank, fit.dof, len(fit.undetermined)) == (9, 0, 12)
    assert fit.chi2 < 1e-2
    assert fit.stability_probability is None
    assert np.isinf(fit.std).any()
    assert fit.stable
    assert fit.notes[0].startswith("9 of 21 combinations of constants are seen.")


def test_what_is_not_seen_moves_no_speed(rng):
    table = scattered(rng, 0.1)
    n = random_normals(rng, 6)
    fit = recover(readings_of(speeds_along(table, DENSITY, n), n), DENSITY, TRICLINIC)
    assert fit.rank == 18
    before = speeds_along(fit.stiffness, DENSITY, n)
    for combination in fit.undetermined:
        change = np.zeros((6, 6))
        for name, part in combination.parts:
            i, j = int(name[1]) - 1, int(name[2]) - 1
            change[i, j] = change[j, i] = part
        moved = speeds_along(fit.stiffness + 1e-3 * change, DENSITY, n)
        across = speeds_along(fit.stiffness + 1e-3 * np.eye(6), DENSITY, n)
        assert np.abs(moved - before).max() < 2e-2 * np.abs(across - before).max()


def test_where_readings_are_blind_the_prior_stands(rng):
    table = scattered(rng, 0.1)
    n = np.eye(3)
    readings = readings_of(speeds_along(table, DENSITY, n), n)
    prior = table + 0.0
    prior[0, 1] = prior[1, 0] = table[0, 1] + 3.0  # C12 does not enter along the axes
    fit = recover(readings, DENSITY, TRICLINIC, FitOptions(prior=prior))
    assert fit.stiffness[0, 1] == pytest.approx(prior[0, 1], abs=1e-3)
    assert np.allclose(np.diag(fit.stiffness), np.diag(table), atol=0.5)


def test_longitudinal_speeds_alone_see_fifteen_combinations():
    """They see the totally symmetric part of the tensor and hardly more."""
    rng = np.random.default_rng(4)
    table = scattered(rng, 0.05)
    readings = measured_crystal(table, DENSITY, rng, 60, sheets=(1,))
    fit = recover(readings, DENSITY, TRICLINIC)
    assert fit.rank == 15
    symmetric = [table[0, 1] + 2 * table[5, 5], table[0, 3] + 2 * table[4, 5]]
    found = [fit.stiffness[0, 1] + 2 * fit.stiffness[5, 5],
             fit.stiffness[0, 3] + 2 * fit.stiffness[4, 5]]  # fmt: skip
    assert np.allclose(found, symmetric, atol=1.5)


@pytest.mark.parametrize(("planes", "rank"), [(1, 9), (2, 14), (3, 18)])
@pytest.mark.parametrize("noisy", [False, True])
def test_coordinate_planes_of_an_orthorhombic_crystal(planes, rank, noisy):
    """Fitted without symmetry: blind to three combinations even with three planes.

    With noise too, although the fit then puts those constants some way off zero, where their
    squares begin to show.
    """
    rng = np.random.default_rng(planes)
    table = orthorhombic(110, 150, 190, 45, 55, 60, 35, 42, 50)
    angle = np.linspace(0, np.pi, 9)[:-1] + 0.15
    circle = np.array([np.cos(angle), np.sin(angle), 0 * angle])
    n = np.concatenate([np.roll(circle, k, axis=0) for k in range(planes)], axis=1)
    readings = readings_of(speeds_along(table, DENSITY, n), n, rng=rng if noisy else None)
    fit = recover(readings, DENSITY, TRICLINIC)
    assert fit.rank == rank
    assert len(fit.undetermined) == 21 - rank
    if planes == 3:
        assert [combination.text for combination in fit.undetermined] == ["C14", "C25", "C36"]


def test_two_crystals_with_the_same_speeds_are_both_named():
    """In coordinate planes only (C13 + C55)² shows, so that C13 has a double."""
    table = orthorhombic(74.2, 118.9, 29.8, 18.4, -21.6, 12.7, 17.2, 9.6, 33.5)
    n = np.array([[1, 0, 0], [0, 1, 0], [0, 0, 1], [1, 1, 0], [1, 0, 1], [0, 1, 1]]).T
    n = n / np.linalg.norm(n, axis=0)
    double = table + 0.0
    double[0, 2] = double[2, 0] = -2 * table[4, 4] - table[0, 2]
    speeds = speeds_along(table, DENSITY, n)
    assert np.allclose(speeds, speeds_along(double, DENSITY, n), rtol=1e-12)
    fit = recover(readings_of(speeds, n), DENSITY, crystal_class("orthorhombic"))
    assert any(note.startswith("Another crystal fits as well, with C") for note in fit.notes)


# --- the edges ------------------------------------------------------------------------------


def test_nothing_to_fit_and_no_density_are_refused(rng):
    readings = measured_crystal(scattered(rng), DENSITY, rng, 8)
    for table, density in (([], DENSITY), (readings, 0.0), (readings, np.nan)):
        with pytest.raises(InputError):
            recover(table, density, TRICLINIC)


def test_too_many_readings_are_refused_plainly():
    many = [Reading((1, 0, 0), 5000.0, 5.0, row) for row in range(1, 10_002)]
    with pytest.raises(InputError, match="10,001 readings"):
        recover(many, DENSITY, TRICLINIC)


def test_one_reading_is_a_fit_too():
    fit = recover([Reading((0, 0, 1), 6000.0, 6.0, 1, 1)], DENSITY, crystal_class("cubic"))
    assert fit.rank == 1
    assert fit.stiffness[0, 0] == pytest.approx(DENSITY * 6000.0**2 * 1e-9, rel=1e-4)


def test_a_newer_request_stops_the_search(rng):
    with pytest.raises(Cancelled):
        recover(measured_crystal(scattered(rng), DENSITY, rng, 10), DENSITY, TRICLINIC,
                ticker=Ticker(is_cancelled=lambda: True))  # fmt: skip


def test_the_same_table_gives_the_same_answer(rng):
    readings = measured_crystal(scattered(rng), DENSITY, rng, 10)
    first, second = (recover(readings, DENSITY, TRICLINIC) for _ in range(2))
    assert (first.stiffness == second.stiffness).all()
