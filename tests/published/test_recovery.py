"""Constants from speeds against statements in print and a synthetic table of speeds."""

import numpy as np
import pytest

from core.study.recovery.fitting import recover
from core.study.recovery.readings import Reading
from core.tensor.symmetry import crystal_class
from tests.materials import cubic
from tests.surveys import readings_of, speeds_along

# SrTiO3, GPa and kg/m3: the values of the check 13-STO (C11 315.6, C12 102.7, C44 121.5, 5116).
STRONTIUM_TITANATE = cubic(315.6, 102.7, 121.5)
STO_DENSITY = 5116.0


@pytest.mark.parametrize(("direction", "rank"), [
    ((1, 0, 0), 2), ((1, 1, 1), 2), ((1, 1, 0), 3), ((0.36, 0.48, 0.80), 3),
])  # fmt: skip
def test_three_speeds_along_one_direction_of_a_cubic_crystal(direction, rank):
    """Three speeds in one direction suffice, except along [100] and [111].

    Wachtman, Wheat & Marzullo 1963, J. Res. NBS 67A, 193.
    """
    n = np.array(direction, dtype=float)[:, None] / np.linalg.norm(direction)
    readings = readings_of(speeds_along(STRONTIUM_TITANATE, STO_DENSITY, n), n)
    fit = recover(readings, STO_DENSITY, crystal_class("cubic"))
    assert fit.rank == rank
    assert len(fit.undetermined) == 3 - rank
    if rank == 3:
        assert fit.stiffness[0, 1] == pytest.approx(102.7, abs=1e-3)


ALBITE_DENSITY = 2623.0
ALBITE = np.array([
    [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
    [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
    [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
    [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
    [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
    [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
])  # fmt: skip
"""GPa, x along a*, y along b: the constants of the check 13-ALB, in the range of those that
J. M. Brown et al. 2016, Am. Mineral. 101, 1228 measured for albite."""

ALBITE_SPEEDS = {
    (1, 0, 0): (3186.7, 3574.1, 5168.0), (0, 1, 0): (2800.6, 3782.1, 8371.1),
    (0, 0, 1): (2973.5, 3248.5, 8291.5), (1, 1, 0): (2914.7, 3758.7, 6696.1),
    (1, 0, 1): (2725.4, 3655.4, 6866.4), (0, 1, 1): (3293.1, 5772.6, 6434.5),
    (1, 1, 1): (3291.8, 5321.5, 5611.7), (1, -1, 0): (3120.4, 3767.2, 7104.3),
    (1, 0, -1): (3599.3, 3944.3, 6428.9), (0, 1, -1): (3317.8, 5814.7, 7069.5),
    (-1, 1, 1): (2886.1, 4799.1, 6721.6), (1, -1, 1): (3425.0, 5243.8, 6495.6),
    (1, 1, -1): (3533.0, 4977.2, 6388.4),
}  # fmt: skip
"""m/s, slowest first, along components in crystal axes: the synthetic table of 13-ALB."""


def albite_readings(directions, marked=True):
    readings = []
    for direction in directions:
        for place, speed in enumerate(ALBITE_SPEEDS[direction]):
            row = len(readings) + 1
            sheet = 3 - place if marked else None
            readings.append(Reading(direction, speed, 1e-3 * speed, row, sheet))
    return readings


def test_the_synthetic_table_holds_the_speeds_of_its_constants():
    n = np.array(list(ALBITE_SPEEDS), dtype=float).T
    n /= np.linalg.norm(n, axis=0)
    table = np.array(list(ALBITE_SPEEDS.values())).T[::-1]
    assert np.allclose(speeds_along(ALBITE, ALBITE_DENSITY, n), table, atol=0.06)


@pytest.mark.parametrize("marked", [True, False])
def test_thirty_nine_speeds_give_twenty_one_constants(marked):
    readings = albite_readings(ALBITE_SPEEDS, marked)
    fit = recover(readings, ALBITE_DENSITY, crystal_class("triclinic"))
    assert fit.rank == 21
    assert np.abs(fit.stiffness - ALBITE).max() < 0.05


@pytest.mark.parametrize(("count", "rank"), [(3, 9), (6, 18), (7, 20), (8, 21), (13, 21)])
def test_what_the_first_directions_of_the_table_see(count, rank):
    """Twenty-one speeds in seven directions are not enough: beyond six, each gives two."""
    readings = albite_readings(list(ALBITE_SPEEDS)[:count])
    fit = recover(readings, ALBITE_DENSITY, crystal_class("triclinic"))
    assert fit.rank == rank
    assert len(fit.undetermined) == 21 - rank
