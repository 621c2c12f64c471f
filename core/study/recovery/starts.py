"""Where a fit begins: an isotropic crystal from the readings, and others around it."""

from collections import defaultdict
from collections.abc import Iterator, Sequence
from itertools import product

import numpy as np

from core.arrays import FloatArray
from core.study.recovery.model import Basis
from core.study.recovery.readings import Reading, direction_key
from core.tensor.notation import kelvin_to_stiffness, stiffness_to_kelvin
from core.tensor.symmetry import project

BATCHES = (1, 4, 12, 12, 11)
"""Starts tried together before the next look at the stopping rule: forty in all."""

_SPREADS = (0.05, 0.15, 0.3)  # relative anisotropy of the starts, in turn
_SUMS = ((0, 1, 5), (0, 2, 4), (1, 2, 3))  # C12 + C66, C13 + C55, C23 + C44
_USUAL_RATIO = 3.0  # of ρv² longitudinal to shear, where only one is measured
_LEAST_RATIO = 4.0 / 3.0 + 0.05  # a positive bulk modulus needs more than 4/3
_SOFTEST = 0.05  # of the stiffest: floor of the eigenstiffnesses the starts scatter about


def isotropic_start(readings: Sequence[Reading], density: float, basis: Basis) -> FloatArray:
    """Return the constants (P,) of an isotropic crystal with about these speeds.

    Longitudinal and shear modulus are medians of ρv² over what is marked, or looks, so.
    """
    fast, slow = _longitudinal_and_shear(readings)
    medians = [float(np.median(speeds)) for speeds in (fast, slow) if speeds]
    moduli = [1e-9 * density * speed**2 for speed in medians]
    if not slow:
        moduli.append(moduli[0] / _USUAL_RATIO)
    elif not fast:
        moduli.insert(0, moduli[0] * _USUAL_RATIO)
    longitudinal, shear = moduli
    if longitudinal < _LEAST_RATIO * shear:
        shear = longitudinal / _USUAL_RATIO
    table = np.zeros((6, 6))
    table[:3, :3] = longitudinal - 2.0 * shear
    table[np.arange(3), np.arange(3)] = longitudinal
    table[np.arange(3, 6), np.arange(3, 6)] = shear
    return basis.constants(table)


def _longitudinal_and_shear(readings: Sequence[Reading]) -> tuple[list[float], list[float]]:
    """Sort the speeds into longitudinal and shear."""
    fast: list[float] = []
    slow: list[float] = []
    unmarked: dict[tuple[int, ...], list[float]] = defaultdict(list)
    for reading in readings:
        mark = _is_longitudinal(reading)
        if mark is None:
            unmarked[direction_key(reading.direction, reading.kind)].append(reading.speed)
        else:
            (fast if mark else slow).append(reading.speed)
    for speeds in unmarked.values():
        if len(speeds) > 1 and max(speeds) > 1.2 * min(speeds):
            middle = (max(speeds) + min(speeds)) / 2
            fast += [speed for speed in speeds if speed > middle]
            slow += [speed for speed in speeds if speed <= middle]
    alone = [speeds[0] for speeds in unmarked.values() if len(speeds) == 1]
    if not fast and not slow:
        alone = alone or [speed for speeds in unmarked.values() for speed in speeds]
        limit = max(alone) / 1.3 if max(alone) > 1.3 * min(alone) else 0.0
        return [v for v in alone if v > limit], [v for v in alone if v <= limit]
    return fast, slow


def _is_longitudinal(reading: Reading) -> bool | None:
    """Tell what a reading is marked as; None where it is not marked."""
    if reading.sheet is not None:
        return reading.sheet == 1
    if reading.polarisation is None:
        return None
    if isinstance(reading.polarisation, tuple):
        return bool(abs(np.dot(reading.polarisation, reading.direction)) > 0.7)
    return reading.polarisation == "longitudinal"


def start_batches(
    first: FloatArray, also: Sequence[FloatArray], basis: Basis, seed: int
) -> Iterator[FloatArray]:
    """Yield batches (B, P) of starts.

    The first batch holds `first` and `also`. The third holds `first` with C12 + C66, C13 + C55
    and C23 + C44 reversed in all ways: crystals in which longitudinal and shear waves change
    places between directions. All others scatter about `first` by 5, 15 and 30 % of its
    eigenstiffnesses in turn, √C (1 + a H) √C in Kelvin form with H a random symmetric matrix,
    projected on the class.
    """
    rng = np.random.default_rng(seed)
    yield np.array([first, *also])
    yield _scattered(first, basis, BATCHES[1], rng)
    reversed_sums = with_reversed_sums(basis, first)
    yield np.concatenate([reversed_sums, _scattered(first, basis, BATCHES[2] - 7, rng)])
    for size in BATCHES[3:]:
        yield _scattered(first, basis, size, rng)


def with_reversed_sums(basis: Basis, constants: FloatArray) -> FloatArray:
    """Return the constants (7, P) with C12 + C66, C13 + C55, C23 + C44 reversed in all ways."""
    tables = []
    for chosen in list(product((False, True), repeat=3))[1:]:
        table = basis.table(constants)
        for reverse, (i, j, shear) in zip(chosen, _SUMS, strict=True):
            if reverse:
                table[i, j] = table[j, i] = -table[i, j] - 2.0 * table[shear, shear]
        tables.append(table)
    return basis.constants(np.array(tables))


def _scattered(
    first: FloatArray, basis: Basis, count: int, rng: np.random.Generator
) -> FloatArray:
    """Return crystals (count, P) scattered about the first start."""
    values, vectors = np.linalg.eigh(stiffness_to_kelvin(basis.table(first)))
    root = vectors * np.sqrt(np.maximum(values, _SOFTEST * values.max()))
    spread = np.resize(_SPREADS, count)
    noise = rng.standard_normal((count, 6, 6))
    noise = (noise + noise.transpose(0, 2, 1)) / 2.0
    kelvin = root @ (np.eye(6) + spread[:, None, None] * noise) @ root.T
    return basis.constants(project(kelvin_to_stiffness(kelvin), basis.cls))
