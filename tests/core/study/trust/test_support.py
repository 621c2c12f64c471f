"""How many constants data support: drawn tables must give back their class."""

import numpy as np
import pytest

from core.study.trust.support import supported_classes
from core.tensor.hidden_axes import nearest_classes
from core.tensor.stiffness import Stiffness
from tests import materials

CRYSTALS = {
    "isotropic": materials.isotropic(100, 50),
    "cubic": materials.cubic(168.4, 121.4, 75.4),
    "hexagonal": materials.hexagonal(165, 31.1, 50, 61.8, 39.6),
    "trigonal_6": materials.trigonal(86.8, 7.0, 11.9, -18.0, 107.2, 58.2),
    "tetragonal_6": materials.tetragonal(55.7, 51.2, 21.8, 105.8, 26.5, 65.9),
    "orthorhombic": materials.orthorhombic(320.5, 196.5, 233.5, 68.1, 71.6, 76.8, 64, 77, 78.7),
}


def drawn(table, std, rng):
    error = np.triu(std * rng.standard_normal((6, 6)))
    return Stiffness.from_voigt((table + table.T) / 2 + error + np.triu(error, 1).T)


@pytest.mark.parametrize("key", CRYSTALS)
def test_the_class_drawn_from_is_supported_best_and_chi2_counts_the_rest(key):
    """χ² of the true class scatters about 21 − parameters, with a variance of twice that."""
    rng = np.random.default_rng(19)
    std = rng.uniform(0.2, 0.6, (6, 6))
    std = (std + std.T) / 2
    wins, chi2 = 0, []
    for _ in range(8):
        table = materials.rotated(CRYSTALS[key], materials.random_rotation(rng))
        stiffness = drawn(table, std, rng)
        supports = supported_classes(stiffness, std, nearest_classes(stiffness))
        wins += supports[0].class_key == key
        true = next(support for support in supports if support.class_key == key)
        chi2.append(true.chi2)
    assert wins >= 6  # each class that holds it wins by noise in some 3 % of draws
    freedom = 21 - true.parameters
    assert np.mean(chi2) == pytest.approx(freedom, abs=3 * np.sqrt(2 * freedom / 8))


def test_parameters_are_constants_and_angles():
    stiffness = Stiffness.from_voigt(CRYSTALS["orthorhombic"])
    supports = supported_classes(stiffness, np.full((6, 6), 0.5), nearest_classes(stiffness))
    assert {s.class_key: (s.constants, s.parameters) for s in supports} == {
        "triclinic": (21, 21), "monoclinic": (13, 15), "orthorhombic": (9, 12),
        "tetragonal_6": (6, 9), "trigonal_6": (6, 9), "hexagonal": (5, 7), "cubic": (3, 6),
        "isotropic": (2, 2),
    }  # fmt: skip
    for support in supports:
        assert support.criterion == pytest.approx(
            support.chi2 + support.parameters * np.log(21))
    assert [s.criterion for s in supports] == sorted(s.criterion for s in supports)


def test_chi2_of_the_isotropic_class_is_a_weighted_least_squares_fit():
    """Two parameters, no axes: numpy's solver on the same 21 weighted equations."""
    rng = np.random.default_rng(3)
    std = rng.uniform(0.5, 2.0, (6, 6))
    stiffness = Stiffness.from_voigt(CRYSTALS["cubic"])
    rows = np.triu_indices(6)
    bulk, shear = materials.isotropic(1, 0)[rows], materials.isotropic(0, 1)[rows]
    weights = 1 / std[rows]
    columns = np.array([bulk, shear]).T * weights[:, None]
    _, rest, *_ = np.linalg.lstsq(columns, stiffness.voigt[rows] * weights, rcond=None)
    supports = supported_classes(stiffness, std, nearest_classes(stiffness))
    found = next(s for s in supports if s.class_key == "isotropic")
    assert found.chi2 == pytest.approx(rest[0], rel=1e-10)


def test_uncertainties_are_needed_and_gaps_are_filled():
    stiffness = Stiffness.from_voigt(CRYSTALS["cubic"])
    found = nearest_classes(stiffness)
    with pytest.raises(ValueError, match="uncertainty"):
        supported_classes(stiffness, np.zeros((6, 6)), found)
    sparse = np.where(CRYSTALS["cubic"] != 0, 0.4, 0.0)
    assert supported_classes(stiffness, sparse, found)[0].class_key == "cubic"
