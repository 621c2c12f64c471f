"""The quantity table: complete, consistent with itself, and helpful about wrong names."""

import numpy as np
import pytest

from core.directional.medium import Medium
from core.directional.moduli import poisson_extremes, shear_extremes
from core.directional.quantities import QUANTITIES, quantity
from core.directional.sphere import directions
from core.errors import InputError
from core.tensor.stiffness import Stiffness
from tests.materials import cubic, random_physical

KEYS = ("young", "compressibility", "shear_least", "shear_greatest", "poisson_least",
        "poisson_greatest", "slowness", "phase", "wave", "power_flow", "polarisation",
        "focusing")  # fmt: skip
DIRS = directions(np.random.default_rng(0).normal(size=(3, 40)))


def triclinic(density=2700.0):
    table = random_physical(np.random.default_rng(1))
    return Medium(Stiffness.from_voigt(table), density)


def test_table_is_in_window_order():
    assert tuple(QUANTITIES) == KEYS
    assert [entry.key for entry in QUANTITIES.values()] == list(KEYS)


@pytest.mark.parametrize("entry", QUANTITIES.values(), ids=KEYS)
def test_entries_are_complete(entry):
    assert entry.name[0].isupper()
    assert entry.symbol
    assert entry.definition.endswith(".")
    assert ". " not in entry.definition  # one sentence
    assert entry.source.endswith(".")
    assert entry.sheets == (3 if entry.wave else 1)
    assert entry.shape in {"radial", "slowness", "wave"}
    assert entry.colour == ("diverging" if entry.signed else "sequential")
    assert 0 <= entry.decimals <= 4


def test_names_and_symbols_tell_quantities_apart():
    for field in ("name", "symbol", "definition"):
        assert len({getattr(entry, field) for entry in QUANTITIES.values()}) == len(KEYS)


@pytest.mark.parametrize("entry", QUANTITIES.values(), ids=KEYS)
def test_values_have_one_row_per_sheet(entry):
    values = entry.values(triclinic(), DIRS)
    assert values.shape == (entry.sheets, DIRS.count)
    assert values.dtype == np.float64


@pytest.mark.parametrize("entry", QUANTITIES.values(), ids=KEYS)
def test_only_wave_quantities_need_a_density(entry):
    medium = triclinic(density=None)
    if entry.wave:
        with pytest.raises(ValueError, match="density"):
            entry.values(medium, DIRS)
    else:
        assert np.isfinite(entry.values(medium, DIRS)).all()


def test_unsigned_quantities_stay_positive_where_signed_ones_do_not():
    table = cubic(60.0, 60.0, 20.0)
    table[0, 1] = table[1, 0] = 90.0
    table[1, 1], table[2, 2] = 200.0, 150.0
    medium = Medium(Stiffness.from_voigt(table), 2500.0)
    for entry in QUANTITIES.values():
        values = entry.values(medium, DIRS)
        values = values[np.isfinite(values)]
        if not entry.signed:
            assert values.min() >= 0
        elif entry.key != "poisson_greatest":
            assert values.min() < 0


def test_sheets_run_from_the_fastest_wave():
    medium = triclinic()
    assert np.all(np.diff(QUANTITIES["phase"].values(medium, DIRS), axis=0) <= 0)
    assert np.all(np.diff(QUANTITIES["slowness"].values(medium, DIRS), axis=0) >= 0)


def test_members_of_a_pair_are_not_exchanged():
    medium = triclinic()
    for kind, pair in (("shear", shear_extremes), ("poisson", poisson_extremes)):
        least, greatest = pair(medium, DIRS)
        assert np.array_equal(QUANTITIES[f"{kind}_least"].values(medium, DIRS)[0], least)
        assert np.array_equal(QUANTITIES[f"{kind}_greatest"].values(medium, DIRS)[0], greatest)
        assert np.all(least < greatest)


def test_slowness_and_ray_speed_follow_from_the_phase_speed():
    medium = triclinic()
    keys = ("phase", "slowness", "wave", "power_flow")
    speed, slowness, ray, angle = (QUANTITIES[key].values(medium, DIRS) for key in keys)
    assert np.allclose(speed * slowness, 1, rtol=1e-14)
    assert np.all(ray >= speed * (1 - 1e-12))
    # cos ψ = v/|V|; compared by the cosine, which the angle determines without loss.
    assert np.allclose(np.cos(np.radians(angle)), speed / ray, rtol=1e-10)


def test_lookup():
    assert quantity("young") is QUANTITIES["young"]


@pytest.mark.parametrize(
    ("key", "hint"),
    [("yuong", "young"), ("Shear least", "shear_least"), ("slowness ", "slowness")],
)
def test_wrong_name_is_told_the_nearest(key, hint):
    with pytest.raises(InputError) as caught:
        quantity(key)
    assert f"'{key}'" in caught.value.message
    assert f"'{hint}'" in caught.value.hint


def test_name_near_to_nothing_is_told_all():
    with pytest.raises(InputError) as caught:
        quantity("xqzk")
    assert all(key in caught.value.hint for key in KEYS)
