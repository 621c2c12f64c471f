"""The Christoffel eigenvalues to second order about a direction, for small sets of directions.

The searches for extremes and for acoustic axes need eigenvectors and derivatives at some tens
of directions at a time, where one call of LAPACK for all of them costs less than a kernel made
for whole spheres. Arrays here run along their first axis: directions (M, 3).
"""

from dataclasses import dataclass

import numpy as np

from core.arrays import FloatArray, IntArray
from core.directional.search.newton import Local, Objective


def contraction(tensor: FloatArray) -> FloatArray:
    """Return the (9, 9) that takes the products a_j b_l to C_ijkl a_j b_l, both flattened.

    As C_ijkl = C_jilk it also takes p_i r_k to C_ijkl p_i r_k, read as a matrix over j, l.
    """
    return np.ascontiguousarray(tensor.transpose(1, 3, 0, 2)).reshape(9, 9)


@dataclass(frozen=True, eq=False)
class SheetFrames:
    """Eigenvalues and polarisations at M directions, fastest sheet first.

    Attributes
    ----------
    values : (M, 3) array
        ρv², GPa, descending; may be negative for an unstable crystal.
    vectors : (M, 3, 3) array
        vectors[i, s] is the unit polarisation of sheet s, orthonormal even at a degeneracy.
    """

    values: FloatArray
    vectors: FloatArray


def sheet_frames(operator: FloatArray, n: FloatArray) -> SheetFrames:
    """Return the eigenvalues and polarisations along directions (M, 3).

    `operator` is `contraction` of the stiffness, GPa; directions are in the same axes.
    """
    products = (n[:, :, None] * n[:, None, :]).reshape(-1, 9)
    values, vectors = np.linalg.eigh((products @ operator).reshape(-1, 3, 3))
    return SheetFrames(values[:, ::-1], vectors[:, :, ::-1].transpose(0, 2, 1))


def polarised(operator: FloatArray, p: FloatArray, r: FloatArray) -> FloatArray:
    """Return the symmetric part over j, l of 2 C_ijkl p_i r_k for vectors (..., 3).

    Its value between n and t is the derivative of p·Γ(n)·r as n moves along t.
    """
    outer = p[..., :, None] * r[..., None, :]
    form = (outer.reshape(*outer.shape[:-2], 9) @ operator).reshape(outer.shape)
    result: FloatArray = form + form.swapaxes(-1, -2)
    return result


def sheet_objective(operator: FloatArray, sheets: IntArray, signs: FloatArray) -> Objective:
    """Return the objective sign × ρv² of a sheet for `core.directional.search.newton.descend`.

    Parameters
    ----------
    operator : (9, 9) array
        `contraction` of the stiffness, GPa.
    sheets : (M,) int array
        0 fastest, 1 middle, 2 slowest, for every start.
    signs : (M,) array
        1 to minimise, -1 to maximise.
    """

    def objective(frames: FloatArray, starts: IntArray) -> Local:
        local = sheet_to_second_order(operator, frames, sheets[starts])
        return local.times(signs[starts])

    return objective


def sheet_to_second_order(operator: FloatArray, frames: FloatArray, sheets: IntArray) -> Local:
    """Return ρv² of one sheet with gradient and Hessian in the turns of each frame.

    Parameters
    ----------
    operator : (9, 9) array
        `contraction` of the stiffness, GPa.
    frames : (K, 3, 3) array
        Rows n, t1, t2. The turn about n changes nothing: its derivatives are zero.
    sheets : (K,) int array
        0 fastest, 1 middle, 2 slowest.

    Notes
    -----
    Second-order perturbation: with a_r(t) = p·Γ'(t)·p_r, the Hessian is
    2 t·L(p, p)·t' + Σ_r 2 a_r(t) a_r(t')/(λ - λ_r), less 2λ for the curvature of the sphere.
    An exact degeneracy contributes nothing, and the sheet has no Hessian there.
    """
    n, tangents = frames[:, 0], frames[:, 1:]
    system, rows = sheet_frames(operator, n), np.arange(len(frames))
    own, value = system.vectors[rows, sheets], system.values[rows, sheets]
    forms = polarised(operator, own[:, None, :], system.vectors)
    slopes = (n[:, None, None, :] @ forms)[:, :, 0] @ tangents.transpose(0, 2, 1)
    gap = value[:, None] - system.values
    gap[rows, sheets] = 0.0
    weight = np.divide(2.0, gap, out=np.zeros_like(gap), where=gap != 0)
    bent = tangents @ forms[rows, sheets] @ tangents.transpose(0, 2, 1)
    repelled = (slopes * weight[:, :, None]).transpose(0, 2, 1) @ slopes
    gradient, hessian = np.zeros((len(frames), 3)), np.zeros((len(frames), 3, 3))
    gradient[:, :2] = slopes[rows, sheets]
    hessian[:, :2, :2] = bent + repelled - 2 * value[:, None, None] * np.eye(2)
    return Local(value, gradient, hessian)
