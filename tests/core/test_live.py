"""What the stage shows: one object for one request, and shapes known in closed form."""

import dataclasses

import numpy as np
import pytest

from core import live
from core.directional.acoustic_axes import acoustic_axes
from core.directional.projection import to_disc
from core.directional.quantities import QUANTITIES
from core.state import OrientationChoice, Specimen, as_matrix
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, hexagonal, isotropic, random_stiffness, rotated

RHO = 2700.0
GLASS = Specimen(
    "glass", as_matrix(isotropic(40.0, 30.0)), density=RHO, crystal_class="isotropic"
)
ROCK = Specimen("rock", as_matrix(random_stiffness(np.random.default_rng(1))), density=RHO)
CUBE = Specimen(
    "cube", as_matrix(cubic(131.0, 97.4, 86.2)), density=8120.0, crystal_class="cubic"
)
AS_IT_IS = OrientationChoice()
Y = (0.0, 1.0, 0.0)
OBLIQUE = (0.6, 0.0, 0.8)

YOUNG = 9 * 40.0 * 30.0 / (3 * 40.0 + 30.0)  # 9KG/(3K + G)
SPEEDS = [np.sqrt((40.0 + 40.0) * 1e9 / RHO) / 1e3] + [np.sqrt(30.0e9 / RHO) / 1e3] * 2


def glass():
    return live.part_medium(GLASS, AS_IT_IS)


# --- memory ---------------------------------------------------------------------------------


def test_equal_requests_give_the_same_object():
    again = dataclasses.replace(ROCK)
    assert again is not ROCK
    choice = OrientationChoice("bunge 10 20 30", (0.1, 0.0, 0.0))
    medium = live.part_medium(ROCK, choice)
    same = live.part_medium(again, OrientationChoice("bunge 10 20 30", (0.1, 0.0, 0.0)))
    assert same is medium
    assert live.surface(medium, "young", 3) is live.surface(same, "young", 3)
    assert live.section(medium, "phase", Y) is live.section(same, "phase", Y)
    picture = live.hemisphere(medium, "young", "equal_area", 31)
    assert live.hemisphere(same, "young", "equal_area", 31) is picture


def test_a_new_name_or_another_word_for_the_same_turn_computes_nothing_again():
    renamed = dataclasses.replace(ROCK, name="another", notes="changed", temperature_c=5.0)
    medium = live.part_medium(ROCK, AS_IT_IS)
    assert live.part_medium(renamed, AS_IT_IS) is medium
    assert live.part_medium(ROCK, OrientationChoice("bunge 0 0 0")) is medium


def test_another_request_gives_another_object():
    medium = live.part_medium(ROCK, AS_IT_IS)
    assert live.part_medium(ROCK, OrientationChoice("bunge 1 0 0")) is not medium
    lighter = dataclasses.replace(ROCK, density=1000.0)
    assert live.part_medium(lighter, AS_IT_IS) is not medium
    assert live.surface(medium, "young", 3) is not live.surface(medium, "shear_least", 3)


def test_what_is_remembered_cannot_be_written_to():
    medium = live.part_medium(ROCK, AS_IT_IS)
    for shared in (
        live.rotation(AS_IT_IS, ROCK),
        live.hemisphere(medium, "young", "equal_area", 31),
        live.section_circle(Y).n,
    ):
        with pytest.raises(ValueError, match="read-only"):
            shared[0] = 0.0


# --- media ----------------------------------------------------------------------------------


def test_the_part_medium_is_turned_as_a_fourth_rank_tensor():
    choice = OrientationChoice("axis 0.3,0.4,0.87 25", (1.0, -2.0, 3.0))
    R = live.rotation(choice, ROCK)
    np.testing.assert_allclose(R @ R.T, np.eye(3), atol=1e-14)
    found = live.part_medium(ROCK, choice)
    np.testing.assert_allclose(
        found.stiffness.voigt, rotated(np.array(ROCK.stiffness), R), atol=1e-10
    )
    assert found.density == RHO
    crystal = live.crystal_medium(ROCK.stiffness, ROCK.density)
    np.testing.assert_array_equal(crystal.stiffness.voigt, np.array(ROCK.stiffness))


# --- sections -------------------------------------------------------------------------------


@pytest.mark.parametrize("normal", [Y, (0.0, 0.0, 1.0), (1.0, 0.0, 0.0), OBLIQUE])
@pytest.mark.parametrize(
    ("key", "radii"),
    [
        ("young", [YOUNG]),
        ("shear_least", [30.0]),
        ("phase", SPEEDS),
        ("wave", SPEEDS),
        ("slowness", [1 / v for v in SPEEDS]),
    ],
)
def test_the_section_of_an_isotropic_solid_is_a_circle(key, radii, normal):
    found = live.section(glass(), key, normal)
    assert found.points.shape == (len(radii), 2, live.SECTION_POINTS)
    radius = np.hypot(found.points[:, 0], found.points[:, 1])
    np.testing.assert_allclose(radius, np.tile(radii, (live.SECTION_POINTS, 1)).T, rtol=1e-7)
    np.testing.assert_allclose(found.values, radius, rtol=1e-12)
    np.testing.assert_allclose(found.points[:, :, 0], found.points[:, :, -1])  # closed
    assert not found.out_of_plane.any()


def test_the_wave_section_of_an_isotropic_solid_is_its_phase_section():
    wave, phase = (live.section(glass(), key, OBLIQUE) for key in ("wave", "phase"))
    np.testing.assert_allclose(wave.points, phase.points, atol=1e-7)


def test_a_section_starts_to_the_right_and_turns_upwards():
    # Along Y the plane reads X to the right and Z up; c/a-soft crystal: E differs along X, Z.
    table = hexagonal(158.0, 38.2, 47.5, 54.6, 36.3)
    S = np.linalg.inv(table)
    found = live.section(live.crystal_medium(as_matrix(table), None), "young", Y)
    right, up = found.points[0, :, 0], found.points[0, :, 180]
    np.testing.assert_allclose(right, [1 / S[0, 0], 0], atol=1e-10)
    np.testing.assert_allclose(up, [0, 1 / S[2, 2]], atol=1e-10)


def test_a_negative_value_is_drawn_by_its_size_and_keeps_its_sign():
    table = np.diag([74.2, 118.9, 29.8, 17.2, 9.6, 33.5])
    table[0, 2] = table[2, 0] = -21.6
    table[0, 1] = table[1, 0] = 18.4
    table[1, 2] = table[2, 1] = 12.7
    found = live.section(live.crystal_medium(as_matrix(table), None), "compressibility", Y)
    beta_x = np.linalg.inv(table)[:3, :3].sum(axis=0)[0] * 1e3
    assert found.values[0, 0] == pytest.approx(beta_x)
    flipped = live.section(
        live.crystal_medium(as_matrix(table), None), "compressibility", (0.0, 0.0, 1.0)
    )
    beta_y = np.linalg.inv(table)[:3, :3].sum(axis=0)[1] * 1e3
    assert beta_y < 0
    assert flipped.values[0, 180] == pytest.approx(beta_y)
    np.testing.assert_allclose(flipped.points[0, :, 180], [0, -beta_y], atol=1e-12)


def test_rays_stay_in_a_mirror_plane_and_leave_others():
    medium = live.part_medium(CUBE, AS_IT_IS)
    mirror = live.section(medium, "wave", Y)
    assert not mirror.out_of_plane[0].any()
    tilted = live.part_medium(CUBE, OrientationChoice("bunge 20 30 40"))
    assert live.section(tilted, "wave", Y).out_of_plane[0].any()


def test_a_section_is_broken_where_sheets_cross_along_a_line_and_nowhere_else():
    """With C66 < C44 SH and SV cross on a cone about c (as in `test_acoustic_axes`)."""
    c11, c66 = 161.0, 36.0
    crossing = Stiffness.from_voigt(hexagonal(c11, c11 - 2 * c66, 50.1, 61.0, 38.3))
    medium = live.crystal_medium(as_matrix(crossing.voigt), 7000.0)
    (line,) = (axis for axis in acoustic_axes(medium) if axis.kind == "line")
    tilt = np.degrees(np.arccos(abs(line.direction[2])))
    found = live.section(medium, "wave", Y)
    assert not found.broken[0].any()
    for sheet in (1, 2):
        # The circle starts along X and goes towards Z, half a degree a step.
        places = 0.5 * (np.flatnonzero(found.broken[sheet]) + 0.5)
        expected = np.sort([90 - tilt, 90 + tilt, 270 - tilt, 270 + tilt])
        assert places == pytest.approx(expected, abs=0.3)
    assert not live.section(medium, "slowness", Y).broken.any()


def test_the_lid_of_a_cone_stays_in_the_section():
    """In the plane of [111] and [001] the shear sheets cross at [111] alone."""
    medium = live.part_medium(CUBE, AS_IT_IS)
    plane = (1 / np.sqrt(2), -1 / np.sqrt(2), 0.0)
    assert not live.section(medium, "wave", plane).broken.any()


@pytest.mark.parametrize("key", QUANTITIES)
def test_every_quantity_has_a_section_and_a_surface(key):
    medium = live.part_medium(ROCK, AS_IT_IS)
    sheets = QUANTITIES[key].sheets
    assert live.section(medium, key, OBLIQUE).values.shape == (sheets, live.SECTION_POINTS)
    assert live.surface(medium, key, 3).shape == (sheets, 7, 642)


def test_an_unstable_crystal_has_gaps_and_no_errors():
    unstable = live.crystal_medium(as_matrix(cubic(90.0, 95.0, 40.0)), 4000.0)
    for key in QUANTITIES:
        assert live.section(unstable, key, Y).points.shape[1] == 2
        live.surface(unstable, key, 3)
    assert np.isnan(live.section(unstable, "phase", (0.0, 0.0, 1.0)).values[2]).any()


# --- hemisphere -----------------------------------------------------------------------------


@pytest.mark.parametrize("projection", ["equal_area", "stereographic"])
def test_the_disc_lies_as_on_paper(projection):
    size = 31
    dirs, inside = live.disc(projection, size)
    assert dirs.count == inside.sum()
    assert not inside[0, 0]
    row, column = np.nonzero(inside)
    x, y = to_disc(dirs.n, projection)
    step = 2 / size
    within = np.hypot(*(np.array([column, row]) + 0.5) / size * 2 - 1) <= 1
    assert (dirs.n[2] > -1e-12).all()
    np.testing.assert_allclose(x[within], ((column + 0.5) * step - 1)[within], atol=1e-12)
    np.testing.assert_allclose(y[within], (1 - (row + 0.5) * step)[within], atol=1e-12)


def test_the_hemisphere_of_an_isotropic_solid_is_one_number():
    picture = live.hemisphere(glass(), "phase", "stereographic", 31)
    inside = live.disc("stereographic", 31)[1]
    assert picture.shape == (3, 31, 31)
    np.testing.assert_array_equal(np.isnan(picture), np.broadcast_to(~inside, picture.shape))
    for sheet, speed in zip(picture, SPEEDS, strict=True):
        np.testing.assert_allclose(sheet[inside], speed, rtol=1e-7)


def test_the_middle_of_the_hemisphere_is_part_z():
    picture = live.hemisphere(live.part_medium(ROCK, AS_IT_IS), "young", "equal_area", 31)
    compliance = np.linalg.inv(np.array(ROCK.stiffness))
    assert picture[0, 15, 15] == pytest.approx(1 / compliance[2, 2])


# --- sweep ----------------------------------------------------------------------------------


def test_an_arc_starts_at_the_pin_and_turns_right_handed():
    pin = (1.0, 0.0, 0.0)
    found = live.arc(pin, (0.0, 0.0, 1.0), np.array([0.0, 90.0, -90.0, 180.0])).n.T
    np.testing.assert_allclose(
        found, [[1, 0, 0], [0, 1, 0], [0, -1, 0], [-1, 0, 0]], atol=1e-15
    )
    np.testing.assert_array_equal(found[0], pin)


def test_an_arc_keeps_its_angle_to_the_axis():
    axis = np.array([0.36, 0.48, 0.8])
    found = live.arc(OBLIQUE, tuple(axis), np.linspace(0, 360, 73)).n
    np.testing.assert_allclose(axis @ found, axis @ np.array(OBLIQUE), atol=1e-14)
    np.testing.assert_allclose(found[:, 0], OBLIQUE, atol=1e-15)
    np.testing.assert_allclose(found[:, -1], OBLIQUE, atol=1e-14)
    stuck = live.arc(tuple(axis), tuple(axis), np.array([0.0, 45.0])).n
    np.testing.assert_allclose(stuck, np.stack([axis, axis], axis=1), atol=1e-14)


def test_the_medium_agrees_with_the_tensor_room():
    medium = live.part_medium(CUBE, OrientationChoice("Z=[1 1 1] X=[1 -1 0]"))
    direct = Stiffness.from_voigt(CUBE.stiffness).rotate(
        live.rotation(OrientationChoice("Z=[1 1 1] X=[1 -1 0]"), CUBE)
    )
    np.testing.assert_array_equal(medium.stiffness.voigt, direct.voigt)
