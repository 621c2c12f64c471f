"""Eigenvalues and eigenvectors of many symmetric 3x3 matrices at once.

The waves of a crystal are the eigensystem of the Christoffel matrix in every direction, so this
is the kernel that every edit waits for. A matrix is a column of its six components in the order
11, 22, 33, 23, 13, 12; a set of N matrices is a (6, N) array. Nothing here knows about density,
speeds or crystals.

Method
------
With q = tr/3, K = matrix - q I, p^2 = |K|^2/6 and r = |det K|/(2 p^3), one root of K stands at
least sqrt(3) p away from the other two: l = 2 p cos(arccos(r)/3), with the sign of det K. It is
found without a transcendental function: c = cos(arccos(r)/3) solves 4 c^3 - 3 c = r, and a
short polynomial in r is polished by one Newton step. The projector on the vector e of that
root is e e' = (adj K + l K + l^2 I) / (3 (l^2 - p^2)), whose divisor is never small, and what
is left of K once the root is taken out,

    D = K + (l/2) I - (3 l/2) e e'     with eigenvalues 0, +rad, -rad,

gives rad = |D|/sqrt(2), a sum of squares: two roots that nearly meet are told apart without
cancellation. The error is a few units of rounding of the largest root, everywhere, degeneracies
included; there is no threshold and no second method to fall back on. (Derived here; the
classical part is O. K. Smith, Commun. ACM 4 (1961) 168.)
"""

import threading
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray
from core.directional.sphere import dot, symmetric_times
from core.tensor.notation import SHEAR_FACTORS

CHUNK = 8192
"""Columns worked on at a time, so that the rows of a chunk stay in the second-level cache."""

DEGENERATE_GAP = 1e-12
"""Two roots closer than this part of the largest count as equal."""

# The inner product <X, Y> of two symmetric matrices is the sum of these times X_I Y_I.
_WEIGHTS = np.array(SHEAR_FACTORS, dtype=np.float64)
_HALF_WEIGHTS = _WEIGHTS / 2.0
_CYCLES = ((0, 1, 2), (1, 2, 0), (2, 0, 1))
_TINY = 1e-290  # keeps 0/0 out of a multiple of the identity, whose roots are all the mean


def _third_angle_cosine() -> tuple[float, ...]:
    """Return the polynomial for cos(arccos(r)/3) on 0 <= r <= 1, highest power first.

    The function is smooth there (its branch point is at r = -1): degree 7 is within 1.3e-8, and
    a Newton step squares that.
    """
    fit = np.polynomial.Chebyshev.interpolate(
        lambda r: np.cos(np.arccos(r) / 3.0), deg=7, domain=[0.0, 1.0]
    )
    powers = fit.convert(kind=np.polynomial.Polynomial, domain=[-1.0, 1.0])
    return tuple(float(coefficient) for coefficient in powers.coef[::-1])


_COSINE = _third_angle_cosine()
_memory = threading.local()  # every thread works in blocks of its own


def _scratch(columns: int) -> FloatArray:
    """Return three blocks (3, 6, columns) to work in; this thread's next call reuses them."""
    buffer = getattr(_memory, "buffer", None)
    if buffer is None:
        buffer = _memory.buffer = np.empty((3, 6 * CHUNK))
    blocks: FloatArray = buffer[:, : 6 * columns].reshape(3, 6, columns)
    return blocks


@dataclass(frozen=True, eq=False, slots=True)
class Isolated:
    """The isolated root of a chunk of matrices.

    The blocks of six rows are scratch memory: they hold until this thread isolates again.
    """

    mean: FloatArray  # (n,) q
    spread: FloatArray  # (n,) p^2
    root: FloatArray  # (n,) l; the eigenvalue itself is mean + root
    deviator: FloatArray  # (6, n) K
    adjugate: FloatArray  # (6, n) adj K
    spare: FloatArray  # (6, n)


@dataclass(frozen=True, eq=False, slots=True)
class Eigensystem:
    """Eigenvalues and orthonormal eigenvectors, from the largest eigenvalue down."""

    values: FloatArray  # (3, N)
    vectors: FloatArray  # (3 eigenvalues, 3 components, N)


def chunks(columns: int) -> Iterator[slice]:
    """Cut a number of columns into slices of at most `CHUNK`."""
    for start in range(0, columns, CHUNK):
        yield slice(start, min(start + CHUNK, columns))


def close_pairs(values: FloatArray) -> BoolArray:
    """Tell where the upper two, and the lower two, of sorted eigenvalues (3, N) are equal.

    Returns (2, N). Equal means that they differ by less than `DEGENERATE_GAP` of the largest
    in size.
    """
    limit = DEGENERATE_GAP * np.maximum(values[0], -values[2])
    return np.asarray(values[:2] - values[1:] <= limit)


def is_degenerate(values: FloatArray) -> BoolArray:
    """Tell which of the sorted eigenvalues (3, N) are shared with a neighbour."""
    upper, lower = close_pairs(values)
    return np.stack([upper, upper | lower, lower])


def eigenvalues(matrices: FloatArray, out: FloatArray | None = None) -> FloatArray:
    """Return the eigenvalues of symmetric 3x3 matrices, from the largest down.

    Parameters
    ----------
    matrices : ndarray, shape (6, N)
        Rows 11, 22, 33, 23, 13, 12; any unit and frame.
    out : ndarray, shape (3, N), optional
        Where to write.

    Returns
    -------
    ndarray, shape (3, N)
        In the unit of `matrices`, exact to a few roundings of the largest in size.
    """
    values = np.empty((3, matrices.shape[1])) if out is None else out
    for part in chunks(matrices.shape[1]):
        isolated = isolate(matrices[:, part])
        _pair, radius = deflate(isolated)
        alone, upper, lower = roots(isolated, radius)
        np.maximum(alone, upper, out=values[0, part])
        np.minimum(alone, lower, out=values[2, part])
        np.minimum(alone, upper, out=upper)
        np.maximum(upper, lower, out=values[1, part])
    return values


def isolate(matrices: FloatArray) -> Isolated:
    """Find the isolated root of each matrix of a chunk (6, n), n <= CHUNK."""
    deviator, adjugate, spare = _scratch(matrices.shape[1])
    mean = matrices[0] + matrices[1]
    mean += matrices[2]
    mean *= 1.0 / 3.0
    np.subtract(matrices[:3], mean, out=deviator[:3])
    deviator[3:] = matrices[3:]
    _write_adjugate(deviator, adjugate, spare)
    np.multiply(deviator, deviator, out=spare)
    spread = np.dot(_HALF_WEIGHTS / 3.0, spare)
    np.multiply(deviator, adjugate, out=spare)
    determinant = np.dot(_WEIGHTS / 3.0, spare)
    root = _isolated_root(determinant, spread)
    return Isolated(mean, spread, root, deviator, adjugate, spare)


def _write_adjugate(matrix: FloatArray, adjugate: FloatArray, spare: FloatArray) -> None:
    """Write the adjugate: 11 is m22 m33 - m23^2, 23 is m13 m12 - m11 m23, and so on in turn."""
    for i, j, k in _CYCLES:
        np.multiply(matrix[j], matrix[k], out=adjugate[i])
        np.multiply(matrix[3 + j], matrix[3 + k], out=adjugate[3 + i])
    np.multiply(matrix[3:], matrix[3:], out=spare[:3])
    np.multiply(matrix[3:], matrix[:3], out=spare[3:])
    adjugate -= spare


def _isolated_root(determinant: FloatArray, spread: FloatArray) -> FloatArray:
    """Return 2 p cos(arccos(r)/3) with the sign of the determinant, for r = |det|/(2 p^3)."""
    p = np.sqrt(spread)
    ratio = p * spread
    ratio += ratio
    ratio += _TINY
    np.divide(determinant, ratio, out=ratio)
    np.absolute(ratio, out=ratio)
    cosine = _COSINE[0] * ratio
    cosine += _COSINE[1]
    for coefficient in _COSINE[2:]:
        cosine *= ratio
        cosine += coefficient
    # Newton on 4 c^3 - 3 c = r: the next c is (8 c^3 + r) / (12 c^2 - 3)
    square = cosine * cosine
    cosine *= square
    cosine *= 8.0
    cosine += ratio
    square *= 12.0
    square -= 3.0
    cosine /= square
    cosine *= p
    cosine += cosine
    return np.copysign(cosine, determinant, out=cosine)


def deflate(isolated: Isolated) -> tuple[FloatArray, FloatArray]:
    """Return D (6, n), the deviator without its isolated root, and rad (n,).

    D = (1 - s l) K - s adj K + l (1/2 - s l) I with s = l / (2 (l^2 - p^2)), which is the D at
    the head of this file with the projector written out. D is scratch memory, and takes the
    place of `spare`; the adjugate is lost.
    """
    root, deviator, adjugate, pair = (
        isolated.root, isolated.deviator, isolated.adjugate, isolated.spare
    )  # fmt: skip
    scale = root * root
    scale -= isolated.spread
    scale += scale
    scale += _TINY
    np.divide(root, scale, out=scale)
    adjugate *= scale
    scale *= root
    np.subtract(1.0, scale, out=scale)
    np.multiply(deviator, scale, out=pair)
    pair -= adjugate
    scale -= 0.5
    scale *= root
    pair[:3] += scale
    np.multiply(pair, pair, out=adjugate)
    radius = np.dot(_HALF_WEIGHTS, adjugate)
    return pair, np.sqrt(radius, out=radius)


def roots(isolated: Isolated, radius: FloatArray) -> FloatArray:
    """Return the isolated eigenvalue, the upper and the lower of the other two, as (3, n)."""
    values = np.empty((3, radius.size))
    np.multiply(isolated.root, -0.5, out=values[2])
    values[2] += isolated.mean
    np.add(values[2], radius, out=values[1])
    values[2] -= radius
    np.add(isolated.mean, isolated.root, out=values[0])
    return values


def sort_by_root(isolated: Isolated, *fields: FloatArray) -> None:
    """Put fields (3, ..., n), in the order of `roots`, in descending order of the eigenvalue.

    The isolated root is the largest nearly everywhere: only the columns where it is the least
    are touched.
    """
    least = np.flatnonzero(isolated.root < 0.0)
    if least.size:
        for field in fields:
            field[..., least] = np.roll(field[..., least], -1, axis=0)


def eigensystem(matrices: FloatArray) -> Eigensystem:
    """Return eigenvalues and orthonormal eigenvectors of symmetric 3x3 matrices.

    Parameters
    ----------
    matrices : ndarray, shape (6, N)
        Rows 11, 22, 33, 23, 13, 12; any unit and frame.

    Returns
    -------
    Eigensystem
        From the largest eigenvalue down. The vectors are orthonormal to rounding everywhere;
        where two eigenvalues are equal they are an arbitrary pair of the plane they span. The
        sign of a vector is arbitrary.

    Notes
    -----
    The isolated vector e is a column of K - D + (l/2) I = (3 l/2) e e'; the other two come from
    the 2x2 block of D in the plane normal to e, by the half-angle rule. No gap is divided by.
    """
    columns = matrices.shape[1]
    values, vectors = np.empty((3, columns)), np.empty((3, 3, columns))
    for part in chunks(columns):
        isolated = isolate(matrices[:, part])
        pair, radius = deflate(isolated)
        value, vector = roots(isolated, radius), vectors[:, :, part]
        _write_isolated_vector(isolated, pair, vector[0])
        _write_pair_vectors(pair, vector)
        sort_by_root(isolated, value, vector)
        values[:, part] = value
    return Eigensystem(values, vectors)


def _write_isolated_vector(isolated: Isolated, pair: FloatArray, out: FloatArray) -> None:
    """Write the unit vector (3, n) of the isolated root, from the largest column of e e'.

    The deviator is lost.
    """
    square = np.subtract(isolated.deviator, pair, out=isolated.adjugate)
    square[:3] += 0.5 * isolated.root
    chosen, size = isolated.deviator[:3], isolated.deviator[3:]
    first, second, third = np.absolute(square[:3], out=size)
    # One in the place of the largest and zeros in the others: cheaper than masked copies.
    chosen[1] = second > first
    chosen[2] = third > np.maximum(first, second, out=first)
    chosen[1] -= chosen[1] * chosen[2]
    np.subtract(1.0, chosen[1], out=chosen[0])
    chosen[0] -= chosen[2]
    out[...] = symmetric_times(square, chosen)
    length = np.sqrt(dot(out, out))
    if not length.all():  # a multiple of the identity: any vector will do
        out[2, length == 0.0] = 1.0
        length[length == 0.0] = 1.0
    out /= length


def _write_pair_vectors(pair: FloatArray, vector: FloatArray) -> None:
    """Write vector[1] and vector[2] of the upper and the lower root, given vector[0]."""
    u, v = vector[1:]
    _write_normal_pair(vector[0], u, v)
    image = symmetric_times(pair, u)
    c, s = _half_angle(dot(u, image), dot(v, image))
    np.multiply(v, c, out=image)
    image -= s * u
    u *= c
    v *= s
    u += v
    v[...] = image


def _write_normal_pair(n: FloatArray, u: FloatArray, v: FloatArray) -> None:
    """Write unit vectors u, v (3, N) normal to unit vectors n and to one another.

    Duff et al., J. Computer Graphics Techniques 6 (2017) 1: no branch, no cancellation. In
    place, where `Directions.tangents` makes and keeps new arrays.
    """
    x, y, z = n
    sign = np.copysign(1.0, z)
    a = sign + z
    np.divide(-1.0, a, out=a)
    np.multiply(sign, x, out=u[2])
    np.multiply(a, x, out=u[0])
    np.multiply(u[0], y, out=v[0])
    u[0] *= u[2]
    u[0] += 1.0
    np.multiply(sign, v[0], out=u[1])
    np.negative(u[2], out=u[2])
    a *= y
    a *= y
    np.add(sign, a, out=v[1])
    np.negative(y, out=v[2])


def _half_angle(half: FloatArray, across: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return cosine and sine of the angle from u to the upper vector of a block.

    The block is [[half, across], [across, -half]] on u, v. Its upper vector is along
    (rad + half, across) and along (across, rad - half): the one whose sum does not cancel is
    taken. Where the block vanishes, u and v stay as they are. Both arguments are overwritten.
    """
    forward = (half >= 0.0).astype(np.float64)
    square = across * across
    weight = half * half
    weight += square
    np.sqrt(weight, out=weight)
    weight += np.absolute(half, out=half)
    np.multiply(weight, weight, out=half)
    half += square
    length = np.sqrt(half, out=half)
    if not length.all():
        weight[length == 0.0] = 1.0
        length[length == 0.0] = 1.0
    weight /= length
    across /= length
    forward *= weight - across  # picks without the cost of a masked copy
    return across + forward, weight - forward
