"""Least and greatest speed of each of the three sheets.

Extremes of sorted sheets are often cusps on acoustic axes, where Newton's method for smooth
functions does not converge; so the acoustic axes are candidates themselves, and what has
converged to neither is searched on by a pattern search.
"""

from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional.christoffel import eigenvalues
from core.directional.medium import Medium
from core.directional.search.circles import ValueOf, chords, tangents
from core.directional.search.degeneracies import Degeneracies, degeneracies
from core.directional.search.local_waves import contraction, sheet_frames, sheet_objective
from core.directional.search.newton import ROUNDING, Descent, descend
from core.directional.search.settling import (
    PLATEAU,
    POLE,
    Candidates,
    Extreme,
    Settled,
    loosely_curved,
    settle,
)
from core.directional.sphere import SphereMesh, pair_products

SHEETS = ("fast", "middle", "slow")

_STARTS = 8  # the best grid directions per extreme; the winner was never below the fifth
_FLAT = 1e-10  # of the largest ρv²: a gradient below it has vanished
_CUSP_RADIUS = 1e-4  # radians: a trust radius below it stands before a cusp
_NEAR_BEST = 0.02  # of the largest ρv²: an unfinished search further off cannot win
_NEAR_AXIS = 0.05  # radians: so near a degeneracy that is as good, the search was for it
_RADII = np.geomspace(1e-4, 3e-2, 9)  # radians: where the best about a degeneracy is sought
_AZIMUTHS = (65, 17, 17)  # the azimuths tried, each time between the neighbours of the best
_PATTERN_STEPS = 60
_NO_WAVE = 1e-12  # of the largest ρv²: what is smaller is rounding, and no wave
_GOLDEN_ANGLE = 2.399963  # radians: turned by it, no pattern repeats
_GOALS = tuple((sheet, sign) for sheet in range(3) for sign in (1.0, -1.0))


@dataclass(frozen=True, eq=False)
class _Waves:
    """The operators of one medium, its grid and where its sheets meet."""

    medium: Medium
    operator: FloatArray  # (9, 9), see local_waves.contraction
    grid: FloatArray  # (3, N/2) ρv² on the mesh, GPa
    scale: float
    meeting: tuple[Degeneracies, Degeneracies]


@dataclass(frozen=True, eq=False)
class _Starts:
    """The searches of all six extremes: one row for each start."""

    goal: IntArray  # number in _GOALS
    sheet: IntArray
    sign: FloatArray
    n: FloatArray  # (M, 3)

    def continued(self, chosen: BoolArray, n: FloatArray) -> "_Starts":
        """Return some of the searches from where they are now, n (M, 3)."""
        return _Starts(self.goal[chosen], self.sheet[chosen], self.sign[chosen], n[chosen])


@dataclass(frozen=True, eq=False)
class _Meeting:
    """The degeneracies of one sheet as candidates for one of its extremes."""

    candidates: Candidates
    is_extreme: BoolArray  # whether nothing close by is better
    lower: FloatArray  # (M, 3) the best direction close by


def sheet_extremes(
    medium: Medium, mesh: SphereMesh
) -> dict[str, tuple[Extreme | None, Extreme | None]]:
    """Return the least and greatest speed in km/s of the sheets "fast", "middle", "slow".

    Parameters
    ----------
    medium : Medium
        With a density.
    mesh : SphereMesh
        The grid that the searches start from.

    Returns
    -------
    dict
        None for a least where ρv² is not positive in some direction, and for a greatest where
        it is positive nowhere (unstable media only). Directions in the axes of the medium.

    Raises
    ------
    ValueError
        For a medium without density.
    """
    density = medium.density
    if density is None:
        raise ValueError("speeds need a density")
    operator = contraction(medium.stiffness.tensor)
    grid = eigenvalues(medium.christoffel @ mesh.half.products)
    scale = float(np.abs(grid).max())
    waves = _Waves(medium, operator, grid, scale, degeneracies(operator))
    found = _candidates(waves, mesh)
    settled = [_settle(waves, goal, found[goal], density) for goal in range(len(_GOALS))]
    return {key: (settled[2 * k], settled[2 * k + 1]) for k, key in enumerate(SHEETS)}


def grid_starts(values: FloatArray, mesh: SphereMesh, most: int) -> tuple[IntArray, IntArray]:
    """Return the directions of the mesh at which quantities are locally least.

    Parameters
    ----------
    values : (K, N/2) array
        NaN where undefined.
    mesh : SphereMesh
    most : int
        The best so many of each quantity are kept.

    Returns
    -------
    quantity, direction : (M,) int arrays
        Row and column in `values`, quantity by quantity, best first.
    """
    known = np.where(np.isnan(values), np.inf, values)
    least = np.isfinite(known)
    for around in mesh.neighbours:
        least &= known <= known[:, around]
    row, column = np.nonzero(least)
    order = np.lexsort((known[row, column], row))
    row, column = row[order], column[order]
    rank = np.arange(row.size) - np.searchsorted(row, row)
    return row[rank < most], column[rank < most]


def _candidates(waves: _Waves, mesh: SphereMesh) -> list[Candidates]:
    """Run the searches of all six extremes and return the candidates of each."""
    sheets = np.array([sheet for sheet, _ in _GOALS])
    signs = np.array([sign for _, sign in _GOALS])
    signed = signs[:, None] * waves.grid[sheets]
    goal, column = grid_starts(signed, mesh, _STARTS)
    meetings = [_at_degeneracies(waves, number) for number in range(len(_GOALS))]
    limits = signed.min(axis=1) + _NEAR_BEST * waves.scale
    from_grid = _Starts(goal, sheets[goal], signs[goal], mesh.half.n[:, column].T)
    beside = [_beside(meetings[k], limits[k], k) for k in range(len(_GOALS))]
    starts = _all_starts([from_grid, *beside])
    smooth = _descend(waves, starts)
    found, unfinished = [], np.zeros(len(starts.goal), dtype=bool)
    for number, meeting in enumerate(meetings):
        mine = starts.goal == number
        own = _from_descent(smooth, mine)
        unfinished[mine] = _unfinished(waves, smooth, mine, own, meeting)
        found.append(_joined(own, meeting.candidates))
    if unfinished.any():
        rest = _pattern_search(waves, starts.continued(unfinished, smooth.frames[:, 0]))
        again = _descend(waves, rest)
        for number in np.unique(rest.goal):
            found[number] = _joined(found[number], _from_descent(again, rest.goal == number))
    return found


def _all_starts(parts: list[_Starts]) -> _Starts:
    return _Starts(
        np.concatenate([part.goal for part in parts]),
        np.concatenate([part.sheet for part in parts]),
        np.concatenate([part.sign for part in parts]),
        np.concatenate([part.n for part in parts]),
    )


def _descend(waves: _Waves, starts: _Starts) -> Descent:
    """Follow each start down to where the sheet is flat, or until it stands before a cusp."""
    frames = np.concatenate([starts.n[:, None], tangents(starts.n)], axis=1)
    objective = sheet_objective(waves.operator, starts.sheet, starts.sign)
    scale = np.full(len(frames), waves.scale)
    return descend(frames, objective, scale, 25, _FLAT, _CUSP_RADIUS)


def _from_descent(end: Descent, mine: BoolArray) -> Candidates:
    suspect = ~end.converged[mine] | loosely_curved(end.hessian[mine, :2, :2])
    return Candidates(end.value[mine], end.frames[mine], suspect)


def _at_degeneracies(waves: _Waves, goal: int) -> _Meeting:
    """Return the directions where a sheet meets a neighbour, as candidates for one extreme.

    Only at an isolated cone is it certain that no ring passes.
    """
    sheet, sign = _GOALS[goal]
    meeting = [waves.meeting[pair] for pair in (sheet - 1, sheet) if 0 <= pair <= 1]
    n = np.concatenate([each.candidates() for each in meeting])
    cones = np.concatenate([each.cones() for each in meeting])
    values = sign * sheet_frames(waves.operator, n).values[:, sheet]
    frames = np.concatenate([n[:, None], tangents(n)], axis=1)
    lower, around = _best_about(waves, frames, sheet, sign)
    is_extreme = around >= values - ROUNDING * waves.scale
    return _Meeting(Candidates(values, frames, ~cones), is_extreme, lower)


def _best_about(
    waves: _Waves, frames: FloatArray, sheet: int, sign: float
) -> tuple[FloatArray, FloatArray]:
    """Return the best direction (M, 3) close to each of some degeneracies, and its value (M,).

    A cone tilted until one side lies all but level is lower only in a narrow sector, so the
    azimuth is found first, by zooming on the smallest circle, and the distance along it then.
    """
    rows, sheets = np.arange(len(frames)), np.full(len(frames), sheet)
    azimuth, width = np.zeros(len(frames)), np.pi
    for count in _AZIMUTHS:
        tried = azimuth[:, None] + width * np.linspace(-1.0, 1.0, count)
        near = _displaced(frames, tried, np.full_like(tried, _RADII[0]))
        values = sign * _sheet_values(waves, near, sheets)
        azimuth, width = tried[rows, np.argmin(values, axis=1)], 2.0 * width / (count - 1)
    radii = np.broadcast_to(_RADII, (len(frames), _RADII.size))
    near = _displaced(frames, np.broadcast_to(azimuth[:, None], radii.shape), radii)
    values = sign * _sheet_values(waves, near, sheets)
    pick = np.argmin(values, axis=1)
    return near[rows, pick], values[rows, pick]


def _displaced(frames: FloatArray, azimuth: FloatArray, radius: FloatArray) -> FloatArray:
    """Return directions (M, K, 3) at angles and azimuths (M, K) from frames (M, 3, 3)."""
    sine = np.sin(radius)
    aside = (sine * np.cos(azimuth), sine * np.sin(azimuth))
    result: FloatArray = np.stack([np.cos(radius), *aside], axis=2) @ frames
    return result


def _beside(meeting: _Meeting, limit: float, goal: int) -> _Starts:
    """Return starts beside those degeneracies that are good, but not the best about them."""
    sheet, sign = _GOALS[goal]
    n = meeting.lower[~meeting.is_extreme & (meeting.candidates.value <= limit)]
    return _Starts(np.full(len(n), goal), np.full(len(n), sheet), np.full(len(n), sign), n)


def _unfinished(
    waves: _Waves, end: Descent, mine: BoolArray, own: Candidates, meeting: _Meeting
) -> BoolArray:
    """Tell which starts of one extreme have not converged and could still win.

    One that stands before a degeneracy that is extreme itself, and as good, has arrived.
    """
    at, value = meeting.candidates.frames[:, 0], meeting.candidates.value
    best = min(own.value.min(initial=np.inf), value.min(initial=np.inf))
    open_ends: BoolArray = ~end.converged[mine] & (own.value <= best + _NEAR_BEST * waves.scale)
    for i in np.flatnonzero(open_ends):
        near = chords(at, own.frames[i, 0]) < _NEAR_AXIS
        open_ends[i] = not (near & meeting.is_extreme & (value <= own.value[i])).any()
    return open_ends


def _pattern_search(waves: _Waves, starts: _Starts) -> _Starts:
    """Move each start to the best of eight neighbours, nearer and nearer, turned every time.

    It needs no derivative, and so also ends on cusps and on edges where two sheets cross.
    """
    n, rows = starts.n.copy(), np.arange(len(starts.n))
    best = starts.sign * _sheet_values(waves, n[:, None], starts.sheet)[:, 0]
    step = np.full(len(n), 0.01)
    for turn in range(_PATTERN_STEPS):
        angle = np.arange(8) * (np.pi / 4) + turn * _GOLDEN_ANGLE
        aside = np.stack([np.cos(angle), np.sin(angle)], axis=1) @ tangents(n)
        tried = n[:, None] + step[:, None, None] * aside
        tried /= np.linalg.norm(tried, axis=2, keepdims=True)
        values = starts.sign[:, None] * _sheet_values(waves, tried, starts.sheet)
        pick = np.argmin(values, axis=1)
        better = values[rows, pick] < best
        n[better], best[better] = tried[rows, pick][better], values[rows, pick][better]
        step *= np.where(better, 1.3, 0.5)
        if step.max() < 1e-9:
            break
    return _Starts(starts.goal, starts.sheet, starts.sign, n)


def _sheet_values(waves: _Waves, n: FloatArray, sheet: IntArray) -> FloatArray:
    """Return ρv² (M, K) of one sheet for each row of directions (M, K, 3)."""
    values = eigenvalues(waves.medium.christoffel @ pair_products(n.reshape(-1, 3).T))
    rows: FloatArray = values.reshape(3, *n.shape[:2])[sheet, np.arange(len(n))]
    return rows


def _joined(first: Candidates, second: Candidates) -> Candidates:
    return Candidates(
        np.concatenate([first.value, second.value]),
        np.concatenate([first.frames, second.frames]),
        np.concatenate([first.suspect, second.suspect]),
    )


def _settle(waves: _Waves, goal: int, found: Candidates, density: float) -> Extreme | None:
    """Return one extreme in km/s, or None where it is not the speed of a wave."""
    sheet, sign = _GOALS[goal]
    values = waves.grid[sheet]
    if values.max() - values.min() <= PLATEAU * waves.scale:
        settled = Settled(sign * float(values[0]), POLE, None, "all")
    else:
        settled = settle(found, _value_of(waves, sheet, sign), waves.scale)
    square = sign * settled.value
    if square <= _NO_WAVE * waves.scale:
        return None
    speed = float(np.sqrt(1e3 * square / density))
    return Extreme(speed, settled.direction, None, settled.where)


def _value_of(waves: _Waves, sheet: int, sign: float) -> ValueOf:
    def value_of(n: FloatArray) -> FloatArray:
        values = eigenvalues(waves.medium.christoffel @ pair_products(n))
        result: FloatArray = sign * values[sheet]
        return result

    return value_of
