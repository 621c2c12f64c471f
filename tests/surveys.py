"""Invented measurements for tests: speeds from LAPACK and the full tensor, not from `core`."""

import numpy as np

from core.study.recovery.readings import Reading
from tests.reference import christoffel_matrices

_KELVIN = np.sqrt(np.outer([1, 1, 1, 2, 2, 2], [1, 1, 1, 2, 2, 2]))


def kelvin_norm(table):
    return np.linalg.norm(_KELVIN * table)


def mean_stiffness(table):
    return np.trace(_KELVIN * table) / 6


def random_normals(rng, count):
    n = rng.standard_normal((3, count))
    return n / np.linalg.norm(n, axis=0)


def speeds_along(table, density, n):
    """Return phase speeds (3, N), m/s, fastest first."""
    matrices = christoffel_matrices(table, n).astype(np.float64)
    return np.sqrt(np.linalg.eigvalsh(matrices)[:, ::-1].T * 1e9 / density)


def polarisations_along(table, n):
    """Return the directions of motion (3 sheets, 3, N), fastest first."""
    _values, vectors = np.linalg.eigh(christoffel_matrices(table, n).astype(np.float64))
    return vectors[:, :, ::-1].transpose(2, 1, 0)


def readings_of(speeds, n, sigma=1e-3, sheets=(1, 2, 3), rng=None):
    """Return readings of speeds (3, N) along normals; noisy where there is a generator.

    `sigma` is relative; with noise the three speeds of a normal are sorted again.
    """
    measured = np.array(speeds)
    if rng is not None:
        measured = measured * (1 + sigma * rng.standard_normal(measured.shape))
        measured = -np.sort(-measured, axis=0)
    readings = []
    for column in range(n.shape[1]):
        for sheet in sheets:
            readings.append(Reading(
                tuple(n[:, column]), float(measured[sheet - 1, column]),
                float(sigma * speeds[sheet - 1][column]), len(readings) + 1, sheet,
            ))  # fmt: skip
    return readings


def measured_crystal(table, density, rng, count, sigma=1e-3, sheets=(1, 2, 3)):
    """Return noisy readings of a crystal along random normals."""
    n = random_normals(rng, count)
    return readings_of(speeds_along(table, density, n), n, sigma, sheets, rng)


def scattered(rng, anisotropy=0.25):
    """Return a triclinic table: √C₀ (1 + a H) √C₀ in Kelvin form about an isotropic C₀.

    H is symmetric normal noise; tables whose softest eigenstiffness is below a twentieth of the
    shear modulus are drawn again. Bulk modulus near 100 GPa, shear 0.25 to 1 of it.
    """
    while True:
        bulk = 100 * np.exp(0.3 * rng.standard_normal())
        shear = bulk * rng.uniform(0.25, 1.0)
        volume = np.zeros((6, 6))
        volume[:3, :3] = 1 / 3
        root = np.sqrt(3 * bulk) * volume + np.sqrt(2 * shear) * (np.eye(6) - volume)
        noise = rng.standard_normal((6, 6))
        kelvin = root @ (np.eye(6) + anisotropy * (noise + noise.T) / 2) @ root
        if np.linalg.eigvalsh(kelvin)[0] > 0.05 * shear:
            return kelvin / _KELVIN


def misfit(table, density, readings):
    """Return χ² of a table against readings of known sheets, by LAPACK."""
    n = np.array([reading.direction for reading in readings]).T
    sheets = np.array([reading.sheet - 1 for reading in readings])
    own = speeds_along(table, density, n)[sheets, np.arange(len(readings))]
    measured = np.array([reading.speed for reading in readings])
    sigma = np.array([reading.sigma for reading in readings])
    return float((((own - measured) / sigma) ** 2).sum())
