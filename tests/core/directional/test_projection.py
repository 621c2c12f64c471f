"""The two projections of the hemisphere: Lambert's and the stereographic in closed form."""

import numpy as np
import pytest

from core.directional.projection import PROJECTIONS, from_disc, to_disc


def upper_directions(count=400, seed=2):
    n = np.random.default_rng(seed).standard_normal((3, count))
    n[2] = np.abs(n[2])
    return n / np.linalg.norm(n, axis=0)


@pytest.mark.parametrize("projection", PROJECTIONS)
def test_there_and_back(projection):
    n = upper_directions()
    np.testing.assert_allclose(from_disc(to_disc(n, projection), projection), n, atol=1e-12)
    pole = np.array([0.0, 0.0, 1.0])  # one vector, and no 0/0 at the middle
    np.testing.assert_array_equal(to_disc(pole, projection), [0.0, 0.0])
    np.testing.assert_array_equal(from_disc(np.zeros(2), projection), pole)


@pytest.mark.parametrize("degrees", [10.0, 45.0, 60.0, 90.0])
def test_radii_in_closed_form(degrees):
    # Lambert 1772: r = √2 sin(θ/2); stereographic: r = tan(θ/2).
    theta = np.radians(degrees)
    n = np.array([0.0, np.sin(theta), np.cos(theta)])
    equal_area, stereographic = (to_disc(n, projection)[1] for projection in PROJECTIONS)
    assert equal_area == pytest.approx(np.sqrt(2.0) * np.sin(theta / 2))
    assert stereographic == pytest.approx(np.tan(theta / 2))


@pytest.mark.parametrize("projection", PROJECTIONS)
def test_rim_and_far_side(projection):
    x = np.array([[1.0], [0.0], [0.0]])
    np.testing.assert_allclose(to_disc(x, projection), [[1.0], [0.0]], atol=1e-15)
    below = np.array([[0.6], [0.0], [-0.8]])
    np.testing.assert_array_equal(to_disc(below, projection), to_disc(-below, projection))
    np.testing.assert_allclose(from_disc(np.array([[3.0], [0.0]]), projection), x, atol=1e-12)


def test_equal_area_keeps_areas():
    # Uniform directions are uniform on the disc: half of them lie within r² < 1/2.
    inside = (to_disc(upper_directions(20000), "equal_area") ** 2).sum(axis=0) < 0.5
    assert inside.mean() == pytest.approx(0.5, abs=0.02)


def test_stereographic_keeps_angles():
    # Two short steps at right angles on the sphere stay at right angles on the disc.
    n = upper_directions(50)
    first = np.cross(n.T, [0.0, 0.0, 1.0]).T
    first /= np.linalg.norm(first, axis=0)
    second = np.cross(n.T, first.T).T
    start = to_disc(n, "stereographic")
    steps = [to_disc(n + 1e-6 * side, "stereographic") - start for side in (first, second)]
    lengths = [np.linalg.norm(step, axis=0) for step in steps]
    cosine = (steps[0] * steps[1]).sum(axis=0) / (lengths[0] * lengths[1])
    np.testing.assert_allclose(cosine, 0.0, atol=1e-4)
    np.testing.assert_allclose(lengths[0], lengths[1], rtol=1e-4)


def test_a_name_that_is_no_projection():
    with pytest.raises(ValueError, match="cylinder"):
        to_disc(upper_directions(3), "cylinder")
    with pytest.raises(ValueError, match="cylinder"):
        from_disc(np.zeros((2, 3)), "cylinder")
