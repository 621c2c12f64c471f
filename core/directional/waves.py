"""Elastic waves along each direction: speeds, polarisations, energy velocities, focusing.

A plane wave with normal n and polarisation p obeys C_ijkl n_j n_l p_k = rho v^2 p_i, an
eigenproblem of the Christoffel matrix (B. A. Auld, Acoustic Fields and Waves in Solids, 1973,
chapter 7; M. J. P. Musgrave, Crystal Acoustics, 1970). Everything is returned for the three
sheets, fastest first, in the axes of the medium; speeds are in km/s.

Where rho v^2 is not positive the sheet does not propagate: its speed and all that follows from
the speed are NaN, while its polarisation stays. Where two sheets share a speed exactly (within
1e-12) their polarisations are an arbitrary pair; what then depends on them is said at each
function, and `degenerate` flags the direction.
"""

from dataclasses import dataclass

import numpy as np

from core.arrays import BoolArray, FloatArray, IntArray
from core.directional import christoffel
from core.directional.medium import Medium
from core.directional.sphere import (
    Directions,
    dot,
    mixed_products,
    pair_products,
    symmetric_times,
)
from core.tensor.notation import SHEAR_FACTORS, VOIGT_INDEX

_GPA_TO_SQUARE_SPEED = 1e3  # GPa / (kg/m^3) is 1e9 m^2/s^2, which is 1e3 (km/s)^2

# Below this half-gap, relative to the largest root, velocities are taken from eigenvectors:
# from the deflated matrix they would lose rounding/gap.
_NEAR_PAIR = 1e-3

# An unresolved root: as near zero, relative to the largest, as rounding puts a true zero.
_ROUNDING = 4.0 * np.finfo(np.float64).eps

# Sheets whose first and second derivatives agree within this part of the largest root coincide.
_COINCIDENCE = 1e-10


@dataclass(frozen=True, eq=False)
class Modes:
    """The three plane waves along each direction, fastest first.

    Attributes
    ----------
    speed : ndarray, shape (3, N)
        Phase speed, km/s; NaN where rho v^2 is not positive.
    polarisation : ndarray, shape (3 sheets, 3, N)
        Unit vectors, orthonormal at each direction, of arbitrary sign.
    degenerate : ndarray of bool, shape (3, N)
        True where a neighbouring sheet has the same speed: the polarisation is then any one of
        a plane of them.
    """

    speed: FloatArray
    polarisation: FloatArray
    degenerate: BoolArray


@dataclass(frozen=True, eq=False)
class Group:
    """Phase speeds and energy (group, ray) velocities, fastest sheet first.

    Attributes
    ----------
    speed : ndarray, shape (3, N)
        Phase speed v, km/s; the length of `velocity` is the ray speed.
    velocity : ndarray, shape (3 sheets, 3, N)
        V, km/s, with V.n = v. Where `degenerate`, both sheets hold the mean of the two: the
        middle of the cone of energy velocities that the direction really has.
    degenerate : ndarray of bool, shape (3, N)
        True where a neighbouring sheet has the same speed.
    """

    speed: FloatArray
    velocity: FloatArray
    degenerate: BoolArray


@dataclass(frozen=True, eq=False)
class Curvature:
    """How the slowness surface bends, fastest sheet first.

    Attributes
    ----------
    speed : ndarray, shape (3, N)
        Phase speed v, km/s.
    velocity : ndarray, shape (3 sheets, 3, N)
        As in `Group`.
    kappa : ndarray, shape (3, N)
        Determinant of the second derivatives of the frequency v|k| in the plane normal to n,
        at |k| = 1, (km/s)^2; negative on saddles, zero on parabolic lines.
    gaussian : ndarray, shape (3, N)
        Gaussian curvature of the slowness surface, kappa (v/|V|)^4, (km/s)^2.
    focusing : ndarray, shape (3, N)
        Solid angle of wave normals over that of energy velocities, |V|^3/(v |kappa|): 1 in an
        isotropic body, infinite on a caustic.
    """

    speed: FloatArray
    velocity: FloatArray
    kappa: FloatArray
    gaussian: FloatArray
    focusing: FloatArray


def speeds(medium: Medium, dirs: Directions) -> FloatArray:
    """Return the phase speeds of the three sheets, fastest first.

    Parameters
    ----------
    medium : Medium
        With a density.
    dirs : Directions
        Wave normals, in the axes of the medium.

    Returns
    -------
    ndarray, shape (3, N)
        km/s; NaN where rho v^2 is not positive.

    Raises
    ------
    ValueError
        If the medium has no density.
    """
    values = christoffel.eigenvalues(np.dot(medium.christoffel, dirs.products))
    return _write_speeds(values, _square_speed(medium))


def modes(medium: Medium, dirs: Directions) -> Modes:
    """Return speeds and polarisations of the three sheets; arguments as for `speeds`."""
    system = christoffel.eigensystem(np.dot(medium.christoffel, dirs.products))
    degenerate = christoffel.is_degenerate(system.values)
    speed = _write_speeds(system.values, _square_speed(medium))
    return Modes(_lock(speed), _lock(system.vectors), degenerate)


def group_velocities(medium: Medium, dirs: Directions) -> Group:
    """Return phase speeds and energy velocities; arguments as for `speeds`.

    Notes
    -----
    V_j = C_ijkl p_i p_k n_l / (rho v) is linear in the projector p p'. The projectors of the
    three sheets are made of the Christoffel matrix itself and of its deflated part D (see
    `christoffel`), so two products with the operator give all three velocities without a
    polarisation. Directions whose pair of sheets nearly meets are redone with polarisations.
    """
    scale = _square_speed(medium)
    values, velocity = np.empty((3, dirs.count)), np.empty((3, 3, dirs.count))
    for part in christoffel.chunks(dirs.count):
        n, products = dirs.n[:, part], dirs.products[:, part]
        value, gradient = values[:, part], velocity[:, :, part]
        near = _write_gradients(medium.christoffel, n, products, value, gradient)
        if near.size:
            value[:, near], gradient[:, :, near] = _gradients_by_vectors(
                medium.christoffel, n[:, near], products[:, near]
            )
    degenerate = christoffel.is_degenerate(values)
    speed = _write_speeds(values, scale)
    velocity *= (scale / speed)[:, None]
    return Group(_lock(speed), _lock(velocity), degenerate)


def curvature(medium: Medium, dirs: Directions) -> Curvature:
    """Return curvature and focusing of the three sheets; arguments as for `speeds`.

    NaN at exact degeneracy, where a sheet has no tangent plane or no one curvature, unless the
    two sheets coincide around the direction as they do in an isotropic body.

    Notes
    -----
    With omega = v|k|, whose gradient is V, the second derivatives are W = (L/rho - V V')/v,
    L_jl = C_ijkl p_i p_k + 4 sum_r h_j h_l / (lambda - lambda_r), where lambda = rho v^2 and
    h_j = C_ijkl (p_i p^r_k + p^r_i p_k) n_l / 2: perturbation theory to second order. kappa is
    the determinant of W in the plane normal to n (W n = 0). A. G. Every, Phys. Rev. B 24 (1981)
    3456, has the same in other words.
    """
    scale = _square_speed(medium)
    speed, kappa = np.empty((2, 3, dirs.count))
    velocity = np.empty((3, 3, dirs.count))
    for part in christoffel.chunks(dirs.count):
        sheets = _Sheets(medium.christoffel, dirs, part)
        speed[:, part] = _write_speeds(sheets.values.copy(), scale)
        velocity[:, :, part] = _velocities(sheets, speed[:, part], scale)
        kappa[:, part] = _kappas(sheets, speed[:, part], scale)
    with np.errstate(divide="ignore"):
        ray = np.sqrt((velocity * velocity).sum(axis=1))
        gaussian = kappa * (speed / ray) ** 4
        enhancement = ray**3 / (speed * np.abs(kappa))
    return Curvature(*(_lock(f) for f in (speed, velocity, kappa, gaussian, enhancement)))


def focusing(medium: Medium, dirs: Directions) -> FloatArray:
    """Return the focusing factor of `curvature`, (3, N); arguments as for `speeds`."""
    return curvature(medium, dirs).focusing


def power_flow(medium: Medium, dirs: Directions) -> FloatArray:
    """Return the angle between the energy velocity and the wave normal, (3, N), degrees.

    Where sheets are degenerate it is the angle of the middle of their cone.
    """
    velocity = group_velocities(medium, dirs).velocity
    angles = [np.arctan2(_cross_length(ray, dirs.n), dot(ray, dirs.n)) for ray in velocity]
    return np.asarray(np.degrees(np.stack(angles)))


def polarisation_deviation(medium: Medium, dirs: Directions) -> FloatArray:
    """Return how far each polarisation is from purely longitudinal or shear, (3, N), degrees.

    For |p.n| >= 1/sqrt(2), a quasi-longitudinal wave, it is the angle between p and n; for the
    others the angle between p and the plane normal to n, which is 90 degrees less that angle.
    Either way it runs from 0 to 45. Of degenerate waves it is that of one arbitrary pair.
    """
    deviations = []
    for p in modes(medium, dirs).polarisation:
        along, across = np.abs(dot(p, dirs.n)), _cross_length(p, dirs.n)
        deviations.append(np.arctan2(np.minimum(along, across), np.maximum(along, across)))
    return np.asarray(np.degrees(np.stack(deviations)))


def longitudinality(medium: Medium, dirs: Directions) -> FloatArray:
    """Return |p.n| of the three sheets, (3, N): 1 longitudinal, 0 shear."""
    return np.stack([np.abs(dot(p, dirs.n)) for p in modes(medium, dirs).polarisation])


def shear_splitting(medium: Medium, dirs: Directions) -> FloatArray:
    """Return by how much the slowest wave trails the middle one, (N,), ns per mm of path."""
    _fast, middle, slow = speeds(medium, dirs)
    return np.asarray(1e3 * (1.0 / slow - 1.0 / middle))


def impedance(medium: Medium, dirs: Directions) -> FloatArray:
    """Return the specific acoustic impedance rho v of the three sheets, (3, N), MRayl."""
    return 1e-3 * _density(medium) * speeds(medium, dirs)


def _density(medium: Medium) -> float:
    """Return the density, kg/m^3, which the caller must have made sure of."""
    if medium.density is None:
        raise ValueError("waves need a density")
    return medium.density


def _square_speed(medium: Medium) -> float:
    """Return what turns GPa into (km/s)^2 for this density."""
    return _GPA_TO_SQUARE_SPEED / _density(medium)


def _write_speeds(values: FloatArray, scale: float) -> FloatArray:
    """Turn eigenvalues (3, N), GPa, into speeds, km/s, in place; NaN where not positive.

    A value that rounding cannot tell from zero is not positive either.
    """
    if values[2].min(initial=np.inf) <= _ROUNDING * values[0].max(initial=0.0):
        largest = np.maximum(values[0], -values[2])
        values[values <= _ROUNDING * largest] = np.nan
    values *= scale
    return np.sqrt(values, out=values)


def _write_gradients(
    operator: FloatArray,
    n: FloatArray,
    products: FloatArray,
    values: FloatArray,
    gradients: FloatArray,
) -> IntArray:
    """Write rho v^2 (3, n) and rho v V (3 sheets, 3, n) of a chunk, in GPa.

    Returns the columns whose pair is too close for it. With K the deviator of the Christoffel
    matrix, l its isolated root and D the rest, the projectors are P = (K - D + l/2) / (3 l/2)
    and (1 - P +- D/rad) / 2.
    """
    isolated = christoffel.isolate(np.dot(operator, products))
    pair, radius = christoffel.deflate(isolated)
    values[...] = christoffel.roots(isolated, radius)
    whole = operator[:, :3].sum(axis=1)[VOIGT_INDEX] @ n
    of_pair = symmetric_times(np.dot(operator, pair), n)
    alone = symmetric_times(np.dot(operator, isolated.deviator), n)
    with np.errstate(divide="ignore", invalid="ignore"):  # an exact pair is redone
        alone -= of_pair
        alone *= 2.0 / (3.0 * isolated.root)
        alone += whole * (1.0 / 3.0)
        of_pair *= 0.5 / radius
    whole -= alone
    whole *= 0.5
    gradients[0] = alone
    np.add(whole, of_pair, out=gradients[1])
    np.subtract(whole, of_pair, out=gradients[2])
    christoffel.sort_by_root(isolated, values, gradients)
    return np.flatnonzero(radius <= _NEAR_PAIR * np.maximum(values[0], -values[2]))


def _gradients_by_vectors(
    operator: FloatArray, n: FloatArray, products: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return the same from polarisations, averaged over waves of equal speed."""
    system = christoffel.eigensystem(np.dot(operator, products))
    gradients = np.stack(
        [symmetric_times(np.dot(operator, pair_products(p)), n) for p in system.vectors]
    )
    _average_equals(gradients, system.values)
    return system.values, gradients


def _average_equals(fields: FloatArray, values: FloatArray) -> None:
    """Give sheets of equal speed the mean of their fields (3, ..., N), in place."""
    upper, lower = christoffel.close_pairs(values)
    for first, last, equal in (
        (0, 2, upper & ~lower),
        (1, 3, lower & ~upper),
        (0, 3, upper & lower),
    ):
        if equal.any():
            fields[first:last, ..., equal] = fields[first:last, ..., equal].mean(axis=0)


class _Sheets:
    """The sheets about each direction of a chunk to second order, in GPa.

    Attributes
    ----------
    values : ndarray, shape (3, n)
        rho v^2.
    forms : dict of (sheet, sheet) to ndarray, shape (5, n)
        C_ijkl p_i p^r_k contracted over j, l with the pairs (n, t1), (n, t2), (t1, t1),
        (t1, t2), (t2, t2).
    """

    def __init__(self, operator: FloatArray, dirs: Directions, part: slice) -> None:
        self.n = dirs.n[:, part]
        self.tangents = first, second = [t[:, part] for t in dirs.tangents]
        system = christoffel.eigensystem(np.dot(operator, dirs.products[:, part]))
        self.values, p = system.values, system.vectors
        self.close = christoffel.close_pairs(self.values)
        weighted = SHEAR_FACTORS[:, None] * operator
        moments = np.concatenate(
            [
                mixed_products(self.n, first),
                mixed_products(self.n, second),
                pair_products(first),
                mixed_products(first, second),
                pair_products(second),
            ]
        ).reshape(5, 6, -1)
        fields = weighted @ moments
        self.forms: dict[tuple[int, int], FloatArray] = {
            (a, b): np.einsum("akn,kn->an", fields, mixed_products(p[a], p[b]))
            for a in range(3)
            for b in range(a, 3)
        }

    def coupling(self, a: int, b: int) -> FloatArray:
        """Return the five forms between two sheets, in either order."""
        return self.forms[min(a, b), max(a, b)]

    def is_close(self, a: int, b: int) -> BoolArray:
        """Tell where two sheets have the same speed."""
        between = self.close[min(a, b) : max(a, b)]
        return np.asarray(between.all(axis=0))

    def bending(self, a: int, b: int) -> FloatArray:
        """Return L between two sheets (the same one, or two that meet), as 11, 12, 22: (3, n).

        Sheets of the same speed as `a` are left out of the sum.
        """
        total = self.coupling(a, b)[2:].copy()
        for other in {0, 1, 2} - {a, b}:
            left, right = self.coupling(a, other), self.coupling(b, other)
            with np.errstate(divide="ignore"):
                weight = 4.0 / (self.values[a] - self.values[other])
            weight[self.is_close(a, other)] = 0.0
            total[0] += weight * left[0] * right[0]
            total[1] += weight * 0.5 * (left[0] * right[1] + left[1] * right[0])
            total[2] += weight * left[1] * right[1]
        return total

    def coincide(self, a: int) -> BoolArray:
        """Tell where sheets a and a + 1 stay together to second order around the direction."""
        b = a + 1
        limit = _COINCIDENCE * np.maximum(self.values[0], -self.values[2])
        parts = np.concatenate(
            [
                self.coupling(a, b)[:2],
                self.coupling(a, a)[:2] - self.coupling(b, b)[:2],
                self.bending(a, b),
                self.bending(a, a) - self.bending(b, b),
            ]
        )
        return np.asarray(np.abs(parts).max(axis=0) < limit)


def _velocities(sheets: _Sheets, speed: FloatArray, scale: float) -> FloatArray:
    """Return the energy velocities (3 sheets, 3, n), km/s."""
    velocity = np.empty((3, *sheets.n.shape))
    for sheet, v in enumerate(speed):
        along = sheets.forms[sheet, sheet][:2] * (scale / v)
        velocity[sheet] = v * sheets.n + along[0] * sheets.tangents[0]
        velocity[sheet] += along[1] * sheets.tangents[1]
    _average_equals(velocity, sheets.values)
    return velocity


def _kappas(sheets: _Sheets, speed: FloatArray, scale: float) -> FloatArray:
    """Return kappa of the three sheets (3, n), (km/s)^2."""
    kappa = np.empty_like(speed)
    for sheet, v in enumerate(speed):
        first, second = sheets.forms[sheet, sheet][:2] * (scale / v)
        w11, w12, w22 = scale * sheets.bending(sheet, sheet)
        w11 -= first * first
        w12 -= first * second
        w22 -= second * second
        kappa[sheet] = (w11 * w22 - w12 * w12) / (v * v)
    for upper in (0, 1):
        if sheets.close[upper].any():
            kappa[upper : upper + 2, sheets.close[upper] & ~sheets.coincide(upper)] = np.nan
    return kappa


def _cross_length(a: FloatArray, b: FloatArray) -> FloatArray:
    """Return |a x b| of vectors (3, N)."""
    (ax, ay, az), (bx, by, bz) = a, b
    x, y, z = ay * bz - az * by, az * bx - ax * bz, ax * by - ay * bx
    return np.asarray(np.sqrt(x * x + y * y + z * z))


def _lock(array: FloatArray) -> FloatArray:
    """Close a fresh array to writing: results are shared."""
    array.flags.writeable = False
    return array
