"""Extremes and acoustic axes against printed values and closed forms of the literature."""

import numpy as np
import pytest

from core.directional.acoustic_axes import acoustic_axes
from core.directional.extremes import extremes
from core.directional.medium import Medium
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, hexagonal, orthorhombic, tetragonal

# Brown, Abramson & Angel 2006, Phys. Chem. Minerals 33, 256: low albite, X along a*, Y along b.
ALBITE = np.array(
    [
        [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
        [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
        [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
        [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
        [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
        [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
    ]
)


def found(table, density=None):
    return extremes(Medium(Stiffness.from_voigt(table), density))


def is_family(direction, member, tolerance=1e-6):
    unit = np.sort(np.abs(member)) / np.linalg.norm(member)
    return np.abs(np.sort(np.abs(direction)) - unit).max() < tolerance


def test_copper():
    """Constants as in Nye, Physical Properties of Crystals, 1957. G: Turley & Sines 1971, J.
    Phys. D 4, 264. Negative ν for a pull along [110] and strain along [1-10]: Baughman et al.
    1998, Nature 392, 362. (v_S max / v_S min)² equals the Zener ratio: Ledbetter & Migliori
    2006, J. Appl. Phys. 100, 063516 (page from memory). The numbers follow in closed form."""
    result = found(cubic(168.4, 121.4, 75.4), 8960.0)
    assert result["young"][0].value == pytest.approx(66.69, abs=0.02)
    assert result["young"][1].value == pytest.approx(191.1, abs=0.1)
    assert result["shear"][0].value == pytest.approx(23.5, abs=0.05)
    assert result["shear"][1].value == pytest.approx(75.4, abs=0.05)
    least, greatest = result["poisson"]
    assert least.value == pytest.approx(-0.136, abs=0.0005)
    assert is_family(least.direction, [1, 1, 0])
    assert is_family(least.transverse, [1, 1, 0])
    assert abs(least.direction @ least.transverse) < 1e-9
    assert greatest.value == pytest.approx(0.819, abs=0.0005)
    assert is_family(greatest.direction, [1, 1, 0])
    assert is_family(greatest.transverse, [1, 0, 0])
    shear_ratio = (result["middle"][1].value / result["slow"][0].value) ** 2
    assert shear_ratio == pytest.approx(3.2085, abs=0.0005)


def test_cristobalite_is_auxetic():
    """ν least -0.5: Yeganeh-Haeri, Weidner & Parise 1992, Science 257, 650."""
    result = found(tetragonal(59.4, 3.8, -4.4, 42.4, 67.2, 25.7))
    assert result["poisson"][0].value == pytest.approx(-0.5, abs=0.05)


def test_olivine_longitudinal_speeds():
    """San Carlos olivine, Abramson et al. 1997, J. Geophys. Res. 102, 12253: greatest along a
    and least along b, sqrt(C11/ρ) and sqrt(C22/ρ)."""
    table = orthorhombic(320.5, 196.5, 233.5, 68.1, 71.6, 76.8, 64.0, 77.0, 78.7)
    least, greatest = found(table, 3355.0)["fast"]
    assert greatest.value == pytest.approx(9.774, abs=0.001)
    assert is_family(greatest.direction, [1, 0, 0])
    assert least.value == pytest.approx(7.653, abs=0.001)
    assert abs(least.direction[1]) == pytest.approx(1.0, abs=1e-9)


def test_albite():
    """E(b)/E(a*) about 3: Brown, Angel & Ross 2016, J. Geophys. Res. 121, 663. The extremes
    themselves are printed nowhere; the values are of a separate brute-force computation."""
    result = found(ALBITE, 2623.0)
    assert result["young"][0].value == pytest.approx(48.64, abs=0.02)
    assert result["young"][1].value == pytest.approx(168.23, abs=0.02)
    assert result["fast"][0].value == pytest.approx(5.1380, abs=0.001)
    assert result["fast"][1].value == pytest.approx(8.3845, abs=0.001)


@pytest.mark.parametrize(
    ("constants", "basal", "axial", "tolerance", "beta_a", "beta_c"),
    [
        ((161.0, 34.2, 50.1, 61.0, 38.3), 119.4, 35.3, 0.06, 1.58, 13.79),  # zinc
    ],
)
def test_hexagonal_moduli(constants, basal, axial, tolerance, beta_a, beta_c):
    """Courtney, Mechanical Behavior of Materials, table 2.2. The basal E is no extreme of zinc:
    the greatest lies on a cone between, so it must exceed the printed value."""
    result = found(hexagonal(*constants))
    assert result["young"][0].value == pytest.approx(axial, abs=tolerance)
    assert result["young"][1].value > basal + tolerance
    least, greatest = result["compressibility"]
    assert least.value == pytest.approx(beta_a, abs=0.006)
    assert least.where == "ring"
    assert greatest.value == pytest.approx(beta_c, abs=0.006)
    assert is_family(greatest.direction, [0, 0, 1])


@pytest.mark.parametrize(
    ("constants", "density", "printed"),
    [
        ((165.7, 63.9, 79.6), 2330.0, 12.612),  # silicon
        ((128.35, 48.23, 66.66), 5323.0, 14.375),  # germanium
    ],
)
def test_internal_conical_refraction(constants, density, printed):
    """tan(half angle) = |C11 - C12 - 2 C44| / (√2 (C11 - C12 + C44)) on <111>: de Klerk &
    Musgrave 1955, Proc. Phys. Soc. B 68, 81; Waterman 1959, Phys. Rev. 113, 1240. On <100> the
    shear speeds are equal and there is no cone."""
    c11, c12, c44 = constants
    axes = acoustic_axes(Medium(Stiffness.from_voigt(cubic(*constants)), density))
    cones = [axis for axis in axes if is_family(axis.direction, [1, 1, 1])]
    closed = np.degrees(np.arctan(abs(c11 - c12 - 2 * c44) / (np.sqrt(2) * (c11 - c12 + c44))))
    assert len(cones) == 4
    for axis in cones:
        assert axis.kind == "conical"
        assert axis.half_angle_deg == pytest.approx(printed, abs=0.001)
        assert axis.half_angle_deg == pytest.approx(closed, abs=1e-9)
        assert axis.speed == pytest.approx(
            np.sqrt(1e3 * (c11 - c12 + c44) / 3 / density), rel=1e-12
        )
    edges = [axis for axis in axes if is_family(axis.direction, [1, 0, 0])]
    assert len(edges) == 3
    assert all(axis.half_angle_deg == 0 for axis in edges)


def test_zinc_axis_is_degenerate_without_a_cone():
    """Musgrave, Crystal Acoustics, 1970: on a sixfold axis the shear sheets touch."""
    table = hexagonal(161.0, 34.2, 50.1, 61.0, 38.3)
    (axis,) = [
        axis
        for axis in acoustic_axes(Medium(Stiffness.from_voigt(table), 7134.0))
        if is_family(axis.direction, [0, 0, 1])
    ]
    assert (axis.pair, axis.kind, axis.half_angle_deg) == (1, "tangential", 0.0)
    assert axis.speed == pytest.approx(np.sqrt(38.3e3 / 7134.0), rel=1e-12)
