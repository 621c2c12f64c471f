"""Rotated-cut notation of IEEE Std 176: (YXl) 35.25°, (YXwl) 21.93°/33.93°.

The first letter is the crystal axis along the thickness t of the blank, the second the one
along its length l; the width w then lies along the third. Each further letter names the
edge turned about, in order, each about the already turned edge, counter-clockwise for
somebody at whom the edge points. Part Z is t and part X is l, so part Y = Z × X, which is w
or −w: the edges l, w, t start along positive crystal axes and need not be right-handed.
"""

import itertools
import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import FloatArray
from core.crystal.indices import number_text, plain_signs, read_numbers
from core.crystal.turning import turn_angles, turns_about
from core.errors import InputError

AXES = "XYZ"
EDGES = "lwt"
MOST_TURNS = 3
_EXAMPLE = (
    "Write for example (YXl) 35.25 or (YXwl) 21.93/33.93: thickness (part Z), length (part X), "
    "then the edges turned about."
)
_PAIRS = ("ZX", "YX", "XY", "ZY", "YZ", "XZ")
_SAME = 1e-13
"""Entries of a rotation this near are the same: the least turns that still show."""


@dataclass(frozen=True)
class Cut:
    """A rotated cut.

    Attributes
    ----------
    thickness, length : str
        Crystal axis X, Y or Z along the edge before any turn.
    edges : str
        Up to three of l, w, t: the edges turned about, in order.
    angles : tuple of float
        Degrees, one for each of `edges`.
    """

    thickness: str
    length: str
    edges: str = ""
    angles: tuple[float, ...] = ()

    @property
    def text(self) -> str:
        """The cut as printed, "(YXwl) 21.93/33.93"."""
        angles = "/".join(number_text(angle) for angle in self.angles)
        return f"({self.thickness}{self.length}{self.edges}) {angles}".strip()


def parse_cut(text: str) -> Cut:
    """Read rotated-cut notation.

    Parameters
    ----------
    text : str
        Letters in parentheses, then one angle for each turn, apart by "/", spaces or
        commas. Degree signs and minutes (35°15′) are read. Case does not matter.

    Raises
    ------
    InputError
        For unknown or repeated letters, or a number of angles that is not that of turns.
    """
    match = re.fullmatch(r"\(\s*([A-Za-z\s]*)\)(.*)", plain_signs(text), re.DOTALL)
    if match is None:
        raise InputError(f"'{text}' is not a cut.", _EXAMPLE)
    letters = "".join(match[1].split())
    thickness, length = _read_plate(letters[:2].upper(), text)
    edges = _read_edges(letters[2:].lower(), text)
    angles = read_numbers(match[2], separators=",;/")
    if len(angles) != len(edges):
        raise InputError(
            f"'{text}' names {_counted(len(edges), 'turn')} ({edges or 'none'}) but gives"
            f" {_counted(len(angles), 'angle')}.",
            "Give one angle for each turn. " + _EXAMPLE,
        )
    return Cut(thickness, length, edges, angles)


def _counted(number: int, noun: str) -> str:
    return f"{number} {noun}{'' if number == 1 else 's'}"


def _read_plate(letters: str, text: str) -> tuple[str, str]:
    if len(letters) < 2:
        raise InputError(
            f"'{text}' must begin with two crystal axes: that of the thickness and that of"
            " the length.",
            _EXAMPLE,
        )
    for letter in letters:
        if letter not in AXES:
            raise InputError(
                f"'{letter}' in '{text}' is no crystal axis: the first two letters are X, Y"
                " or Z.",
                _EXAMPLE,
            )
    if letters[0] == letters[1]:
        raise InputError(
            f"'{text}' puts thickness and length along the same axis {letters[0]}.",
            "The first two letters must differ.",
        )
    return letters[0], letters[1]


def _read_edges(letters: str, text: str) -> str:
    for letter in letters:
        if letter not in EDGES:
            raise InputError(
                f"'{letter}' in '{text}' is no edge: after the first two letters come l"
                " (length), w (width) or t (thickness).",
                _EXAMPLE,
            )
    if len(letters) > MOST_TURNS:
        raise InputError(f"'{text}' names {len(letters)} turns; at most three are used.")
    return letters


def _edge_axes(thickness: str, length: str) -> dict[str, int]:
    """Return the crystal axis, 0 to 2, along which each edge starts."""
    t, l = AXES.index(thickness), AXES.index(length)  # noqa: E741 - the standard's letter
    return {"t": t, "l": l, "w": 3 - t - l}


def cut_edges(cut: Cut) -> dict[str, FloatArray]:
    """Return the unit vectors of the edges l, w, t in crystal axes."""
    axes = _edge_axes(cut.thickness, cut.length)
    motion = turns_about([axes[edge] for edge in cut.edges], cut.angles)
    return {edge: motion[:, axes[edge]] for edge in EDGES}


def cut_rotation(cut: Cut) -> FloatArray:
    """Return R, shape (3, 3): rows part X = l, Y = t × l, Z = t in crystal axes."""
    edges = cut_edges(cut)
    return np.array([edges["l"], np.cross(edges["t"], edges["l"]), edges["t"]]) + 0.0


def cut_for(rotation: FloatArray) -> Cut:
    """Return a cut with this rotation: fewest turns, then least turning in all.

    Parameters
    ----------
    rotation : ndarray, shape (3, 3)
        Rows X, Y, Z of the part in crystal axes. Three turns reach any, and are then taken
        from the plate that needs the least turn; angles are given to 1e-12 degree.
    """
    # R = P Mᵀ, with P the plate before any turn and M the motion of its edges.
    motions = {pair: rotation.T @ plate for pair, plate in _plates().items()}
    for turns in range(MOST_TURNS):
        found = list(_candidates(motions, turns))
        if found:
            return min(found, key=lambda cut: round(sum(abs(a) for a in cut.angles), 6))
    pair = max(motions, key=lambda pair: float(np.trace(motions[pair])))
    return _cut(pair, "wlt", motions[pair])


@lru_cache(maxsize=1)
def _plates() -> dict[str, FloatArray]:
    """Return the rotation of each plate before any turn."""
    return {pair: cut_rotation(Cut(pair[0], pair[1])) for pair in _PAIRS}


def _candidates(motions: dict[str, FloatArray], turns: int) -> Iterator[Cut]:
    """Yield the cuts that reach the rotation with so many turns, at most two.

    Turns about the axes i, then j (already turned) are those that keep the j axis at right
    angles to where i was; one turn keeps its axis; no turn keeps them all.
    """
    for pair, motion in motions.items():
        off = np.abs(motion - np.eye(3))
        axes = _edge_axes(*pair)
        for edges in itertools.permutations(EDGES, turns):
            order = [axes[edge] for edge in edges]
            if turns == 0:
                reached = off.max() < _SAME
            elif turns == 1:
                reached = off[:, order[0]].max() < _SAME
            else:
                reached = off[order[0], order[1]] < _SAME
            if reached:
                yield _cut(pair, "".join(edges), motion)


def _cut(pair: str, edges: str, motion: FloatArray) -> Cut:
    axes = _edge_axes(*pair)
    angles = turn_angles(motion, [axes[edge] for edge in edges]) if edges else ()
    return Cut(pair[0], pair[1], edges, tuple(round(angle, 12) + 0.0 for angle in angles))
