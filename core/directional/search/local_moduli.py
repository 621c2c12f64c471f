"""1/E, 1/G and ν to second order about a frame of load and transverse directions.

In axes n, m, l the compliance in Kelvin form holds 1/E = S₁₁, 1/G = 2 S₆₆ and ν = -S₁₂/S₁₁.
A small turn of the axes changes the 6x6 by constant matrices, so value, gradient and Hessian
are constant linear combinations of the 36 turned components.
"""

from enum import IntEnum

import numpy as np

from core.arrays import FloatArray, IntArray, read_only
from core.directional.search.newton import GENERATORS, Local, Objective
from core.tensor.notation import KELVIN_WEIGHTS, VOIGT_PAIRS, kelvin_rotation


class Modulus(IntEnum):
    """Which objective a start is for."""

    EXTENSION = 0  # 1/E(n), 1/GPa
    SHEAR = 1  # 1/G(n, m), 1/GPa
    POISSON = 2  # ν(n, m)


def modulus_objective(
    kelvin_compliance: FloatArray, kinds: IntArray, signs: FloatArray
) -> Objective:
    """Return the objective sign × (1/E, 1/G or ν) for `core.directional.search.newton.descend`.

    Parameters
    ----------
    kelvin_compliance : (6, 6) array
        Kelvin form, 1/GPa, in the axes that the frames are given in.
    kinds : (M,) int array
        A `Modulus` for every start.
    signs : (M,) array
        1 to minimise, -1 to maximise.
    """

    def objective(frames: FloatArray, starts: IntArray) -> Local:
        local = modulus_to_second_order(kelvin_compliance, frames, kinds[starts])
        return local.times(signs[starts])

    return objective


def modulus_to_second_order(
    kelvin_compliance: FloatArray, frames: FloatArray, kinds: IntArray
) -> Local:
    """Return 1/E, 1/G or ν with gradient and Hessian in the three turns of each frame.

    Parameters
    ----------
    kelvin_compliance : (6, 6) array
        Kelvin form, 1/GPa.
    frames : (K, 3, 3) array
        Rows n, m, l in the axes of the compliance.
    kinds : (K,) int array
        `Modulus` of each.
    """
    turn = kelvin_rotation(frames)
    components = (turn @ kelvin_compliance @ turn.transpose(0, 2, 1)).reshape(-1, 36)
    derived = components @ _ROWS.T
    extension, shear, cross = derived[:, :13], derived[:, 13:26], derived[:, 26:]
    kind = kinds[:, None]
    poisson = _ratio(cross, extension)
    transverse = np.where(kind == Modulus.SHEAR, 2 * shear, poisson)
    chosen = np.where(kind == Modulus.EXTENSION, extension, transverse)
    gradient, hessian = chosen[:, 1:4], chosen[:, 4:].reshape(-1, 3, 3)
    # E does not know m: the third turn is no variable of it.
    free = kinds == Modulus.EXTENSION
    gradient[free, 2] = hessian[free, 2, :] = hessian[free, :, 2] = 0.0
    return Local(chosen[:, 0], gradient, hessian)


def _ratio(cross: FloatArray, extension: FloatArray) -> FloatArray:
    """Return -cross/extension with its derivatives, (K, 13), from theirs."""
    below = extension[:, :1]
    value = -cross[:, :1] / below
    gradient = -(cross[:, 1:4] + value * extension[:, 1:4]) / below
    mixed = gradient[:, :, None] * extension[:, None, 1:4]
    mixed = (mixed + mixed.transpose(0, 2, 1)).reshape(-1, 9)
    hessian = -(cross[:, 4:] + value * extension[:, 4:] + mixed) / below
    return np.concatenate([value, gradient, hessian], axis=1)


def _kelvin_generator(turn: FloatArray) -> FloatArray:
    """Return the (6, 6) by which Kelvin vectors follow an infinitesimal turn: ε ↦ Xε + εXᵀ."""
    generator = np.zeros((6, 6))
    for column, (k, m) in enumerate(VOIGT_PAIRS):
        strain = np.zeros((3, 3))
        strain[k, m] = strain[m, k] = 1.0 / KELVIN_WEIGHTS[column]
        change = turn @ strain + strain @ turn.T
        generator[:, column] = [
            change[i, j] * weight
            for (i, j), weight in zip(VOIGT_PAIRS, KELVIN_WEIGHTS, strict=True)
        ]
    return generator


def _derivative_rows(p: int, q: int) -> FloatArray:
    """Return rows (13, 36): component (p, q), its 3 first and 9 second derivatives.

    With B = exp(D), B S Bᵀ = S + (DS + SDᵀ) + (DDS + 2 DSDᵀ + SDᵀDᵀ)/2 + …
    """
    generators = [_kelvin_generator(turn) for turn in GENERATORS]
    identity = np.eye(6)

    def row(left: FloatArray, right: FloatArray) -> FloatArray:
        return np.outer(left[p], right[q]).ravel()

    first = [row(d, identity) + row(identity, d) for d in generators]
    second = []
    for a in generators:
        for b in generators:
            square = (a @ b + b @ a) / 2
            second.append(row(square, identity) + row(identity, square) + row(a, b) + row(b, a))
    return np.array([row(identity, identity), *first, *second])


_ROWS = read_only(
    np.concatenate(
        [
            _derivative_rows(0, 0),
            _derivative_rows(5, 5),
            (_derivative_rows(0, 1) + _derivative_rows(1, 0)) / 2,
        ]
    )
)
