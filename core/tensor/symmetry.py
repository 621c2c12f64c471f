"""Crystal classes as linear spaces of 6x6 tables: which cells are free, which follow.

A class is a row of data: its independent constants and how the others depend on them. All
else (completion, projection, distance, the words of a tooltip) is read from that row. Standard
axes: z along the four-, three- or sixfold axis, x along a twofold axis where there is one
(Nye 1957, *Physical Properties of Crystals*, table 9). Finding axes that a table hides is a
search and not done here.
"""

import difflib
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import FloatArray, read_only
from core.errors import InputError
from core.tensor.notation import constant_name, kelvin_to_stiffness, stiffness_to_kelvin

Cell = tuple[int, int]
Terms = Mapping[str, float]
"""What a dependent constant is made of: ``{"11": 0.5, "12": -0.5}`` is (C11 − C12)/2."""


@dataclass(frozen=True)
class CrystalClass:
    """A class of crystals that share the form of the elastic table, about given axes.

    Attributes
    ----------
    key : str
        As in files: one of `CLASS_KEYS`.
    name : str
        For people.
    groups : str
        The point groups it holds.
    unique_axis : str
        "x", "y" or "z": the twofold axis of monoclinic crystals; "y" and without meaning
        for the others.
    independent : tuple of (int, int)
        Free cells of the upper triangle, from 0, in reading order.
    kinds : 6 rows of 6
        "independent", "dependent" or "zero" for every cell; both triangles alike.
    """

    key: str
    name: str
    groups: str
    unique_axis: str
    independent: tuple[Cell, ...]
    kinds: tuple[tuple[str, ...], ...]


@dataclass(frozen=True)
class _Form:
    """One row of the table of classes."""

    name: str
    groups: str
    independent: str
    dependent: Mapping[str, Terms]


_AXIAL: dict[str, Terms] = {"22": {"11": 1.0}, "23": {"13": 1.0}, "55": {"44": 1.0}}
_ROUND: dict[str, Terms] = _AXIAL | {"66": {"11": 0.5, "12": -0.5}}
_EQUAL_AXES: dict[str, Terms] = {
    "13": {"12": 1.0}, "22": {"11": 1.0}, "23": {"12": 1.0}, "33": {"11": 1.0},
}  # fmt: skip
_THREEFOLD: dict[str, Terms] = _ROUND | {"24": {"14": -1.0}, "56": {"14": 1.0}}
_HALF_DIFFERENCE: Terms = {"11": 0.5, "12": -0.5}

_FORMS: dict[str, _Form] = {
    "triclinic": _Form(
        "triclinic", "1, −1",
        "11 12 13 14 15 16 22 23 24 25 26 33 34 35 36 44 45 46 55 56 66", {},
    ),
    "monoclinic": _Form("monoclinic", "2, m, 2/m", "", {}),
    "orthorhombic": _Form(
        "orthorhombic", "222, mm2, mmm", "11 12 13 22 23 33 44 55 66", {},
    ),
    "tetragonal_7": _Form(
        "tetragonal, 7 constants", "4, −4, 4/m",
        "11 12 13 16 33 44 66", _AXIAL | {"26": {"16": -1.0}},
    ),
    "tetragonal_6": _Form(
        "tetragonal, 6 constants", "422, 4mm, −42m, 4/mmm", "11 12 13 33 44 66", _AXIAL,
    ),
    "trigonal_7": _Form(
        "trigonal, 7 constants", "3, −3",
        "11 12 13 14 15 33 44", _THREEFOLD | {"25": {"15": -1.0}, "46": {"15": -1.0}},
    ),
    "trigonal_6": _Form(
        "trigonal, 6 constants", "32, 3m, −3m", "11 12 13 14 33 44", _THREEFOLD,
    ),
    "hexagonal": _Form(
        "hexagonal", "6, −6, 6/m, 622, 6mm, −6m2, 6/mmm", "11 12 13 33 44", _ROUND,
    ),
    "cubic": _Form(
        "cubic", "23, m−3, 432, −43m, m−3m",
        "11 12 44", _EQUAL_AXES | {"55": {"44": 1.0}, "66": {"44": 1.0}},
    ),
    "isotropic": _Form(
        "isotropic", "∞∞, ∞∞m",
        "11 12", _EQUAL_AXES | dict.fromkeys(("44", "55", "66"), _HALF_DIFFERENCE),
    ),
}  # fmt: skip

_MONOCLINIC_CONSTANTS: dict[str, str] = {
    "x": "11 12 13 14 22 23 24 33 34 44 55 56 66",
    "y": "11 12 13 15 22 23 25 33 35 44 46 55 66",
    "z": "11 12 13 16 22 23 26 33 36 44 45 55 66",
}

CLASS_KEYS: tuple[str, ...] = tuple(_FORMS)

_X, _Y, _Z, _DIAGONAL = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0), (1.0, 1.0, 1.0)
_AXES = {"x": _X, "y": _Y, "z": _Z}

_GENERATORS: dict[str, tuple[tuple[tuple[float, float, float], int], ...]] = {
    "triclinic": (),
    "orthorhombic": ((_Z, 2), (_X, 2)),
    "tetragonal_7": ((_Z, 4),),
    "tetragonal_6": ((_Z, 4), (_X, 2)),
    "trigonal_7": ((_Z, 3),),
    "trigonal_6": ((_Z, 3), (_X, 2)),
    "hexagonal": ((_Z, 6), (_X, 2)),
    "cubic": ((_Z, 4), (_DIAGONAL, 3)),
    "isotropic": (),
}
"""Axis and order of turns that make up the proper rotations of the (highest) Laue group;
monoclinic, the one class not here, has a single twofold turn about its unique axis."""

_GROUP_ENTRIES = np.array([-1.0, -np.sqrt(0.75), -0.5, 0.0, 0.5, np.sqrt(0.75), 1.0])


def crystal_class(key: str, unique_axis: str = "y") -> CrystalClass:
    """Return the crystal class of a key.

    Parameters
    ----------
    key : str
        One of `CLASS_KEYS`; capitals, and spaces or hyphens for underscores, are accepted.
    unique_axis : str
        "x", "y" or "z", read only for monoclinic.

    Raises
    ------
    InputError
        For an unknown key, with the nearest known one, or an unknown axis.
    """
    known = key.strip().lower().replace(" ", "_").replace("-", "_")
    if known not in _FORMS:
        near = difflib.get_close_matches(known, CLASS_KEYS, n=2, cutoff=0.7)
        question = f"Did you mean {' or '.join(near)}? " if near else ""
        raise InputError(
            f"'{key}' is not a crystal class.",
            f"{question}Known classes: {', '.join(CLASS_KEYS)}.",
            "crystal class",
        )
    if known != "monoclinic":
        return _build(known, "y")
    if unique_axis not in _MONOCLINIC_CONSTANTS:
        raise InputError(
            f"'{unique_axis}' is not an axis.", "The unique axis is x, y or z.", "unique axis"
        )
    return _build(known, unique_axis)


@lru_cache(maxsize=32)
def _build(key: str, unique_axis: str) -> CrystalClass:
    form = _FORMS[key]
    names = form.independent or _MONOCLINIC_CONSTANTS[unique_axis]
    free = tuple(_cell(name) for name in names.split())
    kinds = [["zero"] * 6 for _ in range(6)]
    for cells, kind in ((free, "independent"), (map(_cell, form.dependent), "dependent")):
        for i, j in cells:
            kinds[i][j] = kinds[j][i] = kind
    table = tuple(tuple(row) for row in kinds)
    return CrystalClass(key, form.name, form.groups, unique_axis, free, table)


def _cell(name: str) -> Cell:
    return int(name[0]) - 1, int(name[1]) - 1


def complete(matrix: FloatArray, cls: CrystalClass) -> FloatArray:
    """Return the table that the independent cells of a table make in a class.

    Parameters
    ----------
    matrix : ndarray, shape (6, 6)
        Voigt, the crystal axes of the class. Only the independent cells of its upper
        triangle are read, and they are kept exactly.
    cls : CrystalClass

    Returns
    -------
    ndarray, shape (6, 6)
        Symmetric; dependent cells follow, the others are zero.
    """
    whole = np.zeros((6, 6))
    for i, j in cls.independent:
        whole[i, j] = whole[j, i] = matrix[i, j]
    for name, terms in _FORMS[cls.key].dependent.items():
        i, j = _cell(name)
        value = sum(factor * float(matrix[_cell(part)]) for part, factor in terms.items())
        whole[i, j] = whole[j, i] = value
    return whole


@lru_cache(maxsize=32)
def kelvin_projector(cls: CrystalClass) -> FloatArray:
    """Return the orthogonal projector onto a class for flattened Kelvin tables.

    Returns
    -------
    ndarray, shape (36, 36)
        Read-only, symmetric; applies to ``kelvin.reshape(36)`` in the axes of the class.
        Its trace is the number of independent constants.
    """
    columns = []
    for i, j in cls.independent:
        unit = np.zeros((6, 6))
        unit[i, j] = 1.0
        columns.append(stiffness_to_kelvin(complete(unit, cls)).reshape(36))
    basis, _ = np.linalg.qr(np.array(columns).T)
    return read_only(basis @ basis.T)


def project(matrix: FloatArray, cls: CrystalClass) -> FloatArray:
    """Return the table of a class that is nearest in the Kelvin norm.

    For a class with a finite group it equals the average of the table over the group
    (Moakher & Norris 2006, J. Elasticity 85, 215).

    Parameters
    ----------
    matrix : ndarray, shape (..., 6, 6)
        Stiffness, Voigt, in the axes about which the class is meant.
    cls : CrystalClass

    Returns
    -------
    ndarray, shape (..., 6, 6)
    """
    kelvin = stiffness_to_kelvin(matrix)
    flat = kelvin.reshape(*kelvin.shape[:-2], 36) @ kelvin_projector(cls)
    return kelvin_to_stiffness(flat.reshape(kelvin.shape))


def distance(matrix: FloatArray, cls: CrystalClass) -> float:
    """Return ‖C − P(C)‖/‖C‖ in Kelvin form, 0 (in the class) to 1; 0 for a table of zeros.

    `matrix` is one stiffness, shape (6, 6), Voigt, in the axes of the class.
    """
    size = np.linalg.norm(stiffness_to_kelvin(matrix))
    if size == 0:
        return 0.0
    return float(np.linalg.norm(stiffness_to_kelvin(matrix - project(matrix, cls))) / size)


def dependence_text(cls: CrystalClass, i: int, j: int) -> str:
    """Return how the constant in row `i`, column `j` (from 0) stands in a class.

    "C66 = (C11 − C12)/2", "C24 = −C14", "zero by symmetry", or "independent".
    """
    kind = cls.kinds[i][j]
    if kind != "dependent":
        return "zero by symmetry" if kind == "zero" else kind
    name = constant_name(i, j)
    terms = _FORMS[cls.key].dependent[name[1:]]
    return f"{name} = {_terms_text(terms)}"


def _terms_text(terms: Terms) -> str:
    (first, factor), *rest = terms.items()
    if rest:  # the only sum there is in any class
        return f"(C{first} − C{rest[0][0]})/2"
    return f"−C{first}" if factor < 0 else f"C{first}"


@lru_cache(maxsize=32)
def laue_rotations(cls: CrystalClass) -> FloatArray:
    """Return the proper rotations of the Laue group of a class.

    Where a class holds two Laue groups (hexagonal, cubic) it is the larger: both leave the
    same tables unchanged.

    Returns
    -------
    ndarray, shape (M, 3, 3)
        Read-only, crystal axes, identity first. For the isotropic class, whose group is
        not finite, the identity alone.
    """
    twofold = ((_AXES[cls.unique_axis], 2),)
    turns = [_turn(axis, order) for axis, order in _GENERATORS.get(cls.key, twofold)]
    members = [np.eye(3)]
    for member in members:  # grows while it runs, until products bring nothing new
        for product in (_snap(turn @ member) for turn in turns):
            if not any(np.allclose(product, known, atol=1e-9) for known in members):
                members.append(product)
    return read_only(np.array(members))


def _turn(axis: tuple[float, float, float], order: int) -> FloatArray:
    """Return the turn by 360°/order about an axis, by Rodrigues' formula."""
    x, y, z = np.array(axis) / np.linalg.norm(axis)
    cross = np.array([[0.0, -z, y], [z, 0.0, -x], [-y, x, 0.0]])
    angle = 2 * np.pi / order
    turned: FloatArray = np.eye(3) + np.sin(angle) * cross + (1 - np.cos(angle)) * cross @ cross
    return turned


def _snap(rotation: FloatArray) -> FloatArray:
    """Replace each entry by the nearest one a crystallographic turn can have in these axes."""
    nearest = np.abs(rotation[..., None] - _GROUP_ENTRIES).argmin(axis=-1)
    snapped: FloatArray = _GROUP_ENTRIES[nearest]
    return snapped
