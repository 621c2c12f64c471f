"""What arrives along a ray: every plane wave whose energy travels in a given direction.

The way from a wave normal to its energy velocity is a formula; the way back is a search with
one to several answers on each shear sheet, since the wave surface may be folded.
"""

from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional.medium import Medium
from core.directional.sphere import directions, dot, plane_axes, sphere_mesh
from core.directional.waves import curvature, group_velocities, modes

_MESH_LEVEL = 5  # 20,480 triangles about 2 degrees wide
_REACH = 0.3  # by how much of its size the ray may miss the image of a triangle
_STEPS = 40
_FARTHEST_STEP = 0.1  # radians
_SHIFT = 1e-6  # radians, of the central differences
_SHIFTS = ((_SHIFT, 0.0), (-_SHIFT, 0.0), (0.0, _SHIFT), (0.0, -_SHIFT))
_OPEN = 1e-3  # a cone of rays is at least so wide, as a tangent of half its half-angle
_HIT = 1e-9  # half-angle between energy velocity and ray, radians
_SAME_NORMAL = 1e-5  # radians
_SINGULAR = 1e-4  # ratio of the two ways the energy velocity turns with the normal
_SAME_SPEED = 1e-6
_FEWEST_ON_RING = 4
_FLAT = 1e-30  # keeps the damped equations solvable where the miss does not change at all


@dataclass(frozen=True, eq=False)
class Arrival:
    """One plane wave whose energy travels along the ray.

    Attributes
    ----------
    sheet : int
        0 fastest, 1 middle, 2 slowest at its wave normal.
    normal : ndarray, shape (3,)
        Unit wave normal, in the axes of the medium.
    ray_speed : float
        Energy speed |V| along the ray, km/s.
    phase_speed : float
        km/s.
    polarisation : ndarray, shape (3,)
        Unit vector of arbitrary sign; any of a plane of them where `degenerate`.
    focusing : float
        As in `core.directional.waves.Curvature`.
    degenerate : bool
        Whether the neighbouring sheet has the same speed along `normal`.
    where : str
        "point", or "ring" for one of a closed curve of wave normals that all send their energy
        along this ray (external conical refraction).
    """

    sheet: int
    normal: FloatArray
    ray_speed: float
    phase_speed: float
    polarisation: FloatArray
    focusing: float
    degenerate: bool
    where: str


def arrivals(medium: Medium, ray: FloatArray) -> tuple[Arrival, ...]:
    """Return every plane wave whose energy travels along a ray, the first to arrive first.

    Parameters
    ----------
    medium : Medium
        With a density.
    ray : ndarray, shape (3,)
        Direction of energy flow, of any length, in the axes of the medium.

    Returns
    -------
    tuple of Arrival
        By falling ray speed. The flat discs that close the wave surface over the cones of
        acoustic axes carry no plane wave of their own and are not among them.

    Raises
    ------
    ValueError
        If the medium has no density or the ray no direction.

    Notes
    -----
    The energy velocity maps the triangles of a sphere mesh to triangles; those that enclose
    the ray, or nearly, start a damped Gauss-Newton iteration (Levenberg-Marquardt) on the angle
    between energy velocity and ray. Two folds nearer to one another than a triangle (2 degrees)
    may be missed.
    """
    ray = directions(ray).n[:, 0]
    normals, sheets = _seeds(medium, ray)
    if sheets.size == 0:
        return ()
    normals, miss, singular = _aim(medium, ray, normals, sheets)
    hit = miss < _HIT
    hit[hit] = ~_is_on_lid(medium, ray, normals[:, hit], sheets[hit])
    found = _distinct(medium, normals[:, hit], sheets[hit], singular[hit])
    return tuple(sorted(found, key=lambda one: (-round(one.ray_speed, 9), one.sheet)))


def _seeds(medium: Medium, ray: FloatArray) -> tuple[FloatArray, IntArray]:
    """Return wave normals (3, M) to start from, and the sheet (M,) of each."""
    mesh = sphere_mesh(_MESH_LEVEL)
    half = group_velocities(medium, mesh.half).velocity
    normals, sheets = [np.empty((3, 0))], [np.empty(0, dtype=np.intp)]
    for sheet, velocity in enumerate(half):
        corners = np.concatenate([velocity, -velocity], axis=1)[:, mesh.triangles.T]
        enclosing = mesh.triangles[_encloses(corners, ray)]
        points = mesh.vertices[:, enclosing]
        starts = np.concatenate([points, points.sum(axis=2, keepdims=True)], axis=2).reshape(
            3, -1
        )
        normals.append(starts)
        sheets.append(np.full(starts.shape[1], sheet))
    return np.concatenate(normals, axis=1), np.concatenate(sheets)


def _encloses(corners: FloatArray, ray: FloatArray) -> BoolArray:
    """Tell which triangles (3 components, 3 corners, M) the ray meets, or nearly.

    The volumes of the ray with each pair of corners are the barycentric coordinates of the
    place where it meets the triangle, up to their sum; either winding counts.
    """
    a, b, c = corners.transpose(1, 0, 2)
    volumes = np.stack([_volume(ray, b, c), _volume(ray, c, a), _volume(ray, a, b)])
    total = volumes.sum(axis=0)
    inside = (volumes * np.sign(total)).min(axis=0) >= -_REACH * np.abs(total)
    return np.asarray(inside & (ray @ (a + b + c) > 0.0))


def _volume(ray: FloatArray, a: FloatArray, b: FloatArray) -> FloatArray:
    """Return ray . (a x b) for vectors (3, M)."""
    x, y, z = ray
    return np.asarray(
        x * (a[1] * b[2] - a[2] * b[1])
        + y * (a[2] * b[0] - a[0] * b[2])
        + z * (a[0] * b[1] - a[1] * b[0])
    )


def _misses(
    medium: Medium, ray: FloatArray, normals: FloatArray, sheets: IntArray
) -> FloatArray:
    """Return by how much each energy velocity misses the ray, (2, M).

    Components along two axes normal to the ray of the tangent of half the angle: zero on the
    ray, infinite against it.
    """
    velocity = group_velocities(medium, directions(normals)).velocity
    own = velocity[sheets, :, np.arange(sheets.size)].T
    length = np.sqrt(dot(own, own)) + ray @ own
    with np.errstate(divide="ignore"):
        return np.asarray(np.stack(plane_axes(ray)) @ own / length)


def _aim(
    medium: Medium, ray: FloatArray, normals: FloatArray, sheets: IntArray
) -> tuple[FloatArray, FloatArray, BoolArray]:
    """Turn wave normals until their energy follows the ray.

    Returns the normals (3, M), the miss left over (M,), and where it does not change along
    some line of normals (M,).
    """
    normals = directions(normals).n
    miss = _misses(medium, ray, normals, sheets)
    damping = np.full(sheets.size, 1e-4)
    jacobian = _jacobian(medium, ray, normals, sheets)
    for _ in range(_STEPS):
        step = _damped_step(jacobian, miss, damping)
        trial = _moved(normals, *step)
        trial_miss = _misses(medium, ray, trial, sheets)
        better = _square(trial_miss) < _square(miss)
        damping *= np.where(better, 0.1, 10.0)
        normals = np.where(better, trial, normals)
        miss = np.where(better, trial_miss, miss)
        if not better.any():
            break
        jacobian = _jacobian(medium, ray, normals, sheets)
    stretch = np.linalg.svd(np.moveaxis(jacobian, 2, 0), compute_uv=False)
    return normals, np.sqrt(_square(miss)), stretch[:, 1] < _SINGULAR * stretch[:, 0]


def _is_on_lid(
    medium: Medium, ray: FloatArray, normals: FloatArray, sheets: IntArray
) -> BoolArray:
    """Tell which wave normals (3, M) are acoustic axes with a cone about the ray.

    Of equal waves `group_velocities` gives the mean ray, which is a ray of theirs only if the
    sheets touch; on a cone the rays of the closest normals lie well away from it.
    """
    degenerate = modes(medium, directions(normals)).degenerate[sheets, np.arange(sheets.size)]
    beside = [_misses(medium, ray, _shifted(normals, *shift), sheets) for shift in _SHIFTS]
    farthest = np.sqrt(np.max([_square(miss) for miss in beside], axis=0, initial=0.0))
    return np.asarray(degenerate & (farthest > _OPEN))


def _square(a: FloatArray) -> FloatArray:
    """Return the squared length of vectors (2, M)."""
    return np.asarray((a * a).sum(axis=0))


def _moved(
    normals: FloatArray, along_first: FloatArray, along_second: FloatArray
) -> FloatArray:
    """Return normals moved in their tangent planes, radians."""
    first, second = directions(normals).tangents
    return directions(normals + along_first * first + along_second * second).n


def _shifted(normals: FloatArray, along_first: float, along_second: float) -> FloatArray:
    """Return all normals moved by the same, radians."""
    return _moved(normals, np.asarray(along_first), np.asarray(along_second))


def _jacobian(
    medium: Medium, ray: FloatArray, normals: FloatArray, sheets: IntArray
) -> FloatArray:
    """Return the derivatives (2, 2, M) of the miss along the two tangents, by differences.

    Zero beside the end of a sheet, where there is no wave to compare with: such a normal stays.
    """
    moved = np.concatenate([_shifted(normals, *shift) for shift in _SHIFTS], axis=1)
    miss = _misses(medium, ray, moved, np.tile(sheets, 4)).reshape(2, 4, -1)
    slope = (miss[:, 0::2] - miss[:, 1::2]) / (2.0 * _SHIFT)
    slope[:, :, ~np.isfinite(slope).all(axis=(0, 1))] = 0.0
    return np.asarray(slope)


def _damped_step(jacobian: FloatArray, miss: FloatArray, damping: FloatArray) -> FloatArray:
    """Return the step (2, M) of the damped normal equations, no longer than allowed."""
    (a, b), (c, d) = jacobian
    size = damping * (a * a + b * b + c * c + d * d) + _FLAT
    aa, ab, bb = a * a + c * c + size, a * b + c * d, b * b + d * d + size
    right_a, right_b = a * miss[0] + c * miss[1], b * miss[0] + d * miss[1]
    determinant = aa * bb - ab * ab
    step = np.stack([ab * right_b - bb * right_a, ab * right_a - aa * right_b]) / determinant
    length = np.sqrt(_square(step))
    return np.asarray(step / np.maximum(1.0, length / _FARTHEST_STEP))


def _distinct(
    medium: Medium, normals: FloatArray, sheets: IntArray, singular: BoolArray
) -> list[Arrival]:
    """Return one arrival for each distinct normal, and one for each ring of them."""
    if sheets.size == 0:
        return []
    dirs = directions(normals)
    waves, group = modes(medium, dirs), group_velocities(medium, dirs)
    enhancement = curvature(medium, dirs).focusing
    column = np.arange(sheets.size)
    ray_speed = np.linalg.norm(group.velocity[sheets, :, column], axis=1)
    found = []
    left = np.ones(sheets.size, dtype=bool)
    for index in column:
        if not left[index]:
            continue
        same = left & (sheets == sheets[index])
        near = same & (np.linalg.norm(normals - normals[:, index, None], axis=0) < _SAME_NORMAL)
        alike = same & singular & (np.abs(ray_speed / ray_speed[index] - 1.0) < _SAME_SPEED)
        ring = bool(singular[index]) and np.count_nonzero(alike & ~near) >= _FEWEST_ON_RING
        left &= ~(near | (alike & ring))
        sheet = int(sheets[index])
        found.append(
            Arrival(
                sheet=sheet,
                normal=dirs.n[:, index],
                ray_speed=float(ray_speed[index]),
                phase_speed=float(group.speed[sheet, index]),
                polarisation=waves.polarisation[sheet, :, index],
                focusing=float(enhancement[sheet, index]),
                degenerate=bool(waves.degenerate[sheet, index]),
                where="ring" if ring else "point",
            )
        )
    return found
