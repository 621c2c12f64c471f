"""Derivatives in the turns of a frame against finite differences, and the descent itself."""

import numpy as np
import pytest

from core.directional.search.circles import (
    Circle,
    canonical,
    circle_through,
    distinct,
    preference,
)
from core.directional.search.local_moduli import Modulus, modulus_to_second_order
from core.directional.search.local_waves import contraction, sheet_to_second_order
from core.directional.search.newton import Local, descend, turned
from core.tensor.notation import compliance_to_kelvin
from core.tensor.stiffness import Stiffness
from tests.materials import random_rotation, random_stiffness

STEP = 1e-4
TABLE = random_stiffness(np.random.default_rng(11))
FRAMES = np.array([random_rotation(np.random.default_rng(seed)) for seed in range(6)])
KINDS = np.repeat([0, 1, 2], 2)


def moduli(frames):
    compliance = compliance_to_kelvin(Stiffness.from_voigt(TABLE).compliance)
    return modulus_to_second_order(compliance, frames, KINDS)


def waves(frames):
    operator = contraction(Stiffness.from_voigt(TABLE).tensor)
    return sheet_to_second_order(operator, frames, KINDS)


def differences(function):
    """Gradient and Hessian by central differences along the three turns."""
    axes = STEP * np.eye(3)

    def value(turn):
        return function(turned(FRAMES, np.tile(turn, (len(FRAMES), 1)))).value

    gradient = np.stack([(value(a) - value(-a)) / (2 * STEP) for a in axes], axis=1)
    hessian = np.array(
        [[(value(a + b) - value(a - b) - value(b - a) + value(-a - b)) / (4 * STEP**2)
          for a in axes] for b in axes]
    )  # fmt: skip
    return gradient, hessian.transpose(2, 0, 1)


@pytest.mark.parametrize(("function", "free"), [(moduli, 3), (waves, 2)])
def test_derivatives_equal_finite_differences(function, free):
    local = function(FRAMES)
    gradient, hessian = differences(function)
    scale = np.abs(local.value).max()
    assert np.abs(local.gradient - gradient).max() < 1e-6 * scale
    turns = [free if kind else 2 for kind in KINDS] if function is moduli else [free] * 6
    for k, last in enumerate(turns):
        difference = local.hessian[k, :last, :last] - hessian[k, :last, :last]
        assert np.abs(difference).max() < 1e-5 * scale


def test_moduli_are_what_the_definitions_say():
    s = Stiffness.from_voigt(TABLE).compliance
    local = moduli(np.tile(np.eye(3), (6, 1, 1)))
    expected = {
        Modulus.EXTENSION: s[0, 0],
        Modulus.SHEAR: s[5, 5],
        Modulus.POISSON: -s[0, 1] / s[0, 0],
    }
    for kind, value in expected.items():
        assert local.value[kind == KINDS] == pytest.approx(value, rel=1e-13)


def test_descent_reaches_the_minimum_of_a_form():
    """n·A·n: the least eigenvalue, from anywhere but a saddle."""
    form = np.diag([3.0, 1.0, 2.0])

    def objective(frames, starts):
        turned_form = frames @ form @ frames.transpose(0, 2, 1)
        gradient = np.stack(
            [2 * turned_form[:, 0, 1], 2 * turned_form[:, 0, 2], np.zeros(len(frames))], axis=1
        )
        hessian = np.zeros((len(frames), 3, 3))
        hessian[:, :2, :2] = 2 * (turned_form[:, 1:, 1:] - turned_form[:, :1, :1] * np.eye(2))
        return Local(turned_form[:, 0, 0], gradient, hessian)

    end = descend(FRAMES, objective, np.full(len(FRAMES), 3.0))
    assert end.converged.all()
    assert np.abs(end.value - 1.0).max() < 1e-13
    assert np.abs(np.abs(end.frames[:, 0, 1]) - 1).max() < 1e-12


def test_turned_frames_stay_orthonormal():
    moved = turned(FRAMES, np.random.default_rng(0).standard_normal((6, 3)))
    assert np.abs(moved @ moved.transpose(0, 2, 1) - np.eye(3)).max() < 1e-14


def test_canonical_directions():
    given = np.array(
        [[0, 0, -1], [1, -2, 0], [-3, 0, 0], [-1, 1, 2], [1, 1, -1e-12]], dtype=float
    )
    wanted = np.array([[0, 0, 1], [-1, 2, 0], [3, 0, 0], [-1, 1, 2], [1, 1, 0]], dtype=float)
    assert np.array_equal(canonical(given), wanted)
    assert preference(wanted) == [3, 0, 2, 4, 1]
    assert distinct(np.array([[0, 0, 1.0], [0, 0, -1], [1, 0, 0], [1, 1e-7, 0]])) == [0, 2]


def test_circle_through_three_directions():
    circle = Circle(np.array([0.0, 0.6, 0.8]), 0.3)
    again = circle_through(circle.points(5)[[0, 1, 3]])
    assert again.axis == pytest.approx(circle.axis, abs=1e-12)
    assert again.cosine == pytest.approx(0.3, abs=1e-12)
    assert circle.points(100)[:, 2].max() == pytest.approx(circle.representative[2], abs=1e-12)
    assert circle.distance(-circle.points(9)).max() < 1e-12
