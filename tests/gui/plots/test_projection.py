"""The two projections of the hemisphere: Lambert's and the stereographic in closed form."""

import numpy as np
import pytest

from gui.plots.projection import from_disc, to_disc

PROJECTIONS = ("equal_area", "stereographic")


def directions(count=400, seed=2):
    n = np.random.default_rng(seed).standard_normal((3, count))
    n[2] = np.abs(n[2])
    return n / np.linalg.norm(n, axis=0)


@pytest.mark.parametrize("projection", PROJECTIONS)
def test_there_and_back(projection):
    n = directions()
    np.testing.assert_allclose(from_disc(to_disc(n, projection), projection), n, atol=1e-12)


def test_radii_at_45_degrees():
    # r = √2 sin(θ/2) and r = tan(θ/2); θ = 45°.
    n = np.array([[np.sin(np.pi / 4)], [0.0], [np.cos(np.pi / 4)]])
    assert to_disc(n, "equal_area")[0, 0] == pytest.approx(np.sqrt(2.0) * np.sin(np.pi / 8))
    assert to_disc(n, "stereographic")[0, 0] == pytest.approx(np.tan(np.pi / 8))


@pytest.mark.parametrize("projection", PROJECTIONS)
def test_rim_and_far_side(projection):
    x = np.array([[1.0], [0.0], [0.0]])
    np.testing.assert_allclose(to_disc(x, projection), [[1.0], [0.0]], atol=1e-15)
    below = np.array([[0.6], [0.0], [-0.8]])
    np.testing.assert_allclose(to_disc(below, projection), to_disc(-below, projection))
    np.testing.assert_allclose(from_disc(np.array([[3.0], [0.0]]), projection), x, atol=1e-12)


def test_equal_area_keeps_areas():
    # Uniform directions are uniform on the disc: half of them within r² < 1/2.
    inside = (to_disc(directions(20000), "equal_area") ** 2).sum(axis=0) < 0.5
    assert inside.mean() == pytest.approx(0.5, abs=0.02)


def test_unknown_projection():
    with pytest.raises(ValueError, match="cylinder"):
        to_disc(directions(3), "cylinder")
