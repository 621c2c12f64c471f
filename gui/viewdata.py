"""What the views draw: frozen values, made by the presenter, with the text already written.

A view never computes and never knows where its data come from. Arrays in here are read-only
by agreement; classes that hold arrays compare by identity.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

import numpy as np

from core.arrays import BoolArray, Float32Array, FloatArray, IndexArray

Vector3 = tuple[float, float, float]
Mark = Literal["stable", "doubtful", "unstable"]


# ---------------------------------------------------------------- verdict and ledger
@dataclass(frozen=True)
class VerdictView:
    """The state of the constants in one line."""

    mark: Mark
    headline: str
    facts: tuple[str, ...]
    detail: str  # paragraphs in plain text, shown on a click


@dataclass(frozen=True)
class CellView:
    """One cell of the 6×6 grid."""

    text: str
    kind: Literal["independent", "dependent", "zero"]
    full: str  # the number at full precision, for copying and editing
    tooltip: str


@dataclass(frozen=True)
class ConstantsView:
    """The 6×6 grid with one of its faces."""

    face: Literal["stiffness", "compliance", "uncertainty"]
    unit: str
    cells: tuple[tuple[CellView, ...], ...]
    editable: bool
    note: str = ""


@dataclass(frozen=True)
class SpectrumBar:
    """One eigenstiffness, ascending."""

    value: float  # GPa
    text: str
    strain: str
    tooltip: str


@dataclass(frozen=True)
class SpectrumView:
    """The strain spectrum: six bars."""

    bars: tuple[SpectrumBar, ...]
    note: str


@dataclass(frozen=True)
class SpecimenView:
    """The words and numbers of the specimen form, as text ready for its fields."""

    name: str
    source: str
    notes: str
    density: str
    temperature: str
    crystal_class: str
    classes: tuple[tuple[str, str], ...]  # key, words
    unique_axis: str
    has_unique_axis: bool
    class_note: str  # how far the table is from the class, or ""
    sides: str = ""  # which sides this crystal is shown on: "A and B", "A", "B"
    choices: tuple[tuple[str, str], ...] = ()  # ("A", name of A's crystal), ("B", …)
    chosen: str = "A"


@dataclass(frozen=True)
class CellFormView:
    """The unit cell and the axes convention, as text ready for the fields."""

    lengths: tuple[str, str, str]
    angles: tuple[str, str, str]
    axes: str  # the convention as the file says it
    conventions: tuple[tuple[str, str], ...]  # key, words
    note: str  # volume, or why a cell is wanted


@dataclass(frozen=True)
class OrientationView:
    """One orientation form."""

    side: str
    text: str
    way: str
    ways: tuple[tuple[str, str], ...]  # key, words
    turn: Vector3  # degrees about part X, Y, Z
    said_otherwise: tuple[tuple[str, str], ...]  # words, text: the same in other ways
    axes: tuple[str, str, str]  # nearest low-index directions of part X, Y, Z
    note: str  # misorientation between A and B, or ""
    doubt: str = ""  # a direction that the part's axes miss, or ""


# ---------------------------------------------------------------- stage
@dataclass(frozen=True, eq=False)
class SheetView:
    """One surface to draw: planar rows x, y, z, nx, ny, nz, value (shape (7, N), float32)."""

    rows: Float32Array
    triangles: IndexArray
    visible: bool = True
    opacity: float = 1.0


@dataclass(frozen=True)
class DirectionMark:
    """A marked direction: drawn where it pierces the outermost visible sheet, both ends."""

    direction: Vector3  # unit, part axes
    label: str
    kind: Literal["pin", "least", "greatest", "axis"]


@dataclass(frozen=True)
class Triad:
    """Axes drawn through the surface: part X, Y, Z or crystal a, b, c (unit, part axes)."""

    directions: tuple[Vector3, Vector3, Vector3]
    labels: tuple[str, str, str]
    kind: Literal["part", "crystal"]


@dataclass(frozen=True)
class ScaleView:
    """What a colour bar shows."""

    low: float
    high: float
    low_text: str
    high_text: str
    title: str  # quantity, symbol and unit
    diverging: bool
    ticks: tuple[tuple[float, str], ...] = ()
    logarithmic: bool = False


@dataclass(frozen=True, eq=False)
class PaneView:
    """One pane of the stage."""

    side: str
    title: str
    sheets: tuple[SheetView, ...]  # fastest first; outermost is decided by the drawing
    radius: float  # this length of the rows fills the pane; axes reach a little further
    scale: ScaleView
    triads: tuple[Triad, ...]
    marks: tuple[DirectionMark, ...]
    section: Vector3 | None  # unit normal of the section plane, part axes
    cut_away: bool = False
    ticks: FloatArray | None = None  # (M, 2, 3) end points of polarisation ticks
    notice: str = ""  # why there is nothing, or not everything, to see
    is_wave_surface: bool = False  # vertices are not along their directions: may be folded


# ---------------------------------------------------------------- deck
@dataclass(frozen=True, eq=False)
class Curve:
    """One polar curve: points in the section plane, NaN where undefined."""

    points: FloatArray  # (2, N) in the unit of the quantity, first coordinate to the right
    side: str  # "A" or "B": decides colour and solid or dashed
    sheet: int  # 0, 1, 2: decides the line weight
    label: str = ""
    band: FloatArray | None = None  # (2, 2, N): inner and outer edge of ±1σ
    negative: BoolArray | None = None  # (N,): where the value is negative, drawn dotted
    leaves: BoolArray | None = None  # (N,): where the ray leaves the plane, drawn dotted


@dataclass(frozen=True, eq=False)
class SectionView:
    """The polar section."""

    title: str
    curves: tuple[Curve, ...]
    radius: float  # outermost ring
    rings: tuple[tuple[float, str], ...]  # radius, text
    axis_labels: tuple[str, str]  # part axis to the right and upwards
    unit: str
    pin_angle: float | None  # radians from the right; None when the pin is off the plane
    negative_note: str = ""  # "dotted where negative"
    notice: str = ""
    legend: tuple[tuple[str, str], ...] = ()  # side, words
    directions: tuple[tuple[float, str], ...] = ()  # angle in radians, low-index label
    ticks: FloatArray | None = None  # (2, 2, M) polarisation ticks in the plane
    plane: str = "XZ"  # key of the plane in the combo of planes
    planes: tuple[tuple[str, str], ...] = ()  # key, words
    far_labels: tuple[str, str] | None = None  # at the left and the bottom; None: −X, −Z
    logarithmic: tuple[float, float] | None = None  # values at the centre and at the rim


@dataclass(frozen=True, eq=False)
class HemisphereView:
    """The upper hemisphere seen from part Z, projected on a disc of radius 1."""

    title: str
    picture: FloatArray  # (H, W) values, NaN outside the disc or undefined, row 0 at the top
    scale: ScaleView
    contours: tuple[tuple[float, FloatArray], ...]  # level, (2, M) points in the disc
    marks: tuple[tuple[float, float, str, str], ...]  # x, y in the disc, label, kind
    projection: Literal["equal_area", "stereographic"]
    shown: str  # "A", "B", "difference", "cost"
    choices: tuple[tuple[str, str], ...]
    # (2, M) in the disc, NaN where it leaves it: along these two waves are as fast
    lines: tuple[FloatArray, ...] = ()
    axis_labels: tuple[str, str] = ("X", "Y")
    sheet: int = 0
    sheets: tuple[tuple[int, str], ...] = ()
    notice: str = ""


@dataclass(frozen=True, eq=False)
class SweepView:
    """A quantity against the angle from the pin along an arc."""

    title: str
    angles: FloatArray  # (N,) degrees
    curves: tuple[tuple[str, int, FloatArray], ...]  # side, sheet, values (N,)
    axis: str  # words of the axis turned about
    choices: tuple[tuple[str, str], ...]  # key, words of the axes to turn about
    chosen: str
    value_label: str
    notice: str = ""


# ---------------------------------------------------------------- reading
@dataclass(frozen=True)
class ReadingRow:
    """One line of the table at the pin."""

    label: str
    unit: str
    a: str
    b: str
    difference: str
    full: tuple[str, str, str]  # the three numbers at full precision, for copying
    tooltip: str
    key: str = ""  # the quantity this line belongs to
    group: str = ""


@dataclass(frozen=True)
class ReadingView:
    """The table at the pin."""

    where: str  # "θ 34.1°  φ 12.0° in part axes"
    near_a: str  # "near [1 0 2], 1.3° off"
    near_b: str
    rows: tuple[ReadingRow, ...]
    has_b: bool
    notice: str = ""
    side: str = "A"  # whose numbers the first column has: "B" when B is shown alone
    about: str = ""  # specimen, orientation and pin, the first line of a copy


@dataclass(frozen=True)
class ExtremeRow:
    """One extreme with where it is."""

    label: str
    value: str
    where: str  # nearest low-index direction, or "all directions", "a cone about …"
    direction: Vector3 | None  # part axes of A, for the go-link
    tooltip: str
    full: str


@dataclass(frozen=True)
class ExtremesView:
    """The extremes over all directions."""

    title: str
    rows: tuple[ExtremeRow, ...]
    pending: bool = False  # still being computed; draw dimmed
    notice: str = ""
    whose: str = ""  # "crystal of A: blank LM-7" where there are two crystals


@dataclass(frozen=True)
class WaveRow:
    """One line of the wave table: the same of the three waves, fastest first."""

    label: str
    values: tuple[str, str, str]
    unit: str
    full: tuple[str, str, str]  # at full precision, for copying
    tooltip: str


@dataclass(frozen=True)
class WaveTable:
    """The three plane waves along the pin on one side."""

    side: str
    heading: str
    rows: tuple[WaveRow, ...]
    notes: tuple[str, ...] = ()  # near which low-index directions rays run; where waves meet


@dataclass(frozen=True)
class WavesView:
    """The waves along the pin, for one side or both."""

    tables: tuple[WaveTable, ...]
    notice: str = ""


@dataclass(frozen=True)
class LinkedRow:
    """One line of a list of directions: cells, and where its go-link leads."""

    cells: tuple[str, ...]
    full: tuple[str, ...]
    direction: Vector3 | None  # part axes
    words: str  # what the link does, for its name
    tooltip: str = ""


@dataclass(frozen=True)
class LinkedView:
    """A list of directions in groups: a heading (or none) and its lines."""

    header: tuple[str, ...]
    groups: tuple[tuple[str, tuple[LinkedRow, ...]], ...]
    pending: bool = False  # still being computed; draw dimmed
    notice: str = ""


@dataclass(frozen=True)
class TableView:
    """Any small table: header, rows of text, and the same at full precision."""

    title: str
    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    full: tuple[tuple[str, ...], ...]
    tooltips: tuple[str, ...] = ()
    notice: str = ""


@dataclass(frozen=True)
class ToolbarView:
    """The controls above the stage."""

    quantity: str
    quantities: tuple[tuple[str, str, str], ...]  # key, words, tooltip
    enabled: tuple[str, ...]  # keys that can be drawn now (waves want a density)
    layout: str
    sheets: tuple[bool, bool, bool] | None  # None for one-sheet quantities
    colour_by: str = "value"
    colours: tuple[tuple[str, str], ...] = ()
    plane: str = "XZ"
    planes: tuple[tuple[str, str], ...] = ()
    shared_scale: bool = True
    linked_cameras: bool = True
    cut_away: bool = False
    crystal_axes: bool = False
    marks: bool = False
    ticks: bool = False
    extras: dict[str, str] = field(default_factory=dict, compare=False)


@dataclass(frozen=True, eq=False)
class SourceView:
    """Wavefronts in the section plane, some time after a point source gave off a pulse."""

    title: str
    # side, sheet, points (2, N) in mm, where the energy leaves the plane (N,)
    curves: tuple[tuple[str, int, FloatArray, BoolArray], ...]
    time_us: float
    rings: tuple[tuple[float, str], ...]  # radius in mm, text; the outermost is the rim
    axis_labels: tuple[str, str]  # part axis to the right and upwards
    notice: str = ""
    far_labels: tuple[str, str] | None = None  # at the left and the bottom; None: −X, −Z
    before_time: str = ""  # "wavefronts in part XZ after"


# ---------------------------------------------------------------- trust
@dataclass(frozen=True)
class ClassRow:
    """How near the table is to one crystal class."""

    key: str
    cells: tuple[str, ...]  # as `TrustView.header` names them
    full: tuple[str, ...]  # at full precision, for copying
    tooltip: str
    can_turn: bool  # its axes are worth turning to
    can_exact: bool  # the table is not that class already
    change: str = ""  # what making it exact as entered changes, in words
    doubt: str = ""  # why that would be a mistake, or ""


@dataclass(frozen=True)
class TrustView:
    """Whether the table can be trusted: symmetry, stability, notes and uncertainties."""

    sentence: str  # the symmetry in one sentence
    header: tuple[str, ...]
    classes: tuple[ClassRow, ...]
    suggested: str  # key of the class that the sentence speaks of
    support: str  # how many constants the data support, or ""
    facts: tuple[str, ...]  # those of the verdict
    chance: str  # how probable it is that the crystal is stable, or ""
    strains: TableView
    criteria: TableView
    notes: tuple[str, ...]
    shares: TableView  # what the anisotropy is made of
    pin: TableView  # uncertainties at the pin and where they come from
    draws: str  # where linear and drawn uncertainties differ, or ""
    pending: bool = False  # symmetry still being searched for; draw dimmed


# ---------------------------------------------------------------- taking in
@dataclass(frozen=True)
class ReadingChoice:
    """How one thing about a foreign table was understood."""

    field: str
    label: str
    value: str
    choices: tuple[tuple[str, str], ...]  # key, words
    reason: str
    mark: Literal["certain", "guess", "question"]
    is_free: bool = False  # something else than the choices may be typed


@dataclass(frozen=True)
class TakingInView:
    """A foreign table, how it is read, and what comes of it."""

    readings: tuple[ReadingChoice, ...]
    preview: ConstantsView | None
    verdict: VerdictView | None
    lines: tuple[str, ...]  # symmetry, uncertainties, what will be replaced
    notes: tuple[str, ...]
    error: str  # why it cannot be read, or ""
    status: str  # "2 questions are open", or ""
    is_ready: bool


@dataclass(frozen=True)
class CellFileView:
    """The cell of a CIF file, to be taken over."""

    title: str
    lines: tuple[tuple[str, str], ...]  # name, value with its uncertainty
    notes: tuple[str, ...]
    conventions: tuple[tuple[str, str], ...]
    axes: str


def empty_picture(size: int = 2) -> FloatArray:
    """Return a picture in which nothing is defined."""
    return np.full((size, size), np.nan)
