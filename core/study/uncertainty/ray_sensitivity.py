"""How polarisations, rays and power flow move with the constants, to first order.

These depend on the polarisations themselves and not only on the speeds: an error turns a
polarisation towards the other two by what it couples them, over the difference of their ρv².
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray
from core.directional import waves
from core.directional.medium import Medium
from core.directional.sphere import Directions, dot, mixed_products, symmetric_times
from core.tensor.notation import VOIGT_PAIRS, from_upper_triangle

GPA_TO_SQUARE_SPEED = 1e3  # GPa / (kg/m³) is 1e3 (km/s)²
_KINK = 1e-5  # radians: an angle so small may turn round, and has no slope


@dataclass(frozen=True, eq=False)
class Turning:
    """One sheet and how r errors change it, to first order, in N directions.

    Attributes
    ----------
    n, polarisation, velocity : ndarray, shape (3, N)
        Wave normal, unit polarisation, and energy velocity in km/s.
    speed : ndarray, shape (N,)
        Phase speed, km/s.
    d_speed : ndarray, shape (r, N)
    d_polarisation, d_velocity : ndarray, shape (3, r, N)
        The changes, in the same units.
    """

    n: FloatArray
    polarisation: FloatArray
    velocity: FloatArray
    speed: FloatArray
    d_speed: FloatArray
    d_polarisation: FloatArray
    d_velocity: FloatArray


def ray_responses(
    key: str, medium: Medium, dirs: Directions, factor: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """Return how a quantity of `RAY_KEYS` changes with each column of a factor.

    Parameters
    ----------
    key : str
    medium : Medium
        With a density.
    dirs : Directions
        In the axes of the medium.
    factor : ndarray, shape (21, r)
        GPa, in the axes of the medium.

    Returns
    -------
    responses : ndarray, shape (3 sheets, r, N)
        In the unit of the quantity.
    irregular : ndarray of bool, shape (3 sheets, N)
        Where there is no slope and the response means nothing: two sheets meet there, or an
        angle is zero.
    """
    found = waves.modes(medium, dirs)
    sheets = [_turning(medium, dirs.n, found, sheet, factor) for sheet in range(3)]
    with np.errstate(divide="ignore", invalid="ignore"):
        pairs = [_OF_SHEET[key](sheet) for sheet in sheets]
    responses = np.stack([response for response, _ in pairs])
    irregular = np.stack([kink for _, kink in pairs]) | found.degenerate
    return responses, irregular


def _turning(
    medium: Medium, n: FloatArray, found: waves.Modes, sheet: int, factor: FloatArray
) -> Turning:
    """Work out one sheet by perturbation theory of the Christoffel matrix.

    δp = Σ_b p_b (p_b δΓ p)/(λ − λ_b), and with g_j = C_ijkl p_i p_k n_l = ρ v V_j,
    δg_j = δC_ijkl p_i p_k n_l + 2 C_ijkl p_i δp_k n_l symmetrised in i, k.
    """
    errors = from_upper_triangle(factor.T)
    scale = GPA_TO_SQUARE_SPEED / float(medium.density or np.nan)
    p, v = found.polarisation[sheet], found.speed[sheet]
    stress = np.moveaxis(errors @ wave_strain(p, n), 1, 0)  # (6, r, N)
    d_speed = _work(stress, wave_strain(p, n)) * (scale / (2 * v))
    d_p = np.zeros((3, *d_speed.shape))
    d_g = symmetric_times(stress, np.broadcast_to(p[:, None], d_p.shape))
    for other in {0, 1, 2} - {sheet}:
        to = found.polarisation[other]
        gap = (v**2 - found.speed[other] ** 2) / scale
        with np.errstate(divide="ignore", invalid="ignore"):
            turn = _work(stress, wave_strain(to, n)) / gap
        turn[~np.isfinite(turn)] = 0.0
        coupling = symmetric_times(medium.christoffel @ mixed_products(p, to), n)
        d_p += to[:, None] * turn
        d_g += 2 * coupling[:, None] * turn
    V = symmetric_times(medium.christoffel @ mixed_products(p, p), n) * (scale / v)
    d_V = d_g * (scale / v) - V[:, None] * (d_speed / v)
    return Turning(n, p, V, v, d_speed, d_p, d_V)


def wave_strain(p: FloatArray, n: FloatArray) -> FloatArray:
    """Return the strain, engineering shears, (6, N), of waves with polarisation p, normal n."""
    strain = np.empty((6, n.shape[1]))
    np.multiply(p, n, out=strain[:3])
    for row, (i, j) in zip(strain[3:], VOIGT_PAIRS[3:], strict=True):
        np.multiply(p[i], n[j], out=row)
        row += p[j] * n[i]
    return strain


def _work(stress: FloatArray, strain: FloatArray) -> FloatArray:
    """Return the products (r, N) of stresses (6, r, N) and strains (6, N)."""
    return np.asarray(np.einsum("ikn,in->kn", stress, strain))


def _ray_speed(sheet: Turning) -> tuple[FloatArray, BoolArray]:
    """Return the change of |V|, km/s."""
    size = np.sqrt(dot(sheet.velocity, sheet.velocity))
    change = dot(sheet.velocity[:, None], sheet.d_velocity) / size
    return change, np.zeros(size.shape, dtype=bool)


def _power_flow(sheet: Turning) -> tuple[FloatArray, BoolArray]:
    """Return the change of the angle between V and n, degrees: tan ψ = |V − v n|/v."""
    v, n = sheet.speed, sheet.n
    across = sheet.velocity - v * n
    width = np.sqrt(dot(across, across))
    d_width = dot(across[:, None], sheet.d_velocity) / width
    change = (v * d_width - width * sheet.d_speed) / (v**2 + width**2)
    return np.degrees(change), np.asarray(width <= _KINK * v)


def _polarisation(sheet: Turning) -> tuple[FloatArray, BoolArray]:
    """Return the change of the angle between p and n, or of that with the plane, degrees."""
    along = dot(sheet.polarisation, sheet.n)
    across = np.sqrt(np.maximum(1 - along**2, 0.0))
    towards = np.copysign(1.0, along) * np.copysign(1.0, across - np.abs(along))
    change = np.degrees(towards * dot(sheet.n[:, None], sheet.d_polarisation) / across)
    small = np.minimum(np.abs(along), across)
    return change, np.asarray(small <= _KINK)


_OF_SHEET: dict[str, Callable[[Turning], tuple[FloatArray, BoolArray]]] = {
    "wave": _ray_speed,
    "power_flow": _power_flow,
    "polarisation": _polarisation,
}
"""Change and irregular directions of each quantity, shape (r, N) and (N,), of one sheet."""

RAY_KEYS = frozenset(_OF_SHEET)
