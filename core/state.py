"""What the bench knows, as one frozen, hashable value.

*Save*, *undo*, *autosave* and *reopen* are four uses of a `BenchState`. It holds tuples,
numbers and strings only; arrays are made from it where they are needed and never kept in it.
"""

from __future__ import annotations

from dataclasses import dataclass, fields, is_dataclass
from typing import Any, Literal

import numpy as np
import numpy.typing as npt

from core.arrays import FloatArray
from core.crystal.cell import DEFAULT_AXES, CrystalFrame, UnitCell
from core.crystal.orientation import parse_orientation, turned
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import CrystalClass, crystal_class

Vector3 = tuple[float, float, float]
Matrix = tuple[tuple[float, ...], ...]
Side = Literal["A", "B"]
SOURCE_TIMES_US = (0.01, 10_000.0)
"""The shortest and the longest time that a source picture shows."""

SPEED_COLUMNS = (
    "direction",
    "sheet",
    "polarisation",
    "kind",
    "speed_m_s",
    "sigma_m_s",
    "thickness_mm",
    "transit_us",
    "sigma_us",
    "path",
    "delay_ns",
    "sigma_mm",
)
"""What the cells of a row of measured speeds hold, in their order."""


@dataclass(frozen=True)
class Specimen:
    """What is known of one crystal.

    Attributes
    ----------
    name, source, notes : str
    stiffness : tuple of 6 tuples of 6 floats
        GPa, Voigt order 11, 22, 33, 23, 13, 12, crystal axes.
    density : float or None
        kg/m³.
    crystal_class : str
        A key of `core.tensor.symmetry.CLASS_KEYS`: the symmetry it claims.
    unique_axis : str
        "x", "y" or "z"; read for monoclinic crystals only.
    cell : UnitCell or None
    crystal_axes : str
        How the Cartesian crystal axes follow the cell, for example ``z||c, y||b*``.
    temperature_c : float or None
    stiffness_std : tuple of 6 tuples of 6 floats or None
        Standard uncertainties, GPa.
    covariance : tuple of 21 tuples of 21 floats or None
        GPa², along the upper triangle by rows.
    unknown : str
        Keys of the file that this version does not know, as JSON text, kept on saving.
    """

    name: str
    stiffness: Matrix
    density: float | None = None
    crystal_class: str = "triclinic"
    unique_axis: str = "y"
    cell: UnitCell | None = None
    crystal_axes: str = DEFAULT_AXES
    temperature_c: float | None = None
    source: str = ""
    notes: str = ""
    stiffness_std: Matrix | None = None
    covariance: Matrix | None = None
    unknown: str = "{}"

    @property
    def frame(self) -> CrystalFrame:
        """The cell, axes and symmetry in which directions of this crystal are said."""
        return CrystalFrame(self.cell, self.crystal_axes, self.crystal_class, self.unique_axis)


@dataclass(frozen=True)
class OrientationChoice:
    """An orientation in the user's own words, and small turns after it.

    Attributes
    ----------
    text : str
        As `core.crystal.orientation.parse_orientation` reads it.
    turn : tuple of 3 floats
        Degrees about the part's own X, then Y, then Z, made after `text`.
    """

    text: str = "identity"
    turn: Vector3 = (0.0, 0.0, 0.0)


@dataclass(frozen=True)
class MeasuredSpeeds:
    """Readings of wave speeds as they were typed, and how they are to be fitted.

    Attributes
    ----------
    rows : tuple of tuples of str
        A cell of text for each of `SPEED_COLUMNS`; what is wrong with it is marked, not lost.
    density : str
        kg/m³, with its standard uncertainty where that is known: "2684 ± 1".
    crystal_class, unique_axis : str
        The symmetry whose independent constants are sought.
    cell : UnitCell or None
    crystal_axes : str
        What indices refer to.
    entered : "speed", "flight" or "both"
        Which columns the table shows.
    direction_sigma : str
        Degrees: standard uncertainty of every direction; empty for none.
    robust : bool
        Let readings far off count less.
    criterion : "determinant", "largest" or "functional"
        What the next blank is to make more certain: all constants, the least certain one, or
        Young's modulus along the pin.
    comments : tuple of str
        Comment lines of the file, kept on saving.
    name : str
        Of the file they came from, without its ending; empty where they were typed.
    """

    rows: tuple[tuple[str, ...], ...] = ()
    density: str = ""
    crystal_class: str = "triclinic"
    unique_axis: str = "y"
    cell: UnitCell | None = None
    crystal_axes: str = DEFAULT_AXES
    entered: str = "speed"
    direction_sigma: str = ""
    robust: bool = False
    criterion: str = "determinant"
    comments: tuple[str, ...] = ()
    name: str = ""

    @property
    def frame(self) -> CrystalFrame:
        """The cell, axes and symmetry in which the directions are said."""
        return CrystalFrame(self.cell, self.crystal_axes, self.crystal_class, self.unique_axis)


@dataclass(frozen=True)
class Display:
    """How the bench is looked at: everything a reopened bench must show again.

    Attributes
    ----------
    layout : "A", "AB" or "B"
        Which panes the stage shows.
    sheets : tuple of 3 bools
        Which of the fastest, middle and slowest sheets are drawn.
    colour_by : str
        "value", "longitudinality", or the key of another quantity of three sheets, that
        colours the sheets.
    cut_away : bool
        Open the surfaces at the section plane.
    shared_scale : bool
        A and B use one scale and one colour range.
    crystal_axes : bool
        Draw a, b, c beside the part axes.
    marks : bool
        Draw the acoustic axes on wave quantities.
    ticks : bool
        Draw polarisation ticks.
    deck : str
        "hemisphere", "sweep" or "source": what stands beside the section.
    hemisphere : str
        "A", "B", "difference" or "cost" (of a cutting error).
    projection : str
        "equal_area" or "stereographic".
    sweep_about : 3 floats or None
        Part axis about which the sweep turns the pin; None: the normal of the section.
    ledger : "A" or "B"
        Whose crystal the ledger shows.
    face : str
        Face of the constants grid: "stiffness", "compliance" or "uncertainty".
    source_time_us : float
        Microseconds since the pulse of the source picture.
    hemisphere_sheet : int
        Which sheet the hemisphere shows of three: 0, 1, 2 from the fastest.
    page : "bench" or "speeds"
        Which page of the window is seen.
    speeds_plot : str
        What is plotted of a fit: "residuals", "section", "spectrum" or "correlation".
    speeds_plane : 3 floats
        Unit normal of the section of the fitted speeds, crystal axes.
    """

    layout: str = "A"
    sheets: tuple[bool, bool, bool] = (True, True, True)
    colour_by: str = "value"
    cut_away: bool = False
    shared_scale: bool = True
    crystal_axes: bool = False
    marks: bool = False
    ticks: bool = False
    deck: str = "hemisphere"
    hemisphere: str = "A"
    projection: str = "equal_area"
    sweep_about: Vector3 | None = None
    ledger: str = "A"
    face: str = "stiffness"
    hemisphere_sheet: int = 0
    source_time_us: float = 1.0
    page: str = "bench"
    speeds_plot: str = "residuals"
    speeds_plane: Vector3 = (0.0, 0.0, 1.0)


@dataclass(frozen=True)
class BenchState:
    """Everything a bench file holds.

    Attributes
    ----------
    specimen : Specimen
        The crystal of A, and of B unless `other` is given.
    other : Specimen or None
        Another crystal for B.
    orientation_a, orientation_b : OrientationChoice
    pin : tuple of 3 floats
        Unit vector, part axes: the direction being read, the same in both parts.
    section : tuple of 3 floats
        Unit normal of the section plane, part axes.
    quantity : str
        Key of the quantity on the stage.
    cutting_error_deg : float
        Half-angle of the cone of misorientation.
    display : Display
    readings : MeasuredSpeeds or None
        Measured wave speeds, in crystal axes of their own.
    unknown : str
        Keys of the file that this version does not know, as JSON text, kept on saving.
    """

    specimen: Specimen
    other: Specimen | None = None
    orientation_a: OrientationChoice = OrientationChoice()
    orientation_b: OrientationChoice = OrientationChoice()
    pin: Vector3 = (0.0, 0.0, 1.0)
    section: Vector3 = (0.0, 1.0, 0.0)
    quantity: str = "young"
    cutting_error_deg: float = 0.5
    display: Display = Display()
    readings: MeasuredSpeeds | None = None
    unknown: str = "{}"

    def specimen_of(self, side: str) -> Specimen:
        """Return the crystal shown on a side, "A" or "B"."""
        return self.other if side == "B" and self.other is not None else self.specimen

    def orientation_of(self, side: str) -> OrientationChoice:
        """Return the orientation shown on a side, "A" or "B"."""
        return self.orientation_a if side == "A" else self.orientation_b


# --- what a state means to the kernels ------------------------------------------------------


def claimed_class(specimen: Specimen) -> CrystalClass:
    """Return the crystal class that a specimen claims."""
    return crystal_class(specimen.crystal_class, specimen.unique_axis)


def stiffness_of(specimen: Specimen) -> Stiffness:
    """Return the stiffness of a specimen, GPa, crystal axes."""
    return Stiffness.from_voigt(specimen.stiffness)


def rotation_of(choice: OrientationChoice, specimen: Specimen) -> FloatArray:
    """Return R, shape (3, 3), v_part = R v_crystal, of an orientation said for a specimen.

    Raises
    ------
    InputError
        When the text is no orientation, or needs a cell that the specimen has not.
    """
    return turned(parse_orientation(choice.text, specimen.frame).rotation, choice.turn)


# --- between arrays and states --------------------------------------------------------------


def as_matrix(array: npt.ArrayLike) -> Matrix:
    """Return a two-dimensional array as a tuple of tuples of floats."""
    return tuple(tuple(float(x) for x in row) for row in np.asarray(array, dtype=float))


def as_vector(array: npt.ArrayLike) -> Vector3:
    """Return a three-component array as a tuple of floats."""
    x, y, z = (float(component) for component in np.asarray(array, dtype=float))
    return x, y, z


def to_plain(value: Any) -> Any:
    """Return a part of a state as dicts, lists, numbers and strings for JSON."""
    if is_dataclass(value):
        return {field.name: to_plain(getattr(value, field.name)) for field in fields(value)}
    if isinstance(value, tuple):
        return [to_plain(item) for item in value]
    return value
