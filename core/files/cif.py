"""The unit cell of a CIF file: items `_cell_…` of the core CIF dictionary, and nothing else.

CIF 1.1 (Hall, Allen & Brown 1991, Acta Cryst. A47, 655): tags are case-blind, text fields lie
between lines that begin with a semicolon, "?" is unknown and "." does not apply.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from core.crystal.cell import UnitCell
from core.errors import InputError
from core.numbers import parse_number, shortened

_LENGTHS = ("length_a", "length_b", "length_c")
_ANGLES = ("angle_alpha", "angle_beta", "angle_gamma")
_GROUP_NUMBERS = ("_space_group_it_number", "_symmetry_int_tables_number")
_TOKEN = re.compile(r"'(?:[^']|'(?=\S))*'|\"(?:[^\"]|\"(?=\S))*\"|#.*|\S+")
_VALUE = re.compile(r"([^()]+)(?:\((\d+)\))?")
_LARGEST = 50_000_000  # characters; structures of proteins have some millions

_LAUE_CLASSES = (
    (2, "triclinic"), (15, "monoclinic"), (74, "orthorhombic"), (88, "tetragonal_7"),
    (142, "tetragonal_6"), (148, "trigonal_7"), (167, "trigonal_6"), (194, "hexagonal"),
    (230, "cubic"),
)
"""Last number of the space groups of each class in the International Tables, volume A."""


@dataclass(frozen=True)
class CifCell:
    """The cell of one data block.

    Attributes
    ----------
    block : str
        Its name, without ``data_``.
    cell : UnitCell
    std : tuple of 6 floats
        Standard uncertainties of a, b, c (Å) and α, β, γ (°); 0 where none is written.
    class_key : str or None
        The crystal class of its space group, where the file gives the group's number.
    notes : tuple of str
        What was filled in.
    """

    block: str
    cell: UnitCell
    std: tuple[float, ...]
    class_key: str | None
    notes: tuple[str, ...]


def read_cell(text: str, where: str = "") -> CifCell:
    """Return the unit cell of a CIF file, of the first data block that has one.

    Raises
    ------
    InputError
        When there is no cell, a length is missing or unknown, a value is no number, or the
        cell cannot exist; the item is named.
    """
    if len(text) > _LARGEST:
        raise InputError(f"The file has {len(text):,} characters; no CIF of a crystal has.",
                         where=where)
    blocks = _blocks(text)
    with_cell = [(name, items) for name, items in blocks
                 if any(tag.startswith("_cell_length") for tag in items)]
    if not with_cell:
        what = "no data block of a CIF" if not blocks else "no item _cell_length_a"
        raise InputError(f"There is {what} in the file.",
                         "A CIF with _cell_length_a, _cell_angle_alpha and so on was expected.",
                         where)
    name, items = with_cell[0]
    cell, std, notes = _cell(items, where)
    if len(with_cell) > 1:
        notes.append(f"{len(with_cell)} data blocks have a cell; the first one, "
                     f"{name or 'without a name'}, was read.")
    return CifCell(name, cell, std, _class_key(items), tuple(notes))


def _blocks(text: str) -> list[tuple[str, dict[str, str]]]:
    """Return the name and the single items of every data block; loops are passed over."""
    blocks: list[tuple[str, dict[str, str]]] = []
    tag, in_loop = "", False
    for token in _tokens(text):
        lowered = token.lower()
        if lowered.startswith(("data_", "save_", "global_", "loop_")):
            tag, in_loop = "", lowered == "loop_"
            if lowered.startswith("data_"):
                blocks.append((token[5:], {}))
        elif token.startswith("_"):
            in_loop = in_loop and not tag  # a tag after values ends a loop
            tag = "" if in_loop else lowered.replace(".", "_")  # mmCIF: _cell.length_a
        elif in_loop:
            tag = "values"
        elif tag and blocks:
            blocks[-1][1].setdefault(tag, token)
            tag = ""
    return blocks


def _tokens(text: str) -> list[str]:
    """Return tags, values and keywords in order; a text field is one empty value."""
    tokens: list[str] = []
    in_text = False
    for line in text.splitlines():
        if line.startswith(";"):
            in_text = not in_text
            if in_text:
                tokens.append("''")
        elif not in_text:
            tokens += [token for token in _TOKEN.findall(line) if not token.startswith("#")]
    return tokens


def _cell(
    items: dict[str, str], where: str
) -> tuple[UnitCell, tuple[float, ...], list[str]]:
    values, spreads, notes = [], [], []
    for item in (*_LENGTHS, *_ANGLES):
        tag = f"_cell_{item}"
        word = items.get(tag, "?").strip("'\"")
        if word in ("?", ".", ""):
            if item in _LENGTHS:
                raise InputError(f"{tag} is {'not given' if tag not in items else 'unknown'}.",
                                 "All three lengths are needed.", where)
            # 90 degrees is the default of the core dictionary (from memory).
            notes.append(f"{tag} is not given; it was taken as 90°, as the dictionary says.")
            word = "90"
        value, spread = _measured(word, f"{where}, {tag}" if where else tag)
        values.append(value)
        spreads.append(spread)
    try:
        return UnitCell(*values), tuple(spreads), notes
    except InputError as refused:
        raise InputError(refused.message, refused.hint, where or refused.where) from refused


def _measured(word: str, where: str) -> tuple[float, float]:
    """Return a number and its uncertainty from 4.9130(2)."""
    found = _VALUE.fullmatch(word)
    if found is None:
        raise InputError(f"“{shortened(word)}” is not a number.", where=where)
    value = parse_number(found[1], where)
    if found[2] is None:
        return value, 0.0
    decimals = len(found[1].partition(".")[2])
    return value, float(f"{found[2]}e-{decimals}")


def _class_key(items: dict[str, str]) -> str | None:
    for tag in _GROUP_NUMBERS:
        word = items.get(tag, "").strip("'\"")
        if word.isdigit() and 1 <= int(word) <= 230:
            return next(key for last, key in _LAUE_CLASSES if int(word) <= last)
    return None
