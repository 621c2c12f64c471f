"""Orientations of the part: read in every accepted way, said in every way, and compared.

The rotation R has v_part = R v_crystal: its rows are the part axes X, Y, Z in crystal axes.
"""

import difflib
import re
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray, read_only
from core.crystal.cell import LEAST_ANGLE, CrystalFrame
from core.crystal.cuts import cut_for, cut_rotation, parse_cut
from core.crystal.directions import (
    Direction,
    angle_text,
    index_table,
    indices_text,
    nearest_indices,
    parse_direction,
    vector_text,
)
from core.crystal.indices import number_text, plain_signs, read_numbers
from core.crystal.turning import (
    axis_and_angle,
    axis_turn,
    nearest_rotation,
    triad,
    turn_angles,
    turns_about,
)
from core.errors import InputError
from core.numbers import MINUS, significant

WAYS: dict[str, str] = {
    "directions": "part axes along crystal directions",
    "bunge": "Euler angles φ1, Φ, φ2 (Bunge)",
    "cut": "rotated cut (IEEE Std 176)",
    "axis": "axis and angle",
    "matrix": "matrix",
    "identity": "part axes = crystal axes",
}
"""Ways to say an orientation, in words for the window."""

ROTATION_TOLERANCE = 1e-6
"""How far each entry of a given matrix may be from the nearest rotation's."""
_REPAIRABLE = 1e-2  # up to here the nearest rotation is offered
_EXACT_DEGREES = 1e-11  # indices name a vector this near without loss
_EXACT = 1e-13
_PART_AXES = "XYZ"
_WORD_WAYS = ("bunge", "axis", "matrix", "identity")
_OTHER_WORDS = {"euler": "bunge"}
_LARGEST_ANGLE = 1e6  # degrees
_SEEN_OFF = 0.05  # degrees: a direction missed by less is met as well as indices can say
_ACCEPTED = (
    'Write "Z=(1 1 0) X=[0 0 1]", "bunge 10 20 30", "(YXl) 35.25", "axis [1 1 1] 15",'
    ' "matrix" and nine numbers, or "identity".'
)


@dataclass(frozen=True, eq=False)
class Orientation:
    """How the part lies in the crystal.

    Attributes
    ----------
    rotation : ndarray, shape (3, 3), read-only
        v_part = R v_crystal; rows X, Y, Z in crystal axes.
    text : str
        The same orientation as one string that reads back to it.
    way : str
        A key of `WAYS`.
    """

    rotation: FloatArray
    text: str
    way: str


def parse_orientation(text: str, frame: CrystalFrame) -> Orientation:
    """Read an orientation of the part.

    Parameters
    ----------
    text : str
        "Z=(1 1 0) X=[0 0 1]": two part axes along directions or plane normals, the first
        exact, the second as near as possible. "bunge 10 20 30": φ1, Φ, φ2. "(YXl) 35.25":
        IEEE Std 176, the parentheses at will. "axis [1 1 1] 15": the part axes are the
        crystal axes turned by the angle about the direction, counter-clockwise when it points
        at the observer.
        "matrix" and nine numbers by rows. "identity". Any of them may end in
        "turn 0.5 0 -1": a further turn of the part about its own X, then Y, then Z.
        Degree signs are allowed.
    frame : CrystalFrame

    Raises
    ------
    InputError
        If it cannot be read or is no rotation.
    """
    plain = _usual_words(" ".join(plain_signs(text).split()))
    match = re.fullmatch(r"(.*?)\s*\bturn\b(.*)", plain, re.IGNORECASE)
    main, turn = (match[1] or "identity", match[2]) if match else (plain, "0 0 0")
    way = _way_of(main, text)
    rotation, canonical = _READERS[way](main, frame)
    x, y, z = _angles(_exactly(3, turn, "The turn needs three angles, about X, Y and Z"))
    if x or y or z:
        rotation = turned(rotation, (x, y, z))
        canonical += f" turn {number_text(x)} {number_text(y)} {number_text(z)}"
    return Orientation(read_only(rotation), canonical, way)


def _usual_words(text: str) -> str:
    """Return "Euler 10 20 30" as "bunge 10 20 30", and "YXl 35.25" as "(YXl) 35.25"."""
    word = (re.match(r"[A-Za-z]*", text) or [""])[0]
    if word.lower() in _OTHER_WORDS:
        return _OTHER_WORDS[word.lower()] + text[len(word) :]
    if re.fullmatch(r"[XYZ]{2}[lwt]{1,3}", word):
        return f"({word}){text[len(word) :]}"
    return text


def _way_of(main: str, text: str) -> str:
    word = (re.match(r"[A-Za-z]*", main) or [""])[0].lower()
    if word in _WORD_WAYS:
        return word
    if re.match(r"[XYZxyz]\s*(?:=|\|\||∥)", main):
        return "directions"
    if re.match(r"\(\s*[A-Za-z]", main):
        return "cut"
    if main[:1] in ("[", "("):
        raise InputError(
            f"'{text}' names one direction; an orientation needs two.",
            f"Say which part axes lie along which: Z={main} X=[…].",
        )
    near = difflib.get_close_matches(word, _WORD_WAYS, n=1)
    guess = f"Did you mean '{near[0]}'? " if near else ""
    raise InputError(f"'{text}' is not an orientation.", guess + _ACCEPTED)


def _exactly(count: int, text: str, sentence: str) -> tuple[float, ...]:
    values = read_numbers(text)
    if len(values) != count:
        raise InputError(f"{sentence}; {len(values)} were given.", _ACCEPTED)
    return values


def _angles(values: tuple[float, ...]) -> tuple[float, ...]:
    """Return angles in degrees, refusing those whose fraction of a turn rounding has eaten."""
    for value in values:
        if not abs(value) <= _LARGEST_ANGLE:
            raise InputError(
                f"An angle of {value:g}° is out of reach.",
                f"Up to ±{_LARGEST_ANGLE:,.0f}° is accepted.",
            )
    return values


# --- reading each way ----------------------------------------------------------------------


def _read_directions(main: str, frame: CrystalFrame) -> tuple[FloatArray, str]:
    letters, first, second = _two_axes(main, frame)
    rotation = triad(
        _PART_AXES.index(letters[0]),
        np.array(first.vector),
        _PART_AXES.index(letters[1]),
        np.array(second.vector),
    )
    return rotation, f"{letters[0]}={first.text} {letters[1]}={second.text}"


def _two_axes(main: str, frame: CrystalFrame) -> tuple[list[str], Direction, Direction]:
    pieces = re.split(r"([XYZxyz])\s*(?:=|\|\||∥)", main)[1:]
    letters = [letter.upper() for letter in pieces[0::2]]
    if len(letters) != 2 or letters[0] == letters[1]:
        raise InputError(
            f"'{main}' must place two different part axes.", "Write Z=(1 1 0) X=[0 0 1]."
        )
    first, second = (parse_direction(piece.strip(" ,;"), frame) for piece in pieces[1::2])
    _check_not_parallel(letters, first, second)
    return letters, first, second


def missed_direction(text: str, frame: CrystalFrame) -> str:
    """Return how far the second part axis stays from where it was put, or "" where it does not.

    Two directions at other than right angles cannot both be met; the first is.

    Parameters
    ----------
    text : str
        An orientation that `parse_orientation` reads; a further turn is left out.
    frame : CrystalFrame

    Returns
    -------
    str
        As in "X lies 51.2° from [1 0 0], which is not in the plane (1 1 0)", from 0.05° on.
    """
    said = parse_orientation(text, frame)
    if said.way != "directions":
        return ""
    letters, first, second = _two_axes(said.text.partition(" turn ")[0], frame)
    off = abs(90.0 - _between(first, second))
    if off < _SEEN_OFF:
        return ""
    is_plane = first.text.startswith("(")
    why = "in the plane" if is_plane else "at right angles to"
    return (
        f"{letters[1]} lies {significant(off, 3)}° from {second.text}, which is not {why} "
        f"{first.text}".replace("-", MINUS)
    )


def _between(first: Direction, second: Direction) -> float:
    """Return the angle between two directions, degrees."""
    a, b = np.array(first.vector), np.array(second.vector)
    return float(np.degrees(np.arctan2(np.linalg.norm(np.cross(a, b)), a @ b)))


def _check_not_parallel(letters: list[str], first: Direction, second: Direction) -> None:
    if float(np.linalg.norm(np.cross(first.vector, second.vector))) < LEAST_ANGLE:
        raise InputError(
            f"{letters[0]}={first.text} and {letters[1]}={second.text} are parallel.",
            f"Choose another direction for {letters[1]}.",
        )


def _read_bunge(main: str, frame: CrystalFrame) -> tuple[FloatArray, str]:
    angles = _angles(
        _exactly(3, main[len("bunge") :], "Bunge's angles are three, φ1, Φ and φ2")
    )
    return turns_about((2, 0, 2), angles), "bunge " + " ".join(map(number_text, angles))


def _read_cut(main: str, frame: CrystalFrame) -> tuple[FloatArray, str]:
    cut = parse_cut(main)
    _angles(cut.angles)
    return cut_rotation(cut), cut.text


def _read_axis(main: str, frame: CrystalFrame) -> tuple[FloatArray, str]:
    rest = main[len("axis") :].strip()
    match = re.fullmatch(r"([\[(].*[\])]|[abcxyz]\*?(?=[\s,]))[\s,;]*(.*)", rest)
    if match:
        where, angle_part = match[1], match[2]
    else:
        pieces = [piece for piece in re.split(r"[\s,;]+", rest.replace("°", " ")) if piece]
        where, angle_part = ",".join(pieces[:3]), " ".join(pieces[3:])
    sentence = "'axis' needs a direction and then one angle"
    (angle,) = _angles(_exactly(1, angle_part, sentence))
    axis = parse_direction(where, frame)
    turn = axis_turn(np.array(axis.vector), angle)
    return turn.T, f"axis {axis.text} {number_text(angle)}"


def _read_matrix(main: str, frame: CrystalFrame) -> tuple[FloatArray, str]:
    numbers = re.sub(r"[\[\]()|]", " ", main[len("matrix") :])
    values = _exactly(9, numbers, "A matrix has nine numbers, three rows of three")
    given = np.array(values).reshape(3, 3)
    rotation, is_right_handed = nearest_rotation(given)
    off = float(np.abs(given - rotation).max())
    if not is_right_handed:
        raise InputError(
            "The matrix is left-handed: it mirrors the crystal instead of turning it.",
            "Change the sign of one row.",
        )
    if off > ROTATION_TOLERANCE:
        raise InputError(
            f"The matrix is not a rotation: its entries are up to {off:.2g} away from the"
            f" nearest one, more than {ROTATION_TOLERANCE:g}.",
            f"The nearest rotation is: {_matrix_text(rotation)}"
            if off <= _REPAIRABLE
            else "Its rows must be unit vectors at right angles.",
        )
    return rotation, _matrix_text(rotation)


def _read_identity(main: str, frame: CrystalFrame) -> tuple[FloatArray, str]:
    if main.strip().lower() != "identity":
        raise InputError(f"'{main}': nothing may follow 'identity' but 'turn'.")
    return np.eye(3), "identity"


_Reader = Callable[[str, CrystalFrame], tuple[FloatArray, str]]
_READERS: dict[str, _Reader] = {
    "directions": _read_directions,
    "bunge": _read_bunge,
    "cut": _read_cut,
    "axis": _read_axis,
    "matrix": _read_matrix,
    "identity": _read_identity,
}


# --- saying one rotation in every way ------------------------------------------------------


def orientation_texts(rotation: FloatArray, frame: CrystalFrame) -> dict[str, str]:
    """Say one rotation in every way.

    Parameters
    ----------
    rotation : ndarray, shape (3, 3)
        Rows X, Y, Z of the part in crystal axes.
    frame : CrystalFrame

    Returns
    -------
    dict
        Way to text, in the order of `WAYS`; each text reads back to the rotation within
        1e-12. "directions" and "axis" use indices where low ones name the vectors exactly,
        else components at full precision. "identity" is there only for the identity.
    """
    texts = {
        "directions": _directions_text(rotation, frame),
        "bunge": _bunge_text(rotation),
        "cut": cut_for(rotation).text,
        "axis": _axis_text(rotation, frame),
        "matrix": _matrix_text(rotation),
    }
    if float(np.abs(rotation - np.eye(3)).max()) < _EXACT:
        texts["identity"] = "identity"
    return texts


def _bunge_text(rotation: FloatArray) -> str:
    phi1, middle, phi2 = turn_angles(rotation, (2, 0, 2))
    angles = (_in_circle(phi1), middle, _in_circle(phi2))
    return "bunge " + " ".join(angle_text(angle) for angle in angles)


def _axis_text(rotation: FloatArray, frame: CrystalFrame) -> str:
    axis, angle = axis_and_angle(rotation.T)
    if axis[np.abs(axis) > _EXACT][0] < 0:  # [1 0 0] by −30° reads better than [-1 0 0] by 30°
        axis, angle = -axis, -angle
    return f"axis {_exact_text(axis, frame, (False, True))} {angle_text(angle)}"


def _in_circle(degrees: float) -> float:
    return round(degrees, 12) % 360.0


def _matrix_text(rotation: FloatArray) -> str:
    return "matrix " + vector_text(rotation.ravel()).replace(",", " ")


def _exact_text(vector: FloatArray, frame: CrystalFrame, planes: tuple[bool, bool]) -> str:
    """Return indices where they name the vector exactly, else its components."""
    for plane in planes if frame.has_basis else ():
        nearest = nearest_indices(vector, frame, plane=plane)
        if nearest.angle_deg < _EXACT_DEGREES:
            return nearest.text
    return vector_text(vector)


def _directions_text(rotation: FloatArray, frame: CrystalFrame) -> str:
    along = _exact_text(rotation[2], frame, (True, False))
    near = _in_plane_text(rotation, frame) or vector_text(rotation[0])
    return f"Z={along} X={near}"


def _in_plane_text(rotation: FloatArray, frame: CrystalFrame) -> str:
    """Return the simplest indices whose part across Z lies along X; empty if there are none.

    Indices at right angles to Z come first.
    """
    found = []
    for plane in (False, True) if frame.has_basis else ():
        triples, vectors = index_table(frame, 6, plane)
        along_x, along_y, along_z = np.abs(vectors @ rotation.T).T
        for row in np.flatnonzero((along_y < _EXACT) & (along_x > 0.5)).tolist():
            sign = 1 if vectors[row] @ rotation[0] > 0 else -1
            size = int((triples[row] ** 2).sum())
            text = indices_text((sign * triples[row]).tolist(), frame, plane)
            found.append((bool(along_z[row] > _EXACT), plane, size, text))
    return min(found)[-1] if found else ""


# --- turning and comparing -----------------------------------------------------------------


def turned(rotation: FloatArray, degrees: tuple[float, float, float]) -> FloatArray:
    """Return the rotation after the part turned about its own X, then Y, then Z.

    Each turn is about the part's already turned axis; the crystal stays.
    """
    return np.asarray(turns_about((0, 1, 2), degrees).T @ rotation, dtype=np.float64)


@dataclass(frozen=True)
class Misorientation:
    """The turn that takes one orientation of the part to another.

    Attributes
    ----------
    angle_deg : float
        0 to 180.
    axis : tuple of 3 floats
        Unit vector, crystal axes; z where there is nothing to turn.
    """

    angle_deg: float
    axis: tuple[float, float, float]


def misorientation(
    Ra: FloatArray, Rb: FloatArray, rotations: FloatArray | None = None
) -> Misorientation:
    """Return the least turn, seen from the crystal, that takes part A to part B.

    Parameters
    ----------
    Ra, Rb : ndarray, shape (3, 3)
        v_part = R v_crystal.
    rotations : ndarray, shape (M, 3, 3), optional
        The crystal's own rotations O (a group, crystal axes). Since Rb and Rb O give the same
        properties, the least angle over Rb O Raᵀ is taken. None compares as they stand.

    Returns
    -------
    Misorientation
        Of Δ with Δ Raᵀ = (Rb O)ᵀ, that is Δ = Oᵀ Rbᵀ Ra, in crystal axes. Of equal angles
        the earliest of `rotations` is taken.
    """
    group = np.eye(3)[None] if rotations is None else np.asarray(rotations)
    turns = np.swapaxes(group, -1, -2) @ (Rb.T @ Ra)
    traces = np.trace(turns, axis1=-2, axis2=-1)
    axis, angle = axis_and_angle(turns[int(np.argmax(traces >= traces.max() - 1e-12))])
    x, y, z = axis.tolist()
    return Misorientation(angle, (x, y, z))
