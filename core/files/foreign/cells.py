"""Cells of a pasted table: numbers with their uncertainties, names of constants, headings.

Here text becomes rows of numbers and nothing is yet known of elasticity: not which constant
a cell is, nor its unit. Every fault names its line.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

from core.errors import InputError
from core.numbers import parse_number, shortened
from core.tensor.notation import parse_rows

LONGEST_TEXT = 100_000  # characters; a table with uncertainties has some hundreds

_LARGEST_NUMBER = 1e30  # diamond is 1e13 in dyn/cm²

Cell = tuple[int, int]


@dataclass(frozen=True)
class Number:
    """A value, and its standard uncertainty where one is written."""

    value: float
    sigma: float | None = None


@dataclass(frozen=True)
class Row:
    """One row of numbers.

    Attributes
    ----------
    line : int
        In the text, from 1.
    cells : tuple of Number or None
        None where the cell is empty or says "sym.".
    """

    line: int
    cells: tuple[Number | None, ...]


@dataclass(frozen=True)
class Named:
    """A number that carries the name of its constant.

    Attributes
    ----------
    letter : "C" or "S"
    cell : (int, int)
        Row and column from 0, as named: C21 is (1, 0).
    number : Number
    line : int
    """

    letter: str
    cell: Cell
    number: Number
    line: int


@dataclass(frozen=True)
class TableText:
    """What a text holds.

    Attributes
    ----------
    rows : tuple of Row
    named : tuple of Named
        Either these or `rows`, never both.
    headings, comments : tuple of (int, str)
        Lines without data, with their numbers; hints are sought in both.
    stray : tuple of str
        What stands beside the numbers of data lines: units in lists.
    order : str
        The order of rows as a heading or the labels of the rows give it; or empty.
    """

    rows: tuple[Row, ...]
    named: tuple[Named, ...]
    headings: tuple[tuple[int, str], ...]
    comments: tuple[tuple[int, str], ...]
    stray: tuple[str, ...] = ()
    order: str = ""

    @property
    def words(self) -> list[tuple[int, str]]:
        """Headings and comments in the order of their lines."""
        return sorted([*self.headings, *self.comments])


_COMMENT = re.compile(r"\s*(?:#|(?<!\\)%|!|//)\s*(.*)")
_HEAD = re.compile(r"\s*Stiffness, [^;]+; rows (?:\d\d ?){6}\s*")
_LATEX: tuple[tuple[re.Pattern[str], str], ...] = tuple(
    (re.compile(pattern), replacement)
    for pattern, replacement in (
        (r"\$-\$|\{-\}", "-"),
        (r"\\(?:begin|end)\s*\{[^}]*\}(?:\[[^\]]*\])?(?:\{[^}]*\})?", " "),
        (r"\\(?:hline|toprule|midrule|bottomrule|left|right|[bB]igg?[lr]?)(?![A-Za-z])", " "),
        (r"\\(?:caption|centering|footnotesize|small)(?![A-Za-z])", " "),
        (r"\\cline\s*\{[^}]*\}|\\phantom\s*\{[^}]*\}", " "),
        (r"\\(?:num|mathrm|mathit|text|textbf|mathbf|boldsymbol)\s*\{([^}]*)\}", r"\1"),
        (r"\\pm(?![A-Za-z])", "±"),
        (r"\\times(?![A-Za-z])", "×"),
        (r"\\(?:cdots?|ldots|dots)(?![A-Za-z])", " · "),
        (r"\\(?:quad|qquad)(?![A-Za-z])|\\[,;:! ]|~|\$", " "),
    )
)
_WRAPPERS = re.compile(
    r"(?:[A-Za-z_][\w.]*\s*:?=\s*)?(?:[\w.]*(?:array|matrix)\s*\(\s*)?(?=[\[({])", re.IGNORECASE
)
_LATEX_ROW_ENDS = re.compile(r"\\\\(?:\[[^\]]*\])?")
_ROW_ENDS = re.compile(r"[\]})]\s*[,;]?\s*(?=[\[{(])")
_BLANKS = {"", "sym", "sym.", "symm", "symm.", "symmetric", "·", ".", "..", "...", "…", "—",
           "-", "--", "*"}
_SEPARATED = re.compile(r"[\s;&|]+")
_NUMBERLIKE = re.compile(r"[(+-]*\.?\d")
_NAME = re.compile(
    r"([CcSs])(?:\^\{?[A-Z]\}?)?\s*_?\s*\{?\s*([1-6])\s*,?\s*([1-6])\s*\}?"
    r"(?:\s*\^\s*\{?[A-Z]\}?)?(?![\d.])"
)
_NO_NAME = re.compile(
    r"(?<![A-Za-z0-9_])(?P<name>[CcSs]_?\{?\d{2,}\}?)\s*[=:≈]\s*[(+-]?\.?\d"
    r"|^\s*(?P<first>[CcSs]_?\{?\d{2,}\}?)[\s,;|&]+[(+-]?\.?\d"
)
_LONG_BLANK = re.compile(r"([^\S\n]{64})[^\S\n]+")  # patterns would try each blank anew
_RULE = re.compile(r"[\s|:+-]*-{3,}[\s|:+-]*")  # between the head and the body of a table
_SUBSCRIPTS = str.maketrans("₁₂₃₄₅₆", "123456")
_LABEL = re.compile(r"[xyz]{2}|[XYZ]{2}")
_WITH_SIGMA = re.compile(
    r"\(?(?P<value>[^±()]+?)(?:\((?P<last>[^()]*)\))?(?:±(?P<sigma>[^±()]+))?\)?"
    r"(?P<exponent>(?<=\))[eEdD][+-]?\d+)?"
)


def read_cells(text: str, where: str = "") -> TableText:
    r"""Return the rows of numbers, or the named constants, that a text holds.

    Comment lines start with #, %, ! or //. Cells stand apart by blanks, tabs, commas,
    semicolons, & or |; rows by line ends, by \\\\, or by the brackets of nested lists.

    Raises
    ------
    InputError
        For a text too long, one without numbers, and a line that is no part of a table.
    """
    if len(text) > LONGEST_TEXT:
        raise InputError(f"The text has {len(text):,} characters; a table has some hundreds.",
                         where=where)
    pieces, comments = _pieces(headed_block(text))
    _refuse_false_names(pieces, where)
    if any(_names_value(piece) for _, piece in pieces):
        table = _named_text(pieces, where)
    else:
        table = _named_columns(pieces, where) or _block_text(pieces, where)
    return replace(table, comments=tuple(comments))


def headed_block(text: str) -> str:
    """Return the text with only the stiffnesses of a page that gives several tables.

    Such are the pages of `tricline rotate` and `recover`: "Stiffness, GPa; rows 11 22 …" and
    six rows below it. The other lines become empty, so that lines keep their numbers.
    """
    lines = text.splitlines()
    heads = [k for k, line in enumerate(lines) if _HEAD.fullmatch(line)]
    if len(heads) != 1:
        return text
    kept = range(heads[0], heads[0] + 7)
    return "\n".join(
        line if k in kept or _COMMENT.match(line) else "" for k, line in enumerate(lines)
    )


def place(where: str, line: int) -> str:
    """Return a line of a text as the `where` of an `InputError`."""
    return f"{where}, line {line}" if where else f"line {line}"


# ----------------------------------------------------------------- lines and pieces
def _pieces(text: str) -> tuple[list[tuple[int, str]], list[tuple[int, str]]]:
    """Return what may be data, row by row, and the comments, each with its line."""
    plain = text.replace("\N{NO-BREAK SPACE}", " ").replace("\ufeff", "")
    plain = plain.replace("\N{MINUS SIGN}", "-").replace("\N{EN DASH}", "-")
    plain = re.sub(r"\+/-|\+-", "±", plain).translate(_SUBSCRIPTS)
    plain = _LONG_BLANK.sub(r"\1", plain)
    pieces, comments = [], []
    for line, content in enumerate(plain.splitlines(), start=1):
        data = "" if _RULE.fullmatch(content) else _without_frame(content)
        comment = _COMMENT.search(content)
        if comment:
            data = data[: comment.start()]
            comments.append((line, comment.group(1).strip()))
        pieces += [(line, part) for part in _row_parts(data) if part.strip(" ,;")]
    return pieces, comments


def _without_frame(content: str) -> str:
    """Return a line without the bars at both its ends: "| 1 | 2 |" is "1 | 2"."""
    bare = content.strip()
    framed = len(bare) > 2 and bare.startswith("|") and bare.endswith("|")
    return bare[1:-1].replace("**", "") if framed else content


def _row_parts(content: str) -> list[str]:
    """Split a line where a row ends in it, and drop brackets and typesetting."""
    row = content
    if "\\" in row or "$" in row or "~" in row:
        row = "\n".join(_without_latex(part) for part in _LATEX_ROW_ENDS.split(row))
    elif "[" in row or "{" in row or "((" in row:
        row = "\n".join(_ROW_ENDS.split(_WRAPPERS.sub("", row, count=1)))
    parts = []
    for part in row.split("\n"):
        cells = part.split(";")
        has_rows = any(len(re.split(r",\s+|\s+", cell.strip())) > 1 for cell in cells)
        parts += cells if has_rows and not _names_value(part) else [part]
    return [_tidy(part) for part in parts]


def _without_latex(part: str) -> str:
    for pattern, replacement in _LATEX if part else ():
        part = pattern.sub(replacement, part)
    return part


def _tidy(part: str) -> str:
    """Return a row without its brackets, each uncertainty joined to its number."""
    row = re.sub(r"\s*±\s*", "±", part.strip(" "))
    row = re.sub(r"(\d)[ \t]+\((\d[\d.,]*)\)", r"\1(\2)", row)
    if not _NAME.search(row):
        row = re.sub(r"[\[\]{}]", " ", row).strip(" ")
    opened, closed = row.count("("), row.count(")")
    if opened > closed and row.startswith("("):
        row = row[1:]
    if closed > opened and row.rstrip(" ,").endswith(")"):
        row = row.rstrip(" ,")[: opened - closed]
    if re.fullmatch(r"\([^()]*[\s,;][^()]*\),?", row):
        row = row.rstrip(",")[1:-1]
    return row


# --------------------------------------------------------------------- named lists
def _names_value(piece: str) -> bool:
    """Return whether a piece gives a constant by name: "C11 = 168.4", "C_{11} 168.4(3)"."""
    found = _NAME.search(piece)
    if found is None:
        return False
    before, after = piece[: found.start()], piece[found.end():]
    starts = not before or not (before[-1].isalnum() or before[-1] == "_")
    return starts and re.match(r"\s*[=:≈]|\s*[\s,;|&]\s*[(+-]?\.?\d", after) is not None


def _refuse_false_names(pieces: list[tuple[int, str]], where: str) -> None:
    """Refuse C99 = 3: read as words, a slip in a name would lose a constant unseen."""
    for line, piece in pieces:
        for found in _NO_NAME.finditer(piece):
            name = found["name"] or found["first"]
            if _NAME.fullmatch(name) is None:
                raise InputError(f"“{name}” is the name of no constant.",
                                 "The two indices of a name run from 1 to 6: C11 to C66.",
                                 place(where, line))


def _named_text(pieces: list[tuple[int, str]], where: str) -> TableText:
    named: list[Named] = []
    headings, stray = [], []
    for line, piece in pieces:
        if _names_value(piece):
            found, rest = _named_items(piece, line, where)
            named += found
            stray += rest
        elif _is_heading(piece):
            headings.append((line, piece))
        else:
            raise InputError(
                f"“{shortened(piece)}” stands in a list of named constants without a name.",
                "Write for example C11 = 168.4.", place(where, line))
    return TableText((), tuple(named), tuple(headings), (), tuple(stray))


def _named_items(piece: str, line: int, where: str) -> tuple[list[Named], list[str]]:
    """Return the constants of a line such as "C11 = C22 = 168.4(3) GPa, C12 = 121.4"."""
    found: list[Named] = []
    stray: list[str] = []
    names: list[tuple[str, Cell]] = []
    rest = piece
    while rest := rest.lstrip(" \t=:≈,;&|"):
        name = _NAME.match(rest)
        if name is not None:
            letter, row, column = name.groups()
            names.append((letter.upper(), (int(row) - 1, int(column) - 1)))
            rest = rest[name.end():]
            continue
        word = re.split(r"[\s;&|]|,(?!\d)", rest, maxsplit=1)[0]
        rest = rest[len(word):]
        if names:
            number = read_value(word, place(where, line))
            found += [Named(letter, cell, number, line) for letter, cell in names]
            names = []
        elif _NUMBERLIKE.match(word) and not re.match(r"1/|10\^|1e", word):
            raise InputError(f"“{shortened(word)}” follows no name of a constant.",
                             "Write for example C11 = 168.4.", place(where, line))
        else:
            stray.append(word)
    if names:
        letter, (i, j) = names[-1]
        raise InputError(f"No number follows {letter}{i + 1}{j + 1}.",
                         where=place(where, line))
    return found, [" ".join(stray)] if stray else []


def _named_columns(pieces: list[tuple[int, str]], where: str) -> TableText | None:
    """Return named constants from a line of names above a line of numbers; None if not so."""
    for index, (_, piece) in enumerate(pieces[:-1]):
        words = [word for word in re.split(r"[\s;&|,]+", piece) if word]
        names = [_NAME.fullmatch(word) for word in words]
        if len(names) < 2 or None in names:
            continue
        line, values = pieces[index + 1]
        cells = _flexible_cells([values])[0]
        if len(cells) != len(names):
            raise InputError(f"{len(names)} names stand above {len(cells)} numbers.",
                             where=place(where, line))
        named = tuple(
            Named(name.group(1).upper(), (int(name.group(2)) - 1, int(name.group(3)) - 1),
                  read_value(cell, place(where, line)), line)
            for name, cell in zip(names, cells, strict=True) if name is not None
        )
        others = [*pieces[:index], *pieces[index + 2:]]
        for other, words_there in others:
            if not _is_heading(words_there):
                raise InputError("Below the names of constants one row of numbers was "
                                 "expected.", where=place(where, other))
        return TableText((), named, tuple(others), ())
    return None


# -------------------------------------------------------------------------- blocks
def _block_text(pieces: list[tuple[int, str]], where: str) -> TableText:
    body, headings = _body(pieces, where)
    table = _split([piece for _, piece in body])
    lines = [line for line, _ in body]
    order, table, lines = _without_labels(table, lines)
    rows = []
    for line, words in zip(lines, table, strict=True):
        cells = tuple(
            None if word.lower() in _BLANKS
            else read_value(word, f"{place(where, line)}, number {k}")
            for k, word in enumerate(words, start=1)
        )
        rows.append(Row(line, cells))
    return TableText(tuple(rows), (), tuple(headings), (), order=order)


def _body(
    pieces: list[tuple[int, str]], where: str
) -> tuple[list[tuple[int, str]], list[tuple[int, str]]]:
    """Return the pieces from the first row of numbers to the last, and the others."""
    is_heading = [_is_heading(piece) for _, piece in pieces]
    if all(is_heading):
        begins = [f" Line {line} reads “{shortened(words, 40)}”." for line, words in pieces[:1]]
        raise InputError(f"There are no numbers in the text.{''.join(begins)}",
                         "A 6×6, a triangle, 21 numbers or a list such as C11 = 168.4 was "
                         "expected.", where)
    first = is_heading.index(False)
    last = len(pieces) - is_heading[::-1].index(False)
    body = []
    for (line, piece), heading in zip(pieces[first:last], is_heading[first:last], strict=True):
        if not heading:
            body.append((line, piece))
        elif piece.strip(" \t&,;|").lower() not in _BLANKS:
            raise InputError(f"“{shortened(piece, 40)}” stands between the rows of numbers and "
                             "is none itself.", where=place(where, line))
    return body, [*pieces[:first], *pieces[last:]]


def _is_heading(piece: str) -> bool:
    """Return whether a line is words rather than numbers: as many words, or no number."""
    words = [word for word in re.split(r"[\s;&|,]+", piece) if word]
    numbers = sum(_NUMBERLIKE.match(word) is not None for word in words)
    others = sum(
        _NUMBERLIKE.match(word) is None and word.lower() not in _BLANKS
        and _LABEL.fullmatch(word) is None
        for word in words
    )
    if numbers == 0:
        return not all(_LABEL.fullmatch(word) for word in words)
    return others >= numbers


def _split(pieces: list[str]) -> list[list[str]]:
    """Split rows into cells, keeping empty cells where every row has six."""
    if len(pieces) > 1:
        for separator in "&\t;|,":
            table = [_exact_cells(piece, separator) for piece in pieces]
            if all(row is not None for row in table):
                return [row for row in table if row is not None]
    return _flexible_cells(pieces)


def _exact_cells(piece: str, separator: str) -> list[str] | None:
    """Return the six cells of a row, some perhaps empty; None when it is not made so."""
    cells = [cell.strip() for cell in piece.split(separator)]
    while len(cells) > 6 and not cells[-1]:
        cells.pop()
    if len(cells) not in (6, 7) or any(re.search(r"\s", cell) for cell in cells):
        return None
    return cells


def _flexible_cells(pieces: list[str]) -> list[list[str]]:
    """Split rows of any length at blanks, and at commas where they are no decimal commas.

    A comma before a blank always separates. One between digits is taken for a decimal comma
    only when the text has no decimal point and something else that separates.
    """
    apart = [re.sub(r",(?=\s|$)", " ", piece) for piece in pieces]
    whole = " ".join(apart)
    is_apart = any(len(_SEPARATED.split(piece.strip())) > 1 for piece in apart)
    if "." in whole or not is_apart:
        apart = [piece.replace(",", " ") if _keeps_number(piece) else piece for piece in apart]
    return [[word for word in _SEPARATED.split(piece) if word] for piece in apart]


def _keeps_number(piece: str) -> bool:
    """Return whether the commas of a row separate: always, but in a single number "168,4"."""
    return piece.count(",") > 1 or "." in piece or re.search(r"\s", piece.strip()) is not None


def _without_labels(
    table: list[list[str]], lines: list[int]
) -> tuple[str, list[list[str]], list[int]]:
    """Return the order of rows that labels give, and the table without the labels."""
    order = ""
    if len(table) > 1:
        found = _labels(table[0] if len(table[0]) == 6 else table[0][1:])
        if found is not None:
            order, table, lines = found, table[1:], lines[1:]
    if len(table) == 6 and all(len(row) > 1 for row in table):
        found = _labels([row[0] for row in table])
        lengths = [len(row) - 1 for row in table]
        if found is not None and lengths in ([6] * 6, [6, 5, 4, 3, 2, 1], [1, 2, 3, 4, 5, 6]):
            order, table = order or found, [row[1:] for row in table]
    return order, table, lines


def _labels(words: list[str]) -> str | None:
    """Return the order that six labels give ("" for 1 to 6); None when they are no labels."""
    if words == ["1", "2", "3", "4", "5", "6"]:
        return ""
    if len(words) != 6 or not all(re.fullmatch(r"[1-3xyzXYZ]{2}", word) for word in words):
        return None
    try:
        parse_rows(" ".join(words))
    except InputError:
        return None
    return " ".join(words)


# ------------------------------------------------------------------------- numbers
def read_value(word: str, where: str = "") -> Number:
    """Return a number such as 86.1, 86.1(4), 86.1(1.2), 86.1±0.4 or (8.61±0.04)e1."""
    shape = _WITH_SIGMA.fullmatch(word)
    if shape is None:
        raise InputError(f"“{shortened(word)}” is not a number.", where=where)
    power = shape["exponent"] or ""
    value = parse_number(shape["value"] + power, where)
    if abs(value) > _LARGEST_NUMBER:
        raise InputError(f"“{shortened(word)}” is too large for a constant in any unit.",
                         where=where)
    if shape["sigma"]:
        return Number(value, parse_number(shape["sigma"] + power, where))
    if shape["last"] is None:
        return Number(value)
    sigma = parse_number(shape["last"], where)
    if re.fullmatch(r"\d+", shape["last"]):
        mantissa, _, exponent = re.sub("[dDE]", "e", shape["value"] + power).partition("e")
        decimals = len(re.split("[.,]", mantissa)[1]) if re.search("[.,]", mantissa) else 0
        sigma = float(f"{shape['last']}e{int(exponent or 0) - decimals}")
    elif power:
        sigma *= float(f"1e{power[1:]}")
    return Number(value, sigma)


def read_number_rows(text: str, where: str = "") -> list[list[float]]:
    """Return the numbers of every line that is no comment, of any count, without meaning.

    Raises
    ------
    InputError
        Naming the line and the place in it of what is not a number.
    """
    if len(text) > LONGEST_TEXT:
        raise InputError(f"What was pasted has {len(text):,} characters; a block of constants "
                         "has some hundreds.", where=where)
    pieces, _ = _pieces(text)
    return [
        [read_value(word, f"{place(where, line)}, number {k}").value
         for k, word in enumerate(words, start=1)]
        for (line, _), words in zip(pieces, _flexible_cells([piece for _, piece in pieces]),
                                    strict=True)
    ]
