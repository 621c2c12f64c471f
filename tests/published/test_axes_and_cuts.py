"""Axes conventions, cuts and turned constants against values from outside the project.

Where a comment says "derived", the number is a closed form or comes from a separate
brute-force calculation on full fourth-rank tensors.
"""

import numpy as np
import pytest

from core.crystal.cell import CrystalFrame, UnitCell, axes_matrix, change_of_axes
from core.crystal.cuts import cut_edges, parse_cut
from core.crystal.orientation import parse_orientation
from core.tensor.averages import averages
from core.tensor.stiffness import Stiffness

BARE = CrystalFrame()


def rotation(text):
    return parse_orientation(text, BARE).rotation


# --- IEEE Std 176-1987, rotated cuts: the edges ----------------------------------------------

# Edges by the standard's rule, from a separate calculation (derived), five decimals.
EDGES = {
    "(YXl) 35.25": {
        "t": [0.0, 0.81664, 0.57715],
        "l": [1.0, 0.0, 0.0],
        "w": [0.0, -0.57715, 0.81664],
    },
    "(YXl) -35.25": {
        "t": [0.0, 0.81664, -0.57715],
        "l": [1.0, 0.0, 0.0],
        "w": [0.0, 0.57715, 0.81664],
    },
    "(ZXt) 45": {
        "t": [0.0, 0.0, 1.0],
        "l": [0.70711, 0.70711, 0.0],
        "w": [-0.70711, 0.70711, 0.0],
    },
    "(YXwl) 21.93/33.93": {
        "t": [-0.30988, 0.76968, 0.55818],
        "l": [0.92764, 0.37347, 0.0],
        "w": [0.20847, -0.51779, 0.82972],
    },
}


@pytest.mark.parametrize("text", EDGES)
def test_cut_edges(text):
    edges = cut_edges(parse_cut(text))
    for edge, vector in EDGES[text].items():
        np.testing.assert_allclose(edges[edge], vector, rtol=0, atol=6e-6)
    np.testing.assert_allclose(rotation(text)[2], EDGES[text]["t"], rtol=0, atol=6e-6)
    np.testing.assert_allclose(rotation(text)[0], EDGES[text]["l"], rtol=0, atol=6e-6)


# --- quartz, AT cut --------------------------------------------------------------------------

# Bechmann 1958, Phys. Rev. 110, 1060: GPa, C14 negative in the frame of the IRE 1949 standard.
QUARTZ_IRE = {"11": 86.74, "12": 6.99, "13": 11.91, "14": -17.91, "33": 107.2, "44": 57.94}
QUARTZ_IEEE = {**QUARTZ_IRE, "14": 17.91}  # the frame of IEEE Std 176-1978 and 1987

# Tiersten 1969, Linear Piezoelectric Plate Vibrations (from memory), two decimals; 56 is
# printed 2.53 where 2.536 is exact. Rows along 1 = X, 2 = Y' (thickness), 3 = Z'.
AT_IRE = {
    "11": 86.74, "22": 129.77, "33": 102.83, "44": 38.61, "55": 68.81, "66": 29.01,
    "12": -8.25, "13": 27.15, "14": -3.66, "23": -7.42, "24": 5.70, "34": 9.92, "56": 2.53,
}  # fmt: skip
MIRRORED = ("14", "24", "34", "56")  # change sign when the frame turns by 180° about z


def plate_constants(constants, cut):
    """Return the 6×6 along l, t, w: the printed X, Y', Z' of a rotated Y cut."""
    edges = cut_edges(parse_cut(cut))
    rows = np.array([edges["l"], edges["t"], edges["w"]])
    assert np.linalg.det(rows) == pytest.approx(1)
    return Stiffness.from_constants("trigonal_6", constants).rotate(rows).voigt


def named(matrix, name):
    return matrix[int(name[0]) - 1, int(name[1]) - 1]


def test_quartz_at_cut_in_the_ire_frame():
    C = plate_constants(QUARTZ_IRE, "(YXl) 35.25")
    for name, printed in AT_IRE.items():
        assert named(C, name) == pytest.approx(printed, abs=0.0061), name
    zero = ("15", "16", "25", "26", "35", "36", "45", "46")
    assert [named(C, name) for name in zero] == pytest.approx([0.0] * 8, abs=1e-13)


def test_quartz_at_cut_in_the_ieee_frame():
    C = plate_constants(QUARTZ_IEEE, "(YXl) -35.25")
    for name, printed in AT_IRE.items():
        expected = -printed if name in MIRRORED else printed
        assert named(C, name) == pytest.approx(expected, abs=0.0061), name


@pytest.mark.parametrize(
    ("constants", "cut"), [(QUARTZ_IRE, "(YXl) -35.25"), (QUARTZ_IEEE, "(YXl) 35.25")]
)
def test_the_wrong_sign_is_another_plate(constants, cut):
    """C66' = c² C66 + s² C44 ± 2cs C14 (closed form): 29.01 GPa one way, 62.70 the other."""
    c, s = np.cos(np.radians(35.25)), np.sin(np.radians(35.25))
    other = c * c * (86.74 - 6.99) / 2 + s * s * 57.94 + 2 * c * s * 17.91
    assert named(plate_constants(constants, cut), "66") == pytest.approx(other, abs=1e-12)
    assert abs(other - AT_IRE["66"]) > 30


def test_part_axes_of_the_at_cut_hold_the_same_constants():
    """Part Z is the thickness and X the length: 33 there is 22' of the printed set."""
    C = Stiffness.from_constants("trigonal_6", QUARTZ_IRE)
    part = C.rotate(rotation("(YXl) 35.25")).voigt
    assert part[2, 2] == pytest.approx(129.77, abs=0.0061)
    assert part[1, 1] == pytest.approx(102.83, abs=0.0061)
    assert part[0, 0] == pytest.approx(86.74, abs=0.0061)
    assert part[4, 4] == pytest.approx(29.01, abs=0.0061)  # X–thickness shear, 66' in print


# --- phenacite, seven-constant trigonal -------------------------------------------------------

# Yeganeh-Haeri & Weidner 1989, Phys. Chem. Minerals 16, 360; GPa.
PHENACITE = {
    "11": 341.9, "12": 148.0, "13": 136.0, "14": 0.1, "15": 3.5, "33": 391.0, "44": 91.4
}  # fmt: skip


def test_phenacite_is_unchanged_by_its_threefold_axis():
    C = Stiffness.from_constants("trigonal_7", PHENACITE)
    assert C.voigt[5, 5] == pytest.approx(96.95)  # printed 96.9, (C11 − C12)/2
    assert C.voigt[1, 4] == pytest.approx(-3.5)  # C25 = −C15
    assert C.voigt[3, 5] == pytest.approx(-3.5)  # C46 = −C15
    assert C.voigt[4, 5] == pytest.approx(0.1)  # C56 = C14
    third = C.rotate(rotation("axis 0,0,1 120")).voigt
    np.testing.assert_allclose(third, C.voigt, rtol=0, atol=1e-12)
    sixth = C.rotate(rotation("axis 0,0,1 60")).voigt
    assert sixth[0, 4] == pytest.approx(-3.5, abs=1e-12)


# --- silicon along ⟨1 1 0⟩ --------------------------------------------------------------------


def test_silicon_along_the_edges_of_a_wafer():
    """Hopcroft, Nix & Kenny 2010, J. MEMS 19, 229, summary table: x = [1 1 0], z = [0 0 1].

    E and the two moduli of shear as printed; ν_xy is printed 0.064, which belongs to rounded
    compliances: these stiffnesses give 0.0622 (derived).
    """
    cubic = CrystalFrame(class_key="cubic")
    R = parse_orientation("X=[1 1 0] Z=[0 0 1]", cubic).rotation
    silicon = Stiffness.from_constants("cubic", {"11": 165.7, "12": 63.9, "44": 79.6})
    S = silicon.rotate(R).compliance
    assert 1 / S[0, 0] == pytest.approx(169, abs=0.5)
    assert 1 / S[1, 1] == pytest.approx(169, abs=0.5)
    assert 1 / S[2, 2] == pytest.approx(130, abs=0.5)
    assert 1 / S[3, 3] == pytest.approx(79.6, abs=0.05)
    assert 1 / S[5, 5] == pytest.approx(50.9, abs=0.05)
    assert -S[0, 2] / S[0, 0] == pytest.approx(0.36, abs=0.005)
    assert -S[2, 0] / S[2, 2] == pytest.approx(0.28, abs=0.005)
    assert -S[0, 1] / S[0, 0] == pytest.approx(0.06219339774402587, abs=1e-12)
    along_111 = silicon.rotate(parse_orientation("Z=[1 1 1] X=[1 -1 0]", cubic).rotation)
    assert 1 / along_111.compliance[2, 2] == pytest.approx(188, abs=0.5)


def test_silicon_from_rounded_compliances():
    """Brantley 1973, J. Appl. Phys. 44, 534: 7.68, −2.14, 12.6 /TPa; ν as printed."""
    S = np.diag([7.68] * 3 + [12.6] * 3)
    S[:3, :3][~np.eye(3, dtype=bool)] = -2.14
    R = parse_orientation("X=[1 1 0] Z=[0 0 1]", CrystalFrame(class_key="cubic")).rotation
    turned = Stiffness.from_compliance(S / 1000).rotate(R).compliance
    assert -turned[0, 1] / turned[0, 0] == pytest.approx(0.064, abs=0.0005)
    assert 1 / turned[0, 0] == pytest.approx(169, abs=0.5)


# --- low albite: three choices of axes, and its constants in two ------------------------------

ALBITE_CELL = UnitCell(8.137, 12.786, 7.158, 94.26, 116.6, 87.71)

# Columns a, b, c in Å (derived, four decimals).
ALBITE_AXES = {
    "z||c, y||b*": ([7.2757, 0.0, -3.6434], [0.0958, 12.7503, -0.9498], [0.0, 0.0, 7.158]),
    "y||b, x||a*": ([7.2755, 0.3251, -3.6293], [0.0, 12.786, 0.0], [0.0, -0.5317, 7.1382]),
    "x||a, z||c*": ([8.137, 0.0, 0.0], [0.5109, 12.7758, 0.0], [-3.2051, -0.404, 6.3876]),
}

# Brown, Abramson & Angel 2006, Phys. Chem. Minerals 33, 256: GPa, x ∥ a*, y ∥ b.
ALBITE = [
    [69.9, 34.0, 30.8, 5.1, -2.4, -0.9],
    [34.0, 183.5, 5.5, -3.9, -7.7, -5.8],
    [30.8, 5.5, 179.5, -8.7, 7.1, -9.8],
    [5.1, -3.9, -8.7, 24.9, -2.4, -7.2],
    [-2.4, -7.7, 7.1, -2.4, 26.8, 0.5],
    [-0.9, -5.8, -9.8, -7.2, 0.5, 33.5],
]

# The same in IEEE axes, z ∥ c, y ∥ b* (derived, three decimals).
ALBITE_IEEE = [
    [69.871, 34.645, 29.938, 4.71, -2.292, -0.837],
    [34.645, 181.145, 6.305, -13.16, -7.539, -6.866],
    [29.938, 6.305, 180.707, 0.512, 8.005, -8.318],
    [4.71, -13.16, 0.512, 25.593, -0.731, -7.626],
    [-2.292, -7.539, 8.005, -0.731, 26.752, -0.098],
    [-0.837, -6.866, -8.318, -7.626, -0.098, 33.444],
]


def test_albite_volume():
    assert ALBITE_CELL.volume == pytest.approx(664.033, abs=5e-4)
    # Four formula units of NaAlSi3O8, 262.22 g/mol: 2622.9 kg/m³ (derived).
    density = 4 * 0.26222 / 6.02214076e23 / (ALBITE_CELL.volume * 1e-30)
    assert density == pytest.approx(2622.9, abs=0.1)


@pytest.mark.parametrize("axes", ALBITE_AXES)
def test_albite_cell_in_three_choices_of_axes(axes):
    columns = np.array(ALBITE_AXES[axes]).T
    np.testing.assert_allclose(axes_matrix(ALBITE_CELL, axes), columns, rtol=0, atol=6e-5)


def test_albite_change_of_axes():
    expected = [
        [0.999972, 0.007489, 0.000558],
        [-0.00751, 0.997209, 0.07428],
        [0.0, -0.074283, 0.997237],
    ]
    R = change_of_axes(ALBITE_CELL, "y||b, x||a*", "z||c, y||b*")
    np.testing.assert_allclose(R, expected, rtol=0, atol=6e-7)


def test_albite_constants_in_ieee_axes():
    R = change_of_axes(ALBITE_CELL, "y||b, x||a*", "z||c, y||b*")
    before = Stiffness.from_voigt(ALBITE)
    after = before.rotate(R)
    np.testing.assert_allclose(after.voigt, ALBITE_IEEE, rtol=0, atol=6e-4)
    moved = np.abs(after.voigt - before.voigt)
    assert moved[1, 3] > 9  # C24
    assert moved[2, 3] > 9  # C34
    old, new = averages(before), averages(after)
    for name in ("voigt", "reuss", "hill"):
        assert getattr(new, name).bulk == pytest.approx(getattr(old, name).bulk, rel=1e-12)
        assert getattr(new, name).shear == pytest.approx(getattr(old, name).shear, rel=1e-12)
    assert old.hill.bulk == pytest.approx(59.44, abs=0.01)  # separate implementation


# --- Bond 1943, Bell Syst. Tech. J. 22, 1 -----------------------------------------------------


def bond_matrix(degrees):
    """Return Bond's M of a turn about z: σ' = M σ in Voigt form."""
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    return np.array([
        [c * c, s * s, 0, 0, 0, 2 * c * s],
        [s * s, c * c, 0, 0, 0, -2 * c * s],
        [0, 0, 1, 0, 0, 0],
        [0, 0, 0, c, -s, 0],
        [0, 0, 0, s, c, 0],
        [-c * s, c * s, 0, 0, 0, c * c - s * s],
    ])  # fmt: skip


@pytest.mark.parametrize("degrees", [30, -17.3, 90, 133])
def test_bond_matrix_about_z(degrees):
    R = rotation(f"axis 0,0,1 {degrees}")
    M = bond_matrix(degrees)
    albite = Stiffness.from_voigt(ALBITE)
    np.testing.assert_allclose(
        albite.rotate(R).voigt, M @ np.array(ALBITE) @ M.T, rtol=0, atol=1e-12
    )
    N = np.linalg.inv(M).T  # turns compliances
    np.testing.assert_allclose(
        albite.rotate(R).compliance, N @ albite.compliance @ N.T, rtol=0, atol=1e-14
    )


def test_bond_closed_forms_at_thirty_degrees():
    """c'11, c'44 and c'33 (derived by hand from Bond's M)."""
    C = Stiffness.from_voigt(ALBITE).rotate(rotation("(ZXt) 30")).voigt
    assert C[0, 0] == pytest.approx(84.9819, abs=1e-3)
    assert C[3, 3] == pytest.approx(27.4535, abs=1e-3)
    assert C[2, 2] == pytest.approx(179.5, abs=1e-9)
