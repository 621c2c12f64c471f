"""Sets of directions, and the sphere meshes that surfaces are drawn on.

Every property of this program is the same along n and -n, so a mesh evaluates one direction
of each antipodal pair and its vertices are ordered [half, -half]: the second half of a
surface is a copy of the first.
"""

from dataclasses import dataclass
from functools import cached_property, lru_cache
from itertools import pairwise

import numpy as np

from core.arrays import FloatArray, IndexArray, IntArray
from core.tensor.notation import SHEAR_FACTORS, VOIGT_INDEX, VOIGT_PAIRS

# Exponents (a, b, c) of the fifteen monomials x^a y^b z^c of degree four.
QUARTIC_EXPONENTS: tuple[tuple[int, int, int], ...] = tuple(
    (a, b, 4 - a - b) for a in range(4, -1, -1) for b in range(4 - a, -1, -1)
)

FINEST_LEVEL = 8  # 655,362 vertices: more than any screen or study needs

CHUNK = 8192  # directions whose intermediate results stay in the second-level cache

_UNIT_ROUNDING = 4 * np.finfo(np.float64).eps

# A normal this close to an axis (sine of the angle) is that axis; its plane has a usual name.
_AXIS_TOLERANCE = 1e-9


def pair_products(n: FloatArray) -> FloatArray:
    """Return q(n) = (xx, yy, zz, yz, xz, xy) of vectors (3, ...) as (6, ...)."""
    products = np.empty((6, *n.shape[1:]))
    for row, (i, j) in enumerate(VOIGT_PAIRS):
        np.multiply(n[i], n[j], out=products[row, ...])
    return products


def mixed_products(a: FloatArray, b: FloatArray) -> FloatArray:
    """Return the symmetric part of a bᵀ, tensor components (6, ...) in Voigt order."""
    (ax, ay, az), (bx, by, bz) = a, b
    return np.stack(
        [
            ax * bx,
            ay * by,
            az * bz,
            (ay * bz + az * by) / 2,
            (ax * bz + az * bx) / 2,
            (ax * by + ay * bx) / 2,
        ]
    )


def symmetric_times(form: FloatArray, n: FloatArray) -> FloatArray:
    """Multiply symmetric matrices (6, ...) in Voigt order by vectors (3, ...)."""
    result = np.empty_like(n)
    for i, (first, second, third) in enumerate(VOIGT_INDEX):
        row = np.multiply(form[first], n[0], out=result[i, ...])
        row += form[second] * n[1]
        row += form[third] * n[2]
    return result


def dot(a: FloatArray, b: FloatArray) -> FloatArray:
    """Return the scalar products (...) of vectors (3, ...)."""
    result: FloatArray = a[0] * b[0] + a[1] * b[1] + a[2] * b[2]
    return result


@dataclass(frozen=True, eq=False)
class Directions:
    """Unit vectors with everything the kernels need of them, worked out once on demand.

    Attributes
    ----------
    n : (3, N) array
        Unit vectors, one column each, in the axes of whatever `Medium` they are used with.

    Notes
    -----
    Build with `directions`, which checks and normalises.
    """

    n: FloatArray

    @property
    def count(self) -> int:
        """Number of directions N."""
        return int(self.n.shape[1])

    @cached_property
    def products(self) -> FloatArray:
        """q(n), shape (6, N), order xx, yy, zz, yz, xz, xy, no factors of two."""
        return _locked(pair_products(self.n))

    @cached_property
    def quartics(self) -> FloatArray:
        """The monomials of `QUARTIC_EXPONENTS` at n, shape (15, N)."""
        x, y, z = _powers(self.n)
        return _locked(np.stack([x[a] * y[b] * z[c] for a, b, c in QUARTIC_EXPONENTS]))

    @cached_property
    def tangents(self) -> tuple[FloatArray, FloatArray]:
        """t1 and t2, each (3, N), so that t1, t2, n is right-handed and orthonormal.

        Source: Duff et al. 2017, J. Comput. Graph. Tech. 6(1), 1.
        """
        x, y, z = self.n
        sign = np.copysign(1.0, z)
        a = -1.0 / (sign + z)
        b = x * y * a
        first = np.stack([1.0 + sign * x * x * a, sign * b, -sign * x])
        second = np.stack([b, sign + y * y * a, -y])
        return _locked(first), _locked(second)

    @cached_property
    def plane_rows(self) -> tuple[FloatArray, FloatArray]:
        """Rows that take a symmetric form to its h and b in the plane normal to n, (6, N) each.

        For tensor components X in Voigt order, h = (X_t1t1 - X_t2t2)/2 = X . rows[0] and
        b = X_t1t2 = X . rows[1]; the factors of two are in the rows.
        """
        first, second = self.tangents
        factors = SHEAR_FACTORS[:, None]
        difference = (pair_products(first) - pair_products(second)) / 2
        return _locked(factors * difference), _locked(factors * mixed_products(first, second))

    @cached_property
    def transverse_rows(self) -> tuple[FloatArray, FloatArray]:
        """Rows (21, N) that take `Medium.transverse_forms` to their h and b at every n.

        The first fifteen serve a totally symmetric T through its quartic f: the form in the
        plane is T(n, n, a, b) = a . Hessian(f) . b / 12. The last six are `plane_rows`.
        """
        first, second = self.tangents
        factors = SHEAR_FACTORS[:, None]
        difference = factors * (pair_products(first) - pair_products(second))
        mixed = factors * mixed_products(first, second)
        quadratic = self.plane_rows
        return (
            _locked(np.concatenate([_hessian_rows(self.n, difference) / 24, quadratic[0]])),
            _locked(np.concatenate([_hessian_rows(self.n, mixed) / 12, quadratic[1]])),
        )


def directions(n: FloatArray) -> Directions:
    """Make a set of directions of vectors (3, N), or of one vector (3,); they are normalised.

    Vectors of unit length to rounding stay as they are to the last bit.

    Raises
    ------
    ValueError
        If the shape is another one, or a vector has no direction (zero or not finite).
    """
    vectors = np.array(n, dtype=np.float64, order="C")
    if vectors.ndim == 1:
        vectors = vectors[:, None]
    if vectors.ndim != 2 or vectors.shape[0] != 3:
        raise ValueError(f"directions need shape (3, N), not {np.shape(n)}")
    length = np.sqrt((vectors * vectors).sum(axis=0))
    if not bool(np.all(np.isfinite(length) & (length > 0))):
        raise ValueError("a zero or non-finite vector has no direction")
    length[np.abs(length - 1.0) < _UNIT_ROUNDING] = 1.0
    return Directions(_locked(vectors / length))


@dataclass(frozen=True, eq=False)
class SphereMesh:
    """A subdivided icosahedron whose vertices are ordered [half, -half], exactly antipodal.

    Attributes
    ----------
    level : int
        Number of subdivisions: 10·4^level + 2 vertices.
    half : Directions
        The N/2 directions that are evaluated: one of each antipodal pair, z >= 0.
    vertices : (3, N) array
    triangles : (M, 3) uint32 array
        Counter-clockwise seen from outside; neighbours on the sphere are near in the list.
    neighbours : (6, N/2) array
        Indices into the half, antipodes folded; the five-fold vertices repeat themselves once.
    """

    level: int
    half: Directions
    vertices: FloatArray
    triangles: IndexArray
    neighbours: IntArray

    @cached_property
    def chunks(self) -> tuple[tuple[slice, Directions], ...]:
        """The half in parts that fit the processor's cache, with their places in it."""
        count = self.half.count
        parts = -(-count // CHUNK)
        if parts <= 1:
            return ((slice(0, count), self.half),)
        bounds = [count * part // parts for part in range(parts + 1)]
        places = [slice(*pair) for pair in pairwise(bounds)]
        return tuple((place, Directions(_locked(self.half.n[:, place]))) for place in places)


@lru_cache(maxsize=8)
def sphere_mesh(level: int) -> SphereMesh:
    """Return the mesh of a level: 3 to 7 give 642, 2,562, 10,242, 40,962, 163,842 vertices.

    Raises
    ------
    ValueError
        If the level is not between 0 and `FINEST_LEVEL`.
    """
    if not 0 <= level <= FINEST_LEVEL:
        raise ValueError(f"mesh levels run from 0 to {FINEST_LEVEL}, not {level}")
    points, antipode, faces = _icosahedron()
    for _ in range(level):
        points, antipode, faces = _subdivide(points, antipode, faces)
    half, number = _number_by_first_use(points, antipode, faces)
    numbered = number[faces]
    vertices = np.concatenate([points[:, half], -points[:, half]], axis=1)
    neighbours = _neighbours(numbered, half.size)
    triangles = numbered.astype(np.uint32)
    neighbours.flags.writeable = False
    triangles.flags.writeable = False
    return SphereMesh(
        level=level,
        half=Directions(_locked(points[:, half])),
        vertices=_locked(vertices),
        triangles=triangles,
        neighbours=neighbours,
    )


def plane_axes(normal: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the unit vectors to the right and up when a section plane is laid on paper.

    Parameters
    ----------
    normal : (3,) array
        Plane normal, in the axes the section is drawn in (part axes). Along Z the plane reads
        X right, Y up; along Y it reads X, Z; along X it reads Y, Z; the sign does not matter.
        Any other plane has the projection of X to the right (of Y, where X stands steeply on
        the plane) and reads counter-clockwise seen from the tip of the normal.
    """
    n = directions(normal).n[:, 0]
    axes = np.eye(3)
    for axis, right, up in ((2, 0, 1), (1, 0, 2), (0, 1, 2)):
        if np.linalg.norm(np.delete(n, axis)) < _AXIS_TOLERANCE:
            return axes[right], axes[up]
    reference = axes[0] if abs(n[0]) < 0.9 else axes[1]
    first = reference - (reference @ n) * n
    first /= np.linalg.norm(first)
    return first, np.cross(n, first)


def perpendicular_circle(normal: FloatArray, count: int = 721) -> FloatArray:
    """Return unit vectors (3, count) once round the plane of a normal; the last is the first.

    They start along the first of `plane_axes` and turn towards the second. With an odd count
    (every count that divides a half turn evenly) the second half is exactly minus the first.
    """
    first, second = plane_axes(normal)
    angle = np.linspace(0.0, 2.0 * np.pi, count)
    circle: FloatArray = np.outer(first, np.cos(angle)) + np.outer(second, np.sin(angle))
    if count % 2 == 1:
        circle[:, count // 2 :] = -circle[:, : count // 2 + 1]
    circle[:, -1] = circle[:, 0]
    return circle


def great_circle(normal: FloatArray, count: int = 721) -> Directions:
    """Return the directions in the plane of a normal, as `perpendicular_circle` runs."""
    return directions(perpendicular_circle(normal, count))


def _locked(array: FloatArray) -> FloatArray:
    """Return the array, contiguous and closed to writing: others share it."""
    contiguous = np.ascontiguousarray(array)
    contiguous.flags.writeable = False
    return contiguous


def _powers(n: FloatArray) -> list[list[FloatArray]]:
    """Return the powers 0 to 4 of each component."""
    result = []
    for component in n:
        square = component * component
        result.append(
            [np.ones_like(component), component, square, square * component, square * square]
        )
    return result


def _hessian_rows(n: FloatArray, weights: FloatArray) -> FloatArray:
    """Contract the Hessian of each quartic monomial with symmetric weights (6, N): (15, N)."""
    x, y, z = _powers(n)
    rows = np.zeros((len(QUARTIC_EXPONENTS), n.shape[1]))
    for row, exponents in zip(rows, QUARTIC_EXPONENTS, strict=True):
        for weight, (p, q) in zip(weights, VOIGT_PAIRS, strict=True):
            left = list(exponents)
            factor = left[p]
            left[p] -= 1
            factor *= left[q]
            left[q] -= 1
            if factor > 0:
                row += (factor * x[left[0]]) * (y[left[1]] * z[left[2]]) * weight
    return rows


def _icosahedron() -> tuple[FloatArray, IntArray, IntArray]:
    """Return vertices (3, 12), the antipode of each, and faces (20, 3) facing outward.

    The faces are ordered like every later list of triangles: ten, then their antipodes.
    """
    golden = (1.0 + 5.0**0.5) / 2.0
    quarter = [(s, t * golden) for t in (1.0, -1.0) for s in (1.0, -1.0)]
    corners = [(0.0, a, b) for a, b in quarter]
    corners += [(a, b, 0.0) for a, b in quarter]
    corners += [(b, 0.0, a) for a, b in quarter]
    points = np.array(corners).T
    points = points / np.sqrt(1.0 + golden * golden)
    antipode = np.argmin(points.T @ points, axis=1)
    edge = np.max(np.where(np.eye(12) > 0.5, -1.0, points.T @ points))
    near = points.T @ points > edge - 0.1
    faces = [
        (i, j, k) if np.linalg.det(points[:, [i, j, k]]) > 0 else (i, k, j)
        for i in range(12)
        for j in range(i + 1, 12)
        for k in range(j + 1, 12)
        if near[i, j] and near[j, k] and near[i, k]
    ]
    upper = [face for face in faces if _is_upper(points[:, list(face)].sum(axis=1))]
    return points, antipode, _with_antipodes(np.array(upper), antipode)


def _is_upper(point: FloatArray) -> bool:
    """Tell the chosen point of an antipodal pair: z > 0, then y > 0, then x > 0."""
    x, y, z = (float(c) for c in point)
    return (z, y, x) > (-z, -y, -x)


def _with_antipodes(faces: IntArray, antipode: IntArray) -> IntArray:
    """Append the antipodal triangles in the same order, turned so as to face outward."""
    return np.concatenate([faces, antipode[faces][:, ::-1]])


def _subdivide(
    points: FloatArray, antipode: IntArray, faces: IntArray
) -> tuple[FloatArray, IntArray, IntArray]:
    """Split every triangle into four, which follow one another in the list."""
    count = points.shape[1]
    edges = np.sort(np.stack([faces, np.roll(faces, -1, axis=1)], axis=-1), axis=-1)
    keys, index = np.unique(edges[..., 0] * count + edges[..., 1], return_inverse=True)
    ends = np.stack([keys // count, keys % count])
    middles = points[:, ends[0]] + points[:, ends[1]]
    middles /= np.sqrt((middles * middles).sum(axis=0))
    opposite = np.sort(antipode[ends], axis=0)
    opposite_keys = np.searchsorted(keys, opposite[0] * count + opposite[1])
    middle = count + index.reshape(faces.shape)
    (a, b, c), (ab, bc, ca) = faces.T, middle.T
    children = np.stack([a, ab, ca, ab, b, bc, ab, bc, ca, ca, bc, c], axis=1)
    return (
        np.concatenate([points, middles], axis=1),
        np.concatenate([antipode, count + opposite_keys]),
        children.reshape(-1, 3),
    )


def _number_by_first_use(
    points: FloatArray, antipode: IntArray, faces: IntArray
) -> tuple[IntArray, IntArray]:
    """Return the chosen half in order of first use, and the new number of every vertex."""
    x, y, z = points
    upper = (z > 0) | ((z == 0) & ((y > 0) | ((y == 0) & (x > 0))))
    used, first = np.unique(faces, return_index=True)
    order = used[np.argsort(first)]
    half = order[upper[order]]
    number = np.empty(points.shape[1], dtype=np.intp)
    number[half] = np.arange(half.size)
    number[antipode[half]] = np.arange(half.size) + half.size
    return half, number


def _neighbours(triangles: IntArray, half_count: int) -> IntArray:
    """Return the neighbour table (6, half_count) of triangles numbered [half, -half]."""
    start = triangles.ravel()
    end = np.roll(triangles, -1, axis=1).ravel()
    chosen = start < half_count
    start, end = start[chosen], end[chosen] % half_count
    order = np.argsort(start, kind="stable")
    start, end = start[order], end[order]
    place = np.arange(start.size) - np.searchsorted(start, start)
    table = np.tile(np.arange(half_count), (6, 1))
    table[place, start] = end
    return table
