"""Foreign tables of constants: 6×6 blocks, triangles and lists as people paste them."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray
from core.errors import InputError
from core.numbers import parse_number, shortened
from core.tensor.notation import from_upper_triangle, to_gpa
from core.tensor.stiffness import Stiffness

LONGEST_TEXT = 1_000_000  # characters; a 6x6 table has some hundreds
_COMMENT = re.compile(r"\s*(#|%|!|//)")
_SEPARATOR = re.compile(r"[\s;&|]+")
_NAMED = re.compile(r"([CcSs])[_{]*([1-6])\s*,?\s*([1-6])\}?\s*[=:]\s*([^\s,;]+)")
_TRIANGLE_UP = [6, 5, 4, 3, 2, 1]
_TRIANGLE_DOWN = [1, 2, 3, 4, 5, 6]


@dataclass(frozen=True, eq=False)
class ForeignTable:
    """A table as read, in our units and order of rows.

    Attributes
    ----------
    stiffness : ndarray, shape (6, 6)
        GPa, Voigt order 11, 22, 33, 23, 13, 12.
    guesses : tuple of str
        Sentences: what was taken for granted, and why.
    """

    stiffness: FloatArray
    guesses: tuple[str, ...]


def read_table(text: str, where: str = "") -> ForeignTable:
    """Return the stiffness that a text table holds, and what was guessed about it.

    Read are a full 6×6, an upper or a lower triangle, 21 numbers along the upper triangle by
    rows, and lists such as ``C11 = 168.4``; comment lines start with #, %, ! or //.

    Raises
    ------
    InputError
        Naming the line that is no part of a table, or the shape that was found.
    """
    if len(text) > LONGEST_TEXT:
        raise InputError(f"The text has {len(text):,} characters; a table has some hundreds.",
                         where=where)
    matrix, guesses = _named_list(text, where) or _block_table(text, where)
    factor_guess = _guess_units(matrix)
    if factor_guess is not None:
        matrix = to_gpa(matrix, factor_guess[0])
        guesses = (*guesses, factor_guess[1])
    else:
        guesses = (*guesses, "values taken as GPa")
    guesses = (*guesses, "rows taken in the order 11 22 33 23 13 12")
    return ForeignTable(Stiffness.from_voigt(matrix).voigt, guesses)


def read_block(text: str, where: str = "") -> list[list[float]]:
    """Return the numbers of a pasted rectangular block, row by row.

    Raises
    ------
    InputError
        Naming the row and the column of what is not a number, or ragged rows.
    """
    rows = _number_rows(text, where)
    if not rows:
        raise InputError("There are no numbers in what was pasted.", where=where)
    lengths = {len(row) for row in rows}
    if len(lengths) != 1:
        raise InputError(
            f"The pasted rows have {', '.join(str(len(row)) for row in rows)} numbers; "
            "rows of one length were expected.", where=where)
    return rows


def _number_rows(text: str, where: str) -> list[list[float]]:
    rows = []
    for number, line in enumerate(text.splitlines(), start=1):
        if not line.strip() or _COMMENT.match(line):
            continue
        rows.append([
            parse_number(word, f"{where}{', ' if where else ''}line {number}, number {k}")
            for k, word in enumerate(_words(line), start=1)
        ])
    return rows


def _words(line: str) -> list[str]:
    """Split a line: at blanks, semicolons, & or |; else at commas."""
    stripped = line.strip().rstrip("\\").strip().strip(";,[](){}")
    words = [word.strip(",[](){}") for word in _SEPARATOR.split(stripped)]
    words = [word for word in words if word]
    if len(words) == 1 and stripped.count(",") > 1:
        words = [word.strip() for word in stripped.split(",")]
    return words


def _block_table(text: str, where: str) -> tuple[FloatArray, tuple[str, ...]]:
    rows = _number_rows(text, where)
    lengths = [len(row) for row in rows]
    numbers = [x for row in rows for x in row]
    if lengths == [6] * 6:
        return np.array(rows), ()
    if lengths == _TRIANGLE_UP:
        return from_upper_triangle(numbers), ("read as the upper triangle, row by row",)
    if lengths == _TRIANGLE_DOWN:
        matrix = np.zeros((6, 6))
        matrix[np.tril_indices(6)] = numbers
        full = matrix + np.tril(matrix, -1).T
        return full, ("read as the lower triangle, row by row",)
    if len(numbers) == 21:
        return from_upper_triangle(numbers), ("21 numbers read along the upper triangle",)
    if len(numbers) == 36:
        return np.array(numbers).reshape(6, 6), ("36 numbers read as six rows of six",)
    raise InputError(
        f"{len(numbers)} numbers in {len(rows)} rows are no table of constants.",
        "A 6×6, a triangle, 21 numbers or a list such as C11 = 168.4 was expected.", where)


def _named_list(text: str, where: str) -> tuple[FloatArray, tuple[str, ...]] | None:
    """Return the matrix of a list ``C11 = …``; None when the text is no such list."""
    found = _NAMED.findall(text)
    if not found:
        return None
    if any(letter in "Ss" for letter, *_ in found):
        raise InputError("The list names compliances (S); stiffnesses (C) were expected.",
                         where=where)
    matrix = np.full((6, 6), np.nan)
    for _, row, column, word in found:
        i, j = sorted((int(row) - 1, int(column) - 1))
        value = parse_number(word, f"{where}{', ' if where else ''}C{row}{column}")
        if np.isfinite(matrix[i, j]) and matrix[i, j] != value:
            raise InputError(
                f"C{i + 1}{j + 1} is given twice: {matrix[i, j]:g} and {shortened(word)}.",
                where=where)
        matrix[i, j] = matrix[j, i] = value
    missing = int(np.isnan(matrix[np.triu_indices(6)]).sum())
    guesses = (f"{missing} constants that the list does not name taken as zero",)
    return np.nan_to_num(matrix), guesses if missing else ()


def _guess_units(matrix: FloatArray) -> tuple[str, str] | None:
    """Return a unit and the reason for it where the size of the numbers speaks against GPa."""
    largest = float(np.abs(matrix).max())
    for unit, low, high in (("Pa", 1e8, 1e13), ("kbar", 3e3, 3e4), ("MPa", 3e4, 1e7),
                            ("Mbar", 0.0, 0.05)):
        if low < largest <= high:
            return unit, f"values taken as {unit}: the largest is {largest:.4g}"
    return None
