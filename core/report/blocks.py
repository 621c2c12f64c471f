"""What a report is made of, as plain data: the PDF and the page for a browser draw the same."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from core.report.captions import FigureChoice

Role = Literal["body", "lead", "note", "bullet", "good", "doubt", "alert"]


@dataclass(frozen=True)
class Paragraph:
    """A piece of running text; the roles good, doubt and alert mark a verdict."""

    text: str
    role: Role = "body"


@dataclass(frozen=True)
class Table:
    """Rows of text under a header.

    Attributes
    ----------
    header : tuple of str
        Empty where the rows speak for themselves.
    rows : tuple of tuples of str
    title, note : str
        Above and below the table; may be empty.
    words : int
        So many columns from the left hold words; numbers, to the right, are set flush right.
    trailing_words : int
        So many columns from the right hold words again.
    """

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    title: str = ""
    note: str = ""
    words: int = 1
    trailing_words: int = 0


@dataclass(frozen=True)
class Figure:
    """A figure with its caption."""

    choice: FigureChoice
    caption: str
    number: int


@dataclass(frozen=True)
class SignOff:
    """Lines on which people sign: the roles they sign in."""

    roles: tuple[str, ...]


Block = Paragraph | Table | Figure | SignOff


@dataclass(frozen=True)
class Section:
    """One section of a report."""

    key: str
    title: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True)
class Report:
    """A whole report.

    Attributes
    ----------
    title, subtitle : str
    made : str
        Date, or empty.
    running : str
        What stands at the foot of every page beside its number.
    sections : tuple of Section
    """

    title: str
    subtitle: str
    made: str
    running: str
    sections: tuple[Section, ...]
