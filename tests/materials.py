"""Stiffness tables and rotations for tests, built without any code of `core`.

Everything returns a plain (6, 6) array in GPa, Voigt order 11 22 33 23 13 12, or a (3, 3)
rotation. All are closed forms or random.
"""

import numpy as np

_KELVIN = np.array([1.0, 1.0, 1.0, np.sqrt(2.0), np.sqrt(2.0), np.sqrt(2.0)])


def random_rotation(rng):
    """Return a proper rotation, uniform over all of them: a unit quaternion of four normals."""
    w, x, y, z = (q := rng.standard_normal(4)) / np.linalg.norm(q)
    return np.array(
        [
            [1 - 2 * (y * y + z * z), 2 * (x * y - z * w), 2 * (x * z + y * w)],
            [2 * (x * y + z * w), 1 - 2 * (x * x + z * z), 2 * (y * z - x * w)],
            [2 * (x * z - y * w), 2 * (y * z + x * w), 1 - 2 * (x * x + y * y)],
        ]
    )


def random_stiffness(rng, spread=0.5):
    """Return a positive definite triclinic table with log-normal eigenstiffnesses near 100 GPa.

    `spread` is the standard deviation of the logarithm; 0.5 is rougher than nearly any crystal.
    """
    strains, _ = np.linalg.qr(rng.standard_normal((6, 6)))
    kelvin = (strains * (100.0 * np.exp(spread * rng.standard_normal(6)))) @ strains.T
    return _from_kelvin(kelvin)


def random_physical(rng, anisotropy=0.25):
    """Return a stable triclinic table scattered about a plausible isotropic one.

    √C₀ exp(anisotropy × symmetric noise) √C₀ in Kelvin form is positive definite whatever
    the noise; K₀ runs over 40–180 GPa and G₀ over 0.3–0.8 of it.
    """
    bulk = rng.uniform(40.0, 180.0)
    root = _kelvin_power(_to_kelvin(isotropic(bulk, rng.uniform(0.3, 0.8) * bulk)), 0.5)
    noise = rng.standard_normal((6, 6))
    values, vectors = np.linalg.eigh((noise + noise.T) / np.sqrt(8.0))
    return _from_kelvin(root @ ((vectors * np.exp(anisotropy * values)) @ vectors.T) @ root)


def isotropic(bulk, shear):
    """Return the table of an isotropic body from its bulk and shear moduli."""
    return cubic(bulk + 4 * shear / 3, bulk - 2 * shear / 3, shear)


def cubic(c11, c12, c44):
    """Return the table of a cubic crystal in its standard axes."""
    table = np.diag([c11 - c12] * 3 + [c44] * 3).astype(float)
    table[:3, :3] += c12
    return table


def hexagonal(c11, c12, c13, c33, c44):
    """Return the table of a hexagonal crystal, c axis along z; C66 = (C11 − C12)/2."""
    c66 = (c11 - c12) / 2
    return np.array(
        [
            [c11, c12, c13, 0, 0, 0],
            [c12, c11, c13, 0, 0, 0],
            [c13, c13, c33, 0, 0, 0],
            [0, 0, 0, c44, 0, 0],
            [0, 0, 0, 0, c44, 0],
            [0, 0, 0, 0, 0, c66],
        ],
        dtype=float,
    )


def orthorhombic(c11, c22, c33, c12, c13, c23, c44, c55, c66):
    """Return the table of an orthorhombic crystal."""
    table = np.diag([c11, c22, c33, c44, c55, c66]).astype(float)
    table[0, 1] = table[1, 0] = c12
    table[0, 2] = table[2, 0] = c13
    table[1, 2] = table[2, 1] = c23
    return table


def trigonal(c11, c12, c13, c14, c33, c44, c15=0.0):
    """Return the table of a trigonal crystal, threefold axis along z, twofold along x.

    With `c15` it is the low class (3, −3): C25 = −C15, C46 = −C15.
    """
    table = hexagonal(c11, c12, c13, c33, c44)
    for i, j, value in [(0, 3, c14), (1, 3, -c14), (4, 5, c14),
                        (0, 4, c15), (1, 4, -c15), (3, 5, -c15)]:  # fmt: skip
        table[i, j] = table[j, i] = value
    return table


def tetragonal(c11, c12, c13, c33, c44, c66, c16=0.0):
    """Return the table of a tetragonal crystal; with `c16` the low class, C26 = −C16."""
    table = orthorhombic(c11, c11, c33, c12, c13, c13, c44, c44, c66)
    table[0, 5] = table[5, 0] = c16
    table[1, 5] = table[5, 1] = -c16
    return table


def rotated(table, rotation):
    """Return the table in axes turned by v_new = R v_old, by the fourth-rank sum itself."""
    place = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]])
    tensor = np.asarray(table)[place[:, :, None, None], place[None, None]]
    turned = np.einsum("ia,jb,kc,ld,abcd->ijkl", *[rotation] * 4, tensor, optimize=True)
    first, second = [0, 1, 2, 1, 0, 0], [0, 1, 2, 2, 2, 1]
    return np.array([[turned[i, j, k, m] for k, m in zip(first, second, strict=True)]
                     for i, j in zip(first, second, strict=True)])  # fmt: skip


def _to_kelvin(table):
    return table * np.outer(_KELVIN, _KELVIN)


def _from_kelvin(kelvin):
    return (kelvin + kelvin.T) / (2 * np.outer(_KELVIN, _KELVIN))


def _kelvin_power(kelvin, power):
    values, vectors = np.linalg.eigh(kelvin)
    return (vectors * values**power) @ vectors.T
