"""The unit cell, the crystal axes that follow it, and the frame that ties both together."""

import math
import re
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import FloatArray, read_only
from core.crystal.indices import (
    Indices,
    number_text,
    plain_signs,
    read_indices,
    three_from_four,
)
from core.crystal.turning import angle_between, cosine_sine, triad, unit
from core.errors import InputError

FLATTEST = 1e-6
"""Least volume over a·b·c: below it the cell's axes cannot be told from lying in a plane."""
SHORTEST, LONGEST = 1e-6, 1e6
"""Lengths accepted, in Å; wide enough for reciprocal cells, in 1/Å."""
LEAST_ANGLE = 1e-6
"""Sine of the least angle between two statements that still fix a set of axes."""
_ALIKE = 1e-3  # relative, lengths: measured cells scatter by less than this
_ALIKE_DEGREES = 0.05

AXES_CONVENTIONS: dict[str, str] = {
    "z||c, y||b*": "z along c, y along b* (IEEE Std 176)",
    "x||a, z||c*": "x along a, z along c*",
    "y||b, x||a*": "y along b, x along a*",
    "y||b, z||c*": "y along b, z along c*",
}
DEFAULT_AXES = "z||c, y||b*"

CELL_NAMES = {
    "a": "[1 0 0]", "b": "[0 1 0]", "c": "[0 0 1]",
    "a*": "(1 0 0)", "b*": "(0 1 0)", "c*": "(0 0 1)",
}  # fmt: skip
"""Names of cell vectors and of the normals of the cell's faces, as indices."""
_STATEMENT = re.compile(
    r"\s*([xyzXYZ])\s*(?:\|\||∥|‖|//|=)\s*(\[[^\]]*\]|\([^)]*\)|[abc]\*?)\s*"
)


@dataclass(frozen=True)
class UnitCell:
    """A unit cell.

    Attributes
    ----------
    a, b, c : float
        Lengths in Å (1/Å in a reciprocal cell).
    alpha, beta, gamma : float
        Angles in degrees: between b and c, a and c, a and b.

    Raises
    ------
    InputError
        On making, for a cell that cannot exist, with the condition that fails.
    """

    a: float
    b: float
    c: float
    alpha: float
    beta: float
    gamma: float

    def __post_init__(self) -> None:
        _check_lengths(self)
        _check_angles(self)

    @property
    def volume(self) -> float:
        """The volume in Å³, from the half sum of the angles (no cancellation)."""
        return self.a * self.b * self.c * _volume_factor(self.alpha, self.beta, self.gamma)

    def reciprocal(self) -> "UnitCell":
        """Return the reciprocal cell, lengths in 1/Å without the factor 2π."""
        rows = np.linalg.inv(_standard_basis(self))
        lengths = [float(np.linalg.norm(row)) for row in rows]
        units = [unit(row) for row in rows]
        pairs = ((1, 2), (0, 2), (0, 1))
        angles = [angle_between(units[i], units[j]) for i, j in pairs]
        return UnitCell(*lengths, *angles)


def _lengths(cell: UnitCell) -> dict[str, float]:
    return {"a": cell.a, "b": cell.b, "c": cell.c}


def _angles(cell: UnitCell) -> dict[str, float]:
    return {"α": cell.alpha, "β": cell.beta, "γ": cell.gamma}


def _check_lengths(cell: UnitCell) -> None:
    for name, value in {**_lengths(cell), **_angles(cell)}.items():
        if not math.isfinite(value):
            raise InputError(f"{name} is not a finite number.", where="Unit cell")
    for name, value in _lengths(cell).items():
        if value <= 0:
            raise InputError(
                f"The length {name} = {number_text(value)} Å must be greater than zero.",
                where="Unit cell",
            )
        if not SHORTEST <= value <= LONGEST:
            raise InputError(
                f"The length {name} = {number_text(value)} Å is not that of a crystal's cell.",
                "Lengths are in Å: 1 nm is 10 Å.",
                "Unit cell",
            )


def _check_angles(cell: UnitCell) -> None:
    """Refuse angles at which three axes cannot meet, naming the condition."""
    angles = _angles(cell)
    for name, value in angles.items():
        if not 0 < value < 180:
            raise InputError(
                f"The angle {name} = {number_text(value)}° must lie between 0 and 180°.",
                where="Unit cell",
            )
    total = sum(angles.values())
    if total >= 360:
        raise InputError(
            f"The angles α + β + γ = {total:.10g}° must add up to less than 360°.",
            "At 360° the three axes lie in one plane.",
            "Unit cell",
        )
    for name, value in angles.items():
        others = [other for other in angles if other != name]
        if value >= total - value:
            raise InputError(
                f"The angle {name} = {number_text(value)}° must be less than"
                f" {others[0]} + {others[1]} = {total - value:.10g}°.",
                "Otherwise the three axes cannot meet in a cell.",
                "Unit cell",
            )
    if _volume_factor(cell.alpha, cell.beta, cell.gamma) < FLATTEST:
        raise InputError("With these angles the cell is flat.", where="Unit cell")


def _volume_factor(alpha: float, beta: float, gamma: float) -> float:
    if alpha == beta == 90:
        return cosine_sine(gamma)[1]  # exact for the commonest cells
    half = (alpha + beta + gamma) / 2
    sines = [math.sin(math.radians(half - angle)) for angle in (0.0, alpha, beta, gamma)]
    return 2 * math.sqrt(max(math.prod(sines), 0.0))


def _standard_basis(cell: UnitCell) -> FloatArray:
    """Return columns a, b, c in Å with x along a and z along c*."""
    cos_alpha, _ = cosine_sine(cell.alpha)
    cos_beta, _ = cosine_sine(cell.beta)
    cos_gamma, sin_gamma = cosine_sine(cell.gamma)
    sideways = (cos_alpha - cos_beta * cos_gamma) / sin_gamma
    height = _volume_factor(cell.alpha, cell.beta, cell.gamma) / sin_gamma
    unit_columns = [
        [1.0, cos_gamma, cos_beta],
        [0.0, sin_gamma, sideways],
        [0.0, 0.0, height],
    ]
    lengths = np.array([cell.a, cell.b, cell.c])
    return np.asarray(np.array(unit_columns) * lengths, dtype=np.float64)


def is_hexagonal(cell: UnitCell) -> bool:
    """Whether a = b, γ = 120° and c stands upright, within 0.1 % and 0.05°."""
    upright = all(abs(angle - 90) < _ALIKE_DEGREES for angle in (cell.alpha, cell.beta))
    return _alike(cell.a, cell.b) and upright and abs(cell.gamma - 120) < _ALIKE_DEGREES


def _alike(first: float, second: float) -> bool:
    return abs(first - second) <= _ALIKE * max(first, second)


def cell_mismatch(cell: UnitCell, class_key: str, unique_axis: str = "y") -> str:
    """Return why a cell cannot belong to a crystal class; empty when it can.

    Within 0.1 % in lengths and 0.05° in angles. Trigonal crystals may have hexagonal or
    rhombohedral axes.
    """
    right = [abs(angle - 90) < _ALIKE_DEGREES for angle in _angles(cell).values()]
    is_rhombohedral = (
        _alike(cell.a, cell.b)
        and _alike(cell.b, cell.c)
        and max(_angles(cell).values()) - min(_angles(cell).values()) < _ALIKE_DEGREES
    )
    unique = "xyz".find(unique_axis)
    upright = all(is_right for k, is_right in enumerate(right) if k != unique)
    others = " = ".join(name for k, name in enumerate(_angles(cell)) if k != unique)
    rules = {
        "monoclinic": (upright, f"{others} = 90°"),
        "orthorhombic": (all(right), "α = β = γ = 90°"),
        "tetragonal": (all(right) and _alike(cell.a, cell.b), "a = b, α = β = γ = 90°"),
        "trigonal": (
            is_hexagonal(cell) or is_rhombohedral,
            "a = b, α = β = 90°, γ = 120° (or a = b = c, α = β = γ)",
        ),
        "hexagonal": (is_hexagonal(cell), "a = b, α = β = 90°, γ = 120°"),
        "cubic": (all(right) and is_rhombohedral, "a = b = c, α = β = γ = 90°"),
    }
    family = class_key.split("_")[0]
    fits, rule = rules.get(family, (True, ""))
    return "" if fits else f"A {family} crystal has {rule}; this cell has not."


# --- crystal axes --------------------------------------------------------------------------


def axes_statements(axes: str) -> tuple[tuple[str, str], tuple[str, str]]:
    """Read "z||c, y||b*" or "z||[0 0 1], y||(0 1 0)" as two statements.

    Returns
    -------
    tuple of two (letter, target)
        Letter x, y or z; target a, b, c, a*, b*, c* or indices in brackets.

    Raises
    ------
    InputError
        If there are not two statements about two different axes.
    """
    found: list[tuple[str, str]] = []
    rest = plain_signs(axes)
    while match := _STATEMENT.match(rest):
        found.append((match[1].lower(), match[2]))
        rest = rest[match.end() :].lstrip(",; ")
    if rest or len(found) != 2:
        raise InputError(
            f"'{axes}' does not say how the crystal axes follow the cell.",
            'Write two statements such as "z||c, y||b*" or "z||[0 0 1], y||(0 1 0)".',
        )
    if found[0][0] == found[1][0]:
        raise InputError(f"'{axes}' speaks twice about {found[0][0]}; name two axes.")
    return found[0], found[1]


def axes_text(axes: str) -> str:
    """Return the one spelling of an axes choice that is kept in files: "z||c, y||b*"."""
    return ", ".join(f"{letter}||{target}" for letter, target in axes_statements(axes))


def axes_words(axes: str) -> str:
    """Return an axes choice in words for the window."""
    text = axes_text(axes)
    plain = ", ".join(f"{letter} along {target}" for letter, target in axes_statements(text))
    return AXES_CONVENTIONS.get(text, plain)


def axes_matrix(cell: UnitCell, axes: str) -> FloatArray:
    """Return the cell vectors in crystal axes.

    Parameters
    ----------
    cell : UnitCell
    axes : str
        A key of `AXES_CONVENTIONS` or two statements of one's own. The first holds exactly;
        where the two are not perpendicular, the second as nearly as possible: its axis lies
        in the plane of both (see `axes_note`).

    Returns
    -------
    ndarray, shape (3, 3), read-only
        Columns a, b, c in Å, crystal axes, right-handed.

    Raises
    ------
    InputError
        If the statements cannot be read or name parallel directions.
    """
    return _axes_matrix(cell, axes)


@lru_cache(maxsize=64)
def _axes_matrix(cell: UnitCell, axes: str) -> FloatArray:
    return read_only(_axes_rows(cell, axes) @ _standard_basis(cell))


def _axes_rows(cell: UnitCell, axes: str) -> FloatArray:
    """Return x, y, z as rows in the standard basis of the cell."""
    (first, along), (second, near) = _axes_targets(cell, axes)
    if float(np.linalg.norm(np.cross(along, near))) < LEAST_ANGLE:
        raise InputError(
            f"'{axes}' names two parallel directions.",
            "The two statements must point different ways.",
        )
    return triad("xyz".index(first), along, "xyz".index(second), near)


def _axes_targets(
    cell: UnitCell, axes: str
) -> tuple[tuple[str, FloatArray], tuple[str, FloatArray]]:
    basis = _standard_basis(cell)
    first, second = (
        (letter, lattice_vector(three_indices(CELL_NAMES.get(target, target), cell), basis))
        for letter, target in axes_statements(axes)
    )
    return first, second


def axes_note(cell: UnitCell, axes: str) -> str:
    """Return how far the second statement is from holding; empty when both hold exactly."""
    _, (letter, wanted) = _axes_targets(cell, axes)
    off = angle_between(_axes_rows(cell, axes)["xyz".index(letter)], wanted)
    if off < 1e-6:
        return ""
    (exact, along), (_, target) = axes_statements(axes)
    return (
        f"{exact} lies exactly along {along}; the two directions are not perpendicular,"
        f" so {letter} is {off:.3g}° from {target}."
    )


def change_of_axes(cell: UnitCell, old: str, new: str) -> FloatArray:
    """Return the rotation R, shape (3, 3), from old to new crystal axes: v_new = R v_old."""
    return np.asarray(_axes_rows(cell, new) @ _axes_rows(cell, old).T, dtype=np.float64)


# --- indices in a cell ---------------------------------------------------------------------


def three_indices(text: str, cell: UnitCell | None, class_key: str = "") -> Indices:
    """Read indices and give them as three, refusing four where they have no meaning.

    Raises
    ------
    InputError
        Also for four indices when the cell is not hexagonal (a = b, γ = 120°).
    """
    indices = read_indices(text)
    if len(indices.values) == 4:
        _check_four_index(text, cell, class_key)
    return three_from_four(indices)


def _check_four_index(text: str, cell: UnitCell | None, class_key: str) -> None:
    if cell is not None and is_hexagonal(cell):
        return
    if cell is not None:
        reason = (
            f"this cell has a = {number_text(cell.a)} Å, b = {number_text(cell.b)} Å,"
            f" α = {number_text(cell.alpha)}°, β = {number_text(cell.beta)}°,"
            f" γ = {number_text(cell.gamma)}°"
        )
    elif class_key.split("_")[0] in ("hexagonal", "trigonal"):
        raise InputError(
            f"{text} needs the unit cell: the ratio c/a decides where it points.",
            "Enter a, b, c and the angles of the cell.",
        )
    else:
        reason = f"this crystal is {class_key.split('_')[0] or 'not hexagonal'}"
    raise InputError(
        f"{text} has four indices, which belong to hexagonal axes (a = b, γ = 120°); {reason}.",
        "Write three indices.",
    )


def lattice_vector(indices: Indices, basis: FloatArray) -> FloatArray:
    """Return the unit vector along [u v w], or along the normal of (h k l).

    Parameters
    ----------
    indices : Indices
        Three of them.
    basis : ndarray, shape (3, 3)
        Columns a, b, c in some Cartesian axes; the result is in the same axes.
    """
    values = np.array(indices.values)
    values = values / np.abs(values).max()
    if indices.is_plane:
        return unit(np.linalg.solve(basis.T, values))
    return unit(basis @ values)


# --- the frame -----------------------------------------------------------------------------


@dataclass(frozen=True)
class CrystalFrame:
    """What indices refer to: the cell, how the crystal axes follow it, and the class.

    Attributes
    ----------
    cell : UnitCell or None
        None where it was not given.
    axes : str
        A key of `AXES_CONVENTIONS` or two statements of one's own.
    class_key : str
        One of `core.tensor.symmetry.CLASS_KEYS`.
    unique_axis : str
        x, y or z, of monoclinic crystals.
    """

    cell: UnitCell | None = None
    axes: str = DEFAULT_AXES
    class_key: str = "triclinic"
    unique_axis: str = "y"

    @property
    def has_basis(self) -> bool:
        """Whether indices mean anything: a cell is given, or the class needs none."""
        return self.cell is not None or self.class_key in ("cubic", "isotropic")

    @property
    def uses_four_indices(self) -> bool:
        """Whether indices are printed as four: hexagonal cell of such a class."""
        family = self.class_key.split("_")[0]
        hexagonal = self.cell is not None and is_hexagonal(self.cell)
        return hexagonal and family in ("hexagonal", "trigonal")

    def basis(self) -> FloatArray:
        """Return columns a, b, c in crystal axes, shape (3, 3), read-only, in Å.

        A cubic or isotropic crystal without a cell has the unit cube.

        Raises
        ------
        InputError
            Asking for the cell where it is needed and missing.
        """
        if self.has_basis:
            return _axes_matrix(self.cell or UnitCell(1, 1, 1, 90, 90, 90), self.axes)
        raise InputError(
            f"Indices need the unit cell: this crystal is {self.class_key.split('_')[0]}"
            " and no cell was given.",
            "Enter a, b, c and the angles of the cell, or give components along the"
            " crystal axes such as 0.3,0.4,0.87.",
        )
