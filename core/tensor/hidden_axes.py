"""Axes that a table hides: the rotation about which it comes nearest to a crystal class.

For a class with projector P (Kelvin form) the rest ‖C' − P(C')‖ of the turned table C' is
minimised over all rotations by damped Gauss–Newton steps from many starts at once: frames of
the two contractions C_ijkk and C_ikjk (their eigenvectors are symmetry axes of any symmetric
table; Cowin & Mehrabadi 1987, Q. J. Mech. Appl. Math. 40, 451) and rotations spread over all.
Newton steps carry the best of them to the minimum.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from core.arrays import BoolArray, FloatArray, read_only
from core.tensor.closest import log_distance
from core.tensor.notation import KELVIN_WEIGHTS, kelvin_rotation
from core.tensor.stiffness import Stiffness
from core.tensor.symmetry import (
    CLASS_KEYS,
    CrystalClass,
    crystal_class,
    distance,
    kelvin_projector,
    laue_rotations,
)

AS_ENTERED = 1e-9  # relative distance below which the given axes are those of the class

_SPREAD_STARTS = 48
_ITERATIONS = 20
_NEWTON_STEPS = 30
_FINALISTS = 24
_LONGEST_STEP = 0.4  # radians
_ROUGH = 1e-3  # radians, and of ‖C‖: where the first search leaves off
_LEAST_GAIN = 1e-14  # of the rest squared: what a Newton step must promise to be made
_FLATTEST = 1e-6  # of the largest curvature: in flatter directions steps are held back
_ALIKE = 1e-9  # of ‖C‖: rests that differ by less are the same minimum
_FLAT = 1e-9  # of ‖C‖: residuals that change less with a turn do not fix it

# The seven-constant classes are the six-constant ones turned about z, so their hidden axes are
# the same search; it is done in the class without a free turn.
_SOUGHT_AS = {"tetragonal_7": "tetragonal_6", "trigonal_7": "trigonal_6"}
_FREE_AXIS = {"tetragonal_7": 2, "trigonal_7": 2, "hexagonal": 2}
_AXIS_NUMBER = {"x": 0, "y": 1, "z": 2}
_CROSS = read_only(np.array([
    [0, 0, 0, 0, 0, -1, 0, 1, 0],
    [0, 0, 1, 0, 0, 0, -1, 0, 0],
    [0, -1, 0, 1, 0, 0, 0, 0, 0],
]))  # row k, as 3x3: multiplies crosswise by the k-th unit vector


@dataclass(frozen=True, eq=False)
class HiddenAxes:
    """Where a table comes nearest to a class.

    Attributes
    ----------
    class_key, unique_axis : str
    distance_percent : float
        100 ‖C' − P(C')‖/‖C‖ in Kelvin form, about the axes found.
    log_distance : float
        ‖ln C' − P(ln C')‖ about the same axes; NaN for a crystal that is not stable.
    rotation : ndarray, shape (3, 3)
        Rows are the axes of the class in the given axes, v_class = rotation @ v_given;
        of all that serve equally, the one that turns least.
    turn_deg : float
        0 to 180.
    turn_axis : tuple of 3 floats
        Unit vector, given axes: the given axes, turned by `turn_deg` about it, counter-
        clockwise for somebody at whom it points, become the axes of the class.
    axis_uncertainty_deg : float or None
        Standard uncertainty of the axes, about whichever direction they are known worst;
        None without uncertainties of the constants, or where every axis is as good.
    """

    class_key: str
    unique_axis: str
    distance_percent: float
    log_distance: float
    rotation: FloatArray
    turn_deg: float
    turn_axis: tuple[float, float, float]
    axis_uncertainty_deg: float | None = None


def hidden_axes(
    stiffness: Stiffness, cls: CrystalClass, std: FloatArray | None = None
) -> HiddenAxes:
    """Return the axes about which a table comes nearest to a class.

    Parameters
    ----------
    stiffness : Stiffness
        In any axes.
    cls : CrystalClass
    std : ndarray, shape (6, 6), optional
        Standard uncertainties of the constants, GPa, taken as independent.

    Returns
    -------
    HiddenAxes
        The given axes themselves where the table has the form of the class in them, and for
        the triclinic and isotropic classes, which know no axes.
    """
    return _describe(stiffness, cls, _best_rotation(stiffness, cls), std)


def nearest_classes(
    stiffness: Stiffness, std: FloatArray | None = None, unique_axis: str = "y"
) -> tuple[HiddenAxes, ...]:
    """Return `hidden_axes` for every class, in the order of `CLASS_KEYS`.

    `unique_axis` says along which axis monoclinic crystals are written.
    """
    sought: dict[str, FloatArray] = {}
    found = []
    for key in CLASS_KEYS:
        cls, search = crystal_class(key, unique_axis), _SOUGHT_AS.get(key, key)
        if search not in sought:
            sought[search] = _search(stiffness, crystal_class(search, unique_axis))
        rotation = _least_turn(sought[search], stiffness, cls)
        found.append(_describe(stiffness, cls, rotation, std))
    return tuple(found)


def _best_rotation(stiffness: Stiffness, cls: CrystalClass) -> FloatArray:
    search = crystal_class(_SOUGHT_AS.get(cls.key, cls.key), cls.unique_axis)
    return _least_turn(_search(stiffness, search), stiffness, cls)


def _describe(
    stiffness: Stiffness, cls: CrystalClass, rotation: FloatArray, std: FloatArray | None
) -> HiddenAxes:
    angle, axis = turn_of(rotation)
    axis_known = std is not None and cls.key not in ("triclinic", "isotropic")
    return HiddenAxes(
        class_key=cls.key,
        unique_axis=cls.unique_axis,
        distance_percent=100 * distance(stiffness.rotate(rotation).voigt, cls),
        log_distance=log_distance(stiffness, cls, rotation),
        rotation=read_only(rotation),
        turn_deg=angle,
        turn_axis=axis,
        axis_uncertainty_deg=(
            _axis_uncertainty(stiffness, cls, rotation, std)
            if axis_known and std is not None else None
        ),
    )


# ------------------------------------------------------------------------- search
def _search(stiffness: Stiffness, cls: CrystalClass) -> FloatArray:
    """Return rotations (K, 3, 3) at which the class fits equally well, and best of all."""
    identity = np.eye(3)[None]
    if cls.key in ("triclinic", "isotropic") or distance(stiffness.voigt, cls) < AS_ENTERED:
        return identity
    kelvin = stiffness.kelvin / float(np.linalg.norm(stiffness.kelvin))
    starts = np.concatenate([identity, _contraction_frames(stiffness), _spread_rotations()])
    rotations, rests = _descend(kelvin, cls, starts)
    best = np.argsort(rests, kind="stable")[:_FINALISTS]
    near = best[np.sqrt(rests[best]) <= 1.05 * np.sqrt(rests[best[0]]) + _ROUGH]
    rotations, rests = _settle(kelvin, cls, rotations[near])
    alike = np.sqrt(rests) <= np.sqrt(rests.min()) + _ALIKE
    found: FloatArray = rotations[alike]
    return found


def _descend(
    kelvin: FloatArray, cls: CrystalClass, starts: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return how far Gauss–Newton steps lead from starts (M, 3, 3), and the rests squared (M,).

    `kelvin` is scaled to norm 1. A step that does not shrink the rest is not taken, and the
    next one is damped more (Levenberg–Marquardt, scaled by the trace).
    """
    rotations = starts.copy()
    residual, slopes = _residuals(kelvin, cls, rotations)
    rests = (residual * residual).sum(axis=1)
    damping = np.full(len(starts), 1e-2)
    live = np.arange(len(starts))
    for _ in range(_ITERATIONS):
        steps = _steps(residual, slopes, damping[live])
        trials = exponential(steps) @ rotations[live]
        new_residual, new_slopes = _residuals(kelvin, cls, trials)
        new_rests = (new_residual * new_residual).sum(axis=1)
        better = new_rests <= rests[live]
        rotations[live[better]], rests[live[better]] = trials[better], new_rests[better]
        residual[better], slopes[better] = new_residual[better], new_slopes[better]
        damping[live] = np.where(better, damping[live] * 0.2, damping[live] * 5)
        going = _unsettled(steps, better, damping[live])
        live, residual, slopes = live[going], residual[going], slopes[going]
        if live.size == 0:
            break
    return rotations, rests


def _settle(
    kelvin: FloatArray, cls: CrystalClass, starts: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return the minima next to rotations (M, 3, 3), to rounding, and the rests squared (M,).

    Newton steps with the whole second derivative; Gauss–Newton would creep where the rest is
    large. Negative curvatures are turned round, so every step leads downhill.
    """
    rotations, reach = starts.copy(), np.full(len(starts), _LONGEST_STEP)
    rests, gradient, curvature = _expansion(kelvin, cls, rotations)
    for _ in range(_NEWTON_STEPS):
        values, vectors = np.linalg.eigh(curvature)
        floor = _FLATTEST * np.abs(values).max(axis=1, keepdims=True) + 1e-300
        along = (gradient[:, None] @ vectors)[:, 0] / np.maximum(np.abs(values), floor)
        steps = _shortened(-(vectors @ along[:, :, None])[..., 0], reach)
        if (-(gradient * steps).sum(axis=1) <= _LEAST_GAIN * rests + _LEAST_GAIN**2).all():
            break
        trials = exponential(steps) @ rotations
        new = _expansion(kelvin, cls, trials)
        better = new[0] <= rests
        rotations[better], rests[better] = trials[better], new[0][better]
        gradient[better], curvature[better] = new[1][better], new[2][better]
        reach = np.where(better, reach, reach * 0.25)
    return rotations, rests


def _expansion(
    kelvin: FloatArray, cls: CrystalClass, rotations: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return the rests squared (M,), half their gradients (M, 3) and half their Hessians."""
    turns = kelvin_rotation(rotations)
    turned = (turns @ kelvin @ turns.transpose(0, 2, 1)).reshape(-1, 36)
    stacked = (turned @ _curved_operator(cls)).reshape(len(rotations), 13, -1)
    residual, slopes, curves = stacked[:, 0], stacked[:, 1:4], stacked[:, 4:]
    rests = (residual * residual).sum(axis=1)
    gradient = (slopes @ residual[:, :, None])[..., 0]
    bending = (curves @ residual[:, :, None]).reshape(-1, 3, 3)
    return rests, gradient, slopes @ slopes.transpose(0, 2, 1) + bending


def _unsettled(steps: FloatArray, better: BoolArray, damping: FloatArray) -> BoolArray:
    """Return which starts go on: not those with tiny steps, nor those damped to a stop."""
    lengths = np.sqrt((steps * steps).sum(axis=1))
    going: BoolArray = (lengths > _ROUGH) & (better | (damping < 1e6))
    return going


def _residuals(
    kelvin: FloatArray, cls: CrystalClass, rotations: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return what the class does not explain, (M, K), and its slopes with turns, (M, 3, K)."""
    turns = kelvin_rotation(rotations)
    turned = (turns @ kelvin @ turns.transpose(0, 2, 1)).reshape(-1, 36)
    stacked = (turned @ _rest_operator(cls)).reshape(len(rotations), 4, -1)
    return stacked[:, 0], stacked[:, 1:]


@lru_cache(maxsize=32)
def _rest_operator(cls: CrystalClass) -> FloatArray:
    """Return (36, 4K): the K components outside the class, then their slopes with turns."""
    basis = complement_basis(cls)
    columns = [basis, *(_generator_pair(k).T @ basis for k in range(3))]
    return read_only(np.concatenate(columns, axis=1))


@lru_cache(maxsize=32)
def _curved_operator(cls: CrystalClass) -> FloatArray:
    """Return (36, 13K): `_rest_operator`, then the nine second derivatives with turns."""
    basis, pairs = complement_basis(cls), [_generator_pair(k) for k in range(3)]
    second = [(a @ b + b @ a).T @ basis / 2 for a in pairs for b in pairs]
    return read_only(np.concatenate([_rest_operator(cls), *second], axis=1))


@lru_cache(maxsize=32)
def complement_basis(cls: CrystalClass) -> FloatArray:
    """Return orthonormal flattened Kelvin tables outside a class, (36, 21 − constants)."""
    swap = np.eye(36).reshape(6, 6, 36).transpose(1, 0, 2).reshape(36, 36)
    outside = (np.eye(36) + swap) / 2 - kelvin_projector(cls)
    values, vectors = np.linalg.eigh(outside)
    return read_only(vectors[:, values > 0.5])


@lru_cache(maxsize=3)
def kelvin_generator(k: int) -> FloatArray:
    """Return the (6, 6) slope of `kelvin_rotation` with the angle about axis `k`, at none.

    The central difference is exact, for `kelvin_rotation` is quadratic in the matrix.
    """
    cross = _cross(np.eye(3)[k])
    return read_only(
        (kelvin_rotation(np.eye(3) + cross) - kelvin_rotation(np.eye(3) - cross)) / 2
    )


def _generator_pair(k: int) -> FloatArray:
    """Return the (36, 36) slope of a flattened table with the angle about axis `k`."""
    generator, identity = kelvin_generator(k), np.eye(6)
    slope: FloatArray = np.kron(generator, identity) + np.kron(identity, generator)
    return slope


def _steps(residual: FloatArray, slopes: FloatArray, damping: FloatArray) -> FloatArray:
    """Return damped Gauss–Newton turns (M, 3), none longer than `_LONGEST_STEP`."""
    normal = slopes @ slopes.transpose(0, 2, 1)
    gradient = (slopes @ residual[:, :, None])[..., 0]
    trace = np.trace(normal, axis1=1, axis2=2)
    ridge = (damping + 1e-12) * trace + 1e-300
    steps = -np.linalg.solve(normal + ridge[:, None, None] * np.eye(3), gradient[..., None])
    turns: FloatArray = steps[..., 0]
    return _shortened(turns, np.full(len(turns), _LONGEST_STEP))


def _shortened(turns: FloatArray, reach: FloatArray) -> FloatArray:
    """Return turns (M, 3), those longer than `reach` (M,) cut to it."""
    lengths = np.sqrt((turns * turns).sum(axis=1))
    shares: FloatArray = np.minimum(1.0, reach / np.maximum(lengths, 1e-300))
    return turns * shares[:, None]


def exponential(turns: FloatArray) -> FloatArray:
    """Return the rotations (M, 3, 3) by rotation vectors (M, 3), Rodrigues' formula."""
    angles = np.maximum(np.sqrt((turns * turns).sum(axis=1)), 1e-12)[:, None, None]
    cross = _cross(turns)
    half = np.sin(angles / 2) / angles
    rotations: FloatArray = np.eye(3) + np.sin(angles) / angles * cross
    rotations += 2 * half * half * (cross @ cross)
    return rotations


def _cross(vectors: FloatArray) -> FloatArray:
    """Return the matrices (..., 3, 3) that multiply crosswise by vectors (..., 3)."""
    flat: FloatArray = vectors @ _CROSS
    return flat.reshape(*vectors.shape, 3)


# ------------------------------------------------------------------------- starts
def _contraction_frames(stiffness: Stiffness) -> FloatArray:
    """Return frames of the eigenvectors of C_ijkk, C_ikjk, their sum and their difference.

    Each in its three cyclic orders, and the least turns that bring z onto each eigenvector.
    """
    dilatational = np.einsum("ijkk->ij", stiffness.tensor)
    voigt = np.einsum("ikjk->ij", stiffness.tensor)
    mixed = [part / (np.abs(np.trace(part)) or 1.0) for part in (dilatational, voigt)]
    frames = []
    for tensor in (dilatational, voigt, mixed[0] + mixed[1], mixed[0] - mixed[1]):
        rows = np.linalg.eigh(tensor)[1].T.copy()
        rows[2] *= np.sign(np.linalg.det(rows))
        frames += [rows, rows[[1, 2, 0]], rows[[2, 0, 1]]]
        frames += [turn_onto(row, 2) for row in rows]
    return np.array(frames)


@lru_cache(maxsize=1)
def _spread_rotations() -> FloatArray:
    """Return rotations spread over all, the same every time (unit quaternions of normals)."""
    quaternions = np.random.default_rng(13).standard_normal((_SPREAD_STARTS, 4))
    quaternions /= np.linalg.norm(quaternions, axis=1, keepdims=True)
    half_angles = np.arccos(np.clip(quaternions[:, 0], -1.0, 1.0))
    axes = quaternions[:, 1:] / np.linalg.norm(quaternions[:, 1:], axis=1, keepdims=True)
    return read_only(exponential(2 * half_angles[:, None] * axes))


# --------------------------------------------------------------------- least turn
def _least_turn(rotations: FloatArray, stiffness: Stiffness, cls: CrystalClass) -> FloatArray:
    """Return, of all rotations that serve a class as well as those found, the least.

    Rotations that carry the class into itself are made before those found; where the class
    leaves the turn about its axis free, that turn is chosen.
    """
    if distance(stiffness.voigt, cls) < AS_ENTERED:
        return np.eye(3)
    free = _free_axis(cls)
    if free is not None:
        candidates = np.array([turn_onto(rotation[free], free) for rotation in rotations])
    else:
        equal = _self_rotations(cls)
        candidates = (equal[:, None] @ rotations[None]).reshape(-1, 3, 3)
    cosines = np.trace(candidates, axis1=1, axis2=2)
    first = int(np.argmax(cosines > cosines.max() - 1e-9))
    chosen: FloatArray = candidates[first]
    return chosen


def _free_axis(cls: CrystalClass) -> int | None:
    """Return the coordinate axis about which turns lead from the class to itself, if any."""
    if cls.key == "monoclinic":
        return _AXIS_NUMBER[cls.unique_axis]
    return _FREE_AXIS.get(cls.key)


@lru_cache(maxsize=32)
def _self_rotations(cls: CrystalClass) -> FloatArray:
    """Return rotations of the axes that carry the tables of a class into one another.

    Besides the Laue group these are relabellings of the axes (orthorhombic), 45° about z
    (tetragonal) and 60° about z, which changes the sign of C14 (trigonal).
    """
    if cls.key in ("orthorhombic", "cubic"):
        return laue_rotations(crystal_class("cubic"))
    if cls.key == "trigonal_6":
        return laue_rotations(crystal_class("hexagonal"))
    group = laue_rotations(cls)
    if cls.key == "tetragonal_6":
        eighth = exponential(np.array([[0.0, 0.0, np.pi / 4]]))
        group = np.concatenate([group, eighth @ group])
    return read_only(group)


def turn_onto(vector: FloatArray, axis: int) -> FloatArray:
    """Return the least rotation (3, 3) that carries ±`vector` (unit) to a coordinate axis."""
    target = np.eye(3)[axis]
    source = vector if vector[axis] >= 0 else -vector
    cross, cosine = _cross(_cross(source) @ target), float(source @ target)
    rotation: FloatArray = np.eye(3) + cross + cross @ cross / (1 + cosine)
    return rotation


def turn_of(rotation: FloatArray) -> tuple[float, tuple[float, float, float]]:
    """Return by how much, in degrees, and about which axis the axes of a frame are turned.

    Parameters
    ----------
    rotation : ndarray, shape (3, 3)
        Rows are the turned axes in the old frame.

    Returns
    -------
    float, tuple of 3 floats
        0 to 180, and a unit vector in the old frame (z when nothing is turned).

    Notes
    -----
    From the quaternion, read off its largest component: accurate also near 180°.
    """
    R = np.asarray(rotation).T
    skew = np.array([R[2, 1] - R[1, 2], R[0, 2] - R[2, 0], R[1, 0] - R[0, 1]])
    trace = float(np.trace(R))
    outer = np.empty((4, 4))  # four times the quaternion times itself
    outer[0, 0], outer[0, 1:], outer[1:, 0] = 1 + trace, skew, skew
    outer[1:, 1:] = R + R.T + (1 - trace) * np.eye(3)
    quaternion = outer[int(np.argmax(np.diag(outer)))]
    quaternion = quaternion / np.linalg.norm(quaternion)
    if quaternion[0] < 0:
        quaternion = -quaternion
    length = float(np.linalg.norm(quaternion[1:]))
    angle = float(np.degrees(2 * np.arctan2(length, quaternion[0])))
    if length < 1e-15:
        return 0.0, (0.0, 0.0, 1.0)
    x, y, z = (float(component) for component in quaternion[1:] / length)
    return angle, (x, y, z)


# -------------------------------------------------------------------- uncertainty
def _axis_uncertainty(
    stiffness: Stiffness, cls: CrystalClass, rotation: FloatArray, std: FloatArray
) -> float | None:
    """Return the largest standard uncertainty of a turn of the axes found, degrees.

    First order: a change δC of the constants moves the minimum by −J⁺ δr, with J the slopes
    of the residual r; turns that lead from the class to itself are left out.
    """
    _, slopes = _residuals(np.array(stiffness.kelvin), cls, rotation[None])
    held = [axis for axis in range(3) if axis != _free_axis(cls)]
    left, singular, right = np.linalg.svd(slopes[0, held].T, full_matrices=False)
    fixed = singular > _FLAT * np.linalg.norm(stiffness.kelvin)
    if not fixed.any():
        return None
    inverse = (right[fixed].T / singular[fixed]) @ left[:, fixed].T
    turn = kelvin_rotation(rotation)
    to_residual = np.kron(turn, turn).T @ complement_basis(cls)
    sigma = np.abs(std) * np.outer(KELVIN_WEIGHTS, KELVIN_WEIGHTS)
    rows, columns = np.triu_indices(6)
    moves = to_residual[6 * rows + columns] * sigma[rows, columns][:, None]
    off = rows != columns
    moves[off] += (
        to_residual[6 * columns + rows] * sigma[rows, columns][:, None]
    )[off]
    turns = moves @ inverse.T
    return float(np.degrees(np.linalg.norm(turns, ord=2)))
