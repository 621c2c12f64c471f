"""Reading and writing index triples and lists of numbers as text. No cell is known here.

What the indices mean in space belongs to `directions`; what a list of angles means belongs
to `orientation` and `cuts`.
"""

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass

from core.errors import InputError

CLOSING = {"[": "]", "(": ")", "⟨": "⟩", "{": "}"}
"""Brackets: [u v w] a direction, (h k l) a plane, ⟨u v w⟩ and {h k l} their families."""

_BRACKET_SPELLINGS = str.maketrans({"<": "⟨", ">": "⟩", "〈": "⟨", "〉": "⟩"})
_SIGN_SPELLINGS = str.maketrans({"−": "-", "–": "-", "﹣": "-", "－": "-", "＋": "+"})
_OVERBARS = "\u0304\u0305"
_NUMBER = r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?"
_BARRED = re.compile(rf"(?:\d[{_OVERBARS}])+")
_COMPACT_INDEX = re.compile(rf"\d[{_OVERBARS}]|[+-]?\d")
_MINUTES = re.compile(
    r"([+-]?)(\d+)\s*°\s*(\d+(?:\.\d*)?)\s*['′](?:\s*(\d+(?:\.\d*)?)\s*[\"″])?"
)


@dataclass(frozen=True)
class Indices:
    """Three or four indices with the bracket that says what they are.

    Attributes
    ----------
    values : tuple of float
        As written; not reduced, not necessarily whole.
    bracket : str
        The opening bracket, one of the keys of `CLOSING`.
    """

    values: tuple[float, ...]
    bracket: str

    @property
    def text(self) -> str:
        """The indices as printed: "[1 -1 0]", with ASCII minus signs."""
        inner = " ".join(number_text(value) for value in self.values)
        return f"{self.bracket}{inner}{CLOSING[self.bracket]}"

    @property
    def is_plane(self) -> bool:
        """Whether the bracket names a plane or a family of planes."""
        return self.bracket in "({"

    def with_values(self, values: Sequence[float]) -> "Indices":
        """Return other indices in the same bracket."""
        return Indices(tuple(float(value) for value in values), self.bracket)


def plain_signs(text: str) -> str:
    """Return the text with every sort of minus, plus and angle bracket in one spelling."""
    return text.translate(_SIGN_SPELLINGS).translate(_BRACKET_SPELLINGS).strip()


def number_text(value: float) -> str:
    """Return the shortest text that reads back as exactly this number."""
    if value == int(value) and abs(value) < 1e15:
        return str(int(value))
    return repr(float(value))


def read_number(token: str) -> float | None:
    """Return the finite number that a token spells, or None."""
    if not re.fullmatch(_NUMBER, token):
        return None
    value = float(token)
    return value if math.isfinite(value) else None


def read_indices(text: str) -> Indices:
    """Read "[1 1 0]", "[1-10]", "(1 0 -1 2)", "⟨1 1̄ 0⟩" or "{1 0 0}".

    Parameters
    ----------
    text : str
        Three or four numbers in one pair of brackets, apart by spaces or commas. Single
        digits may be run together. A digit with an overbar is negative.

    Returns
    -------
    Indices
        In the order written.

    Raises
    ------
    InputError
        If the brackets, the numbers or their count cannot be read, or all are zero.
    """
    plain = plain_signs(text)
    bracket = plain[:1]
    if bracket not in CLOSING:
        raise InputError(
            f"'{text}' has no bracket in front.",
            "Write a direction as [u v w] and a plane as (h k l).",
        )
    if not plain.endswith(CLOSING[bracket]):
        raise InputError(f"'{text}' must end with '{CLOSING[bracket]}'.")
    values = _read_index_values(plain[1:-1], text)
    if not any(values):
        what = "plane" if bracket in "({" else "direction"
        raise InputError(f"{text} names no {what}: all its indices are zero.")
    return Indices(values, bracket)


def _read_index_values(inner: str, text: str) -> tuple[float, ...]:
    """Return the numbers between the brackets; `text` is only for the sentence."""
    tokens = [token for token in re.split(r"[\s,;]+", inner) if token]
    if len(tokens) == 1:
        tokens = _split_compact(tokens[0], text)
    values = [_read_index(token, text) for token in tokens]
    if len(values) not in (3, 4):
        raise InputError(
            f"{text} has {len(values)} {'index' if len(values) == 1 else 'indices'};"
            " three or four are needed.",
            "Put a space between indices.",
        )
    return tuple(values)


def _split_compact(token: str, text: str) -> list[str]:
    """Cut "1-10" into single digits with their signs."""
    parts = _COMPACT_INDEX.findall(token)
    if "".join(parts) != token or len(parts) not in (3, 4):
        raise InputError(
            f"The indices in {text} cannot be told apart.",
            "Put a space between them: [1 -1 0]. Only three or four single digits may be"
            " run together.",
        )
    return parts


def _read_index(token: str, text: str) -> float:
    if _BARRED.fullmatch(token):
        token = "-" + re.sub(f"[{_OVERBARS}]", "", token)
    value = read_number(token)
    if value is None:
        raise InputError(
            f"'{token}' in {text} is not a number.", "Put a space between indices: [1 -1 0]."
        )
    return value


def read_numbers(text: str, separators: str = ",;") -> tuple[float, ...]:
    """Read a list of numbers apart by spaces or by any of the separators.

    Parameters
    ----------
    text : str
        Plain numbers; angles may carry a degree sign, or be written 35°15′.
    separators : str
        Characters that may stand between numbers beside white space.

    Raises
    ------
    InputError
        Naming the first piece that is not a finite number.
    """
    plain = _MINUTES.sub(_decimal_degrees, plain_signs(text)).replace("°", " ")
    tokens = [token for token in re.split(rf"[\s{re.escape(separators)}]+", plain) if token]
    values = []
    for token in tokens:
        value = read_number(token)
        if value is None:
            raise InputError(f"'{token}' is not a number.", "Write decimals with a point.")
        values.append(value)
    return tuple(values)


def _decimal_degrees(match: re.Match[str]) -> str:
    """Turn a matched 35°15′ into decimal degrees; the sign covers all its pieces."""
    sign, degrees, minutes, seconds = match.groups()
    size = float(degrees) + float(minutes) / 60 + float(seconds or 0) / 3600
    return f" {sign}{size!r} "


def three_from_four(indices: Indices) -> Indices:
    """Return three indices for four-index ones; three pass unchanged.

    With a3 = −a1 − a2, [u v t w] is [u−t, v−t, w] and (h k i l) is (h k l).

    Raises
    ------
    InputError
        If the third of four is not minus the sum of the first two.
    """
    if len(indices.values) == 3:
        return indices
    first, second, third, fourth = indices.values
    needed = -(first + second)
    if abs(third - needed) > 1e-9 * max(abs(first), abs(second), abs(third)):
        right = indices.with_values((first, second, needed, fourth))
        raise InputError(
            f"{indices.text}: the third index must be minus the sum of the first two,"
            f" here {number_text(needed)}.",
            f"Write {right.text}, or three indices.",
        )
    if indices.is_plane:
        return indices.with_values((first, second, fourth))
    return indices.with_values((first - third, second - third, fourth))


def four_from_three(indices: Indices) -> Indices:
    """Return whole three-index values as the smallest whole four-index ones."""
    first, second, third = (round(value) for value in indices.values)
    if indices.is_plane:
        return indices.with_values((first, second, -(first + second), third))
    four = (2 * first - second, 2 * second - first, -(first + second), 3 * third)
    divisor = math.gcd(*four)
    return indices.with_values([value // divisor for value in four])
