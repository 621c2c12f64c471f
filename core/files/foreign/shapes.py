"""Where the numbers of a foreign table belong: whole tables, triangles, rows and lists.

A table whose triangles differ is made symmetric here, and a question is asked about it.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from core.arrays import FloatArray
from core.errors import InputError
from core.files.foreign.cells import Number, Row, TableText, place
from core.files.foreign.guess import Guess, RawTable, choose

SYMMETRY_CHOICES = ("upper", "lower", "mean")
_SYMMETRIC = 1e-6  # of the largest cell
_SHAPES = {
    "full 6×6": (6,) * 6,
    "upper triangle": (6, 5, 4, 3, 2, 1),
    "lower triangle": (1, 2, 3, 4, 5, 6),
}
_IN_A_ROW = ("21 along the upper triangle", "21 along the lower triangle")


def read_shape(table: TableText, chosen: str | None, where: str) -> tuple[RawTable, Guess]:
    """Return the numbers of a table in their cells, and the shape that was seen in them."""
    if table.named:
        return _list_table(table, where), choose(
            Guess("shape", "list", "Every number carries the name of its constant.", True,
                  ("list",)), chosen)
    guess = choose(_shape(table.rows, where), chosen)
    return _placed(table.rows, guess.value), guess


def _shape(rows: tuple[Row, ...], where: str) -> Guess:
    compact = [sum(cell is not None for cell in row.cells) for row in rows]
    lengths = tuple(len(row.cells) for row in rows)
    count = sum(compact)
    if lengths == _SHAPES["full 6×6"]:
        return _full_shape(rows)
    for name in ("upper triangle", "lower triangle"):
        if tuple(compact) == _SHAPES[name]:
            return Guess("shape", name, f"The rows have {_counts(compact)} numbers.", True,
                         (name,))
    if count == 21 and len(rows) <= 2:
        return _triangle_in_a_row(rows)
    if count == 36 and all(cell is not None for row in rows for cell in row.cells):
        return Guess("shape", "36 in a row", "36 numbers are taken as six rows of six.", False,
                     ("36 in a row",))
    kinds = f"{_counts(compact)}" if len(compact) <= 12 else f"{len(compact)} different"
    odd = next((row.line for row in rows if len(row.cells) != 6), None)
    raise InputError(
        f"{count} {'number' if count == 1 else 'numbers'} in {len(rows)} "
        f"{'row' if len(rows) == 1 else 'rows'} ({kinds}) are no table of constants.",
        "A 6×6, a triangle, 21 numbers or a list such as C11 = 168.4 was expected.",
        place(where, odd) if odd is not None and len(rows) == 6 else where)


def _counts(lengths: Sequence[int]) -> str:
    words = [str(length) for length in lengths]
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"


def _full_shape(rows: tuple[Row, ...]) -> Guess:
    """Return whether six rows of six are a whole table or a triangle with an empty rest."""
    values = _values(rows)
    blank = np.array([[cell is None for cell in row.cells] for row in rows])
    choices = tuple(_SHAPES)
    for name, rest in (("upper triangle", np.tril_indices(6, -1)),
                       ("lower triangle", np.triu_indices(6, 1))):
        mirror = values.T[rest]
        if blank[rest].all():
            return Guess("shape", name, "The other triangle is empty.", True, choices)
        if not values[rest].any() and mirror.any():
            side = "below" if name.startswith("upper") else "above"
            return Guess("shape", name, f"All cells {side} the diagonal are zero or empty and "
                         "those on the other side are not.", False, choices)
    return Guess("shape", "full 6×6", "There are six rows of six numbers.", True, choices)


def _triangle_in_a_row(rows: tuple[Row, ...]) -> Guess:
    """Return along which triangle 21 numbers run: the one that makes a stable crystal."""
    stable = [
        bool(np.linalg.eigvalsh(_mirrored(_placed(rows, name).values))[0] > 0)
        for name in _IN_A_ROW
    ]
    if stable == [False, True]:
        return Guess("shape", _IN_A_ROW[1], "Only along the lower triangle, row by row, do the "
                     "21 numbers make a stable crystal.", False, _IN_A_ROW)
    reason = ("Only along the upper triangle, row by row, do the 21 numbers make a stable "
              "crystal." if stable == [True, False] else
              "21 numbers are taken to run along the upper triangle, row by row.")
    question = ("Do the 21 numbers run along the upper triangle (11 12 … 16 22 …) or along the "
                "lower one (11 21 22 31 …)? Both make a stable crystal."
                if stable == [True, True] and _differ(rows) else "")
    return Guess("shape", _IN_A_ROW[0], reason, False, _IN_A_ROW, question)


def _differ(rows: tuple[Row, ...]) -> bool:
    upper, lower = (_mirrored(_placed(rows, name).values) for name in _IN_A_ROW)
    return not np.array_equal(upper, lower)


def _values(rows: tuple[Row, ...]) -> FloatArray:
    return np.array([[0.0 if cell is None else cell.value for cell in row.cells]
                     for row in rows])


def _placed(rows: tuple[Row, ...], shape: str) -> RawTable:
    """Return the numbers in their cells; a triangle is mirrored."""
    values, sigmas = np.zeros((6, 6)), np.zeros((6, 6))
    cells = [cell for row in rows for cell in row.cells]
    triangle = np.tril_indices(6) if "lower" in shape else np.triu_indices(6)
    is_full = shape in ("full 6×6", "36 in a row")
    if len(cells) == 36:
        places = [(i, j) for i in range(6) for j in range(6)]
    else:
        places = [(int(i), int(j)) for i, j in zip(*triangle, strict=True)]
        cells = [cell for cell in cells if cell is not None]
    wanted = {(int(i), int(j)) for i, j in zip(*triangle, strict=True)}
    for (i, j), cell in zip(places, cells, strict=True):
        if not is_full and (i, j) not in wanted:
            continue
        number = _mirror_cell(cells, i, j) if cell is None and is_full else cell
        if number is not None:
            values[i, j], sigmas[i, j] = number.value, number.sigma or 0.0
    if is_full:
        return RawTable(values, sigmas)
    return RawTable(_mirrored(values), _mirrored(sigmas))


def _mirror_cell(cells: Sequence[Number | None], i: int, j: int) -> Number | None:
    """Return what an empty cell of a whole table stands for: its mirror image, else nothing."""
    return cells[6 * j + i]


def _mirrored(triangle: FloatArray) -> FloatArray:
    """Return the symmetric table of one triangle, the other being zero."""
    whole: FloatArray = triangle + triangle.T - np.diag(np.diag(triangle))
    is_whole = np.tril(triangle, -1).any() and np.triu(triangle, 1).any()
    return triangle if is_whole else whole


def _list_table(table: TableText, where: str) -> RawTable:
    values, sigmas = np.full((6, 6), np.nan), np.zeros((6, 6))
    letters = {item.letter for item in table.named}
    if len(letters) > 1:
        raise InputError("The list names both stiffnesses (C) and compliances (S).",
                         "Paste one of the two.", where)
    for item in table.named:
        i, j = item.cell
        if np.isfinite(values[i, j]) and values[i, j] != item.number.value:
            raise InputError(
                f"{item.letter}{i + 1}{j + 1} is given twice: {values[i, j]:g} and "
                f"{item.number.value:g}.", where=place(where, item.line))
        values[i, j], sigmas[i, j] = item.number.value, item.number.sigma or 0.0
    mirrored = np.isnan(values) & np.isfinite(values.T)
    return RawTable(np.where(mirrored, values.T, values), np.where(mirrored, sigmas.T, sigmas))


# ------------------------------------------------------------------------ symmetry
def read_symmetry(raw: RawTable, chosen: str | None) -> tuple[RawTable, Guess | None]:
    """Return the table made symmetric, and a question where its triangles differ."""
    values = raw.values
    gap = np.abs(values - values.T)
    largest = float(np.nanmax(np.abs(values))) if np.isfinite(values).any() else 0.0
    if not np.nanmax(gap, initial=0.0) > _SYMMETRIC * largest:
        return RawTable((values + values.T) / 2, np.maximum(raw.sigmas, raw.sigmas.T)), None
    i, j = (int(k) for k in np.unravel_index(np.nanargmax(np.triu(gap)), (6, 6)))
    others = int((np.triu(gap) > _SYMMETRIC * largest).sum()) - 1
    more = f" ({others} more {'pair differs' if others == 1 else 'pairs differ'} less)" if (
        others) else ""
    question = (f"Row {i + 1}, column {j + 1} holds {values[i, j]:.7g} but row {j + 1}, column "
                f"{i + 1} holds {values[j, i]:.7g}{more}. Which is meant: the upper triangle, "
                "the lower one, or the mean?")
    guess = choose(Guess("symmetry", "mean", "The two triangles differ; their mean is shown "
                         "until one is chosen.", False, SYMMETRY_CHOICES, question), chosen)
    return _symmetrised(raw, guess.value), guess


def _symmetrised(raw: RawTable, way: str) -> RawTable:
    if way == "mean":
        sigmas = np.sqrt(raw.sigmas**2 + raw.sigmas.T**2) / 2
        np.fill_diagonal(sigmas, np.diag(raw.sigmas))
        return RawTable((raw.values + raw.values.T) / 2, sigmas)
    upper = np.triu_indices(6)
    values, sigmas = (
        part if way == "upper" else part.T for part in (raw.values, raw.sigmas)
    )
    whole, spread = np.empty((6, 6)), np.empty((6, 6))
    whole[upper], spread[upper] = values[upper], sigmas[upper]
    whole.T[upper], spread.T[upper] = values[upper], sigmas[upper]
    return RawTable(whole, spread)
