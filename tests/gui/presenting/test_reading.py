"""What the reading is given: the pin, the extremes, cutting error, aggregates, the part."""

from dataclasses import replace

import numpy as np
import pytest

from core import live
from core.directional.extremes import extremes
from core.state import as_matrix
from gui.presenting import reading
from tests.gui.presenting.benches import (
    CUBIC,
    DENSITY,
    PIN,
    STATE,
    TURNS,
    UNSTABLE,
    compressibility,
    looked_at,
    speeds,
    strain_under_tension,
    table_of,
    without_density,
    young,
)

N = np.array(PIN)[:, None]


def row_of(view, label, group="stiffness"):
    return next(row for row in view.rows if (row.label, row.group) == (label, group))


# ------------------------------------------------------------------ the pin
def test_the_pin_reads_a_b_and_their_difference():
    view = reading.reading_view(STATE)
    a, b, difference = (float(x) for x in row_of(view, "E").full)
    assert a == pytest.approx(young(table_of(STATE, "A"), N)[0], rel=1e-12)
    assert b == pytest.approx(young(table_of(STATE, "B"), N)[0], rel=1e-12)
    assert difference == b - a
    beta = float(row_of(view, "β").full[0])
    assert beta == pytest.approx(compressibility(table_of(STATE), N)[0], rel=1e-11)
    assert view.has_b


def test_poisson_at_the_pin_is_the_extreme_over_all_transverse_directions():
    strain = strain_under_tension(table_of(STATE), N)[..., 0]
    across = np.linalg.svd(N.T)[2][1:]
    turn = np.linspace(0, np.pi, 20001)
    m = np.outer(np.cos(turn), across[0]) + np.outer(np.sin(turn), across[1])
    ratios = -np.einsum("ki,ij,kj->k", m, strain, m) / (PIN @ strain @ PIN)
    view = reading.reading_view(STATE)
    least, greatest = (float(row_of(view, f"ν {w}").full[0]) for w in
                       ("least", "greatest"))  # fmt: skip
    assert least == pytest.approx(ratios.min(), abs=1e-7)
    assert greatest == pytest.approx(ratios.max(), abs=1e-7)


def test_waves_at_the_pin():
    view = reading.reading_view(STATE)
    expected = speeds(table_of(STATE), DENSITY, N)[:, 0]
    for speed, name in zip(expected, ("fastest", "middle", "slowest"), strict=True):
        group = f"{name} wave"
        phase = float(row_of(view, "v", group).full[0])
        assert phase == pytest.approx(speed, rel=1e-12)
        assert float(row_of(view, "1/v", group).full[0]) == pytest.approx(1 / speed)
        # ρ v, kg/m³ · km/s = 10⁻³ MRayl.
        impedance = float(row_of(view, "Z", group).full[0])
        assert impedance == pytest.approx(DENSITY * speed * 1e-3)
    splitting = float(row_of(view, "splitting", "middle and slowest wave").full[0])
    assert splitting == pytest.approx(1e3 * (1 / expected[2] - 1 / expected[1]))


def test_one_side_alone_has_no_second_column():
    view = reading.reading_view(looked_at(STATE, layout="B"))
    assert not view.has_b
    assert view.side == "B"
    row = row_of(view, "E")
    assert float(row.full[0]) == pytest.approx(young(table_of(STATE, "B"), N)[0], rel=1e-12)
    assert (row.b, row.difference) == ("", "")


def test_without_a_density_there_are_no_waves_and_it_is_said():
    view = reading.reading_view(without_density(STATE))
    assert {row.group for row in view.rows} == {"stiffness"}
    assert "density" in view.notice
    assert reading.reading_view(STATE).notice == ""


def test_what_is_not_defined_is_a_dash_and_copies_as_nothing():
    diagonal = looked_at(UNSTABLE, pin=tuple([1 / np.sqrt(3)] * 3))
    row = row_of(reading.reading_view(diagonal), "E")
    assert np.isnan(young(table_of(UNSTABLE), np.full((3, 1), 1 / np.sqrt(3)))[0])
    assert (row.a, row.full[0]) == ("–", "")


def test_rounding_dust_reads_as_zero():
    """Along ⟨1 1 0⟩ of a cubic crystal all waves are pure: what is not zero is rounding."""
    state = looked_at(CUBIC, pin=(np.sqrt(0.5), np.sqrt(0.5), 0.0))
    medium = live.part_medium(state.specimen, state.orientation_a)
    dust = [row for row in reading.pin_rows(medium, state.pin) if 0 < abs(row[3]) < 1e-12]
    assert dust
    view = reading.reading_view(state)
    for row in dust:
        assert row_of(view, row[1], row[5]).a == "0"


def test_what_is_the_same_but_for_rounding_does_not_differ():
    assert reading.difference_of(0.1 + 0.2, 0.3, 1.0) == 0.0
    assert reading.difference_of(5e-5, 6e-5, 1e-3) == pytest.approx(1e-5)
    everywhere = replace(
        CUBIC, specimen=replace(CUBIC.specimen, stiffness=isotropic(120.0, 45.0)),
        orientation_b=replace(CUBIC.orientation_a, text="bunge 10 20 30"),
    )  # fmt: skip
    rows = reading.reading_view(looked_at(everywhere, layout="AB")).rows
    assert rows
    assert {row.difference for row in rows if row.label in ("E", "β", "G least", "v")} == {"0"}
    part = reading.part_view(looked_at(everywhere, layout="AB"))
    assert {row[3] for row in part.rows if row[0].startswith(("E ", "G "))} == {"0"}
    slopes = [row[4] for row in reading.cutting_error_view(everywhere).rows]
    assert set(slopes) == {"0"}
    aggregate = reading.aggregate_view(everywhere.specimen)
    index = {row[0]: row[1:] for row in aggregate.rows}
    assert index["A % of K, G"][:2] == ("0", "0")
    assert index["A universal"][0] == "0"


def isotropic(bulk, shear):
    table = np.diag([0.0] * 3 + [shear] * 3)
    table[:3, :3] = bulk - 2 * shear / 3 + 2 * shear * np.eye(3)
    return as_matrix(table)


def test_a_copy_says_whose_numbers_it_has():
    about = reading.reading_view(STATE).about
    assert STATE.specimen.name in about
    assert STATE.orientation_a.text in about
    assert "B: " in about
    assert about.endswith("in part axes")


def test_no_label_is_too_long_for_a_narrow_column():
    rows = reading.reading_view(STATE).rows
    assert max(len(row.label) for row in rows) <= 11
    assert row_of(reading.reading_view(STATE), "E").tooltip.startswith("Young's modulus\n")


def test_tables_of_one_crystal_say_which_of_two_it_is():
    assert reading.whose(STATE) == ""
    two = replace(STATE, other=replace(STATE.specimen, name="blank two"))
    assert reading.whose(looked_at(two, ledger="B")) == "crystal of B: blank two"
    view = reading.aggregate_view(two.specimen, whose=reading.whose(two))
    assert view.notice == f"crystal of A: {STATE.specimen.name}"


@pytest.mark.parametrize(("pin", "words"), [
    ((0.0, 0.0, 1.0), "θ 0.0°  φ 0.0° in part axes"),
    ((0.0, -1.0, 0.0), "θ 90.0°  φ −90.0° in part axes"),
    ((0.6, 0.0, -0.8), "θ 143.1°  φ 0.0° in part axes"),
])  # fmt: skip
def test_the_pin_in_words(pin, words):
    assert reading.pin_words(pin) == words


def test_the_nearest_direction_is_that_of_each_crystal():
    state = replace(CUBIC, pin=(0.0, 0.6, 0.8))
    assert reading.reading_view(state).near_a == "along [0 3 4]"
    off = replace(CUBIC, pin=(0.0, np.sin(np.radians(1.3)), np.cos(np.radians(1.3))))
    assert reading.reading_view(off).near_a == "near [0 0 1], 1.3° off"
    cut = replace(CUBIC, pin=(0.0, 0.0, 1.0),
                  orientation_a=replace(CUBIC.orientation_a, text="Z=[1 1 0] X=[0 0 1]"))
    assert reading.reading_view(cut).near_a == "along [1 1 0]"
    no_cell = replace(STATE, specimen=replace(STATE.specimen, cell=None))
    assert reading.reading_view(no_cell).near_a.startswith("x y z")


# ------------------------------------------------------------------ extremes
def test_extremes_lead_to_where_they_are_in_the_part():
    specimen = STATE.specimen
    medium = live.crystal_medium(specimen.stiffness, specimen.density)
    found = extremes(medium)
    view = reading.extremes_view(specimen, TURNS["A"], found, pending=False)
    assert len(view.rows) == 14
    assert view.rows[0].label == "E least, GPa"
    for row in view.rows[:2]:
        n = np.array(row.direction)[:, None]
        assert young(table_of(STATE), n)[0] == pytest.approx(float(row.full), rel=1e-9)
    samples = np.random.default_rng(1).standard_normal((3, 5000))
    samples /= np.sqrt((samples**2).sum(axis=0))
    values = young(table_of(STATE), samples)
    assert float(view.rows[0].full) <= values.min()
    assert float(view.rows[1].full) >= values.max()


def test_extremes_wait_dimmed_or_not_yet_there():
    view = reading.extremes_view(STATE.specimen, np.eye(3), None, pending=True)
    assert (view.rows, view.pending) == ((), True)
    assert view.notice


def test_an_unbounded_extreme_leads_nowhere():
    specimen = UNSTABLE.specimen
    found = extremes(live.crystal_medium(specimen.stiffness, specimen.density))
    view = reading.extremes_view(specimen, np.eye(3), found, pending=False)
    missing = [row for row in view.rows if row.value == "–"]
    assert missing
    assert all(row.direction is None for row in missing)


# ------------------------------------------------------------------ cutting error
def test_the_cutting_error_holds_all_values_within_the_cone():
    state = replace(STATE, cutting_error_deg=2.0)
    view = reading.cutting_error_view(state)
    side, label, least, greatest, _, unit = view.full[0]
    assert (side, label, unit) == ("A", "E", "GPa")
    rng = np.random.default_rng(3)
    cone = N + np.tan(np.radians(2.0)) * rng.uniform(-1, 1, (3, 20000))
    cone /= np.sqrt((cone**2).sum(axis=0))
    cone = cone[:, np.array(PIN) @ cone >= np.cos(np.radians(2.0))]
    values = young(table_of(STATE), cone)
    span = values.max() - values.min()
    assert float(least) <= values.min()
    assert float(greatest) >= values.max()
    assert float(greatest) - float(least) < 1.05 * span


def test_the_cutting_error_follows_the_quantity_on_the_stage():
    def labels(**choices):
        view = reading.cutting_error_view(looked_at(STATE, layout="A", **choices))
        return [row[1] for row in view.rows]

    assert labels() == ["E", "fastest v", "middle v", "slowest v"]
    assert labels(quantity="compressibility")[0] == "β"
    assert len(labels(quantity="power_flow")) == 7
    bare = without_density(looked_at(STATE, layout="A", quantity="phase"))
    assert [row[1] for row in reading.cutting_error_view(bare).rows] == ["E"]


# ------------------------------------------------------------------ aggregates and part
def cell(view, label, column):
    return next(float(row[column]) for row in view.full if row[0] == label)


def test_averages_of_a_cubic_aggregate():
    """Hill 1952, Proc. Phys. Soc. A 65, 349: closed forms for cubic crystals."""
    c11, c12, c44 = 230.0, 140.0, 120.0
    view = reading.aggregate_view(CUBIC.specimen)
    voigt = (c11 - c12 + 3 * c44) / 5
    reuss = 5 * (c11 - c12) * c44 / (4 * c44 + 3 * (c11 - c12))
    assert cell(view, "Voigt", 1) == pytest.approx((c11 + 2 * c12) / 3)
    assert cell(view, "Voigt", 2) == pytest.approx(voigt)
    assert cell(view, "Reuss", 2) == pytest.approx(reuss)
    assert cell(view, "Hill", 2) == pytest.approx((voigt + reuss) / 2)
    assert cell(view, "Zener ratio", 1) == pytest.approx(2 * c44 / (c11 - c12))
    assert cell(view, "A universal", 1) == pytest.approx(5 * voigt / reuss - 5)
    labels = [row[0] for row in reading.aggregate_view(STATE.specimen).rows]
    assert "Zener ratio" not in labels
    bare = [row[0] for row in reading.aggregate_view(without_density(STATE).specimen).rows]
    assert "Debye, km/s" in labels
    assert "Debye, km/s" not in bare


def test_the_part_table_is_that_of_the_turned_table():
    view = reading.part_view(STATE)
    for side, column in (("A", 1), ("B", 2)):
        compliance = np.linalg.inv(table_of(STATE, side))
        assert cell(view, "E along Y, GPa", column) == pytest.approx(1 / compliance[1, 1])
        assert cell(view, "G in XY, GPa", column) == pytest.approx(1 / compliance[5, 5])
    difference = cell(view, "E along Y, GPa", 2) - cell(view, "E along Y, GPa", 1)
    assert cell(view, "E along Y, GPa", 3) == pytest.approx(difference)
    assert reading.part_view(looked_at(STATE, layout="B")).header == ("", "B")
    labels = [row[0] for row in view.rows]
    flow = labels.index("ψ3 Z, °")
    assert view.tooltips[flow] == "slowest wave: power flow off Z, °"


def test_a_part_without_a_density_beside_one_with_it():
    state = replace(STATE, other=replace(STATE.specimen, density=None))
    view = reading.part_view(state)
    speed = next(row for row in view.rows if row[0] == "v1 along X, km/s")
    assert speed[1] != "–"
    assert speed[2] == speed[3] == "–"


def test_nothing_in_the_reading_of_an_unstable_table_breaks():
    worse = (as_matrix(-np.eye(6)), as_matrix(np.zeros((6, 6))))
    for table in (UNSTABLE.specimen.stiffness, *worse):
        state = replace(UNSTABLE, specimen=replace(UNSTABLE.specimen, stiffness=table))
        assert reading.reading_view(state).rows
        assert reading.cutting_error_view(state).rows
        assert reading.aggregate_view(state.specimen).rows
        assert reading.part_view(state).rows
