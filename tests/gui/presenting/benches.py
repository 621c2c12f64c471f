"""Benches to present, and what is true of them, computed without any code of `core`."""

from dataclasses import replace

import numpy as np

from core.crystal.cell import UnitCell
from core.state import BenchState, Display, OrientationChoice, Specimen
from tests.materials import cubic, random_physical, random_rotation, rotated
from tests.reference import christoffel_matrices, full_tensor

_FACTORS = np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2])
_RNG = np.random.default_rng(12)
TABLE = random_physical(_RNG)
TURNS = {"A": random_rotation(_RNG), "B": random_rotation(_RNG)}
DENSITY = 2650.0


def as_rows(table):
    return tuple(tuple(float(x) for x in row) for row in table)


def matrix_words(turn):
    return "matrix " + " ".join(repr(float(x)) for x in turn.ravel())


SPECIMEN = Specimen(
    "blank", as_rows(TABLE), DENSITY, cell=UnitCell(8.1, 12.8, 7.2, 94.3, 116.6, 87.7)
)
PIN = (0.48, -0.36, 0.8)
STATE = BenchState(
    SPECIMEN,
    orientation_a=OrientationChoice(matrix_words(TURNS["A"])),
    orientation_b=OrientationChoice(matrix_words(TURNS["B"])),
    pin=PIN,
    display=Display(layout="AB"),
)
CUBIC = BenchState(Specimen("casting", as_rows(cubic(230.0, 140.0, 120.0)), 8000.0,
                            crystal_class="cubic"))  # fmt: skip
# C44 < 0: E is not defined in part of the directions, nor are the slow waves.
UNSTABLE = BenchState(
    Specimen("slip", as_rows(cubic(100.0, 40.0, -5.0)), 2000.0, crystal_class="cubic")
)
# β along x is −15.4 1/TPa: it grows along x under pressure.
NEGATIVE = BenchState(
    Specimen(
        "frame",
        as_rows([[70, 65, 35, 0, 0, 0], [65, 90, 20, 0, 0, 0], [35, 20, 40, 0, 0, 0],
                 [0, 0, 0, 20, 0, 0], [0, 0, 0, 0, 25, 0], [0, 0, 0, 0, 0, 30]]),
        2000.0,
    )
)  # fmt: skip


def looked_at(state, **choices):
    """Return the state looked at otherwise."""
    known = {name: choices.pop(name) for name in list(choices) if hasattr(state, name)}
    return replace(state, display=replace(state.display, **choices), **known)


def without_density(state):
    return replace(state, specimen=replace(state.specimen, density=None))


def table_of(state, side="A"):
    """Return the table of a side in part axes."""
    turn = TURNS[side] if state.specimen.name == "blank" else np.eye(3)
    return rotated(np.array(state.specimen.stiffness), turn)


def strain_under_tension(table, n):
    """Return S_ijkl n_k n_l along directions (3, N), shape (3, 3, N)."""
    compliance = full_tensor(np.linalg.inv(table) / _FACTORS).astype(float)
    return np.einsum("ijkl,kN,lN->ijN", compliance, n, n)


def young(table, n):
    """Return Young's modulus along directions (3, N), NaN where 1/E ≤ 0."""
    inverse = np.einsum("ijN,iN,jN->N", strain_under_tension(table, n), n, n)
    return np.where(inverse > 0, 1 / inverse, np.nan)


def compressibility(table, n):
    """Return the linear compressibility along directions (3, N), 1/TPa."""
    compliance = full_tensor(np.linalg.inv(table) / _FACTORS).astype(float)
    return 1e3 * np.einsum("ijkk,iN,jN->N", compliance, n, n)


def speeds(table, density, n):
    """Return the three speeds along directions (3, N), km/s, the fastest first."""
    roots = np.linalg.eigvalsh(christoffel_matrices(table, n).astype(float))[:, ::-1].T
    with np.errstate(invalid="ignore"):
        return np.where(roots > 0, np.sqrt(roots * 1e3 / density), np.nan)
