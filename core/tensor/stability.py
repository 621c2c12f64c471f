"""Whether a crystal resists every strain, and which strain it resists least.

The verdict is read from the six eigenvalues of the Kelvin form. The closed criteria of each
class say the same thing constant by constant; both are necessary and sufficient.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray, read_only
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, complete

_NEAR = 0.02  # of the mean eigenstiffness: a mode this soft is worth a warning
_DEGENERATE = 1e-7  # of the largest |eigenstiffness|: closer values share their eigenstrains
_WORTH_SAYING = 0.1  # parts of a strain below this share of its square are left out
_PURE = 0.995  # above this share the percentage is left out as well
_IDLE_AXIS = 0.2  # of the largest stretch: an axis stretching less than this goes unnamed

_SHEARS = ("shear 2–3", "shear 1–3", "shear 1–2")

_PLAIN_STRAINS: FloatArray = read_only(
    np.array(
        [
            np.array([1, 1, 1, 0, 0, 0]) / np.sqrt(3),
            [0, 0, 0, 1, 0, 0],
            [0, 0, 0, 0, 1, 0],
            [0, 0, 0, 0, 0, 1],
            np.array([1, -1, 0, 0, 0, 0]) / np.sqrt(2),
            np.array([-1, -1, 2, 0, 0, 0]) / np.sqrt(6),
        ]
    ).T
)
"""Columns, Kelvin: volume, three shears, two stretches; the words used to describe strains."""


@dataclass(frozen=True, eq=False)
class Stability:
    """The strain spectrum of a crystal and the verdict read from it.

    Attributes
    ----------
    stable : bool
        All six eigenstiffnesses are positive beyond rounding.
    near : bool
        Stable, but the smallest is below 2 % of the mean of the six.
    eigenstiffness : ndarray, shape (6,)
        GPa, ascending; invariant under rotation.
    eigenstrains : ndarray, shape (6, 6)
        Columns: unit Kelvin vectors in the frame of the stiffness, one per eigenstiffness,
        largest component positive. Where eigenstiffnesses coincide, the plainest basis.
    descriptions : tuple of str
        One per eigenstrain, in plain words.
    """

    stable: bool
    near: bool
    eigenstiffness: FloatArray
    eigenstrains: FloatArray
    descriptions: tuple[str, ...]


@dataclass(frozen=True)
class Criterion:
    """One closed criterion of stability.

    Attributes
    ----------
    text : str
        The quantity that must be positive: "C11 − C12 > 0".
    value : float
        That quantity, in `unit`.
    unit : str
        "GPa", "GPa²", …
    holds : bool
    """

    text: str
    value: float
    unit: str
    holds: bool


def assess(stiffness: Stiffness) -> Stability:
    """Return the strain spectrum of a crystal and whether it is stable.

    Eigenstiffnesses after Kelvin 1856, Phil. Trans. R. Soc. 146, 481, in the form of
    Mehrabadi & Cowin 1990, Q. J. Mech. Appl. Math. 43, 15.
    """
    values, vectors = np.linalg.eigh(stiffness.kelvin)
    strains = _plainest(values, vectors)
    near = stiffness.is_stable and bool(values[0] < _NEAR * values.mean())
    words = tuple(describe_strain(strain) for strain in strains.T)
    return Stability(stiffness.is_stable, near, read_only(values), read_only(strains), words)


def _plainest(values: FloatArray, vectors: FloatArray) -> FloatArray:
    """Return eigenstrains with each degenerate set turned to the plainest basis it holds."""
    strains = np.array(vectors)
    gaps = np.diff(values) > _DEGENERATE * np.abs(values).max()
    for columns in np.split(np.arange(6), np.flatnonzero(gaps) + 1):
        strains[:, columns] = _plain_basis(vectors[:, columns])
    largest = np.abs(strains).argmax(axis=0)
    signs = np.where(strains[largest, np.arange(6)] < 0, -1.0, 1.0)
    return strains * signs


def _plain_basis(space: FloatArray) -> FloatArray:
    """Return an orthonormal basis of a column space, nearest to plain strains first."""
    basis = np.empty_like(space)
    remaining = space
    for column in range(space.shape[1]):
        shadows = remaining.T @ _PLAIN_STRAINS
        # Rounding must not choose between strains that fit equally well: the first wins.
        best = np.round(np.linalg.norm(shadows, axis=0), 6).argmax()
        chosen = shadows[:, best] / np.linalg.norm(shadows[:, best])
        basis[:, column] = remaining @ chosen
        complement = np.linalg.svd(chosen[None, :])[2][1:]
        remaining = remaining @ complement.T
    return basis


def describe_strain(kelvin_vector: FloatArray) -> str:
    """Return in plain words what a strain consists of.

    Parameters
    ----------
    kelvin_vector : ndarray, shape (6,)
        A strain in Kelvin form, of any length but zero, about axes 1, 2, 3.

    Returns
    -------
    str
        Its parts with their shares of the squared length, largest first: "81 % shear 2–3,
        19 % volume change"; a strain of one part has no percentage: "stretch 1 against 2".
        Parts below 10 % are left out.
    """
    unit = np.asarray(kelvin_vector) / np.linalg.norm(kelvin_vector)
    mean = unit[:3].mean()
    stretch = unit[:3] - mean
    shares = [
        (3 * mean**2, "volume change"),
        (float(stretch @ stretch), _stretch_words(stretch)),
        *zip(unit[3:] ** 2, _SHEARS, strict=True),
    ]
    shares.sort(key=lambda part: -part[0])
    if shares[0][0] > _PURE:
        return shares[0][1]
    said = [part for part in shares if part[0] >= _WORTH_SAYING]
    return ", ".join(f"{100 * share:.0f} % {words}" for share, words in said)


def _stretch_words(stretch: FloatArray) -> str:
    """Name the axes that stretch and those that shrink, of three stretches with sum zero."""
    alone, *others = np.argsort(-np.abs(stretch), kind="stable")
    partners = [k for k in others if abs(stretch[k]) > _IDLE_AXIS * abs(stretch[alone])]
    if len(partners) == 1:
        low, high = sorted((alone, partners[0]))
        return f"stretch {low + 1} against {high + 1}"
    low, high = sorted(others)
    return f"stretch {alone + 1} against {low + 1} and {high + 1}"


_Constants = Callable[[int], float]  # c(14) is C14
_Rule = tuple[str, int, Callable[[_Constants], float]]  # text, power of GPa, value

_IN_PLANE: tuple[_Rule, ...] = (
    ("C11 − C12", 1, lambda c: c(11) - c(12)),
    ("C11 + C12", 1, lambda c: c(11) + c(12)),
    ("(C11 + C12) C33 − 2 C13²", 2, lambda c: (c(11) + c(12)) * c(33) - 2 * c(13) ** 2),
)
_C44: _Rule = ("C44", 1, lambda c: c(44))
_C66: _Rule = ("C66", 1, lambda c: c(66))

_RULES: dict[str, tuple[_Rule, ...]] = {
    "tetragonal_7": (
        *_IN_PLANE,
        _C44,
        ("(C11 − C12) C66 − 2 C16²", 2, lambda c: (c(11) - c(12)) * c(66) - 2 * c(16) ** 2),
    ),
    "tetragonal_6": (*_IN_PLANE, _C44, _C66),
    "trigonal_7": (
        *_IN_PLANE,
        _C44,
        (
            "(C11 − C12) C44 − 2 (C14² + C15²)",
            2,
            lambda c: (c(11) - c(12)) * c(44) - 2 * (c(14) ** 2 + c(15) ** 2),
        ),
    ),
    "trigonal_6": (
        *_IN_PLANE,
        _C44,
        ("(C11 − C12) C44 − 2 C14²", 2, lambda c: (c(11) - c(12)) * c(44) - 2 * c(14) ** 2),
    ),
    "hexagonal": (*_IN_PLANE, _C44),
    "cubic": (
        _IN_PLANE[0],
        ("C11 + 2 C12", 1, lambda c: c(11) + 2 * c(12)),
        _C44,
    ),
    "isotropic": (
        _IN_PLANE[0],
        ("C11 + 2 C12", 1, lambda c: c(11) + 2 * c(12)),
    ),
}
"""Classes whose table falls apart into blocks small enough for written-out criteria."""

_BLOCKS: dict[str, tuple[tuple[int, ...], ...]] = {
    "triclinic": ((1, 2, 3, 4, 5, 6),),
    "monoclinic x": ((1, 2, 3, 4), (5, 6)),
    "monoclinic y": ((1, 2, 3, 5), (4, 6)),
    "monoclinic z": ((1, 2, 3, 6), (4, 5)),
    "orthorhombic": ((1, 2, 3), (4,), (5,), (6,)),
}
"""The other classes: rows that go together, each block by Sylvester's leading minors."""


def criteria(matrix: FloatArray, cls: CrystalClass) -> tuple[Criterion, ...]:
    """Return the closed stability criteria of a class, with their numbers.

    Together they are necessary and sufficient for a table that has the symmetry of the
    class (Mouhat & Coudert 2014, Phys. Rev. B 90, 224104; here rederived from the blocks of
    the Kelvin form). They read the independent cells only; a table that departs from the
    class is judged by `assess`.

    Parameters
    ----------
    matrix : ndarray, shape (6, 6)
        Stiffness, GPa, Voigt, in the axes of the class.
    cls : CrystalClass
    """
    table = complete(matrix, cls)
    if cls.key in _RULES:
        def constant(name: int) -> float:
            return float(table[name // 10 - 1, name % 10 - 1])

        rules = _RULES[cls.key]
        return tuple(_criterion(text, value(constant), power) for text, power, value in rules)
    form = f"monoclinic {cls.unique_axis}" if cls.key == "monoclinic" else cls.key
    return tuple(
        _minor(table, block[:size])
        for block in _BLOCKS[form]
        for size in range(1, len(block) + 1)
    )


def _minor(table: FloatArray, rows: tuple[int, ...]) -> Criterion:
    index = np.array(rows) - 1
    value = float(np.linalg.det(table[np.ix_(index, index)]))
    return _criterion(_minor_text(rows), value, len(rows))


def _minor_text(rows: tuple[int, ...]) -> str:
    if len(rows) == 1:
        return f"C{rows[0]}{rows[0]}"
    if len(rows) == 2:
        i, j = rows
        return f"C{i}{i} C{j}{j} − C{i}{j}²"
    return f"determinant of rows and columns {', '.join(str(row) for row in rows)}"


def _criterion(text: str, value: float, power: int) -> Criterion:
    unit = "GPa" + ("", "²", "³", "⁴", "⁵", "⁶")[power - 1]
    return Criterion(f"{text} > 0", value, unit, value > 0)
