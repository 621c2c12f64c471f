"""Isotropic averages and bounds of a polycrystal, and numbers for how anisotropic a crystal is.

Nothing here has a frame: all results are invariants of the tensor. What is not defined, as
everything but the Voigt average for an unstable crystal, is NaN and never an exception.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray
from core.tensor.stiffness import Stiffness

_LOOKS = 6  # each narrows the search 24-fold: the last points lie 1e-8 of their value apart
_POINTS = 49  # of each look along the boundary of comparison bodies
_NEAREST = 1e-15  # share of the boundary at which the search begins, besides its very end
_FURTHEST = 1.25  # beyond 2.25 times the largest shear stiffness an upper estimate only grows


@dataclass(frozen=True)
class Isotropic:
    """An isotropic body: bulk, shear and Young's modulus in GPa, and Poisson's ratio."""

    bulk: float
    shear: float
    young: float
    poisson: float


@dataclass(frozen=True)
class Averages:
    """Polycrystal without texture: equal strains, equal stresses, and their mean."""

    voigt: Isotropic
    reuss: Isotropic
    hill: Isotropic


@dataclass(frozen=True)
class Bounds:
    """Hashin–Shtrikman bounds of a polycrystal without texture, GPa."""

    bulk_low: float
    bulk_high: float
    shear_low: float
    shear_high: float


@dataclass(frozen=True)
class Anisotropy:
    """How anisotropic a crystal is.

    Attributes
    ----------
    universal : float
        5 G_V/G_R + K_V/K_R − 6 (Ranganathan & Ostoja-Starzewski 2008, Phys. Rev. Lett.
        101, 055504); 0 for an isotropic body.
    log_euclidean : float
        √[ln²(K_V/K_R) + 5 ln²(G_V/G_R)] (Kube 2016, AIP Adv. 6, 095209).
    percent_bulk, percent_shear : float
        100 (X_V − X_R)/(X_V + X_R) (Chung & Buessem 1967, J. Appl. Phys. 38, 2010).
    zener : float or None
        2 C44/(C11 − C12); None unless the crystal is cubic.
    """

    universal: float
    log_euclidean: float
    percent_bulk: float
    percent_shear: float
    zener: float | None


def isotropic(bulk: float, shear: float) -> Isotropic:
    """Return an isotropic body from its bulk and shear moduli, GPa.

    E = 9KG/(3K + G), ν = (3K − 2G)/(6K + 2G); both NaN where 3K + G is zero.
    """
    stretch = 3 * bulk + shear
    if stretch == 0:
        return Isotropic(bulk, shear, np.nan, np.nan)
    young = 9 * bulk * shear / stretch
    return Isotropic(bulk, shear, young, (3 * bulk - 2 * shear) / (2 * stretch))


def averages(stiffness: Stiffness) -> Averages:
    """Return the Voigt, Reuss and Hill averages of a crystal.

    For an unstable or singular crystal only the Voigt average is defined; the others are
    NaN. Voigt 1928, Reuss 1929, Hill 1952 (Proc. Phys. Soc. A 65, 349).
    """
    bulk_v, shear_v = _voigt_moduli(stiffness.voigt)
    bulk_r, shear_r = _reuss_moduli(stiffness)
    return Averages(
        voigt=isotropic(bulk_v, shear_v),
        reuss=isotropic(bulk_r, shear_r),
        hill=isotropic((bulk_v + bulk_r) / 2, (shear_v + shear_r) / 2),
    )


def _voigt_moduli(C: FloatArray) -> tuple[float, float]:
    diagonal, off = np.trace(C[:3, :3]), C[0, 1] + C[0, 2] + C[1, 2]
    shears = np.trace(C[3:, 3:])
    return float(diagonal + 2 * off) / 9, float(diagonal - off + 3 * shears) / 15


def _reuss_moduli(stiffness: Stiffness) -> tuple[float, float]:
    if not stiffness.is_stable:
        return np.nan, np.nan
    S = stiffness.compliance
    diagonal, off = np.trace(S[:3, :3]), S[0, 1] + S[0, 2] + S[1, 2]
    shears = np.trace(S[3:, 3:])
    return 1 / float(diagonal + 2 * off), 15 / float(4 * diagonal - 4 * off + 3 * shears)


def anisotropy(stiffness: Stiffness, cubic: bool) -> Anisotropy:
    """Return the indices of anisotropy of a crystal.

    Parameters
    ----------
    stiffness : Stiffness
        In its cubic crystal axes if `cubic`, else in any frame.
    cubic : bool
        Whether Zener's ratio applies.
    """
    bulk_v, shear_v = _voigt_moduli(stiffness.voigt)
    bulk_r, shear_r = _reuss_moduli(stiffness)
    bulk, shear = bulk_v / bulk_r, shear_v / shear_r
    return Anisotropy(
        universal=5 * shear + bulk - 6,
        log_euclidean=float(np.hypot(np.log(bulk), np.sqrt(5) * np.log(shear))),
        percent_bulk=100 * (bulk - 1) / (bulk + 1),
        percent_shear=100 * (shear - 1) / (shear + 1),
        zener=_zener(stiffness.voigt) if cubic else None,
    )


def _zener(C: FloatArray) -> float:
    difference = float(C[0, 0] - C[0, 1])
    return 2 * float(C[3, 3]) / difference if difference != 0 else np.nan


def hashin_shtrikman(stiffness: Stiffness) -> Bounds:
    """Return the tightest Hashin–Shtrikman bounds of a polycrystal of any crystal.

    Each isotropic comparison body that is nowhere stiffer (nowhere softer) than the crystal
    gives a lower (an upper) bound, Hashin & Shtrikman 1962, J. Mech. Phys. Solids 10, 343,
    in the form of Walpole 1966, ibid. 14, 151: with the constraint tensor C* of the body
    the bound is the Reuss average of C + C*, less C*. The best body of either kind lies
    where C − C₀ is singular, a curve that is searched here. All NaN for an unstable crystal.
    """
    if not stiffness.is_stable:
        return Bounds(np.nan, np.nan, np.nan, np.nan)
    split = _Split.of(stiffness.kelvin)
    return Bounds(
        bulk_low=-_least(lambda share: -split.bulk(split.softer_body(share)), 1.0),
        bulk_high=_least(lambda share: split.bulk(split.stiffer_body(share)), _FURTHEST),
        shear_low=-_least(lambda share: -split.shear(split.softer_body(share)), 1.0),
        shear_high=_least(lambda share: split.shear(split.stiffer_body(share)), _FURTHEST),
    )


@dataclass(frozen=True, eq=False)
class _Split:
    """A stiffness split into volume, shape, and the coupling of the two.

    In the Kelvin basis of the unit volume strain and five strains without volume change
    that diagonalise the rest, C = [[volume, couplingᵀ], [coupling, diag(shapes)]].
    """

    volume: float
    shapes: FloatArray
    coupling: FloatArray

    @classmethod
    def of(cls, kelvin: FloatArray) -> "_Split":
        dilation = np.array([1.0, 1.0, 1.0, 0.0, 0.0, 0.0]) / np.sqrt(3)
        without_volume = np.linalg.svd(dilation[None, :])[2][1:].T
        shapes, axes = np.linalg.eigh(without_volume.T @ kelvin @ without_volume)
        volume = float(dilation @ kelvin @ dilation)
        coupling = (without_volume @ axes).T @ kelvin @ dilation
        return cls(volume, shapes, coupling)

    def softer_body(self, share: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return bulk and shear of bodies with C − C₀ ≥ 0 that touch it.

        `share` runs from 0, the largest admissible shear modulus, to 1, none. NaN where
        no body of positive bulk modulus is soft enough.
        """
        shear = (1 - share) * self.shapes[0] / 2
        bulk = (self.volume - self._yielding(self.shapes[:, None] - 2 * shear)) / 3
        return np.where(bulk > 0, bulk, np.nan), shear

    def stiffer_body(self, share: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return bulk and shear of bodies with C − C₀ ≤ 0 that touch it.

        `share` runs from 0, the least admissible shear modulus, upwards; at 0 the body may
        have to be incompressible.
        """
        shear = (1 + share) * self.shapes[-1] / 2
        bulk = (self.volume + self._yielding(2 * shear - self.shapes[:, None])) / 3
        return bulk, shear

    def _yielding(self, margins: FloatArray) -> FloatArray:
        """Return what shapes with the given margins, shape (5, N), take off the volume."""
        squares = np.broadcast_to(self.coupling[:, None] ** 2, margins.shape)
        with np.errstate(divide="ignore"):
            parts = np.divide(squares, margins, out=np.zeros_like(margins), where=squares > 0)
        return np.asarray(parts.sum(axis=0))

    def bulk(self, body: tuple[FloatArray, FloatArray]) -> FloatArray:
        """Return the bulk estimate with comparison bodies: 3K = 1/[(C + C*)⁻¹]_vv − 3K*."""
        _, shape = _constraint(*body)
        estimate: FloatArray = (self.volume - self._drawn(shape).sum(axis=0)) / 3
        return estimate

    def shear(self, body: tuple[FloatArray, FloatArray]) -> FloatArray:
        """Return the shear estimate: 2G = 5/(trace of (C + C*)⁻¹ over shapes) − 2G*."""
        volume, shape = _constraint(*body)
        drawn, stiff = self._drawn(shape), self.shapes[:, None] + shape
        compliances = 1 / stiff + drawn / stiff / (self.volume + volume - drawn.sum(axis=0))
        estimate: FloatArray = (5 / compliances.sum(axis=0) - shape) / 2
        return estimate

    def _drawn(self, shape: FloatArray) -> FloatArray:
        drawn: FloatArray = self.coupling[:, None] ** 2 / (self.shapes[:, None] + shape)
        return drawn


def _constraint(bulk: FloatArray, shear: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the eigenvalues 3K* and 2G* of the constraint tensor of isotropic bodies.

    K* = 4G/3 and G* = (G/6)(9K + 8G)/(K + 2G), written to hold for infinite K as well.
    """
    softness = 2 * shear / bulk
    return 4 * shear, shear / 3 * (9 + 4 * softness) / (1 + softness)


def _least(estimate: Callable[[FloatArray], FloatArray], end: float) -> float:
    """Return the least value of an estimate over shares from 0 to `end` of the boundary.

    Looks along a logarithmic scale, for the best body often lies close to share 0, then
    closer and closer about the best point. Shares without a body are passed over.
    """
    shares = np.concatenate([[0.0], np.geomspace(_NEAREST, end, _POINTS - 1)])
    least = np.inf
    for _ in range(_LOOKS):
        values = estimate(shares)
        best = int(np.nanargmin(values))
        least = min(least, float(values[best]))
        low, high = shares[max(best - 1, 0)], shares[min(best + 1, _POINTS - 1)]
        shares = np.geomspace(max(low, _NEAREST), max(high, _NEAREST), _POINTS)
    return least
