"""Global extremes: the least and greatest value of every quantity over all directions.

A grid alone errs by up to 10 %. Here it only gives starts: every local extreme of a mesh of
1,281 directions is followed by Newton's method to where the quantity is flat, to rounding. The
linear compressibility needs no search, being a quadratic form.
"""

from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray, IntArray, read_only
from core.directional.medium import Medium
from core.directional.moduli import PER_TPA, ElasticFields
from core.directional.search.circles import Circle, ValueOf, canonical, tangents
from core.directional.search.local_moduli import Modulus, modulus_objective
from core.directional.search.newton import descend
from core.directional.search.settling import (
    PLATEAU,
    POLE,
    Candidates,
    Extreme,
    Settled,
    loosely_curved,
    settle,
)
from core.directional.search.sheet_extremes import SHEETS, grid_starts, sheet_extremes
from core.directional.sphere import SphereMesh, directions, sphere_mesh
from core.task import Ticker
from core.tensor.notation import compliance_to_kelvin

__all__ = ["KEYS", "SEARCH_LEVEL", "Extreme", "extremes"]

KEYS = ("young", "compressibility", "shear", "poisson", *SHEETS)

SEARCH_LEVEL = 4  # 1,281 directions: no extreme missed in 2,000 random triclinic crystals
_STARTS = 8  # the best grid directions per extreme; the winner was never below the second
_EQUAL = 1e-9  # of the largest compressibility: eigenvalues nearer than that are one

_NOT_POSITIVE = 1e-12  # of the largest compliance: what is smaller is zero but for rounding

Pair = tuple[Extreme | None, Extreme | None]


@dataclass(frozen=True)
class _Goal:
    """One elastic extreme: what to minimise, with which sign, and the name of its m."""

    key: str
    kind: Modulus
    sign: float
    transverse: str | None


# E and G are least where 1/E and 1/G are greatest.
_GOALS = (
    _Goal("young", Modulus.EXTENSION, -1.0, None),
    _Goal("young", Modulus.EXTENSION, 1.0, None),
    _Goal("shear", Modulus.SHEAR, -1.0, "shear_least"),
    _Goal("shear", Modulus.SHEAR, 1.0, "shear_greatest"),
    _Goal("poisson", Modulus.POISSON, 1.0, "poisson_least"),
    _Goal("poisson", Modulus.POISSON, -1.0, "poisson_greatest"),
)


def extremes(medium: Medium, ticker: Ticker | None = None) -> dict[str, Pair]:
    """Find the least and greatest value of every quantity over all directions.

    Parameters
    ----------
    medium : Medium
    ticker : Ticker, optional
        Told of progress; may cancel.

    Returns
    -------
    dict
        For each of `KEYS` the least and the greatest as `Extreme`, directions in the axes of
        the medium: "young" and "shear" in GPa, "compressibility" in 1/TPa, "poisson", and the
        speeds of the sheets "fast", "middle" and "slow" in km/s. The shear modulus and
        Poisson's ratio are extreme over load and transverse direction both.

    Notes
    -----
    None stands for what is not defined: the three sheets without a density; all elastic
    quantities of a singular stiffness; and, for an unstable one, the greatest E or G when 1/E
    or 1/G is not positive everywhere (it has no bound), both ν when 1/E is not (no bound
    either), a least speed when ρv² is not positive everywhere, and anything that is positive
    nowhere. What remains is the extreme over the directions in which it is defined.

    Newton's method on the turns of a frame n, m, l; see `core.directional.search.newton`.
    """
    ticker = ticker or Ticker()
    mesh = sphere_mesh(SEARCH_LEVEL)
    found: dict[str, Pair] = dict.fromkeys(KEYS, (None, None))
    ticker.tick(0.0)
    if np.isfinite(medium.compliance).all():
        found["compressibility"] = _compressibility(medium)
        found.update(_elastic(medium, mesh))
    ticker.tick(0.5)
    if medium.density is not None:
        found.update(sheet_extremes(medium, mesh))
    ticker.tick(1.0)
    return found


def _compressibility(medium: Medium) -> Pair:
    """Return the extremes of β: the outer eigenvalues of S_ijkk, in 1/TPa."""
    values, vectors = np.linalg.eigh(PER_TPA * medium.compressibility_matrix)
    near = np.diff(values) <= _EQUAL * np.abs(values).max()
    return (
        _principal(values[0], vectors, 0, (bool(near[0]), bool(near.all()))),
        _principal(values[2], vectors, 2, (bool(near[1]), bool(near.all()))),
    )


def _principal(
    value: float, vectors: FloatArray, own: int, shared: tuple[bool, bool]
) -> Extreme:
    """Return one extreme of β, in 1/TPa.

    `shared` tells whether the middle eigenvalue, and whether every one, equals it. With the
    middle one it is shared by the great circle normal to the third eigenvector.
    """
    with_middle, with_all = shared
    if with_all:
        return Extreme(float(value), POLE, None, "all")
    if with_middle:
        direction = Circle(canonical(vectors[:, 2 - own][None])[0], 0.0).representative
        return Extreme(float(value), read_only(direction), None, "ring")
    return Extreme(float(value), read_only(canonical(vectors[:, own][None])[0]), None, "point")


def _elastic(medium: Medium, mesh: SphereMesh) -> dict[str, Pair]:
    """Return the extremes of E, G and ν."""
    fields = ElasticFields(medium, mesh.half)
    grid = np.stack([_objective(goal, fields) for goal in _GOALS])
    known = np.where(np.isnan(grid), 0.0, np.abs(grid))
    scales = known.max(axis=1)
    found = _candidates(fields, mesh, grid, scales)
    settled = [_settle(medium, number, grid, found, scales) for number in range(len(_GOALS))]
    if settled[1] is None:  # 1/E is not positive everywhere
        settled[4] = settled[5] = None
    return {
        key: (settled[2 * k], settled[2 * k + 1])
        for k, key in enumerate(("young", "shear", "poisson"))
    }


def _objective(goal: _Goal, fields: ElasticFields) -> FloatArray:
    """Return sign × (1/E, 1/G or ν), (N,), best over m.

    NaN where 1/G is not positive or ν not defined; 1/E is given with either sign.
    """
    if goal.kind == Modulus.EXTENSION:
        return goal.sign * fields.axial
    greatest = goal.transverse is not None and goal.transverse.endswith("greatest")
    if goal.kind == Modulus.SHEAR:
        return goal.sign / fields.shear_extremes[int(greatest)]
    return goal.sign * fields.poisson_extremes[int(greatest)]


def _candidates(
    fields: ElasticFields, mesh: SphereMesh, grid: FloatArray, scales: FloatArray
) -> list[Candidates]:
    """Follow the best grid directions of all goals at once; return the ends goal by goal."""
    number, column = grid_starts(grid, mesh, _STARTS)
    kinds = np.array([goal.kind for goal in _GOALS])[number]
    signs = np.array([goal.sign for goal in _GOALS])[number]
    frames = np.concatenate(
        [_frames(goal, fields, column[number == k]) for k, goal in enumerate(_GOALS)]
    )
    objective = modulus_objective(compliance_to_kelvin(fields.medium.compliance), kinds, signs)
    end = descend(frames, objective, scales[number])
    ends = []
    for k, goal in enumerate(_GOALS):
        mine = number == k
        free = 2 if goal.kind == Modulus.EXTENSION else 3
        suspect = loosely_curved(end.hessian[mine, :free, :free])
        ends.append(Candidates(end.value[mine], end.frames[mine], suspect))
    return ends


def _frames(goal: _Goal, fields: ElasticFields, column: IntArray) -> FloatArray:
    """Return frames (K, 3, 3) at some of the directions, m where the goal is best."""
    n = fields.directions.n[:, column].T
    if goal.transverse is None:
        return np.concatenate([n[:, None], tangents(n)], axis=1)
    m = fields.transverse(goal.transverse)[:, column].T
    return np.stack([n, m, np.cross(n, m)], axis=1)


def _settle(
    medium: Medium,
    number: int,
    grid: FloatArray,
    found: list[Candidates],
    scales: FloatArray,
) -> Extreme | None:
    """Return one extreme, or None where it is not defined (see `extremes`)."""
    goal, row, scale = _GOALS[number], grid[number], scales[number]
    unbounded = goal.kind == Modulus.POISSON or goal.sign > 0
    if len(found[number].value) == 0 or (unbounded and np.isnan(row).any()):
        return None
    if row.max() - row.min() <= PLATEAU * scale:
        settled = Settled(float(row[0]), POLE, None, "all")
    else:
        exchangeable = goal.kind == Modulus.SHEAR
        settled = settle(found[number], _value_of(goal, medium), scale, exchangeable)
    value = goal.sign * settled.value
    if goal.kind != Modulus.POISSON:
        if value <= _NOT_POSITIVE * scale:
            return None
        value = 1.0 / value
    return Extreme(value, settled.direction, _transverse(goal, medium, settled), settled.where)


def _value_of(goal: _Goal, medium: Medium) -> ValueOf:
    def value_of(n: FloatArray) -> FloatArray:
        return _objective(goal, ElasticFields(medium, directions(n)))

    return value_of


def _transverse(goal: _Goal, medium: Medium, settled: Settled) -> FloatArray | None:
    """Return the m of a place, from the kernel where the search does not know it."""
    if goal.transverse is None:
        return None
    if settled.transverse is not None:
        return settled.transverse
    m = ElasticFields(medium, directions(settled.direction)).transverse(goal.transverse)
    return read_only(canonical(m.T)[0])
