"""The model of a survey: speeds and derivatives against LAPACK and finite differences."""

import numpy as np
import pytest

from core.study.recovery.model import basis_of, predict, speeds_of, survey_of, waves
from core.tensor.symmetry import CLASS_KEYS, complete, crystal_class
from tests.surveys import random_normals, scattered, speeds_along

DENSITY = 2700.0


@pytest.fixture
def rng():
    return np.random.default_rng(11)


@pytest.mark.parametrize("key", CLASS_KEYS)
def test_constants_and_table_are_one_another(rng, key):
    cls = crystal_class(key)
    basis = basis_of(cls)
    table = complete(scattered(rng), cls)
    constants = basis.constants(table)
    assert np.allclose(basis.table(constants), table, rtol=0, atol=1e-12)
    weights = np.sqrt(np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2]))
    length = np.linalg.norm(basis.kelvin_root.T @ constants)
    assert length == pytest.approx(np.linalg.norm(weights * table), rel=1e-12)


def test_speeds_are_those_of_lapack(rng):
    table, n = scattered(rng), random_normals(rng, 40)
    basis = basis_of(crystal_class("triclinic"))
    found = speeds_of(survey_of(basis, DENSITY, n), basis.constants(table))
    assert np.allclose(found, speeds_along(table, DENSITY, n), rtol=1e-12)


@pytest.mark.parametrize("key", ["triclinic", "monoclinic", "trigonal_7", "cubic"])
def test_the_jacobian_is_the_slope_of_lapacks_speeds(rng, key):
    cls = crystal_class(key)
    basis, n = basis_of(cls), random_normals(rng, 12)
    table = complete(scattered(rng, 0.1), cls)
    place = np.repeat(np.arange(12), 3)
    survey = survey_of(basis, DENSITY, n, place)
    constants = basis.constants(table)
    sheets = np.tile([0, 1, 2], 12)[None]
    _speed, jacobian = predict(survey, waves(survey, constants[None]), sheets)
    for k in range(basis.size):
        step = 1e-3
        ahead, behind = (
            speeds_along(basis.table(constants + s * step * np.eye(basis.size)[k]), DENSITY, n)
            for s in (1, -1)
        )
        slope = ((ahead - behind) / (2 * step)).T.ravel()
        assert np.allclose(jacobian[0, :, k], slope, rtol=2e-4, atol=2e-3)


def test_many_crystals_at_once_are_each_as_alone(rng):
    basis = basis_of(crystal_class("triclinic"))
    tables = [scattered(rng) for _ in range(4)]
    constants = basis.constants(np.array(tables))
    survey = survey_of(basis, DENSITY, random_normals(rng, 9))
    sheets = rng.integers(0, 3, (4, 9))
    speed, jacobian = predict(survey, waves(survey, constants), sheets)
    for k in range(4):
        one = predict(survey, waves(survey, constants[[k]]), sheets[[k]])
        assert np.allclose(speed[k], one[0][0], rtol=1e-13)
        assert np.allclose(jacobian[k], one[1][0], rtol=1e-9, atol=1e-12)


def test_an_impossible_trial_crystal_still_has_speeds_and_slopes(rng):
    basis = basis_of(crystal_class("cubic"))
    survey = survey_of(basis, DENSITY, np.array([[1.0, 0, 0], [1, 1, 0]]).T)
    found = waves(survey, np.array([[100.0, 150.0, 30.0]]))  # C11 < C12: ρv² < 0 along [110]
    assert found.values.min() < 0
    speed, jacobian = predict(survey, found, np.full((1, 2), 2))
    assert np.isfinite(speed).all()
    assert np.isfinite(jacobian).all()
    assert np.abs(jacobian[0, 1]).max() > 0
