"""An independent eigensystem of the Christoffel matrix, in long double.

Full fourth-rank contraction and the cyclic Jacobi rotations of 1846: slow, and as simple as
can be. Nothing of `core` is used. Long double has 64 bits of mantissa on x86-64; where it is
only double, the reference is still good to a few roundings.
"""

import numpy as np

_PAIRS = ((0, 0), (1, 1), (2, 2), (1, 2), (0, 2), (0, 1))


def full_tensor(table):
    """Return C_ijkl, long double, of a 6x6 table in Voigt order."""
    tensor = np.zeros((3, 3, 3, 3), dtype=np.longdouble)
    for row, (i, j) in enumerate(_PAIRS):
        for column, (k, m) in enumerate(_PAIRS):
            for a, b in {(i, j), (j, i)}:
                for c, d in {(k, m), (m, k)}:
                    tensor[a, b, c, d] = table[row][column]
    return tensor


def christoffel_matrices(table, n):
    """Return C_ijkl n_j n_l as (N, 3, 3), long double, for directions (3, N)."""
    n = np.asarray(n, dtype=np.longdouble)
    return np.einsum("ijkl,ja,la->aik", full_tensor(table), n, n)


def jacobi(matrices, sweeps=12):
    """Return eigenvalues (3, N), largest first, and vectors (3 eigenvalues, 3, N)."""
    a = np.array(matrices, dtype=np.longdouble)
    vectors = np.zeros_like(a) + np.eye(3, dtype=np.longdouble)
    for _ in range(sweeps):
        for p, q in ((0, 1), (0, 2), (1, 2)):
            turn = _rotation(a, p, q)
            a = turn.transpose(0, 2, 1) @ a @ turn
            a[:, p, q] = a[:, q, p] = 0
            vectors = vectors @ turn
    values = np.diagonal(a, axis1=1, axis2=2)
    order = np.argsort(-values, axis=1)
    values = np.take_along_axis(values, order, axis=1)
    vectors = np.take_along_axis(vectors, order[:, None, :], axis=2)
    return values.T, vectors.transpose(2, 1, 0)


def _rotation(a, p, q):
    """Return the rotations (N, 3, 3) that make a_pq vanish."""
    off = a[:, p, q]
    negligible = np.finfo(a.dtype).eps ** 2 * np.abs(a).max(axis=(1, 2))
    live = np.abs(off) > negligible
    theta = (a[:, q, q] - a[:, p, p]) / (2 * np.where(live, off, 1))
    sign = np.where(theta < 0, -1, 1)
    t = np.where(live, sign / (np.abs(theta) + np.sqrt(theta * theta + 1)), 0)
    c = 1 / np.sqrt(t * t + 1)
    turn = np.zeros_like(a) + np.eye(3, dtype=np.longdouble)
    turn[:, p, p] = turn[:, q, q] = c
    turn[:, p, q], turn[:, q, p] = t * c, -t * c
    return turn


def near_axis(axis, offsets, rng, per_offset=4):
    """Return unit directions (3, N), double, on the axis and at angles `offsets` off it.

    The angles are in radians, laid out in random planes through the axis.
    """
    axis = np.asarray(axis, dtype=np.float64) / np.linalg.norm(axis)
    found = [axis]
    for offset in offsets:
        for _ in range(per_offset):
            side = rng.standard_normal(3)
            side -= (side @ axis) * axis
            moved = axis + offset * side / np.linalg.norm(side)
            found.append(moved / np.linalg.norm(moved))
    return np.array(found).T


def acoustic_axis(table, rng, pair):
    """Return a direction where two sheets (0: upper pair, 1: lower pair) come nearest.

    The best of many random directions, then ever smaller grids about the best so far; only the
    gap of LAPACK's eigenvalues is used. Also returns that gap, relative to the largest root.
    """
    n = rng.standard_normal((3, 4000))
    size, steps = 0.1, np.linspace(-1, 1, 9)
    while True:
        n /= np.linalg.norm(n, axis=0)
        values = np.linalg.eigvalsh(christoffel_matrices(table, n).astype(np.float64))[:, ::-1]
        gaps = (values[:, pair] - values[:, pair + 1]) / values[:, 0]
        best = n[:, np.argmin(gaps)]
        if size < 1e-16:
            return best, gaps.min()
        first = np.cross(best, np.eye(3)[np.argmin(np.abs(best))])
        first /= np.linalg.norm(first)
        second = np.cross(best, first)
        n = np.array([best + size * (u * first + w * second) for u in steps for w in steps]).T
        size *= 0.5
