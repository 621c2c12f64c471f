"""A table of readings turned into arrays for the fit, and what the fit found in it."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional.medium import Medium
from core.directional.sphere import directions, dot
from core.directional.waves import group_velocities
from core.errors import InputError
from core.study.recovery.assignment import Assignment, assignment_of
from core.study.recovery.model import Basis, Survey, survey_of
from core.study.recovery.rays import wave_normals
from core.study.recovery.readings import Reading, Vector, direction_key
from core.tensor.stiffness import Stiffness

MOST_READINGS = 10_000
"""A survey has tens or hundreds; more than this is refused."""


@dataclass(frozen=True, eq=False)
class Problem:
    """Readings as phase speeds along wave normals.

    Attributes
    ----------
    readings : tuple of Reading
    survey : Survey
    assignment : Assignment
    cosine : (M,) array
        n . r of group speeds, 1 of phase speeds: speeds and σ are those measured times it.
    sigma : (M,) array
        Standard uncertainties of the speeds as measured, m/s, with that of the directions.
    lost : (M,) bool array
        Group speeds along whose ray no wave of their sheet was found.
    """

    readings: tuple[Reading, ...]
    survey: Survey
    assignment: Assignment
    cosine: FloatArray
    sigma: FloatArray
    lost: BoolArray

    @property
    def basis(self) -> Basis:
        """The constants that are sought."""
        return self.survey.basis

    @property
    def measured(self) -> FloatArray:
        """Speeds as measured, (M,), m/s."""
        return np.array([reading.speed for reading in self.readings])

    @property
    def is_group(self) -> BoolArray:
        """Which readings are group speeds, (M,)."""
        return np.array([reading.kind == "group" for reading in self.readings])

    def medium(self, constants: FloatArray) -> Medium:
        """Return the crystal of constants (P,)."""
        return Medium(Stiffness.from_voigt(self.basis.table(constants)), self.survey.density)


def problem_of(readings: Sequence[Reading], density: float, basis: Basis) -> Problem:
    """Return readings as arrays, with rays for the time being taken as wave normals.

    Raises
    ------
    InputError
        Without readings, with more than `MOST_READINGS`, or with a density that is none.
    """
    if not readings:
        raise InputError("There are no readings to fit.", "Enter at least one measured speed.")
    if len(readings) > MOST_READINGS:
        raise InputError(
            f"There are {len(readings):,} readings; no more than {MOST_READINGS:,} are fitted.",
            "Average repeated readings first.",
        )
    if not 0 < density < np.inf:
        raise InputError("The density must be more than zero.", "Give it in kg/m³.", "density")
    vectors, place = _distinct_normals(readings)
    return Problem(
        readings=tuple(readings),
        survey=survey_of(basis, density, vectors, place),
        assignment=assignment_of(readings, place),
        cosine=np.ones(len(readings)),
        sigma=np.array([reading.sigma for reading in readings]),
        lost=np.zeros(len(readings), dtype=bool),
    )


def _distinct_normals(readings: Sequence[Reading]) -> tuple[FloatArray, IntArray]:
    """Return the distinct directions (3, D) and which of them each reading has."""
    numbers: dict[tuple[int, ...], int] = {}
    vectors: list[Vector] = []
    place: list[int] = []
    for reading in readings:
        key = direction_key(reading.direction, reading.kind)
        if key not in numbers:
            numbers[key] = len(vectors)
            vectors.append(reading.direction)
        place.append(numbers[key])
    return np.array(vectors).T, np.array(place, dtype=np.intp)


def with_ray_normals(
    problem: Problem, constants: FloatArray, sheets: IntArray
) -> Problem:
    """Return the problem with the wave normals of its group speeds for a crystal.

    `sheets` (M,) are kept from here on: along a ray they are a matter of the normal.
    """
    group = problem.is_group
    rays = np.array([reading.direction for reading in problem.readings]).T
    normals = problem.survey.normals[:, problem.survey.place].copy()
    medium = problem.medium(constants)
    found = np.ones(group.size, dtype=bool)
    normals[:, group], found[group] = wave_normals(
        medium, rays[:, group], sheets[group], normals[:, group]
    )
    cosine = np.where(group, dot(normals, rays), 1.0)
    survey = survey_of(problem.basis, problem.survey.density, normals)
    return replace(
        problem,
        survey=survey,
        assignment=problem.assignment.with_fixed(group, sheets),
        cosine=cosine,
        lost=~found,
    )


def with_direction_sigma(
    problem: Problem, constants: FloatArray, sheets: IntArray, degrees: float
) -> Problem:
    """Return the problem with the uncertainty of the directions added to that of the speeds.

    A cut that is off by δ (standard uncertainty about each of two axes in the face) changes a
    phase speed by |V - v n| δ and a group speed by |V| |n - (n . r) r| δ/(n . r). The waves of
    one blank share its error; here they are taken as independent.
    """
    own = np.array([reading.sigma for reading in problem.readings])
    slopes = np.linalg.norm(_direction_slopes(problem, constants, sheets), axis=0)
    return replace(problem, sigma=np.hypot(own, np.radians(degrees) * slopes))


def _direction_slopes(
    problem: Problem, constants: FloatArray, sheets: IntArray
) -> FloatArray:
    """Return the change of each speed per radian of its direction, (3, M), m/s."""
    survey = problem.survey
    n = survey.normals[:, survey.place]
    group = group_velocities(problem.medium(constants), directions(n))
    velocity = 1e3 * group.velocity[sheets, :, np.arange(survey.count)].T
    rays = np.array([reading.direction for reading in problem.readings]).T
    along_ray = problem.measured * (n / problem.cosine - rays)
    slopes = np.where(problem.is_group, along_ray, velocity - dot(velocity, n) * n)
    return np.nan_to_num(slopes)
