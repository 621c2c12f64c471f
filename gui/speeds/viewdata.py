"""What the page of measured speeds draws: frozen values, the text already written.

Classes that hold arrays compare by identity; the arrays are not to be written to.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from core.arrays import FloatArray
from gui.viewdata import CellView, ConstantsView, SectionView

Place = tuple[int, int]


# ---------------------------------------------------------------- readings
@dataclass(frozen=True)
class SpeedColumn:
    """A column of the table of readings."""

    key: str
    title: str
    tooltip: str
    is_number: bool
    sample: str  # as wide as its usual contents
    is_typed: bool = True  # False: what the fit says of the row


@dataclass(frozen=True, eq=False)
class SpeedsTableView:
    """The table of readings as it was typed."""

    columns: tuple[SpeedColumn, ...]
    rows: tuple[tuple[str, ...], ...]  # text of the shown columns
    ghosts: Mapping[Place, str]  # what an empty cell is taken for, in grey
    faults: Mapping[Place, str]  # what is wrong with a cell, as a sentence
    marks: Mapping[int, Literal["outlier", "planned"]]
    entered: str  # "speed", "flight", "both"
    summary: str  # "39 readings along 13 directions"
    pending: bool = False


@dataclass(frozen=True)
class SpeedsFormView:
    """What is known of the crystal that was measured, as text ready for the fields."""

    density: str
    crystal_class: str
    classes: tuple[tuple[str, str], ...]  # key, words
    unique_axis: str
    has_unique_axis: bool
    direction_sigma: str
    robust: bool
    frame: str  # what indices refer to
    faults: Mapping[str, str] = field(default_factory=dict)
    note: str = ""


# ---------------------------------------------------------------- result
@dataclass(frozen=True)
class ResultCell(CellView):
    """A constant with its standard uncertainty below it."""

    deviation: str = ""
    is_seen: bool = True


@dataclass(frozen=True)
class Fact:
    """One line about a fit; the mark says whether it is good news."""

    label: str
    text: str
    tooltip: str
    role: Literal["ink", "doubt", "alert"] = "ink"


@dataclass(frozen=True)
class ResultView:
    """What a fit says."""

    constants: ConstantsView | None
    facts: tuple[Fact, ...]
    unseen: tuple[str, ...]  # combinations in words
    notes: tuple[str, ...]
    can_use: bool
    pending: bool = False
    notice: str = ""  # why there is no result
    question: str = ""  # to be agreed to before the constants are used


# ---------------------------------------------------------------- plots
@dataclass(frozen=True)
class ResidualPoint:
    """One reading in the residual plot."""

    row: int  # of the table, from 1
    sheet: int  # 0 fastest
    residual: float  # (predicted - measured)/σ
    is_outlier: bool
    card: tuple[str, ...]  # lines of the card beside the mouse


@dataclass(frozen=True)
class ResidualsView:
    """Residuals in σ, a strip for each sheet."""

    points: tuple[ResidualPoint, ...]
    rows: int  # in the table
    limit: float  # σ beyond which one of so many sound readings lies once in twenty tables
    pending: bool = False
    notice: str = ""


@dataclass(frozen=True)
class SectionPoint:
    """A reading on the section of the fitted speeds: km/s in the plane."""

    x: float
    y: float
    row: int
    is_outlier: bool
    card: tuple[str, ...]


@dataclass(frozen=True, eq=False)
class SpeedsSectionView:
    """Fitted phase speeds round a plane, with the readings that lie in it."""

    section: SectionView
    points: tuple[SectionPoint, ...]
    pending: bool = False


@dataclass(frozen=True)
class SingularView:
    """How certain each combination of constants is, the most certain first."""

    deviations: tuple[float, ...]  # 1/singular value, GPa; infinite where nothing is seen
    rank: int
    typical: float  # GPa: the mean eigenstiffness, to compare with
    unseen: tuple[str, ...]
    pending: bool = False
    notice: str = ""


@dataclass(frozen=True, eq=False)
class CorrelationView:
    """Correlations of the constants."""

    names: tuple[str, ...]
    matrix: FloatArray  # (P, P)
    pending: bool = False
    notice: str = ""


# ---------------------------------------------------------------- blanks
@dataclass(frozen=True)
class BlankRow:
    """A direction worth cutting a blank along."""

    number: str
    where: str
    gain: str
    tooltip: str
    direction: str  # as it goes into the table


@dataclass(frozen=True)
class BlanksView:
    """Where the next blank would tell most."""

    criterion: str
    criteria: tuple[tuple[str, str], ...]  # key, words
    rows: tuple[BlankRow, ...]
    pending: bool = False
    notice: str = ""


@dataclass(frozen=True)
class PlanView:
    """A set of blanks to begin with, once one was asked for."""

    about: str  # what the plan starts from
    found: tuple[str, ...] = ()  # sentences
    can_place: bool = False
    notice: str = ""
