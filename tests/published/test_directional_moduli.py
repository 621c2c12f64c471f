"""Directional moduli against values in print, closed forms and a separate brute-force sum.

Each table of constants and each expected value has its source beside it. "From memory" marks
a printed value that was not seen again when the test was written; "derived" marks what follows
from the constants by a closed form; "recomputed" marks a value from a separate program that
sums the full fourth-rank tensor, where nothing is printed.
"""

import numpy as np
import pytest
from scipy.optimize import minimize

from core.directional.medium import Medium
from core.directional.moduli import (
    compressibility,
    poisson,
    poisson_extremes,
    shear,
    shear_extremes,
    transverse,
    young,
)
from core.directional.sphere import directions, sphere_mesh
from core.directional.waves import speeds
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, hexagonal, orthorhombic, tetragonal

X, Y, Z = np.eye(3)


def unit(*components):
    return np.array(components) / np.linalg.norm(components)


def medium_of(table, density=None):
    return Medium(Stiffness.from_voigt(table), density)


def medium_of_compliance(table):
    return Medium(Stiffness.from_compliance(table))


def cubic_compliance(s11, s12, s44):
    table = np.diag([s11 - s12] * 3 + [s44] * 3)
    table[:3, :3] += s12
    return table


def young_along(medium, n):
    return float(young(medium, directions(np.array(n, dtype=float)))[0])


def compressibility_along(medium, n):
    return float(compressibility(medium, directions(np.array(n, dtype=float)))[0])


def least_over_sphere(function):
    """Polish the least value of the finest of a coarse mesh; `function` takes `Directions`."""
    grid = sphere_mesh(4).half
    best = grid.n[:, np.argmin(function(grid))]
    return minimize(lambda n: function(directions(n))[0], best, method="Nelder-Mead",
                    options={"xatol": 1e-7, "fatol": 1e-9}).fun  # fmt: skip


# ---------------------------------------------------------------- silicon

# M. A. Hopcroft, W. D. Nix & T. W. Kenny 2010, J. MEMS 19(2), 229-238: constants and summary.
SILICON = medium_of(cubic(165.7, 63.9, 79.6))
# W. A. Brantley 1973, J. Appl. Phys. 44, 534; J. J. Wortman & R. A. Evans 1965, J. Appl. Phys.
# 36, 153: compliances in 1/GPa, rounded to three figures.
SILICON_ROUNDED = medium_of_compliance(cubic_compliance(7.68e-3, -2.14e-3, 12.6e-3))

# Wafer (100): x = [110], y = [-110], z = [001].
WAFER_X, WAFER_Y = unit(1, 1, 0), unit(-1, 1, 0)


@pytest.mark.parametrize(
    ("direction", "printed", "recomputed"),
    [
        ((1, 0, 0), 130, 130.13196864),
        ((1, 1, 0), 169, 169.10118892),
        ((1, 1, 1), 188, 187.85258644),  # printed value from memory
    ],
)
def test_silicon_young(direction, printed, recomputed):
    modulus = young_along(SILICON, direction)
    assert modulus == pytest.approx(printed, abs=0.5)
    assert modulus == pytest.approx(recomputed, abs=1e-7)


@pytest.mark.parametrize(
    ("load", "read", "printed", "tolerance", "recomputed"),
    [
        (X, Y, 0.279, 0.001, 0.2783101045),
        (WAFER_X, Z, 0.36, 0.005, 0.3616526366),  # printed value from memory
        (Z, WAFER_X, 0.28, 0.005, 0.2783101045),  # printed value from memory
    ],
)
def test_silicon_poisson(load, read, printed, tolerance, recomputed):
    ratio = poisson(SILICON, load, read)
    assert ratio == pytest.approx(printed, abs=tolerance)
    assert ratio == pytest.approx(recomputed, abs=1e-9)


def test_silicon_shear():
    """Hopcroft 2010, both printed values from memory."""
    assert shear(SILICON, WAFER_Y, Z) == pytest.approx(79.6, abs=0.05)
    assert shear(SILICON, Z, WAFER_X) == pytest.approx(79.6, abs=0.05)
    assert shear(SILICON, WAFER_X, WAFER_Y) == pytest.approx(50.9, abs=0.05)


def test_silicon_in_plane_poisson_depends_on_which_rounding_is_used():
    """The printed 0.064 comes from the rounded compliances; these stiffnesses give 0.0622."""
    assert poisson(SILICON, WAFER_X, WAFER_Y) == pytest.approx(0.0621933977, abs=1e-9)
    rounded = poisson(SILICON_ROUNDED, WAFER_X, unit(1, -1, 0))
    assert rounded == pytest.approx(0.064, abs=5e-4)
    assert rounded == pytest.approx(0.0641891892, abs=1e-9)


def test_silicon_from_rounded_compliances():
    """Brantley 1973; Wortman & Evans 1965."""
    assert poisson(SILICON_ROUNDED, WAFER_X, Z) == pytest.approx(0.36, abs=0.005)
    assert poisson(SILICON_ROUNDED, X, Y) == pytest.approx(0.279, abs=5e-4)
    assert young_along(SILICON_ROUNDED, (1, 1, 0)) == pytest.approx(169, abs=0.5)
    assert young_along(SILICON_ROUNDED, (1, 0, 0)) == pytest.approx(130, abs=0.5)


# ---------------------------------------------------------------- cubic metals


@pytest.mark.parametrize(
    ("compliances", "printed"),
    [
        # Compliances in 1/GPa: Courtney, table 2.2. Moduli: W. D. Callister & D. G. Rethwisch,
        # Materials Science and Engineering, table 3.3, for [100] and [111] from memory.
        ((1.57e-2, -0.57e-2, 3.51e-2), (63.7, 72.6, 76.1)),
        ((1.50e-2, -0.63e-2, 1.33e-2), (66.7, 130.3, 191.1)),
    ],
    ids=["aluminium", "copper"],
)
def test_young_of_cubic_metals_from_compliances(compliances, printed):
    medium = medium_of_compliance(cubic_compliance(*compliances))
    along = [young_along(medium, n) for n in ((1, 0, 0), (1, 1, 0), (1, 1, 1))]
    assert along == pytest.approx(printed, abs=0.05)
    # 1/E[110] = 1/E[100] - 3/4 (1/E[100] - 1/E[111]): Callister, problem 6.12.
    relation = 1 / (1 / along[0] - 0.75 * (1 / along[0] - 1 / along[2]))
    assert along[1] == pytest.approx(relation, rel=1e-12)


# Constants: T. H. Courtney, Mechanical Behavior of Materials, table 2.2.
COPPER = medium_of(cubic(168.4, 121.4, 75.4))


def test_copper_shear_extremes_are_c44_and_half_the_difference():
    """A. Turley & G. Sines 1971, J. Phys. D 4, 264: G runs from (C11 - C12)/2 to C44."""
    least, greatest = shear_extremes(COPPER, sphere_mesh(5).half)
    assert least.min() > 23.5 - 1e-9
    assert greatest.max() < 75.4 + 1e-9
    along = directions(unit(1, 1, 0))
    assert shear_extremes(COPPER, along)[0][0] == pytest.approx(23.5, abs=1e-9)
    assert shear_extremes(COPPER, along)[1][0] == pytest.approx(75.4, abs=1e-9)
    slip = transverse(COPPER, along, "shear_least")[:, 0]
    assert abs(slip @ unit(1, -1, 0)) == pytest.approx(1.0, abs=1e-12)


def test_copper_widens_across_a_pull_along_110():
    """R. H. Baughman et al. 1998, Nature 392, 362; the numbers derived from the constants."""
    assert poisson(COPPER, unit(1, 1, 0), unit(1, -1, 0)) == pytest.approx(-0.136, abs=5e-4)
    assert poisson(COPPER, unit(1, 1, 0), Z) == pytest.approx(0.819, abs=5e-4)
    along = directions(unit(1, 1, 0))
    least, greatest = poisson_extremes(COPPER, along)
    assert least[0] == pytest.approx(-0.1356924871, abs=1e-9)  # recomputed
    assert greatest[0] == pytest.approx(0.8187236813, abs=1e-9)  # recomputed
    read = transverse(COPPER, along, "poisson_least")[:, 0]
    assert abs(read @ unit(1, -1, 0)) == pytest.approx(1.0, abs=1e-12)
    globally = least_over_sphere(lambda dirs: poisson_extremes(COPPER, dirs)[0])
    assert globally == pytest.approx(-0.136, abs=5e-4)


def test_copper_young_extremes_lie_along_100_and_111():
    """J. F. Nye 1957, Physical Properties of Crystals; derived."""
    values = young(COPPER, sphere_mesh(5).half)
    least, greatest = young_along(COPPER, (1, 0, 0)), young_along(COPPER, (1, 1, 1))
    assert least == pytest.approx(66.69, abs=0.02)
    assert greatest == pytest.approx(191.1, abs=0.1)
    assert least - 1e-9 <= values.min() < least + 1
    assert greatest - 1 < values.max() <= greatest + 1e-9


# ---------------------------------------------------------------- hexagonal crystals


@pytest.mark.parametrize(
    ("constants", "basal", "axial", "beta_a", "beta_c"),
    [
        # Courtney, table 2.2: magnesium, zinc. The moduli are derived from its stiffnesses.
        ((59.7, 26.2, 21.7, 61.7, 16.4), 45.4, 50.7, 9.18, 9.75),
        ((161.0, 34.2, 50.1, 61.0, 38.3), 119.4, 35.3, 1.58, 13.79),
    ],
    ids=["magnesium", "zinc"],
)
def test_hexagonal_metals(constants, basal, axial, beta_a, beta_c):
    medium = medium_of(hexagonal(*constants))
    for direction in (X, Y, unit(2, -3, 0)):
        assert young_along(medium, direction) == pytest.approx(basal, abs=0.06)
        assert compressibility_along(medium, direction) == pytest.approx(beta_a, abs=0.006)
    assert young_along(medium, Z) == pytest.approx(axial, abs=0.06)
    assert compressibility_along(medium, Z) == pytest.approx(beta_c, abs=0.006)


def test_zinc_from_compliances():
    """A. W. Hanson 1934, Phys. Rev. 45, 324: 1/TPa 8.38, 0.50, -7.31, 28.4, 26.1; derived."""
    s = hexagonal(8.38e-3, 0.50e-3, -7.31e-3, 28.4e-3, 26.1e-3)
    s[5, 5] = 15.76e-3  # S66 = 2 (S11 - S12): a compliance, unlike a stiffness
    zinc = medium_of_compliance(s)
    assert young_along(zinc, X) == pytest.approx(119.33, abs=0.01)
    assert young_along(zinc, unit(1, 1, 0)) == pytest.approx(119.33, abs=0.01)
    assert young_along(zinc, Z) == pytest.approx(35.21, abs=0.01)
    assert compressibility_along(zinc, X) == pytest.approx(1.57, abs=0.005)
    assert compressibility_along(zinc, Z) == pytest.approx(13.78, abs=0.005)


def test_ice():
    """P. H. Gammon, H. Kiefte, M. J. Clouter & W. W. Denner 1983, J. Glaciology 29(103), 433.

    Ice Ih at -16 °C. Compressibilities recomputed; speeds sqrt(C33/ρ) and sqrt(C11/ρ).
    """
    ice = medium_of(hexagonal(13.929, 7.082, 5.765, 15.01, 3.014), 919.0)
    assert compressibility_along(ice, X) == pytest.approx(37.14, abs=0.01)
    assert compressibility_along(ice, Z) == pytest.approx(38.09, abs=0.01)
    fastest = speeds(ice, directions(np.column_stack([Z, X])))[0]
    assert fastest == pytest.approx([4.041, 3.893], abs=0.001)


# ---------------------------------------------------------------- lower symmetry


def test_cristobalite_is_auxetic():
    """A. Yeganeh-Haeri, D. J. Weidner & J. B. Parise 1992, Science 257, 650: least ν -0.5."""
    cristobalite = medium_of(tetragonal(59.4, 3.8, -4.4, 42.4, 67.2, 25.7))
    least = least_over_sphere(lambda dirs: poisson_extremes(cristobalite, dirs)[0])
    assert least == pytest.approx(-0.5, abs=0.05)
    assert least == pytest.approx(-0.5077686058, abs=2e-4)  # recomputed on a grid


# E. H. Abramson, J. M. Brown, L. J. Slutsky & J. Zaug 1997, J. Geophys. Res. 102, 12253:
# San Carlos olivine, x = a, y = b, z = c.
OLIVINE = medium_of(
    orthorhombic(320.5, 196.5, 233.5, 68.1, 71.6, 76.8, 64.0, 77.0, 78.7), 3355.0
)


def test_olivine_longitudinal_speeds():
    """sqrt(C11/ρ) along a and sqrt(C22/ρ) along b bound the fastest sheet."""
    fastest = speeds(OLIVINE, directions(np.column_stack([X, Y])))[0]
    assert fastest == pytest.approx([9.774, 7.653], abs=0.001)
    sheet = speeds(OLIVINE, sphere_mesh(4).half)[0]
    assert sheet.max() <= fastest[0] + 1e-12
    assert sheet.min() >= fastest[1] - 1e-12


@pytest.mark.parametrize(
    ("axis", "printed", "recomputed"),
    [(X, 547.8, 553.1450), (Y, 285.8, 289.9656), (Z, 381.8, 385.5048)],
)
def test_olivine_axial_stiffness_against_pressure(axis, printed, recomputed):
    """1/β in GPa. The printed values are isothermal: 1 to 1.5 % below these adiabatic ones."""
    value = 1e3 / compressibility_along(OLIVINE, axis)
    assert value == pytest.approx(recomputed, abs=1e-3)
    assert 0.005 < value / printed - 1 < 0.02


# J. M. Brown, E. H. Abramson & R. J. Angel 2006, Phys. Chem. Minerals 33, 256: low albite,
# x along a*, y along b.
ALBITE = medium_of(
    [
        [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
        [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
        [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
        [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
        [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
        [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
    ]
)


def test_albite_is_three_times_softer_along_a_star():
    """J. M. Brown, R. J. Angel & N. L. Ross 2016, J. Geophys. Res. 121, 663."""
    ratio = young_along(ALBITE, Y) / young_along(ALBITE, X)
    assert ratio == pytest.approx(3, abs=0.5)
    assert ratio == pytest.approx(2.8742988911, abs=1e-8)  # recomputed


def test_albite_extremes():
    """Recomputed, no printed value."""
    assert compressibility_along(ALBITE, X) == pytest.approx(11.10, abs=0.01)
    least = least_over_sphere(lambda dirs: young(ALBITE, dirs))
    greatest = -least_over_sphere(lambda dirs: -young(ALBITE, dirs))
    assert least == pytest.approx(48.64, abs=0.02)
    assert greatest == pytest.approx(168.23, abs=0.02)
