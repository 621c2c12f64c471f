"""One measured speed, and what can be said of a table of them before anything is fitted."""

import math
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np

from core.errors import InputError

Vector = tuple[float, float, float]
Kind = Literal["phase", "group"]
Path = Literal["through", "echo"]
Polarisation = Vector | Literal["longitudinal", "shear"]

DEFAULT_RELATIVE_SIGMA = 1e-3
"""Standard uncertainty of a speed that came without one, as a part of the speed."""

SLOWEST, FASTEST = 300.0, 25_000.0
"""m/s: outside these a speed in a solid crystal is doubtful."""

_INCH = 25.4  # millimetres
_ALIKE = 3.0  # a speed within this factor of the others is of their size
_SAME_DIRECTION = 1e-6  # on |n1 . n2|
_DISAGREE = 5.0  # combined standard uncertainties between two values of one wave
_SHARED, _ROWS_NAMED = 3, 5  # rows that make one slip a sentence; rows it names
_MOST_REMARKS = 30


@dataclass(frozen=True)
class Flight:
    """A speed as it was measured: a thickness and the time a pulse takes through it.

    Attributes
    ----------
    thickness_mm, transit_us : float
        Of the blank; the transit of an echo is there and back.
    sigma_us : float
        Standard uncertainty of the transit.
    path : "through" or "echo"
    delay_ns : float
        Time spent in couplant, cables and trigger; taken off the transit.
    sigma_mm : float
        Standard uncertainty of the thickness.
    """

    thickness_mm: float
    transit_us: float
    sigma_us: float
    path: Path = "through"
    delay_ns: float = 0.0
    sigma_mm: float = 0.0

    def __post_init__(self) -> None:
        _require(self.thickness_mm > 0, "thickness", "must be more than zero.")
        _require(self.transit_us > 0, "transit time", "must be more than zero.")
        _require(self.sigma_us > 0, "σ of the transit time", "must be more than zero.")
        _require(self.sigma_mm >= 0, "σ of the thickness", "cannot be negative.")
        _require(math.isfinite(self.delay_ns), "delay", "must be a finite number.")
        too_long = f"of {self.delay_ns:g} ns is longer than the transit time."
        _require(self.net_us > 0, "delay", too_long)

    @property
    def net_us(self) -> float:
        """Time in the crystal alone, µs."""
        return self.transit_us - 1e-3 * self.delay_ns

    @property
    def speed(self) -> float:
        """Speed, m/s."""
        length = self.thickness_mm * (2.0 if self.path == "echo" else 1.0)
        return 1e3 * length / self.net_us

    @property
    def sigma(self) -> float:
        """Standard uncertainty of the speed, m/s, of time and thickness together."""
        return self.speed * math.hypot(
            self.sigma_us / self.net_us, self.sigma_mm / self.thickness_mm
        )


@dataclass(frozen=True)
class Reading:
    """One measured speed.

    Attributes
    ----------
    direction : tuple of 3 floats
        Unit vector, crystal axes: the wave normal, or the ray of a group speed.
    speed, sigma : float
        m/s; `sigma` is one standard uncertainty.
    row : int
        Row of the table, from 1: how the reading is named in every sentence.
    sheet : int or None
        1 fastest, 2, 3; None where it is not known.
    polarisation : tuple of 3 floats, "longitudinal", "shear" or None
        Read where the sheet is not known. A vector picks the wave that moves most nearly
        along it, "longitudinal" the one that moves most nearly along the wave normal.
    kind : "phase" or "group"
    text : str
        The direction as it was written.
    flight : Flight or None
        Where the speed came from, if it was a time of flight.
    """

    direction: Vector
    speed: float
    sigma: float
    row: int
    sheet: int | None = None
    polarisation: Polarisation | None = None
    kind: Kind = "phase"
    text: str = ""
    flight: Flight | None = None

    def __post_init__(self) -> None:
        length = math.hypot(*self.direction)
        _require(0 < length < math.inf, "direction", "has no length.")
        _require(self.speed > 0, "speed", "must be more than zero.")
        _require(self.sigma > 0, "σ of the speed", "must be more than zero.")
        if self.sheet not in (None, 1, 2, 3):
            raise InputError(
                f"The sheet is {self.sheet}; sheets are 1 (fastest), 2 and 3.",
                "Leave it empty where it is not known.",
            )
        if abs(length - 1.0) > 1e-12:
            x, y, z = (component / length for component in self.direction)
            object.__setattr__(self, "direction", (x, y, z))


def _require(holds: bool, what: str, why: str) -> None:
    if not holds:
        raise InputError(f"The {what} {why}")


def reading_of_flight(
    direction: Vector, flight: Flight, row: int, sheet: int | None = None
) -> Reading:
    """Return the reading that a time of flight makes, as a phase speed."""
    return Reading(direction, flight.speed, flight.sigma, row, sheet, flight=flight)


# --- what is odd about a table ----------------------------------------------------------------


def remarks(readings: Sequence[Reading]) -> tuple[str, ...]:
    """Return sentences about readings that look like slips; nothing is changed or left out.

    Said are speeds out of range (with the slip of units that would explain one), rows that
    are repeated, and rows that contradict one another whatever the crystal.
    """
    if not readings:
        return ()
    typical = float(np.median([reading.speed for reading in readings]))
    notes, named = _shared_slips(readings, typical)
    notes += [note for reading in readings
              if reading.row not in named and (note := _odd_size(reading, typical))]
    for group in same_direction(readings):
        ordered = sorted(group, key=lambda reading: (reading.speed, reading.row))
        notes += [note for pair in pairwise(ordered) if (note := _odd_pair(*pair))]
    if len(notes) > _MOST_REMARKS:
        rest = len(notes) - _MOST_REMARKS
        notes[_MOST_REMARKS:] = [f"… and {rest} more remarks of this kind."]
    return tuple(notes)


def _shared_slips(readings: Sequence[Reading], typical: float) -> tuple[list[str], set[int]]:
    """Return a sentence for every slip of units that three rows or more share, and the rows."""
    groups: dict[tuple[float, str], list[Reading]] = defaultdict(list)
    for reading in readings:
        slip = _unit_slip(reading, typical)
        if slip is not None:
            groups[slip].append(reading)
    shared = {slip: group for slip, group in groups.items() if len(group) >= _SHARED}
    rows = {reading.row for group in shared.values() for reading in group}
    return [_slip_words(group, *slip) for slip, group in shared.items()], rows


def _slip_words(group: Sequence[Reading], factor: float, question: str) -> str:
    """Return "Rows 1, 2, 3, 4, 5 and 9 more: 2.9 to 6.8 m/s would be …"."""
    rows = ", ".join(str(reading.row) for reading in group[:_ROWS_NAMED])
    more = len(group) - _ROWS_NAMED
    speeds = [reading.speed for reading in group]
    found, meant = (
        f"{times * min(speeds):.4g} to {times * max(speeds):.4g} m/s" for times in (1.0, factor)
    )
    return (f"Rows {rows}{f' and {more} more' if more > 0 else ''}: {found} would be {meant} if"
            f" multiplied by {factor:g}: {question}")


def _odd_size(reading: Reading, typical: float) -> str:
    """Say what is odd about the size of a speed, on its own and among the others."""
    if _is_usual(reading, typical):
        return ""
    where = f"Row {reading.row}: {reading.speed:.4g} m/s"
    slip = _unit_slip(reading, typical)
    if slip is not None:
        factor, question = slip
        meant = f"{factor * reading.speed:.4g} m/s"
        return f"{where} would be {meant} if multiplied by {factor:g}: {question}"
    if not SLOWEST <= reading.speed <= FASTEST:
        return f"{where} is outside the {SLOWEST:.0f} to {FASTEST:.0f} m/s of solid crystals."
    return f"{where} is far from the other speeds, whose middle is {typical:.4g} m/s."


def _is_usual(reading: Reading, typical: float) -> bool:
    in_range = SLOWEST <= reading.speed <= FASTEST
    return in_range and typical / (2 * _ALIKE) <= reading.speed <= typical * 2 * _ALIKE


def _unit_slip(reading: Reading, typical: float) -> tuple[float, str] | None:
    """Return by which factor and through which slip an odd speed would be like the others.

    A slip that every row shares leaves no typical speed to compare with; 5 km/s then serves.
    """
    if _is_usual(reading, typical):
        return None
    peers = typical if SLOWEST < typical < FASTEST else 5_000.0
    slips = [(1e3, "was it given in km/s?")]
    if reading.flight is not None:
        slips = [
            (_INCH, "was the thickness in inches?"),
            (2.0, "was the transit there and back (path: echo)?"),
            (1e3, "was the transit in ns?"),
        ]
    for factor, question in slips:
        meant = factor * reading.speed
        if peers / _ALIKE < meant < peers * _ALIKE:
            return factor, question
    return None


def _odd_pair(slower: Reading, faster: Reading) -> str:
    """Say what two readings along one direction have against each other."""
    rows = "Rows {} and {}".format(*sorted((slower.row, faster.row)))
    same_wave = slower.sheet == faster.sheet and slower.polarisation == faster.polarisation
    apart = (faster.speed - slower.speed) / math.hypot(slower.sigma, faster.sigma)
    if same_wave and apart == 0:
        return f"{rows} are the same reading twice; both are kept."
    if slower.sheet is None or faster.sheet is None or apart <= _DISAGREE:
        return ""
    if slower.sheet == faster.sheet:
        return f"{rows} give one wave two speeds, {apart:.0f} σ apart."
    if slower.sheet < faster.sheet and slower.kind == "phase":
        return f"{rows} conflict: the sheet numbers run against the speeds."
    return ""


def same_direction(readings: Sequence[Reading]) -> list[list[Reading]]:
    """Return the readings grouped by direction and kind; opposite directions are one."""
    groups: dict[tuple[int, ...], list[Reading]] = defaultdict(list)
    for reading in readings:
        groups[direction_key(reading.direction, reading.kind)].append(reading)
    return list(groups.values())


def direction_key(direction: Vector, kind: str) -> tuple[int, ...]:
    """Return whole numbers that are equal for a direction and its opposite, by kind."""
    rounded = [round(component / _SAME_DIRECTION) for component in direction]
    sign = next((1 if value > 0 else -1 for value in rounded if value), 1)
    return (*(sign * value for value in rounded), int(kind == "group"))
