"""Which of the three waves along its normal each reading belongs to.

A sheet number settles it. A polarisation settles it for a given crystal: a vector picks the
wave that moves most nearly along it, "longitudinal" the one most nearly along the normal. What
is left (no mark at all, or "shear") is decided among the ways that keep the order of the speeds
along one normal, by the least sum of squares of the residuals. Readings of nearly one speed
along one normal are one wave measured twice and stay together.
"""

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
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
    choices : (O, M, 3) bool array
        Each open normal has some ways to give its open readings sheets; way o gives reading m
        sheet s where True.
    normal_of_choice : (O,) int array
        Which open normal a way belongs to, ascending.
    """

    fixed: IntArray
    pointed: FloatArray
    shear: BoolArray
    choices: BoolArray
    normal_of_choice: IntArray

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
        return Assignment(
            np.where(rows, sheets, self.fixed),
            np.where(rows[:, None], np.nan, self.pointed),
            self.shear & ~rows,
            self.choices & ~rows[None, :, None],
            self.normal_of_choice,
        )

    def sheets(
        self, survey: Survey, found: Waves, speeds: FloatArray, residual_unit: FloatArray
    ) -> IntArray:
        """Return the sheet (B, M) of every reading for B crystals.

        `speeds` (B, M) or (M,) are the measured ones, `residual_unit` (M,) the σ in m/s.
        """
        crystals, count = found.values.shape[1], survey.count
        sheets = np.broadcast_to(np.maximum(self.fixed, 0), (crystals, count)).copy()
        if self.is_settled:
            return sheets
        p = found.polarisation[:, :, :, survey.place]
        if self.has_pointed:
            along = dot(p.swapaxes(0, 1), np.nan_to_num(self.pointed.T)[:, None, None, :])
            picked = np.abs(along).argmax(axis=0)
            sheets = np.where(np.isfinite(self.pointed[:, 0]), picked, sheets)
        if len(self.choices):
            cost = self._costs(survey, found, speeds, residual_unit, p)
            chosen = self._best_choices(cost)
            given = np.any(self.choices[chosen], axis=1)
            sheets = np.where(np.any(given, axis=2), np.argmax(given, axis=2), sheets)
        return sheets

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

    def _best_choices(self, cost: FloatArray) -> IntArray:
        """Return the index of the cheapest way at every open normal of each crystal, (B, K)."""
        crystals = len(cost)
        flat = cost.reshape(crystals, -1)
        total = flat @ self.choices.reshape(len(self.choices), -1).T.astype(np.float64)
        starts = np.flatnonzero(np.diff(self.normal_of_choice, prepend=-1))
        ends = np.append(starts[1:], len(self.normal_of_choice))
        picked = [start + total[:, start:end].argmin(axis=1)
                  for start, end in zip(starts, ends, strict=True)]  # fmt: skip
        return np.stack(picked, axis=1)


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
    choices, owner = _all_choices(readings, by_normal)
    table = np.zeros((len(choices), count, 3), dtype=bool)
    for row, choice in zip(table, choices, strict=True):
        for index, sheet in choice.items():
            row[index, sheet] = True
    return Assignment(fixed, pointed, shear, table, np.array(owner, dtype=np.intp))


def _all_choices(
    readings: Sequence[Reading], by_normal: dict[int, list[int]]
) -> tuple[list[dict[int, int]], list[int]]:
    """Return every way to give open readings sheets, and the number of its normal."""
    choices: list[dict[int, int]] = []
    owner: list[int] = []
    number = 0
    for members in by_normal.values():
        ways = _choices_along(readings, members)
        if ways:
            choices += ways
            owner += [number] * len(ways)
            number += 1
    return choices, owner


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
