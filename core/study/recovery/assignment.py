"""Which of the three waves along its normal each reading belongs to.

A sheet number settles it. A polarisation settles it for a given crystal: a vector picks the
wave that moves most nearly along it, "longitudinal" the one most nearly along the normal. What
is left (no mark at all, or "shear") is decided among the ways that keep the order of the speeds
along one normal, by the least sum of squares of the residuals. Readings of nearly one speed
along one normal are one wave measured twice and stay together.
"""

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from itertools import combinations

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional.sphere import dot
from core.study.recovery.model import Survey, Waves
from core.study.recovery.readings import Reading

_REPEAT = 4.0  # combined standard uncertainties within which two speeds may be one wave
_REPEAT_PART = 3e-3  # of the speed, likewise
_UNFIT = 1e6  # what a wave of the wrong polarisation counts, in squared residuals
_HUGE = 1e5  # squared residuals are not counted further than this: all are hopeless


@dataclass(frozen=True, eq=False)
class Ways:
    """The ways to give sheets to the open readings along each normal, as a flat list.

    A way has one entry for each open reading along its normal. Ways of one normal, and entries
    of one way, follow one another; there are E entries, O ways and K normals.

    Attributes
    ----------
    reading, sheet : (E,) int arrays
        What each entry gives to whom.
    way : (E,) int array
        Which way it belongs to.
    first_entry : (O,) int array
    first_way : (K,) int array
    """

    reading: IntArray
    sheet: IntArray
    way: IntArray
    first_entry: IntArray
    first_way: IntArray

    def cheapest(self, cost: FloatArray) -> tuple[IntArray, IntArray]:
        """Return chosen (crystal, entry) pairs for costs (B, M, 3) of readings on sheets."""
        total = np.add.reduceat(cost[:, self.reading, self.sheet], self.first_entry, axis=1)
        least = np.minimum.reduceat(total, self.first_way, axis=1)
        count = np.diff(self.first_way, append=total.shape[1])
        chosen = total <= np.repeat(least, count, axis=1)
        crystal, entry = np.nonzero(chosen[:, self.way])
        return crystal, entry


@dataclass(frozen=True, eq=False)
class Assignment:
    """What is known of the sheets of M readings before the crystal is known.

    Attributes
    ----------
    fixed : (M,) int array
        0, 1 or 2 where the sheet is given, else -1.
    pointed : (M, 3) array
        Direction of motion that picks the wave; NaN where there is none.
    shear : (M,) bool array
        Where only the longitudinal wave is ruled out.
    ways : Ways or None
        For the readings that are open; None where there are none.
    """

    fixed: IntArray
    pointed: FloatArray
    shear: BoolArray
    ways: Ways | None

    @cached_property
    def is_settled(self) -> bool:
        """Whether every sheet is known without knowing the crystal."""
        return bool((self.fixed >= 0).all())

    @cached_property
    def has_pointed(self) -> bool:
        """Whether any reading is picked by its motion."""
        return bool(np.isfinite(self.pointed[:, 0]).any())

    def with_fixed(self, rows: BoolArray, sheets: IntArray) -> "Assignment":
        """Return the assignment with the sheets (M,) of some rows settled."""
        return replace(self, fixed=np.where(rows, sheets, self.fixed))

    def sheets(
        self, survey: Survey, found: Waves, speeds: FloatArray, residual_unit: FloatArray
    ) -> IntArray:
        """Return the sheet (B, M) of every reading for B crystals.

        `speeds` (B, M) or (M,) are the measured ones, `residual_unit` (M,) the σ in m/s.
        """
        crystals, count = found.values.shape[1], survey.count
        sheets = np.zeros((crystals, count), dtype=np.intp)
        if not self.is_settled:
            p = found.polarisation[:, :, :, survey.place]
            if self.has_pointed:
                along = dot(p.swapaxes(0, 1), np.nan_to_num(self.pointed.T)[:, None, None, :])
                sheets[:] = np.abs(along).argmax(axis=0)
            if self.ways is not None:
                cost = self._costs(survey, found, speeds, residual_unit, p)
                crystal, entry = self.ways.cheapest(cost)
                sheets[crystal, self.ways.reading[entry]] = self.ways.sheet[entry]
        return np.where(self.fixed >= 0, self.fixed, sheets)

    def _costs(
        self, survey: Survey, found: Waves, speeds: FloatArray, unit: FloatArray, p: FloatArray
    ) -> FloatArray:
        """Return what it costs each reading to be on each sheet, (B, M, 3)."""
        trial = np.sqrt(survey.scale * np.maximum(found.values[:, :, survey.place], 0.0))
        cost = np.minimum(((trial - speeds) / unit) ** 2, _HUGE)
        # Beyond the cap nearer is still better, or a poor start could not choose.
        cost += np.abs(trial / speeds - 1.0)
        if self.shear.any():
            along = np.abs(dot(p.swapaxes(0, 1), survey.normals[:, None, None, survey.place]))
            longitudinal = np.arange(3)[:, None, None] == along.argmax(axis=0)
            cost += _UNFIT * (longitudinal & self.shear)
        return np.asarray(np.moveaxis(cost, 0, 2))


def assignment_of(readings: Sequence[Reading], place: IntArray) -> Assignment:
    """Return what is known of the sheets of readings whose normals are numbered by `place`."""
    count = len(readings)
    fixed = np.array([-1 if r.sheet is None else r.sheet - 1 for r in readings], dtype=np.intp)
    pointed = np.full((count, 3), np.nan)
    shear = np.zeros(count, dtype=bool)
    by_normal: dict[int, list[int]] = defaultdict(list)
    for index, reading in enumerate(readings):
        if reading.sheet is None and reading.polarisation == "longitudinal":
            pointed[index] = reading.direction
        elif reading.sheet is None and isinstance(reading.polarisation, tuple):
            pointed[index] = reading.polarisation
        else:
            shear[index] = reading.sheet is None and reading.polarisation == "shear"
            by_normal[int(place[index])].append(index)
    return Assignment(fixed, pointed, shear, _ways(readings, by_normal))


def _ways(readings: Sequence[Reading], by_normal: dict[int, list[int]]) -> Ways | None:
    """Return every way to give open readings sheets, normal by normal."""
    entries: list[tuple[int, int, int]] = []
    first_entry: list[int] = []
    first_way: list[int] = []
    for members in by_normal.values():
        choices = _choices_along(readings, members)
        if choices:
            first_way.append(len(first_entry))
        for choice in choices:
            way = len(first_entry)
            first_entry.append(len(entries))
            entries += [(index, sheet, way) for index, sheet in choice.items()]
    if not entries:
        return None
    reading, sheet, way_of = np.array(entries, dtype=np.intp).T
    return Ways(reading, sheet, way_of, np.array(first_entry, dtype=np.intp),
                np.array(first_way, dtype=np.intp))  # fmt: skip


def _choices_along(readings: Sequence[Reading], members: list[int]) -> list[dict[int, int]]:
    """Return the ways along one normal that keep the order of the speeds.

    Where there are more speeds than waves, or a given sheet runs against the order, every open
    reading is free.
    """
    opened = [index for index in members if readings[index].sheet is None]
    if not opened:
        return []
    clusters = _clusters(readings, members)
    ways = []
    for sheets in combinations(range(3), len(clusters)):
        given = {i: sheet for cluster, sheet in zip(clusters, sheets, strict=True)
                 for i in cluster}  # fmt: skip
        known = ((readings[i].sheet, sheet + 1) for i, sheet in given.items())
        if all(sheet is None or sheet == meant for sheet, meant in known):
            ways.append({index: given[index] for index in opened})
    if ways:
        return ways
    return [dict.fromkeys(opened, sheet) for sheet in range(3)] if len(opened) == 1 else [
        {index: min(rank, 2) for rank, index in enumerate(
            sorted(opened, key=lambda i: -readings[i].speed))}
    ]  # fmt: skip


def _clusters(readings: Sequence[Reading], members: list[int]) -> list[list[int]]:
    """Return the readings along one normal in groups of one speed, fastest first."""
    ordered = sorted(members, key=lambda index: -readings[index].speed)
    clusters = [[ordered[0]]]
    for index in ordered[1:]:
        last, this = readings[clusters[-1][-1]], readings[index]
        spread = max(
            _REPEAT * np.hypot(last.sigma, this.sigma), _REPEAT_PART * this.speed
        )
        different = last.sheet != this.sheet and None not in (last.sheet, this.sheet)
        if last.speed - this.speed > spread or different:
            clusters.append([index])
        else:
            clusters[-1].append(index)
    return clusters
