"""Ways of writing a fourth-rank elastic tensor as a 6x6, and the units of its cells.

Order of rows everywhere in the program: 11, 22, 33, 23, 13, 12. Stiffness in Voigt form holds
tensor components; compliance in Voigt form holds engineering shears, S_IJ = S_ijkl times
1, 2 or 4. Kelvin form is the one that turns as a true tensor in six dimensions. Nothing
here knows crystal classes or checks what a user typed into a table.
"""

import difflib
import re
from typing import TypeVar

import numpy as np
import numpy.typing as npt

from core.arrays import FloatArray, IntArray, read_only
from core.errors import InputError

VOIGT_PAIRS: tuple[tuple[int, int], ...] = ((0, 0), (1, 1), (2, 2), (1, 2), (0, 2), (0, 1))

VOIGT_INDEX: IntArray = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]], dtype=np.intp)
VOIGT_INDEX.flags.writeable = False

KELVIN_WEIGHTS: FloatArray = read_only(np.sqrt([1.0, 1.0, 1.0, 2.0, 2.0, 2.0]))
SHEAR_FACTORS: FloatArray = read_only(np.array([1.0, 1.0, 1.0, 2.0, 2.0, 2.0]))

UNITS: dict[str, float] = {
    "GPa": 1.0,
    "kbar": 0.1,
    "Mbar": 100.0,
    "Pa": 1e-9,
    "MPa": 1e-3,
    "dyn/cm²": 1e-10,
}

_FIRST, _SECOND = (np.array(part, dtype=np.intp) for part in zip(*VOIGT_PAIRS, strict=True))
_KELVIN_PRODUCTS = np.outer(KELVIN_WEIGHTS, KELVIN_WEIGHTS)
_TRIANGLE = np.triu_indices(6)
_UNIT_SPELLINGS = {"dyn/cm2": "dyn/cm²", "dyn/cm^2": "dyn/cm²", "dyne/cm²": "dyn/cm²"}
_AXIS_DIGITS = str.maketrans("xyzXYZ", "123123")

_Value = TypeVar("_Value", float, FloatArray)


def voigt_to_tensor(matrix: FloatArray) -> FloatArray:
    """Return the fourth-rank tensor of 6x6 matrices of tensor components.

    Parameters
    ----------
    matrix : ndarray, shape (..., 6, 6)
        Voigt order, tensor components: a stiffness as it is, a compliance only after its
        shear rows and columns have been divided by `SHEAR_FACTORS`. Any frame.

    Returns
    -------
    ndarray, shape (..., 3, 3, 3, 3)
        The same frame and unit.
    """
    index = VOIGT_INDEX
    expanded: FloatArray = np.asarray(matrix)[
        ..., index[:, :, None, None], index[None, None, :, :]
    ]
    return expanded


def tensor_to_voigt(tensor: FloatArray) -> FloatArray:
    """Return the 6x6 matrices of tensor components of fourth-rank tensors.

    Parameters
    ----------
    tensor : ndarray, shape (..., 3, 3, 3, 3)
        With both minor symmetries; one of each equal pair is read. Any frame.

    Returns
    -------
    ndarray, shape (..., 6, 6)
    """
    rows_i, rows_j = _FIRST[:, None], _SECOND[:, None]
    packed: FloatArray = np.asarray(tensor)[..., rows_i, rows_j, _FIRST, _SECOND]
    return packed


def stiffness_to_kelvin(stiffness: FloatArray) -> FloatArray:
    """Return the Kelvin form of stiffness in Voigt form, shape (..., 6, 6), same frame."""
    return np.asarray(stiffness) * _KELVIN_PRODUCTS


def kelvin_to_stiffness(kelvin: FloatArray) -> FloatArray:
    """Return stiffness in Voigt form from Kelvin form, shape (..., 6, 6), same frame."""
    return np.asarray(kelvin) / _KELVIN_PRODUCTS


def compliance_to_kelvin(compliance: FloatArray) -> FloatArray:
    """Return the Kelvin form of compliance with engineering shears, shape (..., 6, 6).

    It is the inverse of the Kelvin form of the stiffness, in the same frame.
    """
    return np.asarray(compliance) / _KELVIN_PRODUCTS


def kelvin_to_compliance(kelvin: FloatArray) -> FloatArray:
    """Return compliance with engineering shears from Kelvin form, shape (..., 6, 6)."""
    return np.asarray(kelvin) * _KELVIN_PRODUCTS


def kelvin_rotation(rotation: FloatArray) -> FloatArray:
    """Return the orthogonal 6x6 by which Kelvin vectors follow a rotation of the axes.

    Parameters
    ----------
    rotation : ndarray, shape (..., 3, 3)
        v_new = rotation @ v_old; rows are the new axes in the old frame.

    Returns
    -------
    ndarray, shape (..., 6, 6)
        B with x_new = B x_old for symmetric second-rank tensors in Kelvin form, and so
        C_new = B C_old Bᵀ.

    Notes
    -----
    B_IJ = w_I w_J (R_ik R_jl + R_il R_jk)/2 with I = (ij), J = (kl), from
    X'_ij = R_ik R_jl X_kl; Mehrabadi & Cowin 1990, Q. J. Mech. Appl. Math. 43, 15.
    """
    R = np.asarray(rotation)
    i, j, k, m = _FIRST[:, None], _SECOND[:, None], _FIRST[None, :], _SECOND[None, :]
    products = R[..., i, k] * R[..., j, m] + R[..., i, m] * R[..., j, k]
    turned: FloatArray = 0.5 * _KELVIN_PRODUCTS * products
    return turned


def parse_rows(text: str) -> tuple[int, int, int, int, int, int]:
    """Return the order in which a foreign 6x6 lists its rows.

    Parameters
    ----------
    text : str
        Six pairs such as ``"11 22 33 12 13 23"`` or ``"xx, yy, zz, xy, xz, yz"``.

    Returns
    -------
    tuple of int
        For each foreign row in turn, its position (0 to 5) in our order.

    Raises
    ------
    InputError
        When a pair is not one of 11, 22, 33, 23, 13, 12, or one is missing or repeated.
    """
    words = [word for word in re.split(r"[\s,;]+", text.strip()) if word]
    positions = [_row_position(word) for word in words]
    if len(positions) != 6 or len(set(positions)) != 6:
        raise InputError(
            f"The order of rows '{text}' must name each of 11, 22, 33, 23, 13 and 12 once.",
            "For example 11 22 33 12 13 23.",
            "rows",
        )
    first, second, third, fourth, fifth, sixth = positions
    return first, second, third, fourth, fifth, sixth


def _row_position(word: str) -> int:
    digits = word.translate(_AXIS_DIGITS)
    if not re.fullmatch("[123][123]", digits):
        raise InputError(
            f"'{word}' is not a pair of axes.",
            "Pairs are 11, 22, 33, 23, 13 and 12, or xx, yy, zz, yz, xz and xy.",
            "rows",
        )
    return int(VOIGT_INDEX[int(digits[0]) - 1, int(digits[1]) - 1])


def rows_text(order: tuple[int, ...]) -> str:
    """Return an order of rows as `parse_rows` reads it, such as "11 22 33 12 13 23"."""
    return " ".join(f"{VOIGT_PAIRS[p][0] + 1}{VOIGT_PAIRS[p][1] + 1}" for p in order)


def reorder(matrix: FloatArray, order: tuple[int, ...]) -> FloatArray:
    """Return matrices in our order with rows and columns listed in another.

    Parameters
    ----------
    matrix : ndarray, shape (..., 6, 6)
        In our order.
    order : tuple of int
        From `parse_rows`: row k of the result is our row ``order[k]``.

    Returns
    -------
    ndarray, shape (..., 6, 6)
    """
    rows = np.array(order, dtype=np.intp)
    listed: FloatArray = np.asarray(matrix)[..., rows[:, None], rows]
    return listed


def restore_order(matrix: FloatArray, order: tuple[int, ...]) -> FloatArray:
    """Return in our order matrices whose rows and columns run in another; undoes `reorder`."""
    back = np.argsort(np.array(order, dtype=np.intp))
    return reorder(matrix, tuple(int(position) for position in back))


def to_gpa(value: _Value, unit: str) -> _Value:
    """Return a stiffness in GPa from a value in one of `UNITS`.

    Raises
    ------
    InputError
        When the unit is not known; the nearest one is named.
    """
    spelling = unit.strip()
    known = _UNIT_SPELLINGS.get(spelling, spelling)
    if known not in UNITS:
        near = difflib.get_close_matches(known, UNITS, n=1, cutoff=0.4)
        question = f"Did you mean {near[0]}? " if near else ""
        raise InputError(
            f"'{unit}' is not a unit of stiffness.",
            f"{question}Known units: {', '.join(UNITS)}.",
            "unit",
        )
    return value * UNITS[known]


def upper_triangle(matrix: FloatArray) -> FloatArray:
    """Return the 21 constants 11, 12, …, 16, 22, …, 66 of (..., 6, 6): shape (..., 21)."""
    constants: FloatArray = np.asarray(matrix)[..., _TRIANGLE[0], _TRIANGLE[1]]
    return constants


def from_upper_triangle(constants: npt.ArrayLike) -> FloatArray:
    """Return the symmetric (..., 6, 6) of 21 constants in the order of `upper_triangle`."""
    values = np.asarray(constants, dtype=np.float64)
    matrix = np.empty((*values.shape[:-1], 6, 6))
    matrix[..., _TRIANGLE[0], _TRIANGLE[1]] = values
    matrix[..., _TRIANGLE[1], _TRIANGLE[0]] = values
    return matrix


def constant_name(i: int, j: int) -> str:
    """Return the name of the constant in row `i`, column `j` counted from 0, as in "C14"."""
    low, high = sorted((i, j))
    return f"C{low + 1}{high + 1}"
